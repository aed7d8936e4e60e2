//! Help, version, and command lines that are not understood.

use crate::run::run;

#[test]
fn without_arguments_it_prints_help_and_ends_with_status_2() {
    let run = run(&[]);
    assert_eq!(run.status, 2);
    assert!(run.out.is_empty());
    assert!(run.tells("ebbvolt plan --example"), "{}", run.err);
}

#[test]
fn help_goes_to_standard_output_within_80_columns_and_shows_an_example() {
    let of = ["plan", "sheet", "label", "trace", "limits", "draft"].map(|command| vec![command, "--help"]);
    for words in [vec!["--help"], vec!["-h"]].into_iter().chain(of) {
        let words = &words[..];
        let run = run(words);
        assert_eq!((run.status, run.err.as_str()), (0, ""), "{words:?}");
        assert!(run.out.contains("xample"), "{}", run.out);
        assert!(run.out.lines().all(|line| line.chars().count() <= 80), "{}", run.out);
    }
}

#[test]
fn help_names_only_commands_that_exist() {
    let help = run(&["--help"]).out;
    for command in ["readings", "clock", "register", "schema"] {
        assert_eq!(run(&[command]).status, 2, "{command} exists: give it a place in these tests");
        assert!(!help.lines().any(|line| line.trim_start().starts_with(command)), "{help}");
    }
}

#[test]
fn the_version_is_that_of_the_package() {
    let run = run(&["--version"]);
    assert_eq!((run.status, run.out), (0, format!("ebbvolt {}\n", env!("CARGO_PKG_VERSION"))));
}

#[test]
fn a_misspelt_flag_or_command_is_refused_and_the_near_one_named() {
    for (words, near) in [(&["plan", "--exampel"][..], "--example"), (&["plam"], "plan")] {
        let run = run(words);
        assert_eq!((run.status, run.out.as_str()), (2, ""), "{words:?}");
        assert!(run.tells(near), "{}", run.err);
    }
}

#[test]
fn a_plan_has_no_csv_and_the_error_lists_what_it_has() {
    let run = run(&["plan", "--example", "--format", "csv"]);
    assert_eq!((run.status, run.out.as_str()), (2, ""));
    assert!(["text", "json", "markdown"].iter().all(|format| run.tells(format)), "{}", run.err);
}

#[test]
fn limits_are_listed_in_every_format_with_how_they_were_checked() {
    let texts = ["text", "json", "markdown", "csv"].map(|format| run(&["limits", "--format", format]));
    for run in &texts {
        assert_eq!((run.status, run.err.as_str()), (0, ""));
        for part in ["iec-60204-1", "osha-1910-269-w1", "quoted", "memory"] {
            assert!(run.out.replace('\\', "").contains(part), "{part}: {}", run.out);
        }
    }
    let [text, json, _, csv] = texts.map(|run| run.out);
    let entries: Vec<serde_json::Value> = serde_json::from_str(&json).expect("JSON");
    assert_eq!(csv.lines().count(), entries.len() + 1);
    assert!(entries.iter().all(|entry| entry["check"] == "check the edition in force"));
    assert!(text.lines().all(|line| line.chars().count() <= 80), "{text}");
}
