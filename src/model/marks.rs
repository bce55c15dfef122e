//! What stands for a load: points, and lines drawn as arrows, each with its line of action.

use super::drawn::Drawn;
use super::heads::{self, Arrows, Shaft};
use super::note::Note;
use crate::drawing::Source;
use crate::drawing::{Attribute, Extended, PointLike, Stroke};
use crate::geometry::{Point, Vec2};
use crate::tolerance;

/// One thing on a load layer that stands for a load. Coordinates are drawing units.
#[derive(Debug, Clone, PartialEq)]
pub struct Mark {
    /// The entity.
    pub source: Source,
    /// Where the load acts.
    pub at: Point,
    /// Places beside which its label may stand: the point itself, or places along the arrow.
    pub beside: Vec<Point>,
    /// Attributes of its INSERT.
    pub attributes: Vec<Attribute>,
    /// Extended data.
    pub extended: Vec<Extended>,
    /// Index of its stroke, of an arrow.
    pub stroke: Option<usize>,
    /// How it is drawn as an arrow; `None` for a point, which acts downward.
    pub arrow: Option<Arrow>,
}

impl Mark {
    /// Unit vector along which a positive figure acts.
    pub fn direction(&self) -> Vec2 {
        self.arrow.as_ref().map_or(Vec2::new(0.0, -1.0), |a| a.along)
    }
}

/// A load drawn as an arrow.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Arrow {
    /// Unit vector along which a positive figure acts.
    pub along: Vec2,
    /// What says so.
    pub sense: Sense,
    /// Its length, drawing units.
    pub length: f64,
}

/// What tells the sense of a load.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Sense {
    /// It is drawn as a point: downward.
    Point,
    /// A drawn arrowhead.
    Head,
    /// Inferred: the line is within 30° of the vertical, so it acts downward.
    Down,
    /// Inferred: any other line acts toward the rib.
    Rib,
}

/// Places along an arrow beside which a label is looked for.
const BESIDE: usize = 9;

/// The marks, points before lines; a line and a point at one of its ends are one. `distance` is that of a point to the nearest
/// rib; `used` tells which strokes serve as something else.
pub fn marks(
    points: &[PointLike],
    strokes: &[Stroke],
    arrows: &Arrows,
    used: &[bool],
    reach: f64,
    distance: &dyn Fn(Point) -> f64,
    notes: &mut Vec<Note>,
) -> Vec<Mark> {
    let mut by_x: Vec<(f64, usize)> = points.iter().enumerate().map(|(i, p)| (p.at.x, i)).collect();
    by_x.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    let marked = |shaft: &Shaft, end: usize| -> Option<usize> {
        let (at, layer) = (shaft.ends[end], &strokes[shaft.stroke].source.layer);
        let from = by_x.partition_point(|p| p.0 < at.x - reach);
        by_x[from..].iter().take_while(|p| p.0 <= at.x + reach).map(|p| p.1).find(|&i| {
            (points[i].at - at).hypot() <= reach && points[i].source.layer.eq_ignore_ascii_case(layer)
        })
    };
    let mut lines: Vec<(&Shaft, Option<usize>)> = Vec::new();
    // The first line at each point, and how many there are.
    let mut merged: Vec<Option<(usize, usize)>> = vec![None; points.len()];
    for shaft in arrows.shafts.iter().filter(|s| !used[s.stroke]) {
        let source = &strokes[shaft.stroke].source;
        match [marked(shaft, 0), marked(shaft, 1)] {
            [Some(_), Some(_)] => notes.push(Note::Drawn(Drawn::LineJoins { source: source.clone() })),
            // A leader from a label to a point only shows which load it means.
            [Some(point), None] if source.kind == "LEADER" => {
                notes.push(Note::MarkedTwice { source: source.clone(), kept: points[point].source.clone() });
            }
            [Some(point), None] | [None, Some(point)] => {
                let count = merged[point].map_or(1, |m| m.1 + 1);
                merged[point] = Some((shaft.stroke, count));
                lines.push((shaft, Some(point)));
            }
            [None, None] => lines.push((shaft, None)),
        }
    }
    let mut marks: Vec<Mark> = Vec::new();
    for (point, merged) in points.iter().zip(&merged) {
        match merged {
            Some((stroke, _)) => notes.push(Note::MarkedTwice {
                source: point.source.clone(),
                kept: strokes[*stroke].source.clone(),
            }),
            None => marks.push(Mark {
                source: point.source.clone(),
                at: point.at,
                beside: vec![point.at],
                attributes: point.attributes.clone(),
                extended: point.extended.clone(),
                stroke: None,
                arrow: None,
            }),
        }
    }
    for (shaft, point) in lines {
        // What several lines at one point share tells none of them its size.
        let own = point.filter(|&p| merged[p].is_some_and(|m| m.1 == 1));
        let mut mark = arrow(shaft, strokes[shaft.stroke].source.clone(), distance, notes);
        mark.extended.clone_from(&strokes[shaft.stroke].extended);
        if let Some(point) = own {
            mark.attributes.clone_from(&points[point].attributes);
            mark.extended.extend(points[point].extended.iter().cloned());
        }
        marks.push(mark);
    }
    marks
}

/// A line as a load: it acts at the end nearer the rib, of equals at the lower and then the left one.
fn arrow(shaft: &Shaft, source: Source, distance: &dyn Fn(Point) -> f64, notes: &mut Vec<Note>) -> Mark {
    let [a, b] = shaft.ends;
    let length = (b - a).hypot();
    let (da, db) = (distance(a), distance(b));
    let first = if (da - db).abs() > tolerance::ENDS_MEET * length {
        da < db
    } else if (a.y - b.y).abs() > tolerance::ENDS_MEET * length {
        a.y < b.y
    } else {
        a.x < b.x
    };
    let (at, far) = if first { (a, b) } else { (b, a) };
    let (along, sense) = match shaft.heads {
        [true, false] => (heads::toward(b, a), Sense::Head),
        [false, true] => (heads::toward(a, b), Sense::Head),
        two => {
            if two == [true, true] {
                notes.push(Note::Drawn(Drawn::TwoHeads { source: source.clone() }));
            }
            let toward_rib = heads::toward(far, at);
            if toward_rib.x.abs() <= tolerance::NEARLY_UPRIGHT.sin() + tolerance::SAME_ANGLE {
                (if toward_rib.y < 0.0 { toward_rib } else { -toward_rib }, Sense::Down)
            } else {
                (toward_rib, Sense::Rib)
            }
        }
    };
    let part = |i: usize| a + (b - a) * (i as f64 / (BESIDE - 1) as f64);
    Mark {
        source,
        at,
        beside: (0..BESIDE).map(part).collect(),
        attributes: Vec::new(),
        extended: Vec::new(),
        stroke: Some(shaft.stroke),
        arrow: Some(Arrow { along, sense, length }),
    }
}
