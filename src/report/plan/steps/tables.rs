//! What parts bear in each step, and what a failed part changes where people read.

use super::super::super::block::{Block, Grid, Side};
use super::super::super::words::{down, pair, typed, up};
use super::NOT_ISOLATED;
use crate::plan::{FaultPoint, Plan, StepFault, StepPart, StepResult, fault_in_words};
use crate::quantity::Quantity;
use std::collections::{HashMap, HashSet};

/// What every part bears, step by step.
pub(in crate::report) fn loads(plan: &Plan) -> Vec<Block> {
    let by_a_step: HashSet<&str> = plan.steps.iter().flat_map(|step| &step.connect).map(String::as_str).collect();
    let greatest = greatest(plan);
    let mut grid = Grid::new(&[
        ("Step", Side::Right),
        ("Part", Side::Left),
        ("Peak current", Side::Right),
        ("Peak power", Side::Right),
        ("Energy", Side::Right),
    ]);
    let mut left_out = false;
    for (at, step) in plan.steps.iter().enumerate() {
        for part in &step.parts {
            let id = part.id.as_str();
            let is_shown = if is_momentary(step) {
                step.connect.contains(&part.id)
            } else {
                by_a_step.contains(id) || greatest.get(id).is_some_and(|most| most.iter().any(|m| m.step == at))
            };
            let is_shown = is_shown && figures(part).iter().any(|figure| *figure > 0.0);
            if is_shown {
                let number = (at + 1).to_string();
                grid.row([number, part.id.clone(), up(part.peak_current), up(part.peak_power), up(part.energy)]);
            }
            left_out |= !is_shown && !is_momentary(step);
        }
    }
    if grid.rows.is_empty() {
        return Vec::new();
    }
    let mut text = "Figures of one element, of that step alone, each at its own worst point.".to_string();
    if left_out {
        text.push_str(
            " A part that is always connected stands where one of its figures is greatest; the JSON output has every \
             step.",
        );
    }
    vec![Block::Section("What the parts bear in each step"), Block::Table(grid), Block::Paragraph(text)]
}

/// True for a step without length: a part bears nothing in it but what its connection brings.
fn is_momentary(step: &StepResult) -> bool {
    step.end.si() <= step.start.si()
}

fn figures(part: &StepPart) -> [f64; 3] {
    [part.peak_current.si(), part.peak_power.si(), part.energy.si()]
}

/// The greatest of one figure of a part, and the step in which it bears it; the first of several.
#[derive(Clone, Copy)]
struct Most {
    figure: f64,
    step: usize,
}

/// Where each part's current, power and energy are greatest; a step in which none of it flows counts for nothing.
fn greatest(plan: &Plan) -> HashMap<&str, [Most; 3]> {
    let mut greatest: HashMap<&str, [Most; 3]> = HashMap::new();
    for (at, step) in plan.steps.iter().enumerate().filter(|(_, step)| !is_momentary(step)) {
        for part in &step.parts {
            let none = Most { figure: 0.0, step: usize::MAX };
            let most = greatest.entry(&part.id).or_insert([none; 3]);
            for (most, figure) in most.iter_mut().zip(figures(part)).filter(|(most, figure)| *figure > most.figure) {
                *most = Most { figure, step: at };
            }
        }
    }
    greatest
}

/// The worst failure at the end of each step that has people read, and the worst that its hold point lets pass; where
/// hands come near, the worst that is above the touch voltage.
pub(in crate::report) fn faults(plan: &Plan) -> Vec<Block> {
    let mut grid = Grid::new(&[
        ("Step", Side::Right),
        ("Failed", Side::Left),
        ("Worst across", Side::Left),
        ("Up to", Side::Right),
        ("Go on up to", Side::Right),
        ("Hold point", Side::Left),
    ]);
    for (number, step) in (1..).zip(&plan.steps) {
        let Some(first) = worst(failures(step)) else { continue };
        let is_read = step.hold.is_some() || !step.measure.is_empty();
        let is_touched = step.touch && first.point.highest.si() > plan.touch_voltage.si();
        if !is_read && !is_touched {
            continue;
        }
        grid.row(row(number, step, &first));
        // A lesser failure that nobody notices can be the one that hurts.
        let hidden = worst(failures(step).filter(|f| !f.is_shown));
        if let Some(hidden) = hidden.filter(|f| first.is_shown && f.point.highest.si() > plan.touch_voltage.si()) {
            grid.row(row(number, step, &hidden));
        }
    }
    if grid.rows.is_empty() {
        return Vec::new();
    }
    let text = format!(
        "The failure that leaves the highest voltage at the end of a step with a reading and, above {0}, the worst that \
         its hold point does not show and the worst where hands may come near; the JSON output has every failure and \
         step.",
        typed(plan.touch_voltage)
    );
    vec![Block::Section("Steps with one part failed"), Block::Table(grid), Block::Paragraph(text)]
}

/// A failure at a test point at the end of a step.
pub(super) struct Failure<'a> {
    pub fault: &'a str,
    pub point: &'a FaultPoint,
    is_shown: bool,
}

/// All failures of parts at all test points at the end of a step.
pub(super) fn failures(step: &StepResult) -> impl Iterator<Item = Failure<'_>> {
    // A source that stays on holds every reading, and would hide what the parts do.
    step.faults.iter().filter(|fault| fault.fault != NOT_ISOLATED).flat_map(|StepFault { fault, test_points }| {
        let is_shown = step.hold.as_ref().is_some_and(|hold| hold.shown_faults.contains(fault));
        test_points.iter().map(move |point| Failure { fault, point, is_shown })
    })
}

/// The one with the highest voltage; the first of several.
pub(super) fn worst<'a>(failures: impl Iterator<Item = Failure<'a>>) -> Option<Failure<'a>> {
    failures.reduce(|worst, next| if next.point.highest.si() > worst.point.highest.si() { next } else { worst })
}

fn row(number: usize, step: &StepResult, failure: &Failure) -> [String; 6] {
    let shown = match (&step.hold, failure.is_shown) {
        (None, _) => "none",
        (Some(_), true) => "shows it",
        (Some(_), false) => "does not show it",
    };
    let allowed = step.hold.as_ref().map_or_else(|| "-".into(), |hold| down(hold.below));
    let Failure { fault, point, .. } = failure;
    [number.to_string(), fault_in_words(fault), pair(&point.across), up(point.highest), allowed, shown.into()]
}
