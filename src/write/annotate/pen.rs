//! Layers, line types, and the canvas on which marks are collected.

use crate::geometry::{Point, Vec2};
use crate::tags::marks::{Across, Along, LineType, Mark, MarkLayer, Shape};
use crate::write::annotate::place::{Box2, Taken};
use crate::write::text::plain;

/// What a layer shows. The order is that of the layers made.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Layer {
    /// The governing line of thrust.
    Line,
    /// Other lines of thrust.
    OtherLines,
    /// Ring lines and joints of the depth that was computed with.
    Ring,
    /// The middle third.
    Kern,
    /// Offset ticks and their figures.
    Offsets,
    /// The offset diagram.
    OffsetDiagram,
    /// The force polygon.
    Forces,
    /// Bow's letters in the elevation.
    Letters,
    /// The thrust at the abutments.
    Reactions,
    /// Limits that do not hold.
    Flags,
    /// Note block, key and sign sketch.
    Notes,
    /// Envelope and worst position of traffic.
    Traffic,
    /// The suggested axis.
    Suggested,
    /// The axis; drawn in pictures only, a marked copy has its own.
    Axis,
    /// The loads; drawn in pictures only, as the axis.
    Loads,
}

/// Name after the prefix, colour, line type, weight in hundredths of a millimetre. The module docs of `annotate` tell
/// the colours by name.
const LAYERS: [(Layer, &str, u8, Option<Dash>, i16); 13] = [
    (Layer::Line, "LINE", 142, None, 50),
    (Layer::OtherLines, "OTHER-LINES", 252, None, 25),
    (Layer::Ring, "RING", 8, None, 9),
    (Layer::Kern, "KERN", 8, Some(Dash::Dots), 13),
    (Layer::Offsets, "OFFSETS", 213, None, 13),
    (Layer::OffsetDiagram, "OFFSET-DIAGRAM", 142, None, 25),
    (Layer::Forces, "FORCES", 122, None, 25),
    (Layer::Letters, "LETTERS", 122, None, 18),
    (Layer::Reactions, "REACTIONS", 42, None, 35),
    (Layer::Flags, "FLAGS", 20, None, 35),
    (Layer::Notes, "NOTES", 7, None, 18),
    (Layer::Traffic, "TRAFFIC", 42, None, 25),
    (Layer::Suggested, "SUGGESTED-AXIS", 142, Some(Dash::TwoDots), 35),
];

/// A kind of broken line.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Dash {
    /// Long dashes.
    Long,
    /// Short dashes.
    Short,
    /// Dash and dot.
    Dot,
    /// Dash and two dots.
    TwoDots,
    /// Dots only.
    Dots,
}

/// Name after the prefix, description, and pattern in text heights. Dots are short dashes: viewers differ on dots of no
/// length.
pub const DASHES: [(Dash, &str, &str, &[f64]); 5] = [
    (Dash::Long, "LONG", "Long dashes", &[2.4, -0.8]),
    (Dash::Short, "SHORT", "Short dashes", &[0.9, -0.6]),
    (Dash::Dot, "DOT", "Dash and dot", &[2.0, -0.5, 0.2, -0.5]),
    (Dash::TwoDots, "TWODOTS", "Dash and two dots", &[2.0, -0.5, 0.2, -0.5, 0.2, -0.5]),
    (Dash::Dots, "DOTS", "Dots", &[0.2, -0.5]),
];

/// Width of the governing line in text heights: 0.4 mm on a plot with text of 2.5 mm, between an ordinary line and the
/// 0.5 mm of its layer's line weight, which viewers that know line widths take in its place.
const HEAVY: f64 = 0.16;

/// The layers to be made. That of the suggested axis, the last, is switched off, and left out where nothing is suggested.
pub fn layers(prefix: &str, frozen: bool, suggested: bool) -> Vec<MarkLayer> {
    LAYERS
        .iter()
        .filter(|row| suggested || row.0 != Layer::Suggested)
        .map(|&(layer, name, colour, dash, weight)| MarkLayer {
            name: format!("{prefix}{name}").to_ascii_uppercase(),
            colour,
            line_type: dash.map(|d| d as usize),
            weight: Some(weight),
            frozen,
            off: layer == Layer::Suggested,
        })
        .collect()
}

/// The line types to be made, for text of height `h`.
pub fn line_types(prefix: &str, h: f64) -> Vec<LineType> {
    DASHES
        .iter()
        .map(|&(_, name, description, pattern)| LineType {
            name: format!("{prefix}{name}").to_ascii_uppercase(),
            description: description.to_owned(),
            pattern: pattern.iter().map(|p| p * h).collect(),
        })
        .collect()
}

/// Collects marks and remembers what room they take.
#[derive(Debug)]
pub struct Canvas {
    /// Text height, drawing units.
    pub h: f64,
    /// What was drawn.
    pub marks: Vec<Mark>,
    /// What is taken.
    pub taken: Taken,
    /// Whether lengths can be told in drawing units, as in a drawing; a picture has none.
    pub has_units: bool,
    low: Point,
    high: Point,
}

