//! The command line as a person or a script meets it: the built program, its streams and its exit status.

mod balancing;
mod help;
mod input;
mod json;
mod review;
mod run;
mod size;
mod size_precharge;
mod size_tool;
mod text;
mod verdict;
