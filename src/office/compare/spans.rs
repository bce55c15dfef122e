//! Which span is which, and how far its axis moved.

use super::{Change, What, loads, results, same_length};
use crate::geometry::{Path, Point, Segment, Vec2};
use crate::outcome::{Axis, Run, Span, Station, Xy};
use crate::tolerance;
use crate::write::text::{metres, millimetres};

/// Fewest points of an axis at which its distance from another one is looked at.
const LOOKS: usize = 400;

/// All changes of spans.
pub fn spans(old: &Run, new: &Run, found: &mut Vec<Change>) {
    let pairs = pairs(&old.spans, &new.spans);
    for (i, span) in new.spans.iter().enumerate() {
        let Some(&(was, _)) = pairs.iter().find(|p| p.1 == i) else {
            found.push(only(span, "was added"));
            continue;
        };
        let before = &old.spans[was];
        axis(before, span, found);
        ring(before, span, found);
        loads::loads(before, span, &new.units, found);
        results::results(before, span, &new.units, found);
    }
    for (i, span) in old.spans.iter().enumerate() {
        if pairs.iter().all(|p| p.0 != i) {
            found.push(only(span, "is gone"));
        }
    }
}

fn only(span: &Span, became: &str) -> Change {
    let words = format!(
        "the {} of span {} m at x {} m {became}",
        span.kind,
        metres(span.axis.span),
        metres(span.axis.left[0])
    );
    Change::new(What::Span, words).of(&span.name).at(span.axis.crown)
}

/// Spans that stand over the same ground, as (old, new): those that share most first.
fn pairs(old: &[Span], new: &[Span]) -> Vec<(usize, usize)> {
    let ground = |axis: &Axis| {
        let (a, b) = (axis.left[0], axis.right[0]);
        (a.min(b), a.max(b))
    };
    let mut shared = Vec::new();
    for (i, before) in old.iter().enumerate() {
        for (j, after) in new.iter().enumerate() {
            let (a, b) = (ground(&before.axis), ground(&after.axis));
            let common = a.1.min(b.1) - a.0.max(b.0);
            let part = common / (a.1 - a.0).max(b.1 - b.0);
            if part > 0.0 {
                shared.push((part, i, j));
            }
        }
    }
    shared.sort_by(|a, b| b.0.total_cmp(&a.0).then((a.1, a.2).cmp(&(b.1, b.2))));
    let mut pairs: Vec<(usize, usize)> = Vec::new();
    for (_, i, j) in shared {
        if pairs.iter().all(|p| p.0 != i && p.1 != j) {
            pairs.push((i, j));
        }
    }
    // One span in each is one span, wherever it was moved.
    if pairs.is_empty() && old.len() == 1 && new.len() == 1 {
        pairs.push((0, 0));
    }
    pairs
}

/// The axis as a path.
pub fn path(axis: &Axis) -> Option<Path> {
    let pieces = axis.curve.windows(2).map(|pair| {
        let point = |c: [f64; 3]| Point::new(c[0], c[1]);
        Segment::bulge(point(pair[0]), point(pair[1]), pair[0][2])
    });
    Path::new(pieces)
}

/// Where two axes are farthest apart.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Apart {
    /// How far, m.
    pub distance: f64,
    /// The point of the old axis.
    pub old: Point,
    /// The point of the new axis.
    pub new: Point,
}

/// The largest distance of a point of either axis from the other axis.
pub fn apart(old: &Path, new: &Path) -> Apart {
    let (forth, back) = (farthest(old, new), farthest(new, old));
    if back.0 > forth.0 {
        let new_point = new.point_at(back.1);
        let old_point = old.point_at(old.nearest(new_point).0);
        Apart { distance: back.0, old: old_point, new: new_point }
    } else {
        let old_point = old.point_at(forth.1);
        Apart { distance: forth.0, old: old_point, new: new.point_at(new.nearest(old_point).0) }
    }
}

/// Distance and length along `from` of its point farthest from `to`.
fn farthest(from: &Path, to: &Path) -> (f64, f64) {
    let distance = |s: f64| to.nearest(from.point_at(s)).1;
    let per_segment = LOOKS.div_ceil(from.segments().len()).max(2);
    let mut looks = Vec::new();
    for pair in from.cumulative().windows(2) {
        looks.extend((0..per_segment).map(|k| pair[0] + (pair[1] - pair[0]) * k as f64 / per_segment as f64));
    }
    looks.push(from.length());
    let all: Vec<f64> = looks.iter().map(|s| distance(*s)).collect();
    let mut best = 0;
    for (i, d) in all.iter().enumerate() {
        if *d > all[best] {
            best = i;
        }
    }
    // Golden section between the neighbours: exact on a smooth hump, and never worse than the look itself.
    let golden = (5.0_f64.sqrt() - 1.0) / 2.0;
    let (mut low, mut high) = (looks[best.saturating_sub(1)], looks[(best + 1).min(looks.len() - 1)]);
    while high - low > tolerance::REVISION_LENGTH {
        let (a, b) = (high - golden * (high - low), low + golden * (high - low));
        if distance(a) > distance(b) { high = b } else { low = a }
    }
    let s = f64::midpoint(low, high);
    let d = distance(s);
    if d > all[best] { (d, s) } else { (all[best], looks[best]) }
}

