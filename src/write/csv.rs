//! Stations as comma-separated values, for spreadsheets and further checks: one row a joint of every line that was found.
//!
//! After RFC 4180: CR LF, quotes where they are needed, UTF-8 without a byte order mark. Numbers have a decimal point and
//! as many digits as read back the same. Every row names its units, as drawings of one run may differ in them.

use crate::outcome::{Document, Status};
use crate::write::text::plain;

/// The columns.
pub const HEADER: &str = "kind,drawing,span,case,line,governs,x,y,s,thrust,shear,moment,eccentricity,vertical_offset,\
depth,stress_max,stress_min,length_unit,force_unit,moment_unit,stress_unit";

/// All stations of all drawings, left to right. A drawing that could not be read has none.
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
                        let mut cells: Vec<String> = words.iter().map(|w| cell(w)).collect();
                        cells.extend(
                            [
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
                            ]
                            .map(number),
                        );
                        let units = &run.units;
                        let stress = units.stress.as_deref().unwrap_or_default();
                        cells.extend([&units.length, &units.force, &units.moment, stress].map(cell));
                        out.push_str(&cells.join(","));
                        out.push_str("\r\n");
                    }
                }
            }
        }
    }
    out
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
    fn cells() {
        assert_eq!(cell("a,b"), "\"a,b\"");
        assert_eq!(cell("say \"x\""), "\"say \"\"x\"\"\"");
        assert_eq!(cell("=1+1.dxf"), "'=1+1.dxf");
        assert_eq!(cell("a\u{1b}b\n"), "a\\x1bb\\x0a");
        assert_eq!(number(Some(-0.0)), "0");
        assert_eq!(number(Some(f64::NAN)), "");
    }
}
