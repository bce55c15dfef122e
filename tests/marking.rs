//! The rules of marking, one by one, on small drawings.
// Helpers of tests stand outside of the test functions that the lints exempt.
#![allow(clippy::unwrap_used, clippy::print_stdout)]

use proptest::prelude::*;

use thrustmark::tags::marks::Plane;
use thrustmark::tags::validate::{Rule, new_problems, problems};
use thrustmark::tags::{Candidate, Note, Options, Outline, Source, mark, scan, unmark};

mod common;

use common::{TILTED, bytes, marks, round_trip};

/// Lines of an ASCII drawing from `code value` words separated by semicolons.
fn ascii(tags: &str, end: &str) -> String {
    tags.split(';')
        .map(str::trim)
        .filter(|tag| !tag.is_empty())
        .map(|tag| {
            let (code, value) = tag.split_once(' ').unwrap_or((tag, ""));
            format!("{code:>3}{end}{value}{end}")
        })
        .collect()
}

const R2010: &str = "0 SECTION;2 HEADER;9 $ACADVER;1 AC1024;9 $HANDSEED;5 2F;9 $LTSCALE;40 0.5;0 ENDSEC;
    0 SECTION;2 TABLES;
    0 TABLE;2 LTYPE;5 1;330 0;100 AcDbSymbolTable;70 0;0 ENDTAB;
    0 TABLE;2 LAYER;5 2;330 0;100 AcDbSymbolTable;70 1;
    0 LAYER;5 10;330 2;100 AcDbSymbolTableRecord;100 AcDbLayerTableRecord;2 0;70 0;62 7;6 Continuous;370 -3;390 F;347 1E;348 0;
    0 ENDTAB;
    0 TABLE;2 APPID;5 3;330 0;100 AcDbSymbolTable;70 0;0 ENDTAB;
    0 TABLE;2 BLOCK_RECORD;5 4;330 0;100 AcDbSymbolTable;70 1;
    0 BLOCK_RECORD;5 1F;330 4;100 AcDbSymbolTableRecord;100 AcDbBlockTableRecord;2 *MODEL_SPACE;340 0;
    0 ENDTAB;0 ENDSEC;
    0 SECTION;2 BLOCKS;
    0 BLOCK;5 20;330 1F;100 AcDbEntity;8 0;100 AcDbBlockBegin;2 *MODEL_SPACE;70 0;10 0.0;20 0.0;30 0.0;
    0 ENDBLK;5 21;330 1F;100 AcDbEntity;8 0;100 AcDbBlockEnd;0 ENDSEC;
    0 SECTION;2 ENTITIES;
    0 LINE;5 2A;330 1F;100 AcDbEntity;8 0;100 AcDbLine;10 0.0;20 0.0;30 0.0;11 1.0;21 0.0;31 0.0;
    0 ENDSEC;
    0 SECTION;2 OBJECTS;0 ACDBPLACEHOLDER;5 F;330 0;0 MATERIAL;5 1E;330 0;100 AcDbMaterial;0 ENDSEC;0 EOF";

const R12: &str = "0 SECTION;2 HEADER;9 $ACADVER;1 AC1009;0 ENDSEC;0 SECTION;2 ENTITIES;
    0 LINE;8 0;10 0.0;20 0.0;30 0.0;11 1.0;21 0.0;31 0.0;0 ENDSEC;0 EOF";

fn marked(text: &str) -> (Outline, String) {
    let (outline, marked) = round_trip(&Source::from_bytes(text), &marks(Plane::XY)).unwrap();
    (outline, String::from_utf8(bytes(&marked)).unwrap())
}

/// The tags of a record from its opening one, as `code value` words, up to the next record.
fn records<'a>(text: &'a str, kind: &str) -> Vec<Vec<(i32, &'a str)>> {
    let lines: Vec<&str> = text.lines().collect();
    let tags: Vec<(i32, &str)> =
        lines.chunks(2).filter_map(|pair| Some((pair[0].trim().parse().ok()?, *pair.get(1)?))).collect();
    tags.chunk_by(|_, next| next.0 != 0).filter(|record| record[0] == (0, kind)).map(<[_]>::to_vec).collect()
}

