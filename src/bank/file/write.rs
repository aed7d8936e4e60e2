//! A bank as the text of a bank file.
//!
//! What is written reads back as the very same bank: every figure is tried in a unit that people use with as few digits
//! as bring its exact value back. Comments of the file that a bank came from are not part of it.

use crate::bank::Bank;
use crate::bank::description::{
    Bound, Capacitor, ChargedTo, Connection, Description, Draw, Hold, Lasts, Neutral, Pair, Rating, Resistor, Rule,
    Sink, Source, Step, Supply, Switched,
};
use crate::quantity::{Quantity, Ratio, Time, Tolerance, Voltage, parse};

/// The bank file that describes `bank`, key by key. Reading it gives the same bank.
///
/// # Example: there and back
/// ```
/// use ebbvolt::bank::file::{read, write};
/// let (bank, _) = read("example", ebbvolt::data::example_bank().as_bytes()).expect("it is valid");
/// let (again, _) = read("written", write(&bank).as_bytes()).expect("what is written is valid");
/// assert_eq!(again, bank);
/// ```
pub fn write(bank: &Bank) -> String {
    let d = bank.description();
    let mut lines = vec![format!("ebbvolt: {}", super::top::FORMAT), format!("tag: {}", word(&d.tag))];
    let texts = [
        ("title", &d.title),
        ("location", &d.location),
        ("prepared_by", &d.prepared_by),
        ("revision", &d.revision),
        ("notes", &d.notes),
    ];
    lines.extend(texts.into_iter().filter_map(|(key, text)| Some(format!("{key}: {}", word(text.as_ref()?)))));
    lines.push(String::new());
    lines.extend(d.ambient.map(|t| format!("ambient: {}", figure(t, &CELSIUS))));
    lines.push(format!("touch_voltage: {}", figure(d.touch_voltage, &VOLT)));
    lines.extend(d.hold_energy.map(|e| format!("hold_energy: {}", figure(e, &JOULE))));
    let strap = mapping([
        d.strap_limit.energy.map(|e| ("energy", figure(e, &JOULE))),
        d.strap_limit.current.map(|i| ("current", figure(i, &AMPERE))),
    ]);
    if strap != "{}" {
        lines.push(format!("strap_limit: {strap}"));
    }
    lines.push(format!("terminals: [{}]", words(&d.terminals)));
    lines.push(format!("charged_to: {}", charged_to(&d.charged_to)));
    list(&mut lines, "capacitors", &d.capacitors, capacitor);
    list(&mut lines, "resistors", &d.resistors, resistor);
    list(&mut lines, "sinks", &d.sinks, sink);
    list(&mut lines, "supplies", &d.supplies, supply);
    if let Some(points) = &d.test_points {
        let points: Vec<String> = points.iter().map(pair).collect();
        lines.extend([String::new(), format!("test_points: [{}]", points.join(", "))]);
    }
    limits_and_steps(&mut lines, d);
    lines.join("\n") + "\n"
}

fn limits_and_steps(lines: &mut Vec<String>, d: &Description) {
    list(lines, "limits", &d.limits, |limit| {
        let rule = match &limit.rule {
            Rule::Published(id) => vec![("use", word(id))],
            Rule::Own { any_of, within } => {
                let bounds = match any_of.as_slice() {
                    [one] => bound(one),
                    several => ("any_of", mapping(several.iter().map(|one| Some(bound(one))))),
                };
                let within = ("within", figure(*within, &SECOND));
                vec![("id", word(&limit.id)), bounds, within]
            }
        };
        let rest = [limit.at.as_ref().map(|at| ("at", pair(at))), flag("single_fault", limit.single_fault)];
        mapping(rule.into_iter().map(Some).chain(rest))
    });
    list(lines, "procedure", &d.procedure, step);
}

