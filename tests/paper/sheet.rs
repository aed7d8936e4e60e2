//! What stands in a sheet.

use crate::{NO_BLEEDER, PLAIN, WITH_STEPS, all, demo_plans, demo_sheets, sheet, text, with_bank};
use ebbvolt::report::{Sheet, sheet_markdown, sheet_text};
use scraper::Html;

/// Sections of a sheet with a procedure, in their order.
const SECTIONS: [&str; 21] = [
    "Identification",
    "What the bank holds",
    "Who may do this",
    "What is needed",
    "Isolation and lockout",
    "The steps",
    "Before anyone touches: prove, test, prove",
    "What comes back",
    "Voltage against time",
    "Limits",
    "Ratings",
    "Resistors, one element, isolation to end of procedure",
    "Waits",
    "Waits with one part failed",
    "What the parts bear in each step",
    "Steps with one part failed",
    "Findings",
    "Assumptions",
    "Working",
    "About this plan",
    "Signatures",
];

#[test]
fn every_section_stands_in_every_demonstration_sheet_in_its_order() {
    for (name, html) in demo_sheets() {
        let page = Html::parse_document(&html);
        let mut found: Vec<String> = all(&page, "h2").into_iter().map(text).collect();
        found.retain(|heading| heading != "Notes of the file");
        assert_eq!(found, SECTIONS, "{name}");
    }
}

#[test]
fn text_and_markdown_have_the_same_sections() {
    for (name, plan) in demo_plans() {
        let markdown = sheet_markdown(plan, &Sheet::default());
        let plain = sheet_text(plan, &Sheet::default(), 80);
        for section in SECTIONS {
            assert!(markdown.contains(&format!("\n## {section}\n")), "{name}: {section}");
            assert!(plain.contains(&format!("\n{}\n", section.to_uppercase())), "{name}: {section}");
        }
        assert!(plain.lines().all(|line| line.chars().count() <= 80), "{name}");
    }
}

#[test]
fn every_step_has_its_box_its_act_and_room_for_times_and_initials() {
    let page = Html::parse_document(&sheet(WITH_STEPS));
    let steps = all(&page, ".step");
    let acts = ["Lock out and isolate", "Wait for the bleeder", "Prove the meter and test", "Apply the discharge tool"];
    assert_eq!(steps.len(), 7);
    for (step, act) in steps.iter().zip(acts) {
        assert!(text(*step).contains(act), "{}", text(*step));
    }
    for (number, step) in (1..).zip(&steps) {
        let text = text(*step);
        assert!(text.starts_with(&format!("Step {number} of 7")), "{text}");
        let part = |selector: &str| step.select(&scraper::Selector::parse(selector).expect("a selector")).count();
        assert_eq!((part("h3 .tick"), part(".done .line")), (1, 3), "{text}");
        // A step with readings has boxes for the reading, its time and initials.
        assert_eq!(part("td.room"), if [3, 4].contains(&number) { 3 } else { 0 }, "{text}");
    }
}

#[test]
fn a_caution_stands_in_front_of_the_act_that_it_is_for() {
    let page = Html::parse_document(&sheet(WITH_STEPS));
    let steps: Vec<String> = all(&page, ".step").into_iter().map(text).collect();
    for (index, part) in
        [(3, "Before T1 goes on, up to"), (4, "Before ST1 goes on, up to"), (6, "Hands may come near only")]
    {
        let (caution, act) = (steps[index].find(part), steps[index].find(" DO "));
        assert!(caution.is_some() && act.is_some() && caution < act, "{}", steps[index]);
    }
}

