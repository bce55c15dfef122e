//! The command line: parses, runs, prints, and gives the exit status. The only place that prints.

pub mod args;
mod compare;
mod listing;
mod manual;
mod outputs;
mod paths;
mod progress;
mod verify;
mod watch;

use std::io::{self, IsTerminal, Write};
use std::num::NonZeroUsize;
use std::path::{Path, PathBuf};
use std::process::ExitCode;
use std::sync::OnceLock;

use clap::Parser;
use serde::Serialize;

use crate::flow::{self, Environment, Target};
use crate::job::Job;
use crate::office::batch::{self, Event};
use crate::office::store::{self, Store};
use crate::office::{demo, starter};
use crate::outcome::{CONTRACT, Document, Run, Tool, Verdict};
use crate::refusal::Refusal;
use crate::write::file::{self, Replace};
use crate::write::text::plain;
use crate::write::{json, terminal};
use args::{Args, CheckArgs, Command, DemoArgs, JsonTarget, ListArgs, SchemaOf, UnmarkArgs};
use outputs::Outputs;
use progress::Progress;

/// Status of a run that could not be done.
const REFUSED: u8 = 2;

/// Prints a result that is no run in words, and puts its JSON where it was asked for: with JSON on stdout the words go to
/// stderr.
fn deliver(
    target: Option<&JsonTarget>,
    sources: &[&Path],
    force: bool,
    words: &str,
    json: &str,
) -> Result<(), Refusal> {
    match target {
        None => say(words),
        Some(JsonTarget::Stdout) => {
            say(json);
            tell(words);
        }
        Some(JsonTarget::File(target)) => {
            write_json(target, sources, force, json)?;
            say(words);
        }
    }
    Ok(())
}

/// Runs the program with the arguments of the process.
pub fn run() -> ExitCode {
    batch::keep_panics();
    let args = match Args::try_parse() {
        Ok(args) => args,
        Err(error) => {
            lost(error.print().and_then(|()| io::stdout().flush()));
            return ExitCode::from(ended(u8::try_from(error.exit_code()).unwrap_or(REFUSED)));
        }
    };
    let done = match &args.command {
        Command::Mark(mark) => check(&mark.check, Some(mark.output.as_deref()), None),
        Command::Check(args) => {
            let store = if args.no_store { None } else { Store::of_user() };
            let done = check(&args.check, None, store.as_ref());
            store.iter().for_each(Store::tidy);
            done
        }
        Command::Unmark(args) => unmark(args),
        Command::List(args) => list(args),
        Command::Verify(args) => verify::verify(args),
        Command::Compare(args) => compare::compare(args),
        Command::Watch(args) => watch::watch(args),
        Command::Demo(args) => demo(args),
        Command::Completions(args) => Ok(manual::completions(args.shell)),
        Command::Manual => manual::manual(),
        Command::Schema(args) => schema(args.of).map(|schema| {
            say(&schema);
            0
        }),
    };
    ExitCode::from(ended(done.unwrap_or_else(|refusal| {
        tell(&format!("thrustmark: {}\n", plain(&refusal.to_string())));
        REFUSED
    })))
}

/// The schema of what a command writes as JSON.
fn schema(of: SchemaOf) -> Result<String, Refusal> {
    match of {
        SchemaOf::Check => json::schema(),
        SchemaOf::Verify => json::schema_of::<verify::Document<'static>>(),
        SchemaOf::Compare => json::schema_of::<compare::Document<'static>>(),
    }
}

