//! Which supply is meant, and what it has to do.

use super::request::{PrechargeAsk, USUAL_SHARE};
use crate::bank::Bank;
use crate::bank::description::{Description, Pair, Rating, Supply};
use crate::quantity::{Quantity, Resistance, Temperature};
use crate::size::error::SizeError;

/// The bank as it is to be sized for.
pub(super) struct Job {
    /// With the ambient that was asked for.
    pub description: Description,
    /// The supply, its series resistance not known yet.
    pub supply: Supply,
    /// True where the file has it.
    pub in_file: bool,
    /// The share of its voltage that counts.
    pub share: Option<f64>,
    pub ambient: Temperature,
}

/// The bank with a supply in it, in place of one of the same name.
pub(super) fn placed(description: &Description, supply: &Supply) -> Description {
    let mut with = description.clone();
    match with.supplies.iter_mut().find(|s| s.id == supply.id) {
        Some(old) => *old = supply.clone(),
        None => with.supplies.push(supply.clone()),
    }
    with
}

impl Job {
    pub fn of(bank: &Bank, ask: &PrechargeAsk) -> Result<Self, SizeError> {
        ask.build.check()?;
        let asked = |text: &str| Err(SizeError::Asked(text.into()));
        if !ask.within.si().is_finite() || ask.within.si() <= 0.0 {
            return asked("a precharge takes time; write `--within 2s`");
        }
        if ask.share.is_some_and(|s| !(s.si() > 0.0 && s.si() < 1.0)) {
            return asked(
                "the whole of the supply's voltage is only approached; write a `--share` under 100 %, such as `95%`",
            );
        }
        if ask.attempts.is_some_and(|a| a.count == 0 || a.every.si() < ask.within.si()) {
            return asked(
                "one attempt can't begin before the one before is over; write an `--every` of at least `--within`",
            );
        }
        let mut description = bank.description().clone();
        description.ambient = ask.ambient.or(description.ambient);
        let (found, in_file) = match existing(&description, ask)? {
            Some(supply) => (supply, true),
            None => (fresh(&description, ask)?, false),
        };
        let supply = Supply {
            series: Resistance::from_si(1.0),
            tolerance: None,
            array_series: 1,
            array_parallel: 1,
            rating: Rating::default(),
            ..found
        };
        let nothing_asked = ask.main.and_then(|m| m.max_inrush).is_none();
        let share = ask.share.map(Quantity::si).or(nothing_asked.then_some(USUAL_SHARE));
        let ambient = ask.ambient.unwrap_or_else(|| bank.ambient());
        Ok(Job { description, supply, in_file, share, ambient })
    }
}

/// The supply of the file that is meant; `None` where a new one is.
fn existing(description: &Description, ask: &PrechargeAsk) -> Result<Option<Supply>, SizeError> {
    let supplies = &description.supplies;
    let ids: Vec<&str> = supplies.iter().map(|s| s.id.as_str()).collect();
    let names = ids.join(", ");
    let refuse = |text: String| Err(SizeError::Asked(text));
    let supply = match (&ask.supply, &ask.id) {
        (Some(id), _) => match supplies.iter().find(|s| s.id == *id) {
            Some(supply) => supply,
            None if ids.is_empty() => {
                return refuse("the file has no supplies; leave `--supply` out, and a new one is sized".into());
            }
            None => return refuse(format!("the file has no supply `{id}`; write `--supply` with one of: {names}")),
        },
        (None, Some(id)) if ids.contains(&id.as_str()) => {
            return refuse(format!("the file has a supply `{id}`; `--supply {id}` sizes it anew"));
        }
        (None, Some(_)) => return Ok(None),
        (None, None) => match supplies.as_slice() {
            [] => return Ok(None),
            [one] => one,
            _ => {
                return refuse(format!(
                    "the file has {} supplies; write `--supply` with one of: {names}",
                    supplies.len()
                ));
            }
        },
    };
    if ask.voltage.is_some() || ask.across.is_some() {
        let id = &supply.id;
        return refuse(format!(
            "{id} has its voltage and its nodes in the file; leave `--voltage` and `--across` out, or give a new supply \
             a name with `--id`"
        ));
    }
    Ok(Some(supply.clone()))
}

/// A supply that the file does not have.
fn fresh(description: &Description, ask: &PrechargeAsk) -> Result<Supply, SizeError> {
    let voltage = ask.voltage.unwrap_or(description.charged_to.highest);
    if voltage.si() <= 0.0 {
        return Err(SizeError::Asked("the file's `charged_to` is 0 V; write `--voltage 565V`".into()));
    }
    let across: Pair = match (&ask.across, description.terminals.as_slice()) {
        (Some(pair), _) => pair.clone(),
        (None, [first, .., last]) => [first.clone(), last.clone()],
        _ => return Err(SizeError::Asked("the bank has no two terminals; write `--across P,N`".into())),
    };
    Ok(Supply {
        id: ask.id.clone().unwrap_or_else(|| free_id(description)),
        voltage,
        series: Resistance::from_si(1.0),
        tolerance: None,
        array_series: 1,
        array_parallel: 1,
        across,
        rating: Rating::default(),
    })
}

/// `S1`, or the next one that no part has.
fn free_id(description: &Description) -> String {
    let taken = |id: &str| {
        description.resistors.iter().any(|r| r.id == id)
            || description.capacitors.iter().any(|c| c.id == id)
            || description.sinks.iter().any(|s| s.id == id)
            || description.supplies.iter().any(|s| s.id == id)
    };
    (1..).map(|n| format!("S{n}")).find(|id| !taken(id)).unwrap_or_default()
}
