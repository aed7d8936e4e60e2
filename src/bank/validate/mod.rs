//! What has to hold of a description before it is a bank. One file per kind of rule; every rule is tried, so that a
//! user sees all that is wrong at once.

mod figures;
mod limits;
mod loops;
mod names;
mod nodes;
mod procedure;
mod switched;
mod three_phase;

use super::description::Description;
use super::parts::parts;
use super::problem::{Path, Problem, Sink};
use std::collections::HashSet;

/// What a reader could not make out. It stands in the description as a name that [`is_known`] refuses or as a
/// harmless figure; rules that would only echo the reader's own errors are left out.
#[derive(Debug, Default)]
pub(super) struct Doubt {
    /// Names may be placeholders for what could not be read; a name that a program gives never is.
    pub(super) unread: bool,
    /// Some part may have an id that is not in the description.
    pub(super) ids: bool,
    /// The list of capacitors could not be read.
    pub(super) capacitors: bool,
    /// Some part may touch nodes that are not in the description.
    pub(super) nodes: bool,
    /// The voltage across the terminals is made up.
    pub(super) voltages: bool,
    /// The number of terminals, or how `charged_to` was given, is made up.
    pub(super) phases: bool,
    /// Some step connects or disconnects parts that are not in the description.
    pub(super) steps: bool,
    /// Ids of resistors whose role is made up.
    pub(super) roles: HashSet<String>,
}

/// Names that start so stand for what a reader could not read. No file can contain them: control characters are
/// refused.
pub(super) const UNREAD: char = '\0';

/// True for a name that a user gave.
fn is_known(name: &str) -> bool {
    !name.starts_with(UNREAD)
}

/// All problems of a description, and how many more there were than are kept.
pub(super) fn check(d: &Description, doubt: &Doubt) -> (Vec<Problem>, usize) {
    let mut sink = Sink::default();
    let parts = parts(d);
    names::check(d, &parts, doubt, &mut sink);
    figures::check(d, &mut sink);
    if d.capacitors.is_empty() && !doubt.capacitors {
        sink.push("no-capacitors", Path::of("capacitors"), || {
            (String::from("a bank has at least one capacitor"), String::from("add `- {id: C1, value: 3300 uF}`"))
        });
    }
    three_phase::check(d, doubt, &mut sink);
    switched::check(d, &mut sink);
    let nodes = nodes::check(d, &parts, doubt, &mut sink);
    if !doubt.voltages {
        loops::check(d, &mut sink);
    }
    limits::check(d, &mut sink);
    procedure::check(d, &parts, &nodes, doubt, &mut sink);
    sink.into_parts()
}

/// Descriptions for the tests of the rules.
#[cfg(test)]
pub(super) mod samples {
    use crate::bank::description::*;
    use crate::quantity::{Quantity, Time, Voltage};

    pub(crate) fn volt(v: f64) -> Voltage {
        Voltage::from_si(v)
    }

    pub(crate) fn pair(a: &str, b: &str) -> Pair {
        [a.into(), b.into()]
    }

    pub(crate) fn capacitor(id: &str, a: &str, b: &str) -> Capacitor {
        Capacitor {
            id: id.into(),
            value: Quantity::from_si(1e-3),
            kvar: None,
            tolerance: None,
            tempco: None,
            ageing: None,
            across: pair(a, b),
            series: 1,
            parallel: 1,
            rated: None,
            dielectric: None,
            absorption: None,
            charged_to: None,
            phases: None,
        }
    }

    pub(crate) fn resistor(id: &str, role: Role, a: &str, b: &str) -> Resistor {
        Resistor {
            id: id.into(),
            role,
            value: Quantity::from_si(1e4),
            tolerance: None,
            tempco: None,
            ageing: None,
            across: pair(a, b),
            series: 1,
            parallel: 1,
            rating: Rating::default(),
            phases: None,
            switched: None,
        }
    }

    pub(crate) fn step(name: &str) -> Step {
        Step {
            name: name.into(),
            lasts: Lasts::For(Time::from_si(10.0)),
            connect: vec![],
            disconnect: vec![],
            measure: vec![],
            hold: None,
            touch: false,
        }
    }

    /// One capacitor and one bleeder across the terminals.
    pub(crate) fn plain() -> Description {
        Description {
            tag: "PU-07".into(),
            title: None,
            location: None,
            prepared_by: None,
            revision: None,
            notes: None,
            ambient: None,
            touch_voltage: volt(50.0),
            hold_energy: None,
            strap_limit: StrapLimit::default(),
            terminals: vec!["P".into(), "N".into()],
            charged_to: ChargedTo {
                nominal: volt(500.0),
                highest: volt(600.0),
                margin_given: true,
                source: Source::Direct,
            },
            capacitors: vec![capacitor("C1", "P", "N")],
            resistors: vec![resistor("R1", Role::Bleeder, "P", "N")],
            sinks: vec![],
            supplies: vec![],
            test_points: None,
            limits: vec![],
            procedure: vec![],
        }
    }

    /// A capacitor and a bleeder in delta across three terminals.
    pub(crate) fn three_phase() -> Description {
        let mut d = plain();
        d.terminals = vec!["A".into(), "B".into(), "C".into()];
        d.charged_to.source = Source::ThreePhase { rms: volt(400.0), neutral: Neutral::Isolated };
        d.capacitors = vec![Capacitor { phases: Some(Connection::Delta), ..capacitor("CB", "A", "B") }];
        d.resistors = vec![Resistor { phases: Some(Connection::Delta), ..resistor("RD", Role::Bleeder, "A", "B") }];
        d
    }

    /// Code and path of all that is wrong with a description.
    pub(crate) fn problems(d: &Description) -> Vec<(&'static str, String)> {
        let (problems, _) = super::check(d, &super::Doubt::default());
        problems.into_iter().map(|p| (p.code, p.path.to_string())).collect()
    }

    /// Asserts that a description has exactly one problem, of this code at this path.
    #[track_caller]
    pub(crate) fn assert_problem(d: &Description, code: &str, path: &str) {
        let found = problems(d);
        assert!(matches!(found.as_slice(), [(c, p)] if *c == code && p == path), "{found:?}");
    }
}

#[cfg(test)]
mod tests {
    use super::samples::*;

    #[test]
    fn a_plain_bank_passes() {
        assert_eq!(problems(&plain()), []);
    }

    #[test]
    fn a_bank_has_a_capacitor() {
        let mut d = plain();
        d.capacitors.clear();
        assert_problem(&d, "no-capacitors", "capacitors");
    }
}
