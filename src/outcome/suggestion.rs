//! What would suit the loads better than what is drawn.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::{Status, Xy};

/// Suggestions for a span. They are computed, not designed: whether an axis may move is for the engineer to say.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Suggestion {
    /// For each case, in order, the axis that would be the funicular of its loads through the same springings and with the
    /// same rise.
    pub axes: Vec<SuggestedAxis>,
    /// The least depth that would meet the limits with the axis as it is drawn; null where no depth is known.
    pub depth: Option<SuggestedDepth>,
}

/// A suggested axis.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct SuggestedAxis {
    /// The case.
    pub case: String,
    /// Whether there is one.
    pub status: Status,
    /// Why not, when there is none.
    pub reason: Option<String>,
    /// Its push; null unless found.
    pub horizontal: Option<f64>,
    /// Its corners from the left springing to the right one.
    pub points: Vec<Xy>,
    /// How far the drawn axis would move, from left to right: at the loads, or at tenths of the span without any.
    pub moves: Vec<Move>,
}

impl SuggestedAxis {
    /// The move that lifts the axis most, and the one that lowers it most.
    pub fn extremes(&self) -> (Option<&Move>, Option<&Move>) {
        let up = self.moves.iter().filter(|m| m.by > 0.0).max_by(|a, b| a.by.total_cmp(&b.by));
        let down = self.moves.iter().filter(|m| m.by < 0.0).min_by(|a, b| a.by.total_cmp(&b.by));
        (up, down)
    }
}

/// A move of the axis.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Move {
    /// The load that stands there.
    pub load: Option<String>,
    /// The point of the drawn axis.
    pub at: Xy,
    /// How far up it would move; negative: down.
    pub by: f64,
}

/// The least depth that would meet the limits that depend on it.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct SuggestedDepth {
    /// `found`: a larger depth meets them, or the drawn one does (factor 1); `none`: none up to eight times does.
    pub status: Status,
    /// By what the depth would have to be multiplied everywhere; null unless found.
    pub factor: Option<f64>,
    /// Least and greatest depth then; null unless found.
    pub depth_min: Option<f64>,
    /// As `depth_min`.
    pub depth_max: Option<f64>,
}
