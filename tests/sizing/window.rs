//! The window against closed forms.

use crate::banks::{HEAD, bank, elements, greatest, least, of, sized, target};
use approx::assert_relative_eq;
use ebbvolt::data::Series;
use ebbvolt::quantity::{Current, Power, Quantity};
use ebbvolt::size::{BleederAsk, Build};

const PLAIN: &str = "touch_voltage: 50 V\ncharged_to: {nominal: 565 V, highest: 750 V}\n";

fn one(more: &str) -> String {
    format!("{HEAD}{PLAIN}capacitors: [{{id: C1, value: 3300 uF, tolerance: 20 %, across: [P, N]}}]\n{more}")
}

fn strings(parallel_up_to: u32) -> Build {
    Build { parallel_up_to, ..of(Series::E24) }
}

fn ask() -> BleederAsk {
    BleederAsk { target: target(50.0, 300.0), build: of(Series::E24), ..BleederAsk::default() }
}

/// R = t / (C ln(V/v)) at the highest voltage and the greatest capacitance.
fn by_hand() -> f64 {
    300.0 / (1.2 * 3300e-6 * (750.0f64 / 50.0).ln())
}

#[test]
fn the_upper_end_is_that_of_the_slowest_capacitance_from_the_highest_voltage() {
    assert_relative_eq!(greatest(&sized(&bank(&one("")), &ask())), by_hand(), max_relative = 2e-10);
}

#[test]
fn a_bleeder_that_is_there_takes_its_share_at_the_upper_end_of_its_tolerance() {
    let there = "resistors: [{id: R1, role: bleeder, value: 47 kohm, tolerance: 5 %}]\n";
    let expected = (by_hand().recip() - (1.05f64 * 47e3).recip()).recip();
    assert_relative_eq!(greatest(&sized(&bank(&one(there)), &ask())), expected, max_relative = 1e-9);
}

#[test]
fn loss_and_current_bound_the_window_from_below() {
    let with = |ask: BleederAsk| least(&sized(&bank(&one("")), &ask));
    let loss = with(BleederAsk { max_loss: Some(Power::from_si(40.0)), ..ask() });
    assert_relative_eq!(loss, 750.0 * 750.0 / 40.0, max_relative = 1e-9);
    let current = with(BleederAsk { max_current: Some(Current::from_si(0.05)), ..ask() });
    assert_relative_eq!(current, 750.0 / 0.05, max_relative = 1e-9);
}

#[test]
fn behind_a_series_resistor_the_power_has_a_greatest_value_and_both_sides_of_it_count() {
    // The new resistor across M and N sees the bus through 10 kohm: its power is V^2 R / (R + 10k)^2, at most
    // V^2 / 40k = 14.06 W at 10 kohm. At most 10 W is met below one root and above the other.
    let text = format!(
        "{HEAD}{PLAIN}capacitors: [{{id: C1, value: 100 uF, across: [P, N]}}, {{id: C2, value: 10 uF, across: [M, \
         N]}}]\nresistors: [{{id: R1, role: series, value: 10 kohm, across: [P, M]}}]\n"
    );
    let ask = BleederAsk {
        target: target(50.0, 3600.0),
        max_loss: Some(Power::from_si(10.0)),
        across: Some(["M".into(), "N".into()]),
        ..ask()
    };
    let sizing = sized(&bank(&text), &ask);
    let demand = sizing.demands.iter().find(|d| d.demand.contains("loss")).expect("asked");
    assert!(demand.gaps, "{demand:?}");
    for candidate in &sizing.candidates {
        let loss = |ohm: f64| 750.0 * 750.0 * ohm / (ohm + 10e3).powi(2);
        for factor in [0.95, 1.0, 1.05] {
            assert!(loss(candidate.resistance.si() * factor) <= 10.0 * (1.0 + 1e-9), "{candidate:?}");
        }
    }
    assert!(!sizing.candidates.is_empty());
}

#[test]
fn demands_that_collide_are_named_with_their_distance_and_what_would_open_the_window() {
    let sizing = sized(&bank(&one("")), &BleederAsk { max_loss: Some(Power::from_si(10.0)), ..ask() });
    assert_eq!((sizing.window.is_none(), sizing.candidates.len(), sizing.exit_code()), (true, 0, 1));
    let finding = &sizing.findings[0];
    assert_eq!(finding.code, "demands-collide");
    // 56.25 kohm against 27.97 kohm: 2.02 times; then 603.3 s or 20.2 W.
    for part in ["27.9 kohm", "56.3 kohm", "2.02 times"] {
        assert!(finding.text.contains(part), "{part}: {}", finding.text);
    }
    let help = finding.help.as_deref().unwrap_or_default();
    for part in ["10 min 4 s", "20.2 W", "contact switches on"] {
        assert!(help.contains(part), "{part}: {help}");
    }
}

