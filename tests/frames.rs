//! Writes elastic ribs with their results for `tests/independent/frame.py`, which solves them with a general-purpose frame
//! analysis.
#![allow(clippy::unwrap_used)]

mod support;

use std::fs;
use std::path::Path as FilePath;

use serde_json::{Value, json};
use support::{circle, parabola, problem};
use thrustmark::geometry::{Path, Point, Vec2};
use thrustmark::statics::{Depth, Effects, Force, LineKind, Problem, Support, analyse};

const STIFFNESS: f64 = 3e7;

/// Nodes of bars along an axis: its corners and loads, each stretch between them cut into `parts`.
fn nodes(axis: &Path, feet: &[f64], parts: usize) -> Vec<f64> {
    let mut cuts: Vec<f64> = axis.cumulative().to_vec();
    cuts.extend(feet);
    cuts.sort_by(f64::total_cmp);
    cuts.dedup_by(|b, a| *b - *a < 1e-9);
    let mut all = vec![cuts[0]];
    for w in cuts.windows(2) {
        all.extend((1..=parts).map(|k| w[0] + (w[1] - w[0]) * k as f64 / parts as f64));
    }
    all
}

fn case(name: &str, mut p: Problem, curved: bool) -> Value {
    p.govern = Some(LineKind::Elastic);
    p.stiffness = Some(STIFFNESS);
    p.tension = true;
    let a = analyse(&p).unwrap();
    let line = &a.lines[0];
    let r = line.reaction.unwrap_or_else(|| panic!("{name}: {:?}", line.reason));
    let feet: Vec<f64> = a.order.iter().map(|o| o.foot).collect();
    let finer = if curved { vec![24, 48] } else { vec![1] };
    let all: Vec<Vec<f64>> = finer.iter().map(|&parts| nodes(&p.axis, &feet, parts)).collect();
    let loads: Vec<[f64; 4]> = a
        .order
        .iter()
        .map(|o| {
            let f = p.forces[o.force];
            let x = p.axis.point_at(o.foot).x;
            [x, f.at.y, f.force.x, f.force.y]
        })
        .collect();
    // Moments at the coarsest nodes, before the loads there, from the reaction.
    let start = p.axis.start();
    let moments: Vec<f64> = all[0]
        .iter()
        .map(|&s| {
            let q = p.axis.point_at(s);
            let mut m = r.moment + r.vertical * (q.x - start.x) - r.horizontal * (q.y - start.y);
            for l in loads.iter().filter(|l| l[0] < q.x - 1e-9) {
                m += (q.x - l[0]) * l[3] - (q.y - l[1]) * l[2];
            }
            m
        })
        .collect();
    // What the stations say is what the reaction says.
    for station in &line.stations {
        if let Some(i) = all[0].iter().position(|s| (s - station.s).abs() < 1e-9) {
            let size = moments.iter().fold(1.0, |m: f64, v| m.max(v.abs()));
            assert!((station.moment - moments[i]).abs() < 1e-8 * size, "{name} at {}", station.s);
        }
    }
    let points = |places: &Vec<f64>| -> Vec<[f64; 2]> {
        places.iter().map(|&s| p.axis.point_at(s)).map(|q| [q.x, q.y]).collect()
    };
    let Some(Depth::Constant(depth)) = p.depth else { panic!("a constant depth") };
    json!({
        "name": name,
        "nodes": all.iter().map(points).collect::<Vec<_>>(),
        "loads": loads,
        "crown": [a.crown.x, a.crown.y],
        "support": match p.support.unwrap() {
            Support::Hingeless => "hingeless",
            Support::TwoHinged => "two-hinged",
            _ => "three-hinged",
        },
        "depth": depth,
        "stiffness": STIFFNESS,
        "strain": p.effects.strain,
        "left": p.effects.left,
        "right": p.effects.right,
        "reaction": [r.horizontal, r.vertical, r.moment],
        "moments": moments,
    })
}

