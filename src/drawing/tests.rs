//! Whole drawings from bytes.

use std::fmt::Write as _;

use proptest::prelude::*;

use super::*;
use crate::geometry::{Point, Segment};
use crate::job::{Job, Settings};
use crate::refusal::Refusal;
use crate::tags;

/// A drawing with these groups in its ENTITIES section, written `code value` with `|` between them.
pub(super) fn dxf(header: &str, tables: &str, blocks: &str, entities: &str) -> Vec<u8> {
    let mut out = String::new();
    let mut put = |text: &str| {
        for group in text.split('|').map(str::trim).filter(|g| !g.is_empty()) {
            let (code, value) = group.split_once(' ').unwrap_or((group, ""));
            writeln!(out, "{code}\n{value}").unwrap();
        }
    };
    put(&format!("0 SECTION|2 HEADER|9 $ACADVER|1 AC1015|{header}|0 ENDSEC"));
    put(&format!("0 SECTION|2 TABLES|{tables}|0 ENDSEC|0 SECTION|2 BLOCKS|{blocks}|0 ENDSEC"));
    put(&format!("0 SECTION|2 ENTITIES|{entities}|0 ENDSEC|0 EOF"));
    out.into_bytes()
}

pub(super) fn read_with(bytes: Vec<u8>, settings: &Settings) -> Result<Drawing, Refusal> {
    let source = tags::Source::from_bytes(bytes);
    let outline = scan(&source, settings)?;
    read_outlined(&source, &outline, settings)
}

fn read(entities: &str) -> Result<Drawing, Refusal> {
    read_with(dxf("", "", "", entities), &Settings::default())
}

pub(super) fn job(text: &str) -> Settings {
    Job::parse(text.as_bytes(), None).unwrap().for_sheet(std::path::Path::new("a.dxf")).unwrap()
}

pub(super) const AXIS: &str =
    "0 LWPOLYLINE|5 A1|8 Arch-Axis|90 3|70 0|10 0|20 0|42 -0.2|10 20|20 8|42 -0.2|10 40|20 0";

pub(super) fn near(a: Point, x: f64, y: f64) -> bool {
    (a - Point::new(x, y)).hypot() < 1e-9
}

#[test]
fn curves_of_all_kinds() {
    let d = read(&format!(
        "{AXIS}|0 LINE|5 A2|8 ARCH-AXIS|10 40|20 0|11 50|21 1\
         |0 ARC|5 A3|8 ARCH-AXIS|10 60|20 0|40 5|50 90|51 180|210 0|220 0|230 1\
         |0 POLYLINE|5 A4|8 ARCH-AXIS|66 1|10 0|20 0|30 0|70 0|0 VERTEX|8 X|10 1|20 2|42 1|0 VERTEX|8 X|10 3|20 2|0 SEQEND"
    ))
    .unwrap();
    assert_eq!(d.axis.len(), 4);
    assert_eq!(d.axis_layers, ["Arch-Axis"]);
    let handles: Vec<_> = d.axis.iter().map(|c| c.source.handle.as_deref().unwrap()).collect();
    assert_eq!(handles, ["A1", "A2", "A3", "A4"]);
    assert_eq!(d.axis[1].source.layer, "ARCH-AXIS");
    assert!(d.axis[0].pieces.iter().all(|p| matches!(p, Segment::Arc { .. })));
    assert!(near(d.axis[2].pieces[0].start(), 60.0, 5.0) && near(d.axis[2].pieces[0].end(), 55.0, 0.0));
    let half = d.axis[3].pieces[0];
    assert!(near(half.point_at(half.length() / 2.0), 2.0, 1.0));
    assert!(d.notes.contains(&Note::NoLoadLayer));
}

