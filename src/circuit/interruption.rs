//! The state that a three-phase switch leaves when its poles open one after the other.
//!
//! Only capacitances count here: at line frequency a bleeder carries a small part of what a capacitor carries, and
//! between two current zeros it drains nothing that matters. All currents are then in quadrature to voltages, so a
//! current zero of a pole is a crest of the charge that stands on its node. Every potential is the sum of an
//! alternating part, `Re(phasor exp(j w t))`, and of a constant part, which charges that were left behind make:
//!
//! - while a pole is closed its node follows its source: no constant part;
//! - once it has opened at its current zero its node floats with the charge of that moment. The alternating part of
//!   this charge is nought from then on, and the constant one is the whole.
//!
//! By superposition each part is a solution of the same graph of capacitances, with the closed poles (and earth) held.
//! The frequency cancels, and no phase angle is ever needed: the charge at a crest is the magnitude of its phasor.
//!
//! A pole that is the last one of its part of the network carries no current: the part floats with it. Its opening
//! changes no voltage inside the part, and neither does its staying closed.

use super::graph::Sets;
use super::laplacian::{held_potentials, mixed_potentials};
use super::network::Network;

/// An alternating potential: real and imaginary part of its crest phasor, in volt.
pub type Phasor = [f64; 2];

/// What feeds a network through three poles.
#[derive(Debug, Clone, PartialEq)]
pub struct Feed {
    /// Node and source of each pole. The sources' sum is zero: line voltages are all that an isolated network sees.
    pub poles: Vec<(usize, Phasor)>,
    /// The node that is tied to the neutral of the sources, where there is one.
    pub earth: Option<usize>,
    /// Pairs of nodes that are one for the alternating current (resistors that carry it without a notable drop).
    pub joined: Vec<(usize, usize)>,
}

/// Sources of three poles in positive sequence, in volt, for a crest of the line-to-line voltage.
pub fn three_phases(line_crest: f64) -> [Phasor; 3] {
    let crest = line_crest / 3f64.sqrt();
    let quadrature = 0.5 * line_crest;
    [[crest, 0.0], [-0.5 * crest, -quadrature], [-0.5 * crest, quadrature]]
}

/// A network as the switch sees it: nodes that are one, capacitances between them, which of them are held.
struct Fed<'a> {
    network: &'a Network,
    feed: &'a Feed,
    /// For every node the one that stands for all that are one with it.
    one: Vec<usize>,
    edges: Vec<(usize, usize, f64)>,
    /// For every node its part that hangs together by capacitances.
    part: Vec<usize>,
    /// Which poles are closed.
    closed: Vec<bool>,
    /// Charge in coulomb that was left on every node that floats.
    charge: Vec<f64>,
}

impl<'a> Fed<'a> {
    fn new(network: &'a Network, feed: &'a Feed) -> Self {
        let held: Vec<usize> = feed.poles.iter().map(|(n, _)| *n).chain(feed.earth).collect();
        let mut one = Sets::new(network.nodes);
        for (a, b) in &feed.joined {
            // Two sources are never one: between them even a small resistor has all of their voltage.
            let (ra, rb) = (one.find(*a), one.find(*b));
            let has_source = |root: usize, sets: &mut Sets| held.iter().any(|n| sets.find(*n) == root);
            if ra != rb && !(has_source(ra, &mut one) && has_source(rb, &mut one)) {
                one.join(ra, rb);
            }
        }
        let one = one.labels();
        let edges: Vec<(usize, usize, f64)> =
            network.capacitances().map(|(a, b, c)| (one[a], one[b], c)).filter(|(a, b, _)| a != b).collect();
        let mut part = Sets::new(network.nodes);
        edges.iter().for_each(|(a, b, _)| {
            part.join(*a, *b);
        });
        let part = part.labels();
        let part = (0..network.nodes).map(|n| part[one[n]]).collect();
        Fed { network, feed, one, edges, part, closed: vec![true; feed.poles.len()], charge: vec![0.0; network.nodes] }
    }

    /// Nodes that are held now, each with its source.
    fn held(&self) -> impl Iterator<Item = (usize, Phasor)> {
        let poles = self.feed.poles.iter().zip(&self.closed).filter(|(_, closed)| **closed);
        poles.map(|((n, source), _)| (self.one[*n], *source)).chain(self.feed.earth.map(|n| (self.one[n], [0.0; 2])))
    }

    fn solved(&self, source: impl Fn(Phasor) -> f64, charge: &[f64]) -> Vec<Option<f64>> {
        let mut held = vec![None; self.network.nodes];
        self.held().for_each(|(n, phasor)| held[n] = Some(source(phasor)));
        mixed_potentials(self.network.nodes, self.edges.iter().copied(), &held, charge)
    }

