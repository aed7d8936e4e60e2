//! The string of a bank: capacitors that form a chain between two nodes, found in the network. A capacitor that stands
//! for several groups in series is written out as them, since it has no node to balance at.

use crate::bank::description::{Capacitor, Description, Pair};
use crate::quantity::{Quantity, Voltage};
use crate::size::error::SizeError;
use std::collections::BTreeSet;

/// So many ways through the capacitors are followed before the search gives up.
const MOST_WAYS: usize = 10_000;

/// A capacitor with groups in series, and the capacitors that stand for its groups.
#[derive(Debug, Clone, PartialEq)]
pub struct WrittenOut {
    /// Its id.
    pub id: String,
    /// Its groups, from its first node to its second.
    pub groups: Vec<Capacitor>,
}

/// One unit of a string: a capacitor, or several between the same two nodes.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Member {
    /// The node nearer to the first end of the string, then the other.
    pub across: Pair,
    /// Ids of its capacitors.
    pub capacitors: Vec<String>,
}

/// A string, in a bank in which its units are capacitors of their own.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Found {
    pub description: Description,
    pub across: Pair,
    pub members: Vec<Member>,
    pub written_out: Vec<WrittenOut>,
}

fn asked<T>(text: String) -> Result<T, SizeError> {
    Err(SizeError::Asked(text))
}

/// Finds the one string between two nodes of a bank; `capacitor` is one of it, where there are several.
pub(super) fn found(description: &Description, across: &Pair, capacitor: Option<&str>) -> Result<Found, SizeError> {
    let capacitors = &description.capacitors;
    if let Some(id) = capacitor.filter(|id| capacitors.iter().all(|c| c.id != *id)) {
        let known: Vec<&str> = capacitors.iter().map(|c| c.id.as_str()).collect();
        return asked(format!("the bank has no capacitor `{id}`; it has {}", known.join(", ")));
    }
    if let Some(node) = across.iter().find(|node| !touched(description, node)) {
        return asked(format!(
            "no capacitor touches a node `{node}`; write the two ends of the string, `--across P,N`"
        ));
    }
    let mut strings = strings(description, across)?;
    if let Some(id) = capacitor {
        strings.retain(|links| links.iter().any(|link| link.iter().any(|c| capacitors[*c].id == id)));
    }
    let between = format!("{} - {}", across[0], across[1]);
    match strings.as_slice() {
        [] if capacitor.is_some() => asked(format!(
            "{} is in no string of capacitors between {between}; write the two ends of its string, such as `--across P,N`",
            capacitor.unwrap_or_default()
        )),
        [] => asked(format!(
            "no capacitors in series lie between {between}; write the two ends of the string, such as `--across P,N`, or \
             describe the groups of a capacitor with `units: {{series: 2}}`"
        )),
        [links] => members(description, across, links, capacitor),
        several => {
            let name = |links: &Vec<Vec<usize>>| {
                let first = links.first().and_then(|link| link.first());
                first.map_or_else(String::new, |c| capacitors[*c].id.clone())
            };
            asked(format!(
                "{} strings of capacitors lie between {between}; write a capacitor of the one that is meant: `--capacitor \
                 {}`",
                several.len(),
                several
                    .iter()
                    .map(name)
                    .collect::<BTreeSet<_>>()
                    .into_iter()
                    .collect::<Vec<_>>()
                    .join("` or `--capacitor ")
            ))
        }
    }
}

fn touched(description: &Description, node: &str) -> bool {
    description.capacitors.iter().any(|c| c.across.iter().any(|n| n == node))
}

fn is_across(c: &Capacitor, a: &str, b: &str) -> bool {
    let [x, y] = &c.across;
    (x == a && y == b) || (x == b && y == a)
}

/// Strings between two nodes, each as its links, each link as the numbers of the capacitors between its two nodes.
type Links = Vec<Vec<usize>>;

