//! What every printed plan has to keep to, whatever it says.

mod steps;

use super::sample;
use super::{plan_markdown, plan_text};
use crate::plan::{Plan, Verdict};
use crate::quantity::{Energy, Quantity, Time, Voltage};
use unicode_width::UnicodeWidthStr;

/// Words that no output may use of a bank (the contract's page on wording).
const FORBIDDEN: [&str; 6] = ["safe", "dead", "de-energised", "deenergised", "harmless", "ok to touch"];

fn first_screen(plan: &Plan) -> String {
    on_one_line(&plan_text(plan, 80).lines().take(24).collect::<Vec<_>>().join(" "))
}

fn on_one_line(text: &str) -> String {
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}

/// A plan with names that are long, wide and hostile, 40 test points, and figures of every size.
fn unruly() -> Plan {
    let mut plan = sample::with_steps();
    plan.bank.tag = "T".repeat(200);
    plan.bank.title = Some("泵站电容器组 ".repeat(20) + "\u{1b}[31m|**x**");
    plan.bank.notes = Some("line\nline\u{202e}".repeat(30));
    let wait = plan.waits[0].clone();
    plan.waits = (0..40)
        .map(|i| {
            let mut wait = wait.clone();
            wait.across = [format!("node-{}-{i}", "é".repeat(i)), "N".repeat(40)];
            wait.slowest = Some(Time::from_si(1e-9 * 10f64.powi(i as i32)));
            wait.keep = Some(Time::from_si(1e-9 * 10f64.powi(i as i32)));
            wait.at_isolation = Voltage::from_si(1e-4 * 10f64.powi(i as i32 / 4));
            wait.faults[0].fault = format!("{} open", "R".repeat(i + 1));
            wait
        })
        .collect();
    for (i, resistor) in plan.resistors.iter_mut().enumerate() {
        resistor.id = "resistor-".repeat(4 + 8 * i);
        resistor.elements = 4_000_000_000;
        resistor.value = crate::quantity::Resistance::from_si(123_456.789_012_345);
    }
    let ids: Vec<String> = plan.resistors.iter().map(|r| r.id.clone()).collect();
    let pairs: Vec<_> = plan.waits.iter().map(|wait| wait.across.clone()).collect();
    for step in &mut plan.steps {
        step.step = "\u{1b}[2J泵 step | `x`\n\u{202e}".repeat(12);
        step.connect = ids.clone();
        step.measure = pairs.clone();
        for (i, part) in step.parts.iter_mut().enumerate() {
            part.id = ids[i % ids.len()].clone();
        }
        step.faults.iter_mut().for_each(|fault| fault.fault = format!("{} open", "F".repeat(90)));
        if let Some(hold) = &mut step.hold {
            hold.at = pairs.clone();
            hold.shown_faults = ids.clone();
        }
    }
    plan.recovery.iter_mut().for_each(|r| r.across = pairs[39].clone());
    plan
}

#[test]
fn text_stays_within_its_columns_whatever_the_names_are() {
    for plan in [sample::plan(), sample::with_steps(), unruly()] {
        for width in [60, 80, 100, 120] {
            let text = plan_text(&plan, width);
            for line in text.lines() {
                assert!(line.width() <= width, "{width}: {line}");
                assert_eq!(line, line.trim_end());
            }
        }
    }
}

#[test]
fn nothing_from_the_file_reaches_the_terminal_raw() {
    for text in [plan_text(&unruly(), 80), plan_markdown(&unruly())] {
        assert!(!text.chars().any(|c| (c.is_control() && c != '\n') || c == '\u{202e}'));
    }
}

#[test]
fn figures_are_never_broken_over_two_lines_in_80_columns() {
    for line in plan_text(&sample::with_steps(), 80).lines() {
        let last = line.split_whitespace().next_back().unwrap_or_default();
        assert!(line.len() < 60 || last.len() == 64 || last.parse::<f64>().is_err(), "{line}");
    }
}

