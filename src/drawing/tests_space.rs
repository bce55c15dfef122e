//! Blocks, planes and curves that are none of lines and arcs.

use super::space::View;
use super::tests::{AXIS, dxf, job, near, read_with};
use super::*;
use crate::geometry::{Path, Point};
use crate::job::Settings;
use crate::refusal::Refusal;

fn read(blocks: &str, entities: &str) -> Result<Drawing, Refusal> {
    read_with(dxf("", "", blocks, entities), &Settings::default())
}

fn check(blocks: &str, entities: &str) -> String {
    read(blocks, entities).unwrap_err().check
}

fn ends(d: &Drawing) -> [Point; 2] {
    let pieces = &d.axis[0].pieces;
    [pieces[0].start(), pieces[pieces.len() - 1].end()]
}

const LOADS: &str = "0 POINT|5 B1|8 ARCH-LOADS|10 10|20 7|0 TEXT|5 B2|8 ARCH-LOADS|10 10|20 8|40 0.5|1 12 kN";

#[test]
fn elevation_in_nested_turned_scaled_blocks() {
    // The inner block has its base at (5, 0) and stands twice as large, turned by a quarter, at (100, 0) of the outer one;
    // the outer one is mirrored and stands at (0, 50).
    let blocks = format!(
        "0 BLOCK|2 INNER|10 5|20 0|{AXIS}|{LOADS}|0 ENDBLK\
         |0 BLOCK|2 OUTER|10 0|20 0|0 INSERT|8 0|2 Inner|10 100|20 0|41 2|42 2|50 90|0 ENDBLK"
    );
    let d = read(&blocks, "0 INSERT|8 0|2 OUTER|10 0|20 50|41 -1").unwrap();
    // (x, y) -> (2 (x - 5), 2 y) -> (-2 y, 2 (x - 5)) -> + (100, 0) -> mirrored, + (0, 50).
    let to = |x: f64, y: f64| Point::new(-(100.0 - 2.0 * y), 50.0 + 2.0 * (x - 5.0));
    let [a, b] = ends(&d);
    assert!((a - to(0.0, 0.0)).hypot() < 1e-9 && (b - to(40.0, 0.0)).hypot() < 1e-9, "{a} {b}");
    assert!(
        d.axis[0].pieces.iter().all(|p| matches!(p, crate::geometry::Segment::Arc { .. }))
            && !d.axis[0].fitted
    );
    let middle = d.axis[0].pieces[0].point_at(d.axis[0].pieces[0].length() / 2.0);
    let drawn = crate::geometry::Segment::bulge(Point::new(0.0, 0.0), Point::new(20.0, 8.0), -0.2);
    let wanted = drawn.point_at(drawn.length() / 2.0);
    assert!((middle - to(wanted.x, wanted.y)).hypot() < 1e-9);
    assert_eq!(d.axis[0].source.path, ["OUTER", "INNER"]);
    assert_eq!(d.axis[0].source.handle.as_deref(), Some("A1"));
    assert!((d.points[0].at - to(10.0, 7.0)).hypot() < 1e-9);
    assert_eq!(d.points[0].source.path, ["OUTER", "INNER"]);
    let text = &d.texts[0];
    assert!((text.anchor - to(10.0, 8.0)).hypot() < 1e-9 && (text.height - 1.0).abs() < 1e-12);
    // The text runs upward, and being mirrored, its letters stand to the right of it.
    assert!((text.along - crate::geometry::Vec2::new(0.0, 1.0)).hypot() < 1e-12);
    assert!(text.upright.0 > 0.9 && text.upright.1 == 0.0);
}

#[test]
fn layer_zero_takes_the_layer_of_the_reference() {
    let on_zero = AXIS.replace("Arch-Axis", "0");
    let blocks = format!(
        "0 BLOCK|2 RIB|10 0|20 0|{on_zero}|0 LINE|8 DETAIL|10 0|20 0|11 1|21 1|0 ENDBLK\
         |0 BLOCK|2 HALF|10 0|20 0|0 INSERT|8 0|2 RIB|10 1|20 0|0 ENDBLK"
    );
    let d = read(&blocks, "0 INSERT|8 arch-axis|2 HALF|10 0|20 0").unwrap();
    assert_eq!((d.axis.len(), d.axis[0].source.layer.as_str()), (1, "arch-axis"));
    assert!(near(ends(&d)[0], 1.0, 0.0));
    // On any other layer it serves as nothing.
    assert_eq!(check(&blocks, "0 INSERT|8 OTHER|2 HALF|10 0|20 0"), "no-axis");
}

