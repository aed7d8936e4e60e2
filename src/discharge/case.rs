//! One scenario at one point of the tolerance box, solved.

use super::model::Model;
use super::scenario::Scenario;
use crate::circuit::{CircuitError, Course, Drain, EnergyCourse, Modes, ShortCharge};
use std::sync::Arc;

/// The moment of isolation under a scenario, at one point of the box.
#[derive(Debug, Clone)]
pub(crate) struct Start {
    /// For every node of the model, its node in the network (a shorted capacitor makes two one).
    pub map: Vec<usize>,
    /// Potentials in volt of the network's nodes before isolation.
    pub potentials: Vec<f64>,
    /// Voltages in volt of the capacitors of the network after isolation.
    pub voltages: Vec<f64>,
}

impl Start {
    /// The operating point with `volts` held across the terminals; capacitors with a voltage of their own take it.
    pub fn at_isolation(model: &Model, scenario: &Scenario, point: &[f64], volts: f64) -> Self {
        let map = model.merged(&scenario.after);
        let before = model.network(&scenario.before, point, &[]);
        let held: Vec<(usize, f64)> = match model.terminals.as_slice() {
            [top, reference] => vec![(map[*top], volts), (map[*reference], 0.0)],
            _ => Vec::new(),
        };
        let potentials = before.operating_point(&held);
        let there = model.capacitors.iter().zip(&model.own_voltages).filter(|(c, _)| map[c.a] != map[c.b]);
        let voltages = there
            .map(|(c, own)| {
                let settled = potentials[map[c.a]] - potentials[map[c.b]];
                own.filter(|_| !scenario.drops_own_voltages).unwrap_or(settled)
            })
            .collect();
        Start { map, potentials, voltages }
    }
}

/// A solved scenario: the state before isolation and every voltage after it.
#[derive(Debug)]
pub(crate) struct Case {
    /// For every node of the model, its node in the network.
    pub map: Vec<usize>,
    /// Potentials in volt of the network's nodes before isolation.
    pub potentials: Vec<f64>,
    /// Resistances in ohm of all resistors of the model before and after isolation; infinite for open.
    pub before_ohms: Vec<f64>,
    pub after_ohms: Vec<f64>,
    pub response: Drain,
}

impl Case {
    /// Solves `scenario` at `point` with `volts` across the terminals before isolation.
    pub fn solve(model: &Model, scenario: &Scenario, point: &[f64], volts: f64) -> Result<Self, CircuitError> {
        let Start { map, potentials, voltages } = Start::at_isolation(model, scenario, point, volts);
        let after = model.network(&scenario.after, point, &[]);
        let sinks = model.sinks(&map);
        let response = Arc::new(Modes::new(after)?).drain(&voltages, &potentials, &sinks, &scenario.drawing(model))?;
        let before_ohms = model.ohms(&scenario.before, point, &[]);
        let after_ohms = model.ohms(&scenario.after, point, &[]);
        Ok(Case { map, potentials, before_ohms, after_ohms, response })
    }

    /// Voltage between two nodes of the model after isolation.
    pub fn across(&self, a: usize, b: usize) -> Course {
        let (a, b) = (self.map[a], self.map[b]);
        if a == b { Course::default() } else { self.response.across(a, b) }
    }

    /// Voltage in volt between two nodes of the model before isolation.
    pub fn before(&self, a: usize, b: usize) -> f64 {
        self.potentials[self.map[a]] - self.potentials[self.map[b]]
    }

    /// Charge in coulomb that a short between two nodes would pass, by the moment at which it closes.
    pub fn charge(&self, a: usize, b: usize) -> Course {
        let (a, b) = (self.map[a], self.map[b]);
        if a == b {
            return Course::default();
        }
        let network = self.response.network();
        let short = ShortCharge::new(network, a, b);
        let parts = network.capacitors.iter().zip(short.weights());
        let of = |(c, w): (&crate::circuit::Edge, &f64)| self.response.across(c.a, c.b).times(*w);
        parts.map(of).reduce(|sum, part| sum.plus(&part)).unwrap_or_default()
    }

    /// Energy in joule in all capacitors connected to the pair through any parts.
    pub fn energy(&self, a: usize, b: usize) -> EnergyCourse {
        let label = self.response.network().connected_parts();
        let (a, b) = (label[self.map[a]], label[self.map[b]]);
        let parts = if a == b { vec![a] } else { vec![a, b] };
        self.response.stored_energy(Some(&parts))
    }
}
