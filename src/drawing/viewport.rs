//! Viewports of the layouts: which part of model space each shows, and at what scale.

use super::ocs::Frame;
use crate::geometry::{Point, Vec2};
use crate::tags::Record;
use crate::tags::marks::Plane;
use crate::tolerance;

/// A window of a layout into model space, seen square onto the plane of the elevation.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Viewport {
    /// Lower left corner of what it shows, drawing units.
    pub low: Point,
    /// Upper right corner of what it shows, drawing units.
    pub high: Point,
    /// Plotted length over drawn length, paper units per drawing unit.
    pub scale: f64,
}

/// The viewport of a VIEWPORT record (R2000 on), in coordinates of the plane of the elevation; `None` for the one that stands
/// for the sheet itself, for one that is switched off, and for views that are not square onto that plane.
pub fn viewport(record: &Record, plane: &Plane) -> Option<Viewport> {
    let real = |code| record.tags.first(code).and_then(|t| t.real());
    let int = |code| record.tags.first(code).and_then(|t| t.int());
    if record.kind != "VIEWPORT" || int(69) == Some(1) || int(68) == Some(0) {
        return None;
    }
    let (width, height) = (real(40)?, real(41)?);
    let view_height = real(45)?;
    let or_nothing = |code| real(code).unwrap_or(0.0);
    // The view's own axes belong to the direction from its target to the eye as an entity's belong to its normal.
    let toward = [or_nothing(16), or_nothing(26), real(36).unwrap_or(1.0)];
    let frame = Frame::of_normal(toward)?.map();
    let near =
        |v: [f64; 3], w: [f64; 3]| v.iter().zip(w).all(|(a, b)| (a - b).abs() <= tolerance::UNIT_VECTOR);
    let square = near(frame.vector([1.0, 0.0, 0.0]), plane.right)
        && near(frame.vector([0.0, 1.0, 0.0]), plane.up)
        && real(51).unwrap_or(0.0) == 0.0;
    let sizes = [width, height, view_height];
    if !square || sizes.iter().any(|s| !(s.is_finite() && *s > 0.0)) {
        return None;
    }
    let target = [or_nothing(17), or_nothing(27), or_nothing(37)];
    let along = |axis: [f64; 3]| axis.iter().zip(target).map(|(a, t)| a * t).sum::<f64>();
    let middle = Point::new(real(12)? + along(plane.right), real(22)? + along(plane.up));
    let half = Vec2::new(view_height * width / height, view_height) / 2.0;
    Some(Viewport { low: middle - half, high: middle + half, scale: height / view_height })
}

/// How much of a box between two corners a viewport shows.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Shown {
    /// All of it.
    Whole,
    /// Some of it.
    Part,
    /// Nothing of it.
    Nothing,
}

impl Viewport {
    /// How much it shows of the box between two corners.
    pub fn shows(&self, low: Point, high: Point) -> Shown {
        let apart = self.high.x < low.x || self.high.y < low.y || self.low.x > high.x || self.low.y > high.y;
        let whole =
            self.low.x <= low.x && self.low.y <= low.y && self.high.x >= high.x && self.high.y >= high.y;
        match (whole, apart) {
            (true, _) => Shown::Whole,
            (_, true) => Shown::Nothing,
            _ => Shown::Part,
        }
    }
}

/// The largest scale among the viewports that show the whole box between two corners.
pub fn scale_that_shows(viewports: &[Viewport], low: Point, high: Point) -> Option<f64> {
    viewports.iter().filter(|v| v.shows(low, high) == Shown::Whole).map(|v| v.scale).max_by(f64::total_cmp)
}
