//! Sheets filled from top to bottom. Lengths in points (1/72 inch), `y` downward from the upper edge.

use super::lettering::Lettering;
use crate::write::picture::Picture;

/// A4.
pub const WIDTH: f64 = 595.276;
/// As `WIDTH`.
pub const HEIGHT: f64 = 841.89;
/// Left and right margin: 14 mm.
pub const MARGIN: f64 = 39.69;
/// Where the text of a sheet begins and ends.
pub const TOP: f64 = 62.0;
/// As `TOP`.
pub const BOTTOM: f64 = HEIGHT - 66.0;
/// Width of the text.
pub const INSIDE: f64 = WIDTH - 2.0 * MARGIN;

/// Black, and the greys of what is less loud.
pub const INK: [u8; 3] = [0x1a, 0x1a, 0x1a];
/// As `INK`.
pub const QUIET: [u8; 3] = [0x56, 0x56, 0x56];
/// As `INK`.
pub const RULE: [u8; 3] = [0xb4, 0xb4, 0xb4];

/// What a mark belongs to in the order of reading; `None`: nothing that is read out.
pub type Owner = Option<usize>;

/// A thing on a sheet.
#[derive(Debug, Clone)]
pub enum Op {
    /// A line of text; `at` is the left end of its baseline.
    Text {
        /// What it is part of.
        owner: Owner,
        /// Left end of the baseline.
        at: (f64, f64),
        /// Size of the font.
        size: f64,
        /// Drawn heavier.
        bold: bool,
        /// Its colour.
        colour: [u8; 3],
        /// The text.
        text: String,
    },
    /// A straight line.
    Line {
        /// From here.
        from: (f64, f64),
        /// To here.
        to: (f64, f64),
        /// Its width.
        width: f64,
        /// Its colour.
        colour: [u8; 3],
        /// Broken.
        dashed: bool,
    },
    /// A picture; `at` is its upper left corner.
    Picture {
        /// What it is part of.
        owner: usize,
        /// Upper left corner.
        at: (f64, f64),
        /// Points per pixel of the picture.
        scale: f64,
        /// The picture.
        picture: Box<Picture>,
    },
}

/// What a part of the text is, for those who have it read out.
#[derive(Debug, Clone, PartialEq)]
pub enum Role {
    /// A drawing of several.
    Part,
    /// A section.
    Section,
    /// A heading of this level.
    Heading(u16),
    /// A paragraph.
    Paragraph,
    /// A list, its item, the item's name, what it says.
    List,
    /// As `List`.
    Item,
    /// As `List`.
    Label,
    /// As `List`.
    Body,
    /// A table, its head, its body, a row, the head of a column or of a row, and a cell.
    Table,
    /// As `Table`.
    Head,
    /// As `Table`.
    Rows,
    /// As `Table`.
    Row,
    /// As `Table`.
    ColumnHead,
    /// As `Table`.
    RowHead,
    /// As `Table`.
    Cell,
    /// A caption.
    Caption,
    /// A picture with the words for those who cannot see it.
    Figure(String),
}

/// A part of the text: its role and what it stands in.
#[derive(Debug, Clone)]
pub struct Part {
    /// What it is.
    pub role: Role,
    /// What it stands in.
    pub within: Owner,
}

/// A heading in the list of contents that viewers show.
#[derive(Debug, Clone)]
pub struct Mark {
    /// 1 for drawings, 2 for sections.
    pub level: u8,
    /// Its words.
    pub text: String,
    /// The sheet, from 0.
    pub sheet: usize,
    /// Height on it.
    pub y: f64,
}

/// One sheet.
#[derive(Debug, Default)]
pub struct Sheet {
    /// What stands on it.
    pub ops: Vec<Op>,
    /// The drawing that it is about, for its head; empty on the first.
    pub name: String,
}

