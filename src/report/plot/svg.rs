//! A course as SVG, drawn with `plotters`: lines of different breaks, since paper may be black and white.

use super::axis::Axis;
use super::courses::{Course, Level};
use maud::{PreEscaped, html};
use plotters::backend::SVGBackend;
use plotters::coord::Shift;
use plotters::coord::ranged1d::{KeyPointHint, NoDefaultFormatting, ValueFormatter};
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};
use std::ops::Range;

/// Units of a drawing to a pixel: the library places everything at whole units, and lines are to be smooth.
const FINE: u32 = 8;

/// Size in units. Printed over the width of a page a pixel is about its natural size, so that 14 px are 10.5 pt.
const WIDTH: u32 = 660 * FINE;
const HEIGHT: u32 = 240 * FINE;
/// Room for the figures of the axes and for the numbers of the steps.
const LEFT: u32 = 72 * FINE;
const BELOW: u32 = 48 * FINE;
const ABOVE: u32 = 50 * FINE;
/// Half of the last figure of an axis stands here: up to `1000000 s`.
const RIGHT: u32 = 34 * FINE;
/// Size of the type; the library writes it by a factor of 1.24 smaller.
const TYPE: f64 = 1.24 * 14.0 * FINE as f64;
/// Distance of two rows of text.
const ROW: i32 = 16 * FINE as i32;
/// How wide a character is at most, on average.
const CHARACTER: f64 = 7.6 * FINE as f64;

const BAND: RGBColor = RGBColor(205, 205, 205);
const GRID: RGBColor = RGBColor(190, 190, 190);

type Failure = DrawingAreaErrorKind<std::io::Error>;

/// The SVG element of a course, with its text alternative.
pub(super) fn element(course: &Course) -> String {
    let drawn = inner(course);
    html! {
        svg xmlns="http://www.w3.org/2000/svg" viewBox=(format!("0 0 {WIDTH} {HEIGHT}")) role="img"
            aria-label=(format!("{}. {}", course.title, course.description)) {
            title { (course.title) }
            desc { (course.description) }
            (PreEscaped(drawn))
        }
    }
    .into_string()
}

/// Several courses under each other as a file.
pub(super) fn file(title: &str, courses: &[Course]) -> String {
    let row = HEIGHT + 30 * FINE;
    let height = row * courses.len().max(1) as u32;
    let markup = html! {
        svg xmlns="http://www.w3.org/2000/svg" lang="en" width=(WIDTH / FINE) height=(height / FINE)
            viewBox=(format!("0 0 {WIDTH} {height}")) role="img" aria-label=(title) {
            title { (title) }
            rect width="100%" height="100%" fill="#fff" {}
            @for (i, course) in courses.iter().enumerate() {
                g transform=(format!("translate(0 {})", row * i as u32)) {
                    text x=(8 * FINE) y=(20 * FINE) font-family="sans-serif" font-size=(15 * FINE) font-weight="bold" {
                        (heading(&course.title))
                    }
                    g transform=(format!("translate(0 {})", 28 * FINE)) {
                        desc { (course.description) }
                        (PreEscaped(inner(course)))
                    }
                }
            }
        }
    };
    let mut text = markup.into_string();
    text.push('\n');
    text
}

/// A title on one line, as far as it fits.
fn heading(title: &str) -> String {
    const FITS: usize = 76;
    let mut short: String = title.chars().take(FITS).collect();
    if short.len() < title.len() {
        short.push('…');
    }
    short
}

/// What stands inside the SVG element; a plot that can't be drawn says so in its place.
fn inner(course: &Course) -> String {
    let mut buffer = String::new();
    let drawn = {
        let root = SVGBackend::with_string(&mut buffer, (WIDTH, HEIGHT)).into_drawing_area();
        draw(course, &root).and_then(|()| root.present())
    };
    match drawn {
        // The element itself is ours: it carries the text alternative.
        Ok(()) => {
            let from = buffer.find("<svg").and_then(|at| buffer[at..].find('>').map(|end| at + end + 1)).unwrap_or(0);
            let to = buffer.rfind("</svg>").unwrap_or(buffer.len());
            buffer[from..to].to_string()
        }
        Err(_) => html! { text x=(8 * FINE) y=(20 * FINE) font-size=(14 * FINE) { "This plot could not be drawn." } }
            .into_string(),
    }
}

