//! An entry of a list in the text of a bank file replaced by others. Every other character is kept, and comments inside the
//! entry are put above what replaces it.

use super::insert::{end_of, first_char};
use super::source::Source;
use super::tree::{Content, Node};

/// The text with `texts` in place of the entry of this id in a list. `None` where it is not found, or is written in a way
/// that this does not change. What comes out is only a proposal: the caller reads it back.
pub(super) fn entry(source: &Source, tree: &Node, list: &str, id: &str, texts: &[String]) -> Option<String> {
    let Content::Mapping(top) = &tree.content else { return None };
    let (key, list) = tree.get(list)?;
    let Content::Sequence(entries) = &list.content else { return None };
    let is =
        |node: &Node| matches!(&node.get("id")?.1.content, Content::Scalar { text, .. } if text == id).then_some(());
    let at = entries.iter().position(|node| is(node).is_some())?;
    let entry = entries.get(at)?;
    let lines: Vec<&str> = source.text.lines().collect();
    if first_char(&lines, entry.span.line, entry.span.column) == Some('{') {
        let in_brackets = first_char(&lines, list.span.line, list.span.column) == Some('[');
        return in_braces(&lines, (entry.span.line, entry.span.column), texts, in_brackets);
    }
    let first = lines.get(entry.span.line - 1)?;
    if !first.trim_start().starts_with('-') {
        return None;
    }
    let next_entry = entries.get(at + 1).map(|node| node.span.line);
    let next_key = top.iter().map(|(k, _)| k.span.line).filter(|line| *line > key.span.line).min();
    let next = next_entry.or(next_key).map_or(lines.len(), |line| line - 1);
    let (start, end) = (entry.span.line - 1, end_of(&lines, next));
    let indent = " ".repeat(first.len() - first.trim_start().len());
    let comments = lines.get(start..end)?.iter().filter_map(|line| comment(line)).map(|text| format!("{indent}{text}"));
    let parts = texts.iter().map(|text| format!("{indent}- {text}"));
    let before = lines.get(..start)?.iter().map(|line| line.to_string());
    let after = lines.get(end..)?.iter().map(|line| line.to_string());
    Some(before.chain(comments).chain(parts).chain(after).map(|line| line + "\n").collect())
}

/// An entry in braces that begins at a line and a column, both from 1.
fn in_braces(lines: &[&str], (line, column): (usize, usize), texts: &[String], in_brackets: bool) -> Option<String> {
    let (last, close) = closing(lines, line - 1, column - 1)?;
    let first = lines.get(line - 1)?;
    let head: String = first.chars().take(column - 1).collect();
    let tail: String = lines.get(last)?.chars().skip(close + 1).collect();
    let mut out: Vec<String> = lines.get(..line - 1)?.iter().map(|line| line.to_string()).collect();
    if in_brackets {
        out.push(format!("{head}{}{tail}", texts.join(", ")));
    } else {
        let dash = head.find('-')?;
        out.push(format!("{head}{}{tail}", texts.first()?));
        out.extend(texts.iter().skip(1).map(|text| format!("{}- {text}", " ".repeat(dash))));
    }
    out.extend(lines.get(last + 1..)?.iter().map(|line| line.to_string()));
    Some(out.into_iter().map(|line| line + "\n").collect())
}

/// Line and column, from 0, of the brace that closes the one at a line and a column; `None` where a comment lies between
/// them.
fn closing(lines: &[&str], line: usize, column: usize) -> Option<(usize, usize)> {
    let mut depth = 0usize;
    let mut quote: Option<char> = None;
    for (number, text) in lines.iter().enumerate().skip(line) {
        let mut before = ' ';
        let mut escaped = false;
        let skipped = if number == line { column } else { 0 };
        for (at, c) in text.chars().enumerate().skip(skipped) {
            match (quote, c) {
                (Some('"'), '\\') if !escaped => {
                    escaped = true;
                    before = c;
                    continue;
                }
                (Some(open), c) if c == open && !escaped => quote = None,
                (Some(_), _) => {}
                // A quote begins only where a value does; elsewhere it is a letter.
                (None, '"' | '\'') if matches!(before, ' ' | '{' | '[' | ',' | ':') => quote = Some(c),
                (None, '#') if before == ' ' => return None,
                (None, '{') => depth += 1,
                (None, '}') => {
                    depth -= 1;
                    if depth == 0 {
                        return Some((number, at));
                    }
                }
                _ => {}
            }
            escaped = false;
            before = c;
        }
    }
    None
}

