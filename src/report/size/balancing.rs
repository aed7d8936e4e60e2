//! What a report on balancing resistors says of its designs.

use super::{SizeReport, Terms, Told, bought, document_in, energy, of, rank, strings, value};
use crate::report::block::{Grid, Labelled, Side};
use crate::report::words::{count, down, list, pair, time, typed, up, wait};
use crate::size::{BalancingFigures, Candidate, Sizing, UnitShare};

/// A sizing of balancing resistors, ready for people.
pub fn size_balancing(sizing: &Sizing<BalancingFigures>) -> SizeReport {
    let place = format!(
        "One across each unit of the string {}, the terminals held at up to {}.",
        pair(&sizing.across),
        up(sizing.charged_to.highest)
    );
    let first = sizing.candidates.first();
    let each = first
        .map_or_else(String::new, |c| format!(" across each of {}", count(c.figures.units.len(), "unit", "units")));
    let explained = "* none other has as few elements, as little loss and as short a wait, and less of one. Unit: the \
                     highest voltage of any unit. Loss: at the highest voltage, all of them. Each design was put into the \
                     bank and planned in full; waits are that plan's.";
    let mut tables = vec![("Designs", designs(&sizing.candidates), Some(explained.to_string()))];
    if let Some(first) = first {
        let explained = "Highest over all tolerances and leakages. Fast: right after a fast charge; then: from there until \
                         it has settled.";
        tables.push(("Units with the first design", units(&first.figures.units), Some(explained.into())));
    }
    tables.push(("One element", elements(&sizing.candidates), None));
    let told = Told {
        place,
        clock: "Times run from isolation.",
        predicted: first.map(predicted),
        tables,
        first: first.map_or_else(Vec::new, first_design),
    };
    document_in(sizing, told, Terms { resistance: "Marked resistance", each })
}

fn predicted(first: &Candidate<BalancingFigures>) -> String {
    let highest = first.figures.units.iter().map(UnitShare::highest).reduce(|x, y| if y > x { y } else { x });
    let highest = highest.map_or_else(String::new, |v| format!("no unit above {}", up(v)));
    format!(
        "Predicted: {highest}, at least {} below its rating; standing loss {} in all; longest wait {}.",
        down(first.figures.margin),
        up(first.figures.loss_highest),
        wait(first.figures.wait)
    )
}

fn designs(candidates: &[Candidate<BalancingFigures>]) -> Grid {
    let mut grid = Grid::new(&[
        ("No.", Side::Left),
        ("Element", Side::Left),
        ("Value", Side::Right),
        ("s x p", Side::Right),
        ("Unit", Side::Right),
        ("Loss", Side::Right),
        ("Wait", Side::Right),
        ("One open", Side::Right),
    ]);
    for c in candidates {
        let highest = c.figures.units.iter().map(UnitShare::highest).reduce(|x, y| if y > x { y } else { x });
        grid.row([
            rank(c),
            c.element.clone(),
            value(c.value),
            strings(c),
            highest.map_or_else(String::new, up),
            up(c.figures.loss_highest),
            wait(c.figures.wait),
            wait(c.figures.open_wait),
        ]);
    }
    grid
}

fn units(units: &[UnitShare]) -> Grid {
    let fast = units.iter().any(|u| u.fast_charge.is_some());
    let mut columns =
        vec![("Unit", Side::Left), ("Across", Side::Left), ("With", Side::Left), ("Settled", Side::Right)];
    if fast {
        columns.extend([("Fast", Side::Right), ("Then", Side::Right)]);
    }
    columns.extend([("Rated", Side::Right), ("Left", Side::Right)]);
    let mut grid = Grid::new(&columns);
    for u in units {
        let mut row = vec![u.capacitors.join(", "), pair(&u.across), u.resistor.clone(), up(u.settled)];
        if fast {
            row.extend([u.fast_charge, u.after_fast_charge].map(|v| v.map_or_else(String::new, up)));
        }
        row.extend([typed(u.rated), down(u.margin)]);
        grid.row(row);
    }
    grid
}

fn elements(candidates: &[Candidate<BalancingFigures>]) -> Grid {
    let mut columns = vec![
        ("No.", Side::Left),
        ("Power", Side::Right),
        ("Voltage", Side::Right),
        ("Body", Side::Right),
        ("Number", Side::Right),
        ("kWh/year", Side::Right),
    ];
    let bought = bought(&mut columns, candidates);
    let mut grid = Grid::new(&columns);
    for c in candidates {
        let mut row = vec![
            c.rank.to_string(),
            of(Some(up(c.figures.element_power)), c.allowed_power.map(down)),
            of(Some(up(c.figures.element_voltage)), c.allowed_voltage.map(down)),
            c.body_temperature.map_or_else(String::new, up),
            c.figures.elements_in_all.to_string(),
            energy(c.figures.energy_per_year_kwh),
        ];
        row.extend(bought(c));
        grid.row(row);
    }
    grid
}

fn first_design(c: &Candidate<BalancingFigures>) -> Vec<Labelled> {
    let limits = c.figures.limits.iter().map(|l| {
        let faults = match l.single_fault_met {
            Some(true) => " With any one part failed as well.",
            Some(false) => " NOT with any one part failed.",
            None => "",
        };
        let text = format!("{}: holds from {} on at {}.{faults}", l.id, wait(l.holds_from), pair(&l.across));
        Labelled::new("limit", vec![text])
    });
    let mut items: Vec<Labelled> = limits.collect();
    let units = match c.figures.open_unit_voltage {
        Some(volts) => format!("A unit can then reach {} before isolation.", up(volts)),
        None => "Leakage alone then decides the voltage of a unit: NOTHING bounds it.".into(),
    };
    let open = match c.figures.open_wait {
        Some(open) => format!("The longest wait is then {}.", time(open)),
        None => "The wait then NEVER ends by itself: test before touch, whatever time has passed.".into(),
    };
    items.push(Labelled::new("one open", vec![units, open]));
    let names: Vec<String> = c.figures.resistors.iter().map(|r| r.id.clone()).collect();
    items.push(Labelled::new("new parts", vec![format!("{}.", list(&names))]));
    items
}