#[test]
fn arrays_of_blocks() {
    let blocks = format!(
        "0 BLOCK|2 POST|10 0|20 0|0 POINT|8 ARCH-LOADS|10 0|20 9|0 ENDBLK|0 BLOCK|2 X|{AXIS}|0 ENDBLK"
    );
    let array = "0 INSERT|8 0|2 POST|10 5|20 0|70 7|71 2|44 5|45 1|0 INSERT|8 0|2 X|10 0|20 0";
    let d = read(&blocks, array).unwrap();
    assert_eq!(d.points.len(), 14);
    assert!(near(d.points[6].at, 35.0, 9.0) && near(d.points[13].at, 35.0, 10.0));
    // Turned by a quarter, columns go up and rows to the left; their distances are not scaled.
    let turned = array.replace("45 1", "45 1|50 90|41 3|42 3");
    let d = read(&blocks, &turned).unwrap();
    assert!(near(d.points[13].at, 5.0 - 27.0 - 1.0, 30.0), "{:?}", d.points[13].at);
}

#[test]
fn references_on_the_loads_layer_are_loads_and_nothing_else() {
    let blocks =
        "0 BLOCK|2 ARROW|10 0|20 0|0 POINT|8 ARCH-LOADS|10 0|20 0|0 LINE|8 0|10 0|20 0|11 0|21 1|0 ENDBLK";
    let d = read(blocks, &format!("{AXIS}|0 INSERT|8 ARCH-LOADS|2 ARROW|10 10|20 9")).unwrap();
    assert_eq!(d.points.len(), 1);
    let told =
        Note::InBlock { role: Role::Loads, block: "ARROW".into(), layer: "ARCH-LOADS".into(), count: 1 };
    assert!(d.notes.contains(&told), "{:?}", d.notes);
}

#[test]
fn unequal_scales_make_ellipses() {
    let half = "0 ARC|8 ARCH-AXIS|10 0|20 0|40 10|50 0|51 180";
    let d = read(&format!("0 BLOCK|2 A|{half}|0 ENDBLK"), "0 INSERT|8 0|2 A|10 7|20 1|41 2|42 0.8|50 30")
        .unwrap();
    assert!(d.axis[0].fitted && d.notes.iter().any(|n| matches!(n, Note::CurveFitted { .. })));
    let path = Path::new(d.axis[0].pieces.iter().copied()).unwrap();
    let (sin, cos) = 30.0f64.to_radians().sin_cos();
    for i in 0..=500 {
        let t = std::f64::consts::PI * f64::from(i) / 500.0;
        let (x, y) = (20.0 * t.cos(), 8.0 * t.sin());
        let p = Point::new(7.0 + cos * x - sin * y, 1.0 + sin * x + cos * y);
        assert!(path.nearest(p).1 < 3e-8, "{t}: {}", path.nearest(p).1);
    }
    assert!(d.axis[0].pieces.len() < 5000, "{}", d.axis[0].pieces.len());
    // The same as an entity of its own, and with its axes swapped.
    for entity in [
        "0 ELLIPSE|8 ARCH-AXIS|10 0|20 0|11 20|21 0|40 0.4|41 0|42 3.141592653589793",
        "0 ELLIPSE|8 ARCH-AXIS|10 0|20 0|11 0|21 -8|40 2.5|41 1.5707963267948966|42 4.71238898038469|210 0|220 0|230 1",
    ] {
        let d = read("", entity).unwrap();
        let path = Path::new(d.axis[0].pieces.iter().copied()).unwrap();
        let p = Point::new(20.0 * 0.6, 8.0 * 0.8);
        assert!(path.nearest(p).1 < 3e-8, "{}", path.nearest(p).1);
        assert!(near(path.end(), -20.0, 0.0) || near(path.start(), -20.0, 0.0), "{:?}", path.end());
    }
    assert_eq!(
        check(&format!("0 BLOCK|2 A|{half}|0 ENDBLK"), "0 INSERT|8 0|2 A|10 7|20 1|42 0"),
        "block-scale"
    );
}