#[test]
fn entities_seen_from_behind() {
    // The same arc and polyline, mirrored in x by their normal.
    let d = read(
        "0 ARC|8 ARCH-AXIS|10 -60|20 0|30 0|40 5|50 0|51 90|210 0|220 0|230 -1\
         |0 LWPOLYLINE|8 ARCH-AXIS|90 2|70 0|10 -40|20 0|42 0.5|10 -30|20 0|230 -1\
         |0 POINT|8 ARCH-LOADS|10 7|20 1|230 -1|0 CIRCLE|8 ARCH-LOADS|10 7|20 1|40 2|230 -1\
         |0 INSERT|8 ARCH-LOADS|2 B|10 7|20 3|230 -1|0 TEXT|8 ARCH-LOADS|10 7|20 1|40 1|1 5|230 -1",
    )
    .unwrap();
    assert!(near(d.axis[0].pieces[0].start(), 55.0, 0.0) && near(d.axis[0].pieces[0].end(), 60.0, 5.0));
    let bulge = d.axis[1].pieces[0];
    assert!(near(bulge.start(), 40.0, 0.0));
    // Bulge 0.5 over a chord of 10 bends 2.5 to the right of its direction, in its own system downward; so also seen from
    // behind, where only x is turned.
    assert!(near(bulge.point_at(bulge.length() / 2.0), 35.0, -2.5));
    // A POINT is given in drawing coordinates whatever its normal; circles, blocks and texts are not.
    assert!(
        near(d.points[0].at, 7.0, 1.0) && near(d.points[1].at, -7.0, 1.0) && near(d.points[2].at, -7.0, 3.0)
    );
    let text = &d.texts[0];
    assert!(near(text.anchor, -7.0, 1.0) && text.along.x < 0.0);
    assert!(text.distance(Point::new(-7.3, 1.5)) < 1e-12 && text.distance(Point::new(-6.5, 1.5)) > 0.1);
}

#[test]
fn what_does_not_lie_flat_is_refused() {
    for entity in [
        "0 LINE|5 A9|8 ARCH-AXIS|10 0|20 0|30 0|11 40|21 0|31 3",
        "0 ARC|5 A9|8 ARCH-AXIS|10 60|20 0|30 0|40 5|50 0|51 90|210 0|220 -1|230 0",
        "0 POLYLINE|5 A9|8 ARCH-AXIS|66 1|70 8|0 VERTEX|8 X|10 1|20 2|30 0|0 VERTEX|8 X|10 3|20 2|30 1|0 SEQEND",
        "0 LWPOLYLINE|5 A9|8 ARCH-AXIS|38 2|10 40|20 0|10 50|20 0",
    ] {
        let refusal = read(&format!("{AXIS}|{entity}")).unwrap_err();
        assert_eq!((refusal.check.as_str(), refusal.handle.as_deref()), ("not-flat", Some("A9")), "{entity}");
        assert_eq!(refusal.layer.as_deref(), Some("ARCH-AXIS"));
    }
}

#[test]
fn a_bad_number_is_told_with_its_line() {
    let bytes = dxf("", "", "", &format!("{AXIS}|0 LINE|5 B7|8 ARCH-AXIS|62 1|10 40|20 0|11 5O|21 1"));
    let line = 1 + String::from_utf8(bytes.clone()).unwrap().lines().position(|l| l == "5O").unwrap() as u64;
    let refusal = read_with(bytes, &Settings::default()).unwrap_err();
    assert_eq!(refusal.check, "entity-number");
    assert_eq!((refusal.line, refusal.handle.as_deref()), (Some(line), Some("B7")));
    assert!(
        refusal.message.contains("\"5O\"") && refusal.message.contains("group 11"),
        "{}",
        refusal.message
    );
    for (entity, check) in [
        ("0 LINE|8 ARCH-AXIS|10 nan|20 0|11 1|21 1", "entity-number"),
        ("0 LINE|8 ARCH-AXIS|10 1e300|20 0|11 1|21 1", "entity-number"),
        ("0 LINE|8 ARCH-AXIS|10 1|20 0|11 1", "entity-incomplete"),
        ("0 ARC|8 ARCH-AXIS|10 1|20 0|40 0|50 0|51 1", "entity-number"),
        ("0 LWPOLYLINE|8 ARCH-AXIS|42 1|10 1|20 0|10 2|20 0", "entity-incomplete"),
        ("0 LWPOLYLINE|8 ARCH-AXIS|10 1|20 0|10 2", "entity-incomplete"),
        ("0 LWPOLYLINE|8 ARCH-AXIS|70 x|10 1|20 0|10 2|20 0", "entity-number"),
        ("0 SPLINE|8 ARCH-AXIS|70 8", "entity-incomplete"),
        ("0 SPLINE|8 ARCH-AXIS|70 8|71 3", "spline"),
        ("0 SPLINE|8 ARCH-AXIS|70 8|71 3|10 0|20 0|10 1", "entity-incomplete"),
        ("0 SPLINE|8 ARCH-AXIS|70 8|71 1|40 0|40 1|40 0|40 1|10 0|20 0|10 1|20 0", "spline"),
        ("0 HELIX|8 ARCH-AXIS", "axis-kind"),
        ("0 CIRCLE|8 ARCH-AXIS|10 1|20 0|40 1", "axis-kind"),
    ] {
        assert_eq!(read(&format!("{AXIS}|{entity}")).unwrap_err().check, check, "{entity}");
    }
}

