//! The tool in a drawing office: many drawings, marks held against their sources, revisions compared, folders watched.

#![allow(clippy::unwrap_used, clippy::float_cmp, clippy::print_stdout)]

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use serde_json::Value;

const DRAWINGS: [&str; 4] =
    ["hanging-cable.dxf", "masonry-ring.dxf", "open-spandrel-rib.dxf", "unsymmetric-rib.dxf"];

/// A private folder with the demo drawings and their job file, and a cache folder of its own.
struct Office {
    folder: tempfile::TempDir,
    cache: tempfile::TempDir,
}

impl Office {
    fn new() -> Self {
        let office = Self::empty();
        for entry in fs::read_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/good")).unwrap() {
            let path = entry.unwrap().path();
            if path.extension().is_some_and(|e| e != "md") {
                fs::copy(&path, office.path(path.file_name().unwrap().to_str().unwrap())).unwrap();
            }
        }
        office
    }

    fn empty() -> Self {
        Self { folder: tempfile::tempdir().unwrap(), cache: tempfile::tempdir().unwrap() }
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    fn command(&self, arguments: &[&str]) -> Command {
        let mut command = Command::new(env!("CARGO_BIN_EXE_thrustmark"));
        command
            .current_dir(self.folder.path())
            .args(arguments)
            .env("SOURCE_DATE_EPOCH", "1790000000")
            .env("NO_COLOR", "1")
            .env("XDG_CACHE_HOME", self.cache.path());
        command
    }

    fn run(&self, arguments: &[&str]) -> Ran {
        Ran::of(self.command(arguments).output().unwrap())
    }

    fn json(&self, arguments: &[&str]) -> (i32, Value) {
        let mut all = arguments.to_vec();
        all.extend(["--json", "-"]);
        let ran = self.run(&all);
        let value = serde_json::from_str(&ran.out).unwrap_or_else(|e| panic!("{e}: {}{}", ran.out, ran.err));
        (ran.status, value)
    }

    fn edit(&self, name: &str, from: &str, to: &str) {
        let text = fs::read_to_string(self.path(name)).unwrap();
        assert!(text.contains(from), "{name} holds no {from:?}");
        fs::write(self.path(name), text.replacen(from, to, 1)).unwrap();
    }
}

struct Ran {
    status: i32,
    out: String,
    err: String,
}

impl Ran {
    fn of(output: Output) -> Self {
        let text = |bytes| String::from_utf8(bytes).unwrap();
        let ran = Self {
            status: output.status.code().expect("ended by a signal"),
            out: text(output.stdout),
            err: text(output.stderr),
        };
        assert!(!ran.err.contains("panicked"), "{}", ran.err);
        ran
    }

    #[track_caller]
    fn ends(self, status: i32) -> Self {
        assert_eq!(self.status, status, "{}{}", self.out, self.err);
        self
    }

    #[track_caller]
    fn says(self, words: &[&str]) -> Self {
        for word in words {
            assert!(self.out.contains(word), "no {word:?} in: {}{}", self.out, self.err);
        }
        self
    }

    #[track_caller]
    fn tells(self, words: &[&str]) -> Self {
        for word in words {
            assert!(self.err.contains(word), "no {word:?} in: {}{}", self.out, self.err);
        }
        self
    }
}

// Many drawings.

#[test]
fn any_number_of_threads_gives_the_same_results() {
    let office = Office::new();
    fs::write(office.path("broken.dxf"), "  0\nSECTION\nnonsense\n").unwrap();
    let of = |jobs: &str| {
        let ran = office.run(&["check", ".", "absent.dxf", "--jobs", jobs, "--json", "-"]).ends(2);
        ran.out
    };
    let one = of("1");
    assert_eq!(one, of("2"));
    assert_eq!(one, of("16"));
    let document: Value = serde_json::from_str(&one).unwrap();
    let files: Vec<&str> =
        document["runs"].as_array().unwrap().iter().map(|r| r["drawing"]["file"].as_str().unwrap()).collect();
    let expected: Vec<String> = ["broken.dxf"]
        .into_iter()
        .chain(DRAWINGS)
        .map(|n| format!("./{n}"))
        .chain(["absent.dxf".to_owned()])
        .collect();
    assert_eq!(files, expected);
}

#[test]
fn one_bad_drawing_never_stops_the_rest() {
    let office = Office::new();
    fs::write(office.path("a-broken.dxf"), "  0\nSECTION\nnonsense\n").unwrap();
    let ran = office.run(&["mark", "."]).ends(2);
    assert!(ran.out.starts_with("5 drawings: 1 not read, 4 within\n"), "{}", ran.out);
    assert!(ran.out.lines().nth(1).unwrap().contains("a-broken.dxf"), "worst first: {}", ran.out);
    for name in DRAWINGS {
        assert!(office.path(&name.replace(".dxf", ".thrust.dxf")).exists());
    }
    assert!(!office.path("a-broken.thrust.dxf").exists());
}

