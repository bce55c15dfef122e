//! Laws that lines of thrust obey whatever the arch, and the odd spans that must be answered or refused.
#![allow(clippy::unwrap_used)]

mod support;

use std::f64::consts::{FRAC_PI_2, PI};
use std::time::Instant;

use proptest::prelude::*;
use support::{circle, close, down, parabola, polyline, problem, push, solve};
use thrustmark::geometry::{Path, Point, Segment, Vec2};
use thrustmark::statics::{
    Analysis, Depth, Force, LineKind, Problem, Reaction, Rule, SpanKind, Status, Support, Unsolved, analyse,
};

fn mirrored(path: &Path) -> Path {
    let turn = |p: Point| Point::new(-p.x, p.y);
    let segments = path.segments().iter().rev().map(|s| match *s {
        Segment::Line { start, end } => Segment::line(turn(end), turn(start)),
        Segment::Arc { centre, radius, start_angle, sweep } => {
            Segment::Arc { centre: turn(centre), radius, start_angle: PI - start_angle - sweep, sweep }
        }
    });
    Path::new(segments).unwrap()
}

fn mapped(p: &Problem, axis: Path, point: impl Fn(Point) -> Point, force: impl Fn(Vec2) -> Vec2) -> Problem {
    let mut q = p.clone();
    q.axis = axis;
    for f in &mut q.forces {
        *f = Force { at: point(f.at), force: force(f.force) };
    }
    q
}

fn closest(mut p: Problem) -> Problem {
    p.govern = Some(LineKind::Closest);
    p
}

/// A pointed axis of two arcs that meet in a kink.
fn pointed(half: f64, rise: f64, bulge: f64) -> Path {
    let (a, b, c) = (Point::new(-half, 0.0), Point::new(0.0, rise), Point::new(half, 0.0));
    Path::new([Segment::bulge(a, b, -bulge), Segment::bulge(b, c, -bulge)]).unwrap()
}

prop_compose! {
    /// Arches of all shapes under a handful of loads, some of them leaning, with and without weight and depth.
    fn arches()(
        shape in 0..4_u8,
        rise in 0.05..0.5_f64,
        loads in prop::collection::vec((0.02..0.98_f64, 1.0..100.0_f64, -0.2..0.2_f64, 0.0..3.0_f64), 1..8),
        weight in prop_oneof![Just(0.0), 1.0..20.0_f64],
        depth in prop_oneof![
            Just(None),
            (0.3..1.0_f64).prop_map(|d| Some(Depth::Constant(d))),
            (0.3..1.0_f64, 0.3..1.0_f64).prop_map(|(s, c)| Some(Depth::Linear { springing: s, crown: c })),
        ],
        tilt in -0.1..0.1_f64,
        heavy in any::<bool>(),
    ) -> Problem {
        let span = 20.0;
        let axis = match shape {
            0 => {
                let a = Point::new(-span / 2.0, 0.0);
                Path::new([Segment::bulge(a, Point::new(span / 2.0, tilt * span), -2.0 * rise)]).unwrap()
            }
            1 => pointed(span / 2.0, rise * span, 0.1),
            2 => mirrored(&mirrored(&parabola(span, rise * span, 9))),
            _ => polyline(&[(-10.0, 0.0), (-6.0, rise * 14.0), (1.0, rise * 20.0), (7.0, rise * 12.0), (10.0, tilt)]),
        };
        let (from, to) = (axis.start().x, axis.end().x);
        let forces = loads
            .iter()
            .map(|&(k, w, lean, above)| Force {
                at: Point::new(from + k * (to - from), rise * span + above),
                force: Vec2::new(w * lean, -w),
            })
            .collect();
        let mut p = problem(axis, forces);
        // The same weight on the axis, or as that of a ring with its own centroids.
        match depth {
            Some(_) if heavy => p.ring_weight = weight,
            _ => p.weight_on_axis = weight,
        }
        p.depth = depth;
        closest(p)
    }
}

