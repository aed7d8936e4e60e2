//! What is demanded of a bleeder, how a point compares with it, and what each demand would have to allow.

use super::probe::Point;
use super::request::BleederAsk;
use crate::bank::description::{Bound, Description, Rule};
use crate::quantity::{
    CELSIUS_ZERO_K, Current, Direction, Power, Quantity, Temperature, Time, celsius, duration, exact, show,
};
use crate::size::Build;
use crate::size::arrays::usable_power;
use crate::size::scan::{Demand, Measure, ratio};

/// What a demand looks at.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Kind {
    /// The limit of this number among those that count.
    Limit(usize),
    /// Standing loss, at most this many watt.
    Loss(f64),
    /// Current, at most this many ampere.
    Current(f64),
    /// What the largest arrays of the elements at hand bear, in watt.
    Rating(f64),
}

impl Measure<Point> for Kind {
    fn ratio(&self, point: &Point) -> f64 {
        let (found, allowed) = match self {
            Kind::Limit(index) => point.limits.get(*index).copied().unwrap_or((f64::INFINITY, 0.0)),
            Kind::Loss(watt) | Kind::Rating(watt) => (point.standing, *watt),
            Kind::Current(ampere) => (point.current, *ampere),
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
    let most =
        ask.build.elements.iter().map(|e| usable_power(&e.rating, ambient, ask.build.margin)).fold(0.0, f64::max)
            * f64::from(ask.build.series_up_to * ask.build.parallel_up_to);
    let rating = most.is_finite().then(|| Demand {
        name: format!(
            "what the largest arrays bear in air of {:.0} °C ({})",
            celsius(ambient),
            show(Power::from_si(most), Direction::Down)
        ),
        kind: Kind::Rating(most),
    });
    limits.chain(loss).chain(current).chain(rating).collect()
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
            let mut ways =
                vec![format!("elements that together bear {}", show(Power::from_si(point.standing), Direction::Up))];
            ways.extend(
                cooler(&ask.build, point.standing)
                    .map(|kelvin| format!("air of at most {}", show(Temperature::from_si(kelvin), Direction::Down))),
            );
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
    standing.then(|| "a bleeder that a contact switches on at isolation, which has no standing loss".into())
}

/// What to look at where nothing meets a demand.
pub(super) fn nowhere(demand: &Demand<Kind>) -> Option<String> {
    matches!(demand.kind, Kind::Limit(_)).then(|| {
        "Look at what the resistor does not reach: a capacitor behind a series resistor, the units of a string, a \
         source of charge. Another place (`--across`), more strings (with single faults) or a longer time may do."
            .into()
    })
}