#[test]
fn paper_space_and_other_types_are_told() {
    let d = read(&format!(
        "{AXIS}|0 LINE|67 1|8 ARCH-AXIS|10 0|20 0|11 1|21 9|0 HATCH|5 C1|8 ARCH-AXIS|2 X\
         |0 POINT|8 ARCH-LOADS|10 5|20 9|0 LINE|5 C2|8 ARCH-LOADS|10 0|20 0|11 1|21 9|0 DIMENSION|8 ARCH-LOADS|2 *D1"
    ))
    .unwrap();
    assert_eq!(d.axis.len(), 1);
    assert!(d.notes.contains(&Note::PaperSpace { layer: "Arch-Axis".into(), count: 1 }), "{:?}", d.notes);
    let over: Vec<_> = d
        .notes
        .iter()
        .filter_map(|n| match n {
            Note::PassedOver { role, kind, could_be_load, .. } => {
                Some((*role, kind.as_str(), *could_be_load))
            }
            _ => None,
        })
        .collect();
    assert_eq!(over, [(Role::Axis, "HATCH", false), (Role::Loads, "DIMENSION", false)]);
    // A line on a load layer is read: it may be an arrow.
    assert_eq!(d.strokes.len(), 1);
}

#[test]
fn frozen_layers_are_read_and_told() {
    let tables = "0 TABLE|2 LAYER|70 1|0 LAYER|2 ARCH-AXIS|70 1|62 7|6 CONTINUOUS\
                  |0 LAYER|2 ARCH-LOADS|70 0|62 -7|6 CONTINUOUS|0 ENDTAB";
    let entities = format!("{AXIS}|0 POINT|8 ARCH-LOADS|10 5|20 9");
    let d = read_with(dxf("", tables, "", &entities), &Settings::default()).unwrap();
    assert_eq!(d.points.len(), 1);
    for (layer, frozen) in [("Arch-Axis", true), ("ARCH-LOADS", false)] {
        assert!(d.notes.contains(&Note::LayerHidden { layer: layer.into(), frozen }), "{:?}", d.notes);
    }
}

#[test]
fn texts_by_their_placing() {
    let d = read(&format!(
        "{AXIS}|0 POINT|8 ARCH-LOADS|10 5|20 9\
         |0 TEXT|8 ARCH-LOADS|10 1|20 2|40 0.5|1 %%uP1%%u = 12,5 kN|72 1|73 2|11 7|21 8|50 90\
         |0 TEXT|8 ARCH-LOADS|10 1|20 2|40 0.5|1 plain\
         |0 MTEXT|8 ARCH-LOADS|10 3|20 4|40 0.5|41 0|71 5|3 {{\\H2x;P2}} = |1 1\\~200 kN|11 0|21 1|31 0\
         |101 Embedded Object|70 1|10 1|20 0|30 0|11 9|21 9|31 0|40 9|41 9\
         |0 TEXT|8 ARCH-LOADS|10 1|20 2|40 0.5|1 Br\\U+00FCcke ^ x"
    ))
    .unwrap();
    let [a, b, c, e] = &d.texts[..] else { panic!("{:?}", d.texts) };
    assert_eq!(a.text, "P1 = 12,5 kN");
    assert!(near(a.anchor, 7.0, 8.0) && a.along.y > 0.99 && (a.upright.0 - 0.25).abs() < 1e-12);
    assert!((a.across.0 - a.across.1).abs() < 1e-12 && a.across.0 > 0.0);
    assert!(near(b.anchor, 1.0, 2.0) && b.across.0.abs() < 1e-12);
    assert_eq!(c.text, "P2 =1\u{a0}200 kN");
    assert!(near(c.anchor, 3.0, 4.0) && c.along.y > 0.99 && (c.height - 0.5).abs() < 1e-12);
    assert_eq!(e.text, "Brücke ^x");
}

