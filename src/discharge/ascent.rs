//! Climbs over the tolerance box along the gradient, from several starts.
//!
//! From a point, every value moves to the end of its range that its derivative points to (the step of Frank and Wolfe
//! 1956, which over a box is exact for a linear figure); where that overshoots, the way there is halved until the
//! figure grows. A climb ends where no step does. Values with a maximum inside the box come to lie near it and are
//! polished by the search that follows.

use super::pinned::Pin;
use super::worst::{Objective, Search, Worst};
use crate::circuit::CircuitError;
use rayon::prelude::*;

/// Steps of one climb, and halvings of one step.
const MOST_STEPS: usize = 24;
const MOST_HALVINGS: usize = 5;

/// A gain below this share ends a climb.
const NOTABLE: f64 = 1e-9;

/// Climbs for every one of `figures`, which have gradients.
pub(super) fn climb_from_many_starts<O: Objective>(
    search: &Search<'_, O>,
    figures: &[usize],
    best: &mut [Worst],
) -> Result<(), CircuitError> {
    let climbed: Vec<(usize, Worst)> = figures
        .par_iter()
        .map(|index| Ok((*index, climb_figure(search, *index, best[*index].clone())?)))
        .collect::<Result<_, CircuitError>>()?;
    climbed.into_iter().for_each(|(index, worst)| best[index] = worst);
    Ok(())
}

fn climb_figure<O: Objective>(search: &Search<'_, O>, index: usize, mut best: Worst) -> Result<Worst, CircuitError> {
    let pins = search.objective.pins(index);
    // A fixed sequence (SplitMix64; Steele, Lea and Flood 2014): the same input gives the same plan.
    let mut state = 0x2545_f491_4f6c_dd1d_u64 ^ index as u64;
    let mut share = || {
        state = state.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = (state ^ (state >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1u64 << 53) as f64
    };
    let mut starts = vec![best.point.clone(), search.pinned_point(&pins, |_, r| 0.5 * (r.low + r.high))];
    // Half of the random starts are corners, half lie inside.
    for number in 0..search.objective.random_starts() {
        starts.push(search.pinned_point(&pins, |_, range| {
            let share = share();
            let share = if number % 2 == 0 { share.round() } else { share };
            range.low + share * (range.high - range.low)
        }));
    }
    for start in starts {
        if best.value.is_infinite() && best.value > 0.0 {
            break;
        }
        climb(search, index, &pins, start, &mut best)?;
    }
    Ok(best)
}

/// One climb from `start`; the best point on the way is kept in `best`.
fn climb<O: Objective>(
    search: &Search<'_, O>,
    index: usize,
    pins: &[Pin],
    start: Vec<f64>,
    best: &mut Worst,
) -> Result<(), CircuitError> {
    let objective = search.objective;
    let mut point = start;
    let mut case = objective.case_for(index, &point)?;
    let mut value = objective.figure(index, &case, 0.0)?;
    keep(best, value, &point);
    for _ in 0..MOST_STEPS {
        let Some(gradient) = objective.gradient(index, &case, &point, value) else { return Ok(()) };
        let goal: Vec<f64> = search.pinned_point(pins, |p, range| match gradient[p] {
            slope if slope > 0.0 => range.high,
            slope if slope < 0.0 => range.low,
            _ => point[p],
        });
        let mut share = 1.0;
        let mut grown = None;
        for _ in 0..=MOST_HALVINGS {
            let next: Vec<f64> = point.iter().zip(&goal).map(|(x, to)| x + share * (to - x)).collect();
            // The end of a range is reached exactly, not to the last bit of a sum.
            let next = if share < 1.0 { next } else { goal.clone() };
            let next_case = objective.case_for(index, &next)?;
            let next_value = objective.figure(index, &next_case, 0.0)?;
            if next_value > value {
                grown = Some((next, next_case, next_value));
                break;
            }
            share *= 0.5;
        }
        let Some((next, next_case, next_value)) = grown else { return Ok(()) };
        let gain = next_value > value * (1.0 + NOTABLE);
        (point, case, value) = (next, next_case, next_value);
        keep(best, value, &point);
        if !gain {
            return Ok(());
        }
    }
    Ok(())
}

fn keep(best: &mut Worst, value: f64, point: &[f64]) {
    if value > best.value {
        *best = Worst { value, point: point.to_vec(), ..*best };
    }
}
