//! Points and lines on load layers to forces.

use super::drawn::Drawn;
use super::figures::{self, Figure, NoFigure};
use super::labels::{self, Label};
use super::line_loads::{self, LineLoad};
use super::marks::{self, Mark, Sense};
use super::note::Note;
use super::{Forces, Load, MagnitudeFrom, extended, heads};
use crate::drawing::{PointLike, Source, Stroke, Text, clusters};
use crate::geometry::Point;
use crate::job::{Decimal, RibDepth, Settings};
use crate::refusal::Refusal;
use crate::tolerance;
use crate::units::ForceUnit;

/// What the job says of loads.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LoadSettings {
    /// Unit of figures without one; `None`: not stated.
    pub unit: Option<ForceUnit>,
    /// Force of a load without a figure, kN.
    pub unlabelled: Option<f64>,
    /// Length of an arrow per unit of force, m; `None`: the length of an arrow says nothing.
    pub arrow_scale: Option<f64>,
    /// How fractions are marked.
    pub decimal: Decimal,
    /// Whether the rib has a weight of its own, in kN.
    pub weighs: bool,
    /// Depth of the rib where no ring is drawn, m.
    pub depth: Option<RibDepth>,
}

impl Default for LoadSettings {
    fn default() -> Self {
        Self {
            unit: None,
            unlabelled: None,
            arrow_scale: None,
            decimal: Decimal::Auto,
            weighs: false,
            depth: None,
        }
    }
}

impl From<&Settings> for LoadSettings {
    fn from(settings: &Settings) -> Self {
        Self {
            unit: settings.loads.unit,
            unlabelled: settings.loads.unlabelled_kn(),
            arrow_scale: settings.loads.arrow_scale,
            decimal: settings.loads.decimal,
            depth: settings.rib.depth,
            weighs: settings.rib.unit_weight.is_some_and(|w| w > 0.0) || !settings.area.is_empty(),
        }
    }
}

/// Tags of attributes that say "force" in drawings of the trade, compared in upper case.
const FORCE_TAGS: [&str; 22] = [
    "LOAD",
    "FORCE",
    "P",
    "F",
    "Q",
    "G",
    "N",
    "W",
    "KN",
    "LAST",
    "KRAFT",
    "CHARGE",
    "EFFORT",
    "CARGA",
    "FUERZA",
    "FORCA",
    "CARICO",
    "FORZA",
    "BELASTING",
    "KRACHT",
    "VALUE",
    "MAGNITUDE",
];

/// The figure of a load before its unit is known.
struct Found {
    figure: Figure,
    from: MagnitudeFrom,
    text: String,
    application: Option<String>,
}

/// What the load layers of a drawing hold.
#[derive(Debug, Clone, Copy)]
pub struct OnLayers<'a> {
    /// Points.
    pub points: &'a [PointLike],
    /// Lines.
    pub strokes: &'a [Stroke],
    /// Texts.
    pub texts: &'a [Text],
}

/// What the load layers give.
#[derive(Debug, Clone, PartialEq)]
pub struct Loaded {
    /// Single loads.
    pub loads: Vec<Load>,
    /// Line loads over the whole of their lines.
    pub lines: Vec<LineLoad>,
    /// What the single loads are given in.
    pub forces: Forces,
}

