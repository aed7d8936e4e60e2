//! Designs in the bank: the first of them are tried one by one, each with a full plan of the bank with it.

use super::arrays::{Design, Listed};
use super::build::Build;
use super::error::SizeError;
use super::result::Candidate;
use crate::bank::description::Resistor;
use crate::check::Verdict;
use crate::finding::{Finding, Severity};
use crate::plan::{Plan, ResistorResult};
use crate::quantity::{Power, Quantity, Resistance, Time};
use rayon::prelude::*;

/// Designs that are put into the bank and fail the full plan are passed over, but not more than this many for each
/// that is to be shown.
const TRIES: usize = 8;

/// A design that was tried.
pub(super) struct Trial<F> {
    pub candidate: Candidate<F>,
    /// Did it do all that was asked?
    pub passes: bool,
}

/// The first designs that do the job by the full plan, and how many before them did not.
pub(super) fn planned<F: Send>(
    build: &Build,
    found: &Listed,
    tried: impl Fn(&Design) -> Result<Trial<F>, SizeError> + Sync,
) -> Result<(Vec<Candidate<F>>, usize), SizeError> {
    let (mut candidates, mut refused) = (Vec::new(), 0);
    for some in found.designs.chunks(build.show).take(TRIES) {
        let trials: Vec<_> = some.par_iter().map(&tried).collect::<Result<_, SizeError>>()?;
        for trial in trials {
            if trial.passes && candidates.len() < build.show {
                candidates.push(trial.candidate);
            } else if !trial.passes {
                refused += 1;
            }
        }
        if candidates.len() == build.show {
            break;
        }
    }
    for (index, candidate) in candidates.iter_mut().enumerate() {
        candidate.rank = index + 1;
    }
    Ok((candidates, refused))
}

/// A design with what one element carries by the plan. Of several results, such as the legs of a three-phase resistor,
/// the one that carries most before isolation, or in a discharge.
pub(super) fn candidate<F>(
    build: &Build,
    design: &Design,
    resistor: &Resistor,
    plan: &Plan,
    results: &[&ResistorResult],
    part: String,
    figures: F,
) -> Candidate<F> {
    let element = &build.elements[design.element];
    let carried = |r: &ResistorResult| (lasting(r).map_or(0.0, Quantity::si), r.energy.map_or(0.0, Quantity::si));
    let result = results.iter().max_by(|x, y| {
        let (x, y) = (carried(x), carried(y));
        x.0.total_cmp(&y.0).then(x.1.total_cmp(&y.1))
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
        element_power: result.and_then(|r| lasting(r)),
        allowed_power: result.and_then(|r| r.allowed_power),
        element_voltage: result.and_then(|r| r.element_voltage),
        allowed_voltage: resistor.rating.voltage,
        element_energy: result.and_then(|r| r.energy),
        body_temperature: result.and_then(|r| r.body_temperature),
        checks: result.map_or_else(Vec::new, |r| r.checks.clone()),
        verdict: plan.verdict,
        not_met: not_met(plan),
        mass: element.mass.map(|m| m * count),
        price: element.price.map(|p| p * count),
        part,
        figures,
    }
}

/// What an element carries for ever: before isolation, or on average where a contact connects it at every so often.
fn lasting(result: &ResistorResult) -> Option<Power> {
    result.continuous_power.or_else(|| result.contact.as_ref()?.average_power)
}

/// Are the ratings of the new resistors kept, with the margin on continuous (or average) power? Each has to be in the plan.
pub(super) fn rated(build: &Build, results: &[&ResistorResult], how_many: usize) -> bool {
    results.len() == how_many
        && results.iter().all(|r| {
            let with_margin = r
                .allowed_power
                .zip(lasting(r))
                .is_none_or(|(allowed, found)| at_most(found.si(), allowed.si() * (1.0 - build.margin)));
            with_margin && r.checks.iter().all(|c| c.verdict != Verdict::NotMet)
        })
}

/// A limit is only kept by a comparison of finite numbers, here as in a plan.
pub(super) fn at_most(found: f64, allowed: f64) -> bool {
    Verdict::at_most(found, allowed) == Verdict::Met
}

/// What the plan with the first design does not meet of the rest of `whose`, where there is any.
pub(super) fn rest_not_met(not_met: &[String], whose: &str) -> Option<Finding> {
    let text = format!(
        "The plan with the first design does not meet everything else in the {whose}: {}. `ebbvolt plan` tells more.",
        not_met.join(", ")
    );
    (!not_met.is_empty()).then(|| Finding::new(Severity::Warning, "rest-of-plan-not-met", text))
}

/// The longest of some times; never, where one of them is, or where there is none.
pub(super) fn longest(times: impl Iterator<Item = Option<Time>>) -> Option<Time> {
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
