//! `charged_to`: the voltage across the terminals at isolation, in one of its four forms.

use super::reader::{Group, Reader, Spot};
use super::top::optional;
use crate::bank::description::{ChargedTo, Neutral, Source};
use crate::quantity::{Quantity, Ratio, Voltage};

const DIRECT: [&str; 2] = ["nominal", "highest"];
const CREST: [&str; 4] = ["ac_rms", "rise", "phases", "neutral"];
const FORMS: &str = "the forms are `565 V`, `{nominal: 565 V, highest: 750 V}`, `{ac_rms: 400 V, rise: 10 %}` and \
                     `{ac_rms: 400 V, rise: 10 %, phases: 3, neutral: isolated}`";

/// Reads `charged_to`; where that fails, gives a made-up voltage and the doubt to go with it.
pub(super) fn read(reader: &mut Reader<'_>, top: &Group<'_>) -> ChargedTo {
    let read = reader.need(top, "charged_to", "{nominal: 565 V, highest: 750 V}").and_then(|spot| form(reader, &spot));
    read.unwrap_or_else(|| {
        reader.doubt.voltages = true;
        reader.doubt.phases = true;
        let volt = Voltage::from_si(1.0);
        ChargedTo { nominal: volt, highest: volt, margin_given: true, source: Source::Direct }
    })
}

fn form(reader: &mut Reader<'_>, spot: &Spot<'_>) -> Option<ChargedTo> {
    if !spot.is_mapping() {
        let nominal = reader.quantity(spot)?;
        return Some(ChargedTo { nominal, highest: nominal, margin_given: false, source: Source::Direct });
    }
    let keys: Vec<&'static str> = DIRECT.into_iter().chain(CREST).collect();
    let group = reader.group(spot, "`charged_to`".into(), &keys)?;
    let (direct, crest) = (group.given(&DIRECT), group.given(&CREST));
    match (direct.first(), crest.first()) {
        (Some(a), Some(b)) => {
            let text = format!("`{a}` and `{b}` are of two different forms of `charged_to`");
            reader.wrong_key(&group, b, "keys-exclude-each-other", text, FORMS);
            None
        }
        (None, None) => {
            reader.wrong(spot, "missing-key", "no voltage is given", FORMS);
            None
        }
        (Some(_), None) => {
            let nominal = reader.need(&group, "nominal", "565 V").and_then(|spot| reader.quantity(&spot));
            let highest = reader.need(&group, "highest", "750 V").and_then(|spot| reader.quantity(&spot));
            Some(ChargedTo { nominal: nominal?, highest: highest?, margin_given: true, source: Source::Direct })
        }
        (None, Some(_)) => alternating(reader, &group),
    }
}

/// The crest of an alternating voltage.
fn alternating(reader: &mut Reader<'_>, group: &Group<'_>) -> Option<ChargedTo> {
    let rms = reader.need(group, "ac_rms", "400 V").and_then(|spot| reader.quantity::<Voltage>(&spot));
    let rise = optional::<Ratio>(reader, group, "rise");
    let source = if group.has("phases") {
        let three = phases(reader, group);
        let words = [("isolated", Neutral::Isolated), ("grounded", Neutral::Grounded)];
        let neutral = reader.need(group, "neutral", "isolated").and_then(|spot| reader.word(&spot, &words));
        three.zip(neutral).zip(rms).map(|(((), neutral), rms)| Source::ThreePhase { rms, neutral })
    } else {
        if group.has("neutral") {
            let text = String::from("`neutral` is for a bank that was charged from three phases");
            reader.wrong_key(group, "neutral", "missing-key", text, "add `phases: 3`, or leave `neutral` out");
        }
        rms.map(|rms| Source::Crest { rms })
    };
    let (rms, source) = (rms?, source?);
    if group.has("rise") && rise.is_none() {
        return None;
    }
    let nominal = std::f64::consts::SQRT_2 * rms.si();
    let highest = nominal * (1.0 + rise.map_or(0.0, Quantity::si));
    Some(ChargedTo {
        nominal: Voltage::from_si(nominal),
        highest: Voltage::from_si(highest),
        margin_given: rise.is_some(),
        source,
    })
}

/// Reads `phases`, which is 3 where it is there.
pub(super) fn phases(reader: &mut Reader<'_>, group: &Group<'_>) -> Option<()> {
    let spot = reader.may(group, "phases")?;
    let count = reader.count(&spot)?;
    if count != 3 {
        reader.wrong(
            &spot,
            "bad-number",
            &format!("{count} phases are not possible"),
            "write `phases: 3`, or leave it out",
        );
    }
    (count == 3).then_some(())
}
