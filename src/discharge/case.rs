//! One scenario at one point of the tolerance box, solved.

use super::model::Model;
use super::scenario::Scenario;
use crate::circuit::{CircuitError, ExpSum, Modes, Response, ShortCharge};
use std::sync::Arc;

/// A solved scenario: the state before isolation and every voltage after it.
#[derive(Debug)]
pub(crate) struct Case {
    /// For every node of the model, its node in the network (a shorted capacitor makes two one).
    pub map: Vec<usize>,
    /// Potentials in volt of the network's nodes before isolation.
    pub potentials: Vec<f64>,
    /// Resistances in ohm of all resistors of the model before and after isolation; infinite for open.
    pub before_ohms: Vec<f64>,
    pub after_ohms: Vec<f64>,
    pub response: Response,
}

impl Case {
    /// Solves `scenario` at `point` with `volts` across the terminals before isolation, and checks its energy
    /// balance.
    pub fn solve(model: &Model, scenario: &Scenario, point: &[f64], volts: f64) -> Result<Self, CircuitError> {
        let map = model.merged(&scenario.after);
        let before = model.network(&scenario.before, point);
        let after = model.network(&scenario.after, point);
        let held: Vec<(usize, f64)> = match model.terminals.as_slice() {
            [top, reference] => vec![(map[*top], volts), (map[*reference], 0.0)],
            _ => Vec::new(),
        };
        let potentials = before.operating_point(&held);
        let own = model.capacitors.iter().zip(&model.own_voltages).filter(|(c, _)| map[c.a] != map[c.b]);
        let voltages: Vec<f64> = after
            .capacitors
            .iter()
            .zip(own)
            .map(|(c, (_, own))| {
                let settled = potentials[c.a] - potentials[c.b];
                own.filter(|_| !scenario.drops_own_voltages).unwrap_or(settled)
            })
            .collect();
        let response = Arc::new(Modes::new(after)?).response(&voltages, &potentials)?;
        response.check_balance(f64::INFINITY)?;
        let ohms = |variation| {
            let scaled = |i: usize| match variation {
                Some((index, factor)) if index == i => factor,
                _ => 1.0,
            };
            let parts = model.resistors.iter().enumerate();
            parts.map(|(i, r)| r.nominal * r.parameter.map_or(1.0, |p| point[p]) * scaled(i)).collect()
        };
        let (before_ohms, after_ohms) = (ohms(scenario.before.resistor), ohms(scenario.after.resistor));
        Ok(Case { map, potentials, before_ohms, after_ohms, response })
    }

    /// Voltage between two nodes of the model after isolation.
    pub fn across(&self, a: usize, b: usize) -> ExpSum {
        let (a, b) = (self.map[a], self.map[b]);
        if a == b { ExpSum::default() } else { self.response.across(a, b) }
    }

    /// Voltage in volt between two nodes of the model before isolation.
    pub fn before(&self, a: usize, b: usize) -> f64 {
        self.potentials[self.map[a]] - self.potentials[self.map[b]]
    }

    /// Charge in coulomb that a short between two nodes would pass, by the moment at which it closes.
    pub fn charge(&self, a: usize, b: usize) -> ExpSum {
        let (a, b) = (self.map[a], self.map[b]);
        if a == b {
            return ExpSum::default();
        }
        let network = self.response.network();
        let short = ShortCharge::new(network, a, b);
        let parts = network.capacitors.iter().zip(short.weights());
        parts.fold(ExpSum::default(), |sum, (c, w)| sum.plus(&self.response.across(c.a, c.b).times(*w)))
    }

    /// Energy in joule in all capacitors connected to the pair through any parts.
    pub fn energy(&self, a: usize, b: usize) -> ExpSum {
        let label = self.response.network().connected_parts();
        let (a, b) = (label[self.map[a]], label[self.map[b]]);
        let at_a = self.response.stored_energy(Some(a));
        if a == b { at_a } else { at_a.plus(&self.response.stored_energy(Some(b))) }
    }
}
