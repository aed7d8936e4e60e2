//! What is told with the designs of a tool: what they rest on, and what else people have to know.

use super::applied::{Applied, Instead};
use super::request::ToolAsk;
use super::result::{Placement, ToolFigures};
use super::trial::at_once;
use crate::bank::Bank;
use crate::bank::description::{Description, Role};
use crate::check::{Check, Verdict, fault_in_words};
use crate::finding::{Finding, Severity};
use crate::quantity::{Direction, Quantity, Time, celsius, duration, exact, show};
use crate::size::error::SizeError;
use crate::size::result::Candidate;
use crate::size::trial::rest_not_met;

/// A time that was typed, as people say it.
pub(super) fn spoken(time: Time) -> String {
    if time.si() < 120.0 { exact(time) } else { duration(time, Direction::Down) }
}

/// Does anything that is always connected take the voltage down?
pub(super) fn drains(description: &Description) -> bool {
    let path = |role| matches!(role, Role::Bleeder | Role::Balancing | Role::Leakage);
    description.resistors.iter().any(|r| path(r.role)) || description.sinks.iter().any(|s| s.counted)
}

/// Nothing is asked of a tool.
pub(super) fn by_itself() -> Finding {
    let text = "What is always connected brings the bank there in that time without a tool, from isolation on and without \
                its bleeders. That bounds no tool, and any would pass: none is given.";
    let help = "ask for less time (`--within`) or a lower voltage (`--voltage`)";
    Finding::new(Severity::Warning, "already-met", text).with_help(help)
}

/// What it was sized for instead, where the steps that were asked for leave it nothing to do.
pub(super) fn from_isolation(applied: &Applied) -> Option<Finding> {
    let (bleeders, rest) = match applied.nothing_to_do? {
        Instead::AtIsolation => ("", ""),
        Instead::WithoutBleeders => (
            " without its bleeders and counted sinks, which would be there in time by themselves",
            " All figures, and the verdict of the plan, are those of that bank.",
        ),
    };
    let text = format!(
        "When the tool is applied as was asked, every test point is there in that time without it. That would let any tool \
         pass, so it is sized for the bank as it was isolated{bleeders}: applied at once, held as long, and the voltage \
         counts where it is applied. That is what it meets where a bleeder has failed.{rest}"
    );
    Some(Finding::new(Severity::Note, "sized-from-isolation", text))
}

