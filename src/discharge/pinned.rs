//! Loose values whose direction is proven for a figure, so that no search has to ask for it.
//!
//! What is proven, and why. Take a bank at its operating point, every node tied to the terminals by resistors, and
//! let go. The network falls into blocks that hang together at single nodes only (cut vertices). No current passes
//! from one block into another through a single node, so after isolation each block is on its own; before, the blocks
//! between the terminals form a chain that carries one current.
//!
//! Let every capacitor of a block touch one node r, where r is an end of the block in that chain. Count potentials
//! from r, with the sign that makes them positive. Then `C y' = -G y` with C diagonal and G an M-matrix (it stays one
//! when nodes without a capacitor are eliminated):
//!
//! 1. `exp(-C^-1 G t)` and every unit response z are entrywise >= 0 (Berman and Plemmons 1994, chapter 6), so y >= 0.
//! 2. At the operating point `G y0` is 0 inside the block and the chain's current, >= 0, at its other end. y' obeys the
//!    same equation from `y'(0) = -C^-1 G y0 <= 0`, so y' <= 0 at all times: every potential only falls.
//! 3. A capacitance: dv/dc = -integral of z v' >= 0. One with absorption that scales as a whole likewise: it adds the
//!    current that it gives, which is >= 0 because it and its branches only fall.
//! 4. A resistor on r: dv/dg = -integral of z v <= 0 with the state at isolation kept; and with one end of the block
//!    held, each potential at the operating point falls with g too (an M-matrix again). Its block's share of the
//!    chain's voltage grows with the block's own resistance, which grows with each of its resistors (Rayleigh 1899).
//! 5. A resistor of another block of the chain only lowers the chain's current, so all of y is scaled down with it.
//!    Parts that are in no block of the chain carry nothing: they don't matter, and neither does the capacitance of
//!    another block.
//! 6. Where a block has one capacitor, across both ends of the block and across the pair, v = V0 exp(-t/(rho C)) with
//!    the block's resistance rho, in which every resistor of it is proven.
//!
//! v grows at EVERY moment with such a value, so the last time above any level does. Across several blocks of the
//! chain the voltage is the sum of theirs; a value proven one way in one and the other way in another is not pinned.
//! Stored energy is a sum of `c u^2 / 2`; before isolation the voltages of a bank tied by resistors do not depend on
//! any capacitance, so it grows with each.

use super::figure::Figure;
use super::model::{Model, Part, PartKind};
use super::scenario::Scenario;

/// What is proven of a loose value for one figure.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum Pin {
    /// Nothing: it has to be searched.
    Free,
    /// The figure is greatest at the highest value.
    High,
    /// The figure is greatest at the lowest value.
    Low,
    /// The figure does not depend on it.
    Idle,
}

impl Pin {
    /// What holds for a sum of two figures.
    fn and(self, other: Pin) -> Pin {
        match (self, other) {
            (x, Pin::Idle) => x,
            (Pin::Idle, y) => y,
            (x, y) if x == y => x,
            _ => Pin::Free,
        }
    }
}

/// A part of the network at isolation: nodes, loose value.
#[derive(Clone, Copy)]
struct Element {
    nodes: (usize, usize),
    parameter: Option<usize>,
    capacitor: bool,
}

/// The network of a scenario as blocks. `None` where the argument does not apply: another network before isolation
/// than after it (a contact that closes makes one too), voltages of their own, nodes that only capacitors tie, sinks that draw, other than two terminals.
pub(super) struct Blocks {
    elements: Vec<Element>,
    /// For every element the number of its block.
    block: Vec<usize>,
    /// For every element whether its block is in the chain between the terminals.
    chain: Vec<bool>,
    terminals: (usize, usize),
    loose: usize,
}

