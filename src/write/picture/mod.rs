//! Pictures of a run: the elevation with axis, ring, loads and governing line, the offset diagram, and the force polygon
//! below. The same layout as on the marked sheet, with what the drawing shows by itself drawn too.

mod forces;
mod loads;
pub mod png;
pub mod svg;

pub use forces::forces;

use crate::geometry::Point;
use crate::outcome::{Run, Verdict};
use crate::tags::marks::Mark;
use crate::write::annotate::note::{CAUTION, heading};
use crate::write::annotate::pen::{Canvas, Dash, LEADING, Layer, Words};
use crate::write::annotate::shown::Shown;
use crate::write::annotate::{content, diagram, elevation, note, polygon};
use crate::write::text;

/// Text heights along the larger side of the elevation, in a picture of its own and in one of a report, whose text must be
/// legible on a page of A4.
const ACROSS: f64 = 96.0;
const ACROSS_PAGE: f64 = 70.0;

/// Height of the capitals, in the pixels of a picture that is shown at its own size.
pub const CAPITALS: f64 = 8.5;

/// Room round everything, in text heights.
const MARGIN: f64 = 2.0;

/// What is drawn, with its size in pixels; marks lie in the elevation plane, `y` upward.
#[derive(Debug, Clone, PartialEq)]
pub struct Picture {
    /// One line that says what it shows.
    pub title: String,
    /// What a reader who cannot see it should know.
    pub description: String,
    /// The marks, in drawing order.
    pub marks: Vec<Mark>,
    /// Lower left corner of the picture in the elevation plane.
    pub low: Point,
    /// Upper right corner.
    pub high: Point,
    /// Pixels per unit of the elevation plane.
    pub scale: f64,
    /// Figures at loads that found no room.
    pub hidden: usize,
}

/// How a layer looks.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Look {
    /// Name of its class in SVG.
    pub class: &'static str,
    /// Red, green, blue on white paper; each reads on white with a contrast of more than 4.5.
    pub colour: [u8; 3],
    /// Width of its lines, pixels.
    pub width: f64,
    /// Line type, when the mark says none.
    pub dash: Option<Dash>,
}

/// The look of each layer, in the order of `Layer`.
pub const LOOKS: [(Layer, Look); 15] = [
    (Layer::Line, Look { class: "line", colour: [0x0b, 0x5f, 0xa5], width: 2.2, dash: None }),
    (Layer::OtherLines, Look { class: "other", colour: [0x5e, 0x5e, 0x5e], width: 1.2, dash: None }),
    (Layer::Ring, Look { class: "ring", colour: [0x8c, 0x8c, 0x8c], width: 0.7, dash: None }),
    (Layer::Kern, Look { class: "kern", colour: [0x6e, 0x6e, 0x6e], width: 1.0, dash: Some(Dash::Dots) }),
    (Layer::Offsets, Look { class: "offset", colour: [0x8a, 0x2f, 0x8f], width: 1.0, dash: None }),
    (Layer::OffsetDiagram, Look { class: "diagram", colour: [0x0b, 0x5f, 0xa5], width: 1.4, dash: None }),
    (Layer::Forces, Look { class: "force", colour: [0x17, 0x6b, 0x41], width: 1.2, dash: None }),
    (Layer::Letters, Look { class: "letter", colour: [0x17, 0x6b, 0x41], width: 1.0, dash: None }),
    (Layer::Reactions, Look { class: "thrust", colour: [0x85, 0x5b, 0x00], width: 1.8, dash: None }),
    (Layer::Flags, Look { class: "flag", colour: [0xb8, 0x3a, 0x0b], width: 1.6, dash: None }),
    (Layer::Notes, Look { class: "note", colour: [0x2b, 0x2b, 0x2b], width: 1.0, dash: None }),
    (Layer::Traffic, Look { class: "traffic", colour: [0x85, 0x5b, 0x00], width: 1.2, dash: None }),
    (
        Layer::Suggested,
        Look { class: "suggested", colour: [0x0b, 0x5f, 0xa5], width: 1.4, dash: Some(Dash::TwoDots) },
    ),
    (Layer::Axis, Look { class: "axis", colour: [0x1a, 0x1a, 0x1a], width: 1.2, dash: None }),
    (Layer::Loads, Look { class: "load", colour: [0x40, 0x40, 0x40], width: 1.1, dash: None }),
];

