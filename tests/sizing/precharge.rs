//! Precharge resistors: windows against closed forms, designs against the plan of the bank file with the supply in it,
//! a ranked list against a search through everything.

use crate::banks::{HEAD, bank, elements, generic, greatest, least, of, planned};
use ebbvolt::bank::description::{Description, Supply};
use ebbvolt::bank::stock::Values;
use ebbvolt::bank::{Bank, file};
use ebbvolt::data::Series;
use ebbvolt::plan::{Plan, ResistorResult, Verdict};
use ebbvolt::quantity::{Current, Quantity, Ratio, Resistance, Time, Tolerance};
use ebbvolt::size::{
    Attempts, Build, Candidate, MainContactor, PrechargeAsk, PrechargeFigures, Rank, Sizing, USUAL_SHARE, precharge,
};
use proptest::prelude::*;

fn sized(bank: &Bank, ask: &PrechargeAsk) -> Sizing<PrechargeFigures> {
    precharge(bank, "", ask).unwrap_or_else(|e| panic!("{e}"))
}

fn ask(within: f64) -> PrechargeAsk {
    PrechargeAsk { build: of(Series::E24), ..PrechargeAsk::within(Time::from_si(within)) }
}

fn share(value: f64) -> Option<Ratio> {
    Some(Ratio::from_si(value))
}

fn main(ohm: f64, ampere: Option<f64>) -> Option<MainContactor> {
    Some(MainContactor { resistance: Resistance::from_si(ohm), max_inrush: ampere.map(Current::from_si) })
}

fn near(found: f64, expected: f64) -> bool {
    (found / expected - 1.0).abs() < 1e-9
}

/// One capacitance of 2000 uF and 10 %, 565 V.
fn plain() -> String {
    format!("{HEAD}touch_voltage: 50 V\ncharged_to: 565 V\ncapacitors: [{{id: C1, value: 2000 uF, tolerance: 10 %}}]\n")
}

#[test]
fn the_upper_end_is_the_time_over_the_largest_capacitance_and_the_lower_the_first_current() {
    // v = V (1 - exp(-t/RC)): at 95 % after R C ln 20. The first current is V/R.
    let ask = PrechargeAsk { share: share(0.95), max_current: Some(Current::from_si(8.0)), ..ask(2.0) };
    let sizing = sized(&bank(&plain()), &ask);
    assert!(near(greatest(&sizing), 2.0 / (2.2e-3 * 20f64.ln())), "{}", greatest(&sizing));
    assert!(near(least(&sizing), 565.0 / 8.0), "{}", least(&sizing));
    assert!(!sizing.candidates.is_empty(), "{:?}", sizing.findings);
    // Without a share, what is usual, and that is told.
    let usual = sized(&bank(&plain()), &PrechargeAsk { share: None, ..ask });
    assert!(near(greatest(&usual), 2.0 / (2.2e-3 * (1.0 / (1.0 - USUAL_SHARE)).ln())));
    assert!(usual.assumptions.iter().any(|text| text.contains("common practice")));
}

#[test]
fn an_inrush_bounds_the_resistance_by_the_voltage_that_is_still_missing() {
    // V exp(-t/RC) over the main path: 565 V exp(-2 s/(R 2.2 mF)) / 20 mohm <= 500 A, so at most 10 V are missing.
    let ask = PrechargeAsk { main: main(0.02, Some(500.0)), ..ask(2.0) };
    let sizing = sized(&bank(&plain()), &ask);
    assert_eq!(sizing.demands.len(), 1, "no share is asked for where an inrush is");
    assert!(near(greatest(&sizing), 2.0 / (2.2e-3 * (565.0f64 / 10.0).ln())), "{}", greatest(&sizing));
    for c in &sizing.candidates {
        // The slowest: the resistor at the upper end of its tolerance.
        let ohm = c.resistance.si() * c.tolerance.map_or(1.0, |t| t.highest_factor());
        let missing = 565.0 * (-2.0 / (ohm * 2.2e-3)).exp();
        let inrush = c.figures.inrush.as_ref().expect("a main path was given");
        assert!(near(inrush.current.si(), missing / 0.02) && inrush.current.si() <= 500.0, "{inrush:?}");
        assert!(near(c.figures.reached_lowest.si(), 565.0 - missing));
    }
    assert!(!sizing.candidates.is_empty(), "{:?}", sizing.findings);
}

