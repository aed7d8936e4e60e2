//! The charge that a short between two points would pass.

use super::laplacian::held_potentials;
use super::{Edge, Network};

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
    /// Integrated over all time, Kirchhoff's law at the nodes is that of a resistive network into which every node
    /// injects the charge that its capacitors lose. The share of it that leaves through `a` is, by reciprocity, the
    /// potential w of that node with `a` held at 1 and `b` at 0. So the short passes the sum of
    /// `c (w_i - w_j) (u - u_inf)` over the capacitors, with `u_inf` what stays trapped beside the short.
    pub fn new(network: &Network, a: usize, b: usize) -> Self {
        let mut held = vec![None; network.nodes];
        (held[a], held[b]) = (Some(1.0), Some(0.0));
        let share = held_potentials(network.nodes, network.conductances(), &held);
        // A part that no resistor ties to the short keeps its charge: it injects nothing on the whole.
        let share: Vec<f64> = share.into_iter().map(|w| w.unwrap_or(0.0)).collect();
        let per_volt: Vec<f64> = network.capacitors.iter().map(|c| c.value * (share[c.a] - share[c.b])).collect();

        let join = |e: &Edge| {
            let one = |n: usize| if n == b { a } else { n };
            Edge { a: one(e.a), b: one(e.b), value: e.value }
        };
        let shorted = Network {
            nodes: network.nodes,
            reference: network.reference,
            resistors: network.resistors.iter().map(join).collect(),
            capacitors: network.capacitors.iter().map(join).collect(),
            sources: Vec::new(),
        };
        let mut unit = vec![0.0; per_volt.len()];
        let weights = (0..per_volt.len())
            .map(|index| {
                unit[index] = 1.0;
                let trapped = shorted.settled(&unit);
                unit[index] = 0.0;
                per_volt[index] - per_volt.iter().zip(trapped).map(|(q, u)| q * u).sum::<f64>()
            })
            .collect();
        ShortCharge { weights }
    }

    /// Coulomb per volt of every capacitor, in the order of the network; signed.
    pub fn weights(&self) -> &[f64] {
        &self.weights
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn edge(a: usize, b: usize, value: f64) -> Edge {
        Edge { a, b, value }
    }

    #[test]
    fn a_short_passes_c_v_of_one_capacitance_and_all_of_a_section_behind_a_resistor() {
        let mut network = Network { nodes: 3, capacitors: vec![edge(1, 0, 2.0)], ..Network::default() };
        assert_eq!(ShortCharge::new(&network, 1, 0).weights(), [2.0]);
        // A second section behind a series resistor discharges through the short as well.
        network.resistors.push(edge(1, 2, 5.0));
        network.capacitors.push(edge(2, 0, 3.0));
        assert_eq!(ShortCharge::new(&network, 1, 0).weights(), [2.0, 3.0]);
        // With a bleeder of its own it shares: 5 ohm towards the short, 15 ohm past it.
        network.resistors.push(edge(2, 0, 15.0));
        approx::assert_relative_eq!(ShortCharge::new(&network, 1, 0).weights()[1], 3.0 * 0.75, max_relative = 1e-15);
    }

    #[test]
    fn what_a_floating_joint_traps_does_not_pass_the_short() {
        // 1 F on top of 3 F, charged unequally: the joint keeps its charge, the ends come to one potential.
        // With u1 = 1 V, u2 = 0 the joint holds -1 C; after the short u1 = -u2 = 1/4 V, so 3/4 C passed.
        let capacitors = vec![edge(1, 2, 1.0), edge(2, 0, 3.0)];
        let network = Network { nodes: 3, capacitors, ..Network::default() };
        let weights = ShortCharge::new(&network, 1, 0).weights().to_vec();
        approx::assert_relative_eq!(weights[0], 0.75, max_relative = 1e-15);
        approx::assert_relative_eq!(weights[1], 0.75, max_relative = 1e-15);
    }
}
