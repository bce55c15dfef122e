//! The blocks of the report set on sheets.

use super::flow::{BOTTOM, Face, Flow, INK, INSIDE, MARGIN, Mark, Op, QUIET, Role, TOP, WIDTH};
use super::table::table;
use crate::write::annotate::note::CAUTION;
use crate::write::picture::{Picture, look_of};
use crate::write::report::page::{Block, Column, Headed, words};
use crate::write::report::{HEADING, Head, KIND};

/// Sizes of text.
const TEXT: f64 = 9.0;
const SMALL: f64 = 8.0;

/// Points per pixel of a picture that is shown at its own size.
const POINT: f64 = 0.75;
/// Largest part of a sheet that one picture takes.
const TALLEST: f64 = 0.62;

/// Sets a whole report.
pub fn set(head: &Head, blocks: &[Block], flow: &mut Flow) {
    flow.y = TOP - 26.0;
    let kind = Some(flow.part(Role::Paragraph));
    flow.line(kind, (MARGIN, flow.y + SMALL), Face::plain(SMALL).quiet(), KIND);
    flow.y += 13.0;
    let title = Some(flow.part(Role::Heading(1)));
    flow.paragraph(title, MARGIN, WIDTH - MARGIN, Face::plain(17.0).bold(), HEADING, 0.0);
    let made = Some(flow.part(Role::Paragraph));
    flow.line(made, (MARGIN, flow.y + SMALL), Face::plain(SMALL).quiet(), &head.made);
    flow.y += 14.0;
    flow.rule(flow.y, 1.5, INK);
    flow.y += 6.0;
    for block in blocks {
        one(block, flow);
    }
    flow.within = None;
    flow.skip(12.0);
    flow.room(40.0);
    flow.rule(flow.y, 1.5, INK);
    flow.y += 6.0;
    let part = Some(flow.part(Role::Paragraph));
    flow.paragraph(part, MARGIN, WIDTH - MARGIN, Face::plain(TEXT), CAUTION, 0.0);
}

fn one(block: &Block, flow: &mut Flow) {
    match block {
        Block::Contents(drawings) => contents(drawings, flow),
        Block::Drawing(drawing) => begin(drawing, flow),
        Block::DrawingEnd => flow.within = None,
        Block::Section { heading, .. } => {
            flow.skip(10.0);
            // A heading stays with what follows it.
            flow.room(60.0);
            flow.open(Role::Section);
            let part = Some(flow.part(Role::Heading(3)));
            flow.marks.push(Mark {
                level: 2,
                text: heading.clone(),
                sheet: flow.sheets.len() - 1,
                y: flow.y,
            });
            flow.paragraph(part, MARGIN, WIDTH - MARGIN, Face::plain(11.0).bold(), heading, 0.0);
            flow.y += 3.0;
        }
        Block::End => {
            flow.within = flow.within.and_then(|open| flow.parts[open].within);
        }
        Block::Paragraph(text) => {
            let part = Some(flow.part(Role::Paragraph));
            flow.paragraph(part, MARGIN, WIDTH - MARGIN, Face::plain(TEXT), text, 0.0);
            flow.y += 4.0;
        }
        Block::Bullets(lines) => bullets(lines, flow),
        Block::List { class: "settings", rows } => settings(rows, flow),
        Block::List { rows, .. } => facts(rows, flow),
        Block::Table { caption, columns, rows } => table(caption, columns, rows, flow),
        Block::Figure { picture, caption } => figure(picture, caption, flow),
        Block::Signatures(roles) => signatures(roles, flow),
    }
}

fn contents(drawings: &[Headed], flow: &mut Flow) {
    flow.skip(8.0);
    let heading = Some(flow.part(Role::Heading(2)));
    flow.paragraph(heading, MARGIN, WIDTH - MARGIN, Face::plain(13.0).bold(), "Drawings", 20.0);
    let columns: Vec<Column> = ["Drawing", "Verdict"].map(words).into();
    let rows: Vec<Vec<String>> =
        drawings.iter().map(|d| vec![format!("{}  {}", d.number, d.name), d.words.to_owned()]).collect();
    table("", &columns, &rows, flow);
}

/// A drawing begins: its name and its verdict in a frame. Each begins a sheet.
fn begin(drawing: &Headed, flow: &mut Flow) {
    let name = flow.lettering.legible(&drawing.name);
    flow.within = None;
    flow.name.clone_from(&name);
    if drawing.number > 1 || flow.marks.iter().any(|m| m.level == 1) || flow.y > TOP + 60.0 {
        flow.turn();
    }
    flow.open(Role::Part);
    flow.skip(8.0);
    let heading = Some(flow.part(Role::Heading(2)));
    flow.marks.push(Mark { level: 1, text: name.clone(), sheet: flow.sheets.len() - 1, y: flow.y });
    flow.paragraph(heading, MARGIN, WIDTH - MARGIN, Face::plain(13.0).bold(), &name, 30.0);
    flow.y += 3.0;
    let (colour, width, dashed) = match drawing.class {
        "within" => (look_of("line"), 1.2, false),
        "unchecked" => (look_of("thrust"), 1.2, true),
        _ => (look_of("flag"), 2.6, false),
    };
    let (left, right, top, low) = (MARGIN, WIDTH - MARGIN, flow.y, flow.y + 24.0);
    for (from, to) in [
        ((left, top), (right, top)),
        ((right, top), (right, low)),
        ((right, low), (left, low)),
        ((left, low), (left, top)),
    ] {
        flow.put(Op::Line { from, to, width, colour, dashed });
    }
    let part = Some(flow.part(Role::Paragraph));
    let face = Face { colour, ..Face::plain(10.5).bold() };
    flow.line(part, (left + 9.0, top + 15.6), face, drawing.words);
    flow.y = low + 6.0;
}

