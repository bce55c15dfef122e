//! Self-checks of every run: each line is held against equilibrium worked out another way.

use super::joint::Unknowns;
use super::peaks::Sampling;
use super::piece::Piece;
use super::span::Span;
use super::{Problem, Reaction};
use crate::geometry::{Point, Vec2};

/// Joints at which the moment is summed anew.
const JOINTS: usize = 24;

/// Largest relative residual of one line: of `dM/ds = S` over every stretch, of the moments summed anew from the loads
/// as they were given and from the height of the line above the axis, and of force and moment of the whole span.
pub(super) fn residual(
    problem: &Problem,
    span: &Span,
    sampling: &Sampling,
    r: &Unknowns,
    vertices: &[Point],
) -> f64 {
    let force = 1.0 + r[0].abs() + r[1].abs();
    let size = force + r[2].abs();
    let mut worst = 0.0_f64;

    // The change of moment over a stretch is the integral of the shear. Five-point Gauss is exact to rounding on stretches
    // of a few degrees.
    const RULE: [(f64, f64); 5] = [
        (-0.906_179_845_938_664, 0.236_926_885_056_189_08),
        (-0.538_469_310_105_683_1, 0.478_628_670_499_366_47),
        (0.0, 0.568_888_888_888_888_9),
        (0.538_469_310_105_683_1, 0.478_628_670_499_366_47),
        (0.906_179_845_938_664, 0.236_926_885_056_189_08),
    ];
    let stride = sampling.joints().len() / 400 + 1;
    for pair in sampling.joints().windows(2).step_by(stride).filter(|p| p[0].piece == p[1].piece) {
        let piece = &span.pieces[pair[0].piece];
        let (half, middle) = ((pair[1].s - pair[0].s) / 2.0, f64::midpoint(pair[0].s, pair[1].s));
        let sum: f64 = RULE
            .iter()
            .map(|(x, w)| w * half * piece.moment_slope(&piece.joint(middle + half * x, pair[0].piece), r))
            .sum();
        worst = worst.max((pair[1].moment(r) - pair[0].moment(r) - sum).abs() / size);
    }

    // Moments from the loads as given, in metres and kilonewtons, with the coordinates of the drawing.
    let reaction = span.reaction(r);
    let scale = size * span.load * span.length;
    // Over an axis that leans outward there are two joints at one abscissa.
    let upright = sampling.joints().iter().all(|j| j.tangent.x > 0.0);
    let weights = Weights::new(problem, span);
    for joint in sampling.spread(JOINTS) {
        let summed =
            moment_summed(problem, span, &weights, &reaction, (joint.s, joint.piece), span.drawn(joint.at));
        worst = worst.max((joint.moment(r) * span.load * span.length - summed).abs() / scale);
        if let Some(v) = height(span, vertices, joint.at).filter(|_| upright) {
            let ray = joint.resultant(r);
            worst = worst.max((joint.moment(r) - ray.x * v).abs() / (size * (1.0 + v.abs())));
        }
    }

    // What the right abutment must give, from thrust, shear and moment of the last joint, closes the whole span.
    let last = span.last();
    let end = last.tangent * last.thrust(r) + last.normal() * last.shear(r);
    let mut sum = Vec2::new(reaction.horizontal, reaction.vertical) - end * span.load;
    for e in &span.entered {
        sum += problem.forces[e.index].force;
    }
    sum.y -= weights.before(1.0).0;
    worst = worst.max(sum.hypot() / (force * span.load));
    let whole =
        moment_summed(problem, span, &weights, &reaction, (1.0, span.pieces.len()), problem.axis.end());
    worst.max((whole - last.moment(r) * span.load * span.length).abs() / scale)
}

/// `M_0 + V (x − x_0) − H (y − y_0) + Σ [(x − x_i) F_y − (y − y_i) F_x]` over the loads before the joint at `s`.
fn moment_summed(
    problem: &Problem,
    span: &Span,
    weights: &Weights,
    reaction: &Reaction,
    (s, piece): (f64, usize),
    p: Point,
) -> f64 {
    let from = p - span.origin;
    let mut moment = reaction.moment + reaction.vertical * from.x - reaction.horizontal * from.y;
    let starts = span.pieces.get(piece).is_some_and(|q| q.s0 >= s && piece > 0);
    let slack = crate::tolerance::SAME_PLACE;
    for e in &span.entered {
        // A joint at the start of its piece stands after the loads there, one at the end before them.
        let before =
            if starts || piece >= span.pieces.len() { e.foot <= s + slack } else { e.foot < s - slack };
        if before {
            let f = problem.forces[e.index];
            let arm = p - f.at;
            moment += arm.x * f.force.y - arm.y * f.force.x;
        }
    }
    let (weight, about) = weights.before(s);
    moment - weight * p.x + about
}

