//! Closed loops from the curves and hatches of an area, each entity weighed once.

use super::pieces;
use crate::drawing::outlines::{Outlines, Rule};
use crate::drawing::{Curve, Source};
use crate::geometry::slab::{self, Moments};
use crate::geometry::{Point, Segment};
use crate::refusal::Refusal;
use crate::tolerance;

/// A closed loop, m, about an origin of the caller's.
#[derive(Debug, Clone)]
pub struct Loop {
    /// Its pieces in their order.
    pub pieces: Vec<Segment>,
    /// Where it comes from.
    pub source: Source,
    /// What it encloses, positive whichever way it runs.
    pub enclosed: Moments,
}

/// Loops of which some part counts by one rule.
#[derive(Debug, Clone)]
pub struct Group {
    /// What counts.
    pub rule: Rule,
    /// The loops.
    pub loops: Vec<Loop>,
}

/// The loops of an area: those of closed curves and of chains of curves in one group, those of each hatch in one of its own.
#[derive(Debug, Clone, Default)]
pub struct Groups {
    /// The groups.
    pub groups: Vec<Group>,
    /// Entities left aside because another one, kept, draws the same outline.
    pub doubles: Vec<(Source, Source)>,
}

/// Reads the loops of an area; `metres` is a drawing unit, `origin` the place about which all is computed, m.
///
/// # Errors
/// When a curve does not close, or more than two ends meet.
pub fn groups(outlines: &Outlines, metres: f64, origin: Point) -> Result<Groups, Refusal> {
    let by = -origin.to_vec2() / metres;
    let make = |pieces: Vec<Segment>, source: Source| {
        let pieces: Vec<Segment> = pieces.iter().map(|s| s.shifted_scaled(by, metres)).collect();
        let mut enclosed = slab::enclosed(&pieces);
        if enclosed.area < 0.0 {
            enclosed = Moments::default() - enclosed;
        }
        Loop { pieces, source, enclosed }
    };
    let mut found = Groups::default();
    for hatch in &outlines.hatches {
        let mut loops = Vec::new();
        for curve in &hatch.loops {
            for pieces in closed(std::slice::from_ref(curve))? {
                loops.push(make(pieces.0, pieces.1));
            }
        }
        let same = |g: &&Group| {
            g.rule == hatch.rule
                && g.loops.len() == loops.len()
                && g.loops.iter().zip(&loops).all(|(a, b)| same_loop(a, b))
        };
        // A pattern over a solid fill is one body.
        match found.groups.iter().find(same).and_then(|g| g.loops.first()) {
            Some(kept) => found.doubles.push((hatch.source.clone(), kept.source.clone())),
            None => found.groups.push(Group { rule: hatch.rule, loops }),
        }
    }
    let mut plain: Vec<Loop> = Vec::new();
    for (pieces, source) in closed(&outlines.curves)? {
        let one = make(pieces, source);
        let drawn = found.groups.iter().flat_map(|g| &g.loops).chain(&plain).find(|l| same_loop(l, &one));
        match drawn {
            Some(kept) => found.doubles.push((one.source, kept.source.clone())),
            None => plain.push(one),
        }
    }
    if !plain.is_empty() {
        found.groups.push(Group { rule: Rule::EvenOdd, loops: plain });
    }
    Ok(found)
}

/// Whether two loops enclose the same: area and centroid, as near as the ends of drawn curves.
fn same_loop(a: &Loop, b: &Loop) -> bool {
    let (area, size) = (a.enclosed.area, a.enclosed.area.abs().sqrt());
    let near = tolerance::ENDS_MEET;
    match (a.enclosed.centroid(), b.enclosed.centroid()) {
        (Some(p), Some(q)) => {
            (area - b.enclosed.area).abs() <= near * area.abs() && (p - q).hypot() <= near * size
        }
        _ => false,
    }
}

