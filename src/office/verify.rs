//! Whether a marked copy is still what its source, its job and this version of the program give.

use std::path::{Path, PathBuf};

use jiff::civil::Date;
use serde::Serialize;

use crate::flow::{self, Environment};
use crate::job::{Job, Settings};
use crate::outcome::{Run, Verdict};
use crate::refusal::Refusal;
use crate::tags::{self, FoundMarks, Hashing, Options, Outline, Source};
use crate::write::annotate::settings_hash;

/// Whether a marked copy may be issued as it stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum State {
    /// It is what marking the source again gives, to the byte.
    Current,
    /// Something has changed since it was marked.
    Stale,
}

/// What has changed. A closed list.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum What {
    /// The source.
    Source,
    /// The copy, beside its marks.
    Copy,
    /// The job file.
    Job,
    /// The settings in force for this drawing.
    Settings,
    /// The version of the program.
    Tool,
    /// The marks themselves.
    Marks,
    /// The verdict, because time has passed.
    Verdict,
}

/// One thing that makes a mark stale.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Reason {
    /// What has changed.
    pub what: What,
    /// In words.
    pub message: String,
}

/// What the marks say of themselves.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Recorded {
    /// Name of the source.
    pub source: Option<String>,
    /// SHA-256 of the source.
    pub sha256: Option<String>,
    /// SHA-256 of the job file; null when there was none.
    pub job: Option<String>,
    /// SHA-256 of the settings in force.
    pub settings: Option<String>,
    /// Program and version.
    pub tool: Option<String>,
    /// UTC day.
    pub date: Option<String>,
    /// The verdict.
    pub verdict: Option<String>,
}

impl Recorded {
    fn of(marks: &FoundMarks) -> Self {
        let fact = |key: &str| marks.fact(key).map(str::to_owned);
        Self {
            source: fact("source"),
            sha256: fact("sha256"),
            job: fact("job"),
            settings: fact("settings"),
            tool: fact("tool"),
            date: fact("date"),
            verdict: fact("verdict"),
        }
    }
}

/// What [`verify`] found.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Verified {
    /// The marked copy, as named.
    pub file: String,
    /// The source it was held against, as named; null: not compared.
    pub source: Option<String>,
    /// The job file in force; null when there is none.
    pub job: Option<String>,
    /// Current or stale.
    pub state: State,
    /// Why it is stale; empty when it is current.
    pub reasons: Vec<Reason>,
    /// What the marks say of themselves.
    pub recorded: Recorded,
}

/// Holds a marked copy against its source (without one: against the hash that it carries), the job in force and this
/// version, and marks the unmarked bytes again in memory to find marks that were edited or removed.
///
/// # Errors
/// When a file cannot be read, carries no marks of a check, or carries marks of a later version; when the job is wrong.
pub fn verify(
    marked: &Path,
    source: Option<&Path>,
    job: Option<&Job>,
    environment: Environment,
) -> Result<Verified, Refusal> {
    let copy = Source::open(marked)?;
    let outline = tags::scan(&copy, &Options { keep: None, hash: false })?;
    let found = of_a_check(marked, &outline)?;
    let recorded = Recorded::of(found);
    let mut plain = flow::Plain::without(&copy, &outline, true)?;
    let other = source.map(|path| Source::open(path).map(|s| (path, Hashing::start(&s), s))).transpose()?;
    let mut later = Reasons(Vec::new());
    let tool = format!("{} {}", env!("CARGO_PKG_NAME"), env!("CARGO_PKG_VERSION"));
    if recorded.tool.as_deref() != Some(tool.as_str()) {
        let by = recorded.tool.as_deref().unwrap_or("an unknown version");
        later.add(What::Tool, format!("it was marked by {by}, and this is {tool}"));
    }
    // The sheets of a job know a drawing by the name of the source, whatever the copy is called.
    let named_as = source.map(Path::to_path_buf).or_else(|| recorded.source.as_ref().map(PathBuf::from));
    let (read, named_as) = (source.unwrap_or(marked), named_as.unwrap_or_else(|| marked.to_path_buf()));
    let settings = flow::settings_as(read, &named_as, job)?;
    job_reasons(&recorded, &settings, &mut later);
    // Where nothing speaks against it so far, the drawing is gone through while its hash is on its way.
    let then = found.fact("date").and_then(|d| d.parse::<Date>().ok()).map(|today| Environment { today });
    let (sha256, checked) = match then.filter(|_| later.0.is_empty()) {
        Some(then) => match flow::checked_plain(marked, plain, settings.clone(), then) {
            Ok(checked) => (checked.run.drawing.sha256.clone(), Some(Ok((checked, then)))),
            Err(run) => (run.drawing.sha256.clone(), Some(Err(run))),
        },
        None => (plain.hashing.take().map(Hashing::finish).transpose()?, None),
    };
    let mut reasons = Reasons(Vec::new());
    if recorded.sha256.is_none() || recorded.sha256 != sha256 {
        reasons.add(
            What::Copy,
            "without its marks the copy is not the source that was marked: it was changed since, or saved by another \
             program",
        );
    }
    if let Some((path, hashing, other)) = other
        && recorded.sha256.as_ref() != Some(&hashing.finish()?)
        && recorded.sha256 != Some(taken_out(&other)?.sha256()?)
    {
        reasons.add(What::Source, format!("{} is not the drawing that was marked", path.display()));
    }
    reasons.0.append(&mut later.0);
    if reasons.0.is_empty() {
        match checked {
            Some(checked) => {
                let (checked, then) = checked.map_err(unchecked)?;
                let copy = Copy { path: marked, bytes: &copy, found };
                reasons.0.extend(derived_again(&copy, &settings, &checked, then, environment)?);
            }
            None => reasons.add(What::Marks, "the marks carry no day on which they were made"),
        }
    }
    Ok(Verified {
        file: marked.display().to_string(),
        source: source.map(|s| s.display().to_string()),
        job: settings.origin.file.map(|f| f.display().to_string()),
        state: if reasons.0.is_empty() { State::Current } else { State::Stale },
        reasons: reasons.0,
        recorded,
    })
}

