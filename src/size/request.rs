//! What is asked of the new resistor.

use crate::bank::Problem;
use crate::bank::description::{Connection, Pair};
use crate::bank::stock::Element;
use crate::check::EngineError;
use crate::quantity::{Current, Power, Temperature, Time, Voltage};
use std::fmt;

/// A voltage that has to be reached in time, in place of the limits of the file.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Target {
    /// At or below this at every test point ...
    pub voltage: Voltage,
    /// ... from this time after isolation on.
    pub within: Time,
}

/// By what designs are put in order.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Rank {
    /// Fewest elements, then the least standing loss.
    Elements,
    /// Least standing loss, then the fewest elements.
    Loss,
    /// Shortest wait, then the fewest elements.
    Wait,
    /// Lowest price where all is known; designs without a price come last.
    Price,
    /// Lowest mass likewise.
    Mass,
}

/// What a resistor that drains the bank has to do, and from what it may be built.
#[derive(Debug, Clone, PartialEq)]
pub struct Ask {
    /// What has to be reached; `None` asks for every limit of the file.
    pub target: Option<Target>,
    /// Has it to hold with any one part failed as well, one element of the new resistor among them?
    pub single_fault: bool,
    /// Air at the resistors, in place of that of the file.
    pub ambient: Option<Temperature>,
    /// Greatest standing loss of the new resistor at the highest voltage.
    pub max_loss: Option<Power>,
    /// Greatest current through the new resistor.
    pub max_current: Option<Current>,
    /// Share of the derated power that has to stay unused, from 0 to under 1.
    pub margin: f64,
    /// Elements that may be used.
    pub elements: Vec<Element>,
    /// True where the elements are the generic ones of the data folder.
    pub generic: bool,
    /// The most elements in one string.
    pub series_up_to: u32,
    /// The most strings side by side.
    pub parallel_up_to: u32,
    /// What the new resistor is to be called.
    pub id: String,
    /// Where it goes; `None` is the terminals.
    pub across: Option<Pair>,
    /// How it is connected in a three-phase bank; `None` is delta.
    pub connection: Option<Connection>,
    /// By what designs are put in order.
    pub rank: Rank,
    /// Only designs of which none other is at least as good in element count, loss and wait.
    pub pareto_only: bool,
    /// How many designs are made into plans and given.
    pub show: usize,
}

impl Default for Ask {
    fn default() -> Self {
        Ask {
            target: None,
            single_fault: false,
            ambient: None,
            max_loss: None,
            max_current: None,
            margin: 0.0,
            elements: Vec::new(),
            generic: false,
            series_up_to: 3,
            parallel_up_to: 3,
            id: "RB".into(),
            across: None,
            connection: None,
            rank: Rank::Elements,
            pareto_only: false,
            show: 5,
        }
    }
}

/// Why there is no answer.
#[derive(Debug, Clone, PartialEq)]
pub enum SizeError {
    /// What is asked makes no sense for this bank; the text says what to write instead.
    Asked(String),
    /// The bank with the new part is no bank, such as for a node that it does not have.
    Placed(Vec<Problem>),
    /// The engine could not certify its result.
    Engine(EngineError),
}

impl fmt::Display for SizeError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            SizeError::Asked(text) => f.write_str(text),
            SizeError::Placed(problems) => {
                let one = |p: &Problem| match &p.help {
                    Some(help) => format!("{}; {help}", p.text),
                    None => p.text.clone(),
                };
                let texts: Vec<String> = problems.iter().map(one).collect();
                write!(f, "the new resistor can't be placed: {}", texts.join("; "))
            }
            SizeError::Engine(e) => e.fmt(f),
        }
    }
}

impl std::error::Error for SizeError {}

impl From<EngineError> for SizeError {
    fn from(e: EngineError) -> Self {
        SizeError::Engine(e)
    }
}
