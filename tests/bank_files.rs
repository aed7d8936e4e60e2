//! The bank file, key by key: what the contract says is read as it says, and every slip is found where it stands.

use ebbvolt::bank::description::{Bound, Connection, Draw, Lasts, Neutral, Role, Rule, Source};
use ebbvolt::bank::{Bank, file};
use ebbvolt::data::{demo_banks, draft};
use ebbvolt::finding::{Finding, Findings, Severity};
use ebbvolt::quantity::{Quantity, celsius};

/// The block of the contract that shows every key once, made into a bank that passes.
const EVERY_KEY: &str = "\
ebbvolt: 1                      # format version; required
tag: PU-07                      # equipment tag; required
title: Lift pump drive, DC bus
location: Saltmarsh pumping station, switchroom 2
prepared_by: shift electrician
revision: B
notes: Braking chopper is fed from the same bus.

ambient: 40 °C
touch_voltage: 50 V
hold_energy: 10 J
strap_limit: {energy: 10 J, current: 1 kA}
terminals: [P, N]
charged_to:
  nominal: 565 V
  highest: 750 V

capacitors:
  - id: C1
    value: 3300 uF
    tolerance: 20 %
    across: [P, M]
    units: {series: 2, parallel: 4}
    rated: 450 V
    dielectric: aluminium-electrolytic
    absorption: 10 %
    charged_to: 400 V
  - {id: C2, value: 3300 uF, tolerance: {low: 10 %, high: 30 %}, across: [X, N]}
  - {id: CK, kvar: {power: 50 kvar, voltage: 400 V, frequency: 50 Hz}}
resistors:
  - id: R1
    role: bleeder
    value: 22 kohm
    tolerance: 5 %
    across: [P, N]
    array: {series: 2, parallel: 3}
    rating:
      power: 25 W
      full_to: 70 °C
      zero_at: 155 °C
      voltage: 750 V
      pulse: 400 J
      overload: {times: 5, for: 5 s}
      thermal_time: 90 s
  - {id: R2, role: balancing, value: 33k, across: [P, M]}
  - {id: R3, role: leakage, value: 10 Mohm, across: [M, N]}
  - {id: R4, role: series, value: 100R, across: [M, X]}
  - {id: R5, role: bleeder, value: 4k7, across: [X, N]}
  - {id: T1, role: tool, value: 1 kohm, across: [P, N]}
  - {id: ST1, role: strap, value: 10 mohm, across: [P, N]}
  - {id: M1, role: meter, value: 10 Mohm, across: [P, N]}
sinks:
  - id: K1
    kind: constant-current
    value: 40 mA
    across: [P, N]
    stops_below: 30 V
    counted: false
  - {id: K2, kind: constant-power, value: 25 W, across: [P, N], stops_below: 60 V, counted: true}
supplies:
  - {id: S1, voltage: 565 V, series: 100 ohm, tolerance: 5 %, across: [P, N], rating: {power: 25 W}}

test_points: [[P, N], [P, M]]
limits:
  - use: iec-60204-1
  - {id: site-rule, voltage: 50 V, within: 5 min, single_fault: true}
  - {id: charge-exempt, any_of: {voltage: 60 V, initial_charge: 60 uC, charge: 50 uC, energy: 0.5 J}, within: 5 s, at: [P, N]}
procedure:
  - {step: Lock out and isolate, for: 0 s}
  - {step: Wait for the bleeders, for: 5 min, measure: [[P, N]]}
  - {step: Wait on, until: {below: 50 V, at: [P, N]}}
  - {step: Apply the discharge tool, connect: [T1], for: 20 s, hold: {below: 10 V, at: [P, N]}}
  - {step: Short the bus and leave the strap on, connect: [ST1], disconnect: [T1], for: 60 s}
  - {step: Work begins, touch: true, for: 0 s}
";

const THREE_PHASE: &str = "\
ebbvolt: 1
tag: PF-03
touch_voltage: 50 V
terminals: [A, B, C]
charged_to: {ac_rms: 400 V, rise: 10 %, phases: 3, neutral: isolated}
capacitors:
  - {id: CB, kvar: {power: 50 kvar, voltage: 400 V, frequency: 50 Hz}, phases: 3, connection: delta}
  - {id: CS, kvar: {power: 50 kvar, voltage: 400 V, frequency: 50 Hz}, phases: 3, connection: star}
