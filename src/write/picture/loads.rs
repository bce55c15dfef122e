//! The loads of a picture: an arrow each, its length by its size, with its name where there is room.

use std::f64::consts::FRAC_PI_2;

use crate::geometry::{Point, Vec2};
use crate::outcome::Run;
use crate::outcome::bow::MOST_LETTERED;
use crate::tags::marks::{Across, Along};
use crate::write::annotate::pen::{Canvas, Layer, Words};
use crate::write::annotate::shown::{Shown, point};
use crate::write::text;

/// Length of the shortest and the longest arrow, text heights.
const SHORT: f64 = 2.5;
const LONG: f64 = 6.5;

/// Draws the loads of all spans, then their names.
pub fn draw(run: &Run, spans: &[Shown], canvas: &mut Canvas) {
    let largest = spans.iter().flat_map(|s| &s.forces).map(|f| f.hypot()).fold(0.0, f64::max);
    if largest.partial_cmp(&0.0) != Some(std::cmp::Ordering::Greater) || !largest.is_finite() {
        return;
    }
    let ends: Vec<Vec<Option<Vec2>>> = spans.iter().map(|shown| arrows(shown, largest, canvas)).collect();
    for (shown, ends) in spans.iter().zip(&ends) {
        if shown.span.loads.len() <= MOST_LETTERED {
            names(run, shown, ends, canvas);
        }
    }
}

/// The arrows of a span. Gives back the outer end of each, from where it acts.
fn arrows(shown: &Shown, largest: f64, canvas: &mut Canvas) -> Vec<Option<Vec2>> {
    let h = canvas.h;
    let mut out = Vec::new();
    for ((load, force), &foot) in shown.span.loads.iter().zip(&shown.forces).zip(&shown.feet) {
        let size = force.hypot();
        if size <= largest * crate::tolerance::NO_FORCE {
            out.push(None);
            continue;
        }
        let at = point(load.at, shown.unit);
        if let Some((joint, _)) = shown.joint(foot)
            && (joint - at).hypot() > 0.5 * h
        {
            canvas.line(Layer::Ring, "line-of-action", at, joint);
            canvas.taken.keep_off(&[at, joint]);
        }
        let along = *force / size * ((SHORT + (LONG - SHORT) * size / largest) * h);
        // What presses on an arch comes from outside; what hangs on a cable pulls away from it.
        let outward = if shown.is_cable() { along } else { -along };
        let outer = at + outward;
        if shown.is_cable() {
            canvas.arrow(Layer::Loads, "load", at, outer);
        } else {
            canvas.arrow(Layer::Loads, "load", outer, at);
        }
        canvas.taken.keep_off(&[at, outer]);
        out.push(Some(outward));
    }
    out
}

/// Names and sizes: level where neighbours leave room for all, else upright.
fn names(run: &Run, shown: &Shown, ends: &[Option<Vec2>], canvas: &mut Canvas) {
    let h = canvas.h;
    let loads = &shown.span.loads;
    let words: Vec<String> = loads
        .iter()
        .zip(&shown.forces)
        .map(|(load, force)| {
            let size = text::force(force.hypot(), &run.units);
            // A bare number would read as part of the figure.
            if load.label.chars().all(|c| c.is_ascii_digit()) {
                size
            } else {
                format!("{} {size}", load.label)
            }
        })
        .collect();
    let widest = words.iter().map(|w| text::columns(w)).max().unwrap_or(0) as f64 * h;
    let closest =
        loads.windows(2).map(|w| (w[1].at[0] - w[0].at[0]).abs() * shown.unit).fold(f64::INFINITY, f64::min);
    let level = closest > widest + h;
    for ((load, words), outward) in loads.iter().zip(words).zip(ends) {
        let Some(outward) = outward else { continue };
        let end = point(load.at, shown.unit) + *outward;
        let up = if outward.y < 0.0 { -1.0 } else { 1.0 };
        let places = (0..12).map(|k| {
            let at = Point::new(end.x, end.y + up * (0.8 + 0.5 * f64::from(k)) * h);
            let placed = if level {
                Words::new(words.clone(), at + Vec2::new(0.0, up * 0.5 * h), h).centred()
            } else {
                let across = if up > 0.0 { Across::Left } else { Across::Right };
                Words::new(words.clone(), at, h).turned(FRAC_PI_2).across(across).along(Along::Middle)
            };
            (placed, None)
        });
        canvas.place(Layer::Loads, "load-name", places);
    }
}
