//! How a fault is spoken of.

use crate::discharge::CONTACT_FAULT;

/// A fault's name in a sentence. `K1 dead` is what a result calls a sink that has failed; in a text for people that word
/// could be read of the bank, so that they read what it means: `K1 draws nothing`. `RS contact does not close` becomes
/// words that stand after "with" as well.
///
/// # Example: a sink, a bleeder and the contact of one
/// ```
/// use ebbvolt::plan::fault_in_words;
/// assert_eq!(fault_in_words("K1 dead"), "K1 draws nothing");
/// assert_eq!(fault_in_words("R1 open"), "R1 open");
/// assert_eq!(fault_in_words("RS contact does not close"), "RS contact stuck open");
/// ```
pub fn fault_in_words(fault: &str) -> String {
    let contact = || fault.strip_suffix(CONTACT_FAULT).map(|id| format!("{id}contact stuck open"));
    let sink = fault.strip_suffix(" dead").map(|id| format!("{id} draws nothing"));
    sink.or_else(contact).unwrap_or_else(|| fault.to_string())
}
