//! What our marks say in the extended data of our layers: facts of the caller, and what taking them out needs.

use std::ops::Range;

use crate::tags::APPLICATION;
use crate::tags::record::Tags;
use crate::tags::text::{self, Decoder};

/// Version of the marks that is written, and the latest that can be taken out.
pub(crate) const MARKS_VERSION: u32 = 1;

/// What our marks in a drawing say.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct FoundMarks {
    /// Version of the marks; none when no layer of ours is left.
    pub version: Option<u32>,
    /// Our layers, in file order.
    pub layers: Vec<String>,
    /// Number of our entities.
    pub entities: u64,
    /// The facts that the marks were written with.
    pub facts: Vec<(String, String)>,
    /// Bytes that are ours.
    pub ranges: Vec<Range<u64>>,
    /// The text of `$HANDSEED` before the marks were added.
    pub(super) seed: Option<Vec<u8>>,
    /// Bytes of the line end that had to be added behind the last line.
    pub(super) newline: u64,
    /// The highest handle among our records.
    pub(super) highest: u64,
}

impl FoundMarks {
    /// The value of one fact.
    pub fn fact(&self, key: &str) -> Option<&str> {
        let (_, value) = self.facts.iter().find(|(k, _)| k == key)?;
        Some(value)
    }
}

/// Keys that the tag layer keeps for itself.
pub(crate) const OWN_KEYS: [&str; 4] = ["marks", "seed", "newline", "made"];

/// Longest string of extended data, bytes: the limit of R12, kept for all versions.
pub(super) const LONGEST_STRING: usize = 255;
/// The strings of extended data that hold one fact, each no longer than the format allows. Always ASCII, so that they
/// survive whatever the drawing is saved as.
pub(super) fn strings(key: &str, value: &str) -> Vec<Vec<u8>> {
    let mut out = vec![format!("{key} ").into_bytes()];
    for piece in text::encode(value, false) {
        if let Some(last) = out.last()
            && last.len() + piece.len() > LONGEST_STRING
        {
            out.push(b"+".to_vec());
        }
        if let Some(last) = out.last_mut() {
            last.extend_from_slice(&piece);
        }
    }
    out
}

/// The `key value` strings of our extended data; one that begins with a plus sign continues the one before it.
pub(super) fn facts_of(tags: &Tags, decoder: &Decoder) -> Vec<(String, String)> {
    let mut texts: Vec<Vec<u8>> = Vec::new();
    for tag in tags.extended(APPLICATION).filter(|tag| tag.code == 1000) {
        match (tag.value.strip_prefix(b"+"), texts.last_mut()) {
            (Some(more), Some(last)) => last.extend_from_slice(more),
            _ => texts.push(tag.value.to_vec()),
        }
    }
    let text = |bytes: &Vec<u8>| decoder.text(bytes);
    texts
        .iter()
        .map(text)
        .map(|text| match text.split_once(' ') {
            Some((key, value)) => (key.to_owned(), value.to_owned()),
            None => (text, String::new()),
        })
        .collect()
}

/// Writes the old seed so that any bytes come back: what is no visible ASCII is written as a percent sign and two digits.
pub(super) fn escape_seed(seed: &[u8]) -> String {
    let mut out = String::new();
    for byte in seed {
        match byte {
            b'!'..=b'~' if !b"%^\\".contains(byte) => out.push(char::from(*byte)),
            _ => out.push_str(&format!("%{byte:02X}")),
        }
    }
    out
}

pub(super) fn unescape_seed(text: &str) -> Vec<u8> {
    let bytes = text.as_bytes();
    let mut out = Vec::with_capacity(bytes.len());
    let mut i = 0;
    while i < bytes.len() {
        let escaped = (bytes[i] == b'%')
            .then(|| text.get(i + 1..i + 3))
            .flatten()
            .and_then(|digits| u8::from_str_radix(digits, 16).ok());
        out.push(escaped.unwrap_or(bytes[i]));
        i += if escaped.is_some() { 3 } else { 1 };
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn any_seed_comes_back() {
        for seed in [&b"2AF"[..], b"", b"%41", b" x\r", b"\xff^J\\U+0041"] {
            let text = escape_seed(seed);
            assert!(text.bytes().all(|b| b.is_ascii_graphic()));
            assert_eq!(unescape_seed(&text), seed);
        }
        assert_eq!(unescape_seed("%4"), b"%4");
    }

    #[test]
    fn long_facts_are_split_between_characters() {
        let value = "ü".repeat(100);
        let parts = strings("job", &value);
        assert!(parts.len() > 1 && parts.iter().all(|part| part.len() <= LONGEST_STRING));
        let mut tags = Tags::default();
        tags.push(1001, APPLICATION.as_bytes(), None);
        for part in &parts {
            tags.push(1000, part, None);
        }
        let found = facts_of(&tags, &Decoder::new(1009, None, false));
        assert_eq!(found, [("job".to_owned(), value)]);
    }
}
