//! One design in the bank: the full plan with it, and whether it does what was asked.

use super::arrays::Design;
use super::request::{Ask, SizeError};
use super::result::{Candidate, LimitHeld};
use crate::bank::Bank;
use crate::bank::description::{Description, Resistor};
use crate::bank::file::resistor_text;
use crate::check::{Answers, EngineError, Verdict};
use crate::discharge::{Figure, Model};
use crate::finding::Findings;
use crate::plan::{Options, Plan, ResistorResult, plan};
use crate::quantity::{Current, Power, Quantity, Resistance, Time};

/// Hours of a year, for what a standing loss costs (365 days).
const HOURS_A_YEAR: f64 = 8760.0;

/// A design that was tried.
pub(super) struct Trial {
    pub candidate: Candidate,
    /// Did it do all that was asked?
    pub passes: bool,
}

/// Puts a design into the bank and makes the full plan. `counted` are the limits that were asked for.
pub(super) fn tried(
    description: &Description,
    ask: &Ask,
    design: &Design,
    resistor: Resistor,
    counted: &[usize],
) -> Result<Trial, SizeError> {
    let mut with = description.clone();
    with.resistors.push(resistor.clone());
    let bank = Bank::new(with).map_err(SizeError::Placed)?;
    let legs: Vec<String> = bank.legs(&resistor.id).into_iter().map(|(id, _)| id).collect();
    let plan = plan(&bank, "", Findings::new(), Options::default())?;
    let whole = Whole::of(&bank.expanded(), &legs)?;
    let candidate = candidate(ask, design, &resistor, &legs, &plan, counted, &whole);
    let passes = passes(ask, &candidate, &plan, &legs, &whole);
    Ok(Trial { candidate, passes })
}

/// What the whole array has to bear; a plan tells of one element.
struct Whole {
    loss_highest: f64,
    loss_nominal: f64,
    current: f64,
}

impl Whole {
    fn of(bank: &Bank, legs: &[String]) -> Result<Self, EngineError> {
        let model = Model::new(bank).map_err(EngineError::of("absorption"))?;
        let legs: Vec<usize> = legs.iter().filter_map(|id| model.find_resistor(id)).collect();
        let standing = |leg: &usize| Figure::StandingPower { resistor: *leg };
        let current = |leg: &usize| Figure::PeakCurrent { resistor: *leg };
        let figures = legs.iter().flat_map(|leg| [standing(leg), current(leg)]).collect();
        let answers = Answers::healthy(bank, &model, figures)?;
        Ok(Whole {
            loss_highest: legs.iter().map(|leg| answers.worst(standing(leg))).sum(),
            loss_nominal: legs.iter().map(|leg| answers.nominal(standing(leg))).sum(),
            current: legs.iter().map(|leg| answers.worst(current(leg))).fold(0.0, f64::max),
        })
    }
}

/// A limit is only kept by a comparison of finite numbers, here as in a plan.
fn at_most(found: f64, allowed: f64) -> bool {
    Verdict::at_most(found, allowed) == Verdict::Met
}

fn passes(ask: &Ask, candidate: &Candidate, plan: &Plan, legs: &[String], whole: &Whole) -> bool {
    let limits = candidate.limits.iter().all(|l| l.met == Some(true) && l.single_fault_met != Some(false));
    let results: Vec<&ResistorResult> = plan.resistors.iter().filter(|r| legs.contains(&r.id)).collect();
    let rated = results.len() == legs.len()
        && results.iter().all(|r| {
            let with_margin = r
                .allowed_power
                .zip(r.continuous_power)
                .is_none_or(|(allowed, found)| at_most(found.si(), allowed.si() * (1.0 - ask.margin)));
            with_margin && r.checks.iter().all(|c| c.verdict != Verdict::NotMet)
        });
    let loss = ask.max_loss.is_none_or(|most| at_most(whole.loss_highest, most.si()));
    let current = ask.max_current.is_none_or(|most| at_most(whole.current, most.si()));
    limits && rated && loss && current
}

