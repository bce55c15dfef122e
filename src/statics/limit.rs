//! Limit analysis of a ring without tension: the extremes that lines of thrust inside the ring can reach.
//!
//! Safe theorem: if some line of thrust in equilibrium with the loads lies within the ring everywhere, the ring stands,
//! given no sliding, unlimited strength, and abutments that take the push [Kooharian 1952; Heyman 1966]. `|M| ≤ N d / 2`
//! and `|S| ≤ μ N` are linear in the reaction and in the factor of the varying loads, so least and greatest push and the
//! interval of the load factor are linear programs. The continuous ring is met by exchange. The multipliers are the
//! rotations of a mechanism: its hinges, and its virtual work, which gives the same factor.

use super::Status;
use super::joint::{Affine, Joint, Unknowns};
use super::peaks::{Measure, Sampling};
use super::simplex::{MOST, Outcome, Program, Row, Vertex};
use super::span::Span;
use super::subspace::Subspace;
use super::ties::{bending, independent};
use crate::tolerance;

/// Joints that the exchange starts with, and that one round may add.
const START: usize = 32;
const ROUND: usize = 12;
/// Rounds after which the exchange must have ended.
const ROUNDS: usize = 120;
/// Size of the box that the unknowns start in, and how it grows.
const FIRST_BOX: f64 = 100.0;
const BOX_GROWTH: f64 = 100.0;
/// Rounds of the polish, how far from a peak (as a part of the axis) a joint is taken for its neighbour, and how many peaks
/// are looked at.
const POLISH: usize = 6;
const NEIGHBOUR: f64 = 0.02;
const MOST_CONTACTS: usize = 64;

/// What is made as small or as large as can be.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Aim {
    LeastPush,
    GreatestPush,
    LeastFactor,
    GreatestFactor,
}

/// An edge of the ring.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Edge {
    Extrados,
    Intrados,
    /// The ring slides with the part on the right going outward, or inward.
    Outward,
    Inward,
}

const EDGES: [Edge; 4] = [Edge::Extrados, Edge::Intrados, Edge::Outward, Edge::Inward];

/// One constraint in one joint: an edge, and the thrust at which the law of a finite strength is touched (0 where there is
/// none, or for its tangent at no thrust, which is the edge of the ring itself).
#[derive(Debug, Clone, Copy)]
struct Bound {
    joint: Joint,
    edge: Edge,
    touched: f64,
}

/// A joint that the optimum leans on, with its multiplier: a hinge (or slip) of the mechanism and its rotation.
#[derive(Debug, Clone, Copy)]
pub(super) struct Lean {
    pub joint: Joint,
    pub edge: Edge,
    pub multiplier: f64,
    /// How far outside the axis the hinge turns: half the depth, less where the edge crushes.
    pub offset: f64,
    /// Work that crushing takes per rotation.
    pub crushing: f64,
}

/// How a program ended.
#[derive(Debug, Clone)]
pub(super) enum Extreme {
    Found {
        r: Unknowns,
        /// Value of the aim, and the bound of the multipliers.
        primal: f64,
        dual: f64,
        leans: Vec<Lean>,
    },
    /// No line lies inside: the joints that contradict each other, with their weights.
    None(Vec<Lean>),
    Unbounded,
    Stalled,
}

/// What is to be least: `sign` times one of the unknowns, in the free ones.
struct Goal {
    unknown: usize,
    sign: f64,
    cost: [f64; 4],
    constant: f64,
}

/// A program on its way, with the constraint of each row from `first` on.
struct Run {
    program: Program,
    rows: Vec<Bound>,
    first: usize,
    /// Size of the box.
    size: f64,
}

/// Where a program ended, for the next one of a like span: the joints that it needed and its basis. Without strength only:
/// the tangents of a curved law belong to one line.
#[derive(Debug, Clone, Default)]
pub(super) struct Warm {
    places: Vec<(usize, f64)>,
    basis: Option<[usize; MOST]>,
}

/// Joints that are handed on from program to program.
const MOST_KEPT: usize = 60;

impl Warm {
    fn keep(&mut self, run: &Run) {
        if run.rows.iter().any(|b| b.touched > 0.0) {
            return;
        }
        for bound in &run.rows {
            let place = (bound.joint.piece, bound.joint.s);
            if self.places.last() != Some(&place) {
                self.places.push(place);
            }
        }
        self.basis = run.program.basis();
        if self.places.len() > MOST_KEPT {
            self.places.clear();
            self.basis = None;
        }
    }
}

