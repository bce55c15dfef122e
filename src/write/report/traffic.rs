//! Traffic in the report: tables of the worst values, of the envelope and of the influence lines.

use super::page::{Column, Page, figures, sentence, words};
use crate::outcome::{Direction, InfluenceOrdinate, Run, Span, Status, Traffic, Units, WorstValue};
use crate::tolerance;
use crate::write::text::{self, four_digits, metres, signed_small, small, three_digits};

/// Stations told in a table.
const MOST: usize = 24;

/// The section on traffic; nothing where the job has none.
pub fn section(run: &Run, page: &mut Page) {
    if run.spans.iter().flat_map(|s| &s.cases).all(|c| c.traffic.is_empty()) {
        return;
    }
    page.section("Traffic", "table");
    for span in &run.spans {
        for case in &span.cases {
            for train in &case.traffic {
                one(span, &case.name, train, &run.units, page);
            }
        }
    }
    page.end();
}

fn one(span: &Span, case: &str, train: &Traffic, units: &Units, page: &mut Page) {
    let (m, mm) = text::length_units(units);
    let (kn, knm) = (text::force_unit(units), text::moment_unit(units));
    let head = format!("{}, {} on case {case}", span.name, train.name);
    if train.status != Status::Found {
        page.paragraph(&sentence(&format!(
            "{head}: not computed: {}",
            train.reason.as_deref().unwrap_or("no reason is known")
        )));
        return;
    }
    let mut told = format!("{head}: {} positions", train.positions);
    if let (Some(step), Some(finest), Some(change)) = (train.step, train.finest_step, train.uncertainty) {
        told.push_str(&format!(
            ", {} {m} apart and down to {} {m} about the worst; the last halving changed the worst values by {} %",
            metres(step),
            metres(finest),
            three_digits(change * 100.0)
        ));
    }
    if let Some(scale) = train.scale {
        told.push_str(&format!(". Factor on the stated forces: {}", four_digits(scale)));
    }
    if let Some(at) = &train.at_worst
        && !at.axles.is_empty()
    {
        told.push_str(&format!(
            ". Where the offset is largest {} {kn} of {} {kn} reach the rib, {} {kn} go to the ground on the left and {} \
             {kn} on the right",
            four_digits(-at.on_rib[1]),
            four_digits(-at.applied[1]),
            four_digits(-at.beside[0][1]),
            four_digits(-at.beside[1][1])
        ));
    }
    page.paragraph(&sentence(&told));
    // Small lengths in a large one.
    let smalls = if mm == "in" { 12.0 } else { 1000.0 };
    for line in &train.influence {
        let step = line.ordinates.len().div_ceil(MOST).max(1);
        let largest = |of: fn(&InfluenceOrdinate) -> f64| {
            line.ordinates.iter().map(|o| of(o).abs()).fold(0.0, f64::max)
        };
        let eccentricity = |o: &InfluenceOrdinate| o.eccentricity.unwrap_or(0.0);
        let most = [largest(|o| o.push), largest(|o| o.moment), largest(eccentricity)];
        // What rounding leaves of nothing is nothing.
        let shown = |v: f64, most: f64| if v.abs() <= most * tolerance::SHOWN_AS_NOTHING { 0.0 } else { v };
        let rows: Vec<Vec<String>> = line
            .ordinates
            .iter()
            .step_by(step)
            .map(|o| {
                vec![
                    metres(o.x),
                    four_digits(shown(o.push, most[0])),
                    four_digits(shown(o.moment, most[1])),
                    o.eccentricity.map(|e| three_digits(shown(e, most[2]) * smalls)).unwrap_or_default(),
                ]
            })
            .collect();
        page.table(
            &format!(
                "{head}: influence lines of one {kn}, joint at {} of the span",
                four_digits(line.fraction)
            ),
            &[
                figures(format!("x, {m}")),
                figures(format!("Push, {kn}")),
                figures(format!("Moment, {knm}")),
                figures(format!("Eccentricity, {mm}")),
            ],
            &rows,
        );
    }
    page.table(&format!("{head}: worst values"), &columns(m), &worst(train, units));
    let picked = train.envelope.len().div_ceil(MOST).max(1);
    let rows: Vec<Vec<String>> = train
        .envelope
        .iter()
        .step_by(picked)
        .map(|s| {
            let forces = |f: &Option<crate::outcome::Forces>| match f {
                Some(f) => [four_digits(f.thrust), four_digits(f.moment), metres(f.position)],
                None => Default::default(),
            };
            let e = |v: Option<f64>| v.map(|v| signed_small(v, units)).unwrap_or_default();
            let x = |v: Option<f64>| v.map(metres).unwrap_or_default();
            let mut row = vec![
                metres(s.at[0]),
                e(s.eccentricity_min),
                x(s.position_min),
                e(s.eccentricity_max),
                x(s.position_max),
            ];
            row.extend(forces(&s.thrust_min));
            row.extend(forces(&s.thrust_max));
            row
        })
        .collect();
    page.table(
        &format!(
            "{head}: extremes in the joints, each with the x of the first axle; offset in {mm}, thrust N in {kn} with its \
             moment M in {knm}, for the check of the section by the code in force"
        ),
        &[
            figures(format!("x, {m}")),
            figures("Offset least"),
            figures("axle x"),
            figures("most"),
            figures("axle x"),
            figures("N least"),
            figures("M"),
            figures("axle x"),
            figures("N most"),
            figures("M"),
            figures("axle x"),
        ],
        &rows,
    );
}

fn columns(m: &str) -> [Column; 5] {
    [
        words("What"),
        figures("Value"),
        words("Unit"),
        figures(format!("First axle at x, {m}")),
        words("Running"),
    ]
}

fn worst(train: &Traffic, units: &Units) -> Vec<Vec<String>> {
    let (_, mm) = text::length_units(units);
    let mut rows = Vec::new();
    let mut row = |name: &str, value: &WorstValue, factor: f64, unit: &str| {
        if value.status == Status::NotAsked {
            return;
        }
        let told = match (value.status, value.value) {
            (_, Some(v)) if unit == mm => small(v, units),
            (_, Some(v)) => four_digits(v * factor),
            (Status::Unbounded, None) => "no bound".into(),
            (Status::None, None) => "none".into(),
            _ => "not told".into(),
        };
        rows.push(vec![
            name.to_owned(),
            told,
            unit.to_owned(),
            value.position.map(metres).unwrap_or_default(),
            match value.direction {
                Some(Direction::Right) => "to the right".into(),
                Some(Direction::Left) => "to the left".into(),
                None => String::new(),
            },
        ]);
    };
    if let Some(w) = &train.worst {
        row("Largest offset", &w.offset, 1.0, mm);
        row("Largest eccentricity over d/6", &w.kern, 1.0, "1");
        row("Largest eccentricity over d/2", &w.ring, 1.0, "1");
        row("Largest edge stress", &w.stress, 1.0, text::stress_unit(units));
        row("Least load factor", &w.load_factor, 1.0, "1");
        row("Greatest lower end of the load factor", &w.load_factor_least, 1.0, "1");
        row("Least permitted multiple of the train", &w.multiple, 1.0, "1");
    }
    if let Some(p) = &train.push {
        for (name, pair) in [
            ("push of the governing line, left", &p.left),
            ("push of the governing line, right", &p.right),
            ("push of any line inside the ring, left", &p.inside_ring),
        ] {
            row(&format!("Least {name}"), &pair[0], 1.0, text::force_unit(units));
            row(&format!("Greatest {name}"), &pair[1], 1.0, text::force_unit(units));
        }
    }
    rows
}
