//! The results of a run, as one typed tree: what the JSON output holds and what every other output is drawn from.
//!
//! Lengths in m, forces in kN (or unit loads), moments in kN·m, stresses in MPa; points are `[x, y]` in the elevation
//! plane in metres, in the drawing's own origin.

mod areas;
pub mod bow;
mod ranges;
mod slender;
mod suggestion;
mod traffic;

pub use suggestion::{Move, SuggestedAxis, SuggestedDepth, Suggestion};

use std::collections::BTreeMap;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

use crate::refusal::Refusal;
pub use ranges::{RangeInput, RangedFactor, RangedValue, Ranges};
pub use slender::{Buckling, SectionForces};

pub use areas::{AreaShare, PierPush};

pub use traffic::{
    AtWorst, Axle, Direction, EnvelopeStation, Forces, InfluenceLine, InfluenceOrdinate, PushRange, Traffic,
    Worst, WorstValue,
};

/// Version of the results contract.
pub const CONTRACT: u32 = 1;

/// A point of the elevation, m.
pub type Xy = [f64; 2];

/// One JSON document: all drawings of one invocation.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Document {
    /// Version of this contract.
    pub contract: u32,
    /// The program that made it.
    pub tool: Tool,
    /// One run a drawing, in the order of the arguments.
    pub runs: Vec<Run>,
}

/// The program.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct Tool {
    /// Its name.
    pub name: String,
    /// Its version.
    pub version: String,
}

impl Tool {
    /// This program, in this version.
    pub fn this() -> Self {
        Self { name: env!("CARGO_PKG_NAME").into(), version: env!("CARGO_PKG_VERSION").into() }
    }
}

/// The units of all numbers.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct Units {
    /// Always `m`.
    pub length: String,
    /// `kN`, or `unit load` when no figures were given.
    pub force: String,
    /// `kN·m` or `unit load·m`.
    pub moment: String,
    /// `MPa`, or null when forces are unit loads.
    pub stress: Option<String>,
}

impl Units {
    /// Kilonewtons.
    pub fn si() -> Self {
        Self { length: "m".into(), force: "kN".into(), moment: "kN·m".into(), stress: Some("MPa".into()) }
    }

    /// Multiples of one unknown load.
    pub fn unit_loads() -> Self {
        Self { length: "m".into(), force: "unit load".into(), moment: "unit load·m".into(), stress: None }
    }
}

/// One drawing.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Run {
    /// The units of all numbers.
    pub units: Units,
    /// What was read.
    pub drawing: DrawingFacts,
    /// The job as it was in force.
    pub settings: serde_json::Value,
    /// The spans, left to right.
    pub spans: Vec<Span>,
    /// Everything worth saying, worst first.
    pub findings: Vec<Finding>,
    /// The verdict; null when the drawing was refused.
    pub verdict: Option<Verdict>,
    /// The marked copy that was written.
    pub output: Option<String>,
    /// Why the drawing was refused.
    pub error: Option<Refusal>,
}

/// The drawing file.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct DrawingFacts {
    /// As named on the command line.
    pub file: String,
    /// SHA-256 of its bytes (unmarked), lower-case hexadecimal; null when it could not be read.
    pub sha256: Option<String>,
    /// `$ACADVER`, such as `AC1024`.
    pub dxf_version: Option<String>,
    /// `ascii` or `binary`.
    pub form: Option<String>,
    /// Name of the text encoding.
    pub encoding: Option<String>,
    /// Length unit: mm, cm, m, in, ft.
    pub unit: Option<String>,
    /// Where the unit came from: `job`, `$INSUNITS`, `$MEASUREMENT`, `assumed`.
    pub unit_source: Option<String>,
    /// Sheet number of the title block, where it could be told.
    pub sheet: Option<String>,
    /// Revision of the title block, where it could be told.
    pub revision: Option<String>,
}

/// Where something stands in the drawing.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct Source {
    /// Handle as spelled in the drawing; null in drawings without handles.
    pub handle: Option<String>,
    /// Entity type, such as `LWPOLYLINE`.
    pub kind: String,
    /// Layer as spelled in the drawing.
    pub layer: String,
    /// Names of the blocks it stands in, outermost first; empty in model space.
    #[serde(default)]
    pub path: Vec<String>,
}