/// What was noticed about the first design.
pub(super) fn findings(
    bank: &Bank,
    ask: &ToolAsk,
    applied: &Applied,
    first: &Candidate<ToolFigures>,
    drains: bool,
) -> Result<Vec<Finding>, SizeError> {
    let mut findings = Vec::new();
    if first.figures.applied_at.si() > 0.0 && drains {
        let met = at_once(bank, ask, applied, &first.figures.resistor)?;
        let figures = format!(
            "The figures rely on what discharges the bank before the tool is applied. Where that has failed and nobody \
             measures, the first design meets up to {}, {} and {}",
            show(applied.description.charged_to.highest, Direction::Up),
            show(met.current, Direction::Up),
            show(met.energy, Direction::Up)
        );
        let help = "measure before it is applied, and do not apply it where the voltage is higher than predicted; or size \
                    it for the bank as it was isolated: `--after 0s`";
        findings.push(if met.missed.is_empty() {
            Finding::new(
                Severity::Note,
                "tool-relies-on-bleeders",
                format!("{figures}. The ratings that were given bear that."),
            )
        } else {
            let text = format!("{figures}. Its ratings do NOT bear that ({}).", met.missed.join(", "));
            Finding::new(Severity::Warning, "tool-relies-on-bleeders", text).with_help(help)
        });
    }
    let pulse = |check: &Check| ["pulse energy", "overload power"].contains(&check.check);
    let asked = first.checks.iter().any(pulse);
    if asked && !first.checks.iter().any(|check| pulse(check) && check.verdict == Verdict::Met) {
        let text = "No rating of the first design's element tells what it bears in a pulse. Its body is followed as one mass, \
                    which says nothing of the film or wire that takes up the heat first.";
        let finding = Finding::new(Severity::Warning, "pulse-not-checked", text);
        findings.push(finding.with_help("take an element with a pulse or overload rating, or ask its maker"));
    }
    let below = first.figures.below;
    if let Some(worst) = first.figures.worst_fault.as_ref().filter(|w| w.left > below && w.left > first.figures.left) {
        let text = format!(
            "With {} up to {} is left when the first design has been held, not {}: only the reading after it shows that.",
            fault_in_words(&worst.fault),
            show(worst.left, Direction::Up),
            exact(below)
        );
        let finding = Finding::new(Severity::Warning, "not-enough-under-fault", text);
        findings
            .push(finding.with_help("read before anything else is done; less resistance or a longer hold leaves room"));
    }
    if first.figures.left > below {
        let text = format!(
            "When the first design has been held, up to {} is still at a test point other than where it is applied: it does \
             not reach what is charged there, such as one unit of a string.",
            show(first.figures.left, Direction::Up)
        );
        let finding = Finding::new(Severity::Warning, "left-at-test-point", text);
        findings
            .push(finding.with_help("apply it to every unit in turn (`--across`), and short every unit on its own"));
    }
    if applied.nothing_to_do != Some(Instead::WithoutBleeders) {
        let whose = if applied.as_filed { "file" } else { "file, with the steps of this trial," };
        findings.extend(rest_not_met(&first.not_met, whose));
    }
    let names: Vec<String> = applied.steps.iter().map(|s| format!("`{}`", s.name)).collect();
    if first.figures.placement != Placement::WithSteps && !applied.steps.is_empty() {
        let text = format!(
            "The figures are those of steps that the file does not have as they are here: {}. Until it has them, the plan of \
             the file tells something else.",
            names.join(", ")
        );
        findings.push(Finding::new(Severity::Caution, "steps-not-in-file", text));
    }
    Ok(findings)
}

/// What the answer rests on.
pub(super) fn assumptions(bank: &Bank, ask: &ToolAsk, applied: &Applied) -> Vec<String> {
    let held = spoken(applied.held);
    let mut list = vec![
        "The window is one of the tool's actual resistance, all other parts anywhere in their tolerances, from the highest \
         voltage. A design fits where all of its tolerance does."
            .to_string(),
        if applied.as_filed {
            let (first, to) = (applied.first + 1, applied.held_to + 1);
            let steps = if first == to { format!("step {first}") } else { format!("steps {first} to {to}") };
            format!("When it is applied and how long it is held ({held}): {steps} of the file's own procedure.")
        } else {
            let after = spoken(applied.after);
            format!(
                "It is applied {after} after isolation and held for {held}, in steps of their own: `Lock out and isolate` \
                 and `Apply the discharge tool`."
            )
        },
        "It is applied from cold, its body as warm as the air. In a row: banks like this one, each at its highest voltage, \
         and the body of one element as one first-order mass."
            .to_string(),
        "With every part healthy; what the worst failed part leaves is told with the first design, and all of them in the plan."
            .to_string(),
    ];
    list.extend(ask.build.assumptions());
    if ask.build.margin > 0.0 {
        list.push(
            "The margin is kept on pulse energy, overload, average power in a row and the rise of the body over the air."
                .into(),
        );
    }
    if let Some(lead) = ask.lead {
        list.push(format!(
            "Cable and contact: anywhere from nothing to {}, least for current and ratings, most for the time. In the part \
             they stand as a higher upper end of its tolerance.",
            exact(lead)
        ));
        list.push(
            "Energy of cable and contact: what flows through tool, cable and contact in one discharge heats them in \
             proportion to their resistances; an arc while the contact closes or opens is not computed."
                .into(),
        );
    }
    match ask.ambient {
        Some(ambient) => list.push(format!(
            "Air at the resistors: {:.0} °C as asked, whatever the file says; the plan of the file itself uses its own.",
            celsius(ambient)
        )),
        None if !bank.ambient_given() => {
            list.push(format!("Air at the resistors: {:.0} °C, since the file gives none.", celsius(bank.ambient())));
        }
        None => {}
    }
    list
}
