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

/// By how much the length of a direction of the mark plane may miss 1, and the product of two of them 0. No unit.
/// Larger: marks come out stretched or skewed; smaller: directions computed from drawn points are refused.
pub const UNIT_VECTOR: f64 = 1e-9;
