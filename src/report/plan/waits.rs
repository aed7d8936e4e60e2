//! The wait at every test point, and how each single failure changes it.

use super::super::block::{Block, Grid, Side};
use super::super::words::{pair, time, up, wait};
use crate::plan::{FaultWait, Plan, Wait, fault_in_words};
use crate::quantity::Quantity;

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
        blocks.push(Block::Table(fault_table(&faults)));
        if plan.waits.len() > 1 {
            let text = "Each failure is shown at the test point where it is worst; the JSON output has every one.";
            blocks.push(Block::Paragraph(text.into()));
        }
    }
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
    let mut worst: Vec<Worst> = Vec::new();
    for at in &plan.waits {
        for fault in &at.faults {
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

fn fault_table(faults: &[Worst]) -> Grid {
    let mut grid = Grid::new(&[
        ("Failed", Side::Left),
        ("Worst across", Side::Left),
        ("Longest wait", Side::Right),
        ("Settles at", Side::Right),
    ]);
    for Worst { at, fault } in faults {
        let wait = fault.wait.map_or_else(|| "NEVER".to_string(), time);
        grid.row([fault_in_words(&fault.fault), pair(&at.across), wait, up(fault.settles_at)]);
    }
    grid
}
