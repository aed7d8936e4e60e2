//! One design in the bank: the full plan with it, and whether it does what was asked.

use super::applied::{Applied, Goal};
use super::bearing::Bearing;
use super::in_a_row::{Bodies, asked_row, in_a_row};
use super::probe::{Fitted, figures_of, no_steps};
use super::request::ToolAsk;
use super::result::{FaultLeft, Placement, ToolFigures};
use crate::bank::Bank;
use crate::bank::description::Resistor;
use crate::bank::file::resistor_text;
use crate::check::{EngineError, Procedure, Verdict};
use crate::discharge::{InARow, Model, StepFigure};
use crate::finding::Findings;
use crate::plan::{Options, Plan, ResistorResult, StepFault, plan};
use crate::quantity::{
    CELSIUS_ZERO_K, Current, Energy, Power, Quantity, Ratio, Temperature, Time, Tolerance, Voltage, parse,
};
use crate::size::arrays::Design;
use crate::size::error::SizeError;
use crate::size::scan::Probe;
use crate::size::trial::{Trial, at_most, candidate};

/// What every design is tried with.
pub(super) struct Setup<'a> {
    pub applied: &'a Applied,
    pub ask: &'a ToolAsk,
    pub probe: &'a Fitted,
    pub bearing: &'a Bearing,
    pub row: InARow,
    pub lead: f64,
}

impl Setup<'_> {
    /// The design as a part of the bank: cable and contact reach up to the upper end of its tolerance.
    pub fn part(&self, design: &Design) -> Resistor {
        let part = design.resistor(&self.ask.build, &self.applied.place);
        if self.lead <= 0.0 {
            return part;
        }
        let own = part.tolerance.unwrap_or(Tolerance::NONE);
        let share = self.lead * f64::from(design.parallel) / (f64::from(design.series) * design.value);
        Resistor { tolerance: Tolerance::new(own.low(), written_up(own.high().si() + share)).ok(), ..part }
    }

    /// Puts a design into the bank and makes the full plan.
    pub fn tried(&self, design: &Design) -> Result<Trial<ToolFigures>, SizeError> {
        let Setup { applied, ask, .. } = *self;
        let part = self.part(design);
        let bank = applied.with(part.clone())?;
        let legs: Vec<String> = bank.legs(&part.id).into_iter().map(|(id, _)| id).collect();
        let plan = plan(&bank, "", Findings::new(), Options::default())?;
        let results: Vec<&ResistorResult> = plan.resistors.iter().filter(|r| legs.contains(&r.id)).collect();
        let bank = bank.expanded();
        let model = Model::new(&bank).map_err(EngineError::of("absorption"))?;
        let steps = Procedure::resolve(&bank, &model)?.ok_or_else(|| no_steps("the trial has no steps"))?;
        let whole = Whole::of(&steps, applied, &legs)?;
        let contact = self.contact(design)?;
        let bodies = Bodies::of(&steps, &legs, self.bearing)?;
        let in_a_row = bodies.as_ref().map(|bodies| in_a_row(bodies, &steps, &self.row)).transpose()?;
        let asked_row = asked_row(ask, bodies.as_ref(), &results, &steps, &self.row)?;
        let met = whole.goals.iter().all(|goal| goal.met(applied.held.si()))
            && ask.max_current.is_none_or(|most| at_most(whole.current, most.si()))
            && ask.contact_energy.is_none_or(|most| contact.is_some_and(|found| at_most(found, most.si())));
        let row = match (&asked_row, &bodies) {
            (None, _) => true,
            (Some(row), Some(bodies)) => {
                row.body_temperature.is_some_and(|t| at_most(t.si() - self.bearing.ambient.si(), bodies.allowed))
            }
            (Some(row), None) => results.iter().all(|r| {
                let most = r.allowed_power.map_or(f64::NAN, |p| p.si() * (1.0 - ask.build.margin));
                at_most(row.average_power.si(), most)
            }),
        };
        let rated = results.len() == legs.len() && results.iter().all(|r| bears(r, self.bearing));
        let held = applied.held.si();
        let figures = ToolFigures {
            applied_at: Time::from_si(steps.start(applied.first)),
            held: applied.held,
            below: lowest(&applied.goals),
            time: Some(whole.goals.iter().map(|g| g.time).fold(0.0, f64::max))
                .filter(|t| t.is_finite())
                .map(Time::from_si),
            left: Voltage::from_si(whole.left),
            worst_fault: worst_fault(&plan, applied.held_to),
            peak_current: Current::from_si(whole.current),
            peak_power: Power::from_si(whole.power),
            energy: Energy::from_si(whole.energy),
            average_power: Power::from_si(whole.energy / held),
            contact_energy: contact.map(Energy::from_si),
            in_a_row,
            asked_row,
            resistor: part.clone(),
            placement: self.placement(),
            steps: applied.steps.clone(),
        };
        let text = resistor_text(&part);
        let candidate = candidate(&ask.build, design, &part, &plan, &results, text, figures);
        Ok(Trial { candidate, passes: met && row && rated })
    }

    fn placement(&self) -> Placement {
        match (self.applied.replaces, self.applied.file_has_steps) {
            (Some(_), _) => Placement::InPlace,
            (None, false) => Placement::WithSteps,
            (None, true) => Placement::Alone,
        }
    }

    /// The heat of cable and contact, greatest at either end of the design's tolerance; `None` where their resistance
    /// was not given.
    fn contact(&self, design: &Design) -> Result<Option<f64>, SizeError> {
        if self.lead <= 0.0 {
            return Ok(None);
        }
        let (low, high) = (self.probe.at(design.lowest)?, self.probe.at(design.highest)?);
        Ok(Some(low.contact.max(high.contact)))
    }
}

