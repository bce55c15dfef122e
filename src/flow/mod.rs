//! From a file name to a finished run: the stages in their order, with nothing printed.

mod list;
mod problem;
mod ranges;
mod sheet;
mod traffic;
mod unmark;

use std::io::Read;
use std::path::{Path, PathBuf};

use jiff::civil::Date;

use crate::drawing::{self, Drawing};
use crate::job::{Job, Settings};
use crate::model::{self, Model};
use crate::outcome::{DrawingFacts, Run, Units};
use crate::refusal::Refusal;
use crate::statics::{self, Analysis};
use crate::tags::marks::Marks;
use crate::tags::{self, FoundMarks, Hashing, Outline, Source};
use crate::verdict;
use crate::write::annotate;
use crate::write::file::{self, Replace};

pub use list::{LayerLine, Listing, list};
pub use unmark::{Unmarked, unmark};

/// What a run depends on beside its files.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Environment {
    /// The UTC day on which it runs.
    pub today: Date,
}

impl Environment {
    /// Today, or the day of `SOURCE_DATE_EPOCH` (seconds since 1970) when that variable is set.
    ///
    /// # Errors
    /// When the variable is no number of seconds.
    pub fn of_process() -> Result<Self, Refusal> {
        let stamp = match std::env::var("SOURCE_DATE_EPOCH") {
            Ok(text) => {
                text.trim().parse().ok().and_then(|s| jiff::Timestamp::from_second(s).ok()).ok_or_else(
                    || {
                        Refusal::new(
                            "source-date-epoch",
                            format!("SOURCE_DATE_EPOCH is no number of seconds: {text}"),
                            "Set it to seconds since 1970-01-01 UTC, or unset it.",
                        )
                    },
                )?
            }
            Err(_) => jiff::Timestamp::now(),
        };
        Ok(Self { today: jiff::tz::Offset::UTC.to_datetime(stamp).date() })
    }
}

/// A drawing that was read, computed and judged.
pub struct Checked {
    /// The results.
    pub run: Run,
    /// The drawing's bytes without our marks.
    source: Source,
    outline: Outline,
    drawing: Drawing,
    settings: Settings,
    /// The marks that the file as it stands carries.
    marks: Option<FoundMarks>,
}

impl Checked {
    /// The marks that the file as it stands carries.
    pub fn marks(&self) -> Option<&FoundMarks> {
        self.marks.as_ref()
    }

    /// The drawing without marks of ours.
    pub fn source(&self) -> &Source {
        &self.source
    }

    /// The settings in force.
    pub fn settings(&self) -> &Settings {
        &self.settings
    }

    /// What the marks need to know of the sheet.
    pub fn sheet(&self, path: &Path, environment: Environment) -> annotate::Sheet {
        sheet::sheet(path, self, environment)
    }
}

/// Where the marked copy goes.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Target {
    /// The file; `None`: beside the drawing, as [`beside`] names it.
    pub output: Option<PathBuf>,
    /// Replace a file that carries no mark of ours.
    pub force: bool,
}

/// Reads, computes and judges one drawing. A refusal becomes a run with an error and no verdict.
pub fn check(path: &Path, job: Option<&Job>, environment: Environment) -> Run {
    match checked(path, job, environment) {
        Ok(checked) => checked.run,
        Err(refused) => *refused,
    }
}

/// Checks one drawing and writes its marked copy. A refusal becomes a run with an error and no verdict.
pub fn mark(path: &Path, job: Option<&Job>, target: &Target, environment: Environment) -> Run {
    let checked = match checked(path, job, environment) {
        Ok(checked) => checked,
        Err(refused) => return *refused,
    };
    let facts = checked.run.drawing.clone();
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
            return refused(facts, settings, refusal);
        }
    };
    match write_copy(path, &checked, &output, target.force, environment) {
        Ok(()) => {
            let mut run = checked.run;
            run.output = Some(output.display().to_string());
            run
        }
        Err(refusal) => refused(facts, settings, refusal),
    }
}

/// The name of the marked copy beside a drawing: `NAME.thrust.dxf`.
pub fn beside(path: &Path) -> PathBuf {
    let mut name = path.file_stem().unwrap_or_default().to_os_string();
    name.push(".thrust.dxf");
    path.with_file_name(name)
}

/// The job of a drawing: the one named, else the one found on the way up from its folder.
///
/// # Errors
/// As [`Job::load`].
pub fn job_for(path: &Path, named: Option<&Job>) -> Result<Option<Job>, Refusal> {
    match named {
        Some(job) => Ok(Some(job.clone())),
        None => Job::find(path),
    }
}

