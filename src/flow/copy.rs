//! The marked copy: made in memory, written whole, and told from drawings of others.

use std::fs::File;
use std::io::{self, Read, Seek};
use std::path::{Path, PathBuf};

use super::{Checked, Environment, begun, no_facts, refused, settings_for, sheet};
use crate::job::Job;
use crate::outcome::Run;
use crate::refusal::Refusal;
use crate::tags::marks::Marks;
use crate::tags::{self, Hashing, Source};
use crate::write::annotate;
use crate::write::file::{self, Replace};

/// Where the marked copy goes.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Target {
    /// The file; `None`: beside the drawing, as [`beside`] names it.
    pub output: Option<PathBuf>,
    /// Replace a file that carries no mark of ours.
    pub force: bool,
}

/// Checks one drawing and writes its marked copy. A refusal becomes a run with an error and no verdict.
pub fn mark(path: &Path, job: Option<&Job>, target: &Target, environment: Environment) -> Run {
    let settings = match settings_for(path, job) {
        Ok(settings) => settings,
        Err(refusal) => return refused(no_facts(path), serde_json::Value::Null, refusal),
    };
    let mut checked = match begun(path, None, settings, environment) {
        Ok(checked) => checked,
        Err(refused) => return *refused,
    };
    let settings = checked.run.settings.clone();
    let output = match (&target.output, checked.marks.is_some()) {
        (Some(output), _) => output.clone(),
        (None, false) => beside(path),
        (None, true) => {
            let refusal = Refusal::new(
                "marked-already",
                "This drawing carries marks already",
                "Name the new copy with --output; the old marks are replaced there.",
            );
            return refused(checked.run.drawing, settings, refusal);
        }
    };
    match write_copy(path, &mut checked, &output, target.force, environment) {
        Ok(()) => {
            let mut run = checked.run;
            run.output = Some(output.display().to_string());
            run
        }
        Err(refusal) => refused(checked.run.drawing, settings, refusal),
    }
}

/// The name of the marked copy beside a drawing: `NAME.thrust.dxf`.
pub fn beside(path: &Path) -> PathBuf {
    let mut name = path.file_stem().unwrap_or_default().to_os_string();
    name.push(".thrust.dxf");
    path.with_file_name(name)
}

/// Writes the copy while the hash of a large source is still on its way, with zeros in its place, and puts it in
/// afterwards.
fn write_copy(
    path: &Path,
    checked: &mut Checked,
    output: &Path,
    force: bool,
    environment: Environment,
) -> Result<(), Refusal> {
    may_write_copy(path, output, force)?;
    if !checked.hashing.as_ref().is_some_and(Hashing::runs) {
        checked.settle()?;
    }
    let early = marked(path, checked, environment)?;
    write_over(path, output, force, |target| {
        file::sending(target, early.len(), |target| early.write_to_file(target))
            .map_err(|error| unwritten("marked copy", &error))?;
        if checked.hashing.is_some() {
            checked.settle()?;
            let late = marked(path, checked, environment)?;
            put_in(&late, &early, target).map_err(|error| unwritten("marked copy", &error))?;
        }
        checked.source.unchanged()
    })
}

/// Makes of a file that holds the early bytes one that holds the late ones.
fn put_in(late: &Source, early: &Source, target: &mut File) -> io::Result<()> {
    if !late.rewrite(early, target)? {
        // More than digits has moved: the layout depends on how wide they are.
        target.rewind()?;
        target.set_len(0)?;
        late.write_to_file(target)?;
    }
    Ok(())
}

pub(super) fn unwritten(what: &str, error: &io::Error) -> Refusal {
    Refusal::new(
        "write",
        format!("The {what} could not be written: {error}"),
        "Look at the space left and at your right to write there.",
    )
}

/// Looks whether a marked copy may be written, before any work is done: over nothing, over a copy of ours, or by force.
///
/// # Errors
/// As [`file::may_write`].
pub fn may_write_copy(path: &Path, output: &Path, force: bool) -> Result<(), Refusal> {
    let ours = |target: &Path| Ok(carries_marks(target));
    let replace = if force { Replace::Any } else { Replace::Ours(&ours) };
    file::may_write(output, &[path], &replace)
}