#[test]
fn a_copy_is_never_written_over_a_drawing_of_the_same_run() {
    let office = Office::new();
    office.run(&["mark", "masonry-ring.dxf"]).ends(0);
    let before = fs::read(office.path("masonry-ring.thrust.dxf")).unwrap();
    office
        .run(&["mark", "masonry-ring.dxf", "masonry-ring.thrust.dxf"])
        .ends(2)
        .tells(&["read in the same run", "--output"]);
    assert_eq!(fs::read(office.path("masonry-ring.thrust.dxf")).unwrap(), before);
}

#[test]
fn numbers_of_threads_that_make_no_sense_are_wrong_usage() {
    let office = Office::new();
    for jobs in ["0", "-1", "two", ""] {
        office.run(&["check", ".", &format!("--jobs={jobs}")]).ends(2).tells(&["--jobs"]);
    }
}

// Marks held against their sources.

#[test]
fn a_fresh_mark_is_current() {
    let office = Office::new();
    for name in DRAWINGS {
        let marked = name.replace(".dxf", ".thrust.dxf");
        office.run(&["mark", name]).ends(0);
        office.run(&["verify", &marked, name]).ends(0).says(&[
            "CURRENT",
            &format!("compared with {name}"),
            "within (carried by the mark)",
        ]);
        office.run(&["verify", &marked]).ends(0).says(&["CURRENT", "source not compared"]);
        // On another day, too: the marks carry the day on which they were made.
        let later =
            office.command(&["verify", &marked]).env("SOURCE_DATE_EPOCH", "1890000000").output().unwrap();
        Ran::of(later).ends(0);
        // The job of the source counts wherever the copy went, and whatever it is called.
        let away = Office::empty();
        fs::copy(office.path(&marked), away.path("issue.dxf")).unwrap();
        let source = office.path(name);
        away.run(&["verify", "issue.dxf", source.to_str().unwrap()]).ends(0).says(&["CURRENT"]);
        away.run(&["verify", "issue.dxf"]).ends(1).says(&["STALE", "there is none now"]);
        let job = office.path("thrustmark.toml");
        away.run(&["verify", "issue.dxf", "--job", job.to_str().unwrap()]).ends(0);
    }
}

#[test]
fn every_kind_of_staleness_is_found_and_named() {
    let office = Office::new();
    let (name, marked) = ("masonry-ring.dxf", "masonry-ring.thrust.dxf");
    office.run(&["mark", name]).ends(0);
    let copy = fs::read_to_string(office.path(marked)).unwrap();
    let source = fs::read_to_string(office.path(name)).unwrap();
    let job = fs::read_to_string(office.path("thrustmark.toml")).unwrap();
    let stale = |what: &str, words: &str| {
        let (status, value) = office.json(&["verify", marked, name]);
        assert_eq!(status, 1, "{value:#}");
        assert_eq!(value["verify"]["state"], "stale");
        let reasons = value["verify"]["reasons"].as_array().unwrap();
        let found =
            reasons.iter().any(|r| r["what"] == what && r["message"].as_str().unwrap().contains(words));
        assert!(found, "no {what}, {words}: {reasons:#?}");
        office.run(&["verify", marked, name]).ends(1).says(&["STALE", words, "mark the drawing again"]);
        fs::write(office.path(marked), &copy).unwrap();
        fs::write(office.path(name), &source).unwrap();
        fs::write(office.path("thrustmark.toml"), &job).unwrap();
        office.run(&["verify", marked, name]).ends(0);
    };
    office.edit(name, "MILL LADE", "MILL RACE");
    stale("source", "is not the drawing that was marked");
    office.edit(marked, "MILL LADE", "MILL RACE");
    stale("copy", "without its marks");
    office.edit("thrustmark.toml", "limits.offset = 0.15", "limits.offset = 0.16");
    stale("job", "so were the settings");
    office.edit("thrustmark.toml", "# Job file", "# The job file");
    stale("job", "is the same");
    fs::remove_file(office.path("thrustmark.toml")).unwrap();
    stale("job", "there is none now");
    office.edit(marked, &format!("tool thrustmark {}", env!("CARGO_PKG_VERSION")), "tool thrustmark 0.0.1");
    stale("tool", "thrustmark 0.0.1");
    // A figure of the note block edited by hand.
    office.edit(marked, "every stated limit holds", "every stated limit HOLDS");
    stale("marks", "edited");
    // One mark taken out.
    let plain = without_one_mark(&copy);
    fs::write(office.path(marked), plain).unwrap();
    stale("marks", "marks were removed");
}

/// A marked ASCII drawing without the first of its marks.
fn without_one_mark(copy: &str) -> String {
    let lines: Vec<&str> = copy.split_inclusive('\n').collect();
    let entities = lines.iter().position(|l| l.trim_end() == "ENTITIES").unwrap();
    let last = entities + lines[entities..].iter().position(|l| l.trim_end() == "THRUSTMARK").unwrap();
    let starts: Vec<usize> = (0..lines.len()).step_by(2).filter(|i| lines[*i].trim() == "0").collect();
    let start = *starts.iter().rfind(|s| **s < last).unwrap();
    let end = *starts.iter().find(|s| **s > last).unwrap();
    lines[..start].concat() + &lines[end..].concat()
}

