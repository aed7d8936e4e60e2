//! What a wait depends on: seconds per percent of each part's value, and what to tighten first.

use super::{Answers, EngineError, Pair, Wait, WaitCheck, si, si_or_null};
use crate::discharge::{Model, Study, slopes_at, values_at};
use crate::quantity::{Quantity, Time};
use serde::Serialize;

/// How the waits at one test point depend on the parts.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Sensitivity {
    /// The test point.
    pub across: Pair,
    /// Every part that is always there: what the slowest wait depends on most comes first. Empty where the wait is 0
    /// or never ends, and so does not depend on small changes.
    pub parts: Vec<PartSensitivity>,
    /// The part whose tolerance costs most; `None` where no tolerance costs anything.
    pub tighten_first: Option<String>,
}

/// How the waits depend on one part.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct PartSensitivity {
    /// The part.
    pub id: String,
    /// Change of the nominal wait for one percent more of the part's value, with its sign.
    #[serde(rename = "nominal_s_per_percent", serialize_with = "si_or_null")]
    pub nominal: Option<Time>,
    /// Change of the slowest wait for one percent more of the part's value at the worst point, with its sign.
    #[serde(rename = "slowest_s_per_percent", serialize_with = "si")]
    pub slowest: Time,
    /// By how much the slowest wait would be shorter at most with this part at its marked value: what its tolerance
    /// costs.
    #[serde(rename = "tolerance_costs_s", serialize_with = "si")]
    pub tolerance_costs: Time,
}

/// Sensitivities at every test point.
pub(crate) fn sensitivities(
    check: &WaitCheck,
    model: &Model,
    waits: &[Wait],
    healthy: &Answers,
) -> Result<Vec<Sensitivity>, EngineError> {
    let failed = EngineError::of("sensitivity");
    let charged = check.bank.description().charged_to;
    let (loose, figures) = (model.all_loose(), check.waits());
    let marked = loose.nominal_point();
    let mut list = Vec::with_capacity(waits.len());
    for (pair, wait) in waits.iter().enumerate() {
        // With the sinks that draw in the slowest case.
        let scenario = healthy.worst_scenario(check.wait(pair));
        let study = |volts: f64| Study::new(&loose, &scenario, volts, &figures, 0);
        let (nominal, highest) = (study(charged.nominal.si()), study(charged.highest.si()));
        // The loose values of the plan come first; a part without a tolerance stands at its marked value.
        let mut worst = marked.clone();
        worst.iter_mut().zip(&wait.worst_point).for_each(|(x, w)| *x = w.factor);
        let at_nominal = slopes_at(&nominal, pair, &marked).map_err(&failed)?;
        let at_worst = slopes_at(&highest, pair, &worst).map_err(&failed)?;
        let mut parts = Vec::new();
        for (p, slope) in at_worst.iter().flatten().enumerate() {
            let mut without = worst.clone();
            without[p] = 1.0;
            let shorter = values_at(&highest, &without).map_err(&failed)?[pair];
            let slowest = wait.slowest.map_or(f64::INFINITY, Quantity::si);
            let cost = if shorter < slowest { slowest - shorter } else { 0.0 };
            parts.push(PartSensitivity {
                id: loose.parameters[p].id.clone(),
                // Per percent of the value that the part has there.
                nominal: at_nominal.as_ref().map(|slopes| Time::from_si(0.01 * slopes[p])),
                slowest: Time::from_si(0.01 * slope * worst[p]),
                tolerance_costs: Time::from_si(if loose.parameters[p].low < loose.parameters[p].high {
                    cost
                } else {
                    0.0
                }),
            });
        }
        parts.sort_by(|x, y| y.slowest.si().abs().total_cmp(&x.slowest.si().abs()));
        let costly = |x: &&PartSensitivity| x.tolerance_costs.si() > 0.0;
        let first =
            parts.iter().filter(costly).max_by(|x, y| x.tolerance_costs.si().total_cmp(&y.tolerance_costs.si()));
        list.push(Sensitivity { across: wait.across.clone(), tighten_first: first.map(|part| part.id.clone()), parts });
    }
    Ok(list)
}
