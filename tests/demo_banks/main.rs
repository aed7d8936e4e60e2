//! The demonstration banks (invented data): each passes, its plan says what the head of its file says, and nothing
//! that is printed about any of them calls a circuit harmless.

mod figures;
mod wording;

use ebbvolt::bank::file;
use ebbvolt::data::{demo_banks, draft, example_bank};
use ebbvolt::plan::{Options, Plan, plan};
use ebbvolt::report::plan_json;
use serde_json::Value;
use std::collections::BTreeMap;
use std::sync::OnceLock;

/// The plan of a bank file's text, with the calculation.
fn planned(name: &str, text: &str) -> Plan {
    let (bank, noticed) = file::read(name, text.as_bytes()).unwrap_or_else(|e| panic!("{name}: {e:?}"));
    plan(&bank, "", noticed, Options { working: true, ..Options::default() }).unwrap_or_else(|e| panic!("{name}: {e}"))
}

/// Every demonstration bank and the draft, planned once.
pub fn plans() -> &'static BTreeMap<&'static str, Plan> {
    static PLANS: OnceLock<BTreeMap<&'static str, Plan>> = OnceLock::new();
    PLANS.get_or_init(|| {
        let all = demo_banks().iter().copied().chain([("draft", draft())]);
        all.map(|(name, text)| (name, planned(name, text))).collect()
    })
}

/// A bank file's text without absorption and without its procedure: what can be worked out by hand.
fn bare_text(text: &str) -> String {
    let mut in_procedure = false;
    let mut kept = String::new();
    for line in text.lines() {
        let starts_key = line.starts_with(|c: char| c.is_ascii_alphabetic());
        in_procedure = if starts_key { line.starts_with("procedure:") } else { in_procedure };
        let key = line.trim_start().split(':').next().unwrap_or_default();
        if !in_procedure && !["dielectric", "absorption", "hold_energy"].contains(&key) {
            kept.push_str(line);
            kept.push('\n');
        }
    }
    kept
}

/// Every demonstration bank without absorption and procedure, planned once.
pub fn bare_plans() -> &'static BTreeMap<&'static str, Plan> {
    static PLANS: OnceLock<BTreeMap<&'static str, Plan>> = OnceLock::new();
    PLANS.get_or_init(|| demo_banks().iter().map(|(name, text)| (*name, planned(name, &bare_text(text)))).collect())
}

#[test]
fn every_bank_and_the_draft_meet_their_limits_and_ratings() {
    for (name, plan) in plans() {
        assert_eq!(plan.exit_code(), 0, "{name}: {:?} {:#?}", plan.not_computed, plan.findings);
        assert!(!plan.limits.is_empty() && !plan.resistors.is_empty(), "{name}");
    }
    assert!(demo_banks().iter().any(|(name, text)| *name == "pump-drive" && *text == example_bank()));
}

/// Where the plans of these banks may have null: what the file does not give, a wait that never ends under a fault, and
/// figures of a resistor that only a step connects. Anywhere else it would stand for a figure that is lost.
const MAY_BE_NULL: [&str; 35] = [
    ".bank.location",
    ".bank.notes",
    ".bank.prepared_by",
    ".bank.revision",
    ".bank.title",
    ".capacitors.rated_v",
    ".capacitors.worst_fault",
    ".equipment.parts.overload_for_s",
    ".equipment.parts.overload_times",
    ".equipment.parts.rated_power_w",
    ".equipment.parts.rated_pulse_j",
    ".equipment.parts.rated_voltage_v",
    ".hold_energy_j",
    ".limits.allowed_voltage_v",
    ".limits.met",
    ".limits.single_fault_met",
    ".limits.single_fault_missed_by",
    ".limits.source",
    ".limits.within_s",
    ".notice.left_v",
    ".notice.longest_fault",
    ".recovery.at_s",
    ".recovery.passes_touch_at_s",
    ".resistors.allowed_power_w",
    ".resistors.body_temperature_c",
    ".resistors.checks.allowed",
    ".resistors.continuous_power_w",
    ".resistors.element_voltage_v",
    ".resistors.energy_j",
    ".resistors.peak_current_a",
    ".resistors.peak_power_w",
    ".steps.hold",
    ".steps.readings.allowed_v",
    ".waits.faults.wait_s",
    ".working.single",
];

/// Every number is finite, and null stands only where it may.
fn check_numbers(path: &str, value: &Value) {
    match value {
        Value::Number(number) => assert!(number.as_f64().is_some_and(f64::is_finite), "{path}: {number}"),
        Value::Array(list) => list.iter().for_each(|v| check_numbers(path, v)),
        Value::Object(map) => map.iter().for_each(|(key, v)| check_numbers(&format!("{path}.{key}"), v)),
        Value::Null => assert!(MAY_BE_NULL.contains(&path), "{path} is null"),
        Value::Bool(_) | Value::String(_) => {}
    }
}

#[test]
fn the_json_of_every_plan_has_finite_numbers_only() {
    for (name, plan) in plans() {
        let json: Value = serde_json::from_str(&plan_json(plan).expect("finite")).expect("JSON");
        check_numbers("", &json);
        // Only a limit that names no time is neither met nor missed; the bank's own time is there all the same.
        for limit in json["limits"].as_array().expect("a list") {
            let timeless = limit["within_s"].is_null();
            assert_eq!(limit["met"].is_null(), timeless, "{name}: {limit}");
            assert_eq!(limit["single_fault_met"].is_null(), timeless, "{name}: {limit}");
            assert!(limit["holds_from_s"].is_number(), "{name}: {limit}");
        }
        // A part that a step connects has no standing load; all others have their figures.
        for resistor in json["resistors"].as_array().expect("a list") {
            let connected = !["tool", "strap", "meter"].contains(&resistor["role"].as_str().expect("a role"));
            for key in ["continuous_power_w", "element_voltage_v", "peak_current_a", "peak_power_w", "energy_j"] {
                assert!(!connected || resistor[key].is_number(), "{name}: {resistor}");
            }
        }
    }
}
