//! `size precharge`: exit status, formats, the part, the written file, and what is wrong with a request.

use crate::run::{Run, demo_banks, met_but, run, run_with, unused_file};
use serde_json::Value;

/// `MET` with a supply and its comments.
fn supplied() -> String {
    met_but(
        "limits:",
        "# Feeds the bus.\nsupplies:\n  - {id: S1, voltage: 750 V, series: 10 ohm, across: [P, N]}   # as built\nlimits:",
    )
}

fn asked(words: &[&str], bank: &str) -> Run {
    run_with(&[&["size", "precharge", "-"], words].concat(), bank.as_bytes())
}

fn json(words: &[&str], bank: &str) -> (i32, Value) {
    let run = asked(&[&["--format", "json"], words].concat(), bank);
    assert_eq!(run.err, "", "{words:?}");
    (run.status, serde_json::from_str(&run.out).expect("JSON"))
}

fn codes(found: &Value) -> Vec<&str> {
    found["findings"].as_array().expect("a list").iter().filter_map(|f| f["code"].as_str()).collect()
}

#[test]
fn what_is_found_ends_with_0_and_nothing_with_1() {
    let (status, found) = json(&["--within", "2s"], &supplied());
    assert_eq!(status, 0);
    assert_eq!(found["candidates"].as_array().map(Vec::len), Some(5), "{found:#}");
    assert_eq!((found["id"].as_str(), found["size"].as_str()), (Some("S1"), Some("precharge")));
    // 3960 uF behind R beside a bleeder of 20.9 kohm: it settles at 20.9k/(20.9k + R), with R in parallel to it.
    let ohm = found["window"]["greatest_ohm"].as_f64().expect("time bounds it");
    let settled = 20.9e3 / (20.9e3 + ohm);
    let time = -3960e-6 * ohm * settled * (1.0 - 0.95 / settled).ln();
    assert!((time / 2.0 - 1.0).abs() < 1e-8, "{ohm} {time}");
    let first = &found["candidates"][0];
    assert!(first["to_share_slowest_s"].as_f64().is_some_and(|s| s <= 2.0));
    assert!(first["reached_lowest_v"].as_f64().is_some_and(|v| v >= 0.95 * 750.0));
    assert!(first["steps"].as_str().is_some_and(|steps| steps.contains("connect: [S1]")));
    // A bus that comes to 95 % in 2 s with at most 3 A at its start.
    let (status, none) = json(&["--within", "2s", "--max-current", "3A"], &supplied());
    assert_eq!((status, codes(&none)), (1, vec!["demands-collide"]));
    assert!(none["findings"][0]["help"].as_str().is_some_and(|help| help.contains("two stages")), "{none:#}");
    // One element alone would carry too much.
    let (status, none) = json(&["--within", "2s", "--series-up-to", "1", "--parallel-up-to", "1"], &supplied());
    assert_eq!((status, codes(&none)), (1, vec!["no-design"]), "{none:#}");
    assert!(none["searched"]["set_aside"].as_array().is_some_and(|set| !set.is_empty()), "{none:#}");
}

#[test]
fn a_supply_below_the_highest_voltage_is_told() {
    let low = supplied().replace("voltage: 750 V, series", "voltage: 565 V, series");
    let (status, found) = json(&["--within", "2s"], &low);
    assert_eq!((status, codes(&found)), (0, vec!["supply-below-highest"]));
    assert!(codes(&json(&["--within", "2s"], &supplied()).1).is_empty());
}

#[test]
fn the_text_says_what_it_is_within_80_columns() {
    let words = ["--within", "2s", "--main", "20 mohm", "--attempts", "3", "--every", "1min"];
    let text = asked(&words, &supplied());
    assert_eq!((text.status, text.err.as_str()), (0, ""));
    let joined = text.out.split_whitespace().collect::<Vec<_>>().join(" ");
    for part in [
        "A prediction",
        "prove a rated instrument",
        "INVENTED",
        "FIRST DESIGN",
        "WARNING",
        "This charges the bank",
        "shorted bank",
        "3 charges from empty, one every 60 s",
        "over 20 mohm",
        "connected to an empty bank",
        "SHA-256",
    ] {
        assert!(joined.to_lowercase().contains(&part.to_lowercase()), "{part}: {joined}");
    }
    for never in ["safe", "harmless", "dead", "isolation. Times"] {
        assert!(!joined.contains(never), "{never}: {joined}");
    }
    assert!(text.out.lines().all(|line| line.chars().count() <= 80), "{}", text.out);
    let markdown = asked(&["--within", "2s", "--format", "markdown"], &supplied());
    assert!(markdown.out.starts_with("# PU-09: sizing of S1") && markdown.out.contains("| No. | Element |"));
    let help = run(&["size", "precharge", "--help"]);
    assert!(help.status == 0 && help.out.contains("Examples:") && help.out.contains("Exit status"), "{}", help.out);
    assert!(help.out.lines().all(|line| line.chars().count() <= 80), "{}", help.out);
}

