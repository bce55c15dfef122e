//! Which points lie near one another.

use crate::geometry::Point;

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
    for (a, b) in near_pairs(points, reach) {
        let (a, b) = (root(&mut parent, a), root(&mut parent, b));
        parent[a.max(b)] = a.min(b);
    }
    (0..points.len()).map(|i| root(&mut parent, i)).collect()
}

/// All pairs of points within `reach` of one another.
pub fn near_pairs(points: &[Point], reach: f64) -> Vec<(usize, usize)> {
    let mut order: Vec<usize> = (0..points.len()).collect();
    order.sort_by(|&a, &b| points[a].x.total_cmp(&points[b].x).then(a.cmp(&b)));
    let mut pairs = Vec::new();
    for (i, &a) in order.iter().enumerate() {
        for &b in &order[i + 1..] {
            if points[b].x - points[a].x > reach {
                break;
            }
            if (points[b] - points[a]).hypot() <= reach {
                pairs.push((a.min(b), a.max(b)));
            }
        }
    }
    pairs.sort_unstable();
    pairs
}
