//! The end of a scan: what was noted on the way becomes the outline.

use crate::refusal::Refusal;
use crate::tags::codes::parse_handle;
use crate::tags::machine::Machine;
use crate::tags::outline::{Anchor, HeaderVariable, Layer, Newline, Note, Outline, Table};
use crate::tags::text::Decoder;
use crate::tags::tokens::{Form, Stream};
use crate::tags::unmark;

/// The latest version known here.
const LATEST: u32 = 1032;

fn variable<'a>(header: &'a [HeaderVariable], name: &str) -> Option<&'a str> {
    let value = header.iter().find(|v| v.name == name)?.values.first()?;
    std::str::from_utf8(value.value.trim_ascii()).ok()
}

/// The number in a version such as AC1024; a drawing with none counts as R12, an older scheme as 0.
fn rank(version: Option<&str>) -> u32 {
    version.map_or(1009, |version| {
        let digits = version.get(2..).filter(|_| version.to_ascii_uppercase().starts_with("AC"));
        digits.and_then(|digits| digits.parse().ok()).unwrap_or(0)
    })
}

/// The decoder for a drawing with this header.
pub(super) fn decoder(header: &[HeaderVariable], utf8_mark: bool) -> Decoder {
    Decoder::new(rank(variable(header, "$ACADVER")), variable(header, "$DWGCODEPAGE"), utf8_mark)
}

/// The outline of a drawing from what the scan noted.
pub(super) fn outline(mut machine: Machine<'_>, stream: Stream) -> Result<Outline, Refusal> {
    if machine.sections.is_empty() {
        return Err(Refusal::new(
            "no-sections",
            "the file holds no section, so it is no drawing",
            "Name a whole DXF drawing",
        ));
    }
    let decoder = decoder(&machine.header, machine.utf8_mark);
    let version = variable(&machine.header, "$ACADVER").map(str::to_owned);
    let rank = rank(version.as_deref());
    let notes = notes(&machine, &stream, version.as_deref(), rank, &decoder);
    machine.handles.seed = machine
        .header
        .iter()
        .find(|v| v.name == "$HANDSEED")
        .and_then(|v| parse_handle(&v.values.iter().find(|v| v.code == 5)?.value));
    let layers = machine.tables.iter().filter(|table| table.name == "LAYER").flat_map(layers_of).collect();
    let marks = unmark::gather(&machine, &decoder);
    let plot_style = machine.plot_styles.and_then(|dictionary| {
        let normal = machine.normals.iter().find(|normal| normal.0 == dictionary)?;
        Some(normal.1.clone())
    });
    let (at, crlf) = match &stream.eof {
        Some(place) => (place.start, place.after_crlf),
        None => (stream.tags_end, stream.last_crlf),
    };
    Ok(Outline {
        form: stream.form,
        version,
        rank,
        newline: match (stream.form, stream.line_ends) {
            (Form::Binary { .. }, _) => Newline::None,
            (_, [false, _]) => Newline::Lf,
            (_, [_, false]) => Newline::CrLf,
            _ => Newline::Mixed,
        },
        header: machine.header,
        decoder,
        sections: machine.sections,
        tables: machine.tables,
        layers,
        blocks: machine.blocks,
        records: machine.records,
        census: machine.census.by_layer(),
        handles: machine.handles,
        marks,
        len: stream.len,
        sha256: None,
        notes,
        end: Anchor { at, crlf },
        unterminated: stream.unterminated && stream.eof.is_none(),
        model_owner: machine.model_owner,
        plot_style,
    })
}

fn layers_of(table: &Table) -> impl Iterator<Item = Layer> + '_ {
    table.records.iter().map(|record| {
        let int = |code| record.tags.first(code).and_then(|tag| tag.int());
        let flags = int(70).unwrap_or(0);
        let colour = int(62).unwrap_or(7);
        Layer {
            name: record.layer.clone(),
            frozen: flags & 1 != 0,
            off: colour < 0,
            locked: flags & 4 != 0,
            colour: colour.saturating_abs(),
            line_type: record.tags.word(6).map(str::to_owned),
            handle: record.handle.clone(),
            line: record.line,
            ours: record.ours,
        }
    })
}

fn notes(
    machine: &Machine<'_>,
    stream: &Stream,
    version: Option<&str>,
    rank: u32,
    decoder: &Decoder,
) -> Vec<Note> {
    let mut notes = Vec::new();
    match version {
        None => notes.push(Note::NoVersion),
        Some(version) if rank > LATEST => notes.push(Note::LaterVersion(version.to_owned())),
        Some(_) => {}
    }
    if !decoder.page_known() && !decoder.is_utf8() {
        let page = variable(&machine.header, "$DWGCODEPAGE").unwrap_or_default();
        notes.push(Note::UnknownCodePage(page.to_owned()));
    }
    notes.extend(machine.doubts.iter().cloned());
    for section in machine.sections.iter().filter(|section| !section.closed) {
        notes.push(Note::SectionNotClosed(section.name.clone()));
    }
    for table in machine.tables.iter().filter(|table| !table.closed) {
        notes.push(Note::TableNotClosed(table.name.clone()));
    }
    match &stream.eof {
        None => notes.push(Note::NoEndOfFile),
        Some(place) => {
            // One line end may be all that follows.
            let behind = stream.len - place.end;
            if behind > 0 {
                notes.push(Note::BehindEndOfFile(behind));
            }
        }
    }
    notes
}
