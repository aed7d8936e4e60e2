//! `switched`: the contact of a bleeder that is connected at isolation.

use super::reader::{Group, Reader};
use super::top::optional;
use crate::bank::description::Switched;

const KEYS: [&str; 4] = ["closes_after", "opens_after", "discharges", "every"];

/// Reads the `switched` of a resistor; `None` where it has none, or where it can't be read.
pub(super) fn read(reader: &mut Reader<'_>, part: &Group<'_>) -> Option<Switched> {
    let spot = reader.may(part, "switched")?;
    let owner = format!("`switched` of {}", part.owner);
    let group = reader.group(&spot, owner, &KEYS)?;
    let without = Switched::default();
    Some(Switched {
        closes_after: optional(reader, &group, "closes_after").unwrap_or(without.closes_after),
        opens_after: optional(reader, &group, "opens_after").unwrap_or(without.opens_after),
        discharges: reader.may(&group, "discharges").and_then(|spot| reader.count(&spot)).unwrap_or(without.discharges),
        // A time that is there and can't be read is reported; its absence must not be reported as well.
        every: optional(reader, &group, "every").or_else(|| group.has("every").then(unread_cycle)),
    })
}

/// Stands for a time that can't be read, so that no rule finds fault with it.
fn unread_cycle() -> crate::quantity::Time {
    crate::quantity::Quantity::from_si(f64::MAX)
}
