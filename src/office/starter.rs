//! A job file to begin with: what a drawing says or seems to say, written out so that nothing is guessed any more.

use std::fs::OpenOptions;
use std::io::{self, Write};
use std::path::Path;

use crate::drawing::{Reason, Role};
use crate::flow::{self, Environment, Listing};
use crate::job::Job;
use crate::outcome::{MagnitudeFrom, Run, Sense};
use crate::refusal::Refusal;
use crate::units::ForceUnit;
use crate::write::text::plain;

/// Writes a starter job file for a drawing, never over a file that is there.
///
/// # Errors
/// When the drawing cannot be read, or the file is there already or cannot be written.
pub fn write(
    drawing: &Path,
    job: Option<&Job>,
    listing: &Listing,
    environment: Environment,
    target: &Path,
) -> Result<(), Refusal> {
    let run = flow::check(drawing, job, environment);
    let text = text(drawing, listing, &run);
    // What is written must be a job file, whatever the names in the drawing are.
    Job::parse(text.as_bytes(), Some(target))?;
    let opened = OpenOptions::new().write(true).create_new(true).open(target);
    opened.and_then(|mut file| file.write_all(text.as_bytes())).map_err(|error| match error.kind() {
        io::ErrorKind::AlreadyExists => Refusal::new(
            "output-exists",
            "the job file is there already, and it may hold somebody's work",
            "Name another file with --write-job.",
        )
        .in_file(target),
        _ => Refusal::new(
            "output-failed",
            format!("the job file could not be written: {error}"),
            "Name a place in which you may write.",
        )
        .in_file(target),
    })
}

/// The text of the file.
fn text(drawing: &Path, listing: &Listing, run: &Run) -> String {
    let name = plain(&drawing.file_name().unwrap_or_default().to_string_lossy());
    let mut out = format!(
        "# Job file begun by thrustmark {} from {name}. Read every line: what was not stated in the\n\
         # drawing is marked \"check\". Lines that begin with # are off.\n",
        env!("CARGO_PKG_VERSION")
    );
    let mut add = |line: &str| {
        out.push_str(line);
        out.push('\n');
    };
    add("\n[drawing]");
    match (&run.drawing.unit, run.drawing.unit_source.as_deref()) {
        (Some(unit), Some(from @ ("job" | "$INSUNITS"))) => {
            let from = if from == "job" {
                "the job file in force says so"
            } else {
                "the drawing says so ($INSUNITS)"
            };
            add(&entry("unit", &quoted(unit), from));
        }
        (Some(unit), _) => {
            add(&entry("unit", &quoted(unit), "check: the drawing states none; taken from its size"))
        }
        (None, _) => add(&entry("# unit", &quoted("m"), "mm, cm, m, in or ft")),
    }
    add(&entry("# scale", "1.0", "real length / drawn length, where the elevation is drawn to a scale"));
    add("\n[layers]");
    for (role, words) in [
        (Role::Axis, "the axis of the rib, from springing to springing"),
        (Role::Loads, "loads and their labels"),
    ] {
        layers(&mut add, listing, role, words);
    }
    add("\n[rib]");
    add(&entry("support", &quoted("none"), "check: none (a ring without tension) or three-hinged"));
    add(&entry("# depth", "0.40", "m; states the ring, which the line of thrust must then stay inside"));
    add(&entry("# width", "4.0", "m"));
    add("\n[loads]");
    loads(&mut add, run);
    add("\n[limits]");
    add("# Without a limit nothing is judged, and the result is headed SHAPE ONLY, NOT CHECKED.");
    add(&entry("# offset", "0.05", "m, largest offset of the line of thrust from the axis: an example"));
    let senses: Vec<Sense> = run.spans.iter().flat_map(|s| &s.loads).filter_map(|l| l.sense).collect();
    let down = senses.iter().filter(|s| **s == Sense::Downward).count();
    let toward = senses.iter().filter(|s| **s == Sense::TowardRib).count();
    if down + toward > 0 {
        add("\n[accept]");
        add(&entry(
            "assumed",
            "[\"sense\"]",
            &format!(
                "check: {} lines have no arrowhead; {down} act downward, {toward} toward the rib",
                down + toward
            ),
        ));
    }
    if let Some(error) = &run.error {
        add(&format!("\n# As it stands the drawing is refused: {}", plain(&error.to_string())));
    }
    out
}

