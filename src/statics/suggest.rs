//! The axis that would be the funicular of the loads: the line of thrust that a bridge under these loads would have for its
//! axis, through the same springings and with the same rise.
//!
//! Through two springings passes one funicular for each push; its height over their chord goes with one over the push
//! where all loads are upright (C. Culmann, *Die graphische Statik*, 1866), so that one ratio gives the wanted rise. With
//! leaning loads the ratio is taken again until it holds.

use super::{Analysis, LineKind, Problem, SpanKind, Status, analyse};
use crate::geometry::{Path, Point};
use crate::tolerance;

/// Ratios taken before the search is given up. Upright loads need two.
const STEPS: usize = 60;

/// A funicular of the loads with the springings and the rise of the axis.
#[derive(Debug, Clone, PartialEq)]
pub struct Funicular {
    /// Its push, kN, with the sign of [`super::End::horizontal`].
    pub push: f64,
    /// Its corners from the left springing to the right one, m.
    pub points: Vec<Point>,
}

/// The funicular of a problem's loads through the springings of its axis and with its rise. The weight of the ring acts
/// where the ring lies now. `analysis` is that of the same problem.
///
/// # Errors
///
/// Why there is none, as a clause.
pub fn funicular(problem: &Problem, analysis: &Analysis) -> Result<Funicular, String> {
    let (left, right) = (problem.axis.start(), problem.axis.end());
    let mut bare = Problem {
        hinges: Vec::new(),
        draw: Vec::new(),
        varying: Vec::new(),
        weight_varies: false,
        support: None,
        voussoirs: None,
        friction: None,
        strength: None,
        // A section without tension would have its factors of safety computed.
        tension: true,
        govern: Some(LineKind::Through),
        ..problem.clone()
    };
    if bare.ring_weight <= 0.0 {
        bare.depth = None;
    }
    let slope = (right.y - left.y) / (right.x - left.x);
    let below = analysis.kind == SpanKind::Cable;
    let mut height = analysis.rise;
    for _ in 0..STEPS {
        let x = analysis.crown.x;
        let crown = Point::new(x, left.y + slope * (x - left.x) + height);
        bare.through = Some([left, crown, right]);
        let found = analyse(&bare).map_err(|unsolved| unsolved.to_string())?;
        let line = &found.lines[found.governs];
        let Some(end) = line.left.filter(|_| line.status == Status::Found) else {
            return Err(line.reason.clone().unwrap_or_else(|| "no line was found".into()));
        };
        let rise = Path::polyline(&line.vertices).map_or(0.0, |path| path.farthest_from_chord(below).1);
        if (rise - analysis.rise).abs() <= tolerance::SUGGESTED_RISE * analysis.span {
            return Ok(Funicular { push: end.horizontal, points: line.vertices.clone() });
        }
        let ratio = analysis.rise / rise;
        if !(ratio.is_finite() && ratio > 0.0) {
            break;
        }
        height *= ratio;
    }
    Err("no funicular of the loads has the rise of the axis".into())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::Vec2;
    use crate::statics::{Force, Offset};

    fn problem(axis: Path, forces: &[(f64, f64, f64)]) -> Problem {
        Problem {
            forces: forces
                .iter()
                .map(|&(x, right, down)| Force { at: Point::new(x, 20.0), force: Vec2::new(right, -down) })
                .collect(),
            ..Problem::new(axis)
        }
    }

    fn arch() -> Path {
        Path::new([crate::geometry::Segment::bulge(Point::new(0.0, 1.0), Point::new(12.0, 1.0), -0.6)])
            .unwrap()
    }

    /// One load of 90 kN at a third of 12 m: M = 90·4·8/12 = 240 kNm, so that the funicular of the same rise 3.6 m has the
    /// push 240/3.6 and is the triangle over the load.
    #[test]
    fn one_load_gives_a_triangle() {
        let problem = problem(arch(), &[(4.0, 0.0, 90.0)]);
        let found = funicular(&problem, &analyse(&problem).unwrap()).unwrap();
        let expected = [Point::new(0.0, 1.0), Point::new(4.0, 4.6), Point::new(12.0, 1.0)];
        assert_eq!(found.points.len(), 3);
        for (a, b) in found.points.iter().zip(expected) {
            assert!((*a - b).hypot() < 1e-9, "{a:?} for {b:?}");
        }
        assert!((found.push - 240.0 / 3.6).abs() < 1e-9, "{}", found.push);
    }

    /// The definition: an axis drawn as suggested has a line of thrust that does not leave it.
    #[test]
    fn the_line_does_not_leave_the_suggested_axis() {
        for forces in [
            vec![(2.0, 0.0, 40.0), (5.0, 0.0, 90.0), (7.0, 0.0, 10.0), (11.0, 0.0, 70.0)],
            vec![(3.0, 8.0, 50.0), (6.0, -2.0, 60.0), (9.0, 5.0, 30.0)],
        ] {
            let drawn = problem(arch(), &forces);
            let before = analyse(&drawn).unwrap();
            let found = funicular(&drawn, &before).unwrap();
            let moved = Problem { axis: Path::polyline(&found.points).unwrap(), ..drawn.clone() };
            let after = analyse(&moved).unwrap();
            let stray = |a: &Analysis| a.lines[0].offset.map(|o: Offset| o.max_abs).unwrap();
            assert!(stray(&before) > 0.05, "{}", stray(&before));
            assert!(stray(&after) < 1e-7, "{}", stray(&after));
            assert!((after.rise - before.rise).abs() < 1e-7 && (after.span - before.span).abs() < 1e-9);
        }
    }

    #[test]
    fn a_cable_hangs() {
        let axis = Path::polyline(&[Point::new(0.0, 0.0), Point::new(5.0, -2.0), Point::new(10.0, 0.0)]);
        let problem = problem(axis.unwrap(), &[(2.0, 0.0, 10.0), (6.0, 0.0, 10.0)]);
        let found = funicular(&problem, &analyse(&problem).unwrap()).unwrap();
        let lowest = found.points.iter().map(|p| p.y).fold(0.0, f64::min);
        assert!((lowest + 2.0).abs() < 1e-9 && found.push < 0.0, "{lowest} {}", found.push);
    }
}
