//! The program as its users run it: commands, files, exit status, what is said where.

#![allow(clippy::unwrap_used, clippy::float_cmp)]

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use serde_json::Value;

/// A private folder with the demo drawings and their job file.
fn office() -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    for entry in fs::read_dir(fixtures().join("good")).unwrap() {
        let path = entry.unwrap().path();
        fs::copy(&path, folder.path().join(path.file_name().unwrap())).unwrap();
    }
    folder
}

fn fixtures() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures")
}

fn run(folder: &Path, arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_thrustmark"))
        .current_dir(folder)
        .args(arguments)
        .env("SOURCE_DATE_EPOCH", "1790000000")
        .env("NO_COLOR", "1")
        .env("XDG_CACHE_HOME", env!("CARGO_TARGET_TMPDIR"))
        .output()
        .unwrap()
}

fn status(output: &Output) -> i32 {
    output.status.code().expect("ended by a signal")
}

fn out(output: &Output) -> String {
    String::from_utf8(output.stdout.clone()).unwrap()
}

fn err(output: &Output) -> String {
    String::from_utf8(output.stderr.clone()).unwrap()
}

fn results(folder: &Path, arguments: &[&str]) -> (i32, Value) {
    let mut all = arguments.to_vec();
    all.extend(["--json", "-"]);
    let output = run(folder, &all);
    let document = serde_json::from_slice(&output.stdout).unwrap_or_else(|e| panic!("{e}: {}", err(&output)));
    (status(&output), document)
}

const DRAWINGS: [&str; 4] = ["open-spandrel-rib", "masonry-ring", "unsymmetric-rib", "hanging-cable"];

#[test]
fn every_demo_drawing_is_within_its_limits() {
    let office = office();
    for name in DRAWINGS {
        let output = run(office.path(), &["check", &format!("{name}.dxf")]);
        assert_eq!(status(&output), 0, "{name}: {}{}", out(&output), err(&output));
        assert!(out(&output).contains("WITHIN THE STATED LIMITS"), "{}", out(&output));
        assert!(!out(&output).to_lowercase().contains(" safe"), "{}", out(&output));
    }
}

#[test]
fn check_writes_nothing() {
    let office = office();
    let before = fs::read_dir(office.path()).unwrap().count();
    run(office.path(), &["check", "open-spandrel-rib.dxf"]);
    assert_eq!(fs::read_dir(office.path()).unwrap().count(), before);
}

#[test]
fn mark_then_unmark_gives_back_the_source() {
    let office = office();
    for name in DRAWINGS {
        let source = fs::read(office.path().join(format!("{name}.dxf"))).unwrap();
        let output = run(office.path(), &["mark", &format!("{name}.dxf")]);
        assert_eq!(status(&output), 0, "{}", err(&output));
        let marked = format!("{name}.thrust.dxf");
        let copy = fs::read(office.path().join(&marked)).unwrap();
        assert!(copy.len() > source.len() + 1000, "the copy holds marks");
        assert_eq!(fs::read(office.path().join(format!("{name}.dxf"))).unwrap(), source, "source untouched");

        let again = run(office.path(), &["mark", &marked, "--output", "again.dxf"]);
        assert_eq!(status(&again), 0, "{}", err(&again));
        let restored = run(office.path(), &["unmark", "again.dxf", "--output", "back.dxf"]);
        assert_eq!(status(&restored), 0, "{}", err(&restored));
        assert_eq!(fs::read(office.path().join("back.dxf")).unwrap(), source, "{name}");
        // Twice is once: but for its own name the second copy is the first.
        assert_eq!(fs::read(office.path().join("again.dxf")).unwrap(), copy, "{name}");
        for file in ["back.dxf", "again.dxf"] {
            fs::remove_file(office.path().join(file)).unwrap();
        }

        fs::remove_file(office.path().join(format!("{name}.dxf"))).unwrap();
        let plain = run(office.path(), &["unmark", &marked]);
        assert_eq!(status(&plain), 0, "{}", err(&plain));
        // NAME.thrust.dxf gives NAME.unmarked.dxf or NAME.dxf; whatever it says, it holds the source.
        let beside = [format!("{name}.dxf"), format!("{name}.unmarked.dxf")]
            .into_iter()
            .map(|n| office.path().join(n))
            .find(|p| p.exists())
            .expect("an unmarked drawing stands beside the copy");
        assert_eq!(fs::read(beside).unwrap(), source);
        assert!(office.path().join(&marked).exists(), "the marked copy stays");
    }
}

