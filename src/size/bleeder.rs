//! `bleeder`: a resistor that drains the bank for good, from isolation on.

use super::arrays::{Design, Listed, listed, usable_power};
use super::collision;
use super::probe::Probe;
use super::request::{Ask, SizeError};
use super::result::{Candidate, DemandResult, Searched, Sizing, Window};
use super::spans::Spans;
use super::trial::tried;
use super::window::{Demand, Kind, Scan};
use crate::bank::Bank;
use crate::bank::description::{Bound, Connection, Description, Limit, Pair, Resistor, Role, Rule};
use crate::data::{LimitKind, published_limit};
use crate::finding::{Finding, Severity};
use crate::plan::{ChargedTo, Stamp};
use crate::quantity::{Direction, Quantity, Resistance, Time, celsius, duration, exact, show};
use rayon::prelude::*;

/// Designs that are put into the bank and fail the full plan are passed over, but not more than this many for each
/// that is to be shown.
const TRIES: usize = 8;

/// Finds bleeders for `bank`. `input_sha256` is given with the answer, as with a plan.
///
/// # Errors
/// Where what is asked makes no sense, the place does not exist, or the engine can't certify a figure.
///
/// # Example: the hand calculation R = t / (C ln(V/v)) is the upper end of the window
/// ```
/// use ebbvolt::{bank::file, data, quantity::{Quantity, Time, Voltage}, size};
/// let text = b"
/// ebbvolt: 1
/// tag: PU-09
/// touch_voltage: 50 V
/// charged_to: 565 V
/// capacitors: [{id: C1, value: 1000 uF}]
/// ";
/// let (bank, _) = file::read("bank.yaml", text).expect("a valid file");
/// let target = size::Target { voltage: Voltage::from_si(50.0), within: Time::from_si(60.0) };
/// let elements = file::read_stock("generic", data::generic_stock().as_bytes()).expect("a valid list");
/// let ask = size::Ask { target: Some(target), elements, ..size::Ask::default() };
/// let sizing = size::bleeder(&bank, "", &ask).expect("a certified result");
/// let greatest = sizing.window.and_then(|w| w.greatest).expect("time bounds it").si();
/// assert!((greatest / (60.0 / (1e-3 * (565.0f64 / 50.0).ln())) - 1.0).abs() < 1e-9);
/// assert!(!sizing.candidates.is_empty());
/// ```
pub fn bleeder(bank: &Bank, input_sha256: &str, ask: &Ask) -> Result<Sizing, SizeError> {
    let Job { description, counted, place } = Job::of(bank, ask)?;
    let ambient = ask.ambient.unwrap_or_else(|| bank.ambient());
    let demands = demands(&description, &counted, ask, ambient);
    let middle = middle(&description, &counted);

    // With single faults the number of strings decides what one open element leaves.
    let faults = counted.iter().any(|i| description.limits[*i].single_fault);
    let strings: Vec<u32> = if faults { (1..=ask.parallel_up_to).collect() } else { vec![1] };
    let probes: Vec<Probe> = strings
        .iter()
        .map(|n| Probe::new(&description, &Resistor { parallel: *n, ..place.clone() }, counted.clone()))
        .collect::<Result<_, _>>()?;
    let scans: Vec<Scan> =
        probes.iter().map(|p| Scan::around(middle, p, &demands)).collect::<Result<_, SizeError>>()?;
    let met: Vec<Vec<Spans>> = scans
        .par_iter()
        .map(|scan| demands.iter().map(|d| scan.spans(d)).collect::<Result<Vec<Spans>, SizeError>>())
        .collect::<Result<_, _>>()?;
    let windows: Vec<Spans> = met.iter().map(|spans| spans.iter().fold(Spans::all(), |w, s| w.and(s))).collect();
    // What is told of the window is told of the most strings: with them one open element weighs least.
    let (Some(scan), Some(spans), Some(window)) = (scans.last(), met.last(), windows.last()) else {
        return Err(SizeError::Asked("at least one string is needed; write `--parallel-up-to 1` or more".into()));
    };
    let of = |parallel: u32| windows.get(parallel as usize - 1).unwrap_or(window).clone();
    let slack = if scan.voltage_is_held() { 0.0 } else { 0.05 };
    let found = listed(ask, ambient, of, |ohms| scan.voltage(ohms), slack);
    let (candidates, refused) = planned(&description, ask, &found, &place, &counted)?;

    let mut findings = Vec::new();
    if window.is_empty() {
        findings.extend(collision::explained(ask, &demands, spans, scan)?);
    } else if candidates.is_empty() {
        findings.push(nothing_fits(ask, &found, refused, window));
    }
    if demands.iter().zip(scan.without(&demands)).all(|(d, met)| met || !matches!(d.kind, Kind::Limit(_))) {
        let text = "The bank meets these limits without a new resistor.";
        findings.push(Finding::new(Severity::Note, "already-met", text));
    }
    if candidates.iter().any(|c| !c.not_met.is_empty()) {
        let missed: Vec<String> = candidates.first().map_or_else(Vec::new, |c| c.not_met.clone());
        let text = format!(
            "The plan with the first design does not meet everything else in the file: {}. `ebbvolt plan` tells more.",
            missed.join(", ")
        );
        findings.push(Finding::new(Severity::Warning, "rest-of-plan-not-met", text));
    }
    Ok(Sizing {
        ebbvolt: Stamp { version: env!("CARGO_PKG_VERSION"), format: 1 },
        size: "bleeder",
        tag: description.tag.clone(),
        input_sha256: input_sha256.to_string(),
        id: ask.id.clone(),
        connection: place.phases.map(word),
        across: place.across,
        charged_to: ChargedTo { nominal: description.charged_to.nominal, highest: description.charged_to.highest },
        ambient,
        power_margin: ask.margin,
        demands: demands.iter().zip(spans).map(|(d, s)| demand_result(d, s)).collect(),
        window: window_result(&demands, spans, window),
        searched: Searched {
            elements: ask.elements.len(),
            inside_window: found.inside,
            over_power: found.over_power,
            over_voltage: found.over_voltage,
            designs: found.designs.len(),
            refused_by_plan: refused,
        },
        candidates,
        findings,
        assumptions: assumptions(bank, ask, faults),
    })
}

