//! Integrals of sums of exponentials by Gauss-Legendre panels, where there is no closed form without cancellation.

use std::sync::LazyLock;

/// Nodes of a panel. A panel spans at most a factor of four in time, so that what has not decayed by its start falls by
/// no more than `exp(-3)` over it, and its square by `exp(-6)`: 20 nodes integrate that to rounding.
const NODES: usize = 20;

/// (node in [0, 1], weight).
static RULE: LazyLock<[(f64, f64); NODES]> = LazyLock::new(rule);

/// Nodes and weights on [0, 1] of any number of nodes: zeros of the Legendre polynomial by Newton's method from
/// Chebyshev's guess (Davis and Rabinowitz 1984, section 2.7).
pub(super) fn rule<const N: usize>() -> [(f64, f64); N] {
    std::array::from_fn(|i| {
        let mut x = -(std::f64::consts::PI * (i as f64 + 0.75) / (N as f64 + 0.5)).cos();
        let mut slope = 1.0;
        for _ in 0..20 {
            let (mut p, mut before) = (x, 1.0);
            for k in 2..=N {
                let k = k as f64;
                (p, before) = (((2.0 * k - 1.0) * x * p - (k - 1.0) * before) / k, p);
            }
            slope = N as f64 * (x * p - before) / (x * x - 1.0);
            x -= p / slope;
        }
        (0.5 * (1.0 + x), 1.0 / ((1.0 - x * x) * slope * slope))
    })
}

/// The panels of `[0, t]` for rates up to `fastest`: the first as long as the fastest rate wants it, then growing.
pub(super) fn panels(fastest: f64, t: f64) -> Vec<(f64, f64)> {
    let mut panels = Vec::new();
    let mut low = 0.0;
    let mut high = if fastest > 0.0 { t.min(fastest.recip()) } else { t };
    while low < t {
        panels.push((low, high));
        (low, high) = (high, t.min(4.0 * high));
    }
    panels
}

/// Integral of `f` over one panel.
pub(super) fn over(f: &impl Fn(f64) -> f64, (low, high): (f64, f64)) -> f64 {
    RULE.iter().map(|(node, weight)| weight * f(low + (high - low) * node)).sum::<f64>() * (high - low)
}

/// Integral of `f` from 0 to a finite `t`; `fastest` is the fastest rate in it.
pub(super) fn integral(f: impl Fn(f64) -> f64, fastest: f64, t: f64) -> f64 {
    panels(fastest, t).into_iter().map(|panel| over(&f, panel)).sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn panels_integrate_rates_that_are_ten_decades_apart() {
        let f = |t: f64| (-t).exp() + (-1e10 * t).exp() + 2.0;
        let wanted = -(-50f64).exp_m1() + 1e-10 + 100.0;
        approx::assert_relative_eq!(integral(f, 1e10, 50.0), wanted, max_relative = 1e-15);
    }

    #[test]
    fn weights_add_up_to_one() {
        approx::assert_relative_eq!(rule::<6>().iter().map(|(_, w)| w).sum::<f64>(), 1.0, max_relative = 1e-15);
    }
}
