//! What to beware of in a step, to stand in front of the act and not in an appendix.

use super::super::super::block::Labelled;
use super::super::super::words::{list, pair, typed, up};
use super::tables::{failures, worst};
use super::{highest_at_start, is_of, role, straps};
use crate::data::energy_bands;
use crate::finding::Severity;
use crate::plan::{Plan, StepPart, StepPoint, StepResult, fault_in_words};
use crate::quantity::Quantity;

/// One caution for each kind of part that goes on, and one where hands may come near.
pub(in crate::report) fn cautions(plan: &Plan, at: usize, step: &StepResult) -> Vec<Labelled> {
    let of = |wanted: &str| -> Vec<&String> { step.connect.iter().filter(|id| role(plan, id) == wanted).collect() };
    let mut items = Vec::new();
    for kind in ["supply", "tool", "strap"] {
        let ids = of(kind);
        if !ids.is_empty() {
            items.push(connection(plan, at, step, kind, &ids));
        }
    }
    if step.touch {
        items.push(hands(plan, at, step));
    }
    items
}

fn connection(plan: &Plan, at: usize, step: &StepResult, kind: &str, ids: &[&String]) -> Labelled {
    let names = list(&ids.iter().map(|id| (*id).clone()).collect::<Vec<_>>());
    let go = if ids.len() == 1 { "goes" } else { "go" };
    let mut text = vec![format!("Before {names} {go} on, up to {}.", stored(step))];
    text.extend(borne(plan, step, kind, ids));
    text.push(match kind {
        "supply" => charging(step),
        "strap" => format!("A strap that is closed on charge can arc, weld and burst. {}", reading_first(plan, at)),
        _ => reading_first(plan, at),
    });
    let hazardous = is_hazardous(plan, at, step) || (kind == "supply" && is_live(plan, at, step));
    let word = if hazardous { Severity::Danger } else { Severity::Warning };
    Labelled::new(word.word(), text)
}

/// What the parts bear in this step; parts that are shown with the same figures share a line.
fn borne(plan: &Plan, step: &StepResult, kind: &str, ids: &[&String]) -> Vec<String> {
    let mut lines: Vec<(String, Vec<String>)> = Vec::new();
    for part in step.parts.iter().filter(|part| ids.iter().any(|id| is_of(&part.id, id))) {
        let figures = figures(plan, part, kind);
        match lines.iter_mut().find(|(known, _)| *known == figures) {
            Some((_, names)) => names.push(part.id.clone()),
            None => lines.push((figures, vec![part.id.clone()])),
        }
    }
    let line = |(figures, names): (String, Vec<String>)| {
        format!("{}{}: {figures}", list(&names), if names.len() > 1 { ", each" } else { "" })
    };
    lines.into_iter().map(line).collect()
}

fn figures(plan: &Plan, part: &StepPart, kind: &str) -> String {
    let elements = plan.resistors.iter().find(|r| r.id == part.id).map_or(1, |r| r.elements);
    let place = match (kind, elements) {
        ("supply", _) => "in its series resistance ".to_string(),
        (_, 1) => String::new(),
        (_, n) => format!("in one of its {n} elements "),
    };
    format!(
        "peak {place}up to {} and {}; up to {} in this step.",
        up(part.peak_current),
        up(part.peak_power),
        up(part.energy)
    )
}

fn charging(step: &StepResult) -> String {
    let reaches = highest_at_end(step).map_or_else(String::new, |point| {
        format!(", to up to {} at {} at the end of this step", up(point.highest), pair(&point.across))
    });
    format!("The bank is charged again{reaches}: nobody near, barriers closed.")
}

fn highest_at_end(step: &StepResult) -> Option<&StepPoint> {
    step.test_points.iter().reduce(|a, b| if b.highest.si() > a.highest.si() { b } else { a })
}

/// What has to have been read before a tool or a strap goes on.
fn reading_first(plan: &Plan, at: usize) -> String {
    let earlier = plan.steps.iter().take(at);
    if earlier.clone().any(|step| step.hold.is_some()) {
        "Only after a reading that the hold point allows.".into()
    } else if earlier.into_iter().any(|step| !step.measure.is_empty()) {
        "Only after a reading that agrees with the predicted one.".into()
    } else {
        "No step before this one reads the voltage: test first.".into()
    }
}

/// True where what is stored at the step's start lies in a published hazard band, at the voltage then reached.
fn is_hazardous(plan: &Plan, at: usize, step: &StepResult) -> bool {
    let voltage = highest_at_start(plan, at);
    energy_bands().iter().any(|band| band.is_hazard() && band.holds(voltage, step.ready_at_start))
}

/// True where a test point is predicted above the touch voltage when the step starts or ends.
fn is_live(plan: &Plan, at: usize, step: &StepResult) -> bool {
    let end = highest_at_end(step).map_or(0.0, |point| point.highest.si());
    highest_at_start(plan, at).si().max(end) > plan.touch_voltage.si()
}

/// What is stored at the step's start, and how much of it only a dielectric gives back.
fn stored(step: &StepResult) -> String {
    let (all, ready) = (up(step.stored_at_start), up(step.ready_at_start));
    if all == ready {
        format!("{all} is stored")
    } else {
        format!("{ready} is stored and ready (with what the dielectrics give back slowly: {all})")
    }
}

fn hands(plan: &Plan, at: usize, step: &StepResult) -> Labelled {
    let mut text = vec![format!(
        "Hands may come near only after the test: every pair that can be reached, with a rated instrument proved on a \
         known source before and after. Up to {} at the start of this step.",
        stored(step)
    )];
    let live = is_live(plan, at, step);
    if live {
        text.push(format!("A test point is predicted above {} in this step.", typed(plan.touch_voltage)));
    }
    // Hands come near when the step starts, so what the step before leaves counts as well.
    let here = plan.steps.iter().skip(at.saturating_sub(1)).take(if at == 0 { 1 } else { 2 });
    let failed = worst(here.flat_map(failures)).filter(|f| f.point.highest.si() > plan.touch_voltage.si());
    text.extend(failed.map(|f| {
        let place = pair(&f.point.across);
        format!(
            "With {} up to {} is predicted at {place}: only the test can tell.",
            fault_in_words(f.fault),
            up(f.point.highest)
        )
    }));
    if plan.steps.iter().take(at).all(|step| step.measure.is_empty()) {
        text.push("No step before this one reads any voltage.".into());
    }
    text.push(match straps(plan, at).as_slice() {
        [] => "No strap is on.".into(),
        on => format!("On by now: {}, to stay on while anyone works.", list(on)),
    });
    let word = if live || is_hazardous(plan, at, step) { Severity::Danger } else { Severity::Warning };
    Labelled::new(word.word(), text)
}
