//! A ranked list against a search through everything: every array of a small stock is put into the bank and planned.

use crate::banks::{HEAD, bank, elements, planned, sized};
use ebbvolt::bank::Bank;
use ebbvolt::bank::description::{Resistor, Role};
use ebbvolt::bank::stock::Values;
use ebbvolt::plan::{Plan, Verdict};
use ebbvolt::quantity::{Power, Quantity, Time};
use ebbvolt::size::{BleederAsk, Build, Rank};

const STOCK: &str = "elements:
  - {name: a, value: 22 kohm, tolerance: 5 %, rating: {power: 12 W, full_to: 70 °C, zero_at: 155 °C, voltage: 500 V}}
  - {name: b, value: 10 kohm, tolerance: 10 %, rating: {power: 20 W, full_to: 25 °C, zero_at: 275 °C, voltage: 400 V}}
  - {name: c, series: E6, from: 4.7 kohm, to: 100 kohm, tolerance: 1 %, rating: {power: 7 W, full_to: 70 °C, zero_at: 155 °C, voltage: 350 V}}
  - {name: d, value: 33 kohm, rating: {power: 30 W, full_to: 25 °C, zero_at: 275 °C}}
";

fn file(balanced: bool) -> String {
    let parts = if balanced {
        "capacitors: [{id: C1, value: 1000 uF, tolerance: 20 %, across: [P, M]}, {id: C2, value: 1000 uF, tolerance: 20 %, \
         across: [M, N]}]\nresistors: [{id: R1, role: balancing, value: 100 kohm, tolerance: 5 %, across: [P, M]}, {id: \
         R2, role: balancing, value: 100 kohm, tolerance: 5 %, across: [M, N]}]\n"
    } else {
        "capacitors: [{id: C1, value: 2200 uF, tolerance: 20 %, across: [P, N]}]\n"
    };
    format!(
        "{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: 565 V, highest: 700 V}}\n{parts}limits: [{{id: a, voltage: 50 V, \
         within: 3 min}}]\n"
    )
}

/// One array that does the job, by its plan alone.
#[derive(Debug, PartialEq)]
struct Good {
    name: String,
    ohms: f64,
    series: u32,
    parallel: u32,
    lowest: f64,
    wait: f64,
}

fn does(plan: &Plan, ask: &BleederAsk, lowest: f64) -> bool {
    let part = plan.resistors.iter().find(|r| r.id == "RB").expect("it is there");
    let power = part.continuous_power.expect("always connected").si();
    let allowed = part.allowed_power.expect("rated").si() * (1.0 - ask.build.margin);
    let limit = &plan.limits[0];
    limit.met == Some(true)
        && (!ask.single_fault || limit.single_fault_met == Some(true))
        && power <= allowed
        && part.checks.iter().all(|c| c.verdict != Verdict::NotMet)
        && ask.max_loss.is_none_or(|most| 700.0 * 700.0 / lowest <= most.si())
}

/// Every array of the stock, each through the full plan.
/// Every design of the small stock.
fn all() -> Build {
    Build { elements: elements(STOCK), show: 1000, ..Build::default() }
}

fn everything(bank: &Bank, ask: &BleederAsk) -> Vec<Good> {
    let mut good = Vec::new();
    for element in &ask.build.elements {
        let values = match element.values {
            Values::One(value) => vec![value],
            Values::Preferred { series, from, to } => series.between(from, to),
        };
        for value in values {
            for series in 1..=ask.build.series_up_to {
                for parallel in 1..=ask.build.parallel_up_to {
                    let mut with = bank.description().clone();
                    with.limits[0].single_fault = ask.single_fault;
                    with.resistors.push(Resistor {
                        id: "RB".into(),
                        role: Role::Bleeder,
                        value,
                        tolerance: element.tolerance,
                        across: ["P".into(), "N".into()],
                        series,
                        parallel,
                        rating: element.rating,
                        tempco: None,
                        ageing: None,
                        phases: None,
                        switched: None,
                    });
                    let plan = planned(&Bank::new(with).expect("a bank"));
                    let ohms = value.si() * f64::from(series) / f64::from(parallel);
                    let lowest = ohms * element.tolerance.map_or(1.0, |t| t.lowest_factor());
                    if does(&plan, ask, lowest) {
                        let wait =
                            plan.waits.iter().map(|w| w.keep.map_or(f64::INFINITY, Time::si)).fold(0.0, f64::max);
                        good.push(Good {
                            name: element.name.clone(),
                            ohms: value.si(),
                            series,
                            parallel,
                            lowest,
                            wait,
                        });
                    }
                }
            }
        }
    }
    good
}

/// By the first figure of the rank alone: what is alike in it may stand in any order here.
fn key(good: &Good, rank: Rank) -> f64 {
    match rank {
        Rank::Loss => -good.lowest,
        Rank::Wait => good.wait,
        _ => f64::from(good.series * good.parallel),
    }
}

fn agrees(bank: &Bank, ask: &BleederAsk) -> usize {
    let all = everything(bank, ask);
    let sizing = sized(bank, ask);
    assert_eq!(sizing.candidates.len(), all.len(), "{:?}\n{all:?}", sizing.candidates);
    let found: Vec<&Good> = sizing
        .candidates
        .iter()
        .map(|c| {
            let is = |g: &&Good| {
                g.name == c.element
                    && g.series == c.series
                    && g.parallel == c.parallel
                    && (g.ohms - c.value.si()).abs() < 1e-6
            };
            let good = all.iter().find(is).unwrap_or_else(|| panic!("{c:?}"));
            assert!((good.wait - c.figures.wait.expect("it ends").si()).abs() <= 1e-9 * good.wait);
            good
        })
        .collect();
    let keys: Vec<f64> = found.iter().map(|g| key(g, ask.build.rank)).collect();
    assert!(keys.windows(2).all(|k| k[0] <= k[1] * (1.0 + 1e-9) || k[0] <= k[1] + 1e-9 * k[1].abs()), "{keys:?}");
    for (c, x) in sizing.candidates.iter().zip(&found) {
        let beats = |y: &&Good| {
            let (nx, ny) = (x.series * x.parallel, y.series * y.parallel);
            let slight = 1.0 + 1e-9;
            let good = ny <= nx && y.lowest * slight >= x.lowest && y.wait <= x.wait * slight;
            good && (ny < nx || y.lowest > x.lowest * slight || y.wait * slight < x.wait)
        };
        assert_eq!(c.pareto, !all.iter().any(|y| beats(&y)), "{c:?}");
    }
    all.len()
}

#[test]
fn a_ranked_list_has_all_that_does_the_job_in_its_order_and_nothing_else() {
    for balanced in [false, true] {
        let bank = bank(&file(balanced));
        for rank in [Rank::Elements, Rank::Loss, Rank::Wait] {
            let ask = BleederAsk { build: Build { rank, ..all() }, ..BleederAsk::default() };
            assert!(agrees(&bank, &ask) > 10);
        }
        let ask = BleederAsk {
            build: Build { margin: 0.3, ..all() },
            max_loss: Some(Power::from_si(45.0)),
            ..BleederAsk::default()
        };
        assert!(agrees(&bank, &ask) > 0);
    }
}

#[test]
fn the_same_with_single_faults() {
    let ask = BleederAsk { build: all(), single_fault: true, ..BleederAsk::default() };
    assert!(agrees(&bank(&file(false)), &ask) > 0);
}
