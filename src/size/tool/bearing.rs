//! What elements bear of a discharge: at every actual resistance, and one element of a design.
//!
//! The same checks as in a plan's step through the tool (`check::resistors`), on figures between the resistances that
//! the engine was asked at. They set aside what is CLEARLY over; the plan of a design decides with every digit.

use super::probe::Point;
use crate::bank::description::Rating;
use crate::bank::stock::Element;
use crate::check::{body, derated};
use crate::quantity::{Quantity, Temperature, Tolerance};
use crate::size::arrays::Design;
use crate::size::scan::ratio;

/// Figures between the points lie this close to the engine's.
const SLACK: f64 = 0.02;

/// So many thermal times are followed at most; bodies in between are interpolated.
const MOST_TAUS: usize = 8;

/// Why an array is set aside.
pub(super) const HEAT: &str = "heat";
pub(super) const UNRATED: &str = "heat that its rating tells nothing of";

/// What surrounds an element.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Bearing {
    pub ambient: Temperature,
    /// Share of what the rating allows that stays unused.
    pub margin: f64,
    /// Discharges in a row that were asked for, and how far apart in second.
    pub row: Option<f64>,
    /// Thermal times in second at which the points were found, rising.
    pub taus: Vec<f64>,
}

/// What one element meets, in SI base units.
#[derive(Debug, Clone, Copy, Default)]
struct Met {
    voltage: f64,
    power: f64,
    energy: f64,
    rise: f64,
    rise_in_a_row: f64,
}

/// The thermal times of these elements, or some between the shortest and the longest.
pub(super) fn taus(elements: &[Element]) -> Vec<f64> {
    let mut all: Vec<f64> = elements.iter().filter_map(|e| body(&e.rating)).map(|b| b.time_constant).collect();
    all.sort_by(f64::total_cmp);
    all.dedup();
    match all[..] {
        [least, .., most] if all.len() > MOST_TAUS => {
            let step = (most / least).ln() / (MOST_TAUS - 1) as f64;
            (0..MOST_TAUS).map(|k| least * (step * k as f64).exp()).collect()
        }
        _ => all,
    }
}

impl Bearing {
    /// What is found over what is allowed, the worst of all checks, with its name; infinite where no check tells
    /// anything of a pulse.
    fn worst(&self, rating: &Rating, met: &Met) -> (f64, &'static str) {
        let allowed = derated(rating, self.ambient).map(Quantity::si);
        let used = 1.0 - self.margin;
        let mut checks = Vec::new();
        if let Some(most) = rating.voltage {
            checks.push((ratio(met.voltage, most.si()), "voltage"));
        }
        let thermal = body(rating).zip(rating.zero_at);
        if let Some((body, zero_at)) = thermal {
            let most = (zero_at.si() - self.ambient.si()) * used;
            let rise = if self.row.is_some() { met.rise_in_a_row.max(met.rise) } else { met.rise };
            checks.push((ratio(rise * body.kelvin_per_watt, most), HEAT));
        }
        if allowed.is_none_or(|most| met.power > most) {
            let overload = rating.overload.zip(rating.power);
            if let Some(pulse) = rating.pulse {
                checks.push((ratio(met.energy, pulse.si() * used), "pulse energy"));
            }
            if let Some((overload, power)) = overload {
                let most = overload.times * power.si() * used;
                checks.push((ratio(met.power, most), "overload"));
                checks.push((ratio(met.energy, most * overload.duration.si()), "overload"));
            }
            if rating.pulse.is_none() && overload.is_none() && thermal.is_none() {
                checks.push((f64::INFINITY, UNRATED));
            }
        }
        if let (Some(every), None) = (self.row, thermal) {
            match allowed {
                Some(most) => checks.push((ratio(met.energy / every, most * used), "average power")),
                None => checks.push((f64::INFINITY, UNRATED)),
            }
        }
        checks.into_iter().fold((0.0, ""), |worst, check| if check.0 > worst.0 { check } else { worst })
    }

