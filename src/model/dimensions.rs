//! Drawn dimensions of span, rise and depth against the drawn geometry.
//!
//! A dimension is one of these when its two points stand at the springings, at a springing and the crown, or on both sides of
//! the ring. Which of axis, intrados and extrados it means is told by where they stand. What it says is the length between its
//! points, or, where a text was written in place of that, what the text says.

use super::{Span, weight};
use crate::drawing::{Dimension, Source};
use crate::geometry::{Point, Vec2};
use crate::job::RibDepth;
use crate::tolerance;
use crate::units::LengthUnit;

/// What a dimension measures.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Quantity {
    /// Between springings.
    Span,
    /// From a springing to the crown.
    Rise,
    /// Across the ring.
    Depth,
}

/// A dimension of the arch and what the drawn geometry says.
#[derive(Debug, Clone, PartialEq)]
pub struct Measured {
    /// Name of the span.
    pub span: String,
    /// What it measures.
    pub quantity: Quantity,
    /// The dimension.
    pub source: Source,
    /// The text written in place of the measured length.
    pub text: Option<String>,
    /// What it says, m; `None` when the text says no length that could be meant.
    pub stated: Option<f64>,
    /// The drawn length, m.
    pub drawn: f64,
    /// Where it measures, m.
    pub at: Point,
}

/// The lines of an arch at whose ends and crown dimensions begin.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Station {
    Left,
    Right,
    Crown,
}

/// The dimensions of the spans, and how many others have a text written by hand; `metres` is a drawing unit.
pub fn measured(
    dimensions: &[Dimension],
    spans: &[Span],
    depth: Option<RibDepth>,
    metres: f64,
) -> (Vec<Measured>, Vec<Source>) {
    let features: Vec<Vec<(Station, i8, Point)>> = spans.iter().map(|s| features(s, depth)).collect();
    let mut found = Vec::new();
    let mut others = Vec::new();
    for dimension in dimensions {
        let points = dimension.points.map(|p| (p.to_vec2() * metres).to_point());
        let best = spans
            .iter()
            .zip(&features)
            .filter_map(|(span, features)| {
                let reach = (span.axis.end().x - span.axis.start().x).abs();
                matching(features, points, dimension.along, reach).map(|m| (m, span))
            })
            .min_by(|a, b| a.0.0.total_cmp(&b.0.0));
        let Some(((_, quantity, drawn), span)) = best else {
            if dimension.text.is_some() {
                others.push(dimension.source.clone());
            }
            continue;
        };
        let stated = match &dimension.text {
            None => Some(dimension.measured() * metres),
            Some(text) => length_in(text, drawn),
        };
        found.push(Measured {
            span: span.name.clone(),
            quantity,
            source: dimension.source.clone(),
            text: dimension.text.clone(),
            stated,
            drawn,
            at: points[0].midpoint(points[1]),
        });
    }
    (found, others)
}

/// Springings and crown of axis (0), intrados (-1) and extrados (1).
fn features(span: &Span, depth: Option<RibDepth>) -> Vec<(Station, i8, Point)> {
    let axis = &span.axis;
    let (above, below) = (axis.farthest_from_chord(false), axis.farthest_from_chord(true));
    let crown = if above.1 >= -below.1 { above.0 } else { below.0 };
    let depths = weight::depths(span, depth);
    let mut found = Vec::new();
    for (station, s) in [(Station::Left, 0.0), (Station::Right, axis.length()), (Station::Crown, crown)] {
        let (at, normal) = (axis.point_at(s), axis.normal_at(s, station == Station::Right));
        found.push((station, 0, at));
        if let Some(depths) = &depths {
            let half = normal * (weight::depth_at(depths, s) / 2.0);
            found.push((station, -1, at - half));
            found.push((station, 1, at + half));
        }
    }
    found
}

/// The pair of features that two points of a dimension stand at, by how well: their misses along the dimension count whole, those
/// across it a tenth. With what it measures and the drawn length.
fn matching(
    features: &[(Station, i8, Point)],
    [p, q]: [Point; 2],
    along: Vec2,
    span: f64,
) -> Option<(f64, Quantity, f64)> {
    use Station::{Crown, Left, Right};
    let miss = |from: Point, to: Point| -> Option<f64> {
        let off = to - from;
        let (by, beside) = (off.dot(along).abs(), off.cross(along).abs());
        let near = by <= tolerance::DIMENSION_NEAR * span && beside <= tolerance::DIMENSION_BESIDE * span;
        near.then_some(by + beside / 10.0)
    };
    let mut best: Option<(f64, Quantity, f64)> = None;
    for a in features {
        let Some(at_a) = miss(a.2, p) else { continue };
        for b in features {
            let quantity = match (a.0, b.0) {
                (Left, Right) | (Right, Left) if along.x.abs() > along.y.abs() => Quantity::Span,
                (Left | Right, Crown) | (Crown, Left | Right) if along.y.abs() > along.x.abs() => {
                    Quantity::Rise
                }
                _ if a.0 == b.0 && a.1 * b.1 < 0 => Quantity::Depth,
                _ => continue,
            };
            let Some(at_b) = miss(b.2, q) else { continue };
            let way = b.2 - a.2;
            let drawn = way.dot(along).abs();
            // Across the ring it must be measured squarely, and the points must tell its two sides apart.
            if quantity == Quantity::Depth
                && (drawn < tolerance::DIMENSION_SQUARE * way.hypot() || at_a + at_b > way.hypot() / 2.0)
            {
                continue;
            }
            if drawn > 0.0 && best.is_none_or(|best| at_a + at_b < best.0) {
                best = Some((at_a + at_b, quantity, drawn));
            }
        }
    }
    best
}

