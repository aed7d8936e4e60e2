//! A plan as JSON: SI base units, the unit in the key, never rounded.

mod finite;

pub use finite::{NotFinite, check_finite};

use crate::plan::Plan;
use serde::Serialize;

/// A plan as indented JSON with a newline at its end. Keys keep their order from one run to the next.
///
/// # Errors
/// Where a figure of the plan is not a finite number: JSON has no such number, and `null` would read as "never".
pub fn plan_json(plan: &Plan) -> Result<String, NotFinite> {
    json(plan)
}

/// Any result as indented JSON with a newline at its end.
pub(super) fn json<T: Serialize>(result: &T) -> Result<String, NotFinite> {
    check_finite(result)?;
    let mut text = serde_json::to_string_pretty(result).map_err(|e| NotFinite::new(e.to_string()))?;
    text.push('\n');
    Ok(text)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::{Quantity, Voltage};
    use crate::report::sample;

    #[test]
    fn a_plan_with_a_figure_that_is_not_finite_is_refused_with_its_place() {
        let mut plan = sample::plan();
        assert!(plan_json(&plan).is_ok_and(|text| text.ends_with("}\n")));
        plan.waits[1].settles_at = Voltage::from_si(f64::NAN);
        let error = plan_json(&plan).map_err(|e| e.to_string());
        assert_eq!(error, Err("waits[1].settles_at_v is not a finite number".into()));
    }
}
