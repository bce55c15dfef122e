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

/// Part by which the z component of an entity's normal may miss 1 and the entity still lies flat in the drawing. No unit.
/// Larger: tilted entities are read as if flat; smaller: normals written with few digits are refused.
pub const FLAT_NORMAL: f64 = 1e-9;

/// Ends of axis pieces closer than this part of the drawn axis meet. No unit. It covers arcs whose centre, radius and
/// angles are written with six decimals. Larger: short pieces of a finely drawn axis shrink to nothing; smaller: exact
/// joints are reported as gaps.
pub const ENDS_MEET: f64 = 1e-6;

/// Gaps in the axis up to this part of the drawn axis are closed with a straight piece, and told (40 mm for 40 m). No
/// unit. Larger: faults are bridged; smaller: drawings with coarse snapping are refused.
pub const GAP: f64 = 1e-3;

/// Ends farther apart than [`GAP`] but within this part of the longer line, and in one direction, are taken for a fault
/// and refused. No unit. Larger: neighbouring flat spans are refused; smaller: a missing chord makes two spans.
pub const DOUBTFUL_GAP: f64 = 0.1;

/// Radians by which two ends may turn and still count as one direction for [`DOUBTFUL_GAP`] (10°). At a pier even arches of
/// rise 1 in 40 turn more.
pub const DOUBTFUL_TURN: f64 = 0.1745;

/// Part of its length by which an axis must run across. No unit. Larger: steep half arches are refused; smaller: a
/// vertical line is taken for a span.
pub const UPRIGHT_AXIS: f64 = 1e-3;

/// Rise over span from which a part of a line can be a span of its own, and largest part of that rise by which it may
/// lie on the other side of its chord. No unit. Larger: flat spans in one line stay joined; smaller: ripples of a
/// measured line could be taken for spans.
pub const OWN_RISE: f64 = 0.01;

/// Depth of a pier or tower under (over) the crowns beside it, as a part of the rise, from which a line is cut there. No
/// unit. Larger: spans with a high springing stay joined; smaller: a dent near a crown cuts an arch in two.
pub const OWN_DEPTH: f64 = 0.25;

/// Heights of its letters within which a label is taken for a load (30 mm on paper at the usual 2.5 mm). No unit. Larger:
/// stray figures find loads; smaller: labels set off from their loads are not taken.
pub const LABEL_HEIGHTS: f64 = 12.0;

/// Part of the spacing of the loads within which a label is taken whatever its height. No unit. Larger: figures of
/// neighbours that have no load of their own are taken; smaller: labels in tiny letters are not.
pub const LABEL_SPACING: f64 = 0.6;

/// What a way upright counts beside one across when labels are paired with loads: a row of labels over the deck belongs to
/// the posts straight below. No unit. Larger: labels of tall arches are not taken; smaller: of two loads over one another
/// the nearer one to a label cannot be told.
pub const LABEL_UPRIGHT: f64 = 0.1;

/// Part of the distance to the point by which a text was placed that counts beside the distance to the text itself. No
/// unit. Larger: long labels written to the left of their loads go astray; smaller: loads under one long label cannot be
/// told apart.
pub const LABEL_ANCHOR: f64 = 0.1;

/// Heights of its letters by which another pairing of a label may be worse and is still told as possible. No unit. Larger:
/// clear drawings are called doubtful; smaller: a label halfway between two loads is not.
pub const LABEL_DOUBT_HEIGHTS: f64 = 0.5;

/// Axes shorter than this are unlikely to be bridges, m. Larger: models and footbridges are questioned; smaller:
/// metre drawings read in millimetres are not.
pub const LEAST_SPAN: f64 = 0.5;

/// Axes longer than this are unlikely to be bridges, m. Larger: millimetre drawings read in metres are not questioned;
/// smaller: great suspended spans are.
pub const GREATEST_SPAN: f64 = 3000.0;

/// A metric drawing with no unit whose axis is at least so many units wide is taken to be in millimetres. Larger: small
/// spans in millimetres are read in metres; smaller: long ones in metres are read in millimetres.
pub const MILLIMETRES_FROM: f64 = 1000.0;

/// An English drawing with no unit whose axis is at least so many units wide is taken to be in inches. Larger or smaller:
/// as [`MILLIMETRES_FROM`].
pub const INCHES_FROM: f64 = 1500.0;

/// Greatest number that an entity may hold, drawing units. Larger: squares and products lose all digits or overflow;
/// smaller: grid coordinates in millimetres are refused.
pub const GREATEST_NUMBER: f64 = 1e12;

/// Part of its length by which a curve may leave the x-y plane and still be flat. No unit. Larger: slanting lines are
/// read shortened; smaller: heights with rounding noise are refused.
pub const FLAT: f64 = 1e-6;

/// Width of a letter over its height, for estimating how far a text reaches. No unit. Larger or smaller: labels beside
/// their loads seem nearer to or farther from the next load than they are.
pub const LETTER_WIDTH: f64 = 0.7;

/// Distance of lines of a paragraph over the height of its letters (the format's single spacing is 5/3). No unit. Larger
/// or smaller: as [`LETTER_WIDTH`], for loads above and below.
pub const LINE_PITCH: f64 = 5.0 / 3.0;

/// Part of the span by which the ends of a line may differ in height and still be guessed to be springings. No unit.
/// Larger: slanting lines are guessed to be arches; smaller: arches on a slope are not found without a job file.
pub const LEVEL_ENDS: f64 = 0.2;

/// Rise over span above which no line is guessed to be an arch. No unit. Larger: loops and signatures are; smaller: tall
/// parabolas are not found without a job file.
pub const STEEPEST_GUESS: f64 = 2.0;

/// Entities on a layer above which it is not looked at when a layer is guessed by what it holds. A count. Larger: guessing in
/// a great drawing takes long; smaller: an axis of many chords is not found without a job file.
pub const GUESS_ENTITIES: u64 = 5000;

/// Part of the points on a layer that must stand over the axis for the layer to be guessed to hold the loads. No unit.
/// Larger: a stray point hides the loads; smaller: bolt holes are taken for loads.
pub const POINTS_OVER: f64 = 0.8;

/// Part of the span by which a guessed load may stand below the axis of an arch (above that of a cable). No unit. Larger:
/// points of the foundation are taken for loads; smaller: loads drawn on the axis with few digits are not.
pub const BESIDE_AXIS: f64 = 0.02;
/// Three points are in one straight line when the height of their triangle is below this part of its longest side. No
/// unit. Larger: flat but real `through` lines are refused; smaller: the push through the points is mostly rounding.
pub const ONE_STRAIGHT_LINE: f64 = 1e-9;
/// By how much the length of a direction of the mark plane may miss 1, and the product of two of them 0. No unit.
/// Larger: marks come out stretched or skewed; smaller: directions computed from drawn points are refused.
pub const UNIT_VECTOR: f64 = 1e-9;

/// Separate lines on the axis layers above which they are refused at once. A count. Larger: comparing all with all takes
/// long; smaller: long viaducts are refused.
pub const MOST_SPANS: usize = 500;

/// Nearest loads that are looked at for one label. A count. Larger: thousands of labels on one spot take minutes; smaller:
/// crowded but clear drawings are refused.
pub const LABEL_CHOICES: usize = 256;

/// Steps that pairing labels with loads may take (some seconds). A count. Larger: a hostile drawing keeps the program busy;
/// smaller: crowded but clear drawings are refused.
pub const PAIRING_STEPS: u64 = 100_000_000;
