//! The bank that a command was given, planned: the way that all commands but `plan` have in common.

use super::args::BankArgs;
use super::input::{self, Input};
use super::output::Output;
use super::plan::{no_verdict, sha256};
use super::{INPUT_WRONG, NO_VERDICT};
use crate::bank::file;
use crate::plan::{Options, Plan};
use crate::{data, plan, report};
use std::io::Read;
use std::path::Path;

/// The plan of the bank that was named; the error is the exit status, with the reason told already.
pub(super) fn planned(
    typed: &BankArgs,
    options: Options,
    stdin: &mut dyn Read,
    output: &mut Output,
) -> Result<Plan, u8> {
    let input = read(typed, stdin).map_err(|problem| output.problem(&problem, INPUT_WRONG))?;
    let (bank, notes) = file::read(&input.name, &input.bytes).map_err(|findings| output.findings(&findings))?;
    let plan =
        plan::plan(&bank, &sha256(&input.bytes), notes, options).map_err(|e| no_verdict(&e.to_string(), output))?;
    // No format may show a figure that is none.
    report::check_finite(&plan).map_err(|e| no_verdict(&e.to_string(), output))?;
    Ok(plan)
}

fn read(typed: &BankArgs, stdin: &mut dyn Read) -> Result<Input, String> {
    match &typed.bank {
        Some(path) if path.as_os_str() == "-" => input::from_stdin(stdin),
        Some(path) => input::from_file(path),
        None => Ok(Input { name: "the example".into(), bytes: data::example_bank().into() }),
    }
}

/// Refuses to write a result over the bank file that it was made from.
pub(super) fn refuse_overwriting(typed: &BankArgs, file: Option<&Path>, output: &mut Output) -> Result<(), u8> {
    let same = |a: &Path, b: &Path| match (a.canonicalize(), b.canonicalize()) {
        (Ok(a), Ok(b)) => a == b,
        _ => false,
    };
    match (&typed.bank, file) {
        (Some(bank), Some(file)) if same(bank, file) => Err(output.problem(
            &format!("`{}` is the bank file itself and is not overwritten; choose another name", file.display()),
            INPUT_WRONG,
        )),
        _ => Ok(()),
    }
}

/// Refuses a result that must not be shown because the plan is incomplete.
pub(super) fn incomplete(plan: &Plan, what: &str, output: &mut Output) -> Result<(), u8> {
    if plan.not_computed.is_empty() {
        return Ok(());
    }
    let text = format!(
        "INCOMPLETE: this version does not compute everything that the file asks for, so there is no {what}.\nNot \
         computed: {}.",
        plan.not_computed.join("; ")
    );
    Err(output.problem(&text, NO_VERDICT))
}
