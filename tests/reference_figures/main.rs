//! The engine against `tests/reference/figures.json`: figures of the same banks by another route, in 120 digits
//! (mpmath), with SciPy beside it; the script that made them lies there.
//!
//! A wait has to agree to 1e-9, or to 1e-12 V over the slope at the crossing where that is more: a voltage can graze
//! the touch voltage. Where capacitors of more than 1e6 between them form loops, 1e-7 is what doubles can carry.

mod steps;

use ebbvolt::bank::file;
use ebbvolt::plan::{FaultWait, LimitResult, Options, Plan, Wait, plan};
use ebbvolt::quantity::{Quantity, Time};
use serde::Deserialize;
use std::collections::BTreeMap;
use std::sync::OnceLock;

const FOLDER: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/reference");

/// A decimal string of 25 digits.
#[derive(Deserialize, Clone, Debug)]
struct Number(String);

impl Number {
    fn value(&self) -> f64 {
        self.0.parse().expect("a number")
    }
}

#[derive(Deserialize)]
struct Figures {
    banks: BTreeMap<String, Reference>,
}

#[derive(Deserialize)]
struct Reference {
    stored: BTreeMap<String, Option<Number>>,
    time_constants_s: Vec<Number>,
    capacitor_loop_ratio: Number,
    waits: Vec<ReferenceWait>,
    limits: Vec<ReferenceLimit>,
    #[serde(default)]
    steps: Vec<steps::ReferenceStep>,
    #[serde(default)]
    recovery: Vec<steps::ReferenceRecovery>,
}

#[derive(Deserialize)]
struct ReferenceWait {
    across: [String; 2],
    nominal_s: Option<Number>,
    nominal_slope_v_per_s: Option<Number>,
    slowest_s: Option<Number>,
    slowest_slope_v_per_s: Option<Number>,
    settles_at_v: Number,
    faults: Vec<ReferenceFault>,
}

#[derive(Deserialize)]
struct ReferenceFault {
    fault: String,
    wait_s: Option<Number>,
    slope_v_per_s: Option<Number>,
    settles_at_v: Number,
}

/// One limit at one pair; the plan has one entry per limit, at the pair that governs.
#[derive(Deserialize)]
struct ReferenceLimit {
    id: String,
    across: [String; 2],
    within_s: Number,
    met: bool,
    single_fault_met: bool,
    voltage_v: Number,
    charge_c: Number,
    energy_j: Number,
}

struct Case {
    name: String,
    reference: Reference,
    plan: Plan,
}

impl Case {
    /// What doubles can carry for this bank.
    fn relative(&self) -> f64 {
        if self.reference.capacitor_loop_ratio.value() > 1e6 { 1e-7 } else { 1e-9 }
    }

    /// Every test point with its reference.
    fn waits(&self) -> impl Iterator<Item = (&Wait, &ReferenceWait)> {
        self.plan.waits.iter().zip(&self.reference.waits)
    }

    /// Every fault at every test point with its reference.
    fn faults(&self) -> impl Iterator<Item = (&FaultWait, &ReferenceFault)> {
        self.waits().flat_map(|(found, expected)| found.faults.iter().zip(&expected.faults))
    }

    /// Every wait of the plan with its reference and the slope there, and what it is.
    fn times(&self) -> Vec<(String, Option<Time>, Option<f64>, f64)> {
        let mut list = Vec::new();
        let number = |n: &Option<Number>| n.as_ref().map(Number::value);
        let slope = |n: &Option<Number>| n.as_ref().map_or(f64::INFINITY, |s| s.value().abs());
        for (found, expected) in self.waits() {
            let name = |what: &str| format!("{}, {:?}, {what}", self.name, expected.across);
            let (nominal, slowest) = (number(&expected.nominal_s), number(&expected.slowest_s));
            list.push((name("nominal"), found.nominal, nominal, slope(&expected.nominal_slope_v_per_s)));
            list.push((name("slowest"), found.slowest, slowest, slope(&expected.slowest_slope_v_per_s)));
            for (found, expected) in found.faults.iter().zip(&expected.faults) {
                let wait = number(&expected.wait_s);
                list.push((name(&expected.fault), found.wait, wait, slope(&expected.slope_v_per_s)));
            }
        }
        list
    }
}

