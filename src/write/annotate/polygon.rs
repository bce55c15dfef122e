//! The force polygon of each span: load line, pole of the governing line, rays, lettered by Bow's notation.
//!
//! The pole lies at `-(H, V)` from the start of the load line, so that each ray is parallel to the piece of the line of
//! thrust in the space of the same letter (C. Culmann, *Die graphische Statik*, 1866).

use crate::geometry::{Point, Vec2};
use crate::outcome::{Pole, Run};
use crate::tags::marks::{Across, Along};
use crate::write::annotate::diagram::round_down;
use crate::write::annotate::pen::{Canvas, Dash, LEADING, Layer, Words};
use crate::write::annotate::place::spread;
use crate::write::annotate::shown::{Shown, kind_name};
use crate::write::text;

/// Length of the load line and width of the polygon aimed at, in text heights.
const TALL: f64 = 40.0;
const WIDE: f64 = 52.0;
/// Distance of letters along the load line, in text heights.
const PITCH: f64 = 1.5;

/// Whether the loads add up to the case's total. A case with weight on the axis that is no load of its own would get rays
/// that are not parallel to its line.
fn adds_up(shown: &Shown) -> bool {
    let Some(case) = shown.case else { return true };
    let sum = shown.forces.iter().fold(Vec2::ZERO, |sum, f| sum + *f);
    let size: f64 = shown.forces.iter().map(|f| f.hypot()).sum();
    let miss = Vec2::new(case.total_load[0], case.total_load[1]) - sum;
    miss.hypot() <= size * crate::tolerance::NO_FORCE
}

/// The polygon of a span in force units, load line from the origin.
struct Polygon {
    /// Corners of the load line.
    corners: Vec<Vec2>,
    /// Letters of the corners.
    letters: Vec<String>,
    /// Pole of the governing line.
    pole: Option<Vec2>,
    /// Fitted pole of the graphic method.
    fitted: Option<Vec2>,
}

/// Draws the polygons from `corner` to the right, new rows where the width is used up. Gives back the right edge of
/// them all.
pub fn draw(run: &Run, spans: &[Shown], canvas: &mut Canvas, corner: Point, right: f64) -> f64 {
    let h = canvas.h;
    let polygons: Vec<Polygon> = spans.iter().map(polygon).collect();
    let scales = scales(&polygons, h);
    let limit = right.max(corner.x + 2.5 * WIDE * h);
    let (mut x, mut top, mut edge) = (corner.x, corner.y, corner.x);
    let mut row_low = top;
    for ((shown, polygon), scale) in spans.iter().zip(&polygons).zip(scales) {
        let title = title(run, shown, scale.filter(|_| canvas.has_units), spans.len() > 1);
        let width = cell_width(polygon, &title, scale, h);
        if x > corner.x && x + width > limit {
            (x, top) = (corner.x, row_low - 3.0 * h);
        }
        let low = cell(run, shown, polygon, &title, scale, canvas, Point::new(x, top));
        row_low = row_low.min(low);
        x += width + 3.0 * h;
        edge = edge.max(x);
    }
    edge
}

fn polygon(shown: &Shown) -> Polygon {
    if !adds_up(shown) {
        return Polygon { corners: vec![Vec2::ZERO], letters: Vec::new(), pole: None, fitted: None };
    }
    let mut corners = vec![Vec2::ZERO];
    let mut letters = Vec::new();
    let mut sum = Vec2::ZERO;
    for group in &shown.groups {
        if letters.is_empty() {
            letters.push(group.before.clone());
        }
        for force in &shown.forces[group.start..group.end] {
            sum += *force;
        }
        corners.push(sum);
        letters.push(group.after.clone());
    }
    let pole = shown.line.and_then(|l| l.left.as_ref()).map(|end| Vec2::new(-end.horizontal, -end.vertical));
    let fitted = shown
        .case
        .and_then(|c| c.pole.as_ref())
        .map(|Pole { horizontal, vertical, .. }| Vec2::new(-horizontal, -vertical));
    Polygon { corners, letters, pole, fitted }
}

impl Polygon {
    /// Low and high corner, the fitted pole only where it lies near.
    fn bounds(&self) -> (Vec2, Vec2) {
        let mut low = Vec2::ZERO;
        let mut high = Vec2::ZERO;
        let mut cover = |p: Vec2| {
            low = Vec2::new(low.x.min(p.x), low.y.min(p.y));
            high = Vec2::new(high.x.max(p.x), high.y.max(p.y));
        };
        for p in self.corners.iter().chain(&self.pole) {
            cover(*p);
        }
        if let Some(f) = self.shown_fitted() {
            cover(f);
        }
        (low, high)
    }

