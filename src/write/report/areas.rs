//! What stands on the spans by outline or up to a level, as a table.

use super::page::{Page, figures, words};
use crate::outcome::{AreaShare, Run};
use crate::write::text::{self, four_digits, metres};

/// A table for each span on which something stands.
pub fn tables(run: &Run, page: &mut Page) {
    let unit = text::force_unit(&run.units);
    let (m, _) = text::length_units(&run.units);
    for span in run.spans.iter().filter(|s| !s.areas.is_empty()) {
        let rows: Vec<Vec<String>> = span.areas.iter().map(row).collect();
        page.table(
            &format!(
                "{}, what stands on the ring: weights in {unit}, without the factors of cases",
                span.name
            ),
            &[
                words("Area"),
                figures("Pieces"),
                figures(format!("{m}²")),
                figures("Weight"),
                figures(format!("at x, {m}")),
                figures("Pieces against whole"),
                figures("Beyond the left end"),
                figures("Beyond the right end"),
                figures("Sideways, to the right"),
                figures("Sideways, to the left"),
            ],
            &rows,
        );
    }
}

fn row(area: &AreaShare) -> Vec<String> {
    vec![
        area.name.clone(),
        area.pieces.to_string(),
        four_digits(area.area),
        four_digits(area.weight),
        area.at.map_or_else(|| "none".into(), |at| metres(at[0])),
        residual(area),
        four_digits(area.beyond[0]),
        four_digits(area.beyond[1]),
        four_digits(area.sideways[0]),
        four_digits(-area.sideways[1] + 0.0),
    ]
}

/// Digits far below are rounding and differ between machines.
fn residual(area: &AreaShare) -> String {
    if area.residual < crate::tolerance::SHOWN_ERROR {
        format!("below {:.0e}", crate::tolerance::SHOWN_ERROR)
    } else {
        format!("{:.0e}", area.residual)
    }
}
