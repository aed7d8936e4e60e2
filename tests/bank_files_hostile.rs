//! Bank files that nobody means well by: no bytes may bring the reader down, hold it up, or leave it without a place
//! to point at.

use ebbvolt::bank::codes::CODES;
use ebbvolt::bank::file::{MAX_BYTES, read};
use ebbvolt::data::{demo_banks, draft};
use ebbvolt::finding::{Finding, Severity};
use proptest::prelude::*;
use std::time::{Duration, Instant};

/// What a person at a terminal still takes for "at once"; the tests run unoptimised, on a busy machine.
const AT_ONCE: Duration = Duration::from_secs(10);

/// The errors of a file, each of which is fit to be shown.
fn errors(bytes: &[u8]) -> Vec<Finding> {
    let began = Instant::now();
    let result = read("bank.yaml", bytes);
    let took = began.elapsed();
    assert!(took < AT_ONCE, "{took:?}");
    match result {
        Ok((_, notes)) => {
            assert!(!notes.has_errors());
            notes.into_iter().for_each(|note| fit_to_show(&note));
            vec![]
        }
        Err(findings) => {
            assert!(findings.has_errors());
            assert!(findings.as_slice().len() <= 51);
            for finding in findings.as_slice() {
                assert_eq!(finding.severity, Severity::Error);
                fit_to_show(finding);
            }
            findings.into_iter().collect()
        }
    }
}

fn fit_to_show(finding: &Finding) {
    assert!(!finding.text.is_empty(), "{finding:?}");
    assert!(finding.text.chars().count() < 600, "{finding:?}");
    assert!(finding.help.as_ref().is_none_or(|help| help.len() < 2000), "{finding:?}");
    assert!(!finding.text.chars().any(|c| c.is_control() && c != '\n'), "{finding:?}");
    assert!(CODES.iter().any(|(code, _)| *code == finding.code), "`{}` is not in the list of codes", finding.code);
    let place = finding.place.as_ref().unwrap_or_else(|| panic!("no place: {finding:?}"));
    assert!(place.line >= 1 && place.column >= 1 && place.length >= 1, "{finding:?}");
    assert!(place.source.chars().count() <= 200 && !place.source.chars().any(char::is_control), "{finding:?}");
    let shown = place.source_column..=place.source_column + place.source.chars().count();
    assert!(shown.contains(&place.column), "{finding:?}");
}

/// The one error of a file.
fn only_error(bytes: &[u8]) -> (&'static str, usize, usize) {
    let errors = errors(bytes);
    let [error] = errors.as_slice() else { panic!("{errors:#?}") };
    let place = error.place.as_ref().expect("checked above");
    (error.code, place.line, place.column)
}

#[test]
fn a_file_that_is_no_text_is_refused_at_its_first_bad_byte() {
    assert_eq!(only_error(b"tag: x\nnotes: \xff\xfe"), ("not-text", 2, 8));
    assert_eq!(only_error(b"\x7fELF\x02\x01\x01\0\0\0"), ("unprintable-character", 1, 1));
    assert_eq!(only_error(&[0; 1000]), ("unprintable-character", 1, 1));
    assert_eq!(only_error(b"\xff\xfet\0a\0g\0"), ("not-text", 1, 1));
}

#[test]
fn an_empty_file_is_refused_at_its_beginning() {
    for text in ["", "\n\n", "# a comment\n", "---\n", "---\n...\n", "\u{feff}", "~\n", "   "] {
        assert_eq!(only_error(text.as_bytes()), ("empty-file", 1, 1), "{text:?}");
    }
}

#[test]
fn a_file_without_keys_is_refused() {
    for text in ["just a word\n", "- id: C1\n", "[1, 2]\n", "\"quoted\"\n"] {
        assert_eq!(only_error(text.as_bytes()).0, "not-a-mapping", "{text:?}");
    }
}

#[test]
fn a_file_over_four_mebibytes_is_refused_unread() {
    let bytes = vec![b'['; MAX_BYTES + 1];
    assert_eq!(only_error(&bytes), ("file-too-large", 1, 1));
    assert_eq!(only_error(&vec![0xff; MAX_BYTES + 1]).0, "file-too-large");
}

