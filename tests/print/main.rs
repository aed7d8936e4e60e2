//! The sheet and the notice as a real browser prints them: every section and step is there, no step is split, every
//! page is numbered, nothing runs into the margins. Needs Chromium and the poppler tools; without them it says what it
//! left out and passes, unless the environment variable PRINT_CHECK is `required`.

mod page;

use ebbvolt::cli::{Terminal, run};
use ebbvolt::data::demo_banks;
use page::{Paper, Printed, Printer};

/// What a command prints for a bank on standard input.
fn made(words: &[&str], bank: &str) -> String {
    let (mut out, mut err) = (Vec::new(), Vec::new());
    let words = std::iter::once(&"ebbvolt").chain(words).map(Into::into);
    run(words, &mut bank.as_bytes(), &mut out, &mut err, Terminal::NONE);
    assert!(!out.is_empty(), "{}", String::from_utf8_lossy(&err));
    String::from_utf8(out).expect("UTF-8")
}

/// Headings of the sheet's own HTML, taken from between its tags: what has to be found again on paper.
fn headings(html: &str, tag: &str) -> Vec<String> {
    let (open, close) = (format!("<{tag}>"), format!("</{tag}>"));
    let pieces = html.split(&open).skip(1).filter_map(|rest| rest.split(&close).next());
    pieces.map(|heading| heading.replace("&amp;", "&").replace('\u{a0}', " ")).collect()
}

fn check(name: &str, html: &str, paper: Paper, printed: &Printed) {
    let what = format!("{name} on {paper:?}");
    assert!(printed.pages.len() >= 4 && printed.pages.len() <= 25, "{what}: {} pages", printed.pages.len());
    let whole = printed.pages.join(" ");
    let mut from = 0;
    for section in headings(html, "h2") {
        let at = whole[from..].find(&section);
        assert!(at.is_some(), "{what}: no section `{section}` after the one before it");
        from += at.unwrap_or(0);
    }
    for (index, page) in printed.pages.iter().enumerate() {
        let number = format!("page {} of {}", index + 1, printed.pages.len());
        assert!(page.contains(&number), "{what}: `{number}` is missing: {page}");
    }
    steps_in_one_piece(&what, printed);
    for (index, page) in printed.words.iter().enumerate() {
        let (width, height) = paper.points();
        for word in page {
            // The margins of the style, 15 mm and more, less a millimetre for what letters reach over their box.
            let inside =
                word.left > 39.0 && word.right < width - 39.0 && word.top > 25.0 && word.bottom < height - 10.0;
            assert!(inside, "{what}, page {}: {word:?}", index + 1);
        }
    }
    assert!(printed.margins_are_white, "{what}: something is drawn in a margin");
    assert!(printed.sizes.iter().all(|size| paper.is(*size)), "{what}: {:?}", printed.sizes);
}

/// Every step begins and ends on one page: its heading, and then the line for its times before the next heading.
fn steps_in_one_piece(what: &str, printed: &Printed) {
    let mut found = 0;
    let total = printed.pages.iter().find_map(|page| page.split("Step 1 of ").nth(1)?.split([',', ' ']).next());
    let Some(total) = total.and_then(|total| total.parse::<usize>().ok()) else { panic!("{what}: no first step") };
    for page in &printed.pages {
        for after in page.split("Step ").skip(1) {
            let is_heading = after.split(' ').nth(1) == Some("of");
            let number: Option<usize> = after.split(' ').next().and_then(|n| n.parse().ok());
            if !is_heading || number != Some(found + 1) {
                continue;
            }
            found += 1;
            assert!(
                after.contains("Started at") && after.contains("Initials"),
                "{what}: step {found} is split: {page}"
            );
        }
    }
    assert_eq!(found, total, "{what}");
}

#[test]
fn the_sheets_of_all_demonstration_banks_print_whole_on_both_papers() {
    let Some(printer) = Printer::find() else { return };
    for (name, bank) in demo_banks() {
        for paper in [Paper::A4, Paper::Letter] {
            let html = made(&["sheet", "-", "--paper", paper.word()], bank);
            check(name, &html, paper, &printer.print(&html, name, paper));
        }
    }
}

