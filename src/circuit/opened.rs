//! A network in which a resistor opens at some moment after isolation: the worst moment.
//!
//! Up to the moment s the network runs with the resistor, from then on without it. Both are linear, so the voltage
//! between two points at the time s + x is
//!
//! ```text
//! w(s, x) = c(s) + sum of A_k(s) exp(-mu_k x)
//! ```
//!
//! with the rates mu_k of the opened network, and c and every A_k sums of exponentials in s. Asked for is the greatest
//! s + x at which |w| is over a level. Intervals of s are discarded whose bound does not pass the best moment found:
//! at a fixed time T = s + x the mean value theorem bounds w over the interval by its value in the middle and its
//! slope in s, and that bound is a sum of exponentials in x again, whose last crossing is found as any other's. The
//! error of the bound is of second order in the interval's width, so a smooth maximum closes in few steps.

use super::crossing::Bounds;
use super::{CircuitError, ExpSum, LastExit, Modes, Response};
use std::sync::Arc;

/// The greatest figure over all moments, and the moment in second.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct AtMoment {
    /// A time in second (infinite for never), or a voltage in volt.
    pub value: f64,
    /// When the resistor opens.
    pub opens: f64,
}

/// A voltage by the moment at which the network changes and the time from then on.
#[derive(Debug, Clone)]
pub struct Opened {
    settles: ExpSum,
    /// Amplitude by moment, rate.
    terms: Vec<(ExpSum, f64)>,
}

/// The worst moment is closed in to this share of the time found.
const CLOSE: f64 = 1e-10;

/// More intervals than this are not needed by any bank tried; a search that needs them is not certified.
const MOST_INTERVALS: usize = 20_000;

impl Opened {
    /// The voltage of `a` against `b`: `with` runs until the moment, `without` from then on. Both have the same
    /// nodes and capacitors and no sources.
    ///
    /// # Errors
    /// [`CircuitError::Contradiction`] where voltages around a loop of capacitors don't agree.
    pub fn new(with: &Response, without: &Arc<Modes>, a: usize, b: usize) -> Result<Self, CircuitError> {
        let rates = without.rates.clone();
        let mut settles = (0.0, Vec::new());
        let mut terms: Vec<(f64, Vec<(f64, f64)>)> = vec![(0.0, Vec::new()); rates.len()];
        for part in with.parts_by_mode() {
            let response = without.response(&part.voltages, &part.potentials)?;
            let (constant, amplitudes) = response.amplitudes_across(a, b);
            let add = |to: &mut (f64, Vec<(f64, f64)>), x: f64| match part.rate {
                Some(rate) => to.1.push((x, rate)),
                None => to.0 += x,
            };
            add(&mut settles, constant);
            terms.iter_mut().zip(amplitudes).for_each(|(to, x)| add(to, x));
        }
        let sum = |(constant, terms): (f64, Vec<(f64, f64)>)| ExpSum::new(constant, terms);
        Ok(Opened { settles: sum(settles), terms: terms.into_iter().map(sum).zip(rates).collect() })
    }

    /// The voltage from the moment `opens` on.
    pub fn after(&self, opens: f64) -> ExpSum {
        ExpSum::new(self.settles.value(opens), self.terms.iter().map(|(a, rate)| (a.value(opens), *rate)))
    }

    /// The greatest voltage that it can settle at.
    ///
    /// # Errors
    /// [`CircuitError::SearchNotClosed`] where the search does not close.
    pub fn settles(&self) -> Result<AtMoment, CircuitError> {
        let (value, opens) = self.settles.greatest_magnitude()?;
        Ok(AtMoment { value, opens })
    }

    /// The last time from isolation at which the voltage is over `level`, whenever the resistor opens; `known` is such
    /// a time that is known already (with the moment it belongs to) and comes back where no moment is worse.
    ///
    /// # Errors
    /// [`CircuitError::SearchNotClosed`] where the search does not close.
    pub fn last_outside(&self, level: f64, known: AtMoment) -> Result<AtMoment, CircuitError> {
        let mut best = known;
        if best.value.is_infinite() {
            return Ok(best);
        }
        let settles = self.settles()?;
        if let LastExit::Never = self.after(settles.opens).last_outside(level, 0.0)? {
            return Ok(AtMoment { value: f64::INFINITY, opens: settles.opens });
        }
        self.offer(level, 0.0, &mut best)?;
        let Some(horizon) = self.horizon(level, best.value) else { return Err(CircuitError::SearchNotClosed) };
        let mut open = vec![(0.0, horizon)];
        for _ in 0..MOST_INTERVALS {
            let Some((low, high)) = open.pop() else { return Ok(best) };
            let enough = best.value * (1.0 + CLOSE);
            if !self.may_be_outside(level, low, high)? || self.bound(level, low, high, best.value)? <= enough {
                continue;
            }
            let middle = if high > 8.0 * low && low > 0.0 { (low * high).sqrt() } else { 0.5 * (low + high) };
            self.offer(level, middle, &mut best)?;
            if best.value.is_infinite() {
                return Ok(best);
            }
            if high - low <= 1e-13 * high {
                continue;
            }
            // The later half first: a time counts from isolation.
            open.push((low, middle));
            open.push((middle, high));
        }
        Err(CircuitError::SearchNotClosed)
    }

