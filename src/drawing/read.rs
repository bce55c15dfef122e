//! One fragment per entity through the `dxf` crate.
//!
//! Each record is written out as a small drawing of its own that holds the groups the reader needs and nothing else, so
//! that one odd entity spoils no other, no embedded object overwrites a text's place, and a fault is told with the line,
//! handle and layer of the file. Every number is checked before, because the crate names the wrong place for a bad one.

use std::fmt::Write as _;

use dxf::entities::Entity;

use crate::refusal::Refusal;
use crate::tags::{Decoder, Record, Tag};
use crate::tolerance;

/// Groups that are read of each kind of entity: texts, numbers, whole numbers with the range that the format gives them;
/// and the numbers without which it means nothing.
struct Groups {
    texts: &'static [i32],
    reals: &'static [i32],
    integers: &'static [(i32, i64, i64)],
    needed: &'static [i32],
}

const ANY: (i64, i64) = (-32_768, 32_767);

fn groups(kind: &str) -> Option<Groups> {
    const POINT: &[i32] = &[10, 20, 30, 210, 220, 230];
    let groups = |reals, needed| Groups { texts: &[], reals, integers: &[], needed };
    Some(match kind {
        "LEADER" => Groups { integers: &[(71, 0, 1)], ..groups(POINT, &[10, 20]) },
        "SOLID" | "TRACE" => groups(
            &[10, 20, 30, 11, 21, 31, 12, 22, 32, 13, 23, 33, 210, 220, 230],
            &[10, 20, 11, 21, 12, 22],
        ),
        "LINE" => groups(&[10, 20, 30, 11, 21, 31, 210, 220, 230], &[10, 20, 11, 21]),
        "POINT" => groups(POINT, &[10, 20]),
        "CIRCLE" => groups(&[10, 20, 30, 40, 210, 220, 230], &[10, 20, 40]),
        "ARC" => groups(&[10, 20, 30, 40, 50, 51, 210, 220, 230], &[10, 20, 40, 50, 51]),
        "LWPOLYLINE" => {
            Groups { integers: &[(70, ANY.0, ANY.1)], ..groups(&[10, 20, 38, 42, 210, 220, 230], &[]) }
        }
        "POLYLINE" => Groups { integers: &[(70, ANY.0, ANY.1)], ..groups(POINT, &[]) },
        "VERTEX" => Groups { integers: &[(70, ANY.0, ANY.1)], ..groups(&[10, 20, 30, 42], &[10, 20]) },
        "ELLIPSE" => {
            groups(&[10, 20, 30, 11, 21, 31, 40, 41, 42, 210, 220, 230], &[10, 20, 11, 21, 40, 41, 42])
        }
        "SPLINE" => Groups {
            integers: &[(70, ANY.0, ANY.1), (71, 0, 1000)],
            ..groups(&[10, 20, 30, 11, 21, 31, 40, 41, 210, 220, 230], &[71])
        },
        "INSERT" => Groups { texts: &[2], ..groups(POINT, &[10, 20]) },
        "ATTRIB" => Groups { texts: &[1, 2], ..groups(POINT, &[]) },
        "TEXT" => Groups {
            texts: &[1],
            integers: &[(72, 0, 5), (73, 0, 3)],
            ..groups(&[10, 20, 30, 11, 21, 31, 40, 41, 50, 210, 220, 230], &[10, 20])
        },
        "MTEXT" => Groups {
            texts: &[1, 3],
            integers: &[(71, 1, 9)],
            ..groups(&[10, 20, 30, 11, 21, 31, 40, 41, 50, 210, 220, 230], &[10, 20])
        },
        _ => return None,
    })
}

/// Reads one record, with the run of VERTEX or ATTRIB records that belongs to it.
///
/// # Errors
/// When a number of it cannot be read, a needed one is missing, or the crate finds another fault.
pub fn entity(record: &Record, decoder: &Decoder) -> Result<Entity, Refusal> {
    let fragment = fragment(record, decoder)?;
    let fault = |what: String| {
        record.refuse(Refusal::new(
            "entity",
            format!("the {} cannot be read: {what}", record.kind),
            "Redraw it, or let the CAD program check and repair the drawing",
        ))
    };
    let drawing = dxf::Drawing::load(&mut fragment.as_bytes()).map_err(|e| fault(e.to_string()))?;
    let mut entities = drawing.entities();
    match (entities.next(), entities.next()) {
        (Some(one), None) => Ok(one.clone()),
        (None, _) => Err(fault("it holds nothing that can be read".into())),
        (Some(_), Some(_)) => Err(fault("it does not end where it should".into())),
    }
}

/// The record as a drawing of its own.
fn fragment(record: &Record, decoder: &Decoder) -> Result<String, Refusal> {
    let mut out = String::with_capacity(512);
    out.push_str(
        "  0\nSECTION\n  2\nHEADER\n  9\n$ACADVER\n  1\nAC1021\n  0\nENDSEC\n  0\nSECTION\n  2\nENTITIES\n",
    );
    write_record(&mut out, record, decoder)?;
    let run: Vec<&Record> = match record.kind.as_str() {
        "POLYLINE" => record.children.iter().filter(|c| c.kind == "VERTEX").collect(),
        "INSERT" => record.children.iter().filter(|c| c.kind == "ATTRIB").collect(),
        _ => Vec::new(),
    };
    for child in &run {
        write_record(&mut out, child, decoder)?;
    }
    if !run.is_empty() {
        out.push_str("  0\nSEQEND\n");
    }
    out.push_str("  0\nENDSEC\n  0\nEOF\n");
    Ok(out)
}

