//! How far the noise of surveyed ring lines could move what was computed from them.

use super::{With, note, spans};
use crate::model::noise::noise;
use crate::model::{self, weight};
use crate::outcome::{Check, Finding};
use crate::statics::{Analysis, LineKind, Status};
use crate::tolerance;

/// A finding where a ring line was drawn point by point with noise that shows in the depth: twice its standard deviation on the
/// depth (of both lines together), on the offset (of the axis midway, half of that), and on the geometric factor `d / (2 e)` to
/// first order, both taken as independent.
pub fn told(span: &model::Span, analysis: &Analysis, findings: &mut Vec<Finding>) {
    let Some(ring) = &span.ring else { return };
    let lines = [noise(&ring.intrados), noise(&ring.extrados)];
    if lines.iter().all(Option::is_none) {
        return;
    }
    let [inner, outer] = lines.map(|n| n.unwrap_or(0.0));
    let depth = 2.0 * inner.hypot(outer);
    let offset = depth / 2.0;
    let Some(depths) = weight::depths(span, None) else { return };
    let least = depths.iter().map(|d| d.1).fold(f64::INFINITY, f64::min);
    if depth <= tolerance::NOISE_TOLD * least {
        return;
    }
    let millimetres = |m: f64| format!("{:.1} mm", m * 1000.0);
    let mut text = format!(
        "the ring lines were surveyed point by point, with a noise of {} (intrados) and {} (extrados) standard deviation: it could \
         move the depth at a joint by {}, and the offset by {}",
        millimetres(inner),
        millimetres(outer),
        millimetres(depth),
        millimetres(offset)
    );
    let closest = analysis.lines.iter().find(|l| l.kind == LineKind::Closest && l.status == Status::Found);
    let worst = closest.and_then(|l| l.depth_use).filter(|u| u.ratio > tolerance::FUNICULAR_USE);
    if let Some(used) = worst {
        let d = weight::depth_at(&depths, used.s);
        let share = (depth / d).hypot(offset / (used.ratio * d));
        let factor = 1.0 / (2.0 * used.ratio);
        text.push_str(&format!(", and the geometric factor of {factor:.3} by {:.3}", factor * share));
    }
    text.push_str(" (twice the standard deviation, from how neighbouring points stray from the line of their neighbours)");
    let mut finding = note(Check::Ring, text).value(depth, "m").of(&span.name);
    if let Some(used) = worst {
        finding = finding.at(spans::xy(used.at));
    }
    finding.basis = Some("pseudo-residuals of three points (Gasser, Sroka, Jennen-Steinmetz 1986)".into());
    findings.push(finding);
}
