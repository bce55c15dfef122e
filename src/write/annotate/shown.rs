//! What of a run is shown on the sheet: of each span the governing line of its worst case, in drawing units.

use crate::geometry::{Path, Point, Segment, Vec2};
use crate::outcome::bow::{self, Group};
use crate::outcome::{Case, FindingVerdict, Line, LineKind, Run, Span, Status, Units, Xy};
use crate::tolerance;

/// A span as it is drawn.
#[derive(Debug)]
pub struct Shown<'a> {
    /// The span.
    pub span: &'a Span,
    /// The case whose governing line is drawn heavy.
    pub case: Option<&'a Case>,
    /// Its governing line, when it was found.
    pub line: Option<&'a Line>,
    /// The axis in drawing units.
    pub path: Option<Path>,
    /// The axis as a chain of chords fine enough to keep text off.
    pub chords: Vec<Point>,
    /// The governing line in drawing units.
    pub vertices: Vec<Point>,
    /// Forces grouped for lettering.
    pub groups: Vec<Group>,
    /// Where each load's line of action meets the axis, as length along the axis in drawing units.
    pub feet: Vec<f64>,
    /// The loads as the case factors them.
    pub forces: Vec<Vec2>,
    /// Drawing units per metre.
    pub unit: f64,
    /// The units of all results.
    pub units: &'a Units,
}

impl<'a> Shown<'a> {
    /// Picks what is shown of a span.
    pub fn new(run: &'a Run, span: &'a Span, unit: f64) -> Self {
        let case = worst_case(run, span);
        let line = case.and_then(governing);
        let path = axis_path(span, unit);
        let vertices = line.map(|l| l.vertices.iter().map(|&v| point(v, unit)).collect()).unwrap_or_default();
        let feet = span
            .loads
            .iter()
            .map(|load| {
                path.as_ref().map_or(0.0, |path| {
                    let force = Vec2::new(load.force[0], load.force[1]);
                    foot(path, point(load.at, unit), force)
                })
            })
            .collect();
        Self {
            span,
            case,
            line,
            chords: path.as_ref().map(chords).unwrap_or_default(),
            path,
            vertices,
            groups: bow::groups(&span.loads),
            feet,
            forces: (0..span.loads.len())
                .map(|i| {
                    let factored = case.and_then(|c| c.forces.get(i));
                    let [x, y] = *factored.unwrap_or(&span.loads[i].force);
                    Vec2::new(x, y)
                })
                .collect(),
            unit,
            units: &run.units,
        }
    }

    /// Whether the span hangs.
    pub fn is_cable(&self) -> bool {
        self.span.kind == "cable"
    }

    /// The side away from the loads, as the sign of the axis' normal: below an arch, above a cable.
    pub fn inner_side(&self) -> f64 {
        if self.is_cable() { 1.0 } else { -1.0 }
    }

    /// Point and unit normal of the axis at a length along it.
    pub fn joint(&self, s: f64) -> Option<(Point, Vec2)> {
        let path = self.path.as_ref()?;
        Some((path.point_at(s), path.normal_at(s, true)))
    }

    /// Eccentricity of the governing line at a length along the axis, in metres: that of the station there (at a corner of
    /// the axis, which has two joints, the larger), else where the joint meets the drawn line nearest to the axis.
    pub fn eccentricity(&self, s: f64) -> Option<f64> {
        let line = self.line?;
        let path = self.path.as_ref()?;
        let near = path.length() * tolerance::SAME_JOINT;
        let station = line
            .stations
            .iter()
            .filter(|t| (t.s * self.unit - s).abs() <= near)
            .filter_map(|t| t.eccentricity)
            .max_by(|a, b| a.abs().total_cmp(&b.abs()));
        if station.is_some() {
            return station;
        }
        let (at, normal) = self.joint(s)?;
        let mut best: Option<f64> = None;
        for pair in self.vertices.windows(2) {
            let d = pair[1] - pair[0];
            let across = normal.cross(d);
            if across == 0.0 {
                continue;
            }
            let t = normal.cross(at - pair[0]) / across;
            if (-tolerance::PIECE_END..=1.0 + tolerance::PIECE_END).contains(&t) {
                let e = (pair[0] + d * t - at).dot(normal);
                if best.is_none_or(|b| e.abs() < b.abs()) {
                    best = Some(e);
                }
            }
        }
        best.map(|e| e / self.unit)
    }

    /// Where the governing line strays most: length along the axis and eccentricity in metres.
    pub fn worst(&self) -> Option<(f64, f64)> {
        let offset = self.line?.offset.as_ref()?;
        let (s, _) = self.path.as_ref()?.nearest(point(offset.at, self.unit));
        Some((s, offset.signed))
    }
}

/// A result point in drawing units.
pub fn point(xy: Xy, unit: f64) -> Point {
    Point::new(xy[0] * unit, xy[1] * unit)
}

