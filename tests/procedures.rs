//! Procedures: the energy balance from the first step to the last, charge that a short leaves inside a string, and
//! meters that change what they read. Invented banks, worked by hand.

use ebbvolt::bank::file;
use ebbvolt::finding::Severity;
use ebbvolt::plan::{Options, Plan, plan};
use ebbvolt::quantity::Quantity;
use ebbvolt::report;
use proptest::prelude::*;

fn planned(text: &str) -> Plan {
    let (bank, noticed) = file::read("procedures.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{e:?}"));
    plan(&bank, "", noticed, Options::default()).unwrap_or_else(|e| panic!("{e}"))
}

fn codes(plan: &Plan) -> Vec<&str> {
    plan.findings.iter().map(|f| f.code).collect()
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(40))]

    /// With no tolerance the figures of all parts are of one and the same run.
    #[test]
    fn what_is_stored_at_first_is_what_all_parts_take_and_what_is_left(
        farads in prop::collection::vec(1e-5f64..1e-2, 3),
        bleeder in 1e3f64..1e6, series in 1f64..1e4, balancing in 1e3f64..1e6, tool in 10f64..1e4, strap in 1e-3f64..1.0,
        times in prop::collection::vec(0.0f64..30.0, 4),
    ) {
        let part = |id: &str, role: &str, ohm: f64, across: &str| {
            format!("{{id: {id}, role: {role}, value: {ohm} ohm, tolerance: 0 %, across: [{across}]}}")
        };
        let capacitor = |id: &str, farad: f64, across: &str| {
            format!("{{id: {id}, value: {farad} F, tolerance: 0 %, across: [{across}]}}")
        };
        let text = format!(
            "{{ebbvolt: 1, tag: T, touch_voltage: 50 V, charged_to: {{nominal: 700 V, highest: 700 V}}, capacitors: [{}], \
             resistors: [{}], procedure: [{{step: a, for: {} s}}, {{step: b, connect: [T1], for: {} s}}, \
             {{step: c, disconnect: [T1], for: {} s}}, {{step: d, connect: [S1], for: {} s}}, {{step: e, for: 0 s}}]}}",
            [capacitor("C1", farads[0], "P, M"), capacitor("C2", farads[1], "M, N"), capacitor("C3", farads[2], "Q, N")]
                .join(", "),
            [
                part("R1", "bleeder", bleeder, "P, N"),
                part("R2", "series", series, "P, Q"),
                part("R3", "balancing", balancing, "M, N"),
                part("T1", "tool", tool, "P, N"),
                part("S1", "strap", strap, "P, N"),
            ]
            .join(", "),
            times[0], times[1], times[2], times[3],
        );
        let plan = planned(&text);
        let first = plan.steps[0].stored_at_start.si();
        let left = plan.steps[4].stored_at_start.si();
        let taken: f64 = plan.steps.iter().flat_map(|s| &s.parts).map(|p| p.energy.si()).sum();
        prop_assert!(((left + taken) / first - 1.0).abs() < 1e-9, "{first} J, {left} J left, {taken} J taken");
        prop_assert!((plan.stored.as_ref().expect("computed").energy_highest.si() / first - 1.0).abs() < 1e-12);
    }
}

/// 10 uF and 20 uF in series that leakage has brought to 150 V each; a tool across both, until its current has long died.
///
/// The same charge q leaves both: 150 - q/10uF + 150 - q/20uF = 0, so q = 300 V x 20/3 uF = 2 mC. C1 goes to
/// 150 - 200 = -50 V and C2 to 150 - 100 = +50 V: the ends read nothing, and the middle stays 50 V from either of them.
/// 37.5 mJ are left of the 337.5 mJ at first: 1/2 10 uF (50 V)^2 + 1/2 20 uF (50 V)^2.
const MISMATCHED: &str = "{ebbvolt: 1, tag: T, touch_voltage: 40 V, charged_to: {nominal: 300 V, highest: 300 V}, \
    capacitors: [{id: C1, value: 10 uF, tolerance: 0 %, across: [P, M], charged_to: 150 V}, \
                 {id: C2, value: 20 uF, tolerance: 0 %, across: [M, N], charged_to: 150 V}], \
    resistors: [{id: T1, role: tool, value: 100 ohm, tolerance: 0 %}, \
                {id: S1, role: strap, value: 10 mohm, tolerance: 0 %}], \
    procedure: [{step: Isolate, for: 0 s}, {step: Tool, connect: [T1], for: 10 s, measure: [[P, N]]}, \
                {step: Strap, connect: [S1], for: 10 s}, {step: Work, touch: true, for: 0 s}]}";