/// Numbers of two lines that must agree: push, thrusts of the ends, offset.
#[track_caller]
fn same(p: &Problem, q: &Problem, force: f64, length: f64) {
    let (Ok(a), Ok(b)) = (analyse(p), analyse(q)) else {
        assert_eq!(analyse(p).err(), analyse(q).err());
        return;
    };
    assert_eq!(a.lines[0].status, b.lines[0].status);
    if a.lines[0].status != Status::Found {
        return;
    }
    let ((_, m), (_, n)) = (solve(p), solve(q));
    let (u, v) = (m.reaction.unwrap(), n.reaction.unwrap());
    let size = (u.horizontal.abs() + u.vertical.abs()) * force;
    for (x, y, unit, size) in [
        (u.horizontal, v.horizontal, force, size),
        (u.vertical, v.vertical, force, size),
        (u.moment, v.moment, force * length, size * length * p.axis.length()),
    ] {
        assert!((x * unit - y).abs() <= 1e-8 * size, "{u:?} {v:?}");
    }
    close(m.offset.unwrap().max_abs * length, n.offset.unwrap().max_abs);
    assert_eq!(m.vertices.len(), n.vertices.len());
}

/// Largest `|e| / d` over many joints of the axis, straight from the formulas and the loads as given.
fn summed_anew(p: &Problem, a: &Analysis, r: Reaction) -> f64 {
    let length = p.axis.length();
    let crown = p.axis.nearest(a.crown).0;
    let depth = |s: f64| match p.depth {
        Some(Depth::Constant(d)) => d,
        Some(Depth::Linear { springing, crown: top }) if s < crown => {
            springing + (top - springing) * s / crown
        }
        Some(Depth::Linear { springing, crown: top }) => {
            springing + (top - springing) * (length - s) / (length - crown)
        }
        _ => 1.0,
    };
    let mut worst = 0.0_f64;
    for k in 0..=5000 {
        let s = length * f64::from(k) / 5000.0;
        let at = p.axis.point_at(s);
        let from = at - p.axis.start();
        let mut force = Vec2::new(r.horizontal, r.vertical);
        let mut moment = r.moment + r.vertical * from.x - r.horizontal * from.y;
        for placed in a.order.iter().filter(|l| l.foot < s) {
            let load = p.forces[placed.force];
            force += load.force;
            moment += (at.x - load.at.x) * load.force.y - (at.y - load.at.y) * load.force.x;
        }
        let thrust = force.dot(p.axis.tangent_at(s, true));
        worst = worst.max(moment.abs() / (thrust * depth(s)));
    }
    worst
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 200, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn closest_is_proved_and_no_line_is_closer(p in arches(), three in prop::array::uniform3(-0.3..0.3_f64)) {
        let Ok(a) = analyse(&p) else { return Ok(()) };
        prop_assert!(a.residual < 1e-9, "residual {:e}", a.residual);
        let best = &a.lines[0];
        prop_assert!(matches!(best.status, Status::Found | Status::Unbounded), "{:?}", best.reason);
        if best.status == Status::Found {
            let proof = best.proof.unwrap();
            prop_assert!(proof.gap < 1e-9, "{proof:?}");
            let value = |l: &thrustmark::statics::Line| {
                l.depth_use.map_or_else(|| l.offset.unwrap().max_abs, |u| u.ratio)
            };
            prop_assert!((value(best) - proof.primal).abs() <= 1e-9 * proof.primal.max(1.0));
            if p.weight_on_axis + p.ring_weight == 0.0 {
                let worst = summed_anew(&p, &a, best.reaction.unwrap());
                prop_assert!(worst <= proof.primal + 1e-9 * proof.primal.max(1.0), "{worst} {}", proof.primal);
                prop_assert!(worst >= proof.primal * 0.99 - 1e-9, "{worst} {}", proof.primal);
            }
            // Lines through points near springings and crown.
            let mut q = p.clone();
            q.govern = Some(LineKind::Through);
            let s = [0.0, q.axis.length() / 2.0, q.axis.length()];
            let mut points = s.map(|s| q.axis.point_at(s));
            for (p, d) in points.iter_mut().zip(three) {
                p.y += d;
            }
            q.through = Some(points);
            let other = &analyse(&q).unwrap().lines[0];
            if other.status == Status::Found {
                prop_assert!(value(other) >= proof.dual - 1e-9, "{} {}", value(other), proof.dual);
            }
        }
    }

    #[test]
    fn mirrored_arch_gives_mirrored_line(p in arches()) {
        let q = mapped(&p, mirrored(&p.axis), |p| Point::new(-p.x, p.y), |f| Vec2::new(-f.x, f.y));
        let (Ok(a), Ok(b)) = (analyse(&p), analyse(&q)) else { return Ok(()) };
        prop_assert_eq!(a.lines[0].status, b.lines[0].status);
        if a.lines[0].status == Status::Found {
            let (m, n) = (&a.lines[0], &b.lines[0]);
            let size = a.total.hypot().max(m.left.unwrap().horizontal.abs());
            prop_assert!((m.left.unwrap().horizontal - n.right.unwrap().horizontal).abs() < 1e-6 * size);
            prop_assert!((m.left.unwrap().vertical - n.right.unwrap().vertical).abs() < 1e-6 * size);
            close(m.offset.unwrap().max_abs, n.offset.unwrap().max_abs);
            prop_assert_eq!(m.vertices.len(), n.vertices.len());
            for (v, w) in m.vertices.iter().zip(n.vertices.iter().rev()) {
                prop_assert!((v.x + w.x).abs() < 1e-5 && (v.y - w.y).abs() < 1e-5, "{v:?} {w:?}");
            }
        }
    }

    #[test]
    fn limits_close_on_each_other_and_mirror(p in arches(), depth in 1.0..4.0_f64) {
        let mut p = p;
        p.depth = Some(Depth::Constant(depth));
        // A weightless part may be left without any thrust: it counts as inside, but has no eccentricity.
        p.weight_on_axis += 0.5;
        p.draw = vec![LineKind::LeastThrust, LineKind::GreatestThrust];
        p.varying = vec![0];
        let q = mapped(&p, mirrored(&p.axis), |p| Point::new(-p.x, p.y), |f| Vec2::new(-f.x, f.y));
        let (Ok(a), Ok(b)) = (analyse(&p), analyse(&q)) else { return Ok(()) };
        let (s, t) = (a.safety.as_ref().unwrap(), b.safety.as_ref().unwrap());
        let size = a.total.hypot();
        for (m, n) in a.lines.iter().zip(&b.lines) {
            prop_assert_eq!(m.status, n.status);
            let (Some(u), Some(v)) = (m.left, n.right) else { continue };
            let scale = size.max(u.horizontal.abs());
            prop_assert!((u.horizontal - v.horizontal).abs() < 1e-6 * scale, "{u:?} {v:?}");
            prop_assert!((u.vertical - v.vertical).abs() < 1e-6 * scale, "{:?} {u:?} {v:?}", m.kind);
        }
        for f in [&s.load, &s.load_least].into_iter().flatten() {
            if let Some(proof) = f.proof {
                prop_assert!(proof.gap < 1e-9);
            }
        }
        for m in [&s.mechanism, &s.mechanism_least].into_iter().flatten() {
            prop_assert!(m.residual < 1e-6, "{m:?}");
        }
        // Some line inside at the loads as they are: the geometric factor is at least one, and one lies in the interval.
        let inside = a.lines[1].status == Status::Found;
        if let Some(g) = s.geometric.value {
            prop_assert!(inside == (g >= 1.0) || (g - 1.0).abs() < 1e-9, "{g} {inside}");
        }
        if let (Some(f), Some(g)) = (&s.load, &t.load) {
            prop_assert_eq!(f.status, g.status);
            if let (Some(x), Some(y)) = (f.value, g.value) {
                close(x, y);
                if let Some(low) = s.load_least.as_ref().and_then(|l| l.value) {
                    prop_assert!(low <= x + 1e-9);
                    prop_assert!(inside == (low <= 1.0 && 1.0 <= x) || (x - 1.0).abs().min((low - 1.0).abs()) < 1e-8);
                }
            }
        }
    }

    #[test]
    fn national_grid_and_units_change_no_digit(p in arches(), k in 0.001..1000.0_f64) {
        let by = Vec2::new(2_600_000.0, 1_200_000.0);
        same(&p, &mapped(&p, p.axis.shifted_scaled(by, 1.0), |p| p + by, |f| f), 1.0, 1.0);
        let mut heavy = mapped(&p, p.axis.clone(), |p| p, |f| f * k);
        heavy.weight_on_axis *= k;
        heavy.ring_weight *= k;
        same(&p, &heavy, k, 1.0);
        let mut large = mapped(&p, p.axis.shifted_scaled(Vec2::ZERO, k), |p| (p.to_vec2() * k).to_point(), |f| f);
        large.weight_on_axis /= k;
        large.ring_weight /= k * k;
        large.depth = match &p.depth {
            Some(Depth::Constant(d)) => Some(Depth::Constant(d * k)),
            Some(Depth::Linear { springing, crown }) => {
                Some(Depth::Linear { springing: springing * k, crown: crown * k })
            }
            other => other.clone(),
        };
        same(&p, &large, 1.0, k);
    }

    #[test]
    fn order_of_input_counts_nothing(p in arches()) {
        let mut q = p.clone();
        q.forces.reverse();
        let (Ok(a), Ok(b)) = (analyse(&p), analyse(&q)) else { return Ok(()) };
        prop_assert_eq!(&a.lines, &b.lines);
        prop_assert_eq!(a.pole, b.pole);
    }

    #[test]
    fn lines_through_three_hinges_add_up(p in arches(), q in arches()) {
        let mut all = [p.clone(), p.clone(), p.clone()];
        all[1].forces.clone_from(&q.forces);
        all[1].weight_on_axis = q.weight_on_axis;
        all[1].ring_weight = if p.depth.is_some() { q.ring_weight } else { 0.0 };
        let second = all[1].forces.clone();
        all[2].forces.extend(second);
        all[2].weight_on_axis += q.weight_on_axis;
        all[2].ring_weight += all[1].ring_weight;
        let reactions = all.map(|mut p| {
            p.govern = None;
            p.support = Some(Support::ThreeHinged);
            analyse(&p).ok().and_then(|a| a.lines[0].reaction)
        });
        if let [Some(a), Some(b), Some(c)] = reactions {
            close((a.horizontal + b.horizontal) / c.horizontal, 1.0);
            close((a.vertical + b.vertical) / c.vertical, 1.0);
        }
    }

    #[test]
    fn odd_input_is_answered_or_refused(
        points in prop::collection::vec((-1e3..1e3_f64, -1e2..1e2_f64, -1.5..1.5_f64), 2..7),
        loads in prop::collection::vec((-1e3..1e3_f64, -1e2..1e2_f64, -1e3..1e3_f64, -1e3..1e3_f64), 0..6),
        size in -9..9_i32,
        weight in prop_oneof![Just(0.0), 0.0..10.0_f64],
        depth in prop_oneof![Just(None), (0.0..50.0_f64).prop_map(|d| Some(Depth::Constant(d)))],
        kind in 0..5_usize,
        support in 0..4_usize,
    ) {
        let k = 10_f64.powi(size);
        let at = |x: f64, y: f64| Point::new(x * k, y * k);
        let segments = points.windows(2).map(|w| Segment::bulge(at(w[0].0, w[0].1), at(w[1].0, w[1].1), w[0].2));
        let Some(axis) = Path::new(segments) else { return Ok(()) };
        let forces = loads.iter().map(|&(x, y, a, b)| Force { at: at(x, y), force: Vec2::new(a, b) }).collect();
        let mut p = problem(axis, forces);
        p.weight_on_axis = weight;
        p.ring_weight = if depth.is_some() { weight } else { 0.0 };
        p.depth = depth.map(|d| match d { Depth::Constant(d) => Depth::Constant(d * k), d => d });
        p.varying = vec![0, 77];
        let kinds = [LineKind::Closest, LineKind::Through, LineKind::LeastThrust, LineKind::GreatestThrust, LineKind::Elastic];
        p.govern = Some(kinds[kind]);
        p.draw = kinds.to_vec();
        p.support = [None, Some(Support::Hingeless), Some(Support::TwoHinged), Some(Support::None)][support];
        if let Ok(a) = analyse(&p) {
            prop_assert!(a.residual < 1e-6, "{:e}", a.residual);
            for line in &a.lines {
                if let (Some(proof), LineKind::Closest) = (line.proof, line.kind) {
                    // Without a depth the optimum is a length: the gap is measured by the axis.
                    prop_assert!(proof.gap < 1e-9 * p.axis.length().max(1.0), "{proof:?}");
                }
                for s in &line.stations {
                    prop_assert!(s.thrust.is_finite() && s.moment.is_finite());
                }
            }
        }
    }

    #[test]
    fn push_times_rise_is_constant(
        loads in prop::collection::vec((1.0..19.0_f64, 1.0..100.0_f64), 1..8),
        k in 0.2..5.0_f64,
    ) {
        let loads: Vec<_> = loads.iter().map(|&(x, w)| (w, x)).collect();
        let h = [4.0, 4.0 * k].map(|f| {
            let a = analyse(&problem(parabola(20.0, f, 2), down(&loads, 30.0))).unwrap();
            a.lines[0].reaction.map(|r| r.horizontal * f)
        });
        if let [Some(a), Some(b)] = h {
            close(a, b);
        }
    }
}

