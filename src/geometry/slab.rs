//! Areas between lines and arcs, exact in both, with their first moments.
//!
//! Curves are cut into *edges*, pieces that run from left to right without turning back. Upright cuts through every end and
//! every crossing of edges make slabs in which no two edges cross, so that each area in a slab lies between two of them.
//! What lies under an edge is a trapezoid under its chord and a segment of a circle (area `r² (θ − sin θ) / 2`, first moment
//! `c³ / 12` from the centre toward the arc, with the chord `c`): Green's theorem, piece by piece.

use super::{Point, Segment};
use crate::tolerance;

/// An area with its first moments.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Moments {
    /// The area.
    pub area: f64,
    /// `∫ x dA`.
    pub x: f64,
    /// `∫ y dA`.
    pub y: f64,
}

impl Moments {
    /// The centroid; `None` of nothing.
    pub fn centroid(&self) -> Option<Point> {
        (self.area.abs() > 0.0).then(|| Point::new(self.x / self.area, self.y / self.area))
    }

    /// The same about an origin that lies at `-by`: the area moved by `by`.
    #[must_use]
    pub fn moved(&self, by: super::Vec2) -> Self {
        Self { area: self.area, x: self.x + self.area * by.x, y: self.y + self.area * by.y }
    }
}

impl std::ops::AddAssign for Moments {
    fn add_assign(&mut self, other: Self) {
        self.area += other.area;
        self.x += other.x;
        self.y += other.y;
    }
}

impl std::ops::Sub for Moments {
    type Output = Self;

    fn sub(self, other: Self) -> Self {
        Self { area: self.area - other.area, x: self.x - other.x, y: self.y - other.y }
    }
}

/// A piece of a curve that runs from left to right.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Edge {
    /// Its left end.
    pub left: Point,
    /// Its right end.
    pub right: Point,
    /// Centre and radius of an arc, and whether it is the upper half of its circle.
    round: Option<(Point, f64, bool)>,
}

impl Edge {
    /// The edges of a piece; nothing of one that runs straight up or down.
    pub fn of(segment: &Segment) -> Vec<Self> {
        match *segment {
            Segment::Line { start, end } => {
                let (left, right) = if start.x <= end.x { (start, end) } else { (end, start) };
                if right.x > left.x { vec![Self { left, right, round: None }] } else { Vec::new() }
            }
            Segment::Arc { centre, radius, start_angle, sweep } => {
                let pi = std::f64::consts::PI;
                let (from, to) = if sweep >= 0.0 {
                    (start_angle, start_angle + sweep)
                } else {
                    (start_angle + sweep, start_angle)
                };
                let mut cuts = vec![from];
                let mut k = (from / pi).floor() + 1.0;
                while k * pi < to && cuts.len() < 5 {
                    cuts.push(k * pi);
                    k += 1.0;
                }
                cuts.push(to);
                let at = |angle: f64| {
                    // The ends of the piece itself are taken as it has them.
                    if angle.to_bits() == start_angle.to_bits() {
                        return segment.start();
                    }
                    centre + super::Vec2::from_angle(angle) * radius
                };
                let edge = |w: &[f64]| {
                    let upper = f64::midpoint(w[0], w[1]).sin() >= 0.0;
                    let (a, b) = (at(w[0]), at(w[1]));
                    let (left, right) = if a.x <= b.x { (a, b) } else { (b, a) };
                    (right.x > left.x).then_some(Self { left, right, round: Some((centre, radius, upper)) })
                };
                cuts.windows(2).filter_map(edge).collect()
            }
        }
    }

