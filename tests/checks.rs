//! The table of outside values in docs/checks.md: every one computed anew, held to what it is owed, and written down.
//!
//! `THRUSTMARK_WRITE_DOCS=1 cargo test --test checks` writes the page.
#![allow(clippy::unwrap_used)]

mod support;

use std::f64::consts::{FRAC_PI_2, PI};
use std::fmt::Write as _;

use support::{circle, down, height, parabola, polyline, problem, push, solve, station};
use thrustmark::geometry::{Point, Vec2};
use thrustmark::statics::stress::{moment_capacity, thrust_capacity, uncracked, without_tension};
use thrustmark::statics::{
    Depth, Effects, Flexibility, Force, Line, LineKind, Place, Problem, Slender, Support, analyse, elastic,
    least_thickness,
};

/// One value: what it is, what the source says, what was computed, and the relative difference that is owed.
struct Value {
    id: &'static str,
    what: String,
    expected: f64,
    computed: f64,
    owed: f64,
}

#[derive(Default)]
struct Table {
    values: Vec<Value>,
    sources: Vec<(&'static str, &'static str)>,
}

/// Closed forms and linear programs; elastic lines; conic programs and what is lumped in strips.
const EXACT: f64 = 1e-9;
const ELASTIC: f64 = 1e-6;

impl Table {
    fn source(&mut self, id: &'static str, source: &'static str) {
        self.sources.push((id, source));
    }

    fn add(&mut self, id: &'static str, what: impl Into<String>, expected: f64, computed: f64, owed: f64) {
        self.values.push(Value { id, what: what.into(), expected, computed, owed });
    }
}

const THREE: [(f64, f64); 3] = [(30.0, 6.0), (50.0, 14.0), (20.0, 25.0)];