#[test]
fn an_exception_that_ran_out_makes_a_mark_stale() {
    let office = Office::new();
    fs::write(
        office.path("accepted.toml"),
        "[rib]\nsupport = \"none\"\ndepth = 0.45\n[limits]\noffset = 0.01\n[[accept.finding]]\ncheck = \"offset\"\n\
         up_to = 1.0\nreason = \"surveyed\"\nby = \"checker\"\nuntil = 2026-12-31\n",
    )
    .unwrap();
    let (name, marked) = ("open-spandrel-rib.dxf", "open-spandrel-rib.thrust.dxf");
    let marked_with = office.run(&["mark", name, "--job", "accepted.toml"]);
    assert_ne!(marked_with.status, 2, "{}", marked_with.err);
    let on = |day: &str| {
        let arguments = ["verify", marked, name, "--job", "accepted.toml"];
        Ran::of(office.command(&arguments).env("SOURCE_DATE_EPOCH", day).output().unwrap())
    };
    on("1790000000").ends(0);
    on("1890000000").ends(1).says(&["has run out", "would be outside today"]);
}

#[test]
fn verify_without_a_mark_is_an_error() {
    let office = Office::new();
    office.run(&["verify", "masonry-ring.dxf"]).ends(2).tells(&["no marks", "Give the marked copy"]);
    office.run(&["verify", "absent.dxf"]).ends(2).tells(&["absent.dxf"]);
    office.run(&["mark", "masonry-ring.dxf"]).ends(0);
    office.run(&["verify", "masonry-ring.thrust.dxf", "absent.dxf"]).ends(2).tells(&["absent.dxf"]);
    office
        .run(&["verify", "masonry-ring.thrust.dxf", "--job", "absent.toml"])
        .ends(2)
        .tells(&["absent.toml"]);
    office.run(&["verify"]).ends(2);
    office.run(&["verify", "a", "b", "c"]).ends(2);
    let (status, value) = office.json(&["verify", "masonry-ring.dxf"]);
    assert_eq!((status, &value["verify"]), (2, &Value::Null));
    assert_eq!(value["error"]["check"], "no-marks");
    fs::write(office.path("notes.json"), "{}").unwrap();
    office.run(&["verify", "masonry-ring.thrust.dxf", "--json", "notes.json"]).ends(2).tells(&["--force"]);
    assert_eq!(fs::read_to_string(office.path("notes.json")).unwrap(), "{}");
}

// The first minutes.

#[test]
fn demo_writes_drawings_that_check_and_overwrites_nothing() {
    let office = Office::empty();
    let ran = office.run(&["demo", "first/demo"]).ends(0).says(&["Next: thrustmark check first/demo"]);
    assert_eq!(ran.out.lines().count(), 6);
    office.run(&["check", "first/demo"]).ends(0).says(&["4 drawings: 4 within"]);
    fs::write(office.path("first/demo/masonry-ring.dxf"), "mine").unwrap();
    fs::remove_file(office.path("first/demo/thrustmark.toml")).unwrap();
    office.run(&["demo", "first/demo"]).ends(2).tells(&["is there already"]);
    assert_eq!(fs::read(office.path("first/demo/masonry-ring.dxf")).unwrap(), b"mine");
    assert!(!office.path("first/demo/thrustmark.toml").exists(), "all or nothing");
    fs::write(office.path("file"), "").unwrap();
    office.run(&["demo", "file"]).ends(2).tells(&["file"]);
    office.run(&["demo"]).ends(2);
}

#[test]
fn shells_are_given_every_command() {
    let office = Office::empty();
    for shell in ["bash", "zsh", "fish", "elvish", "powershell"] {
        office.run(&["completions", shell]).ends(0).says(&["verify", "demo", "completions", "manual"]);
    }
    office.run(&["completions", "tcl"]).ends(2).tells(&["bash"]);
    office.run(&["completions"]).ends(2);
}

#[test]
fn bash_takes_the_completions() {
    let office = Office::empty();
    let script = office.run(&["completions", "bash"]).ends(0).out;
    fs::write(office.path("complete.bash"), script).unwrap();
    let ask = "source complete.bash; COMP_WORDS=(thrustmark ver); COMP_CWORD=1; _thrustmark thrustmark ver thrustmark; \
               echo \"${COMPREPLY[@]}\"";
    match Command::new("bash").current_dir(office.folder.path()).args(["-c", ask]).output() {
        Ok(output) => assert_eq!(Ran::of(output).ends(0).out.trim(), "verify"),
        Err(error) => println!("SKIPPED: no bash here ({error})"),
    }
}

