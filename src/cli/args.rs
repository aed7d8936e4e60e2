//! What was typed. What it means is decided by each command.

use super::Terminal;
use clap::{Args, CommandFactory, FromArgMatches, Parser, Subcommand, ValueEnum};
use std::ffi::OsString;
use std::path::PathBuf;

/// Plans the discharge of charged capacitor banks: how long to wait, what is left, what a failed part changes.
///
/// Every result is a prediction from a description. Before anyone touches, the voltage is tested with a rated
/// instrument that is proved before and after.
#[derive(Parser)]
#[command(name = "ebbvolt", version, arg_required_else_help = true, disable_help_subcommand = true, after_help = START)]
pub(super) struct Typed {
    #[command(subcommand)]
    pub command: Command,
}

const START: &str = "\
To start: ebbvolt plan --example
          ebbvolt draft > bank.yaml, then ebbvolt plan bank.yaml";

const PLAN_EXAMPLES: &str = "\
Examples: ebbvolt plan bank.yaml
          ebbvolt plan --charged-to 565V --capacitance 3300uF --bleeder 22k --touch-voltage 50V

Exit status: 0 all limits met and no rating exceeded; 1 a limit not met, a rating exceeded or a wait of never; \
2 wrong input; 3 no verdict";

const SHEET_EXAMPLES: &str = "\
Examples: ebbvolt sheet bank.yaml -o sheet.html
          ebbvolt sheet --example --format text

The exit status is that of `ebbvolt plan`.";

const LABEL_EXAMPLES: &str = "\
Examples: ebbvolt label bank.yaml -o notice.svg
          ebbvolt label --size 90x60mm --page a4 one.yaml two.yaml -o notices.svg

The exit status is that of `ebbvolt plan`; of several banks, the highest.";

const TRACE_EXAMPLES: &str = "\
Examples: ebbvolt trace bank.yaml
          ebbvolt trace bank.yaml --format csv --times 0s,30s,5min

Loads of parts are nominal and of the whole part; voltages and tools are given nominal and highest. The exit status is \
that of `ebbvolt plan`.";

#[derive(Subcommand)]
pub(super) enum Command {
    /// Print the plan of a bank: the wait to keep, stored energy, limits, ratings, findings
    Plan(Box<PlanArgs>),
    /// Find resistors that do a job, from preferred values and parts at hand
    Size(super::size::SizeArgs),
    /// Show voltages, currents and powers against time, as a plot or as figures
    #[command(after_help = TRACE_EXAMPLES)]
    Trace(TraceArgs),
    /// Print the discharge sheet of a bank: a checklist to carry to the cabinet, to fill in and to sign
    #[command(after_help = SHEET_EXAMPLES)]
    Sheet(SheetArgs),
    /// Draw the notice for the cabinet, with the hazard and the delay before opening, as SVG
    #[command(after_help = LABEL_EXAMPLES)]
    Label(LabelArgs),
    /// List the published limits that a bank file can name
    #[command(after_help = "Example: ebbvolt limits --format csv")]
    Limits(LimitsArgs),
    /// Print a commented bank file to start from
    #[command(after_help = "Example: ebbvolt draft > bank.yaml")]
    Draft,
}

#[derive(Args)]
#[command(after_help = PLAN_EXAMPLES)]
pub(super) struct PlanArgs {
    /// The bank file; - reads standard input
    #[arg(value_name = "BANK.yaml")]
    pub bank: Option<PathBuf>,
    /// Plan the bank that is built in
    #[arg(long)]
    pub example: bool,
    /// Show the calculation so that it can be checked by hand
    #[arg(long)]
    pub working: bool,
    /// Instead of the plan, print the bank file with plain parts only: three phases as their legs, kvar as farads
    #[arg(long)]
    pub expand: bool,
    /// How many parts may have failed at once: 1, or 2 for every two of them as well
    #[arg(long, value_name = "NUMBER", default_value_t = 1, value_parser = clap::value_parser!(u8).range(1..=2))]
    pub faults: u8,
    /// How much each wait changes per percent of each part's value, and what to tighten first
    #[arg(long)]
    pub sensitivity: bool,
    /// Draw this many random banks within the tolerances, beside the worst case
    #[arg(long, value_name = "NUMBER", value_parser = clap::value_parser!(u32).range(1..=1_000_000))]
    pub draws: Option<u32>,
    /// How the draws are spread over the tolerances; normal takes their ends as 3 standard deviations
    #[arg(long, value_enum, default_value_t = DrawDistribution::Uniform, requires = "draws")]
    pub draw_from: DrawDistribution,
    /// The same seed gives the same draws
    #[arg(long, value_name = "NUMBER", default_value_t = 1, requires = "draws")]
    pub seed: u64,
    /// How the plan is written
    #[arg(long, value_enum, default_value_t = PlanFormat::Text)]
    pub format: PlanFormat,
    #[command(flatten)]
    pub quick: QuickArgs,
}

/// Which bank: of a file, of standard input, or the one that is built in.
#[derive(Args)]
pub(super) struct BankArgs {
    /// The bank file; - reads standard input
    #[arg(value_name = "BANK.yaml", required_unless_present = "example", conflicts_with = "example")]
    pub bank: Option<PathBuf>,
    /// Take the bank that is built in
    #[arg(long)]
    pub example: bool,
}