/// The programs of one ring.
pub(super) struct Limit<'a> {
    pub span: &'a Span,
    pub sampling: &'a Sampling<'a>,
    /// The whole axis, where `sampling` may be single joints.
    pub whole: &'a Sampling<'a>,
    /// Lines through the hinges, with the factor fixed or free.
    pub space: &'a Subspace,
    /// Coefficient of friction; `None`: nothing slides.
    pub friction: Option<f64>,
    /// `1 / (2 f b)` for a block strength `f` and a width `b`, in local units; 0 for unlimited strength.
    pub crushing: f64,
}

impl Limit<'_> {
    /// The extreme of one aim.
    pub fn solve(&self, aim: Aim) -> Extreme {
        let goal = self.goal(aim);
        let mut run = self.start(&goal, FIRST_BOX);
        for joint in self.sampling.spread(START) {
            self.add(&mut run, joint, 0.0);
        }
        let vertex = match self.settle(&mut run) {
            Ok(vertex) => vertex,
            Err(ended) => return ended,
        };
        let (run, vertex) = self.polish(&goal, run, vertex);
        self.found(&goal, &run, &vertex)
    }

    /// The extreme of one aim, without its line or mechanism, from where a like program ended.
    ///
    /// # Errors
    /// Why there is none.
    pub fn value(&self, aim: Aim, warm: &mut Warm) -> Result<f64, Status> {
        let goal = self.goal(aim);
        let mut run = self.start(&goal, FIRST_BOX);
        let known = warm
            .places
            .iter()
            .all(|&(piece, s)| self.span.pieces.get(piece).is_some_and(|p| p.s0 <= s && s <= p.s1));
        if warm.places.is_empty() || !known {
            for joint in self.sampling.spread(START) {
                self.add(&mut run, joint, 0.0);
            }
        } else {
            for &(piece, s) in &warm.places {
                self.add(&mut run, self.span.pieces[piece].joint(s, piece), 0.0);
            }
            run.program.start_from(warm.basis);
        }
        let mut ended = self.settle(&mut run);
        if matches!(ended, Err(Extreme::Stalled)) && !warm.places.is_empty() {
            run = self.start(&goal, FIRST_BOX);
            for joint in self.sampling.spread(START) {
                self.add(&mut run, joint, 0.0);
            }
            ended = self.settle(&mut run);
        }
        warm.places.clear();
        warm.basis = None;
        match ended {
            Ok(vertex) => {
                warm.keep(&run);
                Ok(goal.sign * (vertex.cost + goal.constant))
            }
            Err(Extreme::Unbounded) => Err(Status::Unbounded),
            Err(Extreme::None(_)) => Err(Status::None),
            Err(Extreme::Stalled | Extreme::Found { .. }) => Err(Status::Refused),
        }
    }

    fn goal(&self, aim: Aim) -> Goal {
        let (unknown, sign) = match aim {
            Aim::LeastPush => (0, 1.0),
            Aim::GreatestPush => (0, -1.0),
            Aim::LeastFactor => (3, 1.0),
            Aim::GreatestFactor => (3, -1.0),
        };
        let mut unit = [0.0; 4];
        unit[unknown] = sign;
        let (cost, constant) = self.space.row(&(unit, 0.0));
        Goal { unknown, sign, cost, constant }
    }

    /// The best vertex in a box that does not hold it.
    fn settle(&self, run: &mut Run) -> Result<Vertex, Extreme> {
        // Vertices of a large box cost digits: it grows only as long as it holds the optimum.
        loop {
            let (held, ended) = match self.exchange(run) {
                Ok(vertex) => {
                    let held = run.program.held(&vertex) * run.size;
                    (held > tolerance::PROOF_GAP * vertex.cost.abs().max(1.0), Ok(vertex))
                }
                Err((held, ended)) => (held, Err(ended)),
            };
            match ended {
                Ok(vertex) if !held => return Ok(vertex),
                Ok(_) if run.size >= tolerance::UNBOUNDED => return Err(Extreme::Unbounded),
                Err(ended) if !held || run.size >= tolerance::UNBOUNDED => return Err(ended),
                _ => {}
            }
            run.size *= BOX_GROWTH;
            run.program.widen(run.size);
        }
    }

    /// A program without joints yet.
    fn start(&self, goal: &Goal, size: f64) -> Run {
        let mut program = Program::new(&goal.cost[..self.space.free], size);
        let mut first = program.box_rows();
        if goal.unknown == 3 {
            // A load factor is not negative.
            let (a, c) = self.space.row(&([0.0, 0.0, 0.0, -1.0], 0.0));
            program.push(Row { a, b: -c });
            first += 1;
        }
        Run { program, rows: Vec::new(), first, size }
    }

    fn add(&self, run: &mut Run, joint: Joint, touched: f64) {
        for edge in EDGES {
            self.add_bound(run, Bound { joint, edge, touched });
        }
    }

    fn add_bound(&self, run: &mut Run, bound: Bound) {
        if let Some(row) = self.row(&bound) {
            let (a, c) = self.space.row(&row);
            run.program.push(Row { a, b: -c });
            run.rows.push(bound);
        }
    }

    /// Solves, and takes in the joints of the continuous axis that break a constraint most, until none does.
    /// Where there is no line, whether the box has a part in that.
    fn exchange(&self, run: &mut Run) -> Result<Vertex, (bool, Extreme)> {
        let slack = if self.crushing > 0.0 { tolerance::CONE_SLACK } else { tolerance::LIMIT_SLACK };
        for _ in 0..ROUNDS {
            let vertex = match run.program.solve() {
                Outcome::Best(vertex) => vertex,
                Outcome::Infeasible(proof) => {
                    let boxed = proof.iter().any(|p| p.0 < run.program.box_rows() && p.1 > 0.0);
                    return Err((boxed, Extreme::None(self.leans(run, &proof))));
                }
                Outcome::Stalled => return Err((false, Extreme::Stalled)),
            };
            let r = self.space.unknowns(&vertex.x[..self.space.free]);
            let mut added = 0;
            for joint in self.broken(&r, slack) {
                let touched = self.touched(&joint, &r);
                let known = run.rows.iter().any(|b| {
                    b.joint.piece == joint.piece
                        && (b.joint.s - joint.s).abs() <= tolerance::PEAK_PLACE
                        && (b.touched - touched).abs() <= tolerance::PEAK_PLACE * touched
                });
                if !known {
                    self.add(run, joint, touched);
                    added += 1;
                }
            }
            if added == 0 {
                return Ok(vertex);
            }
        }
        Err((false, Extreme::Stalled))
    }

    /// Moves the joints of the program to the very peaks of the line, so that the multipliers belong to the places that
    /// the line touches and not to their neighbours.
    fn polish(&self, goal: &Goal, mut run: Run, mut vertex: Vertex) -> (Run, Vertex) {
        for _ in 0..POLISH {
            let r = self.space.unknowns(&vertex.x[..self.space.free]);
            let inner = |j: &Joint| {
                let piece = &self.span.pieces[j.piece];
                j.s > piece.s0 && j.s < piece.s1
            };
            let tops: Vec<Joint> = self.tops(&r).into_iter().take(MOST_CONTACTS).filter(inner).collect();
            let near = |a: &Joint, b: &Joint| a.piece == b.piece && (a.s - b.s).abs() < NEIGHBOUR;
            let moved = tops.iter().fold(0.0, |m, top| {
                let others = run.rows.iter().filter(|b| near(&b.joint, top));
                f64::max(m, others.map(|b| (b.joint.s - top.s).abs()).fold(NEIGHBOUR, f64::min))
            });
            if self.crushing > 0.0 || moved <= tolerance::PEAK_PLACE {
                break;
            }
            let mut next = self.start(goal, run.size);
            for bound in &run.rows {
                if !(inner(&bound.joint) && tops.iter().any(|top| near(&bound.joint, top))) {
                    self.add_bound(&mut next, *bound);
                }
            }
            for top in tops {
                self.add(&mut next, top, 0.0);
            }
            match self.exchange(&mut next) {
                Ok(better) => (run, vertex) = (next, better),
                Err(_) => break,
            }
        }
        (run, vertex)
    }

    /// The joints that the line touches, or nearly.
    fn tops(&self, r: &Unknowns) -> Vec<Joint> {
        let near = 1.0 - tolerance::HINGE_CONTACT;
        let (what, floor) = self.law();
        let mut tops = self.sampling.peaks_of(what, r, floor * near);
        if let Some(friction) = self.friction {
            tops.extend(self.sampling.peaks_of(Measure::Sliding, r, friction * near));
        }
        tops.iter().map(|p| p.joint).collect()
    }

    fn found(&self, goal: &Goal, run: &Run, vertex: &Vertex) -> Extreme {
        let r = self.space.unknowns(&vertex.x[..self.space.free]);
        let primal = goal.sign * (vertex.cost + goal.constant);
        let dual = goal.sign * (vertex.dual + goal.constant);
        let most = vertex.active.iter().fold(0.0, |m, a| f64::max(m, a.1));
        let active: Vec<_> =
            vertex.active.iter().filter(|a| a.1 > tolerance::MULTIPLIER * most).copied().collect();
        let leans = self.gather(self.leans(run, &active), &r);
        let r = if goal.unknown == 0 { self.least_bending(run, &active).unwrap_or(r) } else { r };
        Extreme::Found { r, primal, dual, leans }
    }

    /// Of all lines with the extreme push, the one of least `∫ M² ds`, where the rows with multipliers leave a choice.
    fn least_bending(&self, run: &Run, active: &[(usize, f64)]) -> Option<Unknowns> {
        let n = self.space.free;
        let bound = |b: &Bound, leave: f64| {
            let (a, c) = self.space.row(&self.row(b)?);
            Some(([a[0], a[1], a[2]], leave - c))
        };
        let held = active.iter().filter_map(|&(i, _)| bound(run.rows.get(i.checked_sub(run.first)?)?, 0.0));
        let held = independent(n, held);
        if held.len() >= n {
            return None;
        }
        let aim = bending(self.span, self.whole, self.space);
        let mut rows = run.rows.clone();
        for _ in 0..ROUNDS {
            let bounds: Vec<_> = rows.iter().filter_map(|b| bound(b, tolerance::TIE_LEAVE)).collect();
            let r = self.space.unknowns(&aim.least(&held, &bounds)?);
            let fresh = self.broken(&r, 2.0 * tolerance::TIE_LEAVE);
            if fresh.is_empty() {
                return Some(r);
            }
            for joint in fresh {
                let touched = self.touched(&joint, &r);
                rows.extend(EDGES.map(|edge| Bound { joint, edge, touched }));
            }
        }
        None
    }

    /// The thrust at which the law of a finite strength is touched by a line.
    fn touched(&self, joint: &Joint, r: &Unknowns) -> f64 {
        if self.crushing > 0.0 { joint.thrust(r).max(0.0) } else { 0.0 }
    }

    /// A constraint as `a · r + c ≤ 0`. The law of a finite strength, `|M| ≤ N d / 2 − N² / (2 f b)`, is concave in `N`:
    /// it is kept when all its tangents are.
    fn row(&self, bound: &Bound) -> Option<Affine> {
        let joint = &bound.joint;
        let (over, side, room) = match bound.edge {
            Edge::Extrados => (joint.moment_row(), 1.0, self.offset(bound)),
            Edge::Intrados => (joint.moment_row(), -1.0, self.offset(bound)),
            Edge::Outward => (joint.shear_row(), 1.0, self.friction?),
            Edge::Inward => (joint.shear_row(), -1.0, self.friction?),
        };
        let thrust = joint.thrust_row();
        let mut a = [0.0; 4];
        for (i, v) in a.iter_mut().enumerate() {
            *v = side * over.0[i] - room * thrust.0[i];
        }
        Some((a, side * over.1 - room * thrust.1 - self.crushed(bound)))
    }

    fn offset(&self, bound: &Bound) -> f64 {
        bound.joint.depth / 2.0 - 2.0 * self.crushing * bound.touched
    }

    /// The constant of the tangent: the work that crushing takes per rotation.
    fn crushed(&self, bound: &Bound) -> f64 {
        match bound.edge {
            Edge::Extrados | Edge::Intrados => self.crushing * bound.touched * bound.touched,
            Edge::Outward | Edge::Inward => 0.0,
        }
    }

    fn leans(&self, run: &Run, active: &[(usize, f64)]) -> Vec<Lean> {
        let lean = |&(i, multiplier): &(usize, f64)| {
            let bound = run.rows.get(i.checked_sub(run.first)?)?;
            Some(Lean {
                joint: bound.joint,
                edge: bound.edge,
                multiplier,
                offset: self.offset(bound),
                crushing: self.crushed(bound),
            })
        };
        active.iter().filter_map(lean).collect()
    }

    /// What bounds the moment in a joint.
    fn law(&self) -> (Measure, f64) {
        if self.crushing > 0.0 {
            (Measure::Crushing(self.crushing), 1.0)
        } else {
            (Measure::Eccentricity, 0.5)
        }
    }

    /// The joints on the continuous axis that break a constraint most.
    fn broken(&self, r: &Unknowns, slack: f64) -> Vec<Joint> {
        let size = 1.0 + r[0].abs() + r[1].abs() + r[3].abs();
        let excess = |joint: &Joint, edge: Edge| {
            // The tangent at the thrust of the line itself has the value of the law.
            let row = self.row(&Bound { joint: *joint, edge, touched: self.touched(joint, r) });
            row.map_or(0.0, |(a, c)| (0..4).map(|i| a[i] * r[i]).sum::<f64>() + c)
        };
        let mut found = Vec::new();
        let mut take = |what: Measure, floor: f64, edges: [Edge; 2]| {
            let peaks = self.sampling.peaks_of(what, r, floor);
            let over = peaks.iter().filter(|p| edges.iter().any(|&e| excess(&p.joint, e) > slack * size));
            found.extend(over.take(ROUND).map(|p| p.joint));
        };
        let (what, floor) = self.law();
        take(what, floor, [Edge::Extrados, Edge::Intrados]);
        if let Some(friction) = self.friction {
            take(Measure::Sliding, friction, [Edge::Outward, Edge::Inward]);
        }
        found
    }

    /// Brings the multipliers of neighbouring joints together at the peak that they stand around.
    fn gather(&self, leans: Vec<Lean>, r: &Unknowns) -> Vec<Lean> {
        let tops = self.tops(r);
        let mut gathered: Vec<Lean> = Vec::new();
        for mut lean in leans {
            let top = tops
                .iter()
                .filter(|p| p.piece == lean.joint.piece)
                .min_by(|a, b| (a.s - lean.joint.s).abs().total_cmp(&(b.s - lean.joint.s).abs()));
            if let Some(top) = top
                && (top.s - lean.joint.s).abs() <= tolerance::HINGE_PLACE
            {
                lean.joint = *top;
            }
            let same = gathered.iter_mut().find(|g| {
                g.edge == lean.edge
                    && g.joint.piece == lean.joint.piece
                    && (g.joint.s - lean.joint.s).abs() <= tolerance::HINGE_PLACE
            });
            match same {
                Some(g) => {
                    // The place and the work of both, weighted by their rotations.
                    let (a, b) = (g.multiplier, lean.multiplier);
                    g.offset = (a * g.offset + b * lean.offset) / (a + b);
                    g.crushing = (a * g.crushing + b * lean.crushing) / (a + b);
                    g.multiplier = a + b;
                }
                None => gathered.push(lean),
            }
        }
        gathered.sort_by(|a, b| a.joint.s.total_cmp(&b.joint.s).then(a.joint.piece.cmp(&b.joint.piece)));
        gathered
    }
}

