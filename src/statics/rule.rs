//! Which hinges hold, and which line governs.

use super::span::Span;
use super::{LineKind, Problem, Rule, SpanKind, Support, Unsolved};
use crate::geometry::Point;

/// Hinges and rule of one span.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Choice {
    pub kind: SpanKind,
    pub governs: LineKind,
    pub rule: Rule,
    /// Points about which no moment acts, in every line, in local units; at most three.
    pub hinges: Vec<Point>,
    pub support: Option<Support>,
}

pub(super) fn choose(problem: &Problem, span: &Span) -> Result<Choice, Unsolved> {
    let kind = if span.hangs && span.total().y < 0.0 { SpanKind::Cable } else { SpanKind::Arch };
    let hinges = hinges(problem, span)?;
    let three = hinges.len() == 3;
    let elastic = matches!(problem.support, Some(Support::Hingeless | Support::TwoHinged));
    let (governs, rule) = if let Some(asked) = problem.govern {
        (asked, Rule::Asked)
    } else if kind == SpanKind::Cable {
        (LineKind::Through, Rule::Cable)
    } else if three {
        (LineKind::Through, Rule::ThreeHinges)
    } else if elastic && span.has_depth {
        (LineKind::Elastic, Rule::ElasticSupport)
    } else if span.has_depth && !problem.tension {
        (LineKind::Closest, Rule::RingWithoutTension)
    } else {
        (LineKind::Closest, Rule::AxisOnly)
    };
    let support = if three { Some(Support::ThreeHinged) } else { problem.support };
    Ok(Choice { kind, governs, rule, hinges, support })
}

fn hinges(problem: &Problem, span: &Span) -> Result<Vec<Point>, Unsolved> {
    let drawn: Vec<Point> = problem.hinges.iter().map(|&p| span.local(p)).collect();
    let refuse = |text: String| Err(Unsolved::Hinges(text));
    let n = drawn.len();
    if n > 3 {
        return refuse(format!("{n} hinges make a mechanism: at most three can be drawn on one span"));
    }
    let [left, crown, right] = super::through::ends_and_crown(span);
    match (problem.support, n) {
        (Some(Support::Hingeless), 1..) => refuse(format!(
            "the support is stated as hingeless, but {n} {} drawn",
            if n == 1 { "hinge is" } else { "hinges are" }
        )),
        (Some(Support::TwoHinged), 0) => Ok(vec![left, right]),
        (Some(Support::TwoHinged), 1 | 3) => {
            refuse(format!("the support is stated as two-hinged, but {n} hinges are drawn"))
        }
        (Some(Support::ThreeHinged), 0) => Ok(vec![left, crown, right]),
        (Some(Support::ThreeHinged), 1 | 2) => {
            refuse(format!("the support is stated as three-hinged, but {n} hinges are drawn"))
        }
        _ => Ok(drawn),
    }
}

/// The three points of the line `through`: as stated, or the hinges with as many of springings and crown as are needed,
/// leaving out those nearest to a hinge.
pub(super) fn through_points(
    problem: &Problem,
    span: &Span,
    choice: &Choice,
) -> Result<[Point; 3], Unsolved> {
    if let Some(points) = problem.through {
        let points = points.map(|p| span.local(p));
        let near = |h: &Point| points.iter().any(|p| (*p - *h).hypot() <= crate::tolerance::ONE_JOINT);
        if !choice.hinges.iter().all(near) {
            return Err(Unsolved::Hinges(
                "the three points stated for the line leave out a hinge, but every line passes through all hinges"
                    .into(),
            ));
        }
        return Ok(points);
    }
    let mut free = super::through::ends_and_crown(span).to_vec();
    for h in &choice.hinges {
        let nearest = free
            .iter()
            .enumerate()
            .min_by(|a, b| (*a.1 - *h).hypot().total_cmp(&(*b.1 - *h).hypot()))
            .map(|p| p.0);
        if let Some(i) = nearest {
            free.remove(i);
        }
    }
    let mut points = choice.hinges.clone();
    points.extend(free);
    <[Point; 3]>::try_from(points).map_err(|_| Unsolved::Hinges("a line of thrust needs three points".into()))
}
