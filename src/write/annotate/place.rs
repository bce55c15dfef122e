//! Where text fits: oriented boxes round texts, and what they must not touch.

use crate::geometry::{Point, Vec2};
use crate::tags::marks::{Across, Along};
use crate::write::text::columns;

/// Width of a character over the height of the capitals. The plain stroke font of most drawings takes one; outline
/// fonts take less. Narrower would let texts run into each other, wider would scatter them.
pub const CHARACTER: f64 = 1.0;

/// Width of a line of text.
pub fn width(text: &str, height: f64) -> f64 {
    let n = columns(text) as f64;
    n * CHARACTER * height
}

/// A rectangle at any angle.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Box2 {
    /// Its middle.
    pub centre: Point,
    /// Half its length and half its height.
    pub half: Vec2,
    /// Direction of its length, a unit vector.
    pub along: Vec2,
}

impl Box2 {
    /// An upright rectangle by two corners.
    pub fn upright(a: Point, b: Point) -> Self {
        Self {
            centre: a.midpoint(b),
            half: Vec2::new((b.x - a.x).abs() / 2.0, (b.y - a.y).abs() / 2.0),
            along: Vec2::new(1.0, 0.0),
        }
    }

    /// The rectangle that a line of text covers, descenders included.
    pub fn of_text(at: Point, height: f64, text: &str, angle: f64, across: Across, along: Along) -> Self {
        let w = width(text, height);
        let left = match across {
            Across::Left => 0.0,
            Across::Centre => -w / 2.0,
            Across::Right => -w,
        };
        let base = match along {
            Along::Baseline => 0.0,
            Along::Middle => -height / 2.0,
            Along::Top => -height,
        };
        let (low, high) = (base - 0.3 * height, base + 1.05 * height);
        let u = Vec2::from_angle(angle);
        let v = Vec2::new(-u.y, u.x);
        Self {
            centre: at + u * (left + w / 2.0) + v * f64::midpoint(low, high),
            half: Vec2::new(w / 2.0, (high - low) / 2.0),
            along: u,
        }
    }

    /// The same with a margin all round.
    #[must_use]
    pub fn grown(mut self, by: f64) -> Self {
        self.half += Vec2::new(by, by);
        self
    }

    /// Half the size of the upright rectangle that encloses it.
    pub fn reach(&self) -> Vec2 {
        let (u, h) = (self.along, self.half);
        Vec2::new(u.x.abs() * h.x + u.y.abs() * h.y, u.y.abs() * h.x + u.x.abs() * h.y)
    }

    /// Whether the two share any inner point.
    pub fn overlaps(&self, other: &Self) -> bool {
        let d = other.centre - self.centre;
        let (ra, rb) = (self.reach(), other.reach());
        if d.x.abs() >= ra.x + rb.x || d.y.abs() >= ra.y + rb.y {
            return false;
        }
        // Two rectangles are apart exactly when they are apart along one of their four sides' directions.
        [self.along, other.along].iter().all(|&u| {
            let v = Vec2::new(-u.y, u.x);
            [u, v].iter().all(|&axis| d.dot(axis).abs() < self.radius_along(axis) + other.radius_along(axis))
        })
    }

    fn radius_along(&self, axis: Vec2) -> f64 {
        let v = Vec2::new(-self.along.y, self.along.x);
        self.half.x * self.along.dot(axis).abs() + self.half.y * v.dot(axis).abs()
    }

    /// Whether a straight piece enters it.
    pub fn meets(&self, a: Point, b: Point) -> bool {
        let r = self.reach();
        let c = self.centre;
        if (a.x < c.x - r.x && b.x < c.x - r.x)
            || (a.x > c.x + r.x && b.x > c.x + r.x)
            || (a.y < c.y - r.y && b.y < c.y - r.y)
            || (a.y > c.y + r.y && b.y > c.y + r.y)
        {
            return false;
        }
        let v = Vec2::new(-self.along.y, self.along.x);
        let local = |p: Point| Vec2::new((p - c).dot(self.along), (p - c).dot(v));
        let (p, q) = (local(a), local(b));
        let d = q - p;
        // Clipping of the piece against the two pairs of sides.
        let (mut from, mut to) = (0.0_f64, 1.0_f64);
        for (start, step, half) in [(p.x, d.x, self.half.x), (p.y, d.y, self.half.y)] {
            if step.abs() <= f64::EPSILON * half {
                if start.abs() >= half {
                    return false;
                }
                continue;
            }
            let (t0, t1) = ((-half - start) / step, (half - start) / step);
            from = from.max(t0.min(t1));
            to = to.min(t0.max(t1));
        }
        from < to
    }

