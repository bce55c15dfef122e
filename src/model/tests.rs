//! The model from hand-made drawings.

use proptest::prelude::*;

use super::*;
use crate::drawing::{Attribute, Curve, PointLike, Text, Unit, UnitSource};
use crate::geometry::Segment;

fn source(kind: &str, handle: usize) -> Source {
    Source {
        handle: Some(format!("{handle:X}")),
        kind: kind.into(),
        layer: "L".into(),
        line: Some(handle as u64),
        path: Vec::new(),
    }
}

fn curve(handle: usize, pieces: Vec<Segment>) -> Curve {
    Curve { source: source("LINE", handle), pieces, closed: false, z: 0.0, fitted: false }
}

fn line(a: (f64, f64), b: (f64, f64)) -> Segment {
    Segment::line(Point::new(a.0, a.1), Point::new(b.0, b.1))
}

fn polyline(points: &[(f64, f64)]) -> Vec<Segment> {
    points.windows(2).map(|w| line(w[0], w[1])).collect()
}

/// A parabola of span 40 and rise 8 in 32 chords, starting at `x`.
fn parabola(x: f64) -> Vec<(f64, f64)> {
    (0..=32).map(|i| f64::from(i) * 1.25).map(|s| (x + s, 0.02 * s * (40.0 - s))).collect()
}

fn point(handle: usize, x: f64, y: f64) -> PointLike {
    PointLike {
        source: source("POINT", handle),
        at: Point::new(x, y),
        z: 0.0,
        attributes: Vec::new(),
        extended: Vec::new(),
    }
}

fn text(handle: usize, x: f64, y: f64, says: &str) -> Text {
    Text {
        source: source("TEXT", handle),
        text: says.into(),
        anchor: Point::new(x, y),
        height: 0.25,
        along: Vec2::new(1.0, 0.0),
        across: (0.0, 0.2 * says.len() as f64),
        upright: (0.0, 0.25),
    }
}

fn drawing(axis: Vec<Curve>, points: Vec<PointLike>, texts: Vec<Text>) -> Drawing {
    Drawing {
        intrados: Vec::new(),
        hinges: Vec::new(),
        road: Vec::new(),
        areas: Vec::new(),
        extrados: Vec::new(),
        plane: crate::tags::marks::Plane::XY,
        viewports: Vec::new(),
        unit: Unit { name: "m", metres: 1.0, source: UnitSource::Job },
        axis_layers: vec!["A".into()],
        load_layers: vec!["L".into()],
        axis,
        points,
        strokes: Vec::new(),
        posts: Vec::new(),
        plan: Vec::new(),
        plan_of_rib: None,
        dimensions: Vec::new(),
        title: crate::drawing::Title::default(),
        texts,
        notes: Vec::new(),
    }
}

fn built(d: &Drawing) -> Model {
    build(d, &LoadSettings::default()).unwrap()
}

fn refused(axis: Vec<Curve>) -> Refusal {
    build(&drawing(axis, vec![], vec![]), &LoadSettings::default()).unwrap_err()
}

/// Points along a path, for comparing paths whatever their pieces.
fn sampled(path: &Path) -> Vec<Point> {
    (0..=200).map(|i| path.point_at(path.length() * f64::from(i) / 200.0)).collect()
}

fn same(a: &Path, b: &Path, slack: f64) -> bool {
    (a.length() - b.length()).abs() <= slack
        && sampled(a).iter().zip(sampled(b)).all(|(p, q)| (*p - q).hypot() <= slack)
}

#[test]
fn lines_in_any_order_and_direction() {
    let one = built(&drawing(vec![curve(1, polyline(&parabola(0.0)))], vec![], vec![]));
    let mut pieces: Vec<Curve> = parabola(0.0)
        .windows(2)
        .enumerate()
        .map(|(i, w)| curve(i, vec![if i % 3 == 0 { line(w[1], w[0]) } else { line(w[0], w[1]) }]))
        .collect();
    pieces.sort_by_key(|c| c.source.line.map(|l| l * 17 % 32));
    let many = built(&drawing(pieces, vec![], vec![]));
    assert_eq!(one.spans.len(), 1);
    assert_eq!(one.spans[0].axis, many.spans[0].axis);
    assert_eq!(many.spans[0].sources.len(), 32);
    assert_eq!(many.spans[0].sources[0].handle.as_deref(), Some("0"));
    assert_eq!(one.notes, [Note::NoLoads { span: "span 1".into() }]);
}

