//! What is demanded of a bleeder, how a point compares with it, and what each demand would have to allow.

use super::probe::Point;
use super::request::BleederAsk;
use crate::bank::description::{Bound, Description, Rule};
use crate::quantity::{
    CELSIUS_ZERO_K, Current, Direction, Energy, Power, Quantity, Temperature, Time, celsius, duration, exact, show,
};
use crate::size::Build;
use crate::size::arrays::usable_power;
use crate::size::scan::{Demand, Measure, ratio};

/// What the name of a limit ends with that has to hold under faults too.
const ANY_FAULT: &str = " with any one part failed";

/// What a demand looks at.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Kind {
    /// The limit of this number among those that count.
    Limit(usize),
    /// Standing loss, at most this many watt.
    Loss(f64),
    /// Current, at most this many ampere.
    Current(f64),
    /// What the largest arrays of the elements at hand bear, in watt; each leg of a three-phase resistor is one.
    Rating(f64),
    /// What they bear of one discharge, or of the last of a row, through a contact.
    Discharge,
    /// What they bear on average over a cycle, in watt.
    Average(f64),
}

impl Measure<Point> for Kind {
    fn ratio(&self, point: &Point) -> f64 {
        let (found, allowed) = match self {
            Kind::Limit(index) => point.limits.get(*index).copied().unwrap_or((f64::INFINITY, 0.0)),
            Kind::Loss(watt) => (point.standing, *watt),
            Kind::Rating(watt) => (point.standing_leg, *watt),
            Kind::Current(ampere) => (point.current, *ampere),
            Kind::Discharge => (point.burden, 1.0),
            Kind::Average(watt) => (point.average, *watt),
        };
        ratio(found, allowed)
    }

    fn is_purpose(&self) -> bool {
        matches!(self, Kind::Limit(_))
    }
}

pub(super) fn demands(
    description: &Description,
    counted: &[usize],
    ask: &BleederAsk,
    ambient: Temperature,
) -> Vec<Demand<Kind>> {
    let limits = counted.iter().enumerate().map(|(number, index)| {
        let limit = &description.limits[*index];
        let rule = match &limit.rule {
            Rule::Own { any_of, within } => match any_of.as_slice() {
                [Bound::Voltage(v)] => format!(" ({} within {})", exact(*v), duration(*within, Direction::Down)),
                _ => String::new(),
            },
            Rule::Published(_) => String::new(),
        };
        let faults = if limit.single_fault { ANY_FAULT } else { "" };
        Demand { name: format!("limit {}{rule}{faults}", limit.id), kind: Kind::Limit(number) }
    });
    let loss = ask.max_loss.map(|most| Demand {
        name: format!("a standing loss of at most {}", exact(most)),
        kind: Kind::Loss(most.si()),
    });
    let current = ask
        .max_current
        .map(|most| Demand { name: format!("a current of at most {}", exact(most)), kind: Kind::Current(most.si()) });
    let most =
        ask.build.elements.iter().map(|e| usable_power(&e.rating, ambient, ask.build.margin)).fold(0.0, f64::max)
            * f64::from(ask.build.series_up_to * ask.build.parallel_up_to);
    let power = show(Power::from_si(most), Direction::Down);
    let air = celsius(ambient);
    let lasting = match ask.switched {
        None => Some((format!("what the largest arrays bear in air of {air:.0} °C ({power})"), Kind::Rating(most))),
        Some(contact) => contact.every.map(|every| {
            let every = duration(every, Direction::Down);
            let name = format!("what the largest arrays bear on average, one discharge every {every} ({power})");
            (name, Kind::Average(most))
        }),
    };
    let lasting = lasting.filter(|_| most.is_finite()).map(|(name, kind)| Demand { name, kind });
    let pulse = ask.switched.map(|contact| {
        let row = match contact.discharges {
            1 => "one discharge".to_string(),
            n => format!("the last of {n} discharges"),
        };
        let name = format!("what the largest arrays bear of {row} in air of {air:.0} °C");
        Demand { name, kind: Kind::Discharge }
    });
    limits.chain(loss).chain(current).chain(lasting).chain(pulse).collect()
}

