//! One capacitance, and what differs from the plain bleeder.

use super::*;

#[test]
fn the_voltage_stands_until_the_contact_closes_and_falls_with_r_c_from_then_on() {
    let text = one("{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, switched: {closes_after: 100 ms}}", "");
    let plan = followed(&text, &[0.0, 0.05, 0.0999, 0.1, 0.6, 2.1]);
    // t = t1 + R C ln(V0/V)
    close(slowest(&plan), 0.1 + f64::ln(600.0 / 50.0), 1e-12);
    close(plan.waits[0].nominal.expect("it ends").si(), 0.1 + f64::ln(500.0 / 50.0), 1e-12);
    let curves = plan.curves.as_ref().expect("asked for");
    for sample in &curves.spans[0].samples {
        let t = sample.time.si();
        let expected = 600.0 * f64::exp(-(t - 0.1).max(0.0));
        close(sample.voltages[0].highest.si(), expected, 1e-12);
        // The load of the bleeder is nothing before its contact closes.
        let load = &sample.loads[1];
        let nominal = if t < 0.1 { 0.0 } else { 500.0 * f64::exp(-(t - 0.1)) };
        close(load.voltage.si(), nominal, 1e-12);
        close(load.current.si(), nominal / 1e3, 1e-12);
    }
    let rs = resistor(&plan, "RS");
    assert_eq!(rs.continuous_power, None);
    close(rs.peak_power.expect("a figure").si(), 360.0, 1e-10);
    close(rs.energy.expect("a figure").si(), 180.0, 1e-12);
    close(plan.time_constants[0].si(), 1.0, 1e-12);
}

#[test]
fn a_leak_beside_it_works_alone_until_the_contact_closes() {
    let leak = "{id: RL, role: leakage, value: 20 kohm, tolerance: 10 %}";
    let switched = "{id: RS, role: bleeder, value: 1 kohm, tolerance: 5 %, switched: {closes_after: 8 s}}";
    let plan = planned(&one(&format!("{leak}, {switched}"), ""));
    // Slowest: both at their highest. 8 s with 22 kohm alone, then 1.05 kohm beside it.
    let at_closing = 600.0 * f64::exp(-8.0 / 22.0);
    let both = 1.0 / (1.0 / 22e3 + 1.0 / 1050.0) * 1e-3;
    close(slowest(&plan), 8.0 + both * f64::ln(at_closing / 50.0), 1e-10);
    // Most current: the leak at its highest, the bleeder at its lowest.
    close(resistor(&plan, "RS").peak_current.expect("a figure").si(), at_closing / 950.0, 1e-10);
    // The contact that does not close leaves the leak; without the leak the bleeder is alone.
    close(fault_wait(&plan, "RS contact does not close").expect("it ends"), 22.0 * f64::ln(12.0), 1e-10);
    close(fault_wait(&plan, "RS open").expect("it ends"), 22.0 * f64::ln(12.0), 1e-10);
    close(fault_wait(&plan, "RL absent").expect("it ends"), 8.0 + 1.05 * f64::ln(12.0), 1e-10);
}

#[test]
fn where_the_voltage_is_below_before_the_contact_closes_the_wait_is_that_of_the_rest() {
    let leak = "{id: RL, role: leakage, value: 1 kohm, tolerance: 0 %}";
    let switched = "{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, switched: {closes_after: 10 s}}";
    close(slowest(&planned(&one(&format!("{leak}, {switched}"), ""))), f64::ln(12.0), 1e-12);
}

