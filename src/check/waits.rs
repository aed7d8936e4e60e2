//! How long to wait at each test point.

use super::{Answers, FaultAnswers, Moment, Pair, fault_in_words, si, si_or_null};
use crate::bank::Bank;
use crate::bank::description::Role;
use crate::discharge::{CONTACT_FAULT, Figure, Method, Model};
use crate::finding::{Findings, Severity};
use crate::quantity::{Direction, Quantity, Time, Voltage, duration, exact, show};
use serde::Serialize;

/// Waits at one test point.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Wait {
    /// The test point.
    pub across: Pair,
    /// Every value nominal; `None` is never.
    #[serde(rename = "nominal_s", serialize_with = "si_or_null")]
    pub nominal: Option<Time>,
    /// The longest over the tolerance box at the highest voltage; `None` is never.
    #[serde(rename = "slowest_s", serialize_with = "si_or_null")]
    pub slowest: Option<Time>,
    /// The wait to keep: the longer of the two; `None` is never.
    #[serde(rename = "keep_s", serialize_with = "si_or_null")]
    pub keep: Option<Time>,
    /// Greatest voltage at infinite time over the box, every part healthy.
    #[serde(rename = "settles_at_v", serialize_with = "si")]
    pub settles_at: Voltage,
    /// Greatest voltage at isolation over the box.
    #[serde(rename = "at_isolation_v", serialize_with = "si")]
    pub at_isolation: Voltage,
    /// The values of the loose parts at which the slowest wait was found.
    pub worst_point: Vec<WorstValue>,
    /// Of a three-phase bank, in which order its poles opened in the worst cases.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub interruption: Option<Interruption>,
    /// How the slowest wait was found, in words; a search inside the box always follows.
    pub found_by: String,
    /// The same with one part failed.
    pub faults: Vec<FaultWait>,
    /// The same with two parts failed; only where that was asked for.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub fault_pairs: Vec<FaultWait>,
}

/// The orders of the poles that leave the worst at a test point: which opened first, and at which polarity each.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Interruption {
    /// Of the nominal wait.
    pub nominal: String,
    /// Of the slowest wait.
    pub slowest: String,
    /// Of the greatest voltage at isolation.
    pub at_isolation: String,
}

/// The value that a loose part has at a worst point.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct WorstValue {
    /// The part.
    pub id: String,
    /// Its value over the marked one.
    pub factor: f64,
}

/// The wait with one part failed.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FaultWait {
    /// `R1 open`, `RS contact does not close`, `C1 shorted`, `C1 one unit shorted`, `R2 absent`, `K1 dead`.
    pub fault: String,
    /// The longest wait over the box; `None` is never.
    #[serde(rename = "wait_s", serialize_with = "si_or_null")]
    pub wait: Option<Time>,
    /// Greatest voltage at infinite time over the box.
    #[serde(rename = "settles_at_v", serialize_with = "si")]
    pub settles_at: Voltage,
    /// For a resistor that opens: when, in the worst case.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub opens: Option<Opens>,
    /// When that is after isolation: how long after it.
    #[serde(rename = "opens_s", serialize_with = "si_or_null", skip_serializing_if = "Option::is_none")]
    pub opens_at: Option<Time>,
    /// Where the voltage that stays is greatest with the resistor opening after isolation: how long after it.
    #[serde(rename = "settles_opens_s", serialize_with = "si_or_null", skip_serializing_if = "Option::is_none")]
    pub settles_opens_at: Option<Time>,
}

/// When a resistor opens, in the worst case.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Opens {
    /// So long before isolation that the voltages have settled without it.
    BeforeIsolation,
    /// At isolation.
    AtIsolation,
    /// After isolation, where another part of the bank has charged this one meanwhile.
    AfterIsolation,
}

/// The wait for the touch voltage, per test point.
pub(crate) struct WaitCheck<'a> {
    pub bank: &'a Bank,
    pub model: &'a Model,
}

/// A time, or `None` for never.
fn finite(seconds: f64) -> Option<Time> {
    seconds.is_finite().then(|| Time::from_si(seconds))
}