#[test]
fn semicircle_stays_an_arc() {
    let arc = |from: f64, sweep: f64| Segment::Arc {
        centre: Point::new(3.0, 1.0),
        radius: 5.0,
        start_angle: from,
        sweep,
    };
    let quarter = std::f64::consts::FRAC_PI_2;
    let whole = built(&drawing(vec![curve(1, vec![arc(0.0, 2.0 * quarter)])], vec![], vec![]));
    let halves = built(&drawing(
        vec![curve(1, vec![arc(0.0, quarter)]), curve(2, vec![arc(2.0 * quarter, -quarter)])],
        vec![],
        vec![],
    ));
    for model in [&whole, &halves] {
        let axis = &model.spans[0].axis;
        assert!((axis.start() - Point::new(-2.0, 1.0)).hypot() < 1e-12);
        assert!((axis.length() - 10.0 * quarter).abs() < 1e-12);
        assert!(axis.segments().iter().all(|s| matches!(s, Segment::Arc { .. })));
    }
    assert!(same(&whole.spans[0].axis, &halves.spans[0].axis, 1e-12));
}

#[test]
fn gaps_are_closed_and_told() {
    let p = parabola(0.0);
    let mut left = polyline(&p[..17]);
    let right = polyline(&p[16..]);
    left[15] = line(p[15], (p[16].0 - 0.02, p[16].1));
    let model = built(&drawing(vec![curve(2, right.clone()), curve(1, left.clone())], vec![], vec![]));
    assert_eq!(model.spans.len(), 1);
    let Note::GapClosed { span, size, at, .. } = &model.notes[0] else { panic!("{:?}", model.notes) };
    assert_eq!(span, "span 1");
    assert!((size - 0.02).abs() < 1e-12 && (*at - Point::new(19.98, 8.0)).hypot() < 1e-12);
    // Ten times as wide: refused, with its place.
    left[15] = line(p[15], (p[16].0 - 0.2, p[16].1));
    let refusal = refused(vec![curve(1, left), curve(2, right)]);
    assert_eq!(refusal.check, "axis-gap");
    assert!(refusal.message.contains("0.200000"), "{}", refusal.message);
    // A chord missing: refused too, not two spans.
    let refusal = refused(vec![curve(1, polyline(&p[..16])), curve(2, polyline(&p[16..]))]);
    assert_eq!(refusal.check, "axis-gap");
}

#[test]
fn what_is_no_axis_is_refused() {
    let p = parabola(0.0);
    let mut closed = curve(1, polyline(&p));
    closed.closed = true;
    assert_eq!(refused(vec![closed]).check, "axis-closed");
    let ring = vec![curve(1, polyline(&p)), curve(2, vec![line(p[32], p[0])])];
    assert_eq!(refused(ring).check, "axis-closed");
    let branch = vec![curve(1, polyline(&p)), curve(2, vec![line(p[10], (12.5, -3.0))])];
    assert_eq!(refused(branch).check, "axis-branch");
    let two = vec![curve(1, polyline(&p)), curve(2, vec![line((1.0, 9.0), (39.0, 9.0))])];
    let refusal = refused(two);
    assert_eq!(refusal.check, "axis-overlap");
    assert!(refusal.message.contains("LINE 1") && refusal.message.contains("LINE 2"), "{}", refusal.message);
    assert_eq!(refused(vec![curve(1, vec![line((0.0, 0.0), (0.0, 5.0))])]).check, "axis-upright");
    assert_eq!(refused(vec![]).check, "axis-empty");
}

#[test]
fn a_layer_full_of_lines_is_no_axis() {
    let lines = (0..600)
        .map(|i| curve(i, vec![line((i as f64 * 10.0, 0.0), (i as f64 * 10.0 + 2.0, 1.0))]))
        .collect();
    assert_eq!(refused(lines).check, "axis-pieces");
}

#[test]
fn drawn_twice_counts_once() {
    let p = parabola(0.0);
    let lines: Vec<Curve> = p.windows(2).enumerate().map(|(i, w)| curve(i, vec![line(w[1], w[0])])).collect();
    let mut axis = vec![curve(100, polyline(&p))];
    axis.extend(lines);
    axis.push(curve(101, vec![line(p[3], p[3])]));
    let model = built(&drawing(axis, vec![], vec![]));
    assert_eq!(model.spans[0].sources.len(), 1);
    let twice = model
        .notes
        .iter()
        .filter(|n| matches!(n, Note::DrawnTwice { kept, .. } if kept.handle.as_deref() == Some("64")));
    assert_eq!(twice.count(), 32);
    assert!(
        model
            .notes
            .iter()
            .any(|n| matches!(n, Note::NoLength { source } if source.handle.as_deref() == Some("65")))
    );
}

