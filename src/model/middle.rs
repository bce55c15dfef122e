//! The middle line of two curves: the points equally far from both, and the depth between them.
//!
//! A point of it is the centre of a circle that touches both curves (the medial axis; Blum 1967). Its tangent halves the
//! angle of theirs, and the joint through it stands square to that. Where the curves are concentric arcs, the line is the
//! arc midway.

use crate::geometry::{Boxes, Path, Point, Segment, Vec2, nearest_on_segment};
use crate::tolerance;

/// One of the two lines, drawn on beyond its ends so that joints near the springings meet it.
#[derive(Debug, Clone)]
struct Edge {
    path: Path,
    boxes: Boxes,
    /// Length by which it was drawn on at its start.
    lead: f64,
    /// Length as drawn.
    length: f64,
}

/// A ring between two lines, both from left to right.
#[derive(Debug, Clone)]
pub struct Band {
    inner: Edge,
    outer: Edge,
    /// Start of the inner line, from which all coordinates count here: grid coordinates would cost six digits.
    origin: Point,
    /// Length of the longer line: the measure of all tolerances.
    size: f64,
}

/// A joint of a ring.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Across {
    /// Distance to the inner line along the joint.
    pub inner: f64,
    /// Distance to the outer line along the joint.
    pub outer: f64,
}

impl Across {
    /// Depth that both sides of the axis have at least: twice the lesser distance.
    pub fn depth(&self) -> f64 {
        2.0 * self.inner.min(self.outer)
    }
}

/// The middle line with the depth along it.
#[derive(Debug, Clone, PartialEq)]
pub struct Middle {
    /// The line, from left to right.
    pub path: Path,
    /// Depths at lengths along it, ascending, linear between.
    pub depth: Vec<(f64, f64)>,
    /// Furthest that the line was found to stray from the true one where it was probed, in the unit of the curves.
    pub stray: f64,
    /// Greatest angle between a drawn end of the ring and its joint there, radians.
    pub skew: f64,
}

/// A point of the middle line.
#[derive(Debug, Clone, Copy)]
struct Node {
    at: Point,
    tangent: Vec2,
    depth: f64,
}

impl Edge {
    fn new(path: &Path, on: f64) -> Option<Self> {
        let segments = path.segments();
        let first = drawn_on(&segments[0].reversed(), on).reversed();
        let last = drawn_on(&segments[segments.len() - 1], on);
        let lead = first.length();
        let all = std::iter::once(first).chain(segments.iter().copied()).chain([last]);
        let extended = Path::new(all)?;
        Some(Self { boxes: Boxes::new(&extended), path: extended, lead, length: path.length() })
    }

    /// The point at a part (0 to 1) of the drawn length.
    fn at(&self, part: f64) -> Point {
        self.path.point_at(self.lead + part * self.length)
    }

    /// The nearest point to `p` among those within `reach` along the line of a part of its length.
    fn nearest(&self, p: Point, part: f64, reach: f64) -> (Point, f64) {
        let s = self.lead + part * self.length;
        let from = self.path.segment_index((s - reach).max(0.0), true);
        let to = self.path.segment_index((s + reach).min(self.path.length()), false);
        let mut best = (p, f64::INFINITY);
        for segment in &self.path.segments()[from..=to] {
            let (along, distance) = nearest_on_segment(segment, p);
            if distance < best.1 {
                best = (segment.point_at(along), distance);
            }
        }
        best
    }

    /// Distance from `p` along `direction` to the first meeting ahead.
    fn ahead(&self, p: Point, direction: Vec2) -> Option<f64> {
        let slack = self.path.length() * tolerance::ONE_JOINT;
        self.path
            .crossings_of_line(&self.boxes, p, direction, slack)
            .iter()
            .map(|c| c.along)
            .filter(|a| *a > 0.0)
            .min_by(f64::total_cmp)
    }
}

/// What a piece would run on to beyond its end: the same line or circle, an arc by a third of a half turn at most.
fn drawn_on(segment: &Segment, on: f64) -> Segment {
    match *segment {
        Segment::Line { end, .. } => Segment::line(end, end + segment.tangent_at(segment.length()) * on),
        Segment::Arc { centre, radius, start_angle, sweep } => {
            let angle = (on / radius).min(std::f64::consts::FRAC_PI_3);
            Segment::Arc { centre, radius, start_angle: start_angle + sweep, sweep: angle * sweep.signum() }
        }
    }
}

