//! One scenario at one point of the tolerance box, solved: from every state that the bank can have at isolation.

use super::contact::Span;
use super::model::{Model, Part};
use super::scenario::Scenario;
use crate::circuit::{CircuitError, Course, Drain, EnergyCourse, Modes, Phasor};
use std::sync::Arc;

/// Potentials before isolation.
#[derive(Debug, Clone)]
pub(crate) enum Before {
    /// Of a DC bank, in volt.
    Direct(Vec<f64>),
    /// Of a three-phase bank: crests in volt.
    Alternating(Vec<Phasor>),
}

impl Before {
    /// The greatest voltage between two nodes of the network.
    pub fn greatest(&self, a: usize, b: usize) -> f64 {
        match self {
            Before::Direct(v) => (v[a] - v[b]).abs(),
            Before::Alternating(v) => (v[a][0] - v[b][0]).hypot(v[a][1] - v[b][1]),
        }
    }

    /// The mean square of the voltage between two nodes of the network: what heats a resistor.
    pub fn mean_square(&self, a: usize, b: usize) -> f64 {
        let greatest = self.greatest(a, b);
        match self {
            Before::Direct(_) => greatest * greatest,
            Before::Alternating(_) => 0.5 * greatest * greatest,
        }
    }
}

/// The moment of isolation under a scenario, at one point of the box.
#[derive(Debug, Clone)]
pub(crate) struct Start {
    /// For every node of the model, its node in the network (a shorted capacitor makes two one).
    pub map: Vec<usize>,
    /// Potentials of the network's nodes before isolation.
    pub before: Before,
    /// The states that the bank can be in at isolation: one with DC, those that the poles leave with three phases.
    pub states: Vec<State>,
}

/// One state at isolation.
#[derive(Debug, Clone)]
pub(crate) struct State {
    /// Potentials in volt of the network's nodes.
    pub potentials: Vec<f64>,
    /// Voltages in volt of the capacitors of the network.
    pub voltages: Vec<f64>,
}

impl Start {
    /// The operating point with `volts` held across the terminals, or what the poles leave of `volts` from line to line;
    /// capacitors with a voltage of their own take it.
    pub fn at_isolation(model: &Model, scenario: &Scenario, point: &[f64], volts: f64) -> Self {
        let map = model.merged(&scenario.after);
        let (before, all) = match &model.three_phase {
            Some(three_phase) => {
                let (phasors, left) = three_phase.potentials(model, &scenario.before, point, volts);
                (Before::Alternating(phasors), left)
            }
            None => {
                let before = model.network(&scenario.before, point, &[]);
                let held: Vec<(usize, f64)> = match model.terminals.as_slice() {
                    [top, reference] => vec![(map[*top], volts), (map[*reference], 0.0)],
                    _ => Vec::new(),
                };
                let potentials = before.operating_point(&held);
                (Before::Direct(potentials.clone()), vec![potentials])
            }
        };
        let state = |potentials: Vec<f64>| {
            let parts = model.capacitors.iter().zip(&model.own_voltages).enumerate();
            let there = parts.filter(|(i, _)| model.is_there(&scenario.after, &map, *i));
            let voltage = |c: &Part, own: &Option<f64>| {
                let settled = potentials[map[c.a]] - potentials[map[c.b]];
                own.filter(|_| !scenario.drops_own_voltages).unwrap_or(settled)
            };
            let voltages = there.map(|(_, (c, own))| voltage(c, own)).collect();
            State { potentials, voltages }
        };
        let chosen = all.into_iter().enumerate().filter(|(number, _)| scenario.state.is_none_or(|s| s == *number));
        let states = chosen.map(|(_, potentials)| state(potentials)).collect();
        Start { map, before, states }
    }
}

