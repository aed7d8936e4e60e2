//! What stands before the first step: who may do it, what is needed, isolation and lockout.

use super::super::block::{Block, Grid, Side};
use super::super::words::{count, down, glued, list, pair, typed, up};
use crate::plan::{EquipmentPart, Plan};
use crate::quantity::{Quantity, Time};

pub(super) fn blocks(plan: &Plan) -> Vec<Block> {
    [who(), needed(plan), lockout(plan)].into_iter().flatten().collect()
}

fn who() -> Vec<Block> {
    let text = "Only people who are qualified for work on charged capacitors, and whom the site has named for it. Local \
                electrical codes, the rules of the site and the equipment maker's instructions decide; where this sheet \
                and one of them differ, they are followed and this sheet is not.";
    vec![Block::Section("Who may do this"), Block::Paragraph(text.into())]
}

fn needed(plan: &Plan) -> Vec<Block> {
    let equipment = &plan.equipment;
    let mut ticks = vec![
        format!(
            "Voltage detector or meter rated above {} and of a measurement category for this place",
            up(equipment.instrument_voltage)
        ),
        "Known source to prove the instrument on, before and after".into(),
    ];
    let used = equipment.parts.iter().filter(|part| !part.steps.is_empty());
    ticks.extend(used.clone().map(|part| format!("{} ({}) for {}", part.id, part.role, steps_of(part))));
    let mut blocks = vec![Block::Section("What is needed"), Block::Ticks(ticks)];
    if !equipment.parts.is_empty() {
        blocks.push(Block::Table(parts(plan)));
        let text = "Ratings are those of one element as the file gives them. What is not given was not checked.";
        blocks.push(Block::Paragraph(text.into()));
    }
    let blanks = ["Instrument, its number", "Protective equipment by local rules", "Barriers and signs by local rules"];
    blocks.push(Block::Blanks(blanks.map(String::from).to_vec()));
    blocks
}

fn steps_of(part: &EquipmentPart) -> String {
    let numbers: Vec<String> = part.steps.iter().map(usize::to_string).collect();
    glued(&format!("{} {}", if numbers.len() == 1 { "step" } else { "steps" }, list(&numbers)))
}

fn parts(plan: &Plan) -> Grid {
    let mut grid = Grid::new(&[
        ("Part", Side::Left),
        ("Role", Side::Left),
        ("Across", Side::Left),
        ("Value", Side::Left),
        ("Rated power", Side::Right),
        ("Rated voltage", Side::Right),
        ("Pulse, overload", Side::Left),
    ]);
    for part in &plan.equipment.parts {
        let elements = match part.series * part.parallel {
            1 => String::new(),
            n => format!(", {} elements ({} in series, {} in parallel)", n, part.series, part.parallel),
        };
        grid.row([
            part.id.clone(),
            part.role.into(),
            pair(&part.across),
            format!("{}{elements}", typed(part.value)),
            given(part.power),
            given(part.voltage),
            short(part),
        ]);
    }
    grid
}

fn given<Q: Quantity>(rating: Option<Q>) -> String {
    rating.map_or_else(|| "not given".into(), down)
}

/// What a part bears for a short time.
fn short(part: &EquipmentPart) -> String {
    let pulse = part.pulse.map(down);
    let overload = part
        .overload_times
        .zip(part.overload_for)
        .map(|(times, time): (f64, Time)| format!("{} times its power for {}", glued(&times.to_string()), typed(time)));
    let both: Vec<String> = pulse.into_iter().chain(overload).collect();
    if both.is_empty() { "not given".into() } else { both.join("; ") }
}

fn lockout(plan: &Plan) -> Vec<Block> {
    let ticks = [
        format!("Every feed of {} is off, locked and tagged", list(&plan.terminals)),
        "Other feeds, control supplies and back-feeds that could charge the bank again are found, off and locked"
            .into(),
        "Nothing that turns or generates can charge the bank".into(),
        "The isolation was tried: the equipment does not start".into(),
    ];
    let blanks = [
        "Other feeds and control supplies",
        "Locks and tags, their numbers",
        "Isolated by",
        "Date and time of isolation (time 0 of every step)",
    ];
    let from = match plan.steps.len() {
        0 => "All times on this sheet run from the moment of isolation.".to_string(),
        n => format!(
            "All times on this sheet, those of its {} too, run from the moment of isolation.",
            count(n, "step", "steps")
        ),
    };
    vec![
        Block::Section("Isolation and lockout"),
        Block::Ticks(ticks.to_vec()),
        Block::Paragraph(from),
        Block::Blanks(blanks.map(String::from).to_vec()),
    ]
}
