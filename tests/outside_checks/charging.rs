//! What sources say of charging, by a step of a procedure that connects a supply or joins two capacitors.

use crate::banks::{planned, si};
use crate::rows::{Row, confirm, confirm_input, refute};
use ebbvolt::plan::Plan;
use ebbvolt::quantity::Quantity;

const LESSONS: &str = "Lessons in Electric Circuits, vol. I, time constants";

/// An empty capacitance that a supply charges; `steps` are the durations of steps in their order, `more` further lines.
fn charged(volts: &str, ohms: &str, farads: &str, steps: &[&str], more: &str) -> Plan {
    let step = |(i, lasts): (usize, &&str)| {
        let connect = if i == 0 { ", connect: [S1]" } else { "" };
        format!("  - {{step: s{i}, for: {lasts}{connect}}}\n")
    };
    let steps: String = steps.iter().enumerate().map(step).collect();
    planned(&format!(
        "ebbvolt: 1\ntag: SM-CHECK\nlocation: Saltmarsh pumping station\ntouch_voltage: 1 V\ncharged_to: 0 V\n\
         capacitors: [{{id: C1, value: {farads}}}]\n\
         supplies: [{{id: S1, voltage: {volts}, series: {ohms}, across: [P, N]}}]\n{more}procedure:\n{steps}"
    ))
}

/// The voltage of the bank at the end of each step.
fn at_ends(plan: &Plan) -> Vec<f64> {
    plan.steps.iter().map(|step| step.test_points[0].nominal.si()).collect()
}

/// The greatest current of a part during a step, in ampere.
fn current(plan: &Plan, step: usize, id: &str) -> f64 {
    plan.steps[step].parts.iter().find(|part| part.id == id).expect("it is connected").peak_current.si()
}

#[test]
fn a_table_of_a_charging_capacitor_is_found_by_a_supply_that_steps_connect() {
    // 15 V, 10 kohm, 100 uF at 0.5, 1, 2, 3, 4, 5, 6, 10 s; the first current is that of the first step.
    let plan = charged("15 V", "10 kohm", "100 uF", &["0.5 s", "0.5 s", "1 s", "1 s", "1 s", "1 s", "1 s", "4 s"], "");
    let stated = ["5.902", "9.482", "12.970", "14.253", "14.725", "14.899", "14.963", "14.999"];
    // At the start of a step the current is what it was at the end of the one before.
    let amperes = ["909.8e-6", "551.8e-6", "203.0e-6", "74.68e-6", "27.47e-6", "10.11e-6", "3.718e-6"];
    let volts = stated.iter().zip(at_ends(&plan));
    let volts = volts.map(|(stated, found)| Row { source: LESSONS, figure: "voltage", stated, found });
    let currents = amperes.iter().enumerate();
    let currents = currents.map(|(i, stated)| {
        let found = current(&plan, i + 1, "S1");
        Row { source: LESSONS, figure: "current", stated, found }
    });
    confirm(&volts.chain(currents).collect::<Vec<_>>());
}

#[test]
fn a_capacitor_is_charged_in_one_step_and_discharged_in_another() {
    let source = "OpenStax, College Physics 2e, 21.6, two stages";
    let tool = "resistors: [{id: T1, role: tool, value: 1 kohm, across: [P, N]}]\n";
    let stages = |charge: f64, discharge: f64| {
        let text = format!("{tool}procedure:\n  - {{step: charge, connect: [S1], for: {charge} s}}\n");
        let text = format!("{text}  - {{step: discharge, connect: [T1], disconnect: [S1], for: {discharge} s}}\n");
        planned(&format!(
            "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 1 V\ncharged_to: 0 V\n\
             capacitors: [{{id: C1, value: 1000 uF}}]\n\
             supplies: [{{id: S1, voltage: 24 V, series: 1.2 kohm, across: [P, N]}}]\n{text}"
        ))
    };
    confirm_input(source, "time to 99 %", "5.5", 0.99 * 24.0, |t| at_ends(&stages(t, 1.0))[0]);
    confirm_input(source, "time from there to 3.24 V", "2", 3.24, |t| at_ends(&stages(5.526, t))[1]);
    let plan = stages(5.526, 2.0);
    confirm(&[
        Row { source, figure: "first current of the charge", stated: "20e-3", found: current(&plan, 0, "S1") },
        Row { source, figure: "first current of the discharge", stated: "24e-3", found: current(&plan, 1, "T1") },
    ]);
}

#[test]
fn charging_takes_the_time_and_the_resistance_of_the_examples() {
    let lamp = "OpenStax, University Physics 2, example 10.8";
    confirm_input(lamp, "time to 80 V of 100 V", "8.13", 80.0, |seconds| {
        at_ends(&charged("100 V", "101 ohm", "50e-3 F", &[&si(seconds, "s")], ""))[0]
    });
    let wiper = "OpenStax, University Physics 2, example 10.9";
    confirm_input(wiper, "resistance for 10.00 V of 12.00 V in 10.00 s", "558.11", 10.0, |ohms| {
        at_ends(&charged("12.00 V", &si(ohms, "ohm"), "10.00e-3 F", &["10.00 s"], ""))[0]
    });
    let plan = charged("6.16 V", "500 ohm", "1.50 uF", &["0.750 ms", "0.750 ms"], "");
    let source = "OpenStax, University Physics 2, 10.5";
    confirm(&[
        Row { source, figure: "first current", stated: "12.3e-3", found: current(&plan, 0, "S1") },
        Row { source, figure: "current at one time constant", stated: "4.53e-3", found: current(&plan, 1, "S1") },
        Row { source, figure: "voltage at one time constant", stated: "3.89", found: at_ends(&plan)[0] },
    ]);
}

