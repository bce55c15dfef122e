//! Loads as they are drawn: arrows of every make, their sense, their size, and where they act.
// Helpers of tests stand outside of the test functions that the lints exempt.
#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::print_stdout)]

#[path = "drawn/fixtures.rs"]
mod fixtures;
#[path = "drawn/lines.rs"]
mod lines;
#[path = "drawn/said.rs"]
mod said;
#[path = "drawn/same.rs"]
mod same;
mod sheet;

use sheet::Sheet;
use thrustmark::outcome::{Check, Load, MagnitudeFrom, Run, Sense, Status, Verdict};

/// An arc of radius 10 m about the origin from 150° to 30°, as drawn in metres.
fn arch() -> Sheet {
    let mut sheet = Sheet::default();
    sheet.arc("ARCH-AXIS", [0.0, 0.0], 10.0, 30.0, 150.0);
    sheet
}

fn loads(run: &Run) -> &[Load] {
    assert!(run.error.is_none(), "{:?}", run.error);
    &run.spans[0].loads
}

#[track_caller]
fn acts(load: &Load, at: [f64; 2], force: [f64; 2]) {
    let far = |a: [f64; 2], b: [f64; 2]| (a[0] - b[0]).hypot(a[1] - b[1]);
    assert!(far(load.at, at) < 1e-9, "at {:?}, expected {at:?}", load.at);
    assert!(far(load.force, force) < 1e-9, "force {:?}, expected {force:?}", load.force);
}

/// Everything that draughtsmen draw for a head, at the end `tip` of a line from `tail`.
fn with_head(sheet: &mut Sheet, make: &str, tail: [f64; 2], tip: [f64; 2]) {
    let layer = "ARCH-LOADS";
    let length = (tip[0] - tail[0]).hypot(tip[1] - tail[1]);
    let u = [(tail[0] - tip[0]) / length, (tail[1] - tip[1]) / length];
    // Arms back from the tip: a fifth of the line, 20° to either side.
    let (back, side) = (0.2 * length * 20_f64.to_radians().cos(), 0.2 * length * 20_f64.to_radians().sin());
    let arm = |s: f64| [tip[0] + back * u[0] - s * side * u[1], tip[1] + back * u[1] + s * side * u[0]];
    let (a, b) = (arm(1.0), arm(-1.0));
    let neck = [tip[0] + back * u[0], tip[1] + back * u[1]];
    match make {
        "none" => sheet.line(layer, tail, tip),
        "barbs" => {
            sheet.line(layer, a, tip);
            sheet.line(layer, tip, tail);
            sheet.line(layer, tip, b);
        }
        "wedge" => {
            sheet.line(layer, tail, tip);
            sheet.polyline(layer, &[a, tip, b], false, &[]);
        }
        "closed" => {
            sheet.polyline(layer, &[tip, a, b], true, &[]);
            sheet.line(layer, tail, tip);
        }
        "filled" => {
            sheet.line(layer, tail, tip);
            sheet.solid(layer, [a, tip, b]);
        }
        "filled beyond" => {
            sheet.line(layer, tail, neck);
            sheet.solid(layer, [b, a, tip]);
        }
        "one polyline" => sheet.polyline(layer, &[tail, tip, a, tip, b], false, &[]),
        "one polyline, tip first" => sheet.polyline(layer, &[a, tip, b, tip, tail], false, &[]),
        "one polyline, closed head" => sheet.polyline(layer, &[tail, neck, a, tip, b, neck], false, &[]),
        "taper" => sheet.polyline(layer, &[tail, neck, tip], false, &[[0.0, 0.0], [0.3, 0.0]]),
        "taper, tip first" => sheet.polyline(layer, &[tip, neck, tail], false, &[[0.0, 0.3], [0.0, 0.0]]),
        "taper throughout" => sheet.polyline(layer, &[tail, tip], false, &[[0.2, 0.0]]),
        "old taper" => {
            sheet.old_polyline(layer, &[(tail, [0.0, 0.0]), (neck, [0.3, 0.0]), (tip, [0.0, 0.0])])
        }
        "leader" => sheet.leader(layer, &[tip, tail], true),
        "leader with a landing" => {
            sheet.leader(layer, &[tip, tail, [tail[0] + 0.4, tail[1]]], true);
        }
        _ => panic!("{make}"),
    }
}

