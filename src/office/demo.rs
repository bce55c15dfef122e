//! Demo drawings with their job file, for the first minutes.

use std::fs::{self, OpenOptions};
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use crate::refusal::Refusal;

/// The files, by name.
pub const FILES: [(&str, &[u8]); 5] = [
    ("thrustmark.toml", include_bytes!("../../fixtures/good/thrustmark.toml")),
    ("open-spandrel-rib.dxf", include_bytes!("../../fixtures/good/open-spandrel-rib.dxf")),
    ("masonry-ring.dxf", include_bytes!("../../fixtures/good/masonry-ring.dxf")),
    ("unsymmetric-rib.dxf", include_bytes!("../../fixtures/good/unsymmetric-rib.dxf")),
    ("hanging-cable.dxf", include_bytes!("../../fixtures/good/hanging-cable.dxf")),
];

/// Writes the files into a folder, which is made when it is not there. Gives the files in the order written.
///
/// # Errors
/// When one of the files is there already (then none is written), or the folder or a file cannot be written.
pub fn write(folder: &Path) -> Result<Vec<PathBuf>, Refusal> {
    let paths: Vec<PathBuf> = FILES.iter().map(|(name, _)| folder.join(name)).collect();
    if let Some(there) = paths.iter().find(|path| path.symlink_metadata().is_ok()) {
        return Err(exists(there));
    }
    fs::create_dir_all(folder).map_err(|error| failed(folder, &error))?;
    for (path, (_, bytes)) in paths.iter().zip(FILES) {
        // Made anew or not at all: another program may have put one there meanwhile.
        let opened = OpenOptions::new().write(true).create_new(true).open(path);
        opened.and_then(|mut file| file.write_all(bytes)).map_err(|error| match error.kind() {
            io::ErrorKind::AlreadyExists => exists(path),
            _ => failed(path, &error),
        })?;
    }
    Ok(paths)
}

fn exists(path: &Path) -> Refusal {
    Refusal::new(
        "output-exists",
        format!("{} is there already, and a demo overwrites nothing", path.display()),
        "Name another folder, such as one that is not there yet.",
    )
}

fn failed(path: &Path, error: &io::Error) -> Refusal {
    Refusal::new(
        "output-failed",
        format!("{} could not be made: {error}", path.display()),
        "Name a folder in which you may write.",
    )
}
