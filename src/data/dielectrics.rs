//! Typical values of dielectrics, from `data/dielectrics.json`.

use super::raw::{optional, quantity, read_list};
use crate::quantity::{Quantity, Ratio, Time};
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
    /// Usual tolerances, in words.
    pub tolerance: Option<String>,
    /// True where charge comes back over days, in branches slower than hours.
    pub slow_branches: bool,
    /// How the values were checked: `text`, `quoted`, `memory`, `common practice`.
    pub seen: String,
    /// What else to know of the values, such as sources that disagree.
    pub note: Option<String>,
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

fn make(raw: Raw) -> Result<Dielectric, String> {
    Ok(Dielectric {
        absorption: range(&raw.id, raw.absorption)?,
        insulation: range(&raw.id, raw.insulation)?,
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
    fn a_dielectric_is_found_by_its_id() {
        assert!(dielectric("aluminium-electrolytic").is_some_and(|d| d.absorption.is_some()));
        assert!(dielectric("unobtainium").is_none());
    }
}
