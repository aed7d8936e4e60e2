//! Balancing designs in the bank file: the plan of the file with them gives the same figures; and a search through
//! everything on a small stock.

use crate::balancing::{ask, balanced, string};
use crate::banks::{bank, elements, planned};
use ebbvolt::bank::Bank;
use ebbvolt::bank::description::Resistor;
use ebbvolt::bank::file;
use ebbvolt::bank::stock::Values;
use ebbvolt::plan::Verdict;
use ebbvolt::quantity::{Current, Power, Quantity, Time};
use ebbvolt::size::{BalancingAsk, BalancingFigures, Build, Rank, Sizing, WrittenOut};
use proptest::prelude::*;

/// Bit for bit, or to the rounding of a value that went through text.
fn same(a: f64, b: f64) -> bool {
    (a - b).abs() <= 1e-11 * a.abs().max(b.abs())
}

/// A lumped string (invented), in lines of its own or in braces.
fn lumped(units: u32, braces: bool, highest: f64) -> String {
    let head = string(0, 0.0, 0.0, highest, "");
    if braces {
        format!(
            "{head}  - {{id: C1, value: 470 uF, tolerance: 5 %, units: {{series: {units}}}, rated: 450 V}}  # the bus\n"
        )
    } else {
        format!(
            "{head}  # the bus\n  - id: C1\n    value: 470 uF   # each\n    tolerance: 5 %\n    units: {{series: {units}}}\n    \
             rated: 450 V\nlimits: [{{id: site, voltage: 50 V, within: 1 h}}]\n"
        )
    }
}

/// The text of a bank file with a design of `sizing` in it.
fn placed(text: &str, figures: &BalancingFigures) -> String {
    let mut with = text.to_string();
    for WrittenOut { id, groups } in &figures.written_out {
        with = file::with_groups("bank.yaml", with.as_bytes(), id, groups).unwrap_or_else(|e| panic!("{e}\n{with}"));
    }
    for resistor in &figures.resistors {
        with = file::with_resistor("bank.yaml", with.as_bytes(), resistor).unwrap_or_else(|e| panic!("{e}\n{with}"));
    }
    with
}

