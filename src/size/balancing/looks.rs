//! Where every demand is met, for every tolerance that designs can have and for every number of strings that matters.

use super::Job;
use super::demands::Kind;
use super::probe::{Fitted, Point};
use super::request::BalancingAsk;
use crate::quantity::Tolerance;
use crate::size::arrays::Design;
use crate::size::error::SizeError;
use crate::size::scan::{Demand, Scan};
use crate::size::spans::{Span, Spans};
use rayon::prelude::*;

/// What a window depends on: how far actual values lie from the marked one, as factors, and strings in an array.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Key {
    low: f64,
    high: f64,
    /// 0 where the number of strings does not matter.
    strings: u32,
}

impl Key {
    fn of(tolerance: Option<Tolerance>, strings: u32) -> Self {
        let tolerance = tolerance.unwrap_or(Tolerance::NONE);
        Key { low: tolerance.lowest_factor(), high: tolerance.highest_factor(), strings }
    }

    fn width(&self) -> f64 {
        self.high / self.low
    }
}

/// A bank to be looked at.
pub(super) struct Probed<'a> {
    key: Key,
    fitted: Fitted<'a>,
}

/// One for every tolerance among the elements; with single faults, for every number of strings as well, since that
/// decides what one open element leaves.
pub(super) fn probes<'a>(job: &'a Job, ask: &BalancingAsk) -> Result<Vec<Probed<'a>>, SizeError> {
    let faults = job.counted.iter().any(|i| job.description.limits[*i].single_fault);
    let strings: Vec<u32> = if faults { (1..=ask.build.parallel_up_to).collect() } else { vec![0] };
    let mut probes: Vec<Probed> = Vec::new();
    for element in &ask.build.elements {
        for strings in &strings {
            let key = Key::of(element.tolerance, *strings);
            if probes.iter().all(|p| p.key != key) {
                probes.push(Probed { key, fitted: Fitted::new(job, element.tolerance, (*strings).max(1))? });
            }
        }
    }
    Ok(probes)
}

/// What was found for one of them, over the marked resistance.
pub(super) struct Look<'a> {
    key: Key,
    pub probe: &'a Fitted<'a>,
    pub scan: Scan<'a, Fitted<'a>>,
    pub spans: Vec<Spans>,
    pub window: Spans,
}

impl Look<'_> {
    /// The window as one of actual resistance, of which all of a design's tolerance has to lie inside.
    pub fn actual(&self) -> Spans {
        let wide = |span: &Span| Span { low: span.low * self.key.low, high: span.high * self.key.high };
        Spans::of(self.window.as_slice().iter().map(wide).collect())
    }

    /// True where actual values can lie off the marked one.
    pub fn has_tolerance(&self) -> bool {
        self.key.width() > 1.0
    }

    /// How far actual values lie from the marked one, as shares below and above.
    pub fn tolerance(&self) -> (f64, f64) {
        (1.0 - self.key.low, self.key.high - 1.0)
    }

    /// A voltage in volt that the highest of all units clearly reaches with a design: the lower one of its neighbours. In
    /// a plain chain voltages only grow with the resistance.
    pub fn volts(&self, design: &Design) -> f64 {
        let ohms = design.value * f64::from(design.series) / f64::from(design.parallel);
        let points = self.scan.points();
        let after = points.partition_point(|(at, _)| *at < ohms);
        let (below, above) = (after.checked_sub(1).and_then(|at| points.get(at)), points.get(after));
        let highest = |(_, point): &(f64, Point)| point.highest().into_iter().fold(0.0, f64::max);
        let found = below.into_iter().chain(above).map(highest).reduce(f64::min);
        found.unwrap_or(0.0)
    }
}

/// All of them.
pub(super) struct Looks<'a>(Vec<Look<'a>>);

impl<'a> Looks<'a> {
    /// Looks around `middle`.
    pub fn at(probes: &'a [Probed<'a>], middle: f64, demands: &[Demand<Kind>]) -> Result<Self, SizeError> {
        let look = |Probed { key, fitted }: &'a Probed<'a>| {
            let scan = Scan::around(middle, fitted, demands)?;
            let spans = demands.par_iter().map(|d| scan.spans(d)).collect::<Result<Vec<Spans>, SizeError>>()?;
            let window = spans.iter().fold(Spans::all(), |w, s| w.and(s));
            Ok(Look { key: *key, probe: fitted, scan, spans, window })
        };
        Ok(Looks(probes.par_iter().map(look).collect::<Result<_, SizeError>>()?))
    }

    /// What was found for a design of that tolerance and number of strings.
    pub fn of(&self, tolerance: Option<Tolerance>, strings: u32) -> &Look<'a> {
        let is = |look: &&Look| look.key == Key::of(tolerance, strings) || look.key == Key::of(tolerance, 0);
        self.0.iter().find(is).unwrap_or_else(|| self.shown())
    }

    /// The one that is told of: of the closest tolerance, with the most strings.
    pub fn shown(&self) -> &Look<'a> {
        let closest =
            |x: &&Look, y: &&Look| x.key.width().total_cmp(&y.key.width()).then(y.key.strings.cmp(&x.key.strings));
        // A build without elements was refused.
        self.0.iter().min_by(closest).unwrap_or(&self.0[0])
    }
}