fn codes(record: &[(i32, &str)]) -> Vec<i32> {
    record.iter().map(|tag| tag.0).collect()
}

#[test]
fn handles_begin_above_seed_and_highest_and_seed_rises() {
    let (_, text) = marked(&ascii(R2010, "\n"));
    let lines = records(&text, "LINE");
    assert_eq!(lines.len(), 2);
    // Two line types, three layers and the application come first: 2F to 34; then the line.
    assert_eq!(records(&text, "LTYPE")[0][1], (5, "2F"));
    assert_eq!(lines[1][..4], [(0, "LINE"), (5, "35"), (330, "1F"), (100, "AcDbEntity")]);
    assert!(text.contains("$HANDSEED\n  5\n3D\n"), "{text}");
    // A seed that is too low is not believed, and neither is a reference left out of account.
    let (_, text) = marked(&ascii(&R2010.replace("5 2F;9", "5 2;9"), "\n"));
    assert_eq!(records(&text, "LTYPE")[0][1], (5, "2B"));
    let (_, text) = marked(&ascii(&R2010.replace("340 0", "340 FF"), "\n"));
    assert_eq!(records(&text, "LTYPE")[0][1], (5, "100"));
    let (_, text) = marked(&ascii(&R2010.replace("5 2F;9", "5 zz ;9"), "\n"));
    assert_eq!(records(&text, "LTYPE")[0][1], (5, "2B"));
    assert!(text.contains("$HANDSEED\n  5\n39\n"), "{text}");
    // No room above: the lowest free handles, and a seed that is never lowered.
    let (_, text) = marked(&ascii(&R2010.replace("5 2F;9", "5 FFFFFFFFFFFFFFFE;9"), "\n"));
    assert_eq!(records(&text, "LTYPE")[0][1], (5, "5"));
    assert!(text.contains("$HANDSEED\n  5\nFFFFFFFFFFFFFFFE\n"), "{text}");
    let (_, text) = marked(&ascii(&R2010.replace("5 2A;", "5 FFFFFFFFFFFFFFFF;"), "\n"));
    assert_eq!(records(&text, "LTYPE")[0][1], (5, "5"));
}

#[test]
fn layers_copy_what_they_do_not_choose() {
    let (_, text) = marked(&ascii(R2010, "\n"));
    let layers = records(&text, "LAYER");
    let ours = &layers[1];
    assert_eq!(
        ours[..13],
        [
            (0, "LAYER"),
            (5, "31"),
            (330, "2"),
            (100, "AcDbSymbolTableRecord"),
            (100, "AcDbLayerTableRecord"),
            (2, "THRUST-LINE"),
            (70, "0"),
            (62, "1"),
            (6, "Continuous"),
            (370, "50"),
            (390, "F"),
            (347, "1E"),
            (1001, "THRUSTMARK"),
        ]
    );
    assert_eq!(layers[2][6..10], [(70, "1"), (62, "3"), (6, "THRUST-DASH"), (370, "-3")]);
    assert_eq!(layers[3][7], (62, "-7"));
    // The pattern is drawn at half its size, so it is written at twice its size.
    let dash = &records(&text, "LTYPE")[0];
    assert!(dash.contains(&(40, "1.5")) && dash.contains(&(49, "-0.5")));
    // Without a layer table the plot style Normal is looked up among the objects.
    let objects = "0 SECTION;2 OBJECTS;0 DICTIONARY;5 C;330 0;100 AcDbDictionary;3 ACAD_PLOTSTYLENAME;350 E;
        0 ACDBDICTIONARYWDFLT;5 E;330 C;100 AcDbDictionary;3 Normal;350 F;";
    let text = R2010.replace("390 F;", "").replace("0 SECTION;2 OBJECTS;", objects);
    let (_, text) = marked(&ascii(&text, "\n"));
    assert_eq!(records(&text, "LAYER")[1][10], (390, "F"));
}

