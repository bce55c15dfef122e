//! The parts of the report on one drawing, from what was checked to the places for signatures.

use serde_json::Value;

use super::page::{Block, Page, figures, sentence, words};
use crate::outcome::{Check, Finding, FindingVerdict, Load, MagnitudeFrom, Run, Source, Status, Units};
use crate::refusal::Refusal;
use crate::write::annotate::note::omitted;
use crate::write::annotate::shown::Shown;
use crate::write::annotate::{check_name, governing, kind_name, worst_case};
use crate::write::picture;
use crate::write::text::{self, four_digits, metres, signed_small};

/// Why a drawing was refused, and what would mend it.
pub fn refusal(error: &Refusal, page: &mut Page) {
    page.section("Why it was not read", "plain");
    page.paragraph(&error.message);
    let line = error.line.map(|l| l.to_string()).unwrap_or_default();
    let or_none = |value: &Option<String>| value.clone().unwrap_or_default();
    page.list(
        "facts",
        &[
            ("Line of the file".into(), line),
            ("Handle".into(), or_none(&error.handle)),
            ("Layer".into(), or_none(&error.layer)),
            ("To mend it".into(), error.remedy.clone()),
        ],
    );
    page.end();
}

/// The result in a few lines.
pub fn summary(run: &Run, page: &mut Page) {
    page.section("Result", "plain");
    let (m, mm) = text::length_units(&run.units);
    for span in &run.spans {
        let Some(case) = worst_case(run, span) else { continue };
        let mut told = format!(
            "{}: {} of span {} {m} and {} {} {m}. ",
            span.name,
            span.kind,
            metres(span.axis.span),
            if span.kind == "cable" { "sag" } else { "rise" },
            metres(span.axis.rise.abs())
        );
        match governing(case) {
            Some(line) => {
                told.push_str(&format!(
                    "Governing line of thrust: {}, one possible line ({}). ",
                    kind_name(line.kind),
                    case.governs_why
                ));
                if let Some(offset) = &line.offset {
                    let toward = if offset.signed < 0.0 { "intrados" } else { "extrados" };
                    told.push_str(&format!(
                        "It strays {} {mm} at most from the axis, toward the {toward}, at x {} {m}, y {} {m}.",
                        text::small(offset.max_abs, &run.units),
                        metres(offset.at[0]),
                        metres(offset.at[1])
                    ));
                }
            }
            None => told.push_str("No line of thrust was found; see the findings."),
        }
        if span.cases.len() > 1 {
            told.push_str(&format!(" Worst case of {}: {}.", span.cases.len(), case.name));
        }
        page.paragraph(&sentence(&told));
    }
    page.end();
}

/// What was checked: sheet, file, hashes, units.
pub fn checked(run: &Run, page: &mut Page) {
    let drawing = &run.drawing;
    let or_none = |value: &Option<String>| value.clone().unwrap_or_default();
    let job = |key: &str| {
        let value = run.settings.pointer(&format!("/origin/{key}"));
        value.and_then(Value::as_str).unwrap_or_default().to_owned()
    };
    let unit = match (&drawing.unit, &drawing.unit_source) {
        (Some(unit), Some(source)) => format!("{unit} (from {source})"),
        (unit, _) => or_none(unit),
    };
    let form = [&drawing.dxf_version, &drawing.form, &drawing.encoding].into_iter().flatten();
    let job_file = if run.error.is_none() && job("file").is_empty() { "none".into() } else { job("file") };
    page.section("What was checked", "plain");
    page.list(
        "facts",
        &[
            ("Sheet".into(), or_none(&drawing.sheet)),
            ("Revision".into(), or_none(&drawing.revision)),
            ("File".into(), drawing.file.clone()),
            ("SHA-256".into(), or_none(&drawing.sha256)),
            ("Form".into(), form.cloned().collect::<Vec<_>>().join(", ")),
            ("Unit of the drawing".into(), unit),
            ("Job file".into(), job_file),
            ("SHA-256 of the job".into(), job("sha256")),
            ("Marked copy".into(), or_none(&run.output)),
        ],
    );
    let axes: Vec<Vec<String>> = run
        .spans
        .iter()
        .map(|span| {
            let axis = &span.axis;
            let place = |p: [f64; 2]| format!("{}, {}", metres(p[0]), metres(p[1]));
            let ring = span.ring.as_ref().map_or("not known".to_owned(), |r| {
                if r.depth_max - r.depth_min > r.depth_max * crate::tolerance::SAME_JOINT {
                    format!("{} to {}", metres(r.depth_min), metres(r.depth_max))
                } else {
                    metres(r.depth_max)
                }
            });
            vec![
                span.name.clone(),
                metres(axis.span),
                metres(axis.rise),
                metres(axis.length),
                place(axis.left),
                place(axis.crown),
                place(axis.right),
                ring,
                axis.entities.iter().map(entity).collect::<Vec<_>>().join("; "),
            ]
        })
        .collect();
    if !axes.is_empty() {
        page.table(
            &format!("Axis as read, lengths in {}", run.units.length),
            &[
                words("Span"),
                figures("l"),
                figures("Rise"),
                figures("Length"),
                figures("Left springing x, y"),
                figures("Crown x, y"),
                figures("Right springing x, y"),
                figures("Depth"),
                words("Entities"),
            ],
            &axes,
        );
    }
    page.end();
}

