//! What a drawing holds, before anything is computed.

use std::collections::BTreeMap;
use std::path::Path;

use super::{job_for, without_marks};
use crate::drawing::{self, Candidate, Role};
use crate::job::{Job, Settings};
use crate::refusal::Refusal;
use crate::tags::{self, Source};

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
    /// Layers that could serve, with the reason, the likeliest first.
    pub candidates: Vec<(Role, String, String)>,
    /// Why no axis could be told, when none could.
    pub no_axis: Option<Refusal>,
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
        Some(job) => job.for_sheet(path)?,
        None => Settings::default(),
    };
    let (source, outline, marked) = without_marks(Source::open(path)?, &settings)?;
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
    let (candidates, no_axis) = match drawing::read_outlined(&source, &outline, &settings) {
        Ok(read) => (candidates(&read), None),
        Err(refusal) => (Vec::new(), Some(refusal)),
    };
    Ok(Listing {
        file: path.display().to_string(),
        version: outline.version.clone(),
        form: outline.form.name().into(),
        encoding: outline.encoding().into(),
        units,
        extents,
        marked,
        layers: layers(&outline),
        viewports: drawing::viewport::viewports(&source)?.iter().map(|v| v.scale).collect(),
        candidates,
        no_axis,
    })
}
