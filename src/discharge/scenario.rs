//! What may have failed.

use super::model::{Model, Variation};
use crate::bank::Bank;
use crate::bank::description::Role;

/// A bank with every part healthy, or with one part failed: what stood before isolation, and what stands after.
#[derive(Debug, Clone, Default)]
pub(crate) struct Scenario {
    pub before: Variation,
    pub after: Variation,
    /// Own voltages of capacitors are dropped: all take the operating point of the failed circuit.
    pub drops_own_voltages: bool,
    /// Sinks that draw nothing, by number.
    pub idle_sinks: Vec<usize>,
    /// Only this one of the states that the bank can have at isolation (those of [`super::case::Start`]); `None` for all of them.
    pub state: Option<usize>,
}

/// Up to this many sinks that no wait relies on, every choice of which of them draw is tried; beyond, none, all, and
/// each alone.
const MOST_SINK_CHOICES: usize = 4;

/// The ways in which the healthy bank may go: with and without the sinks that no wait relies on. The first is without
/// any of them.
pub(crate) fn healthy(model: &Model) -> Vec<Scenario> {
    Scenario::default().with_and_without_sinks(model)
}

/// What the name of a fault ends with where a bleeder's contact has failed.
pub(crate) const CONTACT_FAULT: &str = "contact does not close";

/// One part failed, and the scenarios of which the worst counts.
#[derive(Debug, Clone)]
pub(crate) struct Fault {
    /// `R1 open`, `R2 absent`, `RS contact does not close`, `C1 shorted`, `C1 one unit shorted`, `K1 dead`; in a
    /// three-phase bank `CB.AB open` too.
    pub name: String,
    /// The part.
    pub id: String,
    /// What it can look like: failed long before isolation (the voltages have settled without it), or at isolation.
    pub scenarios: Vec<Scenario>,
    /// It can come about at any moment after isolation as well: what is lost then.
    pub later: Option<Variation>,
}

impl Scenario {
    /// Which sinks draw from isolation on.
    pub fn drawing(&self, model: &Model) -> Vec<bool> {
        (0..model.loads.len()).map(|index| !self.idle_sinks.contains(&index)).collect()
    }

    /// The same with and without every sink that nobody may count on: no wait is shorter than without it, and none
    /// than with it.
    fn with_and_without_sinks(self, model: &Model) -> Vec<Scenario> {
        let uncounted: Vec<usize> = (0..model.loads.len()).filter(|index| !model.loads[*index].counted).collect();
        let idle: Vec<Vec<usize>> = if uncounted.len() <= MOST_SINK_CHOICES {
            let chosen = |mask: usize| {
                uncounted.iter().enumerate().filter(move |(at, _)| mask >> at & 1 == 1).map(|(_, index)| *index)
            };
            (0..1usize << uncounted.len()).rev().map(|mask| chosen(mask).collect()).collect()
        } else {
            let but_one = |kept: usize| uncounted.iter().copied().filter(|index| *index != kept).collect();
            let each: Vec<Vec<usize>> = uncounted.iter().map(|kept| but_one(*kept)).collect();
            [vec![uncounted.clone(), Vec::new()], each].concat()
        };
        let with = |idle: Vec<usize>| Scenario {
            idle_sinks: self.idle_sinks.iter().copied().chain(idle).collect(),
            ..self.clone()
        };
        idle.into_iter().map(with).collect()
    }

    fn settled(variation: Variation) -> Self {
        Scenario { before: variation.clone(), after: variation, ..Scenario::default() }
    }
}

