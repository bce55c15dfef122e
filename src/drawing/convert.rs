//! Typed entities of the `dxf` crate to curves, points and texts in the plane that is looked at.

use std::f64::consts::TAU;

use dxf::entities::{Entity, EntityType};
use dxf::enums::{
    AttachmentPoint, HorizontalTextJustification as Across, VerticalTextJustification as Upright,
};

use super::entity::{Attribute, Curve, Extended, PointLike, Source, Text};
use super::lay::{self, Laid};
use super::nurbs::Nurbs;
use super::ocs::Frame;
use super::{read, text};
use crate::geometry::{Affine, Point, Segment, Vec2};
use crate::refusal::Refusal;
use crate::tags::{self, Decoder, Record};
use crate::tolerance;

/// Where a record stands, with its layer and handle as the file spells them.
pub fn source(record: &Record) -> Source {
    Source {
        handle: record.handle.clone(),
        kind: record.kind.clone(),
        layer: record.layer.clone(),
        line: record.line,
        path: record.placement.as_ref().map_or_else(Vec::new, |p| p.path.clone()),
    }
}

/// How a record lies in what it is read for.
pub(super) fn placement(record: &Record) -> Affine {
    record.placement.as_ref().map_or(Affine::IDENTITY, |p| p.map)
}

/// The curve that a record draws; `None` when it is none (a mesh, a point).
///
/// # Errors
/// When it cannot be read or does not lie flat in the plane that is looked at.
pub fn curve(record: &Record, decoder: &Decoder) -> Result<Option<Curve>, Refusal> {
    let entity = read::entity(record, decoder)?;
    let source = source(record);
    let place = placement(record);
    let (laid, closed) = match &entity.specific {
        EntityType::Line(line) => {
            (lay::chain(&source, &[place.point(xyz(&line.p1)), place.point(xyz(&line.p2))])?, false)
        }
        EntityType::Arc(arc) => {
            let map = place.after(&frame(&source, &arc.normal)?.map());
            let sweep = (arc.end_angle - arc.start_angle).rem_euclid(360.0);
            let closed = sweep <= 0.0;
            let sweep = if closed { 360.0 } else { sweep };
            let piece = circle(&source, &arc.center, arc.radius, arc.start_angle, sweep)?;
            (lay::flat(&source, &map, arc.center.z, &[piece])?, closed)
        }
        EntityType::Circle(round) => {
            let map = place.after(&frame(&source, &round.normal)?.map());
            let piece = circle(&source, &round.center, round.radius, 0.0, 360.0)?;
            (lay::flat(&source, &map, round.center.z, &[piece])?, true)
        }
        EntityType::Ellipse(ellipse) => {
            let sweep = (ellipse.end_parameter - ellipse.start_parameter).rem_euclid(TAU);
            let closed = sweep <= tolerance::SAME_ANGLE || TAU - sweep <= tolerance::SAME_ANGLE;
            let map = place.after(&unit_circle(&source, ellipse)?);
            let arc = Segment::Arc {
                centre: Point::ORIGIN,
                radius: 1.0,
                start_angle: ellipse.start_parameter,
                sweep: if closed { TAU } else { sweep },
            };
            (lay::flat(&source, &map, 0.0, &[arc])?, closed)
        }
        EntityType::Spline(spline) => {
            let nurbs = Nurbs::new(&source, spline, &place)?;
            (nurbs.laid(&source)?, nurbs.closes())
        }
        EntityType::LwPolyline(poly) => {
            let map = place.after(&frame(&source, &poly.extrusion_direction)?.map());
            let vertices: Vec<(Point, f64)> =
                poly.vertices.iter().map(|v| (Point::new(v.x, v.y), v.bulge)).collect();
            let pieces = bulged(&vertices, poly.is_closed());
            (lay::flat(&source, &map, entity.common.elevation, &pieces)?, poly.is_closed())
        }
        EntityType::Polyline(poly) => {
            if poly.is_3d_polygon_mesh() || poly.is_polyface_mesh() {
                return Ok(None);
            }
            // Control points of a fitted spline are only its frame.
            let vertices: Vec<_> = poly.vertices().filter(|v| !v.is_spline_frame_control_point()).collect();
            if poly.is_3d_polyline() {
                let mut points: Vec<[f64; 3]> =
                    vertices.iter().map(|v| place.point(xyz(&v.location))).collect();
                if poly.is_closed() && points.len() > 1 {
                    points.extend(points.first().copied());
                }
                (lay::chain(&source, &points)?, poly.is_closed())
            } else {
                let places: Vec<(Point, f64)> =
                    vertices.iter().map(|v| (flat(&v.location), v.bulge)).collect();
                let map = place.after(&frame(&source, &poly.normal)?.map());
                let pieces = bulged(&places, poly.is_closed());
                (lay::flat(&source, &map, poly.location.z, &pieces)?, poly.is_closed())
            }
        }
        EntityType::Leader(leader) => {
            let points: Vec<[f64; 3]> = leader.vertices.iter().map(|p| place.point(xyz(p))).collect();
            (lay::chain(&source, &points)?, false)
        }
        EntityType::Solid(s) => {
            let corners = [&s.first_corner, &s.second_corner, &s.third_corner, &s.fourth_corner];
            filled(&source, &place, &s.extrusion_direction, corners, record.tags.first(13).is_some())?
        }
        EntityType::Trace(t) => {
            let corners = [&t.first_corner, &t.second_corner, &t.third_corner, &t.fourth_corner];
            filled(&source, &place, &t.extrusion_direction, corners, record.tags.first(13).is_some())?
        }
        _ => return Ok(None),
    };
    let Laid { pieces, z, fitted } = laid;
    if pieces.iter().any(|p| !p.length().is_finite()) {
        return Err(source.refuse(
            "entity-number",
            format!("the {} is bent beyond what can be computed", source.kind),
            "Redraw the entity",
        ));
    }
    Ok(Some(Curve { source, pieces, closed, z, fitted }))
}

