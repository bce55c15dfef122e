//! Stations as comma-separated values, for spreadsheets and further checks: one row (`kind` = `station`) a joint of every
//! line that was found, and one (`kind` = `axis`) a corner of every suggested axis.
//!
//! After RFC 4180: CR LF, quotes where they are needed, UTF-8 without a byte order mark. Numbers have a decimal point and
//! as many digits as read back the same. Every row names its units, as drawings of one run may differ in them.

use crate::outcome::{Document, Run, Status};
use crate::write::text::plain;

/// The columns.
pub const HEADER: &str = "kind,drawing,span,case,line,governs,x,y,s,thrust,shear,moment,eccentricity,vertical_offset,\
depth,stress_max,stress_min,length_unit,force_unit,moment_unit,stress_unit";

/// All stations of all drawings, left to right, and after those of each span the corners of its suggested axes, where the
/// job asks for them. A drawing that could not be read has none.
pub fn stations(document: &Document) -> String {
    let mut out = String::from(HEADER);
    out.push_str("\r\n");
    for run in &document.runs {
        for span in &run.spans {
            for case in &span.cases {
                for line in case.lines.iter().filter(|l| l.status == Status::Found) {
                    let kind = serde_json::to_value(line.kind).ok();
                    let kind = kind.as_ref().and_then(|k| k.as_str()).unwrap_or_default();
                    let governs = if line.kind == case.governs { "yes" } else { "no" };
                    for station in &line.stations {
                        let words = ["station", &run.drawing.file, &span.name, &case.name, kind, governs];
                        let numbers = [
                            Some(station.at[0]),
                            Some(station.at[1]),
                            Some(station.s),
                            Some(station.thrust),
                            Some(station.shear),
                            Some(station.moment),
                            station.eccentricity,
                            station.vertical_offset,
                            station.depth,
                            station.stress_max,
                            station.stress_min,
                        ];
                        row(run, words, numbers, &mut out);
                    }
                }
            }
            for axis in span.suggestion.iter().flat_map(|s| &s.axes) {
                let mut s = 0.0;
                let mut before: Option<[f64; 2]> = None;
                for &[x, y] in &axis.points {
                    s += before.map_or(0.0, |[a, b]| (x - a).hypot(y - b));
                    before = Some([x, y]);
                    let words = ["axis", &run.drawing.file, &span.name, &axis.case, "", ""];
                    let mut numbers = [None; 11];
                    numbers[..3].copy_from_slice(&[Some(x), Some(y), Some(s)]);
                    row(run, words, numbers, &mut out);
                }
            }
        }
    }
    out
}

fn row(run: &Run, words: [&str; 6], numbers: [Option<f64>; 11], out: &mut String) {
    let mut cells: Vec<String> = words.iter().map(|w| cell(w)).collect();
    cells.extend(numbers.map(number));
    let units = &run.units;
    let stress = units.stress.as_deref().unwrap_or_default();
    cells.extend([&units.length, &units.force, &units.moment, stress].map(cell));
    out.push_str(&cells.join(","));
    out.push_str("\r\n");
}

/// A number, or nothing where there is none.
fn number(value: Option<f64>) -> String {
    match value {
        Some(v) if v.is_finite() => (v + 0.0).to_string(),
        _ => String::new(),
    }
}

/// A text, in quotes where it needs them. What a spreadsheet would take for a formula gets an apostrophe before it.
fn cell(text: &str) -> String {
    let mut text = plain(text);
    if text.starts_with(['=', '+', '-', '@']) {
        text.insert(0, '\'');
    }
    if text.contains([',', '"', '\n', '\r']) {
        return format!("\"{}\"", text.replace('"', "\"\""));
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::sample;

    #[test]
    fn one_row_a_station_and_as_many_cells_as_columns() {
        let run = sample::arch(5, 30.0, 6.0).run();
        let expected: usize = run.spans[0].cases[0].lines.iter().map(|l| l.stations.len()).sum();
        let first = run.spans[0].cases[0].lines[0].stations[0].clone();
        let text = stations(&sample::document(vec![run, sample::refused()]));
        let rows: Vec<&str> = text.split_terminator("\r\n").collect();
        assert_eq!(rows.len(), expected + 1);
        let columns: Vec<&str> = rows[0].split(',').collect();
        for row in &rows[1..] {
            assert_eq!(row.split(',').count(), columns.len(), "{row}");
        }
        let cells: Vec<&str> = rows[1].split(',').collect();
        let value = |name: &str| {
            cells[columns.iter().position(|c| *c == name).unwrap()].parse::<f64>().unwrap().to_bits()
        };
        assert_eq!(value("thrust"), first.thrust.to_bits());
        assert_eq!(value("moment"), (first.moment + 0.0).to_bits());
        assert_eq!(value("x"), (first.at[0] + 0.0).to_bits());
    }

    #[test]
    fn a_suggested_axis_has_a_row_for_each_corner() {
        let run = sample::suggested();
        let axis = run.spans[0].suggestion.as_ref().unwrap().axes[0].clone();
        let text = stations(&sample::document(vec![run]));
        let rows: Vec<Vec<&str>> = text
            .split_terminator("\r\n")
            .map(|r| r.split(',').collect::<Vec<_>>())
            .filter(|r| r[0] == "axis")
            .collect();
        assert_eq!(rows.len(), axis.points.len());
        for (row, point) in rows.iter().zip(&axis.points) {
            assert_eq!(row.len(), HEADER.split(',').count());
            let cell = |i: usize| row[i].parse::<f64>().unwrap();
            assert!((cell(6) - point[0]).abs() < 1e-12 && (cell(7) - point[1]).abs() < 1e-12);
        }
        assert!(rows[1][8].parse::<f64>().unwrap() > 0.0, "the length along the axis");
    }

    #[test]
    fn cells() {
        assert_eq!(cell("a,b"), "\"a,b\"");
        assert_eq!(cell("say \"x\""), "\"say \"\"x\"\"\"");
        assert_eq!(cell("=1+1.dxf"), "'=1+1.dxf");
        assert_eq!(cell("a\u{1b}b\n"), "a\\x1bb\\x0a");
        assert_eq!(number(Some(-0.0)), "0");
        assert_eq!(number(Some(f64::NAN)), "");
    }
}
