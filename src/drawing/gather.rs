//! One drawing from its bytes: layers chosen, their entities read, everything left aside told.

use std::borrow::Cow;

use super::entity::{Curve, PointLike, Text};
use super::note::{Note, Reason, Role};
use super::outlook::{self, Line};
use super::roles::{self, CURVES, LOADS, POINTS};
use super::space::View;
use super::stroke::{self, STROKES, Stroke};
use super::surroundings::{self, Surroundings};
use super::{Drawing, blocks, convert, names, outlines, reference, unit, viewport};
use crate::geometry::Point;
use crate::job::{Role as JobRole, Settings};
use crate::refusal::Refusal;
use crate::tags::{self, Candidate, Options, Outline, Record, fold};
use crate::tolerance;

/// Curves that make no axis.
const UNREAD: [&str; 3] = ["HELIX", "MLINE", "CIRCLE"];

/// Whether the first scan of a drawing keeps a record: everything on the layers of axis, ring lines, hinges and loads, by their patterns or, where
/// the job names none, by words in their names.
pub fn keeps(settings: &Settings, candidate: &Candidate<'_>) -> bool {
    let stated = |role: Role| settings.states(&format!("layers.{}", role.key()));
    if candidate.kind == "VIEWPORT" {
        return true;
    }
    if outlines::is_area_layer(settings, candidate.layer) {
        return true;
    }
    match settings.layers.role_of(candidate.layer) {
        Err(_) => true,
        Ok(Some(role)) if is_read(role, settings) => true,
        Ok(Some(JobRole::Road)) => false,
        Ok(_) => {
            candidate.block.is_none()
                && ((!stated(Role::Axis)
                    && CURVES.contains(&candidate.kind)
                    && names::axis_word(candidate.layer).is_some())
                    || (!stated(Role::Loads) && names::loads_word(candidate.layer).is_some()))
        }
    }
}

/// Whether what stands on the layers of a role is read under these settings.
fn is_read(role: JobRole, settings: &Settings) -> bool {
    use JobRole::{Axis, Extrados, Hinges, Intrados, Loads, Plan, Posts, Road};
    match role {
        Axis | Loads | Intrados | Extrados | Hinges | Posts | Plan => true,
        Road => !settings.traffic.is_empty(),
        _ => false,
    }
}

/// Scans a drawing so that [`read_outlined`] finds what it needs; without the hash of the file.
///
/// # Errors
/// As [`tags::scan`].
pub fn scan(bytes: &tags::Source, settings: &Settings) -> Result<Outline, Refusal> {
    let all = bytes.len() <= tolerance::SURROUNDINGS;
    let keep =
        |candidate: &Candidate<'_>| keeps(settings, candidate) || all && surroundings::keeps(candidate);
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
    let mut notes: Vec<Note> = outline.notes.iter().cloned().map(Note::File).collect();
    let outline = blocks::expanded(bytes, outline, settings, &mut notes)?;
    let look = |view: View| read_seen(bytes, &outline, settings, view, notes.clone());
    if let Some(view) = View::stated(settings.drawing.plane) {
        return look(view).map_err(|e| reference::explained(e, &outline, settings));
    }
    match look(View::XY) {
        Ok(drawing) => Ok(drawing),
        Err(refusal) if matches!(refusal.check.as_str(), "not-flat" | "no-axis") => {
            let found = upright(&outline, settings)?.into_iter().find_map(|view| {
                let mut drawing = look(view).ok()?;
                drawing.notes.push(Note::PlaneGuessed { plane: view.name() });
                Some(drawing)
            });
            found.ok_or_else(|| reference::explained(refusal, &outline, settings))
        }
        Err(refusal) => Err(reference::explained(refusal, &outline, settings)),
    }
}

/// Upright planes to look at when the axis does not lie in the drawing's x-y plane: the one it lies in where layers are named,
/// else those along the drawing's own axes.
fn upright(outline: &Outline, settings: &Settings) -> Result<Vec<View>, Refusal> {
    let mut points = Vec::new();
    for record in outline.records.iter().filter(|r| r.block.is_none() && !r.ours && !r.in_paper_space()) {
        if CURVES.contains(&record.kind.as_str())
            && matches!(
                roles::role_of(settings, &record.layer)?,
                Some(JobRole::Axis | JobRole::Intrados | JobRole::Extrados)
            )
        {
            points.extend(convert::places(record, &outline.decoder)?);
        }
    }
    if points.is_empty() {
        return Ok(vec![View::XZ, View::YZ]);
    }
    Ok(View::through(&points).into_iter().filter(|v| *v != View::XY).collect())
}