/// The failed part that leaves most at the end of a step. A source that was not isolated is none: no tool helps there.
fn worst_fault(plan: &Plan, stage: usize) -> Option<FaultLeft> {
    let parts = plan.steps.get(stage)?.faults.iter().filter(|f| f.fault != "source not isolated");
    let left = |f: &StepFault| f.test_points.iter().map(|p| p.highest.si()).fold(0.0, f64::max);
    let worst = parts.max_by(|x, y| left(x).total_cmp(&left(y)))?;
    Some(FaultLeft { fault: worst.fault.clone(), left: Voltage::from_si(left(worst)) })
}

/// A share rounded up to one that a bank file says in a few digits, so that the part reads back as the very one that was
/// planned.
fn written_up(share: f64) -> Ratio {
    let percent = (share * 1e12).ceil() / 1e10;
    parse(&format!("{percent:.10} %")).map_or(Ratio::from_si(share), |reading| reading.value)
}

fn lowest(goals: &[Goal]) -> Voltage {
    let all = goals.iter().map(|g| g.below.si());
    Voltage::from_si(all.fold(f64::INFINITY, f64::min))
}

/// Are the ratings of one element kept, with the margin, and does one of them tell of the pulse where there is one?
fn bears(result: &ResistorResult, bearing: &Bearing) -> bool {
    let air = bearing.ambient.si() - CELSIUS_ZERO_K;
    let used = 1.0 - bearing.margin;
    let kept = result.checks.iter().all(|check| {
        let with_margin = match (check.check, check.found, check.allowed) {
            ("body temperature", Some(found), Some(allowed)) => at_most(found - air, (allowed - air) * used),
            ("element voltage", _, _) => true,
            (_, Some(found), Some(allowed)) => at_most(found, allowed * used),
            _ => true,
        };
        with_margin && check.verdict != Verdict::NotMet
    });
    let pulse =
        result.allowed_power.is_none_or(|most| result.peak_power.is_none_or(|found| !at_most(found.si(), most.si())));
    let told = result.checks.iter().any(|c| c.check != "element voltage" && c.verdict == Verdict::Met);
    kept && (told || !pulse)
}

/// A goal as the engine finds it.
struct Reached {
    /// How long it takes for good; infinite for never.
    time: f64,
    /// The greatest voltage left, and the one that is allowed.
    left: f64,
    below: f64,
}

impl Reached {
    fn met(&self, held: f64) -> bool {
        at_most(self.time, held) && at_most(self.left, self.below)
    }
}

