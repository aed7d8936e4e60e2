//! The steps of a procedure: voltages, what parts bear, what comes back.

use super::procedure::{Procedure, StepAnswers};
use super::step_result::{
    FaultPoint, FaultReading, Recovery, StepFault, StepHold, StepPart, StepPoint, StepReading, StepResult,
};
use super::{Charging, EngineError, Pair, Wait, charging};
use crate::bank::description::{Lasts, Role, Step};
use crate::circuit::Course;
use crate::discharge::{Fault, StepFigure};
use crate::quantity::{Current, Energy, Power, Quantity, Time, Voltage};
use rayon::prelude::*;

/// The steps of a procedure with all their figures answered.
pub(crate) struct StepCheck<'a> {
    pub procedure: &'a Procedure<'a>,
    pub healthy: StepAnswers,
    pub faults: Vec<(Fault, StepAnswers)>,
    pub readings: Vec<Reading>,
    charging: Vec<Vec<Charging>>,
}

/// What a meter reads at the end of the step that connects it, and what would be there without it; nominal, in volt.
pub(crate) struct Reading {
    pub stage: usize,
    pub id: String,
    pub with: f64,
    pub without: f64,
}

/// A name for a source that stays connected: the reading does not fall.
pub(super) const NOT_ISOLATED: &str = "source not isolated";

impl<'a> StepCheck<'a> {
    /// Answers everything that the steps are asked.
    pub fn new(procedure: &'a Procedure<'a>, faults: Vec<Fault>) -> Result<Self, EngineError> {
        let healthy = procedure.healthy(procedure.model, figures(procedure))?;
        let voltages = voltages(procedure);
        let answered = |fault: Fault| {
            let answers = procedure.under(&fault, &voltages)?;
            Ok((fault, answers))
        };
        let faults = faults.into_par_iter().map(answered).collect::<Result<_, EngineError>>()?;
        let mut check = StepCheck { procedure, healthy, faults, readings: Vec::new(), charging: Vec::new() };
        for (stage, step) in check.steps().iter().enumerate() {
            let meters: Vec<&String> = step.connect.iter().filter(|id| check.role(id) == Some(Role::Meter)).collect();
            for id in meters {
                if let Some(resistor) = procedure.model.find_resistor(id) {
                    let (with, without) = procedure.with_and_without(stage, resistor)?;
                    check.readings.push(Reading { stage, id: id.clone(), with, without });
                }
            }
        }
        let stages = 0..procedure.stages.len();
        let charging = stages.map(|stage| charging::charging(&check, stage, &procedure.new_sources(stage)));
        check.charging = charging.collect::<Result<_, _>>()?;
        Ok(check)
    }

