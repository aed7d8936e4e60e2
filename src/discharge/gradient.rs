//! How a voltage changes with every loose value: closed form from the modes, no differences.

use super::case::Case;
use super::model::{Model, Part, PartKind};
use super::scenario::Scenario;

/// Numbers of the parts that are in the network, in its order.
fn in_network(parts: &[Part], map: &[usize], there: impl Fn(usize) -> bool) -> Vec<usize> {
    (0..parts.len()).filter(|i| map[parts[*i].a] != map[parts[*i].b] && there(*i)).collect()
}

/// Derivatives in volt per unit of every loose factor, of the voltage of model node `a` against `b` at `t` seconds
/// after isolation. `None` where a sink draws: there are no modes of the whole then.
pub(super) fn voltage_gradient(
    model: &Model,
    scenario: &Scenario,
    point: &[f64],
    case: &Case,
    (a, b): (usize, usize),
    t: f64,
) -> Option<Vec<f64>> {
    let response = case.response.undrawn()?;
    if model.terminals.len() != 2 {
        return None; // What stands at isolation is no operating point of two terminals.
    }
    let mut gradient = vec![0.0; point.len()];
    let map = &case.map;
    let (a, b) = (map[a], map[b]);
    if a == b {
        return Some(gradient);
    }
    let mut add_parts = |network: &crate::circuit::Network, found: &crate::circuit::Sensitivity, ohms: &[f64]| {
        let resistors = in_network(&model.resistors, map, |i| ohms[i].is_finite());
        for ((index, edge), slope) in resistors.iter().zip(&network.resistors).zip(&found.per_siemens) {
            let part = &model.resistors[*index];
            if let Some(p) = part.parameter.filter(|p| *p < point.len()) {
                // A conductance goes as one over the factor; that of an absorption branch goes with it.
                let sign = if matches!(part.kind, PartKind::Absorbing(_)) { 1.0 } else { -1.0 };
                gradient[p] += sign * slope / (edge.value * point[p]);
            }
        }
        let capacitors = in_network(&model.capacitors, map, |_| true);
        for ((index, edge), slope) in capacitors.iter().zip(&network.capacitors).zip(&found.per_farad) {
            if let Some(p) = model.capacitors[*index].parameter.filter(|p| *p < point.len()) {
                gradient[p] += slope * edge.value / point[p];
            }
        }
    };
    let carried = response.sensitivity(a, b, t);
    add_parts(response.network(), &carried.kept, &case.after_ohms);

    // The state at isolation is the operating point before it, but for capacitors with a voltage of their own.
    let before = model.network(&scenario.before, point, &[]);
    let mut weights = vec![0.0; before.nodes];
    let capacitors = in_network(&model.capacitors, map, |_| true);
    for (index, weight) in capacitors.iter().zip(&carried.per_start) {
        if model.own_voltages[*index].is_none() || scenario.drops_own_voltages {
            let part = &model.capacitors[*index];
            weights[map[part.a]] += weight;
            weights[map[part.b]] -= weight;
        }
    }
    if let Some((of_a, of_b)) = response.apart(a, b) {
        weights[of_a] += 1.0;
        weights[of_b] -= 1.0;
    }
    let held: Vec<usize> = model.terminals.iter().map(|n| map[*n]).collect();
    let found = before.operating_point_sensitivity(&held, case.potentials()?, &weights);
    add_parts(&before, &found, &case.before_ohms);
    Some(gradient)
}

#[cfg(test)]
mod tests {
    use super::super::{Figure, Study, faults};
    use super::*;
    use crate::bank::{Bank, file};
    use crate::discharge::worst::Objective;

    /// The one state of a DC bank.
    fn solved(model: &Model, scenario: &Scenario, point: &[f64]) -> Case {
        Case::solve(model, scenario, point, 600.0).expect("solves").remove(0)
    }

