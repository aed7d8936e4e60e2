//! `tool`: a resistor that people connect by hand, held until the voltage is down, and that does not burn.

mod applied;
mod bearing;
mod demands;
mod in_a_row;
mod probe;
mod request;
mod result;
mod trial;
mod words;

pub use request::ToolAsk;
pub use result::{AskedRow, FaultLeft, InARowResult, Placement, ToolFigures};

use super::arrays::{Design, Listed, listed};
use super::collision::{self, Ways};
use super::error::SizeError;
use super::result::Sizing;
use super::scan::{Probe, Scan};
use super::spans::Spans;
use super::trial::planned;
use super::window::{demand_results, nothing_fits, searched, window_result};
use crate::bank::Bank;
use crate::bank::description::Lasts;
use crate::discharge::InARow;
use crate::finding::Finding;
use crate::plan::{ChargedTo, Stamp};
use crate::quantity::{Direction, Quantity, Time, duration, exact};
use applied::Applied;
use bearing::{Bearing, taus};
use demands::{Kind, demands, instead, nowhere, way_for};
use probe::{Fitted, Point};
use rayon::prelude::*;
use trial::Setup;

/// Finds discharge tools for `bank`. `input_sha256` is given with the answer, as with a plan.
///
/// # Errors
/// Where what is asked makes no sense, the place does not exist, or the engine can't certify a figure.
///
/// # Example: the hand calculation R = t / (C ln(V/v)) is the upper end of what the hold time asks for
/// ```
/// use ebbvolt::{bank::file, data, quantity::{Quantity, Time}, size};
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
/// let ask = size::ToolAsk { build, within: Some(Time::from_si(10.0)), ..size::ToolAsk::default() };
/// let sizing = size::tool(&bank, "", &ask).expect("a certified result");
/// let greatest = sizing.demands[0].greatest.expect("time bounds it").si();
/// assert!((greatest / (10.0 / (1e-3 * (565.0f64 / 50.0).ln())) - 1.0).abs() < 1e-9);
/// assert!(!sizing.candidates.is_empty());
/// ```
pub fn tool(bank: &Bank, input_sha256: &str, ask: &ToolAsk) -> Result<Sizing<ToolFigures>, SizeError> {
    ask.build.check()?;
    let ambient = ask.ambient.unwrap_or_else(|| bank.ambient());
    let lead = ask.lead.map_or(0.0, Quantity::si);
    let fitted = |applied: &Applied| Fitted::new(applied, lead, taus(&ask.build.elements), row(applied, ask)?);
    let mut applied = Applied::of(bank, ask)?;
    let mut probe = fitted(&applied)?;
    for gone in [false, true] {
        if !probe.reached_without(applied.held)? {
            break;
        }
        let harder = applied.at_isolation(bank, ask, gone);
        // A bank may be no bank any more without its bleeders.
        if harder.with(harder.place.clone()).is_ok() {
            probe = fitted(&harder)?;
            applied = harder;
        }
    }
    let row = row(&applied, ask)?;
    // Without a distance that was asked for, one discharge follows the other as soon as the tool is lifted.
    let apart = ask.banks.map(|_| row.every.max(connected(&applied)));
    let bearing = Bearing { ambient, margin: ask.build.margin, row: apart, taus: taus(&ask.build.elements) };
    let demands = demands(&applied, ask, &bearing);
    let scan = Scan::around(middle(&applied), &probe, &demands)?;
    let spans: Vec<Spans> = demands.par_iter().map(|d| scan.spans(d)).collect::<Result<_, _>>()?;
    let window = spans.iter().fold(Spans::all(), |w, s| w.and(s));
    let points = closely(&scan, &probe, &window)?;
    let setup = Setup { applied: &applied, ask, probe: &probe, bearing: &bearing, row, lead };
    let found = listed(&ask.build, |_| window.clone(), |design, element| bearing.overload(design, element, &points));
    let without = demands.iter().zip(scan.without(&demands)).filter(|(d, _)| matches!(d.kind, Kind::Goal(..)));
    // What the bank does by itself asks nothing of a tool: any would do, and none is given.
    let by_itself = without.into_iter().all(|(_, met)| met);
    let found = if by_itself { Listed::default() } else { found };
    let (candidates, refused) = planned(&ask.build, &found, |design: &Design| setup.tried(design))?;

    let mut findings: Vec<Finding> = words::from_isolation(&applied).into_iter().collect();
    let drains = words::drains(&applied.description);
    if by_itself {
        findings.push(words::by_itself());
    } else if window.is_empty() {
        let ways = Ways { allow: &way_for, instead: &instead(drains), nowhere: &nowhere };
        findings.extend(collision::explained(&demands, &spans, &scan, &ways)?);
    } else if candidates.is_empty() {
        findings.push(nothing_fits(&ask.build, &found, refused, &window));
    }
    if let Some(first) = candidates.first() {
        findings.extend(words::findings(bank, ask, &applied, first, drains)?);
    }
    let description = &applied.description;
    Ok(Sizing {
        ebbvolt: Stamp { version: env!("CARGO_PKG_VERSION"), format: 1 },
        size: "tool",
        tag: description.tag.clone(),
        input_sha256: input_sha256.to_string(),
        id: applied.place.id.clone(),
        across: applied.place.across.clone(),
        connection: applied.place.phases.map(|c| c.word()),
        charged_to: ChargedTo { nominal: description.charged_to.nominal, highest: description.charged_to.highest },
        ambient,
        power_margin: ask.build.margin,
        demands: demand_results(&demands, &spans),
        window: window_result(&demands, &spans, &window),
        searched: searched(&ask.build, &found, refused),
        candidates,
        findings,
        assumptions: words::assumptions(bank, ask, &applied),
    })
}

