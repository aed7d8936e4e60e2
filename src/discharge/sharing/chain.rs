//! What is proven of a string that is a plain chain: it lies between the terminals, and what touches its inner nodes
//! lies across one unit.
//!
//! Let V be held across units with resistances R_j that leak l_j. One current passes them all, so unit k has
//! `v_k = R_k (V + sum over j of R_j (l_j - l_k)) / sum of R_j`: only differences between leakages matter. It is
//! greatest with its own leakage at nothing and all others at their greatest L_j, and then, with S the sum of the other
//! R_j:
//!
//! - `v_k = R_k (V + sum of R_j L_j) / (R_k + S)` grows with R_k.
//! - dv_k/dR_j has the sign of `L_j R_k + sum over i of R_i (L_j - L_i) - V`. Where that is negative at the ends of the
//!   tolerances that make it greatest, it is negative everywhere. (Beyond, a unit could take more than the whole V.)
//! - The power of all R_j together is V^2 over their sum (without leakage): greatest with each at its lowest.
//! - A division by capacitance is `(1/C_k) / sum of 1/C_j`: falls with C_k and grows with every other C_j.

use super::Strung;
use crate::discharge::model::{Part, PartKind};
use crate::discharge::pinned::Pin;

impl Strung<'_> {
    /// The number of the unit that a part lies across.
    fn unit_across(&self, part: &Part) -> Option<usize> {
        let ends = |a: usize, b: usize| (part.a, part.b) == (a, b) || (part.a, part.b) == (b, a);
        self.units.iter().position(|u| ends(u.top, u.bottom))
    }

    fn touches_the_inside(&self, part: &Part) -> bool {
        self.units.iter().skip(1).any(|u| part.a == u.top || part.b == u.top)
    }

    fn lies_between_the_terminals(&self) -> bool {
        let ends = self.units.first().zip(self.units.last()).map(|(first, last)| [first.top, last.bottom]);
        ends.is_some_and(|ends| ends.iter().all(|node| self.model.terminals.contains(node)))
    }

    /// Resistors that are there at all times, each with its number.
    fn standing(&self) -> impl Iterator<Item = (usize, &Part)> {
        self.model.resistors.iter().enumerate().filter(|(_, r)| r.kind == PartKind::Fixed)
    }

    /// Least and greatest resistance in ohm across every unit.
    fn ranges(&self) -> Vec<(f64, f64)> {
        let ohms = self.model.ohms(self.variation, &[], &[]);
        let mut siemens = vec![(0.0, 0.0); self.units.len()];
        for (index, resistor) in self.standing() {
            if let Some(unit) = self.unit_across(resistor) {
                let range = resistor.parameter.map(|p| &self.model.parameters[p]);
                let (low, high) = range.map_or((1.0, 1.0), |r| (r.low, r.high));
                siemens[unit].0 += (ohms[index] * high).recip();
                siemens[unit].1 += (ohms[index] * low).recip();
            }
        }
        siemens.into_iter().map(|(least, most): (f64, f64)| (most.recip(), least.recip())).collect()
    }

    fn idle(&self) -> Vec<Pin> {
        vec![Pin::Idle; self.model.passive]
    }
}

/// True where the resistors at the string are a plain chain.
pub(super) fn resistors_are_a_chain(strung: &Strung) -> bool {
    let plain = |r: &Part| strung.unit_across(r).is_some() || !strung.touches_the_inside(r);
    strung.lies_between_the_terminals() && strung.standing().all(|(_, r)| plain(r))
}

/// True where the capacitors are.
pub(super) fn capacitors_are_a_chain(strung: &Strung) -> bool {
    let plain = |c: &Part| strung.unit_across(c).is_some() || !strung.touches_the_inside(c);
    strung.lies_between_the_terminals() && strung.model.capacitors.iter().all(plain)
}

/// For the settled voltage of a unit.
pub(super) fn settled_pins(strung: &Strung, of: usize) -> Vec<Pin> {
    if !resistors_are_a_chain(strung) {
        return vec![Pin::Free; strung.model.passive];
    }
    let (units, ranges) = (strung.units, strung.ranges());
    let falls_with = |j: usize| {
        let more = |(i, unit): (usize, &super::Unit)| ranges[i].1 * (units[j].leakage - unit.leakage).max(0.0);
        let others: f64 = units.iter().enumerate().filter(|(i, _)| *i != of && *i != j).map(more).sum();
        units[j].leakage * ranges[of].1 + others < strung.volts
    };
    let mut pins = strung.idle();
    for (_, resistor) in strung.standing() {
        let (Some(parameter), Some(unit)) = (resistor.parameter, strung.unit_across(resistor)) else { continue };
        pins[parameter] = match unit {
            own if own == of => Pin::High,
            other if falls_with(other) => Pin::Low,
            _ => Pin::Free,
        };
    }
    pins
}

/// For the power of the resistors that are asked for.
pub(super) fn power_pins(strung: &Strung) -> Vec<Pin> {
    let all_asked = strung.standing().all(|(i, r)| strung.unit_across(r).is_none() || strung.resistors.contains(&i));
    if !(resistors_are_a_chain(strung) && all_asked) {
        return vec![Pin::Free; strung.model.passive];
    }
    let mut pins = strung.idle();
    let across = strung.standing().filter(|(_, r)| strung.unit_across(r).is_some());
    across.filter_map(|(_, r)| r.parameter).for_each(|p| pins[p] = Pin::Low);
    pins
}

/// For the division by capacitance; resistors have no say in it.
pub(super) fn divided_pins(strung: &Strung, of: usize) -> Vec<Pin> {
    let proven = capacitors_are_a_chain(strung);
    let mut pins = strung.idle();
    for capacitor in &strung.model.capacitors {
        let Some(parameter) = capacitor.parameter else { continue };
        pins[parameter] = match strung.unit_across(capacitor) {
            _ if !proven => Pin::Free,
            Some(own) if own == of => Pin::Low,
            Some(_) => Pin::High,
            None => Pin::Idle,
        };
    }
    pins
}
