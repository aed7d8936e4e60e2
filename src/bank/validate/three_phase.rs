//! Terminals and phases: two terminals, or three with a three-phase supply, and parts that fit.

use super::super::description::{Connection, Description, Source};
use super::super::parts::{GROUND, legs};
use super::super::problem::{Path, Sink};
use super::nodes::Joined;
use super::{Doubt, is_known};
use std::collections::HashMap;

pub(super) fn check(d: &Description, doubt: &Doubt, sink: &mut Sink) {
    let three_phase = matches!(d.charged_to.source, Source::ThreePhase { .. });
    if !doubt.phases {
        terminals(d, three_phase, sink);
        for (list, i, id, connection) in phased(d) {
            if !three_phase {
                sink.push("phases-without-supply", Path::of(list).then(i).then("phases"), || {
                    let text = format!("`{id}` is a three-phase part, and the bank was not charged from three phases");
                    (
                        text,
                        String::from(
                            "write `charged_to: {ac_rms: 400 V, phases: 3, neutral: isolated}`, or leave `phases` out",
                        ),
                    )
                });
            } else if list == "capacitors" && connection == Connection::OpenDelta {
                sink.push("open-delta-capacitor", Path::of(list).then(i).then("connection"), || {
                    let text = format!("capacitor `{id}` can't be connected in open delta");
                    (text, String::from("write `delta` or `star`, or list its capacitors one by one"))
                });
            }
        }
    }
    if three_phase && !doubt.phases && !doubt.voltages {
        own_voltages_in_loops(d, sink);
    }
    for (i, c) in d.capacitors.iter().enumerate().filter(|(_, c)| c.phases.is_some() && c.charged_to.is_some()) {
        sink.push("own-voltage-of-three-phases", Path::of("capacitors").then(i).then("charged_to"), || {
            let text = format!("the three legs of capacitor `{}` can't have one voltage of their own", c.id);
            (text, String::from("list the legs as three capacitors, each with its `across` and its `charged_to`"))
        });
    }
}

/// What the poles leave differs from one opening to the next; a voltage of its own can't add up with that around a loop.
fn own_voltages_in_loops(d: &Description, sink: &mut Sink) {
    let mut numbers: HashMap<String, usize> = HashMap::new();
    let mut number = |node: String| {
        let next = numbers.len();
        *numbers.entry(node).or_insert(next)
    };
    let (mut all, mut own) = (Joined::default(), Joined::default());
    for c in d.capacitors.iter().filter(|c| c.charged_to.is_none()) {
        for (_, [a, b]) in legs(d, &c.id, &c.across, c.phases) {
            all.join(number(a), number(b));
        }
    }
    for (i, c) in d.capacitors.iter().enumerate().filter(|(_, c)| c.charged_to.is_some() && c.phases.is_none()) {
        let [a, b] = c.across.clone().map(&mut number);
        // A loop of voltages that are all given is judged by their sum.
        if a != b && all.are_joined(a, b) && !own.are_joined(a, b) {
            sink.push("capacitor-loop", Path::of("capacitors").then(i).then("charged_to"), || {
                let text = format!(
                    "`{}` is in a loop with capacitors that take what the poles of the switch leave, and has a voltage of \
                     its own",
                    c.id
                );
                (text, String::from("leave its `charged_to` out, or give every capacitor of the loop one"))
            });
        }
        all.join(a, b);
        own.join(a, b);
    }
}

/// Of a list of terminals that is far too long, each is compared with the first few only.
const MOST_COMPARED: usize = 10;

