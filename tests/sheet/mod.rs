//! Small drawings written by hand, entity by entity, for the tests of reading.
#![allow(dead_code, clippy::unwrap_used)]

use std::fmt::Write as _;

use thrustmark::flow::{self, Environment};
use thrustmark::job::Job;
use thrustmark::outcome::Run;

/// A drawing; lengths in drawing units.
#[derive(Default, Clone)]
pub struct Sheet(pub Vec<String>);

impl Sheet {
    fn put(&mut self, kind: &str, layer: &str) -> &mut String {
        self.0.push(format!("  0\n{kind}\n  5\n{:X}\n  8\n{layer}\n", 0x100 + self.0.len()));
        self.0.last_mut().unwrap()
    }

    pub fn add(&mut self, kind: &str, layer: &str, tags: &[(i32, f64)]) {
        let text = self.put(kind, layer);
        for (code, value) in tags {
            writeln!(text, "{code:>3}\n{value}").unwrap();
        }
    }

    /// Appends a group to the last entity.
    pub fn more(&mut self, code: i32, value: &str) {
        writeln!(self.0.last_mut().unwrap(), "{code:>3}\n{value}").unwrap();
    }

    pub fn line(&mut self, layer: &str, a: [f64; 2], b: [f64; 2]) {
        self.add("LINE", layer, &[(10, a[0]), (20, a[1]), (11, b[0]), (21, b[1])]);
    }

    /// An arc counter-clockwise between two angles in degrees.
    pub fn arc(&mut self, layer: &str, centre: [f64; 2], radius: f64, from: f64, to: f64) {
        self.add("ARC", layer, &[(10, centre[0]), (20, centre[1]), (40, radius), (50, from), (51, to)]);
    }

    pub fn point(&mut self, layer: &str, at: [f64; 2]) {
        self.add("POINT", layer, &[(10, at[0]), (20, at[1])]);
    }

    pub fn text(&mut self, layer: &str, at: [f64; 2], height: f64, says: &str) {
        self.add("TEXT", layer, &[(10, at[0]), (20, at[1]), (40, height)]);
        self.more(1, says);
    }

    /// A point with its label.
    pub fn load(&mut self, layer: &str, at: [f64; 2], label: &str) {
        self.point(layer, at);
        self.text(layer, [at[0], at[1] + 0.1], 0.2, label);
    }

    /// An LWPOLYLINE, with widths at the start and end of each piece.
    pub fn polyline(&mut self, layer: &str, points: &[[f64; 2]], closed: bool, widths: &[[f64; 2]]) {
        let mut tags = vec![(90, points.len() as f64), (70, f64::from(u8::from(closed)))];
        for (i, p) in points.iter().enumerate() {
            tags.extend([(10, p[0]), (20, p[1])]);
            if let Some(w) = widths.get(i) {
                tags.extend([(40, w[0]), (41, w[1])]);
            }
        }
        self.add("LWPOLYLINE", layer, &tags);
    }

    /// A POLYLINE with its vertices and the widths at the start and end of the piece behind each.
    pub fn old_polyline(&mut self, layer: &str, points: &[([f64; 2], [f64; 2])]) {
        self.add("POLYLINE", layer, &[(66, 1.0), (10, 0.0), (20, 0.0)]);
        let text = self.0.last_mut().unwrap();
        for (p, w) in points {
            write!(
                text,
                "  0\nVERTEX\n  8\n{layer}\n 10\n{}\n 20\n{}\n 40\n{}\n 41\n{}\n",
                p[0], p[1], w[0], w[1]
            )
            .unwrap();
        }
        text.push_str("  0\nSEQEND\n");
    }

    pub fn leader(&mut self, layer: &str, points: &[[f64; 2]], head: bool) {
        let mut tags = vec![(71, f64::from(u8::from(head))), (76, points.len() as f64)];
        for p in points {
            tags.extend([(10, p[0]), (20, p[1]), (30, 0.0)]);
        }
        self.add("LEADER", layer, &tags);
    }

    /// A filled triangle.
    pub fn solid(&mut self, layer: &str, [a, b, c]: [[f64; 2]; 3]) {
        self.add(
            "SOLID",
            layer,
            &[(10, a[0]), (20, a[1]), (11, b[0]), (21, b[1]), (12, c[0]), (22, c[1]), (13, c[0]), (23, c[1])],
        );
    }

    pub fn file(&self) -> String {
        let mut text = "  0\nSECTION\n  2\nHEADER\n  9\n$ACADVER\n  1\nAC1009\n  0\nENDSEC\n  0\nSECTION\n  2\nENTITIES\n".to_owned();
        text.extend(self.0.iter().cloned());
        text + "  0\nENDSEC\n  0\nEOF\n"
    }

    /// Checked under a job, in metres.
    pub fn run(&self, job: &str) -> Run {
        let text = format!("[drawing]\nunit = \"m\"\n{job}");
        self.checked(&text)
    }

    /// Checked under a job that begins with its table `[drawing]`, in a unit.
    pub fn run_in(&self, unit: &str, job: &str) -> Run {
        self.checked(&job.replacen("[drawing]\n", &format!("[drawing]\nunit = \"{unit}\"\n"), 1))
    }

    fn checked(&self, job: &str) -> Run {
        let folder = tempfile::tempdir().unwrap();
        let file = folder.path().join("arch.dxf");
        std::fs::write(&file, self.file()).unwrap();
        let job = Job::parse(job.as_bytes(), None).unwrap();
        flow::check(&file, Some(&job), Environment { today: jiff::civil::date(2026, 12, 1) })
    }

    /// Marked under a job, in metres: the run and the marked copy.
    pub fn marked(&self, job: &str) -> (Run, String) {
        let folder = tempfile::tempdir().unwrap();
        let file = folder.path().join("arch.dxf");
        std::fs::write(&file, self.file()).unwrap();
        let job = Job::parse(format!("[drawing]\nunit = \"m\"\n{job}").as_bytes(), None).unwrap();
        let output = folder.path().join("out.dxf");
        let target = flow::Target { output: Some(output.clone()), force: false };
        let run =
            flow::mark(&file, Some(&job), &target, Environment { today: jiff::civil::date(2026, 12, 1) });
        let copy = std::fs::read_to_string(output).unwrap_or_default();
        (run, copy)
    }
}
