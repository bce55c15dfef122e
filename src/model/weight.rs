//! The ring's own weight: area and centroid of its true pieces between joints.

use super::Span;
use crate::geometry::{Point, Segment};
use crate::job::RibDepth;

/// A piece of the ring between two joints normal to the axis.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RingPiece {
    /// Lengths along the axis of its joints, m.
    pub between: (f64, f64),
    /// Its centroid, m.
    pub centroid: Point,
    /// Its area in the elevation, m².
    pub area: f64,
}

/// Depths at lengths along the axis of a span, ascending, linear between, m: of the drawn ring, else as the job says. A
/// single value counts everywhere. `None` where no depth is known.
pub fn depths(span: &Span, stated: Option<RibDepth>) -> Option<Vec<(f64, f64)>> {
    if let Some(ring) = &span.ring {
        return Some(ring.depth.clone());
    }
    Some(match stated? {
        RibDepth::Constant(d) => vec![(0.0, d)],
        RibDepth::Linear([springing, crown]) => {
            let (above, below) = (span.axis.farthest_from_chord(false), span.axis.farthest_from_chord(true));
            let top = if above.1 >= -below.1 { above.0 } else { below.0 };
            vec![(0.0, springing), (top, crown), (span.axis.length(), springing)]
        }
    })
}

/// The pieces of the ring between joints at the lengths `cuts` (ascending) and the springings. The element of length `ds`
/// at curvature `κ` (turning left positive) has the area `d ds` and its centroid `κ d² / 12` inside the curve.
pub fn pieces(span: &Span, depths: &[(f64, f64)], cuts: &[f64]) -> Vec<RingPiece> {
    let axis = &span.axis;
    let whole = axis.length();
    let mut joints: Vec<f64> = cuts.iter().copied().filter(|s| *s > 0.0 && *s < whole).collect();
    joints.push(whole);
    // Between these the integrand is smooth.
    let mut breaks: Vec<f64> = axis.cumulative().to_vec();
    breaks.extend(depths.iter().map(|d| d.0).filter(|s| *s > 0.0 && *s < whole));
    breaks.sort_by(f64::total_cmp);
    let mut from = 0.0;
    let mut found = Vec::with_capacity(joints.len());
    for to in joints {
        let mut area = 0.0;
        let mut moment = (0.0, 0.0);
        let first = breaks.partition_point(|b| *b <= from);
        let inner = breaks[first..].iter().copied().take_while(|b| *b < to).chain([to]);
        let mut a = from;
        for b in inner {
            if b > a {
                add(span, depths, a, b, &mut area, &mut moment);
                a = b;
            }
        }
        if area > 0.0 {
            let origin = axis.start();
            let centroid = Point::new(origin.x + moment.0 / area, origin.y + moment.1 / area);
            found.push(RingPiece { between: (from, to), centroid, area });
        }
        from = to;
    }
    found
}

/// Abscissae (of both signs) and weights of the Gauss rule of six points.
const GAUSS: [(f64, f64); 3] = [
    (0.238_619_186_083_196_9, 0.467_913_934_572_691_05),
    (0.661_209_386_466_264_5, 0.360_761_573_048_138_6),
    (0.932_469_514_203_152, 0.171_324_492_379_170_36),
];

fn add(span: &Span, depths: &[(f64, f64)], a: f64, b: f64, area: &mut f64, moment: &mut (f64, f64)) {
    let axis = &span.axis;
    let index = axis.segment_index(f64::midpoint(a, b), false);
    let segment = axis.segments()[index];
    let base = axis.cumulative()[index];
    let (curvature, turn) = match segment {
        Segment::Line { .. } => (0.0, 0.0),
        Segment::Arc { radius, sweep, .. } => (sweep.signum() / radius, (b - a) / radius),
    };
    let origin = axis.start();
    // Steps of a quarter radian at most leave an error below rounding.
    let steps = (turn / 0.25).ceil().max(1.0);
    let step = (b - a) / steps;
    #[allow(clippy::cast_possible_truncation, clippy::cast_sign_loss)] // A small count, rounded up above.
    for k in 0..steps as u32 {
        let middle = a + (f64::from(k) + 0.5) * step;
        for (x, w) in GAUSS {
            for side in [-x, x] {
                let s = middle + side * step / 2.0;
                let (p, t) = (segment.point_at(s - base), segment.tangent_at(s - base));
                let d = depth_at(depths, s);
                let dw = w * step / 2.0;
                let shift = curvature * d.powi(3) / 12.0;
                *area += dw * d;
                moment.0 += dw * (d * (p.x - origin.x) + shift * t.y);
                moment.1 += dw * (d * (p.y - origin.y) - shift * t.x);
            }
        }
    }
}

/// Depth at a length along the axis.
pub fn depth_at(table: &[(f64, f64)], s: f64) -> f64 {
    let i = table.partition_point(|d| d.0 <= s);
    match (i.checked_sub(1).and_then(|i| table.get(i)), table.get(i)) {
        (Some(a), Some(b)) => a.1 + (b.1 - a.1) * (s - a.0) / (b.0 - a.0),
        (Some(end), None) | (None, Some(end)) => end.1,
        (None, None) => 0.0,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::Path;
    use std::f64::consts::PI;

    #[test]
    fn a_half_ring_has_the_centroid_of_the_books() {
        let arc = Segment::Arc { centre: Point::ORIGIN, radius: 5.0, start_angle: PI, sweep: -PI };
        let axis = Path::new([arc]).unwrap();
        let span = Span {
            name: String::new(),
            axis,
            sources: vec![],
            ring: None,
            hinges: vec![],
            loads: vec![],
            line_loads: vec![],
        };
        let depth = depths(&span, Some(RibDepth::Constant(0.6))).unwrap();
        let one = pieces(&span, &depth, &[]);
        let (r, big) = (4.7_f64, 5.3_f64);
        let height = 4.0 / (3.0 * PI) * (big.powi(3) - r.powi(3)) / (big * big - r * r);
        assert_eq!(one.len(), 1);
        assert!((one[0].area - PI * 5.0 * 0.6).abs() < 1e-12);
        assert!((one[0].centroid.y - height).abs() < 1e-12 && one[0].centroid.x.abs() < 1e-12);
        let cut = pieces(&span, &depth, &[1.0, 7.0, 9.9]);
        assert_eq!(cut.len(), 4);
        let moment: f64 = cut.iter().map(|p| p.area * p.centroid.y).sum();
        assert!((cut.iter().map(|p| p.area).sum::<f64>() - one[0].area).abs() < 1e-12);
        assert!((moment - one[0].area * height).abs() < 1e-11);
    }
}
