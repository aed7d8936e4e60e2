//! A voltage from isolation on, through the phases between which sinks stop drawing and contacts close.

use super::{CircuitError, ExpSum, LastExit};

/// Pieces one after the other, and what follows for ever. Where no sink draws and no
/// contact closes there are no pieces.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Course {
    /// (length in second, what it is, from the piece's own start).
    pieces: Vec<(f64, ExpSum)>,
    last: ExpSum,
}

impl From<ExpSum> for Course {
    fn from(last: ExpSum) -> Self {
        Course { pieces: Vec::new(), last }
    }
}

impl Course {
    /// Pieces with their lengths in second, and what follows them.
    pub(super) fn new(pieces: Vec<(f64, ExpSum)>, last: ExpSum) -> Self {
        Course { pieces, last }
    }

    /// The pieces that are over, with their lengths in second.
    pub fn pieces(&self) -> &[(f64, ExpSum)] {
        &self.pieces
    }

    /// What goes on for ever after the last piece, from its start.
    pub fn last(&self) -> &ExpSum {
        &self.last
    }

    /// When the last piece is over, in second.
    pub fn last_start(&self) -> f64 {
        self.pieces.iter().map(|(length, _)| length).sum()
    }

    /// The value at infinite time.
    pub fn constant(&self) -> f64 {
        self.last.constant()
    }

    /// The value at `t` seconds; where it jumps, that after the jump.
    pub fn value(&self, mut t: f64) -> f64 {
        for (length, piece) in &self.pieces {
            if t < *length {
                return piece.value(t);
            }
            t -= length;
        }
        self.last.value(t)
    }

    /// Value and slope (per second) at `t` seconds; where it jumps, those after the jump.
    pub fn value_and_slope(&self, mut t: f64) -> (f64, f64) {
        for (length, piece) in &self.pieces {
            if t < *length {
                return piece.value_and_slope(t);
            }
            t -= length;
        }
        self.last.value_and_slope(t)
    }

    /// The same times a factor.
    #[must_use]
    pub fn times(&self, factor: f64) -> Self {
        let pieces = self.pieces.iter().map(|(length, piece)| (*length, piece.times(factor)));
        Course { pieces: pieces.collect(), last: self.last.times(factor) }
    }

    /// The sum of two courses of one network through the same phases.
    #[must_use]
    pub fn plus(&self, other: &Course) -> Self {
        debug_assert_eq!(self.pieces.len(), other.pieces.len(), "phases of different networks");
        let pieces = self.pieces.iter().zip(&other.pieces).map(|((length, x), (_, y))| (*length, x.plus(y)));
        Course { pieces: pieces.collect(), last: self.last.plus(&other.last) }
    }

    /// How far the course stays below `level`.
    #[must_use]
    pub fn short_of(&self, level: f64) -> Self {
        let short = |sum: &ExpSum| ExpSum::new(level, []).plus(&sum.times(-1.0));
        let pieces = self.pieces.iter().map(|(length, piece)| (*length, short(piece)));
        Course { pieces: pieces.collect(), last: short(&self.last) }
    }

    /// Integral from 0 to a finite `t`.
    pub fn integral(&self, mut t: f64) -> f64 {
        let mut sum = 0.0;
        for (length, piece) in &self.pieces {
            sum += piece.integral(length.min(t));
            if t <= *length {
                return sum;
            }
            t -= length;
        }
        sum + self.last.integral(t)
    }

    /// What is to come after `t` seconds, from there.
    #[must_use]
    pub fn after(&self, mut t: f64) -> Self {
        for (at, (length, piece)) in self.pieces.iter().enumerate() {
            if t < *length {
                let rest = self.pieces[at + 1..].iter().cloned();
                let pieces = std::iter::once((length - t, piece.after(t))).chain(rest).collect();
                return Course { pieces, last: self.last.clone() };
            }
            t -= length;
        }
        self.last.after(t).into()
    }

    /// The last time at which `|v| > level`, or `from` where it is not outside after that; see
    /// [`ExpSum::last_outside`].
    ///
    /// # Errors
    /// [`CircuitError::SearchNotClosed`] where the search does not close.
    pub fn last_outside(&self, level: f64, from: f64) -> Result<LastExit, CircuitError> {
        let mut start = self.last_start();
        let into = (from - start).max(0.0);
        match self.last.last_outside(level, into)? {
            LastExit::Never => return Ok(LastExit::Never),
            LastExit::At(t) if t > into || self.pieces.is_empty() => return Ok(LastExit::At(start + t)),
            LastExit::At(_) => {}
        }
        for (length, piece) in self.pieces.iter().rev() {
            let end = start;
            start -= length;
            if end <= from {
                break;
            }
            let into = (from - start).max(0.0);
            let t = piece.last_outside_within(level, into, *length)?;
            if t > into {
                return Ok(LastExit::At(start + t));
            }
        }
        Ok(LastExit::At(from))
    }

    /// The greatest `|v|` and when it comes; see [`ExpSum::greatest_magnitude`].
    ///
    /// # Errors
    /// [`CircuitError::SearchNotClosed`] where the search does not close.
    pub fn greatest_magnitude(&self) -> Result<(f64, f64), CircuitError> {
        self.greatest_magnitude_over(0.0)
    }

    /// As [`Course::greatest_magnitude`], but a value not above `floor` need not be found.
    ///
    /// # Errors
    /// As [`Course::greatest_magnitude`].
    pub fn greatest_magnitude_over(&self, floor: f64) -> Result<(f64, f64), CircuitError> {
        self.greatest_magnitude_within(floor, f64::INFINITY)
    }

    /// As [`Course::greatest_magnitude_over`], but from 0 to `until` seconds only.
    ///
    /// # Errors
    /// As [`Course::greatest_magnitude`].
    pub fn greatest_magnitude_within(&self, floor: f64, until: f64) -> Result<(f64, f64), CircuitError> {
        let mut best = (floor, 0.0);
        let mut start = 0.0;
        for (length, piece) in &self.pieces {
            if start > until {
                return Ok(best);
            }
            let (value, t) = piece.greatest_magnitude_within(best.0, length.min(until - start))?;
            if value > best.0 {
                best = (value, start + t);
            }
            start += length;
        }
        if start <= until {
            let (value, t) = self.last.greatest_magnitude_within(best.0, until - start)?;
            if value > best.0 {
                best = (value, start + t);
            }
        }
        Ok(best)
    }

    /// Integral of `v^2` from 0 to `t` seconds; `t` may be infinite.
    pub fn integral_of_square(&self, mut t: f64) -> f64 {
        let mut sum = 0.0;
        for (length, piece) in &self.pieces {
            sum += piece.integral_of_square(length.min(t));
            if t <= *length {
                return sum;
            }
            t -= length;
        }
        sum + self.last.integral_of_square(t)
    }
}
