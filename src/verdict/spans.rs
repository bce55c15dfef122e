//! A span and its analysis as the results hold them.

use std::collections::BTreeMap;

use super::Extra;
use crate::geometry::{Path, Point, Segment};
use crate::job::Settings;
use crate::model::{self, Forces, Model, cases, weight};
use crate::outcome::{
    self, Axis, Case, End, Hinge, Line, LineKind, Load, Offset, Pole, Proof, Ring, Safety, Span, Station,
    Status, Xy,
};
use crate::statics::{self, Analysis, HingeSide, Rule, SpanKind, Support, stress};
use crate::tolerance;
use crate::units::KN_PER_M2;

/// Puts a span together.
pub fn span(
    model: &Model,
    span: &model::Span,
    cases: &[model::Case],
    (analyses, extras): (&Vec<Analysis>, &Vec<Extra>),
    settings: &Settings,
) -> Span {
    let axis = &span.axis;
    let first = &analyses[0];
    let listed = listed(model, span, first, settings);
    let ring = ring(span, settings);
    Span {
        name: span.name.clone(),
        kind: match first.kind {
            SpanKind::Arch => "arch",
            SpanKind::Cable => "cable",
        }
        .into(),
        axis: Axis {
            span: first.span,
            rise: first.rise,
            length: axis.length(),
            left: xy(axis.start()),
            right: xy(axis.end()),
            crown: xy(first.crown),
            entities: span.sources.iter().map(super::source).collect(),
            curve: curve(axis),
        },
        cases: cases
            .iter()
            .zip(analyses.iter().zip(extras))
            .map(|(c, (analysis, extra))| {
                let forces = listed.iter().map(|l| l.force.map(|f| f * c.factor(&l.set))).collect();
                case(
                    c,
                    (analysis, extra),
                    ring.as_ref(),
                    forces,
                    &Section::of(analysis, settings, model.forces),
                )
            })
            .collect(),
        loads: listed,
        suggestion: None,
        areas: super::areas::shares(model, span),
        piers: Vec::new(),
        ring,
    }
}

/// A point as the results hold it.
pub fn xy(p: Point) -> Xy {
    [p.x, p.y]
}

/// The axis as points with the bulge of the piece that follows.
fn curve(axis: &Path) -> Vec<[f64; 3]> {
    let mut out: Vec<[f64; 3]> = axis
        .segments()
        .iter()
        .map(|segment| {
            let start = segment.start();
            let bulge = match segment {
                Segment::Line { .. } => 0.0,
                Segment::Arc { sweep, .. } => (sweep / 4.0).tan(),
            };
            [start.x, start.y, bulge]
        })
        .collect();
    out.push([axis.end().x, axis.end().y, 0.0]);
    out
}

fn ring(span: &model::Span, settings: &Settings) -> Option<Ring> {
    let depths = weight::depths(span, settings.rib.depth)?;
    let (low, high) =
        depths.iter().fold((f64::INFINITY, 0.0_f64), |(low, high), d| (low.min(d.1), high.max(d.1)));
    Some(Ring {
        depth_min: low,
        depth_max: high,
        width: settings.rib.width,
        entities: span.ring.iter().flat_map(|r| &r.sources).map(super::source).collect(),
    })
}

/// Pieces of the ring that are listed where no load stands between the springings.
const BARE_PIECES: u32 = 10;

