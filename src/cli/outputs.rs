//! The outputs beside the marked copies: where each goes, looked at before any work, and written when all is computed.

use std::collections::BTreeMap;
use std::fs::File;
use std::io::{self, Read, Write};
use std::path::{Path, PathBuf};

use super::args::{CheckArgs, JsonTarget};
use super::{borrowed, json_may_replace};
use crate::flow::{self, Environment};
use crate::outcome::{Document, Run};
use crate::refusal::Refusal;
use crate::write::file::{self, Replace};
use crate::write::picture::svg::{Home, MADE_BY, svg};
use crate::write::picture::{self, png};
use crate::write::{csv, json, junit, report};

/// Bytes at the head of a file that tell whether it is one of ours.
const HEAD: u64 = 4096;

/// Bytes of a PDF that are searched for its maker; ours are far smaller.
const LARGEST_REPORT: u64 = 256 << 20;

/// What a file is, by what stands at its head.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Kind {
    Svg,
    Png,
    Csv,
    Junit,
    Report,
    ReportPdf,
}

/// The outputs asked for.
#[derive(Debug)]
pub struct Outputs<'a> {
    args: &'a CheckArgs,
    sources: Vec<&'a Path>,
    /// A picture for each drawing; empty when none was asked for.
    pictures: Vec<(PathBuf, Kind)>,
}

impl<'a> Outputs<'a> {
    /// Looks whether all outputs may be written, and that no two of them, nor any of the marked `copies`, are one file.
    ///
    /// # Errors
    /// When one may not be written, two are one, or the end of a name asks for a form that is not made.
    pub fn plan(args: &'a CheckArgs, drawings: &'a [PathBuf], copies: &[PathBuf]) -> Result<Self, Refusal> {
        let pictures = pictures(args, drawings)?;
        let outputs = Self { args, sources: borrowed(drawings), pictures };
        let mut taken: BTreeMap<PathBuf, &Path> = BTreeMap::new();
        for copy in copies {
            taken.insert(place(copy), copy);
        }
        if let Some(JsonTarget::File(target)) = &args.json {
            file::may_write(target, &outputs.sources, &json_may_replace(args.force))?;
            taken_once(&mut taken, target)?;
        }
        if let Some(target) = &args.report {
            ends_with(target, &["html", "htm", "pdf"], "--report writes .html and .pdf")?;
        }
        for (target, kind) in outputs.files() {
            let ours = ours(kind);
            file::may_write(target, &outputs.sources, &may_replace(args.force, &ours))?;
            taken_once(&mut taken, target)?;
        }
        Ok(outputs)
    }

    fn files(&self) -> impl Iterator<Item = (&Path, Kind)> {
        let args = self.args;
        let is_pdf =
            args.report.as_ref().and_then(|p| p.extension()).is_some_and(|e| e.eq_ignore_ascii_case("pdf"));
        let report = if is_pdf { Kind::ReportPdf } else { Kind::Report };
        [(&args.csv, Kind::Csv), (&args.junit, Kind::Junit), (&args.report, report)]
            .into_iter()
            .filter_map(|(path, kind)| path.as_deref().map(|p| (p, kind)))
            .chain(self.pictures.iter().map(|(path, kind)| (path.as_path(), *kind)))
    }

    /// Writes them all.
    ///
    /// # Errors
    /// When one cannot be written; those before it stand.
    pub fn write(&self, document: &Document, environment: Environment) -> Result<(), Refusal> {
        if let Some(JsonTarget::File(target)) = &self.args.json {
            let text = json::to_json(document)?;
            self.put(target, &json_may_replace(self.args.force), text.as_bytes())?;
        }
        let date = environment.today.to_string();
        for (target, kind) in self.files() {
            let bytes = match kind {
                Kind::Csv => csv::stations(document).into_bytes(),
                Kind::Junit => junit::xml(document, &date).into_bytes(),
                Kind::Report => report::html(document, &date).into_bytes(),
                Kind::ReportPdf => report::pdf(document, &date)?,
                Kind::Svg | Kind::Png => continue,
            };
            let ours = ours(kind);
            self.put(target, &may_replace(self.args.force, &ours), &bytes)?;
        }
        for ((target, kind), run) in self.pictures.iter().zip(&document.runs) {
            if let Some(bytes) = drawn(run, *kind)? {
                let ours = ours(*kind);
                self.put(target, &may_replace(self.args.force, &ours), &bytes)?;
            }
        }
        Ok(())
    }

    fn put(&self, target: &Path, replace: &Replace, bytes: &[u8]) -> Result<(), Refusal> {
        file::write_whole(target, &self.sources, replace, |out| {
            out.write_all(bytes).map_err(|error| {
                Refusal::new("write", format!("{}: {error}", target.display()), "Look at the space left.")
            })
        })
    }
}

