//! Runs for the tests of the outputs: arches and cables under upright loads with the statics of the simple beam, `H = M/f`.

use crate::geometry::{Path, Point, Segment, Vec2};
use crate::outcome::*;
use crate::refusal::Refusal;
use crate::write::annotate::spaces;

/// One span to be made up.
#[derive(Debug, Clone)]
pub struct Sample {
    pub x: f64,
    pub span: f64,
    /// Negative: a cable.
    pub rise: f64,
    /// Abscissa as part of the span, and force downward.
    pub loads: Vec<(f64, f64)>,
    pub circular: bool,
    pub depth: Option<f64>,
    pub limit: Option<f64>,
    pub units: Units,
    pub others: bool,
    pub case: Vec<(String, f64)>,
    /// The line's springings and crown moved up by so much.
    pub shift: [f64; 3],
}

/// An arch under `n` equal loads at equal distances.
pub fn arch(n: usize, span: f64, rise: f64) -> Sample {
    Sample {
        x: 0.0,
        span,
        rise,
        loads: (1..=n).map(|i| (i as f64 / (n + 1) as f64, 100.0)).collect(),
        circular: true,
        depth: None,
        limit: None,
        units: Units::si(),
        others: false,
        case: vec![("drawn".into(), 0.0)],
        shift: [0.0; 3],
    }
}

impl Sample {
    pub fn unit_loads(mut self) -> Self {
        self.units = Units::unit_loads();
        for load in &mut self.loads {
            load.1 /= 100.0;
        }
        self
    }

    pub fn limited(mut self, limit: f64) -> Self {
        self.limit = Some(limit);
        self
    }

    pub fn run(self) -> Run {
        run_of(vec![self])
    }

    fn curve(&self) -> Vec<[f64; 3]> {
        if self.circular {
            let bulge = -2.0 * self.rise / self.span;
            return vec![[self.x, 0.0, bulge], [self.x + self.span, 0.0, 0.0]];
        }
        (0..=32)
            .map(|i| {
                let t = i as f64 / 32.0;
                [self.x + t * self.span, 4.0 * self.rise * t * (1.0 - t), 0.0]
            })
            .collect()
    }

    /// The line through points moved up from springings and crown, loads on the half of more `x` heavier by `tilt`.
    fn line(&self, kind: LineKind, shift: [f64; 3], tilt: f64, path: &Path) -> Line {
        let weight = |t: f64, p: f64| if t > 0.5 { p * (1.0 + tilt) } else { p };
        let l = self.span;
        let v_left: f64 = self.loads.iter().map(|&(t, p)| weight(t, p) * (1.0 - t)).sum();
        let total: f64 = self.loads.iter().map(|&(t, p)| weight(t, p)).sum();
        let moment = |x: f64| {
            v_left * x - self.loads.iter().map(|&(t, p)| weight(t, p) * (x - t * l).max(0.0)).sum::<f64>()
        };
        let chord = |x: f64| shift[0] + (shift[1] - shift[0]) * x / l;
        let height = self.rise + shift[2] - chord(l / 2.0);
        let h = moment(l / 2.0) / height;
        let y = |x: f64| chord(x) + moment(x) / h;
        let mut xs = vec![0.0, l];
        xs.extend(self.loads.iter().map(|q| q.0 * l));
        xs.sort_by(f64::total_cmp);
        let vertices: Vec<Point> = xs.iter().map(|&x| Point::new(self.x + x, y(x))).collect();
        let slope = (shift[1] - shift[0]) / l;
        let (left, right) = (v_left + h * slope, total - v_left - h * slope);

        let n = 60;
        let length = path.length();
        let mut stations = Vec::new();
        let mut lengths: Vec<f64> = (0..=n).map(|i| length * f64::from(i) / f64::from(n)).collect();
        for q in &self.loads {
            lengths.extend(path.crossings_of_vertical(self.x + q.0 * l).first());
        }
        lengths.sort_by(f64::total_cmp);
        for s in lengths {
            let at = path.point_at(s);
            let (tangent, normal) = (path.tangent_at(s, true), path.normal_at(s, true));
            let mut e: Option<f64> = None;
            for w in vertices.windows(2) {
                let d = w[1] - w[0];
                let t = normal.cross(at - w[0]) / normal.cross(d);
                if (-1e-9..=1.0 + 1e-9).contains(&t) {
                    let here = (w[0] + d * t - at).dot(normal);
                    if e.is_none_or(|e| here.abs() < e.abs()) {
                        e = Some(here);
                    }
                }
            }
            let x = (at.x - self.x).clamp(0.0, l);
            let passed: f64 = self.loads.iter().filter(|q| q.0 * l < x).map(|&(t, p)| weight(t, p)).sum();
            let force = Vec2::new(h, left - passed);
            stations.push(Station {
                at: [at.x, at.y],
                s,
                thrust: force.dot(tangent),
                shear: force.dot(normal),
                moment: h * (y(x) - at.y),
                eccentricity: e,
                vertical_offset: Some(y(x) - at.y),
                depth: self.depth,
                stress_max: None,
                stress_min: None,
                moment_min: None,
                moment_max: None,
            });
        }
        let worst = stations
            .iter()
            .filter(|t| t.eccentricity.is_some())
            .max_by(|a, b| a.eccentricity.unwrap().abs().total_cmp(&b.eccentricity.unwrap().abs()))
            .unwrap();
        let signed = worst.eccentricity.unwrap();
        let offset = Offset { max_abs: signed.abs(), signed, at: worst.at, rms: signed.abs() / 2.0 };
        Line {
            kind,
            support: None,
            left: Some(End { horizontal: h, vertical: left, eccentricity: None }),
            right: Some(End { horizontal: h, vertical: right, eccentricity: None }),
            status: Status::Found,
            reason: None,
            vertices: vertices.iter().map(|p| [p.x, p.y]).collect(),
            offset: Some(offset),
            stations,
            proof: Some(Proof { primal: 1.0, dual: 1.0, gap: 0.0 }),
            buckling: None,
        }
    }
}

