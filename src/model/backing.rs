//! Haunches that are solid up to a level: the working ring begins where its joint leaves them.

use super::note::Note;
use super::roof::Roof;
use super::{LineLoad, Model, Ring, Span, weight};
use crate::drawing::Source;
use crate::geometry::{Path, Segment};
use crate::job::{RibDepth, Settings};
use crate::refusal::Refusal;
use crate::tolerance;

/// Cuts the spans off below `rib.backing`: at the joint whose extrados end lies at that level. What stood on the parts cut off
/// is left to the haunches, and told.
///
/// # Errors
/// When the backing covers a whole ring, or nothing is known of its depth.
pub fn trim(model: &mut Model, settings: &Settings) -> Result<(), Refusal> {
    let Some(level) = settings.rib.backing else {
        return Ok(());
    };
    let mut notes = Vec::new();
    for span in &mut model.spans {
        let Some((from, to)) = working(span, settings.rib.depth, level)? else {
            continue;
        };
        let whole = span.axis.length();
        if from <= 0.0 && to >= whole {
            notes.push(Note::BackingIdle { span: span.name.clone(), level });
            continue;
        }
        cut(span, settings.rib.depth, from, to);
        let (start, end) = (span.axis.start(), span.axis.end());
        let slack = (end.x - start.x) * tolerance::ENDS_MEET;
        let loads = std::mem::take(&mut span.loads);
        let (kept, gone): (Vec<_>, Vec<_>) =
            loads.into_iter().partition(|l| (start.x - slack..=end.x + slack).contains(&l.at.x));
        span.loads = kept;
        let mut gone: Vec<(Source, String, f64)> =
            gone.iter().map(|l| (l.source.clone(), l.label.clone(), -l.force.y)).collect();
        for line in std::mem::take(&mut span.line_loads) {
            let kept = line.between(start.x, end.x);
            let rest = line.sum() - kept.as_ref().map_or(0.0, LineLoad::sum);
            if rest.abs() > tolerance::STRAIGHT_LINE * line.sum().abs() {
                gone.push((line.source.clone(), line.label.clone(), rest));
            }
            span.line_loads.extend(kept);
        }
        let hinges = std::mem::take(&mut span.hinges);
        let reach = slack.max(tolerance::GAP * span.axis.length());
        let depths = weight::depths(span, settings.rib.depth);
        span.hinges = hinges
            .into_iter()
            .filter(|h| {
                let (s, off) = span.axis.nearest(*h);
                off <= depths.as_ref().map_or(0.0, |d| weight::depth_at(d, s) / 2.0) + reach
            })
            .collect();
        notes.push(Note::BackingTrimmed {
            span: span.name.clone(),
            level,
            left: start,
            right: end,
            off: [from, whole - to],
            loads: gone,
        });
    }
    model.notes.extend(notes);
    Ok(())
}

/// Lengths along the axis between which the extrados stands above the level.
fn working(span: &Span, depth: Option<RibDepth>, level: f64) -> Result<Option<(f64, f64)>, Refusal> {
    let whole = span.axis.length();
    let roof = Roof::new(span, depth);
    let above = |s: f64| roof.foot(s).y >= level;
    let at = |k: u32| whole * f64::from(k) / f64::from(STEPS);
    let (Some(first), Some(last)) =
        ((0..=STEPS).find(|k| above(at(*k))), (0..=STEPS).rev().find(|k| above(at(*k))))
    else {
        return Err(Refusal::new(
            "backing",
            format!(
                "{}: rib.backing = {level} m lies above the whole ring: nothing of it is left to work",
                span.name
            ),
            "State the level of solid haunches as y in the elevation, in metres, below the crown",
        ));
    };
    let bisect = |mut under: f64, mut over: f64| {
        for _ in 0..60 {
            let middle = f64::midpoint(under, over);
            *(if above(middle) { &mut over } else { &mut under }) = middle;
        }
        over
    };
    let from = if first == 0 { 0.0 } else { bisect(at(first - 1), at(first)) };
    let to = if last == STEPS { whole } else { bisect(at(last + 1), at(last)) };
    if to - from <= whole * tolerance::GAP {
        return Err(Refusal::new(
            "backing",
            format!("{}: rib.backing = {level} m leaves next to nothing of the ring", span.name),
            "State the level of solid haunches as y in the elevation, in metres, below the crown",
        ));
    }
    Ok(Some((from, to)))
}

/// Places at which the first joint above the level is looked for.
const STEPS: u32 = 1000;

fn cut(span: &mut Span, stated: Option<RibDepth>, from: f64, to: f64) {
    let depths = weight::depths(span, stated);
    let axis = between(&span.axis, from, to);
    let table = |depths: &[(f64, f64)]| {
        if depths.len() < 2 {
            return depths.to_vec();
        }
        let mut out = vec![(0.0, weight::depth_at(depths, from))];
        out.extend(depths.iter().filter(|d| d.0 > from && d.0 < to).map(|d| (d.0 - from, d.1)));
        out.push((to - from, weight::depth_at(depths, to)));
        out
    };
    match (&mut span.ring, stated, depths) {
        (Some(ring), _, _) => ring.depth = table(&ring.depth),
        (None, Some(RibDepth::Linear(_)), Some(depths)) => {
            // The depth no longer runs from the springings of the axis that is left.
            if let Some([intrados, extrados]) = super::roof::sides(&span.axis, &depths) {
                span.ring = Some(Ring { intrados, extrados, depth: table(&depths), sources: Vec::new() });
            }
        }
        _ => {}
    }
    if let Some(axis) = axis {
        span.axis = axis;
    }
}

fn between(path: &Path, from: f64, to: f64) -> Option<Path> {
    let parts = path.segments().iter().zip(path.cumulative()).filter_map(|(segment, base)| {
        super::roof::part(segment, (from - base).max(0.0), (to - base).min(segment.length()))
    });
    Path::new(parts.collect::<Vec<Segment>>())
}
