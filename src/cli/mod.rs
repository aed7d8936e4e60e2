//! The command line: arguments as typed, one file per command, the terminal, the exit status.

mod args;
mod draft;
mod given;
mod input;
mod label;
mod limits;
mod output;
mod plan;
mod sheet;
mod size;
mod terminal;
mod trace;

pub use terminal::Terminal;

use args::Command;
use output::Output;
use std::ffi::OsString;
use std::io::{Read, Write};

/// Exit status: the input is wrong, or a file can't be read or written.
const INPUT_WRONG: u8 = 2;
/// Exit status: no verdict, because the engine could not certify its own result.
const NO_VERDICT: u8 = 3;

/// Runs one command of the command line and returns its exit status: 0 all limits met and no rating exceeded, 1 a
/// limit is not met or a rating exceeded, 2 the input is wrong or a file can't be read or written, 3 no verdict.
///
/// `args` are the words of the command line, the program's own name first. Results go to `stdout`, everything else to
/// `stderr`.
///
/// # Example: the version
/// ```
/// use ebbvolt::cli::{Terminal, run};
/// let (mut stdin, mut out, mut err) = (std::io::empty(), Vec::new(), Vec::new());
/// let words = ["ebbvolt", "--version"].map(Into::into);
/// let status = run(words.into_iter(), &mut stdin, &mut out, &mut err, Terminal::NONE);
/// assert_eq!(status, 0);
/// assert!(String::from_utf8_lossy(&out).starts_with("ebbvolt "));
/// ```
pub fn run(
    args: impl Iterator<Item = OsString>,
    stdin: &mut dyn Read,
    stdout: &mut dyn Write,
    stderr: &mut dyn Write,
    terminal: Terminal,
) -> u8 {
    let mut output = Output::new(stdout, stderr, terminal);
    let typed = match args::parse(args, terminal) {
        Ok(typed) => typed,
        Err(refusal) => return output.refusal(&refusal),
    };
    match typed.command {
        Command::Plan(typed) => plan::run(&typed, stdin, &mut output),
        Command::Size(typed) => size::run(&typed, stdin, &mut output),
        Command::Sheet(typed) => sheet::run(&typed, stdin, &mut output),
        Command::Trace(typed) => trace::run(&typed, stdin, &mut output),
        Command::Label(typed) => label::run(&typed, stdin, &mut output),
        Command::Limits(typed) => limits::run(&typed, &mut output),
        Command::Draft => draft::run(&mut output),
    }
}
