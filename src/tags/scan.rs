//! One pass over a drawing: its structure is noted, the records of interest are kept, all others are passed over.

use crate::refusal::Refusal;
use crate::tags::APPLICATION;
use crate::tags::census::Entry;
use crate::tags::codes::{is_reference, parse_handle};
use crate::tags::finish;
use crate::tags::hashing::Hashing;
use crate::tags::machine::{Candidate, Collect, Machine, Options, Part, Word};
use crate::tags::outline::{Anchor, HeaderValue, HeaderVariable, Note, Outline, Section, Table};
use crate::tags::source::Source;
use crate::tags::text::Doubt;
use crate::tags::tokens::{Form, MOST_HELD, Place, Sink, Stream, tokenize};

/// Reads a drawing from its first byte to its last.
///
/// # Errors
/// When the file is no DXF drawing, is damaged, or cannot be read; the refusal names the line.
pub fn scan(source: &Source, options: &Options<'_>) -> Result<Outline, Refusal> {
    let mut machine = Machine { keep: options.keep, ..Machine::default() };
    let hashing = options.hash.then(|| Hashing::start(source));
    let stream = tokenize(source, &mut machine)?;
    let mut outline = machine.finish(stream)?;
    outline.sha256 = hashing.map(Hashing::finish).transpose()?;
    Ok(outline)
}

/// Codes whose values matter in a record that is not kept.
const WANTED: [bool; 1072] = {
    let mut wanted = [false; 1072];
    let mut code = 0;
    while code < wanted.len() {
        wanted[code] = matches!(
            code,
            0 | 5 | 8 | 67 | 102 | 105 | 320..=369 | 390..=399 | 480 | 481 | 1001 | 1005
        );
        code += 1;
    }
    wanted
};

impl Sink for Machine<'_> {
    fn begin(&mut self, _: Form, utf8_mark: bool) {
        self.utf8_mark = utf8_mark;
    }

    #[inline(always)]
    fn wants(&self, code: i32) -> bool {
        self.all || usize::try_from(code).is_ok_and(|i| WANTED.get(i) == Some(&true))
    }

    /// The few tags that nearly every entity has. What they do is what [`Machine::record_tag`] would do.
    #[inline(always)]
    fn brief(&mut self, code: i32, value: &[u8]) -> bool {
        if self.all || !self.current.open || !matches!(self.part, Part::Entities | Part::Blocks) {
            return false;
        }
        match code {
            5 => self.own_handle(value),
            330 if self.model_owner.is_some() || self.part == Part::Blocks => self.refer(value),
            8 if self.current.entry.is_none() => return self.passed_over(value.trim_ascii()),
            _ => return false,
        }
        true
    }

    #[inline(always)]
    fn skims(&self) -> bool {
        !self.all
    }

    #[inline(always)]
    fn holds(&self) -> bool {
        self.current.open && self.current.collect == Collect::Pending
    }

    fn settle(&mut self) {
        self.layer(b"0", self.current.line);
    }

    #[inline(always)]
    fn recalls(&mut self) -> bool {
        std::mem::take(&mut self.recalled)
    }

    fn recall(&mut self, code: i32, value: &[u8], line: Option<u64>) -> Result<(), Refusal> {
        self.collect(code, value, line)
    }

    fn overlong(&self) -> Refusal {
        self.too_long("a million bytes with no layer")
    }

    fn tag(&mut self, code: i32, value: &[u8], place: &Place) -> Result<(), Refusal> {
        if code == 0 {
            return self.open(value, place);
        }
        match self.part {
            Part::Ignored => Ok(()),
            Part::Other => {
                if is_reference(code) {
                    self.refer(value);
                }
                Ok(())
            }
            Part::Unnamed => {
                if code == 2 {
                    self.name_section(value);
                }
                Ok(())
            }
            Part::Header => {
                self.header_tag(code, value, place);
                Ok(())
            }
            _ if self.current.open => self.record_tag(code, value, place),
            _ => Ok(()),
        }
    }
}

