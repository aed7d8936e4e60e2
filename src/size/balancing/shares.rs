//! How the units of a string share its voltage with resistors across them: the questions to the engine.

use super::string::Member;
use super::units::Bears;
use crate::bank::Bank;
use crate::bank::description::{Capacitor, Description, Resistor};
use crate::check::EngineError;
use crate::discharge::{
    self, Method, Model, Risen, RisenFigure, Settled, SettledFigure, Strung, Unit, Variation, Worst,
};
use crate::quantity::Quantity;
use crate::size::error::SizeError;

/// A string with its new resistors in the bank, in two models of which neither has dielectric absorption: the settled
/// division asks for no capacitance, so that its model has none loose.
#[derive(Clone)]
pub(super) struct Shares {
    settled: Model,
    risen: Model,
    units: Vec<Unit>,
    resistors: Vec<usize>,
    /// For every unit the first that is like it: in a plain chain what holds of the one holds of the other, since the
    /// order of units changes nothing.
    like: Vec<usize>,
}

/// Greatest voltages in volt of every unit after a fast charge.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct AfterFastCharge {
    /// Right after it.
    pub divided: Vec<f64>,
    /// From then on.
    pub greatest: Vec<f64>,
    /// True where no corner of the tolerances was left out in finding them.
    pub every_corner: bool,
}

impl Shares {
    /// The bank of `description`, in which `resistors` lie across the units.
    pub fn new(
        description: &Description,
        members: &[Member],
        bears: &[Bears],
        resistors: &[Resistor],
    ) -> Result<Self, SizeError> {
        let risen = model(&without_absorption(description, members))?;
        let settled = model(&without_spread_of_capacitors(&without_absorption(description, members)))?;
        let node = |name: &str| risen.find_node(name).unwrap_or_default();
        let unit = |(member, bears): (&Member, &Bears)| Unit {
            top: node(&member.across[0]),
            bottom: node(&member.across[1]),
            leakage: bears.leakage.si(),
        };
        let units = members.iter().zip(bears).map(unit).collect();
        let resistors = resistors.iter().filter_map(|r| risen.find_resistor(&r.id)).collect();
        let mut shares = Shares { settled, risen, units, resistors, like: (0..members.len()).collect() };
        if shares.is_chain() {
            let parts: Vec<_> = members.iter().zip(bears).map(|(m, b)| (parts_across(description, m), b)).collect();
            shares.like = parts.iter().map(|this| parts.iter().position(|p| p == this).unwrap_or_default()).collect();
        }
        Ok(shares)
    }

    /// The same with every new resistor of so many ohm at its marked value; infinite is without them.
    pub fn with(&self, ohms: f64) -> Self {
        let mut shares = self.clone();
        for model in [&mut shares.settled, &mut shares.risen] {
            self.resistors.iter().for_each(|r| model.resistors[*r].nominal = ohms);
        }
        shares
    }

    /// The same with units that don't leak.
    pub fn without_leakage(&self) -> Self {
        let mut shares = self.clone();
        shares.units.iter_mut().for_each(|unit| unit.leakage = 0.0);
        shares
    }

    /// True where the string is a plain chain, of which more is proven than of other networks.
    pub fn is_chain(&self) -> bool {
        self.strung(&self.risen, 0.0, &Variation::default()).is_chain()
    }

