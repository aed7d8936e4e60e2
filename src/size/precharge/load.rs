//! What one element of an array would carry, as far as it is told without a plan: to leave out what can't do, and what
//! a shorted bank asks of it.

use super::charge::{Charge, Point};
use super::request::PrechargeAsk;
use super::result::Shorted;
use crate::bank::description::{Overload, Rating};
use crate::bank::stock::Element;
use crate::check::{body, derated};
use crate::quantity::{Power, Quantity, Temperature, Time};
use crate::size::arrays::{Design, clearly_over, element_load};
use crate::size::scan::Scan;

/// An element whose rating says nothing of a pulse.
pub(super) const NO_PULSE_RATING: &str = "want of a pulse or overload rating";

/// How far figures between the resistances that were looked at can be off.
const SLACK: f64 = 0.05;

/// What one element of a design would clearly carry too much of.
pub(super) fn overload(
    charge: &Charge,
    scan: &Scan<'_, Charge>,
    ask: &PrechargeAsk,
    ambient: Temperature,
    design: &Design,
    element: &Element,
) -> Option<&'static str> {
    if design.lowest < charge.least {
        return Some("far less resistance than is of use");
    }
    let ends = [between(scan, design.lowest), between(scan, design.highest)];
    let volts = ends.iter().map(|p| (p.power * p.resistance()).sqrt()).fold(0.0, f64::max) * (1.0 - SLACK);
    let joule = ends.iter().map(|p| p.energy).fold(f64::INFINITY, f64::min) * (1.0 - SLACK) / f64::from(design.count());
    let rating = &element.rating;
    let (watt, volt) = element_load(design, element.tolerance, volts);
    let used = 1.0 - ask.build.margin;
    if rating.voltage.is_some_and(|most| clearly_over(volt, most.si())) {
        return Some("voltage");
    }
    if derated(rating, ambient).is_none_or(|allowed| clearly_over(watt, allowed.si())) {
        if !ask.unrated_pulse && rating.pulse.is_none() && rating.overload.is_none() {
            return Some(NO_PULSE_RATING);
        }
        if rating.pulse.is_some_and(|most| clearly_over(joule, most.si() * used)) {
            return Some("pulse energy");
        }
        if let Some((Overload { times, duration }, power)) = rating.overload.zip(rating.power) {
            let most = times * power.si() * used;
            if clearly_over(watt, most) {
                return Some("overload power");
            }
            if clearly_over(joule, most * duration.si()) {
                return Some("overload energy");
            }
        }
    }
    too_hot(rating, ask, ambient, joule).then_some("heat")
}

/// True where the body is clearly too hot at the end of the last charge: all energy of a charge is in it by then, less
/// what it can have lost since the charge began.
fn too_hot(rating: &Rating, ask: &PrechargeAsk, ambient: Temperature, joule: f64) -> bool {
    let Some((body, most)) = body(rating).zip(rating.zero_at) else { return false };
    let tau = body.time_constant;
    let (runs, every) = ask.attempts.map_or((1, 0.0), |a| (a.count, a.every.si()));
    let kept = (-ask.within.si() / tau).exp();
    let runs = if runs > 1 { (-every * f64::from(runs) / tau).exp_m1() / (-every / tau).exp_m1() } else { 1.0 };
    let rise = joule * body.kelvin_per_watt / tau * kept * runs;
    clearly_over(rise, (most.si() - ambient.si()).max(0.0) * (1.0 - ask.build.margin))
}

impl Point {
    /// The resistance at which this was found: that of its power and its current.
    fn resistance(&self) -> f64 {
        if self.current > 0.0 { self.power / (self.current * self.current) } else { 0.0 }
    }
}