/// The outline of a filled area of three or four corners, which the format gives crosswise.
fn filled(
    source: &Source,
    place: &Affine,
    normal: &dxf::Vector,
    [a, b, c, d]: [&dxf::Point; 4],
    four: bool,
) -> Result<(Laid, bool), Refusal> {
    let mut corners: Vec<Point> =
        if four { vec![flat(a), flat(b), flat(d), flat(c)] } else { vec![flat(a), flat(b), flat(c)] };
    corners.dedup();
    if corners.first() == corners.last() {
        corners.pop();
    }
    let map = place.after(&frame(source, normal)?.map());
    let vertices: Vec<(Point, f64)> = corners.into_iter().map(|p| (p, 0.0)).collect();
    Ok((lay::flat(source, &map, a.z, &bulged(&vertices, true))?, true))
}

/// Some points of the curve that a record draws, in space, enough of them to tell its plane; none for what is no curve.
///
/// # Errors
/// When it cannot be read.
pub fn places(record: &Record, decoder: &Decoder) -> Result<Vec<[f64; 3]>, Refusal> {
    let entity = read::entity(record, decoder)?;
    let source = source(record);
    let place = placement(record);
    let round = |map: &Affine, centre: &dxf::Point, radius: f64, start: f64, sweep: f64| -> Vec<[f64; 3]> {
        let at = |part: f64| {
            let angle = start + sweep * part;
            map.point([centre.x + radius * angle.cos(), centre.y + radius * angle.sin(), centre.z])
        };
        vec![at(0.0), at(0.5), at(1.0)]
    };
    Ok(match &entity.specific {
        EntityType::Line(line) => vec![place.point(xyz(&line.p1)), place.point(xyz(&line.p2))],
        EntityType::Arc(arc) => {
            let map = place.after(&frame(&source, &arc.normal)?.map());
            let sweep = (arc.end_angle - arc.start_angle).rem_euclid(360.0).to_radians();
            round(&map, &arc.center, arc.radius, arc.start_angle.to_radians(), sweep)
        }
        EntityType::Ellipse(ellipse) => {
            let map = place.after(&unit_circle(&source, ellipse)?);
            let sweep = ellipse.end_parameter - ellipse.start_parameter;
            round(&map, &dxf::Point::origin(), 1.0, ellipse.start_parameter, sweep)
        }
        EntityType::Spline(spline) => spline.control_points.iter().map(|p| place.point(xyz(p))).collect(),
        EntityType::LwPolyline(poly) => {
            let map = place.after(&frame(&source, &poly.extrusion_direction)?.map());
            poly.vertices.iter().map(|v| map.point([v.x, v.y, entity.common.elevation])).collect()
        }
        EntityType::Polyline(poly) => {
            let map =
                if poly.is_3d_polyline() { place } else { place.after(&frame(&source, &poly.normal)?.map()) };
            let height = |v: &dxf::entities::Vertex| {
                if poly.is_3d_polyline() { v.location.z } else { poly.location.z }
            };
            let vertices = poly.vertices().filter(|v| !v.is_spline_frame_control_point());
            vertices.map(|v| map.point([v.location.x, v.location.y, height(v)])).collect()
        }
        _ => Vec::new(),
    })
}

