//! A bank through the steps of a procedure: the state is carried exactly from step to step.
//!
//! Capacitor voltages are continuous where a part is connected or lifted; nodes without a capacitor jump. Between
//! two steps the network is linear, so every voltage is a sum of exponentials of its own.

use super::body::Thermal;
use super::case::{Start, State};
use super::model::{Model, Parameter, PartKind};
use super::repeated::{Followed, InARow};
use super::scenario::Scenario;
use super::study::greatest;
use super::worst::Objective;
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
struct Run {
    response: Drain,
    ohms: Vec<f64>,
    duration: f64,
    /// What follows from each voltage that a connected supply is tried from.
    tries: Vec<Drain>,
}

/// A solved procedure.
#[derive(Debug)]
pub(crate) struct Timeline {
    map: Vec<usize>,
    /// Power in watt of every resistor before isolation.
    standing: Vec<f64>,
    /// Greatest voltage across every resistor before isolation, 0 for one that is not connected.
    standing_volts: Vec<f64>,
    /// Which capacitors of the model are in the network.
    present: Vec<bool>,
    runs: Vec<Run>,
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
    modes: Arc<Modes>,
    ohms: Vec<f64>,
    /// For each voltage that a connected supply is tried from, the states that it can leave.
    tried_from: Vec<Vec<State>>,
}

impl Setting<'_> {
    fn solved_steps(&self, point: &[f64]) -> Result<Vec<Step>, CircuitError> {
        let Setting { model, scenario, .. } = *self;
        let mut last: Option<(&[usize], Arc<Modes>)> = None;
        let mut steps = Vec::with_capacity(self.stages.len());
        for stage in self.stages {
            // A step that connects and lifts nothing goes on with the network of the step before.
            let modes = match last {
                Some((connected, modes)) if *connected == stage.connected => modes,
                _ => Arc::new(Modes::new(model.network(&scenario.after, point, &stage.connected))?),
            };
            last = Some((&stage.connected, Arc::clone(&modes)));
            let from = Scenario { drops_own_voltages: true, ..scenario.clone() };
            let volts = if stage.tried { self.tried_from } else { &[] };
            let tried_from = volts.iter().map(|v| Start::at_isolation(model, &from, point, *v).states).collect();
            steps.push(Step { modes, ohms: model.ohms(&scenario.after, point, &stage.connected), tried_from });
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
        let present: Vec<bool> =
            (0..model.capacitors.len()).map(|c| model.is_there(&scenario.after, &map, c)).collect();
        let steps = setting.solved_steps(point)?;
        let sinks = model.sinks(&map);
        let timeline = |(number, state): (usize, State)| {
            let mut runs = Vec::with_capacity(steps.len());
            let mut drawing = scenario.drawing(model);
            let State { mut voltages, mut potentials } = state;
            for (Step { modes, ohms, tried_from }, stage) in steps.iter().zip(setting.stages) {
                let response = modes.drain(&voltages, &potentials, &sinks, &drawing)?;
                let from = tried_from.iter().filter_map(|states| states.get(number));
                let tries = from
                    .map(|start| modes.drain(&start.voltages, &start.potentials, &sinks, &drawing))
                    .collect::<Result<_, CircuitError>>()?;
                voltages = response.voltages_at(stage.duration);
                potentials = response.potentials_at(stage.duration);
                drawing = response.drawing_at(stage.duration).to_vec();
                runs.push(Run { response, ohms: ohms.clone(), duration: stage.duration, tries });
            }
            let (map, standing, standing_volts) = (map.clone(), standing.clone(), standing_volts.clone());
            Ok(Timeline { map, standing, standing_volts, present: present.clone(), runs })
        };
        states.into_iter().enumerate().map(timeline).collect()
    }

    /// Voltage between two nodes of the model during a step, from its start.
    pub fn across(&self, stage: usize, a: usize, b: usize) -> Course {
        across(&self.runs[stage].response, &self.map, a, b)
    }

    /// Resistance in ohm of a resistor during a step; infinite where it is open or not connected.
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

/// One figure of a procedure. Stages count from 0, pairs are those of the model.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum StepFigure {
    /// Voltage at a step's end.
    Voltage {
        stage: usize,
        pair: usize,
    },
    /// Voltage of a capacitor at a step's end.
    CapacitorVoltage {
        stage: usize,
        capacitor: usize,
    },
    /// Voltage across a resistor at a step's start.
    VoltageAtStart {
        stage: usize,
        resistor: usize,
    },
    /// Last time of a step, kept for ever, at which the voltage is over `level`; infinite for never.
    LastOver {
        stage: usize,
        pair: usize,
        level: f64,
    },
    /// When a supply that the step connects has brought an empty bank to a share of its voltage for good.
    ChargedTo {
        stage: usize,
        source: usize,
        share: f64,
    },
    /// How far an empty bank is below the voltage of a supply that the step connects, so many seconds after its start;
    /// for infinite ones, where it settles.
    ShortOfSupply {
        stage: usize,
        source: usize,
        after: f64,
    },
    /// Energy in the capacitors themselves at a step's start, without what their dielectrics give back slowly.
    ReadyEnergy {
        stage: usize,
    },
    /// Energy in all capacitors at a step's start.
    StoredEnergy {
        stage: usize,
    },
    /// Greatest current in a resistor during a step.
    Current {
        stage: usize,
        resistor: usize,
    },
    /// Greatest power in a resistor during a step.
    Power {
        stage: usize,
        resistor: usize,
    },
    /// Energy in a resistor during a step.
    Energy {
        stage: usize,
        resistor: usize,
    },
    /// Greatest voltage across a resistor while it is connected; before isolation too, where it is always there.
    PartVoltage {
        resistor: usize,
    },
    /// Greatest current, power, and energy in a resistor over the whole procedure.
    PartCurrent {
        resistor: usize,
    },
    PartPower {
        resistor: usize,
    },
    PartEnergy {
        resistor: usize,
    },
    /// Power before isolation.
    StandingPower {
        resistor: usize,
    },
    /// Greatest rise of a resistor's body over the air during the procedure, in K.
    BodyRise {
        resistor: usize,
        body: Thermal,
    },
    /// The same in the last of several such discharges in a row, from cold before the first.
    RiseInARow {
        resistor: usize,
        body: Thermal,
        row: InARow,
    },
    /// How long the body then has to cool until one more leaves it at `allowed` K over the air at most.
    CoolingAfter {
        resistor: usize,
        body: Thermal,
        row: InARow,
        allowed: f64,
    },
    /// The same rise during the last of several runs of one step, each from air temperature before the first of them and
    /// so many seconds after the one before.
    RepeatedRise {
        stage: usize,
        resistor: usize,
        body: Thermal,
        times: u32,
        every: f64,
    },
    /// Greatest voltage from the end of the last step on.
    Recovery {
        pair: usize,
    },
}

