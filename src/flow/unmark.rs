//! Taking the marks out of a marked copy again.

use std::path::{Path, PathBuf};

use super::copy::unwritten;
use crate::refusal::Refusal;
use crate::tags::{self, Hashing, Options, Source};
use crate::write::file::{self, Replace};

/// What [`unmark`] did.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Unmarked {
    /// The file written.
    pub output: PathBuf,
    /// Its SHA-256.
    pub sha256: String,
    /// Whether that is the hash that the marks recorded of the source; false only when forced.
    pub exact: bool,
}

/// Writes a marked copy without its marks. `output` defaults to the copy's name with `.thrust.dxf` (or `.dxf`) replaced
/// by `.unmarked.dxf`.
///
/// # Errors
/// When the drawing cannot be read or carries no marks; when what is left does not have the recorded hash, or a file
/// stands under the output's name (both unless `force`); when it cannot be written.
pub fn unmark(path: &Path, output: Option<&Path>, force: bool) -> Result<Unmarked, Refusal> {
    let marked = Source::open(path)?;
    let outline = tags::scan(&marked, &Options { keep: None, hash: false })?;
    let Some(found) = &outline.marks else {
        return Err(Refusal::new(
            "no-marks",
            "This drawing carries no marks of thrustmark",
            "Give the marked copy, the one that `mark` wrote.",
        ));
    };
    let plain = marked.spliced(&tags::unmark(&marked, &outline)?)?;
    let hashing = Hashing::start(&plain);
    let recorded = found.fact("sha256");
    let output = output.map_or_else(|| beside(path), Path::to_path_buf);
    let replace = if force { Replace::Any } else { Replace::Nothing };
    let (sha256, exact) = file::write_whole(&output, &[path], &replace, |target| {
        // Written while the hash is being computed; when that is wrong, the file never gets its name.
        file::sending(target, plain.len(), |target| plain.write_to_file(target))
            .map_err(|error| unwritten("drawing", &error))?;
        marked.unchanged()?;
        let sha256 = hashing.finish()?;
        let exact = recorded == Some(sha256.as_str());
        if !exact && !force {
            return Err(Refusal::new(
                "unmark-hash",
                "Without its marks this drawing is not the source that was marked: it was changed since, or saved by \
                 another program",
                "Take the source itself, or write what is left with --force (it will not be byte-exact).",
            ));
        }
        Ok((sha256, exact))
    })?;
    Ok(Unmarked { output, sha256, exact })
}

/// `NAME.unmarked.dxf` for `NAME.thrust.dxf` and for `NAME.dxf`.
fn beside(path: &Path) -> PathBuf {
    let name = path.file_name().unwrap_or_default().to_string_lossy().into_owned();
    let lower = name.to_lowercase();
    let stem =
        [".thrust.dxf", ".dxf"].iter().find(|end| lower.ends_with(**end)).map_or(name.as_str(), |end| {
            let cut = name.len() - end.len();
            name.get(..cut).unwrap_or(name.as_str())
        });
    path.with_file_name(format!("{stem}.unmarked.dxf"))
}
