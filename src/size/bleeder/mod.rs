//! `bleeder`: a resistor that drains the bank for good, from isolation on.

mod bearing;
mod demands;
mod probe;
mod request;
mod result;
mod trial;

pub use request::{BleederAsk, Target};
pub use result::{BleederFigures, ContactFigures, LimitHeld};

use super::arrays::{Design, clearly_over, element_load, listed, usable_power};
use super::collision::{self, Ways};
use super::error::SizeError;
use super::result::Sizing;
use super::scan::Scan;
use super::spans::Spans;
use super::trial::{planned, rest_not_met};
use super::window::{demand_results, nothing_fits, searched, window_result};
use crate::bank::Bank;
use crate::bank::description::{Bound, Connection, Description, Limit, Pair, Resistor, Role, Rule};
use crate::bank::stock::Element;
use crate::check::contact;
use crate::data::{LimitKind, published_limit};
use crate::finding::{Finding, Severity};
use crate::plan::{ChargedTo, Stamp};
use crate::quantity::{Quantity, Resistance, Time, celsius};
use bearing::{Bearing, Discharge};
use demands::{Kind, demands, instead, nowhere, way_for};
use probe::{Fitted, Point};
use rayon::prelude::*;
use trial::tried;

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
/// let build = size::Build { elements, ..size::Build::default() };
/// let ask = size::BleederAsk { build, target: Some(target), ..size::BleederAsk::default() };
/// let sizing = size::bleeder(&bank, "", &ask).expect("a certified result");
/// let greatest = sizing.window.and_then(|w| w.greatest).expect("time bounds it").si();
/// assert!((greatest / (60.0 / (1e-3 * (565.0f64 / 50.0).ln())) - 1.0).abs() < 1e-9);
/// assert!(!sizing.candidates.is_empty());
/// ```
pub fn bleeder(bank: &Bank, input_sha256: &str, ask: &BleederAsk) -> Result<Sizing<BleederFigures>, SizeError> {
    let Job { description, counted, place } = Job::of(bank, ask)?;
    let ambient = ask.ambient.unwrap_or_else(|| bank.ambient());
    let demands = demands(&description, &counted, ask, ambient);
    let middle = middle(&description, &counted);

    // With single faults the number of strings decides what one open element leaves.
    let faults = counted.iter().any(|i| description.limits[*i].single_fault);
    let strings: Vec<u32> = if faults { (1..=ask.build.parallel_up_to).collect() } else { vec![1] };
    let largest = ask.build.series_up_to * ask.build.parallel_up_to;
    let bearing = ask.switched.map(|_| Bearing::of(&ask.build.elements, largest, ambient));
    let fitted = |n: &u32| {
        let part = Resistor { parallel: *n, ..place.clone() };
        Fitted::new(&description, &part, counted.clone(), bearing.clone())
    };
    let probes: Vec<Fitted> = strings.iter().map(fitted).collect::<Result<_, _>>()?;
    let scans: Vec<Scan<Fitted>> =
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
    let load = |design: &Design, element: &Element, volts: &dyn Fn(f64, &Point) -> f64| {
        let slack = if is_held(scan, volts) { 0.0 } else { 0.05 };
        let volts = between(scan, design.lowest, volts).max(between(scan, design.highest, volts)) * (1.0 - slack);
        element_load(design, element.tolerance, volts)
    };
    // What heats before isolation is the mean square; what stresses is the greatest, after isolation too.
    let standing = |ohms: f64, point: &Point| (point.standing_leg * ohms).sqrt();
    let greatest = |_: f64, point: &Point| point.voltage;
    let overload = |design: &Design, element: &Element| {
        let ((watt, _), (_, volt)) = (load(design, element, &standing), load(design, element, &greatest));
        let usable = usable_power(&element.rating, ambient, ask.build.margin);
        if bearing.is_none() && clearly_over(watt, usable) {
            return Some("power");
        }
        if element.rating.voltage.is_some_and(|most| clearly_over(volt, most.si())) {
            return Some("voltage");
        }
        let bearing = bearing.as_ref()?;
        let (discharge, average) = least_discharge(scan, design.lowest, design.highest);
        if clearly_over(average / f64::from(design.count()), usable) {
            return Some("average power");
        }
        bearing.overloaded(design.element, &discharge, design.count())
    };
    let found = listed(&ask.build, of, overload);
    let one = |design: &Design| tried(&description, ask, design, design.resistor(&ask.build, &place), &counted);
    let (candidates, refused) = planned(&ask.build, &found, one)?;

    let mut findings = Vec::new();
    if window.is_empty() {
        findings.extend(collision::explained(
            &demands,
            spans,
            scan,
            &Ways {
                allow: &|demand, point| way_for(ask, demand, point),
                instead: &instead,
                nowhere: &|demand| nowhere(ask, demand),
            },
        )?);
    } else if candidates.is_empty() {
        findings.push(nothing_fits(&ask.build, &found, refused, window));
    }
    if demands.iter().zip(scan.without(&demands)).all(|(d, met)| met || !matches!(d.kind, Kind::Limit(_))) {
        let text = "The bank meets these limits without a new resistor.";
        findings.push(Finding::new(Severity::Note, "already-met", text));
    }
    findings.extend(candidates.first().and_then(|c| rest_not_met(&c.not_met, "file")));
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
        power_margin: ask.build.margin,
        demands: demand_results(&demands, spans),
        window: window_result(&demands, spans, window),
        searched: searched(&ask.build, &found, refused),
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
    fn of(bank: &Bank, ask: &BleederAsk) -> Result<Self, SizeError> {
        ask.build.check()?;
        if ask.switched.is_some() && ask.max_loss.is_some() {
            return Err(SizeError::Asked(
                "a bleeder that a contact connects has no standing loss to bound; leave `--max-loss` or `--switched` out"
                    .into(),
            ));
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
        let place = Resistor { phases, switched: ask.switched, ..stand_in(ask, &across) };
        Ok(Job { description, counted, place })
    }
}

/// A name that no limit has.
pub(super) fn free_id(wish: &str, description: &Description) -> String {
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
pub(super) fn has_bound(limit: &Limit) -> bool {
    match &limit.rule {
        Rule::Own { .. } => true,
        Rule::Published(id) => published_limit(id).is_some_and(|p| !matches!(p.kind, LimitKind::Wait { .. })),
    }
}

/// A resistor whose value is not known yet.
fn stand_in(ask: &BleederAsk, across: &Pair) -> Resistor {
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

fn assumptions(bank: &Bank, ask: &BleederAsk, faults: bool) -> Vec<String> {
    let mut list = vec![
        "The window is one of actual resistance: with all other values at the worst end of their tolerances, at the \
         highest voltage. A design fits where all of its tolerance does."
            .to_string(),
        "The array's elements share one tolerance end where the wait and the loss are found; unequal sharing counts in \
         the figures of one element."
            .to_string(),
    ];
    list.push(match ask.switched {
        None => "The year's energy is that of the nominal voltage, connected for 8760 h.".to_string(),
        Some(asked) => contact(&ask.id, &asked),
    });
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
    if ask.target.is_some() {
        list.push(
            "The target stands in place of the file's limits; those are checked in the plan all the same.".into(),
        );
    }
    if faults {
        list.push(format!(
            "Single faults count: the window is told for {} strings; with fewer, one open element weighs more.",
            ask.build.parallel_up_to
        ));
    }
    list
}

/// The least that the points around these resistances say of one discharge, and of the average power: what is too much
/// there is too much in between.
fn least_discharge(scan: &Scan<Fitted>, lowest: f64, highest: f64) -> (Discharge, f64) {
    let points = scan.points();
    let first = points.partition_point(|(at, _)| *at <= lowest).saturating_sub(1);
    let last = points.partition_point(|(at, _)| *at < highest).min(points.len().saturating_sub(1));
    let around = || points[first.min(last)..=last].iter().map(|(_, p)| p);
    let least = |of: &dyn Fn(&Point) -> f64| around().map(of).fold(f64::INFINITY, f64::min);
    let times = around().next().map_or(0, |p| p.discharge.heat.len());
    let discharge = Discharge {
        peak: least(&|p| p.discharge.peak),
        energy: least(&|p| p.discharge.energy),
        heat: (0..times).map(|k| least(&|p| p.discharge.heat[k])).collect(),
    };
    (discharge, least(&|p| p.average))
}

/// A voltage of the resistor at an actual resistance, between the points that were looked at; exact where the resistance
/// does not move it.
fn between(scan: &Scan<Fitted>, ohms: f64, volts: &dyn Fn(f64, &Point) -> f64) -> f64 {
    let points = scan.points();
    let after = points.partition_point(|(at, _)| *at < ohms);
    let (left, right) = (points.get(after.saturating_sub(1)), points.get(after));
    match (left, right) {
        (Some((low, a)), Some((high, b))) => {
            let share = ((ohms / low).ln() / (high / low).ln()).clamp(0.0, 1.0);
            let (a, b) = (volts(*low, a), volts(*high, b));
            if share.is_finite() { a + share * (b - a) } else { a.min(b) }
        }
        (one, other) => one.or(other).map_or(f64::NAN, |(ohms, p)| volts(*ohms, p)),
    }
}

/// True where the resistance does not move a voltage, as at the terminals.
fn is_held(scan: &Scan<Fitted>, volts: &dyn Fn(f64, &Point) -> f64) -> bool {
    let first = scan.points().first().map_or(f64::NAN, |(ohms, p)| volts(*ohms, p));
    scan.points().iter().all(|(ohms, p)| (volts(*ohms, p) - first).abs() <= 1e-12 * first)
}
