//! Balancing resistors: closed forms, the network solved otherwise, the way after a fast charge stepped in time.

use crate::banks::{HEAD, bank, elements, generic, greatest, of};
use approx::assert_relative_eq;
use ebbvolt::bank::Bank;
use ebbvolt::data::Series;
use ebbvolt::quantity::{Current, Power, Quantity, Voltage};
use ebbvolt::size::{BalancingAsk, BalancingFigures, Build, SizeError, Sizing, balancing};
use nalgebra::{DMatrix, DVector};

pub fn balanced(bank: &Bank, ask: &BalancingAsk) -> Sizing<BalancingFigures> {
    balancing(bank, "", ask).unwrap_or_else(|e| panic!("{e}"))
}

/// A string of equal units (invented) from P to N.
pub fn string(units: usize, tolerance: f64, rated: f64, highest: f64, more: &str) -> String {
    let node = |k: usize| match k {
        0 => "P".to_string(),
        k if k == units => "N".to_string(),
        k => format!("M{k}"),
    };
    let unit = |k: usize| {
        format!(
            "  - {{id: C{}, value: 470 uF, tolerance: {tolerance} %, across: [{}, {}], rated: {rated} V}}\n",
            k + 1,
            node(k),
            node(k + 1)
        )
    };
    let units: String = (0..units).map(unit).collect();
    format!(
        "{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: {} V, highest: {highest} V}}\ncapacitors:\n{units}{more}",
        0.9 * highest
    )
}

/// Generic elements of a tolerance in percent, and a leakage.
pub fn ask(tolerance: f64, ampere: f64) -> BalancingAsk {
    let mut elements = generic(Series::E96);
    let share = Quantity::from_si(tolerance / 100.0);
    elements.iter_mut().for_each(|e| e.tolerance = ebbvolt::quantity::Tolerance::new(share, share).ok());
    let build = Build { elements, show: 2, ..Build::default() };
    BalancingAsk { build, leakage: Some(Current::from_si(ampere)), ..BalancingAsk::default() }
}

#[test]
fn the_window_is_the_closed_form_of_ideal_resistors_for_any_number_of_units() {
    for units in 2..=6 {
        let n = units as f64;
        let (rated, highest, leakage) = (450.0, 400.0 * n, 1.5e-3);
        let sizing = balanced(&bank(&string(units, 0.0, rated, highest, "")), &ask(0.0, leakage));
        let by_hand = (n * rated - highest) / ((n - 1.0) * leakage);
        assert_relative_eq!(greatest(&sizing), by_hand, max_relative = 1e-9);
        // A rule that sees one unit and its neighbour, (2 Vr - 2 Vb/n) / I, holds for two units only.
        let of_two = (2.0 * rated - 2.0 * highest / n) / leakage;
        let settled = highest / n + (n - 1.0) / n * leakage * of_two;
        assert_eq!(of_two > greatest(&sizing) * (1.0 + 1e-9), units > 2);
        assert_eq!(settled > rated * (1.0 + 1e-9), units > 2, "{units}: {settled}");
    }
}

#[test]
fn with_a_tolerance_one_resistor_is_high_and_all_others_are_low() {
    for units in 2..=6 {
        let n = units as f64;
        let (rated, highest, leakage, low, high) = (450.0, 380.0 * n, 1e-3, 0.95, 1.05);
        let sizing = balanced(&bank(&string(units, 5.0, rated, highest, "")), &ask(5.0, leakage));
        // v = h (V + (n - 1) l R I) / (h + (n - 1) l), at the rated voltage.
        let by_hand = (rated * (high + (n - 1.0) * low) / high - highest) / ((n - 1.0) * low * leakage);
        assert_relative_eq!(greatest(&sizing), by_hand, max_relative = 1e-9);
        for c in &sizing.candidates {
            let ohms = c.resistance.si();
            let v = high * (highest + (n - 1.0) * low * ohms * leakage) / (high + (n - 1.0) * low);
            for unit in &c.figures.units {
                assert_relative_eq!(unit.settled.si(), v, max_relative = 1e-12);
                assert!(unit.margin.si() >= 0.0);
            }
            let loss = highest * highest / (n * low * ohms);
            assert_relative_eq!(c.figures.loss_highest.si(), loss, max_relative = 1e-12);
        }
        assert!(!sizing.candidates.is_empty());
    }
}

