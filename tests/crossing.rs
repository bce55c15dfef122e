//! Traffic from the job file to the results: hand calculations of `fixtures/traffic`, what is refused to be computed, marks,
//! report.
#![allow(clippy::unwrap_used, clippy::float_cmp)]

use std::fs;
use std::path::{Path, PathBuf};

use serde_json::Value;
use thrustmark::flow::{self, Environment};
use thrustmark::job::Job;
use thrustmark::outcome::{Check, Direction, FindingVerdict, Run, Status, Traffic, Verdict};

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/traffic")
}

fn environment() -> Environment {
    Environment { today: jiff::civil::date(2026, 12, 1) }
}

fn run(drawing: &str) -> Run {
    let run = flow::check(&folder().join(drawing), None, environment());
    assert!(run.error.is_none(), "{:?}", run.error);
    run
}

/// The same drawing with changes to the text of the job.
fn with(drawing: &str, changes: &[(&str, &str)]) -> Run {
    let mut text = fs::read_to_string(folder().join("thrustmark.toml")).unwrap();
    for (from, to) in changes {
        assert!(text.contains(from), "{from}");
        text = text.replace(from, to);
    }
    let set = tempfile::tempdir().unwrap();
    fs::copy(folder().join(drawing), set.path().join(drawing)).unwrap();
    let path = set.path().join("thrustmark.toml");
    fs::write(&path, text).unwrap();
    let job = Job::load(&path).unwrap();
    flow::check(&set.path().join(drawing), Some(&job), environment())
}

fn traffic(run: &Run) -> &Traffic {
    let traffic = &run.spans[0].cases[0].traffic;
    assert_eq!(traffic.len(), 1);
    &traffic[0]
}

#[track_caller]
fn near(found: f64, expected: f64, slack: f64) {
    assert!((found - expected).abs() <= slack * expected.abs(), "found {found}, expected {expected}");
}

#[test]
fn an_axle_over_posts_is_as_by_hand() {
    let run = run("posts.dxf");
    let t = traffic(&run);
    assert_eq!(t.status, Status::Found);
    let slope: f64 = 0.492_187_5;
    let e = 300.0 * (1.0 + slope * slope).sqrt() / (410.0 + 110.0 * slope);
    near(e, 0.720_404, 1e-6);
    let worst = t.worst.as_ref().unwrap();
    near(worst.offset.value.unwrap(), e, 1e-9);
    let x = worst.offset.position.unwrap();
    assert!((x - 8.0).abs() < 1e-9 || (x - 24.0).abs() < 1e-9, "{x}");
    let at = t.at_worst.as_ref().unwrap();
    assert_eq!((at.axles.len(), at.axles[0].force), (1, 100.0));
    near(at.axles[0].at[1], 9.5, 1e-12);
    near(-at.on_rib[1], 100.0, 1e-12);
    // The push is greatest with the axle over the crown: 360 + 100 L / 4 f.
    let push = t.push.as_ref().unwrap();
    near(push.left[1].value.unwrap(), 460.0, 1e-9);
    near(push.left[1].position.unwrap(), 16.0, 1e-9);
    near(push.left[0].value.unwrap(), 360.0, 1e-9);
    let line = &t.influence[0];
    for o in &line.ordinates {
        let k = o.x / 32.0;
        let h = if k <= 0.5 { o.x / 16.0 } else { (32.0 - o.x) / 16.0 };
        let post = |x: f64| (x / 4.0 - (x / 4.0).round()).abs() < 1e-9;
        if post(o.x) {
            let beam = if k >= 0.25 { (1.0 - k) * 8.0 } else { 24.0 * k };
            assert!((o.push - h).abs() < 1e-9, "{} {h}", o.push);
            assert!((o.moment - (beam - h * 6.0)).abs() < 1e-9, "{} {}", o.moment, o.x);
        }
    }
    let within = run.findings.iter().find(|f| f.check == Check::Offset && f.message.contains("one axle"));
    let within = within.unwrap();
    assert_eq!((within.verdict, within.limit), (FindingVerdict::Within, Some(0.75)));
    assert!(within.message.contains("its first axle at x = "), "{}", within.message);
    let broken = with("posts.dxf", &[("limits.offset = 0.75", "limits.offset = 0.72")]);
    assert_eq!(broken.verdict, Some(Verdict::Outside));
}

