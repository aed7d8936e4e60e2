//! Every printed tool, put into the bank FILE with the steps that apply it, gives the same figures in its plan: over
//! random demands.

use crate::banks::{HEAD, bank, generic, planned, seconds, tooled};
use ebbvolt::bank::file;
use ebbvolt::data::Series;
use ebbvolt::plan::{Plan, Verdict};
use ebbvolt::quantity::{Current, Quantity, Resistance};
use ebbvolt::size::{Build, Placement, Rank, Sizing, ToolAsk, ToolFigures};
use proptest::prelude::*;

/// An invented bank: a bus, perhaps two halves in series, perhaps a section behind a resistor, perhaps a bleeder; with
/// steps or without.
fn text(micro: f64, shape: u8, volts: f64, steps: bool) -> String {
    let parts = match shape % 4 {
        0 => format!("capacitors: [{{id: C1, value: {micro} uF, tolerance: 20 %, across: [P, N]}}]\n"),
        1 => format!(
            "capacitors:\n  - {{id: C1, value: {micro} uF, tolerance: 20 %, across: [P, M]}}  # upper half\n  - {{id: C2, \
             value: {micro} uF, tolerance: 20 %, across: [M, N]}}\nresistors:\n  # balancing\n  - {{id: R1, role: \
             balancing, value: 4.7 kohm, tolerance: 5 %, across: [P, M]}}\n  - {{id: R2, role: balancing, value: 4.7 \
             kohm, tolerance: 5 %, across: [M, N]}}\n"
        ),
        2 => format!(
            "capacitors: [{{id: C1, value: {micro} uF, tolerance: 10 %, across: [P, N], absorption: 5 %}}, {{id: C2, value: \
             10 uF, across: [M, N]}}]\nresistors: [{{id: R1, role: series, value: 100 ohm, tolerance: 10 %, across: [P, \
             M]}}]\n"
        ),
        _ => format!(
            "capacitors: [{{id: C1, value: {micro} uF, tolerance: 20 %, across: [P, N]}}]\nresistors:\n- id: R1\n  role: \
             bleeder\n  value: 220 kohm   # old\n  tolerance: 10 %\n\n# nothing follows\n"
        ),
    };
    let mut text =
        format!("{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: {volts} V, highest: {} V}}\n{parts}", volts * 1.2);
    if steps {
        // A tool among the parts, to be sized anew; its list stands in brackets or not.
        let tool = "{id: T1, role: tool, value: 1 kohm, across: [P, N]}";
        text = match shape % 4 {
            0 => format!("{text}resistors: [{tool}]   # the tool\n"),
            2 => text.replace("resistors: [", &format!("resistors: [{tool}, ")),
            3 => text.replace("- id: R1", &format!("- {tool}\n- id: R1")),
            _ => format!("{text}  - id: T1\n    role: tool   # by hand\n    value: 1 kohm\n    across: [P, N]\n"),
        };
        text.push_str("procedure:\n  - {step: Isolate, for: 3 s}\n  - {step: Apply, connect: [T1], for: 15 s}\n");
    }
    text
}

/// Bit for bit, or to the rounding of a value that went through text.
fn same(a: f64, b: f64) -> bool {
    (a - b).abs() <= 1e-9 * a.abs().max(b.abs())
}

fn written(text: &str, f: &ToolFigures) -> String {
    let bytes = text.as_bytes();
    let written = match f.placement {
        Placement::InPlace => file::with_resistor_exchanged("bank.yaml", bytes, &f.resistor),
        Placement::WithSteps => file::with_resistor_and_steps("bank.yaml", bytes, &f.resistor, &f.steps),
        Placement::Alone => file::with_resistor("bank.yaml", bytes, &f.resistor),
    };
    let written = written.unwrap_or_else(|e| panic!("{e}\n{text}"));
    if f.placement == Placement::WithSteps || f.steps.is_empty() {
        return written;
    }
    // Sized for steps that the file does not have: it gets them here.
    let (before, _) = written.split_once("procedure:").expect("the file has steps");
    let steps: String = file::steps_text(&f.steps).lines().map(|line| format!("  {line}\n")).collect();
    format!("{before}procedure:\n{steps}")
}