resistors:
  - {id: RD, role: bleeder, value: 268 kohm, phases: 3, connection: delta}
  - {id: RO, role: bleeder, value: 268 kohm, phases: 3, connection: open-delta}
";

#[track_caller]
fn bank(text: &str) -> (Bank, Findings) {
    file::read("bank.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{e:#?}"))
}

fn errors(text: &str) -> Vec<Finding> {
    match file::read("bank.yaml", text.as_bytes()) {
        Ok(_) => panic!("this passes:\n{text}"),
        Err(findings) => findings.into_iter().collect(),
    }
}

fn place(finding: &Finding) -> (usize, usize, usize) {
    finding.place.as_ref().map(|p| (p.line, p.column, p.length)).expect("an error of a file has a place")
}

/// What the error points at.
fn pointed(finding: &Finding) -> String {
    let place = finding.place.as_ref().expect("an error of a file has a place");
    place.source.chars().skip(place.column - place.source_column).take(place.length).collect()
}

/// [`EVERY_KEY`] with one change that breaks it.
fn broken(from: &str, to: &str) -> Vec<Finding> {
    assert_eq!(EVERY_KEY.matches(from).count(), 1, "`{from}` has to stand once");
    errors(&EVERY_KEY.replace(from, to))
}

/// Asserts that a change makes one error of a code, which points at a piece of the file and says something.
#[track_caller]
fn assert_broken(from: &str, to: &str, code: &str, points_at: &str, says: &str) {
    let found = broken(from, to);
    let [error] = found.as_slice() else { panic!("{from} -> {to}: {found:#?}") };
    let said = format!("{}; {}", error.text, error.help.as_deref().unwrap_or(""));
    assert_eq!((error.code, pointed(error).as_str()), (code, points_at), "{from} -> {to}: {said}");
    assert!(said.contains(says), "{from} -> {to}: {said}");
}

/// Whether two figures agree but for rounding.
fn near(a: f64, b: f64) -> bool {
    (a - b).abs() <= 1e-12 * b.abs()
}