#[test]
fn two_loads_have_a_funicular_in_every_trapezium() {
    let axis = polyline(&[(0.0, 0.0), (3.0, 2.0), (7.0, 2.0), (10.0, 0.0)]);
    let (_, line) = solve(&closest(problem(axis, down(&[(30.0, 3.0), (30.0, 7.0)], 5.0))));
    assert!(line.offset.unwrap().max_abs < 1e-12);
    close(push(&line), 45.0);
}

#[test]
fn loads_on_springings_go_straight_into_the_abutments() {
    let loads = [(40.0, -5.0), (60.0, 5.0), (100.0, 0.0)];
    let bare = closest(problem(circle(5.0, FRAC_PI_2), down(&loads[2..], 9.0)));
    let more = closest(problem(circle(5.0, FRAC_PI_2), down(&loads, 9.0)));
    let ((_, a), (_, b)) = (solve(&bare), solve(&more));
    // The joint before the load on the springing carries it too, with the same moment: the offset there is smaller.
    assert!(b.offset.unwrap().max_abs <= a.offset.unwrap().max_abs + 1e-12);
    assert!(b.left.unwrap().vertical > a.left.unwrap().vertical + 39.0);
    let only = closest(problem(circle(5.0, FRAC_PI_2), down(&loads[..2], 9.0)));
    assert_eq!(analyse(&only), Err(Unsolved::NoLoad));
}

