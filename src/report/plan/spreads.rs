//! What age and temperature add to the tolerances.

use super::super::block::{Block, Grid, Side};
use super::super::words::{down, glued, up};
use crate::plan::{Plan, SpreadResult};
use crate::quantity::{Quantity, Ratio};

pub(super) fn blocks(plan: &Plan) -> Vec<Block> {
    if plan.spreads.is_empty() {
        return Vec::new();
    }
    let mut grid = Grid::new(&[
        ("Part", Side::Left),
        ("Purchase", Side::Right),
        ("Age", Side::Right),
        ("Temperature", Side::Right),
        ("Lowest", Side::Right),
        ("Highest", Side::Right),
    ]);
    for s in &plan.spreads {
        grid.row([
            s.id.clone(),
            sides(s.tolerance_low, s.tolerance_high),
            sides(s.ageing_low, s.ageing_high),
            temperature(s),
            down(Ratio::from_si(s.lowest_factor)),
            up(Ratio::from_si(s.highest_factor)),
        ]);
    }
    let text = "Shares of the marked value; the extremes of the three multiply. Every part that is not listed lies \
                within its purchase tolerance.";
    vec![Block::Section("Values beyond the purchase tolerance"), Block::Table(grid), Block::Paragraph(text.into())]
}

fn sides(low: Ratio, high: Ratio) -> String {
    match (low.si() > 0.0, high.si() > 0.0) {
        (false, false) => "none".into(),
        _ if low == high => glued(&format!("+-{}", up(high))),
        _ => format!("{} {}", glued(&format!("-{}", up(low))), glued(&format!("+{}", up(high)))),
    }
}

fn temperature(s: &SpreadResult) -> String {
    if s.tempco.is_none() {
        return "none".into();
    }
    glued(&format!("+-{} ({:.0} K)", up(s.by_temperature), s.apart_kelvin.ceil()))
}
