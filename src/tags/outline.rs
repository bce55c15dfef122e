//! What one pass over a drawing tells about it.

use std::collections::BTreeMap;
use std::ops::Range;

use crate::tags::facts::FoundMarks;
use crate::tags::record::Record;
use crate::tags::text::{Decoder, Doubt};
use crate::tags::tokens::Form;

/// How lines end.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Newline {
    /// LF.
    Lf,
    /// CR LF.
    CrLf,
    /// Some one way, some the other.
    Mixed,
    /// A binary drawing.
    None,
}

/// A place between two tags where something may be put in.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Anchor {
    /// Byte offset.
    pub at: u64,
    /// Whether the line before it ends in CR LF.
    pub crlf: bool,
}

/// One section of a drawing.
#[derive(Debug, Clone, PartialEq)]
pub struct Section {
    /// Its name in capitals; `?` when it has none.
    pub name: String,
    /// Before its SECTION tag.
    pub start: Anchor,
    /// Before its ENDSEC tag, or before whatever ends it.
    pub end: Anchor,
    /// Byte offset behind its ENDSEC tag.
    pub stop: u64,
    /// Whether it has an ENDSEC tag.
    pub closed: bool,
    /// Records in it; in TABLES the table records, in other sections everything that begins with a group 0.
    pub records: u64,
    /// Those of them that carry our mark.
    pub ours: u64,
    /// Tables in it.
    pub tables: Range<usize>,
}

/// One table of the TABLES section.
#[derive(Debug, Clone, PartialEq)]
pub struct Table {
    /// Its name in capitals.
    pub name: String,
    /// Before its TABLE tag.
    pub start: Anchor,
    /// Before its ENDTAB tag, or before whatever ends it.
    pub end: Anchor,
    /// Byte offset behind its ENDTAB tag.
    pub stop: u64,
    /// Whether it has an ENDTAB tag.
    pub closed: bool,
    /// Its handle as it is spelled.
    pub handle: Option<String>,
    /// Number of its records.
    pub count: u64,
    /// Its records, for the tables LAYER, LTYPE, STYLE, APPID and BLOCK_RECORD; empty for others. The name of each is
    /// its [`Record::layer`].
    pub records: Vec<Record>,
}

/// One value of a header variable.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct HeaderValue {
    /// Group code.
    pub code: i32,
    /// The value as it stands, blanks included.
    pub value: Vec<u8>,
    /// Where it stands in the file.
    pub range: Range<u64>,
}

/// One variable of the HEADER section.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct HeaderVariable {
    /// Its name with the dollar sign, in capitals.
    pub name: String,
    /// Its values.
    pub values: Vec<HeaderValue>,
    /// Line of its name.
    pub line: Option<u64>,
}

/// One layer.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Layer {
    /// Its name, decoded, as spelled.
    pub name: String,
    /// Frozen.
    pub frozen: bool,
    /// Switched off.
    pub off: bool,
    /// Locked.
    pub locked: bool,
    /// Colour number.
    pub colour: i64,
    /// Its line type.
    pub line_type: Option<String>,
    /// Its handle.
    pub handle: Option<String>,
    /// Line of its record.
    pub line: Option<u64>,
    /// Whether it is one of ours.
    pub ours: bool,
}

/// One block definition.
#[derive(Debug, Clone, PartialEq)]
pub struct Block {
    /// Its name, decoded.
    pub name: String,
    /// Its handle.
    pub handle: Option<String>,
    /// Handle of its BLOCK_RECORD.
    pub owner: Option<String>,
    /// Its flags (group 70): 1 anonymous, 2 with attribute definitions, 4 external reference, 8 overlaid one.
    pub flags: i64,
    /// Its base point.
    pub base: [f64; 3],
    /// Path of the external reference, decoded; none for an ordinary block.
    pub path: Option<String>,
    /// Its layer, decoded.
    pub layer: String,
    /// Line of its head.
    pub line: Option<u64>,
}

/// The entities of one layer, counted by type; VERTEX, ATTRIB and SEQEND count with their POLYLINE or INSERT.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct LayerCensus {
    /// The layer's name as it was first spelled.
    pub name: String,
    /// In model space.
    pub model: BTreeMap<String, u64>,
    /// In paper space (group 67).
    pub paper: BTreeMap<String, u64>,
    /// In block definitions.
    pub blocks: BTreeMap<String, u64>,
}

/// What is known of a drawing's handles.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct HandleState {
    /// Number of handles that records call their own.
    pub used: u64,
    /// The highest of them.
    pub highest: u64,
    /// The highest handle that any record refers to.
    pub highest_reference: u64,
    /// `$HANDSEED`, when it is there and hexadecimal.
    pub seed: Option<u64>,
}

