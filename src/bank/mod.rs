//! The bank as its user described it, valid by construction.
//!
//! [`file::read`] turns a bank file into a [`Bank`] and reports every problem with its line; [`Bank::new`] takes a
//! [`Description`] that a program made. Both run the same checks, so that no room above has to doubt its input.

pub mod codes;
pub mod description;
mod expand;
pub mod file;
mod near;
mod parts;
mod problem;
pub mod quick;
pub mod stock;
mod validate;

pub use problem::{Path, Problem, Segment};

use crate::quantity::{CELSIUS_ZERO_K, Quantity, Temperature};
use description::{DEFAULT_AMBIENT_C, Description, Pair, Source};
use std::collections::HashSet;

/// A capacitor bank whose description passed every check.
#[derive(Debug, Clone, PartialEq)]
pub struct Bank(Description);

/// A plain part that a part of the description stands for; see [`Bank::legs`].
pub type Leg = (String, Pair);

impl Bank {
    /// Checks a description.
    ///
    /// # Errors
    /// All that is wrong with it (the first two hundred problems), each with its path in the bank file's own keys.
    pub fn new(description: Description) -> Result<Self, Vec<Problem>> {
        let (problems, _) = validate::check(&description, &validate::Doubt::default());
        if problems.is_empty() { Ok(Bank(description)) } else { Err(problems) }
    }

    /// What was described.
    pub fn description(&self) -> &Description {
        &self.0
    }

    /// The terminal from which voltages count: the last one.
    pub fn reference(&self) -> &str {
        self.0.terminals.last().map_or("", String::as_str)
    }

    /// Air at the resistors, given or assumed.
    pub fn ambient(&self) -> Temperature {
        self.0.ambient.unwrap_or_else(|| Temperature::from_si(CELSIUS_ZERO_K + DEFAULT_AMBIENT_C))
    }

    /// False where [`Bank::ambient`] is an assumption.
    pub fn ambient_given(&self) -> bool {
        self.0.ambient.is_some()
    }

    /// True where the bank was charged from three phases.
    pub fn is_three_phase(&self) -> bool {
        matches!(self.0.charged_to.source, Source::ThreePhase { .. })
    }

    /// Pairs that a hand or a meter can reach. Where the description lists none: every pair of terminals, then each
    /// capacitor's own pair that is not there yet, in the order of the file. A pair reversed is the same pair.
    pub fn test_points(&self) -> Vec<Pair> {
        if let Some(given) = &self.0.test_points {
            return given.clone();
        }
        let terminals = &self.0.terminals;
        let of_terminals = terminals
            .iter()
            .enumerate()
            .flat_map(|(i, a)| terminals[i + 1..].iter().map(move |b| [a.clone(), b.clone()]));
        let of_capacitors = self
            .0
            .capacitors
            .iter()
            .flat_map(|c| parts::legs(&self.0, &c.id, &c.across, c.phases))
            .map(|(_, across)| across);
        let mut seen = HashSet::new();
        of_terminals.chain(of_capacitors).filter(|pair| seen.insert(unordered(pair))).collect()
    }

    /// The plain parts that the part `id` stands for, each with its id and its two nodes: itself, or the legs of a
    /// three-phase part. Empty where there is no such part.
    ///
    /// In delta the legs are `CB.AB`, `CB.BC` and `CB.CA` (for terminals A, B and C), in open delta the first two of
    /// these, in star `CB.A`, `CB.B` and `CB.C`, which meet at the node `CB.star` or, where the neutral of the supply
    /// is grounded, at the node `G`.
    pub fn legs(&self, id: &str) -> Vec<Leg> {
        let part = parts::parts(&self.0).into_iter().find(|part| part.id == id);
        part.map_or_else(Vec::new, |part| parts::legs(&self.0, part.id, part.across, part.phases))
    }

    /// A description that [`validate::check`] has already found nothing in.
    fn checked(description: Description) -> Self {
        Bank(description)
    }
}

/// A pair in an order that does not depend on how it was written.
fn unordered(pair: &Pair) -> Pair {
    let [a, b] = pair;
    if a <= b { [a.clone(), b.clone()] } else { [b.clone(), a.clone()] }
}
