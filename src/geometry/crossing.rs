//! Where a path meets a straight line, and whether it meets itself.
//!
//! Both walk a binary tree of bounding boxes over consecutive pieces, so that ten thousand pieces cost little more
//! than the pieces that are really near.

use super::{Path, Point, Segment, Vec2, swept_part};
use crate::tolerance;

/// Bounding boxes of the pieces of a path and of all halves, quarters … of it.
#[derive(Debug, Clone)]
pub struct Boxes {
    /// A heap: node `i` has children `2 i` and `2 i + 1`; the leaves start at `leaves`.
    nodes: Vec<Extent>,
    leaves: usize,
    count: usize,
}

/// An upright rectangle; empty when `x0 > x1`.
#[derive(Debug, Clone, Copy)]
struct Extent {
    x0: f64,
    y0: f64,
    x1: f64,
    y1: f64,
}

impl Extent {
    const EMPTY: Self =
        Self { x0: f64::INFINITY, y0: f64::INFINITY, x1: f64::NEG_INFINITY, y1: f64::NEG_INFINITY };

    fn take(&mut self, p: Point) {
        self.x0 = self.x0.min(p.x);
        self.y0 = self.y0.min(p.y);
        self.x1 = self.x1.max(p.x);
        self.y1 = self.y1.max(p.y);
    }

    fn join(self, other: Self) -> Self {
        Self {
            x0: self.x0.min(other.x0),
            y0: self.y0.min(other.y0),
            x1: self.x1.max(other.x1),
            y1: self.y1.max(other.y1),
        }
    }

    fn meets(self, other: Self) -> bool {
        self.x0 <= other.x1 && other.x0 <= self.x1 && self.y0 <= other.y1 && other.y0 <= self.y1
    }

    /// Whether the line through `p` along the unit vector `f` passes within `slack` of the rectangle.
    fn meets_line(self, p: Point, f: Vec2, slack: f64) -> bool {
        if self.x0 > self.x1 {
            return false;
        }
        let middle = Point::new((self.x0 + self.x1) / 2.0, (self.y0 + self.y1) / 2.0);
        let reach = (self.x1 - self.x0) / 2.0 * f.y.abs() + (self.y1 - self.y0) / 2.0 * f.x.abs();
        (middle - p).cross(f).abs() <= reach + slack
    }

    fn of(segment: &Segment) -> Self {
        let mut extent = Self::EMPTY;
        extent.take(segment.start());
        extent.take(segment.end());
        if let Segment::Arc { centre, radius, start_angle, sweep } = *segment {
            for quarter in [0.0, 1.0, 2.0, 3.0] {
                let angle = quarter * std::f64::consts::FRAC_PI_2;
                if swept_part(angle, start_angle, sweep).is_some() {
                    extent.take(centre + Vec2::from_angle(angle) * radius);
                }
            }
        }
        extent
    }
}

impl Boxes {
    /// The boxes of a path.
    pub fn new(path: &Path) -> Self {
        let count = path.segments().len();
        let leaves = count.next_power_of_two();
        let mut nodes = vec![Extent::EMPTY; 2 * leaves];
        for (node, segment) in nodes[leaves..].iter_mut().zip(path.segments()) {
            *node = Extent::of(segment);
        }
        for i in (1..leaves).rev() {
            nodes[i] = nodes[2 * i].join(nodes[2 * i + 1]);
        }
        Self { nodes, leaves, count }
    }
}

/// A place where a path meets a straight line.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Crossing {
    /// Length along the path.
    pub s: f64,
    /// Distance from the given point, along the direction positive.
    pub along: f64,
}

impl Path {
    /// All places where the path meets the line through `point` along `direction`, in their order along the path; an
    /// end of a piece within `slack` of the line counts. A piece that lies in the line gives its ends and, when `point`
    /// lies between them, `point`. Empty when `direction` is zero.
    pub fn crossings_of_line(
        &self,
        boxes: &Boxes,
        point: Point,
        direction: Vec2,
        slack: f64,
    ) -> Vec<Crossing> {
        let mut found = Vec::new();
        if direction.hypot() == 0.0 {
            return found;
        }
        let f = direction.normalize();
        let mut stack = vec![1];
        while let Some(node) = stack.pop() {
            if !boxes.nodes[node].meets_line(point, f, slack) {
                continue;
            }
            if node < boxes.leaves {
                stack.push(2 * node + 1);
                stack.push(2 * node);
            } else if node - boxes.leaves < boxes.count {
                let i = node - boxes.leaves;
                let base = self.cumulative()[i];
                meet_line(&self.segments()[i], point, f, slack, |s, along| {
                    found.push(Crossing { s: base + s, along });
                });
            }
        }
        found.sort_by(|a, b| a.s.total_cmp(&b.s));
        found
    }