impl Band {
    /// A ring between its inner and its outer line, both from left to right. `None` where they touch at an end or have no
    /// length.
    pub fn new(inner: &Path, outer: &Path) -> Option<Self> {
        let origin = inner.start();
        let near = |p: &Path| p.shifted_scaled(-origin.to_vec2(), 1.0);
        let (inner, outer) = (&near(inner), &near(outer));
        let size = inner.length().max(outer.length());
        let ends = [(outer.start() - inner.start()).hypot(), (outer.end() - inner.end()).hypot()];
        if ends.iter().any(|&e| e <= tolerance::NO_DEPTH * size) {
            return None;
        }
        let on = 2.0 * f64::max(ends[0], ends[1]);
        Some(Self { inner: Edge::new(inner, on)?, outer: Edge::new(outer, on)?, origin, size })
    }

    /// Whether the outer line lies on the left of the inner one, as it does when both run from left to right over an arch.
    pub fn is_upright(&self) -> bool {
        let (a, b) = (self.inner.at(0.45), self.inner.at(0.55));
        (b - a).cross(self.outer.at(0.5) - self.inner.at(0.5)) > 0.0
    }

    /// The joint through `p` along the unit vector `normal`, which points to the outer line.
    pub fn across(&self, p: Point, normal: Vec2) -> Option<Across> {
        self.near(p - self.origin.to_vec2(), normal)
    }

    /// As [`Band::across`], from the origin of the ring.
    fn near(&self, p: Point, normal: Vec2) -> Option<Across> {
        Some(Across { inner: self.inner.ahead(p, -normal)?, outer: self.outer.ahead(p, normal)? })
    }

    /// The middle line. `None` where the lines touch or cross.
    pub fn middle(&self) -> Option<Middle> {
        let parts: Vec<f64> = (0..=BASE).map(|i| f64::from(i) / f64::from(BASE)).collect();
        let nodes: Vec<Node> = parts.iter().map(|&w| self.node(w)).collect::<Option<_>>()?;
        let mut build = Build {
            band: self,
            segments: Vec::new(),
            depths: vec![(0.0, nodes[0].depth)],
            length: 0.0,
            stray: 0.0,
        };
        for (w, n) in parts.windows(2).zip(nodes.windows(2)) {
            build.between((w[0], n[0]), (w[1], n[1]), tolerance::MIDDLE_HALVINGS)?;
        }
        let path = Path::new(one_arc_each(&build.segments, tolerance::ONE_ARC * self.size))?;
        let scale = path.length() / build.length;
        let depth = build.depths.iter().map(|&(s, d)| (s * scale, d)).collect();
        let skew = |part: f64, node: &Node| {
            let drawn = self.outer.at(part) - self.inner.at(part);
            let normal = Vec2::new(-node.tangent.y, node.tangent.x);
            normal.cross(drawn).atan2(normal.dot(drawn)).abs()
        };
        let skew = skew(0.0, &nodes[0]).max(skew(1.0, &nodes[nodes.len() - 1]));
        let path = path.shifted_scaled(self.origin.to_vec2(), 1.0);
        Some(Middle { path, depth: plain(depth), stray: build.stray, skew })
    }

    /// The point of the middle line between the points at one part of the length of either line.
    fn node(&self, part: f64) -> Option<Node> {
        let (a, b) = (self.inner.at(part), self.outer.at(part));
        let reach = 4.0 * (b - a).hypot();
        // Nearer to the inner line: negative. It changes sign between the two.
        let miss = |t: f64| {
            let p = a + (b - a) * t;
            self.inner.nearest(p, part, reach).1 - self.outer.nearest(p, part, reach).1
        };
        let (mut low, mut high) = (0.0, 1.0);
        let (mut at_low, mut at_high) = (miss(low), miss(high));
        if !(at_low < 0.0 && at_high > 0.0) {
            return None;
        }
        // The rule of false position, each end's weight halved when it stays (Illinois; Dowell and Jarratt 1971).
        let mut stayed = 0;
        let mut t = 0.5;
        for _ in 0..200 {
            t = (low * at_high - high * at_low) / (at_high - at_low);
            let value = miss(t);
            if value.abs() <= f64::EPSILON * self.size || high - low <= f64::EPSILON {
                break;
            }
            if value < 0.0 {
                (low, at_low) = (t, value);
                if stayed == 1 {
                    at_high /= 2.0;
                }
                stayed = 1;
            } else {
                (high, at_high) = (t, value);
                if stayed == -1 {
                    at_low /= 2.0;
                }
                stayed = -1;
            }
        }
        let at = a + (b - a) * t;
        let (inner, radius) = self.inner.nearest(at, part, reach);
        let (outer, _) = self.outer.nearest(at, part, reach);
        if radius <= tolerance::NO_DEPTH * self.size {
            return None;
        }
        let normal = ((at - inner) + (outer - at)).normalize();
        let tangent = Vec2::new(normal.y, -normal.x);
        let depth = self.near(at, normal).map_or(2.0 * radius, |j| j.depth());
        Some(Node { at, tangent, depth })
    }
}

