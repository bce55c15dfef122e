//! `[limits]` and `[accept]`: what must hold, and what is accepted although it does not.

use serde::{Serialize, Serializer};

use super::choice::choice;

/// `[limits]`: what must hold for the governing line.
#[derive(Debug, Clone, PartialEq, Default, Serialize)]
pub struct Limits {
    /// Largest offset from the axis, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub offset: Option<f64>,
    /// Largest eccentricity over a sixth of the depth.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub kern: Option<f64>,
    /// Largest eccentricity over half the depth.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub ring: Option<f64>,
    /// Largest stress, MPa.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub stress: Option<f64>,
    /// Least geometric factor of safety.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub geometric_factor: Option<f64>,
    /// Least load factor.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub load_factor: Option<f64>,
    /// Largest difference of the pushes of neighbouring spans, kN.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub pier_push: Option<f64>,
    /// Largest difference of a dimension text from the drawn geometry, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub dimension: Option<f64>,
}

choice! {
    /// Something that may be assumed where the drawing and the job are silent.
    Assumption {
        /// The unit of the drawing.
        Unit = "unit",
        /// Which layers hold what.
        Layers = "layers",
        /// The plane of the elevation.
        Plane = "plane",
        /// Equal loads, where there are no figures.
        Loads = "loads",
        /// The sense of a load.
        Sense = "sense",
        /// Which label belongs to which load.
        Labels = "labels",
        /// How the rib is held.
        Support = "support",
        /// That pieces of the axis with a gap between them belong together.
        Gaps = "gaps",
        /// The encoding of the texts.
        Encoding = "encoding",
    }
}

choice! {
    /// A limit that an exception may be made from; named as in the results.
    LimitCheck {
        /// `[limits] offset`, m.
        Offset = "offset",
        /// `[limits] ring`, or the built-in one.
        Ring = "ring",
        /// `[limits] kern`.
        Kern = "kern",
        /// `[limits] stress`, MPa.
        Stress = "stress",
        /// `[limits] geometric_factor`.
        GeometricFactor = "geometric-factor",
        /// `[limits] load_factor`.
        LoadFactor = "load-factor",
        /// `[limits] pier_push`, kN.
        PierPush = "pier-push",
        /// `[limits] dimension`, m.
        Dimension = "dimension",
    }
}

/// `[accept]`
#[derive(Debug, Clone, PartialEq, Default, Serialize)]
pub struct Accept {
    /// What may be assumed without turning the verdict to unchecked, each once.
    pub assumed: Vec<Assumption>,
    /// `[[accept.finding]]`
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub finding: Vec<Exception>,
}

/// `[[accept.finding]]`: a justified exception from a limit.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Exception {
    /// The limit.
    pub check: LimitCheck,
    /// Only on the span of this name.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub span: Option<String>,
    /// Only in the case of this name.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub case: Option<String>,
    /// Largest value accepted (for the two factors of safety: the least), in the unit of the limit.
    pub up_to: f64,
    /// Why.
    pub reason: String,
    /// By whom.
    pub by: String,
    /// Last day on which it holds (UTC); `None`: without end.
    #[serde(skip_serializing_if = "Option::is_none", serialize_with = "day_or_none")]
    pub until: Option<jiff::civil::Date>,
}

fn day_or_none<S: Serializer>(day: &Option<jiff::civil::Date>, serializer: S) -> Result<S::Ok, S::Error> {
    match day {
        Some(day) => serializer.collect_str(day),
        None => serializer.serialize_none(),
    }
}
