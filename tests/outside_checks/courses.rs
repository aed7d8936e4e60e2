//! Courses and question pools of the trade, and what everybody knows of one time constant to five.

use crate::banks::{head, peak_current, planned, single, tau, voltages_at, wait};
use crate::rows::{Row, confirm, refute};
use ebbvolt::circuit::{Edge, Modes, Network};
use ebbvolt::quantity::Quantity;
use std::sync::Arc;

const LESSONS: &str = "Lessons in Electric Circuits, vol. I, time constants";
const POOL: &str = "Amateur Extra question pool, E5B";

#[test]
fn a_table_of_a_charging_capacitor_is_found_again() {
    // Complement: 15 V, 10 kohm, 100 uF; time, voltage of the capacitor, current.
    const TABLE: [(&str, &str, &str); 8] = [
        ("0.5 s", "5.902", "909.8e-6"),
        ("1 s", "9.482", "551.8e-6"),
        ("2 s", "12.970", "203.0e-6"),
        ("3 s", "14.253", "74.68e-6"),
        ("4 s", "14.725", "27.47e-6"),
        ("5 s", "14.899", "10.11e-6"),
        ("6 s", "14.963", "3.718e-6"),
        ("10 s", "14.999", "0.068e-6"),
    ];
    let across_resistor = voltages_at("15 V", "10 kohm", "100 uF", &TABLE.map(|(time, ..)| time));
    let rows: Vec<Row> = TABLE
        .iter()
        .zip(across_resistor)
        .flat_map(|((time, volts, amperes), left)| {
            [
                Row { source: LESSONS, figure: time, stated: volts, found: 15.0 - left },
                Row { source: LESSONS, figure: time, stated: amperes, found: left / 10e3 },
            ]
        })
        .collect();
    confirm(&rows);
}

#[test]
fn a_network_around_a_capacitor_is_one_voltage_and_one_resistance() {
    // 20 V through 2 kohm and 3 kohm on a capacitor of 100 uF with 500 ohm across it. Nodes: 0 common, 1 source,
    // 2 capacitor.
    let edge = |a, b, value| Edge { a, b, value };
    let network = |source: usize| Network {
        nodes: 4,
        reference: 0,
        resistors: vec![edge(source, 3, 2e3), edge(3, 2, 3e3), edge(2, 0, 500.0)],
        capacitors: vec![edge(2, 0, 100e-6)],
        ..Network::default()
    };
    let held = network(1).operating_point(&[(1, 20.0), (0, 0.0)])[2];
    // The same with the source's two ends joined lets the difference to that voltage die out.
    let modes = Arc::new(Modes::new(network(0)).expect("rates are found"));
    let left = modes.response(&[held], &[0.0, 0.0, held, 0.0]).expect("no contradiction").across(2, 0);
    let source = "Lessons in Electric Circuits, vol. I, complex circuits";
    confirm(&[
        Row { source, figure: "voltage that it comes to", stated: "1.8182", found: held },
        Row { source, figure: "resistance", stated: "454.545", found: modes.time_constants()[0] / 100e-6 },
        Row { source, figure: "after 60 ms (complement)", stated: "1.3325", found: held - left.value(60e-3) },
    ]);
}

#[test]
fn percent_charged_after_one_to_five_time_constants() {
    // Complement, of 100 V with 1 s. One of the two prints 95.1 % after three.
    let left = voltages_at("100 V", "10 kohm", "100 uF", &["1 s", "2 s", "3 s", "4 s", "5 s"]);
    let source = "US Army MM07047 and NEETS module 9";
    let stated = ["63.2", "86.5", "95.0", "98.2", "99.3"];
    let rows = stated.iter().zip(&left).map(|(stated, v)| Row { source, figure: "percent", stated, found: 100.0 - v });
    confirm(&rows.collect::<Vec<_>>());
    refute(&[Row { source, figure: "percent after three", stated: "95.1", found: 100.0 - left[2] }]);
}

#[test]
fn a_universal_chart_reads_within_three_percent() {
    // US Army OD1647: charged to 20 % in 100 us through 20 kohm takes 0.22 time constants and 0.023 uF. Complement:
    // 80 % left. A chart is read to 3 %.
    let plan = single("100 V", "80 V", "20 kohm", "0.023 uF");
    for (found, read) in [(wait(&plan) / tau(&plan), 0.22), (wait(&plan), 100e-6)] {
        assert!((found / read - 1.0).abs() <= 0.03, "{found} for {read}");
    }
}

#[test]
fn time_constants_of_the_question_pool() {
    let four = planned(&format!(
        "{}capacitors: [{{id: C1, value: 220 uF}}, {{id: C2, value: 220 uF}}]\n\
         resistors:\n  - {{id: R1, role: bleeder, value: 1 Mohm}}\n  - {{id: R2, role: bleeder, value: 1 Mohm}}\n",
        head("100 V", "36.8 V")
    ));
    let (large, small) = (single("800 V", "294 V", "1 Mohm", "450 uF"), single("20 V", "7.36 V", "2 Mohm", "0.01 uF"));
    confirm(&[
        Row { source: POOL, figure: "two 220 uF, two 1 Mohm, all in parallel", stated: "220", found: tau(&four) },
        Row { source: POOL, figure: "450 uF, 1 Mohm, 800 V to 294 V", stated: "450", found: wait(&large) },
        Row { source: POOL, figure: "0.01 uF, 2 Mohm, 20 V to 7.36 V", stated: "0.02", found: wait(&small) },
    ]);
}

#[test]
fn percent_left_after_one_to_five_time_constants() {
    // Common practice.
    let left = voltages_at("100 V", "10 kohm", "100 uF", &["1 s", "2 s", "3 s", "4 s", "5 s"]);
    let stated = ["36.8", "13.5", "4.98", "1.83", "0.674"];
    let row = |(stated, found): (&&'static str, &f64)| Row {
        source: "common practice",
        figure: "percent left",
        stated,
        found: *found,
    };
    confirm(&stated.iter().zip(&left).map(row).collect::<Vec<_>>());
}

#[test]
fn the_first_current_is_e_over_r_and_the_charge_is_c_e() {
    // Common practice; invented values.
    let plan = single("565 V", "50 V", "22 kohm", "3300 uF");
    let charge = plan.stored.as_ref().expect("computed").charge_highest.si();
    assert!((peak_current(&plan) / (565.0 / 22e3) - 1.0).abs() < 1e-12, "{}", peak_current(&plan));
    assert!((charge / (3300e-6 * 565.0) - 1.0).abs() < 1e-12, "{charge}");
    // All of that charge passes the bleeder: the integral of its current is C E.
    let energy = plan.resistors[0].energy.expect("always connected").si();
    assert!((energy / (0.5 * charge * 565.0) - 1.0).abs() < 1e-12, "{energy}");
}
