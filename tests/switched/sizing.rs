//! Bleeders sized for a contact: the window against closed forms, every design against the plan of the file with it.

use super::*;
use ebbvolt::bank::Bank;
use ebbvolt::bank::description::Switched;
use ebbvolt::bank::stock::{Element, Values};
use ebbvolt::data::generic_stock;
use ebbvolt::plan::Verdict;
use ebbvolt::quantity::{Current, Power, Voltage};
use ebbvolt::size::{BleederAsk, BleederFigures, Build, SizeError, Sizing, Target, bleeder};

const BANK: &str = "ebbvolt: 1\ntag: T\nambient: 40 °C\ntouch_voltage: 50 V\n\
                    charged_to: {nominal: 500 V, highest: 600 V}\n# what stores\ncapacitors:\n  \
                    - {id: C1, value: 1 mF, tolerance: 20 %}\n\
                    limits:\n  - {id: site, voltage: 50 V, within: 10 s}\n";

fn bank(text: &str) -> Bank {
    file::read("bank.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{e:?}")).0
}

fn elements() -> Vec<Element> {
    file::read_stock("generic", generic_stock().as_bytes()).unwrap_or_else(|e| panic!("{e:?}"))
}

fn contact(closes: f64, opens: f64, discharges: u32, every: Option<f64>) -> Switched {
    Switched {
        closes_after: Time::from_si(closes),
        opens_after: Time::from_si(opens),
        discharges,
        every: every.map(Time::from_si),
    }
}

fn ask(switched: Switched) -> BleederAsk {
    let build = Build { elements: elements(), ..Build::default() };
    BleederAsk { build, switched: Some(switched), ..BleederAsk::default() }
}

fn sized(text: &str, ask: &BleederAsk) -> Sizing<BleederFigures> {
    bleeder(&bank(text), "", ask).unwrap_or_else(|e| panic!("{e}"))
}

#[test]
fn the_delay_counts_in_the_time_that_bounds_the_window_above() {
    let mut ask = ask(contact(2.0, 0.0, 1, None));
    ask.max_current = Some(Current::from_si(0.5));
    let window = sized(BANK, &ask).window.expect("it is open");
    // R = (t - t1) / (C ln(V0/V)) above, V0 / I below.
    close(window.greatest.expect("a time").si(), (10.0 - 2.0) / (1.2e-3 * f64::ln(12.0)), 1e-9);
    close(window.least.expect("a current").si(), 1200.0, 1e-9);
    assert_eq!(window.least_from.as_deref(), Some("a current of at most 500 mA"));
    // Without a delay the plain bleeder's upper end.
    let plain = BleederAsk { switched: None, max_loss: Some(Power::from_si(1e6)), ..ask.clone() };
    let plain = sized(BANK, &plain).window.expect("it is open").greatest.expect("a time").si();
    let at_once = BleederAsk { switched: Some(Switched::default()), ..ask };
    close(sized(BANK, &at_once).window.expect("it is open").greatest.expect("a time").si(), plain, 1e-9);
}

#[test]
fn every_design_in_the_file_is_planned_to_the_same_figures() {
    for (contact, target) in [
        (contact(0.1, 0.05, 5, Some(600.0)), None),
        (contact(0.5, 0.0, 1, None), Some(4.0)),
        (contact(0.0, 0.2, 20, Some(60.0)), Some(30.0)),
    ] {
        let mut ask = ask(contact);
        ask.target = target.map(|t| Target { voltage: Voltage::from_si(50.0), within: Time::from_si(t) });
        let sizing = sized(BANK, &ask);
        assert!(!sizing.candidates.is_empty(), "{:?}", sizing.findings);
        for c in &sizing.candidates {
            let text = file::with_resistor("bank.yaml", BANK.as_bytes(), &c.figures.resistor).expect("placed");
            assert!(text.contains("# what stores") && text.contains("switched: {"), "{text}");
            let plan = planned(&text);
            let rb = resistor(&plan, "RB");
            assert!(rb.checks.iter().all(|check| check.verdict != Verdict::NotMet), "{:?}", rb.checks);
            assert_eq!(rb.checks, c.checks);
            assert_eq!(c.verdict, plan.verdict);
            close(slowest(&plan), c.figures.wait.expect("it ends").si(), 1e-12);
            let figures = c.figures.contact.as_ref().expect("it is switched");
            assert_eq!(figures.element_peak_power, rb.peak_power);
            assert_eq!(rb.contact.as_ref().and_then(|k| k.average_power), c.element_power);
            assert_eq!((figures.not_closing_wait, c.figures.loss_highest.si()), (None, 0.0));
            assert_eq!(rb.continuous_power, None);
        }
    }
}

/// One element of 1 kohm with these ratings, in arrays of up to 2 by 2.
fn of_one(rating: &str) -> Build {
    let stock = format!("elements: [{{name: piece, value: 1 kohm, tolerance: 0 %, rating: {{{rating}}}}}]");
    let elements = file::read_stock("stock", stock.as_bytes()).unwrap_or_else(|e| panic!("{e:?}"));
    assert!(matches!(elements[0].values, Values::One(_)));
    Build { elements, series_up_to: 2, parallel_up_to: 2, show: 10, ..Build::default() }
}

