//! The line of thrust as a string polygon: corners where consecutive rays meet on a load's line of action.
//!
//! Under weight along the axis the string is the curve that all rays touch: the ray of the joint at `x` touches it at
//! `x`, on the line of action of the weight of that joint [Culmann 1866]. The polygon is cut off at the springing joints.

use super::joint::{Joint, LoadSets, Unknowns, moment_about};
use super::line::eccentricity;
use super::piece::Piece;
use super::span::Span;
use crate::geometry::{Point, Vec2};
use crate::tolerance;

/// Halvings of a piece, at most.
const HALVINGS: u32 = 12;

/// The vertices in the drawing, m.
pub(super) fn string(span: &Span, r: &Unknowns) -> Vec<Point> {
    let mut corners: Vec<Corner> = Vec::new();
    let mut loads = LoadSets::default();
    let mut next = 0;
    for (i, piece) in span.pieces.iter().enumerate() {
        while let Some(e) = span.entered.get(next)
            && e.foot <= piece.s0 + tolerance::SAME_PLACE
            && (piece.s1 > piece.s0 || i > 0)
        {
            let before = loads;
            loads.enter(e);
            corners.extend(meeting(e.at, e.force, &before, r).map(|at| Corner { at, before, after: loads }));
            next += 1;
        }
        if piece.weighs() && piece.s1 > piece.s0 {
            let (a, b) = (piece.joint(piece.s0, i), piece.joint(piece.s1, i));
            if let (Some(p), Some(q)) = (touch(piece, &a, r), touch(piece, &b, r)) {
                corners.push(p);
                let middle = |s: f64| touch(piece, &piece.joint(s, i), r);
                refine(&middle, (piece.s0, p.at), (piece.s1, q.at), HALVINGS, &mut corners);
                corners.push(q);
            }
        }
        if piece.s1 > piece.s0 {
            loads = piece.joint(piece.s1, i).loads;
        }
    }
    for e in span.entered.iter().skip(next) {
        let before = loads;
        loads.enter(e);
        corners.extend(meeting(e.at, e.force, &before, r).map(|at| Corner { at, before, after: loads }));
    }
    corners.dedup_by(|b, a| {
        let one = (b.at - a.at).hypot() <= tolerance::ONE_JOINT;
        if one {
            a.after = b.after;
        }
        one
    });
    cut_off(span, r, &corners, &loads).into_iter().map(|p| span.drawn(p)).collect()
}

/// A corner with the loads before and after it, which give the rays that lead to it and away from it.
#[derive(Clone, Copy)]
struct Corner {
    at: Point,
    before: LoadSets,
    after: LoadSets,
}

/// Where the ray before a load meets the load's line of action.
fn meeting(at: Point, force: Vec2, before: &LoadSets, r: &Unknowns) -> Option<Point> {
    if force.hypot() == 0.0 {
        return None;
    }
    let f = force.normalize();
    let loads = before.times(r[3]);
    let ray = Vec2::new(r[0] + loads.fx, r[1] + loads.fy);
    let rate = ray.y * f.x - ray.x * f.y;
    // A load along the ray only lengthens it.
    (rate.abs() > tolerance::VERTICAL_THRUST * ray.hypot())
        .then(|| at - f * (moment_about(at, before, r) / rate))
}

/// Where the ray of a joint touches the string of the distributed weight: on the line of action of its own weight.
fn touch(piece: &Piece, joint: &Joint, r: &Unknowns) -> Option<Corner> {
    let ray = joint.resultant(r);
    let x = piece.weight_offset(joint, r);
    (ray.x.abs() > tolerance::ONE_JOINT * ray.hypot()).then(|| Corner {
        at: joint.at + Vec2::new(x, (joint.moment(r) + ray.y * x) / ray.x),
        before: joint.loads,
        after: joint.loads,
    })
}

fn refine(
    middle: &impl Fn(f64) -> Option<Corner>,
    (s, p): (f64, Point),
    (t, q): (f64, Point),
    depth: u32,
    out: &mut Vec<Corner>,
) {
    let half = f64::midpoint(s, t);
    let Some(m) = middle(half) else {
        return;
    };
    let chord = q - p;
    let off =
        if chord.hypot() > 0.0 { (m.at - p).cross(chord).abs() / chord.hypot() } else { (m.at - p).hypot() };
    if depth == 0 || off <= 0.5 * tolerance::LINE_POLYGON {
        return;
    }
    refine(middle, (s, p), (half, m.at), depth - 1, out);
    out.push(m);
    refine(middle, (half, m.at), (t, q), depth - 1, out);
}

/// The polygon between the two springing joints: corners behind a joint are left out, and the side that crosses the
/// joint ends in it.
fn cut_off(span: &Span, r: &Unknowns, corners: &[Corner], all: &LoadSets) -> Vec<Point> {
    let (first, last) = (span.first(), span.last());
    let slack = tolerance::ONE_JOINT;
    let behind = |c: &&Corner| (c.at - first.at).dot(first.tangent) < slack;
    let beyond = |c: &&Corner| (c.at - last.at).dot(last.tangent) > -slack;
    let from = corners.iter().take_while(behind).count();
    let to = corners.len() - corners.iter().rev().take_while(beyond).count();
    let mut points = Vec::with_capacity(to.saturating_sub(from) + 2);
    if from >= to {
        // Nothing between the joints: only the end rays are left.
        points.extend(meet(&first, &first.loads, r));
        points.extend(meet(&last, all, r));
        return points;
    }
    points.extend(match from.checked_sub(1) {
        Some(i) => crossing(&first, corners[i].at, corners[from].at),
        None => meet(&first, &corners[0].before, r),
    });
    points.extend(corners[from..to].iter().map(|c| c.at));
    points.extend(match corners.get(to) {
        Some(next) => crossing(&last, corners[to - 1].at, next.at),
        None => meet(&last, &corners[to - 1].after, r),
    });
    points.dedup_by(|b, a| (*b - *a).hypot() <= slack);
    points
}

/// Where a ray crosses a joint.
fn meet(joint: &Joint, loads: &LoadSets, r: &Unknowns) -> Option<Point> {
    let joint = Joint { loads: *loads, ..*joint };
    Some(joint.at + joint.normal() * eccentricity(&joint, r)?)
}

/// Where a side of the polygon crosses a joint.
fn crossing(joint: &Joint, p: Point, q: Point) -> Option<Point> {
    let (a, b) = ((p - joint.at).dot(joint.tangent), (q - joint.at).dot(joint.tangent));
    ((b - a).abs() > 0.0).then(|| p + (q - p) * (a / (a - b)))
}
