//! Output files that are there whole or not at all, and never in place of a source.

use std::collections::BTreeSet;
use std::fs::{self, File};
use std::io;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Mutex, OnceLock};
use std::thread;
use std::time::Duration;

use crate::refusal::Refusal;

/// What the names of our temporaries begin and end with.
const BEGINS: &str = ".thrustmark-";
const ENDS: &str = ".tmp";

/// Whether a file that stands under an output's name may be replaced.
pub enum Replace<'a> {
    /// Whatever it is.
    Any,
    /// Only when this says that it is one of ours.
    Ours(&'a dyn Fn(&Path) -> io::Result<bool>),
    /// Never.
    Nothing,
}

/// Looks whether `target` may be written, before any work is done.
///
/// # Errors
///
/// When `target` is one of the `sources` (same file under whatever name, link or hard link), is a folder, lies in a folder
/// that is not there, or is a file that may not be replaced.
pub fn may_write(target: &Path, sources: &[&Path], replace: &Replace) -> Result<(), Refusal> {
    real_target(target, sources, replace).map(|_| ())
}

/// Writes a file: into a temporary in the same folder, which is synced and then renamed to `target`. Temporaries that an
/// earlier run left in that folder are removed.
///
/// Gives back what `write` gave. When anything fails, what stood under the name before stands there still.
///
/// # Errors
///
/// As [`may_write`], what `write` refuses, and whatever the file system refuses.
pub fn write_whole<T>(
    target: &Path,
    sources: &[&Path],
    replace: &Replace,
    write: impl FnOnce(&mut File) -> Result<T, Refusal>,
) -> Result<T, Refusal> {
    let target = real_target(target, sources, replace)?;
    let folder = folder_of(&target);
    remove_stale_once(&folder);
    let mut builder = tempfile::Builder::new();
    builder.prefix(BEGINS).suffix(ENDS);
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        // As any newly made file: what the user's mask leaves of it.
        builder.permissions(fs::Permissions::from_mode(0o666));
    }
    let mut temporary = builder.tempfile_in(&folder).map_err(|e| failed(&target, "could not be made", &e))?;
    // The lock tells other runs that this temporary is alive; file systems without locks do without.
    let _ = temporary.as_file().try_lock();
    let value = write(temporary.as_file_mut())?;
    if let Ok(old) = fs::metadata(&target) {
        // Keeps the permissions of the file replaced where the file system has any.
        let _ = temporary.as_file().set_permissions(old.permissions());
    }
    temporary.as_file().sync_all().map_err(|e| failed(&target, "could not be written", &e))?;
    temporary.persist(&target).map_err(|e| failed(&target, "could not be put in place", &e.error))?;
    #[cfg(unix)]
    if let Ok(opened) = File::open(&folder) {
        // The name itself reaches the disk too; a file system that cannot sync a folder has other means.
        let _ = opened.sync_all();
    }
    Ok(value)
}

/// Does `write`, which puts some `size` bytes into a file, while another thread sends to the disk what is there already:
/// little is left to do for the sync at the end. A file of less than 32 MB is not worth the thread.
///
/// # Errors
///
/// Whatever the file system refuses, and what `write` refuses.
pub fn sending<T>(
    file: &mut File,
    size: u64,
    write: impl FnOnce(&mut File) -> io::Result<T>,
) -> io::Result<T> {
    const WORTH_IT: u64 = 32 << 20;
    const PAUSE: Duration = Duration::from_millis(20);
    struct Ends<'a>(&'a AtomicBool, Option<thread::Thread>);
    impl Drop for Ends<'_> {
        fn drop(&mut self) {
            self.0.store(true, Ordering::Release);
            if let Some(thread) = &self.1 {
                thread.unpark();
            }
        }
    }
    if size < WORTH_IT {
        return write(file);
    }
    let other = file.try_clone()?;
    let ended = AtomicBool::new(false);
    thread::scope(|scope| {
        let send = || {
            loop {
                thread::park_timeout(PAUSE);
                if ended.load(Ordering::Acquire) {
                    return Ok(());
                }
                // An error is told to one caller only, so it must not be lost here.
                other.sync_data()?;
            }
        };
        // Without a thread the sync at the end takes longer, and that is all.
        let sending = thread::Builder::new().name("sync".to_owned()).spawn_scoped(scope, send).ok();
        let end = Ends(&ended, sending.as_ref().map(|s| s.thread().clone()));
        let value = write(file)?;
        drop(end);
        match sending.map(thread::ScopedJoinHandle::join) {
            Some(Ok(Err(error))) => Err(error),
            _ => Ok(value),
        }
    })
}