#[test]
fn every_key_of_the_contract_is_read() {
    let (bank, notes) = bank(EVERY_KEY);
    assert_eq!(notes, Findings::new());
    let d = bank.description();
    assert_eq!((d.tag.as_str(), d.title.as_deref()), ("PU-07", Some("Lift pump drive, DC bus")));
    assert_eq!(d.location.as_deref(), Some("Saltmarsh pumping station, switchroom 2"));
    assert_eq!((d.prepared_by.as_deref(), d.revision.as_deref()), (Some("shift electrician"), Some("B")));
    assert_eq!(d.notes.as_deref(), Some("Braking chopper is fed from the same bus."));
    assert!(near(celsius(bank.ambient()), 40.0) && bank.ambient_given());
    assert!(near(d.touch_voltage.si(), 50.0));
    assert_eq!(d.hold_energy.map(Quantity::si), Some(10.0));
    assert_eq!(
        (d.strap_limit.energy.map(Quantity::si), d.strap_limit.current.map(Quantity::si)),
        (Some(10.0), Some(1000.0))
    );
    assert_eq!((d.terminals.as_slice(), bank.reference()), (["P".to_string(), "N".to_string()].as_slice(), "N"));
    assert!(
        near(d.charged_to.nominal.si(), 565.0) && near(d.charged_to.highest.si(), 750.0) && d.charged_to.margin_given
    );

    let [c1, c2, ck] = d.capacitors.as_slice() else { panic!() };
    assert!(near(c1.value.si(), 3300e-6) && (c1.series, c1.parallel) == (2, 4));
    assert_eq!(
        (c1.across.as_slice(), c1.dielectric.as_deref()),
        (["P".to_string(), "M".into()].as_slice(), Some("aluminium-electrolytic"))
    );
    assert_eq!(
        (c1.absorption, c1.rated.map(Quantity::si), c1.charged_to.map(Quantity::si)),
        (Some(0.1), Some(450.0), Some(400.0))
    );
    assert_eq!(c2.tolerance.map(|t| (t.lowest_factor(), t.highest_factor())), Some((0.9, 1.3)));
    assert!((c2.series, c2.parallel) == (1, 1) && c2.charged_to.is_none());
    assert_eq!((ck.across.as_slice(), ck.tolerance), (["P".to_string(), "N".into()].as_slice(), None));
    assert!(near(ck.value.si(), 50e3 / (2.0 * std::f64::consts::PI * 50.0 * 400.0 * 400.0)) && ck.kvar.is_some());

    let r1 = &d.resistors[0];
    assert!(near(r1.value.si(), 22e3) && (r1.series, r1.parallel) == (2, 3) && r1.role == Role::Bleeder);
    let rating = r1.rating;
    assert_eq!(
        (rating.power.map(Quantity::si), rating.voltage.map(Quantity::si), rating.pulse.map(Quantity::si)),
        (Some(25.0), Some(750.0), Some(400.0))
    );
    assert!(
        rating.full_to.is_some_and(|t| near(celsius(t), 70.0))
            && rating.zero_at.is_some_and(|t| near(celsius(t), 155.0))
    );
    assert_eq!(rating.overload.map(|o| (o.times, o.duration.si())), Some((5.0, 5.0)));
    assert_eq!(rating.thermal_time.map(Quantity::si), Some(90.0));
    let roles: Vec<_> = d.resistors.iter().map(|r| r.role).collect();
    assert!(Role::ALL.iter().all(|role| roles.contains(role)), "{roles:?}");

    assert!(matches!(d.sinks[0].draw, Draw::ConstantCurrent(i) if near(i.si(), 0.04)) && !d.sinks[0].counted);
    assert!(matches!(d.sinks[1].draw, Draw::ConstantPower(p) if near(p.si(), 25.0)) && d.sinks[1].counted);
    assert!(near(d.supplies[0].series.si(), 100.0) && d.supplies[0].rating.power.is_some());
    assert_eq!(bank.test_points(), [["P", "N"], ["P", "M"]].map(|pair| pair.map(String::from)));

    assert_eq!(d.limits[0].rule, Rule::Published("iec-60204-1".into()));
    assert!(d.limits[1].single_fault && d.limits[1].at.is_none());
    let Rule::Own { any_of, within } = &d.limits[2].rule else { panic!() };
    assert!(near(within.si(), 5.0) && d.limits[2].at.is_some());
    assert!(matches!(
        any_of.as_slice(),
        [Bound::Voltage(_), Bound::Charge(_), Bound::InitialCharge(_), Bound::Energy(_)]
    ));

    assert_eq!(d.procedure.len(), 6);
    assert!(matches!(d.procedure[1].lasts, Lasts::For(t) if near(t.si(), 300.0)) && d.procedure[1].measure.len() == 1);
    assert!(matches!(&d.procedure[2].lasts, Lasts::Until(u) if near(u.below.si(), 50.0) && u.at.is_some()));
    assert!(d.procedure[3].hold.is_some() && d.procedure[3].connect == ["T1"]);
    assert!(d.procedure[4].disconnect == ["T1"] && !d.procedure[4].touch && d.procedure[5].touch);
}

#[test]
fn what_is_left_out_has_the_default_of_the_contract() {
    let (bank, _) =
        bank("ebbvolt: 1\ntag: X\ntouch_voltage: 50 V\ncharged_to: 565 V\ncapacitors: [{id: C1, value: 1 uF}]\n");
    let d = bank.description();
    assert!(near(celsius(bank.ambient()), 40.0) && !bank.ambient_given());
    assert_eq!(d.terminals, ["P", "N"]);
    assert_eq!(d.capacitors[0].across, ["P", "N"]);
    assert!(
        near(d.charged_to.highest.si(), 565.0) && !d.charged_to.margin_given && d.charged_to.source == Source::Direct
    );
    assert_eq!(bank.test_points(), [["P", "N"].map(String::from)]);
    assert!(d.resistors.is_empty() && d.limits.is_empty() && d.procedure.is_empty());
}

#[test]
fn a_limit_on_the_charge_at_isolation_needs_no_time() {
    let text = EVERY_KEY.replace("voltage: 50 V, within: 5 min", "initial_charge: 60 uC");
    let (bank, _) = bank(&text);
    assert!(matches!(&bank.description().limits[1].rule, Rule::Own { within, .. } if near(within.si(), 0.0)));
}

