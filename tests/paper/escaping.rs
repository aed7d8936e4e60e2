//! Nothing from a bank file becomes markup, breaks a table or runs off the paper, whatever stands in it.

use crate::{all, joined, sheet, with_bank};
use scraper::Html;

/// Markup that would show itself as an element, close what it stands in, or run.
const MARKUP: &str = "</style></title><b data-x='1'>\"&amp;<script>alert(1)</script>{}|`*_";

/// A word of 90 letters that has no place to break.
fn unbroken(letter: &str) -> String {
    letter.repeat(90)
}

/// A bank in which every text is `in_all` with a number, so that ids stay different.
fn bank(in_all: &dyn Fn(u32) -> String) -> String {
    let text = |n: u32| format!("\"{}\"", in_all(n).replace('\\', "\\\\").replace('"', "\\\""));
    let (p, m, n) = (text(1), text(2), text(3));
    let (c1, c2, r1, r2, t1, st1) = (text(4), text(5), text(6), text(7), text(8), text(9));
    format!(
        "ebbvolt: 1\ntag: {}\ntitle: {}\nlocation: {}\nprepared_by: {}\nrevision: {}\nnotes: {}\n\
         touch_voltage: 50 V\ncharged_to: {{nominal: 565 V, highest: 750 V}}\nterminals: [{p}, {n}]\n\
         capacitors:\n  - {{id: {c1}, value: 3300 uF, tolerance: 20 %, across: [{p}, {m}]}}\n  \
         - {{id: {c2}, value: 3300 uF, tolerance: 20 %, across: [{m}, {n}]}}\n\
         resistors:\n  - {{id: {r1}, role: balancing, value: 33 kohm, tolerance: 5 %, across: [{p}, {m}]}}\n  \
         - {{id: {r2}, role: balancing, value: 33 kohm, tolerance: 5 %, across: [{m}, {n}]}}\n  \
         - {{id: {t1}, role: tool, value: 1 kohm, tolerance: 5 %, across: [{p}, {n}]}}\n  \
         - {{id: {st1}, role: strap, value: 10 mohm, across: [{p}, {n}]}}\n\
         limits: [{{id: {}, voltage: 50 V, within: 5 min}}]\n\
         procedure:\n  - {{step: {}, for: 60 s, measure: [[{p}, {m}]], hold: {{below: 700 V, at: [{p}, {m}]}}}}\n  \
         - {{step: {}, connect: [{t1}], for: 60 s}}\n  - {{step: {}, connect: [{st1}], for: 60 s, touch: true}}\n",
        text(10),
        text(11),
        text(12),
        text(13),
        text(14),
        text(15),
        text(16),
        text(17),
        text(18),
        text(19),
    )
}

fn hostile() -> String {
    bank(&|n| format!("{MARKUP}{n}"))
}

#[test]
fn markup_in_every_text_stays_text() {
    let html = sheet(&hostile());
    let page = Html::parse_document(&html);
    assert!(all(&page, "script, b, [data-x]").is_empty());
    assert_eq!(all(&page, "style").len(), 1);
    // A browser shows what the file says, character by character; the style and the titles were not ended early.
    let body = joined(all(&page, "body")[0]);
    for n in 1..=19 {
        assert!(body.contains(&format!("{MARKUP}{n}")), "text {n}");
    }
    let title = joined(all(&page, "title")[0]);
    assert!(title.contains(MARKUP), "{title}");
    // Apart from a browser's reading: no tag in the bytes that the tool does not write itself.
    assert!(!html.contains("<script") && !html.contains("<b "));
}

#[test]
fn markup_in_every_text_stays_text_in_drawings() {
    for words in [&["label", "-", "--size", "400x300mm"][..], &["trace", "-", "--format", "svg"]] {
        let printed = with_bank(words, &hostile());
        let drawing =
            roxmltree::Document::parse(&printed.out).unwrap_or_else(|e| panic!("{words:?}: {e} {}", printed.err));
        let known = ["svg", "g", "title", "desc", "rect", "path", "circle", "text", "line", "polyline", "polygon"];
        for node in drawing.descendants().filter(roxmltree::Node::is_element) {
            assert!(known.contains(&node.tag_name().name()), "{words:?}: {node:?}");
        }
    }
}

#[test]
fn markup_in_every_text_stays_text_in_markdown() {
    let markdown = with_bank(&["sheet", "-", "--format", "markdown"], &hostile()).out;
    assert!(!markdown.contains("<script>") && markdown.contains("\\<script\\>"));
}

#[test]
fn long_words_can_be_broken_wherever_they_stand() {
    let html = sheet(&bank(&|n| format!("{}{n}", unbroken("W"))));
    let page = Html::parse_document(&html);
    // In tables no run of letters without a place to break is longer than a name that fits; elsewhere the style allows
    // a break anywhere.
    for cell in all(&page, "td, th") {
        for piece in cell.text() {
            let longest = piece.split_whitespace().map(|word| word.chars().count()).max().unwrap_or(0);
            assert!(longest <= 18, "{piece}");
        }
    }
    assert!(html.contains("overflow-wrap: anywhere"));
    let plain = with_bank(&["sheet", "-", "--format", "text"], &bank(&|n| format!("{}{n}", unbroken("x"))));
    assert!(plain.out.lines().all(|line| line.chars().count() <= 80));
    let label = with_bank(&["label", "-"], &bank(&|n| format!("{}{n}", unbroken("x"))));
    assert_ne!(label.status, 3, "{}", label.err);
}

#[test]
fn a_csv_cell_with_commas_and_quotes_is_one_cell() {
    let csv = with_bank(&["trace", "-", "--format", "csv", "--times", "0s"], &bank(&|n| format!("a,\"b\"{n}"))).out;
    let head = csv.lines().next().expect("a line of headings");
    assert!(head.contains("\"a,\"\"b\"\"1 - a,\"\"b\"\"3 nominal_v\""), "{head}");
}
