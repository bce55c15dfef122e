//! What stands on the sheets: all that the report says, inside the margins, with nothing on top of anything.
#![allow(clippy::unwrap_used)]

use super::flow::{BOTTOM, Flow, HEIGHT, MARGIN, Op, WIDTH};
use super::lettering::Lettering;
use super::*;
use crate::outcome::Run;
use crate::write::report::page::Block;
use crate::write::report::{blocks, head};
use crate::write::sample::{self, arch};

/// Runs of all kinds: within, outside, unchecked, suggested, refused, many loads, several spans and cases.
fn runs() -> Vec<Run> {
    let mut cases = sample::Sample { depth: Some(0.6), others: true, ..arch(9, 30.0, 5.0) }.limited(0.3);
    cases.case = vec![("dead".into(), 0.0), ("traffic left".into(), 0.3), ("traffic right".into(), -0.25)];
    let mut hostile = arch(3, 20.0, 5.0).run();
    hostile.drawing.file =
        "a-rather-long-name-without-any-blank-as-offices-like-them-0001-rev-c-".repeat(3) + ".dxf";
    hostile.spans[0].loads[0].set = "桥\u{1b}".repeat(40);
    hostile.findings[0].message = "word ".repeat(900);
    let long = serde_json::json!({ "rib": { "depth": 0.4 }, "layers": { "axis": "X".repeat(200) } });
    hostile.settings = long;
    vec![
        arch(7, 36.0, 9.0).limited(9.0).run(),
        arch(40, 36.0, 9.0).unit_loads().run(),
        arch(200, 80.0, 9.0).limited(0.01).run(),
        sample::suggested(),
        cases.run(),
        sample::refused(),
        sample::run_of(vec![
            arch(6, 30.0, 6.0).limited(0.02),
            sample::Sample { x: 34.0, ..arch(3, 18.0, 5.0) },
        ]),
        hostile,
    ]
}

fn with_flow(runs: Vec<Run>, look: impl Fn(&[Block], &Lettering, &Flow)) {
    let document = sample::document(runs);
    let (head, blocks) = (head(&document, "2026-03-01"), blocks(&document));
    let lettering = Lettering::new().unwrap();
    let mut flow = Flow::new(&lettering);
    set::set(&head, &blocks, &mut flow);
    look(&blocks, &lettering, &flow);
}

fn bare(text: &str) -> String {
    text.split_whitespace().collect()
}

#[test]
fn nothing_leaves_the_sheet_or_lies_on_anything() {
    let mut all: Vec<Vec<Run>> = runs().into_iter().map(|r| vec![r]).collect();
    all.push(runs());
    for runs in all {
        with_flow(runs, |_, lettering, flow| {
            for (number, sheet) in flow.sheets.iter().enumerate() {
                let mut boxes: Vec<(f64, f64, f64, f64, &str)> = Vec::new();
                for op in &sheet.ops {
                    let (left, right, top, low, text) = match op {
                        Op::Text { at, size, text, .. } => (
                            at.0,
                            at.0 + lettering.width(text) * size,
                            at.1 - 0.74 * size,
                            at.1 + 0.2 * size,
                            text.as_str(),
                        ),
                        Op::Picture { at, scale, picture, .. } => {
                            let size = (picture.high - picture.low) * picture.scale * *scale;
                            (at.0, at.0 + size.x, at.1, at.1 + size.y, "a picture")
                        }
                        Op::Line { .. } => continue,
                    };
                    let inside = left >= MARGIN - 0.1 && right <= WIDTH - MARGIN + 0.4;
                    assert!(inside, "sheet {}: '{text}' {left:.1} to {right:.1}", number + 1);
                    assert!(
                        top > 20.0 && low < BOTTOM + 3.0,
                        "sheet {}: '{text}' {top:.1} to {low:.1}",
                        number + 1
                    );
                    for b in &boxes {
                        let apart = left >= b.1 - 0.3 || b.0 >= right - 0.3 || top >= b.3 || b.2 >= low;
                        assert!(apart, "sheet {}: '{text}' lies on '{}'", number + 1, b.4);
                    }
                    boxes.push((left, right, top, low, text));
                }
                assert!(!boxes.is_empty(), "sheet {} of {} is empty", number + 1, flow.sheets.len());
            }
            const { assert!(HEIGHT > BOTTOM) };
        });
    }
}

/// Whatever the page for browsers says, the sheets say.
#[test]
fn every_word_of_the_report_is_on_the_sheets() {
    for run in runs() {
        with_flow(vec![run], |blocks, lettering, flow| {
            let mut texts: Vec<String> = vec![String::new(); flow.parts.len()];
            for op in flow.sheets.iter().flat_map(|s| &s.ops) {
                if let Op::Text { owner: Some(owner), text, .. } = op {
                    texts[*owner].push_str(&bare(text));
                }
            }
            let told = |text: &str| {
                let wanted = bare(&lettering.legible(text));
                assert!(wanted.is_empty() || texts.contains(&wanted), "'{text}' is not on the sheets");
            };
            let mut pictures = 0;
            for block in blocks {
                match block {
                    Block::Contents(_) | Block::DrawingEnd | Block::End => {}
                    Block::Drawing(d) => [d.name.as_str(), d.words].into_iter().for_each(told),
                    Block::Section { heading, .. } => told(heading),
                    Block::Paragraph(text) => told(text),
                    Block::Bullets(lines) => lines.iter().for_each(|l| told(l)),
                    Block::List { rows, .. } => rows.iter().for_each(|(name, value)| {
                        told(name);
                        told(value);
                    }),
                    Block::Table { caption, columns, rows } => {
                        told(caption);
                        columns.iter().for_each(|c| told(&c.name));
                        rows.iter().flatten().for_each(|c| told(c));
                    }
                    Block::Figure { caption, .. } => {
                        pictures += 1;
                        told(caption);
                    }
                    Block::Signatures(roles) => roles.iter().for_each(|r| told(r)),
                }
            }
            let ops = flow.sheets.iter().flat_map(|s| &s.ops);
            assert_eq!(ops.filter(|op| matches!(op, Op::Picture { .. })).count(), pictures);
        });
    }
}

#[test]
fn is_a_pdf_and_twice_the_same() {
    let document = sample::document(runs());
    let make = || crate::write::report::pdf(&document, "2026-03-01").unwrap();
    let once = make();
    assert!(once.starts_with(b"%PDF-"));
    assert_eq!(once, make());
    let text = String::from_utf8_lossy(&once);
    assert!(text.contains("<xmp:CreatorTool>thrustmark 0.1.0"), "the maker is named in clear text");
    assert!(text.contains("2026-03-01"), "the date is the run's");
}
