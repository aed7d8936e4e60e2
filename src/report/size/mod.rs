//! A sizing as text, Markdown and JSON. Every job fills the same frame: the first design, the demands and the window,
//! tables of designs, findings, what the answer rests on. What the tables say is each job's own.

mod balancing;
mod bleeder;
mod precharge;
mod tool;

pub use balancing::size_balancing;
pub use bleeder::size_bleeder;
pub use precharge::size_precharge;
pub use tool::size_tool;

use super::block::{Block, Grid, Labelled, Side};
use super::json::{NotFinite, json};
use super::words::{count, list, typed, up};
use super::{markdown, text};
use crate::finding::Finding;
use crate::plan::Verdict;
use crate::quantity::{Direction, Mass, Quantity, Ratio, Resistance, show, show_digits};
use crate::size::{Candidate, DemandResult, Sizing};
use serde::Serialize;

/// A sizing made ready for people.
pub struct SizeReport(Vec<Block>);

impl SizeReport {
    /// As text, at most `width` columns wide (taken as at least 60 and at most 120).
    pub fn text(&self, width: usize) -> String {
        text::render(&self.0, width)
    }

    /// As Markdown.
    pub fn markdown(&self) -> String {
        markdown::render(&self.0)
    }
}

/// A sizing as indented JSON with a newline at its end.
///
/// # Errors
/// Where a figure is not a finite number: JSON has no such number.
pub fn size_json<F: Serialize>(sizing: &Sizing<F>) -> Result<String, NotFinite> {
    json(sizing)
}

