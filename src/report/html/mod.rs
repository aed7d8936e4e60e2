//! A document as one HTML file: no script, no other file, made for print.

mod style;

use super::block::{Block, Grid, Labelled, LargeFigure, Picture, Side, Step};
use super::sheet::Paper;
use super::words::clean;
use maud::{DOCTYPE, Markup, PreEscaped, html};

/// What a document is beside its blocks.
pub(super) struct Page {
    /// The title of the file.
    pub title: String,
    /// What stands at the foot of every page, so that a loose one can be told.
    pub foot: String,
    /// The paper.
    pub paper: Paper,
}

/// Words that stand on a signal word panel.
const SIGNALS: [(&str, &str); 3] = [("DANGER", "danger"), ("WARNING", "warning"), ("CAUTION", "caution")];

/// A whole document.
pub(super) fn document(page: &Page, blocks: &[Block]) -> String {
    // What stands before the first section is the head; each section is an element of its own.
    let starts: Vec<usize> =
        blocks.iter().enumerate().filter(|(_, b)| matches!(b, Block::Section(_))).map(|(i, _)| i).collect();
    let first = starts.first().copied().unwrap_or(blocks.len());
    let ends = starts.iter().skip(1).copied().chain([blocks.len()]);
    let markup = html! {
        (DOCTYPE)
        html lang="en" {
            head {
                meta charset="utf-8";
                meta name="viewport" content="width=device-width, initial-scale=1";
                title { (page.title) }
                style { (PreEscaped(style::sheet(page))) }
            }
            body {
                main {
                    header { @for block in &blocks[..first] { (part(block)) } }
                    @for (start, end) in starts.iter().copied().zip(ends) {
                        section class=(section_class(&blocks[start])) { @for block in &blocks[start..end] { (part(block)) } }
                    }
                }
            }
        }
    };
    let mut text = markup.into_string();
    text.push('\n');
    text
}

/// How a section is set: short ones are kept on one page, the calculation stands in two columns.
fn section_class(first: &Block) -> &'static str {
    const SHORT: [&str; 8] = [
        "Identification",
        "What the bank holds",
        "Who may do this",
        "What is needed",
        "Isolation and lockout",
        "Before anyone touches: prove, test, prove",
        "About this plan",
        "Signatures",
    ];
    match first {
        Block::Section("Working") => "columns",
        // What introduces steps or plots stays with the first of them.
        Block::Section("The steps" | "Voltage against time") => "introduced",
        Block::Section(heading) if SHORT.contains(heading) => "short",
        _ => "long",
    }
}

fn part(block: &Block) -> Markup {
    match block {
        Block::Title { title, under } => html! {
            @for line in under { p.kind { (clean(line)) } }
            h1 { (clean(title)) }
        },
        Block::Stop { word, text } => html! {
            div.stop { p.word { (word) } @for line in text { p { (clean(line)) } } }
        },
        Block::Section(heading) => html! { h2 { (heading) } },
        Block::Part(heading) => html! { h3 { (clean(heading)) } },
        Block::Paragraph(text) => html! { p { (clean(text)) } },
        Block::Labelled(items) => labelled(items),
        Block::Framed(items) => html! { div.framed { (labelled(items)) } },
        Block::List(items) => html! { ul { @for item in items { li { (clean(item)) } } } },
        Block::Formula(formula) => html! { p.formula { (clean(formula)) } },
        Block::Table(grid) => table(grid),
        Block::Large(figures) => large(figures),
        Block::Ticks(acts) => html! {
            ul.ticks { @for act in acts { li { (tick()) span { (clean(act)) } } } }
        },
        Block::Blanks(labels) => html! {
            div.blanks { @for label in labels { p { span.label { (clean(label)) } span.line {} } } }
        },
        Block::Step(entry) => step(entry),
        Block::Plot(picture) => plot(picture),
        Block::Signatures(roles) => html! {
            table.signatures {
                thead { tr { @for head in ["Who", "Name", "Signature", "Date"] { th scope="col" { (head) } } } }
                tbody { @for role in roles { tr { th scope="row" { (role) } td {} td {} td {} } } }
            }
        },
    }
}

