//! The last time a sum of exponentials is outside a band: proven, and never too early.
//!
//! `|v| <= level` is two conditions `f(t) = level -+ v(t) >= 0`. For each, an envelope bounds the time past which
//! `f` can't be negative any more; inside it, intervals on which bounds of the terms prove `f >= 0` are discarded
//! from the right. On an interval where the slope is proven to have one sign the crossing is single and is
//! bracketed; the LATER end of the bracket is the answer. Nothing is sampled.
//! (Interval branch and bound with monotonicity test: Moore, Kearfott and Cloud 2009, chapters 5 and 8.)

use super::{CircuitError, ExpSum};

/// The last time outside a band.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum LastExit {
    /// Inside the band from this time on, in second; 0 where it never was outside.
    At(f64),
    /// It settles outside, or comes back for ever.
    Never,
}

impl LastExit {
    /// The time in second, infinite for never.
    pub fn seconds(self) -> f64 {
        match self {
            LastExit::At(t) => t,
            LastExit::Never => f64::INFINITY,
        }
    }
}

/// Relative width to which a crossing is bracketed.
const BRACKET: f64 = 2e-13;

/// Values that differ by less than this share of the largest term are equal: a few roundings of a double.
const ROUNDING: f64 = 8.0 * f64::EPSILON;

/// More intervals than this are never needed by a sum whose crossing can be told apart from rounding.
const MOST_INTERVALS: usize = 200_000;

impl ExpSum {
    /// The last time at which `|v| > level`; only times after `from` are searched, and `from` is the answer where
    /// there is none. With `from` a time already found elsewhere, most searches end with one evaluation.
    ///
    /// # Errors
    /// [`CircuitError::SearchNotClosed`] where the search does not close.
    pub fn last_outside(&self, level: f64, from: f64) -> Result<LastExit, CircuitError> {
        debug_assert!(self.grown().is_empty(), "what a current brings about is asked for over a finite time");
        let rounding = ROUNDING * self.envelope(f64::INFINITY).max(level.abs());
        let mut latest = from;
        for sign in [-1.0, 1.0] {
            let mut f = self.times(sign).plus(&ExpSum::new(level, []));
            // A voltage that settles exactly on the level must not be "never" by the last bit of a sum.
            if f.constant().abs() <= rounding {
                f = ExpSum::new(0.0, f.terms().iter().copied());
            }
            match last_negative(&f, latest)? {
                LastExit::At(t) => latest = t,
                LastExit::Never => return Ok(LastExit::Never),
            }
        }
        Ok(LastExit::At(latest))
    }

    /// As [`ExpSum::last_outside`], but up to `until` seconds only: `until` itself where it then is outside.
    ///
    /// # Errors
    /// As [`ExpSum::last_outside`].
    pub fn last_outside_within(&self, level: f64, from: f64, until: f64) -> Result<f64, CircuitError> {
        let mut latest = from;
        for sign in [-1.0, 1.0] {
            if latest < until {
                let f = self.times(sign).plus(&ExpSum::new(level, [])).after(latest);
                latest += search_from_the_right(&f, until - latest)?;
            }
        }
        Ok(latest)
    }

    /// The first time up to `until` seconds at which `|v| <= level`; the later end of its bracket, and `None` where
    /// there is none.
    ///
    /// # Errors
    /// [`CircuitError::SearchNotClosed`] where the search does not close.
    pub fn first_inside(&self, level: f64, until: f64) -> Result<Option<f64>, CircuitError> {
        let start = self.value(0.0);
        if start.abs() <= level {
            return Ok(Some(0.0));
        }
        search_from_the_left(&self.times(start.signum()).plus(&ExpSum::new(-level, [])), until)
    }
}

