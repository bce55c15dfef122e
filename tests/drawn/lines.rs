//! Loads per metre of plan: their statics against closed forms, and how they are read.

use std::f64::consts::PI;

use thrustmark::geometry::{Path, Point, Segment, Vec2};
use thrustmark::outcome::{Check, Load};
use thrustmark::statics::{
    Analysis, Depth, Flexibility, Force, Line, LineKind, LineLoad, Problem, Status, Support, analyse, elastic,
};

use super::{acts, arch, loads};
use crate::sheet::Sheet;

#[track_caller]
fn close(found: f64, expected: f64, relative: f64) {
    let off = (found - expected).abs() / expected.abs().max(1.0);
    assert!(off <= relative, "found {found:.15}, expected {expected:.15}, relative difference {off:e}");
}

fn over(from: f64, to: f64, down: f64) -> LineLoad {
    LineLoad { from, to, down, varies: false }
}

fn through(axis: Path, line_loads: Vec<LineLoad>) -> Problem {
    Problem { line_loads, govern: Some(LineKind::Through), ..Problem::new(axis) }
}

fn governing(analysis: &Analysis) -> &Line {
    let line = &analysis.lines[analysis.governs];
    assert_eq!(line.status, Status::Found, "{:?}", line.reason);
    assert!(analysis.residual < 1e-9, "residual {:e}", analysis.residual);
    line
}

/// Arc of radius `r` about `centre` from 150° to 30°.
fn circle(centre: Point, r: f64) -> Path {
    let arc =
        Segment::Arc { centre, radius: r, start_angle: 150_f64.to_radians(), sweep: -120_f64.to_radians() };
    Path::new([arc]).unwrap()
}

/// Under a uniform load w per metre of plan the line of thrust is the parabola of push w L² / (8 f), whatever the axis
/// (any text on arches): its ordinates stand in every joint of a circular axis, also in national grid coordinates.
#[test]
fn a_uniform_load_has_its_parabola() {
    for centre in [Point::ORIGIN, Point::new(432_100.0, 5_678_900.0)] {
        let (w, r) = (12.5, 10.0);
        let (half, rise) = (r * 60_f64.to_radians().sin(), r / 2.0);
        // In two parts, the second of which reaches far beyond the springing.
        let line_loads =
            vec![over(centre.x - half, centre.x + 1.3, w), over(centre.x + 1.3, centre.x + 50.0, w)];
        let a = analyse(&through(circle(centre, r), line_loads)).unwrap();
        let line = governing(&a);
        let push = w * half * half / (2.0 * rise);
        close(line.left.unwrap().horizontal, push, 1e-9);
        close(line.left.unwrap().vertical, w * half, 1e-9);
        close(line.right.unwrap().vertical, w * half, 1e-9);
        close(a.total.y, -2.0 * w * half, 1e-9);
        assert!(line.stations.len() > 20);
        for s in &line.stations {
            let (x, y) = (s.at.x - centre.x, s.at.y - centre.y);
            let parabola = r - rise * (x / half).powi(2);
            let v = s.vertical_offset.unwrap();
            assert!((v - (parabola - y)).abs() < 1e-8, "at {x}: {v} {}", parabola - y);
            // Beside grid coordinates the place of a station itself is rounded to a nanometre.
            close(s.moment, push * (parabola - y), if centre.x.abs() > 0.0 { 1e-7 } else { 1e-9 });
            close(s.thrust.hypot(s.shear), push.hypot(w * x), 1e-9);
        }
        // The drawn polygon keeps to the parabola within what is owed to it, a hundred-thousandth of the span.
        for p in &line.vertices {
            let (x, y) = (p.x - centre.x, p.y - centre.y);
            assert!((y - (r - rise * (x / half).powi(2))).abs() < 2e-5 * half, "{x} {y}");
        }
    }
}

