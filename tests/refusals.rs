//! Every refusal of a drawing, each provoked by a small drawing of its own; `docs/refusals.md` is held to what is seen.
//!
//! With the variable `THRUSTMARK_WRITE` set the page is written anew instead.
// Helpers of tests stand outside of the test functions that the lints exempt.
#![allow(clippy::unwrap_used, clippy::print_stdout)]

use std::collections::BTreeSet;
use std::fmt::Write as _;
use std::fs;
use std::path::{Path, PathBuf};

use thrustmark::flow::{self, Environment, Target};
use thrustmark::job::Job;
use thrustmark::refusal::Refusal;

/// Refusals that no small drawing provokes, and why.
const WITHOUT_DRAWING: &[(&str, &str)] = &[
    ("already-marked", "the flow takes old marks out before it marks; a caller of the library can meet it"),
    (
        "entity",
        "what the entity reader still finds after every number was looked at; no drawing is known that does",
    ),
    ("area-tangled", "takes outlines with tens of thousands of edges over one another"),
    ("axis-pieces", "takes more lines than any bridge has spans"),
    ("labels-crowded", "takes thousands of labels"),
    ("marks", "marks that are not sound: a fault of the program"),
    ("not-finite", "marks that are not sound: a fault of the program"),
    ("read", "the file cannot be opened or read"),
    ("record-length", "takes a record of a million bytes"),
    ("source-changed", "another program writes to the drawing meanwhile"),
    ("splice", "edits that overlap: a fault of the program"),
    ("tag-length", "takes a value of 64 million bytes"),
];

fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

fn environment() -> Environment {
    Environment { today: "2026-01-01".parse().unwrap() }
}

/// What a drawing is refused with by the command that its name stands for; the folder must hold nothing new afterwards.
fn refusal_of(drawing: &Path, check: &str) -> (&'static str, Refusal) {
    let folder = tempfile::tempdir().unwrap();
    let copy = folder.path().join("drawing.dxf");
    fs::copy(drawing, &copy).unwrap();
    let job = Some(drawing.with_extension("toml")).filter(|p| p.exists());
    let job = match job {
        Some(path) => Job::load(&path).unwrap(),
        // A job of its own, so that no file further up counts.
        None => Job::parse(b"", None).unwrap(),
    };
    let (command, refusal) = match check {
        "no-marks" | "marks-version" | "unmark-hash" => {
            ("unmark", flow::unmark(&copy, None, false).err().unwrap_or_else(|| panic!("{check}: unmarked")))
        }
        _ => {
            let target = Target { output: None, force: false };
            let run = flow::mark(&copy, Some(&job), &target, environment());
            assert!(run.verdict.is_none() && run.output.is_none(), "{check}: {:?}", run.output);
            let refusal = run.error.unwrap_or_else(|| panic!("{check}: marked"));
            // What is refused already when it is looked at is listed under the lesser command.
            let looked = flow::check(&copy, Some(&job), environment());
            match looked.error {
                Some(same) => {
                    assert_eq!(same, refusal);
                    ("check", refusal)
                }
                None => ("mark", refusal),
            }
        }
    };
    let left: Vec<_> = fs::read_dir(folder.path()).unwrap().map(|e| e.unwrap().file_name()).collect();
    assert_eq!(left, ["drawing.dxf"], "{check}: something was written");
    assert_eq!(fs::read(&copy).unwrap(), fs::read(drawing).unwrap());
    (command, refusal)
}