/// Something about a drawing that is worth saying, and no error.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Note {
    /// A text whose bytes do not fit the drawing's encoding: how it was read, how many there are, and the line of the
    /// first.
    Text {
        /// Why it is doubtful.
        doubt: Doubt,
        /// Number of names concerned.
        count: u64,
        /// The first of them, as it was read.
        first: String,
        /// Line of the first.
        line: Option<u64>,
    },
    /// `$DWGCODEPAGE` names a code page that is not known here; ANSI_1252 stands in for it.
    UnknownCodePage(String),
    /// `$ACADVER` names a version later than any known here; it is treated as the latest.
    LaterVersion(String),
    /// `$ACADVER` is missing; the drawing is treated as R12.
    NoVersion,
    /// There is no EOF tag: the file may be cut off.
    NoEndOfFile,
    /// Bytes behind the EOF tag, which are kept as they are.
    BehindEndOfFile(u64),
    /// A section without ENDSEC.
    SectionNotClosed(String),
    /// A table without ENDTAB.
    TableNotClosed(String),
}

/// What one pass over a drawing tells about it.
#[derive(Debug, Clone)]
pub struct Outline {
    /// ASCII or binary.
    pub form: Form,
    /// `$ACADVER` as it is spelled.
    pub version: Option<String>,
    /// The number in it, such as 1024 for AC1024; 1009 when it is missing, 0 for versions before AC1002.
    pub rank: u32,
    /// How lines end.
    pub newline: Newline,
    /// The variables of the HEADER section, in file order.
    pub header: Vec<HeaderVariable>,
    /// Reads the drawing's text.
    pub decoder: Decoder,
    /// The sections, in file order.
    pub sections: Vec<Section>,
    /// The tables, in file order.
    pub tables: Vec<Table>,
    /// The layers, in file order.
    pub layers: Vec<Layer>,
    /// The block definitions, in file order.
    pub blocks: Vec<Block>,
    /// The records that the caller asked to keep, in file order.
    pub records: Vec<Record>,
    /// The entities counted by layer, in the order in which the layers first occur.
    pub census: Vec<LayerCensus>,
    /// Handles.
    pub handles: HandleState,
    /// Our marks, if there are any.
    pub marks: Option<FoundMarks>,
    /// Length of the file, bytes.
    pub len: u64,
    /// Lower-case hexadecimal SHA-256 of the file, if asked for.
    pub sha256: Option<String>,
    /// Worth saying.
    pub notes: Vec<Note>,
    /// Before the EOF tag, or behind the last tag.
    pub(crate) end: Anchor,
    /// The last tag lacks its line end, and nothing follows it.
    pub(crate) unterminated: bool,
    /// Owner (330) of the first entity that is not in paper space.
    pub(crate) model_owner: Option<String>,
    /// Handle of the plot style `Normal`, where the objects have it.
    pub(crate) plot_style: Option<String>,
}

impl Outline {
    /// The first value of a header variable with the group code, as text without blanks around it. None when it is
    /// missing or no UTF-8.
    pub fn header(&self, name: &str, code: i32) -> Option<&str> {
        let value = self.header_value(name, code)?;
        std::str::from_utf8(value.value.trim_ascii()).ok()
    }

    pub(crate) fn header_value(&self, name: &str, code: i32) -> Option<&HeaderValue> {
        let variable = self.header.iter().find(|v| v.name == name)?;
        variable.values.iter().find(|v| v.code == code)
    }

    /// Whether records of this drawing have handles: some do, or the header promises it.
    pub fn numbered(&self) -> bool {
        let promised = if self.rank < 1012 {
            self.header("$HANDLING", 70) == Some("1")
        } else {
            self.header_value("$HANDSEED", 5).is_some()
        };
        self.handles.used > 0 || promised
    }

    /// The first section of this name.
    pub fn section(&self, name: &str) -> Option<&Section> {
        self.sections.iter().find(|section| section.name == name)
    }

    /// The first table of this name.
    pub fn table(&self, name: &str) -> Option<&Table> {
        self.tables.iter().find(|table| table.name == name)
    }

    /// The layer of this name, without regard to case.
    pub fn layer(&self, name: &str) -> Option<&Layer> {
        let name = fold(name);
        self.layers.iter().find(|layer| fold(&layer.name) == name)
    }

    /// Name of the text encoding, such as `ANSI_1252` or `UTF-8`.
    pub fn encoding(&self) -> &str {
        self.decoder.name()
    }
}

/// A name as it is compared: without regard to case.
pub fn fold(name: &str) -> String {
    name.to_lowercase()
}
