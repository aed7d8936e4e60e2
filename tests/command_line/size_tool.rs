//! `size tool`: exit status, formats, the part, the written file, and what is wrong with a request.

use crate::run::{MET, demo_banks, met_with_procedure, run, run_with, unused_file};
use serde_json::Value;

fn json(words: &[&str], bank: &str) -> (i32, Value) {
    let words = [&["size", "tool", "-", "--format", "json"], words].concat();
    let run = run_with(&words, bank.as_bytes());
    assert_eq!(run.err, "", "{words:?}");
    (run.status, serde_json::from_str(&run.out).expect("JSON"))
}

#[test]
fn a_tool_is_found_with_0_and_none_with_1() {
    let (status, found) = json(&["--within", "20s"], MET);
    assert_eq!(status, 0);
    assert_eq!((found["size"].as_str(), found["id"].as_str()), (Some("tool"), Some("T1")));
    let first = &found["candidates"][0];
    assert_eq!((first["applied_at_s"].as_f64(), first["held_s"].as_f64()), (Some(0.0), Some(20.0)));
    assert!(first["time_s"].as_f64().is_some_and(|t| t <= 20.0) && first["contact_energy_j"].is_null());
    // 1.04 kJ every 20 s are less than its power: no end. Every 3 s they are more.
    assert!(first["in_a_row"]["banks"].is_null() && first["in_a_row"]["every_s"] == 20.0, "{first:#}");
    let (_, fast) = json(&["--within", "3s"], MET);
    let row = &fast["candidates"][0]["in_a_row"];
    assert!(row["banks"].as_u64().is_some_and(|n| n > 0), "{row:#}");
    assert!(row["cooling_s"].as_f64().is_some_and(|t| t > 0.0), "{row:#}");
    let (status, none) = json(&["--within", "20s", "--max-current", "10mA"], MET);
    assert_eq!(status, 1);
    assert!(none["window"].is_null() && none["findings"][0]["code"] == "demands-collide");
}

#[test]
fn the_text_says_that_a_tool_is_no_strap_and_fits_a_terminal() {
    let words = ["--within", "20s", "--lead", "50mohm", "--contact-energy", "2J", "--banks", "2", "--every", "10min"];
    let text = run_with(&[&["size", "tool", "-"][..], &words].concat(), MET.as_bytes());
    assert_eq!((text.status, text.err.as_str()), (0, ""));
    let joined = text.out.split_whitespace().collect::<Vec<_>>().join(" ");
    for part in [
        "A prediction",
        "prove a rated instrument",
        "A tool is no strap",
        "leave it on",
        "contact",
        "in a row",
        "SHA-256",
    ] {
        assert!(joined.contains(part), "{part}: {joined}");
    }
    for never in ["safe", "dead", "harmless", "de-energised"] {
        assert!(!joined.to_lowercase().contains(never), "{never}: {joined}");
    }
    assert!(text.out.lines().all(|line| line.chars().count() <= 80), "{}", text.out);
    let markdown = run_with(&["size", "tool", "-", "--within", "20s", "--format", "markdown"], MET.as_bytes());
    assert!(markdown.out.starts_with("# PU-09: sizing of T1") && markdown.out.contains("| No. | Element |"));
    let help = run(&["size", "tool", "--help"]);
    assert!(help.status == 0 && help.out.contains("Examples:") && help.out.contains("Exit status"), "{}", help.out);
    assert!(help.out.lines().all(|line| line.chars().count() <= 80), "{}", help.out);
}

