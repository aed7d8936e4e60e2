//! The figures that the checks ask for, answered together: every corner of the box is solved once for all of them.

use crate::bank::Bank;
use crate::bank::description::ChargedTo;
use crate::circuit::CircuitError;
use crate::discharge::{self, Fault, Figure, LaterStudy, Method, Model, Scenario, Study, Worst, asked_later};
use crate::quantity::{Quantity, Voltage};
use rayon::prelude::*;
use std::fmt;

/// The engine could not certify a result: an internal error, and no plan.
#[derive(Debug, Clone, PartialEq)]
pub struct EngineError {
    /// `healthy`, or the fault that was being computed.
    pub scenario: String,
    /// What failed.
    pub cause: CircuitError,
}

impl fmt::Display for EngineError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "no verdict: the engine could not certify its result ({}; {})", self.scenario, self.cause)
    }
}

impl std::error::Error for EngineError {}

impl EngineError {
    /// The same for a circuit error in a named scenario.
    pub(crate) fn of(scenario: &str) -> impl Fn(CircuitError) -> EngineError + '_ {
        move |cause| EngineError { scenario: scenario.to_string(), cause }
    }
}

/// Corners that may be tried under one fault where pins leave few values free: there are many faults.
const FAULT_CORNERS: usize = 1 << 8;

/// Figures of the healthy bank: nominal, and greatest over the tolerance box at the highest voltage; the worst of
/// going with and without the sinks that no wait relies on.
#[derive(Debug, Clone, Default)]
pub(crate) struct Answers {
    figures: Vec<Figure>,
    nominal: Vec<f64>,
    worst: Governed,
    /// Of a three-phase bank, for every figure the state at isolation that it comes from: nominal, worst.
    states: Vec<[Option<String>; 2]>,
    /// For every figure of a resistor that opens, when it does.
    moments: Vec<Moment>,
}

/// When a resistor opens, in the worst case.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Moment {
    /// So long before isolation that the voltages have settled without it.
    Before,
    AtIsolation,
    /// This many seconds after isolation.
    After(f64),
}

/// The worst of several scenarios for each figure, and which of them it is.
#[derive(Debug, Clone, Default)]
pub(crate) struct Governed {
    pub worst: Vec<Worst>,
    pub scenario: Vec<Scenario>,
}

impl Governed {
    /// Takes in what was found in one more scenario.
    pub fn offer(&mut self, scenario: &Scenario, found: Vec<Worst>) {
        if self.worst.is_empty() {
            self.scenario = vec![scenario.clone(); found.len()];
            self.worst = found;
            return;
        }
        for (index, found) in found.into_iter().enumerate() {
            if found.value > self.worst[index].value {
                self.worst[index] = found;
                self.scenario[index] = scenario.clone();
            }
        }
    }
}

/// The greater of each nominal figure.
pub(super) fn greater(nominal: &mut Vec<f64>, found: Vec<f64>) {
    if nominal.is_empty() {
        *nominal = found;
    } else {
        nominal.iter_mut().zip(found).for_each(|(x, y)| *x = x.max(y));
    }
}

/// Figures under one fault: the greatest over the box and over the ways in which it can come about.
#[derive(Debug, Clone)]
pub(crate) struct FaultAnswers {
    pub fault: Fault,
    answers: Answers,
}

impl Answers {
    /// Answers `figures` for the healthy bank.
    pub fn healthy(bank: &Bank, model: &Model, mut figures: Vec<Figure>) -> Result<Self, EngineError> {
        without_repeats(&mut figures);
        let charged = &bank.description().charged_to;
        let failed = |cause| EngineError { scenario: "healthy".into(), cause };
        let (mut nominal, mut worst) = (Vec::new(), Governed::default());
        for scenario in &discharge::healthy(model) {
            let study = |volts| Study::new(model, scenario, volts, &figures, 1 << discharge::MOST_CORNERS);
            greater(&mut nominal, discharge::nominal(&study(charged.nominal.si())).map_err(failed)?);
            worst.offer(scenario, discharge::worst(&study(charged.highest.si())).map_err(failed)?);
        }
        let states = states(model, charged, &figures, &worst).map_err(failed)?;
        Ok(Answers { nominal, worst, figures, states, moments: Vec::new() })
    }

