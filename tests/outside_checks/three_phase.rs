//! Discharge resistors of three-phase capacitors, and nameplates in reactive power.
//!
//! The note's formula begins at the crest of the line voltage. Its rows are found with three terminals and plain parts,
//! the pair from A to C charged to that crest; then with three phases, where the poles of the switch leave more.

use crate::banks::{planned, read, si};
use crate::rows::{Row, confirm, refute};
use ebbvolt::circuit::{Edge, LastExit, Modes, Network};
use ebbvolt::plan::Plan;
use ebbvolt::quantity::Quantity;
use std::sync::Arc;

/// Capacitance that the bank file's reader finds on a nameplate: of one leg for a three-phase part.
fn plate(power: &str, volts: &str, hertz: &str, connection: Option<&str>) -> f64 {
    let phases = connection.map_or(String::new(), |c| format!(", phases: 3, connection: {c}"));
    let (terminals, charged) = match connection {
        Some(_) => ("[A, B, C]", format!("{{ac_rms: {volts}, phases: 3, neutral: isolated}}")),
        None => ("[A, C]", format!("{{ac_rms: {volts}}}")),
    };
    let bank = read(&format!(
        "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 50 V\nterminals: {terminals}\ncharged_to: {charged}\ncapacitors:\n  \
         - {{id: CB, kvar: {{power: {power}, voltage: {volts}, frequency: {hertz}}}{phases}}}\n"
    ));
    bank.description().capacitors[0].value.si()
}

/// A leg's resistance, and how resistors stand between terminals A, B, C and the star point S.
fn resistors(ohms: f64, between: &[(&str, &str)]) -> String {
    let resistor = |(i, (a, b)): (usize, &(&str, &str))| {
        format!("  - {{id: R{i}, role: bleeder, value: {}, across: [{a}, {b}]}}\n", si(ohms, "ohm"))
    };
    between.iter().enumerate().map(resistor).collect()
}

/// The longest wait at any pair of A, B and C, the capacitors in delta.
fn longest_wait(farads: f64, ohms: f64, between: &[(&str, &str)], touch: &str) -> f64 {
    let c = si(farads, "F");
    let plan = planned(&format!(
        "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: {touch}\nterminals: [A, C]\ncharged_to: {{ac_rms: 400 V}}\n\
         capacitors:\n  - {{id: C1, value: {c}, across: [A, B]}}\n  - {{id: C2, value: {c}, across: [B, C]}}\n  \
         - {{id: C3, value: {c}, across: [A, C]}}\nresistors:\n{}test_points: [[A, B], [B, C], [A, C]]\n",
        resistors(ohms, between)
    ));
    plan.waits.iter().map(|w| w.nominal.expect("it ends").si()).fold(0.0, f64::max)
}

const DELTA: [(&str, &str); 3] = [("A", "B"), ("B", "C"), ("C", "A")];
const OPEN_DELTA: [(&str, &str); 2] = [("A", "B"), ("B", "C")];
const STAR: [(&str, &str); 3] = [("A", "S"), ("B", "S"), ("C", "S")];

/// A capacitor maker's note TS 03-010 on IEC 831: R = t / (k C ln(sqrt2 U / Ur)), 50 kvar, 400 V, 50 Hz. Both stated
/// resistances are cut off, not rounded: the stated one is in time, one unit of its last digit more is not.
fn takes_the_time_of_the_note(k: f64, between: &[(&str, &str)]) {
    let farads = plate("50 kvar", "400 V", "50 Hz", Some("delta"));
    let cases = [(268e3, 1e3, "75 V", 75.0, 180.0), (74.5e3, 100.0, "50 V", 50.0, 60.0)];
    for (stated, last_digit, touch, volts, seconds) in cases {
        let wait = |ohms: f64| longest_wait(farads, ohms / k, between, touch);
        let found = [wait(stated), wait(stated + last_digit)];
        assert!(found[0] <= seconds && found[1] > seconds, "{stated} ohm, k = {k}: {found:?} s for {seconds} s");
        // The formula itself, to 1e-9.
        let exact = seconds / (farads * (2f64.sqrt() * 400.0 / volts).ln());
        assert!((wait(exact) / seconds - 1.0).abs() < 1e-9, "{touch}, k = {k}: {} s", wait(exact));
    }
}

