//! Example banks and the draft to start from: bank files as text. All of them stand in one invented place.

/// The text of the bank that `plan --example` shows.
pub fn example_bank() -> &'static str {
    include_str!("../../data/banks/pump-drive.yaml")
}

/// Name and text of every example bank, in alphabetical order; the name is that of the file without its ending.
pub fn demo_banks() -> &'static [(&'static str, &'static str)] {
    &[
        ("fast-charger", include_str!("../../data/banks/fast-charger.yaml")),
        ("filter", include_str!("../../data/banks/filter.yaml")),
        ("marx", include_str!("../../data/banks/marx.yaml")),
        ("power-factor", include_str!("../../data/banks/power-factor.yaml")),
        ("pulse-capacitor", include_str!("../../data/banks/pulse-capacitor.yaml")),
        ("pump-drive", include_str!("../../data/banks/pump-drive.yaml")),
        ("supercap", include_str!("../../data/banks/supercap.yaml")),
    ]
}

/// A commented bank file to start from.
pub fn draft() -> &'static str {
    include_str!("../../data/draft.yaml")
}

/// Generic styles of resistor elements as a stock file: invented, for a search without parts at hand.
pub fn generic_stock() -> &'static str {
    include_str!("../../data/generic-elements.yaml")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_bank_of_the_folder_is_compiled_in() {
        let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/data/banks");
        let mut found: Vec<String> = std::fs::read_dir(folder)
            .unwrap_or_else(|e| panic!("{folder}: {e}"))
            .filter_map(|entry| entry.ok()?.file_name().to_str()?.strip_suffix(".yaml").map(String::from))
            .collect();
        found.sort();
        assert_eq!(found, demo_banks().iter().map(|(name, _)| name.to_string()).collect::<Vec<_>>());
        assert!(demo_banks().iter().any(|(_, text)| *text == example_bank()));
    }
}