/// What a demand would have to allow for the resistance at which `point` was found.
pub(super) fn way_for(ask: &BleederAsk, demand: &Demand<Kind>, point: &Point) -> Vec<String> {
    match demand.kind {
        Kind::Limit(index) => match point.limits.get(index) {
            Some((held, _)) if held.is_finite() => {
                vec![format!("{} until {} holds", duration(Time::from_si(*held), Direction::Up), demand.name)]
            }
            _ => Vec::new(),
        },
        Kind::Loss(_) => vec![format!("a standing loss of {}", show(Power::from_si(point.standing), Direction::Up))],
        Kind::Current(_) => vec![format!("a current of {}", show(Current::from_si(point.current), Direction::Up))],
        Kind::Rating(_) => {
            let mut ways = vec![format!(
                "elements that together bear {}",
                show(Power::from_si(point.standing_leg), Direction::Up)
            )];
            ways.extend(
                cooler(&ask.build, point.standing_leg)
                    .map(|kelvin| format!("air of at most {}", show(Temperature::from_si(kelvin), Direction::Down))),
            );
            ways
        }
        Kind::Discharge => {
            let (energy, peak) = (Energy::from_si(point.discharge.energy), Power::from_si(point.discharge.peak));
            vec![format!(
                "elements that together bear a discharge of {} with a peak of {}",
                show(energy, Direction::Up),
                show(peak, Direction::Up)
            )]
        }
        Kind::Average(most) => {
            let average = show(Power::from_si(point.average), Direction::Up);
            let mut ways = vec![format!("elements that together bear {average} on average")];
            // The energy of a cycle stays: a longer cycle thins it out.
            let apart = ask.switched.and_then(|contact| contact.every).map(|t| t.si() * point.average / most);
            let apart = apart.filter(|t| t.is_finite()).map(|t| duration(Time::from_si(t), Direction::Up));
            ways.extend(apart.map(|apart| format!("{apart} between discharges")));
            ways
        }
    }
}

/// The warmest air, in kelvin, in which the largest array of some element bears `watt`.
fn cooler(build: &Build, watt: f64) -> Option<f64> {
    const COLDEST: f64 = CELSIUS_ZERO_K - 40.0;
    let elements = f64::from(build.series_up_to * build.parallel_up_to) * (1.0 - build.margin);
    let warmest = build.elements.iter().filter_map(|e| {
        let (power, full, zero) = (e.rating.power?.si(), e.rating.full_to?.si(), e.rating.zero_at?.si());
        let share = watt / (power * elements);
        (share <= 1.0).then_some(zero - share * (zero - full))
    });
    warmest.fold(None, |most: Option<f64>, t| Some(most.map_or(t, |m| m.max(t)))).filter(|t| *t > COLDEST)
}

/// What would open a window whose lower end comes from this demand, beside allowing more.
pub(super) fn instead(demand: &Demand<Kind>) -> Option<String> {
    let standing = matches!(demand.kind, Kind::Loss(_) | Kind::Rating(_));
    let contact = "a bleeder that a contact switches on at isolation, which has no standing loss (`--switched`)";
    standing.then(|| contact.into())
}

/// What to look at where nothing meets a demand.
pub(super) fn nowhere(ask: &BleederAsk, demand: &Demand<Kind>) -> Option<String> {
    let faults = ask.switched.is_some() && demand.name.ends_with(ANY_FAULT);
    let text = match demand.kind {
        Kind::Limit(_) if faults => {
            "A contact that does not close is a single fault: it takes a second path beside it, a bleeder that is always \
             connected or one with a contact of its own."
        }
        Kind::Limit(_) if ask.switched.is_some() => {
            "The contact's delay counts: nothing flows before it closes. Look also at what the resistor does not reach: a \
             capacitor behind a series resistor, the units of a string, a source of charge."
        }
        Kind::Limit(_) => {
            "Look at what the resistor does not reach: a capacitor behind a series resistor, the units of a string, a \
             source of charge. Another place (`--across`), more strings (with single faults) or a longer time may do."
        }
        Kind::Discharge => {
            "The energy that the bank holds goes into the resistor at every discharge, whatever its value: elements that \
             bear more, more of them (`--series-up-to`, `--parallel-up-to`), fewer discharges in a row or more time \
             between them may do."
        }
        Kind::Average(_) => {
            "The energy of a cycle hardly depends on the resistance: more time between discharges (`--every`), larger \
             elements or more of them may do."
        }
        Kind::Loss(_) | Kind::Current(_) | Kind::Rating(_) => return None,
    };
    Some(text.into())
}
