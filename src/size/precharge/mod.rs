//! `precharge`: the resistor through which a supply charges the bank before its main contactor closes.

mod charge;
mod demands;
mod job;
mod load;
mod request;
mod result;
mod trial;

pub use request::{Attempts, MainContactor, PrechargeAsk, USUAL_SHARE};
pub use result::{Inrush, PrechargeFigures, Repeated, Shorted};

use super::arrays::{Design, listed};
use super::collision::{self, Ways};
use super::error::SizeError;
use super::result::Sizing;
use super::scan::Scan;
use super::spans::Spans;
use super::trial::{planned, rest_not_met};
use super::window::{demand_results, nothing_fits, searched, window_result};
use crate::bank::Bank;
use crate::bank::description::Lasts;
use crate::bank::stock::Element;
use crate::finding::{Finding, Severity};
use crate::plan::{ChargedTo, Stamp};
use crate::quantity::{Direction, Quantity, Ratio, celsius, exact, show};
use charge::Charge;
use demands::{demands, instead, nowhere, way_for};
use job::{Job, placed};
use trial::tried;

/// Finds precharge resistors for a supply of `bank`. `input_sha256` is given with the answer, as with a plan.
///
/// # Errors
/// Where what is asked makes no sense, the place does not exist, or the engine can't certify a figure.
///
/// # Example: the hand calculation R = t / (C ln(1/(1 - share))) is the upper end of the window
/// ```
/// use ebbvolt::{bank::file, data, quantity::{Quantity, Ratio, Time}, size};
/// let text = b"
/// ebbvolt: 1
/// tag: PU-09
/// touch_voltage: 50 V
/// charged_to: 565 V
/// capacitors: [{id: C1, value: 1000 uF}]
/// ";
/// let (bank, _) = file::read("bank.yaml", text).expect("a valid file");
/// let elements = file::read_stock("generic", data::generic_stock().as_bytes()).expect("a valid list");
/// let build = size::Build { elements, ..size::Build::default() };
/// let share = Some(Ratio::from_si(0.95));
/// let ask = size::PrechargeAsk { build, share, ..size::PrechargeAsk::within(Time::from_si(2.0)) };
/// let sizing = size::precharge(&bank, "", &ask).expect("a certified result");
/// let greatest = sizing.window.and_then(|w| w.greatest).expect("time bounds it").si();
/// assert!((greatest / (2.0 / (1e-3 * 20f64.ln())) - 1.0).abs() < 1e-9);
/// assert!(!sizing.candidates.is_empty());
/// ```
pub fn precharge(bank: &Bank, input_sha256: &str, ask: &PrechargeAsk) -> Result<Sizing<PrechargeFigures>, SizeError> {
    let job = Job::of(bank, ask)?;
    let Job { description, supply, share, ambient, .. } = &job;
    let volts = supply.voltage.si();
    let demands = demands(ask, *share);
    let middle = middle(&job, ask);
    let charge =
        Charge::new(&placed(description, supply), supply, *share, ask.within)?.certified(middle, longest(&job, ask))?;
    let scan = Scan::around(middle, &charge, &demands)?;
    let met: Vec<Spans> = demands.iter().map(|d| scan.spans(d)).collect::<Result<_, SizeError>>()?;
    let window = met.iter().fold(Spans::all(), |w, s| w.and(s));
    let overload = |design: &Design, element: &Element| load::overload(&charge, &scan, ask, *ambient, design, element);
    let found = listed(&ask.build, |_| window.clone(), overload);
    let (candidates, refused) = planned(&ask.build, &found, |design: &Design| tried(&job, ask, design))?;

    let mut findings = Vec::new();
    if window.is_empty() {
        let point = scan.points().first().map(|(_, point)| point);
        findings.extend(collision::explained(
            &demands,
            &met,
            &scan,
            &Ways {
                allow: &|demand, point| way_for(demand, point, volts),
                instead: &instead,
                nowhere: &|demand| nowhere(demand, charge.least, point, volts),
            },
        )?);
    } else if candidates.is_empty() {
        findings.push(nothing_fits(&ask.build, &found, refused, &window));
    }
    findings.extend(notes(&job));
    findings.extend(candidates.first().and_then(|c| rest_not_met(&c.not_met, "file")));
    Ok(Sizing {
        ebbvolt: Stamp { version: env!("CARGO_PKG_VERSION"), format: 1 },
        size: "precharge",
        tag: description.tag.clone(),
        input_sha256: input_sha256.to_string(),
        id: supply.id.clone(),
        connection: None,
        across: supply.across.clone(),
        charged_to: ChargedTo { nominal: description.charged_to.nominal, highest: description.charged_to.highest },
        ambient: *ambient,
        power_margin: ask.build.margin,
        demands: demand_results(&demands, &met),
        window: window_result(&demands, &met, &window),
        searched: searched(&ask.build, &found, refused),
        candidates,
        findings,
        assumptions: assumptions(bank, ask, &job),
    })
}

