//! A span in local measures: the axis cut into smooth pieces, the loads that have entered the ring before each, and
//! the forces in any joint as exact affine functions of the unknowns.
//!
//! Lengths are in units of the axis length, measured from the left springing; forces in units of the total load.
//! National grid coordinates, millimetres and meganewtons therefore all give the same arithmetic.

use super::joint::{Affine, Entered, Joint, LoadSets, Loads, Unknowns, Weight, moment_row};
use super::line_load::{self, Laid};
use super::piece::Piece;
use super::place::{check_input, depth_at, depth_table, mean, place};
use super::{Problem, Reaction, Unsolved};
use crate::geometry::{Boxes, Path, Point, Segment, Vec2};
use crate::tolerance;

/// The span in local units.
#[derive(Debug, Clone)]
pub(super) struct Span {
    /// Left springing, m.
    pub origin: Point,
    /// Length of the axis, m: the local unit of length.
    pub length: f64,
    /// Sum of the magnitudes of all loads, kN: the local unit of force.
    pub load: f64,
    /// The axis from its springing at the origin, in local units.
    pub path: Path,
    pub pieces: Vec<Piece>,
    /// Loads that meet the axis, in their order along the ring; zero forces included.
    pub entered: Vec<Entered>,
    /// Indices of the others.
    pub missed: Vec<usize>,
    /// Crown: its length along the axis and its height over the chord.
    pub crown: (f64, f64),
    /// The axis lies wholly below its chord.
    pub hangs: bool,
    pub has_depth: bool,
    /// `1 / (2 f b)`; 0 for unlimited strength.
    pub crushing: f64,
    /// Weight along the axis that stays, and weight that the load factor multiplies.
    pub weight: [Weight; 2],
    /// Where line loads lie on the axis.
    pub laid: Vec<Laid>,
}

impl Span {
    /// Puts the loads on the ring and cuts the axis.
    pub fn new(problem: &Problem) -> Result<Self, Unsolved> {
        Self::with_live(problem, 0.0)
    }

    /// The same for a span that will carry moving loads of about the size `live`, kN, beside the loads of the problem: it
    /// may then have none.
    pub fn with_live(problem: &Problem, live: f64) -> Result<Self, Unsolved> {
        check_input(problem)?;
        let origin = problem.axis.start();
        let length = problem.axis.length();
        let path = problem.axis.shifted_scaled(-origin.to_vec2(), 1.0 / length);
        if path.end().x <= tolerance::NO_RISE {
            return Err(Unsolved::Input(
                "the axis must run from the left springing to the right one, not above one another".into(),
            ));
        }
        let boxes = Boxes::new(&path);
        let (above, below) = (path.farthest_from_chord(false), path.farthest_from_chord(true));
        let flat = tolerance::NO_RISE * path.end().x;
        if above.1 <= flat && -below.1 <= flat {
            return Err(Unsolved::NoRise);
        }
        if let Some(p) = path.self_crossing(&boxes) {
            let p = origin + p.to_vec2() * length;
            return Err(Unsolved::SelfCrossing(p.x, p.y));
        }
        let hangs = above.1 <= flat;
        let crown = if hangs || above.1 < -below.1 { below } else { above };

        let (mut entered, missed) = place(&path, &boxes, problem, origin, length);
        for e in &mut entered {
            e.varies = problem.varying.contains(&e.index);
        }
        let depth = depth_table(problem.depth.as_ref(), length, crown.0);
        let total: f64 = entered.iter().map(|e| e.force.hypot()).sum();
        let laid = line_load::lay(&path, problem, origin, length)?;
        let lines: f64 = laid.iter().map(|l| l.down.abs() * l.plan).sum();
        let own = (problem.weight_on_axis + problem.ring_weight * mean(&depth) * length) * length;
        let load = live + total + lines + own;
        let inside = |e: &&Entered| {
            e.force.hypot() > 0.0 && e.foot > tolerance::ONE_JOINT && e.foot < 1.0 - tolerance::ONE_JOINT
        };
        let weight = Weight {
            on_axis: problem.weight_on_axis * length / load,
            of_ring: problem.ring_weight * length * length / load,
            on_plan: 0.0,
        };
        let bare = problem.weight_on_axis + problem.ring_weight + lines <= 0.0;
        if live <= 0.0 && bare && entered.iter().find(inside).is_none() {
            return Err(Unsolved::NoLoad);
        }
        let weight = match problem.weight_varies {
            false => [weight, Weight::default()],
            true => [Weight::default(), weight],
        };
        let mut span = Self {
            origin,
            length,
            load,
            path,
            pieces: Vec::new(),
            entered,
            missed,
            crown,
            hangs,
            has_depth: problem.depth.is_some(),
            crushing: problem.strength.map_or(0.0, |f| load / (2.0 * f * length)),
            weight,
            laid,
        };
        for e in &mut span.entered {
            e.force /= load;
        }
        for l in &mut span.laid {
            l.down /= load;
        }
        span.cut(&depth);
        // Measured again on the pieces, which keep the digits of hardly curved arcs.
        let (top, end) = (span.joint_at(crown.0, true).at, span.last().at);
        if span.crown.1.abs() > 0.0 {
            span.crown.1 = top.y - end.y / end.x * top.x;
        }
        if span.crown.1.abs() <= flat {
            return Err(Unsolved::NoRise);
        }
        Ok(span)
    }

