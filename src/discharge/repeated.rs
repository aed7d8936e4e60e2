//! A part that is applied again and again: the same discharge several times, so far apart.
//!
//! The body's law theta' = P R_th / tau - theta / tau is linear, and every discharge has the same power over time. So the
//! body is, after a number of discharges, the sum of what each of them alone would have left by then; what one has left
//! decays with exp(-t/tau) from the moment the part is lifted, and m of them, T apart, sum up as a geometric series with
//! the ratio exp(-T/tau). Nothing is stepped through, and endless repetition is the limit of that series.

use super::body::{Heated, Thermal};
use super::model::Model;
use super::timeline::Timeline;
use crate::circuit::CircuitError;

/// A stretch of a procedure gone through several times in a row.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct InARow {
    /// The step that connects the part.
    pub first: usize,
    /// The last step in which it is connected.
    pub last: usize,
    /// Seconds from one start to the next; where that is less than these steps take, one follows the other at once.
    pub every: f64,
    /// How many discharges there are; infinite for no end.
    pub count: f64,
}

/// A part whose body is followed.
#[derive(Clone, Copy)]
pub(super) struct Followed<'a> {
    pub model: &'a Model,
    pub timeline: &'a Timeline,
    pub resistor: usize,
    pub body: Thermal,
}

impl InARow {
    /// The greatest rise over the air in K that the body reaches in the last of the discharges. Since each begins warmer
    /// than the one before, that is the greatest of all.
    pub(super) fn greatest(&self, part: Followed) -> Result<f64, CircuitError> {
        let once = self.once(part, 0.0)?;
        Ok(self.once(part, self.left(part, once.end))?.greatest)
    }

    /// How many seconds the body has to cool after the last of the discharges, from when the part is lifted, until one
    /// more leaves it at `allowed` K over the air at most; infinite where a discharge from cold alone exceeds that.
    pub(super) fn cooling(&self, part: Followed, allowed: f64) -> Result<f64, CircuitError> {
        let once = self.once(part, 0.0)?;
        if once.greatest > allowed {
            return Ok(f64::INFINITY);
        }
        let end = self.once(part, self.left(part, once.end))?.end;
        if self.once(part, end)?.greatest <= allowed {
            return Ok(0.0);
        }
        // The greatest rise to begin with: the lower end of the bracket is one that is allowed.
        let (mut low, mut high) = (0.0, end);
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            if self.once(part, middle)?.greatest <= allowed {
                low = middle
            } else {
                high = middle
            }
            if high - low <= 1e-11 * high {
                break;
            }
        }
        Ok(if low > 0.0 { part.body.time_constant * (end / low).ln() } else { f64::INFINITY })
    }

    /// What is left of all earlier discharges where the last one begins, `end` being what one alone leaves as it ends.
    fn left(&self, part: Followed, end: f64) -> f64 {
        let tau = part.body.time_constant;
        let length: f64 = (self.first..=self.last).map(|stage| part.timeline.duration(stage)).sum();
        let every = self.every.max(length);
        let once = end * (-(every - length) / tau).exp();
        // (1 - q^m) / (1 - q) with q = exp(-every/tau).
        let series = (-(self.count - 1.0) * every / tau).exp_m1() / (-every / tau).exp_m1();
        if self.count > 1.0 { once * series } else { 0.0 }
    }

    /// One discharge, the body at `start` K over the air as it begins.
    fn once(&self, part: Followed, start: f64) -> Result<Heated, CircuitError> {
        let mut body = Heated { greatest: start, end: start };
        for stage in self.first..=self.last {
            let volts = part.timeline.hottest(part.model, stage, part.resistor);
            let ohms = part.timeline.ohms(stage, part.resistor);
            let heated = part.body.heated(body.end, &volts, ohms, part.timeline.duration(stage))?;
            body = Heated { greatest: body.greatest.max(heated.greatest), end: heated.end };
        }
        Ok(body)
    }
}

/// The greatest rise in K of a body of 1 K/W and this time constant in the last of the discharges.
pub(crate) fn rise_per_kelvin_per_watt(
    model: &Model,
    timeline: &Timeline,
    resistor: usize,
    time_constant: f64,
    row: &InARow,
) -> Result<f64, CircuitError> {
    let body = Thermal { kelvin_per_watt: 1.0, time_constant };
    row.greatest(Followed { model, timeline, resistor, body })
}