/// The look of a mark's layer.
pub fn look(mark: &Mark) -> Look {
    LOOKS[mark.layer.min(LOOKS.len() - 1)].1
}

/// The colour of a class, black for one that there is not.
pub fn look_of(class: &str) -> [u8; 3] {
    LOOKS.iter().find(|l| l.1.class == class).map_or([0; 3], |l| l.1.colour)
}

/// Elevation, offset diagram, force polygons, key and caution on one sheet.
pub fn whole(run: &Run) -> Picture {
    let spans = spans(run);
    let (mut canvas, left, right) = canvas(run, ACROSS);
    let hidden = draw_elevation(run, &spans, &mut canvas);
    let h = canvas.h;
    let top = canvas.extent().map_or(0.0, |(_, high)| high.y) + 2.2 * h;
    let status = format!("{}: {}", text::plain(&name(run)), lower_heading(run));
    let layer = if run.verdict == Some(Verdict::Within) { Layer::Notes } else { Layer::Flags };
    canvas.text(layer, "heading", &Words::new(status, Point::new(left, top), 1.4 * h));

    let low = |canvas: &Canvas| canvas.extent().map_or(0.0, |(low, _)| low.y);
    let y = low(&canvas) - 3.5 * h;
    let y = diagram::draw(run, &spans, &mut canvas, Point::new(left, y), right, hidden) - 3.5 * h;
    let edge = polygon::draw(run, &spans, &mut canvas, Point::new(left, y), right);
    let key_at = Point::new(edge.max(right - 34.0 * h) + 2.0 * h, y);
    let drawn = [(Layer::Axis, None, "axis".to_owned()), (Layer::Loads, None, "load".to_owned())];
    note::key(&spans, &mut canvas, key_at, &drawn);
    let columns = diagram::columns_between(left, right, h);
    let mut y = low(&canvas) - 2.0 * h;
    for line in text::wrap(CAUTION, columns) {
        y -= LEADING * h;
        canvas.text(Layer::Notes, "caution", &Words::new(line, Point::new(left, y), h));
    }
    picture(run, canvas, "Line of thrust, offset diagram and force polygon", hidden)
}

/// The elevation alone.
pub fn elevation(run: &Run) -> Picture {
    let spans = spans(run);
    let (mut canvas, ..) = canvas(run, ACROSS_PAGE);
    let hidden = draw_elevation(run, &spans, &mut canvas);
    picture(run, canvas, "Elevation with the line of thrust", hidden)
}

/// The force polygons alone; `None` where no span has any.
pub fn polygons(run: &Run) -> Option<Picture> {
    let spans = spans(run);
    let (mut canvas, left, right) = canvas(run, ACROSS_PAGE);
    polygon::draw(run, &spans, &mut canvas, Point::new(left, 0.0), right);
    (!canvas.marks.is_empty()).then(|| picture(run, canvas, "Force polygon", 0))
}

/// The offset diagram alone; `None` where no line was found.
pub fn offsets(run: &Run) -> Option<Picture> {
    let spans = spans(run);
    let (mut canvas, left, right) = canvas(run, ACROSS_PAGE);
    diagram::draw(run, &spans, &mut canvas, Point::new(left, 0.0), right, 0);
    (!canvas.marks.is_empty()).then(|| picture(run, canvas, "Offset of the line of thrust", 0))
}

/// The signs in which figures count as positive.
pub fn signs() -> Picture {
    let mut canvas = Canvas::new(1.0);
    note::signs(&mut canvas, Point::ZERO);
    Picture {
        title: "Signs".into(),
        description:
            "A piece of rib, pressed at both ends, with its axis and a positive offset toward the extrados."
                .into(),
        ..bounded(canvas)
    }
}