fn holds_in_the_file(text: &str, ask: &BalancingAsk, sizing: &Sizing<BalancingFigures>) {
    for c in &sizing.candidates {
        let with = placed(text, &c.figures);
        for comment in text.lines().filter_map(|line| line.split_once('#')) {
            assert!(with.contains(comment.1), "{with}");
        }
        let plan = planned(&bank(&with));
        assert_eq!(plan.verdict, c.verdict, "{with}");
        let keep = plan.waits.iter().map(|w| w.keep.map_or(f64::INFINITY, Time::si)).fold(0.0, f64::max);
        assert!(same(keep, c.figures.wait.expect("it ends").si()));
        let of = |r: &Resistor| plan.resistors.iter().find(|p| p.id == r.id).expect("it is there");
        let standing = |r: &Resistor| of(r).continuous_power.expect("always connected").si();
        let most = c.figures.resistors.iter().map(standing).fold(0.0, f64::max);
        assert!(same(most, c.element_power.expect("told").si()));
        // With leakages a unit is higher than in the plan, which has none.
        assert!(most <= c.figures.element_power.si() * (1.0 + 1e-9));
        let allowed = c.allowed_power.expect("rated").si() * (1.0 - ask.build.margin);
        assert!(c.figures.element_power.si() <= allowed);
        for (unit, resistor) in c.figures.units.iter().zip(&c.figures.resistors) {
            assert_eq!(unit.across, resistor.across);
            let found = plan.capacitors.iter().find(|p| p.id == unit.capacitors[0]).expect("it is there");
            assert!(found.voltage_highest.si() <= unit.highest().si() * (1.0 + 1e-9));
            assert!(unit.highest().si() <= unit.rated.si() && found.verdict == Verdict::Met);
        }
        assert!(ask.max_loss.is_none_or(|most| c.figures.loss_highest.si() <= most.si()));
        assert!(c.figures.limits.iter().all(|l| l.met == Some(true)));
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 20, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn every_design_put_into_the_file_gives_a_plan_with_the_same_figures(
        units in 2u32..5,
        shape in 0u8..3,
        share in 0.6..0.97f64,
        milli in 0.05..3.0f64,
        margin in 0.0..0.6f64,
        tolerance in 0.5..5.0f64,
        loss in proptest::option::of(1.0..60.0f64),
        limits in any::<bool>(),
        rank in 0usize..3,
    ) {
        let highest = (450.0 * f64::from(units) * share).round();
        let more = "limits: [{id: site, voltage: 50 V, within: 10 min}]   # of the site\n";
        let text = match shape {
            0 => string(units as usize, 5.0, 450.0, highest, more),
            1 => lumped(units, true, highest),
            _ => lumped(units, false, highest),
        };
        let mut ask = BalancingAsk { max_loss: loss.map(Power::from_si), ..ask((tolerance * 2.0).round() / 2.0, milli * 1e-3) };
        ask.limits = limits && shape != 1;
        ask.build.margin = margin;
        ask.build.rank = [Rank::Elements, Rank::Loss, Rank::Wait][rank];
        let sizing = balanced(&bank(&text), &ask);
        holds_in_the_file(&text, &ask, &sizing);
        // Nothing found comes with a reason.
        prop_assert!(!sizing.candidates.is_empty() || !sizing.findings.is_empty());
    }
}

#[test]
fn the_random_demands_above_do_find_designs() {
    for text in [string(3, 5.0, 450.0, 1100.0, ""), lumped(2, true, 750.0), lumped(4, false, 1500.0)] {
        let ask = ask(1.0, 1e-3);
        let sizing = balanced(&bank(&text), &ask);
        assert_eq!(sizing.candidates.len(), 2, "{:?}", sizing.findings);
        holds_in_the_file(&text, &ask, &sizing);
    }
}

const STOCK: &str = "elements:
  - {name: a, value: 47 kohm, tolerance: 5 %, rating: {power: 3 W, full_to: 70 °C, zero_at: 155 °C, voltage: 500 V}}
  - {name: b, value: 22 kohm, tolerance: 10 %, rating: {power: 10 W, full_to: 25 °C, zero_at: 275 °C, voltage: 400 V}}
  - {name: c, series: E6, from: 10 kohm, to: 220 kohm, tolerance: 1 %, rating: {power: 2 W, full_to: 70 °C, zero_at: 155 °C, voltage: 350 V}}
  - {name: d, value: 33 kohm, rating: {power: 5 W, full_to: 70 °C, zero_at: 155 °C}}
";

/// Every array of the stock across both units of a string of two, by closed forms for the units and by the plan for the
/// ratings: name, value, strings, elements in series.
fn everything(file: &Bank, ask: &BalancingAsk, spread: f64, highest: f64) -> Vec<(String, u64, u32, u32)> {
    let leakage = ask.leakage.map_or(0.0, Current::si);
    let mut good = Vec::new();
    for element in &ask.build.elements {
        let values = match element.values {
            Values::One(value) => vec![value],
            Values::Preferred { series, from, to } => series.between(from, to),
        };
        let share = element.tolerance.map_or(0.0, |t| t.high().si());
        for value in values {
            for (series, parallel) in (1..=3).flat_map(|s| (1..=3).map(move |p| (s, p))) {
                let ohms = value.si() * f64::from(series) / f64::from(parallel);
                let (low, high) = (ohms * (1.0 - share), ohms * (1.0 + share));
                let settled = high * (highest + low * leakage) / (low + high);
                let divided = highest * (1.0 + spread) / 2.0;
                // Of two units the way between is one exponential: its ends are the greatest.
                let unit = settled.max(divided);
                let rest = f64::from(series - 1) * (1.0 - share);
                let odd = rest.clamp(1.0 - share, 1.0 + share);
                let watt = odd * value.si() * (unit / ((odd + rest) * value.si())).powi(2);
                let volt = unit * (1.0 + share) / (1.0 + share + rest);
                let mut with = file.description().clone();
                for (number, across) in [["P", "M1"], ["M1", "N"]].iter().enumerate() {
                    with.resistors.push(Resistor {
                        id: format!("RB{}", number + 1),
                        role: ebbvolt::bank::description::Role::Balancing,
                        value,
                        tolerance: element.tolerance,
                        across: across.map(String::from),
                        series,
                        parallel,
                        rating: element.rating,
                        tempco: None,
                        ageing: None,
                        phases: None,
                        switched: None,
                    });
                }
                let plan = planned(&Bank::new(with).expect("a bank"));
                let part = &plan.resistors[0];
                let allowed = part.allowed_power.expect("rated").si() * (1.0 - ask.build.margin);
                let does = unit <= 450.0
                    && watt <= allowed
                    && element.rating.voltage.is_none_or(|most| volt <= most.si())
                    && plan.resistors.iter().all(|r| r.checks.iter().all(|c| c.verdict != Verdict::NotMet))
                    && ask.max_loss.is_none_or(|most| highest * highest / (2.0 * low) <= most.si());
                if does {
                    good.push((element.name.clone(), value.si().round() as u64, series, parallel));
                }
            }
        }
    }
    good.sort();
    good
}

#[test]
fn a_ranked_list_has_all_that_does_the_job_and_nothing_else() {
    let file = bank(&string(2, 5.0, 450.0, 800.0, ""));
    let build =
        |margin: f64, rank: Rank| Build { elements: elements(STOCK), show: 1000, margin, rank, ..Build::default() };
    for (margin, rank, loss) in [
        (0.0, Rank::Elements, None),
        (0.0, Rank::Loss, None),
        (0.3, Rank::Wait, Some(20.0)),
        (0.5, Rank::Elements, Some(12.0)),
    ] {
        let ask = BalancingAsk {
            build: build(margin, rank),
            leakage: Some(Current::from_si(0.8e-3)),
            max_loss: loss.map(Power::from_si),
            ..BalancingAsk::default()
        };
        let all = everything(&file, &ask, 0.05, 800.0);
        let sizing = balanced(&file, &ask);
        let mut found: Vec<_> = (sizing.candidates.iter())
            .map(|c| (c.element.clone(), c.value.si().round() as u64, c.series, c.parallel))
            .collect();
        found.sort();
        assert_eq!(found, all);
        assert!(all.len() > 3, "{all:?}");
        let keys: Vec<f64> = sizing
            .candidates
            .iter()
            .map(|c| match rank {
                Rank::Loss => c.figures.loss_highest.si(),
                Rank::Wait => c.figures.wait.expect("it ends").si(),
                _ => f64::from(c.elements),
            })
            .collect();
        assert!(keys.windows(2).all(|k| k[0] <= k[1] * (1.0 + 1e-9)), "{keys:?}");
    }
}
