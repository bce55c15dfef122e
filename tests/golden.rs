//! Pictures, stations, JUnit results and reports of the demo drawings against files that were looked at by eye.
//!
//! `THRUSTMARK_WRITE_GOLDEN=1 cargo test --test golden` writes them again; look at each before it is committed.

#![allow(clippy::unwrap_used)]

use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

const DRAWINGS: [&str; 4] = ["open-spandrel-rib", "masonry-ring", "unsymmetric-rib", "hanging-cable"];

fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// Runs the program in a folder with the demo drawings; all names in the outputs are then bare.
fn office() -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    for entry in fs::read_dir(root().join("fixtures/good")).unwrap() {
        let path = entry.unwrap().path();
        fs::copy(&path, folder.path().join(path.file_name().unwrap())).unwrap();
    }
    folder
}

fn check(folder: &Path, arguments: &[&str]) {
    let output = Command::new(env!("CARGO_BIN_EXE_thrustmark"))
        .current_dir(folder)
        .arg("check")
        .args(arguments)
        .env("SOURCE_DATE_EPOCH", "1790000000")
        .output()
        .unwrap();
    assert_ne!(output.status.code(), Some(2), "{}", String::from_utf8_lossy(&output.stderr));
}

/// Holds a file against its golden one, or writes that.
fn compare(made: &Path, name: &str) {
    let golden = root().join("tests/golden").join(name);
    let made = fs::read_to_string(made).unwrap();
    if std::env::var_os("THRUSTMARK_WRITE_GOLDEN").is_some() {
        fs::write(&golden, made).unwrap();
        return;
    }
    let expected = fs::read_to_string(&golden).unwrap_or_default();
    if let Some(difference) = difference(&expected, &made) {
        panic!(
            "{name} differs from its golden file: {difference}\n(THRUSTMARK_WRITE_GOLDEN=1 writes it again)"
        );
    }
}

/// The first line that differs. Numbers count as equal when they differ by less than a thousand millionth, which is what
/// mathematical libraries of different machines differ by.
fn difference(expected: &str, made: &str) -> Option<String> {
    let (mut one, mut two) = (expected.lines(), made.lines());
    for number in 1.. {
        match (one.next(), two.next()) {
            (None, None) => return None,
            (a, b) if a == b => {}
            (Some(a), Some(b)) if alike(a, b) => {}
            (a, b) => {
                return Some(format!("line {number}\n- {}\n+ {}", a.unwrap_or("end"), b.unwrap_or("end")));
            }
        }
    }
    None
}

fn alike(a: &str, b: &str) -> bool {
    let cells = |line: &str| line.split(',').map(str::to_owned).collect::<Vec<_>>();
    let (a, b) = (cells(a), cells(b));
    a.len() == b.len()
        && a.len() > 10
        && a.iter().zip(&b).all(|(a, b)| {
            a == b
                || match (a.parse::<f64>(), b.parse::<f64>()) {
                    (Ok(x), Ok(y)) => (x - y).abs() <= 1e-9 * (1.0 + x.abs()),
                    _ => false,
                }
        })
}

#[test]
fn pictures_and_reports_of_single_drawings() {
    let office = office();
    for name in DRAWINGS {
        let (svg, html) = (format!("{name}.svg"), format!("{name}.html"));
        check(office.path(), &[&format!("{name}.dxf"), "--picture", &svg, "--report", &html]);
        compare(&office.path().join(&svg), &svg);
        compare(&office.path().join(&html), &html);
    }
}

#[test]
fn stations_and_junit_of_all_drawings() {
    let office = office();
    let mut arguments: Vec<String> = DRAWINGS.iter().map(|name| format!("{name}.dxf")).collect();
    arguments.extend(["--csv", "stations.csv", "--junit", "results.xml"].map(String::from));
    check(office.path(), &arguments.iter().map(String::as_str).collect::<Vec<_>>());
    compare(&office.path().join("stations.csv"), "stations.csv");
    compare(&office.path().join("results.xml"), "results.xml");
}

/// The picture in pixels, the report in sheets and the summary of one drawing: the forms that are not text by lines.
#[test]
fn one_drawing_in_every_other_form() {
    let office = office();
    let name = "masonry-ring";
    let [png, pdf, txt] = ["png", "pdf", "txt"].map(|end| format!("{name}.{end}"));
    check(office.path(), &[&format!("{name}.dxf"), "--picture", &png, "--report", &pdf]);
    let output = Command::new(env!("CARGO_BIN_EXE_thrustmark"))
        .current_dir(office.path())
        .args(["check", &format!("{name}.dxf")])
        .env("SOURCE_DATE_EPOCH", "1790000000")
        .output()
        .unwrap();
    fs::write(office.path().join(&txt), output.stdout).unwrap();
    compare(&office.path().join(&txt), &txt);
    let [made, golden] = [office.path().to_owned(), root().join("tests/golden")];
    if std::env::var_os("THRUSTMARK_WRITE_GOLDEN").is_some() {
        for file in [&png, &pdf] {
            fs::copy(made.join(file), golden.join(file)).unwrap();
        }
        return;
    }
    let pixels = |folder: &Path| {
        let file = fs::File::open(folder.join(&png)).unwrap();
        let mut reader = png::Decoder::new(std::io::BufReader::new(file)).read_info().unwrap();
        let mut bytes = vec![0; reader.output_buffer_size().unwrap()];
        let info = reader.next_frame(&mut bytes).unwrap();
        (info.width, info.height, bytes)
    };
    let (one, two) = (pixels(&golden), pixels(&made));
    assert_eq!((one.0, one.1), (two.0, two.1));
    // An edge may fall a hair to the other side of a pixel with the mathematical library of another machine.
    let other = one.2.iter().zip(&two.2).filter(|(a, b)| a.abs_diff(**b) > 8).count();
    assert!(other * 1000 <= one.2.len(), "{other} of {} bytes of the picture differ", one.2.len());
    let read = |folder: &Path| fs::read(folder.join(&pdf)).unwrap();
    assert!(
        read(&golden) == read(&made),
        "{pdf} differs from its golden file (THRUSTMARK_WRITE_GOLDEN=1 writes it)"
    );
}

#[test]
fn differences_are_seen() {
    let row = "a,1,2,3,4,5,6,7,8,9,10,0.1";
    assert!(difference(row, "a,1,2,3,4,5,6,7,8,9,10,0.1000000000001").is_none());
    assert!(difference(row, "a,1,2,3,4,5,6,7,8,9,10,0.1001").is_some());
    assert!(difference(row, &format!("{row}\nmore")).is_some());
    assert!(difference("<p>70 mm</p>", "<p>71 mm</p>").is_some());
}
