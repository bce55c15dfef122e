//! The job file: which layers to read, what the rib is, what must hold, and how the answer is drawn.
//!
//! A [`Job`] is a file that was read and found good; [`Job::for_sheet`] gives the [`Settings`] in force for one drawing.
//! Imports units and refusals only; knows no drawing and no mechanics.

mod actions;
mod built;
mod choice;
mod cross;
mod layers;
mod limits;
mod names;
mod pattern;
mod problem;
mod read;
mod rib;
mod section;
mod settings;
mod tree;

use std::fmt::Write as _;
use std::io::Read as _;
use std::path::{Path, PathBuf};

use sha2::{Digest, Sha256};

use crate::refusal::Refusal;
use problem::{Problem, combine};
use section::Notes;
use tree::{Kind, Table};

pub use actions::{Area, Case, Deck, Range, Step, Through, Traffic};
pub use choice::Choice;
pub use layers::{Layers, Patterns, Role};
pub use limits::{Accept, Assumption, Exception, LimitCheck, Limits};
pub use names::same_name;
pub use pattern::{Ambiguous, Pattern, best_match};
pub use rib::{Movement, Rib, RibDepth, Support};
pub use settings::{
    Decimal, Draw, Drawing, Govern, JobForce, Line, Loads, Mark, Origin, Plane, Report, ReportUnits,
    Settings, TextHeight, Title,
};

/// Name of the job file that is looked for.
pub const FILE_NAME: &str = "thrustmark.toml";

/// Largest job file that is read, bytes. A job is a few kilobytes; one of this size that is all array takes 100 MB to parse.
pub const LARGEST: u64 = 1 << 20;

/// A job file that was read and found good on its own.
#[derive(Debug, Clone)]
pub struct Job {
    file: Option<PathBuf>,
    sha256: String,
    base: Table,
    sheets: Vec<Sheet>,
}

/// A `[[sheet]]` table.
#[derive(Debug, Clone)]
struct Sheet {
    pattern: Pattern,
    table: Table,
}

impl Job {
    /// The job file for a drawing: the first `thrustmark.toml` on the way up from the drawing's folder. `None` when
    /// there is none, or the folder does not exist (which the reader of the drawing will tell).
    pub fn locate(drawing: &Path) -> Option<PathBuf> {
        let folder = match drawing.parent() {
            Some(folder) if !folder.as_os_str().is_empty() => folder,
            _ => Path::new("."),
        };
        // Resolved first, because the parent of `a/..` is not `a`.
        let folder = folder.canonicalize().ok()?;
        folder.ancestors().map(|folder| folder.join(FILE_NAME)).find(|file| file.symlink_metadata().is_ok())
    }

    /// [`Job::locate`] and [`Job::load`] in one.
    ///
    /// # Errors
    /// As [`Job::load`]; a file that is there but cannot be read is an error, never passed over.
    pub fn find(drawing: &Path) -> Result<Option<Self>, Refusal> {
        Self::locate(drawing).map(|file| Self::load(&file)).transpose()
    }

    /// Reads a job file.
    ///
    /// # Errors
    /// A [`Refusal`] that names the file, with check `job-file` (cannot be read, too large, not UTF-8), or as
    /// [`Job::parse`].
    pub fn load(file: &Path) -> Result<Self, Refusal> {
        let mut bytes = Vec::new();
        let read =
            std::fs::File::open(file).and_then(|opened| opened.take(LARGEST + 1).read_to_end(&mut bytes));
        if let Err(error) = read {
            return Err(Refusal::new(
                "job-file",
                format!("The job file cannot be read: {error}"),
                "Check its name and your right to read it.",
            )
            .in_file(file));
        }
        Self::parse(&bytes, Some(file))
    }

    /// Reads the bytes of a job file. Every table is read, those of sheets too, and every problem is named.
    ///
    /// # Errors
    /// A [`Refusal`] with the line and one of the checks `job-file` (too large, not UTF-8), `job-syntax` (not TOML),
    /// `job-key` (unknown key, with the nearest known one), `job-value`, `job-missing`, `not-built` (designed, and not
    /// built in this version).
    pub fn parse(bytes: &[u8], file: Option<&Path>) -> Result<Self, Refusal> {
        let read = read_file(bytes).map_err(|problem| problem.refusal(file))?;
        match combine(read.problems, file) {
            Some(refusal) => Err(refusal),
            None => Ok(Self {
                file: file.map(Path::to_owned),
                sha256: sha256(bytes),
                base: read.base,
                sheets: read.sheets,
            }),
        }
    }

    /// Every problem of a job file as a refusal of its own, in the order of lines; empty when [`Job::parse`] accepts
    /// it.
    pub fn problems(bytes: &[u8]) -> Vec<Refusal> {
        let mut problems = read_file(bytes).map_or_else(|problem| vec![problem], |read| read.problems);
        problems.sort_by_key(|problem| problem.line);
        problems.into_iter().map(|problem| problem.refusal(None)).collect()
    }

