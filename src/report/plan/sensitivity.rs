//! What the waits depend on.

use super::super::block::{Block, Grid, Side};
use super::super::words::{glued, pair, up};
use crate::plan::{PartSensitivity, Plan, Sensitivity};
use crate::quantity::{Quantity, Time};

/// Parts that are printed for one test point; the JSON output has all.
const MOST_PARTS: usize = 12;

pub(super) fn blocks(plan: &Plan) -> Vec<Block> {
    let Some(all) = &plan.sensitivity else { return Vec::new() };
    let mut blocks = vec![Block::Section("What the waits depend on")];
    let keep = |across: &[String; 2]| {
        let wait = plan.waits.iter().find(|w| w.across == *across);
        wait.and_then(|w| w.keep).map_or(f64::NEG_INFINITY, Quantity::si)
    };
    let shown = all.iter().filter(|s| !s.parts.is_empty()).max_by(|x, y| keep(&x.across).total_cmp(&keep(&y.across)));
    let Some(shown) = shown else {
        let text = "No wait depends on small changes: each is 0 or never ends.";
        blocks.push(Block::Paragraph(text.into()));
        return blocks;
    };
    blocks.push(Block::Part(format!("{}, the longest wait that ends", pair(&shown.across))));
    blocks.push(Block::Table(table(shown)));
    blocks.push(Block::Paragraph(closing(shown)));
    if all.len() > 1 {
        blocks.push(Block::Paragraph("The JSON output has every test point.".into()));
    }
    blocks
}

fn table(shown: &Sensitivity) -> Grid {
    let mut grid = Grid::new(&[
        ("Part", Side::Left),
        ("Nominal wait per +1 %", Side::Right),
        ("Slowest wait per +1 %", Side::Right),
        ("Its tolerance costs up to", Side::Right),
    ]);
    for part in shown.parts.iter().take(MOST_PARTS) {
        let PartSensitivity { id, nominal, slowest, tolerance_costs } = part;
        grid.row([id.clone(), nominal.map_or_else(|| "-".into(), signed), signed(*slowest), up(*tolerance_costs)]);
    }
    grid
}

fn closing(shown: &Sensitivity) -> String {
    let more = shown.parts.len().saturating_sub(MOST_PARTS);
    let more = if more > 0 { format!(" {more} more parts matter less.") } else { String::new() };
    let first = shown.tighten_first.as_ref().map_or_else(
        || " No tolerance makes this wait longer.".to_string(),
        |id| format!(" Tighten {id} first: its tolerance costs most."),
    );
    format!(
        "Changes for one percent more of a part's value, all others kept. What a tolerance costs is how much shorter \
         the slowest wait is with that part at its marked value.{first}{more}"
    )
}

/// A change with its sign, its size rounded up.
fn signed(time: Time) -> String {
    let size = up(Time::from_si(time.si().abs()));
    let sign = if time.si() < 0.0 { "-" } else { "+" };
    if time.si() == 0.0 { size } else { glued(&format!("{sign}{size}")) }
}
