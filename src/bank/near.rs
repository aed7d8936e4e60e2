//! The known word that a misspelt one is near to. It is only ever suggested, never put in its place.

/// Words longer than this are not compared: nobody mistypes that much, and comparing costs their product.
const LONGEST: usize = 60;

/// So many known words are compared; a bank with more nodes than this was not typed by hand.
const COMPARED: usize = 500;

/// A list in a message is cut after so many names.
const LISTED: usize = 24;

/// The nearest candidate, or `None` where none is near enough to be meant. Upper and lower case, and `-`, `_` and
/// space, count as alike.
pub(crate) fn nearest<'a>(word: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let folded = fold(word)?;
    let length = folded.chars().count();
    // One slip in a short word, up to three in a long one; a single letter is near to nothing but itself.
    let allowed = match length {
        0 | 1 => 0,
        2..=5 => 1,
        6..=8 => 2,
        _ => 3,
    };
    let distance = |candidate: &str| {
        let candidate = fold(candidate)?;
        (candidate.chars().count().abs_diff(length) <= allowed).then(|| strsim::osa_distance(&folded, &candidate))
    };
    candidates
        .into_iter()
        .take(COMPARED)
        .filter_map(|candidate| Some((distance(candidate)?, candidate)))
        .filter(|(distance, candidate)| *distance <= allowed && *candidate != word)
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, candidate)| candidate)
}

fn fold(word: &str) -> Option<String> {
    let alike = |c: char| if matches!(c, '_' | ' ') { '-' } else { c };
    (word.len() <= LONGEST).then(|| word.chars().flat_map(char::to_lowercase).map(alike).collect())
}

/// Advice for a word that is not known: the near one where there is one, and the known ones.
pub(crate) fn advice<'a>(word: &str, kind: &str, known: impl IntoIterator<Item = &'a str> + Clone) -> String {
    let list = listed(known.clone());
    match (nearest(word, known), list.is_empty()) {
        (Some(near), _) => format!("perhaps `{near}` is meant; {kind}: {list}"),
        (None, false) => format!("{kind}: {list}"),
        (None, true) => format!("{kind}: none"),
    }
}

/// Names with commas, cut where there are too many.
pub(crate) fn listed<'a>(names: impl IntoIterator<Item = &'a str>) -> String {
    let mut names = names.into_iter();
    let mut text = names.by_ref().take(LISTED).collect::<Vec<_>>().join(", ");
    let more = names.count();
    if more > 0 {
        text.push_str(&format!(" and {more} more"));
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_slip_finds_the_word_that_was_meant() {
        let keys = ["id", "value", "kvar", "tolerance", "across", "dielectric", "touch_voltage"];
        assert_eq!(nearest("valeu", keys), Some("value"));
        assert_eq!(nearest("tolerence", keys), Some("tolerance"));
        assert_eq!(nearest("ID", keys), Some("id"));
        assert_eq!(nearest("touch-voltage", keys), Some("touch_voltage"));
        assert_eq!(nearest("acros", keys), Some("across"));
        assert_eq!(nearest("banana", keys), None);
        assert_eq!(nearest("Q", ["P", "N"]), None);
        assert_eq!(nearest("p", ["P", "N"]), Some("P"));
        assert_eq!(nearest(&"x".repeat(1_000_000), keys), None);
    }

    #[test]
    fn a_long_list_is_cut() {
        let names: Vec<String> = (0..40).map(|i| format!("n{i}")).collect();
        assert!(listed(names.iter().map(String::as_str)).ends_with("n23 and 16 more"));
    }
}
