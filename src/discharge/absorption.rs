//! Dielectric absorption: what a capacitor gives back after a short.
//!
//! The model is a ladder of branches r_j-c_j in parallel with C (Dow 1958), with fixed time constants and equal
//! c_j. Their total is scaled so that the SIMULATED standard test on one unit (charge 60 min, discharge 10 s
//! through 5 ohm, greatest voltage in the following 15 min; IEC 60384-1) returns exactly the share asked for.

use crate::circuit::{CircuitError, Edge, Modes, Network};
use std::sync::Arc;

/// Time constants of the branches in second.
const TIME_CONSTANTS: [f64; 5] = [1.0, 10.0, 100.0, 1e3, 1e4];

/// Aluminium electrolytics recover most after 10 to 20 days (makers' data): two slower branches more.
const SLOW_TIME_CONSTANTS: [f64; 2] = [1e5, 1e6];

/// The standard test (IEC 60384-1): charging time, discharge time, time in which the voltage is watched, in second,
/// and the resistance of the discharge in ohm.
const CHARGED_FOR: f64 = 3600.0;
const SHORTED_FOR: f64 = 10.0;
const WATCHED_FOR: f64 = 900.0;
const SHORT_OHMS: f64 = 5.0;

/// Above this time constant of C and the 5 ohm the test's short is taken as ideal, in second.
const IDEAL_SHORT_FROM: f64 = 0.1;

/// The branches of a dielectric: time constants, and the capacitance of each over that of the unit.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Branches {
    pub time_constants: Vec<f64>,
    pub share: f64,
}

impl Branches {
    /// The branches for which the standard test on `farad` returns `absorption`.
    pub fn calibrated(farad: f64, absorption: f64, slow: bool) -> Result<Self, CircuitError> {
        let slow_ones: &[f64] = if slow { &SLOW_TIME_CONSTANTS } else { &[] };
        let time_constants = [&TIME_CONSTANTS, slow_ones].concat();
        let with = |share: f64| Branches { time_constants: time_constants.clone(), share };
        let test = |share: f64| with(share).standard_test(farad);
        // The recovery grows with the branches: bracket, then regula falsi with the Illinois weights.
        let (mut low, mut high) = (0.0, absorption.max(1e-9));
        let (mut below, mut above) = (-absorption, test(high)? - absorption);
        while above < 0.0 {
            (low, below) = (high, above);
            high *= 2.0;
            if high > 1e9 {
                return Err(CircuitError::SearchNotClosed);
            }
            above = test(high)? - absorption;
        }
        for _ in 0..200 {
            if high - low <= 1e-14 * high || above == 0.0 {
                break;
            }
            let middle = (low * above - high * below) / (above - below);
            let middle = if middle > low && middle < high { middle } else { 0.5 * (low + high) };
            let value = test(middle)? - absorption;
            if value < 0.0 {
                (low, below) = (middle, value);
                above *= 0.5;
            } else {
                (high, above) = (middle, value);
                below *= 0.5;
            }
            if value.abs() <= 1e-13 * absorption {
                return Ok(with(middle));
            }
        }
        Ok(with(high))
    }

    /// (ohm, farad) of every branch beside a capacitance of `farad`.
    pub fn parts(&self, farad: f64) -> impl Iterator<Item = (f64, f64)> {
        let c = self.share * farad;
        self.time_constants.iter().map(move |tau| (tau / c, c))
    }

    /// The greatest voltage that the standard test reads, over the charging voltage.
    pub fn standard_test(&self, farad: f64) -> Result<f64, CircuitError> {
        // Node 0 is the reference, node 1 the capacitor's terminal, 2.. the insides of the branches.
        let nodes = 2 + self.time_constants.len();
        let edge = |a, b, value| Edge { a, b, value };
        let branches = |inside: usize, (ohm, c): (f64, f64)| (edge(1, inside, ohm), edge(inside, 0, c));
        let (mut resistors, mut capacitors): (Vec<Edge>, Vec<Edge>) =
            self.parts(farad).enumerate().map(|(i, part)| branches(2 + i, part)).unzip();
        let charged: Vec<f64> = self.time_constants.iter().map(|tau| -(-CHARGED_FOR / tau).exp_m1()).collect();

        let shorted: Vec<f64> = if SHORT_OHMS * farad > IDEAL_SHORT_FROM {
            let after = |(u, tau): (&f64, &f64)| u * (-SHORTED_FOR / tau).exp();
            std::iter::once(0.0).chain(charged.iter().zip(&self.time_constants).map(after)).collect()
        } else {
            let mut network = Network {
                nodes,
                resistors: resistors.clone(),
                capacitors: std::iter::once(edge(1, 0, farad)).chain(capacitors.iter().copied()).collect(),
                ..Network::default()
            };
            network.resistors.push(edge(1, 0, SHORT_OHMS));
            let start: Vec<f64> = std::iter::once(1.0).chain(charged).collect();
            Arc::new(Modes::new(network)?).response(&start, &vec![0.0; nodes])?.voltages_at(SHORTED_FOR)
        };
        capacitors.insert(0, edge(1, 0, farad));
        let resistors = std::mem::take(&mut resistors);
        let open = Network { nodes, resistors, capacitors, ..Network::default() };
        let response = Arc::new(Modes::new(open)?).response(&shorted, &vec![0.0; nodes])?;
        Ok(response.across(1, 0).greatest_magnitude_within(0.0, WATCHED_FOR)?.0)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_standard_test_returns_the_share_asked_for() {
        for (farad, absorption, slow) in
            [(1e-6, 0.0005, false), (3300e-6, 0.10, true), (0.1, 0.02, false), (130.0, 0.5, true), (1e-9, 0.05, false)]
        {
            let branches = Branches::calibrated(farad, absorption, slow).expect("calibrates");
            let read = branches.standard_test(farad).expect("closes");
            approx::assert_relative_eq!(read, absorption, max_relative = 1e-9);
            assert!(branches.share > 0.0);
        }
    }
}
