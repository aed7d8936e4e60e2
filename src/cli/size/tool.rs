//! `size tool`.

use super::bleeder::Connected;
use super::typed::{BuildArgs, GivenArgs};
use super::{Refused, Written, ambient, build, conclude, pair, read, sized, value, zero};
use crate::bank::description::Connection;
use crate::bank::file;
use crate::cli::output::Output;
use crate::quantity::Quantity;
use crate::report;
use crate::size::{Candidate, Placement, ToolAsk, ToolFigures, tool};
use clap::Args;
use std::io::Read;
use std::path::PathBuf;

const EXAMPLES: &str = "\
Examples: ebbvolt size tool bank.yaml --within 20s
          ebbvolt size tool bank.yaml --within 20s --lead 50mohm --contact-energy 5J
          ebbvolt size tool bank.yaml --id T1 --banks 6 --every 5min
          ebbvolt size tool bank.yaml --within 20s --write with-tool.yaml

A tool that the file's steps apply (the only one, or the one that --id names) is
sized anew in these steps: when it is applied and how long it is held come from
them. Any other gets two steps of its own: isolate, apply and hold.

The energy of cable and contact is what they turn into heat in one discharge:
the share of their resistance in all that the current flows through. An arc is
not computed.

A tool is no strap: after it, test, then short.

Exit status: 0 found; 1 nothing does the job; 2 wrong input; 3 no verdict";

#[derive(Args)]
#[command(after_help = EXAMPLES)]
pub(in crate::cli) struct ToolArgs {
    /// The bank file; - reads standard input
    #[arg(value_name = "BANK.yaml")]
    pub bank: PathBuf,
    /// How long it is held, such as 20s; without it what the file's steps say
    #[arg(long, value_name = "TIME", allow_hyphen_values = true)]
    pub within: Option<String>,
    /// What every test point has to be at or below by then; without it the touch voltage of the file
    #[arg(long, value_name = "VOLTAGE", allow_hyphen_values = true)]
    pub voltage: Option<String>,
    /// When it is applied, from isolation on; without it what the file's steps say, or else 0s: the worst credible
    #[arg(long, value_name = "TIME", allow_hyphen_values = true)]
    pub after: Option<String>,
    /// Greatest current through the tool, such as 5A
    #[arg(long, value_name = "CURRENT", allow_hyphen_values = true)]
    pub max_current: Option<String>,
    /// Resistance of cable and contact at most, such as 50mohm; it may be as little as none
    #[arg(long, value_name = "RESISTANCE", allow_hyphen_values = true)]
    pub lead: Option<String>,
    /// Greatest energy that cable and contact turn into heat in one discharge, such as 2J
    #[arg(long, value_name = "ENERGY", allow_hyphen_values = true, requires = "lead")]
    pub contact_energy: Option<String>,
    /// How many banks like this one it has to discharge in a row, from cold
    #[arg(long, value_name = "COUNT", value_parser = clap::value_parser!(u32).range(1..=100_000))]
    pub banks: Option<u32>,
    /// From one of them to the next, such as 5min; without it one right after the other
    #[arg(long, value_name = "TIME", allow_hyphen_values = true)]
    pub every: Option<String>,
    /// What the tool is called; one that the file has is sized anew
    #[arg(long, value_name = "NAME")]
    pub id: Option<String>,
    /// Where it is applied, such as P,N; without it the terminals
    #[arg(long, value_name = "NODE,NODE")]
    pub across: Option<String>,
    /// How three legs are connected, for a three-phase bank; without it delta
    #[arg(long, value_enum)]
    pub connection: Option<Connected>,
    #[command(flatten)]
    pub build: BuildArgs,
    #[command(flatten)]
    pub given: GivenArgs,
}

/// Reads, searches and prints.
pub(super) fn run(typed: &ToolArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    let prepared = read(&typed.bank, stdin, |_| ask(typed));
    let (input, sizing) = match sized(prepared, output, tool) {
        Ok(sized) => sized,
        Err(status) => return status,
    };
    let write = |picked: &Candidate<ToolFigures>| {
        let ToolFigures { resistor, placement, steps, .. } = &picked.figures;
        let id = &sizing.id;
        let (text, told) = match placement {
            Placement::InPlace => (
                file::with_resistor_exchanged(&input.name, &input.bytes, resistor),
                format!("The bank file with {id} sized anew"),
            ),
            Placement::WithSteps => (
                file::with_resistor_and_steps(&input.name, &input.bytes, resistor, steps),
                format!("The bank file with {id} and the steps that apply it"),
            ),
            Placement::Alone => (
                file::with_resistor(&input.name, &input.bytes, resistor),
                format!("The bank file with {id}, which no step of it applies yet,"),
            ),
        };
        text.map(|text| Written { text, told })
    };
    let status = conclude(&typed.build, &typed.given, &sizing, &report::size_tool(&sizing), &write, output);
    let picked = sizing.candidates.get(typed.build.pick as usize - 1).map(|c| &c.figures);
    // What is pasted by hand lacks all of its steps, and what is written those that the file's procedure does not have.
    let (pasted, written) = (typed.given.part, typed.given.write.is_some());
    let lacking = picked.filter(|f| !f.steps.is_empty() && (pasted || written && f.placement != Placement::WithSteps));
    if let Some(figures) = lacking.filter(|_| status == 0) {
        output.notice("The figures are those of these steps, which the procedure of the file does not have:");
        output.lines_to_paste(&file::steps_text(&figures.steps));
    }
    status
}

/// What the words ask for; every value that is wrong is told at once.
fn ask(typed: &ToolArgs) -> Result<ToolAsk, Refused> {
    let mut wrong = Vec::new();
    let ask = ToolAsk {
        within: value("--within", &typed.within, &mut wrong),
        voltage: value("--voltage", &typed.voltage, &mut wrong),
        after: value("--after", &typed.after, &mut wrong),
        ambient: ambient(&typed.build, &mut wrong),
        max_current: value("--max-current", &typed.max_current, &mut wrong),
        contact_energy: value("--contact-energy", &typed.contact_energy, &mut wrong),
        lead: value("--lead", &typed.lead, &mut wrong),
        banks: typed.banks,
        every: value("--every", &typed.every, &mut wrong),
        build: build(&typed.build, &mut wrong)?,
        id: typed.id.clone(),
        across: typed.across.as_ref().and_then(|text| pair("--across", text, &mut wrong)),
        connection: typed.connection.map(|connected| match connected {
            Connected::Delta => Connection::Delta,
            Connected::Star => Connection::Star,
            Connected::OpenDelta => Connection::OpenDelta,
        }),
    };
    zero(
        &[
            ("--within", ask.within.map(Quantity::si), "20s"),
            ("--voltage", ask.voltage.map(Quantity::si), "60V"),
            ("--max-current", ask.max_current.map(Quantity::si), "5A"),
            ("--contact-energy", ask.contact_energy.map(Quantity::si), "2J"),
            ("--every", ask.every.map(Quantity::si), "5min"),
        ],
        &mut wrong,
    );
    if wrong.is_empty() { Ok(ask) } else { Err(Refused::Words(wrong.join("\n"))) }
}
