//! What was noticed of loads as they are drawn: facts, worded elsewhere.

use super::marks::Sense;
use crate::drawing::Source;

/// One thing noticed.
#[derive(Debug, Clone, PartialEq)]
pub enum Drawn {
    /// A line on a load layer from one point that stands for a load to another: no load itself.
    LineJoins {
        /// The line.
        source: Source,
    },
    /// A line or area on a load layer that is no arrow: bent, closed, or the head of no arrow.
    ShapeNoLoad {
        /// The entity.
        source: Source,
    },
    /// A line with an arrowhead at both ends, which say nothing of its sense.
    TwoHeads {
        /// The line.
        source: Source,
    },
    /// A line with a label per length that has no length in plan.
    LineUpright {
        /// The line.
        source: Source,
    },
    /// A line load whose line runs back over itself in plan; it counts once over its extent.
    LineTurnsBack {
        /// The line.
        source: Source,
    },
    /// A part of a line load stands over no span.
    LineOffSpan {
        /// The line.
        source: Source,
        /// Its label.
        text: String,
        /// Length of the part in plan, m.
        length: f64,
        /// Its sum, downward positive, kN.
        force: f64,
    },
    /// Arrows without a figure that hang from the line of a line load: they show how it acts.
    PartOfLine {
        /// The line.
        line: Source,
        /// How many.
        count: usize,
    },
    /// A line on a post layer that is no post.
    NoPost {
        /// The line.
        source: Source,
        /// Why.
        why: &'static str,
    },
    /// Loads that stand on a post act down it.
    DownPosts {
        /// How many.
        count: usize,
        /// The greatest force that the deck has to hold sideways at one of them, kN or unit loads.
        held: f64,
        /// The greatest sideways part that one of them has itself and that stays in the deck.
        own: f64,
    },
    /// Loads that stand between posts and not on the rib were put straight on it.
    BetweenPosts {
        /// The loads.
        sources: Vec<Source>,
    },
    /// A roadway drawn in plan.
    Plan {
        /// The span.
        span: String,
        /// Whether the plane of the rib was taken through the roadway over the springings.
        assumed: bool,
        /// Loads over which the roadway is not drawn.
        missing: usize,
        /// Line loads, whose couples are not told.
        line_loads: usize,
    },
    /// Dimensions of other parts with a text written in place of the measured length.
    TextsByHand {
        /// The dimensions.
        sources: Vec<Source>,
    },
    /// The extended data of a load hold figures that differ.
    ExtendedUnclear {
        /// The load.
        source: Source,
        /// The figures, each with its application.
        texts: Vec<String>,
    },
    /// The sense of loads drawn as lines without a head was inferred.
    SenseInferred {
        /// The lines.
        sources: Vec<Source>,
        /// From what.
        sense: Sense,
    },
}
