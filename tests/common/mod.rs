//! What the tests of the tag layer share.
#![allow(dead_code)]

use thrustmark::geometry::Point;
use thrustmark::refusal::Refusal;
use thrustmark::tags::marks::{Across, Along, LineType, Mark, MarkLayer, Marks, Plane, Shape};
use thrustmark::tags::validate::{check_inserted, new_problems, problems};
use thrustmark::tags::{APPLICATION, Options, Outline, Source, mark, scan, unmark};

/// Marks that use every shape, layer property and kind of text.
pub fn marks(plane: Plane) -> Marks {
    let p = Point::new;
    let layer = |name: &str, colour| MarkLayer {
        name: name.into(),
        colour,
        line_type: None,
        weight: None,
        frozen: false,
        off: false,
    };
    let line_type = |name: &str, pattern: &[f64]| LineType {
        name: name.into(),
        description: "__ . __ .".into(),
        pattern: pattern.to_vec(),
    };
    let text = |text: &str, angle, across, along| Shape::Text {
        at: p(3.5, -2.25),
        height: 0.25,
        text: text.into(),
        angle,
        across,
        along,
    };
    let chain = |bulge, closed| Shape::Polyline {
        points: vec![(p(0.0, 0.0), bulge), (p(10.0, 1.0 / 3.0), 0.0), (p(20.0, 0.0), 0.0)],
        closed,
    };
    let shapes = [
        Shape::Line(p(0.0, 0.1), p(1e-9, 1e6)),
        chain(0.0, false),
        chain(0.5, true),
        Shape::Circle(p(-0.0, 7.0), 2.5),
        Shape::Triangle([p(0.0, 0.0), p(1.0, 0.0), p(0.0, 1.0)]),
        text("thrust 12.5 kN", 0.0, Across::Left, Along::Baseline),
        text("Brücke 橋 😀 kN·m ^ 5 %%d \\U+0041", 0.7, Across::Centre, Along::Middle),
        text("H", -1.0, Across::Right, Along::Top),
    ];
    let last = shapes.len() - 1;
    Marks {
        application: APPLICATION.into(),
        plane,
        line_types: vec![
            line_type("THRUST-DASH", &[0.5, -0.25]),
            line_type("THRUST-DOT", &[0.5, -0.25, 0.0, -0.25]),
        ],
        layers: vec![
            MarkLayer { weight: Some(50), ..layer("THRUST-LINE", 1) },
            MarkLayer { line_type: Some(0), frozen: true, ..layer("THRUST-POLYGON", 3) },
            MarkLayer { off: true, ..layer("THRUST-NOTE", 7) },
        ],
        marks: shapes
            .into_iter()
            .enumerate()
            .map(|(i, shape)| Mark {
                layer: i % 3,
                role: format!("test {i}"),
                shape,
                colour: (i == last).then_some(2),
                line_type: (i == 1).then_some(1),
                width: (i == 2).then_some(0.25),
            })
            .collect(),
        facts: vec![
            ("sha256".into(), "0".repeat(64)),
            ("job".into(), "Prüfung ^ 橋 ".repeat(40)),
            ("empty".into(), String::new()),
        ],
    }
}

/// All bytes of a source.
pub fn bytes(source: &Source) -> Vec<u8> {
    let mut out = Vec::new();
    source.write_to(&mut out).unwrap();
    out
}

/// A plane that is no elevation in x and y.
pub const TILTED: Plane = Plane { right: [1.0, 0.0, 0.0], up: [0.0, 0.0, 1.0], origin: [5.0, -3.0, 2.0] };

/// Marks a drawing and takes the marks out again; gives the outline and the marked drawing.
pub fn round_trip(source: &Source, marks: &Marks) -> Result<(Outline, Source), Refusal> {
    let original = bytes(source);
    let outline = scan(source, &Options::default())?;
    assert_eq!(outline.len, original.len() as u64);
    assert_eq!(outline.sha256, Some(source.sha256().unwrap()));
    let edits = mark(source, &outline, marks)?;
    let marked = source.spliced(&edits)?;
    let again = scan(&marked, &Options::default()).expect("a marked drawing can be read");
    let found = again.marks.as_ref().expect("the marks are found");
    assert_eq!(found.version, Some(1), "{found:?}");
    assert_eq!(found.entities, marks.marks.len() as u64);
    assert_eq!(found.facts, marks.facts);
    let names: Vec<&String> = marks.layers.iter().map(|layer| &layer.name).collect();
    assert_eq!(found.layers.iter().collect::<Vec<_>>(), names);
    let refused = mark(&marked, &again, marks).expect_err("a marked drawing is not marked again");
    assert_eq!(refused.check, "already-marked");
    let restored = marked.spliced(&unmark(&marked, &again)?)?;
    assert_eq!(restored.len(), original.len() as u64);
    assert!(bytes(&restored) == original, "the restored bytes differ");
    assert_eq!(check_inserted(source, &outline, &edits)?, []);
    assert_eq!(new_problems(&problems(source)?, &problems(&marked)?), []);
    // The restored view is marked just as the source was.
    let third = scan(&restored, &Options::default())?;
    assert_eq!(third.marks, None);
    let twice = restored.spliced(&mark(&restored, &third, marks)?)?;
    assert!(bytes(&twice) == bytes(&marked), "marking twice gives other bytes");
    Ok((outline, marked))
}
