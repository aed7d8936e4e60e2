//! The parts: capacitors, resistors, sinks, supplies.

use super::charge::phases;
use super::reader::{Group, Reader, Spot};
use super::top::{optional, unread};
use super::{rating, switched};
use crate::bank::description::{Capacitor, Connection, Draw, Kvar, Pair, Resistor, Role, Sink, Supply};
use crate::quantity::{Capacitance, Current, Frequency, Power, Quantity, Ratio, Resistance, Voltage};

const CAPACITOR: [&str; 14] = [
    "id",
    "value",
    "kvar",
    "tolerance",
    "tempco",
    "ageing",
    "across",
    "units",
    "rated",
    "dielectric",
    "absorption",
    "charged_to",
    "phases",
    "connection",
];
const RESISTOR: [&str; 12] = [
    "id",
    "role",
    "value",
    "tolerance",
    "tempco",
    "ageing",
    "across",
    "array",
    "rating",
    "phases",
    "connection",
    "switched",
];
const SINK: [&str; 6] = ["id", "kind", "value", "across", "stops_below", "counted"];
const SUPPLY: [&str; 7] = ["id", "voltage", "series", "tolerance", "array", "across", "rating"];

/// Where a part lies that names no nodes.
pub(super) struct Terminals<'a> {
    pub(super) names: &'a [String],
    pub(super) three_phase: bool,
}

/// What a capacitance given as such may be as well.
const PLAUSIBLE_FARAD: std::ops::RangeInclusive<f64> = 1e-15..=1e6;

