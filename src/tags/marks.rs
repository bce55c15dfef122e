//! Neutral marks: what is to be added to a drawing, with no knowledge of what it means.
//!
//! Callers say what to draw in drawing units; the tag layer turns it into records in the version, form, encoding and
//! newline of the drawing at hand.

use crate::geometry::Point;

/// The plane in which marks are drawn. Marks have two coordinates; the plane says where they lie in the drawing.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Plane {
    /// Direction of the first mark coordinate, a unit vector in drawing coordinates.
    pub right: [f64; 3],
    /// Direction of the second mark coordinate, a unit vector square to `right`.
    pub up: [f64; 3],
    /// The drawing point that has mark coordinates (0, 0).
    pub origin: [f64; 3],
}

impl Plane {
    /// The ordinary elevation: x to the right, y upward, at z = 0.
    pub const XY: Self = Self { right: [1.0, 0.0, 0.0], up: [0.0, 1.0, 0.0], origin: [0.0, 0.0, 0.0] };

    /// Whether marks lie in the drawing's own x-y plane, the right way up (at any height).
    #[allow(clippy::float_cmp)] // Either it was never turned, and is this to the bit, or it is another plane.
    pub fn is_flat(&self) -> bool {
        self.right == Self::XY.right && self.up == Self::XY.up
    }
}

/// A line type of dashes, gaps and dots.
#[derive(Debug, Clone, PartialEq)]
pub struct LineType {
    /// Name of its record, upper case ASCII, no blanks.
    pub name: String,
    /// What it shows, for people: ASCII.
    pub description: String,
    /// Lengths in drawing units: positive a dash, negative a gap, zero a dot.
    pub pattern: Vec<f64>,
}

/// A layer to be made.
#[derive(Debug, Clone, PartialEq)]
pub struct MarkLayer {
    /// Name of the layer, upper case ASCII, no blanks.
    pub name: String,
    /// Colour number, 1 to 255.
    pub colour: u8,
    /// Index into [`Marks::line_types`]; `None` for a continuous line.
    pub line_type: Option<usize>,
    /// Line weight in hundredths of a millimetre (one of the format's values), R2000 on; `None` for the default.
    pub weight: Option<i16>,
    /// Made frozen.
    pub frozen: bool,
    /// Made switched off.
    pub off: bool,
}

/// Where the insertion point of a text lies, left to right.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Across {
    /// At the left end of the text.
    #[default]
    Left,
    /// In its middle.
    Centre,
    /// At its right end.
    Right,
}

/// Where the insertion point of a text lies, bottom to top.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Along {
    /// On the baseline.
    #[default]
    Baseline,
    /// Half way up the capitals.
    Middle,
    /// At the top of the capitals.
    Top,
}

/// A shape to be drawn. All lengths in drawing units, in the coordinates of the mark plane.
#[derive(Debug, Clone, PartialEq)]
pub enum Shape {
    /// A straight line.
    Line(Point, Point),
    /// A chain of straight and bulged pieces; the bulge belongs to the piece that begins at its point.
    Polyline {
        /// Points with the bulge of the piece that follows.
        points: Vec<(Point, f64)>,
        /// Whether the last point is joined to the first.
        closed: bool,
    },
    /// A circle by centre and radius.
    Circle(Point, f64),
    /// A filled triangle.
    Triangle([Point; 3]),
    /// One line of text.
    Text {
        /// Insertion point.
        at: Point,
        /// Height of the capitals.
        height: f64,
        /// Any text; what the drawing's encoding lacks is escaped as the format says.
        text: String,
        /// Radians counter-clockwise.
        angle: f64,
        /// Horizontal justification.
        across: Across,
        /// Vertical justification.
        along: Along,
    },
}

/// One thing to be drawn.
#[derive(Debug, Clone, PartialEq)]
pub struct Mark {
    /// Index into [`Marks::layers`].
    pub layer: usize,
    /// What it is, for those who take it out or check it: short ASCII, kept in the extended data, such as `line`.
    pub role: String,
    /// What is drawn.
    pub shape: Shape,
    /// Colour number when it differs from the layer's.
    pub colour: Option<u8>,
    /// Line type when it differs from the layer's: an index into [`Marks::line_types`].
    pub line_type: Option<usize>,
    /// Constant width of a polyline, drawing units, for versions and viewers without line weights; other shapes, and
    /// polylines that do not lie level in x and y, have none.
    pub width: Option<f64>,
}

/// All that is added to a drawing in one go.
#[derive(Debug, Clone, PartialEq)]
pub struct Marks {
    /// Name of the registered application under which all of it is marked as ours.
    pub application: String,
    /// The plane the marks lie in.
    pub plane: Plane,
    /// Line types to make.
    pub line_types: Vec<LineType>,
    /// Layers to make, all of them, used or not.
    pub layers: Vec<MarkLayer>,
    /// What to draw, in drawing order.
    pub marks: Vec<Mark>,
    /// Facts kept in the extended data of every layer made, as `(key, value)`: short ASCII keys such as `sha256`,
    /// `tool`, `job`, `verdict`. The tag layer adds its own (`marks`, `seed`, `newline`, `made`).
    pub facts: Vec<(String, String)>,
}
