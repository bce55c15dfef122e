//! Limit analysis of a ring without tension: the extremes that lines of thrust inside the ring can reach.
//!
//! Safe theorem: if some line of thrust in equilibrium with the loads lies within the ring everywhere, the ring stands,
//! given no sliding, unlimited strength, and abutments that take the push [Kooharian 1952; Heyman 1966]. `|M| ≤ N d / 2`
//! and `|S| ≤ μ N` are linear in the reaction and in the factor of the varying loads, so least and greatest push and the
//! interval of the load factor are linear programs. The continuous ring is met by exchange. The multipliers are the
//! rotations of a mechanism: its hinges, and its virtual work, which gives the same factor.

use super::peaks::{Measure, Sampling};
use super::simplex::{MOST, Outcome, Program, Row, Vertex};
use super::span::{Affine, Joint, Span, Unknowns};
use super::subspace::Subspace;
use crate::tolerance;

/// Joints that the exchange starts with, and that one round may add.
const START: usize = 32;
const ROUND: usize = 12;
/// Rounds after which the exchange must have ended.
const ROUNDS: usize = 120;

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

/// A joint that the optimum leans on, with its multiplier: a hinge (or slip) of the mechanism and its rotation.
#[derive(Debug, Clone, Copy)]
pub(super) struct Lean {
    pub joint: Joint,
    pub edge: Edge,
    pub multiplier: f64,
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

/// The programs of one ring.
pub(super) struct Limit<'a> {
    pub span: &'a Span,
    pub sampling: &'a Sampling<'a>,
    /// Lines through the hinges, with the factor fixed or free.
    pub space: &'a Subspace,
    /// Coefficient of friction; `None`: nothing slides.
    pub friction: Option<f64>,
}

