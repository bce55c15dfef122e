//! `[rib]`: depth, material and support.
//!
//! Lengths in m, stresses in MPa, unit weights in kN/m³. `None` means *not given*.

use serde::Serialize;

use super::choice::choice;

/// Depth of the rib where no ring lines are drawn. Serialised as a number or as `[springing, crown]`.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
#[serde(untagged)]
pub enum RibDepth {
    /// The same everywhere, m.
    Constant(f64),
    /// At the springings and at the crown, m, linear along the axis between.
    Linear([f64; 2]),
}

choice! {
    /// How the rib is held.
    Support {
        /// Both springings built in.
        Hingeless = "hingeless",
        /// A hinge at both springings.
        TwoHinged = "two-hinged",
        /// Hinges at springings and crown.
        ThreeHinged = "three-hinged",
        /// A ring without tension.
        None = "none",
    }
}

/// `[rib]`
#[derive(Debug, Clone, PartialEq, Default, Serialize)]
#[serde(rename_all = "snake_case")]
pub struct Rib {
    /// Depth, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub depth: Option<RibDepth>,
    /// Width across the bridge, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub width: Option<f64>,
    /// Unit weight, kN/m³; `None`: weightless.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub unit_weight: Option<f64>,
    /// Equal pieces of the ring between the springings; `None`: a continuous ring.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub voussoirs: Option<u32>,
    /// Compressive strength of the blocks, MPa; `None`: unlimited.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub strength: Option<f64>,
    /// Coefficient of friction; `None`: no sliding check.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub friction: Option<f64>,
    /// Whether a section can take tension.
    pub tension: bool,
    /// Mortar gone from the intrados side of every joint, m.
    pub joint_loss: f64,
    /// Level up to which the haunches are solid, y in the elevation, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub backing: Option<f64>,
    /// How it is held; `None`: taken as [`Support::None`], which is then an assumption.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub support: Option<Support>,
    /// Modulus of elasticity, MPa.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub elastic_modulus: Option<f64>,
    /// Creep coefficient: lowers the modulus to `E / (1 + creep)`.
    pub creep: f64,
    /// First antisymmetric imperfection, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub imperfection: Option<f64>,
    /// Inertia of a deck that shares the bending under live load, m⁴.
    pub deck_inertia: f64,
    /// Modulus of that deck, MPa.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub deck_modulus: Option<f64>,
    /// Uniform change of temperature, K.
    pub temperature: f64,
    /// Coefficient of thermal expansion, 1/K.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub expansion: Option<f64>,
    /// Shrinkage strain, shortening positive.
    pub shrinkage: f64,
    /// Movement of the abutments.
    pub movement: Movement,
}

/// `[rib.movement]`: of each abutment to the right, m, upward, m, and counter-clockwise, rad.
#[derive(Debug, Clone, Copy, PartialEq, Default, Serialize)]
pub struct Movement {
    /// The left abutment.
    pub left: [f64; 3],
    /// The right abutment.
    pub right: [f64; 3],
}
