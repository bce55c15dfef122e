//! A roadway that is curved in plan: how far each load stands beside the plane of the rib.
//!
//! The line of the roadway in plan is drawn with x along the bridge, as in the elevation, and y across it. A straight line on
//! the same layer is the plane of the rib; without one it is taken through the points of the roadway over the springings of
//! each span. In an upright elevation the plane is the elevation's own.

use super::note::Note;
use super::{Drawn, Span};
use crate::drawing::PlanLine;
use crate::geometry::{Path, Point, Segment};
use crate::tolerance;

/// Sets how far each load stands to the left of the plane of the rib (looking in the direction of x), m.
pub fn sideways(
    spans: &mut [Span],
    lines: &[PlanLine],
    own_plane: Option<f64>,
    metres: f64,
    notes: &mut Vec<Note>,
) {
    let paths: Vec<(Path, &PlanLine)> = lines
        .iter()
        .filter_map(|l| {
            let pieces = l.pieces.iter().map(|p| p.shifted_scaled(crate::geometry::Vec2::ZERO, metres));
            Some((Path::new(pieces)?, l))
        })
        .collect();
    let (straight, road): (Vec<_>, Vec<_>) = paths.iter().partition(|(path, _)| is_straight(path));
    // One straight line alone is a straight roadway.
    let (ribs, road) = if road.is_empty() { (Vec::new(), straight) } else { (straight, road) };
    if road.is_empty() {
        return;
    }
    let on = |set: &[&(Path, &PlanLine)], x: f64| -> Option<f64> {
        set.iter().find_map(|(path, _)| at_abscissa(path, x))
    };
    for span in spans.iter_mut() {
        let (left, right) = (span.axis.start().x, span.axis.end().x);
        let ends = (on(&road, left), on(&road, right));
        let plane = |x: f64| -> Option<f64> {
            if let Some(y) = own_plane {
                return Some(y);
            }
            if let Some(y) = on(&ribs, x) {
                return Some(y);
            }
            let (a, b) = (ends.0?, ends.1?);
            Some(a + (b - a) * (x - left) / (right - left))
        };
        let mut missing = 0;
        for load in &mut span.loads {
            load.sideways = on(&road, load.at.x).zip(plane(load.at.x)).map(|(y, p)| y - p);
            missing += usize::from(load.sideways.is_none());
        }
        if !span.loads.is_empty() {
            notes.push(Note::Drawn(Drawn::Plan {
                span: span.name.clone(),
                assumed: own_plane.is_none() && on(&ribs, f64::midpoint(left, right)).is_none(),
                missing,
                line_loads: span.line_loads.len(),
            }));
        }
    }
}

fn is_straight(path: &Path) -> bool {
    let (a, b) = (path.start(), path.end());
    let way = b - a;
    let flat = path.segments().iter().all(|s| matches!(s, Segment::Line { .. }));
    let slack = tolerance::STRAIGHT_LINE * way.hypot() * way.hypot();
    let beside = |p: Point| (p - a).cross(way).abs();
    flat && way.hypot() > 0.0 && path.segments().iter().all(|s| beside(s.end()) <= slack)
}

/// The ordinate of a line in plan at an abscissa; of several the first along it.
fn at_abscissa(path: &Path, x: f64) -> Option<f64> {
    path.crossings_of_vertical(x).first().map(|s| path.point_at(*s).y)
}