    /// The file it was read from.
    pub fn file(&self) -> Option<&Path> {
        self.file.as_deref()
    }

    /// SHA-256 of the bytes of the file, lower-case hexadecimal.
    pub fn sha256(&self) -> &str {
        &self.sha256
    }

    /// The settings in force for a drawing: the tables of the file with the `[[sheet]]` tables laid over them whose
    /// `match` fits the file name (without regard to case, so that a job means the same on every system).
    ///
    /// # Errors
    /// A [`Refusal`] when settings contradict each other (check `job-value`).
    pub fn for_sheet(&self, drawing: &Path) -> Result<Settings, Refusal> {
        let name = drawing.file_name().unwrap_or_default().to_string_lossy();
        let mut table = self.base.clone();
        let mut applied = Vec::new();
        for sheet in &self.sheets {
            if sheet.pattern.matches(&name) {
                tree::merge(&mut table, &sheet.table);
                applied.push(sheet.pattern.as_str().to_owned());
            }
        }
        let (mut settings, mut problems) = read_table(&table, &[]);
        settings.origin.file.clone_from(&self.file);
        settings.origin.sha256 = Some(self.sha256.clone());
        settings.origin.sheets = applied;
        let notes = Notes::default();
        cross::check(&settings, &notes);
        problems.extend(notes.finish().0);
        match combine(problems, self.file()) {
            Some(refusal) => Err(refusal),
            None => Ok(settings),
        }
    }
}

/// Every key of the job file by its path, such as `rib.depth`, table by table.
pub fn keys() -> impl Iterator<Item = String> {
    built::TABLES
        .iter()
        .filter(|(table, _)| !table.is_empty())
        .flat_map(|(table, keys)| keys.iter().map(move |(key, _)| format!("{table}.{key}")))
}

/// A file that was read, with everything that is wrong in it.
struct Read {
    base: Table,
    sheets: Vec<Sheet>,
    problems: Vec<Problem>,
}

/// Reads every table of a file on its own.
fn read_file(bytes: &[u8]) -> Result<Read, Problem> {
    let mut base = tree::parse(decode(bytes)?)?;
    let mut problems = Vec::new();
    let sheets = take_sheets(&mut base, &mut problems);
    problems.extend(read_table(&base, &["sheet"]).1);
    for sheet in &sheets {
        problems.extend(read_table(&sheet.table, &["match"]).1);
    }
    Ok(Read { base, sheets, problems })
}

fn decode(bytes: &[u8]) -> Result<&str, Problem> {
    let problem = |line, message: &str, remedy: &str| Problem {
        check: "job-file",
        line,
        message: message.to_owned(),
        remedy: remedy.to_owned(),
    };
    if bytes.len() as u64 > LARGEST {
        return Err(problem(1, "The job file is larger than 1 MiB", "Check that it is the file you meant"));
    }
    std::str::from_utf8(bytes).map_err(|error| {
        let before = &bytes[..error.valid_up_to()];
        let line = 1 + memchr::memchr_iter(b'\n', before).count() as u64;
        problem(
            line,
            "The job file is not UTF-8 text",
            "Save it as UTF-8; the first letter that is not stands in this line",
        )
    })
}

/// Takes the `[[sheet]]` tables out of the file.
fn take_sheets(base: &mut Table, problems: &mut Vec<Problem>) -> Vec<Sheet> {
    let Some(entry) = base.remove("sheet") else {
        return Vec::new();
    };
    let mut refuse = |check, line, message: &str, remedy: &str| {
        problems.push(Problem { check, line, message: message.to_owned(), remedy: remedy.to_owned() });
    };
    let Kind::Array(values) = entry.value.kind else {
        let message = format!("`sheet` must be an array of tables, not {}", entry.value.kind.name());
        refuse("job-value", entry.line, &message, "Write a table headed [[sheet]] for each");
        return Vec::new();
    };
    let mut sheets = Vec::new();
    for value in values {
        let Kind::Table(mut table) = value.kind else {
            refuse(
                "job-value",
                value.line,
                "`sheet` must be an array of tables",
                "Write a table headed [[sheet]] for each",
            );
            continue;
        };
        // A sheet in a sheet would be found as an unknown key, but told as one that exists.
        if let Some(nested) = table.remove("sheet") {
            refuse(
                "job-key",
                nested.line,
                "`sheet` cannot stand in a [[sheet]]",
                "Write [[sheet]] tables one after the other",
            );
        }
        match table.remove("match") {
            Some(tree::Entry { value: tree::Value { kind: Kind::Text(text), .. }, line }) => {
                if text.is_empty() || text.contains(['/', '\\']) {
                    refuse(
                        "job-value",
                        line,
                        "`sheet.match` must be a file name or a pattern of file names, without folders",
                        "Write a name such as \"*-existing.dxf\"",
                    );
                }
                sheets.push(Sheet { pattern: Pattern::new(text), table });
            }
            Some(other) => refuse(
                "job-value",
                other.line,
                "`sheet.match` must be a text",
                "Write it in double quotes, such as \"*-existing.dxf\"",
            ),
            None => refuse(
                "job-missing",
                value.line,
                "[[sheet]] has no `match`",
                "Add `match` with a pattern of file names",
            ),
        }
    }
    sheets
}

