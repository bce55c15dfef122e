//! The drawings of `fixtures/drawn` against the tables in the pages beside them.

use std::path::{Path, PathBuf};

use thrustmark::flow::{self, Environment};
use thrustmark::job::Job;
use thrustmark::outcome::{Check, Load, Run};

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/drawn")
}

fn run(name: &str) -> Run {
    let job = Job::load(&folder().join("thrustmark.toml")).unwrap();
    let run = flow::check(
        &folder().join(format!("{name}.dxf")),
        Some(&job),
        Environment { today: jiff::civil::date(2026, 12, 1) },
    );
    assert!(run.error.is_none(), "{name}: {:?}", run.error);
    run
}

/// A value as the results spell it.
fn spelled<T: serde::Serialize>(value: &T) -> String {
    serde_json::to_value(value).unwrap().as_str().unwrap_or_default().to_owned()
}

/// Sum of forces, and where it acts.
fn resultant(pieces: &[&Load]) -> ([f64; 2], f64) {
    let sum: f64 = pieces.iter().map(|l| l.force[1]).sum();
    let x = pieces.iter().map(|l| l.force[1] * l.at[0]).sum::<f64>() / sum;
    ([0.0, sum], x)
}

#[test]
fn every_drawing_is_read_as_the_page_beside_it_says() {
    let mut count = 0;
    for entry in std::fs::read_dir(folder()).unwrap() {
        let page = entry.unwrap().path();
        let name = page.file_stem().unwrap().to_str().unwrap().to_owned();
        if page.extension().is_none_or(|e| e != "md") || name == "README" {
            continue;
        }
        count += 1;
        let run = run(&name);
        let all = &run.spans[0].loads;
        let text = std::fs::read_to_string(&page).unwrap();
        let rows: Vec<Vec<String>> = text
            .lines()
            .skip_while(|l| !l.starts_with("| ---"))
            .skip(1)
            .map(|l| l.trim_matches('|').split('|').map(|c| c.trim().to_owned()).collect())
            .collect();
        assert!(!rows.is_empty(), "{name}");
        let singles = all.iter().filter(|l| l.over.is_none()).count();
        assert_eq!(rows.iter().filter(|r| !r[5].ends_with("in pieces")).count(), singles, "{name}: {all:#?}");
        for row in rows {
            let n = |i: usize| row[i].parse::<f64>().unwrap();
            let (label, from, sense) = (&row[0], &row[5], &row[6]);
            let (force, x, y) = if let Some(from) = from.strip_suffix(", in pieces") {
                let prefix = format!("{label}/");
                let pieces: Vec<&Load> = all.iter().filter(|l| l.label.starts_with(&prefix)).collect();
                assert!(pieces.len() > 1 && pieces.iter().all(|l| spelled(&l.magnitude_from) == from));
                let one: Vec<&Load> =
                    pieces.iter().copied().filter(|l| (l.at[0] - n(1)).abs() < 1e-6).collect();
                let (force, x) = resultant(if one.is_empty() { &pieces } else { &one });
                (force, x, n(2))
            } else {
                let load = all.iter().find(|l| l.label == *label).unwrap();
                assert_eq!(spelled(&load.magnitude_from), *from, "{name} {label}");
                let told = load.sense.map(|s| spelled(&s)).unwrap_or_default();
                assert_eq!(told, *sense, "{name} {label}");
                (load.force, load.at[0], load.at[1])
            };
            assert!((x - n(1)).abs() < 1e-6 && (y - n(2)).abs() < 1e-6, "{name} {label}: at {x} {y}");
            for (found, expected) in force.into_iter().zip([n(3), n(4)]) {
                assert!(
                    (found - expected).abs() < 1e-9 * expected.abs().max(1.0),
                    "{name} {label}: {found} {expected}"
                );
            }
        }
    }
    assert_eq!(count, 9);
}

