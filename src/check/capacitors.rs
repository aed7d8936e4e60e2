//! Capacitor voltages against their ratings.

use super::{Answers, FaultAnswers, Verdict, si, si_or_null};
use crate::bank::Bank;
use crate::bank::description::Capacitor;
use crate::discharge::Figure;
use crate::finding::{Findings, Severity};
use crate::quantity::{Direction, Quantity, Tolerance, Voltage, exact, show};
use serde::Serialize;

/// A capacitor: figures of ONE unit at its own worst point.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CapacitorResult {
    /// The part.
    pub id: String,
    /// Greatest voltage on one unit, every part healthy.
    #[serde(rename = "voltage_highest_v", serialize_with = "si")]
    pub voltage_highest: Voltage,
    /// One unit's rated voltage; `None` where none was given.
    #[serde(rename = "rated_v", serialize_with = "si_or_null")]
    pub rated: Option<Voltage>,
    /// Greatest voltage on one unit under any single fault.
    #[serde(rename = "voltage_fault_v", serialize_with = "si")]
    pub voltage_fault: Voltage,
    /// The fault under which that is.
    pub worst_fault: Option<String>,
    /// What the healthy figure comes to.
    pub verdict: Verdict,
}

/// Capacitor voltages.
pub(crate) struct CapacitorCheck<'a> {
    pub bank: &'a Bank,
}

/// The greatest share of a string's voltage that one of its groups can take: it at its lowest capacitance, the
/// others at their highest (the same charge passes all, so voltages go as 1/C).
fn greatest_share(capacitor: &Capacitor, groups: u32) -> f64 {
    let tolerance = capacitor.tolerance.unwrap_or(Tolerance::NONE);
    let ratio = tolerance.highest_factor() / tolerance.lowest_factor();
    ratio / (ratio + f64::from(groups.saturating_sub(1)))
}

impl CapacitorCheck<'_> {
    /// What has to be known of the healthy bank and under every fault.
    pub fn figures(&self) -> Vec<Figure> {
        (0..self.bank.description().capacitors.len()).map(|capacitor| Figure::CapacitorVoltage { capacitor }).collect()
    }

    /// The capacitors, in the order of the file.
    pub fn conclude(
        &self,
        healthy: &Answers,
        faults: &[FaultAnswers],
        findings: &mut Findings,
    ) -> Vec<CapacitorResult> {
        let capacitors = self.bank.description().capacitors.iter().enumerate();
        let results: Vec<CapacitorResult> =
            capacitors.map(|(index, capacitor)| self.capacitor(index, capacitor, healthy, faults)).collect();
        for (result, capacitor) in results.iter().zip(&self.bank.description().capacitors) {
            rating_findings(result, findings);
            sharing_findings(result, capacitor, findings);
        }
        results
    }

    fn capacitor(&self, index: usize, c: &Capacitor, healthy: &Answers, faults: &[FaultAnswers]) -> CapacitorResult {
        let figure = Figure::CapacitorVoltage { capacitor: index };
        let unit = healthy.worst(figure) * greatest_share(c, c.series);
        let under = |fault: &FaultAnswers| {
            let groups = if fault.fault.name == format!("{} one unit shorted", c.id) { c.series - 1 } else { c.series };
            (fault.worst(figure) * greatest_share(c, groups), fault.fault.name.clone())
        };
        // Of its own open leg a capacitor feels nothing: what then stands across its terminals is not on it.
        let felt = faults.iter().filter(|fault| fault.fault.name != format!("{} open", c.id));
        let worst = felt.map(under).max_by(|x, y| x.0.total_cmp(&y.0));
        CapacitorResult {
            id: c.id.clone(),
            voltage_highest: Voltage::from_si(unit),
            rated: c.rated,
            voltage_fault: Voltage::from_si(worst.as_ref().map_or(unit, |(v, _)| v.max(unit))),
            worst_fault: worst.filter(|(v, _)| *v > unit).map(|(_, name)| name),
            verdict: c.rated.map_or(Verdict::NotChecked, |rated| Verdict::at_most(unit, rated.si())),
        }
    }
}

fn rating_findings(result: &CapacitorResult, findings: &mut Findings) {
    let Some(rated) = result.rated else { return };
    if result.verdict == Verdict::NotMet {
        findings.add(
            Severity::Danger,
            "capacitor-over-rated-voltage",
            format!(
                "{}: up to {} on one unit at the highest voltage, rated {}.",
                result.id,
                show(result.voltage_highest, Direction::Up),
                exact(rated)
            ),
        );
    } else if Verdict::at_most(result.voltage_fault.si(), rated.si()) != Verdict::Met {
        findings.add(
            Severity::Warning,
            "capacitor-over-rated-voltage-under-fault",
            format!(
                "{}: up to {} on one unit with {}, rated {}: that fault can break it too.",
                result.id,
                show(result.voltage_fault, Direction::Up),
                result.worst_fault.as_deref().unwrap_or("one part failed"),
                exact(rated)
            ),
        );
    }
}

fn sharing_findings(result: &CapacitorResult, capacitor: &Capacitor, findings: &mut Findings) {
    let equal = 1.0 / f64::from(capacitor.series);
    if capacitor.series > 1 && greatest_share(capacitor, capacitor.series) > equal * (1.0 + 1e-9) {
        findings.add(
            Severity::Warning,
            "units-share-unequally",
            format!(
                "{}: {} groups in series share by their capacitance; within the tolerance one group can take up to \
                 {}, and can keep a charge of its own after the ends read zero. Describe the groups as capacitors of \
                 their own, with their balancing resistors, to have it computed; short every unit on its own.",
                result.id,
                capacitor.series,
                show(result.voltage_highest, Direction::Up)
            ),
        );
    }
}
