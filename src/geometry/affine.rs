//! Affine maps of space: how a block lies in a drawing, and how a drawing lies in the plane of an elevation.

/// A map `p` → `linear · p + offset`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Affine {
    /// Rows of the linear part.
    pub linear: [[f64; 3]; 3],
    /// Where the origin goes.
    pub offset: [f64; 3],
}

impl Affine {
    /// The map that changes nothing, to the bit.
    pub const IDENTITY: Self =
        Self { linear: [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]], offset: [0.0; 3] };

    /// A move.
    pub fn moved(offset: [f64; 3]) -> Self {
        Self { offset, ..Self::IDENTITY }
    }

    /// The map whose linear part has these columns: where the unit vectors go.
    pub fn of_columns(x: [f64; 3], y: [f64; 3], z: [f64; 3]) -> Self {
        Self { linear: std::array::from_fn(|i| [x[i], y[i], z[i]]), offset: [0.0; 3] }
    }

    /// The map whose linear part has these rows: coordinates along three directions.
    pub fn of_rows(x: [f64; 3], y: [f64; 3], z: [f64; 3]) -> Self {
        Self { linear: [x, y, z], offset: [0.0; 3] }
    }

    /// Where a point goes.
    pub fn point(&self, p: [f64; 3]) -> [f64; 3] {
        let v = self.vector(p);
        std::array::from_fn(|i| v[i] + self.offset[i])
    }

    /// Where a direction goes, its length scaled along with it.
    pub fn vector(&self, v: [f64; 3]) -> [f64; 3] {
        self.linear.map(|row| row[0] * v[0] + row[1] * v[1] + row[2] * v[2])
    }

    /// First `inner`, then this map.
    #[must_use]
    pub fn after(&self, inner: &Self) -> Self {
        let column = |j: usize| self.vector(inner.linear.map(|row| row[j]));
        Self { offset: self.point(inner.offset), ..Self::of_columns(column(0), column(1), column(2)) }
    }

    /// Whether every number of it can be computed with.
    pub fn is_finite(&self) -> bool {
        self.linear.iter().flatten().chain(&self.offset).all(|x| x.is_finite())
    }
}

#[cfg(test)]
mod tests {
    // Whole numbers stay exact.
    #![allow(clippy::float_cmp)]

    use super::*;

    #[test]
    fn maps_follow_one_another() {
        let turn = Affine::of_columns([0.0, 1.0, 0.0], [-1.0, 0.0, 0.0], [0.0, 0.0, 1.0]);
        let both = Affine::moved([1.0, 2.0, 3.0]).after(&turn);
        assert_eq!(both.point([5.0, 7.0, 1.0]), [-6.0, 7.0, 4.0]);
        assert_eq!(turn.after(&Affine::moved([1.0, 2.0, 3.0])).point([5.0, 7.0, 1.0]), [-9.0, 6.0, 4.0]);
        assert_eq!(Affine::IDENTITY.point([0.1, -0.7, 1e9]), [0.1, -0.7, 1e9]);
    }
}
