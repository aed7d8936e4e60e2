//! What is wrong with text that is no YAML, in words of the trade rather than of the grammar.

use super::source::{Source, Span};
use crate::finding::Finding;
use saphyr_parser::ScanError;

/// The way out of nesting that is too deep.
pub(super) const DEPTH_HELP: &str = "a bank file needs fewer than ten levels; look for a bracket that is never closed";

/// The error of a text that the parser could not read.
pub(super) fn explain(source: &Source, error: &ScanError, max_depth: usize) -> Box<Finding> {
    let marker = error.marker();
    let span = Span { line: marker.line(), column: marker.col() + 1, length: 1 };
    if let Some(tab) = tab_near(source, span.line) {
        return source.error(
            "tab-indentation",
            tab,
            "the line is indented with a tab",
            "indent with spaces: YAML does not take tabs there",
        );
    }
    let (code, text, help) = words(error.info(), max_depth);
    source.error(code, span, text, help)
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

/// Code, text and help for what the parser says. Its own sentences are about its grammar; most slips in a bank file
/// are of a few kinds.
fn words(info: &str, max_depth: usize) -> (&'static str, String, &'static str) {
    let has = |part: &str| info.contains(part);
    if has("recursion limit") {
        return ("nested-too-deep", format!("values are nested more than {max_depth} deep here"), DEPTH_HELP);
    }
    let (text, help) = if has("unknown anchor") {
        ("this alias repeats a value that is not above it", "write the value out, or put its anchor (`&name`) above")
    } else if has("mapping values are not allowed") || has("illegal placement of ':'") {
        (
            "a colon can't stand here",
            "put text with a colon in quotes, such as `title: \"Drive: DC bus\"`, and give every key a line of its own",
        )
    } else if has("quoted scalar") || has("double-quoted") {
        (
            "a text in quotes is not closed, or not written as YAML takes it",
            "close the quotes; inside double quotes, write a backslash as `\\\\`",
        )
    } else if has("expect ':'") || has("simple key") {
        ("a key without a colon, or a line that is indented too little or too far", "write `key: value`, and indent with spaces as the lines around it are")
    } else if has("flow") || has("bracket") || has("',' or") || has("expected ','") {
        (
            "a list in `[ ]` or a group in `{ }` is not closed, or a comma is missing in it",
            "close every bracket and put a comma between the entries",
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
        ("the file can't be read as YAML from here on", "look for a missing colon, bracket or quote, here or just above")
    };
    ("yaml-syntax", text.to_string(), help)
}
