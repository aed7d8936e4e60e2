//! Published limits, as the project's page on them states their figures: every entry of the list is met from the
//! moment that its own figures give, by hand.
//!
//! The figures below are typed from that page and from the documents it names, not read from the data folder.

use crate::banks::{planned, si};
use crate::rows::confirm_input;
use ebbvolt::data::published_limits;
use ebbvolt::plan::Plan;
use ebbvolt::quantity::Quantity;

/// What a limit allows beside a voltage.
#[derive(Clone, Copy)]
enum Or {
    Nothing,
    /// A charge at isolation, in coulomb.
    ChargeAtIsolation(f64),
    /// A charge that is left, in coulomb.
    ChargeLeft(f64),
    /// An energy that is left, in joule.
    EnergyLeft(f64),
}
use Or::*;

/// Entry, volt, seconds, alternative. Documents and clauses stand in the data folder under the same names.
const LIMITS: [(&str, f64, f64, Or); 23] = [
    ("nec-460-up-to-1000v", 50.0, 60.0, Nothing),         // NFPA 70 (2023) 460.6
    ("nec-460-over-1000v", 50.0, 300.0, Nothing),         // NFPA 70 (2023) 460.28
    ("nec-665-heating-up-to-600v", 50.0, 60.0, Nothing),  // NFPA 70 665.24
    ("nec-665-heating-over-600v", 50.0, 300.0, Nothing),  // NFPA 70 665.24
    ("ca-t8-2893", 50.0, 300.0, Nothing),                 // California Code, Title 8, 2893
    ("iec-60204-1", 60.0, 5.0, ChargeAtIsolation(60e-6)), // IEC 60204-1:2016 6.2.4
    ("iec-60204-1-plug", 60.0, 1.0, Nothing),             // the same
    ("nfpa-79", 60.0, 5.0, ChargeAtIsolation(60e-6)),     // NFPA 79 (2024) 6.5.1
    ("iec-61800-5-1", 60.0, 5.0, ChargeLeft(50e-6)),      // IEC 61800-5-1:2007
    ("iec-62477-1", 60.0, 5.0, ChargeLeft(50e-6)),        // IEC 62477-1
    ("iec-62477-1-plug", 60.0, 1.0, ChargeLeft(50e-6)),   // the same
    ("iec-60335-1-plug", 34.0, 1.0, Nothing),             // IEC 60335-1 22.5
    ("iec-60335-1-part-450v-to-15kv", 42.4, 0.0, ChargeLeft(45e-6)), // IEC 60335-1 8.1.4
    ("iec-60335-1-part-over-15kv", 42.4, 0.0, EnergyLeft(0.35)), // the same
    ("iec-61010-1-plug", 60.0, 5.0, ChargeLeft(45e-6)),   // IEC 61010-1 6.10.3
    ("iec-60831-1", 75.0, 180.0, Nothing),                // IEC 60831-1:2014
    ("iec-60871-1", 75.0, 600.0, Nothing),                // IEC 60871-1
    ("ieee-18-up-to-600v", 50.0, 60.0, Nothing),          // IEEE Std 18
    ("ieee-18-over-600v", 50.0, 300.0, Nothing),          // the same
    ("un-gtr-20", 60.0, 60.0, EnergyLeft(0.2)),           // UN GTR No. 20
    ("vehicle-active", 60.0, 2.0, Nothing),               // common practice
    ("vehicle-passive", 60.0, 120.0, Nothing),            // common practice
    ("site-rule", 50.0, 60.0, Nothing),                   // a control that no document states
];

/// Entries of another kind than the table above, each with its own test here.
const OTHERS: [&str; 4] =
    ["osha-1910-269-w1", "iec-62368-1-es1", "iec-60335-1-part-up-to-450v", "iec-60831-1-switching-in"];

/// IEC 62368-1, table 5, charged capacitor, class ES1: farad, volt.
const ES1: [(f64, f64); 15] = [
    (300e-9, 60.0),
    (170e-9, 75.0),
    (91e-9, 100.0),
    (61e-9, 125.0),
    (41e-9, 150.0),
    (28e-9, 200.0),
    (18e-9, 250.0),
    (12e-9, 350.0),
    (8e-9, 500.0),
    (4e-9, 1000.0),
    (1.6e-9, 2500.0),
    (0.8e-9, 5e3),
    (0.4e-9, 10e3),
    (0.2e-9, 20e3),
    (0.133e-9, 25e3),
];

