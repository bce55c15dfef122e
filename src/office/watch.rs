//! A folder that is watched: a drawing that was saved is marked again.
//!
//! The folder is looked at a few times a second. That sees every way of saving alike (over the old file, under another
//! name and renamed, through a lock or a network share), which the events of file systems do not. A file is marked when
//! it has stayed as it is from one look to the next; one that cannot be opened is tried again for a while.

use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant, SystemTime};

use super::batch;
use super::compare::{self, Change};
use crate::flow::{self, Environment, Target};
use crate::job::Job;
use crate::outcome::Run;
use crate::refusal::Refusal;

/// Time between two looks.
pub const LOOK: Duration = Duration::from_millis(150);
/// How long a file that cannot be opened is tried again without a word: editors hold locks while they save.
const PATIENCE: Duration = Duration::from_secs(10);

/// How a file was last seen.
#[derive(Debug, Clone, PartialEq, Eq)]
struct Stamp {
    drawing: (u64, Option<SystemTime>, u64),
    /// The job file for it, likewise.
    job: Option<(PathBuf, u64, Option<SystemTime>)>,
}

/// One drawing of the folder.
#[derive(Debug)]
struct Seen {
    /// As it was when it was last worked on.
    done: Option<Stamp>,
    /// As it was at the last look, when that differs.
    waiting: Option<Stamp>,
    /// Since when it has not been possible to open it.
    locked: Option<Instant>,
    /// The last results.
    run: Option<Run>,
}

/// What happened to one drawing.
#[derive(Debug)]
pub struct Saved<'a> {
    /// Results of marking it again; an error when it could not be.
    pub run: &'a Run,
    /// What changed since the last save that could be read; `None` when there is none.
    pub changes: Option<Vec<Change>>,
}

/// A folder under watch.
pub struct Watch {
    folder: PathBuf,
    job: Option<PathBuf>,
    seen: BTreeMap<PathBuf, Seen>,
}

impl Watch {
    /// Begins to watch a folder: its drawings are checked as they stand, so that changes can be told, and nothing is
    /// written yet.
    ///
    /// # Errors
    /// When the folder or the job file named cannot be read.
    pub fn begin(folder: &Path, job: Option<&Path>) -> Result<Self, Refusal> {
        let mut watch =
            Self { folder: folder.to_owned(), job: job.map(Path::to_owned), seen: BTreeMap::new() };
        let environment = Environment::of_process()?;
        let named = job.map(Job::load).transpose()?;
        let stamps = watch.stamps()?;
        let runs = batch::in_order(
            stamps.len(),
            batch::processors(),
            |i| {
                let path = &stamps[i].0;
                (!flow::carries_marks(path)).then(|| flow::check(path, named.as_ref(), environment))
            },
            |i, refusal| Some(flow::refused_unread(&stamps[i].0, refusal)),
            |_| (),
        )?;
        for ((path, stamp), run) in stamps.into_iter().zip(runs) {
            let run = run.filter(|run| run.error.is_none());
            watch.seen.insert(path, Seen { done: Some(stamp), waiting: None, locked: None, run });
        }
        Ok(watch)
    }

    /// Drawings that can be read as they stand.
    pub fn drawings(&self) -> usize {
        self.seen.values().filter(|seen| seen.run.is_some()).count()
    }

    /// Looks at the folder once, and marks what was saved. Marked copies are never marked.
    ///
    /// # Errors
    /// When the folder cannot be read any more.
    pub fn look(&mut self, mut tell: impl FnMut(Saved)) -> Result<(), Refusal> {
        let stamps = self.stamps()?;
        self.seen.retain(|path, _| stamps.iter().any(|(there, _)| there == path));
        for (path, stamp) in stamps {
            let fresh = || Seen { done: None, waiting: None, locked: None, run: None };
            let seen = self.seen.entry(path.clone()).or_insert_with(fresh);
            if seen.done.as_ref() == Some(&stamp) {
                seen.waiting = None;
                continue;
            }
            if seen.waiting.as_ref() != Some(&stamp) {
                // It may still be written to: wait for another look.
                seen.waiting = Some(stamp);
                continue;
            }
            if let Err(error) = fs::File::open(&path) {
                let since = *seen.locked.get_or_insert_with(Instant::now);
                if error.kind() == std::io::ErrorKind::NotFound || since.elapsed() < PATIENCE {
                    continue;
                }
            }
            seen.locked = None;
            seen.waiting = None;
            seen.done = Some(stamp);
            if flow::carries_marks(&path) {
                seen.run = None;
                continue;
            }
            let run = mark(&path, self.job.as_deref());
            let changes = seen
                .run
                .as_ref()
                .filter(|_| run.error.is_none())
                .map(|before| compare::changes(before, &run));
            tell(Saved { run: &run, changes });
            if run.error.is_none() {
                seen.run = Some(run);
            }
        }
        Ok(())
    }

    /// The files of the folder that are named as drawings, in byte order, as they are now.
    fn stamps(&self) -> Result<Vec<(PathBuf, Stamp)>, Refusal> {
        let failed = |error: std::io::Error| {
            Refusal::new(
                "folder",
                format!("The folder {} cannot be watched: {error}", self.folder.display()),
                "Check its name and your right to read it.",
            )
        };
        let mut found = Vec::new();
        for entry in fs::read_dir(&self.folder).map_err(failed)? {
            let path = entry.map_err(failed)?.path();
            let drawing = path.extension().is_some_and(|end| end.eq_ignore_ascii_case("dxf"));
            // What vanished between listing and looking was renamed, and is there next time.
            let Some(metadata) = drawing.then(|| fs::metadata(&path).ok()).flatten() else { continue };
            if !metadata.is_file() {
                continue;
            }
            let job = self.job.clone().or_else(|| Job::locate(&path));
            let job = job.map(|file| {
                let metadata = fs::metadata(&file).ok();
                let size = metadata.as_ref().map_or(0, fs::Metadata::len);
                (file, size, metadata.and_then(|m| m.modified().ok()))
            });
            let drawing = (metadata.len(), metadata.modified().ok(), identity(&metadata));
            found.push((path, Stamp { drawing, job }));
        }
        found.sort_by(|a, b| a.0.as_os_str().as_encoded_bytes().cmp(b.0.as_os_str().as_encoded_bytes()));
        Ok(found)
    }
}

/// Marks one drawing with the job as it stands now.
fn mark(path: &Path, job: Option<&Path>) -> Run {
    let done = batch::guarded(|| {
        let environment = Environment::of_process()?;
        let named = job.map(Job::load).transpose()?;
        Ok(flow::mark(path, named.as_ref(), &Target { output: None, force: false }, environment))
    });
    done.and_then(|run| run).unwrap_or_else(|refusal| flow::refused_unread(path, refusal))
}

/// Tells a file that was put in place by renaming from the one that stood there.
#[cfg(unix)]
fn identity(metadata: &fs::Metadata) -> u64 {
    std::os::unix::fs::MetadataExt::ino(metadata)
}

#[cfg(not(unix))]
fn identity(_: &fs::Metadata) -> u64 {
    0
}