fn funiculars(t: &mut Table) {
    t.source("F01", "derived: statics (Varignon funicular)");
    let loads: Vec<_> = (1..8).map(|k| (100.0, 4.0 * f64::from(k))).collect();
    let (_, line) = solve(&problem(parabola(32.0, 8.0, 8), down(&loads, 9.0)));
    t.add("F01", "H", 400.0, push(&line), EXACT);
    t.add("F01", "y1", 3.5, height(&line, 4.0), EXACT);
    t.add("F01", "y3", 7.5, height(&line, 12.0), EXACT);
    t.add("F01", "end thrust", 531.507290637, push(&line).hypot(line.left.unwrap().vertical), EXACT);
    t.source("F02", "derived: statics");
    let loads: Vec<_> = (1..7).map(|k| (50.0, 5.0 * f64::from(k))).collect();
    let (_, line) = solve(&problem(polyline(&[(0.0, 0.0), (17.5, 6.0), (35.0, 0.0)]), down(&loads, 9.0)));
    t.add("F02", "H", 250.0, push(&line), EXACT);
    for (k, y) in [(1, 3.0), (2, 5.0), (3, 6.0)] {
        t.add("F02", format!("y{k}"), y, height(&line, 5.0 * f64::from(k)), EXACT);
    }
    t.source("F03", "derived: statics");
    let loads: Vec<_> = (0..8).map(|k| (40.0, 3.0 * f64::from(k) + 1.5)).collect();
    let (_, line) = solve(&problem(polyline(&[(0.0, 0.0), (12.0, 5.0), (24.0, 0.0)]), down(&loads, 9.0)));
    t.add("F03", "H", 192.0, push(&line), EXACT);
    t.add("F03", "y1", 1.25, height(&line, 1.5), EXACT);
    t.add("F03", "y4", 5.0, height(&line, 10.5), EXACT);
    t.source("F04", "derived: exact rational solution");
    let axis = polyline(&[(0.0, 0.0), (12.0, 7.0), (30.0, 3.0)]);
    let mut p = problem(axis, down(&[(60.0, 5.0), (80.0, 10.0), (100.0, 20.0), (40.0, 25.0)], 9.0));
    p.through = Some([(0.0, 0.0), (12.0, 7.0), (30.0, 3.0)].map(Point::from));
    let (_, line) = solve(&p);
    t.add("F04", "H", 5700.0 / 29.0, push(&line), EXACT);
    t.add("F04", "V_A", 14180.0 / 87.0, line.left.unwrap().vertical, EXACT);
    t.add("F04", "V_B", 117.011494253, line.right.unwrap().vertical, EXACT);
    t.source("F06", "from memory: any statics text, e.g. S. Timoshenko, D. Young, Theory of Structures");
    let loads: Vec<_> = (0..80).map(|k| (10.0, 0.5 * f64::from(k) + 0.25)).collect();
    let (_, line) = solve(&problem(parabola(40.0, 8.0, 8), down(&loads, 9.0)));
    t.add("F06", "H", 500.0, push(&line), EXACT);
    t.add("F06", "y(10)", 6.0, height(&line, 10.0), EXACT);
    t.add(
        "F06",
        "end thrust at support",
        640.312423743,
        push(&line).hypot(line.left.unwrap().vertical),
        EXACT,
    );
    t.source("F07", "derived: statics");
    let axis = polyline(&[(0.0, 0.0), (10.0, 6.0), (40.0, 0.0)]);
    let (_, line) = solve(&problem(axis, down(&[(100.0, 10.0)], 9.0)));
    t.add("F07", "H", 125.0, push(&line), EXACT);
    t.add("F07", "V_A", 75.0, line.left.unwrap().vertical, EXACT);
    t.source("F12", "derived: graphic statics");
    for (f, h) in [(4.0, 129.0), (8.0, 64.5), (16.0, 32.25)] {
        let axis = polyline(&[(0.0, 0.0), (14.0, f), (30.0, 0.0)]);
        t.add("F12", format!("H(f={f})"), h, push(&solve(&problem(axis, down(&THREE, 20.0))).1), EXACT);
    }
    t.source("F13", "from memory: K. Culmann, Die graphische Statik (1866)");
    let side = |h: f64, v: f64, m: f64, k: usize| {
        let point = |x: f64| {
            let loads: f64 = THREE.iter().filter(|l| l.1 < x).map(|l| l.0 * (x - l.1)).sum();
            Point::new(x, (m + v * x - loads) / h)
        };
        let mut p = problem(parabola(30.0, 8.0, 10), down(&THREE, 20.0));
        p.through = Some([1.0, 16.0, 29.0].map(point));
        let line = solve(&p).1;
        let (a, b) = (line.vertices[k], line.vertices[k + 1]);
        let slope = (b.y - a.y) / (b.x - a.x);
        (slope, a.y - slope * a.x)
    };
    let meet = |k: usize| {
        let ((m, c), (n, d)) = (side(40.0, 55.0, 0.0, k), side(70.0, 35.0, 130.0, k));
        let x = (d - c) / (m - n);
        Point::new(x, m * x + c)
    };
    let slope = |k: usize| (meet(k).y - meet(0).y) / (meet(k).x - meet(0).x);
    t.add("F13", "slope of the line of intersections", -2.0 / 3.0, slope(2), EXACT);
    t.add("F13", "collinearity: slope to 4th point", -2.0 / 3.0, slope(3), EXACT);
    t.source("F14", "derived: graphic statics");
    let y = 1.0 + (74.0 * 14.0 - 30.0 * 8.0) / 200.0;
    let (_, line) = solve(&problem(polyline(&[(0.0, 1.0), (14.0, y), (30.0, 4.0)]), down(&THREE, 20.0)));
    t.add("F14", "V_A", 74.0, line.left.unwrap().vertical, EXACT);
    t.source("F17", "from memory: H.T. Eddy, Researches in Graphical Statics (1878)");
    let mut p = problem(parabola(40.0, 8.0, 4), down(&[(100.0, 10.0)], 9.0));
    (p.govern, p.support) = (None, Some(Support::ThreeHinged));
    let (_, line) = solve(&p);
    t.add("F17", "H", 62.5, push(&line), EXACT);
    t.add("F17", "M(10)", 375.0, station(&line, 10.0).moment, EXACT);
    t.add("F17", "H*offset(10)", 375.0, 62.5 * station(&line, 10.0).vertical_offset.unwrap(), EXACT);
    t.add("F17", "M(30)", -125.0, 62.5 * (height(&line, 30.0) - 6.0), EXACT);
    t.source("D01", "from memory: e.g. rolling-load chapters (0.0962, 0.211 L)");
    let k = (3.0 - 3.0_f64.sqrt()) / 6.0;
    let rolling = |x: f64, dead: f64| {
        let mut loads: Vec<_> = (0..4000).map(|i| (dead * 0.01, 0.01 * (f64::from(i) + 0.5))).collect();
        loads.retain(|_| dead > 0.0);
        loads.extend([(100.0, x), (0.0, 10.0)]);
        let mut p = problem(parabola(40.0, 8.0, 4000), down(&loads, 9.0));
        p.through = Some([(0.0, 0.0), (20.0, 8.0), (40.0, 0.0)].map(Point::from));
        solve(&p).1
    };
    let near = |line: &Line, x: f64| *line.stations.iter().find(|s| (s.at.x - x).abs() < 1e-6).unwrap();
    t.add(
        "D01",
        "M_max/PL",
        0.0962250448649,
        near(&rolling(k * 40.0, 0.0), k * 40.0).moment / 4000.0,
        ELASTIC,
    );
    let offset = |x: f64, at: f64| near(&rolling(x, 10.0), at).vertical_offset.unwrap();
    t.add("D01", "offset under load", 1.27100562517, offset(k * 40.0, k * 40.0), ELASTIC);
    t.add("D01", "offset at 10 m, load at crown", -2.0 / 3.0, offset(20.0, 10.0), ELASTIC);
}

/// The root of a function that changes its sign once.
fn root(mut a: f64, mut b: f64, f: impl Fn(f64) -> f64) -> f64 {
    for _ in 0..60 {
        let c = f64::midpoint(a, b);
        if f(c) * f(a) > 0.0 { a = c } else { b = c }
    }
    f64::midpoint(a, b)
}

