//! How a supply that a step connects charges the bank.

use super::{EngineError, StepCheck, si, si_or_null};
use crate::discharge::StepFigure;
use crate::quantity::{Charge, Current, Quantity, Ratio, Time, Voltage};
use serde::Serialize;

/// Shares of the supply's voltage that are given a time.
const SHARES: [f64; 4] = [0.5, 0.9, 0.95, 0.99];

/// The charge of an empty bank by one supply, as if its step went on for ever.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Charging {
    /// The supply.
    pub supply: String,
    /// Its voltage.
    #[serde(rename = "voltage_v", serialize_with = "si")]
    pub voltage: Voltage,
    /// What an empty bank has come to at the step's end, with every value nominal.
    #[serde(rename = "reached_nominal_v", serialize_with = "si")]
    pub reached_nominal: Voltage,
    /// The least of it over the tolerance box.
    #[serde(rename = "reached_lowest_v", serialize_with = "si")]
    pub reached_lowest: Voltage,
    /// The moments at which the bank has come to a share of that.
    pub moments: Vec<ChargingMoment>,
}

/// A moment of a charge: the bank has come to `share` of the supply's voltage, and stays at or above it.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ChargingMoment {
    /// The share.
    #[serde(serialize_with = "si")]
    pub share: Ratio,
    /// When, from the step's start, with every value nominal; `None` is never: the bank's own resistors hold it lower.
    #[serde(rename = "nominal_s", serialize_with = "si_or_null")]
    pub nominal: Option<Time>,
    /// The latest over the tolerance box; `None` is never.
    #[serde(rename = "slowest_s", serialize_with = "si_or_null")]
    pub slowest: Option<Time>,
    /// Voltage of the bank where the supply is, at the nominal moment; so are the figures below.
    #[serde(rename = "bank_v", serialize_with = "si_or_null")]
    pub bank: Option<Voltage>,
    /// Voltage across the series resistance.
    #[serde(rename = "series_v", serialize_with = "si_or_null")]
    pub series: Option<Voltage>,
    /// Current from the supply.
    #[serde(rename = "current_a", serialize_with = "si_or_null")]
    pub current: Option<Current>,
    /// Charge that has flowed from it.
    #[serde(rename = "charge_c", serialize_with = "si_or_null")]
    pub charge: Option<Charge>,
}

/// What has to be known of the supplies that a step of so many seconds connects.
pub(super) fn figures(stage: usize, seconds: f64, sources: &[usize]) -> Vec<StepFigure> {
    let of = |source: usize| {
        let moments = SHARES.map(|share| StepFigure::ChargedTo { stage, source, share });
        moments.into_iter().chain([StepFigure::ShortOfSupply { stage, source, after: seconds }])
    };
    sources.iter().flat_map(|source| of(*source)).collect()
}

/// The charge by every supply that a step connects.
pub(super) fn charging(check: &StepCheck, stage: usize, sources: &[usize]) -> Result<Vec<Charging>, EngineError> {
    let procedure = check.procedure;
    let model = procedure.model;
    if sources.is_empty() {
        return Ok(Vec::new());
    }
    let timeline = procedure.nominal()?;
    let finite = |t: f64| t.is_finite().then(|| Time::from_si(t));
    let of = |source: usize| {
        let courses = timeline.charging(model, stage, source);
        let moment = |share: f64| {
            let figure = StepFigure::ChargedTo { stage, source, share };
            let nominal = finite(check.healthy.nominal(figure));
            let at = courses.as_ref().zip(nominal.map(Quantity::si));
            ChargingMoment {
                share: Ratio::from_si(share),
                nominal,
                slowest: finite(check.healthy.worst(figure)),
                bank: at.map(|((bank, _, _), t)| Voltage::from_si(bank.value(t))),
                series: at.map(|((_, series, _), t)| Voltage::from_si(series.value(t))),
                current: at.map(|((_, series, ohm), t)| Current::from_si(series.value(t) / ohm)),
                charge: at.map(|((_, series, ohm), t)| Charge::from_si(series.integral(t) / ohm)),
            }
        };
        let volts = model.sources[source].volts;
        let short = StepFigure::ShortOfSupply { stage, source, after: procedure.stages[stage].duration };
        Charging {
            supply: model.sources[source].id.clone(),
            voltage: Voltage::from_si(volts),
            reached_nominal: Voltage::from_si(volts - check.healthy.nominal(short)),
            reached_lowest: Voltage::from_si(volts - check.healthy.worst(short)),
            moments: SHARES.into_iter().map(moment).collect(),
        }
    };
    Ok(sources.iter().map(|source| of(*source)).collect())
}
