//! A picture as PNG: the same marks, filled by `tiny-skia`, with text from the outlines of the font that comes with the
//! program (see `fonts/`).

use tiny_skia::{
    Color, FillRule, LineCap, LineJoin, Paint, Path, PathBuilder, Pixmap, Stroke, StrokeDash, Transform,
};
use ttf_parser::{Face, OutlineBuilder};

use crate::geometry::{Point, Segment, Vec2};
use crate::refusal::Refusal;
use crate::tags::marks::{Across, Along, Mark, Shape};
use crate::write::picture::svg::{CAPITAL_PART, pattern};
use crate::write::picture::{Picture, look};

/// The font: a part of a sans-serif family under the SIL Open Font License, which stands beside it.
pub const FONT: &[u8] = include_bytes!("fonts/sheet-sans.ttf");

/// Pixels of the file per pixel of the picture, so that a zoomed or printed picture stays crisp.
const SHARPNESS: f64 = 2.0;

/// Longest side of the file, pixels.
const LONGEST: f64 = 12_000.0;

/// The picture as the bytes of a PNG file.
///
/// # Errors
/// When the picture is too large for memory or the image library fails, faults of the program or of its machine.
pub fn png(picture: &Picture) -> Result<Vec<u8>, Refusal> {
    let failed = |what: String| {
        Refusal::new(
            "picture",
            format!("The picture could not be made as PNG: {what}"),
            "Ask for an .svg file.",
        )
    };
    let face = Face::parse(FONT, 0).map_err(|error| failed(error.to_string()))?;
    let size = (picture.high - picture.low) * picture.scale;
    let zoom = SHARPNESS.min(LONGEST / size.x.max(size.y));
    let (Some(width), Some(height)) = (pixels(size.x * zoom), pixels(size.y * zoom)) else {
        return Err(failed("it has no size".into()));
    };
    let mut map = Pixmap::new(width, height).ok_or_else(|| failed("not enough memory".into()))?;
    map.fill(Color::WHITE);
    let mut easel = Easel { map, picture, zoom, face };
    for mark in &picture.marks {
        easel.mark(mark);
    }
    encode(&easel.map).map_err(|error| failed(error.to_string()))
}

/// The pixels, all opaque, with a note of the program that made them.
fn encode(map: &Pixmap) -> Result<Vec<u8>, png::EncodingError> {
    let mut out = Vec::new();
    let mut encoder = png::Encoder::new(&mut out, map.width(), map.height());
    encoder.set_color(png::ColorType::Rgb);
    encoder.set_depth(png::BitDepth::Eight);
    encoder.add_text_chunk("Software".into(), env!("CARGO_PKG_NAME").into())?;
    let mut writer = encoder.write_header()?;
    let colours: Vec<u8> = map.data().chunks_exact(4).flat_map(|p| [p[0], p[1], p[2]]).collect();
    writer.write_image_data(&colours)?;
    writer.finish()?;
    Ok(out)
}

#[allow(clippy::cast_possible_truncation, clippy::cast_sign_loss)] // between 1 and 12 000
fn pixels(length: f64) -> Option<u32> {
    length.is_finite().then(|| length.ceil().clamp(1.0, LONGEST) as u32)
}

struct Easel<'a> {
    map: Pixmap,
    picture: &'a Picture,
    zoom: f64,
    face: Face<'a>,
}

