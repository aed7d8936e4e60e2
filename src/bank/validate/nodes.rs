//! Nodes: every part between two of them, none that a slip of the pen made, and every pair connected by something.

use super::super::description::{Description, Pair};
use super::super::near::advice;
use super::super::parts::{Part, legs};
use super::super::problem::{Path, Sink};
use super::super::unordered;
use super::{Doubt, is_known};
use std::collections::{HashMap, HashSet};

/// The nodes of a bank and how they hang together at isolation.
pub(super) struct Nodes {
    /// Number of each node, in the order of first mention.
    numbers: HashMap<String, usize>,
    /// Those that a terminal, a capacitor or an always-connected part touches, in that order.
    fixed: Vec<String>,
    /// Which nodes the parts that are always connected join.
    pub(super) joined: Joined,
    /// Whether there may be nodes and parts beyond those that are known.
    in_doubt: bool,
}

/// Sets of nodes that are joined by parts (union-find).
#[derive(Clone, Default)]
pub(super) struct Joined(Vec<usize>);

impl Joined {
    fn root(&mut self, node: usize) -> usize {
        while self.0.len() <= node {
            self.0.push(self.0.len());
        }
        let mut at = node;
        while self.0[at] != at {
            self.0[at] = self.0[self.0[at]];
            at = self.0[at];
        }
        at
    }

    pub(super) fn join(&mut self, a: usize, b: usize) {
        let (a, b) = (self.root(a), self.root(b));
        self.0[a] = b;
    }

    pub(super) fn are_joined(&mut self, a: usize, b: usize) -> bool {
        self.root(a) == self.root(b)
    }
}

/// Who touches a node.
#[derive(Default)]
struct Touch {
    times: usize,
    /// A capacitor or an always-connected part does.
    by_fixed: bool,
}

