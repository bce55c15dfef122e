//! The page that is being written: text escaped, tables with captions and scopes, ids that are unique.

use crate::write::picture::Picture;
pub use crate::write::picture::svg::escape;
use crate::write::picture::svg::{Home, svg};
use crate::write::text::plain;

/// A page, written from top to bottom.
#[derive(Debug, Default)]
pub struct Page {
    /// The HTML so far.
    pub out: String,
    /// Number of the drawing that is being told.
    pub number: usize,
    parts: usize,
}

/// A column of a table.
#[derive(Debug, Clone, Copy)]
pub struct Column<'a> {
    /// Its head.
    pub name: &'a str,
    /// Whether it holds figures, which stand on the right.
    pub figures: bool,
}

/// A column of words.
pub fn words(name: &str) -> Column<'_> {
    Column { name, figures: false }
}

/// A column of figures.
pub fn figures(name: &str) -> Column<'_> {
    Column { name, figures: true }
}

/// The text with a capital at its beginning.
pub fn sentence(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

impl Page {
    /// HTML as it is.
    pub fn raw(&mut self, html: &str) {
        self.out.push_str(html);
    }

    /// Text, escaped.
    pub fn text(&mut self, text: &str) {
        self.out.push_str(&escape(&plain(text)));
    }

    /// A paragraph.
    pub fn paragraph(&mut self, text: &str) {
        self.raw("<p>");
        self.text(text);
        self.raw("</p>\n");
    }

    /// A part of the page that has not been given before.
    fn id(&mut self) -> String {
        self.parts += 1;
        format!("part-{}", self.parts)
    }

    /// The beginning of a section with its heading; [`Page::end`] ends it.
    pub fn section(&mut self, heading: &str, class: &str) {
        let id = self.id();
        self.raw(&format!("<section class=\"{class}\" aria-labelledby=\"{id}\">\n<h3 id=\"{id}\">"));
        self.text(heading);
        self.raw("</h3>\n");
    }

    /// The end of a section.
    pub fn end(&mut self) {
        self.raw("</section>\n");
    }

    /// A list of names and values; those without a value are left out.
    pub fn list(&mut self, class: &str, rows: &[(String, String)]) {
        self.raw(&format!("<dl class=\"{class}\">\n"));
        for (name, value) in rows.iter().filter(|r| !r.1.is_empty()) {
            self.raw("<div><dt>");
            self.text(name);
            self.raw("</dt><dd>");
            self.text(value);
            self.raw("</dd></div>\n");
        }
        self.raw("</dl>\n");
    }

    /// A table whose first column heads its rows. It may be wider than the page and then scrolls by itself.
    pub fn table(&mut self, caption: &str, columns: &[Column], rows: &[Vec<String>]) {
        let id = self.id();
        self.raw(&format!(
            "<div class=\"scroll\" role=\"region\" aria-labelledby=\"{id}\" tabindex=\"0\">\n<table>\n\
             <caption id=\"{id}\">"
        ));
        self.text(caption);
        self.raw("</caption>\n<thead><tr>");
        for column in columns {
            let class = if column.figures { " class=\"n\"" } else { "" };
            self.raw(&format!("<th scope=\"col\"{class}>"));
            self.text(column.name);
            self.raw("</th>");
        }
        self.raw("</tr></thead>\n<tbody>\n");
        for row in rows {
            self.raw("<tr>");
            for (i, (cell, column)) in row.iter().zip(columns).enumerate() {
                let (tag, scope) = if i == 0 { ("th", " scope=\"row\"") } else { ("td", "") };
                let class = if column.figures { " class=\"n\"" } else { "" };
                self.raw(&format!("<{tag}{scope}{class}>"));
                self.text(cell);
                self.raw(&format!("</{tag}>"));
            }
            self.raw("</tr>\n");
        }
        self.raw("</tbody>\n</table>\n</div>\n");
    }

    /// A picture with its caption. On narrow screens it scrolls, so that its text stays legible.
    pub fn figure(&mut self, picture: &Picture, caption: &str) {
        let id = self.id();
        self.raw(&format!(
            "<figure>\n<div class=\"scroll picture\" role=\"region\" aria-labelledby=\"{id}-caption\" tabindex=\"0\">\n"
        ));
        let drawn = svg(picture, Home::Page(&id));
        self.raw(&drawn);
        self.raw(&format!("</div>\n<figcaption id=\"{id}-caption\">"));
        self.text(caption);
        self.raw("</figcaption>\n</figure>\n");
    }
}
