//! What stands on a span by outline or up to a level, and what spans do to the piers between them.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::{Source, Xy};

/// An area of the job on one span, without the factors of cases.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct AreaShare {
    /// Its name.
    pub name: String,
    /// The entities of its outlines; of the extrados (or the axis) for fill up to a level.
    pub entities: Vec<Source>,
    /// The level; null for outlines.
    pub level: Option<f64>,
    /// Pieces of the ring that carry some of it.
    pub pieces: u64,
    /// Area over the span, m².
    pub area: f64,
    /// Its weight on the span, downward positive.
    pub weight: f64,
    /// Where the resultant of that weight acts; null where there is none.
    pub at: Option<Xy>,
    /// Area of all its outlines on all spans and beyond, m².
    pub whole: f64,
    /// What separates the sum of all pieces, on all spans and beyond, from that, relative.
    pub residual: f64,
    /// Weight beyond the left and the right end of the ring, up to the next span, left to the abutments.
    pub beyond: [f64; 2],
    /// Sideways over vertical pressure on the extrados; null where none is given.
    pub earth_pressure: Option<f64>,
    /// Sum of the sideways forces to the right, and to the left (negative).
    pub sideways: [f64; 2],
}

/// The difference of the pushes of two neighbouring spans on the pier between them.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct PierPush {
    /// The case, the same on both spans.
    pub case: String,
    /// Name of the span on the right.
    pub next: String,
    /// Least difference, to the right positive; null where it is not known.
    pub least: Option<f64>,
    /// Greatest difference.
    pub greatest: Option<f64>,
    /// Why they are not known.
    pub reason: Option<String>,
}
