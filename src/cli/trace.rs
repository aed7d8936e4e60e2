//! `trace`: voltages, currents and powers against time.

use super::args::{TraceArgs, TraceFormat};
use super::output::Output;
use super::plan::no_verdict;
use super::{INPUT_WRONG, given};
use crate::plan::{CurveTimes, Options};
use crate::quantity::{Time, parse};
use crate::report;
use std::io::Read;

/// Reads, plans and draws or lists.
pub(super) fn run(typed: &TraceArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    match made(typed, stdin, output) {
        Ok(status) | Err(status) => status,
    }
}

fn made(typed: &TraceArgs, stdin: &mut dyn Read, output: &mut Output) -> Result<u8, u8> {
    let times = match &typed.times {
        None => CurveTimes::Automatic,
        Some(list) => CurveTimes::At(times(list).map_err(|e| output.problem(&e, INPUT_WRONG))?),
    };
    let file = typed.output.as_deref();
    given::refuse_overwriting(&typed.bank, file, output)?;
    let plan = given::planned(&typed.bank, Options { curves: Some(times), ..Options::default() }, stdin, output)?;
    given::incomplete(&plan, "trace", output)?;
    let text = match typed.format {
        TraceFormat::Text => report::trace_text(&plan, output.width()),
        TraceFormat::Csv => report::trace_csv(&plan),
        TraceFormat::Svg => report::trace_svg(&plan),
        TraceFormat::Json => report::trace_json(&plan).map_err(|e| no_verdict(&e.to_string(), output))?,
    };
    Ok(output.file_or_result(file, &text, plan.exit_code()))
}

/// Times such as `0s,30s,5min`.
fn times(list: &str) -> Result<Vec<Time>, String> {
    let one = |text: &str| {
        parse::<Time>(text.trim())
            .map(|reading| reading.value)
            .map_err(|e| format!("`{}` in `--times`: {e}", text.trim()))
    };
    list.split(',').map(one).collect()
}
