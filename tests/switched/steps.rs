//! A procedure in which a contact closes.

use super::*;

const SWITCHED: &str = "{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, switched: {closes_after: 2 s}}";
const TOOLS: &str = "{id: T1, role: tool, value: 500 ohm, tolerance: 0 %}";

fn volts(plan: &Plan, step: usize) -> f64 {
    plan.steps[step].test_points[0].highest.si()
}

#[test]
fn the_contact_closes_in_the_step_in_which_its_time_comes() {
    let steps = ", procedure: [{step: Isolate, for: 0 s}, {step: Wait, for: 5 s}, {step: Wait on, for: 1 s}]";
    let plan = planned(&one(SWITCHED, steps));
    for (step, expected) in [600.0, 600.0 * f64::exp(-3.0), 600.0 * f64::exp(-4.0)].into_iter().enumerate() {
        close(volts(&plan, step), expected, 1e-12);
    }
    // Before it closes RS is no part of a step; then it stands with the figures of that step alone.
    let part = |step: usize| plan.steps[step].parts.iter().find(|p| p.id == "RS");
    assert!(part(0).is_none());
    let of = part(1).expect("connected");
    close(of.peak_current.si(), 0.6, 1e-10);
    close(of.energy.si(), 180.0 * (1.0 - f64::exp(-6.0)), 1e-12);
    close(part(2).expect("connected").peak_power.si(), 360.0 * f64::exp(-6.0), 1e-10);
}

#[test]
fn an_until_step_knows_that_the_contact_has_yet_to_close() {
    let steps = ", procedure: [{step: Isolate, for: 500 ms}, {step: Wait, until: {below: 50 V, at: [P, N]}}]";
    let plan = planned(&one(SWITCHED, steps));
    // From isolation 2 s + R C ln 12 = 4.485 s; the step has begun at 0.5 s, and lasts whole seconds.
    close(plan.steps[1].end.si(), 4.5, 1e-12);
    close(volts(&plan, 1), 600.0 * f64::exp(-2.5), 1e-11);
}

#[test]
fn a_tool_applied_before_the_contact_closes_shares_from_then_on() {
    let steps = ", procedure: [{step: Isolate, for: 0 s}, {step: Apply, connect: [T1], for: 3 s}, \
                 {step: Lift, disconnect: [T1], for: 1 s}]";
    let plan = planned(&one(&format!("{SWITCHED}, {TOOLS}"), steps));
    // 2 s with 0.5 s, 1 s with a third of a second, 1 s with 1 s.
    let ends = [600.0, 600.0 * f64::exp(-4.0 - 3.0), 600.0 * f64::exp(-8.0)];
    for (step, expected) in ends.into_iter().enumerate() {
        close(volts(&plan, step), expected, 1e-11);
    }
    let taken: f64 = plan.steps.iter().flat_map(|s| &s.parts).map(|p| p.energy.si()).sum();
    close(taken, 180.0 * (1.0 - f64::exp(-16.0)), 1e-9);
}

#[test]
fn a_hold_point_shows_that_the_contact_has_not_closed() {
    let steps = ", procedure: [{step: Isolate, for: 0 s}, {step: Wait, for: 10 s, measure: [[P, N]], \
                 hold: {below: 40 V, at: [P, N]}}, {step: Work, touch: true, for: 0 s}]";
    let plan = planned(&one(SWITCHED, steps));
    let hold = plan.steps[1].hold.as_ref().expect("a hold");
    assert!(hold.shown_faults.contains(&"RS contact does not close".to_string()), "{:?}", hold.shown_faults);
    let fault = plan.steps[1].faults.iter().find(|f| f.fault == "RS contact does not close").expect("it is there");
    close(fault.test_points[0].highest.si(), 600.0, 1e-12);
}

#[test]
fn a_supply_of_a_step_is_no_feeding_that_would_open_the_contact() {
    let steps = ", supplies: [{id: S1, voltage: 400 V, series: 1 kohm, tolerance: 0 %, across: [P, N]}], \
                 procedure: [{step: Wait, for: 30 s}, {step: Charge, connect: [S1], for: 1 h}]";
    let plan = planned(&one(SWITCHED, steps));
    // 400 V over 1 kohm and 1 kohm.
    close(volts(&plan, 1), 200.0, 1e-9);
}

#[test]
fn what_comes_after_a_procedure_that_ends_before_the_contact_closes_still_has_it() {
    let plan = planned(&one(SWITCHED, ", procedure: [{step: Isolate, for: 1 s}]"));
    close(volts(&plan, 0), 600.0, 1e-12);
    close(plan.recovery[0].voltage.si(), 600.0, 1e-12);
    // Curves go on after the last step, through the closing.
    let plan = followed(&one(SWITCHED, ", procedure: [{step: Isolate, for: 1 s}]"), &[0.5, 1.5, 4.0]);
    let curves = plan.curves.expect("asked for");
    let seen: Vec<f64> = curves.spans.iter().flat_map(|s| &s.samples).map(|s| s.voltages[0].highest.si()).collect();
    for (found, expected) in seen.iter().zip([600.0, 600.0, 600.0 * f64::exp(-2.0)]) {
        close(*found, expected, 1e-11);
    }
}
