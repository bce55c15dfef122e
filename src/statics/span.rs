//! A span in local measures: the axis cut into smooth pieces, the loads that have entered the ring before each, and
//! the forces in any joint as exact affine functions of the three unknowns.
//!
//! Lengths are in units of the axis length, measured from the left springing; forces in units of the total load.
//! National grid coordinates, millimetres and meganewtons therefore all give the same arithmetic.

use super::{Depth, Problem, Reaction, Unsolved};
use crate::geometry::{Boxes, Path, Point, Segment, Vec2};
use crate::tolerance;

/// Force of all loads that entered the ring before a joint, and their moment about the left springing.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub(super) struct Loads {
    pub fx: f64,
    pub fy: f64,
    /// `Σ (x F_y − y F_x)`.
    pub moment: f64,
}

impl Loads {
    fn add(&mut self, at: Point, force: Vec2) {
        self.fx += force.x;
        self.fy += force.y;
        self.moment += at.x * force.y - at.y * force.x;
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

/// Weight along the axis of one set: per length on the axis itself, and per area of the ring.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Weight {
    pub on_axis: f64,
    pub of_ring: f64,
}

impl Weight {
    pub fn is_zero(&self) -> bool {
        self.on_axis <= 0.0 && self.of_ring <= 0.0
    }

    /// Per length of axis at a joint of depth `d`.
    fn at(&self, d: f64) -> f64 {
        self.on_axis + self.of_ring * d
    }
}

/// A stretch of the axis with one curvature, no load inside and a linear depth.
#[derive(Debug, Clone, Copy)]
pub(super) struct Piece {
    /// Length along the axis where it begins.
    pub s0: f64,
    /// Length along the axis where it ends; equal to `s0` for the joint before a load at the left springing.
    pub s1: f64,
    start: Point,
    tangent: Vec2,
    /// Turning to the left per length: negative for an arch.
    pub curvature: f64,
    before: LoadSets,
    /// Downward weight that stays, and weight that the load factor multiplies.
    weight: [Weight; 2],
    /// Depth that a line is measured by, and its slope: 1 throughout where none is known.
    depth: f64,
    pub depth_slope: f64,
    /// Depth of the ring that weighs, and its slope.
    ring: (f64, f64),
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
            set.fy -= force;
            set.moment -= moment;
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
        self.weight[0].at(depth) + r[3] * self.weight[1].at(depth)
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
        let weight = self.weight_at(joint, r);
        if weight > 0.0 { self.weight_arm(joint, r) / weight } else { 0.0 }
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

/// Largest number of voussoirs.
const MOST_VOUSSOIRS: usize = 100_000;

/// The span in local units.
#[derive(Debug, Clone)]
pub(super) struct Span {
    /// Left springing, m.
    pub origin: Point,
    /// Length of the axis, m: the local unit of length.
    pub length: f64,
    /// Sum of the magnitudes of all loads, kN: the local unit of force.
    pub load: f64,
    /// The axis from its springing at the origin, in local units.
    pub path: Path,
    pub pieces: Vec<Piece>,
    /// Loads that meet the axis, in their order along the ring; zero forces included.
    pub entered: Vec<Entered>,
    /// Indices of the others.
    pub missed: Vec<usize>,
    /// Crown: its length along the axis and its height over the chord.
    pub crown: (f64, f64),
    /// The axis lies wholly below its chord.
    pub hangs: bool,
    pub has_depth: bool,
    /// `1 / (2 f b)`; 0 for unlimited strength.
    pub crushing: f64,
    /// Weight along the axis that stays, and weight that the load factor multiplies.
    pub weight: [Weight; 2],
}

impl Span {
    /// Puts the loads on the ring and cuts the axis.
    pub fn new(problem: &Problem) -> Result<Self, Unsolved> {
        check_input(problem)?;
        let origin = problem.axis.start();
        let length = problem.axis.length();
        let path = problem.axis.shifted_scaled(-origin.to_vec2(), 1.0 / length);
        if path.end().x <= tolerance::NO_RISE {
            return Err(Unsolved::Input(
                "the axis must run from the left springing to the right one, not above one another".into(),
            ));
        }
        let boxes = Boxes::new(&path);
        let (above, below) = (path.farthest_from_chord(false), path.farthest_from_chord(true));
        let flat = tolerance::NO_RISE * path.end().x;
        if above.1 <= flat && -below.1 <= flat {
            return Err(Unsolved::NoRise);
        }
        if let Some(p) = path.self_crossing(&boxes) {
            let p = origin + p.to_vec2() * length;
            return Err(Unsolved::SelfCrossing(p.x, p.y));
        }
        let hangs = above.1 <= flat;
        let crown = if hangs || above.1 < -below.1 { below } else { above };

        let (mut entered, missed) = place(&path, &boxes, problem, origin, length);
        for e in &mut entered {
            e.varies = problem.varying.contains(&e.index);
        }
        let depth = depth_table(problem.depth.as_ref(), length, crown.0);
        let total: f64 = entered.iter().map(|e| e.force.hypot()).sum();
        let load = total + (problem.weight_on_axis + problem.ring_weight * mean(&depth) * length) * length;
        let inside = |e: &&Entered| {
            e.force.hypot() > 0.0 && e.foot > tolerance::ONE_JOINT && e.foot < 1.0 - tolerance::ONE_JOINT
        };
        let weight = Weight {
            on_axis: problem.weight_on_axis * length / load,
            of_ring: problem.ring_weight * length * length / load,
        };
        if problem.weight_on_axis + problem.ring_weight <= 0.0 && entered.iter().find(inside).is_none() {
            return Err(Unsolved::NoLoad);
        }
        let weight = match problem.weight_varies {
            false => [weight, Weight::default()],
            true => [Weight::default(), weight],
        };
        let mut span = Self {
            origin,
            length,
            load,
            path,
            pieces: Vec::new(),
            entered,
            missed,
            crown,
            hangs,
            has_depth: problem.depth.is_some(),
            crushing: problem.strength.map_or(0.0, |f| load / (2.0 * f * length)),
            weight,
        };
        for e in &mut span.entered {
            e.force /= load;
        }
        span.cut(&depth);
        // Measured again on the pieces, which keep the digits of hardly curved arcs.
        let (top, end) = (span.joint_at(crown.0, true).at, span.last().at);
        if span.crown.1.abs() > 0.0 {
            span.crown.1 = top.y - end.y / end.x * top.x;
        }
        if span.crown.1.abs() <= flat {
            return Err(Unsolved::NoRise);
        }
        Ok(span)
    }

