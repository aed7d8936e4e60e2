//! The bank file: bytes in, a [`Bank`] out, or every problem with its line.
//!
//! Text becomes a tree that knows its places (`tree`), the tree becomes a description (`top` and the files beside
//! it), and the rules of `validate` are run on that; their paths are then found in the tree again.

mod brackets;
mod charge;
mod insert;
mod keys;
mod limits;
mod log;
mod parts;
mod rating;
mod reader;
mod replace;
mod source;
mod steps;
mod stock;
mod switched;
mod syntax;
mod top;
mod tree;
mod write;

pub use insert::{
    capacitor_text, resistor_text, steps_text, supply_text, with_groups, with_resistor, with_resistor_and_steps,
    with_resistor_exchanged, with_supply,
};
pub use source::MAX_BYTES;
pub use stock::read_stock;
pub use write::write;

use super::problem::{Path, Segment};
use super::{Bank, validate};
use crate::finding::Findings;
use log::Log;
use reader::Reader;
use source::{Source, Span};
use tree::{Content, Node};

/// Reads a bank file. `name` is what the file is called in messages.
///
/// With the bank come findings on how the file was read, such as `millifarad-read`, each with its place.
///
/// # Errors
/// Everything that is wrong with the file, in the order of its lines; each finding has a place, and most say what to
/// write instead. After fifty of them one more says how many others there were.
///
/// # Example: a file with one slip
/// ```
/// let text = "ebbvolt: 1\ntag: PU-07\ntouch_voltage: 50\ncharged_to: 565 V\ncapacitors: [{id: C1, value: 3300 uF}]\n";
/// let findings = ebbvolt::bank::file::read("bank.yaml", text.as_bytes()).expect_err("50 has no unit");
/// let finding = &findings.as_slice()[0];
/// assert_eq!(finding.code, "bad-quantity");
/// assert!(finding.place.as_ref().is_some_and(|place| (place.line, place.column) == (3, 16)));
/// ```
pub fn read(name: &str, bytes: &[u8]) -> Result<(Bank, Findings), Findings> {
    let mut log = Log::default();
    match read_into(&mut log, name, bytes) {
        Some(read) if log.is_empty() => Ok(read),
        _ => Err(log.into_findings()),
    }
}

/// `None`, or something in the log, where the file is no bank.
fn read_into(log: &mut Log, name: &str, bytes: &[u8]) -> Option<(Bank, Findings)> {
    let source = match Source::new(name, bytes) {
        Ok(source) => source,
        Err(error) => {
            log.push(*error);
            return None;
        }
    };
    let tree = tree::parse(&source, log);
    let Some(tree) = tree.filter(|tree| !tree.is_null()) else {
        if log.is_empty() {
            let help = "`ebbvolt draft` prints a file to start from";
            log.push(source.error(
                "empty-file",
                Span { line: 1, column: 1, length: 1 },
                "the file describes nothing",
                help,
            ));
        }
        return None;
    };
    let mut reader = Reader::new(&source, log);
    let description = top::read(&mut reader, &tree)?;
    let (problems, dropped) = validate::check(&description, &reader.doubt);
    for problem in problems {
        let mut text = problem.text;
        if let Some(other) = problem.other {
            text.push_str(&format!(" (line {})", span_of(&tree, &other).line));
        }
        reader.error(problem.code, span_of(&tree, &problem.path), text, problem.help.unwrap_or_default());
    }
    reader.log.drop_more(dropped);
    let mut notes = reader.notes;
    notes.sort_by_key(log::position);
    notes.dedup();
    let mut findings = Findings::new();
    findings.extend(notes);
    Some((Bank::checked(description), findings))
}

/// Where a path ends in the file; where the file leaves out what the path names, the nearest thing around it.
fn span_of(tree: &Node, path: &Path) -> Span {
    let mut node = tree;
    let mut span = match &tree.content {
        Content::Mapping(entries) => entries.first().map_or(tree.span, |(key, _)| key.span),
        _ => tree.span,
    };
    for segment in path.segments() {
        let next = match (segment, &node.content) {
            (Segment::Key(key), _) => node.get(key).map(|(key, node)| (key.span, node)),
            (Segment::Index(index), Content::Sequence(entries)) => entries.get(*index).map(|node| (node.span, node)),
            _ => None,
        };
        let Some((at, below)) = next else { break };
        node = below;
        // A list or a group is found by its key, a value by itself.
        span = if matches!(node.content, Content::Scalar { .. }) && !node.is_null() { node.span } else { at };
    }
    span
}
