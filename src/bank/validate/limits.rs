//! Limits: published ones that exist, own ones that ask something.

use super::super::description::{Bound, Description, Limit, Rule};
use super::super::near::advice;
use super::super::problem::{Path, Sink};
use super::figures::{above_zero, at_least_zero};
use super::is_known;
use crate::data::{published_limit, published_limits};
use std::collections::HashMap;

pub(super) fn check(d: &Description, sink: &mut Sink) {
    let mut taken: HashMap<(&str, Option<[&str; 2]>), usize> = HashMap::new();
    for (i, limit) in d.limits.iter().enumerate() {
        let path = Path::of("limits").then(i);
        rule(limit, &path, sink);
        // One published limit may be asked for at several pairs; an own one has one name and one pair.
        let at = match &limit.rule {
            Rule::Published(_) => limit.at.as_ref().map(|[a, b]| [a.as_str().min(b), a.as_str().max(b)]),
            // Its id is refused already.
            Rule::Own { .. } if published_limit(&limit.id).is_some() => continue,
            Rule::Own { .. } => None,
        };
        let earlier = *taken.entry((&limit.id, at)).or_insert(i);
        if earlier != i && is_known(&limit.id) {
            let key = if matches!(limit.rule, Rule::Published(_)) { "use" } else { "id" };
            let other = Path::of("limits").then(earlier).then(key);
            sink.push_pair("duplicate-limit", path.then(key), other, || {
                let text = format!("limit `{}` is there already", limit.id);
                (
                    text,
                    String::from("give every limit an id of its own; a published one may be used once for each pair"),
                )
            });
        }
    }
}

fn rule(limit: &Limit, path: &Path, sink: &mut Sink) {
    match &limit.rule {
        Rule::Published(id) if is_known(id) && published_limit(id).is_none() => {
            sink.push("unknown-limit", path.then("use"), || {
                let known = published_limits().iter().map(|limit| limit.id.as_str());
                (format!("`{id}` is no published limit of the data folder"), advice(id, "published limits", known))
            });
        }
        Rule::Published(_) => {}
        Rule::Own { any_of, within } => {
            if published_limit(&limit.id).is_some() {
                sink.push("limit-id-of-published", path.then("id"), || {
                    let text = format!("`{}` is the id of a published limit", limit.id);
                    (text, format!("write `use: {}` for that one, or give your own limit another id", limit.id))
                });
            }
            if any_of.is_empty() {
                sink.push("limit-without-bound", path.clone(), || {
                    let text = format!("limit `{}` has no bound", limit.id);
                    (
                        text,
                        String::from(
                            "write `voltage: 50 V`, or `any_of` with voltage, charge, initial_charge or energy",
                        ),
                    )
                });
            }
            if any_of.iter().all(Bound::is_of_isolation) {
                at_least_zero(*within, "within", path, sink);
            } else {
                above_zero(*within, "within", path, sink);
            }
            let bounds = if any_of.len() > 1 { path.then("any_of") } else { path.clone() };
            for bound in any_of {
                match *bound {
                    Bound::Voltage(v) => above_zero(v, "voltage", &bounds, sink),
                    Bound::Charge(q) => above_zero(q, "charge", &bounds, sink),
                    Bound::InitialCharge(q) => above_zero(q, "initial_charge", &bounds, sink),
                    Bound::Energy(e) => above_zero(e, "energy", &bounds, sink),
                }
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::samples::*;
    use super::*;
    use crate::bank::description::Description;
    use crate::quantity::{Quantity, Time};

    fn with(limits: Vec<Limit>) -> Description {
        Description { limits, ..plain() }
    }

    fn published(id: &str) -> Limit {
        Limit { id: id.into(), rule: Rule::Published(id.into()), at: None, single_fault: false }
    }

    fn own(id: &str, any_of: Vec<Bound>, within: f64) -> Limit {
        Limit {
            id: id.into(),
            rule: Rule::Own { any_of, within: Time::from_si(within) },
            at: None,
            single_fault: false,
        }
    }

    #[test]
    fn a_published_limit_exists() {
        assert_eq!(problems(&with(vec![published("iec-60204-1")])), []);
        assert_problem(&with(vec![published("iec-60204-l")]), "unknown-limit", "limits[0].use");
    }

    #[test]
    fn an_own_limit_asks_for_something_at_some_time() {
        let volts = || vec![Bound::Voltage(volt(50.0))];
        assert_eq!(problems(&with(vec![own("x", volts(), 5.0)])), []);
        assert_problem(&with(vec![own("x", vec![], 5.0)]), "limit-without-bound", "limits[0]");
        assert_problem(&with(vec![own("x", volts(), 0.0)]), "not-above-zero", "limits[0].within");
        let charge = Bound::InitialCharge(Quantity::from_si(6e-5));
        assert_eq!(problems(&with(vec![own("x", vec![charge], 0.0)])), []);
        let mixed = vec![charge, Bound::Voltage(volt(50.0))];
        assert_problem(&with(vec![own("x", mixed, 0.0)]), "not-above-zero", "limits[0].within");
        assert_problem(
            &with(vec![own("x", vec![Bound::Voltage(volt(0.0))], 5.0)]),
            "not-above-zero",
            "limits[0].voltage",
        );
    }

    #[test]
    fn limits_have_ids_of_their_own_and_a_published_one_may_be_used_at_several_pairs() {
        let volts = || vec![Bound::Voltage(volt(50.0))];
        let two = with(vec![own("x", volts(), 5.0), own("x", volts(), 6.0)]);
        assert_problem(&two, "duplicate-limit", "limits[1].id");
        assert_problem(&with(vec![own("iec-60204-1", volts(), 5.0)]), "limit-id-of-published", "limits[0].id");
        let mut d = with(vec![published("iec-60204-1"), published("iec-60204-1")]);
        assert_problem(&d, "duplicate-limit", "limits[1].use");
        d.limits[1].at = Some(pair("P", "N"));
        assert_eq!(problems(&d), []);
    }

    #[test]
    fn a_limit_is_for_a_pair_that_parts_connect() {
        let mut d = with(vec![published("iec-60204-1")]);
        d.limits[0].at = Some(pair("P", "M"));
        assert_problem(&d, "unknown-node", "limits[0].at[1]");
    }
}
