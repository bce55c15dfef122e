//! Builders and comparisons that the tests of the statics share.
#![allow(clippy::unwrap_used, dead_code)]

use thrustmark::geometry::{Path, Point, Segment, Vec2};
use thrustmark::statics::{Analysis, Force, Line, LineKind, Problem, Station, Status, analyse};

/// Agreement of a closed form to the accuracy that is owed: 1e-9 relative.
#[track_caller]
pub fn close(found: f64, expected: f64) {
    let off = (found - expected).abs() / expected.abs().max(1.0);
    assert!(off <= 1e-9, "found {found:.15}, expected {expected:.15}, relative difference {off:e}");
}

pub fn down(loads: &[(f64, f64)], y: f64) -> Vec<Force> {
    let force = |&(w, x): &(f64, f64)| Force { at: Point::new(x, y), force: Vec2::new(0.0, -w) };
    loads.iter().map(force).collect()
}

/// An axis with forces whose line goes through springings and crown.
pub fn problem(axis: Path, forces: Vec<Force>) -> Problem {
    Problem { forces, govern: Some(LineKind::Through), ..Problem::new(axis) }
}

pub fn polyline(points: &[(f64, f64)]) -> Path {
    let points: Vec<Point> = points.iter().map(|&p| p.into()).collect();
    Path::polyline(&points).unwrap()
}

/// A parabolic axis in chords, with vertices at equal steps.
pub fn parabola(span: f64, rise: f64, parts: usize) -> Path {
    let at = |k: usize| {
        let x = span * k as f64 / parts as f64;
        (x, 4.0 * rise * x * (span - x) / (span * span))
    };
    polyline(&(0..=parts).map(at).collect::<Vec<_>>())
}

/// A circular arc from the left springing over the crown to the right one, about the origin.
pub fn circle(radius: f64, half_opening: f64) -> Path {
    let (s, c) = half_opening.sin_cos();
    let (a, b) = (Point::new(-radius * s, radius * c), Point::new(radius * s, radius * c));
    Path::new([Segment::bulge(a, b, -(half_opening / 2.0).tan())]).unwrap()
}

#[track_caller]
pub fn solve(p: &Problem) -> (Analysis, Line) {
    let a = analyse(p).unwrap();
    let line = a.lines[a.governs].clone();
    assert_eq!(line.status, Status::Found, "{:?}", line.reason);
    assert!(a.residual < 1e-9, "residual {:e}", a.residual);
    (a, line)
}

#[track_caller]
pub fn station(line: &Line, x: f64) -> Station {
    *line.stations.iter().find(|s| (s.at.x - x).abs() < 1e-9).unwrap()
}

/// Height of the string polygon at `x`.
#[track_caller]
pub fn height(line: &Line, x: f64) -> f64 {
    let edge = line.vertices.windows(2).find(|w| w[0].x <= x && x <= w[1].x).unwrap();
    edge[0].y + (edge[1].y - edge[0].y) * (x - edge[0].x) / (edge[1].x - edge[0].x)
}

#[track_caller]
pub fn push(line: &Line) -> f64 {
    line.left.unwrap().horizontal
}