fn spans(run: &Run) -> Vec<Shown<'_>> {
    run.spans.iter().map(|span| Shown::new(run, span, 1.0)).collect()
}

/// An empty canvas with its left and right edge.
fn canvas(run: &Run, across: f64) -> (Canvas, f64, f64) {
    let content = content(run, None);
    let size = (content.high[0] - content.low[0]).max(content.high[1] - content.low[1]);
    let h = if size > 0.0 && size.is_finite() { size / across } else { 1.0 };
    let mut canvas = Canvas::new(h);
    canvas.has_units = false;
    (canvas, content.low[0], content.high[0])
}

fn draw_elevation(run: &Run, spans: &[Shown], canvas: &mut Canvas) -> usize {
    for shown in spans {
        canvas.chain(Layer::Axis, "axis", &shown.chords, None);
    }
    loads::draw(run, spans, canvas);
    let hidden = elevation::draw(run, spans, canvas);
    for shown in spans {
        crate::write::annotate::traffic::draw(shown, canvas);
    }
    hidden
}

fn picture(run: &Run, canvas: Canvas, what: &str, hidden: usize) -> Picture {
    Picture {
        title: format!("{what}: {}", text::plain(&name(run))),
        description: description(run),
        hidden,
        ..bounded(canvas)
    }
}

/// What was drawn, with room round it, and no words yet.
fn bounded(canvas: Canvas) -> Picture {
    let room = MARGIN * canvas.h;
    let (low, high) = canvas.extent().unwrap_or((Point::ZERO, Point::new(canvas.h, canvas.h)));
    Picture {
        title: String::new(),
        description: String::new(),
        low: Point::new(low.x - room, low.y - room),
        high: Point::new(high.x + room, high.y + room),
        scale: CAPITALS / canvas.h,
        marks: canvas.marks,
        hidden: 0,
    }
}

/// The name of the drawing without its folder.
pub fn name(run: &Run) -> String {
    let file = &run.drawing.file;
    std::path::Path::new(file)
        .file_name()
        .map_or_else(|| file.clone(), |name| name.to_string_lossy().into_owned())
}

fn lower_heading(run: &Run) -> String {
    let heading = heading(run);
    match heading.split_once(", ") {
        Some(_) => heading.to_owned(),
        None => heading.to_lowercase(),
    }
}

fn description(run: &Run) -> String {
    let mut words: Vec<String> = Vec::new();
    let (m, mm) = text::length_units(&run.units);
    for shown in spans(run) {
        let span = &shown.span;
        let mut told = format!(
            "{}: {} of span {} {m}, {} {} {m}, {} loads",
            span.name,
            span.kind,
            text::metres(span.axis.span),
            if shown.is_cable() { "sag" } else { "rise" },
            text::metres(span.axis.rise.abs()),
            span.loads.len()
        );
        if let Some(offset) = shown.line.and_then(|l| l.offset.as_ref()) {
            let toward = if offset.signed < 0.0 { "intrados" } else { "extrados" };
            told.push_str(&format!(
                "; the line of thrust strays {} {mm} at most from the axis, toward the {toward}",
                text::small(offset.max_abs, &run.units)
            ));
        }
        words.push(told);
    }
    words.push(lower_heading(run));
    format!("{}.", words.join(". "))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn looks_stand_in_the_order_of_their_layers() {
        for (i, row) in LOOKS.iter().enumerate() {
            assert_eq!(row.0 as usize, i);
        }
    }

    #[test]
    fn colours_read_on_white() {
        let part = |c: u8| {
            let c = f64::from(c) / 255.0;
            if c <= 0.04045 { c / 12.92 } else { ((c + 0.055) / 1.055).powf(2.4) }
        };
        for (_, look) in LOOKS.iter().filter(|l| l.1.class != "ring") {
            let [r, g, b] = look.colour.map(part);
            let contrast = 1.05 / (0.2126 * r + 0.7152 * g + 0.0722 * b + 0.05);
            assert!(contrast >= 4.5, "{}: {contrast:.2}", look.class);
        }
    }
}
