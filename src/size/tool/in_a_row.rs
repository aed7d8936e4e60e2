//! Banks in a row: how warm the body of one element becomes, how many it bears, how long it then has to cool.

use super::bearing::Bearing;
use super::request::ToolAsk;
use super::result::{AskedRow, InARowResult};
use super::trial::warmed;
use crate::check::{EngineError, Procedure, body};
use crate::discharge::{Body, InARow, Model, StepFigure, element_model};
use crate::plan::ResistorResult;
use crate::quantity::{Power, Quantity, Temperature, Time};

/// Beyond, one bank after the other is as good as no end.
const MOST: u32 = 1 << 16;

/// One element of every leg, with its thermal data.
pub(super) struct Bodies<'a> {
    steps: &'a Procedure<'a>,
    elements: Vec<(Model, usize, Body)>,
    ambient: Temperature,
    /// The greatest rise over the air in K that is allowed, the margin kept.
    pub allowed: f64,
}

impl<'a> Bodies<'a> {
    /// `None` where the elements have no thermal data.
    pub fn of(steps: &'a Procedure<'a>, legs: &[String], bearing: &Bearing) -> Result<Option<Self>, EngineError> {
        let described = &steps.bank.description().resistors;
        let (mut elements, mut allowed) = (Vec::new(), f64::INFINITY);
        for resistor in described.iter().filter(|r| legs.contains(&r.id)) {
            let Some((body, zero_at)) = body(&resistor.rating).zip(resistor.rating.zero_at) else { return Ok(None) };
            let Some((model, index)) = element_model(steps.model, resistor) else { return Ok(None) };
            elements.push((model, index, body));
            allowed = f64::min(allowed, (zero_at.si() - bearing.ambient.si()) * (1.0 - bearing.margin));
        }
        Ok((!elements.is_empty()).then_some(Bodies { steps, elements, ambient: bearing.ambient, allowed }))
    }

    /// The greatest of a figure of one element over all legs.
    fn worst(&self, figure: impl Fn(usize, Body) -> StepFigure) -> Result<f64, EngineError> {
        let mut worst = 0.0f64;
        for (model, resistor, body) in &self.elements {
            let figure = figure(*resistor, *body);
            worst = worst.max(self.steps.healthy(model, vec![figure])?.worst(figure));
        }
        Ok(worst)
    }

    fn rise(&self, row: InARow) -> Result<f64, EngineError> {
        self.worst(|resistor, body| StepFigure::RiseInARow { resistor, body, row })
    }

    fn bears(&self, row: &InARow, count: f64) -> Result<bool, EngineError> {
        Ok(self.rise(InARow { count, ..*row })? <= self.allowed)
    }
}

/// How long a row's discharges are apart: not less than the steps take in which the tool is connected.
fn every(steps: &Procedure, row: &InARow) -> f64 {
    let connected: f64 = steps.stages[row.first..=row.last].iter().map(|s| s.duration).sum();
    row.every.max(connected)
}

/// How many in a row, and how long the body then has to cool.
pub(super) fn in_a_row(bodies: &Bodies, steps: &Procedure, row: &InARow) -> Result<InARowResult, EngineError> {
    let every = Time::from_si(every(steps, row));
    if bodies.bears(row, f64::INFINITY)? {
        return Ok(InARowResult { every, banks: None, cooling: None });
    }
    let (mut banks, mut too_many) = (0, 1);
    while bodies.bears(row, f64::from(too_many))? {
        if too_many >= MOST {
            return Ok(InARowResult { every, banks: None, cooling: None });
        }
        (banks, too_many) = (too_many, 2 * too_many);
    }
    while too_many - banks > 1 {
        let middle = banks + (too_many - banks) / 2;
        if bodies.bears(row, f64::from(middle))? { banks = middle } else { too_many = middle }
    }
    let last = InARow { count: f64::from(banks.max(1)), ..*row };
    let allowed = bodies.allowed;
    let cooling = bodies.worst(|resistor, body| StepFigure::CoolingAfter { resistor, body, row: last, allowed })?;
    Ok(InARowResult { every, banks: Some(banks), cooling: cooling.is_finite().then(|| Time::from_si(cooling)) })
}

/// The row that was asked for, by the body where its data are known, and by the average power in any case.
pub(super) fn asked_row(
    ask: &ToolAsk,
    bodies: Option<&Bodies>,
    results: &[&ResistorResult],
    steps: &Procedure,
    row: &InARow,
) -> Result<Option<AskedRow>, EngineError> {
    let Some(banks) = ask.banks else { return Ok(None) };
    let every = every(steps, row);
    let body_temperature = match bodies {
        Some(bodies) => Some(warmed(bodies.ambient, bodies.rise(InARow { count: f64::from(banks), ..*row })?)),
        None => None,
    };
    let energy = results.iter().filter_map(|r| r.energy).map(Quantity::si).fold(0.0, f64::max);
    Ok(Some(AskedRow {
        banks,
        every: Time::from_si(every),
        body_temperature,
        average_power: Power::from_si(energy / every),
    }))
}