/// `check`, and `mark` when a place for the copies is given (which may be "beside each drawing").
fn check(args: &CheckArgs, mark: Option<Option<&Path>>, store: Option<&Store>) -> Result<u8, Refusal> {
    let environment = Environment::of_process()?;
    let named = args.job.as_deref().map(Job::load).transpose()?;
    let drawings = paths::drawings(&args.drawings)?;
    let targets = match mark {
        Some(output) => Some(paths::targets(&args.drawings, &drawings, output)?),
        None => None,
    };
    let copies: Vec<PathBuf> = match &targets {
        Some(targets) => drawings
            .iter()
            .zip(targets)
            .map(|(drawing, target)| target.clone().unwrap_or_else(|| flow::beside(drawing)))
            .collect(),
        None => Vec::new(),
    };
    let outputs = Outputs::plan(args, &drawings, &copies)?;
    let runs = all(&drawings, args.jobs, |i, drawing| match &targets {
        Some(targets) => {
            let target = Target { output: targets[i].clone(), force: args.force };
            flow::mark(drawing, named.as_ref(), &target, environment)
        }
        None => store::check(drawing, named.as_ref(), environment, store),
    })?;
    let document = document(runs);
    let on_stdout = args.json != Some(JsonTarget::Stdout);
    let style = terminal::Style { width: width(on_stdout), colour: colour(on_stdout), verbose: args.verbose };
    let summary = terminal::summary(&document, &style);
    outputs.write(&document, environment)?;
    if on_stdout {
        say_results(&document, &summary);
    } else {
        say(&json::to_json(&document)?);
        tell(&summary);
    }
    Ok(document.runs.iter().map(status).max_by_key(|s| severity(*s)).unwrap_or(REFUSED))
}

fn document(runs: Vec<Run>) -> Document {
    Document { contract: CONTRACT, tool: Tool::this(), runs }
}

/// The runs of all drawings, in their order, with the progress told on the way.
fn all(
    drawings: &[PathBuf],
    jobs: Option<NonZeroUsize>,
    one: impl Fn(usize, &Path) -> Run + Sync,
) -> Result<Vec<Run>, Refusal> {
    let mut progress = Progress::new(drawings.len());
    let runs = batch::in_order(
        drawings.len(),
        jobs.unwrap_or_else(batch::processors),
        |i| one(i, &drawings[i]),
        |i, refusal| flow::refused_unread(&drawings[i], refusal),
        |event| match event {
            Event::Done(run) => progress.step(run.error.is_some()),
            Event::Tick => progress.tick(),
        },
    );
    progress.end();
    runs
}

/// Results go to stdout; a run that was refused is told on stderr.
fn say_results(document: &Document, summary: &str) {
    if document.runs.iter().all(|run| run.verdict.is_none()) {
        tell(summary);
    } else {
        say(summary);
        for run in document.runs.iter().filter(|run| run.verdict.is_none()) {
            if let Some(error) = &run.error {
                tell(&format!("{}: {}\n", plain(&run.drawing.file), plain(&error.to_string())));
            }
        }
    }
}

fn unmark(args: &UnmarkArgs) -> Result<u8, Refusal> {
    let done = flow::unmark(&args.drawing, args.output.as_deref(), args.force)?;
    let name = plain(&done.output.display().to_string());
    if done.exact {
        say(&format!("{name}: the source, byte for byte (SHA-256 {})\n", done.sha256));
    } else {
        tell(&format!("{name}: not byte-exact: the marked copy was changed since it was written\n"));
    }
    Ok(0)
}

fn list(args: &ListArgs) -> Result<u8, Refusal> {
    let named = args.job.as_deref().map(Job::load).transpose()?;
    let listing = flow::list(&args.drawing, named.as_ref())?;
    if let Some(target) = &args.write_job {
        starter::write(&args.drawing, named.as_ref(), &listing, Environment::of_process()?, target)?;
    }
    say(&listing::text(&listing));
    if let Some(target) = &args.write_job {
        let name = plain(&target.display().to_string());
        say(&format!("job file to begin with: {name}; read it, state a limit, then check\n"));
    }
    Ok(0)
}

fn demo(args: &DemoArgs) -> Result<u8, Refusal> {
    let written = demo::write(&args.folder)?;
    for file in &written {
        say(&format!("{}\n", plain(&file.display().to_string())));
    }
    let folder = plain(&args.folder.display().to_string());
    say(&format!("Next: thrustmark check {folder}\n"));
    Ok(0)
}

