//! Our marks in a drawing: what they say, and how they are taken out again to the byte.

use std::ops::Range;

use crate::refusal::Refusal;
use crate::tags::APPLICATION;
use crate::tags::codes::parse_handle;
use crate::tags::outline::{Outline, Table};
use crate::tags::record::{Record, Tags};
use crate::tags::scan::Machine;
use crate::tags::source::{Edit, Source};
use crate::tags::text::Decoder;

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
    seed: Option<Vec<u8>>,
    /// Bytes of the line end that had to be added behind the last line.
    newline: u64,
    /// The highest handle among our records.
    highest: u64,
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

/// What the scan saw of our marks; none when there are none.
pub(super) fn gather(machine: &Machine<'_>, decoder: &Decoder) -> Option<FoundMarks> {
    let mut ranges: Vec<Range<u64>> = machine.our_ranges.iter().map(|r| r.0..r.1).collect();
    let mut layers = Vec::new();
    let mut entries: Vec<(String, String)> = Vec::new();
    for table in &machine.tables {
        for record in table.records.iter().filter(|record| record.ours) {
            ranges.push(record.start..record.end);
            if table.name == "LAYER" {
                layers.push(record.layer.clone());
                if entries.is_empty() {
                    entries = facts_of(&record.tags, decoder);
                }
            }
        }
    }
    if ranges.is_empty() {
        return None;
    }
    let take = |key: &str| {
        let found = entries.iter().find(|(k, _)| k == key);
        found.map(|(_, value)| value.clone())
    };
    let made = take("made").unwrap_or_default();
    let made: Vec<&str> = made.split(' ').collect();
    // With no layer of ours left, another program has been at work; the application is of no use to anyone then.
    let application_made = entries.is_empty() || made.contains(&"R:APPID");
    let mut highest = machine.our_highest;
    for table in &machine.tables {
        for record in our_records(table, application_made) {
            ranges.push(record.start..record.end);
            highest = highest.max(record.handle_number().unwrap_or(0));
        }
    }
    let empty = |table: &Table| our_records(table, application_made).count() as u64 == table.count;
    let made_table = |table: &&Table| made.contains(&format!("T:{}", table.name).as_str()) && empty(table);
    for table in machine.tables.iter().filter(made_table) {
        ranges.push(table.start.at..table.stop);
        let handle = table.handle.as_deref().and_then(|h| parse_handle(h.as_bytes()));
        highest = highest.max(handle.unwrap_or(0));
    }
    for section in &machine.sections {
        let gone = match section.name.as_str() {
            "TABLES" => machine.tables[section.tables.clone()].iter().all(|t| made_table(&t)),
            "ENTITIES" => section.records == section.ours,
            _ => false,
        };
        if gone && made.contains(&format!("S:{}", section.name).as_str()) {
            ranges.push(section.start.at..section.stop);
        }
    }
    Some(FoundMarks {
        version: take("marks").and_then(|version| version.parse().ok()),
        layers,
        entities: machine.our_entities,
        ranges: joined(ranges),
        seed: take("seed").map(|seed| unescape_seed(&seed)),
        newline: take("newline").and_then(|n| n.parse().ok()).unwrap_or(0),
        highest,
        facts: entries.into_iter().filter(|(key, _)| !OWN_KEYS.contains(&key.as_str())).collect(),
    })
}

/// The records of a table that are ours; the application, when it was made for the marks, is known by its name.
fn our_records(table: &Table, application_made: bool) -> impl Iterator<Item = &Record> {
    table.records.iter().filter(move |record| {
        let application = record.kind == "APPID" && record.layer.eq_ignore_ascii_case(APPLICATION);
        record.ours || application && application_made
    })
}

/// Sorts ranges and joins those that overlap or touch.
fn joined(mut ranges: Vec<Range<u64>>) -> Vec<Range<u64>> {
    ranges.sort_by_key(|range| (range.start, range.end));
    let mut out: Vec<Range<u64>> = Vec::with_capacity(ranges.len());
    for range in ranges {
        match out.last_mut() {
            Some(last) if range.start <= last.end => last.end = last.end.max(range.end),
            _ => out.push(range),
        }
    }
    out
}

/// The `key value` strings of our extended data; one that begins with a plus sign continues the one before it.
fn facts_of(tags: &Tags, decoder: &Decoder) -> Vec<(String, String)> {
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

fn unescape_seed(text: &str) -> Vec<u8> {
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

/// The edits that take our marks out of a drawing. The outline must be that of the source.
///
/// # Errors
/// When there are no marks, or marks of a later version.
pub fn unmark(source: &Source, outline: &Outline) -> Result<Vec<Edit>, Refusal> {
    let Some(marks) = &outline.marks else {
        return Err(Refusal::new("no-marks", "the drawing carries no marks of ours", "Name a marked copy"));
    };
    if let Some(version) = marks.version.filter(|version| *version > MARKS_VERSION) {
        return Err(Refusal::new(
            "marks-version",
            format!("the marks are of version {version}, later than {MARKS_VERSION}, the latest known here"),
            "Use the version of the program that made them, or a later one",
        ));
    }
    let mut edits: Vec<Edit> = marks
        .ranges
        .iter()
        .map(|range| Edit { at: range.start, remove: range.end - range.start, insert: Vec::new() })
        .collect();
    if let Some(last) = edits.last_mut()
        && last.at + last.remove == outline.end.at
        && let Some(start) = last.at.checked_sub(marks.newline)
        && matches!(&source.range(start, last.at)?[..], b"\n" | b"\r\n")
    {
        last.at = start;
        last.remove += marks.newline;
    }
    // The old seed goes back only if nobody has numbered anything since.
    if let Some(old) = &marks.seed
        && let Some(value) = outline.header_value("$HANDSEED", 5)
        && let Some(present) = parse_handle(&value.value)
        && Some(present) == marks.highest.checked_add(1)
    {
        let digits = value.value.trim_ascii();
        let before = value.value.len() - value.value.trim_ascii_start().len();
        if digits != old {
            edits.push(Edit {
                at: value.range.start + before as u64,
                remove: digits.len() as u64,
                insert: old.clone(),
            });
            edits.sort_by_key(|edit| edit.at);
        }
    }
    Ok(edits)
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
    fn ranges_join() {
        assert_eq!(joined(vec![5..9, 0..2, 2..4, 6..7]), vec![0..4, 5..9]);
    }
}
