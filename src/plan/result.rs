//! The result of a plan: ONE documented struct that every report is written from.
//!
//! Quantities stay typed here. They serialise in SI base units under keys that name the unit, unrounded; `null`
//! stands for "never" in a time and for "not given" in a rating.

use crate::check::{degrees, si, si_list, si_or_null};
use crate::finding::Finding;
use crate::quantity::{Capacitance, Energy, Resistance, Temperature, Time, Voltage};
use serde::Serialize;

pub use crate::check::{
    Band, CapacitorResult, Charging, ChargingMoment, Check, CurveLoad, CurvePair, CurvePart, CurveSample, CurveSpan,
    CurveTimes, CurveTool, CurveVoltage, Curves, DrawFrom, Drawing, DrawnWait, Draws, Equipment, EquipmentPart,
    FaultPoint, FaultReading, FaultWait, Interruption, LimitResult, LimitSource, Notice, NoticeFault, Opens, Pair,
    PartSensitivity, Recovery, ResistorResult, Sensitivity, SpreadResult, StepFault, StepHold, StepPart, StepPoint,
    StepReading, StepResult, Stored, ToolLoad, Verdict, Wait, WorstValue,
};

/// Everything that a plan says about one bank.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Plan {
    /// Which tool and which format wrote this.
    pub ebbvolt: Stamp,
    /// Which bank, and the hash of what was read.
    pub bank: Identity,
    /// What the whole plan comes to.
    pub verdict: Verdict,
    /// Parts of the file that this version does not compute; where there are any the plan is INCOMPLETE.
    pub not_computed: Vec<String>,
    /// The voltage that the user chose to wait for.
    #[serde(rename = "touch_voltage_v", serialize_with = "si")]
    pub touch_voltage: Voltage,
    /// The stored energy that the user waits for as well.
    #[serde(rename = "hold_energy_j", serialize_with = "si_or_null")]
    pub hold_energy: Option<Energy>,
    /// Air at the resistors.
    #[serde(rename = "ambient_c", serialize_with = "degrees")]
    pub ambient: Temperature,
    /// The terminals, the last one the reference.
    pub terminals: Vec<String>,
    /// Voltage across the terminals at isolation.
    pub charged_to: ChargedTo,
    /// What the bank holds; `None` (null) where it can't be computed yet.
    pub stored: Option<Stored>,
    /// Time constants of the network at isolation, nominal, slowest first.
    #[serde(rename = "time_constants_s", serialize_with = "si_list")]
    pub time_constants: Vec<Time>,
    /// Waits, one per test point.
    pub waits: Vec<Wait>,
    /// What age and temperature add to the purchase tolerances; parts for which neither is given are left out.
    pub spreads: Vec<SpreadResult>,
    /// Limits, one entry per limit and the pair that governs it.
    pub limits: Vec<LimitResult>,
    /// Resistors: figures of ONE element of an array at its own worst point.
    pub resistors: Vec<ResistorResult>,
    /// Capacitors: figures of ONE unit at its own worst point.
    pub capacitors: Vec<CapacitorResult>,
    /// Steps of the procedure.
    pub steps: Vec<StepResult>,
    /// What comes back after the last step.
    pub recovery: Vec<Recovery>,
    /// What the notice on the cabinet says.
    pub notice: Notice,
    /// What is needed to carry out and to check the discharge.
    pub equipment: Equipment,
    /// What the tool noticed, the gravest first.
    pub findings: Vec<Finding>,
    /// What the plan rests on.
    pub assumptions: Vec<String>,
    /// How the worst cases were found, in one sentence.
    pub worst_case_search: String,
    /// Random draws beside the worst case; only where asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub draws: Option<Draws>,
    /// What the waits depend on; only where asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub sensitivity: Option<Vec<Sensitivity>>,
    /// The calculation in a form that a reviewer can check by hand; only where asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub working: Option<Vec<Working>>,
    /// Voltages, currents and powers against time; only where asked for, and never in the JSON of a plan.
    #[serde(skip)]
    pub curves: Option<Curves>,
}

/// Which tool and which format of result.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Stamp {
    /// Version of the tool.
    pub version: &'static str,
    /// Version of the result's format.
    pub format: u32,
}

/// Which bank.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // The bank file's own keys.
pub struct Identity {
    pub tag: String,
    pub title: Option<String>,
    pub location: Option<String>,
    pub prepared_by: Option<String>,
    pub revision: Option<String>,
    pub notes: Option<String>,
    pub input_sha256: String,
}

/// Voltage across the terminals at isolation.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ChargedTo {
    /// Nominal.
    #[serde(rename = "nominal_v", serialize_with = "si")]
    pub nominal: Voltage,
    /// Worst credible.
    #[serde(rename = "highest_v", serialize_with = "si")]
    pub highest: Voltage,
}

/// One wait worked out for a reviewer: v(t) = v_inf + sum of a_k exp(-t/tau_k).
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Working {
    /// The test point.
    pub across: Pair,
    /// `nominal`, `slowest`, or a fault's name.
    pub case: String,
    /// The values used, every part of the network.
    pub values: Vec<WorkingValue>,
    /// Voltage across the terminals at isolation.
    #[serde(rename = "charged_to_v", serialize_with = "si")]
    pub charged_to: Voltage,
    /// From when on the modes below hold, where sinks draw or contacts close before; absent for from isolation on.
    #[serde(rename = "from_s", serialize_with = "si_or_null", skip_serializing_if = "Option::is_none")]
    pub from: Option<Time>,
    /// Where the voltage settles; with its sign.
    #[serde(rename = "settles_at_v", serialize_with = "si")]
    pub settles_at: Voltage,
    /// The modes, the slowest first.
    pub modes: Vec<WorkingMode>,
    /// For one capacitance with one resistance: the hand calculation; `None` for a network.
    pub single: Option<WorkingSingle>,
    /// The wait; `None` is never.
    #[serde(rename = "wait_s", serialize_with = "si_or_null")]
    pub wait: Option<Time>,
}

/// The value of a part in a worked case.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct WorkingValue {
    /// The part.
    pub id: String,
    /// Resistance of the whole part, for a resistor.
    #[serde(rename = "resistance_ohm", serialize_with = "si_or_null", skip_serializing_if = "Option::is_none")]
    pub resistance: Option<Resistance>,
    /// Capacitance of the whole part, for a capacitor.
    #[serde(rename = "capacitance_f", serialize_with = "si_or_null", skip_serializing_if = "Option::is_none")]
    pub capacitance: Option<Capacitance>,
    /// Its value over the marked one.
    pub factor: f64,
}

/// One mode of a worked case.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct WorkingMode {
    /// Its time constant.
    #[serde(rename = "tau_s", serialize_with = "si")]
    pub tau: Time,
    /// Its amplitude at the test point; with its sign.
    #[serde(rename = "amplitude_v", serialize_with = "si")]
    pub amplitude: Voltage,
}

/// The hand calculation for one mode: tau = R C, t = tau ln(V0/V).
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct WorkingSingle {
    /// The resistance that discharges the capacitance.
    #[serde(rename = "resistance_ohm", serialize_with = "si")]
    pub resistance: Resistance,
    /// The capacitance.
    #[serde(rename = "capacitance_f", serialize_with = "si")]
    pub capacitance: Capacitance,
    /// Voltage at isolation.
    #[serde(rename = "from_v", serialize_with = "si")]
    pub from: Voltage,
    /// Voltage that is waited for.
    #[serde(rename = "to_v", serialize_with = "si")]
    pub to: Voltage,
}
