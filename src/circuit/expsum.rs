//! A sum of decaying exponentials and a constant: what every voltage between two events is.

use super::grown::Grown;
use super::quadrature;

/// `v(t) = constant + sum of amplitude * exp(-rate t)` for t >= 0, all rates positive; while a sink draws from the
/// network, also what its current has brought about (see `grown`), over a finite time.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct ExpSum {
    constant: f64,
    /// (amplitude, rate in 1/s), the slowest first.
    terms: Vec<(f64, f64)>,
    /// What currents have brought about; empty where none is drawn.
    grown: Vec<Grown>,
}

impl ExpSum {
    /// A sum from its constant and its (amplitude, rate) terms. Terms of rate 0 join the constant, terms of
    /// amplitude 0 are dropped.
    pub fn new(constant: f64, terms: impl IntoIterator<Item = (f64, f64)>) -> Self {
        let mut sum = ExpSum { constant, terms: Vec::new(), grown: Vec::new() };
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

    /// The same sum and what currents bring about.
    #[must_use]
    pub(super) fn with_grown(mut self, grown: impl IntoIterator<Item = Grown>) -> Self {
        self.grown.extend(grown.into_iter().filter(|g| g.factors.iter().any(|b| *b != 0.0)));
        self
    }

    /// Whether a current is drawn: then it holds for a finite time only, and its square is no such sum.
    pub fn is_driven(&self) -> bool {
        !self.grown.is_empty()
    }

    /// Integral of `exp(-rate (t - s)) v(s)^2` over s from 0 to a finite `t`: what a first-order body of that rate has
    /// taken up and not yet lost.
    pub fn lagging_integral_of_square(&self, rate: f64, t: f64) -> f64 {
        let f = |s: f64| (-rate * (t - s)).exp() * self.value(s).powi(2);
        // Seen from the end, what lies further back than this has been lost.
        const MARKS: usize = 20;
        let mut cuts: Vec<f64> = quadrature::panels(self.fastest(), t).into_iter().map(|(low, _)| low).collect();
        cuts.extend((0..=MARKS).map(|k| t - 2.0 * k as f64 / rate).filter(|x| *x >= 0.0));
        cuts.sort_by(f64::total_cmp);
        cuts.windows(2).map(|w| quadrature::over(&f, (w[0], w[1]))).sum()
    }

    /// What currents bring about.
    pub(super) fn grown(&self) -> &[Grown] {
        &self.grown
    }

    /// The same sum where the currents, constant ones, flow for ever: `(1 - exp(-r t)) / r` as a constant and a
    /// term. What grows without end is left out.
    #[must_use]
    pub(super) fn settled(&self) -> Self {
        let lasting = self.grown.iter().filter(|g| g.rate > 0.0).map(|g| (g.factors[0] / g.rate, g.rate));
        let terms = lasting.clone().map(|(amplitude, rate)| (-amplitude, rate));
        let constant = self.constant + lasting.map(|(amplitude, _)| amplitude).sum::<f64>();
        ExpSum::new(constant, self.terms.iter().copied().chain(terms))
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
        let decaying = self.terms.iter().map(|(a, r)| a * (-r * t).exp()).sum::<f64>();
        self.constant + decaying + self.grown.iter().map(|g| g.value(t)).sum::<f64>()
    }

    /// Value and slope (per second) at `t` seconds.
    pub fn value_and_slope(&self, t: f64) -> (f64, f64) {
        let (value, slope) = self.terms.iter().fold((self.constant, 0.0), |(value, slope), (a, r)| {
            let term = a * (-r * t).exp();
            (value + term, slope - r * term)
        });
        self.grown.iter().fold((value, slope), |(value, slope), g| (value + g.value(t), slope + g.slope(t)))
    }

    /// The same sum times a factor.
    #[must_use]
    pub fn times(&self, factor: f64) -> Self {
        ExpSum::new(self.constant * factor, self.terms.iter().map(|(a, r)| (a * factor, *r)))
            .with_grown(self.grown.iter().map(|g| g.times(factor)))
    }

    /// The sum of two.
    #[must_use]
    pub fn plus(&self, other: &ExpSum) -> Self {
        ExpSum::new(self.constant + other.constant, self.terms.iter().chain(&other.terms).copied())
            .with_grown(self.grown.iter().chain(&other.grown).cloned())
    }

    /// The square: a sum over pairs of rates. Only where no current is drawn.
    #[must_use]
    pub fn squared(&self) -> Self {
        debug_assert!(self.grown.is_empty(), "no sum of exponentials");
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
        let decayed = self.terms.iter().map(|(a, r)| (a * (-r * t).exp(), *r));
        if self.grown.is_empty() {
            return ExpSum::new(self.constant, decayed);
        }
        let left = self.grown.iter().map(|g| (g.value(t), g.rate));
        ExpSum::new(self.constant, decayed.chain(left)).with_grown(self.grown.iter().map(|g| g.after(t)))
    }

    /// A bound that `|v|` never exceeds from `t = 0` on; where a current is drawn, up to `until` seconds.
    pub fn envelope(&self, until: f64) -> f64 {
        let decaying = self.constant.abs() + self.terms.iter().map(|(a, _)| a.abs()).sum::<f64>();
        decaying + self.grown.iter().map(|g| g.reach(until)).sum::<f64>()
    }

    /// The fastest rate in it, in 1/s.
    pub(super) fn fastest(&self) -> f64 {
        let rates = self.terms.iter().map(|(_, r)| *r).chain(self.grown.iter().map(|g| g.rate));
        rates.fold(0.0, f64::max)
    }

    /// Integral from 0 to `t` seconds.
    pub fn integral(&self, t: f64) -> f64 {
        if !self.grown.is_empty() {
            return quadrature::integral(|x| self.value(x), self.fastest(), t);
        }
        self.constant * t + self.terms.iter().map(|(a, r)| -a * (-r * t).exp_m1() / r).sum::<f64>()
    }

    /// Integral of `v^2` from 0 to `t` seconds, in closed form over pairs of rates; `t` may be infinite, and the
    /// integral then is where a constant is left.
    pub fn integral_of_square(&self, t: f64) -> f64 {
        if !self.grown.is_empty() {
            return quadrature::integral(|x| self.value(x).powi(2), self.fastest(), t);
        }
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
