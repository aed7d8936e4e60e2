//! Energy that is still there when the touch voltage is reached.

use super::stored::{bands, seen};
use super::{Answers, EngineError, Wait};
use crate::bank::Bank;
use crate::discharge::{Figure, Model};
use crate::finding::{Findings, Severity};
use crate::quantity::{Direction, Energy, Quantity, Time, Voltage, duration, exact, show};

/// Adds a finding where, at the end of the longest wait, the energy left is still in a published hazard band. Low
/// voltage is no protection there: a wait for a voltage can end with enough energy to burn and weld.
pub(crate) fn remaining_energy(
    bank: &Bank,
    model: &Model,
    waits: &[Wait],
    findings: &mut Findings,
) -> Result<(), EngineError> {
    let longest = waits.iter().map(|w| w.slowest.map_or(f64::INFINITY, Quantity::si)).fold(0.0, f64::max);
    if !longest.is_finite() {
        return Ok(());
    }
    let voltages = (0..model.capacitors.len()).map(|capacitor| Figure::CapacitorVoltageAt { capacitor, t: longest });
    let energy = Figure::StoredAt { t: longest };
    let answers = Answers::healthy(bank, model, std::iter::once(energy).chain(voltages.clone()).collect())?;
    let left = Energy::from_si(answers.worst(energy));
    let voltage = Voltage::from_si(voltages.map(|v| answers.worst(v)).fold(0.0, f64::max));
    if let Some(band) = bands(voltage, left).first() {
        findings.add(
            Severity::Danger,
            "energy-remains",
            format!(
                "After the wait of {} for {} up to {} is still stored, in a published hazard band: {} ({}, {}). Keep \
                 conductors, tools and rings away from the terminals; discharge further before work.",
                duration(Time::from_si(longest), Direction::Up),
                exact(bank.description().touch_voltage),
                show(left, Direction::Up),
                band.hazard,
                band.source,
                seen(&band.seen)
            ),
        );
    }
    Ok(())
}
