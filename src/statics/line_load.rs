//! Uniform loads per metre of plan, laid on the axis: from where to where each of them acts.
//!
//! Between two joints the load is `q` times the difference of their abscissae and acts midway between the two, whatever the
//! shape of the axis between: nothing is lumped.

use super::joint::Weight;
use super::{Problem, Unsolved};
use crate::geometry::{Path, Point, Segment};
use crate::tolerance;

/// A stretch of the axis under a line load, in local units.
#[derive(Debug, Clone, Copy)]
pub(super) struct Laid {
    /// Lengths along the axis where it begins and ends.
    pub s0: f64,
    pub s1: f64,
    /// Its length in plan.
    pub plan: f64,
    /// Downward per length of plan; in kN over the axis length until the span divides it by its load.
    pub down: f64,
    pub varies: bool,
}

/// Lays the line loads of a problem on the axis (local, its springing at the origin).
///
/// # Errors
/// When a load is no number, or the axis leans over so that a load from above does not meet it once and only once.
pub(super) fn lay(path: &Path, problem: &Problem, origin: Point, length: f64) -> Result<Vec<Laid>, Unsolved> {
    let mut laid = Vec::new();
    for load in &problem.line_loads {
        if ![load.from, load.to, load.down].iter().all(|v| v.is_finite()) || load.from > load.to {
            return Err(Unsolved::Input(
                "a line load has an end or a size that is not a finite number".into(),
            ));
        }
        let (from, to) = ((load.from - origin.x) / length, (load.to - origin.x) / length);
        let (mut low, mut high, mut covered) = (f64::INFINITY, f64::NEG_INFINITY, 0.0);
        let first = laid.len();
        for (s0, s1, x0, x1) in runs(path) {
            low = low.min(x0).min(x1);
            high = high.max(x0).max(x1);
            // Where the axis runs back it lies under another part of itself.
            let (a, b) = (from.max(x0), to.min(x1));
            if x1 <= x0 || b - a <= tolerance::SAME_PLACE {
                continue;
            }
            let place = |x: f64, end: f64, at: f64| -> f64 {
                if (x - end).abs() <= tolerance::SAME_PLACE { at } else { crossing(path, x, s0, s1) }
            };
            let (sa, sb) =
                (if a <= x0 { s0 } else { place(a, x1, s1) }, if b >= x1 { s1 } else { place(b, x0, s0) });
            covered += b - a;
            laid.push(Laid { s0: sa, s1: sb, plan: b - a, down: load.down * length, varies: load.varies });
        }
        let due = (to.min(high) - from.max(low)).max(0.0);
        if (covered - due).abs() > tolerance::ONE_JOINT {
            return Err(Unsolved::Input(format!(
                "the axis leans over itself under the line load from x = {} m to {} m, so that where it acts is not one place",
                load.from, load.to
            )));
        }
        if load.down.abs() <= 0.0 {
            laid.truncate(first);
        }
    }
    Ok(laid)
}

/// The weight of a stretch with what the line loads put on it.
pub(super) fn add(mut weight: [Weight; 2], laid: &[Laid], s: f64) -> [Weight; 2] {
    for load in laid.iter().filter(|l| l.s0 < s && s < l.s1) {
        weight[usize::from(load.varies)].on_plan += load.down;
    }
    weight
}

/// Stretches of the axis that run one way in plan: lengths and abscissae of their ends.
fn runs(path: &Path) -> Vec<(f64, f64, f64, f64)> {
    let mut runs = Vec::new();
    for (segment, &base) in path.segments().iter().zip(path.cumulative()) {
        let mut cuts = vec![0.0, segment.length()];
        if let Segment::Arc { radius, start_angle, sweep, .. } = *segment {
            // Upright tangents: at angles of whole half turns.
            let half = std::f64::consts::PI;
            let (low, high) = (start_angle.min(start_angle + sweep), start_angle.max(start_angle + sweep));
            let mut angle = (low / half).ceil() * half;
            while angle < high {
                cuts.push(radius * (angle - start_angle).abs());
                angle += half;
            }
        }
        cuts.sort_by(f64::total_cmp);
        let x = |s: f64| segment.point_at(s).x;
        runs.extend(
            cuts.windows(2).filter(|w| w[1] > w[0]).map(|w| (base + w[0], base + w[1], x(w[0]), x(w[1]))),
        );
    }
    runs
}

/// Length at which the axis crosses the vertical at `x` between two lengths: by halving, for a run crosses it once.
fn crossing(path: &Path, x: f64, mut from: f64, mut to: f64) -> f64 {
    for _ in 0..200 {
        let middle = f64::midpoint(from, to);
        if middle <= from || middle >= to {
            break;
        }
        if path.point_at(middle).x < x { from = middle } else { to = middle }
    }
    f64::midpoint(from, to)
}
