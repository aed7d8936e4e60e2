//! Limits on what is left after a time: the user's own and the published ones.

use super::waits::listed;
use super::{Answers, EngineError, FaultAnswers, Pair, si, si_or_null};
use crate::bank::Bank;
use crate::bank::description::{Bound, Limit, Rule};
use crate::data::{Alternative, LimitKind, PublishedLimit, published_limit};
use crate::discharge::{Figure, Model};
use crate::finding::{Findings, Severity};
use crate::quantity::{Capacitance, Charge, Direction, Energy, Quantity, Ratio, Time, Voltage, duration, exact, show};
use serde::Serialize;

/// A limit at the pair that governs it.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct LimitResult {
    /// The user's name or the id of the published limit.
    pub id: String,
    /// What has to hold, in one line, with the figures.
    pub rule: String,
    /// Document, clause, edition and how it was checked; `None` for the user's own limits.
    pub source: Option<LimitSource>,
    /// The pair that governs.
    pub across: Pair,
    /// The time within which it has to hold; `None` where the limit has none.
    #[serde(rename = "within_s", serialize_with = "si_or_null")]
    pub within: Option<Time>,
    /// True where from then on at least one alternative holds with every part healthy; `None` (null) where the
    /// limit is a waiting time alone, which only a procedure can keep.
    pub met: Option<bool>,
    /// The same under every single fault.
    pub single_fault_met: Option<bool>,
    /// True where the limit asks for single faults, so that `single_fault_met` decides the verdict too.
    pub single_fault_asked: bool,
    /// The first fault under which it is not met.
    pub single_fault_missed_by: Option<String>,
    /// True where it has to hold at every test point, and not at a pair of its own.
    pub everywhere: bool,
    /// The voltage that it allows at the governing pair; `None` where a voltage is none of its alternatives.
    #[serde(rename = "allowed_voltage_v", serialize_with = "si_or_null")]
    pub allowed_voltage: Option<Voltage>,
    /// Voltage at `within`, at its own worst point.
    #[serde(rename = "voltage_v", serialize_with = "si")]
    pub voltage: Voltage,
    /// Charge at `within`, at its own worst point.
    #[serde(rename = "charge_c", serialize_with = "si")]
    pub charge: Charge,
    /// Energy at `within`, at its own worst point.
    #[serde(rename = "energy_j", serialize_with = "si")]
    pub energy: Energy,
    /// From when on it holds, every part healthy; `None` is never (or no bound to hold).
    #[serde(rename = "holds_from_s", serialize_with = "si_or_null")]
    pub holds_from: Option<Time>,
}

/// Where a published limit comes from.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs)] // The data folder's own keys.
pub struct LimitSource {
    pub document: String,
    pub clause: String,
    pub edition: Option<String>,
    pub seen: String,
}

/// One limit at one pair, as figures to ask for.
struct Requirement {
    pair: usize,
    within: f64,
    /// At least one of these has to be inside the band from `within` on.
    healthy: Vec<Bound>,
    /// The same with one part failed.
    fault: Vec<Bound>,
}

/// A limit, and what it asks at every pair in its scope.
struct Prepared<'a> {
    limit: &'a Limit,
    published: Option<&'static PublishedLimit>,
    within: Option<Time>,
    requirements: Vec<Requirement>,
    /// A share of the rated voltage, and that voltage, to be reached before the bank is switched in again.
    switching_in: Option<(f64, Voltage)>,
}

/// All limits of a bank.
pub(crate) struct LimitChecks<'a> {
    model: &'a Model,
    limits: Vec<Prepared<'a>>,
}

impl<'a> LimitChecks<'a> {
    /// Prepares the limits. Where a limit depends on the capacitance at a pair, that is found first: the greatest
    /// over the tolerance box, since such a limit takes nominal plus tolerance.
    ///
    /// # Errors
    /// Where the engine can't certify that capacitance.
    pub fn new(bank: &'a Bank, model: &'a Model) -> Result<Self, EngineError> {
        let limits = bank.description().limits.iter();
        Ok(LimitChecks { model, limits: limits.map(|l| prepare(bank, model, l)).collect::<Result<_, _>>()? })
    }

