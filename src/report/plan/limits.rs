//! Limits: the verdict first, then what was asked, what was found, where the rule stands.

use super::super::block::{Block, Labelled};
use super::super::words::{pair, time, up, whole};
use super::summary::limit_missed;
use crate::plan::{LimitResult, LimitSource, Plan};

pub(in crate::report) fn blocks(plan: &Plan) -> Vec<Block> {
    let mut blocks = vec![Block::Section("Limits")];
    if plan.limits.is_empty() {
        let text = "None was given. `ebbvolt limits` lists published ones that a bank file can name.";
        blocks.push(Block::Paragraph(text.into()));
    } else {
        blocks.push(Block::Labelled(plan.limits.iter().map(limit).collect()));
    }
    blocks
}

fn limit(limit: &LimitResult) -> Labelled {
    let label = match (limit_missed(limit), limit.met) {
        (true, _) => "NOT MET",
        (false, Some(true)) => "met",
        (false, _) => "not checked",
    };
    let mut text =
        vec![format!("{} across {}: {}", limit.id, pair(&limit.across), sentence(&limit.rule)), found(limit)];
    text.extend(single_fault(limit));
    text.extend(limit.source.as_ref().map(source));
    Labelled::new(label, text)
}

fn found(limit: &LimitResult) -> String {
    let when = limit.within.map_or_else(|| "At isolation".to_string(), |t| format!("At {}", whole(t)));
    let figures = format!("{when}: up to {}, {}, {}", up(limit.voltage), up(limit.charge), up(limit.energy));
    match (limit.met, limit.holds_from) {
        (None, Some(from)) => format!("{figures}; reached from {} on, the time to keep.", time(from)),
        (None, None) => format!("{figures}. A waiting time alone: only a procedure can keep it."),
        (Some(_), Some(from)) => format!("{figures}; holds from {} on.", time(from)),
        (Some(_), None) => format!("{figures}; never holds for good."),
    }
}

fn single_fault(limit: &LimitResult) -> Option<String> {
    let asked = if limit.single_fault_asked { "asked for, so it decides" } else { "not asked for" };
    let text = match (limit.single_fault_met?, &limit.single_fault_missed_by) {
        (true, _) => format!("With any one part failed: met ({asked})."),
        (false, Some(fault)) => format!("With one part failed: NOT MET, first by {fault} ({asked})."),
        (false, None) => format!("With one part failed: NOT MET ({asked})."),
    };
    Some(text)
}

fn source(source: &LimitSource) -> String {
    let LimitSource { document, clause, edition, seen } = source;
    // Some documents carry their edition in their number.
    let edition = edition.as_ref().filter(|e| !document.contains(e.as_str()));
    let edition = edition.map_or_else(String::new, |e| format!(" ({e})"));
    format!("{document}{edition}, {clause}; seen: {seen}; check the edition in force.")
}

/// Ends a text with a full stop, once.
fn sentence(text: &str) -> String {
    let text = text.trim_end();
    if text.ends_with('.') { text.into() } else { format!("{text}.") }
}
