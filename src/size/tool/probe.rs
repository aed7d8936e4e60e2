//! The bank with a tool of any actual value: what every demand comes to there.
//!
//! The tool has no tolerance of its own here, and cable and contact are as little as none or as much as they can be,
//! whichever is worse for a figure. What all demands come to over a design's own range follows from the window.

use super::applied::{Applied, Goal};
use crate::bank::Bank;
use crate::check::{EngineError, Procedure, Verdict};
use crate::discharge::{InARow, Model, StepFigure, rise_per_kelvin_per_watt};
use crate::quantity::{Quantity, Time};
use crate::size::error::SizeError;
use crate::size::scan::Probe;

/// What was found at one actual resistance, in SI base units, greatest over the tolerances of all other parts; of a tool
/// with three legs, the greatest of one leg.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Point {
    /// The tool's own resistance.
    pub ohms: f64,
    /// For every goal, how long after it is applied its voltage is reached for good; infinite for never.
    pub times: Vec<f64>,
    /// Greatest current.
    pub current: f64,
    /// Greatest voltage across it.
    pub voltage: f64,
    /// Energy in it.
    pub energy: f64,
    /// Energy that cable and contact turn into heat.
    pub contact: f64,
    /// For every thermal time, the rise in K of a body of 1 K/W after one discharge, and after all that were asked for.
    pub rises: Vec<f64>,
    pub rises_in_a_row: Vec<f64>,
}

/// A bank with the tool in it, its value still open.
pub(super) struct Fitted {
    bank: Bank,
    model: Model,
    legs: Vec<usize>,
    goals: Vec<Goal>,
    first: usize,
    /// Most of cable and contact, in ohm.
    lead: f64,
    /// Thermal times in second at which a body is followed, rising.
    taus: Vec<f64>,
    /// One discharge, and those that were asked for.
    once: InARow,
    row: InARow,
}

impl Fitted {
    pub fn new(applied: &Applied, lead: f64, taus: Vec<f64>, row: InARow) -> Result<Self, SizeError> {
        let bank = applied.with(applied.place.clone())?;
        let ids: Vec<String> = bank.legs(&applied.place.id).into_iter().map(|(id, _)| id).collect();
        // As a plan does: from here on every part is a plain one.
        let bank = bank.expanded();
        let model = Model::new(&bank).map_err(EngineError::of("absorption"))?;
        let legs = ids.iter().filter_map(|id| model.find_resistor(id)).collect();
        let (goals, first) = (applied.goals.clone(), applied.first);
        Ok(Fitted { bank, model, legs, goals, first, lead, taus, once: InARow { count: 1.0, ..row }, row })
    }

    /// Is every goal reached in time without the tool?
    pub fn reached_without(&self, held: Time) -> Result<bool, EngineError> {
        let found = self.at(f64::INFINITY)?;
        Ok(found.times.iter().all(|time| Verdict::at_most(*time, held.si()) == Verdict::Met))
    }

    fn model(&self, ohms: f64) -> Model {
        let mut model = self.model.clone();
        for leg in &self.legs {
            model.resistors[*leg].nominal = ohms;
        }
        model
    }

    fn resolved<'m>(&'m self, model: &'m Model) -> Result<Procedure<'m>, EngineError> {
        Procedure::resolve(&self.bank, model)?.ok_or_else(|| no_steps("the trial has no steps"))
    }
}

/// An error that no input can bring about.
pub(super) fn no_steps(what: &str) -> EngineError {
    EngineError { scenario: what.into(), cause: crate::circuit::CircuitError::SearchNotClosed }
}

/// The last time over a goal's voltage wherever it counts, the step that connects the tool kept for ever.
pub(super) fn figures_of(goal: &Goal, procedure: &Procedure, stage: usize) -> Vec<StepFigure> {
    let model = procedure.model;
    let pairs: Vec<usize> = match &goal.at {
        Some([a, b]) => model.find_pair(a, b).into_iter().collect(),
        None => (0..model.test_points).collect(),
    };
    pairs.into_iter().map(|pair| StepFigure::LastOver { stage, pair, level: goal.below.si() }).collect()
}

impl Probe for Fitted {
    type Point = Point;

    fn at(&self, ohms: f64) -> Result<Point, EngineError> {
        let model = self.model(ohms);
        let steps = self.resolved(&model)?;
        let current = |leg: &usize| StepFigure::PartCurrent { resistor: *leg };
        let voltage = |leg: &usize| StepFigure::PartVoltage { resistor: *leg };
        let energy = |leg: &usize| StepFigure::PartEnergy { resistor: *leg };
        let own = self.legs.iter().flat_map(|leg| [current(leg), voltage(leg), energy(leg)]);
        let timed = self.goals.iter().flat_map(|goal| figures_of(goal, &steps, self.first));
        // With cable and contact: the time, and what they take of the energy.
        let path = self.model(ohms + self.lead);
        let (near, far) = if self.lead > 0.0 {
            let later = self.resolved(&path)?;
            let with = timed.chain(self.legs.iter().map(energy)).collect();
            (steps.healthy(&model, own.collect())?, Some(later.healthy(&path, with)?))
        } else {
            (steps.healthy(&model, own.chain(timed).collect())?, None)
        };
        let far = far.as_ref().unwrap_or(&near);
        let greatest = |of: &dyn Fn(&usize) -> f64| self.legs.iter().map(of).fold(0.0, f64::max);
        let time = |goal: &Goal| {
            let figures = figures_of(goal, &steps, self.first).into_iter();
            figures.map(|figure| far.worst(figure)).fold(0.0, f64::max)
        };
        // Of what leaves the bank through tool, cable and contact in series, each takes its share of the resistance.
        let share = if ohms.is_finite() && self.lead > 0.0 { self.lead / (ohms + self.lead) } else { 0.0 };
        let mut rises = vec![0.0f64; self.taus.len()];
        let mut in_a_row = rises.clone();
        for leg in self.legs.iter().filter(|_| ohms.is_finite() && !self.taus.is_empty()) {
            // The bodies are followed where most energy goes into the tool; the plan of a design looks everywhere.
            let figure = energy(leg);
            for timeline in steps.at(&near.worst_scenario(figure), near.worst_point(figure))? {
                for (index, tau) in self.taus.iter().enumerate() {
                    let rise = |row: &InARow| {
                        rise_per_kelvin_per_watt(&model, &timeline, *leg, *tau, row)
                            .map_err(EngineError::of("the body of a tool"))
                    };
                    rises[index] = rises[index].max(rise(&self.once)?);
                    let more = if self.row.count > 1.0 { rise(&self.row)? } else { rises[index] };
                    in_a_row[index] = in_a_row[index].max(more);
                }
            }
        }
        Ok(Point {
            ohms,
            times: self.goals.iter().map(time).collect(),
            current: greatest(&|leg| near.worst(current(leg))),
            voltage: greatest(&|leg| near.worst(voltage(leg))),
            energy: greatest(&|leg| near.worst(energy(leg))),
            contact: share * greatest(&|leg| far.worst(energy(leg))),
            rises,
            rises_in_a_row: in_a_row,
        })
    }
}
