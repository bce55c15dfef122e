//! Whether marks can be put into a drawing, and whether they are sound themselves.

use crate::refusal::Refusal;
use crate::tags::APPLICATION;
use crate::tags::facts::{LONGEST_STRING, OWN_KEYS, strings};
use crate::tags::marks::{Marks, Shape};
use crate::tags::outline::{Outline, fold};
use crate::tags::plane::Frame;

/// Most bytes of extended data on one record, of the 16 383 that the format allows; the rest is for what is added here.
const MOST_EXTENDED: usize = 12_000;

/// Refuses a drawing that is too old, is marked already, or has names of its own that the marks need.
pub(super) fn drawing(outline: &Outline, marks: &Marks) -> Result<(), Refusal> {
    if outline.rank < 1009 {
        let version = outline.version.as_deref().unwrap_or_default();
        return Err(Refusal::new(
            "old-version",
            format!(
                "the drawing is of version {version}, which cannot hold extended data, so marks could not be taken out again"
            ),
            "Save the drawing as R12 DXF or later; it can be checked as it is",
        ));
    }
    if outline.marks.is_some() {
        return Err(Refusal::new(
            "already-marked",
            "the drawing carries marks of ours already",
            "Take them out first",
        ));
    }
    for layer in &marks.layers {
        if let Some(found) = outline.layer(&layer.name) {
            let mut refusal = Refusal::new(
                "layer-taken",
                format!("the drawing has a layer {} of its own, which is not one of our marks", found.name),
                "Choose another prefix for the marks, or rename that layer",
            )
            .at_handle(found.handle.clone())
            .on_layer(found.name.clone());
            refusal.line = found.line;
            return Err(refusal);
        }
    }
    for line_type in &marks.line_types {
        let name = fold(&line_type.name);
        let table = outline.tables.iter().filter(|table| table.name == "LTYPE");
        let mut records = table.flat_map(|table| &table.records);
        if let Some(found) = records.find(|record| fold(&record.layer) == name) {
            let mut refusal = Refusal::new(
                "line-type-taken",
                format!("the drawing has a line type {} of its own", found.layer),
                "Choose another prefix for the marks, or rename that line type",
            )
            .at_handle(found.handle.clone());
            refusal.line = found.line;
            return Err(refusal);
        }
    }
    Ok(())
}

/// Refuses marks that cannot be written; gives the frame of their plane.
pub(super) fn marks(outline: &Outline, marks: &Marks) -> Result<Frame, Refusal> {
    let bad = |what: String| {
        Refusal::new("marks", what, "Choose another prefix, or report this as a fault of the program")
    };
    if marks.application != APPLICATION {
        return Err(bad(format!(
            "marks are kept under the application {APPLICATION}, not {}",
            marks.application
        )));
    }
    let longest = if outline.rank < 1015 { 31 } else { 255 };
    let mut names = Vec::new();
    for name in marks.layers.iter().map(|l| &l.name).chain(marks.line_types.iter().map(|l| &l.name)) {
        let plain = |b: u8| b.is_ascii_uppercase() || b.is_ascii_digit() || b"_-$".contains(&b);
        if name.is_empty() || name.len() > longest || !name.bytes().all(plain) {
            return Err(bad(format!(
                "\u{201c}{name}\u{201d} is no name for a layer or line type: A to Z, 0 to 9, _ - $, at most {longest} characters"
            )));
        }
    }
    for layer in &marks.layers {
        if names.contains(&layer.name.as_str()) {
            return Err(bad(format!("the layer {} is asked for twice", layer.name)));
        }
        names.push(&layer.name);
    }
    let line_types = marks.line_types.len();
    let known = |index: Option<usize>| index.is_none_or(|index| index < line_types);
    for mark in &marks.marks {
        if mark.layer >= marks.layers.len() || !known(mark.line_type) {
            return Err(bad(format!("the mark {} names a layer or line type that is not there", mark.role)));
        }
        let ascii = |b: u8| (b' '..=b'~').contains(&b) && b != b'^' && b != b'\\';
        if mark.role.is_empty() || mark.role.len() > LONGEST_STRING || !mark.role.bytes().all(ascii) {
            return Err(bad(format!("\u{201c}{}\u{201d} is no role of a mark", mark.role)));
        }
        if !finite(&mark.shape) || !mark.width.is_none_or(|w| w.is_finite() && w >= 0.0) {
            return Err(bad(format!("the mark {} has a coordinate that is no number", mark.role)));
        }
    }
    if !marks.layers.iter().all(|layer| known(layer.line_type)) {
        return Err(bad("a layer names a line type that is not there".to_owned()));
    }
    if !marks.line_types.iter().flat_map(|l| &l.pattern).all(|x| x.is_finite()) {
        return Err(bad("a line type has a length that is no number".to_owned()));
    }
    let mut size = 0;
    for (key, value) in &marks.facts {
        let plain = |b: u8| b.is_ascii_graphic() && b != b'^' && b != b'\\';
        if key.is_empty()
            || key.len() > 31
            || key.starts_with('+')
            || OWN_KEYS.contains(&key.as_str())
            || !key.bytes().all(plain)
        {
            return Err(bad(format!("\u{201c}{key}\u{201d} is no key of a fact")));
        }
        size += strings(key, value).iter().map(|s| s.len() + 16).sum::<usize>();
    }
    if size > MOST_EXTENDED {
        return Err(bad(format!(
            "the facts to be kept with the marks take {size} bytes, more than {MOST_EXTENDED}"
        )));
    }
    Frame::new(marks.plane)
        .ok_or_else(|| bad("the directions of the plane of the marks are not square unit vectors".to_owned()))
}

fn finite(shape: &Shape) -> bool {
    let ok = |p: &crate::geometry::Point| p.x.is_finite() && p.y.is_finite();
    match shape {
        Shape::Line(a, b) => ok(a) && ok(b),
        Shape::Polyline { points, .. } => {
            !points.is_empty() && points.iter().all(|(p, bulge)| ok(p) && bulge.is_finite())
        }
        Shape::Circle(centre, radius) => ok(centre) && radius.is_finite(),
        Shape::Triangle(corners) => corners.iter().all(ok),
        Shape::Text { at, height, angle, .. } => ok(at) && height.is_finite() && angle.is_finite(),
    }
}
