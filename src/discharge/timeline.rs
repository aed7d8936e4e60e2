//! A bank through the steps of a procedure: the state is carried exactly from step to step.
//!
//! Capacitor voltages are continuous where a part is connected or lifted; nodes without a capacitor jump. Between
//! two steps the network is linear, so every voltage is a sum of exponentials of its own. Where a contact closes during
//! a step the step goes through one network after the other.

use super::body::{Heated, Thermal};
use super::case::{Start, State};
use super::model::{Model, Part};
use super::scenario::Scenario;
use crate::circuit::{CircuitError, Course, Drain, Modes};
use std::sync::Arc;

/// One step: which switched resistors are connected during it, and how long it lasts in second.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Stage {
    pub connected: Vec<usize>,
    pub duration: f64,
    /// A supply is connected at its start: its currents, powers and energies are those of the worst of several
    /// voltages that the bank may then have.
    pub tried: bool,
}

/// A solved step.
#[derive(Debug)]
pub(super) struct Run {
    pub response: Drain,
    /// Resistances with all contacts closed.
    pub ohms: Vec<f64>,
    /// For every resistor the number of the step's networks with which it comes.
    comes_with: Vec<usize>,
    pub duration: f64,
    /// What follows from each voltage that a connected supply is tried from.
    tries: Vec<Drain>,
}

/// A solved procedure.
#[derive(Debug)]
pub(crate) struct Timeline {
    pub(super) map: Vec<usize>,
    /// Power in watt of every resistor before isolation.
    pub(super) standing: Vec<f64>,
    /// Greatest voltage across every resistor before isolation, 0 for one that is not connected.
    pub(super) standing_volts: Vec<f64>,
    /// Voltage across every resistor until its contact opens when the bank is fed again, and the energy then.
    pub(super) fed_volts: Vec<f64>,
    pub(super) fed_energy: Vec<f64>,
    /// Which capacitors of the model are in the network.
    pub(super) present: Vec<bool>,
    pub(super) runs: Vec<Run>,
}

/// What surrounds a procedure.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Setting<'a> {
    pub model: &'a Model,
    pub scenario: &'a Scenario,
    /// Voltage across the terminals before isolation, in volt.
    pub volts: f64,
    /// Terminal voltages in volt that a supply is tried from.
    pub tried_from: &'a [f64],
    pub stages: &'a [Stage],
}

/// What a step is before anything is known of the state in which it begins.
struct Step {
    /// One network after the other, with lengths in second from the step's start.
    networks: Vec<(f64, Arc<Modes>)>,
    ohms: Vec<f64>,
    comes_with: Vec<usize>,
    /// For each voltage that a connected supply is tried from, the states that it can leave.
    tried_from: Vec<Vec<State>>,
}

impl Setting<'_> {
    fn solved_steps(&self, point: &[f64]) -> Result<Vec<Step>, CircuitError> {
        let Setting { model, scenario, .. } = *self;
        // A step that connects and lifts nothing goes on with the network of the step before.
        let mut known: Vec<(Vec<usize>, Arc<Modes>)> = Vec::new();
        let mut steps = Vec::with_capacity(self.stages.len());
        let mut start = 0.0;
        for stage in self.stages {
            let spans = model.spans(&scenario.after, start, &stage.connected);
            let mut networks = Vec::with_capacity(spans.len());
            for span in &spans {
                let modes = match known.iter().find(|(connected, _)| *connected == span.connected) {
                    Some((_, modes)) => Arc::clone(modes),
                    None => Arc::new(Modes::new(model.network(&scenario.after, point, &span.connected))?),
                };
                networks.push((span.length, modes));
            }
            known = spans.iter().zip(&networks).map(|(s, (_, m))| (s.connected.clone(), Arc::clone(m))).collect();
            let from = Scenario { drops_own_voltages: true, ..scenario.clone() };
            let volts = if stage.tried { self.tried_from } else { &[] };
            let tried_from = volts.iter().map(|v| Start::at_isolation(model, &from, point, *v).states).collect();
            let in_the_end = spans.last().map_or(&[][..], |span| &span.connected);
            let ohms = model.ohms(&scenario.after, point, in_the_end);
            let comes_with = model.first_spans(&scenario.after, start);
            steps.push(Step { networks, ohms, comes_with, tried_from });
            start += stage.duration;
        }
        Ok(steps)
    }
}

