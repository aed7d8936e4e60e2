//! The notice on the cabinet.

use crate::{NO_BLEEDER, PLAIN, TWO_BLEEDERS, demo_plans, with_bank};
use ebbvolt::quantity::millimetres;
use ebbvolt::report::{LabelSize, label_svg};
use roxmltree::Document;

/// All text of a drawing, in its order, with single spaces.
fn words(svg: &str) -> String {
    let drawing = Document::parse(svg).expect("XML");
    let texts = drawing.descendants().filter(|n| n.has_tag_name(("http://www.w3.org/2000/svg", "text")));
    let texts: Vec<&str> = texts.filter_map(|n| n.text()).collect();
    texts.join(" ").replace('\u{a0}', " ")
}

#[test]
fn the_delay_is_the_slowest_wait_in_whole_minutes_beside_the_longest_with_one_part_failed() {
    let printed = with_bank(&["label", "-"], TWO_BLEEDERS);
    assert_eq!(printed.status, 0, "{}", printed.err);
    // tau = 1.2 * 3300 uF * 1.05 * (22 kohm || 47 kohm) = 62.3 s, times ln(750/50) = 169 s: 3 min.
    // With R1 open 1.2 * 3300 uF * 1.05 * 47 kohm * ln 15 = 529 s: 9 min.
    let words = words(&printed.out);
    assert!(words.starts_with("DANGER Capacitors stay charged"), "{words}");
    assert!(words.contains("After isolation wait at least 3 min then TEST"), "{words}");
    assert!(words.contains("If one part has failed: up to 9 min (R1 open)"), "{words}");
    assert!(!words.contains("do not trust"), "{words}");
}

#[test]
fn a_failure_that_makes_the_wait_endless_says_to_test_and_not_to_trust_the_time() {
    let printed = with_bank(&["label", "-"], PLAIN);
    let words = words(&printed.out);
    assert_eq!(printed.status, 0);
    assert!(words.contains("wait at least 5 min"), "{words}");
    assert!(words.contains("(R1 open) the voltage does NOT fall by itself. Test; do not trust the time."), "{words}");
}

#[test]
fn a_healthy_bank_that_never_discharges_gets_no_delay_and_status_one() {
    let printed = with_bank(&["label", "-"], NO_BLEEDER);
    let words = words(&printed.out);
    assert_eq!(printed.status, 1);
    assert!(printed.err.split_whitespace().collect::<String>().contains("nodelay"), "{}", printed.err);
    assert!(words.contains("STAYS CHARGED") && words.contains("TEST before you touch"), "{words}");
    for time in [" min ", " s ", " h ", "wait at least"] {
        assert!(!words.contains(time), "{words}");
    }
}

#[test]
fn a_notice_is_in_millimetres_and_of_the_size_that_was_asked_for() {
    for (size, width, height) in
        [("100x60mm", "100mm", "60mm"), ("60 x 90 mm", "60mm", "90mm"), ("148.5x105mm", "148.5mm", "105mm")]
    {
        let printed = with_bank(&["label", "-", "--size", size], TWO_BLEEDERS);
        assert_eq!(printed.status, 0, "{size}: {}", printed.err);
        let drawing = Document::parse(&printed.out).expect("XML");
        let root = drawing.root_element();
        assert_eq!((root.attribute("width"), root.attribute("height")), (Some(width), Some(height)));
        assert_eq!(root.attribute("role"), Some("img"));
    }
}

#[test]
fn what_does_not_fit_is_refused_and_never_cut() {
    for (size, word) in [
        ("31x30mm", "larger"),
        ("5x5mm", "30 mm to 400 mm"),
        ("100", "100x60mm"),
        ("axbmm", "100x60mm"),
        ("NaNxinfmm", "30 mm to 400 mm"),
    ] {
        let printed = with_bank(&["label", "-", "--size", size], PLAIN);
        assert_eq!((printed.status, printed.out.as_str()), (2, ""), "{size}: {}", printed.err);
        assert!(printed.err.contains(word), "{size}: {}", printed.err);
    }
}

#[test]
fn every_text_stands_inside_the_notice_and_can_be_read() {
    for (name, plan) in demo_plans() {
        for size in [(120.0, 80.0), (90.0, 60.0), (60.0, 90.0), (200.0, 100.0)] {
            let asked = LabelSize::new(millimetres(size.0), millimetres(size.1)).expect("a size");
            let svg = label_svg(plan, asked).expect("it fits");
            let drawing = Document::parse(&svg).expect("XML");
            let height = size.1;
            for node in drawing.descendants().filter(|n| n.tag_name().name() == "text") {
                let number = |key: &str| node.attribute(key).expect(key).parse::<f64>().expect("a number");
                assert!(number("y") < height - 0.2 * number("font-size"), "{name} {size:?}");
                assert!(number("font-size") >= 1.4, "{name} {size:?}: {}", number("font-size"));
            }
        }
    }
}

#[test]
fn several_notices_stand_on_a_page_and_more_than_fit_are_refused() {
    let page = with_bank(&["label", "-", "--page", "a4", "--size", "90x60mm", "--copies", "8"], PLAIN);
    assert_eq!(page.status, 0, "{}", page.err);
    let drawing = Document::parse(&page.out).expect("XML");
    assert_eq!(drawing.root_element().attribute("height"), Some("297mm"));
    assert_eq!(words(&page.out).matches("wait at least 5 min").count(), 8);
    let crowded = with_bank(&["label", "-", "--page", "a4", "--size", "90x60mm", "--copies", "9"], PLAIN);
    assert!(crowded.status == 2 && crowded.err.contains("8 notices"), "{}", crowded.err);
}

#[test]
fn the_highest_status_of_several_banks_counts() {
    let folder = std::path::Path::new(env!("CARGO_TARGET_TMPDIR"));
    let files: Vec<String> = [("met", TWO_BLEEDERS), ("never", NO_BLEEDER)]
        .iter()
        .map(|(name, bank)| {
            let path = folder.join(format!("notice-{name}.yaml"));
            std::fs::write(&path, bank).expect("a file");
            path.to_string_lossy().into_owned()
        })
        .collect();
    let printed = with_bank(&["label", "--size", "90x60mm", &files[0], &files[1]], "");
    assert_eq!(printed.status, 1, "{}", printed.err);
    let words = words(&printed.out);
    assert!(words.contains("PU-10") && words.contains("NV-01"), "{words}");
}
