//! Typed entities of the `dxf` crate to curves, points and texts in the plane of the drawing.

use dxf::entities::{Entity, EntityType};
use dxf::enums::{
    AttachmentPoint, HorizontalTextJustification as Across, VerticalTextJustification as Upright,
};

use super::entity::{Attribute, Curve, PointLike, Source, Text};
use super::ocs::Frame;
use super::{read, text};
use crate::geometry::{Point, Segment, Vec2};
use crate::refusal::Refusal;
use crate::tags::{Decoder, Record};
use crate::tolerance;

/// Where a record stands, with its layer and handle as the file spells them.
pub fn source(record: &Record) -> Source {
    Source {
        handle: record.handle.clone(),
        kind: record.kind.clone(),
        layer: record.layer.clone(),
        line: record.line,
        path: Vec::new(),
    }
}

/// The curve that a record draws; `None` when it is none (a mesh, a point).
///
/// # Errors
/// When it cannot be read or does not lie flat in the x-y plane of the drawing.
pub fn curve(record: &Record, decoder: &Decoder) -> Result<Option<Curve>, Refusal> {
    let entity = read::entity(record, decoder)?;
    let source = source(record);
    let (pieces, closed, z) = match &entity.specific {
        EntityType::Line(line) => {
            let z = level(&source, [line.p1.z, line.p2.z], &flat(&line.p1), &flat(&line.p2))?;
            (vec![Segment::line(flat(&line.p1), flat(&line.p2))], false, z)
        }
        EntityType::Arc(arc) => {
            let frame = frame(&source, &arc.normal)?;
            let sweep = (arc.end_angle - arc.start_angle).rem_euclid(360.0);
            let closed = sweep <= 0.0;
            let sweep = if closed { 360.0 } else { sweep };
            let piece = circle(&source, &arc.center, arc.radius, arc.start_angle, sweep)?;
            (lay(&source, &frame, &[piece])?, closed, frame.world(xyz(&arc.center))[2])
        }
        EntityType::Circle(circle_entity) => {
            let frame = frame(&source, &circle_entity.normal)?;
            let piece = circle(&source, &circle_entity.center, circle_entity.radius, 0.0, 360.0)?;
            (lay(&source, &frame, &[piece])?, true, frame.world(xyz(&circle_entity.center))[2])
        }
        EntityType::LwPolyline(poly) => {
            let frame = frame(&source, &poly.extrusion_direction)?;
            let vertices: Vec<(Point, f64)> =
                poly.vertices.iter().map(|v| (Point::new(v.x, v.y), v.bulge)).collect();
            let pieces = lay(&source, &frame, &bulged(&vertices, poly.is_closed()))?;
            let z = frame.world([0.0, 0.0, entity.common.elevation])[2];
            (pieces, poly.is_closed(), z)
        }
        EntityType::Polyline(poly) => {
            if poly.is_3d_polygon_mesh() || poly.is_polyface_mesh() {
                return Ok(None);
            }
            // Control points of a fitted spline are only its frame.
            let vertices: Vec<_> = poly.vertices().filter(|v| !v.is_spline_frame_control_point()).collect();
            let places: Vec<(Point, f64)> = vertices.iter().map(|v| (flat(&v.location), v.bulge)).collect();
            if poly.is_3d_polyline() {
                let mut z = vertices.first().map_or(0.0, |v| v.location.z);
                for pair in vertices.windows(2) {
                    let (a, b) = (&pair[0].location, &pair[1].location);
                    z = level(&source, [a.z, b.z], &flat(a), &flat(b))?;
                }
                (bulged(&places, poly.is_closed()), poly.is_closed(), z)
            } else {
                let frame = frame(&source, &poly.normal)?;
                let pieces = lay(&source, &frame, &bulged(&places, poly.is_closed()))?;
                (pieces, poly.is_closed(), frame.world([0.0, 0.0, poly.location.z])[2])
            }
        }
        _ => return Ok(None),
    };
    if pieces.iter().any(|p| !p.length().is_finite()) {
        return Err(source.refuse(
            "entity-number",
            format!("the {} is bent beyond what can be computed", source.kind),
            "Redraw the entity",
        ));
    }
    Ok(Some(Curve { source, pieces, closed, z }))
}