/// The picture of a run; a drawing that was refused has none.
fn drawn(run: &Run, kind: Kind) -> Result<Option<Vec<u8>>, Refusal> {
    if run.verdict.is_none() {
        return Ok(None);
    }
    let picture = picture::whole(run);
    Ok(Some(match kind {
        Kind::Png => png::png(&picture)?,
        _ => svg(&picture, Home::File).into_bytes(),
    }))
}

/// The picture of each drawing. With several drawings, or where a folder is named, each is an SVG named after its drawing.
fn pictures(args: &CheckArgs, drawings: &[PathBuf]) -> Result<Vec<(PathBuf, Kind)>, Refusal> {
    let Some(named) = &args.picture else { return Ok(Vec::new()) };
    let several = drawings.len() > 1 || args.drawings.iter().any(|a| a.is_dir());
    if several || named.is_dir() {
        if !named.is_dir() {
            return Err(Refusal::new(
                "output-folder",
                format!("{} is no folder, and the pictures of several drawings need one", named.display()),
                "Make the folder first, or draw one drawing at a time.",
            ));
        }
        return Ok(drawings
            .iter()
            .map(|d| {
                let copy = flow::beside(d);
                (named.join(copy.file_name().unwrap_or_default()).with_extension("svg"), Kind::Svg)
            })
            .collect());
    }
    ends_with(named, &["svg", "png"], "--picture writes .svg and .png")?;
    let is_png = named.extension().is_some_and(|e| e.eq_ignore_ascii_case("png"));
    Ok(vec![(named.clone(), if is_png { Kind::Png } else { Kind::Svg })])
}

fn ends_with(target: &Path, ends: &[&str], remedy: &str) -> Result<(), Refusal> {
    let end = target.extension().unwrap_or_default();
    if ends.iter().any(|e| end.eq_ignore_ascii_case(e)) {
        return Ok(());
    }
    let what = format!("The name {} asks for a form that is not made", target.display());
    Err(Refusal::new("output-form", what, format!("{remedy}.")))
}

/// Two spellings of one place are one.
fn place(target: &Path) -> PathBuf {
    let folder = target.parent().filter(|p| !p.as_os_str().is_empty()).unwrap_or(Path::new("."));
    let folder = folder.canonicalize().unwrap_or_else(|_| folder.to_path_buf());
    let place = folder.join(target.file_name().unwrap_or_default());
    place.canonicalize().unwrap_or(place)
}

fn taken_once<'a>(taken: &mut BTreeMap<PathBuf, &'a Path>, target: &'a Path) -> Result<(), Refusal> {
    match taken.insert(place(target), target) {
        None => Ok(()),
        Some(other) => Err(Refusal::new(
            "same-output",
            format!(
                "{} and {} are one file, and two outputs would go there",
                other.display(),
                target.display()
            ),
            "Give each output a name of its own.",
        )),
    }
}

fn may_replace<'a>(force: bool, ours: &'a dyn Fn(&Path) -> io::Result<bool>) -> Replace<'a> {
    if force { Replace::Any } else { Replace::Ours(ours) }
}

/// Whether a PDF file names this program as its maker.
fn is_our_pdf(path: &Path) -> io::Result<bool> {
    let needle = format!("<xmp:CreatorTool>{} ", report::CREATOR);
    let mut bytes = Vec::new();
    File::open(path)?.take(LARGEST_REPORT).read_to_end(&mut bytes)?;
    Ok(bytes.windows(needle.len()).any(|w| w == needle.as_bytes()))
}

/// Whether a file of this kind is one that this program wrote, or is empty.
fn ours(kind: Kind) -> impl Fn(&Path) -> io::Result<bool> {
    move |path| {
        let mut head = Vec::new();
        File::open(path)?.take(HEAD).read_to_end(&mut head)?;
        let head = String::from_utf8_lossy(&head);
        Ok(match kind {
            Kind::Svg => head.contains(&format!("<!-- {MADE_BY} -->")),
            Kind::Png => head.contains(concat!("Software\0", env!("CARGO_PKG_NAME"))),
            Kind::Csv => head.starts_with(csv::HEADER),
            Kind::Junit => head.contains(concat!("<testsuites name=\"", env!("CARGO_PKG_NAME"), "\"")),
            Kind::Report => head.contains(report::GENERATOR),
            // The maker stands at the end of a PDF, where its table of contents is.
            Kind::ReportPdf => head.is_empty() || head.starts_with("%PDF-") && is_our_pdf(path)?,
        })
    }
}
