//! Plane curves made of straight and circular pieces, exact in both.
//!
//! Points are in the elevation plane: `x` to the right, `y` upward. Lengths are in whatever unit the caller uses; the
//! statics use metres. Arcs stay arcs: nothing here replaces one by chords or by cubics.

mod affine;
mod crossing;
pub mod fit;
pub mod slab;

pub use affine::Affine;
pub use crossing::{Boxes, Crossing};
pub use kurbo::{Point, Vec2};

use crate::tolerance;

/// One piece of a path.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Segment {
    /// A straight piece.
    Line {
        /// Where it begins.
        start: Point,
        /// Where it ends.
        end: Point,
    },
    /// A circular arc.
    Arc {
        /// Centre of the circle.
        centre: Point,
        /// Radius, positive.
        radius: f64,
        /// Direction of the start seen from the centre, radians counter-clockwise from the x axis.
        start_angle: f64,
        /// Angle swept from start to end, radians, counter-clockwise positive.
        sweep: f64,
    },
}

impl Segment {
    /// A straight piece between two points.
    pub fn line(start: Point, end: Point) -> Self {
        Self::Line { start, end }
    }

    /// The arc between two points by the drawing trade's *bulge*: the tangent of a quarter of the swept angle,
    /// positive counter-clockwise. A bulge of zero gives a straight piece.
    pub fn bulge(start: Point, end: Point, bulge: f64) -> Self {
        if bulge.abs() < tolerance::STRAIGHT_BULGE {
            return Self::line(start, end);
        }
        let chord = end - start;
        let half = chord.hypot() / 2.0;
        let sweep = 4.0 * bulge.atan();
        // Signed distance from the chord's middle to the centre along the left normal of the chord.
        let apothem = half * (1.0 - bulge * bulge) / (2.0 * bulge);
        let left = Vec2::new(-chord.y, chord.x) / chord.hypot();
        let centre = start.midpoint(end) + left * apothem;
        let radius = half * (1.0 + bulge * bulge) / (2.0 * bulge.abs());
        Self::Arc { centre, radius, start_angle: (start - centre).atan2(), sweep }
    }

    /// Where the piece begins.
    pub fn start(&self) -> Point {
        self.point_at(0.0)
    }

    /// Where the piece ends.
    pub fn end(&self) -> Point {
        match *self {
            Self::Line { end, .. } => end,
            Self::Arc { .. } => self.point_at(self.length()),
        }
    }

    /// Length along the piece.
    pub fn length(&self) -> f64 {
        match *self {
            Self::Line { start, end } => (end - start).hypot(),
            Self::Arc { radius, sweep, .. } => radius * sweep.abs(),
        }
    }

    /// The point at length `s` from the start.
    pub fn point_at(&self, s: f64) -> Point {
        match *self {
            Self::Line { start, end } => {
                let length = (end - start).hypot();
                if length > 0.0 { start + (end - start) * (s / length) } else { start }
            }
            Self::Arc { centre, radius, start_angle, sweep } => {
                let angle = start_angle + s / radius * sweep.signum();
                centre + Vec2::from_angle(angle) * radius
            }
        }
    }

    /// Unit tangent at length `s`, pointing from start to end.
    pub fn tangent_at(&self, s: f64) -> Vec2 {
        match *self {
            Self::Line { start, end } => (end - start).normalize(),
            Self::Arc { radius, start_angle, sweep, .. } => {
                let angle = start_angle + s / radius * sweep.signum();
                Vec2::from_angle(angle + std::f64::consts::FRAC_PI_2 * sweep.signum())
            }
        }
    }

    /// The same piece run the other way.
    #[must_use]
    pub fn reversed(&self) -> Self {
        match *self {
            Self::Line { start, end } => Self::Line { start: end, end: start },
            Self::Arc { centre, radius, start_angle, sweep } => {
                Self::Arc { centre, radius, start_angle: start_angle + sweep, sweep: -sweep }
            }
        }
    }

    /// The piece moved by `by` and then scaled by `factor` about the origin.
    #[must_use]
    pub fn shifted_scaled(&self, by: Vec2, factor: f64) -> Self {
        let map = |p: Point| ((p + by).to_vec2() * factor).to_point();
        match *self {
            Self::Line { start, end } => Self::Line { start: map(start), end: map(end) },
            Self::Arc { centre, radius, start_angle, sweep } => {
                Self::Arc { centre: map(centre), radius: radius * factor, start_angle, sweep }
            }
        }
    }
}

/// A chain of pieces, each beginning where the one before it ends, parametrised by length from its start.
#[derive(Debug, Clone, PartialEq)]
pub struct Path {
    segments: Vec<Segment>,
    /// Length up to the start of each segment, and the whole length at the end: `segments.len() + 1` values.
    cumulative: Vec<f64>,
}

