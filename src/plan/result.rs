//! The result of a plan: ONE documented struct that every report is written from.
//!
//! Quantities stay typed here. They serialise in SI base units under keys that name the unit, unrounded; `null`
//! stands for "never" in a time and for "not given" in a rating.

use crate::finding::Finding;
use crate::quantity::{
    Capacitance, Charge, Current, Energy, Power, Quantity, Resistance, Temperature, Time, Voltage, celsius,
};
use serde::{Serialize, Serializer};

fn si<Q: Quantity, S: Serializer>(quantity: &Q, to: S) -> Result<S::Ok, S::Error> {
    to.serialize_f64(quantity.si())
}

fn si_or_null<Q: Quantity, S: Serializer>(quantity: &Option<Q>, to: S) -> Result<S::Ok, S::Error> {
    match quantity {
        Some(quantity) => to.serialize_f64(quantity.si()),
        None => to.serialize_none(),
    }
}

fn si_list<Q: Quantity, S: Serializer>(quantities: &[Q], to: S) -> Result<S::Ok, S::Error> {
    to.collect_seq(quantities.iter().map(|q| q.si()))
}

fn celsius_or_null<S: Serializer>(temperature: &Option<Temperature>, to: S) -> Result<S::Ok, S::Error> {
    match temperature {
        Some(temperature) => to.serialize_f64(celsius(*temperature)),
        None => to.serialize_none(),
    }
}

fn degrees<S: Serializer>(temperature: &Temperature, to: S) -> Result<S::Ok, S::Error> {
    to.serialize_f64(celsius(*temperature))
}

/// A pair of nodes by name.
pub type Pair = [String; 2];

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
    /// What the tool noticed, the gravest first.
    pub findings: Vec<Finding>,
    /// What the plan rests on.
    pub assumptions: Vec<String>,
    /// How the worst cases were found, in one sentence.
    pub worst_case_search: String,
    /// The calculation in a form that a reviewer can check by hand; only where asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub working: Option<Vec<Working>>,
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

/// What a check or a whole plan comes to.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
pub enum Verdict {
    /// A comparison of finite numbers holds.
    #[serde(rename = "met")]
    Met,
    /// It does not hold.
    #[serde(rename = "not met")]
    NotMet,
    /// Nothing was given to check against, or it is not computed yet.
    #[serde(rename = "not checked")]
    NotChecked,
    /// Only for a whole plan: the file has parts that this version does not compute.
    #[serde(rename = "incomplete")]
    Incomplete,
}

impl Verdict {
    /// `found <= allowed`, of finite numbers; NaN never passes.
    pub fn at_most(found: f64, allowed: f64) -> Self {
        if found.is_finite() && allowed.is_finite() && found <= allowed { Verdict::Met } else { Verdict::NotMet }
    }

    /// The words of the JSON.
    pub fn word(self) -> &'static str {
        match self {
            Verdict::Met => "met",
            Verdict::NotMet => "not met",
            Verdict::NotChecked => "not checked",
            Verdict::Incomplete => "incomplete",
        }
    }
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

/// What the bank holds at isolation.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Stored {
    /// Energy in all capacitors, every value nominal.
    #[serde(rename = "energy_nominal_j", serialize_with = "si")]
    pub energy_nominal: Energy,
    /// Greatest over the tolerance box at the highest voltage.
    #[serde(rename = "energy_highest_j", serialize_with = "si")]
    pub energy_highest: Energy,
    /// Greatest charge that a short at the terminals would pass, over the tolerance box at the highest voltage.
    #[serde(rename = "charge_highest_c", serialize_with = "si")]
    pub charge_highest: Charge,
    /// Nominal charge over nominal voltage at the terminals; `None` at 0 V.
    #[serde(rename = "capacitance_f", serialize_with = "si_or_null")]
    pub capacitance: Option<Capacitance>,
    /// Greatest voltage on any test point at isolation, at the highest voltage.
    #[serde(rename = "voltage_highest_v", serialize_with = "si")]
    pub voltage_highest: Voltage,
    /// The published hazard bands into which the stored energy falls; empty where none applies.
    pub bands: Vec<Band>,
}

/// A published band of stored energy.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Band {
    /// What can happen, in words.
    pub hazard: String,
    /// The published rule.
    pub source: String,
    /// How the rule was checked.
    pub seen: String,
}

/// Waits at one test point.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Wait {
    /// The test point.
    pub across: Pair,
    /// Every value nominal; `None` is never.
    #[serde(rename = "nominal_s", serialize_with = "si_or_null")]
    pub nominal: Option<Time>,
    /// The longest over the tolerance box at the highest voltage; `None` is never.
    #[serde(rename = "slowest_s", serialize_with = "si_or_null")]
    pub slowest: Option<Time>,
    /// Greatest voltage at infinite time over the box, every part healthy.
    #[serde(rename = "settles_at_v", serialize_with = "si")]
    pub settles_at: Voltage,
    /// Greatest voltage at isolation over the box.
    #[serde(rename = "at_isolation_v", serialize_with = "si")]
    pub at_isolation: Voltage,
    /// The values of the loose parts at which the slowest wait was found.
    pub worst_point: Vec<WorstValue>,
    /// The same with one part failed.
    pub faults: Vec<FaultWait>,
}

/// The value that a loose part has at a worst point.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct WorstValue {
    /// The part.
    pub id: String,
    /// Its value over the marked one.
    pub factor: f64,
}

