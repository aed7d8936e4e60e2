//! `size`: resistors that do a job, from preferred values and parts at hand.

use super::args::{BleederArgs, Connected, RankBy, SizeArgs, SizeFormat, SizeJob};
use super::input::{self, Input};
use super::output::Output;
use super::plan::{save, sha256};
use super::{INPUT_WRONG, NO_VERDICT};
use crate::bank::Bank;
use crate::bank::description::Connection;
use crate::bank::file;
use crate::bank::stock::{Element, Values};
use crate::data::{Series, generic_stock};
use crate::finding::Findings;
use crate::quantity::{Quantity, Ratio, Tolerance, parse};
use crate::report;
use crate::size::{Ask, Rank, SizeError, Sizing, Target, bleeder};
use std::io::Read;

/// Why there is nothing to size.
enum Refused {
    Words(String),
    Findings(Findings),
}

/// Reads, searches and prints.
pub(super) fn run(typed: &SizeArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    let SizeJob::Bleeder(typed) = &typed.job;
    let prepared = read(typed, stdin).and_then(|input| {
        let (bank, _) = file::read(&input.name, &input.bytes).map_err(Refused::Findings)?;
        let ask = ask(typed, &bank)?;
        Ok((input, bank, ask))
    });
    let (input, bank, ask) = match prepared {
        Ok(prepared) => prepared,
        Err(Refused::Words(problem)) => return output.problem(&problem, INPUT_WRONG),
        Err(Refused::Findings(findings)) => return output.findings(&findings),
    };
    match bleeder(&bank, &sha256(&input.bytes), &ask) {
        Ok(sizing) => conclude(typed, &input, &ask, &sizing, output),
        Err(e @ (SizeError::Asked(_) | SizeError::Placed(_))) => output.problem(&e.to_string(), INPUT_WRONG),
        Err(SizeError::Engine(e)) => no_verdict(&e.to_string(), output),
    }
}

fn no_verdict(problem: &str, output: &mut Output) -> u8 {
    let advice = "Nothing is sized: the tool could not certify its own result. Please report it with the bank file.";
    output.problem(&format!("internal error: {problem}\n{advice}"), NO_VERDICT)
}

fn read(typed: &BleederArgs, stdin: &mut dyn Read) -> Result<Input, Refused> {
    if typed.bank.as_os_str() == "-" {
        return input::from_stdin(stdin).map_err(Refused::Words);
    }
    input::from_file(&typed.bank).map_err(Refused::Words)
}

/// What the words ask for; every value that is wrong is told at once.
fn ask(typed: &BleederArgs, bank: &Bank) -> Result<Ask, Refused> {
    let mut wrong = Vec::new();
    let within = value("--within", &typed.within, &mut wrong);
    let voltage = value("--voltage", &typed.voltage, &mut wrong);
    let margin = value::<Ratio>("--margin", &typed.margin, &mut wrong);
    let tolerance = value::<Ratio>("--tolerance", &typed.tolerance, &mut wrong).and_then(|t| {
        Tolerance::new(t, t).map_err(|e| wrong.push(format!("`--tolerance`: {}; {}", e.problem, e.help))).ok()
    });
    let series = typed.series.as_ref().and_then(|word| series(word, &mut wrong));
    let across = typed.across.as_ref().and_then(|text| match text.split(',').map(str::trim).collect::<Vec<_>>()[..] {
        [a, b] if !a.is_empty() && !b.is_empty() => Some([a.to_string(), b.to_string()]),
        _ => {
            wrong.push(format!("`--across`: `{text}` is no pair of nodes; write two of them, such as `P,N`"));
            None
        }
    });
    let mut ask = Ask {
        target: within.map(|within| Target { voltage: voltage.unwrap_or(bank.description().touch_voltage), within }),
        single_fault: typed.single_fault,
        ambient: value("--ambient", &typed.ambient, &mut wrong),
        max_loss: value("--max-loss", &typed.max_loss, &mut wrong),
        max_current: value("--max-current", &typed.max_current, &mut wrong),
        margin: margin.map_or(0.0, Quantity::si),
        elements: Vec::new(),
        generic: typed.stock.is_none(),
        series_up_to: typed.series_up_to,
        parallel_up_to: typed.parallel_up_to,
        id: typed.id.clone().unwrap_or_else(|| free_id(bank)),
        across,
        connection: typed.connection.map(|connected| match connected {
            Connected::Delta => Connection::Delta,
            Connected::Star => Connection::Star,
            Connected::OpenDelta => Connection::OpenDelta,
        }),
        rank: rank(typed.rank),
        pareto_only: typed.pareto,
        show: (typed.show.max(typed.pick)) as usize,
    };
    zero(&ask, &mut wrong);
    if !wrong.is_empty() {
        return Err(Refused::Words(wrong.join("\n")));
    }
    ask.elements = elements(typed)?;
    for element in &mut ask.elements {
        if ask.generic || element.tolerance.is_none() {
            element.tolerance = tolerance.or(element.tolerance);
        }
        if let (Values::Preferred { series: own, .. }, Some(asked)) = (&mut element.values, series) {
            *own = asked;
        }
    }
    Ok(ask)
}

