//! Layout: nothing overlaps, nothing lies on the axis, and what is written is what was computed.
#![allow(clippy::unwrap_used)]

use proptest::prelude::*;

use super::*;
use crate::outcome::{FindingVerdict, LineKind, Status};
use crate::tags::marks::{Mark, Shape};
use crate::write::sample::{self, Sample, arch, run_of};

fn sheet() -> Sheet {
    Sheet {
        metres_per_unit: 1.0,
        plane: Plane::XY,
        elevation: None,
        model_space: None,
        occupied: vec![],
        drawing_text_height: None,
        viewport_scale: None,
        text_height: TextHeight::Auto,
        prefix: "THRUST-".into(),
        frozen: false,
        tool_version: "0.1.0".into(),
        date: "2026-03-01".into(),
        source_name: "bridge.dxf".into(),
        sha256: "ab".repeat(32),
        job_hash: Some("cd".repeat(32)),
    }
}

fn texts(marks: &Marks) -> Vec<(String, Box2, &Mark)> {
    marks
        .marks
        .iter()
        .filter_map(|m| match &m.shape {
            Shape::Text { at, height, text, angle, across, along } => {
                Some((text.clone(), Box2::of_text(*at, *height, text, *angle, *across, *along), m))
            }
            _ => None,
        })
        .collect()
}

fn has(marks: &Marks, role: &str) -> usize {
    marks.marks.iter().filter(|m| m.role == role).count()
}

/// The promises of the layout, for any run.
fn assert_calm(run: &Run, sheet: &Sheet) -> Marks {
    let marks = annotate(run, sheet);
    let texts = texts(&marks);
    for (i, (a, box_a, _)) in texts.iter().enumerate() {
        for (b, box_b, _) in &texts[i + 1..] {
            assert!(!box_a.overlaps(box_b), "'{a}' lies on '{b}'");
        }
    }
    let unit = 1.0 / sheet.metres_per_unit;
    for span in &run.spans {
        let shown = Shown::new(run, span, unit);
        for chain in [&shown.chords, &shown.vertices] {
            for pair in chain.windows(2) {
                for (text, covered, _) in &texts {
                    assert!(!covered.meets(pair[0], pair[1]), "'{text}' lies on axis or line");
                }
            }
        }
    }
    // The blocks stand clear of the elevation and of each other's frames.
    let frame = marks.marks.iter().find(|m| m.role == "frame").unwrap();
    let Shape::Polyline { points, .. } = &frame.shape else { panic!() };
    let inside = Box2::upright(points[0].0, points[2].0);
    for (text, covered, mark) in &texts {
        let within = ["heading", "note", "key", "signs", "caution"].contains(&mark.role.as_str());
        let reach = covered.reach();
        let (dx, dy) = (covered.centre.x - inside.centre.x, covered.centre.y - inside.centre.y);
        if within {
            assert!(
                dx.abs() + reach.x <= inside.half.x && dy.abs() + reach.y <= inside.half.y,
                "'{text}' sticks out of the note block"
            );
        } else {
            assert!(!covered.overlaps(&inside), "'{text}' lies on the note block");
        }
    }
    for mark in &marks.marks {
        assert!(mark.layer < marks.layers.len());
        assert!(mark.line_type.is_none_or(|t| t < marks.line_types.len()));
    }
    for (text, _, _) in &texts {
        assert!(text.chars().all(|c| !c.is_control()), "{text:?}");
    }
    assert_eq!(marks, annotate(run, sheet), "twice the same");
    marks
}

