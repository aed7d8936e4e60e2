//! A course in characters, for a terminal.

use super::axis::Axis;
use super::courses::Course;
use unicode_width::UnicodeWidthStr;

/// Rows of a plot.
const ROWS: usize = 16;

/// The plot, its axes and its key, within `width` columns.
pub(super) fn plot(course: &Course, width: usize) -> Vec<String> {
    let labels: Vec<(usize, String)> =
        course.up.ticks.iter().map(|(v, text)| (row(&course.up, *v), text.clone())).collect();
    let left = labels.iter().map(|(_, text)| text.width()).max().unwrap_or(0) + 1;
    let columns = width - left - 2;
    let mut grid = vec![vec![' '; columns]; ROWS];
    for level in &course.levels {
        let from = level.from.map_or(0, |x| column(&course.across, x, columns));
        let line = row(&course.up, level.value);
        grid[line][from..].fill('-');
    }
    for (points, mark) in [(&course.nominal, '.'), (&course.highest, '#')] {
        for (column, at) in (0..columns).map(|x| (x, x as f64 / (columns - 1) as f64)) {
            if let Some(value) = value_at(points, &course.across, at) {
                grid[row(&course.up, value)][column] = mark;
            }
        }
    }
    let mut lines = Vec::new();
    if !course.marks.is_empty() {
        lines.push(format!("{:left$}  {}", "step", numbers(course, columns)));
    }
    for (r, cells) in grid.iter().enumerate() {
        let label = labels.iter().find(|(at, _)| *at == r).map_or("", |(_, text)| text.as_str());
        let pad = " ".repeat(left.saturating_sub(label.width()));
        lines.push(format!("{pad}{label} |{}", cells.iter().collect::<String>()));
    }
    lines.push(format!("{:left$} +{}", "", "-".repeat(columns)));
    lines.push(format!("{:left$}  {}", "", times(&course.across, columns)));
    let key = if course.nominal.is_empty() { "# highest credible" } else { "# highest credible   . nominal" };
    lines.push(format!("{:left$}  {}; {key}", "", course.across.name));
    let names: Vec<String> = course.levels.iter().map(|level| level.name.clone()).collect();
    if !names.is_empty() {
        lines.extend(
            super::text::wrap(&format!("- {}", names.join("; ")), columns)
                .into_iter()
                .map(|l| format!("{:left$}  {l}", "")),
        );
    }
    lines
}

/// The row of a value, the highest value in row 0. A value between two rows stands on the upper one.
fn row(axis: &Axis, value: f64) -> usize {
    let from_below = (axis.share(value) * (ROWS - 1) as f64 - 1e-9).ceil().max(0.0) as usize;
    ROWS - 1 - from_below.min(ROWS - 1)
}

fn column(axis: &Axis, value: f64, columns: usize) -> usize {
    ((axis.share(value) * (columns - 1) as f64).round() as usize).min(columns - 1)
}

/// The value of a curve at a share of the time axis: of the moments around it, the higher.
fn value_at(points: &[(f64, f64)], axis: &Axis, share: f64) -> Option<f64> {
    let after = points.iter().position(|(t, _)| axis.share(*t) >= share - 1e-12)?;
    let (t1, v1) = points[after];
    let Some((t0, v0)) = after.checked_sub(1).map(|before| points[before]) else { return Some(v1) };
    let (s0, s1) = (axis.share(t0), axis.share(t1));
    if s1 - s0 < 1e-12 {
        return Some(v0.max(v1));
    }
    let part = (share - s0) / (s1 - s0);
    // Between two moments a fall is straight on an axis by powers of ten.
    Some(if v0 > 0.0 && v1 > 0.0 { (v0.ln() + part * (v1.ln() - v0.ln())).exp() } else { v0 + part * (v1 - v0) })
}

/// Step numbers in the row above the plot; one that would run into another is left out.
fn numbers(course: &Course, columns: usize) -> String {
    let mut line = vec![' '; columns];
    let mut free = 0;
    for mark in &course.marks {
        let from = column(&course.across, mark.from, columns);
        let middle = (from + column(&course.across, mark.to, columns)) / 2;
        let at = middle.max(free).min(columns.saturating_sub(mark.name.len()));
        if at < free || at > column(&course.across, mark.to, columns).max(from) + 2 {
            continue;
        }
        line.iter_mut().skip(at).zip(mark.name.chars()).for_each(|(cell, c)| *cell = c);
        free = at + mark.name.len() + 1;
    }
    line.iter().collect()
}

/// The figures of the time axis.
fn times(axis: &Axis, columns: usize) -> String {
    let mut line = vec![' '; columns];
    let mut free = 0;
    for (value, text) in &axis.ticks {
        let at = column(axis, *value, columns).min(columns.saturating_sub(text.chars().count()));
        if at >= free {
            line.iter_mut().skip(at).zip(text.chars()).for_each(|(cell, c)| *cell = c);
            free = at + text.chars().count() + 1;
        }
    }
    line.iter().collect()
}
