//! What the curves of one layer look like: whether they could be the axis of an arch.

use super::ends::clusters;
use super::entity::Curve;
use crate::geometry::{Point, Segment};
use crate::tolerance;

/// Curves that run from springing to springing.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Line {
    /// Horizontal distance of the outermost ends, drawing units.
    pub span: f64,
    /// Greatest height over the straight line between the ends (negative: depth below it), drawing units.
    pub rise: f64,
    /// Left end.
    pub left: f64,
    /// Right end.
    pub right: f64,
}

/// The line that the curves make: every connected part of them has two free ends and no branch, the ends are nearly at
/// one level and far apart, and between them the line rises (or sags) like an arch.
pub fn one_line(curves: &[Curve]) -> Option<Line> {
    if curves.is_empty() || curves.iter().any(|c| c.closed) {
        return None;
    }
    let pieces: Vec<&Segment> = curves.iter().flat_map(|c| &c.pieces).filter(|s| s.length() > 0.0).collect();
    let ends: Vec<Point> = pieces.iter().flat_map(|s| [s.start(), s.end()]).collect();
    let low = ends.iter().map(|p| p.x).fold(f64::INFINITY, f64::min);
    let high = ends.iter().map(|p| p.x).fold(f64::NEG_INFINITY, f64::max);
    // An estimate by the width alone: how widely the pieces stand decides what a gap is.
    let group = clusters(&ends, (high - low).max(0.0) * tolerance::GAP);
    let mut degree = vec![0usize; ends.len()];
    for &g in &group {
        degree[g] += 1;
    }
    let links: Vec<(usize, usize)> = group.chunks_exact(2).map(|g| (g[0], g[1])).collect();
    if links.iter().any(|l| l.0 == l.1) || degree.iter().any(|&d| d > 2) {
        return None;
    }
    let part = parts(&links, ends.len());
    let mut line: Option<Line> = None;
    let mut names: Vec<usize> = part.iter().copied().filter(|&p| degree[p] > 0).collect();
    names.sort_unstable();
    names.dedup();
    for name in names {
        let mine: Vec<&Segment> =
            links.iter().zip(&pieces).filter(|(l, _)| part[l.0] == name).map(|(_, s)| *s).collect();
        let free: Vec<Point> =
            (0..ends.len()).filter(|&i| degree[i] == 1 && part[i] == name).map(|i| ends[i]).collect();
        let one = arch(&mine, &free)?;
        line = Some(match line {
            None => one,
            // Spans side by side are one line of spans; lines over one another are not.
            Some(before)
                if one.left > before.right - tolerance::GAP * before.span
                    || one.right < before.left + tolerance::GAP * before.span =>
            {
                Line {
                    span: before.span + one.span,
                    rise: if one.rise.abs() > before.rise.abs() { one.rise } else { before.rise },
                    left: before.left.min(one.left),
                    right: before.right.max(one.right),
                }
            }
            Some(_) => return None,
        });
    }
    line
}

/// One connected part.
fn arch(pieces: &[&Segment], free: &[Point]) -> Option<Line> {
    let [a, b] = free else {
        return None;
    };
    let (left, right) = if a.x <= b.x { (a, b) } else { (b, a) };
    let span = right.x - left.x;
    if span <= 0.0 || (right.y - left.y).abs() > tolerance::LEVEL_ENDS * span {
        return None;
    }
    let mut rise = 0.0f64;
    for p in pieces.iter().flat_map(|s| [s.start(), s.point_at(s.length() / 2.0), s.end()]) {
        let chord = left.y + (right.y - left.y) * (p.x - left.x) / span;
        let height = p.y - chord;
        if height.abs() > rise.abs() {
            rise = height;
        }
    }
    let ratio = rise.abs() / span;
    (tolerance::OWN_RISE..=tolerance::STEEPEST_GUESS).contains(&ratio).then_some(Line {
        span,
        rise,
        left: left.x,
        right: right.x,
    })
}

/// For each end the lowest end of its connected part.
fn parts(links: &[(usize, usize)], count: usize) -> Vec<usize> {
    let mut part: Vec<usize> = (0..count).collect();
    fn root(part: &mut [usize], mut i: usize) -> usize {
        while part[i] != i {
            part[i] = part[part[i]];
            i = part[i];
        }
        i
    }
    for &(a, b) in links {
        let (a, b) = (root(&mut part, a), root(&mut part, b));
        part[a.max(b)] = a.min(b);
    }
    (0..count).map(|i| root(&mut part, i)).collect()
}
