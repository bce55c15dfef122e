//! Which text says how large which load is.

use super::figures::{self, Figure, Kind, NoFigure};
use super::marks::Mark;
use super::matching::{self, Crowded, Row};
use super::note::Note;
use crate::drawing::Text;
use crate::geometry::{Point, Vec2};
use crate::job::Decimal;
use crate::tolerance;

/// A text on a load layer that could be a load's label.
#[derive(Debug, Clone, PartialEq)]
pub struct Label {
    /// Index of the text.
    pub text: usize,
    /// What it says; an error only of a kind that matters when the label belongs to a load.
    pub figure: Result<Figure, NoFigure>,
    /// The load it belongs to: an index into the marks.
    pub load: Option<usize>,
    /// Distance to the nearest load, drawing units; `None` without loads.
    pub nearest: Option<f64>,
    /// How far from a load it would have been taken, drawing units.
    pub reach: f64,
}

/// Reads all texts, and pairs those that give a figure with the marks for which `open` holds. Texts that are no labels
/// are told.
///
/// # Errors
/// [`Crowded`] when they stand too close to be told apart.
pub fn pair(
    texts: &[Text],
    marks: &[Mark],
    open: &[bool],
    decimal: Decimal,
    notes: &mut Vec<Note>,
) -> Result<Vec<Label>, Crowded> {
    pair_as(texts, marks, open, decimal, Kind::Force, notes)
}

/// The same with labels that are read as forces, or as forces per length, of which the texts that are none are not told.
///
/// # Errors
/// As [`pair`].
pub fn pair_as(
    texts: &[Text],
    marks: &[Mark],
    open: &[bool],
    decimal: Decimal,
    kind: Kind,
    notes: &mut Vec<Note>,
) -> Result<Vec<Label>, Crowded> {
    let mut labels = Vec::new();
    for (index, text) in texts.iter().enumerate() {
        let figure = figures::read_as(&text.text, decimal, kind);
        match figure {
            Ok(_) | Err(NoFigure::TwoReadings { .. } | NoFigure::Separator(_)) => {
                labels.push(Label { text: index, figure, load: None, nearest: None, reach: 0.0 })
            }
            // Read elsewhere as the other kind.
            Err(_) if kind == Kind::PerLength => {}
            Err(NoFigure::PerLength) => {}
            Err(why) => {
                notes.push(Note::TextIgnored { source: text.source.clone(), text: text.text.clone(), why })
            }
        }
    }
    let columns: Vec<usize> = (0..marks.len()).filter(|&i| open[i]).collect();
    let mut by_x: Vec<(Point, usize)> =
        columns.iter().enumerate().flat_map(|(c, &i)| marks[i].beside.iter().map(move |p| (*p, c))).collect();
    by_x.sort_by(|a, b| a.0.x.total_cmp(&b.0.x).then(a.1.cmp(&b.1)));
    let several: Vec<bool> = columns.iter().map(|&i| marks[i].beside.len() > 1).collect();
    let spacing = spacing(columns.iter().map(|&i| marks[i].at).collect());
    let rows: Vec<Row> = labels
        .iter_mut()
        .map(|label| {
            let text = &texts[label.text];
            label.reach = (tolerance::LABEL_HEIGHTS * text.height).max(tolerance::LABEL_SPACING * spacing);
            Row { reach: label.reach, doubt: tolerance::LABEL_DOUBT_HEIGHTS * text.height }
        })
        .collect();
    let pairing = matching::pair(&rows, columns.len(), |row, count| {
        nearest(&texts[labels[row].text], &by_x, &several, rows[row].reach, count)
    })?;
    for (label, column) in labels.iter_mut().zip(&pairing.column_of) {
        label.load = column.map(|c| columns[c]);
        if label.load.is_none() {
            let text = &texts[label.text];
            let places = marks.iter().flat_map(|m| &m.beside);
            label.nearest = places.map(|p| text.distance(*p)).min_by(f64::total_cmp);
        }
    }
    for alternative in &pairing.alternatives {
        doubt(alternative, &labels, &columns, texts, marks, notes);
    }
    Ok(labels)
}

