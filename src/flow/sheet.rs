//! What the marks need to know of the sheet: units, extents, text heights, names.

use std::path::Path;

use super::{Checked, Environment};
use crate::drawing::Drawing;
use crate::drawing::viewport::scale_that_shows;
use crate::geometry::Point;
use crate::job;
use crate::outcome::Xy;
use crate::tags;
use crate::tolerance;
use crate::write::annotate::{Extents, Sheet, TextHeight};

/// Millimetres in a paper unit where the drawing measures in inches.
const INCH: f64 = 25.4;

/// The sheet of a checked drawing.
pub fn sheet(path: &Path, checked: &Checked, environment: Environment) -> Sheet {
    let drawing = &checked.drawing;
    let metres = drawing.unit.metres;
    let curve = checked.run.spans.iter().flat_map(|s| {
        // Ends, crown and the bulged pieces' own ends bound the axis closely enough for a layout.
        s.axis.curve.iter().map(|c| [c[0], c[1]]).chain([s.axis.crown])
    });
    let loads = checked.run.spans.iter().flat_map(|s| s.loads.iter().map(|l| l.at));
    let labels: Vec<Extents> = drawing.texts.iter().map(|t| in_metres(t.corners(), metres)).collect();
    let corners = labels.iter().flat_map(|e| [e.low, e.high]);
    let elevation = Extents::round(curve.chain(loads).chain(corners));
    let english = checked.outline.header("$MEASUREMENT", 70) == Some("0");
    Sheet {
        metres_per_unit: metres,
        plane: drawing.plane,
        elevation,
        model_space: model_extents(checked, metres),
        occupied: labels,
        drawing_text_height: usual_height(drawing),
        viewport_scale: elevation.and_then(|e| {
            let corner = |p: Xy| Point::new(p[0] / metres, p[1] / metres);
            let scale = scale_that_shows(&drawing.viewports, corner(e.low), corner(e.high))?;
            Some(scale * if english { INCH } else { 1.0 })
        }),
        text_height: match checked.settings.mark.text_height {
            job::TextHeight::Auto => TextHeight::Auto,
            job::TextHeight::Metres(height) => TextHeight::Units(height / metres),
        },
        prefix: checked.settings.mark.prefix.clone(),
        frozen: checked.settings.mark.frozen,
        tool_version: env!("CARGO_PKG_VERSION").into(),
        date: environment.today.to_string(),
        // As many zeros where the hash is still on its way.
        sha256: checked.run.drawing.sha256.clone().unwrap_or_else(|| "0".repeat(64)),
        source_name: source_name(path, checked),
        job_hash: checked.settings.origin.sha256.clone(),
    }
}

fn in_metres(corners: [Point; 4], metres: f64) -> Extents {
    Extents::round(corners.map(|p| [p.x * metres, p.y * metres]))
        .unwrap_or(Extents { low: [0.0, 0.0], high: [0.0, 0.0] })
}

/// Largest drawing, bytes, whose entities are gone through for their extents when its header does not tell them.
const MOST_TO_MEASURE: u64 = 50 << 20;

/// What model space fills, in metres: `$EXTMIN` and `$EXTMAX` where they make sense, else what the entities say. The
/// variables are seen in the plane of the elevation, and may be stale; they only keep the marks clear of other parts. None for a drawing of more than 50 MB whose
/// variables make no sense.
fn model_extents(checked: &Checked, metres: f64) -> Option<Extents> {
    let read = |name: &str| -> Option<[f64; 3]> {
        let number = |code| checked.outline.header(name, code)?.parse::<f64>().ok();
        Some([number(10)?, number(20)?, number(30).unwrap_or(0.0)])
    };
    let sane = |low: [f64; 3], high: [f64; 3]| {
        let plain = low.iter().chain(&high).all(|v| v.abs() < tolerance::GREATEST_NUMBER);
        plain && low[0] < high[0] && low[1] < high[1]
    };
    let stated = read("$EXTMIN").zip(read("$EXTMAX")).filter(|(low, high)| sane(*low, *high));
    let plane = checked.drawing.plane;
    let (low, high) = match stated {
        Some(stated) => stated,
        // A drawing that was scanned once is scanned again without error; were it not, the marks would only lack room.
        None if plane.is_flat() && checked.source.len() <= MOST_TO_MEASURE => {
            let [low, high] = tags::extents(&checked.source).ok().flatten()?;
            ([low[0], low[1], 0.0], [high[0], high[1], 0.0])
        }
        None => return None,
    };
    let corners = (0..8).map(|i| {
        let corner: [f64; 3] =
            std::array::from_fn(|axis| if i >> axis & 1 == 0 { low[axis] } else { high[axis] });
        [plane.right, plane.up].map(|d| d.iter().zip(corner).map(|(d, c)| d * c).sum::<f64>() * metres)
    });
    Extents::round(corners)
}

/// The median height of the texts that were read.
fn usual_height(drawing: &Drawing) -> Option<f64> {
    let mut heights: Vec<f64> = drawing.texts.iter().map(|t| t.height).filter(|h| *h > 0.0).collect();
    heights.sort_by(f64::total_cmp);
    heights.get(heights.len() / 2).copied()
}

/// The name of the source: of a marked copy, the one that its marks recorded.
fn source_name(path: &Path, checked: &Checked) -> String {
    let recorded = checked.marks.as_ref().and_then(|m| m.fact("source")).filter(|name| !name.is_empty());
    match recorded {
        Some(name) => name.to_string(),
        None => path.file_name().unwrap_or_default().to_string_lossy().into_owned(),
    }
}
