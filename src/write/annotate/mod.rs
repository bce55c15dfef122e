//! The marked sheet: what is added to a drawing so that a reviewer sees the line of thrust and can judge it.
//!
//! The elevation stays as clear as may be: it gets the line of thrust, offset ticks with their figures in mm, Bow's
//! letters, the thrust at the abutments and the flags. Beneath it stand the offset diagram (one base line a span, under its
//! span), then the force polygons from the left and the note block on the right, with the key and the sign sketch in it.
//!
//! One layer for each thing shown, so that it can be thawed by itself. Colours are drawing colour numbers, chosen so
//! that neighbours differ for colour-blind readers (blue, green, ochre, purple and vermilion of middle brightness, which
//! read on white as on black); lines that could be taken for each other differ by line type too.
//!
//! | layer (after the prefix) | shows | colour | line type | weight, mm |
//! | --- | --- | --- | --- | --- |
//! | `LINE` | governing line of thrust | 142 blue | continuous | 0.50 |
//! | `OTHER-LINES` | other lines and cases, each with its own line type | 252 grey | by line: long or short dashes, dash and dots | 0.25 |
//! | `RING` | ring lines and joints of the depth computed with | 8 grey | continuous | 0.09 |
//! | `KERN` | middle third of the rib | 8 grey | dots | 0.13 |
//! | `OFFSETS` | ticks from the axis to the line along the joint, figures in mm | 213 purple | continuous | 0.13 |
//! | `OFFSET-DIAGRAM` | offset along the span, exaggerated, limits dashed | 142 blue | continuous, limits short dashes | 0.25 |
//! | `FORCES` | force polygon: load line, pole, rays | 122 green | continuous, fitted pole a cross | 0.25 |
//! | `LETTERS` | Bow's letters in the spaces of the elevation | 122 green | - | 0.18 |
//! | `REACTIONS` | thrust of the abutments on the rib | 42 ochre | continuous | 0.35 |
//! | `FLAGS` | limits that do not hold | 20 vermilion | continuous | 0.35 |
//! | `NOTES` | note block, key, sign sketch | 7 black or white | continuous | 0.18 |
//! | `TRAFFIC` | envelope of traffic, the train at its worst position and the line there | 42 ochre | continuous, envelope dash and two dots, line short dashes | 0.25 |
//! | `SUGGESTED-AXIS` | funicular of the loads as an axis, switched off; only where it is asked for | 142 blue | dash and two dots | 0.35 |
//!
//! Of several cases the governing line of the worst one is drawn heavy (most limits that do not hold, then the largest
//! offset); the others stand beside it on `OTHER-LINES` and all are listed in the note block.

pub(super) mod diagram;
pub(super) mod elevation;
pub(super) mod note;
pub(super) mod pen;
mod place;
pub(super) mod polygon;
mod ring;
pub(super) mod shown;
pub(super) mod suggested;
pub(super) mod traffic;

pub use crate::outcome::bow::{MOST_LETTERED, letter, spaces};
pub use elevation::check_name;
pub use note::{CAUTION, heading};
pub use shown::{governing, kind_name, worst_case};

use sha2::{Digest, Sha256};

use crate::geometry::{self, Point};
use crate::outcome::{Run, Verdict, Xy};
use crate::tags::APPLICATION;
use crate::tags::marks::{Marks, Plane};
use pen::Canvas;
use place::Box2;
use shown::Shown;

/// Height of text on the plotted sheet, mm.
pub const PLOTTED_TEXT: f64 = 2.5;

/// An upright rectangle of the elevation plane, m.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Extents {
    /// Lower left corner.
    pub low: Xy,
    /// Upper right corner.
    pub high: Xy,
}

impl Extents {
    /// The rectangle round some points; `None` without any.
    pub fn round(points: impl IntoIterator<Item = Xy>) -> Option<Self> {
        let mut points = points.into_iter().filter(|p| p.iter().all(|c| c.is_finite()));
        let first = points.next()?;
        Some(points.fold(Self { low: first, high: first }, |e, p| Self {
            low: [e.low[0].min(p[0]), e.low[1].min(p[1])],
            high: [e.high[0].max(p[0]), e.high[1].max(p[1])],
        }))
    }

