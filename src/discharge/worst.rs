//! The worst point of the tolerance box for each figure.
//!
//! With up to [`MOST_CORNERS`] loose values all corners are tried, then the neighbourhood and the inside of the box
//! from the best corner of each figure. Maxima inside are real: charge that two capacitors share, a voltage that
//! one section lends to another.
//!
//! With more loose values, those whose direction is proven for a figure are pinned ([`super::pinned`]). Where few
//! enough are left, all corners of these are tried. Otherwise corners are searched by flipping values
//! ([`super::flips`]), and the box is climbed from several starts along the gradient ([`super::ascent`]): a search and
//! no proof. Both are
//! followed by the same search inside the box. A plan says which of them gave a figure.

use super::ascent;
use super::flips;
use super::model::Parameter;
use super::pinned::Pin;
use crate::circuit::CircuitError;
use rayon::prelude::*;
use std::collections::{BTreeMap, HashSet};

/// Up to this many loose values every corner is tried.
pub(crate) const MOST_CORNERS: usize = 12;

/// Beyond this many loose values the way into the box is looked at next to a corner only.
const MANY: usize = 24;

/// Random starts of the search beyond that, besides the two extreme corners and the middle.
pub(super) const RANDOM_STARTS: usize = 8;

/// A gain below this share is not worth another round: a crossing is bracketed to little less.
pub(super) const NOTABLE: f64 = 1e-12;

/// The greatest value of a figure and where it was found.
#[derive(Debug, Clone)]
pub(crate) struct Worst {
    pub value: f64,
    pub point: Vec<f64>,
    pub method: Method,
}

/// How a greatest value was found, before the search inside the box that always follows.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Method {
    /// Every corner of this many loose values.
    AllCorners(usize),
    /// Every corner of `free` values, all others pinned by proof.
    Pinned { pinned: usize, free: usize },
    /// Single flips and climbs from several starts over `free` values, all others pinned by proof.
    Searched { pinned: usize, free: usize },
}

/// Figures to be maximised over a box: a point is solved once and then asked for any of them.
pub(crate) trait Objective: Sync {
    /// A solved point.
    type Case;

    /// The loose values that span the box.
    fn parameters(&self) -> &[Parameter];

    /// How many figures there are.
    fn count(&self) -> usize;

    /// Up to how many loose values every corner is tried; beyond, corners are searched.
    fn most_corners(&self) -> usize {
        MOST_CORNERS
    }

    /// How many corners may be tried in all for figures that few values are left free for.
    fn corner_budget(&self) -> usize {
        1 << self.most_corners()
    }

    /// Random starts of a search; one of many faults does with fewer.
    fn random_starts(&self) -> usize {
        RANDOM_STARTS
    }

    /// What is proven of every loose value for one figure.
    fn pins(&self, _index: usize) -> Vec<Pin> {
        vec![Pin::Free; self.parameters().len()]
    }

    /// Whether one figure has derivatives in closed form at all.
    fn has_gradient(&self, _index: usize) -> bool {
        false
    }

    /// Derivatives of one figure by every loose value, in closed form; `None` where there is none, or where the figure
    /// is flat (a wait of 0, a wait that never ends).
    fn gradient(&self, _index: usize, _case: &Self::Case, _point: &[f64], _value: f64) -> Option<Vec<f64>> {
        None
    }

    /// Solves one point.
    fn case(&self, point: &[f64]) -> Result<Self::Case, CircuitError>;

    /// Below this, a figure is not worth a search inside the box: it is near the rounding of the engine.
    fn negligible(&self, index: usize) -> f64;

    /// Solves a point as far as one figure needs it.
    fn case_for(&self, index: usize, point: &[f64]) -> Result<Self::Case, CircuitError>;

    /// Checks the energy balance of a solved point, so that no figure comes from one that it fails for.
    fn certify(&self, case: &Self::Case) -> Result<(), CircuitError>;

    /// One figure of a solved point. A value that is proven not to exceed `floor` may be given as `floor`.
    fn figure(&self, index: usize, case: &Self::Case, floor: f64) -> Result<f64, CircuitError>;
}

/// All figures with every value nominal.
pub(crate) fn nominal<O: Objective>(objective: &O) -> Result<Vec<f64>, CircuitError> {
    let case = objective.case(&vec![1.0; objective.parameters().len()])?;
    objective.certify(&case)?;
    (0..objective.count()).map(|i| objective.figure(i, &case, 0.0)).collect()
}

/// The greatest value of each figure over the box.
pub(crate) fn worst<O: Objective>(objective: &O) -> Result<Vec<Worst>, CircuitError> {
    let best = Search { objective }.worst()?;
    for point in distinct(&best) {
        objective.certify(&objective.case(&point)?)?;
    }
    Ok(best)
}

