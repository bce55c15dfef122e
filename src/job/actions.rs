//! The tables that may be given several times: areas, cases, traffic and ranges.
//!
//! Lengths in m, forces in kN, unit weights in kN/m³.

use std::collections::BTreeMap;

use serde::{Serialize, Serializer};

use super::choice::choice;
use super::layers::Patterns;

/// `[[area]]`: closed outlines that weigh, or fill up to a level.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Area {
    /// What the cases call it.
    pub name: String,
    /// Layers of the outlines; exactly one of this and `level` is given.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub layer: Option<Patterns>,
    /// Fill over the extrados up to this y of the elevation, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub level: Option<f64>,
    /// Unit weight, kN/m³.
    pub unit_weight: f64,
    /// Width across the bridge, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub width: Option<f64>,
    /// Sideways over vertical pressure on the extrados.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub earth_pressure: Option<f64>,
    /// Upper bound of the same ratio; 0: off.
    pub passive: f64,
}

/// `[[case]]`
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Case {
    /// Its name.
    pub name: String,
    /// Factors of load layers, `self` and areas by name; what is not named counts 0.
    pub factors: BTreeMap<String, f64>,
    /// The part that the load factor multiplies, by the same names.
    pub vary: Vec<String>,
}

choice! {
    /// How traffic reaches the rib.
    Through {
        /// Spread through the fill.
        Fill = "fill",
        /// Through the spandrel posts.
        Posts = "posts",
    }
}

choice! {
    /// How the deck runs over its posts.
    Deck {
        /// Simply supported from post to post.
        Simple = "simple",
        /// One beam of one stiffness over all of them.
        Continuous = "continuous",
    }
}

/// A length, or one that is chosen in the run. Serialised as a number or `auto`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Step {
    /// Refined until the worst values have converged.
    Auto,
    /// m.
    Metres(f64),
}

impl Serialize for Step {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        match self {
            Self::Auto => serializer.serialize_str("auto"),
            Self::Metres(step) => serializer.serialize_f64(*step),
        }
    }
}

/// `[[traffic]]`: a train of axles that moves over the span.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Traffic {
    /// Its name.
    pub name: String,
    /// Distance behind the first axle, m, and force, kN, of each.
    pub axles: Vec<[f64; 2]>,
    /// How it reaches the rib.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub through: Option<Through>,
    /// How the deck runs over the posts; `None`: simply supported.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub deck: Option<Deck>,
    /// Width of the ring that carries it, m; at most one of this and `share` is given.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub effective_width: Option<f64>,
    /// Part of the train on this rib.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub share: Option<f64>,
    /// Spread through fill on each side, horizontal per vertical.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub dispersal: Option<f64>,
    /// Length of a wheel's print along the road, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub contact: Option<f64>,
    /// Impact factor.
    pub dynamic: f64,
    /// Horizontal part at road level.
    pub braking: f64,
    /// Distance between positions.
    pub step: Step,
    /// Whether it runs in both directions.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub both_ways: Option<bool>,
    /// The case it stands on top of; `None`: `drawn`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub case: Option<String>,
    /// Other trains on the span with their factors.
    pub with: BTreeMap<String, f64>,
    /// Uniform load where the influence line is adverse, kN/m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub uniform: Option<f64>,
    /// Single load at the worst ordinate, kN.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub knife: Option<f64>,
    /// Fractions of the span whose influence lines are drawn.
    pub influence: Vec<f64>,
}

/// `[[range]]`: input that is not known well.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Range {
    /// `rib.KEY`, `AREA.unit_weight` or `AREA.level`.
    pub what: String,
    /// Low value, in the unit of the key.
    pub low: f64,
    /// High value, in the unit of the key.
    pub high: f64,
}