/// A resistance in the middle of what can matter: with it all the capacitance is at the share in time.
fn middle(job: &Job, ask: &PrechargeAsk) -> f64 {
    let capacitors = job.description.capacitors.iter();
    let farad: f64 = capacitors.map(|c| c.value.si() * f64::from(c.parallel) / f64::from(c.series)).sum();
    let share = job.share.unwrap_or(USUAL_SHARE);
    ask.within.si() / (farad * -(-share).ln_1p())
}

/// How long the supply may be connected in a trial's plan, in second: for the precharge, or in the file's own steps.
fn longest(job: &Job, ask: &PrechargeAsk) -> f64 {
    let steps = job.description.procedure.iter().map(|step| match step.lasts {
        Lasts::For(time) => time.si(),
        Lasts::Until(_) => 0.0,
    });
    steps.sum::<f64>().max(ask.within.si())
}

/// What the file's voltages say of each other.
fn notes(job: &Job) -> Vec<Finding> {
    let (supply, highest) = (&job.supply, job.description.charged_to.highest);
    let mut notes = Vec::new();
    if supply.voltage < highest {
        let text = format!(
            "{} is given with {}, and the bank's highest voltage is {}: where the supply can be that high, currents, \
             powers and energies of a charge and the inrush are greater than found here.",
            supply.id,
            exact(supply.voltage),
            exact(highest)
        );
        notes.push(
            Finding::new(Severity::Note, "supply-below-highest", text)
                .with_help("Give the supply's highest voltage; a charge reaches a share of it in the same time."),
        );
    }
    notes
}

fn assumptions(bank: &Bank, ask: &PrechargeAsk, job: &Job) -> Vec<String> {
    let supply = &job.supply;
    let mut list = vec![
        format!(
            "{} feeds {} with {}{}. Shares are of that voltage, at that pair.",
            supply.id,
            supply.across.join(" - "),
            exact(supply.voltage),
            if job.in_file { " as the file says" } else { "" }
        ),
        "A charge starts from an empty bank where its time, the voltage it comes to and the inrush are found; currents, \
         powers, energies and heat are those of the worst of 0 V, the nominal and the highest voltage at its start."
            .to_string(),
        "The window is one of actual resistance: with all other values at the worst end of their tolerances. A design \
         fits where all of its tolerance does."
            .to_string(),
        "The array's elements share one tolerance end where times and currents are found; unequal sharing counts in the \
         figures of one element."
            .to_string(),
        "Loads that start before the main contactor has closed are not in the file and not counted: they hold the bank \
         lower and heat the resistor."
            .to_string(),
    ];
    if ask.main.is_some() {
        list.push(
            "Inrush: the supply's voltage less the least that the bank has come to, over the resistance of the closed \
             path; inductance of the path, which makes it less, is not counted."
                .into(),
        );
    }
    if ask.share.is_none() && job.share.is_some() {
        list.push(format!(
            "No share was asked for: {} of the supply's voltage (common practice).",
            show(Ratio::from_si(USUAL_SHARE), Direction::Down)
        ));
    }
    if ask.attempts.is_some() {
        list.push(
            "Attempts: each from an empty bank, the first with the resistor at the air's temperature; the body cools \
             between them by its thermal time."
                .into(),
        );
    }
    list.push(
        "A shorted bank: all of the supply's voltage across the resistor, from the air's temperature, until somebody \
         or something opens; told by the body's heating alone, not by the overload rating."
            .into(),
    );
    if ask.build.margin > 0.0 {
        list.push(format!(
            "Of pulse energy, overload and the body's rise over the air, {} stays unused.",
            show(Ratio::from_si(ask.build.margin), Direction::Down)
        ));
    }
    list.extend(ask.build.assumptions());
    match ask.ambient {
        Some(ambient) => list.push(format!(
            "Air at the resistors: {:.0} °C as asked, whatever the file says; the plan of the file itself uses its own.",
            celsius(ambient)
        )),
        None if !bank.ambient_given() => {
            list.push(format!("Air at the resistors: {:.0} °C, since the file gives none.", celsius(bank.ambient())));
        }
        None => {}
    }
    list
}