fn samples() -> impl Strategy<Value = Vec<Sample>> {
    let one = (
        prop::collection::vec((0.0..=1.0_f64, 0.1..300.0_f64), 1..=40),
        (8.0..60.0_f64, 0.05..0.9_f64, any::<bool>(), any::<bool>()),
        prop::option::of(0.1..1.5_f64),
        prop::option::of(0.001..0.5_f64),
        (any::<bool>(), 1..=3_usize),
        (-0.3..0.3_f64, -0.3..0.3_f64),
    );
    prop::collection::vec(one, 1..=3).prop_map(|list| {
        let mut x = 1000.0;
        list.into_iter()
            .map(|(mut loads, (span, flat, circular, cable), depth, limit, (others, cases), shift)| {
                loads.sort_by(|a, b| a.0.total_cmp(&b.0));
                // A load over each half, so that the line through the crown exists.
                loads.push((0.5, 1.0));
                loads.sort_by(|a, b| a.0.total_cmp(&b.0));
                let rise = span * flat * if circular { 0.55 } else { 1.0 };
                let sample = Sample {
                    x,
                    span,
                    rise: if cable { -rise } else { rise },
                    loads,
                    circular,
                    depth,
                    limit,
                    others,
                    case: (0..cases).map(|i| (format!("case {i}"), i as f64 * 0.2)).collect(),
                    shift: [shift.0 * rise * 0.2, shift.1 * rise * 0.2, 0.0],
                    ..arch(1, span, rise)
                };
                x += span + 1.0;
                sample
            })
            .collect()
    })
}

/// How many cases are made up: what `PROPTEST_CASES` says, else 400.
fn cases() -> u32 {
    std::env::var("PROPTEST_CASES").ok().and_then(|n| n.parse().ok()).unwrap_or(400)
}

proptest! {
    #![proptest_config(ProptestConfig { max_shrink_iters: 50, cases: cases(), ..ProptestConfig::default() })]

    #[test]
    fn nothing_overlaps(samples in samples(), plotted in prop::option::of(5.0..40.0_f64), mm in any::<bool>()) {
        let run = run_of(samples);
        let metres_per_unit = if mm { 0.001 } else { 1.0 };
        let sheet = Sheet {
            metres_per_unit,
            viewport_scale: plotted.map(|p| p * metres_per_unit),
            ..sheet()
        };
        assert_calm(&run, &sheet);
    }
}

#[test]
fn tall_text_and_forty_loads_stay_apart() {
    let run = arch(40, 10.0, 5.0).limited(0.01).run();
    let sheet = Sheet { text_height: TextHeight::Units(0.5), ..sheet() };
    let marks = assert_calm(&run, &sheet);
    // Forty loads make twenty groups of two: twenty-one spaces.
    assert_eq!(texts(&marks).iter().filter(|t| t.2.role == "letter" && t.2.layer == 6).count(), 21);
    assert_eq!(has(&marks, "ray"), 21);
}

/// An arch whose loads stand near one springing: its line lies metres below the axis, so that the diagram hangs below its
/// base line. Found by `nothing_overlaps`: the bar with the scale stood above it, among the figures of the elevation.
#[test]
fn scale_bar_stands_below_the_title_of_its_diagram() {
    let lopsided = Sample {
        loads: vec![
            (0.01, 300.0),
            (0.04, 150.0),
            (0.07, 280.0),
            (0.1, 120.0),
            (0.15, 240.0),
            (0.37, 250.0),
            (0.5, 1.0),
        ],
        shift: [-0.64, 0.12, 0.0],
        ..arch(1, 25.6, 12.5)
    };
    let high = Sample { shift: [0.0, 0.0, -3.0], ..arch(5, 30.0, 6.0) };
    for sample in [lopsided, high, arch(5, 30.0, 6.0)] {
        let marks = assert_calm(&sample.run(), &sheet());
        let diagram = |m: &&Mark| marks.layers[m.layer].name.ends_with("OFFSET-DIAGRAM");
        let title = marks
            .marks
            .iter()
            .filter(diagram)
            .filter(|m| m.role == "title")
            .filter_map(|m| match m.shape {
                Shape::Text { at, .. } => Some(at.y),
                _ => None,
            })
            .fold(f64::INFINITY, f64::min);
        assert!(title.is_finite());
        for mark in marks.marks.iter().filter(diagram).filter(|m| m.role == "scale") {
            let top = match &mark.shape {
                Shape::Line(a, b) => a.y.max(b.y),
                Shape::Text { at, height, text, angle, across, along } => {
                    let covered = Box2::of_text(*at, *height, text, *angle, *across, *along);
                    covered.centre.y + covered.reach().y
                }
                _ => panic!("a scale is made of lines and a text"),
            };
            assert!(top < title, "{top} is not below {title}");
        }
    }
}

