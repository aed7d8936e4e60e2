//! Three-phase banks at isolation: the states that a switch can leave whose poles open one after the other.
//!
//! A pole interrupts at a current zero, which for capacitors is a crest of the voltage that drives what still flows.
//! Which pole is first, and whether a later one clears at the next current zero or at one of the other polarity, is
//! chance; so every order counts, and every polarity. The polarity of the first is no choice of its own: with it all
//! voltages change their signs together, and figures are magnitudes. (Where a capacitor has a voltage of its own, or a
//! step connects a supply, signs do matter, and both are tried.) The other sense of rotation of the three phases mirrors
//! the angles, which again swaps polarities only: it needs no case of its own either.
//!
//! A pole that stays closed adds no state. On an isolated bank the last pole carries nothing, so it may stay closed. With
//! a grounded neutral its phase stays alive, which no wait ends (a finding says so); once something upstream clears it,
//! at a current zero too, the state is one of those of three poles with that one last.

use super::model::{Model, Variation};
use crate::bank::Bank;
use crate::bank::description::{Neutral, Role, Source};
use crate::circuit::{Feed, Network, Phasor, three_phases};

/// How a three-phase bank was fed.
#[derive(Debug, Clone)]
pub(crate) struct ThreePhase {
    /// The node of the grounded neutral, where the bank has it.
    pub earth: Option<usize>,
    /// Ids of series resistors: they carry the alternating current of what lies behind them.
    carrying: Vec<String>,
    /// The states that the poles can leave; never empty.
    pub sequences: Vec<Sequence>,
}

/// One order in which the poles open.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Sequence {
    /// In words, such as `A (+) first, then B (+) with C (-)`.
    pub name: String,
    /// Which pole opens, and whether its charge is then at the positive crest.
    order: Vec<(usize, bool)>,
}

/// The node where stars meet whose neutral is grounded.
pub(crate) const EARTH: &str = "G";

impl ThreePhase {
    /// `None` for a bank that was charged from one voltage.
    pub fn of(bank: &Bank, model: &Model) -> Option<Self> {
        let description = bank.description();
        let Source::ThreePhase { neutral, .. } = description.charged_to.source else { return None };
        let earth = if neutral == Neutral::Grounded { model.find_node(EARTH) } else { None };
        let series = description.resistors.iter().filter(|r| r.role == Role::Series);
        let carrying = series.map(|r| r.id.clone()).collect();
        let mut three = ThreePhase { earth, carrying, sequences: Vec::new() };
        let signs_matter = model.own_voltages.iter().any(Option::is_some) || !model.sources.is_empty();
        let firsts: &[bool] = if signs_matter { &[true, false] } else { &[true] };
        let choices = match three.coupling(model) {
            Coupling::Isolated => isolated(),
            Coupling::Grounded => grounded(),
            Coupling::Apart => apart(),
        };
        for first in firsts {
            for order in &choices {
                // All polarities against that of the first.
                let order: Vec<(usize, bool)> = order.iter().map(|(pole, same)| (*pole, same == first)).collect();
                let name = three.name(bank, &order, choices.len());
                three.sequences.push(Sequence { name, order });
            }
        }
        Some(three)
    }

    /// How far the current of one pole depends on the others, from the structure of the network alone.
    fn coupling(&self, model: &Model) -> Coupling {
        let variation = Variation::default();
        let (network, feed) = self.fed(model, &variation, &model.nominal_point(), 1.0);
        let whole = network.fed_parts(&feed, None);
        let Some(earth) = self.earth.filter(|e| model.terminals.iter().any(|t| whole[*t] == whole[*e])) else {
            return Coupling::Isolated;
        };
        let legs = network.fed_parts(&feed, Some(earth));
        let label: Vec<usize> = model.terminals.iter().map(|t| legs[*t]).collect();
        let apart = label.iter().enumerate().all(|(i, l)| !label[..i].contains(l));
        if apart { Coupling::Apart } else { Coupling::Grounded }
    }

