//! A smooth stretch of the axis: its geometry and its weight in closed form, from any of its joints to any other.

use super::joint::{Joint, LoadSets, Unknowns, Weight};
use crate::geometry::{Point, Vec2};

/// A stretch of the axis with one curvature, no load inside and a linear depth.
#[derive(Debug, Clone, Copy)]
pub(super) struct Piece {
    /// Length along the axis where it begins.
    pub s0: f64,
    /// Length along the axis where it ends; equal to `s0` for the joint before a load at the left springing.
    pub s1: f64,
    pub start: Point,
    pub tangent: Vec2,
    /// Turning to the left per length: negative for an arch.
    pub curvature: f64,
    pub before: LoadSets,
    /// Downward weight that stays, and weight that the load factor multiplies.
    pub weight: [Weight; 2],
    /// Depth that a line is measured by, and its slope: 1 throughout where none is known.
    pub depth: f64,
    pub depth_slope: f64,
    /// Depth of the ring that weighs, and its slope.
    pub ring: (f64, f64),
}

impl Piece {
    /// The joint at length `s` of the axis.
    pub fn joint(&self, s: f64, piece: usize) -> Joint {
        let d = s - self.s0;
        let turn = Turn::new(self.curvature * d);
        let (t, n) = (self.tangent, Vec2::new(-self.tangent.y, self.tangent.x));
        let at = self.start + t * (d * turn.sinc) + n * (d * turn.cosc);
        let depth = self.depth + self.depth_slope * d;
        let mut loads = self.before;
        for (set, weight) in [&mut loads.fixed, &mut loads.varying].into_iter().zip(&self.weight) {
            if weight.is_zero() {
                continue;
            }
            let (force, moment) = if self.ring.1.abs() > 0.0 && weight.of_ring > 0.0 {
                self.weight_by_gauss(weight, d)
            } else {
                // The weight on the axis has the integral of x along the piece for its moment; that of the ring acts at
                // the centroid of each piece between two normals, outside the axis by curvature · depth² / 12.
                let integral = self.start.x * d + d * d * (t.x * turn.second + n.x * turn.angle * turn.third);
                let shift = self.curvature * self.ring.0.powi(3) / 12.0 * (at.y - self.start.y);
                let density = weight.at(self.ring.0);
                (density * d, density * integral + weight.of_ring * shift)
            };
            // A weight per length of plan has the integral of x over the plan for its moment.
            let plan = at.x - self.start.x;
            set.fy -= force + weight.on_plan * plan;
            set.moment -= moment + weight.on_plan * plan * f64::midpoint(at.x, self.start.x);
        }
        Joint { s, at, tangent: t * turn.cos + n * turn.sin, depth, loads, piece }
    }

    /// Weight up to `d` from the start of the piece and its moment about the left springing, where the depth varies. Ten
    /// points are exact to rounding on a piece that turns by half a radian at most.
    fn weight_by_gauss(&self, weight: &Weight, d: f64) -> (f64, f64) {
        let (mut force, mut moment) = (0.0, 0.0);
        for (x, w) in GAUSS_10 {
            for side in [-x, x] {
                let u = d / 2.0 * (1.0 + side);
                let turn = Turn::new(self.curvature * u);
                let (t, n) = (self.tangent, Vec2::new(-self.tangent.y, self.tangent.x));
                let at = self.start.x + t.x * u * turn.sinc + n.x * u * turn.cosc;
                let depth = self.ring.0 + self.ring.1 * u;
                let rise = t.y * turn.cos + n.y * turn.sin;
                let shift = weight.of_ring * self.curvature * depth.powi(3) / 12.0 * rise;
                force += w * d / 2.0 * weight.at(depth);
                moment += w * d / 2.0 * (weight.at(depth) * at + shift);
            }
        }
        (force, moment)
    }

    /// Weight per length of axis at a joint of this piece.
    pub fn weight_at(&self, joint: &Joint, r: &Unknowns) -> f64 {
        let depth = self.ring_depth(joint.s);
        let on_plan = self.weight[0].on_plan + r[3] * self.weight[1].on_plan;
        self.weight[0].at(depth) + r[3] * self.weight[1].at(depth) + on_plan * joint.tangent.x
    }

    /// Depth of the ring that weighs at length `s` of the axis.
    pub fn ring_depth(&self, s: f64) -> f64 {
        self.ring.0 + self.ring.1 * (s - self.s0)
    }

