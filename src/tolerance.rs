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

/// Separate lines on the axis layers above which they are refused at once. A count. Larger: comparing all with all takes
/// long; smaller: long viaducts are refused.
pub const MOST_SPANS: usize = 500;

/// Nearest loads that are looked at for one label. A count. Larger: thousands of labels on one spot take minutes; smaller:
/// crowded but clear drawings are refused.
pub const LABEL_CHOICES: usize = 256;

/// Steps that pairing labels with loads may take (some seconds). A count. Larger: a hostile drawing keeps the program busy;
/// smaller: crowded but clear drawings are refused.
pub const PAIRING_STEPS: u64 = 100_000_000;
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

/// Furthest a chain of arcs may stray from the true middle line of a ring, as part of the length of the line: a fifth of a
/// micrometre over twenty metres, far below what a drawing means.
pub const MIDDLE_LINE: f64 = 1e-8;

/// Furthest the depth read from a table may stray from the true depth of a ring, as part of it: a few micrometres.
pub const RING_DEPTH: f64 = 1e-5;

/// Halvings of an eighth of a ring before its middle line is taken as it is: pieces of a thirty-thousandth of the length.
pub const MIDDLE_HALVINGS: u32 = 12;

/// Most pieces of a middle line: a survey with a point every few millimetres stays within it.
pub const MIDDLE_PIECES: usize = 4000;

/// Arcs whose centres and radii agree to this part of the length of the ring are one arc.
pub const ONE_ARC: f64 = 1e-9;

/// Depth of a ring, as part of its length, below which its two lines are taken to touch.
pub const NO_DEPTH: f64 = 1e-6;

/// Distance of a drawn axis from the middle of the ring, as part of the depth, from which on it is told.
pub const OFF_MIDDLE: f64 = 0.005;

/// Angle in radians between the drawn end of a ring and the joint normal to its axis from which on it is told: five
/// degrees.
pub const END_SKEW: f64 = 0.09;
/// Offset, as a part of the span, below which a line counts as lying on the axis where offsets are drawn. Larger: small
/// offsets get no diagram of their own; smaller: rounding is drawn thousands of times as large.
pub const OFFSET_SHOWN: f64 = 1e-6;

/// Error below which a report says only that it is smaller: the digits beyond are rounding and differ between machines.
pub const SHOWN_ERROR: f64 = 1e-12;

/// Distance, as a part of its extent, within which arcs stand for a curve that is none (spline, ellipse, arc under unequal
/// scales). No unit. Larger: eccentricities of a fraction of a millimetre in 100 m come from the fit; smaller: thousands of
/// arcs, and nothing that the numbers of a drawing hold.
pub const CURVE_FIT: f64 = 1e-9;

/// Places at which the distance of the arcs from the curve is measured on every part, its ends counted as one. A count.
/// Larger: reading takes longer; smaller: a bulge between two places is missed.
pub const FIT_PROBES: u32 = 8;

/// Halvings of a curve after which it is given up (a cusp, a place where it stands still). A count. Larger: hostile splines
/// take long; smaller: sharply bent ones are refused.
pub const FIT_HALVINGS: u32 = 14;

/// Knots and points of a spline above which it is refused. A count. Larger: reading it takes long; smaller: splines fitted
/// to a survey are refused.
pub const MOST_KNOTS: usize = 100_000;

/// Part by which the scales of a block may differ and its arcs still stay arcs. No unit. Larger: arcs are read as circles
/// that are none; smaller: scales rounded by the format make thousands of pieces.
pub const EQUAL_SCALES: f64 = 1e-12;

/// Depth of blocks in blocks above which they are refused. A count. Larger: hostile drawings use up the stack; smaller:
/// deeply nested details are refused.
pub const DEEPEST_BLOCK: usize = 64;

/// Entities and references that blocks may bring into a drawing, arrays counted out. A count. Larger: blocks that hold one
/// another many times over use up memory and minutes; smaller: large arrays of posts are refused.
pub const MOST_PLACED: usize = 200_000;
/// The same where the strength is finite and the law is curved. Larger: the 1e-7 owed for conic programs is lost; smaller:
/// tangents without end.
pub const CONE_SLACK: f64 = 1e-11;

