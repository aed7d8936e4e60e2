//! What follows from an initial state: every voltage as a sum of exponentials.

use super::{CircuitError, ExpSum, Modes, Network};
use std::sync::Arc;

/// A network let go from an initial state.
#[derive(Debug, Clone)]
pub struct Response {
    modes: Arc<Modes>,
    /// Amplitude of every mode.
    amplitudes: Vec<f64>,
    /// States at infinite time, in volt.
    settled: Vec<f64>,
    /// Potentials at the start: a part that nothing ties to the reference keeps that of its anchor.
    start: Vec<f64>,
    initial_energy: f64,
    settled_energy: f64,
}

impl Modes {
    /// Lets the network go with these capacitor voltages in volt (one per capacitor, in order). `potentials` are
    /// those of all nodes before: only parts that nothing ties to the reference refer to them.
    ///
    /// # Errors
    /// [`CircuitError::Contradiction`] where the voltages do not add up to zero around a loop of capacitors.
    pub fn response(self: &Arc<Self>, voltages: &[f64], potentials: &[f64]) -> Result<Response, CircuitError> {
        let network = self.network();
        if self.tree.len() < network.capacitors.len() {
            network.check_loops(voltages)?;
        }
        let nothing_trapped = self.rates.len() == self.tree.len();
        let settled_all = if nothing_trapped { vec![0.0; voltages.len()] } else { network.settled(voltages) };
        let settled: Vec<f64> = self.tree.iter().map(|c| settled_all[*c]).collect();
        let falling: Vec<f64> = self.tree.iter().zip(&settled).map(|(c, s)| voltages[*c] - s).collect();
        let amplitudes = self.weights.iter().map(|w| w.iter().zip(&falling).map(|(x, u)| x * u).sum()).collect();
        Ok(Response {
            modes: Arc::clone(self),
            amplitudes,
            settled,
            start: potentials.to_vec(),
            initial_energy: network.stored_energy(voltages),
            settled_energy: network.stored_energy(&settled_all),
        })
    }
}

impl Response {
    /// The modes that it is made of.
    pub fn modes(&self) -> &Modes {
        &self.modes
    }

    /// The network.
    pub fn network(&self) -> &Network {
        self.modes.network()
    }

    /// Voltage in volt of node `a` against node `b`.
    pub fn across(&self, a: usize, b: usize) -> ExpSum {
        let modes = &self.modes;
        let (pa, pb) = (&modes.potentials[a], &modes.potentials[b]);
        let difference: Vec<f64> = pa.iter().zip(pb).map(|(x, y)| x - y).collect();
        let dot = |other: &[f64]| difference.iter().zip(other).map(|(x, y)| x * y).sum::<f64>();
        // Nodes that resistors join end at one potential: exactly, not to rounding.
        let constant = if modes.resistive[a] == modes.resistive[b] {
            0.0
        } else {
            let anchors = self.start[modes.anchor[a]] - self.start[modes.anchor[b]];
            dot(&self.settled) + if modes.anchor[a] == modes.anchor[b] { 0.0 } else { anchors }
        };
        let terms = modes.shapes.iter().zip(&modes.rates).zip(&self.amplitudes);
        ExpSum::new(constant, terms.map(|((shape, rate), amplitude)| (dot(shape) * amplitude, *rate)))
    }

    /// Energy in joule in all capacitors as a function of time, those of `part` only where it is given: the
    /// label of [`Network::connected_parts`].
    pub fn stored_energy(&self, part: Option<usize>) -> ExpSum {
        let network = self.network();
        let label = network.connected_parts();
        let chosen = network.capacitors.iter().filter(|c| part.is_none_or(|p| label[c.a] == p));
        chosen.fold(ExpSum::default(), |sum, c| sum.plus(&self.across(c.a, c.b).squared().times(0.5 * c.value)))
    }

    /// Energy in joule in all capacitors at the start.
    pub fn initial_energy(&self) -> f64 {
        self.initial_energy
    }

    /// Checks that what the capacitors lose is what the resistors take, to 1e-9 of the energy at the start.
    ///
    /// # Errors
    /// [`CircuitError::Unbalanced`] where it is not.
    pub fn check_balance(&self) -> Result<(), CircuitError> {
        let taken: f64 = self
            .network()
            .resistors
            .iter()
            .filter(|r| r.a != r.b)
            .map(|r| self.across(r.a, r.b).integral_of_square(f64::INFINITY) / r.value)
            .sum();
        let (before, after) = (self.initial_energy, self.settled_energy + taken);
        let holds = (before - after).abs() <= 1e-9 * before;
        if holds { Ok(()) } else { Err(CircuitError::Unbalanced { before, after }) }
    }
}
