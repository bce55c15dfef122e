//! Outlines of what weighs: closed curves and hatches on the layers of the job's areas.

use super::entity::{Curve, Source};
use super::gather::in_model;
use super::note::{Note, Role};
use super::{convert, hatch};
use crate::job::{Area, Settings};
use crate::refusal::Refusal;
use crate::tags::{Outline as File, Record, fold};

/// Kinds of entities that an outline is read from.
pub const KINDS: [&str; 8] =
    ["LWPOLYLINE", "POLYLINE", "LINE", "ARC", "CIRCLE", "ELLIPSE", "SPLINE", "HATCH"];

/// Which part within several loops counts.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Rule {
    /// What lies within an odd number of them.
    EvenOdd,
    /// What lies within one of them alone.
    Outermost,
    /// What lies within any of them.
    Whole,
}

/// What one HATCH fills.
#[derive(Debug, Clone, PartialEq)]
pub struct Outline {
    /// The entity.
    pub source: Source,
    /// Its loops; pieces of each in the order drawn.
    pub loops: Vec<Curve>,
    /// What counts within them.
    pub rule: Rule,
    /// Height of its plane above the plane through the drawing's origin that it is read in.
    pub z: f64,
    /// Whether arcs stand for a curve that is none.
    pub fitted: bool,
    /// Loops that only keep room for a text; what they enclose is there all the same.
    pub text_boxes: usize,
}

/// The outlines of one area of the job.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Outlines {
    /// Its layers as the drawing spells them; empty for an area up to a level.
    pub layers: Vec<String>,
    /// Curves on them, in the order of the file.
    pub curves: Vec<Curve>,
    /// Hatches on them, in the order of the file.
    pub hatches: Vec<Outline>,
}

/// Whether a layer holds outlines of an area of the job.
pub fn is_area_layer(settings: &Settings, layer: &str) -> bool {
    settings.area.iter().any(|a| claims(settings, a, layer))
}

/// Whether a layer belongs to an area: by its own name, or by a pattern where it serves as nothing else.
fn claims(settings: &Settings, area: &Area, layer: &str) -> bool {
    let Some(patterns) = &area.layer else {
        return false;
    };
    let free = || !matches!(settings.layers.role_of(layer), Ok(Some(_)) | Err(_));
    patterns.0.iter().any(|p| p.matches(layer) && (p.is_exact() || free()))
}

/// The outlines of all areas, in the order of the job.
///
/// # Errors
/// When no layer of an area is in the drawing or none holds an outline, two areas claim one layer by patterns, or an entity
/// cannot be read.
pub fn read(file: &File, settings: &Settings, notes: &mut Vec<Note>) -> Result<Vec<Outlines>, Refusal> {
    settings.area.iter().map(|area| one(file, settings, area, notes)).collect()
}

fn one(file: &File, settings: &Settings, area: &Area, notes: &mut Vec<Note>) -> Result<Outlines, Refusal> {
    let Some(patterns) = &area.layer else {
        return Ok(Outlines::default());
    };
    let mut found = Outlines::default();
    let mut others = Vec::new();
    for census in &file.census {
        let ours = file.layer(&census.name).is_some_and(|l| l.ours);
        if ours || census.model.is_empty() || !is_of(settings, area, &census.name)? {
            continue;
        }
        if KINDS.iter().any(|k| census.model.contains_key(*k)) {
            found.layers.push(census.name.clone());
        } else {
            others.push(census.name.clone());
        }
    }
    if found.layers.is_empty() {
        let asked: Vec<&str> = patterns.0.iter().map(|p| p.as_str()).collect();
        let holds = match others.first() {
            Some(layer) => format!("layer {layer} holds no closed curve and no HATCH"),
            None => format!("no layer of the drawing that holds anything is named {}", asked.join(" or ")),
        };
        return Err(Refusal::new(
            "area-missing",
            format!("[[area]] {}: {holds}", area.name),
            "Draw the outline on that layer, name another one, or give the area a `level`; a drawing of the set without this \
             area can have the table left out by [[sheet]]",
        ));
    }
    let before = found.layers.clone();
    for record in in_model(&file.records, &before) {
        match record.kind.as_str() {
            "HATCH" => found.hatches.push(hatch::outline(
                record,
                convert::source(record),
                &convert::placement(record),
            )?),
            kind if KINDS.contains(&kind) => found.curves.extend(convert::curve(record, &file.decoder)?),
            _ => {}
        }
    }
    told(file, &before, notes);
    let fitted = found.curves.iter().filter(|c| c.fitted).map(|c| (&c.source, c.pieces.len()));
    let hatched = found.hatches.iter().filter(|h| h.fitted);
    let hatched = hatched.map(|h| (&h.source, h.loops.iter().map(|l| l.pieces.len()).sum()));
    notes.extend(
        fitted.chain(hatched).map(|(source, pieces)| Note::CurveFitted { source: source.clone(), pieces }),
    );
    Ok(found)
}

/// Whether a layer is this area's: a name beats a pattern; two areas with equal right are refused.
fn is_of(settings: &Settings, area: &Area, layer: &str) -> Result<bool, Refusal> {
    let by_name = |a: &&Area| a.layer.iter().flat_map(|p| &p.0).any(|p| p.is_exact() && p.matches(layer));
    let mut owners: Vec<&Area> = settings.area.iter().filter(by_name).collect();
    if owners.is_empty() {
        owners = settings.area.iter().filter(|a| claims(settings, a, layer)).collect();
    }
    let mine = owners.iter().any(|o| o.name == area.name);
    match owners.iter().find(|o| o.name != area.name) {
        Some(other) if mine => Err(Refusal::new(
            "area-layers",
            format!("layer {layer} is claimed by [[area]] {} and by [[area]] {}", area.name, other.name),
            "Give each area layers of its own",
        )
        .on_layer(layer)),
        _ => Ok(mine),
    }
}

/// Tells what stands on the layers of an area and is no outline.
fn told(file: &File, layers: &[String], notes: &mut Vec<Note>) {
    for name in layers {
        let Some(census) = file.census.iter().find(|c| fold(&c.name) == fold(name)) else {
            continue;
        };
        for (kind, &count) in census.model.iter().filter(|(k, _)| !KINDS.contains(&k.as_str())) {
            let of_kind = |r: &&Record| r.block.is_none() && r.kind == *kind && fold(&r.layer) == fold(name);
            let first = file.records.iter().find(of_kind).map(convert::source);
            let (layer, kind) = (name.clone(), kind.clone());
            notes.push(Note::PassedOver {
                role: Role::Areas,
                layer,
                kind,
                count,
                could_be_load: false,
                first,
            });
        }
        let paper: u64 = census.paper.values().sum();
        if paper > 0 {
            notes.push(Note::PaperSpace { layer: name.clone(), count: paper });
        }
        if let Some(layer) = file.layer(name)
            && (layer.frozen || layer.off)
        {
            notes.push(Note::LayerHidden { layer: name.clone(), frozen: layer.frozen });
        }
    }
}
