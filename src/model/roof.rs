//! The upper side of a ring: what fill stands on.

use super::{Span, weight};
use crate::geometry::slab::{Edge, directed};
use crate::geometry::{Boxes, Path, Point, Segment, Vec2, fit};
use crate::job::RibDepth;
use crate::tolerance;

/// What stands on a span stands on this: its extrados between the end joints, or its axis where no depth is known, as far as it
/// faces upward.
#[derive(Debug, Clone)]
pub struct Roof {
    edges: Vec<Edge>,
    /// Lengths along the axis of places whose abscissae are known, and those abscissae.
    on: On,
    ends: (f64, f64),
}

/// How joints meet the roof.
#[derive(Debug, Clone)]
enum On {
    Axis(Path),
    /// The axis, and depths along it.
    Depth(Path, Vec<(f64, f64)>),
    /// The axis, and the drawn extrados.
    Drawn(Path, Path, Boxes),
}

impl Roof {
    /// The roof of a span whose depth is `stated` where no ring is drawn, m.
    pub fn new(span: &Span, stated: Option<RibDepth>) -> Self {
        let axis = span.axis.clone();
        let (path, on) = match (&span.ring, weight::depths(span, stated)) {
            (Some(ring), _) => {
                let on = On::Drawn(axis, ring.extrados.clone(), Boxes::new(&ring.extrados));
                (ring.extrados.clone(), on)
            }
            (None, Some(depths)) => {
                let path = offset(&axis, &depths).unwrap_or_else(|| axis.clone());
                (path, On::Depth(axis, depths))
            }
            (None, None) => (axis.clone(), On::Axis(axis)),
        };
        let mut roof = Self { edges: Vec::new(), on, ends: (0.0, 0.0) };
        let whole = roof.axis().length();
        let (first, last) = (roof.foot(0.0), roof.foot(whole));
        let (from, to) = (path.nearest(first).0, path.nearest(last).0);
        roof.edges = upward(&path, from.min(to), from.max(to));
        roof.ends = match (roof.edges.first(), roof.edges.last()) {
            (Some(a), Some(b)) => (a.left.x, b.right.x),
            _ => (first.x, last.x.max(first.x)),
        };
        roof
    }

    fn axis(&self) -> &Path {
        match &self.on {
            On::Axis(axis) | On::Depth(axis, _) | On::Drawn(axis, ..) => axis,
        }
    }

    /// Whether it is the axis itself, because no depth is known.
    pub fn is_axis(&self) -> bool {
        matches!(self.on, On::Axis(_))
    }

    /// Its left and right end, m.
    pub fn across(&self) -> (f64, f64) {
        self.ends
    }

    /// Its edges, from left to right.
    pub fn edges(&self) -> &[Edge] {
        &self.edges
    }

    /// Where the joint at length `s` of the axis meets it, m.
    pub fn foot(&self, s: f64) -> Point {
        let axis = self.axis();
        let s = s.clamp(0.0, axis.length());
        let (at, normal) = (axis.point_at(s), axis.normal_at(s, s > 0.0));
        match &self.on {
            On::Axis(_) => at,
            On::Depth(_, depths) => at + normal * (weight::depth_at(depths, s) / 2.0),
            On::Drawn(_, extrados, boxes) => {
                let slack = extrados.length() * tolerance::ONE_JOINT;
                let ahead = extrados.crossings_of_line(boxes, at, normal, slack);
                let first = ahead.iter().filter(|c| c.along > 0.0).min_by(|a, b| a.along.total_cmp(&b.along));
                // A ring that ends in a face which is not square to its axis has no place there.
                let s = first.map_or_else(|| extrados.nearest(at).0, |c| c.s);
                extrados.point_at(s)
            }
        }
    }

    /// Its height at an abscissa, m; `None` beside it.
    pub fn height_at(&self, x: f64) -> Option<f64> {
        let i = self.edges.partition_point(|e| e.right.x < x);
        let edge = self.edges.get(i).filter(|e| e.left.x <= x)?;
        Some(edge.y_at(x))
    }

    /// Vertical depth of fill over it up to a level, m: nothing where it reaches the level; `None` beside it.
    pub fn cover(&self, level: f64, x: f64) -> Option<f64> {
        Some((level - self.height_at(x)?).max(0.0))
    }

    /// Abscissae at which what stands on the ring is cut, for joints at ascending lengths along the axis, m. What faces
    /// downward carries nothing, so joints there are put at the end of what faces up.
    pub fn cuts(&self, joints: &[f64]) -> Vec<f64> {
        let (left, right) = self.ends;
        let mut xs: Vec<f64> = joints.iter().map(|s| self.foot(*s).x.clamp(left, right)).collect();
        let place = |better: &dyn Fn(f64, f64) -> bool| {
            xs.iter().enumerate().fold(0, |best, (i, x)| if better(*x, xs[best]) { i } else { best })
        };
        let (low, high) = (place(&|a, b| a < b), place(&|a, b| a >= b));
        for x in &mut xs[..low] {
            *x = left;
        }
        for x in xs.iter_mut().skip(high + 1) {
            *x = right;
        }
        if let (Some(first), Some(_)) = (xs.first().copied(), xs.last()) {
            let mut most = first;
            for x in &mut xs {
                most = most.max(*x);
                *x = most;
            }
        }
        if let Some(first) = xs.first_mut() {
            *first = left;
        }
        if let Some(last) = xs.last_mut() {
            *last = right;
        }
        xs
    }
}

