//! Outside values that the statics are held against, each with its source in the words of the list of check values.
#![allow(clippy::unwrap_used)]

mod support;

use std::f64::consts::FRAC_PI_2;

use support::{circle, close, down, height, parabola, polyline, problem, push, solve, station};
use thrustmark::geometry::{Point, Vec2};
use thrustmark::statics::{
    Analysis, Depth, Force, Line, LineKind, Problem, Rule, SpanKind, Status, Support, analyse,
    least_thickness,
};

#[test]
fn f01_odd_number_of_equal_loads() {
    // F01 (derived): n odd equal vertical loads W, equal gaps a (n+1 gaps), supports level, apex f at the middle load:
    // H=W a (n+1)^2/(8f); vertex ordinates 4 f k(n+1-k)/(n+1)^2 - all on the parabola. Source: statics (Varignon
    // funicular).
    let loads: Vec<_> = (1..=7).map(|k| (100.0, 4.0 * f64::from(k))).collect();
    let (_, line) = solve(&problem(parabola(32.0, 8.0, 8), down(&loads, 20.0)));
    close(push(&line), 400.0);
    close(line.right.unwrap().horizontal, 400.0);
    assert_eq!(line.vertices.len(), 9);
    close(line.vertices[1].y, 3.5);
    close(line.vertices[3].y, 7.5);
    close(push(&line).hypot(line.left.unwrap().vertical), 531.507290637);
    // The chords of the axis are the line itself.
    assert!(line.offset.unwrap().max_abs < 1e-12);
}

#[test]
fn f02_even_number_of_equal_loads() {
    // F02 (derived): n even, same layout, apex f at mid-span (level middle segment): H=W a n(n+2)/(8f),
    // y_k=4 f k(n+1-k)/(n(n+2)); vertices on a parabola of rise f(n+1)^2/(n(n+2)) > f. Source: statics.
    let loads: Vec<_> = (1..=6).map(|k| (50.0, 5.0 * f64::from(k))).collect();
    let axis = polyline(&[(0.0, 0.0), (12.0, 6.0), (23.0, 6.0), (35.0, 0.0)]);
    let (a, line) = solve(&problem(axis, down(&loads, 9.0)));
    close(a.crown.x, 17.5);
    close(push(&line), 250.0);
    for (k, y) in [(1, 3.0), (2, 5.0), (3, 6.0), (4, 6.0)] {
        close(line.vertices[k].y, y);
    }
}

#[test]
fn f03_half_gaps_at_the_supports() {
    // F03 (derived): n equal loads at gaps a with half gaps a/2 at both supports (span n a), n even, apex at mid-span:
    // H=W a n^2/(8f) (= the UDL value W/a (na)^2/8f exactly). Source: statics.
    let loads: Vec<_> = (0..8).map(|k| (40.0, 3.0 * (f64::from(k) + 0.5))).collect();
    let (_, line) = solve(&problem(parabola(24.0, 5.0, 2), down(&loads, 9.0)));
    close(push(&line), 192.0);
    close(line.vertices[1].y, 1.25);
    close(line.vertices[4].y, 5.0);
}

#[test]
fn f04_three_points_at_unequal_levels() {
    // F04 (derived): unequal loads and spacings through three points, supports not level. Source: exact rational solution.
    let loads = down(&[(60.0, 5.0), (80.0, 10.0), (100.0, 20.0), (40.0, 25.0)], 12.0);
    let points = [(0.0, 0.0), (12.0, 7.0), (30.0, 3.0)];
    let mut p = problem(polyline(&points), loads);
    p.through = Some(points.map(Point::from));
    let (_, line) = solve(&p);
    close(push(&line), 196.551724138);
    close(push(&line), 5700.0 / 29.0);
    close(line.left.unwrap().vertical, 162.988505747);
    close(line.right.unwrap().vertical, 117.011494253);
}

