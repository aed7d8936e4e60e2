//! `size balancing`.

use super::typed::{BuildArgs, GivenArgs};
use super::{Refused, Written, ambient, build, conclude, pair, read, sized, target, value, zero};
use crate::bank::Bank;
use crate::bank::file;
use crate::cli::output::Output;
use crate::quantity::Quantity;
use crate::report;
use crate::size::{BalancingAsk, BalancingFigures, Candidate, balancing};
use clap::Args;
use std::io::Read;
use std::path::PathBuf;

const EXAMPLES: &str = "\
Examples: ebbvolt size balancing bank.yaml --leakage 3mA
          ebbvolt size balancing bank.yaml --max-loss 10W --stock shelf.csv
          ebbvolt size balancing bank.yaml --limits --write balanced.yaml

Exit status: 0 found; 1 nothing does the job; 2 wrong input; 3 no verdict";

#[derive(Args)]
#[command(after_help = EXAMPLES)]
pub(in crate::cli) struct BalancingArgs {
    /// The bank file; - reads standard input
    #[arg(value_name = "BANK.yaml")]
    pub bank: PathBuf,
    /// Greatest leakage of one unit, or greatest difference between two, such as 3mA; without it what is typical of the
    /// dielectric
    #[arg(long, value_name = "CURRENT", allow_hyphen_values = true)]
    pub leakage: Option<String>,
    /// Rated voltage of units for which the file gives none, such as 450V
    #[arg(long, value_name = "VOLTAGE", allow_hyphen_values = true)]
    pub rated: Option<String>,
    /// The bank is charged so slowly that the resistors set the division on the way
    #[arg(long)]
    pub slow_charge: bool,
    /// Greatest standing loss of all of them together at the highest voltage, such as 10W
    #[arg(long, value_name = "POWER", allow_hyphen_values = true)]
    pub max_loss: Option<String>,
    /// They have to meet the limits of the file too
    #[arg(long, conflicts_with = "within")]
    pub limits: bool,
    /// They have to discharge the bank in this time too, such as 5min
    #[arg(long, value_name = "TIME", allow_hyphen_values = true)]
    pub within: Option<String>,
    /// To this voltage; without it the touch voltage of the file
    #[arg(long, value_name = "VOLTAGE", allow_hyphen_values = true, requires = "within")]
    pub voltage: Option<String>,
    /// The two ends of the string, such as P,N; without it the terminals
    #[arg(long, value_name = "NODE,NODE")]
    pub across: Option<String>,
    /// A capacitor of the string that is meant, where several lie between the two ends
    #[arg(long, value_name = "NAME")]
    pub capacitor: Option<String>,
    /// What the new resistors are called before their numbers; without it RB
    #[arg(long, value_name = "NAME")]
    pub id: Option<String>,
    #[command(flatten)]
    pub build: BuildArgs,
    #[command(flatten)]
    pub given: GivenArgs,
}

/// Reads, searches and prints.
pub(super) fn run(typed: &BalancingArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    let prepared = read(&typed.bank, stdin, |bank| ask(typed, bank));
    let (input, sizing) = match sized(prepared, output, balancing) {
        Ok(sized) => sized,
        Err(status) => return status,
    };
    let write = |picked: &Candidate<BalancingFigures>| {
        let mut bytes = input.bytes.clone();
        for lumped in &picked.figures.written_out {
            bytes = file::with_groups(&input.name, &bytes, &lumped.id, &lumped.groups)?.into_bytes();
        }
        let mut text = String::new();
        for resistor in &picked.figures.resistors {
            text = file::with_resistor(&input.name, &bytes, resistor)?;
            bytes = text.clone().into_bytes();
        }
        Ok(Written { text, told: format!("The bank file with {}", sizing.id) })
    };
    conclude(&typed.build, &typed.given, &sizing, &report::size_balancing(&sizing), &write, output)
}

/// What the words ask for; every value that is wrong is told at once.
fn ask(typed: &BalancingArgs, bank: &Bank) -> Result<BalancingAsk, Refused> {
    let mut wrong = Vec::new();
    let ask = BalancingAsk {
        leakage: value("--leakage", &typed.leakage, &mut wrong),
        rated: value("--rated", &typed.rated, &mut wrong),
        fast_charge: !typed.slow_charge,
        max_loss: value("--max-loss", &typed.max_loss, &mut wrong),
        limits: typed.limits,
        target: target(&typed.within, &typed.voltage, bank, &mut wrong),
        ambient: ambient(&typed.build, &mut wrong),
        across: typed.across.as_ref().and_then(|text| pair("--across", text, &mut wrong)),
        capacitor: typed.capacitor.clone(),
        build: build(&typed.build, &mut wrong)?,
        id: typed.id.clone(),
    };
    zero(
        &[
            ("--leakage", ask.leakage.map(Quantity::si), "3mA"),
            ("--rated", ask.rated.map(Quantity::si), "450V"),
            ("--max-loss", ask.max_loss.map(Quantity::si), "10W"),
            ("--within", ask.target.map(|t| t.within.si()), "5min"),
            ("--voltage", ask.target.map(|t| t.voltage.si()), "60V"),
        ],
        &mut wrong,
    );
    if wrong.is_empty() { Ok(ask) } else { Err(Refused::Words(wrong.join("\n"))) }
}
