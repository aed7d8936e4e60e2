//! A resistor of a bank file exchanged for another of the same name, in its place: what else stands in the file stays,
//! and so do the comments that stood beside the old one's keys.

use super::insert::{by_hand, given_out};
use super::log::Log;
use super::source::Source;
use super::tree::{self, Content, Node};
use super::write;
use crate::bank::description::Resistor;

/// The text of a bank file with the resistor of this id in the place of the one that has it. Comments between the old
/// one's keys come to stand before the new one, each in a line of its own.
///
/// # Errors
/// A sentence that says why the part can't be placed, and what to do instead.
pub fn with_resistor_exchanged(name: &str, bytes: &[u8], resistor: &Resistor) -> Result<String, String> {
    let mut log = Log::default();
    let source = Source::new(name, bytes).map_err(|e| by_hand(&e.text))?;
    let tree = tree::parse(&source, &mut log).ok_or_else(|| by_hand("the file can't be read"))?;
    let text = exchanged(&source, &tree, resistor).ok_or_else(|| {
        by_hand(&format!("the entry of `{}` can't be told apart from what is around it", resistor.id))
    })?;
    given_out(name, bytes, text, |before| {
        let mut after = before.clone();
        after.resistors.iter_mut().filter(|r| r.id == resistor.id).for_each(|r| *r = resistor.clone());
        after
    })
}

/// The new text; `None` where the entry is not found or stands in no form that is known here.
fn exchanged(source: &Source, tree: &Node, resistor: &Resistor) -> Option<String> {
    let (key, list) = tree.get("resistors")?;
    let Content::Sequence(entries) = &list.content else { return None };
    let is_it = |node: &Node| match node.get("id").map(|(_, id)| &id.content) {
        Some(Content::Scalar { text, .. }) => *text == resistor.id,
        _ => false,
    };
    let at = entries.iter().position(|entry| is_it(entry))?;
    let start = entries[at].span;
    let text = write::resistor(resistor);
    let lines: Vec<&str> = source.text.lines().collect();
    if lines.get(start.line - 1)?.chars().nth(start.column - 1)? == '{' {
        return in_braces(source, start.line, start.column, &text);
    }
    let first = lines.get(start.line - 1)?;
    let indent = first.len() - first.trim_start().len();
    if !first.trim_start().starts_with('-') {
        return None;
    }
    let Content::Mapping(top) = &tree.content else { return None };
    let next = entries.get(at + 1).map(|e| e.span.line);
    let next = next.or_else(|| top.iter().map(|(k, _)| k.span.line).filter(|line| *line > key.span.line).min());
    let end = super::insert::end_of(&lines, next.map_or(lines.len(), |line| line - 1));
    let (before, old, after) = (&lines[..start.line - 1], lines.get(start.line - 1..end)?, &lines[end..]);
    let comments = old.iter().filter_map(|line| Some(format!("{}{}\n", " ".repeat(indent), comment(line)?)));
    let whole = |line: &&str| format!("{line}\n");
    let new = format!("{}- {text}\n", " ".repeat(indent));
    Some(before.iter().map(whole).chain(comments).chain([new]).chain(after.iter().map(whole)).collect())
}

/// The comment of a line, from its `#` on.
fn comment(line: &str) -> Option<&str> {
    let mut quote = None;
    let mut blank = true;
    for (at, c) in line.char_indices() {
        match (quote, c) {
            (Some(q), c) if c == q => quote = None,
            (Some(_), _) => {}
            (None, '#') if blank => return line.get(at..).map(str::trim_end),
            (None, '"' | '\'') => quote = Some(c),
            _ => {}
        }
        blank = c.is_whitespace();
    }
    None
}

