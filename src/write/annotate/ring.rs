//! The ring that the line is held against: its lines and joints where a depth is known, and the middle third.

use crate::geometry::Point;
use crate::outcome::Run;
use crate::write::annotate::elevation;
use crate::write::annotate::pen::{Canvas, Dash, Layer};
use crate::write::annotate::shown::Shown;

/// Depths narrower than this many text heights are not drawn: their lines would run into the axis.
const VISIBLE: f64 = 0.5;

/// Most joints drawn across one ring.
const MOST_JOINTS: usize = 400;

/// Draws ring lines, joints and middle third of a span, each where it is wide enough to be seen.
pub fn draw(run: &Run, shown: &Shown, canvas: &mut Canvas) {
    let depths = depths(shown);
    let widest = depths.iter().map(|d| d.1).fold(0.0, f64::max);
    if widest < VISIBLE * canvas.h || is_too_deep(shown) {
        return;
    }
    for side in [1.0, -1.0] {
        let edge = edge(shown, &depths, side / 2.0);
        canvas.chain(Layer::Ring, "ring", &edge, None);
        canvas.taken.keep_off(&edge);
    }
    for s in joints(run, shown) {
        if let (Some((at, normal)), Some(depth)) = (shown.joint(s), depth_at(&depths, s)) {
            let half = normal * (depth / 2.0);
            canvas.line(Layer::Ring, "joint", at - half, at + half);
        }
    }
    if widest / 3.0 < VISIBLE * canvas.h {
        return;
    }
    for side in [1.0, -1.0] {
        let edge = edge(shown, &depths, side / 6.0);
        canvas.chain(Layer::Kern, "kern", &edge, Some(Dash::Dots));
        canvas.taken.keep_off(&edge);
    }
}

/// Whether the depth is so large beside the span (a depth in the wrong unit) that ring lines and joints would cross each
/// other and everything else. The note block says that the ring is not drawn.
pub fn is_too_deep(shown: &Shown) -> bool {
    depths(shown).iter().any(|d| d.1 > shown.span.axis.span * shown.unit / 2.0)
}

/// Length along the axis and depth of the stations that have one, drawing units.
fn depths(shown: &Shown) -> Vec<(f64, f64)> {
    let stations = shown.line.map_or(&[][..], |line| &line.stations);
    stations.iter().filter_map(|t| t.depth.map(|d| (t.s * shown.unit, d * shown.unit))).collect()
}

/// The line that lies this part of the depth off the axis.
fn edge(shown: &Shown, depths: &[(f64, f64)], part: f64) -> Vec<Point> {
    depths.iter().filter_map(|&(s, d)| shown.joint(s).map(|(p, n)| p + n * (part * d))).collect()
}

/// Depth between two stations, linear.
fn depth_at(depths: &[(f64, f64)], s: f64) -> Option<f64> {
    let next = depths.partition_point(|d| d.0 < s);
    match (next.checked_sub(1).and_then(|i| depths.get(i)), depths.get(next)) {
        (Some(a), Some(b)) if b.0 > a.0 => Some(a.1 + (b.1 - a.1) * (s - a.0) / (b.0 - a.0)),
        (Some(d), _) | (None, Some(d)) => Some(d.1),
        (None, None) => None,
    }
}

/// The joints between the voussoirs that the job states; without any, where the loads act.
fn joints(run: &Run, shown: &Shown) -> Vec<f64> {
    let stated = run.settings.pointer("/rib/voussoirs").and_then(serde_json::Value::as_u64);
    let count = stated.and_then(|n| usize::try_from(n).ok()).filter(|n| (1..=MOST_JOINTS).contains(n));
    match (count, &shown.path) {
        (Some(n), Some(path)) => (0..=n).map(|i| path.length() * i as f64 / n as f64).collect(),
        _ => elevation::joints(shown),
    }
}
