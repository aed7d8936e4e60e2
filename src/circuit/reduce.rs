//! From a network to the smallest set of states, with conductances in factored form.
//!
//! The states are the voltages of a spanning forest of the capacitors (the largest capacitances, so that a loop is
//! closed by its smallest). In these coordinates the capacitance matrix is diagonal but for loops, and every
//! potential is a sum of states with coefficients 0 and +-1 plus the common part of its capacitive group. The
//! common parts carry no charge of their own; they are eliminated:
//!
//! - a node that no capacitor touches by the star-mesh rule ([`super::laplacian`]), free of subtraction;
//! - a group of capacitors that floats by one Householder reflection of its rows, written as differences to a
//!   weighted mean, so that the exact integers of the network survive (the quadratic form
//!   `min over p of sum g_i (p + w_i)^2` is what the star-mesh rule gives for voltages w_i in series).
//!
//! What is left is `G = B0^T B0` with rows `sqrt(g) * (coefficients over the states)`: the factored form that
//! [`super::jacobi`] needs. No row of it was ever added up with another one of a different scale.

use super::graph::Sets;
use super::laplacian::WeightedGraph;
use super::network::{Edge, Network};

/// A network reduced to its states. Voltages of sources are columns after those of the states: they take part in
/// every potential, but are known.
pub(super) struct Reduced {
    /// For every state, the capacitor whose voltage it is.
    pub tree: Vec<usize>,
    /// Rows `sqrt(conductance) * coefficients`, in sqrt(siemens), over the states and the sources.
    pub rows: Vec<Vec<f64>>,
    /// For every node, its potential over the states and the sources, against the anchor of its part.
    pub potentials: Vec<Vec<f64>>,
    /// For every node, the node whose constant potential its own refers to: the reference, or a node of a part
    /// that nothing ties to it.
    pub anchor: Vec<usize>,
    /// How many modes decay; the other states are trapped for ever.
    pub decaying: usize,
}

/// A row while common parts are still to be eliminated: coefficients over states and over groups.
#[derive(Clone)]
struct Row {
    states: Vec<f64>,
    groups: Vec<f64>,
}

pub(super) fn reduce(network: &Network) -> Reduced {
    let nodes = network.nodes;
    let tree = spanning_forest(network);
    let branches: Vec<Edge> = tree.iter().map(|c| network.capacitors[*c]).chain(network.sources.clone()).collect();
    let columns = branches.len();
    let group = network.capacitive_parts();
    let paths = paths(network, &branches, &group);
    let anchor = anchors(network, &group);
    let touched: Vec<bool> = {
        let mut touched = vec![false; nodes];
        let edges = network.capacitors.iter().chain(&network.sources);
        edges.for_each(|c| (touched[c.a], touched[c.b]) = (true, true));
        touched
    };

    let bare: Vec<usize> = (0..nodes).filter(|n| !touched[*n] && anchor[*n] != *n).collect();
    let mut mesh = WeightedGraph::new(nodes, network.conductances());
    let meshed = mesh.eliminate_all(bare.clone());

    // One row per conductance between the nodes that are left; floating groups are numbered in `floating`.
    let is_bare = |n: usize| bare.contains(&n);
    let floating: Vec<usize> =
        (0..nodes).filter(|n| touched[*n] && group[*n] == *n && group[anchor[*n]] != group[*n]).collect();
    let number = |n: usize| floating.iter().position(|f| *f == group[n]);
    let mut rows = Vec::new();
    for a in 0..nodes {
        for b in 0..a {
            let conductance = mesh.weight(a, b);
            if conductance > 0.0 && !is_bare(a) && !is_bare(b) {
                let root = conductance.sqrt();
                let mut row = Row { states: difference(&paths[a], &paths[b]), groups: vec![0.0; floating.len()] };
                if group[a] != group[b] {
                    number(a).into_iter().for_each(|k| row.groups[k] = 1.0);
                    number(b).into_iter().for_each(|k| row.groups[k] = -1.0);
                }
                row.states.iter_mut().chain(&mut row.groups).for_each(|x| *x *= root);
                rows.push(row);
            }
        }
    }
    let (rows, common) = eliminate_groups(rows, floating.len(), columns);

    let mut potentials: Vec<Vec<f64>> = (0..nodes)
        .map(|n| match number(n) {
            Some(k) => sum(&paths[n], &common[k]),
            None => paths[n].clone(),
        })
        .collect();
    for e in meshed.iter().rev() {
        let mut mean = vec![0.0; columns];
        for (j, w) in &e.neighbours {
            mean.iter_mut().zip(&potentials[*j]).for_each(|(m, x)| *m += w / e.total * x);
        }
        potentials[e.node] = mean;
    }
    let decaying = tree.len() - trapped(network);
    Reduced { tree, rows, potentials, anchor, decaying }
}

