//! What elements bear of the discharges of a bleeder that a contact connects: peak, pulse, heat.
//!
//! Elements of an array are taken to share alike here, which is the least that the worst of them carries: what fails so
//! fails in any case, and the full plan of every design that is given counts their tolerances.

use crate::bank::stock::Element;
use crate::check::{body, derated};
use crate::discharge::Body;
use crate::quantity::{Quantity, Temperature};
use crate::size::arrays::clearly_over;
use crate::size::scan::ratio;

/// Thermal time constants that are followed at every resistance; elements with others are left to the plan.
const MOST_TIMES: usize = 12;

/// What a whole bleeder comes to in one discharge (the last of a row), in SI base units.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct Discharge {
    /// Greatest power in the array.
    pub peak: f64,
    /// Energy of one discharge and of the feeding that goes with it.
    pub energy: f64,
    /// For every time constant of [`Bearing::times`], the rise of a body of 1 K/W that takes up all of it, in K.
    pub heat: Vec<f64>,
}

/// What one element bears.
#[derive(Debug, Clone, PartialEq)]
struct Bears {
    /// Up to this power nothing is a pulse.
    steady: f64,
    pulse: f64,
    overload_power: f64,
    overload_energy: f64,
    /// Thermal resistance, the number of its time constant, and the rise that it bears.
    body: Option<(f64, usize, f64)>,
}

/// What the elements at hand bear in air of one temperature.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Bearing {
    elements: Vec<Bears>,
    /// Elements of the largest array.
    most: f64,
    times: Vec<f64>,
}

impl Bearing {
    pub fn of(elements: &[Element], most: u32, air: Temperature) -> Self {
        let mut times: Vec<f64> = Vec::new();
        let bears = |element: &Element| {
            let rating = &element.rating;
            let overload = rating.overload.zip(rating.power).map(|(o, p)| (o.times * p.si(), o.duration.si()));
            let number = body(rating).and_then(|Body { kelvin_per_watt, time_constant }| {
                let known = times.iter().position(|t| t.to_bits() == time_constant.to_bits());
                let number = known.or_else(|| {
                    times.push(time_constant);
                    (times.len() <= MOST_TIMES).then(|| times.len() - 1)
                })?;
                Some((kelvin_per_watt, number, rating.zero_at?.si() - air.si()))
            });
            Bears {
                steady: derated(rating, air).map_or(f64::NEG_INFINITY, Quantity::si),
                pulse: rating.pulse.map_or(f64::INFINITY, Quantity::si),
                overload_power: overload.map_or(f64::INFINITY, |(watt, _)| watt),
                overload_energy: overload.map_or(f64::INFINITY, |(watt, seconds)| watt * seconds),
                body: number,
            }
        };
        let elements = elements.iter().map(bears).collect();
        times.truncate(MOST_TIMES);
        Bearing { elements, most: f64::from(most), times }
    }

    /// Time constants in second for which the heat of a discharge is wanted.
    pub fn times(&self) -> &[f64] {
        &self.times
    }

    /// Found over allowed, of whatever the best of the elements bears least, for the largest array of it.
    pub fn ratio(&self, found: &Discharge) -> f64 {
        let of = |bears: &Bears| bears.all(found, self.most).into_iter().map(|(_, ratio)| ratio).fold(0.0, f64::max);
        self.elements.iter().map(of).fold(f64::INFINITY, f64::min)
    }

    /// What one of so many elements of this kind would clearly carry too much of.
    pub fn overloaded(&self, element: usize, found: &Discharge, count: u32) -> Option<&'static str> {
        let all = self.elements[element].all(found, f64::from(count));
        all.into_iter().find(|(_, ratio)| clearly_over(*ratio, 1.0)).map(|(of, _)| of)
    }
}

impl Bears {
    /// What is found over what is allowed, for one of `count` elements.
    fn all(&self, found: &Discharge, count: f64) -> Vec<(&'static str, f64)> {
        let mut all = Vec::with_capacity(4);
        // What an element bears continuously is no pulse, as in the plan.
        if found.peak / count > self.steady {
            all.push(("pulse energy", ratio(found.energy / count, self.pulse)));
            all.push(("peak power", ratio(found.peak / count, self.overload_power)));
            all.push(("overload energy", ratio(found.energy / count, self.overload_energy)));
        }
        if let Some((kelvin_per_watt, number, rise)) = self.body {
            let heat = found.heat.get(number).copied().unwrap_or(0.0);
            all.push(("heat", ratio(heat * kelvin_per_watt / count, rise)));
        }
        all
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bank::description::{Overload, Rating};
    use crate::bank::stock::Values;
    use crate::quantity::{Energy, Power, Resistance, Time};

    fn element(watt: f64, pulse: f64, time: f64) -> Element {
        let celsius = |t: f64| Temperature::from_si(t + 273.15);
        Element {
            name: String::new(),
            values: Values::One(Resistance::from_si(1e3)),
            tolerance: None,
            rating: Rating {
                power: Some(Power::from_si(watt)),
                full_to: Some(celsius(40.0)),
                zero_at: Some(celsius(240.0)),
                voltage: None,
                pulse: Some(Energy::from_si(pulse)),
                overload: Some(Overload { times: 10.0, duration: Time::from_si(5.0) }),
                thermal_time: Some(Time::from_si(time)),
            },
            mass: None,
            price: None,
        }
    }

    #[test]
    fn the_best_element_of_those_at_hand_decides_and_what_it_carries_steadily_is_no_pulse() {
        let elements = [element(10.0, 50.0, 60.0), element(20.0, 400.0, 90.0)];
        let bearing = Bearing::of(&elements, 4, Temperature::from_si(313.15));
        assert_eq!(bearing.times(), [60.0, 90.0]);
        let found = Discharge { peak: 400.0, energy: 800.0, heat: vec![4.0, 2.0] };
        // Of the second one: 800 / 4 of 400 J, 400 / 4 of 200 W, 200 of 1000 J, 2 * 10 / 4 of 200 K.
        assert!((bearing.ratio(&found) - 0.5).abs() < 1e-12);
        assert_eq!(bearing.overloaded(0, &found, 4), Some("pulse energy"));
        assert_eq!((bearing.overloaded(1, &found, 2), bearing.overloaded(1, &found, 1)), (None, Some("pulse energy")));
        // 36 W on four elements is 9 W, which each carries for ever.
        let slow = Discharge { peak: 36.0, energy: 1e6, heat: vec![4.0, 2.0] };
        assert_eq!(bearing.overloaded(0, &slow, 4), None);
        assert_eq!(bearing.overloaded(1, &Discharge { heat: vec![0.0, 81.0], ..slow }, 4), Some("heat"));
    }
}
