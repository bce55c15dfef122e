//! Where in a drawing new table records, tables, sections and entities go.

use crate::tags::outline::{Anchor, Outline, Table};

/// The tables that may have to be made, in the order in which they stand.
pub(super) const TABLES: [&str; 3] = ["LTYPE", "LAYER", "APPID"];

/// The handle of model space, as entities name their owner.
pub(super) fn model_space(outline: &Outline) -> Option<&str> {
    let is_model =
        |name: &str| name.eq_ignore_ascii_case("*Model_Space") || name.eq_ignore_ascii_case("$Model_Space");
    let record = outline
        .table("BLOCK_RECORD")
        .and_then(|table| table.records.iter().find(|record| is_model(&record.layer)));
    record
        .and_then(|record| record.handle.as_deref())
        .or_else(|| {
            let block = outline.blocks.iter().find(|block| is_model(&block.name))?;
            block.owner.as_deref()
        })
        .or(outline.model_owner.as_deref())
}

/// The record that new layers copy what they do not choose from: layer `0`, else the first.
pub(super) fn layer_zero(outline: &Outline) -> Option<&crate::tags::record::Record> {
    let table = outline.table("LAYER")?;
    table.records.iter().find(|record| record.layer == "0").or(table.records.first())
}

/// Before the end of a table.
pub(super) fn in_table(table: &Table) -> Anchor {
    table.end
}

/// Where new tables go, and whether a TABLES section must be made for them.
pub(super) fn new_tables(outline: &Outline) -> (Anchor, bool) {
    match outline.section("TABLES") {
        Some(section) => (section.end, false),
        None => (before(outline, &["BLOCKS", "ENTITIES", "OBJECTS"]), true),
    }
}

/// Where new entities go, and whether an ENTITIES section must be made for them.
pub(super) fn new_entities(outline: &Outline) -> (Anchor, bool) {
    match outline.section("ENTITIES") {
        Some(section) => (section.end, false),
        None => (before(outline, &["OBJECTS", "THUMBNAILIMAGE"]), true),
    }
}

/// Before the first section of one of these names, else before the end of the file.
fn before(outline: &Outline, names: &[&str]) -> Anchor {
    names.iter().find_map(|name| outline.section(name)).map_or(outline.end, |section| section.start)
}
