//! Lines of thrust of a plane arch or cable under given forces.
//!
//! Knows no drawing, no layer and no job file: only curves, forces and depths. Units are metres and kilonewtons (or
//! metres and unit loads). Compression is positive, eccentricity is positive toward the extrados (the side of the
//! normal, upward for an axis that runs from left to right), loads down are negative in `y`.

mod analyse;
mod check;
mod closest;
mod elastic;
mod factors;
mod joint;
mod limit;
mod line;
mod line_load;
mod peaks;
mod piece;
mod place;
mod pole;
mod quadratic;
pub mod range;
mod rule;
mod safety;
mod simplex;
pub mod slender;
mod span;
pub mod stress;
mod string;
mod subspace;
mod suggest;
mod thickness;
mod through;
mod ties;
pub mod traffic;

pub use analyse::{analyse, elastic};
pub use elastic::{Effects, Flexibility, Place};
pub use factors::Factors;
pub use slender::{Bending, Slender};
pub use suggest::{Funicular, funicular};
pub use thickness::least_thickness;

use crate::geometry::{Path, Point, Vec2};

/// A force that acts on the span.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Force {
    /// Where it acts, m.
    pub at: Point,
    /// Components to the right and upward, kN.
    pub force: Vec2,
}

/// A uniform weight per metre of plan over a part of it, as of a deck or a crowd. It enters the axis where a vertical from above
/// meets it first.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LineLoad {
    /// Abscissa where it begins, m.
    pub from: f64,
    /// Abscissa where it ends, right of `from`, m.
    pub to: f64,
    /// Weight per metre of plan, downward positive, kN/m.
    pub down: f64,
    /// Whether a load factor multiplies it.
    pub varies: bool,
}

/// Depth of the rib or ring along the axis, measured along the joint, m.
#[derive(Debug, Clone, PartialEq)]
pub enum Depth {
    /// The same everywhere.
    Constant(f64),
    /// Linear along the axis between the springings and the crown.
    Linear {
        /// At both springings.
        springing: f64,
        /// At the crown.
        crown: f64,
    },
    /// Values at lengths along the axis, ascending, linear between.
    Table(Vec<(f64, f64)>),
}

/// How the span is held.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Support {
    /// Both springings built in.
    Hingeless,
    /// A hinge at both springings.
    TwoHinged,
    /// Hinges at springings and crown.
    ThreeHinged,
    /// A ring without tension on rigid abutments.
    None,
}

/// A kind of line of thrust.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum LineKind {
    /// Least possible largest eccentricity over depth (or eccentricity, where no depth is known).
    Closest,
    /// Through three given points.
    Through,
    /// Least push with the line inside the ring.
    LeastThrust,
    /// Greatest push with the line inside the ring.
    GreatestThrust,
    /// Least complementary energy.
    Elastic,
}

