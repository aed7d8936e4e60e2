//! The procedure: every step as an entry to work by, then what the parts bear, what a failed part changes, and what
//! comes back afterwards.

pub(in crate::report) mod caution;
pub(in crate::report) mod charging;
pub(in crate::report) mod recovery;
pub(in crate::report) mod tables;

use super::super::block::{Block, Labelled};
use super::super::words::{count, down, list, pair, up, whole};
use crate::plan::{Pair, Plan, StepHold, StepResult, fault_in_words};
use crate::quantity::{Quantity, Time, Voltage};

/// Failures that a hold point names; the JSON output has every one.
const NAMED_FAULTS: usize = 6;

/// The name under which the steps carry a source that stays connected. It is no part that failed: where it is so,
/// every reading stays as it was.
pub(in crate::report) const NOT_ISOLATED: &str = "source not isolated";

pub(in crate::report) fn blocks(plan: &Plan) -> Vec<Block> {
    if plan.steps.is_empty() {
        return Vec::new();
    }
    let mut blocks = vec![Block::Section("The steps")];
    blocks.extend(introduction(plan).into_iter().map(Block::Paragraph));
    for (at, step) in plan.steps.iter().enumerate() {
        blocks.push(Block::Part(heading(plan, at, step)));
        blocks.push(Block::Labelled(entry(plan, at, step)));
    }
    blocks.extend(charging::blocks(plan));
    blocks.extend(tables::loads(plan));
    blocks.extend(tables::faults(plan));
    blocks.extend(recovery::blocks(plan));
    blocks
}

/// `7 steps, 15 min`, for the first screen; `None` without a procedure.
pub(in crate::report) fn total(plan: &Plan) -> Option<String> {
    let steps = count(plan.steps.len(), "step", "steps");
    let end = whole(plan.steps.last()?.end);
    Some(endless(plan).map_or_else(|| format!("{steps}, {end}"), |endless| format!("{steps}, {endless}")))
}

/// Which steps never end by themselves, if any does.
fn endless(plan: &Plan) -> Option<String> {
    let numbers: Vec<String> = (1..).zip(&plan.steps).filter(|(_, s)| s.never).map(|(n, _)| n.to_string()).collect();
    match numbers.len() {
        0 => None,
        1 => Some(format!("step\u{a0}{} NEVER ends by itself", list(&numbers))),
        _ => Some(format!("steps {} NEVER end by themselves", list(&numbers))),
    }
}

pub(in crate::report) fn introduction(plan: &Plan) -> Vec<String> {
    let steps = count(plan.steps.len(), "step", "steps");
    let end = plan.steps.last().map_or_else(String::new, |last| whole(last.end));
    let whole = match endless(plan) {
        None => format!("{steps}, {end} from isolation to the end of the last."),
        Some(endless) => format!("{steps}; {endless}."),
    };
    let rule = "Voltages are predicted for the end of a step. A reading above the predicted one by more than the \
                instrument can be off means that something differs from the description: stop, also where a hold \
                point would let it pass. A reading that does not fall points to a source that is not isolated.";
    vec![whole, rule.into()]
}

pub(in crate::report) fn heading(plan: &Plan, at: usize, step: &StepResult) -> String {
    let number = format!("Step\u{a0}{} of\u{a0}{}", at + 1, plan.steps.len());
    let start = whole(step.start);
    let lasts = Time::from_si(step.end.si() - step.start.si());
    if step.never {
        format!("{number}, from {start}, NEVER ENDS BY ITSELF")
    } else if step.until {
        format!("{number}, from {start}, for {} (found from the slowest case, rounded up)", whole(lasts))
    } else if lasts.si() > 0.0 {
        format!("{number}, from {start}, for {}", whole(lasts))
    } else {
        format!("{number}, at {start}")
    }
}

/// A step in the order in which it is carried out: what to beware of, what to do, what to read, when to stop.
fn entry(plan: &Plan, at: usize, step: &StepResult) -> Vec<Labelled> {
    let mut items = caution::cautions(plan, at, step);
    items.push(Labelled::new("DO", vec![step.step.clone()]));
    let parts = |ids: &[String]| vec![list(&ids.iter().map(|id| part(plan, id)).collect::<Vec<_>>())];
    if !step.connect.is_empty() {
        items.push(Labelled::new("CONNECT", parts(&step.connect)));
    }
    if !step.disconnect.is_empty() {
        items.push(Labelled::new("DISCONNECT", parts(&step.disconnect)));
    }
    if step.never {
        let text = format!(
            "In the slowest case the voltage that this step waits for is never reached. Its voltages are those at {}, \
             and later steps count from there; they can't be relied on.",
            whole(step.end)
        );
        items.push(Labelled::new("NEVER", vec![text]));
    }
    if !step.test_points.is_empty() {
        items.push(Labelled::new("PREDICTED", predicted(step)));
    }
    if !step.measure.is_empty() {
        items.push(Labelled::new("READ", read(step)));
    }
    items.extend(step.hold.as_ref().map(|hold| Labelled::new("HOLD", held(step, hold))));
    items
}