/// Settings of one table on its own, and what is wrong with it.
fn read_table(table: &Table, also: &[&str]) -> (Settings, Vec<Problem>) {
    let notes = Notes::default();
    let mut settings = read::settings(table, also, &notes);
    let (mut problems, lines) = notes.finish();
    problems.extend(built::not_built(&settings, &lines));
    settings.origin.lines = lines;
    (settings, problems)
}

fn sha256(bytes: &[u8]) -> String {
    let mut text = String::with_capacity(64);
    for byte in Sha256::digest(bytes) {
        // Writing to a String cannot fail.
        let _ = write!(text, "{byte:02x}");
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Tables that are not built yet are refused by [`Job::parse`], so what is read from them is only seen from here.
    #[test]
    fn every_key_arrives_and_survives_a_round_trip() {
        let text = include_str!("../../tests/data/every-key.toml");
        let read = |text: &str| {
            let mut base = tree::parse(text).unwrap();
            let sheets = take_sheets(&mut base, &mut Vec::new());
            for sheet in &sheets {
                tree::merge(&mut base, &sheet.table);
            }
            let notes = Notes::default();
            let mut settings = read::settings(&base, &[], &notes);
            settings.origin.lines = notes.finish().1;
            let notes = Notes::default();
            cross::check(&settings, &notes);
            assert_eq!(notes.finish().0, []);
            settings
        };
        let mut settings = read(text);
        assert_eq!(settings.rib.depth, Some(RibDepth::Constant(0.45)));
        assert_eq!(settings.rib.voussoirs, Some(40));
        assert_eq!(settings.rib.backing, Some(3.2));
        assert_eq!(settings.rib.support, Some(Support::Hingeless));
        assert_eq!(settings.area[0].earth_pressure, Some(0.33));
        assert_eq!(settings.case[0].factors["self"].to_bits(), 1.0_f64.to_bits());
        let traffic = &settings.traffic[0];
        assert_eq!(traffic.axles, [[0.0, 100.0], [1.2, 100.0]]);
        assert_eq!(traffic.through, Some(Through::Fill));
        assert_eq!(traffic.step, Step::Auto);
        assert_eq!(traffic.case.as_deref(), Some("dead"));
        assert_eq!(traffic.influence, [0.25, 0.5]);
        assert_eq!(settings.range[0].what, "fill.unit_weight");
        assert_eq!(settings.title.revision.as_deref(), Some("REV"));
        let written = settings.to_toml();
        let mut again = read(&written);
        assert_eq!(again.to_toml(), written);
        settings.origin = Origin::default();
        again.origin = Origin::default();
        assert_eq!(again, settings);
    }

    /// Names that point to a table which is not there.
    #[test]
    fn names_that_point_nowhere() {
        for (text, words) in [
            ("[[traffic]]\nname = \"t\"\ncase = \"dead\"", "no [[case]] named \"dead\""),
            ("[[case]]\nname = \"dead\"\n[[traffic]]\nname = \"t\"", "which [[case]] it stands on"),
            ("[[traffic]]\nname = \"t\"\nwith = { u = 1 }", "no [[traffic]] named \"u\""),
            ("[[traffic]]\nname = \"t\"\nwith = { T = 1 }", "no [[traffic]] named \"T\""),
            ("[[range]]\nwhat = \"fill.level\"\nlow = 1\nhigh = 2", "no [[area]] named \"fill\""),
            (
                "[[area]]\nname = \"fill\"\nlayer = \"F\"\nunit_weight = 20\n\
                 [[range]]\nwhat = \"FILL.level\"\nlow = 1\nhigh = 2",
                "has no `level`",
            ),
            ("[loads]\narrow_scale = 0.01", "does not say which"),
        ] {
            let notes = Notes::default();
            let mut settings = read::settings(&tree::parse(text).unwrap(), &[], &notes);
            let (problems, lines) = notes.finish();
            assert_eq!(problems, [], "{text}");
            settings.origin.lines = lines;
            let notes = Notes::default();
            cross::check(&settings, &notes);
            let problems = notes.finish().0;
            assert_eq!(problems.len(), 1, "{text}");
            assert!(problems[0].message.contains(words), "{problems:?}");
            assert!(problems[0].line > 1, "{problems:?}");
        }
    }
}