const MAKES: [&str; 13] = [
    "barbs",
    "wedge",
    "closed",
    "filled",
    "filled beyond",
    "one polyline",
    "one polyline, tip first",
    "one polyline, closed head",
    "taper",
    "taper, tip first",
    "taper throughout",
    "old taper",
    "leader",
];

#[test]
fn a_drawn_head_fixes_the_sense() {
    for make in MAKES.into_iter().chain(["leader with a landing"]) {
        for (tail, tip, force) in [
            ([0.0, 13.0], [0.0, 11.0], [0.0, -120.0]),
            // Away from the rib: the load pulls, and acts at the end nearer the rib all the same.
            ([0.0, 11.0], [0.0, 13.0], [0.0, 120.0]),
            // A raking one: 3 across, 4 down.
            ([-7.5, 15.0], [-6.0, 13.0], [72.0, -96.0]),
        ] {
            let mut sheet = arch();
            sheet.load("ARCH-LOADS", [5.0, 11.0], "40 kN");
            with_head(&mut sheet, make, tail, tip);
            sheet.text("ARCH-LOADS", [tail[0] + 0.1, f64::midpoint(tail[1], tip[1])], 0.2, "P1 = 120 kN");
            let run = sheet.run("[rib]\nsupport = \"none\"\n");
            let all = loads(&run);
            assert_eq!(all.len(), 2, "{make} {tip:?}: {all:#?}");
            let load = all.iter().find(|l| l.label == "P1").unwrap();
            let near = if tail[1] < tip[1] { tail } else { tip };
            acts(load, near, force);
            assert_eq!(load.sense, Some(Sense::Arrowhead), "{make} {tip:?}");
            assert_eq!(load.magnitude_from, MagnitudeFrom::Label);
            assert!(!run.findings.iter().any(|f| f.check == Check::Sense), "{make}: {:#?}", run.findings);
            let noise: Vec<_> = run.findings.iter().filter(|f| f.check == Check::PassedOver).collect();
            assert!(noise.is_empty(), "{make}: {noise:#?}");
        }
    }
}

#[test]
fn without_a_head_the_sense_is_inferred_and_listed() {
    let job = "[rib]\nsupport = \"none\"\n[limits]\noffset = 9\n";
    let allowed = format!("{job}[accept]\nassumed = [\"sense\"]\n");
    let unit = |x: f64, y: f64| [x / x.hypot(y), y / x.hypot(y)];
    for (from, to, label, along, sense) in [
        // The end nearer the rib is the first one or the second one.
        ([0.0, 13.0], [0.0, 11.0], "100 kN", [0.0, -1.0], Sense::Downward),
        ([0.0, 11.0], [0.0, 13.0], "100 kN", [0.0, -1.0], Sense::Downward),
        // 25° from the vertical: down along the line. 35°: toward the rib.
        (
            [-1.0, 13.0],
            [-1.0 + 2.0 * 25_f64.to_radians().tan(), 11.0],
            "100 kN",
            unit(25_f64.to_radians().tan(), -1.0),
            Sense::Downward,
        ),
        (
            [3.0 + 2.0 * 35_f64.to_radians().tan(), 13.0],
            [3.0, 11.0],
            "100 kN",
            unit(-(35_f64.to_radians().tan()), -1.0),
            Sense::TowardRib,
        ),
        // From below, steep: down all the same, which is away from the rib; flat: toward it.
        ([0.0, 7.0], [0.0, 9.5], "100 kN", [0.0, -1.0], Sense::Downward),
        ([-3.0, 8.0], [0.0, 9.5], "100 kN", unit(3.0, 1.5), Sense::TowardRib),
        // A negative figure reverses it.
        ([0.0, 13.0], [0.0, 11.0], "-100 kN", [0.0, 1.0], Sense::Downward),
        ([-3.0, 8.0], [0.0, 9.5], "-100 kN", unit(-3.0, -1.5), Sense::TowardRib),
    ] {
        let mut sheet = arch();
        sheet.load("ARCH-LOADS", [5.0, 11.0], "400 kN");
        sheet.line("ARCH-LOADS", from, to);
        let middle = [f64::midpoint(from[0], to[0]) + 0.1, f64::midpoint(from[1], to[1])];
        sheet.text("ARCH-LOADS", middle, 0.2, label);
        let run = sheet.run(job);
        let load = loads(&run).iter().find(|l| l.source.kind == "LINE").unwrap();
        let distance = |p: [f64; 2]| (p[0].hypot(p[1]) - 10.0).abs();
        let near = if distance(from) < distance(to) { from } else { to };
        acts(load, near, along.map(|c| 100.0 * c));
        assert_eq!(load.sense, Some(sense), "{from:?} {to:?}");
        let told: Vec<_> = run.findings.iter().filter(|f| f.check == Check::Sense).collect();
        assert_eq!(told.len(), 1);
        assert!(told[0].unchecks && told[0].message.contains(load.source.handle.as_ref().unwrap()));
        assert_eq!(run.verdict, Some(Verdict::Unchecked));
        assert_eq!(sheet.run(&allowed).verdict, Some(Verdict::Within));
    }
}

