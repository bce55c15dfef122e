//! What is kept of all positions: the extremes, each with where the load stood.

use super::super::joint::Joint;
use super::super::{Status, span::Span};
use super::Position;
use crate::geometry::Point;

/// A value with the position that gave it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Value {
    /// The value.
    pub value: f64,
    /// Where the load stood.
    pub position: Position,
    /// Place on the axis, m; the crown where the value has no place.
    pub at: Point,
}

/// The worst of all positions so far. `worse` values replace it; of two alike the first position stays.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Extreme {
    /// The value found, if any.
    pub found: Option<Value>,
    /// A position at which there was none, with how it ended.
    pub missing: Option<(Status, Position)>,
}

impl Extreme {
    /// How it ended: not found where a position has none, unbounded where no position bounds it.
    pub fn status(&self) -> Status {
        match (self.missing, self.found) {
            (Some((Status::None, _)), _) => Status::None,
            (Some((Status::Refused, _)), _) => Status::Refused,
            (_, Some(_)) => Status::Found,
            (Some((status, _)), None) => status,
            (None, None) => Status::Refused,
        }
    }

    /// Takes a value if it is greater.
    pub(super) fn greater(&mut self, new: Value) {
        self.take(new, |new, old| new > old);
    }

    /// Takes a value if it is less.
    pub(super) fn less(&mut self, new: Value) {
        self.take(new, |new, old| new < old);
    }

    fn take(&mut self, new: Value, beats: fn(f64, f64) -> bool) {
        let first = |a: &Value, b: &Value| a.position < b.position;
        let better = match &self.found {
            None => true,
            Some(old) => {
                beats(new.value, old.value) || ((new.value - old.value).abs() <= 0.0 && first(&new, old))
            }
        };
        if better && !new.value.is_nan() {
            self.found = Some(new);
        }
    }

    /// Notes a position that has no value.
    pub(super) fn miss(&mut self, status: Status, position: Position) {
        let weight = |s: Status| match s {
            Status::None => 0,
            Status::Refused => 1,
            Status::Unbounded => 2,
            Status::Found => 3,
        };
        let better = self.missing.is_none_or(|(old, at)| {
            weight(status) < weight(old) || (weight(status) == weight(old) && position < at)
        });
        if better {
            self.missing = Some((status, position));
        }
    }

    fn merge(&mut self, other: &Self, greater: bool) {
        if let Some(value) = other.found {
            if greater { self.greater(value) } else { self.less(value) }
        }
        if let Some((status, position)) = other.missing {
            self.miss(status, position);
        }
    }
}

/// A joint of the envelope.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Station {
    /// Point of the axis, m.
    pub at: Point,
    /// Length along the axis from the left springing, m.
    pub s: f64,
    /// Depth, m, where one is known.
    pub depth: Option<f64>,
    /// Least eccentricity, m, with its position.
    pub eccentricity_min: Option<(f64, Position)>,
    /// Greatest eccentricity, m, with its position.
    pub eccentricity_max: Option<(f64, Position)>,
    /// Least thrust, kN, with its moment, kN·m, and its position.
    pub thrust_min: Option<(f64, f64, Position)>,
    /// Greatest thrust, kN, with its moment, kN·m, and its position.
    pub thrust_max: Option<(f64, f64, Position)>,
}

impl Station {
    pub(super) fn new(span: &Span, joint: &Joint) -> Self {
        Self {
            at: span.drawn(joint.at),
            s: joint.s * span.length,
            depth: span.has_depth.then_some(joint.depth * span.length),
            eccentricity_min: None,
            eccentricity_max: None,
            thrust_min: None,
            thrust_max: None,
        }
    }

    /// Takes in thrust and moment of one position, kN and kN·m.
    pub(super) fn take(&mut self, thrust: f64, moment: f64, position: Position) {
        let e = moment / thrust;
        if !e.is_finite() {
            return;
        }
        self.eccentricity(e, position);
        self.thrust(thrust, moment, position);
    }

