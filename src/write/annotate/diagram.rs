//! The offset diagram: the offset of the governing line along each span, exaggerated, on a straight base line.

use crate::geometry::{Point, Vec2};
use crate::outcome::{Check, Run, Units};
use crate::tags::marks::{Across, Along};
use crate::write::annotate::elevation;
use crate::write::annotate::pen::{Canvas, Dash, LEADING, Layer, Words};
use crate::write::annotate::place::width;
use crate::write::annotate::shown::Shown;
use crate::write::text::{self, in_metres};

/// Height of the larger ordinates, in text heights.
const TALL: f64 = 7.0;

/// A curve over a span: x in drawing units, offset in metres.
type Curve = Vec<(f64, f64)>;

/// Draws the diagrams of all spans under their spans, below `corner`; `hidden` is how many figures the elevation has no
/// room for. Gives back the height of the lowest thing drawn.
pub fn draw(
    run: &Run,
    spans: &[Shown],
    canvas: &mut Canvas,
    corner: Point,
    right: f64,
    hidden: usize,
) -> f64 {
    let h = canvas.h;
    let curves: Vec<Curve> = spans.iter().map(offsets).collect();
    if curves.iter().all(Vec::is_empty) {
        return corner.y;
    }
    let limit = offset_limit(run);
    let largest = curves.iter().flatten().map(|p| p.1.abs()).fold(0.0, f64::max);
    // A limit far beyond the line would flatten the diagram; it is then told and not drawn.
    // A line on the axis to within rounding has no shape of its own to show: then the limit alone gives the scale.
    let longest = spans.iter().map(|s| s.span.axis.span).fold(0.0, f64::max);
    let negligible = largest <= crate::tolerance::OFFSET_SHOWN * longest;
    let drawn_limit = limit.filter(|l| negligible || *l <= 6.0 * largest);
    let reach = drawn_limit.unwrap_or(0.0).max(if negligible { 0.0 } else { largest });
    let factor = exaggeration(reach, h, spans.first().map_or(1.0, |s| s.unit));

    let (_, mm) = text::length_units(&run.units);
    let mut title = if factor > 1.0 {
        format!(
            "along the joints, drawn {} times as large, + toward the extrados",
            text::round_number(factor)
        )
    } else {
        "along the joints, to the scale of the elevation, + toward the extrados".to_owned()
    };
    match (limit, drawn_limit) {
        (Some(l), Some(_)) => title.push_str(&format!("; limit {} {mm} dashed", text::small(l, &run.units))),
        (Some(l), None) => {
            title.push_str(&format!("; limit {} {mm} lies outside the diagram", text::small(l, &run.units)))
        }
        (None, _) => {}
    }
    if hidden > 0 {
        let figures = if hidden == 1 { "figure" } else { "figures" };
        title.push_str(&format!("; {hidden} {figures} not shown on the elevation"));
    }
    let columns = columns_between(corner.x, right, h);
    let mut lines = text::wrap("OFFSET OF THE LINE OF THRUST FROM THE AXIS", columns);
    lines.extend(text::wrap(&title, columns));
    let mut y = corner.y;
    for line in lines {
        y -= h;
        canvas.text(Layer::OffsetDiagram, "title", &Words::new(line, Point::new(corner.x, y), h));
        y -= (LEADING - 1.0) * h;
    }
    let up = curves.iter().flatten().map(|p| p.1).fold(drawn_limit.unwrap_or(0.0), f64::max);
    let down = curves.iter().flatten().map(|p| p.1).fold(-drawn_limit.unwrap_or(0.0), f64::min);
    let unit = spans.first().map_or(1.0, |s| s.unit);
    let bar = Bar::new(reach, up, down, factor * unit, h, &run.units);
    let base = (y - 3.2 * h - up * factor * unit).min(y - bar.above - 0.5 * h);

    scale_bar(canvas, Point::new(corner.x - 2.0 * h, base), &bar);
    for (shown, curve) in spans.iter().zip(&curves) {
        one(shown, curve, canvas, base, factor * unit, drawn_limit, spans.len() > 1);
    }
    let lowest = base + down * factor * unit;
    canvas.extent().map_or(lowest, |(low, _)| low.y.min(lowest))
}

/// Columns of text that fit between two abscissae, at least thirty.
pub fn columns_between(left: f64, right: f64, h: f64) -> usize {
    #[allow(clippy::cast_possible_truncation, clippy::cast_sign_loss)] // clamped to a small positive number
    let n = ((right - left) / h).clamp(30.0, 200.0) as usize;
    n
}