/// One span.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Span {
    /// `span 1` … from the left.
    pub name: String,
    /// `arch` or `cable`.
    pub kind: String,
    /// Its axis.
    pub axis: Axis,
    /// Its ring, where a depth is known.
    pub ring: Option<Ring>,
    /// Its loads in their order along the ring.
    pub loads: Vec<Load>,
    /// What stands on it by outline or up to a level.
    #[serde(default)]
    pub areas: Vec<AreaShare>,
    /// The pier at its right end, for every case; empty where no span follows.
    #[serde(default)]
    pub piers: Vec<PierPush>,
    /// The load cases.
    pub cases: Vec<Case>,
    /// What would suit the loads better; null unless `[mark] suggest` asks for it.
    #[serde(default)]
    pub suggestion: Option<Suggestion>,
}

/// The axis of a span.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Axis {
    /// Horizontal distance of the springings.
    pub span: f64,
    /// Height of the crown over the springing chord; negative for a cable.
    pub rise: f64,
    /// Length along the axis.
    pub length: f64,
    /// Left springing.
    pub left: Xy,
    /// Right springing.
    pub right: Xy,
    /// Crown.
    pub crown: Xy,
    /// The entities it was read from, left to right.
    pub entities: Vec<Source>,
    /// The axis as a polyline with bulges, `[x, y, bulge of the piece that follows]`.
    pub curve: Vec<[f64; 3]>,
}

/// The ring of a span.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Ring {
    /// Least depth.
    pub depth_min: f64,
    /// Greatest depth.
    pub depth_max: f64,
    /// Width across the bridge; null when not given.
    pub width: Option<f64>,
    /// The entities of intrados and extrados it was read from; empty where the depth comes from the job.
    #[serde(default)]
    pub entities: Vec<Source>,
}

/// Where the magnitude of a load came from. A closed list.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum MagnitudeFrom {
    /// A TEXT or MTEXT beside it.
    Label,
    /// An attribute of its INSERT.
    Attribute,
    /// Extended data.
    ExtendedData,
    /// The length of its arrow by the force scale.
    ArrowLength,
    /// `[loads] unlabelled` of the job.
    Job,
    /// No figures anywhere: all loads equal.
    Equal,
    /// A piece of the rib's own weight.
    SelfWeight,
    /// A strip of a weighed area.
    Area,
}

/// What tells the sense of a load drawn as a line. A closed list.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum Sense {
    /// Its drawn arrowhead.
    Arrowhead,
    /// Inferred: within 30° of the vertical, so downward.
    Downward,
    /// Inferred: otherwise toward the rib.
    TowardRib,
}

impl Sense {
    /// In words.
    pub fn words(self) -> &'static str {
        match self {
            Self::Arrowhead => "sense from its arrowhead",
            Self::Downward => "taken to act downward",
            Self::TowardRib => "taken to act toward the rib",
        }
    }
}

/// One load.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Load {
    /// Name of the load, given in the drawing (`P3`) or numbered.
    pub label: String,
    /// The two spaces beside it in Bow's notation.
    pub space: [String; 2],
    /// Where it acts.
    pub at: Xy,
    /// Components to the right and upward.
    pub force: Xy,
    /// Its set: the layer it stands on.
    pub set: String,
    /// The entity.
    pub source: Source,
    /// Where its magnitude came from.
    pub magnitude_from: MagnitudeFrom,
    /// The label text it was read from, as drawn.
    pub text: Option<String>,
    /// Of a piece of a line load its size per metre of plan, downward positive; null for a single load.
    #[serde(default)]
    pub per_length: Option<f64>,
    /// Of a piece of a line load the abscissae of its ends.
    #[serde(default)]
    pub over: Option<[f64; 2]>,
    /// The application whose extended data say how large it is.
    #[serde(default)]
    pub application: Option<String>,
    /// The post that it comes down.
    #[serde(default)]
    pub post: Option<Source>,
    /// How far it stands to the left of the plane of the rib, looking in the direction of x, where the roadway is drawn in plan.
    #[serde(default)]
    pub sideways: Option<f64>,
    /// What tells its sense, where it is drawn as a line; null for a point, which acts downward.
    #[serde(default)]
    pub sense: Option<Sense>,
}

