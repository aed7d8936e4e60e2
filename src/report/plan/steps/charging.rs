//! How supplies charge the bank.

use super::super::super::block::{Block, Grid, Side};
use super::super::super::words::{time, up};
use crate::plan::{Charging, ChargingMoment, Plan};
use crate::quantity::{Quantity, Time};

/// One table for all supplies that steps connect.
pub(in crate::report) fn blocks(plan: &Plan) -> Vec<Block> {
    let mut grid = Grid::new(&[
        ("Step", Side::Right),
        ("Supply", Side::Left),
        ("To", Side::Right),
        ("Nominal", Side::Right),
        ("Slowest", Side::Right),
        ("Bank", Side::Right),
        ("Series", Side::Right),
        ("Current", Side::Right),
        ("Charge", Side::Right),
    ]);
    for (at, step) in plan.steps.iter().enumerate() {
        for charging in &step.charging {
            charging.moments.iter().for_each(|moment| grid.row(row(at, charging, moment)));
        }
    }
    if grid.rows.is_empty() {
        return Vec::new();
    }
    let text = "From an empty bank, as if the step went on for ever: when the bank stays at or above a share of the \
                supply's voltage, counted from the step's start, and with every value nominal what is there then.";
    vec![Block::Section("Charging"), Block::Table(grid), Block::Paragraph(text.into())]
}

fn row(at: usize, charging: &Charging, moment: &ChargingMoment) -> [String; 9] {
    let when = |t: Option<Time>| t.map_or_else(|| "never".to_string(), time);
    fn there<Q: Quantity>(figure: Option<Q>) -> String {
        figure.map_or_else(|| "-".to_string(), up)
    }
    [
        (at + 1).to_string(),
        charging.supply.clone(),
        format!("{} %", (100.0 * moment.share.si()).round()),
        when(moment.nominal),
        when(moment.slowest),
        there(moment.bank),
        there(moment.series),
        there(moment.current),
        there(moment.charge),
    ]
}
