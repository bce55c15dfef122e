//! Thrust and moment along the axis, and what bounds them over the cases.

use super::page::{Page, figures};
use crate::outcome::{Line, Run, Span, Station};
use crate::tolerance;
use crate::write::annotate::governing;
use crate::write::picture;
use crate::write::text::{self, four_digits, metres, signed_small};

/// Parts of the axis at whose joints the bounds are told.
const PARTS: u32 = 10;

/// The section: a picture, and with several cases a table of both extremes.
pub fn section(run: &Run, page: &mut Page) {
    let Some(picture) = picture::forces(run) else { return };
    page.section("Thrust and moment along the axis", "picture");
    let mut caption =
        "Thrust and moment of the governing line over the span, as the tables of stations list them."
            .to_owned();
    if run.spans.iter().any(|s| s.cases.len() > 1) {
        caption.push_str(
            " Of several cases the one that is drawn on the elevation is heavy; the outermost curves bound them.",
        );
    }
    page.figure(picture, &caption);
    for span in run.spans.iter().filter(|s| s.cases.len() > 1) {
        table(run, span, page);
    }
    page.end();
}

fn table(run: &Run, span: &Span, page: &mut Page) {
    let lines: Vec<&Line> = span.cases.iter().filter_map(governing).collect();
    if lines.len() < 2 {
        return;
    }
    let (m, mm) = text::length_units(&run.units);
    let rows: Vec<Vec<String>> =
        (0..=PARTS).filter_map(|i| row(run, span, &lines, f64::from(i) / f64::from(PARTS))).collect();
    page.table(
        &format!(
            "{}, bounds over {} cases: each extreme with what acts together with it; N in {}, M in {}",
            span.name,
            lines.len(),
            text::force_unit(&run.units),
            text::moment_unit(&run.units)
        ),
        &[
            figures(format!("x, {m}")),
            figures(format!("Offset least, {mm}")),
            figures("most"),
            figures("N least"),
            figures("with M"),
            figures("N most"),
            figures("with M"),
            figures("M least"),
            figures("with N"),
            figures("M most"),
            figures("with N"),
        ],
        &rows,
    );
}

/// The bounds in one joint, on both sides of a load that stands there.
fn row(run: &Run, span: &Span, lines: &[&Line], part: f64) -> Option<Vec<String>> {
    let length = span.axis.length;
    let near = |t: &&Station| (t.s - part * length).abs() <= length * tolerance::SAME_JOINT;
    let here: Vec<&Station> = lines.iter().flat_map(|l| l.stations.iter().filter(near)).collect();
    let first = here.first()?;
    let size = here.iter().map(|t| t.thrust.hypot(t.shear)).fold(0.0, f64::max);
    let told = |v: f64, scale: f64| four_digits(text::beside(v, scale));
    let least = |of: fn(&Station) -> f64| here.iter().min_by(|a, b| of(a).total_cmp(&of(b)));
    let most = |of: fn(&Station) -> f64| here.iter().max_by(|a, b| of(a).total_cmp(&of(b)));
    let offsets = || here.iter().filter_map(|t| t.eccentricity);
    let offset = |value: Option<f64>| value.map(|v| signed_small(v, &run.units)).unwrap_or_default();
    let mut cells = vec![
        metres(first.at[0]),
        offset(offsets().min_by(f64::total_cmp)),
        offset(offsets().max_by(f64::total_cmp)),
    ];
    let moment = size * span.axis.span;
    for t in [least(|t| t.thrust)?, most(|t| t.thrust)?] {
        cells.extend([told(t.thrust, size), told(t.moment, moment)]);
    }
    for t in [least(|t| t.moment)?, most(|t| t.moment)?] {
        cells.extend([told(t.moment, moment), told(t.thrust, size)]);
    }
    Some(cells)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::report::page::Block;
    use crate::write::sample::arch;

    /// Every case lies between the bounds, and each bound is reached by a case.
    #[test]
    fn bounds_are_reached_and_not_passed() {
        let mut sample = arch(9, 30.0, 5.0);
        sample.case = vec![("dead".into(), 0.0), ("left".into(), 0.3), ("right".into(), -0.25)];
        let run = sample.run();
        let mut page = Page::default();
        section(&run, &mut page);
        let rows = page
            .blocks
            .iter()
            .find_map(|b| match b {
                Block::Table { rows, .. } => Some(rows.clone()),
                _ => None,
            })
            .unwrap();
        assert_eq!(rows.len(), 11);
        let span = &run.spans[0];
        for (i, row) in rows.iter().enumerate() {
            let s = span.axis.length * i as f64 / 10.0;
            let of_cases: Vec<&Station> = span
                .cases
                .iter()
                .flat_map(|c| &c.lines[0].stations)
                .filter(|t| (t.s - s).abs() < 1e-6 * span.axis.length)
                .collect();
            assert!(of_cases.len() >= 3);
            for (column, of) in [
                (3, (|t: &Station| t.thrust) as fn(&Station) -> f64),
                (7, (|t: &Station| t.moment) as fn(&Station) -> f64),
            ] {
                let (low, high) = (&row[column], &row[column + 2]);
                let values: Vec<f64> = of_cases.iter().map(|t| of(t)).collect();
                let least = values.iter().copied().fold(f64::INFINITY, f64::min);
                let most = values.iter().copied().fold(f64::NEG_INFINITY, f64::max);
                for (told, value) in [(low, least), (high, most)] {
                    let told: f64 = told.parse().unwrap();
                    assert!((told - value).abs() <= 6e-4 * value.abs() + 1e-4, "{told} for {value}");
                }
            }
        }
        // A single case has its curves and nothing to bound.
        let mut page = Page::default();
        section(&arch(5, 30.0, 6.0).run(), &mut page);
        assert!(page.blocks.iter().all(|b| !matches!(b, Block::Table { .. })));
        assert!(page.blocks.iter().any(|b| matches!(b, Block::Figure { .. })));
    }
}
