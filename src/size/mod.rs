//! Inverse problems: resistors that do a job, from preferred values and parts at hand.
//!
//! The way of an answer: what is asked becomes demands on the new resistor's actual resistance, each found by the
//! engine at many resistances and followed to where it stops being met (`scan`, `window`); arrays of elements inside all
//! demands are listed and put in order (`arrays`); those that are shown are put into the bank one by one and the FULL
//! plan is made (`trial`). The figures that are given are that plan's. Each job has a folder: what is asked (`request`),
//! what that demands (`demands`), what the engine finds at one resistance (`probe`), one design (`trial`), its figures
//! (`result`).

mod arrays;
mod balancing;
mod bleeder;
mod build;
mod collision;
mod error;
mod precharge;
mod result;
mod scan;
mod spans;
mod tool;
mod trial;
mod window;

pub use balancing::{BalancingAsk, BalancingFigures, UnitShare, WrittenOut, balancing};
pub use bleeder::{BleederAsk, BleederFigures, ContactFigures, LimitHeld, Target, bleeder};
pub use build::{Build, Rank};
pub use error::SizeError;
pub use precharge::{
    Attempts, Inrush, MainContactor, PrechargeAsk, PrechargeFigures, Repeated, Shorted, USUAL_SHARE, precharge,
};
pub use result::{Candidate, DemandResult, Searched, SetAside, Sizing, Window};
pub use tool::{AskedRow, FaultLeft, InARowResult, Placement, ToolAsk, ToolFigures, tool};