#[test]
fn f06_uniform_load_lumped() {
    // F06 (from memory): uniform load w per metre of plan: parabola, H=w L^2/(8f); end thrust sqrt(H^2+(wL/2)^2). Lumping
    // each strip at its centre leaves the ordinates at strip edges exact. Source: any statics text, e.g. S. Timoshenko,
    // D. Young, Theory of Structures.
    let width = 40.0 / 80.0;
    let loads: Vec<_> = (0..80).map(|k| (20.0 * width, width * (f64::from(k) + 0.5))).collect();
    let (_, line) = solve(&problem(parabola(40.0, 8.0, 80), down(&loads, 9.0)));
    close(push(&line), 500.0);
    close(height(&line, 10.0), 6.0);
    close(push(&line).hypot(line.left.unwrap().vertical), 640.312423743);
}

#[test]
fn f07_one_load() {
    // F07 (derived): one point load: triangle; H=P a b/(L f), f the ordinate at the load. Source: statics.
    let axis = polyline(&[(0.0, 0.0), (10.0, 6.0), (40.0, 0.0)]);
    let mut p = problem(axis, down(&[(100.0, 10.0)], 8.0));
    let (_, line) = solve(&p);
    close(push(&line), 125.0);
    close(line.left.unwrap().vertical, 75.0);
    // The triangle is the axis: the closest line is the same, with nothing left.
    p.govern = None;
    let (a, line) = solve(&p);
    assert_eq!(a.rule, Rule::AxisOnly);
    close(push(&line), 125.0);
    assert!(line.offset.unwrap().max_abs < 1e-12);
}

const THREE: [(f64, f64); 3] = [(30.0, 6.0), (50.0, 14.0), (20.0, 25.0)];

#[test]
fn f12_three_funiculars_of_the_same_loads() {
    // F12 (derived): three funiculars of the same loads through the same supports: H f = const; ordinates proportional.
    // Source: graphic statics.
    let mut ordinates = Vec::new();
    for (f, h) in [(4.0, 129.0), (8.0, 64.5), (16.0, 32.25)] {
        let axis = polyline(&[(0.0, 0.0), (14.0, f), (30.0, 0.0)]);
        let (_, line) = solve(&problem(axis, down(&THREE, 20.0)));
        close(push(&line), h);
        ordinates.push([height(&line, 6.0) / f, height(&line, 25.0) / f]);
    }
    for o in &ordinates[1..] {
        close(o[0], ordinates[0][0]);
        close(o[1], ordinates[0][1]);
    }
}

#[test]
fn f13_two_poles() {
    // F13 (from memory): two poles: corresponding sides of two funiculars (poles O1,O2) of the same loads meet on one
    // straight line parallel to O1O2 (Culmann). Source: K. Culmann, Die graphische Statik (1866).
    // Points of the funicular with force (h, v) at the left end and moment m there.
    let points = |h: f64, v: f64, m: f64| {
        [1.0, 16.0, 29.0].map(|x: f64| {
            let loads: f64 = THREE.iter().filter(|l| l.1 < x).map(|l| l.0 * (x - l.1)).sum();
            Point::new(x, (m + v * x - loads) / h)
        })
    };
    let lines = [(40.0, 55.0, 0.0), (70.0, 35.0, 130.0)].map(|(h, v, m)| {
        let mut p = problem(parabola(30.0, 8.0, 10), down(&THREE, 20.0));
        p.through = Some(points(h, v, m));
        let (_, line) = solve(&p);
        close(push(&line), h);
        close(line.left.unwrap().vertical, v);
        line
    });
    let side = |line: &Line, k: usize| {
        let (a, b) = (line.vertices[k], line.vertices[k + 1]);
        let slope = (b.y - a.y) / (b.x - a.x);
        (slope, a.y - slope * a.x)
    };
    let meeting = [0, 1, 2, 3].map(|k| {
        let ((m, c), (n, d)) = (side(&lines[0], k), side(&lines[1], k));
        let x = (d - c) / (m - n);
        Point::new(x, m * x + c)
    });
    let slope = |p: Point, q: Point| (q.y - p.y) / (q.x - p.x);
    close(slope(meeting[0], meeting[2]), -0.666666666667);
    close(slope(meeting[0], meeting[3]), -0.666666666667);
}

#[test]
fn f14_closing_line() {
    // F14 (derived): closing line: V_A = sum W(L-x)/L + H (y_B-y_A)/L. Source: graphic statics.
    // The third point is where the line of push 200 and V_A passes at 14 m.
    let y = 1.0 + (74.0 * 14.0 - 30.0 * 8.0) / 200.0;
    let axis = polyline(&[(0.0, 1.0), (14.0, y), (30.0, 4.0)]);
    let (_, line) = solve(&problem(axis, down(&THREE, 20.0)));
    close(push(&line), 200.0);
    close(line.left.unwrap().vertical, 74.0);
}