/// Parts that a ring is looked at in before any is halved.
const BASE: u32 = 8;

struct Build<'a> {
    band: &'a Band,
    segments: Vec<Segment>,
    depths: Vec<(f64, f64)>,
    length: f64,
    stray: f64,
}

impl Build<'_> {
    /// Two arcs with one tangent between two points, or the same for both halves where those stray.
    fn between(&mut self, from: (f64, Node), to: (f64, Node), halvings: u32) -> Option<()> {
        let arcs = Path::new(biarc(&from.1, &to.1))?;
        let mut stray = 0.0_f64;
        let mut depth_stray = 0.0_f64;
        for part in [0.25, 0.5, 0.75] {
            let node = self.band.node(from.0 + (to.0 - from.0) * part)?;
            let (s, distance) = arcs.nearest(node.at);
            let linear = from.1.depth + (to.1.depth - from.1.depth) * s / arcs.length();
            stray = stray.max(distance);
            depth_stray = depth_stray.max((linear - node.depth).abs() / node.depth);
        }
        let good = stray <= tolerance::MIDDLE_LINE * self.band.size && depth_stray <= tolerance::RING_DEPTH;
        if !good && halvings > 0 && self.segments.len() < tolerance::MIDDLE_PIECES {
            let w = f64::midpoint(from.0, to.0);
            let middle = (w, self.band.node(w)?);
            self.between(from, middle, halvings - 1)?;
            return self.between(middle, to, halvings - 1);
        }
        self.stray = self.stray.max(stray);
        self.length += arcs.length();
        self.segments.extend_from_slice(arcs.segments());
        self.depths.push((self.length, to.1.depth));
        Some(())
    }
}

/// Two arcs that leave the first point and reach the second with their tangents and meet with one tangent, the tangent
/// lengths at both ends being equal (Bolton 1975).
fn biarc(from: &Node, to: &Node) -> Vec<Segment> {
    let chord = to.at - from.at;
    let sum = from.tangent + to.tangent;
    let bend = 2.0 * (1.0 - from.tangent.dot(to.tangent));
    let along = chord.dot(sum);
    // The stable root: along + √… is never small for tangents that lead on.
    let d = chord.hypot2() / (along + (along * along + bend * chord.hypot2()).sqrt());
    let middle = ((from.at.to_vec2() + from.tangent * d + to.at.to_vec2() - to.tangent * d) / 2.0).to_point();
    let quarter = |a: Vec2, b: Vec2| (a.cross(b).atan2(a.dot(b)) / 2.0).tan();
    [
        Segment::bulge(from.at, middle, quarter(from.tangent, middle - from.at)),
        Segment::bulge(middle, to.at, quarter(to.at - middle, to.tangent)),
    ]
    .into()
}

/// Arcs of one circle that follow one another as one arc, straight pieces in one line as one.
fn one_arc_each(segments: &[Segment], reach: f64) -> Vec<Segment> {
    let mut out: Vec<Segment> = Vec::new();
    // The first arc of the group stands for its circle, so that no drift adds up.
    let mut first: Option<Segment> = None;
    for &next in segments {
        let joined = match (first, out.last()) {
            (Some(Segment::Arc { centre, radius, .. }), Some(&Segment::Arc { sweep: before, .. })) => {
                match next {
                    Segment::Arc { centre: c, radius: r, sweep, .. }
                        if (c - centre).hypot() <= reach
                            && (r - radius).abs() <= reach
                            && (before + sweep).abs() < 1.9 * std::f64::consts::PI
                            && before * sweep > 0.0 =>
                    {
                        let start = out[out.len() - 1].start();
                        Some(Segment::bulge(start, next.end(), ((before + sweep) / 4.0).tan()))
                    }
                    _ => None,
                }
            }
            (Some(Segment::Line { .. }), Some(&Segment::Line { start, end })) => match next {
                Segment::Line { end: far, .. } => {
                    let way = far - start;
                    let off = way.cross(end - start).abs() / way.hypot();
                    (off <= reach).then(|| Segment::line(start, far))
                }
                Segment::Arc { .. } => None,
            },
            _ => None,
        };
        match joined {
            Some(segment) => {
                out.pop();
                out.push(segment);
            }
            None => {
                first = Some(next);
                out.push(next);
            }
        }
    }
    out
}

