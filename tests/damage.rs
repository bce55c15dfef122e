//! Drawings that were damaged on their way: cut anywhere, or with bytes changed. They are refused or answered, never with
//! a panic. What was cut off is never `within`; what was changed is not where the whole drawing is not.

#![allow(clippy::unwrap_used, clippy::print_stderr)]

use std::fs;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::{Path, PathBuf};

use thrustmark::flow::{self, Environment};
use thrustmark::job::Job;
use thrustmark::outcome::Verdict;

/// A limit that no real line of these drawings keeps: `within` could only come of something lost.
const STRICT: &str = "[rib]\ndepth = 0.6\nwidth = 4.0\nsupport = \"none\"\n[drawing]\nunit = \"mm\"\n[layers]\naxis = \
    \"ARCH-AXIS\"\nloads = \"ARCH-LOADS\"\n[limits]\noffset = 0.0001\n";

struct Bench {
    folder: tempfile::TempDir,
    job: Job,
}

impl Bench {
    fn new(job: &str) -> Self {
        let folder = tempfile::tempdir().unwrap();
        let file = folder.path().join("thrustmark.toml");
        fs::write(&file, job).unwrap();
        let job = Job::load(&file).unwrap();
        Self { folder, job }
    }

    /// The verdict on these bytes as a drawing; none when it was refused.
    fn judge(&self, what: &str, bytes: &[u8]) -> Option<Verdict> {
        let path = self.folder.path().join("a.dxf");
        fs::write(&path, bytes).unwrap();
        let environment = Environment::of_process().unwrap();
        let run = catch_unwind(AssertUnwindSafe(|| flow::check(&path, Some(&self.job), environment)));
        let run = run.unwrap_or_else(|_| panic!("{what}: a panic"));
        assert_eq!(run.verdict.is_none(), run.error.is_some(), "{what}");
        run.verdict
    }
}

fn ring() -> Vec<u8> {
    fs::read(Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/good/masonry-ring.dxf")).unwrap()
}

/// Numbers that only look random (SplitMix64, from memory), the same in every run.
struct Numbers(u64);

impl Numbers {
    fn below(&mut self, end: usize) -> usize {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        usize::try_from((z ^ (z >> 31)) % end as u64).unwrap()
    }
}

/// A drawing that was cut off may still hold an arch. It is answered, but not judged within, whatever the limit.
#[test]
fn cut_at_every_byte_it_is_never_within() {
    let bench = Bench::new(&STRICT.replace("0.0001", "1000.0"));
    let whole = ring();
    assert_eq!(bench.judge("whole", &whole), Some(Verdict::Within));
    let text = String::from_utf8(whole.clone()).unwrap();
    let complete = text.rfind("EOF").unwrap() + 3;
    let mut refused = 0;
    for end in 0..complete {
        let verdict = bench.judge(&format!("cut at {end}"), &whole[..end]);
        assert!(verdict != Some(Verdict::Within), "cut at {end} of {complete}");
        refused += usize::from(verdict.is_none());
    }
    eprintln!("{refused} of {complete} cuts refused");
    assert!(refused > 1000, "{refused}");
}

#[test]
fn every_number_replaced_by_one_that_is_none() {
    let bench = Bench::new(STRICT);
    let text = String::from_utf8(ring()).unwrap();
    let lines: Vec<&str> = text.lines().collect();
    let (mut refused, mut answered) = (0, 0);
    for at in (1..lines.len()).step_by(2) {
        let Ok(10..=79) = lines[at - 1].trim().parse::<i32>() else { continue };
        for odd in
            ["nan", "inf", "-inf", "1e308", "-1e308", "", "0x10", "1,5", "1e-320", "99999999999999999999"]
        {
            let mut damaged = lines.clone();
            damaged[at] = odd;
            let what = format!("line {} is {odd:?}", at + 1);
            match bench.judge(&what, damaged.join("\r\n").as_bytes()) {
                None => refused += 1,
                Some(verdict) => {
                    assert!(verdict != Verdict::Within, "{what}");
                    answered += 1;
                }
            }
        }
    }
    eprintln!("{refused} refused, {answered} answered");
    assert!(refused > 500, "{refused}");
}

/// Ten bytes here and there of a drawing changed, so many times over.
fn changed(bench: &Bench, what: &str, whole: &[u8], times: usize, numbers: &mut Numbers) {
    for time in 0..times {
        let mut damaged = whole.to_vec();
        for _ in 0..=numbers.below(10) {
            let at = numbers.below(damaged.len());
            damaged[at] = u8::try_from(numbers.below(256)).unwrap();
        }
        if numbers.below(2) == 0 {
            damaged.truncate(numbers.below(damaged.len() + 1));
        }
        let verdict = bench.judge(&format!("{what}, damage {time}"), &damaged);
        assert!(verdict != Some(Verdict::Within), "{what}, damage {time}");
    }
}

#[test]
fn changed_bytes_never_make_it_within() {
    let bench = Bench::new(STRICT);
    changed(&bench, "the ring", &ring(), 2000, &mut Numbers(1));
}

/// The outside drawings, smallest first; nothing where they are not at hand.
fn corpus() -> Vec<PathBuf> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let shared = std::env::var_os("THRUSTMARK_SHARED").map_or_else(|| root.join("../shared"), PathBuf::from);
    let Ok(entries) = fs::read_dir(shared.join("corpus")) else {
        eprintln!("skipped: the outside drawings are not at hand ({})", shared.display());
        return Vec::new();
    };
    let mut paths: Vec<(u64, PathBuf)> =
        entries.flatten().map(|e| (e.metadata().unwrap().len(), e.path())).collect();
    paths.sort();
    paths.into_iter().filter(|(size, _)| *size > 0).map(|(_, path)| path).collect()
}

#[test]
fn a_sample_of_outside_drawings_with_damage() {
    // No limit is stated, so that nothing can be within.
    let bench = Bench::new("[layers]\naxis = \"*\"\n");
    let small: Vec<PathBuf> = corpus().into_iter().take(200).collect();
    for path in small.iter().step_by(10) {
        changed(&bench, &path.display().to_string(), &fs::read(path).unwrap(), 5, &mut Numbers(2));
    }
}

#[test]
#[ignore = "long: a hundred damages of every outside drawing"]
fn every_outside_drawing_with_damage() {
    let bench = Bench::new("[layers]\naxis = \"*\"\n");
    for path in corpus() {
        changed(&bench, &path.display().to_string(), &fs::read(&path).unwrap(), 100, &mut Numbers(3));
    }
}
