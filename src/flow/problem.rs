//! A span of the model as the statics take it.

use crate::geometry::Point;
use crate::job::{Draw, Govern, RibDepth, Settings, Support};
use crate::model::{self, Case, Forces, Model, Span, areas, cases};
use crate::refusal::Refusal;
use crate::statics::{self, Depth, Effects, Force, LineKind, LineLoad, Problem, Slender, Unsolved};
use crate::units::KN_PER_M2;

/// The problem of one span in one case. With unit loads nothing strains the rib but the loads: a change of temperature has
/// no size beside an unknown force.
///
/// # Errors
/// When the rib's own weight is wanted without a depth, or a key that a stated one needs is missing from the job.
pub fn problem(model: &Model, span: &Span, case: &Case, settings: &Settings) -> Result<Problem, Refusal> {
    let rib = &settings.rib;
    let effects = if model.forces == Forces::Kilonewtons { effects(settings)? } else { Effects::default() };
    let mut draw: Vec<LineKind> = settings.line.draw.iter().map(|d| drawn(*d)).collect();
    if settings.limits.geometric_factor.is_some() && !draw.contains(&LineKind::Closest) {
        // The factor is that of the closest line, whichever line governs.
        draw.push(LineKind::Closest);
    }
    let depth = match (&span.ring, rib.depth) {
        (Some(ring), _) => Some(match ring.depth[..] {
            [(_, d)] => Depth::Constant(d),
            _ => Depth::Table(ring.depth.clone()),
        }),
        (None, Some(RibDepth::Constant(d))) => Some(Depth::Constant(d)),
        (None, Some(RibDepth::Linear([springing, crown]))) => Some(Depth::Linear { springing, crown }),
        (None, None) => None,
    };
    let own = model.own_weight(settings).unwrap_or(0.0) * case.factor(cases::OWN_WEIGHT);
    if own > 0.0 && depth.is_none() {
        return Err(Refusal::new(
            "own-weight",
            format!("{}: the rib has a unit weight and no depth", span.name),
            "Give [rib] depth, draw intrados and extrados, or remove [rib] unit_weight",
        ));
    }
    let drawn = span.loads.len();
    let standing = areas::lumps(model, &span.name);
    let name = |lump: &areas::Lump| &model.areas[lump.area].name;
    let weighed =
        standing.iter().enumerate().filter(|(_, lump)| case.varies(name(lump))).map(|(i, _)| drawn + i);
    Ok(Problem {
        axis: span.axis.clone(),
        forces: span
            .loads
            .iter()
            .map(|load| Force { at: load.at, force: load.force * case.factor(&load.set) })
            .chain(
                standing
                    .iter()
                    .map(|lump| Force { at: lump.at, force: lump.force * case.factor(name(lump)) }),
            )
            .collect(),
        line_loads: line_loads(span, case),
        entering: standing.iter().enumerate().map(|(i, lump)| (drawn + i, lump.s)).collect(),
        stiffness: rib.elastic_modulus.zip(rib.width).map(|(e, b)| e * KN_PER_M2 * b / (1.0 + rib.creep)),
        effects,
        slender: slender(settings, model.forces)?,
        strength: strength(settings, model.forces)?,
        friction: rib.friction,
        ring_weight: own,
        varying: (0..drawn).filter(|&i| case.varies(&span.loads[i].set)).chain(weighed).collect(),
        weight_varies: case.varies(cases::OWN_WEIGHT),
        depth,
        tension: rib.tension,
        support: rib.support.map(|support| match support {
            Support::Hingeless => statics::Support::Hingeless,
            Support::TwoHinged => statics::Support::TwoHinged,
            Support::ThreeHinged => statics::Support::ThreeHinged,
            Support::None => statics::Support::None,
        }),
        voussoirs: rib.voussoirs.and_then(|n| usize::try_from(n).ok()),
        hinges: span.hinges.clone(),
        through: settings.line.through.map(|points| points.map(|[x, y]| Point::new(x, y))),
        govern: match settings.line.govern {
            Govern::Auto => None,
            Govern::Closest => Some(LineKind::Closest),
            Govern::Through => Some(LineKind::Through),
            Govern::LeastThrust => Some(LineKind::LeastThrust),
            Govern::GreatestThrust => Some(LineKind::GreatestThrust),
            Govern::Elastic => Some(LineKind::Elastic),
        },
        draw,
        ..Problem::new(span.axis.clone())
    })
}

/// The line loads of a span as a case factors them.
fn line_loads(span: &Span, case: &Case) -> Vec<LineLoad> {
    let load = |l: &model::LineLoad| LineLoad {
        from: l.from.x,
        to: l.to.x,
        down: l.down * case.factor(&l.set),
        varies: case.varies(&l.set),
    };
    span.line_loads.iter().map(load).collect()
}