    /// A point where the path crosses, touches or retraces itself, if there is one.
    pub fn self_crossing(&self, boxes: &Boxes) -> Option<Point> {
        let slack = self.length() * tolerance::ONE_JOINT;
        let mut stack = vec![(1_usize, 1_usize)];
        while let Some((a, b)) = stack.pop() {
            if !boxes.nodes[a].meets(boxes.nodes[b]) {
                continue;
            }
            match (a < boxes.leaves, a == b) {
                (true, true) => stack.extend([(2 * a, 2 * a), (2 * a + 1, 2 * a + 1), (2 * a, 2 * a + 1)]),
                (true, false) => stack.extend([
                    (2 * a, 2 * b),
                    (2 * a, 2 * b + 1),
                    (2 * a + 1, 2 * b),
                    (2 * a + 1, 2 * b + 1),
                ]),
                (false, true) => {
                    let segment = &self.segments()[a - boxes.leaves];
                    if let Segment::Arc { sweep, .. } = segment
                        && sweep.abs() >= std::f64::consts::TAU - tolerance::SAME_ANGLE
                    {
                        return Some(segment.start());
                    }
                }
                (false, false) => {
                    let (i, j) = (a - boxes.leaves, b - boxes.leaves);
                    let adjacent = j == i + 1;
                    let found = meet(&self.segments()[i], &self.segments()[j], adjacent, slack);
                    if found.is_some() {
                        return found;
                    }
                }
            }
        }
        None
    }
}

/// Offers every place where a piece meets the line through `p` along the unit vector `f`.
fn meet_line(segment: &Segment, p: Point, f: Vec2, slack: f64, mut offer: impl FnMut(f64, f64)) {
    let (a, b) = (segment.start(), segment.end());
    let (side_a, side_b) = ((a - p).cross(f), (b - p).cross(f));
    if side_a.abs() <= slack {
        offer(0.0, (a - p).dot(f));
    }
    if side_b.abs() <= slack {
        offer(segment.length(), (b - p).dot(f));
    }
    match *segment {
        Segment::Line { .. } => {
            if side_a.abs() <= slack && side_b.abs() <= slack {
                let (from, to) = ((a - p).dot(f), (b - p).dot(f));
                if from.min(to) < 0.0 && from.max(to) > 0.0 {
                    offer(segment.length() * from / (from - to), 0.0);
                }
            } else if side_a * side_b < 0.0 {
                let t = side_a / (side_a - side_b);
                offer(segment.length() * t, (a + (b - a) * t - p).dot(f));
            }
        }
        Segment::Arc { centre, radius, start_angle, sweep } => {
            let side = (centre - p).cross(f);
            let square = (radius - side.abs()) * (radius + side.abs());
            if square < -2.0 * radius * slack {
                return;
            }
            let half = square.max(0.0).sqrt();
            let middle = (centre - p).dot(f);
            for along in [middle - half, middle + half] {
                let direction = p + f * along - centre;
                if let Some(part) = swept_part(direction.atan2(), start_angle, sweep) {
                    offer(part * segment.length(), along);
                }
            }
        }
    }
}

/// A point where two pieces meet, other than the end they share when the second follows the first.
fn meet(a: &Segment, b: &Segment, adjacent: bool, slack: f64) -> Option<Point> {
    let radius = |s: &Segment| match *s {
        Segment::Line { .. } => 0.0,
        Segment::Arc { radius, .. } => radius,
    };
    // Two pieces that join smoothly seem to cross within the root of the rounding error on either side of the joint.
    let near = slack.max(tolerance::TANGENT_JOINT * radius(a).max(radius(b)));
    let joint = b.start();
    let counts = |p: &Point| !adjacent || (*p - joint).hypot() > near;
    match (*a, *b) {
        (Segment::Line { start: p, end: q }, Segment::Line { start: u, end: v }) => {
            let (d, e) = (q - p, v - u);
            let turn = d.cross(e);
            if turn.abs() <= tolerance::SAME_ANGLE * d.hypot() * e.hypot() {
                let apart = (u - p).cross(d).abs() / d.hypot();
                if apart > slack {
                    return None;
                }
                let place = |w: Point| (w - p).dot(d) / d.hypot2();
                let (from, to) = (place(u), place(v));
                let (low, high) = (from.min(to).max(0.0), from.max(to).min(1.0));
                return (high - low > 0.0)
                    .then(|| p + d * ((low + high) / 2.0))
                    .filter(|_| !adjacent || d.dot(e) < 0.0);
            }
            let t = (u - p).cross(e) / turn;
            let w = (u - p).cross(d) / turn;
            ((0.0..=1.0).contains(&t) && (0.0..=1.0).contains(&w)).then(|| p + d * t).filter(counts)
        }
        (Segment::Line { start, end }, arc @ Segment::Arc { .. })
        | (arc @ Segment::Arc { .. }, Segment::Line { start, end }) => {
            let d = end - start;
            let f = d.normalize();
            let mut found = None;
            meet_line(&arc, start, f, 0.0, |s, along| {
                let p = arc.point_at(s);
                if (0.0..=d.hypot()).contains(&along) && counts(&p) {
                    found = Some(p);
                }
            });
            found
        }
        (Segment::Arc { .. }, Segment::Arc { .. }) => meet_arcs(a, b, slack, counts),
    }
}