#[test]
fn the_manual_holds_every_command_and_option() {
    let office = Office::empty();
    let page = office.run(&["manual"]).ends(0).out;
    assert!(page.contains(".TH thrustmark 1"), "{page}");
    for word in
        ["COMMAND MARK", "COMMAND VERIFY", "COMMAND DEMO", "\\-\\-job", "qualified engineer", "Exit status"]
    {
        assert!(page.contains(word), "no {word}");
    }
    office.run(&["manual", "x"]).ends(2);
}

// Kept results.

impl Office {
    fn kept(&self) -> Vec<PathBuf> {
        let folder = self.cache.path().join("thrustmark/results");
        let Ok(entries) = fs::read_dir(folder) else { return Vec::new() };
        let mut found: Vec<PathBuf> = entries.map(|e| e.unwrap().path()).collect();
        found.sort();
        found
    }
}

/// Changes a word in a kept result and makes its hash right again: what is printed then tells where it came from.
fn forge(kept: &Path, from: &str, to: &str) {
    use sha2::{Digest, Sha256};
    let text = fs::read_to_string(kept).unwrap();
    let (head, payload) = text.split_once('\n').unwrap();
    let payload = payload.replace(from, to);
    let hash: String = Sha256::digest(payload.as_bytes()).iter().map(|b| format!("{b:02x}")).collect();
    let head = head.rsplit_once(' ').unwrap().0;
    fs::write(kept, format!("{head} {hash}\n{payload}")).unwrap();
}

#[test]
fn an_unchanged_drawing_is_not_computed_twice() {
    let office = Office::new();
    let (_, fresh) = office.json(&["check", "."]);
    assert_eq!(office.kept().len(), 4);
    let (_, kept) = office.json(&["check", "."]);
    assert_eq!(fresh, kept);
    let (_, bare) = office.json(&["check", ".", "--no-store"]);
    assert_eq!(fresh, bare);
    assert_eq!(office.kept().len(), 4);
    // Under another name it is the same drawing, told under its own name.
    fs::create_dir(office.path("copy")).unwrap();
    fs::copy(office.path("masonry-ring.dxf"), office.path("copy/masonry-ring.dxf")).unwrap();
    let (_, copy) = office.json(&["check", "copy"]);
    assert_eq!(copy["runs"][0]["drawing"]["file"], "copy/masonry-ring.dxf");
    assert_eq!(copy["runs"][0]["spans"], fresh["runs"][1]["spans"]);
    assert_eq!(office.kept().len(), 4);
    // The kept result is what is shown.
    office.kept().iter().for_each(|kept| forge(kept, "\"P3\"", "\"KEPT\""));
    let text = |arguments: &[&str]| office.run(arguments).ends(0).out;
    assert!(text(&["check", "open-spandrel-rib.dxf", "--verbose"]).contains("KEPT"));
    assert!(!text(&["check", "open-spandrel-rib.dxf", "--verbose", "--no-store"]).contains("KEPT"));
    // Whatever changes a result makes another key.
    office.edit("open-spandrel-rib.dxf", "P3", "P9");
    assert!(!text(&["check", "open-spandrel-rib.dxf", "--verbose"]).contains("KEPT"));
    let before = office.kept().len();
    office.edit("thrustmark.toml", "offset = 0.10 ", "offset = 0.11 ");
    office.run(&["check", "hanging-cable.dxf"]).ends(0);
    assert_eq!(office.kept().len(), before + 1);
}

#[test]
fn the_store_may_be_deleted_damaged_or_impossible() {
    let office = Office::new();
    let (_, fresh) = office.json(&["check", "."]);
    for kept in office.kept() {
        fs::write(kept, "thrustmark result 1 nonsense\n{}").unwrap();
    }
    assert_eq!(office.json(&["check", "."]).1, fresh);
    fs::remove_dir_all(office.cache.path().join("thrustmark")).unwrap();
    assert_eq!(office.json(&["check", "."]).1, fresh);
    // Marking never uses it.
    fs::remove_dir_all(office.cache.path().join("thrustmark")).unwrap();
    office.run(&["mark", "."]).ends(0);
    assert_eq!(office.kept().len(), 0);
    // No home: without a word.
    fs::write(office.path("file"), "").unwrap();
    for home in ["/dev/null/nowhere", "/nonexistent/home"] {
        let mut command = office.command(&["check", "masonry-ring.dxf"]);
        command.env_remove("XDG_CACHE_HOME").env("HOME", home);
        let ran = Ran::of(command.output().unwrap()).ends(0);
        assert_eq!(ran.err, "");
    }
    assert!(!Path::new("/nonexistent").exists());
}

#[test]
fn two_runs_at_once_share_the_store() {
    let office = Office::new();
    let (_, fresh) = office.json(&["check", ".", "--no-store"]);
    let start = || {
        let mut command = office.command(&["check", ".", "--json", "-"]);
        command.stdout(std::process::Stdio::piped()).stderr(std::process::Stdio::null()).spawn().unwrap()
    };
    for _ in 0..3 {
        let runs: Vec<_> = (0..6).map(|_| start()).collect();
        for run in runs {
            let output = run.wait_with_output().unwrap();
            assert_eq!(serde_json::from_slice::<Value>(&output.stdout).unwrap(), fresh);
        }
        assert!(office.kept().iter().all(|k| k.extension().is_some_and(|e| e == "result")));
        fs::remove_dir_all(office.cache.path().join("thrustmark")).unwrap();
    }
}