/// Settled voltages of units between nodes 0 (held) and the last (at zero): the nodal equations by LU, for parts
/// (node, node, ohm) and leakages drawn along the units.
fn nodal(nodes: usize, volts: f64, parts: &[(usize, usize, f64)], drawn: &[(usize, usize, f64)]) -> Vec<f64> {
    let mut g = DMatrix::<f64>::zeros(nodes, nodes);
    let mut i = DVector::<f64>::zeros(nodes);
    for (a, b, ohm) in parts {
        g[(*a, *a)] += 1.0 / ohm;
        g[(*b, *b)] += 1.0 / ohm;
        g[(*a, *b)] -= 1.0 / ohm;
        g[(*b, *a)] -= 1.0 / ohm;
    }
    for (from, to, ampere) in drawn {
        i[*from] -= ampere;
        i[*to] += ampere;
    }
    for (node, held) in [(0, volts), (nodes - 1, 0.0)] {
        g.row_mut(node).fill(0.0);
        g[(node, node)] = 1.0;
        i[node] = held;
    }
    g.lu().solve(&i).expect("regular").iter().copied().collect()
}

/// The greatest voltage of every unit of a string over every corner of resistors and leakages. `fixed` are other parts.
fn by_force(volts: f64, ohms: f64, share: f64, leakages: &[f64], fixed: &[(usize, usize, f64)]) -> Vec<f64> {
    let n = leakages.len();
    let mut greatest = vec![0.0f64; n];
    let loose = n + fixed.len();
    for corner in 0..1u32 << loose {
        let factor = |k: usize| if corner >> k & 1 == 1 { 1.0 + share } else { 1.0 - share };
        let mut parts: Vec<_> = (0..n).map(|k| (k, k + 1, ohms * factor(k))).collect();
        parts.extend(fixed.iter().enumerate().map(|(k, (a, b, ohm))| (*a, *b, ohm * factor(n + k))));
        for leaking in 0..1u32 << n {
            let drawn: Vec<_> = (0..n).filter(|k| leaking >> k & 1 == 1).map(|k| (k, k + 1, leakages[k])).collect();
            let potential = nodal(n + 1, volts, &parts, &drawn);
            for (most, ends) in greatest.iter_mut().zip(potential.windows(2)) {
                *most = most.max(ends[0] - ends[1]);
            }
        }
    }
    greatest
}

#[test]
fn leakages_that_differ_by_capacitance_are_those_of_every_corner_tried_by_force() {
    // By the makers' rule the units leak 0.01 C V: 2.115, 0.99, 0.45 and 2.115 mA.
    let unit = |id: usize, micro: f64, a: &str, b: &str| {
        format!(
            "  - {{id: C{id}, value: {micro} uF, tolerance: 20 %, across: [{a}, {b}], rated: 450 V, dielectric: \
             aluminium-electrolytic}}\n"
        )
    };
    let units =
        [unit(1, 470.0, "P", "A"), unit(2, 220.0, "A", "B"), unit(3, 100.0, "B", "C"), unit(4, 470.0, "C", "N")];
    let text = format!(
        "{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: 900 V, highest: 1100 V}}\ncapacitors:\n{}",
        units.concat()
    );
    let elements = elements(
        "elements: [{name: a, value: 47 kohm, tolerance: 10 %, rating: {power: 50 W, full_to: 70 °C, zero_at: 155 °C, \
         voltage: 1 kV}}]\n",
    );
    let build = Build { elements, series_up_to: 1, parallel_up_to: 1, show: 1, ..Build::default() };
    let sizing = balanced(&bank(&text), &BalancingAsk { build, fast_charge: false, ..BalancingAsk::default() });
    let found = &sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings)).figures;
    let expected = by_force(1100.0, 47e3, 0.1, &[2.115e-3, 0.99e-3, 0.45e-3, 2.115e-3], &[]);
    for (unit, expected) in found.units.iter().zip(expected) {
        assert_relative_eq!(unit.settled.si(), expected, max_relative = 1e-10);
    }
    assert!(
        sizing.assumptions.iter().any(|a| a.contains("2.12 mA") && a.contains("0.01 C V")),
        "{:?}",
        sizing.assumptions
    );
}