#[test]
fn marking_repeats_to_the_byte() {
    let office = office();
    for (target, source) in [("one.dxf", "masonry-ring.dxf"), ("two.dxf", "masonry-ring.dxf")] {
        let output = run(office.path(), &["mark", source, "--output", target]);
        assert_eq!(status(&output), 0, "{}", err(&output));
    }
    let one = fs::read(office.path().join("one.dxf")).unwrap();
    assert_eq!(one, fs::read(office.path().join("two.dxf")).unwrap());
    // Marking the marked copy replaces the first mark.
    let third = run(
        office.path(),
        &["mark", "one.dxf", "--output", "masonry-ring.dxf.again", "--job", "thrustmark.toml"],
    );
    assert!(status(&third) != 2, "{}", err(&third));
}

#[test]
fn the_source_is_never_an_output() {
    let office = office();
    let source = fs::read(office.path().join("masonry-ring.dxf")).unwrap();
    let output = run(office.path(), &["mark", "masonry-ring.dxf", "--output", "masonry-ring.dxf", "--force"]);
    assert_eq!(status(&output), 2);
    #[cfg(unix)]
    {
        std::os::unix::fs::symlink("masonry-ring.dxf", office.path().join("link.dxf")).unwrap();
        fs::hard_link(office.path().join("masonry-ring.dxf"), office.path().join("hard.dxf")).unwrap();
        for other in ["link.dxf", "hard.dxf"] {
            let output = run(office.path(), &["mark", "masonry-ring.dxf", "--output", other, "--force"]);
            assert_eq!(status(&output), 2, "{other}");
        }
    }
    assert_eq!(fs::read(office.path().join("masonry-ring.dxf")).unwrap(), source);
}

#[test]
fn a_strange_file_is_not_replaced_without_force() {
    let office = office();
    fs::write(office.path().join("masonry-ring.thrust.dxf"), "somebody's notes").unwrap();
    let output = run(office.path(), &["mark", "masonry-ring.dxf"]);
    assert_eq!(status(&output), 2);
    assert!(err(&output).contains("--force"), "{}", err(&output));
    assert_eq!(fs::read(office.path().join("masonry-ring.thrust.dxf")).unwrap(), b"somebody's notes");
    let output = run(office.path(), &["mark", "masonry-ring.dxf", "--force"]);
    assert_eq!(status(&output), 0, "{}", err(&output));
    // A copy of our own is replaced without asking.
    let output = run(office.path(), &["mark", "masonry-ring.dxf"]);
    assert_eq!(status(&output), 0, "{}", err(&output));
}

#[test]
fn without_a_job_file_the_shape_is_shown_and_not_judged() {
    let office = office();
    fs::remove_file(office.path().join("thrustmark.toml")).unwrap();
    let output = run(office.path(), &["mark", "open-spandrel-rib.dxf"]);
    assert_eq!(status(&output), 3, "{}{}", out(&output), err(&output));
    assert!(out(&output).contains("SHAPE ONLY, NOT CHECKED"), "{}", out(&output));
    let copy = fs::read_to_string(office.path().join("open-spandrel-rib.thrust.dxf")).unwrap();
    assert!(copy.contains("SHAPE ONLY, NOT CHECKED"));
}

