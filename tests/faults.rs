//! What a machine can do to a run: kills, full disks, closed streams, rights taken away, files that change under its
//! hands. The source stays as it was, nothing incomplete stands under an output's name, and the status is true.

#![cfg(unix)]
#![allow(clippy::unwrap_used, clippy::print_stderr)]

use std::fs::{self, File, Permissions};
use std::io::Write;
use std::os::unix::fs::{PermissionsExt, symlink};
use std::os::unix::process::ExitStatusExt;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};
use std::thread;
use std::time::{Duration, Instant};

const PROGRAM: &str = env!("CARGO_BIN_EXE_thrustmark");
const LIMITED: &str = "sh -c: a limit on the size of files";

/// A folder with the masonry ring, `lines` lines drawn beside it, and the job file.
fn office(lines: usize) -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    fs::set_permissions(folder.path(), Permissions::from_mode(0o755)).unwrap();
    fs::write(folder.path().join("ring.dxf"), drawing(lines, "5600.0")).unwrap();
    let job = fs::read_to_string(fixtures().join("thrustmark.toml")).unwrap();
    fs::write(folder.path().join("thrustmark.toml"), job.replace("masonry-ring.dxf", "*ring*.dxf")).unwrap();
    folder
}

fn fixtures() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/good")
}

/// The ring with lines on a layer that is no part of the arch; all of them end at the same `x`.
fn drawing(lines: usize, x: &str) -> String {
    let ring = fs::read_to_string(fixtures().join("masonry-ring.dxf")).unwrap().replace('\r', "");
    let (head, tail) = ring.rsplit_once("  0\nENDSEC").unwrap();
    let mut text = head.to_owned();
    for i in 0..lines {
        let y = -2000.0 - (i % 100) as f64;
        text += &format!(
            "  0\nLINE\n  5\n{:X}\n  8\nNOTES\n 10\n-5600.0\n 20\n{y:.1}\n 30\n0.0\n 11\n{x}\n 21\n{y:.1}\n 31\n0.0\n",
            0x10_0000 + i
        );
    }
    text + "  0\nENDSEC" + tail
}

fn program(folder: &Path, arguments: &[&str]) -> Command {
    let mut command = Command::new(PROGRAM);
    command.current_dir(folder).args(arguments).env("SOURCE_DATE_EPOCH", "1790000000").env("NO_COLOR", "1");
    command.env("XDG_CACHE_HOME", env!("CARGO_TARGET_TMPDIR"));
    command
}

fn run(folder: &Path, arguments: &[&str]) -> Output {
    program(folder, arguments).output().unwrap()
}

/// Runs a line of the shell in which `"$0"` is the program.
fn shell(folder: &Path, line: &str) -> Output {
    let mut command = Command::new("sh");
    command.current_dir(folder).args(["-c", line, PROGRAM]).env("SOURCE_DATE_EPOCH", "1790000000");
    command.env("XDG_CACHE_HOME", env!("CARGO_TARGET_TMPDIR"));
    command.output().unwrap()
}

#[track_caller]
fn ended(output: &Output, status: i32) {
    let err = String::from_utf8_lossy(&output.stderr);
    assert_eq!(output.status.code(), Some(status), "{:?}: {err}", output.status);
    assert!(!err.contains("panicked"), "{err}");
}

#[track_caller]
fn refused(output: &Output, says: &str) {
    ended(output, 2);
    let words =
        String::from_utf8_lossy(&output.stderr).into_owned() + &String::from_utf8_lossy(&output.stdout);
    assert!(words.contains(says), "{says:?} is not in: {words}");
}

fn temporaries(folder: &Path) -> usize {
    let names = fs::read_dir(folder).unwrap().map(|e| e.unwrap().file_name());
    names.filter(|n| n.to_string_lossy().ends_with(".tmp")).count()
}

/// Moments spread evenly and without a pattern over a run (multiples of the golden ratio, modulo one).
fn moments(count: u32, whole: Duration) -> impl Iterator<Item = Duration> {
    (1..=count).map(move |i| whole.mul_f64((f64::from(i) * 0.618_033_988_749_895).fract()))
}