/// Sheets being filled.
pub struct Flow<'a> {
    /// The font.
    pub lettering: &'a Lettering,
    /// Those so far; the last is being filled.
    pub sheets: Vec<Sheet>,
    /// Where the next thing begins.
    pub y: f64,
    /// The parts of the text in the order of reading.
    pub parts: Vec<Part>,
    /// The part that is open.
    pub within: Owner,
    /// Headings.
    pub marks: Vec<Mark>,
    /// The drawing that is being told.
    pub name: String,
}

/// How a text is set.
#[derive(Debug, Clone, Copy)]
pub struct Face {
    /// Size of the font.
    pub size: f64,
    /// Distance of baselines.
    pub leading: f64,
    /// Drawn heavier.
    pub bold: bool,
    /// Colour.
    pub colour: [u8; 3],
}

impl Face {
    /// Plain text of a size.
    pub fn plain(size: f64) -> Self {
        Self { size, leading: 1.35 * size, bold: false, colour: INK }
    }

    /// Heavier.
    #[must_use]
    pub fn bold(self) -> Self {
        Self { bold: true, ..self }
    }

    /// In grey.
    #[must_use]
    pub fn quiet(self) -> Self {
        Self { colour: QUIET, ..self }
    }
}

impl<'a> Flow<'a> {
    /// An empty first sheet.
    pub fn new(lettering: &'a Lettering) -> Self {
        Self {
            lettering,
            sheets: vec![Sheet::default()],
            y: TOP,
            parts: Vec::new(),
            within: None,
            marks: Vec::new(),
            name: String::new(),
        }
    }

    /// A new part in the open one.
    pub fn part(&mut self, role: Role) -> usize {
        self.parts.push(Part { role, within: self.within });
        self.parts.len() - 1
    }

    /// A new part, which is open from now on; gives back the one that was.
    pub fn open(&mut self, role: Role) -> Owner {
        let before = self.within;
        self.within = Some(self.part(role));
        before
    }

    /// Puts a thing on the sheet.
    pub fn put(&mut self, op: Op) {
        if let Some(sheet) = self.sheets.last_mut() {
            sheet.ops.push(op);
        }
    }

    /// Begins a new sheet, unless this one is empty.
    pub fn turn(&mut self) {
        if self.y > TOP {
            self.sheets.push(Sheet { ops: Vec::new(), name: self.name.clone() });
            self.y = TOP;
        }
    }

    /// Begins a new sheet where less than this is left.
    pub fn room(&mut self, height: f64) {
        if self.y + height > BOTTOM {
            self.turn();
        }
    }

    /// Leaves room, but none at the head of a sheet.
    pub fn skip(&mut self, height: f64) {
        if self.y > TOP {
            self.y += height;
        }
    }

    /// One line of text at a place of its own.
    pub fn line(&mut self, owner: Owner, at: (f64, f64), face: Face, text: &str) {
        if !text.is_empty() {
            let Face { size, bold, colour, .. } = face;
            self.put(Op::Text { owner, at, size, bold, colour, text: text.to_owned() });
        }
    }

    /// A rule from left to right.
    pub fn rule(&mut self, y: f64, width: f64, colour: [u8; 3]) {
        self.put(Op::Line { from: (MARGIN, y), to: (WIDTH - MARGIN, y), width, colour, dashed: false });
    }

    /// Text in lines between two abscissae, on as many sheets as it takes; `keep` is what must follow on the same sheet.
    pub fn paragraph(&mut self, owner: Owner, left: f64, right: f64, face: Face, text: &str, keep: f64) {
        let lines = self.lettering.wrap(&self.lettering.legible(text), (right - left) / face.size);
        let count = lines.len();
        for (i, line) in lines.iter().enumerate() {
            // The first two lines stay together, and so do the last one and what follows.
            let follows = if i + 1 == count {
                keep
            } else if i == 0 {
                face.leading
            } else {
                0.0
            };
            self.room(face.leading + follows);
            self.line(owner, (left, self.y + face.size), face, line);
            self.y += face.leading;
        }
    }
}
