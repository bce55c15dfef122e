//! Factors of safety of a ring without tension.

use super::closest::Closest;
use super::limit::{Aim, Edge, Extreme, Lean, Limit, virtual_work};
use super::peaks::Sampling;
use super::span::Span;
use super::subspace::Subspace;
use super::{Factor, Hinge, HingeSide, Mechanism, Problem, Proof, Safety, Status};
use crate::tolerance;

/// Geometric factor, and the interval of the load factor where something varies.
pub(super) fn safety(
    problem: &Problem,
    span: &Span,
    (sampling, whole): (&Sampling, &Sampling),
    with_factor: Option<&Subspace>,
    closest: &Closest,
) -> Safety {
    let mut safety = Safety {
        geometric: geometric(closest),
        load: None,
        load_least: None,
        mechanism: None,
        mechanism_least: None,
    };
    let varies = |l: &super::joint::Loads| l.fx.abs() + l.fy.abs() + l.moment.abs() > 0.0;
    let any =
        span.entered.iter().any(|e| e.varies && e.force.hypot() > 0.0) || varies(&span.last().loads.varying);
    let stays =
        span.entered.iter().any(|e| !e.varies && e.force.hypot() > 0.0) || varies(&span.last().loads.fixed);
    let (true, Some(space)) = (any, with_factor) else {
        return safety;
    };
    if !stays && problem.strength.is_none() {
        let all = || {
            factor(
                Status::Refused,
                "all loads vary: at unlimited strength a line of thrust stays where it is when they all grow",
            )
        };
        (safety.load, safety.load_least) = (Some(all()), Some(all()));
        return safety;
    }
    let limit = Limit { span, sampling, whole, space, friction: problem.friction, crushing: span.crushing };
    let (load, mechanism) = interval(&limit, Aim::GreatestFactor, problem);
    let (least, mechanism_least) = interval(&limit, Aim::LeastFactor, problem);
    safety.load = Some(load);
    safety.load_least = Some(least);
    safety.mechanism = mechanism;
    safety.mechanism_least = mechanism_least;
    safety
}

fn factor(status: Status, reason: &str) -> Factor {
    Factor { status, value: None, reason: Some(reason.into()), proof: None }
}

/// `g = d / (2 max |e|)` of the closest line [Heyman 1969].
fn geometric(closest: &Closest) -> Factor {
    match closest {
        Closest::Found { proof, .. } if proof.primal <= tolerance::FUNICULAR => factor(
            Status::Unbounded,
            "the axis is a funicular of the loads: the line of thrust can lie on it",
        ),
        Closest::Found { proof, .. } => {
            let (primal, dual) = (0.5 / proof.primal, 0.5 / proof.dual.max(tolerance::FUNICULAR));
            let gap = (primal - dual).abs() / primal.max(dual).max(1.0);
            Factor {
                status: Status::Found,
                value: Some(primal),
                reason: None,
                proof: Some(Proof { primal, dual, gap }),
            }
        }
        Closest::None(_) => factor(Status::None, "no line of thrust is in compression throughout"),
        Closest::Unbounded => factor(
            Status::Unbounded,
            "the line comes closer to the axis the greater the push is, without end",
        ),
        Closest::Stalled => factor(Status::Refused, "the search for the closest line did not end"),
    }
}

/// One end of the interval of the load factor, with its mechanism.
fn interval(limit: &Limit, aim: Aim, problem: &Problem) -> (Factor, Option<Mechanism>) {
    match limit.solve(aim) {
        Extreme::Found { primal, dual, leans, .. } => {
            let gap = (primal - dual).abs() / primal.abs().max(dual.abs()).max(1.0);
            let mechanism = (primal > 0.0).then(|| mechanism(limit.span, &leans, primal)).flatten();
            let found = Factor {
                status: Status::Found,
                value: Some(primal.max(0.0)),
                reason: None,
                proof: Some(Proof { primal, dual, gap }),
            };
            (found, mechanism)
        }
        Extreme::Unbounded => {
            (factor(Status::Unbounded, "the varying loads alone find a line of thrust inside the ring"), None)
        }
        Extreme::None(leans) => {
            let text = format!(
                "no line of thrust lies inside the ring at any factor{}",
                contradiction(limit.span, &leans, problem)
            );
            (factor(Status::None, &text), None)
        }
        Extreme::Stalled => (factor(Status::Refused, "the program did not end within its accuracy"), None),
    }
}

/// Which joint and which load make it so that no line lies inside: the heaviest joint of the contradiction, and the load
/// nearest to it.
pub(super) fn contradiction(span: &Span, leans: &[Lean], problem: &Problem) -> String {
    let Some(lean) = leans.iter().max_by(|a, b| a.multiplier.total_cmp(&b.multiplier)) else {
        return String::new();
    };
    let at = span.drawn(lean.joint.at);
    let edge = match lean.edge {
        Edge::Extrados => "beyond the extrados",
        Edge::Intrados => "beyond the intrados",
        Edge::Outward | Edge::Inward => "sliding",
    };
    let near = span
        .entered
        .iter()
        .filter(|e| e.force.hypot() > 0.0)
        .min_by(|a, b| (a.foot - lean.joint.s).abs().total_cmp(&(b.foot - lean.joint.s).abs()));
    let load = near.map_or_else(String::new, |e| {
        let f = problem.forces[e.index].at;
        format!(", nearest to it the load at ({:.3}, {:.3}) m", f.x, f.y)
    });
    format!(": {edge} at the joint near ({:.3}, {:.3}) m{load}", at.x, at.y)
}

fn mechanism(span: &Span, leans: &[Lean], factor: f64) -> Option<Mechanism> {
    let (fixed, varying, crushing) = virtual_work(leans);
    // Scaled so that the varying loads do unit work at factor 1.
    let unit = varying.abs();
    if unit <= 0.0 {
        return None;
    }
    let hinges = leans
        .iter()
        .map(|l| {
            let (side, off) = match l.edge {
                Edge::Extrados => (HingeSide::Extrados, l.offset),
                Edge::Intrados => (HingeSide::Intrados, -l.offset),
                Edge::Outward | Edge::Inward => (HingeSide::Slip, 0.0),
            };
            Hinge {
                at: span.drawn(l.joint.at + l.joint.normal() * off),
                s: l.joint.s * span.length,
                side,
                rotation: l.multiplier / unit / (span.load * span.length),
            }
        })
        .collect();
    let work = fixed + factor * varying - crushing;
    Some(Mechanism {
        hinges,
        work_fixed: fixed / unit,
        work_varying: varying / unit,
        work_crushing: crushing / unit,
        residual: work.abs() / (fixed.abs() + factor * varying.abs() + crushing.abs()),
    })
}
