//! Heat: one discharge, what the feeding adds, and rows of discharges summed by hand.

use super::*;

const RATING: &str = "rating: {power: 50 W, full_to: 25 °C, zero_at: 275 °C, voltage: 1 kV, pulse: 250 J, \
                      overload: {times: 12, for: 5 s}, thermal_time: 90 s}";
/// K/W and s.
const BODY: (f64, f64) = (250.0 / 50.0, 90.0);

fn bleeder(switched: &str) -> String {
    one(&format!("{{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, switched: {{{switched}}}, {RATING}}}"), "")
}

fn body_rise(plan: &Plan) -> f64 {
    resistor(plan, "RS").body_temperature.expect("rated").si() - 273.15 - 40.0
}

fn found(plan: &Plan, check: &str) -> f64 {
    let of = resistor(plan, "RS").checks.iter().find(|c| c.check == check).unwrap_or_else(|| panic!("no `{check}`"));
    of.found.expect("found")
}

/// Rise in K, `t` seconds after the contact has closed on 360 W that fall with half of R C = 1 s, from cold:
/// theta' = (P - theta / R_th) / C_th has theta = R_th / tau * P0 (e^(-2t) - e^(-t/tau)) / (1/tau - 2).
fn discharge(t: f64) -> f64 {
    let (r, tau) = BODY;
    if t <= 0.0 { 0.0 } else { r / tau * 360.0 * ((-2.0 * t).exp() - (-t / tau).exp()) / (1.0 / tau - 2.0) }
}

/// Rise that a feeding of 360 W over so many seconds leaves at its end.
fn feeding(opens_after: f64) -> f64 {
    BODY.0 * 360.0 * (1.0 - (-opens_after / BODY.1).exp())
}

/// The greatest of a function of one hump, in steps of a thousandth and then by thirds.
fn greatest(f: impl Fn(f64) -> f64, until: f64) -> f64 {
    let steps = 20_000;
    let at = |k: usize| until * k as f64 / steps as f64;
    let top = (0..=steps).max_by(|x, y| f(at(*x)).total_cmp(&f(at(*y)))).expect("some");
    let (mut low, mut high) = (at(top.saturating_sub(1)), at(top + 1));
    for _ in 0..100 {
        let (x, y) = (low + (high - low) / 3.0, high - (high - low) / 3.0);
        if f(x) < f(y) { low = x } else { high = y }
    }
    f(0.5 * (low + high))
}

#[test]
fn one_discharge_heats_from_cold_since_nothing_flows_before() {
    close(body_rise(&planned(&bleeder("closes_after: 100 ms"))), greatest(discharge, 30.0), 1e-8);
    let plan = planned(&bleeder(""));
    assert!(resistor(&plan, "RS").checks.iter().all(|c| c.check != "continuous power" && c.check != "average power"));
}

#[test]
fn a_row_of_discharges_is_the_series_of_what_each_has_left() {
    for (count, every) in [(2u32, 60.0), (5, 60.0), (5, 600.0), (40, 20.0), (1000, 20.0)] {
        let plan = planned(&bleeder(&format!("closes_after: 2 s, discharges: {count}, every: {every} s")));
        // Discharge number k of the row began (count - 1 - k) cycles before the last one, and has died out since: what
        // is left of its power after a cycle (e^-36 at least) is nothing.
        let row = |t: f64| (0..count).map(|k| discharge(t - 2.0 + f64::from(k) * every)).sum::<f64>();
        close(body_rise(&plan), greatest(row, 18.0), 1e-8);
        // The discharge is over long before the next isolation, to e^-36 of it.
        close(found(&plan, "average power"), 180.0 / every, 1e-10);
    }
}

