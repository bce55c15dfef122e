//! How a line of thrust that follows from linear equations answers to loads at the slots.
//!
//! `K [r; μ] = −[g; c]`: the rows of `K` are those of the complementary energy in the three unknowns and those of the
//! moments about the hinges. Only the right side depends on the loads, and on those linearly, so that `r` is that of the
//! dead loads plus a sum over the slots of coefficients times force and moment there.

#![allow(clippy::needless_range_loop, reason = "small dense matrices read best by index")]

use super::super::elastic::{Flexibility, Place, least_energy};
use super::super::joint::{Affine, Loads, Unknowns};
use super::super::peaks::Sampling;
use super::super::piece::GAUSS_10;
use super::super::rule::through_points;
use super::super::subspace::Subspace;
use super::super::through::through;
use super::super::{Effects, Support, Unsolved};
use super::prepared::Prepared;
use crate::geometry::Point;

/// Rows of the greatest system: three unknowns and three hinges.
const MOST: usize = 6;

/// A line of thrust as an affine function of what enters at the slots.
#[derive(Debug, Clone)]
pub(super) struct Response {
    /// The line under the dead loads.
    dead: Unknowns,
    /// Change of `(H, V, M_0)` by unit `F_x`, `F_y` and moment about the origin at each slot, in local units.
    slots: Vec<[[f64; 3]; 3]>,
}

impl Response {
    /// The line of least energy.
    pub fn elastic(prepared: &Prepared) -> Result<Self, Unsolved> {
        let span = &prepared.span;
        let problem = prepared.moving.problem;
        let refuse = |text: &str| Err(Unsolved::Input(text.into()));
        if prepared.sense < 0.0 {
            return refuse("a cable has no bending stiffness");
        }
        if prepared.support().is_none_or(|s| s == Support::None) {
            return refuse("the elastic line needs a support: hingeless, two-hinged or three-hinged");
        }
        if prepared.moving.stiffness.is_none() && !span.has_depth {
            return refuse("the elastic line needs the depth of the rib");
        }
        if problem.effects != Effects::default() && problem.stiffness.is_none() {
            return refuse(
                "temperature, shrinkage and movement need the modulus of elasticity and the width",
            );
        }
        let modulus = problem.stiffness.unwrap_or(1.0);
        let rectangle = |p: &Place| {
            let d = p.depth.unwrap_or(1.0);
            Flexibility { bending: 12.0 / (modulus * d.powi(3)), axial: 1.0 / (modulus * d) }
        };
        let given = |p: &Place| prepared.moving.stiffness.map_or_else(|| rectangle(p), |f| f(p));
        let whole = Sampling::new(&prepared.shallow, prepared.sense);
        let rows = prepared.hinge_rows(span);
        let dead = Subspace::lines(span, &rows)
            .and_then(|space| least_energy(span, &whole, &space, &given, &problem.effects));
        let Some(dead) = dead else {
            return refuse("the stiffness along the axis is no positive number");
        };
        let length = span.length;
        // Of each piece: the energy of the unknowns, and what unit loads before it bring into the right side.
        let mut energy = [[0.0; 3]; 3];
        let mut brought = vec![[[0.0; 3]; 3]; span.pieces.len()];
        for pair in whole.joints().windows(2).filter(|p| p[0].piece == p[1].piece) {
            let index = pair[0].piece;
            let piece = &span.pieces[index];
            let (half, middle) = ((pair[1].s - pair[0].s) / 2.0, f64::midpoint(pair[0].s, pair[1].s));
            for (x, w) in GAUSS_10 {
                for x in [-x, x] {
                    let joint = piece.joint(middle + half * x, index);
                    let soft = given(&Place {
                        at: span.drawn(joint.at),
                        s: joint.s * length,
                        tangent: joint.tangent,
                        depth: span.has_depth.then_some(joint.depth * length),
                    });
                    let bending = w * half * soft.bending;
                    let axial = w * half * soft.axial / (length * length);
                    let (m, n) = (joint.moment_row().0, joint.thrust_row().0);
                    let by_load = [-joint.at.y, joint.at.x, -1.0];
                    let along = [joint.tangent.x, joint.tangent.y, 0.0];
                    for i in 0..3 {
                        for j in 0..3 {
                            energy[i][j] += bending * m[i] * m[j] + axial * n[i] * n[j];
                            brought[index][i][j] += bending * m[i] * by_load[j] + axial * n[i] * along[j];
                        }
                    }
                }
            }
        }
        // A load enters before all pieces from its own on.
        let mut after = vec![[[0.0; 3]; 3]; span.pieces.len() + 1];
        for p in (0..span.pieces.len()).rev() {
            for i in 0..3 {
                for j in 0..3 {
                    after[p][i][j] = after[p + 1][i][j] + brought[p][i][j];
                }
            }
        }
        let after = |slot: usize| after[prepared.first_piece[slot].min(span.pieces.len())];
        let hinges: Vec<Hinge> = prepared.choice.hinges.iter().map(|&p| Hinge::new(prepared, p)).collect();
        Self::solve(prepared, dead, &energy, &after, &hinges)
            .map_or_else(|| refuse("the stiffness along the axis is no positive number"), Ok)
    }