#[test]
fn the_reading_of_a_hold_point_is_rounded_down_and_a_higher_one_names_what_it_points_to() {
    let page = Html::parse_document(&sheet(WITH_STEPS));
    let steps: Vec<String> = all(&page, ".step").into_iter().map(text).collect();
    // 449.96 V is 449 V with three digits rounded down; 450 V would let a higher reading pass.
    assert!(steps[2].contains("P - N above 449 V: stop"), "{}", steps[2]);
    assert!(steps[2].contains("at most 449 V") && !steps[2].contains("450 V"), "{}", steps[2]);
    // With R1 open nothing falls but by the meter: 750 V exp(-30 s / (10.2 Mohm 3.96 mF)) is still 750 V, rounded up.
    assert!(steps[2].contains("R1 open (up to 750 V) or a source that is not isolated"), "{}", steps[2]);
    assert!(steps[3].contains("P - N above 5.00 V: stop, keep away. It points to a source"), "{}", steps[3]);
}

#[test]
fn a_date_is_printed_only_where_one_is_given_and_has_to_be_one() {
    let words = |date: &'static str| ["sheet", "-", "--date", date];
    assert!(!sheet(PLAIN).contains("Date</th>\n") && !sheet(PLAIN).contains("2026-"));
    let dated = with_bank(&words("2026-03-31"), PLAIN);
    assert!(dated.status == 0 && dated.out.contains("2026-03-31"));
    for wrong in ["2026-02-30", "tomorrow", ""] {
        let refused = with_bank(&words(wrong), PLAIN);
        assert_eq!((refused.status, refused.out.as_str()), (2, ""), "{wrong}: {}", refused.err);
        assert!(refused.err.contains("year-month-day"), "{}", refused.err);
    }
}

#[test]
fn the_same_bank_gives_the_same_bytes() {
    assert_eq!(sheet(WITH_STEPS), sheet(WITH_STEPS));
}

#[test]
fn the_sheet_is_one_file_without_script_and_without_any_other_file() {
    for (name, html) in demo_sheets() {
        let page = Html::parse_document(&html);
        for selector in ["script", "link", "img", "iframe", "object", "embed", "[src]", "[href]", "[onload]", "base"] {
            assert!(all(&page, selector).is_empty(), "{name}: {selector}");
        }
        let style: String = all(&page, "style").into_iter().map(text).collect();
        assert!(!style.contains("url(") && !style.contains("@import"), "{name}");
        // The one address in it names the format of an SVG; nothing is fetched from it.
        assert_eq!(html.matches("http").count(), html.matches("http://www.w3.org/2000/svg").count(), "{name}");
    }
}

#[test]
fn the_exit_status_is_that_of_the_plan() {
    assert_eq!(with_bank(&["sheet", "-"], PLAIN).status, 0);
    let never = with_bank(&["sheet", "-"], NO_BLEEDER);
    assert_eq!(never.status, 1);
    let page = Html::parse_document(&never.out);
    let large: Vec<String> = all(&page, ".large .figure").into_iter().map(text).collect();
    assert_eq!(large[0], "NEVER");
    assert_eq!(with_bank(&["sheet", "-"], "tag: x").status, 2);
}

#[test]
fn a_bank_without_steps_gets_the_wait_and_the_test_and_a_word_about_what_is_missing() {
    let page = Html::parse_document(&sheet(PLAIN));
    let steps: Vec<String> = all(&page, ".step").into_iter().map(text).collect();
    assert_eq!(steps.len(), 1);
    assert!(
        steps[0].contains("Keep the wait of 4 min 10 s") && steps[0].contains("P - N 4 min 10 s 50 V"),
        "{}",
        steps[0]
    );
    assert!(text(all(&page, "body")[0]).contains("The file lists no steps"));
}

#[test]
fn letter_and_a4_are_asked_of_the_printer_and_every_page_is_numbered() {
    let letter = with_bank(&["sheet", "-", "--paper", "letter"], PLAIN).out;
    assert!(letter.contains("size: letter portrait") && sheet(PLAIN).contains("size: A4 portrait"));
    for html in [letter, sheet(PLAIN)] {
        assert!(html.contains("counter(page)") && html.contains("counter(pages)"));
    }
}
