//! The bank as numbered nodes and parts.

use super::absorption::Branches;
use super::contact::Contact;
use super::poles::ThreePhase;
use super::spread::Spreads;
use crate::bank::Bank;
use crate::bank::description::{self, Capacitor, Lasts, Resistor, Supply};
use crate::circuit::{CircuitError, Draw, Edge, Network, Sink};
use crate::data::dielectric;
use crate::quantity::{Quantity, Tolerance};

/// A loose value: a factor on a part's marked value that may lie anywhere in its range.
#[derive(Debug, Clone)]
pub(crate) struct Parameter {
    /// The part it belongs to.
    pub id: String,
    /// Lowest factor.
    pub low: f64,
    /// Highest factor.
    pub high: f64,
}

/// A part between two nodes.
#[derive(Debug, Clone)]
pub(crate) struct Part {
    /// The part of the bank file that it belongs to.
    pub id: String,
    pub a: usize,
    pub b: usize,
    /// Ohm or farad at the marked value; arrays are lumped into one.
    pub nominal: f64,
    /// Which loose value it follows.
    pub parameter: Option<usize>,
    /// What it is in the model.
    pub kind: PartKind,
}

/// What a part is in the model.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum PartKind {
    /// A part of the file that is there at all times.
    Fixed,
    /// A part that only a step connects: a tool, a strap, a meter, the series resistance of a supply.
    Switched,
    /// A bleeder that a contact connects after isolation.
    Contact,
    /// A piece of an opened array, connected together with the resistor of this number.
    With(usize),
    /// The capacitance or resistance of an absorption branch of the capacitor with this number.
    Absorbing(usize),
}

impl Part {
    /// The value at a point of the box. The resistance of an absorption branch goes as 1/C, so that its time
    /// constant stays.
    pub fn value(&self, point: &[f64], is_resistor: bool) -> f64 {
        let factor = self.parameter.and_then(|p| point.get(p)).copied().unwrap_or(1.0);
        let inverse = is_resistor && matches!(self.kind, PartKind::Absorbing(_));
        if inverse { self.nominal / factor } else { self.nominal * factor }
    }
}

/// A supply that a step may connect.
#[derive(Debug, Clone)]
pub(crate) struct Source {
    /// The part of the bank file.
    pub id: String,
    /// Node between the ideal source and its series resistance.
    pub inside: usize,
    /// The nodes that it feeds.
    pub a: usize,
    pub b: usize,
    pub volts: f64,
    /// The number of its series resistance.
    pub resistor: usize,
}

/// A sink, and whether a wait may rely on it.
#[derive(Debug, Clone)]
pub(crate) struct Load {
    /// The part of the bank file.
    pub id: String,
    pub sink: Sink,
    pub counted: bool,
}

/// A bank as a network whose values follow from a point of the tolerance box.
#[derive(Debug, Clone, Default)]
pub(crate) struct Model {
    pub node_names: Vec<String>,
    /// Numbers of the terminals, the reference last.
    pub terminals: Vec<usize>,
    /// Those of the file first, in its order; then series resistances of supplies; then absorption branches.
    pub resistors: Vec<Part>,
    /// Those of the file first, in its order; then absorption branches.
    pub capacitors: Vec<Part>,
    pub sources: Vec<Source>,
    /// Paths that are no resistor.
    pub loads: Vec<Load>,
    /// What connects bleeders after isolation.
    pub contacts: Vec<Contact>,
    /// Own voltage of every capacitor at isolation, in volt.
    pub own_voltages: Vec<Option<f64>>,
    /// Pairs that figures are asked for: the test points, then the terminals and pairs of limits that are none.
    pub pairs: Vec<(usize, usize)>,
    /// How many of the pairs are test points.
    pub test_points: usize,
    /// Those of parts that no step connects first.
    pub parameters: Vec<Parameter>,
    /// How far values can lie from the marked ones.
    pub spreads: Spreads,
    /// How many of the loose values are of parts that no step connects; a passive discharge has no others.
    pub passive: usize,
    /// How it was fed, where that was from three phases.
    pub three_phase: Option<ThreePhase>,
}

