//! The tools with which the parts of a bank file are read: every one reports what is wrong and goes on.

use super::log::Log;
use super::source::{Source, Span, is_refused};
use super::tree::{Content, Key, Node, clip};
use crate::bank::description::Pair;
use crate::bank::near::{advice, nearest};
use crate::bank::validate::Doubt;
use crate::finding::{Finding, Severity};
use crate::quantity::{Capacitance, Quantity, QuantityError, Ratio, Reading, Tolerance, parse, parse_kind};
use std::rc::Rc;

/// How to speak of the whole file; a key of it needs no owner.
pub(super) const TOP: &str = "the bank file";

/// A value that is due to be read.
#[derive(Clone)]
pub(super) struct Spot<'t> {
    pub(super) node: &'t Node,
    /// How to speak of it: `` `value` of capacitor `C1` ``.
    pub(super) name: String,
    /// Where to point at it.
    span: Span,
}

/// A mapping whose keys are known.
pub(super) struct Group<'t> {
    node: &'t Node,
    /// Whose keys they are: `` capacitor `C1` ``.
    pub(super) owner: String,
    /// Where a missing key is reported.
    span: Span,
}

/// Reads a file and keeps what is wrong with it.
pub(super) struct Reader<'s> {
    source: &'s Source,
    pub(super) log: &'s mut Log,
    pub(super) notes: Vec<Finding>,
    pub(super) doubt: Doubt,
}

impl<'t> Spot<'t> {
    /// The whole file.
    pub(super) fn top(node: &'t Node) -> Self {
        Spot { node, name: TOP.into(), span: node.span }
    }

    fn is_refused(&self) -> bool {
        matches!(self.node.content, Content::Refused)
    }

    /// True for a list or a mapping.
    pub(super) fn has_parts(&self) -> bool {
        matches!(self.node.content, Content::Sequence(_) | Content::Mapping(_))
    }

    /// True for a mapping.
    pub(super) fn is_mapping(&self) -> bool {
        matches!(self.node.content, Content::Mapping(_))
    }
}

impl<'t> Group<'t> {
    /// The value of a key, where the key is there.
    pub(super) fn spot(&self, key: &str) -> Option<Spot<'t>> {
        let (key, node) = self.node.get(key)?;
        // What is not there, or stands elsewhere behind an alias, is best found by its key.
        let span = if node.is_null() { key.span } else { node.span };
        let name =
            if self.owner == TOP { format!("`{}`", key.text) } else { format!("`{}` of {}", key.text, self.owner) };
        Some(Spot { node, name, span })
    }

    /// True where the key is there, with or without a value.
    pub(super) fn has(&self, key: &str) -> bool {
        self.node.get(key).is_some()
    }

    /// The keys among `keys` that are there.
    pub(super) fn given<'k>(&self, keys: &[&'k str]) -> Vec<&'k str> {
        keys.iter().copied().filter(|key| self.has(key)).collect()
    }
}

impl<'s> Reader<'s> {
    pub(super) fn new(source: &'s Source, log: &'s mut Log) -> Self {
        Reader { source, log, notes: vec![], doubt: Doubt { unread: true, ..Doubt::default() } }
    }

    pub(super) fn error(&mut self, code: &'static str, span: Span, text: impl Into<String>, help: impl Into<String>) {
        self.log.push_with(|| self.source.error(code, span, text, help));
    }

    /// An error at a value.
    pub(super) fn wrong(&mut self, spot: &Spot<'_>, code: &'static str, text: &str, help: impl Into<String>) {
        self.error(code, spot.span, format!("{}: {text}", spot.name), help);
    }

    /// An error at the key of a mapping.
    pub(super) fn wrong_key(&mut self, group: &Group<'_>, key: &str, code: &'static str, text: String, help: &str) {
        let span = group.node.get(key).map_or(group.span, |(key, _)| key.span);
        self.error(code, span, text, help);
    }

