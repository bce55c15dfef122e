//! External references: parts of a drawing that stand in other files, which are never read.

use super::names;
use crate::job::{Role as JobRole, Settings};
use crate::refusal::Refusal;
use crate::tags::{Block, Outline, fold};

/// Flags of a block that is an external reference, or one laid under.
const EXTERNAL: i64 = 4 | 8;

/// A refusal for want of an axis or of loads, with what the drawing's external references have to do with it.
pub fn explained(refusal: Refusal, outline: &Outline, settings: &Settings) -> Refusal {
    if !matches!(refusal.check.as_str(), "layer-missing" | "layer-elsewhere" | "layer-empty" | "no-axis") {
        return refusal;
    }
    let external: Vec<&Block> = outline.blocks.iter().filter(|b| b.flags & EXTERNAL != 0).collect();
    let holder = external.iter().find_map(|block| {
        let layer = outline.layers.iter().find(|l| {
            // Layers of a reference carry its name before a bar.
            l.name
                .split_once('|')
                .is_some_and(|(of, name)| fold(of) == fold(&block.name) && is_axis(settings, name))
        })?;
        Some((*block, layer.name.clone()))
    });
    if let Some((block, layer)) = holder {
        let mut told = Refusal::new(
            "axis-in-reference",
            format!(
                "the axis stands in another drawing: layer {layer} belongs to the external reference {}{}, whose entities are \
                 not in this file",
                block.name,
                path_of(block)
            ),
            "Bind the reference into this drawing, or run on the drawing that it refers to",
        )
        .on_layer(layer);
        told.line = block.line;
        return told.at_handle(block.handle.clone());
    }
    match external[..] {
        [] => refusal,
        [first, ..] => {
            let mut refusal = refusal;
            refusal.message = format!(
                "{}; what stands in its {} external references is not in this file (the first is {}{})",
                refusal.message,
                external.len(),
                first.name,
                path_of(first)
            );
            refusal
        }
    }
}

fn is_axis(settings: &Settings, layer: &str) -> bool {
    match settings.layers.role_of(layer) {
        Ok(Some(role)) => role == JobRole::Axis,
        Ok(None) => !settings.states("layers.axis") && names::axis_word(layer).is_some(),
        Err(_) => false,
    }
}

fn path_of(block: &Block) -> String {
    block.path.as_ref().map_or_else(String::new, |path| format!(" (\u{201c}{path}\u{201d})"))
}