    /// One component (0 or 1) of the alternating potentials.
    fn alternating(&self, component: usize) -> Vec<Option<f64>> {
        self.solved(|phasor| phasor[component], &vec![0.0; self.network.nodes])
    }

    /// The constant parts of the potentials.
    fn constant(&self) -> Vec<Option<f64>> {
        self.solved(|_| 0.0, &self.charge)
    }

    /// Charge in coulomb on a node at these potentials.
    fn charge_at(&self, node: usize, potentials: &[Option<f64>]) -> f64 {
        let at = |n: usize| potentials[n].unwrap_or(0.0);
        let edges = self.edges.iter().filter(|(a, b, _)| *a == node || *b == node);
        edges.map(|(a, b, c)| c * (at(node) - at(if *a == node { *b } else { *a }))).sum()
    }

    /// Opens a pole where its charge is at its positive or negative crest.
    fn open(&mut self, pole: usize, positive: bool) {
        let node = self.one[self.feed.poles[pole].0];
        let others = self.held().filter(|(n, _)| *n != node && self.part[*n] == self.part[node]).count();
        if others > 0 {
            let [re, im] = [0, 1].map(|component| self.charge_at(node, &self.alternating(component)));
            let crest = re.hypot(im);
            self.charge[node] = self.charge_at(node, &self.constant()) + if positive { crest } else { -crest };
            self.closed[pole] = false;
        }
    }

    /// Potentials of all nodes from those of the nodes that capacitances tie to a held one. The others take what the
    /// resistors give them, each part that hangs together by capacitances as one: there is no charge in it.
    fn spread(&self, known: &[Option<f64>]) -> Vec<f64> {
        let known: Vec<Option<f64>> = (0..self.network.nodes).map(|n| known[self.one[n]]).collect();
        let node = |n: usize| if known[n].is_some() { n } else { self.part[n] };
        let edges = self.network.conductances().map(|(a, b, g)| (node(a), node(b), g));
        let by_resistance = held_potentials(self.network.nodes, edges, &known);
        (0..self.network.nodes).map(|n| by_resistance[node(n)].unwrap_or(0.0)).collect()
    }
}

impl Network {
    /// Crest phasors in volt of the potentials of all nodes while every pole of `feed` is closed.
    pub fn fed_potentials(&self, feed: &Feed) -> Vec<Phasor> {
        let fed = Fed::new(self, feed);
        let [re, im] = [0, 1].map(|component| fed.spread(&fed.alternating(component)));
        re.into_iter().zip(im).map(|(re, im)| [re, im]).collect()
    }

    /// Potentials in volt of all nodes after the poles of `feed` have opened in this order, each at the current zero at
    /// which the charge on its node is at its positive or negative crest. Their differences are defined within each
    /// part that hangs together by capacitances.
    ///
    /// Poles that are left out stay closed: where the part has an earth or a second closed pole, its alternating
    /// voltages go on and are not in what is returned.
    pub fn interrupted_potentials(&self, feed: &Feed, order: &[(usize, bool)]) -> Vec<f64> {
        let mut fed = Fed::new(self, feed);
        order.iter().for_each(|(pole, positive)| fed.open(*pole, *positive));
        fed.spread(&fed.constant())
    }

