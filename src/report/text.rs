//! A document as plain text for a terminal, a pipe or paper: no colour, at most the given number of columns.

use super::block::{Block, Column, Grid, Labelled, Side};
use super::paper;
use super::plan;
use super::words::{NO_BREAK, clean};
use crate::plan::Plan;
use comfy_table::{Cell, CellAlignment, ColumnConstraint, ContentArrangement, LineStyle, Table, TableStyle, Width};
use unicode_width::{UnicodeWidthChar, UnicodeWidthStr};

/// Columns below which the layout would fall apart; a narrower terminal wraps by itself.
const NARROWEST: usize = 60;
/// Columns beyond which lines get hard to follow.
const WIDEST: usize = 120;
/// Columns for the labels on the left: `not checked` is the longest word among them.
const LABEL: usize = 13;
/// Columns between the columns of a table.
const GAP: u16 = 2;
/// Columns that a name keeps when figures take the room.
const SHORTEST_NAME: usize = 6;
/// One line under the headings and nothing else: figures stand free, and a copy of a row stays readable.
const TABLE_STYLE: TableStyle = TableStyle::new().header_separator(LineStyle::none().fill('-').junction('-'));

/// A plan as text, in the order in which a person needs it.
///
/// `width` is the number of columns to stay within; it is taken as at least 60 and at most 120.
pub fn plan_text(plan: &Plan, width: usize) -> String {
    render(&plan::document(plan), width)
}

/// A message of one or several lines, each wrapped to `width` columns (taken as at least 60 and at most 120).
pub fn message_text(message: &str, width: usize) -> String {
    let width = width.clamp(NARROWEST, WIDEST);
    let lines = message.lines().flat_map(|line| {
        let indent = line.len() - line.trim_start().len();
        wrap(line, width - indent).into_iter().map(move |part| format!("{}{part}\n", " ".repeat(indent)))
    });
    lines.collect::<String>().replace(NO_BREAK, " ")
}

/// Any document as text.
pub(super) fn render(blocks: &[Block], width: usize) -> String {
    let width = width.clamp(NARROWEST, WIDEST);
    let mut lines = Vec::new();
    for block in blocks {
        add(&mut lines, block, width);
    }
    let mut text: String = lines.iter().flat_map(|line| [line.trim_end_matches([' ', NO_BREAK]), "\n"]).collect();
    text = text.replace(NO_BREAK, " ");
    text
}

fn add(lines: &mut Vec<String>, block: &Block, width: usize) {
    match block {
        Block::Title { title, under } => {
            lines.extend(wrap(title, width));
            lines.extend(under.iter().flat_map(|line| wrap(line, width)));
            lines.push("-".repeat(width));
        }
        Block::Stop { word, text } => {
            lines.push(format!("*** {word} ***"));
            lines.extend(text.iter().flat_map(|paragraph| wrap(paragraph, width)));
            lines.push(String::new());
        }
        Block::Section(heading) => {
            lines.push(String::new());
            lines.push(heading.to_uppercase());
        }
        Block::Part(heading) => {
            lines.push(String::new());
            lines.extend(wrap(heading, width));
        }
        Block::Paragraph(text) => lines.extend(wrap(text, width)),
        Block::Labelled(items) => labelled(lines, items, width),
        Block::Framed(items) => {
            lines.push("=".repeat(width));
            labelled(lines, items, width);
            lines.push("=".repeat(width));
        }
        Block::List(items) => {
            for item in items {
                hanging(lines, "-", 2, std::slice::from_ref(item), width);
            }
        }
        Block::Formula(formula) => hanging(lines, "", 2, std::slice::from_ref(formula), width),
        Block::Table(grid) => lines.extend(table(grid, width)),
        Block::Large(figures) => {
            lines.push("=".repeat(width));
            for figure in figures {
                hanging(lines, figure.label, 2 * LABEL, &[figure.figure.clone(), figure.under.clone()], width);
            }
            lines.push("=".repeat(width));
        }
        Block::Ticks(acts) => {
            for act in acts {
                hanging(lines, paper::TICK, LABEL, std::slice::from_ref(act), width);
            }
        }
        Block::Blanks(labels) => {
            for label in labels {
                lines.extend(wrap(&format!("{label} {}", paper::LINE), width));
            }
        }
        Block::Step(step) => {
            lines.push(String::new());
            lines.extend(wrap(&format!("{} {}", paper::TICK, step.heading), width));
            labelled(lines, &step.items, width);
            if !step.readings.rows.is_empty() {
                lines.extend(table(&paper::with_room(&step.readings), width));
            }
            lines.extend(wrap(&paper::done(), width));
        }
        Block::Plot(picture) => {
            lines.push(String::new());
            lines.extend(wrap(&picture.title, width));
            lines.extend(wrap(&picture.description, width));
        }
        Block::Signatures(roles) => lines.extend(table(&paper::signatures(roles), width)),
    }
}

