//! Thrust and moment along the span, case by case.

use super::{ACROSS_PAGE, Picture, canvas, picture, spans};
use crate::geometry::{Point, Vec2};
use crate::outcome::{Line, Run, Station};
use crate::tags::marks::{Across, Along};
use crate::write::annotate::diagram::{columns_between, round_down};
use crate::write::annotate::elevation::other_cases;
use crate::write::annotate::pen::{Canvas, Dash, LEADING, Layer, Words};
use crate::write::annotate::shown::Shown;
use crate::write::text;

/// Height of the larger ordinates, in text heights.
const TALL: f64 = 9.0;

/// A line of a span with its line type, the one drawn heavy without.
type Curve<'a> = (String, Option<Dash>, &'a Line);

/// Thrust and moment of the governing lines along the span; `None` where there is none.
pub fn forces(run: &Run) -> Option<Picture> {
    let shown = spans(run);
    let curves: Vec<Vec<Curve>> = shown.iter().map(curves).collect();
    if curves.iter().all(Vec::is_empty) {
        return None;
    }
    let (mut canvas, left, right) = canvas(run, ACROSS_PAGE);
    let h = canvas.h;
    let mut y = 0.0;
    let force = text::force_unit(&run.units);
    let moment = text::moment_unit(&run.units);
    for (name, unit, value) in [
        ("THRUST N, compression positive", force, thrust as fn(&Station) -> f64),
        ("MOMENT M, positive with an offset toward the extrados", moment, bending as fn(&Station) -> f64),
    ] {
        let title = format!("{name}, {unit}");
        for line in text::wrap(&title, columns_between(left, right, h)) {
            y -= h;
            canvas.text(Layer::OffsetDiagram, "title", &Words::new(line, Point::new(left, y), h));
            y -= (LEADING - 1.0) * h;
        }
        y = diagram(&shown, &curves, value, &mut canvas, (left, y)) - 3.0 * h;
    }
    Some(picture(run, canvas, "Thrust and moment along the span", 0))
}

fn thrust(station: &Station) -> f64 {
    station.thrust
}

fn bending(station: &Station) -> f64 {
    station.moment
}

fn curves<'a>(shown: &Shown<'a>) -> Vec<Curve<'a>> {
    let mut out: Vec<Curve> = Vec::new();
    if let (Some(line), Some(case)) = (shown.line, shown.case) {
        out.push((format!("case {}", case.name), None, line));
    }
    out.extend(other_cases(shown).into_iter().map(|(name, dash, line)| (name, Some(dash), line)));
    out
}

/// One quantity over all spans. Gives back the height of the lowest mark.
fn diagram(
    shown: &[Shown],
    curves: &[Vec<Curve>],
    value: fn(&Station) -> f64,
    canvas: &mut Canvas,
    (left, top): (f64, f64),
) -> f64 {
    let h = canvas.h;
    let values = || curves.iter().flatten().flat_map(|c| &c.2.stations).map(value);
    let (high, low) = (values().fold(0.0, f64::max), values().fold(0.0, f64::min));
    let largest = high.max(-low);
    let scale = if largest > 0.0 { TALL * h / largest } else { 0.0 };
    let base = top - 2.6 * h - high * scale;
    let at = |x: f64, v: f64| Point::new(x, base + v * scale);
    if largest > 0.0 {
        let length = round_down(largest) * if -low > high { -1.0 } else { 1.0 };
        let x = left - 2.0 * h;
        canvas.line(Layer::OffsetDiagram, "scale", at(x, 0.0), at(x, length));
        for v in [0.0, length] {
            let tick = Vec2::new(0.5 * h, 0.0);
            canvas.line(Layer::OffsetDiagram, "scale", at(x, v) - tick, at(x, v) + tick);
        }
        let words = Words::new(text::round_number(length.abs()), at(x - 1.2 * h, length / 2.0), h);
        canvas.text(Layer::OffsetDiagram, "scale", &words.centred().turned(std::f64::consts::FRAC_PI_2));
    }
    for (shown, curves) in shown.iter().zip(curves) {
        let axis = &shown.span.axis;
        let ends = [at(axis.left[0], 0.0), at(axis.right[0], 0.0)];
        canvas.line(Layer::OffsetDiagram, "base", ends[0], ends[1]);
        canvas.taken.keep_off(&ends);
        for (_, dash, line) in curves.iter().rev() {
            let layer = if dash.is_some() { Layer::OtherLines } else { Layer::Line };
            let points: Vec<Point> = line.stations.iter().map(|s| at(s.at[0], value(s))).collect();
            canvas.chain(layer, "curve", &points, *dash);
            canvas.taken.keep_off(&points);
        }
        for (name, dash, line) in curves {
            extremes(name, *dash, line, value, curves.len() > 1, canvas, &at);
        }
    }
    let lowest = base + low * scale;
    canvas.extent().map_or(lowest, |(corner, _)| corner.y.min(lowest))
}

/// Figures at the greatest and the least value of a curve, where there is room.
fn extremes(
    name: &str,
    dash: Option<Dash>,
    line: &Line,
    value: fn(&Station) -> f64,
    several: bool,
    canvas: &mut Canvas,
    at: &impl Fn(f64, f64) -> Point,
) {
    let h = canvas.h;
    let size = line.stations.iter().map(|s| value(s).abs()).fold(0.0, f64::max);
    let by_value = |a: &&Station, b: &&Station| value(a).total_cmp(&value(b));
    let ends = [line.stations.iter().max_by(by_value), line.stations.iter().min_by(by_value)];
    for (station, up) in ends.into_iter().flatten().zip([1.0, -1.0]) {
        let v = text::beside(value(station), size);
        let mut words = text::four_digits(v);
        if several {
            words = format!("{words} ({name})");
        }
        let tip = at(station.at[0], v);
        let places = (0..16).flat_map(|k| {
            let d = up * (1.3 + 0.6 * f64::from(k)) * h;
            [Across::Centre, Across::Left, Across::Right].map(|across| {
                (
                    Words::new(words.clone(), tip + Vec2::new(0.0, d), h).across(across).along(Along::Middle),
                    None,
                )
            })
        });
        canvas.place(if dash.is_some() { Layer::OtherLines } else { Layer::Line }, "figure", places);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::sample::{Sample, arch};

    #[test]
    fn a_curve_for_each_case_and_quantity() {
        let mut sample = Sample { depth: Some(0.6), ..arch(9, 30.0, 5.0) };
        sample.case = vec![("dead".into(), 0.0), ("left".into(), 0.3), ("right".into(), -0.25)];
        let picture = forces(&sample.run()).unwrap();
        let curves = picture.marks.iter().filter(|m| m.role == "curve").count();
        assert_eq!(curves, 2 * 3);
        let dashed = picture.marks.iter().filter(|m| m.role == "curve" && m.line_type.is_some()).count();
        assert_eq!(dashed, 2 * 2, "cases differ by line type");
        let mut none = arch(3, 20.0, 4.0).run();
        none.spans[0].cases.clear();
        assert!(forces(&none).is_none());
    }
}
