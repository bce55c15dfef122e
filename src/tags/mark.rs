//! The edits that put marks into a drawing.

use crate::refusal::Refusal;
use crate::tags::APPLICATION;
use crate::tags::emit::Emit;
use crate::tags::facts::{MARKS_VERSION, escape_seed, strings};
use crate::tags::handles::Handles;
use crate::tags::marks::Marks;
use crate::tags::outline::{Anchor, Outline};
use crate::tags::place;
use crate::tags::plane::Frame;
use crate::tags::shapes::{Dialect, Entity, Pen, handles_for};
use crate::tags::sound;
use crate::tags::source::{Edit, Source};
use crate::tags::text;

/// The edits that add the marks to a drawing. The outline must be that of the source.
///
/// # Errors
/// Below R11/R12 (AC1009), which have no extended data; when the drawing is marked already, or has layers, line types
/// or blocks of the same names that are not ours; when the marks themselves are not sound (names, numbers, indices).
pub fn mark(source: &Source, outline: &Outline, marks: &Marks) -> Result<Vec<Edit>, Refusal> {
    sound::drawing(outline, marks)?;
    let frame = sound::marks(outline, marks)?;
    let mut made = Made::plan(outline, marks);
    let dialect = Dialect {
        rank: outline.rank,
        utf8: outline.rank >= 1021 && !read_otherwise(outline),
        application: marks.application.clone(),
        model_space: place::model_space(outline).map(str::to_owned),
    };
    let shapes = marks.marks.iter().map(|mark| handles_for(&mark.shape));
    let need = shapes.sum::<u64>() + (marks.layers.len() + marks.line_types.len() + 8) as u64;
    let mut handles = Handles::new(source, outline, need)?;
    let mut edits = Edits::new(outline);
    tables(outline, marks, &dialect, &mut handles, &mut made, &mut edits);
    entities(outline, marks, &dialect, &mut handles, &frame, &mut edits);
    seed(outline, &mut handles, &mut edits);
    Ok(edits.finish())
}

/// A drawing of R2007 or later whose names are no UTF-8: what is written then stays ASCII.
fn read_otherwise(outline: &Outline) -> bool {
    use crate::tags::outline::Note;
    outline.notes.iter().any(|note| matches!(note, Note::Text { .. }))
}

/// What has to be made before anything can be added to it.
struct Made {
    tables: Vec<(&'static str, Option<String>)>,
    application: bool,
    words: Vec<String>,
}

impl Made {
    fn plan(outline: &Outline, marks: &Marks) -> Self {
        let tables: Vec<_> = place::TABLES
            .into_iter()
            .filter(|name| *name != "LTYPE" || !marks.line_types.is_empty())
            .filter(|name| outline.table(name).is_none())
            .map(|name| (name, None))
            .collect();
        let application = !outline
            .tables
            .iter()
            .filter(|table| table.name == "APPID")
            .flat_map(|table| &table.records)
            .any(|record| record.layer.eq_ignore_ascii_case(APPLICATION));
        let mut words = Vec::new();
        if application {
            words.push("R:APPID".to_owned());
        }
        words.extend(tables.iter().map(|(name, _)| format!("T:{name}")));
        if place::new_tables(outline).1 && !tables.is_empty() {
            words.push("S:TABLES".to_owned());
        }
        if place::new_entities(outline).1 {
            words.push("S:ENTITIES".to_owned());
        }
        Self { tables, application, words }
    }