/// Reads a drawing as it is seen in one plane.
fn read_seen(
    bytes: &tags::Source,
    outline: &Outline,
    settings: &Settings,
    view: View,
    notes: Vec<Note>,
) -> Result<Drawing, Refusal> {
    let original = outline;
    let mut seen = Cow::Borrowed(outline);
    if view != View::XY {
        view.look(&mut seen.to_mut().records);
    }
    let outline = &*seen;
    let mut reader = Reader { bytes, outline, settings, view, notes };
    let [(intrados_layers, intrados), (extrados_layers, extrados)] = reader.ring_lines()?;
    let (axis_layers, axis) = reader.axis(!intrados.is_empty())?;
    // Where no axis is drawn, the ring lines stand for it.
    let outline_of = if axis.is_empty() { [&intrados[..], &extrados[..]].concat() } else { axis.clone() };
    let at = if axis.is_empty() { &intrados } else { &axis };
    let LoadLayers { layers: load_layers, points, texts, strokes, by_content } =
        reader.loads(&axis_layers, at)?;
    reader.one_plane(&[&axis[..], &intrados, &extrados].concat(), &points, &strokes)?;
    reader.hidden(axis_layers.iter().chain(&load_layers).chain(&intrados_layers).chain(&extrados_layers));
    let hinge_layers = roles::named(outline, settings, Role::Hinges, &POINTS)?;
    let (hinges, _) = reader.points(&hinge_layers, &outline.records)?;
    reader.passed_over(Role::Hinges, &hinge_layers, &POINTS);
    reader.hidden(hinge_layers.iter());
    let road = reader.road()?;
    if bytes.len() > tolerance::SURROUNDINGS {
        reader.notes.push(Note::SurroundingsNotRead);
    }
    let height = outline_of.first().map_or(0.0, |c| c.z);
    let Surroundings { posts, plan, plan_of_rib, dimensions, title } =
        surroundings::read(original, outline, view, height, settings, &mut reader.notes)?;
    let areas = outlines::read(outline, settings, &mut reader.notes)?;
    reader.areas_in_plane(&areas, [&axis[..], &intrados].concat().first())?;
    reader.parts_not_read()?;
    reader.not_read(&axis_layers, &load_layers, by_content);
    reader.passed_over(Role::Intrados, &intrados_layers, &CURVES);
    reader.passed_over(Role::Extrados, &extrados_layers, &CURVES);
    let fitted = axis.iter().chain(&intrados).chain(&extrados).filter(|c| c.fitted);
    reader
        .notes
        .extend(fitted.map(|c| Note::CurveFitted { source: c.source.clone(), pieces: c.pieces.len() }));
    let number = |name| outline.header(name, 70).and_then(|v| v.parse().ok());
    let (left, right) = extent(&outline_of);
    let unit = unit::decide(
        settings.drawing.unit,
        settings.drawing.scale,
        number("$INSUNITS"),
        number("$MEASUREMENT"),
        right - left,
        &mut reader.notes,
    );
    let plane = view.plane(outline_of.first().map_or(0.0, |c| c.z));
    let viewports: Vec<_> = outline.records.iter().filter_map(|r| viewport::viewport(r, &plane)).collect();
    let (low, high) = corners(&outline_of);
    if !viewports.is_empty() && !viewports.iter().any(|v| v.shows(low, high) == viewport::Shown::Whole) {
        let part = viewports.iter().filter(|v| v.shows(low, high) == viewport::Shown::Part).count();
        reader.notes.push(Note::NotInLayouts { viewports: viewports.len(), part });
    }
    Ok(Drawing {
        unit,
        plane,
        axis_layers,
        load_layers,
        axis,
        intrados,
        extrados,
        points,
        strokes,
        posts,
        plan,
        plan_of_rib,
        dimensions,
        title,
        hinges,
        road,
        areas,
        texts,
        viewports,
        notes: reader.notes,
    })
}