#[test]
fn spans_left_to_right() {
    // Apart, on one pier point, and in one polyline.
    let apart = vec![curve(1, polyline(&parabola(41.0))), curve(2, polyline(&parabola(0.0)))];
    let touching = vec![curve(1, polyline(&parabola(40.0))), curve(2, polyline(&parabola(0.0)))];
    let mut points = parabola(0.0);
    points.extend(&parabola(40.0)[1..]);
    points.extend(&parabola(80.0)[1..]);
    let one = vec![curve(1, polyline(&points))];
    for (axis, count, second) in [(apart, 2, 41.0), (touching, 2, 40.0), (one, 3, 40.0)] {
        let loads = vec![point(10, 50.0, 9.0), point(11, 20.0, 9.0), point(12, -1.0, 9.0)];
        let model = built(&drawing(axis, loads, vec![]));
        assert_eq!(model.spans.len(), count);
        assert!((model.spans[1].axis.start() - Point::new(second, 0.0)).hypot() < 1e-9);
        assert_eq!(model.spans[1].name, "span 2");
        assert_eq!(model.spans[0].loads[0].source.handle.as_deref(), Some("B"));
        assert_eq!(model.spans[1].loads[0].source.handle.as_deref(), Some("A"));
        assert_eq!(model.off_span.len(), 1);
        assert!(model.notes.iter().any(|n| matches!(n, Note::OffSpan { .. })));
    }
    // Two cables over a tower, as one line.
    let cables: Vec<(f64, f64)> = points.iter().map(|p| (p.0, -p.1)).collect();
    assert_eq!(built(&drawing(vec![curve(1, polyline(&cables))], vec![], vec![])).spans.len(), 3);
}

#[test]
fn one_span_is_not_cut() {
    let cable = [(0.0, 0.0), (10.0, -6.0), (20.0, -1.0)];
    let triangle = [(0.0, 0.0), (10.0, 6.0), (20.0, 0.0)];
    let loaded = [(0.0, 0.0), (5.0, -4.0), (10.0, -6.0), (15.0, -4.5), (20.0, 0.0)];
    let mut rippled = parabola(0.0);
    rippled[16].1 -= 0.3;
    for points in [&cable[..], &triangle, &loaded, &rippled] {
        assert_eq!(built(&drawing(vec![curve(1, polyline(points))], vec![], vec![])).spans.len(), 1);
    }
    // A pointed arch of two arcs.
    let pointed = vec![
        curve(1, vec![Segment::bulge(Point::new(0.0, 0.0), Point::new(5.0, 8.0), -0.2)]),
        curve(2, vec![Segment::bulge(Point::new(10.0, 0.0), Point::new(5.0, 8.0), 0.2)]),
    ];
    assert_eq!(built(&drawing(pointed, vec![], vec![])).spans.len(), 1);
}

#[test]
fn labels_go_to_their_loads() {
    let axis = vec![curve(1, polyline(&parabola(0.0)))];
    let loads: Vec<PointLike> = (1..8).map(|i| point(10 + i, 5.0 * i as f64, 8.0)).collect();
    let mut texts: Vec<Text> = (1..8)
        .map(|i| text(20 + i, 5.0 * i as f64 + 0.1, 8.4, &format!("P{i} = {},5 kN", 100 + i)))
        .collect();
    texts.reverse();
    texts.push(text(40, 2.0, 20.0, "SECTION A-A"));
    texts.push(text(41, 55.0, 30.0, "99"));
    let model = built(&drawing(axis, loads, texts));
    assert_eq!(model.forces, Forces::Kilonewtons);
    for (i, load) in model.spans[0].loads.iter().enumerate() {
        assert_eq!(load.label, format!("P{}", i + 1));
        assert!((load.force - Vec2::new(0.0, -(101.5 + i as f64))).hypot() < 1e-12);
        assert_eq!(load.magnitude_from, MagnitudeFrom::Label);
    }
    assert!(
        matches!(&model.notes[..], [
        Note::TextIgnored { why: figures::NoFigure::NotAForce, .. },
        Note::LabelUnused { text, .. },
    ] if text == "99"),
        "{:?}",
        model.notes
    );
}

