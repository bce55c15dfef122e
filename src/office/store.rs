//! Kept results of checks: an unchanged drawing under unchanged settings is not computed twice.
//!
//! A result is kept under a hash of everything it depends on: the bytes of the drawing, the settings and where they stand
//! in the job file, the program itself, and the day where an accepted exception runs out some day. What is kept carries
//! its own hash, so a file that was cut short or changed counts as absent. The folder may be deleted at any moment, and
//! any number of runs may use it at once: each file is put in place whole, and is the same whoever writes it.

use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::time::{Duration, SystemTime};

use sha2::{Digest, Sha256};

use crate::flow::{self, Environment};
use crate::job::{Job, Settings};
use crate::outcome::Run;
use crate::refusal::Refusal;
use crate::tags::Source;

/// What the files begin with; another number makes all older files strangers.
const HEAD: &str = "thrustmark result 1";
/// What the names of kept results end with.
const ENDS: &str = ".result";
/// What the names of files being written begin with.
const PART: &str = "part-";
/// Bytes that are kept at most; beyond it the oldest go.
const LARGEST: u64 = 512 << 20;
/// Age at which a file being written was left by a kill.
const LEFT: Duration = Duration::from_secs(3600);

/// A folder of kept results.
#[derive(Debug, Clone)]
pub struct Store {
    folder: PathBuf,
    /// What tells this program from another build of it.
    program: String,
}

impl Store {
    /// The user's: `thrustmark/results` in the cache folder of the system. `None` where the user has no home, or the
    /// folder cannot be made.
    pub fn of_user() -> Option<Self> {
        let cache = dirs::cache_dir()?;
        // A home that is not there is not made: some services run with a made-up one.
        cache.parent().filter(|parent| parent.is_dir())?;
        Self::at(&cache.join(env!("CARGO_PKG_NAME")).join("results"))
    }

    /// One in a folder, which is made when it is not there. `None` when that fails.
    pub fn at(folder: &Path) -> Option<Self> {
        fs::create_dir_all(folder).ok()?;
        let metadata = std::env::current_exe().and_then(fs::metadata).ok()?;
        let built = metadata.modified().ok()?.duration_since(SystemTime::UNIX_EPOCH).ok()?;
        let program = format!("{} {} {}", env!("CARGO_PKG_VERSION"), metadata.len(), built.as_nanos());
        Some(Self { folder: folder.to_owned(), program })
    }

    fn file(&self, key: &str) -> PathBuf {
        self.folder.join(format!("{key}{ENDS}"))
    }

    /// The key of a drawing with this hash under these settings.
    fn key(&self, sha256: &str, settings: &Settings, environment: Environment) -> String {
        let origin = &settings.origin;
        let dated = settings.accept.finding.iter().any(|e| e.until.is_some());
        let day = if dated { environment.today.to_string() } else { String::new() };
        // Each part as a JSON text, so that no two lists of parts give one sequence of bytes.
        let parts = serde_json::json!([
            HEAD,
            self.program,
            sha256,
            settings.to_json(),
            origin.lines,
            origin.sheets,
            origin.sha256,
            origin.file.as_ref().map(|f| f.as_os_str().as_encoded_bytes()),
            day
        ]);
        hex(parts.to_string().as_bytes())
    }

    fn get(&self, key: &str) -> Option<Run> {
        let text = fs::read_to_string(self.file(key)).ok()?;
        let (head, payload) = text.split_once('\n')?;
        if head != head_of(key, payload) {
            return None;
        }
        serde_json::from_str(payload).ok()
    }

    /// Keeps a run. That it could not be kept is no error: it will be computed again.
    fn put(&self, key: &str, run: &Run) {
        let Ok(payload) = serde_json::to_string(run) else { return };
        // Kept only when it comes back the same: a number that JSON cannot hold would not.
        if serde_json::from_str::<Run>(&payload).ok().as_ref() != Some(run) {
            return;
        }
        let write = || {
            let mut part = tempfile::Builder::new().prefix(PART).tempfile_in(&self.folder)?;
            part.write_all(format!("{}\n{payload}", head_of(key, &payload)).as_bytes())?;
            part.persist(self.file(key)).map(drop).map_err(|e| e.error)
        };
        let _: std::io::Result<()> = write();
    }

    /// Removes files that a kill left, and the oldest results beyond half a gigabyte.
    pub fn tidy(&self) {
        self.shrink(LARGEST);
    }

    fn shrink(&self, largest: u64) {
        let Ok(entries) = fs::read_dir(&self.folder) else { return };
        let mut kept = Vec::new();
        for entry in entries.flatten() {
            let name = entry.file_name().to_string_lossy().into_owned();
            let Ok(metadata) = entry.metadata() else { continue };
            let modified = metadata.modified().unwrap_or(SystemTime::UNIX_EPOCH);
            if name.starts_with(PART) {
                if modified.elapsed().is_ok_and(|age| age > LEFT) {
                    let _ = fs::remove_file(entry.path());
                }
            } else if name.ends_with(ENDS) {
                kept.push((modified, entry.path(), metadata.len()));
            }
        }
        kept.sort();
        let mut size: u64 = kept.iter().map(|k| k.2).sum();
        for (_, path, len) in kept {
            if size <= largest {
                return;
            }
            size -= len;
            let _ = fs::remove_file(path);
        }
    }
}

fn head_of(key: &str, payload: &str) -> String {
    format!("{HEAD} {key} {}", hex(payload.as_bytes()))
}

