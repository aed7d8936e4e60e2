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
}

/// One part failed, and the scenarios of which the worst counts.
#[derive(Debug, Clone)]
pub(crate) struct Fault {
    /// `R1 open`, `R2 absent`, `C1 shorted`, `C1 one unit shorted`; in a three-phase bank `CB.AB open` too.
    pub name: String,
    /// The part.
    pub id: String,
    /// What it can look like: failed long before isolation (the voltages have settled without it), or at isolation.
    pub scenarios: Vec<Scenario>,
}

impl Scenario {
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
        let mut scenarios = vec![Scenario::settled(lost)];
        // A part breaks at a moment; leakage that is absent was never there. What no alternating current passes has no
        // say in the state of a three-phase bank at isolation: both moments are one.
        if resistor.role != Role::Leakage && (model.three_phase.is_none() || resistor.role == Role::Series) {
            scenarios.push(at_isolation);
        }
        faults.push(Fault { name: format!("{} {word}", resistor.id), id: resistor.id.clone(), scenarios });
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
            });
        }
        if model.three_phase.is_some() {
            // A fuse has blown, or the leg has come open: long before isolation, and nobody noticed.
            let variation = Variation { capacitor: Some((index, 0.0)), ..Variation::default() };
            faults.push(Fault {
                name: format!("{} open", capacitor.id),
                id: capacitor.id.clone(),
                scenarios: vec![Scenario::settled(variation)],
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
            });
        }
    }
    faults
}
