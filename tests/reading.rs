//! Reading of whole drawings: every fixture, and outside drawings with an arch put into them.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use thrustmark::drawing;
use thrustmark::job::Settings;
use thrustmark::model::{self, Forces, LoadSettings, Model};
use thrustmark::refusal::Refusal;
use thrustmark::tags::Source;

fn read(path: &Path, settings: &Settings) -> Result<(drawing::Drawing, Model), Refusal> {
    let bytes = Source::open(path)?;
    let outline = drawing::scan(&bytes, settings)?;
    let drawing = drawing::read_outlined(&bytes, &outline, settings)?;
    let model = model::build(&drawing, &LoadSettings::from(settings))?;
    Ok((drawing, model))
}

#[test]
fn injected() {
    let Some(folder) = std::env::var_os("INJECTED") else { return };
    let mut why: BTreeMap<String, Vec<String>> = BTreeMap::new();
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder).unwrap().map(|e| e.unwrap().path()).collect();
    files.sort();
    let mut good = 0;
    for file in &files {
        let name = file.file_name().unwrap().to_string_lossy().into_owned();
        match read(file, &Settings::default()) {
            Ok((d, m)) => {
                let ok = m.spans.len() == 1 && m.spans[0].loads.len() == 7 && m.forces == Forces::Kilonewtons;
                if ok && !d.notes.iter().any(|n| matches!(n, drawing::Note::LayerGuessed { .. })) {
                    good += 1;
                } else {
                    why.entry(format!("odd: {} spans {:?}", m.spans.len(), m.notes)).or_default().push(name);
                }
            }
            Err(e) => why.entry(e.check.clone()).or_default().push(format!("{name}: {e}")),
        }
    }
    println!("{good} of {}", files.len());
    for (k, v) in why {
        println!("{k}: {}", v.len());
        for x in v.iter().take(30) {
            println!("    {x}");
        }
    }
}
