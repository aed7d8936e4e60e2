//! Bank files (the plant and its tags are invented) and their plans.

use ebbvolt::bank::{Bank, file};
use ebbvolt::plan::{Options, Plan, plan};
use ebbvolt::quantity::Quantity;

/// The bank that a bank file's text describes.
pub fn read(text: &str) -> Bank {
    file::read("check.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}")).0
}

/// The plan of a bank file's text, by the public path.
pub fn planned(text: &str) -> Plan {
    let bank = read(text);
    plan(&bank, "", Default::default(), Options::default()).unwrap_or_else(|e| panic!("{text}{e}"))
}

/// The head of a bank file: terminals P and N, one voltage.
pub fn head(charged_to: &str, touch_voltage: &str) -> String {
    format!(
        "ebbvolt: 1\ntag: SM-CHECK\nlocation: Saltmarsh pumping station\ntouch_voltage: {touch_voltage}\n\
         charged_to: {charged_to}\n"
    )
}

/// One capacitance and one bleeder; `more` are further lines of the file.
pub fn single_text(charged_to: &str, touch_voltage: &str, ohms: &str, farads: &str, more: &str) -> String {
    format!(
        "{}capacitors: [{{id: C1, value: {farads}}}]\nresistors: [{{id: R1, role: bleeder, value: {ohms}}}]\n{more}",
        head(charged_to, touch_voltage)
    )
}

/// The plan of one capacitance and one bleeder.
pub fn single(charged_to: &str, touch_voltage: &str, ohms: &str, farads: &str) -> Plan {
    planned(&single_text(charged_to, touch_voltage, ohms, farads, ""))
}

/// Voltages that one capacitance with one bleeder still has after these times, as a limit's `within` finds them.
pub fn voltages_at(charged_to: &str, ohms: &str, farads: &str, times: &[&str]) -> Vec<f64> {
    let limits: Vec<String> = times
        .iter()
        .enumerate()
        .map(|(i, time)| format!("  - {{id: t{i}, voltage: 1 V, within: {time}, at: [P, N]}}\n"))
        .collect();
    let more = format!("limits:\n{}", limits.concat());
    let plan = planned(&single_text(charged_to, "1 V", ohms, farads, &more));
    plan.limits.iter().map(|limit| limit.voltage.si()).collect()
}

/// A number of SI base units as a bank file takes it, every digit of it.
pub fn si(value: f64, unit: &str) -> String {
    format!("{value:e} {unit}")
}

/// The nominal wait at the first test point, in second.
pub fn wait(plan: &Plan) -> f64 {
    plan.waits[0].nominal.expect("it ends").si()
}

/// The slowest time constant, in second.
pub fn tau(plan: &Plan) -> f64 {
    plan.time_constants[0].si()
}

/// The greatest current of the first resistor, in ampere.
pub fn peak_current(plan: &Plan) -> f64 {
    plan.resistors[0].peak_current.expect("it is always connected").si()
}