#[test]
fn splines_against_closed_forms() {
    // A quadratic with control points (0, 0), (20, 16), (40, 0) is the parabola y = 32 x (40 - x) / 1600.
    let parabola = "0 SPLINE|8 ARCH-AXIS|210 0|220 0|230 1|70 8|71 2|72 6|73 3|74 0|40 0|40 0|40 0|40 1|40 1|40 1\
        |10 0|20 0|30 0|10 20|20 16|30 0|10 40|20 0|30 0";
    let d = read("", parabola).unwrap();
    let path = Path::new(d.axis[0].pieces.iter().copied()).unwrap();
    for i in 0..=400 {
        let x = f64::from(i) / 10.0;
        let y = 32.0 * x * (40.0 - x) / 1600.0;
        assert!(path.nearest(Point::new(x, y)).1 < 6e-8, "{x}: {}", path.nearest(Point::new(x, y)).1);
    }
    // A rational one is a quarter circle: weights 1, cos 45°, 1.
    let w = 0.5f64.sqrt();
    let quarter = format!(
        "0 SPLINE|8 ARCH-AXIS|70 12|71 2|72 6|73 3|74 0|40 0|40 0|40 0|40 1|40 1|40 1\
         |10 10|20 0|41 1|10 10|20 10|41 {w}|10 0|20 10|41 1"
    );
    let d = read("", &quarter).unwrap();
    for p in d.axis[0].pieces.iter().flat_map(|s| [s.start(), s.point_at(s.length() / 2.0)]) {
        assert!((p.to_vec2().hypot() - 10.0).abs() < 1e-7, "{p}");
    }
    let length: f64 = d.axis[0].pieces.iter().map(crate::geometry::Segment::length).sum();
    assert!((length - 5.0 * std::f64::consts::PI).abs() < 1e-7);
    // A kink at a knot of full multiplicity stays a kink.
    let kinked = "0 SPLINE|8 ARCH-AXIS|70 8|71 1|40 0|40 0|40 1|40 2|40 2|10 0|20 0|10 20|20 8|10 40|20 0";
    let d = read("", kinked).unwrap();
    let length: f64 = d.axis[0].pieces.iter().map(crate::geometry::Segment::length).sum();
    assert!((length - 2.0 * (20.0f64 * 20.0 + 64.0).sqrt()).abs() < 1e-9);
}

#[test]
fn fitted_polylines_are_read_by_what_is_drawn() {
    // Spline-fit: control points (16) are the frame, spline vertices (8) are what is drawn.
    let poly = "0 POLYLINE|8 ARCH-AXIS|66 1|10 0|20 0|30 0|70 4|75 6\
        |0 VERTEX|8 0|10 0|20 0|70 16|0 VERTEX|8 0|10 20|20 16|70 16|0 VERTEX|8 0|10 40|20 0|70 16\
        |0 VERTEX|8 0|10 0|20 0|70 8|0 VERTEX|8 0|10 20|20 8|70 8|0 VERTEX|8 0|10 40|20 0|70 8|0 SEQEND";
    let d = read("", poly).unwrap();
    assert_eq!(d.axis[0].pieces.len(), 2);
    assert!(near(d.axis[0].pieces[0].end(), 20.0, 8.0));
}

/// The axis as a 3-D polyline through places of space, with a load, from x and y of the elevation.
fn solid(to: impl Fn(f64, f64) -> [f64; 3]) -> String {
    let mut out = "0 POLYLINE|8 ARCH-AXIS|66 1|10 0|20 0|30 0|70 8".to_owned();
    for (x, y) in [(0.0, 0.0), (10.0, 6.0), (20.0, 8.0), (30.0, 6.0), (40.0, 0.0)] {
        let [x, y, z] = to(x, y);
        out += &format!("|0 VERTEX|8 0|10 {x}|20 {y}|30 {z}|70 32");
    }
    let [x, y, z] = to(10.0, 7.0);
    out + &format!("|0 SEQEND|0 POINT|8 ARCH-LOADS|10 {x}|20 {y}|30 {z}")
}

