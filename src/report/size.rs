//! A sizing as text, Markdown and JSON.

use super::block::{Block, Grid, Labelled, Side};
use super::json::{NotFinite, json};
use super::words::{count, down, list, pair, time, typed, up, wait, whole};
use super::{markdown, text};
use crate::finding::Finding;
use crate::plan::Verdict;
use crate::quantity::{Direction, Mass, Quantity, Resistance, show, show_digits};
use crate::size::{Candidate, DemandResult, Sizing};

/// A sizing as text, at most `width` columns wide (taken as at least 60 and at most 120).
pub fn size_text(sizing: &Sizing, width: usize) -> String {
    text::render(&document(sizing), width)
}

/// A sizing as Markdown.
pub fn size_markdown(sizing: &Sizing) -> String {
    markdown::render(&document(sizing))
}

/// A sizing as indented JSON with a newline at its end.
///
/// # Errors
/// Where a figure is not a finite number: JSON has no such number.
pub fn size_json(sizing: &Sizing) -> Result<String, NotFinite> {
    json(sizing)
}

fn document(sizing: &Sizing) -> Vec<Block> {
    let under = vec![
        match sizing.connection {
            Some(connection) => format!("Three legs in {connection}, from up to {}.", up(sizing.charged_to.highest)),
            None => format!("Across {}, from up to {}.", pair(&sizing.across), up(sizing.charged_to.highest)),
        },
        "A prediction from the description in the file. Before anyone touches, prove a rated instrument on a known \
         source, test, prove it again."
            .to_string(),
    ];
    let mut blocks = vec![Block::Title { title: format!("{}: sizing of {}", sizing.tag, sizing.id), under }];
    blocks.push(Block::Framed(headline(sizing)));
    blocks.push(Block::Section("Demands"));
    blocks.push(Block::Table(demands(sizing)));
    if let Some(window) = &sizing.window {
        let end = |from: &Option<String>| from.clone().unwrap_or_else(|| "nothing".into());
        blocks.push(Block::Paragraph(format!(
            "All together: {}. Bounded below by {}, above by {}.",
            range(window.least, window.greatest),
            end(&window.least_from),
            end(&window.greatest_from)
        )));
    }
    if !sizing.candidates.is_empty() {
        blocks.push(Block::Section("Designs"));
        blocks.push(Block::Table(designs(&sizing.candidates)));
        blocks.push(Block::Paragraph(
            "* none other has as few elements, as little loss and as short a wait, and less of one. Loss: at the \
             highest voltage, all of the array. Each design was put into the bank and planned in full; the figures are \
             that plan's."
                .into(),
        ));
        blocks.push(Block::Section("One element"));
        blocks.push(Block::Table(elements(&sizing.candidates)));
        if let Some(first) = sizing.candidates.first() {
            blocks.push(Block::Section("The first design"));
            blocks.push(Block::Labelled(first_design(first)));
        }
    }
    if !sizing.findings.is_empty() {
        blocks.push(Block::Section("Findings"));
        blocks.push(Block::Labelled(sizing.findings.iter().map(finding).collect()));
    }
    blocks.push(Block::Section("What this rests on"));
    blocks.push(Block::List(sizing.assumptions.clone()));
    blocks.push(Block::Section("About this result"));
    blocks.push(Block::Paragraph(
        "Times run from isolation. Times, voltages, currents, powers and losses are rounded up, allowed values down. \
         Local electrical codes, the equipment maker's instructions and qualified persons decide."
            .into(),
    ));
    blocks.push(Block::Paragraph(format!("ebbvolt {}; SHA-256 of the input:", sizing.ebbvolt.version)));
    blocks.push(Block::Formula(sizing.input_sha256.clone()));
    blocks
}

fn headline(sizing: &Sizing) -> Vec<Labelled> {
    let searched = &sizing.searched;
    let looked = format!(
        "Looked at {}; {} in the window, {} left out for power, {} for voltage.",
        count(searched.elements, "kind of element", "kinds of element"),
        count(searched.inside_window, "array", "arrays"),
        searched.over_power,
        searched.over_voltage
    );
    let Some(first) = sizing.candidates.first() else {
        return vec![Labelled::new(
            "NOTHING DOES",
            vec!["No design does all that was asked; see Findings.".into(), looked],
        )];
    };
    let kept = first.limits.iter().map(|l| {
        let within = l.within.map_or_else(String::new, |t| format!(" (due {})", whole(t)));
        format!("{} holds from {}{within}", l.id, wait(l.holds_from))
    });
    let text = vec![
        format!("{}{}, {}.", built(first), in_all(first), first.element),
        format!("Predicted: {}; standing loss {}.", list(&kept.collect::<Vec<_>>()), up(first.loss_highest)),
        looked,
    ];
    vec![Labelled::new("FIRST DESIGN", text)]
}

/// The whole array, where that says more than its element.
fn in_all(c: &Candidate) -> String {
    if c.elements > 1 { format!(", {} in all", value(c.resistance)) } else { String::new() }
}

/// `22 kohm`, or `2 in series, 3 such strings of 22 kohm`.
fn built(c: &Candidate) -> String {
    match (c.series, c.parallel) {
        (1, 1) => format!("One of {}", value(c.value)),
        (s, 1) => format!("{s} of {} in series", value(c.value)),
        (1, p) => format!("{p} of {} in parallel", value(c.value)),
        (s, p) => format!("{p} strings of {s} times {}", value(c.value)),
    }
}