#[test]
fn attributes_of_blocks() {
    let d = read(&format!(
        "{AXIS}|0 INSERT|8 ARCH-LOADS|66 1|2 POST|10 5|20 9\
         |0 ATTRIB|8 X|10 5|20 9|40 1|1 120|2 LOAD|70 0|100 AcDbXrecord|280 1|70 2|70 0|70 0|70 0|10 0|2 NO\
         |0 ATTRIB|8 X|10 5|20 9|40 1|1 P%%d7|2 NAME|70 0|0 SEQEND\
         |0 INSERT|8 ARCH-LOADS|2 POST|10 6|20 9"
    ))
    .unwrap();
    let attributes: Vec<_> =
        d.points[0].attributes.iter().map(|a| (a.tag.as_str(), a.value.as_str())).collect();
    assert_eq!(attributes, [("LOAD", "120"), ("NAME", "P°7")]);
    assert_eq!(d.points.len(), 2);
}

#[test]
fn axis_and_loads_by_name() {
    let rename = AXIS.replace("Arch-Axis", "B_Bogenachse");
    let d = read(&format!(
        "{rename}|0 LINE|8 GRID|10 0|20 0|11 9|21 0|0 POINT|8 Lasten|10 5|20 9|0 TEXT|8 Lasten|10 5|20 9|40 1|1 5\
         |0 POINT|8 Other|10 5|20 9"
    ))
    .unwrap();
    assert_eq!((d.axis.len(), d.points.len(), d.texts.len()), (1, 1, 1));
    assert_eq!(
        d.notes[..2],
        [
            Note::LayerGuessed {
                role: Role::Axis,
                layer: "B_Bogenachse".into(),
                reason: Reason::Word("bogen")
            },
            Note::LayerGuessed { role: Role::Loads, layer: "Lasten".into(), reason: Reason::Word("lasten") },
        ]
    );
}

#[test]
fn axis_and_loads_by_what_they_hold() {
    let rename = AXIS.replace("Arch-Axis", "L7");
    let others = "0 LINE|8 GROUND|10 -50|20 -5|11 90|21 -5|0 LWPOLYLINE|8 FRAME|70 1|10 -60|20 -60|10 99|20 -60|10 99|20 60\
                  |0 POINT|8 L8|10 10|20 9|0 POINT|8 L8|10 30|20 9|0 POINT|8 BOLTS|10 10|20 -9|0 POINT|8 BOLTS|10 30|20 -9";
    let d = read(&format!("{rename}|{others}")).unwrap();
    assert_eq!((d.axis_layers, d.load_layers), (vec!["L7".to_owned()], vec!["L8".to_owned()]));
    assert!(matches!(&d.notes[0], Note::LayerGuessed { reason: Reason::OneLine { span, rise }, .. }
        if (span - 40.0).abs() < 1e-9 && *rise > 7.9));
    assert!(matches!(&d.notes[1], Note::LayerGuessed { reason: Reason::PointsOver { over: 2, of: 2 }, .. }));
    // Two lines that could be it: refused, both named.
    let second = AXIS.replace("Arch-Axis", "L9");
    let refusal = read(&format!("{rename}|{second}|{others}")).unwrap_err();
    assert_eq!(refusal.check, "no-axis");
    assert!(refusal.message.contains("L7, L9"), "{}", refusal.message);
    // None.
    let refusal = read(others).unwrap_err();
    assert_eq!(refusal.check, "no-axis");
    assert!(
        refusal.message.contains("FRAME (1)") && refusal.message.contains("GROUND (1)"),
        "{}",
        refusal.message
    );
    assert!(read("").unwrap_err().message.contains("no layer holds lines"));
}