/// A span with its loads: all that the statics need.
#[derive(Debug, Clone, PartialEq)]
pub struct Problem {
    /// Axis from the left springing to the right one, m.
    pub axis: Path,
    /// Point forces, in any order.
    pub forces: Vec<Force>,
    /// Uniform loads per metre of plan, in any order. What reaches beyond the axis does not act on it.
    pub line_loads: Vec<LineLoad>,
    /// Uniform downward weight per metre of axis, acting on the axis, kN/m; 0 for a weightless rib.
    pub weight_on_axis: f64,
    /// Unit weight times width of the ring, kN per square metre of elevation: the weight of its true pieces between
    /// normals, at their own centroids. Needs a depth; 0 for a weightless ring.
    pub ring_weight: f64,
    /// Forces that enter the ring at a stated place: index, and length along the axis, m. A weight enters the piece that it
    /// was cut for; all other forces enter where their line of action meets the axis first.
    pub entering: Vec<(usize, f64)>,
    /// Indices of the forces that a load factor multiplies.
    pub varying: Vec<usize>,
    /// Whether a load factor multiplies the weight of the rib too.
    pub weight_varies: bool,
    /// Depth of the rib or ring; `None` where only the axis is known.
    pub depth: Option<Depth>,
    /// Number of equal pieces of the ring along the axis; `None`: a continuous ring.
    pub voussoirs: Option<usize>,
    /// Joints of the ring that are not normal to the axis: intrados and extrados end of each, m, left to right. They are all
    /// joints that there are, and their own middle, direction and depth count. The weight of the pieces between them is the
    /// caller's to give as forces with their places in [`Problem::entering`]: [`Problem::ring_weight`] is cut by normals, and is
    /// refused beside them. Empty: joints normal to the axis.
    pub joints: Vec<[Point; 2]>,
    /// Coefficient of friction between the pieces; `None`: nothing slides.
    pub friction: Option<f64>,
    /// Strength in compression times width, kN/m, of a uniform block of stress; `None`: unlimited.
    pub strength: Option<f64>,
    /// Modulus of elasticity times width, kN/m (lowered for creep); only what strains the rib beside its loads needs it.
    pub stiffness: Option<f64>,
    /// What strains an elastic rib beside its loads.
    pub effects: Effects,
    /// What bends a slender rib beside its line of thrust, with its buckling; `None`: not asked.
    pub slender: Option<Slender>,
    /// Whether the section can take tension.
    pub tension: bool,
    /// How the span is held; `None` when nothing was said.
    pub support: Option<Support>,
    /// Drawn hinges, m.
    pub hinges: Vec<Point>,
    /// Three points for the `through` line, m; `None`: springings and crown of the axis.
    pub through: Option<[Point; 3]>,
    /// The line that is to govern; `None`: by the kind of rib.
    pub govern: Option<LineKind>,
    /// Lines wanted beside the governing one.
    pub draw: Vec<LineKind>,
}

impl Problem {
    /// A weightless axis without loads, depth, support or wishes: to be filled in.
    pub fn new(axis: Path) -> Self {
        Self {
            axis,
            forces: Vec::new(),
            line_loads: Vec::new(),
            weight_on_axis: 0.0,
            ring_weight: 0.0,
            entering: Vec::new(),
            varying: Vec::new(),
            weight_varies: false,
            depth: None,
            voussoirs: None,
            joints: Vec::new(),
            friction: None,
            strength: None,
            stiffness: None,
            effects: Effects::default(),
            slender: None,
            tension: false,
            support: None,
            hinges: Vec::new(),
            through: None,
            govern: None,
            draw: Vec::new(),
        }
    }
}

/// Whether the span pushes or pulls.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SpanKind {
    /// Compression throughout.
    Arch,
    /// Hanging: the axis lies wholly below its chord under net downward load.
    Cable,
}

/// How a computation ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Status {
    /// There is such a line.
    Found,
    /// There is none.
    None,
    /// The optimum has no bound.
    Unbounded,
    /// Not computed, with a reason.
    Refused,
}

/// The three unknowns of a line of thrust, in the origin of the drawing's elevation (m, kN, kN·m).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Reaction {
    /// Push of the left abutment on the rib, to the right positive.
    pub horizontal: f64,
    /// Its upward reaction.
    pub vertical: f64,
    /// Moment at the left springing.
    pub moment: f64,
}

/// Forces in one joint.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Station {
    /// Point of the axis, m.
    pub at: Point,
    /// Length along the axis from the left springing, m.
    pub s: f64,
    /// Axial force, compression positive, kN.
    pub thrust: f64,
    /// Shear, kN.
    pub shear: f64,
    /// Moment of the thrust about the axis point, kN·m.
    pub moment: f64,
    /// Moment over thrust, m, positive toward the extrados; `None` where the thrust vanishes.
    pub eccentricity: Option<f64>,
    /// Height of the line of thrust above the axis point, m; `None` where the thrust is vertical.
    pub vertical_offset: Option<f64>,
    /// Depth of the joint, m.
    pub depth: Option<f64>,
}

