//! A picture as SVG. Lines and texts carry their looks as attributes, so that every viewer shows them; each layer is a
//! group with a class, so that a page can give it other colours.

use std::fmt::Write as _;

use crate::tags::marks::{Across, Along, Mark, Shape};
use crate::write::annotate::pen::DASHES;
use crate::write::picture::{LOOKS, Look, Picture, look};

/// Height of the capitals over the size of the font, of the usual sans-serif fonts.
pub const CAPITAL_PART: f64 = 0.714;

/// What a picture file says of its maker.
pub const MADE_BY: &str = concat!("made by ", env!("CARGO_PKG_NAME"));

/// Pictures wider than this, in pixels, count as wide.
const WIDE: f64 = 500.0;

/// Where the SVG stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Home<'a> {
    /// A file of its own, on white paper.
    File,
    /// Inside a page, which gives the background; the ids begin with this.
    Page(&'a str),
}

/// The picture as one SVG element, with the XML declaration where it is a file.
pub fn svg(picture: &Picture, home: Home) -> String {
    let width = (picture.high.x - picture.low.x) * picture.scale;
    let height = (picture.high.y - picture.low.y) * picture.scale;
    let mut out = String::new();
    let id = match home {
        Home::File => "picture",
        Home::Page(id) => id,
    };
    if home == Home::File {
        out.push_str("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n");
        let _ = writeln!(out, "<!-- {} -->", MADE_BY);
    }
    // A page may give wide pictures room to scroll on a narrow screen.
    let class = if home != Home::File && width > WIDE { "class=\"wide\" " } else { "" };
    let (w, h) = (number(width), number(height));
    let _ = writeln!(
        out,
        "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{w}\" height=\"{h}\" viewBox=\"0 0 {w} {h}\" {class}role=\"img\" \
         aria-labelledby=\"{id}-title {id}-desc\" font-family=\"sans-serif\">\n<title id=\"{id}-title\">{}</title>\n\
         <desc id=\"{id}-desc\">{}</desc>",
        escape(&picture.title),
        escape(&picture.description)
    );
    if home == Home::File {
        let _ = writeln!(out, "<rect width=\"{w}\" height=\"{h}\" fill=\"#ffffff\"/>");
    }
    let mut last = usize::MAX;
    for mark in &picture.marks {
        if mark.layer != last {
            if last != usize::MAX {
                out.push_str("</g>\n");
            }
            let Look { class, colour: [r, g, b], width, .. } = look(mark);
            let _ = writeln!(
                out,
                "<g class=\"tm-{class}\" fill=\"none\" stroke=\"#{r:02x}{g:02x}{b:02x}\" stroke-width=\"{}\" \
                 stroke-linejoin=\"round\" stroke-linecap=\"round\">",
                number(width)
            );
            last = mark.layer;
        }
        shape(picture, mark, &mut out);
    }
    if last != usize::MAX {
        out.push_str("</g>\n");
    }
    out.push_str("</svg>\n");
    out
}

