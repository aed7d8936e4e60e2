//! `size`: resistors that do a job, from preferred values and parts at hand. One file per job; here is what they share.

mod bleeder;
mod typed;

use super::input::{self, Input};
use super::output::Output;
use super::plan::{save, sha256};
use super::{INPUT_WRONG, NO_VERDICT};
use crate::bank::Bank;
use crate::bank::description::Pair;
use crate::bank::file;
use crate::bank::stock::{Element, Values};
use crate::data::{Series, generic_stock};
use crate::finding::Findings;
use crate::quantity::{Quantity, Ratio, Temperature, Tolerance, parse};
use crate::report::{self, SizeReport};
use crate::size::{Build, Candidate, Rank, SizeError, Sizing, Target};
use clap::{Args, Subcommand};
use serde::Serialize;
use std::io::Read;
use std::path::Path;
use typed::{BuildArgs, GivenArgs, RankBy, SizeFormat};

#[derive(Args)]
#[command(after_help = "Example: ebbvolt size bleeder bank.yaml --within 5min")]
pub(super) struct SizeArgs {
    #[command(subcommand)]
    job: SizeJob,
}

/// What is to be sized.
#[derive(Subcommand)]
enum SizeJob {
    /// A resistor that drains the bank for good, from isolation on
    Bleeder(Box<bleeder::BleederArgs>),
}

/// Reads, searches and prints.
pub(super) fn run(typed: &SizeArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    match &typed.job {
        SizeJob::Bleeder(typed) => bleeder::run(typed, stdin, output),
    }
}

/// Why there is nothing to size.
enum Refused {
    Words(String),
    Findings(Findings),
}

/// A bank file and what is asked of it.
struct Prepared<A> {
    input: Input,
    bank: Bank,
    ask: A,
}

/// Reads the bank and, with it, what the words ask for.
fn read<A>(
    path: &Path,
    stdin: &mut dyn Read,
    ask: impl FnOnce(&Bank) -> Result<A, Refused>,
) -> Result<Prepared<A>, Refused> {
    let input = if path.as_os_str() == "-" { input::from_stdin(stdin) } else { input::from_file(path) };
    let input = input.map_err(Refused::Words)?;
    let (bank, _) = file::read(&input.name, &input.bytes).map_err(Refused::Findings)?;
    let ask = ask(&bank)?;
    Ok(Prepared { input, bank, ask })
}

/// The answer to what was prepared, or the exit status of what was told instead.
fn sized<A, F>(
    prepared: Result<Prepared<A>, Refused>,
    output: &mut Output,
    size: impl FnOnce(&Bank, &str, &A) -> Result<Sizing<F>, SizeError>,
) -> Result<(Input, Sizing<F>), u8> {
    let Prepared { input, bank, ask } = prepared.map_err(|refused| match refused {
        Refused::Words(problem) => output.problem(&problem, INPUT_WRONG),
        Refused::Findings(findings) => output.findings(&findings),
    })?;
    match size(&bank, &sha256(&input.bytes), &ask) {
        Ok(sizing) => Ok((input, sizing)),
        Err(e @ (SizeError::Asked(_) | SizeError::Placed(_))) => Err(output.problem(&e.to_string(), INPUT_WRONG)),
        Err(SizeError::Engine(e)) => Err(no_verdict(&e.to_string(), output)),
    }
}

fn no_verdict(problem: &str, output: &mut Output) -> u8 {
    let advice = "Nothing is sized: the tool could not certify its own result. Please report it with the bank file.";
    output.problem(&format!("internal error: {problem}\n{advice}"), NO_VERDICT)
}

/// From what may be built; values that are wrong are added to `wrong`.
fn build(typed: &BuildArgs, wrong: &mut Vec<String>) -> Result<Build, Refused> {
    let margin = value::<Ratio>("--margin", &typed.margin, wrong).map_or(0.0, Quantity::si);
    if margin >= 1.0 {
        wrong.push("`--margin` leaves nothing to use; write a share under 100 %, such as `40%`".into());
    }
    let tolerance = value::<Ratio>("--tolerance", &typed.tolerance, wrong).and_then(|t| {
        Tolerance::new(t, t).map_err(|e| wrong.push(format!("`--tolerance`: {}; {}", e.problem, e.help))).ok()
    });
    let series = typed.series.as_ref().and_then(|word| series(word, wrong));
    if !wrong.is_empty() {
        return Err(Refused::Words(wrong.join("\n")));
    }
    let generic = typed.stock.is_none();
    let mut elements = elements(typed)?;
    for element in &mut elements {
        if generic || element.tolerance.is_none() {
            element.tolerance = tolerance.or(element.tolerance);
        }
        if let (Values::Preferred { series: own, .. }, Some(asked)) = (&mut element.values, series) {
            *own = asked;
        }
    }
    Ok(Build {
        elements,
        generic,
        series_up_to: typed.series_up_to,
        parallel_up_to: typed.parallel_up_to,
        margin,
        rank: match typed.rank {
            RankBy::Elements => Rank::Elements,
            RankBy::Loss => Rank::Loss,
            RankBy::Wait => Rank::Wait,
            RankBy::Price => Rank::Price,
            RankBy::Mass => Rank::Mass,
        },
        pareto_only: typed.pareto,
        show: typed.show.max(typed.pick) as usize,
    })
}

