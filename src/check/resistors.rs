//! What resistors bear: standing load, voltage, the discharge itself.

use super::{
    Answers, EngineError, FaultAnswers, Procedure, StepAnswers, Verdict, celsius_or_null, fault_in_words, si,
    si_or_null,
};
use crate::bank::Bank;
use crate::bank::description::{Rating, Resistor, Role, Supply, Switched};
use crate::discharge::{Body, Figure, Model, StepFigure, element_model};
use crate::finding::{Findings, Severity};
use crate::quantity::{
    Current, Direction, Energy, Power, Quantity, Resistance, Temperature, Time, Voltage, celsius, exact, show,
};
use rayon::prelude::*;
use serde::Serialize;

/// One check against a rating.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Check {
    /// What is checked: `continuous power`, `average power`, `element voltage`, `pulse energy`, `overload power`,
    /// `overload energy`, `body temperature`.
    pub check: &'static str,
    /// The unit of `found` and `allowed`: `W`, `V`, `J` or `C` (degree Celsius).
    pub unit: &'static str,
    /// The greatest figure found, in that unit; `None` where it can't be computed.
    pub found: Option<f64>,
    /// The rating, in that unit; `None` where none was given.
    pub allowed: Option<f64>,
    /// What it comes to.
    pub verdict: Verdict,
    /// Why it was not checked, or what else a reader should know.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub remark: Option<String>,
}

/// A resistor: figures of ONE element of an array, each at its own worst point.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ResistorResult {
    /// The part.
    pub id: String,
    /// Its role.
    pub role: &'static str,
    /// Resistance of one element, nominal.
    #[serde(rename = "value_ohm", serialize_with = "si")]
    pub value: Resistance,
    /// How many elements the array has.
    pub elements: u32,
    /// Power before isolation at the highest voltage; `None` for a part that a step or a contact connects.
    #[serde(rename = "continuous_power_w", serialize_with = "si_or_null")]
    pub continuous_power: Option<Power>,
    /// Derated power at the ambient; `None` where the rating does not give it.
    #[serde(rename = "allowed_power_w", serialize_with = "si_or_null")]
    pub allowed_power: Option<Power>,
    /// Greatest voltage across the element.
    #[serde(rename = "element_voltage_v", serialize_with = "si_or_null")]
    pub element_voltage: Option<Voltage>,
    /// Greatest current from isolation on.
    #[serde(rename = "peak_current_a", serialize_with = "si_or_null")]
    pub peak_current: Option<Current>,
    /// Greatest power from isolation on.
    #[serde(rename = "peak_power_w", serialize_with = "si_or_null")]
    pub peak_power: Option<Power>,
    /// Energy from isolation on; with a contact, that of the feeding until it opens counts too, as it does in the figures
    /// above.
    #[serde(rename = "energy_j", serialize_with = "si_or_null")]
    pub energy: Option<Energy>,
    /// Greatest body temperature; `None` where the rating does not give it.
    #[serde(rename = "body_temperature_c", serialize_with = "celsius_or_null")]
    pub body_temperature: Option<Temperature>,
    /// For a bleeder that a contact connects: what it was asked.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub contact: Option<ContactResult>,
    /// Checks against the ratings.
    pub checks: Vec<Check>,
}

/// The contact of a bleeder, and how often it discharges the bank.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ContactResult {
    /// How long after isolation it has closed.
    #[serde(rename = "closes_after_s", serialize_with = "si")]
    pub closes_after: Time,
    /// How long after the bank is fed again it has opened.
    #[serde(rename = "opens_after_s", serialize_with = "si")]
    pub opens_after: Time,
    /// Discharges in a row, from cold.
    pub discharges: u32,
    /// How far apart; `None` (null) where that was not given.
    #[serde(rename = "every_s", serialize_with = "si_or_null")]
    pub every: Option<Time>,
    /// Energy from one isolation to the next over that time, of one element; `None` (null) where that was not given.
    #[serde(rename = "average_power_w", serialize_with = "si_or_null")]
    pub average_power: Option<Power>,
}

