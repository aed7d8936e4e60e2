//! The bank with resistors of one marked value across all units: what every demand comes to there.
//!
//! Each of them has the tolerance of a design, and lies anywhere in it on its own: what unequal resistors do to the
//! sharing is no matter of one actual value. So there is a window for every tolerance, over the marked resistance.

use super::shares::{AfterFastCharge, Shares};
use super::{Job, across_units};
use crate::bank::Bank;
use crate::bank::description::Resistor;
use crate::check::{Answers, EngineError, FaultAnswers, LimitChecks};
use crate::discharge::{Model, faults};
use crate::quantity::{Quantity, Resistance, Tolerance};
use crate::size::error::SizeError;
use crate::size::scan::Probe;

/// What was found at one marked resistance, in SI base units, greatest over all tolerances.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Point {
    /// Marked resistance of one array.
    pub ohms: f64,
    /// Settled voltage of every unit.
    pub settled: Vec<f64>,
    /// Its voltages after a fast charge; `None` where that was not asked, or leads nowhere.
    pub fast: Option<AfterFastCharge>,
    /// Power of one array at the highest voltage of a unit.
    pub power: f64,
    /// Power of all of them together.
    pub loss: f64,
    /// For every limit that counts: from when on it holds and by when it has to; infinite where it never holds.
    pub limits: Vec<(f64, f64)>,
}

impl Point {
    /// Highest voltage of every unit.
    pub fn highest(&self) -> Vec<f64> {
        match &self.fast {
            Some(fast) => fast.greatest.iter().zip(&self.settled).map(|(a, b)| a.max(*b)).collect(),
            None => self.settled.clone(),
        }
    }
}

/// A bank with resistors of one tolerance across its units, their value still open.
pub(super) struct Fitted<'a> {
    job: &'a Job,
    shares: Shares,
    /// The lowest that an actual resistance can be, as a share of the marked one.
    lowest: f64,
    /// The bank as a plan sees it, with the numbers of the new resistors; `None` where no limit counts.
    planned: Option<(Bank, Model, Vec<usize>)>,
}

impl<'a> Fitted<'a> {
    /// The bank with arrays of so many strings of a tolerance across its units.
    pub fn new(job: &'a Job, tolerance: Option<Tolerance>, parallel: u32) -> Result<Self, SizeError> {
        // A marked value that leaves the whole array at 1 ohm.
        let value = Resistance::from_si(f64::from(parallel));
        let resistors = across_units(job, &Resistor { value, tolerance, parallel, ..job.place.clone() });
        let description = job.with(&resistors);
        let shares = Shares::new(&description, &job.members, &job.bears, &resistors)?;
        let planned = if job.counted.is_empty() {
            None
        } else {
            let bank = Bank::new(description).map_err(SizeError::Placed)?;
            let model = Model::new(&bank).map_err(EngineError::of("absorption"))?;
            let numbers = resistors.iter().filter_map(|r| model.find_resistor(&r.id)).collect();
            Some((bank, model, numbers))
        };
        Ok(Fitted { job, shares, lowest: tolerance.map_or(1.0, |t| t.lowest_factor()), planned })
    }

    /// The highest settled voltage in volt of all units if none of them leaked.
    pub fn without_leakage(&self, ohms: f64) -> Result<f64, EngineError> {
        let settled = self.shares.without_leakage().with(ohms).settled(self.job.volts_highest(), None)?;
        Ok(settled.into_iter().fold(0.0, f64::max))
    }

    /// True where the string is a plain chain.
    pub fn is_chain(&self) -> bool {
        self.shares.is_chain()
    }

    fn limits(&self, ohms: f64) -> Result<Vec<(f64, f64)>, EngineError> {
        let Some((bank, model, numbers)) = &self.planned else { return Ok(Vec::new()) };
        let mut model = model.clone();
        numbers.iter().for_each(|r| model.resistors[*r].nominal = ohms);
        let limits = LimitChecks::new(bank, &model)?;
        let healthy = Answers::healthy(bank, &model, limits.bound_figures())?;
        let mut found = limits.holds(&healthy);
        let asked: Vec<bool> = bank.description().limits.iter().map(|l| l.single_fault).collect();
        if self.job.counted.iter().any(|i| asked.get(*i) == Some(&true)) {
            let under = FaultAnswers::all(bank, &model, faults(bank, &model), &limits.fault_figures(), &healthy)?;
            for ((one, other), asked) in found.iter_mut().zip(limits.holds_under(&under)).zip(asked) {
                if let Some((held, _)) = one.as_mut().filter(|_| asked) {
                    *held = held.max(other.map_or(f64::INFINITY, |(held, _)| held));
                }
            }
        }
        Ok(self.job.counted.iter().filter_map(|i| found.get(*i).copied().flatten()).collect())
    }
}

impl Probe for Fitted<'_> {
    type Point = Point;

    fn at(&self, ohms: f64) -> Result<Point, EngineError> {
        let shares = self.shares.with(ohms);
        let volts = self.job.volts_highest();
        let settled = shares.settled(volts, None)?;
        // Without a resistor leakage alone decides where a unit settles: there is no way to follow.
        let follows = self.job.fast_charge && settled.iter().all(|v| v.is_finite());
        let fast = if follows { Some(shares.after_fast_charge(volts)?) } else { None };
        let loss = if ohms.is_finite() { shares.loss_highest(volts)? } else { 0.0 };
        let mut point = Point { ohms, settled, fast, power: 0.0, loss, limits: self.limits(ohms)? };
        let highest = point.highest().into_iter().fold(0.0, f64::max);
        point.power = if ohms.is_finite() { highest * highest / (ohms * self.lowest) } else { 0.0 };
        Ok(point)
    }
}
