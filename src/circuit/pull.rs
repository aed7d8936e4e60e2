//! What a current of one ampere through a sink does to a network.

use super::Modes;
use super::graph::Sets;
use super::laplacian::{WeightedGraph, charged_potentials, held_potentials};

/// One ampere that flows out of node `a` and into node `b`.
#[derive(Debug, Clone)]
pub(super) struct Pull {
    pub a: usize,
    pub b: usize,
    /// For every mode, the amplitude per second that it is driven with: by reciprocity the voltage that the mode
    /// shows between the two nodes.
    pub force: Vec<f64>,
    /// For every state the slope in V/s of charge that no resistor gives back.
    pub slope: Vec<f64>,
    /// For every node, by how many volt it jumps at once: nodes without a capacitor, and floating groups.
    pub jump: Vec<f64>,
}

impl Modes {
    /// The pull of one ampere from `a` to `b`, two nodes that some parts connect.
    pub(super) fn pull(&self, a: usize, b: usize) -> Pull {
        let between: Vec<f64> = self.potentials[a].iter().zip(&self.potentials[b]).map(|(x, y)| y - x).collect();
        let force = self.shapes.iter().map(|shape| shape.iter().zip(&between).map(|(s, x)| s * x).sum());
        Pull { a, b, force: force.collect(), slope: self.lasting_slope(a, b), jump: self.jump(a, b) }
    }

    /// Every resistive part moves as one; the capacitors between parts take up the charge.
    fn lasting_slope(&self, a: usize, b: usize) -> Vec<f64> {
        let network = self.network();
        let label = &self.resistive;
        if label[a] == label[b] {
            return vec![0.0; self.tree.len()];
        }
        let mut charge = vec![0.0; network.nodes];
        charge[label[a]] -= 1.0;
        charge[label[b]] += 1.0;
        let joined = || network.capacitances().map(|(a, b, c)| (label[a], label[b], c));
        let mut sets = Sets::new(network.nodes);
        for (a, b, _) in joined() {
            sets.join(a, b);
        }
        let anchor = sets.labels();
        let potential = charged_potentials(network.nodes, joined(), charge, &anchor);
        let slope = |c: &usize| {
            let part = network.capacitors[*c];
            potential[label[part.a]] - potential[label[part.b]]
        };
        self.tree.iter().map(slope).collect()
    }

    /// With capacitors as one node each with what they join, the current flows in the resistors alone.
    fn jump(&self, a: usize, b: usize) -> Vec<f64> {
        let network = self.network();
        let group = network.capacitive_parts();
        let (from, to) = (group[a], group[b]);
        if from == to {
            return vec![0.0; network.nodes];
        }
        let edges = || network.conductances().map(|(x, y, g)| (group[x], group[y], g)).filter(|(x, y, _)| x != y);
        let mut graph = WeightedGraph::new(network.nodes, edges());
        graph.eliminate_all((0..network.nodes).filter(|n| *n != from && *n != to).collect());
        let ohm = graph.weight(from, to).recip();
        let mut held = vec![None; network.nodes];
        (held[from], held[to]) = (Some(-ohm), Some(0.0));
        let potential = held_potentials(network.nodes, edges(), &held);
        let of = |node: usize| potential[group[node]].unwrap_or(0.0);
        // The potential of the anchor stays.
        (0..network.nodes).map(|n| of(n) - of(self.anchor[n])).collect()
    }
}
