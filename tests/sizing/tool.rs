//! Tools against closed forms for one capacitance, worked by hand.

use crate::banks::{HEAD, bank, elements, generic, greatest, least, of, seconds, shelf, tooled};
use approx::assert_relative_eq;
use ebbvolt::data::Series;
use ebbvolt::plan::Verdict;
use ebbvolt::quantity::{Current, Energy, Quantity, Resistance, Voltage};
use ebbvolt::size::{Build, Placement, ToolAsk};

const PLAIN: &str = "touch_voltage: 50 V\ncharged_to: {nominal: 565 V, highest: 750 V}\n";
/// Bears anything here.
const STRONG: &str = "power: 1 kW, full_to: 25 °C, zero_at: 275 °C, voltage: 5 kV, pulse: 100 kJ, thermal_time: 300 s";

fn one(more: &str) -> String {
    format!("{HEAD}{PLAIN}capacitors: [{{id: C1, value: 3300 uF, tolerance: 20 %, across: [P, N]}}]\n{more}")
}

/// The greatest capacitance and the highest voltage of `one`.
const FARAD: f64 = 1.2 * 3300e-6;
const VOLTS: f64 = 750.0;

fn ask() -> ToolAsk {
    ToolAsk { build: of(Series::E24), within: seconds(20.0), ..ToolAsk::default() }
}

#[test]
fn the_hold_time_bounds_the_resistance_from_above() {
    let sizing = tooled(&bank(&one("")), &ask());
    let by_hand = 20.0 / (FARAD * (VOLTS / 50.0).ln());
    assert_relative_eq!(sizing.demands[0].greatest.expect("bounded").si(), by_hand, max_relative = 1e-9);
    assert_relative_eq!(greatest(&sizing), by_hand, max_relative = 1e-9);
    assert_eq!(sizing.candidates.len(), 5, "{:?}", sizing.findings);
    // With cable and contact at their most, the tool itself may have that much less.
    let lead = ToolAsk { lead: Some(Resistance::from_si(100.0)), ..ask() };
    assert_relative_eq!(greatest(&tooled(&bank(&one("")), &lead)), by_hand - 100.0, max_relative = 1e-9);
    // Another voltage than the touch voltage.
    let lower = ToolAsk { voltage: Some(Voltage::from_si(10.0)), ..ask() };
    let by_hand = 20.0 / (FARAD * (VOLTS / 10.0).ln());
    assert_relative_eq!(greatest(&tooled(&bank(&one("")), &lower)), by_hand, max_relative = 1e-9);
}

#[test]
fn current_and_the_heat_of_the_contact_bound_it_from_below() {
    let asked = ToolAsk { max_current: Some(Current::from_si(1.0)), ..ask() };
    let sizing = tooled(&bank(&one("")), &asked);
    assert_relative_eq!(least(&sizing), VOLTS, max_relative = 1e-9);
    for c in &sizing.candidates {
        assert!(c.figures.peak_current.si() <= 1.0, "{c:?}");
    }
    // Cable and contact may be nothing: the current has no help of them.
    let with_lead = ToolAsk { lead: Some(Resistance::from_si(200.0)), ..asked };
    assert_relative_eq!(least(&tooled(&bank(&one("")), &with_lead)), VOLTS, max_relative = 1e-9);

    let (lead, most) = (2.0, 10.0);
    let asked = ToolAsk { lead: Some(Resistance::from_si(lead)), contact_energy: Some(Energy::from_si(most)), ..ask() };
    let sizing = tooled(&bank(&one("")), &asked);
    let end = sizing.demands[1].least.expect("bounded").si();
    // C V^2/2 of the capacitance that is worst, less what is left after 20 s, in proportion to the resistances.
    let given_off = |ohms: f64| {
        let left = (-2.0 * 20.0 / ((ohms + lead) * FARAD)).exp();
        0.5 * FARAD * VOLTS * VOLTS * (1.0 - left) * lead / (ohms + lead)
    };
    assert_relative_eq!(given_off(end), most, max_relative = 1e-8);
    for c in &sizing.candidates {
        let lowest = c.resistance.si() * 0.95;
        let found = c.figures.contact_energy.expect("the lead is given").si();
        assert_relative_eq!(found, given_off(lowest), max_relative = 1e-9);
        assert!(found <= most);
    }
}