impl Canvas {
    /// An empty canvas with text of height `h`.
    pub fn new(h: f64) -> Self {
        Self {
            h,
            marks: Vec::new(),
            taken: Taken::default(),
            has_units: true,
            low: Point::new(f64::INFINITY, f64::INFINITY),
            high: Point::new(f64::NEG_INFINITY, f64::NEG_INFINITY),
        }
    }

    /// Lower left and upper right corner of all that was drawn; `None` when nothing was.
    pub fn extent(&self) -> Option<(Point, Point)> {
        (self.low.x <= self.high.x).then_some((self.low, self.high))
    }

    fn cover(&mut self, points: &[Point]) {
        for p in points {
            self.low = Point::new(self.low.x.min(p.x), self.low.y.min(p.y));
            self.high = Point::new(self.high.x.max(p.x), self.high.y.max(p.y));
        }
    }

    fn push(&mut self, layer: Layer, role: &str, shape: Shape, dash: Option<Dash>) {
        self.marks.push(Mark {
            layer: layer as usize,
            role: role.to_owned(),
            shape,
            colour: None,
            line_type: dash.map(|d| d as usize),
            width: None,
        });
    }

    /// A straight line.
    pub fn line(&mut self, layer: Layer, role: &str, a: Point, b: Point) {
        self.dashed(layer, role, a, b, None);
    }

    /// A straight line with a line type of its own.
    pub fn dashed(&mut self, layer: Layer, role: &str, a: Point, b: Point, dash: Option<Dash>) {
        // A line of no length or with no place cannot be drawn.
        if a == b || !(a.is_finite() && b.is_finite()) {
            return;
        }
        self.cover(&[a, b]);
        self.push(layer, role, Shape::Line(a, b), dash);
    }

    /// A chain of straight pieces.
    pub fn chain(&mut self, layer: Layer, role: &str, points: &[Point], dash: Option<Dash>) {
        let mut points: Vec<Point> = points.iter().copied().filter(|p| p.is_finite()).collect();
        points.dedup();
        if points.len() < 2 {
            return;
        }
        self.cover(&points);
        let points = points.into_iter().map(|p| (p, 0.0)).collect();
        let shape = Shape::Polyline { points, closed: false };
        self.push(layer, role, shape, dash);
    }

    /// The same with a width, which stands for the line weight where there is none.
    pub fn heavy(&mut self, layer: Layer, role: &str, points: &[Point]) {
        let before = self.marks.len();
        self.chain(layer, role, points, None);
        let width = HEAVY * self.h;
        self.marks.iter_mut().skip(before).for_each(|mark| mark.width = Some(width));
    }

    /// A frame by two corners.
    pub fn frame(&mut self, layer: Layer, role: &str, a: Point, b: Point) {
        self.cover(&[a, b]);
        let points = [a, Point::new(b.x, a.y), b, Point::new(a.x, b.y)];
        let shape = Shape::Polyline { points: points.into_iter().map(|p| (p, 0.0)).collect(), closed: true };
        self.push(layer, role, shape, None);
    }

    /// An arc by its ends and bulge.
    pub fn arc(&mut self, layer: Layer, role: &str, a: Point, b: Point, bulge: f64) {
        self.cover(&[a, b]);
        let shape = Shape::Polyline { points: vec![(a, bulge), (b, 0.0)], closed: false };
        self.push(layer, role, shape, None);
    }

    /// A circle.
    pub fn circle(&mut self, layer: Layer, role: &str, centre: Point, radius: f64) {
        if !centre.is_finite() {
            return;
        }
        let r = Vec2::new(radius, radius);
        self.cover(&[centre - r, centre + r]);
        self.taken.boxes.push(Box2::upright(centre - r, centre + r));
        self.push(layer, role, Shape::Circle(centre, radius), None);
    }

    /// An arrow from `tail` to `tip` with a slim filled head.
    pub fn arrow(&mut self, layer: Layer, role: &str, tail: Point, tip: Point) {
        let along = tip - tail;
        let length = along.hypot();
        if length.partial_cmp(&0.0) != Some(std::cmp::Ordering::Greater) {
            return;
        }
        let u = along / length;
        let head = (1.8 * self.h).min(length / 2.0);
        let back = tip - u * head;
        let side = Vec2::new(-u.y, u.x) * (head / 5.0);
        self.line(layer, role, tail, back);
        self.triangle(layer, role, [tip, back + side, back - side]);
    }

    /// A filled triangle.
    pub fn triangle(&mut self, layer: Layer, role: &str, corners: [Point; 3]) {
        if corners.iter().all(|p| p.is_finite()) {
            self.cover(&corners);
            self.push(layer, role, Shape::Triangle(corners), None);
        }
    }

