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

/// Fill up to a level presses on the left half of a symmetrical extrados with K gamma b [y_l (y_1 - y_0) - (y_1² - y_0²) / 2]
/// between its end at y_0 and the crown at y_1: the integral of the pressure over the projection (closed form, derived).
#[test]
fn fill_presses_sideways_as_the_closed_form_says() {
    let run = good(&segmental(10.0, 2.5), &format!("{FILLED}earth_pressure = 0.4\n"));
    let (top, low, level) = (2.8, 6.55 * 0.6 - 3.75, 3.5);
    let expected = 0.4 * 18.0 * (level * (top - low) - (top * top - low * low) / 2.0);
    let fill = share(&run, "fill");
    near(fill.sideways[0], expected, 1e-12);
    near(fill.sideways[1], -expected, 1e-12);
    assert!(says(&run, "presses sideways with 0.400"));
    assert!(run.spans[0].cases[0].total_load[0].abs() < 1e-9);
    // The sideways forces are in the line: its push at the abutment and at the crown differ by them.
    let case = &run.spans[0].cases[0];
    let line = &case.lines[0];
    let crown =
        line.stations.iter().min_by(|a, b| (a.at[0] - 5.0).abs().total_cmp(&(b.at[0] - 5.0).abs())).unwrap();
    near(crown.thrust - line.left.as_ref().unwrap().horizontal, expected, 1e-9);
    let flat = good(&segmental(10.0, 2.4), FILLED);
    assert!(!says(&flat, "is taken to press downward only"));
    let steep = good(&segmental(10.0, 2.6), FILLED);
    assert!(says(&steep, "is taken to press downward only"));
}

/// A ring of 20 equal voussoirs under its own weight, fill to 3.5 m (as D03) and a load that varies at x = 2.5 m: the greatest
/// load as scipy's HiGHS finds it from the same joints, with weights and centroids of sectors in closed form and those of the
/// fill by a Gauss rule of 12 points (tests/fixtures/filled_ring.py, which shares no code with the program): 278.55036835309 kN, and 246.57887546870 kN
/// for 200 voussoirs.
#[test]
fn the_greatest_load_on_a_filled_ring_is_that_of_another_solver() {
    for (voussoirs, expected) in [(20, 278.550_368_353_09), (200, 246.578_875_468_70)] {
        let job = format!(
            "{}[loads]\nunit = \"kN\"\nunlabelled = 1.0\n[[case]]\nname = \"all\"\n\
             factors = {{ \"ARCH-LOADS\" = 1.0, self = 1.0, fill = 1.0 }}\nvary = [\"ARCH-LOADS\"]\n",
            FILLED.replace("depth = 0.6", &format!("depth = 0.6\nvoussoirs = {voussoirs}"))
        );
        let run = good(&format!("{}0 POINT|5 B1|8 ARCH-LOADS|10 2.5|20 3.5|", segmental(10.0, 2.5)), &job);
        near(run.spans[0].cases[0].safety.as_ref().unwrap().load_factor.unwrap(), expected, 1e-8);
    }
}

