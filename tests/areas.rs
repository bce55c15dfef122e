//! Dead load by outline and fill: weights, centroids and pressures against closed forms, published values and a
//! general-purpose geometry library.
#![allow(clippy::unwrap_used)]

use std::fs;

use thrustmark::flow::{self, Environment};
use thrustmark::geometry::{Path, Point, Segment, fit};
use thrustmark::job::Job;
use thrustmark::outcome::{AreaShare, Check, Run, Status};

/// Lines of a drawing from `code value` words with `|` between them.
fn lines(text: &str) -> String {
    text.split('|')
        .map(str::trim)
        .filter(|g| !g.is_empty())
        .map(|group| {
            let (code, value) = group.split_once(' ').unwrap_or((group, ""));
            format!("{code:>3}\n{value}\n")
        })
        .collect()
}

/// A drawing in metres with these entities, run with this job.
fn run(entities: &str, job: &str) -> Run {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("a.dxf");
    let text = format!(
        "0 SECTION|2 HEADER|9 $ACADVER|1 AC1015|9 $INSUNITS|70 6|0 ENDSEC|0 SECTION|2 ENTITIES|{entities}|0 ENDSEC|0 EOF"
    );
    fs::write(&file, lines(&text)).unwrap();
    let job = Job::parse(job.as_bytes(), None).unwrap();
    flow::check(&file, Some(&job), Environment { today: "2026-01-01".parse().unwrap() })
}

#[track_caller]
fn good(entities: &str, job: &str) -> Run {
    let run = run(entities, job);
    assert!(run.error.is_none(), "{:?}", run.error);
    run
}

/// A polyline on a layer through points with the bulge of the piece that follows.
fn polyline(layer: &str, handle: u32, points: &[[f64; 3]], closed: bool) -> String {
    let mut text =
        format!("0 LWPOLYLINE|5 {handle:X}|8 {layer}|90 {}|70 {}", points.len(), i32::from(closed));
    for [x, y, bulge] in points {
        text.push_str(&format!("|10 {x:?}|20 {y:?}|42 {bulge:?}"));
    }
    text.push('|');
    text
}

/// The axis of a segmental arch from (0, 0).
fn segmental(span: f64, rise: f64) -> String {
    polyline("ARCH-AXIS", 0xA1, &[[0.0, 0.0, -2.0 * rise / span], [span, 0.0, 0.0]], false)
}

/// A path as a polyline.
fn path(layer: &str, handle: u32, path: &Path) -> String {
    let mut points: Vec<[f64; 3]> = path
        .segments()
        .iter()
        .map(|s| {
            let bulge = match s {
                Segment::Line { .. } => 0.0,
                Segment::Arc { sweep, .. } => (sweep / 4.0).tan(),
            };
            [s.start().x, s.start().y, bulge]
        })
        .collect();
    points.push([path.end().x, path.end().y, 0.0]);
    polyline(layer, handle, &points, false)
}

#[track_caller]
fn share<'r>(run: &'r Run, name: &str) -> &'r AreaShare {
    run.spans[0].areas.iter().find(|a| a.name == name).unwrap()
}

#[track_caller]
fn near(found: f64, expected: f64, relative: f64) {
    let off = (found - expected).abs() / expected.abs().max(1e-3);
    assert!(off <= relative, "found {found:.15}, expected {expected:.15}, relative difference {off:e}");
}

const FILLED: &str = "[rib]\ndepth = 0.6\nwidth = 1.0\nunit_weight = 22.0\nsupport = \"none\"\n\
    [[area]]\nname = \"fill\"\nlevel = 3.5\nunit_weight = 18.0\n";