    /// Cuts the axis at every joint of two segments, every load foot and every kink of the depth.
    fn cut(&mut self, depth: &[(f64, f64)]) {
        let cumulative = self.path.cumulative();
        let mut start = Point::ORIGIN;
        let mut loads = LoadSets::default();
        let mut next = 0;
        let enter = |next: &mut usize, until: f64, loads: &mut LoadSets| {
            while let Some(e) = self.entered.get(*next)
                && e.foot <= until
            {
                loads.enter(e);
                *next += 1;
            }
        };
        let slack = tolerance::SAME_PLACE;
        let mut pieces: Vec<Piece> = Vec::with_capacity(self.path.segments().len() + self.entered.len());
        if self.entered.first().is_some_and(|e| e.foot <= slack) {
            let mut first = Piece::straight(0.0, 0.0, start, self.path.tangent_at(0.0, false));
            (first.depth, first.depth_slope) = depth_at(depth, 0.0);
            pieces.push(first);
        }
        for (i, segment) in self.path.segments().iter().enumerate() {
            let (s0, s1) = (cumulative[i], cumulative[i + 1]);
            // Chaining keeps hardly curved arcs exact, whose centres are far away; a true gap in the path stays.
            let drawn = segment.start();
            let doubt = match *segment {
                Segment::Line { .. } => slack,
                Segment::Arc { radius, .. } => slack.max(16.0 * f64::EPSILON * radius),
            };
            if (drawn - start).hypot() > doubt {
                start = drawn;
            }
            let mut whole = Piece::straight(s0, s1, start, segment.tangent_at(0.0));
            if let Segment::Arc { radius, sweep, .. } = *segment {
                whole.curvature = sweep.signum() / radius;
            }
            let mut cuts: Vec<f64> = Vec::new();
            let inner = |s: &f64| *s > s0 + slack && *s < s1 - slack;
            let from = self.entered.partition_point(|e| e.foot <= s0);
            cuts.extend(self.entered[from..].iter().map(|e| e.foot).take_while(|&s| s < s1).filter(inner));
            cuts.extend(depth.iter().map(|d| d.0).filter(inner));
            if self.weight.iter().any(|w| w.of_ring > 0.0) {
                // Short enough for the weight by Gauss.
                let turn = (whole.curvature * (s1 - s0)).abs();
                let parts = (1..20).find(|&n| f64::from(n) * 0.5 >= turn).unwrap_or(20);
                cuts.extend((1..parts).map(|k| s0 + (s1 - s0) * f64::from(k) / f64::from(parts)));
            }
            cuts.sort_by(f64::total_cmp);
            cuts.dedup_by(|b, a| *b - *a <= slack);
            cuts.push(s1);
            let mut a = s0;
            for b in cuts {
                enter(&mut next, a + slack, &mut loads);
                let joint = whole.joint(a, 0);
                let mut piece = Piece {
                    s0: a,
                    s1: b,
                    start: joint.at,
                    tangent: joint.tangent,
                    before: loads,
                    weight: self.weight,
                    ..whole
                };
                let middle = depth_at(depth, f64::midpoint(a, b));
                piece.depth = middle.0 + middle.1 * (a - f64::midpoint(a, b));
                piece.depth_slope = middle.1;
                piece.ring = (piece.depth, piece.depth_slope);
                let end = piece.joint(b, 0);
                loads = end.loads;
                start = end.at;
                pieces.push(piece);
                a = b;
            }
        }
        if next < self.entered.len()
            && let Some(&last) = pieces.last()
        {
            enter(&mut next, f64::INFINITY, &mut loads);
            let joint = last.joint(last.s1, 0);
            pieces.push(Piece {
                s0: last.s1,
                start: joint.at,
                tangent: joint.tangent,
                before: loads,
                depth: joint.depth,
                ..last
            });
        }
        self.pieces = pieces;
    }