/// E21 (published): published worked sheet, hingeless parabolic masonry arch, 16 slices: V=184.63376; L=16, f=4, key depth 0.4,
/// brick 23 kN/m3, q_L=12 kN/m over the span, width 1; M.M. Reda Taha, N.G. Shrive, 'Analysis of Fixed End Arches', Example 1
/// (course sheet). The printed depths follow h=0.4 (sec phi)^(1/3); exact V 184.684388129, the sheet is low by its slices. Here the
/// ring and the load on it are drawn as outlines over the axis.
#[test]
fn a_published_load_take_down_by_outline() {
    let n = 4000;
    let axis = |k: i32| {
        let x = 16.0 * f64::from(k) / f64::from(n);
        (x, x * (16.0 - x) / 16.0)
    };
    let points: Vec<[f64; 3]> = (0..=n).map(|k| [axis(k).0, axis(k).1, 0.0]).collect();
    let band = |layer: &str, handle: u32, from: &dyn Fn(f64) -> f64, to: &dyn Fn(f64) -> f64| {
        let upper = points.iter().rev().map(|p| [p[0], p[1] + to(p[0]), 0.0]);
        let all: Vec<[f64; 3]> = points.iter().map(|p| [p[0], p[1] + from(p[0]), 0.0]).chain(upper).collect();
        polyline(layer, handle, &all, true)
    };
    // Vertical thickness of the ring: h sec phi.
    let thick = |x: f64| 0.4 * (1.0 + (1.0 - x / 8.0).powi(2)).powf(2.0 / 3.0);
    let entities = polyline("ARCH-AXIS", 0xA1, &points, false)
        + &band("BRICK", 0xB1, &|_| 0.0, &thick)
        + &band("LOAD", 0xB2, &thick, &|x| thick(x) + 0.5);
    let job = "[rib]\nwidth = 1.0\nvoussoirs = 16\n[line]\ngovern = \"through\"\n[[area]]\nname = \"ring\"\nlayer = \"BRICK\"\n\
               unit_weight = 23.0\n[[area]]\nname = \"load\"\nlayer = \"LOAD\"\nunit_weight = 24.0\n";
    let run = good(&entities, job);
    let end = run.spans[0].cases[0].lines[0].left.as_ref().unwrap();
    near(end.vertical, 184.684_388_129, 1e-7);
    near(end.vertical, 184.633_76, 3e-4);
    near(share(&run, "load").weight, 192.0, 1e-12);
    assert_eq!(share(&run, "ring").pieces, 16);
    assert!(!says(&run, "of the elevation together"));
}

/// Outlines of lines and arcs against the chords of them in a general-purpose geometry library (geo).
mod by_chords {
    use geo::{Area as _, BooleanOps as _, Centroid as _, Coord, LineString, Polygon};
    use proptest::prelude::*;
    use thrustmark::geometry::slab::{self, Bounding, Edge};
    use thrustmark::geometry::{Point, Segment};

    /// A loop around a centre, with arcs that bulge a little.
    fn outline(radii: &[(f64, f64)], centre: (f64, f64)) -> Vec<Segment> {
        let n = radii.len();
        let corner = |i: usize| {
            let angle = std::f64::consts::TAU * i as f64 / n as f64 + 0.1;
            Point::new(centre.0 + radii[i % n].0 * angle.cos(), centre.1 + radii[i % n].0 * angle.sin())
        };
        (0..n).map(|i| Segment::bulge(corner(i), corner((i + 1) % n), radii[i].1)).collect()
    }

    fn chords(pieces: &[Segment]) -> Polygon {
        let at = |piece: &Segment, k: u32| {
            let p = piece.point_at(piece.length() * f64::from(k) / 400.0);
            Coord { x: p.x, y: p.y }
        };
        let line: Vec<Coord> = pieces.iter().flat_map(|p| (0..400).map(move |k| at(p, k))).collect();
        Polygon::new(LineString::new(line), vec![])
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(48))]

        #[test]
        fn areas_centroids_and_overlaps(
            radii in prop::collection::vec((2.0..4.0, -0.15..0.15), 5..9),
            others in prop::collection::vec((2.0..4.0, -0.15..0.15), 5..9),
            shift in (-3.0..3.0, -2.0..2.0),
        ) {
            let (a, b) = (outline(&radii, (0.0, 0.0)), outline(&others, shift));
            let (p, q) = (chords(&a), chords(&b));
            let whole = slab::enclosed(&a);
            prop_assert!((whole.area - p.signed_area()).abs() < 2e-5 * whole.area);
            let (c, d) = (whole.centroid().unwrap(), p.centroid().unwrap());
            prop_assert!((c.x - d.x()).abs() < 1e-5 && (c.y - d.y()).abs() < 1e-5);
            let edges: Vec<Bounding> = [(&a, 0), (&b, 1)]
                .into_iter()
                .flat_map(|(loop_, owner)| loop_.iter().flat_map(Edge::of).map(move |edge| Bounding { edge, owner }))
                .collect();
            let (mut alone, mut both) = (0.0, 0.0);
            slab::walk(&edges, 2, 2, &[], &mut |part| {
                let m = part.moments().area;
                alone += if part.odd[0] { m } else { 0.0 };
                both += if part.odd[0] && part.odd[1] { m } else { 0.0 };
            })
            .unwrap();
            prop_assert!((alone - whole.area).abs() < 1e-11 * whole.area, "{alone} {}", whole.area);
            let overlap = p.intersection(&q).unsigned_area();
            prop_assert!((both - overlap).abs() < 1e-4 * whole.area, "{both} {overlap}");
        }
    }
}

