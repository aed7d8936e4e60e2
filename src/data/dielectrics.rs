//! Typical values of dielectrics, from `data/dielectrics.json`.

use super::raw::{optional, quantity, read_list};
use crate::quantity::{Capacitance, Current, Quantity, Ratio, Time, Voltage};
use serde::Deserialize;
use std::sync::LazyLock;

/// A range of typical values; `high` is `None` where only a least value is known.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Range<Q> {
    /// Lower end.
    pub low: Q,
    /// Upper end.
    pub high: Option<Q>,
    /// What is usual, where a source says so.
    pub typical: Option<Q>,
}

/// What is typical of a dielectric. A typical value never stands in for a given one without being listed as an
/// assumption, and typical insulation never shortens a wait.
#[derive(Debug, Clone, PartialEq)]
pub struct Dielectric {
    /// The word of the bank file.
    pub id: String,
    /// The trade's name.
    pub name: String,
    /// Dielectric absorption, as a share of the voltage.
    pub absorption: Option<Range<Ratio>>,
    /// Time constant of its own insulation.
    pub insulation: Option<Range<Time>>,
    /// What makers say of its leakage current, in words.
    pub leakage: Option<String>,
    /// The same in figures.
    pub leakage_at_most: Option<LeakageRule>,
    /// Usual tolerances, in words.
    pub tolerance: Option<String>,
    /// True where charge comes back over days, in branches slower than hours.
    pub slow_branches: bool,
    /// How the values were checked: `text`, `quoted`, `memory`, `common practice`.
    pub seen: String,
    /// What else to know of the values, such as sources that disagree.
    pub note: Option<String>,
}

/// The greatest leakage current as makers give it: a current that would carry the rated charge away within a time, or a
/// small current, whichever is greater. (0.01 C V in microampere, with C in microfarad and V in volt, is the rated charge
/// within 100 s.)
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LeakageRule {
    /// The time.
    pub rated_charge_within: Time,
    /// The small current.
    pub or: Current,
}

impl Dielectric {
    /// The greatest leakage current of a unit at its rated voltage: by the makers' rule, or through the least typical
    /// insulation; `None` where neither is known.
    pub fn greatest_leakage(&self, value: Capacitance, rated: Voltage) -> Option<Current> {
        let charge = value.si() * rated.si();
        let by_rule = |rule: LeakageRule| (charge / rule.rated_charge_within.si()).max(rule.or.si());
        let by_insulation = |range: Range<Time>| charge / range.low.si();
        self.leakage_at_most.map(by_rule).or_else(|| self.insulation.map(by_insulation)).map(Current::from_si)
    }
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawLeakage {
    rated_charge_within: String,
    or: String,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawRange {
    low: String,
    high: Option<String>,
    typical: Option<String>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Raw {
    id: String,
    name: String,
    absorption: Option<RawRange>,
    insulation: Option<RawRange>,
    leakage: Option<String>,
    leakage_at_most: Option<RawLeakage>,
    tolerance: Option<String>,
    #[serde(default)]
    slow_branches: bool,
    seen: String,
    note: Option<String>,
}

fn range<Q: Quantity>(entry: &str, raw: Option<RawRange>) -> Result<Option<Range<Q>>, String> {
    let read = |raw: RawRange| {
        Ok(Range {
            low: quantity(entry, &raw.low)?,
            high: optional(entry, raw.high.as_deref())?,
            typical: optional(entry, raw.typical.as_deref())?,
        })
    };
    raw.map(read).transpose()
}

fn leakage(entry: &str, raw: RawLeakage) -> Result<LeakageRule, String> {
    Ok(LeakageRule { rated_charge_within: quantity(entry, &raw.rated_charge_within)?, or: quantity(entry, &raw.or)? })
}

fn make(raw: Raw) -> Result<Dielectric, String> {
    Ok(Dielectric {
        absorption: range(&raw.id, raw.absorption)?,
        insulation: range(&raw.id, raw.insulation)?,
        leakage_at_most: raw.leakage_at_most.map(|rule| leakage(&raw.id, rule)).transpose()?,
        id: raw.id,
        name: raw.name,
        leakage: raw.leakage,
        tolerance: raw.tolerance,
        slow_branches: raw.slow_branches,
        seen: raw.seen,
        note: raw.note,
    })
}

fn read() -> Result<Vec<Dielectric>, String> {
    read_list("dielectrics.json", include_str!("../../data/dielectrics.json"), make)
}

static DIELECTRICS: LazyLock<Vec<Dielectric>> = LazyLock::new(|| read().unwrap_or_default());

/// All dielectrics, in the order of the file.
pub fn dielectrics() -> &'static [Dielectric] {
    &DIELECTRICS
}

/// The dielectric of that id.
pub fn dielectric(id: &str) -> Option<&'static Dielectric> {
    DIELECTRICS.iter().find(|d| d.id == id)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ordered<Q: Quantity>(range: Range<Q>) -> bool {
        let steps = [Some(range.low), range.typical, range.high];
        steps.iter().flatten().map(|q| q.si()).is_sorted()
    }

    #[test]
    fn every_dielectric_is_read_and_says_how_it_was_checked() {
        let all = read().unwrap_or_else(|e| panic!("{e}"));
        assert!(!all.is_empty());
        assert_eq!(all, dielectrics());
        for (i, d) in all.iter().enumerate() {
            assert!(!d.seen.is_empty() && !d.name.is_empty(), "{d:?}");
            assert!(all[..i].iter().all(|e| e.id != d.id), "{} stands twice", d.id);
            assert!(d.absorption.is_none_or(ordered), "{d:?}");
            assert!(d.absorption.is_none_or(|r| r.high.unwrap_or(r.low).si() < 1.0), "{d:?}");
            assert!(d.insulation.is_none_or(ordered), "{d:?}");
        }
    }

    #[test]
    fn the_greatest_leakage_is_the_rule_of_the_makers_or_that_of_the_insulation() {
        let leak = |id: &str, farad: f64, volt: f64| {
            let found =
                dielectric(id).and_then(|d| d.greatest_leakage(Quantity::from_si(farad), Quantity::from_si(volt)));
            found.map(Quantity::si)
        };
        // 0.01 * 470 * 450 = 2115 uA; 0.01 * 10 * 16 = 1.6 uA is less than 3 uA; 10 uF * 800 V / 30 000 s = 0.27 uA.
        let near = |found: Option<f64>, micro: f64| found.is_some_and(|a| (a / (micro * 1e-6) - 1.0).abs() < 1e-3);
        assert!(near(leak("aluminium-electrolytic", 470e-6, 450.0), 2115.0));
        assert!(near(leak("aluminium-electrolytic", 10e-6, 16.0), 3.0));
        assert!(near(leak("polypropylene", 10e-6, 800.0), 0.26667));
        assert!(leak("mica", 1e-6, 100.0).is_none());
    }

    #[test]
    fn a_dielectric_is_found_by_its_id() {
        assert!(dielectric("aluminium-electrolytic").is_some_and(|d| d.absorption.is_some()));
        assert!(dielectric("unobtainium").is_none());
    }
}
