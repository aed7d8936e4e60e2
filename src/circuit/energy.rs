//! Stored energy from isolation on, through the phases between which sinks stop drawing and contacts close.

use super::{CircuitError, ExpSum, LastExit};

/// The energy of some capacitors over time.
#[derive(Debug, Clone, Default)]
pub struct EnergyCourse {
    /// (length in second, (half the capacitance, voltage) of every capacitor) of the phases before the last.
    pub(super) phases: Vec<(f64, Vec<(f64, ExpSum)>)>,
    /// What follows them.
    pub(super) last: ExpSum,
}

fn energy(parts: &[(f64, ExpSum)], t: f64) -> f64 {
    parts.iter().map(|(half, volts)| half * volts.value(t).powi(2)).sum()
}

impl EnergyCourse {
    /// Energy in joule at `t` seconds.
    pub fn value(&self, mut t: f64) -> f64 {
        for (length, parts) in &self.phases {
            if t < *length {
                return energy(parts, t);
            }
            t -= length;
        }
        self.last.value(t)
    }

    /// The last time at which the energy is over `level`, or `from` where it is not after that.
    ///
    /// Where sinks draw or a contact closes there are no sources, and resistors and sinks only take: within a phase the
    /// energy never rises, and halving finds its one crossing. From one phase to the next it can jump up: a contact
    /// connects what counted for nothing before.
    ///
    /// # Errors
    /// [`CircuitError::SearchNotClosed`] where the search does not close.
    pub fn last_over(&self, level: f64, from: f64) -> Result<LastExit, CircuitError> {
        let mut start: f64 = self.phases.iter().map(|(length, _)| length).sum();
        let into = (from - start).max(0.0);
        match self.last.last_outside(level, into)? {
            LastExit::Never => return Ok(LastExit::Never),
            LastExit::At(t) if t > into || self.phases.is_empty() => return Ok(LastExit::At(start + t)),
            LastExit::At(_) => {}
        }
        for (length, parts) in self.phases.iter().rev() {
            start -= length;
            if start + length <= from {
                break;
            }
            if energy(parts, *length) > level {
                return Ok(LastExit::At(start + length));
            }
            if energy(parts, 0.0) > level {
                let (mut low, mut high) = (0.0, *length);
                while high - low > 2e-13 * (start + high) {
                    let middle = 0.5 * (low + high);
                    if energy(parts, middle) > level { low = middle } else { high = middle }
                }
                return Ok(LastExit::At((start + high).max(from)));
            }
        }
        Ok(LastExit::At(from))
    }
}
