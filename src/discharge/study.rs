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
