//! `draft`: a commented bank file to start from.

use super::output::Output;
use crate::data;

/// Prints the draft.
pub(super) fn run(output: &mut Output) -> u8 {
    output.result(data::draft(), 0)
}
