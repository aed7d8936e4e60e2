//! What a bleeder comes to.

use crate::bank::description::Resistor;
use crate::check::{Pair, si, si_or_null};
use crate::quantity::{Current, Power, Time};
use serde::Serialize;

/// What a bleeder comes to in its bank, beside what one element carries.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BleederFigures {
    /// Standing loss of the array at the highest voltage.
    #[serde(rename = "loss_highest_w", serialize_with = "si")]
    pub loss_highest: Power,
    /// Standing loss with every value nominal.
    #[serde(rename = "loss_nominal_w", serialize_with = "si")]
    pub loss_nominal: Power,
    /// The nominal loss over 8760 h.
    pub energy_per_year_kwh: f64,
    /// Greatest current through the array.
    #[serde(rename = "peak_current_a", serialize_with = "si")]
    pub peak_current: Current,
    /// The longest wait of all test points; `None` is never.
    #[serde(rename = "wait_s", serialize_with = "si_or_null")]
    pub wait: Option<Time>,
    /// The same with one element open; `None` is never.
    #[serde(rename = "open_wait_s", serialize_with = "si_or_null")]
    pub open_wait: Option<Time>,
    /// The limits that were asked for.
    pub limits: Vec<LimitHeld>,
    /// For a bleeder that a contact connects: what decides there in place of the standing loss.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub contact: Option<ContactFigures>,
    /// The part itself.
    #[serde(skip)]
    pub resistor: Resistor,
}

/// What a bleeder that a contact connects comes to.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ContactFigures {
    /// How long after isolation the contact has closed.
    #[serde(rename = "closes_after_s", serialize_with = "si")]
    pub closes_after: Time,
    /// How long after the bank is fed again it has opened.
    #[serde(rename = "opens_after_s", serialize_with = "si")]
    pub opens_after: Time,
    /// Discharges in a row, from cold.
    pub discharges: u32,
    /// How far apart; `None` (null) where that was not asked.
    #[serde(rename = "every_s", serialize_with = "si_or_null")]
    pub every: Option<Time>,
    /// Greatest power in one element.
    #[serde(rename = "element_peak_power_w", serialize_with = "si_or_null")]
    pub element_peak_power: Option<Power>,
    /// The longest wait of all test points where the contact does not close; `None` (null) is never.
    #[serde(rename = "not_closing_wait_s", serialize_with = "si_or_null")]
    pub not_closing_wait: Option<Time>,
}

/// A limit that was asked for, as the plan finds it.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct LimitHeld {
    /// The limit.
    pub id: String,
    /// The pair that governs.
    pub across: Pair,
    /// By when it has to hold.
    #[serde(rename = "within_s", serialize_with = "si_or_null")]
    pub within: Option<Time>,
    /// From when on it does; `None` is never.
    #[serde(rename = "holds_from_s", serialize_with = "si_or_null")]
    pub holds_from: Option<Time>,
    /// Every part healthy.
    pub met: Option<bool>,
    /// With any one part failed; `None` where that was not asked.
    pub single_fault_met: Option<bool>,
}