impl Run {
    /// The voltages that count for a resistor: those of the step itself, or of what a supply is tried from.
    fn voltages(&self, model: &Model, map: &[usize], resistor: usize) -> Vec<Course> {
        let part = &model.resistors[resistor];
        let responses = if self.tries.is_empty() { std::slice::from_ref(&self.response) } else { &self.tries[..] };
        responses.iter().map(|r| across(r, map, part.a, part.b)).collect()
    }

    /// Greatest voltage across a resistor that is connected; 0 where it is not.
    fn peak(&self, model: &Model, map: &[usize], resistor: usize) -> Result<f64, CircuitError> {
        let mut peak = 0.0;
        if self.ohms[resistor].is_finite() {
            for voltage in self.voltages(model, map, resistor) {
                peak = voltage.greatest_magnitude_within(peak, self.duration)?.0;
            }
        }
        Ok(peak)
    }

    fn energy(&self, model: &Model, map: &[usize], resistor: usize) -> f64 {
        let ohms = self.ohms[resistor];
        if !ohms.is_finite() {
            return 0.0;
        }
        let energies = self.voltages(model, map, resistor).into_iter();
        energies.map(|v| v.integral_of_square(self.duration) / ohms).fold(0.0, f64::max)
    }

    /// The voltage that counts for the temperature of a resistor: of what a supply is tried from, the one that heats
    /// most.
    fn hottest(&self, model: &Model, map: &[usize], resistor: usize) -> Course {
        if !self.ohms[resistor].is_finite() {
            return Course::default();
        }
        let heat = |v: &Course| v.integral_of_square(self.duration);
        let hottest = self.voltages(model, map, resistor).into_iter().max_by(|x, y| heat(x).total_cmp(&heat(y)));
        hottest.unwrap_or_default()
    }
}

