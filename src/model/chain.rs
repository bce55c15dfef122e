//! Curves to chains: pieces in any order and direction, joined end to end.

use std::collections::BTreeSet;
use std::ops::ControlFlow;

use super::pieces::{self, Pieces};
use super::{piers, turn};
use crate::drawing::{Curve, Source, near_pairs};
use crate::geometry::{Path, Point, Segment, Vec2};
use crate::refusal::Refusal;
use crate::tolerance;

/// A gap between two pieces that was closed with a straight piece, drawing units.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Gap {
    /// Its width.
    pub size: f64,
    /// Its left end.
    pub at: Point,
}

/// A piece of a chain; without a curve it closes a gap.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Link {
    /// The piece.
    pub segment: Segment,
    /// Index of the curve it comes from.
    pub curve: Option<usize>,
}

/// The axis of one span, from left to right, drawing units.
#[derive(Debug, Clone, PartialEq)]
pub struct Chain {
    /// The curve.
    pub path: Path,
    /// The entities it comes from, left to right.
    pub sources: Vec<Source>,
    /// The gaps that were closed in it.
    pub gaps: Vec<Gap>,
}

/// All chains, left to right, and what was put right on the way.
#[derive(Debug, Clone, PartialEq)]
pub struct Chains {
    /// The chains.
    pub chains: Vec<Chain>,
    /// Curves drawn over another one, which was kept.
    pub doubles: Vec<(Source, Source)>,
    /// Curves with a piece of no length.
    pub lengthless: Vec<Source>,
}

/// Joins the curves of the axis layers.
///
/// # Errors
/// When pieces branch, close on themselves, leave a gap that is too wide, or lie over one another.
pub fn chains(curves: &[Curve]) -> Result<Chains, Refusal> {
    if let Some(closed) = curves.iter().find(|c| c.closed) {
        return Err(closed_loop(&closed.source));
    }
    if curves.is_empty() {
        return Err(empty());
    }
    let pieces = pieces::collect(curves);
    if pieces.pieces.is_empty() {
        return Err(empty());
    }
    let links = first_pass(&pieces, curves)?;
    let joined = close_gaps(links, pieces.size, curves)?;
    let mut chains = Vec::new();
    for links in joined {
        for links in piers::split(left_to_right(links, curves)?) {
            chains.push(chain(&links, curves)?);
        }
    }
    chains.sort_by(|a, b| {
        let (a, b) = (a.path.start(), b.path.start());
        a.x.total_cmp(&b.x).then(a.y.total_cmp(&b.y))
    });
    apart(&chains, pieces.size)?;
    Ok(Chains { chains, doubles: pieces.doubles, lengthless: pieces.lengthless })
}

/// Chains of pieces whose ends meet.
fn first_pass(pieces: &Pieces, curves: &[Curve]) -> Result<Vec<Vec<Link>>, Refusal> {
    let mut at_node: Vec<Vec<usize>> = vec![Vec::new(); pieces.nodes.len()];
    for (i, piece) in pieces.pieces.iter().enumerate() {
        for node in piece.nodes {
            at_node[node].push(i);
        }
    }
    if let Some(node) = at_node.iter().position(|n| n.len() > 2) {
        let meeting: Vec<usize> = at_node[node].iter().map(|&i| pieces.pieces[i].curve).collect();
        return Err(branch(pieces.nodes[node], &meeting, curves));
    }
    let mut used = vec![false; pieces.pieces.len()];
    let mut found = Vec::new();
    for start in (0..at_node.len()).filter(|&n| at_node[n].len() == 1) {
        if used[at_node[start][0]] {
            continue;
        }
        let mut links = Vec::new();
        let mut node = start;
        while let Some(&next) = at_node[node].iter().find(|&&i| !used[i]) {
            used[next] = true;
            let piece = &pieces.pieces[next];
            let forward = piece.nodes[0] == node;
            node = piece.nodes[usize::from(forward)];
            links.push(Link {
                segment: if forward { piece.segment } else { piece.segment.reversed() },
                curve: Some(piece.curve),
            });
        }
        found.push(links);
    }
    match used.iter().position(|&u| !u) {
        Some(i) => Err(closed_loop(&curves[pieces.pieces[i].curve].source)),
        None => Ok(found),
    }
}

/// One end of a chain of links.
#[derive(Debug, Clone, Copy)]
struct End {
    chain: usize,
    last: bool,
    at: Point,
    outward: Vec2,
}

fn ends_of(chains: &[Vec<Link>]) -> Vec<End> {
    let mut ends = Vec::with_capacity(2 * chains.len());
    for (chain, links) in chains.iter().enumerate() {
        let (first, last) = (&links[0].segment, &links[links.len() - 1].segment);
        ends.push(End { chain, last: false, at: first.start(), outward: -first.tangent_at(0.0) });
        ends.push(End { chain, last: true, at: last.end(), outward: last.tangent_at(last.length()) });
    }
    ends
}