#[test]
fn ratings_that_collide_tell_the_air_in_which_they_would_do() {
    // One element of 25 W from 25 °C down to nothing at 275 °C bears 23.5 W at 40 °C; 27.97 kohm takes 20.1 W.
    let stock = "elements: [{name: a, series: E192, from: 1 ohm, to: 1 Mohm, tolerance: 1 %, rating: {power: 20.5 W, \
                 full_to: 25 °C, zero_at: 275 °C, voltage: 1 kV}}]\n";
    let ask = BleederAsk {
        build: Build { elements: elements(stock), series_up_to: 1, parallel_up_to: 1, ..Build::default() },
        ..ask()
    };
    let sizing = sized(&bank(&one("")), &ask);
    assert!(sizing.candidates.is_empty());
    // 20.5 W * (275 - T)/250 = 750^2/27974 = 20.11 W at 29.8 °C.
    let help = sizing.findings[0].help.as_deref().unwrap_or_default();
    assert!(help.contains("air of at most 29 °C"), "{:?}", sizing.findings);
}

#[test]
fn single_faults_ask_for_more_strings_and_leave_each_less() {
    let ask = BleederAsk { single_fault: true, build: strings(2), ..ask() };
    let sizing = sized(&bank(&one("")), &ask);
    // With one of two strings open, twice the resistance has to do.
    assert_relative_eq!(greatest(&sizing), by_hand() / 2.0, max_relative = 1e-9);
    assert!(!sizing.candidates.is_empty());
    for c in &sizing.candidates {
        assert!(c.parallel == 2 && c.figures.open_wait.is_some_and(|t| t.si() <= 300.0), "{c:?}");
    }
    let single = sized(&bank(&one("")), &BleederAsk { build: strings(1), ..ask });
    assert_eq!(single.findings[0].code, "demand-met-nowhere");
}

#[test]
fn a_limit_on_charge_or_energy_bounds_as_a_voltage_does() {
    let limit = |bound: &str| one(&format!("limits: [{{id: a, {bound}, within: 5 min}}]\n"));
    let find = |text: String| greatest(&sized(&bank(&text), &BleederAsk { target: None, ..ask() }));
    // 0.198 C is 50 V on 3960 uF; for the energy, 4.95 J, likewise.
    assert_relative_eq!(find(limit("charge: 198 mC")), by_hand(), max_relative = 1e-9);
    assert_relative_eq!(find(limit("energy: 4.95 J")), by_hand(), max_relative = 1e-9);
}

#[test]
fn a_limit_that_no_bleeder_meets_is_said_to_be_met_nowhere() {
    // C2 behind its diode-like 1 Mohm keeps its charge whatever stands across the terminals.
    let text = format!(
        "{HEAD}{PLAIN}capacitors: [{{id: C1, value: 100 uF, across: [P, N]}}, {{id: C2, value: 100 uF, across: [M, \
         N]}}]\nresistors: [{{id: R1, role: series, value: 1 Mohm, across: [P, M]}}]\n"
    );
    let sizing = sized(&bank(&text), &BleederAsk { target: target(50.0, 60.0), ..ask() });
    assert_eq!((sizing.findings[0].code, sizing.exit_code()), ("demand-met-nowhere", 1));
}

#[test]
fn a_bank_that_meets_its_limits_without_a_resistor_is_told_so() {
    let there = "resistors: [{id: R1, role: bleeder, value: 10 kohm, tolerance: 5 %}]\n";
    let sizing = sized(&bank(&one(there)), &ask());
    assert!(sizing.findings.iter().any(|f| f.code == "already-met"));
    assert!(sizing.window.is_some_and(|w| w.greatest.is_none()));
}

#[test]
fn each_leg_of_a_three_phase_resistor_is_an_array_of_its_own() {
    // Each leg of a delta stands at up to 440 V rms: 10 W allow 440^2 / 10 = 19.36 kohm, however many legs there are.
    let text = format!(
        "{HEAD}touch_voltage: 50 V\nterminals: [A, B, C]\ncharged_to: {{ac_rms: 400 V, rise: 10 %, phases: 3, neutral: \
         isolated}}\ncapacitors: [{{id: CB, kvar: {{power: 50 kvar, voltage: 400 V, frequency: 50 Hz}}, phases: 3, \
         connection: delta}}]\n"
    );
    let stock = "elements: [{name: a, value: 47 kohm, rating: {power: 10 W, full_to: 70 °C, zero_at: 155 °C}}]\n";
    let build = Build { elements: elements(stock), series_up_to: 1, parallel_up_to: 1, ..Build::default() };
    let sizing = sized(&bank(&text), &BleederAsk { build, target: target(75.0, 180.0), ..BleederAsk::default() });
    assert_relative_eq!(least(&sizing), 440.0f64.powi(2) / 10.0, max_relative = 1e-9);
    assert!(!sizing.candidates.is_empty(), "{:?}", sizing.findings);
}

#[test]
fn demands_that_lie_decades_apart_collide_by_as_much() {
    // 1 mW asks for 750^2 / 1 mW = 562.5 Mohm; 27.97 kohm is the most for the time: 20 109 times.
    let sizing = sized(&bank(&one("")), &BleederAsk { max_loss: Some(Power::from_si(1e-3)), ..ask() });
    let finding = &sizing.findings[0];
    assert!(finding.code == "demands-collide" && finding.text.contains("563 Mohm"), "{}", finding.text);
}