    /// Answers `figures` under `fault`; `healthy` are those of the bank without it.
    pub fn under(
        bank: &Bank,
        model: &Model,
        fault: &Fault,
        mut figures: Vec<Figure>,
        healthy: &Answers,
    ) -> Result<Self, EngineError> {
        without_repeats(&mut figures);
        let volts = bank.description().charged_to.highest.si();
        let failed = |cause| EngineError { scenario: fault.name.clone(), cause };
        let mut worst = Governed::default();
        let mut moments = vec![Moment::Before; figures.len()];
        for scenario in &fault.scenarios {
            let study = Study::new(model, scenario, volts, &figures, FAULT_CORNERS);
            let found = discharge::worst(&study).map_err(failed)?;
            for ((moment, found), known) in moments.iter_mut().zip(&found).zip(&worst.worst) {
                // Told apart by more than rounding: the simpler of two equal stories is told.
                if found.value > known.value * (1.0 + 1e-9) {
                    *moment = if scenario.before == scenario.after { Moment::Before } else { Moment::AtIsolation };
                }
            }
            worst.offer(scenario, found);
        }
        if let Some(lost) = &fault.later {
            let later = LaterStudy::new(model, lost, volts, asked_later(model, &figures));
            let found = discharge::worst(&later).map_err(failed)?;
            for (asked, (figure, found)) in later.figures().iter().zip(found).enumerate() {
                let Some(index) = figures.iter().position(|f| f == figure) else { continue };
                // Opening as the healthy wait ends leaves that wait: it counts only where it makes something worse.
                let at_best = worst.worst[index].value.max(healthy.worst(*figure));
                if found.value > at_best * (1.0 + 1e-9) {
                    moments[index] = Moment::After(later.moment(asked, &found.point).map_err(failed)?);
                    worst.worst[index] = found;
                }
            }
        }
        let moments = if fault.later.is_some() { moments } else { Vec::new() };
        Ok(Answers { worst, figures, moments, ..Answers::default() })
    }

    fn index(&self, figure: &Figure) -> Option<usize> {
        self.figures.iter().position(|f| f == figure)
    }

    /// The nominal value of a figure; NaN where it was never asked for, which passes no check.
    pub fn nominal(&self, figure: Figure) -> f64 {
        self.index(&figure).and_then(|i| self.nominal.get(i)).copied().unwrap_or(f64::NAN)
    }

    /// The greatest value of a figure; NaN where it was never asked for, which passes no check.
    pub fn worst(&self, figure: Figure) -> f64 {
        self.index(&figure).and_then(|i| self.worst.worst.get(i)).map_or(f64::NAN, |w| w.value)
    }

    /// How the greatest value of a figure was found.
    pub fn method(&self, figure: Figure) -> Option<Method> {
        self.index(&figure).and_then(|i| self.worst.worst.get(i)).map(|w| w.method)
    }

    /// The point of the box at which a figure is greatest.
    pub fn worst_point(&self, figure: Figure) -> &[f64] {
        self.index(&figure).and_then(|i| self.worst.worst.get(i)).map_or(&[], |w| &w.point)
    }

    /// The states at isolation from which a figure is greatest, nominal and worst; `None` where there is one only.
    pub fn states(&self, figure: Figure) -> Option<[&str; 2]> {
        let [nominal, worst] = self.index(&figure).and_then(|i| self.states.get(i))?;
        Some([nominal.as_deref()?, worst.as_deref()?])
    }

    /// The scenario in which a figure is greatest.
    pub fn worst_scenario(&self, figure: Figure) -> Scenario {
        self.index(&figure).and_then(|i| self.worst.scenario.get(i)).cloned().unwrap_or_default()
    }
}

/// From which state at isolation every figure comes, where there are several.
fn states(
    model: &Model,
    charged: &ChargedTo,
    figures: &[Figure],
    governed: &Governed,
) -> Result<Vec<[Option<String>; 2]>, CircuitError> {
    if model.three_phase.is_none() {
        return Ok(Vec::new());
    }
    let found = governed.scenario.iter().zip(&governed.worst).enumerate();
    let of = |(index, (scenario, worst)): (usize, (&Scenario, &Worst))| {
        let study = |volts: Voltage| Study::new(model, scenario, volts.si(), figures, 0);
        let nominal = study(charged.nominal).worst_state(index, &model.nominal_point())?;
        let worst = study(charged.highest).worst_state(index, &worst.point)?;
        Ok([nominal, worst].map(|state| model.state_name(state)))
    };
    found.map(of).collect()
}

impl FaultAnswers {
    /// Answers the figures for every fault.
    pub fn all(
        bank: &Bank,
        model: &Model,
        faults: Vec<Fault>,
        figures: &[Figure],
        healthy: &Answers,
    ) -> Result<Vec<FaultAnswers>, EngineError> {
        let under = |fault: Fault| {
            let answers = Answers::under(bank, model, &fault, figures.to_vec(), healthy)?;
            Ok(FaultAnswers { fault, answers })
        };
        faults.into_par_iter().map(under).collect()
    }

    /// When the resistor that failed opens, for the greatest value of a figure; `None` for another fault.
    pub fn moment(&self, figure: Figure) -> Option<Moment> {
        self.answers.index(&figure).and_then(|i| self.answers.moments.get(i)).copied()
    }

    /// The greatest value of a figure under this fault.
    pub fn worst(&self, figure: Figure) -> f64 {
        self.answers.worst(figure)
    }
}

fn without_repeats(figures: &mut Vec<Figure>) {
    let mut kept: Vec<Figure> = Vec::with_capacity(figures.len());
    for figure in figures.drain(..) {
        if !kept.contains(&figure) {
            kept.push(figure);
        }
    }
    *figures = kept;
}
