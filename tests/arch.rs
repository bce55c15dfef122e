//! Arches as they are drawn: ring lines, weights, cases, from a drawing to the results.
// Helpers of tests stand outside of the test functions that the lints exempt.
#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

use std::fmt::Write as _;

use thrustmark::flow::{self, Environment};
use thrustmark::job::Job;
use thrustmark::outcome::{Check, FindingVerdict, MagnitudeFrom, Run, Status, Verdict};

/// A small R12 drawing, entity by entity; lengths in drawing units.
#[derive(Default, Clone)]
struct Sheet(Vec<String>);

impl Sheet {
    fn add(&mut self, kind: &str, layer: &str, tags: &[(i32, f64)]) {
        let mut text = format!("  0\n{kind}\n  5\n{:X}\n  8\n{layer}\n", 0x100 + self.0.len());
        for (code, value) in tags {
            writeln!(text, "{code:>3}\n{value}").unwrap();
        }
        self.0.push(text);
    }

    fn line(&mut self, layer: &str, a: [f64; 2], b: [f64; 2]) {
        self.add("LINE", layer, &[(10, a[0]), (20, a[1]), (11, b[0]), (21, b[1])]);
    }

    /// An arc counter-clockwise between two angles in degrees.
    fn arc(&mut self, layer: &str, centre: [f64; 2], radius: f64, from: f64, to: f64) {
        self.add("ARC", layer, &[(10, centre[0]), (20, centre[1]), (40, radius), (50, from), (51, to)]);
    }

    fn load(&mut self, layer: &str, at: [f64; 2], label: &str) {
        self.add("POINT", layer, &[(10, at[0]), (20, at[1])]);
        self.add("TEXT", layer, &[(10, at[0]), (20, at[1] + 0.1), (40, 0.2)]);
        let last = self.0.last_mut().unwrap();
        writeln!(last, "  1\n{label}").unwrap();
    }

    fn text(&self) -> String {
        let mut text = "  0\nSECTION\n  2\nHEADER\n  9\n$ACADVER\n  1\nAC1009\n  0\nENDSEC\n  0\nSECTION\n  2\nENTITIES\n".to_owned();
        text.extend(self.0.iter().cloned());
        text + "  0\nENDSEC\n  0\nEOF\n"
    }

    fn run(&self, job: &str) -> Run {
        let folder = tempfile::tempdir().unwrap();
        let file = folder.path().join("arch.dxf");
        std::fs::write(&file, self.text()).unwrap();
        let job = format!("[drawing]\nunit = \"m\"\n{job}");
        let job = Job::parse(job.as_bytes(), None).unwrap();
        let environment = Environment { today: jiff::civil::date(2026, 12, 1) };
        let output = folder.path().join("out.dxf");
        let target = flow::Target { output: Some(output.clone()), force: false };
        let run = flow::mark(&file, Some(&job), &target, environment);
        if run.error.is_none() {
            let marked = std::fs::read_to_string(output).unwrap();
            assert!(marked.len() > self.text().len());
        }
        run
    }
}

fn computed(run: Run) -> Run {
    assert!(run.error.is_none(), "{:?}", run.error);
    run
}

/// A half ring of the given thickness over radius, radius 10.
fn half_ring(thickness: f64) -> Sheet {
    let mut sheet = Sheet::default();
    sheet.arc("ARCH-INTRADOS", [0.0, 0.0], 10.0 * (1.0 - thickness / 2.0), 0.0, 180.0);
    sheet.arc("ARCH-EXTRADOS", [0.0, 0.0], 10.0 * (1.0 + thickness / 2.0), 0.0, 180.0);
    sheet
}

const WEIGHT: &str = "[rib]\nwidth = 2.0\nunit_weight = 24.0\nsupport = \"none\"\n[limits]\ngeometric_factor = 1.0\n[accept]\nassumed = [\"layers\"]\n";

