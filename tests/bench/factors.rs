//! Ten thousand load factors of a ring of a hundred joints: `tests/bench/factors.py` runs this and holds it against HiGHS.
//!
//! Prints one JSON object: the ring, the places of the load, the factor found at each, and nanoseconds per solve.
#![allow(clippy::unwrap_used, clippy::print_stdout)]

use std::time::Instant;

use thrustmark::geometry::{Path, Point, Segment, Vec2};
use thrustmark::statics::{Depth, Factors, Force, Problem};

fn main() {
    let (radius, half, depth, weight, pieces, places) = (10.0, 1.2_f64, 1.0, 24.0, 99, 10_000);
    let (s, c) = half.sin_cos();
    let ends = [Point::new(-radius * s, radius * c), Point::new(radius * s, radius * c)];
    let axis = Path::new([Segment::bulge(ends[0], ends[1], -(half / 2.0).tan())]).unwrap();
    let mut problem = Problem::new(axis);
    (problem.depth, problem.ring_weight, problem.voussoirs) =
        (Some(Depth::Constant(depth)), weight, Some(pieces));
    let mut ring = Factors::new(&problem).unwrap();
    // Between the quarters or so: a load near a springing goes straight into the abutment and has no greatest factor.
    let at: Vec<f64> =
        (0..places).map(|k| 0.6 * ends[1].x * (2.0 * f64::from(k) / f64::from(places - 1) - 1.0)).collect();
    let mut values = Vec::with_capacity(at.len());
    let mut nanoseconds = Vec::with_capacity(at.len());
    for &x in &at {
        let load = [Force { at: Point::new(x, 20.0), force: Vec2::new(0.0, -1.0) }];
        let start = Instant::now();
        let factor = ring.greatest(&load).unwrap();
        nanoseconds.push(start.elapsed().as_nanos());
        values.push(factor.value.unwrap());
    }
    let told = serde_json::json!({
        "radius": radius, "half_opening": half, "depth": depth, "weight": weight, "pieces": pieces,
        "places": at, "values": values, "nanoseconds": nanoseconds.iter().map(|n| *n as f64).collect::<Vec<_>>(),
    });
    println!("{told}");
}