    /// Indices of the lettered corners from the lowest to the highest; of equal ones the later first, as they follow
    /// each other down a load line.
    fn letters_upward(&self) -> Vec<usize> {
        let mut order: Vec<usize> = (0..self.letters.len().min(self.corners.len())).collect();
        order.sort_by(|&a, &b| self.corners[a].y.total_cmp(&self.corners[b].y).then(b.cmp(&a)));
        order
    }

    /// Room on the far side of the pole for its name and that of the fitted pole, in text heights.
    fn before_pole(&self) -> f64 {
        if self.shown_fitted().is_some() { 14.0 } else { 3.0 }
    }

    /// The fitted pole, when it lies within half the polygon's size of the pole: a far one would shrink the polygon.
    fn shown_fitted(&self) -> Option<Vec2> {
        let (fitted, pole) = (self.fitted?, self.pole?);
        let size = self.corners.iter().map(|c| c.hypot()).fold(pole.hypot(), f64::max);
        ((fitted - pole).hypot() <= size / 2.0).then_some(fitted)
    }
}

/// Drawing units per force unit. One scale for all spans, unless the smallest polygon would shrink to less than a third
/// of the size aimed at.
fn scales(polygons: &[Polygon], h: f64) -> Vec<Option<f64>> {
    let own: Vec<Option<f64>> = polygons
        .iter()
        .map(|p| {
            let (low, high) = p.bounds();
            let size = high - low;
            let tall = TALL.max(PITCH * p.letters.len() as f64) * h;
            let scale = (tall / size.y).min(WIDE * h / size.x);
            scale.is_finite().then_some(scale)
        })
        .collect();
    let least = own.iter().flatten().copied().fold(f64::INFINITY, f64::min);
    let most = own.iter().flatten().copied().fold(0.0, f64::max);
    own.into_iter()
        .map(|s| {
            let s = if most <= 3.0 * least { s.map(|_| least) } else { s };
            s.map(round_scale)
        })
        .collect()
}

/// A scale at which one drawn length stands for a round force: 1, 2, 2.5, 4, 5 … force units.
fn round_scale(scale: f64) -> f64 {
    let per_length = 1.0 / scale;
    let power = 10_f64.powf(per_length.log10().floor());
    let lead = [1.0, 2.0, 2.5, 4.0, 5.0, 10.0]
        .into_iter()
        .find(|l| l * power >= per_length * (1.0 - crate::tolerance::ROUND_FIGURE))
        .unwrap_or(10.0);
    1.0 / (lead * power)
}

fn title(run: &Run, shown: &Shown, scale: Option<f64>, several: bool) -> Vec<String> {
    let mut head = "FORCE POLYGON".to_owned();
    if several {
        head.push_str(&format!(", {}", shown.span.name));
    }
    if shown.span.cases.len() > 1
        && let Some(case) = shown.case
    {
        head.push_str(&format!(", case {}", case.name));
    }
    let mut lines = text::wrap(&head, 44);
    match shown.line {
        _ if !adds_up(shown) => {
            lines.push("left out: the loads told do not add up to the case".into());
        }
        Some(line) => lines.extend(text::wrap(&format!("pole of the line {}", kind_name(line.kind)), 44)),
        None => lines.push("no line of thrust: load line only".into()),
    }
    if let Some(scale) = scale {
        lines.push(format!(
            "force scale: 1 drawing unit = {} {}",
            text::round_number(1.0 / scale),
            text::force_unit(&run.units)
        ));
    }
    lines
}

/// Room for letters and vertical dimensions beside the load line, in text heights.
const BESIDE: f64 = 8.0;

fn cell_width(polygon: &Polygon, title: &[String], scale: Option<f64>, h: f64) -> f64 {
    let (low, high) = polygon.bounds();
    let drawn = (high.x - low.x) * scale.unwrap_or(0.0) + (BESIDE + polygon.before_pole()) * h;
    let words = title.iter().map(|l| text::columns(l)).max().unwrap_or(0) as f64 * h;
    drawn.max(words)
}

