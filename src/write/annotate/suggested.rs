//! The suggested axis of the case that is drawn, on a layer of its own that is switched off.

use crate::geometry::{Point, Vec2};
use crate::outcome::{Status, SuggestedAxis};
use crate::write::annotate::pen::{Canvas, Dash, Layer, Words};
use crate::write::annotate::shown::{Shown, point};
use crate::write::text;

/// The suggested axis of the case that is drawn of a span.
pub fn axis<'a>(shown: &Shown<'a>) -> Option<&'a SuggestedAxis> {
    let suggestion = shown.span.suggestion.as_ref()?;
    let case = shown.case?;
    suggestion.axes.iter().find(|a| a.case == case.name && a.status == Status::Found)
}

/// Draws the suggested axes with their names. Their layer is switched off, but a reader who switches it on should find the
/// rest of the sheet still legible: the name keeps off all that stands there.
pub fn draw(spans: &[Shown], canvas: &mut Canvas) {
    let h = canvas.h;
    for shown in spans {
        let Some(axis) = axis(shown) else { continue };
        let points: Vec<Point> = axis.points.iter().map(|&p| point(p, shown.unit)).collect();
        canvas.chain(Layer::Suggested, "suggested-axis", &points, Some(Dash::TwoDots));
        let mut name = "suggested axis".to_owned();
        if shown.span.cases.len() > 1 {
            name.push_str(&format!(", case {}", text::plain(&axis.case)));
        }
        let out = -shown.inner_side();
        let n = points.len();
        if n < 2 {
            continue;
        }
        let pieces: Vec<(Point, Point)> = points.windows(2).map(|w| (w[0], w[1])).collect();
        let places = (0..n - 1).map(|i| (3 * n / 4 + i) % (n - 1)).flat_map(|i| {
            let from = pieces[i].0.lerp(pieces[i].1, 0.6);
            let name = name.clone();
            (3..24).map(move |k| {
                let at = from + Vec2::new(0.0, out * f64::from(k) * 1.5 * h);
                let end = at - Vec2::new(0.0, out * 0.9 * h);
                (Words::new(name.clone(), at, h).centred(), Some((from, end)))
            })
        });
        if let Some((_, Some((from, end)))) = canvas.place(Layer::Suggested, "suggested-name", places) {
            canvas.line(Layer::Suggested, "suggested-name", from, end);
        }
    }
}

/// What the note block says of a suggestion; empty without one.
pub fn words(shown: &Shown, layer: &str) -> String {
    let Some(suggestion) = &shown.span.suggestion else { return String::new() };
    let mut out = Vec::new();
    if let Some(axis) = axis(shown) {
        let at = |m: &crate::outcome::Move| {
            let load = m.load.as_ref().map_or(String::new(), |l| format!(" at load {l}"));
            format!("{} mm{load}", text::signed_millimetres(m.by))
        };
        let (up, down) = axis.extremes();
        let moves: Vec<String> = up.into_iter().chain(down).map(at).collect();
        let moved = if moves.is_empty() {
            "as drawn at every load".to_owned()
        } else {
            format!("moved {}", moves.join(", "))
        };
        out.push(format!("axis as funicular of the loads: {moved}; {layer}, switched off"));
    }
    match suggestion.depth.as_ref().map(|d| (d.status, d.factor)) {
        Some((Status::Found, Some(factor))) if factor > 1.0 => {
            out.push(format!("or {factor:.2} times the depth, with the axis as drawn"));
        }
        Some((Status::None, _)) => out.push("no depth up to eight times as large meets the limits".into()),
        _ => {}
    }
    out.join("; ")
}
