//! What may be written on the command line, and the help that is printed about it.
//!
//! Only commands that are built stand here; for any other name the usage error is the answer, with status 2. Whatever
//! changes a number, a verdict or the mark is a key of the job file and never an option.

use std::ffi::OsString;
use std::num::NonZeroUsize;
use std::path::PathBuf;

use clap::builder::{OsStringValueParser, TypedValueParser};
use clap::{Args as ClapArgs, Parser, Subcommand};

/// The whole command line.
///
/// Parsing ends the program by itself for `--help` and `--version` (on stdout, status 0), for no arguments (help on
/// stderr, status 2) and for wrong usage (status 2).
#[derive(Debug, Clone, PartialEq, Eq, Parser)]
#[command(
    name = "thrustmark",
    version,
    about = "Line of thrust of an arch, computed from a DXF drawing and marked in a copy of it",
    long_about = "Reads the axis of an arch or cable and its loads from a DXF drawing, computes the line of thrust and \
                  how far it strays from the axis, and writes both into a copy of the drawing, in which every other \
                  byte is as it was. The drawing itself is never written.",
    arg_required_else_help = true,
    max_term_width = 100,
    after_help = MAIN_HELP
)]
pub struct Args {
    /// The command.
    #[command(subcommand)]
    pub command: Command,
}

/// The commands.
#[derive(Debug, Clone, PartialEq, Eq, Subcommand)]
pub enum Command {
    /// Check drawings and write a marked copy beside each
    #[command(arg_required_else_help = true, after_help = MARK_HELP)]
    Mark(MarkArgs),
    /// Check drawings and print the findings; write no drawing
    #[command(arg_required_else_help = true, after_help = CHECK_HELP)]
    Check(OnlyCheckArgs),
    /// Take the marks out of a marked copy again, byte for byte
    #[command(arg_required_else_help = true, after_help = UNMARK_HELP)]
    Unmark(UnmarkArgs),
    /// Show what a drawing holds, and which layer could be the axis or the loads
    #[command(arg_required_else_help = true, after_help = LIST_HELP)]
    List(ListArgs),
    /// Tell whether a marked copy still belongs to its source, its job and this version
    #[command(arg_required_else_help = true, after_help = VERIFY_HELP)]
    Verify(VerifyArgs),
    /// Tell what changed between two revisions of a drawing
    #[command(arg_required_else_help = true, after_help = COMPARE_HELP)]
    Compare(CompareArgs),
    /// Mark drawings of a folder again whenever they are saved
    #[command(arg_required_else_help = true, after_help = WATCH_HELP)]
    Watch(WatchArgs),
    /// Write demo drawings and their job file into a folder
    #[command(arg_required_else_help = true, after_help = DEMO_HELP)]
    Demo(DemoArgs),
    /// Print the JSON Schema of the results
    #[command(after_help = SCHEMA_HELP)]
    Schema,
    /// Print the completions of a shell
    #[command(arg_required_else_help = true, after_help = COMPLETIONS_HELP)]
    Completions(CompletionsArgs),
    /// Print the manual page
    #[command(after_help = MANUAL_HELP)]
    Manual,
}

/// `thrustmark mark`
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct MarkArgs {
    /// What is shared with `check`.
    #[command(flatten)]
    pub check: CheckArgs,

    /// Marked copy; with several drawings the folder for the copies [default: NAME.thrust.dxf beside each drawing]
    #[arg(short, long, value_name = "FILE|FOLDER")]
    pub output: Option<PathBuf>,
}

/// `thrustmark check`
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct OnlyCheckArgs {
    /// What is shared with `mark`.
    #[command(flatten)]
    pub check: CheckArgs,

    /// Neither take nor keep results of unchanged drawings in the user's cache folder
    #[arg(long)]
    pub no_store: bool,
}

/// What `mark` and `check` share.
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct CheckArgs {
    /// DXF drawings, and folders of them
    #[arg(required = true, value_name = "DRAWING")]
    pub drawings: Vec<PathBuf>,

    /// Job file [default: the first thrustmark.toml on the way up from each drawing's folder]
    #[arg(short, long, value_name = "FILE")]
    pub job: Option<PathBuf>,

    /// Results as JSON into FILE; with - on stdout, and the summary on stderr
    #[arg(long, value_name = "FILE|-", value_parser = OsStringValueParser::new().map(JsonTarget::from))]
    pub json: Option<JsonTarget>,

    /// Report to read, print on A4 and sign, one HTML or PDF file for all drawings
    #[arg(long, value_name = "FILE.html|FILE.pdf")]
    pub report: Option<PathBuf>,

    /// Picture of elevation, offset diagram and force polygon; with several drawings a folder for SVG pictures
    #[arg(long, value_name = "FILE.svg|FILE.png|FOLDER")]
    pub picture: Option<PathBuf>,

    /// Stations of all lines as comma-separated values
    #[arg(long, value_name = "FILE.csv")]
    pub csv: Option<PathBuf>,

    /// Results for build servers, as JUnit XML
    #[arg(long, value_name = "FILE.xml")]
    pub junit: Option<PathBuf>,

    /// Replace existing files, even those that thrustmark did not write
    #[arg(short, long)]
    pub force: bool,

    /// Print every figure with the entity it was read from
    #[arg(short, long)]
    pub verbose: bool,

    /// Drawings worked on at a time; the results are the same [default: one for each processor]
    #[arg(long, value_name = "N")]
    pub jobs: Option<NonZeroUsize>,
}

