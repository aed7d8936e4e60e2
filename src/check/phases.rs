//! What is particular to a bank that was charged from three phases.

use super::waits::listed;
use super::{Answers, Wait};
use crate::bank::Bank;
use crate::bank::description::{Neutral, Source};
use crate::discharge::{Figure, Model};
use crate::finding::{Findings, Severity};
use crate::quantity::{Direction, Quantity, Voltage, show};

/// Findings on what the poles leave, on a pole that stays closed, and on a unit behind a blown fuse.
pub(crate) fn phase_findings(bank: &Bank, model: &Model, healthy: &Answers, waits: &[Wait], findings: &mut Findings) {
    let Source::ThreePhase { neutral, .. } = bank.description().charged_to.source else { return };
    trapped(bank, waits, findings);
    findings.add(Severity::Warning, "pole-may-stay-closed", pole_closed(neutral));
    let capacitors = bank.description().capacitors.iter().enumerate();
    let volts =
        capacitors.clone().map(|(capacitor, _)| healthy.worst(Figure::CapacitorVoltageAt { capacitor, t: 0.0 }));
    let greatest = Voltage::from_si(volts.fold(0.0, f64::max));
    let names: Vec<String> = capacitors.map(|(c, _)| model.capacitors[c].id.clone()).collect();
    findings.add(
        Severity::Danger,
        "charge-behind-open-fuse",
        format!(
            "A unit of {} whose fuse has blown or whose leg is open can keep up to {} for itself: no bleeder of the bank \
             reaches it, and no reading between the terminals shows it. Short every unit on its own.",
            listed(&names),
            show(greatest, Direction::Up)
        ),
    );
}

/// The pair that keeps most, where that is more than the crest from line to line.
fn trapped(bank: &Bank, waits: &[Wait], findings: &mut Findings) {
    let crest = bank.description().charged_to.highest;
    let greatest = waits.iter().max_by(|x, y| x.at_isolation.si().total_cmp(&y.at_isolation.si()));
    let Some((wait, order)) = greatest.and_then(|w| Some((w, w.interruption.as_ref()?))) else { return };
    let factor = wait.at_isolation.si() / crest.si();
    if factor > 1.0 + 1e-9 {
        findings.add(
            Severity::Danger,
            "trapped-above-crest",
            format!(
                "{} can keep up to {}: {} of the crest from line to line ({}), where the poles open like this: {}. A meter or \
                 a tool for the line voltage alone is not enough.",
                wait.across.join(" - "),
                show(wait.at_isolation, Direction::Up),
                // Up, like every figure that warns.
                show(crate::quantity::Ratio::from_si(factor), Direction::Up),
                show(crest, Direction::Up),
                order.at_isolation
            ),
        );
    }
}

fn pole_closed(neutral: Neutral) -> String {
    let consequence = match neutral {
        Neutral::Isolated => {
            "one of these states is trapped all the same, and the whole bank stays alive against earth, which no pair of \
             its own terminals shows"
        }
        Neutral::Grounded => {
            "the capacitors of that phase stay alive, and the readings there do not fall, however long one waits"
        }
    };
    format!(
        "If one pole of the switch stays closed, {consequence}. Test every terminal against earth as well, for \
         alternating and for direct voltage."
    )
}
