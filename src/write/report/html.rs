//! The report as a page for browsers: text escaped, tables with captions and scopes, ids that are unique.

use super::page::{Block, Column, Headed};
use super::{GENERATOR, Head};
use crate::write::annotate::note::CAUTION;
use crate::write::picture::svg::{Home, escape, svg};
use crate::write::text::plain;

const STYLE: &str = include_str!("style.css");

/// The page of a report.
pub fn html(head: &Head, blocks: &[Block]) -> String {
    let mut page = Html::default();
    page.raw("<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n");
    page.raw(&format!("{GENERATOR} {}\">\n", escape(&head.version)));
    page.raw("<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n");
    page.raw("<meta name=\"color-scheme\" content=\"light dark\">\n");
    page.raw(&format!("<title>{}</title>\n<style>\n{STYLE}</style>\n</head>\n<body>\n", escape(&head.title)));
    page.raw("<a class=\"skip\" href=\"#main\">To the results</a>\n");
    page.raw(&format!(
        "<header class=\"sheet-head\">\n<p class=\"kind\">{}</p>\n<h1>{}</h1>\n",
        super::KIND,
        super::HEADING
    ));
    page.raw(&format!("<p class=\"made\">{}</p>\n</header>\n<main id=\"main\">\n", escape(&head.made)));
    for block in blocks {
        page.block(block);
    }
    page.raw("</main>\n<footer>\n<p>");
    page.text(CAUTION);
    page.raw("</p>\n</footer>\n</body>\n</html>\n");
    page.out
}

/// The page so far.
#[derive(Debug, Default)]
struct Html {
    out: String,
    parts: usize,
}

impl Html {
    fn raw(&mut self, html: &str) {
        self.out.push_str(html);
    }

    fn text(&mut self, text: &str) {
        self.out.push_str(&escape(&plain(text)));
    }

    /// A part of the page that has not been given before.
    fn id(&mut self) -> String {
        self.parts += 1;
        format!("part-{}", self.parts)
    }

    fn block(&mut self, block: &Block) {
        match block {
            Block::Contents(drawings) => self.contents(drawings),
            Block::Drawing(Headed { number, name, class, words }) => {
                self.raw(&format!(
                    "<article id=\"drawing-{number}\" aria-labelledby=\"drawing-{number}-name\">\n\
                     <h2 id=\"drawing-{number}-name\">"
                ));
                self.text(name);
                self.raw(&format!("</h2>\n<p class=\"verdict {class}\">{words}</p>\n"));
            }
            Block::DrawingEnd => self.raw("</article>\n"),
            Block::Section { heading, class } => {
                let id = self.id();
                self.raw(&format!("<section class=\"{class}\" aria-labelledby=\"{id}\">\n<h3 id=\"{id}\">"));
                self.text(heading);
                self.raw("</h3>\n");
            }
            Block::End => self.raw("</section>\n"),
            Block::Paragraph(text) => {
                self.raw("<p>");
                self.text(text);
                self.raw("</p>\n");
            }
            Block::Bullets(lines) => {
                self.raw("<ul>\n");
                for line in lines {
                    self.raw("<li>");
                    self.text(line);
                    self.raw("</li>\n");
                }
                self.raw("</ul>\n");
            }
            Block::List { class, rows } => {
                self.raw(&format!("<dl class=\"{class}\">\n"));
                for (name, value) in rows {
                    self.raw("<div><dt>");
                    self.text(name);
                    self.raw("</dt><dd>");
                    self.text(value);
                    self.raw("</dd></div>\n");
                }
                self.raw("</dl>\n");
            }
            Block::Table { caption, columns, rows } => self.table(caption, columns, rows),
            Block::Figure { picture, caption } => {
                // On narrow screens it scrolls, so that its text stays legible.
                let id = self.id();
                self.raw(&format!(
                    "<figure>\n<div class=\"scroll picture\" role=\"region\" aria-labelledby=\"{id}-caption\" \
                     tabindex=\"0\">\n"
                ));
                let drawn = svg(picture, Home::Page(&id));
                self.raw(&drawn);
                self.raw(&format!("</div>\n<figcaption id=\"{id}-caption\">"));
                self.text(caption);
                self.raw("</figcaption>\n</figure>\n");
            }
            Block::Signatures(roles) => {
                self.raw("<dl class=\"sign\">\n");
                for role in *roles {
                    self.raw(&format!(
                        "<div><dt>{role}</dt><dd><span class=\"line\">Name</span><span class=\"line\">Signature</span>\
                         <span class=\"line\">Date</span></dd></div>\n"
                    ));
                }
                self.raw("</dl>\n");
            }
        }
    }

    fn contents(&mut self, drawings: &[Headed]) {
        self.raw(
            "<nav aria-labelledby=\"drawings\">\n<h2 id=\"drawings\">Drawings</h2>\n<ol class=\"contents\">\n",
        );
        for Headed { number, name, class, words } in drawings {
            self.raw(&format!("<li><a href=\"#drawing-{number}\">"));
            self.text(name);
            self.raw(&format!("</a> <span class=\"tag {class}\">{words}</span></li>\n"));
        }
        self.raw("</ol>\n</nav>\n");
    }

    /// A table may be wider than the page and then scrolls by itself.
    fn table(&mut self, caption: &str, columns: &[Column], rows: &[Vec<String>]) {
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
            self.text(&column.name);
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
}
