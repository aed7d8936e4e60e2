//! What a plan says about the steps of a procedure.

use super::{Charging, Pair, si, si_or_null};
use crate::quantity::{Current, Energy, Power, Time, Voltage};
use serde::Serialize;

/// One step of the procedure.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StepResult {
    /// What is done.
    pub step: String,
    /// When it starts, from isolation.
    #[serde(rename = "start_s", serialize_with = "si")]
    pub start: Time,
    /// When it ends.
    #[serde(rename = "end_s", serialize_with = "si")]
    pub end: Time,
    /// True where its end was found from an `until` and rounded up to a time that people can keep.
    pub until: bool,
    /// True where an `until` never comes: the step has no end by itself.
    pub never: bool,
    /// Parts connected at its start.
    pub connect: Vec<String>,
    /// Parts disconnected at its start.
    pub disconnect: Vec<String>,
    /// Pairs that people read at its end.
    pub measure: Vec<Pair>,
    /// The greatest reading with which they may go on.
    pub hold: Option<StepHold>,
    /// Hands may come near.
    pub touch: bool,
    /// Energy in all capacitors at its start, greatest over the box.
    #[serde(rename = "stored_at_start_j", serialize_with = "si")]
    pub stored_at_start: Energy,
    /// The part of it that a short would meet at once: without what dielectrics give back slowly.
    #[serde(rename = "ready_at_start_j", serialize_with = "si")]
    pub ready_at_start: Energy,
    /// Voltages at its end.
    pub test_points: Vec<StepPoint>,
    /// The pairs that people read at its end, with what they may find there and what it would mean.
    pub readings: Vec<StepReading>,
    /// What every resistor and supply that is connected bears during this step.
    pub parts: Vec<StepPart>,
    /// How the supplies that it connects charge an empty bank.
    pub charging: Vec<Charging>,
    /// The voltages at its end with one part failed.
    pub faults: Vec<StepFault>,
}

/// Voltage at a test point at a step's end.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StepPoint {
    /// The test point.
    pub across: Pair,
    /// Every value nominal.
    #[serde(rename = "nominal_v", serialize_with = "si")]
    pub nominal: Voltage,
    /// Greatest over the box.
    #[serde(rename = "highest_v", serialize_with = "si")]
    pub highest: Voltage,
}

/// A pair that people read at a step's end.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StepReading {
    /// The pair.
    pub across: Pair,
    /// Every value nominal.
    #[serde(rename = "nominal_v", serialize_with = "si")]
    pub nominal: Voltage,
    /// Greatest over the box, every part healthy.
    #[serde(rename = "highest_v", serialize_with = "si")]
    pub highest: Voltage,
    /// The greatest reading with which to go on, where the step's hold point is on this pair; `None` (null) elsewhere.
    #[serde(rename = "allowed_v", serialize_with = "si_or_null")]
    pub allowed: Option<Voltage>,
    /// Failures under which the reading can be higher than the highest predicted, whether or not a hold point would
    /// stop there.
    pub points_to: Vec<FaultReading>,
}

/// A failure that a reading points to.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FaultReading {
    /// The failure.
    pub fault: String,
    /// The greatest reading with it; `None` (null) where it is not computed.
    #[serde(rename = "highest_v", serialize_with = "si_or_null")]
    pub highest: Option<Voltage>,
}

/// What a resistor or supply bears during one step, all elements of an array at one value.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StepPart {
    /// The part.
    pub id: String,
    /// Greatest current in one element.
    #[serde(rename = "peak_current_a", serialize_with = "si")]
    pub peak_current: Current,
    /// Greatest power in one element.
    #[serde(rename = "peak_power_w", serialize_with = "si")]
    pub peak_power: Power,
    /// Energy in one element.
    #[serde(rename = "energy_j", serialize_with = "si")]
    pub energy: Energy,
}

/// The greatest reading with which people may go on.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StepHold {
    /// The reading.
    #[serde(rename = "below_v", serialize_with = "si")]
    pub below: Voltage,
    /// Where it is read; every test point where the file names none.
    pub at: Vec<Pair>,
    /// The greatest reading predicted there, every part healthy.
    #[serde(rename = "predicted_v", serialize_with = "si")]
    pub predicted: Voltage,
    /// Faults that a reading above the allowed one points to.
    pub shown_faults: Vec<String>,
}

/// Voltages at a step's end with one part failed.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct StepFault {
    /// The fault.
    pub fault: String,
    /// The test points, in their order.
    pub test_points: Vec<FaultPoint>,
}

/// Voltage at a test point at a step's end with one part failed.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FaultPoint {
    /// The test point.
    pub across: Pair,
    /// Greatest over the box.
    #[serde(rename = "highest_v", serialize_with = "si")]
    pub highest: Voltage,
}

/// What comes back at a test point after the last step.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Recovery {
    /// The test point.
    pub across: Pair,
    /// The greatest voltage from the end of the last step on, over the box.
    #[serde(rename = "voltage_v", serialize_with = "si")]
    pub voltage: Voltage,
    /// When it comes, from isolation; null where it is only approached as everything settles.
    #[serde(rename = "at_s", serialize_with = "si_or_null")]
    pub at: Option<Time>,
    /// When the voltage first passes the touch voltage again, from isolation; null where it does not.
    #[serde(rename = "passes_touch_at_s", serialize_with = "si_or_null")]
    pub passes_touch_at: Option<Time>,
}