fn candidate(
    ask: &Ask,
    design: &Design,
    resistor: &Resistor,
    legs: &[String],
    plan: &Plan,
    counted: &[usize],
    whole: &Whole,
) -> Candidate {
    let element = &ask.elements[design.element];
    // Of the legs of a three-phase resistor, the one that carries most.
    let standing = |r: &&ResistorResult| r.continuous_power.map_or(0.0, Quantity::si);
    let own = plan.resistors.iter().filter(|r| legs.contains(&r.id));
    let result = own.max_by(|x, y| standing(x).total_cmp(&standing(y)));
    let fault = |name: &str| name.strip_suffix(" open").is_some_and(|id| legs.iter().any(|leg| leg == id));
    let limits = counted.iter().filter_map(|i| plan.limits.get(*i)).map(|l| LimitHeld {
        id: l.id.clone(),
        across: l.across.clone(),
        within: l.within,
        holds_from: l.holds_from,
        met: l.met,
        // Only where it was asked for does a failed part decide.
        single_fault_met: l.single_fault_met.filter(|_| l.single_fault_asked),
    });
    let count = f64::from(design.count());
    Candidate {
        rank: 0,
        element: element.name.clone(),
        value: resistor.value,
        tolerance: resistor.tolerance,
        series: design.series,
        parallel: design.parallel,
        elements: design.count(),
        resistance: Resistance::from_si(design.value * f64::from(design.series) / f64::from(design.parallel)),
        pareto: design.pareto,
        loss_highest: Power::from_si(whole.loss_highest),
        loss_nominal: Power::from_si(whole.loss_nominal),
        energy_per_year_kwh: whole.loss_nominal * HOURS_A_YEAR / 1000.0,
        peak_current: Current::from_si(whole.current),
        element_power: result.and_then(|r| r.continuous_power),
        allowed_power: result.and_then(|r| r.allowed_power),
        element_voltage: result.and_then(|r| r.element_voltage),
        allowed_voltage: resistor.rating.voltage,
        element_energy: result.and_then(|r| r.energy),
        body_temperature: result.and_then(|r| r.body_temperature),
        wait: longest(plan.waits.iter().map(|w| w.keep)),
        open_wait: longest(plan.waits.iter().flat_map(|w| w.faults.iter().filter(|f| fault(&f.fault)).map(|f| f.wait))),
        limits: limits.collect(),
        checks: result.map_or_else(Vec::new, |r| r.checks.clone()),
        verdict: plan.verdict,
        not_met: not_met(plan),
        mass: element.mass.map(|m| m * count),
        price: element.price.map(|p| p * count),
        part: resistor_text(resistor),
        resistor: resistor.clone(),
    }
}

/// The longest of some times; never, where one of them is, or where there is none.
fn longest(times: impl Iterator<Item = Option<Time>>) -> Option<Time> {
    let times: Vec<f64> = times.map(|t| t.map_or(f64::INFINITY, Time::si)).collect();
    times.into_iter().reduce(f64::max).filter(|t| t.is_finite()).map(Time::from_si)
}

/// What of the plan is not met, in words.
fn not_met(plan: &Plan) -> Vec<String> {
    let limits = plan
        .limits
        .iter()
        .filter(|l| l.met == Some(false) || (l.single_fault_asked && l.single_fault_met == Some(false)));
    let resistors = plan.resistors.iter().flat_map(|r| {
        let missed = r.checks.iter().filter(|c| c.verdict == Verdict::NotMet);
        missed.map(move |c| format!("{} of {}", c.check, r.id))
    });
    let capacitors = plan.capacitors.iter().filter(|c| c.verdict == Verdict::NotMet);
    let never = plan.waits.iter().filter(|w| w.keep.is_none()).map(|w| format!("a wait at {}", w.across.join(" - ")));
    let steps = plan.steps.iter().filter(|s| s.never).map(|s| format!("step `{}`", s.step));
    limits
        .map(|l| format!("limit {}", l.id))
        .chain(resistors)
        .chain(capacitors.map(|c| format!("voltage of {}", c.id)))
        .chain(never)
        .chain(steps)
        .collect()
}