#[test]
fn a_full_charge_leaves_half_of_c_v_squared_in_the_resistor_whatever_it_is() {
    // 1 mF and no tolerance anywhere: after 40 time constants E = C V^2/2, and V_R + V_C is the supply's voltage.
    let text = format!("{HEAD}touch_voltage: 50 V\ncharged_to: 400 V\ncapacitors: [{{id: C1, value: 1 mF}}]\n");
    for ohm in [47.0, 330.0] {
        let stock = format!("elements: [{{name: one, value: {ohm} ohm}}]\n");
        let build = Build { elements: elements(&stock), series_up_to: 1, parallel_up_to: 1, ..Build::default() };
        let ask = PrechargeAsk { build, unrated_pulse: true, share: share(0.5), ..ask(40.0 * ohm * 1e-3) };
        let sizing = sized(&bank(&text), &ask);
        let f = &sizing.candidates[0].figures;
        assert!(near(f.attempt_energy.si(), 0.5 * 1e-3 * 400.0 * 400.0), "{ohm}: {:?}", f.attempt_energy);
        assert!(near(f.peak_power.si(), 400.0 * 400.0 / ohm) && near(f.peak_current.si(), 400.0 / ohm));
        assert!(near(f.to_share_slowest.expect("it comes").si(), ohm * 1e-3 * 2f64.ln()));
        // At half the voltage the resistor has the other half.
        let plan = planned(&bank(&with_steps(&text, &sizing.candidates[0])));
        let moment = &plan.steps[0].charging[0].moments[0];
        let (c, r) = (moment.bank.expect("it comes").si(), moment.series.expect("it comes").si());
        assert!(near(c + r, 400.0) && near(c, 200.0), "{c} {r}");
        assert!(near(plan.resistors.last().expect("the supply").energy.expect("it is connected").si(), 80.0));
    }
}

#[test]
fn a_bank_that_settles_below_the_share_is_told_with_the_voltage_and_what_to_ask() {
    // 1 kohm across the bank: with R in front it settles at 1/(1 + R/1000) of the supply.
    let text = format!("{}resistors: [{{id: R1, role: bleeder, value: 1 kohm}}]\n", plain());
    let ask = PrechargeAsk { share: share(0.98), max_current: Some(Current::from_si(5.0)), ..ask(60.0) };
    let sizing = sized(&bank(&text), &ask);
    assert!(sizing.window.is_none() && sizing.candidates.is_empty() && sizing.exit_code() == 1);
    let finding = &sizing.findings[0];
    assert_eq!(finding.code, "demands-collide");
    let help = finding.help.as_deref().expect("what would open it");
    // At 5 A there are 113 ohm: 565 V * 1000/1113 = 507.6 V, 89.8 %.
    for part in [
        "settle at no more than 507 V, 89.8 %",
        "a share of at most 89.8 % within 1 min",
        "a current of ",
        "two stages",
    ] {
        assert!(help.replace("60 s", "1 min").contains(part), "{part}: {help}");
    }
    // By how much: the share needs 1000/0.98 - 1000 = 20.4 ohm at most (and a little less, since it is reached in time).
    assert!(finding.text.contains("5.6 times as much") || finding.text.contains("5.5"), "{}", finding.text);
    // Where the bleeder leaves it room, the designs are inside that.
    let within = Time::from_si(1.0);
    let sizing = sized(&bank(&text), &PrechargeAsk { share: share(0.9), max_current: None, within, ..ask });
    let end = greatest(&sizing);
    assert!(end < 1000.0 / 0.9 - 1000.0, "{end}");
    // R' = R in parallel with 1 kohm: the time of the charge is R' C ln(1/(1 - 0.9/settled)).
    let settled = 1000.0 / (1000.0 + end);
    let tau = 2.2e-3 * end * 1000.0 / (1000.0 + end);
    let time = -tau * (1.0 - 0.9 / settled).ln();
    assert!((time - 1.0).abs() < 1e-6, "{time}");
}