/// Largest and root mean square eccentricity along the continuous axis.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Offset {
    /// Largest absolute eccentricity, m.
    pub max_abs: f64,
    /// The eccentricity there with its sign, m.
    pub signed: f64,
    /// The axis point where, m.
    pub at: Point,
    /// Its length along the axis, m.
    pub s: f64,
    /// Root mean square over the length of the axis, m.
    pub rms: f64,
}

/// Largest value of eccentricity over depth along the continuous axis.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Use {
    /// Largest `|e| / d`.
    pub ratio: f64,
    /// The axis point where, m.
    pub at: Point,
    /// Its length along the axis, m.
    pub s: f64,
}

/// Primal and dual value of an optimum, and what separates them relative to their size.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Proof {
    /// Value reached.
    pub primal: f64,
    /// Bound that no line can beat.
    pub dual: f64,
    /// `|primal − dual|` over the larger of 1 and their size.
    pub gap: f64,
}

/// What an abutment does to the rib.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct End {
    /// Push on the rib, positive inward, kN.
    pub horizontal: f64,
    /// Upward reaction, kN.
    pub vertical: f64,
    /// Eccentricity at the springing, m; `None` where the thrust vanishes.
    pub eccentricity: Option<f64>,
}

/// One line of thrust.
#[derive(Debug, Clone, PartialEq)]
pub struct Line {
    /// What defines it.
    pub kind: LineKind,
    /// The support it was computed for, where one counts.
    pub support: Option<Support>,
    /// Whether it was found; everything below is `None` or empty unless it was.
    pub status: Status,
    /// Why not, when it was not.
    pub reason: Option<String>,
    /// The unknowns.
    pub reaction: Option<Reaction>,
    /// The left abutment.
    pub left: Option<End>,
    /// The right abutment.
    pub right: Option<End>,
    /// The line of thrust as a string polygon (with distributed weight: as many points as keep it within a
    /// hundred-thousandth of the span), from the left springing joint to the right one, m.
    pub vertices: Vec<Point>,
    /// Offset from the axis.
    pub offset: Option<Offset>,
    /// Use of the depth, where one is known.
    pub depth_use: Option<Use>,
    /// Springings, crown, loads (before and after), the worst place, and evenly spaced joints between.
    pub stations: Vec<Station>,
    /// Proof of optimality of an optimum.
    pub proof: Option<Proof>,
    /// The bending of a slender rib, where [`Problem::slender`] asks for it and the line is that of an elastic rib.
    pub bending: Option<Bending>,
}

/// A factor of safety.
#[derive(Debug, Clone, PartialEq)]
pub struct Factor {
    /// Whether there is one; `Unbounded` is an answer.
    pub status: Status,
    /// The factor, when it was found.
    pub value: Option<f64>,
    /// Why not, when it was not.
    pub reason: Option<String>,
    /// Proof of optimality.
    pub proof: Option<Proof>,
}

/// Where a hinge of a mechanism forms.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum HingeSide {
    /// On the outer edge.
    Extrados,
    /// On the inner edge.
    Intrados,
    /// No hinge: the ring slides in this joint.
    Slip,
}

/// A hinge of a mechanism.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Hinge {
    /// Where it turns: on the edge of the ring, inside where the edge crushes, m.
    pub at: Point,
    /// Length of its joint along the axis, m.
    pub s: f64,
    /// Which edge.
    pub side: HingeSide,
    /// Size of its rotation, rad per kN·m of work of the varying loads (a slip: m per kN·m).
    pub rotation: f64,
}

/// The mechanism that an end of the load factor's interval belongs to.
#[derive(Debug, Clone, PartialEq)]
pub struct Mechanism {
    /// Its hinges, from left to right.
    pub hinges: Vec<Hinge>,
    /// Virtual work of the loads that stay, with the varying ones doing one unit at factor 1.
    pub work_fixed: f64,
    /// Virtual work of the varying loads at factor 1: one, or minus one at the lower end.
    pub work_varying: f64,
    /// What crushing at finite strength takes of it.
    pub work_crushing: f64,
    /// What is left of the work of all loads at the factor found, relative to its parts.
    pub residual: f64,
}

