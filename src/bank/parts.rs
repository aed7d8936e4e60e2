//! All parts of a description seen alike: what they are called, what they touch, whether a step connects them.

use super::description::{Connection, Description, Neutral, Pair, Source};
use super::problem::Path;

/// One part, whatever it is.
#[derive(Debug, Clone, Copy)]
pub(super) struct Part<'a> {
    /// The key of its list in the file.
    pub(super) list: &'static str,
    /// Its place in that list.
    pub(super) index: usize,
    /// What to call it: `capacitor`, `resistor`, `sink`, `supply`.
    pub(super) noun: &'static str,
    pub(super) id: &'a str,
    pub(super) across: &'a Pair,
    pub(super) phases: Option<Connection>,
    /// True for a part that is connected at isolation and stays so; the others are connected by steps.
    pub(super) fixed: bool,
}

impl Part<'_> {
    pub(super) fn path(&self) -> Path {
        Path::of(self.list).then(self.index)
    }
}

/// All parts in the order of the file: capacitors, resistors, sinks, supplies.
pub(super) fn parts(d: &Description) -> Vec<Part<'_>> {
    let capacitors = d.capacitors.iter().enumerate().map(|(index, c)| Part {
        list: "capacitors",
        index,
        noun: "capacitor",
        id: &c.id,
        across: &c.across,
        phases: c.phases,
        fixed: true,
    });
    let resistors = d.resistors.iter().enumerate().map(|(index, r)| Part {
        list: "resistors",
        index,
        noun: "resistor",
        id: &r.id,
        across: &r.across,
        phases: r.phases,
        fixed: r.role.always_connected(),
    });
    let sinks = d.sinks.iter().enumerate().map(|(index, s)| Part {
        list: "sinks",
        index,
        noun: "sink",
        id: &s.id,
        across: &s.across,
        phases: None,
        fixed: true,
    });
    let supplies = d.supplies.iter().enumerate().map(|(index, s)| Part {
        list: "supplies",
        index,
        noun: "supply",
        id: &s.id,
        across: &s.across,
        phases: None,
        fixed: false,
    });
    capacitors.chain(resistors).chain(sinks).chain(supplies).collect()
}

/// The node to which a star is joined where the neutral of the supply is grounded.
pub(super) const GROUND: &str = "G";

/// The plain parts that a part stands for, with their ids and nodes: itself, or the legs of a three-phase part.
///
/// In delta they are `CB.AB`, `CB.BC` and `CB.CA`, in open delta the first two of these, in star `CB.A`, `CB.B`
/// and `CB.C`, which meet at the node `CB.star` or, with a grounded neutral, at the node `G`.
pub(super) fn legs(d: &Description, id: &str, across: &Pair, phases: Option<Connection>) -> Vec<(String, Pair)> {
    let ([a, b, c], Some(connection)) = (d.terminals.as_slice(), phases) else {
        return vec![(id.to_string(), across.clone())];
    };
    let between = |x: &String, y: &String| (format!("{id}.{x}{y}"), [x.clone(), y.clone()]);
    let grounded = matches!(d.charged_to.source, Source::ThreePhase { neutral: Neutral::Grounded, .. });
    let star = if grounded { GROUND.to_string() } else { format!("{id}.star") };
    let to_star = |x: &String| (format!("{id}.{x}"), [x.clone(), star.clone()]);
    match connection {
        Connection::Delta => vec![between(a, b), between(b, c), between(c, a)],
        Connection::OpenDelta => vec![between(a, b), between(b, c)],
        Connection::Star => vec![to_star(a), to_star(b), to_star(c)],
    }
}
