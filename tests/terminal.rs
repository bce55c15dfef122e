//! The summary on a terminal: colours there only and never with `NO_COLOR`, lines as wide as it, the worst thing first.
//! A terminal is made by `script` of util-linux.

#![allow(clippy::unwrap_used, clippy::print_stderr)]

use std::fs;
use std::path::Path;
use std::process::{Command, Output};

const JOB: &str = "[layers]\naxis = \"ARCH-AXIS\"\nloads = \"ARCH-LOADS\"\n[rib]\nsupport = \"none\"\ndepth = 0.45\n\
                   [limits]\noffset = 0.001\nring = 0.01\n";

fn office(job: &str) -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    let good = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/good");
    fs::copy(good.join("open-spandrel-rib.dxf"), folder.path().join("rib.dxf")).unwrap();
    fs::write(folder.path().join("thrustmark.toml"), job).unwrap();
    folder
}

fn checked(folder: &Path, environment: &[(&str, &str)]) -> Output {
    let mut command = Command::new(env!("CARGO_BIN_EXE_thrustmark"));
    command.current_dir(folder).args(["check", "rib.dxf"]).env_remove("NO_COLOR").env("TERM", "xterm");
    command.envs(environment.iter().copied()).output().unwrap()
}

/// What stands on a terminal of so many columns; `None` where no terminal can be made.
fn on_terminal(folder: &Path, columns: u32, environment: &[(&str, &str)]) -> Option<String> {
    let program = env!("CARGO_BIN_EXE_thrustmark");
    let line = format!("stty cols {columns} rows 40; '{program}' check rib.dxf");
    let mut command = Command::new("script");
    command
        .current_dir(folder)
        .args(["-qec", &line, "/dev/null"])
        .env_remove("NO_COLOR")
        .env("TERM", "xterm");
    command.env_remove("COLUMNS").envs(environment.iter().copied());
    match command.output() {
        Ok(output) => Some(String::from_utf8(output.stdout).unwrap().replace('\r', "")),
        Err(_) => {
            eprintln!("SKIPPED: there is no `script` that makes a terminal");
            None
        }
    }
}

/// The text without colours.
fn bare(text: &str) -> String {
    let mut out = String::new();
    let mut rest = text;
    while let Some(at) = rest.find('\u{1b}') {
        out.push_str(&rest[..at]);
        let tail = &rest[at..];
        let end = tail.find('m').unwrap();
        assert!(tail[2..end].chars().all(|c| c.is_ascii_digit() || c == ';'), "only colours: {tail:?}");
        rest = &tail[end + 1..];
    }
    out + rest
}

#[test]
fn colours_on_terminals_only() {
    let office = office(JOB);
    let piped = String::from_utf8(checked(office.path(), &[]).stdout).unwrap();
    assert!(!piped.contains('\u{1b}') && piped.starts_with("OUTSIDE A STATED LIMIT"), "{piped}");
    let Some(shown) = on_terminal(office.path(), 80, &[]) else { return };
    assert!(shown.starts_with("\u{1b}[1;31mOUTSIDE A STATED LIMIT\u{1b}[0m"), "{shown:?}");
    let plain = on_terminal(office.path(), 80, &[("NO_COLOR", "1")]).unwrap();
    assert!(!plain.contains('\u{1b}'), "{plain:?}");
    assert_eq!(bare(&shown), plain, "colours only add to words");
}

#[test]
fn lines_are_as_wide_as_the_terminal() {
    let office = office(JOB);
    for columns in [50, 72, 132] {
        let Some(shown) = on_terminal(office.path(), columns, &[]) else { return };
        let widths: Vec<usize> = bare(&shown).lines().map(|l| l.chars().count()).collect();
        let widest = widths.iter().copied().max().unwrap();
        let columns = usize::try_from(columns).unwrap();
        assert!(widest <= columns, "{widest} of {columns}:\n{shown}");
        assert!(widest > columns * 3 / 4, "{widest} of {columns}: the width is used\n{shown}");
    }
}

/// The worst thing, where it is, how far outside, and what would mend it: which way the axis should move, by how much, at
/// which load.
#[test]
fn worst_first_with_what_would_mend_it() {
    let office = office(JOB);
    let text = String::from_utf8(checked(office.path(), &[]).stdout).unwrap();
    let words: String = text.split_whitespace().collect::<Vec<_>>().join(" ");
    let place = |what: &str| words.find(what).unwrap_or_else(|| panic!("{what} is missing in\n{text}"));
    let order =
        ["OUTSIDE A STATED LIMIT", "worst", "beyond it", "at x", "to mend", "move the axis", "span 1"];
    assert!(order.windows(2).all(|w| place(w[0]) < place(w[1])), "{text}");
    let mend = &words[place("to mend")..place("span 1")];
    assert!(mend.contains("by at least") && mend.contains("is nearest"), "{mend}");
    assert!(mend.contains("upward") || mend.contains("downward"), "{mend}");
}

/// Feet and kips in summary and report where the job asks for them; results for other programs and marks stay as they are.
#[test]
fn us_units_are_told_to_people_only() {
    let us = office(&format!("{JOB}[report]\nunits = \"us\"\n"));
    let text = String::from_utf8(checked(us.path(), &[]).stdout).unwrap();
    for words in [" kip", " ft", " in"] {
        assert!(text.contains(words), "{words}: {text}");
    }
    for words in [" kN", " mm", " m,", " m "] {
        assert!(!text.contains(words), "{words}: {text}");
    }
    let go = |folder: &Path| {
        let arguments = ["mark", "rib.dxf", "--json", "r.json", "--report", "r.html", "--csv", "s.csv"];
        let mut command = Command::new(env!("CARGO_BIN_EXE_thrustmark"));
        let output =
            command.current_dir(folder).args(arguments).env("SOURCE_DATE_EPOCH", "1790000000").output();
        assert_eq!(output.unwrap().status.code(), Some(1));
        let read = |name: &str| fs::read_to_string(folder.join(name)).unwrap();
        let json: serde_json::Value = serde_json::from_str(&read("r.json")).unwrap();
        (json, read("r.html"), read("s.csv"), read("rib.thrust.dxf"))
    };
    let si = office(JOB);
    let (json, html, csv, copy) = go(us.path());
    let (json_si, html_si, csv_si, copy_si) = go(si.path());
    assert_eq!(json["runs"][0]["units"]["length"], "m");
    for part in ["spans", "findings", "units"] {
        assert_eq!(json["runs"][0][part], json_si["runs"][0][part], "{part}");
    }
    assert_eq!(csv, csv_si);
    // The copies differ in the hashes of job and settings alone.
    let marks = |copy: &str| copy.lines().filter(|l| l.len() < 32).map(str::to_owned).collect::<Vec<_>>();
    assert_eq!(marks(&copy), marks(&copy_si));
    // The push of the report, in kips, is that of the results.
    let push = json["runs"][0]["spans"][0]["cases"][0]["lines"][0]["left"]["horizontal"].as_f64().unwrap();
    let kips = format!("{:.1}", push / 4.448_221_615_260_5);
    assert!(html.contains(&kips), "{kips}");
    let span = json["runs"][0]["spans"][0]["axis"]["span"].as_f64().unwrap();
    assert!(html.contains(&format!("{:.3} ft", span / 0.3048)));
    assert!(html.contains("forces in kip") && html.contains("Offset, in") && html_si.contains("Offset, mm"));
    for words in [" kN<", " kN,", " mm<", " mm,", "x, m<", "y, m<"] {
        assert!(!html.contains(words), "{words}");
    }
}
