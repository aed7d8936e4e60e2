//! The steps as a checklist, each with its caution where the act is, what is read and what a higher reading means.

use super::super::block::{Block, Grid, Labelled, Side, Step};
use super::super::plan::steps::{self, caution, held, is_same, part, predicted};
use super::super::plan::summary;
use super::super::words::{down, list, pair, typed, up, whole};
use crate::plan::{FaultReading, Pair, Plan, StepReading, StepResult, fault_in_words};
use crate::quantity::{Quantity, Time, Voltage, keepable};

/// Failures that a reading names; the JSON output has every one.
const NAMED_FAULTS: usize = 5;

pub(super) fn blocks(plan: &Plan) -> Vec<Block> {
    let mut blocks = vec![Block::Section("The steps")];
    if plan.steps.is_empty() {
        blocks.extend(without_procedure(plan));
        return blocks;
    }
    blocks.extend(steps::introduction(plan).into_iter().map(Block::Paragraph));
    for (at, step) in plan.steps.iter().enumerate() {
        blocks.push(Block::Step(entry(plan, at, step)));
    }
    blocks
}

/// What the parts bear and what a failed part changes: behind the work, for the reviewer.
pub(super) fn tables(plan: &Plan) -> Vec<Block> {
    [steps::tables::loads(plan), steps::charging::blocks(plan), steps::tables::faults(plan)]
        .into_iter()
        .flatten()
        .collect()
}

fn entry(plan: &Plan, at: usize, step: &StepResult) -> Step {
    let mut items = caution::cautions(plan, at, step);
    items.push(Labelled::new("DO", vec![step.step.clone()]));
    let parts = |ids: &[String]| vec![list(&ids.iter().map(|id| part(plan, id)).collect::<Vec<_>>())];
    if !step.connect.is_empty() {
        items.push(Labelled::new("CONNECT", parts(&step.connect)));
    }
    if !step.disconnect.is_empty() {
        items.push(Labelled::new("DISCONNECT", parts(&step.disconnect)));
    }
    if step.end.si() > step.start.si() {
        let time = Time::from_si(step.end.si() - step.start.si());
        items.push(Labelled::new("KEEP", vec![format!("{}, to {} after isolation.", whole(time), whole(step.end))]));
    }
    if step.never {
        let text = format!(
            "In the slowest case the voltage that this step waits for is never reached. Its voltages are those at {}; \
             later steps count from there and can't be relied on.",
            whole(step.end)
        );
        items.push(Labelled::new("NEVER", vec![text]));
    }
    let unread = unread(step);
    if !unread.test_points.is_empty() {
        items.push(Labelled::new("PREDICTED", predicted(&unread)));
    }
    if !step.measure.is_empty() {
        let pairs: Vec<String> = step.measure.iter().map(pair).collect();
        let text = "prove the instrument on a known source, test, prove it again. Write down every reading.";
        items.push(Labelled::new("READ", vec![format!("{}: {text}", list(&pairs))]));
    }
    if let Some(hold) = &step.hold {
        items.push(Labelled::new("HOLD", held(step, hold).into_iter().take(1).collect()));
    }
    items.extend(if_higher(step));
    Step { heading: steps::heading(plan, at, step), items, readings: readings(step) }
}

/// The step with only those test points that nobody reads at its end.
fn unread(step: &StepResult) -> StepResult {
    let is_read = |across: &Pair| step.readings.iter().any(|reading| is_same(&reading.across, across));
    let mut unread = step.clone();
    unread.test_points.retain(|point| !is_read(&point.across));
    unread
}

fn readings(step: &StepResult) -> Grid {
    let mut grid = Grid::new(&[
        ("Across", Side::Left),
        ("Nominal", Side::Right),
        ("Up to", Side::Right),
        ("Go on at most", Side::Right),
        ("Reading", Side::Left),
        ("Time", Side::Left),
        ("Initials", Side::Left),
    ]);
    for StepReading { across, nominal, highest, allowed, .. } in &step.readings {
        let most = allowed.map_or_else(|| "no hold".into(), down);
        let blank = String::new;
        grid.row([pair(across), up(*nominal), up(*highest), most, blank(), blank(), blank()]);
    }
    grid
}

