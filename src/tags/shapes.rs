//! Each shape as the entity of the drawing's version.

use crate::geometry::Point;
use crate::tags::emit::Emit;
use crate::tags::handles::Handles;
use crate::tags::marks::{Across, Along, Shape};
use crate::tags::plane::Frame;
use crate::tags::text;

/// What all new records of one drawing have in common.
pub(super) struct Dialect {
    /// Version, such as 1024.
    pub rank: u32,
    /// Texts beyond ASCII are written as UTF-8.
    pub utf8: bool,
    pub application: String,
    /// Owner of entities.
    pub model_space: Option<String>,
}

/// Writes records.
pub(super) struct Pen<'a> {
    pub dialect: &'a Dialect,
    pub handles: &'a mut Handles,
    pub emit: Emit,
}

impl Pen<'_> {
    /// The first tags of a record: type, handle, owner.
    pub fn record(&mut self, kind: &str, owner: Option<&str>) {
        let handle = self.handles.take();
        self.record_with(kind, handle.as_deref(), owner);
    }

    /// As [`Pen::record`] with a handle that was taken before.
    pub fn record_with(&mut self, kind: &str, handle: Option<&str>, owner: Option<&str>) {
        self.emit.text(0, kind);
        if let Some(handle) = handle {
            self.emit.text(5, handle);
            if let Some(owner) = owner {
                self.emit.text(330, owner);
            }
        }
    }

    /// A subclass marker, from R13 on.
    pub fn marker(&mut self, name: &str) {
        if self.dialect.rank >= 1012 {
            self.emit.text(100, name);
        }
    }

    /// Extended data: our application and strings that are ASCII already.
    pub fn extended(&mut self, strings: &[Vec<u8>]) {
        self.emit.text(1001, &self.dialect.application);
        for string in strings {
            self.emit.text(1000, string);
        }
    }
}

/// One mark with its names looked up.
pub(super) struct Entity<'a> {
    pub layer: &'a str,
    pub role: &'a str,
    pub colour: Option<u8>,
    pub line_type: Option<&'a str>,
    /// Constant width of a polyline; 0 for the layer's line weight.
    pub width: f64,
    pub frame: &'a Frame,
}

/// How many handles a shape needs at most.
pub(super) fn handles_for(shape: &Shape) -> u64 {
    match shape {
        Shape::Polyline { points, .. } => points.len() as u64 + 2,
        _ => 1,
    }
}

