//! What stands on the spans: its listing, and what is worth saying of it.

use super::{With, note, spans};
use crate::geometry::{Point, Vec2};
use crate::model::areas::{self, Lump, Weighed};
use crate::model::{self, Model};
use crate::outcome::{AreaShare, Check, Finding, Load, MagnitudeFrom, Span, Units};
use crate::statics::{Analysis, SpanKind};
use crate::tolerance;

/// The areas as they stand on a span.
pub fn shares(model: &Model, span: &model::Span) -> Vec<AreaShare> {
    let span = model.place_of(&span.name);
    model
        .areas
        .iter()
        .filter_map(|weighed| {
            let share = weighed.shares.get(span)?;
            let (area, at) = share.total();
            let push = |side: usize| {
                let sum: f64 = share.strips.iter().map(|s| s.rise[side].0).sum();
                weighed.pressure.unwrap_or(0.0) * weighed.weight * sum
            };
            let beyond = |zone: usize| weighed.weight * weighed.beyond.get(zone).copied().unwrap_or(0.0);
            Some(AreaShare {
                name: weighed.name.clone(),
                entities: weighed.sources.iter().map(super::source).collect(),
                level: weighed.level,
                pieces: share.strips.iter().filter(|s| s.area > 0.0).count() as u64,
                area,
                weight: weighed.weight * area,
                at: at.map(spans::xy),
                whole: weighed.whole,
                residual: weighed.residual,
                beyond: [beyond(span), beyond(span + 1)],
                earth_pressure: weighed.pressure,
                sideways: [push(0), push(1)],
            })
        })
        .collect()
}

/// The pieces of the areas between places along the ring (ascending, m, with its ends), each with its middle: one load for the
/// weight of an area there, and one for what it presses to either side.
pub fn listed(model: &Model, span: &model::Span, bounds: &[f64]) -> Vec<(f64, Load)> {
    let lumps = areas::lumps(model, &span.name);
    let mut out = Vec::new();
    for (index, weighed) in model.areas.iter().enumerate() {
        let mut number = 0;
        for between in bounds.windows(2) {
            let within = |l: &&Lump| l.area == index && l.s > between[0] && l.s <= between[1];
            let here: Vec<&Lump> = lumps.iter().filter(within).collect();
            for part in [|l: &Lump| l.force.y < 0.0, |l: &Lump| l.force.x > 0.0, |l: &Lump| l.force.x < 0.0] {
                let chosen: Vec<&&Lump> = here.iter().filter(|l| part(l)).collect();
                let force = chosen.iter().fold(Vec2::ZERO, |f, l| f + l.force);
                let size = force.hypot();
                if size <= 0.0 {
                    continue;
                }
                let first =
                    chosen.iter().fold(Vec2::ZERO, |m, l| m + l.at.to_vec2() * (l.force.hypot() / size));
                number += 1;
                let middle = f64::midpoint(between[0], between[1]);
                out.push((middle, load(weighed, number, first.to_point(), force)));
            }
        }
    }
    out
}

fn load(weighed: &Weighed, number: usize, at: Point, force: Vec2) -> Load {
    Load {
        label: format!("{} {number}", weighed.name),
        space: Default::default(),
        at: spans::xy(at),
        force: [force.x, force.y],
        set: weighed.name.clone(),
        source: super::source(&weighed.sources.first().cloned().unwrap_or_default()),
        magnitude_from: MagnitudeFrom::Area,
        text: None,
        per_length: None,
        over: None,
        application: None,
        post: None,
        sideways: None,
        sense: None,
    }
}

/// What is worth saying of the areas of a drawing.
pub fn drawing(model: &Model, units: &Units, findings: &mut Vec<Finding>) {
    for weighed in &model.areas {
        one(weighed, model, units, findings);
    }
    for (name, other, area) in model.areas.iter().flat_map(|a| a.over.iter().map(|o| (&a.name, &o.0, o.1))) {
        findings.push(
            note(
                Check::Areas,
                format!(
                    "{name} and {other} cover {area:.3} m² of the elevation together, and both weigh there: right where they \
                     stand side by side across the bridge, each with its own width"
                ),
            )
            .value(area, "m²"),
        );
    }
}