fn length_of(links: &[Link]) -> f64 {
    links.iter().map(|l| l.segment.length()).sum()
}

/// Joins chains whose ends leave a gap that may be closed, and refuses wider ones that look like a fault.
fn close_gaps(chains: Vec<Vec<Link>>, size: f64, curves: &[Curve]) -> Result<Vec<Vec<Link>>, Refusal> {
    let ends = ends_of(&chains);
    let points: Vec<Point> = ends.iter().map(|e| e.at).collect();
    let reach = size * tolerance::GAP;
    let mut partner: Vec<Option<usize>> = vec![None; ends.len()];
    let fault = near_pairs(&points, reach, |a, b| {
        if ends[a].chain == ends[b].chain {
            return if length_of(&chains[ends[a].chain]) > 2.0 * reach {
                ControlFlow::Break(closed_loop(&source_at(&chains, &ends[a], curves)))
            } else {
                ControlFlow::Continue(())
            };
        }
        if let Some(third) = partner[a].or(partner[b]) {
            let meeting: Vec<usize> =
                [a, b, third].iter().filter_map(|&e| curve_at(&chains, &ends[e])).collect();
            return ControlFlow::Break(branch(points[a], &meeting, curves));
        }
        partner[a] = Some(b);
        partner[b] = Some(a);
        ControlFlow::Continue(())
    });
    if let ControlFlow::Break(refusal) = fault {
        return Err(refusal);
    }
    let mut used = vec![false; chains.len()];
    let mut joined = Vec::new();
    for start in (0..ends.len()).filter(|&e| partner[e].is_none()) {
        let mut entry = start;
        if used[ends[entry].chain] {
            continue;
        }
        let mut links: Vec<Link> = Vec::new();
        loop {
            let end = ends[entry];
            used[end.chain] = true;
            if let Some(before) = links.last().map(|l| l.segment.end()) {
                links.push(Link { segment: Segment::line(before, end.at), curve: None });
            }
            if end.last {
                links.extend(reversed(&chains[end.chain]));
            } else {
                links.extend_from_slice(&chains[end.chain]);
            }
            let exit = entry ^ 1;
            match partner[exit] {
                Some(next) => entry = next,
                None => break,
            }
        }
        joined.push(links);
    }
    if let Some(chain) = used.iter().position(|&u| !u) {
        return Err(closed_loop(&source_at(&chains, &ends[2 * chain], curves)));
    }
    doubtful_gaps(&joined, curves)?;
    Ok(joined)
}

/// Refuses ends that go on in one another's direction across a gap too wide to be closed in silence: more likely a
/// missing piece than two spans.
fn doubtful_gaps(chains: &[Vec<Link>], curves: &[Curve]) -> Result<(), Refusal> {
    let ends = ends_of(chains);
    if chains.len() > tolerance::MOST_SPANS {
        return Err(source_at(chains, &ends[0], curves).refuse(
            "axis-pieces",
            format!("the axis layers hold {} separate lines: more than any bridge has spans", chains.len()),
            "Keep only the axis on the axis layer, or name another layer with `[layers] axis`",
        ));
    }
    let points: Vec<Point> = ends.iter().map(|e| e.at).collect();
    let lengths: Vec<f64> = chains.iter().map(|c| length_of(c)).collect();
    let longest = lengths.iter().copied().fold(0.0, f64::max);
    let fault = near_pairs(&points, longest * tolerance::DOUBTFUL_GAP, |a, b| {
        let (a, b) = (&ends[a], &ends[b]);
        let gap = (b.at - a.at).hypot();
        let limit = lengths[a.chain].max(lengths[b.chain]) * tolerance::DOUBTFUL_GAP;
        let straight_on = turn(a.outward, -b.outward).abs() < tolerance::DOUBTFUL_TURN;
        if a.chain == b.chain || gap > limit || !straight_on {
            return ControlFlow::Continue(());
        }
        ControlFlow::Break(source_at(chains, a, curves).refuse(
            "axis-gap",
            format!(
                "the axis has a gap of {gap:.6} drawing units between ({:.6}, {:.6}) and ({:.6}, {:.6}), before {}; too \
                 wide to be closed without asking",
                a.at.x,
                a.at.y,
                b.at.x,
                b.at.y,
                source_at(chains, b, curves).named()
            ),
            "Draw the missing piece, or let the two ends meet",
        ))
    });
    match fault {
        ControlFlow::Break(refusal) => Err(refusal),
        ControlFlow::Continue(()) => Ok(()),
    }
}

fn reversed(links: &[Link]) -> Vec<Link> {
    links.iter().rev().map(|l| Link { segment: l.segment.reversed(), curve: l.curve }).collect()
}

fn curve_at(chains: &[Vec<Link>], end: &End) -> Option<usize> {
    let links = &chains[end.chain];
    if end.last { links[links.len() - 1].curve } else { links[0].curve }
}