/// The length that a text says, m, when it says one between half and twice the drawn one: a unit that is not written is the one
/// that comes nearest to what is drawn.
fn length_in(text: &str, drawn: f64) -> Option<f64> {
    let candidates = feet_and_inches(text).map_or_else(|| lengths(text), |v| vec![v]);
    candidates
        .into_iter()
        .filter(|v| *v >= drawn / 2.0 && *v <= 2.0 * drawn)
        .min_by(|a, b| (a / drawn).ln().abs().total_cmp(&(b / drawn).ln().abs()))
}

/// Every length that the first number of a text may mean.
fn lengths(text: &str) -> Vec<f64> {
    let Some(from) = text.find(|c: char| c.is_ascii_digit()) else {
        return Vec::new();
    };
    let rest = &text[from..];
    let end = rest
        .char_indices()
        .find(|&(i, c)| {
            let digit_follows = rest[i + c.len_utf8()..].starts_with(|d: char| d.is_ascii_digit());
            let part = c.is_ascii_digit()
                || (matches!(c, '.' | ',' | ' ' | '\u{a0}' | '\u{202f}' | '\'') && digit_follows);
            !part
        })
        .map_or(rest.len(), |(i, _)| i);
    let unit: String = rest[end..].trim_start().chars().take_while(|c| c.is_alphabetic()).collect();
    let digits: String =
        rest[..end].chars().filter(|c| c.is_ascii_digit() || matches!(c, '.' | ',')).collect();
    let mut readings = Vec::new();
    // The last separator marks the fraction, or, as all others, thousands.
    let whole: String = digits.chars().filter(char::is_ascii_digit).collect();
    readings.extend(
        whole
            .parse::<f64>()
            .ok()
            .filter(|_| digits.rsplit_once(['.', ',']).is_none_or(|(_, last)| last.len() == 3)),
    );
    if let Some((before, after)) = digits.rsplit_once(['.', ',']) {
        let before: String = before.chars().filter(char::is_ascii_digit).collect();
        readings.extend(format!("{before}.{after}").parse::<f64>().ok());
    }
    let units: Vec<LengthUnit> = match LengthUnit::parse(&unit) {
        Some(unit) => vec![unit],
        None => LengthUnit::ALL.to_vec(),
    };
    readings.iter().flat_map(|r| units.iter().map(|u| u.to_metres(*r))).collect()
}

/// A length such as `78'-9 1/2"` or `78' 9"` or `78'`, m.
fn feet_and_inches(text: &str) -> Option<f64> {
    let from = text.find(|c: char| c.is_ascii_digit())?;
    let (feet, rest) = text[from..].split_once(['\'', '\u{2032}'])?;
    // A quote before three digits groups thousands.
    if rest.len() >= 3 && rest.bytes().take(3).all(|b| b.is_ascii_digit()) {
        return None;
    }
    let feet: f64 = feet.trim().parse().ok()?;
    let rest = rest.trim_start_matches(['-', ' ']);
    let inches = rest.split(['"', '\u{2033}']).next().unwrap_or("").trim();
    let mut sum = 0.0;
    for part in inches.split_whitespace() {
        sum += match part.split_once('/') {
            Some((over, under)) => {
                over.parse::<f64>().ok()? / under.parse::<f64>().ok().filter(|u| *u > 0.0)?
            }
            None => part.parse::<f64>().ok()?,
        };
    }
    Some(LengthUnit::Ft.to_metres(feet) + LengthUnit::In.to_metres(sum))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lengths_in_texts() {
        for (text, drawn, says) in [
            ("24.00", 23.9, 24.0),
            ("24,00 m", 23.9, 24.0),
            ("24 000", 23.9, 24.0),
            ("24.000", 23.9, 24.0),
            ("L = 24000", 24.1, 24.0),
            ("span 2400 cm", 24.1, 24.0),
            ("450", 0.46, 0.45),
            ("d=0.45", 0.46, 0.45),
            ("78'-9\"", 24.0, 24.003),
            ("78' 9 1/2\"", 24.0, 24.0157),
            ("80'", 24.0, 24.384),
            ("1'200", 1.2, 1.2),
            ("18\"", 0.46, 0.4572),
            ("12 345.678", 12.3, 12.345_678),
        ] {
            let found = length_in(text, drawn).unwrap();
            assert!((found - says).abs() < 1e-9, "{text}: {found}");
        }
        for (text, drawn) in [("varies", 24.0), ("", 1.0), ("24", 100.0), ("7'-x\"", 2.0)] {
            assert_eq!(length_in(text, drawn).filter(|_| !text.starts_with('7')), None, "{text}");
        }
    }
}
