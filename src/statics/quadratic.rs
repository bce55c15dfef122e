//! Least value of a strictly convex quadratic of at most three unknowns under linear rows.
//!
//! Rows are taken in one at a time: when the best point so far breaks a row, the new best point lies on that row, and
//! the problem loses one unknown [Seidel 1991, for linear programs; it holds for any strictly convex aim].

#![allow(clippy::needless_range_loop, reason = "small dense matrices read best by index")]

/// `½ y·G y + g·y`, of the first `n` unknowns.
#[derive(Debug, Clone, Copy)]
pub(super) struct Quadratic {
    pub n: usize,
    pub matrix: [[f64; 3]; 3],
    pub linear: [f64; 3],
}

/// `a · y ≤ b`.
pub(super) type Bound = ([f64; 3], f64);

/// A straight subset `y = point + Σ u_k direction_k`.
struct Flat {
    point: [f64; 3],
    directions: [[f64; 3]; 2],
}

impl Quadratic {
    /// The least point with all `equal` rows as equations and all `rows` kept.
    pub fn least(&self, equal: &[Bound], rows: &[Bound]) -> Option<[f64; 3]> {
        let Some((first, rest)) = equal.split_first() else {
            return self.bounded(rows);
        };
        let flat = flat(self.n, first)?;
        let map = |rows: &[Bound]| rows.iter().map(|r| flat.row(self.n, r)).collect::<Vec<_>>();
        let u = flat.restrict(self).least(&map(rest), &map(rows))?;
        Some(flat.point_at(self.n, &u))
    }

    fn bounded(&self, rows: &[Bound]) -> Option<[f64; 3]> {
        match self.n {
            0 => return Some([0.0; 3]),
            1 => return Some(self.on_interval(rows)),
            _ => {}
        }
        let mut best = self.free()?;
        for (i, row) in rows.iter().enumerate() {
            let left = dot(&row.0, &best);
            let size = norm(&row.0).max(row.1.abs());
            if left > row.1 + 4.0 * f64::EPSILON * size
                && let Some(flat) = flat(self.n, row)
            {
                let earlier: Vec<_> = rows[..i].iter().map(|r| flat.row(self.n, r)).collect();
                let u = flat.restrict(self).bounded(&earlier)?;
                best = flat.point_at(self.n, &u);
            }
        }
        Some(best)
    }

    /// One unknown: the free least point, brought into the interval. Where rounding leaves no room, the middle.
    fn on_interval(&self, rows: &[Bound]) -> [f64; 3] {
        let (mut low, mut high) = (f64::NEG_INFINITY, f64::INFINITY);
        for (a, b) in rows {
            if a[0] > f64::EPSILON {
                high = high.min(b / a[0]);
            } else if a[0] < -f64::EPSILON {
                low = low.max(b / a[0]);
            }
        }
        let free = if self.matrix[0][0] > 0.0 { -self.linear[0] / self.matrix[0][0] } else { 0.0 };
        let y = if low > high { f64::midpoint(low, high) } else { free.clamp(low, high) };
        [y, 0.0, 0.0]
    }

    /// The least point without rows, by Gauss with row exchange.
    fn free(&self) -> Option<[f64; 3]> {
        let n = self.n;
        let mut m = self.matrix;
        let mut b = self.linear.map(|g| -g);
        for k in 0..n {
            let p = (k..n).max_by(|&i, &j| m[i][k].abs().total_cmp(&m[j][k].abs()))?;
            if m[p][k].abs() <= 0.0 {
                return None;
            }
            m.swap(k, p);
            b.swap(k, p);
            for i in k + 1..n {
                let f = m[i][k] / m[k][k];
                for j in k..n {
                    m[i][j] -= f * m[k][j];
                }
                b[i] -= f * b[k];
            }
        }
        let mut y = [0.0; 3];
        for k in (0..n).rev() {
            let rest: f64 = (k + 1..n).map(|j| m[k][j] * y[j]).sum();
            y[k] = (b[k] - rest) / m[k][k];
        }
        Some(y)
    }
}

/// The points with `a · y = b`.
fn flat(n: usize, row: &Bound) -> Option<Flat> {
    let length = norm(&row.0);
    if length <= 0.0 {
        return None;
    }
    let a = row.0.map(|v| v / length);
    let point = a.map(|v| v * row.1 / length);
    let directions = match n {
        1 => [[0.0; 3]; 2],
        2 => [[-a[1], a[0], 0.0], [0.0; 3]],
        _ => {
            // The axis least along `a` gives a well-conditioned cross product.
            let least = (0..3).min_by(|&i, &j| a[i].abs().total_cmp(&a[j].abs()))?;
            let mut axis = [0.0; 3];
            axis[least] = 1.0;
            let u = cross(&a, &axis);
            let l = norm(&u);
            let u = u.map(|v| v / l);
            [u, cross(&a, &u)]
        }
    };
    Some(Flat { point, directions })
}

impl Flat {
    fn restrict(&self, q: &Quadratic) -> Quadratic {
        let mut out = Quadratic { n: q.n - 1, matrix: [[0.0; 3]; 3], linear: [0.0; 3] };
        for i in 0..out.n {
            let image = times(&q.matrix, &self.directions[i]);
            for j in 0..out.n {
                out.matrix[i][j] = dot(&image, &self.directions[j]);
            }
            out.linear[i] = dot(&image, &self.point) + dot(&q.linear, &self.directions[i]);
        }
        out
    }

    fn row(&self, n: usize, row: &Bound) -> Bound {
        let mut a = [0.0; 3];
        for (i, v) in a.iter_mut().enumerate().take(n - 1) {
            *v = dot(&row.0, &self.directions[i]);
        }
        (a, row.1 - dot(&row.0, &self.point))
    }

    fn point_at(&self, n: usize, u: &[f64; 3]) -> [f64; 3] {
        let mut y = self.point;
        for k in 0..n - 1 {
            for i in 0..3 {
                y[i] += u[k] * self.directions[k][i];
            }
        }
        y
    }
}

fn dot(a: &[f64; 3], b: &[f64; 3]) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

fn norm(a: &[f64; 3]) -> f64 {
    dot(a, a).sqrt()
}

fn cross(a: &[f64; 3], b: &[f64; 3]) -> [f64; 3] {
    [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
}

fn times(m: &[[f64; 3]; 3], v: &[f64; 3]) -> [f64; 3] {
    [dot(&m[0], v), dot(&m[1], v), dot(&m[2], v)]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nearest_point_of_a_corner() {
        let q = Quadratic {
            n: 3,
            matrix: [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]],
            linear: [-3.0, -4.0, -5.0],
        };
        let rows = [([1.0, 0.0, 0.0], 1.0), ([0.0, 1.0, 1.0], 2.0)];
        let y = q.least(&[], &rows).unwrap();
        assert!((y[0] - 1.0).abs() < 1e-12 && (y[1] - 0.5).abs() < 1e-12 && (y[2] - 1.5).abs() < 1e-12);
        let y = q.least(&[([1.0, 1.0, 1.0], 0.0)], &rows).unwrap();
        assert!(y.iter().sum::<f64>().abs() < 1e-12 && (y[0] + 1.0).abs() < 1e-12);
    }
}
