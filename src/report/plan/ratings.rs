//! Ratings: what was found, what is allowed and the margin between them; and what the resistors bear.

use super::super::block::{Block, Grid, Side};
use super::super::words::{down, glued, list, typed, up, whole};
use crate::plan::{CapacitorResult, Check, Plan, ResistorResult, Verdict};
use crate::quantity::{CELSIUS_ZERO_K, Direction, Energy, Power, Quantity, Ratio, Temperature, Voltage, show};

pub(in crate::report) fn blocks(plan: &Plan) -> Vec<Block> {
    if plan.resistors.is_empty() && plan.capacitors.is_empty() {
        return Vec::new();
    }
    let mut blocks = vec![Block::Section("Ratings"), Block::Table(checks(plan))];
    let remarks = remarks(plan);
    if !remarks.is_empty() {
        blocks.push(Block::List(remarks));
    }
    if plan.resistors.iter().any(|r| is_loaded(&r)) {
        blocks.push(Block::Section(match plan.steps.last() {
            Some(_) => "Resistors, one element, isolation to end of procedure",
            None => "Resistors, one element, isolation to infinite time",
        }));
        blocks.push(Block::Table(loads(plan)));
        blocks.push(Block::Paragraph(counted(plan)));
    }
    let idle: Vec<String> = plan.resistors.iter().filter(|r| !is_loaded(r)).map(|r| r.id.clone()).collect();
    if !idle.is_empty() {
        blocks.push(Block::Paragraph(format!(
            "{}, so without figures here: {}.",
            if plan.steps.is_empty() { "Connected by a step only" } else { "Connected by no step" },
            list(&idle)
        )));
    }
    blocks
}

/// From when to when peaks and energies of the resistors count.
fn counted(plan: &Plan) -> String {
    let until = plan.steps.last().map_or_else(
        || "to infinite time, nobody doing anything".into(),
        |last| format!("to the end of the last step at {}", whole(last.end)),
    );
    let switched = plan.resistors.iter().filter(|r| r.contact.as_ref().is_some_and(|c| c.opens_after.si() > 0.0));
    let switched: Vec<String> = switched.map(|r| r.id.clone()).collect();
    let fed = match switched.is_empty() {
        true => String::new(),
        false => format!("; those of {} with the feeding until its contact opens", list(&switched)),
    };
    format!("Air at the resistors: {}. Peaks and energy count from isolation {until}{fed}.", up(plan.ambient))
}

fn checks(plan: &Plan) -> Grid {
    let mut grid = Grid::new(&[
        ("Part", Side::Left),
        ("Check", Side::Left),
        ("Found", Side::Right),
        ("Allowed", Side::Right),
        ("Margin", Side::Right),
        ("Verdict", Side::Left),
    ]);
    for capacitor in &plan.capacitors {
        capacitor_rows(&mut grid, capacitor);
    }
    for resistor in &plan.resistors {
        for check in &resistor.checks {
            grid.row([
                resistor.id.clone(),
                check.check.into(),
                figure(check.found, check.unit, Direction::Up, "not computed"),
                figure(check.allowed, check.unit, Direction::Down, "not given"),
                check.found.zip(check.allowed).map_or_else(|| "-".into(), |(f, a)| margin(f, a, check.unit)),
                verdict(check.verdict).into(),
            ]);
        }
    }
    grid
}

fn capacitor_rows(grid: &mut Grid, c: &CapacitorResult) {
    let row = |check: String, found: Voltage, verdict: &str| {
        let allowed = c.rated.map_or_else(|| "not given".into(), down);
        let margin = c.rated.map_or_else(|| "-".into(), |rated| margin(found.si(), rated.si(), "V"));
        [c.id.clone(), check, up(found), allowed, margin, verdict.into()]
    };
    grid.row(row("voltage".into(), c.voltage_highest, verdict(c.verdict)));
    if let Some(fault) = &c.worst_fault {
        // A fault never decides the verdict, but nobody should have to read the findings to see it.
        let over = Verdict::at_most(c.voltage_fault.si(), c.rated.map_or(f64::NAN, Quantity::si));
        let word = match (c.rated, over) {
            (None, _) => "not checked",
            (Some(_), Verdict::Met) => "within, as a fault",
            (Some(_), _) => "OVER, as a fault",
        };
        grid.row(row(format!("voltage, {fault}"), c.voltage_fault, word));
    }
}

fn verdict(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::NotMet => "EXCEEDED",
        other => other.word(),
    }
}

/// A checked figure with its unit, rounded in `direction`; `absent` where there is none.
fn figure(value: Option<f64>, unit: &str, direction: Direction, absent: &str) -> String {
    let Some(value) = value else { return absent.into() };
    glued(&match unit {
        "W" => show(Power::from_si(value), direction),
        "V" => show(Voltage::from_si(value), direction),
        "J" => show(Energy::from_si(value), direction),
        _ => show(Temperature::from_si(value + CELSIUS_ZERO_K), direction),
    })
}

/// What is left of the allowed value, rounded down: a share of it, or kelvin where it is a temperature.
fn margin(found: f64, allowed: f64, unit: &str) -> String {
    if unit == "C" {
        let kelvin = show(Temperature::from_si(allowed - found + CELSIUS_ZERO_K), Direction::Down);
        return glued(&kelvin.replace("°C", "K"));
    }
    if allowed > 0.0 { down(Ratio::from_si((allowed - found) / allowed)) } else { "none".into() }
}

/// What a reader should know about single checks.
fn remarks(plan: &Plan) -> Vec<String> {
    let of = |r: &ResistorResult, c: &Check| c.remark.as_ref().map(|remark| format!("{}, {}: {remark}", r.id, c.check));
    plan.resistors.iter().flat_map(|r| r.checks.iter().filter_map(move |c| of(r, c))).collect()
}

/// True for a part that figures are there for; a tool, a strap or a meter has some only within a procedure.
fn is_loaded(r: &&ResistorResult) -> bool {
    r.continuous_power.is_some() || r.peak_power.is_some() || r.energy.is_some()
}

fn loads(plan: &Plan) -> Grid {
    let body = plan.resistors.iter().any(|r| r.body_temperature.is_some());
    let mut columns = vec![
        ("Part", Side::Left),
        ("Role", Side::Left),
        ("Elements", Side::Right),
        ("Value", Side::Right),
        ("Steady power", Side::Right),
        ("Peak power", Side::Right),
        ("Peak current", Side::Right),
        ("Energy", Side::Right),
    ];
    columns.extend(body.then_some(("Body", Side::Right)));
    let mut grid = Grid::new(&columns);
    for r in plan.resistors.iter().filter(is_loaded) {
        let mut cells = vec![
            r.id.clone(),
            r.role.into(),
            r.elements.to_string(),
            typed(r.value),
            given(r.continuous_power),
            given(r.peak_power),
            given(r.peak_current),
            given(r.energy),
        ];
        cells.extend(body.then(|| given(r.body_temperature)));
        grid.rows.push(cells);
    }
    grid
}

fn given<Q: Quantity>(quantity: Option<Q>) -> String {
    quantity.map_or_else(|| "-".into(), up)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_margin_is_never_shown_greater_than_it_is() {
        assert_eq!(margin(25.0, 37.0, "W"), "32.4\u{a0}%");
        assert_eq!(margin(25.01, 25.0, "W"), "-0.0401\u{a0}%");
        assert_eq!(margin(1.0, 0.0, "W"), "none");
        assert_eq!(margin(98.2, 155.0, "C"), "56\u{a0}K");
    }
}