#[test]
fn three_resistors_in_delta_take_the_time_of_the_note() {
    takes_the_time_of_the_note(1.0, &DELTA);
}

#[test]
fn two_resistors_in_open_delta_take_three_times_as_long_each() {
    takes_the_time_of_the_note(3.0, &OPEN_DELTA);
}

#[test]
fn three_resistors_in_star_take_three_times_as_long_each() {
    takes_the_time_of_the_note(3.0, &STAR);
}

#[test]
fn capacitors_in_star_give_the_same_times_as_their_delta() {
    // The same nameplate read as star has three times the capacitance per leg; at three terminals it is the same.
    let (delta, star) =
        (plate("50 kvar", "400 V", "50 Hz", Some("delta")), plate("50 kvar", "400 V", "50 Hz", Some("star")));
    assert!((star / delta - 3.0).abs() < 1e-12, "{star} {delta}");
    let edge = |a, b, value| Edge { a, b, value };
    // Nodes: C is 0, A is 1, B is 2, the star point 3. B stands half way between A and C.
    let resistors = vec![edge(1, 2, 268e3), edge(2, 0, 268e3), edge(0, 1, 268e3)];
    let crest = 2f64.sqrt() * 400.0;
    let wait = |capacitors: Vec<Edge>, nodes: usize| {
        let potentials = [0.0, crest, crest / 2.0, crest / 2.0];
        let voltages: Vec<f64> = capacitors.iter().map(|c| potentials[c.a] - potentials[c.b]).collect();
        let resistors = resistors.clone();
        let network = Network { nodes, reference: 0, resistors, capacitors, ..Network::default() };
        let modes = Arc::new(Modes::new(network).expect("rates are found"));
        let response = modes.response(&voltages, &potentials[..nodes]).expect("no contradiction");
        response.across(1, 0).last_outside(75.0, 0.0).map(LastExit::seconds).expect("the search closes")
    };
    let in_delta = wait(vec![edge(1, 2, delta), edge(2, 0, delta), edge(0, 1, delta)], 3);
    let in_star = wait(vec![edge(1, 3, star), edge(2, 3, star), edge(0, 3, star)], 4);
    assert!((in_star / in_delta - 1.0).abs() < 1e-11, "{in_star} {in_delta}");
    assert!(in_delta <= 180.0 && in_delta > 179.0, "{in_delta}");
}

#[test]
fn nameplates_in_kvar_are_read_right_where_a_conversion_page_is_wrong() {
    let source = "a conversion page on kvar";
    let delta = plate("100 kvar", "480 V", "60 Hz", Some("delta"));
    let single = plate("25 kvar", "240 V", "60 Hz", None);
    let worked_out = "the same, worked out: Q / (3 * 2 pi f V^2) and Q / (2 pi f V^2)";
    confirm(&[
        Row { source: worked_out, figure: "100 kvar, 480 V, 60 Hz, delta", stated: "383.8e-6", found: delta },
        Row { source: worked_out, figure: "25 kvar, 240 V, 60 Hz", stated: "1151e-6", found: single },
    ]);
    refute(&[
        Row { source, figure: "100 kvar, 480 V, 60 Hz, delta", stated: "386e-6", found: delta },
        Row { source, figure: "25 kvar, 240 V, 60 Hz", stated: "1.15e-6", found: single },
    ]);
}