#[test]
fn exceptions_that_run_out_are_judged_by_the_day() {
    let office = Office::new();
    fs::write(
        office.path("thrustmark.toml"),
        "[rib]\nsupport = \"none\"\n[limits]\noffset = 0.01\n[[accept.finding]]\ncheck = \"offset\"\n\
         up_to = 1.0\nreason = \"surveyed\"\nby = \"checker\"\nuntil = 2026-12-31\n",
    )
    .unwrap();
    let on = |day: &str| {
        let mut command = office.command(&["check", "open-spandrel-rib.dxf", "--json", "-"]);
        Ran::of(command.env("SOURCE_DATE_EPOCH", day).output().unwrap())
    };
    assert_ne!(on("1790000000").status, 1);
    on("1890000000").ends(1).says(&["ran out on 2026-12-31"]);
    assert_ne!(on("1790000000").status, 1);
}

// A job file to begin with.

#[test]
fn the_starter_job_leaves_nothing_to_guess() {
    let office = Office::new();
    fs::remove_file(office.path("thrustmark.toml")).unwrap();
    let plain = fs::read_to_string(office.path("masonry-ring.dxf"))
        .unwrap()
        .replace("ARCH-AXIS", "RIBLINE")
        .replace("ARCH-LOADS", "WEIGHTS");
    fs::write(office.path("plain.dxf"), plain).unwrap();
    for name in DRAWINGS.into_iter().chain(["plain.dxf"]) {
        let (status, before) = office.json(&["check", name]);
        assert_eq!(status, 3);
        office.run(&["list", name, "--write-job", "begun.toml"]).ends(0).says(&["begun.toml"]);
        let (status, after) = office.json(&["check", name, "--job", "begun.toml"]);
        assert_eq!(status, 3, "{after:#}");
        let guesses = |document: &Value| {
            let findings = document["runs"][0]["findings"].as_array().unwrap().clone();
            let unchecks = findings.into_iter().filter(|f| f["unchecks"] == true);
            unchecks.map(|f| f["check"].as_str().unwrap().to_owned()).collect::<Vec<_>>()
        };
        assert_eq!(guesses(&after), ["no-limit"], "{name}, before: {:?}", guesses(&before));
        assert_eq!(before["runs"][0]["spans"][0]["loads"], after["runs"][0]["spans"][0]["loads"], "{name}");
        // With the example limit switched on it is judged.
        let text = fs::read_to_string(office.path("begun.toml")).unwrap();
        fs::write(office.path("begun.toml"), text.replace("# offset", "offset")).unwrap();
        let judged = office.run(&["check", name, "--job", "begun.toml"]);
        assert!([0, 1].contains(&judged.status), "{}", judged.out);
        fs::remove_file(office.path("begun.toml")).unwrap();
    }
}

#[test]
fn the_starter_job_overwrites_nothing() {
    let office = Office::new();
    let before = fs::read(office.path("thrustmark.toml")).unwrap();
    office
        .run(&["list", "masonry-ring.dxf", "--write-job", "thrustmark.toml"])
        .ends(2)
        .tells(&["thrustmark.toml", "is there already"]);
    assert_eq!(fs::read(office.path("thrustmark.toml")).unwrap(), before);
    office.run(&["list", "masonry-ring.dxf", "--write-job", "no/such.toml"]).ends(2).tells(&["no/such.toml"]);
    office.run(&["list", "absent.dxf", "--write-job", "new.toml"]).ends(2);
    assert!(!office.path("new.toml").exists());
    office.run(&["list", "masonry-ring.dxf", "--write-job"]).ends(2);
}

// Two revisions.

#[test]
fn the_same_arch_is_the_same() {
    let office = Office::new();
    fs::create_dir(office.path("old")).unwrap();
    for name in DRAWINGS {
        fs::copy(office.path(name), office.path(&format!("old/{name}"))).unwrap();
        // Another remark on the sheet is no change of the arch, and neither is a mark.
        office.run(&["mark", name]).ends(0);
        let marked = name.replace(".dxf", ".thrust.dxf");
        for new in [name, &marked] {
            office.run(&["compare", &format!("old/{name}"), new]).ends(0).says(&["SAME"]);
        }
        let (status, value) = office.json(&["compare", &format!("old/{name}"), name]);
        assert_eq!((status, &value["compare"]["same"]), (0, &Value::Bool(true)));
        assert_eq!(value["compare"]["changes"], serde_json::json!([]));
    }
}

