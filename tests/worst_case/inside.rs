//! Maxima inside the box: a value in the middle of its tolerance can be the worst.

use super::network::{Bank, part};
use ebbvolt::quantity::Quantity;

/// All corners of the box.
fn corners(bank: &Bank) -> impl Iterator<Item = Vec<f64>> {
    let end = |p: &super::network::Part, high: bool| 1.0 + if high { p.tolerance } else { -p.tolerance };
    (0..1usize << bank.parts.len())
        .map(move |mask| bank.parts.iter().enumerate().map(|(i, p)| end(p, mask >> i & 1 == 1)).collect())
}

#[test]
fn two_capacitors_in_series_bled_at_the_ends_have_their_longest_wait_at_an_inner_value() {
    // They divide by capacitance, from uncharged: u = V C1/(C1+C2) across the second, and the resistor sees both in
    // series. By hand T = R C1 C2/(C1+C2) ln(u/X): more C2 makes the time constant longer and its own share smaller.
    let bank = Bank {
        nodes: &["P", "M", "N"],
        volts: 1000.0,
        touch: 50.0,
        parts: vec![
            part("C1", 10e-6, 0.1, ["P", "M"]),
            part("C2", 22e-6, 0.1, ["M", "N"]),
            part("R1", 100e3, 0.05, ["P", "N"]),
        ],
    };
    let plan = bank.plan();
    let wait = plan.waits.iter().find(|w| w.across == ["M", "N"]).expect("a test point");
    let slowest = wait.slowest.expect("it ends").si();
    let best_corner = corners(&bank).map(|point| bank.wait(&point, ["M", "N"])).fold(0.0, f64::max);
    assert!(slowest > best_corner * (1.0 + 9e-4), "{slowest} s, best corner {best_corner} s");
    let by_hand = |c2: f64| {
        let (c1, c2) = (11e-6, 22e-6 * c2);
        105e3 * c1 * c2 / (c1 + c2) * (1000.0 * c1 / (c1 + c2) / 50.0).ln()
    };
    let c2 = wait.worst_point.iter().find(|w| w.id == "C2").expect("loose").factor;
    assert!(c2 > 0.9 + 1e-3 && c2 < 1.1 - 1e-3, "{c2}");
    let greatest = (0..=200_000).map(|k| by_hand(0.9 + 1e-6 * f64::from(k))).fold(0.0, f64::max);
    assert!((slowest / greatest - 1.0).abs() < 1e-10, "{slowest} s, by hand {greatest} s");
}

#[test]
fn an_inner_value_is_found_among_many_loose_values_too() {
    // The same pair, bled by twelve resistors in series: more values are loose than all corners are tried for.
    const RESISTORS: [[&str; 3]; 12] = [
        ["R1", "P", "a"],
        ["R2", "a", "b"],
        ["R3", "b", "c"],
        ["R4", "c", "d"],
        ["R5", "d", "e"],
        ["R6", "e", "f"],
        ["R7", "f", "g"],
        ["R8", "g", "h"],
        ["R9", "h", "i"],
        ["R10", "i", "j"],
        ["R11", "j", "k"],
        ["R12", "k", "N"],
    ];
    let mut parts = vec![part("C1", 10e-6, 0.1, ["P", "M"]), part("C2", 22e-6, 0.1, ["M", "N"])];
    parts.extend(RESISTORS.iter().enumerate().map(|(i, [id, a, b])| part(id, 5e3 + 1e3 * i as f64, 0.05, [a, b])));
    let nodes = &["P", "M", "N", "a", "b", "c", "d", "e", "f", "g", "h", "i", "j", "k"];
    let bank = Bank { nodes, volts: 1000.0, touch: 50.0, parts };
    let wait = bank.plan().waits.into_iter().find(|w| w.across == ["M", "N"]).expect("a test point");
    let slowest = wait.slowest.expect("it ends").si();
    let best_corner = corners(&bank).map(|point| bank.wait(&point, ["M", "N"])).fold(0.0, f64::max);
    assert!(slowest > best_corner * (1.0 + 9e-4), "{slowest} s, best of all 16384 corners {best_corner} s");
    let factor = |id: &str| wait.worst_point.iter().find(|w| w.id == id).expect("loose").factor;
    assert!(factor("C2") > 0.9 + 1e-3 && factor("C2") < 1.1 - 1e-3, "{}", factor("C2"));
    assert!(RESISTORS.iter().all(|[id, ..]| (factor(id) - 1.05).abs() < 1e-12));
}