/// The settings in force for a drawing; the built-in ones where there is no job file.
///
/// # Errors
/// As [`Job::load`] and [`Job::for_sheet`].
pub fn settings_for(path: &Path, named: Option<&Job>) -> Result<Settings, Refusal> {
    settings_as(path, &source_name(path), named)
}

/// The settings for a drawing that the job's sheets know by another name.
///
/// # Errors
/// As [`settings_for`].
pub fn settings_as(path: &Path, name: &Path, named: Option<&Job>) -> Result<Settings, Refusal> {
    match job_for(path, named)? {
        Some(job) => job.for_sheet(name),
        None => Ok(Settings::default()),
    }
}

/// Reads, computes and judges one drawing, and keeps what a mark needs.
///
/// # Errors
/// The run with its refusal.
pub fn checked(path: &Path, job: Option<&Job>, environment: Environment) -> Result<Checked, Box<Run>> {
    match settings_for(path, job) {
        Ok(settings) => checked_with(path, settings, environment),
        Err(refusal) => Err(Box::new(refused(no_facts(path), serde_json::Value::Null, refusal))),
    }
}

/// The settings in force as the results hold them: what they say, and which job they came from.
pub fn in_force(settings: &Settings) -> serde_json::Value {
    let mut in_force = settings.to_json();
    if let (Some(file), Some(tree)) = (&settings.origin.file, in_force.as_object_mut()) {
        let name = file.file_name().unwrap_or_default().to_string_lossy();
        let origin = serde_json::json!({
            "file": name, "sha256": settings.origin.sha256, "sheets": settings.origin.sheets,
        });
        tree.insert("origin".into(), origin);
    }
    in_force
}

/// The same with settings of the caller's.
///
/// # Errors
/// The run with its refusal.
pub fn checked_with(path: &Path, settings: Settings, environment: Environment) -> Result<Checked, Box<Run>> {
    let mut facts = no_facts(path);
    let in_force = in_force(&settings);
    stages(path, settings, environment, &mut facts, &in_force)
        .map_err(|refusal| Box::new(refused(facts, in_force, refusal)))
}

/// The stages in order; what is known so far is left in `facts` for a refusal.
fn stages(
    path: &Path,
    settings: Settings,
    environment: Environment,
    facts: &mut DrawingFacts,
    in_force: &serde_json::Value,
) -> Result<Checked, Refusal> {
    let file = Source::open(path)?;
    let (source, outline, marks, hashing) = without_marks(file, &settings, true)?;
    facts.dxf_version.clone_from(&outline.version);
    facts.form = Some(outline.form.name().into());
    facts.encoding = Some(outline.encoding().into());
    let judged = judged(&source, &outline, &settings, facts, environment);
    // The hash was on its way beside all that; it is told of a refused drawing too.
    facts.sha256 = hashing.map(Hashing::finish).transpose()?;
    let (drawing, judged) = judged?;
    let run = Run {
        units: judged.units,
        drawing: facts.clone(),
        settings: in_force.clone(),
        spans: judged.spans,
        findings: judged.findings,
        verdict: Some(judged.verdict),
        output: None,
        error: None,
    };
    Ok(Checked { run, source, outline, drawing, settings, marks })
}

fn judged(
    source: &Source,
    outline: &Outline,
    settings: &Settings,
    facts: &mut DrawingFacts,
    environment: Environment,
) -> Result<(Drawing, verdict::Judgement), Refusal> {
    let drawing = drawing::read_outlined(source, outline, settings)?;
    facts.unit = Some(drawing.unit.name.into());
    facts.unit_source = Some(drawing.unit.source.name().into());
    let model = model::build(&drawing, &settings.into())?;
    own_weight_stated(settings)?;
    let cases = model::cases::cases(&model, settings)?;
    let analyses = analyse(&model, &cases, settings)?;
    let extras = extras(&model, &cases, settings, &analyses)?;
    let traffic = traffic::run(&model, &cases, settings)?;
    let computed = verdict::Computed {
        model: &model,
        cases: &cases,
        analyses: &analyses,
        extras: &extras,
        traffic: &traffic,
    };
    let judged = verdict::judge(settings, &drawing.notes, &computed, environment.today);
    Ok((drawing, judged))
}

/// The drawing as it was before it was marked, with its outline, the marks it carried, and, when it is wanted, its hash on
/// its way.
fn without_marks(
    file: Source,
    settings: &Settings,
    hash: bool,
) -> Result<(Source, Outline, Option<FoundMarks>, Option<Hashing>), Refusal> {
    // Most drawings carry no marks; for those the hash is under way while they are read.
    let hashing = hash.then(|| Hashing::start(&file));
    let mut outline = drawing::scan(&file, settings)?;
    let Some(marks) = outline.marks.take() else {
        return Ok((file, outline, None, hashing));
    };
    drop(hashing);
    outline.marks = Some(marks.clone());
    let plain = file.spliced(&tags::unmark(&file, &outline)?)?;
    let hashing = hash.then(|| Hashing::start(&plain));
    let outline = drawing::scan(&plain, settings)?;
    Ok((plain, outline, Some(marks), hashing))
}

