//! Three-phase banks against a reference by another route: `tests/reference/three_phase.py` steps the sources in time,
//! pole by pole, and solves the discharge at 60 digits (mpmath; versions in `tests/reference/requirements.txt`).

use ebbvolt::bank::file;
use ebbvolt::plan::{Options, Plan, plan};
use ebbvolt::quantity::{Quantity, Time};
use serde::Deserialize;
use std::collections::BTreeMap;

const FOLDER: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/reference");

#[derive(Deserialize)]
struct Figures {
    banks: BTreeMap<String, Reference>,
}

#[derive(Deserialize)]
struct Reference {
    waits: Vec<ReferenceWait>,
}

/// Decimal strings of 25 digits; `None` is never.
#[derive(Deserialize)]
struct ReferenceWait {
    across: [String; 2],
    at_isolation_v: String,
    nominal_s: Option<String>,
    slowest_s: Option<String>,
    faults: Vec<ReferenceFault>,
}

#[derive(Deserialize)]
struct ReferenceFault {
    fault: String,
    wait_s: Option<String>,
}

fn planned(name: &str) -> Plan {
    let path = format!("{FOLDER}/three-phase/{name}.yaml");
    let bytes = std::fs::read(&path).unwrap_or_else(|e| panic!("{path}: {e}"));
    let (bank, noticed) = file::read(&path, &bytes).unwrap_or_else(|e| panic!("{path}: {e:?}"));
    plan(&bank, "", noticed, Options::default()).unwrap_or_else(|e| panic!("{path}: {e}"))
}

fn reference() -> Figures {
    let text = std::fs::read_to_string(format!("{FOLDER}/three-phase.json")).expect("the reference is there");
    serde_json::from_str(&text).expect("its structure is known")
}

/// What differs from the reference by more than 1e-9 of it, either way: a worst case below it would be too early, and
/// one above it was found where the reference's own search had not been.
fn miss(what: String, found: Option<f64>, expected: Option<f64>) -> Option<String> {
    let agrees = match (found, expected) {
        (Some(found), Some(expected)) => (found - expected).abs() <= 1e-9 * expected,
        (found, expected) => found.is_none() && expected.is_none(),
    };
    (!agrees).then(|| format!("{what}: {found:?} was found, {expected:?} is the reference"))
}

#[test]
fn waits_and_what_the_poles_leave_are_those_of_the_reference() {
    let mut misses = Vec::new();
    let mut compared = 0;
    for (name, reference) in reference().banks {
        let plan = planned(&name);
        let number = |text: &Option<String>| text.as_ref().map(|t| t.parse::<f64>().expect("a number"));
        let seconds = |time: Option<Time>| time.map(Quantity::si);
        assert_eq!(plan.waits.len(), reference.waits.len(), "{name}");
        for (found, expected) in plan.waits.iter().zip(&reference.waits) {
            assert_eq!(found.across, expected.across, "{name}");
            let at = |what: &str| format!("{name}, {:?}, {what}", expected.across);
            let isolation = Some(expected.at_isolation_v.parse::<f64>().expect("a number"));
            misses.extend(miss(at("at isolation"), Some(found.at_isolation.si()), isolation));
            misses.extend(miss(at("nominal"), seconds(found.nominal), number(&expected.nominal_s)));
            misses.extend(miss(at("slowest"), seconds(found.slowest), number(&expected.slowest_s)));
            assert_eq!(found.faults.len(), expected.faults.len(), "{name}");
            for (found, expected) in found.faults.iter().zip(&expected.faults) {
                assert_eq!(found.fault, expected.fault, "{name}");
                misses.extend(miss(at(&found.fault), seconds(found.wait), number(&expected.wait_s)));
            }
            compared += 3 + found.faults.len();
        }
    }
    assert!(compared > 50, "{compared} figures were compared");
    assert!(misses.is_empty(), "{} of {compared}:\n{}", misses.len(), misses.join("\n"));
}
