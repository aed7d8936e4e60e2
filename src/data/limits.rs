//! Published limits on what may be left in a capacitor, from `data/limits.json`.

use super::raw::{optional, quantity, read_list};
use crate::quantity::{Capacitance, Charge, Energy, Quantity, Ratio, Time, Voltage};
use serde::Deserialize;
use std::sync::LazyLock;

/// A limit that a document publishes, paraphrased. Whoever uses it checks the edition in force.
#[derive(Debug, Clone, PartialEq)]
pub struct PublishedLimit {
    /// The name by which a bank file uses it.
    pub id: String,
    /// Number of the document.
    pub document: String,
    /// Clause of the document.
    pub clause: String,
    /// Edition, where it is known.
    pub edition: Option<String>,
    /// What it asks, in one paraphrased sentence.
    pub rule: String,
    /// The state from which time runs or the voltage falls.
    pub measured_from: String,
    /// What it is for, and what it is not for.
    pub scope: String,
    /// How it was checked: `text`, `quoted`, `memory`, `common practice`.
    pub seen: String,
    /// What has to be compared.
    pub kind: LimitKind,
}

/// What a published limit compares. Times run from isolation.
#[derive(Debug, Clone, PartialEq)]
pub enum LimitKind {
    /// At least one alternative has to hold from `within` on.
    AnyOf {
        /// The alternatives.
        alternatives: Vec<Alternative>,
        /// From when on; `None` where the document names no time: then at once.
        within: Option<Time>,
        /// The alternatives for a bank with one part failed, where they differ.
        fault_alternatives: Option<Vec<Alternative>>,
    },
    /// A voltage that depends on the capacitance (nominal plus tolerance).
    VoltageByCapacitance {
        /// Points of the table, capacitance falling and voltage rising; linear between them.
        table: Vec<(Capacitance, Voltage)>,
        /// From when on; `None` where the document names no time: then at once.
        within: Option<Time>,
        /// How many times the voltage is allowed with one part failed, where it differs.
        fault_factor: Option<f64>,
    },
    /// A voltage that has to be reached before the bank is switched in again, as a share of the rated voltage. The
    /// document names no time: the bank has one of its own.
    BeforeSwitchingIn {
        /// The voltage allowed over the rated one.
        share: f64,
    },
    /// A time to wait, with no voltage at all.
    Wait {
        /// How long.
        at_least: Time,
    },
}

/// One alternative of a limit.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Alternative {
    /// Voltage between the two points.
    Voltage(Voltage),
    /// Charge that a short would pass, at the moment in question.
    Charge(Charge),
    /// The same charge at isolation.
    InitialCharge(Charge),
    /// Stored energy.
    Energy(Energy),
}

