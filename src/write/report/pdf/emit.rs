//! The filled sheets as a PDF file: drawn, tagged in the order of reading, with heads, feet and numbers.

use std::collections::BTreeMap;
use std::num::NonZeroU16;

use krilla::destination::XyzDestination;
use krilla::geom::{PathBuilder, Point};
use krilla::metadata::{DateTime, Metadata};
use krilla::outline::{Outline, OutlineNode};
use krilla::page::PageSettings;
use krilla::paint::{Stroke, StrokeDash};
use krilla::surface::Surface;
use krilla::tagging::{
    ArtifactType, ContentTag, Identifier, ListNumbering, Node, TableHeaderScope, Tag, TagGroup, TagKind,
    TagTree,
};
use krilla::{Document, SerializeSettings};

use super::flow::{BOTTOM, Face, Flow, HEIGHT, INSIDE, MARGIN, Op, Owner, Part, QUIET, RULE, Role, WIDTH};
use super::lettering::Lettering;
use super::picture::{self, fill, paint};
use super::{CREATOR, narrow};
use crate::refusal::Refusal;
use crate::write::annotate::note::CAUTION;
use crate::write::report::Head;

/// Width of the stroke that makes letters heavier, in sizes of the font.
const HEAVIER: f64 = 0.035;

/// Draws all sheets.
///
/// # Errors
/// When the PDF library fails, a fault of the program.
pub fn emit(head: &Head, lettering: &Lettering, flow: Flow) -> Result<Vec<u8>, Refusal> {
    let failed = |what: String| {
        Refusal::new(
            "report",
            format!("The report could not be made as PDF: {what}"),
            "Ask for an .html file.",
        )
    };
    let mut document = Document::new_with(SerializeSettings::default());
    let count = flow.sheets.len();
    let mut leaves: BTreeMap<usize, Vec<Identifier>> = BTreeMap::new();
    for (i, sheet) in flow.sheets.iter().enumerate() {
        let settings = PageSettings::from_wh(narrow(WIDTH), narrow(HEIGHT));
        let settings = settings.ok_or_else(|| failed("the sheet has no size".into()))?;
        let mut page = document.start_page_with(settings);
        let mut surface = page.surface();
        let mut scribe = Scribe { surface: &mut surface, lettering, open: None, leaves: &mut leaves };
        for op in &sheet.ops {
            scribe.op(op);
        }
        scribe.close();
        scribe.margins(head, &sheet.name, i + 1, count);
        surface.finish();
        page.finish();
    }
    document.set_outline(outline(&flow));
    document.set_tag_tree(tree(&flow.parts, &mut leaves));
    document.set_metadata(metadata(head));
    document.finish().map_err(|error| failed(format!("{error:?}")))
}

fn metadata(head: &Head) -> Metadata {
    let mut data = Metadata::new()
        .title(head.title.clone())
        .creator(format!("{CREATOR} {}", head.version))
        .language("en".into());
    let part = |from: usize, to: usize| head.date.get(from..to).and_then(|t| t.parse::<u16>().ok());
    if let (Some(year), Some(month), Some(day)) = (part(0, 4), part(5, 7), part(8, 10)) {
        let small = |n: u16| u8::try_from(n).unwrap_or(1);
        data = data.creation_date(
            DateTime::new(year)
                .month(small(month))
                .day(small(day))
                .hour(0)
                .minute(0)
                .second(0)
                .utc_offset_hour(0),
        );
    }
    data
}

/// The list of contents that viewers show.
fn outline(flow: &Flow) -> Outline {
    let mut outline = Outline::new();
    let mut open: Option<OutlineNode> = None;
    for mark in &flow.marks {
        let place = Point::from_xy(narrow(MARGIN), narrow(mark.y));
        let node = OutlineNode::new(mark.text.clone(), XyzDestination::new(mark.sheet, place));
        match (&mut open, mark.level) {
            (Some(drawing), 2) => drawing.push_child(node),
            _ => {
                if let Some(done) = open.replace(node) {
                    outline.push_child(done);
                }
            }
        }
    }
    if let Some(done) = open {
        outline.push_child(done);
    }
    outline
}

/// The parts of the text as the tree that screen readers follow.
fn tree(parts: &[Part], leaves: &mut BTreeMap<usize, Vec<Identifier>>) -> TagTree {
    let mut children: Vec<Vec<usize>> = vec![Vec::new(); parts.len()];
    let mut roots = Vec::new();
    for (i, part) in parts.iter().enumerate() {
        match part.within {
            Some(within) => children[within].push(i),
            None => roots.push(i),
        }
    }
    let mut tree = TagTree::new().with_lang(Some("en".into()));
    for root in roots {
        if let Some(group) = group(root, parts, &children, leaves) {
            tree.push(group);
        }
    }
    tree
}

/// A part with all that stands in it; nothing for one in which nothing stands.
fn group(
    index: usize,
    parts: &[Part],
    children: &[Vec<usize>],
    leaves: &mut BTreeMap<usize, Vec<Identifier>>,
) -> Option<TagGroup> {
    let mut nodes: Vec<Node> =
        leaves.remove(&index).unwrap_or_default().into_iter().map(Node::from).collect();
    for &child in &children[index] {
        nodes.extend(group(child, parts, children, leaves).map(Node::from));
    }
    let role = &parts[index].role;
    // An empty cell keeps its place in its row.
    if nodes.is_empty() && !matches!(role, Role::Cell | Role::RowHead | Role::ColumnHead) {
        return None;
    }
    Some(TagGroup::with_children(kind(role), nodes))
}

