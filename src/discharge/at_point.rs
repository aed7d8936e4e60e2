//! Figures and their derivatives at one point of the tolerance box.

use super::worst::Objective;
use crate::circuit::CircuitError;

/// All figures at one point of the box.
pub(crate) fn values_at<O: Objective>(objective: &O, point: &[f64]) -> Result<Vec<f64>, CircuitError> {
    let case = objective.case(point)?;
    (0..objective.count()).map(|i| objective.figure(i, &case, 0.0)).collect()
}

/// Derivatives of one figure by every loose value at a point: in closed form where there is one, else by central
/// differences. `None` where the figure has none: a wait of 0, or one that never ends.
pub(crate) fn slopes_at<O: Objective>(
    objective: &O,
    index: usize,
    point: &[f64],
) -> Result<Option<Vec<f64>>, CircuitError> {
    let case = objective.case(point)?;
    let value = objective.figure(index, &case, 0.0)?;
    if !value.is_finite() || value <= 0.0 {
        return Ok(None);
    }
    if let Some(slopes) = objective.gradient(index, &case, point, value) {
        return Ok(Some(slopes));
    }
    const STEP: f64 = 1e-5;
    let at = |p: usize, step: f64| {
        let mut moved = point.to_vec();
        moved[p] += step;
        objective.figure(index, &objective.case(&moved)?, 0.0)
    };
    let slope = |p: usize| Ok((at(p, STEP)? - at(p, -STEP)?) / (2.0 * STEP));
    let slopes: Vec<f64> = (0..point.len()).map(slope).collect::<Result<_, CircuitError>>()?;
    Ok(Some(slopes).filter(|s| s.iter().all(|x| x.is_finite())))
}
