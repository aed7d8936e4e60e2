//! Figures: finite, in range, and in the right order among themselves.
//!
//! A file's figures come through `quantity::parse`, which refuses most of this; a library user's come as they are.

use super::super::description::{Capacitor, Description, Draw, Rating, Resistor};
use super::super::near::advice;
use super::super::problem::{Path, Sink};
use super::is_known;
use crate::data::{dielectric, dielectrics};
use crate::quantity::{Quantity, TemperatureCoefficient, Tolerance};

/// Units in series or in parallel: more than this is a slip of the pen.
pub(super) const MOST_UNITS: u32 = 1000;

pub(super) fn check(d: &Description, sink: &mut Sink) {
    above_zero(d.touch_voltage, "touch_voltage", &Path::default(), sink);
    optional(d.hold_energy, "hold_energy", &Path::default(), sink);
    let strap = Path::of("strap_limit");
    optional(d.strap_limit.energy, "energy", &strap, sink);
    optional(d.strap_limit.current, "current", &strap, sink);
    if d.ambient.is_some_and(|t| !t.si().is_finite()) {
        not_a_figure(Path::of("ambient"), "ambient", sink);
    }
    charged_to(d, sink);
    for (i, c) in d.capacitors.iter().enumerate() {
        capacitor(c, &Path::of("capacitors").then(i), sink);
    }
    for (i, r) in d.resistors.iter().enumerate() {
        resistor(r, &Path::of("resistors").then(i), sink);
    }
    for (i, s) in d.sinks.iter().enumerate() {
        let path = Path::of("sinks").then(i);
        match s.draw {
            Draw::ConstantCurrent(current) => above_zero(current, "value", &path, sink),
            Draw::ConstantPower(power) => above_zero(power, "value", &path, sink),
        }
        // At 0 V a constant power would draw an infinite current.
        match s.draw {
            Draw::ConstantCurrent(_) => at_least_zero(s.stops_below, "stops_below", &path, sink),
            Draw::ConstantPower(_) => above_zero(s.stops_below, "stops_below", &path, sink),
        }
    }
    for (i, s) in d.supplies.iter().enumerate() {
        let path = Path::of("supplies").then(i);
        above_zero(s.voltage, "voltage", &path, sink);
        above_zero(s.series, "series", &path, sink);
        tolerance(s.tolerance, &path, sink);
        count(s.array_series, "series", &path.then("array"), sink);
        count(s.array_parallel, "parallel", &path.then("array"), sink);
        rating(&s.rating, &path.then("rating"), sink);
    }
}

fn charged_to(d: &Description, sink: &mut Sink) {
    let path = Path::of("charged_to");
    let (nominal, highest) = (d.charged_to.nominal.si(), d.charged_to.highest.si());
    at_least_zero(d.charged_to.nominal, "nominal", &path, sink);
    at_least_zero(d.charged_to.highest, "highest", &path, sink);
    if highest < nominal {
        sink.push("highest-below-nominal", path.then("highest"), || {
            (
                format!("`highest` ({highest} V) is below `nominal` ({nominal} V)"),
                String::from("`highest` is the worst credible voltage: at least the nominal one"),
            )
        });
    }
}

fn capacitor(c: &Capacitor, path: &Path, sink: &mut Sink) {
    above_zero(c.value, "value", path, sink);
    tolerance(c.tolerance, path, sink);
    moves((c.tempco, c.ageing), path, sink);
    count(c.series, "series", &path.then("units"), sink);
    count(c.parallel, "parallel", &path.then("units"), sink);
    optional(c.rated, "rated", path, sink);
    if let Some(own) = c.charged_to {
        at_least_zero(own, "charged_to", path, sink);
    }
    if c.absorption.is_some_and(|share| !(0.0..1.0).contains(&share)) {
        sink.push("absorption-out-of-range", path.then("absorption"), || {
            (
                String::from("`absorption` has to be under 100 %"),
                String::from("write the share of the voltage that comes back, such as `10 %`"),
            )
        });
    }
    if let Some(kvar) = c.kvar {
        let path = path.then("kvar");
        above_zero(kvar.power, "power", &path, sink);
        above_zero(kvar.voltage, "voltage", &path, sink);
        above_zero(kvar.frequency, "frequency", &path, sink);
    }
    if let Some(word) = c.dielectric.as_deref().filter(|word| is_known(word) && dielectric(word).is_none()) {
        sink.push("unknown-dielectric", path.then("dielectric"), || {
            let known = dielectrics().iter().map(|d| d.id.as_str());
            (format!("`{word}` is no dielectric of the data folder"), advice(word, "dielectrics", known))
        });
    }
}

