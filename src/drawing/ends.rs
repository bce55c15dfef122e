//! Which points lie near one another.

use std::ops::ControlFlow;

use crate::geometry::Point;

/// Points sorted into square cells.
struct Grid {
    /// Cell and index of each point, sorted.
    cells: Vec<([i64; 2], usize)>,
}

impl Grid {
    fn new(points: &[Point], side: f64) -> Self {
        let low = points
            .iter()
            .fold(Point::new(f64::INFINITY, f64::INFINITY), |l, p| Point::new(l.x.min(p.x), l.y.min(p.y)));
        let side = side.max(f64::MIN_POSITIVE);
        // Saturates for points absurdly far apart, which then share a cell; distances are checked all the same.
        #[allow(clippy::cast_possible_truncation)]
        let cell = |p: &Point| [((p.x - low.x) / side).floor() as i64, ((p.y - low.y) / side).floor() as i64];
        let mut cells: Vec<_> = points.iter().enumerate().map(|(i, p)| (cell(p), i)).collect();
        cells.sort_unstable();
        Self { cells }
    }

    fn members(&self, cell: [i64; 2]) -> &[([i64; 2], usize)] {
        let from = self.cells.partition_point(|c| c.0 < cell);
        let to = from + self.cells[from..].partition_point(|c| c.0 == cell);
        &self.cells[from..to]
    }

    /// All cells with something in them.
    fn occupied(&self) -> impl Iterator<Item = &[([i64; 2], usize)]> {
        self.cells.chunk_by(|a, b| a.0 == b.0)
    }

    /// Cells after this one that lie within `reach` cells of it.
    fn later(&self, cell: [i64; 2], reach: i64) -> impl Iterator<Item = &[([i64; 2], usize)]> {
        (0..=reach)
            .flat_map(move |dx| (-reach..=reach).map(move |dy| [dx, dy]))
            .filter(|d| *d > [0, 0])
            .map(move |d| self.members([cell[0].saturating_add(d[0]), cell[1].saturating_add(d[1])]))
    }
}

/// Groups of points within `reach` of one another (also by way of others): for each point the lowest index of its group.
pub fn clusters(points: &[Point], reach: f64) -> Vec<usize> {
    fn root(parent: &mut [usize], mut i: usize) -> usize {
        while parent[i] != i {
            parent[i] = parent[parent[i]];
            i = parent[i];
        }
        i
    }
    let mut parent: Vec<usize> = (0..points.len()).collect();
    let mut unite = |a: usize, b: usize| {
        let (a, b) = (root(&mut parent, a), root(&mut parent, b));
        parent[a.max(b)] = a.min(b);
    };
    let near = |a: usize, b: usize| (points[a] - points[b]).hypot() <= reach;
    // Cells so small that all points of one are near one another: thousands on one spot cost no more than a few.
    let grid = Grid::new(points, reach / 2.0);
    for members in grid.occupied() {
        let (cell, first) = members[0];
        for &(_, other) in &members[1..] {
            if near(first, other) {
                unite(first, other);
            }
        }
        for others in grid.later(cell, 2) {
            let hit =
                members.iter().find_map(|&(_, a)| others.iter().find(|o| near(a, o.1)).map(|o| (a, o.1)));
            if let Some((a, b)) = hit {
                unite(a, b);
            }
        }
    }
    (0..points.len()).map(|i| root(&mut parent, i)).collect()
}

/// Visits pairs of points within `reach` of one another, each once, until the visitor breaks off.
pub fn near_pairs<B>(
    points: &[Point],
    reach: f64,
    mut visit: impl FnMut(usize, usize) -> ControlFlow<B>,
) -> ControlFlow<B> {
    let grid = Grid::new(points, reach);
    let mut offer = |a: usize, b: usize| {
        if (points[a] - points[b]).hypot() <= reach {
            visit(a.min(b), a.max(b))
        } else {
            ControlFlow::Continue(())
        }
    };
    for members in grid.occupied() {
        for (i, &(cell, a)) in members.iter().enumerate() {
            for &(_, b) in &members[i + 1..] {
                offer(a, b)?;
            }
            for &(_, b) in grid.later(cell, 1).flatten() {
                offer(a, b)?;
            }
        }
    }
    ControlFlow::Continue(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #[test]
        fn as_comparing_all_with_all(
            places in prop::collection::vec((-3.0f64..3.0, -3.0f64..3.0), 0..40),
            reach in 0.0f64..1.0,
        ) {
            let points: Vec<Point> = places.iter().map(|p| Point::new(p.0, p.1)).collect();
            let mut expected = Vec::new();
            let mut group: Vec<usize> = (0..points.len()).collect();
            for a in 0..points.len() {
                for b in a + 1..points.len() {
                    if (points[a] - points[b]).hypot() <= reach {
                        expected.push((a, b));
                        let (old, new) = (group[a].max(group[b]), group[a].min(group[b]));
                        group.iter_mut().filter(|g| **g == old).for_each(|g| *g = new);
                    }
                }
            }
            let mut found = Vec::new();
            let end: ControlFlow<()> = near_pairs(&points, reach, |a, b| {
                found.push((a, b));
                ControlFlow::Continue(())
            });
            found.sort_unstable();
            prop_assert!(end.is_continue());
            prop_assert_eq!(found, expected);
            prop_assert_eq!(clusters(&points, reach), group);
        }
    }

    #[test]
    fn one_spot() {
        let points = vec![Point::new(5.0, 5.0); 100_000];
        assert!(clusters(&points, 0.0).iter().all(|&g| g == 0));
    }
}
