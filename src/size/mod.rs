//! Inverse problems: resistors that do a job, from preferred values and parts at hand.
//!
//! The way of an answer: what is asked becomes demands on the new resistor's actual resistance, each found by the
//! engine at many resistances and followed to where it stops being met (`window`); arrays of elements inside all
//! demands are listed and put in order (`arrays`); those that are shown are put into the bank one by one and the FULL
//! plan is made (`bleeder`). The figures that are given are that plan's.

mod arrays;
mod bleeder;
mod collision;
mod probe;
mod request;
mod result;
mod spans;
mod trial;
mod window;

pub use bleeder::bleeder;
pub use request::{Ask, Rank, SizeError, Target};
pub use result::{Candidate, DemandResult, LimitHeld, Searched, Sizing, Window};