    /// How far to the right of the axis point the weight of a joint acts, times that weight.
    fn weight_arm(&self, joint: &Joint, r: &Unknowns) -> f64 {
        let ring = self.weight[0].of_ring + r[3] * self.weight[1].of_ring;
        ring * self.curvature * self.ring_depth(joint.s).powi(3) / 12.0 * joint.tangent.y
    }

    /// Where the line of action of the weight of a joint crosses the level of its axis point, right of it.
    pub fn weight_offset(&self, joint: &Joint, r: &Unknowns) -> f64 {
        let (weight, arm) = (self.weight_at(joint, r), self.weight_arm(joint, r));
        // Where uplift takes away what the ring weighs, no place is meant.
        if arm.abs() < weight.abs() * self.ring_depth(joint.s) { arm / weight } else { 0.0 }
    }

    /// Rate of change of `N` along the axis at a joint of this piece.
    pub fn thrust_slope(&self, joint: &Joint, r: &Unknowns) -> f64 {
        self.curvature * joint.shear(r) - self.weight_at(joint, r) * joint.tangent.y
    }

    /// Rate of change of `S`.
    pub fn shear_slope(&self, joint: &Joint, r: &Unknowns) -> f64 {
        -self.curvature * joint.thrust(r) - self.weight_at(joint, r) * joint.tangent.x
    }

    /// Rate of change of `M`: the shear, and the couple of a weight that acts beside the axis.
    pub fn moment_slope(&self, joint: &Joint, r: &Unknowns) -> f64 {
        joint.shear(r) + self.weight_arm(joint, r)
    }

    pub fn weighs(&self) -> bool {
        !(self.weight[0].is_zero() && self.weight[1].is_zero())
    }

    /// Whether `M / (d N)` has no peak inside: `M` and `d N` are both linear there, or one of them is constant.
    pub fn is_plain(&self) -> bool {
        self.curvature.abs() == 0.0 && !self.weighs()
    }
}

impl Piece {
    pub fn straight(s0: f64, s1: f64, start: Point, tangent: Vec2) -> Self {
        Self {
            s0,
            s1,
            start,
            tangent,
            curvature: 0.0,
            before: LoadSets::default(),
            weight: [Weight::default(); 2],
            depth: 1.0,
            depth_slope: 0.0,
            ring: (1.0, 0.0),
        }
    }
}

/// Abscissae (of both signs) and weights of the Gauss rule of ten points.
pub(super) const GAUSS_10: [(f64, f64); 5] = [
    (0.148_874_338_981_631_22, 0.295_524_224_714_752_87),
    (0.433_395_394_129_247_2, 0.269_266_719_309_996_35),
    (0.679_409_568_299_024_4, 0.219_086_362_515_982_04),
    (0.865_063_366_688_984_5, 0.149_451_349_150_580_6),
    (0.973_906_528_517_171_7, 0.066_671_344_308_688_14),
];

/// Sine, cosine and the integrals of a turning tangent that stay exact for hardly curved pieces.
struct Turn {
    angle: f64,
    sin: f64,
    cos: f64,
    /// `sin α / α`
    sinc: f64,
    /// `(1 − cos α) / α`
    cosc: f64,
    /// `(1 − cos α) / α²`
    second: f64,
    /// `(α − sin α) / α³`
    third: f64,
}

impl Turn {
    fn new(angle: f64) -> Self {
        let (sin, cos) = angle.sin_cos();
        if angle.abs() > 0.5 {
            let second = (1.0 - cos) / (angle * angle);
            return Self {
                angle,
                sin,
                cos,
                sinc: sin / angle,
                cosc: second * angle,
                second,
                third: (angle - sin) / (angle * angle * angle),
            };
        }
        // Taylor series; the ninth term is below 1e-19 at half a radian.
        let q = -angle * angle;
        let series = |first: f64, mut k: f64| {
            let (mut term, mut sum) = (first, first);
            for _ in 0..8 {
                term *= q / ((k + 1.0) * (k + 2.0));
                sum += term;
                k += 2.0;
            }
            sum
        };
        let second = series(0.5, 2.0);
        Self {
            angle,
            sin,
            cos,
            sinc: series(1.0, 1.0),
            cosc: second * angle,
            second,
            third: series(1.0 / 6.0, 3.0),
        }
    }
}