    /// What has to be known of the healthy bank.
    pub fn figures(&self) -> Vec<Figure> {
        let requirements = self.limits.iter().flat_map(|l| &l.requirements);
        requirements
            .flat_map(|r| {
                let (pair, t) = (r.pair, r.within);
                let at = [Figure::VoltageAt { pair, t }, Figure::ChargeAt { pair, t }, Figure::EnergyAt { pair, t }];
                r.healthy.iter().map(move |b| figure(pair, b)).chain(at)
            })
            .collect()
    }

    /// What has to be known under every fault.
    pub fn fault_figures(&self) -> Vec<Figure> {
        let requirements = self.limits.iter().flat_map(|l| &l.requirements);
        requirements.flat_map(|r| r.fault.iter().map(|b| figure(r.pair, b))).collect()
    }

    /// What the bounds alone need: whether the limits hold, without the figures that are only shown.
    pub fn bound_figures(&self) -> Vec<Figure> {
        let requirements = self.limits.iter().flat_map(|l| &l.requirements);
        requirements.flat_map(|r| r.healthy.iter().map(|b| figure(r.pair, b))).collect()
    }

    /// For every limit, in the order of the file: from when on it holds at all its pairs, and by when it has to, in
    /// second. `None` for a limit without a bound.
    pub fn holds(&self, healthy: &Answers) -> Vec<Option<(f64, f64)>> {
        self.latest(|r| holds_from(&r.healthy, |b| healthy.worst(figure(r.pair, b))))
    }

    /// The same under every one of these faults.
    pub fn holds_under(&self, faults: &[FaultAnswers]) -> Vec<Option<(f64, f64)>> {
        let under = |r: &Requirement, f: &FaultAnswers| holds_from(&r.fault, |b| f.worst(figure(r.pair, b)));
        let number = |t: f64| if t.is_nan() { f64::INFINITY } else { t };
        self.latest(|r| faults.iter().map(|f| number(under(r, f))).fold(0.0, f64::max))
    }

    fn latest(&self, held: impl Fn(&Requirement) -> f64) -> Vec<Option<(f64, f64)>> {
        let one = |l: &Prepared| {
            let bounded: Vec<&Requirement> = l.requirements.iter().filter(|r| !r.healthy.is_empty()).collect();
            // What is no number holds never.
            let held = |r: &&Requirement| Some(held(r)).filter(|t| !t.is_nan()).unwrap_or(f64::INFINITY);
            let latest = bounded.iter().map(held).fold(0.0, f64::max);
            bounded.first().map(|r| (latest, r.within))
        };
        self.limits.iter().map(one).collect()
    }

    /// The limits, in the order of the file, each at the pair that governs it.
    pub fn conclude(&self, healthy: &Answers, faults: &[FaultAnswers], findings: &mut Findings) -> Vec<LimitResult> {
        let results: Vec<LimitResult> = self.limits.iter().map(|l| self.result(l, healthy, faults)).collect();
        for (result, prepared) in results.iter().zip(&self.limits) {
            match prepared.published.map(|p| &p.kind) {
                Some(LimitKind::BeforeSwitchingIn { .. }) => switching_findings(prepared, result, faults, findings),
                _ => limit_findings(result, findings),
            }
        }
        results
    }

