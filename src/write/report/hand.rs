//! The hand-check block: what an engineer can follow with a pocket calculator, beside what was computed.
//!
//! For upright loads the line of thrust through the springings and the crown of the axis has the push `H = M0 / f`, where
//! `M0` is the moment at the crown of a simple beam of the same span and `f` the rise over the chord there (C. Culmann,
//! *Die graphische Statik*, 1866). A line fitted in another way has another push; the ratio says how far.

use super::page::{Page, figures, words};
use crate::geometry::Vec2;
use crate::outcome::{Case, Run, Span};
use crate::tolerance;
use crate::write::annotate::elevation::thrust_angle;
use crate::write::annotate::governing;
use crate::write::text::{self, beside, four_digits, metres};

/// The simple beam under the loads of one case.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Beam {
    /// Sum of the loads, downward positive.
    pub total: f64,
    /// Where their resultant acts.
    pub at: f64,
    /// Reactions of the beam.
    pub reactions: [f64; 2],
    /// Moment of the beam at the crown.
    pub moment: f64,
    /// Moment over rise.
    pub push: f64,
}

/// The simple beam of a case; `None` when its loads are not all upright or have no resultant.
pub fn beam(span: &Span, case: &Case) -> Option<Beam> {
    let force = |i: usize| *case.forces.get(i).unwrap_or(&span.loads[i].force);
    let loads: Vec<(f64, f64)> =
        span.loads.iter().enumerate().map(|(i, load)| (load.at[0], -force(i)[1])).collect();
    let size: f64 = loads.iter().map(|l| l.1.abs()).sum();
    let sideways: f64 = (0..span.loads.len()).map(|i| force(i)[0].abs()).sum();
    let total: f64 = loads.iter().map(|l| l.1).sum();
    let upright = sideways <= size * tolerance::NO_FORCE;
    // Loads that the case holds besides those told here would make the beam another one.
    let complete = (total + case.total_load[1]).abs() <= size * tolerance::NO_FORCE;
    if !upright || !complete || total.abs() <= size * tolerance::NO_FORCE {
        return None;
    }
    let axis = &span.axis;
    let (left, crown) = (axis.left[0], axis.crown[0]);
    let about_left: f64 = loads.iter().map(|(x, p)| p * (x - left)).sum();
    let right_reaction = about_left / axis.span;
    let left_reaction = total - right_reaction;
    let before: f64 = loads.iter().filter(|l| l.0 < crown).map(|(x, p)| p * (crown - x)).sum();
    let moment = left_reaction * (crown - left) - before;
    Some(Beam {
        total,
        at: left + about_left / total,
        reactions: [left_reaction, right_reaction],
        moment,
        push: moment / axis.rise,
    })
}

/// The block for all spans and cases.
pub fn block(run: &Run, page: &mut Page) {
    page.section("Hand check", "table");
    let force = text::force_unit(&run.units);
    let moment = text::moment_unit(&run.units);
    let mut rows = Vec::new();
    let mut skipped = Vec::new();
    for span in &run.spans {
        for case in &span.cases {
            let name = format!("{}, case {}", span.name, case.name);
            let Some(beam) = beam(span, case) else {
                skipped.push(name);
                continue;
            };
            let push = governing(case).and_then(|l| l.left.as_ref()).map(|end| end.horizontal);
            rows.push(vec![
                name,
                four_digits(beam.total),
                metres(beam.at),
                four_digits(beam.reactions[0]),
                four_digits(beam.reactions[1]),
                four_digits(beam.moment),
                metres(span.axis.rise),
                four_digits(beam.push),
                push.map(four_digits).unwrap_or_default(),
                push.map(|h| format!("{:.3}", h / beam.push)).unwrap_or_default(),
            ]);
        }
    }
    if !rows.is_empty() {
        page.paragraph(
            "A line of thrust through the springings and the crown of the axis has the push H = M0 / f, with M0 the moment \
             of the simple beam at the crown and f the rise. Another line has another push; the last column compares.",
        );
        page.table(
            &format!(
                "Simple beam under the loads; forces in {force}, moments in {moment}, lengths in {}",
                run.units.length
            ),
            &[
                words("Case"),
                figures("Total load"),
                figures("acts at x"),
                figures("Reaction left"),
                figures("right"),
                figures("M0 at crown"),
                figures("f"),
                figures("M0 / f"),
                figures("H computed"),
                figures("H f / M0"),
            ],
            &rows,
        );
    }
    if !skipped.is_empty() {
        page.paragraph(&format!(
            "Simple beam not compared, as the loads are not all upright and told one by one: {}.",
            skipped.join("; ")
        ));
    }
    ends(run, page);
    page.end();
}

/// What the foundations get, per case.
fn ends(run: &Run, page: &mut Page) {
    let force = text::force_unit(&run.units);
    let moment = text::moment_unit(&run.units);
    let mut rows = Vec::new();
    for span in &run.spans {
        for case in &span.cases {
            let Some(line) = governing(case) else { continue };
            let near = span.axis.length * tolerance::SAME_JOINT;
            for (side, end, station, s) in [
                ("left", &line.left, line.stations.first(), 0.0),
                ("right", &line.right, line.stations.last(), span.axis.length),
            ] {
                let Some(end) = end else { continue };
                let station = station.filter(|t| (t.s - s).abs() <= near);
                let told = station.map(|t| four_digits(beside(t.moment, t.thrust * span.axis.span)));
                rows.push(vec![
                    format!("{}, case {}, {side}", span.name, case.name),
                    four_digits(end.horizontal),
                    four_digits(end.vertical),
                    four_digits(Vec2::new(end.horizontal, end.vertical).hypot()),
                    told.unwrap_or_default(),
                    thrust_angle(end.horizontal, end.vertical),
                ]);
            }
        }
    }
    if !rows.is_empty() {
        page.table(
            &format!(
                "Action of the abutments on the rib, for the foundations; forces in {force}, moments in {moment}"
            ),
            &[
                words("Springing"),
                figures("H inward"),
                figures("V upward"),
                figures("Resultant"),
                figures("M about the axis"),
                figures("Angle to the level, deg"),
            ],
            &rows,
        );
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::sample;

    #[test]
    fn beam_of_three_equal_loads() {
        // Loads of 100 kN at the quarter points of 12 m: reactions 150, M0 = 150·6 − 100·3 = 600, f = 6.
        let run = sample::arch(3, 12.0, 6.0).run();
        let beam = beam(&run.spans[0], &run.spans[0].cases[0]).unwrap();
        for (found, expected) in [
            (beam.total, 300.0),
            (beam.at, 6.0),
            (beam.reactions[0], 150.0),
            (beam.reactions[1], 150.0),
            (beam.moment, 600.0),
            (beam.push, 100.0),
        ] {
            assert!((found - expected).abs() < 1e-9, "{found} for {expected}");
        }
    }

    #[test]
    fn sideways_loads_have_no_simple_beam() {
        let mut run = sample::arch(3, 12.0, 6.0).run();
        run.spans[0].loads[1].force[0] = 5.0;
        run.spans[0].cases[0].forces.clear();
        assert_eq!(super::beam(&run.spans[0], &run.spans[0].cases[0]), None);
    }
}