#[test]
fn a_single_load_leaves_freedom_and_the_mirror_keeps_it() {
    // One load on the left part of a semicircle: the longer side alone sets the largest offset, and the line of least
    // bending is taken among the rest.
    let p = closest(problem(circle(5.0, FRAC_PI_2), down(&[(10.0, -3.0)], 9.0)));
    let q = closest(problem(circle(5.0, FRAC_PI_2), down(&[(10.0, 3.0)], 9.0)));
    let ((_, a), (_, b)) = (solve(&p), solve(&q));
    close(push(&a), push(&b));
    close(a.left.unwrap().vertical, b.right.unwrap().vertical);
    close(a.offset.unwrap().max_abs, b.offset.unwrap().max_abs);
    close(a.offset.unwrap().rms, b.offset.unwrap().rms);
}

#[test]
fn all_loads_on_one_half() {
    let p = closest(problem(circle(8.0, 1.2), down(&[(10.0, -6.0), (20.0, -4.0), (15.0, -1.0)], 20.0)));
    let (_, line) = solve(&p);
    assert!(line.proof.unwrap().gap < 1e-9);
}

#[test]
fn pointed_and_nearly_straight() {
    let (_, line) = solve(&closest(problem(
        pointed(5.0, 7.0, 0.15),
        down(&[(10.0, -3.0), (10.0, 0.0), (10.0, 3.0)], 20.0),
    )));
    assert!(line.proof.unwrap().gap < 1e-9);
    // A very flat arc under many equal loads: the push is that of the parabola of the same rise.
    for rise in [1e-2, 1e-4, 1e-6] {
        let axis =
            Path::new([Segment::bulge(Point::new(0.0, 0.0), Point::new(40.0, 0.0), -rise / 20.0)]).unwrap();
        let loads: Vec<_> = (0..80).map(|k| (1.0, 0.25 + 0.5 * f64::from(k))).collect();
        let (a, line) = solve(&problem(axis.clone(), down(&loads, 1.0)));
        assert!((a.rise - rise).abs() < 1e-9 * rise, "{} {rise}", a.rise);
        assert!((push(&line) * rise / 400.0 - 1.0).abs() < 1e-6, "{}", push(&line) * rise);
        let (_, line) = solve(&closest(problem(axis, down(&loads, 1.0))));
        // Closer than the line through springings and crown, and by lumping alone away from the axis.
        assert!(line.offset.unwrap().max_abs < 4e-4 * rise, "{:?}", line.offset);
    }
}