/// Logarithm of the line's share of the depth at which the search for the least thickness ends. Larger: digits of the
/// thickness are lost; smaller: steps that only see rounding.
pub const THICKNESS: f64 = 1e-13;
/// Distance between two places or lengths of two revisions, m, up to which they are one. Larger: a drafter's correction
/// goes unseen; smaller: the rounding of a program that saved the drawing again counts as a change.
pub const REVISION_LENGTH: f64 = 1e-6;

/// Difference of two figures of two revisions, relative to their size (or to the load they stand beside), up to which
/// they are one. As above.
pub const REVISION_RELATIVE: f64 = 1e-6;

/// Part of the span up to which a load without a name of its own may have moved and still be the same load. Larger: two
/// loads of a close row are taken for one that moved; smaller: a load pushed aside a little counts as gone and new.
pub const REVISION_NEAR: f64 = 0.01;

/// Relative change of the worst values of a moving load at which the distance of its positions is not halved any more all
/// along. Larger: a peak between two positions is missed; smaller: positions that bring nothing.
pub const STEP_CHANGE: f64 = 1e-4;

/// The same about the worst positions. Larger: digits of the worst values are lost; smaller: positions that bring nothing.
pub const STEP_FINE: f64 = 1e-7;

/// Part of the span within which two posts are one, and a post stands at a springing. Larger: narrow posts of a pair are
/// one; smaller: a post drawn a hair beside the springing leaves a deck span of a hair.
pub const ONE_POST: f64 = 1e-6;

/// Least cosine of the slope of a road beyond its drawn end. Larger: true slopes are flattened; smaller: a road drawn with
/// an upright end runs to infinity.
pub const STEEP_ROAD: f64 = 0.1;
/// How far the rise of a suggested axis may miss that of the drawn one, relative to the span. Larger: the suggestion is not
/// the funicular of the stated rise; smaller: leaning loads take more steps than rounding allows.
pub const SUGGESTED_RISE: f64 = 1e-10;

/// Relative accuracy of the least depth that meets the limits. Larger: more depth is suggested than is needed; smaller: more
/// runs of the whole check.
pub const SUGGESTED_DEPTH: f64 = 1e-3;
/// Greatest angle of a line from the vertical at which a load drawn without an arrowhead acts downward, radians (30°). Larger:
/// raking pushes turn into weights; smaller: leaning posts of a deck do not act downward.
pub const NEARLY_UPRIGHT: f64 = std::f64::consts::FRAC_PI_6;

/// Part of the length of an arrow within which the strokes of its head lie. No unit. Larger: loads that meet in a point are
/// taken for heads; smaller: stubby arrows have none.
pub const HEAD_PART: f64 = 0.5;

/// Least and greatest angle between an arrow and a stroke of its head, radians (5° and 60°). Wider: loads that meet in a point
/// are taken for heads; narrower: slim and broad heads are not seen.
pub const HEAD_ANGLES: [f64; 2] = [0.087_266_462_599_716_48, 1.047_197_551_196_597_7];

/// By how much the two strokes of a head may differ, as a part of their length. No unit. Larger: loads that meet in a point are
/// taken for heads; smaller: heads drawn by hand are not seen.
pub const HEAD_EVEN: f64 = 0.1;

/// How far a head may stand off its arrow, as a part of the head. No unit. Larger: heads of neighbours are taken; smaller: heads
/// set by eye are not seen.
pub const HEAD_OFF: f64 = 0.02;

/// How far the points of a line may lie beside it, as a part of its length, and the line is straight all the same. No unit.
/// Larger: bent lines are taken for arrows; smaller: straight ones with rounded coordinates are not.
pub const STRAIGHT_LINE: f64 = 1e-6;

/// Distance from a post within which a load stands on it, as a part of the longest post. No unit. Larger: loads between posts are
/// carried by one; smaller: loads set by eye are not.
pub const ON_POST: f64 = 0.02;

