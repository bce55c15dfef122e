//! The report as a row of blocks, written once and set as a page for browsers or as sheets of paper.

use crate::write::picture::Picture;

/// A part of the report.
#[derive(Debug, Clone, PartialEq)]
pub enum Block {
    /// All drawings with their verdicts, where there are several.
    Contents(Vec<Headed>),
    /// A drawing begins.
    Drawing(Headed),
    /// The drawing ends.
    DrawingEnd,
    /// A section begins.
    Section {
        /// Its heading.
        heading: String,
        /// What it holds mostly: `plain`, `table`, `picture` or `signatures`.
        class: &'static str,
    },
    /// The section ends.
    End,
    /// A paragraph.
    Paragraph(String),
    /// A list of sentences.
    Bullets(Vec<String>),
    /// Names and values.
    List {
        /// `facts` or `settings`.
        class: &'static str,
        /// Those without a value are left out.
        rows: Vec<(String, String)>,
    },
    /// A table whose first column heads its rows.
    Table {
        /// What it tells.
        caption: String,
        /// Its columns.
        columns: Vec<Column>,
        /// Its rows.
        rows: Vec<Vec<String>>,
    },
    /// A picture with its caption.
    Figure {
        /// The picture.
        picture: Box<Picture>,
        /// What it shows.
        caption: String,
    },
    /// Places for names, signatures and dates of these.
    Signatures(&'static [&'static str]),
}

/// A drawing by its name and verdict.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Headed {
    /// Its number in the report, from 1.
    pub number: usize,
    /// Its name.
    pub name: String,
    /// The class of its verdict: `within`, `outside`, `unchecked` or `refused`.
    pub class: &'static str,
    /// The verdict in words.
    pub words: &'static str,
}

/// A column of a table.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Column {
    /// Its head.
    pub name: String,
    /// Whether it holds figures, which stand on the right.
    pub figures: bool,
}

/// A column of words.
pub fn words(name: impl Into<String>) -> Column {
    Column { name: name.into(), figures: false }
}

/// A column of figures.
pub fn figures(name: impl Into<String>) -> Column {
    Column { name: name.into(), figures: true }
}

/// The text with a capital at its beginning.
pub fn sentence(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

/// The report, written from top to bottom.
#[derive(Debug, Default)]
pub struct Page {
    /// What was written so far.
    pub blocks: Vec<Block>,
}

impl Page {
    /// A paragraph.
    pub fn paragraph(&mut self, text: &str) {
        self.blocks.push(Block::Paragraph(text.to_owned()));
    }

    /// The beginning of a section with its heading; [`Page::end`] ends it.
    pub fn section(&mut self, heading: &str, class: &'static str) {
        self.blocks.push(Block::Section { heading: heading.to_owned(), class });
    }

    /// The end of a section.
    pub fn end(&mut self) {
        self.blocks.push(Block::End);
    }

    /// A list of names and values; those without a value are left out.
    pub fn list(&mut self, class: &'static str, rows: &[(String, String)]) {
        let rows = rows.iter().filter(|r| !r.1.is_empty()).cloned().collect();
        self.blocks.push(Block::List { class, rows });
    }

    /// A table whose first column heads its rows.
    pub fn table(&mut self, caption: &str, columns: &[Column], rows: &[Vec<String>]) {
        self.blocks.push(Block::Table {
            caption: caption.to_owned(),
            columns: columns.to_vec(),
            rows: rows.to_vec(),
        });
    }

    /// A picture with its caption.
    pub fn figure(&mut self, picture: Picture, caption: &str) {
        self.blocks.push(Block::Figure { picture: Box::new(picture), caption: caption.to_owned() });
    }
}