#[test]
fn polygon_is_parallel_to_the_line() {
    let mut sample = arch(5, 30.0, 6.0).limited(0.05);
    sample.case = vec![("even".into(), 0.0), ("one side".into(), 0.6)];
    let run = sample.run();
    let marks = annotate(&run, &sheet());
    let rays: Vec<_> = marks
        .marks
        .iter()
        .filter(|m| m.role == "ray")
        .map(|m| match m.shape {
            Shape::Line(pole, corner) => corner - pole,
            _ => panic!(),
        })
        .collect();
    let case = worst_case(&run, &run.spans[0]).unwrap();
    let line = &case.lines[0];
    let pieces: Vec<_> = line
        .vertices
        .windows(2)
        .map(|w| Point::new(w[1][0], w[1][1]) - Point::new(w[0][0], w[0][1]))
        .collect();
    assert_eq!(rays.len(), pieces.len());
    for (ray, piece) in rays.iter().zip(&pieces) {
        assert!((ray.normalize().cross(piece.normalize())).abs() < 1e-12);
        assert!(ray.x > 0.0, "the pole of an arch is left of the load line");
    }
}

#[test]
fn loads_that_do_not_add_up_get_no_false_polygon() {
    let mut run = arch(5, 30.0, 6.0).run();
    run.spans[0].cases[0].total_load[1] *= 1.35;
    let marks = assert_calm(&run, &sheet());
    assert_eq!(has(&marks, "ray") + has(&marks, "load"), 0);
    assert!(texts(&marks).iter().any(|t| t.0.contains("do not add up")));
}

#[test]
fn cable_has_its_pole_on_the_right() {
    let run = arch(5, 30.0, -3.0).run();
    let marks = assert_calm(&run, &sheet());
    for m in marks.marks.iter().filter(|m| m.role == "ray") {
        let Shape::Line(pole, corner) = m.shape else { panic!() };
        assert!(pole.x > corner.x);
    }
    let words: Vec<String> = texts(&marks).into_iter().map(|t| t.0).collect();
    assert!(words.iter().any(|w| w.contains("sag")), "{words:?}");
    assert!(words.join(" ").contains("(a pull)"), "{words:?}");
}

#[test]
fn ticks_end_on_the_line_of_thrust() {
    let mut sample = arch(7, 30.0, 6.0);
    sample.shift = [0.1, -0.2, 0.15];
    let run = sample.run();
    let marks = annotate(&run, &Sheet { metres_per_unit: 0.001, ..sheet() });
    let vertices: Vec<Point> = run.spans[0].cases[0].lines[0]
        .vertices
        .iter()
        .map(|v| Point::new(v[0] * 1000.0, v[1] * 1000.0))
        .collect();
    let line = crate::geometry::Path::polyline(&vertices).unwrap();
    let mut seen = 0;
    for m in marks.marks.iter().filter(|m| m.role == "tick") {
        let Shape::Line(_, tip) = m.shape else { panic!() };
        assert!(line.nearest(tip).1 < 1e-6, "{tip:?}");
        seen += 1;
    }
    assert!(seen >= 8, "seven loads and the worst station, not {seen}");
}

#[test]
fn flags_stand_where_limits_do_not_hold() {
    let run = arch(5, 30.0, 6.0).limited(0.001).run();
    let marks = assert_calm(&run, &sheet());
    assert_eq!(has(&marks, "flag-words"), 1);
    let at = run.findings[0].at.unwrap();
    let ringed = marks.marks.iter().any(|m| {
        m.role == "flag"
            && matches!(m.shape, Shape::Circle(c, _) if (c - Point::new(at[0], at[1])).hypot() < 1e-12)
    });
    assert!(ringed);
    let run = arch(5, 30.0, 6.0).limited(5.0).run();
    assert_eq!(has(&annotate(&run, &sheet()), "flag-words"), 0);
}