fn terminals(d: &Description, three_phase: bool, sink: &mut Sink) {
    let path = Path::of("terminals");
    let due = if three_phase { 3 } else { 2 };
    if d.terminals.len() != due {
        sink.push("terminal-count", path.clone(), || {
            let supply = if three_phase { "three phases" } else { "one voltage" };
            let example = if three_phase { "[A, B, C]" } else { "[P, N]" };
            (
                format!("{} terminals, and a bank charged from {supply} has {due}", d.terminals.len()),
                format!("write `terminals: {example}`; the last is the reference"),
            )
        });
    }
    for (i, terminal) in d.terminals.iter().enumerate().filter(|(_, t)| is_known(t)) {
        if d.terminals.iter().take(i.min(MOST_COMPARED)).any(|other| other == terminal) {
            sink.push("duplicate-terminal", path.then(i), || {
                (format!("terminal `{terminal}` is named twice"), String::from("the terminals are different nodes"))
            });
        }
        if three_phase && terminal == GROUND {
            sink.push("terminal-is-ground", path.then(i), || {
                let text =
                    format!("`{GROUND}` is the node of the grounded neutral, and can't be a terminal of three phases");
                (text, String::from("give the terminal another name"))
            });
        }
    }
}

/// Three-phase parts: list, place in it, id, connection.
fn phased(d: &Description) -> impl Iterator<Item = (&'static str, usize, &str, Connection)> {
    let capacitors =
        d.capacitors.iter().enumerate().filter_map(|(i, c)| Some(("capacitors", i, c.id.as_str(), c.phases?)));
    let resistors =
        d.resistors.iter().enumerate().filter_map(|(i, r)| Some(("resistors", i, r.id.as_str(), r.phases?)));
    capacitors.chain(resistors)
}

#[cfg(test)]
mod tests {
    use super::super::samples::*;
    use super::*;
    use crate::bank::description::Role;

    #[test]
    fn a_three_phase_bank_passes() {
        assert_eq!(problems(&three_phase()), []);
    }

    #[test]
    fn one_voltage_has_two_terminals_and_three_phases_have_three() {
        let mut d = plain();
        d.terminals.push("M".into());
        let found = problems(&d);
        assert!(found.contains(&("terminal-count", "terminals".into())), "{found:?}");
        let mut d = three_phase();
        d.terminals.pop();
        let found = problems(&d);
        assert!(found.contains(&("terminal-count", "terminals".into())), "{found:?}");
    }

    #[test]
    fn terminals_differ() {
        let mut d = plain();
        d.terminals[1] = "P".into();
        let found = problems(&d);
        assert!(found.contains(&("duplicate-terminal", "terminals[1]".into())), "{found:?}");
    }

    #[test]
    fn a_three_phase_part_needs_three_phases() {
        let mut d = plain();
        d.resistors.push(resistor("RD", Role::Bleeder, "P", "N"));
        d.resistors[1].phases = Some(Connection::Delta);
        assert_problem(&d, "phases-without-supply", "resistors[1].phases");
    }

    #[test]
    fn open_delta_is_for_resistors() {
        let mut d = three_phase();
        d.resistors[0].phases = Some(Connection::OpenDelta);
        assert_eq!(problems(&d), []);
        d.capacitors[0].phases = Some(Connection::OpenDelta);
        assert_problem(&d, "open-delta-capacitor", "capacitors[0].connection");
    }

    #[test]
    fn a_voltage_of_its_own_is_in_no_loop_with_what_the_poles_leave() {
        let mut d = three_phase();
        d.capacitors.push(capacitor("C1", "A", "B"));
        assert_eq!(problems(&d), []);
        d.capacitors[1].charged_to = Some(volt(100.0));
        assert_problem(&d, "capacitor-loop", "capacitors[1].charged_to");
        // By themselves: nothing contradicts.
        d.capacitors.remove(0);
        d.resistors[0].phases = Some(Connection::Delta);
        assert_eq!(problems(&d), []);
    }

    #[test]
    fn three_legs_have_no_voltage_of_their_own() {
        let mut d = three_phase();
        d.capacitors[0].charged_to = Some(volt(100.0));
        assert_problem(&d, "own-voltage-of-three-phases", "capacitors[0].charged_to");
    }
}
