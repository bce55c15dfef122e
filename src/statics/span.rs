//! A span in local measures: the axis cut into smooth pieces, the loads that have entered the ring before each, and
//! the forces in any joint as exact affine functions of the three unknowns.
//!
//! Lengths are in units of the axis length, measured from the left springing; forces in units of the total load.
//! National grid coordinates, millimetres and meganewtons therefore all give the same arithmetic.

use super::{Depth, Force, Problem, Reaction, Unsolved};
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
    before: Loads,
    /// Distributed downward weight per length of axis.
    pub weight: f64,
    depth: f64,
    pub depth_slope: f64,
}

/// A joint normal to the axis: all that the forces in it depend on, but for the unknowns.
#[derive(Debug, Clone, Copy)]
pub(super) struct Joint {
    pub s: f64,
    pub at: Point,
    pub tangent: Vec2,
    pub depth: f64,
    pub loads: Loads,
    /// Index of the piece it belongs to, which tells the two sides of a load or a kink apart.
    pub piece: usize,
}

/// The unknowns `(H, V, M_0)` in local units.
pub(super) type Unknowns = [f64; 3];

impl Joint {
    /// Resultant of all that acts before the joint.
    pub fn resultant(&self, r: &Unknowns) -> Vec2 {
        Vec2::new(r[0] + self.loads.fx, r[1] + self.loads.fy)
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

    /// `M` as coefficients of the unknowns and a constant.
    pub fn moment_row(&self) -> ([f64; 3], f64) {
        moment_row(self.at, &self.loads)
    }

    /// `N` as coefficients of the unknowns and a constant.
    pub fn thrust_row(&self) -> ([f64; 3], f64) {
        let t = self.tangent;
        ([t.x, t.y, 0.0], self.loads.fx * t.x + self.loads.fy * t.y)
    }

    pub fn normal(&self) -> Vec2 {
        Vec2::new(-self.tangent.y, self.tangent.x)
    }
}

/// Moment about `p` of the reaction `r` and of `loads`.
pub(super) fn moment_about(p: Point, loads: &Loads, r: &Unknowns) -> f64 {
    r[2] + (r[1] + loads.fy) * p.x - (r[0] + loads.fx) * p.y - loads.moment
}

/// The same as coefficients of the unknowns and a constant.
pub(super) fn moment_row(p: Point, loads: &Loads) -> ([f64; 3], f64) {
    ([-p.y, p.x, 1.0], loads.fy * p.x - loads.fx * p.y - loads.moment)
}

impl Piece {
    /// The joint at length `s` of the axis.
    pub fn joint(&self, s: f64, piece: usize) -> Joint {
        let d = s - self.s0;
        let turn = Turn::new(self.curvature * d);
        let (t, n) = (self.tangent, Vec2::new(-self.tangent.y, self.tangent.x));
        let at = self.start + t * (d * turn.sinc) + n * (d * turn.cosc);
        let mut loads = self.before;
        if self.weight > 0.0 {
            // The weight stands on the axis: its moment is the integral of x along the piece.
            let integral = self.start.x * d + d * d * (t.x * turn.second + n.x * turn.angle * turn.third);
            loads.fy -= self.weight * d;
            loads.moment -= self.weight * integral;
        }
        Joint {
            s,
            at,
            tangent: t * turn.cos + n * turn.sin,
            depth: self.depth + self.depth_slope * d,
            loads,
            piece,
        }
    }

    /// Rate of change of `N` along the axis at a joint of this piece.
    pub fn thrust_slope(&self, joint: &Joint, r: &Unknowns) -> f64 {
        self.curvature * joint.shear(r) - self.weight * joint.tangent.y
    }

    /// Whether `M / (d N)` has no peak inside: `M` and `d N` are both linear there, or one of them is constant.
    pub fn is_plain(&self) -> bool {
        self.curvature.abs() == 0.0 && self.weight.abs() == 0.0
    }
}

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
}

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
    /// Distributed weight per local length, in local units.
    pub weight: f64,
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

        let (entered, missed) = place(&path, &boxes, &problem.forces, origin, length);
        let total: f64 = entered.iter().map(|e| e.force.hypot()).sum();
        let load = total + problem.weight_on_axis * length;
        let inside = |e: &&Entered| {
            e.force.hypot() > 0.0 && e.foot > tolerance::ONE_JOINT && e.foot < 1.0 - tolerance::ONE_JOINT
        };
        if problem.weight_on_axis <= 0.0 && entered.iter().find(inside).is_none() {
            return Err(Unsolved::NoLoad);
        }
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
            weight: problem.weight_on_axis * length / load,
        };
        for e in &mut span.entered {
            e.force /= load;
        }
        span.cut(&depth_table(problem.depth.as_ref(), length, crown.0));
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
        let mut loads = Loads::default();
        let mut next = 0;
        let enter = |next: &mut usize, until: f64, loads: &mut Loads| {
            while let Some(e) = self.entered.get(*next)
                && e.foot <= until
            {
                loads.add(e.at, e.force);
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

    /// `M = 0` about a point near the axis, as coefficients and a constant: the loads before its nearest joint count.
    pub fn hinge_row(&self, p: Point) -> ([f64; 3], f64) {
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

    /// Sum of all loads, in local units.
    pub fn total(&self) -> Vec2 {
        let loads = self.last().loads;
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
            before: Loads::default(),
            weight: 0.0,
            depth: 1.0,
            depth_slope: 0.0,
        }
    }
}

fn check_input(problem: &Problem) -> Result<(), Unsolved> {
    let bad = |what: &str| Err(Unsolved::Input(what.into()));
    if !problem.forces.iter().all(|f| f.at.is_finite() && f.force.is_finite()) {
        return bad("a load has a place or a force that is not a finite number");
    }
    if !(problem.weight_on_axis >= 0.0 && problem.weight_on_axis.is_finite()) {
        return bad("the weight along the axis must be zero or positive");
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
    forces: &[Force],
    origin: Point,
    length: f64,
) -> (Vec<Entered>, Vec<usize>) {
    let mut entered = Vec::with_capacity(forces.len());
    let mut missed = Vec::new();
    for (index, force) in forces.iter().enumerate() {
        let at = ((force.at - origin) / length).to_point();
        // A load whose factor is zero still has a place: below or above its point.
        let direction = if force.force.hypot() > 0.0 { force.force } else { Vec2::new(0.0, -1.0) };
        let crossings = path.crossings_of_line(boxes, at, direction, tolerance::ONE_JOINT);
        let first = crossings.iter().min_by(|a, b| {
            // Of two at one distance the one ahead of the force.
            a.along.abs().total_cmp(&b.along.abs()).then(b.along.total_cmp(&a.along))
        });
        let Some(first) = first else {
            missed.push(index);
            continue;
        };
        let mut foot = first.s;
        for end in [0.0, 1.0] {
            if (foot - end).abs() <= tolerance::ONE_JOINT {
                foot = end;
            }
        }
        entered.push(Entered { index, foot, at, force: force.force });
    }
    // Nothing may depend on the order of the input: loads with one foot follow by place and force.
    entered.sort_by(|a, b| {
        let key = |e: &Entered| [e.foot, e.at.x, e.at.y, e.force.x, e.force.y];
        let pairs = key(a).into_iter().zip(key(b));
        pairs.fold(std::cmp::Ordering::Equal, |o, (x, y)| o.then(x.total_cmp(&y)))
    });
    (entered, missed)
}
