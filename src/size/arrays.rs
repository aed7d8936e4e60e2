//! Arrays of elements inside the window: which there are, which bear their load, and their order.

use super::build::{Build, Rank};
use super::spans::Spans;
use crate::bank::description::{Rating, Resistor};
use crate::bank::stock::{Element, Values};
use crate::check::derated;
use crate::data::Series;
use crate::quantity::{Quantity, Resistance, Temperature, Tolerance};
use std::collections::BTreeMap;

/// An array of identical elements.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Design {
    /// The element of the list.
    pub element: usize,
    /// Ohm, one element.
    pub value: f64,
    pub series: u32,
    pub parallel: u32,
    /// The whole array at the ends of its tolerance, in ohm.
    pub lowest: f64,
    pub highest: f64,
    /// True where no other design is at least as good in element count, loss and wait, and better in one.
    pub pareto: bool,
}

impl Design {
    pub fn count(&self) -> u32 {
        self.series * self.parallel
    }

    /// The resistor of a bank, at a place.
    pub fn resistor(&self, build: &Build, place: &Resistor) -> Resistor {
        let element = &build.elements[self.element];
        Resistor {
            value: Resistance::from_si(self.value),
            tolerance: element.tolerance,
            series: self.series,
            parallel: self.parallel,
            rating: element.rating,
            ..place.clone()
        }
    }
}

/// Designs in order, and how many were set aside for what.
#[derive(Debug, Clone, Default, PartialEq)]
pub(super) struct Listed {
    pub designs: Vec<Design>,
    /// Arrays with a value inside the window.
    pub inside: usize,
    /// Of these, how many would carry too much of what.
    pub set_aside: BTreeMap<&'static str, usize>,
}

/// Greatest power and voltage of one element of an array with `volts` across it. One element lies at one end of the
/// tolerance and the others of its string lowest: the power of the odd one out is greatest where it equals the rest of
/// the string together, as near as its tolerance lets it come; its voltage where it is highest.
pub(super) fn element_load(design: &Design, tolerance: Option<Tolerance>, volts: f64) -> (f64, f64) {
    let tolerance = tolerance.unwrap_or(Tolerance::NONE);
    let (low, high) = (design.value * tolerance.lowest_factor(), design.value * tolerance.highest_factor());
    let rest = low * f64::from(design.series - 1);
    let odd = rest.clamp(low, high);
    (odd * (volts / (odd + rest)).powi(2), volts * high / (high + rest))
}

/// Power that a rating allows at an ambient with a margin kept; infinite where the rating does not say.
pub(super) fn usable_power(rating: &Rating, ambient: Temperature, margin: f64) -> f64 {
    derated(rating, ambient).map_or(f64::INFINITY, |allowed| allowed.si() * (1.0 - margin))
}

/// All designs of `build`, best first. `window` gives the spans for a number of strings; `overload` names what one
/// element of a design would carry too much of. The plan decides with every digit: only what is CLEARLY over is to be
/// named, so that nothing is left out that would do.
pub(super) fn listed(
    build: &Build,
    window: impl Fn(u32) -> Spans,
    overload: impl Fn(&Design, &Element) -> Option<&'static str>,
) -> Listed {
    let mut found = Listed::default();
    for parallel in 1..=build.parallel_up_to {
        let spans = window(parallel);
        for series in 1..=build.series_up_to {
            for (index, element) in build.elements.iter().enumerate() {
                for value in values(element, &spans, series, parallel) {
                    let whole = value * f64::from(series) / f64::from(parallel);
                    let (low, high) = factors(element.tolerance);
                    let (lowest, highest) = (whole * low, whole * high);
                    let design = Design { element: index, value, series, parallel, lowest, highest, pareto: false };
                    found.inside += 1;
                    match overload(&design, element) {
                        Some(of) => *found.set_aside.entry(of).or_default() += 1,
                        None => found.designs.push(design),
                    }
                }
            }
        }
    }
    mark_pareto(&mut found.designs);
    if build.pareto_only {
        found.designs.retain(|d| d.pareto);
    }
    order(&mut found.designs, build);
    found
}

/// Does what is found clearly exceed what is allowed?
pub(super) fn clearly_over(found: f64, allowed: f64) -> bool {
    found > allowed * (1.0 + 1e-9)
}

fn factors(tolerance: Option<Tolerance>) -> (f64, f64) {
    tolerance.map_or((1.0, 1.0), |t| (t.lowest_factor(), t.highest_factor()))
}

/// Values in ohm of an element with which its array lies inside one of the spans at both ends of its tolerance.
fn values(element: &Element, spans: &Spans, series: u32, parallel: u32) -> Vec<f64> {
    let (low, high) = factors(element.tolerance);
    let of_array = f64::from(parallel) / f64::from(series);
    let mut found = Vec::new();
    for span in spans.as_slice() {
        let (least, greatest) = (span.low / low * of_array, span.high / high * of_array);
        match element.values {
            Values::One(value) => found.extend(Some(value.si()).filter(|v| *v >= least && *v <= greatest)),
            Values::Preferred { series, from, to } => {
                let (least, greatest) = (least.max(from.si()), greatest.min(to.si()));
                found.extend(preferred(series, least, greatest));
            }
        }
    }
    found
}

fn preferred(series: Series, least: f64, greatest: f64) -> Vec<f64> {
    let ohm = Resistance::from_si;
    series.between(ohm(least), ohm(greatest)).iter().map(|r| r.si()).collect()
}