#[test]
fn a_string_that_is_no_chain_is_solved_as_the_network_that_it_is() {
    // A bleeder lies across the first two of three units, and one unit has a resistor of its own.
    let more = "resistors:\n  - {id: R1, role: bleeder, value: 150 kohm, tolerance: 5 %, across: [P, M2]}\n  - {id: R2, role: \
                balancing, value: 330 kohm, tolerance: 5 %, across: [M2, N]}\n  - {id: R3, role: bleeder, value: 100 kohm, \
                tolerance: 5 %}\n";
    let sizing = balanced(&bank(&string(3, 10.0, 450.0, 1100.0, more)), &ask(5.0, 1e-3));
    assert!(!sizing.candidates.is_empty(), "{:?}", sizing.findings);
    for c in &sizing.candidates {
        let fixed = [(0, 2, 150e3), (2, 3, 330e3)];
        let expected = by_force(1100.0, c.resistance.si(), 0.05, &[1e-3; 3], &fixed);
        for (unit, expected) in c.figures.units.iter().zip(expected) {
            assert_relative_eq!(unit.settled.si(), expected, max_relative = 1e-10);
        }
    }
    // At the upper end of the window the worst of them is at its rated voltage.
    let edge = by_force(1100.0, greatest(&sizing), 0.05, &[1e-3; 3], &[(0, 2, 150e3), (2, 3, 330e3)]);
    assert_relative_eq!(edge.iter().copied().fold(0.0, f64::max), 450.0, max_relative = 1e-8);
}

#[test]
fn a_fast_charge_that_breaks_a_rating_is_told_with_how_much_and_no_resistor_helps() {
    // Two units of 20 %: 0.6 of 800 V is 480 V.
    let file = bank(&string(2, 20.0, 450.0, 800.0, ""));
    let sizing = balanced(&file, &ask(1.0, 0.2e-3));
    assert_eq!((sizing.exit_code(), sizing.window.is_none(), sizing.candidates.len()), (1, true, 0));
    let finding = &sizing.findings[0];
    assert_eq!(finding.code, "fast-charge-over-rated");
    for part in ["480 V", "450 V", "30.0 V too much", "No resistor"] {
        assert!(finding.text.contains(part), "{part}: {}", finding.text);
    }
    for part in ["closer tolerance", "more units", "higher rated", "--slow-charge"] {
        assert!(finding.help.as_deref().unwrap_or_default().contains(part), "{part}: {:?}", finding.help);
    }
    assert!(sizing.demands.iter().any(|d| d.nowhere && d.demand.contains("fast charge")));
    // Charged slowly, the resistors set the division.
    let slow = balanced(&file, &BalancingAsk { fast_charge: false, ..ask(1.0, 0.2e-3) });
    assert!(!slow.candidates.is_empty() && slow.candidates[0].figures.units[0].fast_charge.is_none());
    // Four units of 20 % on the voltage of three: (1/0.8) / (1/0.8 + 3/1.2) of 1300 V is 433.3 V.
    let more = balanced(&bank(&string(4, 20.0, 450.0, 1300.0, "")), &ask(1.0, 0.2e-3));
    let unit = &more.candidates.first().unwrap_or_else(|| panic!("{:?}", more.findings)).figures.units[0];
    assert_relative_eq!(unit.fast_charge.expect("asked").si(), 1300.0 / 3.0, max_relative = 1e-12);
}

