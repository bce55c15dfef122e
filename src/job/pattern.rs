//! Names with `*` and `?`, matched without regard to case.

use serde::{Serialize, Serializer};
use wildmatch::WildMatch;

/// A layer name or a pattern of layer names.
#[derive(Debug, Clone)]
pub struct Pattern {
    text: String,
    matcher: WildMatch,
}

impl Pattern {
    /// A pattern: `*` stands for any characters, `?` for one.
    pub fn new(text: impl Into<String>) -> Self {
        let text = text.into();
        Self { matcher: WildMatch::new_case_insensitive(&text), text }
    }

    /// As it was written.
    pub fn as_str(&self) -> &str {
        &self.text
    }

    /// Whether it names exactly one layer.
    pub fn is_exact(&self) -> bool {
        !self.text.contains(['*', '?'])
    }

    /// Whether it matches the whole of `name`, without regard to case.
    pub fn matches(&self, name: &str) -> bool {
        self.matcher.matches(name)
    }
}

impl PartialEq for Pattern {
    fn eq(&self, other: &Self) -> bool {
        self.text == other.text
    }
}

impl Eq for Pattern {}

impl Serialize for Pattern {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_str(&self.text)
    }
}

/// Two entries that match one name with equal right.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Ambiguous {
    /// Places of the two entries in the list that was searched.
    pub entries: [usize; 2],
}

/// Place of the entry that `name` belongs to: an exact name beats a pattern.
///
/// # Errors
/// [`Ambiguous`] when no exact name but two patterns match, or two equal exact names.
pub fn best_match<'p>(
    name: &str,
    patterns: impl IntoIterator<Item = &'p Pattern>,
) -> Result<Option<usize>, Ambiguous> {
    let mut exact = Vec::new();
    let mut loose = Vec::new();
    for (place, pattern) in patterns.into_iter().enumerate() {
        if pattern.matches(name) {
            if pattern.is_exact() {
                exact.push(place);
            } else {
                loose.push(place);
            }
        }
    }
    let found = if exact.is_empty() { loose } else { exact };
    match found[..] {
        [] => Ok(None),
        [one] => Ok(Some(one)),
        [first, second, ..] => Err(Ambiguous { entries: [first, second] }),
    }
}
