//! Discharge resistors of three-phase capacitors, and nameplates in reactive power.
//!
//! The tool reads three-phase banks but does not plan them yet. The circuit itself is three terminals with plain parts,
//! and that is planned here: the pair from A to C at the crest of the line voltage, which it was charged to.

use crate::banks::{planned, read, si};
use crate::rows::{Row, confirm, refute};
use ebbvolt::circuit::{Edge, LastExit, Modes, Network};
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