/// Greatest voltages of units with capacitances and resistances in parallel and leakages, from a fast charge on: stepped
/// in time by the classical Runge-Kutta method, the common current from the sum of the voltages, which stays.
fn stepped(volts: f64, farad: &[f64], ohms: &[f64], leakages: &[f64]) -> Vec<f64> {
    let elastance: f64 = farad.iter().map(|c| c.recip()).sum();
    let mut v: Vec<f64> = farad.iter().map(|c| volts / c / elastance).collect();
    let slope = |v: &[f64]| -> Vec<f64> {
        let lost: Vec<f64> = (0..v.len()).map(|k| v[k] / ohms[k] + leakages[k]).collect();
        let current = (0..v.len()).map(|k| lost[k] / farad[k]).sum::<f64>() / elastance;
        (0..v.len()).map(|k| (current - lost[k]) / farad[k]).collect()
    };
    let constants = || farad.iter().zip(ohms).map(|(c, r)| c * r);
    let step = constants().fold(f64::INFINITY, f64::min) / 50.0;
    let end = 20.0 * constants().fold(0.0, f64::max);
    let mut greatest = v.clone();
    for _ in 0..(end / step) as usize {
        let moved = |d: &[f64], h: f64| -> Vec<f64> { v.iter().zip(d).map(|(v, d)| v + h * d).collect() };
        let a = slope(&v);
        let b = slope(&moved(&a, step / 2.0));
        let c = slope(&moved(&b, step / 2.0));
        let d = slope(&moved(&c, step));
        v = (0..v.len()).map(|k| v[k] + step / 6.0 * (a[k] + 2.0 * b[k] + 2.0 * c[k] + d[k])).collect();
        greatest.iter_mut().zip(&v).for_each(|(g, v)| *g = g.max(*v));
    }
    greatest
}

/// Three units without tolerances, with 100 kohm across each.
fn three(micro: [f64; 3], tolerance: f64, resistors: f64) -> Sizing<BalancingFigures> {
    let nodes = ["P", "A", "B", "N"];
    let unit = |k: usize| {
        format!(
            "  - {{id: C{}, value: {} uF, tolerance: {tolerance} %, across: [{}, {}], rated: 1 kV}}\n",
            k + 1,
            micro[k],
            nodes[k],
            nodes[k + 1]
        )
    };
    let text = format!(
        "{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: 800 V, highest: 900 V}}\ncapacitors:\n{}{}{}",
        unit(0),
        unit(1),
        unit(2)
    );
    let list = format!(
        "elements: [{{name: a, value: 100 kohm, tolerance: {resistors} %, rating: {{power: 50 W, full_to: 70 °C, zero_at: \
         155 °C, voltage: 2 kV}}}}]\n"
    );
    let build = Build { elements: elements(&list), series_up_to: 1, parallel_up_to: 1, show: 1, ..Build::default() };
    let leakage = Some(Current::from_si(1e-4));
    balanced(&bank(&text), &BalancingAsk { build, leakage, ..BalancingAsk::default() })
}

#[test]
fn a_voltage_that_rises_above_both_ends_of_the_way_is_found() {
    // 10, 100 and 1000 uF take 811, 81 and 8 V; the smallest gives its share to the next long before the last charges.
    let sizing = three([10.0, 100.0, 1000.0], 0.0, 0.0);
    let units = &sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings)).figures.units;
    for (k, unit) in units.iter().enumerate() {
        let mut leakages = [1e-4; 3];
        leakages[k] = 0.0;
        let expected = stepped(900.0, &[10e-6, 100e-6, 1000e-6], &[100e3; 3], &leakages)[k];
        assert_relative_eq!(unit.after_fast_charge.expect("asked").si(), expected, max_relative = 1e-5);
    }
    let (middle, after) = (&units[1], units[1].after_fast_charge.expect("asked").si());
    assert!(after > 1.2 * middle.settled.si() && after > 1.2 * middle.fast_charge.expect("asked").si(), "{middle:?}");
}