/// A value that was chosen, as it stands where that is short.
fn value(ohms: Resistance) -> String {
    let text = typed(ohms);
    if text.chars().count() > 10 { super::words::glued(&show_digits(ohms, 5, Direction::Down)) } else { text }
}

fn range(least: Option<Resistance>, greatest: Option<Resistance>) -> String {
    // The window is never shown wider than it is.
    let low = |ohms| super::words::glued(&show_digits(ohms, 4, Direction::Up));
    let high = |ohms| super::words::glued(&show_digits(ohms, 4, Direction::Down));
    match (least, greatest) {
        (Some(least), Some(greatest)) => format!("{} to {}", low(least), high(greatest)),
        (None, Some(greatest)) => format!("up to {}", high(greatest)),
        (Some(least), None) => format!("{} and more", low(least)),
        (None, None) => "any".into(),
    }
}

fn demands(sizing: &Sizing) -> Grid {
    let mut grid = Grid::new(&[("Demand", Side::Left), ("Actual resistance", Side::Right)]);
    for d in &sizing.demands {
        grid.row([d.demand.clone(), met_by(d)]);
    }
    grid
}

fn met_by(d: &DemandResult) -> String {
    let gaps = if d.gaps { ", with gaps" } else { "" };
    if d.nowhere { "none".into() } else { format!("{}{gaps}", range(d.least, d.greatest)) }
}

fn designs(candidates: &[Candidate]) -> Grid {
    let mut grid = Grid::new(&[
        ("No.", Side::Left),
        ("Element", Side::Left),
        ("Value", Side::Right),
        ("s x p", Side::Right),
        ("Wait", Side::Right),
        ("One open", Side::Right),
        ("Loss", Side::Right),
    ]);
    for c in candidates {
        grid.row([
            format!("{}{}", c.rank, if c.pareto { "*" } else { "" }),
            c.element.clone(),
            value(c.value),
            format!("{}\u{a0}x\u{a0}{}", c.series, c.parallel),
            wait(c.wait),
            wait(c.open_wait),
            up(c.loss_highest),
        ]);
    }
    grid
}

/// Kilowatt hours, rounded up to three digits.
fn energy(kwh: f64) -> String {
    let text = show(crate::quantity::Ratio::from_si(kwh / 100.0), Direction::Up);
    text.trim_end_matches(" %").to_string()
}

fn elements(candidates: &[Candidate]) -> Grid {
    let mut grid = Grid::new(&[
        ("No.", Side::Left),
        ("Power", Side::Right),
        ("Voltage", Side::Right),
        ("Body", Side::Right),
        ("All of it", Side::Right),
        ("kWh/year", Side::Right),
        ("Mass", Side::Right),
        ("Price", Side::Right),
    ]);
    let of = |found: Option<String>, allowed: Option<String>| {
        let limit = allowed.unwrap_or_else(|| "not\u{a0}given".into());
        format!("{} of {limit}", found.unwrap_or_default())
    };
    for c in candidates {
        grid.row([
            c.rank.to_string(),
            of(c.element_power.map(up), c.allowed_power.map(down)),
            of(c.element_voltage.map(up), c.allowed_voltage.map(down)),
            c.body_temperature.map_or_else(String::new, up),
            value(c.resistance),
            energy(c.energy_per_year_kwh),
            c.mass.map_or_else(String::new, mass),
            c.price.map_or_else(String::new, |p| format!("{p:.2}")),
        ]);
    }
    grid
}

fn mass(mass: Mass) -> String {
    if mass.si() < 1.0 { format!("{} g", (mass.si() * 1e6).round() / 1e3) } else { up(mass) }
}

fn first_design(c: &Candidate) -> Vec<Labelled> {
    let mut items: Vec<Labelled> = c
        .limits
        .iter()
        .map(|l| {
            let faults = match l.single_fault_met {
                Some(true) => " With any one part failed as well.",
                Some(false) => " NOT with any one part failed.",
                None => "",
            };
            let text = format!("{}: holds from {} on at {}.{faults}", l.id, wait(l.holds_from), pair(&l.across));
            Labelled::new("limit", vec![text])
        })
        .collect();
    let open = match c.open_wait {
        Some(open) => format!("The longest wait is then {}.", time(open)),
        None => "The wait then NEVER ends by itself: test before touch, whatever time has passed.".into(),
    };
    items.push(Labelled::new("one open", vec![open]));
    let open =
        c.checks.iter().filter(|check| check.verdict == Verdict::NotChecked).map(|check| check.check.to_string());
    let open: Vec<String> = open.collect();
    if !open.is_empty() {
        let text = format!("For want of a rating: {}.", list(&open));
        items.push(Labelled::new("not checked", vec![text]));
    }
    items.push(Labelled::new("current", vec![format!("Up to {} through the array.", up(c.peak_current))]));
    items.push(Labelled::new("plan", vec![format!("Verdict of the whole plan with it: {}.", c.verdict.word())]));
    items
}

fn finding(finding: &Finding) -> Labelled {
    let mut text = vec![format!("{} [{}]", finding.text, finding.code)];
    text.extend(finding.help.clone());
    Labelled::new(finding.severity.word(), text)
}