#[derive(Args)]
pub(super) struct SheetArgs {
    #[command(flatten)]
    pub bank: BankArgs,
    /// How the sheet is written
    #[arg(long, value_enum, default_value_t = SheetFormat::Html)]
    pub format: SheetFormat,
    /// The date to print on it, as year-month-day; without one, none is printed
    #[arg(long, value_name = "DATE")]
    pub date: Option<String>,
    /// The paper of the HTML
    #[arg(long, value_enum, default_value_t = SheetPaper::A4)]
    pub paper: SheetPaper,
    /// Write to this file instead of standard output; what it held is replaced
    #[arg(short = 'o', long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

#[derive(Args)]
pub(super) struct LabelArgs {
    /// The bank file, or several for several notices on a page; - reads standard input
    #[arg(value_name = "BANK.yaml", required_unless_present = "example", conflicts_with = "example")]
    pub banks: Vec<PathBuf>,
    /// Take the bank that is built in
    #[arg(long)]
    pub example: bool,
    /// Width and height of one notice; 120x80mm if not given
    #[arg(long, value_name = "SIZE")]
    pub size: Option<String>,
    /// Lay the notices out on a page of this paper
    #[arg(long, value_enum)]
    pub page: Option<SheetPaper>,
    /// How many of each, on a page
    #[arg(long, value_name = "NUMBER", default_value_t = 1, value_parser = clap::value_parser!(u8).range(1..=100))]
    pub copies: u8,
    /// Write to this file instead of standard output; what it held is replaced
    #[arg(short = 'o', long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

impl LabelArgs {
    /// The banks that were named, one by one.
    pub fn each(&self) -> Vec<BankArgs> {
        if self.example {
            return vec![BankArgs { bank: None, example: true }];
        }
        self.banks.iter().map(|bank| BankArgs { bank: Some(bank.clone()), example: false }).collect()
    }
}

#[derive(Args)]
pub(super) struct TraceArgs {
    #[command(flatten)]
    pub bank: BankArgs,
    /// How it is written
    #[arg(long, value_enum, default_value_t = TraceFormat::Text)]
    pub format: TraceFormat,
    /// Only these moments from isolation, such as 0s,30s,5min; without them, moments are chosen where voltages change
    #[arg(long, value_name = "TIMES", allow_hyphen_values = true)]
    pub times: Option<String>,
    /// Write to this file instead of standard output; what it held is replaced
    #[arg(short = 'o', long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

/// Formats of a trace.
#[derive(Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum TraceFormat {
    Text,
    Csv,
    Json,
    Svg,
}

/// Formats of a sheet.
#[derive(Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum SheetFormat {
    Html,
    Markdown,
    Text,
}

/// Papers of a sheet.
#[derive(Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum SheetPaper {
    A4,
    Letter,
}

/// One capacitance with one bleeder, without a file.
#[derive(Args)]
#[command(next_help_heading = "Without a file: one capacitance, one bleeder")]
pub(super) struct QuickArgs {
    /// Voltage at isolation, such as 565V
    #[arg(long, value_name = "VOLTAGE", allow_hyphen_values = true)]
    pub charged_to: Option<String>,
    /// Worst credible voltage; without it --charged-to is taken for both
    #[arg(long, value_name = "VOLTAGE", allow_hyphen_values = true)]
    pub highest: Option<String>,
    /// Capacitance, such as 3300uF
    #[arg(long, value_name = "CAPACITANCE", allow_hyphen_values = true)]
    pub capacitance: Option<String>,
    /// Bleeder resistance, such as 22k
    #[arg(long, value_name = "RESISTANCE", allow_hyphen_values = true)]
    pub bleeder: Option<String>,
    /// The voltage to wait for, such as 50V
    #[arg(long, value_name = "VOLTAGE", allow_hyphen_values = true)]
    pub touch_voltage: Option<String>,
    /// Tolerance of the capacitance, such as 20%
    #[arg(long, value_name = "SHARE", allow_hyphen_values = true)]
    pub capacitance_tolerance: Option<String>,
    /// Tolerance of the bleeder, such as 5%
    #[arg(long, value_name = "SHARE", allow_hyphen_values = true)]
    pub bleeder_tolerance: Option<String>,
    /// Also write the bank file that this stands for; an existing file is never overwritten
    #[arg(long, value_name = "FILE")]
    pub save: Option<PathBuf>,
}

#[derive(Args)]
pub(super) struct LimitsArgs {
    /// How the list is written
    #[arg(long, value_enum, default_value_t = ListFormat::Text)]
    pub format: ListFormat,
}

/// How random draws are spread.
#[derive(Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum DrawDistribution {
    Uniform,
    Normal,
}

/// Formats of a plan. There is no CSV: a plan is not one table.
#[derive(Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum PlanFormat {
    Text,
    Json,
    Markdown,
}

/// Formats of a list.
#[derive(Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(super) enum ListFormat {
    Text,
    Json,
    Markdown,
    Csv,
}

/// The command line as typed; the error is what to print instead, help and version among it.
pub(super) fn parse(words: impl Iterator<Item = OsString>, terminal: Terminal) -> Result<Typed, clap::Error> {
    let command = Typed::command().term_width(terminal.width.clamp(60, 100));
    Typed::from_arg_matches(&command.try_get_matches_from(words)?)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_command_line_is_consistent() {
        Typed::command().debug_assert();
    }
}