/// A table of depths; one value where they are all the same.
pub fn plain(table: Vec<(f64, f64)>) -> Vec<(f64, f64)> {
    let Some(&first) = table.first() else {
        return table;
    };
    if table.iter().all(|d| (d.1 - first.1).abs() <= tolerance::ONE_ARC * first.1) {
        return vec![first];
    }
    table
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::PI;

    fn arc(radius: f64, centre: Point, half: f64) -> Path {
        Path::new([Segment::Arc { centre, radius, start_angle: PI / 2.0 + half, sweep: -2.0 * half }])
            .unwrap()
    }

    #[test]
    fn concentric_arcs_give_the_arc_midway() {
        for half in [0.3, 1.0, PI / 2.0] {
            let c = Point::new(500_000.0, 200_000.0);
            let band = Band::new(&arc(4.7, c, half), &arc(5.3, c, half)).unwrap();
            assert!(band.is_upright());
            let middle = band.middle().unwrap();
            let [Segment::Arc { centre, radius, sweep, .. }] = middle.path.segments() else {
                panic!("{:?}", middle.path.segments());
            };
            assert!((*centre - c).hypot() < 1e-8 && (radius - 5.0).abs() < 1e-8, "{centre:?} {radius}");
            assert!((sweep + 2.0 * half).abs() < 1e-8);
            assert_eq!(middle.depth.len(), 1);
            assert!((middle.depth[0].1 - 0.6).abs() < 1e-9 && middle.skew < 1e-8);
        }
    }

    #[test]
    fn the_line_between_two_straight_lines_halves_their_angle() {
        let p = |x: f64, y: f64| Point::new(x, y);
        let inner = Path::polyline(&[p(0.0, 0.0), p(10.0, 0.0)]).unwrap();
        let outer = Path::polyline(&[p(0.0, 1.0), p(10.0, 2.0)]).unwrap();
        let middle = Band::new(&inner, &outer).unwrap().middle().unwrap();
        // The bisector of the angle at their meeting point (−10, 0).
        let angle = 0.1_f64.atan() / 2.0;
        for s in [0.0, 0.3, 0.7, 1.0] {
            let q = middle.path.point_at(s * middle.path.length());
            assert!((q.y - (q.x + 10.0) * angle.tan()).abs() < 1e-12);
        }
        let q = middle.path.start();
        let half = (q.x + 10.0) / angle.cos() * angle.tan();
        assert!((middle.depth[0].1 - 2.0 * half).abs() < 1e-12);
    }

    #[test]
    fn arcs_about_two_centres_meet_the_closed_form() {
        // The points equally far from two circles, one inside the other, make an ellipse with the centres as foci.
        let (r, big, off) = (4.7, 5.5, 0.3);
        let inner = arc(r, Point::ORIGIN, 1.2);
        let outer = arc(big, Point::new(0.0, -off), 1.2);
        let band = Band::new(&inner, &outer).unwrap();
        let middle = band.middle().unwrap();
        let sum = r + big;
        for k in 0..=1000 {
            let p = middle.path.point_at(middle.path.length() * f64::from(k) / 1000.0);
            let found = (p - Point::ORIGIN).hypot() + (p - Point::new(0.0, -off)).hypot();
            assert!((found - sum).abs() < 1e-6, "{k}: {}", found - sum);
        }
        assert!(middle.stray <= tolerance::MIDDLE_LINE * big * 2.4);
        // Depth at the crown.
        let top = middle.depth.iter().map(|d| d.1).fold(f64::INFINITY, f64::min);
        assert!((top - (big - off - r)).abs() < 1e-6, "{top}");
        println!("{} pieces", middle.path.segments().len());
    }

    #[test]
    fn a_mirrored_ring_has_the_mirrored_line() {
        let pts =
            |list: &[(f64, f64)]| -> Vec<Point> { list.iter().map(|&(x, y)| Point::new(x, y)).collect() };
        let inner = pts(&[(0.0, 0.0), (1.0, 1.4), (3.1, 2.4), (5.0, 2.2), (6.4, 1.1), (7.0, 0.0)]);
        let outer = pts(&[(-0.6, 0.2), (0.7, 2.0), (3.0, 3.0), (5.3, 2.8), (6.9, 1.4), (7.5, 0.1)]);
        let turned = |p: &[Point]| -> Vec<Point> { p.iter().rev().map(|q| Point::new(-q.x, q.y)).collect() };
        let line = |i: &[Point], o: &[Point]| {
            Band::new(&Path::polyline(i).unwrap(), &Path::polyline(o).unwrap()).unwrap().middle().unwrap()
        };
        let (a, b) = (line(&inner, &outer), line(&turned(&inner), &turned(&outer)));
        assert!((a.path.length() - b.path.length()).abs() < 1e-7);
        for k in 0..=50 {
            let part = f64::from(k) / 50.0;
            let p = a.path.point_at(part * a.path.length());
            let q = b.path.point_at((1.0 - part) * b.path.length());
            assert!((p.x + q.x).abs() < 1e-6 && (p.y - q.y).abs() < 1e-6, "{k} {p:?} {q:?}");
        }
    }
}