impl WaitCheck<'_> {
    fn level(&self) -> f64 {
        self.bank.description().touch_voltage.si()
    }

    /// The figure that is the wait at a test point.
    pub fn wait(&self, pair: usize) -> Figure {
        Figure::TouchWait { pair, level: self.level(), energy: self.bank.description().hold_energy.map(Quantity::si) }
    }

    /// The waits themselves, in the order of the test points.
    pub fn waits(&self) -> Vec<Figure> {
        self.pairs().map(|pair| self.wait(pair)).collect()
    }

    fn pairs(&self) -> std::ops::Range<usize> {
        0..self.model.test_points
    }

    /// What has to be known of the healthy bank.
    pub fn figures(&self) -> Vec<Figure> {
        self.pairs().flat_map(|pair| [self.wait(pair), Figure::Settles { pair }, Figure::Start { pair }]).collect()
    }

    /// What has to be known under every fault.
    pub fn fault_figures(&self) -> Vec<Figure> {
        self.pairs().flat_map(|pair| [self.wait(pair), Figure::Settles { pair }]).collect()
    }

    /// The waits, in the order of the test points.
    pub fn conclude(&self, healthy: &Answers, faults: &[FaultAnswers], findings: &mut Findings) -> Vec<Wait> {
        let waits: Vec<Wait> = self.pairs().map(|pair| self.wait_at(pair, healthy, faults)).collect();
        for wait in &waits {
            self.healthy_findings(wait, findings);
            Self::nominal_findings(wait, findings);
        }
        for (index, fault) in faults.iter().enumerate() {
            self.fault_findings(fault, index, &waits, findings);
            Self::opening_findings(index, &waits, findings);
        }
        waits
    }

    fn wait_at(&self, pair: usize, healthy: &Answers, faults: &[FaultAnswers]) -> Wait {
        let (a, b) = self.model.pairs[pair];
        let point = healthy.worst_point(self.wait(pair));
        Wait {
            across: [self.model.node_names[a].clone(), self.model.node_names[b].clone()],
            nominal: finite(healthy.nominal(self.wait(pair))),
            keep: finite(healthy.nominal(self.wait(pair)).max(healthy.worst(self.wait(pair)))),
            slowest: finite(healthy.worst(self.wait(pair))),
            settles_at: Voltage::from_si(healthy.worst(Figure::Settles { pair })),
            at_isolation: Voltage::from_si(healthy.worst(Figure::Start { pair })),
            interruption: self.interruption(pair, healthy),
            worst_point: self
                .model
                .parameters
                .iter()
                .zip(point)
                .map(|(p, factor)| WorstValue { id: p.id.clone(), factor: *factor })
                .collect(),
            found_by: found_by(healthy.method(self.wait(pair)), self.model.passive),
            faults: self.fault_waits(pair, faults),
            fault_pairs: Vec::new(),
        }
    }

    /// `None` for a bank that has one state at isolation only.
    fn interruption(&self, pair: usize, healthy: &Answers) -> Option<Interruption> {
        let [nominal, slowest] = healthy.states(self.wait(pair))?.map(str::to_string);
        let [_, at_isolation] = healthy.states(Figure::Start { pair })?.map(str::to_string);
        Some(Interruption { nominal, slowest, at_isolation })
    }

    /// The waits at a test point under `faults`, in their order.
    pub fn fault_waits(&self, pair: usize, faults: &[FaultAnswers]) -> Vec<FaultWait> {
        let after = |moment: Option<Moment>| if let Some(Moment::After(t)) = moment { finite(t) } else { None };
        let fault_wait = |fault: &FaultAnswers| {
            let wait = fault.worst(self.wait(pair));
            // Of a wait that never ends, the moment is the one that leaves the highest voltage.
            let governing = if wait.is_finite() { self.wait(pair) } else { Figure::Settles { pair } };
            let moment = fault.moment(governing);
            FaultWait {
                fault: fault.fault.name.clone(),
                wait: finite(wait),
                settles_at: Voltage::from_si(fault.worst(Figure::Settles { pair })),
                opens: moment.map(|m| match m {
                    Moment::Before => Opens::BeforeIsolation,
                    Moment::AtIsolation => Opens::AtIsolation,
                    Moment::After(_) => Opens::AfterIsolation,
                }),
                opens_at: after(moment),
                settles_opens_at: after(fault.moment(Figure::Settles { pair })),
            }
        };
        faults.iter().map(fault_wait).collect()
    }

    fn healthy_findings(&self, wait: &Wait, findings: &mut Findings) {
        let pair = wait.across.join(" - ");
        let touch = exact(self.bank.description().touch_voltage);
        match wait.slowest {
            None => findings.add(
                Severity::Danger,
                "wait-never",
                format!(
                    "{pair} never stays below {touch} by itself, with every part healthy: it can settle at {}.",
                    show(wait.settles_at, Direction::Up)
                ),
            ),
            Some(slowest) if slowest.si() > 0.0 && wait.at_isolation.si() <= self.level() => findings.add(
                Severity::Danger,
                "voltage-rises-after-isolation",
                format!(
                    "{pair} reads below {touch} at isolation and rises above it later: another part of the bank \
                     charges it. It is predicted below only from {} on.",
                    duration(slowest, Direction::Up)
                ),
            ),
            Some(_) => {}
        }
    }

    /// The worst case is taken at the highest voltage. Where a capacitor has a voltage of its own against it, the
    /// nominal voltage can take longer.
    fn nominal_findings(wait: &Wait, findings: &mut Findings) {
        let Some((nominal, slowest)) = wait.nominal.zip(wait.slowest) else { return };
        if nominal.si() > slowest.si() * (1.0 + 1e-9) {
            findings.add(
                Severity::Warning,
                "nominal-wait-longer",
                format!(
                    "{}: the wait is longer from the nominal voltage ({}) than in the slowest case from the highest \
                     ({}): a capacitor has a voltage of its own. The longer one is the wait to keep.",
                    wait.across.join(" - "),
                    duration(nominal, Direction::Up),
                    duration(slowest, Direction::Up)
                ),
            );
        }
    }

    /// A resistor that opens after isolation: nobody looks for a part that fails while they wait.
    fn opening_findings(index: usize, waits: &[Wait], findings: &mut Findings) {
        let worse: Vec<(&Wait, Time)> =
            waits.iter().filter_map(|w| w.faults[index].opens_at.map(|opens| (w, opens))).collect();
        let Some((wait, opens)) = worse.iter().max_by(|x, y| {
            let length = |w: &Wait| w.faults[index].wait.map_or(f64::INFINITY, Quantity::si);
            length(x.0).total_cmp(&length(y.0))
        }) else {
            return;
        };
        let fault = &wait.faults[index];
        let length =
            fault.wait.map_or_else(|| "never ends".to_string(), |t| format!("is {}", duration(t, Direction::Up)));
        findings.add(
            Severity::Warning,
            "opens-later-is-worse",
            format!(
                "{}: opening {} after isolation is worse than at or before it. Another part of the bank has charged \
                 {} by then; the wait there then {length}.",
                fault.fault,
                duration(*opens, Direction::Down),
                wait.across.join(" - "),
            ),
        );
    }

    fn fault_findings(&self, fault: &FaultAnswers, index: usize, waits: &[Wait], findings: &mut Findings) {
        let never: Vec<&Wait> = waits.iter().filter(|w| w.faults[index].wait.is_none()).collect();
        let Some(worst) = never.iter().max_by(|x, y| {
            let settles = |w: &Wait| w.faults[index].settles_at.si();
            settles(x).total_cmp(&settles(y))
        }) else {
            return;
        };
        let role = self.bank.description().resistors.iter().find(|r| r.id == fault.fault.id).map(|r| r.role);
        let is_sink = self.model.loads.iter().any(|l| l.id == fault.fault.id);
        let (code, why) = match role {
            None if is_sink => ("sink-dead-never", "without what this sink draws"),
            Some(_) if fault.fault.name.ends_with(CONTACT_FAULT) => {
                ("contact-open-never", "with this bleeder's contact open")
            }
            Some(Role::Bleeder) => ("bleeder-open-never", "with this bleeder open"),
            Some(Role::Leakage) => ("leakage-absent-never", "without this leakage path"),
            Some(_) => ("resistor-open-never", "with this resistor open"),
            None => ("capacitor-fault-never", "with this capacitor failed"),
        };
        let pairs: Vec<String> = never.iter().map(|w| w.across.join(" - ")).collect();
        findings.add(
            Severity::Danger,
            code,
            format!(
                "{}: {why} the wait never ends at {}; {} can stay at {}. The reading does not fall: test before \
                 touch, and discharge across that pair, with a tool that is rated for this voltage and energy.",
                fault_in_words(&fault.fault.name),
                listed(&pairs),
                worst.across.join(" - "),
                show(worst.faults[index].settles_at, Direction::Up)
            ),
        );
    }
}

/// How a worst case was found, in words.
fn found_by(method: Option<Method>, loose: usize) -> String {
    let proven = |pinned: usize| match pinned {
        0 => String::new(),
        n => format!("{n} of {loose} loose values pinned by proof, "),
    };
    match method {
        None | Some(Method::AllCorners(0)) => "no value is loose".into(),
        Some(Method::AllCorners(n)) => format!("all {} corners of {n} loose values", 1u64 << n),
        Some(Method::Pinned { pinned, free: 0 }) => format!("all {pinned} loose values pinned by proof"),
        Some(Method::Pinned { pinned, free }) => {
            format!("{}all {} corners of the other {free}", proven(pinned), 1u64 << free)
        }
        Some(Method::Searched { pinned, free }) => {
            format!("{}{free} searched from several starts: a search, not a proof", proven(pinned))
        }
    }
}

/// `a`, `a and b`, `a, b and 3 more`.
pub(super) fn listed(names: &[String]) -> String {
    match names {
        [] => String::new(),
        [one] => one.clone(),
        [a, b] => format!("{a} and {b}"),
        [a, b, c] => format!("{a}, {b} and {c}"),
        [a, b, rest @ ..] => format!("{a}, {b} and {} more", rest.len()),
    }
}