#[test]
fn a_train_through_fill_is_as_by_hand() {
    let run = run("fill.dxf");
    let t = traffic(&run);
    assert_eq!(t.status, Status::Found, "{:?}", t.reason);
    near(t.scale.unwrap(), 4.0 / 3.0 * 1.1, 1e-12);
    let at = t.at_worst.as_ref().unwrap();
    near(-at.applied[1], 352.0, 1e-12);
    near(at.applied[0].abs(), 64.0, 1e-12);
    for i in 0..2 {
        let told = at.on_rib[i] + at.beside[0][i] + at.beside[1][i];
        assert!((told - at.applied[i]).abs() <= 1e-9 * 352.0, "{told} {}", at.applied[i]);
    }
    let worst = t.worst.as_ref().unwrap();
    // The ring is nearly the same on both sides, so running the other way mirrors the worst.
    assert!(worst.load_factor.value.unwrap() > 1.0);
    near(worst.multiple.value.unwrap(), worst.load_factor.value.unwrap(), 1e-12);
    assert!(t.hinges.len() >= 4, "{:?}", t.hinges);
    assert!(t.positions > 100 && t.uncertainty.unwrap() < 1e-2, "{} {:?}", t.positions, t.uncertainty);
    assert!(matches!(worst.offset.direction, Some(Direction::Right | Direction::Left)));
    // Ring use and kern use are one number seen twice.
    near(worst.kern.value.unwrap(), 3.0 * worst.ring.value.unwrap(), 1e-12);
    let said = |check: Check| run.findings.iter().filter(move |f| f.check == check);
    assert!(said(Check::LoadFactor).any(|f| f.message.contains("two axles")), "{:?}", run.findings);
    // Only the train varies: its factor is judged, and nothing is said to be missing.
    assert!(!said(Check::NotJudged).any(|f| f.message.contains("nothing varies")));
    assert!(said(Check::Traffic).any(|f| f.message.contains("go to the ground on the left")));
}

#[test]
fn a_train_of_less_than_nothing_known_is_not_computed_and_not_judged() {
    for (change, words) in [
        (("dispersal = 0.5\n", ""), "a wider spread is kinder"),
        (("effective_width = 3.0          # m\n", ""), "a wider one is kinder"),
        (("rib.width = 4.0                # m\n", ""), "width of the ring, which is not given"),
        (("through = \"fill\"\n", ""), "how it reaches the rib"),
        (("axles = [[0.0, 120.0], [1.4, 120.0]]\n", ""), "neither axles"),
    ] {
        let run = with("fill.dxf", &[change]);
        let t = traffic(&run);
        assert_eq!((t.status, t.worst.is_some()), (Status::Refused, false), "{words}");
        assert!(t.reason.as_ref().unwrap().contains(words), "{:?}", t.reason);
        assert_eq!(run.verdict, Some(Verdict::Unchecked), "{words}: {:?}", run.findings);
        assert!(run.findings.iter().any(|f| f.unchecks && f.message.contains(words)));
    }
}

#[test]
fn lanes_add_up() {
    // A second lane like the first counts like a doubled one, and its permitted multiple is that of one lane beside the other.
    let text = "[[sheet.traffic]]\nname = \"second lane\"\naxles = [[0.0, 120.0], [1.4, 120.0]]\nthrough = \"fill\"\n\
                share = 1.0\ndispersal = 0.5\ncontact = 0.3\n\n[[sheet.traffic]]\nname = \"two axles\"";
    let two = with(
        "fill.dxf",
        &[
            ("[[sheet.traffic]]\nname = \"two axles\"", text),
            ("effective_width = 3.0          # m\n", "share = 0.25\nwith = { \"second lane\" = 0.25 }\n"),
            ("dynamic = 1.1\nbraking = 0.2\n", ""),
        ],
    );
    let one = with(
        "fill.dxf",
        &[("effective_width = 3.0          # m\n", "share = 0.5\n"), ("dynamic = 1.1\nbraking = 0.2\n", "")],
    );
    let lanes = &two.spans[0].cases[0].traffic[1];
    let doubled = traffic(&one);
    let worst = |t: &Traffic| t.worst.clone().unwrap();
    near(worst(lanes).offset.value.unwrap(), worst(doubled).offset.value.unwrap(), 1e-6);
    let (a, b) = (worst(lanes).load_factor.value.unwrap(), worst(doubled).load_factor.value.unwrap());
    near(a, b, 1e-6);
    // (m + 1) halves are as much as λ wholes.
    near(worst(lanes).multiple.value.unwrap(), 2.0 * b - 1.0, 1e-6);
}