/// A key with its value, and a remark behind it.
fn entry(key: &str, value: &str, remark: &str) -> String {
    format!("{:<26}# {remark}", format!("{key} = {value}"))
}

fn quoted(text: &str) -> String {
    toml::Value::String(text.to_owned()).to_string()
}

/// The layers that a check takes, or else those that could serve.
fn layers(add: &mut impl FnMut(&str), listing: &Listing, role: Role, words: &str) {
    let key = role.key();
    let taken = match (&listing.taken, role) {
        (Ok((axis, _)), Role::Axis) => axis.clone(),
        (Ok((_, loads)), Role::Loads) => loads.clone(),
        (
            Ok(_),
            Role::Intrados
            | Role::Extrados
            | Role::Hinges
            | Role::Road
            | Role::Posts
            | Role::Plan
            | Role::Areas,
        )
        | (Err(_), _) => Vec::new(),
    };
    let value = |names: &[String]| match names {
        [one] => quoted(one),
        names => format!("[{}]", names.iter().map(|n| quoted(n)).collect::<Vec<_>>().join(", ")),
    };
    if taken.is_empty() {
        let named = listing.suggestions.iter().filter(|s| s.role == role);
        let names: Vec<String> = named.map(|s| s.layer.clone()).collect();
        let names = if names.is_empty() { vec![format!("ARCH-{}", key.to_uppercase())] } else { names };
        add(&entry(
            &format!("# {key}"),
            &value(&names),
            &format!("check: {words}; none was found for certain"),
        ));
        return;
    }
    let guessed = listing.suggestions.iter().find_map(|s| {
        let why = s.reason.as_ref().filter(|_| s.role == role && taken.contains(&s.layer))?;
        Some(match why {
            Reason::Word(word) => format!("check: its name holds the word {word}"),
            Reason::OneLine { .. } => "check: it holds one line from springing to springing".to_owned(),
            Reason::PointsOver { over, of } => {
                format!("check: {over} of its {of} points stand over the axis")
            }
        })
    });
    add(&entry(key, &value(&taken), guessed.as_deref().unwrap_or(words)));
}

fn loads(add: &mut impl FnMut(&str), run: &Run) {
    let loads: Vec<_> = run.spans.iter().flat_map(|s| &s.loads).collect();
    let figures: Vec<Option<ForceUnit>> =
        loads.iter().filter_map(|l| l.text.as_deref()).map(unit_of).collect();
    let mut stated = figures.iter().flatten();
    // As a check itself takes it: the only unit that the figures show, else kN.
    let first = stated.next().copied();
    let shown = first.filter(|unit| stated.all(|other| other == unit));
    let unit = shown.unwrap_or(ForceUnit::KN);
    if loads.iter().any(|l| l.magnitude_from == MagnitudeFrom::Equal) || figures.is_empty() {
        add(&entry("unit", &quoted(unit.name()), "of figures that state none"));
        add(&entry("# unlabelled", "100.0", "check: no load has a figure; the force of each, or label them"));
        return;
    }
    let remark = if figures.iter().all(Option::is_some) {
        "as the figures state; for those that state none"
    } else if shown.is_some() {
        "check: of figures that state none, as on the other labels"
    } else {
        "check: of figures that state none"
    };
    add(&entry("unit", &quoted(unit.name()), remark));
    add(&entry("# unlabelled", "0.0", "force of a load with no figure"));
}

/// The unit of force that a label ends with.
fn unit_of(label: &str) -> Option<ForceUnit> {
    let words = label.split(['(', '/']).next().unwrap_or_default().trim_end();
    ForceUnit::parse(words.rsplit(|c: char| !c.is_alphabetic()).next().unwrap_or_default())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn units_stand_at_the_end_of_labels() {
        for (label, unit) in [
            ("P3 = 120 kN", Some(ForceUnit::KN)),
            ("27kip", Some(ForceUnit::Kip)),
            ("12,5 kN (dead)", Some(ForceUnit::KN)),
            ("85", None),
            ("P = 85 ", None),
            ("", None),
            ("g = 12 kN/m", Some(ForceUnit::KN)),
            ("橋 5 橋", None),
        ] {
            assert_eq!(unit_of(label), unit, "{label}");
        }
    }
}