/// Several spans of one drawing.
pub fn run_of(samples: Vec<Sample>) -> Run {
    let mut findings = Vec::new();
    let mut spans = Vec::new();
    let units = samples[0].units.clone();
    for (i, sample) in samples.iter().enumerate() {
        let name = format!("span {}", i + 1);
        let curve = sample.curve();
        let path =
            Path::new(curve.windows(2).map(|w| {
                Segment::bulge(Point::new(w[0][0], w[0][1]), Point::new(w[1][0], w[1][1]), w[0][2])
            }))
            .unwrap();
        let letters = spaces(sample.loads.len());
        let loads = sample
            .loads
            .iter()
            .zip(letters)
            .enumerate()
            .map(|(j, (&(t, p), space))| {
                let x = sample.x + t * sample.span;
                let s = path.crossings_of_vertical(x).first().copied().unwrap_or(0.0);
                Load {
                    label: format!("P{}", j + 1),
                    space,
                    at: [x, path.point_at(s).y],
                    force: [0.0, -p],
                    set: "ARCH-LOADS".into(),
                    source: source("POINT", &format!("{:X}", 0x40 + j)),
                    magnitude_from: if units.force == "kN" {
                        MagnitudeFrom::Label
                    } else {
                        MagnitudeFrom::Equal
                    },
                    text: Some(format!("P{} = {p} kN", j + 1)),
                    per_length: None,
                    over: None,
                    application: None,
                    sense: None,
                    post: None,
                    sideways: None,
                }
            })
            .collect();
        let mut cases = Vec::new();
        for (case, tilt) in &sample.case {
            let closest = sample.line(LineKind::Closest, sample.shift, *tilt, &path);
            let mut lines = vec![closest];
            if sample.others {
                let d = sample.depth.unwrap_or(0.6);
                lines.push(sample.line(LineKind::LeastThrust, [-d / 2.0, -d / 2.0, d / 2.0], *tilt, &path));
                lines.push(sample.line(LineKind::GreatestThrust, [d / 2.0, d / 2.0, -d / 2.0], *tilt, &path));
            }
            let offset = lines[0].offset.clone().unwrap();
            if let Some(limit) = sample.limit {
                let outside = offset.max_abs > limit;
                findings.push(Finding {
                    verdict: if outside { FindingVerdict::Outside } else { FindingVerdict::Within },
                    value: Some(offset.max_abs),
                    limit: Some(limit),
                    unit: Some("m".into()),
                    at: Some(offset.at),
                    span: Some(name.clone()),
                    case: Some(case.clone()),
                    basis: Some("[limits] offset".into()),
                    remedy: outside.then(|| "Lower the axis by 40 mm at load P2.".into()),
                    ..note(Check::Offset, "The line strays from the axis")
                });
            }
            let left = lines[0].left.clone().unwrap();
            let forces: Vec<Xy> = sample
                .loads
                .iter()
                .map(|&(t, p)| [0.0, if t > 0.5 { -p * (1.0 + tilt) } else { -p }])
                .collect();
            let total: f64 = -forces.iter().map(|f| f[1]).sum::<f64>();
            cases.push(Case {
                name: case.clone(),
                total_load: [0.0, -total],
                forces,
                pole: Some(Pole {
                    horizontal: left.horizontal * 0.96,
                    vertical: left.vertical * 1.01,
                    scatter: 1.0,
                    scatter_ratio: Some(0.01),
                }),
                governs: LineKind::Closest,
                governs_why: "axis only, no support declared".into(),
                lines,
                traffic: vec![],
                safety: None,
                section_forces: Vec::new(),
                ranges: None,
                residual: 1e-15,
            });
        }
        let (s, rise) = path.farthest_from_chord(sample.rise < 0.0);
        let crown = path.point_at(s);
        spans.push(Span {
            areas: Vec::new(),
            piers: Vec::new(),
            name,
            kind: if sample.rise < 0.0 { "cable".into() } else { "arch".into() },
            axis: Axis {
                span: sample.span,
                rise,
                length: path.length(),
                left: [sample.x, 0.0],
                right: [sample.x + sample.span, 0.0],
                crown: [crown.x, crown.y],
                entities: vec![source("LWPOLYLINE", "2A")],
                curve,
            },
            ring: sample.depth.map(|d| Ring {
                depth_min: d,
                depth_max: d,
                width: Some(4.0),
                entities: Vec::new(),
            }),
            loads,
            cases,
            suggestion: None,
        });
    }
    findings.sort_by_key(|f| f.verdict);
    let verdict = if samples.iter().all(|s| s.limit.is_none()) {
        findings
            .push(Finding { unchecks: true, ..note(Check::NoLimit, "No limit is stated in a job file.") });
        Verdict::Unchecked
    } else if findings.iter().any(|f| f.verdict == FindingVerdict::Outside) {
        Verdict::Outside
    } else {
        Verdict::Within
    };
    findings.push(note(Check::LeftOut, "The rib is taken as weightless: no unit weight is given."));
    Run {
        units,
        drawing: DrawingFacts {
            file: "bridge.dxf".into(),
            sha256: Some("ab".repeat(32)),
            dxf_version: Some("AC1024".into()),
            form: Some("ascii".into()),
            encoding: Some("UTF-8".into()),
            unit: Some("m".into()),
            unit_source: Some("$INSUNITS".into()),
            sheet: Some("B-204".into()),
            revision: Some("C".into()),
        },
        settings: if samples[0].case.len() > 1 {
            let cases: Vec<serde_json::Value> = samples[0]
                .case
                .iter()
                .map(|c| serde_json::json!({ "name": c.0, "factors": { "ARCH-LOADS": 1.0, "TRAFFIC": c.1 } }))
                .collect();
            serde_json::json!({ "case": cases })
        } else {
            serde_json::json!({})
        },
        spans,
        findings,
        verdict: Some(verdict),
        output: Some("bridge.thrust.dxf".into()),
        error: None,
    }
}