    fn offer(&self, level: f64, opens: f64, best: &mut AtMoment) -> Result<(), CircuitError> {
        let from = (best.value - opens).max(0.0);
        let exit = self.after(opens).last_outside(level, from)?.seconds();
        if exit > from && opens + exit > best.value {
            *best = AtMoment { value: opens + exit, opens };
        }
        Ok(())
    }

    /// A moment past which opening leaves nothing over `level`: every amplitude has fallen too far.
    fn horizon(&self, level: f64, first: f64) -> Option<f64> {
        let slowest = self.settles.terms().iter().chain(self.terms.iter().flat_map(|(a, _)| a.terms()));
        let slowest = slowest.map(|(_, rate)| *rate).fold(f64::INFINITY, f64::min);
        let mut at = if first > 0.0 { first } else { slowest.recip() };
        if !at.is_finite() {
            return Some(0.0);
        }
        for _ in 0..200 {
            let left: f64 = self.terms.iter().map(|(a, _)| a.after(at).envelope(f64::INFINITY)).sum();
            if self.settles.after(at).envelope(f64::INFINITY) + left <= level {
                return Some(at);
            }
            at *= 1.5;
        }
        None
    }

    /// False where no moment between `low` and `high` is followed by any time over `level`.
    fn may_be_outside(&self, level: f64, low: f64, high: f64) -> Result<bool, CircuitError> {
        let bounds: Vec<(Bounds, f64)> = self.terms.iter().map(|(a, rate)| (Bounds::of(a, low, high), *rate)).collect();
        let settles = Bounds::of(&self.settles, low, high);
        let most = ExpSum::new(settles.greatest, bounds.iter().map(|(b, rate)| (b.greatest, *rate)));
        let least = ExpSum::new(settles.least, bounds.iter().map(|(b, rate)| (b.least, *rate)));
        for course in [most, least] {
            if course.value(0.0).abs() > level || course.last_outside(level, 0.0)?.seconds() > 0.0 {
                return Ok(true);
            }
        }
        Ok(false)
    }

    /// A bound for the last time over `level` when the resistor opens between `low` and `high`; `known` need not be
    /// told apart from what is below it.
    fn bound(&self, level: f64, low: f64, high: f64, known: f64) -> Result<f64, CircuitError> {
        let (middle, half) = (0.5 * (low + high), 0.5 * (high - low));
        // Sums in the time past `high`: the voltage for the middle moment, and the greatest and least slope in s.
        let mut value = Vec::with_capacity(self.terms.len());
        let mut steepest = (Vec::with_capacity(self.terms.len()), Vec::with_capacity(self.terms.len()));
        for (amplitude, rate) in &self.terms {
            value.push((amplitude.value(middle) * (-rate * half).exp(), *rate));
            // At a fixed time a later moment leaves less time to decay: d/ds (A exp(mu s)) = (A' + mu A) exp(mu s).
            let slope = ExpSum::new(
                rate * amplitude.constant(),
                amplitude.terms().iter().map(|(a, own)| (a * (rate - own), *own)),
            );
            let bounds = Bounds::of(&slope, low, high);
            let left = (-2.0 * rate * half).exp();
            steepest.0.push((bounds.greatest.max(bounds.greatest * left), *rate));
            steepest.1.push((bounds.least.min(bounds.least * left), *rate));
        }
        let drift = ExpSum::new(0.0, self.settles.terms().iter().map(|(a, own)| (-a * own, *own)));
        let drift = Bounds::of(&drift, low, high);
        let value = ExpSum::new(self.settles.value(middle), value);
        let mut latest: f64 = 0.0;
        for (slope, constant) in [(steepest.0, drift.greatest), (steepest.1, drift.least)] {
            let slope = ExpSum::new(constant, slope);
            for sign in [half, -half] {
                // What is not later than `known` need not be found.
                let from = latest.max(known - high);
                let from = from.max(0.0);
                let exit = value.plus(&slope.times(sign)).last_outside(level, from)?.seconds();
                latest = latest.max(if exit > from { exit } else { 0.0 });
            }
        }
        Ok(if latest > 0.0 { high + latest } else { high.max(known) })
    }
}