/// Figures of a procedure, to be maximised over the box.
pub(crate) struct ProcedureStudy<'a> {
    pub setting: Setting<'a>,
    /// Up to how many loose values every corner is tried.
    pub most_corners: usize,
    pub figures: &'a [StepFigure],
}

impl Objective for ProcedureStudy<'_> {
    /// The procedure from every state that the bank can have at isolation; a figure is the greatest of theirs.
    type Case = Vec<Timeline>;

    fn parameters(&self) -> &[Parameter] {
        &self.setting.model.parameters
    }

    fn count(&self) -> usize {
        self.figures.len()
    }

    fn most_corners(&self) -> usize {
        self.most_corners
    }

    fn case(&self, point: &[f64]) -> Result<Vec<Timeline>, CircuitError> {
        Timeline::run(&self.setting, point)
    }

    /// Voltages to 1e-10 of the bank's, and what follows from it: the engine's rounding is a thousandth of that.
    fn negligible(&self, index: usize) -> f64 {
        let Setting { model, volts, .. } = self.setting;
        let small = 1e-10 * volts;
        let ohms = |resistor: usize| model.resistors[resistor].nominal;
        match self.figures[index] {
            StepFigure::Voltage { .. }
            | StepFigure::CapacitorVoltage { .. }
            | StepFigure::VoltageAtStart { .. }
            | StepFigure::PartVoltage { .. }
            | StepFigure::Recovery { .. }
            | StepFigure::ShortOfSupply { .. } => small,
            StepFigure::Current { resistor, .. } | StepFigure::PartCurrent { resistor } => small / ohms(resistor),
            StepFigure::Power { resistor, .. }
            | StepFigure::PartPower { resistor }
            | StepFigure::StandingPower { resistor } => small * small / ohms(resistor),
            StepFigure::Energy { .. }
            | StepFigure::PartEnergy { .. }
            | StepFigure::ReadyEnergy { .. }
            | StepFigure::StoredEnergy { .. } => {
                1e-10 * model.capacitors.iter().map(|c| 0.5 * c.nominal * small * volts).sum::<f64>()
            }
            StepFigure::BodyRise { .. } | StepFigure::RiseInARow { .. } | StepFigure::RepeatedRise { .. } => 1e-6,
            StepFigure::LastOver { .. } | StepFigure::ChargedTo { .. } | StepFigure::CoolingAfter { .. } => 0.0,
        }
    }

    fn case_for(&self, index: usize, point: &[f64]) -> Result<Vec<Timeline>, CircuitError> {
        let needed = match self.figures[index] {
            StepFigure::Voltage { stage, .. }
            | StepFigure::CapacitorVoltage { stage, .. }
            | StepFigure::VoltageAtStart { stage, .. }
            | StepFigure::LastOver { stage, .. }
            | StepFigure::ChargedTo { stage, .. }
            | StepFigure::ShortOfSupply { stage, .. }
            | StepFigure::RepeatedRise { stage, .. }
            | StepFigure::ReadyEnergy { stage }
            | StepFigure::StoredEnergy { stage }
            | StepFigure::Current { stage, .. }
            | StepFigure::Power { stage, .. }
            | StepFigure::Energy { stage, .. } => stage + 1,
            _ => self.setting.stages.len(),
        };
        Timeline::run(&Setting { stages: &self.setting.stages[..needed], ..self.setting }, point)
    }

    fn certify(&self, cases: &Vec<Timeline>) -> Result<(), CircuitError> {
        cases.iter().try_for_each(Timeline::certify)
    }

    fn figure(&self, index: usize, cases: &Vec<Timeline>, floor: f64) -> Result<f64, CircuitError> {
        greatest(cases, floor, |timeline, floor| self.figures[index].of(self.setting.model, timeline, floor))
    }
}

