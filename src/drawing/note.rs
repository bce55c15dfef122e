//! What the reader noticed: facts, worded elsewhere.

use super::entity::Source;
use super::unit::{NoUnit, UnitSource};
use crate::tags;
use crate::units::LengthUnit;

/// What a layer serves as.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Role {
    /// Axis of the rib.
    Axis,
    /// Loads and their labels.
    Loads,
    /// The inner line of the ring.
    Intrados,
    /// The outer line of the ring.
    Extrados,
    /// Hinges of the rib.
    Hinges,
    /// The line that traffic runs on.
    Road,
    /// Spandrel posts.
    Posts,
    /// The roadway in plan.
    Plan,
    /// Outlines of what weighs.
    Areas,
}

impl Role {
    /// Its key in `[layers]`.
    pub fn key(self) -> &'static str {
        match self {
            Self::Axis => "axis",
            Self::Loads => "loads",
            Self::Intrados => "intrados",
            Self::Extrados => "extrados",
            Self::Hinges => "hinges",
            Self::Road => "road",
            Self::Posts => "posts",
            Self::Plan => "plan",
            Self::Areas => "area",
        }
    }
}

/// Why a layer was guessed to serve a role.
#[derive(Debug, Clone, PartialEq)]
pub enum Reason {
    /// A word in its name.
    Word(&'static str),
    /// It holds one line from springing to springing, and nothing else does so as widely. Span and rise in drawing
    /// units.
    OneLine {
        /// Horizontal distance of its ends.
        span: f64,
        /// Height of its crown over (below: negative) its ends.
        rise: f64,
    },
    /// So many of its points stand over the axis.
    PointsOver {
        /// Those that do.
        over: usize,
        /// All of them.
        of: usize,
    },
}

/// One thing noticed.
#[derive(Debug, Clone, PartialEq)]
pub enum Note {
    /// Something about the file as such: its encoding, its end.
    File(tags::Note),
    /// A layer was guessed, because the job names none.
    LayerGuessed {
        /// What it serves as.
        role: Role,
        /// The layer.
        layer: String,
        /// Why.
        reason: Reason,
    },
    /// No layer of loads was found.
    NoLoadLayer,
    /// The layer is frozen or switched off, and was read all the same.
    LayerHidden {
        /// The layer.
        layer: String,
        /// Frozen (else switched off).
        frozen: bool,
    },
    /// Entities on the layer of a role that are not read.
    PassedOver {
        /// The role of their layer.
        role: Role,
        /// Their layer.
        layer: String,
        /// Their type.
        kind: String,
        /// How many.
        count: u64,
        /// True when the type could stand for a load (a drawn arrow).
        could_be_load: bool,
        /// The first of them.
        first: Option<Source>,
    },
    /// Entities of a role's layer that stand in paper space, where nothing counts.
    PaperSpace {
        /// The layer.
        layer: String,
        /// How many.
        count: u64,
    },
    /// A block whose references are loads themselves holds entities on the layer of a role; they are not read again.
    InBlock {
        /// The role.
        role: Role,
        /// The block.
        block: String,
        /// The layer.
        layer: String,
        /// How many.
        count: u64,
    },
    /// A layer carries the name of a part that is not read (ring lines, posts, …).
    PartNotRead {
        /// Its key in `[layers]`.
        part: &'static str,
        /// The layer.
        layer: String,
        /// How many entities it holds.
        count: u64,
    },
    /// The drawing states no usable unit, and this one was assumed.
    UnitAssumed {
        /// The unit.
        unit: LengthUnit,
        /// Why one had to be assumed.
        why: NoUnit,
        /// What it was assumed from.
        source: UnitSource,
        /// Horizontal extent of the axis, drawing units, which decided.
        width: f64,
    },
    /// The axis lies in a plane other than the drawing's x-y plane, which the job does not state.
    PlaneGuessed {
        /// Its name.
        plane: String,
    },
    /// Arcs stand for a curve that is none.
    CurveFitted {
        /// The curve.
        source: Source,
        /// How many.
        pieces: usize,
    },
    /// `[title]` names a tag that no title block has.
    TitleMissing {
        /// Its key in `[title]`.
        key: &'static str,
        /// The tag or pattern.
        pattern: String,
    },
    /// Title blocks say different things.
    TitleUnclear {
        /// Of what.
        what: &'static str,
        /// Its key in `[title]`.
        key: &'static str,
        /// What they say.
        values: Vec<String>,
    },
    /// Texts say that the drawing is not to scale.
    NotToScale {
        /// The first of them.
        source: Source,
        /// What it says.
        text: String,
        /// How many.
        count: usize,
    },
    /// The drawing is too large for its title block, dimensions and notes to be looked for.
    SurroundingsNotRead,
    /// The layouts have viewports, and none shows the whole axis: the marks are seen in model space.
    NotInLayouts {
        /// Viewports square onto the elevation.
        viewports: usize,
        /// Those of them that show a part of the axis.
        part: usize,
    },
}