/// The point that a record stands for; `None` when it stands for none.
///
/// # Errors
/// As [`curve`].
pub fn point(record: &Record, decoder: &Decoder) -> Result<Option<PointLike>, Refusal> {
    let entity = read::entity(record, decoder)?;
    let source = source(record);
    let mut attributes = Vec::new();
    let at = match &entity.specific {
        EntityType::ModelPoint(point) => xyz(&point.location),
        EntityType::Circle(circle) => frame(&source, &circle.normal)?.world(xyz(&circle.center)),
        EntityType::Insert(insert) => {
            attributes.extend(insert.attributes().map(|a| Attribute {
                tag: a.attribute_tag.trim().to_owned(),
                value: text::plain_line(&a.value).trim().to_owned(),
            }));
            frame(&source, &insert.extrusion_direction)?.world(xyz(&insert.location))
        }
        _ => return Ok(None),
    };
    Ok(Some(PointLike { source, at: Point::new(at[0], at[1]), z: at[2], attributes }))
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
    let frame = frame(&source, &t.normal)?;
    let says = text::plain_line(&t.value);
    let height = t.text_height.abs();
    let factor = if t.relative_x_scale_factor > 0.0 { t.relative_x_scale_factor } else { 1.0 };
    let width = letters(&says) * height * factor;
    let aligned = record.tags.first(11).is_some()
        && (t.horizontal_text_justification != Across::Left
            || t.vertical_text_justification != Upright::Baseline);
    let place = if aligned { &t.second_alignment_point } else { &t.location };
    let at = frame.world(xyz(place));
    let across = match t.horizontal_text_justification {
        _ if !aligned => (0.0, width),
        Across::Left => (0.0, width),
        Across::Center | Across::Middle => (width / 2.0, width / 2.0),
        Across::Right => (width, 0.0),
        // Fitted between its two points; the second one is the anchor.
        Across::Aligned | Across::Fit => ((flat(&t.second_alignment_point) - flat(&t.location)).hypot(), 0.0),
    };
    let mut upright = match (aligned, t.horizontal_text_justification, t.vertical_text_justification) {
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
    let along = direction(&source, &frame, angle)?;
    // Seen from behind, up lies on the other side of the direction of writing.
    if frame.facing() == Some(-1.0) {
        upright = (upright.1, upright.0);
    }
    Ok(Text { source, text: says, anchor: Point::new(at[0], at[1]), height, along, across, upright })
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
    // Place and direction of a paragraph are given in drawing coordinates, unlike those of a text.
    frame(&source, &t.extrusion_direction)?;
    let direction = Vec2::new(t.x_axis_direction.x, t.x_axis_direction.y);
    let along = if record.tags.first(11).is_some() && direction.hypot() > 0.0 && t.rotation_angle.abs() <= 0.0
    {
        direction.normalize()
    } else {
        Vec2::from_angle(t.rotation_angle.to_radians())
    };
    Ok(Text { source, text: says, anchor: flat(&t.insertion_point), height, along, across, upright })
}

/// Letters of a line, each in units of the height.
fn letters(line: &str) -> f64 {
    line.chars().count() as f64 * tolerance::LETTER_WIDTH
}

/// Direction of a text in the drawing.
fn direction(source: &Source, frame: &Frame, angle: f64) -> Result<Vec2, Refusal> {
    if frame.facing().is_none() {
        return Err(not_flat(source));
    }
    let d = frame.world([angle.cos(), angle.sin(), 0.0]);
    Ok(Vec2::new(d[0], d[1]).normalize())
}

fn flat(p: &dxf::Point) -> Point {
    Point::new(p.x, p.y)
}

fn xyz(p: &dxf::Point) -> [f64; 3] {
    [p.x, p.y, p.z]
}

/// The entity's own axes, when it lies flat in the drawing.
fn frame(source: &Source, normal: &dxf::Vector) -> Result<Frame, Refusal> {
    let frame = Frame::of_normal([normal.x, normal.y, normal.z]).ok_or_else(|| {
        source.refuse(
            "entity-number",
            format!("the normal of the {} has no length", source.kind),
            "Redraw the entity",
        )
    })?;
    match frame.facing() {
        Some(_) => Ok(frame),
        None => Err(not_flat(source)),
    }
}

fn not_flat(source: &Source) -> Refusal {
    source.refuse(
        "not-flat",
        format!(
            "the {} does not lie in the x-y plane of the drawing: only elevations drawn in that plane are read",
            source.kind
        ),
        "Draw the elevation flat, x to the right and y upward",
    )
}

/// Height of a straight piece above the x-y plane, which must be the same at both ends.
fn level(source: &Source, z: [f64; 2], a: &Point, b: &Point) -> Result<f64, Refusal> {
    let rise = (z[1] - z[0]).abs();
    if rise > tolerance::FLAT * (*b - *a).hypot().hypot(rise) {
        return Err(not_flat(source));
    }
    Ok(z[0])
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

fn lay(source: &Source, frame: &Frame, pieces: &[Segment]) -> Result<Vec<Segment>, Refusal> {
    pieces.iter().map(|p| frame.flat_segment(p).ok_or_else(|| not_flat(source))).collect()
}