#[test]
fn note_block_tells_what_it_must() {
    let mut run = arch(5, 30.0, 6.0).run();
    let all =
        |run: &Run| texts(&annotate(run, &sheet())).into_iter().map(|t| t.0).collect::<Vec<_>>().join("\n");
    let words = all(&run);
    for needed in [
        "SHAPE ONLY, NOT CHECKED",
        "B-204, revision C",
        "bridge.dxf",
        "abababababababababababababababab\nabababababababababababababababab",
        "cdcdcdcdcdcdcdcdcdcdcdcdcdcdcdcd",
        "thrustmark 0.1.0, 2026-03-01 UTC",
        "one possible line of thrust",
        "all factors 1",
        "5 loads as drawn, 500.0 kN downward",
        "The rib is taken as weightless",
        "none stated",
        "qualified engineer",
    ] {
        assert!(words.contains(needed), "{needed} is missing in\n{words}");
    }
    assert!(!words.to_lowercase().contains("safe"));
    run = arch(5, 30.0, 6.0).limited(9.0).run();
    assert!(all(&run).contains("WITHIN THE STATED LIMITS"));
    run = arch(5, 30.0, 6.0).limited(0.001).run();
    assert!(all(&run).contains("OUTSIDE A STATED LIMIT"));
}

#[test]
fn no_line_is_said_and_not_drawn() {
    let mut run = arch(5, 30.0, 6.0).run();
    for line in &mut run.spans[0].cases[0].lines {
        line.status = Status::None;
        line.reason = Some("the loads cancel out".into());
        (line.left, line.right, line.offset) = (None, None, None);
        line.vertices.clear();
        line.stations.clear();
    }
    let marks = assert_calm(&run, &sheet());
    assert_eq!(has(&marks, "line"), 0);
    assert_eq!(has(&marks, "ray"), 0);
    let words: Vec<String> = texts(&marks).into_iter().map(|t| t.0).collect();
    assert!(words.join(" ").contains("the loads cancel out"));
}

#[test]
fn text_height_by_setting_viewport_drawing_span() {
    let run = arch(5, 30.0, 6.0).run();
    let height = |sheet: &Sheet| {
        annotate(&run, sheet)
            .marks
            .iter()
            .find_map(|m| match m.shape {
                Shape::Text { height, .. } if m.role == "letter" => Some(height),
                _ => None,
            })
            .unwrap()
    };
    let mm = Sheet { metres_per_unit: 0.001, ..sheet() };
    assert!((height(&sheet()) - 0.25).abs() < 1e-12);
    // 1:100 in millimetres: a hundredth of a millimetre plotted for each unit.
    let viewport = Sheet { viewport_scale: Some(0.01), drawing_text_height: Some(300.0), ..mm.clone() };
    assert!((height(&viewport) - 250.0).abs() < 1e-9);
    assert!((height(&Sheet { viewport_scale: None, ..viewport.clone() }) - 300.0).abs() < 1e-9);
    assert!((height(&Sheet { text_height: TextHeight::Units(180.0), ..viewport }) - 180.0).abs() < 1e-9);
    // A text height that cannot belong to this elevation is passed over.
    assert!((height(&Sheet { drawing_text_height: Some(1e-4), ..mm }) - 250.0).abs() < 1e-9);
}

