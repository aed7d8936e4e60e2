//! Two sections: voltages against a matrix exponential, energies against what the bank held.

use super::*;
use ebbvolt::circuit::{Drain, Edge, Modes, Network};
use nalgebra::{Matrix2, Vector2};
use std::sync::Arc;

const C: [f64; 2] = [1e-3, 300e-6];
const R12: f64 = 2e3;
const LEAK: f64 = 500e3;
const RS: f64 = 1500.0;
const DELAY: f64 = 0.7;

/// Two sections behind a resistor, the switched bleeder on the one behind.
fn sections(more: &str) -> String {
    format!(
        "{{ebbvolt: 1, tag: T, ambient: 40 °C, touch_voltage: 50 V, charged_to: {{nominal: 600 V, highest: 600 V}}, \
         capacitors: [{{id: C1, value: 1 mF, tolerance: 0 %}}, \
         {{id: C2, value: 300 uF, tolerance: 0 %, across: [Q, N], charged_to: 100 V}}], \
         resistors: [{{id: R12, role: series, value: 2 kohm, tolerance: 0 %, across: [P, Q]}}, \
         {{id: RL, role: leakage, value: 500 kohm, tolerance: 0 %}}, \
         {{id: RS, role: bleeder, value: 1.5 kohm, tolerance: 0 %, across: [Q, N], \
         switched: {{closes_after: 700 ms}}}}], test_points: [[P, N], [Q, N]]{more}}}"
    )
}

/// v' = -C^-1 G v of the two sections, with the bleeder or without it.
fn rate(bleeder: bool) -> Matrix2<f64> {
    let g = if bleeder { 1.0 / RS } else { 0.0 };
    Matrix2::new(-(1.0 / R12 + 1.0 / LEAK) / C[0], 1.0 / (R12 * C[0]), 1.0 / (R12 * C[1]), -(1.0 / R12 + g) / C[1])
}

/// Both voltages after `t` seconds, by `nalgebra`'s matrix exponential.
fn expected(t: f64) -> Vector2<f64> {
    let before = (rate(false) * t.min(DELAY)).exp() * Vector2::new(600.0, 100.0);
    (rate(true) * (t - DELAY).max(0.0)).exp() * before
}

#[test]
fn two_sections_go_as_the_matrix_exponential_says() {
    let times = [0.0, 0.2, 0.69, 0.7, 0.71, 1.0, 2.5, 7.0, 12.0];
    let plan = followed(&sections(""), &times);
    let spans = &plan.curves.as_ref().expect("asked for").spans;
    assert_eq!(spans[0].samples.len(), times.len());
    for sample in &spans[0].samples {
        let v = expected(sample.time.si());
        close(sample.voltages[0].highest.si(), v[0], 1e-10);
        close(sample.voltages[1].nominal.si(), v[1], 1e-10);
    }
    // At a wait the voltage is the one waited for, and stays below from then on.
    for (point, wait) in plan.waits.iter().enumerate() {
        let t = wait.slowest.expect("it ends").si();
        close(expected(t)[point], 50.0, 1e-9);
        assert!((1..50).all(|k| expected(t + f64::from(k))[point] < 50.0));
    }
    // The second section is charged by the first until the contact closes: the greatest it ever has is then.
    let rs = resistor(&plan, "RS");
    close(rs.peak_current.expect("a figure").si(), expected(DELAY)[1] / RS, 1e-10);
    close(rs.element_voltage.expect("a figure").si(), expected(DELAY)[1], 1e-10);
}

