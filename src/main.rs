//! Passes the streams to the library and returns its exit status.

use ebbvolt::cli::{Terminal, run};
use std::io::{BufWriter, stderr, stdin, stdout};
use std::process::ExitCode;

fn main() -> ExitCode {
    let mut out = BufWriter::new(stdout().lock());
    ExitCode::from(run(
        std::env::args_os(),
        &mut stdin().lock(),
        &mut out,
        &mut stderr().lock(),
        Terminal::of_process(),
    ))
}