/// D03 (derived): dead weight of ring (gamma t R 2a) and of the fill between the extrados and a level line over the extrados
/// width; segmental 10 x 2.5, t=0.6, gamma 22, fill 18 to 3.5 above springing: total 433.867015345. Closed form, derived.
#[test]
fn ring_and_fill_of_a_segmental_arch_weigh_what_the_closed_form_says() {
    let run = good(&segmental(10.0, 2.5), FILLED);
    near(-run.spans[0].cases[0].total_load[1], 433.867_015_345, 1e-11);
    let fill = share(&run, "fill");
    let (r, a) = (6.55_f64, 0.8_f64.asin());
    let area = 2.0 * r * a.sin() * 7.25 - r * r * (a + a.sin() * a.cos());
    near(fill.area, area, 1e-13);
    near(fill.whole, area, 1e-13);
    assert!(fill.residual < 1e-14, "{:e}", fill.residual);
    near(fill.at.unwrap()[0], 5.0, 1e-12);
    assert_eq!(fill.pieces, 160);
    // The loads that are listed add up to all of it.
    let listed: f64 = run.spans[0].loads.iter().map(|l| l.force[1]).sum();
    near(-listed, 433.867_015_345, 1e-11);
}

/// F11 (from memory): arch under fill of constant density up to a level line: y=y0 cosh(x/c) measured down from that line,
/// c=(L/2)/arccosh(y1/y0), H=gamma c^2 (transformed catenary); W.J.M. Rankine, A Manual of Applied Mechanics. gamma=20, y0=1,
/// y1=5, L=20 (rise 4): c 4.36218018307, H 380.572318991, y(quarter) above springing 3.26794919243.
#[test]
fn a_transformed_catenary_is_the_line_of_thrust_of_its_fill() {
    let c = 10.0 / 5.0_f64.acosh();
    near(c, 4.362_180_183_07, 1e-12);
    let curve = |x: f64| {
        let (p, q) = ((x / c).cosh(), (x / c).sinh() / c);
        Some((Point::new(x + 10.0, 5.0 - p), thrustmark::geometry::Vec2::new(1.0, -q)))
    };
    let axis = Path::new(fit::arcs(&curve, -10.0, 10.0, 1e-11).unwrap()).unwrap();
    let job = "[rib]\nwidth = 1.0\n[line]\ngovern = \"through\"\n[[area]]\nname = \"fill\"\nlevel = 5.0\nunit_weight = 20.0\n";
    let run = good(&path("ARCH-AXIS", 0xA1, &axis), job);
    let line = &run.spans[0].cases[0].lines[0];
    assert_eq!(line.status, Status::Found);
    near(line.left.as_ref().unwrap().horizontal, 380.572_318_991, 1e-9);
    // Between cuts the weight of a piece acts in its middle; at the cuts the polygon meets the curve itself.
    let height = |x: f64| {
        let edge = line.vertices.windows(2).find(|w| w[0][0] <= x && x <= w[1][0]).unwrap();
        edge[0][1] + (edge[1][1] - edge[0][1]) * (x - edge[0][0]) / (edge[1][0] - edge[0][0])
    };
    near(height(5.0), 3.267_949_192_43, 2e-4);
    let length = axis.length();
    for k in 1..160 {
        let at = axis.point_at(length * f64::from(k) / 160.0);
        near(height(at.x), 5.0 - ((at.x - 10.0) / c).cosh(), 1e-8);
    }
    // w h² / (8 N) at most, of a piece h wide under w = 20 kN/m² x 5 m.
    assert!(line.offset.as_ref().unwrap().max_abs < 100.0 * 0.141_f64.powi(2) / (8.0 * 380.0));
    assert!(run.findings.iter().any(|f| f.check == Check::Areas && f.message.contains("stands on the axis")));
}

/// A drawing of `fixtures/areas` with fill of 18 kN/m³ on layer ARCH-FILL.
#[track_caller]
fn fixture(name: &str) -> Run {
    let file = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/areas").join(name);
    let job = format!("{}layer = \"ARCH-FILL\"\nunit_weight = 18.0\n", FILLED.split("level").next().unwrap());
    let job = Job::parse(job.as_bytes(), None).unwrap();
    let run = flow::check(&file, Some(&job), Environment { today: "2026-01-01".parse().unwrap() });
    assert!(run.error.is_none(), "{name}: {:?}", run.error);
    run
}