#[test]
fn a_plain_drawing_is_read_by_guesses_that_are_listed() {
    let office = office();
    fs::remove_file(office.path().join("thrustmark.toml")).unwrap();
    let drawing = fs::read_to_string(office.path().join("masonry-ring.dxf"))
        .unwrap()
        .replace("ARCH-AXIS", "RIBLINE")
        .replace("ARCH-LOADS", "WEIGHTS");
    fs::write(office.path().join("plain.dxf"), drawing).unwrap();
    let (code, document) = results(office.path(), &["mark", "plain.dxf"]);
    assert_eq!(code, 3, "{document:#}");
    let findings = document["runs"][0]["findings"].as_array().unwrap();
    let guessed = findings.iter().filter(|f| f["check"] == "layers").count();
    assert!(guessed >= 2, "{findings:#?}");
    assert!(office.path().join("plain.thrust.dxf").exists());
}

#[test]
fn a_broken_limit_is_status_one_and_says_what_would_mend_it() {
    let office = office();
    fs::write(
        office.path().join("strict.toml"),
        "[rib]\nsupport = \"none\"\ndepth = 0.45\n[limits]\noffset = 0.01\n",
    )
    .unwrap();
    let output = run(office.path(), &["mark", "open-spandrel-rib.dxf", "--job", "strict.toml"]);
    assert_eq!(status(&output), 1, "{}{}", out(&output), err(&output));
    let text = out(&output);
    assert!(text.contains("OUTSIDE A STATED LIMIT") && text.contains("limit 10 mm"), "{text}");
    assert!(text.contains("move the axis"), "{text}");
}

#[test]
fn json_holds_to_its_schema() {
    let office = office();
    let schema: Value = serde_json::from_slice(&run(office.path(), &["schema"]).stdout).unwrap();
    let validator = jsonschema::validator_for(&schema).unwrap();
    for arguments in [
        vec![
            "check",
            "open-spandrel-rib.dxf",
            "masonry-ring.dxf",
            "unsymmetric-rib.dxf",
            "hanging-cable.dxf",
        ],
        vec!["check", "thrustmark.toml"],
        vec!["check", "absent.dxf"],
    ] {
        let (_, document) = results(office.path(), &arguments);
        let problems: Vec<String> = validator.iter_errors(&document).map(|e| e.to_string()).collect();
        assert!(problems.is_empty(), "{problems:?}");
        assert_eq!(document["contract"], 1);
    }
}

#[test]
fn hand_calculations_of_the_demo_drawings_hold() {
    let office = office();
    let close = |value: &Value, expected: f64, tolerance: f64| {
        let value = value.as_f64().unwrap_or(f64::NAN);
        assert!((value - expected).abs() <= tolerance * expected.abs().max(1.0), "{value} is not {expected}");
    };
    let through = |name: &str| {
        let job = fs::read_to_string(office.path().join("thrustmark.toml")).unwrap();
        fs::write(
            office.path().join("through.toml"),
            job.replace("[limits]", "[line]\ndraw = [\"through\"]\n\n[limits]"),
        )
        .unwrap();
        let (code, document) = results(office.path(), &["check", name, "--job", "through.toml"]);
        assert_eq!(code, 0, "{document:#}");
        let span = document["runs"][0]["spans"][0].clone();
        let line = span["cases"][0]["lines"]
            .as_array()
            .unwrap()
            .iter()
            .find(|l| l["kind"] == "through")
            .unwrap()
            .clone();
        (span, line)
    };
    // fixtures/good/open-spandrel-rib.md
    let (span, line) = through("open-spandrel-rib.dxf");
    close(&span["axis"]["span"], 36.0, 1e-12);
    close(&span["axis"]["rise"], 9.0, 1e-9);
    close(&line["left"]["horizontal"], 380.0, 1e-9);
    close(&line["left"]["vertical"], 332.5, 1e-9);
    let closest = &span["cases"][0]["lines"][0];
    assert_eq!(closest["kind"], "closest");
    let offset = closest["offset"]["max_abs"].as_f64().unwrap();
    assert!(offset > 0.25 * 0.1058 && offset < 0.1406, "{offset}");
    assert!(closest["proof"]["gap"].as_f64().unwrap() < 1e-9);
    // fixtures/good/masonry-ring.md
    let (span, line) = through("masonry-ring.dxf");
    close(&span["axis"]["span"], 11.258_330_249_197_7, 1e-9);
    close(&span["axis"]["rise"], 3.25, 1e-9);
    close(&line["left"]["horizontal"], 107.200_894_094_698, 1e-9);
    close(&line["left"]["vertical"], 138.0, 1e-9);
    for station in span["cases"][0]["lines"][0]["stations"].as_array().unwrap() {
        close(&station["depth"], 0.6, 1e-12);
    }
    let offset = span["cases"][0]["lines"][0]["offset"]["max_abs"].as_f64().unwrap();
    assert!((offset - 0.074_257).abs() < 0.0076, "{offset}");
    // fixtures/good/unsymmetric-rib.md
    let (_, line) = through("unsymmetric-rib.dxf");
    close(&line["left"]["horizontal"], 5700.0 / 29.0, 1e-9);
    close(&line["left"]["vertical"], 14180.0 / 87.0, 1e-9);
    close(&line["right"]["vertical"], 280.0 - 14180.0 / 87.0, 1e-9);
    // fixtures/good/hanging-cable.md
    let (span, line) = through("hanging-cable.dxf");
    assert_eq!(span["kind"], "cable");
    close(&line["left"]["horizontal"], -177.928_864_610_42, 1e-9);
    close(&line["left"]["vertical"], 77.843_878_267_058_8, 1e-9);
    close(&line["offset"]["max_abs"], 0.0, 1e-9);
}