#[test]
fn refusals() {
    let loads = down(&[(10.0, 2.0)], 9.0);
    let flat = problem(polyline(&[(0.0, 0.0), (2.0, 0.0), (5.0, 0.0)]), loads.clone());
    assert_eq!(analyse(&flat), Err(Unsolved::NoRise));
    let crossed = polyline(&[(0.0, 0.0), (4.0, 4.0), (4.0, 1.0), (1.0, 4.0), (6.0, 0.0)]);
    assert!(matches!(analyse(&problem(crossed, loads.clone())), Err(Unsolved::SelfCrossing(..))));
    assert_eq!(analyse(&problem(parabola(10.0, 2.0, 8), Vec::new())), Err(Unsolved::NoLoad));
    let beside = problem(parabola(10.0, 2.0, 8), down(&[(10.0, 12.0)], 9.0));
    assert_eq!(analyse(&beside), Err(Unsolved::NoLoad));
    let mut p = problem(parabola(10.0, 2.0, 8), loads.clone());
    p.forces[0].force.y = f64::NAN;
    assert!(matches!(analyse(&p), Err(Unsolved::Input(_))));
    let mut p = problem(parabola(10.0, 2.0, 8), loads.clone());
    p.depth = Some(Depth::Constant(0.0));
    assert!(matches!(analyse(&p), Err(Unsolved::Input(_))));
    let mut p = problem(parabola(10.0, 2.0, 8), loads.clone());
    p.hinges = [1.0, 3.0, 5.0, 7.0].map(|x| Point::new(x, 1.0)).to_vec();
    assert!(matches!(analyse(&p), Err(Unsolved::Hinges(_))));
    p.hinges = [1.0, 3.0, 5.0].map(|x| Point::new(x, 1.0)).to_vec();
    assert!(matches!(analyse(&p), Err(Unsolved::Hinges(_))));
    p.hinges.pop();
    p.support = Some(Support::Hingeless);
    assert!(matches!(analyse(&p), Err(Unsolved::Hinges(_))));
    let backward = problem(parabola(10.0, 2.0, 8).reversed(), loads);
    assert!(matches!(analyse(&backward), Err(Unsolved::Input(_))));
}