/// What differs from the healthy bank.
#[derive(Debug, Clone, Default, PartialEq)]
pub(crate) struct Variation {
    /// (resistor, factor on its value); infinite for open.
    pub resistor: Option<(usize, f64)>,
    /// (capacitor, factor on its value); zero for one that is not connected any more.
    pub capacitor: Option<(usize, f64)>,
    /// A capacitor that is a short: its nodes are one.
    pub shorted: Option<usize>,
    /// What else has failed.
    pub also: Option<Box<Variation>>,
}

impl Variation {
    /// This one and all others at the same time.
    pub fn all(&self) -> impl Iterator<Item = &Variation> {
        std::iter::successors(Some(self), |v| v.also.as_deref())
    }

    /// By how much a capacitor differs.
    fn of_capacitor(&self, index: usize) -> f64 {
        self.all().filter_map(|v| v.capacitor).filter(|(i, _)| *i == index).map(|(_, factor)| factor).product()
    }
}

impl Model {
    /// Writes a bank as a model.
    ///
    /// # Errors
    /// Where the absorption of a capacitor can't be calibrated.
    pub fn new(bank: &Bank) -> Result<Self, CircuitError> {
        let description = bank.description();
        let mut model = Model { spreads: Spreads::of(bank), ..Model::default() };
        model.terminals = description.terminals.iter().map(|n| model.node(n)).collect();
        for capacitor in &description.capacitors {
            let part = model.capacitor(capacitor);
            model.capacitors.push(part);
            model.own_voltages.push(capacitor.charged_to.map(Quantity::si));
        }
        for resistor in &description.resistors {
            let part = model.resistor(resistor);
            model.contacts.extend(Contact::of(resistor, model.resistors.len(), (part.a, part.b)));
            model.resistors.push(part);
        }
        for by_a_step in [false, true] {
            model.passive = model.parameters.len();
            for (index, resistor) in description.resistors.iter().enumerate() {
                if (model.resistors[index].kind == PartKind::Switched) == by_a_step {
                    let spread = model.spreads.resistor(resistor).total();
                    model.resistors[index].parameter = model.parameter(&resistor.id, spread);
                }
            }
        }
        for supply in &description.supplies {
            model.supply(supply);
        }
        model.loads = description.sinks.iter().map(|s| model.load(s)).collect();
        for (index, capacitor) in description.capacitors.iter().enumerate() {
            if let Some((share, slow)) = absorption(capacitor) {
                let branches = Branches::calibrated(capacitor.value.si(), share, slow)?;
                model.absorb(index, &branches);
            }
        }
        model.pairs = bank.test_points().iter().map(|[a, b]| (model.node(a), model.node(b))).collect();
        model.test_points = model.pairs.len();
        let limits = description.limits.iter().filter_map(|l| l.at.clone());
        let steps = description.procedure.iter().flat_map(|step| {
            let until = match &step.lasts {
                Lasts::Until(hold) => hold.at.clone(),
                Lasts::For(_) => None,
            };
            until.into_iter().chain(step.hold.iter().filter_map(|h| h.at.clone())).chain(step.measure.clone())
        });
        let terminals = [description.terminals.first().cloned(), description.terminals.last().cloned()];
        let terminals = if let [Some(top), Some(reference)] = terminals { Some([top, reference]) } else { None };
        for [a, b] in terminals.into_iter().chain(limits).chain(steps) {
            if model.find_pair(&a, &b).is_none() {
                let pair = (model.node(&a), model.node(&b));
                model.pairs.push(pair);
            }
        }
        model.three_phase = ThreePhase::of(bank, &model);
        Ok(model)
    }