    /// A mapping, after its unknown keys were reported.
    pub(super) fn group<'t>(&mut self, spot: &Spot<'t>, owner: String, keys: &[&'static str]) -> Option<Group<'t>> {
        let Content::Mapping(entries) = &spot.node.content else {
            if !spot.is_refused() && self.has_value(spot) {
                let example = keys.first().map_or("key", |key| key);
                let help =
                    format!("write keys with their values, such as `{{{example}: …}}`; keys here: {}", keys.join(", "));
                self.wrong(spot, "wrong-shape", "a group of keys is due here", help);
            }
            return None;
        };
        for (key, value) in entries.iter().filter(|(key, _)| !keys.contains(&key.text.as_str())) {
            self.unknown_key(key, value, &owner, keys);
        }
        // A block of keys begins with its first one, a group in braces with the brace.
        let span = entries
            .first()
            .map(|(key, _)| key.span)
            .filter(|first| first.line == spot.node.span.line && first.column == spot.node.span.column);
        Some(Group { node: spot.node, owner, span: span.unwrap_or(spot.node.span) })
    }

    fn unknown_key(&mut self, key: &Key, value: &Rc<Node>, owner: &str, keys: &[&'static str]) {
        if self.log.is_full() {
            return self.error("unknown-key", key.span, "", "");
        }
        let text = format!("`{}` is no key of {owner}", clip(&key.text));
        let cut_by_comma = value.is_null() && nearest(&key.text, keys.iter().copied()).is_none();
        let help = if cut_by_comma {
            String::from(
                "inside braces a comma begins a new key: put text with a comma in quotes, and write a decimal point in a number",
            )
        } else {
            advice(&key.text, "keys here", keys.iter().copied())
        };
        self.error("unknown-key", key.span, text, help);
    }

    /// The value of a key that has to be there.
    pub(super) fn need<'t>(&mut self, group: &Group<'t>, key: &str, example: &str) -> Option<Spot<'t>> {
        if group.has(key) {
            return self.may(group, key);
        }
        let text = format!("{} has no `{key}`", group.owner);
        self.error("missing-key", group.span, text, format!("add `{key}: {example}`"));
        None
    }