#[test]
fn old_drawings_get_no_markers_no_owners_and_no_handles() {
    let (_, text) = marked(&ascii(R12, "\r\n"));
    assert!(!text.contains("\r\n100\r\n") && !text.contains("\r\n330\r\n"));
    assert!(!text.contains("\r\n  5\r\n") && !text.contains("LWPOLYLINE"));
    assert_eq!(text.matches('\n').count(), text.matches("\r\n").count());
    assert_eq!(records(&text, "SEQEND").len(), 2);
    assert_eq!(codes(&records(&text, "VERTEX")[0]), [0, 8, 6, 10, 20, 30, 1001, 1000]);
    assert_eq!(records(&text, "LAYER")[0][4], (6, "CONTINUOUS"));
    // With handles in use they are written, still without owners and markers.
    let (_, text) = marked(&ascii(&R12.replace("0 LINE;", "0 LINE;5 A;"), "\n"));
    assert_eq!(codes(&records(&text, "VERTEX")[0]), [0, 5, 8, 6, 10, 20, 30, 1001, 1000]);
    assert_eq!(records(&text, "LTYPE")[0][1], (5, "B"));
    assert_eq!(codes(&records(&text, "TABLE")[0]), [0, 2, 70]);
    let handling = R12.replace("0 ENDSEC;0 SECTION;2 ENT", "9 $HANDLING;70 1;0 ENDSEC;0 SECTION;2 ENT");
    let (_, text) = marked(&ascii(&handling, "\n"));
    assert_eq!(records(&text, "LTYPE")[0][1], (5, "1"));
}

#[test]
fn another_plane_gets_directions() {
    let text = ascii(R2010, "\n");
    let (_, marked) = round_trip(&Source::from_bytes(text), &marks(TILTED)).unwrap();
    let text = String::from_utf8(bytes(&marked)).unwrap();
    // A straight chain has three coordinates, one with bulges keeps its arcs in its own coordinate system.
    let chain = &records(&text, "POLYLINE")[0];
    assert!(chain.contains(&(70, "8")) && chain.contains(&(66, "1")));
    assert_eq!(records(&text, "VERTEX").len(), 3);
    let vertex = &records(&text, "VERTEX")[1];
    assert!(vertex.contains(&(10, "15.0")) && vertex.contains(&(20, "-3.0")));
    let arcs = &records(&text, "LWPOLYLINE")[0];
    assert!(arcs.contains(&(42, "0.5")) && arcs.contains(&(38, "3.0")) && arcs.contains(&(220, "-1.0")));
    for kind in ["TEXT", "SOLID", "CIRCLE"] {
        assert!(records(&text, kind).iter().all(|r| r.contains(&(220, "-1.0"))), "{kind}");
    }
}

#[test]
fn texts_are_escaped_as_the_version_says() {
    let (_, text) = marked(&ascii(R2010, "\n"));
    assert!(text.contains("\nBrücke 橋 😀 kN·m ^  5 %%%%%%d \\U+005CU+0041\n"));
    assert!(text.is_ascii() || text.contains("job Pr\\U+00FCfung ^  \\U+6A4B"));
    let (_, text) = marked(&ascii(&R2010.replace("AC1024", "AC1018"), "\n"));
    assert!(text.is_ascii());
    assert!(text.contains("\nBr\\U+00FCcke \\U+6A4B \\U+D83D\\U+DE00 kN\\U+00B7m ^  5 "));
}

#[test]
fn names_that_are_taken_are_refused() {
    let layer = "0 LAYER;5 11;330 2;100 AcDbSymbolTableRecord;100 AcDbLayerTableRecord;2 thrust-note;70 0;62 7;6 Continuous;
        0 ENDTAB;0 TABLE;2 APPID";
    let text = R2010.replace("0 ENDTAB;\n    0 TABLE;2 APPID", layer);
    assert_ne!(text, R2010);
    let source = Source::from_bytes(ascii(&text, "\n"));
    let refused = round_trip(&source, &marks(Plane::XY)).unwrap_err();
    assert_eq!(refused.check, "layer-taken");
    assert_eq!(refused.handle.as_deref(), Some("11"));
    assert_eq!(refused.layer.as_deref(), Some("thrust-note"));
    let line = refused.line.unwrap();
    assert_eq!(ascii(&text, "\n").lines().nth(usize::try_from(line).unwrap()), Some("LAYER"));
    let old = Source::from_bytes(ascii(&R12.replace("AC1009", "AC1006"), "\n"));
    assert_eq!(round_trip(&old, &marks(Plane::XY)).unwrap_err().check, "old-version");
}

