//! The top of a bank file: what is said of the bank as a whole.

use super::parts::Terminals;
use super::reader::{Group, Reader, Spot, TOP};
use super::tree::Node;
use super::{charge, limits, parts, steps};
use crate::bank::description::{Description, Source, StrapLimit};
use crate::bank::validate::UNREAD;
use crate::quantity::{Quantity, Voltage};

const KEYS: [&str; 20] = [
    "ebbvolt",
    "tag",
    "title",
    "location",
    "prepared_by",
    "revision",
    "notes",
    "ambient",
    "touch_voltage",
    "hold_energy",
    "strap_limit",
    "terminals",
    "charged_to",
    "capacitors",
    "resistors",
    "sinks",
    "supplies",
    "test_points",
    "limits",
    "procedure",
];

/// The format of bank files that this version reads.
pub(super) const FORMAT: &str = "1";

/// A name for something that could not be read; it is the name of nothing in the file.
pub(super) fn unread(what: &str, index: usize) -> String {
    format!("{UNREAD}{what}{index}")
}

/// Reads a whole file. What could not be read has a placeholder, and the reader's doubt says so. `None` where the file
/// is no mapping.
pub(super) fn read(reader: &mut Reader<'_>, node: &Node) -> Option<Description> {
    let spot = Spot::top(node);
    if !spot.is_mapping() {
        reader.error(
            "not-a-mapping",
            node.span,
            "a bank file begins with keys and their values",
            "begin with `ebbvolt: 1` and `tag: …`, each on a line of its own",
        );
        return None;
    }
    let top = reader.group(&spot, TOP.into(), &KEYS)?;
    format(reader, &top);
    let tag = reader.need(&top, "tag", "PU-07").and_then(|spot| reader.text(&spot));
    let touch_voltage = reader
        .need(&top, "touch_voltage", "... V` with the voltage that you choose to wait for, such as `60 V")
        .and_then(|spot| reader.quantity(&spot));
    let terminals = terminals(reader, &top);
    let charged_to = charge::read(reader, &top);
    let three_phase = matches!(charged_to.source, Source::ThreePhase { .. });
    let fed = Terminals { names: &terminals, three_phase };
    let capacitors = parts::capacitors(reader, &top, &fed);
    let resistors = parts::resistors(reader, &top, &fed);
    if reader.doubt.phases
        && (capacitors.iter().any(|c| c.phases.is_some()) || resistors.iter().any(|r| r.phases.is_some()))
    {
        // Where a star is joined depends on how the neutral stands.
        reader.doubt.nodes = true;
    }
    Some(Description {
        tag: tag.unwrap_or_else(|| unread("tag", 0)),
        title: text(reader, &top, "title"),
        location: text(reader, &top, "location"),
        prepared_by: text(reader, &top, "prepared_by"),
        revision: text(reader, &top, "revision"),
        notes: text(reader, &top, "notes"),
        ambient: optional(reader, &top, "ambient"),
        touch_voltage: touch_voltage.unwrap_or_else(|| Voltage::from_si(1.0)),
        hold_energy: optional(reader, &top, "hold_energy"),
        strap_limit: strap_limit(reader, &top),
        sinks: parts::sinks(reader, &top),
        supplies: parts::supplies(reader, &top),
        test_points: test_points(reader, &top),
        limits: limits::read(reader, &top),
        procedure: steps::read(reader, &top),
        terminals,
        charged_to,
        capacitors,
        resistors,
    })
}

/// A quantity that may be left out.
pub(super) fn optional<Q: Quantity>(reader: &mut Reader<'_>, group: &Group<'_>, key: &str) -> Option<Q> {
    reader.may(group, key).and_then(|spot| reader.quantity(&spot))
}

fn text(reader: &mut Reader<'_>, top: &Group<'_>, key: &str) -> Option<String> {
    reader.may(top, key).and_then(|spot| reader.text(&spot))
}

fn format(reader: &mut Reader<'_>, top: &Group<'_>) {
    let Some(spot) = reader.need(top, "ebbvolt", FORMAT) else { return };
    let help = format!("write `ebbvolt: {FORMAT}`: the version of the format, without quotes");
    match reader.scalar(&spot, "the version of the format", &help) {
        Some((FORMAT, true)) | None => {}
        Some(_) => reader.wrong(&spot, "format-version", "this program reads files of format 1 only", help),
    }
}

fn terminals(reader: &mut Reader<'_>, top: &Group<'_>) -> Vec<String> {
    if !top.has("terminals") {
        return vec!["P".into(), "N".into()];
    }
    let read = reader.may(top, "terminals").map(|spot| reader.names(&spot, "terminal", "[P, N]"));
    match read {
        Some((names, true)) => names,
        _ => {
            reader.doubt.nodes = true;
            reader.doubt.phases = true;
            reader.doubt.voltages = true;
            vec![unread("terminal", 0), unread("terminal", 1)]
        }
    }
}

fn strap_limit(reader: &mut Reader<'_>, top: &Group<'_>) -> StrapLimit {
    let spot = reader.may(top, "strap_limit");
    let group = spot.and_then(|spot| reader.group(&spot, "`strap_limit`".into(), &["energy", "current"]));
    let Some(group) = group else { return StrapLimit::default() };
    if group.given(&["energy", "current"]).is_empty() {
        let text = String::from("`strap_limit` has neither `energy` nor `current`");
        reader.wrong_key(&group, "", "missing-key", text, "add `energy: 10 J`, `current: 1 kA` or both");
    }
    StrapLimit { energy: optional(reader, &group, "energy"), current: optional(reader, &group, "current") }
}

fn test_points(reader: &mut Reader<'_>, top: &Group<'_>) -> Option<Vec<[String; 2]>> {
    let spot = reader.may(top, "test_points")?;
    let pairs = reader.pairs(&spot)?;
    // A pair that could not be read is reported; a placeholder keeps the places of the others.
    let placeholder = |i| [unread("point", i), unread("other point", i)];
    Some(pairs.into_iter().enumerate().map(|(i, pair)| pair.unwrap_or_else(|| placeholder(i))).collect())
}