/// Exit status of one run.
fn status(run: &Run) -> u8 {
    match run.verdict {
        Some(Verdict::Within) => 0,
        Some(Verdict::Outside) => 1,
        Some(Verdict::Unchecked) => 3,
        None => REFUSED,
    }
}

/// Over several drawings the worst counts: 2, then 1, then 3, then 0.
fn severity(status: u8) -> u8 {
    match status {
        0 => 0,
        3 => 1,
        1 => 2,
        _ => 3,
    }
}

fn write_json(target: &Path, sources: &[&Path], force: bool, text: &str) -> Result<(), Refusal> {
    file::write_whole(target, sources, &json_may_replace(force), |out| {
        out.write_all(text.as_bytes()).map_err(|error| {
            Refusal::new("write", format!("{}: {error}", target.display()), "Look at the space left.")
        })
    })
}

/// A document of one result that is no run, as text.
fn document_of(document: &impl Serialize) -> Result<String, Refusal> {
    let text = serde_json::to_value(document).map_err(|e| {
        Refusal::new("json", format!("the result could not be written as JSON: {e}"), "Please report it.")
    })?;
    Ok(format!("{text:#}\n"))
}

/// A results file may replace another JSON document of this tool, and anything with `--force`.
fn json_may_replace(force: bool) -> Replace<'static> {
    if force { Replace::Any } else { Replace::Ours(&is_results) }
}

fn is_results(path: &Path) -> io::Result<bool> {
    let text = std::fs::read(path)?;
    let Ok(value) = serde_json::from_slice::<serde_json::Value>(&text) else {
        return Ok(false);
    };
    Ok(value["contract"].is_u64() && value["tool"]["name"] == env!("CARGO_PKG_NAME"))
}

fn borrowed(paths: &[PathBuf]) -> Vec<&Path> {
    paths.iter().map(PathBuf::as_path).collect()
}

/// Columns of the terminal that is written to; a fixed number elsewhere, so that files and pipes repeat.
fn width(stdout: bool) -> usize {
    const ELSEWHERE: usize = 100;
    let terminal = if stdout { io::stdout().is_terminal() } else { io::stderr().is_terminal() };
    if !terminal {
        return ELSEWHERE;
    }
    terminal_size::terminal_size().map_or(ELSEWHERE, |(width, _)| usize::from(width.0))
}

/// Colours only on terminals, and not where `NO_COLOR` asks for none.
fn colour(stdout: bool) -> bool {
    let terminal = if stdout { io::stdout().is_terminal() } else { io::stderr().is_terminal() };
    let refused = std::env::var_os("NO_COLOR").is_some_and(|v| !v.is_empty());
    terminal && !refused && std::env::var_os("TERM").is_none_or(|t| t != "dumb")
}

/// Why results could not be written to stdout, when they could not.
static LOST: OnceLock<io::Error> = OnceLock::new();

/// Writes results to stdout. A reader that has gone away (a closed pipe) is no error; any other failure, a full disk
/// say, makes the run end as refused, because what was asked for is not there.
fn say(text: &str) {
    let mut out = io::stdout().lock();
    lost(out.write_all(text.as_bytes()).and_then(|()| out.flush()));
}

fn lost(written: io::Result<()>) {
    if let Err(error) = written
        && error.kind() != io::ErrorKind::BrokenPipe
    {
        // The first failure is the one to tell.
        let _ = LOST.set(error);
    }
}

/// The status of a run, once it is known whether its results were written.
fn ended(status: u8) -> u8 {
    match LOST.get() {
        None => status,
        Some(error) => {
            let refusal = Refusal::new(
                "stdout",
                format!("the results could not be written to standard output: {error}"),
                "Look at the space left, or send the results elsewhere.",
            );
            tell(&format!("thrustmark: {}\n", plain(&refusal.to_string())));
            REFUSED
        }
    }
}

/// Writes talk to stderr.
fn tell(text: &str) {
    let _ = io::stderr().lock().write_all(text.as_bytes());
}
