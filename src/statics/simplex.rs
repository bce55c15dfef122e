//! A dense dual simplex for linear programs of at most four unknowns and any number of rows.
//!
//! `minimise c · x` subject to `a_i · x ≤ b_i`. A basis is as many rows as there are unknowns; its vertex solves them
//! as equations, its multipliers `y` satisfy `Σ y_i a_i = −c`. The method keeps `y ≥ 0` (dual feasible) and takes in
//! the most violated row until none is left [Lemke 1954, dual simplex]. A basis therefore stays a valid start when rows
//! are added, which is what the exchange on a continuous axis does all the time.

#![allow(clippy::needless_range_loop, reason = "small dense matrices read best by index")]

use crate::tolerance;

/// Largest number of unknowns.
pub(super) const MOST: usize = 4;

/// `a · x ≤ b`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Row {
    pub a: [f64; MOST],
    pub b: f64,
}

/// A linear program that always has the box `|x_i| ≤ box` as its first `2 n` rows, so that it has a start and cannot
/// be unbounded.
#[derive(Debug, Clone)]
pub(super) struct Program {
    unknowns: usize,
    cost: [f64; MOST],
    rows: Vec<Row>,
    /// Length of each row as it was given.
    lengths: Vec<f64>,
    basis: Option<[usize; MOST]>,
}

/// How a program ended.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Outcome {
    /// The best vertex.
    Best(Vertex),
    /// No point satisfies all rows: the weights (not negative) of the scaled rows that contradict each other, summing
    /// their left sides to zero and their right sides to a negative number.
    Infeasible(Vec<(usize, f64)>),
    /// Rounding kept it from ending.
    Stalled,
}

/// A vertex with the multipliers that prove it best.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Vertex {
    pub x: [f64; MOST],
    /// Row and multiplier (not negative, of the row as it was given) of each basic row.
    pub active: Vec<(usize, f64)>,
    /// `c · x`
    pub cost: f64,
    /// The bound that the multipliers give: `−Σ y_i b_i`.
    pub dual: f64,
}

impl Program {
    pub fn new(cost: &[f64], size: f64) -> Self {
        let unknowns = cost.len();
        let mut c = [0.0; MOST];
        c[..unknowns].copy_from_slice(cost);
        let mut rows = Vec::new();
        for i in 0..unknowns {
            for sign in [1.0, -1.0] {
                let mut a = [0.0; MOST];
                a[i] = sign;
                rows.push(Row { a, b: size });
            }
        }
        let lengths = vec![1.0; rows.len()];
        Self { unknowns, cost: c, rows, lengths, basis: None }
    }

    /// The basis of the last vertex, for a program with like rows.
    pub fn basis(&self) -> Option<[usize; MOST]> {
        self.basis
    }

    /// Starts the next solution from a basis of a program with like rows, where it is of use.
    pub fn start_from(&mut self, basis: Option<[usize; MOST]>) {
        self.basis = basis;
    }

    /// Makes the box larger; the basis is kept.
    pub fn widen(&mut self, size: f64) {
        for row in &mut self.rows[..2 * self.unknowns] {
            row.b = size;
        }
    }

    /// Largest multiplier of the box at a vertex: what a unit of a larger box would bring.
    pub fn held(&self, vertex: &Vertex) -> f64 {
        let inside = vertex.active.iter().filter(|a| a.0 < self.box_rows());
        inside.fold(0.0, |m, a| f64::max(m, a.1))
    }

    /// Number of rows of the box.
    pub fn box_rows(&self) -> usize {
        2 * self.unknowns
    }

    /// Adds a row, scaled to unit length of `a`; rows that are zero on the left are kept as they are.
    pub fn push(&mut self, row: Row) {
        let norm = row.a[..self.unknowns].iter().map(|a| a * a).sum::<f64>().sqrt();
        let norm = if norm > 0.0 && norm.is_finite() { norm } else { 1.0 };
        self.rows.push(Row { a: row.a.map(|a| a / norm), b: row.b / norm });
        self.lengths.push(norm);
    }

