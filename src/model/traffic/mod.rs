//! Trains of axles and how they reach the rib: along the road, through posts or through fill.
//!
//! Knows no mechanics of the rib: only where which part of a train's force goes. No part is lost: what does not go to the
//! rib goes to an abutment, and is told.

mod fill;
mod posts;
mod road;
mod train;

pub use road::{Road, road};
pub use train::{Carried, Course, Crossing, NotComputed, crossing};

use crate::geometry::{Point, Vec2};

/// A part of a train's force as it acts on the rib.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Push {
    /// Index of the place at which it enters the ring.
    pub slot: usize,
    /// A point of its line of action, m.
    pub at: Point,
    /// Components to the right and upward, kN.
    pub force: Vec2,
}

/// Where a force goes.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct Parts {
    /// Onto the rib.
    pub pushes: Vec<Push>,
    /// To the ground left of the span, and right of it.
    pub beside: [Vec2; 2],
}

impl Parts {
    fn beside(&mut self, right: bool, force: Vec2) {
        self.beside[usize::from(right)] += force;
    }
}

#[cfg(test)]
mod tests;
