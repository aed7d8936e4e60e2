//! The procedure with its lengths resolved, and its figures.

use super::EngineError;
use super::answers::{Governed, greater};
use crate::bank::Bank;
use crate::bank::description::{Hold, Lasts, Step};
use crate::circuit::CircuitError;
use crate::discharge::{
    self, Fault, MOST_CORNERS, Model, PartKind, ProcedureStudy, Scenario, Setting, Stage, StepFigure, Timeline, Worst,
};
use crate::quantity::{Quantity, Time, keepable};

/// Beside the healthy bank itself, every corner is tried for up to this many loose values: faults and the elements of
/// arrays multiply the work, and their figures through the steps are mostly those of one extreme corner.
pub(super) const CORNERS_ASIDE: usize = 7;

/// A procedure whose `until` steps have a length.
pub(crate) struct Procedure<'a> {
    pub bank: &'a Bank,
    pub model: &'a Model,
    pub stages: Vec<Stage>,
    /// Steps whose `until` never comes.
    pub never: Vec<bool>,
    tried_from: [f64; 3],
}

/// Figures of a procedure: nominal, and greatest over the box at the highest voltage.
pub(crate) struct StepAnswers {
    figures: Vec<StepFigure>,
    nominal: Vec<f64>,
    worst: Governed,
}

impl StepAnswers {
    fn index(&self, figure: StepFigure) -> Option<usize> {
        self.figures.iter().position(|f| *f == figure)
    }

    /// NaN where it was never asked for, which passes no check.
    pub fn nominal(&self, figure: StepFigure) -> f64 {
        self.index(figure).and_then(|i| self.nominal.get(i)).copied().unwrap_or(f64::NAN)
    }

    /// NaN where it was never asked for, which passes no check.
    pub fn worst(&self, figure: StepFigure) -> f64 {
        self.index(figure).and_then(|i| self.worst.worst.get(i)).map_or(f64::NAN, |w| w.value)
    }

    /// The point of the box at which a figure is greatest.
    pub fn worst_point(&self, figure: StepFigure) -> &[f64] {
        self.index(figure).and_then(|i| self.worst.worst.get(i)).map_or(&[], |w| &w.point)
    }

    /// The scenario in which a figure is greatest.
    pub fn worst_scenario(&self, figure: StepFigure) -> Scenario {
        self.index(figure).and_then(|i| self.worst.scenario.get(i)).cloned().unwrap_or_default()
    }
}

impl<'a> Procedure<'a> {
    /// Resolves the steps of `bank`; `None` where it has no procedure. An `until` is found on the slowest case, with
    /// its step's parts kept for ever, and rounded up to a time that people can keep.
    pub fn resolve(bank: &'a Bank, model: &'a Model) -> Result<Option<Self>, EngineError> {
        let description = bank.description();
        if description.procedure.is_empty() {
            return Ok(None);
        }
        let charged = description.charged_to;
        let tried_from = [0.0, charged.nominal.si(), charged.highest.si()];
        let mut procedure = Procedure { bank, model, stages: Vec::new(), never: Vec::new(), tried_from };
        let mut connected: Vec<usize> = Vec::new();
        for step in &description.procedure {
            let number = |id: &String| model.find_resistor(id);
            connected.retain(|r| !step.disconnect.iter().filter_map(number).any(|gone| gone == *r));
            let new: Vec<usize> = step.connect.iter().filter_map(number).filter(|r| !connected.contains(r)).collect();
            connected.extend(&new);
            let tried = new.iter().any(|r| model.sources.iter().any(|s| s.resistor == *r));
            procedure.stages.push(Stage { connected: connected.clone(), duration: 0.0, tried });
            procedure.never.push(false);
            procedure.fix_length(step)?;
        }
        Ok(Some(procedure))
    }

    fn fix_length(&mut self, step: &Step) -> Result<(), EngineError> {
        let stage = self.stages.len() - 1;
        match &step.lasts {
            Lasts::For(time) => self.stages[stage].duration = time.si(),
            Lasts::Until(hold) => {
                let figures: Vec<StepFigure> = self
                    .pairs(hold)
                    .into_iter()
                    .map(|pair| StepFigure::LastOver { stage, pair, level: hold.below.si() })
                    .collect();
                let mut longest = 0.0f64;
                for scenario in &discharge::healthy(self.model) {
                    let found = self.worst(scenario, &figures, MOST_CORNERS).map_err(EngineError::of("healthy"))?;
                    longest = found.iter().map(|w| w.value).fold(longest, f64::max);
                }
                self.never[stage] = !longest.is_finite();
                if longest.is_finite() {
                    self.stages[stage].duration = keepable(Time::from_si(longest)).si();
                }
            }
        }
        Ok(())
    }

    /// The pairs of the model that a hold or an until speaks of.
    pub fn pairs(&self, hold: &Hold) -> Vec<usize> {
        match &hold.at {
            Some([a, b]) => self.model.find_pair(a, b).into_iter().collect(),
            None => (0..self.model.test_points).collect(),
        }
    }