#[test]
fn killed_at_any_moment_it_leaves_the_source_and_no_half_of_a_copy() {
    let office = office(30_000);
    let folder = office.path();
    let source = fs::read(folder.join("ring.dxf")).unwrap();
    assert!(source.len() > 2 << 20, "{}", source.len());
    let copy = folder.join("copy-ring.dxf");
    let mark = ["mark", "ring.dxf", "--output", "copy-ring.dxf"];
    ended(&program(folder, &mark).env("SOURCE_DATE_EPOCH", "1700000000").output().unwrap(), 0);
    let older = fs::read(&copy).unwrap();
    let begun = Instant::now();
    ended(&run(folder, &mark), 0);
    let took = begun.elapsed();
    let newer = fs::read(&copy).unwrap();
    assert!(older != newer, "the two copies must differ for this test to see anything");

    let (mut killed, mut left) = (0, 0);
    for (i, moment) in moments(60, took).enumerate() {
        if i % 2 == 0 {
            fs::write(&copy, &older).unwrap();
        } else {
            let _ = fs::remove_file(&copy);
        }
        let silent = || Stdio::null();
        let mut child = program(folder, &mark).stdout(silent()).stderr(silent()).spawn().unwrap();
        thread::sleep(moment);
        child.kill().unwrap();
        killed += usize::from(child.wait().unwrap().signal() == Some(9));
        left += temporaries(folder);
        assert!(fs::read(folder.join("ring.dxf")).unwrap() == source, "kill {i}: the source has changed");
        match fs::read(&copy) {
            Ok(found) if i % 2 == 0 => assert!(found == older || found == newer, "kill {i}: half a copy"),
            Ok(found) => assert!(found == newer, "kill {i}: half a copy"),
            Err(_) => assert!(i % 2 == 1, "kill {i}: the older copy is gone"),
        }
    }
    eprintln!("killed {killed} of 60 in {took:?}, temporaries seen afterwards {left}");
    assert!(killed >= 30, "only {killed} of 60 runs were killed before their end");
    // One that no run holds, in case no kill fell into the writing itself.
    fs::write(folder.join(".thrustmark-abc123.tmp"), "left").unwrap();
    ended(&run(folder, &mark), 0);
    assert_eq!(temporaries(folder), 0, "the next run removes what killed ones left");
    assert!(fs::read(&copy).unwrap() == newer);
}

#[test]
fn a_source_that_changes_while_it_is_read_gives_no_mixture() {
    let office = office(30_000);
    let folder = office.path();
    let path = folder.join("ring.dxf");
    let before = drawing(30_000, "5600.0").into_bytes();
    let other = drawing(31_000, "5500.0").into_bytes();
    // A change that comes before the drawing is opened makes another whole drawing of it.
    let appended = [&before[..], b"  0\nLINE\n"].concat();
    let copy = folder.join("copy-ring.dxf");
    let mark = ["mark", "ring.dxf", "--output", "copy-ring.dxf"];
    let begun = Instant::now();
    ended(&run(folder, &mark), 0);
    let took = begun.elapsed();
    let mut refusals = [0; 4];
    for (i, moment) in moments(24, took).enumerate() {
        let _ = fs::remove_file(&copy);
        fs::write(&path, &before).unwrap();
        // Longer than the grain of a file's time of change.
        thread::sleep(Duration::from_millis(20));
        let child = program(folder, &mark).stdout(Stdio::piped()).stderr(Stdio::piped()).spawn().unwrap();
        thread::sleep(moment);
        match i % 4 {
            0 => File::options().write(true).open(&path).unwrap().set_len(before.len() as u64 / 2).unwrap(),
            1 => File::options().append(true).open(&path).unwrap().write_all(b"  0\nLINE\n").unwrap(),
            2 => fs::write(&path, &other).unwrap(),
            _ => fs::remove_file(&path).unwrap(),
        }
        let output = child.wait_with_output().unwrap();
        if output.status.code() == Some(0) {
            ended(&run(folder, &["unmark", "copy-ring.dxf", "--output", "back.dxf", "--force"]), 0);
            let back = fs::read(folder.join("back.dxf")).unwrap();
            assert!(
                [&before, &other, &appended].contains(&&back),
                "change {i}: the copy holds neither drawing"
            );
        } else {
            ended(&output, 2);
            refusals[i % 4] += 1;
            assert!(!copy.exists(), "change {i}: refused, and a copy is there");
        }
        assert_eq!(temporaries(folder), 0);
    }
    eprintln!("refused of 6 each (cut, appended, replaced, removed): {refusals:?}");
    assert!(refusals.iter().sum::<i32>() > 0, "no change fell into a run");
}

