//! `size bleeder`: exit status, formats, the part, the written file, and what is wrong with a request.

use crate::run::{MET, demo_banks, run, run_with, unused_file};
use serde_json::Value;

/// `MET` without its bleeder.
fn bare() -> String {
    let start = MET.find("resistors:").expect("it has resistors");
    let end = MET.find("limits:").expect("it has limits");
    format!("{}{}", &MET[..start], &MET[end..])
}

fn json(words: &[&str], bank: &str) -> (i32, Value) {
    let words = [&["size", "bleeder", "-", "--format", "json"], words].concat();
    let run = run_with(&words, bank.as_bytes());
    assert_eq!(run.err, "", "{words:?}");
    (run.status, serde_json::from_str(&run.out).expect("JSON"))
}

#[test]
fn what_is_found_ends_with_0_and_nothing_with_1() {
    let (status, found) = json(&[], &bare());
    assert_eq!(status, 0);
    assert_eq!(found["candidates"].as_array().map(Vec::len), Some(5));
    assert!(found["window"]["greatest_ohm"].as_f64().is_some_and(|ohm| (ohm - 27.97e3).abs() < 10.0));
    let (status, none) = json(&["--max-loss", "1W"], &bare());
    assert_eq!(status, 1);
    assert!(none["window"].is_null() && none["findings"][0]["code"] == "demands-collide");
}

#[test]
fn the_text_says_what_it_is_in_any_width_that_a_terminal_has() {
    let text = run_with(&["size", "bleeder", "-"], bare().as_bytes());
    assert_eq!((text.status, text.err.as_str()), (0, ""));
    let joined = text.out.split_whitespace().collect::<Vec<_>>().join(" ");
    for part in ["A prediction", "prove a rated instrument", "INVENTED", "FIRST DESIGN", "NEVER", "SHA-256"] {
        assert!(joined.to_lowercase().contains(&part.to_lowercase()), "{part}: {joined}");
    }
    assert!(text.out.lines().all(|line| line.chars().count() <= 80), "{}", text.out);
    let markdown = run_with(&["size", "bleeder", "-", "--format", "markdown"], bare().as_bytes());
    assert!(markdown.out.starts_with("# PU-09: sizing of RB") && markdown.out.contains("| No. | Element |"));
    for words in [&["size", "--help"][..], &["size", "bleeder", "--help"]] {
        let help = run(words);
        assert!(help.status == 0 && help.out.contains("xample"), "{}", help.out);
        assert!(help.out.lines().all(|line| line.chars().count() <= 80), "{}", help.out);
    }
}

#[test]
fn a_bank_that_needs_no_new_resistor_is_told_so_before_any_design() {
    let text = run_with(&["size", "bleeder", "-"], MET.as_bytes());
    let (met, first) = (text.out.find("ALREADY MET"), text.out.find("FIRST DESIGN"));
    assert!(text.status == 0 && met.is_some() && met < first, "{}", text.out);
    let needed = run_with(&["size", "bleeder", "-"], bare().as_bytes());
    assert!(!needed.out.contains("ALREADY MET"), "{}", needed.out);
}

#[test]
fn the_part_pasted_and_the_file_written_pass_the_plan() {
    let part = run_with(&["size", "bleeder", "-", "--part", "--pick", "2"], bare().as_bytes());
    assert_eq!((part.status, part.err.as_str()), (0, ""));
    assert!(part.out.starts_with("- {id: RB, role: bleeder, value: "), "{}", part.out);
    let pasted = bare().replace("limits:", &format!("resistors:\n  {}limits:", part.out));
    assert_eq!(run_with(&["plan", "-"], pasted.as_bytes()).status, 0, "{pasted}");

    let path = unused_file();
    let name = path.to_string_lossy().into_owned();
    let commented = bare().replace("limits:", "# Kept: about limits.\nlimits:");
    let words = ["size", "bleeder", "-", "--pick", "2", "--write", &name];
    let written = run_with(&words, commented.as_bytes());
    assert!(written.status == 0 && written.tells("written"), "{}", written.err);
    let text = std::fs::read_to_string(&path).expect("it is there");
    assert!(text.contains("# Kept: about limits.") && text.contains(part.out.trim_end()), "{text}");
    let plan = run(&["plan", &name]);
    assert_eq!((plan.status, plan.err.as_str()), (0, ""));
    // It exists now.
    let again = run_with(&words, commented.as_bytes());
    assert!(again.status == 2 && again.tells("not overwritten"), "{}", again.err);
    let overwritten = run_with(&[&words[..], &["--overwrite"]].concat(), commented.as_bytes());
    assert_eq!(overwritten.status, 0);
    std::fs::remove_file(&path).expect("it is removed");
}