/// A point where two arcs meet and that `counts`.
fn meet_arcs(a: &Segment, b: &Segment, slack: f64, counts: impl Fn(&Point) -> bool) -> Option<Point> {
    let (
        &Segment::Arc { centre: c, radius: r, start_angle: from, sweep: turn },
        &Segment::Arc { centre: d, radius: q, start_angle: start, sweep: swept },
    ) = (a, b)
    else {
        return None;
    };
    let between = d - c;
    let distance = between.hypot();
    if distance <= slack && (r - q).abs() <= slack {
        // One circle: they overlap when an end of one, or its middle, lies inside the other.
        let ends = [b.point_at(b.length() / 2.0), b.start(), b.end()];
        let inside = |p: &Point| swept_part((*p - c).atan2(), from, turn).is_some();
        let other = [a.point_at(a.length() / 2.0), a.start(), a.end()];
        let within = |p: &Point| swept_part((*p - d).atan2(), start, swept).is_some();
        return ends
            .into_iter()
            .find(|p| inside(p) && counts(p))
            .or_else(|| other.into_iter().find(|p| within(p) && counts(p)));
    }
    if distance > r + q || distance < (r - q).abs() {
        return None;
    }
    let along = (distance * distance + (r - q) * (r + q)) / (2.0 * distance);
    let across = ((r - along) * (r + along)).max(0.0).sqrt();
    let unit = between / distance;
    let left = Vec2::new(-unit.y, unit.x);
    [across, -across].into_iter().map(|h| c + unit * along + left * h).find(|p| {
        swept_part((*p - c).atan2(), from, turn).is_some()
            && swept_part((*p - d).atan2(), start, swept).is_some()
            && counts(p)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn crossing(path: &Path) -> Option<Point> {
        path.self_crossing(&Boxes::new(path))
    }

    fn points(list: &[(f64, f64)]) -> Vec<Point> {
        list.iter().map(|&p| p.into()).collect()
    }

    #[test]
    fn crossings_of_straight_pieces() {
        let open = Path::polyline(&points(&[(0.0, 0.0), (1.0, 1.0), (2.0, 0.0)])).unwrap();
        assert_eq!(crossing(&open), None);
        let loops = Path::polyline(&points(&[(0.0, 0.0), (2.0, 2.0), (2.0, 0.0), (0.0, 2.0)])).unwrap();
        assert!((crossing(&loops).unwrap() - Point::new(1.0, 1.0)).hypot() < 1e-12);
        let back = Path::polyline(&points(&[(0.0, 0.0), (2.0, 0.0), (1.0, 0.0)])).unwrap();
        assert!(crossing(&back).is_some());
        let through = Path::polyline(&points(&[(0.0, 0.0), (1.0, 0.0), (2.0, 0.0)])).unwrap();
        assert_eq!(crossing(&through), None);
    }

    #[test]
    fn crossings_of_arcs() {
        // Two quarter circles of one circle, then a tangent line: no crossing.
        let r = 5.0;
        let quarter = (std::f64::consts::PI / 8.0).tan();
        let smooth = Path::new([
            Segment::bulge(Point::new(-r, 0.0), Point::new(0.0, r), -quarter),
            Segment::bulge(Point::new(0.0, r), Point::new(r, 0.0), -quarter),
            Segment::line(Point::new(r, 0.0), Point::new(r, -4.0)),
        ])
        .unwrap();
        assert_eq!(crossing(&smooth), None);
        // The line turns back through the arch.
        let looped = Path::new([
            Segment::bulge(Point::new(-r, 0.0), Point::new(0.0, r), -quarter),
            Segment::bulge(Point::new(0.0, r), Point::new(r, 0.0), -quarter),
            Segment::line(Point::new(r, 0.0), Point::new(-r, 4.0)),
        ])
        .unwrap();
        assert!(crossing(&looped).is_some());
        let two = Path::new([
            Segment::bulge(Point::new(0.0, 0.0), Point::new(4.0, 0.0), -1.0),
            Segment::line(Point::new(4.0, 0.0), Point::new(5.0, -1.0)),
            Segment::bulge(Point::new(5.0, -1.0), Point::new(2.0, 1.0), 0.8),
        ])
        .unwrap();
        assert!(crossing(&two).is_some());
    }

    #[test]
    fn line_meets_vertical_end() {
        let arc = Path::new([Segment::bulge(Point::new(-5.0, 0.0), Point::new(5.0, 0.0), -1.0)]).unwrap();
        let boxes = Boxes::new(&arc);
        let down = Vec2::new(0.0, -1.0);
        let at = |x: f64| arc.crossings_of_line(&boxes, Point::new(x, 9.0), down, 1e-9);
        assert!(at(-5.0 - 1e-10).iter().any(|c| c.s.abs() < 1e-6));
        assert!(at(5.1).is_empty());
        let hit = at(3.0);
        assert_eq!(hit.len(), 1);
        assert!((hit[0].along - 5.0).abs() < 1e-12);
    }
}