#[test]
fn keeps_off_what_is_drawn_below_and_beside() {
    let run = arch(5, 30.0, 6.0).run();
    let all = Extents { low: [-5.0, -12.0], high: [40.0, 20.0] };
    let label = Extents { low: [14.0, 6.4], high: [16.0, 7.4] };
    let sheet = Sheet { model_space: Some(all), occupied: vec![label], ..sheet() };
    let marks = assert_calm(&run, &sheet);
    let taken = Box2::upright(Point::new(14.0, 6.4), Point::new(16.0, 7.4));
    for (text, covered, mark) in texts(&marks) {
        assert!(!covered.overlaps(&taken), "{text}");
        if ["title", "note", "heading"].contains(&mark.role.as_str()) {
            assert!(covered.centre.y < -12.0, "{text}");
        }
    }
    // Far-off things do not drag the blocks out of sight.
    let far = Extents { low: [-5.0, -1e6], high: [40.0, 20.0] };
    let marks = annotate(&run, &Sheet { model_space: Some(far), ..sheet });
    assert!(texts(&marks).iter().all(|t| t.1.centre.y > -100.0));
}

#[test]
fn only_the_digits_of_the_hash_depend_on_the_hash() {
    let run = arch(5, 30.0, 6.0).run();
    let a = annotate(&run, &sheet());
    let b = annotate(&run, &Sheet { sha256: "0".repeat(64), ..sheet() });
    let differ: Vec<_> = a.marks.iter().zip(&b.marks).filter(|(a, b)| a != b).collect();
    assert_eq!(a.marks.len(), b.marks.len());
    assert_eq!(differ.len(), 2, "two lines of digits");
}

#[test]
fn layers_carry_the_prefix_and_the_frost() {
    let run = arch(5, 30.0, 6.0).run();
    let marks = annotate(&run, &Sheet { prefix: "T_".into(), frozen: true, ..sheet() });
    assert!(marks.layers.iter().all(|l| l.name.starts_with("T_") && l.frozen));
    assert!(marks.line_types.iter().all(|l| l.name.starts_with("T_")));
    let facts: Vec<&str> = marks.facts.iter().map(|f| f.0.as_str()).collect();
    assert_eq!(facts, ["sha256", "source", "tool", "verdict", "date", "job", "settings"]);
}

#[test]
fn worst_case_is_drawn_heavy() {
    let mut sample = arch(5, 30.0, 6.0);
    sample.case = vec![("even".into(), 0.0), ("one side".into(), 0.6)];
    let run = sample.run();
    assert_eq!(worst_case(&run, &run.spans[0]).unwrap().name, "one side");
    let marks = assert_calm(&run, &sheet());
    assert_eq!(has(&marks, "line"), 1);
    assert_eq!(has(&marks, "other-line"), 1);
    assert_eq!(has(&marks, "ray"), 6, "the polygon of the factored loads");
    assert!(texts(&marks).iter().any(|t| t.0 == "case even"));
}

/// A depth in the wrong unit would bury the sheet under joints that cross each other.
#[test]
fn ring_deeper_than_half_the_span_is_said_and_not_drawn() {
    let run = Sample { depth: Some(9.0), ..arch(5, 12.0, 3.0) }.run();
    let marks = assert_calm(&run, &sheet());
    assert_eq!(has(&marks, "ring") + has(&marks, "joint"), 0);
    let words = texts(&marks).into_iter().map(|t| t.0).collect::<Vec<_>>().join(" ");
    assert!(words.contains("not drawn, its depth is more than half the span"), "{words}");
    let run = Sample { depth: Some(1.0), ..arch(5, 12.0, 3.0) }.run();
    assert_eq!(has(&assert_calm(&run, &sheet()), "ring"), 2);
}

#[test]
fn suggested_axis_stands_on_a_layer_that_is_off() {
    let run = sample::suggested();
    let marks = assert_calm(&run, &sheet());
    let layer = marks.layers.iter().position(|l| l.name == "THRUST-SUGGESTED-AXIS").unwrap();
    assert!(marks.layers[layer].off);
    assert_eq!(marks.layers.iter().filter(|l| l.off).count(), 1);
    let drawn: Vec<_> = marks.marks.iter().filter(|m| m.layer == layer).map(|m| m.role.as_str()).collect();
    assert_eq!(drawn.iter().filter(|r| **r == "suggested-axis").count(), 1, "{drawn:?}");
    assert!(drawn.contains(&"suggested-name"), "{drawn:?}");
    let words = texts(&marks).into_iter().map(|t| t.0).collect::<Vec<_>>().join(" ");
    assert!(words.contains("Suggested") && words.contains("1.20 times the depth"), "{words}");
    let plain = annotate(&arch(3, 24.0, 6.0).run(), &sheet());
    assert!(plain.layers.iter().all(|l| !l.off && !l.name.contains("SUGGESTED")));
}

