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

/// Part by which a value may pass a limit and still meet it. No unit. Larger: a limit that is broken passes; smaller:
/// a value equal to its limit fails by rounding.
pub const LIMIT_MET: f64 = 1e-9;

/// Use of the depth below which an axis counts as a funicular of its loads, so that the geometric factor has no bound.
/// No unit. Larger: great but finite factors are called unbounded; smaller: rounding is reported as a factor.
pub const FUNICULAR_USE: f64 = 1e-9;

/// Largest relative residual of the equilibrium self-checks. No unit. Larger: errors of computation pass; smaller:
/// rounding of long spans is reported.
pub const EQUILIBRIUM: f64 = 1e-9;

/// Loads whose abscissas differ by less than this part of the span stand in one line. No unit. Larger: close posts count
/// as one; smaller: drawing noise counts as a gap.
pub const SAME_ABSCISSA: f64 = 1e-6;

/// Part by which the gaps between loads may differ and still count as even. No unit. Larger: a misplaced post goes
/// unnoticed; smaller: coordinates rounded to the centimetre are reported.
pub const EVEN_SPACING: f64 = 0.02;
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