#[test]
fn the_head_of_a_table_that_goes_on_is_repeated() {
    let Some(printer) = Printer::find() else { return };
    // Forty bleeders side by side (invented): their tables are longer than a page.
    let parts: Vec<String> = (1..=40)
        .map(|n| format!("  - {{id: RB{n}, role: bleeder, value: {n} Mohm, rating: {{power: 5 W, voltage: 1 kV}}}}"))
        .collect();
    let bank = format!(
        "ebbvolt: 1\ntag: LONG\ntouch_voltage: 50 V\ncharged_to: {{nominal: 500 V, highest: 600 V}}\n\
         capacitors: [{{id: C1, value: 1 uF}}]\nresistors:\n{}\n",
        parts.join("\n")
    );
    let printed = printer.print(&made(&["sheet", "-"], &bank), "long", Paper::A4);
    let pages: Vec<&String> = printed.pages.iter().filter(|page| page.contains("element voltage")).collect();
    assert!(pages.len() >= 2, "the table of ratings goes over pages");
    assert!(pages.iter().all(|page| page.contains("Part Check Found Allowed Margin Verdict")), "{pages:#?}");
}

#[test]
fn long_words_do_not_run_off_the_paper() {
    let Some(printer) = Printer::find() else { return };
    let w = |n: u32| format!("{}{n}", "W".repeat(90));
    let (p, n) = (w(1), w(2));
    let bank = format!(
        "ebbvolt: 1\ntag: {}\ntitle: {}\nlocation: {}\nprepared_by: {}\nrevision: {}\nnotes: {}\n\
         touch_voltage: 50 V\ncharged_to: {{nominal: 565 V, highest: 750 V}}\nterminals: [{p}, {n}]\n\
         capacitors: [{{id: {}, value: 3300 uF, tolerance: 20 %}}]\n\
         resistors:\n  - {{id: {}, role: bleeder, value: 33 kohm, tolerance: 5 %}}\n  \
         - {{id: {}, role: tool, value: 1 kohm}}\nlimits: [{{id: {}, voltage: 50 V, within: 5 min}}]\n\
         procedure:\n  - {{step: {}, for: 60 s, measure: [[{p}, {n}]], hold: {{below: 700 V, at: [{p}, {n}]}}}}\n  \
         - {{step: {}, connect: [{}], for: 60 s}}\n",
        w(3),
        w(4),
        w(5),
        w(6),
        w(7),
        w(8),
        w(9),
        w(10),
        w(11),
        w(12),
        w(13),
        w(14),
        w(11),
    );
    let html = made(&["sheet", "-"], &bank);
    let printed = printer.print(&html, "words", Paper::A4);
    assert!(printed.margins_are_white, "something is drawn in a margin");
    let (width, _) = Paper::A4.points();
    for word in printed.words.iter().flatten() {
        assert!(word.left > 39.0 && word.right < width - 39.0, "{word:?}");
    }
}

#[test]
fn no_text_of_a_notice_runs_over_its_edge() {
    let Some(printer) = Printer::find() else { return };
    for (name, bank) in demo_banks() {
        for (size, width) in [("120x80mm", 120.0), ("60x90mm", 60.0)] {
            let svg = made(&["label", "-", "--size", size], bank);
            let html =
                format!("<!DOCTYPE html><style>@page {{ size: A4; margin: 0 }} body {{ margin: 0 }}</style>{svg}");
            let printed = printer.print(&html, &format!("notice-{name}"), Paper::A4);
            let edge = (width - 1.0) / 25.4 * 72.0;
            let words: Vec<_> = printed.words.iter().flatten().collect();
            assert!(words.len() > 20, "{name} {size}: {words:?}");
            assert!(words.iter().all(|word| word.right < edge && word.left > 0.0), "{name} {size}: {words:?}");
        }
    }
}
