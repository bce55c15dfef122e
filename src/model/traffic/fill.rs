//! Through fill: the print of each wheel spreads on both sides down to the extrados, and presses evenly on what it reaches.

use super::road::Road;
use super::{Parts, Push};
use crate::geometry::{Boxes, Path, Point, Segment, Vec2};
use crate::model::{Span, weight};
use crate::tolerance;

/// Pieces that a continuous ring is cut into; the pressure on each acts in the middle of what it covers.
const PIECES: u32 = 120;
/// Straight pieces that stand for a piece of an extrados of varying depth.
const CHORDS: u32 = 32;

/// The extrados in pieces, and how a force spreads down to it.
#[derive(Debug, Clone)]
pub(super) struct Fill {
    extrados: Path,
    boxes: Boxes,
    /// Abscissae of the ends of the pieces of the ring as they are seen from above, ascending, m.
    ends: Vec<f64>,
    /// Lengths along the axis of the middles of the pieces.
    pub middles: Vec<f64>,
    /// Horizontal per vertical.
    dispersal: f64,
}

impl Fill {
    /// The extrados of a span with a depth. `None` where no depth is known.
    pub fn new(span: &Span, depths: &[(f64, f64)], voussoirs: Option<u32>, dispersal: f64) -> Option<Self> {
        let axis = &span.axis;
        let extrados = match &span.ring {
            Some(ring) => ring.extrados.clone(),
            None => offset(axis, depths)?,
        };
        let boxes = Boxes::new(&extrados);
        let count = voussoirs.unwrap_or(PIECES).max(1);
        let length = axis.length();
        let mut xs = Vec::new();
        for k in 0..=count {
            let s = length * f64::from(k) / f64::from(count);
            let (p, n) = (axis.point_at(s), axis.normal_at(s, true));
            let slack = length * tolerance::ONE_JOINT;
            let ahead = extrados.crossings_of_line(&boxes, p, n, slack);
            let nearest =
                ahead.iter().filter(|c| c.along > -slack).map(|c| c.along).fold(f64::INFINITY, f64::min);
            let off = if nearest.is_finite() { nearest } else { weight::depth_at(depths, s) / 2.0 };
            xs.push((p + n * off).x);
        }
        // Where the ring leans over itself only its upper part is pressed on.
        let top = (0..xs.len()).max_by(|&a, &b| {
            let y = |k: usize| axis.point_at(length * k as f64 / f64::from(count)).y;
            y(a).total_cmp(&y(b))
        })?;
        for k in (0..top).rev() {
            xs[k] = xs[k].min(xs[k + 1]);
        }
        for k in top + 1..xs.len() {
            xs[k] = xs[k].max(xs[k - 1]);
        }
        let middles = (0..count).map(|k| length * (f64::from(k) + 0.5) / f64::from(count)).collect();
        Some(Self { extrados, boxes, ends: xs, middles, dispersal })
    }

    /// Abscissae of the ends of the ring as seen from above.
    pub fn ends(&self) -> (f64, f64) {
        (self.ends[0], self.ends[self.ends.len() - 1])
    }

    /// How far beside a wheel its force can reach on the ring, m, the road being at most `depth` above the ring's ends.
    pub fn reach(&self, road: &Road, contact: f64) -> f64 {
        let (a, b) = self.ends();
        let (ya, yb) = (self.extrados.start().y, self.extrados.end().y);
        let depth = (road.over_x(a).y - ya).max(road.over_x(b).y - yb).max(0.0);
        contact / 2.0 + 1.5 * self.dispersal * depth
    }

    /// A place where the road does not run over the extrados.
    pub fn below(&self, road: &Road) -> Option<Point> {
        let (a, b) = self.ends();
        let at = |k: u32| road.over_x(a + (b - a) * f64::from(k) / 200.0);
        (0..=200).map(at).find(|p| {
            let over = self.extrados.crossings_of_vertical(p.x);
            over.iter().any(|&s| self.extrados.point_at(s).y >= p.y)
        })
    }