/// A voltage to be reached in time; the touch voltage of the file where none was typed.
fn target(within: &Option<String>, voltage: &Option<String>, bank: &Bank, wrong: &mut Vec<String>) -> Option<Target> {
    let within = value("--within", within, wrong);
    let voltage = value("--voltage", voltage, wrong).unwrap_or(bank.description().touch_voltage);
    within.map(|within| Target { voltage, within })
}

fn ambient(typed: &BuildArgs, wrong: &mut Vec<String>) -> Option<Temperature> {
    value("--ambient", &typed.ambient, wrong)
}

/// Values that may be written and that nothing could ever meet: flag, value in SI, an example.
fn zero(given: &[(&str, Option<f64>, &str)], wrong: &mut Vec<String>) {
    for (flag, _, example) in given.iter().filter(|(_, value, _)| value.is_some_and(|v| v <= 0.0)) {
        wrong.push(format!("`{flag}` is zero; write a value above it, such as `{example}`"));
    }
}

fn value<Q: Quantity>(flag: &str, text: &Option<String>, wrong: &mut Vec<String>) -> Option<Q> {
    let text = text.as_ref()?;
    parse(text)
        .map(|reading| reading.value)
        .map_err(|e| wrong.push(format!("`{flag}`: {}; {}", e.problem, e.help)))
        .ok()
}

/// Two nodes with a comma between them.
fn pair(flag: &str, text: &str, wrong: &mut Vec<String>) -> Option<Pair> {
    match text.split(',').map(str::trim).collect::<Vec<_>>()[..] {
        [a, b] if !a.is_empty() && !b.is_empty() => Some([a.to_string(), b.to_string()]),
        _ => {
            wrong.push(format!("`{flag}`: `{text}` is no pair of nodes; write two of them, such as `P,N`"));
            None
        }
    }
}

fn series(word: &str, wrong: &mut Vec<String>) -> Option<Series> {
    let found = Series::ALL.into_iter().find(|s| s.name().eq_ignore_ascii_case(word));
    if found.is_none() {
        let names = Series::ALL.map(Series::name).join(", ");
        wrong.push(format!("`--series`: `{word}` is no series of preferred values; write one of: {names}"));
    }
    found
}

fn elements(typed: &BuildArgs) -> Result<Vec<Element>, Refused> {
    let (name, bytes) = match &typed.stock {
        Some(path) => {
            let Input { name, bytes } = input::from_file(path).map_err(Refused::Words)?;
            (name, bytes)
        }
        None => ("the generic elements".to_string(), generic_stock().into()),
    };
    file::read_stock(&name, &bytes).map_err(Refused::Findings)
}

/// `RB`, or `RB2` and so on where the bank has it.
fn free_id(wish: &str, bank: &Bank) -> String {
    let d = bank.description();
    let taken = |id: &str| {
        d.resistors.iter().any(|r| r.id == id)
            || d.capacitors.iter().any(|c| c.id == id)
            || d.sinks.iter().any(|s| s.id == id)
            || d.supplies.iter().any(|s| s.id == id)
    };
    let numbered = (2..).map(|n| format!("{wish}{n}"));
    std::iter::once(wish.to_string()).chain(numbered).find(|id| !taken(id)).unwrap_or_default()
}

/// A bank file with a design in it.
struct Written {
    text: String,
    /// What was written, as the start of a sentence that ends with where.
    told: String,
}

/// Prints the answer, or the part that was picked, and writes the file where that was asked.
fn conclude<F: Serialize>(
    build: &BuildArgs,
    given: &GivenArgs,
    sizing: &Sizing<F>,
    report: &SizeReport,
    write: &dyn Fn(&Candidate<F>) -> Result<Written, String>,
    output: &mut Output,
) -> u8 {
    if let Err(e) = report::check_finite(sizing) {
        return no_verdict(&e.to_string(), output);
    }
    let picked = sizing.candidates.get(build.pick as usize - 1);
    if picked.is_none() && !sizing.candidates.is_empty() {
        let found = sizing.candidates.len();
        return output.problem(&format!("`--pick {}`: only {found} designs were found", build.pick), INPUT_WRONG);
    }
    if let (Some(path), Some(candidate)) = (&given.write, picked) {
        let written = write(candidate).and_then(|Written { text, told }| {
            let saved = if given.overwrite { overwrite(path, &text) } else { save("--write", path, text.as_bytes()) };
            saved.map(|()| told)
        });
        match written {
            Ok(told) => output.notice(&format!("{told} was written to `{}`.", path.display())),
            Err(problem) => return output.problem(&problem, INPUT_WRONG),
        }
    }
    let status = sizing.exit_code();
    if let (true, Some(candidate)) = (given.part, picked) {
        return output.result(&candidate.part, status);
    }
    match given.format {
        SizeFormat::Text => output.text(&report.text(output.width()), status),
        SizeFormat::Markdown => output.result(&report.markdown(), status),
        SizeFormat::Json => match report::size_json(sizing) {
            Ok(text) => output.result(&text, status),
            Err(e) => no_verdict(&e.to_string(), output),
        },
    }
}

fn overwrite(path: &Path, text: &str) -> Result<(), String> {
    std::fs::write(path, text).map_err(|e| format!("`{}` can't be written: {e}", path.display()))
}