    fn is_finite(&self) -> bool {
        self.low.iter().chain(&self.high).all(|c| c.is_finite())
    }
}

/// Setting of the text height.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub enum TextHeight {
    /// 2.5 mm in the viewport that shows the elevation, else the drawing's own text height, else a 120th of the
    /// elevation's larger side.
    #[default]
    Auto,
    /// Height of the capitals in drawing units, as a drafter reads it off any text of the drawing.
    Units(f64),
}

/// The sheet on which a run is marked.
#[derive(Debug, Clone, PartialEq)]
pub struct Sheet {
    /// Metres of the real thing per drawing unit: the unit times `[drawing] scale`.
    pub metres_per_unit: f64,
    /// Plane of the elevation.
    pub plane: Plane,
    /// Extents of what was read of the elevation (axis, loads, labels), m.
    pub elevation: Option<Extents>,
    /// Extents of everything in model space, m, where they are known.
    pub model_space: Option<Extents>,
    /// Boxes of drawn things near the axis that texts should keep off, such as load labels, m; may be empty.
    pub occupied: Vec<Extents>,
    /// Usual text height of the drawing, drawing units.
    pub drawing_text_height: Option<f64>,
    /// Plotted millimetres per drawing unit in the viewport that shows the elevation.
    pub viewport_scale: Option<f64>,
    /// Text height asked for.
    pub text_height: TextHeight,
    /// Prefix of all layer and line type names.
    pub prefix: String,
    /// Make the layers frozen.
    pub frozen: bool,
    /// Version of the program.
    pub tool_version: String,
    /// UTC day, `YYYY-MM-DD`.
    pub date: String,
    /// Name of the source file, without its folder.
    pub source_name: String,
    /// SHA-256 of the source, 64 hexadecimal digits. Nothing but these digits depends on them: a placeholder of the same
    /// length gives the same marks elsewhere.
    pub sha256: String,
    /// Hash of the job in force; `None` without a job file.
    pub job_hash: Option<String>,
}

/// The marks of a run, in drawing units.
///
/// A span with no line of thrust gets its loads, letters and load line, and the note block says why there is no line.
pub fn annotate(run: &Run, sheet: &Sheet) -> Marks {
    let unit = 1.0 / sheet.metres_per_unit;
    let spans: Vec<Shown> = run.spans.iter().map(|span| Shown::new(run, span, unit)).collect();
    let content = content(run, sheet.elevation);
    let h = text_height(sheet, content, unit);
    let mut canvas = Canvas::new(h);
    for e in sheet.occupied.iter().filter(|e| e.is_finite()) {
        canvas.taken.boxes.push(Box2::upright(shown::point(e.low, unit), shown::point(e.high, unit)));
    }
    // The symbols of the loads, whose size is not known here, are taken as half a text height large.
    for load in run.spans.iter().flat_map(|s| &s.loads).filter(|l| l.at.iter().all(|c| c.is_finite())) {
        let (at, half) = (shown::point(load.at, unit), 0.25 * h);
        let corner = geometry::Vec2::new(half, half);
        canvas.taken.boxes.push(Box2::upright(at - corner, at + corner));
    }
    let hidden = elevation::draw(run, &spans, &mut canvas);
    for shown in &spans {
        traffic::draw(shown, &mut canvas);
    }
    suggested::draw(&spans, &mut canvas);

    let (left, right) = (content.low[0] * unit, content.high[0] * unit);
    let mut y = free_below(sheet, content, &canvas, unit) - 3.0 * h;
    y = diagram::draw(run, &spans, &mut canvas, Point::new(left, y), right, hidden) - 3.0 * h;
    let corner = Point::new(left, y);
    let polygons_right = polygon::draw(run, &spans, &mut canvas, corner, right);
    note::draw(run, sheet, &spans, &mut canvas, corner, polygons_right, right);

    Marks {
        application: APPLICATION.into(),
        plane: sheet.plane,
        line_types: pen::line_types(&sheet.prefix, h),
        layers: pen::layers(&sheet.prefix, sheet.frozen, spans.iter().any(|s| suggested::axis(s).is_some())),
        marks: canvas.marks,
        facts: facts(run, sheet),
    }
}

