//! `sheet`: the plan of a bank as a document to print, fill in and sign.

use super::INPUT_WRONG;
use super::args::{SheetArgs, SheetFormat, SheetPaper};
use super::given;
use super::output::Output;
use crate::plan::{CurveTimes, Options};
use crate::report::{self, Paper, Sheet};
use std::io::Read;

/// Reads, plans and prints the sheet.
pub(super) fn run(typed: &SheetArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    match made(typed, stdin, output) {
        Ok(status) | Err(status) => status,
    }
}

fn made(typed: &SheetArgs, stdin: &mut dyn Read, output: &mut Output) -> Result<u8, u8> {
    let date = typed.date.as_deref().map(date).transpose().map_err(|e| output.problem(&e, INPUT_WRONG))?;
    let file = typed.output.as_deref();
    given::refuse_overwriting(&typed.bank, file, output)?;
    let plan = given::planned(
        &typed.bank,
        Options { working: true, curves: Some(CurveTimes::Automatic), ..Options::default() },
        stdin,
        output,
    )?;
    let paper = match typed.paper {
        SheetPaper::A4 => Paper::A4,
        SheetPaper::Letter => Paper::Letter,
    };
    let sheet = Sheet { paper, date };
    let text = match typed.format {
        SheetFormat::Html => report::sheet_html(&plan, &sheet),
        SheetFormat::Markdown => report::sheet_markdown(&plan, &sheet),
        SheetFormat::Text => report::sheet_text(&plan, &sheet, output.width()),
    };
    Ok(output.file_or_result(file, &text, plan.exit_code()))
}

/// A date as it is printed; it has to be one, since a sheet is kept for years.
fn date(typed: &str) -> Result<String, String> {
    typed
        .trim()
        .parse::<jiff::civil::Date>()
        .map(|date| date.to_string())
        .map_err(|_| format!("`{typed}` is no date; write it as year-month-day, such as 2026-03-31"))
}