/// Factors of safety of a ring without tension: with unlimited strength, on abutments that take the push.
#[derive(Debug, Clone, PartialEq)]
pub struct Safety {
    /// Largest `g` with some line at `|e| ≤ d / (2 g)` everywhere; the loads are unchanged.
    pub geometric: Factor,
    /// Largest factor on the varying loads for which a line lies inside the ring; `None` when nothing varies.
    pub load: Option<Factor>,
    /// Least such factor.
    pub load_least: Option<Factor>,
    /// The mechanism of the largest factor.
    pub mechanism: Option<Mechanism>,
    /// The mechanism of the least factor, when that is not zero.
    pub mechanism_least: Option<Mechanism>,
}

/// The fitted pole of the graphic method.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PoleFit {
    /// Minus the pole's place from the start of the load line: comparable with the push, kN.
    pub horizontal: f64,
    /// As `horizontal`, upward: comparable with the left vertical reaction, kN.
    pub vertical: f64,
    /// Weighted root mean square distance of the rays from the pole, kN.
    pub scatter: f64,
    /// Scatter over the absolute horizontal; `None` when that is zero.
    pub scatter_ratio: Option<f64>,
}

/// Which rule chose the governing line.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Rule {
    /// `[line] govern` in the job.
    Asked,
    /// Three hinges leave one line.
    ThreeHinges,
    /// An elastic support was declared and the depth is known.
    ElasticSupport,
    /// A ring without tension: the most favourable line.
    RingWithoutTension,
    /// Only the axis is known, or a section that takes tension with no support declared.
    AxisOnly,
    /// A cable through its supports and its lowest point.
    Cable,
}

/// One load with its place along the ring.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Placed {
    /// Index into [`Problem::forces`].
    pub force: usize,
    /// Length along the axis where its line of action meets the axis, m.
    pub foot: f64,
}

/// What came out for one span and one set of loads.
#[derive(Debug, Clone, PartialEq)]
pub struct Analysis {
    /// Arch or cable.
    pub kind: SpanKind,
    /// Crown: the axis point farthest from the chord, measured vertically, m.
    pub crown: Point,
    /// Horizontal distance of the springings, m.
    pub span: f64,
    /// Height of the crown over the chord (negative for a cable), m.
    pub rise: f64,
    /// Forces in their order along the ring; those that meet no piece of the axis are in `off_span`.
    pub order: Vec<Placed>,
    /// Indices of forces whose line of action misses the axis.
    pub off_span: Vec<usize>,
    /// Sum of all forces that count, kN.
    pub total: Vec2,
    /// The graphic method's pole; `None` with fewer than two load feet.
    pub pole: Option<PoleFit>,
    /// The governing line: an index into `lines`.
    pub governs: usize,
    /// Why it governs.
    pub rule: Rule,
    /// All lines, the governing one first.
    pub lines: Vec<Line>,
    /// Factors of safety; `None` for a cable, where no depth is known, and for a section that takes tension.
    pub safety: Option<Safety>,
    /// Least radius of the axis over the depth there, and where; `None` without a depth or where the axis is straight.
    pub sharpest: Option<(f64, Point)>,
    /// Largest relative residual of the equilibrium self-checks over all lines found.
    pub residual: f64,
}

/// Why a span could not be analysed.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum Unsolved {
    /// No force has an effect on the span.
    #[error("no load acts on the span")]
    NoLoad,
    /// The axis crosses itself.
    #[error("the axis crosses itself near ({0:.3}, {1:.3}) m")]
    SelfCrossing(f64, f64),
    /// The axis has no rise.
    #[error("the axis is straight between its springings: it has no rise to carry the loads by thrust")]
    NoRise,
    /// More than three hinges, or three that contradict the support, or three on one line.
    #[error("{0}")]
    Hinges(String),
    /// A cable that would have to push.
    #[error("{0}")]
    SlackCable(String),
    /// Numbers that describe no span.
    #[error("{0}")]
    Input(String),
    /// Something asked that is not built for this span.
    #[error("{0}")]
    NotBuilt(String),
}