#[test]
fn a_row_of_labels_over_the_deck() {
    let axis = vec![curve(1, polyline(&parabola(0.0)))];
    let loads = (1..8).map(|i| point(10 + i, 5.0 * i as f64, parabola(0.0)[4 * i].1)).collect();
    let texts =
        (1..8).map(|i| text(20 + i, 5.0 * i as f64, 12.0, &format!("P{i} = {} kN", 100 + i))).collect();
    let model = built(&drawing(axis, loads, texts));
    let labels: Vec<&str> = model.spans[0].loads.iter().map(|l| l.label.as_str()).collect();
    assert_eq!(labels, ["P1", "P2", "P3", "P4", "P5", "P6", "P7"]);
    assert_eq!(model.notes, []);
}

#[test]
fn magnitudes_without_labels() {
    let axis = || vec![curve(1, polyline(&parabola(0.0)))];
    let loads = || vec![point(1, 10.0, 7.0), point(2, 30.0, 7.0)];
    let equal = built(&drawing(axis(), loads(), vec![]));
    assert_eq!(equal.forces, Forces::UnitLoads);
    assert_eq!(equal.notes, [Note::LoadsEqual { count: 2 }]);
    assert_eq!(equal.spans[0].loads[1].label, "2");
    let some = drawing(axis(), loads(), vec![text(5, 10.1, 7.2, "80")]);
    let refusal = build(&some, &LoadSettings::default()).unwrap_err();
    assert_eq!(refusal.check, "load-figure-missing");
    assert_eq!(refusal.handle.as_deref(), Some("2"));
    let settings =
        LoadSettings { unlabelled: Some(7.0), unit: Some(crate::units::ForceUnit::MN), ..Default::default() };
    let filled = build(&some, &settings).unwrap();
    assert!((filled.spans[0].loads[0].force.y + 80_000.0).abs() < 1e-9);
    assert!((filled.spans[0].loads[1].force.y + 7.0).abs() < 1e-12);
    assert_eq!(filled.spans[0].loads[1].magnitude_from, MagnitudeFrom::Job);
    // Forces clearly written, but far away: not all equal in silence.
    let far = drawing(axis(), loads(), vec![text(5, -20.0, 7.0, "80 kN"), text(6, 70.0, 7.0, "80 kN")]);
    assert_eq!(build(&far, &LoadSettings::default()).unwrap_err().check, "labels-far");
    let doubtful = drawing(axis(), loads(), vec![text(5, 10.1, 7.2, "1.200 N"), text(6, 30.1, 7.2, "80 kN")]);
    let refusal = build(&doubtful, &LoadSettings::default()).unwrap_err();
    assert!(refusal.message.contains("1200 N") && refusal.message.contains("1.200 N"), "{}", refusal.message);
}

#[test]
fn a_bare_figure_takes_the_unit_of_the_others() {
    let axis = vec![curve(1, polyline(&parabola(0.0)))];
    let loads = vec![point(1, 10.0, 7.0), point(2, 30.0, 7.0)];
    let model = built(&drawing(axis, loads, vec![text(5, 10.1, 7.2, "80"), text(6, 30.1, 7.2, "-3 MN")]));
    assert!((model.spans[0].loads[0].force.y + 80_000.0).abs() < 1e-9);
    assert!((model.spans[0].loads[1].force.y - 3_000.0).abs() < 1e-9);
    assert!(matches!(model.notes[0], Note::ForceUnitAssumed { count: 1, from_labels: true, .. }));
}

#[test]
fn attributes_and_double_marks() {
    let axis = || vec![curve(1, polyline(&parabola(0.0)))];
    let mut insert = point(1, 10.0, 7.0);
    insert.attributes = vec![
        Attribute { tag: "NO".into(), value: "3".into() },
        Attribute { tag: "LOAD".into(), value: "120".into() },
    ];
    let loads = vec![insert, point(2, 30.0, 7.0), point(3, 30.0, 7.0)];
    let model = built(&drawing(axis(), loads.clone(), vec![text(5, 30.1, 7.2, "80 kN")]));
    let [a, b] = &model.spans[0].loads[..] else { panic!() };
    assert_eq!((a.magnitude_from, a.label.as_str()), (MagnitudeFrom::Attribute, "3"));
    assert!((a.force.y + 120.0).abs() < 1e-12 && (b.force.y + 80.0).abs() < 1e-12);
    assert!(model.notes.iter().any(|n| matches!(n, Note::MarkedTwice { .. })));
    // Two figures at one place are two loads.
    let both = vec![text(5, 30.1, 7.2, "80 kN"), text(6, 30.1, 7.6, "20 kN")];
    let model = built(&drawing(axis(), loads, both));
    assert_eq!(model.spans[0].loads.len(), 3);
    assert!(!model.notes.iter().any(|n| matches!(n, Note::LabelDoubtful { .. })), "{:?}", model.notes);
}

