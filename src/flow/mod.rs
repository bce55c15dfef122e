//! From a file name to a finished run: the stages in their order, with nothing printed.

mod copy;
mod list;
mod piers;
mod problem;
mod ranges;
mod sheet;
mod suggest;
mod traffic;
mod unmark;

use std::path::{Path, PathBuf};

use jiff::civil::Date;

use crate::drawing::{self, Drawing};
use crate::job::{Job, Settings};
use crate::model::{self, Model};
use crate::outcome::{DrawingFacts, Run, Units};
use crate::refusal::Refusal;
use crate::statics::{self, Analysis};
use crate::tags::{self, FoundMarks, Hashing, Outline, Source};
use crate::verdict;
use crate::write::annotate;

pub use copy::{Target, beside, carries_marks, mark, marked, may_write_copy, with_marks};
pub use list::{LayerLine, Listing, LoadLine, list};
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
    /// The hash of the source, while it is on its way.
    hashing: Option<Hashing>,
}

impl Checked {
    /// Waits for the hash of the source and puts it into the run.
    fn settle(&mut self) -> Result<(), Refusal> {
        if let Some(hashing) = self.hashing.take() {
            self.run.drawing.sha256 = Some(hashing.finish()?);
        }
        Ok(())
    }

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

/// Reads, computes and judges one drawing. A refusal becomes a run with an error and no verdict.
pub fn check(path: &Path, job: Option<&Job>, environment: Environment) -> Run {
    match checked(path, job, environment) {
        Ok(checked) => checked.run,
        Err(refused) => *refused,
    }
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
    settled(begun(path, None, settings, environment)?)
}

/// The same for a drawing that was opened before.
///
/// # Errors
/// The run with its refusal; the hash of the drawing is told in it.
pub fn checked_plain(
    path: &Path,
    plain: Plain,
    settings: Settings,
    environment: Environment,
) -> Result<Checked, Box<Run>> {
    settled(begun(path, Some(plain), settings, environment)?)
}

fn settled(mut checked: Checked) -> Result<Checked, Box<Run>> {
    match checked.settle() {
        Ok(()) => Ok(checked),
        Err(refusal) => Err(Box::new(refused(checked.run.drawing, checked.run.settings, refusal))),
    }
}

/// The same with the hash of the source still on its way.
fn begun(
    path: &Path,
    plain: Option<Plain>,
    settings: Settings,
    environment: Environment,
) -> Result<Checked, Box<Run>> {
    let mut facts = no_facts(path);
    let in_force = in_force(&settings);
    stages(path, plain, settings, environment, &mut facts, &in_force)
        .map_err(|refusal| Box::new(refused(facts, in_force, refusal)))
}

/// The stages in order; what is known so far is left in `facts` for a refusal.
fn stages(
    path: &Path,
    plain: Option<Plain>,
    settings: Settings,
    environment: Environment,
    facts: &mut DrawingFacts,
    in_force: &serde_json::Value,
) -> Result<Checked, Refusal> {
    let plain = match plain {
        Some(plain) => plain,
        None => Plain::open(path, &settings, true)?,
    };
    let Plain { source, outline, marks, hashing } = plain;
    let outline = outline.map_or_else(|| drawing::scan(&source, &settings), Ok)?;
    facts.dxf_version.clone_from(&outline.version);
    facts.form = Some(outline.form.name().into());
    facts.encoding = Some(outline.encoding().into());
    let (drawing, judged) = match judged(&source, &outline, &settings, facts, environment) {
        Ok(judged) => judged,
        Err(refusal) => {
            // It is told of a refused drawing too.
            facts.sha256 = hashing.map(Hashing::finish).transpose()?;
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
    facts.sheet.clone_from(&drawing.title.sheet);
    facts.revision.clone_from(&drawing.title.revision);
    let mut model = model::build(&drawing, &settings.into())?;
    model::backing::trim(&mut model, settings)?;
    model.areas = model::areas::weigh(&model, settings)?;
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
    let mut judged = verdict::judge(settings, &drawing.notes, &computed, environment.today);
    suggest::add(&computed, settings, &mut judged, environment.today)?;
    Ok((drawing, judged))
}

/// A drawing as it was before it was marked.
pub struct Plain {
    /// Its bytes.
    pub source: Source,
    /// The marks that were taken out.
    pub marks: Option<FoundMarks>,
    /// Its hash, on its way, when it is wanted.
    pub hashing: Option<Hashing>,
    /// What stands where in it, where it was gone through already.
    outline: Option<Outline>,
}

impl Plain {
    /// Opens a drawing and takes any marks out of it, in memory. Most drawings carry none; for those the hash is under way
    /// while they are read, and reading once is enough.
    ///
    /// # Errors
    /// When it cannot be read as a drawing.
    pub fn open(path: &Path, settings: &Settings, hash: bool) -> Result<Self, Refusal> {
        let file = Source::open(path)?;
        let hashing = hash.then(|| Hashing::start(&file));
        let outline = drawing::scan(&file, settings)?;
        if outline.marks.is_none() {
            return Ok(Self { source: file, marks: None, hashing, outline: Some(outline) });
        }
        drop(hashing);
        Self::without(&file, &outline, hash)
    }

    /// Takes the marks out of a drawing that was gone through.
    ///
    /// # Errors
    /// When the marks are those of a later version.
    pub fn without(file: &Source, outline: &Outline, hash: bool) -> Result<Self, Refusal> {
        let source = file.spliced(&tags::unmark(file, outline)?)?;
        let hashing = hash.then(|| Hashing::start(&source));
        Ok(Self { source, marks: outline.marks.clone(), hashing, outline: None })
    }
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
fn refused(facts: DrawingFacts, settings: serde_json::Value, refusal: Refusal) -> Run {
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