#[test]
fn the_least_half_ring_under_its_own_weight() {
    // Milankovitch (1907) to twelve digits.
    let least = 0.107_478_038_107;
    let run = computed(half_ring(least).run(WEIGHT));
    let span = &run.spans[0];
    let safety = span.cases[0].safety.as_ref().unwrap();
    assert!((safety.geometric_factor.unwrap() - 1.0).abs() < 1e-9, "{:?}", safety.geometric_factor);
    let weight = 24.0 * 2.0 * std::f64::consts::PI * 10.0 * 10.0 * least;
    let case = &span.cases[0];
    assert!((case.total_load[1] + weight).abs() < 1e-9 * weight);
    // The ring is listed by its pieces, and they are all of the weight.
    assert!(span.loads.iter().all(|l| l.magnitude_from == MagnitudeFrom::SelfWeight && l.set == "self"));
    let listed: f64 = case.forces.iter().map(|f| f[1]).sum();
    assert!((listed + weight).abs() < 1e-9 * weight);
    let ring = span.ring.as_ref().unwrap();
    assert!((ring.depth_min - 10.0 * least).abs() < 1e-8 && (ring.depth_max - 10.0 * least).abs() < 1e-8);
    assert_eq!(ring.entities.len(), 2);
    // A hair thinner, and no line lies inside.
    let run = computed(half_ring(least * (1.0 - 1e-6)).run(WEIGHT));
    assert_eq!(run.verdict, Some(Verdict::Outside));
    let run = computed(half_ring(least * (1.0 + 1e-6)).run(WEIGHT));
    assert_eq!(run.verdict, Some(Verdict::Within), "{:#?}", run.findings);
    assert!(!run.findings.iter().any(|f| f.message.contains("left out: the rib's own weight")));
}

#[test]
fn a_ring_by_two_lines_is_the_rib_by_axis_and_depth() {
    let loads = |sheet: &mut Sheet| {
        for (x, p) in [(-6.0, "30 kN"), (-2.0, "50 kN"), (2.0, "50 kN"), (6.0, "40 kN")] {
            sheet.load("ARCH-LOADS", [x, 11.0], p);
        }
    };
    let job = "[rib]\nwidth = 3.0\nunit_weight = 20.0\nsupport = \"none\"\n[limits]\noffset = 1.0\n";
    let mut lines = Sheet::default();
    lines.arc("ARCH-INTRADOS", [0.0, 0.0], 9.6, 20.0, 160.0);
    lines.arc("ARCH-EXTRADOS", [0.0, 0.0], 10.4, 20.0, 160.0);
    loads(&mut lines);
    let mut axis = Sheet::default();
    axis.arc("ARCH-AXIS", [0.0, 0.0], 10.0, 20.0, 160.0);
    loads(&mut axis);
    let mut both = lines.clone();
    both.arc("ARCH-AXIS", [0.0, 0.0], 10.0, 20.0, 160.0);
    let a = computed(lines.run(job));
    let b = computed(axis.run(&job.replace("[rib]", "[rib]\ndepth = 0.8")));
    let c = computed(both.run(job));
    let value = |run: &Run| {
        let case = &run.spans[0].cases[0];
        let line = &case.lines[0];
        (line.offset.as_ref().unwrap().max_abs, line.left.as_ref().unwrap().horizontal, case.total_load[1])
    };
    for other in [value(&b), value(&c)] {
        let first = value(&a);
        assert!((first.0 - other.0).abs() < 1e-8 && (first.1 - other.1).abs() < 1e-6, "{first:?} {other:?}");
        assert!((first.2 - other.2).abs() < 1e-6);
    }
    // Loads and pieces of the ring take turns.
    let own = a.spans[0].loads.iter().filter(|l| l.magnitude_from == MagnitudeFrom::SelfWeight).count();
    assert_eq!((own, a.spans[0].loads.len()), (5, 9));
    let entities: Vec<_> = a.spans[0].axis.entities.iter().map(|e| e.layer.as_str()).collect();
    assert_eq!(entities, ["ARCH-INTRADOS", "ARCH-EXTRADOS"]);
    assert_eq!(c.spans[0].axis.entities[0].layer, "ARCH-AXIS");
}