#[test]
fn changes_are_told_and_drawn() {
    let office = Office::new();
    fs::create_dir(office.path("old")).unwrap();
    let (name, old) = ("open-spandrel-rib.dxf", "old/open-spandrel-rib.dxf");
    fs::copy(office.path(name), office.path(old)).unwrap();
    fs::copy(office.path("thrustmark.toml"), office.path("old/thrustmark.toml")).unwrap();
    let before = office.json(&["check", name]).1;
    let load = &before["runs"][0]["spans"][0]["loads"][2];
    let text = load["text"].as_str().unwrap();
    // P3 stays P3 and weighs something else.
    let (named, figure) = text.split_once('=').unwrap();
    let heavier = format!("{named}={}", figure.replace(|c: char| c.is_ascii_digit(), "7"));
    assert_ne!(text, heavier);
    office.edit(name, text, &heavier);
    let (status, value) = office.json(&["compare", old, name]);
    assert_eq!(status, 1, "{value:#}");
    let changes = value["compare"]["changes"].as_array().unwrap();
    let changed: Vec<&Value> = changes.iter().filter(|c| c["what"] == "load-changed").collect();
    assert_eq!(changed.len(), 1, "{value:#}");
    assert_eq!(changed[0]["at"], load["at"]);
    assert_eq!(changed[0]["old"], load["force"]);
    assert!(changes.iter().any(|c| c["what"] == "result"), "{value:#}");
    assert!(changes.iter().all(|c| c["what"] != "axis"), "{value:#}");
    let said = office.run(&["compare", old, name, "--output", "changes.dxf"]).ends(1);
    assert!(said.out.starts_with("DIFFERENT") && said.out.contains("now, was"), "{}", said.out);
    let copy = fs::read_to_string(office.path("changes.dxf")).unwrap();
    assert!(copy.contains("THRUST-CHANGES") && copy.contains("CHANGES from old/open-spandrel-rib.dxf"));
    assert!(!copy.contains("THRUST-LINE"));
    // Without the layer it is NEW again, to the byte; and it is no mark of a check.
    office.run(&["unmark", "changes.dxf", "--output", "back.dxf"]).ends(0);
    assert_eq!(fs::read(office.path("back.dxf")).unwrap(), fs::read(office.path(name)).unwrap());
    office.run(&["verify", "changes.dxf"]).ends(2).tells(&["no mark of a check"]);
    // The other way round the same load changed back.
    let (_, back) = office.json(&["compare", name, old]);
    let back = back["compare"]["changes"].as_array().unwrap().clone();
    assert!(back.iter().any(|c| c["what"] == "load-changed" && c["new"] == load["force"]));
}

#[test]
fn a_moved_axis_is_told_with_its_place() {
    let office = Office::new();
    fs::create_dir(office.path("old")).unwrap();
    for name in ["unsymmetric-rib.dxf", "thrustmark.toml"] {
        fs::copy(office.path(name), office.path(&format!("old/{name}"))).unwrap();
    }
    // The new revision is drawn to another scale: everything is a hundredth larger.
    office.edit("thrustmark.toml", "[layers]", "[drawing]\nscale = 1.01\n\n[layers]");
    let (status, value) = office.json(&["compare", "old/unsymmetric-rib.dxf", "unsymmetric-rib.dxf"]);
    assert_eq!(status, 1, "{value:#}");
    let changes = value["compare"]["changes"].as_array().unwrap();
    let of = |what: &str, name: &str| {
        changes.iter().find(|c| c["what"] == what && c["name"] == name).unwrap_or_else(|| panic!("{value:#}"))
    };
    let span = of("axis", "span");
    let ratio = span["new"].as_f64().unwrap() / span["old"].as_f64().unwrap();
    assert!((ratio - 1.01).abs() < 1e-12, "{ratio}");
    assert!(of("axis", "largest distance")["new"].as_f64().unwrap() > 0.05);
    assert_eq!(of("setting", "drawing.scale")["new"], 1.01);
}

#[test]
fn what_verify_and_compare_write_holds_to_their_schemas() {
    let office = Office::new();
    office.run(&["mark", "masonry-ring.dxf"]);
    for (command, arguments) in [
        ("verify", &["verify", "masonry-ring.thrust.dxf", "masonry-ring.dxf"][..]),
        ("verify", &["verify", "masonry-ring.thrust.dxf", "unsymmetric-rib.dxf"]),
        ("verify", &["verify", "masonry-ring.dxf"]),
        ("compare", &["compare", "masonry-ring.dxf", "unsymmetric-rib.dxf"]),
        ("compare", &["compare", "masonry-ring.dxf", "absent.dxf"]),
    ] {
        let schema: Value = serde_json::from_str(&office.run(&["schema", command]).out).unwrap();
        let validator = jsonschema::validator_for(&schema).unwrap();
        let (_, document) = office.json(arguments);
        let problems: Vec<String> = validator.iter_errors(&document).map(|e| e.to_string()).collect();
        assert!(problems.is_empty(), "{arguments:?}: {problems:?}");
        assert!(document[command].is_null() != document["error"].is_null());
    }
}

