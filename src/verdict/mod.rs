//! From facts to findings: what was noticed and computed is put into words, held against the stated limits, and summed
//! up in a verdict. Only here do results get a severity and advice.

mod accept;
mod areas;
mod dimensions;
mod drawn;
mod limits;
mod noise;
mod notes;
mod piers;
mod ranges;
mod sideways;
mod slender;
mod spans;
mod suggest;
pub mod traffic;

pub use piers::Pushes;

use std::collections::BTreeSet;

use jiff::civil::Date;

use crate::drawing;
use crate::job::Assumption;
use crate::job::Settings;
use crate::model::{Case, Forces, Model};
use crate::outcome::{Check, Finding, FindingVerdict, Ranges, Source, Span, Units, Verdict, Xy};
use crate::statics::{Analysis, Factor};

/// What came out of a drawing, judged.
#[derive(Debug, Clone, PartialEq)]
pub struct Judgement {
    /// The units of all numbers.
    pub units: Units,
    /// The spans with their results.
    pub spans: Vec<Span>,
    /// Everything worth saying, worst first.
    pub findings: Vec<Finding>,
    /// The verdict.
    pub verdict: Verdict,
}

/// What was computed of a drawing.
#[derive(Debug, Clone, Copy)]
pub struct Computed<'a> {
    /// The spans with their loads.
    pub model: &'a Model,
    /// The load cases.
    pub cases: &'a [Case],
    /// Of each span, in order, one analysis for each case, in order.
    pub analyses: &'a [Vec<Analysis>],
    /// Alike, what takes more than one analysis.
    pub extras: &'a [Vec<Extra>],
    /// Of each span, in order, what the trains of the job came to.
    pub traffic: &'a [Vec<traffic::Ran>],
}

/// What takes more than one analysis of a span in a case.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Extra {
    /// Least thickness, as a factor on the depth; `None` where factors do not apply.
    pub thickness: Option<Factor>,
    /// Factors over the ranges that the job states.
    pub ranges: Option<Ranges>,
    /// Pushes at both ends, where the drawing has several spans.
    pub pushes: Option<Pushes>,
}

/// Judges what was computed. `today` decides whether an accepted exception has
/// run out.
pub fn judge(
    settings: &Settings,
    noticed: &[drawing::Note],
    computed: &Computed<'_>,
    today: Date,
) -> Judgement {
    let Computed { model, cases, analyses, extras, traffic } = *computed;
    let units = match model.forces {
        Forces::Kilonewtons => Units::si(),
        Forces::UnitLoads => Units::unit_loads(),
    };
    let mut spans: Vec<Span> = model
        .spans
        .iter()
        .zip(analyses.iter().zip(extras))
        .map(|(span, computed)| spans::span(model, span, cases, computed, settings))
        .collect();
    for (span, trains) in spans.iter_mut().zip(traffic) {
        for ran in trains {
            if let Some(case) = span.cases.get_mut(ran.case) {
                case.traffic.push(traffic::outcome(ran));
            }
        }
    }
    let mut findings = Vec::new();
    notes::drawing(noticed, settings, &mut findings);
    notes::model(&model.notes, &units, &mut findings);
    areas::drawing(model, &units, &mut findings);
    for (((analyses, extras), span), trains) in analyses.iter().zip(extras).zip(&spans).zip(traffic) {
        for (i, ((analysis, extra), case)) in analyses.iter().zip(extras).zip(cases).enumerate() {
            let mut about = Vec::new();
            if i == 0 {
                notes::shape(analysis, span, settings, &mut about);
                areas::sideways(model, span, analysis, &mut about);
                if let Some(drawn) = model.spans.iter().find(|s| s.name == span.name) {
                    noise::told(drawn, analysis, &mut about);
                }
            }
            notes::analysis(analysis, span, &units, &mut about);
            // Where nothing varies but a train that stands on the case, its load factor is the one that is judged.
            let moving = trains.iter().any(|t| t.case == i && t.ended.is_ok());
            limits::span(analysis, span, i, moving, settings, &mut about);
            slender::notes(analysis, span, settings, model.forces, &mut about);
            ranges::judge(extra, analysis, span, settings, i == 0, &mut about);
            findings.extend(about.into_iter().map(|mut finding| {
                finding.case = Some(case.name.clone());
                finding
            }));
        }
    }
    for (trains, span) in traffic.iter().zip(&spans) {
        for ran in trains {
            let mut about = Vec::new();
            traffic::findings(ran, span, settings, &mut about);
            let case = cases.get(ran.case).map(|c| c.name.clone());
            findings.extend(about.into_iter().map(|f| Finding { case: case.clone(), ..f }));
        }
    }
    for span in &model.spans {
        for case in cases {
            let mut about = Vec::new();
            sideways::couples(span, case, &units.force, &mut about);
            findings.extend(about.into_iter().map(|f| Finding { case: Some(case.name.clone()), ..f }));
        }
    }
    dimensions::judge(&model.dimensions, settings, &mut findings);
    for (i, case) in cases.iter().enumerate() {
        let pushes: Vec<Option<&Pushes>> =
            extras.iter().map(|of| of.get(i).and_then(|e| e.pushes.as_ref())).collect();
        let mut about = Vec::new();
        piers::judge(&case.name, &pushes, settings, &units, &mut spans, &mut about);
        if spans.len() > 1 && settings.limits.pier_push.is_some() {
            let trains: BTreeSet<&str> =
                traffic.iter().flatten().filter(|t| t.case == i).map(|t| t.name.as_str()).collect();
            about.extend(trains.into_iter().map(piers::moving));
        }
        findings.extend(about.into_iter().map(|f| Finding { case: Some(case.name.clone()), ..f }));
    }
    notes::cases(cases, &mut findings);
    notes::left_out(model, settings, &mut findings);
    allow_assumptions(&settings.accept.assumed, &mut findings);
    accept::exceptions(&settings.accept.finding, today, &mut findings);
    let verdict = verdict(&mut findings);
    findings.sort_by_key(|f| (rank(f), f.check));
    Judgement { units, spans, findings, verdict }
}

