//! The first screen: what it is and what it holds, the caution, the wait to keep, and what a failed part means.

use super::super::block::{Block, Labelled};
use super::super::words::{count, glued, list, pair, time, typed, up, whole};
use super::steps;
use crate::finding::{Finding, Severity};
use crate::plan::{FaultWait, LimitResult, Plan, Stored, Verdict, Wait, fault_in_words};
use crate::quantity::{Quantity, keepable};

/// Findings on the procedure that the first screen counts: people are hurt at these joints.
const PROCEDURE_DANGERS: [&str; 11] = [
    "meter-hides-charge",
    "steps-not-enough-under-fault",
    "stranded-charge",
    "strap-current",
    "strap-on-energy",
    "supply-left-on",
    "tool-too-early",
    "touch-too-early",
    "touch-without-measuring",
    "until-never",
    "voltage-comes-back",
];

/// Faults that are named one by one on the first screen; the table has them all.
const NAMED_FAULTS: usize = 3;

pub(in crate::report) fn blocks(plan: &Plan) -> Vec<Block> {
    let mut blocks = Vec::new();
    if !plan.not_computed.is_empty() {
        blocks.push(incomplete(plan));
    }
    blocks.push(title(plan));
    blocks.push(Block::Labelled(vec![
        Labelled::new("HOLDS", holds(plan)),
        hazard(plan),
        Labelled::new("WARNING", vec![caution()]),
    ]));
    let mut kept = vec![wait(plan)];
    kept.extend(failed(plan));
    blocks.push(Block::Framed(kept));
    blocks.push(Block::Labelled(vec![Labelled::new("CHECKS", vec![checks(plan)])]));
    blocks
}

pub(in crate::report) fn incomplete(plan: &Plan) -> Block {
    let missing: Vec<String> = plan.not_computed.iter().map(|part| format!("Not computed: {part}.")).collect();
    let mut text = vec![
        "This version does not compute everything that the file asks for. What follows leaves it out, \
                         gives no verdict, and is not a plan to work by."
            .to_string(),
    ];
    text.extend(missing);
    Block::Stop { word: "INCOMPLETE", text }
}

fn title(plan: &Plan) -> Block {
    let bank = &plan.bank;
    let title = bank.title.as_ref().map_or_else(|| bank.tag.clone(), |title| format!("{}: {title}", bank.tag));
    let said = |word: &str, text: &Option<String>| text.as_ref().map(|text| format!("{word}{text}"));
    let under: Vec<String> =
        [said("", &bank.location), said("revision ", &bank.revision), said("prepared by ", &bank.prepared_by)]
            .into_iter()
            .flatten()
            .collect();
    Block::Title { title, under: if under.is_empty() { under } else { vec![under.join("; ")] } }
}

pub(in crate::report) fn holds(plan: &Plan) -> Vec<String> {
    let (nominal, highest) = (plan.charged_to.nominal, plan.charged_to.highest);
    let between = format!("between {}", list(&plan.terminals));
    let mut first = format!("up to {} {between} at isolation (nominal {})", up(highest), up(nominal));
    let Some(stored) = &plan.stored else {
        return vec![format!("{first}. Stored energy: not computed by this version.")];
    };
    // Compared as shown: a difference in the 13th digit is no second voltage.
    if stored.voltage_highest.si() > highest.si() && up(stored.voltage_highest) != up(highest) {
        first = format!(
            "up to {} at a test point at isolation, since the parts divide it so ({} {between} before, nominal {})",
            up(stored.voltage_highest),
            up(highest),
            up(nominal)
        );
    }
    vec![format!("{first}."), energy(stored)]
}

fn energy(stored: &Stored) -> String {
    let mut text = format!(
        "up to {} stored (nominal {}); a short of the terminals would pass up to {}",
        up(stored.energy_highest),
        up(stored.energy_nominal),
        up(stored.charge_highest),
    );
    if let Some(capacitance) = stored.capacitance {
        text.push_str(&format!(" ({} nominal)", up(capacitance)));
    }
    text + "."
}

pub(in crate::report) fn hazard(plan: &Plan) -> Labelled {
    let Some(stored) = &plan.stored else {
        return Labelled::new("DANGER", vec!["Treat the bank as charged: its hazard band is not computed.".into()]);
    };
    if stored.bands.is_empty() {
        let text = "The stored energy is in none of the published hazard bands that this tool knows; that is no \
                    statement that it may be touched.";
        return Labelled::new("CAUTION", vec![text.into()]);
    }
    let bands: Vec<String> =
        stored.bands.iter().map(|b| format!("{} ({}; seen: {})", b.hazard, b.source, b.seen)).collect();
    Labelled::new("DANGER", vec![format!("Hazardous stored energy: {}. Check the edition in force.", bands.join("; "))])
}

