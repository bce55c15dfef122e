//! Object coordinates: how the format stores flat entities by a normal, and where their points lie in the drawing.

use crate::geometry::Affine;

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

    /// From the entity's coordinates to those of the drawing (or the block) it stands in.
    pub fn map(&self) -> Affine {
        Affine::of_columns(self.x, self.y, self.z)
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
        assert_eq!(frame.map(), Affine::IDENTITY);
    }

    #[test]
    fn normal_pointing_away_mirrors_x() {
        let frame = Frame::of_normal([0.0, 0.0, -1.0]).unwrap();
        assert_eq!(frame.map().point([3.0, 4.0, 0.0]), [-3.0, 4.0, 0.0]);
    }

    #[test]
    fn slanting_normal_by_hand() {
        // Normal along y: helper is the drawing's z axis, x = z × y = −x, y = n × x = z.
        let frame = Frame::of_normal([0.0, 2.0, 0.0]).unwrap();
        let p = frame.map().point([1.0, 2.0, 3.0]);
        assert!((p[0] + 1.0).abs() < 1e-15 && (p[1] - 3.0).abs() < 1e-15 && (p[2] - 2.0).abs() < 1e-15);
        assert!(Frame::of_normal([0.0, 0.0, 0.0]).is_none());
    }
}
