//! The procedure, walked through as people would: what is connected at each step, and what is read there.

use super::super::description::{Description, Hold, Lasts, Pair, Step};
use super::super::near::{advice, listed};
use super::super::parts::{Part, legs};
use super::super::problem::{Path, Sink};
use super::figures::above_zero;
use super::nodes::{Joined, Nodes};
use super::{Doubt, is_known};
use crate::quantity::Quantity;
use std::collections::{BTreeMap, HashMap, HashSet};

pub(super) fn check<'a>(
    d: &'a Description,
    parts: &'a [Part<'a>],
    nodes: &'a Nodes,
    doubt: &'a Doubt,
    sink: &mut Sink,
) {
    let mut joined = nodes.joined.clone();
    for (i, limit) in d.limits.iter().enumerate() {
        if let Some(pair) = &limit.at {
            nodes.pair(pair, &Path::of("limits").then(i).then("at"), &mut joined, sink);
        }
    }
    let mut walk = Walk {
        parts,
        by_id: parts.iter().map(|p| (p.id, p)).collect(),
        joins: parts.iter().filter(|p| !p.fixed).map(|p| (p.id, joins(d, p, nodes))).collect(),
        connected: BTreeMap::new(),
        joined: None,
        nodes,
        doubt,
    };
    for (i, step) in d.procedure.iter().enumerate() {
        let path = Path::of("procedure").then(i);
        walk.change(i, step, &path, sink);
        match &step.lasts {
            Lasts::For(time) if !(time.si() >= 0.0 && time.si().is_finite()) => {
                sink.push("bad-figure", path.then("for"), || ("`for` is negative or not finite".into(), None));
            }
            Lasts::For(_) => {}
            Lasts::Until(until) => walk.hold(until, &path.then("until"), sink),
        }
        for (k, pair) in step.measure.iter().enumerate() {
            walk.pair(pair, &path.then("measure").then(k), sink);
        }
        if let Some(hold) = &step.hold {
            walk.hold(hold, &path.then("hold"), sink);
        }
    }
}

/// The nodes that a part joins, by their numbers.
fn joins(d: &Description, part: &Part<'_>, nodes: &Nodes) -> Vec<(usize, usize)> {
    let legs = legs(d, part.id, part.across, part.phases);
    legs.iter().filter_map(|(_, [a, b])| nodes.find(a).zip(nodes.find(b))).collect()
}

struct Walk<'a> {
    parts: &'a [Part<'a>],
    by_id: HashMap<&'a str, &'a Part<'a>>,
    /// What each part joins that a step may connect.
    joins: HashMap<&'a str, Vec<(usize, usize)>>,
    /// Parts that steps have connected, and the step that did.
    connected: BTreeMap<&'a str, usize>,
    /// How the nodes hang together with what is connected now; `None` where nobody has asked since a part was taken
    /// off, which can't be undone in it.
    joined: Option<Joined>,
    nodes: &'a Nodes,
    doubt: &'a Doubt,
}

impl<'a> Walk<'a> {
    /// Carries out what a step connects and disconnects at its start.
    fn change(&mut self, at: usize, step: &'a Step, path: &Path, sink: &mut Sink) {
        if !step.disconnect.is_empty() {
            self.joined = None;
        }
        // Taken off before put on: a part in both lists would be an exchange with itself.
        for (k, id) in step.disconnect.iter().enumerate() {
            let path = path.then("disconnect").then(k);
            if !self.step_connects(id, &path, sink) {
                continue;
            }
            if self.connected.remove(id.as_str()).is_none() && !self.doubt.steps {
                sink.push("not-connected", path, || {
                    let now = listed(self.connected.keys().copied());
                    let now = if now.is_empty() { String::from("no part") } else { now };
                    (
                        format!("`{id}` is not connected when step {} begins, and can't be disconnected", at + 1),
                        format!("connected then: {now}"),
                    )
                });
            }
        }
        let taken_off: HashSet<&str> = step.disconnect.iter().map(String::as_str).collect();
        for (k, id) in step.connect.iter().enumerate() {
            let path = path.then("connect").then(k);
            if !self.step_connects(id, &path, sink) {
                continue;
            }
            if let Some(joined) = &mut self.joined {
                self.joins.get(id.as_str()).into_iter().flatten().for_each(|&(a, b)| joined.join(a, b));
            }
            if taken_off.contains(id.as_str()) {
                sink.push("connected-and-disconnected", path, || {
                    let text = format!("step {} both connects and disconnects `{id}`", at + 1);
                    (text, String::from("make two steps of it"))
                });
            } else if let Some(earlier) = self.connected.insert(id, at)
                && !self.doubt.steps
            {
                sink.push("already-connected", path, || {
                    let text = format!("`{id}` is connected already, since step {}", earlier + 1);
                    (text, String::from("a part stays connected until a step disconnects it"))
                });
            }
        }
    }