/// One polygon below its upper left corner. Gives back the height of its lowest mark.
fn cell(
    run: &Run,
    shown: &Shown,
    polygon: &Polygon,
    title: &[String],
    scale: Option<f64>,
    canvas: &mut Canvas,
    corner: Point,
) -> f64 {
    let h = canvas.h;
    let layer = Layer::Forces;
    let mut y = corner.y;
    for line in title {
        y -= h;
        canvas.text(layer, "title", &Words::new(line.clone(), Point::new(corner.x, y), h));
        y -= (LEADING - 1.0) * h;
    }
    let Some(scale) = scale else { return y };
    bar(run, canvas, Point::new(corner.x, y - 2.2 * h), scale);
    y -= 5.5 * h;

    let (low, high) = polygon.bounds();
    let cable = shown.is_cable();
    // Letters that had to be spread reach beyond the load line.
    let order = polygon.letters_upward();
    let wanted: Vec<f64> = order.iter().map(|&i| polygon.corners[i].y * scale).collect();
    let spread = spread(&wanted, PITCH * h);
    let top = spread.last().map_or(high.y * scale, |l| (high.y * scale).max(l + h / 2.0));
    let bottom = spread.first().map_or(low.y * scale, |l| (low.y * scale).min(l - h / 2.0));
    let inset = if cable { BESIDE } else { polygon.before_pole() } * h;
    let origin = Point::new(corner.x + inset - low.x * scale, y - top);
    let at = |f: Vec2| origin + f * scale;
    let corners: Vec<Point> = polygon.corners.iter().map(|&c| at(c)).collect();
    let out = if cable { -1.0 } else { 1.0 };

    for pair in corners.windows(2) {
        canvas.line(layer, "load", pair[0], pair[1]);
    }
    canvas.taken.keep_off(&corners);
    for c in &corners {
        let tick = Vec2::new(0.4 * h, 0.0);
        canvas.line(layer, "load-tick", *c - tick, *c + tick);
    }
    let letters: Vec<(usize, f64)> = order.iter().zip(&spread).map(|(&i, y)| (i, origin.y + y)).collect();
    put_letters(polygon, canvas, &corners, &letters, out);
    if let (Some(first), Some(last)) = (corners.first(), corners.last())
        && (*last - *first).hypot() > 4.0 * h
    {
        // The sense of the load line.
        let along = (*last - *first).normalize();
        let middle = first.midpoint(*last);
        let side = Vec2::new(-along.y, along.x) * (0.35 * h);
        canvas.triangle(
            layer,
            "load",
            [
                middle + along * (0.8 * h),
                middle - along * (0.8 * h) + side,
                middle - along * (0.8 * h) - side,
            ],
        );
    }
    let mut lowest = origin.y + bottom;
    if let Some(pole) = polygon.pole {
        let pole = at(pole);
        for c in &corners {
            canvas.line(Layer::Forces, "ray", pole, *c);
            canvas.taken.keep_off(&[pole, *c]);
        }
        canvas.circle(layer, "pole", pole, 0.4 * h);
        dimensions(run, shown, canvas, pole, &corners, out, lowest);
        pole_name(canvas, pole, "O", out);
        if let Some(fitted) = polygon.shown_fitted() {
            cross(canvas, at(fitted), out);
        }
    }
    if let Some((bottom, _)) = canvas.extent() {
        lowest = lowest.min(bottom.y);
    }
    lowest
}

/// Letters beside the load line at the given heights, each tied to its corner.
fn put_letters(
    polygon: &Polygon,
    canvas: &mut Canvas,
    corners: &[Point],
    letters: &[(usize, f64)],
    out: f64,
) {
    let h = canvas.h;
    let edge = corners.iter().map(|c| c.x * out).fold(f64::NEG_INFINITY, f64::max) * out;
    for &(i, y) in letters {
        let start = corners[i] + Vec2::new(out * 0.4 * h, 0.0);
        let end = Point::new(edge + out * 1.6 * h, y);
        if (y - corners[i].y).abs() > 0.05 * h {
            canvas.line(Layer::Forces, "letter-leader", start, end);
        }
        let across = if out > 0.0 { Across::Left } else { Across::Right };
        let words = Words::new(polygon.letters[i].clone(), end + Vec2::new(out * 0.5 * h, 0.0), h)
            .across(across)
            .along(Along::Middle);
        canvas.text(Layer::Forces, "letter", &words);
    }
}

/// `H` as a dimension below the polygon, the two vertical reactions beside the letters.
fn dimensions(
    run: &Run,
    shown: &Shown,
    canvas: &mut Canvas,
    pole: Point,
    corners: &[Point],
    out: f64,
    low: f64,
) {
    let h = canvas.h;
    let Some(line) = shown.line else { return };
    let (Some(left), Some(right)) = (&line.left, &line.right) else { return };
    let (Some(&first), Some(&last)) = (corners.first(), corners.last()) else { return };
    let layer = Layer::Forces;

    let y = low - 2.2 * h;
    let (a, b) = (Point::new(pole.x, y), Point::new(first.x, y));
    dimension(canvas, a, b, Vec2::new(0.0, 1.0));
    let words = Words::new(
        format!("H {}", text::force(left.horizontal, &run.units)),
        Point::new(if out > 0.0 { a.x.min(b.x) } else { a.x.max(b.x) }, y - 1.5 * h),
        h,
    )
    .across(if out > 0.0 { Across::Left } else { Across::Right })
    .along(Along::Middle);
    canvas.text(layer, "push", &words);
    let level = Point::new(first.x, pole.y);
    canvas.dashed(layer, "pole-level", pole, level, Some(Dash::Short));
    canvas.taken.keep_off(&[pole, level]);

    let edge = corners.iter().map(|c| c.x * out).fold(f64::NEG_INFINITY, f64::max) * out;
    let x = edge + out * 5.0 * h;
    for (from, to, name, value) in
        [(first.y, pole.y, "V left", left.vertical), (pole.y, last.y, "V right", right.vertical)]
    {
        let (a, b) = (Point::new(x, from), Point::new(x, to));
        dimension(canvas, a, b, Vec2::new(1.0, 0.0));
        let words = format!("{name} {}", text::four_digits(value));
        let middle = f64::midpoint(from, to);
        // Beside its dimension; where that is short, wherever there is room along it.
        let places = (0..60).flat_map(|k| {
            let d = f64::from(k) * 0.7 * h;
            [d, -d].map(|d| {
                (
                    Words::new(words.clone(), Point::new(x + out * 1.3 * h, middle + d), h)
                        .centred()
                        .turned(std::f64::consts::FRAC_PI_2),
                    None,
                )
            })
        });
        canvas.place(layer, "reaction", places);
    }
}

