//! Steps, what parts bear in them, and what comes back, against the same reference.

use super::{Number, cases, conclude};
use ebbvolt::quantity::Quantity;
use serde::Deserialize;

#[derive(Deserialize)]
pub struct ReferenceStep {
    step: String,
    start_s: Number,
    end_s: Number,
    test_points: Vec<ReferencePoint>,
    parts: Vec<ReferencePart>,
}

#[derive(Deserialize)]
struct ReferencePoint {
    across: [String; 2],
    nominal_v: Number,
    highest_v: Number,
}

#[derive(Deserialize)]
struct ReferencePart {
    id: String,
    peak_current_a: Number,
    peak_power_w: Number,
    energy_j: Number,
}

#[derive(Deserialize)]
pub struct ReferenceRecovery {
    across: [String; 2],
    voltage_v: Number,
    at_s: Option<Number>,
}

/// What a procedure's figures have to agree to.
const RELATIVE: f64 = 1e-7;

/// Where a voltage is this share of the highest one it is the rest of a subtraction of doubles (states are carried from
/// step to step); currents, powers and energies follow from it.
const ROUNDING: f64 = 1e-13;

/// Collects what does not agree.
#[derive(Default)]
struct Misses {
    compared: usize,
    list: Vec<String>,
}

impl Misses {
    fn compare(&mut self, what: &str, found: f64, expected: &Number, floor: f64) {
        self.compared += 1;
        let expected = expected.value();
        let agrees = (found - expected).abs() <= (RELATIVE * expected.abs()).max(floor);
        if !agrees {
            self.list.push(format!("{what}: {found:e} for {expected:e}"));
        }
    }
}

#[test]
fn steps_last_and_leave_what_the_reference_says() {
    let mut misses = Misses::default();
    for case in cases() {
        assert_eq!(case.plan.steps.len(), case.reference.steps.len(), "{}", case.name);
        let floor = ROUNDING * case.plan.charged_to.highest.si();
        for (found, expected) in case.plan.steps.iter().zip(&case.reference.steps) {
            let name = format!("{}, {}", case.name, expected.step);
            assert_eq!(found.step, expected.step);
            misses.compare(&format!("{name}: start"), found.start.si(), &expected.start_s, 0.0);
            misses.compare(&format!("{name}: end"), found.end.si(), &expected.end_s, 0.0);
            assert_eq!(found.test_points.len(), expected.test_points.len(), "{name}");
            for (found, expected) in found.test_points.iter().zip(&expected.test_points) {
                assert_eq!(found.across, expected.across, "{name}");
                let at = format!("{name}, {:?}", expected.across);
                misses.compare(&format!("{at} nominal"), found.nominal.si(), &expected.nominal_v, floor);
                misses.compare(&format!("{at} highest"), found.highest.si(), &expected.highest_v, floor);
            }
        }
    }
    assert!(misses.compared > 200, "{}", misses.compared);
    conclude(misses.compared, &misses.list);
}

#[test]
fn parts_bear_in_each_step_what_the_reference_says() {
    let mut misses = Misses::default();
    for case in cases() {
        let volts = ROUNDING * case.plan.charged_to.highest.si();
        let energy = case.plan.stored.as_ref().expect("computed").energy_highest.si();
        for (found, expected) in case.plan.steps.iter().zip(&case.reference.steps) {
            for expected in &expected.parts {
                let name = format!("{}, {}, {}", case.name, found.step, expected.id);
                let found = found.parts.iter().find(|p| p.id == expected.id).unwrap_or_else(|| panic!("{name}"));
                let (ampere, watt) = (found.peak_current.si(), found.peak_power.si());
                // The rounding of a voltage, through the part's own resistance.
                let ohm = if ampere > 0.0 { watt / ampere.powi(2) } else { f64::INFINITY };
                misses.compare(&format!("{name}: A"), ampere, &expected.peak_current_a, volts / ohm);
                misses.compare(&format!("{name}: W"), watt, &expected.peak_power_w, volts.powi(2) / ohm);
                misses.compare(&format!("{name}: J"), found.energy.si(), &expected.energy_j, ROUNDING.powi(2) * energy);
            }
        }
    }
    assert!(misses.compared > 200, "{}", misses.compared);
    conclude(misses.compared, &misses.list);
}

#[test]
fn what_comes_back_after_the_last_step_is_what_the_reference_says() {
    let mut misses = Misses::default();
    for case in cases() {
        assert_eq!(case.plan.recovery.len(), case.reference.recovery.len(), "{}", case.name);
        let floor = ROUNDING * case.plan.charged_to.highest.si();
        for (found, expected) in case.plan.recovery.iter().zip(&case.reference.recovery) {
            let name = format!("{}, {:?}", case.name, expected.across);
            assert_eq!(found.across, expected.across, "{name}");
            misses.compare(&name, found.voltage.si(), &expected.voltage_v, floor);
            // The top of a voltage is flat: its place is known to half the digits of its height.
            if let (Some(found_at), Some(expected_at)) = (found.at, &expected.at_s)
                && expected.voltage_v.value() > 1e3 * floor
            {
                let found_at = found_at.si();
                let close = (found_at / expected_at.value() - 1.0).abs() < 1e-4;
                assert!(close, "{name}: greatest at {found_at} s for {expected_at:?}");
            }
        }
    }
    assert!(misses.compared > 10, "{}", misses.compared);
    conclude(misses.compared, &misses.list);
}

#[test]
fn a_step_that_is_off_by_more_than_its_tolerance_does_not_agree() {
    let reference = Number("100.0".into());
    let mut misses = Misses::default();
    misses.compare("right", 100.0 + 0.9e-5, &reference, 0.0);
    assert!(misses.list.is_empty());
    for wrong in [100.0 + 1.1e-5, 100.0 - 1.1e-5, f64::NAN, -100.0] {
        misses.compare("wrong", wrong, &reference, 0.0);
    }
    assert_eq!(misses.list.len(), 4);
}
