//! How a voltage at a moment changes with every part of the network, in closed form from the modes.
//!
//! The network obeys `C y' = -G y`. A change of one conductance acts as a current `-dg v_e(s)` drawn across its own
//! nodes, one of a capacitance as `-dc v_e'(s)`; what such a current does to the voltage between `a` and `b` is, by
//! reciprocity, the voltage `z_e` that a unit charge let in at `a` and out at `b` makes across the part (Director and
//! Rohrer 1969, the adjoint network, which for a network of R and C is the network itself):
//!
//! ```text
//! dv/dg = - integral of z_e(t-s) v_e(s) ds        dv/dc = - integral of z_e(t-s) v_e'(s) ds
//! ```
//!
//! Both courses are sums of the same exponentials, so the integrals are sums over pairs of modes. Added to that is
//! what the part does to the state at isolation, which is one adjoint solution of the operating point.

use super::laplacian::charged_potentials;
use super::{Network, Response};

/// Derivatives of one voltage, in the order of the network's parts.
#[derive(Debug, Clone, PartialEq)]
pub struct Sensitivity {
    /// Volt per siemens, for every resistor.
    pub per_siemens: Vec<f64>,
    /// Volt per farad, for every capacitor.
    pub per_farad: Vec<f64>,
}

/// Derivatives after isolation, and what the voltage takes from the state at isolation.
#[derive(Debug, Clone, PartialEq)]
pub struct Carried {
    /// With the state at isolation kept.
    pub kept: Sensitivity,
    /// Volt per volt that a capacitor has at isolation, for every capacitor.
    pub per_start: Vec<f64>,
}

/// `integral of exp(-p (t-s)) exp(-q s) ds` over 0 to t; exact where the rates meet.
fn overlap(p: f64, q: f64, t: f64) -> f64 {
    let gap = (p - q).abs() * t;
    let share = if gap < 1e-8 { 1.0 - 0.5 * gap } else { -(-gap).exp_m1() / gap };
    (-p.min(q) * t).exp() * t * share
}

impl Response {
    /// How the voltage of `a` against `b` at `t` seconds changes with every part, and with the state at isolation.
    /// The network has no sources.
    pub fn sensitivity(&self, a: usize, b: usize, t: f64) -> Carried {
        let network = self.network();
        let modes = self.modes();
        let count = modes.rates.len();
        let across = |shape: &[f64], (a, b): (usize, usize)| -> f64 {
            let (pa, pb) = (&modes.potentials[a], &modes.potentials[b]);
            pa.iter().zip(pb).zip(shape).map(|((x, y), s)| (x - y) * s).sum()
        };
        let of_pair: Vec<f64> = modes.shapes.iter().map(|s| across(s, (a, b))).collect();
        // For every part, what it takes from each mode: sum over j of its own amplitude times the overlap.
        let overlaps: Vec<Vec<f64>> =
            (0..count).map(|k| (0..count).map(|j| overlap(modes.rates[k], modes.rates[j], t)).collect()).collect();
        let integral = |shapes: &[f64], amplitudes: &[f64]| -> f64 {
            let inner = |k: usize| overlaps[k].iter().zip(amplitudes).map(|(o, a)| o * a).sum::<f64>();
            (0..count).map(|k| of_pair[k] * shapes[k] * inner(k)).sum()
        };
        let shapes_of = |e: (usize, usize)| modes.shapes.iter().map(|s| across(s, e)).collect::<Vec<f64>>();

        // Nodes without a state of their own answer at once: resistances alone, with every capacitor a short.
        let at_once = self.unit_charge(a, b, &network.capacitive_parts(), false);
        // What stays of the unit charge for ever: capacitances alone, with every resistor a short.
        let trapped = self.unit_charge(a, b, &network.resistive_parts(), true);
        let per_siemens = network.resistors.iter().map(|r| {
            let shapes = shapes_of((r.a, r.b));
            let amplitudes: Vec<f64> = shapes.iter().zip(&self.amplitudes).map(|(s, a)| s * a).collect();
            let share = at_once[r.a] - at_once[r.b];
            let here = if share == 0.0 { 0.0 } else { self.across(r.a, r.b).value(t) };
            -integral(&shapes, &amplitudes) - share * here
        });
        let mut per_start = Vec::with_capacity(network.capacitors.len());
        let per_farad = network.capacitors.iter().map(|c| {
            let shapes = shapes_of((c.a, c.b));
            let falling: Vec<f64> =
                shapes.iter().zip(&self.amplitudes).zip(&modes.rates).map(|((s, a), r)| -s * a * r).collect();
            let stays = trapped[c.a] - trapped[c.b];
            let own = self.across(c.a, c.b);
            let moving = (0..count).map(|k| of_pair[k] * shapes[k] * (-modes.rates[k] * t).exp()).sum::<f64>();
            per_start.push(c.value * (moving + stays));
            let moved = if stays == 0.0 { 0.0 } else { stays * (own.value(t) - own.value(0.0)) };
            -integral(&shapes, &falling) - moved
        });
        let per_farad = per_farad.collect();
        Carried { kept: Sensitivity { per_siemens: per_siemens.collect(), per_farad }, per_start }
    }

