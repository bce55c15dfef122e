//! Any drawing, whole and unharmed: the flow from a file to its marked copy and back, over invented drawings.
// Helpers of tests stand outside of the test functions that the lints exempt.
#![allow(clippy::unwrap_used, clippy::float_cmp)]

use std::fs;
use std::path::Path;

use proptest::prelude::*;

use thrustmark::drawing::convert;
use thrustmark::flow::{self, Environment, Target};
use thrustmark::job::Job;
use thrustmark::outcome::{Check, Run};
use thrustmark::tags::validate::{new_problems, problems};
use thrustmark::tags::{Candidate, Options, Source, scan};

/// Lines of a drawing from `code value` words with `|` between them.
fn lines(text: &str, end: &str) -> String {
    text.split('|')
        .map(str::trim)
        .filter(|g| !g.is_empty())
        .map(|group| {
            let (code, value) = group.split_once(' ').unwrap_or((group, ""));
            format!("{code:>3}{end}{value}{end}")
        })
        .collect()
}

fn environment() -> Environment {
    Environment { today: "2026-01-01".parse().unwrap() }
}

fn mark(path: &Path, output: &Path, job: &Job) -> Run {
    flow::mark(path, Some(job), &Target { output: Some(output.to_owned()), force: false }, environment())
}

fn job(text: &str) -> Job {
    Job::parse(text.as_bytes(), None).unwrap()
}

/// Marks, takes the marks out, marks the copy again; the run, and the marked bytes.
fn there_and_back(bytes: &[u8], job: &Job) -> (Run, Option<Vec<u8>>) {
    let folder = tempfile::tempdir().unwrap();
    let [source, copy, plain, again] =
        ["a.dxf", "a.thrust.dxf", "plain.dxf", "again.dxf"].map(|name| folder.path().join(name));
    fs::write(&source, bytes).unwrap();
    let run = mark(&source, &copy, job);
    assert_eq!(fs::read(&source).unwrap(), bytes);
    if run.error.is_some() {
        assert!(!copy.exists());
        return (run, None);
    }
    let marked = fs::read(&copy).unwrap();
    flow::unmark(&copy, Some(&plain), false).unwrap();
    assert!(fs::read(&plain).unwrap() == bytes, "unmarking does not give back the source");
    let second = mark(&copy, &again, job);
    assert!(second.error.is_none(), "{:?}", second.error);
    assert!(fs::read(&again).unwrap() == marked, "marking twice is not marking once");
    let broken = |bytes: &[u8]| problems(&Source::from_bytes(bytes)).unwrap();
    let wrong = new_problems(&broken(bytes), &broken(&marked));
    assert!(wrong.is_empty(), "{wrong:?}");
    (run, Some(marked))
}

/// What an invented drawing has and has not.
#[derive(Debug, Clone)]
struct Invented {
    version: Option<&'static str>,
    tables: bool,
    handles: bool,
    seed: Option<&'static str>,
    in_block: bool,
    upright: bool,
    crlf: bool,
    end_of_section: bool,
    end_of_file: bool,
    behind: &'static str,
    page: &'static str,
    /// Comments and padded codes before these tags.
    odd: Vec<usize>,
}

fn invented() -> impl Strategy<Value = Invented> {
    let versions = vec![
        None,
        Some("AC1009"),
        Some("AC1012"),
        Some("AC1014"),
        Some("AC1015"),
        Some("AC1021"),
        Some("AC1032"),
    ];
    let seeds = vec![None, Some("1"), Some("FFF"), Some("xyz"), Some("FFFFFFFFFFFFFFFF")];
    (
        (prop::sample::select(versions), any::<bool>(), any::<bool>(), prop::sample::select(seeds)),
        (any::<bool>(), any::<bool>(), any::<bool>(), any::<bool>(), any::<bool>()),
        prop::sample::select(vec!["", "\n", "\x1a", "\nrest of an old file\n\n", "\0\0\0"]),
        prop::sample::select(vec!["ANSI_1252", "ANSI_932", "dos850", "unheard", ""]),
        prop::collection::vec(0usize..120, 0..6),
    )
        .prop_map(|((version, tables, handles, seed), flags, behind, page, odd)| {
            let (in_block, upright, crlf, end_of_section, end_of_file) = flags;
            Invented {
                version,
                tables,
                handles,
                seed,
                in_block,
                upright,
                crlf,
                end_of_section,
                end_of_file,
                behind,
                page,
                odd,
            }
        })
}

