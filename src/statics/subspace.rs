//! The lines of thrust that pass through all hinges: the unknowns as an affine function of fewer free numbers.

#![allow(clippy::needless_range_loop, reason = "small dense matrices read best by index")]

use super::joint::{Affine, Unknowns};
use super::span::Span;
use crate::tolerance;

/// `r = point + Σ y_k direction_k`, with the directions in sizes that suit the span.
#[derive(Debug, Clone)]
pub(super) struct Subspace {
    /// Number of free unknowns, 0 to 4.
    pub free: usize,
    point: Unknowns,
    directions: [Unknowns; 4],
}

impl Subspace {
    /// All lines under the loads as they are that keep every row at zero. `None` when the rows contradict or repeat each
    /// other.
    pub fn lines(span: &Span, rows: &[Affine]) -> Option<Self> {
        let as_they_are = ([0.0, 0.0, 0.0, 1.0], -1.0);
        Self::with_factor(span, &[&[as_they_are], rows].concat())
    }

    /// The same with the factor of the varying loads free.
    pub fn with_factor(span: &Span, rows: &[Affine]) -> Option<Self> {
        // A push of a line with this lever arm has size 1 / (8 arm); in such units all columns are alike.
        let sizes = [(0.125 / span.lever()).max(1.0), 1.0, 1.0, 1.0];
        let mut directions = [[0.0; 4]; 4];
        for k in 0..4 {
            directions[k][k] = sizes[k];
        }
        let mut space = Self { free: 4, point: [0.0; 4], directions };
        for row in rows {
            space = space.with(row)?;
        }
        Some(space)
    }

    /// The part of the space in which `a · r + c = 0`.
    fn with(&self, (a, c): &Affine) -> Option<Self> {
        let (row, constant) = self.row(&(*a, *c));
        let size = a.iter().map(|v| v * v).sum::<f64>().sqrt();
        // Householder: reflect the row onto the first free direction, then fix that one.
        let n = self.free;
        let norm = row[..n].iter().map(|v| v * v).sum::<f64>().sqrt();
        if n == 0 || norm <= tolerance::NO_RISE * size {
            return None;
        }
        let mut u = row;
        let sign = if row[0] < 0.0 { -1.0 } else { 1.0 };
        u[0] += sign * norm;
        let uu: f64 = u[..n].iter().map(|v| v * v).sum();
        let mut turned = [[0.0; 4]; 4];
        for (k, to) in turned.iter_mut().enumerate().take(n) {
            // Column k of I − 2 u uᵀ / (u·u), applied to the directions.
            for (j, d) in self.directions.iter().enumerate().take(n) {
                let h = f64::from(u8::from(j == k)) - 2.0 * u[j] * u[k] / uu;
                for i in 0..4 {
                    to[i] += h * d[i];
                }
            }
        }
        let mut point = self.point;
        let fixed = constant / (sign * norm);
        let mut directions = [[0.0; 4]; 4];
        directions[..3].copy_from_slice(&turned[1..]);
        for i in 0..4 {
            point[i] += fixed * turned[0][i];
        }
        Some(Self { free: n - 1, point, directions })
    }

    /// A row of the unknowns as a row of the free numbers.
    pub fn row(&self, (a, c): &Affine) -> Affine {
        let dot = |v: &Unknowns| a[0] * v[0] + a[1] * v[1] + a[2] * v[2] + a[3] * v[3];
        let mut out = [0.0; 4];
        for (o, d) in out.iter_mut().zip(&self.directions).take(self.free) {
            *o = dot(d);
        }
        (out, c + dot(&self.point))
    }

    /// The unknowns for given free numbers.
    pub fn unknowns(&self, y: &[f64]) -> Unknowns {
        let mut r = self.point;
        for (v, d) in y.iter().zip(&self.directions).take(self.free) {
            for i in 0..4 {
                r[i] += v * d[i];
            }
        }
        r
    }
}
