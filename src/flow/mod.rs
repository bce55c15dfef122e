//! From a file name to a finished run: the stages in their order, with nothing printed.

mod list;
mod problem;
mod sheet;
mod unmark;

use std::path::{Path, PathBuf};

use jiff::civil::Date;

use crate::drawing::{self, Drawing};
use crate::job::{Job, Settings};
use crate::model::{self, Model};
use crate::outcome::{DrawingFacts, Run, Units};
use crate::refusal::Refusal;
use crate::statics::{self, Analysis};
use crate::tags::{self, Edit, FoundMarks, Hashing, Outline, Source};
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
    /// The hash of the source, while it is on its way into the results.
    hashing: Option<Hashing>,
}

impl Checked {
    /// Waits for the hash of the source and puts it into the results.
    fn hash(&mut self) -> Result<(), Refusal> {
        if let Some(hashing) = self.hashing.take() {
            self.run.drawing.sha256 = Some(hashing.finish()?);
        }
        Ok(())
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
        Ok(mut checked) => match checked.hash() {
            Ok(()) => checked.run,
            Err(refusal) => refused(checked.run.drawing, checked.run.settings, refusal),
        },
        Err(refused) => *refused,
    }
}

/// Checks one drawing and writes its marked copy. A refusal becomes a run with an error and no verdict.
pub fn mark(path: &Path, job: Option<&Job>, target: &Target, environment: Environment) -> Run {
    let mut checked = match checked(path, job, environment) {
        Ok(checked) => checked,
        Err(refused) => return *refused,
    };
    let told = |mut checked: Checked, refusal| {
        // Without its hash the refusal is still the one to tell.
        let _ = checked.hash();
        refused(checked.run.drawing, checked.run.settings, refusal)
    };
    let output = match (&target.output, checked.marks.is_some()) {
        (Some(output), _) => output.clone(),
        (None, false) => beside(path),
        (None, true) => {
            let refusal = Refusal::new(
                "marked-already",
                "This drawing carries marks already",
                "Name the new copy with --output; the old marks are replaced there.",
            );
            return told(checked, refusal);
        }
    };
    match write_copy(path, &mut checked, &output, target.force, environment) {
        Ok(()) => {
            let mut run = checked.run;
            run.output = Some(output.display().to_string());
            run
        }
        Err(refusal) => told(checked, refusal),
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

fn checked(path: &Path, job: Option<&Job>, environment: Environment) -> Result<Checked, Box<Run>> {
    let mut facts = no_facts(path);
    let mut in_force = serde_json::Value::Null;
    stages(path, job, environment, &mut facts, &mut in_force)
        .map_err(|refusal| Box::new(refused(facts, in_force, refusal)))
}

/// The stages in order; what is known so far is left in `facts` and `in_force` for a refusal.
fn stages(
    path: &Path,
    job: Option<&Job>,
    environment: Environment,
    facts: &mut DrawingFacts,
    in_force: &mut serde_json::Value,
) -> Result<Checked, Refusal> {
    let settings = match job_for(path, job)? {
        Some(job) => job.for_sheet(&source_name(path))?,
        None => Settings::default(),
    };
    *in_force = settings.to_json();
    let file = Source::open(path)?;
    let (source, outline, marks, hashing) = without_marks(file, &settings, true)?;
    facts.dxf_version.clone_from(&outline.version);
    facts.form = Some(outline.form.name().into());
    facts.encoding = Some(outline.encoding().into());
    let judged = judged(&source, &outline, &settings, facts, environment);
    let (drawing, judged) = match judged {
        Ok(judged) => judged,
        Err(refusal) => {
            facts.sha256 = hashing.and_then(|hashing| hashing.finish().ok());
            return Err(refusal);
        }
    };
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
    Ok(Checked { run, source, outline, drawing, settings, marks, hashing })
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
    let analyses = analyse(&model, settings)?;
    let judged = verdict::judge(settings, &drawing.notes, &model, &analyses, environment.today);
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

fn analyse(model: &Model, settings: &Settings) -> Result<Vec<Analysis>, Refusal> {
    model
        .spans
        .iter()
        .map(|span| {
            let problem = problem::problem(span, settings);
            statics::analyse(&problem).map_err(|unsolved| problem::refusal(span, &unsolved))
        })
        .collect()
}

/// What stands for the hash while it is not known yet: as long as any.
const NO_HASH: &str = "0000000000000000000000000000000000000000000000000000000000000000";

fn write_copy(
    path: &Path,
    checked: &mut Checked,
    output: &Path,
    force: bool,
    environment: Environment,
) -> Result<(), Refusal> {
    let sources = [path];
    let ours = |target: &Path| Ok(carries_marks(target));
    let replace = if force { Replace::Any } else { Replace::Ours(&ours) };
    file::may_write(output, &sources, &replace)?;
    let mut sheet = sheet::sheet(path, checked, environment);
    // A large drawing is copied while its hash is still being computed; then the digits are put in.
    let late = checked.hashing.as_ref().is_some_and(Hashing::runs);
    if late {
        sheet.sha256 = NO_HASH.to_owned();
    } else {
        checked.hash()?;
        sheet.sha256 = checked.run.drawing.sha256.clone().unwrap_or_default();
    }
    let marked = checked.source.spliced(&edits(checked, &sheet)?)?;
    let failed = |error| {
        Refusal::new(
            "write",
            format!("The marked copy could not be written: {error}"),
            "Look at the space left and at your right to write there.",
        )
    };
    file::write_whole(output, &sources, &replace, |target| {
        marked.write_to_file(target).map_err(failed)?;
        if late {
            checked.hash()?;
            sheet.sha256 = checked.run.drawing.sha256.clone().unwrap_or_default();
            let hashed = checked.source.spliced(&edits(checked, &sheet)?)?;
            if !hashed.rewrite(&marked, target).map_err(failed)? {
                target.set_len(0).map_err(failed)?;
                hashed.write_to_file(target).map_err(failed)?;
            }
        }
        checked.source.unchanged()
    })
}

/// The edits that put the marks of a sheet in.
fn edits(checked: &Checked, sheet: &annotate::Sheet) -> Result<Vec<Edit>, Refusal> {
    let marks = annotate::annotate(&checked.run, sheet);
    let edits = tags::mark(&checked.source, &checked.outline, &marks)?;
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
    Ok(edits)
}

/// Whether a file is a drawing that carries marks of ours; false also when it cannot be read as a drawing.
pub fn carries_marks(path: &Path) -> bool {
    let look = || -> Result<bool, Refusal> {
        let source = Source::open(path)?;
        Ok(tags::scan(&source, &tags::Options { keep: None, hash: false })?.marks.is_some())
    };
    look().unwrap_or(false)
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
