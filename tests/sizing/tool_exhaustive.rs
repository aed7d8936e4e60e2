//! A ranked list of tools against a search through everything: every array of a small stock is put into the bank with
//! its steps, and planned.

use crate::banks::{HEAD, bank, elements, planned, seconds, tooled};
use ebbvolt::bank::Bank;
use ebbvolt::bank::description::{Hold, Lasts, Resistor, Role, Step};
use ebbvolt::bank::stock::Values;
use ebbvolt::plan::{Plan, Verdict};
use ebbvolt::quantity::{Current, Quantity, Time, Voltage};
use ebbvolt::size::{Build, Rank, ToolAsk};

const STOCK: &str = "elements:
  - {name: a, value: 470 ohm, tolerance: 5 %, rating: {power: 12 W, full_to: 70 °C, zero_at: 155 °C, voltage: 500 V, pulse: 150 J}}
  - {name: b, value: 1 kohm, tolerance: 10 %, rating: {power: 20 W, full_to: 25 °C, zero_at: 275 °C, voltage: 400 V, thermal_time: 40 s}}
  - {name: c, series: E6, from: 100 ohm, to: 10 kohm, tolerance: 1 %, rating: {power: 7 W, full_to: 70 °C, zero_at: 155 °C, voltage: 350 V, overload: {times: 10, for: 5 s}, pulse: 120 J}}
  - {name: d, value: 1.5 kohm, rating: {power: 300 W, full_to: 25 °C, zero_at: 275 °C}}
  - {name: e, value: 1.2 kohm, rating: {power: 30 W, full_to: 25 °C, zero_at: 275 °C, voltage: 1 kV}}
";

fn file(halves: bool) -> String {
    let parts = if halves {
        "capacitors: [{id: C1, value: 2000 uF, tolerance: 20 %, across: [P, M]}, {id: C2, value: 2000 uF, tolerance: 20 %, \
         across: [M, N]}]\nresistors: [{id: R1, role: balancing, value: 1 kohm, tolerance: 5 %, across: [P, M]}, {id: \
         R2, role: balancing, value: 1 kohm, tolerance: 5 %, across: [M, N]}]\n"
    } else {
        "capacitors: [{id: C1, value: 1000 uF, tolerance: 20 %, across: [P, N]}]\n"
    };
    format!("{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: 565 V, highest: 700 V}}\n{parts}")
}

/// The bank with a tool and steps that apply it at once for 5 s, written out here on its own.
fn applied(bank: &Bank, tool: Resistor) -> Bank {
    let step = |name: &str, seconds: f64, connect: Vec<String>, hold: Option<Hold>| Step {
        name: name.into(),
        lasts: Lasts::For(Time::from_si(seconds)),
        connect,
        disconnect: Vec::new(),
        measure: Vec::new(),
        hold,
        touch: false,
    };
    let mut with = bank.description().clone();
    with.procedure = vec![
        step("Isolate", 0.0, vec![], None),
        step("Apply", 5.0, vec![tool.id.clone()], Some(Hold { below: Voltage::from_si(50.0), at: None })),
    ];
    with.resistors.push(tool);
    Bank::new(with).expect("a bank")
}

fn does(plan: &Plan, ask: &ToolAsk, parallel: u32) -> bool {
    let tool = plan.resistors.iter().find(|r| r.id == "T1").expect("it is there");
    let hold = plan.steps[1].hold.as_ref().expect("it has a hold point");
    let part = plan.steps[1].parts.iter().find(|p| p.id == "T1").expect("it is connected");
    let left = 1.0 - ask.build.margin;
    let kept = tool.checks.iter().all(|k| match (k.check, k.found.zip(k.allowed)) {
        ("element voltage", _) => k.verdict != Verdict::NotMet,
        ("body temperature", Some((found, allowed))) => found - 40.0 <= (allowed - 40.0) * left,
        (_, Some((found, allowed))) => found <= allowed * left,
        _ => true,
    });
    let pulse = tool.peak_power > tool.allowed_power;
    let told = tool.checks.iter().any(|k| k.check != "element voltage" && k.verdict == Verdict::Met);
    hold.predicted <= hold.below
        && kept
        && (told || !pulse)
        && ask.max_current.is_none_or(|most| part.peak_current.si() * f64::from(parallel) <= most.si())
}

/// What does the job by its plan alone: name, ohm, series, parallel, current of all of it.
fn everything(bank: &Bank, ask: &ToolAsk) -> Vec<(String, f64, u32, u32, f64)> {
    let mut good = Vec::new();
    for element in &ask.build.elements {
        let values = match element.values {
            Values::One(value) => vec![value],
            Values::Preferred { series, from, to } => series.between(from, to),
        };
        for value in values {
            for series in 1..=ask.build.series_up_to {
                for parallel in 1..=ask.build.parallel_up_to {
                    let plan = planned(&applied(
                        bank,
                        Resistor {
                            id: "T1".into(),
                            role: Role::Tool,
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
                        },
                    ));
                    if does(&plan, ask, parallel) {
                        let part = plan.steps[1].parts.iter().find(|p| p.id == "T1").expect("it is connected");
                        let current = part.peak_current.si() * f64::from(parallel);
                        good.push((element.name.clone(), value.si(), series, parallel, current));
                    }
                }
            }
        }
    }
    good
}

#[test]
fn a_ranked_list_of_tools_has_all_that_do_the_job_in_their_order_and_no_other() {
    let build = |rank, margin| Build { elements: elements(STOCK), show: 1000, rank, margin, ..Build::default() };
    for (halves, rank, margin, current) in
        [(false, Rank::Elements, 0.0, None), (false, Rank::Wait, 0.25, Some(1.0)), (true, Rank::Loss, 0.0, Some(1.5))]
    {
        let bank = bank(&file(halves));
        let max_current = current.map(Current::from_si);
        let ask = ToolAsk { build: build(rank, margin), within: seconds(5.0), max_current, ..ToolAsk::default() };
        let all = everything(&bank, &ask);
        let sizing = tooled(&bank, &ask);
        assert!(all.len() > 5, "{}", all.len());
        assert_eq!(sizing.candidates.len(), all.len(), "{:?}\n{all:?}", sizing.candidates);
        let mut keys = Vec::new();
        for c in &sizing.candidates {
            let is = |g: &&(String, f64, u32, u32, f64)| {
                g.0 == c.element && (g.1 - c.value.si()).abs() < 1e-6 && (g.2, g.3) == (c.series, c.parallel)
            };
            let good = all.iter().find(is).unwrap_or_else(|| panic!("{c:?}"));
            assert!((good.4 / c.figures.peak_current.si() - 1.0).abs() < 1e-9);
            keys.push(match rank {
                Rank::Loss => good.4,
                Rank::Wait => c.figures.time.expect("it ends").si(),
                _ => f64::from(c.elements),
            });
        }
        assert!(keys.windows(2).all(|k| k[0] <= k[1] * (1.0 + 1e-9)), "{keys:?}");
    }
}
