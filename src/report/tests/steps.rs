//! What the steps of a procedure have to say, and where.

use super::super::{plan_markdown, plan_text, sample};
use super::{first_screen, on_one_line};
use crate::plan::Plan;
use crate::quantity::{Energy, Quantity, Voltage};

/// The procedure with a second step that never ends.
pub(super) fn endless() -> Plan {
    let mut plan = sample::with_steps();
    plan.steps[1].never = true;
    plan
}

/// The procedure with a supply in place of the tool.
pub(super) fn charging() -> Plan {
    let mut plan = sample::with_steps();
    plan.steps[3].connect = vec!["S1".into()];
    plan.steps[3].parts[2].id = "S1".into();
    plan.steps[3].test_points[0].highest = Voltage::from_si(564.2);
    plan
}

/// The entry of a step, on one line.
fn entry(plan: &Plan, number: usize) -> String {
    let text = plan_text(plan, 80);
    let start = text.find(&format!("\nStep {number} of ")).expect("the step is there");
    let entry = &text[start + 1..];
    on_one_line(&entry[..entry.find("\n\n").unwrap_or(entry.len())])
}

/// Every part stands in the text, in this order.
fn in_order(text: &str, parts: &[&str]) {
    let mut from = 0;
    for part in parts {
        let at = text[from..].find(part);
        assert!(at.is_some(), "{part}, in its place: {text}");
        from += at.unwrap_or(0) + part.len();
    }
}

#[test]
fn the_steps_stand_between_the_waits_and_the_limits_and_on_the_first_screen_only_their_number() {
    let text = plan_text(&sample::with_steps(), 80);
    let sections = [
        "WAITS WITH ONE PART FAILED",
        "THE STEPS",
        "WHAT THE PARTS BEAR IN EACH STEP",
        "STEPS WITH ONE PART FAILED",
        "WHAT COMES BACK",
        "LIMITS",
    ];
    in_order(&text, &sections.map(|section| format!("\n{section}\n")).iter().map(String::as_str).collect::<Vec<_>>());
    let screen = first_screen(&sample::with_steps());
    assert!(screen.contains("Procedure: 6 steps, 7 min 40 s. Verdict: NOT MET."), "{screen}");
    let without = plan_text(&sample::plan(), 80);
    assert!(sections[1..5].iter().all(|section| !without.contains(section)), "{without}");
    assert!(!without.contains("Procedure:"), "{without}");
}

#[test]
fn a_step_says_when_it_is_and_how_its_time_was_found() {
    let plan = sample::with_steps();
    for (number, start) in [
        (1, "Step 1 of 6, at 0 s DO Lock out"),
        (2, "Step 2 of 6, from 0 s, for 4 min 10 s (found from the slowest case, rounded up) DO Wait"),
        (3, "Step 3 of 6, from 4 min 10 s, for 2 min DO Prove"),
    ] {
        assert!(entry(&plan, number).starts_with(start), "{}", entry(&plan, number));
    }
}

#[test]
fn a_step_that_never_ends_says_so_where_it_stands_and_on_the_first_screen() {
    let plan = endless();
    let step = entry(&plan, 2);
    assert!(step.starts_with("Step 2 of 6, from 0 s, NEVER ENDS BY ITSELF"), "{step}");
    assert!(step.contains("is never reached") && step.contains("can't be relied on"), "{step}");
    assert!(first_screen(&plan).contains("Procedure: 6 steps, step 2 NEVER ends by itself."));
}

#[test]
fn a_caution_with_its_figures_stands_before_the_act() {
    let plan = sample::with_steps();
    in_order(
        &entry(&plan, 4),
        &[
            "WARNING Before T1 goes on, up to 180 mJ is stored.",
            "T1: peak in one of its 10 elements up to 14.1 mA and 18.8 mW; up to 170 mJ in this step.",
            "Only after a reading that the hold point allows.",
            "DO Apply the discharge tool",
            "CONNECT T1 (tool)",
            "DISCONNECT M1 (meter)",
        ],
    );
    in_order(
        &entry(&plan, 5),
        &["WARNING Before ST1 and ST2 go on, up to 12.0 mJ", "ST1: peak up to 380 A", "weld and burst", "DO Put"],
    );
    in_order(
        &entry(&plan, 6),
        &["WARNING Hands may come near only after the test", "On by now: ST1 and ST2", "DO Work begins"],
    );
    assert!(entry(&plan, 3).contains("for 2 min DO Prove"), "a meter is no discharge tool and needs no caution");
    in_order(&plan_markdown(&plan), &["### Step 4 of 6", "- **WARNING**: Before T1 goes on", "- **DO**: Apply"]);
}

