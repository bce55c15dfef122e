//! Traffic on top of a case: extremes over all positions of a train.

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use super::{Hinge, LineKind, Status, Xy};

/// A train on a span.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Traffic {
    /// Its name.
    pub name: String,
    /// How it ended: `refused` when something it needs is missing.
    pub status: Status,
    /// Why it was not computed.
    pub reason: Option<String>,
    /// Kind of the line of thrust that governs; null unless computed.
    pub governs: Option<LineKind>,
    /// Positions looked at.
    pub positions: u64,
    /// Distance of the positions all along, m.
    pub step: Option<f64>,
    /// Distance of the positions about the worst ones, m.
    pub finest_step: Option<f64>,
    /// Relative change of the worst values when the distance was last halved.
    pub uncertainty: Option<f64>,
    /// Factor on the stated forces: share, or width over effective width, times the impact factor.
    pub scale: Option<f64>,
    /// What was taken to be so, in words.
    pub taken: Vec<String>,
    /// Extremes in the joints.
    pub envelope: Vec<EnvelopeStation>,
    /// The worst values.
    pub worst: Option<Worst>,
    /// Least and greatest push over all positions.
    pub push: Option<PushRange>,
    /// Mechanism of the least load factor.
    pub hinges: Vec<Hinge>,
    /// The train where the offset is largest.
    pub at_worst: Option<AtWorst>,
    /// Influence lines at the fractions of the span that the job asks for.
    pub influence: Vec<InfluenceLine>,
}

/// Extremes in one joint.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct EnvelopeStation {
    /// Point of the axis.
    pub at: Xy,
    /// Length along the axis from the left springing.
    pub s: f64,
    /// Depth of the joint.
    pub depth: Option<f64>,
    /// Least eccentricity.
    pub eccentricity_min: Option<f64>,
    /// Greatest eccentricity, positive toward the extrados.
    pub eccentricity_max: Option<f64>,
    /// Position of the first axle for the least eccentricity.
    pub position_min: Option<f64>,
    /// Position of the first axle for the greatest eccentricity.
    pub position_max: Option<f64>,
    /// Least thrust with its moment.
    pub thrust_min: Option<Forces>,
    /// Greatest thrust with its moment.
    pub thrust_max: Option<Forces>,
}

/// Thrust and moment in one joint at one position.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Forces {
    /// Axial force, compression positive.
    pub thrust: f64,
    /// Moment.
    pub moment: f64,
    /// Abscissa of the first axle.
    pub position: f64,
    /// `right` or `left`: which way the train runs.
    pub direction: Direction,
}

/// Which way a train runs.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs)]
pub enum Direction {
    Right,
    Left,
}

/// The worst values over all positions.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Worst {
    /// Largest offset of the governing line from the axis.
    pub offset: WorstValue,
    /// Largest eccentricity over a sixth of the depth.
    pub kern: WorstValue,
    /// Largest eccentricity over half the depth.
    pub ring: WorstValue,
    /// Largest edge stress.
    pub stress: WorstValue,
    /// Least upper end of the interval of the load factor.
    pub load_factor: WorstValue,
    /// Greatest lower end of it.
    pub load_factor_least: WorstValue,
    /// Least multiple of the train alone that the ring carries.
    pub multiple: WorstValue,
}

/// A worst value with its position.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct WorstValue {
    /// How it ended.
    pub status: Status,
    /// The value; null unless found.
    pub value: Option<f64>,
    /// Abscissa of the first axle; where there is no value, of a position without one; null for a uniform load alone.
    pub position: Option<f64>,
    /// Which way the train runs.
    pub direction: Option<Direction>,
    /// Where on the axis.
    pub at: Option<Xy>,
}

/// Pushes over all positions.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct PushRange {
    /// Least and greatest push of the governing line at the left springing.
    pub left: [WorstValue; 2],
    /// Least and greatest push of the governing line at the right springing, inward positive.
    pub right: [WorstValue; 2],
    /// Least and greatest push at the left springing of any line inside the ring.
    pub inside_ring: [WorstValue; 2],
}

/// The train where the offset is largest.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct AtWorst {
    /// Where its axles stand on the road, with their forces on this rib.
    pub axles: Vec<Axle>,
    /// The road over the span.
    pub road: Vec<Xy>,
    /// The line of thrust.
    pub line: Vec<Xy>,
    /// All that stands on the road.
    pub applied: Xy,
    /// What reaches the rib.
    pub on_rib: Xy,
    /// What goes to the ground left of the span, and right of it.
    pub beside: [Xy; 2],
}

/// An axle.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Axle {
    /// Where it stands.
    pub at: Xy,
    /// Its downward force on this rib.
    pub force: f64,
}

/// The influence line of one joint.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct InfluenceLine {
    /// Fraction of the span at which the joint stands.
    pub fraction: f64,
    /// Its point of the axis.
    pub at: Xy,
    /// Its length along the axis.
    pub s: f64,
    /// Its ordinates, from left to right.
    pub ordinates: Vec<InfluenceOrdinate>,
}

/// What one kN on the road does.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct InfluenceOrdinate {
    /// Abscissa of the load.
    pub x: f64,
    /// Change of the push at the left springing per kN.
    pub push: f64,
    /// Change of the moment in the joint, m.
    pub moment: f64,
    /// Change of the eccentricity in the joint from where the case has it, m per kN; null where there is no thrust.
    pub eccentricity: Option<f64>,
}
