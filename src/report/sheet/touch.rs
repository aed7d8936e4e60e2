//! Before anyone touches, and why the strap stays on.

use super::super::block::Block;
use super::super::plan::steps::recovery;
use crate::plan::Plan;

pub(super) fn blocks(plan: &Plan) -> Vec<Block> {
    let ticks = [
        "Prove the instrument on a known source",
        "Test between every pair of points that a hand or a tool can reach, and from each to earth",
        "Prove the instrument again on the known source",
        "No reading was above the predicted one; where one was, the work was stopped",
        "Discharged and shorted as the rules of the site ask; the strap stays on for as long as anyone works",
    ];
    let mut blocks = vec![
        Block::Section("Before anyone touches: prove, test, prove"),
        Block::Ticks(ticks.map(String::from).to_vec()),
        Block::Blanks(vec!["Tested by, date and time".into()]),
    ];
    if !plan.steps.is_empty() {
        blocks.extend(recovery::blocks(plan));
    }
    blocks
}