#[test]
fn the_length_of_an_arrow_is_its_size_where_nothing_else_says_it() {
    let mut sheet = arch();
    sheet.line("ARCH-LOADS", [-3.0, 12.5], [-3.0, 11.0]);
    sheet.line("ARCH-LOADS", [0.0, 13.0], [0.0, 11.0]);
    sheet.text("ARCH-LOADS", [0.1, 12.0], 0.2, "P = 7 kN");
    sheet.line("ARCH-LOADS", [2.0, 11.0], [3.0, 11.0 + 3_f64.sqrt()]);
    let job = "[rib]\nsupport = \"none\"\n[loads]\nunit = \"kip\"\narrow_scale = 0.5\nunlabelled = 1\n";
    let run = sheet.run(job);
    let kip = 4.448_221_615_260_5;
    let all = loads(&run);
    acts(&all[0], [-3.0, 11.0], [0.0, -3.0 * kip]);
    assert_eq!(all[0].magnitude_from, MagnitudeFrom::ArrowLength);
    acts(&all[1], [0.0, 11.0], [0.0, -7.0]);
    assert_eq!(all[1].magnitude_from, MagnitudeFrom::Label);
    // Two metres long, at 30° from the vertical exactly: down along the line.
    acts(&all[2], [2.0, 11.0], [-2.0 * kip, -4.0 * kip * 3_f64.sqrt() / 2.0]);
    // A point has no length: it takes what the job says. In a drawing in millimetres the length counts in metres.
    sheet.add("POINT", "ARCH-LOADS", &[(10, 5.0), (20, 11.0)]);
    assert_eq!(loads(&sheet.run(job))[3].magnitude_from, MagnitudeFrom::Job);
    let half = sheet.run(&format!("{job}[[sheet]]\nmatch = \"*\"\ndrawing.scale = 0.5\n"));
    acts(&loads(&half)[0], [-1.5, 5.5], [0.0, -1.5 * kip]);
}

#[test]
fn a_line_and_a_point_at_its_end_are_one_load() {
    let mut sheet = arch();
    // A point at either end of a line; a leader from a label to its point; a line from load to load.
    sheet.load("ARCH-LOADS", [-4.0, 12.0], "30 kN");
    sheet.line("ARCH-LOADS", [-4.0, 12.0], [-4.0, 9.5]);
    sheet.load("ARCH-LOADS", [0.0, 11.0], "50 kN");
    sheet.leader("ARCH-LOADS", &[[0.0, 11.0], [0.5, 11.5]], true);
    sheet.load("ARCH-LOADS", [4.0, 11.0], "20 kN");
    sheet.line("ARCH-LOADS", [0.0, 11.0], [4.0, 11.0]);
    let run = sheet.run("[rib]\nsupport = \"none\"\n");
    let all = loads(&run);
    assert_eq!(all.len(), 3, "{all:#?}");
    acts(&all[0], [-4.0, 9.5], [0.0, -30.0]);
    acts(&all[1], [0.0, 11.0], [0.0, -50.0]);
    acts(&all[2], [4.0, 11.0], [0.0, -20.0]);
    let told = |words: &str| run.findings.iter().filter(|f| f.message.contains(words)).count();
    assert_eq!(told("was counted once"), 2);
    assert_eq!(told("runs from one load to another"), 1);

    // Two arrows at one point are two loads; the same arrow twice is one.
    let mut sheet = arch();
    sheet.leader("ARCH-LOADS", &[[0.0, 11.0], [0.0, 13.0]], true);
    sheet.text("ARCH-LOADS", [0.1, 12.5], 0.2, "V = 50 kN");
    sheet.leader("ARCH-LOADS", &[[0.0, 11.0], [-3.0, 11.0]], true);
    sheet.text("ARCH-LOADS", [-2.5, 11.1], 0.2, "H = 5 kN");
    sheet.line("ARCH-LOADS", [0.0, 13.0], [0.0, 11.0]);
    let run = sheet.run("[rib]\nsupport = \"none\"\n");
    assert!(loads(&run).iter().any(|l| l.label == "V" && (l.force[1] + 50.0).abs() < 1e-9));
    // The level one misses the axis, and that is told.
    assert!(run.findings.iter().any(|f| f.check == Check::OffSpan && f.unchecks), "{:#?}", run.findings);
    assert!(run.findings.iter().any(|f| f.message.contains("was counted once")));
}

