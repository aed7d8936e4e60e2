//! Figures of the banks worked out by hand: without absorption and without the procedure with every digit, then what
//! the head of each file says of the whole.

use crate::{bare_plans, plans};
use ebbvolt::plan::Plan;
use ebbvolt::quantity::Quantity;

/// A figure as the head of a file shows it. Some heads round to the nearest and some up, as the tool does: `found` is
/// not a unit of the last digit away.
fn shows(what: &str, found: f64, head: f64, last_digit: f64) {
    assert!((found - head).abs() < last_digit, "{what}: {found}, in the head of the file {head}");
}

/// A figure by hand with all its digits.
fn equals(what: &str, found: f64, by_hand: f64) {
    assert!((found / by_hand - 1.0).abs() < 1e-9, "{what}: {found}, by hand {by_hand}");
}

/// What a plan holds: nominal and highest energy in joule.
fn energies(plan: &Plan) -> [f64; 2] {
    let stored = plan.stored.as_ref().expect("computed");
    [stored.energy_nominal.si(), stored.energy_highest.si()]
}

/// Nominal and slowest wait across a test point, in second.
fn waits(plan: &Plan, across: [&str; 2]) -> [f64; 2] {
    let wait = plan.waits.iter().find(|w| w.across == across).expect("a test point");
    [wait.nominal, wait.slowest].map(|t| t.expect("it ends").si())
}

/// The longest wait at any test point under a fault, in second.
fn under(plan: &Plan, fault: &str) -> f64 {
    let faults = plan.waits.iter().flat_map(|w| w.faults.iter().filter(|f| f.fault == fault));
    let waits: Vec<f64> = faults.map(|f| f.wait.expect("it ends").si()).collect();
    assert_eq!(waits.len(), plan.waits.len(), "{fault}");
    waits.into_iter().fold(0.0, f64::max)
}

#[test]
fn the_pulse_capacitor_is_as_worked_out_by_hand() {
    let plan = &bare_plans()["pulse-capacitor"];
    // 4 uF (12 kV)^2 / 2 and 4.4 uF (12.5 kV)^2 / 2.
    equals("energy", energies(plan)[0], 288.0);
    equals("highest energy", energies(plan)[1], 343.75);
    // Two strings of ten 1.6 Mohm: 8 Mohm; 8 Mohm 4 uF = 32 s, and 1.05 * 1.1 of it is 36.96 s.
    equals("time constant", plan.time_constants[0].si(), 32.0);
    let [nominal, slowest] = waits(plan, ["H", "E"]);
    equals("nominal", nominal, 32.0 * (12000.0f64 / 50.0).ln());
    equals("slowest", slowest, 36.96 * (12500.0f64 / 50.0).ln());
    shows("nominal", nominal, 175.4, 0.1);
    shows("slowest", slowest, 204.1, 0.1);
    // One string lost: twice the resistance, twice the wait.
    equals("R1 open", under(plan, "R1 open"), 2.0 * slowest);
    shows("R1 open", under(plan, "R1 open"), 408.2, 0.1);
    // One element high and nine low: 12.5 kV 1.05 / (1.05 + 9 * 0.95), and its power on 1.68 Mohm.
    let element = &plan.resistors[0];
    let volts: f64 = 12.5e3 * 1.05 / (1.05 + 9.0 * 0.95);
    equals("element", element.element_voltage.expect("connected").si(), volts);
    equals("element", element.continuous_power.expect("connected").si(), volts * volts / 1.68e6);
}

#[test]
fn the_fast_charger_is_as_worked_out_by_hand() {
    let plan = &bare_plans()["fast-charger"];
    // 4 * 300 uF + 3 * 1 uF = 1203 uF; at 1050 V 1323.3 uF.
    equals("energy", energies(plan)[0], 0.5 * 1203e-6 * 1e6);
    equals("highest energy", energies(plan)[1], 0.5 * 1323.3e-6 * 1050.0 * 1050.0);
    shows("highest energy", energies(plan)[1], 729.5, 0.1);
    // 27 kohm 1203 uF; the worst 28.35 kohm 1323.3 uF.
    equals("time constant", plan.time_constants[0].si(), 27e3 * 1203e-6);
    let [nominal, slowest] = waits(plan, ["P", "N"]);
    shows("nominal", nominal, 97.3, 0.1);
    equals("slowest", slowest, 28.35e3 * 1323.3e-6 * 21f64.ln());
    shows("slowest", slowest, 114.2, 0.1);
    // One string of three lost: 40.5 kohm, half as long again.
    equals("R1 open", under(plan, "R1 open"), 1.5 * slowest);
    // One element high and two low.
    let volts: f64 = 1050.0 * 1.05 / (1.05 + 2.0 * 0.95);
    equals("element", plan.resistors[0].element_voltage.expect("connected").si(), volts);
    // 25 W (200 - 50) / (200 - 25).
    equals("allowed", plan.resistors[0].allowed_power.expect("rated").si(), 25.0 * 150.0 / 175.0);
}

