//! Line loads: lines on a load layer whose label is a force per length.
//!
//! Each is a uniform load per metre of plan over the extent of its line in plan, however the line runs above it.

use super::drawn::Drawn;
use super::figures::{self, Figure, Kind, NoFigure};
use super::heads::Arrows;
use super::labels::{self, Label};
use super::marks::Mark;
use super::matching::Crowded;
use super::note::Note;
use crate::drawing::{Source, Stroke, Text};
use crate::geometry::{Path, Point, Segment};
use crate::job::Decimal;
use crate::tolerance;

/// A uniform load per metre of plan.
#[derive(Debug, Clone, PartialEq)]
pub struct LineLoad {
    /// Its name in the drawing, or `q1` … from the left within its span.
    pub label: String,
    /// Left end of its line, or of the part of it over the span, m.
    pub from: Point,
    /// Right end, m.
    pub to: Point,
    /// Downward per metre of plan, kN/m.
    pub down: f64,
    /// Its set: the layer it stands on.
    pub set: String,
    /// The line.
    pub source: Source,
    /// The label.
    pub text: String,
}

/// A line with the label that makes it a line load.
#[derive(Debug, Clone, PartialEq)]
pub struct Labelled {
    /// Index of the stroke.
    pub stroke: usize,
    /// The label.
    pub label: Label,
    /// Leftmost and rightmost place of the line, drawing units.
    pub ends: [Point; 2],
}

/// Places along a line beside which its label is looked for, at most.
const BESIDE: f64 = 400.0;

/// The lines that have a label of a force per length, with `used` set for each; labels that belong to no line come back too.
///
/// # Errors
/// [`Crowded`] as [`labels::pair`].
pub fn labelled(
    strokes: &[Stroke],
    texts: &[Text],
    arrows: &Arrows,
    decimal: Decimal,
    used: &mut [bool],
    notes: &mut Vec<Note>,
) -> Result<(Vec<Labelled>, Vec<Label>), Crowded> {
    let per_length = |t: &Text| {
        matches!(
            figures::read_as(&t.text, decimal, Kind::PerLength),
            Ok(_) | Err(NoFigure::TwoReadings { .. } | NoFigure::Separator(_))
        )
    };
    if !texts.iter().any(per_length) {
        return Ok((Vec::new(), Vec::new()));
    }
    let mut free: Vec<usize> = (0..strokes.len())
        .filter(|&i| arrows.head_of[i].is_none() && arrows.double_of[i].is_none())
        .collect();
    leave_arrows(&mut free, strokes);
    let least = texts.iter().map(|t| t.height).filter(|h| *h > 0.0).fold(f64::INFINITY, f64::min);
    let marks: Vec<Mark> = free.iter().map(|&i| mark(&strokes[i], least)).collect();
    let open = vec![true; marks.len()];
    let labels = labels::pair_as(texts, &marks, &open, decimal, Kind::PerLength, notes)?;
    let mut found = Vec::new();
    let mut unused = Vec::new();
    for label in labels {
        let Some(at) = label.load else {
            unused.push(label);
            continue;
        };
        let stroke = free[at];
        used[stroke] = true;
        let source = &strokes[stroke].source;
        let Some((ends, turns)) = extent(&strokes[stroke]) else {
            notes.push(Note::Drawn(Drawn::LineUpright { source: source.clone() }));
            continue;
        };
        if turns && !strokes[stroke].closed {
            notes.push(Note::Drawn(Drawn::LineTurnsBack { source: source.clone() }));
        }
        found.push(Labelled { stroke, label, ends });
    }
    Ok((found, unused))
}

/// Takes out steep lines that end at a flatter one: the arrows of a picture of a load per length, which has the label.
fn leave_arrows(free: &mut Vec<usize>, strokes: &[Stroke]) {
    let steep = |s: &Stroke| {
        let ends = s.corners().and_then(|c| Some((*c.first()?, *c.last()?)));
        !s.closed && ends.is_some_and(|(a, b)| (b.x - a.x).abs() < 0.5 * (b - a).hypot())
    };
    let flat: Vec<Path> = free
        .iter()
        .filter(|&&i| !steep(&strokes[i]))
        .filter_map(|&i| Path::new(strokes[i].pieces.iter().copied()))
        .collect();
    free.retain(|&i| {
        let stroke = &strokes[i];
        let length: f64 = stroke.pieces.iter().map(Segment::length).sum();
        let ends = [stroke.pieces.first().map(Segment::start), stroke.pieces.last().map(Segment::end)];
        let hangs = |p: &Point| flat.iter().any(|f| f.nearest(*p).1 <= tolerance::HEAD_OFF * length);
        !(steep(stroke) && ends.iter().flatten().any(hangs))
    });
}

/// A line as something that a label belongs to.
fn mark(stroke: &Stroke, letters: f64) -> Mark {
    let path = Path::new(stroke.pieces.iter().copied());
    let (at, beside) = match path {
        Some(path) => {
            let parts = (path.length() / letters).clamp(2.0, BESIDE).ceil();
            #[allow(clippy::cast_possible_truncation, clippy::cast_sign_loss)] // Between 2 and BESIDE.
            let count = parts as u32;
            let place = |i: u32| path.point_at(path.length() * f64::from(i) / f64::from(count));
            (path.point_at(path.length() / 2.0), (0..=count).map(place).collect())
        }
        None => (Point::ORIGIN, Vec::new()),
    };
    Mark {
        source: stroke.source.clone(),
        at,
        beside,
        attributes: Vec::new(),
        extended: Vec::new(),
        stroke: None,
        arrow: None,
    }
}