/// The map that makes the ellipse of a circle of radius 1 about the origin.
fn unit_circle(source: &Source, ellipse: &dxf::entities::Ellipse) -> Result<Affine, Refusal> {
    let major = [ellipse.major_axis.x, ellipse.major_axis.y, ellipse.major_axis.z];
    // Its own axes only for the direction of the normal; the major axis is given in the drawing's.
    let normal = frame(source, &ellipse.normal)?.map().vector([0.0, 0.0, 1.0]);
    let minor = cross(normal, major).map(|c| c * ellipse.minor_axis_ratio);
    Ok(Affine { offset: xyz(&ellipse.center), ..Affine::of_columns(major, minor, normal) })
}

fn cross(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
}

/// The point that a record stands for; `None` when it stands for none.
///
/// # Errors
/// As [`curve`].
pub fn point(record: &Record, decoder: &Decoder) -> Result<Option<PointLike>, Refusal> {
    let entity = read::entity(record, decoder)?;
    let source = source(record);
    let place = placement(record);
    let mut attributes = Vec::new();
    let at = match &entity.specific {
        EntityType::ModelPoint(point) => place.point(xyz(&point.location)),
        EntityType::Circle(circle) => {
            place.point(frame(&source, &circle.normal)?.map().point(xyz(&circle.center)))
        }
        EntityType::Insert(insert) => {
            attributes.extend(insert.attributes().map(|a| Attribute {
                tag: a.attribute_tag.trim().to_owned(),
                value: text::plain_line(&a.value).trim().to_owned(),
            }));
            place.point(frame(&source, &insert.extrusion_direction)?.map().point(xyz(&insert.location)))
        }
        _ => return Ok(None),
    };
    let extended = extended(record, decoder);
    Ok(Some(PointLike { source, at: Point::new(at[0], at[1]), z: at[2], attributes, extended }))
}

/// Texts and numbers in the extended data of a record, in their order; those of our own marks are not the drawing's.
pub fn extended(record: &Record, decoder: &Decoder) -> Vec<Extended> {
    let mut application = String::new();
    let mut found = Vec::new();
    for tag in record.tags.iter() {
        match tag.code {
            1001 => application = decoder.text(tag.trimmed()),
            1000 | 1040 | 1070 | 1071 if !application.eq_ignore_ascii_case(tags::APPLICATION) => {
                found.push(Extended {
                    application: application.clone(),
                    code: tag.code,
                    value: decoder.text(tag.trimmed()),
                });
            }
            _ => {}
        }
    }
    found
}

/// The text of a record; `None` when it is none or an empty one.
///
/// # Errors
/// As [`curve`].
pub fn text(record: &Record, decoder: &Decoder) -> Result<Option<Text>, Refusal> {
    let entity = read::entity(record, decoder)?;
    let text = match &entity.specific {
        EntityType::Text(_) => line_text(&entity, record)?,
        EntityType::MText(_) => paragraph(&entity, record)?,
        _ => return Ok(None),
    };
    Ok((!text.text.trim().is_empty()).then_some(text))
}