    /// Its height at `x`, which counts as its nearer end when it lies beside it.
    pub fn y_at(&self, x: f64) -> f64 {
        if x <= self.left.x {
            return self.left.y;
        }
        if x >= self.right.x {
            return self.right.y;
        }
        match self.round {
            None => {
                let part = (x - self.left.x) / (self.right.x - self.left.x);
                self.left.y + (self.right.y - self.left.y) * part
            }
            Some((centre, radius, upper)) => {
                let d = x - centre.x;
                let h = ((radius - d) * (radius + d)).max(0.0).sqrt();
                centre.y + if upper { h } else { -h }
            }
        }
    }

    /// The part of it between two abscissae.
    #[must_use]
    pub fn between(&self, a: f64, b: f64) -> Self {
        let (a, b) = (a.max(self.left.x), b.min(self.right.x));
        Self { left: Point::new(a, self.y_at(a)), right: Point::new(b, self.y_at(b)), round: self.round }
    }

    /// The area between the x axis and the edge from `a` to `b`; negative where the edge lies under the axis.
    pub fn under(&self, a: f64, b: f64) -> Moments {
        let (p, q) = (Point::new(a, self.y_at(a)), Point::new(b, self.y_at(b)));
        let w = q.x - p.x;
        let mut m = Moments {
            area: w * (p.y + q.y) / 2.0,
            x: w * (p.x * (2.0 * p.y + q.y) + q.x * (p.y + 2.0 * q.y)) / 6.0,
            y: w * (p.y * p.y + p.y * q.y + q.y * q.y) / 6.0,
        };
        if let Some((centre, radius, upper)) = self.round {
            let chord = (q - p).hypot();
            let half = (chord / (2.0 * radius)).min(1.0).asin();
            let area = radius * radius / 2.0 * without_sine(2.0 * half);
            let side = if upper { 1.0 } else { -1.0 };
            let out = super::Vec2::new(-(q.y - p.y), q.x - p.x) / chord.max(f64::MIN_POSITIVE) * side;
            let first = out * (chord.powi(3) / 12.0) + centre.to_vec2() * area;
            m += Moments { area: side * area, x: side * first.x, y: side * first.y };
        }
        m
    }

    /// Abscissae between the ends of both where their lines or circles meet; a few more do no harm.
    fn crossings(&self, other: &Self) -> Vec<f64> {
        let (a, b) = (self.left.x.max(other.left.x), self.right.x.min(other.right.x));
        let xs = match (self.round, other.round) {
            (None, None) => {
                let (d, e) = (self.right - self.left, other.right - other.left);
                let turn = d.cross(e);
                if turn.abs() > 0.0 {
                    let t = (other.left - self.left).cross(e) / turn;
                    vec![self.left.x + d.x * t]
                } else {
                    Vec::new()
                }
            }
            (None, Some((c, r, _))) => line_and_circle(self.left, self.right - self.left, c, r),
            (Some((c, r, _)), None) => line_and_circle(other.left, other.right - other.left, c, r),
            (Some((c, r, _)), Some((e, q, _))) => {
                let way = e - c;
                let d2 = way.hypot2();
                if d2.sqrt() <= tolerance::SAME_PLACE * (r + q) {
                    return Vec::new();
                }
                let along = (d2 + r * r - q * q) / (2.0 * d2);
                let foot = c + way * along;
                line_and_circle(foot, super::Vec2::new(-way.y, way.x), c, r)
            }
        };
        xs.into_iter().filter(|x| *x > a && *x < b).collect()
    }
}

/// Abscissae where a straight line meets a circle.
fn line_and_circle(p: Point, along: super::Vec2, centre: Point, radius: f64) -> Vec<f64> {
    let length = along.hypot();
    if length <= 0.0 {
        return Vec::new();
    }
    let u = along / length;
    let to = centre - p;
    let (foot, off) = (to.dot(u), to.cross(u));
    let half = (radius - off) * (radius + off);
    if half < 0.0 {
        return Vec::new();
    }
    let half = half.sqrt();
    [foot - half, foot + half].into_iter().map(|t| p.x + u.x * t).collect()
}

