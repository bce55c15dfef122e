//! The line of thrust as a string polygon: corners where consecutive rays meet on a load's line of action.
//!
//! Under weight along the axis the string is the curve that all rays touch: the ray of the joint at `x` touches it at
//! `x`, on the line of action of the weight of that joint [Culmann 1866]. The polygon is cut off at the springing joints.

use super::line::eccentricity;
use super::span::{Joint, Loads, Span, Unknowns, moment_about};
use crate::geometry::{Point, Vec2};
use crate::tolerance;

/// Halvings of a piece, at most.
const HALVINGS: u32 = 12;

/// The vertices in the drawing, m.
pub(super) fn string(span: &Span, r: &Unknowns) -> Vec<Point> {
    // Each corner with the loads before it, which give the ray that leads to it.
    let mut corners: Vec<(Point, Loads)> = Vec::new();
    let mut loads = Loads::default();
    let mut next = 0;
    for (i, piece) in span.pieces.iter().enumerate() {
        while let Some(e) = span.entered.get(next)
            && e.foot <= piece.s0 + tolerance::SAME_PLACE
            && (piece.s1 > piece.s0 || i > 0)
        {
            let before = loads;
            loads.fx += e.force.x;
            loads.fy += e.force.y;
            loads.moment += e.at.x * e.force.y - e.at.y * e.force.x;
            if let Some(corner) = corner(e.at, e.force, &before, r) {
                corners.push((corner, before));
            }
            next += 1;
        }
        if piece.weight > 0.0 && piece.s1 > piece.s0 {
            let (a, b) = (piece.joint(piece.s0, i), piece.joint(piece.s1, i));
            let touch = |j: &Joint| touch(j, r);
            if let (Some(p), Some(q)) = (touch(&a), touch(&b)) {
                corners.push((p, a.loads));
                let middle = |s: f64| {
                    let joint = piece.joint(s, i);
                    touch(&joint).map(|p| (p, joint.loads))
                };
                refine(&middle, (piece.s0, p), (piece.s1, q), HALVINGS, &mut corners);
                corners.push((q, b.loads));
            }
        }
        if piece.s1 > piece.s0 {
            loads = piece.joint(piece.s1, i).loads;
        }
    }
    for e in span.entered.iter().skip(next) {
        let before = loads;
        loads.fx += e.force.x;
        loads.fy += e.force.y;
        loads.moment += e.at.x * e.force.y - e.at.y * e.force.x;
        if let Some(corner) = corner(e.at, e.force, &before, r) {
            corners.push((corner, before));
        }
    }
    corners.dedup_by(|b, a| (b.0 - a.0).hypot() <= tolerance::ONE_JOINT);
    cut_off(span, r, &corners, &loads).into_iter().map(|p| span.drawn(p)).collect()
}

/// Where the ray before a load meets the load's line of action.
fn corner(at: Point, force: Vec2, before: &Loads, r: &Unknowns) -> Option<Point> {
    if force.hypot() == 0.0 {
        return None;
    }
    let f = force.normalize();
    let ray = Vec2::new(r[0] + before.fx, r[1] + before.fy);
    let rate = ray.y * f.x - ray.x * f.y;
    // A load along the ray only lengthens it.
    (rate.abs() > tolerance::VERTICAL_THRUST * ray.hypot())
        .then(|| at - f * (moment_about(at, before, r) / rate))
}

/// Where the ray of a joint touches the string of the distributed weight.
fn touch(joint: &Joint, r: &Unknowns) -> Option<Point> {
    let ray = joint.resultant(r);
    (ray.x.abs() > tolerance::ONE_JOINT * ray.hypot())
        .then(|| joint.at + Vec2::new(0.0, joint.moment(r) / ray.x))
}

fn refine(
    middle: &impl Fn(f64) -> Option<(Point, Loads)>,
    (s, p): (f64, Point),
    (t, q): (f64, Point),
    depth: u32,
    out: &mut Vec<(Point, Loads)>,
) {
    let half = f64::midpoint(s, t);
    let Some((m, loads)) = middle(half) else {
        return;
    };
    let chord = q - p;
    let off = if chord.hypot() > 0.0 { (m - p).cross(chord).abs() / chord.hypot() } else { (m - p).hypot() };
    if depth == 0 || off <= 0.5 * tolerance::LINE_POLYGON {
        return;
    }
    refine(middle, (s, p), (half, m), depth - 1, out);
    out.push((m, loads));
    refine(middle, (half, m), (t, q), depth - 1, out);
}

/// The polygon between the two springing joints: corners behind a joint are left out, and the ray that crosses the joint
/// ends in it.
fn cut_off(span: &Span, r: &Unknowns, corners: &[(Point, Loads)], all: &Loads) -> Vec<Point> {
    let (first, last) = (span.first(), span.last());
    let slack = tolerance::ONE_JOINT;
    let behind = |c: &(Point, Loads)| (c.0 - first.at).dot(first.tangent) < slack;
    let beyond = |c: &(Point, Loads)| (c.0 - last.at).dot(last.tangent) > -slack;
    let from = corners.iter().take_while(|c| behind(c)).count();
    let to = corners.len() - corners.iter().rev().take_while(|c| beyond(c)).count();
    if from >= to {
        // Nothing between the joints: only the end rays are left.
        let ends = [meet(&first, &first.loads, r), meet(&last, &last.loads, r)];
        return ends.into_iter().flatten().collect();
    }
    let entering = corners[from].1;
    let leaving = corners.get(to).map_or(*all, |c| c.1);
    let mut points = Vec::with_capacity(to - from + 2);
    points.extend(meet(&first, &entering, r));
    points.extend(corners[from..to].iter().map(|c| c.0));
    points.extend(meet(&last, &leaving, r));
    points.dedup_by(|b, a| (*b - *a).hypot() <= slack);
    points
}

/// Where a ray crosses a joint.
fn meet(joint: &Joint, loads: &Loads, r: &Unknowns) -> Option<Point> {
    let joint = Joint { loads: *loads, ..*joint };
    Some(joint.at + joint.normal() * eccentricity(&joint, r)?)
}