fn bytes_of(i: &Invented) -> Vec<u8> {
    let mut handle = 0x40;
    let mut next = || {
        handle += 1;
        if i.handles { format!("|5 {handle:X}") } else { String::new() }
    };
    let place = |x: f64, y: f64| if i.upright { [x, 4.0, y] } else { [x, y, 0.0] };
    let mut elevation = format!("0 POLYLINE{}|8 ARCH-AXIS|66 1|10 0|20 0|30 0|70 8", next());
    for (x, y) in [(0.0, 0.0), (10.0, 6.0), (20.0, 8.0), (30.0, 6.0), (40.0, 0.0)] {
        let [x, y, z] = place(x, y);
        elevation += &format!("|0 VERTEX{}|8 ARCH-AXIS|10 {x}|20 {y}|30 {z}|70 32", next());
    }
    elevation += &format!("|0 SEQEND{}|8 ARCH-AXIS", next());
    for x in [10.0, 20.0, 30.0] {
        let [x, y, z] = place(x, 9.0);
        elevation += &format!("|0 POINT{}|8 ARCH-LOADS|10 {x}|20 {y}|30 {z}", next());
    }
    let mut tags = "0 SECTION|2 HEADER".to_owned();
    tags += &i.version.map_or(String::new(), |v| format!("|9 $ACADVER|1 {v}"));
    tags += &i.seed.map_or(String::new(), |s| format!("|9 $HANDSEED|5 {s}"));
    if !i.page.is_empty() {
        tags += &format!("|9 $DWGCODEPAGE|3 {}", i.page);
    }
    tags += "|9 $INSUNITS|70 6|0 ENDSEC";
    if i.tables {
        tags += &format!(
            "|0 SECTION|2 TABLES|0 TABLE|2 LAYER{}|70 1|0 LAYER{}|2 0|70 0|62 7|6 CONTINUOUS|0 ENDTAB|0 ENDSEC",
            next(),
            next()
        );
    }
    if i.in_block {
        // Three blocks, one in another, that put it back where it was.
        let inner =
            format!("|0 BLOCK{}|8 0|2 IN|70 0|10 0|20 0|30 0|{elevation}|0 ENDBLK{}|8 0", next(), next());
        let middle = format!(
            "|0 BLOCK{}|8 0|2 MID|70 0|10 5|20 0|30 0|0 INSERT{}|8 0|2 in|10 0|20 0|0 ENDBLK{}|8 0",
            next(),
            next(),
            next()
        );
        tags += &format!("|0 SECTION|2 BLOCKS{inner}{middle}|0 ENDSEC");
        elevation = format!("0 INSERT{}|8 0|2 Mid|10 5|20 0", next());
    }
    tags += &format!("|0 SECTION|2 ENTITIES|{elevation}");
    if i.end_of_section {
        tags += "|0 ENDSEC";
    }
    if i.end_of_file {
        tags += "|0 EOF";
    }
    let end = if i.crlf { "\r\n" } else { "\n" };
    let mut out = String::new();
    for (at, tag) in lines(&tags, end).split_inclusive(end).collect::<Vec<_>>().chunks(2).enumerate() {
        if i.odd.contains(&at) {
            out += &format!("999{end}\u{fc}ber \\U+6A4B | { }{end} \t", "{");
        }
        out += &tag.concat();
    }
    if i.end_of_file {
        out += i.behind;
    }
    out.into_bytes()
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 48, ..ProptestConfig::default() })]

    /// Whatever a drawing has or lacks, it is marked and given back, or refused with nothing written.
    #[test]
    fn invented_drawings_come_back(invented in invented()) {
        let (run, marked) = there_and_back(&bytes_of(&invented), &job(""));
        prop_assert!(marked.is_some(), "{:?}", run.error);
        let span = &run.spans[0];
        prop_assert!((span.axis.span - 40.0).abs() < 1e-9 && (span.axis.rise - 8.0).abs() < 1e-9);
        prop_assert_eq!(span.loads.len(), 3);
        let path: &[String] = &span.axis.entities[0].path;
        prop_assert_eq!(path.len(), if invented.in_block { 2 } else { 0 });
        prop_assert_eq!(run.findings.iter().any(|f| f.check == Check::Plane), invented.upright);
    }

    /// Cut off anywhere, a drawing is read as far as it goes or refused, and harmed in no case.
    #[test]
    fn cut_drawings_do_no_harm(invented in invented(), part in 0usize..1000) {
        let bytes = bytes_of(&invented);
        let kept = bytes.len() * part / 1000;
        there_and_back(&bytes[..kept], &job(""));
    }
}

const UPRIGHT: Invented = Invented {
    version: Some("AC1015"),
    tables: true,
    handles: true,
    seed: Some("200"),
    in_block: false,
    upright: true,
    crlf: false,
    end_of_section: true,
    end_of_file: true,
    behind: "",
    page: "ANSI_1252",
    odd: Vec::new(),
};