#[test]
fn a_thinner_ring_is_told_with_its_place() {
    let office = Office::new();
    fs::create_dir(office.path("old")).unwrap();
    for name in ["unsymmetric-rib.dxf", "thrustmark.toml"] {
        fs::copy(office.path(name), office.path(&format!("old/{name}"))).unwrap();
    }
    let job = |depth: &str| format!("[rib]\nwidth = 1.0\nsupport = \"none\"\ndepth = {depth}\n");
    fs::write(office.path("old/thrustmark.toml"), job("[1.0, 0.6]")).unwrap();
    fs::write(office.path("thrustmark.toml"), job("[1.0, 0.5]")).unwrap();
    let (status, value) = office.json(&["compare", "old/unsymmetric-rib.dxf", "unsymmetric-rib.dxf"]);
    assert_eq!(status, 1, "{value:#}");
    let changes = value["compare"]["changes"].as_array().unwrap();
    let lost = changes.iter().find(|c| c["what"] == "ring" && c["name"] == "depth").unwrap();
    // The depth is linear from springing to crown: most is lost at the crown.
    for (key, depth) in [("old", 0.6), ("new", 0.5)] {
        assert!((lost[key].as_f64().unwrap() - depth).abs() < 1e-9, "{lost:#}");
    }
    assert!(lost["message"].as_str().unwrap().contains("thinner by up to 100"), "{lost:#}");
}

#[test]
fn what_cannot_be_compared_is_an_error() {
    let office = Office::new();
    let name = "masonry-ring.dxf";
    office.run(&["compare", name, "absent.dxf"]).ends(2).tells(&["absent.dxf"]);
    office.run(&["compare", "thrustmark.toml", name]).ends(2).tells(&["thrustmark.toml"]);
    office.run(&["compare", name]).ends(2);
    office
        .run(&["compare", name, name, "--output", name, "--force"])
        .ends(2)
        .tells(&["is the source itself"]);
    fs::write(office.path("mine.dxf"), "mine").unwrap();
    office.run(&["compare", name, name, "--output", "mine.dxf"]).ends(2).tells(&["--force"]);
    assert_eq!(fs::read(office.path("mine.dxf")).unwrap(), b"mine");
    office
        .run(&["compare", name, name, "--output", "mine.dxf", "--force"])
        .ends(0)
        .says(&["SAME", "mine.dxf"]);
    let (status, value) = office.json(&["compare", "absent.dxf", name]);
    assert_eq!((status, &value["compare"]), (2, &Value::Null));
    assert!(value["error"]["message"].as_str().unwrap().contains("absent.dxf"));
}

// A folder under watch.

#[cfg(unix)]
mod watched {
    use super::*;
    use std::io::{BufRead, BufReader};
    use std::process::{Child, Stdio};
    use std::sync::mpsc::{self, Receiver};
    use std::thread;
    use std::time::{Duration, Instant};

    struct Watch {
        child: Child,
        lines: Receiver<String>,
    }

    impl Watch {
        fn begin(office: &Office) -> Self {
            let mut child = office
                .command(&["watch", "."])
                .stdout(Stdio::piped())
                .stderr(Stdio::piped())
                .spawn()
                .unwrap();
            let (send, lines) = mpsc::channel();
            let pipes: [Box<dyn std::io::Read + Send>; 2] =
                [Box::new(child.stdout.take().unwrap()), Box::new(child.stderr.take().unwrap())];
            for pipe in pipes {
                let send = send.clone();
                thread::spawn(move || {
                    for line in BufReader::new(pipe).lines() {
                        if send.send(line.unwrap()).is_err() {
                            return;
                        }
                    }
                });
            }
            let watch = Self { child, lines };
            watch.until("watching");
            watch
        }

        /// Waits for a line that holds the words; gives all lines up to it.
        fn until(&self, words: &str) -> String {
            let mut all = String::new();
            loop {
                let line = self
                    .lines
                    .recv_timeout(Duration::from_secs(30))
                    .unwrap_or_else(|_| panic!("no {words:?} after: {all}"));
                all.push_str(&line);
                all.push('\n');
                if line.contains(words) {
                    return all;
                }
            }
        }

        fn says_nothing(&self) {
            if let Ok(line) = self.lines.recv_timeout(Duration::from_millis(700)) {
                panic!("said {line}");
            }
        }

        fn end(mut self, signal: &str) {
            Command::new("kill").args([signal, &self.child.id().to_string()]).status().unwrap();
            assert_eq!(self.child.wait().unwrap().code(), Some(0));
        }
    }