/// Half the span loaded: the moments of the three-hinged arch are those of the beam less the push times the height.
#[test]
fn half_a_span_by_hand() {
    let (w, r) = (8.0, 10.0);
    let (half, rise) = (75_f64.sqrt(), 5.0);
    let mut p = through(circle(Point::ORIGIN, r), vec![over(-half, 0.0, w)]);
    p.support = Some(Support::ThreeHinged);
    let a = analyse(&p).unwrap();
    let line = governing(&a);
    let (left, right) = (w * half * 0.75, w * half * 0.25);
    let push = right * half / rise;
    close(line.left.unwrap().vertical, left, 1e-9);
    close(line.right.unwrap().vertical, right, 1e-9);
    close(line.left.unwrap().horizontal, push, 1e-9);
    for s in &line.stations {
        let x = s.at.x + half;
        let beam = if x < half { left * x - w * x * x / 2.0 } else { right * (2.0 * half - x) };
        let height = s.at.y - 5.0;
        assert!((s.moment - (beam - push * height)).abs() < 1e-8 * w * half * half, "at {x}");
    }
    // A joint stands where the load ends.
    assert!(line.stations.iter().any(|s| s.at.x.abs() < 1e-9));
}

/// Two-hinged semicircle of constant section: H = 4 w R / (3 π) [from memory; list of check values]. Its springings have
/// upright tangents.
#[test]
fn a_two_hinged_semicircle_by_its_closed_form() {
    let (w, r) = (3.0, 7.0);
    let arc = Segment::Arc { centre: Point::ORIGIN, radius: r, start_angle: PI, sweep: -PI };
    let mut p = through(Path::new([arc]).unwrap(), vec![over(-r, r, w)]);
    (p.support, p.govern) = (Some(Support::TwoHinged), Some(LineKind::Elastic));
    let a = elastic(&p, &|_| Flexibility { bending: 1.0, axial: 0.0 }).unwrap();
    close(governing(&a).left.unwrap().horizontal, 4.0 * w * r / (3.0 * PI), 1e-9);
}

/// An axis that leans out beyond its springings carries the load on its upper part alone.
#[test]
fn an_axis_that_leans_outward() {
    let (w, r) = (3.0, 7.0);
    let arc = Segment::Arc {
        centre: Point::ORIGIN,
        radius: r,
        start_angle: 200_f64.to_radians(),
        sweep: -220_f64.to_radians(),
    };
    let p = through(Path::new([arc]).unwrap(), vec![over(-r, r, w)]);
    let a = analyse(&p).unwrap();
    let line = governing(&a);
    close(line.left.unwrap().vertical, w * r, 1e-9);
    let (spring, half) = (r * 200_f64.to_radians().sin(), r * 20_f64.to_radians().cos());
    // About the crown, from the left: V half − w r²/2 = H (r − spring).
    close(line.left.unwrap().horizontal, (w * r * half - w * r * r / 2.0) / (r - spring), 1e-9);
    // Half of it: the load ends on the upper part.
    let a = analyse(&through(p.axis, vec![over(-20.0, 1.0, w)])).unwrap();
    close(a.total.y, -w * (r + 1.0), 1e-9);
}

/// On straight legs a weight per metre of axis is one per metre of plan, and so are the ends of the load factor's interval.
#[test]
fn on_straight_legs_it_is_a_weight_per_length_of_axis() {
    let legs = Path::polyline(&[Point::new(0.0, 0.0), Point::new(6.0, 4.0), Point::new(12.0, 0.0)]).unwrap();
    let slope = 6.0 / 52_f64.sqrt();
    let forces = vec![Force { at: Point::new(4.0, 6.0), force: Vec2::new(0.0, -30.0) }];
    let base = Problem { forces, depth: Some(Depth::Constant(1.5)), ..Problem::new(legs) };
    let mut one = Problem { weight_on_axis: 5.0, varying: vec![0], ..base.clone() };
    let mut two =
        Problem { line_loads: vec![over(0.0, 12.0, 5.0 / slope)], varying: vec![0], ..base.clone() };
    for turn in 0..2 {
        if turn == 1 {
            (one.varying, one.weight_varies) = (Vec::new(), true);
            two.varying.clear();
            two.line_loads[0].varies = true;
        }
        let (a, b) = (analyse(&one).unwrap(), analyse(&two).unwrap());
        let (l, m) = (governing(&a), governing(&b));
        close(m.left.unwrap().horizontal, l.left.unwrap().horizontal, 1e-9);
        close(m.offset.unwrap().max_abs, l.offset.unwrap().max_abs, 1e-8);
        let (s, t) = (a.safety.unwrap(), b.safety.unwrap());
        close(t.geometric.value.unwrap(), s.geometric.value.unwrap(), 1e-8);
        for (x, y) in [(s.load, t.load), (s.load_least, t.load_least)] {
            let (x, y) = (x.unwrap(), y.unwrap());
            assert_eq!(x.status, y.status);
            if let (Some(x), Some(y)) = (x.value, y.value) {
                close(y, x, 1e-8);
            }
        }
    }
}