#[test]
fn the_figures_of_a_design_are_those_of_the_hand_calculation() {
    let lead = 10.0;
    let asked = ToolAsk { build: shelf("1 kohm", "5 %", STRONG), lead: Some(Resistance::from_si(lead)), ..ask() };
    let sizing = tooled(&bank(&one("")), &asked);
    let c = &sizing.candidates[0];
    let f = &c.figures;
    let (low, high) = (950.0, 1050.0 + lead);
    assert_relative_eq!(f.time.expect("it ends").si(), high * FARAD * (VOLTS / 50.0).ln(), max_relative = 1e-9);
    assert_relative_eq!(f.left.si(), VOLTS * (-20.0 / (high * FARAD)).exp(), max_relative = 1e-9);
    assert_relative_eq!(f.peak_current.si(), VOLTS / low, max_relative = 1e-9);
    assert_relative_eq!(f.peak_power.si(), VOLTS * VOLTS / low, max_relative = 1e-9);
    let energy = 0.5 * FARAD * VOLTS * VOLTS * (1.0 - (-40.0 / (low * FARAD)).exp());
    assert_relative_eq!(f.energy.si(), energy, max_relative = 1e-9);
    assert_relative_eq!(f.average_power.si(), energy / 20.0, max_relative = 1e-9);
    assert_eq!((f.placement, f.applied_at.si(), f.held.si()), (Placement::WithSteps, 0.0, 20.0));
    assert!(c.checks.iter().all(|k| k.verdict != Verdict::NotMet));
}

#[test]
fn what_discharges_the_bank_before_the_tool_is_applied_counts_and_is_told_of() {
    let there = "resistors: [{id: R1, role: bleeder, value: 22 kohm, tolerance: 5 %}]\n";
    // A pulse rating that bears what is left after two minutes, and not what was there at isolation.
    let rating = "power: 50 W, full_to: 25 °C, zero_at: 275 °C, voltage: 1 kV, pulse: 400 J";
    let later = ToolAsk { after: seconds(120.0), build: shelf("1 kohm", "5 %", rating), ..ask() };
    let sizing = tooled(&bank(&one(there)), &later);
    let c = sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings));
    let left = VOLTS * (-120.0 / (1.05 * 22e3 * FARAD)).exp();
    assert_relative_eq!(c.figures.peak_current.si(), left / 950.0, max_relative = 1e-9);
    let finding = sizing.findings.iter().find(|f| f.code == "tool-relies-on-bleeders").expect("told");
    // 750 V and 0.789 A; of 1114 J all but what is left (e^-11) and what the bleeder takes (1 in 25) goes into the tool: 1069 J;
    // 400 J are allowed.
    for part in ["750 V", "790 mA", "1.07 kJ", "NOT bear", "pulse energy"] {
        assert!(finding.text.contains(part), "{part}: {}", finding.text);
    }
    // At once it is refused, and nothing is relied on.
    let now = tooled(&bank(&one(there)), &ToolAsk { after: None, ..later });
    assert!(now.candidates.is_empty() && now.findings.iter().all(|f| f.code != "tool-relies-on-bleeders"));
}

#[test]
fn steps_that_leave_a_tool_nothing_to_do_do_not_let_any_tool_pass() {
    let steps = "resistors:\n  - {id: R1, role: bleeder, value: 22 kohm, tolerance: 5 %}\n  - {id: T1, role: tool, value: 1 \
                 kohm}\nprocedure:\n  - {step: Isolate and wait, for: 10 min}\n  - {step: Apply, connect: [T1], for: 30 s}\n";
    let sizing = tooled(&bank(&one(steps)), &ToolAsk { within: None, ..ask() });
    // Sized for the bank as it was isolated, the bleeder at its upper end beside it.
    let both = 30.0 / (FARAD * (VOLTS / 50.0).ln());
    let by_hand = (both.recip() - (1.05f64 * 22e3).recip()).recip();
    assert_relative_eq!(greatest(&sizing), by_hand, max_relative = 1e-9);
    assert!(sizing.findings.iter().any(|f| f.code == "sized-from-isolation"), "{:?}", sizing.findings);
    assert!(sizing.candidates.iter().all(|c| c.figures.applied_at.si() <= 0.0) && sizing.candidates.len() == 5);
    // A bleeder that would do it all by itself, from isolation on: it may have failed, and so it is taken out.
    let fast = one("resistors: [{id: R1, role: bleeder, value: 100 ohm, tolerance: 5 %}]\n");
    let sizing = tooled(&bank(&fast), &ask());
    assert_relative_eq!(greatest(&sizing), 20.0 / (FARAD * (VOLTS / 50.0).ln()), max_relative = 1e-9);
    assert!(sizing.findings.iter().any(|f| f.text.contains("without its bleeders")), "{:?}", sizing.findings);
    // What remains even then asks nothing of any tool, and none is given.
    let fast = one("resistors: [{id: R1, role: leakage, value: 100 ohm, tolerance: 5 %}]\n");
    let sizing = tooled(&bank(&fast), &ask());
    assert_eq!((sizing.candidates.len(), sizing.exit_code()), (0, 1));
    assert!(sizing.findings.iter().any(|f| f.code == "already-met"), "{:?}", sizing.findings);
}