fn catenaries(t: &mut Table) {
    t.source("F08", "from memory: e.g. H.M. Irvine, Cable Structures, MIT Press 1981, ch.1");
    let (l, f) = (100.0, 20.0);
    let c = root(20.0, 500.0, |c| c * ((l / (2.0 * c)).cosh() - 1.0) - f);
    let y = |x: f64| f - c * (((x - l / 2.0) / c).cosh() - 1.0);
    let parts = 4000;
    let points: Vec<_> =
        (0..=parts).map(|k| l * f64::from(k) / f64::from(parts)).map(|x| (x, y(x))).collect();
    let mut p = problem(polyline(&points), down(&[(0.0, 25.0)], 30.0));
    p.weight_on_axis = 1.0;
    let (_, line) = solve(&p);
    t.add("F08", "c=H/q", 65.5862586753, push(&line), ELASTIC);
    t.add("F08", "length", 109.971820882, p.axis.length(), ELASTIC);
    let quarter = line.stations.iter().find(|s| (s.at.x - 25.0).abs() < 1e-6).unwrap();
    t.add(
        "F08",
        "y at quarter span",
        15.1773109927,
        quarter.at.y + quarter.vertical_offset.unwrap(),
        ELASTIC,
    );
    t.source("F09", "derived: closed form, derived");
    // A load uniform in plan has the parabola for its funicular: strips on both sides of the place that is asked for.
    let at = 50.0 + 35.4401477028;
    let strips = |from: f64, to: f64| {
        let n = 2000;
        let w = (to - from) / f64::from(n);
        (0..n).map(move |k| (w, from + w * (f64::from(k) + 0.5)))
    };
    let mut loads: Vec<_> = strips(0.0, at).chain(strips(at, l)).collect();
    loads.push((0.0, at));
    let (_, line) = solve(&problem(polyline(&points), down(&loads, 30.0)));
    let gap =
        |x: f64| -line.stations.iter().find(|s| (s.at.x - x).abs() < 1e-5).unwrap().vertical_offset.unwrap();
    t.add("F09", "gap", 0.237558244485, gap(at), 2e-6);
    t.source("F11", "from memory: W.J.M. Rankine, A Manual of Applied Mechanics (transformed catenary)");
    let (gamma, y0, y1, half) = (20.0, 1.0, 5.0_f64, 10.0);
    let c = half / (y1 / y0).acosh();
    t.add("F11", "c", 4.36218018307, c, EXACT);
    // Strips of the fill with their own weights and centroids; their edges fall on crown and quarters.
    let n = 400;
    let mut loads: Vec<_> = (0..n)
        .map(|k| {
            let (a, b) = (
                -half + 2.0 * half * f64::from(k) / f64::from(n),
                -half + 2.0 * half * f64::from(k + 1) / f64::from(n),
            );
            let area = |x: f64| c * (x / c).sinh();
            let first = |x: f64| c * x * (x / c).sinh() - c * c * (x / c).cosh();
            let weight = gamma * y0 * (area(b) - area(a));
            (weight, (first(b) - first(a)) / (area(b) - area(a)) + half)
        })
        .collect();
    loads.push((0.0, 5.0));
    let (_, line) =
        solve(&problem(polyline(&[(0.0, 0.0), (5.0, 3.0), (10.0, 4.0), (20.0, 0.0)]), down(&loads, 9.0)));
    t.add("F11", "H", 380.572318991, push(&line), EXACT);
    let s = station(&line, 5.0);
    t.add("F11", "y(quarter) above springing", 3.26794919243, s.at.y + s.vertical_offset.unwrap(), EXACT);
}

const SPAN: f64 = 40.0;
const RISE: f64 = 8.0;

fn secant(p: &Place) -> Flexibility {
    Flexibility { bending: p.tangent.x, axial: 0.0 }
}

fn constant(_: &Place) -> Flexibility {
    Flexibility { bending: 1.0, axial: 0.0 }
}

fn elastic_line(p: Problem, support: Support, flexibility: &dyn Fn(&Place) -> Flexibility) -> Line {
    let p = Problem { support: Some(support), govern: Some(LineKind::Elastic), ..p };
    elastic(&p, flexibility).unwrap().lines.remove(0)
}

fn uniform(q: f64, from: f64, to: f64) -> Vec<Force> {
    let width = (to - from) / 4000.0;
    down(&(0..4000).map(|k| (q * width, from + width * (f64::from(k) + 0.5))).collect::<Vec<_>>(), 20.0)
}