fn shape(picture: &Picture, mark: &Mark, out: &mut String) {
    let x = |v: f64| number((v - picture.low.x) * picture.scale);
    let y = |v: f64| number((picture.high.y - v) * picture.scale);
    let dash = dashes(mark);
    let [r, g, b] = look(mark).colour;
    let _ = match &mark.shape {
        Shape::Line(a, b) => {
            writeln!(out, "<path d=\"M{} {}L{} {}\"{dash}/>", x(a.x), y(a.y), x(b.x), y(b.y))
        }
        Shape::Polyline { points, closed } => {
            let mut d = String::new();
            let ends = points.iter().skip(1).chain(points.first().filter(|_| *closed));
            if let Some((first, _)) = points.first() {
                let _ = write!(d, "M{} {}", x(first.x), y(first.y));
            }
            for ((from, bulge), (to, _)) in points.iter().zip(ends) {
                if *bulge == 0.0 {
                    let _ = write!(d, "L{} {}", x(to.x), y(to.y));
                } else {
                    let radius =
                        (*to - *from).hypot() * (1.0 + bulge * bulge) / (4.0 * bulge.abs()) * picture.scale;
                    let (radius, large) = (number(radius), u8::from(bulge.abs() > 1.0));
                    let sweep = u8::from(*bulge < 0.0);
                    let _ = write!(d, "A{radius} {radius} 0 {large} {sweep} {} {}", x(to.x), y(to.y));
                }
            }
            if *closed {
                d.push('Z');
            }
            writeln!(out, "<path d=\"{d}\"{dash}/>")
        }
        Shape::Circle(centre, radius) => writeln!(
            out,
            "<circle cx=\"{}\" cy=\"{}\" r=\"{}\"/>",
            x(centre.x),
            y(centre.y),
            number(radius * picture.scale)
        ),
        Shape::Triangle([p, q, s]) => writeln!(
            out,
            "<path class=\"tm-solid\" fill=\"#{r:02x}{g:02x}{b:02x}\" stroke=\"none\" d=\"M{} {}L{} {}L{} {}Z\"/>",
            x(p.x),
            y(p.y),
            x(q.x),
            y(q.y),
            x(s.x),
            y(s.y)
        ),
        Shape::Text { at, height, text, angle, across, along } => {
            let capitals = height * picture.scale;
            let down = match along {
                Along::Baseline => 0.0,
                Along::Middle => capitals / 2.0,
                Along::Top => capitals,
            };
            let anchor = match across {
                Across::Left => "start",
                Across::Centre => "middle",
                Across::Right => "end",
            };
            let degrees = -angle.to_degrees();
            let turn =
                if degrees.abs() < 0.005 { String::new() } else { format!(" rotate({})", number(degrees)) };
            writeln!(
                out,
                "<text class=\"tm-solid\" fill=\"#{r:02x}{g:02x}{b:02x}\" stroke=\"none\" font-size=\"{}\" \
                 text-anchor=\"{anchor}\" transform=\"translate({} {}){turn}\" y=\"{}\">{}</text>",
                number(capitals / CAPITAL_PART),
                x(at.x),
                y(at.y),
                number(down),
                escape(text)
            )
        }
    };
}

/// The dashes of a mark in pixels, as an attribute.
fn dashes(mark: &Mark) -> String {
    match pattern(mark) {
        Some(pattern) => {
            let list: Vec<String> = pattern.iter().map(|p| number(*p)).collect();
            format!(" stroke-dasharray=\"{}\" stroke-linecap=\"butt\"", list.join(" "))
        }
        None => String::new(),
    }
}

/// Dashes and gaps of a mark, pixels; `None` for a whole line.
pub fn pattern(mark: &Mark) -> Option<Vec<f64>> {
    let index = mark.line_type.or(LOOKS.get(mark.layer).and_then(|l| l.1.dash).map(|d| d as usize))?;
    let (.., pattern) = DASHES.get(index)?;
    Some(pattern.iter().map(|p| p.abs() * super::CAPITALS).collect())
}

/// A number with at most two decimals.
pub fn number(value: f64) -> String {
    let text = format!("{value:.2}");
    let text = text.trim_end_matches('0').trim_end_matches('.');
    if text == "-0" { "0".into() } else { text.to_owned() }
}

/// Text for XML and HTML: the five special characters named, and what XML cannot hold told as an escape.
pub fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&#39;"),
            '\n' | '\t' => out.push(c),
            c if c.is_control() || matches!(c, '\u{fffe}' | '\u{ffff}') => {
                let _ = write!(out, "\\x{:02x}", u32::from(c));
            }
            c => out.push(c),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::picture;
    use crate::write::sample;

    #[test]
    fn escapes() {
        assert_eq!(escape("a<b>&\"'\u{1b}[0m\u{0}\n"), "a&lt;b&gt;&amp;&quot;&#39;\\x1b[0m\\x00\n");
    }

    #[test]
    fn holds_what_it_must_and_no_number_goes_wrong() {
        for run in [
            sample::arch(7, 36.0, 9.0).limited(0.01).run(),
            sample::arch(40, 36.0, 9.0).unit_loads().run(),
            sample::arch(3, 20.0, -4.0).run(),
            sample::run_of(vec![
                sample::arch(6, 30.0, 6.0).limited(0.02),
                sample::Sample { x: 34.0, ..sample::arch(3, 18.0, 5.0) },
            ]),
        ] {
            let text = svg(&picture::whole(&run), Home::File);
            for needed in ["tm-axis", "tm-line", "tm-load", "tm-force", "tm-diagram", "qualified engineer"] {
                assert!(text.contains(needed), "{needed}");
            }
            assert!(!text.contains("NaN") && !text.contains("inf\""), "{text}");
        }
    }
}