impl Timeline {
    /// Runs a procedure at one point of the box, from every state that the bank can have at isolation.
    pub fn run(setting: &Setting, point: &[f64]) -> Result<Vec<Self>, CircuitError> {
        let Setting { model, scenario, .. } = *setting;
        let Start { map, before, states } = Start::at_isolation(model, scenario, point, setting.volts);
        let ohms = model.ohms(&scenario.before, point, &[]);
        let parts = || model.resistors.iter().zip(&ohms).map(|(r, ohm)| (map[r.a], map[r.b], *ohm));
        let standing: Vec<f64> =
            parts().map(|(a, b, ohm)| if ohm.is_finite() { before.mean_square(a, b) / ohm } else { 0.0 }).collect();
        let standing_volts: Vec<f64> =
            parts().map(|(a, b, ohm)| if ohm.is_finite() { before.greatest(a, b) } else { 0.0 }).collect();
        let contacts: Vec<usize> = model.contacts.iter().map(|c| c.resistor).collect();
        let closed = model.ohms(&scenario.after, point, &contacts);
        let fed_volts = model.fed_volts(&before, &map, &closed);
        let fed_energy: Vec<f64> = (0..closed.len())
            .map(|r| model.contact(r).map_or(0.0, |c| per_ohm(fed_volts[r].powi(2) * c.opens_after, closed[r])))
            .collect();
        let present: Vec<bool> =
            (0..model.capacitors.len()).map(|c| model.is_there(&scenario.after, &map, c)).collect();
        let steps = setting.solved_steps(point)?;
        let sinks = model.sinks(&map);
        let timeline = |(number, state): (usize, State)| {
            let mut runs = Vec::with_capacity(steps.len());
            let mut drawing = scenario.drawing(model);
            let State { mut voltages, mut potentials } = state;
            for (Step { networks, ohms, comes_with, tried_from }, stage) in steps.iter().zip(setting.stages) {
                let response = Drain::through(networks, &voltages, &potentials, &sinks, &drawing)?;
                let from = tried_from.iter().filter_map(|states| states.get(number));
                let tries = from
                    .map(|start| Drain::through(networks, &start.voltages, &start.potentials, &sinks, &drawing))
                    .collect::<Result<_, CircuitError>>()?;
                voltages = response.voltages_at(stage.duration);
                potentials = response.potentials_at(stage.duration);
                drawing = response.drawing_at(stage.duration).to_vec();
                let (ohms, comes_with) = (ohms.clone(), comes_with.clone());
                runs.push(Run { response, ohms, comes_with, duration: stage.duration, tries });
            }
            let (map, standing, standing_volts) = (map.clone(), standing.clone(), standing_volts.clone());
            let (fed_volts, fed_energy) = (fed_volts.clone(), fed_energy.clone());
            Ok(Timeline { map, standing, standing_volts, fed_volts, fed_energy, present: present.clone(), runs })
        };
        states.into_iter().enumerate().map(timeline).collect()
    }

    /// Voltage between two nodes of the model during a step, from its start.
    pub fn across(&self, stage: usize, a: usize, b: usize) -> Course {
        across(&self.runs[stage].response, &self.map, a, b)
    }

    /// Voltage across a resistor during a step, from its start; 0 V for as long as its contact is open.
    pub fn on_resistor(&self, model: &Model, stage: usize, resistor: usize) -> Course {
        let run = &self.runs[stage];
        on_resistor(&run.response, run.comes_with[resistor], &self.map, &model.resistors[resistor])
    }

    /// Resistance in ohm of a resistor during a step; infinite where it is open or not connected. A contact that has
    /// yet to close counts as closed.
    pub fn ohms(&self, stage: usize, resistor: usize) -> f64 {
        self.runs[stage].ohms[resistor]
    }

    /// Length of a step in second.
    pub fn duration(&self, stage: usize) -> f64 {
        self.runs[stage].duration
    }

    /// Power in watt of a resistor before isolation.
    pub fn standing(&self, resistor: usize) -> f64 {
        self.standing[resistor]
    }

    /// Which sinks draw at a moment of a step.
    pub fn drawing(&self, stage: usize, t: f64) -> &[bool] {
        self.runs[stage].response.drawing_at(t)
    }

    /// The voltage that counts for the heat of a resistor during a step, from its start.
    pub fn hottest(&self, model: &Model, stage: usize, resistor: usize) -> Course {
        self.runs[stage].hottest(model, &self.map, resistor)
    }

    /// A resistor's body from isolation to the end of the procedure, from `start` K over the air; where `until` is
    /// finite, so many seconds from isolation, with the last step's parts left as they are.
    pub(super) fn heated(
        &self,
        model: &Model,
        resistor: usize,
        body: Thermal,
        start: f64,
        until: f64,
    ) -> Result<Heated, CircuitError> {
        let mut heat = Heated { greatest: start, end: start };
        for (time, run) in self.until(until).zip(&self.runs) {
            let next = body.heated(heat.end, &run.hottest(model, &self.map, resistor), run.ohms[resistor], time)?;
            heat = Heated { greatest: heat.greatest.max(next.greatest), end: next.end };
        }
        Ok(heat)
    }