#[test]
fn a_thickening_ring_and_an_axis_off_its_middle() {
    let mut sheet = Sheet::default();
    sheet.arc("ARCH-INTRADOS", [0.0, 0.0], 10.0, 30.0, 150.0);
    sheet.arc("ARCH-EXTRADOS", [0.0, -1.0], 11.4, 30.0, 150.0);
    sheet.load("ARCH-LOADS", [-3.0, 11.0], "P1 = 30 kN");
    sheet.load("ARCH-LOADS", [3.0, 11.0], "P2 = 30 kN");
    let job = "[rib]\nsupport = \"none\"\n[limits]\nring = 1.0\n";
    let run = computed(sheet.run(job));
    let ring = run.spans[0].ring.as_ref().unwrap();
    assert!((ring.depth_min - 0.4).abs() < 1e-4, "{ring:?}");
    assert!(ring.depth_max > 0.8);
    // The axis lies on the ellipse of the points equally far from both circles.
    for station in &run.spans[0].cases[0].lines[0].stations {
        let [x, y] = station.at;
        assert!((x.hypot(y) + x.hypot(y + 1.0) - 21.4).abs() < 1e-6);
    }
    sheet.arc("ARCH-AXIS", [0.0, -0.5], 10.72, 35.0, 145.0);
    let run = computed(sheet.run(job));
    let told = run.findings.iter().find(|f| f.message.contains("beside the middle of the ring"));
    assert!(told.unwrap().value.unwrap() > 0.01);
    // Outside of the ring it is refused.
    let mut sheet = half_ring(0.1);
    sheet.arc("ARCH-AXIS", [0.0, 0.0], 12.0, 10.0, 170.0);
    let error = sheet.run(WEIGHT).error.unwrap();
    assert_eq!(error.check, "axis-off-ring");
}

#[test]
fn a_ring_that_is_none_is_refused() {
    let mut half = Sheet::default();
    half.arc("ARCH-INTRADOS", [0.0, 0.0], 10.0, 30.0, 150.0);
    assert_eq!(half.run(WEIGHT).error.unwrap().check, "ring-half");
    let mut over = Sheet::default();
    over.arc("ARCH-INTRADOS", [0.0, 0.0], 10.6, 30.0, 150.0);
    over.arc("ARCH-EXTRADOS", [0.0, 0.0], 10.0, 30.0, 150.0);
    assert_eq!(over.run(WEIGHT).error.unwrap().check, "ring-upside-down");
    let mut broken = half_ring(0.1);
    broken.line("ARCH-INTRADOS", [0.0, 9.5], [1.0, 8.0]);
    let error = broken.run(WEIGHT).error.unwrap();
    assert!(error.check.starts_with("intrados") && error.message.contains("intrados"), "{error:?}");
    // A weight without a width, and one without a depth.
    let mut bare = Sheet::default();
    bare.arc("ARCH-AXIS", [0.0, 0.0], 10.0, 30.0, 150.0);
    assert_eq!(bare.run("[rib]\nunit_weight = 20.0\n").error.unwrap().check, "own-weight");
    assert_eq!(bare.run("[rib]\nunit_weight = 20.0\nwidth = 2.0\n").error.unwrap().check, "own-weight");
}