const VOLT: [(&str, f64); 3] = [("V", 1.0), ("kV", 1e3), ("mV", 1e-3)];
const JOULE: [(&str, f64); 3] = [("J", 1.0), ("kJ", 1e3), ("mJ", 1e-3)];
const AMPERE: [(&str, f64); 4] = [("A", 1.0), ("kA", 1e3), ("mA", 1e-3), ("uA", 1e-6)];
const WATT: [(&str, f64); 3] = [("W", 1.0), ("kW", 1e3), ("mW", 1e-3)];
const OHM: [(&str, f64); 4] = [("ohm", 1.0), ("kohm", 1e3), ("Mohm", 1e6), ("mohm", 1e-3)];
const FARAD: [(&str, f64); 4] = [("uF", 1e-6), ("nF", 1e-9), ("pF", 1e-12), ("F", 1.0)];
const COULOMB: [(&str, f64); 3] = [("C", 1.0), ("mC", 1e-3), ("uC", 1e-6)];
const SECOND: [(&str, f64); 4] = [("s", 1.0), ("min", 60.0), ("h", 3600.0), ("ms", 1e-3)];
const PERCENT: [(&str, f64); 1] = [("%", 1e-2)];
const PER_KELVIN: [(&str, f64); 2] = [("ppm/K", 1e-6), ("%/K", 1e-2)];
const CELSIUS: [(&str, f64); 1] = [("°C", 1.0)];
const HERTZ: [(&str, f64); 1] = [("Hz", 1.0)];
const VAR: [(&str, f64); 2] = [("kvar", 1e3), ("var", 1.0)];

/// The shortest text in one of these units that reads back as exactly this quantity; where none does, that of base
/// units with every digit.
fn figure<Q: Quantity>(quantity: Q, units: &[(&str, f64)]) -> String {
    shortest(quantity.si(), units, |text| parse::<Q>(text).ok().map(|reading| reading.value.si()))
}

fn shortest(si: f64, units: &[(&str, f64)], read: impl Fn(&str) -> Option<f64>) -> String {
    let offset = if units == CELSIUS { crate::quantity::CELSIUS_ZERO_K } else { 0.0 };
    let number = |decimals: usize, unit: f64| {
        let text = format!("{:.decimals$}", (si - offset) / unit);
        if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_string() } else { text }
    };
    let exact = |text: &String| read(text).is_some_and(|value| value.to_bits() == si.to_bits());
    let texts = units.iter().filter_map(|(name, unit)| {
        let text = (0..=17).map(|decimals| format!("{} {name}", number(decimals, *unit))).find(exact)?;
        // A few digits more are better than a number that nobody writes in this unit.
        let usual = (1.0..1e4).contains(&((si - offset) / unit).abs());
        Some((text.len() + if usual { 0 } else { 4 }, text))
    });
    // Fits every figure: the unit of factor one.
    let plain = units.iter().find(|(_, unit)| unit.to_bits() == 1f64.to_bits()).map_or("%", |(name, _)| name);
    texts.min_by_key(|(cost, _)| *cost).map_or_else(|| format!("{si:e} {plain}"), |(_, text)| text)
}

/// A text that is a plain word of YAML as it is, or else in double quotes (those of JSON, which YAML shares).
fn word(text: &str) -> String {
    let plain = text.starts_with(|c: char| c.is_ascii_alphabetic())
        && text.chars().all(|c| c.is_ascii_alphanumeric() || matches!(c, '.' | '-' | '_'))
        && !["null", "true", "false", "yes", "no", "on", "off"].contains(&text.to_ascii_lowercase().as_str());
    if plain { text.to_string() } else { serde_json::to_string(text).unwrap_or_default() }
}

fn words(list: &[String]) -> String {
    list.iter().map(|text| word(text)).collect::<Vec<_>>().join(", ")
}

fn pair(pair: &Pair) -> String {
    format!("[{}]", words(pair))
}

/// `{key: value, …}` of what is there.
fn mapping<'k>(entries: impl IntoIterator<Item = Option<(&'k str, String)>>) -> String {
    let entries: Vec<String> = entries.into_iter().flatten().map(|(key, value)| format!("{key}: {value}")).collect();
    format!("{{{}}}", entries.join(", "))
}

fn list<T>(lines: &mut Vec<String>, key: &str, entries: &[T], text: impl Fn(&T) -> String) {
    if !entries.is_empty() {
        lines.extend([String::new(), format!("{key}:")]);
        lines.extend(entries.iter().map(|entry| format!("  - {}", text(entry))));
    }
}

fn flag(key: &'static str, set: bool) -> Option<(&'static str, String)> {
    set.then(|| (key, "true".to_string()))
}