/// A bank of one capacitance and these bleeders under these entries.
fn bank(volts: f64, capacitor: &str, bleeders: &[f64], entries: &[&str]) -> Plan {
    let uses: String = entries.iter().map(|id| format!("  - {{use: {id}}}\n")).collect();
    let uses = uses.replace("{use: site-rule}", "{id: site-rule, voltage: 50 V, within: 60 s}");
    let resistors: String = bleeders
        .iter()
        .enumerate()
        .map(|(i, ohms)| format!("  - {{id: R{i}, role: bleeder, value: {}}}\n", si(*ohms, "ohm")))
        .collect();
    planned(&format!(
        "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 30 V\ncharged_to: {}\ncapacitors: [{{id: C1, value: {capacitor}}}]\n\
         resistors:\n{resistors}limits:\n{uses}",
        si(volts, "V")
    ))
}

/// From when on a limit holds for one capacitance, by hand: the earliest of its alternatives.
fn by_hand(level: f64, or: Or, volts: f64, farads: f64, tau: f64) -> Option<f64> {
    let after = |ratio: f64| (tau * ratio.ln()).max(0.0);
    let voltage = after(volts / level);
    let other = match or {
        Nothing => f64::INFINITY,
        ChargeAtIsolation(charge) if farads * volts <= charge => 0.0,
        ChargeAtIsolation(_) => f64::INFINITY,
        ChargeLeft(charge) => after(farads * volts / charge),
        // Energy falls with the square of the voltage.
        EnergyLeft(energy) => after((0.5 * farads * volts * volts / energy).sqrt()),
    };
    Some(voltage.min(other)).filter(|t| t.is_finite())
}

#[test]
fn every_limit_is_met_from_the_moment_that_its_own_figures_give() {
    let entries: Vec<&str> = LIMITS.iter().map(|(id, ..)| *id).collect();
    // At 400 V: 4 mC, where voltages decide; 56 uC, between the exemptions of 60 uC and 50 uC; 40 uC, under all.
    for farads in [10e-6, 140e-9, 100e-9] {
        for tau in [0.4, 1.0, 40.0] {
            let plan = bank(400.0, &si(farads, "F"), &[tau / farads], &entries);
            for ((id, level, within, or), found) in LIMITS.iter().zip(&plan.limits) {
                assert_eq!(*id, found.id);
                let expected = by_hand(*level, *or, 400.0, farads, tau);
                let case = format!("{id}, {farads} F, {tau} s: {expected:?} by hand, {found:?}");
                assert!(found.within.is_some_and(|t| (t.si() - within).abs() < 1e-12), "{case}");
                let holds = found.holds_from.map(Quantity::si).zip(expected);
                assert!(holds.is_some_and(|(x, y)| (x - y).abs() <= 1e-9 * y), "{case}");
                assert_eq!(found.met, expected.map(|t| t <= *within), "{case}");
                // With the only bleeder open all stays as it is.
                let trapped = by_hand(*level, *or, 400.0, farads, f64::INFINITY) == Some(0.0);
                assert_eq!(found.single_fault_met, Some(trapped), "{case}");
            }
        }
    }
}

#[test]
fn every_entry_of_the_list_has_its_check_here() {
    for limit in published_limits() {
        let checked = LIMITS.iter().any(|(id, ..)| *id == limit.id) || OTHERS.contains(&limit.id.as_str());
        assert!(checked, "{}: type its figures into this file, from the document", limit.id);
    }
}

#[test]
fn a_wait_of_five_minutes_names_no_voltage_and_is_neither_met_nor_missed() {
    // 29 CFR 1910.269(w)(1).
    let plan = bank(400.0, "10 uF", &[1e3], &["osha-1910-269-w1"]);
    let limit = &plan.limits[0];
    assert!(limit.within.is_some_and(|t| (t.si() - 300.0).abs() < 1e-12), "{limit:?}");
    assert_eq!((limit.met, limit.single_fault_met), (None, None));
    assert!(!limit.rule.contains(" V"), "{}", limit.rule);
}

