//! The exit status is the verdict.

use crate::run::{MET, THREE_PHASES, met_but, program, run, run_with};
use std::io::Write;
use std::process::Stdio;

fn status(bank: &str) -> i32 {
    let run = run_with(&["plan", "-"], bank.as_bytes());
    assert_eq!(run.err, "", "{bank}");
    assert!(!run.out.is_empty());
    run.status
}

#[test]
fn all_limits_met_and_no_rating_exceeded_is_status_0() {
    assert_eq!(status(MET), 0);
}

#[test]
fn a_limit_that_is_not_met_is_status_1() {
    assert_eq!(status(&met_but("within: 5 min", "within: 4 min")), 1);
}

#[test]
fn a_limit_that_a_single_fault_breaks_decides_only_where_it_asks_for_it() {
    assert_eq!(status(&met_but("within: 5 min", "within: 5 min, single_fault: true")), 1);
    assert_eq!(status(&met_but("within: 5 min", "within: 5 min, single_fault: false")), 0);
}

#[test]
fn a_rating_that_is_exceeded_is_status_1_and_one_that_is_absent_is_not() {
    assert_eq!(status(&met_but("power: 50 W", "power: 25 W")), 1);
    assert_eq!(status(&met_but("voltage: 1 kV", "voltage: 700 V")), 1);
    assert_eq!(status(&met_but("rated: 800 V", "rated: 700 V")), 1);
    assert_eq!(status(&met_but(", rated: 800 V", "")), 0);
}

#[test]
fn a_wait_of_never_with_every_part_healthy_is_status_1() {
    let start = MET.find("resistors:").expect("resistors");
    let run = run_with(&["plan", "-"], &MET.as_bytes()[..start]);
    assert_eq!(run.status, 1, "{}", run.err);
    assert!(run.out.contains("NEVER"), "{}", run.out);
    assert!(run.out.contains("750 V"), "{}", run.out);
}

#[test]
fn a_three_phase_bank_is_judged_from_the_worst_that_its_poles_leave() {
    let run = run_with(&["plan", "-"], THREE_PHASES.as_bytes());
    assert_eq!((run.status, run.err.as_str()), (1, ""));
    let text = run.out.split_whitespace().collect::<Vec<_>>().join(" ");
    for part in
        ["NOT MET iec-60831-1", "of the crest from line to line (623 V)", "(+) first, then", "Verdict: NOT MET."]
    {
        assert!(text.contains(part), "{part}: {}", run.out);
    }
    assert_eq!(status(&THREE_PHASES.replace("268 kohm", "150 kohm")), 0);
}

#[test]
fn a_three_phase_bank_expands_to_plain_parts_with_the_same_figures() {
    let expanded = run_with(&["plan", "-", "--expand"], THREE_PHASES.as_bytes());
    assert_eq!((expanded.status, expanded.err.as_str()), (0, ""));
    assert!(expanded.out.contains("id: CB.CA") && !expanded.out.contains("connection"), "{}", expanded.out);
    let figures = |text: &str| {
        let run = run_with(&["plan", "-", "--format", "json"], text.as_bytes());
        let mut plan: serde_json::Value = serde_json::from_str(&run.out).expect("JSON");
        plan["bank"]["input_sha256"] = serde_json::Value::Null;
        plan
    };
    assert_eq!(figures(THREE_PHASES), figures(&expanded.out));
}

#[test]
fn a_part_is_either_computed_or_named_as_not_computed() {
    for (key, part) in [
        ("procedure", "procedure:\n  - {step: Lock out and isolate, for: 0 s}\n"),
        ("sinks", "sinks:\n  - {id: K1, kind: constant-current, value: 1 mA, across: [P, N], stops_below: 30 V}\n"),
        ("hold_energy", "hold_energy: 10 J\n"),
    ] {
        let run = run_with(&["plan", "-"], format!("{MET}{part}").as_bytes());
        let incomplete = run.out.starts_with("*** INCOMPLETE ***\n");
        assert_eq!(incomplete, run.status == 3, "{key}: {}", run.out);
        assert!(!incomplete || run.out.contains(key), "{key}: {}", run.out);
    }
}

#[test]
fn the_example_and_the_draft_give_plans() {
    assert!(run(&["plan", "--example"]).status <= 1);
    let draft = run(&["draft"]);
    assert_eq!((draft.status, draft.err.as_str()), (0, ""));
    assert_eq!(status(&draft.out), 0);
}

#[test]
fn a_broken_pipe_keeps_the_verdict() {
    for (bank, verdict) in [(MET.to_string(), 0), (met_but("within: 5 min", "within: 4 min"), 1)] {
        let mut child = program(&["plan", "-"])
            .stdin(Stdio::piped())
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("the program starts");
        // The reader is gone before there is anything to read.
        drop(child.stdout.take());
        child.stdin.take().expect("a pipe").write_all(bank.as_bytes()).expect("the bank is read");
        let output = child.wait_with_output().expect("the program ends");
        assert_eq!(output.status.code(), Some(verdict));
        assert!(output.stderr.is_empty());
    }
}

#[cfg(target_os = "linux")]
#[test]
fn a_full_disk_is_status_2() {
    let full = std::fs::OpenOptions::new().write(true).open("/dev/full").expect("Linux has /dev/full");
    let output = program(&["draft"]).stdout(full).stderr(Stdio::piped()).output().expect("the program runs");
    assert_eq!(output.status.code(), Some(2));
    assert!(String::from_utf8_lossy(&output.stderr).contains("can't be written"));
}
