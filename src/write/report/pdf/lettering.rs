//! The font of the sheets: widths, glyphs, and lines that fit.

use krilla::text::{Font, GlyphId, KrillaGlyph};
use ttf_parser::Face;

use crate::refusal::Refusal;
use crate::write::picture::png::FONT;
use crate::write::text::plain;

/// The font twice: measured, and as it is embedded.
pub struct Lettering {
    face: Face<'static>,
    /// For drawing.
    pub font: Font,
}

impl Lettering {
    /// The font that comes with the program.
    ///
    /// # Errors
    /// When it cannot be read, a fault of the program.
    pub fn new() -> Result<Self, Refusal> {
        let failed =
            || Refusal::new("report", "The font of the report cannot be read", "Ask for an .html file.");
        let face = Face::parse(FONT, 0).map_err(|_| failed())?;
        let font = Font::new(FONT.into(), 0).ok_or_else(failed)?;
        Ok(Self { face, font })
    }

    /// The text with control characters, and characters that the font does not have, told as escapes.
    pub fn legible(&self, text: &str) -> String {
        let mut out = String::with_capacity(text.len());
        for c in plain(text).chars() {
            // Blanks that do not break look like any other.
            let c = if matches!(c, '\u{a0}' | '\u{202f}') { ' ' } else { c };
            if self.face.glyph_index(c).is_some() {
                out.push(c);
            } else {
                out.push_str(&format!("\\u{{{:x}}}", u32::from(c)));
            }
        }
        out
    }

    fn advance(&self, c: char) -> f64 {
        let glyph = self.face.glyph_index(c).unwrap_or_default();
        f64::from(self.face.glyph_hor_advance(glyph).unwrap_or_default())
            / f64::from(self.face.units_per_em())
    }

    /// Width of a text, in units of its size.
    pub fn width(&self, text: &str) -> f64 {
        text.chars().map(|c| self.advance(c)).sum()
    }

    /// Width of its longest word, in units of its size.
    pub fn longest_word(&self, text: &str) -> f64 {
        text.split(' ').map(|w| self.width(w)).fold(0.0, f64::max)
    }

    /// The glyphs of a text, each tied to its characters so that the text can be selected and searched.
    pub fn glyphs(&self, text: &str) -> Vec<KrillaGlyph> {
        text.char_indices()
            .map(|(at, c)| {
                let glyph = self.face.glyph_index(c).unwrap_or_default();
                let advance = super::narrow(self.advance(c));
                let id = GlyphId::new(u32::from(glyph.0));
                KrillaGlyph::new(id, advance, 0.0, 0.0, 0.0, at..at + c.len_utf8(), None)
            })
            .collect()
    }

    /// The text in lines no wider than `width` (in units of its size), broken at blanks; a longer word is cut.
    pub fn wrap(&self, text: &str, width: f64) -> Vec<String> {
        let mut lines = Vec::new();
        let mut line = String::new();
        let mut used = 0.0;
        let blank = self.advance(' ');
        for word in text.split(' ').filter(|w| !w.is_empty()) {
            let size = self.width(word);
            if !line.is_empty() && used + blank + size > width {
                lines.push(std::mem::take(&mut line));
                used = 0.0;
            }
            if !line.is_empty() {
                line.push(' ');
                used += blank;
            }
            if size <= width {
                line.push_str(word);
                used += size;
                continue;
            }
            for c in word.chars() {
                let size = self.advance(c);
                if used + size > width && !line.is_empty() {
                    lines.push(std::mem::take(&mut line));
                    used = 0.0;
                }
                line.push(c);
                used += size;
            }
        }
        if !line.is_empty() || lines.is_empty() {
            lines.push(line);
        }
        lines
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lines_fit_and_lose_nothing() {
        let lettering = Lettering::new().unwrap();
        let text = "the line of thrust strays 82 mm from the axis, aaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaa";
        for width in [6.0, 12.0, 30.0] {
            let lines = lettering.wrap(text, width);
            assert!(lines.iter().all(|l| lettering.width(l) <= width + 1e-9), "{lines:?}");
            let joined: String = lines.concat().replace(' ', "");
            assert_eq!(joined, text.replace(' ', ""));
        }
        assert_eq!(lettering.wrap("", 9.0), [""]);
        assert_eq!(lettering.legible("桥 \u{1b}a\u{a0}b"), "\\u{6865} \\x1ba b");
    }
}
