//! Resistor elements at hand: what a shelf or a catalogue offers, from which a search builds arrays.

use super::description::Rating;
use crate::data::Series;
use crate::quantity::{Mass, Resistance, Tolerance};

/// A resistor element that can be had, in one value or in many.
#[derive(Debug, Clone, PartialEq)]
pub struct Element {
    /// What people call it.
    pub name: String,
    /// In which values.
    pub values: Values,
    /// Tolerance of the value; `None` where none is given (then it counts as 0 %).
    pub tolerance: Option<Tolerance>,
    /// What it bears.
    pub rating: Rating,
    /// Mass of one.
    pub mass: Option<Mass>,
    /// Price of one, in whatever currency the list has.
    pub price: Option<f64>,
}

/// In which values an element can be had.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Values {
    /// One value.
    One(Resistance),
    /// The preferred values of a series between two ends.
    Preferred {
        /// The series.
        series: Series,
        /// The lowest value.
        from: Resistance,
        /// The highest value.
        to: Resistance,
    },
}
