//! No output says of a circuit what only a test of its voltage can say, and every plan asks for that test.

use crate::plans;
use ebbvolt::cli::{Terminal, run};
use ebbvolt::report::{plan_json, plan_markdown, plan_text};

/// Words that would tell a reader that a circuit can be touched.
const CLAIMS: [&str; 9] =
    ["safe", "safely", "dead", "de-energised", "de-energized", "deenergised", "deenergized", "harmless", "ok to touch"];

/// The claims in a text, as whole words, whatever their case and however the lines are broken.
fn claims(text: &str) -> Vec<&'static str> {
    let joined = text.replace(['|', '*', '`'], " ").to_lowercase();
    let joined = format!(" {} ", joined.split_whitespace().collect::<Vec<_>>().join(" "));
    let letter = |c: char| c.is_alphanumeric() || c == '-';
    let whole = |at: usize, claim: &str| {
        let (before, after) = (joined[..at].chars().next_back(), joined[at + claim.len()..].chars().next());
        !before.is_some_and(letter) && !after.is_some_and(letter)
    };
    CLAIMS.into_iter().filter(|claim| joined.match_indices(claim).any(|(at, _)| whole(at, claim))).collect()
}

/// What a command line prints, on both streams.
fn printed(words: &[&str]) -> String {
    let (mut out, mut err) = (Vec::new(), Vec::new());
    let words = std::iter::once(&"ebbvolt").chain(words).map(Into::into);
    run(words, &mut std::io::empty(), &mut out, &mut err, Terminal::NONE);
    String::from_utf8([out, err].concat()).expect("UTF-8")
}

#[test]
fn nothing_that_is_printed_calls_a_circuit_harmless() {
    let mut texts: Vec<(String, String)> = Vec::new();
    for (name, plan) in plans() {
        texts.push((format!("{name}, text"), plan_text(plan, 80)));
        texts.push((format!("{name}, markdown"), plan_markdown(plan)));
        texts.push((format!("{name}, JSON"), plan_json(plan).expect("finite")));
    }
    for words in [
        &["--help"][..],
        &["-h"],
        &["plan", "--help"],
        &["limits", "--help"],
        &["draft", "--help"],
        &["size", "--help"],
        &["size", "bleeder", "--help"],
        &["size", "bleeder", "no-such-bank.yaml"],
        &["sheet", "--help"],
        &["label", "--help"],
        &["trace", "--help"],
        &["sheet", "--example"],
        &["sheet", "--example", "--format", "markdown"],
        &["sheet", "--example", "--format", "text"],
        &["label", "--example"],
        &["trace", "--example"],
        &["trace", "--example", "--format", "svg"],
        &["draft"],
        &["limits"],
        &["limits", "--format", "markdown"],
        &["limits", "--format", "csv"],
        &["limits", "--format", "json"],
        &["plan", "no-such-bank.yaml"],
        &["plan", "--charged-to", "30V", "--capacitance", "1uF", "--bleeder", "22k", "--touch-voltage", "50V"],
        &["plan", "--charged-to", "565V", "--capacitance", "1uF", "--bleeder", "22k", "--touch-voltage", "50"],
    ] {
        texts.push((words.join(" "), printed(words)));
    }
    for (what, text) in &texts {
        assert!(text.len() > 40, "{what} prints nothing");
        assert!(claims(text).is_empty(), "{what} says {:?}", claims(text));
    }
}

#[test]
fn a_claim_is_found_in_any_case_and_across_lines_but_not_inside_a_word() {
    assert_eq!(claims("The bus is SAFE."), ["safe"]);
    assert_eq!(claims("it is OK\n  to touch, and de-energised"), ["de-energised", "ok to touch"]);
    assert_eq!(claims("| **dead** | `harmless` |"), ["dead", "harmless"]);
    assert!(claims("electrical safety orders, a deadline, unsafe, fail-safe wording, deadband").is_empty());
}

#[test]
fn every_plan_says_that_it_is_a_prediction_and_that_a_test_comes_before_touch() {
    for (name, plan) in plans() {
        for text in [plan_text(plan, 80), plan_markdown(plan)] {
            let joined = text.split_whitespace().collect::<Vec<_>>().join(" ").to_lowercase();
            for part in ["prediction", "predicted below", "prove a rated instrument", "prove it again"] {
                assert!(joined.contains(part), "{name} lacks `{part}`: {text}");
            }
        }
    }
}
