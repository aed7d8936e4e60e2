//! What a current that is drawn from a network brings about in one of its modes.
//!
//! A mode of rate `r` under a force `t^j` obeys `z' = -r z + t^j`, so from nothing it grows to
//! `I_j(r, t) = integral from 0 to t of exp(-r (t - s)) s^j ds`. For a slow mode that is nearly `t^(j+1) / (j+1)`, and
//! for `r = 0`, charge that nothing gives back, exactly that: written as a constant and an exponential it would be the
//! difference of two huge numbers. All derivatives up to the j-th are positive, which bounds it on any interval.

use super::crossing::{Bounds, ORDER};

/// Powers of time that a current may have: 0 for a constant one.
pub(super) const POWERS: usize = 8;

/// `sum over j of factors[j] I_j(rate, t)`.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Grown {
    /// In 1/s; may be 0.
    pub rate: f64,
    /// At least one, at most [`POWERS`].
    pub factors: Vec<f64>,
}

/// `I_0 ... I_(count-1)` at `t` seconds.
///
/// With `x = r t` they are `t^(j+1) f_j(x)`, `f_j(x) = integral over u in [0, 1] of exp(-x (1 - u)) u^j`: the functions
/// of exponential integrators (Hochbruck and Ostermann 2010, section 2.1). They obey `x f_j = 1 - j f_(j-1)`. Upwards
/// that damps errors for large x, downwards for small x, where a series of positive terms gives the last one.
pub(super) fn grown(count: usize, rate: f64, t: f64) -> [f64; POWERS] {
    let x = rate * t;
    let mut f = [0.0; POWERS];
    let top = count - 1;
    if x == 0.0 {
        f.iter_mut().enumerate().for_each(|(j, f)| *f = 1.0 / (j + 1) as f64);
    } else if x > 4.0 || top == 0 {
        f[0] = -(-x).exp_m1() / x;
        for j in 1..count {
            f[j] = (1.0 - j as f64 * f[j - 1]) / x;
        }
    } else {
        f[top] = last(top, x);
        for j in (1..count).rev() {
            f[j - 1] = (1.0 - x * f[j]) / j as f64;
        }
    }
    let mut power = 1.0;
    for f in &mut f {
        power *= t;
        *f *= power;
    }
    f
}

/// `f_order(x)` for small x: `exp(-x)` times the sum of `x^n / (n! (n + order + 1))`.
fn last(order: usize, x: f64) -> f64 {
    let (mut power, mut sum) = (1.0, 0.0);
    for n in 0..100 {
        let term = power / (n + order + 1) as f64;
        sum += term;
        if term < 1e-17 * sum {
            break;
        }
        power *= x / (n + 1) as f64;
    }
    sum * (-x).exp()
}

fn factorial(n: usize) -> f64 {
    (1..=n).map(|k| k as f64).product()
}

impl Grown {
    pub fn value(&self, t: f64) -> f64 {
        self.factors.iter().zip(grown(self.factors.len(), self.rate, t)).map(|(b, x)| b * x).sum()
    }

    /// Per second.
    pub fn slope(&self, t: f64) -> f64 {
        let table = grown(self.factors.len(), self.rate, t);
        let decay = (-self.rate * t).exp();
        self.factors.iter().enumerate().map(|(j, b)| b * derivative(j, 1, self.rate, &table, decay)).sum()
    }

    /// A bound of its magnitude up to `t` seconds.
    pub fn reach(&self, t: f64) -> f64 {
        self.factors.iter().zip(grown(self.factors.len(), self.rate, t)).map(|(b, x)| (b * x).abs()).sum()
    }

    #[must_use]
    pub fn times(&self, factor: f64) -> Self {
        Grown { rate: self.rate, factors: self.factors.iter().map(|b| b * factor).collect() }
    }

