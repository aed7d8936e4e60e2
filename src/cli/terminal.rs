//! What the program knows of the terminal that it writes to.

use std::io::{IsTerminal, stdout};

/// Columns where there is no terminal to ask: what fits on paper and in a mail.
const PIPED_WIDTH: usize = 80;

/// Where standard output goes.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Terminal {
    /// True where a person sees it as it comes.
    pub stdout_is_terminal: bool,
    /// Columns.
    pub width: usize,
    /// True where the user wants no colour or emphasis.
    pub no_color: bool,
}

impl Terminal {
    /// No terminal: a pipe or a file, 80 columns, no colour.
    pub const NONE: Terminal = Terminal { stdout_is_terminal: false, width: PIPED_WIDTH, no_color: true };

    /// The terminal of this process. NO_COLOR counts where it is set to anything but nothing; `TERM=dumb` likewise.
    pub fn of_process() -> Self {
        if !stdout().is_terminal() {
            return Terminal::NONE;
        }
        let width = terminal_size::terminal_size().map_or(PIPED_WIDTH, |(width, _)| usize::from(width.0));
        let no_color = std::env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty())
            || std::env::var_os("TERM").is_some_and(|term| term == "dumb");
        Terminal { stdout_is_terminal: true, width, no_color }
    }

    /// True where words may be set in bold.
    pub(super) fn emphasis(self) -> bool {
        self.stdout_is_terminal && !self.no_color
    }
}