#[test]
fn every_case_is_judged_with_its_factors() {
    let mut sheet = half_ring(0.2);
    for x in [-6.0, -2.0, 2.0, 6.0] {
        sheet.load("ARCH-LOADS-DEAD", [x, 12.0], "100 kN");
    }
    sheet.load("ARCH-LOADS-LIVE", [-4.0, 12.0], "60 kN");
    let job = "[rib]\nwidth = 2.0\nunit_weight = 24.0\nsupport = \"none\"\n[limits]\nload_factor = 1.2\n
        [[case]]\nname = \"dead\"\nfactors = { \"ARCH-LOADS-DEAD\" = 1.0, self = 1.0 }\n
        [[case]]\nname = \"live\"\nfactors = { \"ARCH-LOADS-D*\" = 1.1, self = 1.2, \"ARCH-LOADS-LIVE\" = 1.5 }\nvary = [\"ARCH-LOADS-LIVE\"]\n";
    let run = computed(sheet.run(job));
    let span = &run.spans[0];
    let [dead, live] = &span.cases[..] else { panic!("{:?}", span.cases.len()) };
    assert_eq!((dead.name.as_str(), live.name.as_str()), ("dead", "live"));
    let own = 24.0 * 2.0 * std::f64::consts::PI * 10.0 * 2.0;
    assert!((dead.total_load[1] + 400.0 + own).abs() < 1e-6);
    assert!((live.total_load[1] + 440.0 + 90.0 + 1.2 * own).abs() < 1e-6);
    for (case, factor) in [(dead, 0.0), (live, 1.5)] {
        assert_eq!(case.forces.len(), span.loads.len());
        let sum: f64 = case.forces.iter().map(|f| f[1]).sum();
        assert!((sum - case.total_load[1]).abs() < 1e-6);
        let place = span.loads.iter().position(|l| l.set == "ARCH-LOADS-LIVE").unwrap();
        assert!((case.forces[place][1] + 60.0 * factor).abs() < 1e-12);
    }
    let message = |text: &str| run.findings.iter().find(|f| f.message.contains(text));
    assert!(message("case dead leaves out: ARCH-LOADS-LIVE").is_some());
    // The live load may grow; in the dead case nothing varies, and the stated limit is not judged there.
    let safety = live.safety.as_ref().unwrap();
    assert!(safety.load_factor.unwrap() > 1.0 && safety.status["load_factor"] == Status::Found);
    assert!(safety.hinges.len() >= 4 && safety.load_factor_least.unwrap().abs() < 1e-9);
    let judged = |case: &str, check: Check| {
        run.findings.iter().find(|f| f.case.as_deref() == Some(case) && f.check == check).cloned()
    };
    assert_ne!(judged("live", Check::LoadFactor).unwrap().verdict, FindingVerdict::Note);
    assert!(judged("dead", Check::NotJudged).is_some());
    // The same load by hand in one case without factors gives the same line.
    let mut by_hand = half_ring(0.2);
    for x in [-6.0, -2.0, 2.0, 6.0] {
        by_hand.load("ARCH-LOADS-DEAD", [x, 12.0], "110 kN");
    }
    by_hand.load("ARCH-LOADS-LIVE", [-4.0, 12.0], "90 kN");
    let other = computed(by_hand.run("[rib]\nwidth = 2.0\nunit_weight = 28.8\nsupport = \"none\"\n"));
    let push = |case: &thrustmark::outcome::Case| case.lines[0].left.as_ref().unwrap().horizontal;
    assert!((push(live) - push(&other.spans[0].cases[0])).abs() < 1e-6);
    // A name that stands for nothing here is told, and keeps the run from being judged.
    let wrong = job
        .replace("\"ARCH-LOADS-LIVE\" = 1.5", "\"ARCH-LOADS-LIFE\" = 1.5")
        .replace("vary = [\"ARCH-LOADS-LIVE\"]", "");
    let run = computed(sheet.run(&wrong));
    let told = run.findings.iter().find(|f| f.message.contains("ARCH-LOADS-LIFE")).unwrap();
    assert!(told.unchecks && told.case.as_deref() == Some("live"));
}

#[test]
fn stress_is_judged_in_each_case_by_its_own_line() {
    let mut sheet = Sheet::default();
    sheet.arc("ARCH-AXIS", [0.0, 0.0], 10.0, 30.0, 150.0);
    for x in [-5.0, 0.0, 5.0] {
        sheet.load("ARCH-LOADS-DEAD", [x, 11.0], "30 kN");
    }
    sheet.load("ARCH-LOADS-LIVE", [-4.0, 11.0], "120 kN");
    let job =
        "[rib]\ndepth = 0.5\nwidth = 1.0\ntension = true\nsupport = \"two-hinged\"\n[limits]\nstress = 2.5\n
        [[case]]\nname = \"dead\"\nfactors = { \"ARCH-LOADS-DEAD\" = 1.0 }\n
        [[case]]\nname = \"full\"\nfactors = { \"ARCH-LOADS-*\" = 1.0 }\n";
    let run = computed(sheet.run(job));
    let mut values = Vec::new();
    for case in &run.spans[0].cases {
        let worst = case.lines[0].stations.iter().map(|s| s.stress_max.unwrap().max(-s.stress_min.unwrap()));
        let worst = worst.fold(0.0, f64::max);
        let judged =
            run.findings.iter().find(|f| f.check == Check::Stress && f.case.as_ref() == Some(&case.name));
        let judged = judged.unwrap();
        assert!((judged.value.unwrap() - worst).abs() <= 1e-9 * worst, "{judged:?} {worst}");
        let expected = if worst > 2.5 { FindingVerdict::Outside } else { FindingVerdict::Within };
        assert_eq!(judged.verdict, expected);
        values.push(worst);
    }
    assert!(values[0] < 2.5 && values[1] > 2.5, "the two cases fall on either side of the limit: {values:?}");
}