    /// The number of the pair between two nodes by name, whichever way round.
    pub fn find_pair(&self, a: &str, b: &str) -> Option<usize> {
        let (a, b) = (self.find_node(a)?, self.find_node(b)?);
        self.pairs.iter().position(|p| *p == (a, b) || *p == (b, a))
    }

    pub fn reference(&self) -> usize {
        self.terminals.last().copied().unwrap_or(0)
    }

    /// The number of a node; new names get the next one.
    pub fn node(&mut self, name: &str) -> usize {
        self.find_node(name).unwrap_or_else(|| {
            self.node_names.push(name.to_string());
            self.node_names.len() - 1
        })
    }

    /// One more node, whatever names there are.
    pub fn new_node(&mut self, name: &str) -> usize {
        self.node_names.push(name.to_string());
        self.node_names.len() - 1
    }

    /// A node by name, where there is one.
    pub fn find_node(&self, name: &str) -> Option<usize> {
        self.node_names.iter().position(|n| n == name)
    }

    /// The number of a resistor by id.
    pub fn find_resistor(&self, id: &str) -> Option<usize> {
        self.resistors.iter().position(|r| r.id == id)
    }

    /// A loose value for `id`, or `None` where the tolerance leaves it nothing to move.
    pub fn parameter(&mut self, id: &str, tolerance: Option<Tolerance>) -> Option<usize> {
        let tolerance = tolerance.filter(|t| !t.is_none())?;
        let (low, high) = (tolerance.lowest_factor(), tolerance.highest_factor());
        self.parameters.push(Parameter { id: id.to_string(), low, high });
        Some(self.parameters.len() - 1)
    }

    fn capacitor(&mut self, c: &Capacitor) -> Part {
        let nominal = c.value.si() * f64::from(c.parallel) / f64::from(c.series);
        let (a, b) = (self.node(&c.across[0]), self.node(&c.across[1]));
        let parameter = self.parameter(&c.id, self.spreads.capacitor(c).total());
        Part { id: c.id.clone(), a, b, nominal, parameter, kind: PartKind::Fixed }
    }

    fn resistor(&mut self, r: &Resistor) -> Part {
        let nominal = r.value.si() * f64::from(r.series) / f64::from(r.parallel);
        let (a, b) = (self.node(&r.across[0]), self.node(&r.across[1]));
        let kind = match r.role.always_connected() {
            true if r.switched.is_some() => PartKind::Contact,
            true => PartKind::Fixed,
            false => PartKind::Switched,
        };
        Part { id: r.id.clone(), a, b, nominal, parameter: None, kind }
    }

    fn supply(&mut self, s: &Supply) {
        let (a, b) = (self.node(&s.across[0]), self.node(&s.across[1]));
        let inside = self.new_node(&format!("{} inside", s.id));
        let parameter = self.parameter(&s.id, s.tolerance);
        let nominal = s.series.si() * f64::from(s.array_series) / f64::from(s.array_parallel);
        let kind = PartKind::Switched;
        // From the source's own node towards the bank: a positive current charges.
        self.resistors.push(Part { id: s.id.clone(), a: inside, b: a, nominal, parameter, kind });
        let resistor = self.resistors.len() - 1;
        self.sources.push(Source { id: s.id.clone(), inside, a, b, volts: s.voltage.si(), resistor });
    }

    fn load(&mut self, s: &description::Sink) -> Load {
        let draw = match s.draw {
            description::Draw::ConstantCurrent(current) => Draw::Current(current.si()),
            description::Draw::ConstantPower(power) => Draw::Power(power.si()),
        };
        let (a, b) = (self.node(&s.across[0]), self.node(&s.across[1]));
        let sink = Sink { a, b, draw, stops_below: s.stops_below.si() };
        Load { id: s.id.clone(), sink, counted: s.counted }
    }

