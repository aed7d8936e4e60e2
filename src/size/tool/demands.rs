//! What is demanded of a tool, how a point compares with it, and what each demand would have to allow.

use super::applied::{Applied, Goal};
use super::bearing::Bearing;
use super::probe::Point;
use super::request::ToolAsk;
use super::words::spoken;
use crate::bank::stock::Element;
use crate::quantity::{Current, Direction, Energy, Power, Quantity, Time, celsius, duration, exact, show};
use crate::size::scan::{Demand, Measure, ratio};
use std::sync::Arc;

/// What a demand looks at.
#[derive(Debug, Clone)]
pub(super) enum Kind {
    /// The goal of this number, and how many seconds there are for it.
    Goal(usize, f64),
    /// Current, at most this many ampere.
    Current(f64),
    /// Heat of cable and contact, at most this many joule.
    Contact(f64),
    /// What the largest arrays of the elements at hand bear.
    Rating(Arc<Largest>),
}

/// The largest arrays of the elements at hand.
#[derive(Debug)]
pub(super) struct Largest {
    pub bearing: Bearing,
    pub elements: Vec<Element>,
    pub series: u32,
    pub parallel: u32,
}

impl Measure<Point> for Kind {
    fn ratio(&self, point: &Point) -> f64 {
        match self {
            Kind::Goal(index, held) => {
                let never = f64::INFINITY;
                ratio(point.times.get(*index).copied().unwrap_or(never), *held)
            }
            Kind::Current(ampere) => ratio(point.current, *ampere),
            Kind::Contact(joule) => ratio(point.contact, *joule),
            Kind::Rating(largest) => {
                largest.bearing.largest(&largest.elements, largest.series, largest.parallel, point)
            }
        }
    }

    fn is_purpose(&self) -> bool {
        matches!(self, Kind::Goal(..))
    }
}

pub(super) fn demands(applied: &Applied, ask: &ToolAsk, bearing: &Bearing) -> Vec<Demand<Kind>> {
    let held = spoken(applied.held);
    let goals = applied.goals.iter().enumerate().map(|(index, goal)| Demand {
        name: format!("{} within {held} of holding it", goal_in_words(goal)),
        kind: Kind::Goal(index, applied.held.si()),
    });
    let current = ask
        .max_current
        .map(|most| Demand { name: format!("a current of at most {}", exact(most)), kind: Kind::Current(most.si()) });
    let contact = ask.contact_energy.map(|most| Demand {
        name: format!("at most {} in cable and contact", exact(most)),
        kind: Kind::Contact(most.si()),
    });
    let row = match ask.banks {
        Some(banks) if banks > 1 => format!(" {banks} times in a row"),
        _ => String::new(),
    };
    let largest = Largest {
        bearing: bearing.clone(),
        elements: ask.build.elements.clone(),
        series: ask.build.series_up_to,
        parallel: ask.build.parallel_up_to,
    };
    let rating = Demand {
        name: format!("what the largest arrays bear{row} in air of {:.0} °C", celsius(bearing.ambient)),
        kind: Kind::Rating(Arc::new(largest)),
    };
    goals.chain(current).chain(contact).chain([rating]).collect()
}

/// `50 V at every test point`.
pub(super) fn goal_in_words(goal: &Goal) -> String {
    match &goal.at {
        None => format!("{} at every test point", exact(goal.below)),
        Some([a, b]) => format!("{} at {a} - {b}", exact(goal.below)),
    }
}

/// What a demand would have to allow for the resistance at which `point` was found.
pub(super) fn way_for(demand: &Demand<Kind>, point: &Point) -> Vec<String> {
    match &demand.kind {
        Kind::Goal(index, _) => match point.times.get(*index) {
            Some(time) if time.is_finite() => {
                vec![format!("holding it for {}", duration(Time::from_si(*time), Direction::Up))]
            }
            _ => Vec::new(),
        },
        Kind::Current(_) => vec![format!("a current of {}", show(Current::from_si(point.current), Direction::Up))],
        Kind::Contact(_) => {
            let energy = show(Energy::from_si(point.contact), Direction::Up);
            vec![format!("{energy} in cable and contact, or less resistance there")]
        }
        Kind::Rating(_) => {
            let power = Power::from_si(point.voltage.powi(2) / point.ohms);
            vec![format!(
                "elements that together bear a pulse of {} that begins at {}",
                show(Energy::from_si(point.energy), Direction::Up),
                show(power, Direction::Up)
            )]
        }
    }
}

/// What would open a window whose lower end comes from this demand, beside allowing more.
pub(super) fn instead(drains: bool) -> impl Fn(&Demand<Kind>) -> Option<String> {
    move |demand| {
        let lower = !matches!(demand.kind, Kind::Goal(..));
        (lower && drains)
            .then(|| "applying it later (`--after`), when what is always connected has taken the voltage down".into())
    }
}

/// What to look at where nothing meets a demand.
pub(super) fn nowhere(demand: &Demand<Kind>) -> Option<String> {
    match demand.kind {
        Kind::Goal(..) => Some(
            "Look at what the tool does not reach: a capacitor behind a series resistor, the units of a string, a third \
             terminal. Another place (`--across`), a tool on every unit, or a longer time may do."
                .into(),
        ),
        Kind::Rating(_) => Some(
            "The elements at hand bear this discharge in no array that was looked at, or their ratings tell nothing of a \
             pulse: larger elements, more of them (`--series-up-to`, `--parallel-up-to`), or a stock file with `pulse`, \
             `overload` or `thermal_time`."
                .into(),
        ),
        Kind::Contact(_) => Some("Less resistance of cable and contact (`--lead`) gives off less heat there.".into()),
        Kind::Current(_) => None,
    }
}