/// The text with what stands in braces from this place on (line and column from 1) replaced. A comment inside the
/// braces would be lost: such an entry is refused.
fn in_braces(source: &Source, line: usize, column: usize, new: &str) -> Option<String> {
    let start: usize = source.text.split_inclusive('\n').take(line - 1).map(str::len).sum();
    let own = source.text.get(start..)?;
    let start = start + own.char_indices().nth(column - 1)?.0;
    let (mut depth, mut quote, mut blank) = (0usize, None, false);
    for (at, c) in source.text.get(start..)?.char_indices() {
        match (quote, c) {
            (Some(q), c) if c == q => quote = None,
            (Some(_), _) => {}
            (None, '#') if blank => return None,
            (None, '"' | '\'') => quote = Some(c),
            (None, '{' | '[') => depth += 1,
            (None, '}' | ']') => {
                depth = depth.checked_sub(1)?;
                if depth == 0 {
                    let (before, after) = (source.text.get(..start)?, source.text.get(start + at + 1..)?);
                    return Some(format!("{before}{new}{after}"));
                }
            }
            _ => {}
        }
        blank = c.is_whitespace();
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bank::description::{Rating, Role};
    use crate::quantity::{Power, Quantity, Resistance, Tolerance};

    const HEAD: &str = "# A bank.\nebbvolt: 1\ntag: X\ntouch_voltage: 50 V\ncharged_to: 565 V\ncapacitors: [{id: C1, value: 1 \
                        mF}]\n";

    fn tool() -> Resistor {
        Resistor {
            id: "T1".into(),
            role: Role::Tool,
            value: Resistance::from_si(470.0),
            tolerance: Some(Tolerance::NONE),
            across: ["P".into(), "N".into()],
            series: 1,
            parallel: 2,
            rating: Rating { power: Some(Power::from_si(100.0)), ..Rating::default() },
            tempco: None,
            ageing: None,
            phases: None,
        }
    }

    fn with(text: &str) -> String {
        with_resistor_exchanged("bank.yaml", text.as_bytes(), &tool()).unwrap_or_else(|e| panic!("{e}\n{text}"))
    }

    #[test]
    fn an_entry_in_lines_of_its_own_gives_way_and_its_comments_stay() {
        let text = format!(
            "{HEAD}resistors:\n  - {{id: R1, role: bleeder, value: 1 Mohm}} # bleeder\n  # The tool.\n  - id: T1   # by \
             hand\n    role: tool\n    value: 1 kohm\n    rating:\n      power: 50 W   # at 40 '#'\n      # nothing more\n\n  # \
             The strap.\n  - {{id: ST1, role: strap, value: 10 mohm}}\nlimits: [{{id: a, voltage: 50 V, within: 1 h}}]\n"
        );
        let after = with(&text);
        let expected = "  # The tool.\n  # by hand\n  # at 40 '#'\n  - {id: T1, role: tool, value: 470 ohm, tolerance: 0 %, \
                        across: [P, N], array: {parallel: 2}, rating: {power: 100 W}}\n";
        assert!(after.contains(expected), "{after}");
        for kept in ["# bleeder", "# nothing more", "# The strap.\n  - {id: ST1", "# A bank.", "limits: [{id: a"] {
            assert!(after.contains(kept), "{kept}: {after}");
        }
        assert!(!after.contains("1 kohm"), "{after}");
    }

    #[test]
    fn an_entry_in_braces_gives_way_in_its_line() {
        for list in [
            "\n  - {id: T1, role: tool, value: 1 kohm, rating: {power: 50 W}}  # kept",
            " [{id: R1, role: bleeder, value: 1 Mohm}, {id: T1, role: tool, value: 1 kohm}]  # kept",
            " [{id: T1,\n   role: tool, value: 1 kohm}]  # kept",
        ] {
            let after = with(&format!("{HEAD}resistors:{list}\n"));
            assert!(after.contains("{id: T1, role: tool, value: 470 ohm") && after.contains("# kept"), "{after}");
            assert!(!after.contains("1 kohm"), "{after}");
        }
    }

    #[test]
    fn what_can_not_be_exchanged_is_refused_with_what_to_do() {
        let refused = |text: &str| with_resistor_exchanged("bank.yaml", text.as_bytes(), &tool());
        assert!(refused(HEAD).is_err_and(|e| e.contains("--part")));
        let comment = format!("{HEAD}resistors: [{{id: T1, # why\n   role: tool, value: 1 kohm}}]\n");
        assert!(refused(&comment).is_err_and(|e| e.contains("--part")));
    }
}
