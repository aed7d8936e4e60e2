//! Curves against time: against closed forms, and against the plan that they belong to.

use crate::{PLAIN, WITH_STEPS, demo_plans, with_bank};
use approx::assert_relative_eq;
use ebbvolt::bank::file;
use ebbvolt::plan::{CurveTimes, Curves, Options, Plan, plan};
use ebbvolt::quantity::{Quantity, Time, celsius};
use serde_json::Value;

fn planned(bank: &str, times: CurveTimes) -> Plan {
    let (bank, noticed) = file::read("bank", bank.as_bytes()).expect("a valid bank");
    plan(&bank, "", noticed, Options { curves: Some(times), ..Options::default() }).expect("a certified plan")
}

fn at(seconds: &[f64]) -> CurveTimes {
    CurveTimes::At(seconds.iter().map(|s| Time::from_si(*s)).collect())
}

fn curves(plan: &Plan) -> &Curves {
    plan.curves.as_ref().expect("curves were asked for")
}

#[test]
fn one_capacitance_and_its_bleeder_follow_the_closed_form() {
    let plan = planned(PLAIN, at(&[0.0, 30.0, 72.6, 300.0]));
    let curves = curves(&plan);
    // v = V exp(-t/RC), i = v/R, p = v i, and the capacitor gives off what the bleeder takes up.
    let (nominal, slowest) = (22e3 * 3300e-6, 1.05 * 22e3 * 1.2 * 3300e-6);
    assert_eq!(curves.spans.len(), 1);
    assert_eq!(curves.parts.iter().map(|p| p.id.as_str()).collect::<Vec<_>>(), ["C1", "R1"]);
    for sample in &curves.spans[0].samples {
        let t = sample.time.si();
        let volts = 565.0 * (-t / nominal).exp();
        assert_relative_eq!(sample.voltages[0].nominal.si(), volts, max_relative = 1e-10);
        assert_relative_eq!(sample.voltages[0].highest.si(), 750.0 * (-t / slowest).exp(), max_relative = 1e-10);
        let [capacitor, bleeder] = &sample.loads[..] else { panic!("two parts") };
        assert_relative_eq!(bleeder.current.si(), volts / 22e3, max_relative = 1e-10);
        assert_relative_eq!(bleeder.power.si(), volts * volts / 22e3, max_relative = 1e-10);
        assert_relative_eq!(capacitor.current.si(), -volts / 22e3, max_relative = 1e-10);
        assert_relative_eq!(capacitor.power.si(), -volts * volts / 22e3, max_relative = 1e-10);
    }
}

#[test]
fn a_tool_heats_and_cools_by_the_closed_form() {
    // The tool goes on at 90 s at 750 V exp(-60/tau0) exp(-30/tau1): the meter's 10 Mohm hardly counts. Its nominal
    // figures are followed here: power v^2/R; the greatest is checked against the plan's own below.
    let plan = planned(WITH_STEPS, at(&[90.0, 91.0, 120.0]));
    let curves = curves(&plan);
    let span = curves.spans.iter().find(|s| s.step == Some(4)).expect("step 4");
    let tool = curves.parts.iter().position(|p| p.id == "T1").expect("the tool");
    let farad = 3300e-6;
    let slow = farad / (1.0 / 22e3);
    let metered = farad / (1.0 / 22e3 + 1.0 / 10e6);
    let with_tool = farad / (1.0 / 22e3 + 1.0 / 1e3);
    for sample in &span.samples {
        let t = sample.time.si() - 90.0;
        let volts = 565.0 * (-60.0 / slow - 30.0 / metered - t / with_tool).exp();
        assert_relative_eq!(sample.loads[tool].voltage.si(), volts, max_relative = 1e-9);
        assert_relative_eq!(sample.loads[tool].power.si(), volts * volts / 1e3, max_relative = 1e-9);
    }
    let first = &span.samples[0].tools[0];
    assert_relative_eq!(celsius(first.temperature.expect("a thermal time is given")), 40.0, max_relative = 1e-9);
    assert!(span.samples[1].tools[0].temperature > first.temperature);
}

