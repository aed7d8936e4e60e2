//! Twenty loose values: a dense search of the box with another method never finds a longer wait than the tool.
//!
//! The search: many random points, every one of the best of them then followed by a pattern search over single values
//! with a shrinking step (Hooke and Jeeves 1961), corners among the starts. It uses no derivative and no proof.

use super::network::{Bank, part};
use ebbvolt::quantity::Quantity;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{RngCore, SeedableRng};

struct Dense<'a> {
    bank: &'a Bank,
    random: ChaCha8Rng,
}

impl Dense<'_> {
    fn share(&mut self) -> f64 {
        (self.random.next_u64() >> 11) as f64 / (1u64 << 53) as f64
    }

    fn point(&mut self, corner: bool) -> Vec<f64> {
        let mut point = Vec::new();
        for p in &self.bank.parts {
            let share = self.share();
            let share = if corner { share.round() } else { share };
            point.push(1.0 + p.tolerance * (2.0 * share - 1.0));
        }
        point
    }

    /// The longest wait found.
    fn longest(&mut self, across: [&str; 2], points: usize, climbs: usize) -> f64 {
        let mut seen: Vec<(f64, Vec<f64>)> = (0..points)
            .map(|k| {
                let point = self.point(k % 2 == 0);
                (self.bank.wait(&point, across), point)
            })
            .collect();
        seen.sort_by(|x, y| y.0.total_cmp(&x.0));
        seen.truncate(climbs);
        seen.into_iter().map(|(value, point)| self.pattern(across, value, point)).fold(0.0, f64::max)
    }

    fn pattern(&self, across: [&str; 2], mut value: f64, mut point: Vec<f64>) -> f64 {
        let mut step = 2.0;
        while step > 1e-6 {
            let before = value;
            for (p, part) in self.bank.parts.iter().enumerate() {
                for sign in [1.0, -1.0] {
                    let mut moved = point.clone();
                    moved[p] =
                        (moved[p] + sign * step * part.tolerance).clamp(1.0 - part.tolerance, 1.0 + part.tolerance);
                    let found = self.bank.wait(&moved, across);
                    if found > value {
                        (value, point) = (found, moved);
                        break;
                    }
                }
            }
            if value <= before * (1.0 + 1e-10) {
                step *= 0.35;
            }
        }
        value
    }
}

/// Sections behind series resistors, each with a bleeder: the capacitors and bleeders are proven, the rest is not.
fn sections() -> Bank {
    Bank {
        nodes: &["P", "A", "B", "D", "E", "F", "N"],
        volts: 900.0,
        touch: 50.0,
        parts: vec![
            part("C1", 470e-6, 0.2, ["P", "N"]),
            part("C2", 220e-6, 0.2, ["A", "N"]),
            part("C3", 100e-6, 0.1, ["B", "N"]),
            part("C4", 680e-6, 0.2, ["D", "N"]),
            part("C5", 47e-6, 0.1, ["E", "N"]),
            part("C6", 330e-6, 0.2, ["F", "N"]),
            part("R1", 47e3, 0.05, ["P", "N"]),
            part("R2", 68e3, 0.05, ["A", "N"]),
            part("R3", 150e3, 0.05, ["D", "N"]),
            part("R4", 100e3, 0.1, ["F", "N"]),
            part("S1", 2.2e3, 0.1, ["P", "A"]),
            part("S2", 4.7e3, 0.1, ["A", "B"]),
            part("S3", 10e3, 0.1, ["B", "D"]),
            part("S4", 22e3, 0.1, ["P", "E"]),
            part("S5", 15e3, 0.1, ["E", "F"]),
            part("S6", 33e3, 0.1, ["D", "F"]),
            part("S7", 6.8e3, 0.1, ["A", "D"]),
            part("S8", 12e3, 0.1, ["P", "F"]),
            part("S9", 27e3, 0.1, ["B", "E"]),
            part("S10", 18e3, 0.1, ["A", "F"]),
        ],
    }
}

/// A string with a bleeder over its ends, joints that lend each other charge, and joints that float: nothing is proven.
fn string() -> Bank {
    Bank {
        nodes: &["P", "A", "B", "D", "E", "N"],
        volts: 1200.0,
        touch: 40.0,
        parts: vec![
            part("C1", 100e-6, 0.2, ["P", "A"]),
            part("C2", 150e-6, 0.2, ["A", "B"]),
            part("C3", 68e-6, 0.2, ["B", "D"]),
            part("C4", 120e-6, 0.2, ["D", "N"]),
            part("C5", 33e-6, 0.2, ["P", "B"]),
            part("C6", 47e-6, 0.2, ["B", "N"]),
            part("C7", 22e-6, 0.2, ["A", "E"]),
            part("C8", 27e-6, 0.2, ["E", "N"]),
            part("C9", 10e-6, 0.2, ["P", "N"]),
            part("R1", 33e3, 0.1, ["P", "A"]),
            part("R2", 22e3, 0.1, ["A", "B"]),
            part("R3", 47e3, 0.1, ["B", "D"]),
            part("R4", 27e3, 0.1, ["D", "N"]),
            part("R5", 56e3, 0.1, ["P", "N"]),
            part("R6", 100e3, 0.1, ["P", "B"]),
            part("R7", 82e3, 0.1, ["B", "N"]),
            part("R8", 150e3, 0.1, ["A", "D"]),
            part("R9", 39e3, 0.1, ["A", "N"]),
            part("R10", 68e3, 0.1, ["P", "D"]),
            part("R11", 180e3, 0.1, ["E", "P"]),
        ],
    }
}

fn never_below(bank: &Bank, seed: u64) {
    assert_eq!(bank.parts.len(), 20);
    let plan = bank.plan();
    let mut dense = Dense { bank, random: ChaCha8Rng::seed_from_u64(seed) };
    for wait in &plan.waits {
        let across = [wait.across[0].as_str(), wait.across[1].as_str()];
        let slowest = wait.slowest.expect("it ends").si();
        let found = dense.longest(across, 1000, 4);
        assert!(slowest >= found * (1.0 - 1e-11), "{across:?}: {slowest} s, but {found} s was found");
        // And the tool's own figure is one that the box really holds.
        let at: Vec<f64> = bank
            .parts
            .iter()
            .map(|p| wait.worst_point.iter().find(|w| w.id == p.id).map_or(1.0, |w| w.factor))
            .collect();
        let again = bank.wait(&at, across);
        assert!((again - slowest).abs() <= 1e-9 * slowest, "{across:?}: {again} s at the worst point of {slowest} s");
    }
}

#[test]
fn no_search_of_twenty_loose_values_of_sections_finds_a_longer_wait() {
    never_below(&sections(), 1);
}

#[test]
fn no_search_of_twenty_loose_values_of_a_string_finds_a_longer_wait() {
    never_below(&string(), 2);
}