    /// Puts other numbers in place of all rows after the box; the basis is kept and used when it is still of use.
    pub fn replace(&mut self, rows: impl Iterator<Item = Row>) {
        self.rows.truncate(self.box_rows());
        self.lengths.truncate(self.box_rows());
        for row in rows {
            self.push(row);
        }
    }

    /// Solves the program, from the last basis when it has one.
    pub fn solve(&mut self) -> Outcome {
        let start = self.basis.take().and_then(|basis| {
            let valid = basis[..self.unknowns].iter().all(|&i| i < self.rows.len());
            valid.then(|| self.factor(&basis)).flatten().filter(|f| f.is_dual_feasible())
        });
        let mut at = match start.or_else(|| self.factor(&self.corner())) {
            Some(factor) => factor,
            None => return Outcome::Stalled,
        };
        let n = self.unknowns;
        let patience = 200 + 20 * n;
        for step in 0..50 * patience {
            // After many steps the smallest index is taken on both sides, which cannot cycle [Bland 1977].
            let careful = step > patience;
            let Some(enter) = self.most_violated(&at, careful, step > 4 * patience) else {
                self.basis = Some(at.basis);
                return Outcome::Best(self.vertex(&at));
            };
            let w = at.combination(&self.rows[enter].a, n);
            let mut leave: Option<(usize, f64)> = None;
            let largest = w.iter().fold(0.0, |m, v| f64::max(m, v.abs()));
            for i in 0..n {
                if w[i] <= tolerance::SIMPLEX_PIVOT * largest {
                    continue;
                }
                let ratio = at.y[i].max(0.0) / w[i];
                let better = match leave {
                    None => true,
                    Some((j, best)) => {
                        let tie = (ratio - best).abs() <= f64::EPSILON * (1.0 + best);
                        if tie && careful {
                            at.basis[i] < at.basis[j]
                        } else if tie {
                            w[i] > w[j]
                        } else {
                            ratio < best
                        }
                    }
                };
                if better {
                    leave = Some((i, ratio));
                }
            }
            let Some((i, _)) = leave else {
                let mut proof = vec![(enter, 1.0)];
                proof.extend((0..n).map(|i| (at.basis[i], (-w[i]).max(0.0))).filter(|p| p.1 > 0.0));
                return Outcome::Infeasible(proof);
            };
            let mut basis = at.basis;
            basis[i] = enter;
            match self.factor(&basis) {
                Some(next) => at = next,
                None => return Outcome::Stalled,
            }
        }
        Outcome::Stalled
    }

    /// The corner of the box that is best for the cost alone.
    fn corner(&self) -> [usize; MOST] {
        let mut basis = [0; MOST];
        for (i, row) in basis[..self.unknowns].iter_mut().enumerate() {
            *row = 2 * i + usize::from(self.cost[i] > 0.0);
        }
        basis
    }

    fn most_violated(&self, at: &Factor, first: bool, tired: bool) -> Option<usize> {
        let slack = if tired { tolerance::SIMPLEX_LOOSE } else { tolerance::SIMPLEX_TIGHT };
        let size = at.x.iter().fold(1.0, |m, x| f64::max(m, x.abs()));
        let mut worst: Option<(usize, f64)> = None;
        for (i, row) in self.rows.iter().enumerate() {
            let left = row.a[0] * at.x[0] + row.a[1] * at.x[1] + row.a[2] * at.x[2] + row.a[3] * at.x[3];
            let over = left - row.b;
            if over > slack * size.max(row.b.abs())
                && worst.is_none_or(|w| over > w.1)
                && !at.basis[..self.unknowns].contains(&i)
            {
                worst = Some((i, over));
                if first {
                    break;
                }
            }
        }
        worst.map(|w| w.0)
    }

