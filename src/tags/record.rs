//! One record of a drawing: an entity, a table record or a block head, with all its tags.

use crate::refusal::Refusal;
use crate::tags::codes;
use crate::tags::placement::Placement;

/// One group code with its value.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Tag<'a> {
    /// The group code.
    pub code: i32,
    /// The value's bytes as they stand in an ASCII drawing, blanks included; for a binary drawing what an ASCII one
    /// would hold, numbers in their shortest form that reads back to the same value.
    pub value: &'a [u8],
    /// Line of the group code, counted from 1; none in a binary drawing.
    pub line: Option<u64>,
}

impl Tag<'_> {
    /// The value without blanks around it.
    pub fn trimmed(&self) -> &[u8] {
        self.value.trim_ascii()
    }

    /// The value as a number.
    pub fn real(&self) -> Option<f64> {
        let value = std::str::from_utf8(self.trimmed()).ok()?.parse::<f64>().ok()?;
        value.is_finite().then_some(value)
    }

    /// The value as a whole number.
    pub fn int(&self) -> Option<i64> {
        std::str::from_utf8(self.trimmed()).ok()?.parse().ok()
    }
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
struct Span {
    code: i32,
    /// Where the value ends in the record's bytes; it begins where the one before it ends.
    end: u32,
    /// Lines below the first line of the record; comments make it more than twice the index.
    below: u32,
}

/// The tags of one record, in one piece of memory.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Tags {
    bytes: Vec<u8>,
    spans: Vec<Span>,
    line: Option<u64>,
}

impl Tags {
    /// Forgets all tags, for the next record, which begins at the line.
    pub(crate) fn restart(&mut self, line: Option<u64>) {
        self.bytes.clear();
        self.spans.clear();
        self.line = line;
    }

    /// Appends a tag; false when the record has grown beyond what can be numbered (4 GB).
    pub(crate) fn push(&mut self, code: i32, value: &[u8], line: Option<u64>) -> bool {
        self.bytes.extend_from_slice(value);
        let below = match (line, self.line) {
            (Some(line), Some(first)) => u32::try_from(line - first),
            _ => Ok(0),
        };
        let (Ok(end), Ok(below)) = (u32::try_from(self.bytes.len()), below) else {
            return false;
        };
        self.spans.push(Span { code, end, below });
        true
    }

    /// All tags in order, without the one that opens the record, and without comments.
    pub fn iter(&self) -> impl DoubleEndedIterator<Item = Tag<'_>> + Clone {
        (0..self.spans.len()).map(move |i| {
            let from = if i == 0 { 0 } else { self.spans[i - 1].end };
            let span = self.spans[i];
            Tag {
                code: span.code,
                value: &self.bytes[from as usize..span.end as usize],
                line: self.line.map(|line| line + u64::from(span.below)),
            }
        })
    }

    /// The record's own tags: those outside of groups in braces (102), before any extended data (1000 and above) and
    /// before an embedded object (101).
    pub fn own(&self) -> impl Iterator<Item = Tag<'_>> + Clone {
        let mut depth = 0u32;
        self.iter().take_while(|tag| tag.code < 1000 && tag.code != 101).filter(move |tag| {
            if tag.code == 102 {
                if tag.value.trim_ascii_start().starts_with(b"{") {
                    depth += 1;
                } else {
                    depth = depth.saturating_sub(1);
                }
                return false;
            }
            depth == 0
        })
    }

    /// The first of the record's own tags with this code.
    pub fn first(&self, code: i32) -> Option<Tag<'_>> {
        self.own().find(|tag| tag.code == code)
    }

    /// The first own value of this code, as text without blanks around it; none when it is no UTF-8.
    pub fn word(&self, code: i32) -> Option<&str> {
        let from = self.first(code)?.value;
        std::str::from_utf8(from.trim_ascii()).ok()
    }

    /// The tags of the extended data of one application.
    pub fn extended<'a>(&'a self, application: &'a str) -> impl Iterator<Item = Tag<'a>> + Clone {
        let mut inside = false;
        self.iter().filter(move |tag| {
            if tag.code == 1001 {
                inside = tag.trimmed().eq_ignore_ascii_case(application.as_bytes());
                return false;
            }
            inside && tag.code >= 1000
        })
    }
}

/// One record with all its tags.
#[derive(Debug, Clone, PartialEq)]
pub struct Record {
    /// Its type, in capitals, such as `LWPOLYLINE`.
    pub kind: String,
    /// Its layer, decoded, as spelled; `0` when it names none. The name of the record itself for table records.
    pub layer: String,
    /// Its own handle as it is spelled.
    pub handle: Option<String>,
    /// Line of its first tag, counted from 1; none in a binary drawing.
    pub line: Option<u64>,
    /// Byte offset of its first tag.
    pub start: u64,
    /// Byte offset behind its last tag, where the next record begins.
    pub end: u64,
    /// The block it stands in, as an index into [`crate::tags::Outline::blocks`]; none in the ENTITIES section.
    pub block: Option<usize>,
    /// Whether it carries our extended data.
    pub ours: bool,
    /// All tags but the one that opens it.
    pub tags: Tags,
    /// The VERTEX … SEQEND run of a POLYLINE, the ATTRIB … SEQEND run of an INSERT.
    pub children: Vec<Record>,
    /// How it lies in what it is read for; none as scanned, where its coordinates are those of its block or the drawing.
    pub placement: Option<Box<Placement>>,
}

impl Record {
    /// A refusal with the place of this record.
    pub fn refuse(&self, refusal: Refusal) -> Refusal {
        let mut refusal = refusal.at_handle(self.handle.clone()).on_layer(self.layer.clone());
        if refusal.line.is_none() {
            refusal.line = self.line;
        }
        if self.line.is_none() && refusal.line.is_none() {
            refusal.message = format!("{} (byte {})", refusal.message, self.start);
        }
        if let Some(path) = self.placement.as_ref().map(|p| &p.path).filter(|path| !path.is_empty()) {
            refusal.message = format!("{} (in block {})", refusal.message, path.join(" in "));
        }
        refusal
    }

    /// The number its handle spells.
    pub fn handle_number(&self) -> Option<u64> {
        codes::parse_handle(self.handle.as_deref()?.as_bytes())
    }

    /// Whether it stands in paper space (group 67).
    pub fn in_paper_space(&self) -> bool {
        self.tags.first(67).and_then(|tag| tag.int()) == Some(1)
    }
}
