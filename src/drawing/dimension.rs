//! Dimensions of lengths, and notes that a drawing is not to scale.

use super::entity::Source;
use super::space::View;
use super::{convert, text};
use crate::geometry::{Point, Vec2};
use crate::tags::{Decoder, Record};

/// A dimension of a length. Coordinates are drawing units in the plane of the elevation.
#[derive(Debug, Clone, PartialEq)]
pub struct Dimension {
    /// The entity.
    pub source: Source,
    /// The two points that it measures between.
    pub points: [Point; 2],
    /// Unit vector along which it measures.
    pub along: Vec2,
    /// The text that was written in place of the measured length; `None` where the measured one is shown.
    pub text: Option<String>,
}

impl Dimension {
    /// The length between its points, drawing units.
    pub fn measured(&self) -> f64 {
        (self.points[1] - self.points[0]).dot(self.along).abs()
    }
}

/// The dimension of a record; `None` when it is none of a length, or a number of it cannot be read.
pub fn dimension(record: &Record, view: &View, decoder: &Decoder) -> Option<Dimension> {
    let number = |code| record.tags.first(code).and_then(|t| t.real());
    let place = |x: i32| -> Option<Point> {
        let p = view.map().point([number(x)?, number(x + 10)?, number(x + 20).unwrap_or(0.0)]);
        Some(Point::new(p[0], p[1]))
    };
    let points = [place(13)?, place(14)?];
    // Of the type the lowest bits count: 0 turned by an angle, 1 along its points.
    let along = match record.tags.first(70).and_then(|t| t.int())? & 7 {
        0 => {
            // Measured in the plane of the dimension, whose axes are right and up in an elevation that is dimensioned in it.
            let angle = number(50).unwrap_or(0.0).to_radians();
            Vec2::new(angle.cos(), angle.sin())
        }
        1 => points[1] - points[0],
        _ => return None,
    };
    if along.hypot() <= 0.0 || !along.is_finite() {
        return None;
    }
    let written = record.tags.first(1).map(|t| decoder.text(t.value));
    let written = written.map(|w| text::plain_paragraph(&w).trim().to_owned());
    // An empty text and `<>` stand for the measured length; a single blank hides it.
    let text = written.filter(|w| !w.is_empty() && !w.contains("<>"));
    Some(Dimension { source: convert::source(record), points, along: along.normalize(), text })
}

/// Words that say "not to scale", capitals and letters only.
const NOT_TO_SCALE: [&str; 21] = [
    "NOTTOSCALE",
    "NOSCALE",
    "NICHTMASSSTABLICH",
    "NICHTMASSSTAEBLICH",
    "NICHTMASSTABLICH",
    "UNMASSSTABLICH",
    "UNMASSSTAEBLICH",
    "OHNEMASSSTAB",
    "HORSECHELLE",
    "SANSECHELLE",
    "PASALECHELLE",
    "SINESCALA",
    "FUERADEESCALA",
    "SEMESCALA",
    "FORADEESCALA",
    "NONINSCALA",
    "FUORISCALA",
    "NIETOPSCHAAL",
    "EJSKALENLIG",
    "НЕВМАСШТАБЕ",
    "BEZMERITKA",
];

/// Whether a text says that the drawing is not to scale. "Do not scale" is a usual warning on drawings that are to scale, and
/// does not count.
pub fn not_to_scale(says: &str) -> bool {
    let upper: String = says.chars().flat_map(char::to_uppercase).collect();
    let words: Vec<&str> = upper.split(|c: char| !c.is_alphanumeric() && c != '.').collect();
    if words.iter().any(|w| matches!(*w, "NTS" | "N.T.S." | "N.T.S")) {
        return true;
    }
    let bare: String = upper
        .chars()
        .filter_map(|c| match c {
            'Ä' => Some('A'),
            'É' | 'È' | 'Ê' => Some('E'),
            'Í' => Some('I'),
            'ß' | 'ẞ' => Some('S'),
            c => c.is_alphanumeric().then_some(c),
        })
        .collect();
    NOT_TO_SCALE.iter().any(|w| bare.contains(w))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn words_for_not_to_scale() {
        for says in [
            "N.T.S.",
            "ELEVATION (NTS)",
            "Drawing not to scale",
            "nicht maßstäblich",
            "Ansicht, unmaßstäblich",
            "hors échelle",
            "Esc: sin escala",
            "fuori scala",
            "Scale: no scale",
            "не в масштабе",
        ] {
            assert!(not_to_scale(says), "{says}");
        }
        for says in
            ["Do not scale from this drawing", "Scale 1:50", "ANTS", "M 1:100", "POINTS", "scala 1:20"]
        {
            assert!(!not_to_scale(says), "{says}");
        }
    }
}
