//! `plan`: from a bank file, standard input, the example or a few flags to a plan.

use super::args::{DrawDistribution, PlanArgs, PlanFormat, QuickArgs};
use super::input::{self, Input};
use super::output::Output;
use super::{INPUT_WRONG, NO_VERDICT};
use crate::bank::file;
use crate::bank::quick::{QuickForm, quick_text};
use crate::plan::{DrawFrom, Drawing, Options, Plan};
use crate::{data, plan, report};
use sha2::{Digest, Sha256};
use std::fmt::Write as _;
use std::fs::OpenOptions;
use std::io::{ErrorKind, Read, Write as _};
use std::path::{Path, PathBuf};

/// Where the bank comes from.
enum Source {
    File(PathBuf),
    Stdin,
    Example,
    Quick(QuickForm),
}

/// Reads, plans and prints.
pub(super) fn run(typed: &PlanArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    let source = match source(typed) {
        Ok(source) => source,
        Err(problem) => return output.problem(&problem, INPUT_WRONG),
    };
    let input = match read(source, stdin) {
        Ok(input) => input,
        Err(Refused::Input(problem)) => return output.problem(&problem, INPUT_WRONG),
        Err(Refused::Findings(findings)) => return output.findings(&findings),
    };
    let (bank, notes) = match file::read(&input.name, &input.bytes) {
        Ok(read) => read,
        Err(findings) => return output.findings(&findings),
    };
    if let Some(path) = &typed.quick.save {
        match save("--save", path, &input.bytes) {
            Ok(()) => output.notice(&format!("The bank file was written to `{}`.", path.display())),
            Err(problem) => return output.problem(&problem, INPUT_WRONG),
        }
    }
    if typed.expand {
        return output.result(&file::write(&bank.expanded()), 0);
    }
    let options = Options {
        working: typed.working,
        two_faults: typed.faults == 2,
        draws: drawing(typed),
        sensitivity: typed.sensitivity,
        ..Options::default()
    };
    if options.two_faults {
        match plan::too_many_fault_pairs(&bank) {
            Ok(None) => {}
            Ok(Some(problem)) => return output.problem(&problem, INPUT_WRONG),
            Err(e) => return no_verdict(&e.to_string(), output),
        }
    }
    match plan::plan(&bank, &sha256(&input.bytes), notes, options) {
        Ok(plan) => print(&plan, typed.format, output),
        Err(e) => no_verdict(&e.to_string(), output),
    }
}

/// The random draws that were asked for.
fn drawing(typed: &PlanArgs) -> Option<Drawing> {
    let from = match typed.draw_from {
        DrawDistribution::Uniform => DrawFrom::Uniform,
        DrawDistribution::Normal => DrawFrom::Normal,
    };
    typed.draws.map(|count| Drawing { count, from, seed: typed.seed })
}

/// What the words that were typed ask for; the error says what to type.
fn source(typed: &PlanArgs) -> Result<Source, String> {
    let quick = &typed.quick;
    let quick_used = [
        &quick.charged_to,
        &quick.highest,
        &quick.capacitance,
        &quick.bleeder,
        &quick.touch_voltage,
        &quick.capacitance_tolerance,
        &quick.bleeder_tolerance,
    ]
    .iter()
    .any(|flag| flag.is_some());
    let source = match (&typed.bank, typed.example, quick_used) {
        (Some(path), false, false) if path.as_os_str() == "-" => Source::Stdin,
        (Some(path), false, false) => Source::File(path.clone()),
        (None, true, false) => Source::Example,
        (None, false, true) => Source::Quick(quick_form(quick)?),
        (None, false, false) => {
            return Err("no bank was given; name a bank file, `-` for standard input, `--example`, or \
                        `--charged-to`, `--capacitance`, `--bleeder` and `--touch-voltage`"
                .into());
        }
        _ => return Err("give one bank only: a file, or `--example`, or the flags of a bank without a file".into()),
    };
    if quick.save.is_some() && !quick_used {
        return Err("`--save` writes the bank file that flags such as `--charged-to` stand for; there are none".into());
    }
    Ok(source)
}

fn quick_form(quick: &QuickArgs) -> Result<QuickForm, String> {
    let mut missing = Vec::new();
    let mut need = |flag: &Option<String>, name: &'static str| {
        flag.clone().unwrap_or_else(|| {
            missing.push(name);
            String::new()
        })
    };
    let form = QuickForm {
        charged_to: need(&quick.charged_to, "`--charged-to 565V`"),
        highest: quick.highest.clone(),
        capacitance: need(&quick.capacitance, "`--capacitance 3300uF`"),
        bleeder: need(&quick.bleeder, "`--bleeder 22k`"),
        touch_voltage: need(&quick.touch_voltage, "`--touch-voltage 50V`"),
        capacitance_tolerance: quick.capacitance_tolerance.clone(),
        bleeder_tolerance: quick.bleeder_tolerance.clone(),
    };
    if missing.is_empty() {
        Ok(form)
    } else {
        Err(format!("a bank without a file also needs {}, with the figures of the bank", missing.join(", ")))
    }
}

/// Why there is nothing to plan.
enum Refused {
    Input(String),
    Findings(crate::finding::Findings),
}

fn read(source: Source, stdin: &mut dyn Read) -> Result<Input, Refused> {
    match source {
        Source::File(path) => input::from_file(&path).map_err(Refused::Input),
        Source::Stdin => input::from_stdin(stdin).map_err(Refused::Input),
        Source::Example => Ok(Input { name: "the example".into(), bytes: data::example_bank().into() }),
        Source::Quick(form) => match quick_text(&form) {
            Ok(text) => Ok(Input { name: "the command line".into(), bytes: text.into() }),
            Err(findings) => Err(Refused::Findings(findings)),
        },
    }
}

/// Writes a new file; one that exists is never overwritten. `flag` is what asked for it.
pub(super) fn save(flag: &str, path: &Path, bytes: &[u8]) -> Result<(), String> {
    let name = path.display();
    if path.as_os_str() == "-" {
        return Err(format!("`{flag}` needs the name of a new file; the result itself goes to standard output"));
    }
    let mut file = OpenOptions::new().write(true).create_new(true).open(path).map_err(|e| match e.kind() {
        ErrorKind::AlreadyExists => format!("`{name}` exists and is not overwritten; choose another name"),
        _ => format!("`{name}` can't be written: {e}"),
    })?;
    file.write_all(bytes).map_err(|e| format!("`{name}` can't be written: {e}"))
}

/// The hash of an input, in hexadecimal digits.
pub(super) fn sha256(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().fold(String::new(), |mut hex, byte| {
        // Writing to a string can't fail.
        let _ = write!(hex, "{byte:02x}");
        hex
    })
}

fn print(plan: &Plan, format: PlanFormat, output: &mut Output) -> u8 {
    // No format may show a figure that is none, so the guard of the JSON stands before all of them.
    if let Err(e) = report::check_finite(plan) {
        return no_verdict(&e.to_string(), output);
    }
    let status = plan.exit_code();
    match format {
        PlanFormat::Text => output.text(&report::plan_text(plan, output.width()), status),
        PlanFormat::Markdown => output.result(&report::plan_markdown(plan), status),
        PlanFormat::Json => match report::plan_json(plan) {
            Ok(text) => output.result(&text, status),
            Err(e) => no_verdict(&e.to_string(), output),
        },
    }
}

pub(super) fn no_verdict(problem: &str, output: &mut Output) -> u8 {
    let advice = "No plan is printed: the tool could not certify its own result. Please report it with the bank file.";
    output.problem(&format!("internal error: {problem}\n{advice}"), NO_VERDICT)
}
