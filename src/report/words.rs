//! Figures and names as they are printed everywhere.
//!
//! A figure keeps together over the end of a line: the space inside it is a no-break space here, and the renderers
//! turn it back into an ordinary one after they have broken the lines.

use crate::plan::Pair;
use crate::quantity::{Direction, Quantity, Time, duration, exact, show};

/// Stands for a space at which a line is not broken.
pub(super) const NO_BREAK: char = '\u{a0}';

/// Text whose spaces are kept together.
pub(super) fn glued(text: &str) -> String {
    text.replace(' ', "\u{a0}")
}

/// A figure that must not be shown lower than it was computed.
pub(super) fn up<Q: Quantity>(quantity: Q) -> String {
    glued(&show(quantity, Direction::Up))
}

/// A margin, a rating or an allowed value, which must not be shown higher than it is.
pub(super) fn down<Q: Quantity>(quantity: Q) -> String {
    glued(&show(quantity, Direction::Down))
}

/// A value that a person typed, as it stands.
pub(super) fn typed<Q: Quantity>(quantity: Q) -> String {
    glued(&exact(quantity))
}

/// A time that must not be shown shorter.
pub(super) fn time(time: Time) -> String {
    glued(&duration(time, Direction::Up))
}

/// The start of something to beware of, which must not be shown later.
pub(super) fn early(time: Time) -> String {
    glued(&duration(time, Direction::Down))
}

/// A time in whole units, such as one that was typed or that people keep: `5 s` rather than `5.00 s`.
pub(super) fn whole(time: Time) -> String {
    let text = duration(time, Direction::Up);
    match text.split_once('.').and_then(|(whole, rest)| Some((whole, rest.split_once(' ')?))) {
        Some((whole, (fraction, unit))) if fraction.trim_matches('0').is_empty() => glued(&format!("{whole} {unit}")),
        _ => glued(&text),
    }
}

/// A wait, or `never`.
pub(super) fn wait(wait: Option<Time>) -> String {
    wait.map_or_else(|| "never".into(), time)
}

/// A pair of nodes.
pub(super) fn pair(pair: &Pair) -> String {
    format!("{}\u{a0}-\u{a0}{}", pair[0], pair[1])
}

/// `1 limit`, `2 limits`.
pub(super) fn count(number: usize, one: &str, many: &str) -> String {
    format!("{number}\u{a0}{}", if number == 1 { one } else { many })
}

/// `A`, `A and B`, `A, B and C`.
pub(super) fn list(names: &[String]) -> String {
    match names {
        [] => String::new(),
        [one] => one.clone(),
        [head @ .., last] => format!("{} and {last}", head.join(", ")),
    }
}

/// A text from outside on one line, without anything that a terminal would act on: control characters and those
/// that turn the direction of writing become a visible replacement.
pub(super) fn clean(text: &str) -> String {
    let shown = |c: char| match c {
        '\n' | '\r' | '\t' => ' ',
        '\u{200e}' | '\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2066}'..='\u{2069}' | '\u{feff}' => '\u{fffd}',
        c if c.is_control() => '\u{fffd}',
        c => c,
    };
    text.trim_end().chars().map(shown).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_a_terminal_would_act_on_is_replaced() {
        assert_eq!(clean("a\u{1b}[31mb\tc\nd\u{202e}\u{7}"), "a\u{fffd}[31mb c d\u{fffd}\u{fffd}");
    }

    #[test]
    fn a_whole_time_has_no_zeros_behind_a_point() {
        let texts = [5.0, 0.5, 47.25, 300.0, 0.0].map(|s| whole(Time::from_si(s)));
        assert_eq!(texts.map(|t| t.replace(NO_BREAK, " ")), ["5 s", "500 ms", "47.3 s", "5 min", "0 s"]);
    }

    #[test]
    fn names_are_joined_as_in_a_sentence() {
        let names = |n: &[&str]| list(&n.iter().map(|s| s.to_string()).collect::<Vec<_>>());
        assert_eq!(names(&["P", "N"]), "P and N");
        assert_eq!(names(&["A", "B", "C"]), "A, B and C");
        assert_eq!(names(&[]), "");
    }
}