/// The least stated offset limit, m.
fn offset_limit(run: &Run) -> Option<f64> {
    run.findings
        .iter()
        .filter(|f| f.check == Check::Offset)
        .filter_map(|f| f.limit.and_then(|l| in_metres(l, f.unit.as_deref())))
        .min_by(f64::total_cmp)
}

/// Steps of the curve along a span, beside its stations.
const STEPS: u32 = 160;

/// The offset along the span, at the stations, the loads and evenly between.
fn offsets(shown: &Shown) -> Curve {
    let (Some(line), Some(path)) = (shown.line, &shown.path) else { return Vec::new() };
    let mut lengths: Vec<f64> =
        (0..=STEPS).map(|i| path.length() * f64::from(i) / f64::from(STEPS)).collect();
    lengths.extend(line.stations.iter().map(|t| t.s * shown.unit));
    lengths.extend(&shown.feet);
    lengths.extend(shown.worst().map(|w| w.0));
    lengths.sort_by(f64::total_cmp);
    lengths.into_iter().filter_map(|s| Some((shown.joint(s)?.0.x, shown.eccentricity(s)?))).collect()
}

/// How many times as large as the elevation offsets are drawn: 1, 2, 5, 10 …
fn exaggeration(reach: f64, h: f64, unit: f64) -> f64 {
    let wanted = TALL * h / (reach * unit);
    if !wanted.is_finite() || wanted <= 1.0 {
        return 1.0;
    }
    round_down(wanted)
}

/// The largest of 1, 2, 2.5, 5, 10 … that is not larger than the value (positive).
pub fn round_down(value: f64) -> f64 {
    let power = 10_f64.powf(value.log10().floor());
    let lead = [10.0, 5.0, 2.5, 2.0, 1.0]
        .into_iter()
        .find(|l| l * power <= value * (1.0 + crate::tolerance::ROUND_FIGURE))
        .unwrap_or(1.0);
    lead * power
}

/// A bar with the scale of the offsets, upright at the left, on the side of the base line that the larger offsets take.
struct Bar {
    /// Drawn from the base line, upward positive.
    drawn: f64,
    words: String,
    /// How far bar and words reach above the base line.
    above: f64,
}

impl Bar {
    fn new(reach: f64, up: f64, down: f64, scale: f64, h: f64, units: &Units) -> Self {
        // A round figure in the unit that it is told in.
        let round = if units.length == "ft" { 12.0 } else { 1.0 };
        let length = round_down(round * if reach > 0.0 { reach } else { TALL * h / scale }) / round;
        let drawn = length * scale * if -down > up { -1.0 } else { 1.0 };
        let words = format!("{} {}", text::small(length, units), text::length_units(units).1);
        let half = width(&words, h) / 2.0;
        Self { drawn, above: drawn.max(0.0).max(drawn / 2.0 + half), words }
    }
}

fn scale_bar(canvas: &mut Canvas, at: Point, bar: &Bar) {
    let h = canvas.h;
    let end = at + Vec2::new(0.0, bar.drawn);
    canvas.line(Layer::OffsetDiagram, "scale", at, end);
    for end in [at, end] {
        canvas.line(
            Layer::OffsetDiagram,
            "scale",
            end - Vec2::new(0.5 * h, 0.0),
            end + Vec2::new(0.5 * h, 0.0),
        );
    }
    let middle = Point::new(at.x - 1.2 * h, f64::midpoint(at.y, end.y));
    let words = Words::new(bar.words.clone(), middle, h).centred().turned(std::f64::consts::FRAC_PI_2);
    canvas.text(Layer::OffsetDiagram, "scale", &words);
}