/// Every bank of the reference, planned once.
fn cases() -> &'static [Case] {
    static CASES: OnceLock<Vec<Case>> = OnceLock::new();
    CASES.get_or_init(|| {
        let text = std::fs::read_to_string(format!("{FOLDER}/figures.json")).expect("the reference is there");
        let figures: Figures = serde_json::from_str(&text).expect("its structure is known");
        let planned = |(name, reference): (String, Reference)| {
            let path = format!("{FOLDER}/banks/{name}.yaml");
            let bytes = std::fs::read(&path).unwrap_or_else(|e| panic!("{path}: {e}"));
            let (bank, noticed) = file::read(&path, &bytes).unwrap_or_else(|e| panic!("{path}: {e:?}"));
            let plan = plan(&bank, "", noticed, Options::default()).unwrap_or_else(|e| panic!("{path}: {e}"));
            Case { name, reference, plan }
        };
        figures.banks.into_iter().map(planned).collect()
    })
}

/// Fails with every miss at once, and where nothing was compared.
fn conclude(compared: usize, misses: &[String]) {
    assert!(compared > 0, "nothing was compared");
    assert!(misses.is_empty(), "{} of {compared}:\n{}", misses.len(), misses.join("\n"));
}

#[test]
fn every_reference_bank_has_figures_for_the_same_test_points_and_faults() {
    let mut files: Vec<String> = std::fs::read_dir(format!("{FOLDER}/banks"))
        .expect("the folder is there")
        .map(|entry| entry.expect("an entry").file_name().into_string().expect("a name in UTF-8"))
        .collect();
    files.sort();
    let mut known: Vec<String> = cases().iter().map(|case| format!("{}.yaml", case.name)).collect();
    known.sort();
    assert_eq!(files, known, "make the figures again: tests/reference/reference.py make");
    for case in cases() {
        let (plan, reference) = (&case.plan, &case.reference);
        let points: Vec<_> = plan.waits.iter().map(|w| &w.across).collect();
        assert_eq!(points, reference.waits.iter().map(|w| &w.across).collect::<Vec<_>>(), "{}", case.name);
        for (found, expected) in case.waits() {
            let names: Vec<_> = found.faults.iter().map(|f| &f.fault).collect();
            assert_eq!(names, expected.faults.iter().map(|f| &f.fault).collect::<Vec<_>>(), "{}", case.name);
        }
    }
}

/// A wait against its reference: `relative` of it, or 1e-12 V over the slope in volt per second.
fn agrees(found: Option<f64>, expected: Option<f64>, slope: f64, relative: f64) -> bool {
    match (found, expected) {
        (None, None) => true,
        (Some(x), Some(y)) => (x - y).abs() <= (relative * y).max(1e-12 / slope),
        _ => false,
    }
}

#[test]
fn a_wait_that_is_off_by_more_than_its_tolerance_does_not_agree() {
    let steep = |found| agrees(found, Some(100.0), 1.0, 1e-9);
    assert!(steep(Some(100.0 + 0.9e-7)) && !steep(Some(100.0 + 1.1e-7)) && !steep(Some(100.0 - 1.1e-7)));
    assert!(!steep(None) && !steep(Some(f64::NAN)) && !agrees(Some(1e300), None, 1.0, 1e-9));
    // At a slope of 1 uV/s the crossing is only known to 1 us.
    assert!(agrees(Some(1.0 + 0.9e-6), Some(1.0), 1e-6, 1e-9) && !agrees(Some(1.0 + 1.1e-6), Some(1.0), 1e-6, 1e-9));
}

#[test]
fn every_wait_agrees_nominal_slowest_and_under_every_fault() {
    let (mut compared, mut misses) = (0, Vec::new());
    for case in cases() {
        for (what, found, expected, slope) in case.times() {
            compared += 1;
            let agrees = agrees(found.map(Quantity::si), expected, slope, case.relative());
            if !agrees {
                misses.push(format!("{what}: {found:?} for {expected:?} s"));
            }
        }
    }
    assert!(compared > 1500, "{compared}");
    conclude(compared, &misses);
}

/// Too late is a nuisance, too early can hurt. A slowest wait below the reference's own search over the box would be
/// one of these too.
#[test]
fn no_wait_is_earlier_than_the_reference_by_more_than_its_last_digits() {
    let (mut compared, mut misses) = (0, Vec::new());
    for case in cases() {
        for (what, found, expected, slope) in case.times() {
            compared += 1;
            let least = match (found.map(Quantity::si), expected) {
                // Never is late enough for anything.
                (None, _) => continue,
                (Some(_), None) => f64::INFINITY,
                (Some(_), Some(y)) => y - (1e-11 * y).max(1e-12 / slope),
            };
            if found.is_none_or(|t| t.si() < least) {
                misses.push(format!("{what}: {found:?} is earlier than {expected:?} s"));
            }
        }
    }
    conclude(compared, &misses);
}

