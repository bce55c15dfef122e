//! What would suit the loads better: the suggested axis as coordinates, and the least depth that would meet the limits.

use super::page::{Page, figures, sentence, words};
use crate::outcome::{Check, Run, Status};
use crate::write::text::{self, four_digits, metres, signed_small};

/// The section, where the job asks for suggestions.
pub fn section(run: &Run, page: &mut Page) {
    if run.spans.iter().all(|s| s.suggestion.is_none()) {
        return;
    }
    page.section("Suggested axis and depth", "table");
    page.paragraph(
        "The axis that would be the funicular of the loads of a case through the same springings and with the same rise; the \
         rib's own weight acts where the rib is drawn. Whether the axis may move, and for which case, is for the engineer to \
         say: an axis that suits one case strays in the others.",
    );
    let (m, mm) = text::length_units(&run.units);
    for span in &run.spans {
        let Some(suggestion) = &span.suggestion else { continue };
        for finding in run.findings.iter().filter(|f| f.check == Check::Suggestion) {
            if finding.span.as_ref() == Some(&span.name) && finding.case.is_none() {
                page.paragraph(&sentence(&format!("{}: {}.", span.name, finding.message)));
            }
        }
        for axis in &suggestion.axes {
            let name = format!("{}, case {}", span.name, axis.case);
            let Some(push) = axis.horizontal.filter(|_| axis.status == Status::Found) else {
                let why = axis.reason.as_deref().unwrap_or("none was found");
                page.paragraph(&sentence(&format!("{name}: no axis can be suggested: {why}.")));
                continue;
            };
            let rows: Vec<Vec<String>> = axis
                .moves
                .iter()
                .map(|step| {
                    vec![
                        step.load.clone().unwrap_or_else(|| "axis".into()),
                        metres(step.at[0]),
                        metres(step.at[1]),
                        metres(step.at[1] + step.by),
                        signed_small(step.by, &run.units),
                    ]
                })
                .collect();
            page.table(
                &format!(
                    "{name}: push of the suggested axis {} {}; {} corners, which the CSV output lists",
                    four_digits(push),
                    text::force_unit(&run.units),
                    axis.points.len()
                ),
                &[
                    words("Load"),
                    figures(format!("x, {m}")),
                    figures(format!("y drawn, {m}")),
                    figures(format!("y suggested, {m}")),
                    figures(format!("Move, {mm}, upward positive")),
                ],
                &rows,
            );
        }
    }
    page.end();
}
