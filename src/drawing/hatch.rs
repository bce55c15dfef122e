//! Boundaries of a HATCH, decoded here because the `dxf` crate reads none.
//!
//! A boundary is a set of paths. A path is a polyline with bulges, or a chain of edges: lines, arcs, arcs of ellipses and
//! splines (group codes after the DXF reference, "HATCH", "Boundary path data"). Angles of clockwise arcs are stored
//! mirrored. Whether the angles of an ellipse are angles or parameters is written in two ways; the one counts whose ends
//! meet the neighbouring edges.

use std::f64::consts::TAU;

use super::entity::{Curve, Source};
use super::lay::{self, Laid};
use super::nurbs::Nurbs;
use super::ocs::Frame;
use super::outlines::{Outline, Rule};
use crate::geometry::{Affine, Point, Segment, Vec2};
use crate::refusal::Refusal;
use crate::tags::{Record, Tag};
use crate::tolerance;

/// Bits of a path's kind.
const POLYLINE: i64 = 2;
const TEXT_BOX: i64 = 8;

/// An edge in the hatch's own axes.
enum Edge {
    Piece(Segment),
    Ellipse { centre: Point, major: Vec2, ratio: f64, from: f64, to: f64, ccw: bool },
    Spline(Box<dxf::entities::Spline>),
}

/// A path as it is stored.
struct Stored {
    edges: Vec<Edge>,
    text_box: bool,
}

/// The outline that a HATCH fills, through the map by which its record is placed.
///
/// # Errors
/// When a number of it cannot be read or is missing, or it does not lie flat in the plane that is looked at.
pub fn outline(record: &Record, source: Source, place: &Affine) -> Result<Outline, Refusal> {
    let mut reader = Reader { record, tags: record.tags.own().collect(), at: 0 };
    let number = |code: i32| record.tags.first(code).and_then(|t| t.real());
    let normal = [210, 220, 230].map(|c| number(c).unwrap_or(if c == 230 { 1.0 } else { 0.0 }));
    let Some(frame) = Frame::of_normal(normal) else {
        return Err(source.refuse("entity-number", "the normal of the HATCH has no length", "Redraw it"));
    };
    let map = place.after(&frame.map());
    // The first point of the record is its height over its own plane.
    let height = number(30).unwrap_or(0.0);
    reader.seek(91)?;
    let count = reader.count(91)?;
    let mut loops = Vec::new();
    let mut boxes = 0;
    let (mut z, mut fitted) = (0.0, false);
    for _ in 0..count {
        let stored = reader.path()?;
        if stored.text_box {
            boxes += 1;
            continue;
        }
        let laid = lay_path(&source, &map, height, &stored.edges)?;
        (z, fitted) = (laid.z, fitted | laid.fitted);
        if !laid.pieces.is_empty() {
            let (z, fitted) = (laid.z, laid.fitted);
            loops.push(Curve { source: source.clone(), pieces: laid.pieces, closed: true, z, fitted });
        }
    }
    let style = reader.rest(75).unwrap_or(0);
    let rule = match style {
        1 => Rule::Outermost,
        2 => Rule::Whole,
        _ => Rule::EvenOdd,
    };
    Ok(Outline { source, loops, rule, z, fitted, text_boxes: boxes })
}

struct Reader<'r> {
    record: &'r Record,
    tags: Vec<Tag<'r>>,
    at: usize,
}