#[test]
fn demands_that_collide_tell_by_how_much_and_what_would_open_the_window() {
    let asked = ToolAsk { max_current: Some(Current::from_si(0.1)), ..ask() };
    let there = "resistors: [{id: R1, role: bleeder, value: 22 kohm, tolerance: 5 %}]\n";
    let sizing = tooled(&bank(&one(there)), &asked);
    assert_eq!((sizing.candidates.len(), sizing.exit_code(), sizing.findings[0].code), (0, 1, "demands-collide"));
    // At most 1/(1/1865 - 1/23100) = 2029 ohm for the time; at least 7500 ohm for the current: 3.7 times.
    for part in ["2.02 kohm", "7.50 kohm", "3.7 times"] {
        assert!(sizing.findings[0].text.contains(part), "{part}: {}", sizing.findings[0].text);
    }
    let help = sizing.findings[0].help.as_deref().unwrap_or_default();
    for part in ["holding it for", "a current of 370 mA", "--after"] {
        assert!(help.contains(part), "{part}: {help}");
    }
}

#[test]
fn elements_whose_ratings_tell_nothing_of_a_pulse_are_set_aside() {
    let bare = "power: 50 W, full_to: 25 °C, zero_at: 275 °C, voltage: 1 kV";
    let sizing = tooled(&bank(&one("")), &ToolAsk { build: shelf("1 kohm", "5 %", bare), ..ask() });
    assert!(sizing.candidates.is_empty());
    assert_eq!(sizing.findings[0].code, "demands-collide");
    // The same element where the pulse is no pulse: 750 V over 950 ohm is 592 W; of 700 W it bears 658 W in air of 40 °C.
    let large = "power: 700 W, full_to: 25 °C, zero_at: 275 °C, voltage: 1 kV";
    let sizing = tooled(&bank(&one("")), &ToolAsk { build: shelf("1 kohm", "5 %", large), ..ask() });
    assert_eq!(sizing.candidates.len(), 1, "{:?}", sizing.findings);
    assert!(sizing.candidates[0].figures.in_a_row.is_none());
}