#[test]
fn the_part_and_the_written_file_are_the_design_and_comments_stay() {
    let part = asked(&["--within", "2s", "--part", "--pick", "2"], &supplied());
    assert_eq!((part.status, part.err.as_str()), (0, ""));
    assert!(part.out.starts_with("- {id: S1, voltage: 750 V, series: "), "{}", part.out);
    let path = unused_file();
    let name = path.to_string_lossy().into_owned();
    let words = ["--within", "2s", "--pick", "2", "--write", &name];
    let written = asked(&words, &supplied());
    assert!(written.status == 0 && written.tells("written") && written.tells("connect: [S1]"), "{}", written.err);
    let text = std::fs::read_to_string(&path).expect("it is there");
    assert!(text.contains("# Feeds the bus.") && text.contains("}   # as built\n"), "{text}");
    let series = part.out.split("series: ").nth(1).and_then(|s| s.split(',').next()).expect("a value");
    assert!(text.contains(&format!("series: {series},")) && !text.contains("series: 10 ohm,"), "{text}");
    assert_eq!(run(&["plan", &name]).status, 0);
    assert!(asked(&words, &supplied()).tells("not overwritten"));
    std::fs::remove_file(&path).expect("it is removed");
    // A file without supplies gets one, at its highest voltage.
    let bare = met_but("PU-09", "PU-08");
    let written = asked(&["--within", "2s", "--write", &name], &bare);
    assert_eq!(written.status, 0, "{}", written.err);
    let text = std::fs::read_to_string(&path).expect("it is there");
    assert!(text.starts_with(&bare) && text.contains("supplies:\n  - {id: S1, voltage: 750 V, series: "), "{text}");
    std::fs::remove_file(&path).expect("it is removed");
}

#[test]
fn a_request_that_makes_no_sense_is_refused_with_what_to_write_instead() {
    let one = supplied();
    let none = met_but("PU-09", "PU-08");
    let two = one.replace("limits:", "  - {id: S2, voltage: 48 V, series: 10 ohm, across: [P, N]}\nlimits:");
    let empty = none.replace("{nominal: 565 V, highest: 750 V}", "0 V");
    for (words, bank, told) in [
        (&[][..], &one, "--within"),
        (&["--within", "2"], &one, "5 min"),
        (&["--within", "0s"], &one, "2s"),
        (&["--within", "2s", "--share", "100%"], &one, "95%"),
        (&["--within", "2s", "--share", "0%"], &one, "95%"),
        (&["--within", "2s", "--share", "0.95"], &one, "%"),
        (&["--within", "2s", "--max-inrush", "400A"], &one, "--main"),
        (&["--within", "2s", "--main", "0 ohm"], &one, "--main"),
        (&["--within", "2s", "--max-current", "0A"], &one, "10A"),
        (&["--within", "2s", "--attempts", "3"], &one, "--every"),
        (&["--within", "2s", "--every", "1min"], &one, "--attempts"),
        (&["--within", "2s", "--attempts", "0", "--every", "1min"], &one, "--attempts"),
        (&["--within", "2s", "--attempts", "3", "--every", "1s"], &one, "--within"),
        (&["--within", "2s", "--supply", "S9"], &one, "S1"),
        (&["--within", "2s", "--supply", "S9"], &none, "leave `--supply` out"),
        (&["--within", "2s", "--id", "S1"], &one, "--supply S1"),
        (&["--within", "2s", "--id", "C1"], &one, "C1"),
        (&["--within", "2s", "--id", "S3", "--supply", "S1"], &one, "--supply"),
        (&["--within", "2s", "--voltage", "565V"], &one, "--id"),
        (&["--within", "2s"], &two, "S1, S2"),
        (&["--within", "2s"], &empty, "--voltage 565V"),
        (&["--within", "2s", "--across", "P"], &none, "P,N"),
        (&["--within", "2s", "--across", "P,X"], &none, "X"),
        (&["--within", "2s", "--margin", "100%"], &one, "--margin"),
        (&["--within", "2s", "--stock", "no-such-shelf.csv"], &one, "no-such-shelf.csv"),
    ] {
        let run = asked(words, bank);
        assert_eq!((run.status, run.out.as_str()), (2, ""), "{words:?}");
        assert!(run.tells(told), "{words:?}: {}", run.err);
    }
}

#[test]
fn an_array_as_series_resistance_is_understood_by_plan_and_its_errors_have_places() {
    let text = supplied().replace("series: 10 ohm", "series: 300 ohm, array: {series: 2, parallel: 3}, tolerance: 5 %")
        + "procedure:\n  - {step: Charge, connect: [S1], for: 2 s}\n  - {step: Off, disconnect: [S1], for: 0 s}\n";
    let plan = run_with(&["plan", "-", "--format", "json"], text.as_bytes());
    let plan: Value = serde_json::from_str(&plan.out).expect("JSON");
    let supply = &plan["resistors"][1];
    assert_eq!((supply["id"].as_str(), supply["elements"].as_u64()), (Some("S1"), Some(6)));
    // One element high and the other of its string low: 750 V * 1.05/2.
    assert!(supply["element_voltage_v"].as_f64().is_some_and(|v| (v - 393.75).abs() < 1e-6), "{supply:#}");
    // All of the array at its lowest: 750 V / 190 ohm, a third of it in each string.
    let part =
        plan["steps"][0]["parts"].as_array().expect("a list").iter().find(|p| p["id"] == "S1").expect("it is on");
    assert!(part["peak_current_a"].as_f64().is_some_and(|a| (a - 750.0 / 190.0 / 3.0).abs() < 1e-9), "{part:#}");
    let wrong = text.replace("{series: 2, parallel: 3}", "{series: 0, parallel: 3}");
    let refused = run_with(&["plan", "-"], wrong.as_bytes());
    assert!(refused.status == 2 && refused.tells("array"), "{}", refused.err);
}

#[test]
fn demo_banks_are_taken_with_dielectrics_and_with_three_phases() {
    let taken = ["fast-charger.yaml", "power-factor.yaml", "pulse-capacitor.yaml"];
    for path in demo_banks().iter().filter(|path| taken.iter().any(|name| path.ends_with(name))) {
        let name = path.to_string_lossy().into_owned();
        let run = run(&["size", "precharge", &name, "--within", "5s", "--show", "1"]);
        assert!(run.status <= 1 && run.err.is_empty(), "{name}: {} {}", run.status, run.err);
    }
}
