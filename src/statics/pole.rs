//! The graphic method's own measure of misfit: how far the rays parallel to the chords of the axis are from meeting in
//! one pole [Culmann 1866 for the polygons; the fit is least squares].

use super::PoleFit;
use super::span::Span;
use crate::geometry::{Point, Vec2};
use crate::tolerance;

/// Sums of the least squares fit of a point to lines.
#[derive(Default)]
struct Fit {
    weight: f64,
    xx: f64,
    xy: f64,
    yy: f64,
    x: f64,
    y: f64,
    square: f64,
}

impl Fit {
    /// A line through `corner` along the unit vector `along`.
    fn add(&mut self, corner: Vec2, along: Vec2, weight: f64) {
        let n = Vec2::new(-along.y, along.x);
        let c = n.dot(corner);
        self.weight += weight;
        self.xx += weight * n.x * n.x;
        self.xy += weight * n.x * n.y;
        self.yy += weight * n.y * n.y;
        self.x += weight * n.x * c;
        self.y += weight * n.y * c;
        self.square += weight * c * c;
    }

    /// The point nearest to all lines.
    fn point(&self) -> Option<Vec2> {
        let det = self.xx * self.yy - self.xy * self.xy;
        if det <= f64::EPSILON * self.weight * self.weight * tolerance::NO_RISE {
            return None;
        }
        Some(Vec2::new(
            (self.x * self.yy - self.y * self.xy) / det,
            (self.y * self.xx - self.x * self.xy) / det,
        ))
    }
}

/// The fitted pole. Point loads alone: a ray from each corner of the load line parallel to the chord between the
/// neighbouring load feet. With weight along the axis: the same in the limit of many small loads, a ray at every place
/// of the axis parallel to its tangent.
pub(super) fn pole(span: &Span) -> Option<PoleFit> {
    let rays =
        if span.pieces.iter().any(super::piece::Piece::weighs) { tangents(span) } else { chords(span)? };
    let mut fit = Fit::default();
    for (corner, along, weight) in &rays {
        fit.add(*corner, *along, *weight);
    }
    let pole = fit.point()?;
    // Summed anew about the pole, for the sums of squares have lost the digits.
    let off = |corner: &Vec2, along: &Vec2| along.cross(pole - *corner);
    let scatter = rays.iter().map(|(c, a, w)| w * off(c, a) * off(c, a)).sum::<f64>() / fit.weight;
    let scatter = scatter.sqrt() * span.load;
    let horizontal = -pole.x * span.load;
    Some(PoleFit {
        horizontal,
        vertical: -pole.y * span.load,
        scatter,
        scatter_ratio: (horizontal.abs() > tolerance::VERTICAL_THRUST * span.load)
            .then(|| scatter / horizontal.abs()),
    })
}

type Ray = (Vec2, Vec2, f64);

fn chords(span: &Span) -> Option<Vec<Ray>> {
    let mut rays = Vec::new();
    let mut corner = Vec2::ZERO;
    let mut from: Point = span.first().at;
    let mut feet = 0;
    let mut last = f64::NEG_INFINITY;
    for e in span.entered.iter().filter(|e| e.force.hypot() > 0.0) {
        if e.foot - last > tolerance::ONE_JOINT {
            feet += 1;
            let at = span.joint_at(e.foot, true).at;
            push(&mut rays, corner, from, at);
            from = at;
            last = e.foot;
        }
        corner += e.force;
    }
    push(&mut rays, corner, from, span.last().at);
    (feet >= 2).then_some(rays)
}

fn push(rays: &mut Vec<Ray>, corner: Vec2, from: Point, to: Point) {
    let chord = to - from;
    if chord.hypot() > tolerance::ONE_JOINT {
        rays.push((corner, chord.normalize(), chord.hypot()));
    }
}

fn tangents(span: &Span) -> Vec<Ray> {
    let far = 0.6_f64.sqrt();
    let mut rays = Vec::new();
    for (i, piece) in span.pieces.iter().enumerate() {
        let turn = (piece.curvature * (piece.s1 - piece.s0)).abs();
        let parts = (1..1000).find(|&n| f64::from(n) * 0.1 >= turn).unwrap_or(1000);
        let step = (piece.s1 - piece.s0) / f64::from(parts);
        for k in 0..parts {
            let middle = piece.s0 + step * (f64::from(k) + 0.5);
            for (x, w) in [(-far, 5.0 / 18.0), (0.0, 8.0 / 18.0), (far, 5.0 / 18.0)] {
                let joint = piece.joint(middle + step / 2.0 * x, i);
                let loads = joint.loads.times(1.0);
                rays.push((Vec2::new(loads.fx, loads.fy), joint.tangent, w * step));
            }
        }
    }
    rays
}