    /// Its corners.
    pub fn corners(&self) -> [Point; 4] {
        let v = Vec2::new(-self.along.y, self.along.x);
        let (a, b) = (self.along * self.half.x, v * self.half.y);
        [self.centre - a - b, self.centre + a - b, self.centre + a + b, self.centre - a + b]
    }
}

/// What is taken already: texts, and lines that no text may touch.
#[derive(Debug, Clone, Default)]
pub struct Taken {
    /// Boxes of texts and of what was drawn before.
    pub boxes: Vec<Box2>,
    /// Lines.
    pub lines: Vec<(Point, Point)>,
}

impl Taken {
    /// Whether a box with this much room round it touches nothing.
    pub fn is_free(&self, wanted: &Box2, room: f64) -> bool {
        let wanted = wanted.grown(room);
        !self.boxes.iter().any(|b| b.overlaps(&wanted))
            && !self.lines.iter().any(|&(a, b)| wanted.meets(a, b))
    }

    /// Keeps text off a chain of straight pieces.
    pub fn keep_off(&mut self, points: &[Point]) {
        self.lines.extend(points.windows(2).map(|pair| (pair[0], pair[1])));
    }
}

/// Places for labels along a line, as near as may be to where they belong (least squares), in the order given by
/// `wanted` (ascending) and at least `pitch` apart.
pub fn spread(wanted: &[f64], pitch: f64) -> Vec<f64> {
    // Taking `i * pitch` off turns "at least a pitch apart" into "ascending"; pooling neighbours that run against the
    // order into their mean is then the exact least-squares answer.
    let mut pools: Vec<(f64, usize)> = Vec::new();
    let mut offset = 0.0;
    for &value in wanted {
        pools.push((value - offset, 1));
        offset += pitch;
        while let [.., (a, n), (b, m)] = pools[..]
            && a > b
        {
            pools.truncate(pools.len() - 2);
            let mean = (a * n as f64 + b * m as f64) / (n + m) as f64;
            pools.push((mean, n + m));
        }
    }
    let mut offset = 0.0;
    let mut out = Vec::with_capacity(wanted.len());
    for (value, n) in pools {
        for _ in 0..n {
            out.push(value + offset);
            offset += pitch;
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn boxes_at_angles() {
        let a = Box2::upright(Point::new(0.0, 0.0), Point::new(4.0, 2.0));
        let mut b = Box2::upright(Point::new(4.5, 1.5), Point::new(6.5, 3.5));
        assert!(!a.overlaps(&b));
        b.centre = Point::new(4.9, 1.0);
        assert!(!a.overlaps(&Box2 { half: Vec2::new(0.8, 0.8), ..b }));
        // Turned by an eighth its corner reaches in.
        let turned =
            Box2 { half: Vec2::new(0.8, 0.8), along: Vec2::from_angle(std::f64::consts::FRAC_PI_4), ..b };
        assert!(a.overlaps(&turned));
        assert!(a.meets(Point::new(-1.0, 1.0), Point::new(5.0, 1.0)));
        assert!(a.meets(Point::new(1.0, 1.0), Point::new(1.5, 1.0)));
        assert!(!a.meets(Point::new(-1.0, 1.9), Point::new(0.9, 4.0)));
    }

    #[test]
    fn spread_keeps_order_and_pitch() {
        let out = spread(&[0.0, 0.0, 0.0, 10.0, 10.2], 1.0);
        assert_eq!(out.len(), 5);
        assert!(out.windows(2).all(|w| w[1] - w[0] >= 1.0 - 1e-12));
        assert!((out[1]).abs() < 1e-12, "the three share their mean: {out:?}");
        assert!((out[3] + out[4] - 20.2).abs() < 1e-12);
    }
}
