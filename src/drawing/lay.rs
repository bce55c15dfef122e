//! Curves laid into the plane that is looked at: lines and circular arcs, exact where a map keeps circles round.

use super::entity::Source;
use crate::geometry::fit;
use crate::geometry::{Affine, Point, Segment, Vec2};
use crate::refusal::Refusal;
use crate::tolerance;

/// A curve in the plane.
pub struct Laid {
    /// Its pieces.
    pub pieces: Vec<Segment>,
    /// Height of it over the plane through the origin.
    pub z: f64,
    /// Whether arcs stand for a curve that is none.
    pub fitted: bool,
}

/// Sine of the steepest tilt of an entity that still lies flat: where its normal misses by [`tolerance::FLAT_NORMAL`].
pub const STEEPEST: f64 = {
    // The square root of twice that number, which a constant cannot compute.
    let square = 2.0 * tolerance::FLAT_NORMAL;
    let mut root = 1.0;
    let mut i = 0;
    while i < 64 {
        root = 0.5 * (root + square / root);
        i += 1;
    }
    root
};

/// Straight pieces between points of space.
///
/// # Errors
/// When they do not lie in one height over the plane.
pub fn chain(source: &Source, points: &[[f64; 3]]) -> Result<Laid, Refusal> {
    let flat = |p: &[f64; 3]| Point::new(p[0], p[1]);
    for pair in points.windows(2) {
        let rise = (pair[1][2] - pair[0][2]).abs();
        if rise > tolerance::FLAT * (flat(&pair[1]) - flat(&pair[0])).hypot().hypot(rise) {
            return Err(not_flat(source));
        }
    }
    let pieces = points.windows(2).map(|w| Segment::line(flat(&w[0]), flat(&w[1]))).collect();
    Ok(Laid { pieces, z: points.first().map_or(0.0, |p| p[2]), fitted: false })
}

/// Flat pieces at one height in coordinates of their own, through a map into the plane.
///
/// # Errors
/// When they do not lie flat there, or collapse to a line.
pub fn flat(source: &Source, map: &Affine, height: f64, pieces: &[Segment]) -> Result<Laid, Refusal> {
    let (x, y) = (map.vector([1.0, 0.0, 0.0]), map.vector([0.0, 1.0, 0.0]));
    let (across, up) = (Vec2::new(x[0], x[1]), Vec2::new(y[0], y[1]));
    let size = across.hypot().max(up.hypot());
    if !map.is_finite() || x[2].abs() > STEEPEST * size || y[2].abs() > STEEPEST * size {
        return Err(not_flat(source));
    }
    let area = across.cross(up);
    if area.abs() <= tolerance::EQUAL_SCALES * size * size {
        return Err(source.refuse(
            "block-scale",
            format!("the {} is flattened to a line by a scale of nothing", source.kind),
            "Insert the block with scales other than 0",
        ));
    }
    let round = (across.hypot() - up.hypot()).abs() <= tolerance::EQUAL_SCALES * size
        && across.dot(up).abs() <= tolerance::EQUAL_SCALES * size * size;
    let to = |p: Point| {
        let q = map.point([p.x, p.y, height]);
        Point::new(q[0], q[1])
    };
    // Exact for the usual case, where nothing turns.
    let as_is = across == Vec2::new(1.0, 0.0) && up == Vec2::new(0.0, 1.0);
    let mut laid = Vec::with_capacity(pieces.len());
    let mut fitted = false;
    for piece in pieces {
        match *piece {
            Segment::Line { start, end } => laid.push(Segment::line(to(start), to(end))),
            Segment::Arc { centre, radius, start_angle, sweep } if round => {
                let toward = across * start_angle.cos() + up * start_angle.sin();
                laid.push(Segment::Arc {
                    centre: to(centre),
                    radius: radius * across.hypot(),
                    start_angle: if as_is { start_angle } else { toward.atan2() },
                    sweep: sweep * area.signum(),
                });
            }
            Segment::Arc { centre, radius, start_angle, sweep } => {
                fitted = true;
                let (middle, u, v) = (to(centre), across * radius, up * radius);
                let ellipse = |t: f64| {
                    let (sin, cos) = t.sin_cos();
                    Some((middle + u * cos + v * sin, (v * cos - u * sin) * sweep.signum()))
                };
                let distance = tolerance::CURVE_FIT * size * radius;
                laid.extend(fit_parts(source, &ellipse, start_angle, start_angle + sweep, distance)?);
            }
        }
    }
    let z = pieces.first().map_or(map.offset[2], |p| {
        let p = match p {
            Segment::Line { start, .. } => *start,
            Segment::Arc { centre, .. } => *centre,
        };
        map.point([p.x, p.y, height])[2]
    });
    Ok(Laid { pieces: laid, z, fitted })
}

/// Arcs along a smooth curve; a long one is begun in eight parts, so that no part turns back.
///
/// # Errors
/// When the curve has places where it cannot be followed.
pub fn fit_parts(
    source: &Source,
    curve: &dyn Fn(f64) -> Option<fit::Place>,
    from: f64,
    to: f64,
    distance: f64,
) -> Result<Vec<Segment>, Refusal> {
    let mut pieces = Vec::new();
    for i in 0..8 {
        let at = |i: i32| from + (to - from) * f64::from(i) / 8.0;
        let part = fit::arcs(curve, at(i), at(i + 1), distance).ok_or_else(|| {
            source.refuse(
                "curve-fit",
                format!(
                    "the {} turns so sharply that no chain of arcs follows it closely enough",
                    source.kind
                ),
                "Redraw it as a polyline",
            )
        })?;
        pieces.extend(part);
    }
    Ok(pieces)
}

/// The refusal of what does not lie in the plane that is looked at.
pub fn not_flat(source: &Source) -> Refusal {
    source.refuse(
        "not-flat",
        format!("the {} does not lie flat in the plane of the elevation", source.kind),
        "Draw the elevation in one plane, upright or flat, or state `[drawing] plane`",
    )
}