/// The capacitors of a spanning forest, the largest first (Kruskal).
fn spanning_forest(network: &Network) -> Vec<usize> {
    let mut order: Vec<usize> = (0..network.capacitors.len()).collect();
    order.sort_by(|x, y| network.capacitors[*y].value.total_cmp(&network.capacitors[*x].value));
    let mut sets = Sets::new(network.nodes);
    order.retain(|c| sets.join(network.capacitors[*c].a, network.capacitors[*c].b));
    order
}

/// For every node, its potential over the states against a root of its capacitive group (the reference, where the
/// group has it).
fn paths(network: &Network, branches: &[Edge], group: &[usize]) -> Vec<Vec<f64>> {
    let mut paths: Vec<Option<Vec<f64>>> = vec![None; network.nodes];
    let roots = std::iter::once(network.reference).chain(0..network.nodes);
    for root in roots {
        if paths[root].is_some() || (root != network.reference && group[root] != root) {
            continue;
        }
        if group[root] == group[network.reference] && root != network.reference {
            continue;
        }
        paths[root] = Some(vec![0.0; branches.len()]);
        let mut todo = vec![root];
        while let Some(node) = todo.pop() {
            for (state, c) in branches.iter().enumerate() {
                let (next, sign) = match node {
                    n if n == c.a => (c.b, -1.0),
                    n if n == c.b => (c.a, 1.0),
                    _ => continue,
                };
                if paths[next].is_none() {
                    let mut path = paths[node].clone().unwrap_or_default();
                    path[state] += sign;
                    paths[next] = Some(path);
                    todo.push(next);
                }
            }
        }
    }
    paths.into_iter().map(Option::unwrap_or_default).collect()
}

/// For every node, the node that holds the common potential of its connected part: the reference, or else the root
/// of a capacitive group, or else any node.
fn anchors(network: &Network, group: &[usize]) -> Vec<usize> {
    let part = network.connected_parts();
    let mut anchor: Vec<Option<usize>> = vec![None; network.nodes];
    anchor[part[network.reference]] = Some(network.reference);
    for c in network.capacitors.iter().chain(&network.sources) {
        anchor[part[c.a]].get_or_insert(group[c.a]);
    }
    (0..network.nodes).map(|n| anchor[part[n]].unwrap_or(part[n])).collect()
}

/// How many combinations of capacitor voltages no resistor can discharge: the rank of the capacitors once all
/// resistive parts are one node each. A count of the network's structure, not of small numbers.
fn trapped(network: &Network) -> usize {
    let label = network.resistive_parts();
    let mut sets = Sets::new(network.nodes);
    network.capacitors.iter().filter(|c| sets.join(label[c.a], label[c.b])).count()
}

