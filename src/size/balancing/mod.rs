//! `balancing`: one resistor value across every unit of a string, so that no unit exceeds its rated voltage: settled, with
//! leakages that differ, and from a fast charge on.

mod demands;
mod looks;
mod probe;

mod request;
mod result;
mod shares;
mod string;
mod told;
mod trial;
mod units;

pub use request::BalancingAsk;
pub use result::{BalancingFigures, UnitShare};
pub use string::WrittenOut;

use super::arrays::{Design, clearly_over, element_load, listed_by, usable_power};
use super::bleeder::{free_id, has_bound};
use super::collision::{self, Ways};
use super::error::SizeError;
use super::result::{DemandResult, Sizing};
use super::scan::Demand;
use super::spans::Spans;
use super::trial::planned;
use super::window::{demand_results, nothing_fits, searched, window_result};
use crate::bank::Bank;
use crate::bank::description::{Bound, Description, Limit, Pair, Resistor, Role, Rule};
use crate::bank::stock::Element;
use crate::finding::Finding;
use crate::plan::{ChargedTo, Stamp};
use crate::quantity::{Quantity, Resistance, Temperature};
use demands::{Kind, Without, demands, instead, nowhere, way_for};
use looks::{Looks, probes};
use string::Member;
use told::{about_the_first, assumptions, over_by_fast_charge, part_text, written_out_text};
use trial::tried;
use units::{Bears, units};

/// Finds resistors that balance the units of a string of `bank`. `input_sha256` is given with the answer, as with a plan.
///
/// # Errors
/// Where what is asked makes no sense, the bank has no such string, or the engine can't certify a figure.
///
/// # Example: the closed form R = (n Vr - Vb) / ((n - 1) I) is the upper end of the window with ideal resistors
/// ```
/// use ebbvolt::{bank::file, data, quantity::{Current, Quantity, Tolerance}, size};
/// let text = b"
/// ebbvolt: 1
/// tag: PU-09
/// touch_voltage: 50 V
/// charged_to: {nominal: 700 V, highest: 800 V}
/// capacitors: [{id: C1, value: 470 uF, units: {series: 2}, rated: 450 V}]
/// ";
/// let (bank, _) = file::read("bank.yaml", text).expect("a valid file");
/// let mut elements = file::read_stock("generic", data::generic_stock().as_bytes()).expect("a valid list");
/// elements.iter_mut().for_each(|e| e.tolerance = None);
/// let build = size::Build { elements, ..size::Build::default() };
/// let leakage = Some(Current::from_si(2e-3));
/// let ask = size::BalancingAsk { build, leakage, ..size::BalancingAsk::default() };
/// let sizing = size::balancing(&bank, "", &ask).expect("a certified result");
/// let greatest = sizing.window.and_then(|w| w.greatest).expect("leakage bounds it").si();
/// assert!((greatest / ((2.0 * 450.0 - 800.0) / 2e-3) - 1.0).abs() < 1e-9);
/// assert!(sizing.candidates.iter().all(|c| c.figures.margin.si() >= 0.0));
/// ```
pub fn balancing(bank: &Bank, input_sha256: &str, ask: &BalancingAsk) -> Result<Sizing<BalancingFigures>, SizeError> {
    let (mut job, told) = Job::of(bank, ask)?;
    let over = over_by_fast_charge(&job)?;
    // What breaks a rating whatever the resistors is no matter of a window.
    job.fast_charge &= over.is_none();
    let demands = demands(&job, ask);
    let probes = probes(&job, ask)?;
    let looks = Looks::at(&probes, job.middle(), &demands)?;
    let shown = looks.shown();
    let overload = |design: &Design, element: &Element| {
        let (watt, volt) =
            element_load(design, element.tolerance, looks.of(element.tolerance, design.parallel).volts(design));
        if clearly_over(watt, usable_power(&element.rating, job.ambient, ask.build.margin)) {
            return Some("power");
        }
        element.rating.voltage.filter(|most| clearly_over(volt, most.si())).map(|_| "voltage")
    };
    let window_of = |parallel: u32, element: &Element| match &over {
        Some(_) => Spans::of(Vec::new()),
        None => looks.of(element.tolerance, parallel).actual(),
    };
    let found = listed_by(&ask.build, window_of, overload);
    let (candidates, refused) = planned(&ask.build, &found, |design| tried(&job, ask, design))?;

    let window = if over.is_some() { Spans::of(Vec::new()) } else { shown.window.clone() };
    let mut findings: Vec<Finding> = over.iter().cloned().collect();
    if shown.window.is_empty() {
        let allow = |demand: &Demand<Kind>, point: &probe::Point| {
            let leakage = shown.probe.without_leakage(point.ohms).unwrap_or(f64::NAN);
            way_for(&job, demand, point, &Without { leakage, tolerance: shown.has_tolerance() })
        };
        let ways = Ways { allow: &allow, instead: &instead, nowhere: &nowhere };
        findings.extend(collision::explained_over("a marked resistance", &demands, &shown.spans, &shown.scan, &ways)?);
    } else if candidates.is_empty() && over.is_none() {
        findings.push(nothing_fits(&ask.build, &found, refused, &window));
    }
    findings.extend(candidates.first().map_or_else(Vec::new, |first| about_the_first(&first.figures, &first.not_met)));
    let mut demand_results = demand_results(&demands, &shown.spans);
    demand_results.extend(over.as_ref().map(|_| DemandResult {
        demand: "the rated voltage of every unit right after a fast charge".into(),
        least: None,
        greatest: None,
        nowhere: true,
        gaps: false,
    }));
    let ids: Vec<String> = across_units(&job, &job.place).into_iter().map(|r| r.id).collect();
    Ok(Sizing {
        ebbvolt: Stamp { version: env!("CARGO_PKG_VERSION"), format: 1 },
        size: "balancing",
        tag: job.description.tag.clone(),
        input_sha256: input_sha256.to_string(),
        id: format!("{} to {}", ids.first().map_or("", String::as_str), ids.last().map_or("", String::as_str)),
        connection: None,
        across: job.across.clone(),
        charged_to: ChargedTo {
            nominal: job.description.charged_to.nominal,
            highest: job.description.charged_to.highest,
        },
        ambient: job.ambient,
        power_margin: ask.build.margin,
        demands: demand_results,
        window: window_result(&demands, &shown.spans, &window),
        searched: searched(&ask.build, &found, refused),
        candidates,
        findings,
        assumptions: assumptions(bank, ask, &job, told, shown),
    })
}

