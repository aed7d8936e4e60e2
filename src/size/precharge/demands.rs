//! What is demanded of a precharge resistor, how a point compares with it, and what each demand would have to allow.

use super::charge::Point;
use super::request::PrechargeAsk;
use crate::quantity::{Current, Direction, Quantity, Ratio, Resistance, Time, Voltage, duration, exact, show};
use crate::size::scan::{Demand, Measure, ratio};

/// What a demand looks at.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Kind {
    /// The share of the supply's voltage, within so many seconds.
    Share { share: f64, within: f64 },
    /// The current as the main contactor closes, at most so many ampere over so many ohm.
    Inrush { most: f64, main: f64 },
    /// Current through the resistor, at most so many ampere.
    Current(f64),
}

impl Measure<Point> for Kind {
    fn ratio(&self, point: &Point) -> f64 {
        match self {
            Kind::Share { within, .. } => ratio(point.seconds, *within),
            Kind::Inrush { most, main } => ratio(point.short / main, *most),
            Kind::Current(most) => ratio(point.current, *most),
        }
    }

    fn is_purpose(&self) -> bool {
        !matches!(self, Kind::Current(_))
    }
}

/// The demands; `share` is the one that counts.
pub(super) fn demands(ask: &PrechargeAsk, share: Option<f64>) -> Vec<Demand<Kind>> {
    let within = whole(ask.within);
    let reached = share.map(|share| Demand {
        name: format!("{} of the supply's voltage within {within}", exact(Ratio::from_si(share))),
        kind: Kind::Share { share, within: ask.within.si() },
    });
    let inrush = ask.main.and_then(|main| {
        let most = main.max_inrush?;
        Some(Demand {
            name: format!("an inrush of at most {} as the main contactor closes after {within}", exact(most)),
            kind: Kind::Inrush { most: most.si(), main: main.resistance.si() },
        })
    });
    let current = ask.max_current.map(|most| Demand {
        name: format!("a current of at most {} through the resistor", exact(most)),
        kind: Kind::Current(most.si()),
    });
    reached.into_iter().chain(inrush).chain(current).collect()
}

/// A time as it was typed: `2 s` rather than `2.00 s`.
fn whole(time: Time) -> String {
    if time.si() < 120.0 { exact(time) } else { duration(time, Direction::Up) }
}

/// A share that is really reached, never shown higher.
fn at_least(share: f64) -> String {
    show(Ratio::from_si(share.max(0.0)), Direction::Down)
}

/// What a demand would have to allow for the resistance at which `point` was found; `volts` is the supply's voltage.
pub(super) fn way_for(demand: &Demand<Kind>, point: &Point, volts: f64) -> Vec<String> {
    match demand.kind {
        Kind::Share { share, within } => {
            let reached = 1.0 - point.short / volts;
            let less = format!("a share of at most {} within {}", at_least(reached), whole(Time::from_si(within)));
            if point.seconds.is_finite() {
                let asked = exact(Ratio::from_si(share));
                return vec![format!("{} for {asked}", duration(Time::from_si(point.seconds), Direction::Up)), less];
            }
            vec![format!("{less} (it can settle at no more than {}: {})", settled(point, volts), HELD)]
        }
        Kind::Inrush { most, main } => vec![
            format!("an inrush of {}", show(Current::from_si(point.short / main), Direction::Up)),
            format!("a main path of at least {}", show(Resistance::from_si(point.short / most), Direction::Up)),
        ],
        Kind::Current(_) => vec![format!("a current of {}", show(Current::from_si(point.current), Direction::Up))],
    }
}

/// Why a bank settles below its supply.
const HELD: &str = "resistors or sinks of the bank draw on and divide the supply's voltage";

/// What the pair settles at, as a voltage and as a share.
fn settled(point: &Point, volts: f64) -> String {
    let left = (volts - point.settles_short).max(0.0);
    format!("{}, {} of the supply's voltage", show(Voltage::from_si(left), Direction::Down), at_least(left / volts))
}

/// What would open a window whose lower end comes from this demand, beside allowing more.
pub(super) fn instead(demand: &Demand<Kind>) -> Option<String> {
    matches!(demand.kind, Kind::Current(_))
        .then(|| "a charge in two stages, or a supply that limits its own current".to_string())
}

/// What to look at where nothing meets a demand: `point` was found at the `least` resistance that was looked at.
pub(super) fn nowhere(demand: &Demand<Kind>, least: f64, point: Option<&Point>, volts: f64) -> Option<String> {
    let point = point?;
    let at = show(Resistance::from_si(least), Direction::Up);
    let ways = way_for(demand, point, volts);
    Some(format!(
        "Even with {at} it takes {}. Look at what the bank itself puts in the way: series resistors in front of its \
         capacitors, resistors and sinks that draw on.",
        ways.join(", or ")
    ))
}
