//! What was read from a drawing: curves, points and texts in the plane of the elevation, each with its source.
//!
//! Coordinates are drawing units in the drawing's own origin; x to the right, y upward.

use crate::geometry::{Point, Segment, Vec2};
use crate::refusal::Refusal;

/// Where something stands in the drawing.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Source {
    /// Handle as spelled in the drawing; `None` in drawings without handles.
    pub handle: Option<String>,
    /// Entity type, such as `LWPOLYLINE`.
    pub kind: String,
    /// Layer as spelled in the drawing, decoded.
    pub layer: String,
    /// Line of the file on which the entity begins, counted from 1; `None` in binary drawings.
    pub line: Option<u64>,
    /// Names of the blocks it stands in, outermost first; empty in model space.
    pub path: Vec<String>,
}

impl Source {
    /// A refusal that points here.
    pub fn refuse(&self, check: &str, message: impl Into<String>, remedy: impl Into<String>) -> Refusal {
        let mut refusal =
            Refusal::new(check, message, remedy).at_handle(self.handle.clone()).on_layer(self.layer.clone());
        refusal.line = self.line;
        if !self.path.is_empty() {
            refusal.message = format!("{} (in block {})", refusal.message, self.path.join(" in "));
        }
        refusal
    }

    /// The entity in words, such as `LINE 2F`.
    pub fn named(&self) -> String {
        match &self.handle {
            Some(handle) => format!("{} {handle}", self.kind),
            None => match self.line {
                Some(line) => format!("{} at line {line}", self.kind),
                None => self.kind.clone(),
            },
        }
    }
}

/// A curve: connected straight and circular pieces in the order drawn.
#[derive(Debug, Clone, PartialEq)]
pub struct Curve {
    /// The entity.
    pub source: Source,
    /// Its pieces, each beginning where the one before it ends.
    pub pieces: Vec<Segment>,
    /// Whether the entity closes on itself (a closed polyline, a circle).
    pub closed: bool,
    /// Height of its plane above the plane through the drawing's origin that it is read in.
    pub z: f64,
    /// Whether its arcs stand for a curve that is none, to [`crate::tolerance::CURVE_FIT`].
    pub fitted: bool,
}

/// A thing that stands for a point.
#[derive(Debug, Clone, PartialEq)]
pub struct PointLike {
    /// The entity.
    pub source: Source,
    /// The point: of a POINT its place, of a CIRCLE its centre, of an INSERT its insertion point.
    pub at: Point,
    /// Height above the plane through the drawing's origin that it is read in.
    pub z: f64,
    /// Attributes of an INSERT.
    pub attributes: Vec<Attribute>,
    /// Its extended data.
    pub extended: Vec<Extended>,
}

/// A text or a number of an entity's extended data.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Extended {
    /// The application that it belongs to, as spelled.
    pub application: String,
    /// Its group code: 1000 a text, 1040 a number, 1070 and 1071 a whole number.
    pub code: i32,
    /// As spelled, without blanks around it.
    pub value: String,
}

/// An attribute of a block reference.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Attribute {
    /// Its tag.
    pub tag: String,
    /// Its text, symbols put in.
    pub value: String,
}

/// A text.
#[derive(Debug, Clone, PartialEq)]
pub struct Text {
    /// The entity.
    pub source: Source,
    /// What it says, formatting taken out; lines separated by line feeds.
    pub text: String,
    /// The point by which it was placed: its alignment point where it has one, else its insertion point.
    pub anchor: Point,
    /// Height of its letters.
    pub height: f64,
    /// Unit vector along its lines.
    pub along: Vec2,
    /// Extent along its lines to the left and to the right of the anchor, estimated from its letters.
    pub across: (f64, f64),
    /// Extent downward and upward from the anchor, square to its lines.
    pub upright: (f64, f64),
}

impl Text {
    /// The corners of the rectangle that the text covers (estimated).
    pub fn corners(&self) -> [Point; 4] {
        let up = Vec2::new(-self.along.y, self.along.x);
        let corner = |along: f64, upward: f64| self.anchor + self.along * along + up * upward;
        let ((left, right), (down, top)) = (self.across, self.upright);
        [corner(-left, -down), corner(right, -down), corner(right, top), corner(-left, top)]
    }

    /// The way from the rectangle that the text covers (estimated) to a point; nothing inside.
    pub fn way_to(&self, p: Point) -> Vec2 {
        let up = Vec2::new(-self.along.y, self.along.x);
        let d = p - self.anchor;
        let outside =
            |value: f64, (below, above): (f64, f64)| (value - above).max(0.0) + (value + below).min(0.0);
        self.along * outside(d.dot(self.along), self.across) + up * outside(d.dot(up), self.upright)
    }

    /// Length of [`Text::way_to`].
    pub fn distance(&self, p: Point) -> f64 {
        self.way_to(p).hypot()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn distance_from_a_turned_text() {
        let text = Text {
            source: Source::default(),
            text: "12".into(),
            anchor: Point::new(1.0, 1.0),
            height: 1.0,
            along: Vec2::new(0.0, 1.0),
            across: (0.0, 2.0),
            upright: (0.0, 1.0),
        };
        // It covers x from 0 to 1 and y from 1 to 3.
        assert!((text.distance(Point::new(0.5, 2.0))).abs() < 1e-15);
        assert!((text.distance(Point::new(4.0, 7.0)) - 5.0).abs() < 1e-15);
        assert!((text.distance(Point::new(0.5, 0.0)) - 1.0).abs() < 1e-15);
    }
}
