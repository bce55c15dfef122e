//! Every record of a drawing, or of a piece of one, with only what the validator looks at.

use crate::refusal::Refusal;
use crate::tags::codes::parse_handle;
use crate::tags::text::Decoder;
use crate::tags::tokens::{Form, Place, Sink};

/// The section that a record stands in.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Where {
    Tables,
    Blocks,
    Entities,
    Objects,
    Other,
}

/// One record.
#[derive(Debug, Clone)]
pub(super) struct Item {
    pub kind: String,
    pub place: Where,
    pub line: Option<u64>,
    pub handle: Option<u64>,
    pub owner: Option<u64>,
    /// Group 2 of a table record.
    pub name: Option<String>,
    pub layer: Option<String>,
    pub line_type: Option<String>,
    /// Groups 390, 347 and 348 of a layer, when not zero.
    pub styles: Vec<u64>,
    /// Applications with extended data on it.
    pub applications: Vec<String>,
    first_marker: Option<String>,
    markers: u32,
    /// Group 66.
    followed: bool,
    /// Number of groups 10.
    pub points: u64,
    /// Group 90.
    pub said_points: Option<u64>,
}

impl Item {
    /// The subclass marker that it should have and does not.
    pub fn missing_marker(&self, rank: u32) -> Option<&'static str> {
        if rank < 1012 {
            return None;
        }
        let first = self.first_marker.as_deref();
        let wanted = match (self.place, self.kind.as_str()) {
            (_, "TABLE") => ("AcDbSymbolTable", 1),
            (Where::Tables, _) => ("AcDbSymbolTableRecord", 2),
            (_, "SEQEND") => ("AcDbEntity", 1),
            (_, "TEXT") => ("AcDbEntity", 3),
            (Where::Entities | Where::Blocks, _) => ("AcDbEntity", 2),
            _ => return None,
        };
        (first != Some(wanted.0) || self.markers < wanted.1).then_some(wanted.0)
    }

    /// Whether a run of records that SEQEND ends must follow.
    pub fn opens_run(&self) -> bool {
        matches!(self.place, Where::Entities | Where::Blocks)
            && (self.kind == "POLYLINE" || self.kind == "INSERT" && self.followed)
    }
}

/// Gathers the records.
pub(super) struct Items<'a> {
    decoder: &'a Decoder,
    items: Vec<Item>,
    open: bool,
    naming: bool,
    place: Where,
    depth: u32,
    embedded: bool,
}

impl<'a> Items<'a> {
    /// `place` is where the tags stand when they are a piece of a drawing; none for a whole one.
    pub fn new(decoder: &'a Decoder, place: Option<Where>) -> Self {
        Self {
            decoder,
            items: Vec::new(),
            open: false,
            naming: false,
            place: place.unwrap_or(Where::Other),
            depth: 0,
            embedded: false,
        }
    }

    pub fn finish(self) -> Vec<Item> {
        self.items
    }

    fn open(&mut self, value: &[u8], place: &Place) {
        let kind = String::from_utf8_lossy(value.trim_ascii()).to_ascii_uppercase();
        self.open = false;
        match kind.as_str() {
            "SECTION" => self.naming = true,
            "ENDSEC" => self.place = Where::Other,
            "ENDTAB" | "EOF" => {}
            _ if self.place == Where::Other => {}
            _ => {
                self.open = true;
                self.depth = 0;
                self.embedded = false;
                self.items.push(Item {
                    kind,
                    place: self.place,
                    line: place.line,
                    handle: None,
                    owner: None,
                    name: None,
                    layer: None,
                    line_type: None,
                    styles: Vec::new(),
                    applications: Vec::new(),
                    first_marker: None,
                    markers: 0,
                    followed: false,
                    points: 0,
                    said_points: None,
                });
            }
        }
    }
}

impl Sink for Items<'_> {
    fn begin(&mut self, _: Form, _: bool) {}

    fn wants(&self, _: i32) -> bool {
        true
    }

    fn tag(&mut self, code: i32, value: &[u8], place: &Place) -> Result<(), Refusal> {
        if code == 0 {
            self.open(value, place);
            return Ok(());
        }
        if self.naming && code == 2 {
            self.naming = false;
            self.place = match &value.trim_ascii().to_ascii_uppercase()[..] {
                b"TABLES" => Where::Tables,
                b"BLOCKS" => Where::Blocks,
                b"ENTITIES" => Where::Entities,
                b"OBJECTS" => Where::Objects,
                _ => Where::Other,
            };
            return Ok(());
        }
        let Some(item) = self.items.last_mut().filter(|_| self.open) else {
            return Ok(());
        };
        let text = || self.decoder.text(value.trim_ascii());
        if code == 1001 {
            item.applications.push(text());
        }
        self.embedded |= code == 101 || code >= 1000;
        if code == 102 {
            if value.trim_ascii_start().starts_with(b"{") {
                self.depth += 1;
            } else {
                self.depth = self.depth.saturating_sub(1);
            }
        }
        if self.depth > 0 || self.embedded {
            return Ok(());
        }
        let own = if item.kind == "DIMSTYLE" { 105 } else { 5 };
        match code {
            _ if code == own && item.handle.is_none() => item.handle = parse_handle(value),
            330 if item.owner.is_none() && item.markers == 0 => item.owner = parse_handle(value),
            2 if item.place == Where::Tables && item.name.is_none() => item.name = Some(text()),
            6 if item.line_type.is_none() && (item.place != Where::Tables || item.kind == "LAYER") => {
                item.line_type = Some(text());
            }
            8 if item.layer.is_none() => item.layer = Some(text()),
            390 | 347 | 348 if item.kind == "LAYER" => {
                item.styles.extend(parse_handle(value).filter(|handle| *handle != 0));
            }
            100 => {
                if item.first_marker.is_none() {
                    item.first_marker = Some(text());
                }
                item.markers += 1;
            }
            66 => item.followed = value.trim_ascii() == b"1",
            10 => item.points += 1,
            90 if item.said_points.is_none() => {
                item.said_points = std::str::from_utf8(value.trim_ascii()).ok().and_then(|s| s.parse().ok());
            }
            _ => {}
        }
        Ok(())
    }
}
