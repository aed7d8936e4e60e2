//! How a fault is spoken of.

/// A fault's name in a sentence. `K1 dead` is what a result calls a sink that has failed; in a text for people that word
/// could be read of the bank, so that they read what it means: `K1 draws nothing`.
///
/// # Example: a sink and a bleeder
/// ```
/// use ebbvolt::plan::fault_in_words;
/// assert_eq!(fault_in_words("K1 dead"), "K1 draws nothing");
/// assert_eq!(fault_in_words("R1 open"), "R1 open");
/// ```
pub fn fault_in_words(fault: &str) -> String {
    fault.strip_suffix(" dead").map_or_else(|| fault.to_string(), |id| format!("{id} draws nothing"))
}