/// The places of a filled span that weigh, as a run gives them.
fn weights(run: &Run) -> Vec<(f64, f64)> {
    let areas: Vec<_> = run.spans[0].loads.iter().filter(|l| l.set == "fill").collect();
    areas.iter().map(|l| (l.at[0], l.force[1])).collect()
}

proptest::proptest! {
    #![proptest_config(proptest::prelude::ProptestConfig::with_cases(12))]

    /// Cutting an outline in two changes nothing; a mirrored outline gives the mirrored weights.
    #[test]
    fn split_and_mirrored_outlines(left in -0.2..3.0_f64, right in 6.0..10.2_f64, cut in 0.2..0.8_f64, top in 3.2..4.0_f64) {
        let job = format!("{}layer = \"FILL\"\nunit_weight = 18.0\n", FILLED.split("level").next().unwrap());
        let boxed = |a: f64, b: f64, handle: u32, h: f64, k: f64| {
            polyline("FILL", handle, &[[a, 2.9, 0.0], [b, 2.9, 0.0], [b, k, 0.0], [a, h, 0.1]], true)
        };
        let axis = segmental(10.0, 2.5);
        let middle = left + (right - left) * cut;
        let straight = |a: f64, b: f64, handle: u32, h: f64, k: f64| boxed(a, b, handle, h, k).replace("|42 0.1", "|42 0.0");
        let at = top + 0.5 * cut;
        let one = good(&format!("{axis}{}", straight(left, right, 0xB1, top, top + 0.5)), &job);
        let two = straight(left, middle, 0xB1, top, at) + &straight(middle, right, 0xB2, at, top + 0.5);
        let two = good(&format!("{axis}{two}"), &job);
        for (a, b) in weights(&one).iter().zip(weights(&two)) {
            proptest::prop_assert!((a.0 - b.0).abs() < 1e-9 && (a.1 - b.1).abs() < 1e-9 * a.1.abs().max(1.0), "{a:?} {b:?}");
        }
        let mirrored = straight(10.0 - right, 10.0 - left, 0xB1, top + 0.5, top);
        let turned = good(&format!("{axis}{mirrored}"), &job);
        let back: Vec<_> = weights(&turned).into_iter().rev().map(|(x, f)| (10.0 - x, f)).collect();
        proptest::prop_assert_eq!(weights(&one).len(), back.len());
        for (a, b) in weights(&one).iter().zip(back) {
            proptest::prop_assert!((a.0 - b.0).abs() < 1e-9 && (a.1 - b.1).abs() < 1e-9 * a.1.abs().max(1.0), "{a:?} {b:?}");
        }
    }
}

