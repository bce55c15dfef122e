//! From the coordinates of the marks to those of the drawing.

use crate::geometry::Point;
use crate::tags::marks::Plane;
use crate::tolerance;

/// A mark plane with what the format derives from its normal.
pub(super) struct Frame {
    plane: Plane,
    normal: [f64; 3],
    /// Axes of the object coordinate system that belongs to the normal.
    axis: [[f64; 3]; 2],
    /// The normal is the drawing's z axis, so object and drawing coordinates are the same.
    pub level: bool,
}

fn dot(a: [f64; 3], b: [f64; 3]) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

fn cross(a: [f64; 3], b: [f64; 3]) -> [f64; 3] {
    [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
}

fn unit(a: [f64; 3]) -> [f64; 3] {
    let length = dot(a, a).sqrt();
    a.map(|x| x / length)
}

impl Frame {
    /// None when the directions of the plane are not unit vectors square to each other, or not finite.
    pub fn new(plane: Plane) -> Option<Self> {
        let near = |value: f64, wanted: f64| (value - wanted).abs() <= tolerance::UNIT_VECTOR;
        let sound = near(dot(plane.right, plane.right), 1.0)
            && near(dot(plane.up, plane.up), 1.0)
            && near(dot(plane.right, plane.up), 0.0)
            && plane.origin.iter().all(|x| x.is_finite());
        if !sound {
            return None;
        }
        let normal = unit(cross(plane.right, plane.up));
        // The arbitrary axis algorithm of the DXF reference, "Object coordinate systems".
        let limit = 1.0 / 64.0;
        let near_z = normal[0].abs() < limit && normal[1].abs() < limit;
        let helper = if near_z { [0.0, 1.0, 0.0] } else { [0.0, 0.0, 1.0] };
        let x = unit(cross(helper, normal));
        let y = unit(cross(normal, x));
        let level = plane.right[2].abs() <= tolerance::UNIT_VECTOR
            && plane.up[2].abs() <= tolerance::UNIT_VECTOR
            && normal[2] > 0.0;
        Some(Self { plane, normal, axis: [x, y], level })
    }

    /// The direction that group 210 holds.
    pub fn normal(&self) -> [f64; 3] {
        self.normal
    }

    /// A point in drawing coordinates.
    pub fn world(&self, p: Point) -> [f64; 3] {
        let Plane { right, up, origin } = self.plane;
        std::array::from_fn(|i| origin[i] + right[i] * p.x + up[i] * p.y)
    }

    /// A point in the object coordinate system.
    pub fn object(&self, p: Point) -> [f64; 3] {
        let world = self.world(p);
        if self.level {
            return [world[0], world[1], self.plane.origin[2]];
        }
        let [x, y] = self.axis;
        // The third coordinate is the same for the whole plane.
        [dot(world, x), dot(world, y), dot(self.plane.origin, self.normal)]
    }

    /// A direction of the mark plane as degrees in the object coordinate system, from 0 to 360.
    pub fn degrees(&self, angle: f64) -> f64 {
        let right = self.plane.right;
        let turn = if self.level {
            right[1].atan2(right[0])
        } else {
            dot(right, self.axis[1]).atan2(dot(right, self.axis[0]))
        };
        (turn + angle).to_degrees().rem_euclid(360.0)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_ordinary_plane_changes_nothing() {
        let frame = Frame::new(Plane::XY).unwrap();
        assert!(frame.level);
        // To the bit: what is drawn in the plane of the drawing is written as it was asked for.
        let bits = |p: [f64; 3]| p.map(f64::to_bits);
        assert_eq!(bits(frame.object(Point::new(0.1, 0.7))), bits([0.1, 0.7, 0.0]));
        let right_angle = frame.degrees(std::f64::consts::FRAC_PI_2);
        assert_eq!(right_angle.to_bits(), 90.0f64.to_bits());
    }

    #[test]
    fn object_coordinates_lead_back_to_the_drawing() {
        let s = 0.5f64.sqrt();
        for (right, up) in [
            ([1.0, 0.0, 0.0], [0.0, 0.0, 1.0]),
            ([0.0, 1.0, 0.0], [0.0, 0.0, 1.0]),
            ([s, s, 0.0], [0.0, 0.0, 1.0]),
            ([-1.0, 0.0, 0.0], [0.0, 1.0, 0.0]),
        ] {
            let origin = [10.0, -20.0, 3.0];
            let frame = Frame::new(Plane { right, up, origin }).unwrap();
            assert!(!frame.level);
            let p = Point::new(1.25, -2.5);
            let [a, b, c] = frame.object(p);
            let world = frame.world(p);
            for (i, wanted) in world.into_iter().enumerate() {
                let back = a * frame.axis[0][i] + b * frame.axis[1][i] + c * frame.normal[i];
                assert!((back - wanted).abs() < 1e-12);
            }
            let angle = frame.degrees(0.3).to_radians();
            for i in 0..3 {
                let direction = angle.cos() * frame.axis[0][i] + angle.sin() * frame.axis[1][i];
                let wanted = right[i] * 0.3f64.cos() + up[i] * 0.3f64.sin();
                assert!((direction - wanted).abs() < 1e-12);
            }
        }
        // An x-z elevation is seen from the front: its normal points to negative y.
        let xz = Plane { right: [1.0, 0.0, 0.0], up: [0.0, 0.0, 1.0], origin: [0.0; 3] };
        let normal = Frame::new(xz).unwrap().normal();
        assert!(normal[0].abs() + (normal[1] + 1.0).abs() + normal[2].abs() < 1e-15);
        let skew = Plane { up: [0.1, 1.0, 0.0], ..Plane::XY };
        assert!(Frame::new(skew).is_none());
    }
}