/// Capacitors, in the order of the file.
pub(super) fn capacitors(reader: &mut Reader<'_>, top: &Group<'_>, terminals: &Terminals<'_>) -> Vec<Capacitor> {
    let spots = match reader.need(top, "capacitors", "[{id: C1, value: 3300 uF}]") {
        Some(spot) => reader.list(&spot, "entry", "- {id: C1, value: 3300 uF}"),
        None => None,
    };
    let Some(spots) = spots else {
        // Everything else would only echo that there are none.
        (reader.doubt.capacitors, reader.doubt.ids, reader.doubt.voltages) = (true, true, true);
        return vec![];
    };
    let each = |(i, spot): (usize, &Spot<'_>)| capacitor(reader, spot, i, terminals);
    spots.iter().enumerate().map(each).collect()
}

fn capacitor(reader: &mut Reader<'_>, spot: &Spot<'_>, i: usize, terminals: &Terminals<'_>) -> Capacitor {
    let mut c = Capacitor {
        id: unread("capacitor", i),
        value: Capacitance::from_si(1.0),
        kvar: None,
        tolerance: None,
        tempco: None,
        ageing: None,
        across: unread_pair("capacitor", i),
        series: 1,
        parallel: 1,
        rated: None,
        dielectric: None,
        absorption: None,
        charged_to: None,
        phases: None,
    };
    let Some(group) = part(reader, spot, "capacitor", &CAPACITOR) else {
        reader.doubt.voltages = true;
        return c;
    };
    c.id = id(reader, &group, "C1").unwrap_or(c.id);
    // Connection and nodes come first: reactive power is of the three legs together.
    let (phases, across) = place(reader, &group, terminals);
    c.phases = phases;
    c.across = across.unwrap_or(c.across);
    (c.value, c.kvar) = value(reader, &group, c.phases).unwrap_or((c.value, None));
    c.tolerance = reader.may(&group, "tolerance").and_then(|spot| reader.tolerance(&spot));
    c.tempco = optional(reader, &group, "tempco");
    c.ageing = reader.may(&group, "ageing").and_then(|spot| reader.ageing(&spot));
    (c.series, c.parallel) = counts(reader, &group, "units");
    c.rated = optional(reader, &group, "rated");
    c.dielectric = reader.may(&group, "dielectric").and_then(|spot| reader.text(&spot));
    c.absorption = optional::<Ratio>(reader, &group, "absorption").map(Quantity::si);
    c.charged_to = optional(reader, &group, "charged_to");
    if group.has("charged_to") && c.charged_to.is_none() {
        reader.doubt.voltages = true;
    }
    c
}

/// The capacitance of one unit, from `value` or from `kvar`.
fn value(
    reader: &mut Reader<'_>,
    group: &Group<'_>,
    phases: Option<Connection>,
) -> Option<(Capacitance, Option<Kvar>)> {
    match (group.has("value"), group.has("kvar")) {
        (true, false) => {
            let spot = reader.may(group, "value")?;
            reader.capacitance(&spot).map(|value| (value, None))
        }
        (false, true) => kvar(reader, group, phases),
        (true, true) => {
            let text = format!("{} has both `value` and `kvar`", group.owner);
            reader.wrong_key(group, "kvar", "keys-exclude-each-other", text, "keep one of the two");
            None
        }
        (false, false) => {
            let text = format!("{} has neither `value` nor `kvar`", group.owner);
            let help = "add `value: 3300 uF`, or `kvar: {power: 50 kvar, voltage: 400 V, frequency: 50 Hz}`";
            reader.wrong_key(group, "", "missing-key", text, help);
            None
        }
    }
}

fn kvar(reader: &mut Reader<'_>, group: &Group<'_>, phases: Option<Connection>) -> Option<(Capacitance, Option<Kvar>)> {
    let spot = reader.may(group, "kvar")?;
    let owner = format!("`kvar` of {}", group.owner);
    let plate = reader.group(&spot, owner, &["power", "voltage", "frequency"])?;
    let power = reader.need(&plate, "power", "50 kvar").and_then(|spot| reader.reactive_power(&spot));
    let voltage = reader.need(&plate, "voltage", "400 V").and_then(|spot| reader.quantity::<Voltage>(&spot));
    let frequency = reader.need(&plate, "frequency", "50 Hz").and_then(|spot| reader.quantity::<Frequency>(&spot));
    let (power, voltage, frequency) = (power?, voltage?, frequency?);
    // A voltage of zero is reported with the other figures; it only must not divide.
    let volt = if voltage.si() > 0.0 { voltage.si() } else { 1.0 };
    // Q = 2 pi f C V^2 for each leg. In delta a leg has the line voltage and a third of the power; in star it has
    // V/sqrt(3) and a third of the power, and the two threes cancel.
    let legs = if phases == Some(Connection::Delta) { 3.0 } else { 1.0 };
    let farad = power / (legs * std::f64::consts::TAU * frequency.si() * volt * volt);
    if !PLAUSIBLE_FARAD.contains(&farad) {
        let text = format!("these values make a capacitance of {farad:e} F");
        reader.wrong(&spot, "bad-quantity", &text, "check power, voltage and frequency against the plate");
        return None;
    }
    Some((Capacitance::from_si(farad), Some(Kvar { power: Power::from_si(power), voltage, frequency })))
}

/// Resistors, in the order of the file.
pub(super) fn resistors(reader: &mut Reader<'_>, top: &Group<'_>, terminals: &Terminals<'_>) -> Vec<Resistor> {
    let spots = entries(reader, top, "resistors", "- {id: R1, role: bleeder, value: 22 kohm, across: [P, N]}");
    let each = |(i, spot): (usize, &Spot<'_>)| resistor(reader, spot, i, terminals);
    spots.iter().enumerate().map(each).collect()
}

fn resistor(reader: &mut Reader<'_>, spot: &Spot<'_>, i: usize, terminals: &Terminals<'_>) -> Resistor {
    let mut r = Resistor {
        id: unread("resistor", i),
        role: Role::Bleeder,
        value: Resistance::from_si(1.0),
        tolerance: None,
        tempco: None,
        ageing: None,
        across: unread_pair("resistor", i),
        series: 1,
        parallel: 1,
        rating: Default::default(),
        phases: None,
        switched: None,
    };
    let Some(group) = part(reader, spot, "resistor", &RESISTOR) else { return r };
    r.id = id(reader, &group, "R1").unwrap_or(r.id);
    let words = Role::ALL.map(|role| (role.word(), role));
    match reader.need(&group, "role", "bleeder").and_then(|spot| reader.word(&spot, &words)) {
        Some(role) => r.role = role,
        None => {
            // Taken as always connected: rules on nodes then find too little rather than too much.
            reader.doubt.roles.insert(r.id.clone());
        }
    }
    r.value = reader.need(&group, "value", "22 kohm").and_then(|spot| reader.quantity(&spot)).unwrap_or(r.value);
    r.tolerance = reader.may(&group, "tolerance").and_then(|spot| reader.tolerance(&spot));
    r.tempco = optional(reader, &group, "tempco");
    r.ageing = reader.may(&group, "ageing").and_then(|spot| reader.ageing(&spot));
    let (phases, across) = place(reader, &group, terminals);
    r.phases = phases;
    r.across = across.unwrap_or(r.across);
    (r.series, r.parallel) = counts(reader, &group, "array");
    r.rating = rating::read(reader, &group);
    r.switched = switched::read(reader, &group);
    r
}

/// Sinks, in the order of the file.
pub(super) fn sinks(reader: &mut Reader<'_>, top: &Group<'_>) -> Vec<Sink> {
    let example = "- {id: K1, kind: constant-current, value: 40 mA, across: [P, N], stops_below: 30 V}";
    let spots = entries(reader, top, "sinks", example);
    spots.iter().enumerate().map(|(i, spot)| sink(reader, spot, i)).collect()
}

fn sink(reader: &mut Reader<'_>, spot: &Spot<'_>, i: usize) -> Sink {
    let mut s = Sink {
        id: unread("sink", i),
        draw: Draw::ConstantCurrent(Current::from_si(1.0)),
        across: unread_pair("sink", i),
        stops_below: Voltage::from_si(1.0),
        counted: false,
    };
    let Some(group) = part(reader, spot, "sink", &SINK) else { return s };
    s.id = id(reader, &group, "K1").unwrap_or(s.id);
    let words = [("constant-current", true), ("constant-power", false)];
    let kind = reader.need(&group, "kind", "constant-current").and_then(|spot| reader.word(&spot, &words));
    let value = reader.need(&group, "value", if kind == Some(false) { "25 W" } else { "40 mA" });
    let draw = match (kind, value) {
        (Some(true), Some(value)) => reader.quantity(&value).map(Draw::ConstantCurrent),
        (Some(false), Some(value)) => reader.quantity(&value).map(Draw::ConstantPower),
        _ => None,
    };
    s.draw = draw.unwrap_or(s.draw);
    s.across = across(reader, &group).unwrap_or(s.across);
    let below = reader.need(&group, "stops_below", "30 V").and_then(|spot| reader.quantity(&spot));
    s.stops_below = below.unwrap_or(s.stops_below);
    s.counted = reader.may(&group, "counted").and_then(|spot| reader.flag(&spot)).unwrap_or(false);
    s
}

/// Supplies, in the order of the file.
pub(super) fn supplies(reader: &mut Reader<'_>, top: &Group<'_>) -> Vec<Supply> {
    let spots = entries(reader, top, "supplies", "- {id: S1, voltage: 565 V, series: 100 ohm, across: [P, N]}");
    spots.iter().enumerate().map(|(i, spot)| supply(reader, spot, i)).collect()
}

fn supply(reader: &mut Reader<'_>, spot: &Spot<'_>, i: usize) -> Supply {
    let mut s = Supply {
        id: unread("supply", i),
        voltage: Voltage::from_si(1.0),
        series: Resistance::from_si(1.0),
        tolerance: None,
        array_series: 1,
        array_parallel: 1,
        across: unread_pair("supply", i),
        rating: Default::default(),
    };
    let Some(group) = part(reader, spot, "supply", &SUPPLY) else { return s };
    s.id = id(reader, &group, "S1").unwrap_or(s.id);
    s.voltage = reader.need(&group, "voltage", "565 V").and_then(|spot| reader.quantity(&spot)).unwrap_or(s.voltage);
    s.series = reader.need(&group, "series", "100 ohm").and_then(|spot| reader.quantity(&spot)).unwrap_or(s.series);
    s.tolerance = reader.may(&group, "tolerance").and_then(|spot| reader.tolerance(&spot));
    s.across = across(reader, &group).unwrap_or(s.across);
    (s.array_series, s.array_parallel) = counts(reader, &group, "array");
    s.rating = rating::read(reader, &group);
    s
}

/// The entries of a list of parts that may be left out.
fn entries<'t>(reader: &mut Reader<'_>, top: &Group<'t>, key: &str, example: &str) -> Vec<Spot<'t>> {
    let spots = reader.may(top, key).and_then(|spot| reader.list(&spot, "entry", example));
    if top.has(key) && spots.is_none() {
        (reader.doubt.nodes, reader.doubt.ids) = (true, true);
    }
    spots.unwrap_or_default()
}

/// The keys of one part, which is called by its id where that can be read.
fn part<'t>(reader: &mut Reader<'_>, spot: &Spot<'t>, noun: &str, keys: &[&'static str]) -> Option<Group<'t>> {
    let group = reader.group(spot, owner(spot, noun), keys);
    if group.is_none() {
        (reader.doubt.nodes, reader.doubt.ids) = (true, true);
    }
    group
}