    /// For every step how much of it lies within so many seconds from isolation; where that is finite the last step
    /// goes on until then.
    pub(super) fn until(&self, until: f64) -> impl Iterator<Item = f64> + '_ {
        let mut left = until;
        self.runs.iter().enumerate().map(move |(stage, run)| {
            let goes_on = stage + 1 == self.runs.len() && until.is_finite();
            let time = if goes_on { left } else { run.duration.min(left) };
            left -= time;
            time
        })
    }

    /// Checks the energy balance of every step.
    pub fn certify(&self) -> Result<(), CircuitError> {
        for run in &self.runs {
            run.response.check_balance(run.duration)?;
            run.tries.iter().try_for_each(|response| response.check_balance(run.duration))?;
        }
        Ok(())
    }

    /// The charge by a supply that a step connects, from an empty bank: the voltage of the bank where the supply is, and
    /// that across its series resistance of so many ohm.
    pub fn charging(&self, model: &Model, stage: usize, source: usize) -> Option<(Course, Course, f64)> {
        let source = &model.sources[source];
        let run = &self.runs[stage];
        let from_empty = run.tries.first()?;
        let bank = across(from_empty, &self.map, source.a, source.b);
        Some((bank, across(from_empty, &self.map, source.inside, source.a), run.ohms[source.resistor]))
    }

    /// What is to come at a pair after the last step, from its end.
    pub fn afterwards(&self, a: usize, b: usize) -> Course {
        self.runs
            .last()
            .map_or_else(Course::default, |last| across(&last.response, &self.map, a, b).after(last.duration))
    }
}

fn across(response: &Drain, map: &[usize], a: usize, b: usize) -> Course {
    let (a, b) = (map[a], map[b]);
    if a == b { Course::default() } else { response.across(a, b) }
}

fn on_resistor(response: &Drain, comes_with: usize, map: &[usize], part: &Part) -> Course {
    let (a, b) = (map[part.a], map[part.b]);
    if a == b { Course::default() } else { response.across_from(comes_with, a, b) }
}

impl Run {
    /// The voltages that count for a resistor: those of the step itself, or of what a supply is tried from.
    fn voltages(&self, model: &Model, map: &[usize], resistor: usize) -> Vec<Course> {
        let part = &model.resistors[resistor];
        let responses = if self.tries.is_empty() { std::slice::from_ref(&self.response) } else { &self.tries[..] };
        responses.iter().map(|r| on_resistor(r, self.comes_with[resistor], map, part)).collect()
    }

    /// Greatest voltage across a resistor that is connected; 0 where it is not.
    pub(super) fn peak(&self, model: &Model, map: &[usize], resistor: usize) -> Result<f64, CircuitError> {
        let mut peak = 0.0;
        if self.ohms[resistor].is_finite() {
            for voltage in self.voltages(model, map, resistor) {
                peak = voltage.greatest_magnitude_within(peak, self.duration)?.0;
            }
        }
        Ok(peak)
    }

    pub(super) fn energy(&self, model: &Model, map: &[usize], resistor: usize) -> f64 {
        self.energy_within(model, map, resistor, self.duration)
    }

    pub(super) fn energy_within(&self, model: &Model, map: &[usize], resistor: usize, time: f64) -> f64 {
        let ohms = self.ohms[resistor];
        if !ohms.is_finite() {
            return 0.0;
        }
        let energies = self.voltages(model, map, resistor).into_iter();
        energies.map(|v| v.integral_of_square(time) / ohms).fold(0.0, f64::max)
    }

    /// The voltage that counts for the temperature of a resistor: of what a supply is tried from, the one that heats
    /// most.
    pub(super) fn hottest(&self, model: &Model, map: &[usize], resistor: usize) -> Course {
        if !self.ohms[resistor].is_finite() {
            return Course::default();
        }
        let heat = |v: &Course| v.integral_of_square(self.duration);
        let hottest = self.voltages(model, map, resistor).into_iter().max_by(|x, y| heat(x).total_cmp(&heat(y)));
        hottest.unwrap_or_default()
    }
}

/// What an open resistor, which carries nothing, comes to whatever its voltage.
pub(super) fn per_ohm(value: f64, ohms: f64) -> f64 {
    if ohms.is_finite() { value / ohms } else { 0.0 }
}