/// An entity as `LINE 2A on ARCH-AXIS`.
fn entity(source: &Source) -> String {
    let handle = source.handle.as_deref().map(|h| format!(" {h}")).unwrap_or_default();
    let path =
        if source.path.is_empty() { String::new() } else { format!(" in {}", source.path.join(" / ")) };
    format!("{}{handle} on {}{path}", source.kind, source.layer)
}

/// The elevation.
pub fn elevation(run: &Run, page: &mut Page) {
    page.section("Elevation and line of thrust", "picture");
    let picture = picture::elevation(run);
    let (_, mm) = text::length_units(&run.units);
    let mut caption = format!(
        "Axis thin, governing line of thrust heavy, ring lines faint where a depth is known. Figures at the loads: offset of \
         the line from the axis along the joint, {mm}, positive toward the extrados. Letters: spaces between the loads \
         (Bow's notation)."
    );
    match picture.hidden {
        0 => {}
        1 => caption.push_str(" 1 figure is not shown; the tables hold all."),
        n => caption.push_str(&format!(" {n} figures are not shown; the tables hold all.")),
    }
    page.figure(picture, &caption);
    page.end();
}

/// The loads, by the letters beside them.
pub fn loads(run: &Run, page: &mut Page) {
    page.section("Loads, by Bow's letters", "table");
    let unit = text::force_unit(&run.units);
    let (m, _) = text::length_units(&run.units);
    for span in &run.spans {
        let shown = Shown::new(run, span, 1.0);
        let rows: Vec<Vec<String>> = span
            .loads
            .iter()
            .zip(&shown.forces)
            .map(|(load, force)| {
                vec![
                    format!("{} {}", load.space[0], load.space[1]),
                    load.label.clone(),
                    metres(load.at[0]),
                    metres(load.at[1]),
                    four_digits(force.x + 0.0),
                    four_digits(force.y + 0.0),
                    from(load),
                    load.source.handle.clone().unwrap_or_else(|| "none".into()),
                    load.source.kind.clone(),
                    load.set.clone(),
                ]
            })
            .collect();
        let case = shown.case.map_or("drawn", |c| &c.name);
        page.table(
            &format!("{}, case {case}: forces in {unit}, to the right and upward positive", span.name),
            &[
                words("Spaces"),
                words("Load"),
                figures(format!("x, {m}")),
                figures(format!("y, {m}")),
                figures("To the right"),
                figures("Upward"),
                words("Magnitude from"),
                words("Handle"),
                words("Entity"),
                words("Layer"),
            ],
            &rows,
        );
    }
    super::areas::tables(run, page);
    page.end();
}

