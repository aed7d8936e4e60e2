//! Scales and ticks.

use super::super::words::typed;
use crate::quantity::{Quantity, Time, Voltage};

/// The unit in which times along an axis are written.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct TimeUnit {
    pub name: &'static str,
    pub seconds: f64,
}

impl TimeUnit {
    /// The unit that suits a length of time.
    pub fn for_length(seconds: f64) -> Self {
        let (name, seconds) = match seconds {
            s if s < 0.5 => ("ms", 1e-3),
            s if s < 180.0 => ("s", 1.0),
            s if s < 10_800.0 => ("min", 60.0),
            s if s < 259_200.0 => ("h", 3600.0),
            _ => ("d", 86_400.0),
        };
        TimeUnit { name, seconds }
    }
}

/// An axis from `low` to `high`, even or by powers of ten.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Axis {
    pub low: f64,
    pub high: f64,
    pub by_powers: bool,
    /// Where it bears a figure, and the figure.
    pub ticks: Vec<(f64, String)>,
    pub name: String,
}

impl Axis {
    /// Where a value stands: 0 at the low end, 1 at the high one; what lies beyond stands on the end.
    pub fn share(&self, value: f64) -> f64 {
        let at = |x: f64| if self.by_powers { x.max(f64::MIN_POSITIVE).log10() } else { x };
        ((at(value) - at(self.low)) / (at(self.high) - at(self.low))).clamp(0.0, 1.0)
    }

    /// Powers of ten from at most `low` to at least `high`.
    pub fn powers(low: f64, high: f64, name: &str, text: impl Fn(f64) -> String) -> Self {
        let from = (low.log10() + 1e-9).floor();
        let to = (high.log10() - 1e-9).ceil().max(from + 1.0);
        let ticks = (0..=(to - from) as i32).map(|k| 10f64.powf(from + f64::from(k)));
        let ticks = ticks.map(|value| (value, text(value))).collect();
        Axis { low: 10f64.powf(from), high: 10f64.powf(to), by_powers: true, ticks, name: name.into() }
    }

    /// Even from `low` to at least `high`, with a figure at round steps.
    pub fn even(low: f64, high: f64, name: &str) -> Self {
        let step = round_step((high - low) / 6.0);
        let last = ((high - low) / step - 1e-9).ceil().max(1.0);
        let decimals = (-step.log10()).ceil().max(0.0) as usize;
        let ticks: Vec<(f64, String)> = (0..=last as i32)
            .map(|k| low + step * f64::from(k))
            .map(|value| (value, format!("{value:.decimals$}")))
            .collect();
        Axis { low, high: low + step * last, by_powers: false, ticks, name: name.into() }
    }

    /// Times from isolation to `end` seconds, even, ending just there.
    pub fn times(end: f64, unit: TimeUnit) -> Self {
        let mut axis = Axis::even(0.0, end / unit.seconds, &format!("time from isolation in {}", unit.name));
        axis.high = end / unit.seconds;
        axis.ticks.retain(|(value, _)| *value <= axis.high * (1.0 + 1e-9));
        axis
    }
}

/// 1, 2 or 5 times a power of ten, at least `step`.
fn round_step(step: f64) -> f64 {
    let power = 10f64.powf(step.log10().floor());
    [1.0, 2.0, 5.0, 10.0].into_iter().map(|k| k * power).find(|s| *s >= step * (1.0 - 1e-9)).unwrap_or(step)
}

/// A voltage at a tick.
pub(super) fn volts(value: f64) -> String {
    // Powers of ten are not exact in binary; what is written is.
    let value: f64 = format!("{value:.3e}").parse().unwrap_or(value);
    typed(Voltage::from_si(value))
}

/// A time at a tick of an axis by powers of ten.
pub(super) fn seconds(value: f64) -> String {
    let value: f64 = format!("{value:.3e}").parse().unwrap_or(value);
    match value {
        v if v < 1.0 => typed(Time::from_si(v)),
        v => format!("{v} s"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round_and_cover_the_axis() {
        let axis = Axis::times(870.0, TimeUnit::for_length(870.0));
        assert_eq!(axis.ticks.iter().map(|(_, t)| t.as_str()).collect::<Vec<_>>(), ["0", "5", "10"]);
        let axis = Axis::powers(0.3, 750.0, "V", volts);
        assert_eq!((axis.low, axis.ticks.len()), (0.1, 5));
        assert_eq!(axis.ticks[4].1.replace('\u{a0}', " "), "1 kV");
        let axis = Axis::even(40.0, 112.0, "");
        assert_eq!(axis.ticks.last().map(|(v, _)| *v), Some(120.0));
    }

    #[test]
    fn what_lies_beyond_an_axis_stands_on_its_end() {
        let axis = Axis::powers(0.1, 1000.0, "V", volts);
        assert!((axis.share(10.0) - 0.5).abs() < 1e-12);
        assert!((axis.share(0.0), axis.share(1e9)) == (0.0, 1.0));
    }
}
