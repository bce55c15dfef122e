//! What changed between two revisions of a drawing: axis, ring, loads, results, verdicts and the settings in force.
//!
//! Only the results are compared, never bytes: a drawing that another program saved again is the same when the arch in it
//! is the same.

mod draw;
mod loads;
mod results;
mod spans;

use std::collections::BTreeMap;
use std::path::Path;

use schemars::JsonSchema;
use serde::Serialize;
use serde_json::Value;

use crate::flow::{self, Checked, Environment};
use crate::job::Job;
use crate::outcome::{Run, Verdict, Xy};
use crate::refusal::Refusal;
use crate::tolerance;
use crate::write::file::{self, Replace};

/// What the marks of a comparison say that they hold, so that nobody takes them for those of a check.
pub const HOLDS: &str = "changes";

/// What has changed. A closed list.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize, JsonSchema)]
#[serde(rename_all = "kebab-case")]
pub enum What {
    /// The verdict of the run.
    Verdict,
    /// What became of one check.
    Finding,
    /// A figure of the results.
    Result,
    /// A span that is in one drawing only.
    Span,
    /// The axis of a span.
    Axis,
    /// Depth or width of the ring.
    Ring,
    /// A load that only the new drawing has.
    LoadAdded,
    /// A load that only the old drawing has.
    LoadRemoved,
    /// A load with another place, figure or name.
    LoadChanged,
    /// A setting in force.
    Setting,
}

/// One change. Lengths in m, forces in the units of the runs.
#[derive(Debug, Clone, PartialEq, Serialize, JsonSchema)]
pub struct Change {
    /// What has changed.
    pub what: What,
    /// Name of the span, in the new drawing where it is in both.
    pub span: Option<String>,
    /// Load, key, check or figure concerned.
    pub name: Option<String>,
    /// Where: in the new drawing, or in the old one for what is gone.
    pub at: Option<Xy>,
    /// The old value.
    pub old: Value,
    /// The new value.
    pub new: Value,
    /// Unit of both.
    pub unit: Option<String>,
    /// In words.
    pub message: String,
}

impl Change {
    fn new(what: What, message: impl Into<String>) -> Self {
        Self {
            what,
            span: None,
            name: None,
            at: None,
            old: Value::Null,
            new: Value::Null,
            unit: None,
            message: message.into(),
        }
    }

    fn of(mut self, span: &str) -> Self {
        self.span = Some(span.to_owned());
        self
    }

    fn named(mut self, name: &str) -> Self {
        self.name = Some(name.to_owned());
        self
    }

    fn at(mut self, at: Xy) -> Self {
        self.at = Some(at);
        self
    }

    fn values(mut self, old: impl Into<Value>, new: impl Into<Value>, unit: &str) -> Self {
        (self.old, self.new) = (old.into(), new.into());
        self.unit = (!unit.is_empty()).then(|| unit.to_owned());
        self
    }
}

/// One of the two drawings.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, JsonSchema)]
pub struct Side {
    /// As named.
    pub file: String,
    /// SHA-256 of its bytes (unmarked).
    pub sha256: Option<String>,
    /// Sheet number, where it could be told.
    pub sheet: Option<String>,
    /// Revision, where it could be told.
    pub revision: Option<String>,
    /// Verdict.
    pub verdict: Option<Verdict>,
}

impl Side {
    fn of(run: &Run) -> Self {
        let facts = run.drawing.clone();
        Self {
            file: facts.file,
            sha256: facts.sha256,
            sheet: facts.sheet,
            revision: facts.revision,
            verdict: run.verdict,
        }
    }
}

/// What [`compare`] found.
#[derive(Debug, Clone, PartialEq, Serialize, JsonSchema)]
pub struct Compared {
    /// The old drawing.
    pub old: Side,
    /// The new drawing.
    pub new: Side,
    /// Whether nothing has changed.
    pub same: bool,
    /// The changes, the weightiest kinds first, spans from the left.
    pub changes: Vec<Change>,
    /// The copy with the changes drawn in it.
    pub output: Option<String>,
}

/// Where the changes are drawn.
#[derive(Debug, Clone, Copy)]
pub struct Target<'a> {
    /// The copy of the new drawing.
    pub output: &'a Path,
    /// Replace a file that carries no mark of ours.
    pub force: bool,
}

