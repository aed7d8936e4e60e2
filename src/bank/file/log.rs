//! The errors of a file, in the order of its lines, and not more of them than people read.

use crate::finding::{Finding, Findings, Severity};

/// So many errors are reported; one more line says how many there were beyond.
pub(super) const REPORTED: usize = 50;

/// So many are kept to be put in order; a hostile file could make millions.
const KEPT: usize = 1000;

/// Errors as they are found.
#[derive(Debug, Default)]
pub(super) struct Log {
    errors: Vec<Finding>,
    dropped: usize,
}

impl Log {
    pub(super) fn push(&mut self, error: Finding) {
        self.push_with(|| error);
    }

    /// Adds an error that is only worded where it is kept.
    pub(super) fn push_with(&mut self, error: impl FnOnce() -> Finding) {
        if self.is_full() {
            self.dropped += 1;
        } else {
            self.errors.push(error());
        }
    }

    /// Counts errors that were found elsewhere and not kept.
    pub(super) fn drop_more(&mut self, count: usize) {
        self.dropped += count;
    }

    /// True where further errors are only counted, so that there is no need to word them.
    pub(super) fn is_full(&self) -> bool {
        self.errors.len() >= KEPT
    }

    pub(super) fn is_empty(&self) -> bool {
        self.errors.is_empty() && self.dropped == 0
    }

    /// The errors in the order of the file, at most [`REPORTED`] and a line that counts the others.
    pub(super) fn into_findings(mut self) -> Findings {
        self.errors.sort_by_key(position);
        // An alias brings the same lines to several places; what is wrong in them is said once.
        self.errors.dedup();
        let more = self.errors.len().saturating_sub(REPORTED) + self.dropped;
        let last = self.errors.get(REPORTED).and_then(|finding| finding.place.clone());
        self.errors.truncate(REPORTED);
        let mut findings = Findings::new();
        findings.extend(self.errors);
        if more > 0 {
            let text = format!("and {more} more errors, which are not listed");
            let mut finding = Finding::new(Severity::Error, "more-errors", text)
                .with_help("correct those above first: many often have one cause");
            finding.place = last;
            findings.push(finding);
        }
        findings
    }
}

/// The key by which findings stand in the order of the file.
pub(super) fn position(finding: &Finding) -> (usize, usize) {
    finding.place.as_ref().map_or((usize::MAX, 0), |place| (place.line, place.column))
}