    /// The sinks of a network in which capacitor and resistor nodes are those of `map`.
    pub fn sinks(&self, map: &[usize]) -> Vec<Sink> {
        self.loads.iter().map(|l| Sink { a: map[l.sink.a], b: map[l.sink.b], ..l.sink }).collect()
    }

    /// Adds the branches of a capacitor's absorption; they follow its own loose value.
    fn absorb(&mut self, index: usize, branches: &Branches) {
        let whole = self.capacitors[index].clone();
        let kind = PartKind::Absorbing(index);
        for (number, (ohm, farad)) in branches.parts(whole.nominal).enumerate() {
            let id = format!("{} absorption {}", whole.id, number + 1);
            let inside = self.node(&id);
            let (a, b, parameter) = (whole.a, whole.b, whole.parameter);
            self.resistors.push(Part { id: id.clone(), a, b: inside, nominal: ohm, parameter, kind });
            self.capacitors.push(Part { id, a: inside, b, nominal: farad, parameter, kind });
            self.own_voltages.push(self.own_voltages[index]);
        }
    }

    /// For every node the node that it is one with under `variation`: a terminal, where one of the two is.
    pub fn merged(&self, variation: &Variation) -> Vec<usize> {
        let mut map: Vec<usize> = (0..self.node_names.len()).collect();
        for c in variation.all().filter_map(|v| v.shorted).map(|c| &self.capacitors[c]) {
            let (a, b) = (map[c.a], map[c.b]);
            let (gone, stays) = if self.terminals.contains(&a) { (b, a) } else { (a, b) };
            map.iter_mut().filter(|n| **n == gone).for_each(|n| *n = stays);
        }
        map
    }

    /// Resistances in ohm of all resistors at a point of the box; infinite for one that is open or not connected.
    /// `connected` are those that a step or a contact connects.
    pub fn ohms(&self, variation: &Variation, point: &[f64], connected: &[usize]) -> Vec<f64> {
        let parts = self.resistors.iter().enumerate();
        parts
            .map(|(i, r)| {
                let of_this = variation.all().filter_map(|v| v.resistor).filter(|(index, _)| *index == i);
                let failed: f64 = of_this.map(|(_, factor)| factor).product();
                let there = match r.kind {
                    PartKind::Fixed | PartKind::Absorbing(_) => true,
                    PartKind::Switched | PartKind::Contact => connected.contains(&i),
                    PartKind::With(of) => connected.contains(&of),
                };
                // A branch of a failed capacitor scales with it; its time constant stays.
                let branch = if let PartKind::Absorbing(of) = r.kind { variation.of_capacitor(of) } else { 1.0 };
                let failed = failed / branch;
                if there { r.value(point, true) * failed } else { f64::INFINITY }
            })
            .collect()
    }

    /// The network at a point of the box with the resistors that are `connected` beside those that always are; parts whose nodes are one are left
    /// out.
    pub fn network(&self, variation: &Variation, point: &[f64], connected: &[usize]) -> Network {
        let map = self.merged(variation);
        let edge = |part: &Part, value: f64| Edge { a: map[part.a], b: map[part.b], value };
        let there = |e: &Edge| e.a != e.b && e.value.is_finite() && e.value > 0.0;
        let ohms = self.ohms(variation, point, connected);
        let farad = |i: usize, c: &Part| {
            let of = if let PartKind::Absorbing(of) = c.kind { of } else { i };
            c.value(point, false) * variation.of_capacitor(of)
        };
        let resistors = self.resistors.iter().zip(ohms).map(|(r, ohm)| edge(r, ohm));
        let capacitors = self.capacitors.iter().enumerate().map(|(i, c)| edge(c, farad(i, c)));
        let on = self.sources.iter().filter(|s| connected.contains(&s.resistor));
        Network {
            nodes: self.node_names.len(),
            reference: self.reference(),
            resistors: resistors.filter(there).collect(),
            capacitors: capacitors.filter(there).collect(),
            sources: on.map(|s| Edge { a: s.inside, b: map[s.b], value: s.volts }).collect(),
        }
    }