fn kind(role: &Role) -> TagKind {
    match role {
        Role::Part => Tag::Part.into(),
        Role::Section => Tag::Section.into(),
        Role::Heading(level) => Tag::Hn(NonZeroU16::new(*level).unwrap_or(NonZeroU16::MIN), None).into(),
        Role::Paragraph => Tag::P.into(),
        Role::List => Tag::L(ListNumbering::None).into(),
        Role::Item => Tag::LI.into(),
        Role::Label => Tag::Lbl.into(),
        Role::Body => Tag::LBody.into(),
        Role::Table => Tag::Table.into(),
        Role::Head => Tag::THead.into(),
        Role::Rows => Tag::TBody.into(),
        Role::Row => Tag::TR.into(),
        Role::ColumnHead => Tag::TH(TableHeaderScope::Column).into(),
        Role::RowHead => Tag::TH(TableHeaderScope::Row).into(),
        Role::Cell => Tag::TD.into(),
        Role::Caption => Tag::Caption.into(),
        Role::Figure(words) => Tag::Figure(Some(words.clone())).into(),
    }
}

struct Scribe<'a, 'b> {
    surface: &'a mut Surface<'b>,
    lettering: &'a Lettering,
    /// What is open: a part, or what is not read out.
    open: Option<Owner>,
    leaves: &'a mut BTreeMap<usize, Vec<Identifier>>,
}

impl Scribe<'_, '_> {
    fn begin(&mut self, owner: Owner) {
        if self.open == Some(owner) {
            return;
        }
        self.close();
        match owner {
            Some(part) => {
                let leaf = self.surface.start_tagged(ContentTag::Other);
                self.leaves.entry(part).or_default().push(leaf);
            }
            None => {
                self.surface.start_tagged(ContentTag::Artifact(ArtifactType::Other));
            }
        }
        self.open = Some(owner);
    }

    fn close(&mut self) {
        if self.open.take().is_some() {
            self.surface.end_tagged();
        }
    }

    fn op(&mut self, op: &Op) {
        match op {
            Op::Text { owner, at, size, bold, colour, text } => {
                self.begin(*owner);
                self.text(*at, *size, *bold, *colour, text);
            }
            Op::Line { from, to, width, colour, dashed } => {
                self.begin(None);
                self.line(*from, *to, *width, *colour, *dashed);
            }
            Op::Picture { owner, at, scale, picture } => {
                self.begin(Some(*owner));
                picture::draw(picture, *at, *scale, self.lettering, self.surface);
            }
        }
    }

    fn text(&mut self, at: (f64, f64), size: f64, bold: bool, colour: [u8; 3], text: &str) {
        self.surface.set_fill(Some(fill(colour)));
        self.surface.set_stroke(bold.then(|| Stroke {
            paint: paint(colour).into(),
            width: narrow(HEAVIER * size),
            ..Stroke::default()
        }));
        self.surface.draw_glyphs(
            Point::from_xy(narrow(at.0), narrow(at.1)),
            &self.lettering.glyphs(text),
            self.lettering.font.clone(),
            text,
            narrow(size),
            false,
        );
    }

    fn line(&mut self, from: (f64, f64), to: (f64, f64), width: f64, colour: [u8; 3], dashed: bool) {
        let mut path = PathBuilder::new();
        path.move_to(narrow(from.0), narrow(from.1));
        path.line_to(narrow(to.0), narrow(to.1));
        self.surface.set_fill(None);
        self.surface.set_stroke(Some(Stroke {
            paint: paint(colour).into(),
            width: narrow(width),
            dash: dashed.then(|| StrokeDash { array: vec![5.0, 3.0], offset: 0.0 }),
            ..Stroke::default()
        }));
        if let Some(path) = path.finish() {
            self.surface.draw_path(&path);
        }
    }

    /// Head and foot of a sheet: what it is about, the caution, who made it, its number.
    fn margins(&mut self, head: &Head, name: &str, number: usize, count: usize) {
        let small = Face::plain(7.0);
        if number > 1 {
            self.surface.start_tagged(ContentTag::Artifact(ArtifactType::Header));
            let words = if name.is_empty() { &head.title } else { name };
            self.text((MARGIN, 40.0), small.size, false, QUIET, &self.lettering.legible(words));
            self.line((MARGIN, 46.0), (WIDTH - MARGIN, 46.0), 0.4, RULE, false);
            self.surface.end_tagged();
        }
        self.surface.start_tagged(ContentTag::Artifact(ArtifactType::Footer));
        let top = BOTTOM + 12.0;
        self.line((MARGIN, top), (WIDTH - MARGIN, top), 0.4, RULE, false);
        let caution = Face::plain(6.2);
        let mut y = top + 9.0;
        for line in self.lettering.wrap(CAUTION, INSIDE / caution.size) {
            self.text((MARGIN, y), caution.size, false, QUIET, &line);
            y += caution.leading;
        }
        y += 2.0;
        self.text((MARGIN, y), small.size, false, QUIET, &self.lettering.legible(&head.made));
        let words = format!("Page {number} of {count}");
        let wide = self.lettering.width(&words) * small.size;
        self.text((WIDTH - MARGIN - wide, y), small.size, false, QUIET, &words);
        self.surface.end_tagged();
    }
}