fn resistor(r: &Resistor, path: &Path, sink: &mut Sink) {
    above_zero(r.value, "value", path, sink);
    tolerance(r.tolerance, path, sink);
    moves((r.tempco, r.ageing), path, sink);
    count(r.series, "series", &path.then("array"), sink);
    count(r.parallel, "parallel", &path.then("array"), sink);
    rating(&r.rating, &path.then("rating"), sink);
}

fn rating(rating: &Rating, path: &Path, sink: &mut Sink) {
    optional(rating.power, "power", path, sink);
    optional(rating.voltage, "voltage", path, sink);
    optional(rating.pulse, "pulse", path, sink);
    optional(rating.thermal_time, "thermal_time", path, sink);
    if let Some(overload) = rating.overload {
        let path = path.then("overload");
        above_zero(overload.duration, "for", &path, sink);
        if !(overload.times >= 1.0 && overload.times.is_finite()) {
            sink.push("bad-overload", path.then("times"), || {
                (
                    String::from("an overload is at least 1 times the continuous power"),
                    String::from("write how many times the continuous power the element bears, such as `times: 5`"),
                )
            });
        }
    }
    for (key, temperature) in [("full_to", rating.full_to), ("zero_at", rating.zero_at)] {
        if temperature.is_some_and(|t| !t.si().is_finite()) {
            not_a_figure(path.then(key), key, sink);
        }
    }
    if let (Some(full_to), Some(zero_at)) = (rating.full_to, rating.zero_at)
        && zero_at.si() <= full_to.si()
    {
        sink.push("derating-order", path.then("zero_at"), || {
            (
                String::from("`zero_at` has to be above `full_to`"),
                String::from("full power is allowed up to `full_to`, nothing any more at `zero_at`"),
            )
        });
    }
}

fn tolerance(tolerance: Option<Tolerance>, path: &Path, sink: &mut Sink) {
    // `Tolerance` is valid by construction but for an upper side that overflows.
    if tolerance.is_some_and(|t| !t.highest_factor().is_finite()) {
        not_a_figure(path.then("tolerance"), "tolerance", sink);
    }
}

/// What temperature and age do to a value.
fn moves((tempco, ageing): (Option<TemperatureCoefficient>, Option<Tolerance>), path: &Path, sink: &mut Sink) {
    if tempco.is_some_and(|t| !t.si().is_finite()) {
        not_a_figure(path.then("tempco"), "tempco", sink);
    }
    if ageing.is_some_and(|a| !a.highest_factor().is_finite()) {
        not_a_figure(path.then("ageing"), "ageing", sink);
    }
}

fn count(units: u32, key: &'static str, path: &Path, sink: &mut Sink) {
    if !(1..=MOST_UNITS).contains(&units) {
        sink.push("count-out-of-range", path.then(key), || {
            (format!("`{key}` is {units}"), format!("write a whole number from 1 to {MOST_UNITS}"))
        });
    }
}

fn optional<Q: Quantity>(value: Option<Q>, key: &'static str, path: &Path, sink: &mut Sink) {
    if let Some(value) = value {
        above_zero(value, key, path, sink);
    }
}

pub(super) fn above_zero<Q: Quantity>(value: Q, key: &'static str, path: &Path, sink: &mut Sink) {
    let value = value.si();
    if !value.is_finite() || value < 0.0 {
        not_a_figure(path.then(key), key, sink);
    } else if value <= 0.0 {
        sink.push("not-above-zero", path.then(key), || {
            (format!("`{key}` is zero"), format!("write a value above zero, or leave `{key}` out where it is optional"))
        });
    }
}

pub(super) fn at_least_zero<Q: Quantity>(value: Q, key: &'static str, path: &Path, sink: &mut Sink) {
    if !(value.si().is_finite() && value.si() >= 0.0) {
        not_a_figure(path.then(key), key, sink);
    }
}

fn not_a_figure(path: Path, key: &'static str, sink: &mut Sink) {
    sink.push("bad-figure", path, || (format!("`{key}` is negative or not a finite number"), None));
}

#[cfg(test)]
mod tests {
    use super::super::samples::*;
    use super::*;
    use crate::bank::description::{Overload, Sink as Draining, Supply};
    use crate::quantity::{Current, Power, Temperature, Time};

