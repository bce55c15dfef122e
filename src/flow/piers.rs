//! The pushes of a span on its piers, which take lines beside those that are drawn.

use super::problem;
use crate::job::Settings;
use crate::model::{Case, Model, Span};
use crate::refusal::Refusal;
use crate::statics::{self, Analysis, Line, LineKind, Rule, Status};
use crate::verdict::Pushes;

/// The pushes at both ends of a span in a case; `None` where the drawing has one span, and so no pier.
///
/// # Errors
/// When the span cannot be analysed.
pub fn pushes(
    model: &Model,
    span: &Span,
    case: &Case,
    settings: &Settings,
    analysis: &Analysis,
) -> Result<Option<Pushes>, Refusal> {
    if model.spans.len() < 2 {
        return Ok(None);
    }
    // These leave one line, and with it one push.
    if matches!(analysis.rule, Rule::ElasticSupport | Rule::ThreeHinges | Rule::Cable) {
        let line = &analysis.lines[analysis.governs];
        return Ok(Some(between(line, line)));
    }
    let mut problem = problem::problem(model, span, case, settings)?;
    problem.draw = vec![LineKind::LeastThrust, LineKind::GreatestThrust];
    let more = statics::analyse(&problem).map_err(|u| problem::refusal(span, case, &u))?;
    let of = |kind: LineKind| more.lines.iter().find(|l| l.kind == kind);
    Ok(match (of(LineKind::LeastThrust), of(LineKind::GreatestThrust)) {
        (Some(least), Some(greatest)) => Some(between(least, greatest)),
        _ => Some(Err("least and greatest thrust need a ring whose depth is known".into())),
    })
}

fn between(least: &Line, greatest: &Line) -> Pushes {
    for line in [least, greatest] {
        match line.status {
            Status::Found => {}
            Status::Unbounded => return Err("the greatest push has no bound".into()),
            _ => return Err(line.reason.clone().unwrap_or_else(|| "there is no line of thrust".into())),
        }
    }
    match (least.left, least.right, greatest.left, greatest.right) {
        (Some(a), Some(b), Some(c), Some(d)) => {
            Ok([(a.horizontal, c.horizontal), (b.horizontal, d.horizontal)]
                .map(|(p, q)| (p.min(q), p.max(q))))
        }
        _ => Err("the line gives no push".into()),
    }
}
