//! What every job of sizing takes from the command line, as typed.

use clap::{Args, ValueEnum};
use std::path::PathBuf;

/// From what the new resistor may be built, and which designs are wanted.
#[derive(Args)]
pub(in crate::cli) struct BuildArgs {
    /// Air at the resistors, instead of that of the file
    #[arg(long, value_name = "TEMPERATURE", allow_hyphen_values = true)]
    pub ambient: Option<String>,
    /// Share of the derated power that stays unused, such as 40%
    #[arg(long, value_name = "SHARE", allow_hyphen_values = true)]
    pub margin: Option<String>,
    /// Preferred values: E6, E12, E24, E48, E96 or E192; for elements that come in a series
    #[arg(long, value_name = "SERIES")]
    pub series: Option<String>,
    /// Tolerance of the elements, for those that give none and for the generic ones
    #[arg(long, value_name = "SHARE", allow_hyphen_values = true)]
    pub tolerance: Option<String>,
    /// Elements at hand, YAML or CSV; without it generic ones with invented ratings
    #[arg(long, value_name = "FILE")]
    pub stock: Option<PathBuf>,
    /// The most elements in one string
    #[arg(long, value_name = "COUNT", default_value_t = 3, value_parser = clap::value_parser!(u32).range(1..=20))]
    pub series_up_to: u32,
    /// The most strings side by side
    #[arg(long, value_name = "COUNT", default_value_t = 3, value_parser = clap::value_parser!(u32).range(1..=20))]
    pub parallel_up_to: u32,
    /// By what designs are put in order
    #[arg(long, value_enum, default_value_t = RankBy::Elements)]
    pub rank: RankBy,
    /// Only designs that none other beats in element count, load and time
    #[arg(long)]
    pub pareto: bool,
    /// How many designs are planned and shown
    #[arg(long, value_name = "COUNT", default_value_t = 5, value_parser = clap::value_parser!(u32).range(1..=100))]
    pub show: u32,
    /// Which of them --part and --write take
    #[arg(long, value_name = "RANK", default_value_t = 1, value_parser = clap::value_parser!(u32).range(1..=100))]
    pub pick: u32,
}

/// How the answer is given out.
#[derive(Args)]
pub(in crate::cli) struct GivenArgs {
    /// Print the design as YAML to paste, and nothing else
    #[arg(long)]
    pub part: bool,
    /// Write the bank file with the design in it, comments kept; a file that exists is not overwritten
    #[arg(long, value_name = "NEW.yaml")]
    pub write: Option<PathBuf>,
    /// Let --write overwrite a file
    #[arg(long, requires = "write")]
    pub overwrite: bool,
    /// How the result is written
    #[arg(long, value_enum, default_value_t = SizeFormat::Text)]
    pub format: SizeFormat,
}

/// By what designs are put in order.
#[derive(Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(in crate::cli) enum RankBy {
    Elements,
    Loss,
    Wait,
    Price,
    Mass,
}

/// Formats of a sizing.
#[derive(Clone, Copy, PartialEq, Eq, ValueEnum)]
pub(in crate::cli) enum SizeFormat {
    Text,
    Json,
    Markdown,
}