/// Uplift takes away what a load of the same size puts on, and many small point loads come ever closer to the load itself.
#[test]
fn sums_and_limits() {
    let axis = circle(Point::ORIGIN, 10.0);
    let forces = vec![Force { at: Point::new(2.0, 12.0), force: Vec2::new(0.0, -50.0) }];
    let alone =
        Problem { forces: forces.clone(), govern: Some(LineKind::Through), ..Problem::new(axis.clone()) };
    let mut with = alone.clone();
    with.line_loads = vec![over(-5.0, 3.0, 4.0), over(-5.0, 3.0, -4.0)];
    let (a, b) = (analyse(&alone).unwrap(), analyse(&with).unwrap());
    close(governing(&b).left.unwrap().horizontal, governing(&a).left.unwrap().horizontal, 1e-9);

    let exact = analyse(&through(axis.clone(), vec![over(-6.0, 2.0, 9.0)])).unwrap();
    let push = governing(&exact).left.unwrap().horizontal;
    let lumped = |n: u32| {
        let step = 8.0 / f64::from(n);
        let force = |i: u32| Force {
            at: Point::new(-6.0 + step * (f64::from(i) + 0.5), 12.0),
            force: Vec2::new(0.0, -9.0 * step),
        };
        let p = Problem {
            forces: (0..n).map(force).collect(),
            govern: Some(LineKind::Through),
            ..Problem::new(axis.clone())
        };
        (governing(&analyse(&p).unwrap()).left.unwrap().horizontal - push).abs()
    };
    // The strip that the crown cuts errs with the square of its width.
    let (coarse, fine) = (lumped(9), lumped(90));
    assert!(fine < coarse / 20.0 && coarse > 1e-3, "{coarse} {fine}");
}

fn down(all: &[Load]) -> f64 {
    -all.iter().map(|l| l.force[1]).sum::<f64>()
}

const JOB: &str = "[rib]\nsupport = \"none\"\n[limits]\noffset = 9\n";

#[test]
fn a_line_with_a_label_per_length_is_read() {
    let half = 75_f64.sqrt();
    for (label, per_metre) in [
        ("12 kN/m", 12.0),
        ("g = 12,5 kN/m", 12.5),
        ("1.2 tf/m", 1.2 * 9.806_65),
        ("0.8 kip/ft", 0.8 * 4.448_221_615_260_5 / 0.3048),
        ("850 lbf/ft", 0.85 * 4.448_221_615_260_5 / 0.3048),
        ("-3 kN/m", -3.0),
    ] {
        // A LINE from right to left above the deck, and one load beside it.
        let mut sheet = arch();
        sheet.line("ARCH-LOADS", [half, 12.0], [-half, 12.0]);
        sheet.text("ARCH-LOADS", [-2.0, 12.1], 0.2, label);
        sheet.load("ARCH-LOADS", [1.0, 11.0], "P1 = 200 kN");
        let run = sheet.run(JOB);
        let all = loads(&run);
        let single = all.iter().find(|l| l.label == "P1").unwrap();
        acts(single, [1.0, 11.0], [0.0, -200.0]);
        let pieces: Vec<_> = all.iter().filter(|l| l.over.is_some()).collect();
        // Cut by the single load and at the crown.
        assert_eq!(pieces.len(), 3, "{label}");
        close(down(all), 200.0 + 2.0 * half * per_metre, 1e-12);
        for piece in pieces {
            close(piece.per_length.unwrap(), per_metre, 1e-12);
            let [a, b] = piece.over.unwrap();
            close(piece.force[1], -per_metre * (b - a), 1e-12);
            close(piece.at[0], f64::midpoint(a, b), 1e-12);
        }
        close(run.spans[0].cases[0].total_load[1], -down(all), 1e-12);
        assert!(!run.findings.iter().any(|f| f.check == Check::PassedOver || f.check == Check::Labels));
        assert!(!run.findings.iter().any(|f| f.check == Check::Sense));
    }
}

