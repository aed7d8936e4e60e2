//! Where the pieces of a notice stand. SVG breaks no lines, so lines are broken here, by widths that are on the
//! wide side for any common sans-serif font; all in millimetre.

use super::content::Content;
use super::{LabelError, symbol};
use maud::{Markup, html};

/// Lower-case letters of this font size, in millimetre, can be read at arm's length (about 5 pt).
const SMALLEST: f64 = 1.75;

/// Font sizes relative to the text.
const FIGURE: f64 = 3.4;
const HAZARD: f64 = 1.25;
const FOOT: f64 = 0.85;

/// Distance of lines over the font size.
const LEADING: f64 = 1.2;

/// A drawn notice, its top left corner at the origin.
pub(super) struct Drawn {
    pub markup: Markup,
}

/// A line of text with its style.
struct Line {
    text: String,
    size: f64,
    bold: bool,
    /// Room above it.
    above: f64,
}

/// Draws a notice in the largest type that fits.
pub(super) fn draw(content: &Content, width: f64, height: f64) -> Result<Drawn, LabelError> {
    let edge = 0.012 * width.min(height) + 0.4;
    let band = (0.17 * height).clamp(6.0, 30.0);
    let inner = 0.035 * width.min(height) + 0.6;
    // A wide notice has the sign beside its text, a tall one above it.
    let beside = width > 1.15 * height;
    let sign = if beside { (0.27 * width).min(0.62 * (height - band)) } else { (0.4 * width).min(0.22 * height) };
    let left = if beside { edge + inner + sign + inner } else { edge + inner };
    let top = band + inner + if beside { 0.0 } else { 0.88 * sign + 0.5 * inner };
    let (room, depth) = (width - edge - inner - left, height - edge - inner - top);
    let mut size = depth / 9.0;
    let lines = loop {
        if size < SMALLEST {
            return Err(LabelError::TooSmall);
        }
        if let Some(lines) = set(content, size, room).filter(|lines| total(lines) <= depth) {
            break lines;
        }
        size *= 0.97;
    };
    let sign_x = if beside { edge + inner } else { 0.5 * (width - sign) };
    let sign_y = if beside { top + 0.5 * (depth - 0.88 * sign) } else { band + inner };
    let markup = html! {
        rect x="0" y="0" width=(width) height=(height) fill="#fff" {}
        (panel(content.signal, width, band))
        (symbol::electricity(sign_x, sign_y, sign))
        (text(&lines, left, top + 0.5 * (depth - total(&lines)).min(inner)))
        rect x=(0.5 * edge) y=(0.5 * edge) width=(width - edge) height=(height - edge)
            fill="none" stroke="#000" stroke-width=(format!("{edge:.3}")) {}
    };
    Ok(Drawn { markup })
}

/// The signal word on its panel: the colours of ISO 3864 and ANSI Z535, the word for those who can't tell them.
fn panel(word: &str, width: f64, band: f64) -> Markup {
    let (ground, ink) = if word == "DANGER" { ("#b00020", "#fff") } else { ("#ff8c1a", "#000") };
    let size = (0.62 * band).min(0.7 * width / advance(word, 1.0, true));
    let mark = 0.6 * band;
    let whole = 1.2 * mark + advance(word, size, true);
    let x = 0.5 * (width - whole);
    html! {
        rect x="0" y="0" width=(width) height=(format!("{band:.3}")) fill=(ground) {}
        rect x="0" y=(format!("{:.3}", band - 0.3)) width=(width) height="0.6" fill="#000" {}
        (symbol::alert(x, 0.2 * band, mark, ground, ink))
        text x=(format!("{:.3}", x + 1.35 * mark)) y=(format!("{:.3}", 0.5 * band + 0.36 * size))
            font-family=(FONT) font-weight="bold" font-size=(format!("{size:.3}")) fill=(ink) { (word) }
    }
}

const FONT: &str = "'Liberation Sans', Arial, Helvetica, sans-serif";

