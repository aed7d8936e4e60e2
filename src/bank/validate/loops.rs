//! Loops of capacitors whose voltages contradict each other.
//!
//! A capacitor has a voltage of its own, or that of the operating point: `charged_to` across the terminals, inside the
//! bank what its resistors set. The operating point is computed here as well, at the marked values, since an error has
//! to stand at its line.

use super::super::description::{Description, Source};
use super::super::near::listed;
use super::super::problem::{Path, Sink};
use crate::circuit;
use crate::quantity::Quantity;
use std::collections::{HashMap, VecDeque};

/// How far the sum around a loop may be from zero, as a share of the sum of its magnitudes: rounding only.
const AGREES: f64 = 1e-9;

/// Finding the way around a loop costs as much as the bank is large; after so many loops nobody reads on.
const MOST_NAMED: usize = 100;

/// A capacitor with a known voltage, from its first node to its second, at the nominal and at the highest voltage.
struct Edge<'a> {
    index: usize,
    id: &'a str,
    ends: [usize; 2],
    volts: [f64; 2],
}

pub(super) fn check(d: &Description, sink: &mut Sink) {
    let edges = edges(d);
    // Neighbours in the forest of the capacitors that closed no loop.
    let mut forest: HashMap<usize, Vec<usize>> = HashMap::new();
    let mut trees = Trees::default();
    let mut named = 0;
    for (at, edge) in edges.iter().enumerate() {
        let [a, b] = edge.ends;
        if a == b {
            continue;
        }
        let Some(across) = trees.join(a, b, edge.volts) else {
            forest.entry(a).or_default().push(at);
            forest.entry(b).or_default().push(at);
            continue;
        };
        let over = |case: usize| (across[case] - edge.volts[case]).abs();
        if over(0).max(over(1)) == 0.0 {
            continue;
        }
        if named == MOST_NAMED {
            break;
        }
        named += 1;
        let way = way(&edges, &forest, a, b);
        let magnitude = |case: usize| way.iter().chain([&at]).map(|&e| edges[e].volts[case].abs()).sum::<f64>();
        let Some(case) = (0..2).find(|&case| over(case) > AGREES * magnitude(case)) else { continue };
        let mut members: Vec<usize> = way.into_iter().chain([at]).collect();
        members.sort_by_key(|&e| edges[e].index);
        sink.push("capacitor-loop", Path::of("capacitors").then(edge.index).then("charged_to"), || {
            let ids = listed(members.iter().map(|&e| edges[e].id));
            (
                format!(
                    "{ids} form a loop, and their voltages at isolation contradict each other: around it they add up \
                     to {} V instead of 0",
                    over(case)
                ),
                String::from(
                    "give capacitors in parallel one voltage, and capacitors in series voltages that add up to that of \
                     what lies across them",
                ),
            )
        });
    }
}

/// Capacitors with a known voltage; those across the terminals come first, so that a loop is closed by one that
/// has a voltage of its own and the error stands there.
fn edges(d: &Description) -> Vec<Edge<'_>> {
    let mut numbers: HashMap<&str, usize> = HashMap::new();
    let mut edges = vec![];
    let two_terminals = match (d.terminals.as_slice(), d.charged_to.source) {
        ([first, last], Source::Direct | Source::Crest { .. }) => Some([first, last]),
        _ => None,
    };
    let inside = two_terminals.and_then(|_| OperatingPoints::of(d));
    for (index, c) in d.capacitors.iter().enumerate().filter(|(_, c)| c.phases.is_none()) {
        let [a, b] = &c.across;
        let sign = match two_terminals {
            Some([first, last]) if a == first && b == last => Some(1.0),
            Some([first, last]) if a == last && b == first => Some(-1.0),
            _ => None,
        };
        let terminal = [d.charged_to.nominal.si(), d.charged_to.highest.si()];
        let volts = match (c.charged_to, sign) {
            (Some(own), _) => [own.si(); 2],
            (None, Some(sign)) => terminal.map(|volts| sign * volts),
            (None, None) => match &inside {
                Some(points) => points.volts(a, b),
                None => continue,
            },
        };
        let mut number = |node| {
            let next = numbers.len();
            *numbers.entry(node).or_insert(next)
        };
        let ends = [number(a.as_str()), number(b.as_str())];
        edges.push(Edge { index, id: &c.id, ends, volts });
    }
    edges.sort_by_key(|edge| d.capacitors[edge.index].charged_to.is_some());
    edges
}