#[test]
fn control_characters_of_names_do_not_reach_the_drawing() {
    let mut run = arch(5, 30.0, 6.0).run();
    run.spans[0].loads[0].set = "L\u{1b}\n0".into();
    run.findings[0].message = "x\r\n  0\nSECTION".into();
    assert_calm(&run, &Sheet { source_name: "a\nb.dxf".into(), ..sheet() });
}

#[test]
fn empty_runs_are_drawn_too() {
    let mut run = arch(1, 10.0, 2.0).run();
    run.spans[0].loads.clear();
    run.spans[0].cases[0].lines.clear();
    assert_calm(&run, &sheet());
    run.spans[0].cases.clear();
    run.spans[0].axis.curve.clear();
    assert_calm(&run, &sheet());
    run.spans.clear();
    let marks = assert_calm(&run, &sheet());
    assert_eq!(has(&marks, "frame"), 1);
}

#[test]
fn thousands_of_loads_take_no_time() {
    let run = arch(3000, 200.0, 40.0).run();
    let start = std::time::Instant::now();
    let marks = annotate(&run, &sheet());
    assert!(start.elapsed().as_secs_f64() < 5.0, "{:?}", start.elapsed());
    eprintln!("3000 loads: {:?}", start.elapsed());
    assert_eq!(has(&marks, "ray"), 27);
}

#[test]
fn kinds_have_names() {
    for kind in [
        LineKind::Closest,
        LineKind::Through,
        LineKind::LeastThrust,
        LineKind::GreatestThrust,
        LineKind::Elastic,
    ] {
        assert!(!kind_name(kind).is_empty());
    }
    assert!(FindingVerdict::Outside < FindingVerdict::Within);
}

#[test]
fn the_tag_layer_takes_the_marks_and_gives_the_drawing_back() {
    use crate::tags::{Options, Source, mark, scan, unmark};
    let drawing = "  0\nSECTION\n  2\nHEADER\n  9\n$ACADVER\n  1\nAC1009\n  0\nENDSEC\n  0\nSECTION\n  2\nENTITIES\n  0\nPOINT\n  8\n0\n 10\n0.0\n 20\n0.0\n  0\nENDSEC\n  0\nEOF\n";
    for (_, run) in looks() {
        let marks = annotate(&run, &sheet());
        let source = Source::from_bytes(drawing.as_bytes());
        let outline = scan(&source, &Options::default()).unwrap();
        let marked = source.spliced(&mark(&source, &outline, &marks).unwrap()).unwrap();
        let again = scan(&marked, &Options::default()).unwrap();
        assert_eq!(again.marks.as_ref().unwrap().entities, marks.marks.len() as u64);
        let restored = marked.spliced(&unmark(&marked, &again).unwrap()).unwrap();
        let mut bytes = Vec::new();
        restored.write_to(&mut bytes).unwrap();
        assert_eq!(bytes, drawing.as_bytes());
    }
}

