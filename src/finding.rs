//! Findings: what the tool noticed about a bank or its file, with a stable code and a place.
//!
//! A finding is data; nothing here prints. Rooms above push findings into a [`Findings`] list.

use serde::Serialize;

/// How much a finding matters. The words are those of ISO 3864 and ANSI Z535 where a person can be hurt.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Severity {
    /// The input can't be used.
    Error,
    /// If not avoided, death or serious injury will follow.
    Danger,
    /// If not avoided, death or serious injury could follow.
    Warning,
    /// If not avoided, minor injury or damage could follow.
    Caution,
    /// Worth knowing; nothing to avoid.
    Note,
}

impl Severity {
    /// The signal word, in capitals.
    pub fn word(self) -> &'static str {
        match self {
            Severity::Error => "ERROR",
            Severity::Danger => "DANGER",
            Severity::Warning => "WARNING",
            Severity::Caution => "CAUTION",
            Severity::Note => "NOTE",
        }
    }
}

/// A place in a text file. Lines and columns count from 1, columns in characters.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Place {
    /// Name of the file as it was given, or `standard input`. It is not written to JSON: the same bytes have to give
    /// the same result wherever they lie.
    #[serde(skip)]
    pub file: String,
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
    /// How many characters of the line are meant (at least 1).
    pub length: usize,
    /// The line itself, without its end; of a very long line, the part around the column.
    #[serde(skip)]
    pub source: String,
    /// The column of the first character of `source`: 1, unless the line was cut.
    #[serde(skip)]
    pub source_column: usize,
}

/// One finding.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Finding {
    /// How much it matters.
    pub severity: Severity,
    /// Stable name in kebab-case, for scripts.
    pub code: &'static str,
    /// What was found, with figures, in one or two sentences.
    pub text: String,
    /// What to do or write instead, where there is something.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub help: Option<String>,
    /// Where in the file, if it has a place there.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub place: Option<Place>,
}

impl Finding {
    /// A finding without help and place.
    pub fn new(severity: Severity, code: &'static str, text: impl Into<String>) -> Self {
        Finding { severity, code, text: text.into(), help: None, place: None }
    }

    /// The same finding with advice on what to do.
    #[must_use]
    pub fn with_help(mut self, help: impl Into<String>) -> Self {
        self.help = Some(help.into());
        self
    }

    /// The same finding at a place.
    #[must_use]
    pub fn at(mut self, place: Place) -> Self {
        self.place = Some(place);
        self
    }
}

/// A list of findings that many hands add to.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Findings(Vec<Finding>);

impl Findings {
    /// An empty list.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds one finding.
    pub fn push(&mut self, finding: Finding) {
        self.0.push(finding);
    }

    /// Adds a finding without help and place.
    pub fn add(&mut self, severity: Severity, code: &'static str, text: impl Into<String>) {
        self.push(Finding::new(severity, code, text));
    }

    /// All findings in the order in which they were added.
    pub fn as_slice(&self) -> &[Finding] {
        &self.0
    }

    /// True where at least one finding is an error.
    pub fn has_errors(&self) -> bool {
        self.0.iter().any(|f| f.severity == Severity::Error)
    }

    /// The findings, the gravest first; findings of one severity keep their order.
    pub fn into_sorted(mut self) -> Vec<Finding> {
        self.0.sort_by_key(|f| f.severity);
        self.0
    }
}

impl IntoIterator for Findings {
    type Item = Finding;
    type IntoIter = std::vec::IntoIter<Finding>;
    fn into_iter(self) -> Self::IntoIter {
        self.0.into_iter()
    }
}

impl Extend<Finding> for Findings {
    fn extend<T: IntoIterator<Item = Finding>>(&mut self, iter: T) {
        self.0.extend(iter);
    }
}
