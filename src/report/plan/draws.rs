//! Random draws over the tolerances, beside the worst case.

use super::super::block::{Block, Grid, Side};
use super::super::words::{pair, wait};
use crate::plan::{DrawFrom, Plan};

pub(super) fn blocks(plan: &Plan) -> Vec<Block> {
    let Some(draws) = &plan.draws else { return Vec::new() };
    let mut grid = Grid::new(&[
        ("Across", Side::Left),
        ("50 %", Side::Right),
        ("90 %", Side::Right),
        ("99 %", Side::Right),
        ("99.9 %", Side::Right),
        ("Most", Side::Right),
        ("Slowest", Side::Right),
    ]);
    for w in &draws.waits {
        let times = [w.half, w.ninety, w.ninety_nine, w.ninety_nine_nine, w.greatest, w.slowest].map(wait);
        let mut cells = vec![pair(&w.across)];
        cells.extend(times);
        grid.rows.push(cells);
    }
    let spread = match draws.from {
        DrawFrom::Uniform => "every value within its tolerance alike",
        DrawFrom::Normal => "around the middle of each tolerance, its ends at 3 standard deviations",
    };
    let text = format!(
        "{} draws at the highest voltage, seed {}: {spread}. So many of them have a wait that is not longer; `most` is the greatest of them. The wait \
         to keep is the slowest: nobody knows which draw this bank is.",
        draws.count, draws.seed
    );
    vec![Block::Section("Random draws within the tolerances"), Block::Table(grid), Block::Paragraph(text)]
}
