//! What the files of the data folder have in common: quantities as strings with units.

use crate::quantity::{Quantity, parse};
use serde::de::DeserializeOwned;

/// Reads a JSON array whose entries are then made into `T`.
///
/// # Errors
/// A sentence that names the file and, where it is known, the entry and what is wrong with it.
pub(super) fn read_list<R: DeserializeOwned, T>(
    file: &str,
    text: &str,
    make: impl Fn(R) -> Result<T, String>,
) -> Result<Vec<T>, String> {
    let raw: Vec<R> = serde_json::from_str(text).map_err(|e| format!("{file}: {e}"))?;
    raw.into_iter().map(|entry| make(entry).map_err(|e| format!("{file}: {e}"))).collect()
}

/// Reads one quantity of an entry.
///
/// # Errors
/// Where the text is not such a quantity; the sentence begins with `entry`.
pub(super) fn quantity<Q: Quantity>(entry: &str, text: &str) -> Result<Q, String> {
    parse(text).map(|reading| reading.value).map_err(|e| format!("{entry}: {e}"))
}

/// As [`quantity`], where the entry may have none.
///
/// # Errors
/// As [`quantity`].
pub(super) fn optional<Q: Quantity>(entry: &str, text: Option<&str>) -> Result<Option<Q>, String> {
    text.map(|text| quantity(entry, text)).transpose()
}