/// Eliminates the common part of every floating group; gives the rows over the states alone, and each group's
/// common part over the states.
fn eliminate_groups(mut rows: Vec<Row>, groups: usize, states: usize) -> (Vec<Vec<f64>>, Vec<Vec<f64>>) {
    let mut left: Vec<usize> = (0..groups).collect();
    let mut means: Vec<(usize, Row)> = Vec::with_capacity(groups);
    while !left.is_empty() {
        let uses = |k: usize| rows.iter().filter(|r| r.groups[k] != 0.0).count();
        let at = (0..left.len()).min_by_key(|at| uses(left[*at])).unwrap_or(0);
        let k = left.remove(at);
        let (mut with, without): (Vec<Row>, Vec<Row>) = rows.into_iter().partition(|r| r.groups[k] != 0.0);
        rows = without;
        with.sort_by(|x, y| y.groups[k].abs().total_cmp(&x.groups[k].abs()));
        means.push((k, eliminate_group(&with, k, &mut rows, states, groups)));
    }
    let mut common = vec![vec![0.0; states]; groups];
    for (k, mean) in means.iter().rev() {
        let mut over_states = mean.states.clone();
        for (other, share) in mean.groups.iter().enumerate().filter(|(_, s)| **s != 0.0) {
            let known = common[other].clone();
            over_states.iter_mut().zip(&known).for_each(|(x, y)| *x += share * y);
        }
        common[*k] = over_states;
    }
    (rows.into_iter().map(|r| r.states).collect(), common)
}

/// Eliminates group `k` from its rows `with` (the heaviest first), pushes what remains of them to `rows`, and gives
/// the group's potential over states and other groups.
fn eliminate_group(with: &[Row], k: usize, rows: &mut Vec<Row>, states: usize, groups: usize) -> Row {
    // Row i is x_i (p + w_i); the weighted mean of the w_i has weights x_i^2.
    let weight: Vec<f64> = with.iter().map(|r| r.groups[k].abs()).collect();
    let scaled: Vec<Row> = with
        .iter()
        .map(|r| Row {
            states: r.states.iter().map(|x| x / r.groups[k]).collect(),
            groups: r.groups.iter().map(|x| x / r.groups[k]).collect(),
        })
        .collect();
    let square: f64 = weight.iter().map(|x| x * x).sum();
    let length = square.sqrt();
    let Some(first) = weight.first() else {
        return Row { states: vec![0.0; states], groups: vec![0.0; groups] };
    };
    let reflected: Vec<f64> = weight
        .iter()
        .enumerate()
        .map(|(i, x)| (x * x + if i == 0 { length * first } else { 0.0 }) / (square + length * first))
        .collect();
    for (j, row) in scaled.iter().enumerate().skip(1) {
        // x_j (w_j - sum theta_i w_i) with weights theta that add up to one, as a sum of differences.
        let mut left = Row { states: vec![0.0; states], groups: vec![0.0; groups] };
        for (other, theta) in scaled.iter().zip(&reflected) {
            let factor = weight[j] * theta;
            let add = |to: &mut [f64], a: &[f64], b: &[f64]| {
                to.iter_mut().zip(a.iter().zip(b)).for_each(|(t, (x, y))| *t += factor * (x - y));
            };
            add(&mut left.states, &row.states, &other.states);
            add(&mut left.groups, &row.groups, &other.groups);
        }
        left.groups[k] = 0.0;
        if left.states.iter().chain(&left.groups).any(|x| *x != 0.0) {
            rows.push(left);
        }
    }
    let mut mean = Row { states: vec![0.0; states], groups: vec![0.0; groups] };
    for (row, x) in scaled.iter().zip(&weight) {
        let share = x * x / square;
        mean.states.iter_mut().zip(&row.states).for_each(|(m, w)| *m -= share * w);
        mean.groups.iter_mut().zip(&row.groups).for_each(|(m, w)| *m -= share * w);
    }
    mean.groups[k] = 0.0;
    mean
}

fn difference(a: &[f64], b: &[f64]) -> Vec<f64> {
    a.iter().zip(b).map(|(x, y)| x - y).collect()
}

fn sum(a: &[f64], b: &[f64]) -> Vec<f64> {
    a.iter().zip(b).map(|(x, y)| x + y).collect()
}