#[test]
fn loads_beside_the_span_are_named() {
    let p = problem(parabola(10.0, 2.0, 8), down(&[(10.0, 12.0), (5.0, 3.0), (7.0, -1.0)], 9.0));
    let (a, _) = solve(&p);
    assert_eq!(a.off_span, vec![0, 2]);
    assert_eq!(a.order.len(), 1);
    close(a.total.y, -5.0);
}

#[test]
fn hanging_cable() {
    // The parabola of seven equal loads turned over: a pull of the same size as the push of the arch.
    let sag: Vec<(f64, f64)> =
        (0..=8).map(|k| (4.0 * f64::from(k), -0.125 * f64::from(k * (8 - k)) * 4.0)).collect();
    let loads: Vec<_> = (1..=7).map(|k| (100.0, 4.0 * f64::from(k))).collect();
    let mut p = problem(polyline(&sag), down(&loads, 2.0));
    p.govern = None;
    let (a, line) = solve(&p);
    assert_eq!((a.kind, a.rule), (SpanKind::Cable, Rule::Cable));
    close(push(&line), -400.0);
    close(line.left.unwrap().vertical, 350.0);
    assert!(line.stations.iter().all(|s| s.thrust < 0.0));
    assert!(line.offset.unwrap().max_abs < 1e-12);
    p.govern = Some(LineKind::Closest);
    let (_, line) = solve(&p);
    close(push(&line), -400.0);
    // Lifted in the middle it would have to push there.
    p.govern = None;
    p.forces.push(Force { at: Point::new(16.0, 3.0), force: Vec2::new(0.0, 690.0) });
    assert!(
        matches!(analyse(&p), Err(Unsolved::SlackCable(_))),
        "{:?}",
        analyse(&p).map(|a| a.lines[0].left)
    );
}

