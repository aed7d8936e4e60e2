//! Demands followed over the resistance: where each is met, and the window that all leave open.

use super::error::SizeError;
use super::spans::{Span, Spans};
use crate::check::EngineError;
use rayon::prelude::*;

/// What is asked of a bank with the new resistor in it: finds what the demands come to at one actual resistance.
pub(super) trait Probe: Sync {
    /// What was found at one resistance.
    type Point: Clone + Send + Sync;

    /// Finds it at `ohms`; infinite is without the part.
    fn at(&self, ohms: f64) -> Result<Self::Point, EngineError>;
}

/// How what is found compares with what is allowed.
pub(super) trait Measure<P>: Sync {
    /// Found over allowed: at most 1 where the demand is met. Infinite where it is never met; never NaN.
    fn ratio(&self, point: &P) -> f64;

    /// Is this what the resistor is there for (a limit, a time), so that too much resistance misses it?
    fn is_purpose(&self) -> bool;
}

/// One demand: a name, and what it looks at.
pub(super) struct Demand<K> {
    pub name: String,
    pub kind: K,
}

impl<K> Demand<K> {
    fn is_met<P>(&self, point: &P) -> bool
    where
        K: Measure<P>,
    {
        self.kind.ratio(point) <= 1.0
    }
}

/// Found over allowed as a ratio that never passes by being no number.
pub(super) fn ratio(found: f64, allowed: f64) -> f64 {
    let ratio = if found <= 0.0 { 0.0 } else { found / allowed };
    if ratio.is_nan() { f64::INFINITY } else { ratio }
}

/// Resistances per decade at which the engine looks first: closely around the middle, more widely far below it.
const PER_DECADE: i32 = 4;
/// Decades below and above the middle at which it looks closely, and below it at which it looks at all.
const CLOSE: i32 = 2;
const FAR: i32 = 6;
/// Where the search for an upper end gives up: beyond, a resistor is an insulator.
const HIGHEST: f64 = 1e15;

/// Points rising in resistance, the last of them without the resistor.
pub(super) struct Scan<'a, P: Probe> {
    probe: &'a P,
    points: Vec<(f64, P::Point)>,
    /// The bank without the resistor.
    open: P::Point,
}

impl<'a, P: Probe> Scan<'a, P> {
    /// Looks around `middle`, and further up for as long as the demands are met there and not without the resistor.
    pub fn around<K: Measure<P::Point>>(middle: f64, probe: &'a P, demands: &[Demand<K>]) -> Result<Self, SizeError> {
        let ohms = |step: i32| middle * 10f64.powf(f64::from(step) / f64::from(PER_DECADE));
        let open = probe.at(f64::INFINITY)?;
        let far = (-FAR * PER_DECADE..-CLOSE * PER_DECADE).step_by(2);
        let steps: Vec<i32> = far.chain(-CLOSE * PER_DECADE..=CLOSE * PER_DECADE).collect();
        let at = |ohms: f64| probe.at(ohms).map(|point| (ohms, point));
        let found: Result<Vec<_>, EngineError> = steps.par_iter().map(|step| at(ohms(*step))).collect();
        let mut points = found?;
        let served = |p: &P::Point| demands.iter().filter(|d| d.kind.is_purpose()).all(|d| d.is_met(p));
        let mut step = CLOSE * PER_DECADE;
        // Demands that more resistance is good for (a loss, a current) are followed to where they are met, so that what
        // collides can be told by how much.
        let spared = |p: &P::Point| demands.iter().filter(|d| !d.kind.is_purpose()).all(|d| d.is_met(p));
        let goes_on = |p: &P::Point| (served(p) && !served(&open)) || (!spared(p) && spared(&open));
        while points.last().is_some_and(|(ohms, p)| goes_on(p) && *ohms < HIGHEST) {
            step += PER_DECADE;
            points.push(at(ohms(step))?);
        }
        Ok(Scan { probe, points, open })
    }

    /// Where a demand is met.
    pub fn spans<K: Measure<P::Point>>(&self, demand: &Demand<K>) -> Result<Spans, SizeError> {
        let met: Vec<bool> = self.points.iter().map(|(_, p)| demand.is_met(p)).collect();
        let mut spans: Vec<Span> = Vec::new();
        let mut low = met.first().is_some_and(|m| *m).then_some(0.0);
        for (pair, now) in self.points.windows(2).zip(met.windows(2)) {
            match (now[0], now[1]) {
                (true, false) => {
                    let high = self.edge(demand, &pair[0], &pair[1])?;
                    spans.extend(low.take().map(|low| Span { low, high }));
                }
                (false, true) => low = Some(self.edge(demand, &pair[1], &pair[0])?),
                _ => {}
            }
        }
        let highest = self.points.last().map_or(0.0, |(ohms, _)| *ohms);
        let high = if demand.is_met(&self.open) { f64::INFINITY } else { highest };
        spans.extend(low.map(|low| Span { low, high }));
        Ok(Spans::of(spans))
    }

    /// The last resistance on the way from a point that meets a demand to one that does not, to 1e-10 of itself: by
    /// the method of false position on the logarithms with the Illinois rule (Dowell and Jarratt 1971), and by halving
    /// where a figure is infinite. The end that is given meets the demand.
    fn edge<K: Measure<P::Point>>(
        &self,
        demand: &Demand<K>,
        met: &(f64, P::Point),
        missed: &(f64, P::Point),
    ) -> Result<f64, SizeError> {
        let (mut good, mut bad) = (met.0.ln(), missed.0.ln());
        let height = |point: &P::Point| demand.kind.ratio(point).ln();
        let (mut at_good, mut at_bad) = (height(&met.1), height(&missed.1));
        let mut kept = 0i32;
        for round in 0..100 {
            if (bad - good).abs() < 1e-10 {
                break;
            }
            let share = at_good / (at_good - at_bad);
            let width = bad - good;
            // Every fourth step halves, so that a figure with a bend can't hold the bracket wide. A step is never so
            // short that the edge would be approached from one side for ever.
            let middle = if share.is_finite() && round % 4 != 3 {
                let shortest = 4e-11_f64.min(0.5 * width.abs());
                good + (share * width.abs()).clamp(shortest, width.abs() - shortest).copysign(width)
            } else {
                0.5 * (good + bad)
            };
            let point = self.probe.at(middle.exp())?;
            if demand.is_met(&point) {
                (good, at_good) = (middle, height(&point));
                if kept > 0 {
                    at_bad *= 0.5;
                }
                kept = 1;
            } else {
                (bad, at_bad) = (middle, height(&point));
                if kept < 0 {
                    at_good *= 0.5;
                }
                kept = -1;
            }
        }
        Ok(good.exp())
    }

    /// For every demand, whether it is met without the resistor.
    pub fn without<K: Measure<P::Point>>(&self, demands: &[Demand<K>]) -> Vec<bool> {
        demands.iter().map(|d| d.is_met(&self.open)).collect()
    }

    /// The resistances that were looked at, rising, and what was found at each.
    pub fn points(&self) -> &[(f64, P::Point)] {
        &self.points
    }

    /// What is found at a resistance.
    pub fn point(&self, ohms: f64) -> Result<P::Point, SizeError> {
        Ok(self.probe.at(ohms)?)
    }
}
