//! Which drawings are meant, and where their marked copies go.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use crate::flow;
use crate::refusal::Refusal;

/// The drawings that the arguments name: files in their order, folders with the drawings in them in byte order. Marked
/// copies in folders are passed over.
///
/// # Errors
/// When a folder cannot be read, or no drawing is found at all.
pub fn drawings(arguments: &[PathBuf]) -> Result<Vec<PathBuf>, Refusal> {
    let mut found = Vec::new();
    for argument in arguments {
        if argument.is_dir() {
            found.extend(in_folder(argument)?);
        } else {
            found.push(argument.clone());
        }
    }
    if found.is_empty() {
        return Err(Refusal::new(
            "no-drawing",
            "No DXF drawing was found in the arguments",
            "Name drawings, or folders that hold files ending in .dxf.",
        ));
    }
    Ok(found)
}

fn in_folder(folder: &Path) -> Result<Vec<PathBuf>, Refusal> {
    let failed = |error: std::io::Error| {
        Refusal::new(
            "folder",
            format!("The folder {} cannot be read: {error}", folder.display()),
            "Check its name and your right to read it.",
        )
    };
    let mut found = Vec::new();
    for entry in std::fs::read_dir(folder).map_err(failed)? {
        let path = entry.map_err(failed)?.path();
        let name = path.file_name().unwrap_or_default().to_string_lossy().to_lowercase();
        if name.ends_with(".dxf") && path.is_file() && !flow::carries_marks(&path) {
            found.push(path);
        }
    }
    found.sort_by(|a, b| a.as_os_str().as_encoded_bytes().cmp(b.as_os_str().as_encoded_bytes()));
    Ok(found)
}

/// The output of each drawing, `None` for "beside it". With several drawings (or a folder among the arguments)
/// `--output` names a folder.
///
/// # Errors
/// When two drawings would have one output, or the folder is none.
pub fn targets(
    arguments: &[PathBuf],
    drawings: &[PathBuf],
    output: Option<&Path>,
) -> Result<Vec<Option<PathBuf>>, Refusal> {
    let several = drawings.len() > 1 || arguments.iter().any(|a| a.is_dir());
    let targets: Vec<Option<PathBuf>> = match output {
        None => vec![None; drawings.len()],
        Some(folder) if several || folder.is_dir() => {
            if !folder.is_dir() {
                return Err(Refusal::new(
                    "output-folder",
                    format!("{} is no folder, and several drawings need one", folder.display()),
                    "Make the folder first, or mark one drawing at a time.",
                ));
            }
            drawings
                .iter()
                .map(|d| Some(folder.join(flow::beside(d).file_name().unwrap_or_default())))
                .collect()
        }
        Some(file) => vec![Some(file.to_path_buf())],
    };
    let mut taken: BTreeMap<PathBuf, &Path> = BTreeMap::new();
    for (drawing, target) in drawings.iter().zip(&targets) {
        let target = target.clone().unwrap_or_else(|| flow::beside(drawing));
        // Two spellings of one folder are one place.
        let folder = target.parent().filter(|p| !p.as_os_str().is_empty()).unwrap_or(Path::new("."));
        let place = folder.canonicalize().unwrap_or_else(|_| folder.to_path_buf());
        let place = place.join(target.file_name().unwrap_or_default());
        if let Some(other) = taken.insert(place, drawing) {
            return Err(Refusal::new(
                "same-output",
                format!(
                    "{} and {} would have one output, {}",
                    other.display(),
                    drawing.display(),
                    target.display()
                ),
                "Mark them in two runs, with an --output of their own.",
            ));
        }
        // A copy that is read by the same run as a drawing would be read before or after it is written.
        let read = drawings.iter().find(|other| same_file::is_same_file(other, &target).unwrap_or(false));
        if let Some(other) = read {
            return Err(Refusal::new(
                "output-is-source",
                format!(
                    "The marked copy of {} would be written over {}, which is read in the same run",
                    drawing.display(),
                    other.display()
                ),
                "Leave one of them out, or name another place with --output.",
            ));
        }
    }
    Ok(targets)
}
