//! Decay rates and shapes of a network.

use super::CircuitError;
use super::jacobi::{Matrix, singular};
use super::network::Network;
use super::reduce::{Reduced, reduce};

/// A network's modes: how fast each decays and what it looks like. Made once per network, used for any initial
/// state.
#[derive(Debug, Clone)]
pub struct Modes {
    network: Network,
    /// The capacitors whose voltages are the states.
    pub(super) tree: Vec<usize>,
    /// Decay rates in 1/s, the slowest first.
    pub(super) rates: Vec<f64>,
    /// For every mode its shape over the states.
    pub(super) shapes: Vec<Vec<f64>>,
    /// For every mode the weights that take initial states to its amplitude.
    pub(super) weights: Vec<Vec<f64>>,
    /// For every mode the amplitude per second that the sources drive it with, over its rate: where it settles.
    pub(super) driven: Vec<f64>,
    /// For every node its potential over the states and the sources, against its anchor.
    pub(super) potentials: Vec<Vec<f64>>,
    /// For every node the node whose potential stays constant and to which its own refers.
    pub(super) anchor: Vec<usize>,
    /// For every node its resistive part: nodes of one part end at one potential.
    pub(super) resistive: Vec<usize>,
}

impl Modes {
    /// Finds the modes of `network`.
    ///
    /// In scaled states `y = L^T S^-1 u`, with `C = S^-1 L L^T S^-1` and `S = diag(c)^-1/2`, the network obeys
    /// `y' = -B^T B y`, `B = diag(sqrt g) M S L^-T`; its rates are the squared singular values of B. Without loops
    /// of capacitors L is the identity and only a column scaling is left, which one-sided Jacobi does not feel.
    ///
    /// # Errors
    /// [`CircuitError::RatesNotFound`] where the rotations do not die out.
    pub fn new(network: Network) -> Result<Self, CircuitError> {
        let Reduced { tree, rows, potentials, anchor, decaying } = reduce(&network);
        let states = tree.len();
        let volts: Vec<f64> = network.sources.iter().map(|s| s.value).collect();
        let scale: Vec<f64> = tree.iter().map(|c| network.capacitors[*c].value.sqrt().recip()).collect();
        let factor = loop_factor(&network, &tree, &potentials, &scale);

        let mut matrix = Matrix::zeros(rows.len(), states);
        for (i, row) in rows.iter().enumerate() {
            let scaled: Vec<f64> = row.iter().zip(&scale).map(|(x, s)| x * s).collect();
            let row = match &factor {
                Some(l) => solve_lower(l, &scaled),
                None => scaled,
            };
            matrix.row_mut(i).copy_from_slice(&row);
        }
        let scaled_rows = matrix.clone();
        let found = singular(matrix, decaying)?;
        // The sources' part of every row: B y + e = 0 in the steady state, so a mode settles at -(B v).e / rate.
        let pushed: Vec<f64> =
            rows.iter().map(|row| row[states..].iter().zip(&volts).map(|(x, v)| x * v).sum()).collect();
        let settles = |vector: &[f64], rate: f64| -> f64 {
            let along = |i: usize| scaled_rows.row(i).iter().zip(vector).map(|(x, v)| x * v).sum::<f64>();
            let rows = pushed.iter().enumerate().filter(|(_, e)| **e != 0.0);
            -rows.map(|(i, e)| along(i) * e).sum::<f64>() / rate
        };

        let mut rates = Vec::with_capacity(decaying);
        let mut driven = Vec::with_capacity(decaying);
        let mut shapes = Vec::with_capacity(decaying);
        let mut weights = Vec::with_capacity(decaying);
        for mode in found {
            rates.push(mode.value * mode.value);
            driven.push(settles(&mode.vector, mode.value * mode.value));
            let (shape, weight) = match &factor {
                Some(l) => (solve_upper(l, &mode.vector), multiply_lower(l, &mode.vector)),
                None => (mode.vector.clone(), mode.vector),
            };
            shapes.push(shape.iter().zip(&scale).map(|(x, s)| x * s).collect());
            weights.push(weight.iter().zip(&scale).map(|(x, s)| x / s).collect());
        }
        let resistive = network.resistive_parts();
        Ok(Modes { network, tree, rates, shapes, weights, driven, potentials, anchor, resistive })
    }

    /// Time constants in second, the slowest first; what is trapped for ever is left out.
    pub fn time_constants(&self) -> Vec<f64> {
        self.rates.iter().map(|r| r.recip()).collect()
    }

    /// The network these modes are of.
    pub fn network(&self) -> &Network {
        &self.network
    }
}

/// Cholesky factor of the scaled capacitance matrix `I + sum of c_l (S p)(S p)^T` over the capacitors that close
/// loops; `None` where there are none. The forest has the largest capacitances, so no term exceeds the identity by
/// more than their number and the factor is well conditioned.
fn loop_factor(network: &Network, tree: &[usize], potentials: &[Vec<f64>], scale: &[f64]) -> Option<Vec<Vec<f64>>> {
    let n = tree.len();
    if n == network.capacitors.len() {
        return None;
    }
    let mut c: Vec<Vec<f64>> = (0..n).map(|i| (0..n).map(|j| f64::from(u8::from(i == j))).collect()).collect();
    for (index, link) in network.capacitors.iter().enumerate().filter(|(i, _)| !tree.contains(i)) {
        debug_assert!(index < network.capacitors.len());
        // Both nodes lie in one group: the common part drops out, and what is left are whole numbers.
        let path: Vec<f64> = (0..n)
            .map(|k| (potentials[link.a][k] - potentials[link.b][k]).round() * scale[k] * link.value.sqrt())
            .collect();
        for i in 0..n {
            for j in 0..n {
                c[i][j] += path[i] * path[j];
            }
        }
    }
    for j in 0..n {
        for k in 0..j {
            let factor = c[j][k];
            for row in c.iter_mut().skip(j) {
                row[j] -= row[k] * factor;
            }
        }
        let root = c[j][j].sqrt();
        c.iter_mut().skip(j).for_each(|row| row[j] /= root);
    }
    Some(c)
}

/// x with L x = b.
fn solve_lower(l: &[Vec<f64>], b: &[f64]) -> Vec<f64> {
    let mut x = b.to_vec();
    for i in 0..x.len() {
        let known: f64 = (0..i).map(|j| l[i][j] * x[j]).sum();
        x[i] = (x[i] - known) / l[i][i];
    }
    x
}

/// x with L^T x = b.
fn solve_upper(l: &[Vec<f64>], b: &[f64]) -> Vec<f64> {
    let mut x = b.to_vec();
    for i in (0..x.len()).rev() {
        let known: f64 = (i + 1..x.len()).map(|j| l[j][i] * x[j]).sum();
        x[i] = (x[i] - known) / l[i][i];
    }
    x
}

/// L b.
fn multiply_lower(l: &[Vec<f64>], b: &[f64]) -> Vec<f64> {
    (0..b.len()).map(|i| (0..=i).map(|j| l[i][j] * b[j]).sum()).collect()
}