#[test]
fn an_accessible_part_up_to_450_volts_may_have_a_tenth_of_a_microfarad() {
    // IEC 60335-1 8.1.4: 0.1 uF from 42.4 V to 450 V peak.
    for (capacitor, volts, met) in [("0.1 uF", 450.0, true), ("0.11 uF", 450.0, false), ("0.11 uF", 42.0, true)] {
        let plan = bank(volts, capacitor, &[1e6], &["iec-60335-1-part-up-to-450v"]);
        assert_eq!(plan.limits[0].met, Some(met), "{capacitor} at {volts} V");
    }
}

/// The voltage that the plan allows at a capacitance: what is left of 30 kV when the limit begins to hold.
fn es1_of_plan(capacitor: &str, greatest: f64) -> f64 {
    let (volts, ohms) = (30e3, 1e6);
    let plan = bank(volts, capacitor, &[ohms], &["iec-62368-1-es1"]);
    let limit = &plan.limits[0];
    assert!(limit.within.is_some_and(|t| (t.si() - 2.0).abs() < 1e-12));
    volts * (-limit.holds_from.expect("it ends").si() / (ohms * greatest)).exp()
}

#[test]
fn the_voltage_by_capacitance_is_that_of_the_table_and_linear_between_its_points() {
    let close = |found: f64, expected: f64| {
        assert!((found / expected - 1.0).abs() < 1e-9, "{found} V for {expected} V");
    };
    for (farads, volts) in ES1 {
        close(es1_of_plan(&si(farads, "F"), farads), volts);
    }
    for pair in ES1.windows(2) {
        let ((c1, v1), (c2, v2)) = (pair[0], pair[1]);
        for share in [0.25, 0.5, 0.9] {
            let farads = c1 + share * (c2 - c1);
            close(es1_of_plan(&si(farads, "F"), farads), v1 + share * (v2 - v1));
        }
    }
    // Beyond its ends the end values hold.
    close(es1_of_plan("1 uF", 1e-6), 60.0);
    close(es1_of_plan("0.05 nF", 0.05e-9), 25e3);
}

#[test]
fn the_capacitance_of_that_limit_is_nominal_plus_tolerance() {
    // 200 nF and 17.5 % more are 235 nF, half way between 300 nF and 170 nF: 67.5 V. Its lower side is of no account.
    let found = es1_of_plan("200 nF, tolerance: {low: 60 %, high: 17.5 %}", 235e-9);
    assert!((found / 67.5 - 1.0).abs() < 1e-9, "{found}");
}

#[test]
fn with_one_bleeder_open_twice_the_voltage_is_allowed() {
    // Two bleeders of R on 170 nF, from 1000 V: one alone has to reach 2 * 75 V in 2 s, R = 2 s / (C ln(1000 / 150)).
    let limit = 2.0 / (170e-9 * (1000.0f64 / 150.0).ln());
    for (share, met) in [(0.9999, true), (1.0001, false)] {
        let plan = bank(1000.0, "170 nF", &[limit * share; 2], &["iec-62368-1-es1"]);
        assert_eq!((plan.limits[0].met, plan.limits[0].single_fault_met), (Some(true), Some(met)), "{share}");
    }
}

#[test]
fn a_small_capacitor_for_carriage_holds_the_stated_energy() {
    // 49 CFR 172.102, special provisions 361 and 372: 0.3 Wh, C U^2 / 7200.
    confirm_input("49 CFR 172.102 (361, 372)", "capacitance for 0.3 Wh at 2.7 V", "296.3", 0.3, |farads| {
        let plan = planned(&format!(
            "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 1 V\ncharged_to: 2.7 V\n\
             capacitors: [{{id: C1, value: {}}}]\nresistors: [{{id: R1, role: bleeder, value: 1 kohm}}]\n",
            si(farads, "F")
        ));
        plan.stored.expect("computed").energy_nominal.si() / 3600.0
    });
}