fn elastic_arches(t: &mut Table) {
    use Support::{Hingeless, ThreeHinged, TwoHinged};
    let parabolic = |forces| problem(parabola(SPAN, RISE, 4000), forces);
    let at = |k: f64| parabolic(down(&[(1.0, k * SPAN)], 20.0));
    let moment = |l: &Line, x: f64| l.stations.iter().find(|s| (s.at.x - x).abs() < 1e-6).unwrap().moment;
    let karnovsky = "published: I.A. Karnovsky, O. Lebed, Advanced Methods of Structural Analysis, Springer 2010 (title and \
                     authors from memory; page text read)";
    t.source("E01", karnovsky);
    let half: Vec<_> = (0..20).map(|k| (10.0, f64::from(k) + 0.5)).collect();
    let mut p = problem(parabola(40.0, 8.0, 4), down(&half, 9.0));
    (p.support, p.govern) = (Some(ThreeHinged), None);
    let (_, line) = solve(&p);
    t.add("E01", "H", 125.0, push(&line), EXACT);
    t.add("E01", "V_A", 150.0, line.left.unwrap().vertical, EXACT);
    t.add("E01", "V_B", 50.0, line.right.unwrap().vertical, EXACT);
    t.add("E01", "M(10)", 250.0, 125.0 * (height(&line, 10.0) - 6.0), EXACT);
    t.add("E01", "M(30)", -250.0, 125.0 * (height(&line, 30.0) - 6.0), EXACT);
    t.source("E02", "from memory: textbook formula; Timoshenko & Young, Theory of Structures");
    t.source("E03", "from memory: textbook formula, from memory");
    for (id, k, h) in
        [("E02", 0.1, 0.0613125), ("E02", 0.25, 0.13916015625), ("E02", 0.4, 0.186), ("E03", 0.5, 0.1953125)]
    {
        let found = push(&elastic_line(at(k), TwoHinged, &secant)) * RISE / SPAN;
        t.add(id, format!("H/(PL/f) k={k}"), h, found, ELASTIC);
    }
    t.source("E04", "from memory: textbook formula, from memory");
    t.source("E05", "derived: integral of E02");
    let h = |forces| push(&elastic_line(parabolic(forces), TwoHinged, &secant));
    t.add("E04", "full", 250.0, h(uniform(10.0, 0.0, SPAN)), ELASTIC);
    t.add("E04", "half", 125.0, h(uniform(10.0, 0.0, SPAN / 2.0)), ELASTIC);
    let mut triangle = uniform(10.0, 0.0, SPAN);
    triangle.iter_mut().for_each(|f| f.force.y *= f.at.x / SPAN);
    t.add("E04", "triangle", 125.0, h(triangle), ELASTIC);
    t.add("E05", "H", 51.795, h(uniform(10.0, 0.0, 12.0)), ELASTIC);
    t.source("E06", "from memory: textbook formulas");
    t.source("E18", "derived: closed form, derived");
    let soft = |p: &Place| Flexibility { bending: p.tangent.x / (3e7 * 0.1), axial: 0.0 };
    let moved = |support, effects| {
        let with = |effects| {
            let p = Problem { effects, ..parabolic(uniform(100.0, 0.0, SPAN)) };
            push(&elastic_line(p, support, &soft))
        };
        with(effects) - with(Effects::default())
    };
    let warm = Effects { strain: 1e-5 * 30.0, ..Effects::default() };
    t.add("E06", "two-hinged", 26.3671875, moved(TwoHinged, warm), ELASTIC);
    t.add("E06", "hingeless", 158.203125, moved(Hingeless, warm), ELASTIC);
    let right = |right| Effects { right, ..Effects::default() };
    t.add("E18", "H spread", -131.8359375, moved(Hingeless, right([0.01, 0.0, 0.0])), ELASTIC);
    t.add("E18", "H rotation", 70.3125, moved(Hingeless, right([0.0, 0.0, 0.001])), ELASTIC);
    t.source("E07", karnovsky);
    t.source("E08", karnovsky);
    for (u, h, ma, ra, mc) in [
        (0.05, 0.0084609375, -0.039484375, 0.99275, -0.0015703125),
        (0.10, 0.030375, -0.06075, 0.972, -0.005125),
        (0.15, 0.0609609375, -0.067734375, 0.93925, -0.0090703125),
        (0.20, 0.096, -0.064, 0.896, -0.012),
        (0.25, 0.1318359375, -0.052734375, 0.84375, -0.0126953125),
        (0.30, 0.165375, -0.03675, 0.784, -0.010125),
        (0.35, 0.1940859375, -0.018484375, 0.71825, -0.0034453125),
        (0.40, 0.216, 0.0, 0.648, 0.008),
        (0.45, 0.2297109375, 0.017015625, 0.57475, 0.0246796875),
        (0.50, 0.234375, 0.03125, 0.5, 0.046875),
    ] {
        let l = elastic_line(at(u), Hingeless, &secant);
        t.add("E07", format!("H/(L/f) u={u:.2}"), h, push(&l) * RISE / SPAN, ELASTIC);
        t.add("E07", format!("M_A/L u={u:.2}"), ma, l.reaction.unwrap().moment / SPAN, ELASTIC);
        t.add("E07", format!("R_A u={u:.2}"), ra, l.left.unwrap().vertical, ELASTIC);
        t.add("E07", format!("M_C/L u={u:.2}"), mc, moment(&l, SPAN / 2.0) / SPAN, ELASTIC);
    }
    let l = elastic_line(parabolic(uniform(1.0, 0.0, SPAN / 2.0)), Hingeless, &secant);
    t.add("E08", "R_A/qL", 0.40625, l.left.unwrap().vertical / SPAN, ELASTIC);
    t.add("E08", "H/(qL^2/f)", 0.0625, push(&l) * RISE / (SPAN * SPAN), ELASTIC);
    t.add("E08", "M_A/qL^2", -0.015625, l.reaction.unwrap().moment / (SPAN * SPAN), ELASTIC);
    let l = elastic_line(at(0.5), Hingeless, &secant);
    t.add("E08", "H/(PL/f)", 0.234375, push(&l) * RISE / SPAN, ELASTIC);
    t.add("E08", "M_A/PL", 0.03125, l.reaction.unwrap().moment / SPAN, ELASTIC);
    t.add("E08", "M_C/PL", 0.046875, moment(&l, SPAN / 2.0) / SPAN, ELASTIC);
    t.source("E09", "from memory: textbook formula, from memory");
    t.source("E10", "from memory: textbook formulas; own weight derived here");
    let half_circle = |forces, own: f64| {
        let mut p = problem(circle(10.0, FRAC_PI_2), forces);
        p.weight_on_axis = own;
        p
    };
    let h = |p| push(&elastic_line(p, TwoHinged, &constant));
    t.add("E09", "H/P", 1.0 / PI, h(half_circle(down(&[(100.0, 0.0)], 20.0), 0.0)) / 100.0, EXACT);
    let loaded = half_circle(down(&[(100.0, -10.0 * 40_f64.to_radians().cos())], 20.0), 10.0);
    t.add("E10", "H/P", 0.131517977257, (h(loaded) - 50.0) / 100.0, EXACT);
    t.add("E10", "UDL", 42.4413181578, h(half_circle(uniform(10.0, -10.0, 10.0), 0.0)), ELASTIC);
    t.add("E10", "own weight", 50.0, h(half_circle(Vec::new(), 10.0)), EXACT);
    t.source(
        "E11",
        "from memory: W.C. Young, R.G. Budynas, Roark's Formulas for Stress and Strain, 7th ed. 2002, Table 9.3 (formerly Table \
         18) cases for both ends fixed, 0.4591",
    );
    let l = elastic_line(half_circle(down(&[(1.0, 0.0)], 20.0), 0.0), Hingeless, &constant);
    t.add("E11", "H/P", 0.459138492566, push(&l), EXACT);
    t.add("E11", "M_end/PR", 0.110606528806, l.reaction.unwrap().moment / 10.0, EXACT);
    t.add("E11", "M_crown/PR", 0.15146803624, moment(&l, 0.0) / 10.0, EXACT);
    t.source("E13", "derived: closed form, derived");
    let axis = circle(50.0, 0.6_f64.asin());
    let l = elastic_line(problem(axis, down(&[(200.0, 0.0)], 90.0)), TwoHinged, &constant);
    t.add("E13", "H", 228.966693043, push(&l), EXACT);
    t.add("E13", "M_crown", 710.333069574, moment(&l, 0.0), EXACT);
    t.source("E15", "derived: closed form, derived");
    let h = push(&elastic_line(at(0.5), TwoHinged, &constant)) * RISE / SPAN;
    t.add("E15", "H/(PL/f)", 0.194030287862, h, ELASTIC);
    t.add("E15", "ratio to 25/128", 0.993435073856, h / (25.0 / 128.0), ELASTIC);
    t.source("E17", "derived: closed form, derived");
    let short = |p: &Place| Flexibility { bending: p.tangent.x, axial: 1.0 / 12.0 };
    t.add(
        "E17",
        "H",
        246.031402261,
        push(&elastic_line(parabolic(uniform(10.0, 0.0, SPAN)), Hingeless, &short)),
        ELASTIC,
    );
    t.source("E20", "from memory: classical deck-stiffening rule, from memory");
    let mut p = problem(parabola(60.0, 9.0, 4000), uniform(10.0, 0.0, 30.0));
    p.forces.extend(down(&[(0.0, 15.0)], 20.0));
    p.varying = (0..p.forces.len()).collect();
    p.slender = Some(Slender { imperfection: 0.0, deck: 3e7 * 0.06 });
    let soft = |p: &Place| Flexibility { bending: p.tangent.x / (3e7 * 0.02), axial: 0.0 };
    let l = elastic_line(p, TwoHinged, &soft);
    let i = l.stations.iter().position(|s| (s.at.x - 15.0).abs() < 1e-6).unwrap();
    let b = l.bending.as_ref().unwrap();
    t.add("E20", "total M = qL^2/64", 562.5, l.stations[i].moment, ELASTIC);
    let share = b.moments[i][0] / b.amplification / l.stations[i].moment;
    t.add("E20", "arch share at quarter point", 0.25, share, ELASTIC);
    t.source(
        "E21",
        "published: M.M. Reda Taha, N.G. Shrive, 'Analysis of Fixed End Arches', Example 1 (course sheet); its 16 slices are \
         0.04% low on H, the exact value counts",
    );
    let chords = 4000;
    let mut forces = uniform(12.0, 0.0, 16.0);
    for w in 0..chords {
        let (a, b) = (16.0 * f64::from(w) / f64::from(chords), 16.0 * f64::from(w + 1) / f64::from(chords));
        let x = f64::midpoint(a, b);
        let slope = 1.0 - x / 8.0;
        let sec = (1.0 + slope * slope).sqrt();
        forces.extend(down(&[(23.0 * 0.4 * sec.cbrt() * sec * (b - a), x)], 20.0));
    }
    let l = elastic_line(problem(parabola(16.0, 4.0, 4000), forces), Hingeless, &secant);
    t.add("E21", "H", 176.280882384, push(&l), ELASTIC);
    t.add("E21", "V", 184.684388129, l.left.unwrap().vertical, ELASTIC);
    t.add("E21", "M_abutment", -6.82654098083, l.reaction.unwrap().moment, 2e-5);
}