    /// The nodes whose potentials at the start hold apart two nodes that nothing ties together; `None` for nodes of
    /// one part.
    pub fn apart(&self, a: usize, b: usize) -> Option<(usize, usize)> {
        let anchor = &self.modes().anchor;
        (anchor[a] != anchor[b]).then(|| (anchor[a], anchor[b]))
    }

    /// Potentials that a unit of charge (or of current) in at `a` and out at `b` makes between `parts` that are one
    /// node each, with capacitances or resistances between them.
    fn unit_charge(&self, a: usize, b: usize, parts: &[usize], by_capacitance: bool) -> Vec<f64> {
        let network = self.network();
        if parts[a] == parts[b] {
            return vec![0.0; network.nodes];
        }
        let edges: Vec<(usize, usize, f64)> =
            if by_capacitance { network.capacitances().collect() } else { network.conductances().collect() };
        let joined = edges.iter().map(|(a, b, w)| (parts[*a], parts[*b], *w));
        let mut charge = vec![0.0; network.nodes];
        charge[parts[a]] += 1.0;
        charge[parts[b]] -= 1.0;
        let label = hanging(network.nodes, joined.clone());
        let potentials = charged_potentials(network.nodes, joined, charge, &label);
        parts.iter().map(|p| potentials[*p]).collect()
    }
}

/// For every node the smallest node that edges tie it to.
fn hanging(nodes: usize, edges: impl Iterator<Item = (usize, usize, f64)>) -> Vec<usize> {
    let mut sets = super::graph::Sets::new(nodes);
    edges.for_each(|(a, b, _)| {
        sets.join(a, b);
    });
    sets.labels()
}

impl Network {
    /// How `sum of weights * potentials` at the operating point ([`Network::operating_point`]) changes with every
    /// part; `potentials` are those of that point, `weights` are per node.
    pub fn operating_point_sensitivity(&self, held: &[usize], potentials: &[f64], weights: &[f64]) -> Sensitivity {
        let label = self.resistive_parts();
        let tied = self.parts_held_by_resistors(held);
        // Nodes that divide by capacitance: one node for each resistive part, tied and held nodes all at rest.
        let joined = |n: usize| if tied[n] { n } else { label[n] };
        let rest = held.first().copied().unwrap_or(self.reference);
        let still = |n: usize| if tied[n] { rest } else { label[n] };
        let mut weights = weights.to_vec();
        let mut charge = vec![0.0; self.nodes];
        (0..self.nodes).filter(|n| !tied[*n]).for_each(|n| charge[label[n]] += weights[n]);
        let edges = || self.capacitances().map(|(a, b, c)| (still(a), still(b), c));
        let mut anchor = hanging(self.nodes, edges());
        let root = anchor[rest];
        anchor.iter_mut().filter(|a| **a == root).for_each(|a| *a = rest);
        charge[rest] = 0.0;
        let moved = charged_potentials(self.nodes, edges(), charge, &anchor);
        let floats = |n: usize| if tied[n] { 0.0 } else { moved[still(n)] - moved[anchor[still(n)]] };
        let across = |a: usize, b: usize| potentials[joined(a)] - potentials[joined(b)];
        let per_farad = self.capacitors.iter().map(|c| -(floats(c.a) - floats(c.b)) * across(c.a, c.b)).collect();
        for c in &self.capacitors {
            for (fixed, free) in [(c.a, c.b), (c.b, c.a)] {
                if tied[fixed] && !tied[free] {
                    weights[fixed] += c.value * floats(free);
                }
            }
        }
        // Nodes that resistors set: the held ones are one node at rest.
        let at = |n: usize| if held.contains(&n) { rest } else { n };
        let edges = || self.conductances().map(|(a, b, g)| (at(a), at(b), g));
        let mut anchor = hanging(self.nodes, edges());
        let root = anchor[rest];
        anchor.iter_mut().filter(|a| **a == root).for_each(|a| *a = rest);
        let mut current = vec![0.0; self.nodes];
        (0..self.nodes).filter(|n| tied[*n] && at(*n) != rest).for_each(|n| current[n] = weights[n]);
        let drawn = charged_potentials(self.nodes, edges(), current, &anchor);
        let pulled = |n: usize| if tied[n] { drawn[at(n)] } else { 0.0 };
        let per_siemens =
            self.resistors.iter().map(|r| -(pulled(r.a) - pulled(r.b)) * (potentials[r.a] - potentials[r.b])).collect();
        Sensitivity { per_siemens, per_farad }
    }
}