#[test]
fn horizontal_loads() {
    // A load to the right on the left haunch: the right abutment pushes back by that much more.
    let mut forces = down(&[(50.0, -2.0), (50.0, 0.0), (50.0, 2.0)], 20.0);
    forces.push(Force { at: Point::new(-20.0, 2.5), force: Vec2::new(8.0, 0.0) });
    let (a, line) = solve(&closest(problem(circle(5.0, FRAC_PI_2), forces)));
    assert!(a.order[0].force == 3, "{:?}", a.order);
    close(line.right.unwrap().horizontal - push(&line), 8.0);
    // Sideways load alone has no closest line: the straighter the better.
    let side = vec![Force { at: Point::new(0.0, 5.0), force: Vec2::new(8.0, 0.0) }];
    let a = analyse(&closest(problem(circle(5.0, FRAC_PI_2), side))).unwrap();
    assert!(matches!(a.lines[0].status, Status::Unbounded | Status::None), "{:?}", a.lines[0]);
}

#[test]
fn drawn_hinges_are_met_by_every_line() {
    let mut p = closest(problem(circle(10.0, 1.0), down(&[(10.0, -4.0), (30.0, 2.0), (5.0, 5.0)], 20.0)));
    p.depth = Some(Depth::Constant(0.8));
    p.draw = vec![LineKind::Through];
    let crown = Point::new(0.0, 10.0);
    for hinges in [vec![crown], vec![p.axis.start(), crown], vec![p.axis.start(), crown, p.axis.end()]] {
        p.hinges.clone_from(&hinges);
        let a = analyse(&p).unwrap();
        for line in &a.lines {
            assert_eq!(line.status, Status::Found);
            for h in &hinges {
                let s = line.stations.iter().find(|s| (s.at - *h).hypot() < 1e-9).unwrap();
                assert!(s.moment.abs() < 1e-9, "{s:?}");
            }
        }
        assert!(a.lines[0].proof.unwrap().gap < 1e-9);
    }
}

#[test]
fn thousand_loads_and_ten_thousand_pieces() {
    let loads: Vec<_> =
        (0..1000).map(|k| (1.0 + f64::from(k % 7), 0.05 + 0.1 * f64::from(k) * 0.999)).collect();
    let start = Instant::now();
    let (_, line) = solve(&closest(problem(parabola(100.0, 20.0, 10_000), down(&loads, 30.0))));
    assert!(line.proof.unwrap().gap < 1e-9);
    assert!(start.elapsed().as_secs_f64() < 5.0, "{:?}", start.elapsed());
}