/// A box to tick; a reader of the screen hears what it is.
fn tick() -> Markup {
    html! { span.tick role="img" aria-label="box to tick" {} }
}

/// Labels with their paragraphs; signal words stand on panels of their own.
fn labelled(items: &[Labelled]) -> Markup {
    let signal = |item: &Labelled| SIGNALS.iter().find(|(word, _)| *word == item.label);
    let mut groups: Vec<&[Labelled]> = Vec::new();
    let mut rest = items;
    while let Some(item) = rest.first() {
        let length = match signal(item) {
            Some(_) => 1,
            None => rest.iter().take_while(|item| signal(item).is_none()).count(),
        };
        let (group, others) = rest.split_at(length);
        groups.push(group);
        rest = others;
    }
    html! {
        @for group in groups {
            @if let Some((word, class)) = group.first().and_then(signal) {
                div class=(format!("panel {class}")) {
                    p.word { (triangle()) (word) }
                    div.said { @for item in group { @for line in &item.text { p { (clean(line)) } } } }
                }
            } @else {
                dl {
                    @for item in group {
                        div {
                            dt { (clean(&item.label)) }
                            dd { @for line in &item.text { p { (clean(line)) } } }
                        }
                    }
                }
            }
        }
    }
}

/// The general warning triangle beside a signal word; it says nothing that the word does not.
fn triangle() -> Markup {
    html! {
        svg.triangle viewBox="0 0 24 22" aria-hidden="true" focusable="false" {
            path d="M12 1 L23.5 21 L0.5 21 Z" {}
            rect x="11" y="8" width="2" height="7" {}
            circle cx="12" cy="17.6" r="1.3" {}
        }
    }
}

fn large(figures: &[LargeFigure]) -> Markup {
    html! {
        dl.large {
            @for figure in figures {
                div {
                    dt { (figure.label) }
                    dd { span.figure { (clean(&figure.figure)) } span.under { (clean(&figure.under)) } }
                }
            }
        }
    }
}

fn step(entry: &Step) -> Markup {
    html! {
        div.step {
            h3 { (tick()) (clean(&entry.heading)) }
            (labelled(&entry.items))
            @if !entry.readings.rows.is_empty() { (table(&entry.readings)) }
            p.done {
                @for label in ["Started at", "Done at", "Initials"] { span.label { (label) } span.line {} }
            }
        }
    }
}

fn table(grid: &Grid) -> Markup {
    let class = |i: usize| match grid.columns.get(i).map(|c| c.side) {
        Some(Side::Right) => "figure",
        _ => "name",
    };
    html! {
        table {
            thead { tr { @for (i, column) in grid.columns.iter().enumerate() {
                th scope="col" class=(class(i)) { (column.heading) }
            } } }
            tbody { @for row in &grid.rows { tr { @for (i, cell) in row.iter().enumerate() {
                @if i == 0 {
                    th scope="row" class=(class(i)) { (breakable(cell)) }
                } @else if cell.is_empty() {
                    td.room {}
                } @else {
                    td class=(class(i)) { (breakable(cell)) }
                }
            } } } }
        }
    }
}

/// The text of a cell. A word that is longer than any name people use may be broken, so that it can't push a table
/// off the paper; a shorter one never is.
fn breakable(text: &str) -> Markup {
    const LONGEST_WORD: usize = 18;
    const PIECE: usize = 6;
    let text = clean(text);
    let mut pieces: Vec<String> = vec![String::new()];
    for word in text.split_inclusive(' ') {
        let characters: Vec<char> = word.chars().collect();
        let size = if characters.len() > LONGEST_WORD { PIECE } else { characters.len().max(1) };
        for (i, piece) in characters.chunks(size).enumerate() {
            if i > 0 {
                pieces.push(String::new());
            }
            if let Some(last) = pieces.last_mut() {
                last.extend(piece);
            }
        }
    }
    html! { @for (i, piece) in pieces.iter().enumerate() { @if i > 0 { wbr; } (piece) } }
}

fn plot(picture: &Picture) -> Markup {
    html! {
        figure {
            h3 { (clean(&picture.title)) }
            (PreEscaped(&picture.svg))
            figcaption { (clean(&picture.description)) }
        }
    }
}