fn bullets(lines: &[String], flow: &mut Flow) {
    let within = flow.open(Role::List);
    let face = Face::plain(TEXT);
    let list = flow.within;
    for line in lines {
        flow.within = list;
        flow.open(Role::Item);
        flow.room(face.leading);
        let label = Some(flow.part(Role::Label));
        flow.line(label, (MARGIN + 3.0, flow.y + face.size), face, "\u{2013}");
        let body = Some(flow.part(Role::Body));
        flow.paragraph(body, MARGIN + 14.0, WIDTH - MARGIN, face, line, 0.0);
        flow.y += 1.5;
    }
    flow.within = within;
    flow.y += 4.0;
}

/// Names and values beside each other.
fn facts(rows: &[(String, String)], flow: &mut Flow) {
    let within = flow.open(Role::List);
    let list = flow.within;
    let face = Face::plain(TEXT);
    for (name, value) in rows {
        flow.within = list;
        flow.open(Role::Item);
        flow.room(face.leading);
        let label = Some(flow.part(Role::Label));
        let name = flow.lettering.legible(name);
        flow.line(label, (MARGIN, flow.y + face.size), face.quiet(), &name);
        let body = Some(flow.part(Role::Body));
        flow.paragraph(body, MARGIN + 118.0, WIDTH - MARGIN, face, value, 0.0);
        flow.y += 0.5;
    }
    flow.within = within;
    flow.y += 4.0;
}

/// Settings in two columns, as they are many and short.
fn settings(rows: &[(String, String)], flow: &mut Flow) {
    let half = rows.len().div_ceil(2);
    let pair = |i: usize| rows.get(i).map_or_else(Default::default, |(a, b)| [a.clone(), b.clone()]);
    let rows: Vec<Vec<String>> = (0..half).map(|i| [pair(i), pair(i + half)].concat()).collect();
    let columns: Vec<Column> = ["Setting", "Value", "Setting", "Value"].map(words).into();
    table("", &columns, &rows, flow);
}

/// A picture, no larger than at its own size, and its caption on the same sheet.
fn figure(picture: &Picture, caption: &str, flow: &mut Flow) {
    let size = (picture.high - picture.low) * picture.scale;
    let tallest = (BOTTOM - TOP) * TALLEST;
    let scale = POINT.min(INSIDE / size.x).min(tallest / size.y);
    if !(scale.is_finite() && scale > 0.0) {
        return;
    }
    let tall = size.y * scale;
    let face = Face::plain(SMALL).quiet();
    let lines = flow.lettering.wrap(&flow.lettering.legible(caption), INSIDE / face.size).len();
    flow.room(tall + 4.0 + lines as f64 * face.leading);
    let at = (MARGIN + (INSIDE - size.x * scale) / 2.0, flow.y);
    let owner = flow.part(Role::Figure(format!("{}. {}", picture.title, picture.description)));
    flow.put(Op::Picture { owner, at, scale, picture: Box::new(picture.clone()) });
    flow.y += tall + 4.0;
    let part = Some(flow.part(Role::Caption));
    flow.paragraph(part, MARGIN, WIDTH - MARGIN, face, caption, 0.0);
    flow.y += 5.0;
}

fn signatures(roles: &[&str], flow: &mut Flow) {
    const FIELDS: [&str; 3] = ["Name", "Signature", "Date"];
    const STEP: f64 = 30.0;
    flow.room(20.0 + STEP * FIELDS.len() as f64);
    let wide = (INSIDE - 30.0) / 2.0;
    let top = flow.y;
    for (i, role) in roles.iter().enumerate() {
        let left = MARGIN + (wide + 30.0) * i as f64;
        let part = Some(flow.part(Role::Paragraph));
        flow.line(part, (left, top + TEXT), Face::plain(TEXT).bold(), role);
        for (k, field) in FIELDS.iter().enumerate() {
            let y = top + 8.0 + STEP * (k as f64 + 1.0);
            flow.put(Op::Line {
                from: (left, y),
                to: (left + wide, y),
                width: 0.7,
                colour: if k == 1 { INK } else { QUIET },
                dashed: false,
            });
            let part = Some(flow.part(Role::Paragraph));
            flow.line(part, (left, y - 2.5), Face::plain(7.0).quiet(), field);
        }
    }
    flow.y = top + 14.0 + STEP * FIELDS.len() as f64;
}