/// What is kept beside the marks, for whoever checks them later.
fn facts(run: &Run, sheet: &Sheet) -> Vec<(String, String)> {
    let verdict = match run.verdict {
        Some(Verdict::Within) => "within",
        Some(Verdict::Outside) => "outside",
        Some(Verdict::Unchecked) | None => "unchecked",
    };
    let mut facts = vec![
        ("sha256".to_owned(), sheet.sha256.clone()),
        ("source".to_owned(), sheet.source_name.clone()),
        ("tool".to_owned(), format!("thrustmark {}", sheet.tool_version)),
        ("verdict".to_owned(), verdict.to_owned()),
        ("date".to_owned(), sheet.date.clone()),
    ];
    if let Some(hash) = &sheet.job_hash {
        facts.push(("job".to_owned(), hash.clone()));
    }
    // Tells a job file that changed for this sheet from one that changed for others only.
    facts.push(("settings".to_owned(), settings_hash(&run.settings)));
    facts
}

/// Where there is room below the elevation for other marks of ours: the upper left corner, and the text height, both in
/// drawing units.
pub fn free_corner(run: &Run, sheet: &Sheet) -> (Point, f64) {
    let unit = 1.0 / sheet.metres_per_unit;
    let content = content(run, sheet.elevation);
    let h = text_height(sheet, content, unit);
    (Point::new(content.low[0] * unit, free_below(sheet, content, &Canvas::new(h), unit) - 3.0 * h), h)
}

/// SHA-256 of settings in force, lower-case hexadecimal.
///
/// Which file they came from does not count: a job file that moved asks for the same.
pub fn settings_hash(settings: &serde_json::Value) -> String {
    let mut settings = settings.clone();
    if let Some(tree) = settings.as_object_mut() {
        tree.remove("origin");
    }
    Sha256::digest(settings.to_string()).iter().map(|byte| format!("{byte:02x}")).collect()
}

/// Extents of axis, loads and lines, m.
pub(super) fn content(run: &Run, elevation: Option<Extents>) -> Extents {
    let given = elevation.filter(Extents::is_finite).map(|e| [e.low, e.high]);
    let axes = run.spans.iter().flat_map(|s| {
        let a = &s.axis;
        [a.left, a.right, a.crown]
            .into_iter()
            .chain(a.curve.iter().map(|c| [c[0], c[1]]))
            .chain(s.loads.iter().map(|l| l.at))
    });
    Extents::round(given.into_iter().flatten().chain(axes))
        .unwrap_or(Extents { low: [0.0, 0.0], high: [1.0, 1.0] })
}

/// Text height in drawing units. A height from the viewport or the drawing is taken only when the elevation is between
/// 12 and 1000 text heights large: beyond that it belongs to something else in the drawing.
fn text_height(sheet: &Sheet, content: Extents, unit: f64) -> f64 {
    let size = (content.high[0] - content.low[0]).max(content.high[1] - content.low[1]) * unit;
    let fits = |h: &f64| *h > 0.0 && (12.0..=1000.0).contains(&(size / h));
    if let TextHeight::Units(h) = sheet.text_height
        && h > 0.0
        && h.is_finite()
    {
        return h;
    }
    let proportional = if size > 0.0 && size.is_finite() { size / 120.0 } else { 1.0 };
    sheet
        .viewport_scale
        .map(|scale| PLOTTED_TEXT / scale)
        .filter(fits)
        .or_else(|| sheet.drawing_text_height.filter(fits))
        .unwrap_or(proportional)
}

/// Height below which nothing was drawn: beneath the marks of the elevation, and beneath all of model space unless that
/// reaches so far down that the blocks would be out of sight (more than one and a half times the elevation's size).
fn free_below(sheet: &Sheet, content: Extents, canvas: &Canvas, unit: f64) -> f64 {
    let size = (content.high[0] - content.low[0]).max(content.high[1] - content.low[1]);
    let mut low = content.low[1];
    if let Some(all) = sheet.model_space.filter(Extents::is_finite)
        && all.low[1] < low
        && low - all.low[1] <= 1.5 * size
    {
        low = all.low[1];
    }
    let low = low * unit;
    canvas.extent().map_or(low, |(corner, _)| low.min(corner.y))
}

#[cfg(test)]
mod tests;
