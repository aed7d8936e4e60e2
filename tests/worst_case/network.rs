//! Banks with loose values, as a bank file and as a network of the engine at any point of the tolerance box. All
//! invented.

use ebbvolt::bank::file;
use ebbvolt::circuit::{Edge, Modes, Network};
use ebbvolt::plan::{Options, Plan, plan};
use std::sync::Arc;

/// A part: id, marked value in ohm or farad, tolerance as a share, nodes.
pub struct Part {
    pub id: &'static str,
    pub value: f64,
    pub tolerance: f64,
    pub nodes: [&'static str; 2],
}

pub const fn part(id: &'static str, value: f64, tolerance: f64, nodes: [&'static str; 2]) -> Part {
    Part { id, value, tolerance, nodes }
}

/// A bank between P and N; ids that begin with C are capacitors.
pub struct Bank {
    pub nodes: &'static [&'static str],
    pub parts: Vec<Part>,
    pub volts: f64,
    pub touch: f64,
}

impl Bank {
    /// The bank file, every digit of every value written.
    pub fn text(&self) -> String {
        let line = |p: &Part| {
            let (role, unit) = if p.id.starts_with('C') { ("", "F") } else { ("role: bleeder, ", "ohm") };
            format!(
                "  - {{id: {}, {role}value: {:e} {unit}, tolerance: {:e} %, across: [{}, {}]}}\n",
                p.id,
                p.value,
                p.tolerance * 100.0,
                p.nodes[0],
                p.nodes[1]
            )
        };
        let list = |capacitors: bool| -> String {
            self.parts.iter().filter(|p| p.id.starts_with('C') == capacitors).map(line).collect()
        };
        format!(
            "ebbvolt: 1\ntag: SM-WORST\nlocation: Saltmarsh pumping station\ntouch_voltage: {:e} V\ncharged_to: \
             {{nominal: {:e} V, highest: {:e} V}}\ncapacitors:\n{}resistors:\n{}",
            self.touch,
            self.volts,
            self.volts,
            list(true),
            list(false)
        )
    }

    pub fn plan(&self) -> Plan {
        plan_of(&self.text())
    }

    /// The wait in second between two nodes with the parts' values at `factors` of the marked ones: the operating
    /// point, the modes and the last crossing, asked of the engine directly.
    pub fn wait(&self, factors: &[f64], across: [&str; 2]) -> f64 {
        let node = |name: &str| self.nodes.iter().position(|n| *n == name).expect("a node");
        let reference = node("N");
        let mut network = Network { nodes: self.nodes.len(), reference, ..Network::default() };
        for (part, factor) in self.parts.iter().zip(factors) {
            let edge = Edge { a: node(part.nodes[0]), b: node(part.nodes[1]), value: part.value * factor };
            if part.id.starts_with('C') { network.capacitors.push(edge) } else { network.resistors.push(edge) }
        }
        let potentials = network.operating_point(&[(node("P"), self.volts), (reference, 0.0)]);
        let voltages: Vec<f64> = network.capacitors.iter().map(|c| potentials[c.a] - potentials[c.b]).collect();
        let response = Arc::new(Modes::new(network).expect("rates")).response(&voltages, &potentials).expect("agrees");
        let voltage = response.across(node(across[0]), node(across[1]));
        voltage.last_outside(self.touch, 0.0).expect("closes").seconds()
    }
}

/// The plan of a bank file, by the library's public path.
pub fn plan_of(text: &str) -> Plan {
    let (bank, noticed) = file::read("bank.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}"));
    plan(&bank, "", noticed, Options::default()).unwrap_or_else(|e| panic!("{text}{e}"))
}