/// The bank as it is to be sized for.
struct Job {
    /// With the ambient and the target that were asked for.
    description: Description,
    /// Which of its limits count.
    counted: Vec<usize>,
    /// The new resistor, its value not known yet.
    place: Resistor,
}

impl Job {
    fn of(bank: &Bank, ask: &Ask) -> Result<Self, SizeError> {
        if ask.elements.is_empty() || ask.series_up_to == 0 || ask.parallel_up_to == 0 || ask.show == 0 {
            return Err(SizeError::Asked(
                "there is nothing to build from: give elements, and counts of 1 or more".into(),
            ));
        }
        if !(0.0..1.0).contains(&ask.margin) {
            return Err(SizeError::Asked("the margin on power has to be under 100 %; write `--margin 40%`".into()));
        }
        let mut description = bank.description().clone();
        description.ambient = ask.ambient.or(description.ambient);
        let counted: Vec<usize> = match ask.target {
            Some(target) => {
                description.limits.push(Limit {
                    id: free_id("target", &description),
                    rule: Rule::Own { any_of: vec![Bound::Voltage(target.voltage)], within: target.within },
                    at: None,
                    single_fault: ask.single_fault,
                });
                vec![description.limits.len() - 1]
            }
            None => (0..description.limits.len()).filter(|i| has_bound(&description.limits[*i])).collect(),
        };
        if counted.is_empty() {
            return Err(SizeError::Asked(
                "the file has no limit to size for; write `--within 5min`, and `--voltage 60V` where the touch voltage \
                 of the file is not the one to reach"
                    .into(),
            ));
        }
        for index in &counted {
            description.limits[*index].single_fault |= ask.single_fault;
        }
        let across = match (&ask.across, description.terminals.as_slice()) {
            (Some(pair), _) => pair.clone(),
            (None, [first, .., last]) => [first.clone(), last.clone()],
            _ => return Err(SizeError::Asked("the bank has no two terminals; write `--across P,N`".into())),
        };
        let phases =
            (bank.is_three_phase() && ask.across.is_none()).then(|| ask.connection.unwrap_or(Connection::Delta));
        if phases.is_none() && ask.connection.is_some() {
            return Err(SizeError::Asked(
                "`--connection` is for a three-phase resistor between the terminals; leave it out".into(),
            ));
        }
        Ok(Job { description, counted, place: Resistor { phases, ..stand_in(ask, &across) } })
    }
}