fn rings(t: &mut Table) {
    let ring = |degrees: f64, depth: f64| {
        let mut p = problem(circle(10.0, degrees.to_radians()), Vec::new());
        p.govern = Some(LineKind::Closest);
        p.depth = Some(Depth::Constant(depth));
        p
    };
    let cocchetti = "published: G. Cocchetti, E. Rizzi, 'Analytical and numerical analysis on the collapse modes of \
                     least-thickness circular masonry arches at decreasing friction', Frattura ed Integrita Strutturale 51 (2020) \
                     356-375, eq.(4) and Table 3";
    let makris = "published: N. Makris, H. Alexakis, 'The effect of stereotomy on the shape of the thrust-line and the minimum \
                  thickness of semicircular masonry arches', Arch. Appl. Mech. 83 (2013) (journal from memory), abstract";
    t.source("M02", cocchetti);
    t.source("M03", makris);
    t.source("M03b", "derived: closed form, derived");
    t.source(
        "M08",
        "derived: formulas as M01-M03; table values derived here (published tables of this kind: Cocchetti, Colasante, Rizzi, \
         Appl. Mech. Rev. 64 (2011) - not seen)",
    );
    let on_axis = |degrees: f64| {
        let mut p = ring(degrees, 1.0);
        (p.depth, p.weight_on_axis) = (None, 3.0);
        solve(&p).1
    };
    let line = on_axis(90.0);
    t.add("M02", "t/R", 0.107426452755, 2.0 * line.offset.unwrap().max_abs / 10.0, EXACT);
    t.add("M02", "h", 0.621771511535, push(&line) / 30.0, EXACT);
    let hinge = line
        .stations
        .iter()
        .filter(|s| (s.eccentricity.unwrap().abs() / line.offset.unwrap().max_abs - 1.0).abs() < 1e-9)
        .map(|s| s.at.x.atan2(s.at.y).to_degrees().abs())
        .rfind(|a| *a > 1.0 && *a < 89.0);
    if let Some(angle) = hinge {
        t.add("M02", "hinge deg", 54.4963425267, angle, ELASTIC);
    }
    for (degrees, ccr, milankovitch) in [
        (45.0, 0.00749609461697, 0.00749612344837),
        (60.0, 0.0228482015796, 0.0228489099394),
        (90.0, 0.107426452755, 0.107478038107),
        (120.0, 0.326546639952, 0.327606507711),
    ] {
        let found = 2.0 * on_axis(degrees).offset.unwrap().max_abs / 10.0;
        t.add("M08", format!("half opening {degrees}: CCR t/R"), ccr, found, EXACT);
        let mut p = ring(degrees, 1.0);
        p.ring_weight = 3.0;
        let least = least_thickness(&p).unwrap().value.unwrap() / 10.0;
        t.add("M08", format!("half opening {degrees}: Milankovitch t/R"), milankovitch, least, EXACT);
        if (degrees - 90.0_f64).abs() < 1e-9 {
            t.add("M03", "t/R", 0.1075, (least * 1e4).round() / 1e4, EXACT);
            t.add("M03b", "t/R", 0.107478038107, least, EXACT);
            p.depth = Some(Depth::Constant(10.0 * least));
            let h = push(&solve(&p).1) / (3.0 * 100.0 * least);
            t.add("M03b", "h", 0.620881206172, h, EXACT);
        }
    }
    t.source("M05", makris);
    t.add("M05", "t/R", 0.111660326556, ring_about_a_catenary(), ELASTIC);
    t.source("M06", cocchetti);
    let least = |thickness: f64, friction: Option<f64>| {
        let mut p = ring(90.0, 10.0 * thickness);
        (p.weight_on_axis, p.friction, p.govern) = (1.0, friction, Some(LineKind::LeastThrust));
        analyse(&p).unwrap().lines.remove(0)
    };
    // The one line of the thinnest ring asks this much friction of its steepest joint.
    let asked = on_axis(90.0).stations.iter().map(|s| s.shear.abs() / s.thrust).fold(0.0, f64::max);
    t.add("M06", "mu_rm", 0.395832038138, asked, ELASTIC);
    let line = least(0.200637318842 * (1.0 + 1e-9), Some(0.30921544433 * (1.0 + 1e-9)));
    t.add("M06", "h", 0.485714484142, push(&line) / 10.0, ELASTIC);
    // Below that coefficient no ring stands, and at it none that is thinner.
    let found =
        |thickness, friction| f64::from(u8::from(least(thickness, Some(friction)).reaction.is_some()));
    t.add(
        "M06",
        "a line at mu_ms and t/R",
        1.0,
        found(0.200637318842 * (1.0 + 1e-8), 0.30921544433 * (1.0 + 1e-8)),
        EXACT,
    );
    t.add(
        "M06",
        "a line at mu_ms less 1e-6",
        0.0,
        found(0.200637318842, 0.30921544433 * (1.0 - 1e-6)),
        EXACT,
    );
    t.add(
        "M06",
        "a line at t/R less 1e-6",
        0.0,
        found(0.200637318842 * (1.0 - 1e-6), 0.30921544433 * (1.0 + 1e-9)),
        EXACT,
    );
    let line = least(0.200637318842 * (1.0 + 1e-9), Some(0.30921544433 * (1.0 + 1e-9)));
    // Where the line slides: S / N of the weight on the axis at the angle a from the crown.
    let r = line.reaction.unwrap();
    let sliding = |a: f64| {
        let v = r.vertical - 10.0 * (FRAC_PI_2 - a);
        (r.horizontal * a.sin() - v * a.cos()).abs() / (r.horizontal * a.cos() + v * a.sin())
    };
    let top = root(0.2, 0.8, |a| sliding(a + 1e-6) - sliding(a - 1e-6));
    t.add("M06", "sliding joint deg", 28.636194678, top.to_degrees(), 1e-4);
    t.source("M04", makris);
    let vertical = least_with_vertical_joints();
    t.add("M04", "t/R", 0.109460703804, vertical, EXACT);
    t.source("M11", "derived: four-hinge argument of A.J.S. Pippard / J. Heyman; closed form derived here");
    for (k, p, h) in [(0.2, 120.0, 800.0 / 3.0), (0.25, 124.223602484, 279.50310559)] {
        let (factor, push) = parabola_with_vertical_joints(k);
        t.add("M11", format!("P k={k}"), p, factor, EXACT);
        t.add("M11", format!("H k={k}"), h, push, EXACT);
    }
    let around = [0.18, 0.19, 0.21, 0.22].map(|k| parabola_with_vertical_joints(k).0);
    let worst = around.iter().fold(parabola_with_vertical_joints(0.2).0, |m, p| m.min(*p));
    t.add("M11", "P at worst k", 120.0, worst, EXACT);
    t.source(
        "M12",
        "from memory: I.J. Oppenheim, 'The masonry arch as a four-link mechanism under base motion', Earthq. Eng. Struct. Dyn. \
         21 (1992) 1005-1017",
    );
    let shaken = {
        let (radius, thick, embrace, count) = (10.0, 1.5, 157.5_f64.to_radians(), 7);
        let mut p = problem(circle(radius, embrace / 2.0), Vec::new());
        (p.ring_weight, p.depth, p.voussoirs, p.govern) =
            (2.0, Some(Depth::Constant(thick)), Some(count), None);
        let a = embrace / count as f64 / 2.0;
        let (r1, r2) = (radius - thick / 2.0, radius + thick / 2.0);
        let centroid = 2.0 / 3.0 * a.sin() / a * (r2.powi(3) - r1.powi(3)) / (r2 * r2 - r1 * r1);
        for k in 0..count {
            let angle = -embrace / 2.0 + a * (2.0 * k as f64 + 1.0);
            p.entering.push((k, radius * (angle + embrace / 2.0)));
            let at = Point::new(centroid * angle.sin(), centroid * angle.cos());
            p.forces.push(Force { at, force: Vec2::new(2.0 * a * radius * thick * 2.0, 0.0) });
        }
        p.varying = (0..count).collect();
        p
    };
    t.add(
        "M12",
        "a/g",
        0.370009738022,
        analyse(&shaken).unwrap().safety.unwrap().load.unwrap().value.unwrap(),
        EXACT,
    );
    t.source("M14", "derived: closed form, derived");
    let mut p = problem(polyline(&[(0.0, 0.0), (2.0, 4e-8), (4.0, 0.0)]), down(&[(1.0, 2.0)], 1.0));
    (p.depth, p.strength, p.varying, p.govern) = (Some(Depth::Constant(0.6)), Some(5000.0), vec![0], None);
    t.add("M14", "P", 450.0, analyse(&p).unwrap().safety.unwrap().load.unwrap().value.unwrap(), 2e-7);
}