impl Blocks {
    pub fn of(model: &Model, scenario: &Scenario) -> Option<Self> {
        let own = model.own_voltages.iter().any(Option::is_some) && !scenario.drops_own_voltages;
        let switched = model.switches(&scenario.after);
        if own || switched || scenario.before != scenario.after || scenario.drawing(model).contains(&true) {
            return None;
        }
        let map = model.merged(&scenario.after);
        let terminals = match model.terminals.as_slice() {
            [a, b] if map[*a] != map[*b] => (map[*a], map[*b]),
            _ => return None,
        };
        let ohms = model.ohms(&scenario.after, &model.nominal_point(), &[]);
        let element = |part: &Part, capacitor: bool| {
            let nodes = (map[part.a], map[part.b]);
            (nodes.0 != nodes.1).then_some(Element { nodes, parameter: part.parameter, capacitor })
        };
        // Absorption branches stand in parallel to their capacitor and scale with it: they are one element.
        let lone = |part: &&Part| !matches!(part.kind, PartKind::Absorbing(_));
        let there = model.resistors.iter().zip(ohms).filter(|(_, ohm)| ohm.is_finite()).map(|(r, _)| r);
        let resistors = there.filter(lone).filter_map(|r| element(r, false));
        let capacitors = model.capacitors.iter().filter(lone).filter_map(|c| element(c, true));
        let elements: Vec<Element> = resistors.chain(capacitors).collect();
        let network = model.network(&scenario.after, &model.nominal_point(), &[]);
        let tied = network.parts_held_by_resistors(&[terminals.0, terminals.1]);
        if !elements.iter().all(|e| tied[e.nodes.0] && tied[e.nodes.1]) {
            return None;
        }
        let mut edges: Vec<(usize, usize)> = elements.iter().map(|e| e.nodes).collect();
        let block = blocks(network.nodes, &edges);
        let chain = with_path(network.nodes, &mut edges, terminals);
        Some(Blocks { elements, block, chain, terminals, loose: model.passive })
    }

    /// Pins for `figure`, one for every loose value.
    pub fn pins(&self, model: &Model, map: &[usize], figure: &Figure) -> Vec<Pin> {
        let free = vec![Pin::Free; self.loose];
        let at = |pair: usize| (map[model.pairs[pair].0], map[model.pairs[pair].1]);
        match *figure {
            Figure::VoltageWait { pair, .. }
            | Figure::VoltageAt { pair, .. }
            | Figure::TouchWait { pair, energy: None, .. } => self.voltage(at(pair)).unwrap_or(free),
            Figure::TouchWait { pair, energy: Some(_), .. } => {
                let both = self.voltage(at(pair)).zip(self.energy());
                both.map_or(free, |(v, e)| v.into_iter().zip(e).map(|(x, y)| x.and(y)).collect())
            }
            Figure::EnergyAt { .. } | Figure::EnergyWait { .. } => self.energy().unwrap_or(free),
            Figure::StoredAt { t: 0.0 } => self.by_kind(|e| if e.capacitor { Pin::High } else { Pin::Free }),
            Figure::Start { .. } => self.by_kind(|e| if e.capacitor { Pin::Idle } else { Pin::Free }),
            Figure::StandingPower { resistor } => {
                let part = &model.resistors[resistor];
                let nodes = (map[part.a], map[part.b]);
                // V^2/R of a resistor across both terminals; any other depends on its neighbours.
                let alone = nodes == self.terminals || (nodes.1, nodes.0) == self.terminals;
                self.by_kind(|e| match (e.capacitor, alone) {
                    (true, _) => Pin::Idle,
                    (false, true) if e.parameter == part.parameter => Pin::Low,
                    (false, true) => Pin::Idle,
                    (false, false) => Pin::Free,
                })
            }
            _ => free,
        }
    }

    /// True where it is proven that the voltage between two nodes only falls.
    pub fn only_falls(&self, pair: (usize, usize)) -> bool {
        self.voltage(pair).is_some()
    }

