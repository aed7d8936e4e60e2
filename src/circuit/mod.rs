//! The mathematics of networks of capacitors and resistors.
//!
//! Nothing here knows of banks, files or text: nodes are numbers, values are `f64` in SI base units (ohm, farad,
//! volt, ampere, coulomb, joule, second). The way through the room:
//!
//! 1. [`Network`] holds the parts; [`Network::operating_point`] gives the potentials before isolation.
//!    For three phases, [`Network::interrupted_potentials`] gives what a switch leaves whose poles open one by one.
//! 2. [`Modes`] turns a network into decay rates and shapes, to high relative accuracy.
//! 3. [`Response`] is what follows from an initial state: every voltage as an [`ExpSum`],
//!    `v(t) = v_inf + sum of a_k exp(-lambda_k t)`, with no time step anywhere (a constant power alone is
//!    taken in steps).
//! 4. [`Drain`] is a response while sinks draw from the network: phases, between which one of them stops. A
//!    [`Course`] is a voltage through the phases.
//! 5. [`ExpSum`] answers the questions: the value at a time, the last time outside a band (proven, never too
//!    early), the greatest value, the integral of the square.

mod course;
mod crossing;
mod drain;
mod energy;
mod expsum;
mod graph;
mod greatest;
mod grown;
mod interruption;
mod jacobi;
mod laplacian;
mod modes;
mod network;
mod opened;
mod power;
mod pull;
mod quadrature;
mod reduce;
mod response;
mod sensitivity;
mod short;

pub use course::Course;
pub use crossing::LastExit;
pub use drain::{Drain, Draw, Sink};
pub use energy::EnergyCourse;
pub use expsum::ExpSum;
pub use interruption::{Feed, Phasor, three_phases};
pub use modes::Modes;
pub use network::{Edge, Network};
pub use opened::{AtMoment, Opened};
pub use response::Response;
pub use sensitivity::{Carried, Sensitivity};
pub use short::ShortCharge;

use std::fmt;

/// Why the engine could not certify a result. Each is a bug or a network outside what doubles can carry; none is
/// an error of the user's.
#[derive(Debug, Clone, PartialEq)]
pub enum CircuitError {
    /// Rotations of the one-sided Jacobi method did not die out.
    RatesNotFound,
    /// The search for a last crossing or a greatest value did not close.
    SearchNotClosed,
    /// Energy is not accounted for: what was there at the start, and what was found again.
    Unbalanced {
        /// Energy at the start and from sources, in joule.
        before: f64,
        /// Energy at the end and in all resistors, in joule.
        after: f64,
    },
    /// Initial voltages contradict each other around a loop of capacitors: the capacitor that closes it and the
    /// sum of the voltages around the loop, in volt.
    Contradiction {
        /// Index of the capacitor that closes the loop.
        capacitor: usize,
        /// The sum, which ought to be zero.
        sum: f64,
    },
    /// A value somewhere in the tolerances exceeds the greatest one that was found.
    Exceeded {
        /// The value, in SI base units.
        value: f64,
        /// The greatest one that was found.
        greatest: f64,
    },
}

impl fmt::Display for CircuitError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            CircuitError::RatesNotFound => write!(f, "the decay rates of the network were not found"),
            CircuitError::SearchNotClosed => write!(f, "the search for a crossing or a greatest value did not close"),
            CircuitError::Unbalanced { before, after } => {
                write!(f, "the energy balance failed: {before:e} J before, {after:e} J after")
            }
            CircuitError::Exceeded { value, greatest } => {
                write!(f, "a value of {value:?} exceeds the worst case that was found, {greatest:?}")
            }
            CircuitError::Contradiction { capacitor, sum } => {
                write!(f, "the voltages around the loop closed by capacitor {capacitor} add up to {sum} V, not 0 V")
            }
        }
    }
}

impl std::error::Error for CircuitError {}
