//! Figures of one scenario at one voltage, over the tolerance box.

use super::case::Case;
use super::figure::Figure;
use super::gradient::voltage_gradient;
use super::model::{Model, Parameter};
use super::pinned::{Blocks, Pin};
use super::scenario::Scenario;
use super::worst::{MOST_CORNERS, Objective, RANDOM_STARTS};
use crate::circuit::CircuitError;

/// Figures of the passive discharge: one scenario, one voltage across the terminals before isolation.
pub(crate) struct Study<'a> {
    pub model: &'a Model,
    pub scenario: &'a Scenario,
    /// In volt.
    pub volts: f64,
    pub figures: &'a [Figure],
    /// Corners that may be tried where pins leave few values free.
    pub corner_budget: usize,
    blocks: Option<Blocks>,
    map: Vec<usize>,
}

impl<'a> Study<'a> {
    /// `figures` of `scenario`; `corner_budget` counts where there are many loose values.
    pub fn new(
        model: &'a Model,
        scenario: &'a Scenario,
        volts: f64,
        figures: &'a [Figure],
        corner_budget: usize,
    ) -> Self {
        let (blocks, map) = (Blocks::of(model, scenario), model.merged(&scenario.after));
        Study { model, scenario, volts, figures, corner_budget, blocks, map }
    }

    /// Derivatives of one figure by every loose value, in closed form: a wait by implicit differentiation at its
    /// crossing, `dT/dp = -(dv/dp) / (dv/dt)`.
    fn slopes(&self, index: usize, case: &Case, point: &[f64], value: f64) -> Option<Vec<f64>> {
        let (pair, t, is_wait) = match self.figures[index] {
            Figure::VoltageWait { pair, .. } | Figure::TouchWait { pair, energy: None, .. } => (pair, value, true),
            Figure::VoltageAt { pair, t } => (pair, t, false),
            Figure::Start { pair } => (pair, 0.0, false),
            _ => return None,
        };
        let usable = t.is_finite() && (t > 0.0 || !is_wait);
        if !usable {
            return None;
        }
        let (a, b) = self.model.pairs[pair];
        let response = case.response.undrawn()?;
        let (volts, slope) = response.across(case.map[a], case.map[b]).value_and_slope(t);
        let factor = if is_wait { -slope.recip() } else { volts.signum() };
        if !factor.is_finite() {
            return None;
        }
        let gradient = voltage_gradient(self.model, self.scenario, point, case, (a, b), t)?;
        Some(gradient.into_iter().map(|d| d * factor).collect())
    }
}

impl Objective for Study<'_> {
    type Case = Case;

    fn parameters(&self) -> &[Parameter] {
        &self.model.parameters[..self.model.passive]
    }

    fn count(&self) -> usize {
        self.figures.len()
    }

    fn case(&self, point: &[f64]) -> Result<Case, CircuitError> {
        Case::solve(self.model, self.scenario, point, self.volts)
    }

    fn corner_budget(&self) -> usize {
        self.corner_budget
    }

    fn random_starts(&self) -> usize {
        // Under one of many faults fewer corners are tried too.
        if self.corner_budget < 1 << MOST_CORNERS { RANDOM_STARTS / 4 } else { RANDOM_STARTS }
    }

    fn pins(&self, index: usize) -> Vec<Pin> {
        let free = || vec![Pin::Free; self.model.passive];
        self.blocks.as_ref().map_or_else(free, |blocks| blocks.pins(self.model, &self.map, &self.figures[index]))
    }

    fn has_gradient(&self, index: usize) -> bool {
        matches!(
            self.figures[index],
            Figure::VoltageWait { .. }
                | Figure::TouchWait { energy: None, .. }
                | Figure::VoltageAt { .. }
                | Figure::Start { .. }
        )
    }

    fn gradient(&self, index: usize, case: &Case, point: &[f64], value: f64) -> Option<Vec<f64>> {
        self.slopes(index, case, point, value)
    }

    fn negligible(&self, _: usize) -> f64 {
        0.0
    }

    fn case_for(&self, _: usize, point: &[f64]) -> Result<Case, CircuitError> {
        self.case(point)
    }

    fn certify(&self, case: &Case) -> Result<(), CircuitError> {
        case.response.check_balance(f64::INFINITY)
    }

    fn figure(&self, index: usize, case: &Case, floor: f64) -> Result<f64, CircuitError> {
        self.figures[index].of(self.model, case, floor)
    }
}
