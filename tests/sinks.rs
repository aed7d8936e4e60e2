//! Sinks: constant current and constant power against their closed forms, and on two sections against an ODE library.

use ebbvolt::bank::file;
use ebbvolt::circuit::{Drain, Draw, Edge, Modes, Network, Sink};
use ebbvolt::plan::{Options, Plan, plan};
use ebbvolt::quantity::Quantity;
use ode_solvers::{Dopri5, System, Vector2};
use std::sync::Arc;

fn planned(text: &str) -> Plan {
    let (bank, noticed) = file::read("sinks.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{e:?}"));
    plan(&bank, "", noticed, Options::default()).unwrap_or_else(|e| panic!("{e}"))
}

/// 2 mF charged to 600 V, with a bleeder where `resistors` says so.
fn bank(resistors: &str, sink: &str) -> String {
    format!(
        "{{ebbvolt: 1, tag: T, touch_voltage: 50 V, charged_to: {{nominal: 600 V, highest: 600 V}}, \
         capacitors: [{{id: C1, value: 2 mF, tolerance: 0 %}}], resistors: [{resistors}], sinks: [{sink}]}}"
    )
}

const BLEEDER: &str = "{id: R1, role: bleeder, value: 100 kohm, tolerance: 0 %}";

fn slowest(plan: &Plan) -> f64 {
    plan.waits[0].slowest.expect("it ends").si()
}

#[track_caller]
fn close(found: f64, expected: f64, relative: f64) {
    assert!((found / expected - 1.0).abs() < relative, "{found} for {expected}");
}

#[test]
fn a_constant_current_alone_discharges_on_a_straight_line() {
    let sink = "{id: K1, kind: constant-current, value: 40 mA, across: [P, N], stops_below: 30 V, counted: true}";
    // t = C (V0 - V) / I
    close(slowest(&planned(&bank("", sink))), 2e-3 * 550.0 / 0.04, 1e-12);
}

#[test]
fn a_constant_current_beside_a_bleeder_has_its_closed_form() {
    let sink = "{id: K1, kind: constant-current, value: 40 mA, across: [P, N], stops_below: 30 V, counted: true}";
    // v + I R decays with R C: t = R C ln((V0 + I R) / (V + I R))
    let (rc, ir) = (200.0, 4000.0);
    close(slowest(&planned(&bank(BLEEDER, sink))), rc * f64::ln((600.0 + ir) / (50.0 + ir)), 1e-12);
}

#[test]
fn a_current_that_stops_above_the_touch_voltage_leaves_the_rest_to_the_bleeder() {
    let sink = "{id: K1, kind: constant-current, value: 40 mA, across: [P, N], stops_below: 200 V, counted: true}";
    let (rc, ir) = (200.0, 4000.0);
    let expected = rc * f64::ln((600.0 + ir) / (200.0 + ir)) + rc * f64::ln(200.0 / 50.0);
    close(slowest(&planned(&bank(BLEEDER, sink))), expected, 1e-12);
}

#[test]
fn a_current_against_a_huge_resistance_loses_no_digits() {
    let leak = "{id: R1, role: leakage, value: 1000 Gohm, tolerance: 0 %}";
    let sink = "{id: K1, kind: constant-current, value: 40 mA, across: [P, N], stops_below: 30 V, counted: true}";
    // With I R = 4e10 V the closed form is t = R C ln(1 + (V0 - V)/(V + I R)), of which ln_1p keeps all digits.
    let (rc, ir) = (2e9f64, 4e10f64);
    close(slowest(&planned(&bank(leak, sink))), rc * (550.0 / (50.0 + ir)).ln_1p(), 1e-12);
}

#[test]
fn a_constant_power_alone_takes_the_energy_at_a_constant_rate() {
    let sink = "{id: K1, kind: constant-power, value: 15 W, across: [P, N], stops_below: 30 V, counted: true}";
    // v^2 falls on a straight line: t = C (V0^2 - V^2) / 2 P
    close(slowest(&planned(&bank("", sink))), 1e-3 * (600f64.powi(2) - 50f64.powi(2)) / 15.0, 1e-11);
}