    fn result(&self, prepared: &Prepared, healthy: &Answers, faults: &[FaultAnswers]) -> LimitResult {
        let held = |r: &Requirement| holds_from(&r.healthy, |b| healthy.worst(figure(r.pair, b)));
        let fault_held = |r: &Requirement, f: &FaultAnswers| holds_from(&r.fault, |b| f.worst(figure(r.pair, b)));
        let governing = prepared.requirements.iter().max_by(|x, y| {
            let volts = |r: &Requirement| healthy.worst(Figure::VoltageAt { pair: r.pair, t: r.within });
            held(x).total_cmp(&held(y)).then(volts(x).total_cmp(&volts(y)))
        });
        let missed = |f: &&FaultAnswers| prepared.requirements.iter().any(|r| !in_time(fault_held(r, f), r.within));
        let missed_by = faults.iter().find(missed).map(|f| f.fault.name.clone());
        let bounded = governing.filter(|r| !r.healthy.is_empty());
        // Where the document names no time there is none to keep; the bank's own is found all the same.
        let judged = bounded.filter(|_| prepared.switching_in.is_none());
        let (pair, t) = governing.map_or((0, 0.0), |r| (r.pair, r.within));
        let (a, b) = self.model.pairs[pair];
        LimitResult {
            id: prepared.limit.id.clone(),
            rule: rule_text(prepared, bounded),
            source: prepared.published.map(|p| LimitSource {
                document: p.document.clone(),
                clause: p.clause.clone(),
                edition: p.edition.clone(),
                seen: p.seen.clone(),
            }),
            across: [self.model.node_names[a].clone(), self.model.node_names[b].clone()],
            within: prepared.within,
            met: judged.map(|_| prepared.requirements.iter().all(|r| in_time(held(r), r.within))),
            single_fault_met: judged.map(|_| missed_by.is_none()),
            single_fault_asked: prepared.limit.single_fault,
            single_fault_missed_by: judged.and(missed_by),
            everywhere: prepared.limit.at.is_none(),
            allowed_voltage: governing.and_then(|r| r.healthy.iter().find_map(allowed_voltage)),
            voltage: Voltage::from_si(healthy.worst(Figure::VoltageAt { pair, t })),
            charge: Charge::from_si(healthy.worst(Figure::ChargeAt { pair, t })),
            energy: Energy::from_si(healthy.worst(Figure::EnergyAt { pair, t })),
            holds_from: bounded.map(held).filter(|t| t.is_finite()).map(Time::from_si),
        }
    }
}

fn allowed_voltage(bound: &Bound) -> Option<Voltage> {
    if let Bound::Voltage(level) = bound { Some(*level) } else { None }
}

/// A check is met only by a comparison of finite numbers that holds.
fn in_time(from: f64, within: f64) -> bool {
    from.is_finite() && from <= within
}

/// From when on at least one bound holds for ever: the earliest of the alternatives' last crossings.
fn holds_from(bounds: &[Bound], worst: impl Fn(&Bound) -> f64) -> f64 {
    let from = |bound: &Bound| match bound {
        Bound::InitialCharge(level) if worst(bound) <= level.si() => 0.0,
        Bound::InitialCharge(_) => f64::INFINITY,
        _ => worst(bound),
    };
    bounds.iter().map(from).fold(f64::INFINITY, f64::min)
}

fn figure(pair: usize, bound: &Bound) -> Figure {
    match bound {
        Bound::Voltage(level) => Figure::VoltageWait { pair, level: level.si() },
        Bound::Charge(level) => Figure::ChargeWait { pair, level: level.si() },
        Bound::InitialCharge(_) => Figure::ChargeAt { pair, t: 0.0 },
        Bound::Energy(level) => Figure::EnergyWait { pair, level: level.si() },
    }
}

