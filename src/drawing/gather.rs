//! One drawing from its bytes: layers chosen, their entities read, everything left aside told.

use std::collections::BTreeMap;

use super::entity::{Curve, PointLike, Source, Text};
use super::note::{Note, Reason, Role};
use super::outlook::{self, Line};
use super::roles::{self, CURVES, POINTS};
use super::{Drawing, convert, names, unit, viewport};
use crate::geometry::Point;
use crate::job::{Role as JobRole, Settings};
use crate::refusal::Refusal;
use crate::tags::{self, Candidate, Options, Outline, Record, fold};
use crate::tolerance;

/// Curves that are not read yet.
const UNREAD: [&str; 5] = ["SPLINE", "ELLIPSE", "HELIX", "MLINE", "CIRCLE"];

/// Whether the first scan of a drawing keeps a record: everything on the layers of axis and loads, by their patterns or, where
/// the job names none, by words in their names.
pub fn keeps(settings: &Settings, candidate: &Candidate<'_>) -> bool {
    let stated = |role: Role| settings.states(&format!("layers.{}", role.key()));
    if candidate.kind == "VIEWPORT" {
        return true;
    }
    match settings.layers.role_of(candidate.layer) {
        Ok(Some(JobRole::Axis | JobRole::Loads)) | Err(_) => true,
        Ok(_) => {
            candidate.block.is_none()
                && ((!stated(Role::Axis)
                    && CURVES.contains(&candidate.kind)
                    && names::axis_word(candidate.layer).is_some())
                    || (!stated(Role::Loads) && names::loads_word(candidate.layer).is_some()))
        }
    }
}

/// Scans a drawing so that [`read_outlined`] finds what it needs; without the hash of the file.
///
/// # Errors
/// As [`tags::scan`].
pub fn scan(bytes: &tags::Source, settings: &Settings) -> Result<Outline, Refusal> {
    let keep = |candidate: &Candidate<'_>| keeps(settings, candidate);
    tags::scan(bytes, &Options { keep: Some(&keep), hash: false })
}

/// Reads what the job asks for from a drawing that [`scan`] has outlined.
///
/// # Errors
/// When no axis is found, a layer that the job names is missing or unusable, or an entity on it cannot be read.
pub fn read_outlined(
    bytes: &tags::Source,
    outline: &Outline,
    settings: &Settings,
) -> Result<Drawing, Refusal> {
    let notes = outline.notes.iter().cloned().map(Note::File).collect();
    let mut reader = Reader { bytes, outline, settings, notes };
    let (axis_layers, axis) = reader.axis()?;
    let LoadLayers { layers: load_layers, points, texts } = reader.loads(&axis_layers, &axis)?;
    reader.one_plane(&axis, &points)?;
    reader.hidden(axis_layers.iter().chain(&load_layers));
    reader.parts_not_read()?;
    reader.in_blocks(&axis_layers, &load_layers)?;
    let number = |name| outline.header(name, 70).and_then(|v| v.parse().ok());
    let (left, right) = extent(&axis);
    let unit = unit::decide(
        settings.drawing.unit,
        settings.drawing.scale,
        number("$INSUNITS"),
        number("$MEASUREMENT"),
        right - left,
        &mut reader.notes,
    );
    let viewports = outline.records.iter().filter_map(viewport::viewport).collect();
    Ok(Drawing { unit, axis_layers, load_layers, axis, points, texts, viewports, notes: reader.notes })
}

/// The layers of the loads with what they hold.
#[derive(Default)]
struct LoadLayers {
    layers: Vec<String>,
    points: Vec<PointLike>,
    texts: Vec<Text>,
}

struct Reader<'a> {
    bytes: &'a tags::Source,
    outline: &'a Outline,
    settings: &'a Settings,
    notes: Vec<Note>,
}