#[test]
fn voltages_settle_where_the_reference_says() {
    let (mut compared, mut misses) = (0, Vec::new());
    for case in cases() {
        let healthy = case.waits().map(|(found, expected)| (found.settles_at, &expected.settles_at_v, "healthy"));
        let failed =
            case.faults().map(|(found, expected)| (found.settles_at, &expected.settles_at_v, &*expected.fault));
        for (found, expected, what) in healthy.chain(failed) {
            compared += 1;
            let (found, expected) = (found.si(), expected.value());
            let agrees = (found - expected).abs() <= (case.relative() * expected).max(1e-9);
            if !agrees {
                misses.push(format!("{}, {what}: {found} V for {expected} V", case.name));
            }
        }
    }
    conclude(compared, &misses);
}

#[test]
fn time_constants_agree_from_the_slowest_to_the_fastest() {
    let (mut compared, mut misses) = (0, Vec::new());
    for case in cases() {
        let found = &case.plan.time_constants;
        assert_eq!(found.len(), case.reference.time_constants_s.len(), "{}", case.name);
        for (found, expected) in found.iter().zip(&case.reference.time_constants_s) {
            compared += 1;
            let (found, expected) = (found.si(), expected.value());
            if (found / expected - 1.0).abs() > case.relative() {
                misses.push(format!("{}: {found} s for {expected} s", case.name));
            }
        }
    }
    conclude(compared, &misses);
}

#[test]
fn energy_charge_and_capacitance_at_isolation_agree() {
    let (mut compared, mut misses) = (0, Vec::new());
    for case in cases() {
        let stored = case.plan.stored.as_ref().expect("computed");
        let found = [
            ("energy_nominal_j", Some(stored.energy_nominal.si())),
            ("energy_highest_j", Some(stored.energy_highest.si())),
            ("charge_highest_c", Some(stored.charge_highest.si())),
            ("capacitance_f", stored.capacitance.map(Quantity::si)),
        ];
        for (key, found) in found {
            compared += 1;
            let expected = case.reference.stored[key].as_ref().map(Number::value);
            let agrees = match (found, expected) {
                (Some(x), Some(y)) => (x - y).abs() <= case.relative() * y,
                (found, expected) => found == expected,
            };
            if !agrees {
                misses.push(format!("{}, {key}: {found:?} for {expected:?}", case.name));
            }
        }
    }
    conclude(compared, &misses);
}

/// What is left at `within`. The reference gives a figure under 1e-15 of what was there at isolation as 0.
fn left_misses(case: &Case, found: &LimitResult, expected: &ReferenceLimit) -> Vec<String> {
    let stored = case.plan.stored.as_ref().expect("computed");
    let figures = [
        ("V", found.voltage.si(), &expected.voltage_v, stored.voltage_highest.si()),
        ("C", found.charge.si(), &expected.charge_c, stored.charge_highest.si()),
        ("J", found.energy.si(), &expected.energy_j, stored.energy_highest.si()),
    ];
    figures
        .into_iter()
        .map(|(unit, found, expected, at_first)| (unit, found, expected.value(), at_first))
        .filter(|(_, x, y, at_first)| (x - y).abs() > (case.relative() * y).max(1e-15 * at_first))
        .map(|(unit, x, y, _)| format!("{}, {}: {x} {unit} for {y} {unit}", case.name, expected.id))
        .collect()
}

#[test]
fn limits_are_met_or_missed_as_the_reference_says_and_leave_what_it_says() {
    let (mut compared, mut misses) = (0, Vec::new());
    for case in cases() {
        for found in &case.plan.limits {
            let entries: Vec<_> = case.reference.limits.iter().filter(|l| l.id == found.id).collect();
            // The reference passes over published limits.
            if entries.is_empty() {
                assert!(found.source.is_some(), "{}, {}: not in the reference", case.name, found.id);
                continue;
            }
            compared += 1;
            let met = (entries.iter().all(|l| l.met), entries.iter().all(|l| l.single_fault_met));
            if (found.met, found.single_fault_met) != (Some(met.0), Some(met.1)) {
                misses.push(format!("{}, {}: {found:?} for {met:?}", case.name, found.id));
            }
            let at = entries.iter().find(|l| l.across == found.across).expect("it governs at one of its pairs");
            assert!(found.within.is_some_and(|t| (t.si() - at.within_s.value()).abs() < 1e-9));
            if !met.0 && at.met {
                misses.push(format!("{}, {}: missed, but {:?} that governs meets it", case.name, found.id, at.across));
            }
            misses.extend(left_misses(case, found, at));
        }
    }
    conclude(compared, &misses);
}