#[test]
fn nesting_over_sixty_four_deep_is_refused() {
    let nested = |depth: usize| format!("tag: {}{}\n", "[".repeat(depth), "]".repeat(depth));
    // The mapping of the file is the first level.
    assert!(errors(nested(63).as_bytes()).iter().all(|e| e.code != "nested-too-deep"));
    assert_eq!(only_error(nested(64).as_bytes()), ("nested-too-deep", 1, 69));
    for hostile in
        ["[", "{", "- ", "{a: ", "[{", "? ", "- - ", "\"", "{? ", "&a [", "!!x [", "a: [", "\n-", "\n ", "'", "|\n"]
    {
        errors(hostile.repeat(20_000).as_bytes());
    }
}

#[test]
fn a_mebibyte_of_anything_is_read_or_refused_in_time() {
    const LONG: usize = 1024 * 1024;
    let fill = |piece: &str| piece.repeat(LONG / piece.len());
    for piece in
        ["a", "a ", "a: ", "[],", "a,", "- a\n", "# c\n", "\n", "'a' ", "\"", "{}", "x: y\n", "*a ", "&a b\n", "é"]
    {
        errors(fill(piece).as_bytes());
        errors(format!("tag: [{}", fill(piece)).split_at(LONG - 4).0.as_bytes());
    }
}

#[test]
fn a_few_aliases_cannot_stand_for_billions_of_values() {
    let mut text = String::from("a: &a [x, x, x, x, x, x, x, x, x, x]\n");
    for level in b'b'..=b'k' {
        let below = char::from(level - 1);
        let list = vec![format!("*{below}"); 10].join(", ");
        text.push_str(&format!("{0}: &{0} [{list}]\n", char::from(level)));
    }
    let found = errors(text.as_bytes());
    assert!(found.iter().any(|e| e.code == "alias-refused"), "{found:?}");
    let chain: String = (0..200).map(|i| format!("k{}: &k{} [*k{i}]\n", i + 1, i + 1)).collect();
    let found = errors(format!("k0: &k0 x\n{chain}").as_bytes());
    assert!(found.iter().any(|e| e.code == "nested-too-deep"), "{found:?}");
    assert!(errors(b"tag: &a [*a]\n").iter().any(|e| e.code == "alias-refused"));
    assert_eq!(only_error(b"tag: *nowhere\n"), ("yaml-syntax", 1, 6));
}

#[test]
fn very_many_errors_are_counted_and_fifty_are_listed() {
    let keys: String = (0..50_000).map(|i| format!("key{i}: 1\n")).collect();
    let found = errors(keys.as_bytes());
    assert_eq!(found.len(), 51);
    assert_eq!(found[50].code, "more-errors");
    // Besides the unknown keys, five that have to be there are missing.
    assert_eq!(found[50].text, format!("and {} more errors, which are not listed", 50_000 + 5 - 50));
}

#[test]
fn a_bank_of_very_many_parts_with_a_slip_in_each_is_refused_in_time() {
    let head = "ebbvolt: 1\ntag: X\ntouch_voltage: 50 V\ncharged_to: 565 V\ncapacitors:\n";
    let dangling: String =
        (0..10_000).map(|i| format!("- {{id: C{i}, value: 1 uF, across: [n{i}, m{i}]}}\n")).collect();
    assert_eq!(errors(format!("{head}{dangling}").as_bytes()).len(), 51);
    let loops: String = (0..5_000)
        .map(|i| format!("- {{id: C{i}, value: 1 uF, across: [P, n{}], charged_to: {i} V}}\n", i / 2))
        .collect();
    assert!(errors(format!("{head}{loops}").as_bytes()).iter().any(|e| e.code == "capacitor-loop"));
    let unknown: String = (0..10_000).map(|i| format!("- [P, nm{i}]\n")).collect();
    let text = format!("{head}- {{id: C1, value: 1 uF}}\ntest_points:\n{unknown}");
    assert!(errors(text.as_bytes()).iter().any(|e| e.code == "unknown-node"));
}

