//! Reading of whole drawings: every fixture by two readers, and outside drawings with an arch put into them.

// Helpers of tests fail by panic, like the tests.
#![allow(clippy::unwrap_used, clippy::print_stdout)]

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::Command;

use dxf::entities::{Entity, EntityType};
use thrustmark::drawing::{self, Drawing};
use thrustmark::job::{Job, Settings};
use thrustmark::model::{self, Forces, LoadSettings, Model};
use thrustmark::refusal::Refusal;
use thrustmark::tags::{self, Options, Record, Source};

fn read(path: &Path, settings: &Settings) -> Result<(Drawing, Model), Refusal> {
    let bytes = Source::open(path)?;
    let outline = drawing::scan(&bytes, settings)?;
    let drawing = drawing::read_outlined(&bytes, &outline, settings)?;
    let model = model::build(&drawing, &LoadSettings::from(settings))?;
    Ok((drawing, model))
}

/// All drawings in a folder and the folders in it, in byte order.
fn drawings(folder: &Path) -> Vec<PathBuf> {
    let mut found = Vec::new();
    let mut open = vec![folder.to_owned()];
    while let Some(folder) = open.pop() {
        for entry in std::fs::read_dir(&folder).into_iter().flatten() {
            let path = entry.unwrap().path();
            if path.is_dir() {
                open.push(path);
            } else if path.extension().is_some_and(|e| e.eq_ignore_ascii_case("dxf")) {
                found.push(path);
            }
        }
    }
    found.sort();
    found
}