/// What to do where a reading is higher, and which failures it points to; pairs with the same answer share a line.
fn if_higher(step: &StepResult) -> Option<Labelled> {
    let mut lines: Vec<(String, Vec<String>)> = Vec::new();
    let mut add = |place: String, answer: String| match lines.iter_mut().find(|(known, _)| *known == answer) {
        Some((_, places)) => places.push(place),
        None => lines.push((answer, vec![place])),
    };
    for reading in &step.readings {
        let place = pair(&reading.across);
        let above = |bar: Voltage| reading.points_to.iter().filter(move |f| f.highest.is_none_or(|v| v > bar));
        match reading.allowed {
            Some(allowed) => {
                add(
                    format!("{place} above {}", down(allowed)),
                    format!("stop, keep away. {}", points_to(above(allowed))),
                );
                if reading.highest < allowed && told_from_zero(allowed) {
                    let place = format!("{place} above {} and up to {}", up(reading.highest), down(allowed));
                    let why = points_to(reading.points_to.iter());
                    add(place, format!("more than is predicted; find out why before you go on. {why}"));
                }
            }
            None if told_from_zero(reading.highest) => {
                let answer = format!("stop, keep away. {}", points_to(reading.points_to.iter()));
                add(format!("{place} above {}", up(reading.highest)), answer);
            }
            None => {
                let answer = format!("stop, keep away. {}", points_to(reading.points_to.iter()));
                add(format!("{place} at any reading that can be told from zero"), answer);
            }
        }
    }
    let text: Vec<String> =
        lines.into_iter().map(|(answer, places)| format!("{}: {answer}", any_of(&places))).collect();
    (!text.is_empty()).then(|| Labelled::new("IF HIGHER", text))
}

fn any_of(places: &[String]) -> String {
    match places {
        [head @ .., last] if !head.is_empty() => format!("{} or {last}", head.join(", ")),
        other => other.join(", "),
    }
}

/// True for a voltage that a meter for such banks can tell from zero.
fn told_from_zero(voltage: Voltage) -> bool {
    const LEAST: f64 = 0.1;
    voltage.si() >= LEAST
}

fn points_to<'a>(failures: impl Iterator<Item = &'a FaultReading>) -> String {
    let (source, parts): (Vec<_>, Vec<_>) = failures.partition(|f| f.fault == steps::NOT_ISOLATED);
    let figure = |f: &&FaultReading| f.highest.map_or_else(String::new, |v| format!(" (up to {})", up(v)));
    let mut names: Vec<String> =
        parts.iter().take(NAMED_FAULTS).map(|f| format!("{}{}", fault_in_words(&f.fault), figure(f))).collect();
    if parts.len() > NAMED_FAULTS {
        names.push(format!("{} more", parts.len() - NAMED_FAULTS));
    }
    names.extend(source.first().map(|_| "a source that is not isolated".to_string()));
    let Some(last) = names.pop() else {
        return "No single failure that was examined explains it.".into();
    };
    let names = if names.is_empty() { last } else { format!("{} or {last}", names.join(", ")) };
    format!("It points to {names}.")
}

/// Without a procedure a sheet has the wait and the test, and says that the steps are missing.
fn without_procedure(plan: &Plan) -> Vec<Block> {
    let text = "The file lists no steps, so this sheet has the wait and the test only. Discharging by tool and strap, \
                and the order of the work, are up to the rules of the site.";
    let mut blocks = vec![Block::Paragraph(text.into())];
    let longest = plan.waits.iter().map(|w| w.keep.map_or(f64::INFINITY, Quantity::si)).reduce(f64::max);
    let Some(longest) = longest.filter(|_| plan.not_computed.is_empty()) else { return blocks };
    let mut grid = Grid::new(&[
        ("Across", Side::Left),
        ("Wait", Side::Right),
        ("Go on at most", Side::Right),
        ("Reading", Side::Left),
        ("Time", Side::Left),
        ("Initials", Side::Left),
    ]);
    for wait in &plan.waits {
        let time = wait.keep.map_or_else(|| "NEVER".into(), |t| whole(keepable(t)));
        let blank = String::new;
        grid.row([pair(&wait.across), time, typed(plan.touch_voltage), blank(), blank(), blank()]);
    }
    let act = if longest.is_finite() {
        format!("Keep the wait of {} after isolation.", whole(keepable(Time::from_si(longest))))
    } else {
        "Waiting is not enough: a test point never falls below. Discharge it by other means first.".into()
    };
    let items = vec![
        Labelled::new("DO", vec![act]),
        Labelled::new("PREDICTED", vec![format!("Every test point that has a wait: {}.", summary::target(plan))]),
        Labelled::new("READ", vec!["Prove the instrument on a known source, test, prove it again.".into()]),
        Labelled::new("IF HIGHER", vec!["stop, keep away, find out why.".into()]),
    ];
    blocks.push(Block::Step(Step { heading: "Wait and test".into(), items, readings: grid }));
    blocks
}