    /// What a rule for single elements says of every loose value; one that moves nothing at isolation is idle.
    fn by_kind(&self, rule: impl Fn(&Element) -> Pin) -> Vec<Pin> {
        let mut pins = vec![Pin::Idle; self.loose];
        for element in &self.elements {
            if let Some(p) = element.parameter.filter(|p| *p < self.loose) {
                pins[p] = pins[p].and(rule(element));
            }
        }
        pins
    }

    /// The voltage between two nodes: the sum over the blocks on the way.
    fn voltage(&self, (a, b): (usize, usize)) -> Option<Vec<Pin>> {
        if a == b {
            return Some(vec![Pin::Idle; self.loose]);
        }
        let mut edges: Vec<(usize, usize)> = self.elements.iter().map(|e| e.nodes).collect();
        let nodes = edges.iter().flat_map(|e| [e.0, e.1]).chain([a, b]).max()? + 1;
        let way = with_path(nodes, &mut edges, (a, b));
        self.sum(&way, |block| self.ends(block, &way, (a, b)))
    }

    /// The energy in all capacitors: that of every block of the chain.
    fn energy(&self) -> Option<Vec<Pin>> {
        self.sum(&self.chain, |block| self.ends(block, &self.chain, self.terminals))
    }

    /// Merges the pins of the blocks that have an element marked in `way` and are in the chain; others are at 0 V.
    fn sum(&self, way: &[bool], pair: impl Fn(usize) -> Option<(usize, usize)>) -> Option<Vec<Pin>> {
        let mut pins = vec![Pin::Idle; self.loose];
        let mut numbers: Vec<usize> =
            (0..way.len()).filter(|i| way[*i] && self.chain[*i]).map(|i| self.block[i]).collect();
        numbers.sort_unstable();
        numbers.dedup();
        for block in numbers {
            let of_block = self.of_block(block, pair(block)?)?;
            pins.iter_mut().zip(of_block).for_each(|(pin, other)| *pin = pin.and(other));
        }
        Some(pins)
    }

    /// The two nodes at which a block on a way between two nodes is entered and left.
    fn ends(&self, block: usize, way: &[bool], (a, b): (usize, usize)) -> Option<(usize, usize)> {
        let touches = |n: usize, inside: bool| {
            let here = |(i, e): (usize, &Element)| {
                way[i] && (self.block[i] == block) == inside && (e.nodes.0 == n || e.nodes.1 == n)
            };
            self.elements.iter().enumerate().any(here)
        };
        let mut ends: Vec<usize> = self.nodes(block).filter(|n| *n == a || *n == b || touches(*n, false)).collect();
        ends.sort_unstable();
        ends.dedup();
        if let [x, y] = ends[..] { Some((x, y)) } else { None }
    }

    fn nodes(&self, block: usize) -> impl Iterator<Item = usize> {
        self.members(block).flat_map(|e| [e.nodes.0, e.nodes.1])
    }

    fn members(&self, block: usize) -> impl Iterator<Item = &Element> {
        self.elements.iter().zip(&self.block).filter(move |(_, b)| **b == block).map(|(e, _)| e)
    }

    /// Pins for the voltage between two nodes of one block of the chain.
    fn of_block(&self, block: usize, pair: (usize, usize)) -> Option<Vec<Pin>> {
        let ends = self.ends(block, &self.chain, self.terminals)?;
        let touches = |e: &Element, r: usize| e.nodes.0 == r || e.nodes.1 == r;
        let capacitors: Vec<&Element> = self.members(block).filter(|e| e.capacitor).collect();
        let common = |r: &usize| capacitors.iter().all(|c| touches(c, *r)) && (*r == ends.0 || *r == ends.1);
        let r = [pair.0, pair.1].into_iter().find(common)?;
        let same = |x: (usize, usize), y: (usize, usize)| x == y || (x.1, x.0) == y;
        let single = matches!(capacitors[..], [c] if same(c.nodes, pair)) && same(pair, ends);
        let pin = |(i, e): (usize, &Element)| match (self.block[i] == block, e.capacitor) {
            (true, true) => Pin::High,
            (true, false) if single || touches(e, r) => Pin::High,
            (true, false) => Pin::Free,
            (false, false) if self.chain[i] => Pin::Low,
            (false, _) => Pin::Idle,
        };
        let mut pins = vec![Pin::Idle; self.loose];
        for (i, element) in self.elements.iter().enumerate() {
            if let Some(p) = element.parameter.filter(|p| *p < self.loose) {
                pins[p] = pins[p].and(pin((i, element)));
            }
        }
        Some(pins)
    }
}

