//! Plans, checks and records the discharge of charged capacitor banks.
//!
//! A bank file ([`bank::file::read`]) becomes a [`bank::Bank`], valid by construction; [`plan::plan`] computes the
//! one result that every report is written from. A plan is a prediction from a description: it replaces no test of
//! the voltage with a rated instrument, proved before and after.
//!
//! The rooms, from the ground up; imports go down this list, never up: [`quantity`], [`finding`], [`circuit`],
//! [`data`], [`bank`], `discharge`, [`check`], [`plan`], [`size`], `report`,
//! `cli`.

pub mod bank;
pub mod check;
pub mod circuit;
pub mod cli;
pub mod data;
mod discharge;
pub mod finding;
pub mod plan;
pub mod quantity;
pub mod report;
pub mod size;