    /// The line through three points.
    pub fn through(prepared: &Prepared) -> Result<Self, Unsolved> {
        let points = through_points(prepared.moving.problem, &prepared.span, &prepared.choice)?;
        let straight = || {
            Unsolved::Hinges(
                "the three points lie on one straight line or in one place: no single line of thrust passes through them"
                    .into(),
            )
        };
        let dead = through(&prepared.span, &points).ok_or_else(straight)?;
        let hinges: Vec<Hinge> = points.iter().map(|&p| Hinge::new(prepared, p)).collect();
        let none = |_: usize| [[0.0; 3]; 3];
        Self::solve(prepared, dead, &[[0.0; 3]; 3], &none, &hinges).ok_or_else(straight)
    }

    fn solve(
        prepared: &Prepared,
        dead: Unknowns,
        energy: &[[f64; 3]; 3],
        brought: &dyn Fn(usize) -> [[f64; 3]; 3],
        hinges: &[Hinge],
    ) -> Option<Self> {
        let n = 3 + hinges.len();
        // The energy is brought to the size of the moments, which keeps the pivots alike.
        let size = energy.iter().flatten().fold(0.0, |m: f64, v| m.max(v.abs()));
        let scale = if size > 0.0 { 1.0 / size } else { 0.0 };
        let mut matrix = [[0.0; MOST]; MOST];
        for i in 0..3 {
            for j in 0..3 {
                matrix[i][j] = energy[i][j] * scale;
            }
            for (k, hinge) in hinges.iter().enumerate() {
                matrix[i][3 + k] = hinge.row.0[i];
                matrix[3 + k][i] = hinge.row.0[i];
            }
        }
        let slots = (0..prepared.first_piece.len())
            .map(|slot| {
                let brought = brought(slot);
                let mut right = [[0.0; 3]; MOST];
                for j in 0..3 {
                    for i in 0..3 {
                        right[i][j] = -brought[i][j] * scale;
                    }
                    for (k, hinge) in hinges.iter().enumerate() {
                        if prepared.first_piece[slot] <= hinge.piece {
                            right[3 + k][j] = -[-hinge.at.y, hinge.at.x, -1.0][j];
                        }
                    }
                }
                eliminate(n, &matrix, &right)
            })
            .collect::<Option<Vec<_>>>()?;
        Some(Self { dead, slots })
    }

    /// The line under the dead loads.
    pub fn dead(&self) -> Unknowns {
        self.dead
    }

    /// Change of the line by a load at a slot, in local units.
    pub fn change(&self, slot: usize, loads: &Loads) -> [f64; 3] {
        let by = [loads.fx, loads.fy, loads.moment];
        self.slots[slot].map(|row| row[0] * by[0] + row[1] * by[1] + row[2] * by[2])
    }
}

/// A hinge with the piece of its nearest joint.
struct Hinge {
    at: Point,
    piece: usize,
    row: Affine,
}

impl Hinge {
    fn new(prepared: &Prepared, at: Point) -> Self {
        let (s, _) = prepared.span.path.nearest(at);
        let piece = prepared.span.joint_at(s, true).piece;
        Self { at, piece, row: prepared.span.hinge_row(at) }
    }
}

/// Solves for three right sides by Gauss with row exchange; gives the first three unknowns of each.
fn eliminate(n: usize, matrix: &[[f64; MOST]; MOST], right: &[[f64; 3]; MOST]) -> Option<[[f64; 3]; 3]> {
    let (mut m, mut b) = (*matrix, *right);
    for k in 0..n {
        let p = (k..n).max_by(|&i, &j| m[i][k].abs().total_cmp(&m[j][k].abs()))?;
        if m[p][k].abs() <= f64::MIN_POSITIVE || !m[p][k].is_finite() {
            return None;
        }
        m.swap(k, p);
        b.swap(k, p);
        for i in (0..n).filter(|&i| i != k) {
            let f = m[i][k] / m[k][k];
            for j in k..n {
                m[i][j] -= f * m[k][j];
            }
            for j in 0..3 {
                b[i][j] -= f * b[k][j];
            }
        }
    }
    let mut x = [[0.0; 3]; 3];
    for i in 0..3 {
        for j in 0..3 {
            x[i][j] = b[i][j] / m[i][i];
        }
    }
    Some(x)
}