    /// Found over allowed for the largest arrays of the elements at hand, shared evenly; of the element that bears most.
    pub fn largest(&self, elements: &[Element], series: u32, parallel: u32, point: &Point) -> f64 {
        let count = f64::from(series * parallel);
        let power = if point.ohms.is_finite() { point.voltage.powi(2) / point.ohms } else { 0.0 };
        let one = |e: &Element| {
            let rise = |rises: &[f64]| body(&e.rating).map_or(0.0, |b| self.at_tau(rises, b.time_constant)) / count;
            let met = Met {
                voltage: point.voltage / f64::from(series),
                power: power / count,
                energy: point.energy / count,
                rise: rise(&point.rises),
                rise_in_a_row: rise(&point.rises_in_a_row),
            };
            self.worst(&e.rating, &met).0
        };
        elements.iter().map(one).fold(f64::INFINITY, f64::min)
    }

    /// What one element of a design would clearly carry too much of.
    pub fn overload(&self, design: &Design, element: &Element, points: &[Point]) -> Option<&'static str> {
        let met = self.met(design, element, points);
        let (over, of) = self.worst(&element.rating, &met);
        (over > 1.0 + SLACK).then_some(of)
    }

    /// The greatest figures of one element: it, the others of its string, and the other strings at either end of the
    /// tolerance.
    fn met(&self, design: &Design, element: &Element, points: &[Point]) -> Met {
        let tolerance = element.tolerance.unwrap_or(Tolerance::NONE);
        let ends = [design.value * tolerance.lowest_factor(), design.value * tolerance.highest_factor()];
        let (series, parallel) = (f64::from(design.series), f64::from(design.parallel));
        let tau = body(&element.rating).map(|b| b.time_constant);
        let mut most = Met::default();
        for own in ends {
            for rest in ends.into_iter().take(if design.series > 1 { 2 } else { 1 }) {
                for others in ends.into_iter().take(if design.parallel > 1 { 2 } else { 1 }) {
                    let string = own + rest * (series - 1.0);
                    let ohms = (string.recip() + (parallel - 1.0) / (others * series)).recip();
                    let share = own * ohms / (string * string);
                    let voltage = between(points, ohms, |p| p.voltage);
                    most.voltage = most.voltage.max(voltage * own / string);
                    most.power = most.power.max(voltage * voltage / ohms * share);
                    most.energy = most.energy.max(between(points, ohms, |p| p.energy) * share);
                    if let Some(tau) = tau {
                        let rise = between(points, ohms, |p| self.at_tau(&p.rises, tau)) * share;
                        let in_a_row = between(points, ohms, |p| self.at_tau(&p.rises_in_a_row, tau)) * share;
                        most.rise = most.rise.max(rise);
                        most.rise_in_a_row = most.rise_in_a_row.max(in_a_row);
                    }
                }
            }
        }
        most
    }

    /// A rise at a thermal time, between those that were followed.
    fn at_tau(&self, rises: &[f64], tau: f64) -> f64 {
        let after = self.taus.partition_point(|t| *t < tau);
        let at = |index: usize| Some((*self.taus.get(index)?, *rises.get(index)?));
        line(after.checked_sub(1).and_then(at), at(after), tau)
    }
}

/// A figure at a resistance, between the points that were looked at.
fn between(points: &[Point], ohms: f64, figure: impl Fn(&Point) -> f64) -> f64 {
    let after = points.partition_point(|p| p.ohms < ohms);
    let at = |p: &Point| (p.ohms, figure(p));
    line(after.checked_sub(1).and_then(|i| points.get(i)).map(at), points.get(after).map(at), ohms)
}

/// A straight line on logarithms through two points; the one that there is beyond the ends.
fn line(left: Option<(f64, f64)>, right: Option<(f64, f64)>, x: f64) -> f64 {
    match (left, right) {
        (Some((low, a)), Some((high, b))) if a > 0.0 && b > 0.0 && high > low => {
            let share = (x / low).ln() / (high / low).ln();
            (a.ln() + share * (b / a).ln()).exp()
        }
        (Some((_, a)), Some((_, b))) => a.min(b),
        (one, other) => one.or(other).map_or(0.0, |(_, y)| y),
    }
}
