//! Suggestions as their users get them: asked for by the job, shown on a layer that is off, listed, and true.

#![allow(clippy::unwrap_used)]

use std::fs;
use std::path::Path;
use std::process::Command;

use serde_json::Value;

/// Runs `mark` on a demo drawing with a job; gives back the first run of its JSON, and its CSV.
fn mark(folder: &Path, name: &str, job: &str) -> (Value, String) {
    let good = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/good");
    fs::copy(good.join(name), folder.join(name)).unwrap();
    fs::write(folder.join("thrustmark.toml"), job).unwrap();
    let output = Command::new(env!("CARGO_BIN_EXE_thrustmark"))
        .current_dir(folder)
        .args(["mark", name, "--json", "r.json", "--csv", "s.csv", "--report", "r.html"])
        .env("SOURCE_DATE_EPOCH", "1790000000")
        .output()
        .unwrap();
    assert_ne!(output.status.code(), Some(2), "{}", String::from_utf8_lossy(&output.stderr));
    let json: Value = serde_json::from_slice(&fs::read(folder.join("r.json")).unwrap()).unwrap();
    (json["runs"][0].clone(), fs::read_to_string(folder.join("s.csv")).unwrap())
}

const RIB: &str = "[layers]\naxis = \"ARCH-AXIS\"\nloads = \"ARCH-LOADS\"\n[rib]\nsupport = \"none\"\n";

#[test]
fn suggested_axis_is_listed_and_its_layer_is_off() {
    let folder = tempfile::tempdir().unwrap();
    let job = format!("{RIB}[mark]\nsuggest = true\n[limits]\noffset = 0.1\n");
    let (run, csv) = mark(folder.path(), "open-spandrel-rib.dxf", &job);
    let span = &run["spans"][0];
    let axis = &span["suggestion"]["axes"][0];
    assert_eq!(axis["status"], "found");
    let points: Vec<[f64; 2]> = serde_json::from_value(axis["points"].clone()).unwrap();
    let number = |v: &Value| v.as_f64().unwrap();
    for (end, point) in [("left", points[0]), ("right", *points.last().unwrap())] {
        for i in 0..2 {
            assert!((number(&span["axis"][end][i]) - point[i]).abs() < 1e-9, "{end} springing");
        }
    }
    let chord = |x: f64| {
        let (a, b) = (points[0], *points.last().unwrap());
        a[1] + (b[1] - a[1]) * (x - a[0]) / (b[0] - a[0])
    };
    let rise = points.iter().map(|p| p[1] - chord(p[0])).fold(0.0, f64::max);
    assert!((rise - number(&span["axis"]["rise"])).abs() < 1e-7, "{rise}");
    // The funicular of upright loads is the moment of the simple beam over the push.
    let push = number(&axis["horizontal"]);
    let loads: Vec<(f64, f64)> = span["loads"]
        .as_array()
        .unwrap()
        .iter()
        .map(|l| (number(&l["at"][0]), -number(&l["force"][1])))
        .collect();
    let (left, length) = (points[0][0], number(&span["axis"]["span"]));
    let reaction: f64 = loads.iter().map(|(x, p)| p * (left + length - x) / length).sum();
    for [x, y] in &points {
        let moment = reaction * (x - left) - loads.iter().map(|(a, p)| p * (x - a).max(0.0)).sum::<f64>();
        assert!((moment / push - (y - chord(*x))).abs() < 1e-6, "at {x}");
    }
    assert_eq!(csv.lines().filter(|l| l.starts_with("axis,")).count(), points.len());
    assert_eq!(axis["moves"].as_array().unwrap().len(), loads.len());

    let marked = fs::read_to_string(folder.path().join("open-spandrel-rib.thrust.dxf")).unwrap();
    let lines: Vec<&str> = marked.lines().map(str::trim).collect();
    let layer = lines.windows(2).position(|w| w == ["2", "THRUST-SUGGESTED-AXIS"]).unwrap();
    let colour = lines[layer..].windows(2).find(|w| w[0] == "62").unwrap()[1];
    assert_eq!(colour, "-142", "a layer with a negative colour is off");
    assert!(lines.windows(2).filter(|w| *w == ["8", "THRUST-SUGGESTED-AXIS"]).count() >= 2);
    assert!(fs::read_to_string(folder.path().join("r.html")).unwrap().contains("Suggested axis and depth"));
}

#[test]
fn nothing_is_suggested_unasked() {
    let folder = tempfile::tempdir().unwrap();
    let (run, csv) = mark(folder.path(), "open-spandrel-rib.dxf", RIB);
    assert!(run["spans"][0]["suggestion"].is_null());
    assert!(!csv.contains("\r\naxis,"));
    let marked = fs::read_to_string(folder.path().join("open-spandrel-rib.thrust.dxf")).unwrap();
    assert!(!marked.contains("SUGGESTED"));
}

/// The least depth is a claim about the program's own verdict: a hair less is outside, as much is not.
#[test]
fn the_suggested_depth_meets_the_limits_and_less_does_not() {
    let folder = tempfile::tempdir().unwrap();
    let job = |depth: f64| {
        format!(
            "[drawing]\nunit = \"mm\"\n[layers]\naxis = \"ARCH-AXIS\"\nloads = \"ARCH-LOADS\"\n[rib]\ndepth = {depth}\n\
             width = 3.6\nunit_weight = 22.0\nsupport = \"none\"\n[mark]\nsuggest = true\n[limits]\ngeometric_factor = 6.0\n"
        )
    };
    let (run, _) = mark(folder.path(), "masonry-ring.dxf", &job(0.6));
    assert_eq!(run["verdict"], "outside");
    let depth = &run["spans"][0]["suggestion"]["depth"];
    assert_eq!(depth["status"], "found");
    let factor = depth["factor"].as_f64().unwrap();
    assert!(factor > 1.0, "{factor}");
    assert!((depth["depth_max"].as_f64().unwrap() - 0.6 * factor).abs() < 1e-9);
    let verdict = |depth: f64| mark(folder.path(), "masonry-ring.dxf", &job(depth)).0["verdict"].clone();
    assert_ne!(verdict(0.6 * factor), "outside");
    assert_eq!(verdict(0.6 * factor * 0.997), "outside");
    // What mends it is said in words too.
    let said = run["findings"].as_array().unwrap();
    let said = |check: &str, key: &str| {
        let f = said.iter().find(|f| f["check"] == check).unwrap();
        f[key].as_str().unwrap_or_default().to_owned()
    };
    let remedy = said("geometric-factor", "remedy");
    assert!(remedy.contains("toward the line, by at least") && remedy.contains("is nearest"), "{remedy}");
}