/// For every edge whether its block lies on a way between two nodes: an edge between them closes all of these into one.
fn with_path(nodes: usize, edges: &mut Vec<(usize, usize)>, (a, b): (usize, usize)) -> Vec<bool> {
    edges.push((a, b));
    let mut closed = blocks(nodes, edges);
    edges.pop();
    let there = closed.pop();
    closed.into_iter().map(|block| Some(block) == there).collect()
}

/// For every edge the number of its block (biconnected component; Hopcroft and Tarjan 1973), without recursion.
fn blocks(nodes: usize, edges: &[(usize, usize)]) -> Vec<usize> {
    let mut at: Vec<Vec<usize>> = vec![Vec::new(); nodes];
    edges.iter().enumerate().for_each(|(i, (a, b))| {
        at[*a].push(i);
        at[*b].push(i);
    });
    let mut block = vec![usize::MAX; edges.len()];
    let (mut order, mut lowest) = (vec![usize::MAX; nodes], vec![usize::MAX; nodes]);
    let (mut next, mut number) = (0, 0);
    let mut passed: Vec<usize> = Vec::new();
    for root in 0..nodes {
        if order[root] != usize::MAX {
            continue;
        }
        (order[root], lowest[root]) = (next, next);
        next += 1;
        // Node, the edge it was reached by, how many of its edges are done.
        let mut way: Vec<(usize, usize, usize)> = vec![(root, usize::MAX, 0)];
        while let Some((node, by, done)) = way.last_mut() {
            let (node, by) = (*node, *by);
            if let Some(edge) = at[node].get(*done).copied() {
                *done += 1;
                let other = if edges[edge].0 == node { edges[edge].1 } else { edges[edge].0 };
                if edge == by {
                    continue;
                }
                if order[other] == usize::MAX {
                    (order[other], lowest[other]) = (next, next);
                    next += 1;
                    passed.push(edge);
                    way.push((other, edge, 0));
                } else if order[other] < order[node] {
                    passed.push(edge);
                    lowest[node] = lowest[node].min(order[other]);
                }
                continue;
            }
            way.pop();
            let Some((parent, _, _)) = way.last() else { continue };
            let reached = lowest[node];
            lowest[*parent] = lowest[*parent].min(reached);
            if reached >= order[*parent] {
                while let Some(edge) = passed.pop() {
                    block[edge] = number;
                    if edge == by {
                        break;
                    }
                }
                number += 1;
            }
        }
    }
    block
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn blocks_hang_together_at_single_nodes_only() {
        // A triangle, a bridge, two parallel edges.
        let found = blocks(6, &[(0, 1), (1, 2), (2, 0), (2, 3), (3, 4), (4, 3)]);
        assert!(found[0] == found[1] && found[1] == found[2] && found[4] == found[5]);
        assert!(found[0] != found[3] && found[3] != found[4] && found[0] != found[4]);
        // An edge from one end to the other makes one block of them all.
        let mut edges = vec![(0, 1), (1, 2), (2, 0), (2, 3), (3, 4), (4, 3), (3, 5)];
        assert_eq!(with_path(6, &mut edges, (0, 4)), [true, true, true, true, true, true, false]);
    }
}