fn draw(course: &Course, root: &DrawingArea<SVGBackend, Shift>) -> Result<(), Failure> {
    let (across, up) = (&course.across, &course.up);
    let mut chart = ChartBuilder::on(root)
        .margin_top(ABOVE)
        .margin_right(RIGHT)
        .set_label_area_size(LabelAreaPosition::Left, LEFT)
        .set_label_area_size(LabelAreaPosition::Bottom, BELOW)
        .build_cartesian_2d(Shares::of(across), Shares::of(up))?;
    let font = || ("sans-serif", TYPE).into_font().color(&BLACK);
    // Axes are drawn in shares of their length, so that even ones and those by powers of ten are one thing.
    let label = |axis: &Axis, share: f64| {
        let near = |(value, _): &&(f64, String)| (axis.share(*value) - share).abs() < 1e-9;
        axis.ticks.iter().find(near).map_or_else(String::new, |(_, text)| text.replace('\u{a0}', " "))
    };
    chart
        .configure_mesh()
        .bold_line_style(GRID.stroke_width(FINE))
        .light_line_style(TRANSPARENT)
        .axis_style(BLACK.stroke_width(FINE))
        .label_style(font())
        .axis_desc_style(font())
        .x_desc(across.name.clone())
        .x_label_formatter(&|share| label(across, *share))
        .y_label_formatter(&|share| label(up, *share))
        .set_all_tick_mark_size(5 * FINE)
        .draw()?;
    let place = |(x, y): &(f64, f64)| (across.share(*x), up.share(*y));
    let highest: Vec<(f64, f64)> = course.highest.iter().map(place).collect();
    let nominal: Vec<(f64, f64)> = course.nominal.iter().map(place).collect();
    if !nominal.is_empty() {
        let around: Vec<(f64, f64)> = highest.iter().chain(nominal.iter().rev()).copied().collect();
        chart.draw_series(std::iter::once(Polygon::new(around, BAND.filled())))?;
    }
    for mark in &course.marks {
        for edge in [mark.from, mark.to] {
            let x = across.share(edge);
            chart.draw_series(DashedLineSeries::new([(x, 0.0), (x, 1.0)], FINE, 3 * FINE, BLACK.stroke_width(FINE)))?;
        }
    }
    for (row, share, name) in rows(course) {
        let style = font().pos(Pos::new(HPos::Center, VPos::Bottom));
        let text = Text::new(name, (0, -4 * FINE as i32 - ROW * row), style);
        chart.draw_series(std::iter::once(EmptyElement::at((share, 1.0)) + text))?;
    }
    let offsets = name_offsets(&course.levels, up);
    for (i, level) in course.levels.iter().enumerate() {
        let (from, y) = (level.from.map_or(0.0, |x| across.share(x)), up.share(level.value));
        let (dash, gap) = if level.from.is_none() { (12 * FINE, 4 * FINE) } else { (3 * FINE, 3 * FINE) };
        let mut points = vec![(from, y), (1.0, y)];
        if level.from.is_some() {
            points.insert(0, (from, (y + 0.12).min(1.0)));
        }
        chart.draw_series(DashedLineSeries::new(points, dash, gap, BLACK.stroke_width(FINE)))?;
        let style = font().pos(Pos::new(HPos::Right, VPos::Bottom));
        let name = level.name.replace('\u{a0}', " ");
        let low = offsets[i];
        // The name stands on white, so that no line runs through it; the curves are drawn over both.
        let width = (CHARACTER * name.chars().count() as f64) as i32;
        let ground = Rectangle::new([(-width, low - ROW), (-2 * FINE as i32, low + FINE as i32)], WHITE.filled());
        let text = Text::new(name, (-4 * FINE as i32, low), style);
        chart.draw_series(std::iter::once(EmptyElement::at((1.0, y)) + ground + text))?;
    }
    if !nominal.is_empty() {
        chart.draw_series(DashedLineSeries::new(nominal, 7 * FINE, 4 * FINE, BLACK.stroke_width(FINE)))?;
    }
    chart.draw_series(LineSeries::new(highest, BLACK.stroke_width(2 * FINE)))?;
    Ok(())
}

/// An axis from 0 to 1 with its ticks where they are wanted.
struct Shares(Vec<f64>);

impl Shares {
    fn of(axis: &Axis) -> Self {
        Shares(axis.ticks.iter().map(|(value, _)| axis.share(*value)).collect())
    }
}

impl Ranged for Shares {
    type FormatOption = NoDefaultFormatting;
    type ValueType = f64;

    fn map(&self, value: &f64, (from, to): (i32, i32)) -> i32 {
        from + (f64::from(to - from) * value.clamp(0.0, 1.0)).round() as i32
    }

    fn key_points<Hint: KeyPointHint>(&self, hint: Hint) -> Vec<f64> {
        // Light lines between the ticks are not drawn.
        if hint.weight().allow_light_points() { Vec::new() } else { self.0.clone() }
    }

    fn range(&self) -> Range<f64> {
        0.0..1.0
    }
}

impl ValueFormatter<f64> for Shares {
    fn format(value: &f64) -> String {
        value.to_string()
    }
}

/// How far above its line each line's name stands, in units below zero: over the line, and over the names that are
/// already there; where the plot ends above it, below the line.
fn name_offsets(levels: &[Level], up: &Axis) -> Vec<i32> {
    let depth = f64::from(HEIGHT - ABOVE - BELOW);
    let line = |level: &Level| ((1.0 - up.share(level.value)) * depth) as i32;
    let mut taken: Vec<i32> = Vec::new();
    let mut offsets = Vec::new();
    for level in levels {
        let own = line(level);
        let free = |base: &i32, taken: &[i32]| taken.iter().all(|other| (other - base).abs() >= ROW);
        let above = (0..).map(|k| own - 2 * FINE as i32 - k * ROW / 4).find(|base| free(base, &taken) || *base < ROW);
        let base = above.filter(|base| *base >= ROW).unwrap_or_else(|| {
            let below = (0..).map(|k| own + ROW + FINE as i32 + k * ROW / 4);
            below.take(60).find(|base| free(base, &taken)).unwrap_or(own + ROW)
        });
        taken.push(base);
        offsets.push(base - own);
    }
    offsets
}

/// Step numbers over the plot, each in the lowest row in which it does not run into another.
fn rows(course: &Course) -> Vec<(i32, f64, String)> {
    let width = f64::from(WIDTH - LEFT - RIGHT);
    let mut ends = [f64::NEG_INFINITY; 3];
    let mut placed = Vec::new();
    for mark in &course.marks {
        let middle = 0.5 * (course.across.share(mark.from) + course.across.share(mark.to));
        let half = 0.5 * CHARACTER * (mark.name.len() as f64 + 0.8) / width;
        // Where neither row has room the lower one is shared with the number before: it is left out, not overprinted.
        if let Some(row) = (0..ends.len()).find(|row| ends[*row] <= middle - half) {
            ends[row] = middle + half;
            placed.push((row as i32, middle, mark.name.clone()));
        }
    }
    placed
}