impl Path {
    /// A path from pieces already in order; pieces of no length are left out. `None` when nothing is left.
    pub fn new(segments: impl IntoIterator<Item = Segment>) -> Option<Self> {
        let segments: Vec<Segment> =
            segments.into_iter().filter(|s| s.length() > 0.0 && s.length().is_finite()).collect();
        if segments.is_empty() {
            return None;
        }
        let mut cumulative = Vec::with_capacity(segments.len() + 1);
        let mut total = 0.0;
        cumulative.push(0.0);
        for segment in &segments {
            total += segment.length();
            cumulative.push(total);
        }
        Some(Self { segments, cumulative })
    }

    /// A path of straight pieces through the given points.
    pub fn polyline(points: &[Point]) -> Option<Self> {
        Self::new(points.windows(2).map(|w| Segment::line(w[0], w[1])))
    }

    /// The pieces.
    pub fn segments(&self) -> &[Segment] {
        &self.segments
    }

    /// Length from the start of the path to the start of each piece, and at last the whole length.
    pub fn cumulative(&self) -> &[f64] {
        &self.cumulative
    }

    /// Whole length.
    pub fn length(&self) -> f64 {
        self.cumulative[self.segments.len()]
    }

    /// Where the path begins.
    pub fn start(&self) -> Point {
        self.segments[0].start()
    }

    /// Where the path ends.
    pub fn end(&self) -> Point {
        self.segments[self.segments.len() - 1].end()
    }

    /// Index of the piece that holds length `s`; at a joint of two pieces, the earlier one when `before`, else the later.
    pub fn segment_index(&self, s: f64, before: bool) -> usize {
        let last = self.segments.len() - 1;
        let inner = &self.cumulative[1..=last];
        if before {
            inner.partition_point(|&c| c < s).min(last)
        } else {
            inner.partition_point(|&c| c <= s).min(last)
        }
    }

    /// The point at length `s` (clamped to the path).
    pub fn point_at(&self, s: f64) -> Point {
        let s = s.clamp(0.0, self.length());
        let i = self.segment_index(s, true);
        self.segments[i].point_at(s - self.cumulative[i])
    }

    /// Unit tangent at length `s`; at a kink, of the piece before it when `before`, else of the piece after it.
    pub fn tangent_at(&self, s: f64, before: bool) -> Vec2 {
        let s = s.clamp(0.0, self.length());
        let i = self.segment_index(s, before);
        self.segments[i].tangent_at(s - self.cumulative[i])
    }

    /// Unit normal at length `s`: the tangent turned a quarter counter-clockwise, so upward for a path from left to right.
    pub fn normal_at(&self, s: f64, before: bool) -> Vec2 {
        let t = self.tangent_at(s, before);
        Vec2::new(-t.y, t.x)
    }

    /// The path run the other way.
    #[must_use]
    pub fn reversed(&self) -> Self {
        let segments = self.segments.iter().rev().map(Segment::reversed);
        Self::new(segments).unwrap_or_else(|| self.clone())
    }

    /// The path moved by `by` and then scaled by `factor` about the origin.
    #[must_use]
    pub fn shifted_scaled(&self, by: Vec2, factor: f64) -> Self {
        let segments = self.segments.iter().map(|s| s.shifted_scaled(by, factor));
        Self::new(segments).unwrap_or_else(|| self.clone())
    }

    /// Lengths at which the path meets the vertical line at `x`, in order. A piece that runs along the line gives its
    /// two ends.
    pub fn crossings_of_vertical(&self, x: f64) -> Vec<f64> {
        let mut found = Vec::new();
        for (i, segment) in self.segments.iter().enumerate() {
            let base = self.cumulative[i];
            match *segment {
                Segment::Line { start, end } => {
                    let dx = end.x - start.x;
                    if dx.abs() <= f64::EPSILON * (start.x.abs() + end.x.abs()) {
                        if (start.x - x).abs() <= f64::EPSILON * x.abs().max(1.0) {
                            found.push(base);
                            found.push(base + segment.length());
                        }
                        continue;
                    }
                    let t = (x - start.x) / dx;
                    if (0.0..=1.0).contains(&t) {
                        found.push(base + t * segment.length());
                    }
                }
                Segment::Arc { centre, radius, start_angle, sweep } => {
                    let c = (x - centre.x) / radius;
                    if c.abs() > 1.0 {
                        // An end that lies on the line but for rounding still counts.
                        for (end, s) in [(segment.start(), 0.0), (segment.end(), segment.length())] {
                            if (end.x - x).abs() <= 4.0 * f64::EPSILON * x.abs().max(radius) {
                                found.push(base + s);
                            }
                        }
                        continue;
                    }
                    let half = c.acos();
                    for angle in [half, -half] {
                        if let Some(part) = swept_part(angle, start_angle, sweep) {
                            found.push(base + part * segment.length());
                        }
                    }
                }
            }
        }
        found.sort_by(f64::total_cmp);
        let gap = self.length() * tolerance::SAME_PLACE;
        found.dedup_by(|b, a| (*b - *a).abs() <= gap);
        found
    }

    /// The point of the path nearest to `p`: its length from the start, and its distance from `p`.
    pub fn nearest(&self, p: Point) -> (f64, f64) {
        let mut best = (0.0, f64::INFINITY);
        for (i, segment) in self.segments.iter().enumerate() {
            let (s, distance) = nearest_on_segment(segment, p);
            if distance < best.1 {
                best = (self.cumulative[i] + s, distance);
            }
        }
        best
    }