#[test]
fn no_draw_from_the_tolerances_exceeds_what_is_found_after_a_fast_charge() {
    let sizing = three([100.0, 220.0, 100.0], 20.0, 10.0);
    let units = &sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings)).figures.units;
    // A fixed sequence (xorshift), ends as often as inner values.
    let mut state = 0x2545_f491_u64;
    let mut share = || {
        state ^= state << 13;
        state ^= state >> 7;
        state ^= state << 17;
        let x = (state % 1000) as f64 / 999.0;
        if state >> 20 & 1 == 1 { x.round() } else { x }
    };
    let mut closest = [0.0f64; 3];
    for _ in 0..400 {
        let farad: Vec<f64> = [100e-6, 220e-6, 100e-6].iter().map(|c| c * (0.8 + 0.4 * share())).collect();
        let ohms: Vec<f64> = (0..3).map(|_| 100e3 * (0.9 + 0.2 * share())).collect();
        let leakages: Vec<f64> = (0..3).map(|_| 1e-4 * share()).collect();
        for (k, v) in stepped(900.0, &farad, &ohms, &leakages).into_iter().enumerate() {
            let found = units[k].after_fast_charge.expect("asked").si();
            assert!(v <= found * (1.0 + 1e-6), "{k}: {v} above {found}");
            closest[k] = closest[k].max(v / found);
        }
    }
    assert!(closest.iter().all(|c| *c > 0.9), "{closest:?}");
}

#[test]
fn an_element_of_2_watt_is_refused_where_a_unit_at_its_rated_voltage_takes_more() {
    // Two units of 470 uF at 450 V with 90 kohm of 2 W each, as in a published example: 450^2 / 90k is 2.25 W. With
    // 100 V to spare in all, leakages of 100 V / 90 kohm bring a unit to just that voltage.
    let stock = |watt: f64| {
        elements(&format!(
            "elements: [{{name: a, value: 90 kohm, rating: {{power: {watt} W, full_to: 70 °C, zero_at: 155 °C, voltage: 1 \
             kV}}}}]\n"
        ))
    };
    let ask = |watt: f64| BalancingAsk {
        build: Build { elements: stock(watt), series_up_to: 1, parallel_up_to: 1, ..Build::default() },
        leakage: Some(Current::from_si(100.0 / 90e3 * (1.0 - 1e-12))),
        ..BalancingAsk::default()
    };
    let file = bank(&string(2, 0.0, 450.0, 800.0, ""));
    let refused = balanced(&file, &ask(2.0));
    assert_eq!((refused.exit_code(), refused.candidates.len()), (1, 0));
    let told = format!("{:?}", refused.findings);
    assert!(
        told.contains("demands-collide")
            && (told.contains("2.25 W") || told.contains("2.26 W"))
            && told.contains("marked resistance"),
        "{told}"
    );
    let taken = balanced(&file, &ask(2.3));
    assert_relative_eq!(taken.candidates[0].figures.element_power.si(), 2.25, max_relative = 1e-9);
    assert!(balanced(&file, &ask(2.2)).candidates.is_empty());
}

#[test]
fn demands_that_collide_tell_what_would_open_the_window() {
    let file = bank(&string(3, 0.0, 450.0, 1200.0, ""));
    let sizing = balanced(&file, &BalancingAsk { max_loss: Some(Power::from_si(6.1)), ..ask(0.0, 1.03e-3) });
    // 150 V / 2.06 mA = 72.82 kohm at most; 1200^2 / (3 * 6.1 W) = 78.69 kohm at least; there a unit is at 454.03 V and
    // 0.9532 mA would do; at 72.82 kohm the loss is 6.592 W.
    let finding = &sizing.findings[0];
    assert_eq!(finding.code, "demands-collide");
    for part in ["72.8 kohm", "78.7 kohm", "1.09 times"] {
        assert!(finding.text.contains(part), "{part}: {}", finding.text);
    }
    let help = finding.help.as_deref().unwrap_or_default();
    for part in ["455 V", "953 uA", "6.60 W", "more units in series"] {
        assert!(help.contains(part), "{part}: {help}");
    }
}

