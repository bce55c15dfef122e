//! Every tolerance of the tool: its unit, its reason, and what goes wrong when it is larger or smaller.

/// Bulge below which a piece of a polyline is taken as straight. No unit. Larger: flat arcs lose their sagitta;
/// smaller: the radius grows beyond what doubles resolve (sagitta / chord is half the bulge).
pub const STRAIGHT_BULGE: f64 = 1e-12;

/// Two places along a path closer than this part of its length are one. No unit. Larger: close loads merge; smaller:
/// one crossing at the joint of two pieces counts twice.
pub const SAME_PLACE: f64 = 1e-12;

/// Radians by which a direction may miss the end of an arc and still count as its end. Larger: points beyond an
/// arc's end count as on it; smaller: crossings at the very end get lost to rounding.
pub const SAME_ANGLE: f64 = 1e-12;

/// Places on the axis closer than this part of its length are one joint, and a line this close to an end meets it. No
/// unit. Larger: loads near a springing are drawn onto it; smaller: a load over a springing of a drawing in national
/// grid coordinates (1e-10 m of rounding on a few metres) counts as off the span.
pub const ONE_JOINT: f64 = 1e-9;

/// Distance from a smooth joint, as a part of the radius, within which two pieces of a path may seem to cross. The
/// root of the rounding error, with a margin. Larger: true crossings hide there; smaller: smooth joints count as crossings.
pub const TANGENT_JOINT: f64 = 1e-7;

/// Height of the axis over its chord, as a part of the span, below which it has no rise. Larger: flat arches are
/// refused; smaller: the rounding of a straight axis in national grid coordinates passes for a rise.
pub const NO_RISE: f64 = 1e-9;

/// Violation of a row of unit length, relative to the size of the vertex, that the simplex takes for rounding. No unit.
/// Larger: optima lose digits; smaller: it chases rounding errors.
pub const SIMPLEX_TIGHT: f64 = 4e-15;

/// The same once thousands of steps have not brought an end. Larger: optima lose digits; smaller: no end.
pub const SIMPLEX_LOOSE: f64 = 1e-12;

/// Smallest weight in a ratio test of the simplex, relative to the largest, that is not rounding. Larger: a blocking row is passed over;
/// smaller: the basis becomes singular.
pub const SIMPLEX_PIVOT: f64 = 1e-11;

/// Smallest pivot of a basis of unit rows that is not singular. Larger: thin but true corners are given up; smaller:
/// vertices without a correct digit.
pub const SIMPLEX_SINGULAR: f64 = 1e-15;

/// Gain of another round of the exchange on the continuous axis, relative to the optimum, at which it ends. Larger:
/// digits of the optimum are lost; smaller: rounds that only see rounding errors.
pub const EXCHANGE_GAIN: f64 = 1e-13;

/// The same at which it may end when the rounds bring no more, and the largest gap between an optimum and its proof.
/// This is the accuracy that the tool owes for linear programs.
pub const PROOF_GAP: f64 = 1e-9;

/// Length of axis, as a part of the whole, to which the place of a peak is found. The height of a smooth peak is then
/// exact to the square of it. Larger: peaks too low; smaller: steps that change nothing.
pub const PEAK_PLACE: f64 = 1e-11;

/// Size of the unknowns, in units of the load and of the push of a line of the rise, beyond which a line counts as
/// running to infinity. Larger: rounding; smaller: true lines of very flat arches are called unbounded.
pub const UNBOUNDED: f64 = 1e6;

/// Multiplier, relative to the largest, below which a joint does not hold the optimum in place. Larger: joints that
/// hold it are let go in the tie-break; smaller: rounding errors hold it.
pub const MULTIPLIER: f64 = 1e-7;

/// Part of a unit row that must be independent of the others to count in the rank. Larger: an optimum that is unique
/// counts as free, which the tie-break then leaves in place; smaller: neighbouring cuts at one peak count twice.
pub const RANK: f64 = 1e-5;

/// Relative leave that the tie-break has over the optimum it must keep. Larger: the optimum is given away; smaller:
/// rounding leaves no room.
pub const TIE_LEAVE: f64 = 1e-10;

/// Part of the resultant below which its horizontal part vanishes, so that a height above the axis means nothing.
pub const VERTICAL_THRUST: f64 = 1e-12;

/// Part of the load below which a thrust vanishes, so that an eccentricity means nothing.
pub const NO_THRUST: f64 = 1e-13;

/// Deviation, as a part of the span, of the polygon that stands for a curved line of thrust. A visible corner is larger.
pub const LINE_POLYGON: f64 = 1e-5;

/// Least thrust of the closest line in any joint, as a part of all loads. Larger: it keeps lines from parts of the arch
/// that hardly carry; smaller: in a part that carries nothing the eccentricity is rounding over rounding.
pub const LEAST_THRUST: f64 = 1e-4;

/// Excess over a constraint of the limit analysis, in units of all forces and of the axis length, that is still rounding.
/// Larger: factors too favourable; smaller: the exchange never ends.
pub const LIMIT_SLACK: f64 = 2e-14;

/// Part by which a peak may stay below the limit and still be the place of a hinge. Larger: hinges move to a neighbouring
/// peak; smaller: rounding keeps a hinge off its peak.
pub const HINGE_CONTACT: f64 = 1e-4;

/// Length of axis, as a part of the whole, within which joints with multipliers are one hinge. Larger: two hinges fall
/// together; smaller: the neighbouring joints that close in on one peak count as hinges of their own.
pub const HINGE_PLACE: f64 = 1e-3;

/// Largest eccentricity over depth that counts as none: the geometric factor is then unbounded. Larger: a true factor of
/// hundreds of millions is called unbounded; smaller: rounding is called a factor.
pub const FUNICULAR: f64 = 1e-9;

/// The same where the strength is finite and the law is curved. Larger: the 1e-7 owed for conic programs is lost; smaller:
/// tangents without end.
pub const CONE_SLACK: f64 = 1e-11;

/// Logarithm of the line's share of the depth at which the search for the least thickness ends. Larger: digits of the
/// thickness are lost; smaller: steps that only see rounding.
pub const THICKNESS: f64 = 1e-13;