#[derive(Deserialize)]
#[serde(rename_all = "snake_case", deny_unknown_fields)]
enum RawAlternative {
    Voltage(String),
    Charge(String),
    InitialCharge(String),
    Energy(String),
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawPoint {
    capacitance: String,
    voltage: String,
}

#[derive(Deserialize)]
#[serde(rename_all = "kebab-case")]
enum RawKind {
    AnyOf,
    VoltageByCapacitance,
    BeforeSwitchingIn,
    Wait,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Raw {
    id: String,
    document: String,
    clause: String,
    edition: Option<String>,
    rule: String,
    measured_from: String,
    scope: String,
    seen: String,
    kind: RawKind,
    #[serde(default)]
    alternatives: Vec<RawAlternative>,
    within: Option<String>,
    fault_alternatives: Option<Vec<RawAlternative>>,
    #[serde(default)]
    table: Vec<RawPoint>,
    fault_factor: Option<f64>,
    share_of_rated: Option<String>,
}

fn alternatives(id: &str, raw: &[RawAlternative]) -> Result<Vec<Alternative>, String> {
    let one = |alternative: &RawAlternative| {
        Ok(match alternative {
            RawAlternative::Voltage(text) => Alternative::Voltage(quantity(id, text)?),
            RawAlternative::Charge(text) => Alternative::Charge(quantity(id, text)?),
            RawAlternative::InitialCharge(text) => Alternative::InitialCharge(quantity(id, text)?),
            RawAlternative::Energy(text) => Alternative::Energy(quantity(id, text)?),
        })
    };
    if raw.is_empty() { Err(format!("{id}: no alternatives")) } else { raw.iter().map(one).collect() }
}

fn table(id: &str, raw: &[RawPoint]) -> Result<Vec<(Capacitance, Voltage)>, String> {
    let point = |p: &RawPoint| Ok((quantity(id, &p.capacitance)?, quantity(id, &p.voltage)?));
    let table: Vec<(Capacitance, Voltage)> = raw.iter().map(point).collect::<Result<_, String>>()?;
    let falls = |w: &[(Capacitance, Voltage)]| w[0].0.si() > w[1].0.si() && w[0].1.si() < w[1].1.si();
    let usable = !table.is_empty() && table.windows(2).all(falls);
    usable.then_some(table).ok_or_else(|| format!("{id}: capacitance has to fall and voltage to rise along the table"))
}

fn make(raw: Raw) -> Result<PublishedLimit, String> {
    let id = &raw.id;
    let within = optional(id, raw.within.as_deref())?;
    let kind = match raw.kind {
        RawKind::AnyOf => LimitKind::AnyOf {
            alternatives: alternatives(id, &raw.alternatives)?,
            within,
            fault_alternatives: raw.fault_alternatives.map(|list| alternatives(id, &list)).transpose()?,
        },
        RawKind::VoltageByCapacitance => {
            LimitKind::VoltageByCapacitance { table: table(id, &raw.table)?, within, fault_factor: raw.fault_factor }
        }
        RawKind::BeforeSwitchingIn => {
            let share: Option<Ratio> = optional(id, raw.share_of_rated.as_deref())?;
            let share = share.map(Quantity::si).filter(|share| *share > 0.0 && *share < 1.0);
            LimitKind::BeforeSwitchingIn {
                share: share.ok_or_else(|| format!("{id}: a share between 0 and 1 is due"))?,
            }
        }
        RawKind::Wait => LimitKind::Wait { at_least: within.ok_or_else(|| format!("{id}: a wait without a time"))? },
    };
    Ok(PublishedLimit {
        kind,
        id: raw.id,
        document: raw.document,
        clause: raw.clause,
        edition: raw.edition,
        rule: raw.rule,
        measured_from: raw.measured_from,
        scope: raw.scope,
        seen: raw.seen,
    })
}

fn read() -> Result<Vec<PublishedLimit>, String> {
    read_list("limits.json", include_str!("../../data/limits.json"), make)
}

static LIMITS: LazyLock<Vec<PublishedLimit>> = LazyLock::new(|| read().unwrap_or_default());

/// All published limits, in the order of the file.
///
/// # Example: every limit says how it was checked
/// ```
/// assert!(ebbvolt::data::published_limits().iter().all(|limit| !limit.seen.is_empty()));
/// ```
pub fn published_limits() -> &'static [PublishedLimit] {
    &LIMITS
}

/// The published limit of that id.
pub fn published_limit(id: &str) -> Option<&'static PublishedLimit> {
    LIMITS.iter().find(|limit| limit.id == id)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_limit_is_read_and_says_how_it_was_checked() {
        let all = read().unwrap_or_else(|e| panic!("{e}"));
        assert!(!all.is_empty());
        assert_eq!(all, published_limits());
        for (i, limit) in all.iter().enumerate() {
            for text in [&limit.document, &limit.clause, &limit.rule, &limit.seen] {
                assert!(!text.is_empty(), "{limit:?}");
            }
            assert!(all[..i].iter().all(|other| other.id != limit.id), "{} stands twice", limit.id);
        }
    }

    #[test]
    fn the_charge_exemption_of_machines_is_on_the_charge_at_isolation() {
        let kind = published_limit("iec-60204-1").map(|limit| &limit.kind);
        let Some(LimitKind::AnyOf { alternatives, within, .. }) = kind else { panic!("{kind:?}") };
        assert_eq!(within.map(Quantity::si), Some(5.0));
        assert!(alternatives.iter().any(|a| matches!(a, Alternative::InitialCharge(_))));
    }

    #[test]
    fn a_wait_without_a_voltage_is_a_kind_of_its_own() {
        let kind = published_limit("osha-1910-269-w1").map(|limit| &limit.kind);
        assert!(matches!(kind, Some(LimitKind::Wait { at_least }) if at_least.si() >= 300.0), "{kind:?}");
    }

    #[test]
    fn a_malformed_entry_is_refused() {
        let common = r#""document": "d", "clause": "c", "edition": null, "rule": "r", "measured_from": "m", "scope": "s", "seen": "text""#;
        for rest in [
            r#""kind": "any-of", "alternatives": [], "within": "5 s""#,
            r#""kind": "any-of", "alternatives": [{"voltage": "60"}], "within": "5 s""#,
            r#""kind": "wait""#,
            r#""kind": "before-switching-in""#,
            r#""kind": "before-switching-in", "share_of_rated": "110 %""#,
            r#""kind": "voltage-by-capacitance", "table": [], "within": "2 s""#,
            r#""kind": "guess""#,
            r#""kind": "wait", "within": "5 min", "wihtin": "5 min""#,
        ] {
            let text = format!("[{{\"id\": \"x\", {common}, {rest}}}]");
            assert!(read_list("test", &text, make).is_err(), "{text}");
        }
    }
}