impl Reader<'_> {
    fn fault(&self, what: &str, line: Option<u64>) -> Refusal {
        let mut refusal = Refusal::new(
            "hatch",
            format!("the boundary of the HATCH cannot be read: {what}"),
            "Let the CAD program make the hatch again, or draw its outline as a closed polyline",
        );
        refusal.line = line;
        self.record.refuse(refusal)
    }

    /// Goes to the first tag of this code.
    fn seek(&mut self, code: i32) -> Result<(), Refusal> {
        match self.tags[self.at..].iter().position(|t| t.code == code) {
            Some(i) => {
                self.at += i;
                Ok(())
            }
            None => Err(self.fault(&format!("group {code} is missing"), None)),
        }
    }

    fn here(&self) -> Option<Tag<'_>> {
        self.tags.get(self.at).copied()
    }

    /// The next tag, which must be of this code.
    fn real(&mut self, code: i32) -> Result<f64, Refusal> {
        let Some(tag) = self.here() else {
            return Err(self.fault(&format!("it ends before group {code}"), None));
        };
        let line = tag.line;
        if tag.code != code {
            let found = tag.code;
            return Err(self.fault(&format!("group {found} stands where {code} belongs"), line));
        }
        let value = tag.real().filter(|v| v.abs() <= tolerance::GREATEST_NUMBER);
        self.at += 1;
        value.ok_or_else(|| self.fault(&format!("group {code} is no number that can be used"), line))
    }

    fn int(&mut self, code: i32) -> Result<i64, Refusal> {
        let line = self.here().and_then(|t| t.line);
        let value = self.real(code)?;
        if value.fract().abs() > 0.0 {
            return Err(self.fault(&format!("group {code} is no whole number"), line));
        }
        #[allow(clippy::cast_possible_truncation)] // Far inside its range: real() has bounded it.
        Ok(value as i64)
    }

    /// A number of things that follow: no more than there are tags left.
    fn count(&mut self, code: i32) -> Result<usize, Refusal> {
        let line = self.here().and_then(|t| t.line);
        let value = self.int(code)?;
        usize::try_from(value)
            .ok()
            .filter(|n| *n <= self.tags.len() - self.at)
            .ok_or_else(|| self.fault(&format!("group {code} counts {value}, more than follow"), line))
    }

    /// The next tag if it is of this code.
    fn maybe(&mut self, code: i32) -> Result<Option<f64>, Refusal> {
        match self.here() {
            Some(tag) if tag.code == code => self.real(code).map(Some),
            _ => Ok(None),
        }
    }

    fn point(&mut self, code: i32) -> Result<Point, Refusal> {
        Ok(Point::new(self.real(code)?, self.real(code + 10)?))
    }

    /// The value of a later tag of this code.
    fn rest(&self, code: i32) -> Option<i64> {
        self.tags[self.at..].iter().find(|t| t.code == code).and_then(Tag::int)
    }

    fn path(&mut self) -> Result<Stored, Refusal> {
        let kind = self.int(92)?;
        let edges = if kind & POLYLINE != 0 { self.polyline()? } else { self.edges()? };
        // The objects that the hatch was made from.
        let sources = self.count(97).unwrap_or(0);
        for _ in 0..sources {
            match self.here() {
                Some(tag) if tag.code == 330 => self.at += 1,
                _ => break,
            }
        }
        Ok(Stored { edges, text_box: kind & TEXT_BOX != 0 })
    }

    fn polyline(&mut self) -> Result<Vec<Edge>, Refusal> {
        let bulges = self.int(72)? != 0;
        let _ = self.maybe(73)?;
        let count = self.count(93)?;
        let mut vertices = Vec::with_capacity(count);
        for _ in 0..count {
            let at = self.point(10)?;
            let bulge = if bulges { self.maybe(42)?.unwrap_or(0.0) } else { 0.0 };
            vertices.push((at, bulge));
        }
        // The path of a hatch is closed, whatever its flag says.
        let next = vertices.iter().skip(1).chain(vertices.first());
        let piece = |(a, b): (&(Point, f64), &(Point, f64))| {
            ((b.0 - a.0).hypot() > 0.0).then(|| Edge::Piece(Segment::bulge(a.0, b.0, a.1)))
        };
        Ok(vertices.iter().zip(next).filter_map(piece).collect())
    }

    fn edges(&mut self) -> Result<Vec<Edge>, Refusal> {
        let count = self.count(93)?;
        let mut edges = Vec::with_capacity(count);
        for _ in 0..count {
            let line = self.here().and_then(|t| t.line);
            edges.push(match self.int(72)? {
                1 => Edge::Piece(Segment::line(self.point(10)?, self.point(11)?)),
                2 => {
                    let centre = self.point(10)?;
                    let radius = self.real(40)?;
                    let (from, to, ccw) = self.turn()?;
                    if radius <= 0.0 {
                        return Err(self.fault(&format!("an arc has the radius {radius}"), line));
                    }
                    let (start_angle, sweep) = swept(from, to, ccw);
                    Edge::Piece(Segment::Arc { centre, radius, start_angle, sweep })
                }
                3 => {
                    let (centre, end) = (self.point(10)?, self.point(11)?);
                    let ratio = self.real(40)?;
                    let (from, to, ccw) = self.turn()?;
                    let major = end.to_vec2();
                    if ratio.abs() <= 0.0 || major.hypot() <= 0.0 {
                        return Err(self.fault("an ellipse is flat", line));
                    }
                    Edge::Ellipse { centre, major, ratio, from, to, ccw }
                }
                4 => Edge::Spline(Box::new(self.spline()?)),
                other => return Err(self.fault(&format!("there is no edge of type {other}"), line)),
            });
        }
        Ok(edges)
    }

    /// Start and end in radians, and the sense.
    fn turn(&mut self) -> Result<(f64, f64, bool), Refusal> {
        let (from, to) = (self.real(50)?.to_radians(), self.real(51)?.to_radians());
        Ok((from, to, self.maybe(73)?.is_none_or(|v| v.abs() > 0.0)))
    }

    fn spline(&mut self) -> Result<dxf::entities::Spline, Refusal> {
        let line = self.here().and_then(|t| t.line);
        let degree = self.int(94)?;
        let rational = self.int(73)? != 0;
        let _ = self.int(74)?;
        let (knots, points) = (self.count(95)?, self.count(96)?);
        let mut spline = dxf::entities::Spline {
            degree_of_curve: i32::try_from(degree).map_err(|_| self.fault("a spline has no degree", line))?,
            ..Default::default()
        };
        for _ in 0..knots {
            let knot = self.real(40)?;
            spline.knot_values.push(knot);
        }
        for _ in 0..points {
            let at = self.point(10)?;
            spline.control_points.push(dxf::Point::new(at.x, at.y, 0.0));
            let weight = self.maybe(42)?;
            if rational {
                spline.weight_values.push(weight.unwrap_or(1.0));
            }
        }
        // Points that it was fitted through, and directions at its ends, come with later versions.
        if self.here().is_some_and(|t| t.code == 97) {
            let fitted = self.count(97)?;
            // Without points of that kind the count is that of the objects behind the path.
            if self.here().is_some_and(|t| t.code == 11) {
                for _ in 0..fitted {
                    self.point(11)?;
                }
            } else if fitted > 0 {
                self.at -= 1;
            }
            for code in [12, 13] {
                if self.here().is_some_and(|t| t.code == code) {
                    self.point(code)?;
                }
            }
        }
        Ok(spline)
    }
}