/// Two equal three-hinged spans with one load of 100 kN at mid-span of the left one: it pushes with P L / (4 f) = 100 x 20 / 16
/// = 125 kN on the pier (statics), the other with nothing; a load of 40 kN over the right one takes 50 kN from that.
#[test]
fn neighbouring_spans_push_on_their_pier() {
    let arch = |x: f64, handle: u32| {
        polyline("ARCH-AXIS", handle, &[[x, 0.0, 0.0], [x + 10.0, 4.0, 0.0], [x + 20.0, 0.0, 0.0]], false)
    };
    let load = |x: f64, kn: f64, handle: u32| {
        format!(
            "0 POINT|5 {handle:X}|8 ARCH-LOADS|10 {x}|20 6|0 TEXT|5 {:X}|8 ARCH-LOADS|10 {x}|20 6.2|40 0.2|1 {kn} kN|",
            handle + 1
        )
    };
    let entities = arch(0.0, 0xA1) + &arch(21.0, 0xA2) + &load(10.0, 100.0, 0xB1) + &load(31.0, 40.0, 0xC1);
    let job = |limit: f64| {
        format!(
            "[rib]\ndepth = 0.5\nsupport = \"three-hinged\"\ntension = true\n[limits]\npier_push = {limit}\n"
        )
    };
    let run = good(&entities, &job(80.0));
    let pier = &run.spans[0].piers[0];
    assert_eq!((pier.case.as_str(), pier.next.as_str()), ("drawn", "span 2"));
    near(pier.least.unwrap(), 75.0, 1e-9);
    near(pier.greatest.unwrap(), 75.0, 1e-9);
    let verdict = |run: &Run| run.findings.iter().find(|f| f.check == Check::PierPush).map(|f| f.verdict);
    assert_eq!(verdict(&run), Some(thrustmark::outcome::FindingVerdict::Within));
    assert_eq!(verdict(&good(&entities, &job(70.0))), Some(thrustmark::outcome::FindingVerdict::Outside));
    // A train adds pushes that the limit was not held against.
    let train = "[[traffic]]\nname = \"axle\"\naxles = [[0.0, 100.0]]\nthrough = \"posts\"\nshare = 1.0\n";
    let moving = good(&entities, &(job(80.0) + train));
    assert!(says(&moving, "`pier_push` was not judged: under axle"));
    assert_eq!(moving.verdict, Some(thrustmark::outcome::Verdict::Unchecked));
    // Rings without tension leave a range: from the least push of one and the greatest of the other.
    let ring =
        |x: f64, handle: u32| polyline("ARCH-AXIS", handle, &[[x, 0.0, -0.5], [x + 10.0, 0.0, 0.0]], false);
    let entities = ring(0.0, 0xA1) + &ring(11.0, 0xA2);
    let job = "[rib]\ndepth = 0.8\nwidth = 1.0\nunit_weight = 22.0\nsupport = \"none\"\n\
               [line]\ndraw = [\"least-thrust\", \"greatest-thrust\"]\n[limits]\npier_push = 1.0\n";
    let run = good(&entities, job);
    let push = |kind| {
        let line = run.spans[0].cases[0].lines.iter().find(|l| l.kind == kind).unwrap();
        line.left.as_ref().unwrap().horizontal
    };
    let range = push(thrustmark::outcome::LineKind::GreatestThrust)
        - push(thrustmark::outcome::LineKind::LeastThrust);
    assert!(range > 5.0);
    let pier = &run.spans[0].piers[0];
    near(pier.greatest.unwrap(), range, 1e-8);
    near(pier.least.unwrap(), -range, 1e-8);
    assert!(says(&run, "it lies within what is possible"));
    assert!(says(
        &good(&segmental(10.0, 2.5), &FILLED.replace("[[area]]", "[limits]\npier_push = 9\n[[area]]")),
        "no pier"
    ));
}

/// Haunches solid up to y = 1 m: the ring of D03 works between the joints whose extrados ends lie at that level, cos a = (1 + 3.75)
/// / 6.55, so its weight is 22 x 0.6 x 6.25 x 2 a, and the fill is that over the extrados between those ends.
#[test]
fn the_working_ring_begins_above_its_backing() {
    let run = good(&segmental(10.0, 2.5), &FILLED.replace("depth = 0.6", "depth = 0.6\nbacking = 1.0"));
    let a = (4.75_f64 / 6.55).acos();
    let r: f64 = 6.55;
    let fill = 18.0 * (2.0 * r * a.sin() * 7.25 - r * r * (a + a.sin() * a.cos()));
    near(-run.spans[0].cases[0].total_load[1], 22.0 * 0.6 * 6.25 * 2.0 * a + fill, 1e-9);
    near(run.spans[0].axis.left[1], 6.25 * a.cos() - 3.75, 1e-9);
    near(run.spans[0].axis.span, 2.0 * 6.25 * a.sin(), 1e-9);
    assert!(says(&run, "are left to the haunches"));
    let idle = good(&segmental(10.0, 2.5), &FILLED.replace("depth = 0.6", "depth = 0.6\nbacking = 0.0"));
    assert!(says(&idle, "all of the ring works"));
    near(-idle.spans[0].cases[0].total_load[1], 433.867_015_345, 1e-9);
    // The stated depths go on to belong to their places: 0.6 m at the drawn springings, 0.4 m at the crown.
    let varied =
        good(&segmental(10.0, 2.5), &FILLED.replace("depth = 0.6", "depth = [0.6, 0.4]\nbacking = 1.0"));
    let ring = varied.spans[0].ring.as_ref().unwrap();
    assert!(ring.depth_max < 0.59 && ring.depth_max > 0.5, "{ring:?}");
    near(ring.depth_min, 0.4, 1e-9);
}