    fn bank(parts: &str) -> Bank {
        let text =
            format!("ebbvolt: 1\ntag: T\ntouch_voltage: 50 V\ncharged_to: {{nominal: 500 V, highest: 600 V}}\n{parts}");
        file::read("t.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}")).0
    }

    /// Invented networks with everything that has a rule of its own: loops of capacitors, nodes without a capacitor,
    /// floating groups, absorption, voltages of their own, sections behind series resistors.
    const BANKS: [&str; 4] = [
        "capacitors:\n  - {id: C1, value: 100 uF, tolerance: 20 %, across: [P, X]}\n  \
         - {id: C2, value: 220 uF, tolerance: 10 %, across: [X, N], absorption: 2 %}\n  \
         - {id: C3, value: 47 uF, tolerance: 10 %, across: [P, N]}\n  \
         - {id: C4, value: 330 uF, tolerance: 20 %, across: [Y, N]}\nresistors:\n  \
         - {id: R1, role: balancing, value: 33 kohm, tolerance: 5 %, across: [P, X]}\n  \
         - {id: R2, role: balancing, value: 47 kohm, tolerance: 5 %, across: [X, N]}\n  \
         - {id: R3, role: series, value: 1 kohm, tolerance: 5 %, across: [P, Z]}\n  \
         - {id: R4, role: series, value: 2 kohm, tolerance: 5 %, across: [Z, Y]}\n  \
         - {id: R5, role: bleeder, value: 68 kohm, tolerance: 5 %, across: [Z, N]}\n",
        // The joint of C1 and C2 floats; C3 and C4 hang on by C5 alone.
        "capacitors:\n  - {id: C1, value: 10 uF, tolerance: 10 %, across: [P, X]}\n  \
         - {id: C2, value: 22 uF, tolerance: 10 %, across: [X, N]}\n  \
         - {id: C5, value: 4 uF, tolerance: 10 %, across: [P, Y]}\n  \
         - {id: C4, value: 33 uF, tolerance: 20 %, across: [Y, N]}\nresistors:\n  \
         - {id: R1, role: bleeder, value: 330 kohm, tolerance: 5 %, across: [P, N]}\n  \
         - {id: R2, role: bleeder, value: 470 kohm, tolerance: 5 %, across: [X, Y]}\n",
        "capacitors:\n  - {id: C1, value: 100 uF, tolerance: 20 %, across: [P, N]}\n  \
         - {id: C2, value: 220 uF, tolerance: 10 %, across: [Y, N], charged_to: 300 V}\nresistors:\n  \
         - {id: R1, role: bleeder, value: 33 kohm, tolerance: 5 %, across: [P, N]}\n  \
         - {id: R2, role: series, value: 47 kohm, tolerance: 5 %, across: [P, Y]}\n",
        "capacitors:\n  - {id: C1, value: 100 uF, tolerance: 20 %, across: [P, X]}\n  \
         - {id: C2, value: 100 uF, tolerance: 20 %, across: [X, N]}\nresistors:\n  \
         - {id: R1, role: balancing, value: 33 kohm, tolerance: 5 %, across: [P, X]}\n  \
         - {id: R2, role: balancing, value: 33 kohm, tolerance: 5 %, across: [X, N]}\n  \
         - {id: R3, role: bleeder, value: 100 kohm, tolerance: 5 %, across: [P, N]}\n",
    ];

    #[test]
    fn the_closed_form_agrees_with_differences_healthy_and_under_every_fault() {
        let mut compared = 0;
        for parts in BANKS {
            let bank = bank(parts);
            let model = Model::new(&bank).expect("a model");
            let all = faults(&bank, &model).into_iter().flat_map(|f| f.scenarios);
            for scenario in [Scenario::default()].into_iter().chain(all) {
                let point: Vec<f64> = (0..model.passive).map(|p| 1.0 + 0.013 * (p as f64 - 3.0)).collect();
                let case = solved(&model, &scenario, &point);
                for (pair, t) in (0..model.pairs.len()).flat_map(|p| [0.0, 0.3, 4.0, 30.0].map(|t| (p, t))) {
                    let (a, b) = model.pairs[pair];
                    let found = voltage_gradient(&model, &scenario, &point, &case, (a, b), t).expect("no sinks");
                    for p in 0..model.passive {
                        let at = |h: f64| {
                            let mut moved = point.clone();
                            moved[p] += h;
                            solved(&model, &scenario, &moved).across(a, b).value(t)
                        };
                        // Four points: the error is of fourth order in the step.
                        let h = 1e-3;
                        let by_differences = (8.0 * (at(h) - at(-h)) - (at(2.0 * h) - at(-2.0 * h))) / (12.0 * h);
                        let error = (found[p] - by_differences).abs();
                        assert!(
                            error <= 1e-6,
                            "{} of {:?} at {t} s: {} and {by_differences}, {scenario:?}",
                            model.parameters[p].id,
                            (&model.node_names[a], &model.node_names[b]),
                            found[p]
                        );
                        compared += 1;
                    }
                }
            }
        }
        assert!(compared > 3000, "{compared}");
    }

    /// The proofs of `pinned` against the closed form, which knows nothing of them.
    #[test]
    fn a_pinned_value_has_the_slope_that_is_proven_everywhere() {
        let string = "capacitors:\n  - {id: C1, value: 100 uF, tolerance: 20 %, across: [P, X], absorption: 5 %}\n  \
             - {id: C2, value: 68 uF, tolerance: 20 %, across: [X, Y]}\n  \
             - {id: C3, value: 100 uF, tolerance: 20 %, across: [Y, N]}\n  \
             - {id: C4, value: 47 uF, tolerance: 20 %, across: [Z, N]}\nresistors:\n  \
             - {id: R1, role: balancing, value: 33 kohm, tolerance: 15 %, across: [P, X]}\n  \
             - {id: R2, role: balancing, value: 22 kohm, tolerance: 15 %, across: [X, Y]}\n  \
             - {id: R3, role: balancing, value: 47 kohm, tolerance: 15 %, across: [Y, N]}\n  \
             - {id: R4, role: series, value: 10 kohm, tolerance: 15 %, across: [Y, Z]}\n  \
             - {id: R5, role: bleeder, value: 100 kohm, tolerance: 15 %, across: [Z, N]}\n";
        let ladder = "capacitors:\n  - {id: C1, value: 100 uF, tolerance: 20 %, across: [P, N]}\n  \
             - {id: C2, value: 68 uF, tolerance: 20 %, across: [X, N]}\n  \
             - {id: C3, value: 220 uF, tolerance: 20 %, across: [Y, N], absorption: 3 %}\nresistors:\n  \
             - {id: R1, role: series, value: 3 kohm, tolerance: 15 %, across: [P, X]}\n  \
             - {id: R2, role: series, value: 2 kohm, tolerance: 15 %, across: [X, W]}\n  \
             - {id: R3, role: series, value: 2 kohm, tolerance: 15 %, across: [W, Y]}\n  \
             - {id: R4, role: bleeder, value: 47 kohm, tolerance: 15 %, across: [W, N]}\n  \
             - {id: R5, role: bleeder, value: 100 kohm, tolerance: 15 %, across: [P, N]}\n";
        let mut held = 0;
        for parts in [string, ladder].iter().chain(&BANKS) {
            let bank = bank(parts);
            let model = Model::new(&bank).expect("a model");
            let figures: Vec<Figure> = (0..model.pairs.len()).map(|pair| Figure::VoltageAt { pair, t: 2.0 }).collect();
            let all = faults(&bank, &model).into_iter().flat_map(|f| f.scenarios);
            for scenario in [Scenario::default()].into_iter().chain(all) {
                let study = Study::new(&model, &scenario, 600.0, &figures, 0);
                for step in 0..8 {
                    let share = |p: usize| ((step * 7 + p * 5) % 11) as f64 / 10.0;
                    let range = |p: usize| &model.parameters[p];
                    let point: Vec<f64> =
                        (0..model.passive).map(|p| range(p).low + share(p) * (range(p).high - range(p).low)).collect();
                    let case = solved(&model, &scenario, &point);
                    for (index, t) in (0..figures.len()).flat_map(|i| [0.0, 0.5, 3.0, 20.0, 100.0].map(|t| (i, t))) {
                        let (a, b) = model.pairs[index];
                        let volts = case.across(a, b).value(t);
                        let slopes = voltage_gradient(&model, &scenario, &point, &case, (a, b), t).expect("no sinks");
                        for (p, pin) in study.pins(index).into_iter().enumerate() {
                            let slope = slopes[p] * volts.signum();
                            let right = match pin {
                                Pin::Free => continue,
                                Pin::High => slope >= -1e-9,
                                Pin::Low => slope <= 1e-9,
                                Pin::Idle => slope.abs() <= 1e-9,
                            };
                            let id = &model.parameters[p].id;
                            assert!(right, "{id} is {pin:?} but {slope} at {t} s, {scenario:?}, {parts}");
                            held += 1;
                        }
                    }
                }
            }
        }
        assert!(held > 5000, "{held}");
    }

    use super::super::pinned::Pin;

    #[test]
    fn what_is_pinned_in_a_ladder_and_in_a_string_is_what_the_argument_says() {
        let pins = |parts: &str, a: &str, b: &str| -> Vec<(String, Pin)> {
            let bank = bank(parts);
            let model = Model::new(&bank).expect("a model");
            let pair = model.find_pair(a, b).expect("a test point");
            let figures = [Figure::VoltageWait { pair, level: 50.0 }];
            let scenario = Scenario::default();
            let study = Study::new(&model, &scenario, 600.0, &figures, 0);
            model.parameters.iter().map(|p| p.id.clone()).zip(study.pins(0)).collect()
        };
        let of = |list: &[(&str, Pin)]| list.iter().map(|(id, pin)| (id.to_string(), *pin)).collect::<Vec<_>>();
        let two_sections = BANKS[2].replace(", charged_to: 300 V", "");
        let expected = of(&[("C1", Pin::High), ("C2", Pin::High), ("R1", Pin::High), ("R2", Pin::Free)]);
        assert_eq!(pins(&two_sections, "P", "N"), expected);
        let string =
            BANKS[3].replace("  - {id: R3, role: bleeder, value: 100 kohm, tolerance: 5 %, across: [P, N]}\n", "");
        let expected = of(&[("C1", Pin::High), ("C2", Pin::Idle), ("R1", Pin::High), ("R2", Pin::Low)]);
        assert_eq!(pins(&string, "P", "X"), expected);
        let expected = of(&[("C1", Pin::High), ("C2", Pin::High), ("R1", Pin::Free), ("R2", Pin::Free)]);
        assert_eq!(pins(&string, "P", "N"), expected);
        // With the bleeder over both, charge of one can run into the other: nothing is proven.
        assert!(pins(BANKS[3], "P", "X").iter().all(|(_, pin)| *pin == Pin::Free));
    }
}
