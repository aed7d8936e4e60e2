//! Why there is no answer.

use crate::bank::Problem;
use crate::check::EngineError;
use std::fmt;

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
