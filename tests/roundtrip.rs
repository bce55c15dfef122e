//! Every outside drawing is marked and unmarked: the bytes that come back are those that went in.
// Helpers of tests stand outside of the test functions that the lints exempt.
#![allow(clippy::unwrap_used, clippy::print_stdout)]

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use thrustmark::tags::marks::Plane;
use thrustmark::tags::{Form, Source};

mod common;

use common::{TILTED, bytes, marks, round_trip};

fn shared(folder: &str) -> Option<PathBuf> {
    let root = std::env::var_os("THRUSTMARK_SHARED")
        .map_or_else(|| Path::new(env!("CARGO_MANIFEST_DIR")).join("../shared"), PathBuf::from);
    let path = root.join(folder);
    if path.is_dir() {
        return Some(path);
    }
    println!("SKIPPED: no outside drawings at {}", path.display());
    None
}

fn drawings(folder: &Path) -> Vec<PathBuf> {
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|e| e.eq_ignore_ascii_case("dxf")))
        .collect();
    files.sort();
    files
}

#[test]
fn every_outside_drawing_comes_back_to_the_byte() {
    let Some(folder) = shared("corpus") else {
        return;
    };
    let keep = std::env::var_os("THRUSTMARK_MARKED").map(PathBuf::from);
    let folders = std::env::var_os("THRUSTMARK_DRAWINGS").map_or(folder, PathBuf::from);
    let mut counts: BTreeMap<String, u64> = BTreeMap::new();
    let mut refused: BTreeMap<String, Vec<String>> = BTreeMap::new();
    for path in drawings(&folders) {
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        println!("{name}");
        let source = Source::open(&path).unwrap();
        let result = round_trip(&source, &marks(Plane::XY))
            .and_then(|first| round_trip(&source, &marks(TILTED)).map(|_| first));
        match result {
            Ok((outline, marked)) => {
                let form = match outline.form {
                    Form::Ascii => "ASCII",
                    Form::Binary { .. } => "binary",
                };
                *counts.entry(format!("marked {form} {}", outline.rank)).or_default() += 1;
                *counts.entry("marked".into()).or_default() += 1;
                if let Some(keep) = &keep {
                    std::fs::write(keep.join(&name), bytes(&marked)).unwrap();
                }
            }
            Err(refusal) => {
                assert!(!refusal.message.is_empty() && !refusal.remedy.is_empty());
                refused.entry(refusal.check.clone()).or_default().push(format!("{name}: {refusal}"));
                *counts.entry("refused".into()).or_default() += 1;
            }
        }
    }
    for (what, count) in &counts {
        println!("{count:5} {what}");
    }
    for refusals in refused.values() {
        refusals.iter().for_each(|refusal| println!("{refusal}"));
    }
    assert!(counts.get("marked").is_some_and(|count| *count > 0));
}
