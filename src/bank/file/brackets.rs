//! Which bracket is never closed. The parser notices only where the text stops making sense, which can be far below.

use super::source::{Source, Span};
use super::tree::MAX_DEPTH;

/// The first `[` or `{` that begins a value above `line` and that nothing closes.
///
/// This reads the text far more simply than a parser does: it knows quotes and comments, and counts a bracket only
/// where a value begins, so that one in the middle of a sentence does not count. It is asked only after the parser
/// has failed, to say where to look.
pub(super) fn never_closed(source: &Source, line: usize) -> Option<(char, Span)> {
    let mut open: Vec<(char, Span)> = vec![];
    let mut unmatched: Vec<(char, Span)> = vec![];
    for (i, text) in source.text.split('\n').enumerate() {
        let mut quote = None;
        // The character before, blanks left out; at the start of a line a value may begin.
        let mut before = ',';
        let mut blank = true;
        for (column, c) in text.chars().enumerate() {
            match (quote, c) {
                (Some(q), c) if c == q => quote = None,
                (Some(_), _) => {}
                (None, '#') if blank => break,
                (None, '"' | '\'') if starts_value(before) => quote = Some(c),
                (None, '[' | '{') if starts_value(before) => {
                    if open.len() >= MAX_DEPTH {
                        return None;
                    }
                    open.push((c, Span { line: i + 1, column: column + 1, length: 1 }));
                }
                (None, ']' | '}') => close(c, &mut open, &mut unmatched),
                _ => {}
            }
            blank = c.is_whitespace();
            if !blank {
                before = c;
            }
        }
    }
    unmatched.extend(open);
    unmatched.into_iter().filter(|(_, span)| span.line < line).min_by_key(|(_, span)| (span.line, span.column))
}

fn starts_value(before: char) -> bool {
    matches!(before, ':' | ',' | '-' | '?' | '[' | '{')
}

/// Closes the innermost bracket of the kind; those inside it that are of the other kind were never closed.
fn close(c: char, open: &mut Vec<(char, Span)>, unmatched: &mut Vec<(char, Span)>) {
    let kind = if c == ']' { '[' } else { '{' };
    if let Some(at) = open.iter().rposition(|(other, _)| *other == kind) {
        unmatched.extend(open.drain(at + 1..));
        open.pop();
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn found(text: &str) -> Option<(char, usize, usize)> {
        let source = Source::new("x", text.as_bytes()).ok()?;
        never_closed(&source, 1000).map(|(c, span)| (c, span.line, span.column))
    }

    #[test]
    fn the_bracket_that_is_never_closed_is_found() {
        assert_eq!(found("a: [P, N\nb: [P, M]\n"), Some(('[', 1, 4)));
        assert_eq!(found("a:\n - {b: [c, d}\n - {e: f}\n"), Some(('[', 2, 8)));
        assert_eq!(found("a:\n - {b: c\n - {e: f}\n"), Some(('{', 2, 4)));
        assert_eq!(found("a: [P,\n  N]\nb: {c: [d]}\n"), None);
    }

    #[test]
    fn brackets_in_sentences_quotes_and_comments_do_not_count() {
        assert_eq!(found("a: see [1\nb: \"[\"\nc: '{' # [\nd: x\n"), None);
    }
}
