//! Questions to a solved procedure. All answers are magnitudes in SI base units; a time that never comes is infinite.

use super::body::Thermal;
use super::model::{Model, Parameter, PartKind};
use super::repeated::{Followed, InARow};
use super::study::greatest;
use super::timeline::{Run, Setting, Timeline, per_ohm};
use super::worst::Objective;
use crate::circuit::CircuitError;

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
    /// Energy of one cycle, as that of a passive discharge; after the last step its parts are left as they are.
    CycleEnergy {
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
            | StepFigure::CycleEnergy { .. }
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
        let Timeline { map, runs, standing, standing_volts, fed_volts, fed_energy, present } = timeline;
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
                let fed = fed_volts[resistor];
                if fixed { peaks.max(standing_volts[resistor]).max(fed) } else { peaks }
            }
            StepFigure::PartCurrent { resistor } => greatest(all(&|run| {
                Ok(per_ohm(run.peak(model, map, resistor)?.max(fed_volts[resistor]), run.ohms[resistor]))
            })?),
            StepFigure::PartPower { resistor } => greatest(all(&|run| {
                Ok(per_ohm(run.peak(model, map, resistor)?.max(fed_volts[resistor]).powi(2), run.ohms[resistor]))
            })?),
            StepFigure::PartEnergy { resistor } => {
                runs.iter().map(|run| run.energy(model, map, resistor)).sum::<f64>() + fed_energy[resistor]
            }
            StepFigure::CycleEnergy { resistor } => {
                let every = model.contact(resistor).and_then(|contact| contact.every);
                every.map_or(0.0, |every| {
                    let spans = timeline.until(every).zip(runs);
                    let taken: f64 = spans.map(|(time, run)| run.energy_within(model, map, resistor, time)).sum();
                    taken + fed_energy[resistor]
                })
            }
            StepFigure::StandingPower { resistor } => standing[resistor],
            StepFigure::BodyRise { resistor, body } => {
                let through = |start: f64, until: f64| timeline.heated(model, resistor, body, start, until);
                match model.contact(resistor) {
                    Some(contact) => {
                        let ohms = runs.last().map_or(f64::INFINITY, |run| run.ohms[resistor]);
                        contact.greatest_rise(body, per_ohm(fed_volts[resistor].powi(2), ohms), through)?
                    }
                    None => through(body.kelvin_per_watt * standing[resistor], f64::INFINITY)?.greatest,
                }
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
