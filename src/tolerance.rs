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

/// A station counts as standing at a joint when nearer to it than this part of the axis' length. No unit. Larger: the
/// figure of a neighbouring station is shown; smaller: rounding between metres and drawing units loses the station, and
/// the figure is measured on the drawn line instead.
pub const SAME_JOINT: f64 = 1e-9;

/// Part by which a joint may miss the end of a piece of the line of thrust and still meet it. No unit. Larger: joints
/// beyond the line's end get a figure; smaller: a joint through a vertex slips between two pieces.
pub const PIECE_END: f64 = 1e-9;

/// Radians by which text may lean past the upright and still read from the right. Larger: text stands on its head;
/// smaller: upright texts of one row turn either way by rounding.
pub const UPRIGHT: f64 = 1e-9;

/// Part by which a value may fall short of a round figure and still be given it. No unit. Larger: bars come out longer
/// than what they measure; smaller: 0.3 / 3 is not 0.1 and the next smaller figure is taken.
pub const ROUND_FIGURE: f64 = 1e-9;

/// A component of the total load smaller than this part of the other is not told. No unit. Larger: a real push sideways
/// goes unsaid; smaller: rounding of upright loads reads as a push.
pub const NO_FORCE: f64 = 1e-9;
/// By how much the length of a direction of the mark plane may miss 1, and the product of two of them 0. No unit.
/// Larger: marks come out stretched or skewed; smaller: directions computed from drawn points are refused.
pub const UNIT_VECTOR: f64 = 1e-9;