    pub(super) fn steps(&self) -> &'a [Step] {
        &self.procedure.bank.description().procedure
    }

    pub(super) fn pair_name(&self, pair: usize) -> Pair {
        let model = self.procedure.model;
        let (a, b) = model.pairs[pair];
        [model.node_names[a].clone(), model.node_names[b].clone()]
    }

    /// The greatest voltage at a pair at a step's end.
    pub(super) fn volts(&self, stage: usize, pair: usize) -> f64 {
        self.healthy.worst(StepFigure::Voltage { stage, pair })
    }

    /// The resistor of a part that a step connects, by its role.
    pub(super) fn role(&self, id: &str) -> Option<Role> {
        self.procedure.bank.description().resistors.iter().find(|r| r.id == id).map(|r| r.role)
    }

    /// The steps, in the order of the file.
    pub fn results(&self, waits: &[Wait]) -> Vec<StepResult> {
        let steps = self.steps().iter().enumerate();
        steps.map(|(stage, step)| self.result(stage, step, waits)).collect()
    }

    fn result(&self, stage: usize, step: &Step, waits: &[Wait]) -> StepResult {
        let procedure = self.procedure;
        let points = 0..procedure.model.test_points;
        let start = procedure.start(stage);
        let point = |pair: usize| StepPoint {
            across: self.pair_name(pair),
            nominal: Voltage::from_si(self.healthy.nominal(StepFigure::Voltage { stage, pair })),
            highest: Voltage::from_si(self.volts(stage, pair)),
        };
        StepResult {
            step: step.name.clone(),
            start: Time::from_si(start),
            end: Time::from_si(start + procedure.stages[stage].duration),
            until: matches!(step.lasts, Lasts::Until(_)),
            never: procedure.never[stage],
            connect: step.connect.clone(),
            disconnect: step.disconnect.clone(),
            measure: step.measure.clone(),
            hold: self.hold(stage, step),
            touch: step.touch,
            ready_at_start: Energy::from_si(self.healthy.worst(StepFigure::ReadyEnergy { stage })),
            stored_at_start: Energy::from_si(self.healthy.worst(StepFigure::StoredEnergy { stage })),
            test_points: points.map(point).collect(),
            readings: step.measure.iter().filter_map(|[a, b]| self.reading(stage, step, [a, b], waits)).collect(),
            parts: procedure.connected(stage).into_iter().map(|r| self.part(stage, r)).collect(),
            charging: self.charging[stage].clone(),
            faults: self.under_faults(stage, waits),
        }
    }

    fn hold(&self, stage: usize, step: &Step) -> Option<StepHold> {
        let hold = step.hold.as_ref()?;
        let pairs = self.procedure.pairs(hold);
        let greatest = |volts: &dyn Fn(usize) -> f64| pairs.iter().map(|p| volts(*p)).fold(0.0, f64::max);
        let shown = self.faults.iter().filter(|(_, answers)| {
            greatest(&|pair| answers.worst(StepFigure::Voltage { stage, pair })) > hold.below.si()
        });
        let names = shown.map(|(fault, _)| fault.name.clone()).chain([NOT_ISOLATED.to_string()]);
        Some(StepHold {
            below: hold.below,
            at: pairs.iter().map(|p| self.pair_name(*p)).collect(),
            predicted: Voltage::from_si(greatest(&|pair| self.volts(stage, pair))),
            shown_faults: names.collect(),
        })
    }

    /// What a pair that is read at a step's end can show, and which failures would show there.
    fn reading(&self, stage: usize, step: &Step, [a, b]: [&String; 2], waits: &[Wait]) -> Option<StepReading> {
        let pair = self.procedure.model.find_pair(a, b)?;
        let figure = StepFigure::Voltage { stage, pair };
        let highest = self.volts(stage, pair);
        let hold = step.hold.as_ref().filter(|hold| self.procedure.pairs(hold).contains(&pair));
        let allowed = hold.map(|hold| hold.below);
        // What only differs in the engine's last digits would not be seen on any instrument.
        let shows = |volts: f64| volts > highest * (1.0 + 1e-6) && volts > 1e-3;
        let parts = self.faults.iter().map(|(fault, answers)| (fault.name.clone(), answers.worst(figure)));
        let mut points_to: Vec<FaultReading> = parts
            .filter(|(_, volts)| shows(*volts))
            .map(|(fault, volts)| FaultReading { fault, highest: Some(Voltage::from_si(volts)) })
            .collect();
        let held = waits.get(pair).map(|wait| wait.at_isolation);
        if held.is_none_or(|volts| shows(volts.si())) {
            points_to.push(FaultReading { fault: NOT_ISOLATED.to_string(), highest: held });
        }
        Some(StepReading {
            across: [a.clone(), b.clone()],
            nominal: Voltage::from_si(self.healthy.nominal(figure)),
            highest: Voltage::from_si(highest),
            allowed,
            points_to,
        })
    }

    /// Figures of ONE element, all elements of an array at one value.
    fn part(&self, stage: usize, resistor: usize) -> StepPart {
        let part = &self.procedure.model.resistors[resistor];
        let (series, parallel) = self.array(&part.id);
        let worst = |figure| self.healthy.worst(figure);
        StepPart {
            id: part.id.clone(),
            peak_current: Current::from_si(worst(StepFigure::Current { stage, resistor }) / parallel),
            peak_power: Power::from_si(worst(StepFigure::Power { stage, resistor }) / (series * parallel)),
            energy: Energy::from_si(worst(StepFigure::Energy { stage, resistor }) / (series * parallel)),
        }
    }

    /// How many elements in series and in parallel a resistor or the series resistance of a supply has.
    fn array(&self, id: &str) -> (f64, f64) {
        let description = self.procedure.bank.description();
        let resistors = description.resistors.iter().map(|r| (&r.id, r.series, r.parallel));
        let supplies = description.supplies.iter().map(|s| (&s.id, s.array_series, s.array_parallel));
        let found = resistors.chain(supplies).find(|(of, _, _)| *of == id);
        found.map_or((1.0, 1.0), |(_, series, parallel)| (f64::from(series), f64::from(parallel)))
    }

    fn under_faults(&self, stage: usize, waits: &[Wait]) -> Vec<StepFault> {
        let points = || 0..self.procedure.model.test_points;
        let of = |(fault, answers): &(Fault, StepAnswers)| StepFault {
            fault: fault.name.clone(),
            test_points: points()
                .map(|pair| FaultPoint {
                    across: self.pair_name(pair),
                    highest: Voltage::from_si(answers.worst(StepFigure::Voltage { stage, pair })),
                })
                .collect(),
        };
        // Nothing is simulated for a source that stays on: every reading is that of the charged bank.
        let held = points()
            .zip(waits)
            .map(|(pair, wait)| FaultPoint { across: self.pair_name(pair), highest: wait.at_isolation });
        let not_isolated = StepFault { fault: NOT_ISOLATED.to_string(), test_points: held.collect() };
        self.faults.iter().map(of).chain([not_isolated]).collect()
    }

    /// What comes back at the test points after the last step.
    pub fn recovery(&self) -> Result<Vec<Recovery>, EngineError> {
        (0..self.procedure.model.test_points).map(|pair| self.recovery_at(pair)).collect()
    }

    fn recovery_at(&self, pair: usize) -> Result<Recovery, EngineError> {
        let figure = StepFigure::Recovery { pair };
        let (a, b) = self.procedure.model.pairs[pair];
        let end = self.procedure.end();
        let scenario = self.healthy.worst_scenario(figure);
        let all = self.procedure.at(&scenario, self.healthy.worst_point(figure))?;
        let (mut course, mut greatest, mut at) = (Course::default(), f64::NEG_INFINITY, 0.0);
        for timeline in all {
            let this = timeline.afterwards(a, b);
            let (voltage, when) = this.greatest_magnitude().map_err(EngineError::of("healthy, after the last step"))?;
            if voltage > greatest {
                (course, greatest, at) = (this, voltage, when);
            }
        }
        let touch = self.procedure.bank.description().touch_voltage.si();
        Ok(Recovery {
            across: self.pair_name(pair),
            voltage: Voltage::from_si(self.healthy.worst(figure)),
            at: at.is_finite().then(|| Time::from_si(end + at)),
            passes_touch_at: passes(&course, touch, at).map(|t| Time::from_si(end + t)),
        })
    }
}

