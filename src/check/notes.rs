//! What a reader should know of the description itself, and what the plan rests on.

use super::waits::listed;
use super::{CapacitorResult, ResistorResult, SpreadResult, Verdict, spreads};
use crate::bank::Bank;
use crate::bank::description::{Neutral, Role, Source, Switched};
use crate::circuit::Network;
use crate::discharge::{Model, PartKind, absorption};
use crate::finding::{Findings, Severity};
use crate::quantity::{Direction, Quantity, Ratio, Time, celsius, duration, exact};

/// More ohms than a cable with its clamps has, however long (common practice): what has more is no short.
const MOST_OF_A_STRAP: f64 = 10.0;

/// Findings on what the description leaves open.
pub(crate) fn notes(
    bank: &Bank,
    model: &Model,
    resistors: &[ResistorResult],
    capacitors: &[CapacitorResult],
    findings: &mut Findings,
) {
    let description = bank.description();
    if !description.charged_to.margin_given {
        findings.add(
            Severity::Caution,
            "no-voltage-margin",
            format!(
                "No margin over the nominal {} was given: highest is taken as nominal. Line swings, braking and \
                 regeneration can charge a bank higher.",
                exact(description.charged_to.nominal)
            ),
        );
    }
    let connected = description.resistors.iter().filter(|r| r.role.always_connected());
    let without: Vec<String> = description
        .capacitors
        .iter()
        .filter(|c| c.tolerance.is_none())
        .map(|c| c.id.clone())
        .chain(connected.filter(|r| r.tolerance.is_none()).map(|r| r.id.clone()))
        .collect();
    if !without.is_empty() {
        findings.add(
            Severity::Caution,
            "no-tolerance",
            format!("No tolerance was given for {}: it counts as 0 %, and waits can be longer.", listed(&without)),
        );
    }
    for strap in description.resistors.iter().filter(|r| r.role == Role::Strap && r.value.si() > MOST_OF_A_STRAP) {
        findings.add(
            Severity::Warning,
            "strap-is-no-short",
            format!(
                "{} is given {}: that is no short. A strap has milliohms (`mohm`; `Mohm` is a million of ohms).",
                strap.id,
                exact(strap.value)
            ),
        );
    }
    if description.touch_voltage >= description.charged_to.highest && description.charged_to.highest.si() > 0.0 {
        findings.add(
            Severity::Caution,
            "touch-voltage-not-below-bank",
            format!(
                "The touch voltage of {} is not below the {} that the bank is charged to at most: little or nothing is \
                 waited for. Is that what was meant?",
                exact(description.touch_voltage),
                exact(description.charged_to.highest)
            ),
        );
    }
    let leakage: Vec<String> =
        description.resistors.iter().filter(|r| r.role == Role::Leakage).map(|r| r.id.clone()).collect();
    if !leakage.is_empty() {
        findings.add(
            Severity::Warning,
            "wait-rests-on-leakage",
            format!("The waits rest on leakage ({}), which varies with temperature, age and dirt.", listed(&leakage)),
        );
    }
    let counted: Vec<String> = description.sinks.iter().filter(|s| s.counted).map(|s| s.id.clone()).collect();
    if !counted.is_empty() {
        findings.add(
            Severity::Warning,
            "wait-rests-on-sink",
            format!(
                "The waits rest on {}, a circuit that must work to draw anything: it needs its supply, its control and \
                 its parts. What follows where it does not is among the faults.",
                listed(&counted)
            ),
        );
    }
    let switched: Vec<String> =
        description.resistors.iter().filter(|r| r.switched.is_some()).map(|r| r.id.clone()).collect();
    if !switched.is_empty() {
        findings.add(
            Severity::Warning,
            "wait-rests-on-contact",
            format!(
                "The waits rest on a contact that must close at isolation, on its drive and on its wiring ({}): a contact \
                 can wear, corrode or stick, a wire can come off, and nobody sees it. What follows where it does not \
                 close is among the faults.",
                listed(&switched)
            ),
        );
    }
    unchecked(resistors, capacitors, findings);
    floating(model, findings);
}

/// Ratings that were not given can't be checked.
fn unchecked(resistors: &[ResistorResult], capacitors: &[CapacitorResult], findings: &mut Findings) {
    let open = |r: &&ResistorResult| r.checks.iter().any(|c| c.verdict == Verdict::NotChecked);
    let names: Vec<String> = capacitors
        .iter()
        .filter(|c| c.verdict == Verdict::NotChecked)
        .map(|c| c.id.clone())
        .chain(resistors.iter().filter(|r| r.role != "leakage").filter(open).map(|r| r.id.clone()))
        .collect();
    if !names.is_empty() {
        findings.add(
            Severity::Caution,
            "rating-not-given",
            format!("Ratings were not given in full for {}: what is missing was not checked.", listed(&names)),
        );
    }
}

/// Capacitors whose inner node no resistor ties down divide by capacitance in the model, by leakage in truth.
fn floating(model: &Model, findings: &mut Findings) {
    let network: Network = model.network(&Default::default(), &model.nominal_point(), &[]);
    let held = network.parts_held_by_resistors(&model.terminals);
    let names: Vec<String> = model
        .capacitors
        .iter()
        .zip(&model.own_voltages)
        .filter(|(c, _)| c.kind == PartKind::Fixed)
        .filter(|(c, own)| own.is_none() && !(held[c.a] && held[c.b]))
        .map(|(c, _)| c.id.clone())
        .collect();
    if !names.is_empty() {
        findings.add(
            Severity::Warning,
            "units-share-unequally",
            format!(
                "No resistor sets the voltage of {}: computed as divided by capacitance, in truth leakage moves it \
                 over time. Such a unit can keep its charge after the ends read zero: short every unit on its own.",
                listed(&names)
            ),
        );
    }
}

