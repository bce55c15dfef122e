//! The line of thrust of an elastic arch: least complementary energy [Castigliano 1879; Engesser 1889 for temperature and
//! movements].
//!
//! `Π = ½ ∫ (M² / EI + N² / EA) ds − ∫ N ε ds − W`, with `ε` the free strain of a uniform change of temperature (longer is
//! positive; shrinkage is negative) and `W` the work of the reactions on prescribed movements of the abutments. `M` and `N`
//! are affine in the reaction, so the least is a system of at most three linear equations, one per unknown that the hinges
//! leave. For vertical loads this is the force method about the elastic centre. The stiffness is what the caller gives; the
//! integrals run along the true axis by Gauss.

use super::joint::{Affine, Joint, Unknowns};
use super::peaks::Sampling;
use super::piece::GAUSS_10;
use super::quadratic::Quadratic;
use super::span::Span;
use super::subspace::Subspace;
use crate::geometry::{Point, Vec2};

/// Where a stiffness is asked for.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Place {
    /// Point of the axis, m.
    pub at: Point,
    /// Length along the axis from the left springing, m.
    pub s: f64,
    /// Unit tangent of the axis.
    pub tangent: Vec2,
    /// Depth of the rib, m, where one is known.
    pub depth: Option<f64>,
}

/// How readily a section bends and shortens.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Flexibility {
    /// `1 / EI`, per kN·m².
    pub bending: f64,
    /// `1 / EA`, per kN; 0 for a rib that does not shorten.
    pub axial: f64,
}

/// What strains a rib beside its loads.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Effects {
    /// Free strain of the rib: expansion times change of temperature, less shrinkage.
    pub strain: f64,
    /// Movement of the left abutment: m to the right, m upward, rad counter-clockwise.
    pub left: [f64; 3],
    /// Movement of the right abutment, alike.
    pub right: [f64; 3],
}

/// The unknowns of least energy among the lines of a space. `None` when the stiffness is no number or nothing is left to
/// choose by it.
pub(super) fn least_energy(
    span: &Span,
    whole: &Sampling,
    space: &Subspace,
    flexibility: &dyn Fn(&Place) -> Flexibility,
    effects: &Effects,
) -> Option<Unknowns> {
    let mut energy = Quadratic { n: space.free, matrix: [[0.0; 3]; 3], linear: [0.0; 3] };
    // In local units the energy is divided by load² · length³.
    let (load, length) = (span.load, span.length);
    let strain = effects.strain / (load * length * length);
    for pair in whole.joints().windows(2).filter(|p| p[0].piece == p[1].piece) {
        let piece = &span.pieces[pair[0].piece];
        let (half, middle) = ((pair[1].s - pair[0].s) / 2.0, f64::midpoint(pair[0].s, pair[1].s));
        for (x, w) in GAUSS_10 {
            for x in [-x, x] {
                let joint = piece.joint(middle + half * x, pair[0].piece);
                let soft = flexibility(&place(span, &joint));
                let (m, n) = (space.row(&joint.moment_row()), space.row(&joint.thrust_row()));
                let weight = w * half;
                add(&mut energy, &m, weight * soft.bending);
                add(&mut energy, &n, weight * soft.axial / (length * length));
                for i in 0..energy.n {
                    energy.linear[i] -= weight * strain * n.0[i];
                }
            }
        }
    }
    for (row, movement) in works(span, effects) {
        let row = space.row(&row);
        for i in 0..energy.n {
            energy.linear[i] -= movement * row.0[i];
        }
    }
    let sound = energy.matrix.iter().flatten().chain(&energy.linear).all(|v| v.is_finite());
    let y = energy.least(&[], &[]).filter(|_| sound)?;
    Some(space.unknowns(&y))
}

/// Adds half the square of an affine function, times `weight`.
pub(super) fn add(energy: &mut Quadratic, row: &Affine, weight: f64) {
    for i in 0..energy.n {
        for j in 0..energy.n {
            energy.matrix[i][j] += weight * row.0[i] * row.0[j];
        }
        energy.linear[i] += weight * row.0[i] * row.1;
    }
}

pub(super) fn place(span: &Span, joint: &Joint) -> Place {
    Place {
        at: span.drawn(joint.at),
        s: joint.s * span.length,
        tangent: joint.tangent,
        depth: span.has_depth.then_some(joint.depth * span.length),
    }
}

/// Reactions on the rib with the movements that they work on, in local units. The moment of the thrust turns the part after
/// a joint clockwise, so the couple of the left abutment is `−M_0`, that of the right one `M_n`.
fn works(span: &Span, effects: &Effects) -> [(Affine, f64); 6] {
    let (load, length) = (span.load, span.length);
    let along = 1.0 / (load * length.powi(3));
    let turn = 1.0 / (load * length * length);
    let unit = |i: usize| {
        let mut a = [0.0; 4];
        a[i] = 1.0;
        (a, 0.0)
    };
    let last = span.last();
    let loads = last.loads;
    let end = |i: usize, varying: f64, fixed: f64| {
        let mut a = [0.0; 4];
        a[i] = 1.0;
        a[3] = varying;
        (a, fixed)
    };
    let ([ul, vl, tl], [ur, vr, tr]) = (effects.left, effects.right);
    [
        (unit(0), ul * along),
        (unit(1), vl * along),
        (unit(2), -tl * turn),
        (end(0, loads.varying.fx, loads.fixed.fx), -ur * along),
        (end(1, loads.varying.fy, loads.fixed.fy), -vr * along),
        (last.moment_row(), tr * turn),
    ]
}
