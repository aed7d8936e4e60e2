//! The text of a bank file, and the places in it.

use crate::finding::{Finding, Place, Severity};

/// A larger file is refused before it is looked at. A caller needs to read one byte more than this, and no further.
pub const MAX_BYTES: usize = 4 * 1024 * 1024;

/// A longer line is shown in part, around the column in question.
const SHOWN: usize = 200;

/// A longer message is cut: it could only be so long by a name from the file.
const LONGEST_MESSAGE: usize = 1500;

/// The text of a file, with `\n` as its only line end.
pub(super) struct Source {
    name: String,
    pub(super) text: String,
    /// The byte at which each line begins.
    starts: Vec<usize>,
}

/// Where something stands: line and column in characters, both from 1, and how many characters of the line.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub(super) struct Span {
    pub(super) line: usize,
    pub(super) column: usize,
    pub(super) length: usize,
}

impl Source {
    /// Takes the bytes of a file as text.
    ///
    /// # Errors
    /// Where they are too many, no UTF-8 text, or hold characters that no bank file needs and no printer shows.
    pub(super) fn new(name: &str, bytes: &[u8]) -> Result<Self, Box<Finding>> {
        if bytes.len() > MAX_BYTES {
            let source = Source::of(name, String::new());
            return Err(Box::new(source.error(
                "file-too-large",
                Span { line: 1, column: 1, length: 1 },
                format!("the file is larger than {} MiB, which is more than any bank file", MAX_BYTES >> 20),
                "give the file that describes the bank",
            )));
        }
        let bytes = bytes.strip_prefix(b"\xef\xbb\xbf").unwrap_or(bytes);
        let text = match std::str::from_utf8(bytes) {
            Ok(text) => text,
            Err(e) => return Err(not_utf8(name, bytes, e.valid_up_to())),
        };
        let source = Source::of(name, text.replace("\r\n", "\n").replace('\r', "\n"));
        match source.text.char_indices().find(|(_, c)| is_refused(*c)) {
            None => Ok(source),
            Some((at, c)) => Err(Box::new(source.error(
                "unprintable-character",
                source.span_at(at),
                format!("the character U+{:04X} can't stand in a bank file", u32::from(c)),
                "a bank file is plain UTF-8 text; remove the character or give another file",
            ))),
        }
    }

    fn of(name: &str, text: String) -> Self {
        let starts = std::iter::once(0).chain(text.match_indices('\n').map(|(at, _)| at + 1)).collect();
        Source { name: name.to_string(), text, starts }
    }

    /// A line without its end, counted from 1; empty past the last one.
    pub(super) fn line(&self, line: usize) -> &str {
        let Some(&start) = self.starts.get(line.saturating_sub(1)) else { return "" };
        let end = self.starts.get(line).map_or(self.text.len(), |next| next - 1);
        self.text.get(start..end).unwrap_or("")
    }

    /// The span of the character at a byte.
    fn span_at(&self, byte: usize) -> Span {
        let line = self.starts.partition_point(|start| *start <= byte);
        let start = self.starts.get(line.saturating_sub(1)).copied().unwrap_or(0);
        let column = self.text.get(start..byte).map_or(0, |before| before.chars().count()) + 1;
        Span { line, column, length: 1 }
    }

    /// The place of a span, with its line to show.
    pub(super) fn place(&self, span: Span) -> Place {
        let line = span.line.clamp(1, self.starts.len());
        let text = self.line(line);
        // A place past the last line, such as the end of the file, is shown at the end of that line.
        let width = text.chars().count();
        let column = if span.line > line { width + 1 } else { span.column.clamp(1, width + 1) };
        let length = span.length.min((width + 1).saturating_sub(column)).max(1);
        let (source, source_column) = excerpt(text, column);
        Place { file: self.name.clone(), line, column, length, source, source_column }
    }

    /// An error at a span; an empty help is none.
    pub(super) fn error(
        &self,
        code: &'static str,
        span: Span,
        text: impl Into<String>,
        help: impl Into<String>,
    ) -> Finding {
        let finding = Finding::new(Severity::Error, code, printable(&text.into())).at(self.place(span));
        let help = printable(&help.into());
        if help.is_empty() { finding } else { finding.with_help(help) }
    }
}

/// A message with whatever a file put into it made fit to be shown.
fn printable(text: &str) -> String {
    let shown = |c: char| match c {
        c if c.is_control() || is_refused(c) => char::REPLACEMENT_CHARACTER,
        c => c,
    };
    let mut message: String = text.chars().take(LONGEST_MESSAGE).map(shown).collect();
    if text.chars().nth(LONGEST_MESSAGE).is_some() {
        message.push('…');
    }
    message
}