fn from(load: &Load) -> String {
    let from = match load.magnitude_from {
        MagnitudeFrom::Label => "label",
        MagnitudeFrom::Attribute => "attribute",
        MagnitudeFrom::ExtendedData => {
            return format!(
                "extended data \u{201c}{}\u{201d} of {}{}",
                load.text.as_deref().unwrap_or_default(),
                load.application.as_deref().unwrap_or_default(),
                load.sense.map_or_else(String::new, |s| format!(", {}", s.words()))
            );
        }
        MagnitudeFrom::ArrowLength => "length of its arrow",
        MagnitudeFrom::Job => "job file",
        MagnitudeFrom::Equal => "taken as equal",
        MagnitudeFrom::SelfWeight => "self weight",
        MagnitudeFrom::Area => "weighed area",
    };
    let sense = load.sense.map_or_else(String::new, |s| format!(", {}", s.words()));
    match &load.text {
        Some(text) => format!("{from} \u{201c}{text}\u{201d}{sense}"),
        None => format!("{from}{sense}"),
    }
}

/// The force polygon.
pub fn polygon(run: &Run, page: &mut Page) {
    let Some(picture) = picture::polygons(run) else { return };
    page.section("Force polygon", "picture");
    page.figure(
        picture,
        "Load line by Bow's letters, pole O of the governing line and its rays. Each ray is parallel to the piece of the \
         line of thrust in the space of the same letter.",
    );
    page.end();
}

/// The findings, all of them.
pub fn findings(run: &Run, page: &mut Page) {
    page.section("Findings", "table");
    let rows: Vec<Vec<String>> = run.findings.iter().map(|f| finding(run, f)).collect();
    page.table(
        "What was held against limits, and what else is worth knowing",
        &[
            words("Check"),
            words("Outcome"),
            figures("Value"),
            figures("Limit"),
            words("Where"),
            words("Basis"),
            words("What was found, and what would mend it"),
        ],
        &rows,
    );
    page.end();
}

fn finding(run: &Run, finding: &Finding) -> Vec<String> {
    let unit = finding.unit.as_deref();
    let told = |value: Option<f64>| value.map(|v| text::quantity(v, unit)).unwrap_or_default();
    let outcome = match finding.verdict {
        FindingVerdict::Outside => "OUTSIDE",
        FindingVerdict::Accepted => "accepted",
        FindingVerdict::Within => "holds",
        FindingVerdict::Note if finding.unchecks => "NOT CHECKED",
        FindingVerdict::Note => "note",
    };
    let mut place = Vec::new();
    if let Some(at) = finding.at {
        let (m, _) = text::length_units(&run.units);
        place.push(format!("x {} {m}, y {} {m}", metres(at[0]), metres(at[1])));
    }
    if run.spans.len() > 1 {
        place.extend(finding.span.clone());
    }
    if run.spans.iter().any(|s| s.cases.len() > 1) {
        place.extend(finding.case.as_ref().map(|c| format!("case {c}")));
    }
    if let Some(source) = &finding.entity {
        place.push(entity(source));
    }
    let mut said = sentence(&finding.message);
    if let Some(accepted) = &finding.accepted {
        said.push_str(&format!(". Accepted by {}: {}", accepted.by, accepted.reason));
        if let Some(until) = &accepted.until {
            said.push_str(&format!(" (until {until})"));
        }
    }
    if let Some(remedy) = &finding.remedy {
        said.push_str(&format!(". {remedy}"));
    }
    vec![
        check_name(finding.check),
        outcome.into(),
        // The value of a note without a limit stands in its words.
        if finding.limit.is_some() { told(finding.value) } else { String::new() },
        told(finding.limit),
        place.join("; "),
        finding.basis.clone().unwrap_or_default(),
        said,
    ]
}

/// The offset diagram.
pub fn offsets(run: &Run, page: &mut Page) {
    let Some(picture) = picture::offsets(run) else { return };
    page.section("Offset diagram", "picture");
    page.figure(picture, "Offset of the governing line from the axis along the span, with the stated limit.");
    page.end();
}