impl Lean {
    /// Virtual work at this hinge or slip, by a unit of its multiplier, of loads that stand before it.
    pub(super) fn work(&self, loads: &super::joint::Loads) -> f64 {
        let (at, n) = (self.joint.at, self.joint.normal());
        match self.edge {
            // Moment about the hinge of all loads before it.
            Edge::Extrados | Edge::Intrados => {
                let side = if self.edge == Edge::Extrados { 1.0 } else { -1.0 };
                let q = at + n * (side * self.offset);
                side * (q.x * loads.fy - q.y * loads.fx - loads.moment)
            }
            Edge::Outward => loads.fx * n.x + loads.fy * n.y,
            Edge::Inward => -(loads.fx * n.x + loads.fy * n.y),
        }
    }
}

/// Virtual work of the mechanism that the multipliers describe: of the loads that stay, of the varying ones at factor 1
/// (each load's force along its displacement), and what crushing takes. With all hinges in place nothing else does work,
/// so fixed plus factor times varying is what crushing takes.
pub(super) fn virtual_work(leans: &[Lean]) -> (f64, f64, f64) {
    let (mut fixed, mut varying, mut crushing) = (0.0, 0.0, 0.0);
    for lean in leans {
        fixed += lean.multiplier * lean.work(&lean.joint.loads.fixed);
        varying += lean.multiplier * lean.work(&lean.joint.loads.varying);
        crushing += lean.multiplier * lean.crushing;
    }
    (fixed, varying, crushing)
}

const _: () = assert!(MOST >= 4, "the reaction and the load factor are four unknowns");