    /// The joint at length `s`, on the side before a load or kink there, or after it.
    pub fn joint_at(&self, s: f64, before: bool) -> Joint {
        let last = self.pieces.len() - 1;
        let i = if before {
            self.pieces.partition_point(|p| p.s1 < s - tolerance::SAME_PLACE).min(last)
        } else {
            self.pieces.partition_point(|p| p.s0 <= s + tolerance::SAME_PLACE).max(1) - 1
        };
        let piece = &self.pieces[i];
        piece.joint(s.clamp(piece.s0, piece.s1), i)
    }

    /// The first joint, before any load.
    pub fn first(&self) -> Joint {
        self.pieces[0].joint(self.pieces[0].s0, 0)
    }

    /// The last joint, after all loads.
    pub fn last(&self) -> Joint {
        let i = self.pieces.len() - 1;
        self.pieces[i].joint(self.pieces[i].s1, i)
    }

    /// `M` about a point near the axis as an affine function: the loads before its nearest joint count.
    pub fn hinge_row(&self, p: Point) -> Affine {
        let (s, _) = self.path.nearest(p);
        moment_row(p, &self.joint_at(s, true).loads)
    }

    /// A point of the drawing in local units.
    pub fn local(&self, p: Point) -> Point {
        ((p - self.origin) / self.length).to_point()
    }

    /// A local point in the drawing, m.
    pub fn drawn(&self, p: Point) -> Point {
        self.origin + p.to_vec2() * self.length
    }

    /// Unknowns in kN and kN·m.
    pub fn reaction(&self, r: &Unknowns) -> Reaction {
        Reaction {
            horizontal: r[0] * self.load,
            vertical: r[1] * self.load,
            moment: r[2] * self.load * self.length,
        }
    }

    /// The same span with depth 1 throughout, where `|M| / (d N)` is the eccentricity.
    pub fn with_unit_depth(&self) -> Self {
        let mut other = self.clone();
        for piece in &mut other.pieces {
            (piece.depth, piece.depth_slope) = (1.0, 0.0);
        }
        other.has_depth = false;
        other
    }

    /// Lever arm of the push that a line may count on: the rise, and the depth where one is known.
    pub fn lever(&self) -> f64 {
        let deepest = self.pieces.iter().fold(0.0, |m, p| f64::max(m, p.depth));
        self.crown.1.abs() + if self.has_depth { deepest } else { 0.0 }
    }