/// Closed chains of pieces with the first entity of each.
fn closed(curves: &[Curve]) -> Result<Vec<(Vec<Segment>, Source)>, Refusal> {
    let mut found = Vec::new();
    let mut open: Vec<Curve> = Vec::new();
    for curve in curves {
        let (Some(first), Some(last)) = (curve.pieces.first(), curve.pieces.last()) else {
            continue;
        };
        let size: f64 = curve.pieces.iter().map(Segment::length).sum();
        let reach = size * tolerance::ENDS_MEET;
        let meets = |a: Point, b: Point| (a - b).hypot() <= reach;
        let chained = curve.pieces.windows(2).all(|w| meets(w[0].end(), w[1].start()));
        if chained && (curve.pieces.len() > 1 || curve.closed) && meets(last.end(), first.start()) {
            found.push((curve.pieces.clone(), curve.source.clone()));
        } else {
            open.push(curve.clone());
        }
    }
    if open.is_empty() {
        return Ok(found);
    }
    let joined = pieces::collect(&open);
    let mut at_node: Vec<Vec<usize>> = vec![Vec::new(); joined.nodes.len()];
    for (i, piece) in joined.pieces.iter().enumerate() {
        for node in piece.nodes {
            at_node[node].push(i);
        }
    }
    let source = |i: usize| open[joined.pieces[i].curve].source.clone();
    if let Some(node) = at_node.iter().position(|n| n.len() != 2) {
        let p = joined.nodes[node];
        let here = at_node[node].first().map(|i| source(*i)).unwrap_or_default();
        let what = if at_node[node].len() == 1 {
            let others = at_node.iter().enumerate().filter(|(i, n)| *i != node && n.len() == 1);
            let gap = others.map(|(i, _)| (joined.nodes[i] - p).hypot()).fold(f64::INFINITY, f64::min);
            format!("is open at ({:.6}, {:.6}): the next free end is {gap:.6} drawing units away", p.x, p.y)
        } else {
            format!("branches at ({:.6}, {:.6}): {} pieces meet there", p.x, p.y, at_node[node].len())
        };
        return Err(here.refuse(
            "area-open",
            format!("the outline of an area that {} draws {what}", here.named()),
            "Close the outline (a polyline with its closed flag, or curves whose ends meet), or move what is no outline to \
             another layer",
        ));
    }
    let mut used = vec![false; joined.pieces.len()];
    for start in 0..joined.pieces.len() {
        if used[start] {
            continue;
        }
        let mut chain = Vec::new();
        let (mut i, mut node) = (start, joined.pieces[start].nodes[0]);
        loop {
            used[i] = true;
            let piece = &joined.pieces[i];
            let forward = piece.nodes[0] == node;
            chain.push(if forward { piece.segment } else { piece.segment.reversed() });
            node = piece.nodes[usize::from(forward)];
            match at_node[node].iter().find(|&&j| !used[j]) {
                Some(&next) => i = next,
                None => break,
            }
        }
        found.push((chain, source(start)));
    }
    Ok(found)
}

/// What all loops of a group enclose by its rule, each loop by Green's theorem alone: the loops must not cross. The number of
/// loops around each is counted at one of its points.
pub fn whole(group: &Group) -> Moments {
    let mut sum = Moments::default();
    for (i, one) in group.loops.iter().enumerate() {
        let Some(p) = one.pieces.first().map(|s| s.point_at(s.length() * 0.381_966)) else {
            continue;
        };
        let others = group.loops.iter().enumerate().filter(|(j, _)| *j != i);
        let around = others.filter(|(_, l)| winds(l, p)).count();
        let sign = match group.rule {
            Rule::EvenOdd if around % 2 == 0 => 1.0,
            Rule::EvenOdd => -1.0,
            Rule::Outermost => [1.0, -1.0].get(around).copied().unwrap_or(0.0),
            Rule::Whole => f64::from(u8::from(around == 0)),
        };
        let m = one.enclosed;
        sum += Moments { area: sign * m.area, x: sign * m.x, y: sign * m.y };
    }
    sum
}

/// Whether a loop runs around a point.
fn winds(one: &Loop, p: Point) -> bool {
    let mut below = 0;
    for piece in &one.pieces {
        for (edge, _) in slab::directed(piece) {
            if edge.left.x <= p.x && p.x < edge.right.x && edge.y_at(p.x) < p.y {
                below += 1;
            }
        }
    }
    below % 2 == 1
}
