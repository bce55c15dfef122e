//! What was noticed while the model was built: facts, worded elsewhere.

use super::drawn::Drawn;
use super::figures::NoFigure;
use crate::drawing::Source;
use crate::geometry::Point;
use crate::units::ForceUnit;

/// One thing noticed. Points and lengths in m, in the drawing's origin, unless a field says otherwise.
#[derive(Debug, Clone, PartialEq)]
pub enum Note {
    /// A gap in the axis or a ring line was closed with a straight piece.
    GapClosed {
        /// The line: axis, intrados or extrados.
        line: &'static str,
        /// Name of the span.
        span: String,
        /// Its width, m.
        size: f64,
        /// Its left end, m.
        at: Point,
    },
    /// The axis was found midway between the ring lines.
    AxisMidway {
        /// Name of the span.
        span: String,
        /// Pieces of the axis.
        pieces: usize,
        /// Furthest that they were found to stray from the true middle line, m.
        stray: f64,
    },
    /// The ring ends in a face that is not square to its axis; its end joint was taken square.
    EndsSkew {
        /// Name of the span.
        span: String,
        /// Greatest angle between face and joint, radians.
        angle: f64,
    },
    /// The drawn axis does not run midway in the ring; the depth counts to the nearer line.
    AxisOffMiddle {
        /// Name of the span.
        span: String,
        /// Greatest distance from the middle, m.
        by: f64,
        /// Where, m.
        at: Point,
    },
    /// An axis curve was drawn over another one, which was kept.
    DrawnTwice {
        /// The curve passed over.
        source: Source,
        /// The curve kept.
        kept: Source,
    },
    /// An axis curve has a piece of no length, passed over.
    NoLength {
        /// The curve.
        source: Source,
    },
    /// A text on a load layer that is no label of a load.
    TextIgnored {
        /// The text.
        source: Source,
        /// What it says.
        text: String,
        /// Why it is none.
        why: NoFigure,
    },
    /// A text with a figure that belongs to no load: too far from all, or they have nearer ones.
    LabelUnused {
        /// The text.
        source: Source,
        /// What it says.
        text: String,
        /// Distance to the nearest load, m; `None` without loads.
        nearest: Option<f64>,
        /// How far from a load it would have been taken, m.
        reach: f64,
    },
    /// A label that could nearly as well belong to another load.
    LabelDoubtful {
        /// The label.
        label: Source,
        /// What it says.
        text: String,
        /// The load it was given to.
        load: Source,
        /// The load it could belong to.
        other: Source,
        /// By how much the sum of all distances grows with the other pairing, drawing units.
        increase: f64,
    },
    /// Attributes of a load hold several figures, and none of them says that it is the force.
    AttributesUnclear {
        /// The load.
        source: Source,
        /// Tags with figures.
        tags: Vec<String>,
    },
    /// Two or more marks of one load at one place, counted once.
    MarkedTwice {
        /// The mark passed over.
        source: Source,
        /// The mark kept.
        kept: Source,
    },
    /// Something about loads as they are drawn.
    Drawn(Drawn),
    /// No figure anywhere: all loads are equal, and forces are multiples of one of them.
    LoadsEqual {
        /// How many loads there are.
        count: usize,
    },
    /// Loads without a figure of their own got the job's.
    Unlabelled {
        /// The loads.
        sources: Vec<Source>,
        /// The force they got, kN.
        force: f64,
    },
    /// Figures stand without a unit, and the job states none: this unit was taken.
    ForceUnitAssumed {
        /// The unit.
        unit: ForceUnit,
        /// How many figures.
        count: usize,
        /// Whether other labels of the drawing show it.
        from_labels: bool,
    },
    /// A load that stands over no span.
    OffSpan {
        /// The load.
        source: Source,
        /// Its name.
        label: String,
        /// Where it stands, m.
        at: Point,
        /// Its force, downward positive, kN or unit loads.
        force: f64,
    },
    /// A hinge of a span.
    HingeRead {
        /// Name of the span.
        span: String,
        /// The entity.
        source: Source,
        /// Where, m.
        at: Point,
    },
    /// A point on the hinge layer that stands on no rib.
    HingeOff {
        /// The entity.
        source: Source,
        /// Where, m.
        at: Point,
    },
    /// The haunches are solid up to a level below both ends of the ring.
    BackingIdle {
        /// Name of the span.
        span: String,
        /// The level, m.
        level: f64,
    },
    /// The ring was cut off where its haunches are solid.
    BackingTrimmed {
        /// Name of the span.
        span: String,
        /// The level, m.
        level: f64,
        /// The axis points where the working ring begins and ends, m.
        left: Point,
        /// As `left`.
        right: Point,
        /// Lengths of axis cut off on the left and on the right, m.
        off: [f64; 2],
        /// Loads on the parts cut off, left to the haunches: entity, name, force downward.
        loads: Vec<(Source, String, f64)>,
    },
    /// A span over which no load stands.
    NoLoads {
        /// Name of the span.
        span: String,
    },
    /// A span of a size that bridges do not have: the unit or the scale may be wrong.
    SizeUnlikely {
        /// Name of the span.
        span: String,
        /// Horizontal distance of its springings, m.
        size: f64,
    },
}