/// How long the tool is connected, as far as the steps say so themselves.
fn connected(applied: &Applied) -> f64 {
    let steps = &applied.description.procedure[applied.first..=applied.last];
    let fixed = |lasts: &Lasts| if let Lasts::For(time) = lasts { time.si() } else { 0.0 };
    steps.iter().map(|s| fixed(&s.lasts)).sum()
}

/// The discharges in a row that were asked for; one where none were.
fn row(applied: &Applied, ask: &ToolAsk) -> Result<InARow, SizeError> {
    let every = ask.every.map_or(0.0, Quantity::si);
    let connected = connected(applied);
    if let Some(asked) = ask.every.filter(|t| t.si() < connected) {
        let text = format!(
            "`--every {}` is shorter than the {} for which the tool is connected each time; write a longer one, or leave \
             it out for one right after the other",
            exact(asked),
            duration(Time::from_si(connected), Direction::Up)
        );
        return Err(SizeError::Asked(text));
    }
    if ask.banks == Some(0) {
        return Err(SizeError::Asked("no bank at all needs no tool; write `--banks 3`".into()));
    }
    let count = f64::from(ask.banks.unwrap_or(1));
    Ok(InARow { first: applied.first, last: applied.last, every, count })
}

/// A resistance in the middle of what can matter: the time over all the capacitance.
fn middle(applied: &Applied) -> f64 {
    let capacitors = &applied.description.capacitors;
    let farad: f64 = capacitors.iter().map(|c| c.value.si() * f64::from(c.parallel) / f64::from(c.series)).sum();
    applied.held.si() / farad.max(f64::MIN_POSITIVE)
}

/// Points per decade of the window between which the figures of elements are interpolated.
const CLOSE_PER_DECADE: f64 = 12.0;
/// And how many of them at most: each is a procedure solved over the tolerance box.
const MOST_CLOSE: f64 = 32.0;

/// The points that were looked at, and more of them inside the window.
fn closely(scan: &Scan<Fitted>, probe: &Fitted, window: &Spans) -> Result<Vec<Point>, SizeError> {
    let mut points: Vec<Point> = scan.points().iter().map(|(_, p)| p.clone()).collect();
    let ends = points.first().zip(points.last()).map(|(a, b)| (a.ohms, b.ohms)).zip(window.ends());
    let Some(((first, last), ends)) = ends else { return Ok(points) };
    let (low, high) = (ends.low.max(first), ends.high.min(last));
    if low < high {
        let count = ((high / low).log10() * CLOSE_PER_DECADE).ceil().clamp(1.0, MOST_CLOSE);
        let at = |k: u32| low * (high / low).powf(f64::from(k) / count);
        let more: Vec<u32> = (0..=count as u32).collect();
        let found: Result<Vec<Point>, _> = more.par_iter().map(|k| probe.at(at(*k))).collect();
        points.extend(found?);
    }
    points.sort_by(|x, y| x.ohms.total_cmp(&y.ohms));
    Ok(points)
}