/// The name that the source of a marked copy has when nobody renamed it: `NAME.dxf` for `NAME.thrust.dxf`; any other
/// name is itself. The job's sheets match this name, so that a marked copy is judged as its source.
fn source_name(path: &Path) -> PathBuf {
    let stem = Path::new(path.file_stem().unwrap_or_default());
    match (stem.extension(), path.extension()) {
        (Some(mark), Some(end)) if mark.eq_ignore_ascii_case("thrust") => {
            path.with_file_name(stem.file_stem().unwrap_or_default()).with_extension(end)
        }
        _ => path.to_path_buf(),
    }
}

/// For every span, in every case.
fn analyse(model: &Model, cases: &[model::Case], settings: &Settings) -> Result<Vec<Vec<Analysis>>, Refusal> {
    model
        .spans
        .iter()
        .map(|span| {
            cases
                .iter()
                .map(|case| {
                    let problem = problem::problem(model, span, case, settings)?;
                    statics::analyse(&problem).map_err(|unsolved| problem::refusal(span, case, &unsolved))
                })
                .collect()
        })
        .collect()
}

/// What takes more than one analysis, for every span, in every case.
fn extras(
    model: &Model,
    cases: &[model::Case],
    settings: &Settings,
    analyses: &[Vec<Analysis>],
) -> Result<Vec<Vec<verdict::Extra>>, Refusal> {
    let of = |(span, analyses): (&model::Span, &Vec<Analysis>)| {
        cases.iter().zip(analyses).map(|(case, a)| ranges::extra(model, span, case, settings, a)).collect()
    };
    model.spans.iter().zip(analyses).map(of).collect()
}

/// Refuses a unit weight without a width: no weight follows from it.
fn own_weight_stated(settings: &Settings) -> Result<(), Refusal> {
    if settings.rib.unit_weight.is_some_and(|w| w > 0.0) && settings.rib.width.is_none() {
        let mut refusal = Refusal::new(
            "own-weight",
            "`rib.unit_weight` is given and `rib.width` is not: the weight of the rib cannot be told",
            "Add `width` to [rib], in metres",
        );
        refusal.line = settings.line_of("rib.unit_weight");
        if let Some(file) = &settings.origin.file {
            refusal = refusal.in_file(file);
        }
        return Err(refusal);
    }
    Ok(())
}

fn write_copy(
    path: &Path,
    checked: &Checked,
    output: &Path,
    force: bool,
    environment: Environment,
) -> Result<(), Refusal> {
    may_write_copy(path, output, force)?;
    write_marked(path, checked, &marked(path, checked, environment)?, output, force)
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

/// Writes a marked copy that was made in memory.
///
/// # Errors
/// As [`may_write_copy`]; when the copy cannot be written; when another program wrote to the source meanwhile.
pub fn write_marked(
    path: &Path,
    checked: &Checked,
    marked: &Source,
    output: &Path,
    force: bool,
) -> Result<(), Refusal> {
    let ours = |target: &Path| Ok(carries_marks(target));
    let replace = if force { Replace::Any } else { Replace::Ours(&ours) };
    file::write_whole(output, &[path], &replace, |target| {
        marked.write_to_file(target).map_err(|error| {
            Refusal::new(
                "write",
                format!("The marked copy could not be written: {error}"),
                "Look at the space left and at your right to write there.",
            )
        })?;
        checked.source.unchanged()
    })
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

fn no_facts(path: &Path) -> DrawingFacts {
    DrawingFacts {
        file: path.display().to_string(),
        sha256: None,
        dxf_version: None,
        form: None,
        encoding: None,
        unit: None,
        unit_source: None,
        sheet: None,
        revision: None,
    }
}

/// A run that ended in a refusal.
pub fn refused(facts: DrawingFacts, settings: serde_json::Value, refusal: Refusal) -> Run {
    Run {
        units: Units::si(),
        drawing: facts,
        settings,
        spans: Vec::new(),
        findings: Vec::new(),
        verdict: None,
        output: None,
        error: Some(refusal),
    }
}

/// A run for a drawing that was refused before it was opened.
pub fn refused_unread(path: &Path, refusal: Refusal) -> Run {
    refused(no_facts(path), serde_json::Value::Null, refusal)
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