#[test]
fn attempts_heat_the_body_as_a_series_that_is_summed_by_hand() {
    // P = (V^2/R) exp(-2t/RC); theta after a charge of `within` is that of the closed form, and each attempt starts from
    // what the ones before left.
    let text = format!("{HEAD}touch_voltage: 50 V\ncharged_to: 565 V\ncapacitors: [{{id: C1, value: 2000 uF}}]\n");
    let stock = "elements: [{name: one, value: 100 ohm, rating: {power: 50 W, full_to: 40 °C, zero_at: 340 °C, pulse: \
                 2 kJ, thermal_time: 100 s}}]\n";
    let build = Build { elements: elements(stock), series_up_to: 1, parallel_up_to: 1, ..Build::default() };
    let (count, every) = (6u32, 30.0);
    let attempts = Some(Attempts { count, every: Time::from_si(every) });
    let ask = PrechargeAsk { build, attempts, share: share(0.95), ..ask(2.0) };
    let sizing = sized(&bank(&text), &ask);
    let found = sizing.candidates[0].figures.attempts.clone().expect("asked for");
    let (tau, per_watt, rate) = (100.0f64, 300.0 / 50.0, 2.0 / (100.0 * 2e-3));
    let watt = 565.0f64 * 565.0 / 100.0;
    // theta' = (P(t) - theta/R_th)/C_th with C_th = tau/R_th.
    let cold = |t: f64| per_watt / tau * watt * ((-t / tau).exp() - (-rate * t).exp()) / (rate - 1.0 / tau);
    let (mut start, mut hottest) = (0.0f64, 0.0f64);
    for _ in 0..count {
        let rise = |t: f64| cold(t) + start * (-t / tau).exp();
        let top = (0..=200_000).map(|k| rise(2.0 * f64::from(k) / 200_000.0)).fold(0.0, f64::max);
        hottest = hottest.max(top);
        start = rise(2.0) * (-(every - 2.0) / tau).exp();
    }
    let rise = found.body_temperature.expect("thermal data").si() - 313.15;
    assert!((rise / hottest - 1.0).abs() < 1e-6, "{rise} {hottest}");
    assert!(near(found.average_power.si(), watt / rate * (1.0 - (-rate * 2.0).exp()) / every));
    assert_eq!(found.verdict, Verdict::Met);
    // One attempt is what the plan finds.
    let body = sizing.candidates[0].body_temperature.expect("thermal data").si();
    let once = PrechargeAsk { attempts: Some(Attempts { count: 1, every: Time::from_si(every) }), ..ask.clone() };
    let one = sized(&bank(&text), &once).candidates[0].figures.attempts.clone().expect("asked for");
    assert!(near(one.body_temperature.expect("thermal data").si(), body));
    // Too many in too short a time: no design, and heat is why.
    let many = Some(Attempts { count: 500, every: Time::from_si(3.0) });
    let sizing = sized(&bank(&text), &PrechargeAsk { attempts: many, ..ask });
    assert!(sizing.candidates.is_empty() && sizing.findings[0].text.contains("for heat"), "{:?}", sizing.findings);
}

#[test]
fn what_has_no_thermal_data_is_not_checked_but_an_average_over_its_power_is_too_much() {
    let text = plain();
    let stock = "elements: [{name: one, value: 100 ohm, rating: {power: 20 W, full_to: 70 °C, zero_at: 155 °C, pulse: 2 kJ}}]\n";
    let build = Build { elements: elements(stock), series_up_to: 1, parallel_up_to: 1, ..Build::default() };
    let every = |seconds: f64| Some(Attempts { count: 3, every: Time::from_si(seconds) });
    let ask = PrechargeAsk { build, attempts: every(60.0), share: share(0.95), ..ask(2.0) };
    let sizing = sized(&bank(&text), &ask);
    let c = &sizing.candidates[0];
    assert_eq!(c.figures.attempts.as_ref().map(|a| a.verdict), Some(Verdict::NotChecked));
    assert!(!c.figures.shorted.checked && c.figures.shorted.too_hot_after.is_none());
    // About 350 J every 10 s is 35 W.
    assert!(sized(&bank(&text), &PrechargeAsk { attempts: every(10.0), ..ask }).candidates.is_empty());
}