#[test]
fn a_caution_becomes_danger_where_the_stored_energy_is_in_a_hazard_band() {
    let mut plan = sample::with_steps();
    // Put on right after isolation, at 750 V.
    plan.steps.swap(1, 3);
    plan.steps[1].stored_at_start = Energy::from_si(556.9);
    plan.steps[1].ready_at_start = Energy::from_si(556.9);
    let step = entry(&plan, 2);
    in_order(
        &step,
        &["DANGER Before T1 goes on, up to 557 J", "No step before this one reads the voltage: test first."],
    );
    plan.steps[5].stored_at_start = Energy::from_si(4000.0);
    let step = entry(&plan, 6);
    assert!(step.contains("WARNING Hands") && step.contains("Up to 0 J is stored and ready (with"), "{step}");
    plan.steps[5].ready_at_start = Energy::from_si(4000.0);
    assert!(entry(&plan, 6).contains("DANGER Hands may come near only after the test"));
}

#[test]
fn a_supply_is_announced_as_charging_the_bank() {
    in_order(
        &entry(&charging(), 4),
        &[
            "DANGER Before S1 goes on",
            "S1: peak in its series resistance up to 14.1 mA",
            "The bank is charged again, to up to 565 V at P - N at the end of this step: nobody near",
            "CONNECT S1 (supply)",
        ],
    );
}

#[test]
fn hands_come_near_neither_unread_nor_unstrapped_without_a_word() {
    let mut plan = sample::with_steps();
    for step in &mut plan.steps {
        (step.measure, step.hold) = (Vec::new(), None);
        step.connect.retain(|id| !id.starts_with("ST"));
    }
    plan.steps[4].test_points[1].highest = Voltage::from_si(51.0);
    in_order(
        &entry(&plan, 6),
        &[
            "DANGER Hands may come near",
            "A test point is predicted above 50 V in this step.",
            "No step before this one reads any voltage.",
            "No strap is on.",
        ],
    );
    assert!(on_one_line(&plan_text(&plan, 80)).contains("The last step leaves no strap on. Put one on"));
}

#[test]
fn a_hold_point_is_rounded_down_and_says_what_a_higher_reading_points_to() {
    let plan = sample::with_steps();
    in_order(
        &entry(&plan, 3),
        &[
            "PREDICTED P - N: up to 13.3 V (nominal 2.10 V). P - M and M - N: up to 9.90 V (nominal 1.00 V).",
            "READ P - N, P - M, M - N and P - E: prove the instrument on a known source, test, prove it again.",
            "without a predicted voltage: P - E.",
            "HOLD Go on only if the reading at P - N is at most 49.9 V (predicted: up to 13.3 V).",
            "A higher reading points to R1 open or R2 open: stop.",
        ],
    );
    let all = entry(&plan, 4);
    assert!(all.contains("every reading at every test point is at most 5.00 V"), "{all}");
    assert!(all.contains("not explained by any single failure"), "{all}");
}

#[test]
fn a_hold_point_that_a_healthy_bank_exceeds_says_so_and_names_a_few_faults_only() {
    let mut plan = sample::with_steps();
    if let Some(hold) = &mut plan.steps[2].hold {
        hold.predicted = Voltage::from_si(50.0);
        hold.shown_faults = (1..=9).map(|i| format!("R{i} open")).collect();
    }
    let step = entry(&plan, 3);
    assert!(step.contains("Up to 50.0 V is predicted with every part healthy: this hold point can stop"), "{step}");
    assert!(step.contains("R5 open, R6 open or 3 more: stop."), "{step}");
}

#[test]
fn what_parts_bear_is_listed_for_steps_parts_and_where_others_bear_most() {
    let text = plan_text(&sample::with_steps(), 80);
    let start = text.find("WHAT THE PARTS BEAR").expect("the table");
    let table: Vec<String> =
        text[start..].lines().skip(3).take_while(|l| !l.starts_with("Figures")).map(on_one_line).collect();
    assert_eq!(
        table,
        [
            "2 R1 2.26 mA 112 mW 279 J",
            "2 R2 766 uA 27.6 mW 61.9 J",
            "3 M1 5.10 uA 250 uW 3.30 mJ",
            "4 T1 14.1 mA 18.8 mW 170 mJ",
            "5 T1 2.00 uA 0.01 uW 0.01 uJ",
            "5 ST1 380 A 722 W 6.00 mJ",
        ]
    );
}

