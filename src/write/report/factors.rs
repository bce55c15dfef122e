//! Factors of a ring without tension: what they are, the mechanism of the load factor, and what ranges make of them.

use super::page::{Page, figures, words};
use crate::outcome::{RangedValue, Ranges, Run, Safety, Span, Status};
use crate::write::text::{four_digits, metres};

/// The factors of all spans and cases; nothing where they do not apply.
pub fn block(run: &Run, page: &mut Page) {
    let mut factors = Vec::new();
    let mut hinges = Vec::new();
    let mut ranges = Vec::new();
    for span in &run.spans {
        for case in &span.cases {
            let name = format!("{}, case {}", span.name, case.name);
            if let Some(safety) = &case.safety {
                factors.push(row(&name, span, safety));
                for (i, hinge) in safety.hinges.iter().enumerate() {
                    hinges.push(vec![
                        format!("{name}: {}", i + 1),
                        hinge.side.clone(),
                        metres(hinge.at[0]),
                        metres(hinge.at[1]),
                    ]);
                }
            }
            if let Some(found) = &case.ranges {
                ranges.extend(over(&name, found));
            }
        }
    }
    if factors.is_empty() {
        return;
    }
    page.section("Factors of the ring", "table");
    page.paragraph(
        "The geometric factor thins the ring about its axis with the loads unchanged; the least depth takes the ring's own \
         weight down with it: two different numbers. The load factor multiplies the varying loads, the others stay. All are \
         those of a ring without tension on abutments that take the push.",
    );
    page.table(
        "Factors",
        &[
            words("Case"),
            figures("Geometric factor"),
            figures("Load factor from"),
            figures("up to"),
            figures(format!("Least depth, {}", run.units.length)),
            figures("of"),
        ],
        &factors,
    );
    if !hinges.is_empty() {
        page.table(
            "Mechanism of the greatest load factor: where the ring turns (or slips), from left to right",
            &[
                words("Hinge"),
                words("Edge"),
                figures(format!("x, {}", run.units.length)),
                figures(format!("y, {}", run.units.length)),
            ],
            &hinges,
        );
    }
    if !ranges.is_empty() {
        page.table(
            "Worst and best over the ranges stated",
            &[words("Factor"), words("Which"), figures("Value"), words("With"), words("Found")],
            &ranges,
        );
    }
    page.end();
}

fn row(name: &str, span: &Span, safety: &Safety) -> Vec<String> {
    let told = |key: &str, value: Option<f64>| match (safety.status.get(key), value) {
        (_, Some(value)) => four_digits(value),
        (Some(Status::Unbounded), None) => "without bound".into(),
        (Some(Status::None), None) => "none".into(),
        (Some(Status::Refused), None) => "not found".into(),
        _ => "not asked".into(),
    };
    let thinnest = span.ring.as_ref().map(|r| metres(r.depth_min)).unwrap_or_default();
    vec![
        name.to_owned(),
        told("geometric_factor", safety.geometric_factor),
        told("load_factor_least", safety.load_factor_least),
        told("load_factor", safety.load_factor),
        safety.least_depth.map_or_else(|| told("least_depth", None), metres),
        thinnest,
    ]
}

fn over(name: &str, ranges: &Ranges) -> Vec<Vec<String>> {
    let row = |factor: &str, which: &str, value: &RangedValue| {
        let told = match (value.status, value.value) {
            (_, Some(value)) => four_digits(value),
            (Status::Unbounded, None) => "without bound".into(),
            (Status::None, None) => "none".into(),
            _ => "not found".into(),
        };
        // Keys of the job keep its units, whatever those of the report are.
        let unit = |what: &str| ranges.inputs.iter().find(|i| i.what == what).map_or("", |i| i.unit.as_str());
        let each = |(what, v): (&String, &f64)| {
            format!("{what} = {} {}", four_digits(*v), unit(what)).trim_end().to_owned()
        };
        let with: Vec<String> = value.inputs.iter().map(each).collect();
        let found = if value.found == "corners" { "corner, exact" } else { "sampled" };
        vec![
            format!("{name}: {}", factor.replace('_', " ")),
            which.into(),
            told,
            with.join(", "),
            found.into(),
        ]
    };
    ranges
        .factors
        .iter()
        .flat_map(|f| [row(&f.name, "worst", &f.worst), row(&f.name, "best", &f.best)])
        .collect()
}

#[cfg(test)]
mod tests {
    use std::collections::BTreeMap;

    use super::*;
    use crate::outcome::{Case, Hinge, RangedFactor};
    use crate::write::sample;

    #[test]
    fn factors_mechanism_and_ranges_are_told() {
        let mut run = sample::arch(5, 30.0, 6.0).run();
        let mut page = Page::default();
        block(&run, &mut page);
        assert!(page.blocks.is_empty(), "no factors, no section");
        let value = |v: Option<f64>, found: &str| RangedValue {
            status: if v.is_some() { Status::Found } else { Status::None },
            value: v,
            reason: None,
            inputs: BTreeMap::from([("rib.strength".to_owned(), 4.5)]),
            found: found.into(),
        };
        let case: &mut Case = &mut run.spans[0].cases[0];
        case.safety = Some(Safety {
            geometric_factor: Some(2.345),
            load_factor: None,
            load_factor_least: Some(0.0),
            least_depth: Some(0.321),
            status: BTreeMap::from([("load_factor".to_owned(), Status::Unbounded)]),
            hinges: vec![Hinge { at: [1.25, 2.5], side: "intrados".into() }],
            proof: None,
        });
        case.ranges = Some(Ranges {
            inputs: Vec::new(),
            factors: vec![RangedFactor {
                name: "load_factor".into(),
                worst: value(None, "corners"),
                best: value(Some(7.125), "sampling"),
            }],
        });
        block(&run, &mut page);
        let told = format!("{:?}", page.blocks);
        for words in [
            "2.345",
            "without bound",
            "0.321",
            "intrados",
            "1.250",
            "load factor",
            "rib.strength = 4.5",
            "sampled",
        ] {
            assert!(told.contains(words), "{words}: {told}");
        }
    }
}