fn prepare<'a>(bank: &Bank, model: &'a Model, limit: &'a Limit) -> Result<Prepared<'a>, EngineError> {
    let pairs: Vec<usize> = match &limit.at {
        Some([a, b]) => model.find_pair(a, b).into_iter().collect(),
        None => (0..model.test_points).collect(),
    };
    let published = match &limit.rule {
        Rule::Published(id) => published_limit(id),
        Rule::Own { .. } => None,
    };
    let plain = |within: Time, healthy: &[Bound], fault: &[Bound]| -> Vec<Requirement> {
        let one = |pair: &usize| Requirement {
            pair: *pair,
            within: within.si(),
            healthy: healthy.to_vec(),
            fault: fault.to_vec(),
        };
        pairs.iter().map(one).collect()
    };
    let zero = Time::from_si(0.0);
    let mut switching_in = None;
    let (within, requirements) = match (&limit.rule, published.map(|p| &p.kind)) {
        (Rule::Own { any_of, within }, _) => (Some(*within), plain(*within, any_of, any_of)),
        (_, Some(LimitKind::AnyOf { alternatives, within, fault_alternatives })) => {
            let healthy: Vec<Bound> = alternatives.iter().map(bound).collect();
            let fault: Vec<Bound> =
                fault_alternatives.as_ref().map_or_else(|| healthy.clone(), |list| list.iter().map(bound).collect());
            (*within, plain(within.unwrap_or(zero), &healthy, &fault))
        }
        (_, Some(LimitKind::VoltageByCapacitance { table, within, fault_factor })) => {
            let figures: Vec<Figure> = pairs.iter().map(|pair| Figure::Capacitance { pair: *pair }).collect();
            let answers = Answers::healthy(bank, model, figures.clone())?;
            let mut requirements = plain(within.unwrap_or(zero), &[], &[]);
            for (requirement, figure) in requirements.iter_mut().zip(figures) {
                let volts = interpolate(table, answers.worst(figure));
                requirement.healthy = vec![Bound::Voltage(Voltage::from_si(volts))];
                requirement.fault = vec![Bound::Voltage(Voltage::from_si(volts * fault_factor.unwrap_or(1.0)))];
            }
            (*within, requirements)
        }
        (_, Some(LimitKind::BeforeSwitchingIn { share })) => {
            // Only a bank on an AC supply is switched in at a crest; its rated voltage is taken to be the supply's.
            switching_in = bank.supply_voltage().map(|rated| (*share, rated));
            let bounds: Vec<Bound> = switching_in
                .iter()
                .map(|(share, rated)| Bound::Voltage(Voltage::from_si(share * rated.si())))
                .collect();
            (None, plain(zero, &bounds, &bounds))
        }
        (_, Some(LimitKind::Wait { at_least })) => (Some(*at_least), plain(*at_least, &[], &[])),
        (Rule::Published(_), None) => (None, plain(zero, &[], &[])),
    };
    Ok(Prepared { limit, published, within, requirements, switching_in })
}

fn bound(alternative: &Alternative) -> Bound {
    match alternative {
        Alternative::Voltage(v) => Bound::Voltage(*v),
        Alternative::Charge(q) => Bound::Charge(*q),
        Alternative::InitialCharge(q) => Bound::InitialCharge(*q),
        Alternative::Energy(e) => Bound::Energy(*e),
    }
}

/// The voltage allowed at a capacitance: linear between the points of the table, its ends beyond them. The table
/// falls in capacitance and rises in voltage.
fn interpolate(table: &[(Capacitance, Voltage)], farad: f64) -> f64 {
    let points: Vec<(f64, f64)> = table.iter().map(|(c, v)| (c.si(), v.si())).collect();
    let (Some(first), Some(last)) = (points.first(), points.last()) else { return f64::NAN };
    if farad >= first.0 {
        return first.1;
    }
    for pair in points.windows(2) {
        let ((c1, v1), (c2, v2)) = (pair[0], pair[1]);
        if farad >= c2 {
            return v1 + (v2 - v1) * (c1 - farad) / (c1 - c2);
        }
    }
    last.1
}

fn rule_text(prepared: &Prepared, governing: Option<&Requirement>) -> String {
    let bounds: Vec<String> = governing.map_or(Vec::new(), |r| r.healthy.iter().map(bound_text).collect());
    let within = prepared.within.map(given);
    if let Some((share, rated)) = prepared.switching_in {
        let share = exact(Ratio::from_si(share));
        return format!("{} ({share} of {}) before it is switched in again", bounds.join(" or "), exact(rated));
    }
    match (bounds.is_empty(), within) {
        (true, Some(within)) => format!("a wait of at least {within} before the short is applied"),
        (true, None) => "no figure to check".into(),
        (false, Some(within)) if within != "0 s" => format!("{} within {within}", bounds.join(" or ")),
        (false, _) => format!("{} from the start", bounds.join(" or ")),
    }
}

fn bound_text(bound: &Bound) -> String {
    match bound {
        Bound::Voltage(v) => short(*v),
        Bound::Charge(q) => exact(*q),
        Bound::InitialCharge(q) => format!("{} at isolation", exact(*q)),
        Bound::Energy(e) => exact(*e),
    }
}