    /// Solves the basis as equations for the vertex, and its transpose for the multipliers.
    fn factor(&self, basis: &[usize; MOST]) -> Option<Factor> {
        let n = self.unknowns;
        let mut m = [[0.0; MOST]; MOST];
        let mut inverse = [[0.0; MOST]; MOST];
        for i in 0..n {
            m[i] = self.rows[basis[i]].a;
            inverse[i][i] = 1.0;
        }
        // Gauss and Jordan with row exchange.
        for k in 0..n {
            let p = (k..n).max_by(|&i, &j| m[i][k].abs().total_cmp(&m[j][k].abs()))?;
            if m[p][k].abs() < tolerance::SIMPLEX_SINGULAR {
                return None;
            }
            m.swap(k, p);
            inverse.swap(k, p);
            let d = 1.0 / m[k][k];
            for j in 0..n {
                m[k][j] *= d;
                inverse[k][j] *= d;
            }
            for i in (0..n).filter(|&i| i != k) {
                let f = m[i][k];
                if f.abs() > 0.0 {
                    for j in 0..n {
                        m[i][j] -= f * m[k][j];
                        inverse[i][j] -= f * inverse[k][j];
                    }
                }
            }
        }
        let mut x = [0.0; MOST];
        let mut y = [0.0; MOST];
        for i in 0..n {
            for j in 0..n {
                x[i] += inverse[i][j] * self.rows[basis[j]].b;
                y[j] -= self.cost[i] * inverse[i][j];
            }
        }
        Some(Factor { basis: *basis, inverse, x, y, unknowns: n })
    }

    fn vertex(&self, at: &Factor) -> Vertex {
        let scaled = || (0..self.unknowns).map(|i| (at.basis[i], at.y[i].max(0.0)));
        let dual = -scaled().map(|(i, y)| y * self.rows[i].b).sum::<f64>();
        let active = scaled().map(|(i, y)| (i, y / self.lengths[i])).collect();
        let cost = self.cost.iter().zip(&at.x).map(|(c, x)| c * x).sum();
        Vertex { x: at.x, active, cost, dual }
    }
}

/// A basis with its inverse. `inverse` is of the matrix whose rows are the basic rows.
struct Factor {
    basis: [usize; MOST],
    inverse: [[f64; MOST]; MOST],
    x: [f64; MOST],
    y: [f64; MOST],
    unknowns: usize,
}

impl Factor {
    fn is_dual_feasible(&self) -> bool {
        self.y[..self.unknowns].iter().all(|&y| y >= -tolerance::SIMPLEX_TIGHT)
    }

    /// Weights `w` with `a = Σ w_i a_basis(i)`.
    fn combination(&self, a: &[f64; MOST], n: usize) -> [f64; MOST] {
        let mut w = [0.0; MOST];
        for i in 0..n {
            for j in 0..n {
                w[j] += a[i] * self.inverse[i][j];
            }
        }
        w
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn row(a: &[f64], b: f64) -> Row {
        let mut full = [0.0; MOST];
        full[..a.len()].copy_from_slice(a);
        Row { a: full, b }
    }

    #[test]
    fn small_program() {
        // minimise −3x − 5y, x ≤ 4, 2y ≤ 12, 3x + 2y ≤ 18: the textbook optimum is x = 2, y = 6.
        let mut p = Program::new(&[-3.0, -5.0], 1e6);
        for r in [row(&[1.0, 0.0], 4.0), row(&[0.0, 2.0], 12.0), row(&[3.0, 2.0], 18.0)] {
            p.push(r);
        }
        let Outcome::Best(v) = p.solve() else { panic!() };
        assert!((v.x[0] - 2.0).abs() < 1e-12 && (v.x[1] - 6.0).abs() < 1e-12);
        assert!((v.dual + 36.0).abs() < 1e-12);
        p.push(row(&[1.0, 1.0], 7.0));
        let Outcome::Best(v) = p.solve() else { panic!() };
        assert!((-3.0 * v.x[0] - 5.0 * v.x[1] + 33.0).abs() < 1e-12);
    }

    #[test]
    fn contradiction() {
        let mut p = Program::new(&[0.0, 1.0], 1e3);
        p.push(row(&[1.0, 1.0], 1.0));
        p.push(row(&[-1.0, -1.0], -2.0));
        let Outcome::Infeasible(proof) = p.solve() else { panic!() };
        let sum = proof.iter().fold([0.0; 3], |s, &(i, w)| {
            let r = p.rows[i];
            [s[0] + w * r.a[0], s[1] + w * r.a[1], s[2] + w * r.b]
        });
        assert!(sum[0].abs() < 1e-12 && sum[1].abs() < 1e-12 && sum[2] < 0.0);
    }
}
