//! Points on load layers to forces.

use super::figures::{self, Figure, NoFigure};
use super::labels::{self, Label};
use super::note::Note;
use super::{Forces, Load, MagnitudeFrom};
use crate::drawing::{PointLike, Text, clusters};
use crate::geometry::Vec2;
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
    /// How fractions are marked.
    pub decimal: Decimal,
    /// Whether the rib has a weight of its own, in kN.
    pub weighs: bool,
    /// Depth of the rib where no ring is drawn, m.
    pub depth: Option<RibDepth>,
}

impl Default for LoadSettings {
    fn default() -> Self {
        Self { unit: None, unlabelled: None, decimal: Decimal::Auto, weighs: false, depth: None }
    }
}

impl From<&Settings> for LoadSettings {
    fn from(settings: &Settings) -> Self {
        Self {
            unit: settings.loads.unit,
            unlabelled: settings.loads.unlabelled_kn(),
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
}

/// All loads in the order of the points, with their forces; places are in m (`metres` a drawing unit).
///
/// # Errors
/// When a label that belongs to a load can be read in two ways; when only some loads have figures and the job does not
/// say what the others are; when figures stand too far from all loads.
pub fn loads(
    points: &[PointLike],
    texts: &[Text],
    settings: &LoadSettings,
    metres: f64,
    notes: &mut Vec<Note>,
) -> Result<(Vec<Load>, Forces), Refusal> {
    let mut found: Vec<Option<Found>> = Vec::with_capacity(points.len());
    for point in points {
        found.push(from_attributes(point, settings.decimal, notes)?);
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
                });
            }
            None => notes.push(Note::LabelUnused {
                source: text.source.clone(),
                text: text.text.clone(),
                nearest: label.nearest.map(|d| d * metres),
                reach: label.reach * metres,
            }),
        }
    }
    let kept = once_each(points, &found, notes);
    let figures = kept.iter().filter(|&&i| found[i].is_some()).count();
    if figures == 0 && settings.unlabelled.is_none() && !(kept.is_empty() && settings.weighs) {
        none_out_of_reach(&labels, texts)?;
        if !kept.is_empty() {
            notes.push(Note::LoadsEqual { count: kept.len() });
        }
        let loads = kept.iter().map(|&i| load(&points[i], None, MagnitudeFrom::Equal, 1.0, metres)).collect();
        return Ok((loads, Forces::UnitLoads));
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
    Ok((loads, Forces::Kilonewtons))
}

/// One load, `down` positive downward.
fn load(point: &PointLike, found: Option<&Found>, from: MagnitudeFrom, down: f64, metres: f64) -> Load {
    Load {
        label: found.and_then(|f| f.figure.name.clone()).unwrap_or_default(),
        at: (point.at.to_vec2() * metres).to_point(),
        force: Vec2::new(0.0, -down),
        set: point.source.layer.clone(),
        source: point.source.clone(),
        magnitude_from: from,
        text: found.map(|f| f.text.clone()),
    }
}

/// The figure in the attributes of a block reference: the one with a unit of force, else the one whose tag says so, else
/// the only one.
fn from_attributes(
    point: &PointLike,
    decimal: Decimal,
    notes: &mut Vec<Note>,
) -> Result<Option<Found>, Refusal> {
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
    let tagged = |r: &&(&str, &str, Result<Figure, NoFigure>)| {
        FORCE_TAGS.contains(&r.0.trim().to_uppercase().as_str())
    };
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

/// The text of an attribute that names the load.
fn name_attribute(point: &PointLike, other_than: &str) -> Option<String> {
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

fn unreadable(why: &NoFigure, source: &crate::drawing::Source, text: &str) -> Refusal {
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

/// Points that stand for a load each: of several marks at one place on one layer those with a figure, else the first.
fn once_each(points: &[PointLike], found: &[Option<Found>], notes: &mut Vec<Note>) -> Vec<usize> {
    let places: Vec<_> = points.iter().map(|p| p.at).collect();
    let size = places.iter().flat_map(|p| places.first().map(|q| (*p - *q).hypot())).fold(0.0, f64::max);
    let group = clusters(&places, size * tolerance::ENDS_MEET);
    let mut kept_of: std::collections::BTreeMap<(usize, &str), usize> = std::collections::BTreeMap::new();
    // Marks with a figure come first, so that they are the ones kept.
    let mut order: Vec<usize> = (0..points.len()).collect();
    order.sort_by_key(|&i| (found[i].is_none(), i));
    let mut kept = Vec::with_capacity(points.len());
    for i in order {
        let key = (group[i], points[i].source.layer.as_str());
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

fn some_without(bare: &[usize], figures: usize, points: &[PointLike]) -> Refusal {
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
