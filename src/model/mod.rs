//! From what was read to what is computed: spans with their axes and loads, in metres and kilonewtons.
//!
//! Knows layers only as names of load sets; knows no mechanics.

pub mod areas;
pub mod backing;
pub mod cases;
pub mod chain;
pub mod dimensions;
pub mod drawn;
pub mod extended;
pub mod figures;
pub mod heads;
pub mod labels;
pub mod line_loads;
pub mod loads;
pub mod marks;
pub mod matching;
pub mod middle;
pub mod noise;
pub mod note;
pub mod outline;
pub mod pieces;
pub mod piers;
mod plan;
mod posts;
pub mod ring;
pub mod roof;
pub mod traffic;
pub mod weight;

use crate::drawing::outlines::Outlines;
use crate::drawing::{Drawing, Source};
use crate::geometry::{Path, Point, Vec2};
use crate::job::{RibDepth, Settings};
use crate::refusal::Refusal;
use crate::tolerance;

pub use cases::Case;
pub use drawn::Drawn;
pub use line_loads::LineLoad;
pub use loads::LoadSettings;
pub use marks::Sense;
pub use note::Note;
pub use ring::Ring;

/// Everything that is computed of one drawing.
#[derive(Debug, Clone, PartialEq)]
pub struct Model {
    /// The spans, left to right.
    pub spans: Vec<Span>,
    /// What forces are given in.
    pub forces: Forces,
    /// The road line in its pieces, left to right, m.
    pub road: Vec<Path>,
    /// Loads that stand over no span.
    pub off_span: Vec<Load>,
    /// Drawn dimensions of span, rise and depth.
    pub dimensions: Vec<dimensions::Measured>,
    /// What else weighs on the spans, in the order of the job; put in by [`areas::weigh`].
    pub areas: Vec<areas::Weighed>,
    /// The outlines of the areas as drawn, in the order of the job, drawing units, and a drawing unit in m.
    pub outlines: (Vec<Outlines>, f64),
    /// What was noticed.
    pub notes: Vec<Note>,
}

impl Model {
    /// The place of a span by its name; behind all others when there is none.
    pub fn place_of(&self, span: &str) -> usize {
        self.spans.iter().position(|s| s.name == span).unwrap_or(self.spans.len())
    }

    /// Weight of the rib per area of the elevation, kN/m²: unit weight times width. `None` where it is not given, or
    /// forces are multiples of an unknown load.
    pub fn own_weight(&self, settings: &Settings) -> Option<f64> {
        if self.forces == Forces::UnitLoads {
            return None;
        }
        let weight = settings.rib.unit_weight.filter(|w| *w > 0.0)?;
        Some(weight * settings.rib.width?)
    }
}

/// What forces are given in.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Forces {
    /// Kilonewtons.
    Kilonewtons,
    /// Multiples of one unknown load, because no load has a figure.
    UnitLoads,
}

/// One span.
#[derive(Debug, Clone, PartialEq)]
pub struct Span {
    /// `span 1` … from the left.
    pub name: String,
    /// Its axis from the left springing to the right one, m, in the drawing's origin.
    pub axis: Path,
    /// The entities of the axis, left to right; of the ring lines where the axis runs midway between them.
    pub sources: Vec<Source>,
    /// Its ring, where its lines are drawn.
    pub ring: Option<Ring>,
    /// Its drawn hinges, left to right, m.
    pub hinges: Vec<Point>,
    /// Its loads, left to right.
    pub loads: Vec<Load>,
    /// Its line loads, left to right.
    pub line_loads: Vec<LineLoad>,
}

/// One load.
#[derive(Debug, Clone, PartialEq)]
pub struct Load {
    /// Its name in the drawing (`P3`), or its number from the left within its span.
    pub label: String,
    /// Where it acts, m, in the drawing's origin.
    pub at: Point,
    /// Components to the right and upward, kN or unit loads.
    pub force: Vec2,
    /// Its set: the layer it stands on.
    pub set: String,
    /// The entity.
    pub source: Source,
    /// Where its magnitude came from.
    pub magnitude_from: MagnitudeFrom,
    /// The text it was read from.
    pub text: Option<String>,
    /// The application whose extended data say how large it is.
    pub application: Option<String>,
    /// What tells its sense.
    pub sense: Sense,
    /// The post that it comes down.
    pub post: Option<Source>,
    /// How far it stands to the left of the plane of the rib, looking in the direction of x, m; `None` where no roadway is drawn
    /// in plan.
    pub sideways: Option<f64>,
}