/// All loads, points before lines, with their forces; places are in m (`metres` a drawing unit). `distance` is that of a point
/// in drawing units to the nearest rib.
///
/// # Errors
/// When a label that belongs to a load can be read in two ways; when only some loads have figures and the job does not
/// say what the others are; when figures stand too far from all loads.
pub fn loads(
    OnLayers { points, strokes, texts }: OnLayers<'_>,
    settings: &LoadSettings,
    metres: f64,
    distance: &dyn Fn(Point) -> f64,
    notes: &mut Vec<Note>,
) -> Result<Loaded, Refusal> {
    let places =
        points.iter().map(|p| p.at).chain(strokes.iter().flat_map(|s| s.pieces.iter().map(|p| p.start())));
    let reach = extent(places) * tolerance::ENDS_MEET;
    let arrows = heads::find(strokes, reach);
    let mut used: Vec<bool> = vec![false; strokes.len()];
    let (lined, unpaired) = line_loads::labelled(strokes, texts, &arrows, settings.decimal, &mut used, notes)
        .map_err(|_| crowded(texts))?;
    tell_unused(&unpaired, texts, metres, notes);
    let lines = lined
        .iter()
        .map(|line| {
            let text = &texts[line.label.text];
            let figure = readable(&line.label.figure, text)?;
            Ok(line_loads::load(line, &figure, strokes, &text.text, metres))
        })
        .collect::<Result<Vec<_>, Refusal>>()?;
    let marks = marks::marks(points, strokes, &arrows, &used, reach, distance, notes);
    tell_strokes(strokes, &arrows, &used, notes);
    let points = &marks;
    let mut found: Vec<Option<Found>> = Vec::with_capacity(points.len());
    for point in points {
        found.push(match from_attributes(point, settings.decimal, notes)? {
            None => from_extended(point, settings.decimal, notes)?,
            found => found,
        });
    }
    let open: Vec<bool> = found.iter().map(Option::is_none).collect();
    let labels = labels::pair(texts, points, &open, settings.decimal, notes).map_err(|_| crowded(texts))?;
    for label in &labels {
        let text = &texts[label.text];
        match label.load {
            Some(load) => {
                found[load] = Some(Found {
                    figure: readable(&label.figure, text)?,
                    from: MagnitudeFrom::Label,
                    text: text.text.clone(),
                    application: None,
                });
            }
            None => tell_unused(std::slice::from_ref(label), texts, metres, notes),
        }
    }
    let hung = hung_from_lines(points, &found, &arrows, strokes, &lined, reach, notes);
    by_length(points, &mut found, settings, metres);
    let kept: Vec<usize> = once_each(points, &found, notes).into_iter().filter(|&i| !hung[i]).collect();
    let figures = kept.iter().filter(|&&i| found[i].is_some()).count();
    let sized = !lines.is_empty() || kept.is_empty() && settings.weighs;
    if figures == 0 && settings.unlabelled.is_none() && !sized {
        none_out_of_reach(&labels, texts)?;
        if !kept.is_empty() {
            notes.push(Note::LoadsEqual { count: kept.len() });
        }
        let loads = kept.iter().map(|&i| load(&points[i], None, MagnitudeFrom::Equal, 1.0, metres)).collect();
        inferred(&kept, points, notes);
        return Ok(Loaded { loads, lines, forces: Forces::UnitLoads });
    }
    let bare: Vec<usize> = kept.iter().copied().filter(|&i| found[i].is_none()).collect();
    let unlabelled = match settings.unlabelled {
        Some(force) => force,
        None if bare.is_empty() => 0.0,
        None => return Err(some_without(&bare, figures, points)),
    };
    if !bare.is_empty() {
        notes.push(Note::Unlabelled {
            sources: bare.iter().map(|&i| points[i].source.clone()).collect(),
            force: unlabelled,
        });
    }
    inferred(&kept, points, notes);
    let unit = unit_of(&kept, &found, settings, notes);
    let loads = kept
        .iter()
        .map(|&i| match &found[i] {
            Some(f) => {
                let force = f.figure.value * f.figure.unit.unwrap_or(unit).kilonewtons();
                load(&points[i], Some(f), f.from, force, metres)
            }
            None => load(&points[i], None, MagnitudeFrom::Job, unlabelled, metres),
        })
        .collect();
    Ok(Loaded { loads, lines, forces: Forces::Kilonewtons })
}

/// Greatest distance of the places from the first one.
fn extent(mut places: impl Iterator<Item = Point>) -> f64 {
    let Some(first) = places.next() else {
        return 0.0;
    };
    places.map(|p| (p - first).hypot()).fold(0.0, f64::max)
}