/// Adds suggestions to what was judged, as notes.
pub fn add_suggestions(judged: &mut Judgement) {
    for span in &judged.spans {
        judged.findings.extend(suggest::findings(span, &judged.units));
    }
    judged.findings.sort_by_key(|f| (rank(f), f.check));
}

/// Worst first: outside, what keeps the run from being judged, accepted exceptions, limits that hold, notes.
fn rank(finding: &Finding) -> u8 {
    match finding.verdict {
        FindingVerdict::Outside => 0,
        _ if finding.unchecks => 1,
        FindingVerdict::Accepted => 2,
        FindingVerdict::Within => 3,
        FindingVerdict::Note => 4,
    }
}

/// An assumption that the job allows no longer keeps the run from being judged.
fn allow_assumptions(allowed: &[Assumption], findings: &mut [Finding]) {
    for finding in findings.iter_mut().filter(|f| f.unchecks) {
        let assumption = match finding.check {
            Check::Unit => Assumption::Unit,
            Check::Layers => Assumption::Layers,
            Check::Plane => Assumption::Plane,
            Check::Loads => Assumption::Loads,
            Check::Sense => Assumption::Sense,
            Check::Labels => Assumption::Labels,
            Check::Support => Assumption::Support,
            Check::Gaps => Assumption::Gaps,
            Check::Encoding => Assumption::Encoding,
            _ => continue,
        };
        if allowed.contains(&assumption) {
            finding.unchecks = false;
            finding.basis = Some("allowed by [accept] assumed".into());
        }
    }
}

/// Sums up; adds a finding when no limit was there to hold.
fn verdict(findings: &mut Vec<Finding>) -> Verdict {
    if findings.iter().any(|f| f.verdict == FindingVerdict::Outside) {
        return Verdict::Outside;
    }
    let holds = findings.iter().any(|f| f.verdict == FindingVerdict::Within);
    let stated = findings.iter().any(|f| matches!(f.check, Check::NotJudged) || f.accepted.is_some());
    if !holds {
        let message = if stated {
            "no stated limit could be shown to hold"
        } else {
            "no limit was stated, so there is nothing that could hold"
        };
        findings.push(
            note(Check::NoLimit, message).uncheck().remedy(
                "state what must hold under [limits] in the job file, such as `offset = 0.05` (metres)",
            ),
        );
    }
    if findings.iter().any(|f| f.unchecks) { Verdict::Unchecked } else { Verdict::Within }
}

/// A finding with no limit and no place yet.
fn note(check: Check, message: impl Into<String>) -> Finding {
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

/// Short ways to add what a finding knows.
trait With: Sized {
    fn uncheck(self) -> Self;
    fn remedy(self, text: impl Into<String>) -> Self;
    fn value(self, value: f64, unit: &str) -> Self;
    fn at(self, at: Xy) -> Self;
    fn of(self, span: &str) -> Self;
    fn entity(self, source: &drawing::Source) -> Self;
}

impl With for Finding {
    fn uncheck(mut self) -> Self {
        self.unchecks = true;
        self
    }
    fn remedy(mut self, text: impl Into<String>) -> Self {
        self.remedy = Some(text.into());
        self
    }
    fn value(mut self, value: f64, unit: &str) -> Self {
        self.value = Some(value);
        self.unit = Some(unit.into());
        self
    }
    fn at(mut self, at: Xy) -> Self {
        self.at = Some(at);
        self
    }
    fn of(mut self, span: &str) -> Self {
        self.span = Some(span.into());
        self
    }
    fn entity(mut self, from: &drawing::Source) -> Self {
        self.entity = Some(source(from));
        self
    }
}

/// A source as the results hold it.
fn source(from: &drawing::Source) -> Source {
    Source {
        handle: from.handle.clone(),
        kind: from.kind.clone(),
        layer: from.layer.clone(),
        path: from.path.clone(),
    }
}

/// A length in words: millimetres below ten metres, else metres.
fn length(metres: f64) -> String {
    if metres.abs() < 10.0 { format!("{:.0} mm", metres * 1000.0) } else { format!("{metres:.2} m") }
}
