//! How fast a large drawing is read, marked and restored. Run by hand:
//! `cargo test --release --test speed -- --ignored --nocapture`, with `THRUSTMARK_MEGABYTES` for other sizes.
// Helpers of tests stand outside of the test functions that the lints exempt.
#![allow(clippy::unwrap_used, clippy::print_stdout)]

use std::fmt::Write as _;
use std::io::{BufWriter, Write as _};
use std::time::Instant;

use thrustmark::tags::marks::Plane;
use thrustmark::tags::{Candidate, Options, Source, mark, scan, unmark};

mod common;

fn tags(words: &[(i32, String)], end: &str) -> String {
    words.iter().fold(String::new(), |mut out, (code, value)| {
        let _ = write!(out, "{code:>3}{end}{value}{end}");
        out
    })
}

/// Entities as a CAD program mixes them: half lines, a quarter polylines, an eighth each texts and inserts.
fn generate(out: &mut impl std::io::Write, bytes: u64, end: &str) -> std::io::Result<()> {
    let word = |code: i32, value: &str| (code, value.to_owned());
    let head = [
        (0, "SECTION"),
        (2, "HEADER"),
        (9, "$ACADVER"),
        (1, "AC1024"),
        (9, "$HANDSEED"),
        (5, "FFFFFFF"),
        (0, "ENDSEC"),
        (0, "SECTION"),
        (2, "TABLES"),
        (0, "TABLE"),
        (2, "LAYER"),
        (5, "2"),
        (70, "1"),
        (0, "LAYER"),
        (5, "10"),
        (330, "2"),
        (100, "AcDbSymbolTableRecord"),
        (100, "AcDbLayerTableRecord"),
        (2, "0"),
        (70, "0"),
        (62, "7"),
        (6, "Continuous"),
        (0, "ENDTAB"),
        (0, "ENDSEC"),
        (0, "SECTION"),
        (2, "ENTITIES"),
    ];
    let head: Vec<_> = head.iter().map(|(code, value)| word(*code, value)).collect();
    out.write_all(tags(&head, end).as_bytes())?;
    let mut written = 0;
    let mut random = 1u64;
    let mut next = |below: u64| {
        random = random.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1);
        (random >> 33) % below
    };
    let mut handle = 0x100u64;
    while written < bytes {
        let mut number = |code: i32| (code, format!("{}.{:012}", next(100_000), next(1_000_000_000_000)));
        let mut body = match handle % 8 {
            0..4 => vec![
                word(100, "AcDbLine"),
                number(10),
                number(20),
                word(30, "0.0"),
                number(11),
                number(21),
                word(31, "0.0"),
            ],
            4 | 5 => {
                let mut body = vec![word(100, "AcDbPolyline"), word(90, "8"), word(70, "0"), word(43, "0.0")];
                (0..8).for_each(|_| body.extend([number(10), number(20)]));
                body
            }
            6 => vec![
                word(100, "AcDbText"),
                number(10),
                number(20),
                word(30, "0.0"),
                word(40, "2.5"),
                word(1, "some text"),
                word(100, "AcDbText"),
            ],
            _ => vec![
                word(100, "AcDbBlockReference"),
                word(2, "BLOCK"),
                number(10),
                number(20),
                word(30, "0.0"),
            ],
        };
        let kind = ["LINE", "LINE", "LINE", "LINE", "LWPOLYLINE", "LWPOLYLINE", "TEXT", "INSERT"];
        let kind = kind[usize::try_from(handle % 8).unwrap()];
        let mut record = vec![
            word(0, kind),
            (5, format!("{handle:X}")),
            word(330, "1F"),
            word(100, "AcDbEntity"),
            (8, format!("LAYER-{}", next(40))),
        ];
        record.append(&mut body);
        let text = tags(&record, end);
        out.write_all(text.as_bytes())?;
        written += text.len() as u64;
        handle += 1;
    }
    out.write_all(tags(&[word(0, "ENDSEC"), word(0, "EOF")], end).as_bytes())
}

#[test]
#[ignore = "takes a large file and a release build"]
fn large_drawing() {
    let megabytes: u64 = std::env::var("THRUSTMARK_MEGABYTES").map_or(100, |text| text.parse().unwrap());
    for end in ["\n", "\r\n"] {
        let mut file = tempfile::NamedTempFile::new().unwrap();
        let mut out = BufWriter::new(file.as_file_mut());
        generate(&mut out, megabytes << 20, end).unwrap();
        out.flush().unwrap();
        drop(out);
        let source = Source::open(file.path()).unwrap();
        let size = source.len() as f64 / 1e6;
        let time = |what: &str, work: &mut dyn FnMut()| {
            let best = (0..3)
                .map(|_| {
                    let start = Instant::now();
                    work();
                    start.elapsed().as_secs_f64()
                })
                .fold(f64::INFINITY, f64::min);
            println!("{what:40} {best:7.3} s {:7.0} MB/s", size / best);
        };
        println!("{size:.0} MB, line end {end:?}");
        let plain = Options { keep: None, hash: false };
        time("scan", &mut || drop(scan(&source, &plain).unwrap()));
        time("scan with hash", &mut || drop(scan(&source, &Options::default()).unwrap()));
        let keep = |c: &Candidate<'_>| c.layer == "LAYER-7";
        let options = Options { keep: Some(&keep), hash: false };
        time("scan, one layer of forty kept", &mut || drop(scan(&source, &options).unwrap()));
        time("hash alone", &mut || drop(source.sha256().unwrap()));
        let outline = scan(&source, &plain).unwrap();
        let edits = mark(&source, &outline, &common::marks(Plane::XY)).unwrap();
        let marked = source.spliced(&edits).unwrap();
        let folder = tempfile::tempdir().unwrap();
        let copy = folder.path().join("copy.dxf");
        time("write the marked copy", &mut || {
            marked.write_to(&mut std::fs::File::create(&copy).unwrap()).map(drop).unwrap();
        });
        time("plain copy of the file", &mut || {
            std::fs::copy(file.path(), &copy).unwrap();
        });
        let again = scan(&marked, &plain).unwrap();
        let restored = marked.spliced(&unmark(&marked, &again).unwrap()).unwrap();
        assert_eq!(restored.sha256().unwrap(), source.sha256().unwrap());
    }
}
