//! The answer of a search: ONE serialisable struct that every report is written from. SI base units, the unit in the
//! key, unrounded; `null` stands for "never" in a time and for "not given" elsewhere.

use crate::check::{Check, Pair, Verdict, celsius_or_null, degrees, si, si_or_null};
use crate::finding::Finding;
use crate::plan::{ChargedTo, Stamp};
use crate::quantity::{Energy, Mass, Power, Resistance, Temperature, Tolerance, Voltage};
use serde::{Serialize, Serializer};

/// Resistors that do a job, or why there are none.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Sizing<F> {
    /// Which tool and which format wrote this.
    pub ebbvolt: Stamp,
    /// What was sized, as in the command: `bleeder`.
    pub size: &'static str,
    /// The bank's tag.
    pub tag: String,
    /// The hash of what was read.
    pub input_sha256: String,
    /// What the new resistor is called.
    pub id: String,
    /// Where it goes.
    pub across: Pair,
    /// How it is connected in a three-phase bank: `delta`, `star`, `open-delta`.
    pub connection: Option<&'static str>,
    /// Voltage across the terminals at isolation.
    pub charged_to: ChargedTo,
    /// Air at the resistors.
    #[serde(rename = "ambient_c", serialize_with = "degrees")]
    pub ambient: Temperature,
    /// Share of the derated power that stays unused.
    pub power_margin: f64,
    /// Every demand, and the actual resistances with which it is met.
    pub demands: Vec<DemandResult>,
    /// Actual resistances with which all demands are met; `None` where there are none.
    pub window: Option<Window>,
    /// What was looked through.
    pub searched: Searched,
    /// Designs, best first, each put into the bank and planned in full.
    pub candidates: Vec<Candidate<F>>,
    /// What the tool noticed.
    pub findings: Vec<Finding>,
    /// What the answer rests on.
    pub assumptions: Vec<String>,
}

/// A demand, and where it is met.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct DemandResult {
    /// What is demanded, with its figure.
    pub demand: String,
    /// Least actual resistance; `None` where nothing bounds it.
    #[serde(rename = "least_ohm", serialize_with = "si_or_null")]
    pub least: Option<Resistance>,
    /// Greatest actual resistance; `None` where nothing bounds it.
    #[serde(rename = "greatest_ohm", serialize_with = "si_or_null")]
    pub greatest: Option<Resistance>,
    /// True where no resistance that was looked at meets it.
    pub nowhere: bool,
    /// True where resistances in between don't meet it.
    pub gaps: bool,
}

/// The window that all demands leave open, in actual resistance: a design's tolerance has to fit inside.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Window {
    /// Least; `None` where nothing bounds it.
    #[serde(rename = "least_ohm", serialize_with = "si_or_null")]
    pub least: Option<Resistance>,
    /// The demand that bounds it.
    pub least_from: Option<String>,
    /// Greatest; `None` where nothing bounds it.
    #[serde(rename = "greatest_ohm", serialize_with = "si_or_null")]
    pub greatest: Option<Resistance>,
    /// The demand that bounds it.
    pub greatest_from: Option<String>,
}

/// What was looked through.
#[derive(Debug, Clone, Default, PartialEq, Serialize)]
pub struct Searched {
    /// Kinds of element.
    pub elements: usize,
    /// Arrays with a value inside the window.
    pub inside_window: usize,
    /// Of these, set aside since one element would carry too much.
    pub set_aside: Vec<SetAside>,
    /// What is left.
    pub designs: usize,
    /// Of these, put into the bank and not found to do the job by the full plan.
    pub refused_by_plan: usize,
}

/// Arrays that were set aside without a plan.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SetAside {
    /// What one element would carry too much of: `power`, `voltage`; of a discharge through a contact `average power`,
    /// `pulse energy`, `peak power`, `overload energy`, `heat`.
    pub of: &'static str,
    /// How many arrays.
    pub arrays: usize,
}

/// A design that does the job, put into the bank and planned in full: what it is, what one element carries, and the
/// figures of the job. Figures of ONE element where they say so, each at its own worst point.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Candidate<F> {
    /// Its place, from 1.
    pub rank: usize,
    /// The element.
    pub element: String,
    /// Resistance of one element, nominal.
    #[serde(rename = "value_ohm", serialize_with = "si")]
    pub value: Resistance,
    /// Its tolerance, as shares below and above.
    #[serde(serialize_with = "shares")]
    pub tolerance: Option<Tolerance>,
    /// Elements in series.
    pub series: u32,
    /// Strings in parallel.
    pub parallel: u32,
    /// How many elements.
    pub elements: u32,
    /// The whole array, nominal.
    #[serde(rename = "resistance_ohm", serialize_with = "si")]
    pub resistance: Resistance,
    /// True where no other design is at least as good in element count, loss and wait, and better in one.
    pub pareto: bool,
    /// Power of one element before isolation; of one that a contact connects, on average.
    #[serde(rename = "element_power_w", serialize_with = "si_or_null")]
    pub element_power: Option<Power>,
    /// What one element bears at the ambient.
    #[serde(rename = "allowed_power_w", serialize_with = "si_or_null")]
    pub allowed_power: Option<Power>,
    /// Greatest voltage across one element.
    #[serde(rename = "element_voltage_v", serialize_with = "si_or_null")]
    pub element_voltage: Option<Voltage>,
    /// Limiting voltage of one element.
    #[serde(rename = "allowed_voltage_v", serialize_with = "si_or_null")]
    pub allowed_voltage: Option<Voltage>,
    /// Energy in one element from isolation on.
    #[serde(rename = "element_energy_j", serialize_with = "si_or_null")]
    pub element_energy: Option<Energy>,
    /// Greatest body temperature.
    #[serde(rename = "body_temperature_c", serialize_with = "celsius_or_null")]
    pub body_temperature: Option<Temperature>,
    /// Checks of one element against its rating.
    pub checks: Vec<Check>,
    /// What the whole plan with it comes to.
    pub verdict: Verdict,
    /// What of that plan is not met, of whatever part.
    pub not_met: Vec<String>,
    /// Mass of all elements.
    #[serde(rename = "mass_kg", serialize_with = "si_or_null")]
    pub mass: Option<Mass>,
    /// Price of all elements, in the currency of the list.
    pub price: Option<f64>,
    /// The part as an entry of the bank file, ready to paste.
    pub part: String,
    /// The figures of the job.
    #[serde(flatten)]
    pub figures: F,
}

fn shares<S: Serializer>(tolerance: &Option<Tolerance>, to: S) -> Result<S::Ok, S::Error> {
    use crate::quantity::Quantity;
    tolerance.map(|t| (t.low().si(), t.high().si())).serialize(to)
}

impl<F> Sizing<F> {
    /// Exit status: 0 where at least one design does the job, 1 where none does.
    pub fn exit_code(&self) -> u8 {
        u8::from(self.candidates.is_empty())
    }
}