/// The weight along the axis summed anew: over the area of the ring in strips across and along, and along the drawn axis.
struct Weights<'a> {
    problem: &'a Problem,
    span: &'a Span,
    /// Weight before each piece, kN, and the sum of its parts times their abscissae in the drawing, kN·m.
    starts: Vec<(f64, f64)>,
}

impl<'a> Weights<'a> {
    fn new(problem: &'a Problem, span: &'a Span) -> Self {
        let mut weights = Self { problem, span, starts: Vec::new() };
        if span.pieces.iter().any(Piece::weighs) {
            let (mut weight, mut about) = (0.0, 0.0);
            for piece in &span.pieces {
                weights.starts.push((weight, about));
                let (w, a) = weights.part(piece, piece.s1);
                (weight, about) = (weight + w, about + a);
            }
            weights.starts.push((weight, about));
        }
        weights
    }

    /// Weight before the joint at `s`, and its sum of weight times abscissa.
    fn before(&self, s: f64) -> (f64, f64) {
        let Some(&all) = self.starts.last() else {
            return (0.0, 0.0);
        };
        let i = self.span.pieces.partition_point(|p| p.s1 < s);
        let Some(piece) = self.span.pieces.get(i) else {
            return all;
        };
        let ((weight, about), (w, a)) = (self.starts[i], self.part(piece, s));
        (weight + w, about + a)
    }

    /// By Gauss with three points along and two across, which is exact across, on steps of at most a fiftieth of a radian.
    fn part(&self, piece: &Piece, until: f64) -> (f64, f64) {
        let (span, problem) = (self.span, self.problem);
        let turn = (piece.curvature * (until - piece.s0)).abs();
        let parts = (1..1000).find(|&n| f64::from(n) * 0.02 >= turn).unwrap_or(1000);
        let step = (until - piece.s0) / f64::from(parts);
        let far = 0.6_f64.sqrt();
        let across = 1.0 / 12.0_f64.sqrt();
        let (mut weight, mut about) = (0.0, 0.0);
        for k in 0..parts {
            let middle = piece.s0 + step * (f64::from(k) + 0.5);
            for (x, w) in [(-far, 5.0 / 18.0), (0.0, 8.0 / 18.0), (far, 5.0 / 18.0)] {
                let joint = piece.joint(middle + step / 2.0 * x, 0);
                let length = w * step * span.length;
                let here = length * problem.weight_on_axis;
                weight += here;
                about += here * span.drawn(joint.at).x;
                let depth = piece.ring_depth(joint.s);
                for side in [-across, across] {
                    let off = side * depth;
                    let area = length * (1.0 - piece.curvature * off) * depth * span.length / 2.0;
                    let here = area * problem.ring_weight;
                    weight += here;
                    about += here * span.drawn(joint.at + joint.normal() * off).x;
                }
            }
        }
        // A load per metre of plan anew from its own ends: the part of it over the stretch, midway between its ends.
        let (a, b) = (span.drawn(piece.joint(piece.s0, 0).at).x, span.drawn(piece.joint(until, 0).at).x);
        for line in &problem.line_loads {
            let (from, to) = (a.max(line.from), b.min(line.to));
            if to > from {
                let here = line.down * (to - from);
                weight += here;
                about += here * f64::midpoint(from, to);
            }
        }
        (weight, about)
    }
}

/// Height of the drawn line above a point of the axis, in local units, when its loads are vertical: then the polygon's
/// edge over the point is the ray of its joint. Not at a corner, where two rays meet.
fn height(span: &Span, vertices: &[Point], at: Point) -> Option<f64> {
    let x = at.x;
    let near = |e: &super::joint::Entered| {
        e.force.x.abs() > 0.0 || (e.at.x - x).abs() <= crate::tolerance::ONE_JOINT
    };
    if span.pieces.iter().any(Piece::weighs) || span.entered.iter().any(near) {
        return None;
    }
    let local = |p: Point| span.local(p);
    let edge = vertices.windows(2).map(|w| [local(w[0]), local(w[1])]).find(|w| w[0].x < x && x < w[1].x)?;
    let slope = (edge[1].y - edge[0].y) / (edge[1].x - edge[0].x);
    Some(edge[0].y + slope * (x - edge[0].x) - at.y)
}
