//! `size balancing`: exit status, formats, the parts, the written file, and what is wrong with a request.

use crate::run::{run, run_with, unused_file};
use serde_json::Value;

const BANK: &str = "ebbvolt: 1
tag: PU-12
title: Grit pump drive, DC bus
location: Saltmarsh pumping station, switchroom 1
ambient: 40 °C
touch_voltage: 50 V
charged_to: {nominal: 565 V, highest: 750 V}
capacitors:
  # The bus.
  - id: C1   # two in series
    value: 470 uF
    tolerance: 10 %
    units: {series: 2}
    rated: 450 V
# Kept: about limits.
limits: [{id: site, voltage: 50 V, within: 5 min}]
";

fn json(words: &[&str]) -> (i32, Value) {
    let words = [&["size", "balancing", "-", "--format", "json", "--leakage", "1mA"], words].concat();
    let run = run_with(&words, BANK.as_bytes());
    assert_eq!(run.err, "", "{words:?}");
    (run.status, serde_json::from_str(&run.out).expect("JSON"))
}

#[test]
fn what_is_found_ends_with_0_and_nothing_with_1() {
    let (status, found) = json(&[]);
    assert_eq!((status, found["size"].as_str(), found["id"].as_str()), (0, Some("balancing"), Some("RB1 to RB2")));
    assert_eq!(found["candidates"].as_array().map(Vec::len), Some(5));
    // 5 % resistors: (450 * 2 / 1.05 - 750) / (0.95 * 1 mA), with h = 1.05 and l = 0.95.
    let by_hand = (450.0 * (1.05 + 0.95) / 1.05 - 750.0) / (0.95 * 1e-3);
    assert!(found["window"]["greatest_ohm"].as_f64().is_some_and(|ohm| (ohm / by_hand - 1.0).abs() < 1e-9));
    let unit = &found["candidates"][0]["units"][1];
    assert_eq!((unit["capacitors"][0].as_str(), unit["resistor"].as_str()), (Some("C1.2"), Some("RB2")));
    // 0.55 of 750 V.
    assert!(unit["fast_charge_v"].as_f64().is_some_and(|v| (v - 412.5).abs() < 1e-9), "{unit:#}");
    let (status, none) = json(&["--max-loss", "1W"]);
    assert_eq!(status, 1);
    assert!(none["window"].is_null() && none["findings"][0]["code"] == "demands-collide");
}

#[test]
fn the_text_says_what_it_is_in_any_width_that_a_terminal_has() {
    let words = ["size", "balancing", "-", "--leakage", "1mA"];
    let text = run_with(&words, BANK.as_bytes());
    assert_eq!((text.status, text.err.as_str()), (0, ""));
    let joined = text.out.split_whitespace().collect::<Vec<_>>().join(" ").to_lowercase();
    for part in [
        "A prediction",
        "prove a rated instrument",
        "invented",
        "FIRST DESIGN",
        "across each of 2 units",
        "Marked resistance",
        "NEVER",
        "no node to balance at",
        "constant current",
        "absorption",
        "SHA-256",
    ] {
        assert!(joined.contains(&part.to_lowercase()), "{part}: {joined}");
    }
    assert!(text.out.lines().all(|line| line.chars().count() <= 80), "{}", text.out);
    let markdown = run_with(&[&words[..], &["--format", "markdown"]].concat(), BANK.as_bytes());
    assert!(markdown.out.starts_with("# PU-12: sizing of RB1 to RB2") && markdown.out.contains("| Unit | Across |"));
    let help = run(&["size", "balancing", "--help"]);
    assert!(help.status == 0 && help.out.contains("Examples:") && help.out.contains("Exit status"), "{}", help.out);
    assert!(help.out.lines().all(|line| line.chars().count() <= 80), "{}", help.out);
}

