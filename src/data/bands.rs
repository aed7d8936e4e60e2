//! Bands of stored energy that are known to hurt, from `data/bands.json`.

use super::raw::{optional, quantity, read_list};
use crate::quantity::{Energy, Voltage};
use serde::Deserialize;
use std::sync::LazyLock;

/// A band of stored energy and voltage, and what it does to people.
#[derive(Debug, Clone, PartialEq)]
pub struct EnergyBand {
    /// The band holds above this voltage; `None` for no lower edge.
    pub above_voltage: Option<Voltage>,
    /// True where the lower edge belongs to the band.
    pub includes_lower: bool,
    /// The band holds up to and including this voltage; `None` for no upper edge.
    pub up_to_voltage: Option<Voltage>,
    /// The band holds for more than this energy.
    pub energy_over: Energy,
    /// What it can do, in a few words.
    pub hazard: String,
    /// What it is for.
    pub purpose: BandPurpose,
    /// Document and clause.
    pub source: String,
    /// How the source was checked: `text`, `quoted`, `memory`, `common practice`.
    pub seen: String,
}

/// What a band is for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum BandPurpose {
    /// The current rule on hazardous stored energy.
    Hazard,
    /// An older edition of it, kept for comparison.
    Older,
    /// A precaution while discharging, no band of its own.
    Precaution,
}

impl EnergyBand {
    /// True for the current rule on hazardous stored energy.
    pub fn is_hazard(&self) -> bool {
        self.purpose == BandPurpose::Hazard
    }

    /// True where `energy` at `voltage` lies in the band.
    pub fn holds(&self, voltage: Voltage, energy: Energy) -> bool {
        let over = self.above_voltage.is_none_or(|v| voltage > v || (self.includes_lower && voltage >= v));
        // The band below 100 V ends where the one from 100 V on begins.
        let under =
            self.up_to_voltage.is_none_or(|v| if self.above_voltage.is_none() { voltage < v } else { voltage <= v });
        over && under && energy > self.energy_over
    }
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Raw {
    above_voltage: Option<String>,
    includes_lower: bool,
    #[serde(rename = "use")]
    purpose: BandPurpose,
    up_to_voltage: Option<String>,
    energy_over: String,
    hazard: String,
    source: String,
    seen: String,
}

fn make(raw: Raw) -> Result<EnergyBand, String> {
    let entry = &raw.hazard;
    Ok(EnergyBand {
        above_voltage: optional(entry, raw.above_voltage.as_deref())?,
        includes_lower: raw.includes_lower,
        purpose: raw.purpose,
        up_to_voltage: optional(entry, raw.up_to_voltage.as_deref())?,
        energy_over: quantity(entry, &raw.energy_over)?,
        hazard: raw.hazard,
        source: raw.source,
        seen: raw.seen,
    })
}

fn read() -> Result<Vec<EnergyBand>, String> {
    read_list("bands.json", include_str!("../../data/bands.json"), make)
}

static BANDS: LazyLock<Vec<EnergyBand>> = LazyLock::new(|| read().unwrap_or_default());

/// All bands, in the order of the file.
pub fn energy_bands() -> &'static [EnergyBand] {
    &BANDS
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::Quantity;

    #[test]
    fn every_band_is_read_and_has_its_source() {
        let bands = read().unwrap_or_else(|e| panic!("{e}"));
        assert!(!bands.is_empty());
        assert_eq!(bands, energy_bands());
        for band in bands {
            assert!(!band.source.is_empty() && !band.seen.is_empty() && !band.hazard.is_empty(), "{band:?}");
            let (above, up_to) = (band.above_voltage.map(Quantity::si), band.up_to_voltage.map(Quantity::si));
            assert!(above.zip(up_to).is_none_or(|(a, u)| a < u), "{band:?}");
        }
    }
}
