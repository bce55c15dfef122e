//! What a drawing holds, before anything is computed.

use std::collections::BTreeMap;
use std::path::Path;

use super::{job_for, without_marks};
use crate::drawing::{self, Suggestion, viewport};
use crate::job::{Job, Settings};
use crate::refusal::Refusal;
use crate::tags::{Outline, Source, fold};

/// A drawing at a glance.
#[derive(Debug, Clone, PartialEq)]
pub struct Listing {
    /// As named.
    pub file: String,
    /// `$ACADVER`.
    pub version: Option<String>,
    /// `ascii` or `binary`.
    pub form: String,
    /// Text encoding.
    pub encoding: String,
    /// What `$INSUNITS` and `$MEASUREMENT` say, as they are spelled.
    pub units: Vec<(String, String)>,
    /// `$EXTMIN` and `$EXTMAX`, as they are spelled.
    pub extents: Option<[String; 4]>,
    /// Whether it carries our marks.
    pub marked: bool,
    /// Its layers, in the order of the drawing.
    pub layers: Vec<LayerLine>,
    /// Layouts' viewports: paper units per drawing unit.
    pub viewports: Vec<f64>,
    /// Layers that could serve as axis or loads.
    pub suggestions: Vec<Suggestion>,
    /// What a check would take: the axis layers and the load layers; or why it would refuse.
    pub taken: Result<(Vec<String>, Vec<String>), Refusal>,
}

/// One layer.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct LayerLine {
    /// Its name.
    pub name: String,
    /// `frozen`, `off`, `locked`, as they apply.
    pub state: Vec<&'static str>,
    /// Entities in model space by type.
    pub model: BTreeMap<String, u64>,
    /// Entities in paper space by type.
    pub paper: BTreeMap<String, u64>,
    /// Entities in blocks by type.
    pub blocks: BTreeMap<String, u64>,
}

/// Looks at a drawing.
///
/// # Errors
/// When it cannot be read as a drawing, or the job file is wrong.
pub fn list(path: &Path, job: Option<&Job>) -> Result<Listing, Refusal> {
    let settings = match job_for(path, job)? {
        Some(job) => job.for_sheet(&super::source_name(path))?,
        None => Settings::default(),
    };
    let (source, outline, marks, _) = without_marks(Source::open(path)?, &settings, false)?;
    let spelled = |name: &str, code| outline.header(name, code).map(str::to_string);
    let units = ["$INSUNITS", "$MEASUREMENT"]
        .into_iter()
        .filter_map(|name| Some((name.to_string(), spelled(name, 70)?)))
        .collect();
    let extents = (|| {
        Some([
            spelled("$EXTMIN", 10)?,
            spelled("$EXTMIN", 20)?,
            spelled("$EXTMAX", 10)?,
            spelled("$EXTMAX", 20)?,
        ])
    })();
    let taken = drawing::read_outlined(&source, &outline, &settings).map(|d| (d.axis_layers, d.load_layers));
    Ok(Listing {
        file: path.display().to_string(),
        version: outline.version.clone(),
        form: outline.form.name().into(),
        encoding: outline.encoding().into(),
        units,
        extents,
        marked: marks.is_some(),
        layers: layers(&outline),
        viewports: outline.records.iter().filter_map(viewport::viewport).map(|v| v.scale).collect(),
        suggestions: drawing::suggest(&source, &outline, &settings)?,
        taken,
    })
}

/// The layers of the table in its order, then those that only entities name.
fn layers(outline: &Outline) -> Vec<LayerLine> {
    let census = |name: &str| outline.census.iter().find(|c| fold(&c.name) == fold(name));
    let line = |name: &str, state: Vec<&'static str>| {
        let counts = census(name).cloned().unwrap_or_default();
        LayerLine {
            name: name.into(),
            state,
            model: counts.model,
            paper: counts.paper,
            blocks: counts.blocks,
        }
    };
    let mut out: Vec<LayerLine> = outline
        .layers
        .iter()
        .map(|layer| {
            let states = [(layer.frozen, "frozen"), (layer.off, "off"), (layer.locked, "locked")];
            line(&layer.name, states.into_iter().filter(|s| s.0).map(|s| s.1).collect())
        })
        .collect();
    for counts in outline.census.iter().filter(|c| outline.layer(&c.name).is_none()) {
        out.push(line(&counts.name, vec!["not in the table"]));
    }
    out
}
