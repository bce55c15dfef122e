//! The shape of the source tree: imports follow the flow, no cycles, no stray prints, no overgrown files, no tolerance
//! outside its file.

#![allow(clippy::unwrap_used, clippy::float_cmp)]

use std::collections::{BTreeMap, BTreeSet};
use std::fs;
use std::path::{Path, PathBuf};

/// The flow: a module may import only from modules named before it, and only from those in its own list.
const FLOW: &[(&str, &[&str])] = &[
    ("tolerance", &[]),
    ("geometry", &["tolerance"]),
    ("refusal", &[]),
    ("units", &["refusal"]),
    ("outcome", &["refusal"]),
    ("tags", &["tolerance", "geometry", "refusal"]),
    ("job", &["tolerance", "refusal", "units"]),
    ("drawing", &["tolerance", "geometry", "refusal", "units", "tags", "job"]),
    ("model", &["tolerance", "geometry", "refusal", "units", "job", "drawing"]),
    ("statics", &["tolerance", "geometry"]),
    (
        "verdict",
        &["tolerance", "geometry", "refusal", "units", "outcome", "job", "drawing", "model", "statics"],
    ),
    ("write", &["tolerance", "geometry", "refusal", "units", "outcome", "tags"]),
    (
        "flow",
        &[
            "tolerance",
            "geometry",
            "refusal",
            "units",
            "outcome",
            "tags",
            "job",
            "drawing",
            "model",
            "statics",
            "verdict",
            "write",
        ],
    ),
    (
        "office",
        &["tolerance", "geometry", "refusal", "units", "outcome", "tags", "job", "drawing", "write", "flow"],
    ),
    ("cli", &["refusal", "units", "outcome", "tags", "job", "drawing", "write", "flow", "office"]),
];

fn sources() -> Vec<PathBuf> {
    fn walk(folder: &Path, into: &mut Vec<PathBuf>) {
        let mut entries: Vec<_> = fs::read_dir(folder).unwrap().map(|e| e.unwrap().path()).collect();
        entries.sort();
        for path in entries {
            if path.is_dir() {
                walk(&path, into);
            } else if path.extension().is_some_and(|e| e == "rs") && !is_test_module(&path) {
                into.push(path);
            }
        }
    }
    let mut found = Vec::new();
    walk(&Path::new(env!("CARGO_MANIFEST_DIR")).join("src"), &mut found);
    found
}

/// A file that its parent takes in under `#[cfg(test)]` only.
fn is_test_module(path: &Path) -> bool {
    let name = path.file_stem().unwrap().to_str().unwrap();
    let parent = path.parent().unwrap().join("mod.rs");
    fs::read_to_string(parent).is_ok_and(|text| {
        text.lines().collect::<Vec<_>>().windows(4).any(|w| {
            w[0] == "#[cfg(test)]"
                && w[1..].iter().any(|l| l.trim_start_matches("pub(crate) ") == format!("mod {name};"))
        }) || text.trim_end().ends_with(&format!("#[cfg(test)]\nmod {name};"))
    })
}

/// The code of a file without comments and without its inline test module.
fn code(path: &Path) -> String {
    let text = fs::read_to_string(path).unwrap();
    let text = match text.find("#[cfg(test)]\nmod ") {
        Some(cut) => &text[..cut],
        None => &text,
    };
    text.lines().filter(|line| !line.trim_start().starts_with("//")).map(|line| format!("{line}\n")).collect()
}

fn module_of(path: &Path) -> Option<String> {
    let inside = path.strip_prefix(Path::new(env!("CARGO_MANIFEST_DIR")).join("src")).unwrap();
    let first = inside.iter().next().unwrap().to_str().unwrap();
    let name = first.strip_suffix(".rs").unwrap_or(first);
    (name != "main" && name != "lib").then(|| name.to_string())
}

