//! What is demanded of balancing resistors, how a point compares with it, and what each demand would have to allow.

use super::Job;
use super::probe::Point;
use super::request::BalancingAsk;
use super::shares::AfterFastCharge;
use crate::quantity::{Current, Direction, Power, Quantity, Time, Voltage, celsius, duration, exact, show};
use crate::size::arrays::usable_power;
use crate::size::scan::{Demand, Measure, ratio};

/// What a demand looks at.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Kind {
    /// Rated voltages in volt, settled.
    Settled(Vec<f64>),
    /// Rated voltages in volt, from a fast charge on.
    FastCharge(Vec<f64>),
    /// Standing loss of all resistors together, at most this many watt.
    Loss(f64),
    /// What the largest arrays of the elements at hand bear, in watt.
    Rating(f64),
    /// The limit of this number among those that count.
    Limit(usize),
}

/// The greatest of found over allowed, unit by unit.
fn greatest_ratio(found: &[f64], allowed: &[f64]) -> f64 {
    found.iter().zip(allowed).map(|(found, allowed)| ratio(*found, *allowed)).fold(0.0, f64::max)
}

/// Voltages after a fast charge, without the end of the way: where that is the highest of it, the settled division is what
/// bounds the resistors.
fn on_the_way(fast: &AfterFastCharge, settled: &[f64]) -> Vec<f64> {
    let way = fast.greatest.iter().zip(settled).zip(&fast.divided);
    way.map(|((most, end), start)| if *most > end * (1.0 + 1e-9) { *most } else { *start }).collect()
}

impl Measure<Point> for Kind {
    fn ratio(&self, point: &Point) -> f64 {
        match self {
            Kind::Settled(rated) => greatest_ratio(&point.settled, rated),
            Kind::FastCharge(rated) => point
                .fast
                .as_ref()
                .map_or(f64::INFINITY, |fast| greatest_ratio(&on_the_way(fast, &point.settled), rated)),
            Kind::Loss(watt) => ratio(point.loss, *watt),
            Kind::Rating(watt) => ratio(point.power, *watt),
            Kind::Limit(index) => {
                let (found, allowed) = point.limits.get(*index).copied().unwrap_or((f64::INFINITY, 0.0));
                ratio(found, allowed)
            }
        }
    }

    fn is_purpose(&self) -> bool {
        matches!(self, Kind::Settled(_) | Kind::Limit(_))
    }
}

pub(super) fn demands(job: &Job, ask: &BalancingAsk) -> Vec<Demand<Kind>> {
    let rated: Vec<f64> = job.bears.iter().map(|b| b.rated.si()).collect();
    let mut demands = vec![Demand {
        name: "the rated voltage of every unit, settled with leakages that differ".to_string(),
        kind: Kind::Settled(rated.clone()),
    }];
    if job.fast_charge {
        demands.push(Demand {
            name: "the rated voltage of every unit, from a fast charge to there".to_string(),
            kind: Kind::FastCharge(rated),
        });
    }
    demands.extend(ask.max_loss.map(|most| Demand {
        name: format!("a standing loss of at most {} in all of them", exact(most)),
        kind: Kind::Loss(most.si()),
    }));
    let usable = |margin| ask.build.elements.iter().map(move |e| usable_power(&e.rating, job.ambient, margin));
    let arrays = f64::from(ask.build.series_up_to * ask.build.parallel_up_to);
    let most = usable(ask.build.margin).fold(0.0, f64::max) * arrays;
    if most.is_finite() {
        demands.push(Demand {
            name: format!(
                "what the largest arrays bear across a unit in air of {:.0} °C ({})",
                celsius(job.ambient),
                show(Power::from_si(most), Direction::Down)
            ),
            kind: Kind::Rating(most),
        });
    }
    let limits = job.counted.iter().enumerate();
    demands.extend(limits.map(|(number, index)| {
        let limit = &job.description.limits[*index];
        let faults = if limit.single_fault { " with any one part failed" } else { "" };
        Demand { name: format!("limit {}{faults}", limit.id), kind: Kind::Limit(number) }
    }));
    demands
}

/// What could be otherwise at a resistance.
pub(super) struct Without {
    /// The highest settled voltage in volt if no unit leaked.
    pub leakage: f64,
    /// True where the resistors have a tolerance.
    pub tolerance: bool,
}

/// What a demand would have to allow for the resistance at which `point` was found.
pub(super) fn way_for(job: &Job, demand: &Demand<Kind>, point: &Point, without: &Without) -> Vec<String> {
    let rated = |found: &[f64]| {
        let highest = found.iter().copied().fold(0.0, f64::max);
        if highest.is_finite() {
            vec![format!("units rated {}", show(Voltage::from_si(highest), Direction::Up))]
        } else {
            Vec::new()
        }
    };
    match &demand.kind {
        Kind::Settled(_) => {
            let mut ways = rated(&point.settled);
            ways.extend(leakage_for(job, without.leakage, point));
            ways.extend(without.tolerance.then(|| "a closer tolerance of the resistors".to_string()));
            ways
        }
        Kind::FastCharge(_) => point.fast.as_ref().map_or_else(Vec::new, |fast| rated(&fast.greatest)),
        Kind::Loss(_) => vec![format!("a standing loss of {}", show(Power::from_si(point.loss), Direction::Up))],
        Kind::Rating(_) => {
            let watt = show(Power::from_si(point.power), Direction::Up);
            vec![format!("elements that together bear {watt} across a unit"), "a lower ambient".into()]
        }
        Kind::Limit(index) => match point.limits.get(*index) {
            Some((held, _)) if held.is_finite() => {
                vec![format!("{} until {} holds", duration(Time::from_si(*held), Direction::Up), demand.name)]
            }
            _ => Vec::new(),
        },
    }
}

/// A leakage with which the resistance of `point` would do, where all units are alike. The greatest settled voltage is
/// convex in the leakage (it is the greatest of many that are linear in it), so it lies below the line between what was
/// found with all of the leakage and with none of it.
fn leakage_for(job: &Job, without: f64, point: &Point) -> Option<String> {
    let first = job.bears.first()?;
    if job.bears.iter().any(|b| b != first) {
        return None;
    }
    let found = point.settled.iter().copied().fold(0.0, f64::max);
    let share = (first.rated.si() - without) / (found - without);
    let told = Current::from_si(first.leakage.si() * share);
    (share > 0.0 && share < 1.0).then(|| format!("leakages of at most {}", show(told, Direction::Down)))
}

/// What would open a window whose lower end comes from this demand, beside allowing more.
pub(super) fn instead(demand: &Demand<Kind>) -> Option<String> {
    matches!(demand.kind, Kind::Loss(_) | Kind::Rating(_))
        .then(|| "more units in series, so that each bears less".to_string())
}

/// What to look at where nothing meets a demand.
pub(super) fn nowhere(demand: &Demand<Kind>) -> Option<String> {
    match demand.kind {
        Kind::Settled(_) => Some(
            "Even resistors so small that leakage does not count share unequally by their own tolerance. Closer \
             tolerances, more units in series, or units of a higher rated voltage may do."
                .into(),
        ),
        Kind::FastCharge(_) => Some(
            "Closer tolerances of capacitors and resistors, more units in series, or units of a higher rated voltage may \
             do; `--slow-charge` is for a bank whose charge takes many times the time constant of its units."
                .into(),
        ),
        Kind::Limit(_) => Some("A bleeder, `ebbvolt size bleeder`, is the part for it.".into()),
        _ => None,
    }
}