#[test]
fn marks_that_are_not_sound_are_refused() {
    let source = Source::from_bytes(ascii(R12, "\n"));
    let outline = scan(&source, &Options::default()).unwrap();
    let good = marks(Plane::XY);
    type Spoil = fn(&mut thrustmark::tags::marks::Marks);
    let spoils: [Spoil; 9] = [
        |m| m.application = "OTHER".into(),
        |m| m.layers[0].name = "with blank".into(),
        |m| m.layers[0].name = "A-NAME-OF-MORE-THAN-31-CHARACTERS".into(),
        |m| m.layers[1].name = m.layers[0].name.clone(),
        |m| m.marks[0].layer = 9,
        |m| m.marks[0].line_type = Some(9),
        |m| m.marks[0].shape = thrustmark::tags::marks::Shape::Circle((0.0, 0.0).into(), f64::NAN),
        |m| m.facts.push(("seed".into(), "1".into())),
        |m| m.facts.push(("long".into(), "x".repeat(20_000))),
    ];
    for spoil in spoils {
        let mut marks = good.clone();
        spoil(&mut marks);
        assert_eq!(mark(&source, &outline, &marks).unwrap_err().check, "marks");
    }
}

#[test]
fn the_validator_finds_each_broken_rule() {
    let source = Source::from_bytes(ascii(R2010, "\n"));
    let before = problems(&source).unwrap();
    assert_eq!(before, []);
    let (_, text) = marked(&ascii(R2010, "\n"));
    let r12 = R12.replace("0 LINE;", "0 LINE;5 A;");
    let (_, old) = marked(&ascii(&r12, "\n"));
    let cases: [(&str, &str, &str, Rule); 13] = [
        (&text, "LINE\n  5\n35\n", "LINE\n  5\n2A\n", Rule::HandleTwice),
        (&text, "LINE\n  5\n35\n", "LINE\n", Rule::HandleMissing),
        (&text, "$HANDSEED\n  5\n3D\n", "$HANDSEED\n  5\n2F\n", Rule::HandleNotBelowSeed),
        (&text, "  5\n35\n330\n1F\n", "  5\n35\n330\n1FF\n", Rule::OwnerMissing),
        (&text, "\n390\nF\n347\n1E\n1001", "\n390\nFFF\n347\n1E\n1001", Rule::StyleMissing),
        (&text, "  2\nTHRUSTMARK\n", "  2\nTHRUSTMARKS\n", Rule::ApplicationNotRegistered),
        (&text, "100\nAcDbText\n 73\n", " 73\n", Rule::MarkerMissing),
        (&text, "100\nAcDbLayerTableRecord\n  2\nTHRUST", "  2\nTHRUST", Rule::MarkerMissing),
        (&text, "AcDbEntity\n  8\nTHRUST-LINE\n", "AcDbEntity\n  8\nOTHER\n", Rule::LayerMissing),
        (&text, "  6\nTHRUST-DASH\n", "  6\nOTHER\n", Rule::LineTypeMissing),
        (&text, " 90\n3\n", " 90\n4\n", Rule::PointCount),
        (&old, "  0\nSEQEND\n", "  0\nPOINT\n", Rule::RunNotClosed),
        (&old, "VERTEX\n  5\n", "VERTEX\n999\n", Rule::HandleMissing),
    ];
    for (text, from, to, rule) in cases {
        assert!(text.contains(from), "{from:?} is not there");
        let broken = Source::from_bytes(text.replacen(from, to, 1));
        let found = new_problems(&before, &problems(&broken).unwrap());
        assert!(found.iter().any(|p| p.rule == rule), "{rule:?} not found: {found:?}");
        let whole = problems(&Source::from_bytes(text)).unwrap();
        assert!(whole.iter().all(|p| p.rule != rule), "{rule:?} in the sound drawing");
    }
}