#[test]
fn a_limit_counts_only_where_it_is_asked_for() {
    let file = bank(&string(2, 10.0, 450.0, 800.0, "limits: [{id: site, voltage: 50 V, within: 1 min}]\n"));
    let free = balanced(&file, &ask(1.0, 0.5e-3));
    assert!(free.candidates[0].not_met.contains(&"limit site".to_string()), "{:?}", free.candidates[0].not_met);
    assert!(free.candidates[0].figures.limits.is_empty());
    let bound = balanced(&file, &BalancingAsk { limits: true, ..ask(1.0, 0.5e-3) });
    // Of two units in parallel with theirs: t / (ln(800/50) * 1.1 * 470 uF), each at the upper end of its tolerance.
    let by_hand = 60.0 / ((800.0f64 / 50.0).ln() * 1.1 * 470e-6) / 1.01;
    assert_relative_eq!(greatest(&bound), by_hand, max_relative = 1e-8);
    let limit = &bound.candidates[0].figures.limits[0];
    assert_eq!((limit.id.as_str(), limit.met), ("site", Some(true)));
}

#[test]
fn a_lumped_capacitor_groups_in_parallel_and_one_string_of_several_are_found() {
    let file = |capacitors: &str| {
        bank(&format!(
            "{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: 700 V, highest: 800 V}}\ncapacitors:\n{capacitors}"
        ))
    };
    let units = |bank: &Bank, ask: &BalancingAsk| -> Vec<(Vec<String>, [String; 2], f64)> {
        let sizing = balanced(bank, ask);
        let first = sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings)).figures.clone();
        first.units.into_iter().map(|u| (u.capacitors, u.across, u.leakage.si())).collect()
    };
    let ids = |found: &[(Vec<String>, [String; 2], f64)]| -> Vec<String> {
        found.iter().map(|(c, ..)| c.join("+")).collect()
    };
    // Two groups of four units: a group leaks four times as much.
    let lumped = units(
        &file("  - {id: C1, value: 100 uF, units: {series: 2, parallel: 4}, rated: 450 V, across: [N, P]}\n"),
        &ask(1.0, 0.1e-3),
    );
    // The file gives N first, and the string runs from P to N.
    assert_eq!(ids(&lumped), ["C1.2", "C1.1"]);
    assert_eq!(lumped[0].1, ["P".to_string(), "C1.1-2".to_string()]);
    assert_relative_eq!(lumped[0].2, 0.4e-3, max_relative = 1e-12);
    let parallel = units(
        &file(
            "  - {id: C1, value: 100 uF, across: [P, M], rated: 450 V}\n  - {id: C2, value: 100 uF, across: [M, P], rated: 500 \
             V}\n  - {id: C3, value: 200 uF, across: [M, N], rated: 450 V}\n  - {id: C4, value: 1 uF}\n",
        ),
        &ask(1.0, 0.1e-3),
    );
    assert_eq!(ids(&parallel), ["C1+C2", "C3"]);
    // Groups inside a chain are written out in their place.
    let mixed = units(
        &file(
            "  - {id: C1, value: 100 uF, across: [P, M], rated: 450 V}\n  - {id: C2, value: 200 uF, units: {series: 2}, across: \
             [M, N], rated: 450 V}\n",
        ),
        &ask(1.0, 0.1e-3),
    );
    assert_eq!(ids(&mixed), ["C1", "C2.1", "C2.2"]);
    let two = file(
        "  - {id: C1, value: 100 uF, across: [P, A], rated: 450 V}\n  - {id: C2, value: 100 uF, across: [A, N], rated: 450 V}\n  \
         - {id: C3, value: 100 uF, across: [P, B], rated: 450 V}\n  - {id: C4, value: 100 uF, across: [B, N], rated: 450 V}\n",
    );
    let SizeError::Asked(told) = balancing(&two, "", &ask(1.0, 0.1e-3)).expect_err("two strings") else { panic!() };
    assert!(told.contains("2 strings") && told.contains("--capacitor C3"), "{told}");
    let meant = BalancingAsk { capacitor: Some("C4".into()), ..ask(1.0, 0.1e-3) };
    assert_eq!(ids(&units(&two, &meant)), ["C3", "C4"]);
}

