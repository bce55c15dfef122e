//! Forces in the joints of the governing lines.

use super::page::{Page, figures};
use super::sections::offset;
use crate::outcome::{Line, Run, Station};
use crate::tolerance;
use crate::write::annotate::{governing, worst_case};
use crate::write::text::{self, beside, four_digits, metres, three_digits};

/// Most stations told of one line; beyond that every second, third … and always ends and worst.
const MOST: usize = 40;

/// A table of stations for the worst case of each span.
pub fn tables(run: &Run, page: &mut Page) {
    page.section("Stations of the governing line", "table");
    let force = text::force_unit(&run.units);
    let moment = text::moment_unit(&run.units);
    let (m, mm) = text::length_units(&run.units);
    let stress_in = text::stress_unit(&run.units);
    for span in &run.spans {
        let Some(case) = worst_case(run, span) else { continue };
        let Some(line) = governing(case) else {
            page.paragraph(&format!("{}: no line of thrust was found.", span.name));
            continue;
        };
        let told = chosen(line);
        let stress = told.iter().any(|t| t.stress_max.is_some());
        let depth = told.iter().any(|t| t.depth.is_some());
        let mut columns = vec![
            figures(format!("s, {m}")),
            figures(format!("x, {m}")),
            figures(format!("y, {m}")),
            figures("N"),
            figures("V"),
            figures("M"),
            figures(format!("Offset, {mm}")),
        ];
        if depth {
            columns.extend([figures(format!("Depth, {m}")), figures("Offset / half depth")]);
        }
        if stress {
            columns.extend([
                figures(format!("Stress most, {stress_in}")),
                figures(format!("least, {stress_in}")),
            ]);
        }
        let rows: Vec<Vec<String>> = told
            .iter()
            .map(|t| {
                let size = t.thrust.hypot(t.shear);
                let mut row = vec![
                    metres(t.s),
                    metres(t.at[0]),
                    metres(t.at[1]),
                    four_digits(beside(t.thrust, size)),
                    four_digits(beside(t.shear, size)),
                    four_digits(beside(t.moment, size * span.axis.span)),
                    offset(t.eccentricity, &run.units),
                ];
                if depth {
                    row.push(t.depth.map(metres).unwrap_or_default());
                    let used = t.eccentricity.zip(t.depth).map(|(e, d)| format!("{:.3}", 2.0 * e.abs() / d));
                    row.push(used.unwrap_or_default());
                }
                if stress {
                    row.push(t.stress_max.map(three_digits).unwrap_or_default());
                    row.push(t.stress_min.map(three_digits).unwrap_or_default());
                }
                row
            })
            .collect();
        let mut caption = format!(
            "{}, case {}: thrust N (compression positive) and shear V in {force}, moment M in {moment}",
            span.name, case.name
        );
        if told.len() < line.stations.len() {
            caption.push_str(&format!(
                "; {} of {} stations, the CSV output holds all",
                told.len(),
                line.stations.len()
            ));
        }
        page.table(&caption, &columns, &rows);
    }
    page.end();
}

/// The stations told: all of a few, else evenly thinned, with both ends and the worst.
fn chosen(line: &Line) -> Vec<&Station> {
    let count = line.stations.len();
    let step = count.div_ceil(MOST).max(1);
    let worst = line.stations.iter().enumerate().max_by(|a, b| {
        let size = |t: &Station| t.eccentricity.map_or(-1.0, f64::abs);
        size(a.1).total_cmp(&size(b.1))
    });
    let worst = worst.map(|w| w.0);
    let picked = line
        .stations
        .iter()
        .enumerate()
        .filter(|(i, _)| i % step == 0 || i + 1 == count || Some(*i) == worst);
    let mut out: Vec<&Station> = Vec::new();
    for (_, station) in picked {
        // Two stations at one place, before and after a load, differ in their forces only.
        let same = out.last().is_some_and(|last| {
            (last.s - station.s).abs() <= tolerance::SAME_JOINT
                && (last.thrust - station.thrust).abs() <= last.thrust.abs() * tolerance::NO_FORCE
        });
        if !same {
            out.push(station);
        }
    }
    out
}