/// Banks with more nodes than this are judged by their given voltages alone: the operating point is dense algebra.
const MOST_NODES: usize = 300;

/// Potentials of all nodes before isolation, at the nominal and at the highest voltage.
struct OperatingPoints<'a> {
    numbers: HashMap<&'a str, usize>,
    potentials: [Vec<f64>; 2],
}

impl<'a> OperatingPoints<'a> {
    /// `None` where no capacitor has a voltage of its own (nothing can contradict then) or the bank is too large.
    fn of(d: &'a Description) -> Option<Self> {
        d.capacitors.iter().find(|c| c.charged_to.is_some())?;
        let mut numbers: HashMap<&str, usize> = HashMap::new();
        let mut edge = |across: &'a [String; 2], value: f64| {
            let [a, b] = across.each_ref().map(|node| {
                let next = numbers.len();
                *numbers.entry(node.as_str()).or_insert(next)
            });
            circuit::Edge { a, b, value }
        };
        let [top, reference] = d.terminals.as_slice() else { return None };
        let ends = [top.clone(), reference.clone()];
        let capacitors: Vec<_> = d
            .capacitors
            .iter()
            .map(|c| edge(&c.across, c.value.si() * f64::from(c.parallel) / f64::from(c.series.max(1))))
            .collect();
        let resistors: Vec<_> = d
            .resistors
            .iter()
            .filter(|r| r.stands_before_isolation())
            .map(|r| edge(&r.across, r.value.si() * f64::from(r.series) / f64::from(r.parallel.max(1))))
            .collect();
        let (top, reference) = (*numbers.get(ends[0].as_str())?, *numbers.get(ends[1].as_str())?);
        let usable = |e: &circuit::Edge| e.a != e.b && e.value.is_finite() && e.value > 0.0;
        let network = circuit::Network {
            nodes: numbers.len(),
            reference,
            capacitors: capacitors.into_iter().filter(usable).collect(),
            resistors: resistors.into_iter().filter(usable).collect(),
            sources: Vec::new(),
        };
        if network.nodes > MOST_NODES || top == reference {
            return None;
        }
        let charged = [d.charged_to.nominal.si(), d.charged_to.highest.si()];
        let potentials = charged.map(|volts| network.operating_point(&[(top, volts), (reference, 0.0)]));
        Some(OperatingPoints { numbers, potentials })
    }

    /// Voltage between two nodes in both cases.
    fn volts(&self, a: &str, b: &str) -> [f64; 2] {
        let at = |node: &str, potentials: &[f64]| self.numbers.get(node).map_or(0.0, |n| potentials[*n]);
        [0, 1].map(|case| at(a, &self.potentials[case]) - at(b, &self.potentials[case]))
    }
}