/// The governing line of a case, when it was found.
pub fn governing(case: &Case) -> Option<&Line> {
    case.lines
        .iter()
        .find(|l| l.kind == case.governs)
        .filter(|l| l.status == Status::Found && l.vertices.len() > 1)
}

/// The case with the most limits that do not hold, then the one whose line strays most, then the first.
pub fn worst_case<'a>(run: &Run, span: &'a Span) -> Option<&'a Case> {
    let rank = |case: &Case| {
        let broken = run
            .findings
            .iter()
            .filter(|f| f.verdict == FindingVerdict::Outside)
            .filter(|f| f.span.as_ref() == Some(&span.name) && f.case.as_ref() == Some(&case.name))
            .count();
        let stray = governing(case).and_then(|l| l.offset.as_ref()).map_or(-1.0, |o| o.max_abs);
        (broken, stray)
    };
    let mut best: Option<(&Case, (usize, f64))> = None;
    for case in &span.cases {
        let r = rank(case);
        if best.is_none_or(|(_, b)| r.0 > b.0 || (r.0 == b.0 && r.1 > b.1)) {
            best = Some((case, r));
        }
    }
    best.map(|(case, _)| case)
}

/// The name of a line, for people.
pub fn kind_name(kind: LineKind) -> &'static str {
    match kind {
        LineKind::Closest => "closest to the axis",
        LineKind::Through => "through three points",
        LineKind::LeastThrust => "least thrust",
        LineKind::GreatestThrust => "greatest thrust",
        LineKind::Elastic => "elastic",
    }
}

fn axis_path(span: &Span, unit: f64) -> Option<Path> {
    let curve = &span.axis.curve;
    Path::new(
        curve.windows(2).map(|w| {
            Segment::bulge(point([w[0][0], w[0][1]], unit), point([w[1][0], w[1][1]], unit), w[0][2])
        }),
    )
}

/// Chords of a path, arcs in steps of three degrees.
fn chords(path: &Path) -> Vec<Point> {
    let mut out = vec![path.start()];
    for segment in path.segments() {
        let steps = match segment {
            Segment::Line { .. } => 1,
            #[allow(clippy::cast_possible_truncation, clippy::cast_sign_loss)] // at most a turn: 120 steps
            Segment::Arc { sweep, .. } => (sweep.abs().to_degrees() / 3.0).ceil().clamp(1.0, 120.0) as u32,
        };
        for i in 1..=steps {
            out.push(segment.point_at(segment.length() * f64::from(i) / f64::from(steps)));
        }
    }
    out
}

/// Where the line of action of a force meets the path: the crossing nearest to where it acts, else the nearest point.
fn foot(path: &Path, at: Point, force: Vec2) -> f64 {
    if force.x == 0.0 {
        return nearest_crossing(path, at, path.crossings_of_vertical(at.x));
    }
    // The turn that makes the force upright, about where it acts.
    let turn = std::f64::consts::FRAC_PI_2 - force.atan2();
    let (sin, cos) = turn.sin_cos();
    let spin = |v: Vec2| Vec2::new(v.x * cos - v.y * sin, v.x * sin + v.y * cos);
    let about = |p: Point| spin(p - at).to_point();
    let upright = Path::new(path.segments().iter().map(|segment| match *segment {
        Segment::Line { start, end } => Segment::line(about(start), about(end)),
        Segment::Arc { centre, radius, start_angle, sweep } => {
            Segment::Arc { centre: about(centre), radius, start_angle: start_angle + turn, sweep }
        }
    }));
    let crossings = upright.map_or_else(Vec::new, |p| p.crossings_of_vertical(0.0));
    nearest_crossing(path, at, crossings)
}

/// The crossing nearest to a point; without one, the nearest point of the path.
fn nearest_crossing(path: &Path, at: Point, crossings: Vec<f64>) -> f64 {
    let far = |s: &f64| (path.point_at(*s) - at).hypot();
    crossings.into_iter().min_by(|a, b| far(a).total_cmp(&far(b))).unwrap_or_else(|| path.nearest(at).0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn foot_of_an_inclined_force() {
        let path = Path::polyline(&[Point::new(0.0, 0.0), Point::new(10.0, 0.0)]).unwrap();
        let s = foot(&path, Point::new(3.0, 2.0), Vec2::new(1.0, -1.0));
        assert!((s - 5.0).abs() < 1e-12, "{s}");
        let s = foot(&path, Point::new(3.0, 2.0), Vec2::new(0.0, -7.0));
        assert!((s - 3.0).abs() < 1e-12, "{s}");
        // Runs alongside: the nearest point serves.
        let s = foot(&path, Point::new(3.0, 2.0), Vec2::new(1.0, 0.0));
        assert!((s - 3.0).abs() < 1e-12, "{s}");
    }
}