/// Removes temporaries of ours that no living run holds. What cannot be removed stays, without a word: it does no harm.
pub fn remove_stale(folder: &Path) {
    let Ok(entries) = fs::read_dir(folder) else {
        return;
    };
    for entry in entries.flatten() {
        let name = entry.file_name();
        let name = name.to_string_lossy();
        let ours = name.starts_with(BEGINS) && name.ends_with(ENDS);
        if !ours || !entry.file_type().is_ok_and(|t| t.is_file()) {
            continue;
        }
        let path = entry.path();
        if let Ok(file) = File::options().write(true).open(&path)
            && file.try_lock().is_ok()
        {
            drop(file);
            let _ = fs::remove_file(&path);
        }
    }
}

/// The same, once in a run for each folder: a folder of a thousand drawings is not read a thousand times.
fn remove_stale_once(folder: &Path) {
    static DONE: OnceLock<Mutex<BTreeSet<PathBuf>>> = OnceLock::new();
    let Ok(mut done) = DONE.get_or_init(Mutex::default).lock() else {
        return;
    };
    if done.insert(folder.to_path_buf()) {
        remove_stale(folder);
    }
}

/// The file that is really written: what a link points to, when it points to something.
fn real_target(target: &Path, sources: &[&Path], replace: &Replace) -> Result<PathBuf, Refusal> {
    if target.file_name().is_none() {
        return Err(refuse(
            target,
            "output",
            "is not the name of a file",
            "Name a file, such as bridge.thrust.dxf.",
        ));
    }
    for source in sources {
        if same_file::is_same_file(source, target).unwrap_or(false) {
            return Err(refuse(
                target,
                "output-is-source",
                &format!("is the source itself ({})", source.display()),
                "Name another file with --output; a source is never written.",
            ));
        }
    }
    let metadata = match fs::metadata(target) {
        Ok(metadata) => metadata,
        Err(e) if e.kind() == io::ErrorKind::NotFound => {
            let folder = folder_of(target);
            if !folder.is_dir() {
                return Err(refuse(
                    target,
                    "output-folder",
                    "lies in a folder that is not there",
                    &format!("Make the folder {} first.", folder.display()),
                ));
            }
            return Ok(target.to_path_buf());
        }
        Err(e) => return Err(failed(target, "could not be looked at", &e)),
    };
    if metadata.is_dir() {
        return Err(refuse(target, "output", "is a folder", "Name a file in it."));
    }
    if !metadata.is_file() {
        return Err(refuse(
            target,
            "output",
            "is neither a file nor free (a device or a pipe)",
            "Name an ordinary file.",
        ));
    }
    let allowed = match replace {
        Replace::Any => true,
        Replace::Nothing => false,
        Replace::Ours(is_ours) => is_ours(target).map_err(|e| failed(target, "could not be read", &e))?,
    };
    if !allowed {
        return Err(refuse(
            target,
            "output-exists",
            "is there already and carries no mark of this program",
            "Name another file with --output, or replace it with --force.",
        ));
    }
    fs::canonicalize(target).map_err(|e| failed(target, "could not be looked at", &e))
}

fn folder_of(path: &Path) -> PathBuf {
    match path.parent() {
        Some(parent) if !parent.as_os_str().is_empty() => parent.to_path_buf(),
        _ => PathBuf::from("."),
    }
}

fn refuse(path: &Path, check: &str, what: &str, remedy: &str) -> Refusal {
    Refusal::new(check, format!("the output {what}"), remedy).in_file(path)
}

