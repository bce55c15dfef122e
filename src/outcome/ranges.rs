//! Worst and best factors over inputs that are not known well.

use std::collections::BTreeMap;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::Status;

/// What `[[range]]` asked for, in one case of one span.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Ranges {
    /// The inputs, in the order of the job file.
    pub inputs: Vec<RangeInput>,
    /// The factors that there are, each with its worst and best value.
    pub factors: Vec<RangedFactor>,
}

/// An input between two values.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct RangeInput {
    /// `rib.KEY`, `AREA.unit_weight` or `AREA.level`.
    pub what: String,
    /// Its least value, in the unit of the key.
    pub low: f64,
    /// Its greatest value.
    pub high: f64,
    /// The value that the run as such was computed with.
    pub stated: f64,
    /// Unit of these values; empty for a plain number.
    pub unit: String,
    /// Why no factor depends on it here; null where one does.
    pub idle: Option<String>,
}

/// One factor over the ranges.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct RangedFactor {
    /// `geometric_factor`, `load_factor` or `load_factor_least`.
    pub name: String,
    /// The worst value: the least of a factor, the greatest of `load_factor_least`.
    pub worst: RangedValue,
    /// The best value.
    pub best: RangedValue,
}

/// An extreme over the ranges.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct RangedValue {
    /// Whether there is one; the value is null unless found.
    pub status: Status,
    /// The factor.
    pub value: Option<f64>,
    /// Why not, when there is none.
    pub reason: Option<String>,
    /// The inputs that give it, by name; those that it does not depend on are left out.
    pub inputs: BTreeMap<String, f64>,
    /// `corners`: it must lie at a corner of the ranges and is exact; `sampling`: the worst (best) of the values looked at.
    pub found: String,
}
