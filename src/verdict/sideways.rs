//! A roadway curved in plan: the couples of its loads about the rib, which a plane analysis leaves out.

use super::With;
use super::note;
use crate::model::{self, Case};
use crate::outcome::{Check, Finding};

/// Lists the couples of a span in a case: each load's upright force times its distance beside the plane of the rib (positive
/// to the left, looking in the direction of x), with their sum and how far the resultant drifts.
pub fn couples(span: &model::Span, case: &Case, unit: &str, findings: &mut Vec<Finding>) {
    let beside: Vec<(&model::Load, f64, f64)> = span
        .loads
        .iter()
        .filter_map(|l| {
            let down = -l.force.y * case.factor(&l.set);
            Some((l, l.sideways?, down))
        })
        .filter(|l| l.2.abs() > 0.0)
        .collect();
    if beside.is_empty() {
        return;
    }
    let couple: f64 = beside.iter().map(|(_, y, down)| y * down).sum();
    let total: f64 = beside.iter().map(|b| b.2).sum();
    let shown: Vec<String> = beside
        .iter()
        .take(NAMED)
        .map(|(l, y, down)| format!("{} {:.4} {unit}·m ({:.3} m)", l.label, y * down, y))
        .collect();
    let more = beside.len().saturating_sub(NAMED);
    let more =
        if more > 0 { format!(" and {more} more, which the list of loads shows") } else { String::new() };
    let drift = if total.abs() > 0.0 {
        format!("their resultant stands {:.3} m beside the rib", couple / total)
    } else {
        "they have no resultant".into()
    };
    findings.push(
        note(
            Check::LeftOut,
            format!(
                "couples of the loads about the plane of the rib: {}{more}; sum {couple:.4} {unit}·m, {drift}. A plane analysis \
                 leaves this part out",
                shown.join(", ")
            ),
        )
        .value(couple, &format!("{unit}·m"))
        .of(&span.name),
    );
}

/// Loads named in one sentence.
const NAMED: usize = 20;
