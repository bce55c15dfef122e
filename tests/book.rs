//! The book under docs/: its links lead somewhere, its commands do what stands below them, its recipes work, and its
//! reference pages agree with the code.
//!
//! `THRUSTMARK_WRITE_DOCS=1 cargo test --test book` writes the pages that are made from the code.

#![allow(clippy::unwrap_used, clippy::print_stdout)]

use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use serde_json::Value;

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn pages() -> BTreeMap<PathBuf, String> {
    let entries = fs::read_dir(root().join("docs")).unwrap().map(|e| e.unwrap().path());
    let pages: BTreeMap<PathBuf, String> = entries
        .filter(|p| p.extension().is_some_and(|e| e == "md"))
        .map(|p| (p.clone(), fs::read_to_string(p).unwrap()))
        .collect();
    assert!(pages.len() >= 8, "{:?}", pages.keys());
    pages
}

/// A shell in a folder, with the program on its path.
fn shell(folder: &Path, cache: &Path, command: &str) -> Output {
    let program = Path::new(env!("CARGO_BIN_EXE_thrustmark")).parent().unwrap();
    let path = format!("{}:{}", program.display(), std::env::var("PATH").unwrap());
    Command::new("sh")
        .current_dir(folder)
        .args(["-c", command])
        .env("PATH", path)
        .env("SOURCE_DATE_EPOCH", "1790000000")
        .env("NO_COLOR", "1")
        .env("XDG_CACHE_HOME", cache)
        .env("GIT_CONFIG_NOSYSTEM", "1")
        .env("HOME", cache)
        .env("GIT_AUTHOR_NAME", "drafter")
        .env("GIT_AUTHOR_EMAIL", "drafter@example.invalid")
        .env("GIT_COMMITTER_NAME", "drafter")
        .env("GIT_COMMITTER_EMAIL", "drafter@example.invalid")
        .output()
        .unwrap()
}

fn both(output: &Output) -> String {
    format!("{}{}", String::from_utf8_lossy(&output.stdout), String::from_utf8_lossy(&output.stderr))
}

/// The name under which a heading is linked to.
fn anchor(heading: &str) -> String {
    let kept = heading.trim().to_lowercase();
    kept.chars()
        .filter(|c| c.is_alphanumeric() || "-_ ".contains(*c))
        .map(|c| if c == ' ' { '-' } else { c })
        .collect()
}

#[test]
fn every_link_leads_somewhere() {
    let mut found = 0;
    let mut all = pages();
    for name in ["README.md", "DEVELOPERS.md"] {
        all.insert(root().join(name), fs::read_to_string(root().join(name)).unwrap());
    }
    for (page, text) in &all {
        for part in text.split("](").skip(1) {
            let target = part.split(')').next().unwrap();
            if target.contains("://") {
                continue;
            }
            let (file, heading) = target.split_once('#').map_or((target, None), |(f, h)| (f, Some(h)));
            let file = if file.is_empty() { page.clone() } else { page.parent().unwrap().join(file) };
            let there =
                fs::read_to_string(&file).unwrap_or_else(|e| panic!("{}: {target}: {e}", page.display()));
            if let Some(heading) = heading {
                let known = there
                    .lines()
                    .filter(|l| l.starts_with('#'))
                    .any(|l| anchor(l.trim_start_matches('#')) == heading);
                assert!(known, "{}: {target} names no heading", page.display());
            }
            found += 1;
        }
    }
    assert!(found >= 10, "{found} links");
}

/// Blocks of a page that open with this fence, with the line before each.
fn blocks<'t>(text: &'t str, fence: &str) -> Vec<(&'t str, Vec<&'t str>)> {
    let lines: Vec<&str> = text.lines().collect();
    let mut found = Vec::new();
    let mut i = 0;
    while i < lines.len() {
        if lines[i] == format!("```{fence}") {
            let end = i + 1 + lines[i + 1..].iter().position(|l| *l == "```").unwrap();
            found.push((if i > 0 { lines[i - 1] } else { "" }, lines[i + 1..end].to_vec()));
            i = end;
        }
        i += 1;
    }
    found
}