    fn handle(&self, name: &str) -> Option<Option<&str>> {
        let (_, handle) = self.tables.iter().find(|(n, _)| *n == name)?;
        Some(handle.as_deref())
    }
}

fn tables(
    outline: &Outline,
    marks: &Marks,
    dialect: &Dialect,
    handles: &mut Handles,
    made: &mut Made,
    edits: &mut Edits<'_>,
) {
    // Heads of tables have handles from R13 on.
    if dialect.rank >= 1012 {
        for (_, handle) in &mut made.tables {
            *handle = handles.take();
        }
    }
    let (new, section) = place::new_tables(outline);
    let mut fresh = edits.emit(new);
    if section && !made.tables.is_empty() {
        fresh.text(0, "SECTION");
        fresh.text(2, "TABLES");
    }
    for name in place::TABLES {
        let count = match name {
            "LTYPE" => marks.line_types.len(),
            "LAYER" => marks.layers.len(),
            _ => usize::from(made.application),
        };
        let table = outline.table(name);
        let own = match (made.handle(name), table) {
            (Some(handle), _) => handle.map(str::to_owned),
            (None, table) => table.and_then(|table| table.handle.clone()),
        };
        let owner = own.clone().filter(|_| names_owner(outline));
        let anchor = table.map_or(new, place::in_table);
        let mut pen = Pen { dialect, handles: &mut *handles, emit: edits.emit(anchor) };
        match name {
            "LTYPE" => line_types(outline, marks, owner.as_deref(), &mut pen),
            "LAYER" => layers(outline, marks, owner.as_deref(), made, &mut pen),
            _ if made.application => application(owner.as_deref(), &mut pen),
            _ => {}
        }
        let records = pen.emit.out;
        if made.handle(name).is_none() {
            edits.insert(anchor, records);
            continue;
        }
        fresh.text(0, "TABLE");
        fresh.text(2, name);
        if let Some(handle) = &own {
            fresh.text(5, handle);
            if dialect.rank >= 1014 {
                fresh.text(330, "0");
            }
        }
        if dialect.rank >= 1012 {
            fresh.text(100, "AcDbSymbolTable");
        }
        fresh.int(70, i64::try_from(count).unwrap_or(i64::MAX));
        fresh.out.extend_from_slice(&records);
        fresh.text(0, "ENDTAB");
    }
    if section && !made.tables.is_empty() {
        fresh.text(0, "ENDSEC");
    }
    edits.insert(new, fresh.out);
}

/// Whether table records name their table as owner: from R14 on; R13 drawings as their layer `0` has it.
fn names_owner(outline: &Outline) -> bool {
    match outline.rank {
        1014.. => true,
        1012.. => place::layer_zero(outline).is_some_and(|zero| zero.tags.first(330).is_some()),
        _ => false,
    }
}

fn application(owner: Option<&str>, pen: &mut Pen<'_>) {
    pen.record("APPID", owner);
    pen.marker("AcDbSymbolTableRecord");
    pen.marker("AcDbRegAppTableRecord");
    pen.emit.text(2, APPLICATION);
    pen.emit.int(70, 0);
}

fn line_types(outline: &Outline, marks: &Marks, owner: Option<&str>, pen: &mut Pen<'_>) {
    // Patterns are drawn times this scale; what is asked for is in drawing units.
    let scale = outline
        .header("$LTSCALE", 40)
        .and_then(|text| text.parse::<f64>().ok())
        .filter(|scale| scale.is_finite() && *scale > 0.0)
        .unwrap_or(1.0);
    for line_type in &marks.line_types {
        pen.record("LTYPE", owner);
        pen.marker("AcDbSymbolTableRecord");
        pen.marker("AcDbLinetypeTableRecord");
        pen.emit.text(2, &line_type.name);
        pen.emit.int(70, 0);
        let description = text::encode(&line_type.description, false).concat();
        pen.emit.text(3, description);
        pen.emit.int(72, 65);
        pen.emit.int(73, i64::try_from(line_type.pattern.len()).unwrap_or(i64::MAX));
        let total: f64 = line_type.pattern.iter().map(|x| x.abs()).sum();
        pen.emit.real(40, total / scale);
        for length in &line_type.pattern {
            pen.emit.real(49, length / scale);
            if pen.dialect.rank >= 1012 {
                pen.emit.int(74, 0);
            }
        }
        pen.extended(&[b"line-type".to_vec()]);
    }
}

fn layers(outline: &Outline, marks: &Marks, owner: Option<&str>, made: &Made, pen: &mut Pen<'_>) {
    let rank = pen.dialect.rank;
    let zero = place::layer_zero(outline);
    let copied = |code: i32| {
        let handle = zero?.tags.word(code)?;
        crate::tags::codes::parse_handle(handle.as_bytes())
            .filter(|handle| *handle != 0)
            .map(|_| handle.to_owned())
    };
    let mut facts = vec![format!("marks {MARKS_VERSION}").into_bytes()];
    if let Some(value) = outline.header_value("$HANDSEED", 5) {
        let old = match outline.handles.seed {
            Some(_) => value.value.trim_ascii(),
            None => &value.value,
        };
        facts.extend(strings("seed", &escape_seed(old)));
    }
    facts.push(format!("newline {}", added_newline(outline)).into_bytes());
    if !made.words.is_empty() {
        facts.extend(strings("made", &made.words.join(" ")));
    }
    for (key, value) in &marks.facts {
        facts.extend(strings(key, value));
    }
    for layer in &marks.layers {
        pen.record("LAYER", owner);
        pen.marker("AcDbSymbolTableRecord");
        pen.marker("AcDbLayerTableRecord");
        pen.emit.text(2, &layer.name);
        pen.emit.int(70, i64::from(layer.frozen));
        let colour = i64::from(layer.colour);
        pen.emit.int(62, if layer.off { -colour } else { colour });
        let line_type = layer.line_type.and_then(|i| marks.line_types.get(i));
        let continuous = if rank < 1015 { "CONTINUOUS" } else { "Continuous" };
        pen.emit.text(6, line_type.map_or(continuous, |l| &l.name));
        if rank >= 1015 {
            pen.emit.int(370, i64::from(layer.weight.unwrap_or(-3)));
            if let Some(style) = copied(390).or_else(|| outline.plot_style.clone()) {
                pen.emit.text(390, style);
            }
        }
        if rank >= 1021 {
            for code in [347, 348] {
                if let Some(handle) = copied(code) {
                    pen.emit.text(code, handle);
                }
            }
        }
        pen.extended(&facts);
    }
}

/// Bytes of the line end that has to be added at the end of the file: only when records go there.
fn added_newline(outline: &Outline) -> usize {
    let at_end = |(anchor, _): (Anchor, bool)| anchor.at == outline.end.at;
    let tables = place::TABLES.iter().filter_map(|name| outline.table(name));
    let needed = outline.unterminated
        && (at_end(place::new_tables(outline))
            || at_end(place::new_entities(outline))
            || tables.into_iter().any(|table| table.end.at == outline.end.at));
    match (needed, outline.end.crlf) {
        (false, _) => 0,
        (true, false) => 1,
        (true, true) => 2,
    }
}

fn entities(
    outline: &Outline,
    marks: &Marks,
    dialect: &Dialect,
    handles: &mut Handles,
    frame: &Frame,
    edits: &mut Edits<'_>,
) {
    let (anchor, section) = place::new_entities(outline);
    let mut pen = Pen { dialect, handles, emit: edits.emit(anchor) };
    if section {
        pen.emit.text(0, "SECTION");
        pen.emit.text(2, "ENTITIES");
    }
    for mark in &marks.marks {
        let entity = Entity {
            layer: &marks.layers[mark.layer].name,
            role: &mark.role,
            colour: mark.colour,
            line_type: mark.line_type.map(|i| marks.line_types[i].name.as_str()),
            width: mark.width.unwrap_or(0.0),
            frame,
        };
        pen.shape(&mark.shape, &entity);
    }
    if section {
        pen.emit.text(0, "ENDSEC");
    }
    let bytes = pen.emit.out;
    edits.insert(anchor, bytes);
}

/// Raises the handle seed; nothing else of it changes.
fn seed(outline: &Outline, handles: &mut Handles, edits: &mut Edits<'_>) {
    if !handles.any() {
        return;
    }
    let (Some(value), Some(next)) = (outline.header_value("$HANDSEED", 5), handles.free()) else {
        return;
    };
    let range = match outline.handles.seed {
        Some(old) if old >= next => return,
        Some(_) => {
            let digits = value.value.trim_ascii();
            let before = value.value.len() - value.value.trim_ascii_start().len();
            let start = value.range.start + before as u64;
            start..start + digits.len() as u64
        }
        None => value.range.clone(),
    };
    edits.list.push(Edit {
        at: range.start,
        remove: range.end - range.start,
        insert: format!("{next:X}").into_bytes(),
    });
}

/// The edits while they are gathered.
struct Edits<'a> {
    outline: &'a Outline,
    list: Vec<Edit>,
}

