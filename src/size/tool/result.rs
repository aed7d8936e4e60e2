//! What a discharge tool comes to.

use crate::bank::description::{Resistor, Step};
use crate::check::{celsius_or_null, si, si_or_null};
use crate::quantity::{Current, Energy, Power, Temperature, Time, Voltage};
use serde::Serialize;

/// What a tool comes to in its bank, beside what one element carries. Figures of the whole tool, each at its own worst
/// point; of a tool with three legs, current and power are those of one leg.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ToolFigures {
    /// When it is applied, from isolation on.
    #[serde(rename = "applied_at_s", serialize_with = "si")]
    pub applied_at: Time,
    /// How long it is held until the voltage counts.
    #[serde(rename = "held_s", serialize_with = "si")]
    pub held: Time,
    /// The voltage that has to be reached.
    #[serde(rename = "below_v", serialize_with = "si")]
    pub below: Voltage,
    /// How long it takes until every test point is there for good, cable and contact at their most; `None` is never.
    #[serde(rename = "time_s", serialize_with = "si_or_null")]
    pub time: Option<Time>,
    /// Greatest voltage that is left at a test point when it has been held.
    #[serde(rename = "left_v", serialize_with = "si")]
    pub left: Voltage,
    /// The failed part that then leaves most, and how much; `None` where no part can fail.
    pub worst_fault: Option<FaultLeft>,
    /// Greatest current.
    #[serde(rename = "peak_current_a", serialize_with = "si")]
    pub peak_current: Current,
    /// Greatest power.
    #[serde(rename = "peak_power_w", serialize_with = "si")]
    pub peak_power: Power,
    /// Energy into all of the tool in one discharge.
    #[serde(rename = "energy_j", serialize_with = "si")]
    pub energy: Energy,
    /// That energy over the time for which it is held.
    #[serde(rename = "average_power_w", serialize_with = "si")]
    pub average_power: Power,
    /// What cable and contact turn into heat in one discharge; `None` where their resistance was not given.
    #[serde(rename = "contact_energy_j", serialize_with = "si_or_null")]
    pub contact_energy: Option<Energy>,
    /// Banks in a row; `None` where the element has no thermal data: not checked.
    pub in_a_row: Option<InARowResult>,
    /// The banks in a row that were asked for.
    pub asked_row: Option<AskedRow>,
    /// The part itself.
    #[serde(skip)]
    pub resistor: Resistor,
    /// How it goes into the file.
    #[serde(skip)]
    pub placement: Placement,
    /// Steps that its figures rest on and that the file does not have.
    #[serde(skip)]
    pub steps: Vec<Step>,
}

/// What is left at a test point when a tool has been held, with one part failed.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FaultLeft {
    /// The failed part.
    pub fault: String,
    /// The greatest voltage at a test point.
    #[serde(rename = "left_v", serialize_with = "si")]
    pub left: Voltage,
}

/// How many banks can be discharged in a row from cold, by the body of one element.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct InARowResult {
    /// From one application to the next.
    #[serde(rename = "every_s", serialize_with = "si")]
    pub every: Time,
    /// How many; `None` where the body stays cool enough without end.
    pub banks: Option<u32>,
    /// How long it then has to cool, from when it is lifted, before the next one; `None` without an end.
    #[serde(rename = "cooling_s", serialize_with = "si_or_null")]
    pub cooling: Option<Time>,
}

/// The banks in a row that were asked for.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct AskedRow {
    /// How many.
    pub banks: u32,
    /// From one application to the next.
    #[serde(rename = "every_s", serialize_with = "si")]
    pub every: Time,
    /// The greatest body temperature of one element in the last of them; `None` without thermal data.
    #[serde(rename = "body_temperature_c", serialize_with = "celsius_or_null")]
    pub body_temperature: Option<Temperature>,
    /// Power of one element over the time from one to the next.
    #[serde(rename = "element_average_power_w", serialize_with = "si")]
    pub average_power: Power,
}

/// How a tool goes into the file.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Placement {
    /// In the place of the tool that has its name.
    InPlace,
    /// As a new part, with the steps that apply it: the file has none.
    WithSteps,
    /// As a new part; the file has steps, and none of them applies it.
    Alone,
}