fn says(run: &Run, words: &str) -> bool {
    run.findings.iter().any(|f| f.message.contains(words))
}

/// One fill drawn in eight ways (by ezdxf) is the fill of D03 above, to the accuracy of the numbers in the file.
#[test]
fn one_fill_drawn_in_many_ways_weighs_the_same() {
    let expected = share(&good(&segmental(10.0, 2.5), FILLED), "fill").clone();
    for name in [
        "polyline",
        "old-polyline",
        "chain",
        "hatch-polyline",
        "hatch-edges",
        "hatch-and-outline",
        "in-block",
        "hatch-in-block",
    ] {
        let run = fixture(&format!("{name}.dxf"));
        let fill = share(&run, "fill");
        near(fill.area, expected.area, 1e-9);
        near(fill.weight, 18.0 * expected.area, 1e-9);
        near(fill.whole, expected.area, 1e-9);
        near(fill.at.unwrap()[0], 5.0, 1e-9);
        assert!(fill.residual < 1e-9, "{name}: {:e}", fill.residual);
        assert!(fill.beyond.iter().all(|b| b.abs() < 1e-6), "{name}: {:?}", fill.beyond);
        near(-run.spans[0].cases[0].total_load[1], 433.867_015_345, 1e-9);
        assert_eq!(says(&run, "draws the same outline"), name == "hatch-and-outline", "{name}");
        assert!(!says(&run, "crosses"), "{name}");
        assert!(!says(&run, "over one another"), "{name}");
    }
}

/// Areas in closed form: the circle, the ellipse, half of it, a parabola's segment (two thirds of its box).
#[test]
fn hatches_of_every_kind_of_edge_have_the_areas_of_the_books() {
    use std::f64::consts::PI;
    let area = |name: &str| {
        let run = fixture(name);
        let fill = share(&run, "fill");
        assert!(fill.residual < 1e-9, "{name}: {:e}", fill.residual);
        assert!(fill.area > 0.0, "{name}: {:#?}", run.findings);
        (fill.area, fill.at.unwrap()[0], run)
    };
    let (islands, _, run) = area("islands.dxf");
    near(islands, 16.0 - PI * (1.2 * 1.2 + 0.3 * 0.3) / 2.0 - PI + 0.16, 1e-8);
    assert!(says(&run, "are voids"));
    // By the style of the hatch only the outermost part counts, or all within the outer loop.
    near(area("islands-outermost.dxf").0, islands - 0.16, 1e-9);
    near(area("islands-ignored.dxf").0, 16.0, 1e-9);
    let (half, x, _) = area("half-ellipse.dxf");
    near(half, PI, 1e-8);
    near(x, 5.0, 1e-9);
    let (parabola, x, _) = area("spline.dxf");
    near(parabola, 8.0 / 3.0, 1e-8);
    near(x, 5.0, 1e-9);
    let (rounds, _, run) = area("void-and-rounds.dxf");
    near(rounds, 6.0 - PI / 4.0 + PI * 0.75 * 0.75 + PI * 0.8 * 0.4, 1e-8);
    assert!(says(&run, "are voids"));
}