#[test]
fn the_crest_of_an_alternating_voltage_is_root_two_times_its_rms_value() {
    let with = |form: &str| {
        bank(&EVERY_KEY.replace("charged_to:\n  nominal: 565 V\n  highest: 750 V\n", &format!("charged_to: {form}\n")))
            .0
    };
    let d = with("{ac_rms: 400 V, rise: 10 %}").description().charged_to;
    assert!(near(d.nominal.si(), 400.0 * 2f64.sqrt()) && near(d.highest.si(), 440.0 * 2f64.sqrt()) && d.margin_given);
    assert!(matches!(d.source, Source::Crest { rms } if near(rms.si(), 400.0)));
    let d = with("{ac_rms: 400 V}").description().charged_to;
    assert!(near(d.highest.si(), d.nominal.si()) && !d.margin_given);
}

#[test]
fn three_phase_parts_are_read_by_leg() {
    let (bank, _) = bank(THREE_PHASE);
    let d = bank.description();
    assert!(bank.is_three_phase() && bank.reference() == "C");
    assert!(matches!(d.charged_to.source, Source::ThreePhase { neutral: Neutral::Isolated, .. }));
    let whole = 50e3 / (2.0 * std::f64::consts::PI * 50.0 * 400.0 * 400.0);
    assert!(near(d.capacitors[0].value.si(), whole / 3.0) && near(d.capacitors[1].value.si(), whole));
    assert_eq!(d.resistors[1].phases, Some(Connection::OpenDelta));
    let legs = |id: &str| bank.legs(id).into_iter().map(|(id, [a, b])| format!("{id} {a} {b}")).collect::<Vec<_>>();
    assert_eq!(legs("CB"), ["CB.AB A B", "CB.BC B C", "CB.CA C A"]);
    assert_eq!(legs("CS"), ["CS.A A CS.star", "CS.B B CS.star", "CS.C C CS.star"]);
    assert_eq!(legs("RO"), ["RO.AB A B", "RO.BC B C"]);
    assert_eq!(legs("nobody").len(), 0);
    let pairs: Vec<_> = bank.test_points().into_iter().map(|[a, b]| a + &b).collect();
    assert_eq!(pairs, ["AB", "AC", "BC", "ACS.star", "BCS.star", "CCS.star"]);
    let grounded = self::bank(&THREE_PHASE.replace("isolated", "grounded")).0;
    assert_eq!(grounded.legs("CS")[0].1, ["A", "G"]);
}

#[test]
fn plain_numbers_and_words_of_yaml_stay_the_text_that_was_typed() {
    let text = EVERY_KEY
        .replace("tag: PU-07 ", "tag: 0012 ")
        .replace("revision: B", "revision: 1e3")
        .replace("R4, role", "NO, role");
    let (bank, _) = bank(&text.replace("M]", "0]").replace("[M,", "[0,"));
    let d = bank.description();
    assert_eq!((d.tag.as_str(), d.revision.as_deref()), ("0012", Some("1e3")));
    assert!(d.resistors.iter().any(|r| r.id == "NO"));
    assert_eq!(d.capacitors[0].across, ["P", "0"]);
}

#[test]
fn a_file_may_be_json_and_may_have_anchors() {
    let json = r#"{"ebbvolt": 1, "tag": "X", "touch_voltage": "50 V", "charged_to": "565 V",
        "capacitors": [{"id": "C1", "value": "1 uF"}]}"#;
    bank(json);
    let text = "ebbvolt: 1\ntag: X\ntouch_voltage: 50 V\ncharged_to: 565 V\ncapacitors: [{id: C1, value: 1 uF, tolerance: &t 20 %}]\n\
                resistors: [{id: R1, role: bleeder, value: 1k, tolerance: *t, across: [P, N]}]\n";
    assert!(bank(text).0.description().resistors[0].tolerance.is_some_and(|t| near(t.highest_factor(), 1.2)));
}

#[test]
fn millifarad_is_read_and_noted_with_its_place() {
    let (bank, notes) = bank(&EVERY_KEY.replace("    value: 3300 uF\n", "    value: 3.3 mF\n"));
    assert!(near(bank.description().capacitors[0].value.si(), 3300e-6));
    let [note] = notes.as_slice() else { panic!("{notes:?}") };
    assert_eq!((note.severity, note.code, pointed(note).as_str()), (Severity::Caution, "millifarad-read", "3.3 mF"));
    assert!(note.text.contains("3300 uF"), "{}", note.text);
}

