//! The wait at every test point, and how each single failure changes it.

use super::super::block::{Block, Grid, Side};
use super::super::words::{glued, pair, time, up, wait};
use crate::plan::{FaultWait, Plan, Wait, fault_in_words};
use crate::quantity::{Direction, Quantity, duration};

pub(in crate::report) fn blocks(plan: &Plan) -> Vec<Block> {
    if plan.waits.is_empty() {
        return Vec::new();
    }
    let mut blocks = vec![Block::Section("Waits"), Block::Table(healthy(plan))];
    blocks.extend(interruptions(plan));
    let taus: Vec<String> = plan.time_constants.iter().take(NAMED_TAUS).map(|&tau| time(tau)).collect();
    if !taus.is_empty() {
        let more = plan.time_constants.len().saturating_sub(NAMED_TAUS);
        let more = if more > 0 { format!(" and {more} faster") } else { String::new() };
        blocks.push(Block::Paragraph(format!("Time constants, nominal, slowest first: {}{more}.", taus.join(", "))));
    }
    let faults = faults(plan);
    if !faults.is_empty() {
        blocks.push(Block::Section("Waits with one part failed"));
        blocks.push(Block::Table(fault_table(faults.iter())));
        if plan.waits.len() > 1 {
            let text = "Each failure is shown at the test point where it is worst; the JSON output has every one.";
            blocks.push(Block::Paragraph(text.into()));
        }
        if faults.iter().any(|w| w.fault.opens_at.is_some()) {
            let text = "A failure with a time opens that long after isolation: another part of the bank has charged \
                        the test point by then, which is worse than opening at isolation or long before.";
            blocks.push(Block::Paragraph(text.into()));
        }
    }
    blocks.extend(two_failed(plan, &faults));
    blocks
}

/// Waits with two parts failed: the pairs that are worse than each of the two alone.
fn two_failed(plan: &Plan, single: &[Worst]) -> Vec<Block> {
    let pairs = worst_by_name(plan, |w| &w.fault_pairs);
    if pairs.is_empty() {
        return Vec::new();
    }
    let alone = |name: &str| single.iter().find(|w| w.fault.fault == name).map(Worst::badness);
    let worse = |pair: &&Worst| {
        let names = pair.fault.fault.split_once(" and ");
        let (wait, settles) = pair.badness();
        names.is_none_or(|(first, second)| {
            [alone(first), alone(second)]
                .into_iter()
                .flatten()
                .all(|(w, s)| wait > w * (1.0 + 1e-9) || (wait.is_infinite() && settles > s * (1.0 + 1e-9)))
        })
    };
    let shown: Vec<&Worst> = pairs.iter().filter(worse).collect();
    let mut blocks = vec![Block::Section("Waits with two parts failed")];
    let left = pairs.len() - shown.len();
    if !shown.is_empty() {
        blocks.push(Block::Table(fault_table(shown.into_iter())));
    }
    blocks.push(Block::Paragraph(format!(
        "{} of {} pairs of failures are worse than each of the two alone, at the test point where the pair is worst; \
         the JSON output has all. Both fail before isolation or at isolation.",
        pairs.len() - left,
        pairs.len()
    )));
    blocks
}

/// Time constants that are printed; a ladder of a hundred stages has as many.
const NAMED_TAUS: usize = 6;

/// How the poles of a three-phase switch open in the worst cases.
fn interruptions(plan: &Plan) -> Option<Block> {
    let mut grid =
        Grid::new(&[("Across", Side::Left), ("Poles, slowest wait", Side::Left), ("Poles, at isolation", Side::Left)]);
    let mut any = false;
    for (wait, order) in plan.waits.iter().filter_map(|w| Some((w, w.interruption.as_ref()?))) {
        any = true;
        let at_isolation = if order.at_isolation == order.slowest { "the same" } else { &order.at_isolation };
        grid.row([pair(&wait.across), order.slowest.clone(), at_isolation.to_string()]);
    }
    any.then_some(Block::Table(grid))
}

fn healthy(plan: &Plan) -> Grid {
    let mut grid = Grid::new(&[
        ("Across", Side::Left),
        ("At isolation", Side::Right),
        ("Nominal wait", Side::Right),
        ("Slowest wait", Side::Right),
        ("Settles at", Side::Right),
    ]);
    for w in &plan.waits {
        grid.row([pair(&w.across), up(w.at_isolation), wait(w.nominal), wait(w.slowest), up(w.settles_at)]);
    }
    grid
}

/// One fault at the test point where it is worst.
struct Worst<'a> {
    at: &'a Wait,
    fault: &'a FaultWait,
}

impl Worst<'_> {
    /// Orders faults at one test point against another: never is worse than any time, then the higher voltage.
    fn badness(&self) -> (f64, f64) {
        (self.fault.wait.map_or(f64::INFINITY, Quantity::si), self.fault.settles_at.si())
    }
}

fn faults(plan: &Plan) -> Vec<Worst<'_>> {
    worst_by_name(plan, |w| &w.faults)
}

fn worst_by_name(plan: &Plan, of: impl Fn(&Wait) -> &[FaultWait]) -> Vec<Worst<'_>> {
    let mut worst: Vec<Worst> = Vec::new();
    for at in &plan.waits {
        for fault in of(at) {
            let this = Worst { at, fault };
            match worst.iter_mut().find(|w| w.fault.fault == fault.fault) {
                Some(known) if this.badness() > known.badness() => *known = this,
                Some(_) => {}
                None => worst.push(this),
            }
        }
    }
    worst
}

fn fault_table<'a>(faults: impl Iterator<Item = &'a Worst<'a>>) -> Grid {
    let mut grid = Grid::new(&[
        ("Failed", Side::Left),
        ("Worst across", Side::Left),
        ("Longest wait", Side::Right),
        ("Settles at", Side::Right),
    ]);
    for Worst { at, fault } in faults {
        let wait = fault.wait.map_or_else(|| "NEVER".to_string(), time);
        let moment =
            fault.opens_at.map_or_else(String::new, |t| format!(" at {}", glued(&duration(t, Direction::Down))));
        grid.row([format!("{}{moment}", fault_in_words(&fault.fault)), pair(&at.across), wait, up(fault.settles_at)]);
    }
    grid
}
