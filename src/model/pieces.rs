//! The pieces of all axis curves, tidied: none of no length, none twice, ends that nearly meet made to meet.

use std::collections::{BTreeMap, BTreeSet};

use crate::drawing::{Curve, Source, clusters};
use crate::geometry::{Point, Segment};
use crate::tolerance;

/// One straight or circular piece and the curve it comes from.
#[derive(Debug, Clone, PartialEq)]
pub struct Piece {
    /// The piece, drawing units.
    pub segment: Segment,
    /// Index of its curve.
    pub curve: usize,
    /// Numbers of the places at which it begins and ends; pieces that meet there have the same number.
    pub nodes: [usize; 2],
}

/// All pieces with the places at which they meet.
#[derive(Debug, Clone, PartialEq)]
pub struct Pieces {
    /// The pieces, in the order of the curves.
    pub pieces: Vec<Piece>,
    /// The places, drawing units.
    pub nodes: Vec<Point>,
    /// Diagonal of the rectangle around all pieces, drawing units.
    pub size: f64,
    /// Curves of which a piece was drawn twice, with the curve that was kept.
    pub doubles: Vec<(Source, Source)>,
    /// Curves of which a piece had no length.
    pub lengthless: Vec<Source>,
}

/// Collects the pieces of the curves.
pub fn collect(curves: &[Curve]) -> Pieces {
    let raw: Vec<(Segment, usize)> =
        curves.iter().enumerate().flat_map(|(i, c)| c.pieces.iter().map(move |s| (*s, i))).collect();
    let size = extent(raw.iter().map(|r| &r.0));
    let reach = size * tolerance::ENDS_MEET;
    let mut lengthless: Vec<usize> = Vec::new();
    let mut kept: Vec<(Segment, usize)> = Vec::with_capacity(raw.len());
    for (segment, curve) in raw {
        if segment.length() <= reach {
            if lengthless.last() != Some(&curve) {
                lengthless.push(curve);
            }
        } else {
            kept.push((segment, curve));
        }
    }
    let doubles = drop_doubles(&mut kept, reach);
    let source = |i: usize| curves[i].source.clone();
    let (pieces, nodes) = meet(kept, reach);
    Pieces {
        pieces,
        nodes,
        size,
        doubles: doubles.into_iter().map(|(a, b)| (source(a), source(b))).collect(),
        lengthless: lengthless.into_iter().map(source).collect(),
    }
}

/// Diagonal of the rectangle around ends and middles of the pieces.
fn extent<'a>(segments: impl Iterator<Item = &'a Segment>) -> f64 {
    let mut low = Point::new(f64::INFINITY, f64::INFINITY);
    let mut high = Point::new(f64::NEG_INFINITY, f64::NEG_INFINITY);
    for segment in segments {
        for p in [segment.start(), segment.point_at(segment.length() / 2.0), segment.end()] {
            low = Point::new(low.x.min(p.x), low.y.min(p.y));
            high = Point::new(high.x.max(p.x), high.y.max(p.y));
        }
    }
    if low.x <= high.x { (high - low).hypot() } else { 0.0 }
}

/// Takes out pieces that cover another one, and gives the curves of each such pair, every pair of curves once.
fn drop_doubles(kept: &mut Vec<(Segment, usize)>, reach: f64) -> Vec<(usize, usize)> {
    // Same ends in either order, and the same middle: an arc and its chord are two pieces.
    let ends: Vec<Point> = kept.iter().flat_map(|(s, _)| [s.start(), s.end()]).collect();
    let middles: Vec<Point> = kept.iter().map(|(s, _)| s.point_at(s.length() / 2.0)).collect();
    let (ends, middles) = (clusters(&ends, reach), clusters(&middles, reach));
    let mut first: BTreeMap<[usize; 3], usize> = BTreeMap::new();
    let mut doubles = BTreeSet::new();
    let mut place = 0;
    kept.retain(|&(_, curve)| {
        let (a, b) = (ends[2 * place], ends[2 * place + 1]);
        let key = [a.min(b), a.max(b), middles[place]];
        place += 1;
        match first.get(&key) {
            Some(&kept) => {
                doubles.insert((curve, kept));
                false
            }
            None => {
                first.insert(key, curve);
                true
            }
        }
    });
    doubles.into_iter().collect()
}

/// Gives ends that lie within `reach` of one another one place, and bends the pieces to it.
fn meet(kept: Vec<(Segment, usize)>, reach: f64) -> (Vec<Piece>, Vec<Point>) {
    let points: Vec<Point> = kept.iter().flat_map(|(s, _)| [s.start(), s.end()]).collect();
    let is_arc = |end: usize| matches!(kept[end / 2].0, Segment::Arc { .. });
    let group = clusters(&points, reach);
    // Ends of straight pieces are written in the file; ends of arcs are computed, so the former decide. Among equals
    // the lowest coordinates decide, so that the order of entities does not.
    let mut node_of = vec![usize::MAX; points.len()];
    let mut nodes: Vec<Point> = Vec::new();
    let mut best: Vec<(bool, f64, f64)> = Vec::new();
    for end in 0..points.len() {
        let root = group[end];
        if node_of[root] == usize::MAX {
            node_of[root] = nodes.len();
            nodes.push(points[end]);
            best.push((is_arc(end), points[end].x, points[end].y));
        }
        let node = node_of[root];
        let rank = (is_arc(end), points[end].x, points[end].y);
        if rank < best[node] {
            best[node] = rank;
            nodes[node] = points[end];
        }
    }
    let pieces = kept
        .iter()
        .enumerate()
        .map(|(i, &(segment, curve))| {
            let ends = [node_of[group[2 * i]], node_of[group[2 * i + 1]]];
            Piece { segment: bend(&segment, nodes[ends[0]], nodes[ends[1]]), curve, nodes: ends }
        })
        .collect();
    (pieces, nodes)
}

/// The piece with its ends moved a little; an arc keeps the angle that it sweeps.
fn bend(segment: &Segment, start: Point, end: Point) -> Segment {
    match *segment {
        Segment::Line { .. } => Segment::line(start, end),
        Segment::Arc { radius, sweep, .. } => {
            let miss = (segment.start() - start).hypot().max((segment.end() - end).hypot());
            if miss <= radius * tolerance::SAME_PLACE {
                *segment
            } else {
                Segment::bulge(start, end, (sweep / 4.0).tan())
            }
        }
    }
}
