//! The two streams, and what happens to the exit status when one of them fails.

use super::{INPUT_WRONG, Terminal};
use crate::finding::Findings;
use crate::report;
use std::io::{ErrorKind, Write};
use std::path::Path;

/// Words that stand in bold at the start of a line on a terminal. Nothing depends on it: they are capitals already.
const SIGNAL_WORDS: [&str; 8] =
    ["DANGER", "WARNING", "CAUTION", "WAIT", "IF ONE PART", "HAS FAILED", "NOT MET", "*** INCOMPLETE ***"];

/// Standard output for results, standard error for everything else.
pub(super) struct Output<'a> {
    stdout: &'a mut dyn Write,
    stderr: &'a mut dyn Write,
    terminal: Terminal,
}

impl<'a> Output<'a> {
    pub fn new(stdout: &'a mut dyn Write, stderr: &'a mut dyn Write, terminal: Terminal) -> Self {
        Output { stdout, stderr, terminal }
    }

    /// Columns for text.
    pub fn width(&self) -> usize {
        self.terminal.width
    }

    /// Writes a result and returns `status`. A reader that has seen enough and closed the pipe changes nothing; a
    /// disk that is full does.
    pub fn result(&mut self, text: &str, status: u8) -> u8 {
        match self.stdout.write_all(text.as_bytes()).and_then(|()| self.stdout.flush()) {
            Ok(()) => status,
            Err(e) if e.kind() == ErrorKind::BrokenPipe => status,
            Err(e) => self.problem(&format!("the result can't be written: {e}"), INPUT_WRONG),
        }
    }

    /// The same into a file where one is named, and a word about it on standard error.
    pub fn file_or_result(&mut self, file: Option<&Path>, text: &str, status: u8) -> u8 {
        let Some(path) = file else { return self.result(text, status) };
        let name = path.display();
        match std::fs::write(path, text) {
            Ok(()) => {
                self.notice(&format!("Written to `{name}`."));
                status
            }
            Err(e) => self.problem(&format!("`{name}` can't be written: {e}"), INPUT_WRONG),
        }
    }

    /// The same for text that people read, with signal words in bold on a terminal.
    pub fn text(&mut self, text: &str, status: u8) -> u8 {
        if self.terminal.emphasis() { self.result(&emphasised(text), status) } else { self.result(text, status) }
    }

    /// Tells what went well beside the result.
    pub fn notice(&mut self, text: &str) {
        // Standard error is the last place to complain; if it is closed there is nobody to tell.
        let _ = self.stderr.write_all(report::message_text(text, self.terminal.width).as_bytes());
    }

    /// Tells lines to paste on standard error, as they stand: where one breaks it would be another text.
    pub fn lines_to_paste(&mut self, lines: &str) {
        let _ = self.stderr.write_all(lines.as_bytes());
    }

    /// Tells what is wrong and returns `status`.
    pub fn problem(&mut self, text: &str, status: u8) -> u8 {
        self.notice(&format!("ERROR: {text}"));
        status
    }

    /// Tells everything that is wrong with an input.
    pub fn findings(&mut self, findings: &Findings) -> u8 {
        let text = report::findings_text(findings, self.terminal.width);
        let _ = self.stderr.write_all(text.as_bytes());
        INPUT_WRONG
    }

    /// Help or version on standard output, or why the command line was not understood.
    pub fn refusal(&mut self, refusal: &clap::Error) -> u8 {
        if refusal.use_stderr() {
            let _ = write!(self.stderr, "{refusal}");
            INPUT_WRONG
        } else {
            self.result(&refusal.to_string(), 0)
        }
    }
}

fn emphasised(text: &str) -> String {
    let line = |line: &str| match SIGNAL_WORDS.iter().find(|word| line.starts_with(**word)) {
        Some(word) => format!("\u{1b}[1m{word}\u{1b}[0m{}\n", &line[word.len()..]),
        None => format!("{line}\n"),
    };
    text.lines().map(line).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A stream that fails with a kind of error.
    struct Failing(ErrorKind);

    impl Write for Failing {
        fn write(&mut self, _: &[u8]) -> std::io::Result<usize> {
            Err(self.0.into())
        }
        fn flush(&mut self) -> std::io::Result<()> {
            Ok(())
        }
    }

    #[test]
    fn a_broken_pipe_keeps_the_verdict_and_a_full_disk_does_not() {
        let mut errors = Vec::new();
        let mut status = |kind| Output::new(&mut Failing(kind), &mut errors, Terminal::NONE).result("x", 1);
        assert_eq!(status(ErrorKind::BrokenPipe), 1);
        assert_eq!(status(ErrorKind::StorageFull), INPUT_WRONG);
        assert!(String::from_utf8_lossy(&errors).contains("can't be written"));
    }

    #[test]
    fn only_a_terminal_gets_bold_words_and_only_if_colour_is_wanted() {
        let seen = |terminal| {
            let mut out = Vec::new();
            Output::new(&mut out, &mut Vec::new(), terminal).text("DANGER  x\ny\n", 0);
            String::from_utf8_lossy(&out).into_owned()
        };
        let terminal = Terminal { stdout_is_terminal: true, width: 80, no_color: false };
        assert_eq!(seen(terminal), "\u{1b}[1mDANGER\u{1b}[0m  x\ny\n");
        assert_eq!(seen(Terminal { no_color: true, ..terminal }), "DANGER  x\ny\n");
        assert_eq!(seen(Terminal { stdout_is_terminal: false, ..terminal }), "DANGER  x\ny\n");
    }
}
