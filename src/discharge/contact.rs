//! Bleeders that a contact connects at isolation and disconnects when the bank is fed again.
//!
//! Before isolation such a bleeder is not there. From isolation until its contact closes it is not there either; from
//! then on it stays, so that a discharge goes through one network after the other ([`Model::spans`]). When the bank is
//! fed again it bears the voltage across it until the contact opens. The delays are taken as they are given: the slowest
//! contact is what the user writes.
//!
//! A first-order body is linear in what heats it. Let `h` be its rise one cycle after a discharge from cold with the
//! feeding that follows, and `q = exp(-every/tau)` what a cycle leaves of an earlier rise. Then the n-th discharge of a
//! row begins at `h (1 + q + ... + q^(n-2)) = h (1 - q^(n-1)) / (1 - q)`: a geometric series.

use super::body::{Heated, Thermal};
use super::case::Before;
use super::model::{Model, PartKind, Variation};
use crate::bank::description::Resistor;
use crate::circuit::CircuitError;
use crate::quantity::Quantity;

/// Two moments nearer to each other than this share of the later one are one: sums of step lengths are rounded.
const ONE_MOMENT: f64 = 1e-12;

/// The contact of a bleeder: times in second.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Contact {
    /// The number of its bleeder; of an opened array, of the element at its end.
    pub resistor: usize,
    /// The nodes of the whole bleeder.
    pub a: usize,
    pub b: usize,
    pub closes_after: f64,
    pub opens_after: f64,
    /// Discharges in a row, and how far apart they begin.
    pub discharges: u32,
    pub every: Option<f64>,
}

/// A time with the same parts connected.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Span {
    /// In second; infinite for the last one.
    pub length: f64,
    /// Resistors that are connected beside those that always are.
    pub connected: Vec<usize>,
}

impl Contact {
    pub fn of(resistor: &Resistor, number: usize, (a, b): (usize, usize)) -> Option<Self> {
        let switched = resistor.switched?;
        Some(Contact {
            resistor: number,
            a,
            b,
            closes_after: switched.closes_after.si(),
            opens_after: switched.opens_after.si(),
            discharges: switched.discharges,
            every: switched.every.map(Quantity::si),
        })
    }

    /// True where the contact is closed at a moment after isolation.
    fn is_closed_at(&self, t: f64) -> bool {
        self.closes_after - t <= ONE_MOMENT * t
    }

    /// The greatest rise of a body over the air, in K, in the last of all discharges of a row.
    ///
    /// `through(start, until)` is the body from isolation on, from a rise at isolation, followed for so many seconds
    /// (to the end of what is asked about where that is infinite). The feeding that goes with each discharge, with
    /// `fed` watt in the part, counts at the moment at which it makes the body hottest, and as the last thing before
    /// the next isolation.
    pub fn greatest_rise(
        &self,
        body: Thermal,
        fed: f64,
        through: impl Fn(f64, f64) -> Result<Heated, CircuitError>,
    ) -> Result<f64, CircuitError> {
        let fed = body.kelvin_per_watt * fed * -(-self.opens_after / body.time_constant).exp_m1();
        let mut start = 0.0;
        if let Some(every) = self.every.filter(|_| self.discharges > 1) {
            let cycles = f64::from(self.discharges - 1);
            let left = through(0.0, every)?.end + fed;
            let share = every / body.time_constant;
            start = left * ((-cycles * share).exp_m1() / (-share).exp_m1());
        }
        Ok(through(start, f64::INFINITY)?.greatest + fed)
    }
}

impl Model {
    /// The contact through which a resistor is connected, or the array that it is a piece of.
    pub fn contact(&self, resistor: usize) -> Option<&Contact> {
        let of = match self.resistors[resistor].kind {
            PartKind::With(of) => of,
            _ => resistor,
        };
        self.contacts.iter().find(|c| c.resistor == of)
    }

    /// The contacts that connect anything at all under a variation.
    fn working_contacts(&self, variation: &Variation) -> impl Iterator<Item = &Contact> {
        let lost = |c: &&Contact| {
            let failed = variation.all().filter_map(|v| v.resistor).filter(|(index, _)| *index == c.resistor);
            !failed.map(|(_, factor)| factor).any(f64::is_infinite)
        };
        self.contacts.iter().filter(lost)
    }

    /// True where a contact connects something after isolation.
    pub fn switches(&self, variation: &Variation) -> bool {
        self.working_contacts(variation).next().is_some()
    }

    /// The moments in second after isolation, later than `start`, at which contacts close.
    fn closings(&self, variation: &Variation, start: f64) -> Vec<f64> {
        let later = self.working_contacts(variation).filter(|c| !c.is_closed_at(start));
        let mut moments: Vec<f64> = later.map(|c| c.closes_after).collect();
        moments.sort_by(f64::total_cmp);
        moments.dedup();
        moments
    }

    /// What is connected one span after the other, from `start` seconds after isolation on, while the steps leave
    /// `connected` in place.
    pub fn spans(&self, variation: &Variation, start: f64, connected: &[usize]) -> Vec<Span> {
        let moments = self.closings(variation, start);
        let begins = std::iter::once(start).chain(moments.iter().copied());
        let ends = moments.iter().copied().chain([f64::INFINITY]);
        let span = |(begin, end): (f64, f64)| {
            let closed = self.working_contacts(variation).filter(|c| c.is_closed_at(begin)).map(|c| c.resistor);
            Span { length: end - begin, connected: connected.iter().copied().chain(closed).collect() }
        };
        begins.zip(ends).map(span).collect()
    }

    /// For every resistor the number of the span from `start` on with which it comes: 0 without a contact.
    pub fn first_spans(&self, variation: &Variation, start: f64) -> Vec<usize> {
        let moments = self.closings(variation, start);
        let first = |resistor: usize| {
            let contact = self.contact(resistor).filter(|c| !c.is_closed_at(start));
            contact.map_or(0, |c| 1 + moments.iter().take_while(|t| **t < c.closes_after).count())
        };
        (0..self.resistors.len()).map(first).collect()
    }

    /// For every resistor the voltage in volt that it bears until its contact opens when the bank is fed again: the
    /// greatest that stands across the whole bleeder before isolation, times its share of the bleeder. 0 for what opens
    /// at once or has no contact. `map` gives the node of the network for every node of the model, `ohms` the resistances
    /// with the contacts closed.
    pub fn fed_volts(&self, before: &Before, map: &[usize], ohms: &[f64]) -> Vec<f64> {
        let fed = |resistor: usize| {
            let (part, own) = (&self.resistors[resistor], ohms[resistor]);
            let contact = self.contact(resistor).filter(|c| c.opens_after > 0.0 && part.kind == PartKind::Contact);
            let Some(contact) = contact.filter(|_| own.is_finite()) else { return 0.0 };
            // The rest of the element's string.
            let in_string = |(_, p): &(usize, &super::model::Part)| p.kind == PartKind::With(contact.resistor);
            let rest = self.resistors.iter().enumerate().filter(in_string).find(|(_, p)| p.a == part.b);
            let share = rest.map_or(1.0, |(number, _)| own / (own + ohms[number]));
            before.greatest(map[contact.a], map[contact.b]) * share
        };
        (0..self.resistors.len()).map(fed).collect()
    }
}
