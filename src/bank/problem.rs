//! What is wrong with a description, and where in it; the file layer turns the path into a line and a column.

use std::fmt;

/// One segment of a path into a bank file.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Segment {
    /// A key of a mapping.
    Key(&'static str),
    /// An entry of a list, from 0.
    Index(usize),
}

impl From<&'static str> for Segment {
    fn from(key: &'static str) -> Self {
        Segment::Key(key)
    }
}

impl From<usize> for Segment {
    fn from(index: usize) -> Self {
        Segment::Index(index)
    }
}

/// A path into a bank file, such as `capacitors[0].across[1]`. Its keys are those of the file.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Path(Vec<Segment>);

impl Path {
    /// The path of a top-level key.
    pub fn of(key: &'static str) -> Self {
        Path(vec![Segment::Key(key)])
    }

    /// The path one segment further down.
    #[must_use]
    pub fn then(&self, segment: impl Into<Segment>) -> Self {
        let mut longer = self.clone();
        longer.0.push(segment.into());
        longer
    }

    /// Its segments, from the top.
    pub fn segments(&self) -> &[Segment] {
        &self.0
    }
}

impl fmt::Display for Path {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (i, segment) in self.0.iter().enumerate() {
            match segment {
                Segment::Key(key) if i == 0 => f.write_str(key)?,
                Segment::Key(key) => write!(f, ".{key}")?,
                Segment::Index(index) => write!(f, "[{index}]")?,
            }
        }
        Ok(())
    }
}

/// One reason why a description is no bank.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Problem {
    /// Stable name in kebab-case.
    pub code: &'static str,
    /// Where in the description.
    pub path: Path,
    /// The other place that it is about, where there is one: the first of two that collide.
    pub other: Option<Path>,
    /// What is wrong.
    pub text: String,
    /// What to write instead.
    pub help: Option<String>,
}

impl fmt::Display for Problem {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: {}", self.path, self.text)?;
        if let Some(other) = &self.other {
            write!(f, " (see {other})")?;
        }
        self.help.as_ref().map_or(Ok(()), |help| write!(f, "; {help}"))
    }
}

impl std::error::Error for Problem {}

/// More problems than this are counted only: nobody reads them, and a hostile file could make millions.
const KEPT: usize = 200;

/// Where the checks put what they find.
#[derive(Debug, Default)]
pub(super) struct Sink {
    problems: Vec<Problem>,
    dropped: usize,
}

impl Sink {
    /// Adds a problem that is about a second place as well.
    pub(super) fn push_pair<H: Into<Option<String>>>(
        &mut self,
        code: &'static str,
        path: Path,
        other: Path,
        words: impl FnOnce() -> (String, H),
    ) {
        let before = self.problems.len();
        self.push(code, path, words);
        if let Some(problem) = self.problems.get_mut(before) {
            problem.other = Some(other);
        }
    }

    /// Adds a problem; text and help are made only where it is kept.
    pub(super) fn push<H: Into<Option<String>>>(
        &mut self,
        code: &'static str,
        path: Path,
        words: impl FnOnce() -> (String, H),
    ) {
        if self.problems.len() >= KEPT {
            self.dropped += 1;
            return;
        }
        let (text, help) = words();
        self.problems.push(Problem { code, path, other: None, text, help: help.into() });
    }

    /// The problems that were kept, and how many more there were.
    pub(super) fn into_parts(self) -> (Vec<Problem>, usize) {
        (self.problems, self.dropped)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_path_reads_as_people_write_it() {
        let path = Path::of("capacitors").then(0).then("across").then(1);
        assert_eq!(path.to_string(), "capacitors[0].across[1]");
    }

    #[test]
    fn problems_beyond_the_cap_are_counted_and_not_worded() {
        let mut sink = Sink::default();
        for i in 0..KEPT + 5 {
            sink.push("x", Path::of("tag"), || (if i < KEPT { String::new() } else { panic!("worded") }, None));
        }
        let (problems, dropped) = sink.into_parts();
        assert_eq!((problems.len(), dropped), (KEPT, 5));
    }
}