/// The first time in `[0, end]` at which `f <= 0`.
fn search_from_the_left(f: &ExpSum, end: f64) -> Result<Option<f64>, CircuitError> {
    let mut open = vec![(0.0, end)];
    for _ in 0..MOST_INTERVALS {
        let Some((low, high)) = open.pop() else {
            return Ok(None);
        };
        let bounds = Bounds::of(f, low, high);
        if bounds.least > 0.0 {
            continue;
        }
        if f.value(low) <= 0.0 {
            return Ok(Some(low));
        }
        let rising = bounds.steepest_down >= 0.0;
        let falling = bounds.steepest_up <= 0.0;
        if rising || (falling && f.value(high) > 0.0) {
            continue;
        }
        if falling {
            return Ok(Some(bracket(&f.times(-1.0), low, high)));
        }
        if high - low <= BRACKET * high {
            return Ok(Some(high));
        }
        let middle = split(low, high);
        open.push((middle, high));
        open.push((low, middle));
    }
    Err(CircuitError::SearchNotClosed)
}

/// The last time after `from` at which `f < 0`, or `from`.
fn last_negative(f: &ExpSum, from: f64) -> Result<LastExit, CircuitError> {
    if f.constant() < 0.0 {
        return Ok(LastExit::Never);
    }
    if f.constant() == 0.0 {
        // The slowest term decides the sign in the end; divided by it, f has a constant again.
        let Some((&(slowest, rate), faster)) = f.terms().split_first() else {
            return Ok(LastExit::At(from));
        };
        let divided = ExpSum::new(slowest, faster.iter().map(|(a, r)| (*a, r - rate)));
        return last_negative(&divided, from);
    }
    // Seen from `from`, so that amplitudes already decayed don't enter the bound.
    let after = f.after(from);
    let falling: Vec<(f64, f64)> = after.terms().iter().filter(|(a, _)| *a < 0.0).copied().collect();
    if f.constant() + falling.iter().map(|(a, _)| a).sum::<f64>() >= 0.0 {
        return Ok(LastExit::At(from));
    }
    // Past `end` each falling term is at most its share of the constant.
    let share = f.constant() / falling.len() as f64;
    let end = falling.iter().map(|(a, r)| (-a / share).ln() / r).fold(0.0, f64::max);
    let found = search_from_the_right(&after, end * (1.0 + BRACKET))?;
    Ok(LastExit::At(from + found))
}

/// The last time in `[0, end]` at which `f < 0`, or 0; `f >= 0` is known beyond `end`.
fn search_from_the_right(f: &ExpSum, end: f64) -> Result<f64, CircuitError> {
    let mut open = vec![(0.0, end)];
    for _ in 0..MOST_INTERVALS {
        let Some((low, high)) = open.pop() else {
            return Ok(0.0);
        };
        let bounds = Bounds::of(f, low, high);
        if bounds.least >= 0.0 {
            continue;
        }
        if bounds.greatest < 0.0 || bounds.steepest_up <= 0.0 {
            // Negative throughout, or falling throughout with a negative end or a non-negative one.
            if f.value(high) < 0.0 || bounds.greatest < 0.0 {
                return Ok(high);
            }
            continue;
        }
        if bounds.steepest_down >= 0.0 {
            if f.value(low) >= 0.0 {
                continue;
            }
            return Ok(if f.value(high) <= 0.0 { high } else { bracket(f, low, high) });
        }
        if high - low <= BRACKET * high {
            return Ok(high);
        }
        let middle = split(low, high);
        open.push((low, middle));
        open.push((middle, high));
    }
    Err(CircuitError::SearchNotClosed)
}

/// Where to cut an interval: rates may be 26 decades apart, so wide intervals are cut by ratio.
pub(super) fn split(low: f64, high: f64) -> f64 {
    if low <= 0.0 {
        high / 16.0
    } else if high > 4.0 * low {
        (low * high).sqrt()
    } else {
        0.5 * (low + high)
    }
}