#[cfg(test)]
mod tests {
    use super::super::{Edge, Network};
    use super::*;

    fn edge(a: usize, b: usize, value: f64) -> Edge {
        Edge { a, b, value }
    }

    /// C1 charged, C2 empty behind a series resistor, a bleeder on C2: the resistor lends C2 its charge.
    fn lending() -> (Response, Arc<Modes>) {
        let capacitors = vec![edge(1, 0, 100e-6), edge(2, 0, 47e-6)];
        let bleeder = edge(2, 0, 220e3);
        let with = Network {
            nodes: 3,
            resistors: vec![edge(1, 2, 10e3), bleeder],
            capacitors: capacitors.clone(),
            ..Network::default()
        };
        let without = Network { resistors: vec![bleeder], ..with.clone() };
        let modes = |network| Arc::new(Modes::new(network).expect("rates"));
        let response = modes(with).response(&[600.0, 0.0], &[0.0, 600.0, 0.0]).expect("agrees");
        (response, modes(without))
    }

    #[test]
    fn opening_at_the_worst_moment_leaves_the_longest_wait_of_a_section_that_was_lent_charge() {
        let (with, without) = lending();
        let opened = Opened::new(&with, &without, 2, 0).expect("agrees");
        let healthy = with.across(2, 0).last_outside(50.0, 0.0).expect("closes").seconds();
        let found = opened.last_outside(50.0, AtMoment { value: 0.0, opens: 0.0 }).expect("closes");
        // By hand: opened at s, C2 falls alone from v2(s) with tau = 220k 47u; T = s + tau ln(v2(s)/50).
        let v2 = with.across(2, 0);
        let tau = 220e3 * 47e-6;
        let by_hand = |s: f64| if v2.value(s) > 50.0 { s + tau * (v2.value(s) / 50.0).ln() } else { 0.0 };
        let scanned = (0..400_000).map(|k| by_hand(1e-4 * f64::from(k))).fold(0.0, f64::max);
        assert!(found.value >= scanned * (1.0 - 1e-12), "{found:?}, scanned {scanned}");
        assert!(found.value <= scanned.max(healthy) * (1.0 + 1e-8), "{found:?}, scanned {scanned}, healthy {healthy}");
        let peak = v2.greatest_magnitude().expect("closes").1;
        assert!(found.value > by_hand(peak) && by_hand(peak) > by_hand(0.0), "at the peak {}", by_hand(peak));
    }

    #[test]
    fn a_section_that_is_stranded_keeps_its_greatest_voltage_for_ever() {
        let (with, _) = lending();
        let without = Network { resistors: vec![], ..with.network().clone() };
        let without = Arc::new(Modes::new(without).expect("rates"));
        let opened = Opened::new(&with, &without, 2, 0).expect("agrees");
        let settles = opened.settles().expect("closes");
        let (peak, at) = with.across(2, 0).greatest_magnitude().expect("closes");
        approx::assert_relative_eq!(settles.value, peak, max_relative = 1e-10);
        approx::assert_relative_eq!(settles.opens, at, max_relative = 1e-4);
        let found = opened.last_outside(50.0, AtMoment { value: 3.0, opens: 0.0 }).expect("closes");
        assert!(found.value.is_infinite());
    }

    #[test]
    fn a_network_that_only_falls_is_worst_when_it_opens_at_once() {
        // Two bleeders on one capacitance; one of them opens.
        let capacitors = vec![edge(1, 0, 100e-6)];
        let both = vec![edge(1, 0, 10e3), edge(1, 0, 20e3)];
        let with = Network { nodes: 2, resistors: both.clone(), capacitors, ..Network::default() };
        let without = Network { resistors: both[1..].to_vec(), ..with.clone() };
        let modes = |network| Arc::new(Modes::new(network).expect("rates"));
        let response = modes(with).response(&[600.0], &[0.0, 600.0]).expect("agrees");
        let opened = Opened::new(&response, &modes(without), 1, 0).expect("agrees");
        let found = opened.last_outside(50.0, AtMoment { value: 0.0, opens: 0.0 }).expect("closes");
        approx::assert_relative_eq!(found.value, 2.0 * 12f64.ln(), max_relative = 1e-12);
        assert!(found.opens.abs() < f64::EPSILON);
    }
}