/// Top-level modules named after `crate::` in a file, also those inside one pair of braces.
fn imports(code: &str) -> BTreeSet<String> {
    let mut found = BTreeSet::new();
    for (at, _) in code.match_indices("crate::") {
        let rest = &code[at + "crate::".len()..];
        if let Some(list) = rest.strip_prefix('{') {
            let mut depth = 1;
            // True where the next word names a module directly below the crate.
            let mut fresh = true;
            let mut name = String::new();
            for c in list.chars() {
                if depth == 1 && fresh && (c.is_alphanumeric() || c == '_') {
                    name.push(c);
                    continue;
                }
                if !name.is_empty() {
                    found.insert(std::mem::take(&mut name));
                    fresh = false;
                }
                match c {
                    '{' => depth += 1,
                    '}' => depth -= 1,
                    ',' if depth == 1 => fresh = true,
                    _ => {}
                }
                if depth == 0 {
                    break;
                }
            }
        } else {
            let name: String = rest.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect();
            found.insert(name);
        }
    }
    found
}

fn import_graph() -> BTreeMap<String, BTreeSet<String>> {
    let modules: BTreeSet<String> = sources().iter().filter_map(|p| module_of(p)).collect();
    let mut graph: BTreeMap<String, BTreeSet<String>> = BTreeMap::new();
    for path in sources() {
        let Some(module) = module_of(&path) else { continue };
        let targets =
            imports(&code(&path)).into_iter().filter(|name| *name != module && modules.contains(name));
        graph.entry(module.clone()).or_default().extend(targets);
    }
    graph
}

#[test]
fn imports_follow_the_flow() {
    let graph = import_graph();
    assert!(graph.len() > 8, "the walk found too few modules: {graph:?}");
    let mut wrong = Vec::new();
    for (module, targets) in &graph {
        let Some((_, allowed)) = FLOW.iter().find(|(name, _)| name == module) else {
            wrong.push(format!("module `{module}` has no place in the flow"));
            continue;
        };
        for target in targets {
            if !allowed.contains(&target.as_str()) {
                wrong.push(format!("`{module}` imports `{target}` against the flow"));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    for (place, (module, allowed)) in FLOW.iter().enumerate() {
        for target in *allowed {
            assert!(
                FLOW[..place].iter().any(|(name, _)| name == target),
                "the flow lists `{target}` for `{module}` before it stands"
            );
        }
    }
}

#[test]
fn no_cycle_between_modules() {
    let mut graph = import_graph();
    // Take away modules without imports until none is left; what remains lies on a cycle.
    loop {
        let free: Vec<String> = graph.iter().filter(|(_, t)| t.is_empty()).map(|(m, _)| m.clone()).collect();
        if free.is_empty() {
            break;
        }
        for module in &free {
            graph.remove(module);
        }
        for targets in graph.values_mut() {
            targets.retain(|t| !free.contains(t));
        }
    }
    assert!(graph.is_empty(), "modules on a cycle: {graph:?}");
}

#[test]
fn the_import_reader_sees_all_forms() {
    let found = imports(
        "use crate::tags::Mark;\nuse crate::{job::Settings, model, drawing::{note, read}};\nfn f(x: crate::units::Length) {}",
    );
    let expected: BTreeSet<String> = ["tags", "job", "model", "drawing", "units"].map(String::from).into();
    assert_eq!(found, expected);
}

#[test]
fn files_stay_readable() {
    for path in sources() {
        let lines = code(&path).lines().count();
        assert!(lines <= 600, "{} has {lines} lines of code: what two things is it?", path.display());
    }
}

#[test]
fn only_the_command_line_prints() {
    for path in sources() {
        if module_of(&path).as_deref() == Some("cli") {
            continue;
        }
        let text = code(&path);
        for word in ["println!", "eprintln!", "print!(", "dbg!(", "todo!(", "unimplemented!("] {
            assert!(!text.contains(word), "{} holds {word}", path.display());
        }
    }
}

#[test]
fn tolerances_stand_in_their_file() {
    for path in sources() {
        if module_of(&path).as_deref() == Some("tolerance") {
            continue;
        }
        for (number, line) in code(&path).lines().enumerate() {
            let bytes = line.as_bytes();
            let small = line.match_indices("e-").any(|(at, _)| {
                at > 0 && bytes[at - 1].is_ascii_digit() && bytes.get(at + 2).is_some_and(u8::is_ascii_digit)
            });
            assert!(
                !small,
                "{}: small number outside tolerance.rs, code line {}: {line}",
                path.display(),
                number + 1
            );
        }
    }
}
