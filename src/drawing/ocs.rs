//! Object coordinates: how the format stores flat entities by a normal, and where their points lie in the drawing.

use crate::geometry::{Point, Segment, Vec2};
use crate::tolerance;

/// Axes of an entity's own coordinate system in drawing coordinates.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Frame {
    x: [f64; 3],
    y: [f64; 3],
    z: [f64; 3],
}

impl Frame {
    /// The drawing's own axes.
    pub const WORLD: Self = Self { x: [1.0, 0.0, 0.0], y: [0.0, 1.0, 0.0], z: [0.0, 0.0, 1.0] };

    /// The system that belongs to a normal (group 210), by the format's arbitrary axis rule: x is square to the
    /// drawing's y axis when the normal is nearly vertical, else to its z axis. `None` when the normal has no length.
    pub fn of_normal(normal: [f64; 3]) -> Option<Self> {
        let z = unit(normal)?;
        let limit = 1.0 / 64.0;
        let helper = if z[0].abs() < limit && z[1].abs() < limit { Self::WORLD.y } else { Self::WORLD.z };
        let x = unit(cross(helper, z))?;
        let y = unit(cross(z, x))?;
        Some(Self { x, y, z })
    }

    /// A point of the entity in drawing coordinates.
    pub fn world(&self, p: [f64; 3]) -> [f64; 3] {
        let part = |i: usize| p[0] * self.x[i] + p[1] * self.y[i] + p[2] * self.z[i];
        [part(0), part(1), part(2)]
    }

    /// Whether the entity is seen from the front (1.0) or from behind (−1.0) in the x-y plane of the drawing; `None` when
    /// its plane is another one.
    pub fn facing(&self) -> Option<f64> {
        (self.z[2].abs() > 1.0 - tolerance::FLAT_NORMAL).then(|| self.z[2].signum())
    }

    /// A flat curve of the entity (x and y of its own system, at height `z` in it) in the x-y plane of the drawing.
    /// `None` when the entity does not lie in that plane.
    pub fn flat_segment(&self, segment: &Segment) -> Option<Segment> {
        let facing = self.facing()?;
        let map = |p: Point| {
            let w = self.world([p.x, p.y, 0.0]);
            Point::new(w[0], w[1])
        };
        Some(match *segment {
            Segment::Line { start, end } => Segment::line(map(start), map(end)),
            Segment::Arc { centre, radius, start_angle, sweep } => {
                let toward = map(centre + Vec2::from_angle(start_angle)) - map(centre);
                // Exact for the usual normal, where the rotation is none.
                let start_angle =
                    if facing > 0.0 && self.x == Self::WORLD.x { start_angle } else { toward.atan2() };
                Segment::Arc { centre: map(centre), radius, start_angle, sweep: sweep * facing }
            }
        })
    }
}

fn cross(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
}

fn unit(v: [f64; 3]) -> Option<[f64; 3]> {
    let length = v.iter().map(|c| c * c).sum::<f64>().sqrt();
    (length > 0.0 && length.is_finite()).then(|| v.map(|c| c / length))
}

#[cfg(test)]
mod tests {
    // Whole numbers through a mirrored frame stay exact.
    #![allow(clippy::float_cmp)]

    use super::*;

    #[test]
    fn usual_normal_changes_nothing() {
        let frame = Frame::of_normal([0.0, 0.0, 1.0]).unwrap();
        assert_eq!(frame, Frame::WORLD);
        assert_eq!(frame.facing(), Some(1.0));
    }

    #[test]
    fn normal_pointing_away_mirrors_x() {
        let frame = Frame::of_normal([0.0, 0.0, -1.0]).unwrap();
        assert_eq!(frame.world([3.0, 4.0, 0.0]), [-3.0, 4.0, 0.0]);
        assert_eq!(frame.facing(), Some(-1.0));
        // A quarter from the entity's x to its y axis runs from drawing -x to y: clockwise.
        let arc = Segment::Arc {
            centre: Point::new(0.0, 0.0),
            radius: 2.0,
            start_angle: 0.0,
            sweep: std::f64::consts::FRAC_PI_2,
        };
        let seen = frame.flat_segment(&arc).unwrap();
        assert!((seen.start() - Point::new(-2.0, 0.0)).hypot() < 1e-15);
        assert!((seen.end() - Point::new(0.0, 2.0)).hypot() < 1e-15);
        let middle = seen.point_at(seen.length() / 2.0);
        assert!(middle.x < 0.0 && middle.y > 0.0);
    }

    #[test]
    fn slanting_normal_by_hand() {
        // Normal along y: helper is the drawing's z axis, x = z × y = −x, y = n × x = z.
        let frame = Frame::of_normal([0.0, 2.0, 0.0]).unwrap();
        let p = frame.world([1.0, 2.0, 3.0]);
        assert!((p[0] + 1.0).abs() < 1e-15 && (p[1] - 3.0).abs() < 1e-15 && (p[2] - 2.0).abs() < 1e-15);
        assert_eq!(frame.facing(), None);
        assert!(Frame::of_normal([0.0, 0.0, 0.0]).is_none());
    }
}