pub(in crate::report) fn caution() -> String {
    "This is a prediction from the parts listed, their tolerances and the state at isolation. Before anyone touches: \
     prove a rated instrument on a known source, test, prove it again."
        .into()
}

/// What is waited for, such as `below 50 V`.
pub(in crate::report) fn target(plan: &Plan) -> String {
    let voltage = glued(&format!("below {}", typed(plan.touch_voltage)));
    match plan.hold_energy {
        Some(energy) => format!("{voltage} with at most {} stored", typed(energy)),
        None => voltage,
    }
}

/// The item with the greatest finite time; the first of several.
fn longest<'a, T>(items: impl Iterator<Item = &'a T>, wait: impl Fn(&T) -> Option<f64>) -> Option<&'a T> {
    let timed = items.filter_map(|item| wait(item).map(|time| (item, time)));
    timed.reduce(|longest, next| if next.1 > longest.1 { next } else { longest }).map(|(item, _)| item)
}

fn wait(plan: &Plan) -> Labelled {
    let mut text = Vec::new();
    if !plan.not_computed.is_empty() {
        // The wait may be far too short without what is missing; the figure must not stand alone on a screen.
        text.push("NOT TO BE RELIED ON: parts of the file are not computed.".into());
    }
    let never: Vec<&Wait> = plan.waits.iter().filter(|w| w.keep.is_none()).collect();
    let longest = longest(plan.waits.iter(), |w: &Wait| w.keep.map(Quantity::si));
    match (never.first(), longest) {
        (None, None) => text.push("The wait is not computed by this version.".into()),
        (None, Some(governing)) => text.extend(keep(plan, governing)),
        (Some(first), _) => text.extend(stuck(plan, first, &never, longest)),
    }
    Labelled::new("WAIT", text)
}

/// What to say where waiting is not enough.
fn stuck(plan: &Plan, first: &Wait, never: &[&Wait], longest: Option<&Wait>) -> Vec<String> {
    let worst = never.iter().fold(first, |worst, w| if w.settles_at.si() > worst.settles_at.si() { w } else { worst });
    let others = match never.len() - 1 {
        0 => String::new(),
        n => format!(
            " ({} more never come{} below)",
            count(n, "test point", "test points"),
            if n == 1 { "s" } else { "" }
        ),
    };
    let mut text = vec![
        format!("NEVER. No wait brings every test point {}.", target(plan)),
        format!("{} stays at up to {}{others}.", pair(&worst.across), up(worst.settles_at)),
    ];
    if let Some(time) = longest.and_then(|w| w.keep) {
        text.push(format!("The other test points: {} after isolation.", whole(keepable(time))));
    }
    text.push("It has to be discharged by other means, then tested.".into());
    text
}

fn keep(plan: &Plan, governing: &Wait) -> Vec<String> {
    let Some(slowest) = governing.keep else { return Vec::new() };
    let first = format!("{} after isolation, then TEST.", whole(keepable(slowest)));
    let across = pair(&governing.across);
    let second = match (slowest.si() > 0.0, plan.waits.len()) {
        (false, _) => format!("Every test point is predicted {} already at isolation.", target(plan)),
        (true, 1) => format!("{across} is predicted {} from {} on, in the slowest case.", target(plan), time(slowest)),
        (true, _) => format!(
            "All test points are predicted {} by then; the last is {across}, after {} in the slowest case.",
            target(plan),
            time(slowest)
        ),
    };
    let mut text = vec![first, second];
    // A fault that is called so is a sink that the waits rely on.
    let sinks: Vec<String> =
        governing.faults.iter().filter_map(|f| Some(f.fault.strip_suffix(" dead")?.to_string())).collect();
    if !sinks.is_empty() {
        text.push(format!("It relies on {}, which must work to draw anything.", list(&sinks)));
    }
    let switched = plan.resistors.iter().filter(|r| r.contact.is_some());
    let switched: Vec<String> = switched.map(|r| r.id.clone()).collect();
    if !switched.is_empty() {
        text.push(format!("It relies on a contact that must close ({}).", list(&switched)));
    }
    text
}

/// A fault at the test point where it is worst.
struct Failure<'a> {
    at: &'a Wait,
    fault: &'a FaultWait,
}