    /// Takes in an eccentricity.
    pub(super) fn eccentricity(&mut self, e: f64, position: Position) {
        let later = |at: Position| position < at;
        if self.eccentricity_min.is_none_or(|(v, at)| e < v || ((e - v).abs() <= 0.0 && later(at))) {
            self.eccentricity_min = Some((e, position));
        }
        if self.eccentricity_max.is_none_or(|(v, at)| e > v || ((e - v).abs() <= 0.0 && later(at))) {
            self.eccentricity_max = Some((e, position));
        }
    }

    fn thrust(&mut self, n: f64, m: f64, position: Position) {
        let later = |at: Position| position < at;
        if self.thrust_min.is_none_or(|(v, _, at)| n < v || ((n - v).abs() <= 0.0 && later(at))) {
            self.thrust_min = Some((n, m, position));
        }
        if self.thrust_max.is_none_or(|(v, _, at)| n > v || ((n - v).abs() <= 0.0 && later(at))) {
            self.thrust_max = Some((n, m, position));
        }
    }

    fn merge(&mut self, other: &Self) {
        for (e, at) in [other.eccentricity_min, other.eccentricity_max].into_iter().flatten() {
            self.eccentricity(e, at);
        }
        for (n, m, at) in [other.thrust_min, other.thrust_max].into_iter().flatten() {
            self.thrust(n, m, at);
        }
    }
}

/// Extremes over all positions.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Tally {
    /// Largest offset of the governing line from the axis, m.
    pub offset: Extreme,
    /// Largest eccentricity over depth.
    pub depth_use: Extreme,
    /// Largest edge stress, kN/m².
    pub stress: Extreme,
    /// Whether an edge stress could not be told at some joint of some position.
    pub stress_incomplete: bool,
    /// Whether an elastic line of a ring without tension left its kern.
    pub cracked: bool,
    /// Least upper end of the interval of the load factor: all that varies, times it.
    pub load_factor: Extreme,
    /// Greatest lower end of it.
    pub load_factor_least: Extreme,
    /// Least multiple of the train alone that the ring carries.
    pub multiple: Extreme,
    /// Least and greatest push of the governing line at the left springing, kN.
    pub push: [Extreme; 2],
    /// The same at the right springing: the inward push.
    pub push_right: [Extreme; 2],
    /// Least push of any line inside the ring, and greatest, at the left springing, kN.
    pub range: [Extreme; 2],
    /// The joints.
    pub envelope: Vec<Station>,
}

impl Tally {
    /// Takes in another set of extremes. The order of merging does not matter.
    pub(super) fn merge(&mut self, other: &Self) {
        self.offset.merge(&other.offset, true);
        self.depth_use.merge(&other.depth_use, true);
        self.stress.merge(&other.stress, true);
        self.stress_incomplete |= other.stress_incomplete;
        self.cracked |= other.cracked;
        self.load_factor.merge(&other.load_factor, false);
        self.load_factor_least.merge(&other.load_factor_least, true);
        self.multiple.merge(&other.multiple, false);
        for (mine, theirs) in [
            (&mut self.push, &other.push),
            (&mut self.push_right, &other.push_right),
            (&mut self.range, &other.range),
        ] {
            mine[0].merge(&theirs[0], false);
            mine[1].merge(&theirs[1], true);
        }
        if self.envelope.is_empty() {
            self.envelope.clone_from(&other.envelope);
        } else {
            for (mine, theirs) in self.envelope.iter_mut().zip(&other.envelope) {
                mine.merge(theirs);
            }
        }
    }

    /// The values that the step is refined for, each with whether it is to be great.
    pub(super) fn watched(&self) -> [&Extreme; 6] {
        [&self.offset, &self.depth_use, &self.stress, &self.load_factor, &self.multiple, &self.push[1]]
    }
}