fn tolerance(tolerance: Option<Tolerance>) -> Option<(&'static str, String)> {
    spread("tolerance", tolerance)
}

/// How far a value can lie from the marked one, each way.
fn spread(key: &'static str, tolerance: Option<Tolerance>) -> Option<(&'static str, String)> {
    let tolerance = tolerance?;
    let (low, high) = (figure(tolerance.low(), &PERCENT), figure(tolerance.high(), &PERCENT));
    let text = if low == high { low } else { mapping([Some(("low", low)), Some(("high", high))]) };
    Some((key, text))
}

fn counts(key: &'static str, series: u32, parallel: u32) -> Option<(&'static str, String)> {
    let count = |key, n: u32| (n > 1).then(|| (key, n.to_string()));
    let text = mapping([count("series", series), count("parallel", parallel)]);
    (series > 1 || parallel > 1).then_some((key, text))
}

fn charged_to(charged: &ChargedTo) -> String {
    let highest = ("highest", figure(charged.highest, &VOLT));
    let nominal = charged.nominal.si();
    // The rise that brings the highest voltage back.
    let rise = charged.margin_given.then(|| {
        let read = |text: &str| Some(nominal * (1.0 + parse::<Ratio>(text).ok()?.value.si()));
        let share = charged.highest.si() / nominal - 1.0;
        let texts = (0..=17).map(|decimals| format!("{:.decimals$} %", (share * 100.0).max(0.0)));
        let exact = |text: &String| read(text).is_some_and(|v| v.to_bits() == charged.highest.si().to_bits());
        ("rise", texts.into_iter().find(exact).unwrap_or_else(|| figure(Ratio::from_si(share), &PERCENT)))
    });
    let rms = |rms: Voltage| ("ac_rms", figure(rms, &VOLT));
    match charged.source {
        Source::Direct if charged.margin_given => {
            mapping([Some(("nominal", figure(charged.nominal, &VOLT))), Some(highest)])
        }
        Source::Direct => figure(charged.nominal, &VOLT),
        Source::Crest { rms: volts } => mapping([Some(rms(volts)), rise]),
        Source::ThreePhase { rms: volts, neutral } => {
            let neutral = match neutral {
                Neutral::Isolated => "isolated",
                Neutral::Grounded => "grounded",
            };
            let phases = Some(("phases", "3".to_string()));
            mapping([Some(rms(volts)), rise, phases, Some(("neutral", neutral.to_string()))])
        }
    }
}