impl Pen<'_> {
    fn head(&mut self, kind: &str, entity: &Entity<'_>) {
        let owner = self.dialect.model_space.clone();
        let owner = owner.filter(|_| self.dialect.rank >= 1014);
        self.record(kind, owner.as_deref());
        self.marker("AcDbEntity");
        self.emit.text(8, entity.layer);
        if let Some(line_type) = entity.line_type {
            self.emit.text(6, line_type);
        }
        if let Some(colour) = entity.colour {
            self.emit.int(62, i64::from(colour));
        }
    }

    fn tail(&mut self, entity: &Entity<'_>) {
        self.extended(&[entity.role.as_bytes().to_vec()]);
    }

    /// The direction of extrusion, where it is not the z axis.
    fn extrusion(&mut self, entity: &Entity<'_>) {
        if !entity.frame.level {
            self.emit.point(210, entity.frame.normal());
        }
    }

    /// One shape.
    pub fn shape(&mut self, shape: &Shape, entity: &Entity<'_>) {
        let frame = entity.frame;
        match shape {
            Shape::Line(start, end) => {
                self.head("LINE", entity);
                self.marker("AcDbLine");
                self.emit.point(10, frame.world(*start));
                self.emit.point(11, frame.world(*end));
                self.tail(entity);
            }
            Shape::Polyline { points, closed } => self.polyline(points, *closed, entity),
            Shape::Circle(centre, radius) => {
                self.head("CIRCLE", entity);
                self.marker("AcDbCircle");
                self.emit.point(10, frame.object(*centre));
                self.emit.real(40, *radius);
                self.extrusion(entity);
                self.tail(entity);
            }
            Shape::Triangle([a, b, c]) => {
                self.head("SOLID", entity);
                self.marker("AcDbTrace");
                for (code, corner) in [(10, a), (11, b), (12, c), (13, c)] {
                    self.emit.point(code, frame.object(*corner));
                }
                self.extrusion(entity);
                self.tail(entity);
            }
            Shape::Text { at, height, text, angle, across, along } => {
                let across = match across {
                    Across::Left => 0,
                    Across::Centre => 1,
                    Across::Right => 2,
                };
                let along = match along {
                    Along::Baseline => 0,
                    Along::Middle => 2,
                    Along::Top => 3,
                };
                let degrees = frame.degrees(*angle);
                self.head("TEXT", entity);
                self.marker("AcDbText");
                self.emit.point(10, frame.object(*at));
                self.emit.real(40, *height);
                self.emit.text(1, text_value(text, self.dialect.utf8));
                if degrees > 0.0 {
                    self.emit.real(50, degrees);
                }
                if across != 0 {
                    self.emit.int(72, across);
                }
                if across != 0 || along != 0 {
                    self.emit.point(11, frame.object(*at));
                }
                self.extrusion(entity);
                self.marker("AcDbText");
                if along != 0 {
                    self.emit.int(73, along);
                }
                self.tail(entity);
            }
        }
    }

    fn polyline(&mut self, points: &[(Point, f64)], closed: bool, entity: &Entity<'_>) {
        let frame = entity.frame;
        let bulged = points.iter().any(|(_, bulge)| bulge.abs() > 0.0);
        let flag = i64::from(closed);
        if !frame.level && !bulged {
            // A polyline of three coordinates needs no extrusion, and every reader has it right.
            self.head("POLYLINE", entity);
            self.marker("AcDb3dPolyline");
            self.emit.int(66, 1);
            self.emit.point(10, [0.0; 3]);
            self.emit.int(70, flag + 8);
            self.tail(entity);
            for (point, _) in points {
                self.head("VERTEX", entity);
                self.marker("AcDbVertex");
                self.marker("AcDb3dPolylineVertex");
                self.emit.point(10, frame.world(*point));
                self.emit.int(70, 32);
                self.tail(entity);
            }
            self.head("SEQEND", entity);
            self.tail(entity);
            return;
        }
        let elevation = points.first().map_or(0.0, |(point, _)| frame.object(*point)[2]);
        if self.dialect.rank >= 1014 {
            self.head("LWPOLYLINE", entity);
            self.marker("AcDbPolyline");
            self.emit.int(90, i64::try_from(points.len()).unwrap_or(i64::MAX));
            self.emit.int(70, flag);
            self.emit.real(43, entity.width);
            if elevation.abs() > 0.0 {
                self.emit.real(38, elevation);
            }
            for (point, bulge) in points {
                let [x, y, _] = frame.object(*point);
                self.emit.real(10, x);
                self.emit.real(20, y);
                if bulge.abs() > 0.0 {
                    self.emit.real(42, *bulge);
                }
            }
            self.extrusion(entity);
            self.tail(entity);
            return;
        }
        self.head("POLYLINE", entity);
        self.marker("AcDb2dPolyline");
        self.emit.int(66, 1);
        self.emit.point(10, [0.0, 0.0, elevation]);
        self.emit.int(70, flag);
        if entity.width > 0.0 {
            self.emit.real(40, entity.width);
            self.emit.real(41, entity.width);
        }
        self.extrusion(entity);
        self.tail(entity);
        for (point, bulge) in points {
            self.head("VERTEX", entity);
            self.marker("AcDbVertex");
            self.marker("AcDb2dVertex");
            self.emit.point(10, frame.object(*point));
            if bulge.abs() > 0.0 {
                self.emit.real(42, *bulge);
            }
            self.tail(entity);
        }
        self.head("SEQEND", entity);
        self.tail(entity);
    }
}

/// The value of a TEXT: one line, with the double percent signs that start its control codes made plain ones.
fn text_value(text: &str, utf8: bool) -> Vec<u8> {
    let plain: String = text.chars().map(|c| if c.is_control() { ' ' } else { c }).collect();
    text::encode(&plain.replace("%%", "%%%%%%"), utf8).concat()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn text_values() {
        assert_eq!(text_value("a\nb", false), b"a b");
        assert_eq!(text_value("5 % of 100 %%", false), b"5 % of 100 %%%%%%");
        assert_eq!(text_value("kN·m", false), b"kN\\U+00B7m");
        assert_eq!(text_value("kN·m", true), "kN·m".as_bytes());
    }
}