#[test]
fn f17_vertical_offset_theorem() {
    // F17 (from memory): vertical offset theorem (Eddy): M = H (y_line - y_axis); three-hinged parabola, load at quarter
    // point: H=P k L/(2f), M_load=P L/4 * 3/8, M_other quarter = -P L/32. Source: H.T. Eddy, Researches in Graphical
    // Statics (1878).
    let mut p = problem(parabola(40.0, 8.0, 4), down(&[(100.0, 10.0)], 9.0));
    p.govern = None;
    p.support = Some(Support::ThreeHinged);
    let (a, line) = solve(&p);
    assert_eq!((a.rule, line.support), (Rule::ThreeHinges, Some(Support::ThreeHinged)));
    close(push(&line), 62.5);
    let quarter = station(&line, 10.0);
    close(quarter.moment, 375.0);
    close(62.5 * quarter.vertical_offset.unwrap(), 375.0);
    close(62.5 * (height(&line, 10.0) - 6.0), 375.0);
    close(62.5 * (height(&line, 30.0) - 6.0), -125.0);
}

#[test]
fn e01_half_span_load() {
    // E01 (published): three-hinged parabola, UDL on half span: H=wL^2/16f, V_A=3wL/8, V_B=wL/8, M=+-wL^2/64 at the
    // quarters. Source: H=M_C0/f: I.A. Karnovsky, O. Lebed, Advanced Methods of Structural Analysis, Springer 2010 (title
    // and authors from memory; page text read), eq.(4.8) p.81. The load lumped in strips at their centres, which leaves
    // the ordinates at strip edges exact.
    let loads: Vec<_> = (0..20).map(|k| (10.0, f64::from(k) + 0.5)).collect();
    let mut p = problem(parabola(40.0, 8.0, 4), down(&loads, 9.0));
    p.support = Some(Support::ThreeHinged);
    p.govern = None;
    let (_, line) = solve(&p);
    let (left, right) = (line.left.unwrap(), line.right.unwrap());
    close(left.horizontal, 125.0);
    close(left.vertical, 150.0);
    close(right.vertical, 50.0);
    close(125.0 * (height(&line, 10.0) - 6.0), 250.0);
    close(125.0 * (height(&line, 30.0) - 6.0), -250.0);
}

fn ring(half_opening: f64, depth: Option<Depth>) -> Problem {
    let mut p = problem(circle(10.0, half_opening), Vec::new());
    p.weight_on_axis = 3.0;
    p.depth = depth;
    p.govern = None;
    p
}

#[test]
fn m02_semicircle_with_weight_on_the_axis() {
    // M02 (published): same [semicircle under self weight, least t/R] with the true line of pressure tangent (centreline
    // weight). Source: G. Cocchetti, E. Rizzi, 'Analytical and numerical analysis on the collapse modes of least-thickness
    // circular masonry arches at decreasing friction', Frattura ed Integrita Strutturale 51 (2020) 356-375, eq.(4) and
    // Table 3. The least ring has its half thickness at the largest |e| of the closest line.
    let (a, line) = solve(&ring(FRAC_PI_2, None));
    assert_eq!((a.kind, a.rule), (SpanKind::Arch, Rule::AxisOnly));
    close(2.0 * line.offset.unwrap().max_abs / 10.0, 0.107426452755);
    close(push(&line) / 30.0, 0.621771511535);
    let proof = line.proof.unwrap();
    assert!(proof.gap < 1e-9, "{proof:?}");
    let s = station(&line, line.offset.unwrap().at.x);
    let angle = s.at.x.atan2(s.at.y).to_degrees().abs();
    let extreme = [0.0, 54.4963425267, 90.0];
    assert!(extreme.iter().any(|a| (angle - a).abs() < 1e-4), "{angle}");
}