    /// For every node the label of its part that hangs together by capacitances and by what `feed` joins, with the node
    /// `without` left out (its own label is its number).
    pub fn fed_parts(&self, feed: &Feed, without: Option<usize>) -> Vec<usize> {
        let mut fed = Fed::new(self, feed);
        let gone = without.map(|n| fed.one[n]);
        fed.edges.retain(|(a, b, _)| Some(*a) != gone && Some(*b) != gone);
        let mut part = Sets::new(self.nodes);
        fed.edges.iter().for_each(|(a, b, _)| {
            part.join(*a, *b);
        });
        let part = part.labels();
        (0..self.nodes).map(|n| part[fed.one[n]]).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::super::Edge;
    use super::*;
    use approx::assert_relative_eq;

    fn capacitors(nodes: usize, list: &[(usize, usize, f64)]) -> Network {
        let capacitors = list.iter().map(|(a, b, value)| Edge { a: *a, b: *b, value: *value }).collect();
        Network { nodes, capacitors, ..Network::default() }
    }

    /// Poles at nodes 0, 1, 2; a line voltage of 1 V crest.
    fn feed(earth: Option<usize>) -> Feed {
        let [a, b, c] = three_phases(1.0);
        Feed { poles: vec![(0, a), (1, b), (2, c)], earth, joined: Vec::new() }
    }

    const DELTA: [(usize, usize, f64); 3] = [(0, 1, 1.0), (1, 2, 1.0), (2, 0, 1.0)];

    #[test]
    fn an_isolated_bank_keeps_1_366_times_the_line_crest_across_one_pair() {
        // 3/2 of the phase crest and half the line crest: (sqrt(3) + 1) / 2 of the line crest.
        let factor = (3f64.sqrt() + 1.0) / 2.0;
        let star = [(0, 3, 3.0), (1, 3, 3.0), (2, 3, 3.0)];
        for network in [capacitors(3, &DELTA), capacitors(4, &star)] {
            let v = network.interrupted_potentials(&feed(None), &[(0, true), (1, true), (2, true)]);
            assert_relative_eq!((v[2] - v[0]).abs(), factor, max_relative = 1e-14);
            assert_relative_eq!((v[1] - v[2]).abs(), 1.0, max_relative = 1e-14);
            assert_relative_eq!((v[0] - v[1]).abs(), factor - 1.0, max_relative = 1e-13);
        }
    }

    #[test]
    fn the_last_pole_of_an_isolated_bank_may_stay_closed_and_nothing_changes() {
        let network = capacitors(3, &[(0, 1, 1.1), (1, 2, 0.95), (2, 0, 1.0)]);
        let all = network.interrupted_potentials(&feed(None), &[(1, true), (0, false), (2, true)]);
        let stuck = network.interrupted_potentials(&feed(None), &[(1, true), (0, false)]);
        for (x, y) in all.iter().zip(stuck) {
            assert_relative_eq!(*x, y, epsilon = 1e-15);
        }
    }

    #[test]
    fn a_grounded_star_keeps_the_phase_crest_on_every_leg_and_twice_that_across_a_pair() {
        let network = capacitors(4, &[(0, 3, 2.0), (1, 3, 1.0), (2, 3, 1.5)]);
        let phase = 1.0 / 3f64.sqrt();
        let v = network.interrupted_potentials(&feed(Some(3)), &[(0, true), (2, false), (1, true)]);
        for (leg, sign) in [(0, 1.0), (1, 1.0), (2, -1.0)] {
            assert_relative_eq!(v[leg] - v[3], sign * phase, max_relative = 1e-14);
        }
        assert_relative_eq!(v[0] - v[2], 2.0 * phase, max_relative = 1e-14);
        assert_relative_eq!(2.0 * phase, 1.1547, max_relative = 1e-4);
    }

    #[test]
    fn potentials_do_not_jump_where_a_pole_opens() {
        // Pole 0 opens at its crest: just then the network is at Re(phasor / direction of its charge), whole and
        // without constant parts. Behind it the same potentials come from both parts together.
        let network = capacitors(4, &[(0, 1, 1.3), (1, 2, 0.7), (2, 0, 1.0), (0, 3, 0.4), (1, 3, 0.9), (2, 3, 0.2)]);
        let feed = feed(Some(3));
        let mut fed = Fed::new(&network, &feed);
        let parts = [0, 1].map(|component| fed.alternating(component));
        let [re, im] = [0, 1].map(|component| fed.charge_at(0, &parts[component]));
        let turn = |x: &[Option<f64>], y: &[Option<f64>], n: usize| {
            (x[n].unwrap_or(0.0) * re + y[n].unwrap_or(0.0) * im) / re.hypot(im)
        };
        let before: Vec<f64> = (0..4).map(|n| turn(&parts[0], &parts[1], n)).collect();
        fed.open(0, true);
        let after = [0, 1].map(|component| fed.alternating(component));
        let constant = fed.constant();
        for (n, before) in before.iter().enumerate() {
            let v = turn(&after[0], &after[1], n) + constant[n].unwrap_or(0.0);
            assert_relative_eq!(v, *before, epsilon = 1e-14);
        }
    }

    #[test]
    fn what_a_joined_pair_carries_stands_at_the_same_potential_on_both_sides() {
        let mut network = capacitors(4, &[(3, 1, 1.0), (1, 2, 1.0), (2, 3, 1.0)]);
        network.resistors.push(Edge { a: 0, b: 3, value: 0.1 });
        let joined = Feed { joined: vec![(0, 3)], ..feed(None) };
        let v = network.interrupted_potentials(&joined, &[(0, true), (1, true), (2, true)]);
        let plain = capacitors(3, &DELTA).interrupted_potentials(&feed(None), &[(0, true), (1, true), (2, true)]);
        for (n, like) in [(0, 0), (3, 0), (1, 1), (2, 2)] {
            assert_relative_eq!(v[n] - v[2], plain[like] - plain[2], epsilon = 1e-14);
        }
    }
}