#[test]
fn the_supercapacitor_module_is_as_worked_out_by_hand() {
    let plan = &bare_plans()["supercap"];
    // 130 F (54 V)^2 / 2 and 156 F (55.5 V)^2 / 2.
    equals("energy", energies(plan)[0], 189_540.0);
    equals("highest energy", energies(plan)[1], 78.0 * 55.5 * 55.5);
    // Two of 680 ohm side by side: 340 ohm; 357 ohm 156 F at the worst.
    equals("time constant", plan.time_constants[0].si(), 44_200.0);
    let [nominal, slowest] = waits(plan, ["P", "N"]);
    let touch = plan.touch_voltage.si();
    equals("nominal", nominal, 44_200.0 * (54.0 / touch).ln());
    equals("slowest", slowest, 55_692.0 * (55.5 / touch).ln());
    // One resistor lost: twice as long.
    equals("R1 open", under(plan, "R1 open"), 2.0 * slowest);
    // After 3 days 156 F (55.5 V exp(-259200/55692))^2 / 2: at most 22 J.
    let left = plan.limits[0].energy.si();
    equals("left", left, 78.0 * (55.5 * (-259_200.0f64 / 55_692.0).exp()).powi(2));
    assert!(left < 22.0, "{left}");
}

#[test]
fn the_filter_is_as_worked_out_by_hand() {
    let plan = &bare_plans()["filter"];
    let crest = 2f64.sqrt() * 230.0;
    equals("crest", plan.charged_to.nominal.si(), crest);
    equals("highest", plan.charged_to.highest.si(), 1.1 * crest);
    // The second section stands at 39/40 of the first.
    let by_hand = 0.5 * 47e-6 * crest * crest * (1.0 + (39.0f64 / 40.0).powi(2));
    equals("energy", energies(plan)[0], by_hand);
    shows("energy", energies(plan)[0], 4.85, 0.01);
    // Two equal sections: 39 kohm 47 uF together, and against each other 1/(1/39k + 2/1k) 47 uF.
    equals("slow", plan.time_constants[0].si(), 39e3 * 47e-6);
    equals("fast", plan.time_constants[1].si(), 47e-6 / (1.0 / 39e3 + 2.0 / 1e3));
    let [a, b] = [["A", "N"], ["B", "N"]].map(|pair| waits(plan, pair));
    // Past the fast one both have the mean, 79/80 of the crest, and the difference is nothing any more.
    equals("nominal", a[0], 39e3 * 47e-6 * (crest * 79.0 / 80.0 / 50.0).ln());
    for wait in [a, b] {
        shows("nominal", wait[0], 3.41, 0.01);
        shows("slowest", wait[1], 4.14, 0.01);
    }
    let machine = plan.limits.iter().find(|l| l.id == "iec-60204-1").expect("it is used");
    shows("left at 5 s", machine.voltage.si(), 33.4, 0.1);
    for fault in ["RB1 open", "RB2 open"] {
        assert!(under(plan, fault) <= 8.5 && under(plan, fault) > 8.0, "{fault}: {}", under(plan, fault));
    }
}

#[test]
fn the_power_factor_bank_is_as_worked_out_by_hand() {
    let plan = &bare_plans()["power-factor"];
    let farads = 50e3 / (3.0 * std::f64::consts::TAU * 50.0 * 400.0 * 400.0);
    let crest = 2f64.sqrt() * 400.0;
    let factor = (1.0 + 3f64.sqrt()) / 2.0;
    equals("crest", plan.charged_to.nominal.si(), crest);
    // Across two terminals one unit, and beside it two in series: one and a half.
    equals("capacitance", plan.stored.as_ref().and_then(|s| s.capacitance).expect("charged").si(), 1.5 * farads);
    for tau in &plan.time_constants {
        equals("time constant", tau.si(), 150e3 * farads);
    }
    for pair in [["A", "B"], ["B", "C"], ["A", "C"]] {
        let [nominal, slowest] = waits(plan, pair);
        equals("nominal", nominal, 150e3 * farads * (factor * crest / 50.0).ln());
        shows("nominal", nominal, 136.0, 1.0);
        shows("slowest", slowest, 163.0, 1.0);
        // Equal units at their highest are one point of the box; the worst is no less.
        let equal = 150e3 * 1.05 * farads * 1.1 * (factor * 1.1 * crest / 50.0).ln();
        assert!(slowest >= equal * (1.0 - 1e-12), "{slowest} {equal}");
        let point = plan.waits.iter().find(|w| w.across == pair).expect("a test point");
        shows("left by the poles", point.at_isolation.si(), 874.0, 1.0);
    }
    // The unit itself at the crest, and then at what the poles leave of it.
    let bleeder = &plan.resistors[0];
    equals("standing", bleeder.continuous_power.expect("connected").si(), 440.0 * 440.0 / (150e3 * 0.95));
    for fault in ["RD.AB open", "RD.BC open", "RD.CA open"] {
        assert!(under(plan, fault) > 8.0 * 60.0 && under(plan, fault) < 8.0 * 60.0 + 15.0, "{}", under(plan, fault));
    }
}