#[test]
fn m08_rows_of_weight_on_the_axis() {
    // M08 (derived): least t/R by half-opening angle, three conventions. Source: formulas as M01-M03; table values derived
    // here (published tables of this kind: Cocchetti, Colasante, Rizzi, Appl. Mech. Rev. 64 (2011) - not seen). Its rows
    // CCR: true line of pressure, centreline weight.
    for (degrees, expected) in [
        (45.0_f64, 0.00749609461697),
        (60.0, 0.0228482015796),
        (90.0, 0.107426452755),
        (120.0, 0.326546639952),
    ] {
        let (_, line) = solve(&ring(degrees.to_radians(), None));
        let found = 2.0 * line.offset.unwrap().max_abs / 10.0;
        assert!((found - expected).abs() <= 1e-9 * expected, "{degrees}: {found:.14} {expected:.14}");
        assert!(line.proof.unwrap().gap < 1e-9);
        // As a ring of that depth: the line just touches both edges.
        let (_, line) = solve(&ring(degrees.to_radians(), Some(Depth::Constant(expected * 10.0))));
        close(line.depth_use.unwrap().ratio, 0.5);
    }
}

#[test]
fn string_under_weight_along_the_axis() {
    // The touching curve of the rays keeps M = H v at every station within its stated deviation.
    let (_, line) = solve(&ring(1.0, Some(Depth::Constant(0.5))));
    for s in line.stations.iter().filter(|s| s.at.x.abs() < 8.0) {
        let v = height(&line, s.at.x) - s.at.y;
        assert!((v - s.moment / push(&line)).abs() < 1e-5 * 17.0);
    }
}

/// Half the ratio of the closest line of a ring under its true weight, which is 1/4 where the ring is just thick enough.
fn milankovitch(half_opening: f64, thickness: f64) -> (Analysis, Line) {
    let mut p = problem(circle(10.0, half_opening), Vec::new());
    p.ring_weight = 3.0;
    p.depth = Some(Depth::Constant(10.0 * thickness));
    p.govern = None;
    solve(&p)
}

#[test]
fn m03_and_m08_true_centroids() {
    // M03 (published): same [semicircle, least t/R] with true wedge centroids (Milankovitch 1907), radial joints. Source:
    // N. Makris, H. Alexakis, 'The effect of stereotomy on the shape of the thrust-line and the minimum thickness of
    // semicircular masonry arches', Arch. Appl. Mech. 83 (2013) (journal from memory), abstract. M03b (derived): to 12
    // digits, with hinge and push. Source: closed form, derived. M08 (derived): rows Milankovitch.
    for (degrees, thickness) in [
        (45.0_f64, 0.00749612344837),
        (60.0, 0.0228489099394),
        (90.0, 0.107478038107),
        (120.0, 0.327606507711),
    ] {
        let (_, line) = milankovitch(degrees.to_radians(), thickness);
        close(line.depth_use.unwrap().ratio, 0.5);
    }
    let (a, line) = milankovitch(FRAC_PI_2, 0.107478038107);
    close(push(&line) / (3.0 * 1.07478038107 * 10.0), 0.620881206172);
    close(a.total.y, -3.0 * 1.07478038107 * 10.0 * std::f64::consts::PI);
}

/// Voussoirs of a circular ring of radius 10 and thickness 1.5: centroids, and the horizontal forces of their weight.
fn shaken(count: usize) -> Problem {
    let (radius, t, embrace) = (10.0, 1.5, 157.5_f64.to_radians());
    let mut p = problem(circle(radius, embrace / 2.0), Vec::new());
    p.ring_weight = 2.0;
    p.depth = Some(Depth::Constant(t));
    p.voussoirs = Some(count);
    p.govern = None;
    let a = embrace / count as f64 / 2.0;
    let (r1, r2) = (radius - t / 2.0, radius + t / 2.0);
    let centroid = 2.0 / 3.0 * a.sin() / a * (r2.powi(3) - r1.powi(3)) / (r2 * r2 - r1 * r1);
    let weight = 2.0 * a * radius * t * 2.0;
    for k in 0..count {
        let angle = -embrace / 2.0 + a * (2.0 * k as f64 + 1.0);
        let at = Point::new(centroid * angle.sin(), centroid * angle.cos());
        p.entering.push((k, radius * (angle + embrace / 2.0)));
        p.forces.push(Force { at, force: Vec2::new(weight, 0.0) });
    }
    p.varying = (0..count).collect();
    p
}

