//! A resistor that opens at some moment after isolation, the worst moment taken.
//!
//! Where a voltage only falls after isolation, opening later can't raise it above what it was: such a fault is worst
//! at isolation or before, or else not worse than the healthy wait. Where another part of the bank charges a section
//! after isolation, opening near its greatest voltage leaves it with more than it ever had at isolation; there every
//! moment counts. Waits for a voltage and the voltage that stays are asked for; energies, charges and what parts bear
//! are taken at isolation and before only.

use super::case::Case;
use super::figure::Figure;
use super::model::{Model, Parameter, Variation};
use super::pinned::Blocks;
use super::scenario::Scenario;
use super::worst::Objective;
use crate::circuit::{AtMoment, CircuitError, Modes, Opened};
use std::sync::Arc;

/// A voltage rises after isolation only where it exceeds that at isolation by more than this share.
const RISE: f64 = 1e-9;

/// Up to how many loose values every corner is tried: each takes a search over all moments.
const MOST_CORNERS: usize = 6;

/// Figures under a resistor that opens after isolation, to be maximised over the box and over the moment.
pub(crate) struct LaterStudy<'a> {
    model: &'a Model,
    healthy: Scenario,
    lost: &'a Variation,
    volts: f64,
    figures: Vec<Figure>,
}

/// The healthy bank at one point, from every state that it can have at isolation, and the modes that it has once the
/// resistor is open.
pub(crate) struct LaterCase {
    healthy: Vec<Case>,
    without: Arc<Modes>,
}

/// Those of `figures` for which a moment after isolation can count.
pub(crate) fn asked_later(model: &Model, figures: &[Figure]) -> Vec<Figure> {
    // Where a voltage is proven only to fall there is nothing to ask.
    let proven = Blocks::of(model, &Scenario::default());
    let map = model.merged(&Variation::default());
    let falls = |pair: usize| {
        let (a, b) = model.pairs[pair];
        proven.as_ref().is_some_and(|blocks| blocks.only_falls((map[a], map[b])))
    };
    let can_count = |figure: &&Figure| match figure {
        Figure::VoltageWait { pair, .. } | Figure::TouchWait { pair, energy: None, .. } | Figure::Settles { pair } => {
            !falls(*pair)
        }
        _ => false,
    };
    // A sink makes the voltage by moment no sum of exponentials, and a contact that closes after isolation makes the
    // network another one: with these a part opens at isolation or before only.
    let one_network = model.spans(&Variation::default(), 0.0, &[]).len() == 1;
    if model.loads.is_empty() && one_network && model.terminals.len() == 2 {
        figures.iter().filter(can_count).copied().collect()
    } else {
        Vec::new()
    }
}

impl<'a> LaterStudy<'a> {
    /// `figures` are those of [`asked_later`]; `lost` is the bank without the resistor.
    pub fn new(model: &'a Model, lost: &'a Variation, volts: f64, figures: Vec<Figure>) -> Self {
        LaterStudy { model, healthy: Scenario::default(), lost, volts, figures }
    }

    /// The figures asked for.
    pub fn figures(&self) -> &[Figure] {
        &self.figures
    }

    /// The moment in second after isolation that a figure's value at a point belongs to.
    pub fn moment(&self, index: usize, point: &[f64]) -> Result<f64, CircuitError> {
        Ok(self.at_worst_moment(index, &self.case(point)?, 0.0)?.opens)
    }

    fn at_worst_moment(&self, index: usize, case: &LaterCase, floor: f64) -> Result<AtMoment, CircuitError> {
        let mut worst = AtMoment { value: 0.0, opens: 0.0 };
        for healthy in &case.healthy {
            let found = self.starting_in_a_state(index, healthy, &case.without, floor.max(worst.value))?;
            if found.value > worst.value {
                worst = found;
            }
        }
        Ok(worst)
    }

    fn starting_in_a_state(
        &self,
        index: usize,
        healthy: &Case,
        without: &Arc<Modes>,
        floor: f64,
    ) -> Result<AtMoment, CircuitError> {
        let nothing = AtMoment { value: 0.0, opens: 0.0 };
        let (pair, level) = match self.figures[index] {
            Figure::VoltageWait { pair, level } | Figure::TouchWait { pair, level, .. } => (pair, Some(level)),
            Figure::Settles { pair } => (pair, None),
            _ => return Ok(nothing),
        };
        let (a, b) = self.model.pairs[pair];
        let voltage = healthy.across(a, b);
        let first = voltage.value(0.0).abs();
        if voltage.greatest_magnitude_over(first)?.0 <= first * (1.0 + RISE) {
            return Ok(nothing);
        }
        let (a, b) = (healthy.map[a], healthy.map[b]);
        let Some(response) = healthy.response.undrawn() else { return Ok(nothing) };
        let opened = Opened::new(response, without, a, b)?;
        let Some(level) = level else { return opened.settles() };
        // Until it opens the bank is healthy: opening at the healthy wait or later leaves that wait.
        let wait = voltage.last_outside(level, 0.0)?.seconds();
        let known = if floor > wait { floor } else { wait };
        opened.last_outside(level, AtMoment { value: known, opens: wait })
    }
}

impl Objective for LaterStudy<'_> {
    type Case = LaterCase;

    fn parameters(&self) -> &[Parameter] {
        &self.model.parameters[..self.model.passive]
    }

    fn count(&self) -> usize {
        self.figures.len()
    }

    fn most_corners(&self) -> usize {
        MOST_CORNERS
    }

    fn random_starts(&self) -> usize {
        2
    }

    fn case(&self, point: &[f64]) -> Result<LaterCase, CircuitError> {
        let healthy = Case::solve(self.model, &self.healthy, point, self.volts)?;
        // Contacts that close at isolation have closed.
        let closed = self.model.spans(self.lost, 0.0, &[]).pop().map_or_else(Vec::new, |span| span.connected);
        let without = Arc::new(Modes::new(self.model.network(self.lost, point, &closed))?);
        Ok(LaterCase { healthy, without })
    }

    fn negligible(&self, index: usize) -> f64 {
        // A voltage that stays is told apart from rounding; a time needs no such bar.
        if matches!(self.figures[index], Figure::Settles { .. }) { 1e-10 * self.volts } else { 0.0 }
    }

    fn case_for(&self, _: usize, point: &[f64]) -> Result<LaterCase, CircuitError> {
        self.case(point)
    }

    fn certify(&self, case: &LaterCase) -> Result<(), CircuitError> {
        case.healthy.iter().try_for_each(|healthy| healthy.response.check_balance(f64::INFINITY))
    }

    fn figure(&self, index: usize, case: &LaterCase, floor: f64) -> Result<f64, CircuitError> {
        Ok(self.at_worst_moment(index, case, floor)?.value)
    }
}
