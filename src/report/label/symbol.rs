//! The signs of a notice, drawn here from the descriptions of the standards.

use maud::{Markup, html};

/// The electricity warning after ISO 7010 W012: a black lightning arrow on a yellow triangle with a black edge. `side`
/// is the length of the triangle's base; the top left corner of its box stands at `x`, `y`.
pub(super) fn electricity(x: f64, y: f64, side: f64) -> Markup {
    // Drawn on a triangle of base 100 and height 88.
    let scale = side / 100.0;
    html! {
        g transform=(format!("translate({x:.3} {y:.3}) scale({scale:.5})")) {
            path d="M50 5 L95 83 L5 83 Z" fill="#ffd800" stroke="#000" stroke-width="8" stroke-linejoin="round" {}
            // A bolt in three strokes that ends in an arrow head pointing down.
            path d="M55 24 L40 50 L51 50 L45.2 63.5 L40.5 61.5 L42 78 L55 67.6 L50.3 65.6 L61.5 43.5 L49.6 43.5 L59 24 Z" fill="#000" {}
        }
    }
}

/// The alert mark beside a signal word: a triangle with an exclamation mark, in the colours that stand out from the
/// panel.
pub(super) fn alert(x: f64, y: f64, height: f64, mark: &str, ground: &str) -> Markup {
    let scale = height / 88.0;
    html! {
        g transform=(format!("translate({x:.3} {y:.3}) scale({scale:.5})")) {
            path d="M50 2 L99 86 L1 86 Z" fill=(ground) stroke=(ground) stroke-width="2" stroke-linejoin="round" {}
            path d="M45 30 L55 30 L53 62 L47 62 Z" fill=(mark) {}
            circle cx="50" cy="72" r="5.5" fill=(mark) {}
        }
    }
}
