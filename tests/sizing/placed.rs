//! Every printed design, put into the bank FILE, passes `plan` with the same figures: over random demands.

use crate::banks::{HEAD, bank, generic, of, planned, sized, target};
use ebbvolt::bank::file;
use ebbvolt::data::Series;
use ebbvolt::plan::Verdict;
use ebbvolt::quantity::{Power, Quantity, Time};
use ebbvolt::size::{BleederAsk, BleederFigures, Build, Rank, Sizing};
use proptest::prelude::*;

/// An invented bank: a bus, perhaps two halves in series, perhaps a section behind a resistor, perhaps a bleeder.
fn text(micro: f64, shape: u8, volts: f64, within: f64) -> String {
    let parts = match shape % 4 {
        0 => format!("capacitors: [{{id: C1, value: {micro} uF, tolerance: 20 %, across: [P, N]}}]\n"),
        1 => format!(
            "capacitors:\n  - {{id: C1, value: {micro} uF, tolerance: 20 %, across: [P, M]}}  # upper half\n  - {{id: C2, \
             value: {micro} uF, tolerance: 20 %, across: [M, N]}}\nresistors:\n  # balancing\n  - {{id: R1, role: \
             balancing, value: 47 kohm, tolerance: 5 %, across: [P, M]}}\n  - {{id: R2, role: balancing, value: 47 \
             kohm, tolerance: 5 %, across: [M, N]}}\n"
        ),
        2 => format!(
            "capacitors: [{{id: C1, value: {micro} uF, tolerance: 10 %, across: [P, N]}}, {{id: C2, value: 10 uF, \
             across: [M, N]}}]\nresistors: [{{id: R1, role: series, value: 100 ohm, tolerance: 10 %, across: [P, M]}}]\n"
        ),
        _ => format!(
            "capacitors: [{{id: C1, value: {micro} uF, tolerance: 20 %, across: [P, N]}}]\nresistors:\n- id: R1\n  role: \
             bleeder\n  value: 220 kohm   # old\n  tolerance: 10 %\n\n# limits follow\n"
        ),
    };
    format!(
        "{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: {volts} V, highest: {} V}}\n{parts}limits: [{{id: site, voltage: \
         50 V, within: {within} s}}]\n",
        volts * 1.2
    )
}

/// Bit for bit, or to the rounding of a value that went through text.
fn same(a: f64, b: f64) -> bool {
    (a - b).abs() <= 1e-12 * a.abs().max(b.abs())
}

fn holds_in_the_file(text: &str, ask: &BleederAsk, sizing: &Sizing<BleederFigures>) {
    for c in &sizing.candidates {
        let with =
            file::with_resistor("bank.yaml", text.as_bytes(), &c.figures.resistor).unwrap_or_else(|e| panic!("{e}"));
        let mut lines = with.lines();
        let kept = text.lines().all(|line| lines.any(|l| l == line || line.contains('[') && l.contains("RB")));
        assert!(kept, "{text}\n{with}");
        let plan = planned(&bank(&with));
        assert_eq!((plan.exit_code(), plan.verdict), (0, Verdict::Met), "{with}\n{:?}", plan.findings);
        let found = plan.resistors.iter().find(|r| r.id == c.figures.resistor.id).expect("it is there");
        let standing = found.continuous_power.expect("always connected").si();
        assert!(same(standing, c.element_power.expect("told").si()));
        assert!(same(found.element_voltage.expect("told").si(), c.element_voltage.expect("told").si()));
        let allowed = found.allowed_power.expect("generic elements have ratings").si();
        assert!(standing <= allowed * (1.0 - ask.build.margin));
        let keep = plan.waits.iter().map(|w| w.keep.map_or(f64::INFINITY, Time::si)).fold(0.0, f64::max);
        assert!(same(keep, c.figures.wait.expect("it ends").si()));
        let site = plan.limits.iter().find(|l| l.id == "site").expect("it is there");
        assert!(same(site.holds_from.expect("it holds").si(), c.figures.limits[0].holds_from.expect("it holds").si()));
        // All of the array at the highest voltage: elements at one end of their tolerance share alike.
        assert!(c.figures.loss_highest.si() <= standing * f64::from(c.elements) * (1.0 + 1e-9));
        assert!(ask.max_loss.is_none_or(|most| c.figures.loss_highest.si() <= most.si()));
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 24, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn every_design_put_into_the_file_passes_the_plan_with_the_same_figures(
        micro in 10.0..5000.0f64,
        shape in 0u8..4,
        volts in 100.0..900.0f64,
        within in 20.0..1200.0f64,
        margin in 0.0..0.6f64,
        loss in proptest::option::of(1.0..200.0f64),
        rank in 0usize..3,
        single_fault in any::<bool>(),
    ) {
        let text = text(micro.round(), shape, volts.round(), within.round());
        let ask = BleederAsk {
            build: Build {
                margin,
                rank: [Rank::Elements, Rank::Loss, Rank::Wait][rank],
                elements: generic(Series::E24),
                show: 3,
                ..Build::default()
            },
            max_loss: loss.map(Power::from_si),
            // A short in a string leaves what no bleeder mends; such a bank is asked for its healthy state only.
            single_fault: single_fault && shape % 4 == 0,
            ..BleederAsk::default()
        };
        let sizing = sized(&bank(&text), &ask);
        holds_in_the_file(&text, &ask, &sizing);
        // Nothing found comes with a reason.
        prop_assert!(!sizing.candidates.is_empty() || !sizing.findings.is_empty());
    }
}

#[test]
fn the_random_demands_above_do_find_designs() {
    for shape in 0..4 {
        let text = text(1000.0, shape, 565.0, 600.0);
        let ask = BleederAsk { build: of(Series::E24), ..BleederAsk::default() };
        let sizing = sized(&bank(&text), &ask);
        assert_eq!(sizing.candidates.len(), 5, "{shape}: {:?}", sizing.findings);
        holds_in_the_file(&text, &ask, &sizing);
    }
    // The same where the target comes with the request.
    let text = text(1000.0, 0, 565.0, 600.0);
    let ask = BleederAsk { target: target(50.0, 300.0), build: of(Series::E96), ..BleederAsk::default() };
    let sizing = sized(&bank(&text), &ask);
    assert!(sizing.candidates.iter().all(|c| c.figures.wait.is_some_and(|t| t.si() <= 300.0)));
}