#[test]
fn several_contacts_with_delays_of_their_own_are_several_phases() {
    let part = |id: &str, delay: &str| {
        format!("{{id: {id}, role: bleeder, value: 1 kohm, tolerance: 0 %, switched: {{closes_after: {delay}}}}}")
    };
    let text = one(&[part("RA", "2 s"), part("RB", "1 s"), part("RC", "2 s")].join(", "), "");
    // Nothing to 1 s, 1 kohm to 2 s, a third of it from then on.
    close(slowest(&planned(&text)), 2.0 + (f64::ln(12.0) - 1.0) / 3.0, 1e-12);
    let plan = planned(&text);
    close(fault_wait(&plan, "RB contact does not close").expect("it ends"), 2.0 + f64::ln(12.0) / 2.0, 1e-12);
    close(fault_wait(&plan, "RA contact does not close").expect("it ends"), 2.0 + (f64::ln(12.0) - 1.0) / 2.0, 1e-12);
}

#[test]
fn a_contact_that_does_not_close_leaves_the_bank_charged_and_is_told() {
    let switched =
        "{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, array: {series: 2, parallel: 2}, switched: {}}";
    let plan = planned(&one(switched, ""));
    assert_eq!(fault_wait(&plan, "RS contact does not close"), None);
    close(plan.waits[0].faults[1].settles_at.si(), 600.0, 1e-12);
    // Of the array one element open is one string; the contact is all of it.
    close(fault_wait(&plan, "RS open").expect("it ends"), 2.0 * f64::ln(12.0), 1e-12);
    let codes: Vec<&str> = plan.findings.iter().map(|f| f.code).collect();
    assert!(codes.contains(&"contact-open-never") && codes.contains(&"wait-rests-on-contact"), "{codes:?}");
    assert_eq!(plan.notice.never_faults, ["RS contact does not close"]);
}

/// A bank of two sections behind a resistor with absorption, its bleeder as given.
fn sections(bleeder: &str) -> String {
    format!(
        "{{ebbvolt: 1, tag: T, ambient: 40 °C, touch_voltage: 50 V, charged_to: {{nominal: 500 V, highest: 600 V}}, \
         capacitors: [{{id: C1, value: 1 mF, tolerance: 20 %, absorption: 2 %}}, \
         {{id: C2, value: 200 uF, tolerance: 10 %, across: [Q, N]}}], \
         resistors: [{{id: R12, role: series, value: 300 ohm, tolerance: 1 %, across: [P, Q]}}, \
         {{id: RQ, role: leakage, value: 1 Mohm, tolerance: 10 %, across: [Q, N]}}, {bleeder}], \
         limits: [{{id: a, any_of: {{voltage: 60 V, charge: 1 mC, energy: 100 mJ}}, within: 2 s}}]}}"
    )
}

#[test]
fn without_delay_all_but_what_was_before_isolation_is_that_of_the_plain_bleeder() {
    let part = |more: &str| {
        format!("{{id: RS, role: bleeder, value: 2 kohm, tolerance: 5 %, array: {{series: 2, parallel: 2}}{more}}}")
    };
    let (plain, switched) = (planned(&sections(&part(""))), planned(&sections(&part(", switched: {}"))));
    for (x, y) in plain.waits.iter().zip(&switched.waits) {
        close(y.slowest.expect("it ends").si(), x.slowest.expect("it ends").si(), 1e-9);
        close(y.nominal.expect("it ends").si(), x.nominal.expect("it ends").si(), 1e-9);
        for fault in &x.faults {
            let other = y.faults.iter().find(|f| f.fault == fault.fault).expect("the same faults");
            match (fault.wait, other.wait) {
                (Some(t), Some(u)) => close(u.si(), t.si(), 1e-9),
                (t, u) => assert_eq!(t, u, "{}", fault.fault),
            }
        }
        assert_eq!(y.faults.len(), x.faults.len() + 1);
    }
    for (x, y) in plain.limits.iter().zip(&switched.limits) {
        close(y.holds_from.expect("it holds").si(), x.holds_from.expect("it holds").si(), 1e-9);
        close(y.charge.si(), x.charge.si(), 1e-9);
    }
    let (x, y) = (resistor(&plain, "RS"), resistor(&switched, "RS"));
    close(y.peak_power.expect("a figure").si(), x.peak_power.expect("a figure").si(), 1e-9);
    close(y.energy.expect("a figure").si(), x.energy.expect("a figure").si(), 1e-9);
    assert!(x.continuous_power.is_some() && y.continuous_power.is_none());
}

