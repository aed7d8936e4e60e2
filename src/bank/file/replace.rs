//! A capacitor in the text of a bank file replaced by the capacitors that its groups in series are. Every other character
//! is kept, and comments inside the entry are put above what replaces it.
//!
//! The text that comes out is read again and has to describe the bank with the groups, or it is not given out at all.

use super::insert::{end_of, first_char, restored};
use super::log::Log;
use super::source::Source;
use super::tree::{self, Content, Node};
use super::write;
use crate::bank::description::Capacitor;

/// The text of a bank file with `groups` in place of the capacitor `id`.
///
/// # Errors
/// A sentence that says why it can't be replaced, and what to do instead.
pub fn with_groups(name: &str, bytes: &[u8], id: &str, groups: &[Capacitor]) -> Result<String, String> {
    let by_hand = |why: &str| format!("{why}; `--part` prints the parts, to be put in by hand");
    let mut log = Log::default();
    let source = Source::new(name, bytes).map_err(|e| by_hand(&e.text))?;
    let tree = tree::parse(&source, &mut log).ok_or_else(|| by_hand("the file can't be read"))?;
    let text = replaced(&source, &tree, id, groups).ok_or_else(|| {
        by_hand(&format!("the entry of {id} stands neither in lines of its own nor in braces without comments"))
    })?;
    let mut expected =
        super::read(name, bytes).map_err(|_| by_hand("the file is no bank file"))?.0.description().clone();
    if let Some(at) = expected.capacitors.iter().position(|c| c.id == id) {
        expected.capacitors.splice(at..=at, groups.iter().cloned());
    }
    match super::read(name, text.as_bytes()) {
        Ok((bank, _)) if *bank.description() == expected => Ok(restored(bytes, text)),
        _ => Err(by_hand("the file with the groups in it does not read as the bank with the groups")),
    }
}

fn replaced(source: &Source, tree: &Node, id: &str, groups: &[Capacitor]) -> Option<String> {
    let Content::Mapping(top) = &tree.content else { return None };
    let (key, list) = tree.get("capacitors")?;
    let Content::Sequence(entries) = &list.content else { return None };
    let is =
        |node: &Node| matches!(&node.get("id")?.1.content, Content::Scalar { text, .. } if text == id).then_some(());
    let at = entries.iter().position(|node| is(node).is_some())?;
    let entry = entries.get(at)?;
    let lines: Vec<&str> = source.text.lines().collect();
    let texts: Vec<String> = groups.iter().map(write::capacitor).collect();
    if first_char(&lines, entry.span.line, entry.span.column) == Some('{') {
        let in_brackets = first_char(&lines, list.span.line, list.span.column) == Some('[');
        return in_braces(&lines, (entry.span.line, entry.span.column), &texts, in_brackets);
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

/// The comment of a line, from its `#` on.
fn comment(line: &str) -> Option<&str> {
    let mut quote: Option<char> = None;
    let mut before = ' ';
    for (at, c) in line.char_indices() {
        match (quote, c) {
            (Some(open), c) if c == open => quote = None,
            (Some(_), _) => {}
            (None, '"' | '\'') if matches!(before, ' ' | '{' | '[' | ',' | ':') => quote = Some(c),
            (None, '#') if before == ' ' => return line.get(at..),
            _ => {}
        }
        before = c;
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;

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