    /// Where the edge of the spread that begins at a point of the road meets the level of the ring: to the left or right.
    fn edge(&self, from: Point, outward: f64) -> f64 {
        let down = Vec2::new(outward * self.dispersal, -1.0);
        let slack = self.extrados.length() * tolerance::ONE_JOINT;
        let length = down.hypot();
        let hit = self
            .extrados
            .crossings_of_line(&self.boxes, from, down, slack)
            .iter()
            .filter(|c| c.along >= 0.0)
            .map(|c| c.along)
            .fold(f64::INFINITY, f64::min);
        if hit.is_finite() {
            return from.x + down.x / length * hit;
        }
        // Beyond the ring it ends on the abutment, at the level of the ring's end.
        let (a, b) = (self.extrados.start(), self.extrados.end());
        let at_level = |y: f64| from.x + down.x * (from.y - y).max(0.0);
        if at_level(b.y) >= b.x { at_level(b.y) } else { at_level(a.y) }
    }

    /// Where a force that stands on a length `contact` of the road about a point goes: downward `down`, and `along` to the
    /// right at road level.
    pub fn hand_on(&self, at: Point, contact: f64, down: f64, along: f64, into: &mut Parts) {
        let half = Vec2::new(contact / 2.0, 0.0);
        let (from, to) = (self.edge(at - half, -1.0), self.edge(at + half, 1.0));
        let whole = Vec2::new(along, -down);
        let (first, last) = self.ends();
        let width = to - from;
        if width <= (last - first) * tolerance::SAME_PLACE {
            // A load on a line.
            return match self.piece(at.x) {
                Some(slot) => into.pushes.push(Push { slot, at, force: whole }),
                None => into.beside(at.x > first, whole),
            };
        }
        let part = |a: f64, b: f64| ((b.min(to) - a.max(from)) / width).max(0.0);
        let left = part(f64::NEG_INFINITY, first);
        let right = part(last, f64::INFINITY);
        if left > 0.0 {
            into.beside(false, whole * left);
        }
        if right > 0.0 {
            into.beside(true, whole * right);
        }
        let begin = self.ends.partition_point(|x| *x <= from).max(1) - 1;
        for slot in begin..self.middles.len() {
            let (a, b) = (self.ends[slot], self.ends[slot + 1]);
            if a >= to {
                break;
            }
            let share = part(a, b);
            if share > 0.0 {
                let middle = f64::midpoint(a.max(from), b.min(to));
                into.pushes.push(Push { slot, at: Point::new(middle, at.y), force: whole * share });
            }
        }
    }

    /// The piece under an abscissa.
    fn piece(&self, x: f64) -> Option<usize> {
        let (first, last) = self.ends();
        if !(first..=last).contains(&x) {
            return None;
        }
        let after = self.ends.partition_point(|e| *e <= x);
        Some(after.clamp(1, self.middles.len()) - 1)
    }
}

/// The outer edge of a ring of given depths about its axis: arcs stay arcs where the depth is constant.
fn offset(axis: &Path, depths: &[(f64, f64)]) -> Option<Path> {
    if let [(_, depth)] = depths {
        let segments = axis.segments().iter().enumerate().map(|(i, segment)| match *segment {
            Segment::Arc { centre, radius, start_angle, sweep } => {
                let radius = radius - sweep.signum() * depth / 2.0;
                Segment::Arc { centre, radius, start_angle, sweep }
            }
            Segment::Line { start, end } => {
                let n = axis.normal_at(axis.cumulative()[i], false) * (depth / 2.0);
                Segment::line(start + n, end + n)
            }
        });
        // At a kink the two edges leave a gap or cross; a straight piece closes it.
        let mut closed: Vec<Segment> = Vec::new();
        for segment in segments {
            if let Segment::Arc { radius, .. } = segment
                && radius <= 0.0
            {
                return None;
            }
            if let Some(last) = closed.last()
                && (last.end() - segment.start()).hypot() > axis.length() * tolerance::ONE_JOINT
            {
                closed.push(Segment::line(last.end(), segment.start()));
            }
            closed.push(segment);
        }
        return Path::new(closed);
    }
    let mut points = Vec::new();
    for cut in axis.cumulative().windows(2) {
        for k in 0..=CHORDS {
            let s = cut[0] + (cut[1] - cut[0]) * f64::from(k) / f64::from(CHORDS);
            let n = axis.normal_at(s, k > 0);
            points.push(axis.point_at(s) + n * (weight::depth_at(depths, s) / 2.0));
        }
    }
    Path::polyline(&points)
}