/// Start and swept angle; a full turn where both are one.
fn swept(from: f64, to: f64, ccw: bool) -> (f64, f64) {
    let angle = (to - from).rem_euclid(TAU);
    let angle = if angle <= tolerance::SAME_ANGLE { TAU } else { angle };
    if ccw { (from, angle) } else { (-from, -angle) }
}

fn lay_path(source: &Source, map: &Affine, height: f64, edges: &[Edge]) -> Result<Laid, Refusal> {
    let mut whole = Laid { pieces: Vec::new(), z: 0.0, fitted: false };
    for (i, edge) in edges.iter().enumerate() {
        let laid = match edge {
            Edge::Piece(piece) => lay::flat(source, map, height, &[*piece])?,
            Edge::Ellipse { centre, major, ratio, from, to, ccw } => {
                let round = unit_circle(*centre, *major, *ratio, height);
                let (from, to) = parameters(edges, i, &round, *ratio, (*from, *to, *ccw));
                let (start_angle, sweep) = swept(from, to, *ccw);
                let arc = Segment::Arc { centre: Point::ORIGIN, radius: 1.0, start_angle, sweep };
                lay::flat(source, &map.after(&round), 0.0, &[arc])?
            }
            Edge::Spline(spline) => {
                let mut spline = spline.clone();
                for point in &mut spline.control_points {
                    point.z = height;
                }
                Nurbs::new(source, &spline, map)?.laid(source)?
            }
        };
        whole.z = laid.z;
        whole.fitted |= laid.fitted;
        whole.pieces.extend(laid.pieces);
    }
    Ok(whole)
}

/// The map that makes the ellipse of a circle of radius 1 about the origin.
fn unit_circle(centre: Point, major: Vec2, ratio: f64, height: f64) -> Affine {
    let minor = Vec2::new(-major.y, major.x) * ratio;
    Affine {
        offset: [centre.x, centre.y, height],
        ..Affine::of_columns([major.x, major.y, 0.0], [minor.x, minor.y, 0.0], [0.0, 0.0, 1.0])
    }
}

/// The parameters of an arc of an ellipse: of its angles read as angles, or as parameters, whichever ends meet the ends of the
/// neighbouring edges better.
fn parameters(
    edges: &[Edge],
    i: usize,
    round: &Affine,
    ratio: f64,
    (from, to, ccw): (f64, f64, bool),
) -> (f64, f64) {
    let of_angle = |angle: f64| {
        let turns = (angle / TAU).round() * TAU;
        let rest = angle - turns;
        (rest.sin() / ratio).atan2(rest.cos()) + turns
    };
    let angles = (of_angle(from), of_angle(to));
    let n = edges.len();
    let before = end_of(edges.get((i + n - 1) % n), true);
    let after = end_of(edges.get((i + 1) % n), false);
    let at = |t: f64| {
        let t = if ccw { t } else { -t };
        let p = round.point([t.cos(), t.sin(), 0.0]);
        Point::new(p[0], p[1])
    };
    let miss = |(a, b): (f64, f64)| {
        let off = |p: Option<Point>, t: f64| p.map_or(0.0, |p| (p - at(t)).hypot());
        off(before, a) + off(after, b)
    };
    if miss((from, to)) < miss(angles) { (from, to) } else { angles }
}

/// Last (or first) point of an edge; `None` of an ellipse, whose ends are in doubt too, and of a spline.
fn end_of(edge: Option<&Edge>, last: bool) -> Option<Point> {
    match edge? {
        Edge::Piece(piece) => Some(if last { piece.end() } else { piece.start() }),
        Edge::Spline(spline) => {
            let p = if last { spline.control_points.last() } else { spline.control_points.first() }?;
            Some(Point::new(p.x, p.y))
        }
        Edge::Ellipse { .. } => None,
    }
}
