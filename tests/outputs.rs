//! Report, picture, CSV and JUnit as their users ask for them: names, refusals, what is never replaced.

#![allow(clippy::unwrap_used)]

use std::fs;
use std::path::Path;
use std::process::{Command, Output};

fn office() -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    let good = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/good");
    for name in ["open-spandrel-rib.dxf", "masonry-ring.dxf", "thrustmark.toml"] {
        fs::copy(good.join(name), folder.path().join(name)).unwrap();
    }
    folder
}

fn run(folder: &Path, arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_thrustmark"))
        .current_dir(folder)
        .args(arguments)
        .env("SOURCE_DATE_EPOCH", "1790000000")
        .output()
        .unwrap()
}

fn told(output: &Output) -> String {
    String::from_utf8_lossy(&output.stderr).into_owned()
}

const RIB: &str = "open-spandrel-rib.dxf";

#[test]
fn all_outputs_in_one_go_and_twice_the_same() {
    let office = office();
    let names = ["r.html", "p.png", "s.csv", "j.xml", "r.json", "r.pdf"];
    let go = || {
        let output = run(
            office.path(),
            &[
                "mark",
                RIB,
                "--report",
                "r.html",
                "--picture",
                "p.png",
                "--csv",
                "s.csv",
                "--junit",
                "j.xml",
                "--json",
                "r.json",
            ],
        );
        assert_eq!(output.status.code(), Some(0), "{}", told(&output));
        let output = run(office.path(), &["check", RIB, "--report", "r.pdf"]);
        assert_eq!(output.status.code(), Some(0), "{}", told(&output));
        names.map(|name| fs::read(office.path().join(name)).unwrap())
    };
    let once = go();
    // What this program wrote it may replace; the same comes out again.
    assert_eq!(once, go());
    assert!(once[1].starts_with(b"\x89PNG\r\n"));
    assert!(once[5].starts_with(b"%PDF-"));
}

/// The PDF as another program reads it: its text can be selected, its sheets are A4 and numbered. Needs poppler's tools.
#[test]
fn a_pdf_report_is_read_by_another_program() {
    if Command::new("pdftotext").arg("-v").output().is_err() {
        eprintln!("SKIPPED: there is no pdftotext");
        return;
    }
    let office = office();
    let output = run(office.path(), &["check", RIB, "masonry-ring.dxf", "--report", "r.pdf"]);
    assert_eq!(output.status.code(), Some(0), "{}", told(&output));
    let other = |program: &str, arguments: &[&str]| {
        let output = Command::new(program).current_dir(office.path()).args(arguments).output().unwrap();
        assert!(output.status.success() && output.stderr.is_empty(), "{}", told(&output));
        String::from_utf8(output.stdout).unwrap()
    };
    let facts = other("pdfinfo", &["r.pdf"]);
    let fact =
        |name: &str| facts.lines().find_map(|l| l.strip_prefix(name)).unwrap_or_default().trim().to_owned();
    assert!(fact("Page size:").contains("A4"), "{facts}");
    assert_eq!(fact("Tagged:"), "yes");
    assert_eq!(fact("JavaScript:"), "no");
    assert!(fact("Creator:").starts_with("thrustmark"), "{facts}");
    let count: usize = fact("Pages:").parse().unwrap();
    let text = other("pdftotext", &["-layout", "r.pdf", "-"]);
    let pages: Vec<&str> = text.split_terminator('\u{c}').collect();
    assert_eq!(pages.len(), count);
    for (i, page) in pages.iter().enumerate() {
        assert!(page.contains(&format!("Page {} of {count}", i + 1)), "{page}");
        assert!(page.contains("qualified engineer"), "the caution stands on every sheet");
    }
    for words in [
        "Check of the line of thrust",
        "open-spandrel-rib.dxf",
        "masonry-ring.dxf",
        "WITHIN THE STATED LIMITS",
        "Loads, by Bow's letters",
        "Hand check",
        "Force polygon",
        "Proof of optimality",
        "Settings in force",
        "Prepared by",
        "Checked by",
    ] {
        assert!(text.contains(words), "{words}");
    }
    // Every figure of the loads is there, as in the results.
    let json = run(office.path(), &["check", RIB, "--json", "-"]).stdout;
    let json: serde_json::Value = serde_json::from_slice(&json).unwrap();
    let sha256 = json["runs"][0]["drawing"]["sha256"].as_str().unwrap();
    assert!(text.replace(['\n', ' '], "").contains(sha256));
}