    /// True where `id` is a part that a step may connect; reports it otherwise.
    fn step_connects(&self, id: &str, path: &Path, sink: &mut Sink) -> bool {
        if !is_known(id) || self.doubt.roles.contains(id) {
            return false;
        }
        match self.by_id.get(id) {
            Some(part) if part.fixed => {
                sink.push("always-connected", path.clone(), || {
                    let text =
                        format!("{} `{id}` is always connected, and no step connects or disconnects it", part.noun);
                    (text, String::from("steps connect resistors of role tool, strap or meter, and supplies"))
                });
                false
            }
            Some(_) => true,
            None => {
                if !self.doubt.ids {
                    sink.push("unknown-part", path.clone(), || {
                        let known = self.parts.iter().filter(|p| !p.fixed && is_known(p.id)).map(|p| p.id);
                        (format!("there is no part `{id}`"), advice(id, "parts that a step connects", known))
                    });
                }
                false
            }
        }
    }

    fn hold(&mut self, hold: &Hold, path: &Path, sink: &mut Sink) {
        above_zero(hold.below, "below", path, sink);
        if let Some(pair) = &hold.at {
            self.pair(pair, &path.then("at"), sink);
        }
    }

    fn pair(&mut self, pair: &Pair, path: &Path, sink: &mut Sink) {
        if self.doubt.steps || self.doubt.ids {
            // Which parts are connected here is not known; that the nodes exist still has to hold.
            self.nodes.pair_of_nodes(pair, path, sink);
            return;
        }
        let joined = self.joined.get_or_insert_with(|| {
            let mut joined = self.nodes.joined.clone();
            for &(a, b) in self.connected.keys().filter_map(|id| self.joins.get(id)).flatten() {
                joined.join(a, b);
            }
            joined
        });
        self.nodes.pair(pair, path, joined, sink);
    }
}

#[cfg(test)]
mod tests {
    use super::super::samples::*;
    use super::*;
    use crate::bank::description::Role;
    use crate::quantity::Time;

    fn with(steps: Vec<Step>) -> Description {
        let mut d = plain();
        d.resistors.push(resistor("T1", Role::Tool, "P", "N"));
        d.resistors.push(resistor("ST1", Role::Strap, "P", "N"));
        d.procedure = steps;
        d
    }

    fn change(connect: &[&str], disconnect: &[&str]) -> Step {
        let list = |ids: &[&str]| ids.iter().map(|id| id.to_string()).collect();
        Step { connect: list(connect), disconnect: list(disconnect), ..step("change") }
    }

    #[test]
    fn a_procedure_that_people_can_carry_out_passes() {
        assert_eq!(
            problems(&with(vec![change(&["T1"], &[]), change(&["ST1"], &["T1"]), change(&["T1"], &["ST1"])])),
            []
        );
    }

    #[test]
    fn a_part_is_connected_once_and_disconnected_only_then() {
        assert_problem(&with(vec![change(&[], &["T1"])]), "not-connected", "procedure[0].disconnect[0]");
        let twice = with(vec![change(&["T1"], &[]), change(&["T1"], &[])]);
        assert_problem(&twice, "already-connected", "procedure[1].connect[0]");
        let in_one = with(vec![change(&["T1", "T1"], &[])]);
        assert_problem(&in_one, "already-connected", "procedure[0].connect[1]");
        let both = with(vec![change(&["T1"], &[]), change(&["T1"], &["T1"])]);
        assert_problem(&both, "connected-and-disconnected", "procedure[1].connect[0]");
    }

    #[test]
    fn steps_connect_tools_straps_meters_and_supplies_only() {
        assert_problem(&with(vec![change(&["R1"], &[])]), "always-connected", "procedure[0].connect[0]");
        assert_problem(&with(vec![change(&[], &["C1"])]), "always-connected", "procedure[0].disconnect[0]");
        assert_problem(&with(vec![change(&["T11"], &[])]), "unknown-part", "procedure[0].connect[0]");
    }

    #[test]
    fn what_is_read_lies_across_nodes_that_are_connected_then() {
        let mut d = with(vec![step("read"), change(&["ST2"], &[]), step("read")]);
        d.capacitors.push(capacitor("C2", "Q", "S"));
        d.resistors.push(resistor("R2", Role::Bleeder, "Q", "S"));
        d.resistors.push(resistor("ST2", Role::Strap, "P", "Q"));
        d.procedure[2].measure = vec![pair("P", "Q")];
        assert_eq!(problems(&d), []);
        d.procedure[0].measure = vec![pair("P", "Q")];
        assert_problem(&d, "unconnected-pair", "procedure[0].measure[0]");
        d.procedure[0].measure = vec![pair("P", "X")];
        assert_problem(&d, "unknown-node", "procedure[0].measure[0][1]");
    }

    #[test]
    fn a_hold_is_above_zero_and_a_time_is_finite() {
        let mut d = with(vec![step("hold")]);
        d.procedure[0].hold = Some(Hold { below: volt(0.0), at: None });
        assert_problem(&d, "not-above-zero", "procedure[0].hold.below");
        d.procedure[0].hold = None;
        d.procedure[0].lasts = Lasts::Until(Hold { below: volt(50.0), at: Some(pair("P", "M")) });
        assert_problem(&d, "unknown-node", "procedure[0].until.at[1]");
        d.procedure[0].lasts = Lasts::For(Time::from_si(f64::NAN));
        assert_problem(&d, "bad-figure", "procedure[0].for");
    }
}
