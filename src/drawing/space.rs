//! The plane of the elevation: the drawing's x-y plane, or an upright one.

use crate::geometry::Affine;
use crate::job;
use crate::tags::marks::Plane;
use crate::tags::{Placement, Record};
use crate::tolerance;

/// A plane to look at.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct View {
    /// To the right of one who looks at it.
    right: [f64; 3],
    /// Upward.
    up: [f64; 3],
    /// Toward the one who looks.
    toward: [f64; 3],
}

impl View {
    /// Flat in the drawing: x to the right, y upward.
    pub const XY: Self = Self { right: [1.0, 0.0, 0.0], up: [0.0, 1.0, 0.0], toward: [0.0, 0.0, 1.0] };
    /// Upright, x to the right and z upward, seen against the direction of y.
    pub const XZ: Self = Self { right: [1.0, 0.0, 0.0], up: [0.0, 0.0, 1.0], toward: [0.0, -1.0, 0.0] };
    /// Upright, y to the right and z upward, seen from the side of x.
    pub const YZ: Self = Self { right: [0.0, 1.0, 0.0], up: [0.0, 0.0, 1.0], toward: [1.0, 0.0, 0.0] };

    /// The plane that the job states; none when it leaves the choice.
    pub fn stated(plane: job::Plane) -> Option<Self> {
        match plane {
            job::Plane::Auto => None,
            job::Plane::Xy => Some(Self::XY),
            job::Plane::Xz => Some(Self::XZ),
            job::Plane::Yz => Some(Self::YZ),
        }
    }

    /// The plane that points of space lie in, when it is the drawing's x-y plane or an upright one. Right is where x grows,
    /// or y where x does not.
    pub fn through(points: &[[f64; 3]]) -> Option<Self> {
        let first = points.first()?;
        let extent = |i: usize| points.iter().fold(0.0f64, |m, p| m.max((p[i] - first[i]).abs()));
        let slack = tolerance::FLAT * extent(0).hypot(extent(1)).hypot(extent(2));
        if extent(2) <= slack {
            return Some(Self::XY);
        }
        if extent(1) <= slack {
            return Some(Self::XZ);
        }
        if extent(0) <= slack {
            return Some(Self::YZ);
        }
        // The two points farthest apart in plan, nearly: the farthest from any, and the farthest from that.
        let away = |p: &[f64; 3], q: &[f64; 3]| (p[0] - q[0]).hypot(p[1] - q[1]);
        let farthest = |from: &[f64; 3]| {
            points.iter().copied().max_by(|p, q| away(p, from).total_cmp(&away(q, from))).unwrap_or(*first)
        };
        let a = farthest(first);
        let b = farthest(&a);
        let length = away(&a, &b);
        let (x, y) = ((b[0] - a[0]) / length, (b[1] - a[1]) / length);
        let flip = if x < 0.0 { -1.0 } else { 1.0 };
        let right = [x * flip, y * flip, 0.0];
        let view = Self { right, up: [0.0, 0.0, 1.0], toward: [right[1], -right[0], 0.0] };
        let off = |p: &[f64; 3]| ((p[0] - a[0]) * right[1] - (p[1] - a[1]) * right[0]).abs();
        points.iter().all(|p| off(p) <= slack).then_some(view)
    }

    /// Its name, for notes.
    pub fn name(&self) -> String {
        match *self {
            Self::XY => "x-y".into(),
            Self::XZ => "x-z".into(),
            Self::YZ => "y-z".into(),
            _ => {
                let angle = self.right[1].atan2(self.right[0]).to_degrees();
                format!("upright plane turned {angle:.4}° from the x axis")
            }
        }
    }

    /// From the drawing's coordinates to right, up, and the distance toward the one who looks.
    pub fn map(&self) -> Affine {
        Affine::of_rows(self.right, self.up, self.toward)
    }

    /// From the drawing's coordinates to those of its plan: right as in the elevation, upward away from the one who looks, and
    /// height. `None` in the x-y plane, where a plan is drawn flat beside the elevation.
    pub fn plan_map(&self) -> Option<Affine> {
        (*self != Self::XY).then(|| Affine::of_rows(self.right, self.toward.map(|c| -c), self.up))
    }

    /// Where marks of an elevation lie whose curves are at this height over the plane through the origin.
    pub fn plane(&self, z: f64) -> Plane {
        // Adding nothing turns a negative zero into a plain one.
        Plane { right: self.right, up: self.up, origin: self.toward.map(|c| c * z + 0.0) }
    }

    /// Records as they are seen.
    pub fn look(&self, records: &mut [Record]) {
        if *self == Self::XY {
            return;
        }
        let map = self.map();
        for record in records {
            let (inner, path) = match record.placement.take() {
                Some(placement) => (placement.map, placement.path),
                None => (Affine::IDENTITY, Vec::new()),
            };
            record.placement = Some(Box::new(Placement { map: map.after(&inner), path }));
        }
    }
}