pub(super) struct Search<'a, O> {
    pub objective: &'a O,
}

impl<O: Objective> Search<'_, O> {
    fn worst(&self) -> Result<Vec<Worst>, CircuitError> {
        let count = self.parameters().len();
        let middle = vec![1.0; count];
        let method = Method::AllCorners(count);
        let unknown = Worst { value: f64::NEG_INFINITY, point: middle.clone(), method };
        let mut best = vec![unknown; self.objective.count()];
        self.offer(&middle, &mut best)?;
        if count == 0 {
            return Ok(best);
        }
        if count <= self.objective.most_corners() {
            // All high first: it is the worst of most figures, and a high floor ends most searches at once.
            for mask in (0..1usize << count).rev() {
                self.offer(&self.corner(|p| mask >> p & 1 == 1), &mut best)?;
            }
        } else {
            self.beyond_all_corners(&mut best)?;
        }
        self.refine_all(&mut best)?;
        Ok(best)
    }

    /// More loose values than all corners can be tried for.
    fn beyond_all_corners(&self, best: &mut [Worst]) -> Result<(), CircuitError> {
        // Figures with the same pins share their corners; those with the fewest free values come first.
        let mut groups: BTreeMap<(usize, Vec<Pin>), Vec<usize>> = BTreeMap::new();
        for index in 0..best.len() {
            let pins = self.objective.pins(index);
            let free = pins.iter().filter(|pin| **pin == Pin::Free).count();
            groups.entry((free, pins)).or_default().push(index);
        }
        let mut budget = self.objective.corner_budget();
        let mut searched: Vec<usize> = Vec::new();
        for ((free, pins), members) in &groups {
            let pinned = pins.len() - free;
            let corners = if *free < usize::BITS as usize { 1usize << free } else { usize::MAX };
            let all = corners <= budget;
            let method =
                if all { Method::Pinned { pinned, free: *free } } else { Method::Searched { pinned, free: *free } };
            members.iter().for_each(|i| best[*i].method = method);
            if all {
                budget -= corners;
                self.corners_of_the_free(pins, corners, members, best)?;
            } else {
                searched.extend(members);
            }
        }
        if searched.is_empty() {
            return Ok(());
        }
        searched.sort_unstable();
        flips::flip_from_many_starts(self, &searched, best)?;
        searched.retain(|index| self.objective.has_gradient(*index));
        ascent::climb_from_many_starts(self, &searched, best)
    }

    /// Every corner of the free values, for the figures that the others are pinned for.
    fn corners_of_the_free(
        &self,
        pins: &[Pin],
        corners: usize,
        members: &[usize],
        best: &mut [Worst],
    ) -> Result<(), CircuitError> {
        for mask in (0..corners).rev() {
            let mut bit = 0;
            let point: Vec<f64> = self.pinned_point(pins, |_, range| {
                bit += 1;
                if mask >> (bit - 1) & 1 == 1 { range.high } else { range.low }
            });
            self.offer_to(members, &point, best)?;
        }
        Ok(())
    }

    /// A point with every pinned value where it is worst; `free` gives the others.
    pub fn pinned_point(&self, pins: &[Pin], mut free: impl FnMut(usize, &Parameter) -> f64) -> Vec<f64> {
        let values = pins.iter().zip(self.parameters()).enumerate();
        values
            .map(|(p, (pin, range))| match pin {
                Pin::Free => free(p, range),
                Pin::High => range.high,
                Pin::Low => range.low,
                Pin::Idle => 1.0,
            })
            .collect()
    }

    pub fn parameters(&self) -> &[Parameter] {
        self.objective.parameters()
    }

    /// The value of one figure, exact.
    pub fn value(&self, index: usize, point: &[f64]) -> Result<f64, CircuitError> {
        self.objective.figure(index, &self.objective.case_for(index, point)?, 0.0)
    }

    pub fn corner(&self, high: impl Fn(usize) -> bool) -> Vec<f64> {
        let parameters = self.parameters().iter().enumerate();
        parameters.map(|(p, range)| if high(p) { range.high } else { range.low }).collect()
    }

    /// Tries a point for every figure.
    fn offer(&self, point: &[f64], best: &mut [Worst]) -> Result<(), CircuitError> {
        let all: Vec<usize> = (0..best.len()).collect();
        self.offer_to(&all, point, best)
    }

    /// Tries a point for some figures.
    pub fn offer_to(&self, figures: &[usize], point: &[f64], best: &mut [Worst]) -> Result<(), CircuitError> {
        let case = self.objective.case(point)?;
        for index in figures.iter().copied() {
            let worst = &mut best[index];
            if worst.value.is_infinite() && worst.value > 0.0 {
                continue;
            }
            let value = self.objective.figure(index, &case, worst.value.max(0.0))?;
            if value > worst.value {
                *worst = Worst { value, point: point.to_vec(), ..*worst };
            }
        }
        Ok(())
    }

    /// Searches inside the box, for every figure that grows on the way there from its best corner.
    fn refine_all(&self, best: &mut [Worst]) -> Result<(), CircuitError> {
        // Figures with the same best corner share the solved neighbours.
        let corners = distinct(best);
        let rising: Vec<(usize, Vec<bool>)> = corners
            .par_iter()
            .map(|corner| self.rising(corner, best))
            .collect::<Result<Vec<_>, CircuitError>>()?
            .into_iter()
            .flatten()
            .collect();
        let refined: Vec<(usize, Worst)> = rising
            .into_par_iter()
            .map(|(i, along)| Ok((i, self.refine(i, best[i].clone(), along)?)))
            .collect::<Result<_, CircuitError>>()?;
        refined.into_iter().for_each(|(i, worst)| best[i] = worst);
        Ok(())
    }

    /// The figures that have their best corner here and grow on the way from it into the box, and along which values.
    fn rising(&self, corner: &[f64], best: &[Worst]) -> Result<Vec<(usize, Vec<bool>)>, CircuitError> {
        let matters = |i: &usize| {
            let worst = &best[*i];
            worst.point == corner && worst.value.is_finite() && worst.value > self.objective.negligible(*i)
        };
        let mut here: Vec<(usize, Vec<bool>)> =
            (0..best.len()).filter(matters).map(|i| (i, vec![false; corner.len()])).collect();
        if !here.is_empty() {
            for (p, point) in self.inwards(corner) {
                let case = self.objective.case(&point)?;
                for (i, rises) in &mut here {
                    let bar = best[*i].value * (1.0 + NOTABLE);
                    rises[p] |= self.objective.figure(*i, &case, bar.max(0.0))? > bar;
                }
            }
        }
        here.retain(|(_, rises)| rises.contains(&true));
        Ok(here)
    }

    /// Points on the way from a best point along each value, both ways where it lies inside: short, half way, long; of
    /// many values short only.
    #[allow(clippy::float_cmp)] // Whether the point is at the very end.
    fn inwards(&self, point: &[f64]) -> Vec<(usize, Vec<f64>)> {
        let shares: &[f64] = if point.len() <= MANY { &[1e-3, 0.5, 0.9] } else { &[1e-3] };
        let mut points = Vec::with_capacity(2 * shares.len() * point.len());
        for (p, range) in self.parameters().iter().enumerate() {
            for end in [range.low, range.high] {
                if end != point[p] {
                    points.extend(shares.iter().map(|share| (p, toward(point, p, end, *share))));
                }
            }
        }
        points
    }

    /// Does a figure grow on a short way from its best point along one value?
    #[allow(clippy::float_cmp)] // As above.
    fn leads_on(&self, index: usize, worst: &Worst, p: usize) -> Result<bool, CircuitError> {
        let range = &self.parameters()[p];
        for end in [range.low, range.high] {
            let next = toward(&worst.point, p, end, 1e-3);
            if end != worst.point[p] && self.value(index, &next)? > worst.value {
                return Ok(true);
            }
        }
        Ok(false)
    }

    /// Searches inside the box from the best corner of one figure, at first along the values that it rises with.
    fn refine(&self, index: usize, mut worst: Worst, mut along: Vec<bool>) -> Result<Worst, CircuitError> {
        const MOST_ROUNDS: usize = 40;
        let count = worst.point.len();
        for _ in 0..MOST_ROUNDS {
            let start = worst.clone();
            for p in (0..count).filter(|p| along[*p]) {
                let mut direction = vec![0.0; count];
                direction[p] = self.parameters()[p].high - self.parameters()[p].low;
                self.climb(index, &mut worst, &direction)?;
            }
            // Along a ridge single values creep; the way of the whole round leads on (Powell 1964).
            let way: Vec<f64> = worst.point.iter().zip(&start.point).map(|(x, y)| x - y).collect();
            if way.iter().filter(|x| **x != 0.0).count() > 1 {
                self.climb(index, &mut worst, &way)?;
            }
            // Next round: what lies inside, and what now pays to leave its edge.
            for (p, goes_on) in along.iter_mut().enumerate() {
                let range = &self.parameters()[p];
                let inside = worst.point[p] > range.low && worst.point[p] < range.high;
                *goes_on = inside || self.leads_on(index, &worst, p)?;
            }
            if worst.value.is_infinite() || worst.value <= start.value * (1.0 + NOTABLE) {
                break;
            }
        }
        Ok(worst)
    }

    /// The best point on the line through the best point so far along `along`: a scan, then parabolas and golden
    /// sections around the best of it (Brent 1973, chapter 5).
    #[allow(clippy::float_cmp)] // Whether two of the points are the very same one.
    fn climb(&self, index: usize, worst: &mut Worst, along: &[f64]) -> Result<(), CircuitError> {
        let (low, high) = self.reach(&worst.point, along);
        if high - low <= 0.0 {
            return Ok(());
        }
        let origin = worst.point.clone();
        let at = |s: f64| -> Vec<f64> {
            let moved = origin.iter().zip(along).map(|(x, d)| x + s * d);
            moved.zip(self.parameters()).map(|(x, r)| x.clamp(r.low, r.high)).collect()
        };
        let mut tried = |s: f64| -> Result<f64, CircuitError> {
            let point = at(s);
            let value = self.value(index, &point)?;
            if value > worst.value {
                *worst = Worst { value, point, ..*worst };
            }
            Ok(value)
        };
        const SCAN: usize = 6;
        let step = (high - low) / SCAN as f64;
        let mut top = (tried(0.0)?, 0.0);
        for k in 0..=SCAN {
            let s = if k == SCAN { high } else { low + step * k as f64 };
            let value = tried(s)?;
            if value > top.0 {
                top = (value, s);
            }
        }
        let (mut a, mut b) = ((top.1 - step).max(low), (top.1 + step).min(high));
        let (mut x, mut w, mut v) = (top.1, top.1, top.1);
        let (mut fx, mut fw, mut fv) = (top.0, top.0, top.0);
        let (mut move_before, mut last_move) = (0.0f64, 0.0f64);
        let golden = 0.5 * (3.0 - 5f64.sqrt());
        let fine = 1e-7 * (high - low);
        for _ in 0..60 {
            let middle = 0.5 * (a + b);
            if (x - middle).abs() <= 2.0 * fine - 0.5 * (b - a) {
                break;
            }
            // The top of the parabola through the three best points, where it moves less than the last but one.
            let (r, q) = ((x - w) * (fx - fv), (x - v) * (fx - fw));
            let (top, bottom) = ((x - v) * q - (x - w) * r, 2.0 * (q - r));
            let parabolic = if bottom == 0.0 { f64::NAN } else { -top / bottom };
            let usable = parabolic.abs() < 0.5 * move_before.abs() && x + parabolic > a && x + parabolic < b;
            let way = if usable {
                move_before = last_move;
                parabolic
            } else {
                move_before = if x >= middle { a - x } else { b - x };
                golden * move_before
            };
            last_move = way;
            let u = x + if way.abs() >= fine { way } else { fine.copysign(way) };
            let fu = tried(u)?;
            if fu >= fx {
                if u >= x {
                    a = x
                } else {
                    b = x
                }
                (v, fv, w, fw, x, fx) = (w, fw, x, fx, u, fu);
            } else {
                if u < x {
                    a = u
                } else {
                    b = u
                }
                if fu >= fw || w == x {
                    (v, fv, w, fw) = (w, fw, u, fu);
                } else if fu >= fv || v == x || v == w {
                    (v, fv) = (u, fu);
                }
            }
        }
        Ok(())
    }

    /// How far a point may move along a direction, backwards and forwards, inside the box.
    fn reach(&self, point: &[f64], along: &[f64]) -> (f64, f64) {
        let mut reach = (f64::NEG_INFINITY, f64::INFINITY);
        for ((x, d), range) in point.iter().zip(along).zip(self.parameters()) {
            if *d != 0.0 {
                let (s, t) = ((range.low - x) / d, (range.high - x) / d);
                reach = (reach.0.max(s.min(t)), reach.1.min(s.max(t)));
            }
        }
        if reach.0.is_finite() && reach.1.is_finite() { reach } else { (0.0, 0.0) }
    }
}

/// A point moved along one value by a share of the way to `end`.
fn toward(point: &[f64], p: usize, end: f64, share: f64) -> Vec<f64> {
    let mut moved = point.to_vec();
    moved[p] += share * (end - point[p]);
    moved
}

pub(super) fn bits(point: &[f64]) -> Vec<u64> {
    point.iter().map(|x| x.to_bits()).collect()
}

/// The best points of all figures, each once.
pub(super) fn distinct(best: &[Worst]) -> Vec<Vec<f64>> {
    let mut seen = HashSet::new();
    best.iter().filter(|w| seen.insert(bits(&w.point))).map(|w| w.point.clone()).collect()
}
