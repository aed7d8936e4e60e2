//! Keys of one part replaced in the text of a bank file, every comment of it kept.

use super::insert::{end_of, first_char};
use super::replace::comment;
use super::source::Source;
use super::tree::{Content, Key, Node};
use std::ops::Range;
use std::rc::Rc;

/// The text with some keys of the entry number `index` of a list written anew: the first of `keys` has to stand there
/// and gets its new value in place; the others go where they stand now and come right after it. `None` where the entry
/// is written in a way that this does not change (the caller's words then say what to do by hand). What comes out is
/// only a proposal: the caller reads it back.
pub(super) fn replaced(
    source: &Source,
    tree: &Node,
    list: &str,
    index: usize,
    keys: &[(&str, Option<String>)],
) -> Option<String> {
    let Content::Sequence(entries) = &tree.get(list)?.1.content else { return None };
    let entry = entries.get(index)?;
    let Content::Mapping(pairs) = &entry.content else { return None };
    let lines: Vec<&str> = source.text.lines().collect();
    let [(anchor, first), others @ ..] = keys else { return None };
    let (_, value) = entry.get(anchor)?;
    let old = pairs.iter().enumerate().filter(|(_, (key, _))| others.iter().any(|(name, _)| *name == key.text));
    let old: Vec<usize> = old.map(|(at, _)| at).collect();
    let text = Text { lines: &lines };
    if first_char(&lines, entry.span.line, entry.span.column) == Some('{') {
        let new = others.iter().filter_map(|(key, value)| Some(format!(", {key}: {}", value.as_ref()?)));
        let new: String = first.iter().cloned().chain(new).collect();
        let mut edits = vec![(text.of(value)?, new)];
        for at in old {
            edits.push((text.pair_with_comma(pairs, at)?, String::new()));
        }
        return Some(text.edited(edits));
    }
    let next = entries.get(index + 1).map(|e| e.span.line).or_else(|| {
        let Content::Mapping(top) = &tree.content else { return None };
        top.iter().map(|(k, _)| k.span.line).filter(|line| *line > entry.span.line).min()
    });
    let last = end_of(&lines, next.map_or(lines.len(), |line| line - 1));
    let mut edits = vec![(text.of(value)?, first.clone()?)];
    for at in old {
        edits.push(text.lines_of(pairs, at, last)?);
    }
    let indent = " ".repeat(entry.get(anchor)?.0.span.column - 1);
    let new = others.iter().filter_map(|(key, value)| Some(format!("{indent}{key}: {}\n", value.as_ref()?)));
    let below = text.byte(value.end.0 + 1, 1)?;
    edits.push((below..below, new.collect()));
    Some(text.edited(edits))
}

/// The lines of a file; places are lines and columns from 1, bytes count from the start with one for every line end.
struct Text<'a> {
    lines: &'a [&'a str],
}