#[test]
fn write_ribs_for_the_frame_analysis() {
    let loads = |list: &[(f64, f64, f64)], y: f64| -> Vec<Force> {
        list.iter().map(|&(x, fx, fy)| Force { at: Point::new(x, y), force: Vec2::new(fx, fy) }).collect()
    };
    let mut cases = Vec::new();
    for support in [Support::Hingeless, Support::TwoHinged, Support::ThreeHinged] {
        let rib = |axis: Path, forces: Vec<Force>, depth: f64| Problem {
            support: Some(support),
            depth: Some(Depth::Constant(depth)),
            ..problem(axis, forces)
        };
        let name = |what: &str| format!("{support:?} {what}");
        // On the corners of a parabola in chords, level and not, upright loads and sideways ones on the axis itself.
        let chords = parabola(40.0, 8.0, 16);
        let some =
            loads(&[(5.0, 0.0, -80.0), (12.5, 0.0, -120.0), (20.0, 0.0, -60.0), (32.5, 0.0, -150.0)], 12.0);
        cases.push(case(&name("chords"), rib(chords.clone(), some.clone(), 0.8), false));
        let points: Vec<Point> = (0..=16)
            .map(|k| {
                let x = 2.5 * f64::from(k);
                Point::new(x, 0.2 * x * (40.0 - x) / 10.0 + 0.05 * x)
            })
            .collect();
        let skew = Path::polyline(&points).unwrap();
        let pushed: Vec<Force> = [3, 6, 9, 12]
            .iter()
            .map(|&k| Force { at: points[k], force: Vec2::new(6.0 * k as f64 - 40.0, -20.0 * k as f64) })
            .collect();
        cases.push(case(&name("skew, sideways"), rib(skew, pushed, 1.1), false));
        if support != Support::ThreeHinged {
            for (what, effects) in [
                ("warmer", Effects { strain: 3e-4, ..Effects::default() }),
                (
                    "spread",
                    Effects { right: [0.01, 0.0, 0.0], left: [-0.004, 0.0, 0.0], ..Effects::default() },
                ),
                ("settled", Effects { right: [0.0, -0.02, 0.0], ..Effects::default() }),
            ] {
                let p = Problem { effects, ..rib(chords.clone(), some.clone(), 0.8) };
                cases.push(case(&name(what), p, false));
            }
        }
        if support == Support::Hingeless {
            let effects = Effects { left: [0.0, 0.0, 5e-4], right: [0.0, 0.0, 1e-3], strain: 0.0 };
            cases.push(case(&name("turned"), Problem { effects, ..rib(chords, some, 0.8) }, false));
        }
        // A circular rib, by two finenesses.
        let arc = circle(25.0, 0.9);
        let over =
            loads(&[(-12.0, 0.0, -90.0), (-3.0, 0.0, -140.0), (0.0, 0.0, -50.0), (9.0, 0.0, -70.0)], 27.0);
        cases.push(case(&name("arc"), rib(arc, over, 0.9), true));
    }
    let folder = FilePath::new(env!("CARGO_MANIFEST_DIR")).join("target/independent");
    fs::create_dir_all(&folder).unwrap();
    fs::write(folder.join("elastic.json"), serde_json::to_vec(&json!(cases)).unwrap()).unwrap();
    assert_eq!(cases.len(), 16);
}

#[test]
fn write_rings_of_finite_strength_for_the_cones() {
    // Rings of voussoirs whose weight is given piece by piece, so that the joints and loads are all there is.
    let mut cases = Vec::new();
    for (k, (opening, depth, strength)) in
        [(0.8, 0.6, 2000.0), (1.0, 0.8, 1200.0), (1.2, 1.0, 5000.0), (1.4, 1.5, 900.0), (1.5, 1.6, 3000.0)]
            .into_iter()
            .enumerate()
    {
        let count = 30 + 10 * k;
        let axis = circle(10.0, opening);
        let length = axis.length();
        let mut p = problem(axis, Vec::new());
        for i in 0..count {
            let s = length * (i as f64 + 0.5) / count as f64;
            p.forces.push(Force {
                at: p.axis.point_at(s),
                force: Vec2::new(0.0, -24.0 * depth * length / count as f64),
            });
        }
        let load = 0.1 + 0.07 * k as f64;
        p.forces.push(Force {
            at: Point::new(p.axis.start().x * (1.0 - 2.0 * load), 20.0),
            force: Vec2::new(0.5 * k as f64, -10.0),
        });
        (p.varying, p.voussoirs, p.govern) = (vec![count], Some(count), None);
        (p.depth, p.strength) = (Some(Depth::Constant(depth)), Some(strength));
        let a = analyse(&p).unwrap();
        let load = a.safety.as_ref().unwrap().load.as_ref().unwrap();
        assert!(load.proof.unwrap().gap < 1e-7, "{load:?}");
        let joints: Vec<[f64; 5]> = (0..=count)
            .map(|i| {
                let s = length * i as f64 / count as f64;
                let (q, t) = (p.axis.point_at(s), p.axis.tangent_at(s, true));
                [q.x, q.y, t.x, t.y, s]
            })
            .collect();
        let forces: Vec<Value> = a
            .order
            .iter()
            .map(|o| {
                let f = p.forces[o.force];
                json!([o.foot, f.at.x, f.at.y, f.force.x, f.force.y, o.force == count])
            })
            .collect();
        cases.push(json!({
            "name": format!("ring {k}"), "joints": joints, "forces": forces, "depth": depth, "strength": strength,
            "factor": load.value.unwrap(),
        }));
    }
    let folder = FilePath::new(env!("CARGO_MANIFEST_DIR")).join("target/independent");
    fs::create_dir_all(&folder).unwrap();
    fs::write(folder.join("cones.json"), serde_json::to_vec(&json!(cases)).unwrap()).unwrap();
}