/// The marked copy of a checked drawing, in memory.
///
/// # Errors
/// When the drawing cannot take the marks.
pub fn marked(path: &Path, checked: &Checked, environment: Environment) -> Result<Source, Refusal> {
    let sheet = sheet::sheet(path, checked, environment);
    with_marks(checked, &annotate::annotate(&checked.run, &sheet))
}

/// A checked drawing with marks of the caller's in it, in memory. Marks that it carried are gone.
///
/// # Errors
/// When the drawing cannot take the marks.
pub fn with_marks(checked: &Checked, marks: &Marks) -> Result<Source, Refusal> {
    let edits = tags::mark(&checked.source, &checked.outline, marks)?;
    let broken = tags::validate::check_inserted(&checked.source, &checked.outline, &edits)?;
    if let Some(first) = broken.first() {
        return Err(Refusal::new(
            "marks-invalid",
            format!(
                "The marks made for this drawing break {} rules of the format, first {:?}: {}",
                broken.len(),
                first.rule,
                first.detail
            ),
            "Report this drawing; nothing was written.",
        ));
    }
    checked.source.spliced(&edits)
}

fn write_over(
    path: &Path,
    output: &Path,
    force: bool,
    write: impl FnOnce(&mut File) -> Result<(), Refusal>,
) -> Result<(), Refusal> {
    let ours = |target: &Path| Ok(carries_marks(target));
    let replace = if force { Replace::Any } else { Replace::Ours(&ours) };
    file::write_whole(output, &[path], &replace, write)
}

/// Whether a file is a drawing that carries marks of ours; false also when it cannot be read as a drawing.
pub fn carries_marks(path: &Path) -> bool {
    let look = || -> Result<bool, Refusal> {
        let source = Source::open(path)?;
        // A scan is dearer than a search, and most drawings of a set carry no marks.
        if !holds_name(&mut source.reader()).unwrap_or(true) {
            return Ok(false);
        }
        Ok(tags::scan(&source, &tags::Options { keep: None, hash: false })?.marks.is_some())
    };
    look().unwrap_or(false)
}

/// Whether the name of our application stands anywhere in the bytes, in capitals or not.
fn holds_name(reader: &mut impl Read) -> std::io::Result<bool> {
    const CHUNK: usize = 1 << 18;
    let name = tags::APPLICATION.as_bytes();
    let first = name.first().copied().unwrap_or_default();
    let mut buffer = vec![0; CHUNK];
    // Bytes at the start of the buffer that were there before: a name may lie across two chunks.
    let mut kept = 0;
    loop {
        let read = reader.read(&mut buffer[kept..])?;
        if read == 0 {
            return Ok(false);
        }
        let filled = &buffer[..kept + read];
        let found = memchr::memchr2_iter(first, first.to_ascii_lowercase(), filled)
            .any(|at| filled.get(at..at + name.len()).is_some_and(|part| part.eq_ignore_ascii_case(name)));
        if found {
            return Ok(true);
        }
        let tail = filled.len().saturating_sub(name.len() - 1)..filled.len();
        kept = tail.len();
        buffer.copy_within(tail, 0);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Gives a few bytes at a time.
    struct Slow<'a>(&'a [u8], usize);

    impl Read for Slow<'_> {
        fn read(&mut self, buf: &mut [u8]) -> std::io::Result<usize> {
            let count = self.1.min(self.0.len()).min(buf.len());
            buf[..count].copy_from_slice(&self.0[..count]);
            self.0 = &self.0[count..];
            Ok(count)
        }
    }

    #[test]
    fn the_name_is_found_across_chunks() {
        for step in [1, 3, 7, 100] {
            for (text, found) in [
                ("  1\nTHRUSTMARK\n", true),
                ("tTtthrustMark", true),
                ("THRUSTMAR", false),
                ("", false),
                ("THRUST MARK THRUSTMAR K", false),
            ] {
                assert_eq!(holds_name(&mut Slow(text.as_bytes(), step)).unwrap(), found, "{text} by {step}");
            }
        }
    }
}
