//! What is told of the window: every demand's own span, what bounds it, what was looked through, and why nothing is in it.

use super::arrays::Listed;
use super::build::Build;
use super::result::{DemandResult, Searched, SetAside, Window};
use super::scan::Demand;
use super::spans::{Span, Spans};
use crate::finding::{Finding, Severity};
use crate::quantity::{Direction, Quantity, Resistance, show};

/// Every demand with the resistances that meet it.
pub(super) fn demand_results<K>(demands: &[Demand<K>], spans: &[Spans]) -> Vec<DemandResult> {
    demands.iter().zip(spans).map(|(d, s)| demand_result(d, s)).collect()
}

fn demand_result<K>(demand: &Demand<K>, spans: &Spans) -> DemandResult {
    let ends = spans.ends();
    DemandResult {
        demand: demand.name.clone(),
        least: ends.and_then(|e| bounded(e.low)),
        greatest: ends.and_then(|e| bounded(e.high)),
        nowhere: spans.is_empty(),
        gaps: spans.as_slice().len() > 1,
    }
}

fn bounded(ohms: f64) -> Option<Resistance> {
    (ohms > 0.0 && ohms.is_finite()).then(|| Resistance::from_si(ohms))
}

/// The window with the demands that bound it; `None` where there is none.
#[allow(clippy::float_cmp)] // An end of the window is the very end of one of the demands.
pub(super) fn window_result<K>(demands: &[Demand<K>], spans: &[Spans], window: &Spans) -> Option<Window> {
    let ends = window.ends()?;
    let from = |has: &dyn Fn(&Span) -> bool| {
        let found = demands.iter().zip(spans).find(|(_, s)| s.as_slice().iter().any(has));
        found.map(|(d, _)| d.name.clone())
    };
    let (least, greatest) = (bounded(ends.low), bounded(ends.high));
    Some(Window {
        least,
        least_from: least.and_then(|_| from(&|s| s.low == ends.low)),
        greatest,
        greatest_from: greatest.and_then(|_| from(&|s| s.high == ends.high)),
    })
}

/// What was looked through.
pub(super) fn searched(build: &Build, found: &Listed, refused: usize) -> Searched {
    Searched {
        elements: build.elements.len(),
        inside_window: found.inside,
        set_aside: found.set_aside.iter().map(|(of, arrays)| SetAside { of, arrays: *arrays }).collect(),
        designs: found.designs.len(),
        refused_by_plan: refused,
    }
}

/// The window is open, and no design is in it.
pub(super) fn nothing_fits(build: &Build, found: &Listed, refused: usize, window: &Spans) -> Finding {
    let ends = window.ends().map_or((0.0, f64::INFINITY), |e| (e.low, e.high));
    let range = match (bounded(ends.0), bounded(ends.1)) {
        (Some(low), Some(high)) => {
            format!("{} to {}", show(low, Direction::Up), show(high, Direction::Down))
        }
        (None, Some(high)) => format!("up to {}", show(high, Direction::Down)),
        (Some(low), None) => format!("from {} on", show(low, Direction::Up)),
        (None, None) => "any resistance".into(),
    };
    let (text, help) = if found.inside == 0 {
        (
            format!("No array of the elements at hand lies in the window ({range}) with all of its tolerance."),
            "a finer series, a closer tolerance, other values, or more elements in an array",
        )
    } else if refused == 0 {
        let set_aside = found.set_aside.iter().map(|(of, arrays)| format!("too much {of} in {arrays} of them"));
        (
            format!(
                "{} arrays lie in the window ({range}); one element would carry {}.",
                found.inside,
                set_aside.collect::<Vec<_>>().join(" and ")
            ),
            "larger elements, a lower ambient, a smaller margin, or more elements in an array",
        )
    } else {
        (
            format!(
                "{} arrays lie in the window ({range}); of those that seemed to do, the full plan refused {refused}{}.",
                found.inside,
                if found.designs.len() > refused { ", and no more were tried" } else { "" }
            ),
            "`--show` with a greater number tries more of them",
        )
    };
    let series = format!(
        "Arrays of up to {} in series and {} in parallel were looked at. ",
        build.series_up_to, build.parallel_up_to
    );
    Finding::new(Severity::Warning, "no-design", text).with_help(format!("{series}What may help: {help}."))
}