#[test]
fn links_to_the_source_are_the_source() {
    let office = office(0);
    let folder = office.path();
    let source = fs::read(folder.join("ring.dxf")).unwrap();
    symlink("ring.dxf", folder.join("soft.dxf")).unwrap();
    symlink("soft.dxf", folder.join("softer.dxf")).unwrap();
    fs::hard_link(folder.join("ring.dxf"), folder.join("hard.dxf")).unwrap();
    symlink(".", folder.join("here")).unwrap();
    for name in ["ring.dxf", "soft.dxf", "softer.dxf", "hard.dxf", "here/ring.dxf", "here/hard.dxf"] {
        for option in ["--output", "--json", "--csv", "--junit"] {
            let command = if option == "--output" { "mark" } else { "check" };
            let output = run(folder, &[command, "ring.dxf", option, name, "--force"]);
            // Found by the plan of the whole run, or by the look at the one file.
            ended(&output, 2);
            let said = String::from_utf8_lossy(&output.stderr).into_owned();
            let known = ["is the source itself", "which is read in the same run"];
            assert!(known.iter().any(|k| said.contains(k)), "{option} {name}: {said}");
            assert!(fs::read(folder.join("ring.dxf")).unwrap() == source, "{option} {name}");
        }
    }
}

#[test]
fn two_runs_at_one_output_leave_one_whole_copy() {
    let office = office(5_000);
    let folder = office.path();
    fs::write(folder.join("other-ring.dxf"), drawing(6_000, "5500.0")).unwrap();
    let copy = folder.join("copy-ring.dxf");
    let wholes: Vec<Vec<u8>> = ["ring.dxf", "other-ring.dxf"]
        .iter()
        .map(|name| {
            ended(&run(folder, &["mark", name, "--output", "copy-ring.dxf"]), 0);
            fs::read(&copy).unwrap()
        })
        .collect();
    for _ in 0..6 {
        let _ = fs::remove_file(&copy);
        let start = |name| {
            let mut command = program(folder, &["mark", name, "--output", "copy-ring.dxf"]);
            command.stdout(Stdio::piped()).stderr(Stdio::piped()).spawn().unwrap()
        };
        let both = [start("ring.dxf"), start("other-ring.dxf")];
        for child in both {
            ended(&child.wait_with_output().unwrap(), 0);
        }
        assert!(wholes.contains(&fs::read(&copy).unwrap()), "the copy is neither of the two");
        assert_eq!(temporaries(folder), 0);
    }
}

/// Runs as a user without the rights of root, where this test runs as root; nothing when that cannot be done.
fn unprivileged(folder: &Path, arguments: &[&str]) -> Option<Output> {
    let root = Command::new("id").arg("-u").output().is_ok_and(|o| o.stdout.starts_with(b"0\n"));
    if !root {
        return Some(run(folder, arguments));
    }
    // The folder of the build may be closed to others.
    let place = tempfile::tempdir().unwrap();
    fs::set_permissions(place.path(), Permissions::from_mode(0o755)).unwrap();
    let copy = place.path().join("program");
    fs::copy(PROGRAM, &copy).unwrap();
    let mut command = Command::new("setpriv");
    command.args(["--reuid=65534", "--regid=65534", "--clear-groups"]).arg(copy).args(arguments);
    command.current_dir(folder).env_remove("HOME").env_remove("XDG_CACHE_HOME");
    let output = command.env("SOURCE_DATE_EPOCH", "1790000000").output();
    if output.is_err() {
        eprintln!("skipped: this runs as root, and there is no setpriv to run without its rights");
    }
    output.ok()
}

#[test]
fn without_rights_it_says_which_are_missing() {
    let office = office(0);
    let folder = office.path();
    fs::set_permissions(folder, Permissions::from_mode(0o555)).unwrap();
    if let Some(output) = unprivileged(folder, &["mark", "ring.dxf"]) {
        refused(&output, "in which you may write");
    }
    if let Some(output) = unprivileged(folder, &["check", "ring.dxf"]) {
        ended(&output, 0);
    }
    fs::set_permissions(folder, Permissions::from_mode(0o777)).unwrap();
    fs::set_permissions(folder.join("ring.dxf"), Permissions::from_mode(0o0)).unwrap();
    if let Some(output) = unprivileged(folder, &["mark", "ring.dxf"]) {
        refused(&output, "ring.dxf");
    }
    assert!(!folder.join("ring.thrust.dxf").exists());
    assert_eq!(temporaries(folder), 0);
}