#[test]
fn mistakes_are_told_with_the_way_to_mend_them() {
    let office = office();
    let cases: [(&str, &str, &[&str]); 4] = [
        ("key.toml", "[rib]\ndepht = 0.4\n", &["depht", "depth", "line 2"]),
        ("layer.toml", "[layers]\naxis = \"ARCH-AXES\"\n", &["ARCH-AXES", "ARCH-AXIS"]),
        ("built.toml", "[rib]\njoint_loss = 0.01\n", &["joint_loss", "line 2"]),
        ("value.toml", "[limits]\noffset = -1\n", &["offset", "line 2"]),
    ];
    for (name, job, words) in cases {
        fs::write(office.path().join(name), job).unwrap();
        let output = run(office.path(), &["mark", "masonry-ring.dxf", "--job", name]);
        assert_eq!(status(&output), 2, "{name}: {}{}", out(&output), err(&output));
        for word in words {
            assert!(err(&output).contains(word), "{name} lacks {word}: {}", err(&output));
        }
        assert!(!office.path().join("masonry-ring.thrust.dxf").exists());
    }
    for arguments in [
        &["mark", "absent.dxf"][..],
        &["mark", "thrustmark.toml"],
        &["mark"],
        &[],
        &["merk", "x"],
        &["check", "."],
    ] {
        let folder = tempfile::tempdir().unwrap();
        fs::copy(office.path().join("thrustmark.toml"), folder.path().join("thrustmark.toml")).unwrap();
        let output = run(folder.path(), arguments);
        assert_eq!(status(&output), 2, "{arguments:?}");
        assert!(
            !err(&output).is_empty() && !err(&output).contains("panicked"),
            "{arguments:?}: {}",
            err(&output)
        );
    }
}

#[test]
fn unmark_refuses_a_drawing_without_marks_and_a_changed_copy() {
    let office = office();
    let output = run(office.path(), &["unmark", "masonry-ring.dxf"]);
    assert_eq!(status(&output), 2);
    assert_eq!(status(&run(office.path(), &["mark", "masonry-ring.dxf"])), 0);
    let marked = office.path().join("masonry-ring.thrust.dxf");
    let changed = fs::read_to_string(&marked).unwrap().replacen("MILL LADE", "MILL RACE", 1);
    fs::write(&marked, changed).unwrap();
    let output = run(office.path(), &["unmark", "masonry-ring.thrust.dxf", "--output", "back.dxf"]);
    assert_eq!(status(&output), 2, "{}", out(&output));
    assert!(!office.path().join("back.dxf").exists());
    let output =
        run(office.path(), &["unmark", "masonry-ring.thrust.dxf", "--output", "back.dxf", "--force"]);
    assert_eq!(status(&output), 0, "{}", err(&output));
    let said = out(&output) + &err(&output);
    assert!(said.contains("not byte-exact"), "{said}");
}