#[test]
fn elements_whose_rating_says_nothing_of_a_pulse_are_left_out_unless_they_are_asked_for() {
    let stock = "elements: [{name: film, value: 100 ohm, rating: {power: 20 W, full_to: 70 °C, zero_at: 155 °C}}]\n";
    let build = Build { elements: elements(stock), series_up_to: 1, parallel_up_to: 1, ..Build::default() };
    let ask = PrechargeAsk { build, share: share(0.95), ..ask(2.0) };
    let sizing = sized(&bank(&plain()), &ask);
    assert!(sizing.candidates.is_empty() && sizing.searched.set_aside[0].of.contains("pulse"), "{:?}", sizing.searched);
    let sizing = sized(&bank(&plain()), &PrechargeAsk { unrated_pulse: true, ..ask });
    let pulse = sizing.candidates[0].checks.iter().find(|c| c.check == "pulse energy").expect("a peak over its power");
    assert_eq!(pulse.verdict, Verdict::NotChecked);
}

/// A file with a supply in it and, where none of its steps connects it, the steps with which it was tried.
fn with_steps(text: &str, c: &Candidate<PrechargeFigures>) -> String {
    let with = file::with_supply("bank.yaml", text.as_bytes(), &c.figures.supply).unwrap_or_else(|e| panic!("{e}"));
    match &c.figures.steps {
        Some(steps) => format!("{with}procedure:\n{steps}"),
        None => with,
    }
}

/// An invented bank: a bus, two halves in series, a section behind a resistor, or a bleeder; perhaps with a supply of
/// its own, perhaps with steps that connect it.
fn text(micro: f64, shape: u8, volts: f64, supply: u8) -> String {
    let parts = match shape % 4 {
        0 => format!("capacitors: [{{id: C1, value: {micro} uF, tolerance: 20 %, across: [P, N]}}]\n"),
        1 => format!(
            "capacitors:\n  - {{id: C1, value: {micro} uF, tolerance: 20 %, across: [P, M]}}  # upper half\n  - {{id: C2, \
             value: {micro} uF, tolerance: 10 %, across: [M, N]}}\nresistors:\n  # balancing\n  - {{id: R1, role: \
             balancing, value: 47 kohm, tolerance: 5 %, across: [P, M]}}\n  - {{id: R2, role: balancing, value: 47 \
             kohm, tolerance: 5 %, across: [M, N]}}\n"
        ),
        2 => format!(
            "capacitors: [{{id: C1, value: {micro} uF, tolerance: 10 %, across: [P, N]}}, {{id: C2, value: 10 uF, \
             across: [M, N]}}]\nresistors: [{{id: R1, role: series, value: 10 ohm, tolerance: 10 %, across: [P, M]}}, \
             {{id: R2, role: bleeder, value: 100 kohm, across: [P, N]}}]\n"
        ),
        _ => format!(
            "capacitors: [{{id: C1, value: {micro} uF, tolerance: 20 %, across: [P, N]}}]\nresistors:\n- id: R1\n  role: \
             bleeder\n  value: 22 kohm   # old\n  tolerance: 10 %\n\n"
        ),
    };
    let own = match supply % 3 {
        0 => String::new(),
        1 => format!(
            "# feeds\nsupplies:\n  - {{id: S7, voltage: {volts} V, series: 33 ohm, across: [P, N]}} # as built\n"
        ),
        _ => format!(
            "supplies:\n  - id: S7\n    voltage: {volts} V\n    series: 33 ohm   # as built\n    across: [P, N]\n\
             procedure:\n  - {{step: Charge, connect: [S7], for: 3 s}}   # precharge\n  - {{step: Off, disconnect: [S7], for: 0 s}}\n"
        ),
    };
    format!("{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: {volts} V, highest: {} V}}\n{parts}{own}", volts * 1.1)
}

fn same(a: f64, b: f64) -> bool {
    (a - b).abs() <= 1e-12 * a.abs().max(b.abs())
}

fn of_supply<'p>(plan: &'p Plan, id: &str) -> &'p ResistorResult {
    plan.resistors.iter().find(|r| r.id == id).expect("it is there")
}