#[test]
fn the_parts_pasted_and_the_file_written_pass_the_plan() {
    let words = ["size", "balancing", "-", "--leakage", "1mA", "--pick", "2", "--limits"];
    let part = run_with(&[&words[..], &["--part"]].concat(), BANK.as_bytes());
    assert_eq!((part.status, part.err.as_str()), (0, ""));
    let (capacitors, resistors) = part.out.split_once("# resistors").expect("both lists");
    assert!(capacitors.starts_with("# capacitors: these in place of C1\n- {id: C1.1,"), "{}", part.out);
    let start = BANK.find("  # The bus.").expect("it is there");
    let end = BANK.find("# Kept").expect("it is there");
    let pasted = format!("{}{capacitors}resistors:\n# resistors{resistors}{}", &BANK[..start], &BANK[end..]);
    assert_eq!(run_with(&["plan", "-"], pasted.as_bytes()).status, 0, "{pasted}");

    let path = unused_file();
    let name = path.to_string_lossy().into_owned();
    let written = run_with(&[&words[..], &["--write", &name]].concat(), BANK.as_bytes());
    assert!(written.status == 0 && written.tells("RB1 to RB2 was written"), "{}", written.err);
    let text = std::fs::read_to_string(&path).expect("it is there");
    for kept in ["# The bus.", "# two in series", "# Kept: about limits."] {
        assert!(text.contains(kept), "{kept}: {text}");
    }
    assert!(!text.contains("id: C1 ") && part.out.lines().all(|l| l.starts_with('#') || text.contains(l)), "{text}");
    let plan = run(&["plan", &name]);
    assert_eq!((plan.status, plan.err.as_str()), (0, ""));
    std::fs::remove_file(&path).expect("it is removed");
}

#[test]
fn a_request_that_makes_no_sense_is_refused_with_what_to_write_instead() {
    let unrated = BANK.replace("    rated: 450 V\n", "");
    let one = BANK.replace("    units: {series: 2}\n", "");
    let unlimited = BANK.replace("limits: [{id: site, voltage: 50 V, within: 5 min}]\n", "");
    for (words, bank, told) in [
        (&[][..], BANK, "--leakage 3mA"),
        (&["--leakage", "3"], BANK, "40 mA"),
        (&["--leakage", "0A"], BANK, "--leakage"),
        (&["--leakage", "1mA", "--max-loss", "0W"], BANK, "--max-loss"),
        (&["--leakage", "1mA"], &unrated, "--rated 450V"),
        (&["--leakage", "1mA"], &one, "units: {series: 2}"),
        (&["--leakage", "1mA", "--limits"], &unlimited, "--within 5min"),
        (&["--leakage", "1mA", "--across", "P"], BANK, "P,N"),
        (&["--leakage", "1mA", "--across", "P,X"], BANK, "X"),
        (&["--leakage", "1mA", "--capacitor", "C9"], BANK, "it has C1"),
        (&["--leakage", "1mA", "--limits", "--within", "5min"], BANK, "--limits"),
        (&["--leakage", "1mA", "--voltage", "60V"], BANK, "--within"),
        (&["--leakage", "1mA", "--series", "E25"], BANK, "E24"),
        (&["--leakage", "1mA", "--id", "C1."], BANK, "--id RX"),
    ] {
        let run = run_with(&[&["size", "balancing", "-"], words].concat(), bank.as_bytes());
        assert_eq!((run.status, run.out.as_str()), (2, ""), "{words:?}: {}", run.out);
        assert!(run.tells(told), "{words:?}: {}", run.err);
    }
    let rated = run_with(&["size", "balancing", "-", "--leakage", "1mA", "--rated", "450V"], unrated.as_bytes());
    assert!(rated.status == 0 && rated.out.contains("as asked"), "{}", rated.err);
}

#[test]
fn a_charge_that_divides_by_capacitance_above_the_rating_is_told_and_can_be_left_out() {
    let wide = BANK.replace("tolerance: 10 %", "tolerance: 25 %");
    let words = ["size", "balancing", "-", "--leakage", "0.5mA", "--tolerance", "1%"];
    let told = run_with(&words, wide.as_bytes());
    let joined = told.out.split_whitespace().collect::<Vec<_>>().join(" ");
    // 0.625 of 750 V is 468.75 V.
    assert!(told.status == 1 && joined.contains("469 V") && joined.contains("18.8 V too much"), "{}", told.out);
    assert_eq!(run_with(&[&words[..], &["--slow-charge"]].concat(), wide.as_bytes()).status, 0);
}