/// Tells an alternative pairing that is nearly as good and would give some place another load.
fn doubt(
    alternative: &matching::Alternative,
    labels: &[Label],
    columns: &[usize],
    texts: &[Text],
    marks: &[Mark],
    notes: &mut Vec<Note>,
) {
    let value = |row: usize| labels[row].figure.as_ref().map_or(f64::NAN, |f| f.value);
    // Each load concerned, with its figure now and then; loads at one place that act one way count together.
    let place = |i: usize| {
        let (at, way) = (marks[i].at, marks[i].direction());
        [at.x, at.y, way.x, way.y].map(f64::to_bits)
    };
    let mut now = Vec::new();
    let mut then = Vec::new();
    for &(row, new) in &alternative.changes {
        if let Some(load) = labels[row].load {
            now.push((place(load), value(row).to_bits()));
        }
        if let Some(column) = new {
            then.push((place(columns[column]), value(row).to_bits()));
        }
    }
    now.sort_unstable();
    then.sort_unstable();
    if now == then {
        return;
    }
    let label = &labels[alternative.row];
    let other =
        alternative.changes.iter().find(|c| c.0 == alternative.row).and_then(|c| c.1).map(|c| columns[c]);
    if let (Some(load), Some(other)) = (label.load, other) {
        notes.push(Note::LabelDoubtful {
            label: texts[label.text].source.clone(),
            text: texts[label.text].text.clone(),
            load: marks[load].source.clone(),
            other: marks[other].source.clone(),
            increase: alternative.increase,
        });
    }
}

/// What a pairing costs: the way from the rectangle of the text, and a little for that from the point by which it was
/// placed, which tells loads under one long text apart. Loads act up and down, and their labels often stand in a row over
/// the deck: a way along the line of action counts for less than one across it.
fn cost(text: &Text, p: Point) -> f64 {
    let felt = |way: Vec2| way.x.hypot(tolerance::LABEL_UPRIGHT * way.y);
    felt(text.way_to(p)) + tolerance::LABEL_ANCHOR * felt(p - text.anchor)
}

/// The cheapest loads of a text; `several` tells which of them have more than one place.
fn nearest(
    text: &Text,
    by_x: &[(Point, usize)],
    several: &[bool],
    reach: f64,
    count: usize,
) -> Vec<(f64, usize)> {
    // Only loads within reach of the circle around the text's rectangle can be cheap enough.
    let side = |(below, above): (f64, f64)| below.abs().max(above.abs());
    let radius = reach + side(text.across).hypot(side(text.upright));
    let from = by_x.partition_point(|p| p.0.x < text.anchor.x - radius);
    let mut best: Vec<(f64, usize)> = Vec::new();
    for &(p, column) in by_x[from..].iter().take_while(|p| p.0.x <= text.anchor.x + radius) {
        let cost = cost(text, p);
        if cost >= reach || (best.len() == count && cost >= best[count - 1].0) {
            continue;
        }
        // Of an arrow the place that is nearest counts.
        if several[column]
            && let Some(known) = best.iter().position(|b| b.1 == column)
        {
            if best[known].0 <= cost {
                continue;
            }
            best.remove(known);
        }
        let at = best.partition_point(|b| (b.0, b.1) < (cost, column));
        best.insert(at, (cost, column));
        best.truncate(count);
    }
    best
}

/// Middle value of the distances between loads that follow one another from left to right; 0 with fewer than two.
fn spacing(mut places: Vec<Point>) -> f64 {
    places.sort_by(|a, b| a.x.total_cmp(&b.x).then(a.y.total_cmp(&b.y)));
    let mut gaps: Vec<f64> = places.windows(2).map(|w| (w[1] - w[0]).hypot()).filter(|&d| d > 0.0).collect();
    gaps.sort_by(f64::total_cmp);
    gaps.get(gaps.len() / 2).copied().unwrap_or(0.0)
}
