//! The state of a scan: where it is, and what it has noted so far.

use crate::tags::census::Census;
use crate::tags::outline::{Block, HandleState, HeaderVariable, Note, Section, Table};
use crate::tags::record::{Record, Tags};
use crate::tags::text::Decoder;

/// A record that may be kept.
#[derive(Debug, Clone, Copy)]
pub struct Candidate<'a> {
    /// The block it stands in, decoded; none in the ENTITIES section.
    pub block: Option<&'a str>,
    /// Its type in capitals.
    pub kind: &'a str,
    /// Its layer, decoded, as spelled.
    pub layer: &'a str,
}

/// Says whether a record is kept. Asked once for each block, type and layer, not for each record.
pub type Keep<'a> = dyn Fn(&Candidate<'_>) -> bool + 'a;

/// What a scan does beside noting the structure.
#[derive(Clone, Copy)]
pub struct Options<'a> {
    /// Which records are kept; none when absent.
    pub keep: Option<&'a Keep<'a>>,
    /// Whether the SHA-256 of the file is computed.
    pub hash: bool,
}

impl Default for Options<'_> {
    fn default() -> Self {
        Self { keep: None, hash: true }
    }
}

/// The section that is being read.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub(super) enum Part {
    /// None, or one that refers to nothing by handle (the classes, the preview).
    #[default]
    Ignored,
    /// One in which only references count.
    Other,
    /// Its name has not come yet.
    Unnamed,
    Header,
    Tables,
    Blocks,
    Entities,
    Objects,
}

#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub(super) enum Collect {
    #[default]
    No,
    /// Not decided before the layer is known.
    Pending,
    Yes,
}

/// What the word behind a group 0 means to a scan.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub(super) enum Word {
    #[default]
    Other,
    Section,
    EndSection,
    EndOfFile,
    Table,
    EndTable,
    Block,
    EndBlock,
    /// VERTEX or ATTRIB.
    Child,
    /// SEQEND.
    EndRun,
    /// POLYLINE or INSERT, which children may follow.
    Parent,
    DimStyle,
    Dictionary,
}

impl Word {
    /// In capitals or not.
    #[inline]
    pub fn of(kind: &[u8]) -> Self {
        // By length first: every entity of a drawing comes by here.
        let words: &[(&[u8], Self)] = match kind.len() {
            3 => &[(b"EOF", Self::EndOfFile)],
            5 => &[(b"TABLE", Self::Table), (b"BLOCK", Self::Block)],
            6 => &[
                (b"INSERT", Self::Parent),
                (b"VERTEX", Self::Child),
                (b"ATTRIB", Self::Child),
                (b"SEQEND", Self::EndRun),
                (b"ENDSEC", Self::EndSection),
                (b"ENDTAB", Self::EndTable),
                (b"ENDBLK", Self::EndBlock),
            ],
            7 => &[(b"SECTION", Self::Section)],
            8 => &[(b"POLYLINE", Self::Parent), (b"DIMSTYLE", Self::DimStyle)],
            10 => &[(b"DICTIONARY", Self::Dictionary)],
            19 => &[(b"ACDBDICTIONARYWDFLT", Self::Dictionary)],
            _ => &[],
        };
        words.iter().find(|(word, _)| kind.eq_ignore_ascii_case(word)).map_or(Self::Other, |found| found.1)
    }
}

/// The record that is being read.
#[derive(Debug, Default)]
pub(super) struct Current {
    pub open: bool,
    pub kind: Vec<u8>,
    pub word: Word,
    pub start: u64,
    pub line: Option<u64>,
    pub collect: Collect,
    /// Its first handle.
    pub handle: Option<u64>,
    /// Type and layer, once the layer is known.
    pub entry: Option<usize>,
    pub paper: bool,
    pub ours: bool,
    /// It belongs to the POLYLINE or INSERT before it.
    pub child: bool,
    pub dimstyle: bool,
    pub dictionary: bool,
    pub depth: u32,
    pub owner: bool,
}

/// Everything that a scan has noted so far.
#[derive(Default)]
pub(super) struct Machine<'a> {
    pub keep: Option<&'a Keep<'a>>,
    pub utf8_mark: bool,
    pub part: Part,
    /// Every tag is wanted.
    pub all: bool,
    /// The record at hand has just turned out to be kept: its tags so far are needed.
    pub recalled: bool,
    pub current: Current,
    pub tags: Tags,
    pub section_open: bool,
    pub table_open: bool,
    pub block: Option<usize>,
    /// The last POLYLINE or INSERT was kept, or is ours, and its run may follow.
    pub parent_kept: bool,
    pub parent_ours: bool,
    pub decoder: Option<Decoder>,
    /// The entry of the dictionary that is being read has a name that matters.
    pub dictionary_name: Option<&'static str>,
    pub sections: Vec<Section>,
    pub tables: Vec<Table>,
    pub blocks: Vec<Block>,
    pub header: Vec<HeaderVariable>,
    pub records: Vec<Record>,
    pub census: Census,
    pub handles: HandleState,
    pub doubts: Vec<Note>,
    /// Byte ranges of our entities, joined where they touch.
    pub our_ranges: Vec<(u64, u64)>,
    pub our_entities: u64,
    pub our_highest: u64,
    pub model_owner: Option<String>,
    /// Handle of the dictionary of plot styles, and for each dictionary with a default its handle and that of `Normal`.
    pub plot_styles: Option<u64>,
    pub normals: Vec<(u64, String)>,
}
