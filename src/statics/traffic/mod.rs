//! Loads that move across a span: every position solved, and only the extremes kept.
//!
//! A live load reaches the ring at *slots*, places along the axis that are the same for every position: the posts, or the
//! middles of the pieces that the fill presses on. The dead loads are put on the ring once, with the axis cut at all slots;
//! a position then only adds its forces to those that have entered before each piece. Lines that follow from linear
//! equations (elastic, through three points) answer to each slot by influence coefficients; optima are solved anew, from
//! the line of the position before. What is kept of a position is what is worse than all before it, so the memory does
//! not grow with their number.

mod envelope;
mod evaluate;
mod influence;
mod patch;
mod prepared;
mod response;
mod sweep;

pub use envelope::{Extreme, Station, Tally, Value};
pub use influence::{Influence, influence};
pub use sweep::traverse;

use super::{Analysis, Flexibility, LineKind, Place, Problem, Rule};
use crate::geometry::{Point, Vec2};

/// A part of a live load as it acts on the ring.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Push {
    /// Index of the slot at which it enters the ring.
    pub slot: usize,
    /// A point of its line of action, m.
    pub at: Point,
    /// Components to the right and upward, kN.
    pub force: Vec2,
    /// Whether it belongs to the train itself, and not to another one that runs with it.
    pub own: bool,
}

/// A short stretch of road that a uniform load may stand on or leave free.
#[derive(Debug, Clone, PartialEq)]
pub struct Cell {
    /// Abscissae of its ends, m.
    pub between: (f64, f64),
    /// What one kN that stands in its middle does to the ring.
    pub unit: Vec<Push>,
}

/// A rectangle whose edge stresses are wanted.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Section {
    /// Width, m.
    pub width: f64,
    /// Whether it can take tension.
    pub tension: bool,
}

/// One way in which a load can move: its first and last position, m, and positions between that must be looked at.
#[derive(Debug, Clone, PartialEq)]
pub struct Course {
    /// First and last position, m.
    pub between: (f64, f64),
    /// Positions at which an influence line has a corner, m.
    pub corners: Vec<f64>,
}

/// The forces on the ring when the load of a course stands at a position (m).
pub type Placing<'a> = dyn Fn(usize, f64) -> Vec<Push> + Sync + 'a;

/// A stiffness along the axis that threads may share.
pub type Stiffness<'a> = dyn Fn(&Place) -> Flexibility + Sync + 'a;

/// A load that moves across a span.
#[derive(Clone, Copy)]
pub struct Moving<'a> {
    /// The span under the loads that stay, with the parts of them that a load factor multiplies.
    pub problem: &'a Problem,
    /// Lengths along the axis at which live load enters the ring, m.
    pub slots: &'a [f64],
    /// The ways in which it moves; empty: nothing moves, only `cells` are loaded.
    pub courses: &'a [Course],
    /// Its forces at a position.
    pub place: &'a Placing<'a>,
    /// Distance of neighbouring positions, m; `None`: refined until the worst values have converged.
    pub step: Option<f64>,
    /// The road in short stretches, for the uniform load and the knife edge.
    pub cells: &'a [Cell],
    /// Uniform load, kN/m, on every stretch where it makes things worse.
    pub uniform: f64,
    /// A single load, kN, where it makes things worst.
    pub knife: f64,
    /// The section whose edge stresses are wanted.
    pub section: Option<Section>,
    /// Stiffness of an elastic rib; `None`: the rectangle of the drawn depth.
    pub stiffness: Option<&'a Stiffness<'a>>,
    /// Threads to work with; the result does not depend on it.
    pub threads: usize,
}

/// What came out for a load that moves across a span.
#[derive(Debug, Clone, PartialEq)]
pub struct Traverse {
    /// Which line governs.
    pub governs: LineKind,
    /// Why it does.
    pub rule: Rule,
    /// Positions looked at.
    pub positions: usize,
    /// Distance of the positions all along, m.
    pub step: f64,
    /// Distance of the positions about the worst ones, m.
    pub finest: f64,
    /// Largest relative change of a worst value when the distance was last halved; the step is what remains uncertain.
    pub uncertainty: f64,
    /// Extremes over all positions.
    pub tally: Tally,
    /// The span with the load where the offset is largest, solved on its own.
    pub at_worst: Option<Analysis>,
    /// The span with the load where the load factor is least, solved on its own.
    pub at_least_factor: Option<Analysis>,
}

/// A position of the load.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct Position {
    /// Index of the course.
    pub course: usize,
    /// Where on it, m.
    pub at: f64,
}

impl Moving<'_> {
    /// The problem of one position, for solving it on its own: the same forces in the same places.
    pub fn problem_at(&self, pushes: &[Push]) -> Problem {
        let mut problem = self.with_slots();
        for push in pushes {
            problem.varying.push(problem.forces.len());
            problem.entering.push((problem.forces.len(), self.slots[push.slot]));
            problem.forces.push(super::Force { at: push.at, force: push.force });
        }
        problem
    }

    /// The problem with a force of no size at each slot, so that the axis is cut there.
    fn with_slots(&self) -> Problem {
        let mut problem = self.problem.clone();
        for &s in self.slots {
            problem.entering.push((problem.forces.len(), s));
            problem.forces.push(super::Force { at: self.problem.axis.point_at(s), force: Vec2::ZERO });
        }
        problem
    }
}