#[test]
fn a_string_behind_a_series_resistor_is_charged_through_it() {
    // Two units between A and N, fed through 10 ohm: nothing is divided at once, and the way ends at the settled division.
    let text = format!(
        "{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: 700 V, highest: 800 V}}\ncapacitors:\n  - {{id: C1, value: 100 uF, \
         tolerance: 10 %, across: [A, M], rated: 450 V}}\n  - {{id: C2, value: 100 uF, tolerance: 10 %, across: [M, N], rated: \
         450 V}}\nresistors:\n  - {{id: R1, role: series, value: 10 ohm, tolerance: 5 %, across: [P, A]}}\n"
    );
    let stock = "elements: [{name: a, value: 100 kohm, tolerance: 1 %, rating: {power: 10 W, full_to: 70 °C, zero_at: 155 °C, \
                 voltage: 1 kV}}]\n";
    let build = Build { elements: elements(stock), series_up_to: 1, parallel_up_to: 1, ..Build::default() };
    let across = Some(["A".to_string(), "N".to_string()]);
    let sizing = balanced(&bank(&text), &BalancingAsk { across, build, ..ask(1.0, 0.02e-3) });
    let unit = &sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings)).figures.units[0];
    assert_eq!(unit.fast_charge, Some(Voltage::from_si(0.0)));
    // 10 ohm is nothing to 100 uF at these resistances: within milliseconds capacitance divides, 0.55 of 800 V, and from
    // there the way goes down to the settled 1.01 (800 + 0.99 * 2) / 2 V.
    let after = unit.after_fast_charge.expect("asked").si();
    assert!((439.5..440.0).contains(&after), "{unit:?}");
    assert!((404.0..405.0).contains(&unit.settled.si()), "{unit:?}");
}

#[test]
fn one_open_resistor_leaves_the_voltage_to_the_others_leakage() {
    let sizing = balanced(&bank(&string(3, 0.0, 450.0, 1100.0, "")), &ask(0.0, 1e-3));
    for c in &sizing.candidates {
        let ohms = c.resistance.si();
        let open = c.figures.open_unit_voltage.expect("bounded").si();
        if c.parallel == 1 {
            // No current passes the open one: it takes all the voltage, and what the others drop the other way.
            assert_relative_eq!(open, 1100.0 + 2.0 * ohms * 1e-3, max_relative = 1e-9);
        }
        assert!(sizing.findings.iter().any(|f| f.code == "open-resistor-overloads-unit"));
    }
    // With one of three strings lost the unit has half as much again: r = 1.5 of R.
    let build = Build { series_up_to: 1, parallel_up_to: 3, show: 60, ..of(Series::E24) };
    let strings = balanced(&bank(&string(2, 0.0, 450.0, 500.0, "")), &BalancingAsk { build, ..ask(0.0, 1e-3) });
    let three = strings.candidates.iter().filter(|c| c.parallel == 3).collect::<Vec<_>>();
    for c in three {
        let (open, ohms) = (c.figures.open_unit_voltage.expect("bounded").si(), c.resistance.si());
        let (own, other) = (1.5 * 1.05 * ohms, 0.95 * ohms);
        assert_relative_eq!(open, own * (500.0 + other * 1e-3) / (own + other), max_relative = 1e-9);
    }
}