/// The numbers of the pages that stand in no table.
#[test]
fn what_the_drawings_say_beside_their_loads() {
    let said = run("what-it-says");
    assert_eq!((said.drawing.sheet.as_deref(), said.drawing.revision.as_deref()), (Some("B-204"), Some("c")));
    let dimensions: Vec<f64> =
        said.findings.iter().filter(|f| f.check == Check::Dimension).filter_map(|f| f.value).collect();
    assert_eq!(dimensions.len(), 2, "{:#?}", said.findings);
    assert!(dimensions.iter().any(|v| *v < 1e-9) && dimensions.iter().any(|v| (v - 0.05).abs() < 1e-9));
    assert!(said.findings.iter().any(|f| f.message.contains("ELEVATION (NTS)") && f.unchecks));
    let plan = run("plan");
    let couple: f64 = [(-6.0, 30.0), (0.0, 50.0), (4.0, 20.0)]
        .iter()
        .map(|(x, p): &(f64, f64)| p * ((2500.0 - x * x).sqrt() - 49.0))
        .sum();
    let told = plan.findings.iter().find(|f| f.message.starts_with("couples")).unwrap();
    assert!((told.value.unwrap() - couple).abs() < 1e-9, "{}", told.message);
    let bare = run("bare-lines");
    let told: Vec<_> = bare.findings.iter().filter(|f| f.check == Check::Sense).collect();
    assert_eq!(told.len(), 2);
}

fn program(folder: &Path, arguments: &[&str]) -> (i32, String) {
    let out = std::process::Command::new(env!("CARGO_BIN_EXE_thrustmark"))
        .args(arguments)
        .current_dir(folder)
        .env("SOURCE_DATE_EPOCH", "1796000000")
        .output()
        .unwrap();
    let text = String::from_utf8(out.stdout).unwrap() + &String::from_utf8(out.stderr).unwrap();
    (out.status.code().unwrap(), text)
}

/// Words of a text whatever the breaks of its lines.
fn flowing(text: &str) -> String {
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}

#[test]
fn list_shows_each_load_and_why_and_the_job_it_writes_leaves_no_guess() {
    for (name, shown) in [
        ("arrows", &["sense from its arrowhead", "by its label \"40 kN\""][..]),
        ("bare-lines", &["taken to act downward", "taken to act toward the rib", "LINE "]),
        ("line-loads", &["12.0000 kN/m down", "a force per length", "from x -6.0000 m to 0.0000 m"]),
        ("extended-data", &["its extended data \"P=120 kN\" of BRIDGE_TOOLS"]),
        ("posts", &["it stands on the post LINE "]),
        ("points", &["its attribute \"P3 = 9 kip\"", "20.0000 kN up"]),
    ] {
        let place = tempfile::tempdir().unwrap();
        let file = format!("{name}.dxf");
        std::fs::copy(folder().join(&file), place.path().join(&file)).unwrap();
        let (code, text) = program(place.path(), &["list", &file, "--write-job", "begun.toml"]);
        assert_eq!(code, 0, "{text}");
        let text = flowing(&text);
        for words in shown {
            assert!(text.contains(words), "{name}: {words} in {text}");
        }
        // Under that job nothing is guessed: what keeps it from being judged is the missing limit alone.
        let (code, text) = program(place.path(), &["check", &file, "--job", "begun.toml", "--json", "-"]);
        assert_eq!(code, 3, "{text}");
        let json = &text[text.find('{').unwrap()..=text.rfind('}').unwrap()];
        let tree: serde_json::Value = serde_json::from_str(json).unwrap();
        let unchecks: Vec<&str> = tree["runs"][0]["findings"]
            .as_array()
            .unwrap()
            .iter()
            .filter(|f| f["unchecks"] == true)
            .map(|f| f["check"].as_str().unwrap())
            .collect();
        assert_eq!(unchecks, ["no-limit"], "{name}: {json}");
        // Each figure with its handle.
        let (_, text) = program(place.path(), &["check", &file, "--job", "begun.toml", "--verbose"]);
        let handles: Vec<String> = tree["runs"][0]["spans"][0]["loads"]
            .as_array()
            .unwrap()
            .iter()
            .map(|l| l["source"]["handle"].as_str().unwrap().to_owned())
            .collect();
        assert!(
            !handles.is_empty() && handles.iter().all(|h| flowing(&text).contains(h.as_str())),
            "{name}: {text}"
        );
    }
}
