//! The sheet for those who listen to it or see no colours.

use crate::{PLAIN, all, demo_sheets, sheet, text};
use scraper::Html;

fn pages() -> Vec<(String, Html)> {
    let plain = ("plain".to_string(), Html::parse_document(&sheet(PLAIN)));
    let demos = demo_sheets().into_iter().map(|(name, html)| (name.to_string(), Html::parse_document(&html)));
    demos.chain([plain]).collect()
}

#[test]
fn the_language_is_set_and_headings_are_in_order() {
    for (name, page) in pages() {
        assert_eq!(all(&page, "html")[0].value().attr("lang"), Some("en"), "{name}");
        let levels: Vec<u32> = all(&page, "h1, h2, h3, h4, h5, h6")
            .iter()
            .map(|heading| heading.value().name()[1..].parse().expect("a level"))
            .collect();
        assert_eq!(levels.iter().filter(|level| **level == 1).count(), 1, "{name}");
        assert_eq!(levels[0], 1, "{name}");
        assert!(levels.windows(2).all(|pair| pair[1] <= pair[0] + 1), "{name}: {levels:?}");
        assert!(all(&page, "h1, h2, h3").into_iter().all(|heading| !text(heading).is_empty()), "{name}");
    }
}

#[test]
fn every_table_has_heads_with_a_scope_and_rows_as_wide_as_its_head() {
    for (name, page) in pages() {
        let tables = all(&page, "table");
        assert!(tables.len() > 3, "{name}");
        for table in tables {
            let count = |selector: &str| table.select(&scraper::Selector::parse(selector).expect("a selector")).count();
            let columns = count("thead th[scope=col]");
            assert!(columns > 1 && count("thead th") == columns, "{name}");
            let rows = count("tbody tr");
            assert_eq!(count("tbody th[scope=row]"), rows, "{name}: the first cell of a row is its head");
            assert_eq!(count("tbody th") + count("tbody td"), rows * columns, "{name}");
        }
    }
}

#[test]
fn every_plot_has_a_text_alternative_with_figures() {
    for (name, page) in pages() {
        let plots = all(&page, "figure svg");
        assert!(!plots.is_empty(), "{name}");
        for plot in plots {
            let value = plot.value();
            assert_eq!(value.attr("role"), Some("img"), "{name}");
            assert!(value.attr("aria-label").is_some_and(|label| label.contains(". ")), "{name}");
            let part = |selector: &str| {
                let found = plot.select(&scraper::Selector::parse(selector).expect("a selector")).next();
                found.map(text).unwrap_or_default()
            };
            assert!(!part("title").is_empty(), "{name}");
            assert!(part("desc").contains("up to") || part("desc").contains("first"), "{name}: {}", part("desc"));
        }
    }
}

#[test]
fn a_signal_is_a_word_and_not_a_colour_alone() {
    for (name, page) in pages() {
        for panel in all(&page, ".panel") {
            let class = panel.value().attr("class").unwrap_or_default().replace("panel ", "");
            assert!(text(panel).starts_with(&class.to_uppercase()), "{name}: {}", text(panel));
        }
    }
}

/// Relative luminance of `#rgb` or `#rrggbb` (WCAG 2.1, definition of relative luminance).
fn luminance(colour: &str) -> f64 {
    let digits = colour.trim_start_matches('#');
    let full: String = if digits.len() == 3 { digits.chars().flat_map(|c| [c, c]).collect() } else { digits.into() };
    let channel = |at: usize| {
        let value = f64::from(u8::from_str_radix(&full[at..at + 2], 16).expect("a colour")) / 255.0;
        if value <= 0.03928 { value / 12.92 } else { ((value + 0.055) / 1.055).powf(2.4) }
    };
    0.2126 * channel(0) + 0.7152 * channel(2) + 0.0722 * channel(4)
}

/// Contrast ratio of two colours (WCAG 2.1, definition of contrast ratio).
fn contrast(one: &str, other: &str) -> f64 {
    let (one, other) = (luminance(one), luminance(other));
    (one.max(other) + 0.05) / (one.min(other) + 0.05)
}

/// Every rule of the style that sets both a background and a colour, and the page's own.
fn pairs(style: &str) -> Vec<(String, String)> {
    let value = |rule: &str, key: &str| {
        rule.split([';', '{']).find_map(|part| part.trim().strip_prefix(key).map(|v| v.trim().to_string()))
    };
    let rules = style.split('}');
    rules.filter_map(|rule| Some((value(rule, "background:")?, value(rule, "color:")?))).collect()
}

#[test]
fn text_stands_out_from_its_ground_by_at_least_four_and_a_half() {
    assert!((contrast("#000", "#fff") - 21.0).abs() < 1e-9);
    assert!(contrast("#777", "#fff") < 4.5);
    let page = Html::parse_document(&sheet(PLAIN));
    let pairs = pairs(&text(all(&page, "style")[0]));
    assert!(pairs.len() >= 4, "{pairs:?}");
    for (ground, ink) in pairs {
        assert!(contrast(&ground, &ink) >= 4.5, "{ink} on {ground}: {}", contrast(&ground, &ink));
    }
}

#[test]
fn no_type_is_smaller_than_ten_points() {
    let page = Html::parse_document(&sheet(PLAIN));
    let style = text(all(&page, "style")[0]);
    let sizes = style.split("font-size:").skip(1).chain(style.split("font:").skip(1));
    let mut seen = 0;
    for after in sizes {
        let size = after.split("pt").next().expect("a size").trim();
        assert!(size.parse::<f64>().is_ok_and(|size| size >= 10.0), "{size}");
        seen += 1;
    }
    assert!(seen > 8);
    // In a plot 660 px are the 177 mm of an A4 page between its margins; 72 points are 25.4 mm.
    for text in all(&page, "figure svg text") {
        let size: f64 = text.value().attr("font-size").expect("a size").parse().expect("a number");
        let width: f64 = 660.0 * 8.0;
        let points = size / width * 177.0 / 25.4 * 72.0;
        assert!(points >= 10.0, "{points}");
    }
}
