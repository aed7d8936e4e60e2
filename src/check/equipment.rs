//! What people need at the cabinet: an instrument that bears the voltage, and the tools, straps and meters of the file.

use super::{Pair, Recovery, StepResult, Stored, Wait, si, si_or_null};
use crate::bank::Bank;
use crate::bank::description::Step;
use crate::quantity::{Energy, Power, Quantity, Resistance, Time, Voltage};
use serde::Serialize;

/// What is needed to carry out and to check a discharge.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Equipment {
    /// The greatest voltage that an instrument can meet at any test point: at isolation, in any step, with one part
    /// failed, after the last step, or from a supply of the file.
    #[serde(rename = "instrument_voltage_v", serialize_with = "si")]
    pub instrument_voltage: Voltage,
    /// Parts that only steps connect, in the order of the file.
    pub parts: Vec<EquipmentPart>,
}

/// A tool, a strap, a meter or a supply, with the ratings of ONE element as the file gives them.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct EquipmentPart {
    /// The part.
    pub id: String,
    /// Its role; `supply` for the series resistance of a supply.
    pub role: &'static str,
    /// Where it goes on.
    pub across: Pair,
    /// Resistance of one element.
    #[serde(rename = "value_ohm", serialize_with = "si")]
    pub value: Resistance,
    /// Elements in series.
    pub series: u32,
    /// Strings in parallel.
    pub parallel: u32,
    /// Rated power; `None` where none was given.
    #[serde(rename = "rated_power_w", serialize_with = "si_or_null")]
    pub power: Option<Power>,
    /// Rated voltage.
    #[serde(rename = "rated_voltage_v", serialize_with = "si_or_null")]
    pub voltage: Option<Voltage>,
    /// Rated energy of one discharge from cold.
    #[serde(rename = "rated_pulse_j", serialize_with = "si_or_null")]
    pub pulse: Option<Energy>,
    /// Short overload: how many times the rated power.
    pub overload_times: Option<f64>,
    /// Short overload: for how long.
    #[serde(rename = "overload_for_s", serialize_with = "si_or_null")]
    pub overload_for: Option<Time>,
    /// The steps that connect it, from 1.
    pub steps: Vec<usize>,
}

/// What the bank's plan says that is needed.
pub(crate) fn equipment(
    bank: &Bank,
    stored: Option<&Stored>,
    waits: &[Wait],
    steps: &[StepResult],
    recovery: &[Recovery],
) -> Equipment {
    let description = bank.description();
    let in_steps = steps.iter().flat_map(|step| {
        let healthy = step.test_points.iter().map(|p| p.highest);
        healthy.chain(step.faults.iter().flat_map(|f| f.test_points.iter().map(|p| p.highest)))
    });
    let greatest = [description.charged_to.highest]
        .into_iter()
        .chain(stored.map(|s| s.voltage_highest))
        .chain(waits.iter().flat_map(|w| w.faults.iter().map(|f| f.settles_at).chain([w.at_isolation, w.settles_at])))
        .chain(in_steps)
        .chain(recovery.iter().map(|r| r.voltage))
        .chain(description.supplies.iter().map(|s| s.voltage))
        .fold(0.0, |most, v| f64::max(most, v.si()));
    let switched = description.resistors.iter().filter(|r| !r.role.always_connected());
    let resistors = switched.map(|r| EquipmentPart {
        id: r.id.clone(),
        role: r.role.word(),
        across: r.across.clone(),
        value: r.value,
        series: r.series,
        parallel: r.parallel,
        power: r.rating.power,
        voltage: r.rating.voltage,
        pulse: r.rating.pulse,
        overload_times: r.rating.overload.map(|o| o.times),
        overload_for: r.rating.overload.map(|o| o.duration),
        steps: connecting(&description.procedure, &r.id),
    });
    let supplies = description.supplies.iter().map(|s| EquipmentPart {
        id: s.id.clone(),
        role: "supply",
        across: s.across.clone(),
        value: s.series,
        series: s.array_series,
        parallel: s.array_parallel,
        power: s.rating.power,
        voltage: s.rating.voltage,
        pulse: s.rating.pulse,
        overload_times: s.rating.overload.map(|o| o.times),
        overload_for: s.rating.overload.map(|o| o.duration),
        steps: connecting(&description.procedure, &s.id),
    });
    Equipment { instrument_voltage: Voltage::from_si(greatest), parts: resistors.chain(supplies).collect() }
}

fn connecting(steps: &[Step], id: &str) -> Vec<usize> {
    (1..).zip(steps).filter(|(_, step)| step.connect.iter().any(|c| c == id)).map(|(number, _)| number).collect()
}
