//! Results as bytes: text, Markdown, JSON, CSV. Each is a function from a result to a string; nothing is computed
//! here, only chosen, ordered, rounded in the cautious direction and worded.

mod block;
mod findings;
mod html;
mod json;
mod label;
mod limits;
mod markdown;
mod paper;
mod plan;
mod plot;
mod sheet;
mod size;
mod text;
mod words;

#[cfg(test)]
mod sample;
#[cfg(test)]
mod tests;

pub use findings::findings_text;
pub use json::{NotFinite, check_finite, plan_json};
pub use label::{LabelError, LabelSize, label_svg, labels_page_svg};
pub use limits::{limits_csv, limits_json, limits_markdown, limits_text};
pub use markdown::plan_markdown;
pub use plot::{trace_csv, trace_json, trace_svg, trace_text};
pub use sheet::{Paper, Sheet, sheet_html, sheet_markdown, sheet_text};
pub use size::{SizeReport, size_bleeder, size_json};
pub use text::{message_text, plan_text};