/// Drawn as a box with arrows in it, as a line over arrows, as a bent line, in two lines, in millimetres: one answer.
#[test]
fn a_line_load_drawn_in_many_ways_has_one_answer() {
    let half = 75_f64.sqrt();
    let deck = |y: f64| [[-half, y], [half, y]];
    let label = |sheet: &mut Sheet, x: f64| sheet.text("ARCH-LOADS", [x, 13.1], 0.2, "12 kN/m");
    let mut ways: Vec<Sheet> = Vec::new();
    let mut sheet = arch();
    sheet.polyline("ARCH-LOADS", &deck(13.0), false, &[]);
    label(&mut sheet, 0.0);
    ways.push(sheet);
    let mut sheet = arch();
    sheet.polyline("ARCH-LOADS", &[[-half, 12.0], [half, 12.0], [half, 13.0], [-half, 13.0]], true, &[]);
    for x in [-6.0, -2.0, 2.0, 6.0] {
        sheet.leader("ARCH-LOADS", &[[x, 12.0], [x, 13.0]], true);
    }
    label(&mut sheet, 0.5);
    ways.push(sheet);
    let mut sheet = arch();
    sheet.line("ARCH-LOADS", deck(13.0)[0], deck(13.0)[1]);
    for x in [-6.0, -2.0, 2.0, 6.0] {
        sheet.line("ARCH-LOADS", [x, 13.0], [x, 12.0]);
        sheet.line("ARCH-LOADS", [x, 12.0], [x - 0.1, 12.3]);
        sheet.line("ARCH-LOADS", [x, 12.0], [x + 0.1, 12.3]);
    }
    label(&mut sheet, 0.5);
    ways.push(sheet);
    let mut sheet = arch();
    sheet.polyline("ARCH-LOADS", &[[half, 12.8], [0.0, 13.0], [-half, 12.6]], false, &[]);
    label(&mut sheet, 0.5);
    ways.push(sheet);
    let mut sheet = arch();
    sheet.line("ARCH-LOADS", [-half, 13.0], [1.0, 13.0]);
    sheet.line("ARCH-LOADS", [1.0, 13.0], [half, 13.0]);
    label(&mut sheet, -4.0);
    label(&mut sheet, 4.0);
    ways.push(sheet);
    let answer = |sheet: &Sheet| {
        let run = sheet.run(JOB);
        let all = loads(&run);
        assert!(all.iter().all(|l| l.over.is_some()), "{all:#?}");
        assert!(!run.findings.iter().any(|f| f.unchecks), "{:#?}", run.findings);
        let case = &run.spans[0].cases[0];
        let line = &case.lines[0];
        [
            case.total_load[1],
            line.offset.as_ref().unwrap().max_abs,
            line.left.as_ref().unwrap().horizontal,
            line.right.as_ref().unwrap().vertical,
        ]
    };
    let first = answer(&ways[0]);
    close(first[0], -24.0 * half, 1e-12);
    for sheet in &ways[1..] {
        for (a, b) in first.iter().zip(answer(sheet)) {
            close(b, *a, 1e-8);
        }
    }
}

