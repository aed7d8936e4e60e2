//! Demands followed over the resistance: where each is met, and the window that all leave open.

use super::probe::{Point, Probe};
use super::request::SizeError;
use super::spans::{Span, Spans};
use crate::check::EngineError;
use rayon::prelude::*;

/// One demand: a name, and how what is found compares with what is allowed.
pub(super) struct Demand {
    pub name: String,
    pub kind: Kind,
}

/// What a demand looks at.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Kind {
    /// The limit of this number among those that count.
    Limit(usize),
    /// Standing loss, at most this many watt.
    Loss(f64),
    /// Current, at most this many ampere.
    Current(f64),
    /// What the largest arrays of the elements at hand bear, in watt.
    Rating(f64),
}

impl Demand {
    /// Found over allowed: at most 1 where the demand is met. Infinite where it is never met; never NaN.
    pub fn ratio(&self, point: &Point) -> f64 {
        let (found, allowed) = match self.kind {
            Kind::Limit(index) => point.limits.get(index).copied().unwrap_or((f64::INFINITY, 0.0)),
            Kind::Loss(watt) | Kind::Rating(watt) => (point.standing, watt),
            Kind::Current(ampere) => (point.current, ampere),
        };
        let ratio = if found <= 0.0 { 0.0 } else { found / allowed };
        if ratio.is_nan() { f64::INFINITY } else { ratio }
    }

    fn is_met(&self, point: &Point) -> bool {
        self.ratio(point) <= 1.0
    }
}

/// Resistances per decade at which the engine looks first: closely around the middle, more widely far below it.
const PER_DECADE: i32 = 4;
/// Decades below and above the middle at which it looks closely, and below it at which it looks at all.
const CLOSE: i32 = 2;
const FAR: i32 = 6;
/// Where the search for an upper end gives up: beyond, a resistor is an insulator.
const HIGHEST: f64 = 1e15;

/// Points rising in resistance, the last of them without the resistor.
pub(super) struct Scan<'a> {
    probe: &'a Probe,
    points: Vec<Point>,
    /// The bank without the resistor.
    open: Point,
}

impl<'a> Scan<'a> {
    /// Looks around `middle`, and further up for as long as the demands are met there and not without the resistor.
    pub fn around(middle: f64, probe: &'a Probe, demands: &[Demand]) -> Result<Self, SizeError> {
        let ohms = |step: i32| middle * 10f64.powf(f64::from(step) / f64::from(PER_DECADE));
        let open = probe.at(f64::INFINITY)?;
        let far = (-FAR * PER_DECADE..-CLOSE * PER_DECADE).step_by(2);
        let steps: Vec<i32> = far.chain(-CLOSE * PER_DECADE..=CLOSE * PER_DECADE).collect();
        let found: Result<Vec<Point>, EngineError> = steps.par_iter().map(|step| probe.at(ohms(*step))).collect();
        let mut points = found?;
        let limits_met = |p: &Point| demands.iter().filter(|d| matches!(d.kind, Kind::Limit(_))).all(|d| d.is_met(p));
        let mut step = CLOSE * PER_DECADE;
        while !limits_met(&open) && points.last().is_some_and(|p| limits_met(p) && p.ohms < HIGHEST) {
            step += PER_DECADE;
            points.push(probe.at(ohms(step))?);
        }
        Ok(Scan { probe, points, open })
    }

    /// Where a demand is met.
    pub fn spans(&self, demand: &Demand) -> Result<Spans, SizeError> {
        let met: Vec<bool> = self.points.iter().map(|p| demand.is_met(p)).collect();
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
        let highest = self.points.last().map_or(0.0, |p| p.ohms);
        let high = if demand.is_met(&self.open) { f64::INFINITY } else { highest };
        spans.extend(low.map(|low| Span { low, high }));
        Ok(Spans::of(spans))
    }

    /// The last resistance on the way from a point that meets a demand to one that does not, to 1e-10 of itself: by
    /// the method of false position on the logarithms with the Illinois rule (Dowell and Jarratt 1971), and by halving
    /// where a figure is infinite. The end that is given meets the demand.
    fn edge(&self, demand: &Demand, met: &Point, missed: &Point) -> Result<f64, SizeError> {
        let (mut good, mut bad) = (met.ohms.ln(), missed.ohms.ln());
        let height = |point: &Point| demand.ratio(point).ln();
        let (mut at_good, mut at_bad) = (height(met), height(missed));
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

    /// The voltage across the resistor at an actual resistance, between the points that were looked at; exact where
    /// the resistance does not move it.
    pub fn voltage(&self, ohms: f64) -> f64 {
        let after = self.points.partition_point(|p| p.ohms < ohms);
        let (left, right) = (self.points.get(after.saturating_sub(1)), self.points.get(after));
        match (left, right) {
            (Some(a), Some(b)) => {
                let share = ((ohms / a.ohms).ln() / (b.ohms / a.ohms).ln()).clamp(0.0, 1.0);
                if share.is_finite() { a.voltage + share * (b.voltage - a.voltage) } else { a.voltage.min(b.voltage) }
            }
            (one, other) => one.or(other).map_or(f64::NAN, |p| p.voltage),
        }
    }

    /// True where the resistance does not move the voltage across it, as at the terminals.
    pub fn voltage_is_held(&self) -> bool {
        let first = self.points.first().map_or(f64::NAN, |p| p.voltage);
        self.points.iter().all(|p| (p.voltage - first).abs() <= 1e-12 * first)
    }

    /// For every demand, whether it is met without the resistor.
    pub fn without(&self, demands: &[Demand]) -> Vec<bool> {
        demands.iter().map(|d| d.is_met(&self.open)).collect()
    }

    /// What is found at a resistance.
    pub fn point(&self, ohms: f64) -> Result<Point, SizeError> {
        Ok(self.probe.at(ohms)?)
    }
}
