//! Two demands that leave nothing between them: by how much, and what would open a window.

use super::request::{Ask, SizeError};
use super::spans::Spans;
use super::window::{Demand, Kind, Scan};
use crate::finding::{Finding, Severity};
use crate::quantity::{
    CELSIUS_ZERO_K, Current, Direction, Power, Quantity, Resistance, Temperature, Time, duration, show,
};

/// Why the window is empty: demands that nothing meets, or else the two that lie furthest apart.
pub(super) fn explained(
    ask: &Ask,
    demands: &[Demand],
    spans: &[Spans],
    scan: &Scan<'_>,
) -> Result<Vec<Finding>, SizeError> {
    let nowhere: Vec<Finding> =
        demands.iter().zip(spans).filter(|(_, s)| s.is_empty()).map(|(d, _)| met_nowhere(d)).collect();
    if !nowhere.is_empty() {
        return Ok(nowhere);
    }
    let ends: Vec<(usize, f64, f64)> =
        spans.iter().enumerate().filter_map(|(i, s)| s.ends().map(|e| (i, e.low, e.high))).collect();
    let pairs = ends.iter().flat_map(|a| ends.iter().map(move |b| (a, b)));
    // One wants at most `most`, the other at least `least`.
    let worst = pairs
        .filter(|((_, _, most), (_, least, _))| least > most)
        .max_by(|(a, b), (c, d)| (b.1 / a.2).total_cmp(&(d.1 / c.2)));
    let Some(((upper, _, most), (lower, least, _))) = worst else {
        let text = "The demands leave no resistance in common, though no two of them exclude each other outright: each \
                    is met in several spans that lie between those of the others.";
        return Ok(vec![Finding::new(Severity::Warning, "demands-collide", text)]);
    };
    let (upper, lower) = (&demands[*upper], &demands[*lower]);
    let ohm = Resistance::from_si;
    let text = format!(
        "{} needs an actual resistance of at most {}, {} one of at least {}: {} times as much.",
        upper.name,
        show(ohm(*most), Direction::Down),
        lower.name,
        show(ohm(*least), Direction::Up),
        times(least / most)
    );
    let mut ways = way_for(ask, upper, &scan.point(*least)?);
    ways.extend(way_for(ask, lower, &scan.point(*most)?));
    if matches!(lower.kind, Kind::Loss(_) | Kind::Rating(_)) {
        ways.push("a bleeder that a contact switches on at isolation, which has no standing loss".into());
    }
    let finding = Finding::new(Severity::Warning, "demands-collide", text);
    Ok(vec![if ways.is_empty() {
        finding
    } else {
        finding.with_help(format!("It would open with {}.", ways.join("; or ")))
    }])
}

fn met_nowhere(demand: &Demand) -> Finding {
    let text = format!("{} is met by no resistance that was looked at.", demand.name);
    let finding = Finding::new(Severity::Warning, "demand-met-nowhere", text);
    match demand.kind {
        Kind::Limit(_) => finding.with_help(
            "Look at what the resistor does not reach: a capacitor behind a series resistor, the units of a string, a \
             source of charge. Another place (`--across`), more strings (with single faults) or a longer time may do.",
        ),
        _ => finding,
    }
}

/// `1.3` or `27`, never less than it is.
fn times(ratio: f64) -> String {
    let text = show(crate::quantity::Ratio::from_si(ratio / 100.0), Direction::Up);
    text.trim_end_matches(" %").to_string()
}

/// What a demand would have to allow for the resistance at which `point` was found.
fn way_for(ask: &Ask, demand: &Demand, point: &super::probe::Point) -> Vec<String> {
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
                cooler(ask, point.standing)
                    .map(|kelvin| format!("air of at most {}", show(Temperature::from_si(kelvin), Direction::Down))),
            );
            ways
        }
    }
}

/// The warmest air, in kelvin, in which the largest array of some element bears `watt`.
fn cooler(ask: &Ask, watt: f64) -> Option<f64> {
    const COLDEST: f64 = CELSIUS_ZERO_K - 40.0;
    let elements = f64::from(ask.series_up_to * ask.parallel_up_to) * (1.0 - ask.margin);
    let warmest = ask.elements.iter().filter_map(|e| {
        let (power, full, zero) = (e.rating.power?.si(), e.rating.full_to?.si(), e.rating.zero_at?.si());
        let share = watt / (power * elements);
        (share <= 1.0).then_some(zero - share * (zero - full))
    });
    warmest.fold(None, |most: Option<f64>, t| Some(most.map_or(t, |m| m.max(t)))).filter(|t| *t > COLDEST)
}