#[test]
fn marks_lie_in_the_plane_of_the_elevation() {
    for (turned, right) in [(false, [1.0, 0.0, 0.0]), (true, [0.8, 0.6, 0.0])] {
        let mut bytes = String::from_utf8(bytes_of(&UPRIGHT)).unwrap();
        if turned {
            // x and y of the points (x, 4) turned: (0.8 x, 0.6 x).
            for x in [0, 10, 20, 30, 40] {
                let x_turned = f64::from(x) * 0.8;
                let y_turned = f64::from(x) * 0.6;
                bytes = bytes
                    .replace(&format!(" 10\n{x}\n 20\n4\n"), &format!(" 10\n{x_turned}\n 20\n{y_turned}\n"));
            }
        }
        let (run, marked) = there_and_back(bytes.as_bytes(), &job("[accept]\nassumed = [\"plane\"]\n"));
        let marked = Source::from_bytes(marked.unwrap_or_else(|| panic!("{:?}", run.error)));
        let keep = |_: &Candidate<'_>| true;
        let outline = scan(&marked, &Options { keep: Some(&keep), hash: false }).unwrap();
        let mut seen = 0;
        // Distance from the plane: along the drawing's y, or square to the turned direction.
        let normal = [right[1], -right[0], 0.0];
        let off = if turned { 0.0 } else { -4.0 };
        for record in outline.records.iter().filter(|r| r.ours) {
            if !["LINE", "ARC", "LWPOLYLINE", "POLYLINE"].contains(&record.kind.as_str()) {
                continue;
            }
            for p in convert::places(record, &outline.decoder).unwrap() {
                let away: f64 = normal.iter().zip(p).map(|(n, c)| n * c).sum();
                assert!((away - off).abs() < 1e-9, "{} at {p:?}", record.kind);
                seen += 1;
            }
        }
        assert!(seen > 20, "{seen}");
    }
}

#[test]
fn a_stated_plane_is_no_assumption() {
    let bytes = bytes_of(&UPRIGHT);
    let (run, _) = there_and_back(&bytes, &job("[drawing]\nplane = \"xz\"\n"));
    assert!(run.findings.iter().all(|f| f.check != Check::Plane));
    let (run, marked) = there_and_back(&bytes, &job("[drawing]\nplane = \"yz\"\n"));
    assert!(marked.is_none());
    assert_eq!(run.error.unwrap().check, "not-flat");
}

#[test]
fn a_changed_copy_is_not_taken_for_the_source() {
    let folder = tempfile::tempdir().unwrap();
    let [source, copy, plain] = ["a.dxf", "a.thrust.dxf", "plain.dxf"].map(|name| folder.path().join(name));
    fs::write(&source, bytes_of(&UPRIGHT)).unwrap();
    assert!(mark(&source, &copy, &job("")).error.is_none());
    let marked = fs::read_to_string(&copy).unwrap();
    // A point of the source moved by another program.
    let moved = marked.replacen(" 10\n20\n 20\n4\n", " 10\n20.5\n 20\n4\n", 1);
    assert_ne!(moved, marked);
    fs::write(&copy, &moved).unwrap();
    let refusal = flow::unmark(&copy, Some(&plain), false).unwrap_err();
    assert_eq!(refusal.check, "unmark-hash");
    assert!(!plain.exists());
    let freed = flow::unmark(&copy, Some(&plain), true).unwrap();
    assert!(!freed.exact);
    let rest = fs::read_to_string(&plain).unwrap();
    assert!(!rest.contains("THRUST") && rest.contains("20.5"));
    // One of our own entities moved: all of them go all the same, and the source comes back.
    let ours = marked.rfind("1001\nTHRUSTMARK").unwrap();
    let entity = marked[..ours].rfind("\n 10\n").unwrap() + 5;
    let end = marked[entity..].find('\n').unwrap() + entity;
    fs::write(&copy, format!("{}777.5{}", &marked[..entity], &marked[end..])).unwrap();
    fs::remove_file(&plain).unwrap();
    assert!(flow::unmark(&copy, Some(&plain), false).unwrap().exact);
    assert_eq!(fs::read(&plain).unwrap(), fs::read(&source).unwrap());
}

#[test]
fn a_large_drawing_is_marked_while_its_hash_is_on_its_way() {
    let good = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/good");
    let small = fs::read_to_string(good.join("open-spandrel-rib.dxf")).unwrap();
    let end = if small.contains("\r\n") { "\r\n" } else { "\n" };
    // Comments before the end: the hash of some forty megabytes takes longer than all the rest.
    let (head, tail) = small.split_at(small.rfind(&format!("  0{end}EOF")).unwrap());
    let comment = format!("999{end}{}{end}", "x".repeat(250));
    let large = [head, &comment.repeat(160_000), tail].concat();
    let stated = fs::read_to_string(good.join("thrustmark.toml")).unwrap();
    let (run, copy) = there_and_back(large.as_bytes(), &job(&stated));
    let copy = String::from_utf8(copy.unwrap()).unwrap();
    let hash = Source::from_bytes(large).sha256().unwrap();
    assert_eq!(run.drawing.sha256.as_deref(), Some(hash.as_str()));
    assert!(copy.contains(&format!("sha256 {hash}")) && !copy.contains(&"0".repeat(64)));
    // What the marks say beside the hash and the date is what they say of the small drawing.
    let (_, of_small) = there_and_back(small.as_bytes(), &job(&stated));
    let lines = |text: &str| text.lines().filter(|l| l.starts_with("THRUST-")).count();
    assert_eq!(lines(&copy), lines(&String::from_utf8(of_small.unwrap()).unwrap()));
}