/// Least t/R of a half ring of radius 1 under its own weight, cut by vertical joints: the joints stand close about the place
/// where the line touches the intrados.
fn least_with_vertical_joints() -> f64 {
    let ring = |thick: f64, touch: f64, step: f64| {
        let (low, high) = (1.0 - thick / 2.0, 1.0 + thick / 2.0);
        let mut cuts: Vec<f64> = (1..400).map(|k| low * (f64::from(k) / 200.0 - 1.0)).collect();
        for side in [-1.0, 1.0] {
            cuts.extend((-40..=40).map(|k| side * touch + f64::from(k) * step));
        }
        cuts.retain(|x| x.abs() < low * 0.999);
        cuts.sort_by(f64::total_cmp);
        cuts.dedup_by(|b, a| *b - *a < 1e-9);
        let height = |x: f64, r: f64| (r * r - x * x).max(0.0).sqrt();
        // Area left of x under a circle of radius r, and its moment about the middle.
        let area = |x: f64, r: f64| {
            let x = x.clamp(-r, r);
            (x * height(x, r) + r * r * (x / r).asin()) / 2.0
        };
        let moment = |x: f64, r: f64| -height(x.clamp(-r, r), r).powi(3) / 3.0;
        let mut p = problem(circle(1.0, FRAC_PI_2), Vec::new());
        p.depth = Some(Depth::Constant(thick));
        p.govern = Some(LineKind::Closest);
        p.joints.push([Point::new(-low, 0.0), Point::new(-high, 0.0)]);
        p.joints
            .extend(cuts.iter().map(|&x| [Point::new(x, height(x, low)), Point::new(x, height(x, high))]));
        p.joints.push([Point::new(low, 0.0), Point::new(high, 0.0)]);
        let edges: Vec<f64> = [&[-high], &cuts[..], &[high]].concat();
        for w in edges.windows(2) {
            let weight = area(w[1], high) - area(w[0], high) - area(w[1], low) + area(w[0], low);
            let turn = moment(w[1], high) - moment(w[0], high) - moment(w[1], low) + moment(w[0], low);
            let middle = f64::midpoint(w[0].max(-1.0), w[1].min(1.0));
            p.entering.push((p.forces.len(), FRAC_PI_2 + middle.asin()));
            p.forces.push(Force { at: Point::new(turn / weight, 0.0), force: Vec2::new(0.0, -weight) });
        }
        p
    };
    let share = |thick: f64, touch: f64, step: f64| {
        let line = solve(&ring(thick, touch, step)).1;
        let used = line.depth_use.unwrap();
        (2.0 * used.ratio, line)
    };
    let (mut touch, mut step) = (0.8, 0.004);
    let mut thick = 0.11;
    for _ in 0..5 {
        thick = root(0.105, 0.115, |t| share(t, touch, step).0 - 1.0);
        // The joint on the left half, away from crown and springing, that the line uses most.
        let line = share(thick, touch, step).1;
        let most = line
            .stations
            .iter()
            .filter(|s| s.at.x < -0.4 && s.at.x > -0.9)
            .max_by(|a, b| {
                let used =
                    |s: &thrustmark::statics::Station| s.eccentricity.unwrap().abs() / s.depth.unwrap();
                used(a).total_cmp(&used(b))
            })
            .unwrap();
        touch = most.at.x.abs();
        step /= 12.0;
    }
    thick
}

