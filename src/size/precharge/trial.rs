//! One design in the bank: the full plan with it, and whether it does what was asked.

use super::charge::{Charge, steps};
use super::load::shorted;
use super::request::PrechargeAsk;
use super::result::{Inrush, PrechargeFigures, Repeated};
use super::{Job, placed};
use crate::bank::Bank;
use crate::bank::description::{Step, Supply};
use crate::bank::file::{steps_text, supply_text};
use crate::check::{Check, EngineError, Verdict, body, derated};
use crate::discharge::StepFigure;
use crate::finding::Findings;
use crate::plan::{Options, ResistorResult, plan};
use crate::quantity::{Current, Energy, Power, Quantity, Ratio, Temperature, Time, Voltage, celsius};
use crate::size::arrays::Design;
use crate::size::error::SizeError;
use crate::size::trial::{Trial, at_most, candidate, rated};

/// Puts a design into the bank and makes the full plan.
pub(super) fn tried(job: &Job, ask: &PrechargeAsk, design: &Design) -> Result<Trial<PrechargeFigures>, SizeError> {
    let resistor = design.resistor(&ask.build, &job.supply.resistor());
    let supply = Supply {
        series: resistor.value,
        tolerance: resistor.tolerance,
        array_series: resistor.series,
        array_parallel: resistor.parallel,
        rating: resistor.rating,
        ..job.supply.clone()
    };
    let mut with = placed(&job.description, &supply);
    let own = !with.procedure.iter().any(|step| step.connect.contains(&supply.id));
    let own_steps = if own { steps(&supply.id, ask.within) } else { Vec::new() };
    if own {
        with.procedure.clone_from(&own_steps);
    }
    let bank = Bank::new(with).map_err(SizeError::Placed)?;
    let plan = plan(&bank, "", Findings::new(), Options::default())?;
    let results: Vec<&ResistorResult> = plan.resistors.iter().filter(|r| r.id == supply.id).collect();
    let figures = figures(job, ask, design, &supply, own_steps)?;

    let share = job.share.is_none() || figures.to_share_slowest.is_some_and(|t| at_most(t.si(), ask.within.si()));
    let inrush = ask.main.and_then(|main| main.max_inrush);
    let inrush = inrush.is_none_or(|most| figures.inrush.as_ref().is_some_and(|i| at_most(i.current.si(), most.si())));
    let current = ask.max_current.is_none_or(|most| at_most(figures.peak_current.si(), most.si()));
    let checks = || results.iter().flat_map(|r| &r.checks);
    let spared = checks().all(|c| spares(c, job.ambient, ask.build.margin));
    let pulse = ask.unrated_pulse || pulse_is_rated(&results);
    let repeated = figures.attempts.as_ref().is_none_or(|a| a.verdict != Verdict::NotMet);
    let passes = share && inrush && current && rated(&ask.build, &results, 1) && spared && pulse && repeated;
    let part = supply_text(&supply);
    let candidate = candidate(&ask.build, design, &resistor, &plan, &results, part, figures);
    Ok(Trial { candidate, passes })
}

/// Is the margin kept, where something was found and something is allowed? It counts for power, energy and the rise of
/// the body over the air.
fn spares(check: &Check, ambient: Temperature, margin: f64) -> bool {
    let Some((found, allowed)) = check.found.zip(check.allowed) else { return true };
    match check.unit {
        "W" | "J" => at_most(found, allowed * (1.0 - margin)),
        "C" => at_most(found, celsius(ambient) + (allowed - celsius(ambient)) * (1.0 - margin)),
        _ => true,
    }
}

/// Is a pulse over the continuous power checked against anything?
fn pulse_is_rated(results: &[&ResistorResult]) -> bool {
    results.iter().all(|r| {
        let pulse = r.checks.iter().find(|c| c.check == "pulse energy");
        let overload = r.checks.iter().any(|c| c.check == "overload energy");
        pulse.is_none_or(|c| c.verdict != Verdict::NotChecked) || overload
    })
}

fn figures(
    job: &Job,
    ask: &PrechargeAsk,
    design: &Design,
    supply: &Supply,
    own_steps: Vec<Step>,
) -> Result<PrechargeFigures, SizeError> {
    let charge = Charge::new(&placed(&job.description, supply), supply, job.share, ask.within)?;
    let (worst, nominal) = charge.both()?;
    let volts = supply.voltage.si();
    let finite = |t: f64| (job.share.is_some() && t.is_finite()).then(|| Time::from_si(t));
    let below = |short: f64| Voltage::from_si(volts - short);
    Ok(PrechargeFigures {
        supply_voltage: supply.voltage,
        within: ask.within,
        share: job.share.map(Ratio::from_si),
        to_share_nominal: finite(nominal.seconds),
        to_share_slowest: finite(worst.seconds),
        reached_nominal: below(nominal.short),
        reached_lowest: below(worst.short),
        settles_lowest: below(worst.settles_short),
        peak_current: Current::from_si(worst.current),
        peak_power: Power::from_si(worst.power),
        attempt_energy: Energy::from_si(worst.energy),
        inrush: ask.main.map(|main| Inrush {
            main: main.resistance,
            current: Current::from_si(worst.short / main.resistance.si()),
        }),
        attempts: repeated(job, ask, supply, &charge)?,
        shorted: shorted(design, &ask.build.elements[design.element], volts, job.ambient),
        steps: (!own_steps.is_empty()).then(|| steps_text(&own_steps)),
        own_steps,
        supply: supply.clone(),
    })
}

/// Charges one after the other: the body's heat adds up. Without thermal data the average power beside the derated one
/// can tell that it is too much, but never that it is borne.
fn repeated(job: &Job, ask: &PrechargeAsk, supply: &Supply, charge: &Charge) -> Result<Option<Repeated>, EngineError> {
    let Some(attempts) = ask.attempts else { return Ok(None) };
    let (count, every) = (attempts.count, attempts.every.si());
    let thermal = body(&supply.rating);
    let found = charge.of_element(supply, |resistor| {
        let rise = thermal.map(|body| StepFigure::RepeatedRise { stage: 0, resistor, body, times: count, every });
        std::iter::once(StepFigure::Energy { stage: 0, resistor }).chain(rise).collect()
    })?;
    let average = found.first().copied().unwrap_or(f64::NAN) / every;
    let hottest = found.get(1).map(|rise| job.ambient.si() + rise);
    let used = 1.0 - ask.build.margin;
    let verdict = match hottest.zip(supply.rating.zero_at) {
        Some((hottest, most)) => Verdict::at_most(hottest, job.ambient.si() + (most.si() - job.ambient.si()) * used),
        None => match derated(&supply.rating, job.ambient) {
            Some(allowed) if !at_most(average, allowed.si() * used) => Verdict::NotMet,
            _ => Verdict::NotChecked,
        },
    };
    Ok(Some(Repeated {
        count,
        every: attempts.every,
        body_temperature: hottest.map(Temperature::from_si),
        average_power: Power::from_si(average),
        verdict,
    }))
}