    /// Sum of all loads, in local units.
    pub fn total(&self) -> Vec2 {
        let loads = self.last().loads.times(1.0);
        Vec2::new(loads.fx, loads.fy)
    }
}

impl Piece {
    fn straight(s0: f64, s1: f64, start: Point, tangent: Vec2) -> Self {
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

fn check_input(problem: &Problem) -> Result<(), Unsolved> {
    let bad = |what: &str| Err(Unsolved::Input(what.into()));
    if !problem.entering.iter().all(|(i, s)| *i < problem.forces.len() && s.is_finite()) {
        return bad("a force that does not exist has a place where it enters the ring");
    }
    if problem.voussoirs.is_some_and(|n| n == 0 || n > MOST_VOUSSOIRS) {
        return bad("the number of voussoirs must be between 1 and 100 000");
    }
    if problem.strength.is_some_and(|f| !(f > 0.0 && f.is_finite())) {
        return bad("the strength must be positive");
    }
    if problem.friction.is_some_and(|f| !(f > 0.0 && f.is_finite())) {
        return bad("the coefficient of friction must be positive");
    }
    if !problem.forces.iter().all(|f| f.at.is_finite() && f.force.is_finite()) {
        return bad("a load has a place or a force that is not a finite number");
    }
    if ![problem.weight_on_axis, problem.ring_weight].iter().all(|w| *w >= 0.0 && w.is_finite()) {
        return bad("the weight of the rib must be zero or positive");
    }
    if problem.ring_weight > 0.0 && problem.depth.is_none() {
        return bad("the weight of the ring needs its depth");
    }
    let positive = |d: f64| d > 0.0 && d.is_finite();
    let sound = match &problem.depth {
        None => true,
        Some(Depth::Constant(d)) => positive(*d),
        Some(Depth::Linear { springing, crown }) => positive(*springing) && positive(*crown),
        Some(Depth::Table(table)) => {
            !table.is_empty()
                && table.iter().all(|&(s, d)| s.is_finite() && positive(d))
                && table.windows(2).all(|w| w[0].0 <= w[1].0)
        }
    };
    if !sound {
        return bad("the depth must be positive, and given at ascending lengths along the axis");
    }
    let ends = [problem.axis.start(), problem.axis.end()];
    if !(ends.iter().all(|p| p.is_finite()) && problem.axis.length().is_finite()) {
        return bad("the axis has a point that is not a finite number");
    }
    Ok(())
}

/// The depth as a table of lengths and depths in local units; 1 throughout where none is known, so that `M / (d N)` is
/// the eccentricity.
fn depth_table(depth: Option<&Depth>, length: f64, crown: f64) -> Vec<(f64, f64)> {
    match depth {
        None => vec![(0.0, 1.0)],
        Some(Depth::Constant(d)) => vec![(0.0, d / length)],
        Some(&Depth::Linear { springing, crown: top }) => {
            vec![(0.0, springing / length), (crown, top / length), (1.0, springing / length)]
        }
        Some(Depth::Table(table)) => table.iter().map(|&(s, d)| (s / length, d / length)).collect(),
    }
}

/// Mean depth over the axis, in local units.
fn mean(table: &[(f64, f64)]) -> f64 {
    let mut places: Vec<f64> = table.iter().map(|d| d.0).filter(|s| *s > 0.0 && *s < 1.0).collect();
    places.insert(0, 0.0);
    places.push(1.0);
    places.windows(2).map(|w| (w[1] - w[0]) * depth_at(table, f64::midpoint(w[0], w[1])).0).sum()
}

/// Depth and its slope at length `s`.
fn depth_at(table: &[(f64, f64)], s: f64) -> (f64, f64) {
    let i = table.partition_point(|d| d.0 <= s);
    if i == 0 {
        return (table[0].1, 0.0);
    }
    if i == table.len() {
        return (table[i - 1].1, 0.0);
    }
    let ((a, d), (b, e)) = (table[i - 1], table[i]);
    let slope = (e - d) / (b - a);
    (d + slope * (s - a), slope)
}

/// Where each load enters the ring: its line of action meets the axis first from its point, both ways along the force.
fn place(
    path: &Path,
    boxes: &Boxes,
    problem: &Problem,
    origin: Point,
    length: f64,
) -> (Vec<Entered>, Vec<usize>) {
    let mut stated = vec![None; problem.forces.len()];
    for &(index, s) in &problem.entering {
        if let Some(place) = stated.get_mut(index) {
            *place = Some(s / length);
        }
    }
    let mut entered = Vec::with_capacity(problem.forces.len());
    let mut missed = Vec::new();
    for (index, force) in problem.forces.iter().enumerate() {
        let at = ((force.at - origin) / length).to_point();
        // A load whose factor is zero still has a place: below or above its point.
        let direction = if force.force.hypot() > 0.0 { force.force } else { Vec2::new(0.0, -1.0) };
        let crossings = path.crossings_of_line(boxes, at, direction, tolerance::ONE_JOINT);
        let first = crossings.iter().min_by(|a, b| {
            // Of two at one distance the one ahead of the force.
            a.along.abs().total_cmp(&b.along.abs()).then(b.along.total_cmp(&a.along))
        });
        let Some(mut foot) = stated[index].or(first.map(|f| f.s)) else {
            missed.push(index);
            continue;
        };
        foot = foot.clamp(0.0, 1.0);
        for end in [0.0, 1.0] {
            if (foot - end).abs() <= tolerance::ONE_JOINT {
                foot = end;
            }
        }
        entered.push(Entered { index, foot, at, force: force.force, varies: false });
    }
    // Nothing may depend on the order of the input: loads with one foot follow by place and force.
    entered.sort_by(|a, b| {
        let key = |e: &Entered| [e.foot, e.at.x, e.at.y, e.force.x, e.force.y];
        let pairs = key(a).into_iter().zip(key(b));
        pairs.fold(std::cmp::Ordering::Equal, |o, (x, y)| o.then(x.total_cmp(&y)))
    });
    (entered, missed)
}