impl Text<'_> {
    /// The byte of a place; the line after the last one is the end.
    fn byte(&self, line: usize, column: usize) -> Option<usize> {
        let before: usize = self.lines.iter().take(line.checked_sub(1)?).map(|l| l.len() + 1).sum();
        match self.lines.get(line - 1) {
            Some(text) => {
                let at = text.char_indices().map(|(at, _)| at).chain([text.len()]).nth(column.checked_sub(1)?)?;
                Some(before + at)
            }
            None => (line == self.lines.len() + 1 && column == 1).then_some(before),
        }
    }

    fn whole(&self) -> String {
        self.lines.iter().map(|line| format!("{line}\n")).collect()
    }

    /// A value that stands on one line, or in brackets of its own.
    fn of(&self, value: &Node) -> Option<Range<usize>> {
        let start = self.byte(value.span.line, value.span.column)?;
        let collection = matches!(value.content, Content::Sequence(_) | Content::Mapping(_));
        let ends = self.byte(value.end.0, value.end.1)?;
        if collection && !matches!(first_char(self.lines, value.span.line, value.span.column), Some('{' | '[')) {
            return None;
        }
        (collection || value.end.0 == value.span.line).then_some(start..ends)
    }

    /// A key with its value and one of the commas beside it, for a mapping in braces. `None` where a comment stands in
    /// it, which could not stay.
    fn pair_with_comma(&self, pairs: &[(Key, Rc<Node>)], at: usize) -> Option<Range<usize>> {
        let key = &pairs[at].0.span;
        let (start, end) = (self.byte(key.line, key.column)?, self.of(&pairs[at].1)?.end);
        let whole = self.whole();
        let (start, end) = if at > 0 {
            let before = self.of(&pairs[at - 1].1)?.end;
            (before + whole.get(before..start)?.find(',')?, end)
        } else {
            let after = whole.get(end..)?.find(',')?;
            (start, end + after + 1)
        };
        (!whole.get(start..end)?.contains('#')).then_some(start..end)
    }

    /// The lines of a key with its value, up to the next key or the line `last`; comments in them stay, on lines of
    /// their own.
    fn lines_of(&self, pairs: &[(Key, Rc<Node>)], at: usize, last: usize) -> Option<(Range<usize>, String)> {
        let key = &pairs[at].0.span;
        let ahead = self.lines.get(key.line - 1)?.chars().take(key.column - 1);
        if !ahead.clone().all(char::is_whitespace) {
            return None;
        }
        let until = pairs.get(at + 1).map_or(last, |(next, _)| end_of(self.lines, next.span.line - 1));
        let comments = self.lines.get(key.line - 1..until)?.iter().filter_map(|line| comment(line));
        let kept = comments.map(|text| format!("{}{text}\n", " ".repeat(key.column - 1))).collect();
        Some((self.byte(key.line, 1)?..self.byte(until + 1, 1)?, kept))
    }

    /// The text with ranges replaced; they don't overlap.
    fn edited(&self, mut edits: Vec<(Range<usize>, String)>) -> String {
        // From the end, so that earlier places stay; of two at one place, the one that takes nothing away goes first.
        edits.sort_by_key(|(range, _)| std::cmp::Reverse((range.start, range.end)));
        let mut whole = self.whole();
        for (range, text) in edits {
            if whole.get(range.clone()).is_some() {
                whole.replace_range(range, &text);
            }
        }
        whole
    }
}

#[cfg(test)]
mod tests {
    use super::super::{read, with_supply};
    use super::comment;
    use crate::bank::description::{Rating, Supply};
    use crate::quantity::{Energy, Power, Quantity, Ratio, Resistance, Tolerance};

    const HEAD: &str = "# A bank.\nebbvolt: 1\ntag: X\ntouch_voltage: 50 V\ncharged_to: 565 V\ncapacitors:\n  - {id: C1, \
                        value: 1 mF}   # kept\n";