#[test]
fn a_tool_of_the_file_is_sized_anew_in_the_files_own_steps() {
    let steps = "resistors:\n  - {id: T1, role: tool, value: 2 kohm, tolerance: 5 %, across: [P, N]}\n  - {id: ST1, role: strap, \
                 value: 10 mohm, across: [P, N]}\nprocedure:\n  - {step: Isolate, for: 0 s}\n  - {step: Apply, connect: [T1], \
                 for: 5 s}\n  - {step: Hold, for: 25 s, hold: {below: 20 V, at: [P, N]}}\n  - {step: Strap, connect: [ST1], for: \
                 60 s}\n  - {step: Lift, disconnect: [T1], for: 0 s}\n";
    let bank = bank(&one(steps));
    let asked = ToolAsk { within: None, ..ask() };
    let sizing = tooled(&bank, &asked);
    // 30 s of holding for 20 V at P - N; 50 V everywhere is met by then.
    let by_hand = |seconds: f64, volts: f64| seconds / (FARAD * (VOLTS / volts).ln());
    assert_relative_eq!(greatest(&sizing), by_hand(30.0, 20.0), max_relative = 1e-9);
    let c = &sizing.candidates[0];
    assert_eq!((sizing.id.as_str(), c.figures.placement, c.figures.held.si()), ("T1", Placement::InPlace, 30.0));
    assert!(c.figures.steps.is_empty());
    // Connected until the strap has been on for 60 s: from one to the next at least 90 s.
    assert_eq!(c.figures.in_a_row.as_ref().map(|r| r.every.si()), Some(90.0));
    // Another hold time and voltage stand in place of theirs; the file then lacks these steps, and that is told.
    let other = ToolAsk { within: seconds(12.0), voltage: Some(Voltage::from_si(60.0)), ..asked.clone() };
    let sizing = tooled(&bank, &other);
    assert_relative_eq!(greatest(&sizing), by_hand(12.0, 60.0), max_relative = 1e-9);
    assert_eq!(sizing.candidates[0].figures.steps.len(), 2);
    assert!(sizing.findings.iter().any(|f| f.code == "steps-not-in-file"));
    // Applied at another time it has steps of its own, held as long as the file holds it.
    let sizing = tooled(&bank, &ToolAsk { after: seconds(1.0), ..asked });
    assert_relative_eq!(greatest(&sizing), by_hand(30.0, 50.0), max_relative = 1e-9);
    assert!(sizing.findings.iter().any(|f| f.code == "steps-not-in-file"));
    // Another one, beside it, is no new value of it.
    let beside = tooled(&bank, &ToolAsk { id: Some("T2".into()), ..ask() });
    assert_eq!((beside.id.as_str(), beside.candidates[0].figures.placement), ("T2", Placement::Alone));
}

#[test]
fn a_capacitor_that_the_tool_does_not_reach_is_met_nowhere() {
    let text = format!(
        "{HEAD}{PLAIN}capacitors: [{{id: C1, value: 100 uF, across: [P, N]}}, {{id: C2, value: 100 uF, across: [M, \
         N]}}]\nresistors: [{{id: R1, role: series, value: 1 Mohm, across: [P, M]}}]\n"
    );
    let sizing = tooled(&bank(&text), &ask());
    assert_eq!((sizing.findings[0].code, sizing.exit_code()), ("demand-met-nowhere", 1));
    assert!(sizing.findings[0].help.as_deref().is_some_and(|h| h.contains("tool on every unit")));
}

#[test]
fn a_failed_bleeder_that_leaves_the_tool_too_little_time_is_told_of() {
    let there = "resistors: [{id: R1, role: bleeder, value: 10 kohm, tolerance: 5 %}]\n";
    let sizing = tooled(&bank(&one(there)), &ToolAsk { build: shelf("1.9 kohm", "5 %", STRONG), ..ask() });
    let c = sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings));
    let worst = c.figures.worst_fault.as_ref().expect("a bleeder can fail");
    assert_eq!(worst.fault, "R1 open");
    assert_relative_eq!(worst.left.si(), VOLTS * (-20.0 / (1.05 * 1900.0 * FARAD)).exp(), max_relative = 1e-9);
    assert!(worst.left.si() > 50.0 && c.figures.left.si() <= 50.0);
    assert!(sizing.findings.iter().any(|f| f.code == "not-enough-under-fault"), "{:?}", sizing.findings);
}

#[test]
fn charge_that_the_tool_does_not_reach_is_told_of() {
    // Two unequal halves: bled for an hour, the bank is at nothing; sized for the bank as it was isolated, the middle keeps
    // what the halves differ by.
    let text = format!(
        "{HEAD}{PLAIN}capacitors: [{{id: C1, value: 100 uF, across: [P, M]}}, {{id: C2, value: 300 uF, across: [M, \
         N]}}]\nresistors:\n  - {{id: R1, role: balancing, value: 100 kohm, across: [P, M]}}\n  - {{id: R2, role: balancing, \
         value: 100 kohm, across: [M, N]}}\n  - {{id: T1, role: tool, value: 1 kohm}}\nprocedure:\n  - {{step: Wait, for: 1 \
         h}}\n  - {{step: Apply, connect: [T1], for: 5 s}}\n"
    );
    let sizing = tooled(&bank(&text), &ToolAsk { within: None, ..ask() });
    let c = sizing.candidates.first().unwrap_or_else(|| panic!("{:?}", sizing.findings));
    // Half of 750 V on each; joined, 100 uF and 300 uF settle at 187.5 V against each other, and lose a quarter of it in 5 s
    // through what is 50 kohm then.
    assert!((120.0..187.5).contains(&c.figures.left.si()), "{c:?}");
    assert!(sizing.findings.iter().any(|f| f.code == "left-at-test-point"), "{:?}", sizing.findings);
}

