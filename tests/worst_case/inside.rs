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
fn an_inner_value_below_the_marked_one_is_found_where_both_ends_are_worse_than_the_middle() {
    // P has no capacitor: R1 drains C through R2 for a time T. By hand R1 takes C V^2 / 2 R1/(R1+R2) (1 - exp(-2 T /
    // ((R1+R2) C))) of it: more R1 takes a greater share of less. At the ends of R1's tolerance it is less than at the
    // marked value, and most a little below that.
    let text = "ebbvolt: 1\ntag: INNER\ntouch_voltage: 50 V\ncharged_to: {nominal: 2 kV, highest: 2.2 kV}\n\
                capacitors: [{id: C1, value: 971 uF, across: [Q, N]}]\n\
                resistors:\n  - {id: R1, role: bleeder, value: 1.45 Mohm, tolerance: 20 %, across: [Q, P]}\n  \
                - {id: R2, role: bleeder, value: 382 kohm, across: [P, N]}\n\
                procedure: [{step: Wait, for: 30 min}]\n";
    let plan = super::network::plan_of(text);
    let part = plan.steps[0].parts.iter().find(|p| p.id == "R1").expect("it is connected");
    let by_hand = |factor: f64| {
        let (c, r1, r2) = (971e-6f64, 1.45e6 * factor, 382e3);
        0.5 * c * 2200.0f64.powi(2) * r1 / (r1 + r2) * (1.0 - (-2.0 * 1800.0 / ((r1 + r2) * c)).exp())
    };
    let (best, greatest) = (0..=400_000)
        .map(|k| 0.8 + 1e-6 * f64::from(k))
        .map(|factor| (factor, by_hand(factor)))
        .fold((0.0, 0.0), |m, c| if c.1 > m.1 { c } else { m });
    assert!(best > 0.85 && best < 0.99 && by_hand(1.0) > by_hand(0.8).max(by_hand(1.2)), "{best}");
    assert!((part.energy.si() / greatest - 1.0).abs() < 1e-9, "{:?}, by hand {greatest} J", part.energy);
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