fn axis(old: &Span, new: &Span, found: &mut Vec<Change>) {
    if old.kind != new.kind {
        found.push(
            Change::new(What::Axis, format!("{}: it is a {} now, it was a {}", new.name, new.kind, old.kind))
                .of(&new.name)
                .named("kind")
                .values(old.kind.as_str(), new.kind.as_str(), ""),
        );
    }
    if let (Some(before), Some(after)) = (path(&old.axis), path(&new.axis)) {
        let apart = apart(&before, &after);
        if apart.distance > tolerance::REVISION_LENGTH {
            let at: Xy = [apart.new.x, apart.new.y];
            let words = format!(
                "{}: the axis moved by up to {} mm{}, at x {} m, y {} m",
                new.name,
                millimetres(apart.distance),
                direction(apart.new - apart.old),
                metres(at[0]),
                metres(at[1])
            );
            found.push(Change::new(What::Axis, words).of(&new.name).named("largest distance").at(at).values(
                0.0,
                apart.distance,
                "m",
            ));
        }
    }
    for (name, was, is) in [
        ("span", old.axis.span, new.axis.span),
        ("rise", old.axis.rise, new.axis.rise),
        ("length", old.axis.length, new.axis.length),
    ] {
        if !same_length(was, is) {
            let words = format!("{}: {name} of the axis {} m, was {} m", new.name, metres(is), metres(was));
            found.push(Change::new(What::Axis, words).of(&new.name).named(name).values(was, is, "m"));
        }
    }
}

/// The way of a movement in words, where it has a plain one.
fn direction(way: Vec2) -> &'static str {
    // Within some twenty degrees of upright or level.
    let (flat, steep) = (way.x.abs() < 0.4 * way.y.abs(), way.y.abs() < 0.4 * way.x.abs());
    match (flat, steep) {
        (true, _) if way.y > 0.0 => " upward",
        (true, _) => " downward",
        (_, true) if way.x > 0.0 => " to the right",
        (_, true) => " to the left",
        _ => "",
    }
}

fn ring(old: &Span, new: &Span, found: &mut Vec<Change>) {
    let change = |words: String| Change::new(What::Ring, words).of(&new.name);
    let (before, after) = match (&old.ring, &new.ring) {
        (None, None) => return,
        (None, Some(ring)) => {
            let words =
                format!("{}: the ring has a depth now, {} m at least", new.name, metres(ring.depth_min));
            return found.push(change(words).named("depth_min").values(
                serde_json::Value::Null,
                ring.depth_min,
                "m",
            ));
        }
        (Some(ring), None) => {
            let words = format!(
                "{}: the ring has no depth now, it had {} m at least",
                new.name,
                metres(ring.depth_min)
            );
            return found.push(change(words).named("depth_min").values(
                ring.depth_min,
                serde_json::Value::Null,
                "m",
            ));
        }
        (Some(before), Some(after)) => (before, after),
    };
    for (name, words, was, is) in [
        ("depth_min", "least depth", before.depth_min, after.depth_min),
        ("depth_max", "greatest depth", before.depth_max, after.depth_max),
    ] {
        if !same_length(was, is) {
            let became = if is < was { "thinner" } else { "thicker" };
            let words = format!(
                "{}: the ring is {became}: {words} {} m, was {} m",
                new.name,
                metres(is),
                metres(was)
            );
            found.push(change(words).named(name).values(was, is, "m"));
        }
    }
    thinned(old, new, found);
    if before.width != after.width {
        let word = |w: Option<f64>| w.map_or("not given".into(), |w| format!("{} m", metres(w)));
        let words =
            format!("{}: width of the ring {}, was {}", new.name, word(after.width), word(before.width));
        found.push(change(words).named("width").values(before.width, after.width, "m"));
    }
}

/// Where the ring has lost most of its depth, at joints that lie the same part of the axis from the left springing.
fn thinned(old: &Span, new: &Span, found: &mut Vec<Change>) {
    let before = depths(old);
    let lost = |joint: &Joint| {
        let was = depth_at(&before, joint.part)?;
        Some((was - joint.depth, was, *joint))
    };
    let most = depths(new).iter().filter_map(lost).max_by(|a, b| a.0.total_cmp(&b.0));
    let Some((by, was, joint)) = most.filter(|most| most.0 > tolerance::REVISION_LENGTH) else {
        return;
    };
    let words = format!(
        "{}: the ring is thinner by up to {} mm, at x {} m, y {} m: depth {} m, was {} m",
        new.name,
        millimetres(by),
        metres(joint.at[0]),
        metres(joint.at[1]),
        metres(joint.depth),
        metres(was)
    );
    found.push(Change::new(What::Ring, words).of(&new.name).named("depth").at(joint.at).values(
        was,
        joint.depth,
        "m",
    ));
}

/// A joint with its depth.
#[derive(Debug, Clone, Copy)]
struct Joint {
    /// Which part of the axis lies before it.
    part: f64,
    at: Xy,
    depth: f64,
}

/// The joints that the results tell of, from the left.
fn depths(span: &Span) -> Vec<Joint> {
    let lines = span.cases.iter().flat_map(|case| &case.lines);
    let stations = lines.map(|line| &line.stations).find(|s| s.iter().any(|s| s.depth.is_some()));
    let joint = |s: &Station| Some(Joint { part: s.s / span.axis.length, at: s.at, depth: s.depth? });
    let mut joints: Vec<Joint> = stations.into_iter().flatten().filter_map(joint).collect();
    joints.sort_by(|a, b| a.part.total_cmp(&b.part));
    joints
}

/// The depth at a part of the axis, linear between the joints on either side.
fn depth_at(joints: &[Joint], part: f64) -> Option<f64> {
    let next = joints.partition_point(|j| j.part < part);
    let (before, after) = (joints.get(next.saturating_sub(1))?, joints.get(next).or(joints.last())?);
    let width = after.part - before.part;
    if width <= 0.0 {
        return Some(before.depth.min(after.depth));
    }
    let along = ((part - before.part) / width).clamp(0.0, 1.0);
    Some(before.depth + (after.depth - before.depth) * along)
}