impl ContactResult {
    fn of(contact: &Switched, load: &Load) -> Self {
        let Switched { closes_after, opens_after, discharges, every } = *contact;
        let average_power = every.map(|every| Power::from_si(load.cycle / every.si()));
        ContactResult { closes_after, opens_after, discharges, every, average_power }
    }
}

/// Power that a rating allows at an ambient temperature: full up to `full_to`, then linearly to nothing at
/// `zero_at`. `None` where the rating does not say; there is no default.
pub(crate) fn derated(rating: &Rating, ambient: Temperature) -> Option<Power> {
    let (power, full_to) = (rating.power?, rating.full_to?);
    if ambient <= full_to {
        return Some(power);
    }
    let zero_at = rating.zero_at?;
    let share = (zero_at.si() - ambient.si()) / (zero_at.si() - full_to.si());
    Some(Power::from_si(power.si() * share.max(0.0)))
}

/// First-order thermal data of one element: R_th = (zero_at - full_to) / power. `None` where something is missing.
pub(crate) fn body(rating: &Rating) -> Option<Body> {
    let kelvin = rating.zero_at?.si() - rating.full_to?.si();
    let (power, time) = (rating.power?.si(), rating.thermal_time?.si());
    let usable = kelvin > 0.0 && power > 0.0 && time > 0.0;
    usable.then(|| Body { kelvin_per_watt: kelvin / power, time_constant: time })
}

/// What one element has to bear, in SI base units.
struct Load {
    standing: f64,
    voltage: f64,
    current: f64,
    power: f64,
    energy: f64,
    /// Energy of one cycle through a contact.
    cycle: f64,
    rise: Option<f64>,
}

fn is_single(resistor: &Resistor) -> bool {
    resistor.series == 1 && resistor.parallel == 1
}

/// True where a contact connects a resistor every so often.
fn has_cycle(resistor: &Resistor) -> bool {
    resistor.switched.is_some_and(|contact| contact.every.is_some())
}

/// The figures of a load, in the order in which [`Load::from`] takes them.
fn load_figures(resistor: usize, rating: &Rating, cycles: bool) -> Vec<Figure> {
    let mut figures = vec![
        Figure::StandingPower { resistor },
        Figure::ResistorVoltage { resistor },
        Figure::PeakCurrent { resistor },
        Figure::PeakPower { resistor },
        Figure::ResistorEnergy { resistor },
    ];
    figures.extend(cycles.then_some(Figure::CycleEnergy { resistor }));
    figures.extend(body(rating).map(|body| Figure::BodyRise { resistor, body }));
    figures
}

impl Load {
    fn through(figures: &[StepFigure], answers: &StepAnswers) -> Self {
        let cycles = matches!(figures.get(5), Some(StepFigure::CycleEnergy { .. }));
        Load::of(&figures.iter().map(|f| answers.worst(*f)).collect::<Vec<f64>>(), cycles)
    }

    fn from(figures: &[Figure], answers: &Answers) -> Self {
        let cycles = matches!(figures.get(5), Some(Figure::CycleEnergy { .. }));
        Load::of(&figures.iter().map(|f| answers.worst(*f)).collect::<Vec<f64>>(), cycles)
    }

    fn of(worst: &[f64], cycles: bool) -> Self {
        Load {
            standing: worst[0],
            voltage: worst[1],
            current: worst[2],
            power: worst[3],
            energy: worst[4],
            cycle: if cycles { worst[5] } else { 0.0 },
            rise: worst.get(if cycles { 6 } else { 5 }).copied(),
        }
    }
}

/// The figures of a load over a procedure, in the order in which [`Load::through`] takes them.
fn load_figures_through(resistor: usize, rating: &Rating, cycles: bool) -> Vec<StepFigure> {
    let mut figures = vec![
        StepFigure::StandingPower { resistor },
        StepFigure::PartVoltage { resistor },
        StepFigure::PartCurrent { resistor },
        StepFigure::PartPower { resistor },
        StepFigure::PartEnergy { resistor },
    ];
    figures.extend(cycles.then_some(StepFigure::CycleEnergy { resistor }));
    figures.extend(body(rating).map(|body| StepFigure::BodyRise { resistor, body }));
    figures
}

