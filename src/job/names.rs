//! Which names are one, and which is nearest to a misspelt one.

/// The most similar of the candidates; of equals the first.
pub(super) fn nearest<'c>(word: &str, candidates: impl IntoIterator<Item = &'c str>) -> Option<&'c str> {
    let word = word.to_lowercase();
    let mut best: Option<(f64, &str)> = None;
    for candidate in candidates {
        let score = strsim::jaro_winkler(&word, candidate);
        if best.is_none_or(|(high, _)| score > high) {
            best = Some((score, candidate));
        }
    }
    best.map(|(_, candidate)| candidate)
}

/// Whether two names are one when capitals and small letters do not matter.
pub fn same_name(one: &str, other: &str) -> bool {
    one.to_lowercase() == other.to_lowercase()
}