/// The loads in their order along the ring, with the pieces of the rib's own weight between them.
fn listed(model: &Model, span: &model::Span, analysis: &Analysis, settings: &Settings) -> Vec<Load> {
    let mut all: Vec<(f64, Load)> =
        analysis.order.iter().filter_map(|p| Some((p.foot, load(span.loads.get(p.force)?)))).collect();
    let depths = weight::depths(span, settings.rib.depth);
    let whole = span.axis.length();
    let hair = whole * crate::tolerance::ONE_JOINT;
    let mut cuts: Vec<f64> = all.iter().map(|l| l.0).filter(|s| *s > hair && *s < whole - hair).collect();
    cuts.dedup_by(|b, a| *b - *a <= hair);
    if cuts.is_empty() {
        cuts = (1..BARE_PIECES).map(|i| whole * f64::from(i) / f64::from(BARE_PIECES)).collect();
    }
    let bounds: Vec<f64> = std::iter::once(0.0).chain(cuts.iter().copied()).chain([whole]).collect();
    if let (Some(own), Some(depths)) = (model.own_weight(settings), depths) {
        for (i, piece) in weight::pieces(span, &depths, &cuts).iter().enumerate() {
            let middle = f64::midpoint(piece.between.0, piece.between.1);
            all.push((
                middle,
                Load {
                    label: format!("ring {}", i + 1),
                    space: Default::default(),
                    at: xy(piece.centroid),
                    force: [0.0, -own * piece.area],
                    set: cases::OWN_WEIGHT.into(),
                    source: span
                        .sources
                        .first()
                        .map(super::source)
                        .unwrap_or_else(|| super::source(&Default::default())),
                    magnitude_from: outcome::MagnitudeFrom::SelfWeight,
                    text: None,
                    per_length: None,
                    over: None,
                    application: None,
                    sense: None,
                    post: None,
                    sideways: None,
                },
            ));
        }
    }
    all.extend(strips(span, &all, analysis.crown.x));
    all.extend(super::areas::listed(model, span, &bounds));
    all.sort_by(|a, b| a.0.total_cmp(&b.0));
    let letters = outcome::bow::spaces(all.len());
    all.into_iter().zip(letters).map(|((_, load), space)| Load { space, ..load }).collect()
}

/// The line loads in pieces between the feet of the single loads, cut at the crown too, each with the length along the axis under
/// its middle. The resultants of pieces leave the moments at their ends as they are, so a hand check at the crown holds.
fn strips(span: &model::Span, single: &[(f64, Load)], crown: f64) -> Vec<(f64, Load)> {
    let axis = &span.axis;
    let hair = axis.length() * tolerance::ONE_JOINT;
    // In the middle of a piece of the ring there is no joint.
    let feet = single.iter().filter(|l| l.1.magnitude_from != outcome::MagnitudeFrom::SelfWeight);
    let mut cuts: Vec<f64> = feet.map(|l| axis.point_at(l.0).x).collect();
    cuts.sort_by(f64::total_cmp);
    let mut found = Vec::new();
    for line in &span.line_loads {
        let (left, right) = (line.from.x, line.to.x);
        let mut ends: Vec<f64> =
            cuts.iter().copied().filter(|x| *x > left + hair && *x < right - hair).collect();
        if ends.is_empty() {
            let part = |i: u32| left + (right - left) * f64::from(i) / f64::from(BARE_PIECES);
            ends = (1..BARE_PIECES).map(part).collect();
        }
        ends.extend([left, right]);
        ends.extend(Some(crown).filter(|x| *x > left + hair && *x < right - hair));
        ends.sort_by(f64::total_cmp);
        ends.dedup_by(|b, a| *b - *a <= hair);
        for (i, pair) in ends.windows(2).enumerate() {
            let Some(piece) = line.between(pair[0], pair[1]) else {
                continue;
            };
            let at = piece.from.midpoint(piece.to);
            // Where the axis leans over, the uppermost crossing carries.
            let foot = axis
                .crossings_of_vertical(at.x)
                .into_iter()
                .max_by(|a, b| axis.point_at(*a).y.total_cmp(&axis.point_at(*b).y))
                .unwrap_or(0.0);
            let load = Load {
                label: format!("{}/{}", line.label, i + 1),
                space: Default::default(),
                at: xy(at),
                force: [0.0, -piece.sum()],
                set: line.set.clone(),
                source: super::source(&line.source),
                magnitude_from: outcome::MagnitudeFrom::Label,
                text: Some(line.text.clone()),
                per_length: Some(line.down),
                over: Some([piece.from.x, piece.to.x]),
                application: None,
                sense: None,
                post: None,
                sideways: None,
            };
            found.push((foot, load));
        }
    }
    found
}

