//! How supplies charge the bank.

use super::super::super::block::{Block, Grid, Side};
use super::super::super::words::{clean, down, time, typed, up};
use crate::plan::{ChargingMoment, Plan};
use crate::quantity::{Quantity, Time};

/// One table for every supply that a step connects.
pub(in crate::report) fn blocks(plan: &Plan) -> Vec<Block> {
    let mut tables = Vec::new();
    for (at, step) in plan.steps.iter().enumerate() {
        for charging in &step.charging {
            let (supply, volts) = (clean(&charging.supply), typed(charging.voltage));
            tables.push(Block::Part(format!("Step {}, from {supply} of {volts}", at + 1)));
            let mut grid = Grid::new(&[
                ("To", Side::Right),
                ("Nominal", Side::Right),
                ("Slowest", Side::Right),
                ("Bank", Side::Right),
                ("Series", Side::Right),
                ("Current", Side::Right),
                ("Charge", Side::Right),
            ]);
            charging.moments.iter().for_each(|moment| grid.row(row(moment)));
            tables.push(Block::Table(grid));
            tables.push(Block::Paragraph(format!(
                "At the step's end the bank has come to {} or more, nominal {}.",
                down(charging.reached_lowest),
                down(charging.reached_nominal)
            )));
        }
    }
    if tables.is_empty() {
        return Vec::new();
    }
    let text = "From an empty bank, as if the step went on for ever: when the bank stays at or above a share of the \
                supply's voltage, counted from the step's start, and with every value nominal the voltage of the bank \
                and of the series resistance, the current, and the charge that has flowed by then.";
    let head = [Block::Section("Charging"), Block::Paragraph(text.into())];
    head.into_iter().chain(tables).collect()
}

fn row(moment: &ChargingMoment) -> [String; 7] {
    let when = |t: Option<Time>| t.map_or_else(|| "never".to_string(), time);
    fn there<Q: Quantity>(figure: Option<Q>) -> String {
        figure.map_or_else(|| "-".to_string(), up)
    }
    [
        format!("{} %", (100.0 * moment.share.si()).round()),
        when(moment.nominal),
        when(moment.slowest),
        there(moment.bank),
        there(moment.series),
        there(moment.current),
        there(moment.charge),
    ]
}
