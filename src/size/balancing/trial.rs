//! One design across every unit: the full plan with it, how the units then share, and whether it does what was asked.

use super::request::BalancingAsk;
use super::result::{BalancingFigures, UnitShare};
use super::shares::Shares;
use super::{Job, across_units, part_text};
use crate::bank::Bank;
use crate::bank::description::Resistor;
use crate::finding::Findings;
use crate::plan::{Options, Plan, ResistorResult, plan};
use crate::quantity::{Power, Quantity, Voltage};
use crate::size::LimitHeld;
use crate::size::arrays::{Design, element_load, usable_power};
use crate::size::error::SizeError;
use crate::size::trial::{Trial, at_most, candidate, longest, rated};

/// Hours of a year, for what a standing loss costs (365 days).
const HOURS_A_YEAR: f64 = 8760.0;

/// Puts a design across every unit and makes the full plan.
pub(super) fn tried(job: &Job, ask: &BalancingAsk, design: &Design) -> Result<Trial<BalancingFigures>, SizeError> {
    let one = design.resistor(&ask.build, &job.place);
    let resistors = across_units(job, &one);
    let description = job.with(&resistors);
    let shares = Shares::new(&description, &job.members, &job.bears, &resistors)?;
    let units = units(job, &shares, &resistors)?;
    let bank = Bank::new(description).map_err(SizeError::Placed)?;
    let plan = plan(&bank, "", Findings::new(), Options::default())?;
    let results: Vec<&ResistorResult> =
        plan.resistors.iter().filter(|r| resistors.iter().any(|new| new.id == r.id)).collect();

    let figures = figures(job, &shares, units, resistors, design, &one, &plan)?;
    let within = |u: &UnitShare| {
        at_most(u.settled.si(), u.rated.si())
            && u.after_fast_charge.is_none_or(|v| at_most(v.si(), u.rated.si()))
            && u.fast_charge.is_none_or(|v| at_most(v.si(), u.rated.si()))
    };
    let limits = figures.limits.iter().all(|l| l.met == Some(true) && l.single_fault_met != Some(false));
    let usable = usable_power(&one.rating, job.ambient, ask.build.margin);
    // Where a rating gives no power there is nothing to exceed, and the answer says that it was not checked.
    let power = usable.is_infinite() || at_most(figures.element_power.si(), usable);
    let voltage = one.rating.voltage.is_none_or(|most| at_most(figures.element_voltage.si(), most.si()));
    let loss = ask.max_loss.is_none_or(|most| at_most(figures.loss_highest.si(), most.si()));
    let kept = rated(&ask.build, &results, figures.resistors.len());
    let passes = figures.units.iter().all(within) && limits && power && voltage && loss && kept;

    let part = part_text(&figures.resistors, &figures.written_out);
    let mut candidate = candidate(&ask.build, design, &one, &plan, &results, part, figures);
    let how_many = job.members.len() as f64;
    candidate.mass = candidate.mass.map(|mass| mass * how_many);
    candidate.price = candidate.price.map(|price| price * how_many);
    Ok(Trial { candidate, passes })
}

/// How the units share.
fn units(job: &Job, shares: &Shares, resistors: &[Resistor]) -> Result<Vec<UnitShare>, SizeError> {
    let volts = job.volts_highest();
    let settled = shares.settled(volts, None)?;
    let fast = if job.fast_charge { Some(shares.after_fast_charge(volts)?) } else { None };
    let unit = |number: usize| {
        let (member, bears) = (&job.members[number], &job.bears[number]);
        let of = |list: &[f64]| Voltage::from_si(list[number]);
        let (divided, greatest) = (fast.as_ref().map(|f| of(&f.divided)), fast.as_ref().map(|f| of(&f.greatest)));
        let settled = of(&settled);
        let highest = greatest.map_or(settled.si(), |v| v.si().max(settled.si()));
        UnitShare {
            capacitors: member.capacitors.clone(),
            across: member.across.clone(),
            resistor: resistors[number].id.clone(),
            rated: bears.rated,
            leakage: bears.leakage,
            settled,
            fast_charge: divided,
            after_fast_charge: greatest,
            margin: Voltage::from_si(bears.rated.si() - highest),
        }
    };
    Ok((0..job.members.len()).map(unit).collect())
}

fn figures(
    job: &Job,
    shares: &Shares,
    units: Vec<UnitShare>,
    resistors: Vec<Resistor>,
    design: &Design,
    one: &Resistor,
    plan: &Plan,
) -> Result<BalancingFigures, SizeError> {
    let volts = job.volts_highest();
    let highest = units.iter().map(|u| u.highest().si()).fold(0.0, f64::max);
    let (watt, volt) = element_load(design, one.tolerance, highest);
    let strings = f64::from(one.parallel);
    let factor = if one.parallel > 1 { strings / (strings - 1.0) } else { f64::INFINITY };
    let mut open = 0.0f64;
    for number in 0..resistors.len() {
        open = shares.settled(volts, Some((number, factor)))?.into_iter().fold(open, f64::max);
    }
    let is_new = |name: &str| name.strip_suffix(" open").is_some_and(|id| resistors.iter().any(|r| r.id == id));
    let limits = job.counted.iter().filter_map(|i| plan.limits.get(*i)).map(|l| LimitHeld {
        id: l.id.clone(),
        across: l.across.clone(),
        within: l.within,
        holds_from: l.holds_from,
        met: l.met,
        // Only where it was asked for does a failed part decide.
        single_fault_met: l.single_fault_met.filter(|_| l.single_fault_asked),
    });
    let nominal = shares.loss_nominal(job.description.charged_to.nominal.si())?;
    let open_waits = plan.waits.iter().flat_map(|w| w.faults.iter().filter(|f| is_new(&f.fault)).map(|f| f.wait));
    Ok(BalancingFigures {
        margin: units.iter().map(|u| u.margin).fold(Voltage::from_si(f64::INFINITY), |x, y| if y < x { y } else { x }),
        open_unit_voltage: open.is_finite().then(|| Voltage::from_si(open)),
        elements_in_all: design.count() * resistors.len() as u32,
        element_power: Power::from_si(watt),
        element_voltage: Voltage::from_si(volt),
        loss_highest: Power::from_si(shares.loss_highest(volts)?),
        loss_nominal: Power::from_si(nominal),
        energy_per_year_kwh: nominal * HOURS_A_YEAR / 1000.0,
        wait: longest(plan.waits.iter().map(|w| w.keep)),
        open_wait: longest(open_waits),
        limits: limits.collect(),
        units,
        resistors,
        written_out: job.written_out.clone(),
    })
}