/// Leftmost and rightmost place of a line, and whether it runs back over itself in plan; `None` when it has no length in plan.
fn extent(stroke: &Stroke) -> Option<([Point; 2], bool)> {
    let mut places: Vec<Point> = Vec::new();
    for piece in &stroke.pieces {
        places.push(piece.start());
        if let Segment::Arc { centre, radius, start_angle, sweep } = *piece {
            let half = std::f64::consts::PI;
            let (low, high) = (start_angle.min(start_angle + sweep), start_angle.max(start_angle + sweep));
            let mut angle = (low / half).ceil() * half;
            let mut between = Vec::new();
            while angle < high {
                between.push(Point::new(centre.x + radius * angle.cos(), centre.y + radius * angle.sin()));
                angle += half;
            }
            if sweep < 0.0 {
                between.reverse();
            }
            places.extend(between);
        }
        places.push(piece.end());
    }
    let left = places.iter().copied().reduce(|a, b| if b.x < a.x { b } else { a })?;
    let right = places.iter().copied().reduce(|a, b| if b.x > a.x { b } else { a })?;
    let length: f64 = stroke.pieces.iter().map(Segment::length).sum();
    if right.x - left.x <= tolerance::STRAIGHT_LINE * length {
        return None;
    }
    let hair = tolerance::STRAIGHT_LINE * length;
    let steps: Vec<f64> = places.windows(2).map(|w| w[1].x - w[0].x).collect();
    let turns = steps.iter().any(|d| *d > hair) && steps.iter().any(|d| *d < -hair);
    Some(([left, right], turns))
}

/// For each shaft, the line load at which it ends: arrows that hang from the line of a load show how it acts, unless they have
/// a figure of their own.
pub fn hung(arrows: &Arrows, strokes: &[Stroke], lines: &[Labelled], reach: f64) -> Vec<Option<usize>> {
    let paths: Vec<(usize, Path)> = lines
        .iter()
        .filter_map(|l| Some((l.stroke, Path::new(strokes[l.stroke].pieces.iter().copied())?)))
        .collect();
    let mut from = vec![None; strokes.len()];
    for shaft in &arrows.shafts {
        let slack = reach.max(tolerance::HEAD_OFF * (shaft.ends[1] - shaft.ends[0]).hypot());
        let on = paths.iter().find(|(stroke, path)| {
            *stroke != shaft.stroke && shaft.ends.iter().any(|p| path.nearest(*p).1 <= slack)
        });
        from[shaft.stroke] = on.map(|p| p.0);
    }
    from
}

/// A line load with its size: `unit` is that of figures without one.
pub fn load(line: &Labelled, figure: &Figure, strokes: &[Stroke], text: &str, metres: f64) -> LineLoad {
    let unit = figure.unit.map_or(1.0, |u| u.kilonewtons());
    let source = strokes[line.stroke].source.clone();
    let [from, to] = line.ends.map(|p| (p.to_vec2() * metres).to_point());
    LineLoad {
        label: figure.name.clone().unwrap_or_default(),
        from,
        to,
        down: figure.value * unit / figure.per.unwrap_or(1.0),
        set: source.layer.clone(),
        source,
        text: text.to_owned(),
    }
}

impl LineLoad {
    /// The part of it between two abscissae, m; `None` where it has none there.
    pub fn between(&self, left: f64, right: f64) -> Option<Self> {
        let (a, b) = (self.from.x.max(left), self.to.x.min(right));
        if b <= a {
            return None;
        }
        let along = |x: f64| {
            let part = (x - self.from.x) / (self.to.x - self.from.x);
            Point::new(x, self.from.y + part * (self.to.y - self.from.y))
        };
        Some(Self { from: along(a), to: along(b), ..self.clone() })
    }

    /// Its sum, kN.
    pub fn sum(&self) -> f64 {
        self.down * (self.to.x - self.from.x)
    }
}

/// Gives each span the parts of the line loads over it, from the left, and tells what stands over none.
pub fn share_out(lines: &[LineLoad], reach: &[(f64, f64)], notes: &mut Vec<Note>) -> Vec<Vec<LineLoad>> {
    let mut shares: Vec<Vec<LineLoad>> = reach
        .iter()
        .map(|&(left, right)| lines.iter().filter_map(|l| l.between(left, right)).collect())
        .collect();
    for line in lines {
        let over: f64 =
            reach.iter().filter_map(|&(l, r)| line.between(l, r)).map(|l| l.to.x - l.from.x).sum();
        let rest = line.to.x - line.from.x - over;
        if rest > tolerance::STRAIGHT_LINE * (line.to.x - line.from.x) {
            notes.push(Note::Drawn(Drawn::LineOffSpan {
                source: line.source.clone(),
                text: line.text.clone(),
                length: rest,
                force: rest * line.down,
            }));
        }
    }
    for share in &mut shares {
        share.sort_by(|a, b| a.from.x.total_cmp(&b.from.x).then(b.from.y.total_cmp(&a.from.y)));
        for (i, line) in share.iter_mut().enumerate() {
            if line.label.is_empty() {
                line.label = format!("q{}", i + 1);
            }
        }
    }
    shares
}