#[test]
fn the_banks_of_the_data_folder_and_the_draft_pass() {
    for (name, text) in demo_banks() {
        assert!(file::read(name, text.as_bytes()).is_ok(), "{name}: {:#?}", file::read(name, text.as_bytes()));
    }
    bank(draft());
}

#[test]
fn the_draft_passes_with_every_optional_line_taken_in() {
    let lines = draft().lines().map(|line| {
        let body = line.trim_start();
        let indent = &line[..line.len() - body.len()];
        body.strip_prefix("# ").map_or(line.to_string(), |rest| format!("{indent}{rest}"))
    });
    let text = lines.collect::<Vec<_>>().join("\n");
    let (bank, _) = bank(&text);
    assert!(!bank.description().procedure.is_empty() && !bank.description().sinks.is_empty());
}

#[test]
fn a_quantity_that_is_none_is_found_where_it_stands() {
    assert_broken("touch_voltage: 50 V", "touch_voltage: 50", "bad-quantity", "50", "no unit");
    assert_broken("    value: 3300 uF\n", "    value: 3300 V\n", "bad-quantity", "3300 V", "capacitance is due");
    assert_broken(
        "    value: 3300 uF\n",
        "    value: 3300 MF\n",
        "bad-quantity",
        "3300 MF",
        "`3300 uF` for microfarad or `3300 mF`",
    );
    assert_broken("    value: 3300 uF\n", "    value: 3,3 mF\n", "bad-quantity", "3,3 mF", "decimal point");
    assert_broken("value: 22 kohm", "value: 0 ohm", "bad-quantity", "0 ohm", "zero");
    assert_broken("value: 22 kohm", "value: -22 kohm", "bad-quantity", "-22 kohm", "negative");
    assert_broken("value: 22 kohm", "value: [22 kohm]", "wrong-shape", "[", "`4.7 kohm`");
    assert_broken("ambient: 40 °C", "ambient: 40 V", "bad-quantity", "40 V", "temperature is due");
    assert_broken("{low: 10 %, high: 30 %}", "{low: 100 %, high: 30 %}", "bad-quantity", "{", "under 100 %");
    assert_broken("{low: 10 %, high: 30 %}", "{low: 10 %}", "missing-key", "{", "`high`");
    assert_broken("power: 50 kvar", "power: 50 kW", "bad-quantity", "50 kW", "reactive power");
    assert_broken("value: 40 mA", "value: 40 W", "bad-quantity", "40 W", "a current is due");
}

#[test]
fn a_misspelt_key_is_found_and_the_near_one_named() {
    assert_broken(
        "tolerance: 5 %\n    across: [P, N]\n    array",
        "tolerence: 5 %\n    across: [P, N]\n    array",
        "unknown-key",
        "tolerence",
        "`tolerance`",
    );
    assert_broken("title: Lift", "titel: Lift", "unknown-key", "titel", "`title`");
    assert_broken("thermal_time", "thermal-time", "unknown-key", "thermal-time", "`thermal_time`");
    assert_broken("revision: B", "colour: red", "unknown-key", "colour", "prepared_by");
    assert_broken("single_fault: true", "singel_fault: true", "unknown-key", "singel_fault", "`single_fault`");
}

#[test]
fn a_misspelt_word_or_id_is_found_and_the_near_one_named() {
    assert_broken("role: bleeder\n", "role: bleader\n", "bad-word", "bleader", "`bleeder`");
    assert_broken(
        "kind: constant-current",
        "kind: constant_current",
        "bad-word",
        "constant_current",
        "`constant-current`",
    );
    assert_broken(
        "aluminium-electrolytic",
        "aluminum-electrolytic",
        "unknown-dielectric",
        "aluminum-electrolytic",
        "`aluminium-electrolytic`",
    );
    assert_broken("use: iec-60204-1", "use: iec-60204-l", "unknown-limit", "iec-60204-l", "`iec-60204-1`");
    assert_broken("connect: [ST1]", "connect: [ST11]", "unknown-part", "ST11", "`ST1`");
    assert_broken("test_points: [[P, N], [P, M]]", "test_points: [[P, N], [P, m]]", "unknown-node", "m", "`M`");
    assert_broken("counted: false", "counted: no", "bad-word", "no", "`true` or `false`");
    assert_broken("touch: true", "touch: 'true'", "bad-word", "'true'", "without quotes");
}