#[test]
fn foreign_files_stay_without_force() {
    let office = office();
    for (option, name) in [
        ("--report", "r.html"),
        ("--report", "r.pdf"),
        ("--picture", "p.svg"),
        ("--picture", "p.png"),
        ("--csv", "s.csv"),
        ("--junit", "j.xml"),
    ] {
        let path = office.path().join(name);
        fs::write(&path, "somebody's work").unwrap();
        let output = run(office.path(), &["mark", RIB, option, name]);
        assert_eq!(output.status.code(), Some(2), "{name}");
        assert!(told(&output).contains(name), "{}", told(&output));
        assert_eq!(fs::read(&path).unwrap(), b"somebody's work");
        assert!(!office.path().join("open-spandrel-rib.thrust.dxf").exists(), "refused before any work");
        let output = run(office.path(), &["check", RIB, option, name, "--force"]);
        assert_eq!(output.status.code(), Some(0), "{}", told(&output));
        assert_ne!(fs::read(&path).unwrap(), b"somebody's work");
    }
}

#[test]
fn forms_that_are_not_made_are_refused_by_name() {
    let office = office();
    for (option, name, word) in [
        ("--report", "r.txt", ".html and .pdf"),
        ("--picture", "p.jpg", ".svg and .png"),
        ("--picture", "p", ".svg and .png"),
    ] {
        let output = run(office.path(), &["check", RIB, option, name]);
        assert_eq!(output.status.code(), Some(2));
        assert!(told(&output).contains(word), "{}", told(&output));
        assert!(!office.path().join(name).exists());
    }
}

#[test]
fn no_output_is_a_source_or_another_output() {
    let office = office();
    let source = fs::read(office.path().join(RIB)).unwrap();
    for arguments in [
        vec!["check", RIB, "--csv", RIB],
        vec!["check", RIB, "--csv", RIB, "--force"],
        vec!["check", RIB, "--csv", "x", "--junit", "x"],
        vec!["check", RIB, "--csv", "x", "--junit", "./x"],
        vec!["mark", RIB, "--csv", "open-spandrel-rib.thrust.dxf"],
        vec!["check", RIB, "--csv", "no-such-folder/x.csv"],
    ] {
        let output = run(office.path(), &arguments);
        assert_eq!(output.status.code(), Some(2), "{arguments:?}");
        assert!(!office.path().join("x").exists());
    }
    assert_eq!(fs::read(office.path().join(RIB)).unwrap(), source);
}

#[test]
fn several_drawings_share_a_report_and_have_a_folder_of_pictures() {
    let office = office();
    fs::write(office.path().join("broken.dxf"), "no drawing").unwrap();
    let arguments = [
        "check",
        RIB,
        "broken.dxf",
        "masonry-ring.dxf",
        "--report",
        "r.html",
        "--junit",
        "j.xml",
        "--picture",
        "pictures",
    ];
    let output = run(office.path(), &arguments);
    assert_eq!(output.status.code(), Some(2));
    assert!(told(&output).contains("pictures is no folder"), "{}", told(&output));
    fs::create_dir(office.path().join("pictures")).unwrap();
    let output = run(office.path(), &arguments);
    assert_eq!(output.status.code(), Some(2), "one drawing cannot be read");
    let mut drawn: Vec<String> = fs::read_dir(office.path().join("pictures"))
        .unwrap()
        .map(|e| e.unwrap().file_name().into_string().unwrap())
        .collect();
    drawn.sort();
    assert_eq!(drawn, ["masonry-ring.thrust.svg", "open-spandrel-rib.thrust.svg"]);
    let report = fs::read_to_string(office.path().join("r.html")).unwrap();
    assert_eq!(report.matches("<article").count(), 3);
    assert!(report.contains("NOT READ") && report.contains("WITHIN THE STATED LIMITS"));
    let junit = fs::read_to_string(office.path().join("j.xml")).unwrap();
    assert_eq!(junit.matches("<testsuite ").count(), 3);
    assert!(junit.contains("errors=\"1\""), "{junit}");
}

#[test]
fn outside_and_unchecked_fail_by_type() {
    let office = office();
    fs::write(
        office.path().join("tight.toml"),
        "[layers]\naxis = \"ARCH-AXIS\"\nloads = \"ARCH-LOADS\"\n[rib]\nsupport = \"none\"\n[limits]\noffset = 0.001\n",
    )
    .unwrap();
    let output = run(office.path(), &["check", RIB, "--job", "tight.toml", "--junit", "j.xml"]);
    assert_eq!(output.status.code(), Some(1), "{}", told(&output));
    let junit = fs::read_to_string(office.path().join("j.xml")).unwrap();
    assert!(junit.contains("<failure type=\"outside\""), "{junit}");

    fs::write(
        office.path().join("loose.toml"),
        "[layers]\naxis = \"ARCH-AXIS\"\nloads = \"ARCH-LOADS\"\n[rib]\nsupport = \"none\"\n",
    )
    .unwrap();
    let output = run(office.path(), &["check", RIB, "--job", "loose.toml", "--junit", "j.xml"]);
    assert_eq!(output.status.code(), Some(3), "{}", told(&output));
    let junit = fs::read_to_string(office.path().join("j.xml")).unwrap();
    assert!(junit.contains("<failure type=\"unchecked\""), "{junit}");
}