    /// What grows from `t` seconds on; what has grown before decays as an exponential of its own.
    #[must_use]
    pub fn after(&self, t: f64) -> Self {
        let mut factors = vec![0.0; self.factors.len()];
        for (j, b) in self.factors.iter().enumerate() {
            for (i, sum) in factors[..=j].iter_mut().enumerate() {
                *sum += b * factorial(j) / (factorial(i) * factorial(j - i)) * t.powi((j - i) as i32);
            }
        }
        Grown { rate: self.rate, factors }
    }

    /// Adds it to the bounds over an interval: to the Taylor form around the middle, or, where it changes too much for
    /// that, to the bounds themselves. Gives what is added to the form's rest.
    pub fn bounds(&self, (low, high): (f64, f64), taylor: &mut [f64; ORDER], bounds: &mut Bounds) -> f64 {
        let half = 0.5 * (high - low);
        let decays = |t: f64| (-self.rate * t).exp();
        if self.rate * half <= 1.0 {
            let middle = low + half;
            let (table, decay) = (grown(self.factors.len(), self.rate, middle), decays(middle));
            let (mut scale, mut rest) = (1.0, 0.0);
            for (n, sum) in taylor.iter_mut().enumerate() {
                let all = self.factors.iter().enumerate();
                *sum += scale * all.map(|(j, b)| b * derivative(j, n, self.rate, &table, decay)).sum::<f64>();
                scale *= half / (n + 1) as f64;
            }
            // The derivative of the form's order is an exponential for every power that a current has.
            for (j, b) in self.factors.iter().enumerate() {
                rest += (b * derivative(j, ORDER, self.rate, &table, decays(low))).abs();
            }
            return rest * half.powi(ORDER as i32);
        }
        let first = (grown(self.factors.len(), self.rate, low), decays(low));
        let last = (grown(self.factors.len(), self.rate, high), decays(high));
        for (j, b) in self.factors.iter().enumerate() {
            // Each derivative is monotone: its ends bound it.
            let range = |n: usize| {
                let at = |(table, decay): &([f64; POWERS], f64)| b * derivative(j, n, self.rate, table, *decay);
                let (x, y) = (at(&first) * half.powi(n as i32), at(&last) * half.powi(n as i32));
                (x.min(y), x.max(y))
            };
            let (least, greatest) = range(0);
            bounds.least += least;
            bounds.greatest += greatest;
            let (least, greatest) = range(1);
            bounds.steepest_down += least;
            bounds.steepest_up += greatest;
            let (least, greatest) = range(2);
            bounds.least_curvature += least;
            bounds.greatest_curvature += greatest;
        }
        0.0
    }
}

/// The n-th derivative of `I_j`, from the table of them and `exp(-rate t)`: `I_0' = exp(-rate t)`,
/// `I_j' = j I_(j-1)`.
fn derivative(j: usize, n: usize, rate: f64, table: &[f64; POWERS], decay: f64) -> f64 {
    if n <= j {
        factorial(j) / factorial(j - n) * table[j - n]
    } else {
        factorial(j) * (-rate).powi((n - j - 1) as i32) * decay
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::circuit::quadrature;

    #[test]
    fn what_has_grown_is_the_integral_it_stands_for_from_slow_to_fast_modes() {
        for rate in [0.0, 1e-9, 0.3, 2.3, 2.4, 9.9, 400.0] {
            let t = 1.7f64;
            let table = grown(POWERS, rate, t);
            for (order, found) in table.iter().enumerate() {
                let lagging = |u: f64| (-rate * u).exp() * (t - u).powi(order as i32);
                let wanted = quadrature::integral(lagging, rate, t);
                assert!((found / wanted - 1.0).abs() < 1e-13, "order {order}, rate {rate}: {found} {wanted}");
            }
        }
    }

    #[test]
    fn what_grows_on_continues_what_has_grown() {
        let whole = Grown { rate: 0.8, factors: vec![2.0, -0.3, 0.0, 0.7, 2.5] };
        let (first, then) = (1.3, 0.9);
        let decayed = whole.value(first) * (-whole.rate * then).exp();
        let found = decayed + whole.after(first).value(then);
        approx::assert_relative_eq!(found, whole.value(first + then), max_relative = 1e-14);
    }
}
