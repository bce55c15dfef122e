//! Cuts a line that runs through several spans at the piers (arches) or towers (cables) between them.

use super::chain::Link;
use crate::geometry::{Path, Point};
use crate::tolerance;

/// The spans of a line, left to right. A line of arches is cut where it comes down to a pier and goes up again, a line of
/// cables where it comes up to a tower and goes down again; in either case only where the parts on both sides are
/// arches (above their chords) or cables (below them) of their own, so that neither a pointed arch nor a cable with one
/// heavy load is cut.
pub fn split(links: Vec<Link>) -> Vec<Vec<Link>> {
    let kinks: Vec<(usize, f64)> = (1..links.len()).filter_map(|i| kink(&links, i).map(|k| (i, k))).collect();
    let mut spans = Vec::new();
    let mut from = 0;
    for (which, &(at, side)) in kinks.iter().enumerate() {
        let to =
            kinks[which + 1..].iter().find(|k| k.1.total_cmp(&side).is_eq()).map_or(links.len(), |k| k.0);
        let before = trimmed(&links[from..at]);
        let after = trimmed(&links[at..to]);
        if own_span(before, side) && own_span(after, side) {
            spans.push(before.to_vec());
            from = at;
        }
    }
    spans.push(trimmed(&links[from..]).to_vec());
    spans
}

/// Without the straight pieces that close gaps at its ends: at a pier they are no part of a span.
fn trimmed(mut links: &[Link]) -> &[Link] {
    while let [Link { curve: None, .. }, rest @ ..] = links {
        links = rest;
    }
    while let [rest @ .., Link { curve: None, .. }] = links {
        links = rest;
    }
    links
}

/// At the joint before link `i`: 1 when the line comes down to it and goes up again, −1 the other way round.
fn kink(links: &[Link], i: usize) -> Option<f64> {
    // A piece that closes a gap has no direction of its own: look at what it joins.
    links[i].curve?;
    let before = links[..i].iter().rev().find(|l| l.curve.is_some())?;
    let came = before.segment.tangent_at(before.segment.length());
    let goes = links[i].segment.tangent_at(0.0);
    if came.y < 0.0 && goes.y > 0.0 {
        Some(1.0)
    } else if came.y > 0.0 && goes.y < 0.0 {
        Some(-1.0)
    } else {
        None
    }
}

/// Whether the part is an arch (`side` 1) or a cable (`side` −1) that stands on its ends.
fn own_span(links: &[Link], side: f64) -> bool {
    let Some(path) = Path::new(links.iter().map(|l| l.segment)) else {
        return false;
    };
    let (start, end) = (path.start(), path.end());
    let width = (end - start).hypot();
    let (_, over) = path.farthest_from_chord(side < 0.0);
    let (_, under) = path.farthest_from_chord(side > 0.0);
    // Both ends well away from the crown, or the kink is only a ripple of a drawn or measured line.
    let crown = links
        .iter()
        .flat_map(|l| [l.segment.start(), l.segment.point_at(l.segment.length() / 2.0), l.segment.end()])
        .map(|p: Point| side * p.y)
        .fold(f64::NEG_INFINITY, f64::max);
    let depth = (crown - side * start.y).min(crown - side * end.y);
    over.abs() > tolerance::OWN_RISE * width
        && under.abs() < tolerance::OWN_RISE * over.abs()
        && depth > tolerance::OWN_DEPTH * over.abs()
}