    /// The point farthest above the straight line from start to end, measured vertically: its length from the start and
    /// that height. With `below`, farthest below it (the height is then negative or zero). Of a level stretch, or
    /// of several places of one height, it is the middle, so that a mirrored path gives the mirrored point.
    pub fn farthest_from_chord(&self, below: bool) -> (f64, f64) {
        let (a, b) = (self.start(), self.end());
        let slope = if (b.x - a.x).abs() > 0.0 { (b.y - a.y) / (b.x - a.x) } else { 0.0 };
        let sign = if below { -1.0 } else { 1.0 };
        let height = |p: Point| sign * (p.y - a.y - slope * (p.x - a.x));
        let mut places: Vec<(f64, f64)> = Vec::with_capacity(self.segments.len() + 1);
        // The normal of the chord, scaled for heights measured vertically; on an arc the extreme lies in its direction.
        let up = Vec2::new(-slope, 1.0) * sign;
        for (i, segment) in self.segments.iter().enumerate() {
            let base = self.cumulative[i];
            places.push((base, height(segment.start())));
            if let Segment::Arc { centre, radius, start_angle, sweep } = *segment
                && let Some(part) = swept_part(up.atan2(), start_angle, sweep)
            {
                let p = centre + up.normalize() * radius;
                places.push((base + part * segment.length(), height(p)));
            }
        }
        places.push((self.length(), height(b)));
        let top = places.iter().fold(0.0, |m, p| f64::max(m, p.1));
        let level = |p: &(f64, f64)| top - p.1 <= self.length() * tolerance::SAME_PLACE;
        let first = places.iter().find(|p| level(p)).map_or(0.0, |p| p.0);
        let last = places.iter().rfind(|p| level(p)).map_or(0.0, |p| p.0);
        let s = f64::midpoint(first, last);
        (s, sign * top)
    }
}

/// The part (0 to 1) of an arc's sweep at which it passes the direction `angle`, if it does.
fn swept_part(angle: f64, start_angle: f64, sweep: f64) -> Option<f64> {
    let turn = std::f64::consts::TAU;
    let along = ((angle - start_angle) * sweep.signum()).rem_euclid(turn);
    let whole = sweep.abs();
    if along <= whole {
        Some(along / whole)
    } else if along - whole <= tolerance::SAME_ANGLE {
        Some(1.0)
    } else if turn - along <= tolerance::SAME_ANGLE {
        Some(0.0)
    } else {
        None
    }
}

/// Length along the piece of its point nearest to `p`, and the distance.
pub(crate) fn nearest_on_segment(segment: &Segment, p: Point) -> (f64, f64) {
    match *segment {
        Segment::Line { start, end } => {
            let d = end - start;
            let t = ((p - start).dot(d) / d.hypot2()).clamp(0.0, 1.0);
            (t * d.hypot(), (start + d * t - p).hypot())
        }
        Segment::Arc { centre, radius, start_angle, sweep } => {
            let from_centre = p - centre;
            if let Some(part) = swept_part(from_centre.atan2(), start_angle, sweep) {
                return (part * segment.length(), (from_centre.hypot() - radius).abs());
            }
            let to_start = (segment.start() - p).hypot();
            let to_end = (segment.end() - p).hypot();
            if to_start <= to_end { (0.0, to_start) } else { (segment.length(), to_end) }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn semicircle_by_bulge() {
        // Bulge 1 is half a turn; from right to left counter-clockwise it passes over the top.
        let arc = Segment::bulge(Point::new(5.0, 0.0), Point::new(-5.0, 0.0), 1.0);
        assert!((arc.length() - 5.0 * std::f64::consts::PI).abs() < 1e-12);
        assert!((arc.point_at(arc.length() / 2.0) - Point::new(0.0, 5.0)).hypot() < 1e-12);
        let path = Path::new([arc.reversed()]).unwrap();
        assert!((path.start() - Point::new(-5.0, 0.0)).hypot() < 1e-12);
        let (s, rise) = path.farthest_from_chord(false);
        assert!((rise - 5.0).abs() < 1e-12 && (s - path.length() / 2.0).abs() < 1e-9);
        let hit = path.crossings_of_vertical(3.0);
        assert_eq!(hit.len(), 1);
        assert!((path.point_at(hit[0]) - Point::new(3.0, 4.0)).hypot() < 1e-12);
        assert!((path.normal_at(path.length() / 2.0, true) - Vec2::new(0.0, 1.0)).hypot() < 1e-12);
    }

    #[test]
    fn nearest_on_polyline() {
        let path =
            Path::polyline(&[Point::new(0.0, 0.0), Point::new(4.0, 0.0), Point::new(4.0, 3.0)]).unwrap();
        let (s, d) = path.nearest(Point::new(5.0, 2.0));
        assert!((s - 6.0).abs() < 1e-12 && (d - 1.0).abs() < 1e-12);
    }
}
