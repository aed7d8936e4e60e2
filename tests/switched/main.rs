//! Bleeders that a contact connects at isolation: closed forms, a matrix exponential, series summed by hand, the plan's
//! own figures for the plain bleeder.

mod files;
mod heat;
mod networks;
mod passive;
mod sizing;
mod steps;

use ebbvolt::bank::file;
use ebbvolt::plan::{CurveTimes, Options, Plan, ResistorResult, plan};
use ebbvolt::quantity::{Quantity, Time};

fn planned_with(text: &str, options: Options) -> Plan {
    let (bank, noticed) = file::read("switched.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{e:?}\n{text}"));
    plan(&bank, "", noticed, options).unwrap_or_else(|e| panic!("{e}\n{text}"))
}

fn planned(text: &str) -> Plan {
    planned_with(text, Options::default())
}

/// The plan with voltages at these times in second after isolation.
fn followed(text: &str, times: &[f64]) -> Plan {
    let times = times.iter().map(|t| Time::from_si(*t)).collect();
    planned_with(text, Options { curves: Some(CurveTimes::At(times)), ..Options::default() })
}

/// One capacitance of 1 mF charged to 500 V, at most to 600 V.
fn one(resistors: &str, more: &str) -> String {
    format!(
        "{{ebbvolt: 1, tag: T, ambient: 40 °C, touch_voltage: 50 V, charged_to: {{nominal: 500 V, highest: 600 V}}, \
         capacitors: [{{id: C1, value: 1 mF, tolerance: 0 %}}], resistors: [{resistors}]{more}}}"
    )
}

fn slowest(plan: &Plan) -> f64 {
    plan.waits[0].slowest.expect("it ends").si()
}

fn resistor<'p>(plan: &'p Plan, id: &str) -> &'p ResistorResult {
    plan.resistors.iter().find(|r| r.id == id).expect("a resistor")
}

fn fault_wait(plan: &Plan, name: &str) -> Option<f64> {
    let fault = plan.waits[0].faults.iter().find(|f| f.fault == name).unwrap_or_else(|| panic!("no fault `{name}`"));
    fault.wait.map(Quantity::si)
}

#[track_caller]
fn close(found: f64, expected: f64, relative: f64) {
    assert!((found - expected).abs() <= relative * expected.abs(), "{found:?} for {expected:?}");
}