#[test]
fn the_pulse_decides_how_many_elements_it_takes() {
    // 1.2 mF at 600 V is 216 J, shared alike. What takes up 40 W at most in four pieces is no pulse at all: from 9 kohm
    // on, and 20 s want 6.7 kohm at most.
    let mut ask = ask(contact(0.0, 0.0, 1, None));
    ask.target = Some(Target { voltage: Voltage::from_si(50.0), within: Time::from_si(20.0) });
    let with = |joule: u32| of_one(&format!("power: 10 W, full_to: 40 °C, zero_at: 200 °C, pulse: {joule} J"));
    let counts = |ask: &BleederAsk| {
        let mut counts: Vec<u32> = sized(BANK, ask).candidates.iter().map(|c| c.elements).collect();
        counts.dedup();
        counts
    };
    ask.build = with(110);
    assert_eq!(counts(&ask), [2, 4]);
    ask.build = with(60);
    assert_eq!(counts(&ask), [4]);
    ask.build = with(50);
    let none = sized(BANK, &ask);
    assert!(none.candidates.is_empty() && none.window.is_none());
    let finding = &none.findings[0];
    assert!(finding.code == "demands-collide" && finding.text.contains("at least 9.01 kohm"), "{finding:?}");
    assert!(finding.help.as_ref().is_some_and(|help| help.contains("bear a discharge of 21")), "{finding:?}");
}

#[test]
fn a_row_of_discharges_that_heats_too_much_asks_for_more_time_between_them() {
    let build = of_one("power: 10 W, full_to: 40 °C, zero_at: 200 °C, thermal_time: 60 s");
    let found = |every: f64| {
        let mut ask = ask(contact(0.0, 0.0, 100, Some(every)));
        ask.build = build.clone();
        sized(BANK, &ask)
    };
    // 216 J on four pieces of 10 W in air of 40 °C. Every 2 s they bear 80 J at a time, and what is quick enough for the
    // limit takes up 216 (1 - e^(-2 * 2 / 4.02)) = 136 J.
    assert!(!found(60.0).candidates.is_empty());
    let hot = found(2.0);
    assert!(hot.candidates.is_empty());
    let told: Vec<&str> = hot.findings.iter().map(|f| f.text.as_str()).collect();
    assert!(told.iter().any(|text| text.contains("on average")), "{told:?}");
}

#[test]
fn a_peak_that_no_overload_allows_bounds_the_window_below() {
    // Four pieces of 10 W bear 5 times as much: 200 W from 600 V is 1800 ohm, against a time that wants at most 1600.
    let rating = "power: 10 W, full_to: 40 °C, zero_at: 200 °C, overload: {times: 5, for: 10 s}";
    let mut ask = ask(contact(0.0, 0.0, 1, None));
    ask.build = of_one(rating);
    ask.target = Some(Target { voltage: Voltage::from_si(50.0), within: Time::from_si(1.2 * 1.6 * f64::ln(12.0)) });
    let sizing = sized(BANK, &ask);
    assert!(sizing.window.is_none());
    let finding = &sizing.findings[0];
    assert_eq!(finding.code, "demands-collide");
    let (text, help) = (&finding.text, finding.help.clone().unwrap_or_default());
    assert!(text.contains("at most 1.60 kohm"), "{text}");
    assert!(text.contains("at least 1.80 kohm") && text.contains("one discharge"), "{text}");
    assert!(help.contains("a peak of 2") && help.contains("W") && !help.contains("--switched"), "{help}");
    ask.target = Some(Target { voltage: Voltage::from_si(50.0), within: Time::from_si(1.2 * 2.0 * f64::ln(12.0)) });
    let window = sized(BANK, &ask).window.expect("it is open");
    close(window.least.expect("a peak").si(), 1800.0, 1e-9);
}

#[test]
fn with_single_faults_the_contact_counts_and_a_second_path_opens_it() {
    let mut ask = ask(contact(0.0, 0.0, 1, None));
    ask.single_fault = true;
    let none = sized(BANK, &ask);
    assert!(none.candidates.is_empty());
    assert!(none.findings[0].help.as_ref().is_some_and(|help| help.contains("single fault")), "{:?}", none.findings);
    // A second bleeder, switched or not, that does the job alone makes the contact no single fault any more.
    let second = BANK.replace(
        "limits:",
        "resistors:\n  - {id: R2, role: bleeder, value: 2 kohm, tolerance: 5 %, \
                                          switched: {closes_after: 1 s}}\nlimits:",
    );
    assert!(!sized(&second, &ask).candidates.is_empty());
}

#[test]
fn what_makes_no_sense_is_refused() {
    let mut loss = ask(Switched::default());
    loss.max_loss = Some(Power::from_si(5.0));
    assert!(matches!(bleeder(&bank(BANK), "", &loss), Err(SizeError::Asked(text)) if text.contains("--max-loss")));
    let short = ask(contact(2.0, 1.0, 3, Some(2.0)));
    assert!(matches!(bleeder(&bank(BANK), "", &short), Err(SizeError::Placed(_))));
}

#[test]
fn three_phases_take_a_contact_too() {
    let text = "{ebbvolt: 1, tag: T, ambient: 40 °C, touch_voltage: 50 V, terminals: [A, B, C], \
                charged_to: {ac_rms: 400 V, rise: 10 %, phases: 3, neutral: isolated}, \
                capacitors: [{id: CB, value: 200 uF, tolerance: 10 %, phases: 3, connection: delta}], \
                limits: [{id: site, voltage: 50 V, within: 60 s}]}";
    let sizing = sized(text, &ask(contact(0.5, 0.02, 3, Some(300.0))));
    let first = sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings));
    assert!(first.part.contains("connection: delta") && first.part.contains("switched: {closes_after: 500 ms"));
    assert!(first.figures.limits[0].met == Some(true));
}