fn write_record(out: &mut String, record: &Record, decoder: &Decoder) -> Result<(), Refusal> {
    let kind = record.kind.as_str();
    let Some(groups) = groups(kind) else {
        return Err(record.refuse(Refusal::new(
            "entity",
            format!("entities of type {kind} are not read"),
            "Draw it with lines, arcs, polylines, points and texts",
        )));
    };
    // Writing to a string cannot fail.
    let _ = write!(out, "  0\n{kind}\n");
    // The crate takes attributes only after an INSERT that announces them.
    if kind == "INSERT" && record.children.iter().any(|c| c.kind == "ATTRIB") {
        out.push_str(" 66\n1\n");
    }
    let turned_last = record.tags.own().filter(|t| t.code == 11 || t.code == 50).map(|t| t.code).last();
    // The crate drops points of a spline or a leader that have no height.
    let flat_spline = matches!(kind, "SPLINE" | "LEADER") && record.tags.first(30).is_none();
    let mut seen = Vec::new();
    let mut columns = false;
    for tag in record.tags.own() {
        let code = tag.code;
        match kind {
            // What follows belongs to the attribute's own record of settings and repeats codes.
            "ATTRIB" if code == 100 && tag.trimmed().eq_ignore_ascii_case(b"AcDbXrecord") => break,
            "MTEXT" => {
                columns |= code == 75;
                // Columns list their heights under the code of the rotation; of two rotations the last one counts.
                if (code == 50 && (columns || turned_last == Some(11)))
                    || (turned_last == Some(50) && matches!(code, 11 | 21 | 31))
                {
                    continue;
                }
            }
            // Groups of a vertex mean nothing before the first one, and the crate does not expect them there.
            // The points that a spline was fitted through say nothing that its control points do not.
            "SPLINE" if matches!(code, 11 | 21 | 31) && record.tags.first(10).is_some() => continue,
            "LWPOLYLINE" if matches!(code, 20 | 42) && !seen.contains(&10) => {
                return Err(misplaced(record, &tag));
            }
            _ => {}
        }
        if groups.reals.contains(&code) {
            let value = real(record, &tag)?;
            let _ = write!(out, "{code:>3}\n{value:?}\n");
            if flat_spline && code == 20 {
                out.push_str(" 30\n0.0\n");
            }
        } else if let Some(&(_, low, high)) = groups.integers.iter().find(|g| g.0 == code) {
            let value = integer(record, &tag)?;
            // A setting that the format does not know changes nothing that is read here: its default counts.
            if (low..=high).contains(&value) {
                let _ = write!(out, "{code:>3}\n{value}\n");
            }
        } else if groups.texts.contains(&code) {
            let _ = writeln!(out, "{code:>3}");
            escape(out, &decoder.text(tag.value));
            out.push('\n');
        } else {
            continue;
        }
        seen.push(code);
    }
    if matches!(kind, "LWPOLYLINE" | "SPLINE" | "LEADER") {
        let count = |code| seen.iter().filter(|&&c| c == code).count();
        if count(10) != count(20) {
            return Err(missing(record, 20));
        }
        if kind != "LWPOLYLINE" && count(30) > 0 && count(30) != count(10) {
            return Err(missing(record, 30));
        }
    }
    match groups.needed.iter().find(|code| !seen.contains(code)) {
        Some(&code) => Err(missing(record, code)),
        None => Ok(()),
    }
}

/// Control characters and carets as the crate takes them out again.
fn escape(out: &mut String, text: &str) {
    for c in text.chars() {
        match c {
            '^' => out.push_str("^ "),
            '\0'..='\x1f' => {
                out.push('^');
                out.push(char::from(c as u8 + b'@'));
            }
            c => out.push(c),
        }
    }
}

fn real(record: &Record, tag: &Tag<'_>) -> Result<f64, Refusal> {
    match tag.real() {
        Some(value) if value.abs() <= tolerance::GREATEST_NUMBER => Ok(value),
        Some(value) => Err(at(
            record,
            tag,
            "entity-number",
            format!("group {} of the {} is {value:e}, too great to be meant", tag.code, record.kind),
        )),
        None => Err(bad(record, tag, "number")),
    }
}

fn integer(record: &Record, tag: &Tag<'_>) -> Result<i64, Refusal> {
    // Some programs write whole numbers with a fraction of nothing.
    let value = tag.int().or_else(|| {
        tag.real()
            .filter(|v| v.fract().abs() < f64::EPSILON && v.abs() < 1e9)
            .and_then(|v| format!("{v:.0}").parse().ok())
    });
    value.ok_or_else(|| bad(record, tag, "whole number"))
}

fn bad(record: &Record, tag: &Tag<'_>, what: &str) -> Refusal {
    let shown: String = String::from_utf8_lossy(tag.trimmed()).chars().take(40).collect();
    at(
        record,
        tag,
        "entity-number",
        format!(
            "group {} of the {} is \"{}\", which is no {what}",
            tag.code,
            record.kind,
            shown.escape_debug()
        ),
    )
}

fn at(record: &Record, tag: &Tag<'_>, check: &str, message: String) -> Refusal {
    let mut refusal = Refusal::new(check, message, "Mend the value, or redraw the entity");
    // The value stands on the line below its code.
    refusal.line = tag.line.map(|line| line + 1);
    record.refuse(refusal)
}

fn missing(record: &Record, code: i32) -> Refusal {
    record.refuse(Refusal::new(
        "entity-incomplete",
        format!("the {} has no group {code}, without which its place is unknown", record.kind),
        "Redraw the entity, or let the CAD program check and repair the drawing",
    ))
}

fn misplaced(record: &Record, tag: &Tag<'_>) -> Refusal {
    at(
        record,
        tag,
        "entity-incomplete",
        format!("group {} of the {} stands before its first vertex", tag.code, record.kind),
    )
}