/// The resistors of a bank.
pub(crate) struct ResistorChecks<'a> {
    pub bank: &'a Bank,
    pub model: &'a Model,
}

impl ResistorChecks<'_> {
    /// What has to be known of the healthy bank: the load of every resistor that is no array.
    pub fn figures(&self) -> Vec<Figure> {
        let single = self.bank.description().resistors.iter().filter(|r| is_single(r) && r.role.always_connected());
        single
            .filter_map(|r| Some(load_figures(self.model.find_resistor(&r.id)?, &r.rating, has_cycle(r))))
            .flatten()
            .collect()
    }

    /// What has to be known under every fault: the standing power of every resistor.
    pub fn fault_figures(&self) -> Vec<Figure> {
        let resistors = self.bank.description().resistors.iter().filter(|r| r.role.always_connected());
        let numbers = resistors.filter_map(|r| self.model.find_resistor(&r.id));
        numbers.map(|resistor| Figure::StandingPower { resistor }).collect()
    }

    /// The resistors, in the order of the file. Elements of arrays are opened up, each in a study of its own.
    ///
    /// # Errors
    /// Where the engine can't certify a figure.
    pub fn conclude(
        &self,
        healthy: &Answers,
        procedure: Option<&Procedure>,
        faults: &[FaultAnswers],
        findings: &mut Findings,
    ) -> Result<Vec<ResistorResult>, EngineError> {
        let resistors = &self.bank.description().resistors;
        let single = procedure.map(|p| self.answers_through(p)).transpose()?;
        let through = procedure.zip(single.as_ref());
        let load = |r: &Resistor| match through {
            Some((procedure, single)) => self.load_through(r, procedure, single),
            None => self.load(r, healthy),
        };
        let loads: Vec<Option<Load>> = resistors.par_iter().map(load).collect::<Result<_, EngineError>>()?;
        let mut results = Vec::new();
        for (resistor, load) in resistors.iter().zip(loads) {
            let result = self.result(resistor, load.as_ref());
            rating_findings(&result, findings);
            self.fault_findings(resistor, &result, faults, findings);
            results.push(result);
        }
        for result in self.supplies(through)? {
            rating_findings(&result, findings);
            results.push(result);
        }
        Ok(results)
    }

    /// What one element bears over the passive discharge. A single element stands in the healthy bank's own study; an array is opened up.
    fn load(&self, resistor: &Resistor, healthy: &Answers) -> Result<Option<Load>, EngineError> {
        let Some(index) = self.model.find_resistor(&resistor.id).filter(|_| resistor.role.always_connected()) else {
            return Ok(None);
        };
        if is_single(resistor) {
            return Ok(Some(Load::from(&load_figures(index, &resistor.rating, has_cycle(resistor)), healthy)));
        }
        let Some((model, element)) = element_model(&self.model.passive_only(), resistor) else { return Ok(None) };
        let figures = load_figures(element, &resistor.rating, has_cycle(resistor));
        let answers = Answers::healthy(self.bank, &model, figures.clone())?;
        Ok(Some(Load::from(&figures, &answers)))
    }

    /// What every single resistor and supply bears until the end of the procedure, answered together.
    fn answers_through(&self, procedure: &Procedure) -> Result<StepAnswers, EngineError> {
        let description = self.bank.description();
        let single = description.resistors.iter().filter(|r| is_single(r)).map(|r| (&r.id, &r.rating, has_cycle(r)));
        let alone = |s: &&Supply| s.array_series == 1 && s.array_parallel == 1;
        let supplies = description.supplies.iter().filter(alone).map(|s| (&s.id, &s.rating, false));
        let figures = single
            .chain(supplies)
            .filter_map(|(id, rating, cycles)| {
                Some(load_figures_through(self.model.find_resistor(id)?, rating, cycles))
            })
            .flatten();
        procedure.healthy(self.model, figures.collect())
    }

    /// What one element bears until the end of the procedure; `None` for a part that no step connects.
    fn load_through(
        &self,
        resistor: &Resistor,
        procedure: &Procedure,
        single: &StepAnswers,
    ) -> Result<Option<Load>, EngineError> {
        let always = resistor.role.always_connected();
        let there = |i: &usize| always || procedure.ever_connects(*i);
        match self.model.find_resistor(&resistor.id).filter(there) {
            Some(index) => self.borne(resistor, index, procedure, single),
            None => Ok(None),
        }
    }

    /// What one element bears. A single element stands in the answers that all have in common; an array is opened up.
    fn borne(
        &self,
        resistor: &Resistor,
        index: usize,
        procedure: &Procedure,
        single: &StepAnswers,
    ) -> Result<Option<Load>, EngineError> {
        let figures = load_figures_through(index, &resistor.rating, has_cycle(resistor));
        if is_single(resistor) {
            return Ok(Some(Load::through(&figures, single)));
        }
        let Some((model, _)) = element_model(self.model, resistor) else { return Ok(None) };
        Ok(Some(Load::through(&figures, &procedure.healthy(&model, figures.clone())?)))
    }

    /// The series resistances of supplies that a step connects.
    fn supplies(&self, through: Option<(&Procedure, &StepAnswers)>) -> Result<Vec<ResistorResult>, EngineError> {
        let one = |supply: &Supply| {
            let part = supply.resistor();
            let index = self.model.find_resistor(&part.id).zip(through).filter(|(i, (p, _))| p.ever_connects(*i));
            let load = match index {
                Some((index, (procedure, single))) => self.borne(&part, index, procedure, single)?,
                None => None,
            };
            let mut result = self.result(&part, load.as_ref());
            result.checks.retain(|check| check.check != "continuous power");
            Ok(ResistorResult { role: "supply", continuous_power: None, ..result })
        };
        self.bank.description().supplies.iter().map(one).collect()
    }

    fn result(&self, resistor: &Resistor, load: Option<&Load>) -> ResistorResult {
        let ambient = self.bank.ambient();
        let temperature = load.and_then(|l| l.rise).map(|rise| Temperature::from_si(ambient.si() + rise));
        ResistorResult {
            id: resistor.id.clone(),
            role: resistor.role.word(),
            value: resistor.value,
            elements: resistor.series * resistor.parallel,
            continuous_power: load
                .filter(|_| resistor.stands_before_isolation() && !carries_current(self.bank, resistor))
                .map(|l| Power::from_si(l.standing)),
            allowed_power: derated(&resistor.rating, ambient),
            element_voltage: load.map(|l| Voltage::from_si(l.voltage)),
            peak_current: load.map(|l| Current::from_si(l.current)),
            peak_power: load.map(|l| Power::from_si(l.power)),
            energy: load.map(|l| Energy::from_si(l.energy)),
            body_temperature: temperature.filter(|_| !carries_current(self.bank, resistor)),
            contact: resistor.switched.as_ref().zip(load).map(|(contact, l)| ContactResult::of(contact, l)),
            checks: load.map_or_else(Vec::new, |l| {
                let lasting = if resistor.stands_before_isolation() {
                    Some(("continuous power", l.standing))
                } else {
                    let every = resistor.switched.and_then(|contact| contact.every);
                    every.map(|every| ("average power", l.cycle / every.si()))
                };
                let mut checks = checks(&resistor.rating, l, ambient, lasting);
                if carries_current(self.bank, resistor) {
                    checks.iter_mut().filter(|c| ALTERNATING.contains(&c.check)).for_each(not_computed);
                }
                checks
            }),
        }
    }

    /// A rating that one failed part exceeds: the elements that are left carry the load of the lost string.
    fn fault_findings(
        &self,
        resistor: &Resistor,
        result: &ResistorResult,
        faults: &[FaultAnswers],
        findings: &mut Findings,
    ) {
        let index = self.model.find_resistor(&resistor.id).filter(|_| resistor.stands_before_isolation());
        let Some((index, allowed)) = index.zip(result.allowed_power) else { return };
        let per_element = |fault: &FaultAnswers| {
            let own = fault.fault.id == resistor.id && resistor.parallel > 1;
            let elements = resistor.series * (resistor.parallel - u32::from(own));
            fault.worst(Figure::StandingPower { resistor: index }) / f64::from(elements)
        };
        let worst = faults.iter().max_by(|x, y| per_element(x).total_cmp(&per_element(y)));
        let Some(fault) = worst.filter(|f| Verdict::at_most(per_element(f), allowed.si()) != Verdict::Met) else {
            return;
        };
        if result.checks.iter().all(|c| c.verdict != Verdict::NotMet) {
            findings.add(
                Severity::Warning,
                "rating-exceeded-under-fault",
                format!(
                    "{}: {} continuous on one element with {}, allowed {} at the ambient: that fault can burn it out \
                     too.",
                    resistor.id,
                    show(Power::from_si(per_element(fault)), Direction::Up),
                    fault_in_words(&fault.fault.name),
                    show(allowed, Direction::Down)
                ),
            );
        }
    }
}