/// What is found at a resistance, between the two that were looked at on either side.
fn between(scan: &Scan<'_, Charge>, ohms: f64) -> Point {
    let points = scan.points();
    let after = points.partition_point(|(at, _)| *at < ohms).clamp(1, points.len().max(2) - 1);
    let (Some((low, a)), Some((high, b))) = (points.get(after - 1), points.get(after)) else { return Point::default() };
    let share = (ohms / low).ln() / (high / low).ln();
    let mix = |x: f64, y: f64| if x > 0.0 && y > 0.0 { x * (y / x).powf(share) } else { x.min(y) };
    Point {
        seconds: mix(a.seconds, b.seconds),
        short: mix(a.short, b.short),
        settles_short: mix(a.settles_short, b.settles_short),
        current: mix(a.current, b.current),
        power: mix(a.power, b.power),
        energy: mix(a.energy, b.energy),
    }
}

/// A shorted bank leaves all of the supply's `volts` across the array: V^2/R, and in the body
/// theta = R_th P (1 - exp(-t/tau)) from the air's temperature, which is at `zero_at` after
/// -tau ln(1 - (zero_at - air) / (R_th P)).
pub(super) fn shorted(design: &Design, element: &Element, volts: f64, ambient: Temperature) -> Shorted {
    let (watt, _) = element_load(design, element.tolerance, volts);
    let thermal = body(&element.rating).zip(element.rating.zero_at);
    let seconds = thermal.and_then(|(body, most)| {
        let share = (most.si() - ambient.si()).max(0.0) / (body.kelvin_per_watt * watt);
        (share < 1.0).then(|| -body.time_constant * (-share).ln_1p())
    });
    Shorted {
        power: Power::from_si(volts * volts / design.lowest),
        element_power: Power::from_si(watt),
        checked: thermal.is_some(),
        too_hot_after: seconds.map(Time::from_si),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bank::stock::Values;
    use crate::quantity::{CELSIUS_ZERO_K, Resistance};

    fn element(zero_at: f64) -> Element {
        let celsius = |t: f64| Some(Temperature::from_si(t + CELSIUS_ZERO_K));
        let rating = Rating {
            power: Some(Power::from_si(10.0)),
            full_to: celsius(40.0),
            zero_at: celsius(zero_at),
            thermal_time: Some(Time::from_si(60.0)),
            ..Rating::default()
        };
        Element {
            name: "invented".into(),
            values: Values::One(Resistance::from_si(100.0)),
            tolerance: None,
            rating,
            mass: None,
            price: None,
        }
    }

    #[test]
    fn a_shorted_bank_heats_an_element_by_the_closed_form() {
        // Two of 100 ohm in series on 400 V: 200 V each, 400 W. R_th = (240 - 40)/10 = 20 K/W, so 8000 K in the end; from
        // 40 °C to 240 °C is 200 K, a fortieth.
        let design =
            Design { element: 0, value: 100.0, series: 2, parallel: 1, lowest: 200.0, highest: 200.0, pareto: false };
        let air = Temperature::from_si(40.0 + CELSIUS_ZERO_K);
        let found = shorted(&design, &element(240.0), 400.0, air);
        approx::assert_relative_eq!(found.power.si(), 800.0, max_relative = 1e-12);
        approx::assert_relative_eq!(found.element_power.si(), 400.0, max_relative = 1e-12);
        let by_hand = -60.0 * (1.0f64 - 1.0 / 40.0).ln();
        approx::assert_relative_eq!(found.too_hot_after.expect("it comes").si(), by_hand, max_relative = 1e-12);
        // 10 W in each is what 40 °C allows: the end is only approached, and that is told as never.
        let found = shorted(&design, &element(240.0), 2.0 * 1000f64.sqrt(), air);
        assert!(found.checked && found.too_hot_after.is_none_or(|t| t.si() > 600.0), "{found:?}");
        let found = shorted(&design, &element(240.0), 60.0, air);
        assert!(found.checked && found.too_hot_after.is_none());
        let unknown = Element { rating: Rating::default(), ..element(240.0) };
        assert!(!shorted(&design, &unknown, 400.0, air).checked);
    }
}