/// Bounds of a sum, its slope and its curvature over an interval; slope and curvature in units of half the interval,
/// since only their signs are asked for.
pub(super) struct Bounds {
    pub least: f64,
    pub greatest: f64,
    pub steepest_down: f64,
    pub steepest_up: f64,
    pub least_curvature: f64,
    pub greatest_curvature: f64,
}

/// Order of the Taylor form.
pub(super) const ORDER: usize = 8;

impl Bounds {
    /// A term that falls much over the interval is bounded by its ends, it being monotone. All others are added up as
    /// one Taylor form around the middle (Moore, Kearfott and Cloud 2009, chapter 6): where amplitudes of nearly
    /// equal rates cancel, their coefficients cancel too, which the ends of single terms would not show.
    pub fn of(f: &ExpSum, low: f64, high: f64) -> Self {
        let half = 0.5 * (high - low);
        let middle = low + half;
        let mut taylor = [0.0; ORDER];
        let mut rest = 0.0;
        let mut bounds = Bounds {
            least: f.constant(),
            greatest: f.constant(),
            steepest_down: 0.0,
            steepest_up: 0.0,
            least_curvature: 0.0,
            greatest_curvature: 0.0,
        };
        for (a, r) in f.terms() {
            let x = r * half;
            if x <= 1.0 {
                let mut coefficient = a * (-r * middle).exp();
                // exp(-r t) is at most e times its value in the middle.
                let mut tail = std::f64::consts::E * coefficient.abs();
                for (k, sum) in taylor.iter_mut().enumerate() {
                    *sum += coefficient;
                    coefficient *= -x / (k + 1) as f64;
                    tail *= x;
                }
                rest += tail;
            } else {
                let (first, last) = (a * (-r * low).exp(), a * (-r * high).exp());
                let (most, fewest) = if *a > 0.0 { (first, last) } else { (last, first) };
                bounds.least += fewest;
                bounds.greatest += most;
                bounds.steepest_down -= x * most;
                bounds.steepest_up -= x * fewest;
                bounds.least_curvature += x * x * fewest;
                bounds.greatest_curvature += x * x * most;
            }
        }
        for grown in f.grown() {
            rest += grown.bounds((low, high), &mut taylor, &mut bounds);
        }
        // Value, slope and curvature of the form: its own term in the middle, all others at their full size.
        let factorial = |n: usize| (1..=n).map(|k| k as f64).product::<f64>();
        let form = |derivative: usize| {
            let weight = |k: usize| factorial(k) / factorial(k - derivative);
            let reach: f64 = (derivative + 1..ORDER).map(|k| weight(k) * taylor[k].abs()).sum();
            let reach = reach + rest / factorial(ORDER - derivative);
            let own = factorial(derivative) * taylor[derivative];
            (own - reach, own + reach)
        };
        let add = |low: &mut f64, high: &mut f64, (least, greatest): (f64, f64)| {
            *low += least;
            *high += greatest;
        };
        add(&mut bounds.least, &mut bounds.greatest, form(0));
        add(&mut bounds.steepest_down, &mut bounds.steepest_up, form(1));
        add(&mut bounds.least_curvature, &mut bounds.greatest_curvature, form(2));
        bounds
    }
}

/// The one crossing of a rising `f` in `[low, high]`, `f(low) < 0 < f(high)`: bracketed, the later end returned.
fn bracket(f: &ExpSum, mut low: f64, mut high: f64) -> f64 {
    while high - low > BRACKET * high {
        let middle = split(low, high);
        let (value, slope) = f.value_and_slope(middle);
        if value < 0.0 {
            low = middle;
        } else {
            high = middle;
        }
        // One Newton step, then both sides of it: where they differ in sign the bracket is closed at once.
        let guess = middle - value / slope;
        if guess > low && guess < high {
            for t in [guess * (1.0 - 0.4 * BRACKET), guess * (1.0 + 0.4 * BRACKET)] {
                if t > low && t < high {
                    if f.value(t) < 0.0 {
                        low = t;
                    } else {
                        high = t;
                    }
                }
            }
        }
    }
    high
}
