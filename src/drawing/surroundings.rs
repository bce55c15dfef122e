//! What the sheet says beside the arch: title block, dimensions, notes about the scale; posts and the roadway in plan.

use super::dimension::{self, Dimension};
use super::gather::in_model;
use super::note::{Note, Role};
use super::roles::{self, CURVES};
use super::space::View;
use super::stroke::{self, Stroke};
use super::title::{self, Title};
use super::{PlanLine, convert, names};
use crate::job::Settings;
use crate::refusal::Refusal;
use crate::tags::{Candidate, Outline, Placement, Record};

/// Kinds of entities that make posts.
pub const POSTS: [&str; 3] = ["LINE", "LWPOLYLINE", "POLYLINE"];

/// What was read.
pub struct Surroundings {
    pub posts: Vec<Stroke>,
    pub plan: Vec<PlanLine>,
    pub plan_of_rib: Option<f64>,
    pub dimensions: Vec<Dimension>,
    pub title: Title,
}

/// Whether the first scan of a drawing keeps a record for this, whatever its layer.
pub fn keeps(candidate: &Candidate<'_>) -> bool {
    let on_sheet = candidate.block.is_none_or(names::is_paper_space);
    on_sheet && matches!(candidate.kind, "INSERT" | "DIMENSION" | "TEXT" | "MTEXT")
}

/// Reads all of it. `outline` is as the file has it, `seen` as it is looked at in the plane of the elevation, whose curves lie at
/// the height `z`.
///
/// # Errors
/// When a layer that the job names for posts or plan is missing or unusable, or an entity on it cannot be read.
pub fn read(
    outline: &Outline,
    seen: &Outline,
    view: View,
    z: f64,
    settings: &Settings,
    notes: &mut Vec<Note>,
) -> Result<Surroundings, Refusal> {
    let decoder = &outline.decoder;
    let mut posts = Vec::new();
    for record in in_model(&seen.records, &roles::named(seen, settings, Role::Posts, &POSTS)?) {
        if POSTS.contains(&record.kind.as_str()) {
            posts.extend(stroke::stroke(record, decoder)?);
        }
    }
    let mut plan = Vec::new();
    for record in in_model(&outline.records, &roles::named(outline, settings, Role::Plan, &CURVES)?) {
        if CURVES.contains(&record.kind.as_str()) {
            let curve = convert::curve(&from_above(record, view), decoder)?;
            plan.extend(curve.map(|c| PlanLine { source: c.source, pieces: c.pieces }));
        }
    }
    let of_sheet = |r: &&Record| !r.ours && r.block.is_none();
    let dimensions = outline
        .records
        .iter()
        .filter(of_sheet)
        .filter(|r| r.kind == "DIMENSION" && !r.in_paper_space())
        .filter_map(|r| dimension::dimension(r, &view, decoder))
        .collect();
    // What inserted blocks bring in has a placement; the references of the sheet itself have none.
    let references = outline.records.iter().filter(|r| r.placement.is_none());
    let title = title::title(references, settings, decoder, notes);
    let mut warnings = Vec::new();
    for record in outline.records.iter().filter(|r| !r.ours && matches!(r.kind.as_str(), "TEXT" | "MTEXT")) {
        // Long paragraphs come in parts of which the last one has code 1.
        let says: String =
            record.tags.own().filter(|t| matches!(t.code, 1 | 3)).map(|t| decoder.text(t.value)).collect();
        let says = super::text::plain_paragraph(&says);
        if dimension::not_to_scale(&says) {
            warnings.push((convert::source(record), says));
        }
    }
    let count = warnings.len();
    if let Some((source, text)) = warnings.into_iter().next() {
        let text: String = text.split_whitespace().collect::<Vec<_>>().join(" ").chars().take(80).collect();
        notes.push(Note::NotToScale { source, text, count });
    }
    let plan_of_rib = (view != View::XY).then_some(-z);
    Ok(Surroundings { posts, plan, plan_of_rib, dimensions, title })
}

/// A record as it is seen from above: right is right in the elevation, up is away from the one who looks at it.
fn from_above(record: &Record, view: View) -> Record {
    let mut record = record.clone();
    if let Some(map) = view.plan_map() {
        let (inner, path) = match record.placement.take() {
            Some(placement) => (placement.map, placement.path),
            None => (crate::geometry::Affine::IDENTITY, Vec::new()),
        };
        record.placement = Some(Box::new(Placement { map: map.after(&inner), path }));
    }
    record
}
