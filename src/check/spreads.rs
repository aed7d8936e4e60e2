//! What age and temperature add to the tolerance that a part was bought with.

use super::{si, si_or_null};
use crate::bank::Bank;
use crate::discharge::{Spread, Spreads};
use crate::quantity::{Quantity, Ratio, TemperatureCoefficient};
use serde::Serialize;

/// How far a part's value can lie from the marked one, each cause on its own; shares of the marked value.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SpreadResult {
    /// The part.
    pub id: String,
    /// Purchase tolerance, below.
    #[serde(rename = "tolerance_low", serialize_with = "si")]
    pub tolerance_low: Ratio,
    /// Purchase tolerance, above.
    #[serde(rename = "tolerance_high", serialize_with = "si")]
    pub tolerance_high: Ratio,
    /// Ageing, below.
    #[serde(rename = "ageing_low", serialize_with = "si")]
    pub ageing_low: Ratio,
    /// Ageing, above.
    #[serde(rename = "ageing_high", serialize_with = "si")]
    pub ageing_high: Ratio,
    /// Temperature coefficient as given; `None` (null) where none is.
    #[serde(rename = "tempco_per_k", serialize_with = "si_or_null")]
    pub tempco: Option<TemperatureCoefficient>,
    /// How far the part can be from the temperature at which its marked value holds.
    #[serde(rename = "apart_k")]
    pub apart_kelvin: f64,
    /// What temperature moves, either way.
    #[serde(rename = "by_temperature", serialize_with = "si")]
    pub by_temperature: Ratio,
    /// The lowest value over the marked one, all together.
    pub lowest_factor: f64,
    /// The highest value over the marked one, all together.
    pub highest_factor: f64,
}

/// Parts whose value age or temperature moves: capacitors, then resistors, in the order of the file.
pub(crate) fn spreads(bank: &Bank) -> Vec<SpreadResult> {
    let description = bank.description();
    let all = Spreads::of(bank);
    let capacitors = description.capacitors.iter().map(|c| (&c.id, c.tempco, all.capacitor(c)));
    let resistors = description.resistors.iter().map(|r| (&r.id, r.tempco, all.resistor(r)));
    let moved = capacitors.chain(resistors).filter(|(_, _, spread)| spread.moves());
    moved.map(|(id, tempco, spread)| result(id, tempco, &spread)).collect()
}

fn result(id: &str, tempco: Option<TemperatureCoefficient>, spread: &Spread) -> SpreadResult {
    let total = spread.total();
    SpreadResult {
        id: id.to_string(),
        tolerance_low: spread.purchase.low(),
        tolerance_high: spread.purchase.high(),
        ageing_low: spread.ageing.low(),
        ageing_high: spread.ageing.high(),
        tempco,
        apart_kelvin: spread.kelvin,
        by_temperature: Ratio::from_si(spread.by_temperature()),
        lowest_factor: total.map_or(1.0, |t| t.lowest_factor()),
        highest_factor: total.map_or(1.0, |t| t.highest_factor()),
    }
}
