//! The choice among lines that an optimum leaves equal: the one of least `∫ M² ds`. It is strictly convex, so the choice is
//! one, and a mirrored span gives the mirrored line.
#![allow(clippy::needless_range_loop, reason = "small dense matrices read best by index")]

use super::peaks::Sampling;
use super::quadratic::{Bound, Quadratic};
use super::span::Span;
use super::subspace::Subspace;
use crate::tolerance;

/// `½ ∫ M² ds` in the free unknowns, by Gauss with three points between neighbouring samples.
pub(super) fn bending(span: &Span, whole: &Sampling, space: &Subspace) -> Quadratic {
    let mut q = Quadratic { n: space.free, matrix: [[0.0; 3]; 3], linear: [0.0; 3] };
    let far = 0.6_f64.sqrt();
    for pair in whole.joints().windows(2).filter(|p| p[0].piece == p[1].piece) {
        let piece = &span.pieces[pair[0].piece];
        let (half, middle) = ((pair[1].s - pair[0].s) / 2.0, f64::midpoint(pair[0].s, pair[1].s));
        for (x, w) in [(-far, 5.0 / 9.0), (0.0, 8.0 / 9.0), (far, 5.0 / 9.0)] {
            let joint = piece.joint(middle + half * x, pair[0].piece);
            let (m, c) = space.row(&joint.moment_row());
            for i in 0..q.n {
                for j in 0..q.n {
                    q.matrix[i][j] += w * half * m[i] * m[j];
                }
                q.linear[i] += w * half * m[i] * c;
            }
        }
    }
    q
}

/// The rows that are independent of those before them, in `n` unknowns.
pub(super) fn independent(n: usize, rows: impl Iterator<Item = Bound>) -> Vec<Bound> {
    let mut held: Vec<Bound> = Vec::new();
    let mut units: Vec<[f64; 3]> = Vec::new();
    for (a, b) in rows {
        let size = a.iter().map(|v| v * v).sum::<f64>().sqrt();
        let mut rest = a.map(|v| v / size);
        for u in &units {
            let along: f64 = (0..n).map(|j| rest[j] * u[j]).sum();
            for j in 0..n {
                rest[j] -= along * u[j];
            }
        }
        let left = rest.iter().map(|v| v * v).sum::<f64>().sqrt();
        if size > 0.0 && left > tolerance::RANK {
            units.push(rest.map(|v| v / left));
            held.push((a, b));
        }
    }
    held
}