#[test]
fn a_key_that_has_to_be_there_is_missed() {
    assert_broken("ebbvolt: 1 ", "# ", "missing-key", "tag", "`ebbvolt`");
    assert_broken("touch_voltage: 50 V\n", "", "missing-key", "ebbvolt", "`touch_voltage`");
    assert_broken("tag: PU-07 ", "# ", "missing-key", "ebbvolt", "`tag`");
    assert_broken("    value: 22 kohm\n", "", "missing-key", "id", "resistor `R1` has no `value`");
    assert_broken("    role: bleeder\n", "", "missing-key", "id", "`role`");
    assert_broken("  - {id: R3, ", "  - {", "missing-key", "{", "`id`");
    assert_broken("frequency: 50 Hz", "frequency: ", "no-value", "frequency", "no value");
    assert_broken("revision: B", "revision: ~", "no-value", "revision", "no value");
    assert_broken("revision: B", "revision: null", "no-value", "revision", "no value");
    assert_broken("  highest: 750 V\n", "", "missing-key", "nominal", "`highest`");
    assert_broken(", for: 0 s}\n  - {step: Wait for", "}\n  - {step: Wait for", "missing-key", "{", "how long");
    assert_broken("voltage: 50 V, within", "within", "limit-without-bound", "{", "no bound");
    assert_broken("50 V, within: 5 min,", "50 V,", "missing-key", "{", "`within`");
}

#[test]
fn keys_that_exclude_each_other_are_refused() {
    assert_broken("{id: CK, kvar", "{id: CK, value: 1 uF, kvar", "keys-exclude-each-other", "kvar", "both");
    assert_broken(
        "for: 5 min, measure",
        "for: 5 min, until: {below: 5 V}, measure",
        "keys-exclude-each-other",
        "until",
        "both",
    );
    assert_broken(
        "- use: iec-60204-1",
        "- {use: iec-60204-1, within: 5 s}",
        "keys-exclude-each-other",
        "within",
        "its own",
    );
    assert_broken(
        "voltage: 50 V, within",
        "voltage: 50 V, energy: 1 J, within",
        "keys-exclude-each-other",
        "energy",
        "any_of",
    );
    assert_broken("  highest: 750 V", "  ac_rms: 400 V", "keys-exclude-each-other", "ac_rms", "two different forms");
    assert_broken("across: [M, X]", "across: [M, X], connection: star", "missing-key", "connection", "phases: 3");
}

#[test]
fn another_shape_than_the_one_that_is_due_is_refused() {
    assert_broken(" connect: [T1]", " connect: T1", "wrong-shape", "T1", "`[T1]`");
    assert_broken("measure: [[P, N]]", "measure: [P, N]", "wrong-shape", "[", "`[[P, N]]`");
    assert_broken("series: 2, parallel: 4", "series: 2.5, parallel: 4", "bad-number", "2.5", "whole number");
    assert_broken("series: 2, parallel: 4", "series: 0, parallel: 4", "count-out-of-range", "0", "1 to 1000");
    assert_broken("series: 2, parallel: 4", "series: 2, parallel: 4 uF", "bad-number", "4 uF", "whole number");
    assert_broken("times: 5", "times: five", "bad-number", "five", "number");
    assert_broken("ebbvolt: 1 ", "ebbvolt: 2 ", "format-version", "2", "format 1");
    assert_broken(
        "strap_limit: {energy: 10 J, current: 1 kA}",
        "strap_limit: 10 J",
        "wrong-shape",
        "10 J",
        "energy, current",
    );
    assert_broken("terminals: [P, N]", "terminals: [P, N, M]", "terminal-count", "terminals", "3 terminals");
    assert_broken("    across: [P, M]\n", "    across: [P, M, N]\n", "wrong-shape", "[", "there are 3");
}