/// A string, and what is asked of it.
struct Job {
    /// The bank with the ambient that was asked for, and with its groups written out.
    description: Description,
    across: Pair,
    members: Vec<Member>,
    bears: Vec<Bears>,
    written_out: Vec<WrittenOut>,
    /// A new resistor, its value and its place not known yet; its id is what comes before the numbers.
    place: Resistor,
    /// Which limits count.
    counted: Vec<usize>,
    ambient: Temperature,
    /// Does the way from a fast charge on count?
    fast_charge: bool,
}

impl Job {
    /// The job, and what had to be assumed for it.
    fn of(bank: &Bank, ask: &BalancingAsk) -> Result<(Self, Vec<String>), SizeError> {
        ask.build.check()?;
        if bank.is_three_phase() {
            return Err(SizeError::Asked(
                "the bank is fed from three phases; balance one leg as a bank of its own, with `charged_to` the crest of \
                 what stands across it"
                    .into(),
            ));
        }
        let across = match (&ask.across, bank.description().terminals.as_slice()) {
            (Some(pair), _) => pair.clone(),
            (None, [first, .., last]) => [first.clone(), last.clone()],
            _ => return Err(SizeError::Asked("the bank has no two terminals; write `--across P,N`".into())),
        };
        let none = |leakage: &crate::quantity::Current| leakage.si() <= 0.0;
        if ask.leakage.as_ref().is_some_and(none) {
            return Err(SizeError::Asked(
                "without leakage there is nothing to balance when settled; write its greatest, such as `--leakage 3mA`"
                    .into(),
            ));
        }
        let found = string::found(bank.description(), &across, ask.capacitor.as_deref())?;
        let units::Units { bears, mut assumptions } = units(&found, ask)?;
        let string::Found { mut description, across, members, written_out } = found;
        description.ambient = ask.ambient.or(description.ambient);
        for lumped in &written_out {
            assumptions.push(written_out_text(lumped));
        }
        let mut counted = Vec::new();
        if let Some(target) = ask.target {
            description.limits.push(Limit {
                id: free_id("target", &description),
                rule: Rule::Own { any_of: vec![Bound::Voltage(target.voltage)], within: target.within },
                at: None,
                single_fault: false,
            });
            counted.push(description.limits.len() - 1);
        } else if ask.limits {
            counted = (0..description.limits.len()).filter(|i| has_bound(&description.limits[*i])).collect();
            if counted.is_empty() {
                return Err(SizeError::Asked(
                    "the file has no limit that could bound the resistors; leave out `--limits`, or write `--within 5min`"
                        .into(),
                ));
            }
        }
        let place = Resistor {
            id: prefix(ask.id.as_deref(), &description, members.len())?,
            role: Role::Balancing,
            value: Resistance::from_si(1.0),
            tolerance: None,
            across: across.clone(),
            series: 1,
            parallel: 1,
            rating: Default::default(),
            tempco: None,
            ageing: None,
            phases: None,
            switched: None,
        };
        let (ambient, fast_charge) = (ask.ambient.unwrap_or_else(|| bank.ambient()), ask.fast_charge);
        let job = Job { description, across, members, bears, written_out, place, counted, ambient, fast_charge };
        Ok((job, assumptions))
    }