/// Checks two revisions and tells what changed; with a `target` also in a copy of the new drawing, on the layer
/// `CHANGES` under the prefix of the marks. Each drawing is read with the job found for it, or both with the one named.
///
/// # Errors
/// When one of the drawings cannot be read or checked, or the copy cannot be written.
pub fn compare(
    old: &Path,
    new: &Path,
    job: Option<&Job>,
    environment: Environment,
    target: Option<Target>,
) -> Result<Compared, Refusal> {
    let ours = |path: &Path| Ok(flow::carries_marks(path));
    let replace = target.map(|t| if t.force { Replace::Any } else { Replace::Ours(&ours) });
    if let (Some(target), Some(replace)) = (&target, &replace) {
        file::may_write(target.output, &[old, new], replace)?;
    }
    let side = |path: &Path| -> Result<Checked, Refusal> {
        flow::checked(path, job, environment).map_err(|run| {
            let error =
                run.error.unwrap_or_else(|| Refusal::new("check", "It cannot be checked", "Run `check`."));
            if error.file.is_some() { error } else { error.in_file(path) }
        })
    };
    let (before, after) = (side(old)?, side(new)?);
    let changes = changes(&before.run, &after.run);
    if let (Some(target), Some(replace)) = (&target, &replace) {
        let sheet = after.sheet(new, environment);
        let marked = flow::with_marks(&after, &draw::marks(&before.run, &after.run, &sheet, &changes))?;
        file::write_whole(target.output, &[old, new], replace, |out| {
            marked.write_to(out).map_err(|error| {
                Refusal::new(
                    "write",
                    format!("The copy could not be written: {error}"),
                    "Look at the space left and at your right to write there.",
                )
            })?;
            after.source().unchanged()
        })?;
    }
    Ok(Compared {
        old: Side::of(&before.run),
        new: Side::of(&after.run),
        same: changes.is_empty(),
        changes,
        output: target.map(|t| t.output.display().to_string()),
    })
}

/// What changed from one run to another, the weightiest kinds first.
pub fn changes(old: &Run, new: &Run) -> Vec<Change> {
    let mut found = Vec::new();
    verdicts(old, new, &mut found);
    results::findings(old, new, &mut found);
    if old.units != new.units {
        found.push(
            Change::new(
                What::Setting,
                format!("forces are in {} now, they were in {}", new.units.force, old.units.force),
            )
            .named("units.force")
            .values(old.units.force.as_str(), new.units.force.as_str(), ""),
        );
    }
    spans::spans(old, new, &mut found);
    settings(&old.settings, &new.settings, &mut found);
    // Stable: within a kind the order of the spans and of the loads stays.
    found.sort_by_key(|change| change.what);
    found
}

fn verdicts(old: &Run, new: &Run, found: &mut Vec<Change>) {
    let word = |run: &Run| match run.verdict {
        Some(Verdict::Within) => "within",
        Some(Verdict::Outside) => "outside",
        Some(Verdict::Unchecked) => "unchecked",
        None => "not read",
    };
    if old.verdict != new.verdict {
        found.push(
            Change::new(What::Verdict, format!("the verdict is {} now, it was {}", word(new), word(old)))
                .values(word(old), word(new), ""),
        );
    }
}

/// Settings in force that differ, by the path of the key.
fn settings(old: &Value, new: &Value, found: &mut Vec<Change>) {
    let (mut before, mut after) = (BTreeMap::new(), BTreeMap::new());
    flatten(old, "", &mut before);
    flatten(new, "", &mut after);
    let mut keys: Vec<&String> = before.keys().chain(after.keys()).collect();
    keys.sort();
    keys.dedup();
    for key in keys {
        let (old, new) = (before.get(key), after.get(key));
        if old == new {
            continue;
        }
        let word = |value: Option<&&Value>| value.map_or_else(|| "not given".to_owned(), |v| v.to_string());
        found.push(
            Change::new(What::Setting, format!("{key} is {} now, it was {}", word(new), word(old)))
                .named(key)
                .values(
                    old.map_or(Value::Null, |v| (*v).clone()),
                    new.map_or(Value::Null, |v| (*v).clone()),
                    "",
                ),
        );
    }
}

/// The tables of a tree as paths; arrays stay whole.
fn flatten<'v>(value: &'v Value, path: &str, into: &mut BTreeMap<String, &'v Value>) {
    match value {
        Value::Object(table) => {
            for (key, value) in table {
                let path = if path.is_empty() { key.clone() } else { format!("{path}.{key}") };
                flatten(value, &path, into);
            }
        }
        value => {
            into.insert(path.to_owned(), value);
        }
    }
}

/// Whether two figures of size about `scale` are one but for rounding.
fn same(old: f64, new: f64, scale: f64) -> bool {
    (old - new).abs() <= tolerance::REVISION_RELATIVE * old.abs().max(new.abs()).max(scale)
}

/// Whether two lengths are one.
fn same_length(old: f64, new: f64) -> bool {
    (old - new).abs() <= tolerance::REVISION_LENGTH
}

#[cfg(test)]
mod tests;