fn failed(path: &Path, what: &str, error: &io::Error) -> Refusal {
    let remedy = match error.kind() {
        io::ErrorKind::PermissionDenied => "Choose a folder in which you may write, with --output.",
        io::ErrorKind::StorageFull | io::ErrorKind::QuotaExceeded => {
            "Make room on the disk, or name another place with --output."
        }
        io::ErrorKind::ReadOnlyFilesystem => "Name a place that can be written with --output.",
        _ => "Name another place with --output.",
    };
    refuse(path, "output-failed", &format!("{what}: {error}"), remedy)
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::io::Write;

    fn put(text: &str) -> impl FnOnce(&mut File) -> Result<(), Refusal> {
        let text = text.to_owned();
        move |f| f.write_all(text.as_bytes()).map_err(|e| Refusal::new("test", e.to_string(), ""))
    }

    fn names(folder: &Path) -> Vec<String> {
        let mut names: Vec<String> = fs::read_dir(folder)
            .unwrap()
            .map(|e| e.unwrap().file_name().to_string_lossy().into_owned())
            .collect();
        names.sort();
        names
    }

    #[test]
    fn what_is_sent_while_it_is_written_is_whole() {
        let mut file = tempfile::tempfile().unwrap();
        let size = 40 << 20;
        let part = vec![7; 1 << 20];
        let written = sending(&mut file, size, |file| {
            for _ in 0..40 {
                file.write_all(&part)?;
                thread::sleep(Duration::from_millis(1));
            }
            Ok(5)
        });
        assert_eq!((written.unwrap(), file.metadata().unwrap().len()), (5, size));
        let refused = sending(&mut file, size, |_| Err::<(), _>(io::ErrorKind::StorageFull.into()));
        assert_eq!(refused.unwrap_err().kind(), io::ErrorKind::StorageFull);
    }

    #[test]
    fn writes_and_replaces_only_what_it_may() {
        let folder = tempfile::tempdir().unwrap();
        let target = folder.path().join("out.dxf");
        write_whole(&target, &[], &Replace::Nothing, put("one")).unwrap();
        let refusal = write_whole(&target, &[], &Replace::Nothing, put("two")).unwrap_err();
        assert_eq!(refusal.check, "output-exists");
        assert!(refusal.to_string().contains("out.dxf") && refusal.remedy.contains("--force"));
        let ours = |p: &Path| fs::read(p).map(|b| b == b"one");
        write_whole(&target, &[], &Replace::Ours(&ours), put("three")).unwrap();
        assert!(write_whole(&target, &[], &Replace::Ours(&ours), put("four")).is_err());
        assert_eq!(fs::read(&target).unwrap(), b"three");
        write_whole(&target, &[], &Replace::Any, put("five")).unwrap();
        assert_eq!(fs::read(&target).unwrap(), b"five");
        assert_eq!(names(folder.path()), ["out.dxf"]);
    }

    #[cfg(unix)]
    #[test]
    fn never_the_source_under_whatever_name() {
        let folder = tempfile::tempdir().unwrap();
        let source = folder.path().join("source.dxf");
        fs::write(&source, "source").unwrap();
        let soft = folder.path().join("soft.dxf");
        std::os::unix::fs::symlink(&source, &soft).unwrap();
        let hard = folder.path().join("hard.dxf");
        fs::hard_link(&source, &hard).unwrap();
        let round = folder.path().join(".").join("source.dxf");
        for target in [&source, &soft, &hard, &round] {
            let refusal = write_whole(target, &[&source], &Replace::Any, put("no")).unwrap_err();
            assert_eq!(refusal.check, "output-is-source", "{target:?}");
        }
        assert_eq!(fs::read(&source).unwrap(), b"source");
    }

    #[test]
    fn a_failure_leaves_all_as_it_was() {
        let folder = tempfile::tempdir().unwrap();
        let target = folder.path().join("out.dxf");
        fs::write(&target, "old").unwrap();
        let result: Result<(), Refusal> = write_whole(&target, &[], &Replace::Any, |f| {
            f.write_all(b"half").unwrap();
            Err(Refusal::new("test", "stopped", "none"))
        });
        assert_eq!(result.unwrap_err().check, "test");
        assert_eq!(fs::read(&target).unwrap(), b"old");
        assert_eq!(names(folder.path()), ["out.dxf"]);
    }

    #[test]
    fn stale_temporaries_go_and_living_ones_stay() {
        let folder = tempfile::tempdir().unwrap();
        let stale = folder.path().join(".thrustmark-abc123.tmp");
        fs::write(&stale, "left by a kill").unwrap();
        let living = folder.path().join(".thrustmark-def456.tmp");
        fs::write(&living, "being written").unwrap();
        let held = File::options().write(true).open(&living).unwrap();
        held.try_lock().unwrap();
        let other = folder.path().join(".other.tmp");
        fs::write(&other, "not ours").unwrap();
        write_whole(&folder.path().join("out.dxf"), &[], &Replace::Nothing, put("x")).unwrap();
        assert!(!stale.exists() && living.exists() && other.exists());
        drop(held);
        remove_stale(folder.path());
        assert!(!living.exists());
    }

    #[test]
    fn says_what_is_wrong_with_the_place() {
        let folder = tempfile::tempdir().unwrap();
        let missing = folder.path().join("no").join("out.dxf");
        assert_eq!(may_write(&missing, &[], &Replace::Any).unwrap_err().check, "output-folder");
        assert_eq!(may_write(folder.path(), &[], &Replace::Any).unwrap_err().check, "output");
        assert_eq!(may_write(Path::new(""), &[], &Replace::Any).unwrap_err().check, "output");
    }

    #[cfg(unix)]
    #[test]
    fn permissions_are_ordinary() {
        use std::os::unix::fs::PermissionsExt;
        let folder = tempfile::tempdir().unwrap();
        let plain = folder.path().join("plain");
        fs::write(&plain, "x").unwrap();
        let target = folder.path().join("out");
        write_whole(&target, &[], &Replace::Nothing, put("x")).unwrap();
        let mode = |p: &Path| fs::metadata(p).unwrap().permissions().mode();
        assert_eq!(mode(&target), mode(&plain));
        fs::set_permissions(&target, fs::Permissions::from_mode(0o640)).unwrap();
        write_whole(&target, &[], &Replace::Any, put("y")).unwrap();
        assert_eq!(mode(&target) & 0o777, 0o640);
    }
}