fn strings(description: &Description, [from, to]: &Pair) -> Result<Vec<Links>, SizeError> {
    let capacitors = &description.capacitors;
    let direct = |i: &usize| is_across(&capacitors[*i], from, to);
    let lumped = (0..capacitors.len()).filter(direct).filter(|i| capacitors[*i].series > 1);
    let mut strings: Vec<Links> = lumped.map(|i| vec![vec![i]]).collect();
    let mut open: Vec<Vec<&str>> = vec![vec![from]];
    let mut followed = 0;
    while let Some(way) = open.pop() {
        followed += 1;
        if followed > MOST_WAYS {
            return asked(format!(
                "the capacitors between {from} and {to} are tied in too many ways to tell the string; write its two ends \
                 closer, `--across`"
            ));
        }
        let last = way.last().copied().unwrap_or_default();
        let mut next: Vec<&str> = Vec::new();
        for c in capacitors.iter().filter(|c| !is_across(c, from, to)) {
            let other = match &c.across {
                [a, b] if a == last => b,
                [a, b] if b == last => a,
                _ => continue,
            };
            if !way.contains(&other.as_str()) && !next.contains(&other.as_str()) {
                next.push(other);
            }
        }
        for node in next {
            let way = [&way[..], &[node]].concat();
            if node == to {
                let link = |pair: &[&str]| {
                    (0..capacitors.len()).filter(|i| is_across(&capacitors[*i], pair[0], pair[1])).collect()
                };
                strings.push(way.windows(2).map(link).collect());
            } else {
                open.push(way);
            }
        }
    }
    // In the order of the file.
    strings.sort_by_key(|links| links.iter().flatten().copied().min());
    Ok(strings)
}

/// The units of a string, groups written out.
fn members(
    description: &Description,
    across: &Pair,
    links: &Links,
    capacitor: Option<&str>,
) -> Result<Found, SizeError> {
    let mut found = Found {
        description: description.clone(),
        across: across.clone(),
        members: Vec::new(),
        written_out: Vec::new(),
    };
    let mut here = across[0].clone();
    for link in links {
        let of = |i: &usize| &description.capacitors[*i];
        let meant = link.iter().find(|i| of(i).series > 1 && capacitor.is_none_or(|id| of(i).id == id));
        let Some(first) = link.first().map(of) else { continue };
        let there = if first.across[0] == here { first.across[1].clone() } else { first.across[0].clone() };
        match meant {
            Some(_) if link.len() > 1 && capacitor.is_none() => {
                return asked(format!(
                    "several capacitors lie between {here} and {there}, and one of them has units in series; write which \
                     one is meant: `--capacitor {}`",
                    link.iter().map(|i| of(i).id.as_str()).collect::<Vec<_>>().join("` or `--capacitor ")
                ));
            }
            Some(lumped) => {
                let lumped = of(lumped);
                let groups = written_out(description, lumped);
                let mut units: Vec<Member> = groups
                    .iter()
                    .map(|g| Member { across: g.across.clone(), capacitors: vec![g.id.clone()] })
                    .collect();
                if lumped.across[0] != here {
                    units.reverse();
                    units.iter_mut().for_each(|unit| unit.across.reverse());
                }
                found.members.extend(units);
                found.written_out.push(WrittenOut { id: lumped.id.clone(), groups });
            }
            None => {
                let capacitors = link.iter().map(|i| of(i).id.clone()).collect();
                found.members.push(Member { across: [here.clone(), there.clone()], capacitors });
            }
        }
        here = there;
    }
    for WrittenOut { id, groups } in &found.written_out {
        let list = &mut found.description.capacitors;
        if let Some(at) = list.iter().position(|c| c.id == *id) {
            list.splice(at..=at, groups.iter().cloned());
        }
    }
    Ok(found)
}

/// The groups of a capacitor as capacitors of their own: `C1.1`, `C1.2`, which meet at a node `C1.1-2`.
fn written_out(description: &Description, lumped: &Capacitor) -> Vec<Capacitor> {
    let groups = lumped.series;
    let node = |k: u32| match k {
        0 => lumped.across[0].clone(),
        k if k == groups => lumped.across[1].clone(),
        k => free_node(format!("{}.{}-{}", lumped.id, k, k + 1), description),
    };
    (0..groups)
        .map(|k| Capacitor {
            id: format!("{}.{}", lumped.id, k + 1),
            across: [node(k), node(k + 1)],
            series: 1,
            charged_to: lumped.charged_to.map(|v| Voltage::from_si(v.si() / f64::from(groups))),
            ..lumped.clone()
        })
        .collect()
}

fn free_node(mut wish: String, description: &Description) -> String {
    let d = description;
    let nodes: BTreeSet<&String> = (d.capacitors.iter().flat_map(|c| &c.across))
        .chain(d.resistors.iter().flat_map(|r| &r.across))
        .chain(d.sinks.iter().flat_map(|s| &s.across))
        .chain(d.supplies.iter().flat_map(|s| &s.across))
        .chain(&d.terminals)
        .collect();
    while nodes.contains(&wish) {
        wish.push('x');
    }
    wish
}