#[test]
fn the_part_pasted_and_the_file_written_give_the_same_plan() {
    let part = run_with(&["size", "tool", "-", "--within", "20s", "--part"], MET.as_bytes());
    assert!(part.status == 0 && part.tells("connect: [T1], for: 20 s"), "{}", part.err);
    assert!(part.out.starts_with("- {id: T1, role: tool, value: "), "{}", part.out);

    let path = unused_file();
    let name = path.to_string_lossy().into_owned();
    let commented = format!("{MET}# Kept: the end.\n");
    let words = ["size", "tool", "-", "--within", "20s", "--write", &name];
    let written = run_with(&words, commented.as_bytes());
    assert!(written.status == 0 && written.tells("and the steps that apply it was written"), "{}", written.err);
    let text = std::fs::read_to_string(&path).expect("it is there");
    for kept in ["# Kept: the end.", part.out.trim_end(), "procedure:\n", "Apply the discharge tool"] {
        assert!(text.contains(kept), "{kept}: {text}");
    }
    let plan = run(&["plan", &name, "--format", "json"]);
    assert_eq!((plan.status, plan.err.as_str()), (0, ""));
    let plan: Value = serde_json::from_str(&plan.out).expect("JSON");
    let (_, found) = json(&["--within", "20s"], MET);
    let (of_plan, of_size) = (&plan["steps"][1], &found["candidates"][0]);
    let tool = of_plan["parts"].as_array().and_then(|p| p.iter().find(|p| p["id"] == "T1")).expect("it is there");
    assert_eq!(tool["energy_j"].as_f64(), of_size["element_energy_j"].as_f64());
    assert_eq!(of_plan["hold"]["predicted_v"].as_f64(), of_size["left_v"].as_f64());
    std::fs::remove_file(&path).expect("it is removed");
}

#[test]
fn a_tool_of_the_file_is_exchanged_in_its_place() {
    let path = unused_file();
    let name = path.to_string_lossy().into_owned();
    let bank = met_with_procedure().replace("    role: tool\n", "    role: tool   # Kept: by hand\n");
    let written = run_with(&["size", "tool", "-", "--write", &name], bank.as_bytes());
    assert!(written.status == 0 && written.tells("T1 sized anew was written"), "{}{}", written.out, written.err);
    let text = std::fs::read_to_string(&path).expect("it is there");
    assert!(text.contains("# Kept: by hand") && !text.contains("value: 1 kohm"), "{text}");
    assert!(text.contains("- {id: T1, role: tool, value:") && text.contains("- {id: ST1, role: strap"), "{text}");
    let plan = run(&["plan", &name]);
    assert_eq!((plan.status, plan.err.as_str()), (0, ""));
    std::fs::remove_file(&path).expect("it is removed");

    // Another tool beside it: written, and told which step to add.
    let beside = run_with(&["size", "tool", "-", "--id", "T2", "--within", "20s", "--write", &name], bank.as_bytes());
    assert!(beside.status == 0 && beside.tells("which no step of it applies yet"), "{}", beside.err);
    assert!(beside.tells("connect: [T2], for: 20 s"), "{}", beside.err);
    assert_eq!(run(&["plan", &name]).status, 0);
    std::fs::remove_file(&path).expect("it is removed");
}

#[test]
fn a_request_for_a_tool_that_makes_no_sense_is_refused_with_what_to_write_instead() {
    let within = ["--within", "20s"];
    for (words, told) in [
        (&[][..], "--within 20s"),
        (&["--within", "20"], "5 min"),
        (&["--within", "0s"], "--within"),
        (&["--contact-energy", "2J"], "--lead"),
        (&["--lead", "50"], "ohm"),
        (&["--across", "P"], "P,N"),
        (&["--across", "P,X"], "X"),
        (&["--id", "R1"], "role bleeder"),
        (&["--connection", "star"], "three-phase"),
        (&["--every", "5s"], "--every"),
        (&["--every", "0s"], "--every"),
        (&["--banks", "0"], "0"),
        (&["--max-current", "0A"], "--max-current"),
    ] {
        let with_time =
            if words.is_empty() || words[0] == "--within" { words.to_vec() } else { [&within, words].concat() };
        let run = run_with(&[&["size", "tool", "-"], &with_time[..]].concat(), MET.as_bytes());
        assert_eq!((run.status, run.out.as_str()), (2, ""), "{words:?}");
        assert!(run.tells(told), "{words:?}: {}", run.err);
    }
}

#[test]
fn tools_of_demo_banks_are_sized_anew_in_their_steps() {
    for path in demo_banks().iter().filter(|p| p.ends_with("pulse-capacitor.yaml") || p.ends_with("filter.yaml")) {
        let name = path.to_string_lossy().into_owned();
        let run = run(&["size", "tool", &name, "--show", "1"]);
        assert!(run.status <= 1 && run.err.is_empty(), "{name}: {}", run.err);
        let told = run.out.split_whitespace().collect::<Vec<_>>().join(" ");
        // In the file's steps, or for the bank as it was isolated where these leave the tool nothing to do.
        assert!(told.contains("own procedure") || told.contains("[sized-from-isolation]"), "{name}: {told}");
    }
}