#[test]
fn records_of_interest_are_kept_with_their_runs() {
    let text = ascii(
        "0 SECTION;2 HEADER;9 $ACADVER;1 AC1009;9 $DWGCODEPAGE;3 ANSI_1252;0 ENDSEC;
        0 SECTION;2 BLOCKS;0 BLOCK;8 0;2 ARCH;70 0;10 1.5;20 2.0;30 0.0;
        0 LINE;8 AXIS;10 0.0;0 POINT;8 LOADS;10 1.0;0 ENDBLK;8 0;0 ENDSEC;
        0 SECTION;2 ENTITIES;
        0 POLYLINE;5 A1;8 Br\\U+00FCcke;66 1;70 0;999 a comment;0 VERTEX;8 x;10 0.0;20 1.0;0 VERTEX;8 x;10 1.0;42 0.5;0 SEQEND;8 x;
        0 POLYLINE;8 OTHER;66 1;0 VERTEX;8 BRÜCKE;10 0.0;0 SEQEND;
        0 INSERT;8 LOADS;66 1;2 ARCH;10 0.0;0 ATTRIB;8 LOADS;1 12 kN;2 F;0 SEQEND;8 LOADS;
        0 POINT;67 1;8 LOADS;10 4.0;102 {X;330 1;102 };1001 APP;1000 text;1070 3;
        0 TEXT;1 no layer;0 ENDSEC;0 EOF",
        "\n",
    );
    let keep = |c: &Candidate<'_>| match c.block {
        Some(block) => block == "ARCH" && c.layer == "AXIS",
        None => c.layer == "Brücke" || c.layer == "LOADS" || c.kind == "TEXT",
    };
    let source = Source::from_bytes(text.clone());
    let outline = scan(&source, &Options { keep: Some(&keep), hash: true }).unwrap();
    let seen: Vec<_> = outline
        .records
        .iter()
        .map(|r| (r.kind.as_str(), r.layer.as_str(), r.children.len(), r.block))
        .collect();
    assert_eq!(
        seen,
        [
            ("LINE", "AXIS", 0, Some(0)),
            ("POLYLINE", "Brücke", 3, None),
            ("INSERT", "LOADS", 2, None),
            ("POINT", "LOADS", 0, None),
            ("TEXT", "0", 0, None),
        ]
    );
    let chain = &outline.records[1];
    assert_eq!(chain.handle.as_deref(), Some("A1"));
    assert_eq!(chain.children[1].tags.first(42).and_then(|t| t.real()), Some(0.5));
    let lines: Vec<&str> = text.lines().collect();
    for record in &outline.records {
        for tag in record.tags.iter() {
            let line = usize::try_from(tag.line.unwrap()).unwrap() - 1;
            assert_eq!(lines[line].trim().parse::<i32>().unwrap(), tag.code);
            assert_eq!(lines[line + 1].as_bytes(), tag.value);
        }
        let range = source.range(record.start, record.end).unwrap();
        assert!(String::from_utf8(range).unwrap().contains(&format!("\n{}\n", record.kind)));
    }
    let point = &outline.records[3];
    assert!(point.in_paper_space() && point.tags.first(330).is_none());
    let extended: Vec<_> = point.tags.extended("app").map(|t| (t.code, t.value)).collect();
    assert_eq!(extended, [(1000, &b"text"[..]), (1070, b"3")]);
    assert_eq!((outline.blocks[0].name.as_str(), outline.blocks[0].base), ("ARCH", [1.5, 2.0, 0.0]));
    let loads = outline.census.iter().find(|layer| layer.name == "LOADS").unwrap();
    assert_eq!(loads.model.get("INSERT"), Some(&1));
    assert_eq!(loads.paper.get("POINT"), Some(&1));
    assert_eq!(loads.blocks.get("POINT"), Some(&1));
    assert_eq!(outline.encoding(), "ANSI_1252");
}