#[test]
fn every_refused_drawing_is_refused_as_the_page_says() {
    let mut page = String::from(
        "# Refusals\n\n\
         What is not read is refused: exit status 2, nothing written, and a message with the place and the remedy. Each row\n\
         is provoked by the drawing of that name in `fixtures/refused`; `tests/refusals.rs` holds this page to what is seen\n\
         (with `THRUSTMARK_WRITE=1` it writes it). `mark` also refuses what `check` refuses. Refusals of job files and of the\n\
         command line are not listed here.\n\n\
         | `error.check` | drawing | command | line | handle | layer | message | remedy |\n\
         | --- | --- | --- | --: | --- | --- | --- | --- |\n",
    );
    let mut drawings: Vec<PathBuf> = fs::read_dir(root().join("fixtures/refused"))
        .unwrap()
        .map(|e| e.unwrap().path())
        .filter(|p| p.extension().is_some_and(|e| e == "dxf"))
        .collect();
    drawings.sort();
    assert!(drawings.len() > 40);
    let mut seen = BTreeSet::new();
    for drawing in &drawings {
        let name = drawing.file_stem().unwrap().to_str().unwrap();
        let check = name.split('.').next().unwrap();
        let (command, refusal) = refusal_of(drawing, check);
        assert_eq!(refusal.check, check, "{name}: {refusal}");
        assert!(!refusal.message.is_empty() && !refusal.remedy.is_empty(), "{name}");
        if let Some(line) = refusal.line {
            let lines = fs::read(drawing).unwrap().iter().filter(|b| **b == b'\n').count() as u64;
            assert!((1..=lines + 1).contains(&line), "{name}: line {line} of {lines}");
        }
        seen.insert(check.to_owned());
        let cell = |text: &str| text.replace('|', "\\|").replace("{", "\\{");
        let or_none = |text: Option<&String>| text.map_or_else(String::new, |t| cell(t));
        writeln!(
            page,
            "| `{check}` | {name} | {command} | {} | {} | {} | {} | {} |",
            refusal.line.map_or_else(String::new, |l| l.to_string()),
            or_none(refusal.handle.as_ref()),
            or_none(refusal.layer.as_ref()),
            cell(&refusal.message),
            cell(&refusal.remedy),
        )
        .unwrap();
    }
    page.push_str("\nWithout a drawing:\n\n| `error.check` | why there is none |\n| --- | --- |\n");
    for (check, why) in WITHOUT_DRAWING {
        writeln!(page, "| `{check}` | {why} |").unwrap();
    }
    let file = root().join("docs/refusals.md");
    if std::env::var_os("THRUSTMARK_WRITE").is_some() {
        fs::write(&file, &page).unwrap();
    }
    let written = fs::read_to_string(&file).unwrap_or_default();
    assert!(
        written == page,
        "docs/refusals.md differs from what is seen: run again with THRUSTMARK_WRITE=1 and look at it"
    );
    for check in refusals_in_source() {
        assert!(
            seen.contains(&check) || WITHOUT_DRAWING.iter().any(|w| w.0 == check),
            "no drawing in fixtures/refused provokes `{check}`: add one to tests/fixtures/refused.py"
        );
    }
}

/// The names that the layers of the tags, the drawing and the model give to their refusals.
fn refusals_in_source() -> BTreeSet<String> {
    let mut found = BTreeSet::new();
    for module in ["tags", "drawing", "model"] {
        let mut open = vec![root().join("src").join(module)];
        while let Some(path) = open.pop() {
            if path.is_dir() {
                open.extend(fs::read_dir(path).unwrap().map(|e| e.unwrap().path()));
                continue;
            }
            let text = fs::read_to_string(&path).unwrap();
            let text = text.split("#[cfg(test)]").next().unwrap();
            if path.file_name().unwrap().to_str().unwrap().starts_with("tests") {
                continue;
            }
            for (at, _) in text.match_indices("Refusal::new(").chain(text.match_indices("refuse(")) {
                let call = &text[at..];
                // The first literal of the call, when it looks like a name.
                let Some(name) = call.split('"').nth(1).filter(|n| call[..call.find(n).unwrap()].len() < 60)
                else {
                    continue;
                };
                if !name.is_empty() && name.bytes().all(|b| b.is_ascii_lowercase() || b == b'-') {
                    found.insert(name.to_owned());
                }
            }
        }
    }
    assert!(found.len() > 25, "{found:?}");
    found
}
