//! Viewports of the layouts: which part of model space each shows, and at what scale.

use crate::geometry::Point;
use crate::tags::Record;

/// A window of a layout into model space, seen square onto the x-y plane.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Viewport {
    /// Lower left corner of what it shows, drawing units.
    pub low: Point,
    /// Upper right corner of what it shows, drawing units.
    pub high: Point,
    /// Plotted length over drawn length, paper units per drawing unit.
    pub scale: f64,
}

/// The viewport of a VIEWPORT record (R2000 on); `None` for the one that stands for the sheet itself, for one that is
/// switched off, and for views that are not square onto the x-y plane.
pub fn viewport(record: &Record) -> Option<Viewport> {
    let real = |code| record.tags.first(code).and_then(|t| t.real());
    let int = |code| record.tags.first(code).and_then(|t| t.int());
    if record.kind != "VIEWPORT" || int(69) == Some(1) || int(68) == Some(0) {
        return None;
    }
    let (width, height) = (real(40)?, real(41)?);
    let view_height = real(45)?;
    let centre = Point::new(real(12)?, real(22)?);
    let toward = [real(16).unwrap_or(0.0), real(26).unwrap_or(0.0), real(36).unwrap_or(1.0)];
    let target = Point::new(real(17).unwrap_or(0.0), real(27).unwrap_or(0.0));
    let square = toward[0] == 0.0 && toward[1] == 0.0 && toward[2] > 0.0 && real(51).unwrap_or(0.0) == 0.0;
    let sizes = [width, height, view_height];
    if !square || sizes.iter().any(|s| !(s.is_finite() && *s > 0.0)) {
        return None;
    }
    let half = crate::geometry::Vec2::new(view_height * width / height, view_height) / 2.0;
    let middle = centre + target.to_vec2();
    Some(Viewport { low: middle - half, high: middle + half, scale: height / view_height })
}

/// The largest scale among the viewports that show the whole box between two corners.
pub fn scale_that_shows(viewports: &[Viewport], low: Point, high: Point) -> Option<f64> {
    viewports
        .iter()
        .filter(|v| v.low.x <= low.x && v.low.y <= low.y && v.high.x >= high.x && v.high.y >= high.y)
        .map(|v| v.scale)
        .max_by(f64::total_cmp)
}