impl<'a> Edits<'a> {
    fn new(outline: &'a Outline) -> Self {
        Self { outline, list: Vec::new() }
    }

    fn emit(&self, anchor: Anchor) -> Emit {
        Emit::new(self.outline.form, anchor.crlf)
    }

    fn insert(&mut self, anchor: Anchor, insert: Vec<u8>) {
        if !insert.is_empty() {
            self.list.push(Edit { at: anchor.at, remove: 0, insert });
        }
    }

    /// In order, one edit for each place; a line end goes before what is appended to a file that has none.
    fn finish(mut self) -> Vec<Edit> {
        // The sort is stable: what was inserted first at a place stays first.
        self.list.sort_by_key(|edit| edit.at);
        let mut out: Vec<Edit> = Vec::with_capacity(self.list.len());
        for edit in self.list {
            match out.last_mut() {
                Some(last) if last.at == edit.at && last.remove == 0 && edit.remove == 0 => {
                    last.insert.extend_from_slice(&edit.insert);
                }
                _ => out.push(edit),
            }
        }
        if self.outline.unterminated
            && let Some(last) = out.last_mut()
            && last.at == self.outline.end.at
            && last.remove == 0
        {
            let mut emit = Emit::new(self.outline.form, self.outline.end.crlf);
            emit.newline();
            last.insert.splice(0..0, emit.out);
        }
        out
    }
}