#[test]
fn uniform_load_and_knife_edge_alone() {
    let run = with(
        "posts.dxf",
        &[("axles = [[0.0, 100.0]]         # m behind the first, kN\n", "uniform = 10.0\n")],
    );
    let t = traffic(&run);
    assert_eq!(t.status, Status::Found, "{:?}", t.reason);
    // Three hinges: the greatest push is under the whole road, 10 L² / 8 f less what the end spans give to the abutments.
    let push = t.push.as_ref().unwrap().left[1].value.unwrap();
    near(push, 360.0 + 10.0 * (32.0 * 32.0) / 64.0, 2e-4);
    assert!(t.worst.as_ref().unwrap().offset.value.unwrap() > 0.1);
    assert!(t.worst.as_ref().unwrap().offset.position.is_none());
}

#[test]
fn marks_report_and_json_tell_it() {
    let set = tempfile::tempdir().unwrap();
    for name in ["posts.dxf", "fill.dxf", "thrustmark.toml"] {
        fs::copy(folder().join(name), set.path().join(name)).unwrap();
    }
    for name in ["posts.dxf", "fill.dxf"] {
        let arguments = ["mark", name, "--report", "r.html", "--json", "r.json", "--force"];
        let output = std::process::Command::new(env!("CARGO_BIN_EXE_thrustmark"))
            .current_dir(set.path())
            .args(arguments)
            .env("SOURCE_DATE_EPOCH", "1790000000")
            .output()
            .unwrap();
        assert!(output.status.code() != Some(2), "{}", String::from_utf8_lossy(&output.stderr));
        let marked = fs::read_to_string(set.path().join(name.replace(".dxf", ".thrust.dxf"))).unwrap();
        assert!(marked.contains("THRUST-TRAFFIC") && marked.contains("envelope-most"));
        assert!(marked.contains("axle"));
        let report = fs::read_to_string(set.path().join("r.html")).unwrap();
        assert!(report.contains("Traffic</h3>") && report.contains("Largest offset"));
        let json: Value =
            serde_json::from_str(&fs::read_to_string(set.path().join("r.json")).unwrap()).unwrap();
        let t = &json["runs"][0]["spans"][0]["cases"][0]["traffic"][0];
        for key in ["offset", "kern", "load_factor"] {
            assert!(t["worst"][key]["status"].is_string(), "{key}");
        }
        assert!(t["worst"]["offset"]["position"].is_number() && t["worst"]["offset"]["at"].is_array());
        assert!(t["positions"].as_u64().unwrap() > 50);
        let first = &t["envelope"][0];
        assert!(first["at"].is_array() && first["eccentricity_min"].is_number());
    }
}

/// The crossing by posts with changes to its job.
fn judged(changes: &[(&str, &str)]) -> Run {
    let run = with("posts.dxf", changes);
    assert!(run.error.is_none(), "{:?}", run.error);
    run
}

fn says(run: &Run, words: &str) -> bool {
    run.findings.iter().any(|f| f.unchecks && f.message.contains(words))
}

#[test]
fn a_train_beside_another_does_not_lose_its_uniform_load() {
    let beside = "influence = [0.25, 0.5]\nwith = { \"lane\" = 1.0 }\n\n[[sheet.traffic]]\nname = \"lane\"\n\
                  axles = [[0.0, 10.0]]\nthrough = \"posts\"\nshare = 1.0\n";
    let change = |more: &str| judged(&[("influence = [0.25, 0.5]", &format!("{beside}{more}"))]);
    assert_eq!(change("").spans[0].cases[0].traffic[0].status, Status::Found);
    for more in ["uniform = 9.0\n", "knife = 50.0\n"] {
        let run = change(more);
        assert_eq!(run.spans[0].cases[0].traffic[0].status, Status::Refused, "{more}");
        assert!(says(&run, "would not be counted"));
        assert_eq!(run.verdict, Some(Verdict::Unchecked));
    }
}

/// The train is worked out at the values stated alone, so a limit that holds there holds nowhere else.
#[test]
fn a_range_keeps_the_limits_under_a_train_from_being_judged() {
    let range = "braking = 0.2\n\n[[sheet.range]]\nwhat = \"rib.strength\"\nlow = 5\nhigh = 20\n";
    let stated = "limits.load_factor = 1.5\nrib.strength = 10";
    let only =
        |range: &str| with("fill.dxf", &[("limits.load_factor = 1.5", stated), ("braking = 0.2", range)]);
    assert!(!says(&only("braking = 0.2"), "not over the ranges"));
    let run = only(range);
    assert!(run.error.is_none(), "{:?}", run.error);
    assert!(says(
        &run,
        "under two axles were judged at the values stated, not over the ranges of rib.strength"
    ));
}