#[test]
fn a_drawing_cut_off_says_so_and_is_still_restored() {
    let text = ascii(R12, "\r\n");
    let cut = text.strip_suffix("  0\r\nENDSEC\r\n  0\r\nEOF\r\n").unwrap();
    let source = Source::from_bytes(cut.strip_suffix("\r\n").unwrap());
    let (outline, marked) = round_trip(&source, &marks(Plane::XY)).unwrap();
    assert!(outline.notes.contains(&Note::NoEndOfFile));
    assert!(outline.notes.contains(&Note::SectionNotClosed("ENTITIES".into())));
    let text = String::from_utf8(bytes(&marked)).unwrap();
    assert!(text.contains("newline 2") && text.contains("0.0\r\n  0\r\nLINE\r\n"));
}

#[test]
fn a_seed_that_others_have_raised_stays() {
    let (_, text) = marked(&ascii(R2010, "\n"));
    let later = Source::from_bytes(text.replace("$HANDSEED\n  5\n3D\n", "$HANDSEED\n  5\n50\n"));
    let outline = scan(&later, &Options::default()).unwrap();
    let restored = later.spliced(&unmark(&later, &outline).unwrap()).unwrap();
    let wanted = ascii(&R2010.replace("5 2F;9", "5 50;9"), "\n");
    assert_eq!(String::from_utf8(bytes(&restored)).unwrap(), wanted);
}

#[test]
fn what_others_put_into_a_made_table_stays() {
    let (_, text) = marked(&ascii(R12, "\n"));
    let theirs = "  0\nLAYER\n  2\nTHEIRS\n 70\n0\n 62\n7\n  6\nCONTINUOUS\n";
    let at = text.find("  0\nLAYER\n").unwrap();
    let source = Source::from_bytes([&text[..at], theirs, &text[at..]].concat());
    let outline = scan(&source, &Options::default()).unwrap();
    let restored = source.spliced(&unmark(&source, &outline).unwrap()).unwrap();
    let text = String::from_utf8(bytes(&restored)).unwrap();
    assert!(text.contains("THEIRS") && !text.contains("THRUST") && !text.contains("LTYPE"));
    assert!(scan(&restored, &Options::default()).unwrap().marks.is_none());
}

