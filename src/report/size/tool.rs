//! What a discharge tool's report says of its designs.

use super::{SizeReport, Told, bought, document, of, rank, strings, value};
use crate::plan::{Check, Verdict, fault_in_words};
use crate::quantity::{CELSIUS_ZERO_K, Energy, Power, Quantity, Temperature, celsius};
use crate::report::block::{Grid, Labelled, Side};
use crate::report::words::{down, list, pair, time, typed, up, wait, whole};
use crate::size::{Candidate, InARowResult, Sizing, ToolFigures};

/// A sizing of a discharge tool, ready for people.
pub fn size_tool(sizing: &Sizing<ToolFigures>) -> SizeReport {
    let place = match sizing.connection {
        Some(connection) => {
            format!("Three legs in {connection}, a bank of up to {}.", up(sizing.charged_to.highest))
        }
        None => format!("Applied across {}, a bank of up to {}.", pair(&sizing.across), up(sizing.charged_to.highest)),
    };
    let first = sizing.candidates.first();
    let explained = "* none other has as few elements, as little current and as short a time, and less of one. Time: from \
                     when it is applied until every test point is there for good. Current and energy: all of the tool, in \
                     one discharge. Each design was put into the bank and planned in full; the figures are that plan's.";
    let elements_explained = "In a row: discharges from cold before the body of one element is too warm, and how long it \
                              then has to cool before the next one.";
    let tables = vec![
        ("Designs", designs(&sizing.candidates), Some(explained.into())),
        ("One element", elements(&sizing.candidates), Some(elements_explained.into())),
    ];
    let ambient = sizing.ambient;
    let told = Told {
        place,
        clock: "Times run from isolation, those of a tool from when it is applied.",
        predicted: first.map(predicted),
        tables,
        first: first.map_or_else(Vec::new, |c| first_design(c, ambient)),
    };
    document(sizing, told)
}

fn predicted(first: &Candidate<ToolFigures>) -> String {
    let f = &first.figures;
    format!(
        "Predicted: at or below {} after {} of the {} for which it is held; up to {} through it and {} into it. A tool is no \
         strap: after it, test, then short.",
        typed(f.below),
        wait(f.time),
        whole(f.held),
        up(f.peak_current),
        up(f.energy)
    )
}

fn designs(candidates: &[Candidate<ToolFigures>]) -> Grid {
    let mut grid = Grid::new(&[
        ("No.", Side::Left),
        ("Element", Side::Left),
        ("Value", Side::Right),
        ("s x p", Side::Right),
        ("Time", Side::Right),
        ("Current", Side::Right),
        ("Energy", Side::Right),
    ]);
    for c in candidates {
        grid.row([
            rank(c),
            c.element.clone(),
            value(c.value),
            strings(c),
            wait(c.figures.time),
            up(c.figures.peak_current),
            up(c.figures.energy),
        ]);
    }
    grid
}

fn elements(candidates: &[Candidate<ToolFigures>]) -> Grid {
    let mut columns = vec![
        ("No.", Side::Left),
        ("Voltage", Side::Right),
        ("Pulse", Side::Right),
        ("Body", Side::Right),
        ("In a row", Side::Right),
        ("Cooling", Side::Right),
        ("All of it", Side::Right),
    ];
    let bought = bought(&mut columns, candidates);
    let mut grid = Grid::new(&columns);
    for c in candidates {
        let pulse = check(c, "pulse energy").and_then(|p| p.allowed).map(|joule| down(Energy::from_si(joule)));
        let body = check(c, "body temperature").and_then(|b| b.allowed).map(degrees);
        let row = c.figures.in_a_row.as_ref();
        let mut line = vec![
            c.rank.to_string(),
            of(c.element_voltage.map(up), c.allowed_voltage.map(down)),
            of(c.element_energy.map(up), pulse),
            of(c.body_temperature.map(up), body),
            row.map_or_else(|| "not\u{a0}checked".into(), banks),
            row.and_then(|r| r.cooling).map_or_else(String::new, time),
            value(c.resistance),
        ];
        line.extend(bought(c));
        grid.row(line);
    }
    grid
}

/// An allowed temperature in degree Celsius.
fn degrees(celsius: f64) -> String {
    down(Temperature::from_si(celsius + CELSIUS_ZERO_K))
}