impl StepFigure {
    fn of(&self, model: &Model, timeline: &Timeline, floor: f64) -> Result<f64, CircuitError> {
        let Timeline { map, runs, standing, standing_volts, present } = timeline;
        let at_pair = |stage: usize, pair: usize| timeline.across(stage, model.pairs[pair].0, model.pairs[pair].1);
        let all = |of: &dyn Fn(&Run) -> Result<f64, CircuitError>| -> Result<Vec<f64>, CircuitError> {
            runs.iter().map(of).collect()
        };
        let greatest = |list: Vec<f64>| list.into_iter().fold(0.0, f64::max);
        Ok(match *self {
            StepFigure::Voltage { stage, pair } => at_pair(stage, pair).value(runs[stage].duration).abs(),
            StepFigure::CapacitorVoltage { stage, capacitor: c } => {
                let c = &model.capacitors[c];
                timeline.across(stage, c.a, c.b).value(runs[stage].duration).abs()
            }
            StepFigure::VoltageAtStart { stage, resistor } => {
                let r = &model.resistors[resistor];
                timeline.across(stage, r.a, r.b).value(0.0).abs()
            }
            StepFigure::LastOver { stage, pair, level } => {
                at_pair(stage, pair).last_outside(level, floor.max(0.0))?.seconds()
            }
            StepFigure::ChargedTo { stage, source, share } => match timeline.charging(model, stage, source) {
                Some((bank, _, _)) => {
                    let volts = model.sources[source].volts;
                    bank.short_of(volts).last_outside((1.0 - share) * volts, floor.max(0.0))?.seconds()
                }
                None => 0.0,
            },
            StepFigure::ShortOfSupply { stage, source, after } => match timeline.charging(model, stage, source) {
                Some((bank, _, _)) => {
                    let short = bank.short_of(model.sources[source].volts);
                    if after.is_finite() { short.value(after) } else { short.constant() }
                }
                None => 0.0,
            },
            StepFigure::ReadyEnergy { stage } => {
                let network = runs[stage].response.network();
                let there = model.capacitors.iter().zip(present).filter(|(_, there)| **there).map(|(c, _)| c);
                let voltages = runs[stage].response.voltages_at(0.0);
                let parts = there.zip(&network.capacitors).zip(voltages);
                parts.filter(|((c, _), _)| c.kind == PartKind::Fixed).map(|((_, e), u)| 0.5 * e.value * u * u).sum()
            }
            StepFigure::StoredEnergy { stage } => runs[stage].response.initial_energy(),
            StepFigure::Current { stage, resistor } => {
                per_ohm(runs[stage].peak(model, map, resistor)?, runs[stage].ohms[resistor])
            }
            StepFigure::Power { stage, resistor } => {
                per_ohm(runs[stage].peak(model, map, resistor)?.powi(2), runs[stage].ohms[resistor])
            }
            StepFigure::Energy { stage, resistor } => runs[stage].energy(model, map, resistor),
            StepFigure::PartVoltage { resistor } => {
                let peaks = greatest(all(&|run| run.peak(model, map, resistor))?);
                let fixed = model.resistors[resistor].kind != PartKind::Switched;
                if fixed { peaks.max(standing_volts[resistor]) } else { peaks }
            }
            StepFigure::PartCurrent { resistor } => {
                greatest(all(&|run| Ok(per_ohm(run.peak(model, map, resistor)?, run.ohms[resistor])))?)
            }
            StepFigure::PartPower { resistor } => {
                greatest(all(&|run| Ok(per_ohm(run.peak(model, map, resistor)?.powi(2), run.ohms[resistor])))?)
            }
            StepFigure::PartEnergy { resistor } => runs.iter().map(|run| run.energy(model, map, resistor)).sum(),
            StepFigure::StandingPower { resistor } => standing[resistor],
            StepFigure::BodyRise { resistor, body } => {
                let mut rise = body.kelvin_per_watt * standing[resistor];
                let mut greatest = rise;
                for run in runs {
                    let volts = run.hottest(model, map, resistor);
                    let heated = body.heated(rise, &volts, run.ohms[resistor], run.duration)?;
                    greatest = greatest.max(heated.greatest);
                    rise = heated.end;
                }
                greatest
            }
            StepFigure::RiseInARow { resistor, body, row } => {
                row.greatest(Followed { model, timeline, resistor, body })?
            }
            StepFigure::CoolingAfter { resistor, body, row, allowed } => {
                row.cooling(Followed { model, timeline, resistor, body }, allowed)?
            }
            StepFigure::RepeatedRise { stage, resistor, body, times, every } => {
                let run = &runs[stage];
                let volts = run.hottest(model, map, resistor);
                body.repeated(&volts, run.ohms[resistor], run.duration, times, every)?
            }
            StepFigure::Recovery { pair } => {
                let (a, b) = model.pairs[pair];
                timeline.afterwards(a, b).greatest_magnitude_over(floor)?.0
            }
        })
    }
}

fn per_ohm(value: f64, ohms: f64) -> f64 {
    if ohms.is_finite() { value / ohms } else { 0.0 }
}
