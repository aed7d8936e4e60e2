//! The notice on the cabinet: hazard, delay and the instruction to test, as SVG in millimetres.
//!
//! Laid out after the signal word panels of ISO 3864 and ANSI Z535, with the electricity warning of ISO 7010 drawn
//! from its description. A notice that does not fit its size is refused: nothing on it may be cut.

mod content;
mod layout;
mod symbol;

use super::sheet::Paper;
use crate::plan::Plan;
use crate::quantity::Length;
use layout::Drawn;
use maud::{Markup, html};
use std::fmt;
use uom::si::length::millimeter;

/// Width and height of a notice.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LabelSize {
    width: f64,
    height: f64,
}

/// Smallest and largest side of a notice in millimetre.
const SIDES: (f64, f64) = (30.0, 400.0);

/// Margin of a page, and the gap between two notices on it, in millimetre.
const MARGIN: f64 = 10.0;
const GAP: f64 = 4.0;

/// Why there is no notice.
#[derive(Debug, Clone, PartialEq)]
pub enum LabelError {
    /// Parts of the bank are not computed, so there is no delay to rely on.
    Incomplete,
    /// A side is too short or too long.
    Side {
        /// Shortest and longest side in millimetre.
        from: f64,
        /// See `from`.
        to: f64,
    },
    /// The text does not fit at a size that can be read.
    TooSmall,
    /// More notices than fit on one page.
    TooMany {
        /// How many fit.
        fit: usize,
    },
}

impl fmt::Display for LabelError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            LabelError::Incomplete => {
                write!(f, "INCOMPLETE: the file has parts that this version does not compute, so there is no notice")
            }
            LabelError::Side { from, to } => write!(f, "each side of a notice is {from} mm to {to} mm"),
            LabelError::TooSmall => {
                write!(f, "the text does not fit at a size that can be read; choose a larger notice")
            }
            LabelError::TooMany { fit: 0 } => write!(f, "a notice of this size does not fit on the page"),
            LabelError::TooMany { fit } => write!(f, "{fit} notices of this size fit on one page; ask for fewer"),
        }
    }
}

impl std::error::Error for LabelError {}

impl LabelSize {
    /// A size of `width` by `height`.
    ///
    /// # Errors
    /// Where a side is under 30 mm or over 400 mm.
    pub fn new(width: Length, height: Length) -> Result<Self, LabelError> {
        let (width, height) = (width.get::<millimeter>(), height.get::<millimeter>());
        let fits = |side: f64| side >= SIDES.0 * (1.0 - 1e-9) && side <= SIDES.1 * (1.0 + 1e-9);
        if fits(width) && fits(height) {
            Ok(LabelSize { width, height })
        } else {
            Err(LabelError::Side { from: SIDES.0, to: SIDES.1 })
        }
    }
}

impl Default for LabelSize {
    /// 120 mm by 80 mm.
    fn default() -> Self {
        LabelSize { width: 120.0, height: 80.0 }
    }
}

/// The notice of one bank.
///
/// # Errors
/// Where the plan is incomplete, or the text does not fit.
pub fn label_svg(plan: &Plan, size: LabelSize) -> Result<String, LabelError> {
    let drawn = drawn(plan, size)?;
    let alternative = format!("Notice for {}", super::words::clean(&plan.bank.tag));
    Ok(file(size.width, size.height, &alternative, &html! { (drawn.markup) }))
}

/// Notices of several banks on one page, side by side and under each other, in their order.
///
/// # Errors
/// Where a plan is incomplete, a text does not fit, or the page has no room for all.
pub fn labels_page_svg(plans: &[&Plan], size: LabelSize, paper: Paper) -> Result<String, LabelError> {
    let (width, height) = match paper {
        Paper::A4 => (210.0, 297.0),
        Paper::Letter => (215.9, 279.4),
    };
    let along = |whole: f64, one: f64| ((whole - 2.0 * MARGIN + GAP + 1e-9) / (one + GAP)).floor().max(0.0) as usize;
    let (columns, rows) = (along(width, size.width), along(height, size.height));
    if plans.len() > columns * rows {
        return Err(LabelError::TooMany { fit: columns * rows });
    }
    let mut notices = Vec::new();
    for (i, plan) in plans.iter().enumerate() {
        let (column, row) = ((i % columns) as f64, (i / columns) as f64);
        let place = (MARGIN + column * (size.width + GAP), MARGIN + row * (size.height + GAP));
        notices.push((place, drawn(plan, size)?));
    }
    let tags: Vec<String> = plans.iter().map(|plan| super::words::clean(&plan.bank.tag)).collect();
    let body = html! {
        @for ((x, y), notice) in &notices {
            g transform=(format!("translate({x} {y})")) { (notice.markup) }
        }
    };
    Ok(file(width, height, &format!("Notices for {}", super::words::list(&tags)), &body))
}

fn drawn(plan: &Plan, size: LabelSize) -> Result<Drawn, LabelError> {
    if !plan.not_computed.is_empty() || plan.waits.is_empty() {
        return Err(LabelError::Incomplete);
    }
    layout::draw(&content::of(plan), size.width, size.height)
}

fn file(width: f64, height: f64, alternative: &str, body: &Markup) -> String {
    let markup = html! {
        svg xmlns="http://www.w3.org/2000/svg" lang="en" role="img" aria-label=(alternative)
            width=(format!("{width}mm")) height=(format!("{height}mm")) viewBox=(format!("0 0 {width} {height}")) {
            title { (alternative) }
            (body)
        }
    };
    let mut text = markup.into_string();
    text.push('\n');
    text
}