#[test]
fn the_worst_failure_of_a_reading_is_listed_and_the_worst_that_it_does_not_show() {
    let mut plan = sample::with_steps();
    let table = |plan: &Plan| {
        let text = plan_text(plan, 80);
        let start = text.find("STEPS WITH ONE PART FAILED").expect("the table");
        on_one_line(&text[start..])
    };
    assert!(
        table(&plan).contains("3 R1 open P - N 39.9 V 49.9 V can show it 4 R1 open P - M 5.70 V 5.00 V does not show")
    );
    plan.steps[2].faults[1].test_points[2].highest = Voltage::from_si(50.5);
    plan.steps[2].faults[0].test_points[0].highest = Voltage::from_si(700.0);
    if let Some(hold) = &mut plan.steps[2].hold {
        hold.shown_faults.pop();
    }
    let found = table(&plan);
    assert!(
        found.contains("3 R1 open P - N 700 V 49.9 V can show it 3 R2 open M - N 50.5 V 49.9 V does not"),
        "{found}"
    );
}

#[test]
fn what_comes_back_is_told_with_its_time_and_the_strap_that_stays_on() {
    let text = on_one_line(&plan_text(&sample::with_steps(), 80));
    for part in [
        "P - N 62.1 V 10 d 25 h",
        "P - M 31.0 V as it settles no",
        "P - N passes 50 V again, from 25 h after isolation on, and comes to up to 62.1 V.",
        "Leave ST1 and ST2 on for as long as anyone works",
    ] {
        assert!(text.contains(part), "{part}: {text}");
    }
}

#[test]
fn the_resistors_say_until_when_their_figures_count() {
    let with = plan_text(&sample::with_steps(), 80);
    assert!(with.contains("\nRESISTORS, ONE ELEMENT, ISOLATION TO END OF PROCEDURE\n"));
    assert!(on_one_line(&with).contains("count from isolation to the end of the last step at 7 min 40 s."));
    let without = plan_text(&sample::plan(), 80);
    assert!(without.contains("\nRESISTORS, ONE ELEMENT, ISOLATION TO INFINITE TIME\n"));
}

#[test]
fn a_source_that_is_not_isolated_is_named_last_and_hides_no_failed_part() {
    let mut plan = sample::with_steps();
    let step = &mut plan.steps[2];
    let mut source = step.faults[0].clone();
    source.fault = "source not isolated".into();
    source.test_points.iter_mut().for_each(|point| point.highest = Voltage::from_si(750.0));
    step.faults.push(source);
    if let Some(hold) = &mut step.hold {
        hold.shown_faults = (1..=7).map(|i| format!("R{i} open")).chain(["source not isolated".into()]).collect();
    }
    let found = entry(&plan, 3);
    assert!(found.contains("R6 open, 1 more or a source that is not isolated: stop."), "{found}");
    let text = on_one_line(&plan_text(&plan, 80));
    assert!(text.contains("3 R1 open P - N 39.9 V") && !text.contains("source not isolated"), "{text}");
}

#[test]
fn parts_that_go_on_together_with_the_same_figures_share_a_line() {
    let mut plan = sample::with_steps();
    let mut second = plan.steps[4].parts[3].clone();
    second.id = "ST2".into();
    plan.steps[4].parts.push(second);
    assert!(entry(&plan, 5).contains("ST1 and ST2, each: peak up to 380 A and 722 W; up to 6.00 mJ in this step."));
}

#[test]
fn a_failure_that_leaves_voltage_where_hands_come_near_is_told_there() {
    let mut plan = sample::with_steps();
    plan.steps[4].faults[1].test_points[2].highest = Voltage::from_si(86.51);
    assert!(entry(&plan, 6).contains("With R2 open up to 86.6 V is predicted at M - N: only the test can tell."));
    plan.steps[5].faults[0].test_points[1].highest = Voltage::from_si(140.0);
    assert!(entry(&plan, 6).contains("With R1 open up to 140 V is predicted at P - M"));
    assert!(on_one_line(&plan_text(&plan, 80)).contains("6 R1 open P - M 140 V - none"));
}
