//! The figures that the checks ask for, answered together: every corner of the box is solved once for all of them.

use crate::bank::Bank;
use crate::bank::description::ChargedTo;
use crate::circuit::CircuitError;
use crate::discharge::{self, Fault, Figure, Model, Scenario, Study, Worst};
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

/// Figures of the healthy bank: nominal, and greatest over the tolerance box at the highest voltage; the worst of
/// going with and without the sinks that no wait relies on.
#[derive(Debug, Clone, Default)]
pub(crate) struct Answers {
    figures: Vec<Figure>,
    nominal: Vec<f64>,
    worst: Governed,
    /// Of a three-phase bank, for every figure the state at isolation that it comes from: nominal, worst.
    states: Vec<[Option<String>; 2]>,
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
            let study = |volts| Study { model, scenario, volts, figures: &figures };
            greater(&mut nominal, discharge::nominal(&study(charged.nominal.si())).map_err(failed)?);
            worst.offer(scenario, discharge::worst(&study(charged.highest.si())).map_err(failed)?);
        }
        let states = states(model, charged, &figures, &worst).map_err(failed)?;
        Ok(Answers { nominal, worst, figures, states })
    }

    /// Answers `figures` under `fault`.
    pub fn under(bank: &Bank, model: &Model, fault: &Fault, mut figures: Vec<Figure>) -> Result<Self, EngineError> {
        without_repeats(&mut figures);
        let volts = bank.description().charged_to.highest.si();
        let failed = |cause| EngineError { scenario: fault.name.clone(), cause };
        let mut worst = Governed::default();
        for scenario in &fault.scenarios {
            let study = Study { model, scenario, volts, figures: &figures };
            worst.offer(scenario, discharge::worst(&study).map_err(failed)?);
        }
        Ok(Answers { worst, figures, ..Answers::default() })
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
        let study = |volts: Voltage| Study { model, scenario, volts: volts.si(), figures };
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
    ) -> Result<Vec<FaultAnswers>, EngineError> {
        let under = |fault: Fault| {
            let answers = Answers::under(bank, model, &fault, figures.to_vec())?;
            Ok(FaultAnswers { fault, answers })
        };
        faults.into_par_iter().map(under).collect()
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