/// Outlines that are not sound are told, each with its figure, and keep the run from being judged.
#[test]
fn doubtful_outlines_are_told() {
    let job = format!(
        "{}layer = \"FILL\"\nunit_weight = 18.0\n[limits]\nring = 9.0\n",
        FILLED.split("level").next().unwrap()
    );
    let told = |outlines: &str, words: &str| {
        let run = good(&format!("{}{outlines}", segmental(10.0, 2.5)), &job);
        let finding = run.findings.iter().find(|f| f.message.contains(words));
        let finding = finding.unwrap_or_else(|| panic!("{words}: {:#?}", run.findings));
        (finding.clone(), run.clone())
    };
    let corners =
        |x: f64, y: f64, w: f64, h: f64| [[x, y, 0.0], [x + w, y, 0.0], [x + w, y + h, 0.0], [x, y + h, 0.0]];
    let bow =
        polyline("FILL", 0xB1, &[[1.0, 4.0, 0.0], [5.0, 5.0, 0.0], [5.0, 4.0, 0.0], [1.0, 5.0, 0.0]], true);
    let (finding, _) = told(&bow, "crosses itself");
    assert!(finding.unchecks);
    let at = finding.at.unwrap();
    near(at[0], 3.0, 1e-9);
    near(at[1], 4.5, 1e-9);
    // Two polylines that lie over one another by 1 m²: their outlines cross.
    let two = polyline("FILL", 0xB1, &corners(1.0, 4.0, 3.0, 1.0), true)
        + &polyline("FILL", 0xB2, &corners(3.0, 4.0, 3.0, 1.5), true);
    assert!(told(&two, "crosses itself").0.unchecks);
    // A rectangle from beyond the left end to the middle: the extrados begins at x = -0.24.
    let left = polyline("FILL", 0xB1, &corners(-1.24, 4.0, 6.24, 1.0), true);
    let (finding, run) = told(&left, "left to the abutments");
    near(finding.value.unwrap(), 18.0, 1e-9);
    near(share(&run, "fill").beyond[0], 18.0, 1e-9);
    near(share(&run, "fill").weight, 18.0 * 5.24, 1e-9);
    // A rectangle from the springings up: what lies under the extrados is told.
    let (finding, _) =
        told(&polyline("FILL", 0xB1, &corners(0.0, 0.0, 10.0, 3.5), true), "lie under the extrados");
    assert!(finding.unchecks);
    let (r, half) = (6.55_f64, (5.0_f64 / 6.55).asin());
    near(finding.value.unwrap(), r * r * (half + half.sin() * half.cos()) - 37.5, 1e-9);
}

/// Cases name areas like layers: factor, variation, what is left out.
#[test]
fn cases_name_areas() {
    let job = format!(
        "{FILLED}[[area]]\nname = \"road\"\nlayer = \"ROAD\"\nunit_weight = 24.0\nwidth = 2.0\n\
         [[case]]\nname = \"dead\"\nfactors = {{ self = 1.0, fill = 1.2 }}\n\
         [[case]]\nname = \"all\"\nfactors = {{ self = 1.0, fill = 1.0, road = 1.5 }}\nvary = [\"road\"]\n"
    );
    let road =
        polyline("ROAD", 0xB1, &[[2.0, 3.5, 0.0], [4.0, 3.5, 0.0], [4.0, 3.7, 0.0], [2.0, 3.7, 0.0]], true);
    let run = good(&format!("{}{road}", segmental(10.0, 2.5)), &job);
    let (ring, fill, road) =
        (22.0 * 0.6 * 6.25 * 2.0 * 0.8_f64.asin(), share(&run, "fill").weight, 2.0 * 0.2 * 48.0);
    near(share(&run, "road").weight, road, 1e-12);
    let [dead, all] = &run.spans[0].cases[..] else { panic!() };
    near(-dead.total_load[1], ring + 1.2 * fill, 1e-12);
    near(-all.total_load[1], ring + fill + 1.5 * road, 1e-12);
    assert!(says(&run, "case dead leaves out: road"));
    assert_eq!(dead.safety.as_ref().unwrap().status["load_factor"], Status::NotAsked);
    let safety = all.safety.as_ref().unwrap();
    assert!(safety.load_factor.is_some_and(|f| f > 1.0), "{:?}", safety.status);
    // In each case the listed forces add up to its total.
    for case in [dead, all] {
        let sum: f64 = case.forces.iter().map(|f| f[1]).sum();
        near(sum, case.total_load[1], 1e-12);
    }
}
