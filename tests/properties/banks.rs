//! Random banks of two to four nodes, written as bank files.

use ebbvolt::bank::file;
use ebbvolt::plan::{Options, Plan, plan};
use proptest::prelude::*;

const NODES: [&str; 4] = ["P", "N", "X", "Y"];

/// A part between two nodes.
#[derive(Clone, Debug)]
pub struct Part {
    id: String,
    capacitor: bool,
    a: usize,
    b: usize,
    /// Ohm or farad.
    value: f64,
    /// Tolerance both ways, as a share; 0 for none.
    tolerance: f64,
}

/// A bank as it was drawn.
#[derive(Clone, Debug)]
pub struct Draw {
    parts: Vec<Part>,
    nodes: Vec<String>,
    nominal: f64,
    highest: f64,
    touch: f64,
}

impl Draw {
    /// The bank file. Numbers have every digit, so that what is read is what was drawn.
    pub fn text(&self) -> String {
        let list = |capacitors: bool| -> String {
            let parts = self.parts.iter().filter(|p| p.capacitor == capacitors);
            parts.map(|p| self.line(p)).collect()
        };
        format!(
            "ebbvolt: 1\ntag: SM-LAW\nlocation: Saltmarsh pumping station\ntouch_voltage: {:e} V\n\
             charged_to: {{nominal: {:e} V, highest: {:e} V}}\ncapacitors:\n{}resistors:\n{}",
            self.touch,
            self.nominal,
            self.highest,
            list(true),
            list(false)
        )
    }

    fn line(&self, part: &Part) -> String {
        let Part { id, capacitor, a, b, value, tolerance } = part;
        let (role, unit) = if *capacitor { ("", "F") } else { ("role: bleeder, ", "ohm") };
        let tolerance =
            if *tolerance > 0.0 { format!(", tolerance: {:e} %", tolerance * 100.0) } else { String::new() };
        let (a, b) = (&self.nodes[*a], &self.nodes[*b]);
        format!("  - {{id: {id}, {role}value: {value:e} {unit}{tolerance}, across: [{a}, {b}]}}\n")
    }

    /// A string of capacitors, each with a resistor across it, as `(farad, ohm)`.
    pub fn string(parts: &[(f64, f64)], volts: f64) -> Self {
        let nodes: Vec<String> = (0..=parts.len())
            .map(|i| {
                if i == 0 {
                    "P".into()
                } else if i == parts.len() {
                    "N".into()
                } else {
                    format!("M{i}")
                }
            })
            .collect();
        let part = |capacitor: bool, i: usize, value: f64| Part {
            id: format!("{}{i}", if capacitor { "C" } else { "R" }),
            capacitor,
            a: i,
            b: i + 1,
            value,
            tolerance: 0.0,
        };
        let each = parts.iter().enumerate();
        let parts = each.flat_map(|(i, (c, r))| [part(true, i, *c), part(false, i, *r)]).collect();
        Draw { parts, nodes, nominal: volts, highest: volts, touch: volts / 10.0 }
    }

    /// The capacitors: nodes and farad.
    pub fn capacitors(&self) -> impl Iterator<Item = (&str, &str, f64)> {
        let node = |n: usize| self.nodes[n].as_str();
        self.parts.iter().filter(|p| p.capacitor).map(move |p| (node(p.a), node(p.b), p.value))
    }

    fn with(&self, change: impl Fn(usize, &mut Part)) -> Self {
        let mut draw = self.clone();
        draw.parts.iter_mut().enumerate().for_each(|(i, part)| change(i, part));
        draw
    }

    pub fn with_resistances_times(&self, factor: f64) -> Self {
        self.with(|_, part| part.value *= if part.capacitor { 1.0 } else { factor })
    }

    pub fn with_voltages_times(&self, factor: f64) -> Self {
        let (nominal, highest, touch) = (self.nominal * factor, self.highest * factor, self.touch * factor);
        Draw { nominal, highest, touch, ..self.clone() }
    }