/// How to speak of an entry: by its id, or else as `this capacitor`.
pub(super) fn owner(spot: &Spot<'_>, noun: &str) -> String {
    use super::tree::{Content, clip};
    match spot.node.get("id").map(|(_, node)| (&node.content, node.is_null())) {
        Some((Content::Scalar { text, .. }, false)) => format!("{noun} `{}`", clip(text)),
        _ => format!("this {noun}"),
    }
}

fn id(reader: &mut Reader<'_>, group: &Group<'_>, example: &str) -> Option<String> {
    let id = reader.need(group, "id", example).and_then(|spot| reader.text(&spot));
    reader.doubt.ids |= id.is_none();
    id
}

/// The nodes of a part that has to name them.
fn across(reader: &mut Reader<'_>, group: &Group<'_>) -> Option<Pair> {
    let pair = reader.need(group, "across", "[P, N]").and_then(|spot| reader.pair(&spot));
    reader.doubt.nodes |= pair.is_none();
    pair
}

/// Where a capacitor or a resistor lies: between the terminals in three phases, across the two nodes that it names, or
/// across the two terminals where it names none.
fn place(reader: &mut Reader<'_>, group: &Group<'_>, terminals: &Terminals<'_>) -> (Option<Connection>, Option<Pair>) {
    let words = [("delta", Connection::Delta), ("star", Connection::Star), ("open-delta", Connection::OpenDelta)];
    if group.has("phases") {
        let three = phases(reader, group);
        let connection = reader.need(group, "connection", "delta").and_then(|spot| reader.word(&spot, &words));
        if group.has("across") {
            let text = format!("{} is a three-phase part and lies between the terminals", group.owner);
            reader.wrong_key(
                group,
                "across",
                "keys-exclude-each-other",
                text,
                "leave `across` out, or leave `phases` out",
            );
        }
        let connection = three.and(connection);
        reader.doubt.nodes |= connection.is_none();
        let pair = match terminals.names {
            [first, second, ..] => Some([first.clone(), second.clone()]),
            _ => None,
        };
        return (connection, pair);
    }
    if group.has("connection") {
        let text = format!("{} has a `connection` and no `phases`", group.owner);
        reader.wrong_key(group, "connection", "missing-key", text, "add `phases: 3`, or leave `connection` out");
    }
    if group.has("across") {
        return (None, across(reader, group));
    }
    match terminals.names {
        [first, last] => (None, Some([first.clone(), last.clone()])),
        [_, _, _] if terminals.three_phase => (None, across(reader, group)),
        _ => {
            // The number of terminals is wrong, and that is reported.
            reader.doubt.nodes = true;
            (None, None)
        }
    }
}

/// `units` of a capacitor or `array` of a resistor or a supply: how many in series, how many in parallel.
fn counts(reader: &mut Reader<'_>, group: &Group<'_>, key: &str) -> (u32, u32) {
    let spot = reader.may(group, key);
    let owner = format!("`{key}` of {}", group.owner);
    let Some(counts) = spot.and_then(|spot| reader.group(&spot, owner, &["series", "parallel"])) else { return (1, 1) };
    let mut count = |key| reader.may(&counts, key).and_then(|spot| reader.count(&spot)).unwrap_or(1);
    (count("series"), count("parallel"))
}

fn unread_pair(noun: &str, i: usize) -> Pair {
    [unread(&format!("{noun} from"), i), unread(&format!("{noun} to"), i)]
}