/// What of a line is shown, and the column of its first character.
fn excerpt(line: &str, column: usize) -> (String, usize) {
    let shown = |c: char| match c {
        '\t' => '→',
        c if is_refused(c) => char::REPLACEMENT_CHARACTER,
        c => c,
    };
    let first = if line.chars().count() > SHOWN { column.saturating_sub(SHOWN / 2) } else { 0 };
    (line.chars().skip(first).take(SHOWN).map(shown).collect(), first + 1)
}

/// Control characters, those that nobody sees and that make two names differ, and those that make text read in another
/// order than it is written.
pub(super) fn is_refused(c: char) -> bool {
    let unseen = matches!(c, '\u{200b}' | '\u{2028}' | '\u{2029}' | '\u{feff}');
    let reorders = matches!(c, '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}');
    unseen || reorders || (c.is_control() && !matches!(c, '\n' | '\t'))
}

fn not_utf8(name: &str, bytes: &[u8], valid: usize) -> Box<Finding> {
    let before = bytes.get(..valid).unwrap_or_default();
    // Past the bad byte, the rest of its line is shown as far as it can be read.
    let rest = bytes.get(valid..).unwrap_or_default();
    let line_end = rest.iter().take(SHOWN).position(|b| *b == b'\n').unwrap_or(rest.len().min(SHOWN));
    let text = [before, rest.get(..line_end).unwrap_or_default()].concat();
    let text = String::from_utf8_lossy(&text).replace("\r\n", "\n").replace('\r', "\n");
    let at = text.char_indices().nth(String::from_utf8_lossy(before).replace("\r\n", "\n").chars().count());
    let source = Source::of(name, text.clone());
    let span = source.span_at(at.map_or(text.len(), |(at, _)| at));
    let byte = rest.first().copied().unwrap_or(0);
    Box::new(source.error(
        "not-text",
        span,
        format!("byte {} (0x{byte:02x}) is not UTF-8 text", valid + 1),
        "save the file as UTF-8 text; µ, Ω and ° from an older character set can be written u, ohm and C",
    ))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn refused(bytes: &[u8]) -> Finding {
        Source::new("bank.yaml", bytes).map(|s| s.text).map_or_else(|e| *e, |text| panic!("{text}"))
    }

    fn at(finding: &Finding) -> (usize, usize) {
        finding.place.as_ref().map_or((0, 0), |p| (p.line, p.column))
    }

    #[test]
    fn a_byte_order_mark_and_other_line_ends_are_no_part_of_the_text() {
        for bytes in [&b"\xef\xbb\xbfa: 1\r\nb: 2\r\n"[..], b"a: 1\rb: 2\r"] {
            assert_eq!(Source::new("x", bytes).map(|s| s.text).ok().as_deref(), Some("a: 1\nb: 2\n"));
        }
    }

    #[test]
    fn bytes_that_are_no_text_are_refused_where_they_stand() {
        let finding = refused(b"tag: x\nvalue: 10 \xb5F # old\nmore: 1\n");
        assert_eq!((finding.code, at(&finding)), ("not-text", (2, 11)));
        assert_eq!(finding.place.map(|p| p.source), Some("value: 10 \u{fffd}F # old".into()));
        assert_eq!(at(&refused(b"\xff\xfet\0a\0")), (1, 1));
        assert_eq!(at(&refused(b"\xc3")), (1, 1));
    }

    #[test]
    fn characters_that_no_printer_shows_are_refused() {
        for (text, place) in
            [("tag: a\0", (1, 7)), ("a: 1\nb: \u{7}", (2, 4)), ("tag: \u{202e}x", (1, 6)), ("a: C1\u{200b}", (1, 6))]
        {
            let finding = refused(text.as_bytes());
            assert_eq!((finding.code, at(&finding)), ("unprintable-character", place));
        }
    }

    #[test]
    fn a_file_that_is_too_large_is_refused_unread() {
        assert!(Source::new("x", &vec![b'#'; MAX_BYTES]).is_ok());
        assert_eq!(refused(&vec![0xff; MAX_BYTES + 1]).code, "file-too-large");
    }

    #[test]
    fn a_long_line_is_shown_around_its_column() {
        let line = format!("{}X{}", "a".repeat(1000), "b".repeat(1000));
        let source = Source::of("x", line);
        let place = source.place(Span { line: 1, column: 1001, length: 1 });
        assert_eq!(place.column, 1001);
        assert_eq!(place.source.chars().nth(place.column - place.source_column), Some('X'));
        assert!(place.source.len() <= SHOWN);
    }

    #[test]
    fn a_place_past_the_end_is_shown_at_the_end() {
        let source = Source::of("x", "a: [1\n".into());
        let place = source.place(Span { line: 9, column: 5, length: 7 });
        assert_eq!((place.line, place.column, place.length), (2, 1, 1));
        let place = source.place(Span { line: 1, column: 50, length: 7 });
        assert_eq!((place.column, place.length), (6, 1));
    }
}
