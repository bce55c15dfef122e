//! Buckling of a slender rib, and the forces that the check of a section asks for.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::Xy;

/// Buckling and second-order bending of an elastic rib.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Buckling {
    /// The greater push of the two abutments.
    pub push: f64,
    /// The push at which the rib buckles in its plane; null where no coefficient is published.
    pub critical: Option<f64>,
    /// `critical` times span squared over stiffness.
    pub coefficient: Option<f64>,
    /// Factor on antisymmetric bending, `1 / (1 − push / critical)`.
    pub amplification: f64,
    /// Whether the rib is so shallow that it may snap through.
    pub shallow: bool,
    /// Least and greatest part of the varying loads' bending that the rib has beside a deck; null without one.
    pub share: Option<[f64; 2]>,
    /// Largest moment over thrust in the rib, with its sign: imperfection to either side, amplified, the deck's part taken off.
    pub eccentricity: f64,
    /// Where.
    pub at: Xy,
}

/// Thrust and moment that act together in one joint of the governing line.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct SectionForces {
    /// What is extreme: `greatest-thrust`, `least-thrust`, `greatest-moment`, `least-moment`.
    pub what: String,
    /// Axial force, compression positive.
    pub thrust: f64,
    /// The moment that goes with it.
    pub moment: f64,
    /// Where.
    pub at: Xy,
    /// Length along the axis from the left springing.
    pub s: f64,
}