/// What every plan rests on, and what this one assumes beyond its file.
pub(crate) fn assumptions(bank: &Bank) -> Vec<String> {
    let description = bank.description();
    let mut list = vec![
        "The file describes every part that stores or drains charge, and no source is left connected after \
         isolation."
            .to_string(),
        at_isolation(description.charged_to.source).to_string(),
        "Values lie within the tolerances given; the worst of them are used, at the highest voltage.".to_string(),
    ];
    if !bank.ambient_given() {
        list.push(format!("Air at the resistors: {} °C, since the file gives none.", celsius(bank.ambient()).round()));
    }
    if !description.charged_to.margin_given {
        list.push(format!("Highest voltage: {}, the nominal one.", exact(description.charged_to.highest)));
    }
    let moved = spreads(bank);
    let ids = |of: &dyn Fn(&SpreadResult) -> bool| -> Vec<String> {
        moved.iter().filter(|s| of(s)).map(|s| s.id.clone()).collect()
    };
    let (by_temperature, by_age) =
        (ids(&|s| s.tempco.is_some()), ids(&|s| s.ageing_low.si() + s.ageing_high.si() > 0.0));
    if !by_temperature.is_empty() {
        list.push(format!(
            "Temperature ({}): marked values hold at 20 °C or 25 °C, whichever is farther off; a capacitor and a \
             resistor without thermal data are anywhere from there to the air, a resistor with thermal data up to its \
             body before isolation, a tool up to where its rating ends. The coefficient counts both ways.",
            listed(&by_temperature)
        ));
    }
    if !by_age.is_empty() {
        list.push(format!(
            "Age ({}): anywhere from new to the end that is given, on top of the tolerance.",
            listed(&by_age)
        ));
    }
    for capacitor in &description.capacitors {
        let typical = capacitor.absorption.is_none();
        if let Some((share, _)) = absorption(capacitor).filter(|_| typical) {
            list.push(format!(
                "{}: dielectric absorption of {}, the high end of what is typical of {}.",
                capacitor.id,
                exact(Ratio::from_si(share)),
                capacitor.dielectric.as_deref().unwrap_or("its dielectric")
            ));
        }
    }
    let uncounted: Vec<String> = description.sinks.iter().filter(|s| !s.counted).map(|s| s.id.clone()).collect();
    if !uncounted.is_empty() {
        list.push(format!(
            "No wait relies on {}: every figure is the worse of with and without what it draws.",
            listed(&uncounted)
        ));
    }
    if !description.sinks.is_empty() {
        list.push(
            "A sink draws from isolation on until the voltage across it first falls to where it stops, and does not \
             start again; before isolation it draws nothing."
                .to_string(),
        );
    }
    list.extend(description.resistors.iter().filter_map(|r| Some(contact(&r.id, r.switched.as_ref()?))));
    let own: Vec<String> =
        description.capacitors.iter().filter(|c| c.charged_to.is_some()).map(|c| c.id.clone()).collect();
    if !own.is_empty() {
        list.push(format!("At isolation {} at the voltage given, in every case.", stands(&own)));
    }
    list
}

/// What is taken of a bleeder's contact, in a sentence or two.
pub(crate) fn contact(id: &str, contact: &Switched) -> String {
    let delay =
        |time: Time| if time.si() > 0.0 { format!("{} after", duration(time, Direction::Up)) } else { "at".into() };
    let opens = match contact.opens_after.si() > 0.0 {
        true => format!("opens {} the bank is fed again, with the highest voltage there", delay(contact.opens_after)),
        false => "is open again before the bank is fed".into(),
    };
    let apart = |every: Time| duration(every, Direction::Down);
    let row = match contact.every {
        Some(every) if contact.discharges > 1 => {
            format!(" {} discharges in a row, {} apart, the first from cold.", contact.discharges, apart(every))
        }
        Some(every) => format!(" One discharge from cold; on average one every {}.", apart(every)),
        None => " One discharge from cold.".into(),
    };
    format!(
        "{id}: its contact is open before isolation, closes {} isolation, stays closed, and {opens}; the delays are those \
         of the slowest contact, as given. What a contact does that stays closed while the bank is fed is not \
         computed.{row}",
        delay(contact.closes_after)
    )
}

/// What the voltages at isolation rest on.
fn at_isolation(source: Source) -> &'static str {
    match source {
        Source::Direct | Source::Crest { .. } => {
            "The bank was charged long enough for its resistors to set the division of the voltage; a part without a \
             resistive path to a terminal divides by capacitance, from uncharged."
        }
        Source::ThreePhase { neutral: Neutral::Isolated, .. } => {
            "Three phases, neutral isolated: the poles open one after the other, each when its own current is zero, in \
             any order and at either polarity. Bleeders are neglected during the interruption and before it, since they \
             carry little beside the capacitors at line frequency; a series resistor is taken to carry its capacitors' \
             current without a drop. Nothing was trapped before."
        }
        Source::ThreePhase { neutral: Neutral::Grounded, .. } => {
            "Three phases, neutral grounded (the node G, where the bank has one): the poles open one after the other, \
             each when its own current is zero, in any order and at any polarity. Bleeders are neglected during the \
             interruption and before it, since they carry little beside the capacitors at line frequency; a series \
             resistor is taken to carry its capacitors' current without a drop. Nothing was trapped before."
        }
    }
}

fn stands(names: &[String]) -> String {
    format!("{} {}", listed(names), if names.len() == 1 { "stands" } else { "stand" })
}