/// `θ − sin θ`, exact to rounding for small angles too.
fn without_sine(angle: f64) -> f64 {
    if angle.abs() > 0.5 {
        return angle - angle.sin();
    }
    let q = angle * angle;
    let (mut term, mut sum, mut k) = (angle * q / 6.0, 0.0, 3.0);
    for _ in 0..9 {
        sum += term;
        term *= -q / ((k + 1.0) * (k + 2.0));
        k += 2.0;
    }
    sum
}

/// An edge with what it bounds.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Bounding {
    /// The edge.
    pub edge: Edge,
    /// Number of the curve that it is a part of.
    pub owner: usize,
}

/// A part of a slab between two neighbouring edges.
#[derive(Debug, Clone, Copy)]
pub struct Between<'a> {
    /// Abscissae of its sides.
    pub sides: (f64, f64),
    /// The edge below it.
    pub below: &'a Bounding,
    /// The edge above it.
    pub above: &'a Bounding,
    /// For every curve, whether an odd number of its edges lies below.
    pub odd: &'a [bool],
}

impl Between<'_> {
    /// Its area.
    pub fn moments(&self) -> Moments {
        let (a, b) = self.sides;
        self.above.edge.under(a, b) - self.below.edge.under(a, b)
    }
}

/// A place where two edges cross.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Crossed {
    /// Where.
    pub at: Point,
    /// The curves that the two belong to.
    pub owners: [usize; 2],
}

/// The work would be more than [`tolerance::SLAB_STEPS`]: edges that lie over one another without measure.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct TooMany;