fn load(load: &model::Load) -> Load {
    Load {
        label: load.label.clone(),
        space: Default::default(),
        at: xy(load.at),
        force: [load.force.x, load.force.y],
        set: load.set.clone(),
        source: super::source(&load.source),
        magnitude_from: match load.magnitude_from {
            model::MagnitudeFrom::Label => outcome::MagnitudeFrom::Label,
            model::MagnitudeFrom::Attribute => outcome::MagnitudeFrom::Attribute,
            model::MagnitudeFrom::ExtendedData => outcome::MagnitudeFrom::ExtendedData,
            model::MagnitudeFrom::ArrowLength => outcome::MagnitudeFrom::ArrowLength,
            model::MagnitudeFrom::Job => outcome::MagnitudeFrom::Job,
            model::MagnitudeFrom::Equal => outcome::MagnitudeFrom::Equal,
        },
        text: load.text.clone(),
        per_length: None,
        over: None,
        application: load.application.clone(),
        post: load.post.as_ref().map(super::source),
        sideways: load.sideways,
        sense: match load.sense {
            model::Sense::Point => None,
            model::Sense::Head => Some(outcome::Sense::Arrowhead),
            model::Sense::Down => Some(outcome::Sense::Downward),
            model::Sense::Rib => Some(outcome::Sense::TowardRib),
        },
    }
}

fn case(
    case: &model::Case,
    (analysis, extra): (&Analysis, &Extra),
    ring: Option<&Ring>,
    forces: Vec<Xy>,
    section: &Section,
) -> Case {
    let governing = &analysis.lines[analysis.governs];
    let mut lines: Vec<Line> = vec![line(governing, section)];
    lines.extend(
        analysis
            .lines
            .iter()
            .enumerate()
            .filter(|(i, _)| *i != analysis.governs)
            .map(|(_, l)| line(l, section)),
    );
    Case {
        name: case.name.clone(),
        total_load: [analysis.total.x, analysis.total.y],
        forces,
        pole: analysis.pole.map(|p| Pole {
            horizontal: p.horizontal,
            vertical: p.vertical,
            scatter: p.scatter,
            scatter_ratio: p.scatter_ratio,
        }),
        governs: kind(governing.kind),
        governs_why: why(analysis.rule).into(),
        lines,
        traffic: Vec::new(),
        safety: analysis.safety.as_ref().map(|s| safety(s, extra.thickness.as_ref(), ring)),
        ranges: extra.ranges.clone(),
        section_forces: super::slender::section_forces(analysis),
        residual: analysis.residual,
    }
}

/// Which rule chose the governing line, in words.
pub fn why(rule: Rule) -> &'static str {
    match rule {
        Rule::Asked => "asked for by [line] govern",
        Rule::ThreeHinges => "three hinges leave this line alone",
        Rule::ElasticSupport => "an elastic support was declared and the depth is known",
        Rule::RingWithoutTension => {
            "a ring without tension and no elastic support declared: the most favourable line, the best case"
        }
        Rule::AxisOnly => {
            "only the axis counts, with no support declared: the most favourable line, the best case"
        }
        Rule::Cable => "a cable through its supports and its lowest point",
    }
}

/// A kind as the results name it.
pub fn kind(kind: statics::LineKind) -> LineKind {
    match kind {
        statics::LineKind::Closest => LineKind::Closest,
        statics::LineKind::Through => LineKind::Through,
        statics::LineKind::LeastThrust => LineKind::LeastThrust,
        statics::LineKind::GreatestThrust => LineKind::GreatestThrust,
        statics::LineKind::Elastic => LineKind::Elastic,
    }
}

fn line(line: &statics::Line, section: &Section) -> Line {
    Line {
        kind: kind(line.kind),
        support: line.support.and_then(|s| {
            Some(
                match s {
                    Support::Hingeless => "hingeless",
                    Support::TwoHinged => "two-hinged",
                    Support::ThreeHinged => "three-hinged",
                    Support::None => return None,
                }
                .to_string(),
            )
        }),
        left: line.left.map(end),
        right: line.right.map(end),
        status: status(line.status),
        reason: line.reason.clone(),
        vertices: line.vertices.iter().copied().map(xy).collect(),
        offset: line.offset.map(|o| Offset {
            max_abs: o.max_abs,
            signed: o.signed,
            at: xy(o.at),
            rms: o.rms,
        }),
        stations: stations(line, section),
        buckling: line.bending.as_ref().map(super::slender::told),
        proof: line.proof.map(|p| Proof { primal: p.primal, dual: p.dual, gap: p.gap }),
    }
}

