//! A span of the model as the statics take it.

use crate::geometry::Point;
use crate::job::{Draw, Govern, RibDepth, Settings, Support};
use crate::model::{Forces, Span};
use crate::refusal::Refusal;
use crate::statics::{self, Depth, Effects, Force, LineKind, Problem, Unsolved};

/// The problem of one span under its drawn loads. With unit loads nothing strains the rib but the loads: a change of
/// temperature has no size beside an unknown force.
///
/// # Errors
/// When a key that the elastic line needs is missing from the job.
pub fn problem(span: &Span, forces: Forces, settings: &Settings) -> Result<Problem, Refusal> {
    let rib = &settings.rib;
    let effects = if forces == Forces::Kilonewtons { effects(settings)? } else { Effects::default() };
    let mut draw: Vec<LineKind> = settings.line.draw.iter().map(|d| drawn(*d)).collect();
    if settings.limits.geometric_factor.is_some() && !draw.contains(&LineKind::Closest) {
        // The factor is that of the closest line, whichever line governs.
        draw.push(LineKind::Closest);
    }
    Ok(Problem {
        stiffness: rib.elastic_modulus.zip(rib.width).map(|(e, b)| e * KN_PER_M2 * b / (1.0 + rib.creep)),
        effects,
        forces: span.loads.iter().map(|load| Force { at: load.at, force: load.force }).collect(),
        depth: rib.depth.map(|depth| match depth {
            RibDepth::Constant(d) => Depth::Constant(d),
            RibDepth::Linear([springing, crown]) => Depth::Linear { springing, crown },
        }),
        tension: rib.tension,
        support: rib.support.map(|support| match support {
            Support::Hingeless => statics::Support::Hingeless,
            Support::TwoHinged => statics::Support::TwoHinged,
            Support::ThreeHinged => statics::Support::ThreeHinged,
            Support::None => statics::Support::None,
        }),
        voussoirs: rib.voussoirs.and_then(|n| usize::try_from(n).ok()),
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

/// kN/m² in a MPa.
const KN_PER_M2: f64 = 1000.0;

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
pub fn refusal(span: &Span, unsolved: &Unsolved) -> Refusal {
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
    let first = span.sources.first();
    let mut refusal = Refusal::new(check, format!("{}: {unsolved}", span.name), remedy);
    if let Some(source) = first {
        refusal = refusal.at_handle(source.handle.clone()).on_layer(source.layer.clone());
        refusal.line = source.line;
    }
    refusal
}