/// A name that no limit has.
fn free_id(wish: &str, description: &Description) -> String {
    let taken = |id: &str| description.limits.iter().any(|l| l.id == id);
    let numbered = (2..).map(|n| format!("{wish}-{n}"));
    std::iter::once(wish.to_string()).chain(numbered).find(|id| !taken(id)).unwrap_or_default()
}

fn word(connection: Connection) -> &'static str {
    match connection {
        Connection::Delta => "delta",
        Connection::Star => "star",
        Connection::OpenDelta => "open-delta",
    }
}

/// False for a limit that is a waiting time alone.
fn has_bound(limit: &Limit) -> bool {
    match &limit.rule {
        Rule::Own { .. } => true,
        Rule::Published(id) => published_limit(id).is_some_and(|p| !matches!(p.kind, LimitKind::Wait { .. })),
    }
}

/// A resistor whose value is not known yet.
fn stand_in(ask: &Ask, across: &Pair) -> Resistor {
    Resistor {
        id: ask.id.clone(),
        role: Role::Bleeder,
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
    }
}

fn demands(
    description: &Description,
    counted: &[usize],
    ask: &Ask,
    ambient: crate::quantity::Temperature,
) -> Vec<Demand> {
    let limits = counted.iter().enumerate().map(|(number, index)| {
        let limit = &description.limits[*index];
        let rule = match &limit.rule {
            Rule::Own { any_of, within } => match any_of.as_slice() {
                [Bound::Voltage(v)] => format!(" ({} within {})", exact(*v), duration(*within, Direction::Down)),
                _ => String::new(),
            },
            Rule::Published(_) => String::new(),
        };
        let faults = if limit.single_fault { " with any one part failed" } else { "" };
        Demand { name: format!("limit {}{rule}{faults}", limit.id), kind: Kind::Limit(number) }
    });
    let loss = ask.max_loss.map(|most| Demand {
        name: format!("a standing loss of at most {}", exact(most)),
        kind: Kind::Loss(most.si()),
    });
    let current = ask
        .max_current
        .map(|most| Demand { name: format!("a current of at most {}", exact(most)), kind: Kind::Current(most.si()) });
    let most = ask.elements.iter().map(|e| usable_power(&e.rating, ambient, ask.margin)).fold(0.0, f64::max)
        * f64::from(ask.series_up_to * ask.parallel_up_to);
    let rating = most.is_finite().then(|| Demand {
        name: format!(
            "what the largest arrays bear in air of {:.0} °C ({})",
            celsius(ambient),
            show(crate::quantity::Power::from_si(most), Direction::Down)
        ),
        kind: Kind::Rating(most),
    });
    limits.chain(loss).chain(current).chain(rating).collect()
}

/// A resistance in the middle of what can matter: the time over all the capacitance.
fn middle(description: &Description, counted: &[usize]) -> f64 {
    let farad: f64 =
        description.capacitors.iter().map(|c| c.value.si() * f64::from(c.parallel) / f64::from(c.series)).sum();
    let within = |limit: &Limit| match &limit.rule {
        Rule::Own { within, .. } => Some(within.si()),
        Rule::Published(id) => published_limit(id).and_then(|p| match &p.kind {
            LimitKind::AnyOf { within, .. } | LimitKind::VoltageByCapacitance { within, .. } => within.map(Time::si),
            LimitKind::BeforeSwitchingIn { .. } | LimitKind::Wait { .. } => None,
        }),
    };
    let seconds = counted.iter().filter_map(|i| within(&description.limits[*i])).filter(|t| *t > 0.0);
    let seconds = seconds.fold(f64::INFINITY, f64::min);
    if seconds.is_finite() { seconds / farad } else { 1.0 / farad }
}

/// The first designs that do the job by the full plan, and how many before them did not.
fn planned(
    description: &Description,
    ask: &Ask,
    found: &Listed,
    place: &Resistor,
    counted: &[usize],
) -> Result<(Vec<Candidate>, usize), SizeError> {
    let one = |design: &Design| tried(description, ask, design, design.resistor(ask, place), counted);
    let (mut candidates, mut refused) = (Vec::new(), 0);
    for some in found.designs.chunks(ask.show).take(TRIES) {
        let trials: Vec<_> = some.par_iter().map(one).collect::<Result<_, SizeError>>()?;
        for trial in trials {
            if trial.passes && candidates.len() < ask.show {
                candidates.push(trial.candidate);
            } else if !trial.passes {
                refused += 1;
            }
        }
        if candidates.len() == ask.show {
            break;
        }
    }
    for (index, candidate) in candidates.iter_mut().enumerate() {
        candidate.rank = index + 1;
    }
    Ok((candidates, refused))
}

