//! Drawn dimensions against the drawn geometry.

use super::{With, note, spans};
use crate::job::Settings;
use crate::model::dimensions::{Measured, Quantity};
use crate::outcome::{Check, Finding, FindingVerdict};
use crate::tolerance;

/// Holds every dimension of span, rise and depth against the limit, or tells by how much it differs.
pub fn judge(measured: &[Measured], settings: &Settings, findings: &mut Vec<Finding>) {
    let limit = settings.limits.dimension;
    for one in measured {
        findings.push(finding(one, limit));
    }
    if limit.is_some() && !measured.iter().any(|m| m.stated.is_some()) {
        let text =
            "the stated limit `dimension` was not judged: no dimension of span, rise or depth was found";
        findings.push(note(Check::NotJudged, text).uncheck());
    }
}

fn finding(one: &Measured, limit: Option<f64>) -> Finding {
    let what = match one.quantity {
        Quantity::Span => "span",
        Quantity::Rise => "rise",
        Quantity::Depth => "depth",
    };
    let by_hand = one.text.as_ref().map_or_else(String::new, |text| {
        format!(", by the text \"{text}\" written in place of the measured length")
    });
    let Some(stated) = one.stated else {
        return note(
            Check::Dimension,
            format!(
                "{} of the {what} says no length that could be meant{by_hand}; drawn are {:.4} m",
                one.source.named(),
                one.drawn
            ),
        )
        .at(spans::xy(one.at))
        .of(&one.span)
        .entity(&one.source)
        .uncheck();
    };
    let off = (stated - one.drawn).abs();
    let mut finding = note(
        Check::Dimension,
        format!(
            "{} says {stated:.4} m for the {what}{by_hand}; drawn are {:.4} m, {} apart",
            one.source.named(),
            one.drawn,
            small(off)
        ),
    )
    .value(off, "m")
    .at(spans::xy(one.at))
    .of(&one.span)
    .entity(&one.source);
    if let Some(limit) = limit {
        let holds = off <= limit * (1.0 + tolerance::LIMIT_MET);
        finding.verdict = if holds { FindingVerdict::Within } else { FindingVerdict::Outside };
        finding.limit = Some(limit);
        finding.basis = Some("[limits] dimension".into());
        if !holds {
            finding = finding.remedy(
                "correct the dimension or the arch; of a text written by hand, let the program measure",
            );
        }
    }
    finding
}

/// A small length in words.
fn small(metres: f64) -> String {
    format!("{:.1} mm", metres * 1000.0)
}