/// A part with what it is there for.
pub(in crate::report) fn part(plan: &Plan, id: &str) -> String {
    format!("{id}\u{a0}({})", role(plan, id))
}

/// What a part that a step connects is there for. Resistors are listed with their role; what is not is a supply.
pub(in crate::report) fn role(plan: &Plan, id: &str) -> &'static str {
    plan.resistors.iter().find(|r| is_of(&r.id, id)).map_or("supply", |r| r.role)
}

/// The highest predicted voltage at any test point when step `at` starts.
fn highest_at_start(plan: &Plan, at: usize) -> Voltage {
    let voltages: Vec<f64> = match at.checked_sub(1).and_then(|before| plan.steps.get(before)) {
        Some(before) => before.test_points.iter().map(|point| point.highest.si()).collect(),
        None => plan.waits.iter().map(|wait| wait.at_isolation.si()).collect(),
    };
    Voltage::from_si(voltages.into_iter().fold(0.0, f64::max))
}

/// True where `id` is the part `whole`, or one leg of it if it is a three-phase one.
fn is_of(id: &str, whole: &str) -> bool {
    id.strip_prefix(whole).is_some_and(|rest| rest.is_empty() || rest.starts_with('.'))
}

/// What steps have connected and not taken off again by the end of step `at`, in the order of connection.
fn connected(plan: &Plan, at: usize) -> Vec<&String> {
    let mut on: Vec<&String> = Vec::new();
    for step in plan.steps.iter().take(at + 1) {
        on.retain(|id| !step.disconnect.contains(id));
        on.extend(&step.connect);
    }
    on
}

/// The straps among them.
pub(in crate::report) fn straps(plan: &Plan, at: usize) -> Vec<String> {
    connected(plan, at).into_iter().filter(|id| role(plan, id) == "strap").cloned().collect()
}

/// Voltages at the step's end; test points that are shown with the same figures share a line.
pub(in crate::report) fn predicted(step: &StepResult) -> Vec<String> {
    let mut lines: Vec<(String, Vec<String>)> = Vec::new();
    for point in &step.test_points {
        let figures = format!("up to {} (nominal {}).", up(point.highest), up(point.nominal));
        match lines.iter_mut().find(|(known, _)| *known == figures) {
            Some((_, pairs)) => pairs.push(pair(&point.across)),
            None => lines.push((figures, vec![pair(&point.across)])),
        }
    }
    lines.into_iter().map(|(figures, pairs)| format!("{}: {figures}", list(&pairs))).collect()
}

fn read(step: &StepResult) -> Vec<String> {
    let pairs: Vec<String> = step.measure.iter().map(pair).collect();
    let unpredicted = |p: &&Pair| !step.test_points.iter().any(|point| is_same(&point.across, p));
    let unpredicted: Vec<String> = step.measure.iter().filter(unpredicted).map(pair).collect();
    let mut text = vec![format!("{}: prove the instrument on a known source, test, prove it again.", list(&pairs))];
    if !unpredicted.is_empty() {
        text.push(format!("No test point of the file, so without a predicted voltage: {}.", list(&unpredicted)));
    }
    text
}

/// True for the same two nodes, either way round.
pub(in crate::report) fn is_same([a, b]: &Pair, [c, d]: &Pair) -> bool {
    (a == c && b == d) || (a == d && b == c)
}

pub(in crate::report) fn held(step: &StepResult, hold: &StepHold) -> Vec<String> {
    let everywhere = hold.at.len() > 1 && hold.at.len() == step.test_points.len();
    let place =
        if everywhere { "every test point".into() } else { list(&hold.at.iter().map(pair).collect::<Vec<_>>()) };
    let reading = if hold.at.len() > 1 { "every reading" } else { "the reading" };
    let (allowed, predicted) = (down(hold.below), up(hold.predicted));
    let mut text = vec![if hold.predicted.si() <= hold.below.si() {
        format!("Go on only if {reading} at {place} is at most {allowed} (predicted: up to {predicted}).")
    } else {
        format!(
            "Go on only if {reading} at {place} is at most {allowed}. Up to {predicted} is predicted with every part \
             healthy: this hold point can stop a healthy bank."
        )
    }];
    text.push(pointed_to(&hold.shown_faults));
    text
}

fn pointed_to(faults: &[String]) -> String {
    let (parts, source): (Vec<&String>, Vec<&String>) = faults.iter().partition(|fault| *fault != NOT_ISOLATED);
    let mut names: Vec<String> = parts.iter().take(NAMED_FAULTS).map(|part| fault_in_words(part)).collect();
    if parts.len() > NAMED_FAULTS {
        names.push(format!("{} more", parts.len() - NAMED_FAULTS));
    }
    names.extend(source.first().map(|_| "a source that is not isolated".to_string()));
    if names.is_empty() {
        return "A higher reading is not explained by any single failure that was examined: stop.".into();
    }
    let last = names.pop().unwrap_or_default();
    let names = if names.is_empty() { last } else { format!("{} or {last}", names.join(", ")) };
    format!("A higher reading points to {names}: stop.")
}
