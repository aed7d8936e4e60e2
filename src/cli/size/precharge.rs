//! `size precharge`.

use super::typed::{BuildArgs, GivenArgs};
use super::{Refused, Written, ambient, build, conclude, pair, read, sized, value, zero};
use crate::bank::Bank;
use crate::bank::file;
use crate::cli::output::Output;
use crate::quantity::{Quantity, Ratio, Time};
use crate::report;
use crate::size::{Attempts, Candidate, MainContactor, PrechargeAsk, PrechargeFigures, precharge};
use clap::Args;
use std::io::Read;
use std::path::PathBuf;

const EXAMPLES: &str = "\
Examples: ebbvolt size precharge bank.yaml --within 2s
          ebbvolt size precharge bank.yaml --within 2s --share 90% --max-current 8A
          ebbvolt size precharge bank.yaml --within 2s --main 20mohm --max-inrush 400A
          ebbvolt size precharge bank.yaml --within 2s --attempts 3 --every 1min

Exit status: 0 found; 1 nothing does the job; 2 wrong input; 3 no verdict";

#[derive(Args)]
#[command(after_help = EXAMPLES)]
pub(in crate::cli) struct PrechargeArgs {
    /// The bank file; - reads standard input
    #[arg(value_name = "BANK.yaml")]
    pub bank: PathBuf,
    /// How long the precharge takes, from an empty bank, such as 2s
    #[arg(long, value_name = "TIME", allow_hyphen_values = true)]
    pub within: String,
    /// Share of the supply's voltage to reach; without it and --max-inrush 95%
    #[arg(long, value_name = "SHARE", allow_hyphen_values = true)]
    pub share: Option<String>,
    /// Greatest current as the main contactor closes after --within
    #[arg(long, value_name = "CURRENT", allow_hyphen_values = true, requires = "main")]
    pub max_inrush: Option<String>,
    /// Least resistance of the closed main path: source, cables, contacts
    #[arg(long, value_name = "RESISTANCE", allow_hyphen_values = true)]
    pub main: Option<String>,
    /// Greatest current through the precharge resistor, such as 10A
    #[arg(long, value_name = "CURRENT", allow_hyphen_values = true)]
    pub max_current: Option<String>,
    /// Charges in a row that it has to bear, each from an empty bank
    #[arg(long, value_name = "COUNT", requires = "every", value_parser = clap::value_parser!(u32).range(1..=1_000_000))]
    pub attempts: Option<u32>,
    /// From the start of one attempt to the start of the next
    #[arg(long, value_name = "TIME", allow_hyphen_values = true, requires = "attempts")]
    pub every: Option<String>,
    /// The supply of the file that is sized anew; without it the only one
    #[arg(long, value_name = "NAME")]
    pub supply: Option<String>,
    /// A new supply of this name; without a supply in the file S1
    #[arg(long, value_name = "NAME", conflicts_with = "supply")]
    pub id: Option<String>,
    /// Voltage of a new supply; without it the highest of the file
    #[arg(long, value_name = "VOLTAGE", allow_hyphen_values = true)]
    pub voltage: Option<String>,
    /// The pair that a new supply feeds, such as P,N; without it the terminals
    #[arg(long, value_name = "NODE,NODE")]
    pub across: Option<String>,
    /// Elements without a pulse or overload rating too; their pulse is then not checked
    #[arg(long)]
    pub unrated_pulse: bool,
    #[command(flatten)]
    pub build: BuildArgs,
    #[command(flatten)]
    pub given: GivenArgs,
}

/// Reads, searches and prints.
pub(super) fn run(typed: &PrechargeArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    let prepared = read(&typed.bank, stdin, |_: &Bank| ask(typed));
    let (input, sizing) = match sized(prepared, output, precharge) {
        Ok(sized) => sized,
        Err(status) => return status,
    };
    let write = |picked: &Candidate<PrechargeFigures>| {
        let figures = &picked.figures;
        let text = file::with_supply(&input.name, &input.bytes, &figures.supply)?;
        let steps = figures.steps.as_ref().map_or_else(String::new, |steps| {
            format!("No step connects {}; the design was tried with these steps:\n{steps}", sizing.id)
        });
        Ok(Written { text, told: format!("{steps}The bank file with the series resistance of {}", sizing.id) })
    };
    conclude(&typed.build, &typed.given, &sizing, &report::size_precharge(&sizing), &write, output)
}

/// What the words ask for; every value that is wrong is told at once.
fn ask(typed: &PrechargeArgs) -> Result<PrechargeAsk, Refused> {
    let mut wrong = Vec::new();
    let within = value::<Time>("--within", &Some(typed.within.clone()), &mut wrong);
    let every = value::<Time>("--every", &typed.every, &mut wrong);
    let main = value("--main", &typed.main, &mut wrong);
    let max_inrush = value("--max-inrush", &typed.max_inrush, &mut wrong);
    let share = value::<Ratio>("--share", &typed.share, &mut wrong);
    if share.is_some_and(|s| s.si() >= 1.0) {
        wrong.push("`--share`: the whole is only approached; write a share under 100 %, such as `95%`".into());
    }
    let ask = PrechargeAsk {
        supply: typed.supply.clone(),
        id: typed.id.clone(),
        voltage: value("--voltage", &typed.voltage, &mut wrong),
        across: typed.across.as_ref().and_then(|text| pair("--across", text, &mut wrong)),
        share,
        main: main.map(|resistance| MainContactor { resistance, max_inrush }),
        max_current: value("--max-current", &typed.max_current, &mut wrong),
        attempts: typed.attempts.zip(every).map(|(count, every)| Attempts { count, every }),
        ambient: ambient(&typed.build, &mut wrong),
        unrated_pulse: typed.unrated_pulse,
        ..PrechargeAsk::within(within.unwrap_or_default())
    };
    zero(
        &[
            ("--within", within.map(Quantity::si), "2s"),
            ("--share", share.map(Quantity::si), "95%"),
            ("--max-inrush", max_inrush.map(Quantity::si), "400A"),
            ("--max-current", ask.max_current.map(Quantity::si), "10A"),
            ("--every", every.map(Quantity::si), "1min"),
            ("--voltage", ask.voltage.map(Quantity::si), "565V"),
        ],
        &mut wrong,
    );
    let overlap = within.zip(every).is_some_and(|(within, every)| every.si() > 0.0 && every < within);
    if overlap {
        wrong
            .push("`--every` is shorter than `--within`: one attempt can't begin before the one before is over".into());
    }
    let build = build(&typed.build, &mut wrong)?;
    if wrong.is_empty() { Ok(PrechargeAsk { build, ..ask }) } else { Err(Refused::Words(wrong.join("\n"))) }
}