/// Where a part lies: between the three terminals, or across two nodes.
fn place(across: &Pair, phases: Option<Connection>) -> [Option<(&'static str, String)>; 2] {
    let connection = |connection| match connection {
        Connection::Delta => "delta",
        Connection::Star => "star",
        Connection::OpenDelta => "open-delta",
    };
    match phases {
        None => [Some(("across", pair(across))), None],
        Some(phases) => [Some(("phases", "3".into())), Some(("connection", connection(phases).into()))],
    }
}

/// One entry of `capacitors`, in braces.
pub(super) fn capacitor(c: &Capacitor) -> String {
    let value = match c.kvar {
        None => ("value", figure(c.value, &FARAD)),
        Some(kvar) => {
            let power = shortest(kvar.power.si(), &VAR, |text| {
                let reading = crate::quantity::parse_kind(text, crate::quantity::Kind::ReactivePower);
                reading.ok().map(|reading| reading.value)
            });
            let voltage = Some(("voltage", figure(kvar.voltage, &VOLT)));
            let frequency = Some(("frequency", figure(kvar.frequency, &HERTZ)));
            ("kvar", mapping([Some(("power", power)), voltage, frequency]))
        }
    };
    let [place, connection] = place(&c.across, c.phases);
    mapping([
        Some(("id", word(&c.id))),
        Some(value),
        tolerance(c.tolerance),
        c.tempco.map(|t| ("tempco", figure(t, &PER_KELVIN))),
        spread("ageing", c.ageing),
        place,
        connection,
        counts("units", c.series, c.parallel),
        c.rated.map(|v| ("rated", figure(v, &VOLT))),
        c.dielectric.as_ref().map(|name| ("dielectric", word(name))),
        c.absorption.map(|share| ("absorption", figure(Ratio::from_si(share), &PERCENT))),
        c.charged_to.map(|v| ("charged_to", figure(v, &VOLT))),
    ])
}

/// One entry of `resistors`, in braces.
pub(super) fn resistor(r: &Resistor) -> String {
    let [place, connection] = place(&r.across, r.phases);
    mapping([
        Some(("id", word(&r.id))),
        Some(("role", r.role.word().to_string())),
        Some(("value", figure(r.value, &OHM))),
        tolerance(r.tolerance),
        r.tempco.map(|t| ("tempco", figure(t, &PER_KELVIN))),
        spread("ageing", r.ageing),
        place,
        connection,
        counts("array", r.series, r.parallel),
        switched(r.switched),
        rating(&r.rating),
    ])
}

fn switched(contact: Option<Switched>) -> Option<(&'static str, String)> {
    let contact = contact?;
    let delay = |key, time: Time| (time.si() > 0.0).then(|| (key, figure(time, &SECOND)));
    let text = mapping([
        delay("closes_after", contact.closes_after),
        delay("opens_after", contact.opens_after),
        (contact.discharges > 1).then(|| ("discharges", contact.discharges.to_string())),
        contact.every.map(|time| ("every", figure(time, &SECOND))),
    ]);
    Some(("switched", text))
}

fn rating(rating: &Rating) -> Option<(&'static str, String)> {
    let overload = rating
        .overload
        .map(|o| mapping([Some(("times", o.times.to_string())), Some(("for", figure(o.duration, &SECOND)))]));
    let text = mapping([
        rating.power.map(|p| ("power", figure(p, &WATT))),
        rating.full_to.map(|t| ("full_to", figure(t, &CELSIUS))),
        rating.zero_at.map(|t| ("zero_at", figure(t, &CELSIUS))),
        rating.voltage.map(|v| ("voltage", figure(v, &VOLT))),
        rating.pulse.map(|e| ("pulse", figure(e, &JOULE))),
        overload.map(|text| ("overload", text)),
        rating.thermal_time.map(|t| ("thermal_time", figure(t, &SECOND))),
    ]);
    (text != "{}").then_some(("rating", text))
}

fn sink(s: &Sink) -> String {
    let (kind, value) = match s.draw {
        Draw::ConstantCurrent(current) => ("constant-current", figure(current, &AMPERE)),
        Draw::ConstantPower(power) => ("constant-power", figure(power, &WATT)),
    };
    mapping([
        Some(("id", word(&s.id))),
        Some(("kind", kind.to_string())),
        Some(("value", value)),
        Some(("across", pair(&s.across))),
        Some(("stops_below", figure(s.stops_below, &VOLT))),
        flag("counted", s.counted),
    ])
}

/// One entry of `supplies`, in braces.
pub(super) fn supply(s: &Supply) -> String {
    let [series, tolerance, array, rating] = series_resistance(s);
    mapping([
        Some(("id", word(&s.id))),
        Some(("voltage", figure(s.voltage, &VOLT))),
        given(series),
        given(tolerance),
        given(array),
        Some(("across", pair(&s.across))),
        given(rating),
    ])
}

/// The keys that describe the series resistance of a supply; `None` for one that is left out.
pub(super) fn series_resistance(s: &Supply) -> [(&'static str, Option<String>); 4] {
    let text = |pair: Option<(&'static str, String)>| pair.map(|(_, text)| text);
    [
        ("series", Some(figure(s.series, &OHM))),
        ("tolerance", text(tolerance(s.tolerance))),
        ("array", text(counts("array", s.array_series, s.array_parallel))),
        ("rating", text(rating(&s.rating))),
    ]
}

fn given((key, text): (&'static str, Option<String>)) -> Option<(&'static str, String)> {
    text.map(|text| (key, text))
}

fn bound(bound: &Bound) -> (&'static str, String) {
    match bound {
        Bound::Voltage(v) => ("voltage", figure(*v, &VOLT)),
        Bound::Charge(q) => ("charge", figure(*q, &COULOMB)),
        Bound::InitialCharge(q) => ("initial_charge", figure(*q, &COULOMB)),
        Bound::Energy(e) => ("energy", figure(*e, &JOULE)),
    }
}

fn hold(hold: &Hold) -> String {
    mapping([Some(("below", figure(hold.below, &VOLT))), hold.at.as_ref().map(|at| ("at", pair(at)))])
}

/// One entry of `procedure`, in braces.
pub(super) fn step(step: &Step) -> String {
    let lasts = match &step.lasts {
        Lasts::For(time) => ("for", figure(*time, &SECOND)),
        Lasts::Until(until) => ("until", hold(until)),
    };
    let ids = |key, list: &[String]| (!list.is_empty()).then(|| (key, format!("[{}]", words(list))));
    let measure: Vec<String> = step.measure.iter().map(pair).collect();
    mapping([
        Some(("step", word(&step.name))),
        ids("connect", &step.connect),
        ids("disconnect", &step.disconnect),
        Some(lasts),
        (!measure.is_empty()).then(|| ("measure", format!("[{}]", measure.join(", ")))),
        step.hold.as_ref().map(|h| ("hold", hold(h))),
        flag("touch", step.touch),
    ])
}

#[cfg(test)]
mod tests {
    use super::super::read;
    use super::*;

    /// Reads a text, writes the bank and reads that again.
    fn there_and_back(name: &str, text: &str) {
        let (bank, _) = read(name, text.as_bytes()).unwrap_or_else(|e| panic!("{name}: {e:?}"));
        for bank in [bank.expanded(), bank] {
            let written = write(&bank);
            let (again, _) = read("written", written.as_bytes()).unwrap_or_else(|e| panic!("{name}: {written}{e:?}"));
            assert_eq!(again, bank, "{written}");
        }
    }

    #[test]
    fn every_bank_of_the_data_folder_reads_back_as_it_was() {
        for (name, text) in crate::data::demo_banks() {
            there_and_back(name, text);
        }
        there_and_back("draft", crate::data::draft());
    }

    #[test]
    fn names_that_yaml_would_take_for_something_else_and_odd_figures_read_back() {
        there_and_back(
            "odd",
            r#"
ebbvolt: 1
tag: "7"
title: 'it is "so": #1'
notes: "two\nlines \t\u00b5"
ambient: -3.7 °C
touch_voltage: 0.1 V
hold_energy: 3.3 mJ
strap_limit: {energy: 1.1 J, current: 0.7 kA}
terminals: ["null", "1", "~x"]
charged_to: {ac_rms: 398.7 V, rise: 7.3 %, phases: 3, neutral: grounded}
capacitors:
  - {id: "true", kvar: {power: 12.5 kvar, voltage: 440 V, frequency: 60 Hz}, tolerance: {low: 5 %, high: 10.3 %}, phases: 3, connection: star}
  - {id: C.2, value: 0.1 uF, across: ["null", "1"], units: {series: 3, parallel: 2}, rated: 1.7 kV, absorption: 0.07 %, tempco: -750.3 ppm/K, ageing: {low: 20.7 %}}
resistors:
  - {id: R 1, role: bleeder, value: 4k7, tolerance: 0.3 %, tempco: 0.39 %/K, ageing: 2.3 %, phases: 3, connection: star, array: {series: 2}, rating: {power: 0.3 W, full_to: 70.1 °C, zero_at: 155 °C, voltage: 333 V, pulse: 0.7 J, overload: {times: 2.5, for: 5 s}, thermal_time: 1.1 min}}
  - {id: T1, role: tool, value: 33 ohm, across: ["1", "~x"]}
sinks:
  - {id: K1, kind: constant-power, value: 0.3 W, across: ["null", G], stops_below: 11.1 V, counted: true}
supplies:
  - {id: S1, voltage: 565.3 V, series: 0.1 kohm, tolerance: 1.7 %, array: {series: 2, parallel: 3}, across: ["null", "1"]}
test_points: [["null", G], ["1", "~x"]]
limits:
  - {use: iec-60831-1, at: ["null", "1"], single_fault: true}
  - {id: mine, any_of: {voltage: 60.1 V, initial_charge: 60.3 uC, energy: 0.7 J, charge: 1.1 mC}, within: 0.3 min}
procedure:
  - {step: "Wait: first", until: {below: 50.7 V, at: ["null", G]}, measure: [["null", G]], hold: {below: 33.3 V}}
  - {step: Apply, connect: [T1, S1], for: 1.1 min, touch: true}
  - {step: Off, disconnect: [T1], for: 0 s}
"#,
        );
    }
}
