//! The changes as marks in a copy of the new drawing: one layer with what moved, what is gone, and a list below.

use super::spans::{apart, path};
use super::{Change, HOLDS, What};
use crate::geometry::{Point, Vec2};
use crate::outcome::{Run, Xy};
use crate::tags::APPLICATION;
use crate::tags::marks::{Across, Along, LineType, Mark, MarkLayer, Marks, Shape};
use crate::tolerance;
use crate::write::annotate::{Sheet, free_corner};
use crate::write::text::{millimetres, wrap};

/// Colour number of the layer: vermilion, as flags are.
const COLOUR: u8 = 20;
/// Columns of the list below the drawing.
const COLUMNS: usize = 90;
/// Lines of the list at most; what is left out is counted.
const LINES: usize = 60;

/// The marks of a comparison.
pub fn marks(old: &Run, new: &Run, sheet: &Sheet, changes: &[Change]) -> Marks {
    let (corner, height) = free_corner(new, sheet);
    let mut pen = Pen { unit: 1.0 / sheet.metres_per_unit, height, marks: Vec::new() };
    axes(old, new, changes, &mut pen);
    for change in changes {
        load(change, &mut pen);
    }
    list(old, new, sheet, changes, corner, &mut pen);
    let name = |end: &str| format!("{}{end}", sheet.prefix).to_ascii_uppercase();
    let mut facts = vec![
        ("sha256".to_owned(), sheet.sha256.clone()),
        ("source".to_owned(), sheet.source_name.clone()),
        ("tool".to_owned(), format!("thrustmark {}", sheet.tool_version)),
        ("date".to_owned(), sheet.date.clone()),
        ("holds".to_owned(), HOLDS.to_owned()),
    ];
    if let Some(sha256) = &old.drawing.sha256 {
        facts.push(("compared".to_owned(), sha256.clone()));
    }
    Marks {
        application: APPLICATION.into(),
        plane: sheet.plane,
        line_types: vec![LineType {
            name: name("SHORT"),
            description: "Short dashes".into(),
            pattern: vec![0.9 * height, -0.6 * height],
        }],
        layers: vec![MarkLayer {
            name: name("CHANGES"),
            colour: COLOUR,
            line_type: None,
            weight: Some(25),
            frozen: sheet.frozen,
            off: false,
        }],
        marks: pen.marks,
        facts,
    }
}

struct Pen {
    /// Drawing units in a metre.
    unit: f64,
    /// Height of text, drawing units.
    height: f64,
    marks: Vec<Mark>,
}

impl Pen {
    fn point(&self, at: Xy) -> Point {
        Point::new(at[0] * self.unit, at[1] * self.unit)
    }

    fn add(&mut self, role: &str, shape: Shape, dashed: bool) {
        self.marks.push(Mark {
            width: None,
            layer: 0,
            role: role.into(),
            shape,
            colour: None,
            line_type: dashed.then_some(0),
        });
    }

    fn text(&mut self, role: &str, at: Point, text: &str) {
        let shape = Shape::Text {
            at,
            height: self.height,
            text: text.to_owned(),
            angle: 0.0,
            across: Across::Left,
            along: Along::Baseline,
        };
        self.add(role, shape, false);
    }
}

/// The old axis, dashed, where it moved, and the place where it moved most.
fn axes(old: &Run, new: &Run, changes: &[Change], pen: &mut Pen) {
    let moved = |name: &str| {
        changes.iter().any(|c| c.what == What::Axis && c.at.is_some() && c.span.as_deref() == Some(name))
    };
    for span in new.spans.iter().filter(|s| moved(&s.name)) {
        let Some(after) = path(&span.axis) else { continue };
        // The old axis of this span is the one from which it is the least far away.
        let nearest = old
            .spans
            .iter()
            .filter_map(|s| Some((s, apart(&path(&s.axis)?, &after))))
            .min_by(|a, b| a.1.distance.total_cmp(&b.1.distance));
        let Some((before, apart)) = nearest else { continue };
        let points = before.axis.curve.iter().map(|c| (pen.point([c[0], c[1]]), c[2])).collect();
        pen.add("old axis", Shape::Polyline { points, closed: false }, true);
        let [a, b] = [apart.old, apart.new].map(|p| pen.point([p.x, p.y]));
        if (b - a).hypot() > tolerance::REVISION_LENGTH * pen.unit {
            pen.add("moved", Shape::Line(a, b), false);
        }
        let at = b + Vec2::new(0.6, 0.6) * pen.height;
        pen.text("moved", at, &format!("axis moved {} mm", millimetres(apart.distance)));
    }
    for change in changes.iter().filter(|c| c.what == What::Span) {
        if let Some(at) = change.at {
            let at = pen.point(at) + Vec2::new(0.0, 0.6 * pen.height);
            pen.text("span", at, &change.message);
        }
    }
}

/// A ring round what is new or changed, a cross over what is gone.
fn load(change: &Change, pen: &mut Pen) {
    let Some(at) = change.at.map(|at| pen.point(at)) else { return };
    let (h, name) = (pen.height, change.name.as_deref().unwrap_or_default());
    let became = match change.what {
        What::LoadAdded => "added",
        What::LoadRemoved => "removed",
        What::LoadChanged => "changed",
        _ => return,
    };
    if change.what == What::LoadRemoved {
        for way in [Vec2::new(0.8, 0.8), Vec2::new(0.8, -0.8)] {
            pen.add("load", Shape::Line(at - way * h, at + way * h), false);
        }
    } else {
        pen.add("load", Shape::Circle(at, h), false);
    }
    pen.text("load", at + Vec2::new(1.2, 0.4) * h, &format!("{name} {became}"));
}

fn list(old: &Run, new: &Run, sheet: &Sheet, changes: &[Change], corner: Point, pen: &mut Pen) {
    let head = format!(
        "CHANGES from {} to {}, {} UTC, thrustmark {}",
        old.drawing.file, new.drawing.file, sheet.date, sheet.tool_version
    );
    let mut lines = wrap(&head, COLUMNS);
    for change in changes {
        lines.extend(wrap(&change.message, COLUMNS));
    }
    if changes.is_empty() {
        lines.push("none in axis, ring, loads, results and settings".into());
    }
    if lines.len() > LINES {
        let more = lines.len() - LINES;
        lines.truncate(LINES);
        lines.push(format!("and {more} lines more, which `thrustmark compare` prints"));
    }
    lines.push("A list of differences, no check: mark the new drawing for its results.".into());
    for (i, line) in lines.iter().enumerate() {
        let at = corner - Vec2::new(0.0, (i as f64 + 1.0) * 1.6 * pen.height);
        pen.text("list", at, line);
    }
}