#[test]
fn what_contradicts_itself_is_found_by_its_line() {
    assert_broken("id: C2", "id: C1", "duplicate-id", "C1", "(line 19)");
    assert_broken("revision: B", "tag: B", "duplicate-key", "tag", "line 2");
    assert_broken("zero_at: 155 °C", "zero_at: 55 °C", "derating-order", "55 °C", "above `full_to`");
    assert_broken("  highest: 750 V", "  highest: 500 V", "highest-below-nominal", "500 V", "nominal");
    assert_broken(
        "across: [X, N]}\n  - {id: CK",
        "across: [X, X]}\n  - {id: CK",
        "part-across-one-node",
        "across",
        "both ends",
    );
    assert_broken("across: [M, X]", "across: [M, Q]", "dangling-node", "Q", "nothing but resistor `R4`");
    assert_broken(
        "{id: T1, role: tool, value: 1 kohm, across: [P, N]}",
        "{id: T1, role: tool, value: 1 kohm, across: [P, NN]}",
        "unknown-node",
        "NN",
        "`N`",
    );
    assert_broken("within: 5 s, at: [P, N]", "within: 5 s, at: [P, P]", "pair-of-one-node", "at", "two different");
    assert_broken(
        "connect: [ST1], disconnect: [T1]",
        "connect: [ST1], disconnect: [M1]",
        "not-connected",
        "M1",
        "connected then: T1",
    );
    assert_broken(
        "connect: [ST1], disconnect: [T1]",
        "connect: [R1], disconnect: [T1]",
        "always-connected",
        "R1",
        "tool, strap or meter",
    );
    assert_broken(
        "{id: CK, kvar",
        "{id: CK, charged_to: 400 V, kvar: {power: 1 kvar, voltage: 400 V, frequency: 50 Hz}}\n  - {id: CL, kvar",
        "capacitor-loop",
        "400 V",
        "CK, CL",
    );
    assert_broken("touch_voltage: 50 V", "touch_voltage: 0 V", "not-above-zero", "0 V", "above zero");
    assert_broken("id: site-rule", "id: iec-60204-1", "limit-id-of-published", "iec-60204-1", "`use: iec-60204-1`");
    assert_broken("step: Work begins", "step: ' '", "bad-name", "' '", "empty");
}

#[test]
fn three_phases_and_one_voltage_are_not_mixed() {
    let one = |text: &str, code: &str, at: &str| {
        let found = errors(text);
        assert!(found.iter().any(|e| e.code == code && pointed(e) == at), "{found:#?}");
    };
    one(
        &THREE_PHASE
            .replace("charged_to: {ac_rms: 400 V, rise: 10 %, phases: 3, neutral: isolated}", "charged_to: 565 V"),
        "terminal-count",
        "terminals",
    );
    one(&THREE_PHASE.replace("terminals: [A, B, C]\n", ""), "terminal-count", "ebbvolt");
    one(&THREE_PHASE.replace(", neutral: isolated", ""), "missing-key", "{");
    one(&THREE_PHASE.replace("isolated", "earthed"), "bad-word", "earthed");
    one(&THREE_PHASE.replace(", phases: 3, neutral", ", neutral"), "missing-key", "neutral");
    one(
        &THREE_PHASE
            .replace(" phases: 3, connection: delta}\nresistors", " phases: 2, connection: delta}\nresistors")
            .replace("CS, kvar", "CS, across: [A, B], kvar"),
        "keys-exclude-each-other",
        "across",
    );
    one(&THREE_PHASE.replacen("phases: 3, connection: delta", "phases: 3", 1), "missing-key", "{");
    one(&THREE_PHASE.replacen("phases: 3, connection: delta", "phases: 2, connection: delta", 1), "bad-number", "2");
    one(
        &THREE_PHASE.replacen("phases: 3, connection: delta", "phases: 3, connection: open-delta", 1),
        "open-delta-capacitor",
        "open-delta",
    );
    one(&EVERY_KEY.replace("across: [M, X]", "phases: 3, connection: delta"), "phases-without-supply", "3");
}

