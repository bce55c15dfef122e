//! Loads before a joint, and the forces in it as exact affine functions of the unknowns.

use crate::geometry::{Point, Vec2};

/// Force of all loads that entered the ring before a joint, and their moment about the left springing.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub(super) struct Loads {
    pub fx: f64,
    pub fy: f64,
    /// `Σ (x F_y − y F_x)`.
    pub moment: f64,
}

impl Loads {
    pub fn add(&mut self, at: Point, force: Vec2) {
        self.fx += force.x;
        self.fy += force.y;
        self.moment += at.x * force.y - at.y * force.x;
    }

    pub fn plus(&self, other: &Self) -> Self {
        Self { fx: self.fx + other.fx, fy: self.fy + other.fy, moment: self.moment + other.moment }
    }
}

/// The loads before a joint in two sets: those that stay, and those that the load factor multiplies.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub(super) struct LoadSets {
    pub fixed: Loads,
    pub varying: Loads,
}

impl LoadSets {
    /// All loads with the varying ones times `factor`.
    pub fn times(&self, factor: f64) -> Loads {
        Loads {
            fx: self.fixed.fx + factor * self.varying.fx,
            fy: self.fixed.fy + factor * self.varying.fy,
            moment: self.fixed.moment + factor * self.varying.moment,
        }
    }

    pub fn enter(&mut self, e: &Entered) {
        let set = if e.varies { &mut self.varying } else { &mut self.fixed };
        set.add(e.at, e.force);
    }
}

/// Weight along the axis of one set: per length on the axis itself, per area of the ring, and per length of plan.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Weight {
    pub on_axis: f64,
    pub of_ring: f64,
    /// Negative for uplift.
    pub on_plan: f64,
}

impl Weight {
    pub fn is_zero(&self) -> bool {
        self.on_axis <= 0.0 && self.of_ring <= 0.0 && self.on_plan.abs() <= 0.0
    }

    /// Per length of axis at a joint of depth `d`, of what does not depend on the slope of the axis.
    pub fn at(&self, d: f64) -> f64 {
        self.on_axis + self.of_ring * d
    }
}

/// A joint normal to the axis: all that the forces in it depend on, but for the unknowns.
#[derive(Debug, Clone, Copy)]
pub(super) struct Joint {
    pub s: f64,
    pub at: Point,
    pub tangent: Vec2,
    pub depth: f64,
    pub loads: LoadSets,
    /// Index of the piece it belongs to, which tells the two sides of a load or a kink apart.
    pub piece: usize,
}

/// The unknowns `(H, V, M_0, λ)` in local units: the reaction, and the factor of the varying loads, which is 1 for a line
/// under the loads as they are.
pub(super) type Unknowns = [f64; 4];

/// Coefficients of the unknowns, and a constant.
pub(super) type Affine = ([f64; 4], f64);

impl Joint {
    /// Resultant of all that acts before the joint.
    pub fn resultant(&self, r: &Unknowns) -> Vec2 {
        let loads = self.loads.times(r[3]);
        Vec2::new(r[0] + loads.fx, r[1] + loads.fy)
    }

    /// Thrust `N = R · t`, compression positive.
    pub fn thrust(&self, r: &Unknowns) -> f64 {
        self.resultant(r).dot(self.tangent)
    }

    /// Shear `S = R · n`.
    pub fn shear(&self, r: &Unknowns) -> f64 {
        self.tangent.cross(self.resultant(r))
    }

    /// Moment of the thrust about the axis point, positive when a compression passes on the extrados side.
    pub fn moment(&self, r: &Unknowns) -> f64 {
        moment_about(self.at, &self.loads, r)
    }

    /// `M` as an affine function of the unknowns.
    pub fn moment_row(&self) -> Affine {
        moment_row(self.at, &self.loads)
    }

    /// `N` as an affine function of the unknowns.
    pub fn thrust_row(&self) -> Affine {
        self.force_row(self.tangent)
    }

    /// `S` as an affine function of the unknowns.
    pub fn shear_row(&self) -> Affine {
        self.force_row(self.normal())
    }

    fn force_row(&self, u: Vec2) -> Affine {
        let along = |l: &Loads| l.fx * u.x + l.fy * u.y;
        ([u.x, u.y, 0.0, along(&self.loads.varying)], along(&self.loads.fixed))
    }

    pub fn normal(&self) -> Vec2 {
        Vec2::new(-self.tangent.y, self.tangent.x)
    }
}

/// Moment about `p` of the reaction and of `loads`.
pub(super) fn moment_about(p: Point, loads: &LoadSets, r: &Unknowns) -> f64 {
    let loads = loads.times(r[3]);
    r[2] + (r[1] + loads.fy) * p.x - (r[0] + loads.fx) * p.y - loads.moment
}

/// The same as an affine function of the unknowns.
pub(super) fn moment_row(p: Point, loads: &LoadSets) -> Affine {
    let about = |l: &Loads| l.fy * p.x - l.fx * p.y - l.moment;
    ([-p.y, p.x, 1.0, about(&loads.varying)], about(&loads.fixed))
}

/// A load with its place along the ring, in local units.
#[derive(Debug, Clone, Copy)]
pub(super) struct Entered {
    /// Index into [`Problem::forces`].
    pub index: usize,
    pub foot: f64,
    pub at: Point,
    pub force: Vec2,
    /// Whether the load factor multiplies it.
    pub varies: bool,
}