#[test]
fn a_label_halfway_is_doubtful() {
    let axis = vec![curve(1, polyline(&parabola(0.0)))];
    let loads = vec![point(1, 19.0, 8.0), point(2, 21.0, 8.0)];
    let mut label = text(5, 20.02, 8.5, "80 kN");
    label.across = (0.4, 0.4);
    let settings = LoadSettings { unlabelled: Some(1.0), ..Default::default() };
    let model = build(&drawing(axis, loads, vec![label]), &settings).unwrap();
    assert!(
        model
            .notes
            .iter()
            .any(|n| matches!(n, Note::LabelDoubtful { other, .. } if other.handle.as_deref() == Some("1")))
    );
}

#[test]
fn ten_thousand_loads_within_a_second() {
    let count = 10_000;
    let place = |i: usize| 40.0 * (i as f64 + 0.5) / count as f64;
    let points: Vec<PointLike> = (0..count).map(|i| point(i, place(i), 9.0)).collect();
    let texts: Vec<Text> = (0..count)
        .rev()
        .map(|i| {
            let mut t = text(i, place(i) + 0.0001, 9.0005, &format!("{i} N"));
            t.height = 0.001;
            t.across = (0.0, 0.0008 * t.text.len() as f64);
            t.upright = (0.0, 0.001);
            t
        })
        .collect();
    let d = drawing(vec![curve(1, polyline(&parabola(0.0)))], points, texts);
    let begin = std::time::Instant::now();
    let model = built(&d);
    let taken = begin.elapsed();
    for (i, load) in model.spans[0].loads.iter().enumerate() {
        assert!((load.force.y + i as f64 / 1000.0).abs() < 1e-12);
    }
    println!("10,000 loads in {taken:?}");
    assert!(taken.as_secs_f64() < 1.0, "{taken:?}");
}

proptest! {
    /// Mirror, shift, scale and shuffle: the same arch.
    #[test]
    fn same_arch_however_drawn(
        mirrored in any::<bool>(),
        dx in -1e6f64..1e6,
        dy in -1e4f64..1e4,
        millimetres in any::<bool>(),
        order in Just((0..32usize).collect::<Vec<_>>()).prop_shuffle(),
        flips in prop::collection::vec(any::<bool>(), 32),
        values in prop::collection::vec(1u32..500, 7),
    ) {
        let k = if millimetres { 1000.0 } else { 1.0 };
        let place = |(x, y): (f64, f64)| (k * (dx + if mirrored { 40.0 - x } else { x }), k * (dy + y));
        let p: Vec<(f64, f64)> = parabola(0.0).into_iter().map(place).collect();
        let axis = order
            .iter()
            .map(|&i| curve(i, vec![if flips[i] { line(p[i], p[i + 1]) } else { line(p[i + 1], p[i]) }]))
            .collect();
        let mut loads = Vec::new();
        let mut texts = Vec::new();
        for (i, v) in values.iter().enumerate() {
            let (x, y) = place((5.0 * (i + 1) as f64, 8.0));
            loads.push(point(100 + i, x, y));
            let mut t = text(200 + i, x + 0.1 * k, y + 0.3 * k, &format!("{v} kN"));
            t.height *= k;
            t.across.1 *= k;
            t.upright.1 *= k;
            texts.push(t);
        }
        texts.rotate_left(3);
        let mut d = drawing(axis, loads, texts);
        d.unit.metres = 1.0 / k;
        let model = built(&d);
        let plain = Path::polyline(&parabola(0.0).into_iter().map(|(x, y)| Point::new(dx + x, dy + y)).collect::<Vec<_>>()).unwrap();
        prop_assert_eq!(model.spans.len(), 1);
        prop_assert!(same(&model.spans[0].axis, &plain, 1e-8));
        let forces: Vec<f64> = model.spans[0].loads.iter().map(|l| -l.force.y).collect();
        let mut expected: Vec<f64> = values.iter().map(|&v| f64::from(v)).collect();
        if mirrored {
            expected.reverse();
        }
        prop_assert_eq!(forces, expected);
    }

    /// One circular arc: as one arc, as several, as a polyline with bulges.
    #[test]
    fn one_arc_in_parts(
        from in 0.0f64..0.6,
        sweep in 1.2f64..2.4,
        radius in 5.0f64..50.0,
        cuts in prop::collection::vec(0.05f64..0.95, 0..5),
    ) {
        let centre = Point::new(100.0, -20.0);
        let arc = |a: f64, b: f64| Segment::Arc { centre, radius, start_angle: a, sweep: b - a };
        let at = |a: f64| centre + Vec2::from_angle(a) * radius;
        let mut angles: Vec<f64> = cuts.iter().map(|c| from + c * sweep).collect();
        angles.extend([from, from + sweep]);
        angles.sort_by(f64::total_cmp);
        angles.dedup_by(|b, a| (*b - *a).abs() < 1e-3);
        let whole = built(&drawing(vec![curve(1, vec![arc(from, angles[angles.len() - 1])])], vec![], vec![]));
        let parts = angles.windows(2).enumerate().map(|(i, w)| curve(i, vec![arc(w[0], w[1])])).collect();
        let bulged = angles
            .windows(2)
            .map(|w| Segment::bulge(at(w[0]), at(w[1]), ((w[1] - w[0]) / 4.0).tan()))
            .collect();
        for axis in [parts, vec![curve(9, bulged)]] {
            let model = built(&drawing(axis, vec![], vec![]));
            prop_assert!(same(&model.spans[0].axis, &whole.spans[0].axis, 1e-9));
        }
    }
}