/// A small drawing with odd things in it.
fn drawing() -> impl Strategy<Value = Vec<u8>> {
    let version = prop::sample::select(vec![
        "", "AC1009", "AC1012", "AC1014", "AC1015", "AC1018", "AC1021", "AC1024", "AC1032", "AC1050",
    ]);
    let seed = prop::sample::select(vec![
        "",
        "2F",
        " 2f ",
        "2",
        "0",
        "zz",
        "-1",
        "FFFFFFFFFFFFFFFF",
        "FFFFFFFFFFFFFFF0",
        "100 ",
    ]);
    let sections = prop::collection::vec(prop::bool::weighted(0.7), 5);
    let shape = (
        prop::bool::ANY,
        prop::bool::ANY,
        prop::bool::ANY,
        prop::sample::select(vec!["\n", "\r\n", "mixed"]),
    );
    let end = prop::sample::select(vec!["", "unterminated", "no EOF", "no ENDSEC", "trailing", "blank"]);
    (version, seed, sections, shape, end, any::<u64>()).prop_map(
        |(version, seed, sections, (handles, comments, tables, newline), end, random)| {
            let h = |n: u32| if handles { format!("5 {n:X};") } else { String::new() };
            let remark = if comments { "999 remark  ;" } else { "" };
            let mut t = String::new();
            if sections[0] {
                t += &format!("0 SECTION;{remark}2 HEADER;");
                if !version.is_empty() {
                    t += &format!("9 $ACADVER;1 {version};");
                }
                if !seed.is_empty() {
                    t += &format!("9 $HANDSEED;5 {seed}\u{1};");
                }
                t += "0 ENDSEC;";
            }
            if sections[1] {
                t += "0 SECTION;2 TABLES;";
                let pick = |bit: u32| random >> bit & 1 == 1;
                for (bit, name) in ["LTYPE", "LAYER", "APPID", "BLOCK_RECORD", "DIMSTYLE"].iter().enumerate()
                {
                    let bit = u32::try_from(bit).unwrap();
                    if !tables && pick(bit) {
                        continue;
                    }
                    t += &format!("0 TABLE;2 {name};{}70 1;{remark}", h(bit + 1));
                    if pick(bit + 8) {
                        let own = if *name == "DIMSTYLE" { "105 2A;5 FF".to_owned() } else { h(0x10 + bit) };
                        let what = if *name == "BLOCK_RECORD" { "*Model_Space" } else { "0" };
                        t += &format!("0 {name};{own};2 {what};70 0;390 F;347 0;");
                    }
                    t += remark;
                    if !(pick(20) && pick(bit + 24)) {
                        t += "0 ENDTAB;";
                    }
                }
                if random >> 40 & 3 != 3 {
                    t += "0 ENDSEC;";
                }
            }
            if sections[2] {
                t += &format!(
                    "0 SECTION;2 BLOCKS;0 BLOCK;{}8 0;2 *Model_Space;0 ENDBLK;{}0 ENDSEC;",
                    h(0x20),
                    h(0x21)
                );
            }
            if sections[3] || !sections.iter().any(|s| *s) {
                t += &format!("0 SECTION;2 ENTITIES;{remark}0 POINT;{}8 A;10 1.0;20 2.0;1005 AB;", h(0x22));
                t += "0 POLYLINE;8 B;66 1;0 VERTEX;8 B;10 1.0;0 SEQEND;";
                t += remark;
                if end != "no ENDSEC" {
                    t += "0 ENDSEC;";
                }
            }
            if sections[4] {
                t += &format!("0 SECTION;2 OBJECTS;0 DICTIONARY;{}0 ENDSEC;", h(0x23));
            }
            if !matches!(end, "no EOF" | "no ENDSEC" | "blank") {
                t += "0 EOF";
            }
            let mut i = random;
            let mut text = String::new();
            for tag in t.split(';').filter(|tag| !tag.is_empty()) {
                let (code, value) = tag.split_once(' ').unwrap_or((tag, ""));
                for line in [format!("{code:>3}"), value.replace('\u{1}', "")] {
                    text += &line;
                    i = i.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1);
                    text += if newline == "mixed" {
                        if i >> 60 & 1 == 1 { "\n" } else { "\r\n" }
                    } else {
                        newline
                    };
                }
            }
            match end {
                "trailing" => text += "anything\n\u{1a}",
                "blank" => text += "\n  \n",
                "unterminated" | "no EOF" if random >> 50 & 1 == 1 => {
                    text.truncate(text.trim_end_matches(['\r', '\n']).len());
                }
                _ => {}
            }
            text.into_bytes()
        },
    )
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 1500, failure_persistence: None, ..ProptestConfig::default() })]

    /// Whatever is left out or odd, the drawing comes back, the second mark is the first, and nothing new is wrong.
    #[test]
    fn invented_drawings_come_back(bytes in drawing()) {
        let source = Source::from_bytes(bytes);
        round_trip(&source, &marks(Plane::XY)).unwrap();
    }

    /// Damaged drawings are read or refused, never worse; what is read comes back or is refused.
    #[test]
    fn damaged_drawings_do_no_harm(bytes in drawing(), at in any::<prop::sample::Index>(), by in any::<u8>(), cut in any::<bool>()) {
        let mut bytes = bytes;
        let i = at.index(bytes.len());
        if cut { bytes.truncate(i); } else { bytes[i] = by; }
        let source = Source::from_bytes(bytes);
        if let Ok(outline) = scan(&source, &Options::default())
            && outline.marks.is_none()
            && let Ok(edits) = mark(&source, &outline, &marks(Plane::XY))
        {
            let marked = source.spliced(&edits).unwrap();
            let again = scan(&marked, &Options::default()).unwrap();
            let restored = marked.spliced(&unmark(&marked, &again).unwrap()).unwrap();
            prop_assert_eq!(common::bytes(&restored), common::bytes(&source));
        }
    }
}
