//! Random draws over the tolerances, beside the worst case.
//!
//! Draws tell what is usual; the wait to keep stays the worst case. They are also a check on it: a draw that outlasts
//! it is an error of the tool.

use super::{EngineError, Pair, Wait, WaitCheck, si_or_null};
use crate::circuit::CircuitError;
use crate::discharge::{Model, Parameter, Study, healthy, values_at};
use crate::quantity::{Quantity, Time};
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{RngCore, SeedableRng};
use rand_distr::{Distribution, StandardNormal};
use rayon::prelude::*;
use serde::Serialize;

/// How draws are made.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Drawing {
    /// How many.
    pub count: u32,
    /// From which distribution.
    pub from: DrawFrom,
    /// Draws with the same seed are the same.
    pub seed: u64,
}

/// The distribution of every loose value over its range, each on its own.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum DrawFrom {
    /// Every value of the range alike.
    Uniform,
    /// Around the middle of the range, its ends at 3 standard deviations, cut off there.
    Normal,
}

/// What random draws over the tolerances give, at the highest voltage.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Draws {
    /// How many draws.
    pub count: u32,
    /// The distribution.
    pub from: DrawFrom,
    /// The seed.
    pub seed: u64,
    /// One entry for every test point.
    pub waits: Vec<DrawnWait>,
}

/// Waits over all draws at one test point; `None` (null) is never.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct DrawnWait {
    /// The test point.
    pub across: Pair,
    /// Half of the draws are not longer.
    #[serde(rename = "half_s", serialize_with = "si_or_null")]
    pub half: Option<Time>,
    /// 90 % are not longer.
    #[serde(rename = "ninety_percent_s", serialize_with = "si_or_null")]
    pub ninety: Option<Time>,
    /// 99 % are not longer.
    #[serde(rename = "ninety_nine_percent_s", serialize_with = "si_or_null")]
    pub ninety_nine: Option<Time>,
    /// 99.9 % are not longer.
    #[serde(rename = "ninety_nine_point_nine_percent_s", serialize_with = "si_or_null")]
    pub ninety_nine_nine: Option<Time>,
    /// The longest of all.
    #[serde(rename = "greatest_s", serialize_with = "si_or_null")]
    pub greatest: Option<Time>,
    /// The slowest wait over the tolerance box.
    #[serde(rename = "slowest_s", serialize_with = "si_or_null")]
    pub slowest: Option<Time>,
}

/// A draw may exceed the worst case by this share, the accuracy of the engine, and no more.
const ACCURACY: f64 = 1e-9;

/// The point of the box that draw `index` stands for: a stream of its own, whoever makes it and in whatever order.
fn point(parameters: &[Parameter], drawing: &Drawing, index: u32) -> Vec<f64> {
    let mut random = ChaCha8Rng::seed_from_u64(drawing.seed);
    random.set_stream(u64::from(index));
    let mut share = || match drawing.from {
        DrawFrom::Uniform => (random.next_u64() >> 11) as f64 / (1u64 << 53) as f64,
        DrawFrom::Normal => loop {
            let deviations: f64 = StandardNormal.sample(&mut random);
            if deviations.abs() <= 3.0 {
                break 0.5 + deviations / 6.0;
            }
        },
    };
    parameters.iter().map(|p| (p.low + share() * (p.high - p.low)).clamp(p.low, p.high)).collect()
}

