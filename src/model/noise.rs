//! Noise of a line that was surveyed point by point.
//!
//! Each inner point of a polyline is held against the straight line through its neighbours. On a smooth line that distance is its
//! bow, which changes little from point to point; what is left in the difference of two neighbouring distances is noise. Pseudo-
//! residuals after T. Gasser, L. Sroka, C. Jennen-Steinmetz, "Residual variance and residual pattern in nonlinear regression",
//! Biometrika 73 (1986) 625-633; the difference of two of them takes a constant bow out.

use crate::geometry::{Path, Segment};
use crate::tolerance;

/// Standard deviation of the points across the line, m; `None` where it is not drawn point by point (fewer than
/// [`tolerance::NOISE_POINTS`] straight pieces, or curved ones).
pub fn noise(path: &Path) -> Option<f64> {
    let segments = path.segments();
    if segments.len() < tolerance::NOISE_POINTS || segments.iter().any(|s| matches!(s, Segment::Arc { .. })) {
        return None;
    }
    // Distance of each inner point from the line through its neighbours, across it, and the shares of its two neighbours.
    let off: Vec<(f64, f64)> = segments
        .windows(2)
        .map(|w| {
            let (a, p, b) = (w[0].start(), w[0].end(), w[1].end());
            let along = b - a;
            let length = along.hypot().max(f64::MIN_POSITIVE);
            ((p - a).cross(along) / length, (p - a).dot(along) / (length * length))
        })
        .collect();
    let mut sum = 0.0;
    let mut count = 0u32;
    for pair in off.windows(2) {
        let [(d, u), (e, v)] = [pair[0], pair[1]];
        // The bow grows with the product of the distances to both neighbours; unequal steps are left out of the sum.
        if (u - 0.5).abs() > EVEN || (v - 0.5).abs() > EVEN {
            continue;
        }
        // d = y1 - (1-u) y0 - u y2, e = y2 - (1-v) y1 - v y3: variance of e - d for equal, independent points.
        let c = [1.0 - u, -(2.0 - v), 1.0 + u, -v];
        let size: f64 = c.iter().map(|c| c * c).sum();
        sum += (e - d).powi(2) / size;
        count += 1;
    }
    (count >= 8).then(|| (sum / f64::from(count)).sqrt())
}

/// How far a point may lie from the middle between its neighbours, as a part of their distance.
const EVEN: f64 = 0.1;

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::Point;

    #[test]
    fn noise_of_known_size_is_found_and_a_smooth_line_has_none() {
        let line = |noise: f64| {
            // A fixed sequence of nearly independent numbers of unit variance (uniform, from a multiplicative generator).
            let mut seed = 12_345_u64;
            let mut next = || {
                seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
                ((seed >> 33) as f64 / (1u64 << 31) as f64 - 0.5) * 12.0_f64.sqrt()
            };
            let points: Vec<Point> = (0..=400)
                .map(|k| {
                    let angle = std::f64::consts::PI * (0.85 - 0.7 * f64::from(k) / 400.0);
                    let r = 6.0 + noise * next();
                    Point::new(r * angle.cos(), r * angle.sin())
                })
                .collect();
            noise_of(&points)
        };
        fn noise_of(points: &[Point]) -> f64 {
            noise(&Path::polyline(points).unwrap()).unwrap()
        }
        assert!(line(0.0) < 1e-9, "{:e}", line(0.0));
        for size in [0.001, 0.004] {
            let found = line(size);
            assert!((found / size - 1.0).abs() < 0.15, "{size}: {found}");
        }
        assert!(noise(&Path::polyline(&[Point::ORIGIN, Point::new(1.0, 1.0)]).unwrap()).is_none());
    }
}
