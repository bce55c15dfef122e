//! The line that traffic runs on.

use super::super::chain;
use super::super::note::Note;
use crate::drawing::Curve;
use crate::geometry::{Path, Point};
use crate::refusal::Refusal;
use crate::tolerance;

/// The drawn road in its pieces, left to right; `metres` a drawing unit.
///
/// # Errors
/// When its curves do not join, as for an axis.
pub fn road(curves: &[Curve], metres: f64, notes: &mut Vec<Note>) -> Result<Vec<Path>, Refusal> {
    if curves.is_empty() {
        return Ok(Vec::new());
    }
    let found = chain::chains(curves).map_err(|refusal| super::super::ring::named(refusal, "road"))?;
    notes.extend(found.doubles.into_iter().map(|(source, kept)| Note::DrawnTwice { source, kept }));
    notes.extend(found.lengthless.into_iter().map(|source| Note::NoLength { source }));
    let mut pieces: Vec<Path> = Vec::new();
    for chain in found.chains {
        for gap in &chain.gaps {
            notes.push(Note::GapClosed {
                line: "road",
                span: "road".into(),
                size: gap.size * metres,
                at: (gap.at.to_vec2() * metres).to_point(),
            });
        }
        let path = chain.path.shifted_scaled(crate::geometry::Vec2::ZERO, metres);
        // A line with dips is cut into its arches; a road goes through.
        let joined = pieces.last().and_then(|last| {
            let meets = (last.end() - path.start()).hypot() <= last.length() * tolerance::ENDS_MEET;
            meets.then(|| Path::new(last.segments().iter().chain(path.segments()).copied())).flatten()
        });
        match joined {
            Some(whole) => {
                pieces.pop();
                pieces.push(whole);
            }
            None => pieces.push(path),
        }
    }
    Ok(pieces)
}

/// The road over one span: as drawn, straight on beyond its ends.
#[derive(Debug, Clone, PartialEq)]
pub struct Road {
    path: Path,
}

impl Road {
    /// The piece of the drawn road that runs over a span from `left` to `right`; `None` when none does.
    pub fn over(pieces: &[Path], left: f64, right: f64) -> Option<Self> {
        let slack = (right - left) * tolerance::ENDS_MEET;
        let runs = |p: &&Path| p.start().x <= left + slack && p.end().x >= right - slack;
        pieces.iter().find(runs).map(|path| Self { path: path.clone() })
    }

    /// A level line.
    pub fn level(left: f64, right: f64, y: f64) -> Option<Self> {
        Path::polyline(&[Point::new(left, y), Point::new(right, y)]).map(|path| Self { path })
    }

    /// Length along the road at an abscissa, negative before its start.
    pub fn length_at(&self, x: f64) -> f64 {
        let (a, b) = (self.path.start(), self.path.end());
        if x <= a.x {
            let t = self.path.tangent_at(0.0, false);
            return (x - a.x) / t.x.max(tolerance::STEEP_ROAD);
        }
        if x >= b.x {
            let t = self.path.tangent_at(self.path.length(), true);
            return self.path.length() + (x - b.x) / t.x.max(tolerance::STEEP_ROAD);
        }
        self.path.crossings_of_vertical(x).first().copied().unwrap_or(0.0)
    }

    /// The point at a length along the road.
    pub fn point_at(&self, s: f64) -> Point {
        let whole = self.path.length();
        if s < 0.0 {
            return self.path.start() + self.path.tangent_at(0.0, false) * s;
        }
        if s > whole {
            return self.path.end() + self.path.tangent_at(whole, true) * (s - whole);
        }
        self.path.point_at(s)
    }

    /// The point over an abscissa.
    pub fn over_x(&self, x: f64) -> Point {
        self.point_at(self.length_at(x))
    }

    /// Points of the road between two abscissae, for drawing it.
    pub fn between(&self, from: f64, to: f64) -> Vec<Point> {
        (0..=64).map(|k| self.over_x(from + (to - from) * f64::from(k) / 64.0)).collect()
    }
}