    #[test]
    fn the_touch_voltage_is_above_zero() {
        let mut d = plain();
        d.touch_voltage = volt(0.0);
        assert_problem(&d, "not-above-zero", "touch_voltage");
        d.touch_voltage = volt(f64::NAN);
        assert_problem(&d, "bad-figure", "touch_voltage");
    }

    #[test]
    fn the_highest_voltage_is_not_below_the_nominal_one_and_zero_is_allowed() {
        let mut d = plain();
        d.charged_to.highest = volt(499.0);
        assert_problem(&d, "highest-below-nominal", "charged_to.highest");
        d.charged_to.nominal = volt(0.0);
        d.charged_to.highest = volt(0.0);
        assert_eq!(problems(&d), []);
        d.charged_to.highest = volt(f64::INFINITY);
        assert_problem(&d, "bad-figure", "charged_to.highest");
    }

    #[test]
    fn counts_are_from_one_to_a_thousand() {
        for (count, passes) in [(0, false), (1, true), (1000, true), (1001, false)] {
            let mut d = plain();
            d.capacitors[0].series = count;
            d.resistors[0].parallel = count;
            let expected: &[&str] =
                if passes { &[] } else { &["capacitors[0].units.series", "resistors[0].array.parallel"] };
            assert_eq!(problems(&d).into_iter().map(|(_, path)| path).collect::<Vec<_>>(), expected);
        }
    }

    #[test]
    fn a_capacitors_figures_are_checked() {
        let mut d = plain();
        d.capacitors[0].absorption = Some(1.0);
        assert_problem(&d, "absorption-out-of-range", "capacitors[0].absorption");
        d.capacitors[0].absorption = None;
        d.capacitors[0].dielectric = Some("polypropilene".into());
        assert_problem(&d, "unknown-dielectric", "capacitors[0].dielectric");
        d.capacitors[0].dielectric = Some("polypropylene".into());
        d.capacitors[0].rated = Some(volt(0.0));
        assert_problem(&d, "not-above-zero", "capacitors[0].rated");
        d.capacitors[0].rated = None;
        d.capacitors[0].value = Quantity::from_si(f64::NAN);
        assert_problem(&d, "bad-figure", "capacitors[0].value");
    }

    #[test]
    fn a_rating_derates_from_a_lower_to_a_higher_temperature() {
        let mut d = plain();
        d.resistors[0].rating.full_to = Some(Temperature::from_si(343.15));
        assert_eq!(problems(&d), []);
        d.resistors[0].rating.zero_at = Some(Temperature::from_si(343.15));
        assert_problem(&d, "derating-order", "resistors[0].rating.zero_at");
    }

    #[test]
    fn an_overload_is_more_than_the_continuous_power_and_lasts() {
        let mut d = plain();
        d.resistors[0].rating.overload = Some(Overload { times: 0.5, duration: Time::from_si(5.0) });
        assert_problem(&d, "bad-overload", "resistors[0].rating.overload.times");
        d.resistors[0].rating.overload = Some(Overload { times: 5.0, duration: Time::from_si(0.0) });
        assert_problem(&d, "not-above-zero", "resistors[0].rating.overload.for");
    }

    #[test]
    fn a_constant_power_cannot_run_down_to_zero_and_a_constant_current_can() {
        let sink =
            |draw| Draining { id: "K1".into(), draw, across: pair("P", "N"), stops_below: volt(0.0), counted: false };
        let mut d = plain();
        d.sinks.push(sink(Draw::ConstantCurrent(Current::from_si(0.04))));
        assert_eq!(problems(&d), []);
        d.sinks[0] = sink(Draw::ConstantPower(Power::from_si(4.0)));
        assert_problem(&d, "not-above-zero", "sinks[0].stops_below");
        d.sinks[0] = sink(Draw::ConstantCurrent(Current::from_si(0.0)));
        assert_problem(&d, "not-above-zero", "sinks[0].value");
    }

    #[test]
    fn a_supply_has_a_voltage() {
        let mut d = plain();
        d.supplies.push(Supply {
            id: "S1".into(),
            voltage: volt(0.0),
            series: Quantity::from_si(100.0),
            tolerance: None,
            array_series: 1,
            array_parallel: 1,
            across: pair("P", "N"),
            rating: Rating::default(),
        });
        assert_problem(&d, "not-above-zero", "supplies[0].voltage");
    }
}