/// One load case.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Case {
    /// Its name; `drawn` when the job states none.
    pub name: String,
    /// Sum of its loads.
    pub total_load: Xy,
    /// Components of each of the span's loads as this case factors them, in the order of `loads`; empty: as drawn.
    #[serde(default)]
    pub forces: Vec<Xy>,
    /// The graphic method's pole.
    pub pole: Option<Pole>,
    /// Kind of the governing line.
    pub governs: LineKind,
    /// Which rule chose it.
    pub governs_why: String,
    /// The lines of thrust, the governing one first.
    pub lines: Vec<Line>,
    /// Traffic on top of this case.
    pub traffic: Vec<Traffic>,
    /// Factors of safety of a ring; null where they do not apply.
    pub safety: Option<Safety>,
    /// Both extremes of thrust and moment of the governing line, each with what goes with it; empty where that line is only
    /// the most favourable one.
    #[serde(default)]
    pub section_forces: Vec<SectionForces>,
    /// Worst and best factors over the ranges that the job states; null without any.
    #[serde(default)]
    pub ranges: Option<Ranges>,
    /// Largest relative residual of the equilibrium self-checks.
    pub residual: f64,
}

/// The fitted pole.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Pole {
    /// Comparable with the push.
    pub horizontal: f64,
    /// Comparable with the left vertical reaction.
    pub vertical: f64,
    /// Weighted root mean square distance of the rays from the pole, a force.
    pub scatter: f64,
    /// Scatter over the push; null when the push is zero.
    pub scatter_ratio: Option<f64>,
}

/// Kind of a line of thrust.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs)]
pub enum LineKind {
    Closest,
    Through,
    LeastThrust,
    GreatestThrust,
    Elastic,
}

/// How a computation ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
#[allow(missing_docs)]
pub enum Status {
    Found,
    None,
    Unbounded,
    Refused,
    NotAsked,
}

/// One line of thrust.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Line {
    /// What defines it.
    pub kind: LineKind,
    /// `hingeless`, `two-hinged`, `three-hinged`, or null.
    pub support: Option<String>,
    /// The left abutment; null unless found.
    pub left: Option<End>,
    /// The right abutment; null unless found.
    pub right: Option<End>,
    /// Whether it was found.
    pub status: Status,
    /// Why not, when it was not.
    pub reason: Option<String>,
    /// The line as a polygon.
    pub vertices: Vec<Xy>,
    /// Offset from the axis; null unless found.
    pub offset: Option<Offset>,
    /// Forces in the joints.
    pub stations: Vec<Station>,
    /// Proof of optimality.
    pub proof: Option<Proof>,
    /// Buckling and second-order bending; null but for an elastic rib whose modulus and width are given.
    #[serde(default)]
    pub buckling: Option<Buckling>,
}

/// What an abutment does to the rib.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct End {
    /// Push on the rib, positive inward.
    pub horizontal: f64,
    /// Upward reaction.
    pub vertical: f64,
    /// Eccentricity at the springing.
    pub eccentricity: Option<f64>,
}

/// Offset of a line from the axis.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Offset {
    /// Largest absolute eccentricity.
    pub max_abs: f64,
    /// The eccentricity there with its sign, positive toward the extrados.
    pub signed: f64,
    /// Where.
    pub at: Xy,
    /// Root mean square along the axis.
    pub rms: f64,
}

/// Forces in one joint.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Station {
    /// Point of the axis.
    pub at: Xy,
    /// Length along the axis from the left springing.
    pub s: f64,
    /// Axial force, compression positive.
    pub thrust: f64,
    /// Shear.
    pub shear: f64,
    /// Moment.
    pub moment: f64,
    /// Eccentricity, positive toward the extrados.
    pub eccentricity: Option<f64>,
    /// Height of the line above the axis.
    pub vertical_offset: Option<f64>,
    /// Depth of the joint.
    pub depth: Option<f64>,
    /// Greatest compression.
    pub stress_max: Option<f64>,
    /// Least compression (negative: tension).
    pub stress_min: Option<f64>,
    /// Least moment in a slender rib, imperfection to either side; null where buckling was not looked at.
    #[serde(default)]
    pub moment_min: Option<f64>,
    /// Greatest moment, alike.
    #[serde(default)]
    pub moment_max: Option<f64>,
}

/// Proof of optimality.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Proof {
    /// Value reached.
    pub primal: f64,
    /// Bound that none can beat.
    pub dual: f64,
    /// What separates them, relative.
    pub gap: f64,
}