impl Reader<'_> {
    /// The axis: by the patterns, else guessed by name and content, else by content.
    fn axis(&mut self) -> Result<(Vec<String>, Vec<Curve>), Refusal> {
        let layers = roles::named(self.outline, self.settings, Role::Axis, &CURVES)?;
        if !layers.is_empty() {
            let curves = self.curves(&layers, &self.outline.records)?;
            self.refuse_unread(&layers)?;
            return Ok((layers, curves));
        }
        // The best names first; among equals the one layer that holds a line from springing to springing.
        let by_name = roles::axis_by_name(self.outline);
        for rank in [3, 2, 1] {
            let same: Vec<_> = by_name.iter().filter(|n| n.0 == rank).collect();
            let mut fitting = Vec::new();
            for (_, layer, word) in same {
                let one = [layer.clone()];
                if let Ok(curves) = self.curves(&one, &self.outline.records)
                    && outlook::one_line(&curves).is_some()
                {
                    fitting.push((layer.clone(), *word));
                }
            }
            match &fitting[..] {
                [] => {}
                [(layer, word)] => {
                    return self.guessed_axis(layer, Reason::Word(word), &self.outline.records);
                }
                several => {
                    let names: Vec<String> = several.iter().map(|s| s.0.clone()).collect();
                    return Err(roles::no_axis(self.outline, &names));
                }
            }
        }
        self.axis_by_content()
    }

    fn axis_by_content(&mut self) -> Result<(Vec<String>, Vec<Curve>), Refusal> {
        let layers = roles::holding(self.outline, &CURVES, tolerance::GUESS_ENTITIES, &[]);
        let records = self.rescan(&layers, &CURVES)?;
        let mut fitting: Vec<(String, Line)> = Vec::new();
        for layer in &layers {
            if names::loads_word(layer).is_some() {
                continue;
            }
            let one = [layer.clone()];
            // A layer with an entity that cannot be read is no candidate; were it named, the entity would be refused.
            if let Ok(curves) = self.curves(&one, &records)
                && let Some(line) = outlook::one_line(&curves)
            {
                fitting.push((layer.clone(), line));
            }
        }
        match &fitting[..] {
            [(layer, line)] => {
                let reason = Reason::OneLine { span: line.span, rise: line.rise };
                self.guessed_axis(layer, reason, &records)
            }
            several => {
                let names: Vec<String> = several.iter().map(|s| s.0.clone()).collect();
                Err(roles::no_axis(self.outline, &names))
            }
        }
    }

    fn guessed_axis(
        &mut self,
        layer: &str,
        reason: Reason,
        records: &[Record],
    ) -> Result<(Vec<String>, Vec<Curve>), Refusal> {
        let layers = vec![layer.to_owned()];
        let curves = self.curves(&layers, records)?;
        self.notes.push(Note::LayerGuessed { role: Role::Axis, layer: layer.to_owned(), reason });
        Ok((layers, curves))
    }

    /// The loads: by the patterns, else guessed by name, else by points that stand over the axis.
    fn loads(&mut self, axis_layers: &[String], axis: &[Curve]) -> Result<LoadLayers, Refusal> {
        let layers = roles::named(self.outline, self.settings, Role::Loads, &POINTS)?;
        if !layers.is_empty() {
            let (points, texts) = self.points(&layers, &self.outline.records)?;
            return Ok(LoadLayers { layers, points, texts });
        }
        let by_name = roles::loads_by_name(self.outline, axis_layers);
        if !by_name.is_empty() {
            for (layer, word) in &by_name {
                self.notes.push(Note::LayerGuessed {
                    role: Role::Loads,
                    layer: layer.clone(),
                    reason: Reason::Word(word),
                });
            }
            let layers: Vec<String> = by_name.into_iter().map(|n| n.0).collect();
            let (points, texts) = self.points(&layers, &self.outline.records)?;
            return Ok(LoadLayers { layers, points, texts });
        }
        self.loads_by_content(axis_layers, axis)
    }

    fn loads_by_content(&mut self, axis_layers: &[String], axis: &[Curve]) -> Result<LoadLayers, Refusal> {
        let layers = roles::holding(self.outline, &POINTS, tolerance::GUESS_ENTITIES, axis_layers);
        let records = self.rescan(&layers, &[&POINTS[..], &["TEXT", "MTEXT"]].concat())?;
        let Some(line) = outlook::one_line(axis) else {
            self.notes.push(Note::NoLoadLayer);
            return Ok(LoadLayers::default());
        };
        let mut best: Option<(usize, usize, String)> = None;
        for layer in layers {
            let Ok((points, _)) = self.points(std::slice::from_ref(&layer), &records) else {
                continue;
            };
            let over = points.iter().filter(|p| stands_over(p.at, axis, &line)).count();
            let enough = over as f64 >= tolerance::POINTS_OVER * points.len() as f64 && over > 1;
            if enough && best.as_ref().is_none_or(|b| over > b.0) {
                best = Some((over, points.len(), layer));
            }
        }
        let Some((over, of, layer)) = best else {
            self.notes.push(Note::NoLoadLayer);
            return Ok(LoadLayers::default());
        };
        let layers = vec![layer.clone()];
        let (points, texts) = self.points(&layers, &records)?;
        self.notes.push(Note::LayerGuessed {
            role: Role::Loads,
            layer,
            reason: Reason::PointsOver { over, of },
        });
        Ok(LoadLayers { layers, points, texts })
    }

    fn rescan(&self, layers: &[String], kinds: &[&str]) -> Result<Vec<Record>, Refusal> {
        rescan(self.bytes, layers, kinds)
    }

    /// The curves on some layers.
    fn curves(&self, layers: &[String], records: &[Record]) -> Result<Vec<Curve>, Refusal> {
        let mut curves = Vec::new();
        for record in in_model(records, layers) {
            if CURVES.contains(&record.kind.as_str()) {
                curves.extend(convert::curve(record, &self.outline.decoder)?);
            }
        }
        Ok(curves)
    }

    /// Refuses curves on the layers of the axis that cannot be read: without them it would be another axis.
    fn refuse_unread(&self, layers: &[String]) -> Result<(), Refusal> {
        match in_model(&self.outline.records, layers).find(|r| UNREAD.contains(&r.kind.as_str())) {
            Some(record) => Err(not_an_axis(record)),
            None => Ok(()),
        }
    }

    /// The points and texts on some layers.
    fn points(&self, layers: &[String], records: &[Record]) -> Result<(Vec<PointLike>, Vec<Text>), Refusal> {
        let mut points = Vec::new();
        let mut texts = Vec::new();
        for record in in_model(records, layers) {
            match record.kind.as_str() {
                kind if POINTS.contains(&kind) => {
                    points.extend(convert::point(record, &self.outline.decoder)?)
                }
                "TEXT" | "MTEXT" => texts.extend(convert::text(record, &self.outline.decoder)?),
                _ => {}
            }
        }
        Ok((points, texts))
    }

    /// Refuses curves and points that lie in different planes.
    fn one_plane(&self, axis: &[Curve], points: &[PointLike]) -> Result<(), Refusal> {
        let Some(first) = axis.first() else {
            return Ok(());
        };
        let (left, right) = extent(axis);
        let slack = tolerance::FLAT * (right - left);
        let others = axis.iter().map(|c| (&c.source, c.z)).chain(points.iter().map(|p| (&p.source, p.z)));
        for (source, z) in others {
            if (z - first.z).abs() > slack {
                return Err(source.refuse(
                    "not-flat",
                    format!(
                        "the {} lies at the height z = {z}, {} at z = {}: only elevations drawn flat in the x-y plane \
                         are read",
                        source.kind,
                        first.source.named(),
                        first.z
                    ),
                    "Set the z of all entities of the elevation to the same value",
                ));
            }
        }
        Ok(())
    }

    fn hidden<'s>(&mut self, layers: impl Iterator<Item = &'s String>) {
        for name in layers {
            if let Some(layer) = self.outline.layer(name)
                && (layer.frozen || layer.off)
            {
                self.notes.push(Note::LayerHidden { layer: name.clone(), frozen: layer.frozen });
            }
        }
    }

    /// Layers with the usual names of parts that are not read.
    fn parts_not_read(&mut self) -> Result<(), Refusal> {
        for layer in &self.outline.census {
            let count: u64 = layer.model.values().sum();
            let part = match roles::role_of(self.settings, &layer.name)? {
                Some(role) if role != JobRole::Axis && role != JobRole::Loads => role.name(),
                _ => continue,
            };
            if count > 0 {
                self.notes.push(Note::PartNotRead { part, layer: layer.name.clone(), count });
            }
        }
        Ok(())
    }

    /// Tells what stands on the layers of axis and loads and was not read: other types, paper space, blocks.
    fn in_blocks(&mut self, axis: &[String], loads: &[String]) -> Result<(), Refusal> {
        self.passed_over(Role::Axis, axis, &CURVES);
        self.passed_over(Role::Loads, loads, &[&POINTS[..], &["TEXT", "MTEXT"]].concat());
        let mut found: BTreeMap<(usize, Role, String), u64> = BTreeMap::new();
        for record in self.outline.records.iter().filter(|r| !r.ours) {
            let Some(block) = record.block else {
                continue;
            };
            let role = match roles::role_of(self.settings, &record.layer)? {
                Some(JobRole::Axis) if CURVES.contains(&record.kind.as_str()) => Role::Axis,
                Some(JobRole::Loads) if POINTS.contains(&record.kind.as_str()) => Role::Loads,
                _ => continue,
            };
            *found.entry((block, role, record.layer.clone())).or_default() += 1;
        }
        if found.is_empty() {
            return Ok(());
        }
        // Only now is it worth going through the drawing again.
        let inserted = tags::inserted(self.bytes, self.outline)?;
        for ((block, role, layer), count) in found {
            let block = self.outline.blocks[block].name.clone();
            if inserted.contains(&fold(&block)) {
                self.notes.push(Note::InBlock { role, block, layer, count });
            }
        }
        Ok(())
    }

    fn passed_over(&mut self, role: Role, layers: &[String], read_kinds: &[&str]) {
        for name in layers {
            let Some(census) = self.outline.census.iter().find(|c| fold(&c.name) == fold(name)) else {
                continue;
            };
            for (kind, &count) in census.model.iter().filter(|(k, _)| !read_kinds.contains(&k.as_str())) {
                let could_be_load = role == Role::Loads
                    && (CURVES.contains(&kind.as_str())
                        || matches!(kind.as_str(), "LEADER" | "MULTILEADER" | "SPLINE"));
                let first = self
                    .outline
                    .records
                    .iter()
                    .find(|r| r.block.is_none() && r.kind == *kind && fold(&r.layer) == fold(name))
                    .map(convert::source);
                self.notes.push(Note::PassedOver {
                    role,
                    layer: name.clone(),
                    kind: kind.clone(),
                    count,
                    could_be_load,
                    first,
                });
            }
            let paper: u64 = census.paper.values().sum();
            if paper > 0 {
                self.notes.push(Note::PaperSpace { layer: name.clone(), count: paper });
            }
        }
    }
}

