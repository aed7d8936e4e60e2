//! What is wrong with an input, for the person who wrote it: the place, the problem, the line with the place marked,
//! and what to write instead.

use super::text::wrap;
use super::words::{NO_BREAK, clean};
use crate::finding::{Finding, Findings, Place, Severity};
use unicode_width::UnicodeWidthChar;

/// Columns in front of a text that belongs to a finding.
const INDENT: &str = "    ";

/// Findings about an input, the errors first and then in the order of the file, each with its place.
///
/// `width` is the number of columns to stay within, taken as at least 60 and at most 120; only a name of a file or a
/// word that has to be copied as it stands may be broken.
pub fn findings_text(findings: &Findings, width: usize) -> String {
    let width = width.clamp(60, 120);
    let mut sorted: Vec<&Finding> = findings.as_slice().iter().collect();
    sorted.sort_by_key(|f| (f.severity, f.place.as_ref().map(|p| (p.line, p.column))));
    let mut lines: Vec<String> = sorted.iter().flat_map(|finding| one(finding, width)).collect();
    lines.push(summary(&sorted));
    let lines: String = lines.iter().flat_map(|line| [line.trim_end(), "\n"]).collect();
    lines.replace(NO_BREAK, " ")
}

fn summary(findings: &[&Finding]) -> String {
    match findings.iter().filter(|f| f.severity == Severity::Error).count() {
        1 => "1 error. Nothing was planned.".into(),
        n => format!("{n} errors. Nothing was planned."),
    }
}

fn one(finding: &Finding, width: usize) -> Vec<String> {
    let word = finding.severity.word();
    let text = format!("{} [{}]", finding.text, finding.code);
    let indented = |text: &str| -> Vec<String> {
        wrap(text, width - INDENT.len()).iter().map(|line| format!("{INDENT}{line}")).collect()
    };
    let mut lines = Vec::new();
    match &finding.place {
        Some(place) => {
            let Place { file, line, column, .. } = place;
            lines.extend(wrap(&format!("{word} in {}:{line}:{column}", clean(file)), width));
            lines.extend(indented(&text));
            lines.extend(excerpt(place, width));
        }
        None => lines.extend(wrap(&format!("{word}: {text}"), width)),
    }
    if let Some(help) = &finding.help {
        lines.extend(indented(&format!("Instead: {help}")));
    }
    lines.push(String::new());
    lines
}

/// The line with its number, and a second one that marks the place. A line that is too long is shown around the place.
fn excerpt(place: &Place, width: usize) -> Vec<String> {
    let shown = clean(&place.source);
    if shown.trim().is_empty() {
        return Vec::new();
    }
    let head = format!("{INDENT}{:>5} : ", place.line);
    let room = width - head.len();
    let characters: Vec<char> = shown.chars().collect();
    // The source may be the part of a very long line around the place.
    let at = place.column.saturating_sub(place.source_column.max(1)).min(characters.len());
    let columns = |part: &[char]| part.iter().map(|c| c.width().unwrap_or(0)).sum::<usize>();
    // Keep what stands before the place as long as there is room for the place itself.
    let mut from = 0;
    while from < at && columns(&characters[from..at]) > room / 2 && columns(&characters[from..]) > room {
        from += 1;
    }
    let mut to = characters.len();
    while columns(&characters[from..to]) > room {
        to -= 1;
    }
    let text: String = characters[from..to].iter().collect();
    let marked = &characters[at..(at + place.length.max(1)).min(to.max(at))];
    let before = " ".repeat(head.len() + columns(&characters[from..at]));
    vec![format!("{head}{text}"), format!("{before}{}", "~".repeat(columns(marked).max(1)))]
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(line: usize, column: usize, length: usize, source: &str) -> Place {
        Place { file: "bank.yaml".into(), line, column, length, source: source.into(), source_column: 1 }
    }

    #[test]
    fn an_error_shows_its_line_with_the_place_marked_and_the_way_out() {
        let mut findings = Findings::new();
        findings.push(
            Finding::new(Severity::Error, "wrong-unit", "a capacitance is due here, and `3300 V` is a voltage")
                .with_help("write a capacitance such as `3300 uF`")
                .at(at(12, 12, 6, "    value: 3300 V")),
        );
        assert_eq!(
            findings_text(&findings, 80),
            "ERROR in bank.yaml:12:12\n    a capacitance is due here, and `3300 V` is a voltage [wrong-unit]\n       \
             12 :     value: 3300 V\n                       ~~~~~~\n    Instead: write a capacitance such as `3300 uF`\n\n\
             1 error. Nothing was planned.\n"
        );
    }

    #[test]
    fn a_long_line_is_shown_around_its_place_and_nothing_reaches_the_terminal_raw() {
        let source = format!("{}\u{1b}[2Jx{}", "泵".repeat(90), "z".repeat(90));
        let mut findings = Findings::new();
        findings.push(Finding::new(Severity::Error, "x", "bad").at(at(1, 95, 1, &source)));
        let text = findings_text(&findings, 80);
        assert!(text.lines().all(|line| unicode_width::UnicodeWidthStr::width(line) <= 80), "{text}");
        assert!(!text.contains('\u{1b}') && text.contains("[2Jx"), "{text}");
    }

    #[test]
    fn a_place_past_the_end_of_its_line_is_no_trouble() {
        let mut findings = Findings::new();
        findings.push(Finding::new(Severity::Error, "x", "bad").at(at(1, 500, 900, "short")));
        findings.push(Finding::new(Severity::Error, "x", "bad").at(at(0, 0, 0, "")));
        assert!(findings_text(&findings, 10).contains("2 errors"));
    }
}
