//! `procedure`: the steps by which people discharge the bank.

use super::reader::{Group, Reader, Spot};
use super::top::unread;
use crate::bank::description::{Hold, Lasts, Pair, Step};
use crate::quantity::{Quantity, Time};

const KEYS: [&str; 8] = ["step", "for", "until", "connect", "disconnect", "measure", "hold", "touch"];

/// The steps, in the order of the file.
pub(super) fn read(reader: &mut Reader<'_>, top: &Group<'_>) -> Vec<Step> {
    let example = "- {step: Wait for the bleeders, for: 5 min}";
    let spots = reader.may(top, "procedure").and_then(|spot| reader.list(&spot, "entry", example)).unwrap_or_default();
    spots.iter().enumerate().map(|(i, spot)| step(reader, spot, i)).collect()
}

fn step(reader: &mut Reader<'_>, spot: &Spot<'_>, i: usize) -> Step {
    let mut step = Step {
        name: unread("step", i),
        lasts: Lasts::For(Time::from_si(0.0)),
        connect: vec![],
        disconnect: vec![],
        measure: vec![],
        hold: None,
        touch: false,
    };
    let owner = format!("step {}", i + 1);
    let Some(group) = reader.group(spot, owner, &KEYS) else {
        reader.doubt.steps = true;
        return step;
    };
    step.name =
        reader.need(&group, "step", "Wait for the bleeders").and_then(|spot| reader.text(&spot)).unwrap_or(step.name);
    step.lasts = lasts(reader, &group).unwrap_or(step.lasts);
    step.connect = ids(reader, &group, "connect");
    step.disconnect = ids(reader, &group, "disconnect");
    step.measure = measure(reader, &group);
    step.hold = reader.may(&group, "hold").and_then(|spot| hold(reader, &spot));
    step.touch = reader.may(&group, "touch").and_then(|spot| reader.flag(&spot)).unwrap_or(false);
    step
}

/// Exactly one of `for` and `until`.
fn lasts(reader: &mut Reader<'_>, group: &Group<'_>) -> Option<Lasts> {
    match (group.has("for"), group.has("until")) {
        (true, false) => {
            let spot = reader.may(group, "for")?;
            reader.quantity(&spot).map(Lasts::For)
        }
        (false, true) => {
            let spot = reader.may(group, "until")?;
            hold(reader, &spot).map(Lasts::Until)
        }
        (true, true) => {
            let text = format!("{} has both `for` and `until`", group.owner);
            reader.wrong_key(group, "until", "keys-exclude-each-other", text, "keep one of the two");
            None
        }
        (false, false) => {
            let text = format!("{} does not say how long it lasts", group.owner);
            let help = "add `for: 5 min`, `for: 0 s`, or `until: {below: 50 V, at: [P, N]}`";
            reader.wrong_key(group, "", "missing-key", text, help);
            None
        }
    }
}

/// A voltage that people have to find themselves below, and where.
fn hold(reader: &mut Reader<'_>, spot: &Spot<'_>) -> Option<Hold> {
    let group = reader.group(spot, spot.name.clone(), &["below", "at"])?;
    let below = reader.need(&group, "below", "50 V").and_then(|spot| reader.quantity(&spot));
    let at = reader.may(&group, "at").and_then(|spot| reader.pair(&spot));
    // A pair that was meant and could not be read is not "every test point".
    let readable = at.is_some() || !group.has("at");
    below.filter(|_| readable).map(|below| Hold { below, at })
}

fn ids(reader: &mut Reader<'_>, group: &Group<'_>, key: &str) -> Vec<String> {
    let Some(spot) = reader.may(group, key) else {
        reader.doubt.steps |= group.has(key);
        return vec![];
    };
    let (ids, complete) = reader.names(&spot, "id", "[T1]");
    reader.doubt.steps |= !complete;
    // With an entry missing, the others would be reported at the wrong places.
    if complete { ids } else { vec![] }
}

fn measure(reader: &mut Reader<'_>, group: &Group<'_>) -> Vec<Pair> {
    let pairs = reader.may(group, "measure").and_then(|spot| reader.pairs(&spot)).unwrap_or_default();
    let placeholder = |i| [unread("measured", i), unread("other measured", i)];
    pairs.into_iter().enumerate().map(|(i, pair)| pair.unwrap_or_else(|| placeholder(i))).collect()
}