    /// Cuts the axis at every joint of two segments, every load foot and every kink of the depth.
    fn cut(&mut self, depth: &[(f64, f64)]) {
        let cumulative = self.path.cumulative();
        let mut start = Point::ORIGIN;
        let mut loads = LoadSets::default();
        let mut next = 0;
        let enter = |next: &mut usize, until: f64, loads: &mut LoadSets| {
            while let Some(e) = self.entered.get(*next)
                && e.foot <= until
            {
                loads.enter(e);
                *next += 1;
            }
        };
        let slack = tolerance::SAME_PLACE;
        let mut pieces: Vec<Piece> = Vec::with_capacity(self.path.segments().len() + self.entered.len());
        if self.entered.first().is_some_and(|e| e.foot <= slack) {
            let mut first = Piece::straight(0.0, 0.0, start, self.path.tangent_at(0.0, false));
            (first.depth, first.depth_slope) = depth_at(depth, 0.0);
            pieces.push(first);
        }
        for (i, segment) in self.path.segments().iter().enumerate() {
            let (s0, s1) = (cumulative[i], cumulative[i + 1]);
            // Chaining keeps hardly curved arcs exact, whose centres are far away; a true gap in the path stays.
            let drawn = segment.start();
            let doubt = match *segment {
                Segment::Line { .. } => slack,
                Segment::Arc { radius, .. } => slack.max(16.0 * f64::EPSILON * radius),
            };
            if (drawn - start).hypot() > doubt {
                start = drawn;
            }
            let mut whole = Piece::straight(s0, s1, start, segment.tangent_at(0.0));
            if let Segment::Arc { radius, sweep, .. } = *segment {
                whole.curvature = sweep.signum() / radius;
            }
            let mut cuts: Vec<f64> = Vec::new();
            let inner = |s: &f64| *s > s0 + slack && *s < s1 - slack;
            let from = self.entered.partition_point(|e| e.foot <= s0);
            cuts.extend(self.entered[from..].iter().map(|e| e.foot).take_while(|&s| s < s1).filter(inner));
            cuts.extend(depth.iter().map(|d| d.0).filter(inner));
            cuts.extend(self.laid.iter().flat_map(|l| [l.s0, l.s1]).filter(inner));
            if self.weight.iter().any(|w| w.of_ring > 0.0) {
                // Short enough for the weight by Gauss.
                let turn = (whole.curvature * (s1 - s0)).abs();
                let parts = (1..20).find(|&n| f64::from(n) * 0.5 >= turn).unwrap_or(20);
                cuts.extend((1..parts).map(|k| s0 + (s1 - s0) * f64::from(k) / f64::from(parts)));
            }
            cuts.sort_by(f64::total_cmp);
            cuts.dedup_by(|b, a| *b - *a <= slack);
            cuts.push(s1);
            let mut a = s0;
            for b in cuts {
                enter(&mut next, a + slack, &mut loads);
                let joint = whole.joint(a, 0);
                let mut piece = Piece {
                    s0: a,
                    s1: b,
                    start: joint.at,
                    tangent: joint.tangent,
                    before: loads,
                    weight: line_load::add(self.weight, &self.laid, f64::midpoint(a, b)),
                    ..whole
                };
                let middle = depth_at(depth, f64::midpoint(a, b));
                piece.depth = middle.0 + middle.1 * (a - f64::midpoint(a, b));
                piece.depth_slope = middle.1;
                piece.ring = (piece.depth, piece.depth_slope);
                let end = piece.joint(b, 0);
                loads = end.loads;
                start = end.at;
                pieces.push(piece);
                a = b;
            }
        }
        if next < self.entered.len()
            && let Some(&last) = pieces.last()
        {
            enter(&mut next, f64::INFINITY, &mut loads);
            let joint = last.joint(last.s1, 0);
            pieces.push(Piece {
                s0: last.s1,
                start: joint.at,
                tangent: joint.tangent,
                before: loads,
                depth: joint.depth,
                ..last
            });
        }
        self.pieces = pieces;
    }

