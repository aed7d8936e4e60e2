//! What every unit of a string bears and leaks.

use super::request::BalancingAsk;
use super::string::{Found, Member};
use crate::bank::description::Capacitor;
use crate::data::dielectric;
use crate::quantity::{Current, Direction, Quantity, Voltage, exact, show};
use crate::size::error::SizeError;

/// One unit: what it bears, and the greatest current that it leaks.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Bears {
    pub rated: Voltage,
    /// Of all its capacitors together.
    pub leakage: Current,
}

/// What was found of all units, and what had to be assumed for it.
pub(super) struct Units {
    pub bears: Vec<Bears>,
    pub assumptions: Vec<String>,
}

/// Looks up every unit of a string.
pub(super) fn units(found: &Found, ask: &BalancingAsk) -> Result<Units, SizeError> {
    let capacitors = |member: &Member| -> Vec<&Capacitor> {
        found.description.capacitors.iter().filter(|c| member.capacitors.contains(&c.id)).collect()
    };
    let all: Vec<Vec<&Capacitor>> = found.members.iter().map(capacitors).collect();
    let unrated: Vec<&str> =
        all.iter().flatten().filter(|c| c.rated.or(ask.rated).is_none()).map(|c| c.id.as_str()).collect();
    if !unrated.is_empty() {
        return Err(SizeError::Asked(format!(
            "no rated voltage is known of {}; write `rated` into the file, or `--rated 450V`",
            unrated.join(", ")
        )));
    }
    let mut assumptions = Vec::new();
    let mut bears = Vec::new();
    for unit in &all {
        let mut leakage = 0.0;
        let mut rated = f64::INFINITY;
        for c in unit {
            let own = c.rated.or(ask.rated).map_or(f64::INFINITY, Quantity::si);
            rated = rated.min(own);
            leakage += leakage_of(c, Voltage::from_si(own), ask, &mut assumptions)? * f64::from(c.parallel);
        }
        bears.push(Bears { rated: Voltage::from_si(rated), leakage: Current::from_si(leakage) });
    }
    if let Some(rated) = ask.rated.filter(|_| all.iter().flatten().any(|c| c.rated.is_none())) {
        assumptions.push(format!("Rated voltage of units for which the file gives none: {}, as asked.", exact(rated)));
    }
    if let Some(leakage) = ask.leakage {
        assumptions.push(format!("One unit leaks anything from nothing to {}, as asked.", exact(leakage)));
    }
    Ok(Units { bears, assumptions })
}

/// The greatest leakage in ampere of one unit of a capacitor; a typical one is listed once for units that are alike.
fn leakage_of(
    c: &Capacitor,
    rated: Voltage,
    ask: &BalancingAsk,
    assumptions: &mut Vec<String>,
) -> Result<f64, SizeError> {
    if let Some(leakage) = ask.leakage {
        return Ok(leakage.si());
    }
    let known = c.dielectric.as_deref().and_then(dielectric);
    let typical = known.and_then(|d| Some((d, d.greatest_leakage(c.value, rated)?)));
    let Some((dielectric, leakage)) = typical else {
        let why = match &c.dielectric {
            None => format!("the file gives no dielectric for {}", c.id),
            Some(name) => format!("no typical leakage of {name} is known, for {}", c.id),
        };
        return Err(SizeError::Asked(format!(
            "{why}; write the greatest leakage current of one unit, such as `--leakage 3mA`"
        )));
    };
    let by = match &dielectric.leakage {
        Some(rule) => format!("makers' rule: {rule}"),
        None => "its rated charge over the least typical time constant of the insulation".into(),
    };
    let text = format!(
        "One unit of {} and {} leaks anything from nothing to {} ({by}; seen: {}).",
        exact(c.value),
        exact(rated),
        show(leakage, Direction::Up),
        dielectric.seen
    );
    if !assumptions.contains(&text) {
        assumptions.push(text);
    }
    Ok(leakage.si())
}