#[test]
fn layers_of_the_job() {
    let settings = job("[layers]\naxis = \"ARCH-AXES\"\n");
    let refusal = read_with(dxf("", "", "", AXIS), &settings).unwrap_err();
    assert_eq!(refusal.check, "layer-missing");
    assert!(refusal.message.contains("Arch-Axis"), "{}", refusal.message);
    let settings = job("[layers]\nloads = \"ARCH-AX*\"\naxis = \"arch-axis\"\n");
    let refusal = read_with(dxf("", "", "", AXIS), &settings).unwrap_err();
    assert_eq!(refusal.check, "layer-missing", "{refusal}");
    let settings = job("[layers]\naxis = \"X?\"\n");
    let d = read_with(dxf("", "", "", &AXIS.replace("Arch-Axis", "x1")), &settings).unwrap();
    assert_eq!(d.axis_layers, ["x1"]);
    assert!(!d.notes.iter().any(|n| matches!(n, Note::LayerGuessed { .. })));
    let refusal = read_with(dxf("", "", "", "0 TEXT|8 X1|10 0|20 0|40 1|1 a"), &settings).unwrap_err();
    assert_eq!((refusal.check.as_str(), refusal.layer.as_deref()), ("layer-unusable", Some("X1")));
    let blocks = format!("0 BLOCK|2 ARCH|10 0|20 0|{}|0 ENDBLK", AXIS.replace("Arch-Axis", "X1"));
    let refusal =
        read_with(dxf("", "", &blocks, "0 INSERT|8 0|67 1|2 ARCH|10 0|20 0"), &settings).unwrap_err();
    assert_eq!(refusal.check, "layer-elsewhere");
}

#[test]
fn units_from_the_header() {
    let with = |header: &str| read_with(dxf(header, "", "", AXIS), &Settings::default()).unwrap().unit;
    assert_eq!(with("9 $INSUNITS|70 4|9 $MEASUREMENT|70 0").name, "mm");
    assert_eq!(with("9 $INSUNITS|70 0|9 $MEASUREMENT|70 0").name, "ft");
    assert_eq!(with("").source, UnitSource::Assumed);
    let settings = job("[drawing]\nunit = \"cm\"\nscale = 50\n");
    let unit = read_with(dxf("9 $INSUNITS|70 4", "", "", AXIS), &settings).unwrap().unit;
    assert_eq!((unit.name, unit.source), ("cm", UnitSource::Job));
    assert!((unit.metres - 0.5).abs() < 1e-15);
}

proptest! {
    /// Texts pass through the crate unchanged, whatever is in them.
    #[test]
    fn texts_survive(text in "[\\PC^\\\\]{1,30}") {
        prop_assume!(!text.contains("%%") && !text.trim().is_empty());
        let plain = tags::carets(&tags::unescape(&text));
        prop_assume!(!plain.chars().any(char::is_control) && !plain.trim().is_empty());
        let mut bytes = String::from_utf8(dxf("", "", "", &format!("{AXIS}|0 POINT|8 ARCH-LOADS|10 5|20 9|0 TEXT|8 ARCH-LOADS|10 1|20 2|40 1|1 @@@"))).unwrap();
        bytes = bytes.replace("AC1015", "AC1032").replace("@@@", &text);
        let d = read_with(bytes.into_bytes(), &Settings::default()).unwrap();
        prop_assert_eq!(&d.texts[0].text, &plain);
    }

    /// Any groups in any order: read or refused, never a panic.
    #[test]
    fn odd_entities_do_no_harm(
        kind in prop::sample::select(vec!["LINE", "ARC", "ELLIPSE", "SPLINE", "LWPOLYLINE", "POLYLINE", "VERTEX", "INSERT", "ATTRIB", "TEXT", "MTEXT", "POINT", "CIRCLE"]),
        groups in prop::collection::vec(
            (prop::sample::select(vec![1, 2, 3, 10, 20, 30, 11, 21, 31, 40, 41, 42, 50, 51, 66, 70, 71, 72, 73, 75, 90, 100, 102, 210, 220, 230, 1001]),
             prop::sample::select(vec!["0", "1", "-1", "1.5", "1e11", "-7", "360", "x", "", "{", "}", "^", "AcDbXrecord", "\\", "99999"])),
            0..20),
        run in any::<bool>(),
    ) {
        let mut entity = format!("0 {kind}|8 ARCH-AXIS");
        for (code, value) in &groups {
            write!(entity, "|{code} {value}").unwrap();
        }
        if run {
            entity.push_str("|0 VERTEX|8 0|10 1|20 1|0 SEQEND");
        }
        let _ = read(&format!("{AXIS}|{entity}"));
        let _ = read(&format!("{AXIS}|{}", entity.replace("AXIS", "LOADS")));
    }
}