/// `thrustmark unmark`
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct UnmarkArgs {
    /// Marked copy; it stays as it is
    #[arg(value_name = "MARKED")]
    pub drawing: PathBuf,

    /// Drawing without the marks [default: NAME.unmarked.dxf beside it, for NAME.thrust.dxf]
    #[arg(short, long, value_name = "FILE")]
    pub output: Option<PathBuf>,

    /// Replace an existing file, and write even when the result does not have the recorded hash
    #[arg(short, long)]
    pub force: bool,
}

/// `thrustmark list`
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct ListArgs {
    /// DXF drawing
    #[arg(value_name = "DRAWING")]
    pub drawing: PathBuf,

    /// Job file [default: the first thrustmark.toml on the way up from the drawing's folder]
    #[arg(short, long, value_name = "FILE")]
    pub job: Option<PathBuf>,

    /// Write a commented job file to begin with; an existing file is left alone
    #[arg(long, value_name = "FILE")]
    pub write_job: Option<PathBuf>,
}

/// `thrustmark verify`
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct VerifyArgs {
    /// Marked copy
    #[arg(value_name = "MARKED")]
    pub marked: PathBuf,

    /// Drawing that was marked [default: the copy is held against the hash that it carries]
    #[arg(value_name = "SOURCE")]
    pub source: Option<PathBuf>,

    /// Job file [default: the first thrustmark.toml on the way up from SOURCE's folder, or else MARKED's]
    #[arg(short, long, value_name = "FILE")]
    pub job: Option<PathBuf>,

    /// Result as JSON into FILE; with - on stdout, and the words on stderr
    #[arg(long, value_name = "FILE|-", value_parser = OsStringValueParser::new().map(JsonTarget::from))]
    pub json: Option<JsonTarget>,

    /// Replace an existing file under the name of --json
    #[arg(short, long)]
    pub force: bool,
}

/// `thrustmark compare`
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct CompareArgs {
    /// The old drawing
    #[arg(value_name = "OLD")]
    pub old: PathBuf,

    /// The new drawing
    #[arg(value_name = "NEW")]
    pub new: PathBuf,

    /// Job file for both [default: the first thrustmark.toml on the way up from each drawing's folder]
    #[arg(short, long, value_name = "FILE")]
    pub job: Option<PathBuf>,

    /// Changes as JSON into FILE; with - on stdout, and the words on stderr
    #[arg(long, value_name = "FILE|-", value_parser = OsStringValueParser::new().map(JsonTarget::from))]
    pub json: Option<JsonTarget>,

    /// Copy of NEW with the changes drawn on layer THRUST-CHANGES
    #[arg(short, long, value_name = "FILE")]
    pub output: Option<PathBuf>,

    /// Replace existing files, even those that thrustmark did not write
    #[arg(short, long)]
    pub force: bool,
}

/// `thrustmark watch`
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct WatchArgs {
    /// Folder of drawings; folders in it are not watched
    #[arg(value_name = "FOLDER")]
    pub folder: PathBuf,

    /// Job file [default: the first thrustmark.toml on the way up from the folder]
    #[arg(short, long, value_name = "FILE")]
    pub job: Option<PathBuf>,
}

/// `thrustmark demo`
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct DemoArgs {
    /// Folder to write into; it is made when it is not there
    #[arg(value_name = "FOLDER")]
    pub folder: PathBuf,
}

/// `thrustmark completions`
#[derive(Debug, Clone, PartialEq, Eq, ClapArgs)]
pub struct CompletionsArgs {
    /// Shell
    #[arg(value_name = "SHELL")]
    pub shell: clap_complete::Shell,
}

/// Where the JSON results go.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum JsonTarget {
    /// Standard output; the summary then goes to standard error.
    Stdout,
    /// A file.
    File(PathBuf),
}

impl From<OsString> for JsonTarget {
    fn from(text: OsString) -> Self {
        if text == "-" { Self::Stdout } else { Self::File(text.into()) }
    }
}