/// Checks that rest on the power before isolation.
const ALTERNATING: [&str; 2] = ["continuous power", "body temperature"];

/// A series resistor of a three-phase bank carries its capacitors' alternating current, which depends on the line
/// frequency; what it dissipates before isolation is not computed.
fn carries_current(bank: &Bank, resistor: &Resistor) -> bool {
    bank.is_three_phase() && resistor.role == Role::Series
}

fn not_computed(check: &mut Check) {
    (check.found, check.verdict) = (None, Verdict::NotChecked);
    check.remark = Some("the alternating current of its capacitors is not computed".into());
}

/// The checks that apply to a load; `lasting` is a power in watt that it bears for ever, with what to call it.
fn checks(rating: &Rating, load: &Load, ambient: Temperature, lasting: Option<(&'static str, f64)>) -> Vec<Check> {
    let compare = |check, unit, found: f64, allowed: Option<f64>| Check {
        check,
        unit,
        found: Some(found),
        allowed,
        verdict: allowed.map_or(Verdict::NotChecked, |a| Verdict::at_most(found, a)),
        remark: None,
    };
    let allowed = derated(rating, ambient).map(Quantity::si);
    let mut checks = Vec::new();
    if let Some((name, watt)) = lasting {
        let mut standing = compare(name, "W", watt, allowed);
        standing.remark = match (allowed, rating.power) {
            (Some(_), _) => None,
            (None, None) => Some("no power rating given".into()),
            (None, Some(power)) => Some(format!("{} rated, but not up to which temperature", exact(power))),
        };
        checks.push(standing);
    }
    checks.push(compare("element voltage", "V", load.voltage, rating.voltage.map(Quantity::si)));
    // A pulse is what exceeds the continuous power; a slow bleeder passes many times its pulse energy and stays cool.
    if allowed.is_none_or(|a| load.power > a) {
        checks.push(compare("pulse energy", "J", load.energy, rating.pulse.map(Quantity::si)));
        if let Some((overload, power)) = rating.overload.zip(rating.power) {
            let most = overload.times * power.si();
            checks.push(compare("overload power", "W", load.power, Some(most)));
            checks.push(compare("overload energy", "J", load.energy, Some(most * overload.duration.si())));
        }
    }
    if let Some(rise) = load.rise {
        checks.push(compare("body temperature", "C", celsius(ambient) + rise, rating.zero_at.map(celsius)));
    }
    checks
}

fn rating_findings(result: &ResistorResult, findings: &mut Findings) {
    let figure = |value: f64, unit: &str, direction| match unit {
        "W" => show(Power::from_si(value), direction),
        "V" => show(Voltage::from_si(value), direction),
        "J" => show(Energy::from_si(value), direction),
        _ => show(Temperature::from_si(value + crate::quantity::CELSIUS_ZERO_K), direction),
    };
    for check in result.checks.iter().filter(|c| c.verdict == Verdict::NotMet) {
        findings.add(
            Severity::Warning,
            "rating-exceeded",
            format!(
                "{}: {} {} at the highest voltage, allowed {}.",
                result.id,
                check.check,
                figure(check.found.unwrap_or(f64::NAN), check.unit, Direction::Up),
                figure(check.allowed.unwrap_or(f64::NAN), check.unit, Direction::Down)
            ),
        );
    }
}