fn bounded(ohms: f64) -> Option<Resistance> {
    (ohms > 0.0 && ohms.is_finite()).then(|| Resistance::from_si(ohms))
}

fn demand_result(demand: &Demand, spans: &Spans) -> DemandResult {
    let ends = spans.ends();
    DemandResult {
        demand: demand.name.clone(),
        least: ends.and_then(|e| bounded(e.low)),
        greatest: ends.and_then(|e| bounded(e.high)),
        nowhere: spans.is_empty(),
        gaps: spans.as_slice().len() > 1,
    }
}

#[allow(clippy::float_cmp)] // An end of the window is the very end of one of the demands.
fn window_result(demands: &[Demand], spans: &[Spans], window: &Spans) -> Option<Window> {
    let ends = window.ends()?;
    let from = |has: &dyn Fn(&super::spans::Span) -> bool| {
        let found = demands.iter().zip(spans).find(|(_, s)| s.as_slice().iter().any(has));
        found.map(|(d, _)| d.name.clone())
    };
    let (least, greatest) = (bounded(ends.low), bounded(ends.high));
    Some(Window {
        least,
        least_from: least.and_then(|_| from(&|s| s.low == ends.low)),
        greatest,
        greatest_from: greatest.and_then(|_| from(&|s| s.high == ends.high)),
    })
}

/// The window is open, and no design is in it.
fn nothing_fits(ask: &Ask, found: &Listed, refused: usize, window: &Spans) -> Finding {
    let ends = window.ends().map_or((0.0, f64::INFINITY), |e| (e.low, e.high));
    let range = match (bounded(ends.0), bounded(ends.1)) {
        (Some(low), Some(high)) => {
            format!("{} to {}", show(low, Direction::Up), show(high, Direction::Down))
        }
        (None, Some(high)) => format!("up to {}", show(high, Direction::Down)),
        (Some(low), None) => format!("from {} on", show(low, Direction::Up)),
        (None, None) => "any resistance".into(),
    };
    let (text, help) = if found.inside == 0 {
        (
            format!("No array of the elements at hand lies in the window ({range}) with all of its tolerance."),
            "a finer series, a closer tolerance, other values, or more elements in an array",
        )
    } else if refused == 0 {
        (
            format!(
                "{} arrays lie in the window ({range}); one element would carry too much power in {} of them and too \
                 much voltage in {}.",
                found.inside, found.over_power, found.over_voltage
            ),
            "larger elements, a lower ambient, a smaller margin, or more elements in an array",
        )
    } else {
        (
            format!(
                "{} arrays lie in the window ({range}); of those that seemed to do, the full plan refused {refused}{}.",
                found.inside,
                if found.designs.len() > refused { ", and no more were tried" } else { "" }
            ),
            "`--show` with a greater number tries more of them",
        )
    };
    let series = format!(
        "Arrays of up to {} in series and {} in parallel were looked at. ",
        ask.series_up_to, ask.parallel_up_to
    );
    Finding::new(Severity::Warning, "no-design", text).with_help(format!("{series}What may help: {help}."))
}

fn assumptions(bank: &Bank, ask: &Ask, faults: bool) -> Vec<String> {
    let mut list = vec![
        "The window is one of actual resistance: with all other values at the worst end of their tolerances, at the \
         highest voltage. A design fits where all of its tolerance does."
            .to_string(),
        "The array's elements share one tolerance end where the wait and the loss are found; unequal sharing counts in \
         the figures of one element."
            .to_string(),
        "The year's energy is that of the nominal voltage, connected for 8760 h.".to_string(),
    ];
    if ask.generic {
        list.push(
            "The elements are generic ones with invented ratings, not parts that can be had: `--stock FILE` gives \
                   your own."
                .to_string(),
        );
    }
    if ask.margin <= 0.0 {
        list.push("No margin on power was asked for: an element may carry all that its derating allows.".to_string());
    }
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
    if ask.target.is_some() {
        list.push(
            "The target stands in place of the file's limits; those are checked in the plan all the same.".into(),
        );
    }
    if faults {
        list.push(format!(
            "Single faults count: the window is told for {} strings; with fewer, one open element weighs more.",
            ask.parallel_up_to
        ));
    }
    list
}