#[test]
fn a_constant_power_beside_a_bleeder_has_its_closed_form() {
    let sink = "{id: K1, kind: constant-power, value: 15 W, across: [P, N], stops_below: 30 V, counted: true}";
    // v^2 + P R decays with R C / 2.
    let (half, pr) = (100.0, 1.5e6);
    let expected = half * f64::ln((600f64.powi(2) + pr) / (50f64.powi(2) + pr));
    close(slowest(&planned(&bank(BLEEDER, sink))), expected, 1e-11);
}

#[test]
fn what_a_bleeder_takes_beside_a_sink_is_what_the_sink_leaves() {
    let sink = "{id: K1, kind: constant-current, value: 40 mA, across: [P, N], stops_below: 0 V, counted: true}";
    let plan = planned(&bank(BLEEDER, sink));
    // v = (V0 + IR) exp(-t/RC) - IR until it is 0, at T = RC ln(1 + V0/IR); the sink takes I times the integral of v.
    let (rc, ir) = (200.0f64, 4000.0f64);
    let end = rc * f64::ln_1p(600.0 / ir);
    let taken = 0.04 * (-(600.0 + ir) * rc * (-end / rc).exp_m1() - ir * end);
    close(plan.resistors[0].energy.expect("it is always there").si(), 360.0 - taken, 1e-9);
}

#[test]
fn no_wait_relies_on_a_sink_that_is_not_counted() {
    let sink = "{id: K1, kind: constant-current, value: 40 mA, across: [P, N], stops_below: 30 V}";
    let plan = planned(&bank(BLEEDER, sink));
    close(slowest(&plan), 200.0 * f64::ln(12.0), 1e-12);
    assert!(plan.assumptions.iter().any(|a| a.contains("No wait relies on K1")), "{:?}", plan.assumptions);
    assert!(plan.waits[0].faults.iter().all(|f| f.fault != "K1 dead"));
    assert!(plan.findings.iter().all(|f| f.code != "wait-rests-on-sink"));
}

#[test]
fn a_sink_that_is_not_counted_lengthens_a_wait_where_it_does() {
    // The sink pulls M, which nothing else holds, away from the middle: M - N goes down, and P - M up as the bleeder
    // brings P down. Without it both halves fall together.
    let text = "{ebbvolt: 1, tag: T, touch_voltage: 50 V, charged_to: {nominal: 400 V, highest: 400 V}, \
        capacitors: [{id: C1, value: 1 mF, tolerance: 0 %, across: [P, M]}, \
                     {id: C2, value: 1 mF, tolerance: 0 %, across: [M, N]}], \
        resistors: [{id: R1, role: bleeder, value: 100 kohm, tolerance: 0 %}], \
        sinks: [{id: K1, kind: constant-current, value: 100 mA, across: [M, N], stops_below: 10 V, counted: COUNTED}]}";
    let counted = planned(&text.replace("COUNTED", "true"));
    let uncounted = planned(&text.replace("COUNTED", "false"));
    let at = |plan: &Plan, i: usize| plan.waits[i].slowest.map(Quantity::si);
    assert_eq!(counted.waits[1].across, ["P".to_string(), "M".to_string()]);
    // With the sink the halves part: what is left at the end lies in both, and never goes.
    assert_eq!(at(&counted, 1), None);
    assert_eq!(at(&uncounted, 1), None);
    let settled = counted.waits[1].settles_at.si();
    // C1 keeps what it lost less than C2: (200 - 10) / 2 of either sign when P - N is 0.
    // A little less: the bleeder took some of P - N while the sink drew.
    assert!((settled - 95.0).abs() < 5.0, "{settled}");
}

#[test]
fn a_counted_sink_is_named_and_can_fail() {
    let sink = "{id: K1, kind: constant-power, value: 15 W, across: [P, N], stops_below: 30 V, counted: true}";
    let plan = planned(&bank("", sink));
    assert!(plan.findings.iter().any(|f| f.code == "wait-rests-on-sink"));
    let failed = plan.waits[0].faults.iter().find(|f| f.fault == "K1 dead").expect("it can fail");
    assert_eq!(failed.wait, None);
    close(failed.settles_at.si(), 600.0, 1e-12);
    assert!(plan.findings.iter().any(|f| f.code == "sink-dead-never" && f.text.contains("K1 draws nothing")));
}