/// The edges of a path between two of its lengths that run to the right, none over one before it.
fn upward(path: &Path, from: f64, to: f64) -> Vec<Edge> {
    let mut edges: Vec<Edge> = Vec::new();
    for (i, segment) in path.segments().iter().enumerate() {
        let (a, b) = (path.cumulative()[i], path.cumulative()[i + 1]);
        let Some(part) = part(segment, (from - a).max(0.0), (to - a).min(b - a)) else {
            continue;
        };
        let mut running: Vec<Edge> = directed(&part).into_iter().filter(|d| d.1).map(|d| d.0).collect();
        running.sort_by(|a, b| a.left.x.total_cmp(&b.left.x));
        for edge in running {
            let reached = edges.last().map_or(f64::NEG_INFINITY, |e| e.right.x);
            if edge.right.x > reached {
                edges.push(if edge.left.x < reached { edge.between(reached, edge.right.x) } else { edge });
            }
        }
    }
    edges
}

/// The part of a piece between two of its lengths.
pub(super) fn part(segment: &Segment, from: f64, to: f64) -> Option<Segment> {
    let length = segment.length();
    if to <= from {
        return None;
    }
    if from <= 0.0 && to >= length {
        return Some(*segment);
    }
    Some(match *segment {
        Segment::Line { .. } => Segment::line(segment.point_at(from), segment.point_at(to)),
        Segment::Arc { centre, radius, start_angle, sweep } => Segment::Arc {
            centre,
            radius,
            start_angle: start_angle + from / radius * sweep.signum(),
            sweep: (to - from) / radius * sweep.signum(),
        },
    })
}

/// The two lines of a ring with these depths along an axis, the inner one first.
pub(super) fn sides(axis: &Path, depths: &[(f64, f64)]) -> Option<[Path; 2]> {
    let inner: Vec<(f64, f64)> = depths.iter().map(|d| (d.0, -d.1)).collect();
    Some([offset(axis, &inner)?, offset(axis, depths)?])
}

/// The extrados of an axis with these depths (the intrados, with negative ones): exact where the depth is constant, else arcs
/// along it.
fn offset(axis: &Path, depths: &[(f64, f64)]) -> Option<Path> {
    let whole = axis.length();
    let mut pieces: Vec<Segment> = Vec::new();
    for (i, segment) in axis.segments().iter().enumerate() {
        let (a, b) = (axis.cumulative()[i], axis.cumulative()[i + 1]);
        let mut breaks: Vec<f64> = depths.iter().map(|d| d.0).filter(|s| *s > a && *s < b).collect();
        breaks.insert(0, a);
        breaks.push(b);
        for w in breaks.windows(2) {
            let (from, to) = (w[0], w[1]);
            let (d0, d1) = (weight::depth_at(depths, from), weight::depth_at(depths, to));
            let slope = if to > from { (d1 - d0) / (to - from) } else { 0.0 };
            let part = part(segment, from - a, to - a)?;
            match part {
                Segment::Arc { centre, radius, start_angle, sweep } if slope.abs() <= 0.0 => {
                    let radius = radius - sweep.signum() * d0 / 2.0;
                    // A ring deeper than its intrados is curved has no such side; its joints cross.
                    if radius <= 0.0 {
                        return None;
                    }
                    pieces.push(Segment::Arc { centre, radius, start_angle, sweep });
                }
                Segment::Line { start, end } => {
                    let t = (end - start).normalize();
                    let n = Vec2::new(-t.y, t.x);
                    pieces.push(Segment::line(start + n * (d0 / 2.0), end + n * (d1 / 2.0)));
                }
                Segment::Arc { radius, sweep, .. } => {
                    let turn = sweep.signum() / radius;
                    let curve = |s: f64| {
                        let (at, t) = (part.point_at(s), part.tangent_at(s));
                        let n = Vec2::new(-t.y, t.x);
                        let half = (d0 + slope * s) / 2.0;
                        // The normal turns by the curvature: n' = −κ t.
                        Some((at + n * half, t * (1.0 - turn * half) + n * (slope / 2.0)))
                    };
                    pieces.extend(fit::arcs(&curve, 0.0, to - from, tolerance::CURVE_FIT * whole)?);
                }
            }
        }
    }
    // Where the axis has a kink, the two sides of it are joined straight.
    let mut joined: Vec<Segment> = Vec::with_capacity(pieces.len());
    for piece in pieces {
        if let Some(last) = joined.last().map(Segment::end)
            && (piece.start() - last).hypot() > whole * tolerance::SAME_PLACE
        {
            joined.push(Segment::line(last, piece.start()));
        }
        joined.push(piece);
    }
    Path::new(joined)
}