#[test]
fn what_a_line_load_leaves_over_is_told() {
    // Beyond the springings; without a line; upright; an arrow with a figure of its own under the line stays a load.
    let mut sheet = arch();
    sheet.line("ARCH-LOADS", [-5.0, 13.0], [20.0, 13.0]);
    sheet.text("ARCH-LOADS", [0.0, 13.1], 0.2, "10 kN/m");
    sheet.leader("ARCH-LOADS", &[[2.0, 11.0], [2.0, 13.0]], true);
    sheet.text("ARCH-LOADS", [2.1, 11.5], 0.2, "P = 70 kN");
    let run = sheet.run(JOB);
    let half = 75_f64.sqrt();
    close(down(loads(&run)), 70.0 + 10.0 * (half + 5.0), 1e-12);
    let told = run.findings.iter().find(|f| f.check == Check::OffSpan).unwrap();
    assert!(told.unchecks && told.message.contains("113.3975 kN"), "{}", told.message);

    sheet.text("ARCH-LOADS", [60.0, 13.0], 0.2, "4 kN/m");
    let run = sheet.run(JOB);
    let told = run.findings.iter().find(|f| f.message.contains("4 kN/m")).unwrap();
    assert!(told.check == Check::Labels && told.unchecks);

    let mut sheet = arch();
    sheet.load("ARCH-LOADS", [0.0, 11.0], "50 kN");
    sheet.line("ARCH-LOADS", [5.0, 13.0], [5.0, 11.0]);
    sheet.text("ARCH-LOADS", [5.1, 12.0], 0.2, "4 kN/m");
    let run = sheet.run(JOB);
    assert!(run.findings.iter().any(|f| f.message.contains("no length in plan") && f.unchecks));
}

#[test]
fn cases_factor_line_loads_and_the_load_factor_multiplies_them() {
    let mut sheet = arch();
    let half = 75_f64.sqrt();
    sheet.line("ARCH-LOADS-DEAD", [-half, 13.0], [half, 13.0]);
    sheet.text("ARCH-LOADS-DEAD", [-4.0, 13.1], 0.2, "g = 20 kN/m");
    sheet.line("ARCH-LOADS-LIVE", [-half, 14.0], [0.0, 14.0]);
    sheet.text("ARCH-LOADS-LIVE", [-4.0, 14.1], 0.2, "q = 5 kN/m");
    let job = "[rib]\nsupport = \"none\"\ndepth = 1.6\nwidth = 1\n[[case]]\nname = \"crowd\"\nfactors = { \"ARCH-LOADS-DEAD\" = \
               1.0, \"ARCH-LOADS-LIVE\" = 1.5 }\nvary = [\"ARCH-LOADS-LIVE\"]\n";
    let run = sheet.run(job);
    let case = &run.spans[0].cases[0];
    close(case.total_load[1], -(40.0 + 7.5) * half, 1e-12);
    close(case.forces.iter().map(|f| f[1]).sum::<f64>(), case.total_load[1], 1e-12);
    let factor = case.safety.as_ref().unwrap().load_factor.unwrap();
    // The same by hand at that factor: then, and not a hair further, some line lies inside. The load as a case of its own.
    for (more, inside) in [(factor * (1.0 - 1e-6), true), (factor * (1.0 + 1e-6), false)] {
        let job = format!(
            "[rib]\nsupport = \"none\"\ndepth = 1.6\nwidth = 1\n[[case]]\nname = \"c\"\nfactors = {{ \"ARCH-LOADS-DEAD\" = 1.0, \
             \"ARCH-LOADS-LIVE\" = {} }}\n",
            1.5 * more
        );
        let run = sheet.run(&job);
        let geometric = run.spans[0].cases[0].safety.as_ref().unwrap().geometric_factor;
        assert_eq!(geometric.is_some_and(|g| g >= 1.0), inside, "{geometric:?} at {more}");
    }
    let labels: Vec<&str> =
        loads(&run).iter().filter(|l| l.over.is_some()).map(|l| l.label.as_str()).collect();
    assert!(labels.contains(&"g/1") && labels.contains(&"q/1"), "{labels:?}");
}