#[test]
fn two_mismatched_capacitors_in_series_keep_a_third_of_their_voltage_behind_a_short() {
    let plan = planned(MISMATCHED);
    let step = &plan.steps[2];
    let volts: Vec<f64> = step.test_points.iter().map(|p| p.highest.si()).collect();
    assert!(volts[0] < 1e-9, "{volts:?}");
    assert!((volts[1] - 50.0).abs() < 1e-9 && (volts[2] - 50.0).abs() < 1e-9, "{volts:?}");
    assert!((plan.steps[0].stored_at_start.si() - 0.3375).abs() < 1e-12);
    assert!((plan.steps[3].stored_at_start.si() - 0.0375).abs() < 1e-12);
    assert_eq!(codes(&plan).iter().filter(|c| **c == "stranded-charge").count(), 2, "one for each unit");
    let found = plan.findings.iter().find(|f| f.code == "stranded-charge").expect("it is told");
    assert_eq!(found.severity, Severity::Danger);
    for word in ["P - M", "50.0 V", "step 4", "Short every unit"] {
        assert!(found.text.contains(word), "{}: {word}", found.text);
    }
}

#[test]
fn equal_capacitors_keep_nothing_behind_a_short() {
    let plan = planned(&MISMATCHED.replace("20 uF", "10 uF"));
    assert!(!codes(&plan).contains(&"stranded-charge"), "{:?}", codes(&plan));
    assert!(plan.steps[2].test_points.iter().all(|p| p.highest.si() < 1e-9));
}

/// A small section behind 1 Mohm, and a meter there.
fn metered(meter: &str) -> String {
    format!(
        "{{ebbvolt: 1, tag: T, touch_voltage: 50 V, charged_to: {{nominal: 400 V, highest: 400 V}}, \
         capacitors: [{{id: C1, value: 100 uF, tolerance: 0 %}}, \
                      {{id: C2, value: 1 uF, tolerance: 0 %, across: [Q, N]}}], \
         resistors: [{{id: R1, role: bleeder, value: 10 Mohm, tolerance: 0 %}}, \
                     {{id: RS, role: series, value: 1 Mohm, tolerance: 0 %, across: [P, Q]}}, \
                     {{id: M1, role: meter, value: {meter}, tolerance: 0 %, across: [Q, N]}}], \
         procedure: [{{step: Isolate, for: 0 s}}, {{step: Read, connect: [M1], for: 5 s, measure: [[Q, N]]}}]}}"
    )
}

#[test]
fn a_low_impedance_meter_hides_what_a_common_one_reads() {
    let (common, low) = (planned(&metered("10 Mohm")), planned(&metered("3 kohm")));
    let read = |plan: &Plan| plan.steps[1].test_points.iter().find(|p| p.across[0] == "Q").expect("Q - N").nominal.si();
    // 10 Mohm against 1 Mohm takes a tenth; 3 kohm leaves 3/1003 of what is behind 1 Mohm.
    assert!((340.0..400.0).contains(&read(&common)), "{}", read(&common));
    // (C1 behind it falls with 100 uF x 1 Mohm meanwhile.)
    let expected = 400.0 * 3.0 / 1003.0 * f64::exp(-5.0 / 100.0);
    assert!((read(&low) / expected - 1.0).abs() < 0.02, "{} for {expected}", read(&low));
    assert!(!codes(&common).contains(&"meter-hides-charge"), "{:?}", codes(&common));
    let found = low.findings.iter().find(|f| f.code == "meter-hides-charge").expect("it is told");
    assert!(found.text.contains("M1") && found.severity == Severity::Danger, "{}", found.text);
}