/// How far a post may end off the rib, as a part of the post's length. No unit. Larger: columns beside the arch are taken for
/// posts; smaller: posts drawn to the face of a slab are not.
pub const POST_REACH: f64 = 0.1;

/// The same where no depth of the rib is known, from the axis. No unit. Larger and smaller as above.
pub const POST_REACH_BLIND: f64 = 0.25;

/// Distance along a dimension, as a part of the span, within which its point stands at a springing, the crown or a face of the
/// ring. No unit. Larger: dimensions of other parts are taken for the arch's; smaller: those of an older shape are passed over.
pub const DIMENSION_NEAR: f64 = 0.02;

/// The same across a dimension, whose lines often begin off what they measure. No unit. Larger and smaller as above.
pub const DIMENSION_BESIDE: f64 = 0.15;

/// Least part of the depth of the ring that a dimension across it must show to be square to it. No unit. Larger: dimensions at the
/// springings drawn by eye are passed over; smaller: slanting ones are taken for the depth.
pub const DIMENSION_SQUARE: f64 = 0.99;

/// Largest drawing, bytes, in which title block, dimensions and notes about the scale are looked for: all blocks and texts have to be
/// kept for that. Larger: more memory; smaller: the sheet number of large drawings is not found.
pub const SURROUNDINGS: u64 = 64 << 20;
/// Steps of the walk through the slabs of an outline (edges open at each upright cut, summed) above which it is given up. A
/// count. Larger: hostile outlines take minutes; smaller: finely surveyed ones are refused.
pub const SLAB_STEPS: usize = 40_000_000;

/// Part of an outline's extent by which two of its edges must change sides to count as crossing. No unit. Larger: a loop of a
/// few millimetres goes unsaid; smaller: outlines that share an edge within rounding are told to cross.
pub const OUTLINE_CROSSES: f64 = 1e-7;

/// Crossings of one outline that are looked for. A count. Larger: a scribble fills the findings; smaller: the one that is told
/// may be the least of them.
pub const CROSSINGS_TOLD: usize = 16;

/// Pieces that a continuous ring is cut into for the weight upon it. A count, even, so that the crown of a symmetrical ring is a
/// joint of two. The weight of each piece enters in its middle, so between joints the line of thrust lies outside its true
/// curve by `f / (2 n²)` of a parabola of rise `f`. Larger: time for nothing that is built; smaller: millimetres.
pub const FILL_PIECES: u32 = 160;

/// Part of the whole by which the sum of the weighed pieces may miss it. No unit. Larger: weight is lost unseen; smaller:
/// rounding of large coordinates is told as a fault.
pub const AREA_RESIDUAL: f64 = 1e-9;

/// Part of the smaller of two outlines from which on their overlap is told, and up to which one counts as lying within the
/// other. No unit. Larger: strips counted twice go unsaid; smaller: neighbours drawn edge to edge are told to overlap.
pub const AREA_OVERLAP: f64 = 1e-6;

/// Part of an area under the extrados from which on a run is not judged. No unit. Larger: a part of the ring weighs twice in
/// silence; smaller: chords drawn along a curved extrados keep a drawing from being judged.
pub const AREA_UNDER: f64 = 0.01;

/// Rise over span above which fill that is not said to press sideways is worth a warning. No unit. From the trade's view that
/// sideways pressure matters little on flat arches.
pub const STEEP_FILLED: f64 = 0.25;

/// Straight pieces from which on a line counts as drawn point by point. A count. Larger: short surveys go without a word on
/// their noise; smaller: too few points to tell noise from shape.
pub const NOISE_POINTS: usize = 16;

/// Twice the noise over the depth from which on it is told. No unit. Larger: noise that moves a factor by a percent goes unsaid;
/// smaller: the rounding of coordinates is told.
pub const NOISE_TOLD: f64 = 1e-3;
/// Part of the largest figure of a column below which a figure is shown as 0. A ratio. Larger: small figures that mean
/// something vanish; smaller: what rounding leaves of nothing is shown.
pub const SHOWN_AS_NOTHING: f64 = 1e-9;