/// Writes the marks of several sheets to the folder named by `THRUSTMARK_LOOK`, as JSON for drawing them, and as marked copies
/// of the drawings `NAME.*.base.dxf` that lie there.
#[test]
#[ignore = "writes files to be looked at"]
fn dump_for_looking() {
    let folder = std::env::var_os("THRUSTMARK_LOOK").expect("THRUSTMARK_LOOK names a folder");
    let folder = std::path::PathBuf::from(folder);
    for (name, run) in looks() {
        let marks = annotate(&run, &sheet());
        let list: Vec<serde_json::Value> = marks
            .marks
            .iter()
            .map(|m| {
                let layer = &marks.layers[m.layer];
                let dash = m.line_type.or(layer.line_type).map(|t| marks.line_types[t].pattern.clone());
                let shape = match &m.shape {
                    Shape::Line(a, b) => serde_json::json!({"line": [[a.x, a.y], [b.x, b.y]]}),
                    Shape::Polyline { points, closed } => serde_json::json!({
                        "poly": points.iter().map(|p| [p.0.x, p.0.y, p.1]).collect::<Vec<_>>(), "closed": closed}),
                    Shape::Circle(c, r) => serde_json::json!({"circle": [c.x, c.y, r]}),
                    Shape::Triangle(t) => serde_json::json!({"tri": t.map(|p| [p.x, p.y])}),
                    Shape::Text { at, height, text, angle, across, along } => serde_json::json!({
                        "text": text, "at": [at.x, at.y], "h": height, "angle": angle,
                        "across": format!("{across:?}"), "along": format!("{along:?}")}),
                };
                serde_json::json!({"layer": layer.name, "aci": layer.colour, "w": layer.weight, "dash": dash, "role": m.role, "s": shape})
            })
            .collect();
        let axis: Vec<_> = run.spans.iter().map(|s| &s.axis.curve).collect();
        let loads: Vec<_> = run.spans.iter().flat_map(|s| s.loads.iter().map(|l| l.at)).collect();
        let all = serde_json::json!({"marks": list, "axis": axis, "loads": loads});
        std::fs::write(folder.join(format!("{name}.json")), all.to_string()).unwrap();
        for base in std::fs::read_dir(&folder).unwrap().map(|e| e.unwrap().path()) {
            let file = base.file_name().unwrap().to_string_lossy().into_owned();
            if file.starts_with(&format!("{name}.")) && file.ends_with(".base.dxf") {
                use crate::tags::{Options, Source, mark, scan};
                let source = Source::open(&base).unwrap();
                let outline = scan(&source, &Options::default()).unwrap();
                let marked = source.spliced(&mark(&source, &outline, &marks).unwrap()).unwrap();
                let mut out = std::fs::File::create(folder.join(file.replace(".base.", ".thrust."))).unwrap();
                marked.write_to(&mut out).unwrap();
            }
        }
        let text = crate::write::terminal::summary(
            &sample::document(vec![run]),
            &crate::write::terminal::Style::default(),
        );
        std::fs::write(folder.join(format!("{name}.txt")), text).unwrap();
    }
}

fn looks() -> Vec<(&'static str, Run)> {
    let mut uneven = arch(9, 30.0, 5.0).limited(0.05);
    for (i, load) in uneven.loads.iter_mut().enumerate() {
        load.1 = 60.0 + 20.0 * ((i * 7) % 5) as f64;
    }
    let mut ring = Sample { depth: Some(0.75), others: true, ..arch(24, 18.0, 6.0).limited(0.2) };
    ring.shift = [0.1, 0.1, -0.1];
    let cable = arch(11, 60.0, -6.0);
    let mut spans = vec![
        arch(6, 12.0, 3.0).limited(0.03),
        arch(8, 16.0, 4.0).limited(0.03),
        arch(6, 12.0, 3.0).limited(0.03),
    ];
    spans[1].x = 13.0;
    spans[2].x = 30.0;
    let mut cases = Sample { ..arch(9, 30.0, 5.0).limited(0.3) };
    cases.case = vec![("dead".into(), 0.0), ("traffic left".into(), 0.3), ("traffic right".into(), -0.25)];
    vec![
        ("one", uneven.run()),
        ("ring", ring.run()),
        ("cable", cable.run()),
        ("spans", run_of(spans)),
        ("cases", cases.run()),
        ("forty", arch(40, 25.0, 12.0).unit_loads().run()),
    ]
}