#[test]
fn all_slips_of_a_file_are_reported_together_in_the_order_of_its_lines() {
    let text = EVERY_KEY
        .replace("touch_voltage: 50 V", "touch_voltage: 50")
        .replace("    tolerance: 20 %\n", "    tolerence: 20 %\n")
        .replace("role: balancing", "role: ballast")
        .replace("[P, M]]", "[P, Q]]")
        .replace("use: iec-60204-1", "use: iec-1")
        .replace("connect: [ST1]", "connect: [ST2]")
        .replace("touch: true", "touch: yes");
    let found = errors(&text);
    let codes: Vec<_> = found.iter().map(|e| e.code).collect();
    let due = ["bad-quantity", "unknown-key", "bad-word", "unknown-node", "unknown-limit", "unknown-part", "bad-word"];
    assert_eq!(codes, due, "{found:#?}");
    assert!(found.is_sorted_by_key(place));
    assert!(found.iter().all(|e| e.help.is_some() && e.severity == Severity::Error));
}

#[test]
fn an_error_is_not_echoed_by_what_depends_on_it() {
    // The parts of an entry that can't be read are not missed elsewhere in the file.
    assert_broken("id: T1", "id: [T1]", "wrong-shape", "[", "text");
    assert_broken("across: [M, X]", "across: M", "wrong-shape", "M", "list");
    assert_broken("{id: T1, role: tool", "{id: T1, role: tol", "bad-word", "tol", "`tool`");
    assert_broken("terminals: [P, N]", "terminals: P", "wrong-shape", "P", "list");
    assert_broken("  nominal: 565 V", "  nominal: 565", "bad-quantity", "565", "voltage");
    assert_broken(" connect: [T1]", " connect: [[T1]]", "wrong-shape", "[", "text");
    assert_broken(
        "  - {id: ST1, role: strap, value: 10 mohm, across: [P, N]}",
        "  - ST1",
        "wrong-shape",
        "ST1",
        "group of keys",
    );
    let no_capacitors = broken("capacitors:\n", "condensers:\n");
    let codes: Vec<_> = no_capacitors.iter().map(|e| e.code).collect();
    assert_eq!(codes, ["missing-key", "unknown-key"]);
}

#[test]
fn text_cut_by_a_comma_in_braces_is_explained() {
    let found = broken("{step: Wait on, until", "{step: Wait, then go on, until");
    assert!(found[0].help.as_deref().is_some_and(|help| help.contains("quotes")), "{found:#?}");
    assert_eq!((found[0].code, pointed(&found[0]).as_str()), ("unknown-key", "then go on"));
}

#[test]
fn a_file_in_another_alphabet_is_placed_by_characters() {
    let found = errors(
        "ebbvolt: 1\ntag: \u{fc}\u{df}\u{3a9}\ntitle: \u{3a9}\u{3a9}\ncapacitors: [{id: \u{3a9}, value: 3 V}]\ntouch_voltage: 5 V\ncharged_to: 1 V\n",
    );
    assert_eq!(place(&found[0]), (4, 29, 3));
}

#[test]
fn an_own_voltage_that_contradicts_the_operating_point_beside_it_is_an_error_at_its_place() {
    // R1 and R2 set the middle to half of 600 V; a second capacitor in parallel says 100 V.
    let text = "ebbvolt: 1\ntag: LOOP\ntouch_voltage: 50 V\ncharged_to: 600 V\ncapacitors:\n  \
                - {id: C1, value: 10 uF, across: [P, M]}\n  - {id: C2, value: 10 uF, across: [M, N]}\n  \
                - {id: C3, value: 1 uF, across: [M, N], charged_to: 100 V}\nresistors:\n  \
                - {id: R1, role: balancing, value: 10 kohm, across: [P, M]}\n  \
                - {id: R2, role: balancing, value: 10 kohm, across: [M, N]}\n";
    let findings = ebbvolt::bank::file::read("loop.yaml", text.as_bytes()).expect_err("a contradiction");
    let found = findings.as_slice();
    assert_eq!(found.len(), 1, "{found:?}");
    assert_eq!(found[0].code, "capacitor-loop");
    assert_eq!(found[0].place.as_ref().map(|place| place.line), Some(8));
    assert!(found[0].text.contains("C2") && found[0].text.contains("C3") && found[0].text.contains("200"), "{found:?}");
    // The voltage that the resistors set is no contradiction.
    let agreeing = text.replace("charged_to: 100 V}", "charged_to: 300 V}");
    assert!(ebbvolt::bank::file::read("loop.yaml", agreeing.as_bytes()).is_ok());
}
