//! Figures of one scenario at one voltage, over the tolerance box.

use super::case::Case;
use super::figure::Figure;
use super::model::{Model, Parameter};
use super::scenario::Scenario;
use super::worst::Objective;
use crate::circuit::CircuitError;

/// Figures of the passive discharge: one scenario, one voltage across the terminals before isolation.
pub(crate) struct Study<'a> {
    pub model: &'a Model,
    pub scenario: &'a Scenario,
    /// In volt.
    pub volts: f64,
    pub figures: &'a [Figure],
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
