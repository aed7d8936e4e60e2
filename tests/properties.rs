//! Laws that hold for every bank, tried on random small ones: written as bank files, read and planned as any other.

#[path = "properties/arrays.rs"]
mod arrays;
#[path = "properties/banks.rs"]
mod banks;
#[path = "properties/symmetry.rs"]
mod symmetry;
#[path = "properties/text.rs"]
mod text;

use banks::{Draw, bank, plan_of};
use ebbvolt::plan::Plan;
use ebbvolt::quantity::Quantity;
use proptest::prelude::*;
use std::collections::BTreeMap;

/// Few cases each: a plan is a search over a box of tolerances under every fault.
fn cases(cases: u32) -> ProptestConfig {
    ProptestConfig { cases, failure_persistence: None, ..ProptestConfig::default() }
}

/// Every wait of a plan by its test point (in an order of its own) and its case, in second; infinite for never.
fn waits(plan: &Plan) -> BTreeMap<String, f64> {
    let mut all = BTreeMap::new();
    for wait in &plan.waits {
        let mut pair = wait.across.clone();
        pair.sort();
        let mut add = |what: &str, time: Option<_>| {
            all.insert(format!("{pair:?} {what}"), time.map_or(f64::INFINITY, Quantity::si));
        };
        add("nominal", wait.nominal);
        add("slowest", wait.slowest);
        wait.faults.iter().for_each(|fault| add(&fault.fault, fault.wait));
    }
    all
}

/// The slowest waits alone.
fn slowest(plan: &Plan) -> Vec<f64> {
    plan.waits.iter().map(|w| w.slowest.map_or(f64::INFINITY, Quantity::si)).collect()
}

/// Never is never; a time agrees to `relative`.
fn agree(x: f64, y: f64, relative: f64) -> bool {
    x.is_infinite() && y.is_infinite() || (x - y).abs() <= relative * y.abs()
}

/// The same waits, but for a factor.
fn same_waits(found: &Plan, expected: &Plan, factor: f64, relative: f64) -> Result<(), TestCaseError> {
    let (found, expected) = (waits(found), waits(expected));
    prop_assert_eq!(found.keys().collect::<Vec<_>>(), expected.keys().collect::<Vec<_>>());
    for (name, time) in &expected {
        let scaled = time * factor;
        prop_assert!(agree(found[name], scaled, relative), "{name}: {} s for {scaled} s", found[name]);
    }
    Ok(())
}

proptest! {
    #![proptest_config(cases(64))]

    #[test]
    fn resistances_times_a_factor_make_every_time_longer_by_that_factor(draw in bank(), factor in 0.01f64..100.0) {
        let plain = plan_of(&draw)?;
        let scaled = plan_of(&draw.with_resistances_times(factor))?;
        same_waits(&scaled, &plain, factor, 1e-9)?;
        prop_assert_eq!(scaled.time_constants.len(), plain.time_constants.len());
        for (found, expected) in scaled.time_constants.iter().zip(&plain.time_constants) {
            prop_assert!(agree(found.si(), expected.si() * factor, 1e-9));
        }
    }

    #[test]
    fn the_order_of_the_parts_changes_no_wait(draw in bank()) {
        same_waits(&plan_of(&draw.in_reverse_order())?, &plan_of(&draw)?, 1.0, 1e-11)?;
    }

    #[test]
    fn all_voltages_times_a_factor_leave_every_wait_as_it_is(draw in bank(), factor in 0.02f64..50.0) {
        same_waits(&plan_of(&draw.with_voltages_times(factor))?, &plan_of(&draw)?, 1.0, 1e-9)?;
    }

    #[test]
    fn a_slowest_wait_is_never_below_the_nominal_one_at_the_same_voltage(draw in bank()) {
        let plan = plan_of(&draw.at_one_voltage())?;
        for wait in &plan.waits {
            let [nominal, slowest] = [wait.nominal, wait.slowest].map(|t| t.map_or(f64::INFINITY, Quantity::si));
            prop_assert!(slowest >= nominal, "{:?}: {slowest} s and {nominal} s", wait.across);
        }
    }

    #[test]
    fn a_wider_tolerance_never_shortens_the_slowest_wait(draw in bank(), part: prop::sample::Index, more in 0.01f64..0.2) {
        let wider = draw.with_a_wider_tolerance(part, more);
        for (before, after) in slowest(&plan_of(&draw)?).into_iter().zip(slowest(&plan_of(&wider)?)) {
            prop_assert!(after >= before * (1.0 - 1e-12), "{after} s with the wider one, {before} s before");
        }
    }

    #[test]
    fn no_draw_from_the_tolerances_outlasts_the_slowest_wait(
        draw in bank(),
        points in prop::collection::vec(prop::collection::vec(0f64..=1.0, 16), 12),
    ) {
        let found = slowest(&plan_of(&draw)?);
        for point in points {
            let fixed = plan_of(&draw.fixed_at(&point))?;
            for (slowest, wait) in found.iter().zip(&fixed.waits) {
                let drawn = wait.nominal.map_or(f64::INFINITY, Quantity::si);
                prop_assert!(drawn <= slowest * (1.0 + 1e-11), "{:?}: {drawn} s, slowest {slowest} s", wait.across);
            }
        }
    }

    /// A string of capacitors, each with its balancing resistor: the resistors set the voltages.
    #[test]
    fn stored_energy_is_the_sum_of_half_c_v_squared(
        parts in prop::collection::vec((1e-9f64..1.0, 1.0f64..1e9), 1..6),
        volts in 1f64..20e3,
    ) {
        let total: f64 = parts.iter().map(|(_, r)| r).sum();
        let by_hand: f64 = parts.iter().map(|(c, r)| 0.5 * c * (volts * r / total).powi(2)).sum();
        let plan = plan_of(&Draw::string(&parts, volts))?;
        let stored = plan.stored.as_ref().expect("computed");
        prop_assert!(agree(stored.energy_nominal.si(), by_hand, 1e-12), "{:?} for {by_hand} J", stored.energy_nominal);
        prop_assert!(agree(stored.energy_highest.si(), by_hand, 1e-12), "{:?} for {by_hand} J", stored.energy_highest);
    }

    /// Every capacitor's own pair is a test point: the energy and the voltages of one plan have to agree.
    #[test]
    fn stored_energy_agrees_with_the_voltages_at_the_test_points(draw in bank()) {
        let draw = draw.fixed_at(&[0.5; 16]);
        let plan = plan_of(&draw)?;
        let of_capacitors: f64 = draw
            .capacitors()
            .map(|(a, b, farads)| {
                let is_pair = |w: &&ebbvolt::plan::Wait| w.across == [a, b] || w.across == [b, a];
                let volts = plan.waits.iter().find(is_pair).expect("a test point").at_isolation.si();
                0.5 * farads * volts * volts
            })
            .sum();
        let stored = plan.stored.as_ref().expect("computed").energy_nominal.si();
        prop_assert!((stored - of_capacitors).abs() <= 1e-12 * stored, "{stored} J and {of_capacitors} J");
    }
}