/// A time that was given, without the zeros of a computed one.
fn given(time: Time) -> String {
    let text = duration(time, Direction::Down);
    match text.split_once(' ') {
        Some((number, unit)) if number.contains('.') => {
            format!("{} {unit}", number.trim_end_matches('0').trim_end_matches('.'))
        }
        _ => text,
    }
}

/// As it was typed where that is short; an interpolated voltage has many digits and is shown rounded down.
fn short(voltage: Voltage) -> String {
    let text = exact(voltage);
    if text.len() > 9 { show(voltage, Direction::Down) } else { text }
}

fn limit_findings(result: &LimitResult, findings: &mut Findings) {
    let pair = result.across.join(" - ");
    let holds = result.holds_from.map_or_else(
        || "it never does by itself".to_string(),
        |t| format!("it does from {} on", duration(t, Direction::Up)),
    );
    match result.met {
        Some(false) => findings.add(
            Severity::Warning,
            "limit-not-met",
            format!("{}: {} is not met at {pair}; {holds}.", result.id, result.rule),
        ),
        Some(true) if result.single_fault_met == Some(false) => {
            let fault = result.single_fault_missed_by.clone().unwrap_or_default();
            let severity = if result.single_fault_asked { Severity::Warning } else { Severity::Caution };
            findings.add(
                severity,
                "limit-not-met-under-fault",
                format!("{}: {} is met, but not with {}.", result.id, result.rule, listed(&[fault])),
            );
        }
        Some(true) => {}
        None => findings.add(
            Severity::Note,
            "limit-is-a-wait",
            format!("{}: {}; a plan without steps can't show that it is kept.", result.id, result.rule),
        ),
    }
}

/// The time of the bank itself for a limit that only says what has to be reached before switching in again.
fn switching_findings(prepared: &Prepared, result: &LimitResult, faults: &[FaultAnswers], findings: &mut Findings) {
    if prepared.switching_in.is_none() {
        let text = format!(
            "{}: a share of the rated voltage of a bank on an alternating supply, and this one was charged from a \
             direct voltage; nothing was checked.",
            result.id
        );
        return findings.add(Severity::Note, "switching-in-not-checked", text);
    }
    let from = |time: f64| {
        let time = time.is_finite().then(|| duration(Time::from_si(time), Direction::Up));
        time.map_or_else(|| "never by itself".to_string(), |t| format!("from {t} on"))
    };
    let worst = |f: &FaultAnswers| {
        let held = |r: &Requirement| holds_from(&r.fault, |b| f.worst(figure(r.pair, b)));
        prepared.requirements.iter().map(held).fold(0.0, f64::max)
    };
    let failed = faults.iter().max_by(|x, y| worst(x).total_cmp(&worst(y)));
    let failed = failed.map_or_else(String::new, |f| format!("; with {}: {}", f.fault.name, from(worst(f))));
    findings.add(
        Severity::Caution,
        "switching-in-delay",
        format!(
            "{}: {}. Every test point is there {}{failed}. The delay of the controller has to be longer: capacitors that \
             are switched in with a charge left draw a far higher current.",
            result.id,
            result.rule,
            from(result.holds_from.map_or(f64::INFINITY, Quantity::si)),
        ),
    );
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_table_is_linear_between_its_points_and_flat_beyond() {
        let table: Vec<(Capacitance, Voltage)> = [(300e-9, 60.0), (170e-9, 75.0), (91e-9, 100.0)]
            .map(|(c, v)| (Capacitance::from_si(c), Voltage::from_si(v)))
            .to_vec();
        approx::assert_relative_eq!(interpolate(&table, 1e-6), 60.0);
        approx::assert_relative_eq!(interpolate(&table, 300e-9), 60.0);
        approx::assert_relative_eq!(interpolate(&table, 235e-9), 67.5, max_relative = 1e-12);
        approx::assert_relative_eq!(interpolate(&table, 170e-9), 75.0, max_relative = 1e-12);
        approx::assert_relative_eq!(interpolate(&table, 1e-9), 100.0);
    }
}