/// Every single fault, in the order of the file, resistors first.
pub(crate) fn faults(bank: &Bank, model: &Model) -> Vec<Fault> {
    let mut faults = Vec::new();
    for resistor in bank.description().resistors.iter().filter(|r| r.role.always_connected()) {
        let Some(index) = model.find_resistor(&resistor.id) else { continue };
        let word = if resistor.role == Role::Leakage { "absent" } else { "open" };
        // One element open: one string of the parallel strings is lost.
        let strings = f64::from(resistor.parallel);
        let factor = if resistor.parallel > 1 { strings / (strings - 1.0) } else { f64::INFINITY };
        let factor = if resistor.role == Role::Leakage { f64::INFINITY } else { factor };
        let lost = Variation { resistor: Some((index, factor)), ..Variation::default() };
        let at_isolation = Scenario { after: lost.clone(), ..Scenario::default() };
        let mut scenarios = vec![Scenario::settled(lost.clone())];
        // A part breaks at a moment; leakage that is absent was never there. What no alternating current passes has no
        // say in the state of a three-phase bank at isolation: both moments are one.
        // Nor has what no contact connects before it.
        let counts_before = model.three_phase.is_none() || resistor.role == Role::Series;
        if resistor.role != Role::Leakage && resistor.switched.is_none() && counts_before {
            scenarios.push(at_isolation);
        }
        let later = (resistor.role != Role::Leakage).then_some(lost);
        faults.push(Fault { name: format!("{} {word}", resistor.id), id: resistor.id.clone(), scenarios, later });
        if resistor.switched.is_some() {
            let never = Variation { resistor: Some((index, f64::INFINITY)), ..Variation::default() };
            faults.push(Fault {
                name: format!("{} {CONTACT_FAULT}", resistor.id),
                id: resistor.id.clone(),
                scenarios: vec![Scenario::settled(never)],
                later: None,
            });
        }
    }
    for (index, capacitor) in bank.description().capacitors.iter().enumerate() {
        let part = &model.capacitors[index];
        let earth = model.three_phase.as_ref().and_then(|three| three.earth);
        let is_held = |node: usize| model.terminals.contains(&node) || earth == Some(node);
        if !(is_held(part.a) && is_held(part.b)) {
            let variation = Variation { shorted: Some(index), ..Variation::default() };
            let scenario = Scenario { drops_own_voltages: true, ..Scenario::settled(variation) };
            faults.push(Fault {
                name: format!("{} shorted", capacitor.id),
                id: capacitor.id.clone(),
                scenarios: vec![scenario],
                later: None,
            });
        }
        if model.three_phase.is_some() {
            // A fuse has blown, or the leg has come open: long before isolation, and nobody noticed.
            let variation = Variation { capacitor: Some((index, 0.0)), ..Variation::default() };
            faults.push(Fault {
                name: format!("{} open", capacitor.id),
                id: capacitor.id.clone(),
                scenarios: vec![Scenario::settled(variation)],
                later: None,
            });
        }
        if capacitor.series > 1 {
            let groups = f64::from(capacitor.series);
            let variation = Variation { capacitor: Some((index, groups / (groups - 1.0))), ..Variation::default() };
            faults.push(Fault {
                name: format!("{} one unit shorted", capacitor.id),
                id: capacitor.id.clone(),
                // Its voltage is unchanged: the units that are left carry what the string carried.
                scenarios: vec![Scenario { after: variation, ..Scenario::default() }],
                later: None,
            });
        }
    }
    for (index, load) in model.loads.iter().enumerate().filter(|(_, load)| load.counted) {
        let scenario = Scenario { idle_sinks: vec![index], ..Scenario::default() };
        faults.push(Fault {
            name: format!("{} dead", load.id),
            id: load.id.clone(),
            scenarios: vec![scenario],
            later: None,
        });
    }
    for fault in &mut faults {
        let scenarios = std::mem::take(&mut fault.scenarios).into_iter();
        fault.scenarios = scenarios.flat_map(|s| s.with_and_without_sinks(model)).collect();
    }
    faults
}

/// Every two of `single` at the same time, in their order; two that can't be at once (of one part, or shorts that make
/// the terminals one) are left out.
pub(crate) fn pairs_of_faults(model: &Model, single: &[Fault]) -> Vec<Fault> {
    let mut pairs = Vec::new();
    for (at, first) in single.iter().enumerate() {
        for second in single[at + 1..].iter().filter(|f| f.id != first.id) {
            let together = |x: &Scenario, y: &Scenario| Scenario {
                before: both(&x.before, &y.before),
                after: both(&x.after, &y.after),
                drops_own_voltages: x.drops_own_voltages || y.drops_own_voltages,
                idle_sinks: [&x.idle_sinks[..], &y.idle_sinks[..]].concat(),
                state: None,
            };
            let scenarios: Vec<Scenario> = first
                .scenarios
                .iter()
                .flat_map(|x| second.scenarios.iter().map(move |y| together(x, y)))
                .filter(|s| keeps_terminals(model, &s.after))
                .collect();
            if !scenarios.is_empty() {
                let name = format!("{} and {}", first.name, second.name);
                pairs.push(Fault { name, id: first.id.clone(), scenarios, later: None });
            }
        }
    }
    pairs
}

/// Two variations as one.
fn both(first: &Variation, second: &Variation) -> Variation {
    if *first == Variation::default() {
        return second.clone();
    }
    Variation { also: Some(Box::new(second.clone())), ..first.clone() }
}

fn keeps_terminals(model: &Model, variation: &Variation) -> bool {
    let map = model.merged(variation);
    let terminals = &model.terminals;
    (0..terminals.len()).all(|i| (0..i).all(|j| map[terminals[i]] != map[terminals[j]]))
}
