//! Suggestions in words.

use super::{With, length, note};
use crate::outcome::{Check, Finding, Move, Span, Status, SuggestedAxis, Units};

/// What is suggested for a span, as notes: they decide nothing.
pub fn findings(span: &Span, units: &Units) -> Vec<Finding> {
    let Some(suggestion) = &span.suggestion else { return Vec::new() };
    let mut out: Vec<Finding> = suggestion
        .axes
        .iter()
        .map(|axis| Finding { case: Some(axis.case.clone()), ..about(axis, units).of(&span.name) })
        .collect();
    if let (Some(depth), Some(ring)) = (&suggestion.depth, &span.ring) {
        let message = match (depth.status, depth.factor) {
            (Status::Found, Some(factor)) if factor > 1.0 => format!(
                "with the axis as drawn, {factor:.2} times the depth would meet the limits that depend on it: {}",
                depths([ring.depth_min, ring.depth_max].map(|d| d * factor))
            ),
            (Status::Found, _) => "the limits that depend on the depth ask for no more of it".to_owned(),
            _ => "with the axis as drawn, no depth up to eight times the present one would meet the limits"
                .to_owned(),
        };
        let message = message + left_out(span);
        out.push(note(Check::Suggestion, message).of(&span.name));
    }
    out
}

/// What the search for a depth looks at the ring without.
fn left_out(span: &Span) -> &'static str {
    let trains = span.cases.iter().any(|c| !c.traffic.is_empty());
    let ranges = span.cases.iter().any(|c| c.ranges.is_some());
    match (trains, ranges) {
        (true, true) => {
            " (without the trains and at the values stated: their limits were not looked at for it)"
        }
        (true, false) => " (without the trains, whose limits were not looked at for it)",
        (false, true) => " (at the values stated, not over the ranges)",
        (false, false) => "",
    }
}

fn depths([low, high]: [f64; 2]) -> String {
    let (low, high) = (length(low), length(high));
    if low == high { low } else { format!("{low} to {high}") }
}

fn about(axis: &SuggestedAxis, units: &Units) -> Finding {
    let Some(push) = axis.horizontal else {
        let reason = axis.reason.as_deref().unwrap_or("none was found");
        return note(Check::Suggestion, format!("no axis can be suggested: {reason}"));
    };
    let size = |m: &Move| format!("{} {}", length(m.by.abs()), place(m));
    let moved = match axis.extremes() {
        (Some(up), Some(down)) => {
            format!("would lie up to {} higher than the drawn one and up to {} lower", size(up), size(down))
        }
        (Some(up), None) => format!("would lie up to {} higher than the drawn one", size(up)),
        (None, Some(down)) => format!("would lie up to {} lower than the drawn one", size(down)),
        (None, None) => "meets the drawn one at every load".to_owned(),
    };
    let force = if units.force == "kN" { "kN" } else { "unit loads" };
    let message = format!(
        "an axis that is the funicular of the loads, through the same springings and with the same rise (push {push:.1} \
         {force}), {moved}"
    );
    let most = axis.moves.iter().max_by(|a, b| a.by.abs().total_cmp(&b.by.abs()));
    let finding = note(Check::Suggestion, message).remedy(
        "the report and the CSV output list its points; it stands on a layer of its own, switched off",
    );
    match most {
        Some(most) => finding.value(most.by, "m").at(most.at),
        None => finding,
    }
}

/// Where, by the load that stands there.
fn place(m: &Move) -> String {
    match &m.load {
        Some(load) => format!("at load {load} (x = {:.2} m)", m.at[0]),
        None => format!("at x = {:.2} m", m.at[0]),
    }
}