    /// A line of text, put down wherever it is told to be.
    pub fn text(&mut self, layer: Layer, role: &str, text: &Words) {
        if text.text.is_empty() || !text.at.is_finite() {
            return;
        }
        let covered = text.covered();
        self.cover(&covered.corners());
        self.taken.boxes.push(covered);
        let shape = Shape::Text {
            at: text.at,
            height: text.height,
            text: plain(&text.text),
            angle: text.angle,
            across: text.across,
            along: text.along,
        };
        self.push(layer, role, shape, None);
    }

    /// Puts a text at the first place of several where it touches nothing and its leader crosses no text; `None` when
    /// there is none, and then nothing is drawn. The leader itself is left to the caller, who gets it back.
    pub fn place(
        &mut self,
        layer: Layer,
        role: &str,
        places: impl IntoIterator<Item = (Words, Leader)>,
    ) -> Option<(Words, Leader)> {
        let room = 0.3 * self.h;
        for (words, leader) in places {
            let clear = leader.is_none_or(|(a, b)| self.is_clear(a, b));
            if clear && self.taken.is_free(&words.covered(), room) {
                self.text(layer, role, &words);
                if let Some((a, b)) = leader {
                    self.taken.lines.push((a, b));
                }
                return Some((words, leader));
            }
        }
        None
    }

    /// Whether a leader keeps a little off all texts, but for its very beginning, where its own symbol stands.
    fn is_clear(&self, a: Point, b: Point) -> bool {
        let length = (b - a).hypot();
        let start = (0.5 * self.h).min(length);
        let from = if length > 0.0 { a + (b - a) * (start / length) } else { a };
        !self.taken.boxes.iter().any(|t| t.grown(0.25 * self.h).meets(from, b))
    }

    /// Puts a block of lines, left-aligned or right-aligned, at the first free place of its upper corner.
    pub fn place_block(
        &mut self,
        layer: Layer,
        role: &str,
        lines: &[String],
        places: impl IntoIterator<Item = (Point, Across)>,
    ) -> Option<Box2> {
        let room = 0.4 * self.h;
        for (corner, across) in places {
            let words = block(lines, corner, across, self.h);
            let first = words.first()?;
            let (mut low, mut high) = (first.at, first.at);
            for corner in words.iter().flat_map(|w| w.covered().corners()) {
                low = Point::new(low.x.min(corner.x), low.y.min(corner.y));
                high = Point::new(high.x.max(corner.x), high.y.max(corner.y));
            }
            let covered = Box2::upright(low, high);
            if self.taken.is_free(&covered, room) {
                for w in &words {
                    self.text(layer, role, w);
                }
                return Some(covered);
            }
        }
        None
    }
}

/// A line that ties a text to what it belongs to.
pub type Leader = Option<(Point, Point)>;

/// Distance of baselines, in text heights.
pub const LEADING: f64 = 1.7;

/// A block of lines below its upper corner.
fn block(lines: &[String], corner: Point, across: Across, h: f64) -> Vec<Words> {
    let mut y = corner.y;
    lines
        .iter()
        .map(|line| {
            let words = Words::new(line, Point::new(corner.x, y), h).across(across).along(Along::Top);
            y -= LEADING * h;
            words
        })
        .collect()
}

/// A line of text with its place.
#[derive(Debug, Clone, PartialEq)]
pub struct Words {
    /// The text.
    pub text: String,
    /// Insertion point.
    pub at: Point,
    /// Height of the capitals.
    pub height: f64,
    /// Radians counter-clockwise.
    pub angle: f64,
    /// Horizontal justification.
    pub across: Across,
    /// Vertical justification.
    pub along: Along,
}

impl Words {
    /// Level text that begins at `at`.
    pub fn new(text: impl Into<String>, at: Point, height: f64) -> Self {
        Self { text: text.into(), at, height, angle: 0.0, across: Across::Left, along: Along::Baseline }
    }

    /// Turned by so many radians.
    #[must_use]
    pub fn turned(mut self, angle: f64) -> Self {
        self.angle = angle;
        self
    }

    /// With horizontal justification.
    #[must_use]
    pub fn across(mut self, across: Across) -> Self {
        self.across = across;
        self
    }

    /// With vertical justification.
    #[must_use]
    pub fn along(mut self, along: Along) -> Self {
        self.along = along;
        self
    }

    /// Centred on its place.
    #[must_use]
    pub fn centred(self) -> Self {
        self.across(Across::Centre).along(Along::Middle)
    }

    /// The box it covers.
    pub fn covered(&self) -> Box2 {
        Box2::of_text(self.at, self.height, &plain(&self.text), self.angle, self.across, self.along)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn tables_stand_in_the_order_of_their_enums() {
        for (i, row) in LAYERS.iter().enumerate() {
            assert_eq!(row.0 as usize, i);
        }
        for (i, row) in DASHES.iter().enumerate() {
            assert_eq!(row.0 as usize, i);
        }
    }
}
