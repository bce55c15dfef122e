//! Smooth curves as chains of circular arcs, as close to them as asked.
//!
//! Each part of a curve is met by a pair of arcs that share its ends and its directions there (a *biarc*; Bolton, K. M.,
//! "Biarc curves", Computer-Aided Design 7, 1975), so the chain has no kink that the curve has not. The distance falls with
//! the third power of the length of the parts; parts are halved until it is small enough.

use super::{Path, Point, Segment, Vec2};
use crate::tolerance;

/// A place on a curve, and how it runs on from there: any vector along its tangent.
pub type Place = (Point, Vec2);

/// Arcs along the curve from parameter `from` to `to`, nowhere farther from it than `distance` (measured at
/// [`tolerance::FIT_PROBES`] places of every part). `None` when it takes more halvings than [`tolerance::FIT_HALVINGS`], or a
/// place cannot be computed.
pub fn arcs(curve: &dyn Fn(f64) -> Option<Place>, from: f64, to: f64, distance: f64) -> Option<Vec<Segment>> {
    let mut out = Vec::new();
    halve(curve, (from, curve(from)?), (to, curve(to)?), distance, tolerance::FIT_HALVINGS, &mut out)?;
    Some(out)
}

fn halve(
    curve: &dyn Fn(f64) -> Option<Place>,
    a: (f64, Place),
    b: (f64, Place),
    distance: f64,
    left: u32,
    out: &mut Vec<Segment>,
) -> Option<()> {
    let fits = |pair: &[Segment]| -> Option<bool> {
        // Nothing between two places so close together can be seen.
        let Some(path) = Path::new(pair.iter().copied()) else {
            return Some(true);
        };
        for i in 1..tolerance::FIT_PROBES {
            let t = a.0 + (b.0 - a.0) * f64::from(i) / f64::from(tolerance::FIT_PROBES);
            if path.nearest(curve(t)?.0).1 > distance {
                return Some(false);
            }
        }
        Some(true)
    };
    if let Some(pair) = biarc(a.1, b.1)
        && fits(&pair)?
    {
        out.extend(pair);
        return Some(());
    }
    let left = left.checked_sub(1)?;
    let t = f64::midpoint(a.0, b.0);
    let middle = (t, curve(t)?);
    halve(curve, a, middle, distance, left, out)?;
    halve(curve, middle, b, distance, left, out)
}

/// The two arcs between two places with their directions; `None` when they would turn back.
fn biarc((p, along_p): Place, (q, along_q): Place) -> Option<[Segment; 2]> {
    let way = q - p;
    let (t0, t1) = (along_p / along_p.hypot(), along_q / along_q.hypot());
    if !(t0.x.is_finite() && t1.x.is_finite() && way.hypot2().is_finite())
        || way.dot(t0) <= 0.0
        || way.dot(t1) <= 0.0
    {
        return None;
    }
    // Equal lengths d of the outer legs: d²·2(1 − t0·t1) + 2d·way·(t0 + t1) − way² = 0; the root that stays good when
    // the directions are nearly parallel.
    let bend = 2.0 * (1.0 - t0.dot(t1)).max(0.0);
    let half = way.dot(t0 + t1);
    let d = way.hypot2() / (half + (half * half + bend * way.hypot2()).sqrt());
    let joint = p.midpoint(q) + (t0 - t1) * (d / 2.0);
    let arc = |from: Point, along: Vec2, to: Point| {
        let chord = to - from;
        // Half the angle from the direction to the chord, which is a quarter of the sweep.
        let bulge = (along.cross(chord).atan2(along.dot(chord)) / 2.0).tan();
        Segment::bulge(from, to, bulge)
    };
    // The second one is laid from its far end, against its direction there.
    Some([arc(p, t0, joint), arc(q, -t1, joint).reversed()])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ellipse_to_the_asked_distance() {
        let (a, b) = (20.0, 8.0);
        let ellipse = |t: f64| {
            Some((Point::new(a * t.cos(), b * t.sin()), Vec2::new(a * t.sin(), -b * t.cos()) * -1.0))
        };
        for distance in [1e-3, 1e-6, 4e-8] {
            let arcs = arcs(&ellipse, 0.0, std::f64::consts::PI, distance).unwrap();
            let path = Path::new(arcs.iter().copied()).unwrap();
            for i in 0..=1009 {
                let t = std::f64::consts::PI * f64::from(i) / 1009.0;
                let off = path.nearest(ellipse(t).unwrap().0).1;
                assert!(off <= 1.5 * distance, "{t}: {off}");
            }
            // A third power: a thousandth of the distance costs ten times the arcs.
            assert!((arcs.len() as f64) < 12.0 * (1.0 / distance).cbrt(), "{}", arcs.len());
            for pair in arcs.windows(2) {
                assert!((pair[0].end() - pair[1].start()).hypot() < 1e-12);
                let turn = pair[0].tangent_at(pair[0].length()).cross(pair[1].tangent_at(0.0));
                assert!(turn.abs() < 1e-6, "{turn}");
            }
        }
    }

    #[test]
    fn a_circle_is_met_by_its_own_arcs() {
        let circle = |t: f64| Some((Point::new(3.0 * t.cos(), 3.0 * t.sin()), Vec2::new(-t.sin(), t.cos())));
        let arcs = arcs(&circle, 0.2, 1.7, 1e-12).unwrap();
        assert_eq!(arcs.len(), 2);
        let length: f64 = arcs.iter().map(Segment::length).sum();
        assert!((length - 4.5).abs() < 1e-12);
    }

    #[test]
    fn a_curve_without_end_is_given_up() {
        assert!(arcs(&|t| Some((Point::new(t, f64::NAN), Vec2::new(1.0, 0.0))), 0.0, 1.0, 1e-9).is_none());
        assert!(arcs(&|_| None, 0.0, 1.0, 1e-9).is_none());
    }
}