impl Draws {
    /// Makes the draws and holds each against the `waits` of the plan.
    ///
    /// # Errors
    /// Where a draw outlasts the worst case; the error names the draw and its values.
    pub(crate) fn make(
        check: &WaitCheck,
        model: &Model,
        waits: &[Wait],
        drawing: &Drawing,
    ) -> Result<Self, EngineError> {
        let figures = check.waits();
        let volts = check.bank.description().charged_to.highest.si();
        let scenarios = healthy(model);
        let studies: Vec<Study> = scenarios.iter().map(|s| Study::new(model, s, volts, &figures, 0)).collect();
        let parameters = &model.parameters[..model.passive];
        let seconds = |time: Option<Time>| time.map_or(f64::INFINITY, Quantity::si);
        let one = |index: u32| {
            let point = point(parameters, drawing, index);
            let named = |cause| EngineError { scenario: story(parameters, drawing, index, &point), cause };
            let mut drawn = vec![0.0f64; figures.len()];
            for study in &studies {
                let found = values_at(study, &point).map_err(named)?;
                drawn.iter_mut().zip(found).for_each(|(x, y)| *x = x.max(y));
            }
            for (value, wait) in drawn.iter().zip(waits) {
                let greatest = seconds(wait.slowest);
                let within = *value <= greatest * (1.0 + ACCURACY);
                if !within {
                    return Err(named(CircuitError::Exceeded { value: *value, greatest }));
                }
            }
            Ok(drawn)
        };
        let drawn: Vec<Vec<f64>> = (0..drawing.count).into_par_iter().map(one).collect::<Result<_, _>>()?;
        let waits = waits.iter().enumerate().map(|(at, wait)| {
            let mut times: Vec<f64> = drawn.iter().map(|draw| draw[at]).collect();
            times.sort_by(f64::total_cmp);
            // The least of the draws that so many are not longer than: never between two of them, so never too short.
            let rank = |per_thousand: usize| {
                let rank = (times.len() * per_thousand).div_ceil(1000).max(1) - 1;
                times.get(rank).filter(|t| t.is_finite()).map(|t| Time::from_si(*t))
            };
            DrawnWait {
                across: wait.across.clone(),
                half: rank(500),
                ninety: rank(900),
                ninety_nine: rank(990),
                ninety_nine_nine: rank(999),
                greatest: rank(1000),
                slowest: wait.slowest,
            }
        });
        Ok(Draws { count: drawing.count, from: drawing.from, seed: drawing.seed, waits: waits.collect() })
    }
}

/// A draw with its values, for the error that it is.
fn story(parameters: &[Parameter], drawing: &Drawing, index: u32, point: &[f64]) -> String {
    let values: Vec<String> = parameters.iter().zip(point).map(|(p, x)| format!("{} x {x:?}", p.id)).collect();
    format!("draw {} with seed {}: {}", index + 1, drawing.seed, values.join(", "))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bank::file;

    const BANK: &[u8] = b"ebbvolt: 1\ntag: T\ntouch_voltage: 50 V\ncharged_to: {nominal: 500 V, highest: 600 V}\n\
        capacitors: [{id: C1, value: 100 uF, tolerance: 20 %}]\n\
        resistors: [{id: R1, role: bleeder, value: 10 kohm, tolerance: 5 %}]\n";

    #[test]
    fn a_draw_that_outlasts_the_worst_case_is_an_error_that_prints_the_draw() {
        let (bank, noticed) = file::read("t.yaml", BANK).expect("valid");
        let mut plan = crate::plan::plan(&bank, "", noticed, Default::default()).expect("certified");
        let model = Model::new(&bank).expect("a model");
        let check = WaitCheck { bank: &bank, model: &model };
        let drawing = Drawing { count: 100, from: DrawFrom::Uniform, seed: 7 };
        assert!(Draws::make(&check, &model, &plan.waits, &drawing).is_ok());
        // A worst case that is too short on purpose.
        plan.waits[0].slowest = plan.waits[0].slowest.map(|t| t * 0.9);
        let error = Draws::make(&check, &model, &plan.waits, &drawing).expect_err("some draw is longer");
        let text = error.to_string();
        assert!(text.contains("with seed 7: C1 x 1.") && text.contains("R1 x "), "{text}");
        assert!(matches!(error.cause, CircuitError::Exceeded { .. }));
    }

    #[test]
    fn draws_fill_the_range_and_normal_ones_keep_to_the_middle() {
        let range = [Parameter { id: "R1".into(), low: 0.9, high: 1.3 }];
        let shares = |from| -> Vec<f64> {
            let drawing = Drawing { count: 0, from, seed: 1 };
            (0..4000).map(|i| (point(&range, &drawing, i)[0] - 0.9) / 0.4).collect()
        };
        let spread = |list: &[f64]| (list.iter().map(|x| (x - 0.5).powi(2)).sum::<f64>() / list.len() as f64).sqrt();
        let (uniform, normal) = (shares(DrawFrom::Uniform), shares(DrawFrom::Normal));
        assert!(uniform.iter().chain(&normal).all(|x| (0.0..=1.0).contains(x)));
        // Standard deviations: 1/sqrt(12) = 0.2887; of a normal one cut off at 3 sigma, 0.9866/6 = 0.1644.
        assert!((spread(&uniform) - 0.2887).abs() < 0.006, "{}", spread(&uniform));
        assert!((spread(&normal) - 0.1644).abs() < 0.005, "{}", spread(&normal));
    }
}