/// A three-phase bank (invented): 50 kvar, 400 V, 50 Hz in delta with three-phase resistors, no tolerance anywhere.
fn bank(touch: &str, ohms: f64, connection: &str, more: &str) -> Plan {
    planned(&format!(
        "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: {touch}\nterminals: [A, B, C]\n\
         charged_to: {{ac_rms: 400 V, rise: 0 %, phases: 3, neutral: isolated}}\ncapacitors:\n  \
         - {{id: CB, kvar: {{power: 50 kvar, voltage: 400 V, frequency: 50 Hz}}, phases: 3, connection: delta}}\n\
         resistors:\n  - {{id: RD, role: bleeder, value: {}, phases: 3, connection: {connection}}}\n{more}",
        si(ohms, "ohm")
    ))
}

/// The same note by the tool's own three-phase parts: k and the resistance come out of the engine.
#[test]
fn k_is_1_in_delta_and_3_in_open_delta_and_in_star_by_the_engine_itself() {
    let farads = plate("50 kvar", "400 V", "50 Hz", Some("delta"));
    let ohms = 100e3;
    let crest = 2f64.sqrt() * 400.0;
    for (connection, k) in [("delta", 1.0), ("open-delta", 3.0), ("star", 3.0)] {
        let plan = bank("75 V", ohms, connection, "");
        let found = plan.time_constants[0].si() / (ohms * farads);
        assert!((found / k - 1.0f64).abs() < 1e-12, "{connection}: k = {found}");
        // From the crest to the voltage of the note at the slowest rate that the engine finds.
        let resistance = |seconds: f64, volts: f64| seconds / (found * farads * (crest / volts).ln());
        let source = "TS 03-010 on IEC 831, its formula with every digit";
        // The note states R for k = 1; each resistor of the other connections is a third of it.
        confirm(&[
            Row { source, figure: "75 V in 180 s", stated: "268.67e3", found: k * resistance(180.0, 75.0) },
            Row { source, figure: "50 V in 60 s", stated: "74.59e3", found: k * resistance(60.0, 50.0) },
        ]);
        // What the poles leave is 1.366 times as much, and the wait is longer by as much.
        let factor = (1.0 + 3f64.sqrt()) / 2.0;
        let longest = plan.waits.iter().map(|w| w.nominal.expect("it ends").si()).fold(0.0, f64::max);
        let by_hand = k * ohms * farads * (factor * crest / 75.0).ln();
        assert!((longest / by_hand - 1.0).abs() < 1e-9, "{connection}: {longest} s, by hand {by_hand} s");
    }
}

#[test]
fn an_isolated_bank_keeps_1_366_times_the_line_crest_whichever_pole_is_first() {
    let plan = bank("50 V", 268e3, "delta", "");
    let crest = 2f64.sqrt() * 400.0;
    for wait in &plan.waits {
        let found = wait.at_isolation.si() / crest;
        confirm(&[Row {
            source: "derivation on the project's page of published figures",
            figure: "isolated bank, one pair, over the line crest",
            stated: "1.366",
            found,
        }]);
        assert!((found / ((1.0 + 3f64.sqrt()) / 2.0) - 1.0).abs() < 1e-12);
        // The pole that opens first is at one end of the worst pair.
        let order = wait.interruption.as_ref().expect("three phases");
        assert!(wait.across.iter().any(|node| order.at_isolation.starts_with(node.as_str())), "{wait:?}");
    }
}

/// A grounded star (invented) of 600 uF and 60 kohm a leg.
fn star(neutral: &str) -> Plan {
    planned(&format!(
        "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 50 V\nterminals: [A, B, C]\n\
         charged_to: {{ac_rms: 400 V, rise: 0 %, phases: 3, neutral: {neutral}}}\n\
         capacitors: [{{id: CS, value: 600 uF, phases: 3, connection: star}}]\n\
         resistors: [{{id: RS, role: bleeder, value: 60 kohm, phases: 3, connection: star}}]\n"
    ))
}

