//! Small drawings for tests that go from a drawing to the results.
#![allow(clippy::unwrap_used, dead_code)]

use std::fmt::Write as _;

use thrustmark::flow::{self, Environment, Target};
use thrustmark::job::Job;
use thrustmark::outcome::Run;

/// A small R12 drawing of an axis, as points with bulges, and loads with their figures.
pub fn drawing(axis: &[[f64; 3]], loads: &[(&str, [f64; 2], &str)]) -> String {
    let mut text =
        "  0\nSECTION\n  2\nHEADER\n  9\n$ACADVER\n  1\nAC1009\n  0\nENDSEC\n  0\nSECTION\n  2\nENTITIES\n"
            .to_owned();
    text.push_str("  0\nPOLYLINE\n  5\nA0\n  8\nARCH-AXIS\n 66\n1\n 70\n0\n");
    for (i, [x, y, bulge]) in axis.iter().enumerate() {
        writeln!(text, "  0\nVERTEX\n  5\nA{}\n  8\nARCH-AXIS\n 10\n{x}\n 20\n{y}\n 42\n{bulge}", i + 1)
            .unwrap();
    }
    text.push_str("  0\nSEQEND\n  5\nAF\n  8\nARCH-AXIS\n");
    for (i, (layer, [x, y], label)) in loads.iter().enumerate() {
        writeln!(text, "  0\nPOINT\n  5\nB{i}\n  8\n{layer}\n 10\n{x}\n 20\n{y}").unwrap();
        writeln!(
            text,
            "  0\nTEXT\n  5\nC{i}\n  8\n{layer}\n 10\n{x}\n 20\n{}\n 40\n0.2\n  1\n{label}",
            y + 0.1
        )
        .unwrap();
    }
    text + "  0\nENDSEC\n  0\nEOF\n"
}

/// Marks the drawing under a job.
pub fn run(drawing: &str, job: &str) -> Run {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("arch.dxf");
    std::fs::write(&file, drawing).unwrap();
    let job = format!("[drawing]\nunit = \"m\"\n{job}");
    let job = Job::parse(job.as_bytes(), None).unwrap();
    let environment = Environment { today: jiff::civil::date(2026, 12, 1) };
    flow::mark(&file, Some(&job), &Target { output: None, force: false }, environment)
}