struct Reasons(Vec<Reason>);

impl Reasons {
    fn add(&mut self, what: What, message: impl Into<String>) {
        self.0.push(Reason { what, message: message.into() });
    }
}

/// The marks of a check that a drawing carries.
fn of_a_check<'o>(marked: &Path, outline: &'o Outline) -> Result<&'o FoundMarks, Refusal> {
    const REMEDY: &str = "Give the marked copy, the one that `mark` wrote.";
    let Some(found) = &outline.marks else {
        return Err(Refusal::new(
            "no-marks",
            format!("{} carries no marks of thrustmark", marked.display()),
            REMEDY,
        ));
    };
    if found.fact("holds") == Some(super::compare::HOLDS) {
        return Err(Refusal::new(
            "no-marks",
            format!("{} carries the changes that `compare` draws, and no mark of a check", marked.display()),
            REMEDY,
        ));
    }
    Ok(found)
}

/// A drawing without any marks of ours.
fn taken_out(drawing: &Source) -> Result<Source, Refusal> {
    let outline = tags::scan(drawing, &Options { keep: None, hash: false })?;
    match outline.marks {
        None => Ok(drawing.clone()),
        Some(_) => drawing.spliced(&tags::unmark(drawing, &outline)?),
    }
}

/// Why a drawing that was marked once could not be checked again.
fn unchecked(run: Box<Run>) -> Refusal {
    run.error
        .unwrap_or_else(|| Refusal::new("verify", "The drawing cannot be checked again", "Mark it again."))
}

fn job_reasons(recorded: &Recorded, settings: &Settings, reasons: &mut Reasons) {
    let now = settings.origin.sha256.as_deref();
    let same_settings = recorded.settings.as_deref() == Some(settings_hash(&settings.to_json()).as_str());
    let (what, words) = match (recorded.job.as_deref(), now) {
        (then, now) if then == now => {
            if same_settings {
                return;
            }
            (What::Settings, "the settings in force for this drawing are not those it was marked with")
        }
        (None, _) => (What::Job, "it was marked without a job file, and there is one now"),
        (Some(_), None) => (What::Job, "it was marked with a job file, and there is none now"),
        _ if same_settings => (
            What::Job,
            "the job file was changed since; what it states for this drawing is the same, but the mark names the old file",
        ),
        _ => (What::Job, "the job file was changed since, and so were the settings for this drawing"),
    };
    reasons.add(what, words);
}

/// A marked copy.
struct Copy<'a> {
    path: &'a Path,
    bytes: &'a Source,
    found: &'a FoundMarks,
}

/// Marks the unmarked bytes again, as on the day that the marks carry, and compares to the byte; then judges as of today.
fn derived_again(
    copy: &Copy,
    settings: &Settings,
    checked: &flow::Checked,
    then: Environment,
    environment: Environment,
) -> Result<Option<Reason>, Refusal> {
    let reason = |what, message: String| Ok(Some(Reason { what, message }));
    let again = flow::marked(copy.path, checked, then)?;
    if !copy.bytes.same_as(&again)? {
        let expected =
            tags::scan(&again, &Options { keep: None, hash: false })?.marks.map_or(0, |m| m.entities);
        let words = match copy.found.entities {
            found if found < expected => {
                format!("{} of {expected} marks were removed", expected - found)
            }
            found if found > expected => {
                format!("there are {found} marks where {expected} were made")
            }
            _ => "marks were edited, or their records moved".into(),
        };
        return reason(What::Marks, words);
    }
    let dated = settings.accept.finding.iter().any(|e| e.until.is_some());
    if dated && environment != then {
        let now = flow::checked_with(copy.path, settings.clone(), environment).map_err(unchecked)?;
        if now.run.verdict != checked.run.verdict {
            let word = |v: Option<Verdict>| match v {
                Some(Verdict::Within) => "within",
                Some(Verdict::Outside) => "outside",
                Some(Verdict::Unchecked) | None => "unchecked",
            };
            return reason(
                What::Verdict,
                format!(
                    "an accepted exception has run out: the verdict was {}, and would be {} today",
                    word(checked.run.verdict),
                    word(now.run.verdict)
                ),
            );
        }
    }
    Ok(None)
}