    pub fn in_reverse_order(&self) -> Self {
        let mut draw = self.clone();
        draw.parts.reverse();
        draw
    }

    pub fn at_one_voltage(&self) -> Self {
        Draw { nominal: self.highest, ..self.clone() }
    }

    /// One part's tolerance `more` wider, as a share.
    pub fn with_a_wider_tolerance(&self, part: prop::sample::Index, more: f64) -> Self {
        let wider = part.index(self.parts.len());
        self.with(|i, part| part.tolerance += if i == wider { more } else { 0.0 })
    }

    /// Every value fixed at a point of its tolerance (0 the lowest, 1 the highest), at the highest voltage.
    pub fn fixed_at(&self, point: &[f64]) -> Self {
        let fixed = self.with(|i, part| {
            part.value *= 1.0 + part.tolerance * (2.0 * point[i] - 1.0);
            part.tolerance = 0.0;
        });
        fixed.at_one_voltage()
    }
}

/// The plan of a draw; a bank file that is refused, or a plan without a verdict, is a failure of its own.
pub fn plan_of(draw: &Draw) -> Result<Plan, TestCaseError> {
    let text = draw.text();
    let failed = |why: String| TestCaseError::fail(format!("{why}\n{text}"));
    let (bank, noticed) = file::read("law.yaml", text.as_bytes()).map_err(|e| failed(format!("{e:?}")))?;
    plan(&bank, "", noticed, Options::default()).map_err(|e| failed(e.to_string()))
}

/// Banks of two to four nodes on a ring, so that each node has two parts at least, and up to two parts more; one to
/// five capacitors, up to four loose values. Half of them are built from whole decades, as real banks are built from
/// equal parts: there rates and voltages meet exactly.
pub fn bank() -> impl Strategy<Value = Draw> {
    let part = (any::<bool>(), 0f64..4.0, 0usize..4);
    let ring = prop::collection::vec(part, 2..=4);
    let more = prop::collection::vec((any::<bool>(), 0f64..4.0, 0usize..4, 0usize..4, 1usize..4), 0..=2);
    let volts = (100f64..1000.0, 1.0f64..1.3, 0.05f64..0.4);
    (ring, more, volts, any::<bool>()).prop_map(|(ring, more, (nominal, rise, share), equal)| {
        let count = ring.len();
        let mut parts = Vec::new();
        let mut add = |capacitor: bool, decade: f64, tolerance: usize, a: usize, b: usize| {
            let number = parts.len();
            // 1 uF to 10 mF; 100 ohm to 1 Mohm.
            let decade = if equal { (decade / 2.0).round() * 2.0 } else { decade };
            let value = 10f64.powf(if capacitor { decade - 6.0 } else { decade + 2.0 });
            // Four loose values at most: every corner of the box is solved under every fault.
            let loose = parts.iter().filter(|p: &&Part| p.tolerance > 0.0).count() < 4;
            let tolerance = if loose { [0.0, 0.05, 0.1, 0.2][tolerance] } else { 0.0 };
            let id = format!("{}{number}", if capacitor { "C" } else { "R" });
            parts.push(Part { id, capacitor, a, b, value, tolerance });
        };
        for (i, (capacitor, decade, tolerance)) in ring.into_iter().enumerate() {
            // A bank has a capacitor and something that bleeds it.
            let capacitor = if i < 2 { i == 0 } else { capacitor };
            add(capacitor, decade, tolerance, i, (i + 1) % count);
        }
        for (capacitor, decade, tolerance, from, step) in more {
            let a = from % count;
            let b = (a + 1 + (step - 1) % (count - 1)) % count;
            add(capacitor, decade, tolerance, a, b);
        }
        let highest = nominal * rise;
        let nodes = NODES.map(String::from).to_vec();
        Draw { parts, nodes, nominal, highest, touch: nominal * share }
    })
}