    fn strung<'a>(&'a self, model: &'a Model, volts: f64, variation: &'a Variation) -> Strung<'a> {
        Strung { model, units: &self.units, resistors: &self.resistors, volts, variation }
    }

    /// Greatest settled voltage in volt of every unit, infinite where nothing but leakage decides it; `open` is a new
    /// resistor by its number and the factor on its resistance.
    pub fn settled(&self, volts: f64, open: Option<(usize, f64)>) -> Result<Vec<f64>, EngineError> {
        let resistor = open.and_then(|(number, factor)| Some((*self.resistors.get(number)?, factor)));
        let variation = Variation { resistor, ..Variation::default() };
        // With a resistor open, units are no longer alike.
        let asked = if open.is_some() { (0..self.units.len()).collect() } else { self.unlike() };
        let figures: Vec<SettledFigure> = asked.into_iter().map(SettledFigure::Unit).collect();
        let study = Settled { strung: self.strung(&self.settled, volts, &variation), figures: &figures };
        let found = discharge::worst(&study).map_err(EngineError::of("the settled division"))?;
        let found = found.into_iter().map(|w| w.value).collect();
        Ok(if open.is_some() { found } else { self.for_all(found) })
    }

    /// Greatest power in watt of all new resistors together, without leakage.
    pub fn loss_highest(&self, volts: f64) -> Result<f64, EngineError> {
        let (variation, figures) = (Variation::default(), [SettledFigure::Power]);
        let study = Settled { strung: self.strung(&self.settled, volts, &variation), figures: &figures };
        let found = discharge::worst(&study).map_err(EngineError::of("the standing loss"))?;
        Ok(found.first().map_or(f64::NAN, |w| w.value))
    }

    /// The same with every value nominal.
    pub fn loss_nominal(&self, volts: f64) -> Result<f64, EngineError> {
        let (variation, figures) = (Variation::default(), [SettledFigure::Power]);
        let study = Settled { strung: self.strung(&self.settled, volts, &variation), figures: &figures };
        let found = discharge::nominal(&study).map_err(EngineError::of("the standing loss"))?;
        Ok(found.first().copied().unwrap_or(f64::NAN))
    }

    /// Greatest voltages in volt of every unit right after a fast charge: no resistor has a say in them.
    pub fn divided(&self, volts: f64) -> Result<Vec<f64>, EngineError> {
        let figures: Vec<RisenFigure> = self.unlike().into_iter().map(RisenFigure::Divided).collect();
        Ok(self.for_all(self.risen(volts, &figures)?.into_iter().map(|w| w.value).collect()))
    }

    /// The same, and the greatest from then on.
    pub fn after_fast_charge(&self, volts: f64) -> Result<AfterFastCharge, EngineError> {
        let divided = self.divided(volts)?;
        let figures: Vec<RisenFigure> = self.unlike().into_iter().map(RisenFigure::Greatest).collect();
        let found = self.risen(volts, &figures)?;
        let every_corner = !found.iter().any(|w| matches!(w.method, Method::Searched { .. }));
        // The ends of the way count where a search inside the box has not come upon them.
        let ends = divided.iter().zip(self.settled(volts, None)?).map(|(divided, settled)| divided.max(settled));
        let found = self.for_all(found.into_iter().map(|w| w.value).collect());
        let greatest = found.into_iter().zip(ends).map(|(found, ends)| found.max(ends)).collect();
        Ok(AfterFastCharge { divided, greatest, every_corner })
    }

    /// Units of which no other before is like them.
    fn unlike(&self) -> Vec<usize> {
        (0..self.units.len()).filter(|k| self.like[*k] == *k).collect()
    }

    /// Figures of all units from those of the units that are unlike.
    fn for_all(&self, of_unlike: Vec<f64>) -> Vec<f64> {
        let unlike = self.unlike();
        let of = |k: &usize| unlike.iter().position(|u| u == k).and_then(|at| of_unlike.get(at)).copied();
        self.like.iter().map(|k| of(k).unwrap_or(f64::NAN)).collect()
    }

    fn risen(&self, volts: f64, figures: &[RisenFigure]) -> Result<Vec<Worst>, EngineError> {
        let variation = Variation::default();
        let study = Risen { strung: self.strung(&self.risen, volts, &variation), figures };
        discharge::worst(&study).map_err(EngineError::of("the way after a fast charge"))
    }
}

/// What lies across a unit, without the names.
fn parts_across(description: &Description, member: &Member) -> (Vec<Capacitor>, Vec<Resistor>) {
    let nameless = || (String::new(), [String::new(), String::new()]);
    let capacitors = description.capacitors.iter().filter(|c| member.capacitors.contains(&c.id));
    let of_capacitor = |c: &Capacitor| {
        let (id, across) = nameless();
        Capacitor { id, across, ..c.clone() }
    };
    let [a, b] = &member.across;
    let is_across =
        |r: &&Resistor| (r.across[0] == *a && r.across[1] == *b) || (r.across[0] == *b && r.across[1] == *a);
    let of_resistor = |r: &Resistor| {
        let (id, across) = nameless();
        Resistor { id, across, ..r.clone() }
    };
    let resistors = description.resistors.iter().filter(is_across);
    (capacitors.map(of_capacitor).collect(), resistors.map(of_resistor).collect())
}

fn model(description: &Description) -> Result<Model, SizeError> {
    let bank = Bank::new(description.clone()).map_err(SizeError::Placed)?;
    Ok(Model::new(&bank).map_err(EngineError::of("the string"))?)
}

/// Without absorption, and without tolerances of parts that have no say in the string: those across the terminals.
fn without_absorption(description: &Description, members: &[Member]) -> Description {
    let mut plain = description.clone();
    let of_string = |id: &str| members.iter().any(|m| m.capacitors.iter().any(|c| c == id));
    let terminals = description.terminals.clone();
    let held = |across: &[String; 2]| across.iter().all(|node| terminals.contains(node));
    for c in &mut plain.capacitors {
        (c.dielectric, c.absorption, c.charged_to) = (None, None, None);
        if held(&c.across) && !of_string(&c.id) {
            (c.tolerance, c.ageing, c.tempco) = (None, None, None);
        }
    }
    for r in plain.resistors.iter_mut().filter(|r| held(&r.across)) {
        (r.tolerance, r.ageing, r.tempco) = (None, None, None);
    }
    plain
}

fn without_spread_of_capacitors(description: &Description) -> Description {
    let mut plain = description.clone();
    plain.capacitors.iter_mut().for_each(|c| (c.tolerance, c.ageing, c.tempco) = (None, None, None));
    plain
}
