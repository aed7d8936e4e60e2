//! What a notice says, from the plan's result.

use super::super::plan::summary;
use super::super::words::{clean, glued, list, pair, up, whole};
use crate::plan::{Plan, Wait, fault_in_words};
use crate::quantity::Quantity;

/// Failures that are named; only the test tells which has happened.
const NAMED_FAULTS: usize = 2;

/// The pieces of a notice, from the top down.
pub(super) struct Content {
    /// DANGER or WARNING.
    pub signal: &'static str,
    /// What the hazard is, with figures.
    pub hazard: String,
    /// What stands above the large figure.
    pub lead: String,
    /// The large figure: the delay, or what stands in its place.
    pub figure: String,
    /// What to do then.
    pub then: Vec<String>,
    /// What one failed part does to the delay.
    pub failed: Vec<String>,
    /// Which bank and which description.
    pub foot: String,
}

pub(super) fn of(plan: &Plan) -> Content {
    let (lead, figure, then) = delay(plan);
    let hazardous = plan.stored.as_ref().is_none_or(|stored| !stored.bands.is_empty());
    let bank = &plan.bank;
    let revision = bank.revision.as_ref().map_or_else(String::new, |r| format!(", revision {}", clean(r)));
    let hash: String = bank.input_sha256.chars().take(12).collect();
    Content {
        signal: if hazardous { "DANGER" } else { "WARNING" },
        hazard: hazard(plan),
        lead,
        figure,
        then,
        failed: failed(plan),
        foot: format!("{}{revision}. A prediction from a description (input {hash}), not a test.", clean(&bank.tag)),
    }
}

fn hazard(plan: &Plan) -> String {
    let Some(stored) = &plan.stored else {
        return format!("Capacitors stay charged. Up to {}.", up(plan.charged_to.highest));
    };
    let mut hazards: Vec<String> = Vec::new();
    for band in &stored.bands {
        if !hazards.contains(&band.hazard) {
            hazards.push(band.hazard.clone());
        }
    }
    let hazards = if hazards.is_empty() { String::new() } else { format!(": {}", hazards.join(", ")) };
    format!("Capacitors stay charged{hazards}. Up to {}, {}.", up(stored.voltage_highest), up(stored.energy_highest))
}

/// What stands above the large figure, the figure, and what to do then.
fn delay(plan: &Plan) -> (String, String, Vec<String>) {
    let test = "TEST before you touch: prove the instrument, test, prove it again.";
    let short = "Discharge and short as the site rules ask.";
    let Some(delay) = plan.notice.delay else {
        let stuck: Vec<&Wait> = plan.waits.iter().filter(|w| w.keep.is_none()).collect();
        let worst = stuck.iter().copied().reduce(|a, b| if b.settles_at.si() > a.settles_at.si() { b } else { a });
        let stays =
            worst.map_or_else(String::new, |w| format!("{} stays at up to {}. ", pair(&w.across), up(w.settles_at)));
        let by = format!("{stays}It has to be discharged by tool and strap.");
        return ("Waiting does not discharge this bank".into(), "STAYS CHARGED".into(), vec![by, test.into()]);
    };
    if delay.si() <= 0.0 {
        let lead = format!("Predicted {} at isolation; energy can remain", summary::target(plan));
        return (lead, "TEST FIRST".into(), vec![test.into(), short.into()]);
    }
    ("After isolation wait at least".into(), whole(delay), vec![format!("then {test}"), short.into()])
}

fn failed(plan: &Plan) -> Vec<String> {
    let notice = &plan.notice;
    let mut lines = Vec::new();
    if let Some(longest) = &notice.longest_fault {
        lines.push(format!(
            "If one part has failed: up to {} ({}).",
            whole(longest.delay),
            glued(&fault_in_words(&longest.fault))
        ));
    }
    if !notice.never_faults.is_empty() {
        let mut names: Vec<String> =
            notice.never_faults.iter().take(NAMED_FAULTS).map(|fault| fault_in_words(fault)).collect();
        if notice.never_faults.len() > NAMED_FAULTS {
            names.push(format!("{} more", notice.never_faults.len() - NAMED_FAULTS));
        }
        lines.push(format!(
            "If one part has failed ({}) the voltage does NOT fall by itself. Test; do not trust the time.",
            list(&names)
        ));
    }
    lines
}