/// The comment at a line's end, from its `#` on.
pub(super) fn comment(line: &str) -> Option<&str> {
    let mut quote = None;
    let mut before = ' ';
    for (at, c) in line.char_indices() {
        match (quote, c) {
            (None, '#') if before.is_whitespace() => return line.get(at..).map(str::trim_end),
            (None, '"' | '\'') if !before.is_alphanumeric() => quote = Some(c),
            (Some(open), c) if open == c && before != '\\' => quote = None,
            _ => {}
        }
        before = c;
    }
    None
}

#[cfg(test)]
mod exchanged {
    use crate::bank::description::Resistor;
    use crate::bank::description::{Rating, Role};
    use crate::bank::file::with_resistor_exchanged;
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
            switched: None,
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

#[cfg(test)]
mod groups {
    use crate::bank::description::Capacitor;
    use crate::bank::file::with_groups;

    fn groups(text: &str) -> Vec<Capacitor> {
        let (bank, _) = super::super::read("bank.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}"));
        let c = bank.description().capacitors.iter().find(|c| c.id == "C1").expect("it is there").clone();
        let node = |at: usize| ["P", "M", "N"][at].to_string();
        let one = |k: usize| Capacitor {
            id: format!("C1.{}", k + 1),
            across: [node(k), node(k + 1)],
            series: 1,
            ..c.clone()
        };
        vec![one(0), one(1)]
    }

    fn with(text: &str) -> Result<String, String> {
        with_groups("bank.yaml", text.as_bytes(), "C1", &groups(text))
    }

    const HEAD: &str = "# A bank.\nebbvolt: 1\ntag: X\ntouch_voltage: 50 V\ncharged_to: 800 V\n";

    #[test]
    fn an_entry_in_lines_of_its_own_gives_way_and_every_comment_stays() {
        let text = format!(
            "{HEAD}capacitors:\n  # the bus\n  - id: C1   # \u{b5}: two in series\n    value: 470 uF\n    # inside\n    units: \
             {{series: 2}}\n    rated: 450 V # each\n  # the filter\n  - {{id: C2, value: 1 uF}}\n# the end\n"
        );
        let after = with(&text).unwrap_or_else(|e| panic!("{e}"));
        for kept in
            ["# A bank.", "  # the bus", "# \u{b5}: two in series", "# inside", "# each", "  # the filter", "# the end"]
        {
            assert!(after.contains(kept), "{kept}: {after}");
        }
        assert!(
            after.contains("  - {id: C1.1, value: 470 uF, across: [P, M], rated: 450 V}\n  - {id: C1.2"),
            "{after}"
        );
        assert!(!after.replace("two in series", "").contains("series"), "{after}");
    }

    #[test]
    fn an_entry_in_braces_gives_way_in_its_line() {
        for (list, kept) in [
            (
                "\n  - {id: C1, value: 470 uF, units: {series: 2}, rated: 450 V}   # the bus\n  - {id: C2, value: 1 uF}\n",
                "# the bus",
            ),
            (" [{id: C2, value: 1 uF}, {id: C1, value: 470 uF, units: {series: 2}}] # all\n", "}] # all"),
            (
                "\n- {id: C1, value: 470 uF,\n   dielectric: 'aluminium-electrolytic', units: {series: 2}} # two lines\n",
                "# two lines",
            ),
            (" [{id: \"C1\", value: 470 uF, units: {series: 2}}]\r\n", "]\r\n"),
        ] {
            let text = format!("{HEAD}capacitors:{list}notes: 'a }} brace'\n");
            let after = with(&text).unwrap_or_else(|e| panic!("{e}\n{text}"));
            assert!(after.contains(kept) && after.contains("C1.2") && after.contains("a } brace"), "{after}");
        }
    }

    #[test]
    fn an_entry_that_can_not_be_told_apart_is_refused_with_what_to_do() {
        for list in [
            " [{id: C1, # inside\n  value: 470 uF, units: {series: 2}}]\n",
            "\n  -\n    id: C1\n    value: 1 mF\n    units: {series: 2}\n",
        ] {
            let refused = with(&format!("{HEAD}capacitors:{list}"));
            assert!(refused.as_ref().is_err_and(|e| e.contains("--part")), "{refused:?}");
        }
    }
}
