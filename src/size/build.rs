//! What a new resistor may be built from, and by what its designs are put in order. Every job asks for this.

use super::error::SizeError;
use crate::bank::stock::Element;

/// By what designs are put in order.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Rank {
    /// Fewest elements, then the least load (standing loss or current).
    Elements,
    /// Least load (standing loss, or the current where nothing is lost standing), then the fewest elements.
    Loss,
    /// Shortest time, then the fewest elements.
    Wait,
    /// Lowest price where all is known; designs without a price come last.
    Price,
    /// Lowest mass likewise.
    Mass,
}

/// Elements, how many of them, with what to spare, and how many designs are wanted.
#[derive(Debug, Clone, PartialEq)]
pub struct Build {
    /// Elements that may be used.
    pub elements: Vec<Element>,
    /// True where the elements are the generic ones of the data folder.
    pub generic: bool,
    /// The most elements in one string.
    pub series_up_to: u32,
    /// The most strings side by side.
    pub parallel_up_to: u32,
    /// Share of the derated power that has to stay unused, from 0 to under 1.
    pub margin: f64,
    /// By what designs are put in order.
    pub rank: Rank,
    /// Only designs of which none other is at least as good in element count, load and time.
    pub pareto_only: bool,
    /// How many designs are made into plans and given.
    pub show: usize,
}

impl Default for Build {
    fn default() -> Self {
        Build {
            elements: Vec::new(),
            generic: false,
            series_up_to: 3,
            parallel_up_to: 3,
            margin: 0.0,
            rank: Rank::Elements,
            pareto_only: false,
            show: 5,
        }
    }
}

impl Build {
    /// Refuses what no design could come from.
    pub(super) fn check(&self) -> Result<(), SizeError> {
        if self.elements.is_empty() || self.series_up_to == 0 || self.parallel_up_to == 0 || self.show == 0 {
            return Err(SizeError::Asked(
                "there is nothing to build from: give elements, and counts of 1 or more".into(),
            ));
        }
        if !(0.0..1.0).contains(&self.margin) {
            return Err(SizeError::Asked("the margin on power has to be under 100 %; write `--margin 40%`".into()));
        }
        Ok(())
    }

    /// What every answer that is built from these elements rests on.
    pub(super) fn assumptions(&self) -> Vec<String> {
        let mut list = Vec::new();
        if self.generic {
            list.push(
                "The elements are generic ones with invented ratings, not parts that can be had: `--stock FILE` gives \
                 your own."
                    .to_string(),
            );
        }
        if self.margin <= 0.0 {
            list.push(
                "No margin on power was asked for: an element may carry all that its derating allows.".to_string(),
            );
        }
        list
    }
}