#[test]
fn steps_go_on_where_the_sink_has_brought_the_voltage() {
    let text = bank(
        "{id: T1, role: tool, value: 1 kohm, tolerance: 0 %}",
        "{id: K1, kind: constant-current, value: 40 mA, across: [P, N], stops_below: 30 V, counted: true}",
    );
    let text = text.trim_end_matches('}').to_string()
        + "}], procedure: [{step: Wait, for: 10 s}, {step: Tool, connect: [T1], for: 3 s}]}".trim_start_matches("}]");
    let plan = planned(&text);
    let after_wait = 600.0 - 0.04 * 10.0 / 2e-3;
    close(plan.steps[0].test_points[0].highest.si(), after_wait, 1e-12);
    // Tool and sink together: v + I R decays with R C.
    let (rc, ir) = (2.0, 40.0);
    let expected = (after_wait + ir) * f64::exp(-3.0 / rc) - ir;
    close(plan.steps[1].test_points[0].highest.si(), expected, 1e-12);
    let tool = &plan.steps[1].parts[0];
    close(tool.peak_current.si(), 0.4, 1e-12);
    // Integral of ((V + IR) exp(-t/RC) - IR)^2 / R over 3 s.
    let (a, e) = (after_wait + ir, f64::exp(-1.5));
    let energy = (a * a * (1.0 - e * e) * rc / 2.0 - 2.0 * a * ir * rc * (1.0 - e) + ir * ir * 3.0) / 1e3;
    close(tool.energy.si(), energy, 1e-10);
}

/// A section behind a series resistor; the sink at the second one. Node 0 is the reference.
fn two_sections() -> (Network, Sink) {
    let edge = |a, b, value| Edge { a, b, value };
    let network = Network {
        nodes: 3,
        reference: 0,
        resistors: vec![edge(1, 0, 22e3), edge(1, 2, 150.0), edge(2, 0, 47e3)],
        capacitors: vec![edge(1, 0, 3.3e-3), edge(2, 0, 0.8e-3)],
        sources: Vec::new(),
    };
    (network, Sink { a: 2, b: 0, draw: Draw::Power(180.0), stops_below: 120.0 })
}

fn drained(network: &Network, sink: Sink) -> Drain {
    let modes = Arc::new(Modes::new(network.clone()).expect("rates are found"));
    let drain = modes.drain(&[700.0, 700.0], &[0.0, 700.0, 700.0], &[sink], &[true]).expect("stops are found");
    drain.check_balance(f64::INFINITY).expect("energy is accounted for");
    drain
}

struct TwoSections(Draw);

impl System<f64, Vector2<f64>> for TwoSections {
    fn system(&self, _: f64, v: &Vector2<f64>, dv: &mut Vector2<f64>) {
        let drawn = match self.0 {
            Draw::Power(watt) => watt / v[1],
            Draw::Current(ampere) => ampere,
        };
        let between = (v[0] - v[1]) / 150.0;
        dv[0] = (-v[0] / 22e3 - between) / 3.3e-3;
        dv[1] = (between - v[1] / 47e3 - drawn) / 0.8e-3;
    }
}

/// `ode_solvers` 0.6: Dormand and Prince's method of order 5, tolerance 1e-12; times and voltages up to `until`.
fn integrated(draw: Draw, until: f64) -> Vec<(f64, Vector2<f64>)> {
    let start = Vector2::new(700.0, 700.0);
    let mut solver = Dopri5::new(TwoSections(draw), 0.0, until, until / 500.0, start, 1e-12, 1e-12);
    solver.integrate().expect("it integrates");
    solver.x_out().iter().copied().zip(solver.y_out().iter().copied()).collect()
}

