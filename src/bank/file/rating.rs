//! `rating`: what one element of a resistor bears.

use super::reader::{Group, Reader};
use super::top::optional;
use crate::bank::description::{Overload, Rating};

const KEYS: [&str; 7] = ["power", "full_to", "zero_at", "voltage", "pulse", "overload", "thermal_time"];

/// Reads the `rating` of a part; what is absent stays not given.
pub(super) fn read(reader: &mut Reader<'_>, part: &Group<'_>) -> Rating {
    let spot = reader.may(part, "rating");
    let owner = format!("`rating` of {}", part.owner);
    let Some(rating) = spot.and_then(|spot| reader.group(&spot, owner, &KEYS)) else { return Rating::default() };
    Rating {
        power: optional(reader, &rating, "power"),
        full_to: optional(reader, &rating, "full_to"),
        zero_at: optional(reader, &rating, "zero_at"),
        voltage: optional(reader, &rating, "voltage"),
        pulse: optional(reader, &rating, "pulse"),
        overload: overload(reader, &rating),
        thermal_time: optional(reader, &rating, "thermal_time"),
    }
}

fn overload(reader: &mut Reader<'_>, rating: &Group<'_>) -> Option<Overload> {
    let spot = reader.may(rating, "overload")?;
    let owner = format!("`overload` in {}", rating.owner);
    let overload = reader.group(&spot, owner, &["times", "for"])?;
    let times = reader.need(&overload, "times", "5").and_then(|spot| reader.number(&spot));
    let duration = reader.need(&overload, "for", "5 s").and_then(|spot| reader.quantity(&spot));
    Some(Overload { times: times?, duration: duration? })
}