/// A dimension line with ticks square to it.
fn dimension(canvas: &mut Canvas, a: Point, b: Point, square: Vec2) {
    let h = canvas.h;
    canvas.line(Layer::Forces, "dimension", a, b);
    for end in [a, b] {
        canvas.line(Layer::Forces, "dimension", end - square * (0.5 * h), end + square * (0.5 * h));
    }
    canvas.taken.keep_off(&[a, b]);
}

fn pole_name(canvas: &mut Canvas, pole: Point, name: &str, out: f64) {
    let h = canvas.h;
    let places = (0..16).map(|k| {
        let turn = f64::from(k / 2) * if k % 2 == 0 { 0.4 } else { -0.4 };
        let direction = Vec2::from_angle(turn) * -out;
        (Words::new(name, pole + direction * (1.5 * h), h).centred(), None)
    });
    canvas.place(Layer::Forces, "pole-name", places);
}

/// The fitted pole: a small cross, labelled as such.
fn cross(canvas: &mut Canvas, at: Point, out: f64) {
    let h = canvas.h;
    for d in [Vec2::new(0.6, 0.6), Vec2::new(0.6, -0.6)] {
        canvas.line(Layer::Forces, "fitted-pole", at - d * h, at + d * h);
    }
    canvas.taken.keep_off(&[at - Vec2::new(0.6 * h, 0.0), at + Vec2::new(0.6 * h, 0.0)]);
    // On the far side of the pole, a step down or up; then below and above.
    let (outer, inner) =
        if out > 0.0 { (Across::Right, Across::Left) } else { (Across::Left, Across::Right) };
    let outward = (0..24).map(|k: i32| {
        let level = if k % 2 == 0 { -1.0 } else { 1.0 };
        let place = at + Vec2::new(-out * 1.8, level * (1.8 + 0.8 * f64::from(k / 2))) * h;
        let from = at + Vec2::new(-out * 0.3, level * 0.7) * h;
        (place, outer, from, place + Vec2::new(out * 0.3 * h, 0.0))
    });
    let upright = (0..80).flat_map(|k| {
        let d = (2.5 + 0.8 * f64::from(k)) * h;
        [-d, d].map(|d| {
            let place = at + Vec2::new(0.0, d);
            let toward = Vec2::new(0.0, d.signum() * h);
            (place, inner, at + toward * 0.7, place - toward * 0.8)
        })
    });
    let places = outward.chain(upright).map(|(place, across, a, b)| {
        let words = Words::new("fitted pole", place, h).across(across).along(Along::Middle);
        (words, Some((a, b)))
    });
    if let Some((_, Some((a, b)))) = canvas.place(Layer::Forces, "fitted-pole-name", places) {
        canvas.line(Layer::Forces, "fitted-pole-name", a, b);
    }
}

/// A bar of a round force.
fn bar(run: &Run, canvas: &mut Canvas, at: Point, scale: f64) {
    let h = canvas.h;
    let force = round_down(14.0 * h / scale);
    let end = at + Vec2::new(force * scale, 0.0);
    canvas.line(Layer::Forces, "scale", at, end);
    for p in [at, end] {
        let tick = Vec2::new(0.0, 0.5 * h);
        canvas.line(Layer::Forces, "scale", p - tick, p + tick);
    }
    let words = Words::new(
        format!("{} {}", text::round_number(force), text::force_unit(&run.units)),
        end + Vec2::new(h, 0.0),
        h,
    )
    .along(Along::Middle);
    canvas.text(Layer::Forces, "scale", &words);
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_length_is_a_round_force() {
        for (scale, force) in [(0.01, 100.0), (0.009, 200.0), (0.0045, 250.0), (0.3, 4.0)] {
            assert!((1.0 / round_scale(scale) - force).abs() < 1e-9 * force, "{scale}");
        }
    }
}
