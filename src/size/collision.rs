//! Two demands that leave nothing between them: by how much, and what would open a window.

use super::error::SizeError;
use super::scan::{Demand, Measure, Probe, Scan};
use super::spans::Spans;
use crate::finding::{Finding, Severity};
use crate::quantity::{Direction, Quantity, Ratio, Resistance, show};

/// What a job knows of its demands, for people whose demands collide.
pub(super) struct Ways<'a, K, P> {
    /// What a demand would have to allow where this was found.
    pub allow: &'a dyn Fn(&Demand<K>, &P) -> Vec<String>,
    /// What else would open a window whose lower end is this demand's.
    pub instead: &'a dyn Fn(&Demand<K>) -> Option<String>,
    /// What to look at where nothing meets a demand.
    pub nowhere: &'a dyn Fn(&Demand<K>) -> Option<String>,
}

/// Why the window is empty: demands that nothing meets, or else the two that lie furthest apart.
pub(super) fn explained<K: Measure<P::Point>, P: Probe>(
    demands: &[Demand<K>],
    spans: &[Spans],
    scan: &Scan<'_, P>,
    ways: &Ways<'_, K, P::Point>,
) -> Result<Vec<Finding>, SizeError> {
    let nowhere: Vec<Finding> =
        demands.iter().zip(spans).filter(|(_, s)| s.is_empty()).map(|(d, _)| met_nowhere(d, ways)).collect();
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
    let mut open = (ways.allow)(upper, &scan.point(*least)?);
    open.extend((ways.allow)(lower, &scan.point(*most)?));
    open.extend((ways.instead)(lower));
    let finding = Finding::new(Severity::Warning, "demands-collide", text);
    Ok(vec![if open.is_empty() {
        finding
    } else {
        finding.with_help(format!("It would open with {}.", open.join("; or ")))
    }])
}

fn met_nowhere<K, P>(demand: &Demand<K>, ways: &Ways<'_, K, P>) -> Finding {
    let text = format!("{} is met by no resistance that was looked at.", demand.name);
    let finding = Finding::new(Severity::Warning, "demand-met-nowhere", text);
    match (ways.nowhere)(demand) {
        Some(help) => finding.with_help(help),
        None => finding,
    }
}

/// `1.3` or `27`, never less than it is.
fn times(ratio: f64) -> String {
    let text = show(Ratio::from_si(ratio / 100.0), Direction::Up);
    text.trim_end_matches(" %").to_string()
}
