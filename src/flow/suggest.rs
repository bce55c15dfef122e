//! Suggestions: the axis that the loads would have, and the least depth that would meet the limits.

use jiff::civil::Date;

use super::{analyse, problem};
use crate::geometry::{Path, Point};
use crate::job::{RibDepth, Settings};
use crate::model::{Case, Model, Span};
use crate::outcome::{self, Check, FindingVerdict, Move, Status, SuggestedAxis, SuggestedDepth, Suggestion};
use crate::refusal::Refusal;
use crate::statics;
use crate::tolerance;
use crate::verdict;

/// Greatest multiple of the drawn depth that is tried.
const DEEPEST: f64 = 8.0;

/// Step of the first search upward.
const STEP: f64 = 1.25;

/// Parts of the span at which moves are told where no load stands.
const PARTS: u32 = 10;

/// Adds suggestions to what was judged, where the job asks for them.
///
/// # Errors
/// As the check of a drawing.
pub fn add(
    computed: &verdict::Computed<'_>,
    settings: &Settings,
    judged: &mut verdict::Judgement,
    today: Date,
) -> Result<(), Refusal> {
    if !settings.mark.suggest {
        return Ok(());
    }
    let verdict::Computed { model, cases, analyses, .. } = *computed;
    for ((span, analyses), told) in model.spans.iter().zip(analyses).zip(&mut judged.spans) {
        let mut axes = Vec::new();
        for (case, analysis) in cases.iter().zip(analyses) {
            let problem = problem::problem(model, span, case, settings)?;
            axes.push(axis(span, case, told, &statics::funicular(&problem, analysis)));
        }
        let depth = depth(model, span, cases, settings, told, today)?;
        told.suggestion = Some(Suggestion { axes, depth });
    }
    verdict::add_suggestions(judged);
    Ok(())
}

fn axis(
    span: &Span,
    case: &Case,
    judged: &outcome::Span,
    found: &Result<statics::Funicular, String>,
) -> SuggestedAxis {
    let none = |reason: &str| SuggestedAxis {
        case: case.name.clone(),
        status: Status::None,
        reason: Some(reason.into()),
        horizontal: None,
        points: Vec::new(),
        moves: Vec::new(),
    };
    let found = match found {
        Ok(found) => found,
        Err(reason) => return none(reason),
    };
    let Some(path) = Path::polyline(&found.points) else {
        return none("it has no length");
    };
    SuggestedAxis {
        status: Status::Found,
        reason: None,
        horizontal: Some(found.push),
        points: found.points.iter().map(|p| [p.x, p.y]).collect(),
        moves: moves(&span.axis, &path, judged),
        ..none("")
    }
}

/// How far the axis moves at the loads.
fn moves(drawn: &Path, suggested: &Path, judged: &outcome::Span) -> Vec<Move> {
    let own = outcome::MagnitudeFrom::SelfWeight;
    let loads = judged.loads.iter().filter(|l| l.magnitude_from != own);
    let mut places: Vec<(Option<String>, Point)> =
        loads.map(|l| (Some(l.label.clone()), Point::new(l.at[0], l.at[1]))).collect();
    if places.is_empty() {
        let (a, b) = (drawn.start().x, drawn.end().x);
        places = (1..PARTS)
            .map(|i| (None, Point::new(a + (b - a) * f64::from(i) / f64::from(PARTS), 0.0)))
            .collect();
    }
    places
        .into_iter()
        .filter_map(|(load, place)| {
            let foot = meet(drawn, place)?;
            let by = meet(suggested, foot)?.y - foot.y;
            // A move by rounding alone is none.
            let by = if by.abs() <= tolerance::OFFSET_SHOWN * judged.axis.span { 0.0 } else { by };
            Some(Move { load, at: [foot.x, foot.y], by })
        })
        .collect()
}

/// Where the vertical through a point meets a path, nearest to the point.
fn meet(path: &Path, at: Point) -> Option<Point> {
    path.crossings_of_vertical(at.x)
        .into_iter()
        .map(|s| path.point_at(s))
        .min_by(|a, b| (*a - at).hypot().total_cmp(&(*b - at).hypot()))
}

/// The least multiple of the depth at which no limit that depends on it is exceeded. The loads and the axis stay; the rib's
/// own weight goes with its depth.
fn depth(
    model: &Model,
    span: &Span,
    cases: &[Case],
    settings: &Settings,
    judged: &outcome::Span,
    today: Date,
) -> Result<Option<SuggestedDepth>, Refusal> {
    let Some(ring) = &judged.ring else { return Ok(None) };
    let told = |factor: f64| SuggestedDepth {
        status: Status::Found,
        factor: Some(factor),
        depth_min: Some(ring.depth_min * factor),
        depth_max: Some(ring.depth_max * factor),
    };
    let holds = |factor: f64| holds(model, span, cases, settings, factor, today);
    if holds(1.0)? {
        return Ok(Some(told(1.0)));
    }
    let (mut low, mut high) = (1.0, STEP);
    while !holds(high)? {
        (low, high) = (high, high * STEP);
        if low >= DEEPEST {
            let none =
                SuggestedDepth { status: Status::None, factor: None, depth_min: None, depth_max: None };
            return Ok(Some(none));
        }
    }
    while high - low > tolerance::SUGGESTED_DEPTH * low {
        let middle = f64::midpoint(low, high);
        if holds(middle)? { high = middle } else { low = middle }
    }
    Ok(Some(told(high)))
}

/// Whether every limit that depends on the depth holds, or is accepted, in all cases of a span whose depth is multiplied.
fn holds(
    model: &Model,
    span: &Span,
    cases: &[Case],
    settings: &Settings,
    factor: f64,
    today: Date,
) -> Result<bool, Refusal> {
    let mut thicker = model.clone();
    if let Some(ring) = thicker.spans.iter_mut().find(|s| s.name == span.name).and_then(|s| s.ring.as_mut()) {
        ring.depth.iter_mut().for_each(|d| d.1 *= factor);
    }
    let mut settings = settings.clone();
    settings.rib.depth = settings.rib.depth.map(|depth| match depth {
        RibDepth::Constant(d) => RibDepth::Constant(d * factor),
        RibDepth::Linear(ends) => RibDepth::Linear(ends.map(|d| d * factor)),
    });
    let analyses = analyse(&thicker, cases, &settings)?;
    // Ranges take more than one analysis each, and stay with the ring as drawn; the suggestion says so.
    let extras = vec![vec![verdict::Extra::default(); cases.len()]; thicker.spans.len()];
    // So do the trains of the job.
    let traffic = vec![Vec::new(); analyses.len()];
    let computed =
        verdict::Computed { model: &thicker, cases, analyses: &analyses, extras: &extras, traffic: &traffic };
    let judged = verdict::judge(&settings, &[], &computed, today);
    let depends =
        [Check::Ring, Check::Kern, Check::Stress, Check::GeometricFactor, Check::LoadFactor, Check::NoLine];
    Ok(!judged.findings.iter().any(|f| {
        f.span.as_ref() == Some(&span.name)
            && f.verdict == FindingVerdict::Outside
            && depends.contains(&f.check)
    }))
}