#[test]
fn at_the_end_of_every_step_the_curves_are_the_plans_own_figures() {
    let own = planned(WITH_STEPS, CurveTimes::Automatic);
    for plan in demo_plans().iter().map(|(_, plan)| plan).chain([&own]) {
        for (step, span) in plan.steps.iter().zip(&curves(plan).spans) {
            let last = span.samples.last().expect("moments");
            assert_relative_eq!(last.time.si(), step.end.si(), max_relative = 1e-12);
            for (point, voltage) in step.test_points.iter().zip(&last.voltages) {
                let scale = 1e-9 * plan.charged_to.highest.si();
                assert_relative_eq!(voltage.nominal.si(), point.nominal.si(), max_relative = 1e-9, epsilon = scale);
                assert_relative_eq!(voltage.highest.si(), point.highest.si(), max_relative = 1e-6, epsilon = scale);
            }
        }
    }
}

#[test]
fn a_tools_curve_reaches_the_plans_peak_and_never_passes_it() {
    let plan = planned(WITH_STEPS, CurveTimes::Automatic);
    let samples = || curves(&plan).spans.iter().filter(|s| s.step.is_some()).flat_map(|s| &s.samples);
    let tool = plan.resistors.iter().find(|r| r.id == "T1").expect("the tool");
    let power = samples().map(|s| s.tools[0].power.si()).fold(0.0, f64::max);
    assert_relative_eq!(power, tool.peak_power.expect("connected").si(), max_relative = 1e-9);
    let heat = samples().filter_map(|s| s.tools[0].temperature).map(celsius).fold(0.0, f64::max);
    let peak = celsius(tool.body_temperature.expect("a thermal time is given"));
    assert!(heat <= peak * (1.0 + 1e-9) && heat > peak - 0.01 * (peak - 40.0), "{heat} of {peak}");
}

#[test]
fn the_highest_is_never_below_the_nominal_and_currents_at_a_node_cancel() {
    for (name, plan) in demo_plans() {
        for sample in curves(plan).spans.iter().flat_map(|s| &s.samples) {
            for voltage in &sample.voltages {
                assert!(voltage.highest.si() >= voltage.nominal.si() * (1.0 - 1e-9), "{name}");
            }
            // Power: what the capacitors give off the resistors take up, at every moment (Tellegen).
            let sum: f64 = sample.loads.iter().map(|load| load.power.si()).sum();
            let size: f64 = sample.loads.iter().map(|load| load.power.si().abs()).sum();
            assert!(sum.abs() <= 1e-7 * size + 1e-12, "{name} at {}: {sum} of {size}", sample.time.si());
        }
    }
}

#[test]
fn between_two_moments_a_straight_line_hides_nothing() {
    // 750 V behind a strap's microseconds and a bleeder's minutes: each is seen at its own pace.
    let plan = planned(WITH_STEPS, CurveTimes::Automatic);
    let curves = curves(&plan);
    let chosen: Vec<f64> = curves.spans.iter().flat_map(|s| &s.samples).map(|s| s.time.si()).collect();
    let between: Vec<f64> = chosen.windows(2).map(|pair| 0.5 * (pair[0] + pair[1])).collect();
    let finer = planned(WITH_STEPS, at(&between));
    for span in &curves.spans {
        let at =
            finer.curves.as_ref().expect("curves").spans.iter().find(|s| s.step == span.step).expect("the same step");
        for sample in &at.samples {
            let t = sample.time.si();
            let Some(after) = span.samples.iter().position(|s| s.time.si() >= t) else { continue };
            let Some(before) = after.checked_sub(1) else { continue };
            let (a, b) = (&span.samples[before], &span.samples[after]);
            let share = (t - a.time.si()) / (b.time.si() - a.time.si());
            let straight = a.voltages[0].highest.si() * (1.0 - share) + b.voltages[0].highest.si() * share;
            assert!((straight - sample.voltages[0].highest.si()).abs() < 0.01 * 750.0, "at {t}");
        }
    }
}

#[test]
fn csv_has_a_row_for_every_moment_and_both_sides_of_a_steps_end() {
    let printed = with_bank(&["trace", "-", "--format", "csv", "--times", "0s,60s,5min"], WITH_STEPS);
    assert_eq!(printed.status, 0, "{}", printed.err);
    let rows: Vec<Vec<&str>> = printed.out.lines().map(|line| line.split(',').collect()).collect();
    assert!(printed.out.lines().count() >= 5 && printed.out.contains("\r\n"));
    assert_eq!(&rows[0][..4], ["time_s", "step", "P - N nominal_v", "P - N highest_v"]);
    assert!(rows.iter().all(|row| row.len() == rows[0].len()));
    let steps: Vec<(&str, &str)> = rows[1..].iter().map(|row| (row[0], row[1])).collect();
    assert_eq!(steps, [("0", "1"), ("0", "2"), ("60", "2"), ("60", "3"), ("300", "")]);
}