#[test]
fn closed_streams_change_no_status() {
    let office = office(0);
    for closed in [">&-", "2>&-", ">&- 2>&-", "<&- >&- 2>&-", "| true"] {
        let output = shell(office.path(), &format!("\"$0\" check ring.dxf {closed}"));
        ended(&output, 0);
        let line = format!("\"$0\" check absent.dxf {}", closed.replace("| true", ""));
        ended(&shell(office.path(), &line), 2);
    }
    ended(&shell(office.path(), "\"$0\" mark ring.dxf >&- 2>&-"), 0);
    ended(&shell(office.path(), "\"$0\" unmark ring.thrust.dxf --output back.dxf >&- 2>&-"), 0);
    let back = fs::read(office.path().join("back.dxf")).unwrap();
    assert!(back == fs::read(office.path().join("ring.dxf")).unwrap());
}

#[test]
fn results_that_cannot_be_printed_are_no_success() {
    if !Path::new("/dev/full").exists() {
        return eprintln!("skipped: there is no /dev/full here");
    }
    let office = office(0);
    for arguments in [
        "check ring.dxf",
        "check ring.dxf --json -",
        "list ring.dxf",
        "schema",
        "manual",
        "--help",
        "--version",
    ] {
        let output = shell(office.path(), &format!("\"$0\" {arguments} > /dev/full"));
        refused(&output, "could not be written to standard output");
        ended(&shell(office.path(), &format!("\"$0\" {arguments} > /dev/full 2> /dev/full")), 2);
    }
}

#[test]
fn a_bare_environment_and_odd_clocks() {
    let office = office(0);
    let bare = |epoch: Option<&str>| {
        let mut command = Command::new(PROGRAM);
        command.current_dir(office.path()).args(["check", "ring.dxf"]).env_clear();
        command.envs(epoch.map(|e| ("SOURCE_DATE_EPOCH", e))).output().unwrap()
    };
    for answered in [None, Some("0"), Some("1"), Some("-86400"), Some("4102444800")] {
        ended(&bare(answered), 0);
    }
    for odd in ["", " ", "abc", "1e9", "0x10", "1.5", "9223372036854775807", "-9223372036854775808"] {
        refused(&bare(Some(odd)), "SOURCE_DATE_EPOCH");
    }
    refused(&bare(Some("99999999999999999999999")), "SOURCE_DATE_EPOCH");
}

#[test]
fn a_full_disk_leaves_nothing_and_says_so() {
    let office = office(30_000);
    let folder = office.path();
    let source = fs::read(folder.join("ring.dxf")).unwrap();
    // Writing past the limit is an error where its signal is ignored, and ends the process where it is not.
    for (before, signal) in [("trap '' XFSZ; ", None), ("", Some(25))] {
        let output = shell(folder, &format!("{before}ulimit -f 2048; exec \"$0\" mark ring.dxf"));
        match (output.status.signal(), signal) {
            (Some(found), Some(expected)) => assert_eq!(found, expected, "{LIMITED}"),
            _ => refused(&output, "could not be"),
        }
        assert!(!folder.join("ring.thrust.dxf").exists(), "{LIMITED}");
    }
    ended(&run(folder, &["mark", "ring.dxf"]), 0);
    assert_eq!(temporaries(folder), 0);

    let disk = folder.join("disk");
    fs::create_dir(&disk).unwrap();
    let mounted = Command::new("mount").args(["-t", "tmpfs", "-o", "size=1m", "tmpfs"]).arg(&disk).output();
    if !mounted.is_ok_and(|o| o.status.success()) {
        return eprintln!("skipped: no small disk can be mounted here; the limit on files stands for it");
    }
    let outputs: Vec<Output> = [
        ["mark", "ring.dxf", "--output", "disk/copy-ring.dxf"],
        ["unmark", "ring.thrust.dxf", "--output", "disk/back.dxf"],
    ]
    .iter()
    .map(|arguments| run(folder, arguments))
    .collect();
    fs::write(disk.join("filler"), vec![0; 1 << 20]).unwrap_or_default();
    let json = run(folder, &["check", "ring.dxf", "--json", "disk/results.json"]);
    let left: Vec<_> = fs::read_dir(&disk).unwrap().map(|e| e.unwrap().file_name()).collect();
    let unmounted = Command::new("umount").arg(&disk).status().unwrap();
    assert!(unmounted.success());
    for output in outputs.iter().chain([&json]) {
        refused(output, "No space left");
    }
    assert_eq!(left, ["filler"]);
    assert!(fs::read(folder.join("ring.dxf")).unwrap() == source);
}