/// Proofs of optimality and the residual of the self-checks.
pub fn proofs(run: &Run, page: &mut Page) {
    let mut rows = Vec::new();
    for span in &run.spans {
        for case in &span.cases {
            for line in &case.lines {
                let name = format!("{}, case {}: {}", span.name, case.name, kind_name(line.kind));
                let row = match (&line.proof, line.status) {
                    (Some(proof), _) => {
                        [format!("{:.9e}", proof.primal), format!("{:.9e}", proof.dual), small(proof.gap)]
                    }
                    (None, Status::Found) => {
                        ["given by its points".into(), "nothing to prove".into(), String::new()]
                    }
                    (None, _) => [
                        line.reason.clone().unwrap_or_else(|| "not found".into()),
                        String::new(),
                        String::new(),
                    ],
                };
                let mut cells = vec![name];
                cells.extend(row);
                cells.push(small(case.residual));
                rows.push(cells);
            }
        }
    }
    page.section("Proof of optimality", "table");
    page.paragraph(
        "An optimum is proved in the same run by a bound from the other side: no line does better than the bound, and the \
         line drawn reaches it but for the gap, relative to the value. The residual is the largest relative error of \
         equilibrium over all joints of the case.",
    );
    if run.units.length == "ft" {
        page.paragraph("Values and bounds stand in m and kN, as they were computed.");
    }
    page.table(
        "Value reached and bound, per line",
        &[words("Line"), figures("Value reached"), figures("Bound"), figures("Gap"), figures("Residual")],
        &rows,
    );
    page.end();
}

/// An error that should be nought, without the digits of rounding.
fn small(value: f64) -> String {
    let shown = crate::tolerance::SHOWN_ERROR;
    if value.abs() <= shown { format!("below {shown:.0e}") } else { format!("{value:.1e}") }
}

/// What was assumed and what was left out; with the signs.
pub fn assumptions(run: &Run, page: &mut Page) {
    page.section("Assumptions, left out, signs", "plain");
    let assumed: Vec<&str> = run
        .findings
        .iter()
        .filter(|f| {
            f.unchecks || matches!(f.check, Check::Support | Check::Sense | Check::Loads | Check::Gaps)
        })
        .map(|f| f.message.as_str())
        .collect();
    let mut lines: Vec<String> = vec![
        "The statics are those of the plane of the elevation.".into(),
        "A line of thrust is one possible line of the loads named here; which one was drawn, and why, stands with the \
         result."
            .into(),
    ];
    lines.extend(assumed.iter().map(|s| (*s).to_owned()));
    let omitted = omitted(run);
    if !omitted.is_empty() {
        lines.push(format!("Left out: {omitted}."));
    }
    page.blocks.push(Block::Bullets(lines.iter().map(|line| sentence(line)).collect()));
    page.figure(
        picture::signs(),
        "Signs: offsets toward the extrados, compression, and moments that go with a positive offset are positive; H is \
         the push of an abutment inward, V its upward reaction; x runs to the right and y upward from the origin of the \
         drawing.",
    );
    page.end();
}

/// The settings in force, so that the run can be repeated from its own report.
pub fn settings(run: &Run, page: &mut Page) {
    let mut rows = Vec::new();
    flatten("", &run.settings, &mut rows);
    rows.retain(|(name, _)| !name.starts_with("origin."));
    if rows.is_empty() {
        return;
    }
    page.section("Settings in force", "plain");
    page.list("settings", &rows);
    page.end();
}

/// A tree of settings as `table.key` and value.
fn flatten(path: &str, value: &Value, out: &mut Vec<(String, String)>) {
    match value {
        Value::Object(map) => {
            for (key, value) in map {
                let path = if path.is_empty() { key.clone() } else { format!("{path}.{key}") };
                flatten(&path, value, out);
            }
        }
        Value::Array(items) if items.iter().any(Value::is_object) => {
            for (i, item) in items.iter().enumerate() {
                flatten(&format!("{path}[{i}]"), item, out);
            }
        }
        Value::Null => {}
        Value::String(text) => out.push((path.to_owned(), text.clone())),
        other => out.push((path.to_owned(), other.to_string())),
    }
}

/// Places for those who prepared and checked the sheet.
pub fn signatures(page: &mut Page) {
    page.section("Prepared and checked", "signatures");
    page.blocks.push(Block::Signatures(&["Prepared by", "Checked by"]));
    page.end();
}

/// The offset of a station as text, in mm or inches.
pub fn offset(value: Option<f64>, units: &Units) -> String {
    value.map(|v| signed_small(v, units)).unwrap_or_default()
}
