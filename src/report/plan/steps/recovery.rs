//! What comes back after the last step, and why the strap stays on.

use super::super::super::block::{Block, Grid, Labelled, Side};
use super::super::super::words::{early, list, pair, time, typed, up};
use super::straps;
use crate::finding::Severity;
use crate::plan::{Plan, Recovery};
use crate::quantity::Quantity;

pub(in crate::report) fn blocks(plan: &Plan) -> Vec<Block> {
    let mut blocks = vec![Block::Section("What comes back")];
    if !plan.recovery.is_empty() {
        let text = "Greatest voltages from the end of the last step on, the bank left as it then is. Times count from \
                    isolation.";
        blocks.push(Block::Paragraph(text.into()));
        blocks.push(Block::Table(table(plan)));
    }
    let mut items: Vec<Labelled> = first_to_pass(plan).map(|first| passes(plan, first)).into_iter().collect();
    items.push(Labelled::new(Severity::Warning.word(), advice(plan)));
    blocks.push(Block::Labelled(items));
    blocks
}

fn table(plan: &Plan) -> Grid {
    let mut grid = Grid::new(&[
        ("Across", Side::Left),
        ("Up to", Side::Right),
        ("When", Side::Right),
        ("Passes touch voltage", Side::Right),
    ]);
    for r in &plan.recovery {
        let when = r.at.map_or_else(|| "as it settles".into(), time);
        let passes = r.passes_touch_at.map_or_else(|| "no".into(), early);
        grid.row([pair(&r.across), up(r.voltage), when, passes]);
    }
    grid
}

/// The test point that passes the touch voltage again before the others.
fn first_to_pass(plan: &Plan) -> Option<&Recovery> {
    let when = |r: &Recovery| r.passes_touch_at.map_or(f64::INFINITY, Quantity::si);
    let passing = plan.recovery.iter().filter(|r| r.passes_touch_at.is_some());
    passing.reduce(|first, next| if when(next) < when(first) { next } else { first })
}

fn passes(plan: &Plan, first: &Recovery) -> Labelled {
    let when = first.passes_touch_at.map_or_else(String::new, |at| format!(", from {} after isolation on", early(at)));
    let text = format!(
        "With nobody doing anything, {} passes {} again{when}, and comes to up to {}.",
        pair(&first.across),
        typed(plan.touch_voltage),
        up(first.voltage)
    );
    Labelled::new(Severity::Danger.word(), vec![text])
}

fn advice(plan: &Plan) -> Vec<String> {
    let on = straps(plan, plan.steps.len().saturating_sub(1));
    let strap = if on.is_empty() {
        "The last step leaves no strap on. Put one on, and leave it on for as long as anyone works.".into()
    } else {
        let names = list(&on);
        format!(
            "Leave {names} on for as long as anyone works, and while the bank is out of use; these figures hold only \
             with {names} on."
        )
    };
    vec![strap, "A bank that was left without a strap is tested again before anyone comes near it.".into()]
}