/// Records of these kinds on these layers, in model space.
pub(super) fn rescan(
    bytes: &tags::Source,
    layers: &[String],
    kinds: &[&str],
) -> Result<Vec<Record>, Refusal> {
    let wanted: Vec<String> = layers.iter().map(|l| fold(l)).collect();
    let keep =
        |c: &Candidate<'_>| c.block.is_none() && kinds.contains(&c.kind) && wanted.contains(&fold(c.layer));
    Ok(tags::scan(bytes, &Options { keep: Some(&keep), hash: false })?.records)
}

/// Records in model space on these layers that are not our marks.
pub(super) fn in_model<'r>(records: &'r [Record], layers: &[String]) -> impl Iterator<Item = &'r Record> {
    let layers: Vec<String> = layers.iter().map(|l| fold(l)).collect();
    records.iter().filter(move |r| {
        r.block.is_none() && !r.ours && layers.contains(&fold(&r.layer)) && !r.in_paper_space()
    })
}

fn not_an_axis(record: &Record) -> Refusal {
    let source: Source = convert::source(record);
    source.refuse(
        "axis-kind",
        format!(
            "layer {} of the axis holds {} {}: the axis is read from LINE, ARC, LWPOLYLINE and POLYLINE only",
            record.layer,
            if matches!(record.kind.as_str(), "ELLIPSE" | "MLINE") { "an" } else { "a" },
            record.kind
        ),
        "Draw the axis with lines, arcs and polylines, or move what is no part of it to another layer",
    )
}

/// Least and greatest x of the pieces' ends and middles.
fn extent(curves: &[Curve]) -> (f64, f64) {
    let mut low = f64::INFINITY;
    let mut high = f64::NEG_INFINITY;
    for piece in curves.iter().flat_map(|c| &c.pieces) {
        for p in [piece.start(), piece.point_at(piece.length() / 2.0), piece.end()] {
            low = low.min(p.x);
            high = high.max(p.x);
        }
    }
    if low <= high { (low, high) } else { (0.0, 0.0) }
}

/// Whether a point stands over an arch (hangs under a cable), or on it.
pub(super) fn stands_over(p: Point, axis: &[Curve], line: &Line) -> bool {
    let slack = tolerance::BESIDE_AXIS * line.span;
    if p.x < line.left - slack || p.x > line.right + slack {
        return false;
    }
    let nearest = axis
        .iter()
        .flat_map(|c| &c.pieces)
        .flat_map(|s| (0..=4).map(move |i| s.point_at(s.length() * f64::from(i) / 4.0)))
        .min_by(|a, b| (a.x - p.x).abs().total_cmp(&(b.x - p.x).abs()));
    nearest.is_none_or(|q| if line.rise > 0.0 { p.y > q.y - slack } else { p.y < q.y + slack })
}
