//! What a problem gives, checked and put in place: numbers, depth along the axis, and where each load enters the ring.

use super::joint::Entered;
use super::{Depth, Problem, Unsolved};
use crate::geometry::{Boxes, Path, Point, Vec2};
use crate::tolerance;

/// Largest number of voussoirs.
const MOST_VOUSSOIRS: usize = 100_000;

pub(super) fn check_input(problem: &Problem) -> Result<(), Unsolved> {
    let bad = |what: &str| Err(Unsolved::Input(what.into()));
    if !problem.entering.iter().all(|(i, s)| *i < problem.forces.len() && s.is_finite()) {
        return bad("a force that does not exist has a place where it enters the ring");
    }
    if problem.voussoirs.is_some_and(|n| n == 0 || n > MOST_VOUSSOIRS) {
        return bad("the number of voussoirs must be between 1 and 100 000");
    }
    if problem.strength.is_some_and(|f| !(f > 0.0 && f.is_finite())) {
        return bad("the strength must be positive");
    }
    if problem.friction.is_some_and(|f| !(f > 0.0 && f.is_finite())) {
        return bad("the coefficient of friction must be positive");
    }
    if !problem.forces.iter().all(|f| f.at.is_finite() && f.force.is_finite()) {
        return bad("a load has a place or a force that is not a finite number");
    }
    if ![problem.weight_on_axis, problem.ring_weight].iter().all(|w| *w >= 0.0 && w.is_finite()) {
        return bad("the weight of the rib must be zero or positive");
    }
    if problem.ring_weight > 0.0 && problem.depth.is_none() {
        return bad("the weight of the ring needs its depth");
    }
    let positive = |d: f64| d > 0.0 && d.is_finite();
    let sound = match &problem.depth {
        None => true,
        Some(Depth::Constant(d)) => positive(*d),
        Some(Depth::Linear { springing, crown }) => positive(*springing) && positive(*crown),
        Some(Depth::Table(table)) => {
            !table.is_empty()
                && table.iter().all(|&(s, d)| s.is_finite() && positive(d))
                && table.windows(2).all(|w| w[0].0 <= w[1].0)
        }
    };
    if !sound {
        return bad("the depth must be positive, and given at ascending lengths along the axis");
    }
    let ends = [problem.axis.start(), problem.axis.end()];
    if !(ends.iter().all(|p| p.is_finite()) && problem.axis.length().is_finite()) {
        return bad("the axis has a point that is not a finite number");
    }
    Ok(())
}

/// The depth as a table of lengths and depths in local units; 1 throughout where none is known, so that `M / (d N)` is
/// the eccentricity.
pub(super) fn depth_table(depth: Option<&Depth>, length: f64, crown: f64) -> Vec<(f64, f64)> {
    match depth {
        None => vec![(0.0, 1.0)],
        Some(Depth::Constant(d)) => vec![(0.0, d / length)],
        Some(&Depth::Linear { springing, crown: top }) => {
            vec![(0.0, springing / length), (crown, top / length), (1.0, springing / length)]
        }
        Some(Depth::Table(table)) => table.iter().map(|&(s, d)| (s / length, d / length)).collect(),
    }
}

/// Mean depth over the axis, in local units.
pub(super) fn mean(table: &[(f64, f64)]) -> f64 {
    let mut places: Vec<f64> = table.iter().map(|d| d.0).filter(|s| *s > 0.0 && *s < 1.0).collect();
    places.insert(0, 0.0);
    places.push(1.0);
    places.windows(2).map(|w| (w[1] - w[0]) * depth_at(table, f64::midpoint(w[0], w[1])).0).sum()
}

/// Depth and its slope at length `s`.
pub(super) fn depth_at(table: &[(f64, f64)], s: f64) -> (f64, f64) {
    let i = table.partition_point(|d| d.0 <= s);
    if i == 0 {
        return (table[0].1, 0.0);
    }
    if i == table.len() {
        return (table[i - 1].1, 0.0);
    }
    let ((a, d), (b, e)) = (table[i - 1], table[i]);
    let slope = (e - d) / (b - a);
    (d + slope * (s - a), slope)
}

/// Where each load enters the ring: its line of action meets the axis first from its point, both ways along the force.
pub(super) fn place(
    path: &Path,
    boxes: &Boxes,
    problem: &Problem,
    origin: Point,
    length: f64,
) -> (Vec<Entered>, Vec<usize>) {
    let mut stated = vec![None; problem.forces.len()];
    for &(index, s) in &problem.entering {
        if let Some(place) = stated.get_mut(index) {
            *place = Some(s / length);
        }
    }
    let mut entered = Vec::with_capacity(problem.forces.len());
    let mut missed = Vec::new();
    for (index, force) in problem.forces.iter().enumerate() {
        let at = ((force.at - origin) / length).to_point();
        // A load whose factor is zero still has a place: below or above its point.
        let direction = if force.force.hypot() > 0.0 { force.force } else { Vec2::new(0.0, -1.0) };
        let crossings = path.crossings_of_line(boxes, at, direction, tolerance::ONE_JOINT);
        let first = crossings.iter().min_by(|a, b| {
            // Of two at one distance the one ahead of the force.
            a.along.abs().total_cmp(&b.along.abs()).then(b.along.total_cmp(&a.along))
        });
        let Some(mut foot) = stated[index].or(first.map(|f| f.s)) else {
            missed.push(index);
            continue;
        };
        foot = foot.clamp(0.0, 1.0);
        for end in [0.0, 1.0] {
            if (foot - end).abs() <= tolerance::ONE_JOINT {
                foot = end;
            }
        }
        entered.push(Entered { index, foot, at, force: force.force, varies: false });
    }
    // Nothing may depend on the order of the input: loads with one foot follow by place and force.
    entered.sort_by(|a, b| {
        let key = |e: &Entered| [e.foot, e.at.x, e.at.y, e.force.x, e.force.y];
        let pairs = key(a).into_iter().zip(key(b));
        pairs.fold(std::cmp::Ordering::Equal, |o, (x, y)| o.then(x.total_cmp(&y)))
    });
    (entered, missed)
}
