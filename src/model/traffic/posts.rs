//! Through posts: the deck hands each axle on to the two posts beside it, as simply supported spans do, or to all of them,
//! as one beam of constant stiffness on rigid supports does.

use super::{Parts, Push};
use crate::geometry::{Path, Point, Vec2};
use crate::tolerance;

/// Deck spans on posts, from abutment to abutment.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Posts {
    /// Abscissae of the supports of the deck, left to right, m; the first and the last stand over the springings.
    supports: Vec<f64>,
    /// Slot of each support; `None` at an abutment.
    slots: Vec<Option<usize>>,
    /// Whether the deck is one beam.
    continuous: bool,
    /// Lengths along the axis of the feet.
    pub feet: Vec<f64>,
    /// Their points.
    points: Vec<Point>,
}

impl Posts {
    /// Posts at the abscissae of the drawn ones (m, any order). `None` without any.
    pub fn new(axis: &Path, drawn: &[f64], continuous: bool) -> Option<Self> {
        let (left, right) = (axis.start().x, axis.end().x);
        let hair = (right - left) * tolerance::ONE_POST;
        let mut at: Vec<f64> =
            drawn.iter().copied().filter(|x| (left - hair..=right + hair).contains(x)).collect();
        at.sort_by(f64::total_cmp);
        at.dedup_by(|b, a| *b - *a <= hair);
        if at.is_empty() {
            return None;
        }
        let mut posts = Self {
            supports: Vec::new(),
            slots: Vec::new(),
            continuous,
            feet: Vec::new(),
            points: Vec::new(),
        };
        if at[0] > left + hair {
            posts.supports.push(left);
            posts.slots.push(None);
        }
        for x in &at {
            let x = x.clamp(left, right);
            let foot = if x <= left {
                0.0
            } else if x >= right {
                axis.length()
            } else {
                *axis.crossings_of_vertical(x).first()?
            };
            posts.supports.push(x);
            posts.slots.push(Some(posts.feet.len()));
            posts.feet.push(foot);
            posts.points.push(Point::new(x, axis.point_at(foot).y));
        }
        if at[at.len() - 1] < right - hair {
            posts.supports.push(right);
            posts.slots.push(None);
        }
        Some(posts)
    }

    /// Abscissae of the supports of the deck.
    pub fn supports(&self) -> &[f64] {
        &self.supports
    }

    /// Whether the deck spans from the last post to an abutment, at the left and at the right end.
    pub fn end_spans(&self) -> [bool; 2] {
        [self.slots.first() == Some(&None), self.slots.last() == Some(&None)]
    }

    /// Where a downward force at an abscissa goes.
    pub fn hand_on(&self, x: f64, down: f64, into: &mut Parts) {
        let last = self.supports.len() - 1;
        let force = |part: f64| Vec2::new(0.0, -down * part);
        if x < self.supports[0] {
            return into.beside(false, force(1.0));
        }
        if x > self.supports[last] {
            return into.beside(true, force(1.0));
        }
        let i = self.supports.partition_point(|s| *s <= x).clamp(1, last.max(1));
        if last == 0 {
            return self.give(0, force(1.0), into);
        }
        if self.continuous {
            for (support, part) in self.reactions(i, x).into_iter().enumerate() {
                self.give(support, force(part), into);
            }
            return;
        }
        let (a, b) = (self.supports[i - 1], self.supports[i]);
        let right = (x - a) / (b - a);
        self.give(i - 1, force(1.0 - right), into);
        self.give(i, force(right), into);
    }

    /// Reactions of one beam to a unit load at `x` between the supports `i − 1` and `i`, by the equation of three moments
    /// [Clapeyron 1857].
    fn reactions(&self, i: usize, x: f64) -> Vec<f64> {
        let s = &self.supports;
        let last = s.len() - 1;
        let length = |k: usize| s[k] - s[k - 1];
        let (whole, a, b) = (length(i), x - s[i - 1], s[i] - x);
        // Moments over the supports, sagging positive, by elimination of the tridiagonal system.
        let mut moments = vec![0.0; s.len()];
        let (mut upper, mut right) = (vec![0.0; s.len()], vec![0.0; s.len()]);
        for k in 1..last {
            let mut load = 0.0;
            if k == i {
                load -= a * (whole * whole - a * a) / whole;
            }
            if k + 1 == i {
                load -= b * (whole * whole - b * b) / whole;
            }
            let pivot = 2.0 * (length(k) + length(k + 1)) - length(k) * upper[k - 1];
            upper[k] = length(k + 1) / pivot;
            right[k] = (load - length(k) * right[k - 1]) / pivot;
        }
        for k in (1..last).rev() {
            moments[k] = right[k] - upper[k] * moments[k + 1];
        }
        let mut reactions = vec![0.0; s.len()];
        reactions[i - 1] += b / whole;
        reactions[i] += a / whole;
        for k in 1..=last {
            let slope = (moments[k] - moments[k - 1]) / length(k);
            reactions[k - 1] += slope;
            reactions[k] -= slope;
        }
        reactions
    }

    fn give(&self, support: usize, force: Vec2, into: &mut Parts) {
        if force.y.abs() <= 0.0 {
            return;
        }
        match self.slots[support] {
            Some(slot) => into.pushes.push(Push { slot, at: self.points[slot], force }),
            None => into.beside(support > 0, force),
        }
    }
}
