//! Banks in a row against sums made by hand: no geometric series, every discharge that went before is added on its own,
//! and the greatest is looked for on a fine grid of time.

use crate::banks::{HEAD, bank, seconds, shelf, tooled};
use approx::assert_relative_eq;
use ebbvolt::quantity::Quantity;
use ebbvolt::size::{Build, ToolAsk};

/// 1 mF at 600 V into 1 kohm: 360 W at first, tau 1 s, 180 J in all. R_th = 200 K / 20 W = 10 K/W, thermal time 30 s.
const FARAD: f64 = 1e-3;
const VOLTS: f64 = 600.0;
const OHM: f64 = 1e3;
const R_TH: f64 = 10.0;
const THERMAL: f64 = 30.0;
const HELD: f64 = 6.0;

fn file() -> String {
    format!(
        "{HEAD}touch_voltage: 50 V\ncharged_to: {{nominal: 600 V, highest: 600 V}}\ncapacitors: [{{id: C1, value: 1 mF, tolerance: \
         0 %}}]\n"
    )
}

fn build() -> Build {
    shelf(
        "1 kohm",
        "0 %",
        "power: 20 W, full_to: 75 °C, zero_at: 275 °C, voltage: 1 kV, pulse: 1 kJ, thermal_time: 30 s",
    )
}

/// What one discharge has left of itself `t` seconds after it began: the integral of
/// exp(-(t - s)/30 s) P(s) R_th / 30 s over s up to t or to when the tool is lifted, P(s) = V^2/R exp(-2 s/tau).
fn alone(t: f64) -> f64 {
    let (own, fall) = (1.0 / THERMAL, 2.0 / (OHM * FARAD));
    let until = t.min(HELD);
    let gain = VOLTS * VOLTS / OHM * R_TH * own / (own - fall);
    gain * ((-fall * until).exp() * (-own * (t - until)).exp() - (-own * t).exp())
}

/// The greatest rise during discharge `n` (from 1) of a row, so many seconds apart.
fn greatest(n: u32, every: f64) -> f64 {
    let during = |t: f64| (0..n).map(|k| alone(t + every * f64::from(k))).sum::<f64>();
    (0..=60_000).map(|k| during(HELD * f64::from(k) / 60_000.0)).fold(0.0, f64::max)
}

fn ask(banks: Option<u32>, every: Option<f64>) -> ToolAsk {
    ToolAsk { build: build(), within: seconds(HELD), banks, every: every.and_then(seconds), ..ToolAsk::default() }
}

#[test]
fn the_body_in_the_last_of_a_row_is_the_sum_of_what_every_discharge_left() {
    for (banks, every) in [(1, 6.0), (2, 6.0), (5, 20.0), (7, 45.0)] {
        let sizing = tooled(&bank(&file()), &ask(Some(banks), Some(every)));
        let c = sizing.candidates.first().unwrap_or_else(|| panic!("{banks}: {:?}", sizing.findings));
        let row = c.figures.asked_row.as_ref().expect("it was asked for");
        let rise = row.body_temperature.expect("thermal data").si() - 313.15;
        assert_relative_eq!(rise, greatest(banks, every), max_relative = 1e-6);
        // 180 J less what is left after six time constants, over the time from one to the next.
        assert_relative_eq!(row.average_power.si(), 180.0 * (1.0 - (-12f64).exp()) / every, max_relative = 1e-9);
    }
    let once = tooled(&bank(&file()), &ask(None, None));
    let body = once.candidates[0].body_temperature.expect("thermal data").si() - 313.15;
    assert_relative_eq!(body, greatest(1, HELD), max_relative = 1e-6);
}

#[test]
fn so_many_in_a_row_and_not_one_more_and_then_it_has_to_cool_for_so_long() {
    // 235 K over air of 40 °C are allowed.
    for every in [6.0, 8.0] {
        let by_hand = (1..100).take_while(|n| greatest(*n, every) <= 235.0).count() as u32;
        assert!(by_hand > 5, "a row that tells something: {by_hand}");
        let sizing = tooled(&bank(&file()), &ask(None, Some(every)));
        let row = sizing.candidates[0].figures.in_a_row.clone().expect("thermal data");
        assert_eq!(row.banks, Some(by_hand), "{every}");
        // After that time one more comes out at just what is allowed; a hundredth earlier it does not.
        let cooling = row.cooling.expect("there is an end").si();
        let next = |cooled: f64| {
            let since = HELD + cooled;
            let earlier = |t: f64| (0..by_hand).map(|k| alone(t + since + every * f64::from(k))).sum::<f64>();
            (0..=60_000).map(|k| HELD * f64::from(k) / 60_000.0).map(|t| alone(t) + earlier(t)).fold(0.0, f64::max)
        };
        assert_relative_eq!(next(cooling), 235.0, max_relative = 1e-6);
        assert!(next(0.99 * cooling) > 235.0);
        assert!(cooling > every - HELD);
    }
}