fn fixtures(folder: &str) -> Vec<PathBuf> {
    let found = drawings(&Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures").join(folder));
    assert!(!found.is_empty(), "no drawings under fixtures/{folder}");
    found
}

/// Type, and the numbers and texts of an entity as the crate read it.
fn as_read(entity: &Entity) -> Option<(&'static str, Vec<f64>, String)> {
    let p = |p: &dxf::Point| vec![p.x, p.y, p.z];
    Some(match &entity.specific {
        EntityType::Line(e) => ("LINE", [p(&e.p1), p(&e.p2)].concat(), String::new()),
        EntityType::Arc(e) => {
            ("ARC", [p(&e.center), vec![e.radius, e.start_angle, e.end_angle]].concat(), String::new())
        }
        EntityType::Circle(e) => ("CIRCLE", [p(&e.center), vec![e.radius]].concat(), String::new()),
        EntityType::ModelPoint(e) => ("POINT", p(&e.location), String::new()),
        EntityType::Insert(e) => {
            let attributes: Vec<&str> = e.attributes().map(|a| a.value.as_str()).collect();
            ("INSERT", p(&e.location), format!("{} {}", e.name, attributes.join(" ")))
        }
        EntityType::Text(e) => ("TEXT", [p(&e.location), vec![e.text_height]].concat(), e.value.clone()),
        EntityType::MText(e) => (
            "MTEXT",
            [p(&e.insertion_point), vec![e.initial_text_height]].concat(),
            e.extended_text.concat() + &e.text,
        ),
        EntityType::LwPolyline(e) => {
            ("LWPOLYLINE", e.vertices.iter().flat_map(|v| [v.x, v.y, v.bulge]).collect(), String::new())
        }
        EntityType::Polyline(e) => (
            "POLYLINE",
            e.vertices().flat_map(|v| [v.location.x, v.location.y, v.bulge]).collect(),
            String::new(),
        ),
        _ => return None,
    })
}

/// The same straight from our tags.
fn as_indexed(record: &Record, decoder: &tags::Decoder) -> (Vec<f64>, String) {
    let number = |r: &Record, code: i32| r.tags.first(code).map_or(0.0, |t| t.real().unwrap());
    let numbers = |codes: &[i32]| codes.iter().map(|&c| number(record, c)).collect::<Vec<f64>>();
    let texts = |r: &Record, codes: &[i32]| {
        r.tags.own().filter(|t| codes.contains(&t.code)).map(|t| decoder.text(t.value)).collect::<String>()
    };
    match record.kind.as_str() {
        "LINE" => (numbers(&[10, 20, 30, 11, 21, 31]), String::new()),
        "ARC" => (numbers(&[10, 20, 30, 40, 50, 51]), String::new()),
        "CIRCLE" => (numbers(&[10, 20, 30, 40]), String::new()),
        "POINT" => (numbers(&[10, 20, 30]), String::new()),
        "INSERT" => {
            let attributes: Vec<String> =
                record.children.iter().filter(|c| c.kind == "ATTRIB").map(|c| texts(c, &[1])).collect();
            (numbers(&[10, 20, 30]), format!("{} {}", texts(record, &[2]), attributes.join(" ")))
        }
        "TEXT" => (numbers(&[10, 20, 30, 40]), texts(record, &[1])),
        "MTEXT" => (numbers(&[10, 20, 30, 40]), texts(record, &[3, 1])),
        "LWPOLYLINE" => {
            let mut found: Vec<f64> = Vec::new();
            for tag in record.tags.own() {
                let last = found.len();
                match tag.code {
                    10 => found.extend([tag.real().unwrap(), 0.0, 0.0]),
                    20 => found[last - 2] = tag.real().unwrap(),
                    42 => found[last - 1] = tag.real().unwrap(),
                    _ => {}
                }
            }
            (found, String::new())
        }
        "POLYLINE" => {
            let vertices = record.children.iter().filter(|c| c.kind == "VERTEX");
            (vertices.flat_map(|v| [10, 20, 42].map(|c| number(v, c))).collect(), String::new())
        }
        other => panic!("{other} is not compared"),
    }
}

const COMPARED: [&str; 9] =
    ["LINE", "ARC", "CIRCLE", "POINT", "INSERT", "TEXT", "MTEXT", "LWPOLYLINE", "POLYLINE"];

/// Compares three readings of one drawing, entity by entity: our tags, the crate on the whole file, and the crate on the
/// fragment that we hand it. Gives the number of entities compared.
fn compare(path: &Path) -> usize {
    let keep = |c: &tags::Candidate<'_>| c.block.is_none() && COMPARED.contains(&c.kind);
    let outline =
        tags::scan(&Source::open(path).unwrap(), &Options { keep: Some(&keep), hash: false }).unwrap();
    let whole = dxf::Drawing::load_file(path).unwrap();
    let theirs: Vec<_> = whole.entities().filter_map(|e| as_read(e).map(|r| (e, r))).collect();
    assert_eq!(theirs.len(), outline.records.len(), "{}", path.display());
    for (record, (entity, (kind, numbers, text))) in outline.records.iter().zip(theirs) {
        let place = format!("{}: {} {:?}", path.display(), record.kind, record.handle);
        assert_eq!(record.kind, kind, "{place}");
        assert_eq!(tags::fold(&record.layer), tags::fold(&entity.common.layer), "{place}");
        if let Some(handle) = record.handle_number() {
            assert_eq!(handle, entity.common.handle.0, "{place}");
        }
        let (ours, our_text) = as_indexed(record, &outline.decoder);
        let fragment = drawing::read::entity(record, &outline.decoder).unwrap();
        let (_, fragment_numbers, fragment_text) = as_read(&fragment).unwrap();
        let bits = |n: &[f64]| n.iter().map(|v| (v + 0.0).to_bits()).collect::<Vec<u64>>();
        assert_eq!(bits(&ours), bits(&numbers), "{place}");
        assert_eq!(bits(&ours), bits(&fragment_numbers), "{place}");
        assert_eq!((&our_text, &our_text), (&text, &fragment_text), "{place}");
    }
    outline.records.len()
}

#[test]
fn two_readers_see_the_same_entities() {
    // Refused drawings are those that a reader cannot read.
    let drawings = [fixtures("good"), fixtures("ways")].concat();
    let count: usize = drawings.iter().map(|f| compare(f)).sum();
    assert!(count > 0, "the fixtures hold no entity that both readers read");
    println!("{count} entities compared");
}

#[test]
fn good_fixtures_are_read() {
    for path in fixtures("good") {
        let settings =
            Job::find(&path).unwrap().map_or_else(|| Ok(Settings::default()), |job| job.for_sheet(&path));
        let (drawing, model) =
            read(&path, &settings.unwrap()).unwrap_or_else(|e| panic!("{}: {e}", path.display()));
        assert!(!model.spans.is_empty() && model.off_span.is_empty(), "{}", path.display());
        println!("{}:", path.display());
        for span in &model.spans {
            println!(
                "  {}: {} to {}, {} loads",
                span.name,
                span.axis.start(),
                span.axis.end(),
                span.loads.len()
            );
            for load in &span.loads {
                println!("    {} at {} {:?} {:?}", load.label, load.at, load.force, load.magnitude_from);
            }
        }
        println!("  {:?}\n  {:?}", drawing.notes, model.notes);
    }
}

fn shared() -> Option<PathBuf> {
    let root = std::env::var_os("THRUSTMARK_SHARED")
        .map_or_else(|| Path::new(env!("CARGO_MANIFEST_DIR")).join("../shared"), PathBuf::from);
    if root.join("corpus").is_dir() && root.join("tools/inject.py").is_file() {
        return Some(root);
    }
    println!("SKIPPED: no outside drawings at {}", root.display());
    None
}

/// Puts an arch into every outside drawing that can take one, labelled and bare; in one run of the interpreter.
const INJECT_ALL: &str = "
import sys, os
root, out = sys.argv[1], sys.argv[2]
sys.path.insert(0, os.path.join(root, 'tools'))
import inject
for name in sorted(os.listdir(os.path.join(root, 'corpus'))):
    if not name.lower().endswith('.dxf'): continue
    data = open(os.path.join(root, 'corpus', name), 'rb').read()
    for kind in ('labelled', 'bare'):
        try: made = inject.inject(data, bare=kind == 'bare')
        except Exception: continue
        open(os.path.join(out, kind, name), 'wb').write(made)
";

#[test]
fn an_arch_in_any_drawing_is_found() {
    let Some(root) = shared() else { return };
    let folder = tempfile::tempdir().unwrap();
    for kind in ["labelled", "bare"] {
        std::fs::create_dir(folder.path().join(kind)).unwrap();
    }
    let python = std::env::var_os("PYTHON").unwrap_or_else(|| "python3".into());
    let run = Command::new(python).args(["-B", "-c", INJECT_ALL]).arg(&root).arg(folder.path()).status();
    if !run.is_ok_and(|s| s.success()) {
        println!("SKIPPED: no Python to put an arch into the outside drawings");
        return;
    }
    for kind in ["labelled", "bare"] {
        let files = drawings(&folder.path().join(kind));
        assert!(files.len() > 490, "{} drawings took an arch", files.len());
        let mut refused: BTreeMap<String, Vec<String>> = BTreeMap::new();
        for file in &files {
            let name = file.file_name().unwrap().to_string_lossy().into_owned();
            let (drawing, model) = match read(file, &Settings::default()) {
                Ok(read) => read,
                Err(refusal) => {
                    // Only a drawing that is damaged itself may be refused.
                    let source = Source::open(&root.join("corpus").join(&name)).unwrap();
                    let own = tags::scan(&source, &Options { keep: None, hash: false });
                    assert_eq!(own.unwrap_err().check, refusal.check, "{name}: {refusal}");
                    refused.entry(refusal.check.clone()).or_default().push(name);
                    continue;
                }
            };
            let guessed = drawing.notes.iter().find(|n| matches!(n, drawing::Note::LayerGuessed { .. }));
            assert_eq!(guessed, None, "{name}");
            let [span] = &model.spans[..] else { panic!("{name}: {} spans", model.spans.len()) };
            let metres = drawing.unit.metres;
            assert!((span.axis.end().x - 40.0 * metres).abs() < 1e-9 * metres, "{name}");
            assert_eq!(span.axis.segments().len(), 32, "{name}");
            let forces: Vec<f64> = span.loads.iter().map(|l| -l.force.y).collect();
            let (expected, unit) = match kind {
                "bare" => ([1.0; 7], Forces::UnitLoads),
                _ => ([120.0, 110.0, 100.0, 95.0, 100.0, 110.0, 120.0], Forces::Kilonewtons),
            };
            assert_eq!((&forces[..], model.forces), (&expected[..], unit), "{name}");
        }
        let count: usize = refused.values().map(Vec::len).sum();
        println!("{kind}: {} of {} read; refused: {refused:?}", files.len() - count, files.len());
    }
}