#[test]
fn the_pump_drive_is_as_worked_out_by_hand() {
    let plan = &bare_plans()["pump-drive"];
    equals("capacitance", plan.stored.as_ref().and_then(|s| s.capacitance).expect("charged").si(), 3300e-6);
    equals("energy", energies(plan)[0], 0.5 * 3300e-6 * 565.0 * 565.0);
    shows("highest energy", energies(plan)[1], 1117.0, 1.0);
    // Each half: 16.5 kohm on 6600 uF. Across the bus 33 kohm // (2 * 16.5 kohm) = 16.5 kohm on 3300 uF; an imbalance
    // between the halves does not see the bleeder.
    equals("imbalance", plan.time_constants[0].si(), 16.5e3 * 6600e-6);
    equals("bus", plan.time_constants[1].si(), 16.5e3 * 3300e-6);
    let [nominal, slowest] = waits(plan, ["P", "N"]);
    equals("nominal", nominal, 54.45 * (565.0f64 / 50.0).ln());
    shows("slowest", slowest, 186.0, 1.0);
    // The worse half: 750 V 1.05 / (1.05 + 0.95).
    let greatest = |id: &str| plan.capacitors.iter().find(|c| c.id == id).expect("a capacitor");
    equals("half", greatest("C1").voltage_highest.si(), 750.0 * 1.05 / 2.0);
    // One string of R1 open: 33 kohm against 16.5 kohm, both at their worst ends: 750 V 2.1 / (2.1 + 0.95) = 516 V;
    // but with C2 shorted C1 takes all of 750 V.
    equals("half under fault", greatest("C1").voltage_fault.si(), 750.0);
    for fault in ["R1 open", "R2 open"] {
        shows(fault, under(plan, fault), 366.0, 1.0);
    }
}

#[test]
fn the_impulse_stack_is_as_worked_out_by_hand() {
    let plan = &bare_plans()["marx"];
    shows("energy", energies(plan)[0], 19.3, 0.1);
    shows("highest energy", energies(plan)[1], 25.8, 0.1);
    // Every stage by itself: 40 Mohm 0.1 uF, and the chain of 100 kohm above and below, 200 kohm a link, between four
    // equal stages: rates (2 - 2 cos(k pi / 4)) / (200 kohm 0.1 uF) more.
    let found: Vec<f64> = plan.time_constants.iter().map(|t| t.si()).collect();
    assert_eq!(found.len(), 4);
    for (k, found) in (0i32..).zip(found) {
        let link = 2.0 - 2.0 * (std::f64::consts::FRAC_PI_4 * f64::from(k)).cos();
        equals("time constant", found, 1.0 / (0.25 + link / (200e3 * 0.1e-6)));
    }
    for stage in ["1", "2", "3", "4"] {
        let low = if stage == "1" { "E".to_string() } else { format!("B{stage}") };
        let [nominal, slowest] = waits(plan, [&format!("A{stage}"), &low]);
        shows("nominal", nominal, 21.1, 0.1);
        shows("slowest", slowest, 24.9, 0.1);
    }
    let bleeder = ["RB1 open", "RB2 open", "RB3 open", "RB4 open"].map(|fault| under(plan, fault));
    shows("one bleeder open", bleeder.into_iter().fold(0.0, f64::max), 33.3, 0.1);
    // RE1 open long before: what lies behind it is at the full voltage to earth on its lower plates.
    let point = plan.waits.iter().find(|w| w.across == ["B4", "E"]).expect("a test point");
    let open = point.faults.iter().find(|f| f.fault == "RE1 open").expect("a fault").wait.expect("it ends");
    shows("RE1 open", open.si(), 25.0, 0.1);
}

#[test]
fn absorption_lengthens_waits_and_adds_to_what_is_stored_as_the_heads_say() {
    // Words of the heads: from 204 s to some 268 s; from 186 s to some 270 s, one string of R1 or R2 open some 525 s.
    let (pulse, pump) = (&plans()["pulse-capacitor"], &plans()["pump-drive"]);
    shows("pulse capacitor", waits(pulse, ["H", "E"])[1], 268.0, 1.0);
    shows("pump drive", waits(pump, ["P", "N"])[1], 270.0, 10.0);
    for fault in ["R1 open", "R2 open"] {
        shows(fault, under(pump, fault), 525.0, 5.0);
    }
    for (name, bare) in bare_plans() {
        let whole = &plans()[name];
        for (with, without) in whole.waits.iter().zip(&bare.waits) {
            let [with, without] = [with, without].map(|w| w.slowest.expect("it ends").si());
            assert!(with >= without * (1.0 - 1e-12), "{name}: {with} s with all, {without} s bare");
        }
        for (with, without) in energies(whole).into_iter().zip(energies(bare)) {
            assert!(with >= without * (1.0 - 1e-12), "{name}: {with} J with all, {without} J bare");
        }
    }
    // The fast charger's film adds less than a second.
    let [with, without] = [plans(), bare_plans()].map(|all| waits(&all["fast-charger"], ["P", "N"])[1]);
    assert!(with - without < 1.0, "{with} s and {without} s");
}
