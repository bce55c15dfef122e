//! `verify`: whether a marked copy is current, in words and as JSON.

use std::path::Path;

use schemars::JsonSchema;
use serde::Serialize;

use super::args::{JsonTarget, VerifyArgs};
use super::{deliver, document_of, json_may_replace};
use crate::flow::Environment;
use crate::job::Job;
use crate::office::verify::{self, State, Verified};
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
    verify: Option<&'a Verified>,
    /// Why it could not be told.
    error: Option<&'a Refusal>,
}

/// Runs the command: 0 current, 1 stale.
pub fn verify(args: &VerifyArgs) -> Result<u8, Refusal> {
    let sources: Vec<&Path> = std::iter::once(args.marked.as_path()).chain(args.source.as_deref()).collect();
    if let Some(JsonTarget::File(target)) = &args.json {
        file::may_write(target, &sources, &json_may_replace(args.force))?;
    }
    let done = args.job.as_deref().map(Job::load).transpose().and_then(|job| {
        verify::verify(&args.marked, args.source.as_deref(), job.as_ref(), Environment::of_process()?)
    });
    let words = done.as_ref().map(words).unwrap_or_default();
    let document = Document {
        contract: CONTRACT,
        tool: Tool::this(),
        verify: done.as_ref().ok(),
        error: done.as_ref().err(),
    };
    deliver(args.json.as_ref(), &sources, args.force, &words, &document_of(&document)?)?;
    Ok(match done?.state {
        State::Current => 0,
        State::Stale => 1,
    })
}

fn words(verified: &Verified) -> String {
    let recorded = &verified.recorded;
    let or_unknown = |value: &Option<String>| value.as_deref().map_or("unknown".into(), plain);
    let head = match verified.state {
        State::Current => "CURRENT",
        State::Stale => "STALE",
    };
    let mut lines = vec![format!("{head}  {}", plain(&verified.file))];
    for reason in &verified.reasons {
        lines.push(format!("  because    {}", plain(&reason.message)));
    }
    lines.push(format!(
        "  marked     {} on {} by {}",
        or_unknown(&recorded.source),
        or_unknown(&recorded.date),
        or_unknown(&recorded.tool)
    ));
    lines.push(match &verified.source {
        Some(source) => format!("  source     compared with {}", plain(source)),
        None => "  source     source not compared; the copy was held against the hash that it carries".into(),
    });
    lines.push(match &verified.job {
        Some(job) => format!("  job        {}", plain(job)),
        None => "  job        no job file".into(),
    });
    lines.push(format!("  verdict    {} (carried by the mark)", or_unknown(&recorded.verdict)));
    if verified.state == State::Stale {
        lines.push("  to mend    mark the drawing again, and issue that copy".into());
    }
    lines.join("\n") + "\n"
}