#[test]
fn list_tells_what_the_layers_could_be() {
    let office = office();
    let output = run(office.path(), &["list", "unsymmetric-rib.dxf"]);
    assert_eq!(status(&output), 0, "{}", err(&output));
    for word in ["ARCH-AXIS", "ARCH-LOADS", "axis", "loads", "INSERT", "AC1015"] {
        assert!(out(&output).contains(word), "{word}: {}", out(&output));
    }
}

#[test]
fn help_and_schema_end_well() {
    let office = office();
    for arguments in [&["--help"][..], &["mark", "--help"], &["--version"], &["schema"]] {
        let output = run(office.path(), arguments);
        assert_eq!(status(&output), 0, "{arguments:?}");
    }
    let help = out(&run(office.path(), &["--help"]));
    assert!(help.contains("qualified engineer"), "{help}");
}

#[test]
fn an_elastic_support_makes_the_elastic_line_govern() {
    let office = office();
    let job = "[rib]\ndepth = 0.45\nwidth = 4.0\ntension = true\nsupport = \"two-hinged\"\n\
        [limits]\nkern = 2.0\nstress = 10.0\n";
    fs::write(office.path().join("elastic.toml"), job).unwrap();
    let (code, document) =
        results(office.path(), &["check", "open-spandrel-rib.dxf", "--job", "elastic.toml"]);
    assert_eq!(code, 0, "{document:#}");
    let case = &document["runs"][0]["spans"][0]["cases"][0];
    assert_eq!(case["governs"], "elastic");
    let line = &case["lines"][0];
    assert_eq!(line["support"], "two-hinged");
    // Hinges at the springings: no moment there; and the push of a shallow funicular rib lies just below that of the
    // funicular (rib shortening), 380 kN in fixtures/good/open-spandrel-rib.md.
    assert!(line["left"]["eccentricity"].as_f64().unwrap().abs() < 1e-9);
    let push = line["left"]["horizontal"].as_f64().unwrap();
    assert!(push < 381.0 && push > 370.0, "{push}");
    // A warm day pushes more.
    let warm =
        job.replace("[limits]", "elastic_modulus = 30000.0\nexpansion = 1e-5\ntemperature = 20.0\n[limits]");
    fs::write(office.path().join("warm.toml"), warm).unwrap();
    let (_, document) = results(office.path(), &["check", "open-spandrel-rib.dxf", "--job", "warm.toml"]);
    let warmer =
        document["runs"][0]["spans"][0]["cases"][0]["lines"][0]["left"]["horizontal"].as_f64().unwrap();
    // H = 15 E I α T / (8 f²) for a parabola with secant stiffness (textbook formula, from memory): a first guess.
    let guess = 15.0 * 3.0e7 * 4.0 * 0.45_f64.powi(3) / 12.0 * 1e-5 * 20.0 / (8.0 * 81.0);
    assert!((warmer - push - guess).abs() < 0.15 * guess, "{push} {warmer} {guess}");
    // Without the modulus the temperature has no size: the missing key is named.
    let missing = job.replace("[limits]", "expansion = 1e-5\ntemperature = 20.0\n[limits]");
    fs::write(office.path().join("missing.toml"), missing).unwrap();
    let output = run(office.path(), &["check", "open-spandrel-rib.dxf", "--job", "missing.toml"]);
    assert_eq!(status(&output), 2);
    assert!(err(&output).contains("rib.elastic_modulus"), "{}", err(&output));
}
