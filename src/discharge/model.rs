//! The bank as numbered nodes and parts.

use crate::bank::Bank;
use crate::bank::description::{Capacitor, Resistor};
use crate::circuit::{Edge, Network};
use crate::quantity::{Quantity, Tolerance};

/// A loose value: a factor on a part's marked value that may lie anywhere in its range.
#[derive(Debug, Clone)]
pub(crate) struct Parameter {
    /// The part it belongs to.
    pub id: String,
    /// Lowest factor.
    pub low: f64,
    /// Highest factor.
    pub high: f64,
}

/// A part between two nodes.
#[derive(Debug, Clone)]
pub(crate) struct Part {
    /// The part of the bank file that it belongs to.
    pub id: String,
    pub a: usize,
    pub b: usize,
    /// Ohm or farad at the marked value; arrays are lumped into one.
    pub nominal: f64,
    /// Which loose value multiplies it.
    pub parameter: Option<usize>,
}

impl Part {
    fn value(&self, point: &[f64]) -> f64 {
        self.nominal * self.parameter.map_or(1.0, |p| point[p])
    }
}

/// A bank as a network whose values follow from a point of the tolerance box. Parts that only a step connects are
/// not in it.
#[derive(Debug, Clone)]
pub(crate) struct Model {
    pub node_names: Vec<String>,
    /// Numbers of the terminals, the reference last.
    pub terminals: Vec<usize>,
    pub resistors: Vec<Part>,
    pub capacitors: Vec<Part>,
    /// Own voltage of every capacitor at isolation, in volt.
    pub own_voltages: Vec<Option<f64>>,
    /// Pairs that figures are asked for: the test points, then the terminals and pairs of limits that are none.
    pub pairs: Vec<(usize, usize)>,
    /// How many of the pairs are test points.
    pub test_points: usize,
    pub parameters: Vec<Parameter>,
}

/// What differs from the healthy bank.
#[derive(Debug, Clone, Default, PartialEq)]
pub(crate) struct Variation {
    /// (resistor, factor on its value); infinite for open.
    pub resistor: Option<(usize, f64)>,
    /// (capacitor, factor on its value).
    pub capacitor: Option<(usize, f64)>,
    /// A capacitor that is a short: its nodes are one.
    pub shorted: Option<usize>,
}

impl Model {
    pub fn new(bank: &Bank) -> Self {
        let description = bank.description();
        let mut model = Model {
            node_names: Vec::new(),
            terminals: Vec::new(),
            resistors: Vec::new(),
            capacitors: Vec::new(),
            own_voltages: Vec::new(),
            pairs: Vec::new(),
            test_points: 0,
            parameters: Vec::new(),
        };
        model.terminals = description.terminals.iter().map(|n| model.node(n)).collect();
        for capacitor in &description.capacitors {
            let part = model.capacitor(capacitor);
            model.capacitors.push(part);
            model.own_voltages.push(capacitor.charged_to.map(Quantity::si));
        }
        for resistor in description.resistors.iter().filter(|r| r.role.always_connected()) {
            let part = model.resistor(resistor);
            model.resistors.push(part);
        }
        model.pairs = bank.test_points().iter().map(|[a, b]| (model.node(a), model.node(b))).collect();
        model.test_points = model.pairs.len();
        let limits = description.limits.iter().filter_map(|l| l.at.clone());
        let terminals = [description.terminals.first().cloned(), description.terminals.last().cloned()];
        let terminals = if let [Some(top), Some(reference)] = terminals { Some([top, reference]) } else { None };
        for [a, b] in terminals.into_iter().chain(limits) {
            if model.find_pair(&a, &b).is_none() {
                let pair = (model.node(&a), model.node(&b));
                model.pairs.push(pair);
            }
        }
        model
    }

    /// The number of the pair between two nodes by name, whichever way round.
    pub fn find_pair(&self, a: &str, b: &str) -> Option<usize> {
        let (a, b) = (self.find_node(a)?, self.find_node(b)?);
        self.pairs.iter().position(|p| *p == (a, b) || *p == (b, a))
    }

    pub fn reference(&self) -> usize {
        self.terminals.last().copied().unwrap_or(0)
    }

    /// The number of a node; new names get the next one.
    pub fn node(&mut self, name: &str) -> usize {
        self.node_names.iter().position(|n| n == name).unwrap_or_else(|| {
            self.node_names.push(name.to_string());
            self.node_names.len() - 1
        })
    }

    /// A node by name, where there is one.
    pub fn find_node(&self, name: &str) -> Option<usize> {
        self.node_names.iter().position(|n| n == name)
    }

    /// The number of a resistor by id.
    pub fn find_resistor(&self, id: &str) -> Option<usize> {
        self.resistors.iter().position(|r| r.id == id)
    }

    /// A loose value for `id`, or `None` where the tolerance leaves it nothing to move.
    pub fn parameter(&mut self, id: &str, tolerance: Option<Tolerance>) -> Option<usize> {
        let tolerance = tolerance.filter(|t| !t.is_none())?;
        let (low, high) = (tolerance.lowest_factor(), tolerance.highest_factor());
        self.parameters.push(Parameter { id: id.to_string(), low, high });
        Some(self.parameters.len() - 1)
    }

    fn capacitor(&mut self, c: &Capacitor) -> Part {
        let nominal = c.value.si() * f64::from(c.parallel) / f64::from(c.series);
        let (a, b) = (self.node(&c.across[0]), self.node(&c.across[1]));
        Part { id: c.id.clone(), a, b, nominal, parameter: self.parameter(&c.id, c.tolerance) }
    }

    fn resistor(&mut self, r: &Resistor) -> Part {
        let nominal = r.value.si() * f64::from(r.series) / f64::from(r.parallel);
        let (a, b) = (self.node(&r.across[0]), self.node(&r.across[1]));
        Part { id: r.id.clone(), a, b, nominal, parameter: self.parameter(&r.id, r.tolerance) }
    }

    /// For every node the node that it is one with under `variation`: a terminal, where one of the two is.
    pub fn merged(&self, variation: &Variation) -> Vec<usize> {
        let mut map: Vec<usize> = (0..self.node_names.len()).collect();
        if let Some(c) = variation.shorted.map(|c| &self.capacitors[c]) {
            let (gone, stays) = if self.terminals.contains(&c.a) { (c.b, c.a) } else { (c.a, c.b) };
            map[gone] = stays;
        }
        map
    }

    /// The network at a point of the box; parts whose nodes are one are left out.
    pub fn network(&self, variation: &Variation, point: &[f64]) -> Network {
        let map = self.merged(variation);
        let edge =
            |part: &Part, factor: f64| Edge { a: map[part.a], b: map[part.b], value: part.value(point) * factor };
        let factor = |of: Option<(usize, f64)>, index: usize| of.filter(|(i, _)| *i == index).map_or(1.0, |(_, f)| f);
        let edges = |parts: &[Part], of: Option<(usize, f64)>| -> Vec<Edge> {
            let all = parts.iter().enumerate().map(|(i, p)| edge(p, factor(of, i)));
            all.filter(|e| e.a != e.b && e.value.is_finite()).collect()
        };
        Network {
            nodes: self.node_names.len(),
            reference: self.reference(),
            resistors: edges(&self.resistors, variation.resistor),
            capacitors: edges(&self.capacitors, variation.capacitor),
            sources: Vec::new(),
        }
    }

    /// The middle of the box.
    pub fn nominal_point(&self) -> Vec<f64> {
        vec![1.0; self.parameters.len()]
    }
}
