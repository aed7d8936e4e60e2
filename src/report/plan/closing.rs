//! The end of a plan: findings, what it rests on, and who decides.

use super::super::block::{Block, Labelled};
use crate::finding::Finding;
use crate::plan::Plan;

/// Findings, the gravest first, and the assumptions.
pub(in crate::report) fn findings(plan: &Plan) -> Vec<Block> {
    let mut blocks = Vec::new();
    if !plan.findings.is_empty() {
        let mut sorted: Vec<&Finding> = plan.findings.iter().collect();
        sorted.sort_by_key(|finding| finding.severity);
        blocks.push(Block::Section("Findings"));
        blocks.push(Block::Labelled(sorted.into_iter().map(finding).collect()));
    }
    if !plan.assumptions.is_empty() {
        blocks.push(Block::Section("Assumptions"));
        blocks.push(Block::List(plan.assumptions.clone()));
    }
    if let Some(notes) = &plan.bank.notes {
        blocks.push(Block::Section("Notes of the file"));
        blocks.push(Block::Paragraph(notes.clone()));
    }
    blocks
}

fn finding(finding: &Finding) -> Labelled {
    // The line but not the file's name: the same bytes have to give the same plan wherever they lie.
    let place = finding.place.as_ref().map_or_else(String::new, |place| format!(", line {}", place.line));
    let mut text = vec![format!("{} [{}{place}]", finding.text, finding.code)];
    text.extend(finding.help.as_ref().map(|help| format!("To do: {help}")));
    Labelled::new(finding.severity.word(), text)
}

/// Which tool and input made this, how the worst cases were found, and who decides.
pub(in crate::report) fn footer(plan: &Plan) -> Vec<Block> {
    let text = "Times run from isolation. Times, voltages, currents, energies and powers are rounded up, allowed values \
                and margins down. Local electrical codes, the equipment maker's instructions and qualified persons \
                decide; this plan overrides none of them.";
    let mut blocks = vec![Block::Section("About this plan"), Block::Paragraph(text.into())];
    if !plan.worst_case_search.is_empty() {
        blocks.push(Block::Paragraph(format!("Worst cases: {}", plan.worst_case_search)));
    }
    blocks.push(Block::Paragraph(format!("ebbvolt {}; SHA-256 of the input:", plan.ebbvolt.version)));
    blocks.push(Block::Formula(plan.bank.input_sha256.clone()));
    blocks
}
