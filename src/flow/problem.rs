//! A span of the model as the statics take it.

use crate::geometry::Point;
use crate::job::{Draw, Govern, RibDepth, Settings, Support};
use crate::model::{Case, Model, Span, cases};
use crate::refusal::Refusal;
use crate::statics::{self, Depth, Force, LineKind, Problem, Unsolved};

/// The problem of one span in one case.
///
/// # Errors
/// When the rib's own weight is wanted without a depth.
pub fn problem(model: &Model, span: &Span, case: &Case, settings: &Settings) -> Result<Problem, Refusal> {
    let rib = &settings.rib;
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
    Ok(Problem {
        axis: span.axis.clone(),
        forces: span
            .loads
            .iter()
            .map(|load| Force { at: load.at, force: load.force * case.factor(&load.set) })
            .collect(),
        ring_weight: own,
        varying: (0..span.loads.len()).filter(|&i| case.varies(&span.loads[i].set)).collect(),
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