/// t/R of the half ring that just holds the catenary through its extrados at crown and springings: the line through these
/// points under a weight uniform along the catenary.
fn ring_about_a_catenary() -> f64 {
    let room = |thick: f64| {
        let high = 1.0 + thick / 2.0;
        let c = root(0.1, 10.0, |c| c * ((high / c).cosh() - 1.0) - high);
        let n = 1000;
        let edge = |k: i32| high * (2.0 * f64::from(k) / f64::from(n) - 1.0);
        let loads: Vec<_> = (0..n)
            .map(|k| {
                let (a, b) = (edge(k), edge(k + 1));
                let weight = c * ((b / c).sinh() - (a / c).sinh());
                let first = |x: f64| c * x * (x / c).sinh() - c * c * (x / c).cosh();
                (weight, (first(b) - first(a)) / weight)
            })
            .collect();
        let mut p = problem(circle(high, FRAC_PI_2), down(&loads, 9.0));
        p.through = Some([(-high, 0.0), (0.0, high), (high, 0.0)].map(Point::from));
        let line = solve(&p).1;
        // At the edges of the strips the string polygon lies on the catenary; between three of them the least distance from
        // the middle is that of a parabola.
        let far: Vec<f64> = (1..n / 2).map(|k| edge(k).hypot(height(&line, edge(k)))).collect();
        let i = (1..far.len() - 1).min_by(|&i, &j| far[i].total_cmp(&far[j])).unwrap();
        let (a, b) = ((far[i + 1] - far[i - 1]) / 2.0, far[i + 1] - 2.0 * far[i] + far[i - 1]);
        far[i] - a * a / (2.0 * b) - (1.0 - thick / 2.0)
    };
    root(0.10, 0.13, room)
}

