//! What a plan says, in the order in which a person needs it.

pub(super) mod closing;
mod draws;
pub(super) mod limits;
pub(super) mod ratings;
mod sensitivity;
mod spreads;
pub(super) mod steps;
pub(super) mod summary;
pub(super) mod waits;
pub(super) mod working;

use super::block::Block;
use crate::plan::Plan;

/// The whole plan as a document.
pub(super) fn document(plan: &Plan) -> Vec<Block> {
    let mut blocks = summary::blocks(plan);
    blocks.extend(waits::blocks(plan));
    blocks.extend(spreads::blocks(plan));
    blocks.extend(draws::blocks(plan));
    blocks.extend(sensitivity::blocks(plan));
    blocks.extend(steps::blocks(plan));
    blocks.extend(limits::blocks(plan));
    blocks.extend(ratings::blocks(plan));
    blocks.extend(closing::findings(plan));
    blocks.extend(working::blocks(plan));
    blocks.extend(closing::footer(plan));
    blocks
}
