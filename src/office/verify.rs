//! Whether a marked copy is still what its source, its job and this version of the program give.

use std::io::Read;
use std::path::{Path, PathBuf};

use jiff::civil::Date;
use serde::Serialize;

use crate::flow::{self, Environment};
use crate::job::{Job, Settings};
use crate::outcome::Verdict;
use crate::refusal::Refusal;
use crate::tags::{self, FoundMarks, Options, Source};
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
    let (found, plain) = taken_out(&copy)?;
    let Some(found) = found else {
        return Err(Refusal::new(
            "no-marks",
            format!("{} carries no marks of thrustmark", marked.display()),
            "Give the marked copy, the one that `mark` wrote.",
        ));
    };
    if found.fact("holds") == Some(super::compare::HOLDS) {
        return Err(Refusal::new(
            "no-marks",
            format!("{} carries the changes that `compare` draws, and no mark of a check", marked.display()),
            "Give the marked copy, the one that `mark` wrote.",
        ));
    }
    let recorded = Recorded::of(&found);
    let mut reasons = Reasons(Vec::new());
    if recorded.sha256.as_deref() != Some(plain.sha256()?.as_str()) {
        reasons.add(
            What::Copy,
            "without its marks the copy is not the source that was marked: it was changed since, or saved by another \
             program",
        );
    }
    if let Some(source) = source {
        let (_, bytes) = taken_out(&Source::open(source)?)?;
        if recorded.sha256.as_deref() != Some(bytes.sha256()?.as_str()) {
            reasons.add(What::Source, format!("{} is not the drawing that was marked", source.display()));
        }
    }
    let tool = format!("{} {}", env!("CARGO_PKG_NAME"), env!("CARGO_PKG_VERSION"));
    if recorded.tool.as_deref() != Some(tool.as_str()) {
        let by = recorded.tool.as_deref().unwrap_or("an unknown version");
        reasons.add(What::Tool, format!("it was marked by {by}, and this is {tool}"));
    }
    // The sheets of a job know a drawing by the name of the source, whatever the copy is called.
    let named_as = source.map(Path::to_path_buf).or_else(|| recorded.source.as_ref().map(PathBuf::from));
    let (read, named_as) = (source.unwrap_or(marked), named_as.unwrap_or_else(|| marked.to_path_buf()));
    let settings = flow::settings_as(read, &named_as, job)?;
    job_reasons(&recorded, &settings, &mut reasons);
    if reasons.0.is_empty() {
        let copy = Copy { path: marked, bytes: &copy, found: &found };
        reasons.0.extend(derived_again(&copy, &settings, environment)?);
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

/// The marks of a drawing, and its bytes without them.
fn taken_out(drawing: &Source) -> Result<(Option<FoundMarks>, Source), Refusal> {
    let outline = tags::scan(drawing, &Options { keep: None, hash: false })?;
    match &outline.marks {
        None => Ok((None, drawing.clone())),
        Some(marks) => Ok((Some(marks.clone()), drawing.spliced(&tags::unmark(drawing, &outline)?)?)),
    }
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
    environment: Environment,
) -> Result<Option<Reason>, Refusal> {
    let reason = |what, message: String| Ok(Some(Reason { what, message }));
    let refused = |run: Box<crate::outcome::Run>| {
        run.error.unwrap_or_else(|| {
            Refusal::new("verify", "The drawing cannot be checked again", "Mark it again.")
        })
    };
    let Some(then) = copy.found.fact("date").and_then(|d| d.parse::<Date>().ok()) else {
        return reason(What::Marks, "the marks carry no day on which they were made".into());
    };
    let then = Environment { today: then };
    let checked = flow::checked_with(copy.path, settings.clone(), then).map_err(refused)?;
    let again = flow::marked(copy.path, &checked, then)?;
    if !same_bytes(copy.bytes, &again)? {
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
        let now = flow::checked_with(copy.path, settings.clone(), environment).map_err(refused)?;
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

fn same_bytes(one: &Source, other: &Source) -> Result<bool, Refusal> {
    if one.len() != other.len() {
        return Ok(false);
    }
    let failed = |error: std::io::Error| {
        Refusal::new("read", format!("The marked copy cannot be read: {error}"), "Run again.")
    };
    let (mut one, mut other) = (one.reader(), other.reader());
    let mut buffers = (vec![0; 1 << 16], vec![0; 1 << 16]);
    loop {
        let read = one.read(&mut buffers.0).map_err(failed)?;
        if read == 0 {
            return Ok(true);
        }
        other.read_exact(&mut buffers.1[..read]).map_err(failed)?;
        if buffers.0[..read] != buffers.1[..read] {
            return Ok(false);
        }
    }
}