/// Layouts of loads and labels that defeat every short cut: all on one spot, on a grid with far labels, in one column.
#[test]
fn odd_layouts_end_soon() {
    let count = 3000;
    type Place = fn(usize) -> (f64, f64);
    let layouts: [(&str, Place, Place); 4] = [
        ("one spot", |_| (20.0, 9.0), |_| (20.0, 9.0)),
        ("far cluster", |i| (20.0 + 1e-4 * i as f64, 9.0), |i| (20.0, 9.0 + 1e-4 * i as f64)),
        ("column", |i| (20.0, 9.0 + 0.01 * i as f64), |i| (20.1, 9.0 + 0.01 * i as f64)),
        (
            "scatter",
            |i| ((i * 7919 % 4001) as f64 * 0.01, (i * 104_729 % 997) as f64 * 0.01),
            |i| ((i * 6007 % 4001) as f64 * 0.01, (i * 75_029 % 997) as f64 * 0.01),
        ),
    ];
    for (name, load, label) in layouts {
        let points = (0..count).map(|i| point(i, load(i).0, load(i).1)).collect();
        let texts = (0..count).map(|i| text(i, label(i).0, label(i).1, &format!("{i} N"))).collect();
        let d = drawing(vec![curve(1, polyline(&parabola(0.0)))], points, texts);
        let begin = std::time::Instant::now();
        let model = build(&d, &LoadSettings { unlabelled: Some(1.0), ..Default::default() });
        println!("{name}: {:?}, {} notes", begin.elapsed(), model.map_or(0, |m| m.notes.len()));
        assert!(begin.elapsed().as_secs() < 30, "{name}: {:?}", begin.elapsed());
    }
}

#[test]
fn many_pieces_end_soon() {
    let count = 100_000;
    let arch = |i: usize| {
        let x = 40.0 * i as f64 / count as f64;
        (x, 0.02 * x * (40.0 - x))
    };
    let axis: Vec<Curve> = (0..count).map(|i| curve(i, vec![line(arch(i), arch(i + 1))])).collect();
    let begin = std::time::Instant::now();
    let model = build(&drawing(axis, vec![], vec![]), &LoadSettings::default());
    println!("{count} pieces in {:?}", begin.elapsed());
    assert_eq!(model.map(|m| m.spans.len()), Ok(1));
    // In one column, from one spot, and scattered.
    type Draw = fn(f64) -> Segment;
    let hostile: [(Draw, &str); 3] = [
        (|i| line((1.0, i), (1.0, i + 0.5)), "axis-branch"),
        (|i| line((0.0, 0.0), (1e5, i)), "axis-branch"),
        (|i| line((i * 2.0, i * i % 7001.0), (i * 2.0 + 1.0, i * i % 7001.0)), "axis-branch"),
    ];
    for (draw, check) in hostile {
        let axis = (0..count).map(|i| curve(i, vec![draw(i as f64)])).collect();
        let begin = std::time::Instant::now();
        let refusal = refused(axis);
        println!("{} in {:?}", refusal.check, begin.elapsed());
        assert!(begin.elapsed().as_secs() < 20);
        assert_eq!(refusal.check, check);
    }
}