/// What is printed must hold the lines that stand in the book, in that order; `…` stands for any lines, and at the end of a
/// line for its rest.
fn holds(printed: &str, expected: &[&str]) -> Result<(), String> {
    let mut lines = printed.lines();
    for want in expected.iter().filter(|l| **l != "…") {
        let fits = |line: &str| match want.strip_suffix('…') {
            Some(begin) => line.starts_with(begin),
            None => line == *want,
        };
        if !lines.any(fits) {
            return Err(format!("no line {want:?} (any more) in:\n{printed}"));
        }
    }
    Ok(())
}

#[test]
fn every_command_prints_what_the_book_says() {
    let mut commands = 0;
    for (page, text) in pages() {
        let (folder, cache) = (tempfile::tempdir().unwrap(), tempfile::tempdir().unwrap());
        for (_, block) in blocks(&text, "console") {
            let mut at = 0;
            while at < block.len() {
                let command = block[at]
                    .strip_prefix("$ ")
                    .unwrap_or_else(|| panic!("{}: {}", page.display(), block[at]));
                let end = block[at + 1..]
                    .iter()
                    .position(|l| l.starts_with("$ "))
                    .map_or(block.len(), |n| at + 1 + n);
                let mut expected = block[at + 1..end].to_vec();
                let status =
                    expected.last().and_then(|l| l.strip_prefix("[status ")?.strip_suffix(']')?.parse().ok());
                if status.is_some() {
                    expected.pop();
                }
                let output = shell(folder.path(), cache.path(), command);
                let printed = both(&output);
                assert_eq!(
                    output.status.code(),
                    Some(status.unwrap_or(0)),
                    "{}: {command}\n{printed}",
                    page.display()
                );
                holds(&printed, &expected).unwrap_or_else(|e| panic!("{}: {command}: {e}", page.display()));
                commands += 1;
                at = end;
            }
        }
    }
    assert!(commands >= 15, "{commands} commands");
}

/// The file of a recipe.
fn recipe(file: &str) -> String {
    let text = fs::read_to_string(root().join("docs/recipes.md")).unwrap();
    let mark = format!("<!-- file: {file} -->");
    let mut found = blocks(&text, "sh");
    found.extend(blocks(&text, "make"));
    let block =
        found.into_iter().find(|(before, _)| *before == mark).unwrap_or_else(|| panic!("no recipe {file}"));
    block.1.join("\n") + "\n"
}

struct Set {
    folder: tempfile::TempDir,
    cache: tempfile::TempDir,
}