#[test]
fn the_first_screen_has_the_answer() {
    let screen = first_screen(&sample::plan());
    for part in [
        "PU-07: Lift pump drive, DC bus",
        "750 V between P and N",
        "up to 557 J stored (nominal 264 J)",
        "DANGER",
        "a prediction",
        "prove a rated instrument on a known source, test, prove it again",
        "WAIT 4 min 10 s after isolation, then TEST",
        "predicted below 50 V",
        "R1 open: NEVER; P - N stays at up to 750 V",
        "Otherwise at most 10 min 50 s (R2 open, at P - N)",
        "Verdict: NOT MET",
    ] {
        let labels_apart = screen.replace("IF ONE PART ", "").replace("HAS FAILED ", "");
        assert!(labels_apart.contains(part), "{part}: {screen}");
    }
}

#[test]
fn a_wait_of_never_says_so_and_to_what_it_settles() {
    let mut plan = sample::plan();
    plan.waits[1].slowest = None;
    plan.waits[1].keep = None;
    plan.waits[1].settles_at = Voltage::from_si(375.01);
    plan.waits[2].slowest = None;
    plan.waits[2].keep = None;
    let screen = first_screen(&plan);
    assert!(screen.contains("WAIT NEVER. No wait brings every test point below 50 V."), "{screen}");
    assert!(screen.contains("P - M stays at up to 376 V (1 test point more never comes below)."), "{screen}");
    assert!(screen.contains("The other test points: 4 min 10 s after isolation."), "{screen}");
    assert!(screen.contains("Waits: 2 NEVER."), "{screen}");
}

#[test]
fn an_incomplete_plan_says_so_before_anything_else_and_beside_its_wait() {
    let mut plan = sample::plan();
    plan.verdict = Verdict::Incomplete;
    plan.not_computed = vec!["a three-phase bank".into()];
    assert!(plan_text(&plan, 80).starts_with("*** INCOMPLETE ***\n"));
    assert!(plan_markdown(&plan).starts_with("**INCOMPLETE.**"));
    let screen = first_screen(&plan);
    assert!(screen.contains("Not computed: a three-phase bank."), "{screen}");
    assert!(screen.contains("WAIT NOT TO BE RELIED ON"), "{screen}");
    assert!(plan_text(&plan, 80).contains("Verdict: INCOMPLETE."));
    plan.waits.clear();
    plan.stored = None;
    assert!(first_screen(&plan).contains("not computed by this version."));
}

#[test]
fn an_energy_that_is_waited_for_stands_beside_the_voltage() {
    let mut plan = sample::plan();
    plan.hold_energy = Some(Energy::from_si(10.0));
    assert!(first_screen(&plan).contains("predicted below 50 V with at most 10 J stored"));
}

#[test]
fn no_output_speaks_as_if_a_prediction_were_a_measurement() {
    let mut empty = sample::plan();
    empty.stored.iter_mut().for_each(|stored| stored.bands.clear());
    for wait in &mut empty.waits {
        wait.slowest = Some(Time::from_si(0.0));
        wait.keep = wait.slowest;
    }
    for plan in [sample::plan(), sample::with_steps(), steps::charging(), steps::endless(), empty] {
        for text in [plan_text(&plan, 80), plan_markdown(&plan)] {
            let text = text.to_lowercase();
            let words =
                format!(" {} ", text.split(|c: char| !c.is_alphabetic() && c != '-').collect::<Vec<_>>().join(" "));
            assert!(FORBIDDEN.iter().all(|word| !words.contains(&format!(" {word} "))), "{text}");
            assert!(text.contains("prediction") && text.contains("qualified persons"));
        }
    }
}

#[test]
fn working_is_there_only_where_it_was_asked_for() {
    let mut plan = sample::plan();
    assert!(plan_text(&plan, 80).contains("t = tau ln(V0/V) = 45.7380 s x ln(750.000 V / 50.0000 V) = 123.861 s"));
    plan.working = None;
    assert!(!plan_text(&plan, 80).contains("WORKING"));
}
