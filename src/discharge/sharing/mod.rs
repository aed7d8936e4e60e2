//! How the units of a string share its voltage while the terminals are held: settled, with a leakage in every unit, and
//! after a charge so fast that capacitances divide it.
//!
//! A unit leaks a constant current that may lie anywhere from nothing to its greatest. A voltage is linear in these
//! currents, so each counts at nothing or at its greatest, by the sign of its transfer resistance. A settled voltage at
//! given currents is a ratio of two sums in which every single resistance occurs at most to the first power, above and
//! below, and the lower one is positive: monotone in each resistance, so that its greatest value lies at a corner of the
//! tolerances. The same holds of a division by capacitance. What lies between the two in time is searched.

mod chain;
mod risen;

pub(crate) use risen::{Risen, RisenFigure};

use super::model::{Model, Parameter, Variation};
use super::pinned::Pin;
use super::worst::{MOST_CORNERS, Objective};
use crate::circuit::{CircuitError, Network};

/// One unit of a string, or several in parallel.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Unit {
    /// Its nodes in the model, the one nearer to the string's first end first.
    pub top: usize,
    pub bottom: usize,
    /// Its greatest leakage in ampere.
    pub leakage: f64,
}

/// A string of units in a bank whose terminals are held.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Strung<'a> {
    pub model: &'a Model,
    /// From one end of the string to the other.
    pub units: &'a [Unit],
    /// The resistors whose power is asked for.
    pub resistors: &'a [usize],
    /// Voltage in volt across the terminals.
    pub volts: f64,
    /// What is not as described.
    pub variation: &'a Variation,
}

impl Strung<'_> {
    /// Terminals and their potentials in volt, the reference at zero.
    fn held(&self, volts: f64) -> Vec<(usize, f64)> {
        let reference = self.model.reference();
        let at = |node: &usize| (*node, if *node == reference { 0.0 } else { volts });
        self.model.terminals.iter().map(at).collect()
    }

    /// True where the resistors at the string and its capacitors are a plain chain.
    pub fn is_chain(&self) -> bool {
        chain::resistors_are_a_chain(self) && chain::capacitors_are_a_chain(self)
    }

    fn network(&self, point: &[f64]) -> Network {
        self.model.network(self.variation, point, &[])
    }

    /// What every unit leaks, in ampere, where the voltage of unit `of` is greatest.
    fn worst_leakages(&self, network: &Network, of: usize) -> Vec<f64> {
        let unit = &self.units[of];
        // By reciprocity: what a current through one unit does to another is what the other's does to it.
        let potential = network.loaded_point(&self.held(0.0), &[(unit.bottom, unit.top, 1.0)]);
        let raised = |other: &Unit| {
            let (top, bottom) = (potential[other.top].unwrap_or(0.0), potential[other.bottom].unwrap_or(0.0));
            top - bottom < 0.0
        };
        self.units.iter().map(|other| if raised(other) { other.leakage } else { 0.0 }).collect()
    }

    /// Settled potentials in volt with these leakages in ampere.
    fn settled(&self, network: &Network, leakages: &[f64]) -> Vec<Option<f64>> {
        let drawn: Vec<_> = self.units.iter().zip(leakages).map(|(u, ampere)| (u.top, u.bottom, *ampere)).collect();
        network.loaded_point(&self.held(self.volts), &drawn)
    }
}

/// One figure of a settled string.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum SettledFigure {
    /// Voltage of the unit of this number, with the leakages at which it is greatest; infinite where nothing but
    /// leakage decides it.
    Unit(usize),
    /// Power of the resistors asked for, all together and without leakage.
    Power,
}

/// Figures of a settled string, to be maximised over the resistors' tolerances. The model's capacitors are to have none.
pub(crate) struct Settled<'a> {
    pub strung: Strung<'a>,
    pub figures: &'a [SettledFigure],
}

/// A settled string at one point of the tolerances.
pub(crate) struct Point {
    network: Network,
    /// Resistances in ohm of all resistors of the model; infinite for one that is not there.
    ohms: Vec<f64>,
}

impl Objective for Settled<'_> {
    type Case = Point;

    fn parameters(&self) -> &[Parameter] {
        &self.strung.model.parameters[..self.strung.model.passive]
    }

    fn count(&self) -> usize {
        self.figures.len()
    }

    fn most_corners(&self) -> usize {
        // What is proven of a chain needs no corners.
        if chain::resistors_are_a_chain(&self.strung) { 0 } else { MOST_CORNERS }
    }

    fn corner_budget(&self) -> usize {
        1 << MOST_CORNERS
    }

    fn pins(&self, index: usize) -> Vec<Pin> {
        match self.figures[index] {
            SettledFigure::Unit(of) => chain::settled_pins(&self.strung, of),
            SettledFigure::Power => chain::power_pins(&self.strung),
        }
    }

    fn case(&self, point: &[f64]) -> Result<Point, CircuitError> {
        let Strung { model, variation, .. } = self.strung;
        Ok(Point { network: self.strung.network(point), ohms: model.ohms(variation, point, &[]) })
    }

    fn negligible(&self, index: usize) -> f64 {
        // The greatest voltage of a unit lies at a corner, and so does the power of a chain.
        let at_corner = self.figures[index] != SettledFigure::Power || chain::resistors_are_a_chain(&self.strung);
        if at_corner { f64::INFINITY } else { 0.0 }
    }

    fn case_for(&self, _: usize, point: &[f64]) -> Result<Point, CircuitError> {
        self.case(point)
    }

    fn certify(&self, _: &Point) -> Result<(), CircuitError> {
        Ok(())
    }

    fn figure(&self, index: usize, at: &Point, _: f64) -> Result<f64, CircuitError> {
        let strung = &self.strung;
        Ok(match self.figures[index] {
            SettledFigure::Unit(of) => {
                let potential = strung.settled(&at.network, &strung.worst_leakages(&at.network, of));
                let unit = &strung.units[of];
                let volts = potential[unit.top].zip(potential[unit.bottom]).map(|(top, bottom)| top - bottom);
                volts.unwrap_or(f64::INFINITY)
            }
            SettledFigure::Power => {
                let potential = strung.settled(&at.network, &vec![0.0; strung.units.len()]);
                let power = |index: &usize| {
                    let (part, ohms) = (&strung.model.resistors[*index], at.ohms[*index]);
                    let volts = potential[part.a].unwrap_or(0.0) - potential[part.b].unwrap_or(0.0);
                    if ohms.is_finite() { volts * volts / ohms } else { 0.0 }
                };
                strung.resistors.iter().map(power).sum()
            }
        })
    }
}
