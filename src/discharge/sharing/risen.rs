//! A string after a charge so fast that resistors have no say in it, and on the way from there to the settled division.
//!
//! The bank is uncharged, then the terminals are held at their voltage at once: what capacitors alone tie to them
//! divides by capacitance. From then on every potential is the settled one and a rest that decays in the same network
//! with its terminals made one, so that it is a sum of exponentials whose greatest value is proven
//! (`circuit::greatest`).
//!
//! Leakages are those of the settled division. In a plain chain that is proven to be the worst at every moment: leakage
//! l in unit j makes the others' one current `l h(t)`, where h is the step response of `z_j / sum of z`, the z being
//! those of resistances with capacitances in parallel. Write g = 1 - h = C_j v' + v / R_j with v the voltage that l
//! drives across unit j: v' is a sum of decaying exponentials with positive factors, so g' = sum of b_i exp(-s_i t)
//! (1/R_j - C_j s_i), negative for the fast of them and positive for the slow: g falls at first or rises, and then only
//! rises. Its two ends are below 1, so h > 0 at all times, and the voltages that a positive current drives in the other
//! units are positive.

use super::{Strung, chain};
use crate::circuit::{CircuitError, ExpSum, Modes, Network, Response};
use crate::discharge::model::Parameter;
use crate::discharge::pinned::Pin;
use crate::discharge::worst::Objective;
use std::sync::Arc;

/// Up to this many loose values every corner is tried: there are modes to be found at each.
const MOST_CORNERS: usize = 8;

/// One figure of a string that was charged fast.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum RisenFigure {
    /// Voltage of the unit of this number right after the charge.
    Divided(usize),
    /// Its greatest voltage from then on.
    Greatest(usize),
}

/// Figures of a string that was charged fast, to be maximised over all tolerances.
pub(crate) struct Risen<'a> {
    pub strung: Strung<'a>,
    pub figures: &'a [RisenFigure],
}

/// One point of the tolerances.
pub(crate) struct Charged {
    network: Network,
    /// Potentials in volt right after the charge.
    divided: Vec<f64>,
    /// The network with its terminals made one; `None` where nothing asks for it.
    modes: Option<Arc<Modes>>,
}

impl Risen<'_> {
    fn charged(&self, point: &[f64], with_modes: bool) -> Result<Charged, CircuitError> {
        let network = self.strung.network(point);
        let capacitive = Network { resistors: Vec::new(), ..network.clone() };
        let divided = capacitive.operating_point(&self.strung.held(self.strung.volts));
        let modes = if with_modes { Some(Arc::new(Modes::new(self.shorted(&network))?)) } else { None };
        Ok(Charged { network, divided, modes })
    }

    /// The network with its terminals made one.
    fn shorted(&self, network: &Network) -> Network {
        let mut shorted = network.clone();
        let reference = network.reference;
        let at = |node: usize| if self.strung.model.terminals.contains(&node) { reference } else { node };
        for list in [&mut shorted.resistors, &mut shorted.capacitors] {
            list.iter_mut().for_each(|e| (e.a, e.b) = (at(e.a), at(e.b)));
            list.retain(|e| e.a != e.b);
        }
        shorted
    }

    /// What decays, with the settled potentials that are left.
    fn rest(&self, at: &Charged, modes: &Arc<Modes>, leakages: &[f64]) -> Result<Rest, CircuitError> {
        let settled = self.strung.settled(&at.network, leakages);
        let is_terminal = |node: usize| self.strung.model.terminals.contains(&node);
        // Exactly nothing at the terminals, so that voltages add up to nothing around every loop.
        let rest: Vec<f64> = (0..at.divided.len())
            .map(|n| if is_terminal(n) { 0.0 } else { at.divided[n] - settled[n].unwrap_or(at.divided[n]) })
            .collect();
        let voltages: Vec<f64> = modes.network().capacitors.iter().map(|c| rest[c.a] - rest[c.b]).collect();
        let response = modes.response(&voltages, &rest)?;
        Ok(Rest { settled, response, voltages })
    }
}

/// What decays after the charge, and what is left.
struct Rest {
    settled: Vec<Option<f64>>,
    response: Response,
    voltages: Vec<f64>,
}

impl Objective for Risen<'_> {
    type Case = Charged;

    fn parameters(&self) -> &[Parameter] {
        &self.strung.model.parameters[..self.strung.model.passive]
    }

    fn count(&self) -> usize {
        self.figures.len()
    }

    fn most_corners(&self) -> usize {
        MOST_CORNERS
    }

    fn pins(&self, index: usize) -> Vec<Pin> {
        match self.figures[index] {
            RisenFigure::Divided(of) => chain::divided_pins(&self.strung, of),
            RisenFigure::Greatest(_) => vec![Pin::Free; self.strung.model.passive],
        }
    }

    fn case(&self, point: &[f64]) -> Result<Charged, CircuitError> {
        self.charged(point, self.figures.iter().any(|f| matches!(f, RisenFigure::Greatest(_))))
    }

    fn negligible(&self, index: usize) -> f64 {
        // A division by capacitance is greatest at a corner.
        if matches!(self.figures[index], RisenFigure::Divided(_)) { f64::INFINITY } else { 0.0 }
    }

    fn case_for(&self, index: usize, point: &[f64]) -> Result<Charged, CircuitError> {
        self.charged(point, matches!(self.figures[index], RisenFigure::Greatest(_)))
    }

    fn certify(&self, at: &Charged) -> Result<(), CircuitError> {
        let Some(modes) = &at.modes else { return Ok(()) };
        let rest = self.rest(at, modes, &vec![0.0; self.strung.units.len()])?;
        // What is left of equal numbers is noise, of which no balance can be drawn up.
        let counts = |rest: &Rest| rest.voltages.iter().any(|u| u.abs() > 1e-6 * self.strung.volts);
        if counts(&rest) { rest.response.check_balance(f64::INFINITY) } else { Ok(()) }
    }

    fn figure(&self, index: usize, at: &Charged, floor: f64) -> Result<f64, CircuitError> {
        let of = match self.figures[index] {
            RisenFigure::Divided(of) | RisenFigure::Greatest(of) => of,
        };
        let unit = &self.strung.units[of];
        let (top, bottom) = (unit.top, unit.bottom);
        let (RisenFigure::Greatest(_), Some(modes)) = (self.figures[index], &at.modes) else {
            return Ok(at.divided[top] - at.divided[bottom]);
        };
        let rest = self.rest(at, modes, &self.strung.worst_leakages(&at.network, of))?;
        let Some(settled) = rest.settled[top].zip(rest.settled[bottom]).map(|(top, bottom)| top - bottom) else {
            return Ok(f64::INFINITY);
        };
        let reference = at.network.reference;
        let merged = |node: usize| if self.strung.model.terminals.contains(&node) { reference } else { node };
        let decaying = rest.response.across(merged(top), merged(bottom));
        let voltage = decaying.plus(&ExpSum::new(settled, []));
        Ok(voltage.greatest_magnitude_over(floor.max(0.0))?.0)
    }
}