fn check<'c>(c: &'c Candidate<ToolFigures>, name: &str) -> Option<&'c Check> {
    c.checks.iter().find(|check| check.check == name)
}

fn banks(row: &InARowResult) -> String {
    row.banks.map_or_else(|| "no\u{a0}end".into(), |n| n.to_string())
}

fn first_design(c: &Candidate<ToolFigures>, ambient: Temperature) -> Vec<Labelled> {
    let f = &c.figures;
    let caution = "A tool is no strap. When it has been held, test every pair that can be reached with a rated instrument \
                   proved on a known source before and after; then put the strap on, and leave it on for as long as anyone \
                   works.";
    let mut items = vec![
        Labelled::new("WARNING", vec![caution.into()]),
        Labelled::new(
            "discharge",
            vec![format!(
                "Applied {} after isolation and held for {}: up to {} is then left at a test point.",
                whole(f.applied_at),
                whole(f.held),
                up(f.left)
            )],
        ),
        Labelled::new("one failed", vec![one_failed(c)]),
        Labelled::new(
            "load",
            vec![format!(
                "Peak {} and {}; {} in one discharge, {} on average while it is held.",
                up(f.peak_current),
                up(f.peak_power),
                up(f.energy),
                up(f.average_power)
            )],
        ),
    ];
    items.extend(pulse(c));
    items.extend(f.contact_energy.map(|joule| {
        Labelled::new("contact", vec![format!("Up to {} heats cable and contact in one discharge.", up(joule))])
    }));
    items.push(Labelled::new("in a row", vec![in_a_row(c, ambient)]));
    items.extend(f.asked_row.as_ref().map(|row| {
        let body = match row.body_temperature {
            Some(body) => format!("the body of an element reaches up to {}", up(body)),
            None => "the temperature of the body is not checked, for want of thermal data".into(),
        };
        let text = format!(
            "{} banks, one every {}: {body}; {} on average in an element.",
            row.banks,
            time(row.every),
            up(row.average_power)
        );
        Labelled::new("as asked", vec![text])
    }));
    items
}

/// What is left with the worst part failed.
fn one_failed(c: &Candidate<ToolFigures>) -> String {
    match &c.figures.worst_fault {
        Some(worst) => format!("With {} up to {} is left then.", fault_in_words(&worst.fault), up(worst.left)),
        None => "No other part of this bank can fail by the plan's own list.".into(),
    }
}

/// What of an element's pulse was checked against what.
fn pulse(c: &Candidate<ToolFigures>) -> Option<Labelled> {
    let checked = c.checks.iter().filter(|k| k.verdict == Verdict::Met && k.check != "element voltage");
    let one = |k: &Check| {
        let (found, allowed) = k.found.zip(k.allowed)?;
        Some(match k.unit {
            "J" => format!("{} {} of {}", k.check, up(Energy::from_si(found)), down(Energy::from_si(allowed))),
            "W" => format!("{} {} of {}", k.check, up(Power::from_si(found)), down(Power::from_si(allowed))),
            _ => format!("{} {} of {}", k.check, up(Temperature::from_si(found + CELSIUS_ZERO_K)), degrees(allowed)),
        })
    };
    let checked: Vec<String> = checked.filter_map(one).collect();
    (!checked.is_empty()).then(|| Labelled::new("one element", vec![format!("{}.", list(&checked))]))
}

fn in_a_row(c: &Candidate<ToolFigures>, ambient: Temperature) -> String {
    let Some(row) = &c.figures.in_a_row else {
        return "Not checked, for want of thermal data: nothing is said of how often it can be applied.".into();
    };
    let air = format!("{:.0} °C", celsius(ambient));
    let pace = if row.every.si() > c.figures.held.si() * (1.0 + 1e-9) {
        format!("one every {}", time(row.every))
    } else {
        "one right after the other".into()
    };
    match (row.banks, row.cooling) {
        (None, _) => format!("From cold in air of {air}, {pace}: without end, by the body of one element."),
        (Some(banks), Some(cooling)) => format!(
            "From cold in air of {air}, {pace}: {banks}. After that it has to cool for {} before the next one.",
            time(cooling)
        ),
        (Some(banks), None) => format!("From cold in air of {air}, {pace}: {banks}."),
    }
}
