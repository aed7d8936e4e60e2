//! What the bank holds at isolation, and into which published hazard bands that falls.

use super::{Answers, si, si_or_null};
use crate::bank::Bank;
use crate::data::{EnergyBand, energy_bands};
use crate::discharge::{Figure, Model};
use crate::finding::{Findings, Severity};
use crate::quantity::{Capacitance, Charge, Direction, Energy, Quantity, Voltage, show};
use serde::Serialize;

/// What the bank holds at isolation.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Stored {
    /// Energy in all capacitors, every value nominal.
    #[serde(rename = "energy_nominal_j", serialize_with = "si")]
    pub energy_nominal: Energy,
    /// Greatest over the tolerance box at the highest voltage.
    #[serde(rename = "energy_highest_j", serialize_with = "si")]
    pub energy_highest: Energy,
    /// Greatest charge that a short at the terminals would pass, over the tolerance box at the highest voltage.
    #[serde(rename = "charge_highest_c", serialize_with = "si")]
    pub charge_highest: Charge,
    /// Nominal charge over nominal voltage at the terminals (first and last); `None` at 0 V.
    #[serde(rename = "capacitance_f", serialize_with = "si_or_null")]
    pub capacitance: Option<Capacitance>,
    /// Greatest voltage on the terminals, any test point or any capacitor at isolation, at the highest voltage.
    #[serde(rename = "voltage_highest_v", serialize_with = "si")]
    pub voltage_highest: Voltage,
    /// The published hazard bands into which the stored energy falls; empty where none applies.
    pub bands: Vec<Band>,
}

/// A published band of stored energy.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Band {
    /// What can happen, in words.
    pub hazard: String,
    /// The published rule.
    pub source: String,
    /// How the rule was checked.
    pub seen: String,
}

/// The published bands that `energy` at `voltage` falls into.
pub(super) fn bands(voltage: Voltage, energy: Energy) -> Vec<Band> {
    let falls = |band: &&EnergyBand| band.is_hazard() && band.holds(voltage, energy);
    energy_bands()
        .iter()
        .filter(falls)
        .map(|b| Band { hazard: b.hazard.clone(), source: b.source.clone(), seen: b.seen.clone() })
        .collect()
}

/// Stored energy and charge.
pub(crate) struct StoredCheck<'a> {
    pub bank: &'a Bank,
    pub model: &'a Model,
    /// The number of the terminals' pair in the model's list.
    pub terminals: usize,
}

impl StoredCheck<'_> {
    fn charge(&self) -> Figure {
        Figure::ChargeAt { pair: self.terminals, t: 0.0 }
    }

    fn capacitance(&self) -> Figure {
        Figure::Capacitance { pair: self.terminals }
    }

    /// What has to be known of the healthy bank.
    pub fn figures(&self) -> Vec<Figure> {
        let capacitors = (0..self.model.capacitors.len()).map(|c| Figure::CapacitorVoltageAt { capacitor: c, t: 0.0 });
        let points = (0..self.model.pairs.len()).map(|pair| Figure::Start { pair });
        [Figure::StoredAt { t: 0.0 }, self.charge(), self.capacitance()]
            .into_iter()
            .chain(points)
            .chain(capacitors)
            .collect()
    }

    /// What the bank holds.
    pub fn conclude(&self, healthy: &Answers, findings: &mut Findings) -> Stored {
        let charged = &self.bank.description().charged_to;
        let starts = self
            .figures()
            .into_iter()
            .filter(|f| matches!(f, Figure::Start { .. } | Figure::CapacitorVoltageAt { .. }));
        let greatest = starts.map(|f| healthy.worst(f)).fold(charged.highest.si(), f64::max);
        let energy_highest = Energy::from_si(healthy.worst(Figure::StoredAt { t: 0.0 }));
        let voltage_highest = Voltage::from_si(greatest);
        let bands = bands(voltage_highest, energy_highest);
        let nominal = charged.nominal.si();
        // What a switch traps on three phases is no multiple of their voltage: there, charge over the voltage trapped.
        let farad = match self.bank.is_three_phase() {
            true => healthy.nominal(self.capacitance()),
            false => healthy.nominal(self.charge()) / nominal,
        };
        let capacitance = (nominal > 0.0).then(|| Capacitance::from_si(farad));
        if let Some(band) = bands.first() {
            findings.add(
                Severity::Danger,
                "stored-energy-hazardous",
                format!(
                    "Up to {} at up to {} is in a published hazard band: {} ({}, {}).",
                    show(energy_highest, Direction::Up),
                    show(voltage_highest, Direction::Up),
                    band.hazard,
                    band.source,
                    seen(&band.seen)
                ),
            );
        }
        Stored {
            energy_nominal: Energy::from_si(healthy.nominal(Figure::StoredAt { t: 0.0 })),
            energy_highest,
            charge_highest: Charge::from_si(healthy.worst(self.charge())),
            capacitance,
            voltage_highest,
            bands,
        }
    }
}

/// How a published figure was checked, in words.
pub(super) fn seen(word: &str) -> String {
    match word {
        "text" => "checked against its text".into(),
        "memory" => "from memory".into(),
        other => other.into(),
    }
}
