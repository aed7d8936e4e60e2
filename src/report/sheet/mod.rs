//! The discharge sheet: the plan as a document to print, to carry to the cabinet, to fill in and to sign.

mod before;
mod head;
mod steps;
mod touch;

use super::block::Block;
use super::html::{self, Page};
use super::plan::{closing, limits, ratings, waits, working};
use super::plot;
use super::words::clean;
use super::{markdown, text};
use crate::plan::Plan;

/// The paper that a sheet is printed on, upright.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Paper {
    /// 210 mm by 297 mm.
    #[default]
    A4,
    /// 8.5 in by 11 in.
    Letter,
}

/// What a sheet carries beyond the plan.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Sheet {
    /// The paper; only HTML has one.
    pub paper: Paper,
    /// The date to print; none where nobody gave one, since the same plan has to give the same sheet.
    pub date: Option<String>,
}

/// The sheet as one HTML file that needs nothing else: no script, no other file.
pub fn sheet_html(plan: &Plan, sheet: &Sheet) -> String {
    let bank = &plan.bank;
    let revision =
        bank.revision.as_ref().map_or_else(String::new, |revision| format!(", revision {}", shortened(revision, 8)));
    let hash: String = bank.input_sha256.chars().take(12).collect();
    let page = Page {
        title: format!("Discharge sheet {}", clean(&bank.tag)),
        foot: format!("{}{revision}; input {hash}", shortened(&bank.tag, 18)),
        paper: sheet.paper,
    };
    html::document(&page, &document(plan, sheet))
}

/// The beginning of a name, for a line that can't be broken; the hash beside it tells sheets apart.
fn shortened(name: &str, longest: usize) -> String {
    let name = clean(name);
    if name.chars().count() <= longest {
        return name;
    }
    name.chars().take(longest).chain(['…']).collect()
}

/// The sheet as Markdown.
pub fn sheet_markdown(plan: &Plan, sheet: &Sheet) -> String {
    markdown::render(&document(plan, sheet))
}

/// The sheet as text within `width` columns (taken as at least 60 and at most 120).
pub fn sheet_text(plan: &Plan, sheet: &Sheet, width: usize) -> String {
    text::render(&document(plan, sheet), width)
}

/// The whole sheet, in the order in which it is used: what it is, what it holds, what is needed, the work, and then
/// what a reviewer wants to see behind it.
fn document(plan: &Plan, sheet: &Sheet) -> Vec<Block> {
    let mut blocks = head::blocks(plan, sheet.date.as_deref());
    blocks.extend(before::blocks(plan));
    blocks.extend(steps::blocks(plan));
    blocks.extend(touch::blocks(plan));
    blocks.extend(plot::blocks(plan));
    blocks.extend(limits::blocks(plan));
    blocks.extend(ratings::blocks(plan));
    blocks.extend(waits::blocks(plan));
    blocks.extend(steps::tables(plan));
    blocks.extend(closing::findings(plan));
    blocks.extend(working::blocks(plan));
    blocks.extend(closing::footer(plan));
    blocks.push(Block::Section("Signatures"));
    blocks.push(Block::Signatures(vec!["Prepared by", "Reviewed by", "Carried out by"]));
    blocks
}