fn one(weighed: &Weighed, model: &Model, units: &Units, findings: &mut Vec<Finding>) {
    let name = &weighed.name;
    let mut add = |finding: Finding| findings.push(finding);
    let entity = |finding: Finding| match weighed.sources.first() {
        Some(source) => finding.entity(source),
        None => finding,
    };
    for (share, span) in weighed.shares.iter().zip(&model.spans) {
        let (area, at) = share.total();
        let pieces = share.strips.iter().filter(|s| s.area > 0.0).count();
        let what = match weighed.level {
            Some(level) => format!("fill up to y = {level:.3} m"),
            None => format!("{} of the drawing", outlines(weighed.sources.len())),
        };
        let place = at.map_or(String::new(), |p| format!(" at x = {:.3} m", p.x));
        let mut text = format!(
            "{name} ({what}): {pieces} pieces over {}, {area:.4} m², {:.3} {} in all{place}; all pieces of it add up to the \
             whole to {:.0e} or better",
            span.name,
            area * weighed.weight,
            units.force,
            weighed.residual.max(tolerance::SHOWN_ERROR)
        );
        if share.on_axis {
            text.push_str("; no depth is known, so it stands on the axis");
        }
        let finding = note(Check::Areas, text).value(area * weighed.weight, &units.force).of(&span.name);
        add(entity(match at {
            Some(at) => finding.at(spans::xy(at)),
            None => finding,
        }));
        if share.bare > tolerance::AREA_OVERLAP {
            add(note(
                Check::Areas,
                format!(
                    "over {:.1} % of {} the extrados rises above the level of {name}: there is no fill",
                    share.bare * 100.0,
                    span.name
                ),
            )
            .of(&span.name));
        }
    }
    if weighed.residual > tolerance::AREA_RESIDUAL {
        add(entity(
            note(
                Check::Areas,
                format!(
                    "the pieces of {name} miss its whole of {:.6} m² by {:.1e}",
                    weighed.whole, weighed.residual
                ),
            )
            .value(weighed.residual, "1")
            .uncheck()
            .remedy("draw its outline simpler, without loops that cross or touch"),
        ));
    }
    let beyond: f64 = weighed.beyond.iter().sum();
    if beyond > weighed.whole * tolerance::AREA_OVERLAP {
        let parts: Vec<String> =
            weighed.beyond.iter().map(|a| format!("{:.3}", a * weighed.weight)).collect();
        add(note(
            Check::LeftOut,
            format!(
                "{:.3} {} of {name} stand beyond the ends of the rings and are left to the abutments and piers (from the left: \
                 {} {})",
                beyond * weighed.weight,
                units.force,
                parts.join(", "),
                units.force
            ),
        )
        .value(beyond * weighed.weight, &units.force));
    }
    if weighed.under > weighed.whole * tolerance::AREA_OVERLAP {
        let finding = note(
            Check::Areas,
            format!(
                "{:.4} m² of {name} lie under the extrados, over the span; weighed as drawn ({:.3} {})",
                weighed.under,
                weighed.under * weighed.weight,
                units.force
            ),
        )
        .value(weighed.under, "m²");
        // Chords along a curved extrados cut off little; a part of the ring or of the opening does not stand on it.
        add(entity(if weighed.under > weighed.whole * tolerance::AREA_UNDER {
            finding.uncheck().remedy("let the outline end at the extrados")
        } else {
            finding
        }));
    }
    if let Some(at) = weighed.crossing {
        add(entity(
            note(
                Check::Areas,
                format!(
                    "the outline of {name} crosses itself or another one at ({:.3}, {:.3}) m; counted where an odd number of \
                     loops runs around",
                    at.x, at.y
                ),
            )
            .at(spans::xy(at))
            .uncheck()
            .remedy("draw outlines that do not cross"),
        ));
    }
    if weighed.doubled > weighed.whole * tolerance::AREA_OVERLAP {
        add(entity(
            note(
                Check::Areas,
                format!("outlines of {name} lie over one another by {:.4} m², weighed as often", weighed.doubled),
            )
            .value(weighed.doubled, "m²")
            .uncheck()
            .remedy("draw what weighs once; a void as an island of one hatch, or as a closed outline within another"),
        ));
    }
    if weighed.voids > 0.0 {
        add(note(
            Check::Areas,
            format!("{:.4} m² within the outlines of {name} are voids: loops within loops", weighed.voids),
        )
        .value(weighed.voids, "m²"));
    }
    for (source, kept) in &weighed.doubles {
        add(note(
            Check::PassedOver,
            format!(
                "{} draws the same outline of {name} as {}, which was kept",
                source.named(),
                kept.named()
            ),
        )
        .entity(source));
    }
    if weighed.text_boxes > 0 {
        add(note(
            Check::PassedOver,
            format!(
                "{} loops of {name} only keep room for a text; what they enclose weighs too",
                weighed.text_boxes
            ),
        ));
    }
}

fn outlines(count: usize) -> String {
    if count == 1 { "1 outline".into() } else { format!("{count} outlines") }
}

/// The warning of an arch that fill presses on sideways without a word of it.
pub fn sideways(model: &Model, span: &Span, analysis: &Analysis, findings: &mut Vec<Finding>) {
    let index = model.place_of(&span.name);
    let filled = model.areas.iter().filter(|a| a.shares.get(index).is_some_and(|s| s.total().0 > 0.0));
    let steep = analysis.rise / analysis.span;
    if analysis.kind == SpanKind::Arch && steep > tolerance::STEEP_FILLED {
        for weighed in filled.filter(|a| a.pressure.is_none()) {
            findings.push(
                note(
                    Check::Areas,
                    format!(
                        "{} stands on an arch of rise/span {steep:.3} and is taken to press downward only: no earth_pressure is \
                         given",
                        weighed.name
                    ),
                )
                .value(steep, "1")
                .of(&span.name)
                .remedy(format!("state [[area]] {} earth_pressure (0 where it cannot press sideways)", weighed.name)),
            );
        }
    }
    for weighed in &model.areas {
        let Some(k) = weighed.pressure.filter(|k| *k > 0.0) else {
            continue;
        };
        let Some(share) = weighed.shares.get(index) else {
            continue;
        };
        let sum = |side: usize| k * weighed.weight * share.strips.iter().map(|s| s.rise[side].0).sum::<f64>();
        if sum(0) > 0.0 || sum(1) < 0.0 {
            findings.push(
                note(
                    Check::Areas,
                    format!(
                        "{} presses sideways with {k:.3} of its vertical pressure: {:.3} kN to the right, {:.3} kN to the left",
                        weighed.name,
                        sum(0),
                        -sum(1)
                    ),
                )
                .value(sum(0) + sum(1), "kN")
                .of(&span.name),
            );
        }
    }
}