#[test]
fn m12_horizontal_body_force() {
    // M12 (from memory): horizontal body force (inclined loads): 7 equal voussoirs, R=10, t/R=0.15, embrace 157.5 deg:
    // mechanism at 0.37 g; straight radial joints. Source: I.J. Oppenheim, 'The masonry arch as a four-link mechanism
    // under base motion', Earthq. Eng. Struct. Dyn. 21 (1992) 1005-1017; recomputed as 0.370009738022 by the primal and
    // the explicit dual of an independent program, 140 joints: 0.3534.
    let a = analyse(&shaken(7)).unwrap();
    let safety = a.safety.unwrap();
    let load = safety.load.unwrap();
    close(load.value.unwrap(), 0.370009738022);
    assert!(load.proof.unwrap().gap < 1e-9);
    close(safety.load_least.unwrap().value.unwrap(), 0.0);
    let mechanism = safety.mechanism.unwrap();
    assert_eq!(mechanism.hinges.len(), 4);
    assert!(mechanism.hinges.windows(2).all(|w| w[0].side != w[1].side), "{mechanism:?}");
    close(-mechanism.work_fixed / mechanism.work_varying, 0.370009738022);
    assert!(mechanism.residual < 1e-9);
    let many = analyse(&shaken(140)).unwrap().safety.unwrap().load.unwrap().value.unwrap();
    assert!((many - 0.3534).abs() < 5e-5, "{many}");
}

#[test]
fn m03b_least_and_greatest_push_meet_at_the_least_thickness() {
    // M03b (derived): Milankovitch value to 12 digits: hinge 54.483974034 deg, h 0.620881206172. Source: closed form,
    // derived. At the least thickness one line is left: least and greatest push fall together.
    let mut p = problem(circle(10.0, FRAC_PI_2), Vec::new());
    p.ring_weight = 1.0;
    p.depth = Some(Depth::Constant(1.07478038107 * (1.0 + 1e-9)));
    p.govern = None;
    p.draw = vec![LineKind::LeastThrust, LineKind::GreatestThrust];
    let a = analyse(&p).unwrap();
    close(a.safety.unwrap().geometric.value.unwrap(), 1.0);
    for line in &a.lines[1..] {
        assert_eq!(line.status, Status::Found, "{:?}", line.reason);
        assert!((push(line) / 10.7478038107 - 0.620881206172).abs() < 1e-6);
        assert!(line.proof.unwrap().gap < 1e-9);
    }
    // A ring too thin for its own weight has no line: an answer.
    p.depth = Some(Depth::Constant(1.07));
    let a = analyse(&p).unwrap();
    assert!(a.safety.unwrap().geometric.value.unwrap() < 1.0);
    for line in &a.lines[1..] {
        assert_eq!(line.status, Status::None);
        assert!(line.reason.as_ref().unwrap().contains("near ("), "{:?}", line.reason);
    }
}

#[test]
fn m06_friction_limits_of_the_semicircle() {
    // M06 (published): friction limits, semicircle (centreline weight): purely rotational for mu>0.395832; mixed down to
    // 0.309215 where t/R=0.200637, h=0.485714; no equilibrium below. Source: G. Cocchetti, E. Rizzi, 'Analytical and
    // numerical analysis on the collapse modes of least-thickness circular masonry arches at decreasing friction',
    // Frattura ed Integrita Strutturale 51 (2020) 356-375, Table 3.
    let least = |thickness: f64, friction: f64| {
        let mut p = problem(circle(10.0, FRAC_PI_2), Vec::new());
        p.weight_on_axis = 1.0;
        p.depth = Some(Depth::Constant(10.0 * thickness));
        p.friction = Some(friction);
        p.govern = Some(LineKind::LeastThrust);
        analyse(&p).unwrap().lines.remove(0)
    };
    let (thin, rotational) = (0.107426452755 * (1.0 + 1e-8), 0.395832038138);
    assert_eq!(least(thin, rotational * (1.0 + 1e-6)).status, Status::Found);
    assert_eq!(least(thin, rotational * (1.0 - 1e-6)).status, Status::None);
    let (thick, mixed) = (0.200637318842, 0.30921544433);
    let line = least(thick * (1.0 + 1e-8), mixed * (1.0 + 1e-8));
    assert_eq!(line.status, Status::Found, "{:?}", line.reason);
    assert!((push(&line) / 10.0 - 0.485714484142).abs() < 1e-6);
    assert_eq!(least(thick, mixed * (1.0 - 1e-6)).status, Status::None);
    assert_eq!(least(thick * 3.0, mixed * (1.0 - 1e-6)).status, Status::None);
}

