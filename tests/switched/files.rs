//! `switched` in the bank file: what is read, what is refused and where, what is written.

use super::*;
use ebbvolt::bank::description::Switched;
use ebbvolt::data::draft;

fn text(more: &str) -> String {
    format!(
        "ebbvolt: 1\ntag: T\ntouch_voltage: 50 V\ncharged_to: {{nominal: 500 V, highest: 600 V}}\ncapacitors:\n  - \
         {{id: C1, value: 1 mF}}\nresistors:\n  - id: RS\n    role: bleeder\n    value: 1 kohm\n    switched: {more}\n"
    )
}

fn read(text: &str) -> Switched {
    let (bank, _) = file::read("switched.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{e:?}\n{text}"));
    bank.description().resistors[0].switched.expect("it is switched")
}

#[test]
fn every_key_is_read_and_every_key_may_be_left_out() {
    let seconds = Time::from_si;
    let all = read(&text("{closes_after: 100 ms, opens_after: 50 ms, discharges: 5, every: 10 min}"));
    let expected =
        Switched { closes_after: seconds(0.1), opens_after: seconds(0.05), discharges: 5, every: Some(seconds(600.0)) };
    assert_eq!(all, expected);
    let none = read(&text("{}"));
    assert_eq!(none, Switched { closes_after: seconds(0.0), opens_after: seconds(0.0), discharges: 1, every: None });
    assert_eq!(none, Switched::default());
}

/// One error, of this code, on line 11 at the word, that says so.
#[track_caller]
fn refused(text: &str, code: &str, word: &str, says: &str) {
    let errors = file::read("switched.yaml", text.as_bytes()).expect_err("it is refused").into_sorted();
    assert_eq!(errors.len(), 1, "{errors:?}");
    let error = &errors[0];
    let place = error.place.as_ref().expect("it has a place");
    let line = text.lines().nth(place.line - 1).expect("the line is there");
    let pointed: String = line.chars().skip(place.column - 1).collect();
    assert!(pointed.starts_with(word), "`{pointed}` for `{word}`");
    let said = format!("{} {}", error.text, error.help.clone().unwrap_or_default());
    assert!(error.code == code && said.contains(says), "{code}: {error:?}");
}

#[test]
fn what_is_wrong_with_a_contact_is_found_where_it_stands() {
    refused(&text("true"), "wrong-shape", "true", "closes_after");
    refused(&text("{close_after: 1 s}"), "unknown-key", "close_after", "`closes_after`");
    refused(&text("{closes_after: 100}"), "bad-quantity", "100", "a time is due");
    refused(&text("{opens_after: -1 s}"), "bad-quantity", "-1 s", "negative");
    refused(&text("{discharges: 2.5, every: 1 min}"), "bad-number", "2.5", "whole number");
    refused(&text("{discharges: 0}"), "count-out-of-range", "0", "from 1");
    refused(&text("{discharges: 5}"), "missing-key", "switched", "every");
    refused(&text("{discharges: 5, every: five}"), "bad-quantity", "five", "");
    refused(&text("{every: 0 s}"), "not-above-zero", "0 s", "zero");
    let short = text("{closes_after: 2 s, opens_after: 1 s, every: 3 s}");
    refused(&short, "cycle-too-short", "3 s", "both delays");
    for role in ["balancing", "series", "leakage"] {
        let other = text("{closes_after: 2 s}").replace("role: bleeder", &format!("role: {role}"));
        refused(&other, "switched-is-no-bleeder", "switched", "role: bleeder");
    }
    let tool = text("{closes_after: 2 s}").replace("role: bleeder", "role: tool");
    refused(&tool, "switched-is-no-bleeder", "switched", "connected by a step");
}

#[test]
fn a_contact_on_a_three_phase_part_is_that_of_every_leg_and_is_written_so() {
    let three = "{ebbvolt: 1, tag: T, touch_voltage: 50 V, terminals: [A, B, C], \
                 charged_to: {ac_rms: 400 V, rise: 10 %, phases: 3, neutral: isolated}, \
                 capacitors: [{id: CB, value: 100 uF, phases: 3, connection: star}], \
                 resistors: [{id: RD, role: bleeder, value: 10 kohm, phases: 3, connection: delta, \
                 switched: {closes_after: 250 ms, discharges: 3, every: 2 min}}]}";
    let (bank, _) = file::read("three.yaml", three.as_bytes()).expect("valid");
    for bank in [bank.expanded(), bank] {
        let written = file::write(&bank);
        assert!(written.contains("switched: {closes_after: 250 ms, discharges: 3, every: 120 s}"), "{written}");
        let (again, _) = file::read("written.yaml", written.as_bytes()).expect("valid");
        assert_eq!(again, bank);
    }
    let (plain, _) = file::read("plain.yaml", text("{}").as_bytes()).expect("valid");
    assert!(file::write(&plain).contains("switched: {}"));
    assert_eq!(file::read("again.yaml", file::write(&plain).as_bytes()).expect("valid").0, plain);
}

#[test]
fn the_draft_names_the_key() {
    assert!(draft().contains("# switched: {closes_after:"));
}
