//! The published limits of the data folder as a list.

use super::block::{Block, Labelled};
use super::words::{clean, whole};
use super::{markdown, text};
use crate::data::{LimitKind, PublishedLimit};
use crate::quantity::{Quantity, Time};
use serde::Serialize;

/// Stands beside every entry: a limit that is right today may be changed by its next edition.
const CHECK: &str = "check the edition in force";

/// The list as text within `width` columns (taken as at least 60 and at most 120).
pub fn limits_text(limits: &[PublishedLimit], width: usize) -> String {
    text::render(&document(limits), width)
}

/// The list as Markdown.
pub fn limits_markdown(limits: &[PublishedLimit]) -> String {
    markdown::render(&document(limits))
}

fn document(limits: &[PublishedLimit]) -> Vec<Block> {
    let intro = "Each rule is paraphrased; the document itself decides. `seen` says how an entry was checked: text (its \
                 own words), quoted (someone who restates it), memory (remembered, not seen), common practice (no \
                 source). A bank file names an entry with `limits: [{use: ID}]`.";
    let mut blocks = vec![
        Block::Title { title: "Published limits on residual voltage, charge and energy".into(), under: Vec::new() },
        Block::Paragraph(intro.into()),
    ];
    for limit in limits {
        blocks.push(Block::Part(limit.id.clone()));
        blocks.push(Block::Labelled(entry(limit)));
    }
    blocks
}

fn entry(limit: &PublishedLimit) -> Vec<Labelled> {
    // Some documents carry their edition in their number.
    let edition = match &limit.edition {
        Some(edition) if limit.document.contains(edition.as_str()) => String::new(),
        Some(edition) => format!("; edition {edition}"),
        None => "; edition not known".into(),
    };
    let document = format!("{}, {}{edition}; seen: {}; {CHECK}", limit.document, limit.clause, limit.seen);
    let within = within(limit).map_or_else(|| "no time is named".to_string(), whole);
    [
        ("rule", limit.rule.clone()),
        (if matches!(limit.kind, LimitKind::Wait { .. }) { "at least" } else { "within" }, within),
        ("from", limit.measured_from.clone()),
        ("scope", limit.scope.clone()),
        ("document", document),
    ]
    .into_iter()
    .filter(|(_, text)| !text.is_empty())
    .map(|(label, text)| Labelled::new(label, vec![text]))
    .collect()
}

fn within(limit: &PublishedLimit) -> Option<Time> {
    match &limit.kind {
        LimitKind::AnyOf { within, .. } | LimitKind::VoltageByCapacitance { within, .. } => *within,
        LimitKind::BeforeSwitchingIn { .. } => None,
        LimitKind::Wait { at_least } => Some(*at_least),
    }
}

/// One entry in machine formats.
#[derive(Serialize)]
struct Row<'a> {
    id: &'a str,
    document: &'a str,
    clause: &'a str,
    edition: Option<&'a str>,
    rule: &'a str,
    within_s: Option<f64>,
    measured_from: &'a str,
    scope: &'a str,
    seen: &'a str,
    check: &'static str,
}

fn row(limit: &PublishedLimit) -> Row<'_> {
    Row {
        id: &limit.id,
        document: &limit.document,
        clause: &limit.clause,
        edition: limit.edition.as_deref(),
        rule: &limit.rule,
        within_s: within(limit).map(Quantity::si),
        measured_from: &limit.measured_from,
        scope: &limit.scope,
        seen: &limit.seen,
        check: CHECK,
    }
}

/// The list as JSON, times in seconds, `null` where a document names no edition or time.
pub fn limits_json(limits: &[PublishedLimit]) -> String {
    let rows: Vec<Row> = limits.iter().map(row).collect();
    // Strings and finite numbers of the data folder: there is nothing that could fail.
    let mut text = serde_json::to_string_pretty(&rows).unwrap_or_default();
    text.push('\n');
    text
}

/// The list as CSV with a line of headings (RFC 4180: quotes doubled, lines ended by CR LF).
pub fn limits_csv(limits: &[PublishedLimit]) -> String {
    let heads = "id,document,clause,edition,rule,within_s,measured_from,scope,seen,check\r\n";
    let line = |limit: &PublishedLimit| {
        let r = row(limit);
        let within = r.within_s.map_or_else(String::new, |s| s.to_string());
        let edition = r.edition.unwrap_or_default();
        let cells = [r.id, r.document, r.clause, edition, r.rule, &within, r.measured_from, r.scope, r.seen, r.check];
        cells.map(quoted).join(",") + "\r\n"
    };
    heads.to_string() + &limits.iter().map(line).collect::<String>()
}

fn quoted(cell: &str) -> String {
    let cell = clean(cell);
    if cell.contains([',', '"']) { format!("\"{}\"", cell.replace('"', "\"\"")) } else { cell }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::data::published_limits;

    #[test]
    fn every_entry_stands_in_every_format_with_how_it_was_seen() {
        let limits = published_limits();
        for text in [limits_text(limits, 80), limits_markdown(limits), limits_json(limits), limits_csv(limits)] {
            for limit in limits {
                assert!(text.contains(&limit.id), "{}", limit.id);
            }
            let text = text.split_whitespace().collect::<Vec<_>>().join(" ");
            assert_eq!(text.matches(CHECK).count(), limits.len());
        }
    }

    #[test]
    fn text_stays_within_its_columns() {
        assert!(limits_text(published_limits(), 80).lines().all(|line| line.chars().count() <= 80));
    }

    #[test]
    fn a_cell_with_a_comma_or_a_quote_is_quoted() {
        assert_eq!(quoted("a, \"b\""), "\"a, \"\"b\"\"\"");
        assert_eq!(quoted("plain"), "plain");
    }
}