#[test]
fn two_sections_under_a_sink_go_where_an_ode_library_takes_them_until_it_stops() {
    let (network, power) = two_sections();
    for draw in [Draw::Power(180.0), Draw::Current(0.35)] {
        let drain = drained(&network, Sink { draw, ..power });
        let stops = drain.across(2, 0).last_start();
        assert!(drain.drawing_at(0.999 * stops)[0] && !drain.drawing_at(stops)[0]);
        let list = integrated(draw, stops);
        assert!(list.len() > 490);
        // Close to the collapse the library's own outputs, interpolated between its steps, are off by 1e-6 (compared
        // there with a Taylor series of 30 digits, mpmath 1.3, which gives 120.0000000000 V where the sink stops).
        for (t, expected) in list.iter().filter(|(t, _)| *t < 0.95 * stops) {
            for node in [1, 2] {
                let found = drain.across(node, 0).value(*t);
                assert!((found / expected[node - 1] - 1.0).abs() < 1e-7, "{draw:?}, {t} s: {found} {expected}");
            }
        }
        // The library still has it above where it stops, and falling through it within one more of its outputs.
        let [.., (_, before), (_, last)] = list.as_slice() else { panic!("outputs") };
        assert!(last[1] > 120.0 && last[1] + 2.0 * (last[1] - before[1]) < 120.0, "{before} {last}");
    }
}

#[test]
fn a_section_behind_a_resistor_comes_back_after_the_sink_has_stopped_and_the_sink_stays_off() {
    let (network, sink) = two_sections();
    let course = drained(&network, sink).across(2, 0);
    let stops = course.last_start();
    assert!((course.value(stops) - 120.0).abs() < 1e-9, "{}", course.value(stops));
    assert!(course.value(stops + 0.3) > 125.0, "{}", course.value(stops + 0.3));
}

#[test]
fn a_stiff_strap_beside_a_power_sink_costs_no_small_steps() {
    // 1 mohm between the halves of a bank whose time constants are hours.
    let edge = |a, b, value| Edge { a, b, value };
    let network = Network {
        nodes: 3,
        reference: 0,
        resistors: vec![edge(1, 0, 1e6), edge(1, 2, 1e-3)],
        capacitors: vec![edge(1, 0, 1e-3), edge(2, 0, 1e-3)],
        sources: Vec::new(),
    };
    let drain = drained(&network, Sink { a: 2, b: 0, draw: Draw::Power(15.0), stops_below: 20.0 });
    // Both halves as one of 2 mF, but for 15 W through 1 mohm.
    let (half, pr) = (1e6 * 2e-3 / 2.0, 15.0 * 1e6);
    let expected = half * f64::ln((700f64.powi(2) + pr) / (20f64.powi(2) + pr));
    close(drain.across(2, 0).last_start(), expected, 1e-6);
}

#[test]
fn a_power_that_its_feed_cannot_carry_stops() {
    // Through 100 ohm from 100 V no more than 25 W can flow.
    let edge = |a, b, value| Edge { a, b, value };
    let network = Network {
        nodes: 3,
        reference: 0,
        resistors: vec![edge(1, 2, 100.0), edge(2, 0, 1e6)],
        capacitors: vec![edge(1, 0, 1e-3)],
        sources: Vec::new(),
    };
    let modes = Arc::new(Modes::new(network).expect("rates are found"));
    let sink = |watt| Sink { a: 2, b: 0, draw: Draw::Power(watt), stops_below: 1.0 };
    let start = |watt| modes.drain(&[100.0], &[0.0, 100.0, 100.0], &[sink(watt)], &[true]).expect("it ends");
    assert!(start(26.0).across(2, 0).pieces().is_empty());
    // 16 W: v (100 - v) = 1600, the higher of 80 V and 20 V (but for the leak), until the feed is down to 80 V.
    let drain = start(16.0);
    let first = drain.across(2, 0).value(0.0);
    assert!((first - 80.0).abs() < 0.1, "{first}");
    let stops = drain.across(1, 0).value(drain.across(1, 0).last_start());
    assert!((stops - 80.0).abs() < 0.1, "{stops}");
}