fn line_text(entity: &Entity, record: &Record) -> Result<Text, Refusal> {
    let source = source(record);
    let EntityType::Text(t) = &entity.specific else {
        return Err(source.refuse("entity", "it is no text", "Redraw the entity"));
    };
    let map = placement(record).after(&frame(&source, &t.normal)?.map());
    let says = text::plain_line(&t.value);
    let height = t.text_height.abs();
    let factor = if t.relative_x_scale_factor > 0.0 { t.relative_x_scale_factor } else { 1.0 };
    let width = letters(&says) * height * factor;
    let aligned = record.tags.first(11).is_some()
        && (t.horizontal_text_justification != Across::Left
            || t.vertical_text_justification != Upright::Baseline);
    let place = if aligned { &t.second_alignment_point } else { &t.location };
    let at = map.point(xyz(place));
    let across = match t.horizontal_text_justification {
        _ if !aligned => (0.0, width),
        Across::Left => (0.0, width),
        Across::Center | Across::Middle => (width / 2.0, width / 2.0),
        Across::Right => (width, 0.0),
        // Fitted between its two points; the second one is the anchor.
        Across::Aligned | Across::Fit => ((flat(&t.second_alignment_point) - flat(&t.location)).hypot(), 0.0),
    };
    let upright = match (aligned, t.horizontal_text_justification, t.vertical_text_justification) {
        (true, Across::Middle, _) | (true, _, Upright::Middle) => (height / 2.0, height / 2.0),
        (true, _, Upright::Top) => (height, 0.0),
        _ => (0.0, height),
    };
    let angle = match t.horizontal_text_justification {
        Across::Aligned | Across::Fit if aligned => {
            (flat(&t.second_alignment_point) - flat(&t.location)).atan2()
        }
        _ => t.rotation.to_radians(),
    };
    let laid =
        Writing::new(&source, &map, [angle.cos(), angle.sin(), 0.0], [-angle.sin(), angle.cos(), 0.0])?;
    Ok(laid.text(source, says, Point::new(at[0], at[1]), height, across, upright))
}

fn paragraph(entity: &Entity, record: &Record) -> Result<Text, Refusal> {
    let source = source(record);
    let EntityType::MText(t) = &entity.specific else {
        return Err(source.refuse("entity", "it is no text", "Redraw the entity"));
    };
    let raw = t.extended_text.concat() + &t.text;
    let says = text::plain_paragraph(&raw);
    let height = t.initial_text_height.abs();
    let lines = says.lines().count().max(1);
    let longest = says.lines().map(letters).fold(0.0, f64::max) * height;
    // Long lines are broken at the width of the paragraph, where one is given.
    let room = t.reference_rectangle_width;
    let wraps = room > height && longest > room && record.tags.first(41).is_some();
    let width = if wraps { room } else { longest };
    let rows = if wraps { lines as f64 * (longest / room).ceil() } else { lines as f64 };
    let tall = height * (1.0 + (rows - 1.0) * tolerance::LINE_PITCH);
    use AttachmentPoint as A;
    let across = match t.attachment_point {
        A::TopLeft | A::MiddleLeft | A::BottomLeft => (0.0, width),
        A::TopCenter | A::MiddleCenter | A::BottomCenter => (width / 2.0, width / 2.0),
        A::TopRight | A::MiddleRight | A::BottomRight => (width, 0.0),
    };
    let upright = match t.attachment_point {
        A::TopLeft | A::TopCenter | A::TopRight => (tall, 0.0),
        A::MiddleLeft | A::MiddleCenter | A::MiddleRight => (tall / 2.0, tall / 2.0),
        A::BottomLeft | A::BottomCenter | A::BottomRight => (0.0, tall),
    };
    // The place of a paragraph is given in drawing coordinates, unlike that of a text; so is its direction, while an angle
    // is measured in its own plane.
    let own = frame(&source, &t.extrusion_direction)?.map();
    let place = placement(record);
    let direction = [t.x_axis_direction.x, t.x_axis_direction.y, t.x_axis_direction.z];
    let length = direction.iter().map(|c| c * c).sum::<f64>().sqrt();
    let along = if record.tags.first(11).is_some() && length > 0.0 && t.rotation_angle.abs() <= 0.0 {
        direction.map(|c| c / length)
    } else {
        let angle = t.rotation_angle.to_radians();
        own.vector([angle.cos(), angle.sin(), 0.0])
    };
    let up = cross(own.vector([0.0, 0.0, 1.0]), along);
    let laid = Writing::new(&source, &place, along, up)?;
    let at = place.point(xyz(&t.insertion_point));
    Ok(laid.text(source, says, Point::new(at[0], at[1]), height, across, upright))
}