#[test]
fn a_grounded_star_keeps_the_phase_crest_on_a_leg_and_1_155_times_the_line_crest_across_a_pair() {
    let plan = star("grounded");
    let crest = 2f64.sqrt() * 400.0;
    for wait in &plan.waits {
        let to_earth = wait.across.iter().any(|node| node == "G");
        let source = "derivation on the project's page of published figures";
        let found = wait.at_isolation.si() / crest;
        confirm(&[if to_earth {
            Row { source, figure: "leg over the phase crest", stated: "1.000", found: found * 3f64.sqrt() }
        } else {
            Row { source, figure: "pair over the line crest", stated: "1.155", found }
        }]);
        // Both ends of a pair fall with R C = 36 s of a leg.
        let by_hand = 36.0 * (wait.at_isolation.si() / 50.0).ln();
        assert!((wait.nominal.expect("it ends").si() / by_hand - 1.0).abs() < 1e-9, "{wait:?}");
    }
}

/// With one leg of an isolated star open, the other two are in series on the line voltage: half of its crest each, 2 R
/// on C / 2. (By hand.)
#[test]
fn a_blown_fuse_leaves_two_legs_in_series_on_the_line_voltage() {
    let plan = star("isolated");
    let crest = 2f64.sqrt() * 400.0;
    let pair = plan.waits.iter().find(|w| w.across == ["B", "C"]).expect("a test point");
    let open = pair.faults.iter().find(|f| f.fault == "CS.A open").expect("a fault");
    let by_hand = 36.0 * (crest / 50.0).ln();
    assert!((open.wait.expect("it ends").si() / by_hand - 1.0).abs() < 1e-9, "{open:?}");
    let leg = plan.waits.iter().find(|w| w.across == ["B", "CS.star"]).expect("a test point");
    let open = leg.faults.iter().find(|f| f.fault == "CS.A open").expect("a fault");
    let by_hand = 36.0 * (crest / 2.0 / 50.0).ln();
    assert!((open.wait.expect("it ends").si() / by_hand - 1.0).abs() < 1e-9, "{open:?}");
}

/// IEC 60831-1 as the project's page quotes it: below 10 % of the rated voltage before switching in again.
#[test]
fn the_voltage_before_switching_in_again_has_a_time_of_the_bank_itself() {
    let farads = plate("50 kvar", "400 V", "50 Hz", Some("delta"));
    let plan = bank("50 V", 150e3, "delta", "limits: [{use: iec-60831-1-switching-in}]\n");
    let limit = &plan.limits[0];
    let factor = (1.0 + 3f64.sqrt()) / 2.0;
    let by_hand = 150e3 * farads * (factor * 2f64.sqrt() * 400.0 / 40.0).ln();
    let from = limit.holds_from.expect("it comes").si();
    assert!((from / by_hand - 1.0).abs() < 1e-9, "{from} s, by hand {by_hand} s");
    assert_eq!((limit.met, limit.within), (None, None));
    assert!(limit.rule.contains("40 V (10 % of 400 V)"), "{}", limit.rule);
}

