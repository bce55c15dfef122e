//! Our marks in a drawing: what they say, and how they are taken out again to the byte.

use std::ops::Range;

use crate::refusal::Refusal;
use crate::tags::APPLICATION;
use crate::tags::codes::parse_handle;
use crate::tags::facts::{FoundMarks, MARKS_VERSION, OWN_KEYS, facts_of, unescape_seed};
use crate::tags::machine::Machine;
use crate::tags::outline::{Outline, Table};
use crate::tags::record::Record;
use crate::tags::source::{Edit, Source};
use crate::tags::text::Decoder;

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
    fn ranges_join() {
        assert_eq!(joined(vec![5..9, 0..2, 2..4, 6..7]), vec![0..4, 5..9]);
    }
}