/// Where the magnitude of a load came from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum MagnitudeFrom {
    /// A TEXT or MTEXT beside it.
    Label,
    /// An attribute of its INSERT.
    Attribute,
    /// The extended data of its entity.
    ExtendedData,
    /// The length of its arrow by the force scale of the job.
    ArrowLength,
    /// `[loads] unlabelled` of the job.
    Job,
    /// No figures anywhere: all loads are equal.
    Equal,
}

/// Builds the model of a drawing.
///
/// Loads drawn as a point act straight down (a negative figure: straight up), those drawn as an arrow along it. They belong to
/// the span over which they act; a load over the common springing of two spans belongs to the left one.
///
/// # Errors
/// When the axis cannot be told ([`chain::chains`]) or the loads cannot ([`loads::loads`]).
pub fn build(drawing: &Drawing, settings: &LoadSettings) -> Result<Model, Refusal> {
    let metres = drawing.unit.metres;
    let mut notes = Vec::new();
    let mut spans = spans(drawing, &mut notes)?;
    hinges(drawing, &mut spans, settings.depth, &mut notes);
    let road = traffic::road(&drawing.road, metres, &mut notes)?;
    let on_layers =
        loads::OnLayers { points: &drawing.points, strokes: &drawing.strokes, texts: &drawing.texts };
    let distance = |p: Point| {
        let p = (p.to_vec2() * metres).to_point();
        spans.iter().map(|s| s.axis.nearest(p).1).fold(f64::INFINITY, f64::min)
    };
    let loads::Loaded { mut loads, lines, forces } =
        loads::loads(on_layers, settings, metres, &distance, &mut notes)?;
    posts::carry(&mut loads, &lines, &drawing.posts, &spans, settings.depth, metres, &mut notes);
    let off_span = share_out(loads, &mut spans);
    notes.extend(off_span.iter().map(|load| Note::OffSpan {
        source: load.source.clone(),
        label: load.label.clone(),
        at: load.at,
        force: if load.force.x.abs() > 0.0 { load.force.hypot() } else { -load.force.y },
    }));
    let reach: Vec<(f64, f64)> = spans.iter().map(|s| chain::across(&s.axis)).collect();
    for (span, lines) in spans.iter_mut().zip(line_loads::share_out(&lines, &reach, &mut notes)) {
        span.line_loads = lines;
    }
    plan::sideways(&mut spans, &drawing.plan, drawing.plan_of_rib.map(|y| y * metres), metres, &mut notes);
    let (dimensions, by_hand) = dimensions::measured(&drawing.dimensions, &spans, settings.depth, metres);
    if !by_hand.is_empty() {
        notes.push(Note::Drawn(Drawn::TextsByHand { sources: by_hand }));
    }
    let bare = |s: &&Span| s.loads.is_empty() && s.line_loads.is_empty() && !settings.weighs;
    notes.extend(spans.iter().filter(bare).map(|s| Note::NoLoads { span: s.name.clone() }));
    Ok(Model {
        spans,
        forces,
        road,
        off_span,
        areas: Vec::new(),
        outlines: (drawing.areas.clone(), metres),
        dimensions,
        notes,
    })
}

/// Gives each drawn hinge to the span on whose rib it stands: within half the depth (`stated`, m, where no ring is drawn)
/// of the axis, or within the reach of a gap where no depth is known.
fn hinges(drawing: &Drawing, spans: &mut [Span], stated: Option<RibDepth>, notes: &mut Vec<Note>) {
    let mut points: Vec<_> = drawing
        .hinges
        .iter()
        .map(|h| ((h.at.to_vec2() * drawing.unit.metres).to_point(), &h.source))
        .collect();
    points.sort_by(|a, b| a.0.x.total_cmp(&b.0.x).then(a.0.y.total_cmp(&b.0.y)));
    for (at, source) in points {
        let owner = spans.iter_mut().find_map(|span| {
            let (s, distance) = span.axis.nearest(at);
            let slack = span.axis.length() * tolerance::GAP;
            let half = weight::depths(span, stated).map_or(0.0, |d| weight::depth_at(&d, s) / 2.0);
            (distance <= half + slack).then_some(span)
        });
        match owner {
            Some(span) => {
                notes.push(Note::HingeRead { span: span.name.clone(), source: source.clone(), at });
                span.hinges.push(at);
            }
            None => notes.push(Note::HingeOff { source: source.clone(), at }),
        }
    }
}