#[test]
fn what_is_no_arrow_is_told() {
    let mut sheet = arch();
    sheet.load("ARCH-LOADS", [0.0, 11.0], "50 kN");
    sheet.polyline("ARCH-LOADS", &[[3.0, 12.0], [4.0, 12.0], [4.0, 11.0], [5.0, 10.0]], false, &[]);
    sheet.polyline("ARCH-LOADS", &[[-3.0, 12.0], [-4.0, 12.0], [-4.0, 11.0], [-3.0, 11.0]], true, &[]);
    let run = sheet.run("[rib]\nsupport = \"none\"\n[limits]\noffset = 9\n");
    assert_eq!(loads(&run).len(), 1);
    let told = run.findings.iter().filter(|f| f.message.contains("is no arrow") && f.unchecks).count();
    assert_eq!(told, 2, "{:#?}", run.findings);
    // A line of no figure among loads that have one is refused by name, not passed over.
    sheet.line("ARCH-LOADS", [2.0, 11.0], [2.0, 12.0]);
    let error = sheet.run("").error.unwrap();
    assert!(error.check == "load-figure-missing" && error.message.contains("LINE"), "{error:?}");
}

/// Inclined loads by hand: the line through springings and crown of a symmetric arch of span 2a and rise f. With the loads
/// before and after the crown, moments about the crown from either side and the sums of forces give both abutments.
#[test]
fn inclined_loads_are_carried_as_statics_demand() {
    let mut sheet = arch();
    let loads_drawn: [([f64; 2], [f64; 2]); 3] =
        [([-6.0, 11.0], [30.0, -40.0]), ([1.0, 11.5], [-5.0, -12.0]), ([4.0, 11.0], [-24.0, -70.0])];
    for (tip, force) in loads_drawn {
        let size = force[0].hypot(force[1]);
        let tail = [tip[0] - 2.0 * force[0] / size, tip[1] - 2.0 * force[1] / size];
        sheet.leader("ARCH-LOADS", &[tip, tail], true);
        sheet.text("ARCH-LOADS", [tail[0], tail[1] + 0.05], 0.2, &format!("{size} kN"));
    }
    let run = sheet.run("[rib]\nsupport = \"three-hinged\"\n[line]\ngovern = \"through\"\n");
    for (load, (at, force)) in loads(&run).iter().zip(loads_drawn) {
        acts(load, at, force);
    }
    let (half, spring, crown) = (75_f64.sqrt(), 5.0, 10.0);
    let moment = |about: [f64; 2], i: usize| {
        let (at, force) = loads_drawn[i];
        (at[0] - about[0]) * force[1] - (at[1] - about[1]) * force[0]
    };
    // About the right springing, all; about the crown, what stands left of it. (Counter-clockwise positive; the push H acts
    // to the right on the left springing, V upward.)
    let all: f64 = (0..3).map(|i| moment([half, spring], i)).sum();
    let vertical = all / (2.0 * half);
    let left = moment([0.0, crown], 0);
    let push = (vertical * half - left) / (crown - spring);
    let line = &run.spans[0].cases[0].lines[0];
    assert_eq!(line.status, Status::Found);
    let (l, r) = (line.left.as_ref().unwrap(), line.right.as_ref().unwrap());
    let sum = |k: usize| loads_drawn.iter().map(|l| l.1[k]).sum::<f64>();
    for (found, expected) in [
        (l.vertical, vertical),
        (l.horizontal, push),
        (r.horizontal, push + sum(0)),
        (r.vertical, -sum(1) - vertical),
    ] {
        assert!((found - expected).abs() < 1e-9 * expected.abs(), "{found} {expected}");
    }
}