/// The wait with one part failed.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FaultWait {
    /// `R1 open`, `C1 shorted`, `C1 one unit shorted`, `R2 absent`.
    pub fault: String,
    /// The longest wait over the box; `None` is never.
    #[serde(rename = "wait_s", serialize_with = "si_or_null")]
    pub wait: Option<Time>,
    /// Greatest voltage at infinite time over the box.
    #[serde(rename = "settles_at_v", serialize_with = "si")]
    pub settles_at: Voltage,
}

/// A limit at the pair that governs it.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct LimitResult {
    /// The user's name or the id of the published limit.
    pub id: String,
    /// What has to hold, in one line, with the figures.
    pub rule: String,
    /// Document, clause, edition and how it was checked; `None` for the user's own limits.
    pub source: Option<LimitSource>,
    /// The pair that governs.
    pub across: Pair,
    /// The time within which it has to hold; `None` where the limit has none.
    #[serde(rename = "within_s", serialize_with = "si_or_null")]
    pub within: Option<Time>,
    /// True where from then on at least one alternative holds with every part healthy; `None` (null) where the
    /// limit is a waiting time alone, which only a procedure can keep.
    pub met: Option<bool>,
    /// The same under every single fault.
    pub single_fault_met: Option<bool>,
    /// True where the limit asks for single faults, so that `single_fault_met` decides the verdict too.
    pub single_fault_asked: bool,
    /// The first fault under which it is not met.
    pub single_fault_missed_by: Option<String>,
    /// Voltage at `within`, at its own worst point.
    #[serde(rename = "voltage_v", serialize_with = "si")]
    pub voltage: Voltage,
    /// Charge at `within`, at its own worst point.
    #[serde(rename = "charge_c", serialize_with = "si")]
    pub charge: Charge,
    /// Energy at `within`, at its own worst point.
    #[serde(rename = "energy_j", serialize_with = "si")]
    pub energy: Energy,
    /// From when on it holds, every part healthy; `None` is never (or no bound to hold).
    #[serde(rename = "holds_from_s", serialize_with = "si_or_null")]
    pub holds_from: Option<Time>,
}

/// Where a published limit comes from.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // The data folder's own keys.
pub struct LimitSource {
    pub document: String,
    pub clause: String,
    pub edition: Option<String>,
    pub seen: String,
}

/// One check against a rating.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Check {
    /// What is checked: `continuous power`, `element voltage`, `pulse energy`, `overload`, `body temperature`.
    pub check: &'static str,
    /// The unit of `found` and `allowed`: `W`, `V`, `J` or `C` (degree Celsius).
    pub unit: &'static str,
    /// The greatest figure found, in that unit; `None` where it can't be computed.
    pub found: Option<f64>,
    /// The rating, in that unit; `None` where none was given.
    pub allowed: Option<f64>,
    /// What it comes to.
    pub verdict: Verdict,
    /// Why it was not checked, or what else a reader should know.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub remark: Option<String>,
}

/// A resistor: figures of ONE element of an array, each at its own worst point.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ResistorResult {
    /// The part.
    pub id: String,
    /// Its role.
    pub role: &'static str,
    /// Resistance of one element, nominal.
    #[serde(rename = "value_ohm", serialize_with = "si")]
    pub value: Resistance,
    /// How many elements the array has.
    pub elements: u32,
    /// Power before isolation at the highest voltage; `None` for a part that only a step connects.
    #[serde(rename = "continuous_power_w", serialize_with = "si_or_null")]
    pub continuous_power: Option<Power>,
    /// Derated power at the ambient; `None` where the rating does not give it.
    #[serde(rename = "allowed_power_w", serialize_with = "si_or_null")]
    pub allowed_power: Option<Power>,
    /// Greatest voltage across the element.
    #[serde(rename = "element_voltage_v", serialize_with = "si_or_null")]
    pub element_voltage: Option<Voltage>,
    /// Greatest current from isolation on.
    #[serde(rename = "peak_current_a", serialize_with = "si_or_null")]
    pub peak_current: Option<Current>,
    /// Greatest power from isolation on.
    #[serde(rename = "peak_power_w", serialize_with = "si_or_null")]
    pub peak_power: Option<Power>,
    /// Energy from isolation on.
    #[serde(rename = "energy_j", serialize_with = "si_or_null")]
    pub energy: Option<Energy>,
    /// Greatest body temperature; `None` where the rating does not give it.
    #[serde(rename = "body_temperature_c", serialize_with = "celsius_or_null")]
    pub body_temperature: Option<Temperature>,
    /// Checks against the ratings.
    pub checks: Vec<Check>,
}

/// A capacitor: figures of ONE unit at its own worst point.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CapacitorResult {
    /// The part.
    pub id: String,
    /// Greatest voltage on one unit, every part healthy.
    #[serde(rename = "voltage_highest_v", serialize_with = "si")]
    pub voltage_highest: Voltage,
    /// One unit's rated voltage; `None` where none was given.
    #[serde(rename = "rated_v", serialize_with = "si_or_null")]
    pub rated: Option<Voltage>,
    /// Greatest voltage on one unit under any single fault.
    #[serde(rename = "voltage_fault_v", serialize_with = "si")]
    pub voltage_fault: Voltage,
    /// The fault under which that is.
    pub worst_fault: Option<String>,
    /// What the healthy figure comes to.
    pub verdict: Verdict,
}

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
    /// Voltages at its end.
    pub test_points: Vec<StepPoint>,
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

/// What comes back at a test point after the last step.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Recovery {
    /// The test point.
    pub across: Pair,
    /// The greatest voltage.
    #[serde(rename = "voltage_v", serialize_with = "si")]
    pub voltage: Voltage,
    /// When it comes, from isolation.
    #[serde(rename = "at_s", serialize_with = "si")]
    pub at: Time,
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