fn hex(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().map(|byte| format!("{byte:02x}")).collect()
}

/// Checks one drawing as [`flow::check`] does, or takes the kept result where nothing has changed since. Refusals and
/// drawings that carry marks are never kept.
pub fn check(path: &Path, job: Option<&Job>, environment: Environment, store: Option<&Store>) -> Run {
    let Some(store) = store else { return flow::check(path, job, environment) };
    let known = || -> Result<(String, Settings), Refusal> {
        let settings = flow::settings_for(path, job)?;
        Ok((Source::open(path)?.sha256()?, settings))
    };
    // Whatever is wrong is told by the check itself.
    let Ok((sha256, settings)) = known() else { return flow::check(path, job, environment) };
    let key = store.key(&sha256, &settings, environment);
    if let Some(mut run) = store.get(&key) {
        run.drawing.file = path.display().to_string();
        run.settings = flow::in_force(&settings);
        return run;
    }
    let run = flow::checked_with(path, settings, environment).map_or_else(|refused| *refused, |c| c.run);
    // The hash is that of the bytes that were read: a drawing saved meanwhile, or one with marks, has another.
    if run.verdict.is_some() && run.drawing.sha256.as_ref() == Some(&sha256) {
        store.put(&key, &run);
    }
    run
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::sample;

    fn store(folder: &tempfile::TempDir) -> Store {
        Store::at(folder.path()).unwrap()
    }

    #[test]
    fn what_is_kept_comes_back_the_same() {
        let folder = tempfile::tempdir().unwrap();
        let store = store(&folder);
        let mut run = sample::arch(9, 30.1, 5.3).limited(0.05).run();
        run.spans[0].axis.span = 0.1 + 0.2;
        assert_eq!(store.get("k"), None);
        store.put("k", &run);
        assert_eq!(store.get("k"), Some(run.clone()));
        // Under another name it is a stranger.
        fs::rename(store.file("k"), store.file("l")).unwrap();
        assert_eq!(store.get("l"), None);
        run.spans[0].axis.span = f64::NAN;
        store.put("n", &run);
        assert!(!store.file("n").exists(), "what JSON cannot hold is not kept");
    }

    #[test]
    fn a_damaged_file_counts_as_absent() {
        let folder = tempfile::tempdir().unwrap();
        let store = store(&folder);
        store.put("k", &sample::arch(3, 30.0, 5.0).run());
        let whole = fs::read(store.file("k")).unwrap();
        for cut in [0, 10, 60, whole.len() - 1] {
            fs::write(store.file("k"), &whole[..cut]).unwrap();
            assert_eq!(store.get("k"), None);
        }
        let text = String::from_utf8(whole).unwrap();
        fs::write(store.file("k"), text.replacen("30.0", "31.0", 1)).unwrap();
        assert_eq!(store.get("k"), None);
        fs::write(store.file("k"), text).unwrap();
        assert!(store.get("k").is_some());
    }

    #[test]
    fn all_that_a_result_depends_on_is_in_the_key() {
        let folder = tempfile::tempdir().unwrap();
        let store = store(&folder);
        let settings =
            |text: &str| Job::parse(text.as_bytes(), None).unwrap().for_sheet(Path::new("a.dxf")).unwrap();
        let day = |text: &str| Environment { today: text.parse().unwrap() };
        let plain = settings("[limits]\noffset = 0.1\n");
        let key = store.key("aa", &plain, day("2026-01-01"));
        assert_eq!(key, store.key("aa", &plain, day("2027-01-01")), "no day matters here");
        let dated = settings(
            "[limits]\noffset = 0.1\n[[accept.finding]]\ncheck = \"offset\"\nup_to = 1.0\nreason = \"r\"\nby = \"b\"\n\
             until = 2026-06-01\n",
        );
        let mut keys = vec![
            key,
            store.key("ab", &plain, day("2026-01-01")),
            store.key("aa", &settings("[limits]\noffset = 0.2\n"), day("2026-01-01")),
            // The same values in force, but stated: a stated layer must be in the drawing.
            store.key(
                "aa",
                &settings("[limits]\noffset = 0.1\n[layers]\naxis = \"ARCH-AXIS\"\n"),
                day("2026-01-01"),
            ),
            store.key("aa", &dated, day("2026-01-01")),
            store.key("aa", &dated, day("2027-01-01")),
            Store { program: "other".into(), ..store.clone() }.key("aa", &plain, day("2026-01-01")),
        ];
        let all = keys.len();
        keys.sort();
        keys.dedup();
        assert_eq!(keys.len(), all);
    }

    #[test]
    fn the_oldest_go_first() {
        let folder = tempfile::tempdir().unwrap();
        let store = store(&folder);
        for (i, key) in ["a", "b", "c"].iter().enumerate() {
            fs::write(store.file(key), [0; 100]).unwrap();
            let time = SystemTime::UNIX_EPOCH + Duration::from_secs(1000 + i as u64);
            fs::File::options().write(true).open(store.file(key)).unwrap().set_modified(time).unwrap();
        }
        let part = folder.path().join("part-x");
        fs::write(&part, "living").unwrap();
        store.shrink(200);
        assert!(!store.file("a").exists() && store.file("b").exists() && store.file("c").exists());
        assert!(part.exists());
        let old = SystemTime::now() - 2 * LEFT;
        fs::File::options().write(true).open(&part).unwrap().set_modified(old).unwrap();
        store.tidy();
        assert!(!part.exists() && store.file("c").exists());
    }
}
