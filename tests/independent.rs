//! Writes spans with their results for an independent program: `tests/independent/compare.py` solves the same spans with
//! its own mechanics and a general-purpose solver.
#![allow(clippy::unwrap_used)]

mod support;

use std::fs;
use std::path::Path as FilePath;

use serde_json::{Value, json};
use support::{parabola, polyline, problem};
use thrustmark::geometry::{Path, Point, Segment, Vec2};
use thrustmark::statics::{Analysis, Depth, Force, LineKind, Problem, Status, analyse};

/// A small generator of numbers between 0 and 1, the same on every machine [Park and Miller 1988].
struct Numbers(u64);

impl Numbers {
    fn next(&mut self) -> f64 {
        self.0 = self.0 * 48_271 % 2_147_483_647;
        self.0 as f64 / 2_147_483_647.0
    }

    fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.next()
    }
}

fn axis(kind: usize, n: &mut Numbers) -> Path {
    let rise = n.between(0.05, 0.45);
    let (a, b) = (Point::new(-10.0, 0.0), Point::new(10.0, n.between(-2.0, 2.0)));
    match kind % 4 {
        0 => Path::new([Segment::bulge(a, b, -2.0 * rise)]).unwrap(),
        1 => {
            let top = Point::new(n.between(-1.0, 1.0), 20.0 * rise);
            Path::new([Segment::bulge(a, top, -0.12), Segment::bulge(top, b, -0.1)]).unwrap()
        }
        2 => parabola(20.0, 20.0 * rise, 12),
        _ => polyline(&[
            (-10.0, 0.0),
            (-6.0, 14.0 * rise),
            (1.0, 20.0 * rise),
            (7.0, 12.0 * rise),
            (10.0, b.y),
        ]),
    }
}

fn span(kind: usize, n: &mut Numbers) -> Problem {
    let axis = axis(kind, n);
    let (from, to) = (axis.start().x, axis.end().x);
    let count = 1 + kind % 9;
    let forces = (0..count)
        .map(|_| {
            let at = Point::new(from + n.between(0.05, 0.95) * (to - from), n.between(9.0, 12.0));
            let w = n.between(1.0, 100.0);
            Force { at, force: Vec2::new(w * n.between(-0.15, 0.15), -w) }
        })
        .collect();
    let mut p = problem(axis, forces);
    p.govern = Some(LineKind::Closest);
    p.weight_on_axis = if kind.is_multiple_of(3) { n.between(1.0, 15.0) } else { 0.0 };
    p.depth = kind.is_multiple_of(2).then(|| Depth::Constant(n.between(0.3, 1.0)));
    p
}

fn pieces(path: &Path) -> Vec<Value> {
    path.segments()
        .iter()
        .map(|s| match *s {
            Segment::Line { start, end } => json!({"line": [[start.x, start.y], [end.x, end.y]]}),
            Segment::Arc { centre, radius, start_angle, sweep } => {
                json!({"arc": [[centre.x, centre.y], radius, start_angle, sweep]})
            }
        })
        .collect()
}

fn described(p: &Problem, a: &Analysis) -> Value {
    let forces: Vec<_> = a
        .order
        .iter()
        .map(|o| {
            let f = p.forces[o.force];
            json!({"at": [f.at.x, f.at.y], "force": [f.force.x, f.force.y], "foot": o.foot})
        })
        .collect();
    let depth = match p.depth {
        Some(Depth::Constant(d)) => Some(d),
        _ => None,
    };
    json!({"axis": pieces(&p.axis), "forces": forces, "weight": p.weight_on_axis, "depth": depth})
}

#[test]
fn write_spans_for_the_independent_program() {
    let mut n = Numbers(20_260_101);
    let mut cases = Vec::new();
    for kind in 0..32 {
        let p = span(kind, &mut n);
        let a = analyse(&p).unwrap();
        let line = &a.lines[0];
        if line.status != Status::Found {
            continue;
        }
        let mut case = described(&p, &a);
        case["name"] = json!(format!("closest {kind}"));
        case["value"] = json!(line.proof.unwrap().primal);
        cases.push(case);
    }
    let mut limits = Vec::new();
    for kind in 0..16 {
        let mut p = span(kind, &mut n);
        p.depth = Some(Depth::Constant(n.between(0.8, 2.5)));
        p.weight_on_axis = n.between(2.0, 30.0);
        p.varying = vec![0];
        p.friction = kind.is_multiple_of(4).then(|| n.between(0.5, 0.8));
        p.draw = vec![LineKind::LeastThrust, LineKind::GreatestThrust];
        let Ok(a) = analyse(&p) else { continue };
        if a.off_span.contains(&0) {
            continue;
        }
        let push = |l: &thrustmark::statics::Line| l.left.map(|e| e.horizontal);
        let safety = a.safety.as_ref().unwrap();
        let factor = |f: &Option<thrustmark::statics::Factor>| f.as_ref().and_then(|f| f.value);
        let mut case = described(&p, &a);
        case["name"] = json!(format!("limit {kind}"));
        case["varying"] = json!(a.order.iter().position(|o| o.force == 0));
        case["friction"] = json!(p.friction);
        case["least_push"] = json!(push(&a.lines[1]));
        case["greatest_push"] = json!(push(&a.lines[2]));
        case["least_factor"] = json!(factor(&safety.load_least));
        case["greatest_factor"] = json!(factor(&safety.load));
        limits.push(case);
    }
    assert!(cases.len() > 24, "only {} spans have a closest line", cases.len());
    let folder = FilePath::new(env!("CARGO_MANIFEST_DIR")).join("target/independent");
    fs::create_dir_all(&folder).unwrap();
    fs::write(
        folder.join("cases.json"),
        serde_json::to_vec(&json!({"closest": cases, "limit": limits})).unwrap(),
    )
    .unwrap();
}