fn source_at(chains: &[Vec<Link>], end: &End, curves: &[Curve]) -> Source {
    curve_at(chains, end).map(|c| curves[c].source.clone()).unwrap_or_default()
}

fn left_to_right(links: Vec<Link>, curves: &[Curve]) -> Result<Vec<Link>, Refusal> {
    let (start, end) = (links[0].segment.start(), links[links.len() - 1].segment.end());
    let width = end.x - start.x;
    if width.abs() <= length_of(&links) * tolerance::UPRIGHT_AXIS {
        let source = links.iter().find_map(|l| l.curve).map(|c| curves[c].source.clone()).unwrap_or_default();
        return Err(source.refuse(
            "axis-upright",
            format!(
                "the axis from ({:.6}, {:.6}) to ({:.6}, {:.6}) has both ends over one another: it spans nothing",
                start.x, start.y, end.x, end.y
            ),
            "Keep only the axis of the arch on the axis layer, drawn as an elevation",
        ));
    }
    Ok(if width > 0.0 { links } else { reversed(&links) })
}

fn chain(links: &[Link], curves: &[Curve]) -> Result<Chain, Refusal> {
    let mut sources: Vec<Source> = Vec::new();
    let mut seen = BTreeSet::new();
    let mut gaps = Vec::new();
    for link in links {
        match link.curve {
            Some(curve) => {
                if seen.insert(curve) {
                    sources.push(curves[curve].source.clone());
                }
            }
            None => gaps.push(Gap { size: link.segment.length(), at: link.segment.start() }),
        }
    }
    let path = Path::new(links.iter().map(|l| l.segment)).ok_or_else(empty)?;
    Ok(Chain { path, sources, gaps })
}

/// Refuses chains that stand over or under one another.
fn apart(chains: &[Chain], size: f64) -> Result<(), Refusal> {
    let reach = size * tolerance::GAP;
    let mut before: Option<(&Chain, f64)> = None;
    let mut order: Vec<(&Chain, (f64, f64))> = chains.iter().map(|c| (c, across(&c.path))).collect();
    order.sort_by(|a, b| a.1.0.total_cmp(&b.1.0).then(a.1.1.total_cmp(&b.1.1)));
    for (chain, (left, right)) in order {
        if let Some((other, end)) = before
            && left < end - reach
        {
            let ends = |c: &Chain| {
                let (a, b) = (c.path.start(), c.path.end());
                format!(
                    "{} from ({:.6}, {:.6}) to ({:.6}, {:.6})",
                    c.sources.first().map(Source::named).unwrap_or_default(),
                    a.x,
                    a.y,
                    b.x,
                    b.y
                )
            };
            let source = chain.sources.first().cloned().unwrap_or_default();
            return Err(source.refuse(
                "axis-overlap",
                format!(
                    "the axis layers hold more than one candidate over the same ground: {}, and {}; which is the axis \
                     cannot be told",
                    ends(other),
                    ends(chain)
                ),
                "Keep one axis a span on the axis layer, or name another layer with `[layers] axis`",
            ));
        }
        if before.is_none_or(|b| right > b.1) {
            before = Some((chain, right));
        }
    }
    Ok(())
}

/// Least and greatest x of a path.
pub fn across(path: &Path) -> (f64, f64) {
    let mut low = f64::INFINITY;
    let mut high = f64::NEG_INFINITY;
    let mut offer = |x: f64| {
        low = low.min(x);
        high = high.max(x);
    };
    for segment in path.segments() {
        offer(segment.start().x);
        offer(segment.end().x);
        if let Segment::Arc { centre, radius, .. } = *segment {
            for side in [Vec2::new(1.0, 0.0), Vec2::new(-1.0, 0.0)] {
                let p = centre + side * radius;
                let (_, miss) = Path::new([*segment]).map_or((0.0, f64::INFINITY), |s| s.nearest(p));
                if miss <= radius * tolerance::SAME_PLACE {
                    offer(p.x);
                }
            }
        }
    }
    (low, high)
}

fn branch(at: Point, meeting: &[usize], curves: &[Curve]) -> Refusal {
    let mut names: Vec<String> = meeting.iter().map(|&c| curves[c].source.named()).collect();
    names.dedup();
    let source = meeting.first().map(|&c| curves[c].source.clone()).unwrap_or_default();
    source.refuse(
        "axis-branch",
        format!("the axis branches at ({:.6}, {:.6}): {} meet there", at.x, at.y, names.join(", ")),
        "Keep only the axis on the axis layer: one line from springing to springing",
    )
}

fn empty() -> Refusal {
    Refusal::new(
        "axis-empty",
        "the axis layers hold no curve of any length",
        "Draw the axis of the arch on the axis layer, or name its layer with `[layers] axis`",
    )
}

fn closed_loop(source: &Source) -> Refusal {
    source.refuse(
        "axis-closed",
        format!("{} closes on itself: an axis runs from springing to springing", source.named()),
        "Move closed outlines and circles to another layer, or cut the curve at the springings",
    )
}