    /// The value of a key that may be there.
    pub(super) fn may<'t>(&mut self, group: &Group<'t>, key: &str) -> Option<Spot<'t>> {
        group.spot(key).filter(|spot| self.has_value(spot))
    }

    fn has_value(&mut self, spot: &Spot<'_>) -> bool {
        if spot.node.is_null() {
            self.error(
                "no-value",
                spot.span,
                format!("{} has no value", spot.name),
                "write a value, or leave the key out where it is optional",
            );
        }
        !spot.node.is_null()
    }

    /// The text of a value as it was typed; `due` says what the value should be, for whoever wrote a list instead.
    pub(super) fn scalar<'t>(&mut self, spot: &Spot<'t>, due: &str, help: &str) -> Option<(&'t str, bool)> {
        match &spot.node.content {
            Content::Scalar { text, plain } => self.has_value(spot).then_some((text.as_str(), *plain)),
            Content::Refused => None,
            _ => {
                self.wrong(spot, "wrong-shape", &format!("{due} is due here, not a list or a group of keys"), help);
                None
            }
        }
    }

    /// A name or a sentence.
    pub(super) fn text(&mut self, spot: &Spot<'_>) -> Option<String> {
        let (text, _) =
            self.scalar(spot, "a text", "write a text; quotes are needed only around `:`, `#` and commas in braces")?;
        if let Some(c) = text.chars().find(|c| is_refused(*c)) {
            let problem = format!("the character U+{:04X} can't stand in a text", u32::from(c));
            self.wrong(spot, "unprintable-character", &problem, "remove it");
            return None;
        }
        Some(text.to_string())
    }

    /// A quantity with its unit.
    pub(super) fn quantity<Q: Quantity>(&mut self, spot: &Spot<'_>) -> Option<Q> {
        self.measure(spot, parse::<Q>).map(|reading| reading.value)
    }

    /// A reactive power, in var.
    pub(super) fn reactive_power(&mut self, spot: &Spot<'_>) -> Option<f64> {
        self.measure(spot, |text| parse_kind(text, crate::quantity::Kind::ReactivePower)).map(|reading| reading.value)
    }

    /// A capacitance, with a note where it was given in millifarad.
    pub(super) fn capacitance(&mut self, spot: &Spot<'_>) -> Option<Capacitance> {
        let reading = self.measure(spot, parse::<Capacitance>)?;
        if reading.millifarad {
            let text = format!(
                "{} is read as millifarad ({} uF); an old plate may have meant microfarad by `mF`",
                spot.name,
                reading.value.si() * 1e6
            );
            let note = Finding::new(Severity::Caution, "millifarad-read", text)
                .with_help("write it in uF, so that nobody has to guess")
                .at(self.source.place(spot.span));
            self.notes.push(note);
        }
        Some(reading.value)
    }

    fn measure<Q>(
        &mut self,
        spot: &Spot<'_>,
        parse: impl Fn(&str) -> Result<Reading<Q>, QuantityError>,
    ) -> Option<Reading<Q>> {
        let due = || parse("").err().map_or_else(String::new, |e| e.help);
        let (text, _) = self.scalar(spot, "a quantity with its unit", &due())?;
        match parse(text) {
            Ok(reading) => Some(reading),
            Err(QuantityError { problem, help }) => {
                self.wrong(spot, "bad-quantity", &problem, help);
                None
            }
        }
    }

    /// A tolerance: both ways, or `{low, high}`.
    pub(super) fn tolerance(&mut self, spot: &Spot<'_>) -> Option<Tolerance> {
        let (low, high) = if spot.is_mapping() {
            let group = self.group(spot, spot.name.clone(), &["low", "high"])?;
            let low = self.need(&group, "low", "10 %").and_then(|spot| self.quantity::<Ratio>(&spot));
            let high = self.need(&group, "high", "30 %").and_then(|spot| self.quantity::<Ratio>(&spot));
            (low?, high?)
        } else {
            let both = self.quantity::<Ratio>(spot)?;
            (both, both)
        };
        Tolerance::new(low, high).map_err(|e| self.wrong(spot, "bad-quantity", &e.problem, e.help)).ok()
    }

    /// What age does to a value: both ways, or `low` or `high` or both; a side left out does not move.
    pub(super) fn ageing(&mut self, spot: &Spot<'_>) -> Option<Tolerance> {
        if !spot.is_mapping() {
            return self.tolerance(spot);
        }
        let group = self.group(spot, spot.name.clone(), &["low", "high"])?;
        if !group.has("low") && !group.has("high") {
            let help = "write `{low: 20 %}`, `{high: 50 %}` or both, or `20 %` for both ways";
            self.wrong(spot, "missing-key", "it has neither `low` nor `high`", help);
            return None;
        }
        let mut side = |key| match self.may(&group, key) {
            Some(spot) => self.quantity::<Ratio>(&spot),
            None => (!group.has(key)).then(|| Ratio::from_si(0.0)),
        };
        let (low, high) = (side("low"), side("high"));
        Tolerance::new(low?, high?).map_err(|e| self.wrong(spot, "bad-quantity", &e.problem, e.help)).ok()
    }

    /// One of a few words.
    pub(super) fn word<T: Copy>(&mut self, spot: &Spot<'_>, words: &[(&'static str, T)]) -> Option<T> {
        let known = || words.iter().map(|(word, _)| *word);
        let list = known().collect::<Vec<_>>().join(", ");
        let (text, _) = self.scalar(spot, "a word", &format!("write one of: {list}"))?;
        let found = words.iter().find(|(word, _)| *word == text).map(|(_, value)| *value);
        if found.is_none() {
            let problem = format!("`{}` is no such word", clip(text));
            self.wrong(spot, "bad-word", &problem, advice(text, "write one of", known().collect::<Vec<_>>()));
        }
        found
    }

    /// `true` or `false`.
    pub(super) fn flag(&mut self, spot: &Spot<'_>) -> Option<bool> {
        let help = "write `true` or `false`, without quotes";
        match self.scalar(spot, "true or false", help)? {
            ("true", true) => Some(true),
            ("false", true) => Some(false),
            (text, _) => {
                self.wrong(spot, "bad-word", &format!("`{}` is neither true nor false", clip(text)), help);
                None
            }
        }
    }

    /// A whole number; its range is checked with the other figures.
    pub(super) fn count(&mut self, spot: &Spot<'_>) -> Option<u32> {
        let help = "write a whole number without a unit, such as `2`";
        let (text, plain) = self.scalar(spot, "a whole number", help)?;
        let digits = plain && !text.is_empty() && text.chars().all(|c| c.is_ascii_digit());
        let number = text.parse().ok().filter(|_| digits);
        if number.is_none() {
            self.wrong(
                spot,
                "bad-number",
                &format!("`{}` is no whole number that can be meant here", clip(text)),
                help,
            );
        }
        number
    }

    /// A plain number.
    pub(super) fn number(&mut self, spot: &Spot<'_>) -> Option<f64> {
        let help = "write a plain decimal number, such as `5` or `2.5`";
        let (text, plain) = self.scalar(spot, "a number", help)?;
        let decimal = plain && text.chars().all(|c| c.is_ascii_digit() || c == '.');
        let number = text.parse().ok().filter(|x: &f64| decimal && x.is_finite());
        if number.is_none() {
            self.wrong(spot, "bad-number", &format!("`{}` is no number that can be meant here", clip(text)), help);
        }
        number
    }

    /// The entries of a list.
    pub(super) fn list<'t>(&mut self, spot: &Spot<'t>, entry: &str, example: &str) -> Option<Vec<Spot<'t>>> {
        match &spot.node.content {
            Content::Sequence(entries) => {
                let name = |i| format!("{entry} {} of {}", i + 1, spot.name);
                let of = |(i, node): (usize, &'t Rc<Node>)| Spot { node, name: name(i), span: node.span };
                Some(entries.iter().enumerate().map(of).collect())
            }
            Content::Refused => None,
            _ => {
                if self.has_value(spot) {
                    self.wrong(spot, "wrong-shape", "a list is due here", format!("write a list, such as `{example}`"));
                }
                None
            }
        }
    }

    /// A list of names; entries that could not be read are left out, and then the second value is false.
    pub(super) fn names(&mut self, spot: &Spot<'_>, entry: &str, example: &str) -> (Vec<String>, bool) {
        let Some(entries) = self.list(spot, entry, example) else { return (vec![], false) };
        let all = entries.len();
        let names: Vec<String> = entries.iter().filter_map(|entry| self.text(entry)).collect();
        let complete = names.len() == all;
        (names, complete)
    }

    /// Two nodes.
    pub(super) fn pair(&mut self, spot: &Spot<'_>) -> Option<Pair> {
        let entries = self.list(spot, "node", "[P, N]")?;
        if entries.len() != 2 {
            let problem = format!("two nodes are due here, and there are {}", entries.len());
            self.wrong(spot, "wrong-shape", &problem, "write two nodes, such as `[P, N]`");
            return None;
        }
        let nodes: Vec<Option<String>> = entries.iter().map(|entry| self.text(entry)).collect();
        let mut nodes = nodes.into_iter().flatten();
        Some([nodes.next()?, nodes.next()?])
    }

    /// A list of pairs; `None` for an entry that could not be read.
    pub(super) fn pairs(&mut self, spot: &Spot<'_>) -> Option<Vec<Option<Pair>>> {
        let entries = self.list(spot, "pair", "[[P, N]]")?;
        if entries.len() == 2 && entries.iter().all(|entry| !entry.has_parts()) {
            let problem = "a list of pairs is due here, and this is one pair";
            self.wrong(spot, "wrong-shape", problem, "write one more pair of brackets, such as `[[P, N]]`");
            return None;
        }
        Some(entries.iter().map(|entry| self.pair(entry)).collect())
    }
}
