//! One design in the bank: the full plan with it, and whether it does what was asked.

use super::request::BleederAsk;
use super::result::{BleederFigures, ContactFigures, LimitHeld};
use crate::bank::Bank;
use crate::bank::description::{Description, Resistor};
use crate::bank::file::resistor_text;
use crate::check::{Answers, EngineError};
use crate::discharge::{CONTACT_FAULT, Figure, Model};
use crate::finding::Findings;
use crate::plan::{Options, Plan, ResistorResult, plan};
use crate::quantity::{Current, Power, Quantity};
use crate::size::arrays::Design;
use crate::size::error::SizeError;
use crate::size::trial::{Trial, at_most, candidate, longest, rated};

/// Hours of a year, for what a standing loss costs (365 days).
const HOURS_A_YEAR: f64 = 8760.0;

/// Puts a design into the bank and makes the full plan. `counted` are the limits that were asked for.
pub(super) fn tried(
    description: &Description,
    ask: &BleederAsk,
    design: &Design,
    resistor: Resistor,
    counted: &[usize],
) -> Result<Trial<BleederFigures>, SizeError> {
    let mut with = description.clone();
    with.resistors.push(resistor.clone());
    let bank = Bank::new(with).map_err(SizeError::Placed)?;
    let legs: Vec<String> = bank.legs(&resistor.id).into_iter().map(|(id, _)| id).collect();
    let plan = plan(&bank, "", Findings::new(), Options::default())?;
    let whole = Whole::of(&bank.expanded(), &legs)?;
    let results: Vec<&ResistorResult> = plan.resistors.iter().filter(|r| legs.contains(&r.id)).collect();
    let figures = figures(&resistor, &legs, &plan, &results, counted, &whole);
    let limits = figures.limits.iter().all(|l| l.met == Some(true) && l.single_fault_met != Some(false));
    let loss = ask.max_loss.is_none_or(|most| at_most(whole.loss_highest, most.si()));
    let current = ask.max_current.is_none_or(|most| at_most(whole.current, most.si()));
    let passes = limits && rated(&ask.build, &results, legs.len()) && loss && current;
    let part = resistor_text(&resistor);
    let candidate = candidate(&ask.build, design, &resistor, &plan, &results, part, figures);
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

fn figures(
    resistor: &Resistor,
    legs: &[String],
    plan: &Plan,
    results: &[&ResistorResult],
    counted: &[usize],
    whole: &Whole,
) -> BleederFigures {
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
    let contact = resistor.switched.map(|contact| {
        let peak = |r: &&&ResistorResult| r.peak_power.map_or(0.0, Quantity::si);
        let named =
            |name: &str| name.strip_suffix(CONTACT_FAULT).is_some_and(|id| legs.iter().any(|leg| leg == id.trim_end()));
        let unclosed = plan.waits.iter().flat_map(|w| w.faults.iter().filter(|f| named(&f.fault)).map(|f| f.wait));
        ContactFigures {
            closes_after: contact.closes_after,
            opens_after: contact.opens_after,
            discharges: contact.discharges,
            every: contact.every,
            element_peak_power: results.iter().max_by(|x, y| peak(x).total_cmp(&peak(y))).and_then(|r| r.peak_power),
            not_closing_wait: longest(unclosed),
        }
    });
    BleederFigures {
        contact,
        loss_highest: Power::from_si(whole.loss_highest),
        loss_nominal: Power::from_si(whole.loss_nominal),
        energy_per_year_kwh: whole.loss_nominal * HOURS_A_YEAR / 1000.0,
        peak_current: Current::from_si(whole.current),
        wait: longest(plan.waits.iter().map(|w| w.keep)),
        open_wait: longest(plan.waits.iter().flat_map(|w| w.faults.iter().filter(|f| fault(&f.fault)).map(|f| f.wait))),
        limits: limits.collect(),
        resistor: resistor.clone(),
    }
}
