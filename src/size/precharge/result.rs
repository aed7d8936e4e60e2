//! What a precharge resistor comes to.

use crate::bank::description::{Step, Supply};
use crate::check::{Verdict, celsius_or_null, si, si_or_null};
use crate::quantity::{Current, Energy, Power, Ratio, Resistance, Temperature, Time, Voltage};
use serde::Serialize;

/// What a precharge resistor comes to in its bank, beside what one element carries. The charge is one from an empty
/// bank; currents, powers and energies are the worst of 0 V, the nominal and the highest voltage at its start.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct PrechargeFigures {
    /// The supply's voltage.
    #[serde(rename = "supply_v", serialize_with = "si")]
    pub supply_voltage: Voltage,
    /// How long the precharge takes.
    #[serde(rename = "within_s", serialize_with = "si")]
    pub within: Time,
    /// The share of the supply's voltage that was asked for.
    #[serde(serialize_with = "si_or_null")]
    pub share: Option<Ratio>,
    /// When the pair is there for good, with every value nominal; `None` is never, or not asked for.
    #[serde(rename = "to_share_nominal_s", serialize_with = "si_or_null")]
    pub to_share_nominal: Option<Time>,
    /// The latest over the tolerance box.
    #[serde(rename = "to_share_slowest_s", serialize_with = "si_or_null")]
    pub to_share_slowest: Option<Time>,
    /// Voltage that the pair has come to in that time, nominal.
    #[serde(rename = "reached_nominal_v", serialize_with = "si")]
    pub reached_nominal: Voltage,
    /// The least of it.
    #[serde(rename = "reached_lowest_v", serialize_with = "si")]
    pub reached_lowest: Voltage,
    /// What the pair settles at with the supply left on, the least of it.
    #[serde(rename = "settles_lowest_v", serialize_with = "si")]
    pub settles_lowest: Voltage,
    /// Greatest current through the resistor, all of the array.
    #[serde(rename = "peak_current_a", serialize_with = "si")]
    pub peak_current: Current,
    /// Greatest power in all of the array.
    #[serde(rename = "peak_power_w", serialize_with = "si")]
    pub peak_power: Power,
    /// Energy of one charge in all of the array.
    #[serde(rename = "attempt_energy_j", serialize_with = "si")]
    pub attempt_energy: Energy,
    /// What flows as the main contactor closes; `None` where nothing is known of it.
    pub inrush: Option<Inrush>,
    /// Charges one after the other; `None` where that was not asked for.
    pub attempts: Option<Repeated>,
    /// What the resistor has to bear where the bank is a short.
    pub shorted: Shorted,
    /// The steps with which it was tried, as YAML, where no step of the file connects the supply.
    pub steps: Option<String>,
    /// The same.
    #[serde(skip)]
    pub own_steps: Vec<Step>,
    /// The supply with the resistor.
    #[serde(skip)]
    pub supply: Supply,
}

/// What flows as the main contactor closes.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Inrush {
    /// Resistance of the closed path.
    #[serde(rename = "main_ohm", serialize_with = "si")]
    pub main: Resistance,
    /// The supply's voltage less the least that was reached, over that.
    #[serde(rename = "current_a", serialize_with = "si")]
    pub current: Current,
}

/// Charges one after the other, each from an empty bank; of ONE element, the worst of them.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Repeated {
    /// How many.
    pub count: u32,
    /// From the start of one to the start of the next.
    #[serde(rename = "every_s", serialize_with = "si")]
    pub every: Time,
    /// Greatest temperature of the body, during the last of them; `None` without thermal data.
    #[serde(rename = "body_temperature_c", serialize_with = "celsius_or_null")]
    pub body_temperature: Option<Temperature>,
    /// Energy of one charge over the time to the next.
    #[serde(rename = "average_power_w", serialize_with = "si")]
    pub average_power: Power,
    /// What the temperature comes to beside where the rating ends; without thermal data not checked.
    pub verdict: Verdict,
}

/// A shorted bank: the whole voltage of the supply stays across the resistor until somebody opens.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Shorted {
    /// Greatest power in all of the array.
    #[serde(rename = "power_w", serialize_with = "si")]
    pub power: Power,
    /// The same in ONE element.
    #[serde(rename = "element_power_w", serialize_with = "si")]
    pub element_power: Power,
    /// True where the rating gives thermal data.
    pub checked: bool,
    /// How long one element's body takes from the air's temperature to where its rating ends; `None` is never, or
    /// without thermal data not known.
    #[serde(rename = "too_hot_after_s", serialize_with = "si_or_null")]
    pub too_hot_after: Option<Time>,
}