/// What the whole tool has to bear; a plan tells of one element.
struct Whole {
    goals: Vec<Reached>,
    left: f64,
    current: f64,
    power: f64,
    energy: f64,
}

impl Whole {
    fn of(steps: &Procedure, applied: &Applied, legs: &[String]) -> Result<Self, EngineError> {
        let model = steps.model;
        let stage = applied.held_to;
        let legs: Vec<usize> = legs.iter().filter_map(|id| model.find_resistor(id)).collect();
        let pairs = |goal: &Goal| -> Vec<usize> {
            match &goal.at {
                Some([a, b]) => model.find_pair(a, b).into_iter().collect(),
                None => (0..model.test_points).collect(),
            }
        };
        let left = |pair: usize| StepFigure::Voltage { stage, pair };
        let current = |leg: &usize| StepFigure::PartCurrent { resistor: *leg };
        let power = |leg: &usize| StepFigure::PartPower { resistor: *leg };
        let energy = |leg: &usize| StepFigure::PartEnergy { resistor: *leg };
        let mut figures: Vec<StepFigure> =
            applied.goals.iter().flat_map(|goal| figures_of(goal, steps, applied.first)).collect();
        figures.extend((0..model.pairs.len()).map(left));
        figures.extend(legs.iter().flat_map(|leg| [current(leg), power(leg), energy(leg)]));
        let found = steps.healthy(model, figures)?;
        let reached = |goal: &Goal| Reached {
            time: figures_of(goal, steps, applied.first).into_iter().map(|f| found.worst(f)).fold(0.0, f64::max),
            left: pairs(goal).into_iter().map(|pair| found.worst(left(pair))).fold(0.0, f64::max),
            below: goal.below.si(),
        };
        Ok(Whole {
            goals: applied.goals.iter().map(reached).collect(),
            left: (0..model.test_points).map(|pair| found.worst(left(pair))).fold(0.0, f64::max),
            current: legs.iter().map(|leg| found.worst(current(leg))).fold(0.0, f64::max),
            power: legs.iter().map(|leg| found.worst(power(leg))).fold(0.0, f64::max),
            energy: legs.iter().map(|leg| found.worst(energy(leg))).sum(),
        })
    }
}

/// What the first design would meet on the bank as it was isolated: nothing has discharged it, and the tool is applied
/// at once. The checks that its ratings then miss stand with it.
pub(super) struct AtOnce {
    pub current: Current,
    pub energy: Energy,
    pub missed: Vec<&'static str>,
}

/// A part on the bank as it was isolated.
pub(super) fn at_once(bank: &Bank, ask: &ToolAsk, applied: &Applied, part: &Resistor) -> Result<AtOnce, SizeError> {
    let zero = Time::from_si(0.0);
    let id = Some(part.id.clone());
    let across = applied.replaces.is_none().then(|| ask.across.clone()).flatten();
    let at_once = ToolAsk { after: Some(zero), within: Some(applied.held), id, across, ..ask.clone() };
    let applied = Applied::of(bank, &at_once)?;
    let bank = applied.with(part.clone())?;
    let legs: Vec<String> = bank.legs(&part.id).into_iter().map(|(id, _)| id).collect();
    let plan = plan(&bank, "", Findings::new(), Options::default())?;
    let results: Vec<&ResistorResult> = plan.resistors.iter().filter(|r| legs.contains(&r.id)).collect();
    let expanded = bank.expanded();
    let model = Model::new(&expanded).map_err(EngineError::of("absorption"))?;
    let steps = Procedure::resolve(&expanded, &model)?.ok_or_else(|| no_steps("the trial has no steps"))?;
    let whole = Whole::of(&steps, &applied, &legs)?;
    let missed = results.iter().flat_map(|r| &r.checks).filter(|c| c.verdict == Verdict::NotMet);
    Ok(AtOnce {
        current: Current::from_si(whole.current),
        energy: Energy::from_si(whole.energy),
        missed: missed.map(|c| c.check).collect(),
    })
}

/// The ambient plus a rise.
pub(super) fn warmed(ambient: Temperature, rise: f64) -> Temperature {
    Temperature::from_si(ambient.si() + rise)
}
