//! A sum of decaying exponentials and a constant: what every voltage between two events is.

/// `v(t) = constant + sum of amplitude * exp(-rate t)` for t >= 0, all rates positive.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct ExpSum {
    constant: f64,
    /// (amplitude, rate in 1/s), the slowest first.
    terms: Vec<(f64, f64)>,
}

impl ExpSum {
    /// A sum from its constant and its (amplitude, rate) terms. Terms of rate 0 join the constant, terms of
    /// amplitude 0 are dropped.
    pub fn new(constant: f64, terms: impl IntoIterator<Item = (f64, f64)>) -> Self {
        let mut sum = ExpSum { constant, terms: Vec::new() };
        for (amplitude, rate) in terms {
            if rate <= 0.0 {
                sum.constant += amplitude;
            } else if amplitude != 0.0 {
                sum.terms.push((amplitude, rate));
            }
        }
        // Modes come sorted; only sums and squares of sums have to be put in order.
        if !sum.terms.is_sorted_by(|x, y| x.1 <= y.1) {
            sum.terms.sort_by(|x, y| x.1.total_cmp(&y.1));
        }
        sum
    }

    /// The value at infinite time.
    pub fn constant(&self) -> f64 {
        self.constant
    }

    /// (amplitude, rate in 1/s), the slowest first.
    pub fn terms(&self) -> &[(f64, f64)] {
        &self.terms
    }

    /// The value at `t` seconds.
    pub fn value(&self, t: f64) -> f64 {
        self.constant + self.terms.iter().map(|(a, r)| a * (-r * t).exp()).sum::<f64>()
    }

    /// Value and slope (per second) at `t` seconds.
    pub fn value_and_slope(&self, t: f64) -> (f64, f64) {
        self.terms.iter().fold((self.constant, 0.0), |(value, slope), (a, r)| {
            let term = a * (-r * t).exp();
            (value + term, slope - r * term)
        })
    }

    /// The same sum times a factor.
    #[must_use]
    pub fn times(&self, factor: f64) -> Self {
        ExpSum::new(self.constant * factor, self.terms.iter().map(|(a, r)| (a * factor, *r)))
    }

    /// The sum of two.
    #[must_use]
    pub fn plus(&self, other: &ExpSum) -> Self {
        ExpSum::new(self.constant + other.constant, self.terms.iter().chain(&other.terms).copied())
    }

    /// The square: a sum over pairs of rates.
    #[must_use]
    pub fn squared(&self) -> Self {
        let mut terms = Vec::with_capacity(self.terms.len() * (self.terms.len() + 3) / 2);
        for (i, (a, r)) in self.terms.iter().enumerate() {
            terms.push((2.0 * self.constant * a, *r));
            terms.push((a * a, 2.0 * r));
            terms.extend(self.terms[..i].iter().map(|(b, s)| (2.0 * a * b, r + s)));
        }
        ExpSum::new(self.constant * self.constant, terms)
    }

    /// What is left of the sum after `t` seconds, as a sum that starts there.
    #[must_use]
    pub fn after(&self, t: f64) -> Self {
        ExpSum::new(self.constant, self.terms.iter().map(|(a, r)| (a * (-r * t).exp(), *r)))
    }

    /// A bound that `|v|` never exceeds from `t = 0` on.
    pub fn envelope(&self) -> f64 {
        self.constant.abs() + self.terms.iter().map(|(a, _)| a.abs()).sum::<f64>()
    }

    /// Integral from 0 to `t` seconds.
    pub fn integral(&self, t: f64) -> f64 {
        self.constant * t + self.terms.iter().map(|(a, r)| -a * (-r * t).exp_m1() / r).sum::<f64>()
    }

    /// Integral of `v^2` from 0 to `t` seconds, in closed form over pairs of rates; `t` may be infinite, and the
    /// integral then is where a constant is left.
    pub fn integral_of_square(&self, t: f64) -> f64 {
        let left: Vec<f64> = self.terms.iter().map(|(_, r)| (-r * t).exp()).collect();
        // (1 - exp(-rate t)) / rate; the product of two exponentials serves where it is not close to one.
        let over = |rate: f64, product: f64| {
            if t.is_infinite() {
                rate.recip()
            } else if product < 0.5 {
                (1.0 - product) / rate
            } else {
                -(-rate * t).exp_m1() / rate
            }
        };
        let mut sum = if self.constant == 0.0 { 0.0 } else { self.constant * self.constant * t };
        for (i, (a, r)) in self.terms.iter().enumerate() {
            sum += a * a * over(2.0 * r, left[i] * left[i]);
            if self.constant != 0.0 {
                sum += 2.0 * self.constant * a * over(*r, left[i]);
            }
            let pairs = self.terms[..i].iter().zip(&left);
            sum += pairs.map(|((b, s), e)| 2.0 * a * b * over(r + s, left[i] * e)).sum::<f64>();
        }
        sum
    }
}