/// Greatest load at kL on the parabola of M11, with its push.
fn parabola_with_vertical_joints(k: f64) -> (f64, f64) {
    let (w, l, f, e, n) = (20.0, 20.0, 5.0, 0.4, 400);
    let y = |x: f64| 4.0 * f * x * (l - x) / (l * l);
    let at = |i: i32| l * f64::from(i) / f64::from(n);
    let mut p = problem(parabola(l, f, 400), Vec::new());
    (p.govern, p.depth) = (Some(LineKind::Closest), Some(Depth::Constant(2.0 * e)));
    p.joints = (0..=n).map(at).map(|x| [Point::new(x, y(x) - e), Point::new(x, y(x) + e)]).collect();
    p.forces = down(
        &(0..n).map(|i| (w * l / f64::from(n), f64::midpoint(at(i), at(i + 1)))).collect::<Vec<_>>(),
        9.0,
    );
    p.varying = vec![p.forces.len()];
    p.forces.extend(down(&[(1.0, k * l)], 9.0));
    let factor = analyse(&p).unwrap().safety.unwrap().load.unwrap().value.unwrap();
    p.forces.last_mut().unwrap().force.y = -factor * (1.0 - 1e-12);
    p.govern = Some(LineKind::LeastThrust);
    (factor, analyse(&p).unwrap().lines[0].reaction.map_or(f64::NAN, |r| r.horizontal))
}

fn sections(t: &mut Table) {
    t.source("K01", "from memory: middle-third rule");
    let s = uncracked(100.0, 10.0, 0.6, 1.0).unwrap();
    t.add("K01", "max", 1000.0 / 3.0, s.extrados, EXACT);
    t.add("K01", "min", 0.0, s.intrados, EXACT);
    t.source("K02", "from memory: closed form, derived");
    t.add("K02", "peak", 2000.0 / 3.0, without_tension(100.0, 20.0, 0.6, 1.0).unwrap().extrados, EXACT);
    t.source("K03", "from memory: closed form, derived");
    t.add("K03", "M", 144.0, moment_capacity(600.0, 0.6, 1.0, 5000.0).unwrap(), EXACT);
    t.add("K03", "M summit", 225.0, moment_capacity(1500.0, 0.6, 1.0, 5000.0).unwrap(), EXACT);
    t.source("K04", "from memory: EN 1992-1-1:2004, 12.6.1 (3), Eq. (12.2)");
    t.add("K04", "N_Rd", 600.0, thrust_capacity(0.24, 0.6, 1.0, 5000.0).unwrap(), EXACT);
}

/// A number to twelve digits, without the noise of rounding.
fn figure(v: f64) -> String {
    let v = if v.abs() < 1e-11 { 0.0 } else { v };
    format!("{v:.11e}").parse::<f64>().unwrap().to_string()
}

#[test]
fn every_outside_value_is_met_and_told() {
    let mut t = Table::default();
    funiculars(&mut t);
    catenaries(&mut t);
    elastic_arches(&mut t);
    rings(&mut t);
    sections(&mut t);
    let mut page = String::from(
        "# Outside values\n\nWhat the statics are held against, in kN and m, each computed anew by `tests/checks.rs`, which writes \
         this page. *Difference* is relative (of values below a hundredth, relative to a hundredth); *owed* is the most that the \
         test allows.\n\n",
    );
    let mut broken = Vec::new();
    for (id, source) in &t.sources {
        writeln!(page, "## {id}\n\n{source}.\n\n| quantity | expected | computed | difference | owed |\n|---|---|---|---|---|").unwrap();
        let mut any = false;
        for v in t.values.iter().filter(|v| v.id == *id) {
            any = true;
            let off = (v.computed - v.expected).abs() / v.expected.abs().max(0.01);
            if off > v.owed || !off.is_finite() {
                broken.push(format!("{id} {}: {} for {}, off by {off:e}", v.what, v.computed, v.expected));
            }
            // The computed digits beyond those that are owed are rounding, which differs between machines.
            let digits = (0..12).take_while(|d| 10_f64.powi(-*d) > v.owed * 1.01).count();
            let shown = format!("{:.*e}", digits, v.computed).parse::<f64>().unwrap();
            let below = [1e-12, 1e-9, 1e-7, 1e-6, 1e-5, 1e-4]
                .into_iter()
                .find(|b| off <= *b)
                .unwrap_or(f64::INFINITY);
            let below = below.max(v.owed.min(1e-9));
            writeln!(
                page,
                "| {} | {} | {} | below {below:.0e} | {:.0e} |",
                v.what,
                figure(v.expected),
                figure(shown),
                v.owed
            )
            .unwrap();
        }
        assert!(any, "{id} has no value");
        page.push('\n');
    }
    assert!(broken.is_empty(), "{}", broken.join("\n"));
    let path = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("docs/checks.md");
    if std::env::var_os("THRUSTMARK_WRITE_DOCS").is_some() {
        std::fs::write(&path, page).unwrap();
    } else {
        let stands = std::fs::read_to_string(&path).unwrap_or_default();
        assert!(
            stands == page,
            "docs/checks.md is not what was computed; THRUSTMARK_WRITE_DOCS=1 cargo test --test checks writes it"
        );
    }
}
