//! `compare`: what changed between two revisions, in words and as JSON.

use schemars::JsonSchema;
use serde::Serialize;

use super::args::{CompareArgs, JsonTarget};
use super::{deliver, document_of, json_may_replace};
use crate::flow::Environment;
use crate::job::Job;
use crate::office::compare::{self, Change, Compared, Target, What};
use crate::outcome::{CONTRACT, Tool};
use crate::refusal::Refusal;
use crate::write::file;
use crate::write::text::plain;

/// What `--json` writes.
#[derive(Serialize, JsonSchema)]
pub(super) struct Document<'a> {
    /// Version of the contract.
    contract: u32,
    /// The program that wrote it.
    tool: Tool,
    /// What was found; null when it could not be told.
    compare: Option<&'a Compared>,
    /// Why it could not be told.
    error: Option<&'a Refusal>,
}

/// Runs the command: 0 same, 1 different.
pub fn compare(args: &CompareArgs) -> Result<u8, Refusal> {
    let sources = [args.old.as_path(), args.new.as_path()];
    if let Some(JsonTarget::File(target)) = &args.json {
        file::may_write(target, &sources, &json_may_replace(args.force))?;
    }
    let target = args.output.as_deref().map(|output| Target { output, force: args.force });
    let done = args.job.as_deref().map(Job::load).transpose().and_then(|job| {
        compare::compare(&args.old, &args.new, job.as_ref(), Environment::of_process()?, target)
    });
    let words = done.as_ref().map(words).unwrap_or_default();
    let document = Document {
        contract: CONTRACT,
        tool: Tool::this(),
        compare: done.as_ref().ok(),
        error: done.as_ref().err(),
    };
    deliver(args.json.as_ref(), &sources, args.force, &words, &document_of(&document)?)?;
    Ok(u8::from(!done?.same))
}

fn words(compared: &Compared) -> String {
    let head = if compared.same { "SAME" } else { "DIFFERENT" };
    let mut lines = vec![format!("{head}  {} to {}", plain(&compared.old.file), plain(&compared.new.file))];
    if compared.same {
        lines.push("  axis, ring, loads, results and settings are the same".into());
    }
    lines.extend(changes(&compared.changes));
    if let Some(output) = &compared.output {
        lines.push(format!("  copy       {}", plain(output)));
    }
    lines.join("\n") + "\n"
}

/// A line for each change; the name of a kind stands once.
pub fn changes(changes: &[Change]) -> Vec<String> {
    let mut last = "";
    changes
        .iter()
        .map(|change| {
            let name = name(change.what);
            let shown = if name == last { "" } else { name };
            last = name;
            format!("  {shown:<11}{}", plain(&change.message))
        })
        .collect()
}

fn name(what: What) -> &'static str {
    match what {
        What::Verdict => "verdict",
        What::Finding => "check",
        What::Result => "result",
        What::Span => "span",
        What::Axis => "axis",
        What::Ring => "ring",
        What::LoadAdded | What::LoadRemoved | What::LoadChanged => "loads",
        What::Setting => "setting",
    }
}