/// When a voltage that begins below `level` first reaches it on its way to its greatest value at `peak`.
fn passes(course: &Course, level: f64, peak: f64) -> Option<f64> {
    let over = |t: f64| course.value(t).abs() > level;
    if over(0.0) {
        return Some(0.0);
    }
    let slowest = course.last().terms().first().map_or(1.0, |(_, rate)| rate.recip());
    let mut high = if peak.is_finite() { peak } else { course.last_start() + 40.0 * slowest };
    if !over(high) {
        return None;
    }
    let mut low = 0.0;
    while high - low > 1e-9 * high {
        let middle = 0.5 * (low + high);
        if over(middle) { high = middle } else { low = middle }
    }
    // The earlier end: a warning must not come late.
    Some(low)
}

/// Voltages at every step's end.
fn voltages(procedure: &Procedure) -> Vec<StepFigure> {
    let pairs = procedure.model.pairs.len();
    let stages = 0..procedure.stages.len();
    stages.flat_map(|stage| (0..pairs).map(move |pair| StepFigure::Voltage { stage, pair })).collect()
}

/// All that is asked of the healthy bank.
fn figures(procedure: &Procedure) -> Vec<StepFigure> {
    let mut figures = voltages(procedure);
    let capacitors = procedure.bank.description().capacitors.len();
    for stage in 0..procedure.stages.len() {
        let seconds = procedure.stages[stage].duration;
        figures.extend(charging::figures(stage, seconds, &procedure.new_sources(stage)));
        figures.push(StepFigure::ReadyEnergy { stage });
        figures.push(StepFigure::StoredEnergy { stage });
        figures.extend((0..capacitors).map(|capacitor| StepFigure::CapacitorVoltage { stage, capacitor }));
        for resistor in procedure.connected(stage) {
            figures.push(StepFigure::Current { stage, resistor });
            figures.push(StepFigure::Power { stage, resistor });
            figures.push(StepFigure::Energy { stage, resistor });
            figures.push(StepFigure::VoltageAtStart { stage, resistor });
        }
    }
    figures.extend((0..procedure.model.test_points).map(|pair| StepFigure::Recovery { pair }));
    figures
}