pub(super) fn check(d: &Description, parts: &[Part<'_>], doubt: &Doubt, sink: &mut Sink) -> Nodes {
    // Without a capacitor there is no bank whose nodes could be judged.
    let in_doubt = doubt.nodes || d.capacitors.is_empty();
    let mut touches: HashMap<String, Touch> = HashMap::new();
    let mut nodes = Nodes { numbers: HashMap::new(), fixed: vec![], joined: Joined::default(), in_doubt };
    let terminals: HashSet<&str> = d.terminals.iter().map(String::as_str).collect();
    for terminal in &d.terminals {
        nodes.number(terminal);
        nodes.fixed.push(terminal.clone());
    }
    for part in parts {
        if part.across[0] == part.across[1] && part.phases.is_none() {
            sink.push("part-across-one-node", part.path().then("across"), || {
                let text = format!("{} `{}` has both ends at node `{}`", part.noun, part.id, part.across[0]);
                (text, String::from("a part lies across two different nodes"))
            });
        }
        for (_, [a, b]) in legs(d, part.id, part.across, part.phases) {
            let (from, to) = (nodes.number(&a), nodes.number(&b));
            if part.fixed {
                nodes.joined.join(from, to);
            }
            for node in [a, b] {
                let touch = touches.entry(node.clone()).or_default();
                touch.times += 1;
                if part.fixed && !touch.by_fixed {
                    touch.by_fixed = true;
                    if !terminals.contains(node.as_str()) {
                        nodes.fixed.push(node);
                    }
                }
            }
        }
    }
    if !in_doubt {
        untouched_terminals(d, &touches, sink);
        for part in parts.iter().filter(|part| part.phases.is_none()) {
            ends(part, &terminals, &touches, &nodes, sink);
        }
        terminals_joined(d, &nodes, sink);
    }
    test_points(d, &nodes, sink);
    nodes
}

fn untouched_terminals(d: &Description, touches: &HashMap<String, Touch>, sink: &mut Sink) {
    for (i, terminal) in d.terminals.iter().enumerate() {
        if !touches.get(terminal).is_some_and(|touch| touch.by_fixed) {
            sink.push("untouched-terminal", Path::of("terminals").then(i), || {
                (
                    format!("no capacitor and no always-connected part touches terminal `{terminal}`"),
                    String::from(
                        "`terminals` names where the bank was fed (P and N where it is left out): nodes that parts lie across",
                    ),
                )
            });
        }
    }
}

/// A node at the end of a part has to be touched by something else.
fn ends(part: &Part<'_>, terminals: &HashSet<&str>, touches: &HashMap<String, Touch>, nodes: &Nodes, sink: &mut Sink) {
    for (end, node) in part.across.iter().enumerate() {
        let Some(touch) = touches.get(node) else { continue };
        if terminals.contains(node.as_str()) {
            continue;
        }
        let path = part.path().then("across").then(end);
        // The middle of a tool with three legs, as a three-phase tool in star expands to, is no slip of the pen.
        if !touch.by_fixed && touch.times < 3 {
            sink.push("unknown-node", path, || {
                let text = format!(
                    "{} `{}` is put to node `{node}`, which no capacitor and no always-connected part touches",
                    part.noun, part.id
                );
                (text, nodes.advice(node))
            });
        } else if touch.times == 1 {
            sink.push("dangling-node", path, || {
                let text = format!("nothing but {} `{}` touches node `{node}`", part.noun, part.id);
                (text, nodes.advice_without(node))
            });
        }
    }
}

fn terminals_joined(d: &Description, nodes: &Nodes, sink: &mut Sink) {
    let mut joined = nodes.joined.clone();
    if let [first, rest @ ..] = d.terminals.as_slice() {
        for (i, terminal) in rest.iter().enumerate().filter(|(_, t)| *t != first) {
            if !nodes.are_joined(&mut joined, first, terminal) {
                sink.push("unconnected-pair", Path::of("terminals").then(i + 1), || {
                    (
                        format!("nothing connects terminals `{first}` and `{terminal}`"),
                        String::from(
                            "their voltage would not be defined after isolation; check the nodes of the parts",
                        ),
                    )
                });
            }
        }
    }
}

fn test_points(d: &Description, nodes: &Nodes, sink: &mut Sink) {
    let mut joined = nodes.joined.clone();
    let Some(pairs) = &d.test_points else { return };
    let path = Path::of("test_points");
    if pairs.is_empty() {
        sink.push("no-test-points", path.clone(), || {
            (
                String::from("`test_points` lists no pair"),
                String::from("list the pairs that a hand or a meter can reach, or leave the key out for the default"),
            )
        });
    }
    let mut seen = HashSet::new();
    for (i, pair) in pairs.iter().enumerate() {
        if nodes.pair(pair, &path.then(i), &mut joined, sink) && !seen.insert(unordered(pair)) {
            sink.push("duplicate-test-point", path.then(i), || {
                (format!("the pair {} and {} is listed twice", pair[0], pair[1]), String::from("list every pair once"))
            });
        }
    }
}

impl Nodes {
    /// The number of a node, a new one where it has none yet.
    pub(super) fn number(&mut self, node: &str) -> usize {
        let next = self.numbers.len();
        *self.numbers.entry(node.to_string()).or_insert(next)
    }

    /// The number of a node that has one.
    pub(super) fn find(&self, node: &str) -> Option<usize> {
        self.numbers.get(node).copied()
    }

    /// Whether `joined` has a way from one node to the other.
    fn are_joined(&self, joined: &mut Joined, a: &str, b: &str) -> bool {
        match (self.find(a), self.find(b)) {
            (Some(a), Some(b)) => joined.are_joined(a, b),
            _ => false,
        }
    }

    /// Checks a pair that somebody reaches or that a limit is for: two nodes that exist and that `joined` connects.
    /// True where nothing is wrong with it.
    pub(super) fn pair(&self, pair: &Pair, path: &Path, joined: &mut Joined, sink: &mut Sink) -> bool {
        if !self.pair_of_nodes(pair, path, sink) {
            return false;
        }
        let [a, b] = pair;
        let passes = self.pair_in_doubt(pair) || self.are_joined(joined, a, b);
        if !passes {
            sink.push("unconnected-pair", path.clone(), || {
                (
                    format!("nothing connects `{a}` and `{b}` at that time"),
                    String::from("their voltage is not defined; name a pair that parts connect"),
                )
            });
        }
        passes
    }

    /// Checks a pair as [`Nodes::pair`] does, but for what connects it.
    pub(super) fn pair_of_nodes(&self, pair: &Pair, path: &Path, sink: &mut Sink) -> bool {
        let [a, b] = pair;
        if a == b && is_known(a) {
            sink.push("pair-of-one-node", path.clone(), || {
                (format!("both points are node `{a}`"), String::from("a voltage is between two different nodes"))
            });
            return false;
        }
        if self.pair_in_doubt(pair) {
            return true;
        }
        let unknown = |node: &&String| self.find(node).is_none();
        for (end, node) in pair.iter().enumerate().filter(|(_, node)| unknown(node)) {
            sink.push("unknown-node", path.then(end), || (format!("there is no node `{node}`"), self.advice(node)));
        }
        !pair.iter().any(|node| unknown(&node))
    }

    fn pair_in_doubt(&self, pair: &Pair) -> bool {
        self.in_doubt || pair.iter().any(|node| !is_known(node))
    }

    fn advice(&self, node: &str) -> String {
        advice(node, "nodes", self.fixed.iter().map(String::as_str))
    }

    fn advice_without(&self, node: &str) -> String {
        advice(node, "other nodes", self.fixed.iter().map(String::as_str).filter(|other| *other != node))
    }
}

#[cfg(test)]
mod tests {
    use super::super::samples::*;
    use crate::bank::description::Role;

    #[test]
    fn a_part_across_one_node_is_refused() {
        let mut d = plain();
        d.resistors.push(resistor("R2", Role::Bleeder, "P", "P"));
        assert_problem(&d, "part-across-one-node", "resistors[1].across");
        d.resistors[1] = resistor("R2", Role::Bleeder, "X", "X");
        assert_problem(&d, "part-across-one-node", "resistors[1].across");
    }

    #[test]
    fn a_node_that_one_part_alone_touches_is_refused() {
        let mut d = plain();
        d.resistors.push(resistor("R2", Role::Series, "P", "M"));
        assert_problem(&d, "dangling-node", "resistors[1].across[1]");
        d.capacitors.push(capacitor("C2", "M", "N"));
        assert_eq!(problems(&d), []);
    }

    #[test]
    fn a_tool_is_put_to_nodes_that_exist() {
        let mut d = plain();
        d.resistors.push(resistor("T1", Role::Tool, "P", "NN"));
        assert_problem(&d, "unknown-node", "resistors[1].across[1]");
    }

    #[test]
    fn a_tool_with_three_legs_has_a_middle_of_its_own() {
        let mut d = plain();
        d.capacitors.push(capacitor("C2", "P", "M"));
        d.resistors.push(resistor("R2", Role::Bleeder, "M", "N"));
        let legs = [("T1", "P"), ("T2", "M"), ("T3", "N")];
        d.resistors.extend(legs.map(|(id, node)| resistor(id, Role::Tool, node, "X")));
        assert_eq!(problems(&d), []);
        d.resistors.pop();
        let found = problems(&d);
        assert!(found.iter().all(|(code, _)| *code == "unknown-node") && found.len() == 2, "{found:?}");
    }

    #[test]
    fn a_terminal_that_no_part_touches_is_refused() {
        let mut d = plain();
        d.terminals[1] = "E".into();
        let found = problems(&d);
        assert!(found.contains(&("untouched-terminal", "terminals[1]".into())), "{found:?}");
    }

    #[test]
    fn two_banks_of_their_own_may_be_joined_by_a_strap() {
        let mut d = plain();
        d.capacitors.push(capacitor("C2", "Q", "S"));
        d.capacitors[1].charged_to = Some(volt(100.0));
        d.resistors.push(resistor("ST1", Role::Strap, "P", "Q"));
        d.resistors.push(resistor("ST2", Role::Strap, "N", "S"));
        assert_eq!(problems(&d), []);
        d.test_points = Some(vec![pair("P", "N"), pair("P", "Q")]);
        assert_problem(&d, "unconnected-pair", "test_points[1]");
    }

    #[test]
    fn terminals_that_nothing_connects_are_refused() {
        let mut d = plain();
        d.capacitors = vec![capacitor("C1", "P", "X"), capacitor("C2", "N", "Y")];
        d.resistors = vec![resistor("R1", Role::Bleeder, "P", "X"), resistor("R2", Role::Bleeder, "N", "Y")];
        assert_problem(&d, "unconnected-pair", "terminals[1]");
    }

    #[test]
    fn test_points_are_pairs_of_two_nodes_that_exist_each_once() {
        let mut d = plain();
        d.test_points = Some(vec![]);
        assert_problem(&d, "no-test-points", "test_points");
        d.test_points = Some(vec![pair("P", "Q")]);
        assert_problem(&d, "unknown-node", "test_points[0][1]");
        d.test_points = Some(vec![pair("P", "P")]);
        assert_problem(&d, "pair-of-one-node", "test_points[0]");
        d.test_points = Some(vec![pair("P", "N"), pair("N", "P")]);
        assert_problem(&d, "duplicate-test-point", "test_points[1]");
    }

    #[test]
    fn the_star_point_of_a_three_phase_part_is_a_node() {
        let mut d = three_phase();
        d.test_points = Some(vec![pair("A", "CB.star")]);
        assert_problem(&d, "unknown-node", "test_points[0][1]");
        d.capacitors[0].phases = Some(crate::bank::description::Connection::Star);
        assert_eq!(problems(&d), []);
    }
}
