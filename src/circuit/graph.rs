//! Which nodes hang together.

/// Disjoint sets of nodes, joined step by step (union-find with path halving).
#[derive(Debug, Clone)]
pub(super) struct Sets {
    parent: Vec<usize>,
}

impl Sets {
    /// `count` sets of one node each.
    pub fn new(count: usize) -> Self {
        Sets { parent: (0..count).collect() }
    }

    /// The node that stands for the set of `node`.
    pub fn find(&mut self, mut node: usize) -> usize {
        while self.parent[node] != node {
            self.parent[node] = self.parent[self.parent[node]];
            node = self.parent[node];
        }
        node
    }

    /// Joins two sets; false where they were one already.
    pub fn join(&mut self, a: usize, b: usize) -> bool {
        let (a, b) = (self.find(a), self.find(b));
        // The smaller number stands for the set, so that the result does not depend on the order of the parts.
        self.parent[a.max(b)] = a.min(b);
        a != b
    }

    /// For every node, the node that stands for its set.
    pub fn labels(mut self) -> Vec<usize> {
        (0..self.parent.len()).map(|node| self.find(node)).collect()
    }
}