#[test]
fn a_cycle_shorter_than_the_discharge_cuts_the_heat_that_it_leaves() {
    // 1.5 s apart, half of R C later: the second begins with what the first had by then.
    let plan = planned(&bleeder("discharges: 2, every: 1.5 s"));
    let second = |t: f64| discharge(t) + discharge(1.5) * (-t / BODY.1).exp();
    close(body_rise(&plan), greatest(second, 30.0), 1e-8);
    // So does the average power: what flows until the next isolation.
    close(found(&plan, "average power"), 180.0 * (1.0 - f64::exp(-3.0)) / 1.5, 1e-10);
    let steps = ", procedure: [{step: a, for: 1 s}, {step: b, for: 2 s}, {step: c, for: 1 min}]";
    let part = format!(
        "{{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, switched: {{discharges: 2, every: 1.5 s}}, {RATING}}}"
    );
    let through = planned(&one(&part, steps));
    close(found(&through, "average power"), 180.0 * (1.0 - f64::exp(-3.0)) / 1.5, 1e-10);
    close(body_rise(&through), greatest(second, 30.0), 1e-8);
}

#[test]
fn the_feeding_until_the_contact_opens_counts_with_the_pulse_and_in_the_body() {
    let plan = planned(&bleeder("opens_after: 200 ms"));
    // V^2/R for 0.2 s beside C V^2/2.
    let rs = resistor(&plan, "RS");
    close(rs.energy.expect("a figure").si(), 180.0 + 72.0, 1e-12);
    close(found(&plan, "pulse energy"), 252.0, 1e-12);
    close(found(&plan, "overload energy"), 252.0, 1e-12);
    close(body_rise(&plan), greatest(discharge, 30.0) + feeding(0.2), 1e-8);
    let pulse = rs.checks.iter().find(|c| c.check == "pulse energy").expect("a check");
    assert_eq!((pulse.verdict, plan.exit_code()), (ebbvolt::plan::Verdict::NotMet, 1));
    // In a row each cycle has its feeding, at its end for those after it.
    let plan = planned(&bleeder("opens_after: 200 ms, discharges: 4, every: 30 s"));
    let kept = |k: u32| (-30.0 * f64::from(k) / BODY.1).exp();
    let row = |t: f64| {
        let heat: f64 = (0..4).map(|k| discharge(t + 30.0 * f64::from(k))).sum();
        let fed: f64 = (0..3).map(|k| feeding(0.2) * kept(k) * (-t / BODY.1).exp()).sum();
        heat + fed
    };
    close(body_rise(&plan), greatest(row, 25.0) + feeding(0.2), 1e-8);
    close(found(&plan, "average power"), 252.0 / 30.0, 1e-12);
}

#[test]
fn what_is_left_of_the_bank_when_a_late_contact_closes_does_not_hide_the_feeding() {
    // A leak has emptied the bank (1 s) long before the contact closes: what is left to bear is the feeding. Of two
    // strings of two elements each, one element low and its partner low is the worst: 600^2 0.95 / 1.9^2 / 1 kohm.
    let leak = "{id: RL, role: leakage, value: 1 kohm, tolerance: 0 %}";
    let array = "{id: RS, role: bleeder, value: 1 kohm, tolerance: 5 %, array: {series: 2, parallel: 2}, \
                 switched: {closes_after: 40 s, opens_after: 100 ms}}";
    let plan = planned(&one(&format!("{leak}, {array}"), ""));
    let rs = resistor(&plan, "RS");
    let watt = 600.0f64.powi(2) * 0.95 / 1.9f64.powi(2) / 1e3;
    close(rs.peak_power.expect("a figure").si(), watt, 1e-9);
    close(rs.energy.expect("a figure").si(), watt * 0.1, 1e-9);
    close(rs.element_voltage.expect("a figure").si(), 600.0 * 1.05 / 2.0, 1e-9);
    close(rs.peak_current.expect("a figure").si(), 600.0 / 1.9 / 1e3, 1e-9);
}

#[test]
fn a_row_through_a_procedure_is_that_of_the_bank_left_alone_where_its_steps_do_nothing() {
    let part = format!(
        "{{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, switched: {{closes_after: 2 s, opens_after: 50 ms, \
         discharges: 6, every: 2 min}}, {RATING}}}"
    );
    let alone = planned(&one(&part, ""));
    let steps = ", procedure: [{step: a, for: 1 s}, {step: b, for: 30 s}, {step: c, for: 1 min}]";
    let through = planned(&one(&part, steps));
    close(body_rise(&through), body_rise(&alone), 1e-9);
    close(found(&through, "average power"), found(&alone, "average power"), 1e-9);
    close(found(&through, "pulse energy"), found(&alone, "pulse energy"), 1e-9);
}