/// Factors of safety of a ring without tension.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Safety {
    /// Geometric factor of safety.
    pub geometric_factor: Option<f64>,
    /// Upper end of the interval of the load factor.
    pub load_factor: Option<f64>,
    /// Lower end of the interval.
    pub load_factor_least: Option<f64>,
    /// Least depth: where the ring is thinnest, of the least ring of the drawn shape that a line of thrust still fits into,
    /// its own weight shrinking with it.
    pub least_depth: Option<f64>,
    /// How each of them ended.
    pub status: BTreeMap<String, Status>,
    /// Hinges of the mechanism.
    pub hinges: Vec<Hinge>,
    /// Proof of optimality.
    pub proof: Option<Proof>,
}

/// A hinge of a mechanism.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Hinge {
    /// Where.
    pub at: Xy,
    /// `intrados` or `extrados`.
    pub side: String,
}

/// What a finding is about. A closed list.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum Check {
    /// Largest offset of the governing line from the axis.
    Offset,
    /// The governing line stays inside the ring (built in where a depth is known, or `[limits] ring`).
    Ring,
    /// Largest eccentricity over a sixth of the depth.
    Kern,
    /// Largest stress.
    Stress,
    /// Geometric factor of safety.
    GeometricFactor,
    /// Load factor.
    LoadFactor,
    /// Difference of the pushes of neighbouring spans.
    PierPush,
    /// Drawn dimension text against drawn geometry.
    Dimension,
    /// Equilibrium residual of the self-checks.
    Equilibrium,
    /// A line of thrust that does not exist.
    NoLine,
    /// Buckling, second-order bending, shared bending and sharp curvature of an elastic rib.
    Buckling,
    /// Loads unevenly spaced.
    Spacing,
    /// Loads that stand over no span.
    OffSpan,
    /// Gaps in the axis that were closed.
    Gaps,
    /// Layers that were guessed.
    Layers,
    /// The plane of the elevation was guessed.
    Plane,
    /// Loads taken as equal, with no figures.
    Loads,
    /// The sense of a load was inferred.
    Sense,
    /// Labels that could belong to more than one load, or to none.
    Labels,
    /// The length unit was assumed.
    Unit,
    /// The support was assumed.
    Support,
    /// The text encoding was assumed.
    Encoding,
    /// What stands on the ring by its outline or up to a level.
    Areas,
    /// Something in the drawing that was passed over.
    PassedOver,
    /// A stated limit that could not be judged.
    NotJudged,
    /// No limit applies.
    NoLimit,
    /// What the computation leaves out.
    LeftOut,
    /// Traffic: what was taken to be so, what reaches the abutments, what remains uncertain.
    Traffic,
    /// An axis or a depth that would suit the loads better.
    Suggestion,
}

/// What became of a check.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum FindingVerdict {
    /// A stated limit does not hold.
    Outside,
    /// Worth knowing; no limit.
    Note,
    /// Outside, and accepted in the job with a reason.
    Accepted,
    /// A stated limit holds.
    Within,
}

/// A justified exception.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct Accepted {
    /// Why.
    pub reason: String,
    /// By whom.
    pub by: String,
    /// Until when, `YYYY-MM-DD`.
    pub until: Option<String>,
}

/// One finding.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize, JsonSchema)]
pub struct Finding {
    /// What it is about.
    pub check: Check,
    /// What became of it.
    pub verdict: FindingVerdict,
    /// True when it keeps the run from being judged: an assumption that the job does not allow, or a limit not judged.
    pub unchecks: bool,
    /// The value found, in `unit`.
    pub value: Option<f64>,
    /// The limit it was held against, in `unit`.
    pub limit: Option<f64>,
    /// Unit of value and limit.
    pub unit: Option<String>,
    /// Where.
    pub at: Option<Xy>,
    /// Name of the span.
    pub span: Option<String>,
    /// Name of the case.
    pub case: Option<String>,
    /// Where the limit comes from: `[limits] offset`, `built in`.
    pub basis: Option<String>,
    /// What was found, as a sentence.
    pub message: String,
    /// What would mend it.
    pub remedy: Option<String>,
    /// The entity concerned.
    pub entity: Option<Source>,
    /// The exception that covers it.
    pub accepted: Option<Accepted>,
}

/// Verdict of a run.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum Verdict {
    /// Every stated limit holds, and at least one was there to hold.
    Within,
    /// Computed, not judged.
    Unchecked,
    /// A stated limit does not hold.
    Outside,
}