#[test]
fn a_stock_file_is_searched_with_its_prices_and_its_errors_have_places() {
    let folder = env!("CARGO_TARGET_TMPDIR");
    let path = format!("{folder}/shelf-{}.csv", std::process::id());
    std::fs::write(
        &path,
        "name,value,tolerance,power,full_to,zero_at,voltage,mass,price\nshelf 4,22 kohm,5 %,50 W,70 °C,155 °C,1 kV,50 g,2.4\n\
         shelf 5,10 kohm,5 %,15 W,70 °C,155 °C,500 V,20 g,0.9\n",
    )
    .expect("it is written");
    let (status, found) = json(&["--stock", &path, "--rank", "price"], &bare());
    assert_eq!(status, 0);
    let first = &found["candidates"][0];
    // Two of 10 kohm in series: 750 V over 19 kohm is 29.6 W, 14.8 W each, for 1.80.
    assert_eq!((first["element"].as_str(), first["series"].as_u64()), (Some("shelf 5"), Some(2)), "{first:#}");
    assert!(first["price"].as_f64().is_some_and(|p| (p - 1.8).abs() < 1e-9));
    assert!(first["mass_kg"].as_f64().is_some_and(|m| (m - 0.04).abs() < 1e-9));
    std::fs::write(&path, "name,value\nshelf 4,22\n").expect("it is written");
    let wrong = run_with(&["size", "bleeder", "-", "--stock", &path], bare().as_bytes());
    assert_eq!(wrong.status, 2);
    assert!(wrong.tells(":2:9") || wrong.tells("line 2"), "{}", wrong.err);
    std::fs::remove_file(&path).expect("it is removed");
}

#[test]
fn a_request_that_makes_no_sense_is_refused_with_what_to_write_instead() {
    let without_limits = bare()[..bare().find("limits:").expect("it has limits")].to_string();
    for (words, bank, told) in [
        (&[][..], without_limits.as_str(), "--within 5min"),
        (&["--within", "5"], &bare(), "5 min"),
        (&["--within", "0s"], &bare(), "--within"),
        (&["--margin", "100%"], &bare(), "--margin"),
        (&["--series", "E25"], &bare(), "E24"),
        (&["--across", "P"], &bare(), "P,N"),
        (&["--across", "P,X"], &bare(), "X"),
        (&["--connection", "star"], &bare(), "three-phase"),
        (&["--id", "C1"], &bare(), "C1"),
        (&["--stock", "no-such-shelf.csv"], &bare(), "no-such-shelf.csv"),
        (&["--voltage", "60V"], &bare(), "--within"),
        (&["--closes-after", "1s"], &bare(), "--switched"),
        (&["--switched", "--discharges", "5"], &bare(), "--every"),
        (&["--switched", "--max-loss", "5W"], &bare(), "--max-loss"),
        (&["--switched", "--closes-after", "1"], &bare(), "--closes-after"),
        (&["--switched", "--every", "0s"], &bare(), "--every"),
        (&["--switched", "--closes-after", "2s", "--every", "1s"], &bare(), "every"),
    ] {
        let run = run_with(&[&["size", "bleeder", "-"], words].concat(), bank.as_bytes());
        assert_eq!((run.status, run.out.as_str()), (2, ""), "{words:?}");
        assert!(run.tells(told), "{words:?}: {}", run.err);
    }
}

#[test]
fn every_demo_bank_of_two_terminals_can_be_sized_for_a_day() {
    // Not how long it takes to drain them well: only that every kind of network is taken.
    for path in demo_banks().iter().filter(|p| p.ends_with("pulse-capacitor.yaml") || p.ends_with("filter.yaml")) {
        let name = path.to_string_lossy().into_owned();
        let run = run(&["size", "bleeder", &name, "--within", "1d", "--show", "1"]);
        assert!(run.status <= 1 && run.err.is_empty(), "{name}: {}", run.err);
    }
}

#[test]
fn a_bleeder_for_a_contact_is_found_told_and_written_with_its_key() {
    let words =
        ["--switched", "--closes-after", "100ms", "--opens-after", "50ms", "--discharges", "3", "--every", "10min"];
    let (status, found) = json(&words, &bare());
    assert_eq!(status, 0, "{found}");
    let first = &found["candidates"][0];
    assert!(first["contact"]["closes_after_s"] == 0.1 && first["contact"]["not_closing_wait_s"].is_null());
    assert!(first["loss_highest_w"] == 0.0 && first["element_energy_j"].as_f64().is_some_and(|joule| joule > 0.0));
    let text = run_with(&[&["size", "bleeder", "-"], &words[..]].concat(), bare().as_bytes());
    assert_eq!((text.status, text.err.as_str()), (0, ""));
    let joined = text.out.split_whitespace().collect::<Vec<_>>().join(" ");
    for part in
        ["no standing loss", "Where it does not close, the wait NEVER ends", "stays closed while the bank is fed"]
    {
        assert!(joined.contains(part), "{part}: {joined}");
    }
    assert!(text.out.lines().all(|line| line.chars().count() <= 80), "{}", text.out);
    let part = run_with(&[&["size", "bleeder", "-", "--part"], &words[..]].concat(), bare().as_bytes());
    let key = "switched: {closes_after: 100 ms, opens_after: 50 ms, discharges: 3, every: 600 s}";
    assert!(part.out.contains(key), "{}", part.out);
    let pasted = bare().replace("limits:", &format!("resistors:\n  {}limits:", part.out));
    let plan = run_with(&["plan", "-"], pasted.as_bytes());
    assert_eq!(plan.status, 0, "{}", plan.out);
    let told = plan.out.split_whitespace().collect::<Vec<_>>().join(" ");
    for part in ["RB contact stuck open: NEVER", "wait-rests-on-contact", "average power"] {
        assert!(told.contains(part), "{part}: {told}");
    }
}