    /// The joint at length `s`, on the side before a load or kink there, or after it.
    pub fn joint_at(&self, s: f64, before: bool) -> Joint {
        let last = self.pieces.len() - 1;
        let i = if before {
            self.pieces.partition_point(|p| p.s1 < s - tolerance::SAME_PLACE).min(last)
        } else {
            self.pieces.partition_point(|p| p.s0 <= s + tolerance::SAME_PLACE).max(1) - 1
        };
        let piece = &self.pieces[i];
        piece.joint(s.clamp(piece.s0, piece.s1), i)
    }

    /// The first joint, before any load.
    pub fn first(&self) -> Joint {
        self.pieces[0].joint(self.pieces[0].s0, 0)
    }

    /// The last joint, after all loads.
    pub fn last(&self) -> Joint {
        let i = self.pieces.len() - 1;
        self.pieces[i].joint(self.pieces[i].s1, i)
    }

    /// `M` about a point near the axis as an affine function: the loads before its nearest joint count.
    pub fn hinge_row(&self, p: Point) -> Affine {
        let (s, _) = self.path.nearest(p);
        moment_row(p, &self.joint_at(s, true).loads)
    }

    /// A point of the drawing in local units.
    pub fn local(&self, p: Point) -> Point {
        ((p - self.origin) / self.length).to_point()
    }

    /// A local point in the drawing, m.
    pub fn drawn(&self, p: Point) -> Point {
        self.origin + p.to_vec2() * self.length
    }

    /// Unknowns in kN and kN·m.
    pub fn reaction(&self, r: &Unknowns) -> Reaction {
        Reaction {
            horizontal: r[0] * self.load,
            vertical: r[1] * self.load,
            moment: r[2] * self.load * self.length,
        }
    }

    /// The same span with depth 1 throughout, where `|M| / (d N)` is the eccentricity.
    pub fn with_unit_depth(&self) -> Self {
        let mut other = self.clone();
        for piece in &mut other.pieces {
            (piece.depth, piece.depth_slope) = (1.0, 0.0);
        }
        other.has_depth = false;
        other
    }

    /// Puts the loads of `base` on it, and beside them what `varying` and `fixed` say has entered before each piece. Both
    /// spans have the same pieces.
    pub fn carry(&mut self, base: &Self, fixed: &[Loads], varying: &[Loads]) {
        for (i, (piece, from)) in self.pieces.iter_mut().zip(&base.pieces).enumerate() {
            piece.before = LoadSets {
                fixed: fixed.get(i).map_or(from.before.fixed, |l| from.before.fixed.plus(l)),
                varying: varying.get(i).map_or(from.before.varying, |l| from.before.varying.plus(l)),
            };
        }
    }

    /// Lever arm of the push that a line may count on: the rise, and the depth where one is known.
    pub fn lever(&self) -> f64 {
        let deepest = self.pieces.iter().fold(0.0, |m, p| f64::max(m, p.depth));
        self.crown.1.abs() + if self.has_depth { deepest } else { 0.0 }
    }

    /// Least radius over depth, and where, m.
    pub fn sharpest(&self) -> Option<(f64, Point)> {
        let bent = self.pieces.iter().filter(|p| self.has_depth && p.curvature.abs() > 0.0);
        let ends = bent.flat_map(|p| {
            [p.s0, p.s1].map(|s| (1.0 / (p.curvature.abs() * p.ring_depth(s)), self.drawn(p.joint(s, 0).at)))
        });
        ends.min_by(|a, b| a.0.total_cmp(&b.0))
    }

    /// Sum of all loads, in local units.
    pub fn total(&self) -> Vec2 {
        let loads = self.last().loads.times(1.0);
        Vec2::new(loads.fx, loads.fy)
    }
}