#[test]
fn k01_to_k04_stress_in_a_section() {
    use thrustmark::statics::stress::{moment_capacity, thrust_capacity, uncracked, without_tension};
    // K01 (from memory): rectangle d x b: kern |e|<=d/6; at e=d/6 the edge stress is 2N/A and the other edge 0. Source:
    // middle-third rule.
    let s = uncracked(100.0, 10.0, 0.6, 1.0).unwrap();
    close(s.extrados, 333.333333333);
    assert!(s.intrados.abs() < 1e-9);
    // K02 (from memory): no tension, e>d/6: triangular block of length 3(d/2-e), peak 2N/(3b(d/2-e)); at e=d/3 peak =
    // 4N/(bd). Source: closed form, derived.
    let s = without_tension(100.0, 20.0, 0.6, 1.0).unwrap();
    close(s.extrados, 666.666666667);
    close(s.extrados, 4.0 * 100.0 / 0.6);
    // K03 (from memory): moment-thrust capacity, rectangular stress block f: M=N(d/2-N/(2bf)); summit M=b f d^2/8 at N=b f
    // d/2; e_max=d/2-N/(2bf). Source: closed form, derived.
    close(moment_capacity(600.0, 0.6, 1.0, 5000.0).unwrap(), 144.0);
    close(moment_capacity(1500.0, 0.6, 1.0, 5000.0).unwrap(), 225.0);
    // K04 (from memory): same law as plain concrete N_Rd=eta f_cd b h(1-2e/h) with eta=1. Source: EN 1992-1-1:2004, 12.6.1
    // (3), Eq. (12.2).
    close(thrust_capacity(0.24, 0.6, 1.0, 5000.0).unwrap(), 600.0);
}

#[test]
fn m14_crushing_of_a_flat_arch() {
    // M14 (derived): crushing, closed form: weightless flat (jack) arch of depth d between rigid abutments, one load at
    // mid-span: H(d-H/(bf))=PL/4, greatest P=f b d^2/L at H=f b d/2. Source: closed form, derived. The axis here rises by four
    // hundredths of a micrometre, for an axis without any rise is refused: that much is added to the depth.
    let mut p = problem(polyline(&[(0.0, 0.0), (2.0, 4e-8), (4.0, 0.0)]), down(&[(1.0, 2.0)], 1.0));
    p.depth = Some(Depth::Constant(0.6));
    p.strength = Some(5000.0);
    p.varying = vec![0];
    p.govern = None;
    let safety = analyse(&p).unwrap().safety.unwrap();
    let load = safety.load.unwrap();
    let found = load.value.unwrap();
    assert!((found / 450.0 - 1.0).abs() < 2e-7, "{load:?}");
    assert!(load.proof.unwrap().gap < 1e-7);
    assert!(safety.mechanism.unwrap().residual < 1e-7);
    // At unlimited strength everything that acts varies: no factor.
    p.strength = None;
    assert_eq!(analyse(&p).unwrap().safety.unwrap().load.unwrap().status, Status::Refused);
}

#[test]
fn m03_m08_least_thickness() {
    // M03, M03b, M08 rows Milankovitch: the least thickness itself, from a ring drawn thicker, to nine digits.
    for (degrees, thickness) in [
        (45.0_f64, 0.00749612344837),
        (60.0, 0.0228489099394),
        (90.0, 0.107478038107),
        (120.0, 0.327606507711),
    ] {
        let mut p = problem(circle(10.0, degrees.to_radians()), Vec::new());
        p.ring_weight = 3.0;
        p.depth = Some(Depth::Constant(1.0));
        let least = least_thickness(&p).unwrap();
        assert!(least.proof.unwrap().gap < 1e-9);
        assert!((least.value.unwrap() / 10.0 / thickness - 1.0).abs() < 1e-9, "{degrees}: {least:?}");
    }
}