/// Tells what became of lines that are no loads: heads of others, lines drawn twice, shapes of no known meaning.
fn tell_strokes(strokes: &[Stroke], arrows: &heads::Arrows, used: &[bool], notes: &mut Vec<Note>) {
    let mut shafts = vec![false; strokes.len()];
    for shaft in &arrows.shafts {
        shafts[shaft.stroke] = true;
    }
    for (i, stroke) in strokes.iter().enumerate() {
        let source = stroke.source.clone();
        if let Some(kept) = arrows.double_of[i] {
            notes.push(Note::MarkedTwice { source, kept: strokes[kept].source.clone() });
        } else if arrows.head_of[i].is_none() && !shafts[i] && !used[i] {
            notes.push(Note::Drawn(Drawn::ShapeNoLoad { source }));
        }
    }
}

/// Tells labels that belong to nothing.
fn tell_unused(labels: &[Label], texts: &[Text], metres: f64, notes: &mut Vec<Note>) {
    notes.extend(labels.iter().map(|label| Note::LabelUnused {
        source: texts[label.text].source.clone(),
        text: texts[label.text].text.clone(),
        nearest: label.nearest.map(|d| d * metres),
        reach: label.reach * metres,
    }));
}

/// Which marks are arrows without a figure that hang from the line of a line load; they are told.
fn hung_from_lines(
    marks: &[Mark],
    found: &[Option<Found>],
    arrows: &heads::Arrows,
    strokes: &[Stroke],
    lined: &[line_loads::Labelled],
    reach: f64,
    notes: &mut Vec<Note>,
) -> Vec<bool> {
    let from = line_loads::hung(arrows, strokes, lined, reach);
    let line_of = |i: usize| marks[i].stroke.and_then(|s| from[s]).filter(|_| found[i].is_none());
    for line in lined {
        let count = (0..marks.len()).filter(|&i| line_of(i) == Some(line.stroke)).count();
        if count > 0 {
            let line = strokes[line.stroke].source.clone();
            notes.push(Note::Drawn(Drawn::PartOfLine { line, count }));
        }
    }
    (0..marks.len()).map(|i| line_of(i).is_some()).collect()
}

/// Tells which senses were inferred, sorted by why.
fn inferred(kept: &[usize], marks: &[Mark], notes: &mut Vec<Note>) {
    for sense in [Sense::Down, Sense::Rib] {
        let sources: Vec<Source> = kept
            .iter()
            .filter(|&&i| marks[i].arrow.is_some_and(|a| a.sense == sense))
            .map(|&i| marks[i].source.clone())
            .collect();
        if !sources.is_empty() {
            notes.push(Note::Drawn(Drawn::SenseInferred { sources, sense }));
        }
    }
}

/// Gives arrows that have no figure the one that their length stands for.
fn by_length(marks: &[Mark], found: &mut [Option<Found>], settings: &LoadSettings, metres: f64) {
    let Some(scale) = settings.arrow_scale else {
        return;
    };
    for (mark, found) in marks.iter().zip(found) {
        if let (None, Some(arrow)) = (&found, mark.arrow) {
            let length = arrow.length * metres;
            *found = Some(Found {
                figure: Figure { name: None, value: length / scale, unit: None, per: None },
                from: MagnitudeFrom::ArrowLength,
                text: String::new(),
                application: None,
            });
        }
    }
}

/// One load, `size` along its direction.
fn load(point: &Mark, found: Option<&Found>, from: MagnitudeFrom, size: f64, metres: f64) -> Load {
    Load {
        label: found.and_then(|f| f.figure.name.clone()).unwrap_or_default(),
        at: (point.at.to_vec2() * metres).to_point(),
        force: point.direction() * size,
        set: point.source.layer.clone(),
        source: point.source.clone(),
        magnitude_from: from,
        text: found.map(|f| f.text.clone()).filter(|t| !t.is_empty()),
        application: found.and_then(|f| f.application.clone()),
        sense: point.arrow.map_or(Sense::Point, |a| a.sense),
        post: None,
        sideways: None,
    }
}

