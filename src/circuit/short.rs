//! The charge that a short between two points would pass.

use super::{CircuitError, Edge, Modes, Network};
use std::sync::Arc;

/// Charge that an ideal short between two nodes passes from the moment it closes, for any capacitor voltages at
/// that moment, with every resistor in place. For one capacitance it is C V.
#[derive(Debug, Clone)]
pub struct ShortCharge {
    /// Coulomb per volt of every capacitor.
    weights: Vec<f64>,
}

impl ShortCharge {
    /// The short between nodes `a` and `b` of `network`.
    ///
    /// The charge is a linear function of the capacitor voltages; its weights come from the balance at node `a`:
    /// what its capacitors lose, less what its resistors carry away, goes through the short.
    ///
    /// # Errors
    /// Those of [`Modes::new`].
    pub fn new(network: &Network, a: usize, b: usize) -> Result<Self, CircuitError> {
        let join = |n: usize| if n == b { a } else { n };
        let joined = |edges: &[Edge]| -> Vec<Edge> {
            edges.iter().map(|e| Edge { a: join(e.a), b: join(e.b), value: e.value }).collect()
        };
        let kept = |edges: Vec<Edge>| -> Vec<Edge> { edges.into_iter().filter(|e| e.a != e.b).collect() };
        let all = joined(&network.capacitors);
        let shorted = Network {
            nodes: network.nodes,
            reference: join(network.reference),
            resistors: kept(joined(&network.resistors)),
            capacitors: kept(all.clone()),
        };
        let alive: Vec<bool> = all.iter().map(|e| e.a != e.b).collect();
        let modes = Arc::new(Modes::new(shorted)?);
        let zero = vec![0.0; network.nodes];
        let mut weights = Vec::with_capacity(network.capacitors.len());
        for index in 0..network.capacitors.len() {
            let unit: Vec<f64> = (0..network.capacitors.len()).map(|i| f64::from(u8::from(i == index))).collect();
            let living: Vec<f64> = unit.iter().zip(&alive).filter(|(_, l)| **l).map(|(u, _)| *u).collect();
            let start = modes.network().redistributed(&living);
            let response = modes.response(&start, &zero)?;
            let at_a = |e: &Edge| f64::from(i8::from(e.a == a) - i8::from(e.b == a));
            let mut charge = 0.0;
            let settled = modes.network().settled(&start);
            let mut settled = settled.iter();
            for ((c, u), living) in network.capacitors.iter().zip(&unit).zip(&alive) {
                let end = if *living { settled.next().copied().unwrap_or(0.0) } else { 0.0 };
                charge += at_a(c) * c.value * (u - end);
            }
            for r in network.resistors.iter().filter(|r| at_a(r) != 0.0 && join(r.a) != join(r.b)) {
                charge -= at_a(r) * response.across(join(r.a), join(r.b)).integral_of_decay() / r.value;
            }
            weights.push(charge);
        }
        Ok(ShortCharge { weights })
    }

    /// Coulomb per volt of every capacitor, in the order of the network; signed.
    pub fn weights(&self) -> &[f64] {
        &self.weights
    }
}