/// The spans with their axes and rings, without loads.
fn spans(drawing: &Drawing, notes: &mut Vec<Note>) -> Result<Vec<Span>, Refusal> {
    let metres = drawing.unit.metres;
    let mut rings = ring::lines(&drawing.intrados, &drawing.extrados, metres, notes)?;
    let mut spans = Vec::new();
    if drawing.axis.is_empty() && !rings.is_empty() {
        for (i, lines) in rings.into_iter().enumerate() {
            let name = format!("span {}", i + 1);
            let (axis, ring) = lines.midway(&name, notes)?;
            spans.push(Span {
                name,
                axis,
                sources: ring.sources.clone(),
                ring: Some(ring),
                hinges: Vec::new(),
                loads: Vec::new(),
                line_loads: Vec::new(),
            });
        }
    } else {
        let chains = chain::chains(&drawing.axis)?;
        notes.extend(chains.doubles.into_iter().map(|(source, kept)| Note::DrawnTwice { source, kept }));
        notes.extend(chains.lengthless.into_iter().map(|source| Note::NoLength { source }));
        if !rings.is_empty() && rings.len() != chains.chains.len() {
            let source = drawing.intrados.first().map(|c| c.source.clone()).unwrap_or_default();
            return Err(source.refuse(
                "ring-spans",
                format!("the axis has {} spans and the ring {}", chains.chains.len(), rings.len()),
                "Draw axis and both ring lines for every span, or leave the axis out: it is then found midway",
            ));
        }
        for (i, chain) in chains.chains.into_iter().enumerate() {
            let name = format!("span {}", i + 1);
            for gap in &chain.gaps {
                notes.push(Note::GapClosed {
                    line: "axis",
                    span: name.clone(),
                    size: gap.size * metres,
                    at: (gap.at.to_vec2() * metres).to_point(),
                });
            }
            let axis = chain.path.shifted_scaled(Vec2::ZERO, metres);
            let ring = match rings.is_empty() {
                true => None,
                false => Some(rings.remove(0).about(&name, &axis, notes)?),
            };
            spans.push(Span {
                name,
                axis,
                sources: chain.sources,
                ring,
                hinges: Vec::new(),
                loads: Vec::new(),
                line_loads: Vec::new(),
            });
        }
    }
    for span in &spans {
        let size = span.axis.end().x - span.axis.start().x;
        if !(tolerance::LEAST_SPAN..=tolerance::GREATEST_SPAN).contains(&size) {
            notes.push(Note::SizeUnlikely { span: span.name.clone(), size });
        }
    }
    Ok(spans)
}

/// Gives each load to its span, in order from the left, and numbers those without a name; gives back the rest.
fn share_out(mut loads: Vec<Load>, spans: &mut [Span]) -> Vec<Load> {
    loads.sort_by(|a, b| a.at.x.total_cmp(&b.at.x).then(b.at.y.total_cmp(&a.at.y)));
    let reach: Vec<(f64, f64)> = spans
        .iter()
        .map(|s| {
            let (left, right) = chain::across(&s.axis);
            let slack = (right - left) * tolerance::ENDS_MEET;
            (left - slack, right + slack)
        })
        .collect();
    let mut off = Vec::new();
    for load in loads {
        match reach.iter().position(|r| r.0 <= load.at.x && load.at.x <= r.1) {
            Some(span) => spans[span].loads.push(load),
            None => off.push(load),
        }
    }
    for loads in spans.iter_mut().map(|s| &mut s.loads).chain([&mut off]) {
        for (i, load) in loads.iter_mut().enumerate() {
            if load.label.is_empty() {
                load.label = (i + 1).to_string();
            }
        }
    }
    off
}

/// Angle from one direction to another, radians, counter-clockwise positive.
pub(crate) fn turn(from: Vec2, to: Vec2) -> f64 {
    from.cross(to).atan2(from.dot(to))
}

#[cfg(test)]
mod tests;
