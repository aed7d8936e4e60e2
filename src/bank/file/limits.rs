//! `limits`: published ones by their id, own ones with a bound and a time.

use super::parts::owner;
use super::reader::{Group, Reader, Spot};
use super::top::unread;
use crate::bank::description::{Bound, Limit, Rule};
use crate::quantity::{Quantity, Time};

const BOUNDS: [&str; 4] = ["voltage", "charge", "initial_charge", "energy"];
const OWN: [&str; 7] = ["id", "voltage", "charge", "initial_charge", "energy", "any_of", "within"];
const KEYS: [&str; 10] =
    ["use", "id", "voltage", "charge", "initial_charge", "energy", "any_of", "within", "at", "single_fault"];

/// Limits, in the order of the file.
pub(super) fn read(reader: &mut Reader<'_>, top: &Group<'_>) -> Vec<Limit> {
    let example = "- {id: site-rule, voltage: 50 V, within: 5 min}";
    let spots = reader.may(top, "limits").and_then(|spot| reader.list(&spot, "entry", example)).unwrap_or_default();
    spots.iter().enumerate().map(|(i, spot)| limit(reader, spot, i)).collect()
}

fn limit(reader: &mut Reader<'_>, spot: &Spot<'_>, i: usize) -> Limit {
    let name = unread("limit", i);
    let mut limit = Limit { rule: Rule::Published(name.clone()), id: name, at: None, single_fault: false };
    let Some(group) = reader.group(spot, owner(spot, "limit"), &KEYS) else { return limit };
    limit.at = reader.may(&group, "at").and_then(|spot| reader.pair(&spot));
    limit.single_fault = reader.may(&group, "single_fault").and_then(|spot| reader.flag(&spot)).unwrap_or(false);
    if group.has("use") {
        for key in group.given(&OWN) {
            let text = format!("a published limit (`use`) brings its own `{key}`");
            reader.wrong_key(
                &group,
                key,
                "keys-exclude-each-other",
                text,
                "leave it out, or write a limit of your own without `use`",
            );
        }
        if let Some(id) = reader.may(&group, "use").and_then(|spot| reader.text(&spot)) {
            limit.rule = Rule::Published(id.clone());
            limit.id = id;
        }
        return limit;
    }
    if !group.has("id") {
        let text = format!("{} has neither `use` nor `id`", group.owner);
        let help = "add `use: iec-60204-1` for a published limit, or `id: site-rule` for your own";
        reader.wrong_key(&group, "", "missing-key", text, help);
    } else if let Some(id) = reader.may(&group, "id").and_then(|spot| reader.text(&spot)) {
        limit.id = id;
    }
    let any_of = bounds(reader, &group);
    // The charge at isolation has its time in its name.
    let timeless = any_of.as_ref().is_some_and(|bounds| bounds.iter().all(Bound::is_of_isolation));
    let within = if timeless && !group.has("within") {
        Some(Time::from_si(0.0))
    } else {
        reader.need(&group, "within", "5 min").and_then(|spot| reader.quantity(&spot))
    };
    if let (Some(any_of), Some(within)) = (any_of, within) {
        limit.rule = Rule::Own { any_of, within };
    }
    limit
}

/// The bounds of an own limit: one beside the other keys, or several under `any_of`.
fn bounds(reader: &mut Reader<'_>, group: &Group<'_>) -> Option<Vec<Bound>> {
    let direct = group.given(&BOUNDS);
    match (direct.as_slice(), group.has("any_of")) {
        ([], false) => {
            let text = format!("{} has no bound", group.owner);
            let help = "add `voltage: 50 V`, or `any_of: {voltage: 60 V, initial_charge: 60 uC}`";
            reader.wrong_key(group, "", "limit-without-bound", text, help);
            None
        }
        ([key], false) => bound(reader, group, key).map(|bound| vec![bound]),
        ([key, ..], true) => {
            let text = format!("{} has both `any_of` and `{key}`", group.owner);
            reader.wrong_key(group, key, "keys-exclude-each-other", text, "put every bound under `any_of`");
            None
        }
        ([_, second, ..], false) => {
            let text = format!("{} has several bounds, and does not say that one is enough", group.owner);
            let help = "put them under `any_of` where one is enough; where all are asked for, write a limit for each";
            reader.wrong_key(group, second, "keys-exclude-each-other", text, help);
            None
        }
        ([], true) => {
            let spot = reader.may(group, "any_of")?;
            let any_of = reader.group(&spot, format!("`any_of` of {}", group.owner), &BOUNDS)?;
            let given = any_of.given(&BOUNDS);
            if given.is_empty() {
                let help = "add `voltage: 60 V`, `charge`, `initial_charge` or `energy`";
                reader.wrong(&spot, "limit-without-bound", "no bound is given", help);
                return None;
            }
            let bounds: Vec<_> = given.iter().map(|key| bound(reader, &any_of, key)).collect();
            bounds.into_iter().collect()
        }
    }
}

fn bound(reader: &mut Reader<'_>, group: &Group<'_>, key: &str) -> Option<Bound> {
    let spot = reader.may(group, key)?;
    match key {
        "voltage" => reader.quantity(&spot).map(Bound::Voltage),
        "charge" => reader.quantity(&spot).map(Bound::Charge),
        "initial_charge" => reader.quantity(&spot).map(Bound::InitialCharge),
        _ => reader.quantity(&spot).map(Bound::Energy),
    }
}
