//! What a drawing holds, before anything is computed.

use std::collections::BTreeMap;
use std::path::Path;

use super::{Plain, settings_for};
use crate::drawing::viewport::{self, Shown};
use crate::drawing::{self, Suggestion};
use crate::job::Job;
use crate::model::{self, Forces, MagnitudeFrom, Model, Sense};
use crate::refusal::Refusal;
use crate::tags::marks::Plane;
use crate::tags::{Outline, fold};

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
    /// Layouts' viewports that look square onto the elevation (onto the x-y plane where none could be read): paper units per
    /// drawing unit, and how much of the axis each shows, around which the marks are drawn.
    pub viewports: Vec<(f64, Option<Shown>)>,
    /// Layers that could serve as axis or loads.
    pub suggestions: Vec<Suggestion>,
    /// What a check would take: the axis layers and the load layers; or why it would refuse.
    pub taken: Result<(Vec<String>, Vec<String>), Refusal>,
    /// What every load of the drawing would be taken for, or why a check would refuse them; `None` where the layers already are.
    pub loads: Option<Result<Vec<LoadLine>, Refusal>>,
}

/// One load as a check would take it.
#[derive(Debug, Clone, PartialEq)]
pub struct LoadLine {
    /// Its name.
    pub label: String,
    /// Its entity, such as `LINE 2F`.
    pub entity: String,
    /// Its layer.
    pub layer: String,
    /// Where it acts, m; of a line load the left end.
    pub at: [f64; 2],
    /// Of a line load the right end, m.
    pub to: Option<[f64; 2]>,
    /// Its components to the right and upward, kN or unit loads; of a line load per metre of plan.
    pub force: [f64; 2],
    /// Whether it is in kN.
    pub in_kn: bool,
    /// Where its size comes from.
    pub from: String,
    /// What tells its sense, where it is drawn as a line.
    pub sense: Option<&'static str>,
    /// The span over which it stands.
    pub span: Option<String>,
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
    let settings = settings_for(path, job)?;
    let Plain { source, outline, marks, .. } = Plain::open(path, &settings, false)?;
    let outline = outline.map_or_else(|| drawing::scan(&source, &settings), Ok)?;
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
    let read = drawing::read_outlined(&source, &outline, &settings);
    let viewports = match &read {
        Ok(drawing) => {
            let (low, high) = drawing.axis_box();
            drawing.viewports.iter().map(|v| (v.scale, Some(v.shows(low, high)))).collect()
        }
        Err(_) => {
            let all = outline.records.iter().filter_map(|r| viewport::viewport(r, &Plane::XY));
            all.map(|v| (v.scale, None)).collect()
        }
    };
    let loads = read.as_ref().ok().map(|d| model::build(d, &(&settings).into()).map(|m| load_lines(&m)));
    let taken = read.map(|d| (d.axis_layers, d.load_layers));
    Ok(Listing {
        file: path.display().to_string(),
        version: outline.version.clone(),
        form: outline.form.name().into(),
        encoding: outline.encoding().into(),
        units,
        extents,
        marked: marks.is_some(),
        layers: layers(&outline),
        viewports,
        suggestions: drawing::suggest(&source, &outline, &settings)?,
        taken,
        loads,
    })
}

/// The loads of a model, span by span, then those over none.
fn load_lines(model: &Model) -> Vec<LoadLine> {
    let in_kn = model.forces == Forces::Kilonewtons;
    let line = |load: &model::Load, span: Option<&str>| LoadLine {
        label: load.label.clone(),
        entity: load.source.named(),
        layer: load.set.clone(),
        at: [load.at.x, load.at.y],
        to: None,
        force: [load.force.x, load.force.y],
        in_kn,
        from: size_from(load),
        sense: match load.sense {
            Sense::Point => None,
            Sense::Head => Some("sense from its arrowhead"),
            Sense::Down => Some("taken to act downward: within 30° of the vertical, no arrowhead"),
            Sense::Rib => Some("taken to act toward the rib: more than 30° from the vertical, no arrowhead"),
        },
        span: span.map(str::to_owned),
    };
    let mut lines = Vec::new();
    for span in &model.spans {
        lines.extend(span.loads.iter().map(|l| line(l, Some(&span.name))));
        lines.extend(span.line_loads.iter().map(|l| LoadLine {
            label: l.label.clone(),
            entity: l.source.named(),
            layer: l.set.clone(),
            at: [l.from.x, l.from.y],
            to: Some([l.to.x, l.to.y]),
            force: [0.0, -l.down],
            in_kn: true,
            from: format!("its label \"{}\", a force per length", l.text),
            sense: None,
            span: Some(span.name.clone()),
        }));
    }
    lines.extend(model.off_span.iter().map(|l| line(l, None)));
    lines
}

/// Where the size of a load comes from, in words.
fn size_from(load: &model::Load) -> String {
    let text = load.text.as_deref().unwrap_or_default();
    let mut words = match load.magnitude_from {
        MagnitudeFrom::Label => format!("its label \"{text}\""),
        MagnitudeFrom::Attribute => format!("its attribute \"{text}\""),
        MagnitudeFrom::ExtendedData => {
            format!("its extended data \"{text}\" of {}", load.application.as_deref().unwrap_or_default())
        }
        MagnitudeFrom::ArrowLength => "the length of its arrow by [loads] arrow_scale".into(),
        MagnitudeFrom::Job => "[loads] unlabelled: it has no figure".into(),
        MagnitudeFrom::Equal => "no load has a figure: all are taken as equal".into(),
    };
    if let Some(post) = &load.post {
        words.push_str(&format!("; it stands on the post {} and acts down it", post.named()));
    }
    words
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
