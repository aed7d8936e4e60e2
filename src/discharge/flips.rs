//! A search of corners: from the best corner of a figure every single value is flipped to the other end of its range.
//!
//! The values whose flip makes the figure grow are then flipped together, which where values hardly act on each other
//! leads to the best corner at once; the best of the single flips is kept where that overshoots. A figure is done when no
//! flip makes it grow. What one figure finds is offered to all others, since the worst corners of a bank are alike.

use super::worst::{NOTABLE, Objective, Search, Worst, bits, distinct};
use crate::circuit::CircuitError;
use rayon::prelude::*;
use std::collections::{BTreeMap, HashSet};

/// Flips from two extreme corners, the middle (tried before) and random corners, for some figures.
pub(super) fn flip_from_many_starts<O: Objective>(
    search: &Search<'_, O>,
    figures: &[usize],
    best: &mut [Worst],
) -> Result<(), CircuitError> {
    let count = search.parameters().len();
    search.offer_to(figures, &search.corner(|_| true), best)?;
    search.offer_to(figures, &search.corner(|_| false), best)?;
    // A fixed sequence (xorshift; Marsaglia 2003), so that the same input gives the same plan.
    let mut state = 0x9e37_79b9_7f4a_7c15_u64;
    for _ in 0..search.objective.random_starts() {
        let bits: Vec<bool> = (0..count)
            .map(|_| {
                state ^= state << 13;
                state ^= state >> 7;
                state ^= state << 17;
                state & 1 == 1
            })
            .collect();
        search.offer_to(figures, &search.corner(|p| bits[p]), best)?;
    }
    // What each figure was when it last looked around. A last digit is no growth: it would lead from corner to corner
    // for as long as there are any.
    let mut looked: BTreeMap<usize, f64> = BTreeMap::new();
    let mut offered: HashSet<Vec<u64>> = HashSet::new();
    loop {
        let has_grown = |i: &usize| looked.get(i).is_none_or(|then| best[*i].value > then * (1.0 + NOTABLE));
        let fresh: Vec<usize> = figures.iter().copied().filter(has_grown).collect();
        looked.extend(fresh.iter().map(|i| (*i, best[*i].value)));
        if fresh.is_empty() {
            return Ok(());
        }
        let reached: Vec<Worst> = fresh.iter().map(|i| best[*i].clone()).collect();
        let found: Vec<(usize, Worst)> = distinct(&reached)
            .par_iter()
            .map(|corner| {
                let members: Vec<usize> = fresh.iter().copied().filter(|i| best[*i].point == *corner).collect();
                around(search, corner, &members, best)
            })
            .collect::<Result<Vec<_>, CircuitError>>()?
            .into_iter()
            .flatten()
            .collect();
        found.into_iter().for_each(|(i, worst)| best[i] = worst);
        let reached: Vec<Worst> = fresh.iter().map(|i| best[*i].clone()).collect();
        for point in distinct(&reached).into_iter().filter(|point| offered.insert(bits(point))) {
            search.offer_to(figures, &point, best)?;
        }
    }
}

/// The best that each of `members`, whose best corner this is, finds by flips from it.
fn around<O: Objective>(
    search: &Search<'_, O>,
    corner: &[f64],
    members: &[usize],
    best: &[Worst],
) -> Result<Vec<(usize, Worst)>, CircuitError> {
    let objective = search.objective;
    let mut found: Vec<(usize, Worst, Vec<f64>)> =
        members.iter().map(|i| (*i, best[*i].clone(), corner.to_vec())).collect();
    for (p, range) in search.parameters().iter().enumerate() {
        let mut flipped = corner.to_vec();
        flipped[p] = if flipped[p] < range.high { range.high } else { range.low };
        let case = objective.case(&flipped)?;
        for (i, worst, together) in &mut found {
            // Every flip that grows counts, not only the one that grows most.
            let bar = best[*i].value.max(0.0) * (1.0 + NOTABLE);
            if bar.is_infinite() {
                continue;
            }
            let value = objective.figure(*i, &case, bar)?;
            // What does not exceed the bar may be given as the bar.
            if value > bar {
                together[p] = flipped[p];
                if value > worst.value {
                    *worst = Worst { value, point: flipped.clone(), ..*worst };
                }
            }
        }
    }
    for (i, worst, together) in &mut found {
        if *together != worst.point && together != corner {
            let value = objective.figure(*i, &objective.case_for(*i, together)?, worst.value.max(0.0))?;
            if value > worst.value {
                *worst = Worst { value, point: together.clone(), ..*worst };
            }
        }
    }
    Ok(found.into_iter().map(|(i, worst, _)| (i, worst)).collect())
}