impl Limit<'_> {
    /// The extreme of one aim.
    pub fn solve(&self, aim: Aim) -> Extreme {
        let (unknown, sign) = match aim {
            Aim::LeastPush => (0, 1.0),
            Aim::GreatestPush => (0, -1.0),
            Aim::LeastFactor => (3, 1.0),
            Aim::GreatestFactor => (3, -1.0),
        };
        let mut unit = [0.0; 4];
        unit[unknown] = sign;
        let (cost, constant) = self.space.row(&(unit, 0.0));
        let mut program = Program::new(&cost[..self.space.free], tolerance::UNBOUNDED);
        let mut rows: Vec<(Joint, Edge)> = Vec::new();
        if unknown == 3 {
            // A load factor is not negative.
            let (a, c) = self.space.row(&([0.0, 0.0, 0.0, -1.0], 0.0));
            program.push(Row { a, b: -c });
        }
        let first = program.box_rows() + usize::from(unknown == 3);
        let add = |program: &mut Program, rows: &mut Vec<(Joint, Edge)>, joint: Joint| {
            for edge in EDGES {
                if let Some((a, c)) = self.row(&joint, edge) {
                    let (a, c) = self.space.row(&(a, c));
                    program.push(Row { a, b: -c });
                    rows.push((joint, edge));
                }
            }
        };
        for joint in self.sampling.spread(START) {
            add(&mut program, &mut rows, joint);
        }
        for _ in 0..ROUNDS {
            let vertex = match program.solve() {
                Outcome::Best(vertex) => vertex,
                Outcome::Infeasible(proof) => return Extreme::None(leans(&rows, &proof, first)),
                Outcome::Stalled => return Extreme::Stalled,
            };
            let r = self.space.unknowns(&vertex.x[..self.space.free]);
            let fresh = self.broken(&r);
            let mut added = 0;
            for joint in fresh {
                let known = rows
                    .iter()
                    .any(|(j, _)| j.piece == joint.piece && (j.s - joint.s).abs() <= tolerance::PEAK_PLACE);
                if !known {
                    add(&mut program, &mut rows, joint);
                    added += 1;
                }
            }
            if added == 0 {
                return self.found(&vertex, r, constant, sign, &rows, first);
            }
        }
        Extreme::Stalled
    }

    fn found(
        &self,
        vertex: &Vertex,
        r: Unknowns,
        constant: f64,
        sign: f64,
        rows: &[(Joint, Edge)],
        first: usize,
    ) -> Extreme {
        let far = tolerance::UNBOUNDED * 0.5;
        let flat = (8.0 * self.span.crown.1.abs()).min(1.0);
        if (r[0] * flat).abs().max(r[1].abs()).max(r[3].abs()) > far {
            return Extreme::Unbounded;
        }
        let primal = sign * (vertex.cost + constant);
        let dual = sign * (vertex.dual + constant);
        let most = vertex.active.iter().fold(0.0, |m, a| f64::max(m, a.1));
        let active: Vec<_> =
            vertex.active.iter().filter(|a| a.1 > tolerance::MULTIPLIER * most).copied().collect();
        Extreme::Found { r, primal, dual, leans: self.gather(leans(rows, &active, first), &r) }
    }

    /// A constraint as `a · r + c ≤ 0`.
    fn row(&self, joint: &Joint, edge: Edge) -> Option<Affine> {
        let (over, side, room) = match edge {
            Edge::Extrados => (joint.moment_row(), 1.0, joint.depth / 2.0),
            Edge::Intrados => (joint.moment_row(), -1.0, joint.depth / 2.0),
            Edge::Outward => (joint.shear_row(), 1.0, self.friction?),
            Edge::Inward => (joint.shear_row(), -1.0, self.friction?),
        };
        let thrust = joint.thrust_row();
        let mut a = [0.0; 4];
        for (i, v) in a.iter_mut().enumerate() {
            *v = side * over.0[i] - room * thrust.0[i];
        }
        Some((a, side * over.1 - room * thrust.1))
    }

    /// The joints on the continuous axis that break a constraint most.
    fn broken(&self, r: &Unknowns) -> Vec<Joint> {
        let size = 1.0 + r[0].abs() + r[1].abs() + r[3].abs();
        let excess = |joint: &Joint, edge: Edge| {
            self.row(joint, edge).map_or(0.0, |(a, c)| (0..4).map(|i| a[i] * r[i]).sum::<f64>() + c)
        };
        let mut found = Vec::new();
        let mut take = |what: Measure, floor: f64, edges: [Edge; 2]| {
            let peaks = self.sampling.peaks_of(what, r, floor);
            let over = peaks
                .iter()
                .filter(|p| edges.iter().any(|&e| excess(&p.joint, e) > tolerance::LIMIT_SLACK * size));
            found.extend(over.take(ROUND).map(|p| p.joint));
        };
        take(Measure::Eccentricity, 0.5, [Edge::Extrados, Edge::Intrados]);
        if let Some(friction) = self.friction {
            take(Measure::Sliding, friction, [Edge::Outward, Edge::Inward]);
        }
        found
    }

    /// Brings the multipliers of neighbouring joints together at the peak that they stand around.
    fn gather(&self, leans: Vec<Lean>, r: &Unknowns) -> Vec<Lean> {
        let near = 1.0 - tolerance::HINGE_CONTACT;
        let mut tops = self.sampling.peaks_of(Measure::Eccentricity, r, 0.5 * near);
        if let Some(friction) = self.friction {
            tops.extend(self.sampling.peaks_of(Measure::Sliding, r, friction * near));
        }
        let mut gathered: Vec<Lean> = Vec::new();
        for mut lean in leans {
            let top = tops
                .iter()
                .filter(|p| p.joint.piece == lean.joint.piece)
                .min_by(|a, b| (a.joint.s - lean.joint.s).abs().total_cmp(&(b.joint.s - lean.joint.s).abs()));
            if let Some(top) = top
                && (top.joint.s - lean.joint.s).abs() <= tolerance::HINGE_PLACE
            {
                lean.joint = top.joint;
            }
            let same = gathered.iter_mut().find(|g| {
                g.edge == lean.edge
                    && g.joint.piece == lean.joint.piece
                    && (g.joint.s - lean.joint.s).abs() <= tolerance::HINGE_PLACE
            });
            match same {
                Some(g) => g.multiplier += lean.multiplier,
                None => gathered.push(lean),
            }
        }
        gathered.sort_by(|a, b| a.joint.s.total_cmp(&b.joint.s).then(a.joint.piece.cmp(&b.joint.piece)));
        gathered
    }
}

fn leans(rows: &[(Joint, Edge)], active: &[(usize, f64)], first: usize) -> Vec<Lean> {
    active
        .iter()
        .filter_map(|&(i, multiplier)| {
            let (joint, edge) = *rows.get(i.checked_sub(first)?)?;
            Some(Lean { joint, edge, multiplier })
        })
        .collect()
}

/// Virtual work of the mechanism that the multipliers describe: of the loads that stay, and of the varying ones at
/// factor 1, each load's force along its displacement. With all hinges in place nothing else does work, so the factor is
/// minus the one over the other.
pub(super) fn virtual_work(leans: &[Lean]) -> (f64, f64) {
    let (mut fixed, mut varying) = (0.0, 0.0);
    for lean in leans {
        let (at, n) = (lean.joint.at, lean.joint.normal());
        let work = |l: &super::span::Loads| match lean.edge {
            // Moment about the edge point of all loads before the hinge.
            Edge::Extrados | Edge::Intrados => {
                let side = if lean.edge == Edge::Extrados { 1.0 } else { -1.0 };
                let q = at + n * (side * lean.joint.depth / 2.0);
                side * (q.x * l.fy - q.y * l.fx - l.moment)
            }
            Edge::Outward => l.fx * n.x + l.fy * n.y,
            Edge::Inward => -(l.fx * n.x + l.fy * n.y),
        };
        fixed += lean.multiplier * work(&lean.joint.loads.fixed);
        varying += lean.multiplier * work(&lean.joint.loads.varying);
    }
    (fixed, varying)
}

const _: () = assert!(MOST >= 4, "the reaction and the load factor are four unknowns");