/// An arch with an axis and a depth suggested.
pub fn suggested() -> Run {
    let mut run = Sample { depth: Some(0.5), ..arch(3, 24.0, 6.0) }.limited(0.01).run();
    let points: Vec<Xy> = vec![[0.0, 0.0], [6.0, 4.5], [12.0, 6.0], [18.0, 4.5], [24.0, 0.0]];
    let moves = run.spans[0]
        .loads
        .iter()
        .zip(&points[1..])
        .map(|(load, p)| Move { load: Some(load.label.clone()), at: load.at, by: p[1] - load.at[1] })
        .collect();
    let axis = SuggestedAxis {
        case: "drawn".into(),
        status: Status::Found,
        reason: None,
        horizontal: Some(200.0),
        points,
        moves,
    };
    let depth = SuggestedDepth {
        status: Status::Found,
        factor: Some(1.2),
        depth_min: Some(0.6),
        depth_max: Some(0.6),
    };
    run.spans[0].suggestion = Some(Suggestion { axes: vec![axis], depth: Some(depth) });
    run
}

/// A drawing that was refused.
pub fn refused() -> Run {
    let mut run = arch(1, 10.0, 2.0).run();
    run.drawing.file = "broken.dxf".into();
    run.spans.clear();
    run.findings.clear();
    run.verdict = None;
    run.output = None;
    run.error =
        Some(Refusal::new("no-axis", "no layer holds an arch axis", "Name it in [layers] axis.").at_line(12));
    run
}

pub fn document(runs: Vec<Run>) -> Document {
    Document { contract: CONTRACT, tool: Tool { name: "thrustmark".into(), version: "0.1.0".into() }, runs }
}

pub fn source(kind: &str, handle: &str) -> Source {
    Source { handle: Some(handle.into()), kind: kind.into(), layer: "ARCH-LOADS".into(), path: vec![] }
}

pub fn note(check: Check, message: &str) -> Finding {
    Finding {
        check,
        verdict: FindingVerdict::Note,
        unchecks: false,
        value: None,
        limit: None,
        unit: None,
        at: None,
        span: None,
        case: None,
        basis: None,
        message: message.into(),
        remedy: None,
        entity: None,
        accepted: None,
    }
}
