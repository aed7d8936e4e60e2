//! Energy, charge, and how capacitors add up and share, from open textbooks.

use crate::banks::{head, planned, si, single};
use crate::rows::{Row, confirm, confirm_input};
use ebbvolt::circuit::{Edge, Modes, Network};
use ebbvolt::plan::{Plan, Stored};
use ebbvolt::quantity::Quantity;
use std::sync::Arc;

const COLLEGE: &str = "OpenStax, College Physics 2e, 19.7";
const SHARING: &str = "OpenStax, University Physics 2, 8.2";

fn stored(plan: &Plan) -> &Stored {
    plan.stored.as_ref().expect("computed")
}

/// What one capacitance holds; the bleeder is of no account.
fn holds(charged_to: &str, farads: &str) -> Stored {
    stored(&single(charged_to, "1 V", "1 Mohm", farads)).clone()
}

/// A bank of these capacitors, each `(value, node, node)`, bled at the ends.
fn bank(charged_to: &str, capacitors: &[(&str, &str, &str)]) -> Plan {
    let list: Vec<String> = capacitors
        .iter()
        .enumerate()
        .map(|(i, (value, a, b))| format!("  - {{id: C{i}, value: {value}, across: [{a}, {b}]}}\n"))
        .collect();
    let head = head(charged_to, "1 V");
    planned(&format!("{head}capacitors:\n{}resistors: [{{id: R1, role: bleeder, value: 1 Mohm}}]\n", list.concat()))
}

#[test]
fn energy_and_charge_of_one_capacitor_are_those_of_the_problems() {
    let (large, middle) = (holds("9.00 kV", "10.0 uF"), holds("119 V", "165 uF"));
    let source = COLLEGE;
    confirm(&[
        Row { source, figure: "10.0 uF at 9.00 kV", stated: "405", found: large.energy_nominal.si() },
        Row { source, figure: "its charge", stated: "90.0e-3", found: large.charge_highest.si() },
        Row { source, figure: "165 uF at 119 V", stated: "1.17", found: middle.energy_nominal.si() },
    ]);
    let volts = |volts: f64| holds(&si(volts, "V"), "8.00 uF");
    confirm_input(source, "voltage for 40.0 J in 8.00 uF", "3.16e3", 40.0, |v| volts(v).energy_nominal.si());
    confirm_input(source, "capacitance for 400 J at 10.0 kV", "8.00e-6", 400.0, |farads| {
        holds("10.0 kV", &si(farads, "F")).energy_nominal.si()
    });
    // The voltage that the book goes on with, not rounded: sqrt(2 * 40.0 J / 8.00 uF) = 3162.28 V.
    let found = volts(3162.28).charge_highest.si();
    confirm(&[Row { source, figure: "charge for 40.0 J in 8.00 uF", stated: "25.3e-3", found }]);
}

#[test]
fn energies_of_a_network_of_three_add_up() {
    let plan = bank("12.0 V", &[("12.0 uF", "P", "M"), ("2.0 uF", "M", "N"), ("4.0 uF", "M", "N")]);
    let source = "OpenStax, University Physics 2, example 8.8";
    let volts = |i: usize| plan.capacitors[i].voltage_highest.si();
    let alone = |i: usize, farads: &str| holds(&si(volts(i), "V"), farads).energy_nominal.si();
    confirm(&[
        Row { source, figure: "12.0 uF, voltage", stated: "4.0", found: volts(0) },
        Row { source, figure: "2.0 uF, voltage", stated: "8.0", found: volts(1) },
        Row { source, figure: "4.0 uF, voltage", stated: "8.0", found: volts(2) },
        Row { source, figure: "12.0 uF at 4.0 V", stated: "96e-6", found: alone(0, "12.0 uF") },
        Row { source, figure: "2.0 uF at 8.0 V", stated: "64e-6", found: alone(1, "2.0 uF") },
        // Two digits count in the 130 uJ.
        Row { source, figure: "4.0 uF at 8.0 V", stated: "1.3e-4", found: alone(2, "4.0 uF") },
        Row { source, figure: "all three", stated: "0.29e-3", found: stored(&plan).energy_nominal.si() },
    ]);
}

#[test]
fn capacitors_add_up_in_series_in_parallel_and_mixed() {
    let [a, b, c] = ["1.000 uF", "5.000 uF", "8.000 uF"];
    let capacitance =
        |parts: &[(&str, &str, &str)]| stored(&bank("10 V", parts)).capacitance.expect("there is a voltage").si();
    let series = capacitance(&[(a, "P", "X"), (b, "X", "Y"), (c, "Y", "N")]);
    let parallel = capacitance(&[(a, "P", "N"), (b, "P", "N"), (c, "P", "N")]);
    let mixed = capacitance(&[(a, "P", "X"), (b, "X", "N"), (c, "P", "N")]);
    confirm(&[
        Row {
            source: "OpenStax, University Physics 2, example 8.4",
            figure: "series",
            stated: "0.755e-6",
            found: series,
        },
        Row { source: "same, example 8.5", figure: "parallel", stated: "14.0e-6", found: parallel },
        Row { source: "same, example 8.6", figure: "mixed", stated: "8.833e-6", found: mixed },
    ]);
}

#[test]
fn a_voltage_divides_by_capacitance_where_no_resistor_sets_it() {
    let plan = bank("400 V", &[("4.00 pF", "P", "M"), ("8.00 pF", "M", "N")]);
    let at_isolation = |a: &str, b: &str| {
        let point = plan.waits.iter().find(|w| w.across == [a, b]).expect("a capacitor's own pair is a test point");
        point.at_isolation.si()
    };
    confirm(&[
        Row { source: SHARING, figure: "across 4.00 pF", stated: "267", found: at_isolation("P", "M") },
        Row { source: SHARING, figure: "across 8.00 pF", stated: "133", found: at_isolation("M", "N") },
        Row { source: SHARING, figure: "charge", stated: "1.07e-9", found: stored(&plan).charge_highest.si() },
    ]);
}

#[test]
fn two_charged_capacitors_joined_like_to_like_share_their_charge() {
    // In series at 1.0 kV by the bank file; what they have then is joined through 10 mohm in the circuit.
    let plan = bank("1.0 kV", &[("2.0 uF", "P", "M"), ("4.0 uF", "M", "N")]);
    let volts: Vec<f64> = plan.capacitors.iter().map(|c| c.voltage_highest.si()).collect();
    let network = Network {
        nodes: 3,
        reference: 0,
        resistors: vec![Edge { a: 1, b: 2, value: 0.010 }],
        capacitors: vec![Edge { a: 1, b: 0, value: 2.0e-6 }, Edge { a: 2, b: 0, value: 4.0e-6 }],
        ..Network::default()
    };
    let modes = Arc::new(Modes::new(network).expect("rates are found"));
    let joined = modes.response(&volts, &[0.0, volts[0], volts[1]]).expect("no contradiction");
    let settled = [1, 2].map(|node| joined.across(node, 0).constant());
    confirm(&[
        Row { source: SHARING, figure: "joined, voltage of 2.0 uF", stated: "444", found: settled[0] },
        Row { source: SHARING, figure: "joined, voltage of 4.0 uF", stated: "444", found: settled[1] },
        Row { source: SHARING, figure: "charge of 2.0 uF", stated: "0.89e-3", found: 2.0e-6 * settled[0] },
        Row { source: SHARING, figure: "charge of 4.0 uF", stated: "1.78e-3", found: 4.0e-6 * settled[1] },
    ]);
}
