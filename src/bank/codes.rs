//! The stable codes of everything that can be wrong with a bank file, and of what is noted while it is read.

/// Code and meaning, in alphabetical order. A code never changes its meaning; new ones may be added.
pub const CODES: &[(&str, &str)] = &[
    ("absorption-out-of-range", "dielectric absorption of 100 % or more"),
    ("alias-refused", "a YAML alias that repeats nothing above it, itself, or too much"),
    ("already-connected", "a step connects a part that is connected"),
    ("always-connected", "a step connects or disconnects a part that is always connected"),
    ("bad-figure", "a figure that is negative or not finite"),
    ("bad-name", "an empty name, or one with a line break, a control character, or too many letters"),
    ("bad-number", "a value that is not the plain number that is due"),
    ("bad-overload", "an overload of less than the continuous power"),
    ("bad-quantity", "a value that is not the quantity that is due"),
    ("bad-word", "a value that is none of the words that are due"),
    ("capacitor-loop", "voltages of capacitors that contradict each other around a loop"),
    ("connected-and-disconnected", "a step that connects and disconnects one part"),
    ("count-out-of-range", "units in series or in parallel: none, or far too many"),
    ("csv-syntax", "a line that can't be read as CSV"),
    ("dangling-node", "a node that one part alone touches"),
    ("derating-order", "a resistor that bears nothing at a temperature at which it bears all"),
    ("duplicate-id", "two parts of one id"),
    ("duplicate-key", "a key that a mapping has twice"),
    ("duplicate-limit", "two limits of one id, or one published limit twice for one pair"),
    ("duplicate-terminal", "two terminals at one node"),
    ("duplicate-test-point", "a test point that is listed twice"),
    ("empty-file", "a file that describes nothing"),
    ("file-too-large", "a file larger than any bank file"),
    ("format-version", "a file of a format that this version does not read"),
    ("highest-below-nominal", "a highest voltage below the nominal one"),
    ("key-not-text", "a key that is a list, a mapping or an alias"),
    ("keys-exclude-each-other", "two keys of which one may be there"),
    ("limit-id-of-published", "an own limit with the id of a published one"),
    ("limit-without-bound", "a limit that asks for nothing"),
    ("merge-key-refused", "a YAML merge key"),
    ("millifarad-read", "`mF` was read as millifarad, and an old plate may have meant microfarad"),
    ("missing-key", "a key that has to be there and is not"),
    ("more-errors", "how many errors there are beyond those that are listed"),
    ("nested-too-deep", "values nested deeper than any bank file needs"),
    ("no-capacitors", "a bank without a capacitor"),
    ("no-test-points", "an empty list of test points"),
    ("no-value", "a key without a value"),
    ("not-a-mapping", "a file that does not begin with keys"),
    ("not-above-zero", "a zero where a value above zero is due"),
    ("not-connected", "a step disconnects a part that is not connected"),
    ("not-text", "bytes that are not UTF-8 text"),
    ("open-delta-capacitor", "a capacitor in open delta"),
    ("own-voltage-of-three-phases", "a voltage of its own for a three-phase capacitor"),
    ("pair-of-one-node", "a pair whose two points are one node"),
    ("part-across-one-node", "a part with both ends at one node"),
    ("phases-without-supply", "a three-phase part in a bank that was not charged from three phases"),
    ("several-documents", "a second YAML document"),
    ("tab-indentation", "a line that is indented with a tab"),
    ("tag-refused", "a YAML tag"),
    ("terminal-count", "too few or too many terminals"),
    ("terminal-is-ground", "a terminal of three phases at the node of the grounded neutral"),
    ("too-many-values", "a file with more values than any bank file"),
    ("unconnected-pair", "a pair of nodes that nothing connects"),
    ("unknown-dielectric", "a dielectric that the data folder does not have"),
    ("unknown-key", "a key that has no meaning where it stands"),
    ("unknown-limit", "a published limit that the data folder does not have"),
    ("unknown-node", "a node that no capacitor and no always-connected part touches"),
    ("unknown-part", "an id that no part has"),
    ("unprintable-character", "a character that can't be seen, or that reverses the direction of text"),
    ("untouched-terminal", "a terminal that no capacitor and no always-connected part touches"),
    ("wrong-shape", "a list, a group of keys or a single value where another of these is due"),
    ("yaml-syntax", "text that can't be read as YAML"),
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn codes_are_in_order_and_each_stands_once() {
        assert!(CODES.windows(2).all(|pair| pair[0].0 < pair[1].0));
        assert!(
            CODES
                .iter()
                .all(|(code, meaning)| code.chars().all(|c| c.is_ascii_lowercase() || c == '-') && !meaning.is_empty())
        );
    }
}