    /// Whether a capacitor is in the network under `variation`: neither shorted nor open.
    pub fn is_there(&self, variation: &Variation, map: &[usize], capacitor: usize) -> bool {
        let part = &self.capacitors[capacitor];
        let gone = |i: usize| i == capacitor || part.kind == PartKind::Absorbing(i);
        let open = variation.capacitor.is_some_and(|(i, factor)| factor == 0.0 && gone(i));
        map[part.a] != map[part.b] && !open
    }

    /// The network of what is there at all times, without absorption branches.
    pub fn main_network(&self, variation: &Variation, point: &[f64]) -> Network {
        let map = self.merged(variation);
        let main: Vec<bool> = (0..self.capacitors.len())
            .filter(|i| self.is_there(variation, &map, *i))
            .map(|i| self.capacitors[i].kind == PartKind::Fixed)
            .collect();
        let mut network = self.network(variation, point, &[]);
        let mut main = main.into_iter();
        network.capacitors.retain(|_| main.next().unwrap_or(true));
        network
    }

    /// For every absorption branch its own node and the node of its capacitor that a resistance ties it to.
    pub fn absorbing_nodes(&self) -> impl Iterator<Item = (usize, usize)> {
        self.resistors.iter().filter(|r| matches!(r.kind, PartKind::Absorbing(_))).map(|r| (r.b, r.a))
    }

    /// The middle of the box of a passive discharge.
    pub fn nominal_point(&self) -> Vec<f64> {
        vec![1.0; self.passive]
    }

    /// The same model, passive, with every part that is always there loose: parts without a tolerance get a loose
    /// value of their own after the others, with no range.
    pub fn all_loose(&self) -> Model {
        let mut model = self.passive_only();
        let loose = |model: &mut Model, id: &str| {
            model.parameters.push(Parameter { id: id.to_string(), low: 1.0, high: 1.0 });
            Some(model.parameters.len() - 1)
        };
        for index in 0..model.resistors.len() {
            let there = matches!(model.resistors[index].kind, PartKind::Fixed | PartKind::Contact);
            if there && model.resistors[index].parameter.is_none() {
                let id = model.resistors[index].id.clone();
                model.resistors[index].parameter = loose(&mut model, &id);
            }
        }
        for index in 0..model.capacitors.len() {
            if model.capacitors[index].kind == PartKind::Fixed && model.capacitors[index].parameter.is_none() {
                let id = model.capacitors[index].id.clone();
                let parameter = loose(&mut model, &id);
                model.capacitors[index].parameter = parameter;
                let branch = |part: &&mut Part| part.kind == PartKind::Absorbing(index);
                model.capacitors.iter_mut().filter(branch).for_each(|c| c.parameter = parameter);
                model.resistors.iter_mut().filter(branch).for_each(|r| r.parameter = parameter);
            }
        }
        model.passive = model.parameters.len();
        model
    }

    /// The same model with nothing loose that is not there at all times.
    pub fn passive_only(&self) -> Model {
        let mut model = self.clone();
        model.parameters.truncate(model.passive);
        let passive = model.passive;
        model.resistors.iter_mut().for_each(|r| r.parameter = r.parameter.filter(|p| *p < passive));
        model
    }
}

/// The absorption that a capacitor is computed with, and whether its dielectric has slow branches: given, or the
/// end of the dielectric's typical range that hurts.
pub(crate) fn absorption(capacitor: &Capacitor) -> Option<(f64, bool)> {
    let dielectric = capacitor.dielectric.as_deref().and_then(dielectric);
    let slow = dielectric.is_some_and(|d| d.slow_branches);
    let typical = || dielectric.and_then(|d| d.absorption).map(|range| range.high.unwrap_or(range.low).si());
    let share = capacitor.absorption.or_else(typical)?;
    (share > 0.0).then_some((share, slow))
}