#[test]
fn the_same_across_the_terminals_where_nothing_is_loaded_before() {
    let part = |more: &str| format!("{{id: RS, role: bleeder, value: 2 kohm, tolerance: 5 %{more}}}");
    let more = ", limits: [{id: a, voltage: 60 V, within: 6 s}, {id: b, charge: 50 mC, within: 5 s}, \
                {id: c, energy: 2 J, within: 4 s}]";
    let (plain, switched) = (planned(&one(&part(""), more)), planned(&one(&part(", switched: {}"), more)));
    assert_eq!(slowest(&plain).to_bits(), slowest(&switched).to_bits());
    assert_eq!(plain.limits, switched.limits);
    assert_eq!(plain.stored, switched.stored);
    assert_eq!(plain.waits[0].faults[0], switched.waits[0].faults[0]);
    let (x, y) = (resistor(&plain, "RS"), resistor(&switched, "RS"));
    assert_eq!((x.peak_current, x.energy, x.element_voltage), (y.peak_current, y.energy, y.element_voltage));
}

#[test]
fn a_limit_counts_the_delay_and_the_charge_of_a_moment_before_the_contact_closes() {
    let switched = "{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, switched: {closes_after: 2 s}}";
    let more = ", limits: [{id: early, charge: 0.5 C, within: 1 s}, {id: late, charge: 50 mC, within: 5 s}, \
                {id: energy, energy: 1 J, within: 5 s}, {id: voltage, voltage: 60 V, within: 4.3 s}]";
    let plan = planned(&one(switched, more));
    let limit = |id: &str| plan.limits.iter().find(|l| l.id == id).expect("a limit");
    let holds = |id: &str| limit(id).holds_from.expect("it holds some time").si();
    // C V and C V^2/2, V = 600 exp(-(t - 2)).
    assert_eq!((limit("early").met, limit("late").met), (Some(false), Some(true)));
    close(limit("early").charge.si(), 0.6, 1e-12);
    close(holds("early"), 2.0 + f64::ln(0.6 / 0.5), 1e-11);
    close(holds("late"), 2.0 + f64::ln(0.6 / 0.05), 1e-11);
    close(holds("energy"), 2.0 + f64::ln(180.0) / 2.0, 1e-11);
    assert_eq!(limit("voltage").met, Some(false));
    close(holds("voltage"), 2.0 + f64::ln(10.0), 1e-11);
}

#[test]
fn before_isolation_the_bleeder_loads_nothing_ahead_of_it() {
    // Behind 1 kohm a plain bleeder of 1 kohm would halve the voltage of its section.
    let text = |more: &str| {
        format!(
            "{{ebbvolt: 1, tag: T, touch_voltage: 50 V, charged_to: {{nominal: 600 V, highest: 600 V}}, \
             capacitors: [{{id: C1, value: 1 mF, tolerance: 0 %, across: [Q, N]}}], \
             resistors: [{{id: R1, role: series, value: 1 kohm, tolerance: 0 %, across: [P, Q]}}, \
             {{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, across: [Q, N]{more}}}], test_points: [[Q, N]]}}"
        )
    };
    let (plain, switched) = (planned(&text("")), planned(&text(", switched: {closes_after: 1 s}")));
    close(plain.waits[0].at_isolation.si(), 300.0, 1e-12);
    close(switched.waits[0].at_isolation.si(), 600.0, 1e-12);
    close(slowest(&switched), 1.0 + f64::ln(12.0), 1e-12);
    assert!(switched.resistors[0].continuous_power.expect("a figure").si() == 0.0);
}

