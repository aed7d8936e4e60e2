//! `limits`: the published limits of the data folder.

use super::args::{LimitsArgs, ListFormat};
use super::output::Output;
use crate::{data, report};

/// Prints the list in the format that was asked for.
pub(super) fn run(typed: &LimitsArgs, output: &mut Output) -> u8 {
    let limits = data::published_limits();
    match typed.format {
        ListFormat::Text => output.text(&report::limits_text(limits, output.width()), 0),
        ListFormat::Json => output.result(&report::limits_json(limits), 0),
        ListFormat::Markdown => output.result(&report::limits_markdown(limits), 0),
        ListFormat::Csv => output.result(&report::limits_csv(limits), 0),
    }
}