/// The lines at a size, or `None` where the figure is too wide for it.
fn set(content: &Content, size: f64, room: f64) -> Option<Vec<Line>> {
    // The figure is read from a distance: it stands on one line, as large as that allows.
    let large = FIGURE.min(room / advance(&content.figure, size, true));
    if large < HAZARD {
        return None;
    }
    let mut lines = Vec::new();
    let mut add = |text: &str, factor: f64, bold: bool, above: f64| {
        for (i, text) in broken(text, factor * size, bold, room).into_iter().enumerate() {
            lines.push(Line { text, size: factor * size, bold, above: if i == 0 { above * size } else { 0.0 } });
        }
    };
    add(&content.hazard, HAZARD, true, 0.0);
    add(&content.lead, 1.0, false, 0.5);
    add(&content.figure, 0.999 * large, true, 0.0);
    content.then.iter().for_each(|text| add(text, 1.0, true, 0.15));
    content.failed.iter().for_each(|text| add(text, 1.0, false, 0.35));
    add(&content.foot, FOOT, false, 0.5);
    Some(lines)
}

fn total(lines: &[Line]) -> f64 {
    lines.iter().map(|line| line.above + LEADING * line.size).sum()
}

fn text(lines: &[Line], x: f64, top: f64) -> Markup {
    let mut y = top;
    let mut placed = Vec::with_capacity(lines.len());
    for line in lines {
        y += line.above + LEADING * line.size;
        placed.push((y - 0.3 * line.size, line));
    }
    html! {
        g font-family=(FONT) fill="#000" {
            @for (y, line) in placed {
                text x=(format!("{x:.3}")) y=(format!("{y:.3}")) font-size=(format!("{:.3}", line.size))
                    font-weight=(if line.bold { "bold" } else { "normal" }) { (line.text) }
            }
        }
    }
}

/// Lines of at most `room`, broken at spaces; a word that is longer is broken inside.
fn broken(text: &str, size: f64, bold: bool, room: f64) -> Vec<String> {
    let fits = |line: &str| advance(line, size, bold) <= room;
    let mut lines: Vec<String> = Vec::new();
    let mut line = String::new();
    for word in text.split(' ').filter(|word| !word.is_empty()) {
        let longer = if line.is_empty() { word.to_string() } else { format!("{line} {word}") };
        if fits(&longer) {
            line = longer;
            continue;
        }
        if !line.is_empty() {
            lines.push(std::mem::take(&mut line));
        }
        for c in word.chars() {
            if !line.is_empty() && !fits(&format!("{line}{c}")) {
                lines.push(std::mem::take(&mut line));
            }
            line.push(c);
        }
    }
    lines.push(line);
    lines
}

/// How wide a text is, at most. Shares of the font size: those of common sans-serif fonts, taken on the wide side.
fn advance(text: &str, size: f64, bold: bool) -> f64 {
    let of = |c: char| match c {
        'i' | 'j' | 'l' | '.' | ',' | ':' | ';' | '|' | '\'' | '!' => 0.32,
        'f' | 't' | 'r' | '(' | ')' | '-' | ' ' | '/' | '\u{a0}' => 0.42,
        'm' | 'w' | 'M' | 'W' | '%' | '@' => 0.98,
        'A'..='Z' => 0.78,
        ' '..='~' => 0.6,
        'À'..='ɏ' | 'Ͱ'..='Ͽ' | 'Ѐ'..='ӿ' => 0.8,
        // The rest of the world's letters, as wide as they are high.
        _ => 1.05,
    };
    text.chars().map(of).sum::<f64>() * size * if bold { 1.06 } else { 1.0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_line_is_wider_than_its_room_whatever_the_words() {
        for text in ["wait at least five minutes", &"x".repeat(300), &"W".repeat(90), "a \u{6cf5}\u{6cf5}\u{6cf5} b"] {
            let lines = broken(text, 3.0, true, 40.0);
            assert!(lines.iter().all(|line| advance(line, 3.0, true) <= 40.0), "{lines:?}");
            let kept: String = lines.concat();
            assert_eq!(kept.replace(' ', ""), text.replace(' ', ""));
        }
    }
}
