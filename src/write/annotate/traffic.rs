//! Traffic on the elevation: the envelope of all lines of thrust as a band about the axis, and the train where the offset is
//! largest, its axles on the road line and its line of thrust in the ring.

use crate::geometry::{Point, Vec2};
use crate::outcome::{Case, Status, Traffic};
use crate::write::annotate::pen::{Canvas, Dash, Layer, Words};
use crate::write::annotate::shown::{Shown, point};
use crate::write::text::{self, small};

/// Length of an axle's arrow in text heights.
const ARROW: f64 = 4.0;

/// The train of a case that is drawn: the one that strays most.
pub fn drawn(case: &Case) -> Option<&Traffic> {
    let stray = |t: &Traffic| t.worst.as_ref().and_then(|w| w.offset.value).unwrap_or(-1.0);
    let computed = case.traffic.iter().filter(|t| t.status == Status::Found);
    computed.fold(None, |best: Option<&Traffic>, t| match best {
        Some(b) if stray(b) >= stray(t) => Some(b),
        _ => Some(t),
    })
}

/// Draws band and worst position of a span.
pub fn draw(shown: &Shown, canvas: &mut Canvas) {
    // The heavy line may belong to a case without traffic; the train that strays most is drawn all the same.
    let trains = shown.span.cases.iter().filter_map(drawn);
    let stray = |t: &Traffic| t.worst.as_ref().and_then(|w| w.offset.value).unwrap_or(-1.0);
    let Some(train) = trains.fold(None, |best: Option<&Traffic>, t| match best {
        Some(b) if stray(b) >= stray(t) => Some(b),
        _ => Some(t),
    }) else {
        return;
    };
    for (role, side) in [("envelope-most", true), ("envelope-least", false)] {
        let edge = band(shown, train, side);
        canvas.chain(Layer::Traffic, role, &edge, Some(Dash::TwoDots));
        canvas.taken.keep_off(&edge);
    }
    let Some(at) = &train.at_worst else { return };
    let line: Vec<Point> = at.line.iter().map(|&p| point(p, shown.unit)).collect();
    canvas.chain(Layer::Traffic, "traffic-line", &line, Some(Dash::Short));
    if at.axles.is_empty() {
        return;
    }
    let road: Vec<Point> = at.road.iter().map(|&p| point(p, shown.unit)).collect();
    canvas.chain(Layer::Traffic, "road", &road, None);
    let most = at.axles.iter().map(|a| a.force).fold(0.0, f64::max);
    let h = canvas.h;
    for axle in &at.axles {
        let tip = point(axle.at, shown.unit);
        let size = if most > 0.0 { (axle.force / most).max(0.3) } else { 1.0 };
        canvas.arrow(Layer::Traffic, "axle", tip + Vec2::new(0.0, ARROW * h * size), tip);
    }
    let Some(first) = at.axles.first() else { return };
    let tip = point(first.at, shown.unit);
    let sum: f64 = at.axles.iter().map(|a| a.force).sum();
    let mut says = format!("{}: {}", train.name, text::force(sum, shown.units));
    if let Some(worst) = train.worst.as_ref().and_then(|w| w.offset.value) {
        let unit = text::length_units(shown.units).1;
        says.push_str(&format!(", offset {} {unit}", small(worst, shown.units)));
    }
    let places = [1.0, 2.5, 4.0, 6.0]
        .map(|up| (Words::new(says.clone(), tip + Vec2::new(0.0, (ARROW + up) * h), h), None));
    canvas.place(Layer::Traffic, "traffic-name", places);
}

/// One edge of the band.
fn band(shown: &Shown, train: &Traffic, most: bool) -> Vec<Point> {
    train
        .envelope
        .iter()
        .filter_map(|s| {
            let e = if most { s.eccentricity_max } else { s.eccentricity_min }?;
            let (at, normal) = shown.joint(s.s * shown.unit)?;
            Some(at + normal * (e * shown.unit))
        })
        .collect()
}
