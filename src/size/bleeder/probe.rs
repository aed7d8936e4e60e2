//! The bank with a resistor of any actual value at the place in question: what every demand comes to there.
//!
//! The resistor has no tolerance of its own here. A design's worst case over its own tolerance is the worst over the
//! actual values that it may have, so a design does the job where ALL of these do; no law of how a figure changes with
//! resistance is relied on.

use super::bearing::{Bearing, Discharge};
use crate::bank::Bank;
use crate::bank::description::{Description, Resistor};
use crate::check::{Answers, EngineError, FaultAnswers, LimitChecks};
use crate::discharge::{Body, Figure, Model, faults};
use crate::quantity::{Quantity, Resistance};
use crate::size::error::SizeError;
use crate::size::scan::Probe;

/// What was found at one actual resistance, in SI base units, greatest over the tolerances of all other parts.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Point {
    /// For every limit that counts: from when on it holds and by when it has to; infinite where it never holds. Single
    /// faults are in it where the limit asks for them.
    pub limits: Vec<(f64, f64)>,
    /// Power in the resistor before isolation, all legs of a three-phase one together.
    pub standing: f64,
    /// The greatest of its legs': what one array bears.
    pub standing_leg: f64,
    /// Greatest current through it.
    pub current: f64,
    /// Greatest voltage across it.
    pub voltage: f64,
    /// One discharge, where a contact connects it; of a three-phase one the worst of each figure among its legs.
    pub discharge: Discharge,
    /// What the largest arrays bear least of that discharge: found over allowed. 0 without a contact.
    pub burden: f64,
    /// Energy of one cycle over its length, of one leg. 0 without a contact or a length.
    pub average: f64,
}

/// A bank with the new resistor in it, its value still open.
pub(super) struct Fitted {
    bank: Bank,
    model: Model,
    /// The resistor, or its legs in a three-phase bank.
    legs: Vec<usize>,
    /// Which limits of the bank count.
    counted: Vec<usize>,
    /// What elements bear of a discharge, where a contact connects the resistor; and how far discharges are apart.
    bearing: Option<Bearing>,
    every: Option<f64>,
}

impl Fitted {
    /// The bank of `description` with `part` in it; of the part's array only the number of strings matters, for what
    /// one open element leaves.
    pub fn new(
        description: &Description,
        part: &Resistor,
        counted: Vec<usize>,
        bearing: Option<Bearing>,
    ) -> Result<Self, SizeError> {
        let mut with = description.clone();
        // A marked value that leaves the whole array at 1 ohm.
        let value = Resistance::from_si(f64::from(part.parallel));
        with.resistors.push(Resistor { value, tolerance: None, series: 1, ..part.clone() });
        let bank = Bank::new(with).map_err(SizeError::Placed)?;
        let ids: Vec<String> = bank.legs(&part.id).into_iter().map(|(id, _)| id).collect();
        // As a plan does: from here on every part is a plain one.
        let bank = bank.expanded();
        let failed = EngineError::of("absorption");
        let model = Model::new(&bank).map_err(failed)?;
        let legs = ids.iter().filter_map(|id| model.find_resistor(id)).collect();
        let every = part.switched.and_then(|contact| contact.every).map(Quantity::si);
        Ok(Fitted { bank, model, legs, counted, bearing, every })
    }
}

impl Fitted {
    /// A body of 1 K/W for every time constant that matters: a rise goes with the thermal resistance.
    fn bodies(&self) -> impl Iterator<Item = Body> + '_ {
        let times = self.bearing.iter().flat_map(Bearing::times);
        times.map(|time_constant| Body { kelvin_per_watt: 1.0, time_constant: *time_constant })
    }

    /// What has to be known of a discharge; nothing without a contact.
    fn discharge_figures(&self) -> Vec<Figure> {
        if self.bearing.is_none() {
            return Vec::new();
        }
        let of = |resistor: usize| {
            let own = [Figure::PeakPower { resistor }, Figure::ResistorEnergy { resistor }].into_iter();
            let cycle = self.every.map(|_| Figure::CycleEnergy { resistor });
            own.chain(cycle).chain(self.bodies().map(move |body| Figure::BodyRise { resistor, body }))
        };
        self.legs.iter().flat_map(|leg| of(*leg)).collect()
    }

    fn discharge(&self, answers: &Answers) -> Discharge {
        if self.bearing.is_none() {
            return Discharge::default();
        }
        let worst =
            |of: &dyn Fn(usize) -> Figure| self.legs.iter().map(|leg| answers.worst(of(*leg))).fold(0.0, f64::max);
        Discharge {
            peak: worst(&|resistor| Figure::PeakPower { resistor }),
            energy: worst(&|resistor| Figure::ResistorEnergy { resistor }),
            heat: self.bodies().map(|body| worst(&|resistor| Figure::BodyRise { resistor, body })).collect(),
        }
    }
}

impl Probe for Fitted {
    type Point = Point;

    fn at(&self, ohms: f64) -> Result<Point, EngineError> {
        let mut model = self.model.clone();
        for leg in &self.legs {
            model.resistors[*leg].nominal = ohms;
        }
        let limits = LimitChecks::new(&self.bank, &model)?;
        let standing = |leg: &usize| Figure::StandingPower { resistor: *leg };
        let current = |leg: &usize| Figure::PeakCurrent { resistor: *leg };
        let voltage = |leg: &usize| Figure::ResistorVoltage { resistor: *leg };
        let own: Vec<Figure> = self.legs.iter().flat_map(|leg| [standing(leg), current(leg), voltage(leg)]).collect();
        let own = [own, self.discharge_figures()].concat();
        let bounds = limits.bound_figures();
        let healthy = Answers::healthy(&self.bank, &model, [bounds, own].concat())?;
        let mut found = limits.holds(&healthy);
        let asked: Vec<bool> = self.bank.description().limits.iter().map(|l| l.single_fault).collect();
        if self.counted.iter().any(|i| asked.get(*i) == Some(&true)) {
            let all = faults(&self.bank, &model);
            let under = FaultAnswers::all(&self.bank, &model, all, &limits.fault_figures(), &healthy)?;
            for ((one, other), asked) in found.iter_mut().zip(limits.holds_under(&under)).zip(asked) {
                if let Some((held, _)) = one.as_mut().filter(|_| asked) {
                    *held = held.max(other.map_or(f64::INFINITY, |(held, _)| held));
                }
            }
        }
        let counted = self.counted.iter().filter_map(|i| found.get(*i).copied().flatten());
        let discharge = self.discharge(&healthy);
        let energy = |leg: &usize| healthy.worst(Figure::CycleEnergy { resistor: *leg });
        Ok(Point {
            burden: self.bearing.as_ref().map_or(0.0, |bearing| bearing.ratio(&discharge)),
            average: self.every.map_or(0.0, |every| self.legs.iter().map(energy).fold(0.0, f64::max) / every),
            discharge,
            limits: counted.collect(),
            standing: self.legs.iter().map(|leg| healthy.worst(standing(leg))).sum(),
            standing_leg: self.legs.iter().map(|leg| healthy.worst(standing(leg))).fold(0.0, f64::max),
            current: self.legs.iter().map(|leg| healthy.worst(current(leg))).fold(0.0, f64::max),
            voltage: self.legs.iter().map(|leg| healthy.worst(voltage(leg))).fold(0.0, f64::max),
        })
    }
}