/// The figure in the attributes of a block reference: the one with a unit of force, else the one whose tag says so, else
/// the only one.
fn from_attributes(point: &Mark, decimal: Decimal, notes: &mut Vec<Note>) -> Result<Option<Found>, Refusal> {
    let read: Vec<(&str, &str, Result<Figure, NoFigure>)> = point
        .attributes
        .iter()
        .map(|a| (a.tag.as_str(), a.value.as_str(), figures::read(&a.value, decimal)))
        .filter(|r| matches!(r.2, Ok(_) | Err(NoFigure::TwoReadings { .. } | NoFigure::Separator(_))))
        .collect();
    let with_unit = |r: &&(&str, &str, Result<Figure, NoFigure>)| match &r.2 {
        Ok(figure) => figure.unit.is_some(),
        Err(NoFigure::TwoReadings { written, .. }) => written.contains(char::is_alphabetic),
        Err(_) => false,
    };
    let tagged = |r: &&(&str, &str, Result<Figure, NoFigure>)| is_force_tag(r.0);
    let mut choice: Vec<_> = read.iter().filter(with_unit).collect();
    if choice.is_empty() {
        choice = read.iter().filter(tagged).collect();
    }
    if choice.is_empty() {
        choice = read.iter().collect();
    }
    match choice.as_slice() {
        [] => Ok(None),
        [(tag, value, figure)] => match figure {
            Ok(figure) => {
                // A name of its own attribute, where the figure carries none.
                let name = figure.name.clone().or_else(|| name_attribute(point, tag));
                Ok(Some(Found {
                    figure: Figure { name, ..figure.clone() },
                    from: MagnitudeFrom::Attribute,
                    text: (*value).to_owned(),
                    application: None,
                }))
            }
            Err(why) => Err(unreadable(why, &point.source, value)),
        },
        several => {
            notes.push(Note::AttributesUnclear {
                source: point.source.clone(),
                tags: several.iter().map(|r| r.0.to_owned()).collect(),
            });
            Ok(None)
        }
    }
}

/// The figure in the extended data.
fn from_extended(mark: &Mark, decimal: Decimal, notes: &mut Vec<Note>) -> Result<Option<Found>, Refusal> {
    let Some(found) = extended::figure(&mark.source, &mark.extended, &is_force_tag, decimal, notes) else {
        return Ok(None);
    };
    Ok(Some(Found {
        figure: found.figure.map_err(|why| unreadable(&why, &mark.source, &found.text))?,
        from: MagnitudeFrom::ExtendedData,
        text: found.text,
        application: Some(found.application),
    }))
}

/// Whether a tag is a word for a load.
fn is_force_tag(tag: &str) -> bool {
    FORCE_TAGS.contains(&tag.trim().to_uppercase().as_str())
}

/// The text of an attribute that names the load.
fn name_attribute(point: &Mark, other_than: &str) -> Option<String> {
    point
        .attributes
        .iter()
        .find(|a| {
            a.tag != other_than
                && ["NAME", "NO", "NR", "ID", "LABEL", "MARK"].contains(&a.tag.trim().to_uppercase().as_str())
        })
        .map(|a| a.value.trim().to_owned())
        .filter(|v| !v.is_empty())
}

fn readable(figure: &Result<Figure, NoFigure>, text: &Text) -> Result<Figure, Refusal> {
    figure.clone().map_err(|why| unreadable(&why, &text.source, &text.text))
}

fn unreadable(why: &NoFigure, source: &Source, text: &str) -> Refusal {
    match why {
        NoFigure::TwoReadings { written, readings } => source.refuse(
            "load-figure",
            format!(
                "the load \"{written}\" can be read as {} or as {}",
                readings[0], readings[1]
            ),
            "Say which with `[loads] decimal = \",\"` or `decimal = \".\"`, or write the figure without doubt",
        ),
        _ => source.refuse(
            "load-figure",
            format!("the load \"{text}\" does not fit the decimal sign of the job"),
            "Mend the figure, or `[loads] decimal`",
        ),
    }
}