/// The push of 460 kN with the axle over the crown (by hand, above) beside the push at which the rib buckles: moments can grow
/// by 1 / (1 - 460 / critical), on the whole at most.
#[test]
fn a_limit_that_buckling_could_break_under_a_train_is_not_judged() {
    let rib = "rib.support = \"three-hinged\"\nrib.depth = 0.5\nrib.width = 1.0\nrib.tension = true\nrib.elastic_modulus = ";
    let slender = |modulus: f64, limit: f64| {
        let limit = format!("limits.offset = {limit}");
        judged(&[
            ("rib.support = \"three-hinged\"", &format!("{rib}{modulus}")),
            ("limits.offset = 0.75", &limit),
        ])
    };
    let run = slender(8000.0, 0.75);
    let critical = run.spans[0].cases[0].lines[0].buckling.as_ref().unwrap().critical.unwrap();
    let growth = 1.0 / (1.0 - 460.0 / critical);
    assert!(growth > 1.05 && growth < 2.0, "{growth}");
    let words = "bending under moving loads is not multiplied for buckling";
    assert!(says(&run, words), "{:?}", run.findings);
    assert_ne!(run.verdict, Some(Verdict::Within));
    assert!(!says(&slender(8000.0, 0.7205 * growth), words));
    assert!(says(&slender(8000.0, 0.7203 * growth), words));
}

/// In feet and kips the table of a train is turned like all else.
#[test]
fn a_report_in_feet_turns_the_train_too() {
    let run = judged(&[(
        "[[sheet]]\nmatch = \"posts.dxf\"",
        "[report]\nunits = \"us\"\n\n[[sheet]]\nmatch = \"posts.dxf\"",
    )]);
    let si = traffic(&run).clone();
    let tool = thrustmark::outcome::Tool { name: "thrustmark".into(), version: "0".into() };
    let document =
        thrustmark::outcome::Document { contract: thrustmark::outcome::CONTRACT, tool, runs: vec![run] };
    let told = thrustmark::write::us::told(&document);
    let us = traffic(&told.runs[0]);
    let (w, v) = (us.worst.as_ref().unwrap(), si.worst.as_ref().unwrap());
    near(w.offset.value.unwrap() * 0.3048, v.offset.value.unwrap(), 1e-12);
    near(w.offset.position.unwrap() * 0.3048, v.offset.position.unwrap(), 1e-12);
    // 460 kN are 103.41 kip [NIST SP 811, 2008, appendix B.8: 4.448 222 kN in a kip-force].
    near(us.push.as_ref().unwrap().left[1].value.unwrap(), 460.0 / 4.448_222, 1e-6);
    let (a, b) = (&us.at_worst.as_ref().unwrap().line, &si.at_worst.as_ref().unwrap().line);
    assert!(a.iter().zip(b).all(|(a, b)| (a[0] * 0.3048 - b[0]).abs() < 1e-9));
}

/// A build server keeps one of several cases of a name: the limit in the case as drawn passes, and that under the train does not.
#[test]
fn each_limit_is_a_test_case_of_its_own() {
    let run = judged(&[("limits.offset = 0.75", "limits.offset = 0.72")]);
    let tool = thrustmark::outcome::Tool { name: "thrustmark".into(), version: "0".into() };
    let document =
        thrustmark::outcome::Document { contract: thrustmark::outcome::CONTRACT, tool, runs: vec![run] };
    let xml = thrustmark::write::junit::xml(&document, "2026-12-01");
    let mut names: Vec<&str> =
        xml.split("<testcase ").skip(1).map(|t| t.split("time=").next().unwrap()).collect();
    assert!(names.iter().filter(|n| n.contains("\"offset, span 1, drawn")).count() >= 2, "{names:?}");
    let all = names.len();
    names.sort_unstable();
    names.dedup();
    assert_eq!(names.len(), all);
}

/// The search for a depth leaves the trains out, and says so.
#[test]
fn a_suggested_depth_says_that_trains_were_left_out() {
    let run =
        with("fill.dxf", &[("limits.load_factor = 1.5", "limits.load_factor = 1.5\nmark.suggest = true")]);
    assert!(run.error.is_none(), "{:?}", run.error);
    let told = run.findings.iter().find(|f| f.check == Check::Suggestion && f.case.is_none()).unwrap();
    assert!(told.message.contains("without the trains, whose limits were not looked at"), "{}", told.message);
}
