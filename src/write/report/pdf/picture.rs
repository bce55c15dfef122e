//! Pictures on a sheet: the same marks as in the SVG file, as strokes, fills and text.

use krilla::color::rgb;
use krilla::geom::{PathBuilder, Transform};
use krilla::num::NormalizedF32;
use krilla::paint::{Fill, LineCap, LineJoin, Stroke, StrokeDash};
use krilla::surface::Surface;

use super::lettering::Lettering;
use super::narrow;
use crate::geometry::{Point, Segment, Vec2};
use crate::tags::marks::{Across, Along, Mark, Shape};
use crate::write::picture::svg::{CAPITAL_PART, pattern};
use crate::write::picture::{Picture, look};

/// Arcs are drawn in pieces of at most an eighth of a turn, each within a millionth of its radius.
const PIECE: f64 = std::f64::consts::FRAC_PI_4;

/// Draws a picture with its upper left corner at `at`, `scale` points for each of its pixels.
pub fn draw(picture: &Picture, at: (f64, f64), scale: f64, lettering: &Lettering, surface: &mut Surface) {
    let easel = Easel { picture, at, scale, lettering };
    for mark in &picture.marks {
        easel.mark(mark, surface);
    }
    surface.set_fill(None);
    surface.set_stroke(None);
}

/// A colour as the library takes it.
pub fn paint([r, g, b]: [u8; 3]) -> rgb::Color {
    rgb::Color::new(r, g, b)
}

/// A fill of one colour.
pub fn fill(colour: [u8; 3]) -> Fill {
    Fill { paint: paint(colour).into(), opacity: NormalizedF32::ONE, rule: Default::default() }
}

struct Easel<'a> {
    picture: &'a Picture,
    at: (f64, f64),
    scale: f64,
    lettering: &'a Lettering,
}

impl Easel<'_> {
    fn place(&self, p: Point) -> Point {
        let scale = self.picture.scale * self.scale;
        Point::new(
            self.at.0 + (p.x - self.picture.low.x) * scale,
            self.at.1 + (self.picture.high.y - p.y) * scale,
        )
    }

    fn go(&self, path: &mut PathBuilder, p: Point, begin: bool) {
        let p = self.place(p);
        let (x, y) = (narrow(p.x), narrow(p.y));
        if begin { path.move_to(x, y) } else { path.line_to(x, y) }
    }

    /// A piece between two points, an arc as cubics (error of a cubic for an arc: M. Goldapp, *Computer Aided Geometric
    /// Design* 8, 1991).
    fn piece(&self, path: &mut PathBuilder, from: Point, to: Point, bulge: f64) {
        let Segment::Arc { centre, radius, start_angle, sweep } = Segment::bulge(from, to, bulge) else {
            return self.go(path, to, false);
        };
        let count = (sweep.abs() / PIECE).ceil().clamp(1.0, 64.0);
        let step = sweep / count;
        let reach = 4.0 / 3.0 * (step / 4.0).tan() * radius;
        let mut angle = start_angle;
        let mut left = count;
        while left >= 1.0 {
            let (a, b) = (angle, angle + step);
            let on = |t: f64| centre + Vec2::from_angle(t) * radius;
            let turned = |t: f64| Vec2::from_angle(t + std::f64::consts::FRAC_PI_2);
            let points = [on(a) + turned(a) * reach, on(b) - turned(b) * reach, on(b)].map(|p| self.place(p));
            let [p, q, r] = points.map(|p| (narrow(p.x), narrow(p.y)));
            path.cubic_to(p.0, p.1, q.0, q.1, r.0, r.1);
            angle = b;
            left -= 1.0;
        }
    }

    fn stroke(&self, mark: &Mark, path: PathBuilder, surface: &mut Surface) {
        let look = look(mark);
        let dash = pattern(mark);
        surface.set_fill(None);
        surface.set_stroke(Some(Stroke {
            paint: paint(look.colour).into(),
            width: narrow(look.width * self.scale),
            line_cap: if dash.is_some() { LineCap::Butt } else { LineCap::Round },
            line_join: LineJoin::Round,
            dash: dash.map(|d| StrokeDash {
                array: d.iter().map(|p| narrow(p * self.scale)).collect(),
                offset: 0.0,
            }),
            ..Stroke::default()
        }));
        if let Some(path) = path.finish() {
            surface.draw_path(&path);
        }
    }

    fn mark(&self, mark: &Mark, surface: &mut Surface) {
        let mut path = PathBuilder::new();
        match &mark.shape {
            Shape::Line(a, b) => {
                self.go(&mut path, *a, true);
                self.go(&mut path, *b, false);
                self.stroke(mark, path, surface);
            }
            Shape::Polyline { points, closed } => {
                let ends = points.iter().skip(1).chain(points.first().filter(|_| *closed));
                if let Some((first, _)) = points.first() {
                    self.go(&mut path, *first, true);
                }
                for ((from, bulge), (to, _)) in points.iter().zip(ends) {
                    self.piece(&mut path, *from, *to, *bulge);
                }
                if *closed {
                    path.close();
                }
                self.stroke(mark, path, surface);
            }
            Shape::Circle(centre, radius) => {
                let r = Vec2::new(*radius, 0.0);
                self.go(&mut path, *centre - r, true);
                self.piece(&mut path, *centre - r, *centre + r, 1.0);
                self.piece(&mut path, *centre + r, *centre - r, 1.0);
                path.close();
                self.stroke(mark, path, surface);
            }
            Shape::Triangle(corners) => {
                for (i, corner) in corners.iter().enumerate() {
                    self.go(&mut path, *corner, i == 0);
                }
                path.close();
                surface.set_stroke(None);
                surface.set_fill(Some(fill(look(mark).colour)));
                if let Some(path) = path.finish() {
                    surface.draw_path(&path);
                }
            }
            Shape::Text { at, height, text, angle, across, along } => {
                let capitals = height * self.picture.scale * self.scale;
                let size = capitals / CAPITAL_PART;
                let text = self.lettering.legible(text);
                let wide = self.lettering.width(&text) * size;
                let left = match across {
                    Across::Left => 0.0,
                    Across::Centre => -wide / 2.0,
                    Across::Right => -wide,
                };
                let down = match along {
                    Along::Baseline => 0.0,
                    Along::Middle => capitals / 2.0,
                    Along::Top => capitals,
                };
                let place = self.place(*at);
                surface.set_stroke(None);
                surface.set_fill(Some(fill(look(mark).colour)));
                surface.push_transform(&Transform::from_translate(narrow(place.x), narrow(place.y)));
                surface.push_transform(&Transform::from_rotate(narrow(-angle.to_degrees())));
                surface.draw_glyphs(
                    krilla::geom::Point::from_xy(narrow(left), narrow(down)),
                    &self.lettering.glyphs(&text),
                    self.lettering.font.clone(),
                    &text,
                    narrow(size),
                    false,
                );
                surface.pop();
                surface.pop();
            }
        }
    }
}