#[test]
fn the_figure_in_extended_data_counts_between_attribute_and_label() {
    let job = "[rib]\nsupport = \"none\"\n[loads]\nunit = \"kN\"\nunlabelled = 1\n";
    let with = |tags: &[(i32, &str)]| {
        let mut sheet = arch();
        sheet.point("ARCH-LOADS", [0.0, 11.0]);
        for (code, value) in tags {
            sheet.more(*code, value);
        }
        sheet.load("ARCH-LOADS", [5.0, 11.0], "40 kN");
        sheet
    };
    for (tags, force, name) in [
        (&[(1001, "BRIDGE"), (1000, "P=120 kN")][..], 120.0, "P"),
        (
            &[(1001, "BRIDGE"), (1002, "{"), (1000, "LOAD"), (1040, "85.5"), (1070, "3"), (1002, "}")],
            85.5,
            "1",
        ),
        (&[(1001, "BRIDGE"), (1040, "85.5")], 85.5, "1"),
        (&[(1001, "BRIDGE"), (1070, "-85")], -85.0, "1"),
        (&[(1001, "BRIDGE"), (1000, "27 kip")], 27.0 * 4.448_221_615_260_5, "1"),
        // Settings of the CAD program itself are no load.
        (&[(1001, "ACAD"), (1000, "DSTYLE"), (1070, "7"), (1001, "BRIDGE"), (1000, "P=120 kN")], 120.0, "P"),
    ] {
        let run = with(tags).run(job);
        let load = &loads(&run)[0];
        acts(load, [0.0, 11.0], [0.0, -force]);
        assert_eq!(load.magnitude_from, MagnitudeFrom::ExtendedData);
        assert_eq!((load.application.as_deref(), load.label.as_str()), (Some("BRIDGE"), name), "{tags:?}");
    }
    // Nothing that says how large it is.
    for tags in [
        &[(1001, "ACAD"), (1070, "7")][..],
        &[(1001, "BRIDGE"), (1040, "1.5"), (1040, "2.5")],
        &[(1001, "BRIDGE"), (1000, "see note")],
    ] {
        let run = with(tags).run(job);
        assert_eq!(loads(&run)[0].magnitude_from, MagnitudeFrom::Job, "{tags:?}");
    }
    let two = with(&[(1001, "A"), (1000, "P = 5 kN"), (1001, "B"), (1000, "P = 6 kN")]).run(job);
    assert!(two.findings.iter().any(|f| f.unchecks && f.message.contains("differ")), "{:#?}", two.findings);
    assert_eq!(with(&[(1001, "A"), (1000, "P = 1,234 kN")]).run(job).error.unwrap().check, "load-figure");
    // Before the label, which is then told as unused; on an arrow, a circle and a block as well.
    let mut sheet = with(&[(1001, "BRIDGE"), (1000, "P=120 kN")]);
    sheet.text("ARCH-LOADS", [0.1, 11.1], 0.2, "99 kN");
    sheet.line("ARCH-LOADS", [-3.0, 13.0], [-3.0, 11.0]);
    for (code, value) in [(1001, "BRIDGE"), (1040, "7")] {
        sheet.more(code, value);
    }
    sheet.add("CIRCLE", "ARCH-LOADS", &[(10, -5.0), (20, 11.0), (40, 0.1)]);
    for (code, value) in [(1001, "BRIDGE"), (1000, "8 kN")] {
        sheet.more(code, value);
    }
    let run = sheet.run(job);
    let sizes: Vec<f64> = loads(&run).iter().map(|l| -l.force[1]).collect();
    assert_eq!(sizes, [8.0, 7.0, 120.0, 40.0]);
    assert!(
        run.findings.iter().any(|f| f.check == Check::Labels && f.unchecks && f.message.contains("99 kN"))
    );
}