/// Exit status, told with every command that checks.
macro_rules! status {
    () => {
        "\
Exit status:
  0  within     every stated limit holds, and at least one was stated
  1  outside    a stated limit does not hold
  2             a drawing could not be read, checked or written, or wrong usage
  3  unchecked  computed, but not judged: no limit applies, a stated limit could
                not be judged, or something was assumed that the job does not allow
  Over several drawings the worst counts: 2, then 1, then 3, then 0."
    };
}

/// Exit status of the commands that judge nothing.
macro_rules! plain_status {
    () => {
        "Exit status: 0, or 2 when it could not be done."
    };
}

/// What the results are and are not.
macro_rules! caution {
    () => {
        "\
Caution: the results are a check by calculation, under the assumptions that they
state, for a qualified engineer to judge. The codes of the place and licensed
practice govern; no result says that a structure may be built or used."
    };
}

const MAIN_HELP: &str = concat!(
    "\
Examples:
  thrustmark list bridge.dxf           see layers, units and what could be the axis
  thrustmark mark bridge.dxf           write bridge.thrust.dxf
  thrustmark check drawings/           check every drawing of a folder
  thrustmark unmark bridge.thrust.dxf  get the drawing back, byte for byte

Limits, layers and the rib are stated in a job file, thrustmark.toml, beside the
drawing or in a folder above it.

",
    status!(),
    "\n  verify: 0 current, 1 stale, 2 neither. The other commands: 0, or 2 when it\n  could not be done.\n\n",
    caution!()
);

const MARK_HELP: &str = concat!(
    "\
Examples:
  thrustmark mark bridge.dxf
  thrustmark mark bridge.dxf --output issue/bridge.dxf --json bridge.json
  thrustmark mark bridge.dxf --report bridge.html --picture bridge.svg
  thrustmark mark set-1/ set-2/ --output marked/ --job office.toml

A drawing that is marked already needs --output; its old marks are replaced.

",
    status!(),
    "\n\n",
    caution!()
);

const CHECK_HELP: &str = concat!(
    "\
Examples:
  thrustmark check bridge.dxf
  thrustmark check drawings/ --json - > results.json
  thrustmark check drawings/ --junit results.xml --csv stations.csv

Results of unchanged drawings are kept in the user's cache folder, which may be
deleted at any time.

",
    status!(),
    "\n\n",
    caution!()
);

const UNMARK_HELP: &str = concat!(
    "\
Examples:
  thrustmark unmark bridge.thrust.dxf
  thrustmark unmark bridge.thrust.dxf --output bridge.dxf

The result is held against the SHA-256 that the marks carry. Without marks, or
when the two differ, nothing is written (with --force the latter is).

",
    plain_status!()
);

const LIST_HELP: &str = concat!(
    "\
Examples:
  thrustmark list bridge.dxf
  thrustmark list bridge.dxf --write-job thrustmark.toml

",
    plain_status!()
);

const SCHEMA_HELP: &str = concat!(
    "\
Example:
  thrustmark schema > thrustmark.schema.json

",
    plain_status!()
);

const VERIFY_HELP: &str = "\
Examples:
  thrustmark verify bridge.thrust.dxf bridge.dxf
  thrustmark verify bridge.thrust.dxf --json verified.json

A mark is stale when the source, the job file, the settings for this drawing or
the version of thrustmark differ from those that it was made with, and when marks
were edited or taken out: the drawing is marked again in memory and compared.

Exit status:
  0  current    marking the drawing again would give this copy
  1  stale      it would not
  2             it could not be told: a file cannot be read, or carries no mark";

const DEMO_HELP: &str = concat!(
    "\
Example:
  thrustmark demo demo

Writes four drawings and thrustmark.toml, and never over a file that is there.

",
    plain_status!()
);

const COMPLETIONS_HELP: &str = concat!(
    "\
Example:
  thrustmark completions bash > ~/.local/share/bash-completion/completions/thrustmark

",
    plain_status!()
);

const MANUAL_HELP: &str = concat!(
    "\
Example:
  thrustmark manual > thrustmark.1

",
    plain_status!()
);

const COMPARE_HELP: &str = "\
Examples:
  thrustmark compare bridge-a.dxf bridge-b.dxf
  thrustmark compare bridge-a.dxf bridge-b.dxf --output bridge-changes.dxf

Compares what is computed from the drawings, not their bytes: axis, ring, loads
(matched by place and label), results, verdicts and the settings in force.

Exit status:
  0  same
  1  different
  2  a drawing could not be read or checked, or the copy could not be written";

const WATCH_HELP: &str = "\
Example:
  thrustmark watch drawings

Whenever a drawing or its job file is saved, the marked copy beside the drawing is
written again, and what changed since the last save is told. Copies are not marked.

Exit status: 0 when it is interrupted, 2 when the folder cannot be watched.";
