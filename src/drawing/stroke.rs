//! Lines on the load layers: arrows, parts of arrows, and the extent of line loads, as they are drawn.

use super::convert;
use super::entity::{Extended, Source};
use crate::geometry::{Point, Segment};
use crate::refusal::Refusal;
use crate::tags::{Decoder, Record, Tag};

/// Kinds of entities on a load layer that are read as lines.
pub const STROKES: [&str; 6] = ["LINE", "LWPOLYLINE", "POLYLINE", "LEADER", "SOLID", "TRACE"];

/// An end of a stroke.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum End {
    /// Its first point.
    Start,
    /// Its last point.
    Finish,
}

/// A line on a load layer.
#[derive(Debug, Clone, PartialEq)]
pub struct Stroke {
    /// The entity.
    pub source: Source,
    /// Its pieces in the order drawn, drawing units; those of no length left out.
    pub pieces: Vec<Segment>,
    /// Whether it closes on itself, or is filled.
    pub closed: bool,
    /// Height of its plane above the plane through the drawing's origin that it is read in.
    pub z: f64,
    /// The end that carries an arrowhead of its own: of a LEADER its first point unless it is drawn without, of a
    /// polyline the end at which its last piece tapers to a point.
    pub head: Option<End>,
    /// Its extended data.
    pub extended: Vec<Extended>,
}

impl Stroke {
    /// Its points in the order drawn; `None` when a piece is bent.
    pub fn corners(&self) -> Option<Vec<Point>> {
        let straight = self.pieces.iter().all(|p| matches!(p, Segment::Line { .. }));
        let mut points: Vec<Point> = self.pieces.iter().map(Segment::start).collect();
        points.extend(self.pieces.last().map(Segment::end));
        straight.then_some(points)
    }
}

/// The stroke that a record draws; `None` when it draws none.
///
/// # Errors
/// When it cannot be read or does not lie flat in the plane that is looked at.
pub fn stroke(record: &Record, decoder: &Decoder) -> Result<Option<Stroke>, Refusal> {
    let Some(curve) = convert::curve(record, decoder)? else {
        return Ok(None);
    };
    let head = match record.kind.as_str() {
        // Group 71: 0 is a leader without an arrowhead.
        "LEADER" => (record.tags.first(71).and_then(|t| t.int()) != Some(0)).then_some(End::Start),
        "LWPOLYLINE" | "POLYLINE" if !curve.closed => taper(record),
        _ => None,
    };
    let pieces: Vec<Segment> = curve.pieces.into_iter().filter(|p| p.length() > 0.0).collect();
    Ok((!pieces.is_empty()).then_some(Stroke {
        source: curve.source,
        pieces,
        closed: curve.closed,
        z: curve.z,
        head,
        extended: convert::extended(record, decoder),
    }))
}

/// The end at which a polyline tapers to a point: its end piece is wide inside and has no width at its end.
fn taper(record: &Record) -> Option<End> {
    let widths = if record.kind == "LWPOLYLINE" { light_widths(record) } else { heavy_widths(record) };
    // The last point has no piece of its own.
    let pieces = widths.len().checked_sub(1)?;
    let (first, last) = (widths.first()?, widths.get(pieces.checked_sub(1)?)?);
    let starts = first[0] <= 0.0 && first[1] > 0.0;
    let finishes = last[0] > 0.0 && last[1] <= 0.0;
    match (starts, finishes) {
        (true, false) => Some(End::Start),
        (false, true) => Some(End::Finish),
        _ => None,
    }
}

/// Widths at the start and the end of the piece that follows each point of an LWPOLYLINE.
fn light_widths(record: &Record) -> Vec<[f64; 2]> {
    let mut widths: Vec<[f64; 2]> = Vec::new();
    for tag in record.tags.own() {
        match (tag.code, widths.last_mut()) {
            (10, _) => widths.push([0.0; 2]),
            (40, Some(last)) => last[0] = tag.real().unwrap_or(0.0),
            (41, Some(last)) => last[1] = tag.real().unwrap_or(0.0),
            _ => {}
        }
    }
    widths
}

/// The same of a POLYLINE, whose own widths count where a point states none.
fn heavy_widths(record: &Record) -> Vec<[f64; 2]> {
    let read = |of: &Record, code| of.tags.first(code).as_ref().and_then(Tag::real);
    let own = [read(record, 40).unwrap_or(0.0), read(record, 41).unwrap_or(0.0)];
    let points = record.children.iter().filter(|c| c.kind == "VERTEX");
    points.map(|v| [read(v, 40).unwrap_or(own[0]), read(v, 41).unwrap_or(own[1])]).collect()
}
