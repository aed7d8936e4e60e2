//! Published examples that ask for a resistor: the upper end of a sizing's window.

use crate::banks::{head, read, si};
use crate::rows::{Row, confirm};
use ebbvolt::bank::description::Connection;
use ebbvolt::bank::file::read_stock;
use ebbvolt::data::generic_stock;
use ebbvolt::quantity::{Quantity, Time, Voltage};
use ebbvolt::size::{BleederAsk, Build, Target, bleeder};

/// The greatest resistance with which a bank is at a voltage in time, in ohm.
fn greatest(text: &str, volts: f64, seconds: f64, connection: Option<Connection>) -> f64 {
    let target = Target { voltage: Voltage::from_si(volts), within: Time::from_si(seconds) };
    let elements = read_stock("generic", generic_stock().as_bytes()).expect("a valid list");
    let build = Build { elements, show: 1, ..Build::default() };
    let ask = BleederAsk { target: Some(target), build, connection, ..BleederAsk::default() };
    let sizing = bleeder(&read(text), "", &ask).unwrap_or_else(|e| panic!("{text}{e}"));
    // The demand on time alone: whether elements at hand bear the load is another matter.
    sizing.demands[0].greatest.expect("time bounds it").si()
}

#[test]
fn a_resistor_is_found_for_a_time() {
    // The flash: 12.0 kV to 600 V in 30.0 ms with 8.00 uF; as stated, tau is 10.0 ms.
    let flash = format!("{}capacitors: [{{id: C1, value: 8.00 uF}}]\n", head("12.0 kV", "600 V"));
    // The wiper: charged to 10.00 V of 12.00 V in 10.00 s, which is as long as a discharge from 12.00 V to the 2.00 V
    // that are then still missing.
    let wiper = format!("{}capacitors: [{{id: C1, value: 10.00 mF}}]\n", head("12.00 V", "2 V"));
    confirm(&[
        Row {
            source: "OpenStax, College Physics 2e, 21.6, problems",
            figure: "resistance of the flash",
            stated: "1.25e3",
            found: greatest(&flash, 600.0, 30.0e-3, None),
        },
        Row {
            source: "OpenStax, University Physics 2, example 10.9",
            figure: "resistance of the wiper",
            stated: "558.11",
            found: greatest(&wiper, 2.0, 10.0, None),
        },
    ]);
}

/// A capacitor maker's note TS 03-010 on IEC 831: 50 kvar, 400 V, 50 Hz in delta. R = t / (k C ln(sqrt2 U / Ur)) with
/// k = 1 for three resistors in delta; both stated figures are cut off, not rounded. The note starts at the crest from
/// line to line. A bank with an isolated neutral can keep more on one pair (1.366 of it), so the bank here is the note's
/// own: one pair at the crest, the third terminal half way.
#[test]
fn the_resistors_of_a_three_phase_capacitor_are_found_by_the_note_s_own_start() {
    let farad = 50e3 / (3.0 * std::f64::consts::TAU * 50.0 * 400.0f64.powi(2));
    let c = si(farad, "F");
    for (stated, last_digit, volts, seconds) in [(268e3, 1e3, 75.0, 180.0), (74.5e3, 100.0, 50.0, 60.0)] {
        // Across the pair that carries the crest the delta of capacitors is 1.5 C, and so is the delta of resistors
        // R/1.5: one leg of each has the same time constant.
        let leg = format!(
            "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 50 V\ncharged_to: {{ac_rms: 400 V}}\ncapacitors: [{{id: C1, value: {c}}}]\n"
        );
        let found = greatest(&leg, volts, seconds, None);
        assert!(found >= stated && found < stated + last_digit, "{stated}: {found}");
        let by_hand = seconds / (farad * (2f64.sqrt() * 400.0 / volts).ln());
        assert!((found / by_hand - 1.0).abs() < 1e-9, "{found} {by_hand}");
    }
}

/// The bank itself, from three phases: what the poles can leave on one pair is 1.366 of the crest (derived from the
/// poles' sequence in the trade's own way; see the plan's `trapped-above-crest`), so less resistance is allowed than by
/// the note. k is 1 for delta and 3 for open delta and star.
#[test]
fn a_three_phase_bank_is_sized_from_what_its_poles_can_leave() {
    let bank = "ebbvolt: 1\ntag: SM-CHECK\ntouch_voltage: 75 V\nterminals: [A, B, C]\ncharged_to: {ac_rms: 400 V, phases: 3, \
                neutral: isolated}\ncapacitors: [{id: CB, kvar: {power: 50 kvar, voltage: 400 V, frequency: 50 Hz}, phases: \
                3, connection: delta}]\n";
    let farad = 50e3 / (3.0 * std::f64::consts::TAU * 50.0 * 400.0f64.powi(2));
    let note = 180.0 / (farad * (2f64.sqrt() * 400.0 / 75.0).ln());
    let trapped = (1.5 + 3f64.sqrt() / 2.0) / 3f64.sqrt();
    let delta = greatest(bank, 75.0, 180.0, Some(Connection::Delta));
    let expected = 180.0 / (farad * (trapped * 2f64.sqrt() * 400.0 / 75.0).ln());
    assert!((delta / expected - 1.0).abs() < 1e-8, "{delta} {expected} {note}");
    assert!(delta < note);
    // In star three resistors have to be a third each of those in delta.
    let star = greatest(bank, 75.0, 180.0, Some(Connection::Star));
    assert!((star * 3.0 / delta - 1.0).abs() < 1e-8, "{star} {delta}");
}