fn holds_in_the_file(text: &str, ask: &PrechargeAsk, sizing: &Sizing<PrechargeFigures>) {
    for c in &sizing.candidates {
        let f = &c.figures;
        let with = with_steps(text, c);
        // Every comment stays.
        assert_eq!(text.matches('#').count(), with.matches('#').count(), "{text}\n{with}");
        let plan = planned(&bank(&with));
        let found = of_supply(&plan, &sizing.id);
        assert_eq!(found.checks, c.checks, "{with}");
        assert!(found.checks.iter().all(|check| check.verdict != Verdict::NotMet));
        assert!(same(found.energy.expect("connected").si(), c.element_energy.expect("told").si()));
        assert!(same(found.element_voltage.expect("connected").si(), c.element_voltage.expect("told").si()));
        let charging = plan.steps.iter().flat_map(|s| &s.charging).next().expect("a step connects it");
        let [_, _, at_95, _] = charging.moments.as_slice() else { panic!("four shares") };
        if f.share == share(0.95) {
            assert!(same(at_95.slowest.expect("it comes").si(), f.to_share_slowest.expect("it comes").si()));
            assert!(f.to_share_slowest.expect("it comes") <= ask.within);
        }
        if f.steps.is_some() {
            // The plan's step is as long as the precharge.
            assert!(same(charging.reached_lowest.si(), f.reached_lowest.si()));
            let part = plan.steps[0].parts.iter().find(|p| p.id == sizing.id).expect("it is connected");
            let elements = f64::from(c.elements);
            let parallel = f64::from(c.parallel);
            assert!(same(part.peak_current.si() * parallel, f.peak_current.si()), "{part:?} {f:?}");
            assert!(same(part.peak_power.si() * elements, f.peak_power.si()));
            assert!(same(part.energy.si() * elements, f.attempt_energy.si()));
        }
        if let Some(limit) = ask.main.and_then(|m| m.max_inrush) {
            assert!(f.inrush.as_ref().is_some_and(|i| i.current <= limit));
        }
        assert!(ask.max_current.is_none_or(|most| f.peak_current <= most));
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 16, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn every_design_put_into_the_file_has_the_same_figures_in_its_plan(
        micro in 50.0..3000.0f64,
        shape in 0u8..4,
        supply in 0u8..3,
        volts in 48.0..800.0f64,
        within in 0.2..20.0f64,
        margin in 0.0..0.5f64,
        asked in proptest::option::of(0.5..0.97f64),
        inrush in proptest::option::of(20.0..2000.0f64),
        current in proptest::option::of(0.5..20.0f64),
        rank in 0usize..3,
        attempts in proptest::option::of(1u32..5),
    ) {
        let text = text(micro.round(), shape, volts.round(), supply);
        let ask = PrechargeAsk {
            build: Build {
                margin,
                rank: [Rank::Elements, Rank::Loss, Rank::Wait][rank],
                elements: generic(Series::E12),
                show: 2,
                ..Build::default()
            },
            share: asked.map(Ratio::from_si),
            main: inrush.map(|a| MainContactor {
                resistance: Resistance::from_si(0.05),
                max_inrush: Some(Current::from_si(a)),
            }),
            max_current: current.map(Current::from_si),
            attempts: attempts.map(|count| Attempts { count, every: Time::from_si(3.0 * within) }),
            ..PrechargeAsk::within(Time::from_si(within))
        };
        let sizing = sized(&bank(&text), &ask);
        holds_in_the_file(&text, &ask, &sizing);
        // Nothing found comes with a reason.
        prop_assert!(!sizing.candidates.is_empty() || sizing.findings.iter().any(|f| f.help.is_some()));
    }
}

#[test]
fn the_random_demands_above_do_find_designs() {
    for (shape, supply) in (0..4).flat_map(|shape| (0..3).map(move |supply| (shape, supply))) {
        let text = text(500.0, shape, 565.0, supply);
        let ask = PrechargeAsk { share: share(0.95), ..ask(2.0) };
        let sizing = sized(&bank(&text), &ask);
        assert_eq!(sizing.candidates.len(), 5, "{shape} {supply}: {:?}", sizing.findings);
        assert_eq!(sizing.id, if supply == 0 { "S1" } else { "S7" });
        holds_in_the_file(&text, &ask, &sizing);
    }
}

const STOCK: &str = "elements:
  - {name: a, value: 100 ohm, tolerance: 5 %, rating: {power: 50 W, full_to: 25 °C, zero_at: 275 °C, voltage: 600 V, pulse: 250 J}}
  - {name: b, value: 47 ohm, tolerance: 10 %, rating: {power: 20 W, full_to: 25 °C, zero_at: 275 °C, voltage: 400 V, pulse: 120 J, overload: {times: 200, for: 1 s}}}
  - {name: c, series: E6, from: 22 ohm, to: 330 ohm, tolerance: 1 %, rating: {power: 30 W, full_to: 70 °C, zero_at: 155 °C, voltage: 350 V, pulse: 90 J, thermal_time: 40 s}}
  - {name: d, value: 68 ohm, rating: {power: 30 W, full_to: 25 °C, zero_at: 275 °C, pulse: 1 kJ}}
  - {name: e, value: 68 ohm, rating: {power: 30 W, full_to: 25 °C, zero_at: 275 °C}}
";

/// Every array of the stock that does the job by its plan alone: (element, ohm, series, parallel).
fn everything(description: &Description, ask: &PrechargeAsk) -> Vec<(String, f64, u32, u32)> {
    let mut good = Vec::new();
    for element in &ask.build.elements {
        let values = match element.values {
            Values::One(value) => vec![value],
            Values::Preferred { series, from, to } => series.between(from, to),
        };
        for value in values {
            for (array_series, array_parallel) in (1..=3).flat_map(|s| (1..=3).map(move |p| (s, p))) {
                let mut with = description.clone();
                with.supplies[0] = Supply {
                    series: value,
                    tolerance: element.tolerance,
                    array_series,
                    array_parallel,
                    rating: element.rating,
                    ..with.supplies[0].clone()
                };
                let plan = planned(&Bank::new(with).expect("a bank"));
                let found = of_supply(&plan, "S7");
                let charging = &plan.steps[0].charging[0];
                let in_time = charging.moments[2].slowest.is_some_and(|t| t <= ask.within);
                let lowest = value.si() * f64::from(array_series) / f64::from(array_parallel)
                    * element.tolerance.map_or(1.0, |t: Tolerance| t.lowest_factor());
                // What is tried from is 0 V, 565 V and 621.5 V: the first is worst.
                let current = ask.max_current.is_none_or(|most| 565.0 / lowest <= most.si());
                let rated = found.checks.iter().all(|c| c.verdict != Verdict::NotMet);
                let pulse = found.checks.iter().any(|c| c.check == "pulse energy" && c.verdict == Verdict::NotChecked);
                if in_time && current && rated && !pulse {
                    good.push((element.name.clone(), value.si(), array_series, array_parallel));
                }
            }
        }
    }
    good
}

#[test]
fn a_ranked_list_has_all_that_does_the_job_in_its_order_and_nothing_else() {
    let bank = bank(&text(500.0, 3, 565.0, 2));
    for rank in [Rank::Elements, Rank::Loss, Rank::Wait] {
        for current in [None, Some(7.0)] {
            let build = Build { rank, elements: elements(STOCK), show: 1000, ..Build::default() };
            let ask = PrechargeAsk {
                build,
                share: share(0.95),
                max_current: current.map(Current::from_si),
                // As long as the file's own step.
                ..PrechargeAsk::within(Time::from_si(0.3))
            };
            let mut all = everything(bank.description(), &ask);
            let sizing = sized(&bank, &ask);
            let mut found: Vec<_> =
                sizing.candidates.iter().map(|c| (c.element.clone(), c.value.si(), c.series, c.parallel)).collect();
            let key = |c: &Candidate<PrechargeFigures>| match rank {
                Rank::Loss => c.figures.peak_current.si(),
                Rank::Wait => c.figures.to_share_slowest.expect("it comes").si(),
                _ => f64::from(c.elements),
            };
            let keys: Vec<f64> = sizing.candidates.iter().map(key).collect();
            assert!(keys.windows(2).all(|k| k[0] <= k[1] * (1.0 + 1e-9)), "{keys:?}");
            let order = |x: &(String, f64, u32, u32), y: &(String, f64, u32, u32)| {
                x.0.cmp(&y.0).then(x.1.total_cmp(&y.1)).then(x.2.cmp(&y.2)).then(x.3.cmp(&y.3))
            };
            all.sort_by(order);
            found.sort_by(order);
            assert!(all.len() > 5, "{all:?}");
            assert_eq!(found, all);
        }
    }
}