#[test]
fn upright_planes_are_found() {
    let s = 0.5f64.sqrt();
    for (to, at, plane) in [
        (Box::new(|x, y| [x, 3.0, y]) as Box<dyn Fn(f64, f64) -> [f64; 3]>, 0.0, View::XZ.plane(-3.0)),
        (Box::new(|x, y| [-2.0, x, y]), 0.0, View::YZ.plane(-2.0)),
        (Box::new(move |x: f64, y| [s * x, s * x + 1.0, y]), s, {
            let mut plane =
                View::through(&[[0.0, 1.0, 0.0], [1.0, 2.0, 0.0], [0.5, 1.5, 1.0]]).unwrap().plane(-s);
            plane.origin = plane.origin.map(|c| c + 0.0);
            plane
        }),
    ] {
        let d = read("", &solid(to)).unwrap();
        let [a, b] = ends(&d);
        assert!(near(a, at, 0.0) && near(b, 40.0 + at, 0.0), "{a} {b}");
        assert!(near(d.points[0].at, 10.0 + at, 7.0));
        for (found, wanted) in
            [(d.plane.right, plane.right), (d.plane.up, plane.up), (d.plane.origin, plane.origin)]
        {
            assert!(found.iter().zip(wanted).all(|(a, b)| (a - b).abs() < 1e-9), "{:?} {plane:?}", d.plane);
        }
        assert!(d.notes.iter().any(|n| matches!(n, Note::PlaneGuessed { .. })));
    }
    // Flat, but not in an upright plane.
    assert_eq!(check("", &solid(|x, y| [x, y, y])), "not-flat");
    // A load beside the plane.
    let beside = solid(|x, y| [x, 3.0, y]).replace("10 10|20 3|30 7", "10 10|20 4|30 7");
    assert_eq!(check("", &beside), "not-flat");
}

#[test]
fn the_stated_plane_holds() {
    let xz = solid(|x, y| [x, 3.0, y]);
    let stated =
        |plane: &str| read_with(dxf("", "", "", &xz), &job(&format!("[drawing]\nplane = \"{plane}\"\n")));
    let d = stated("xz").unwrap();
    assert!(!d.notes.iter().any(|n| matches!(n, Note::PlaneGuessed { .. })));
    assert_eq!(stated("xy").unwrap_err().check, "not-flat");
    assert_eq!(stated("yz").unwrap_err().check, "not-flat");
    // Arcs, polylines and texts of an upright elevation have a normal of their own: here toward negative y.
    let frame = "210 0|220 -1|230 0";
    let upright = format!(
        "0 ARC|8 ARCH-AXIS|10 20|20 -21|30 3|40 29|50 46.397181027296|51 133.602818972704|{frame}\
         |0 TEXT|8 ARCH-LOADS|10 10|20 9|30 3|40 0.5|1 12 kN|{frame}|0 POINT|8 ARCH-LOADS|10 10|20 -3|30 8"
    );
    let d = read("", &upright).unwrap();
    let [a, b] = ends(&d);
    assert!(
        (a - Point::new(40.0, 0.0)).hypot() < 1e-9 && (b - Point::new(0.0, 0.0)).hypot() < 1e-9,
        "{a} {b}"
    );
    assert!(near(d.texts[0].anchor, 10.0, 9.0) && near(d.points[0].at, 10.0, 8.0));
    assert!((d.texts[0].along.x - 1.0).abs() < 1e-12 && d.texts[0].upright == (0.0, 0.5));
    // An elevation in a block that stands upright in the model.
    let blocks = format!("0 BLOCK|2 E|10 0|20 0|{AXIS}|{LOADS}|0 ENDBLK");
    let d = read(&blocks, &format!("0 INSERT|8 0|2 E|10 0|20 0|30 -4|{frame}")).unwrap();
    assert!(near(ends(&d)[1], 40.0, 0.0) && near(d.points[0].at, 10.0, 7.0));
    assert!((d.plane.origin[1] - 4.0).abs() < 1e-12);
}

