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
    fn slopes(&self, index: usize, cases: &[Case], point: &[f64], value: f64) -> Option<Vec<f64>> {
        // Of several states at isolation each has slopes of its own.
        let [case] = cases else { return None };
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
    /// The scenario from every state that the bank can have at isolation; a figure is the greatest of theirs.
    type Case = Vec<Case>;

    fn parameters(&self) -> &[Parameter] {
        &self.model.parameters[..self.model.passive]
    }

    fn count(&self) -> usize {
        self.figures.len()
    }

    fn case(&self, point: &[f64]) -> Result<Vec<Case>, CircuitError> {
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
        let known = matches!(
            self.figures[index],
            Figure::VoltageWait { .. }
                | Figure::TouchWait { energy: None, .. }
                | Figure::VoltageAt { .. }
                | Figure::Start { .. }
        );
        known && self.model.three_phase.is_none()
    }

    fn gradient(&self, index: usize, cases: &Vec<Case>, point: &[f64], value: f64) -> Option<Vec<f64>> {
        self.slopes(index, cases, point, value)
    }

    fn negligible(&self, _: usize) -> f64 {
        0.0
    }

    fn case_for(&self, _: usize, point: &[f64]) -> Result<Vec<Case>, CircuitError> {
        self.case(point)
    }

    fn certify(&self, cases: &Vec<Case>) -> Result<(), CircuitError> {
        cases.iter().try_for_each(|case| case.response.check_balance(f64::INFINITY))
    }

    fn figure(&self, index: usize, cases: &Vec<Case>, floor: f64) -> Result<f64, CircuitError> {
        greatest(cases, floor, |case, floor| self.figures[index].of(self.model, case, floor))
    }
}

impl Study<'_> {
    /// From which state a figure is greatest at a point.
    pub fn worst_state(&self, index: usize, point: &[f64]) -> Result<usize, CircuitError> {
        greatest_of(&self.case(point)?, |case| self.figures[index].of(self.model, case, 0.0))
    }
}

/// The greatest of a figure over several cases; a value that is proven not to exceed `floor` may be given as `floor`.
pub(crate) fn greatest<C>(
    cases: &[C],
    floor: f64,
    figure: impl Fn(&C, f64) -> Result<f64, CircuitError>,
) -> Result<f64, CircuitError> {
    let mut greatest: Option<f64> = None;
    for case in cases {
        let known = greatest.unwrap_or(f64::NEG_INFINITY);
        let value = figure(case, floor.max(known))?;
        // What is no number stays none: it passes no check.
        if !known.is_nan() && (value > known || value.is_nan()) {
            greatest = Some(value);
        }
    }
    Ok(greatest.unwrap_or(f64::NAN))
}

/// The number of the case in which a figure is greatest, the first of several.
pub(crate) fn greatest_of<C>(
    cases: &[C],
    figure: impl Fn(&C) -> Result<f64, CircuitError>,
) -> Result<usize, CircuitError> {
    let mut greatest = (0, f64::NEG_INFINITY);
    for (number, case) in cases.iter().enumerate() {
        let value = figure(case)?;
        // A last digit is no difference: equal states have the name of the first.
        if value > greatest.1 * (1.0 + 1e-9) || (number > 0 && value.is_infinite() && greatest.1.is_finite()) {
            greatest = (number, value);
        }
    }
    Ok(greatest.0)
}
