//! What every printed plan keeps to.

use crate::run::{MET, demo_banks, met_with_procedure, program, run, run_with};
use unicode_width::UnicodeWidthStr;

/// Words that no output may use of a bank.
const FORBIDDEN: [&str; 6] = ["safe", "dead", "de-energised", "deenergised", "harmless", "ok to touch"];

#[test]
fn every_example_bank_gives_a_plan_within_80_columns_and_in_sober_words() {
    let banks = demo_banks();
    assert!(banks.len() >= 6);
    for bank in banks {
        let name = bank.to_str().expect("a name in UTF-8");
        let run = run(&["plan", "--working", name]);
        assert!(run.status <= 1, "{name}: {}: {}", run.status, run.err);
        assert!(run.out.lines().all(|line| line.width() <= 80), "{}", run.out);
        let text = run.out.to_lowercase();
        let words = text.split(|c: char| !c.is_alphabetic() && c != '-').collect::<Vec<_>>().join(" ");
        for word in FORBIDDEN {
            assert!(!format!(" {words} ").contains(&format!(" {word} ")), "{name}: {word}");
        }
        for part in ["prediction", "prove a rated", "qualified persons"] {
            assert!(text.split_whitespace().collect::<Vec<_>>().join(" ").contains(part), "{name}: {part}");
        }
    }
}

#[test]
fn the_answer_is_on_the_first_screen() {
    let out = run_with(&["plan", "-"], MET.as_bytes()).out;
    let screen = out.lines().take(24).collect::<Vec<_>>().join("\n");
    // tau = 1.2 * 3300 uF * 1.05 * 22 kohm = 91.476 s; 91.476 s * ln(750/50) = 247.722 s; kept by the ten seconds.
    for part in ["PU-09", "DANGER", "750 V", "4 min 10 s after isolation", "R1 open: NEVER", "Verdict: met"] {
        assert!(screen.contains(part), "{part}: {screen}");
    }
}

#[test]
fn working_can_be_checked_by_hand() {
    let out = run_with(&["plan", "--working", "-"], MET.as_bytes()).out;
    assert!(out.contains("tau = R C = 23.1000 kohm x 3.96000 mF = 91.4760 s"), "{out}");
    let plain = run_with(&["plan", "-"], MET.as_bytes()).out;
    assert!(!plain.contains("tau = R C"), "{plain}");
}

#[test]
fn two_runs_give_the_same_bytes() {
    for format in ["text", "json", "markdown"] {
        let words = ["plan", "--example", "--working", "--format", format];
        assert_eq!(run(&words).out, run(&words).out);
    }
}

#[test]
fn a_pipe_gets_no_colour_codes() {
    for words in
        [&["plan", "--example"][..], &["plan", "no-such.yaml"], &["--help"], &["limits"], &["plan", "--exampel"]]
    {
        let output = program(words).env("CLICOLOR_FORCE", "1").env("TERM", "xterm-256color").output();
        let output = output.expect("the program runs");
        assert!(!output.stdout.contains(&0x1b) && !output.stderr.contains(&0x1b), "{words:?}");
    }
}

#[test]
fn markdown_says_what_the_text_says() {
    let out = run_with(&["plan", "-", "--format", "markdown"], MET.as_bytes()).out;
    for part in ["# PU-09", "> **WAIT**: 4 min 10 s after isolation", "| R1 | continuous power |", "**met**: site-rule"]
    {
        assert!(out.contains(part), "{part}: {out}");
    }
}

#[test]
fn a_procedure_is_printed_step_by_step_with_its_cautions_where_the_act_stands() {
    let run = run_with(&["plan", "-"], met_with_procedure().as_bytes());
    assert!(run.out.lines().all(|line| line.width() <= 80), "{}", run.out);
    if run.status == 3 {
        assert!(run.out.starts_with("*** INCOMPLETE ***\n"), "{}", run.out);
        return;
    }
    assert_eq!((run.status, run.err.as_str()), (0, ""), "{}", run.out);
    let text = run.out.split_whitespace().collect::<Vec<_>>().join(" ");
    let mut from = 0;
    for part in [
        "Procedure: 7 steps, 7 min 40 s. Verdict: met.",
        "THE STEPS",
        "Step 2 of 7, from 0 s, for 4 min 10 s (found from the slowest case, rounded up)",
        "Step 3 of 7, from 4 min 10 s, for 60 s",
        "READ P - N: prove the instrument on a known source, test, prove it again.",
        "Go on only if the reading at P - N is at most 49.9 V",
        "A higher reading points to R1 open",
        "WARNING Before T1 goes on",
        "DO Apply the tool",
        "WARNING Before ST1 goes on",
        "DO Put the strap on",
        "WARNING Hands may come near only after the test",
        "On by now: ST1",
        "DO Work begins",
        "WHAT THE PARTS BEAR IN EACH STEP",
        "STEPS WITH ONE PART FAILED",
        "3 R1 open P - N",
        "WHAT COMES BACK",
        "Leave ST1 on for as long as anyone works",
        "LIMITS",
        "ISOLATION TO END OF PROCEDURE",
    ] {
        let at = text[from..].find(part);
        assert!(at.is_some(), "{part}, in its place: {}", run.out);
        from += at.unwrap_or(0);
    }
}