#[test]
fn what_makes_no_sense_is_refused() {
    let refused = |ask: ToolAsk, text: &str| {
        let error = ebbvolt::size::tool(&bank(text), "", &ask).expect_err("it is refused");
        error.to_string()
    };
    assert!(refused(ToolAsk { within: None, ..ask() }, &one("")).contains("--within 20s"));
    let bleeder = one("resistors: [{id: R1, role: bleeder, value: 22 kohm, tolerance: 5 %}]\n");
    assert!(refused(ToolAsk { id: Some("R1".into()), ..ask() }, &bleeder).contains("role bleeder"));
    assert!(refused(ToolAsk { every: seconds(19.0), ..ask() }, &one("")).contains("--every"));
    let until =
        one("resistors: [{id: T1, role: tool, value: 1 kohm}]\nprocedure: [{step: Apply, connect: [T1], until: \
                     {below: 50 V}}]\n");
    assert!(refused(ToolAsk { within: None, ..ask() }, &until).contains("--within 20s"));
}

#[test]
fn a_three_phase_bank_takes_a_tool_with_three_legs() {
    let text = format!(
        "{HEAD}touch_voltage: 50 V\nterminals: [A, B, C]\ncharged_to: {{ac_rms: 400 V, phases: 3, neutral: \
         isolated}}\ncapacitors: [{{id: CB, value: 331.6 uF, phases: 3, connection: delta}}]\n"
    );
    let sizing = tooled(&bank(&text), &ToolAsk { within: seconds(5.0), ..ask() });
    // A delta on a delta: every pair falls with one leg of each; the poles leave 1.366 of the crest on one of them.
    let trapped = (1.5 + 3f64.sqrt() / 2.0) / 3f64.sqrt() * 2f64.sqrt() * 400.0;
    let by_hand = 5.0 / (331.6e-6 * (trapped / 50.0).ln());
    assert_relative_eq!(greatest(&sizing), by_hand, max_relative = 1e-8);
    assert_eq!(sizing.connection, Some("delta"));
    let c = &sizing.candidates[0];
    assert!(c.part.contains("phases: 3, connection: delta"), "{}", c.part);
    assert_relative_eq!(c.figures.peak_current.si(), trapped / (0.95 * c.resistance.si()), max_relative = 1e-8);
}

#[test]
fn a_thousand_elements_in_arrays_of_six_by_six_are_gone_through() {
    let text: String = (0..1000)
        .map(|k| {
            format!(
                "  - {{name: e{k}, value: {} ohm, tolerance: 5 %, rating: {{power: {} W, full_to: 40 °C, zero_at: 275 °C, \
                 voltage: 500 V, pulse: {} J, thermal_time: {} s}}}}\n",
                10 + 7 * k,
                5 + k % 40,
                50 + 10 * (k % 40),
                20 + k % 50
            )
        })
        .collect();
    let build = Build {
        elements: elements(&format!("elements:\n{text}")),
        series_up_to: 6,
        parallel_up_to: 6,
        show: 1,
        ..Build::default()
    };
    let sizing = tooled(&bank(&one("")), &ToolAsk { build, ..ask() });
    assert_eq!(sizing.candidates.len(), 1, "{:?}", sizing.findings);
    // What was set aside between the points was set aside rightly, and the first of the rest does.
    assert!(sizing.searched.inside_window > 1000 && sizing.searched.refused_by_plan <= 8, "{:?}", sizing.searched);
}

#[test]
fn a_margin_is_kept_on_what_heats_an_element() {
    let asked = ToolAsk { build: Build { margin: 0.4, elements: generic(Series::E24), ..Build::default() }, ..ask() };
    let sizing = tooled(&bank(&one("")), &asked);
    assert!(!sizing.candidates.is_empty(), "{:?}", sizing.findings);
    for c in &sizing.candidates {
        for k in c.checks.iter().filter(|k| k.check != "element voltage") {
            let (found, allowed) = k.found.zip(k.allowed).expect("generic elements have ratings");
            let air = if k.unit == "C" { 40.0 } else { 0.0 };
            assert!(found - air <= 0.6 * (allowed - air), "{k:?}");
        }
    }
}