/// How the letters of a text lie in the plane that is looked at.
struct Writing {
    along: Vec2,
    /// By how much letters are wider, and higher.
    stretch: [f64; 2],
    /// Seen from behind, up lies on the other side of the direction of writing.
    behind: bool,
}

impl Writing {
    fn new(source: &Source, map: &Affine, along: [f64; 3], up: [f64; 3]) -> Result<Self, Refusal> {
        let (a, u) = (map.vector(along), map.vector(up));
        let (flat_a, flat_u) = (Vec2::new(a[0], a[1]), Vec2::new(u[0], u[1]));
        let wide = flat_a.hypot();
        let area = flat_a.cross(flat_u);
        let tilt = lay::STEEPEST * wide.max(flat_u.hypot());
        if a[2].abs() > tilt || u[2].abs() > tilt || area == 0.0 || !area.is_finite() {
            return Err(lay::not_flat(source));
        }
        let along = if wide.to_bits() == 1.0f64.to_bits() { flat_a } else { flat_a / wide };
        Ok(Self { along, stretch: [wide, area.abs() / wide], behind: area < 0.0 })
    }

    fn text(
        &self,
        source: Source,
        text: String,
        anchor: Point,
        height: f64,
        across: (f64, f64),
        upright: (f64, f64),
    ) -> Text {
        let [wide, high] = self.stretch;
        let upright = if self.behind { (upright.1, upright.0) } else { upright };
        Text {
            source,
            text,
            anchor,
            height: height * high,
            along: self.along,
            across: (across.0 * wide, across.1 * wide),
            upright: (upright.0 * high, upright.1 * high),
        }
    }
}

/// Letters of a line, each in units of the height.
fn letters(line: &str) -> f64 {
    line.chars().count() as f64 * tolerance::LETTER_WIDTH
}

fn flat(p: &dxf::Point) -> Point {
    Point::new(p.x, p.y)
}

fn xyz(p: &dxf::Point) -> [f64; 3] {
    [p.x, p.y, p.z]
}

/// The entity's own axes.
fn frame(source: &Source, normal: &dxf::Vector) -> Result<Frame, Refusal> {
    Frame::of_normal([normal.x, normal.y, normal.z]).ok_or_else(|| {
        source.refuse(
            "entity-number",
            format!("the normal of the {} has no length", source.kind),
            "Redraw the entity",
        )
    })
}

/// A circular piece, angles in degrees.
fn circle(
    source: &Source,
    centre: &dxf::Point,
    radius: f64,
    start: f64,
    sweep: f64,
) -> Result<Segment, Refusal> {
    if radius <= 0.0 {
        return Err(source.refuse(
            "entity-number",
            format!("the {} has the radius {radius}", source.kind),
            "Redraw the entity",
        ));
    }
    Ok(Segment::Arc {
        centre: flat(centre),
        radius,
        start_angle: start.to_radians(),
        sweep: sweep.to_radians(),
    })
}

/// Pieces between the vertices of a polyline, each with the bulge of its first vertex.
fn bulged(vertices: &[(Point, f64)], closed: bool) -> Vec<Segment> {
    let mut pieces: Vec<Segment> = vertices.windows(2).map(|w| bend(w[0].0, w[1].0, w[0].1)).collect();
    if closed && let [first, .., last] = vertices {
        pieces.push(bend(last.0, first.0, last.1));
    }
    pieces
}

fn bend(start: Point, end: Point, bulge: f64) -> Segment {
    if (end - start).hypot() > 0.0 { Segment::bulge(start, end, bulge) } else { Segment::line(start, end) }
}
