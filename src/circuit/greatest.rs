//! The greatest magnitude that a sum of exponentials reaches.

use super::crossing::{Bounds, split};
use super::{CircuitError, ExpSum};

/// Relative accuracy of a greatest value.
const ACCURACY: f64 = 1e-11;

const MOST_INTERVALS: usize = 200_000;

impl ExpSum {
    /// The greatest `|v|` for t >= 0, and the time in second at which it comes (infinite where it is only
    /// approached as everything settles).
    ///
    /// Branch and bound on intervals: one whose bound does not exceed the best value found is discarded.
    ///
    /// # Errors
    /// [`CircuitError::SearchNotClosed`] where the search does not close.
    pub fn greatest_magnitude(&self) -> Result<(f64, f64), CircuitError> {
        self.greatest_magnitude_over(0.0)
    }

    /// As [`ExpSum::greatest_magnitude`], but a value not above `floor` need not be found: `floor` is then given
    /// back with time 0.
    ///
    /// # Errors
    /// As [`ExpSum::greatest_magnitude`].
    pub fn greatest_magnitude_over(&self, floor: f64) -> Result<(f64, f64), CircuitError> {
        self.greatest_magnitude_within(floor, f64::INFINITY)
    }

    /// As [`ExpSum::greatest_magnitude_over`], but from 0 to `until` seconds only.
    ///
    /// # Errors
    /// As [`ExpSum::greatest_magnitude`].
    pub fn greatest_magnitude_within(&self, floor: f64, until: f64) -> Result<(f64, f64), CircuitError> {
        let mut best = (floor, 0.0);
        let mut offer = |value: f64, t: f64| {
            if value > best.0 {
                best = (value, t);
            }
            best.0
        };
        // No sum of the terms of one sign is ever exceeded.
        let of_sign = |sign: f64| self.terms().iter().map(|(a, _)| (a * sign).max(0.0)).sum::<f64>();
        let grown: f64 = self.grown().iter().map(|g| g.reach(until)).sum();
        let limit = (self.constant() + of_sign(1.0)).max(of_sign(-1.0) - self.constant()) + grown;
        if offer(self.value(0.0).abs(), 0.0) >= limit * (1.0 - ACCURACY) {
            return Ok(best);
        }
        if until.is_infinite() {
            offer(self.constant().abs(), f64::INFINITY);
        }
        // Terms that cancel leave no more than this of themselves by rounding.
        let noise = 32.0 * f64::EPSILON * self.envelope(until);
        // Past `end` every term is below rounding of the envelope.
        let count = self.terms().len().max(1) as f64;
        let small = limit * f64::EPSILON / count;
        let end = self.terms().iter().map(|(a, r)| (a.abs() / small).ln().max(0.0) / r).fold(0.0, f64::max);
        // Where a current is drawn nothing settles: the time asked for is finite.
        let end = if self.grown().is_empty() { end.min(until) } else { until };
        let mut open = vec![(0.0, end)];
        offer(self.value(end).abs(), end);
        for _ in 0..MOST_INTERVALS {
            let Some((low, high)) = open.pop() else {
                return Ok(best);
            };
            let bounds = Bounds::of(self, low, high);
            let reachable = bounds.greatest.abs().max(bounds.least.abs());
            let sofar = offer(self.value(high).abs(), high);
            if reachable <= sofar * (1.0 + ACCURACY) + noise || bounds.steepest_down >= 0.0 || bounds.steepest_up <= 0.0
            {
                continue; // The ends were offered: nothing between them is greater.
            }
            if high - low <= f64::EPSILON * high {
                continue;
            }
            if bounds.least_curvature >= 0.0 || bounds.greatest_curvature <= 0.0 {
                // The slope is monotone: at most one stationary point, which is found at once.
                if let Some(t) = self.stationary(low, high) {
                    offer(self.value(t).abs(), t);
                }
                continue;
            }
            let middle = split(low, high);
            open.push((middle, high));
            open.push((low, middle));
        }
        Err(CircuitError::SearchNotClosed)
    }

    /// The zero of a monotone slope in `[low, high]`, where there is one. The value there is flat, so half the
    /// digits of the time give all digits of the value.
    fn stationary(&self, mut low: f64, mut high: f64) -> Option<f64> {
        let (_, first) = self.value_and_slope(low);
        let (_, last) = self.value_and_slope(high);
        if (first > 0.0) == (last > 0.0) {
            return None;
        }
        for _ in 0..200 {
            let middle = split(low, high);
            let (_, slope) = self.value_and_slope(middle);
            if (slope > 0.0) == (first > 0.0) {
                low = middle;
            } else {
                high = middle;
            }
            if high - low <= 1e-10 * high {
                break;
            }
        }
        Some(0.5 * (low + high))
    }
}