/// The layers of the loads with what they hold.
#[derive(Default)]
struct LoadLayers {
    layers: Vec<String>,
    points: Vec<PointLike>,
    texts: Vec<Text>,
    strokes: Vec<Stroke>,
    /// Guessed by what they hold: lines on them are not read.
    by_content: bool,
}

/// Layers with the curves on them.
type Layered = (Vec<String>, Vec<Curve>);

struct Reader<'a> {
    bytes: &'a tags::Source,
    outline: &'a Outline,
    settings: &'a Settings,
    view: View,
    notes: Vec<Note>,
}

impl Reader<'_> {
    /// The road line, where traffic runs on it.
    fn road(&mut self) -> Result<Vec<Curve>, Refusal> {
        if self.settings.traffic.is_empty() {
            return Ok(Vec::new());
        }
        let layers = roles::named(self.outline, self.settings, Role::Road, &CURVES)?;
        let curves = self.curves(&layers, &self.outline.records)?;
        self.refuse_unread(&layers, Role::Road)?;
        self.passed_over(Role::Road, &layers, &CURVES);
        self.hidden(layers.iter());
        Ok(curves)
    }

    /// Intrados and extrados by the patterns; both or none.
    fn ring_lines(&mut self) -> Result<[Layered; 2], Refusal> {
        let read = |role: Role| -> Result<(Vec<String>, Vec<Curve>), Refusal> {
            let layers = roles::named(self.outline, self.settings, role, &CURVES)?;
            let curves = self.curves(&layers, &self.outline.records)?;
            self.refuse_unread(&layers, role)?;
            Ok((layers, curves))
        };
        let lines = [read(Role::Intrados)?, read(Role::Extrados)?];
        match &lines {
            [(inner, _), (outer, _)] if inner.is_empty() != outer.is_empty() => {
                let (have, lack) =
                    if outer.is_empty() { ("intrados", "extrados") } else { ("extrados", "intrados") };
                let layer = inner.iter().chain(outer).next().cloned().unwrap_or_default();
                Err(Refusal::new(
                    "ring-half",
                    format!("layer {layer} holds the {have}, and no layer holds the {lack}: a ring has both"),
                    format!("Draw the {lack}, or name its layer with `[layers] {lack}`"),
                )
                .on_layer(layer))
            }
            _ => Ok(lines),
        }
    }

    /// The axis: by the patterns, else (without ring lines) guessed by name and content, else by content.
    fn axis(&mut self, ring: bool) -> Result<(Vec<String>, Vec<Curve>), Refusal> {
        let layers = roles::named(self.outline, self.settings, Role::Axis, &CURVES)?;
        if !layers.is_empty() {
            let curves = self.curves(&layers, &self.outline.records)?;
            self.refuse_unread(&layers, Role::Axis)?;
            return Ok((layers, curves));
        }
        if ring {
            return Ok((Vec::new(), Vec::new()));
        }
        // The best names first; among equals the one layer that holds a line from springing to springing.
        let mut by_name = roles::axis_by_name(self.outline);
        by_name.retain(|n| !outlines::is_area_layer(self.settings, &n.1));
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
        let mut layers = roles::holding(self.outline, &CURVES, tolerance::GUESS_ENTITIES, &[]);
        layers.retain(|l| !outlines::is_area_layer(self.settings, l));
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
        let layers = roles::named(self.outline, self.settings, Role::Loads, &LOADS)?;
        if !layers.is_empty() {
            return self.drawn_loads(layers);
        }
        let mut by_name = roles::loads_by_name(self.outline, axis_layers);
        by_name.retain(|n| !outlines::is_area_layer(self.settings, &n.0));
        if !by_name.is_empty() {
            for (layer, word) in &by_name {
                self.notes.push(Note::LayerGuessed {
                    role: Role::Loads,
                    layer: layer.clone(),
                    reason: Reason::Word(word),
                });
            }
            return self.drawn_loads(by_name.into_iter().map(|n| n.0).collect());
        }
        self.loads_by_content(axis_layers, axis)
    }

    /// Points, texts and lines on layers that are known to hold loads.
    fn drawn_loads(&self, layers: Vec<String>) -> Result<LoadLayers, Refusal> {
        let (points, texts) = self.points(&layers, &self.outline.records)?;
        let mut strokes = Vec::new();
        for record in in_model(&self.outline.records, &layers) {
            if STROKES.contains(&record.kind.as_str()) {
                strokes.extend(stroke::stroke(record, &self.outline.decoder)?);
            }
        }
        Ok(LoadLayers { layers, points, texts, strokes, by_content: false })
    }

    fn loads_by_content(&mut self, axis_layers: &[String], axis: &[Curve]) -> Result<LoadLayers, Refusal> {
        let mut layers = roles::holding(self.outline, &POINTS, tolerance::GUESS_ENTITIES, axis_layers);
        layers.retain(|l| !outlines::is_area_layer(self.settings, l));
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
        Ok(LoadLayers { layers, points, texts, strokes: Vec::new(), by_content: true })
    }

    fn rescan(&self, layers: &[String], kinds: &[&str]) -> Result<Vec<Record>, Refusal> {
        let mut records = rescan(self.bytes, layers, kinds)?;
        self.view.look(&mut records);
        Ok(records)
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

    /// Refuses curves on the layers of axis or ring line that cannot be read: without them it would be another one.
    fn refuse_unread(&self, layers: &[String], role: Role) -> Result<(), Refusal> {
        match in_model(&self.outline.records, layers).find(|r| UNREAD.contains(&r.kind.as_str())) {
            Some(record) => Err(roles::not_readable(record, role)),
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
    fn one_plane(&self, axis: &[Curve], points: &[PointLike], strokes: &[Stroke]) -> Result<(), Refusal> {
        let Some(first) = axis.first() else {
            return Ok(());
        };
        let (left, right) = extent(axis);
        let slack = tolerance::FLAT * (right - left);
        let others = axis
            .iter()
            .map(|c| (&c.source, c.z))
            .chain(points.iter().map(|p| (&p.source, p.z)))
            .chain(strokes.iter().map(|s| (&s.source, s.z)));
        for (source, z) in others {
            if (z - first.z).abs() > slack {
                return Err(source.refuse(
                    "not-flat",
                    format!(
                        "the {} lies {z} over the {} plane through the origin, {} {}: an elevation is read in one plane",
                        source.kind,
                        self.view.name(),
                        first.source.named(),
                        first.z
                    ),
                    "Move all entities of the elevation into one plane (in a flat drawing: the same z)",
                ));
            }
        }
        Ok(())
    }

    /// Refuses outlines that lie in another plane than the axis.
    fn areas_in_plane(&self, areas: &[outlines::Outlines], axis: Option<&Curve>) -> Result<(), Refusal> {
        let Some(axis) = axis else { return Ok(()) };
        for area in areas {
            let hatches = area.hatches.iter().flat_map(|h| &h.loops);
            let all: Vec<Curve> = std::iter::once(axis).chain(&area.curves).chain(hatches).cloned().collect();
            self.one_plane(&all, &[], &[])?;
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
                Some(role) if is_read(role, self.settings) => continue,
                Some(role) => role.name(),
                _ => continue,
            };
            if count > 0 {
                self.notes.push(Note::PartNotRead { part, layer: layer.name.clone(), count });
            }
        }
        Ok(())
    }

    /// Tells what stands on the layers of axis and loads and was not read: other types, paper space.
    fn not_read(&mut self, axis: &[String], loads: &[String], by_content: bool) {
        self.passed_over(Role::Axis, axis, &CURVES);
        let lines: &[&str] = if by_content { &[] } else { &STROKES };
        self.passed_over(Role::Loads, loads, &[&POINTS[..], lines, &["TEXT", "MTEXT"]].concat());
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

/// Least and greatest x of the pieces' ends and middles.
fn extent(curves: &[Curve]) -> (f64, f64) {
    let (low, high) = corners(curves);
    (low.x, high.x)
}

/// Corners of the box about the pieces' ends and middles.
pub(super) fn corners(curves: &[Curve]) -> (Point, Point) {
    let mut low = Point::new(f64::INFINITY, f64::INFINITY);
    let mut high = Point::new(f64::NEG_INFINITY, f64::NEG_INFINITY);
    for piece in curves.iter().flat_map(|c| &c.pieces) {
        for p in [piece.start(), piece.point_at(piece.length() / 2.0), piece.end()] {
            low = Point::new(low.x.min(p.x), low.y.min(p.y));
            high = Point::new(high.x.max(p.x), high.y.max(p.y));
        }
    }
    if low.x <= high.x { (low, high) } else { (Point::ORIGIN, Point::ORIGIN) }
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
