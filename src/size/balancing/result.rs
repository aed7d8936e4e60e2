//! What balancing resistors come to.

use super::string::WrittenOut;
use crate::bank::description::Resistor;
use crate::check::{Pair, si, si_or_null};
use crate::quantity::{Power, Time, Voltage};
use crate::size::LimitHeld;
use serde::Serialize;

/// What balancing resistors come to in their bank, beside what one element carries. Voltages of units are greatest over
/// all tolerances and leakages, with the terminals held at the highest voltage.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BalancingFigures {
    /// Every unit of the string, from its first end to its second.
    pub units: Vec<UnitShare>,
    /// The least that is left of all units.
    #[serde(rename = "margin_v", serialize_with = "si")]
    pub margin: Voltage,
    /// Highest voltage of a unit with one of the new resistors open (of an array, one element), settled; `None` where
    /// nothing but leakage bounds it.
    #[serde(rename = "open_unit_voltage_v", serialize_with = "si_or_null")]
    pub open_unit_voltage: Option<Voltage>,
    /// Elements in all of the new resistors together.
    pub elements_in_all: u32,
    /// Power of one element at the highest voltage of a unit.
    #[serde(rename = "element_power_at_unit_highest_w", serialize_with = "si")]
    pub element_power: Power,
    /// Voltage of one element then.
    #[serde(rename = "element_voltage_at_unit_highest_v", serialize_with = "si")]
    pub element_voltage: Voltage,
    /// Standing loss of all new resistors together at the highest voltage.
    #[serde(rename = "loss_highest_w", serialize_with = "si")]
    pub loss_highest: Power,
    /// The same with every value nominal.
    #[serde(rename = "loss_nominal_w", serialize_with = "si")]
    pub loss_nominal: Power,
    /// The nominal loss over 8760 h.
    pub energy_per_year_kwh: f64,
    /// The longest wait of all test points; `None` is never.
    #[serde(rename = "wait_s", serialize_with = "si_or_null")]
    pub wait: Option<Time>,
    /// The same with one of the new resistors open; `None` is never.
    #[serde(rename = "open_wait_s", serialize_with = "si_or_null")]
    pub open_wait: Option<Time>,
    /// The limits that were asked for.
    pub limits: Vec<LimitHeld>,
    /// The parts themselves.
    #[serde(skip)]
    pub resistors: Vec<Resistor>,
    /// Capacitors that are replaced by their groups.
    #[serde(skip)]
    pub written_out: Vec<WrittenOut>,
}

/// One unit of the string.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct UnitShare {
    /// Its capacitors.
    pub capacitors: Vec<String>,
    /// Its two nodes.
    pub across: Pair,
    /// The new resistor across it.
    pub resistor: String,
    /// What it is rated.
    #[serde(rename = "rated_v", serialize_with = "si")]
    pub rated: Voltage,
    /// The greatest current that it was taken to leak.
    #[serde(rename = "leakage_a", serialize_with = "si")]
    pub leakage: crate::quantity::Current,
    /// Highest voltage, settled.
    #[serde(rename = "settled_v", serialize_with = "si")]
    pub settled: Voltage,
    /// Highest voltage right after a fast charge; `None` where none was asked for.
    #[serde(rename = "fast_charge_v", serialize_with = "si_or_null")]
    pub fast_charge: Option<Voltage>,
    /// Highest voltage from a fast charge on, all the way to where it settles; likewise.
    #[serde(rename = "after_fast_charge_v", serialize_with = "si_or_null")]
    pub after_fast_charge: Option<Voltage>,
    /// What is left of the rating.
    #[serde(rename = "margin_v", serialize_with = "si")]
    pub margin: Voltage,
}

impl UnitShare {
    /// The highest of its voltages.
    pub fn highest(&self) -> Voltage {
        self.after_fast_charge.filter(|v| *v > self.settled).unwrap_or(self.settled)
    }
}