    /// The bank with these resistors in it.
    fn with(&self, resistors: &[Resistor]) -> Description {
        let mut with = self.description.clone();
        with.resistors.extend(resistors.iter().cloned());
        with
    }

    fn volts_highest(&self) -> f64 {
        self.description.charged_to.highest.si()
    }

    /// A resistance in the middle of what can matter.
    fn middle(&self) -> f64 {
        let rated: f64 = self.bears.iter().map(|b| b.rated.si()).sum();
        let leakage = self.bears.iter().map(|b| b.leakage.si()).fold(0.0, f64::max);
        let (units, volts) = (self.bears.len() as f64, self.volts_highest());
        let spare = if rated > volts { (rated - volts) / (units - 1.0) } else { volts / units };
        spare / leakage
    }
}

/// `resistor` across every unit, numbered.
fn across_units(job: &Job, resistor: &Resistor) -> Vec<Resistor> {
    let one = |(number, member): (usize, &Member)| Resistor {
        id: format!("{}{}", job.place.id, number + 1),
        across: member.across.clone(),
        ..resistor.clone()
    };
    job.members.iter().enumerate().map(one).collect()
}

/// A name before numbers that is free for so many resistors.
fn prefix(asked: Option<&str>, description: &Description, how_many: usize) -> Result<String, SizeError> {
    let d = description;
    let taken = |id: &String| {
        d.resistors.iter().any(|r| r.id == *id)
            || d.capacitors.iter().any(|c| c.id == *id)
            || d.sinks.iter().any(|s| s.id == *id)
            || d.supplies.iter().any(|s| s.id == *id)
    };
    let clash = |prefix: &str| (1..=how_many).map(|n| format!("{prefix}{n}")).find(|id| taken(id));
    if let Some(prefix) = asked {
        return match clash(prefix) {
            None => Ok(prefix.to_string()),
            Some(id) => {
                Err(SizeError::Asked(format!("the bank has a part `{id}`; write another name, such as `--id RX`")))
            }
        };
    }
    let wishes = std::iter::once("RB".to_string()).chain((2..).map(|n| format!("RB{n}.")));
    Ok(wishes.into_iter().find(|prefix| clash(prefix).is_none()).unwrap_or_default())
}