#[test]
fn what_the_resistors_take_is_what_the_capacitors_held() {
    let plan = planned(&sections(""));
    let taken: f64 = plan.resistors.iter().map(|r| r.energy.expect("a figure").si()).sum();
    let held = 0.5 * (C[0] * 600.0 * 600.0 + C[1] * 100.0 * 100.0);
    close(taken, held, 1e-9);
    // The same through steps, of which the first ends before the contact closes and the last is long enough.
    let steps = ", procedure: [{step: a, for: 500 ms}, {step: b, for: 1 s}, {step: c, for: 1 h}]";
    let plan = planned(&sections(steps));
    let taken: f64 = plan.steps.iter().flat_map(|s| &s.parts).map(|p| p.energy.si()).sum();
    close(taken, held, 1e-9);
    // Step a knows no RS; the steps' own ends are those of the matrix exponential.
    assert!(plan.steps[0].parts.iter().all(|p| p.id != "RS"));
    for (step, t) in plan.steps.iter().zip([0.5, 1.5]) {
        for point in [0, 1] {
            close(step.test_points[point].highest.si(), expected(t)[point], 1e-9);
        }
    }
}

#[test]
fn the_balance_of_every_network_in_turn_is_checked() {
    let edge = |a, b, value| Edge { a, b, value };
    let network = |resistors: Vec<Edge>| Network {
        nodes: 3,
        reference: 0,
        resistors,
        capacitors: vec![edge(1, 0, C[0]), edge(2, 0, C[1])],
        sources: Vec::new(),
    };
    let open = vec![edge(1, 2, R12), edge(1, 0, LEAK)];
    let closed = [open.clone(), vec![edge(2, 0, RS)]].concat();
    let modes = |resistors: Vec<Edge>| Arc::new(Modes::new(network(resistors)).expect("it has modes"));
    let networks = [(DELAY, modes(open)), (f64::INFINITY, modes(closed))];
    let drain = Drain::through(&networks, &[600.0, 100.0], &[0.0, 600.0, 100.0], &[], &[]).expect("solves");
    drain.check_balance(f64::INFINITY).expect("balanced");
    drain.check_balance(0.3).expect("balanced");
    assert!(drain.undrawn().is_none());
    let course = drain.across(2, 0);
    close(course.value(0.3), expected(0.3)[1], 1e-12);
    close(course.value(3.0), expected(3.0)[1], 1e-12);
    // On the bleeder itself nothing stands before it comes.
    let own = drain.across_from(1, 2, 0);
    assert!(own.value(0.3) == 0.0);
    close(own.value(3.0), expected(3.0)[1], 1e-12);
    // Energy that the pair sees: both sections at all times, since R12 joins them.
    close(drain.stored_energy(Some((1, 0))).value(0.0), drain.initial_energy(), 1e-12);
}

#[test]
fn a_section_that_only_the_contact_joins_counts_for_nothing_before() {
    // C2 floats against P - N until the contact joins Q to P; its own return R2 is far above.
    let edge = |a, b, value| Edge { a, b, value };
    let network = |resistors: Vec<Edge>| Network {
        nodes: 4,
        reference: 0,
        resistors,
        capacitors: vec![edge(1, 0, 1e-3), edge(3, 2, 1e-3)],
        sources: Vec::new(),
    };
    let modes = |resistors: Vec<Edge>| Arc::new(Modes::new(network(resistors)).expect("it has modes"));
    let networks = [
        (1.0, modes(vec![edge(1, 0, 1e3)])),
        (f64::INFINITY, modes(vec![edge(1, 0, 1e3), edge(1, 3, 1e3), edge(2, 0, 1e3)])),
    ];
    let drain = Drain::through(&networks, &[100.0, 300.0], &[0.0, 100.0, 0.0, 300.0], &[], &[]).expect("solves");
    let energy = drain.stored_energy(Some((1, 0)));
    close(energy.value(0.5), 5.0 * f64::exp(-1.0), 1e-12);
    close(energy.value(1.0), 5.0 * f64::exp(-2.0) + 45.0, 1e-12);
    // Above 20 J only after the contact has closed: the last time is found there, not before.
    assert!(energy.last_over(20.0, 0.0).expect("closes").seconds() > 1.0);
    drain.check_balance(f64::INFINITY).expect("balanced");
}