impl Machine<'_> {
    /// A group 0: the record before it ends, and whatever it names begins.
    fn open(&mut self, value: &[u8], place: &Place) -> Result<(), Refusal> {
        let kind = value.trim_ascii();
        self.close_record(place.start)?;
        let anchor = Anchor { at: place.start, crlf: place.after_crlf };
        let word = Word::of(kind);
        if word == Word::Section {
            self.end_section(anchor, None);
            self.sections.push(Section {
                name: "?".to_owned(),
                start: anchor,
                end: anchor,
                stop: place.end,
                closed: false,
                records: 0,
                ours: 0,
                tables: self.tables.len()..self.tables.len(),
            });
            self.section_open = true;
            self.part = Part::Unnamed;
            self.all = true;
        } else if word == Word::EndSection {
            self.end_section(anchor, Some(place.end));
        } else if word == Word::EndOfFile {
            self.end_section(anchor, None);
        } else if self.part == Part::Tables && word == Word::Table {
            self.end_table(anchor, None);
            self.tables.push(Table {
                name: String::new(),
                start: anchor,
                end: anchor,
                stop: place.end,
                closed: false,
                handle: None,
                count: 0,
                records: Vec::new(),
            });
            self.table_open = true;
            self.begin_record(kind, word, place);
        } else if self.part == Part::Tables && word == Word::EndTable {
            self.end_table(anchor, Some(place.end));
        } else {
            match self.part {
                Part::Ignored | Part::Other | Part::Header => {}
                Part::Unnamed => self.name_section(b"?"),
                _ => self.begin_record(kind, word, place),
            }
        }
        Ok(())
    }

    fn name_section(&mut self, value: &[u8]) {
        let name = String::from_utf8_lossy(value.trim_ascii()).to_ascii_uppercase();
        self.part = match name.as_str() {
            "HEADER" => Part::Header,
            "TABLES" => Part::Tables,
            "BLOCKS" => Part::Blocks,
            "ENTITIES" => Part::Entities,
            "OBJECTS" => Part::Objects,
            "CLASSES" | "THUMBNAILIMAGE" => Part::Ignored,
            _ => Part::Other,
        };
        self.all = self.part == Part::Header;
        if let Some(section) = self.sections.last_mut() {
            section.name = name;
        }
    }

    /// Ends the open section before the anchor; `stop` is the end of its ENDSEC tag, if it has one.
    fn end_section(&mut self, anchor: Anchor, stop: Option<u64>) {
        // A stray ENDSEC belongs to no section.
        if !std::mem::take(&mut self.section_open) {
            return;
        }
        self.end_table(anchor, None);
        let tables = self.tables.len();
        let named = self.part;
        if let Some(section) = self.sections.last_mut() {
            section.end = anchor;
            section.stop = stop.unwrap_or(anchor.at);
            section.closed = stop.is_some();
            section.tables.end = tables;
        }
        self.block = None;
        self.parent_kept = false;
        self.parent_ours = false;
        self.part = Part::Ignored;
        self.all = false;
        if named == Part::Header {
            self.decoder = None;
        }
    }

    fn end_table(&mut self, anchor: Anchor, stop: Option<u64>) {
        if !self.table_open {
            return;
        }
        self.table_open = false;
        if let Some(table) = self.tables.last_mut() {
            table.end = anchor;
            table.stop = stop.unwrap_or(anchor.at);
            table.closed = stop.is_some();
        }
    }

    fn header_tag(&mut self, code: i32, value: &[u8], place: &Place) {
        if code == 9 {
            self.header.push(HeaderVariable {
                name: String::from_utf8_lossy(value.trim_ascii()).to_ascii_uppercase(),
                values: Vec::new(),
                line: place.line,
            });
        } else if code != 999
            && let Some(variable) = self.header.last_mut()
        {
            variable.values.push(HeaderValue {
                code,
                value: value.to_vec(),
                range: place.value..place.value_end,
            });
        }
    }

    fn begin_record(&mut self, kind: &[u8], word: Word, place: &Place) {
        let current = &mut self.current;
        current.open = true;
        current.word = word;
        current.kind.clear();
        current.kind.extend_from_slice(kind);
        current.start = place.start;
        current.line = place.line;
        current.handle = None;
        current.entry = None;
        current.paper = false;
        current.ours = false;
        current.child = false;
        current.dimstyle = false;
        current.dictionary = false;
        current.depth = 0;
        current.owner = false;
        current.collect = Collect::No;
        match self.part {
            Part::Tables => {
                current.dimstyle = word == Word::DimStyle;
                let table = self.tables.last().map_or("", |table| table.name.as_str());
                let head = word == Word::Table;
                let wanted = ["LAYER", "LTYPE", "STYLE", "APPID", "BLOCK_RECORD"];
                if self.table_open && (head || wanted.contains(&table)) {
                    current.collect = Collect::Yes;
                }
            }
            Part::Objects => {
                current.dictionary = word == Word::Dictionary;
                self.dictionary_name = None;
            }
            Part::Blocks if word == Word::Block => current.collect = Collect::Yes,
            Part::Blocks if word == Word::EndBlock => {}
            _ => {
                current.child = matches!(word, Word::Child | Word::EndRun);
                if current.child {
                    current.ours = self.parent_ours;
                    if self.parent_kept {
                        current.collect = Collect::Yes;
                    }
                } else if self.keep.is_some() {
                    current.collect = Collect::Pending;
                }
            }
        }
        self.all = current.collect == Collect::Yes || current.dictionary;
        if current.collect != Collect::No || self.all {
            self.tags.restart(place.line);
        }
    }

    #[inline]
    fn record_tag(&mut self, code: i32, value: &[u8], place: &Place) -> Result<(), Refusal> {
        match code {
            5 if !self.current.dimstyle => self.own_handle(value),
            105 if self.current.dimstyle => self.own_handle(value),
            8 if self.current.entry.is_none() && matches!(self.part, Part::Entities | Part::Blocks) => {
                self.layer(value.trim_ascii(), place.line);
            }
            67 => self.current.paper = value.trim_ascii() == b"1",
            102 if self.model_owner.is_none() => {
                if value.trim_ascii_start().starts_with(b"{") {
                    self.current.depth += 1;
                } else {
                    self.current.depth = self.current.depth.saturating_sub(1);
                }
            }
            1001 => {
                self.current.ours |= value.trim_ascii().eq_ignore_ascii_case(APPLICATION.as_bytes());
            }
            3 if self.current.dictionary => {
                self.dictionary_name = match value.trim_ascii() {
                    b"ACAD_PLOTSTYLENAME" => Some("ACAD_PLOTSTYLENAME"),
                    b"Normal" => Some("Normal"),
                    _ => None,
                };
            }
            _ if is_reference(code) => self.reference(code, value),
            _ => {}
        }
        if self.recalled {
            // This tag comes again with those before it.
            return Ok(());
        }
        match self.current.collect {
            Collect::No => Ok(()),
            Collect::Yes => self.collect(code, value, place.line),
            Collect::Pending if place.start - self.current.start > MOST_HELD as u64 => Err(self.overlong()),
            Collect::Pending => Ok(()),
        }
    }

    fn collect(&mut self, code: i32, value: &[u8], line: Option<u64>) -> Result<(), Refusal> {
        // Previews (310) of block records and the like are of no use.
        let useless = code == 999 || code == 310 && self.part == Part::Tables;
        if useless || self.tags.push(code, value, line) {
            return Ok(());
        }
        Err(self.too_long("four thousand million bytes"))
    }

    fn too_long(&self, what: &str) -> Refusal {
        let message = format!(
            "the {} that begins at byte {} has more than {what}",
            String::from_utf8_lossy(&self.current.kind),
            self.current.start
        );
        let mut refusal = Refusal::new(
            "record-length",
            message,
            "The drawing is damaged near here: audit it in the CAD program and save it again",
        );
        refusal.line = self.current.line;
        refusal
    }

    #[inline]
    fn own_handle(&mut self, value: &[u8]) {
        if let Some(handle) = parse_handle(value) {
            self.handles.used += 1;
            self.handles.highest = self.handles.highest.max(handle);
            self.current.handle.get_or_insert(handle);
        }
    }

    #[inline]
    fn refer(&mut self, value: &[u8]) {
        if let Some(handle) = parse_handle(value) {
            self.handles.highest_reference = self.handles.highest_reference.max(handle);
        }
    }

    fn reference(&mut self, code: i32, value: &[u8]) {
        self.refer(value);
        let text = || String::from_utf8_lossy(value.trim_ascii()).into_owned();
        if code == 330
            && self.part == Part::Entities
            && self.model_owner.is_none()
            && self.current.depth == 0
            && !self.current.child
        {
            // Group 67 follows the owner, so paper space is told apart when the record ends.
            self.model_owner = Some(text());
            self.current.owner = true;
        }
        if self.current.dictionary && matches!(code, 350 | 360) {
            match self.dictionary_name.take() {
                Some("ACAD_PLOTSTYLENAME") if self.plot_styles.is_none() => {
                    self.plot_styles = parse_handle(value);
                }
                Some("Normal") => {
                    if let Some(handle) = self.current.handle {
                        self.normals.push((handle, text()));
                    }
                }
                _ => {}
            }
        }
    }

    /// The layer of the current entity is known, and it is known already that no such entity is kept; false when it is not.
    #[inline(always)]
    fn passed_over(&mut self, layer: &[u8]) -> bool {
        let Some(index) = self.census.find(&self.current.kind, layer) else {
            return false;
        };
        if self.current.collect == Collect::Pending {
            if self.census.entry(index).decision != Some((self.block, false)) {
                return false;
            }
            self.current.collect = Collect::No;
        }
        self.current.entry = Some(index);
        true
    }

    /// The layer of the current entity is known: whether it is kept is decided here.
    pub(super) fn layer(&mut self, layer: &[u8], line: Option<u64>) {
        let index = match self.census.find(&self.current.kind, layer) {
            Some(index) => index,
            None => {
                let name = self.name(layer, line);
                self.census.add(&self.current.kind, layer, name)
            }
        };
        self.current.entry = Some(index);
        if self.current.collect != Collect::Pending {
            return;
        }
        let keep = self.keep.is_some_and(|keep| {
            let block = self.block.map(|i| self.blocks[i].name.as_str());
            let Entry { kind, layer, decision, .. } = self.census.entry(index);
            match decision {
                Some((place, keep)) if *place == self.block => *keep,
                _ => {
                    let kept = keep(&Candidate { block, kind, layer });
                    *decision = Some((self.block, kept));
                    kept
                }
            }
        });
        if keep {
            self.current.collect = Collect::Yes;
            self.recalled = true;
            self.all = true;
        } else {
            self.current.collect = Collect::No;
        }
    }

    /// A name, decoded; a doubt about it is noted.
    pub(super) fn name(&mut self, bytes: &[u8], line: Option<u64>) -> String {
        if self.decoder.is_none() {
            self.decoder = Some(finish::decoder(&self.header, self.utf8_mark));
        }
        let Some(decoder) = &self.decoder else {
            return String::new();
        };
        let (name, doubt) = decoder.decode(bytes.trim_ascii());
        if let Some(doubt) = doubt {
            self.doubt(doubt, &name, line);
        }
        name
    }

    fn doubt(&mut self, doubt: Doubt, name: &str, at: Option<u64>) {
        for note in &mut self.doubts {
            if let Note::Text { doubt: d, count, .. } = note
                && *d == doubt
            {
                *count += 1;
                return;
            }
        }
        self.doubts.push(Note::Text { doubt, count: 1, first: name.to_owned(), line: at });
    }

    fn finish(mut self, stream: Stream) -> Result<Outline, Refusal> {
        if stream.eof.is_none() {
            self.close_record(stream.tags_end)?;
            let anchor = Anchor { at: stream.tags_end, crlf: stream.last_crlf };
            self.end_section(anchor, None);
        }
        finish::outline(self, stream)
    }
}