#[test]
fn a_row_that_never_gets_too_warm_has_no_end() {
    let endless = greatest(200, 40.0);
    assert!(endless < 235.0, "{endless}");
    let sizing = tooled(&bank(&file()), &ask(Some(100_000), Some(40.0)));
    let figures = &sizing.candidates[0].figures;
    assert_eq!(figures.in_a_row.as_ref().map(|r| (r.banks, r.cooling)), Some((None, None)));
    let rise = figures.asked_row.as_ref().and_then(|r| r.body_temperature).expect("thermal data").si() - 313.15;
    assert_relative_eq!(rise, endless, max_relative = 1e-5);
}

#[test]
fn a_row_that_is_too_warm_refuses_a_design_that_one_discharge_would_not() {
    assert!(greatest(12, HELD) > 235.0);
    let sizing = tooled(&bank(&file()), &ask(Some(12), None));
    assert!(sizing.candidates.is_empty() && !sizing.findings.is_empty());
    assert!(!tooled(&bank(&file()), &ask(Some(2), None)).candidates.is_empty());
}

#[test]
fn without_thermal_data_the_average_power_decides_a_row_and_the_body_is_not_checked() {
    // 180 J every 6 s are 30 W; 25 W (full to 75 °C) bear one every 7.2 s.
    let build = shelf("1 kohm", "0 %", "power: 25 W, full_to: 75 °C, zero_at: 275 °C, voltage: 1 kV, pulse: 1 kJ");
    let with = |every: f64| ToolAsk { build: build.clone(), ..ask(Some(3), Some(every)) };
    let sizing = tooled(&bank(&file()), &with(7.3));
    let figures = &sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings)).figures;
    assert!(figures.in_a_row.is_none());
    assert!(figures.asked_row.as_ref().is_some_and(|r| r.body_temperature.is_none()));
    assert!(tooled(&bank(&file()), &with(7.1)).candidates.is_empty());
    // Without a derated power nothing can be said of a row, and nothing is.
    let unrated = shelf("1 kohm", "0 %", "voltage: 1 kV, pulse: 1 kJ");
    let sizing = tooled(&bank(&file()), &ToolAsk { build: unrated, ..ask(Some(3), Some(600.0)) });
    assert!(sizing.candidates.is_empty());
}

#[test]
fn elements_of_an_array_share_unequally_in_a_row_too() {
    // Two in parallel at 10 %: the lower one carries the more, V^2/R of its own, and begins with 1/0.9 of the power; its
    // discharge is as slow as the other one lets it be.
    let text = "elements: [{name: a, value: 2 kohm, tolerance: 10 %, rating: {power: 25 W, full_to: 75 °C, zero_at: 275 °C, \
                voltage: 1 kV, pulse: 1 kJ, thermal_time: 30 s}}]\n";
    let build =
        Build { elements: crate::banks::elements(text), series_up_to: 1, parallel_up_to: 2, ..Build::default() };
    let sizing = tooled(&bank(&file()), &ToolAsk { build, voltage: None, ..ask(Some(3), Some(10.0)) });
    let c = sizing.candidates.iter().find(|c| c.parallel == 2).unwrap_or_else(|| panic!("{:?}", sizing.findings));
    let rise = c.figures.asked_row.as_ref().and_then(|r| r.body_temperature).expect("thermal data").si() - 313.15;
    // One at 1.8 kohm beside one at 2.2 kohm: tau = 0.99 s.
    let (own, fall) = (1.0 / THERMAL, 2.0 / 0.99);
    let one = |t: f64| {
        let until = t.min(HELD);
        let gain = VOLTS * VOLTS / 1800.0 * 8.0 * own / (own - fall);
        gain * ((-fall * until).exp() * (-own * (t - until)).exp() - (-own * t).exp())
    };
    let during = |t: f64| (0..3).map(|k| one(t + 10.0 * f64::from(k))).sum::<f64>();
    let by_hand = (0..=60_000).map(|k| during(HELD * f64::from(k) / 60_000.0)).fold(0.0, f64::max);
    assert_relative_eq!(rise, by_hand, max_relative = 1e-6);
}