/// Values that may be written and that nothing could ever meet.
fn zero(ask: &Ask, wrong: &mut Vec<String>) {
    let given = [
        ("--within", ask.target.map(|t| t.within.si()), "5min"),
        ("--voltage", ask.target.map(|t| t.voltage.si()), "60V"),
        ("--max-loss", ask.max_loss.map(Quantity::si), "20W"),
        ("--max-current", ask.max_current.map(Quantity::si), "100mA"),
    ];
    for (flag, _, example) in given.iter().filter(|(_, value, _)| value.is_some_and(|v| v <= 0.0)) {
        wrong.push(format!("`{flag}` is zero; write a value above it, such as `{example}`"));
    }
    if ask.margin >= 1.0 {
        wrong.push("`--margin` leaves nothing to use; write a share under 100 %, such as `40%`".into());
    }
}

fn rank(typed: RankBy) -> Rank {
    match typed {
        RankBy::Elements => Rank::Elements,
        RankBy::Loss => Rank::Loss,
        RankBy::Wait => Rank::Wait,
        RankBy::Price => Rank::Price,
        RankBy::Mass => Rank::Mass,
    }
}

fn value<Q: Quantity>(flag: &str, text: &Option<String>, wrong: &mut Vec<String>) -> Option<Q> {
    let text = text.as_ref()?;
    parse(text)
        .map(|reading| reading.value)
        .map_err(|e| wrong.push(format!("`{flag}`: {}; {}", e.problem, e.help)))
        .ok()
}

fn series(word: &str, wrong: &mut Vec<String>) -> Option<Series> {
    let found = Series::ALL.into_iter().find(|s| s.name().eq_ignore_ascii_case(word));
    if found.is_none() {
        let names = Series::ALL.map(Series::name).join(", ");
        wrong.push(format!("`--series`: `{word}` is no series of preferred values; write one of: {names}"));
    }
    found
}

fn elements(typed: &BleederArgs) -> Result<Vec<Element>, Refused> {
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
fn free_id(bank: &Bank) -> String {
    let d = bank.description();
    let taken = |id: &str| {
        d.resistors.iter().any(|r| r.id == id)
            || d.capacitors.iter().any(|c| c.id == id)
            || d.sinks.iter().any(|s| s.id == id)
            || d.supplies.iter().any(|s| s.id == id)
    };
    let numbered = (2..).map(|n| format!("RB{n}"));
    std::iter::once("RB".to_string()).chain(numbered).find(|id| !taken(id)).unwrap_or_default()
}

/// Prints the answer, or the part that was picked, and writes the file where that was asked.
fn conclude(typed: &BleederArgs, input: &Input, ask: &Ask, sizing: &Sizing, output: &mut Output) -> u8 {
    if let Err(e) = report::check_finite(sizing) {
        return no_verdict(&e.to_string(), output);
    }
    let picked = sizing.candidates.get(typed.pick as usize - 1);
    if picked.is_none() && !sizing.candidates.is_empty() {
        let found = sizing.candidates.len();
        return output.problem(&format!("`--pick {}`: only {found} designs were found", typed.pick), INPUT_WRONG);
    }
    if let (Some(path), Some(candidate)) = (&typed.write, picked) {
        let written = file::with_resistor(&input.name, &input.bytes, &candidate.resistor).and_then(|text| {
            if typed.overwrite { overwrite(path, &text) } else { save("--write", path, text.as_bytes()) }
        });
        match written {
            Ok(()) => output.notice(&format!("The bank file with {} was written to `{}`.", ask.id, path.display())),
            Err(problem) => return output.problem(&problem, INPUT_WRONG),
        }
    }
    let status = sizing.exit_code();
    if let (true, Some(candidate)) = (typed.part, picked) {
        return output.result(&candidate.part, status);
    }
    match typed.format {
        SizeFormat::Text => output.text(&report::size_text(sizing, output.width()), status),
        SizeFormat::Markdown => output.result(&report::size_markdown(sizing), status),
        SizeFormat::Json => match report::size_json(sizing) {
            Ok(text) => output.result(&text, status),
            Err(e) => no_verdict(&e.to_string(), output),
        },
    }
}

fn overwrite(path: &std::path::Path, text: &str) -> Result<(), String> {
    std::fs::write(path, text).map_err(|e| format!("`{}` can't be written: {e}", path.display()))
}