impl Set {
    /// A folder with two good demo drawings and their job file.
    fn new() -> Self {
        let set = Self { folder: tempfile::tempdir().unwrap(), cache: tempfile::tempdir().unwrap() };
        for name in ["masonry-ring.dxf", "hanging-cable.dxf", "thrustmark.toml"] {
            fs::copy(root().join("fixtures/good").join(name), set.path(name)).unwrap();
        }
        set
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    #[track_caller]
    fn sh(&self, command: &str, status: i32) -> String {
        let output = shell(self.folder.path(), self.cache.path(), command);
        assert_eq!(output.status.code(), Some(status), "{command}\n{}", both(&output));
        both(&output)
    }

    fn script(&self, file: &str) {
        let path = self.path(file);
        fs::write(&path, recipe(file)).unwrap();
        #[cfg(unix)]
        {
            use std::os::unix::fs::PermissionsExt;
            fs::set_permissions(&path, fs::Permissions::from_mode(0o755)).unwrap();
        }
    }

    /// Makes the limit of the masonry ring too strict, or right again.
    fn strict(&self, strict: bool) {
        let job = fs::read_to_string(root().join("fixtures/good/thrustmark.toml")).unwrap();
        let job = if strict { job.replace("limits.offset = 0.15 ", "limits.offset = 0.001 ") } else { job };
        fs::write(self.path("thrustmark.toml"), job).unwrap();
    }
}

fn there(program: &str) -> bool {
    let found = Command::new(program).arg("--version").output().is_ok();
    if !found {
        println!("SKIPPED: no {program} here");
    }
    found
}

#[cfg(unix)]
#[test]
fn the_commit_hook_lets_only_good_drawings_pass() {
    if !there("git") {
        return;
    }
    let set = Set::new();
    set.sh("git init -q . && mkdir -p .git/hooks", 0);
    set.script(".git/hooks/pre-commit");
    set.strict(true);
    set.sh("git add -A", 0);
    assert!(set.sh("git commit -qm first", 1).contains("OUTSIDE A STATED LIMIT"));
    set.strict(false);
    set.sh("git add -A && git commit -qm first", 0);
    // A marked copy that is current passes, a stale one does not.
    set.sh("thrustmark mark masonry-ring.dxf && git add -A && git commit -qm marked", 0);
    set.sh(
        "sed -i.old 's/MILL LADE/MILL RACE/' masonry-ring.dxf && rm masonry-ring.dxf.old && git add -A",
        0,
    );
    set.sh("git commit -qm 'only the drawing'", 0);
    set.sh("printf '\\n' >> masonry-ring.thrust.dxf && git add -A", 0);
    assert!(set.sh("git commit -qm stale", 1).contains("STALE"));
}

#[cfg(unix)]
#[test]
fn the_make_rule_marks_what_is_newer() {
    if !there("make") {
        return;
    }
    let set = Set::new();
    set.script("Makefile");
    set.sh("make", 0);
    assert!(set.path("masonry-ring.thrust.dxf").exists() && set.path("hanging-cable.thrust.dxf").exists());
    assert!(!set.sh("make", 0).contains("thrustmark mark"), "nothing is newer");
    set.strict(true);
    set.sh("touch -d '2040-01-01' thrustmark.toml", 0);
    set.sh("make masonry-ring.thrust.dxf", 2);
    assert!(!set.path("masonry-ring.thrust.dxf").exists() && set.path("masonry-ring.rejected.dxf").exists());
    set.strict(false);
    set.sh("make", 0);
    assert!(set.path("masonry-ring.thrust.dxf").exists());
}

#[cfg(unix)]
#[test]
fn the_build_server_step_ends_as_the_worst_drawing() {
    let set = Set::new();
    set.script("check-drawings.sh");
    let step = "./check-drawings.sh . results.json";
    set.sh(step, 0);
    let results: Value =
        serde_json::from_str(&fs::read_to_string(set.path("results.json")).unwrap()).unwrap();
    assert_eq!(results["runs"].as_array().unwrap().len(), 2);
    set.sh("thrustmark mark masonry-ring.dxf", 0);
    set.sh(step, 0);
    set.sh("printf '\\n' >> masonry-ring.thrust.dxf", 0);
    set.sh(step, 1);
    fs::remove_file(set.path("masonry-ring.thrust.dxf")).unwrap();
    set.strict(true);
    set.sh(step, 1);
    fs::write(set.path("broken.dxf"), "  0\nSECTION\nnonsense\n").unwrap();
    set.sh(step, 2);
}

#[test]
fn every_check_stands_in_the_findings_reference() {
    let schema: Value = serde_json::from_str(&thrustmark::write::json::schema().unwrap()).unwrap();
    let check = &schema["$defs"]["Check"];
    let one = |v: &Value| v["const"].as_str().map(str::to_owned);
    let mut known: Vec<String> = check["oneOf"].as_array().into_iter().flatten().filter_map(one).collect();
    known
        .extend(check["enum"].as_array().into_iter().flatten().filter_map(|v| v.as_str().map(str::to_owned)));
    assert!(known.len() >= 20, "{check:#}");
    let page = fs::read_to_string(root().join("docs/findings.md")).unwrap();
    let parts: Vec<&str> = page.split("\n## `").skip(1).collect();
    let told: Vec<&str> = parts.iter().map(|p| p.split('`').next().unwrap()).collect();
    for check in &known {
        assert!(told.contains(&check.as_str()), "docs/findings.md lacks `{check}`");
    }
    for (name, part) in told.iter().zip(&parts) {
        assert!(known.iter().any(|k| k == name), "docs/findings.md tells of `{name}`, which is no check");
        assert!(part.contains("*Remedy:*"), "`{name}` has no remedy");
    }
}

/// Keys that the example job does not show, or shows without a word.
const NOT_SHOWN: &[(&str, &str)] = &[
    ("layers.axis", "the axis of the rib, from springing to springing"),
    ("layers.intrados", "the inner line of the ring"),
    ("layers.extrados", "the outer line of the ring"),
    ("layers.loads", "loads and their labels"),
    ("layers.posts", "spandrel posts"),
    ("layers.joints", "joints of the ring"),
    ("layers.hinges", "points at which the rib is hinged"),
    ("layers.road", "the road line"),
    ("layers.plan", "the roadway in plan"),
    ("rib.movement.left", "m to the right, m upward, rad counter-clockwise: of the left springing"),
    ("rib.movement.right", "the same of the right springing"),
    ("area.name", "what the cases call it"),
    ("area.unit_weight", "kN/m3"),
    ("area.width", "m, across the bridge"),
    ("area.level", "m, y in the elevation: fill over the extrados up to a level line, no outline drawn"),
    ("case.name", "what results call it"),
    ("traffic.name", "what results call it"),
    ("traffic.both_ways", "whether the train also runs from right to left"),
    ("traffic.share", "part of the train on this rib, in place of `effective_width`"),
    ("traffic.dynamic", "factor on the axle loads"),
    ("traffic.deck", "deck over posts: simple (supported from post to post; the default) or continuous"),
    ("range.low", "least value"),
    ("range.high", "greatest value"),
    ("limits.geometric_factor", "least geometric factor of safety"),
    ("limits.load_factor", "least load factor"),
    ("accept.finding.span", "only on the span of this name"),
    ("accept.finding.case", "only in the case of this name"),
    ("accept.finding.reason", "why; required"),
    ("accept.finding.by", "by whom; required"),
    ("accept.finding.until", "last day on which it holds, UTC; absent: without end"),
    ("mark.prefix", "what the names of the new layers begin with"),
    ("mark.frozen", "whether the new layers are frozen"),
    ("mark.text_height", "m in the elevation; auto: by the viewport or the texts of the drawing"),
    ("title.sheet", "attribute tag of the sheet number"),
    ("title.revision", "attribute tag of the revision"),
    ("limits.stress", "MPa, largest compressive stress"),
    ("traffic.step", "m, between two positions of the train"),
    ("rib.width", "m, across the bridge"),
    ("rib.friction", "coefficient of friction in the joints; absent: no sliding check"),
    ("rib.elastic_modulus", "MPa"),
    ("rib.deck_modulus", "MPa"),
];

/// Values of every type, none of them a default.
const PROBES: [&str; 13] = [
    "0.001",
    "1",
    "true",
    "\"PROBE\"",
    "\"xz\"",
    "\"us\"",
    "\"elastic\"",
    "\"hingeless\"",
    "\"stress\"",
    "[\"least-thrust\"]",
    "[\"elastic\"]",
    "{ left = [0.001, 0.0, 0.0], right = [0.0, 0.0, 0.0] }",
    "[\"PROBE\"]",
];

/// What the program says about a key of which not every value is built.
fn not_built(table: &str, key: &str) -> Option<String> {
    let several = ["area", "case", "traffic", "range", "accept.finding"].contains(&table);
    let head = if several { format!("[[{table}]]") } else { format!("[{table}]") };
    PROBES.iter().find_map(|probe| {
        // An area is read as a whole or not at all.
        let beside = match (table, key) {
            ("area", "width" | "earth_pressure" | "passive") => "name = \"x\"\nlevel = 1\nunit_weight = 1\n",
            _ => "",
        };
        let job = format!("{head}\n{beside}{key} = {probe}\n");
        let named = format!("`{table}.{key}`");
        let problems = thrustmark::job::Job::problems(job.as_bytes());
        problems.into_iter().find(|p| p.check == "not-built" && p.message.contains(&named)).map(|p| p.remedy)
    })
}

fn job_page() -> String {
    let example = fs::read_to_string(root().join("tests/data/every-key.toml")).unwrap();
    let mut shown: BTreeMap<String, (String, String)> = BTreeMap::new();
    let mut table = String::new();
    for line in example.lines() {
        if line.starts_with('[') {
            table = line.trim_start_matches('[').split(']').next().unwrap().to_owned();
        } else if let Some((key, rest)) = line.split_once(" = ") {
            // A remark begins with two blanks or more and a number sign; one inside a text does not.
            let (value, remark) = match rest.rfind("  # ") {
                Some(at) => (rest[..at].trim_end(), rest[at + 4..].trim()),
                None => {
                    (rest.split(" # ").next().unwrap().trim_end(), rest.split_once(" # ").map_or("", |r| r.1))
                }
            };
            shown.insert(format!("{table}.{key}"), (value.to_owned(), remark.to_owned()));
        }
    }
    let problems = thrustmark::job::Job::problems(example.as_bytes());
    let mut out = String::from(
        "# The job file\n\n\
         `thrustmark.toml`, in the folder of the drawings or in one above it, or named with `--job`. This page is made from the\n\
         keys that the program knows; a key that it does not know is an error that names the nearest one. Quantities are in\n\
         the unit of the remark, or a text with a unit (`\"200 mm\"`). An absent key means *not given*, never a hidden number.\n\n\
         A `[[sheet]]` table with `match = \"*-existing.dxf\"` holds the same tables again for drawings whose file name matches;\n\
         they are laid over the file in their order.\n\n\
         Keys marked *later* are known and refused by name in this version: none is passed over in silence.\n",
    );
    let mut table = String::new();
    for key in thrustmark::job::keys() {
        let (of, name) = key.rsplit_once('.').unwrap();
        if of == "sheet" || key == "accept.finding" {
            // Told at the head of the page; a table of its own below.
            continue;
        }
        if of != table {
            table = of.to_owned();
            let several = ["area", "case", "traffic", "range", "accept.finding"].contains(&of);
            let head = if several { format!("[[{of}]]") } else { format!("[{of}]") };
            let later =
                problems.iter().any(|p| p.check == "not-built" && p.message.contains(&format!("`{of}`")));
            out.push_str(&format!("\n## {head}\n\n"));
            if later {
                out.push_str("The whole table comes *later*.\n\n");
            }
            out.push_str("| key | example | what it is |\n| --- | --- | --- |\n");
        }
        let beside =
            NOT_SHOWN.iter().find(|(k, _)| *k == key).map(|(_, words)| (String::new(), (*words).to_owned()));
        let (value, remark) = match (shown.get(&key).cloned(), beside) {
            (Some((value, remark)), Some((_, words))) if remark.is_empty() => (value, words),
            (shown, beside) => shown.or(beside).unwrap_or_default(),
        };
        let state = match not_built(of, name) {
            None => String::new(),
            Some(remedy) => match remedy.split_once("use one of: ") {
                Some((_, values)) => format!(" *(this version: {})*", values.trim_end_matches('.')),
                None => " *(later)*".to_owned(),
            },
        };
        assert!(!remark.is_empty(), "nothing tells what `{key}` is");
        let example = if value.is_empty() { String::new() } else { format!("`{value}`") };
        let cell = |text: &str| text.replace('|', "\\|");
        out.push_str(&format!("| `{name}` | {} | {}{state} |\n", cell(&example), cell(&remark)));
    }
    out
}

#[test]
fn the_job_file_reference_is_that_of_the_code() {
    let page = job_page();
    let file = root().join("docs/job-file.md");
    if std::env::var_os("THRUSTMARK_WRITE_DOCS").is_some() {
        fs::write(&file, &page).unwrap();
    }
    let there = fs::read_to_string(&file).unwrap_or_default();
    let first = page.lines().zip(there.lines()).find(|(new, old)| new != old);
    assert!(
        page == there,
        "docs/job-file.md is stale ({first:?}): THRUSTMARK_WRITE_DOCS=1 cargo test --test book writes it again"
    );
}