/// Walks through all slabs from left to right and in each from below; `cuts` are further abscissae to cut at. Gives back
/// where edges of the first `told` curves cross.
///
/// # Errors
/// When there are too many edges over one another.
pub fn walk(
    edges: &[Bounding],
    owners: usize,
    told: usize,
    cuts: &[f64],
    each: &mut dyn FnMut(&Between<'_>),
) -> Result<Vec<Crossed>, TooMany> {
    let mut order: Vec<usize> = (0..edges.len()).collect();
    order.sort_by(|&a, &b| edges[a].edge.left.x.total_cmp(&edges[b].edge.left.x).then(a.cmp(&b)));
    let size = extent(edges);
    let mut xs: Vec<f64> = cuts.iter().copied().filter(|x| x.is_finite()).collect();
    xs.extend(edges.iter().flat_map(|e| [e.edge.left.x, e.edge.right.x]));
    let mut steps = 0usize;
    crossings(edges, &order, &mut xs, &mut steps)?;
    xs.sort_by(f64::total_cmp);
    xs.dedup_by(|b, a| *b - *a <= tolerance::SAME_PLACE * size);
    let mut active: Vec<usize> = Vec::new();
    let mut before: Vec<usize> = Vec::new();
    let mut next = 0;
    let mut odd = vec![false; owners];
    let mut crossed: Vec<Crossed> = Vec::new();
    for w in xs.windows(2) {
        let (a, b) = (w[0], w[1]);
        let middle = f64::midpoint(a, b);
        while let Some(&i) = order.get(next).filter(|&&i| edges[i].edge.left.x < middle) {
            active.push(i);
            next += 1;
        }
        active.retain(|&i| edges[i].edge.right.x > middle);
        steps += active.len();
        if steps > tolerance::SLAB_STEPS {
            return Err(TooMany);
        }
        active.sort_by(|&i, &j| {
            edges[i].edge.y_at(middle).total_cmp(&edges[j].edge.y_at(middle)).then(i.cmp(&j))
        });
        note_crossed(edges, told, [&before, &active], a, size, &mut crossed);
        odd.fill(false);
        for pair in active.windows(2) {
            let (below, above) = (&edges[pair[0]], &edges[pair[1]]);
            odd[below.owner] = !odd[below.owner];
            each(&Between { sides: (a, b), below, above, odd: &odd });
        }
        before.clone_from(&active);
    }
    Ok(crossed)
}

/// Largest distance of an end from the first one.
fn extent(edges: &[Bounding]) -> f64 {
    let Some(first) = edges.first() else { return 1.0 };
    edges
        .iter()
        .flat_map(|e| [e.edge.left, e.edge.right])
        .map(|p| (p - first.edge.left).hypot())
        .fold(f64::MIN_POSITIVE, f64::max)
}

fn crossings(
    edges: &[Bounding],
    order: &[usize],
    xs: &mut Vec<f64>,
    steps: &mut usize,
) -> Result<(), TooMany> {
    let mut open: Vec<usize> = Vec::new();
    let tall = |e: &Edge| {
        let (low, high) = (e.left.y.min(e.right.y), e.left.y.max(e.right.y));
        match e.round {
            Some((c, r, true)) if e.left.x < c.x && e.right.x > c.x => (low, c.y + r),
            Some((c, r, false)) if e.left.x < c.x && e.right.x > c.x => (c.y - r, high),
            _ => (low, high),
        }
    };
    for &i in order {
        let edge = &edges[i].edge;
        open.retain(|&j| edges[j].edge.right.x > edge.left.x);
        *steps += open.len();
        if *steps > tolerance::SLAB_STEPS {
            return Err(TooMany);
        }
        let (low, high) = tall(edge);
        for &j in &open {
            let other = &edges[j].edge;
            let (l, h) = tall(other);
            if low <= h && l <= high {
                xs.extend(edge.crossings(other));
            }
        }
        open.push(i);
    }
    Ok(())
}

/// Pairs of neighbours of one slab that stand the other way round in the next one.
fn note_crossed(
    edges: &[Bounding],
    told: usize,
    [before, now]: [&[usize]; 2],
    x: f64,
    size: f64,
    out: &mut Vec<Crossed>,
) {
    if out.len() >= tolerance::CROSSINGS_TOLD || before == now {
        return;
    }
    let hair = tolerance::OUTLINE_CROSSES * size;
    let ours: Vec<usize> = before.iter().copied().filter(|i| edges[*i].owner < told).collect();
    for pair in ours.windows(2) {
        let (e, f) = (&edges[pair[0]], &edges[pair[1]]);
        let (l, r) = (e.edge.left.x.max(f.edge.left.x), e.edge.right.x.min(f.edge.right.x));
        let gap = |at: f64| f.edge.y_at(at) - e.edge.y_at(at);
        // Apart on both sides, as far as the two run together.
        let apart = |to: f64| {
            (1..=8)
                .map(|k| gap(x + (to - x) * f64::from(k) / 8.0))
                .fold((0.0, 0.0), |m: (f64, f64), g| (m.0.min(g), m.1.max(g)))
        };
        if l < x && r > x && apart(l).1 > hair && apart(r).0 < -hair {
            out.push(Crossed { at: Point::new(x, e.edge.y_at(x)), owners: [e.owner, f.owner] });
        }
    }
}

/// The area within closed pieces run through in their order, by Green's theorem: positive when counter-clockwise.
pub fn enclosed(pieces: &[Segment]) -> Moments {
    let mut sum = Moments::default();
    for piece in pieces {
        // An edge run leftward lies over what is enclosed when the loop runs counter-clockwise.
        for (edge, to_right) in directed(piece) {
            let under = edge.under(edge.left.x, edge.right.x);
            if to_right {
                sum = sum - under;
            } else {
                sum += under;
            }
        }
    }
    sum
}

/// The edges of a piece with whether they are run to the right.
pub fn directed(piece: &Segment) -> Vec<(Edge, bool)> {
    match *piece {
        Segment::Line { start, end } => Edge::of(piece).into_iter().map(|e| (e, end.x > start.x)).collect(),
        Segment::Arc { sweep, .. } => Edge::of(piece)
            .into_iter()
            .map(|e| {
                let upper = e.round.is_some_and(|r| r.2);
                // Counter-clockwise the upper half runs to the left.
                (e, upper != (sweep >= 0.0))
            })
            .collect(),
    }
}

/// Abscissae (of both signs) and weights of the Gauss rule of eight points.
const GAUSS_8: [(f64, f64); 4] = [
    (0.183_434_642_495_649_8, 0.362_683_783_378_362),
    (0.525_532_409_916_329, 0.313_706_645_877_887_27),
    (0.796_666_477_413_626_7, 0.222_381_034_453_374_48),
    (0.960_289_856_497_536_3, 0.101_228_536_290_376_26),
];

impl Edge {
    /// The edge moved.
    #[must_use]
    pub fn moved(&self, by: super::Vec2) -> Self {
        Self {
            left: self.left + by,
            right: self.right + by,
            round: self.round.map(|(centre, radius, upper)| (centre + by, radius, upper)),
        }
    }

    /// Places along the edge from `a` to `b`, each with the rise `dy` for which it stands: a Gauss rule of eight points on
    /// steps of at most a quarter radian.
    pub fn rises(&self, a: f64, b: f64) -> Vec<(Point, f64)> {
        let (p, q) = (Point::new(a, self.y_at(a)), Point::new(b, self.y_at(b)));
        let nodes = GAUSS_8.iter().flat_map(|(x, w)| [(-x, *w), (*x, *w)]);
        let Some((centre, radius, _)) = self.round else {
            let dy = q.y - p.y;
            return nodes.map(|(x, w)| (p.lerp(q, (1.0 + x) / 2.0), dy * w / 2.0)).collect();
        };
        let (from, to) = ((p - centre).atan2(), (q - centre).atan2());
        // From left to right over the top clockwise, along the bottom counter-clockwise, never past a turning point.
        let turn =
            (to - from + std::f64::consts::PI).rem_euclid(std::f64::consts::TAU) - std::f64::consts::PI;
        let steps = (1..64).find(|n| f64::from(*n) * 0.25 >= turn.abs()).unwrap_or(64);
        let step = turn / f64::from(steps);
        let mut out = Vec::new();
        for k in 0..steps {
            for (x, w) in nodes.clone() {
                let angle = from + step * (f64::from(k) + (1.0 + x) / 2.0);
                let at = centre + super::Vec2::from_angle(angle) * radius;
                out.push((at, radius * angle.cos() * step * w / 2.0));
            }
        }
        out
    }
}

/// A straight piece that runs up or down: it bounds nothing from below or above, but edges may cross it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Upright {
    /// Its abscissa.
    pub x: f64,
    /// Its lower and upper end.
    pub between: (f64, f64),
}

impl Upright {
    /// The piece, if it is one.
    pub fn of(segment: &Segment) -> Option<Self> {
        match *segment {
            Segment::Line { start, end } if start.x.to_bits() == end.x.to_bits() => {
                Some(Self { x: start.x, between: (start.y.min(end.y), start.y.max(end.y)) })
            }
            _ => None,
        }
    }

    /// The first edge that crosses it well inside both, and where.
    ///
    /// # Errors
    /// As [`walk`].
    pub fn crossed(uprights: &[Self], edges: &[Bounding]) -> Result<Option<Point>, TooMany> {
        if uprights.len().saturating_mul(edges.len()) > tolerance::SLAB_STEPS {
            return Err(TooMany);
        }
        let hair = tolerance::OUTLINE_CROSSES * extent(edges);
        for upright in uprights {
            for e in edges.iter().map(|e| &e.edge) {
                let (x, y) = (upright.x, e.y_at(upright.x));
                let inside = e.left.x + hair < x && x < e.right.x - hair;
                if inside && upright.between.0 + hair < y && y < upright.between.1 - hair {
                    return Ok(Some(Point::new(x, y)));
                }
            }
        }
        Ok(None)
    }
}