#[test]
fn three_phases_wait_the_delay_longer_and_their_expanded_file_gives_the_same() {
    let text = |more: &str| {
        format!(
            "{{ebbvolt: 1, tag: T, touch_voltage: 50 V, terminals: [A, B, C], \
             charged_to: {{ac_rms: 400 V, rise: 10 %, phases: 3, neutral: isolated}}, \
             capacitors: [{{id: CB, kvar: {{power: 50 kvar, voltage: 400 V, frequency: 50 Hz}}, phases: 3, \
             connection: delta, tolerance: 0 %}}], \
             resistors: [{{id: RD, role: bleeder, value: 10 kohm, tolerance: 0 %, phases: 3, connection: delta{more}}}]}}"
        )
    };
    let plain = planned(&text(""));
    let delayed = text(", switched: {closes_after: 3 s, opens_after: 20 ms}");
    let switched = planned(&delayed);
    for (x, y) in plain.waits.iter().zip(&switched.waits) {
        close(y.slowest.expect("it ends").si(), x.slowest.expect("it ends").si() + 3.0, 1e-10);
    }
    let (bank, _) = file::read("three.yaml", delayed.as_bytes()).expect("valid");
    let expanded = planned(&file::write(&bank.expanded()));
    assert_eq!(expanded.waits, switched.waits);
    assert_eq!(expanded.resistors, switched.resistors);
    assert!(switched.waits[0].faults.iter().any(|f| f.fault == "RD.BC contact does not close"));
}

#[test]
fn two_faults_random_draws_and_sensitivity_know_the_contact() {
    let leak = "{id: RL, role: leakage, value: 20 kohm, tolerance: 10 %}";
    let switched = "{id: RS, role: bleeder, value: 1 kohm, tolerance: 5 %, switched: {closes_after: 1 s}}";
    let drawing = ebbvolt::plan::Drawing { count: 200, from: ebbvolt::plan::DrawFrom::Uniform, seed: 7 };
    let options = Options { two_faults: true, sensitivity: true, draws: Some(drawing), ..Options::default() };
    let plan = planned_with(&one(&format!("{leak}, {switched}"), ""), options);
    let pairs: Vec<&str> = plan.waits[0].fault_pairs.iter().map(|f| f.fault.as_str()).collect();
    assert_eq!(pairs, ["RL absent and RS open", "RL absent and RS contact does not close"]);
    assert!(plan.waits[0].fault_pairs.iter().all(|f| f.wait.is_none()));
    assert!(plan.sensitivity.expect("asked for")[0].parts.iter().any(|p| p.id == "RS"));
    assert!(plan.draws.is_some());
}

#[test]
fn a_sink_that_draws_goes_on_as_the_contact_closes() {
    let bleeder = "{id: RS, role: bleeder, value: 1 kohm, tolerance: 0 %, switched: {closes_after: 1 s}}";
    let with = |kind: &str, value: &str| {
        let sink =
            format!("{{id: K1, kind: {kind}, value: {value}, across: [P, N], stops_below: 30 V, counted: true}}");
        planned(&one(bleeder, &format!(", sinks: [{sink}]")))
    };
    // 40 mA alone take 40 V in the first second; then v + I R falls with R C.
    let current = with("constant-current", "40 mA");
    close(slowest(&current), 1.0 + f64::ln((560.0 + 40.0) / (50.0 + 40.0)), 1e-11);
    // 20 W alone: v^2 falls by 2 P t / C; then v^2 + P R falls with R C / 2.
    let power = with("constant-power", "20 W");
    close(slowest(&power), 1.0 + 0.5 * f64::ln((320e3 + 20e3) / (2500.0 + 20e3)), 1e-9);
    // What the sink does not draw is left to the contact, and the other way round.
    close(fault_wait(&current, "K1 dead").expect("it ends"), 1.0 + f64::ln(12.0), 1e-12);
    let alone = fault_wait(&current, "RS contact does not close").expect("it ends");
    close(alone, 1e-3 * 550.0 / 0.04, 1e-12);
}