#[test]
fn drawn_hinges_fix_the_line() {
    let mut sheet = Sheet::default();
    sheet.arc("ARCH-AXIS", [0.0, 0.0], 10.0, 30.0, 150.0);
    for (x, label) in [(-4.0, "30 kN"), (-1.0, "50 kN"), (3.0, "20 kN")] {
        sheet.load("ARCH-LOADS", [x, 11.0], label);
    }
    let (c, s) = (30_f64.to_radians().cos() * 10.0, 5.0);
    // The crown hinge stands a little beside the crown and off the axis.
    let hinges = [[-c, s], [0.5, 9.9], [c, s]];
    for [x, y] in hinges {
        sheet.add("POINT", "ARCH-HINGES", &[(10, x), (20, y)]);
    }
    let job = "[rib]\ndepth = 0.4\nsupport = \"three-hinged\"\n[limits]\nring = 1.0\n";
    let run = computed(sheet.run(job));
    let line = &run.spans[0].cases[0].lines[0];
    // Moments about the right hinge, and about the middle one for the left part, by hand.
    let load = |x: f64, p: f64, about: f64| p * (about - x);
    let v = (load(-4.0, 30.0, c) + load(-1.0, 50.0, c) + load(3.0, 20.0, c)) / (2.0 * c);
    let h = (v * (0.5 + c) - load(-4.0, 30.0, 0.5) - load(-1.0, 50.0, 0.5)) / (9.9 - s);
    let left = line.left.as_ref().unwrap();
    assert!(
        (left.horizontal - h).abs() < 1e-9 * h && (left.vertical - v).abs() < 1e-9 * v,
        "{left:?} {h} {v}"
    );
    assert_eq!(run.findings.iter().filter(|f| f.message.contains("read as a hinge")).count(), 3);
    // One that stands off the rib is told; four make a mechanism.
    let mut off = sheet.clone();
    off.add("POINT", "ARCH-HINGES", &[(10, 2.0), (20, 5.0)]);
    let run = computed(off.run(job));
    let told = run.findings.iter().find(|f| f.message.contains("off every rib")).unwrap();
    assert!(told.unchecks);
    let mut four = sheet;
    four.add("POINT", "ARCH-HINGES", &[(10, -5.0), (20, 75_f64.sqrt())]);
    assert_eq!(four.run(job).error.unwrap().check, "hinges");
}

#[test]
fn one_arch_in_many_ways_has_one_answer() {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/ways");
    let job = Job::load(&folder.join("thrustmark.toml")).unwrap();
    let environment = Environment { today: jiff::civil::date(2026, 12, 1) };
    let mut files: Vec<_> = std::fs::read_dir(&folder)
        .unwrap()
        .map(|e| e.unwrap().path())
        .filter(|p| p.extension().is_some_and(|e| e == "dxf"))
        .collect();
    files.sort();
    assert!(files.len() >= 15);
    let mut first: Option<Vec<f64>> = None;
    for file in files {
        let run = computed(flow::check(&file, Some(&job), environment));
        assert_eq!(run.verdict, Some(Verdict::Within), "{file:?} {:#?}", run.findings);
        let span = &run.spans[0];
        let case = &span.cases[0];
        let line = &case.lines[0];
        let ring = 1_005.309_649_148_734;
        assert!((case.total_load[1] + 140.0 + ring).abs() < 1e-8 * ring, "{file:?}");
        let (left, right) = (line.left.as_ref().unwrap(), line.right.as_ref().unwrap());
        let mut numbers = vec![
            span.axis.span,
            span.axis.rise,
            span.axis.length,
            line.offset.as_ref().unwrap().max_abs,
            left.horizontal,
            left.vertical,
            right.vertical,
            case.pole.as_ref().unwrap().scatter,
            case.safety.as_ref().unwrap().geometric_factor.unwrap(),
        ];
        numbers.extend(case.forces.iter().flatten());
        match &first {
            None => first = Some(numbers),
            Some(first) => {
                assert_eq!(first.len(), numbers.len(), "{file:?}");
                for (a, b) in first.iter().zip(&numbers) {
                    assert!((a - b).abs() <= 1e-8 * a.abs().max(1.0), "{file:?}: {a} {b}");
                }
            }
        }
    }
}
