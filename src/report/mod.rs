//! Results as bytes: text, Markdown, JSON, CSV. Each is a function from a result to a string; nothing is computed
//! here, only chosen, ordered, rounded in the cautious direction and worded.

mod block;
mod findings;
mod json;
mod limits;
mod markdown;
mod plan;
mod size;
mod text;
mod words;

#[cfg(test)]
mod sample;
#[cfg(test)]
mod tests;

pub use findings::findings_text;
pub use json::{NotFinite, check_finite, plan_json};
pub use limits::{limits_csv, limits_json, limits_markdown, limits_text};
pub use markdown::plan_markdown;
pub use size::{size_json, size_markdown, size_text};
pub use text::{message_text, plan_text};