/// Puts designs in the order of the rank; what is alike in it is told apart by the other figures, at last by the order
/// of the list, so that one input always gives one order.
fn order(designs: &mut [Design], build: &Build) {
    let per_array = |each: Option<f64>, d: &Design| each.map_or(f64::INFINITY, |each| each * f64::from(d.count()));
    let price = |d: &Design| per_array(build.elements[d.element].price, d);
    let mass = |d: &Design| per_array(build.elements[d.element].mass.map(Quantity::si), d);
    let power = |d: &Design| build.elements[d.element].rating.power.map_or(f64::INFINITY, Quantity::si);
    designs.sort_by(|x, y| {
        let count = x.count().cmp(&y.count());
        let loss = y.lowest.total_cmp(&x.lowest);
        let wait = x.highest.total_cmp(&y.highest);
        let rank = match build.rank {
            Rank::Elements => count.then(loss).then(wait),
            Rank::Loss => loss.then(count).then(wait),
            Rank::Wait => wait.then(count).then(loss),
            Rank::Price => price(x).total_cmp(&price(y)).then(count).then(loss).then(wait),
            Rank::Mass => mass(x).total_cmp(&mass(y)).then(count).then(loss).then(wait),
        };
        let alike = price(x).total_cmp(&price(y)).then(power(x).total_cmp(&power(y)));
        rank.then(alike).then(x.element.cmp(&y.element)).then(x.series.cmp(&y.series))
    });
}

/// Marks designs of which none other has at most as many elements, at most as much loss and at most as long a wait,
/// and less of one. The loss falls with the array's lowest resistance and the wait grows with its highest.
fn mark_pareto(designs: &mut [Design]) {
    let mut order: Vec<usize> = (0..designs.len()).collect();
    order.sort_by(|x, y| {
        let (x, y) = (&designs[*x], &designs[*y]);
        x.count().cmp(&y.count()).then(x.highest.total_cmp(&y.highest)).then(y.lowest.total_cmp(&x.lowest))
    });
    // Of designs with no more elements: by highest resistance (its bits, which order positive numbers), the greatest
    // lowest resistance up to there; both rise.
    let mut stairs: BTreeMap<u64, (f64, u32)> = BTreeMap::new();
    for index in order {
        let Design { lowest, highest, .. } = designs[index];
        let count = designs[index].count();
        let below = stairs.range(..=highest.to_bits()).next_back().map(|(bits, step)| (f64::from_bits(*bits), *step));
        let beaten = below.is_some_and(|(high, (low, fewer))| {
            let better = fewer < count || high < highest;
            low > lowest || (low >= lowest && better)
        });
        designs[index].pareto = !beaten;
        if below.is_none_or(|(_, (low, _))| lowest > low) {
            let passed: Vec<u64> = stairs
                .range(highest.to_bits()..)
                .take_while(|(_, (low, _))| *low <= lowest)
                .map(|(bits, _)| *bits)
                .collect();
            passed.iter().for_each(|bits| {
                stairs.remove(bits);
            });
            stairs.insert(highest.to_bits(), (lowest, count));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::Ratio;

    fn design(count: u32, lowest: f64, highest: f64) -> Design {
        Design { element: 0, value: 1.0, series: count, parallel: 1, lowest, highest, pareto: false }
    }

    #[test]
    fn the_pareto_set_is_that_of_comparing_every_pair() {
        // A fixed sequence (xorshift) of small whole numbers, so that ties are many.
        let mut state = 7u64;
        let mut next = |below: u64| {
            state ^= state << 13;
            state ^= state >> 7;
            state ^= state << 17;
            state % below
        };
        for _ in 0..50 {
            let mut designs: Vec<Design> = (0..40)
                .map(|_| {
                    let low = 1.0 + next(6) as f64;
                    design(1 + next(4) as u32, low, low + next(4) as f64)
                })
                .collect();
            mark_pareto(&mut designs);
            for x in &designs {
                let beats = |y: &&Design| {
                    let good = y.count() <= x.count() && y.lowest >= x.lowest && y.highest <= x.highest;
                    good && (y.count() < x.count() || y.lowest > x.lowest || y.highest < x.highest)
                };
                assert_eq!(x.pareto, !designs.iter().any(|y| beats(&y)), "{x:?} among {designs:?}");
            }
        }
    }

    #[test]
    fn the_load_of_one_element_is_the_greatest_of_all_corners() {
        let tolerance = Tolerance::new(Ratio::from_si(0.1), Ratio::from_si(0.1)).ok();
        for series in 1..=5u32 {
            let d = Design { value: 100.0, ..design(series, 0.0, 0.0) };
            let (watt, volt) = element_load(&d, tolerance, 300.0);
            let corners = (0..1u32 << series).map(|mask| {
                let ohm = |k: u32| if mask >> k & 1 == 1 { 110.0 } else { 90.0 };
                let amp = 300.0 / (0..series).map(ohm).sum::<f64>();
                (amp * amp * ohm(0), amp * ohm(0))
            });
            let (most_watt, most_volt) = corners.fold((0.0f64, 0.0f64), |m, c| (m.0.max(c.0), m.1.max(c.1)));
            assert!((watt / most_watt - 1.0).abs() < 1e-12 && (volt / most_volt - 1.0).abs() < 1e-12, "{series}");
        }
    }
}
