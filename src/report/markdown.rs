//! A document as Markdown, for a work order or a repository.

use super::block::{Block, Grid, Labelled, LargeFigure, Side};
use super::paper;
use super::plan;
use super::words::{NO_BREAK, clean};
use crate::plan::Plan;

/// A plan as Markdown, with the same content and order as the text.
pub fn plan_markdown(plan: &Plan) -> String {
    render(&plan::document(plan))
}

/// Any document as Markdown.
pub(super) fn render(blocks: &[Block]) -> String {
    let parts: Vec<String> = blocks.iter().map(part).collect();
    let mut text = parts.join("\n\n").replace(NO_BREAK, " ");
    text.push('\n');
    text
}

fn part(block: &Block) -> String {
    match block {
        Block::Title { title, under } => {
            let lines: Vec<String> = under.iter().map(|line| escape(line)).collect();
            format!("# {}\n\n{}", escape(title), lines.join("  \n")).trim_end().to_string()
        }
        Block::Stop { word, text } => {
            let lines: Vec<String> = text.iter().map(|line| escape(line)).collect();
            format!("**{word}.** {}", lines.join(" "))
        }
        Block::Section(heading) => format!("## {}", escape(heading)),
        Block::Part(heading) => format!("### {}", escape(heading)),
        Block::Paragraph(text) => escape(text),
        Block::Labelled(items) => labelled(items).join("\n"),
        Block::Framed(items) => {
            labelled(items).iter().map(|line| format!("> {}", &line[2..])).collect::<Vec<_>>().join("\n>\n")
        }
        Block::List(items) => items.iter().map(|item| format!("- {}", escape(item))).collect::<Vec<_>>().join("\n"),
        Block::Formula(formula) => format!("    {}", clean(formula)),
        Block::Table(grid) => table(grid),
        Block::Large(figures) => {
            let line = |f: &LargeFigure| {
                format!("> {}: **{}** {}", escape(f.label), escape(&f.figure), escape(&f.under)).trim_end().to_string()
            };
            figures.iter().map(line).collect::<Vec<_>>().join("\n>\n")
        }
        Block::Ticks(acts) => acts.iter().map(|act| format!("- [ ] {}", escape(act))).collect::<Vec<_>>().join("\n"),
        Block::Blanks(labels) => {
            let line = |label: &String| format!("- {} {}", escape(label), escape(paper::LINE));
            labels.iter().map(line).collect::<Vec<_>>().join("\n")
        }
        Block::Step(step) => {
            let mut parts = vec![format!("### {}", escape(&step.heading)), labelled(&step.items).join("\n")];
            if !step.readings.rows.is_empty() {
                parts.push(table(&paper::with_room(&step.readings)));
            }
            parts.push(format!("- [ ] {}", escape(&paper::done())));
            parts.join("\n\n")
        }
        Block::Plot(picture) => format!("### {}\n\n{}", escape(&picture.title), escape(&picture.description)),
        Block::Signatures(roles) => table(&paper::signatures(roles)),
    }
}

fn labelled(items: &[Labelled]) -> Vec<String> {
    let line = |item: &Labelled| {
        let text: Vec<String> = item.text.iter().map(|text| escape(text)).collect();
        format!("- **{}**: {}", escape(&item.label), text.join(" "))
    };
    items.iter().map(line).collect()
}

fn table(grid: &Grid) -> String {
    let row = |cells: Vec<String>| format!("| {} |", cells.join(" | "));
    let mut lines = vec![
        row(grid.columns.iter().map(|c| escape(c.heading)).collect()),
        row(grid.columns.iter().map(|c| if c.side == Side::Right { "--:" } else { ":--" }.into()).collect()),
    ];
    lines.extend(grid.rows.iter().map(|cells| row(cells.iter().map(|cell| escape(cell)).collect())));
    lines.join("\n")
}

/// Text that Markdown shows as it stands.
fn escape(text: &str) -> String {
    let mut out = String::new();
    for c in clean(text).chars() {
        if matches!(c, '\\' | '`' | '*' | '_' | '[' | ']' | '<' | '>' | '|' | '#' | '~') {
            out.push('\\');
        }
        out.push(c);
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_name_cannot_break_out_of_its_cell() {
        let mut grid = Grid::new(&[("Part", Side::Left), ("Found", Side::Right)]);
        grid.row(["R1|<b>".into(), "5 V".into()]);
        assert_eq!(table(&grid), "| Part | Found |\n| :-- | --: |\n| R1\\|\\<b\\> | 5 V |");
    }
}
