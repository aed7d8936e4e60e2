//! Passes the streams to the library and returns its exit status.

use ebbvolt::cli::{Terminal, run};
use std::io::{BufWriter, stderr, stdin, stdout};
use std::process::ExitCode;

fn main() -> ExitCode {
    let mut out = BufWriter::new(stdout().lock());
    // Standard error stays unlocked: a thread of the engine that panics has to be able to say so.
    ExitCode::from(run(std::env::args_os(), &mut stdin().lock(), &mut out, &mut stderr(), Terminal::of_process()))
}