    #[test]
    fn a_save_is_marked_within_a_second_and_its_changes_told() {
        let office = Office::new();
        let name = "open-spandrel-rib.dxf";
        let watch = Watch::begin(&office);
        let marked = office.path("open-spandrel-rib.thrust.dxf");
        assert!(!marked.exists(), "nothing is written before a save");
        let source = fs::read_to_string(office.path(name)).unwrap();
        let figure = source.lines().find(|l| l.starts_with("P3 =")).unwrap().trim_end().to_owned();
        let mut fastest = Duration::MAX;
        for (round, weight) in [71, 72, 73, 74].into_iter().enumerate() {
            let saved = source.replacen(&figure, &format!("P3 = {weight} kN"), 1);
            let begun = Instant::now();
            if round % 2 == 0 {
                fs::write(office.path(name), saved).unwrap();
            } else {
                // As many programs save: under another name, the old one away, the new one in its place.
                fs::write(office.path("save.tmp"), saved).unwrap();
                fs::rename(office.path(name), office.path("open-spandrel-rib.bak")).unwrap();
                fs::rename(office.path("save.tmp"), office.path(name)).unwrap();
            }
            let told = watch.until("copy");
            fastest = fastest.min(begun.elapsed());
            assert!(told.contains("load P3") && told.contains(&format!("is {weight}")), "{told}");
            assert!(fs::read_to_string(&marked).unwrap().contains("THRUST-LINE"));
            // Never its own output.
            watch.says_nothing();
        }
        assert!(fastest < Duration::from_secs(1), "{fastest:?}");
        assert!(!office.path("open-spandrel-rib.thrust.thrust.dxf").exists());
        watch.end("-INT");
        office.run(&["verify", "open-spandrel-rib.thrust.dxf", name]).ends(0);
    }

    #[test]
    fn a_half_written_drawing_and_a_changed_job_are_taken_well() {
        let office = Office::new();
        let watch = Watch::begin(&office);
        let name = "masonry-ring.dxf";
        let whole = fs::read(office.path(name)).unwrap();
        fs::write(office.path(name), &whole[..whole.len() / 2]).unwrap();
        watch.until("masonry-ring.dxf: ");
        fs::write(office.path(name), &whole).unwrap();
        watch.until("same       as at the last save");
        watch.until("copy");
        office.edit("thrustmark.toml", "limits.offset = 0.15", "limits.offset = 0.001");
        let told = watch.until("unsymmetric-rib.thrust.dxf");
        assert!(told.contains("limits.offset is 0.001 now, it was 0.15"), "{told}");
        watch.end("-TERM");
    }

    #[test]
    fn a_folder_that_cannot_be_watched_is_an_error() {
        let office = Office::new();
        office.run(&["watch", "absent"]).ends(2).tells(&["cannot be watched"]);
        office.run(&["watch", "masonry-ring.dxf"]).ends(2).tells(&["cannot be watched"]);
        office.run(&["watch", ".", "--job", "absent.toml"]).ends(2).tells(&["absent.toml"]);
        office.run(&["watch"]).ends(2);
    }
}

// How long a thousand drawings take.

/// Run by hand: `cargo test --release --test office -- --ignored --nocapture thousand`.
#[test]
#[ignore = "writes a gigabyte and takes minutes"]
fn a_thousand_drawings_of_a_megabyte() {
    let office = Office::new();
    fs::create_dir(office.path("set")).unwrap();
    let count = std::env::var("THRUSTMARK_DRAWINGS").map_or(1000, |n| n.parse().unwrap());
    let source = fs::read_to_string(office.path("masonry-ring.dxf")).unwrap();
    let end = source.rfind("  0\nENDSEC").or_else(|| source.rfind("0\r\nENDSEC")).unwrap();
    let newline = if source.contains("\r\n") { "\r\n" } else { "\n" };
    let mut bulk = String::new();
    for i in 0_u32.. {
        if source.len() + bulk.len() >= 1_000_000 {
            break;
        }
        let [x, y] = [i % 977, i % 1009].map(|n| f64::from(n) * 13.7);
        bulk += &[
            "0",
            "LINE",
            "8",
            "OTHER",
            "10",
            &x.to_string(),
            "20",
            &y.to_string(),
            "11",
            "5.0",
            "21",
            "7.5",
            "",
        ]
        .join(newline);
    }
    for i in 0..count {
        let text = format!("999{newline}{i}{newline}{}{bulk}{}", &source[..end], &source[end..]);
        fs::write(office.path(&format!("set/{i:04}.dxf")), text).unwrap();
    }
    fs::write(
        office.path("set/thrustmark.toml"),
        "drawing.unit = \"mm\"\nrib.support = \"none\"\nrib.depth = 0.6\nlimits.offset = 0.15\n",
    )
    .unwrap();
    let timed = |arguments: &[&str]| {
        let begun = std::time::Instant::now();
        let ran = office.run(arguments).ends(0);
        assert!(ran.out.contains(&format!("{count} drawings: {count} within")), "{}", ran.out);
        let seconds = begun.elapsed().as_secs_f64();
        println!("{}: {seconds:.2} s, {:.0} drawings/s", arguments.join(" "), f64::from(count) / seconds);
    };
    for jobs in ["1", "2"] {
        timed(&["check", "set", "--no-store", "--jobs", jobs]);
        timed(&["mark", "set", "--jobs", jobs]);
    }
    timed(&["check", "set"]);
    timed(&["check", "set"]);
}