fn failed(plan: &Plan) -> Option<Labelled> {
    if plan.waits.is_empty() {
        return None;
    }
    let label = "IF ONE PART HAS FAILED";
    let all: Vec<Failure> =
        plan.waits.iter().flat_map(|at| at.faults.iter().map(move |fault| Failure { at, fault })).collect();
    if all.is_empty() {
        return Some(Labelled::new(label, vec!["No part's failure was examined.".into()]));
    }
    let mut never: Vec<&Failure> = Vec::new();
    for failure in all.iter().filter(|f| f.fault.wait.is_none()) {
        match never.iter_mut().find(|f| f.fault.fault == failure.fault.fault) {
            Some(known) if failure.fault.settles_at.si() > known.fault.settles_at.si() => *known = failure,
            Some(_) => {}
            None => never.push(failure),
        }
    }
    let mut text: Vec<String> = never.iter().take(NAMED_FAULTS).map(|f| stays(f)).collect();
    if never.len() > NAMED_FAULTS {
        text.push(format!("{} more mean NEVER; see the table.", never.len() - NAMED_FAULTS));
    }
    if let Some(f) = longest(all.iter(), |f: &Failure| f.fault.wait.map(Quantity::si)) {
        let which = if never.is_empty() { "At most" } else { "Otherwise at most" };
        let wait = f.fault.wait.map(keepable).map_or_else(String::new, whole);
        text.push(format!("{which} {wait} ({}, at {}).", fault_in_words(&f.fault.fault), pair(&f.at.across)));
    }
    Some(Labelled::new(label, text))
}

fn stays(failure: &Failure) -> String {
    let FaultWait { fault, settles_at, .. } = failure.fault;
    let fault = fault_in_words(fault);
    format!("{fault}: NEVER; {} stays at up to {}.", pair(&failure.at.across), up(*settles_at))
}

/// True where a limit decides against the plan.
pub(in crate::report) fn limit_missed(limit: &LimitResult) -> bool {
    limit.met == Some(false) || (limit.single_fault_asked && limit.single_fault_met == Some(false))
}

pub(in crate::report) fn checks(plan: &Plan) -> String {
    let missed = plan.limits.iter().filter(|l| limit_missed(l)).count();
    let met = plan.limits.iter().filter(|l| l.met == Some(true) && !limit_missed(l)).count();
    let limits = match plan.limits.len() {
        0 => "No limit was given to check.".to_string(),
        all => format!("Limits: {}.", tally(&[(met, "met"), (missed, "NOT MET"), (all - met - missed, "not checked")])),
    };
    let resistors = plan.resistors.iter().flat_map(|r| r.checks.iter().map(|c| c.verdict));
    let verdicts: Vec<Verdict> = resistors.chain(plan.capacitors.iter().map(|c| c.verdict)).collect();
    let number = |verdict: Verdict| verdicts.iter().filter(|v| **v == verdict).count();
    let ratings = tally(&[
        (number(Verdict::Met), "met"),
        (number(Verdict::NotMet), "EXCEEDED"),
        (number(Verdict::NotChecked), "not checked"),
    ]);
    let broken = plan.capacitors.iter().filter(|c| c.rated.is_some_and(|rated| c.voltage_fault > rated)).count();
    let under_fault = if broken == 0 {
        String::new()
    } else {
        format!(" {} with one part failed.", glued(&format!("{broken} OVER")))
    };
    let ratings = if verdicts.is_empty() { String::new() } else { format!(" Ratings: {ratings}.{under_fault}") };
    let is_danger = |f: &&Finding| f.severity == Severity::Danger && PROCEDURE_DANGERS.contains(&f.code);
    let dangers = match plan.findings.iter().filter(is_danger).count() {
        0 => String::new(),
        n => format!(", with {}", glued(&format!("{} of DANGER", count(n, "finding", "findings")))),
    };
    let never = plan.waits.iter().filter(|w| w.keep.is_none()).count();
    let never = if never == 0 { String::new() } else { format!(" Waits: {never} NEVER.") };
    let procedure = steps::total(plan).map_or_else(String::new, |total| format!(" Procedure: {total}{dangers}."));
    let checked = !plan.limits.is_empty() || verdicts.iter().any(|v| *v != Verdict::NotChecked);
    let verdict = match (plan.verdict, checked) {
        (Verdict::Met, false) => "nothing was given to check against".to_string(),
        (other, _) => verdict(other),
    };
    format!("{limits}{ratings}{never}{procedure} Verdict: {verdict}.")
}

/// `2 met, 1 NOT MET`, without what there is none of.
fn tally(counts: &[(usize, &str)]) -> String {
    let some: Vec<String> =
        counts.iter().filter(|(n, _)| *n > 0).map(|(n, word)| glued(&format!("{n} {word}"))).collect();
    some.join(", ")
}

fn verdict(verdict: Verdict) -> String {
    match verdict {
        Verdict::Met => "met".into(),
        other => other.word().to_uppercase(),
    }
}