fn agrees(plan: &Plan, ask: &ToolAsk, sizing: &Sizing<ToolFigures>, rank: usize) {
    let c = &sizing.candidates[rank];
    let f = &c.figures;
    let found = plan.resistors.iter().find(|r| r.id == f.resistor.id).expect("it is there");
    assert!(found.checks.iter().all(|k| k.verdict != Verdict::NotMet), "{:?}", found.checks);
    assert!(found.checks.iter().any(|k| k.verdict == Verdict::Met && k.check != "element voltage"));
    assert!(same(found.element_voltage.expect("told").si(), c.element_voltage.expect("told").si()));
    assert!(same(found.energy.expect("told").si(), c.element_energy.expect("told").si()));
    assert!(same(found.body_temperature.expect("told").si(), c.body_temperature.expect("told").si()));
    let step = plan.steps.iter().find(|s| s.connect.contains(&found.id)).expect("a step applies it");
    let part = step.parts.iter().find(|p| p.id == found.id).expect("it is connected");
    assert!(same(part.peak_current.si() * f64::from(c.parallel), f.peak_current.si()));
    assert!(same(part.peak_power.si() * f64::from(c.elements), f.peak_power.si()));
    assert!(same(part.energy.si() * f64::from(c.elements), f.energy.si()));
    assert!(same(f.energy.si() / f.held.si(), f.average_power.si()));
    assert!(same(step.start.si(), f.applied_at.si()) && same(step.end.si() - step.start.si(), f.held.si()));
    let left = step.test_points.iter().map(|p| p.highest.si()).fold(0.0, f64::max);
    assert!(same(left, f.left.si()) && left <= f.below.si() && f.time.is_some_and(|t| t.si() <= f.held.si()));
    assert!(ask.max_current.is_none_or(|most| f.peak_current.si() <= most.si()));
    // From cold at least one bank; a row that has an end has one to cool for.
    let row = f.in_a_row.as_ref().expect("generic elements have thermal data");
    assert!(row.banks.is_none_or(|n| n >= 1 && row.cooling.is_some()), "{row:?}");
    assert!(ask.banks.is_none_or(|n| row.banks.is_none_or(|most| most >= n)), "{row:?}");
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 20, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn every_tool_put_into_the_file_gives_the_same_figures_in_its_plan(
        micro in 10.0..5000.0f64,
        shape in 0u8..4,
        volts in 100.0..900.0f64,
        within in 2.0..60.0f64,
        steps in any::<bool>(),
        margin in 0.0..0.6f64,
        current in proptest::option::of(0.1..20.0f64),
        lead in proptest::option::of(0.01..5.0f64),
        banks in proptest::option::of(1u32..6),
        rank in 0usize..3,
    ) {
        let text = text(micro.round(), shape, volts.round(), steps);
        let ask = ToolAsk {
            build: Build {
                margin,
                rank: [Rank::Elements, Rank::Loss, Rank::Wait][rank],
                elements: generic(Series::E12),
                show: 2,
                ..Build::default()
            },
            // The file's own steps hold it for 15 s.
            within: if steps { None } else { seconds(within.round()) },
            max_current: current.map(Current::from_si),
            lead: lead.map(Resistance::from_si),
            banks,
            ..ToolAsk::default()
        };
        let sizing = tooled(&bank(&text), &ask);
        for (rank, c) in sizing.candidates.iter().enumerate() {
            let with = written(&text, &c.figures);
            prop_assert!(with.contains("# nothing follows") == text.contains("# nothing follows"));
            agrees(&planned(&bank(&with)), &ask, &sizing, rank);
        }
        // Nothing found comes with a reason.
        prop_assert!(!sizing.candidates.is_empty() || !sizing.findings.is_empty());
    }
}

#[test]
fn the_random_demands_above_do_find_tools() {
    for shape in 0..4 {
        for steps in [false, true] {
            let text = text(1000.0, shape, 565.0, steps);
            let ask = ToolAsk {
                build: Build { elements: generic(Series::E24), show: 2, ..Build::default() },
                within: if steps { None } else { seconds(10.0) },
                ..ToolAsk::default()
            };
            let sizing = tooled(&bank(&text), &ask);
            assert_eq!(sizing.candidates.len(), 2, "{shape}: {:?}", sizing.findings);
            let with = written(&text, &sizing.candidates[0].figures);
            agrees(&planned(&bank(&with)), &ask, &sizing, 0);
            let placement = if steps { Placement::InPlace } else { Placement::WithSteps };
            assert_eq!(sizing.candidates[0].figures.placement, placement);
        }
    }
}