    /// The bank under a variation without what no step has connected, and what feeds it.
    fn fed(&self, model: &Model, variation: &Variation, point: &[f64], volts: f64) -> (Network, Feed) {
        let map = model.merged(variation);
        let poles = model.terminals.iter().zip(three_phases(volts)).map(|(n, phasor)| (map[*n], phasor)).collect();
        let ohms = model.ohms(variation, point, &[]);
        let there = model.resistors.iter().zip(ohms).filter(|(_, ohm)| ohm.is_finite());
        let carrying = there.filter(|(r, _)| self.carrying.contains(&r.id));
        let joined = carrying.map(|(r, _)| (map[r.a], map[r.b])).collect();
        (model.main_network(variation, point), Feed { poles, earth: self.earth.map(|n| map[n]), joined })
    }

    /// Potentials of all nodes: crest phasors while all poles are closed, and those that each sequence leaves.
    pub fn potentials(
        &self,
        model: &Model,
        before: &Variation,
        point: &[f64],
        volts: f64,
    ) -> (Vec<Phasor>, Vec<Vec<f64>>) {
        let (network, feed) = self.fed(model, before, point, volts);
        let mut alternating = network.fed_potentials(&feed);
        let mut left: Vec<Vec<f64>> =
            self.sequences.iter().map(|s| network.interrupted_potentials(&feed, &s.order)).collect();
        // Absorption branches are taken as fully charged: to what the state leaves, the worst that they can hold.
        let map = model.merged(before);
        for (inside, outside) in model.absorbing_nodes() {
            alternating[inside] = alternating[map[outside]];
            left.iter_mut().for_each(|v| v[inside] = v[map[outside]]);
        }
        (alternating, left)
    }

    fn name(&self, bank: &Bank, order: &[(usize, bool)], choices: usize) -> String {
        let terminals = &bank.description().terminals;
        let said = |(pole, positive): &(usize, bool)| {
            let name = terminals.get(*pole).map_or("?", String::as_str);
            format!("{name} ({})", if *positive { "+" } else { "-" })
        };
        let said: Vec<String> = order.iter().map(said).collect();
        match (said.as_slice(), choices) {
            // On an isolated bank the last two are one circuit: they open together.
            ([a, b, c], ISOLATED) => format!("{a} first, then {b} with {c}"),
            ([a, b, c], APART) => format!("{a}, {b}, {c} in any order"),
            (all, _) => format!("{} in this order", all.join(", ")),
        }
    }
}

enum Coupling {
    /// No earth among the capacitors: with two poles left, one current flows through both.
    Isolated,
    /// Every leg to earth by itself: the order does not matter.
    Apart,
    /// Legs to earth and between phases.
    Grounded,
}

const ISOLATED: usize = 6;
const APART: usize = 4;

type Order = [(usize, bool); 3];

/// Which pole is first, and the polarity of the two that are left, which have equal and opposite charges.
fn isolated() -> Vec<Order> {
    let orders = [[0, 1, 2], [1, 2, 0], [2, 0, 1]];
    let both = |[a, b, c]: [usize; 3]| [true, false].map(|plus| [(a, true), (b, plus), (c, !plus)]);
    orders.into_iter().flat_map(both).collect()
}

fn apart() -> Vec<Order> {
    polarities([0, 1, 2])
}

fn grounded() -> Vec<Order> {
    let orders = [[0, 1, 2], [0, 2, 1], [1, 0, 2], [1, 2, 0], [2, 0, 1], [2, 1, 0]];
    orders.into_iter().flat_map(polarities).collect()
}

fn polarities([a, b, c]: [usize; 3]) -> Vec<Order> {
    let all = [(true, true), (true, false), (false, true), (false, false)];
    all.map(|(second, third)| [(a, true), (b, second), (c, third)]).to_vec()
}

impl Model {
    /// The name of a state at isolation, where there are several.
    pub fn state_name(&self, sequence: usize) -> Option<String> {
        self.three_phase.as_ref().and_then(|three| three.sequences.get(sequence)).map(|s| s.name.clone())
    }

    /// The number of a state by its name.
    pub fn find_state(&self, name: Option<&str>) -> Option<usize> {
        let sequences = self.three_phase.iter().flat_map(|three| &three.sequences);
        sequences.into_iter().position(|s| Some(s.name.as_str()) == name)
    }
}