/// What strains the rib beside its loads.
fn effects(settings: &Settings) -> Result<Effects, Refusal> {
    let rib = &settings.rib;
    let thermal = match (rib.temperature, rib.expansion) {
        (0.0, _) => 0.0,
        (change, Some(expansion)) => change * expansion,
        (_, None) => return Err(missing(settings, "rib.expansion", "rib.temperature")),
    };
    let effects =
        Effects { strain: thermal - rib.shrinkage, left: rib.movement.left, right: rib.movement.right };
    if effects != Effects::default() {
        for (key, given) in [("rib.elastic_modulus", rib.elastic_modulus), ("rib.width", rib.width)] {
            if given.is_none() {
                return Err(missing(settings, key, "temperature, shrinkage and movement"));
            }
        }
    }
    Ok(effects)
}

/// What bends a slender rib: whenever its support is elastic, and modulus and width are given.
fn slender(settings: &Settings, forces: Forces) -> Result<Option<Slender>, Refusal> {
    let rib = &settings.rib;
    let elastic = matches!(rib.support, Some(Support::Hingeless | Support::TwoHinged | Support::ThreeHinged));
    if forces == Forces::UnitLoads || !elastic {
        return Ok(None);
    }
    let imperfection = rib.imperfection.unwrap_or(0.0).abs();
    if imperfection > 0.0 || rib.deck_inertia > 0.0 {
        for (key, given) in [("rib.elastic_modulus", rib.elastic_modulus), ("rib.width", rib.width)] {
            if given.is_none() {
                return Err(missing(settings, key, "an imperfection and a deck that shares the bending"));
            }
        }
    }
    let deck = match (rib.deck_inertia > 0.0, rib.deck_modulus) {
        (false, _) => 0.0,
        (true, Some(modulus)) => modulus * KN_PER_M2 * rib.deck_inertia,
        (true, None) => return Err(missing(settings, "rib.deck_modulus", "rib.deck_inertia")),
    };
    Ok(rib.elastic_modulus.zip(rib.width).map(|_| Slender { imperfection, deck }))
}

/// Strength times width, kN/m; none with unit loads, which have no size beside it.
fn strength(settings: &Settings, forces: Forces) -> Result<Option<f64>, Refusal> {
    match (settings.rib.strength, settings.rib.width) {
        (Some(_), _) if forces == Forces::UnitLoads => Ok(None),
        (Some(strength), Some(width)) => Ok(Some(strength * KN_PER_M2 * width)),
        (Some(_), None) => Err(missing(settings, "rib.width", "rib.strength")),
        (None, _) => Ok(None),
    }
}

fn missing(settings: &Settings, key: &str, asks: &str) -> Refusal {
    let refusal = Refusal::new(
        "job-missing",
        format!("`{key}` is missing, and {asks} cannot be reckoned without it"),
        format!("State `{key}` in the job file."),
    );
    match &settings.origin.file {
        Some(file) => refusal.in_file(file),
        None => refusal,
    }
}

fn drawn(draw: Draw) -> LineKind {
    match draw {
        Draw::Closest => LineKind::Closest,
        Draw::Through => LineKind::Through,
        Draw::LeastThrust => LineKind::LeastThrust,
        Draw::GreatestThrust => LineKind::GreatestThrust,
        Draw::Elastic => LineKind::Elastic,
    }
}

/// A span that could not be analysed, as a refusal that names its axis.
pub fn refusal(span: &Span, case: &Case, unsolved: &Unsolved) -> Refusal {
    let (check, remedy) = match unsolved {
        Unsolved::NoLoad => ("no-load", "Put loads over the span on the load layer."),
        Unsolved::SelfCrossing(..) => {
            ("axis-crosses", "Draw the axis as one line from springing to springing.")
        }
        Unsolved::NoRise => ("no-rise", "Draw the axis with its rise, or take it as a beam."),
        Unsolved::Hinges(_) => ("hinges", "Correct the hinges or [rib] support."),
        Unsolved::SlackCable(_) => {
            ("slack-cable", "Check the direction of the loads and the shape of the cable.")
        }
        Unsolved::Input(_) => ("span", "Look at the axis and the loads of this span."),
        Unsolved::NotBuilt(_) => ("not-built", "Leave it out of the job file in this version."),
    };
    let in_case = if case.name == cases::DRAWN { String::new() } else { format!(", case {}", case.name) };
    let first = span.sources.first();
    let mut refusal = Refusal::new(check, format!("{}{in_case}: {unsolved}", span.name), remedy);
    if let Some(source) = first {
        refusal = refusal.at_handle(source.handle.clone()).on_layer(source.layer.clone());
        refusal.line = source.line;
    }
    refusal
}
