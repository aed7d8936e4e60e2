//! Curves as pictures: SVG for paper and screen, characters for the terminal. What is drawn is decided once; the two
//! only draw it.

mod axis;
mod characters;
mod courses;
mod csv;
mod svg;

use super::block::{Block, Picture};
use super::json::NotFinite;
use super::text;
use super::words::{clean, count};
use crate::plan::{Curves, Identity, Plan, Stamp};
use courses::Course;
use serde::Serialize;

/// Pairs that a sheet draws; a trace has every one.
const DRAWN: usize = 6;

/// The plots of a plan as blocks of a document; empty where it has no curves.
pub(super) fn blocks(plan: &Plan) -> Vec<Block> {
    let Some(curves) = &plan.curves else { return Vec::new() };
    let all = courses::voltages(plan, curves);
    let left_out = all.len().saturating_sub(DRAWN);
    let mut blocks = vec![Block::Section("Voltage against time"), Block::Paragraph(KEY.into())];
    let afterwards = courses::afterwards(plan, curves);
    let nothing_comes_back = afterwards.is_empty() && !plan.steps.is_empty();
    let tools = courses::tools(plan, curves);
    let closer: Vec<Option<Course>> = all.iter().map(courses::closer).collect();
    let drawn = all.iter().zip(&closer).take(DRAWN).flat_map(|(whole, closer)| [Some(whole), closer.as_ref()]);
    for course in drawn.flatten().chain(afterwards.iter().take(DRAWN)).chain(&tools) {
        blocks.push(Block::Plot(picture(course)));
    }
    if left_out > 0 {
        let text =
            format!("{} not drawn here; `ebbvolt trace` has every one.", count(left_out, "pair is", "pairs are"));
        blocks.push(Block::Paragraph(text));
    }
    blocks.extend(courses::idle_tools(curves).map(Block::Paragraph));
    if nothing_comes_back {
        blocks.push(Block::Paragraph(courses::nothing_comes_back(plan, curves)));
    }
    blocks
}

/// What the lines of every plot are.
const KEY: &str = "Solid line: the highest credible value at that moment, over all tolerances. Broken line: every value \
                   nominal. Grey: between the two. Numbers on top: the steps. What lies below the axis is drawn on its \
                   lowest line.";

/// Everything that a trace draws, in order.
fn all(plan: &Plan, curves: &Curves) -> Vec<Course> {
    let mut courses = Vec::new();
    for whole in courses::voltages(plan, curves) {
        let closer = courses::closer(&whole);
        courses.push(whole);
        courses.extend(closer);
    }
    courses.extend(courses::afterwards(plan, curves));
    courses.extend(courses::tools(plan, curves));
    courses
}

fn picture(course: &Course) -> Picture {
    Picture { title: course.title.clone(), description: course.description.clone(), svg: svg::element(course) }
}

/// Which tool and bank a trace is of, for machine formats.
#[derive(Serialize)]
struct Trace<'a> {
    ebbvolt: &'a Stamp,
    bank: &'a Identity,
    #[serde(flatten)]
    curves: &'a Curves,
}

/// The curves as characters, within `width` columns (taken as at least 60 and at most 120).
pub fn trace_text(plan: &Plan, width: usize) -> String {
    let width = width.clamp(60, 120);
    let Some(curves) = &plan.curves else { return String::new() };
    let mut lines = vec![clean(&plan.bank.tag)];
    lines.extend(text::wrap(super::plan::summary::caution().as_str(), width));
    for course in all(plan, curves) {
        lines.push(String::new());
        lines.extend(text::wrap(&course.title, width));
        lines.extend(characters::plot(&course, width));
        lines.extend(text::wrap(&course.description, width));
    }
    let mut text: String = lines.iter().flat_map(|line| [line.trim_end(), "\n"]).collect();
    text = text.replace(super::words::NO_BREAK, " ");
    text
}

/// The curves as CSV: a row for every moment, a column for every figure, the unit in its heading.
pub fn trace_csv(plan: &Plan) -> String {
    plan.curves.as_ref().map_or_else(String::new, csv::table)
}

/// The curves as JSON, in SI base units, never rounded.
///
/// # Errors
/// Where a figure is not a finite number.
pub fn trace_json(plan: &Plan) -> Result<String, NotFinite> {
    let Some(curves) = &plan.curves else { return Ok(String::from("null\n")) };
    let trace = Trace { ebbvolt: &plan.ebbvolt, bank: &plan.bank, curves };
    super::json::check_finite(&trace)?;
    let mut text = serde_json::to_string_pretty(&trace).map_err(|e| NotFinite::new(e.to_string()))?;
    text.push('\n');
    Ok(text)
}

/// All plots under each other in one SVG file.
pub fn trace_svg(plan: &Plan) -> String {
    let Some(curves) = &plan.curves else { return String::new() };
    svg::file(&format!("{}: voltage against time", clean(&plan.bank.tag)), &all(plan, curves))
}