/// The stations of a line; in a slender rib with the stresses of both extremes of its moment.
fn stations(line: &statics::Line, section: &Section) -> Vec<Station> {
    let told = |(i, s): (usize, &statics::Station)| {
        let Some(b) = &line.bending else { return station(s, section.stress(line, s)) };
        let [low, high] = b.moments[i];
        let at = |moment: f64| {
            let with = statics::Station { moment, eccentricity: Some(moment / s.thrust), ..*s };
            section.stress(line, &with)
        };
        let stress = at(low).zip(at(high)).map(|(a, b)| [a[0].max(b[0]), a[1].min(b[1])]);
        Station { moment_min: Some(low), moment_max: Some(high), ..station(s, stress) }
    };
    line.stations.iter().enumerate().map(told).collect()
}

fn safety(from: &statics::Safety, thickness: Option<&statics::Factor>, ring: Option<&Ring>) -> Safety {
    let mut found = BTreeMap::new();
    let mut value = |name: &str, factor: Option<&statics::Factor>| {
        found.insert(name.to_string(), factor.map_or(Status::NotAsked, |f| status(f.status)));
        factor.and_then(|f| f.value)
    };
    let geometric_factor = value("geometric_factor", Some(&from.geometric));
    let load_factor = value("load_factor", from.load.as_ref());
    let load_factor_least = value("load_factor_least", from.load_least.as_ref());
    let least_depth = value("least_depth", thickness).zip(ring).map(|(k, ring)| k * ring.depth_min);
    let proof = from.load.as_ref().and_then(|f| f.proof).or(from.geometric.proof);
    Safety {
        geometric_factor,
        load_factor,
        load_factor_least,
        least_depth,
        status: found,
        hinges: from.mechanism.iter().flat_map(|m| &m.hinges).map(hinge).collect(),
        proof: proof.map(|p| Proof { primal: p.primal, dual: p.dual, gap: p.gap }),
    }
}

pub(super) fn hinge(from: &statics::Hinge) -> Hinge {
    let side = match from.side {
        HingeSide::Extrados => "extrados",
        HingeSide::Intrados => "intrados",
        HingeSide::Slip => "slip",
    };
    Hinge { at: xy(from.at), side: side.into() }
}

fn status(from: statics::Status) -> Status {
    match from {
        statics::Status::Found => Status::Found,
        statics::Status::None => Status::None,
        statics::Status::Unbounded => Status::Unbounded,
        statics::Status::Refused => Status::Refused,
    }
}

/// The section whose stresses are told.
struct Section {
    /// Width, m; `None`: no stress can be told.
    width: Option<f64>,
    tension: bool,
}

impl Section {
    fn of(analysis: &Analysis, settings: &Settings, forces: Forces) -> Self {
        let applies = forces == Forces::Kilonewtons && analysis.kind == SpanKind::Arch;
        Self { width: settings.rib.width.filter(|_| applies), tension: settings.rib.tension }
    }

    /// Greatest and least compression of a rectangle, MPa. An elastic line that leaves the kern of a ring without tension
    /// is not valid there, and gives no stress.
    fn stress(&self, line: &statics::Line, s: &statics::Station) -> Option<[f64; 2]> {
        let (depth, width) = (s.depth?, self.width?);
        let cracked = s.eccentricity.is_none_or(|e| e.abs() > depth / 6.0 * (1.0 + tolerance::LIMIT_MET));
        let edges = if self.tension {
            stress::uncracked(s.thrust, s.moment, depth, width)?
        } else if line.kind == statics::LineKind::Elastic && cracked {
            return None;
        } else {
            stress::without_tension(s.thrust, s.moment, depth, width)?
        };
        let (a, b) = (edges.extrados / KN_PER_M2, edges.intrados / KN_PER_M2);
        Some([a.max(b), a.min(b)])
    }
}

fn end(end: statics::End) -> End {
    End { horizontal: end.horizontal, vertical: end.vertical, eccentricity: end.eccentricity }
}

fn station(s: &statics::Station, stress: Option<[f64; 2]>) -> Station {
    Station {
        at: xy(s.at),
        s: s.s,
        thrust: s.thrust,
        shear: s.shear,
        moment: s.moment,
        eccentricity: s.eccentricity,
        vertical_offset: s.vertical_offset,
        depth: s.depth,
        stress_max: stress.map(|[max, _]| max),
        stress_min: stress.map(|[_, min]| min),
        moment_min: None,
        moment_max: None,
    }
}
