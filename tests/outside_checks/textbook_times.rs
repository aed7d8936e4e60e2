//! Time constants, times, currents and the resistance for a time, from open textbooks.

use crate::banks::{peak_current, si, single, tau, voltages_at, wait};
use crate::rows::{Row, confirm, confirm_input, refute};
use ebbvolt::quantity::Quantity;

const COLLEGE_EXAMPLE: &str = "OpenStax, College Physics 2e, 21.6, example 21.7";
const COLLEGE: &str = "OpenStax, College Physics 2e, 21.6, problems";
const UNIVERSITY: &str = "OpenStax, University Physics 2, 10.5";
const MEXLE: &str = "MEXLE wiki, Heilbronn University, strobe exercise";

#[test]
fn a_capacitor_falls_through_its_resistor_as_in_the_worked_example() {
    let plan = single("10.0 kV", "500 V", "1.00 kohm", "8.00 uF");
    let after = voltages_at("10.0 kV", "1.00 kohm", "8.00 uF", &["24.0 ms"]);
    let source = COLLEGE_EXAMPLE;
    confirm(&[
        Row { source, figure: "time constant", stated: "8.00e-3", found: tau(&plan) },
        Row { source, figure: "10.0 kV to 500 V", stated: "24.0e-3", found: wait(&plan) },
        Row { source, figure: "after three time constants", stated: "498", found: after[0] },
    ]);
}

#[test]
fn a_resistance_follows_from_a_time_constant() {
    let with = |ohms: f64| single("12.0 kV", "600 V", &si(ohms, "ohm"), "8.00 uF");
    confirm_input(COLLEGE, "resistance for 10.0 ms with 8.00 uF", "1.25e3", 10.0e-3, |ohms| tau(&with(ohms)));
    let found = wait(&with(1250.0));
    confirm(&[Row { source: COLLEGE, figure: "12.0 kV to 600 V", stated: "30.0e-3", found }]);
}

#[test]
fn a_bleeder_brings_a_bank_to_a_quarter_of_a_percent() {
    // 0.250 % of 1 kV; the exact time is 119.83 s.
    let plan = single("1 kV", "2.5 V", "250 kohm", "80 uF");
    confirm(&[
        Row { source: COLLEGE, figure: "bleeder, time constant", stated: "20.0", found: tau(&plan) },
        Row { source: COLLEGE, figure: "bleeder, to 0.250 %", stated: "120", found: wait(&plan) },
    ]);
}

#[test]
fn a_capacitor_is_charged_and_discharged_in_two_stages() {
    // Complement: charged to 99 % is 1 % of 24 V left across the resistor of 1.2 kohm.
    let charge = single("24 V", "0.24 V", "1.2 kohm", "1000 uF");
    let discharge = single("24 V", "3.24 V", "1 kohm", "1000 uF");
    let source = "OpenStax, College Physics 2e, 21.6, two stages";
    confirm(&[
        Row {
            source,
            figure: "first current of the charge (complement)",
            stated: "20e-3",
            found: peak_current(&charge),
        },
        Row { source, figure: "charged to 99 % (complement)", stated: "5.5", found: wait(&charge) },
        Row { source, figure: "first current of the discharge", stated: "24e-3", found: peak_current(&discharge) },
        Row { source, figure: "discharged to 3.24 V", stated: "2", found: wait(&discharge) },
    ]);
}

#[test]
fn a_resistor_heats_by_the_energy_it_takes_and_not_by_the_printed_figure() {
    let plan = single("450 V", "50 V", "31.2 kohm", "160 uF");
    let source = COLLEGE;
    // 2.50 g at 1.67 kJ/(kg K). The source prints 3.87 K; 16.2 J give 3.880 K.
    let found = plan.resistors[0].energy.expect("always connected").si() / (2.50e-3 * 1.67e3);
    confirm(&[
        Row { source, figure: "heating, time constant", stated: "4.99", found: tau(&plan) },
        Row { source: "the same, worked out", figure: "heating, rise", stated: "3.880", found },
    ]);
    refute(&[Row { source, figure: "heating, rise", stated: "3.87", found }]);
}

#[test]
fn current_and_voltage_at_one_time_constant_are_those_of_the_book() {
    let plan = single("6.16 V", "1 V", "500 ohm", "1.50 uF");
    let across_resistor = voltages_at("6.16 V", "500 ohm", "1.50 uF", &["0.750 ms"])[0];
    let source = UNIVERSITY;
    confirm(&[
        Row { source, figure: "first current", stated: "12.3e-3", found: peak_current(&plan) },
        Row { source, figure: "time constant", stated: "0.750e-3", found: tau(&plan) },
        Row { source, figure: "current at one time constant", stated: "4.53e-3", found: across_resistor / 500.0 },
        Row { source, figure: "voltage then (complement)", stated: "3.89", found: 6.16 - across_resistor },
    ]);
}

#[test]
fn a_lamp_fires_when_its_capacitor_has_reached_80_volts() {
    // Complement: 80 V of 100 V is 20 V left across the resistor.
    let plan = single("100 V", "20 V", "101 ohm", "50e-3 F");
    let source = "OpenStax, University Physics 2, example 10.8";
    confirm(&[
        Row { source, figure: "time constant", stated: "5.05", found: tau(&plan) },
        Row { source, figure: "to 80 V (complement)", stated: "8.13", found: wait(&plan) },
    ]);
}

#[test]
fn a_resistance_follows_from_a_time() {
    // Complement: 10.00 V of 12.00 V is 2.00 V left across the resistor.
    let source = "OpenStax, University Physics 2, example 10.9";
    confirm_input(source, "resistance for 10.00 s with 10.00 mF (complement)", "558.11", 10.0, |ohms| {
        wait(&single("12.00 V", "2.00 V", &si(ohms, "ohm"), "10.00e-3 F"))
    });
}

#[test]
fn a_strobe_needs_this_voltage_and_this_resistor() {
    confirm_input(MEXLE, "voltage for 0.1 J in 1 uF", "447.2", 0.1, |volts| {
        single(&si(volts, "V"), "10 V", "4.47 kohm", "1 uF").stored.expect("computed").energy_nominal.si()
    });
    confirm_input(MEXLE, "resistance for 100 mA", "4.47e3", 0.1, |ohms| {
        peak_current(&single("447.2 V", "10 V", &si(ohms, "ohm"), "1 uF"))
    });
    let found = 5.0 * tau(&single("447.2 V", "10 V", "4.472 kohm", "1 uF"));
    confirm(&[Row { source: MEXLE, figure: "five time constants", stated: "22.4e-3", found }]);
}

#[test]
fn flash_and_wiper_resistors_follow_from_their_time_constants() {
    let (flash, wiper) = ("flash lamp, 0.500 uF", "capacitance for 0.100 us at 0.0400 ohm");
    for (ohms, seconds) in [("4.00e6", 2.00), ("30.0e6", 15.0)] {
        confirm_input(COLLEGE, flash, ohms, seconds, |ohms| {
            tau(&single("300 V", "50 V", &si(ohms, "ohm"), "0.500 uF"))
        });
    }
    confirm_input(UNIVERSITY, wiper, "2.50e-6", 0.100e-6, |farads| {
        tau(&single("300 V", "50 V", "0.0400 ohm", &si(farads, "F")))
    });
}