fn labelled(lines: &mut Vec<String>, items: &[Labelled], width: usize) {
    for item in items {
        hanging(lines, &item.label, LABEL, &item.text, width);
    }
}

/// A label on the left with its paragraphs beside it.
fn hanging(lines: &mut Vec<String>, label: &str, indent: usize, paragraphs: &[String], width: usize) {
    let left = if label.is_empty() { Vec::new() } else { wrap(label, indent - 1) };
    let right: Vec<String> = paragraphs.iter().flat_map(|text| wrap(text, width - indent)).collect();
    for i in 0..left.len().max(right.len()) {
        let left = left.get(i).map_or("", String::as_str);
        let right = right.get(i).map_or("", String::as_str);
        lines.push(format!("{left}{}{right}", " ".repeat(indent.saturating_sub(left.width()))));
    }
}

/// Lines of at most `width` columns, broken at spaces; a word that is longer is broken inside.
pub(super) fn wrap(text: &str, width: usize) -> Vec<String> {
    let mut lines = Vec::new();
    let mut line = String::new();
    for word in clean(text).split(' ').filter(|word| !word.is_empty()) {
        if !line.is_empty() && line.width() + 1 + word.width() <= width {
            line.push(' ');
            line.push_str(word);
            continue;
        }
        if !line.is_empty() {
            lines.push(std::mem::take(&mut line));
        }
        for c in word.chars() {
            if line.width() + c.width().unwrap_or(0) > width {
                lines.push(std::mem::take(&mut line));
            }
            line.push(c);
        }
    }
    lines.push(line);
    lines
}

fn table(grid: &Grid, width: usize) -> Vec<String> {
    let mut table = Table::new();
    table
        .load_style(TABLE_STYLE)
        .set_content_arrangement(ContentArrangement::Dynamic)
        .set_width(u16::try_from(width).unwrap_or(u16::MAX));
    let cell = |(i, text): (usize, &str)| {
        let right = grid.columns.get(i).is_some_and(|c| c.side == Side::Right);
        Cell::new(clean(text)).set_alignment(if right { CellAlignment::Right } else { CellAlignment::Left })
    };
    table.set_header(grid.columns.iter().map(|c| c.heading).enumerate().map(cell));
    for row in &grid.rows {
        table.add_row(row.iter().map(String::as_str).enumerate().map(cell));
    }
    for (i, column) in table.column_iter_mut().enumerate() {
        column.set_padding((0, GAP));
        if let Some(figures) = figures_width(grid, i, width) {
            column.set_constraint(ColumnConstraint::LowerBoundary(Width::Fixed(figures + GAP)));
        }
    }
    table.lines().collect()
}

/// The width that keeps the figures of a column on one line; names give way instead. `None` for names, and where the
/// figures of all columns don't fit beside even the shortest piece of a name.
fn figures_width(grid: &Grid, column: usize, width: usize) -> Option<u16> {
    let widest = |i: usize| grid.rows.iter().filter_map(|row| Some(row.get(i)?.width())).max().unwrap_or(0);
    let needs =
        |(i, c): (usize, &Column)| if c.side == Side::Right { widest(i) } else { SHORTEST_NAME } + usize::from(GAP);
    let all: usize = grid.columns.iter().enumerate().map(needs).sum();
    let figures = grid.columns.get(column).is_some_and(|c| c.side == Side::Right) && all <= width;
    if figures { u16::try_from(widest(column)).ok() } else { None }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lines_break_at_spaces_and_never_inside_a_figure() {
        assert_eq!(wrap("wait 5\u{a0}min 20\u{a0}s", 10), ["wait 5\u{a0}min", "20\u{a0}s"]);
        assert_eq!(wrap("abcdefghij", 4), ["abcd", "efgh", "ij"]);
        assert_eq!(wrap("", 4), [""]);
    }

    #[test]
    fn wide_characters_count_as_two_columns() {
        assert!(wrap(&"泵".repeat(100), 61).iter().all(|line| line.width() <= 61));
    }
}
