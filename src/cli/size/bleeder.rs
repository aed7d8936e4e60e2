//! `size bleeder`.

use super::typed::{BuildArgs, GivenArgs};
use super::{Refused, Written, ambient, build, conclude, free_id, pair, read, sized, target, value, zero};
use crate::bank::Bank;
use crate::bank::description::{Connection, Switched};
use crate::bank::file;
use crate::cli::output::Output;
use crate::quantity::Quantity;
use crate::report;
use crate::size::{BleederAsk, bleeder};
use clap::{Args, ValueEnum};
use std::io::Read;
use std::path::PathBuf;

const EXAMPLES: &str = "\
Examples: ebbvolt size bleeder bank.yaml --series E24 --parallel-up-to 2
          ebbvolt size bleeder bank.yaml --within 5min --stock shelf.csv --margin 40%
          ebbvolt size bleeder bank.yaml --write with-bleeder.yaml
          ebbvolt size bleeder bank.yaml --switched --closes-after 100ms

Exit status: 0 found; 1 nothing does the job; 2 wrong input; 3 no verdict";

#[derive(Args)]
#[command(after_help = EXAMPLES)]
pub(in crate::cli) struct BleederArgs {
    /// The bank file; - reads standard input
    #[arg(value_name = "BANK.yaml")]
    pub bank: PathBuf,
    /// Reach this time instead of the limits of the file, such as 5min
    #[arg(long, value_name = "TIME", allow_hyphen_values = true)]
    pub within: Option<String>,
    /// Reach this voltage; without it the touch voltage of the file
    #[arg(long, value_name = "VOLTAGE", allow_hyphen_values = true, requires = "within")]
    pub voltage: Option<String>,
    /// It has to hold with any one part failed as well
    #[arg(long)]
    pub single_fault: bool,
    /// Greatest standing loss at the highest voltage, such as 20W
    #[arg(long, value_name = "POWER", allow_hyphen_values = true)]
    pub max_loss: Option<String>,
    /// Greatest current through the resistor, such as 100mA
    #[arg(long, value_name = "CURRENT", allow_hyphen_values = true)]
    pub max_current: Option<String>,
    /// What the new resistor is called; without it RB, or RB2 and so on
    #[arg(long, value_name = "NAME")]
    pub id: Option<String>,
    /// Where it goes, such as P,N; without it the terminals
    #[arg(long, value_name = "NODE,NODE")]
    pub across: Option<String>,
    /// How it is connected in a three-phase bank; without it delta
    #[arg(long, value_enum)]
    pub connection: Option<Connected>,
    /// A contact connects it at isolation: no standing loss, but every discharge heats it
    #[arg(long, conflicts_with = "max_loss")]
    pub switched: bool,
    /// How long after isolation the slowest contact has closed, such as 100ms
    #[arg(long, value_name = "TIME", allow_hyphen_values = true, requires = "switched")]
    pub closes_after: Option<String>,
    /// How long after the bank is fed again the slowest contact has opened, such as 50ms
    #[arg(long, value_name = "TIME", allow_hyphen_values = true, requires = "switched")]
    pub opens_after: Option<String>,
    /// How many discharges in a row it has to bear; without it one
    #[arg(long, value_name = "COUNT", requires = "every", value_parser = clap::value_parser!(u32).range(1..=1_000_000))]
    pub discharges: Option<u32>,
    /// How far apart they are, from one isolation to the next, such as 10min
    #[arg(long, value_name = "TIME", allow_hyphen_values = true, requires = "switched")]
    pub every: Option<String>,
    #[command(flatten)]
    pub build: BuildArgs,
    #[command(flatten)]
    pub given: GivenArgs,
}

/// How a three-phase resistor is connected.
#[derive(Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(in crate::cli) enum Connected {
    Delta,
    Star,
    OpenDelta,
}

/// Reads, searches and prints.
pub(super) fn run(typed: &BleederArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    let prepared = read(&typed.bank, stdin, |bank| ask(typed, bank));
    let (input, sizing) = match sized(prepared, output, bleeder) {
        Ok(sized) => sized,
        Err(status) => return status,
    };
    let write = |picked: &crate::size::Candidate<_>| {
        let figures: &crate::size::BleederFigures = &picked.figures;
        file::with_resistor(&input.name, &input.bytes, &figures.resistor)
            .map(|text| Written { text, told: format!("The bank file with {}", sizing.id) })
    };
    conclude(&typed.build, &typed.given, &sizing, &report::size_bleeder(&sizing), &write, output)
}

/// What the words ask for; every value that is wrong is told at once.
fn ask(typed: &BleederArgs, bank: &Bank) -> Result<BleederAsk, Refused> {
    let mut wrong = Vec::new();
    let ask = BleederAsk {
        target: target(&typed.within, &typed.voltage, bank, &mut wrong),
        single_fault: typed.single_fault,
        ambient: ambient(&typed.build, &mut wrong),
        max_loss: value("--max-loss", &typed.max_loss, &mut wrong),
        max_current: value("--max-current", &typed.max_current, &mut wrong),
        build: build(&typed.build, &mut wrong)?,
        id: typed.id.clone().unwrap_or_else(|| free_id("RB", bank)),
        across: typed.across.as_ref().and_then(|text| pair("--across", text, &mut wrong)),
        connection: typed.connection.map(|connected| match connected {
            Connected::Delta => Connection::Delta,
            Connected::Star => Connection::Star,
            Connected::OpenDelta => Connection::OpenDelta,
        }),
        switched: typed.switched.then(|| contact(typed, &mut wrong)),
    };
    zero(
        &[
            ("--within", ask.target.map(|t| t.within.si()), "5min"),
            ("--voltage", ask.target.map(|t| t.voltage.si()), "60V"),
            ("--max-loss", ask.max_loss.map(Quantity::si), "20W"),
            ("--max-current", ask.max_current.map(Quantity::si), "100mA"),
            ("--every", ask.switched.and_then(|c| c.every).map(Quantity::si), "10min"),
        ],
        &mut wrong,
    );
    if wrong.is_empty() { Ok(ask) } else { Err(Refused::Words(wrong.join("\n"))) }
}

/// The contact that the words speak of.
fn contact(typed: &BleederArgs, wrong: &mut Vec<String>) -> Switched {
    let none = Switched::default();
    Switched {
        closes_after: value("--closes-after", &typed.closes_after, wrong).unwrap_or(none.closes_after),
        opens_after: value("--opens-after", &typed.opens_after, wrong).unwrap_or(none.opens_after),
        discharges: typed.discharges.unwrap_or(none.discharges),
        every: value("--every", &typed.every, wrong),
    }
}