#[test]
fn json_has_the_same_figures_in_si_units() {
    let words = |format| ["trace", "-", "--format", format, "--times", "30s"];
    let json: Value = serde_json::from_str(&with_bank(&words("json"), PLAIN).out).expect("JSON");
    let sample = &json["spans"][0]["samples"][0];
    let highest = sample["voltages"][0]["highest_v"].as_f64().expect("a number");
    assert_relative_eq!(highest, 750.0 * (-30.0 / (1.05 * 22e3 * 1.2 * 3300e-6f64)).exp(), max_relative = 1e-10);
    assert_eq!(json["bank"]["tag"], "PU-09");
    let csv = with_bank(&words("csv"), PLAIN).out;
    let cell = csv.lines().nth(1).expect("a row").split(',').nth(3).expect("a cell").parse::<f64>();
    assert_eq!(cell.map(f64::to_bits), Ok(highest.to_bits()));
}

#[test]
fn curves_stay_out_of_the_plans_json() {
    let json = with_bank(&["plan", "-", "--format", "json"], WITH_STEPS).out;
    assert!(!json.contains("samples") && !json.contains("curves"));
}

#[test]
fn the_plot_in_characters_stays_within_its_columns_and_names_its_lines() {
    let printed = with_bank(&["trace", "-"], WITH_STEPS);
    for part in [
        "Voltage at P - N",
        "# highest credible",
        ". nominal",
        "touch voltage 50 V",
        "Power of T1 (tool)",
        "prediction",
    ] {
        assert!(printed.out.contains(part), "{part}: {}", printed.out);
    }
    assert!(printed.out.lines().all(|line| line.chars().count() <= 80));
}

#[test]
fn a_time_that_is_none_is_refused() {
    for wrong in ["5", "x", "-5 s", "1 V", ""] {
        let printed = with_bank(&["trace", "-", "--times", wrong], PLAIN);
        assert_eq!((printed.status, printed.out.as_str()), (2, ""), "{wrong}: {}", printed.err);
    }
}

#[test]
fn an_svg_of_curves_is_well_formed_and_titled() {
    let printed = with_bank(&["trace", "-", "--format", "svg"], WITH_STEPS);
    let drawing = roxmltree::Document::parse(&printed.out).expect("XML");
    assert_eq!(drawing.root_element().attribute("role"), Some("img"));
    assert!(drawing.descendants().filter(|n| n.tag_name().name() == "desc").count() >= 2);
}

#[test]
fn a_sink_draws_its_current_while_it_counts_and_is_left_out_where_nobody_counts_on_it() {
    let with = |counted: bool| {
        let sink = "{id: K1, kind: constant-current, value: 40 mA, across: [P, N], stops_below: 30 V";
        format!("{PLAIN}sinks: [{sink}, counted: {counted}}}]\n")
    };
    // C dv/dt = -v/R - I has v = (V + I R) exp(-t/RC) - I R until the sink stops.
    let (t, ohms, farad, ampere) = (20.0f64, 22e3, 3300e-6, 0.04);
    let drawn = (565.0 + ampere * ohms) * (-t / (ohms * farad)).exp() - ampere * ohms;
    let counted = planned(&with(true), at(&[t]));
    let sample = &curves(&counted).spans[0].samples[0];
    assert_eq!(curves(&counted).parts.iter().map(|p| p.role).collect::<Vec<_>>(), ["capacitor", "bleeder", "sink"]);
    assert_relative_eq!(sample.voltages[0].nominal.si(), drawn, max_relative = 1e-9);
    assert_relative_eq!(sample.loads[2].current.si(), ampere, max_relative = 1e-12);
    assert_relative_eq!(sample.loads[2].power.si(), ampere * drawn, max_relative = 1e-9);
    let sum: f64 = sample.loads.iter().map(|load| load.power.si()).sum();
    assert!(sum.abs() < 1e-8 * sample.loads[1].power.si().abs(), "{sum}");
    let uncounted = planned(&with(false), at(&[t]));
    let sample = &curves(&uncounted).spans[0].samples[0];
    let alone = 565.0 * (-t / (ohms * farad)).exp();
    assert_relative_eq!(sample.voltages[0].nominal.si(), alone, max_relative = 1e-9);
    assert_eq!(sample.loads[2].current.si().to_bits(), 0.0f64.to_bits());
}