#[test]
fn a_supply_charges_a_capacitor_with_a_resistor_across_it_to_the_divided_voltage() {
    // 2 kohm and 3 kohm in front, 500 ohm across 100 uF.
    let across = "resistors: [{id: R1, role: bleeder, value: 500 ohm}]\n";
    let plan = charged("20 V", "5 kohm", "100 uF", &["60 ms", "60 s"], across);
    let source = "Lessons in Electric Circuits, vol. I, complex circuits";
    confirm(&[
        Row { source, figure: "after 60 ms", stated: "1.3325", found: at_ends(&plan)[0] },
        Row { source, figure: "voltage that it comes to", stated: "1.8182", found: at_ends(&plan)[1] },
    ]);
}

#[test]
fn a_supply_charges_to_the_percent_of_one_to_five_time_constants() {
    let percent = at_ends(&charged("100 V", "10 kohm", "100 uF", &["1 s"; 5], ""));
    let source = "US Army MM07047 and NEETS module 9";
    let stated = ["63.2", "86.5", "95.0", "98.2", "99.3"];
    let rows = stated.iter().zip(&percent).map(|(stated, v)| Row { source, figure: "percent", stated, found: *v });
    confirm(&rows.collect::<Vec<_>>());
    refute(&[Row { source, figure: "percent after three", stated: "95.1", found: percent[2] }]);
    // Common practice: what the resistor has and what the capacitor has are the source's voltage, at every instant.
    let plan = charged("100 V", "10 kohm", "100 uF", &["1 s"; 5], "");
    for (step, before) in [0.0].iter().chain(&percent).take(5).enumerate() {
        let sum = before + 10e3 * current(&plan, step, "S1");
        assert!((sum - 100.0).abs() < 1e-10, "{sum} V");
    }
}

#[test]
fn two_charged_capacitors_joined_by_a_strap_share_their_charge() {
    // In series at 1.0 kV they had 667 V and 333 V; joined like to like by a strap.
    let plan = planned(
        "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 1 V\ncharged_to: 666.6666666666667 V\ncapacitors:\n  \
         - {id: C1, value: 2.0 uF, across: [P, N], charged_to: 666.6666666666667 V}\n  \
         - {id: C2, value: 4.0 uF, across: [Q, N], charged_to: 333.3333333333333 V}\n\
         resistors: [{id: ST1, role: strap, value: 10 mohm, across: [P, Q]}]\n\
         procedure: [{step: join, connect: [ST1], for: 1 s}]\n",
    );
    let source = "OpenStax, University Physics 2, 8.2";
    let volts = |a: &str| {
        let points = &plan.steps[0].test_points;
        points.iter().find(|p| p.across == [a, "N"]).expect("a test point").nominal.si()
    };
    confirm(&[
        Row { source, figure: "joined, 2.0 uF", stated: "444", found: volts("P") },
        Row { source, figure: "joined, 4.0 uF", stated: "444", found: volts("Q") },
        Row { source, figure: "charge of 2.0 uF", stated: "0.89e-3", found: 2.0e-6 * volts("P") },
        Row { source, figure: "charge of 4.0 uF", stated: "1.78e-3", found: 4.0e-6 * volts("Q") },
    ]);
}

#[test]
fn a_charge_is_followed_from_share_to_share_of_the_supply() {
    // Common practice: V_R + V_C = E at every instant, I = V_R / R, Q = C V_C; to a share s in RC ln(1/(1-s)).
    let plan = charged("100 V", "101 ohm", "50e-3 F", &["1 s"], "");
    let [charging] = plan.steps[0].charging.as_slice() else { panic!("one supply") };
    assert_eq!(charging.supply, "S1");
    assert_eq!(charging.moments.len(), 4);
    for moment in &charging.moments {
        let share = moment.share.si();
        let close = |found: Option<f64>, expected: f64| {
            let found = found.expect("it comes");
            assert!((found / expected - 1.0).abs() < 1e-9, "{share}: {found} for {expected}");
        };
        close(moment.nominal.map(Quantity::si), -5.05 * (1.0 - share).ln());
        close(moment.bank.map(Quantity::si), 100.0 * share);
        close(moment.series.map(Quantity::si), 100.0 * (1.0 - share));
        close(moment.current.map(Quantity::si), 100.0 * (1.0 - share) / 101.0);
        close(moment.charge.map(Quantity::si), 50e-3 * 100.0 * share);
    }
    // A bleeder of 101 ohm holds the bank at half the supply's voltage: it never comes to 90 %.
    let bleeder = "resistors: [{id: R1, role: bleeder, value: 101 ohm}]\n";
    let plan = charged("100 V", "101 ohm", "50e-3 F", &["1 s"], bleeder);
    assert!(plan.steps[0].charging[0].moments[1..].iter().all(|m| m.nominal.is_none() && m.bank.is_none()));
}
