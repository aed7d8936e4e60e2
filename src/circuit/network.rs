//! A network: nodes, resistors and capacitors, and its state before isolation.

use super::CircuitError;
use super::graph::Sets;
use super::laplacian::{charged_potentials, held_potentials, mixed_potentials};

/// A part between two nodes. The voltage of a part is that of `a` against `b`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Edge {
    /// First node, the positive one.
    pub a: usize,
    /// Second node.
    pub b: usize,
    /// Ohm for a resistor, farad for a capacitor; positive and finite.
    pub value: f64,
}

/// Any network of capacitors, resistors and ideal voltage sources.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Network {
    /// How many nodes there are; they are numbered from 0.
    pub nodes: usize,
    /// The node whose potential is 0 V.
    pub reference: usize,
    /// Resistors.
    pub resistors: Vec<Edge>,
    /// Capacitors.
    pub capacitors: Vec<Edge>,
    /// Ideal voltage sources: `a` is `value` volt above `b`. Each reaches the rest through a resistor, so that one
    /// of its nodes is its own.
    pub sources: Vec<Edge>,
}

impl Network {
    pub(super) fn conductances(&self) -> impl Iterator<Item = (usize, usize, f64)> {
        self.resistors.iter().map(|r| (r.a, r.b, r.value.recip()))
    }

    pub(super) fn capacitances(&self) -> impl Iterator<Item = (usize, usize, f64)> {
        self.capacitors.iter().map(|c| (c.a, c.b, c.value))
    }

    /// For every node the smallest node that resistors tie it to; a source is no resistance at all.
    pub(super) fn resistive_parts(&self) -> Vec<usize> {
        let mut sets = Sets::new(self.nodes);
        for r in self.resistors.iter().chain(&self.sources) {
            sets.join(r.a, r.b);
        }
        sets.labels()
    }

    /// For every node the smallest node that capacitors or sources tie it to: potentials that differ by voltages
    /// which can't jump.
    pub(super) fn capacitive_parts(&self) -> Vec<usize> {
        let mut sets = Sets::new(self.nodes);
        for c in self.capacitors.iter().chain(&self.sources) {
            sets.join(c.a, c.b);
        }
        sets.labels()
    }

    /// For every node the smallest node that any parts tie it to.
    pub fn connected_parts(&self) -> Vec<usize> {
        let mut sets = Sets::new(self.nodes);
        for e in self.resistors.iter().chain(&self.capacitors).chain(&self.sources) {
            sets.join(e.a, e.b);
        }
        sets.labels()
    }

    /// For every node, whether resistors tie it to one of `nodes`.
    pub fn parts_held_by_resistors(&self, nodes: &[usize]) -> Vec<bool> {
        let label = self.resistive_parts();
        label.iter().map(|l| nodes.iter().any(|n| label[*n] == *l)).collect()
    }

    /// Potentials in volt of all nodes with some of them held for so long that capacitors carry no current.
    ///
    /// Nodes that no resistors tie to a held node divide by capacitance, from uncharged; a part that nothing ties
    /// to a held node is at 0 V.
    pub fn operating_point(&self, held: &[(usize, f64)]) -> Vec<f64> {
        let mut fixed = vec![None; self.nodes];
        for (node, voltage) in held {
            fixed[*node] = Some(*voltage);
        }
        let by_resistance = held_potentials(self.nodes, self.conductances(), &fixed);
        if by_resistance.iter().all(Option::is_some) {
            return by_resistance.into_iter().flatten().collect();
        }
        // Every floating resistive part is one node of a graph of capacitances; its total charge is zero.
        let label = self.resistive_parts();
        let joined = |n: usize| if by_resistance[n].is_some() { n } else { label[n] };
        let edges = self.capacitances().map(|(a, b, c)| (joined(a), joined(b), c));
        let by_capacitance = held_potentials(self.nodes, edges, &by_resistance);
        (0..self.nodes).map(|n| by_capacitance[joined(n)].unwrap_or(0.0)).collect()
    }

    /// Potentials in volt of all nodes with some of them held for so long that capacitors carry no current, while
    /// currents in ampere are drawn: each from its first node, and given back at its second. `None` for a node that no
    /// resistors tie to a held one.
    pub fn loaded_point(&self, held: &[(usize, f64)], drawn: &[(usize, usize, f64)]) -> Vec<Option<f64>> {
        let mut fixed = vec![None; self.nodes];
        held.iter().for_each(|(node, voltage)| fixed[*node] = Some(*voltage));
        let mut given = vec![0.0; self.nodes];
        for (from, to, ampere) in drawn {
            given[*from] -= ampere;
            given[*to] += ampere;
        }
        mixed_potentials(self.nodes, self.conductances(), &fixed, &given)
    }

    /// Capacitor voltages in volt at infinite time: resistors have made their nodes equal, and each such part has
    /// kept its charge. Exactly zero where nothing is trapped.
    pub(super) fn settled(&self, voltages: &[f64]) -> Vec<f64> {
        let label = self.resistive_parts();
        let mut charge = vec![0.0; self.nodes];
        let mut sets = Sets::new(self.nodes);
        for (c, u) in self.capacitors.iter().zip(voltages) {
            if label[c.a] != label[c.b] {
                charge[label[c.a]] += c.value * u;
                charge[label[c.b]] -= c.value * u;
                sets.join(label[c.a], label[c.b]);
            }
        }
        let edges = self.capacitances().map(|(a, b, c)| (label[a], label[b], c));
        let potential = charged_potentials(self.nodes, edges, charge, &sets.labels());
        self.capacitors.iter().map(|c| potential[label[c.a]] - potential[label[c.b]]).collect()
    }

    /// Checks that capacitor voltages in volt add up to zero around every loop of capacitors.
    ///
    /// # Errors
    /// [`CircuitError::Contradiction`] names the capacitor that closes the first loop that does not.
    pub fn check_loops(&self, voltages: &[f64]) -> Result<(), CircuitError> {
        let mut potential: Vec<Option<f64>> = vec![None; self.nodes];
        let mut sets = Sets::new(self.nodes);
        let tree: Vec<bool> = self.capacitors.iter().map(|c| sets.join(c.a, c.b)).collect();
        let scale = voltages.iter().fold(0.0f64, |m, u| m.max(u.abs()));
        for start in 0..self.nodes {
            if potential[start].is_none() {
                potential[start] = Some(0.0);
                let mut todo = vec![start];
                while let Some(node) = todo.pop() {
                    let here = potential[node].unwrap_or(0.0);
                    for ((c, u), _) in self.capacitors.iter().zip(voltages).zip(&tree).filter(|(_, t)| **t) {
                        let other = match node {
                            n if n == c.a && potential[c.b].is_none() => Some((c.b, here - u)),
                            n if n == c.b && potential[c.a].is_none() => Some((c.a, here + u)),
                            _ => None,
                        };
                        if let Some((next, voltage)) = other {
                            potential[next] = Some(voltage);
                            todo.push(next);
                        }
                    }
                }
            }
        }
        for (index, (c, u)) in self.capacitors.iter().zip(voltages).enumerate() {
            let sum = potential[c.a].unwrap_or(0.0) - potential[c.b].unwrap_or(0.0) - u;
            if sum.abs() > 1e-9 * scale {
                return Err(CircuitError::Contradiction { capacitor: index, sum });
            }
        }
        Ok(())
    }

    /// Energy in joule of all capacitors at these voltages in volt.
    pub fn stored_energy(&self, voltages: &[f64]) -> f64 {
        self.capacitors.iter().zip(voltages).map(|(c, u)| 0.5 * c.value * u * u).sum()
    }
}