#[test]
fn hostile_blocks_are_refused() {
    let own = format!("0 BLOCK|2 A|{AXIS}|0 INSERT|8 0|2 B|0 ENDBLK|0 BLOCK|2 B|0 INSERT|8 0|2 a|0 ENDBLK");
    let refusal = read(&own, "0 INSERT|5 77|8 0|2 A|10 0|20 0").unwrap_err();
    assert_eq!(refusal.check, "block-loop");
    assert!(refusal.message.contains("A in B"), "{refusal}");
    assert!(refusal.line.is_some());
    // Ten blocks, each of which holds the next ten times over.
    let mut bomb = format!("0 BLOCK|2 X10|{AXIS}|0 ENDBLK");
    for i in 0..10 {
        let inner = format!("|0 INSERT|8 0|2 X{}|10 0|20 0", i + 1).repeat(10);
        bomb += &format!("|0 BLOCK|2 X{i}{inner}|0 ENDBLK");
    }
    let start = std::time::Instant::now();
    let refusal = read(&bomb, "0 INSERT|8 0|2 X0|10 0|20 0").unwrap_err();
    assert!(refusal.check == "block-explosion" && refusal.message.contains("200000"), "{refusal}");
    assert!(start.elapsed().as_secs() < 20);
    let array = format!("0 BLOCK|2 X|{AXIS}|0 ENDBLK");
    let entity = "0 INSERT|8 0|2 X|10 0|20 0|70 32767|71 32767|44 1|45 1";
    assert_eq!(check(&array, entity), "block-explosion");
    let mut deep = format!("0 BLOCK|2 Y200|{AXIS}|0 ENDBLK");
    for i in 0..200 {
        deep += &format!("|0 BLOCK|2 Y{i}|0 INSERT|8 0|2 Y{}|10 0|20 0|0 ENDBLK", i + 1);
    }
    assert_eq!(check(&deep, "0 INSERT|8 0|2 Y0|10 0|20 0"), "block-depth");
    assert_eq!(check(&array, "0 INSERT|8 0|2 X|10 zero|20 0"), "entity-number");
    // Blocks that bring in nothing may hold what they like.
    let loops = format!("{array}|0 BLOCK|2 L|0 INSERT|8 0|2 L|0 ENDBLK");
    assert!(read(&loops, "0 INSERT|8 0|2 L|0 INSERT|8 0|2 X|10 0|20 0").is_ok());
}

#[test]
fn external_references_are_named() {
    let blocks = "0 BLOCK|5 30|8 0|2 BRIDGE|70 4|10 0|20 0|1 ..\\bridge.dwg|0 ENDBLK";
    let layers = "0 TABLE|2 LAYER|70 2|0 LAYER|2 0|70 0|62 7|6 CONTINUOUS|0 LAYER|2 BRIDGE|Arch-Axis|70 16|62 1|6 CONTINUOUS|0 ENDTAB";
    // The bar of the layer's name is no separator here.
    let layers = layers.replace("BRIDGE|Arch-Axis", "BRIDGE@Arch-Axis");
    let bytes = dxf("", &layers, blocks, "0 INSERT|8 0|2 BRIDGE|10 0|20 0");
    let bytes = String::from_utf8(bytes).unwrap().replace('@', "|").into_bytes();
    let refusal = read_with(bytes, &Settings::default()).unwrap_err();
    assert_eq!(refusal.check, "axis-in-reference");
    assert!(refusal.message.contains("BRIDGE") && refusal.message.contains("..\\bridge.dwg"), "{refusal}");
    let refusal = read(blocks, "0 INSERT|8 0|2 BRIDGE|10 0|20 0").unwrap_err();
    assert_eq!(refusal.check, "no-axis");
    assert!(refusal.message.contains("..\\bridge.dwg"), "{refusal}");
}

#[test]
fn viewports_tell_what_they_show() {
    let viewport = |centre: f64, height: f64, more: &str| {
        format!("|0 VIEWPORT|8 0|67 1|68 1|69 2|10 0|20 0|40 400|41 200|12 {centre}|22 4|45 {height}|{more}")
    };
    let d = read(
        "",
        &format!(
            "{AXIS}{}{}{}",
            viewport(20.0, 30.0, ""),
            viewport(0.0, 20.0, ""),
            viewport(500.0, 20.0, "")
        ),
    )
    .unwrap();
    let (low, high) = d.axis_box();
    let shown: Vec<_> = d.viewports.iter().map(|v| v.shows(low, high)).collect();
    assert_eq!(shown, [viewport::Shown::Whole, viewport::Shown::Part, viewport::Shown::Nothing]);
    assert!(!d.notes.iter().any(|n| matches!(n, Note::NotInLayouts { .. })));
    let d = read("", &format!("{AXIS}{}{}", viewport(0.0, 20.0, ""), viewport(500.0, 20.0, ""))).unwrap();
    assert!(d.notes.contains(&Note::NotInLayouts { viewports: 2, part: 1 }));
    // An upright elevation is shown by a viewport that looks at it from the front, by no plan.
    let front = "16 0|26 -1|36 0|17 20|27 3|37 0";
    let d = read(
        "",
        &format!("{}{}{}", solid(|x, y| [x, 3.0, y]), viewport(0.0, 30.0, front), viewport(20.0, 30.0, "")),
    )
    .unwrap();
    let (low, high) = d.axis_box();
    assert_eq!(d.viewports.iter().map(|v| v.shows(low, high)).collect::<Vec<_>>(), [viewport::Shown::Whole]);
    assert!((d.viewports[0].scale - 200.0 / 30.0).abs() < 1e-12);
}