/// A solved scenario from one state at isolation: what was before it and every voltage after it.
#[derive(Debug)]
pub(crate) struct Case {
    /// For every node of the model, its node in the network.
    pub map: Vec<usize>,
    /// Potentials of the network's nodes before isolation.
    before: Arc<Before>,
    /// Resistances in ohm of all resistors of the model before and after isolation, the latter with all contacts closed;
    /// infinite for open.
    pub before_ohms: Vec<f64>,
    pub after_ohms: Vec<f64>,
    /// For every resistor the number of the network after isolation with which it comes, and the voltage that it bears
    /// when the bank is fed again.
    comes_with: Vec<usize>,
    fed_volts: Vec<f64>,
    pub response: Drain,
}

impl Case {
    /// Solves `scenario` at `point` with `volts` across the terminals before isolation, from every state.
    pub fn solve(model: &Model, scenario: &Scenario, point: &[f64], volts: f64) -> Result<Vec<Self>, CircuitError> {
        let Start { map, before, states } = Start::at_isolation(model, scenario, point, volts);
        let spans = model.spans(&scenario.after, 0.0, &[]);
        let network = |span: &Span| {
            let modes = Modes::new(model.network(&scenario.after, point, &span.connected))?;
            Ok((span.length, Arc::new(modes)))
        };
        let networks = spans.iter().map(network).collect::<Result<Vec<_>, CircuitError>>()?;
        let in_the_end = spans.last().map_or(&[][..], |span| &span.connected);
        let before_ohms = model.ohms(&scenario.before, point, &[]);
        let after_ohms = model.ohms(&scenario.after, point, in_the_end);
        let comes_with = model.first_spans(&scenario.after, 0.0);
        let fed_volts = model.fed_volts(&before, &map, &after_ohms);
        let (sinks, drawing) = (model.sinks(&map), scenario.drawing(model));
        let before = Arc::new(before);
        let case = |state: State| {
            Ok(Case {
                map: map.clone(),
                before: Arc::clone(&before),
                before_ohms: before_ohms.clone(),
                after_ohms: after_ohms.clone(),
                comes_with: comes_with.clone(),
                fed_volts: fed_volts.clone(),
                response: Drain::through(&networks, &state.voltages, &state.potentials, &sinks, &drawing)?,
            })
        };
        states.into_iter().map(case).collect()
    }

    /// Voltage between two nodes of the model after isolation.
    pub fn across(&self, a: usize, b: usize) -> Course {
        let (a, b) = (self.map[a], self.map[b]);
        if a == b { Course::default() } else { self.response.across(a, b) }
    }

    /// Voltage across a resistor after isolation; 0 V for as long as its contact is open.
    pub fn on_resistor(&self, model: &Model, resistor: usize) -> Course {
        let part = &model.resistors[resistor];
        let (a, b) = (self.map[part.a], self.map[part.b]);
        if a == b { Course::default() } else { self.response.across_from(self.comes_with[resistor], a, b) }
    }

    /// Voltage in volt that a resistor bears until its contact opens when the bank is fed again.
    pub fn fed_volts(&self, resistor: usize) -> f64 {
        self.fed_volts[resistor]
    }

    /// Greatest voltage in volt between two nodes of the model before isolation.
    pub fn before(&self, a: usize, b: usize) -> f64 {
        self.before.greatest(self.map[a], self.map[b])
    }

    /// Potentials in volt of the network's nodes before isolation; `None` where they alternate.
    pub fn potentials(&self) -> Option<&[f64]> {
        match &*self.before {
            Before::Direct(potentials) => Some(potentials),
            Before::Alternating(_) => None,
        }
    }

    /// Mean square of the voltage between two nodes of the model before isolation.
    pub fn before_mean_square(&self, a: usize, b: usize) -> f64 {
        self.before.mean_square(self.map[a], self.map[b])
    }

    /// Charge in coulomb that a short between two nodes would pass, by the moment at which it closes.
    pub fn charge(&self, a: usize, b: usize) -> Course {
        let (a, b) = (self.map[a], self.map[b]);
        if a == b {
            return Course::default();
        }
        self.response.short_charge(a, b)
    }

    /// Energy in joule in all capacitors connected to the pair through any parts.
    pub fn energy(&self, a: usize, b: usize) -> EnergyCourse {
        self.response.stored_energy(Some((self.map[a], self.map[b])))
    }
}