/// The capacitors on the way from one node to another through the forest.
fn way(edges: &[Edge<'_>], forest: &HashMap<usize, Vec<usize>>, from: usize, to: usize) -> Vec<usize> {
    let mut came_by: HashMap<usize, (usize, usize)> = HashMap::new();
    let mut queue = VecDeque::from([from]);
    while let Some(node) = queue.pop_front() {
        if node == to {
            break;
        }
        for &edge in forest.get(&node).into_iter().flatten() {
            let [a, b] = edges[edge].ends;
            let next = if a == node { b } else { a };
            if next != from && !came_by.contains_key(&next) {
                came_by.insert(next, (node, edge));
                queue.push_back(next);
            }
        }
    }
    let mut way = vec![];
    let mut node = to;
    while let Some(&(before, edge)) = came_by.get(&node) {
        way.push(edge);
        node = before;
    }
    way
}

/// Trees of nodes with their potentials over the root of their tree, in both cases (weighted union-find).
#[derive(Default)]
struct Trees(HashMap<usize, (usize, [f64; 2])>);

impl Trees {
    /// The root of a node, and the node's potential over it.
    fn root(&mut self, node: usize) -> (usize, [f64; 2]) {
        let mut path = vec![];
        let mut at = node;
        while let Some(&(above, volts)) = self.0.get(&at) {
            path.push((at, volts));
            at = above;
        }
        // Compress from the top down: each node then hangs directly on the root.
        let mut total = [0.0; 2];
        for (below, volts) in path.into_iter().rev() {
            total = [total[0] + volts[0], total[1] + volts[1]];
            self.0.insert(below, (at, total));
        }
        (at, total)
    }

    /// Puts `volts` between `a` and `b`; where they are in one tree already, gives the voltage that is there.
    fn join(&mut self, a: usize, b: usize, volts: [f64; 2]) -> Option<[f64; 2]> {
        let ((root_a, over_a), (root_b, over_b)) = (self.root(a), self.root(b));
        let there = [over_a[0] - over_b[0], over_a[1] - over_b[1]];
        if root_a == root_b {
            return Some(there);
        }
        self.0.insert(root_a, (root_b, [volts[0] - there[0], volts[1] - there[1]]));
        None
    }
}

#[cfg(test)]
mod tests {
    use super::super::samples::*;
    use crate::bank::description::Description;

    fn bank(capacitors: &[(&str, &str, Option<f64>)]) -> Description {
        let mut d = plain();
        d.capacitors = capacitors
            .iter()
            .enumerate()
            .map(|(i, (a, b, own))| {
                let mut c = capacitor(&format!("C{}", i + 1), a, b);
                c.charged_to = own.map(volt);
                c
            })
            .collect();
        d
    }

    #[test]
    fn parallel_capacitors_of_two_voltages_contradict_each_other() {
        let d = bank(&[("P", "N", Some(400.0)), ("P", "N", Some(401.0))]);
        assert_problem(&d, "capacitor-loop", "capacitors[1].charged_to");
        assert_eq!(
            problems(&bank(&[("P", "N", Some(400.0)), ("N", "P", Some(0.0)), ("P", "N", Some(400.0))])).len(),
            1
        );
        assert_eq!(problems(&bank(&[("P", "N", Some(400.0)), ("P", "N", Some(400.0 + 1e-8))])), []);
    }

    #[test]
    fn a_capacitor_across_the_terminals_takes_the_highest_voltage_as_well() {
        // 500 V agrees with the nominal voltage of the sample bank, and not with its highest, 600 V.
        let d = bank(&[("P", "N", Some(500.0)), ("P", "N", None)]);
        assert_problem(&d, "capacitor-loop", "capacitors[0].charged_to");
        let mut d = bank(&[("P", "N", Some(500.0)), ("P", "N", None)]);
        d.charged_to.highest = volt(500.0);
        assert_eq!(problems(&d), []);
        let mut d = bank(&[("N", "P", None), ("P", "N", None)]);
        d.charged_to.highest = volt(500.0);
        assert_eq!(problems(&d), []);
    }

    #[test]
    fn a_series_string_has_to_add_up_to_what_lies_across_it() {
        let string =
            |last| bank(&[("P", "A", Some(100.0)), ("A", "B", Some(200.0)), ("N", "B", Some(50.0)), ("P", "N", last)]);
        assert_eq!(problems(&string(Some(250.0))), []);
        assert_problem(&string(Some(350.0)), "capacitor-loop", "capacitors[3].charged_to");
        let mut d = string(None);
        let (found, _) = super::super::check(&d, &super::super::Doubt::default());
        assert!(found[0].text.contains("C1, C2, C3, C4"), "{found:?}");
        d.capacitors.pop();
        // Without the last capacitor there is no loop: the terminals are then simply at 250 V.
        assert_eq!(problems(&d), []);
    }

    #[test]
    fn a_capacitor_without_a_voltage_of_its_own_has_that_of_the_operating_point() {
        // 250 V over two parallel capacitors and a third of the same value divide as 1 to 2: 83.3 V, not 100 V.
        let d = bank(&[("P", "M", Some(100.0)), ("P", "M", None), ("M", "N", None)]);
        assert_problem(&d, "capacitor-loop", "capacitors[0].charged_to");
        // No loop, no contradiction.
        assert_eq!(problems(&bank(&[("P", "M", Some(100.0)), ("M", "N", None)])), []);
    }
}
