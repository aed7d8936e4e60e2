//! Where a bank comes from, and what happens where it can't be read or is wrong.

use crate::run::{MET, met_but, run, run_with, unused_file};
use std::time::{Duration, Instant};

/// Runs that refuse their input: status 2, nothing on standard output.
fn refusal(words: &[&str], stdin: &[u8]) -> String {
    let run = run_with(words, stdin);
    assert_eq!((run.status, run.out.as_str()), (2, ""), "{words:?}: {}", run.err);
    assert!(!run.tells("panicked"), "{}", run.err);
    run.err
}

#[test]
fn a_file_and_standard_input_give_the_same_bytes() {
    let path = unused_file();
    std::fs::write(&path, MET).expect("a file");
    let path = path.to_str().expect("a name in UTF-8");
    for format in ["text", "json", "markdown"] {
        let file = run(&["plan", path, "--format", format]);
        let stdin = run_with(&["plan", "-", "--format", format], MET.as_bytes());
        assert_eq!((file.status, file.out), (stdin.status, stdin.out));
    }
}

#[test]
fn a_missing_file_is_refused_with_what_can_be_done() {
    let err = refusal(&["plan", "no-such-bank.yaml"], b"");
    for part in ["no-such-bank.yaml", "ebbvolt draft", "--example", "plan -"] {
        assert!(err.contains(part), "{err}");
    }
}

#[test]
fn a_directory_is_refused_as_one() {
    assert!(refusal(&["plan", "."], b"").contains("directory"));
}

#[test]
fn one_bank_at_a_time_and_at_least_one() {
    for words in [&["plan"][..], &["plan", "a.yaml", "--example"], &["plan", "--example", "--charged-to", "5V"]] {
        assert!(refusal(words, b"").contains("--example"));
    }
    assert!(refusal(&["plan", "--example", "--save", "x.yaml"], b"").contains("--save"));
}

#[test]
fn a_quick_form_that_lacks_a_flag_says_which() {
    let err = refusal(&["plan", "--charged-to", "565V", "--bleeder", "22k"], b"");
    assert!(err.contains("--capacitance") && err.contains("--touch-voltage") && !err.contains("--highest"), "{err}");
}

#[test]
fn a_quick_form_with_a_wrong_quantity_is_refused() {
    for capacitance in ["3300 V", "3300", "-5uF", "NaN uF", "0 uF", "3,3 mF", "1 MF", ""] {
        let words =
            ["--charged-to", "565V", "--bleeder", "22k", "--touch-voltage", "50V", "--capacitance", capacitance];
        refusal(&[&["plan"][..], &words].concat(), b"");
    }
}

#[test]
fn save_writes_the_file_that_the_flags_stand_for_and_never_overwrites() {
    let path = unused_file();
    let name = path.to_str().expect("a name in UTF-8");
    let flags = ["--charged-to", "565V", "--capacitance", "3300uF", "--bleeder", "22k", "--touch-voltage", "50V"];
    let words = [&["plan", "--format", "json"][..], &flags, &["--save", name]].concat();
    let quick = run(&words);
    assert_eq!(quick.status, 0, "{}", quick.err);
    assert!(quick.tells(name), "{}", quick.err);
    let saved = std::fs::read(&path).expect("the file is there");
    let from_file = run(&["plan", "--format", "json", name]);
    assert_eq!((from_file.status, from_file.out), (quick.status, quick.out));
    assert!(refusal(&words, b"").contains("exists"));
    assert_eq!(std::fs::read(&path).expect("the file is still there"), saved);
}

#[test]
fn a_wrong_file_is_refused_with_every_error_at_its_place() {
    let text = met_but("value: 3300 uF", "value: 3300 V").replace("role: bleeder", "role: bleader");
    let err = refusal(&["plan", "-"], text.as_bytes());
    for part in ["standard input:7:", "standard input:10:", "3300 V", "bleader", "bleeder", "2 errors"] {
        assert!(err.contains(part), "{part}: {err}");
    }
}

#[test]
fn bad_bytes_of_any_kind_are_refused_at_once() {
    let brackets = "[".repeat(20_000);
    let aliases = "a: &a [x, x]\nb: &b [*a, *a, *a, *a]\nc: &c [*b, *b, *b, *b]\nd: [*c, *c, *c, *c]\n".to_string();
    let cases: [(&str, Vec<u8>); 9] = [
        ("empty", Vec::new()),
        ("binary", (0..=255).cycle().take(4096).collect()),
        ("too long", vec![b'a'; 5 * 1024 * 1024]),
        ("endless comment", [b"# ".repeat(3 * 1024 * 1024), MET.into()].concat()),
        ("brackets", brackets.into()),
        ("aliases", aliases.into()),
        ("twice", met_but("tag: PU-09", "tag: PU-09\ntag: PU-10").into()),
        ("tab", met_but("    role", "\trole").into()),
        ("escapes", met_but("tag: PU-09", "tag: PU-09\nt\u{1b}[31mx: 1").into()),
    ];
    for (name, bytes) in cases {
        let start = Instant::now();
        let err = refusal(&["plan", "-"], &bytes);
        // It takes milliseconds; this only tells a program that hangs from a machine that is busy.
        assert!(start.elapsed() < Duration::from_secs(60), "{name}: {:?}", start.elapsed());
        assert!(err.contains("ERROR in standard input:"), "{name}: {err}");
        assert!(!err.contains('\u{1b}'), "{name}: {err}");
        assert!(err.len() < 100_000, "{name}: {} bytes", err.len());
    }
}