/// Of 10 kN/m over the whole span the part over the working ring acts, and is listed; the rest is told. 2 x 6.25 sin a m of 10 m
/// are left, with a as above.
#[test]
fn a_line_load_is_left_to_the_backing_with_what_it_stands_on() {
    let line = "0 LINE|5 B1|8 ARCH-LOADS|10 0.0|20 4.0|11 10.0|21 4.0|0 TEXT|5 B2|8 ARCH-LOADS|10 5.0|20 4.1|40 0.2|1 10 kN/m|";
    let job = "[rib]\ndepth = 0.6\nsupport = \"none\"\nbacking = 1.0\n[limits]\ngeometric_factor = 1.01\n";
    let run = good(&(segmental(10.0, 2.5) + line), job);
    let a = (4.75_f64 / 6.55).acos();
    let left = 10.0 * 2.0 * 6.25 * a.sin();
    let middle = f64::midpoint(run.spans[0].axis.left[0], run.spans[0].axis.right[0]);
    near(-run.spans[0].cases[0].total_load[1], left, 1e-9);
    near(-run.spans[0].loads.iter().map(|l| l.force[1]).sum::<f64>(), left, 1e-9);
    assert!(run.spans[0].loads.iter().all(|l| (l.at[0] - middle).abs() < 6.25 * a.sin()));
    assert!(says(&run, &format!("({:.3})", 100.0 - left)));
    // The ring is cut once: over another backing, or depth, no factor is worked out, and none is said to hold.
    let over = |what: &str, low: f64, high: f64| {
        let range = format!("[[range]]\nwhat = \"{what}\"\nlow = {low}\nhigh = {high}\n");
        let run = good(&(segmental(10.0, 2.5) + line), &format!("{job}{range}"));
        assert!(says(&run, &format!("the range over {what} changes no factor")));
        assert_eq!(run.verdict, Some(thrustmark::outcome::Verdict::Unchecked));
    };
    over("rib.backing", 0.8, 1.2);
    over("rib.depth", 0.5, 0.7);
}

/// Ring lines surveyed point by point: what their noise could move is told; the same ring without noise says nothing.
#[test]
fn the_noise_of_a_survey_is_told() {
    let line = |radius: f64, noise: f64, layer: &str, handle: u32| {
        let mut seed = u64::from(handle);
        let mut next = move || {
            seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            ((seed >> 33) as f64 / (1u64 << 31) as f64 - 0.5) * 12.0_f64.sqrt()
        };
        let points: Vec<[f64; 3]> = (0..=60)
            .map(|k| {
                let angle = std::f64::consts::PI * (0.85 - 0.7 * f64::from(k) / 60.0);
                let r = radius + noise * next();
                [r * angle.cos(), r * angle.sin(), 0.0]
            })
            .collect();
        polyline(layer, handle, &points, false)
    };
    let job = "[rib]\nwidth = 1.0\nunit_weight = 22.0\nsupport = \"none\"\n";
    let ring = |noise: f64| {
        good(&(line(5.7, noise, "ARCH-INTRADOS", 0xA1) + &line(6.3, noise, "ARCH-EXTRADOS", 0xA2)), job)
    };
    let run = ring(0.003);
    let told = run.findings.iter().find(|f| f.message.contains("surveyed point by point")).unwrap();
    // Twice the root of two times 3 mm, as well as sixty points tell it.
    near(told.value.unwrap(), 2.0 * 2.0_f64.sqrt() * 0.003, 0.25);
    assert!(told.message.contains("and the geometric factor of"), "{}", told.message);
    assert!(!says(&ring(0.0), "surveyed point by point"));
}
