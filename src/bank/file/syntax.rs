//! What is wrong with text that is no YAML, in words of the trade rather than of the grammar.

use super::brackets::never_closed;
use super::source::{Source, Span};
use crate::finding::Finding;
use saphyr_parser::ScanError;

/// The way out of nesting that is too deep.
pub(super) const DEPTH_HELP: &str = "a bank file needs fewer than ten levels; look for a bracket that is never closed";

const YAML: &str = "yaml-syntax";

/// The error of a text that the parser could not read.
pub(super) fn explain(source: &Source, error: &ScanError, max_depth: usize) -> Finding {
    let marker = error.marker();
    let span = Span { line: marker.line(), column: marker.col() + 1, length: 1 };
    let has = |part: &str| error.info().contains(part);
    if has("recursion limit") {
        let text = format!("values are nested more than {max_depth} deep here");
        return source.error("nested-too-deep", span, text, DEPTH_HELP);
    }
    if let Some(tab) = tab_near(source, span.line) {
        let text = "the line is indented with a tab";
        return source.error("tab-indentation", tab, text, "indent with spaces: YAML does not take tabs there");
    }
    if let Some((bracket, span)) = never_closed(source, span.line) {
        let closing = if bracket == '[' { ']' } else { '}' };
        let text = format!("this `{bracket}` is never closed");
        return source.error(YAML, span, text, format!("close it with `{closing}`"));
    }
    if has("expect ':'") || has("simple key") {
        return no_colon(source, span);
    }
    if has("mapping values are not allowed") && !source.line(span.line).chars().take(span.column - 1).any(|c| c == ':')
    {
        return indentation(source, span);
    }
    let (text, help) = words(error.info());
    source.error(YAML, span, text, help)
}

/// A tab in the indentation of the line in question or of the lines beside it, where the parser may have stopped.
fn tab_near(source: &Source, line: usize) -> Option<Span> {
    (line.saturating_sub(1).max(1)..=line + 1).find_map(|line| {
        let text = source.line(line);
        let indented = text.chars().take_while(|c| matches!(c, ' ' | '\t'));
        let column = indented.clone().position(|c| c == '\t')?;
        let blank = indented.count() == text.chars().count();
        (!blank).then_some(Span { line, column: column + 1, length: 1 })
    })
}

/// A line without `key: value`. The parser notices on the line after it.
fn no_colon(source: &Source, span: Span) -> Finding {
    let blank = |line: &usize| source.line(*line).trim().is_empty() || source.line(*line).trim().starts_with('#');
    let line = (1..span.line).rev().find(|line| !blank(line)).unwrap_or(span.line);
    let text = source.line(line);
    let body = text.trim();
    let indent = text.chars().take_while(|c| *c == ' ').count();
    if body.contains(": ") || body.ends_with(':') || body.starts_with('-') {
        return indentation(source, span);
    }
    let at = Span { line, column: indent + 1, length: body.chars().count() };
    let help = match body.split_once(':') {
        Some((key, value)) => format!("put a blank after the colon: `{key}: {value}`"),
        None => "write `key: value`".into(),
    };
    source.error(YAML, at, "this line has no key with a colon and a blank after it", help)
}

fn indentation(source: &Source, span: Span) -> Finding {
    let indent = source.line(span.line).chars().take_while(|c| *c == ' ').count();
    let at = Span { column: indent + 1, ..span };
    let help = "indent with spaces, and everything that belongs together by as many";
    source.error(YAML, at, "the indentation does not fit the lines above", help)
}

/// Text and help for what the parser says. Its own sentences are about its grammar; most slips in a bank file are of a
/// few kinds.
fn words(info: &str) -> (&'static str, &'static str) {
    let has = |part: &str| info.contains(part);
    if has("unknown anchor") {
        ("this alias repeats a value that is not above it", "write the value out, or put its anchor (`&name`) above")
    } else if has("mapping values are not allowed") || has("illegal placement of ':'") {
        ("a colon can't stand here", "put text with a colon in quotes, such as `title: \"Drive: DC bus\"`")
    } else if has("quoted scalar") {
        (
            "a text in quotes is not closed, or not written as YAML takes it",
            "close the quotes; inside double quotes, write a backslash as `\\\\`",
        )
    } else if has("flow") || has("bracket") || has("',' or") || has("expected ','") {
        (
            "a bracket here closes nothing, or a comma is missing",
            "give every bracket its partner, and put a comma between the entries",
        )
    } else if has("indent") || has("block") || has("document start") {
        (
            "the indentation does not fit the lines above",
            "indent with spaces, and everything that belongs together by as many",
        )
    } else if has("directive") || has("'%'") || has("unexpected character") || has("cannot start any token") {
        ("a value can't begin with this character", "put the value in quotes")
    } else if has("anchor") || has("tag") {
        ("`&`, `*` and `!` have a meaning of their own at the start of a value", "put the value in quotes")
    } else {
        (
            "the file can't be read as YAML from here on",
            "look for a missing colon, bracket or quote, here or just above",
        )
    }
}

#[cfg(test)]
mod tests {
    use crate::bank::file::read;

    /// Code, line and column of the first error, and what it says.
    fn first(text: &str) -> (&'static str, usize, usize, String) {
        let errors = read("x", text.as_bytes()).expect_err(text);
        let error = &errors.as_slice()[0];
        let place = error.place.as_ref().expect("an error of a file has a place");
        (error.code, place.line, place.column, format!("{}; {}", error.text, error.help.as_deref().unwrap_or("")))
    }

    #[track_caller]
    fn assert_first(text: &str, code: &str, place: (usize, usize), says: &str) {
        let found = first(text);
        assert_eq!((found.0, (found.1, found.2)), (code, place), "{text:?}: {found:?}");
        assert!(found.3.contains(says), "{found:?}");
    }

    #[test]
    fn a_tab_is_found_where_it_indents() {
        assert_first("ebbvolt: 1\ncapacitors:\n\t- id: C1\n", "tab-indentation", (3, 1), "spaces");
        assert_first("a:\n  - id: C1\n  \tvalue: 3 uF\n", "tab-indentation", (3, 3), "spaces");
    }

    #[test]
    fn a_slip_is_named_where_it_was_made() {
        assert_first("tag: x\ntitle: Drive: DC bus\n", "yaml-syntax", (2, 13), "colon");
        assert_first("tag: x\nterminals: [P, N\ntitle: y\n", "yaml-syntax", (2, 12), "`[` is never closed");
        assert_first("limits:\n - {id: x\n - {id: y}\n", "yaml-syntax", (2, 4), "`{` is never closed");
        assert_first("tag: x\nterminals: ]\n", "yaml-syntax", (2, 12), "closes nothing");
        assert_first("ebbvolt: 1\ntag x\ntitle: y\n", "yaml-syntax", (2, 1), "`key: value`");
        assert_first("ebbvolt: 1\n\ntag:x\n# why\ntitle: y\n", "yaml-syntax", (3, 1), "`tag: x`");
        assert_first("c:\n  - id: C1\n     value: 3 uF\n", "yaml-syntax", (3, 6), "indentation");
        assert_first("c:\n  - id: C1\n    value: 3 uF\n   across: x\n", "yaml-syntax", (4, 4), "indentation");
        assert_first("tag: \"x\ntitle: y\n", "yaml-syntax", (1, 6), "quotes");
        assert_first("tag: @x\n", "yaml-syntax", (1, 6), "quotes");
        assert_first("tag: *x\n", "yaml-syntax", (1, 6), "alias");
    }
}
