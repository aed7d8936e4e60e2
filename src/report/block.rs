//! The pieces that a printed document is made of, before anyone decides how they look.
//!
//! Text and Markdown show the same pieces in the same order, so the two can't come to say different things.

/// One piece of a document.
pub(super) enum Block {
    /// What the document is about, and lines under it.
    Title {
        /// The title.
        title: String,
        /// Lines under it.
        under: Vec<String>,
    },
    /// A heading that stops the reader: nothing that follows may be used without it.
    Stop {
        /// The word.
        word: &'static str,
        /// What it means here.
        text: Vec<String>,
    },
    /// A section's heading.
    Section(&'static str),
    /// A heading inside a section.
    Part(String),
    /// A paragraph.
    Paragraph(String),
    /// Labels, each with what it stands for.
    Labelled(Vec<Labelled>),
    /// The same, set apart as the thing to take away from the page.
    Framed(Vec<Labelled>),
    /// Items without labels.
    List(Vec<String>),
    /// A line to be read as it stands, such as a formula.
    Formula(String),
    /// A table.
    Table(Grid),
    /// The figures that matter most, to be read from a distance.
    Large(Vec<LargeFigure>),
    /// Acts to tick off when they are done.
    Ticks(Vec<String>),
    /// What is to be filled in by hand.
    Blanks(Vec<String>),
    /// A step to work by: it is not split over pages.
    Step(Step),
    /// A plot.
    Plot(Picture),
    /// Rows to be signed.
    Signatures(Vec<&'static str>),
}

/// A figure in large type.
pub(super) struct LargeFigure {
    /// What it is.
    pub label: &'static str,
    /// The figure.
    pub figure: String,
    /// What belongs to it.
    pub under: String,
}

/// A step of a procedure as a person carries it out.
pub(super) struct Step {
    /// Its number and its time.
    pub heading: String,
    /// What to beware of, what to do, when to stop, in this order.
    pub items: Vec<Labelled>,
    /// What is read, with room for what was found; empty where nothing is.
    pub readings: Grid,
}

/// A plot with its text alternative.
pub(super) struct Picture {
    /// What it shows.
    pub title: String,
    /// What can be read from it, for those who can't see it.
    pub description: String,
    /// The SVG element.
    pub svg: String,
}

/// A label and the paragraphs that belong to it.
pub(super) struct Labelled {
    /// The label: a signal word, a verdict or a keyword.
    pub label: String,
    /// Paragraphs.
    pub text: Vec<String>,
}

impl Labelled {
    /// A label with its paragraphs.
    pub fn new(label: impl Into<String>, text: Vec<String>) -> Self {
        Labelled { label: label.into(), text }
    }
}

/// A table: columns with a heading and a side, and rows of as many cells.
pub(super) struct Grid {
    /// Headings.
    pub columns: Vec<Column>,
    /// Rows of cells.
    pub rows: Vec<Vec<String>>,
}

/// A column of a table.
pub(super) struct Column {
    /// Its heading.
    pub heading: &'static str,
    /// Which side its cells stand on.
    pub side: Side,
}

/// Which side of a column its cells stand on.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Side {
    /// Names and words.
    Left,
    /// Figures.
    Right,
}

impl Grid {
    /// A table without rows.
    pub fn new(columns: &[(&'static str, Side)]) -> Self {
        let columns = columns.iter().map(|&(heading, side)| Column { heading, side }).collect();
        Grid { columns, rows: Vec::new() }
    }

    /// Adds a row; missing cells are empty.
    pub fn row(&mut self, cells: impl Into<Vec<String>>) {
        self.rows.push(cells.into());
    }
}
