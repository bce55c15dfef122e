//! Forces for the check of a section by the code in force: extremes of thrust and of moment, each with what goes with it.

use super::page::{Page, figures, words};
use crate::outcome::Run;
use crate::write::text::{self, four_digits, metres};

/// A table over all spans and cases; nothing where no line is the state of a rib.
pub fn block(run: &Run, page: &mut Page) {
    let mut rows = Vec::new();
    for span in &run.spans {
        for case in &span.cases {
            for f in &case.section_forces {
                rows.push(vec![
                    format!("{}, case {}: {}", span.name, case.name, f.what.replace('-', " ")),
                    four_digits(f.thrust),
                    four_digits(f.moment),
                    metres(f.s),
                    metres(f.at[0]),
                    metres(f.at[1]),
                ]);
            }
        }
    }
    if rows.is_empty() {
        return;
    }
    page.section("Forces for the check of sections", "table");
    let (m, _) = text::length_units(&run.units);
    let (force, moment) = (text::force_unit(&run.units), text::moment_unit(&run.units));
    page.table(
        &format!(
            "Extremes over the stations of the governing lines: thrust in {force}, moment in {moment}; with imperfection to \
             either side, amplified, where the rib is slender"
        ),
        &[words("What"), figures("N"), figures("M"), figures(format!("s, {m}")), figures(format!("x, {m}")), figures(format!("y, {m}"))],
        &rows,
    );
    page.end();
}
