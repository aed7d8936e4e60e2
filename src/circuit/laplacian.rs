//! Elimination of nodes from a graph of positive weights without a single subtraction.
//!
//! The star-mesh rule: a node k with weights g_ki to its neighbours is replaced by weights g_ki g_kj / sum(g_k)
//! between them (Rosen 1924; the same elimination, seen as state reduction of a Markov chain, is the algorithm of
//! Grassmann, Taksar and Heyman 1985, whose high relative accuracy rests on having no subtraction). The weights
//! are conductances or capacitances; both obey the same law.

/// A graph with positive weights between nodes, dense: the banks of this tool have tens of nodes, not thousands.
pub(super) struct WeightedGraph {
    count: usize,
    weights: Vec<f64>,
}

/// One eliminated node: it, the total weight at it, and its neighbours with their weights at that moment.
pub(super) struct Eliminated {
    pub node: usize,
    pub total: f64,
    pub neighbours: Vec<(usize, f64)>,
}

impl WeightedGraph {
    pub fn new(count: usize, edges: impl Iterator<Item = (usize, usize, f64)>) -> Self {
        let mut graph = WeightedGraph { count, weights: vec![0.0; count * count] };
        for (a, b, weight) in edges {
            graph.add(a, b, weight);
        }
        graph
    }

    fn add(&mut self, a: usize, b: usize, weight: f64) {
        if a != b {
            self.weights[a * self.count + b] += weight;
            self.weights[b * self.count + a] += weight;
        }
    }

    pub fn weight(&self, a: usize, b: usize) -> f64 {
        self.weights[a * self.count + b]
    }

    fn neighbours(&self, node: usize) -> Vec<(usize, f64)> {
        let row = &self.weights[node * self.count..(node + 1) * self.count];
        row.iter().enumerate().filter(|(_, w)| **w > 0.0).map(|(j, w)| (j, *w)).collect()
    }

    /// Replaces `node` by its mesh.
    fn eliminate(&mut self, node: usize) -> Eliminated {
        let neighbours = self.neighbours(node);
        let total: f64 = neighbours.iter().map(|(_, w)| w).sum();
        for (at, (i, wi)) in neighbours.iter().enumerate() {
            for (j, wj) in &neighbours[..at] {
                self.add(*i, *j, wi * (wj / total));
            }
            self.weights[node * self.count + i] = 0.0;
            self.weights[i * self.count + node] = 0.0;
        }
        Eliminated { node, total, neighbours }
    }

    /// Eliminates all `nodes`, always the one with the fewest neighbours next (it adds the fewest weights).
    pub fn eliminate_all(&mut self, mut nodes: Vec<usize>) -> Vec<Eliminated> {
        let mut done = Vec::with_capacity(nodes.len());
        while !nodes.is_empty() {
            let degree = |n: usize| self.neighbours(n).len();
            let at =
                if nodes.len() == 1 { 0 } else { (0..nodes.len()).min_by_key(|at| degree(nodes[*at])).unwrap_or(0) };
            done.push(self.eliminate(nodes.remove(at)));
        }
        done
    }
}

/// Potentials of all nodes of a graph where some are held: every free node is the weighted mean of its
/// neighbours. `None` for a node that nothing ties to a held one.
pub(super) fn held_potentials(
    count: usize,
    edges: impl Iterator<Item = (usize, usize, f64)>,
    held: &[Option<f64>],
) -> Vec<Option<f64>> {
    mixed_potentials(count, edges, held, &vec![0.0; count])
}

/// As [`held_potentials`], for a graph of capacitances whose free nodes carry the charges `charge`.
pub(super) fn mixed_potentials(
    count: usize,
    edges: impl Iterator<Item = (usize, usize, f64)>,
    held: &[Option<f64>],
    charge: &[f64],
) -> Vec<Option<f64>> {
    let mut graph = WeightedGraph::new(count, edges);
    let free = (0..count).filter(|n| held[*n].is_none()).collect();
    let eliminated = graph.eliminate_all(free);
    let mut charge = charge.to_vec();
    for Eliminated { node, total, neighbours } in &eliminated {
        for (j, w) in neighbours {
            charge[*j] += charge[*node] * (w / total);
        }
    }
    let mut potential = held.to_vec();
    for Eliminated { node, total, neighbours } in eliminated.into_iter().rev() {
        let mut sum = Some(charge[node] / total);
        for (j, w) in &neighbours {
            sum = sum.zip(potential[*j]).map(|(s, v)| s + w / total * v);
        }
        potential[node] = sum.filter(|_| !neighbours.is_empty());
    }
    potential
}

/// Potentials of a graph of capacitances whose nodes carry the charges `charge`; each part that hangs together
/// has its node `anchor` (the same label for all its nodes) at zero.
pub(super) fn charged_potentials(
    count: usize,
    edges: impl Iterator<Item = (usize, usize, f64)>,
    mut charge: Vec<f64>,
    anchor: &[usize],
) -> Vec<f64> {
    let mut graph = WeightedGraph::new(count, edges);
    let free = (0..count).filter(|n| anchor[*n] != *n).collect();
    let eliminated = graph.eliminate_all(free);
    for Eliminated { node, total, neighbours } in &eliminated {
        for (j, w) in neighbours {
            charge[*j] += charge[*node] * (w / total);
        }
    }
    let mut potential = vec![0.0; count];
    for Eliminated { node, total, neighbours } in eliminated.iter().rev() {
        if !neighbours.is_empty() {
            let pulled: f64 = neighbours.iter().map(|(j, w)| w / total * potential[*j]).sum();
            potential[*node] = pulled + charge[*node] / total;
        }
    }
    potential
}
