//! The calculation in a form that a reviewer can check by hand.

use super::super::block::{Block, Grid, Side};
use super::super::words::{clean, glued, pair};
use crate::plan::{Plan, Working, WorkingSingle, WorkingValue};
use crate::quantity::{Direction, Quantity, Voltage, show_digits};

/// Significant digits: enough to follow a wait to the second over days.
const DIGITS: u32 = 6;

pub(in crate::report) fn blocks(plan: &Plan) -> Vec<Block> {
    let Some(working) = &plan.working else { return Vec::new() };
    let text = "Figures have six digits, rounded away from zero. t counts from isolation; x is a value over the marked \
                one, where it is not the same. A wait ends when |v| stays at or below the voltage waited for.";
    let mut blocks = vec![Block::Section("Working"), Block::Paragraph(text.into())];
    blocks.extend(working.iter().flat_map(worked));
    blocks
}

fn six<Q: Quantity>(quantity: Q) -> String {
    let direction = if quantity.si() < 0.0 { Direction::Down } else { Direction::Up };
    glued(&show_digits(quantity, DIGITS, direction))
}

/// An amplitude; far below a millivolt in powers of ten, since what is left by rounding is no hundredth of one.
fn amplitude(amplitude: Voltage) -> String {
    let volt = amplitude.si();
    if volt.abs() < 1e-3 && volt.abs() > 0.0 { glued(&format!("{volt:.5e} V")) } else { six(amplitude) }
}

fn worked(working: &Working) -> Vec<Block> {
    let head = format!("{}, {}, charged to {}", pair(&working.across), working.case, six(working.charged_to));
    let mut blocks = vec![Block::Part(head)];
    if !working.values.is_empty() {
        let values: Vec<String> = working.values.iter().map(value).collect();
        blocks.push(Block::Paragraph(format!("Values: {}.", values.join("; "))));
    }
    match &working.single {
        Some(single) => blocks.extend(hand(working, single)),
        None => blocks.extend(network(working)),
    }
    blocks
}

fn value(value: &WorkingValue) -> String {
    let figure = match (value.resistance, value.capacitance) {
        (Some(resistance), _) => six(resistance),
        (None, Some(capacitance)) => six(capacitance),
        (None, None) => "not given".into(),
    };
    let factor = format!("{:.6}", value.factor);
    let factor = factor.trim_end_matches('0').trim_end_matches('.');
    let factor = if factor == "1" { String::new() } else { glued(&format!(" (x {factor})")) };
    format!("{} = {figure}{factor}", clean(&value.id))
}

/// tau = R C and t = tau ln(V0/V) with their numbers.
fn hand(working: &Working, single: &WorkingSingle) -> Vec<Block> {
    let tau = working.modes.first().map(|mode| six(mode.tau));
    let mut formulas = Vec::new();
    if let Some(tau) = &tau {
        formulas.push(format!("tau = R C = {} x {} = {tau}", six(single.resistance), six(single.capacitance)));
    }
    match (working.wait, &tau) {
        (Some(wait), Some(tau)) if wait.si() > 0.0 => formulas.push(format!(
            "t = tau ln(V0/V) = {tau} x ln({} / {}) = {}",
            six(single.from),
            six(single.to),
            six(wait)
        )),
        (Some(_), _) => {
            formulas.push(format!("t = 0: V0 = {} is not above V = {}", six(single.from), six(single.to)));
        }
        (None, _) => formulas.push("t: never".into()),
    }
    formulas.into_iter().map(Block::Formula).collect()
}

/// The sum of exponentials with its amplitudes and time constants.
fn network(working: &Working) -> Vec<Block> {
    let mut grid = Grid::new(&[("k", Side::Right), ("tau_k", Side::Right), ("a_k", Side::Right)]);
    for (k, mode) in working.modes.iter().enumerate() {
        grid.row([(k + 1).to_string(), six(mode.tau), amplitude(mode.amplitude)]);
    }
    let settles: Voltage = working.settles_at;
    let from = if working.from.is_some() { " from isolation" } else { "" };
    let wait = working.wait.map_or_else(|| "t: never".into(), |t| format!("last crossing: t = {}{from}", six(t)));
    let before = working.from.map(|from| {
        Block::Paragraph(format!(
            "Until t = {0} a sink draws or a contact has yet to close, and the voltage is another sum of exponentials \
             over each such time; from then on, with t counted from {0}:",
            six(from)
        ))
    });
    let sum = [
        Block::Formula(format!("v(t) = {} + sum over k of a_k exp(-t/tau_k)", six(settles))),
        Block::Table(grid),
        Block::Formula(wait),
    ];
    before.into_iter().chain(sum).collect()
}