/// Marks that stand for a load each: every arrow, and of several points at one place on one layer those with a figure, else the first.
fn once_each(points: &[Mark], found: &[Option<Found>], notes: &mut Vec<Note>) -> Vec<usize> {
    let places: Vec<_> = points.iter().map(|p| p.at).collect();
    let size = extent(places.iter().copied());
    let group = clusters(&places, size * tolerance::ENDS_MEET);
    let mut kept_of: std::collections::BTreeMap<(usize, &str), usize> = std::collections::BTreeMap::new();
    // Marks with a figure come first, so that they are the ones kept.
    let mut order: Vec<usize> = (0..points.len()).collect();
    order.sort_by_key(|&i| (found[i].is_none(), i));
    let mut kept = Vec::with_capacity(points.len());
    for i in order {
        let key = (group[i], points[i].source.layer.as_str());
        if points[i].arrow.is_some() {
            kept.push(i);
            continue;
        }
        match kept_of.get(&key) {
            Some(&first) if found[i].is_none() => notes.push(Note::MarkedTwice {
                source: points[i].source.clone(),
                kept: points[first].source.clone(),
            }),
            _ => {
                kept_of.entry(key).or_insert(i);
                kept.push(i);
            }
        }
    }
    kept.sort_unstable();
    kept
}

/// Refuses to call all loads equal while figures that are clearly forces stand on their layers.
fn none_out_of_reach(labels: &[Label], texts: &[Text]) -> Result<(), Refusal> {
    let clear = |l: &&Label| l.figure.as_ref().is_ok_and(|f| f.unit.is_some() || f.name.is_some());
    let Some(label) = labels.iter().find(clear) else {
        return Ok(());
    };
    let text = &texts[label.text];
    let Some(nearest) = label.nearest else {
        return Ok(());
    };
    Err(text.source.refuse(
        "labels-far",
        format!(
            "the label \"{}\" stands {:.3} drawing units from the nearest load; it would be taken up to {:.3}, and no \
             load has a figure",
            text.text, nearest, label.reach
        ),
        "Move the labels to their loads, or say what a load without a figure is with `[loads] unlabelled`",
    ))
}

fn crowded(texts: &[Text]) -> Refusal {
    let source = texts.first().map(|t| t.source.clone()).unwrap_or_default();
    source.refuse(
        "labels-crowded",
        "hundreds of labels and loads stand within reach of one another: which belongs to which cannot be told",
        "Write the labels smaller and beside their loads, or give the figures as attributes of blocks",
    )
}

fn some_without(bare: &[usize], figures: usize, points: &[Mark]) -> Refusal {
    let shown: Vec<String> = bare
        .iter()
        .take(5)
        .map(|&i| {
            let p = &points[i];
            format!("{} at ({:.3}, {:.3})", p.source.named(), p.at.x, p.at.y)
        })
        .collect();
    let more = bare.len() - shown.len();
    let more = if more > 0 { format!(" and {more} more") } else { String::new() };
    points[bare[0]].source.refuse(
        "load-figure-missing",
        format!("{figures} loads have a figure and {} have none: {}{more}", bare.len(), shown.join(", ")),
        "Label them, or say what a load without a figure is with `[loads] unlabelled`",
    )
}

/// Unit of the figures without one: the job's, else the only one that other figures show, else kN.
fn unit_of(
    kept: &[usize],
    found: &[Option<Found>],
    settings: &LoadSettings,
    notes: &mut Vec<Note>,
) -> ForceUnit {
    if let Some(unit) = settings.unit {
        return unit;
    }
    let figures = || kept.iter().filter_map(|&i| found[i].as_ref().map(|f| &f.figure));
    let count = figures().filter(|f| f.unit.is_none()).count();
    let mut shown = figures().filter_map(|f| f.unit);
    let first = shown.next();
    let unit = first.filter(|u| shown.all(|v| v == *u));
    if count > 0 {
        notes.push(Note::ForceUnitAssumed {
            unit: unit.unwrap_or(ForceUnit::KN),
            count,
            from_labels: unit.is_some(),
        });
    }
    unit.unwrap_or(ForceUnit::KN)
}
