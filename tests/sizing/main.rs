//! Sizing: windows against closed forms, designs against plans of the bank file with the part pasted in, rankings
//! against a search through everything.

mod balancing;
mod balancing_placed;
mod banks;
mod exhaustive;
mod placed;
mod precharge;
mod tool;
mod tool_exhaustive;
mod tool_placed;
mod tool_row;
mod window;