fn one(
    shown: &Shown,
    curve: &Curve,
    canvas: &mut Canvas,
    base: f64,
    scale: f64,
    limit: Option<f64>,
    several: bool,
) {
    let h = canvas.h;
    let (Some(left), Some(right)) =
        (curve.iter().map(|p| p.0).min_by(f64::total_cmp), curve.iter().map(|p| p.0).max_by(f64::total_cmp))
    else {
        return;
    };
    let layer = Layer::OffsetDiagram;
    let at = |x: f64, e: f64| Point::new(x, base + e * scale);
    canvas.line(layer, "base", at(left, 0.0), at(right, 0.0));
    canvas.taken.keep_off(&[at(left, 0.0), at(right, 0.0)]);
    for x in [left, right] {
        let tick = Vec2::new(0.0, 0.7 * h);
        canvas.line(layer, "base", at(x, 0.0) - tick, at(x, 0.0) + tick);
    }
    for (_, dash, line) in elevation::other_cases(shown) {
        let points: Vec<Point> = line
            .stations
            .iter()
            .filter_map(|t| t.eccentricity.map(|e| at(t.at[0] * shown.unit, e)))
            .collect();
        canvas.chain(Layer::OtherLines, "other-offsets", &points, Some(dash));
        canvas.taken.keep_off(&points);
    }
    let points: Vec<Point> = curve.iter().map(|&(x, e)| at(x, e)).collect();
    for &s in &shown.feet {
        if let (Some((foot, _)), Some(e)) = (shown.joint(s), shown.eccentricity(s)) {
            canvas.line(Layer::Offsets, "ordinate", at(foot.x, 0.0), at(foot.x, e));
            canvas.taken.keep_off(&[at(foot.x, 0.0), at(foot.x, e)]);
        }
    }
    canvas.chain(layer, "offsets", &points, None);
    canvas.taken.keep_off(&points);
    if let Some(limit) = limit {
        for sign in [1.0, -1.0] {
            let ends = [at(left, sign * limit), at(right, sign * limit)];
            canvas.dashed(layer, "limit", ends[0], ends[1], Some(Dash::Short));
            canvas.taken.keep_off(&ends);
        }
    }
    let worst = worst_here(shown, canvas, base, scale);
    if let Some(limit) = limit {
        let outside = worst.is_some_and(|e| e.abs() > limit);
        for sign in [1.0, -1.0] {
            let places = (0..20).flat_map(|i| {
                let inset = (right - left) * f64::from(i) / 20.0;
                [1.25, -1.25].map(|d| {
                    let p = at(right - inset, sign * limit) + Vec2::new(0.0, sign * d * h);
                    let words = text::signed_small(sign * limit, shown.units);
                    let (_, mm) = text::length_units(shown.units);
                    (
                        Words::new(format!("limit {words} {mm}"), p, h)
                            .across(Across::Right)
                            .along(Along::Middle),
                        None,
                    )
                })
            });
            canvas.place(if outside { Layer::Flags } else { layer }, "limit", places);
        }
    }
    if several {
        let mut name = shown.span.name.clone();
        if shown.span.cases.len() > 1
            && let Some(case) = shown.case
        {
            name.push_str(&format!(", case {}", case.name));
        }
        let places = (0..40).map(|k| {
            let p = Point::new(f64::midpoint(left, right), base - (1.8 + 0.8 * f64::from(k)) * h);
            (Words::new(name.clone(), p, h).centred(), None)
        });
        canvas.place(layer, "span", places);
    }
}

/// Rings the worst ordinate and writes its value beside it. Gives back the value.
fn worst_here(shown: &Shown, canvas: &mut Canvas, base: f64, scale: f64) -> Option<f64> {
    let h = canvas.h;
    let (s, e) = shown.worst()?;
    let (foot, _) = shown.joint(s)?;
    let tip = Point::new(foot.x, base + e * scale);
    canvas.circle(Layer::Offsets, "worst", tip, 0.45 * h);
    let away = if e < 0.0 { -1.0 } else { 1.0 };
    let words = format!("max {} {}", text::signed_small(e, shown.units), text::length_units(shown.units).1);
    let places = (0..30).flat_map(|k| {
        let d = away * (1.6 + 0.5 * f64::from(k)) * h;
        [(0.0, Across::Centre), (0.9 * h, Across::Left), (-0.9 * h, Across::Right)].map(|(dx, across)| {
            let p = tip + Vec2::new(dx, d);
            (Words::new(words.clone(), p, h).across(across).along(Along::Middle), None)
        })
    });
    canvas.place(Layer::Offsets, "worst", places);
    Some(e)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn round_figures() {
        for (value, expected) in
            [(1.0, 1.0), (1.99, 1.0), (2.4, 2.0), (2.5, 2.5), (9.9, 5.0), (0.03, 0.025), (1000.0, 1000.0)]
        {
            assert!((round_down(value) - expected).abs() < 1e-12 * expected, "{value}");
        }
    }

    #[test]
    fn nothing_to_exaggerate() {
        assert!((exaggeration(0.0, 1.0, 1.0) - 1.0).abs() < f64::EPSILON);
        assert!((exaggeration(0.05, 0.25, 1.0) - 25.0).abs() < 1e-9);
    }
}