    /// The file's own supply number `index` with another series resistance.
    fn anew(text: &str, index: usize, change: impl FnOnce(&mut Supply)) -> String {
        let (bank, _) = read("bank.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}"));
        let mut supply = bank.description().supplies[index].clone();
        change(&mut supply);
        with_supply("bank.yaml", text.as_bytes(), &supply).unwrap_or_else(|e| panic!("{e}\n{text}"))
    }

    fn other(supply: &mut Supply) {
        supply.series = Resistance::from_si(47.0);
        supply.tolerance = Tolerance::new(Ratio::from_si(0.05), Ratio::from_si(0.05)).ok();
        (supply.array_series, supply.array_parallel) = (2, 1);
        supply.rating =
            Rating { power: Some(Power::from_si(50.0)), pulse: Some(Energy::from_si(300.0)), ..Rating::default() };
    }

    fn plain(supply: &mut Supply) {
        *supply =
            Supply { tolerance: None, array_series: 1, array_parallel: 1, rating: Rating::default(), ..supply.clone() };
    }

    #[test]
    fn a_supply_in_braces_is_sized_anew_in_place() {
        let text = format!(
            "{HEAD}supplies: # feeds\n  - {{id: S1, voltage: 565 V, series: 100 ohm, tolerance: 10 %, across: [P, N]}} # µ old\n  - {{rating: {{power: 1 W}}, \
             id: S2, across: [P, N],\n     # two lines\n     voltage: 48 V, series: \"1k\"}}\nlimits: []   # none\n"
        );
        let after = anew(&text, 0, other);
        assert!(after.contains("series: 47 ohm, tolerance: 5 %, array: {series: 2}, rating: {power: 50 W, pulse: 300 J}, across: [P, N]} # µ old"), "{after}");
        let after = anew(&text, 1, other);
        assert!(
            after.contains("- {id: S2, across: [P, N],\n     # two lines\n     voltage: 48 V, series: 47 ohm, tol")
                || after.contains("- { id: S2"),
            "{after}"
        );
        let after = anew(&after, 1, plain);
        assert!(after.contains("voltage: 48 V, series: 47 ohm}"), "{after}");
    }

    #[test]
    fn a_supply_in_lines_is_sized_anew_and_its_comments_stay() {
        let text = format!(
            "{HEAD}supplies:\n- id: S1     # the rectifier\n  rating:    # of one\n    power: 25 W   # on a heat sink\n    # cold\n    pulse: 100 J\n  # about the value\n  \
             series: 100 ohm   # wirewound\n  voltage: 565 V\n  across: [P, N]\n  tolerance: 10 %  # bought so\n\n# steps follow\nprocedure:\n  - {{step: on, connect: [S1], for: 2 s}}\n"
        );
        let after = anew(&text, 0, other);
        for kept in [
            "# the rectifier",
            "  # of one\n",
            "  # on a heat sink\n",
            "  # cold\n",
            "  # about the value\n",
            "series: 47 ohm   # wirewound\n",
            "  # bought so\n\n# steps follow\n",
        ] {
            assert!(after.contains(kept), "{kept}\n{after}");
        }
        assert!(
            after.contains("# wirewound\n  tolerance: 5 %\n  array: {series: 2}\n  rating: {power: 50 W"),
            "{after}"
        );
        assert!(!after.contains("25 W"));
        let after = anew(&after, 0, plain);
        assert!(after.contains("# wirewound\n  voltage: 565 V\n"), "{after}");
    }

    #[test]
    fn what_can_t_be_changed_in_place_is_refused_with_a_way_out() {
        let text = format!(
            "{HEAD}supplies:\n  - {{id: S1, voltage: 565 V, series: 100 ohm, across: [P, N], rating: {{power: 1 W, # one\n    pulse: 1 J}}}}\n"
        );
        let (bank, _) = read("bank.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{e:?}"));
        let mut supply = bank.description().supplies[0].clone();
        other(&mut supply);
        let refused = with_supply("bank.yaml", text.as_bytes(), &supply);
        assert!(refused.is_err_and(|e| e.contains("--part")));
    }

    #[test]
    fn a_new_supply_gets_a_list() {
        let (bank, _) = read(
            "b",
            format!("{HEAD}supplies: [{{id: S1, voltage: 1 V, series: 1 ohm, across: [P, N]}}]\n").as_bytes(),
        )
        .unwrap_or_else(|e| panic!("{e:?}"));
        let mut supply = bank.description().supplies[0].clone();
        other(&mut supply);
        let after = with_supply("bank.yaml", HEAD.as_bytes(), &supply).unwrap_or_else(|e| panic!("{e}"));
        assert!(
            after.starts_with(HEAD) && after.contains("supplies:\n  - {id: S1, voltage: 1 V, series: 47 ohm"),
            "{after}"
        );
    }

    #[test]
    fn a_comment_begins_at_a_hash_outside_of_quotes() {
        assert_eq!(comment("a: 1 # b"), Some("# b"));
        assert_eq!(comment("a: \"x # y\" # z"), Some("# z"));
        assert_eq!(comment("a: x#y"), None);
        assert_eq!(comment("  # whole"), Some("# whole"));
        assert_eq!(comment("a: it's # so"), Some("# so"));
    }
}