#[test]
fn a_long_line_is_shown_in_part_around_the_slip() {
    let keys: Vec<String> = (0..500).map(|i| format!("{{id: C{i}, value: 1 uF, across: [P, N]}}")).collect();
    let text = format!(
        "{{ebbvolt: 1, tag: X, touch_voltage: 50 V, charged_to: 565 V, capacitors: [{}, {{id: D, value: 3 V}}]}}",
        keys.join(", ")
    );
    let found = errors(text.as_bytes());
    let place = found[0].place.as_ref().expect("checked above");
    let shown: String = place.source.chars().skip(place.column - place.source_column).take(place.length).collect();
    assert_eq!((found.len(), shown.as_str()), (1, "3 V"));
}

/// Pieces of which YAML and bank files are made, for texts that are nearly right.
fn piece() -> impl Strategy<Value = String> {
    let words = [
        "ebbvolt: 1\n",
        "tag: ",
        "capacitors:\n",
        "  - id: C1\n",
        "    value: 3300 uF\n",
        "[P, N]",
        "{",
        "}",
        "[",
        "]",
        ":",
        ": ",
        ", ",
        "- ",
        "\n",
        "  ",
        "\t",
        "#",
        "'",
        "\"",
        "|",
        ">",
        "&a ",
        "*a",
        "!",
        "!!str ",
        "%",
        "@",
        "`",
        "?",
        "---\n",
        "...\n",
        "<<: ",
        "across: ",
        "charged_to: ",
        "{ac_rms: 400 V, rise: 10 %}",
        "50 V",
        "~",
        "null",
        "\\",
        "\u{feff}",
        "\u{85}",
        "\u{2028}",
        "é",
        "\r",
        "\r\n",
        "procedure:\n",
        "phases: 3",
        "0",
        "-1",
        "1e999 V",
        "limits: [{use: x}]\n",
        "%YAML 1.2\n",
        "%TAG ! x\n",
        "|2-\n",
        "\u{0}",
    ];
    prop_oneof![9 => prop::sample::select(words.to_vec()).prop_map(String::from), 1 => ".{0,6}"]
}

fn valid() -> Vec<&'static str> {
    demo_banks().iter().map(|(_, text)| *text).chain([draft()]).collect()
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 512, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn arbitrary_bytes_are_answered(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        errors(&bytes);
    }

    #[test]
    fn arbitrary_text_is_answered(text in "\\PC{0,200}") {
        errors(text.as_bytes());
    }

    #[test]
    fn texts_of_yaml_pieces_are_answered(pieces in prop::collection::vec(piece(), 0..60)) {
        errors(pieces.concat().as_bytes());
    }

    #[test]
    fn a_valid_file_with_pieces_cut_and_put_in_is_answered(
        which in 0..7usize,
        edits in prop::collection::vec((any::<prop::sample::Index>(), 0..12usize, piece()), 1..5),
    ) {
        let mut text: Vec<char> = valid()[which % valid().len()].chars().collect();
        for (at, cut, put) in edits {
            let at = at.index(text.len());
            let end = (at + cut).min(text.len());
            text.splice(at..end, put.chars());
        }
        errors(text.into_iter().collect::<String>().as_bytes());
    }

    #[test]
    fn a_valid_file_with_flipped_bytes_is_answered(
        which in 0..7usize,
        flips in prop::collection::vec((any::<prop::sample::Index>(), any::<u8>()), 1..6),
    ) {
        let mut bytes = valid()[which % valid().len()].as_bytes().to_vec();
        for (at, byte) in flips {
            let at = at.index(bytes.len());
            bytes[at] = byte;
        }
        errors(&bytes);
    }

    #[test]
    fn a_valid_file_cut_off_anywhere_is_answered(which in 0..7usize, at in any::<prop::sample::Index>()) {
        let bytes = valid()[which % valid().len()].as_bytes();
        errors(&bytes[..at.index(bytes.len())]);
    }
}