impl Easel<'_> {
    /// A place in the file's pixels, y downward.
    fn place(&self, p: Point) -> (f32, f32) {
        let scale = self.picture.scale * self.zoom;
        (narrow((p.x - self.picture.low.x) * scale), narrow((self.picture.high.y - p.y) * scale))
    }

    fn mark(&mut self, mark: &Mark) {
        let mut path = PathBuilder::new();
        match &mark.shape {
            Shape::Line(a, b) => {
                self.go(&mut path, *a, true);
                self.go(&mut path, *b, false);
                self.stroke(mark, path.finish());
            }
            Shape::Polyline { points, closed } => {
                let ends = points.iter().skip(1).chain(points.first().filter(|_| *closed));
                if let Some((first, _)) = points.first() {
                    self.go(&mut path, *first, true);
                }
                for ((from, bulge), (to, _)) in points.iter().zip(ends) {
                    let piece = Segment::bulge(*from, *to, *bulge);
                    let steps = if *bulge == 0.0 { 1 } else { 48 };
                    for i in 1..=steps {
                        let s = piece.length() * f64::from(i) / f64::from(steps);
                        self.go(&mut path, piece.point_at(s), false);
                    }
                }
                if *closed {
                    path.close();
                }
                self.stroke(mark, path.finish());
            }
            Shape::Circle(centre, radius) => {
                let (x, y) = self.place(*centre);
                path.push_circle(x, y, narrow(radius * self.picture.scale * self.zoom));
                self.stroke(mark, path.finish());
            }
            Shape::Triangle([a, b, c]) => {
                self.go(&mut path, *a, true);
                self.go(&mut path, *b, false);
                self.go(&mut path, *c, false);
                path.close();
                self.fill(mark, path.finish());
            }
            Shape::Text { at, height, text, angle, across, along } => {
                let outlines = self.outlines(*at, *height, text, *angle, *across, *along);
                self.fill(mark, outlines);
            }
        }
    }

    fn go(&self, path: &mut PathBuilder, p: Point, first: bool) {
        let (x, y) = self.place(p);
        if first { path.move_to(x, y) } else { path.line_to(x, y) }
    }

    fn paint(mark: &Mark) -> Paint<'static> {
        let [r, g, b] = look(mark).colour;
        let mut paint = Paint::default();
        paint.set_color_rgba8(r, g, b, 255);
        paint.anti_alias = true;
        paint
    }

    fn stroke(&mut self, mark: &Mark, path: Option<Path>) {
        let Some(path) = path else { return };
        let dashes = pattern(mark)
            .map(|list| list.iter().map(|p| narrow(p * self.zoom)).collect::<Vec<f32>>())
            .and_then(|list| StrokeDash::new(list, 0.0));
        let cap = if dashes.is_some() { LineCap::Butt } else { LineCap::Round };
        let stroke = Stroke {
            width: narrow(look(mark).width * self.zoom),
            line_cap: cap,
            line_join: LineJoin::Round,
            dash: dashes,
            ..Stroke::default()
        };
        self.map.stroke_path(&path, &Self::paint(mark), &stroke, Transform::identity(), None);
    }

    fn fill(&mut self, mark: &Mark, path: Option<Path>) {
        if let Some(path) = path {
            let paint = Self::paint(mark);
            self.map.fill_path(&path, &paint, FillRule::Winding, Transform::identity(), None);
        }
    }

    /// The outlines of a line of text, in the file's pixels.
    fn outlines(
        &self,
        at: Point,
        height: f64,
        text: &str,
        angle: f64,
        across: Across,
        along: Along,
    ) -> Option<Path> {
        let em = f64::from(self.face.units_per_em());
        let capitals = height * self.picture.scale * self.zoom;
        let size = capitals / CAPITAL_PART / em;
        let advance = |c: char| {
            let glyph = self.face.glyph_index(c).unwrap_or_default();
            (glyph, f64::from(self.face.glyph_hor_advance(glyph).unwrap_or(0)))
        };
        let total: f64 = text.chars().map(|c| advance(c).1).sum();
        let mut x = match across {
            Across::Left => 0.0,
            Across::Centre => -total / 2.0,
            Across::Right => -total,
        };
        let base = match along {
            Along::Baseline => 0.0,
            Along::Middle => -capitals / 2.0 / size,
            Along::Top => -capitals / size,
        };
        let (left, top) = self.place(at);
        let mut pen = Pen {
            path: PathBuilder::new(),
            origin: Point::new(f64::from(left), f64::from(top)),
            along: Vec2::from_angle(angle) * size,
            from: Vec2::ZERO,
        };
        for c in text.chars() {
            let (glyph, width) = advance(c);
            pen.from = Vec2::new(x, base);
            self.face.outline_glyph(glyph, &mut pen);
            x += width;
        }
        pen.path.finish()
    }
}

/// Takes the outline of a glyph in font units to where it belongs.
struct Pen {
    path: PathBuilder,
    origin: Point,
    /// Direction of the text, as long as one font unit.
    along: Vec2,
    /// Where the glyph begins, font units.
    from: Vec2,
}

impl Pen {
    fn at(&self, x: f32, y: f32) -> (f32, f32) {
        let p = self.from + Vec2::new(f64::from(x), f64::from(y));
        let turned =
            Vec2::new(p.x * self.along.x - p.y * self.along.y, p.x * self.along.y + p.y * self.along.x);
        (narrow(self.origin.x + turned.x), narrow(self.origin.y - turned.y))
    }
}

impl OutlineBuilder for Pen {
    fn move_to(&mut self, x: f32, y: f32) {
        let (x, y) = self.at(x, y);
        self.path.move_to(x, y);
    }

    fn line_to(&mut self, x: f32, y: f32) {
        let (x, y) = self.at(x, y);
        self.path.line_to(x, y);
    }

    fn quad_to(&mut self, x1: f32, y1: f32, x: f32, y: f32) {
        let ((x1, y1), (x, y)) = (self.at(x1, y1), self.at(x, y));
        self.path.quad_to(x1, y1, x, y);
    }

    fn curve_to(&mut self, x1: f32, y1: f32, x2: f32, y2: f32, x: f32, y: f32) {
        let ((x1, y1), (x2, y2), (x, y)) = (self.at(x1, y1), self.at(x2, y2), self.at(x, y));
        self.path.cubic_to(x1, y1, x2, y2, x, y);
    }

    fn close(&mut self) {
        self.path.close();
    }
}

/// Pixels need no more than single precision.
#[allow(clippy::cast_possible_truncation)]
fn narrow(value: f64) -> f32 {
    value as f32
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::picture;
    use crate::write::sample;

    #[test]
    fn has_ink_in_the_colours_of_its_layers() {
        let picture = picture::whole(&sample::arch(7, 36.0, 9.0).limited(0.1).run());
        let bytes = png(&picture).unwrap();
        assert!(bytes.starts_with(b"\x89PNG"));
        let mut reader = png::Decoder::new(std::io::Cursor::new(&bytes)).read_info().unwrap();
        let mut pixels = vec![0; reader.output_buffer_size().unwrap()];
        reader.next_frame(&mut pixels).unwrap();
        for class in ["line", "axis", "force", "offset", "note"] {
            let [r, g, b] = picture::LOOKS.iter().find(|l| l.1.class == class).unwrap().1.colour;
            let found = pixels.chunks_exact(3).any(|p| p == [r, g, b]);
            assert!(found, "{class}");
        }
        assert_eq!(bytes, png(&picture).unwrap());
    }

    #[test]
    fn the_font_holds_what_marks_write() {
        let face = Face::parse(FONT, 0).unwrap();
        for c in "AZaz09 .,:;+-()/%·°×ÄÖÜäöüßéèñçøåŁżščЖяΩαμ".chars() {
            assert!(face.glyph_index(c).is_some(), "{c}");
        }
        let em = f64::from(face.units_per_em());
        let capitals = f64::from(face.capital_height().unwrap()) / em;
        assert!((capitals - CAPITAL_PART).abs() < 0.01, "{capitals}");
    }
}