    fn setting<'s>(&'s self, model: &'s Model, scenario: &'s Scenario, volts: f64) -> Setting<'s> {
        Setting { model, scenario, volts, tried_from: &self.tried_from, stages: &self.stages }
    }

    fn worst(
        &self,
        scenario: &Scenario,
        figures: &[StepFigure],
        most_corners: usize,
    ) -> Result<Vec<Worst>, CircuitError> {
        let setting = self.setting(self.model, scenario, self.tried_from[2]);
        discharge::worst(&ProcedureStudy { setting, most_corners, figures })
    }

    /// Figures of the healthy bank; `model` may have an array opened up.
    pub fn healthy(&self, model: &Model, figures: Vec<StepFigure>) -> Result<StepAnswers, EngineError> {
        let most_corners = if std::ptr::eq(model, self.model) { MOST_CORNERS } else { CORNERS_ASIDE };
        let failed = EngineError::of("healthy, through the steps");
        let (mut nominal, mut worst) = (Vec::new(), Governed::default());
        for scenario in &discharge::healthy(model) {
            let study = |volts| {
                let setting = self.setting(model, scenario, volts);
                ProcedureStudy { setting, most_corners, figures: &figures }
            };
            greater(&mut nominal, discharge::nominal(&study(self.tried_from[1])).map_err(&failed)?);
            worst.offer(scenario, discharge::worst(&study(self.tried_from[2])).map_err(&failed)?);
        }
        Ok(StepAnswers { nominal, worst, figures })
    }

    /// Figures under a fault, the worst of the ways in which it can come about.
    pub fn under(&self, fault: &Fault, figures: &[StepFigure]) -> Result<StepAnswers, EngineError> {
        let mut worst = Governed::default();
        for scenario in &fault.scenarios {
            let found = self.worst(scenario, figures, CORNERS_ASIDE).map_err(EngineError::of(&fault.name))?;
            worst.offer(scenario, found);
        }
        Ok(StepAnswers { nominal: Vec::new(), worst, figures: figures.to_vec() })
    }

    /// The bank through the steps in one scenario at one point of the box, at the highest voltage, from every state that
    /// it can have at isolation.
    pub fn at(&self, scenario: &Scenario, point: &[f64]) -> Result<Vec<Timeline>, EngineError> {
        Timeline::run(&self.setting(self.model, scenario, self.tried_from[2]), point)
            .map_err(EngineError::of("healthy, through the steps"))
    }

    /// The healthy bank through the steps with every value nominal, at the nominal voltage, from the first of the states
    /// that it can have at isolation: what a supply does to an empty bank depends on none of them.
    pub fn nominal(&self) -> Result<Timeline, EngineError> {
        let scenario = Scenario::default();
        let point = vec![1.0; self.model.parameters.len()];
        let failed = EngineError::of("nominal, through the steps");
        let all = Timeline::run(&self.setting(self.model, &scenario, self.tried_from[1]), &point).map_err(&failed)?;
        all.into_iter().next().ok_or_else(|| failed(CircuitError::SearchNotClosed))
    }

    /// The numbers of the supplies that a step connects.
    pub fn new_sources(&self, stage: usize) -> Vec<usize> {
        let connected = &self.bank.description().procedure[stage].connect;
        let sources = self.model.sources.iter().enumerate();
        sources.filter(|(_, s)| connected.contains(&s.id)).map(|(index, _)| index).collect()
    }

    /// Nominal voltages that a step leaves across a part that it connects, with the part and without it.
    pub fn with_and_without(&self, stage: usize, resistor: usize) -> Result<(f64, f64), EngineError> {
        let scenario = Scenario::default();
        let part = &self.model.resistors[resistor];
        let mut stages = self.stages[..=stage].to_vec();
        let left = |stages: &[Stage]| {
            let setting = Setting { stages, ..self.setting(self.model, &scenario, self.tried_from[1]) };
            let point = vec![1.0; self.model.parameters.len()];
            let all = Timeline::run(&setting, &point).map_err(EngineError::of("a meter's reading"))?;
            let volts =
                |timeline: &Timeline| timeline.across(stage, part.a, part.b).value(stages[stage].duration).abs();
            Ok(all.iter().map(volts).fold(0.0, f64::max))
        };
        let with = left(&stages)?;
        stages[stage].connected.retain(|r| *r != resistor);
        Ok((with, left(&stages)?))
    }

    /// When a step starts, in second from isolation.
    pub fn start(&self, stage: usize) -> f64 {
        self.stages[..stage].iter().map(|s| s.duration).sum()
    }

    /// When the last step ends.
    pub fn end(&self) -> f64 {
        self.start(self.stages.len())
    }

    /// The resistors of the file and of supplies that are connected during a step, or for some of it.
    pub fn connected(&self, stage: usize) -> Vec<usize> {
        let model = self.model;
        let there = |r: &usize| match model.resistors[*r].kind {
            PartKind::Fixed => true,
            PartKind::Switched => self.stages[stage].connected.contains(r),
            PartKind::Contact => {
                let closes = model.contact(*r).map_or(f64::INFINITY, |c| c.closes_after);
                closes <= self.start(stage) || closes < self.start(stage + 1)
            }
            PartKind::Absorbing(_) | PartKind::With(_) => false,
        };
        (0..model.resistors.len()).filter(there).collect()
    }

    /// True where a step ever connects this resistor.
    pub fn ever_connects(&self, resistor: usize) -> bool {
        self.stages.iter().any(|s| s.connected.contains(&resistor))
    }
}