/// One pole open and the other two at their crest, over and over: an independent simulation in time steps. The network of
/// charges is solved by Gaussian elimination at every instant, with currents by differences, and each pole opens where
/// its current changes its sign.
#[test]
fn unequal_capacitors_keep_what_a_simulation_in_time_steps_leaves() {
    let farads = [1.1e-4, 0.95e-4, 1.02e-4];
    let plan = planned(&format!(
        "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 50 V\nterminals: [A, B, C]\n\
         charged_to: {{ac_rms: 400 V, rise: 0 %, phases: 3, neutral: isolated}}\ncapacitors:\n  \
         - {{id: C1, value: {}, across: [A, B]}}\n  - {{id: C2, value: {}, across: [B, C]}}\n  \
         - {{id: C3, value: {}, across: [C, A]}}\nresistors:\n  \
         - {{id: RD, role: bleeder, value: 150 kohm, phases: 3, connection: delta}}\n",
        si(farads[0], "F"),
        si(farads[1], "F"),
        si(farads[2], "F")
    ));
    let mut greatest = [0.0f64; 3];
    for first in 0..3 {
        // Both polarities of the second: the first current zero after the first pole, and the one after that.
        for skip in 0..2 {
            let left = simulated(farads, first, skip);
            greatest.iter_mut().zip(left).for_each(|(g, v)| *g = g.max(v));
        }
    }
    for (pair, simulated) in [["A", "B"], ["B", "C"], ["A", "C"]].into_iter().zip(greatest) {
        let found = plan.waits.iter().find(|w| w.across == pair).expect("a test point").at_isolation.si();
        // A step of 0.002 degrees around a crest: cos of it is 6e-10 below 1.
        assert!((found / simulated - 1.0).abs() < 1e-6, "{pair:?}: {found} V, simulated {simulated} V");
    }
}

/// Voltages AB, BC, CA that are left where pole `first` opens first, and the other two `skip` half cycles after their
/// next current zero.
fn simulated(farads: [f64; 3], first: usize, skip: usize) -> [f64; 3] {
    let [ab, bc, ca] = farads;
    let source = |pole: usize, angle: f64| {
        2f64.sqrt() * 400.0 / 3f64.sqrt() * (angle - std::f64::consts::TAU / 3.0 * pole as f64).cos()
    };
    let between = |i: usize, j: usize| match i + j {
        1 => ab,
        3 => bc,
        _ => ca,
    };
    let charge = |v: [f64; 3], i: usize| (0..3).filter(|j| *j != i).map(|j| between(i, j) * (v[i] - v[j])).sum::<f64>();
    let all = |angle: f64| [0, 1, 2].map(|pole| source(pole, angle));
    let step = std::f64::consts::TAU / 180_000.0;
    // Where the charge on a node turns, its current is zero.
    let turns = |q: &dyn Fn(f64) -> f64, from: f64| {
        let mut angle = from + step;
        while (q(angle + step) - q(angle)) * (q(angle) - q(angle - step)) > 0.0 {
            angle += step;
        }
        angle
    };
    let opened = turns(&|angle| charge(all(angle), first), 0.0);
    let kept = charge(all(opened), first);
    // From then on its node floats with that charge.
    let with_two = |angle: f64| {
        let mut v = all(angle);
        let [i, j] = [(first + 1) % 3, (first + 2) % 3];
        let (ci, cj) = (between(first, i), between(first, j));
        v[first] = (kept + ci * v[i] + cj * v[j]) / (ci + cj);
        v
    };
    let second = (first + 1) % 3;
    let mut at = opened;
    for _ in 0..=skip {
        at = turns(&|angle| charge(with_two(angle), second), at + step);
    }
    let v = with_two(at);
    [v[0] - v[1], v[1] - v[2], v[2] - v[0]].map(f64::abs)
}

#[test]
fn a_capacitor_on_one_phase_has_a_time_before_switching_in_again_and_a_bank_on_direct_voltage_has_none() {
    let limit = |charged_to: &str| {
        let text = format!(
            "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 50 V\ncharged_to: {charged_to}\n\
             capacitors: [{{id: C1, value: 100 uF}}]\nresistors: [{{id: R1, role: bleeder, value: 100 kohm}}]\n\
             limits: [{{use: iec-60831-1-switching-in}}]\n"
        );
        planned(&text).limits.remove(0)
    };
    let from = limit("{ac_rms: 230 V, rise: 0 %}").holds_from.expect("it comes").si();
    let by_hand = 10.0 * (2f64.sqrt() * 10.0).ln();
    assert!((from / by_hand - 1.0).abs() < 1e-9, "{from} s, by hand {by_hand} s");
    let none = limit("325 V");
    assert_eq!((none.met, none.holds_from), (None, None));
}