/// What is a job's own in its report.
struct Told {
    /// Where the new resistor goes, and from what voltage.
    place: String,
    /// From when times run, as a sentence.
    clock: &'static str,
    /// What is predicted of the first design, in a sentence; `None` without one.
    predicted: Option<String>,
    /// Designs side by side, each table with what explains it.
    tables: Vec<(&'static str, Grid, Option<String>)>,
    /// More of the first design.
    first: Vec<Labelled>,
}

/// What a window is of, and where a design goes beside the place.
struct Terms {
    /// The head of the window's column.
    resistance: &'static str,
    /// What follows the design in the headline.
    each: String,
}

fn document<F>(sizing: &Sizing<F>, told: Told) -> SizeReport {
    document_in(sizing, told, Terms { resistance: "Actual resistance", each: String::new() })
}

fn document_in<F>(sizing: &Sizing<F>, told: Told, terms: Terms) -> SizeReport {
    let under = vec![
        told.place,
        "A prediction from the description in the file. Before anyone touches, prove a rated instrument on a known \
         source, test, prove it again."
            .to_string(),
    ];
    let mut blocks = vec![Block::Title { title: format!("{}: sizing of {}", sizing.tag, sizing.id), under }];
    blocks.push(Block::Framed(headline(sizing, told.predicted, &terms.each)));
    blocks.push(Block::Section("Demands"));
    blocks.push(Block::Table(demands(sizing, terms.resistance)));
    if let Some(window) = &sizing.window {
        let end = |from: &Option<String>| from.clone().unwrap_or_else(|| "nothing".into());
        blocks.push(Block::Paragraph(format!(
            "All together: {}. Bounded below by {}, above by {}.",
            range(window.least, window.greatest),
            end(&window.least_from),
            end(&window.greatest_from)
        )));
    }
    if let Some(first) = sizing.candidates.first() {
        for (section, grid, explained) in told.tables {
            blocks.push(Block::Section(section));
            blocks.push(Block::Table(grid));
            blocks.extend(explained.map(Block::Paragraph));
        }
        blocks.push(Block::Section("The first design"));
        let mut items = told.first;
        items.extend(not_checked(first));
        items
            .push(Labelled::new("plan", vec![format!("Verdict of the whole plan with it: {}.", first.verdict.word())]));
        blocks.push(Block::Labelled(items));
    }
    if !sizing.findings.is_empty() {
        blocks.push(Block::Section("Findings"));
        blocks.push(Block::Labelled(sizing.findings.iter().map(finding).collect()));
    }
    blocks.push(Block::Section("What this rests on"));
    blocks.push(Block::List(sizing.assumptions.clone()));
    blocks.push(Block::Section("About this result"));
    blocks.push(Block::Paragraph(format!(
        "{} Times, voltages, currents, powers and losses are rounded up, allowed values down. Local electrical codes, \
         the equipment maker's instructions and qualified persons decide.",
        told.clock
    )));
    blocks.push(Block::Paragraph(format!("ebbvolt {}; SHA-256 of the input:", sizing.ebbvolt.version)));
    blocks.push(Block::Formula(sizing.input_sha256.clone()));
    SizeReport(blocks)
}

fn headline<F>(sizing: &Sizing<F>, predicted: Option<String>, each: &str) -> Vec<Labelled> {
    let searched = &sizing.searched;
    let mut looked = vec![
        format!("Looked at {}", count(searched.elements, "kind of element", "kinds of element")),
        format!("{} in the window", count(searched.inside_window, "array", "arrays")),
    ];
    looked.extend(searched.set_aside.iter().map(|s| format!("{} left out for {}", s.arrays, s.of)));
    let looked = format!("{}.", looked.join("; "));
    let Some(first) = sizing.candidates.first() else {
        return vec![Labelled::new(
            "NOTHING DOES",
            vec!["No design does all that was asked; see Findings.".into(), looked],
        )];
    };
    let mut text = vec![format!("{}{}{each}, {}.", built(first), in_all(first), first.element)];
    text.extend(predicted);
    text.push(looked);
    // What is not needed is said before what would do.
    let met = sizing.findings.iter().find(|f| f.code == "already-met");
    let met = met.map(|f| Labelled::new("ALREADY MET", vec![f.text.clone()]));
    met.into_iter().chain([Labelled::new("FIRST DESIGN", text)]).collect()
}

/// What of the new resistor's ratings was not given.
fn not_checked<F>(c: &Candidate<F>) -> Option<Labelled> {
    let open = c.checks.iter().filter(|check| check.verdict == Verdict::NotChecked);
    let open: Vec<String> = open.map(|check| check.check.to_string()).collect();
    (!open.is_empty()).then(|| Labelled::new("not checked", vec![format!("For want of a rating: {}.", list(&open))]))
}

/// A found value beside the allowed one.
fn of(found: Option<String>, allowed: Option<String>) -> String {
    let limit = allowed.unwrap_or_else(|| "not\u{a0}given".into());
    format!("{} of {limit}", found.unwrap_or_default())
}

/// Kilowatt hours, rounded up to three digits.
fn energy(kwh: f64) -> String {
    let text = show(Ratio::from_si(kwh / 100.0), Direction::Up);
    text.trim_end_matches(" %").to_string()
}

/// The place in the order, with a star for what none other beats.
fn rank<F>(c: &Candidate<F>) -> String {
    format!("{}{}", c.rank, if c.pareto { "*" } else { "" })
}

fn strings<F>(c: &Candidate<F>) -> String {
    format!("{}\u{a0}x\u{a0}{}", c.series, c.parallel)
}

/// Adds a column of masses and one of prices where some design has them.
fn bought<F>(
    columns: &mut Vec<(&'static str, Side)>,
    candidates: &[Candidate<F>],
) -> impl Fn(&Candidate<F>) -> Vec<String> + use<F> {
    let mass_known = candidates.iter().any(|c| c.mass.is_some());
    let price_known = candidates.iter().any(|c| c.price.is_some());
    if mass_known {
        columns.push(("Mass", Side::Right));
    }
    if price_known {
        columns.push(("Price", Side::Right));
    }
    move |c| {
        let mut cells = Vec::new();
        if mass_known {
            cells.push(c.mass.map_or_else(String::new, mass));
        }
        if price_known {
            cells.push(c.price.map_or_else(String::new, |p| format!("{p:.2}")));
        }
        cells
    }
}

fn mass(mass: Mass) -> String {
    if mass.si() < 1.0 { format!("{} g", (mass.si() * 1e6).round() / 1e3) } else { up(mass) }
}

/// The whole array, where that says more than its element.
fn in_all<F>(c: &Candidate<F>) -> String {
    if c.elements > 1 { format!(", {} in all", value(c.resistance)) } else { String::new() }
}

/// `22 kohm`, or `2 in series, 3 such strings of 22 kohm`.
fn built<F>(c: &Candidate<F>) -> String {
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

fn demands<F>(sizing: &Sizing<F>, resistance: &'static str) -> Grid {
    let mut grid = Grid::new(&[("Demand", Side::Left), (resistance, Side::Right)]);
    for d in &sizing.demands {
        grid.row([d.demand.clone(), met_by(d)]);
    }
    grid
}

fn met_by(d: &DemandResult) -> String {
    let gaps = if d.gaps { ", with gaps" } else { "" };
    if d.nowhere { "none".into() } else { format!("{}{gaps}", range(d.least, d.greatest)) }
}

fn finding(finding: &Finding) -> Labelled {
    let mut text = vec![format!("{} [{}]", finding.text, finding.code)];
    text.extend(finding.help.clone());
    Labelled::new(finding.severity.word(), text)
}