/// A bleeder, a strap and a supply that the last step connects.
fn charged_again(strap: &str, touch: &str) -> Plan {
    planned(&format!(
        "{{ebbvolt: 1, tag: T, touch_voltage: {touch}, charged_to: {{nominal: 565 V, highest: 750 V}}, \
         capacitors: [{{id: C1, value: 3300 uF, tolerance: 0 %}}], \
         resistors: [{{id: R1, role: bleeder, value: 22 kohm, tolerance: 0 %}}, \
                     {{id: ST1, role: strap, value: {strap}, tolerance: 0 %}}], \
         supplies: [{{id: S1, voltage: 325 V, series: 100 ohm, across: [P, N]}}], \
         procedure: [{{step: Isolate, for: 0 s}}, {{step: Wait, for: 5 min}}, \
                     {{step: Charge, connect: [S1], for: 60 s}}]}}"
    ))
}

#[test]
fn a_procedure_that_ends_with_a_supply_on_asks_for_no_strap() {
    let plan = charged_again("10 mohm", "50 V");
    let found = plan.findings.iter().find(|f| f.code == "supply-left-on").expect("it is told");
    assert!(found.severity == Severity::Danger && found.text.contains("S1"), "{}", found.text);
    assert!(!codes(&plan).contains(&"no-strap-left-on"), "{:?}", codes(&plan));
    // One line of words, whatever the width.
    let text = report::plan_text(&plan, 80).split_whitespace().collect::<Vec<_>>().join(" ");
    assert!(text.contains("S1 is still on and the bank is charged: no strap belongs on it"), "{text}");
    assert!(!text.contains("Put one on") && text.contains("is over 50 V as the last step ends"), "{text}");
    // The dangers of the procedure stand on the first screen: the supply, and the voltage that comes back.
    assert!(text.contains("with 2 findings of DANGER"), "{text}");
}

#[test]
fn a_strap_of_megohms_and_a_touch_voltage_above_the_bank_are_questioned() {
    let odd = charged_again("10 Mohm", "50 kV");
    assert!(codes(&odd).contains(&"strap-is-no-short") && codes(&odd).contains(&"touch-voltage-not-below-bank"));
    let usual = charged_again("10 mohm", "50 V");
    assert!(!codes(&usual).contains(&"strap-is-no-short"), "{:?}", codes(&usual));
    assert!(!codes(&usual).contains(&"touch-voltage-not-below-bank"), "{:?}", codes(&usual));
}

#[test]
fn what_is_left_after_hundreds_of_time_constants_is_no_reason_for_no_verdict() {
    // 1 mF through a tool for 350 to 372 time constants: voltages whose squares are at the very end of what a double
    // holds. Then a strap.
    for taus in 350..=372 {
        let ohm = 30.0 / (f64::from(taus) * 1e-3);
        let plan = planned(&format!(
            "{{ebbvolt: 1, tag: T, touch_voltage: 50 V, charged_to: 750 V, capacitors: [{{id: C1, value: 1 mF, tolerance: 0 \
             %}}], resistors: [{{id: T1, role: tool, value: {ohm} ohm, tolerance: 0 %}}, {{id: ST1, role: strap, value: 10 \
             mohm, tolerance: 0 %}}], procedure: [{{step: a, connect: [T1], for: 30 s}}, {{step: b, connect: [ST1], for: 60 \
             s}}]}}"
        ));
        // All of C V^2/2 went into the tool.
        let tool = plan.steps[0].parts.iter().find(|p| p.id == "T1").expect("it is connected");
        assert!((tool.energy.si() / 281.25 - 1.0).abs() < 1e-9);
    }
}
