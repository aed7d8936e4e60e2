//! Names: what they may contain, and that no two parts share one.

use super::super::description::Description;
use super::super::parts::{Part, legs};
use super::super::problem::{Path, Sink};
use super::{Doubt, is_known};
use std::collections::HashMap;

/// Tags, ids and node names stand in tables and on labels; longer ones would break every one of them.
const LONGEST: usize = 100;

pub(super) fn check(d: &Description, parts: &[Part<'_>], doubt: &Doubt, sink: &mut Sink) {
    let unread = doubt.unread;
    name(&d.tag, "the tag", Path::of("tag"), unread, sink);
    if let Some(revision) = &d.revision {
        name(revision, "the revision", Path::of("revision"), unread, sink);
    }
    let lines = [("title", &d.title), ("location", &d.location), ("prepared_by", &d.prepared_by)];
    for (key, text) in lines {
        if let Some(text) = text {
            words(text, key, Path::of(key), false, unread, sink);
        }
    }
    if let Some(notes) = &d.notes {
        words(notes, "notes", Path::of("notes"), true, unread, sink);
    }
    for (i, terminal) in d.terminals.iter().enumerate() {
        name(terminal, "a terminal", Path::of("terminals").then(i), unread, sink);
    }
    for part in parts {
        name(part.id, "an id", part.path().then("id"), unread, sink);
        for (end, node) in part.across.iter().enumerate() {
            name(node, "a node", part.path().then("across").then(end), unread, sink);
        }
    }
    for (i, limit) in d.limits.iter().enumerate() {
        name(&limit.id, "an id", Path::of("limits").then(i).then("id"), unread, sink);
    }
    for (i, step) in d.procedure.iter().enumerate() {
        words(&step.name, "step", Path::of("procedure").then(i).then("step"), false, unread, sink);
    }
    no_id_twice(d, parts, sink);
}

fn name(text: &str, what: &str, path: Path, unread: bool, sink: &mut Sink) {
    if unread && !is_known(text) {
        return;
    }
    let problem = if text.trim().is_empty() {
        "is empty"
    } else if text.chars().any(char::is_control) {
        "has a line break or a control character in it"
    } else if text.trim() != text {
        "begins or ends with a blank"
    } else if text.chars().count() > LONGEST {
        "is too long"
    } else {
        return;
    };
    sink.push("bad-name", path, || {
        (format!("{what} {problem}"), format!("write a name of up to {LONGEST} characters on one line"))
    });
}

fn words(text: &str, key: &str, path: Path, many_lines: bool, unread: bool, sink: &mut Sink) {
    if unread && !is_known(text) {
        return;
    }
    let refused = |c: char| c.is_control() && !(many_lines && matches!(c, '\n' | '\t'));
    if text.trim().is_empty() {
        sink.push("bad-name", path, || (format!("`{key}` is empty"), format!("write what `{key}` is to say")));
    } else if text.trim_end().chars().any(refused) {
        sink.push("bad-name", path, || {
            (format!("`{key}` has a line break or a control character in it"), String::from("write it on one line"))
        });
    }
}

/// All parts share one name space, and the legs of a three-phase part are in it.
fn no_id_twice(d: &Description, parts: &[Part<'_>], sink: &mut Sink) {
    let mut taken: HashMap<String, usize> = HashMap::new();
    for (at, part) in parts.iter().enumerate().filter(|(_, part)| is_known(part.id)) {
        let own = std::iter::once(part.id.to_string());
        let of_legs = part.phases.map(|_| legs(d, part.id, part.across, part.phases)).unwrap_or_default();
        for id in own.chain(of_legs.into_iter().map(|(id, _)| id)) {
            let earlier = *taken.entry(id.clone()).or_insert(at);
            if earlier != at {
                let other = parts[earlier];
                sink.push_pair("duplicate-id", part.path().then("id"), other.path().then("id"), || {
                    let text = format!("the id `{id}` is taken already, by a {}", other.noun);
                    (text, String::from("give every capacitor, resistor, sink and supply an id of its own"))
                });
                break;
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::samples::*;
    use crate::bank::description::{Connection, Role};

    #[test]
    fn an_id_that_two_parts_share_is_refused_at_the_second() {
        let mut d = plain();
        d.resistors.push(resistor("C1", Role::Bleeder, "P", "N"));
        assert_problem(&d, "duplicate-id", "resistors[1].id");
    }

    #[test]
    fn the_legs_of_a_three_phase_part_take_names_as_well() {
        let mut d = three_phase();
        d.resistors.push(resistor("CB.AB", Role::Bleeder, "A", "B"));
        assert_problem(&d, "duplicate-id", "resistors[1].id");
        d.capacitors[0].phases = Some(Connection::Star);
        assert_eq!(problems(&d), []);
    }

    #[test]
    fn a_name_is_one_line_of_text() {
        for bad in ["", " ", "two\nlines", " R1", "bell\u{7}", &"x".repeat(101)] {
            let mut d = plain();
            d.tag = bad.into();
            assert_problem(&d, "bad-name", "tag");
            let mut d = plain();
            d.resistors[0].id = bad.into();
            assert_problem(&d, "bad-name", "resistors[0].id");
        }
    }

    #[test]
    fn notes_may_have_many_lines_and_a_step_may_not() {
        let mut d = plain();
        d.notes = Some("one\ntwo\n".into());
        d.procedure.push(step("one\ntwo"));
        assert_problem(&d, "bad-name", "procedure[0].step");
    }
}
