//! The stated limits, and the one built in, against what was computed.

use super::{With, length, note, slender, spans};
use crate::job::{Settings, Support};
use crate::outcome::{Check, Finding, FindingVerdict, Span, Xy};
use crate::statics::{Analysis, Line, LineKind, Rule, SpanKind, Status};
use crate::tolerance;

/// Judges one span in one of its cases (by its number); the findings get the case's name afterwards. `moving`: a train that was
/// computed stands on the case, and has a load factor of its own.
pub fn span(
    analysis: &Analysis,
    span: &Span,
    case: usize,
    moving: bool,
    settings: &Settings,
    findings: &mut Vec<Finding>,
) {
    let limits = &settings.limits;
    let governing = &slender::state(&analysis.lines[analysis.governs]);
    let mut judge = Judge { span, case, analysis, findings };
    if governing.status != Status::Found {
        judge.not_found(governing);
        return;
    }
    if let Some(limit) = limits.offset {
        judge.offset(governing, limit);
    }
    let ring_applies = analysis.kind == SpanKind::Arch;
    let depth_use = governing.depth_use.filter(|_| ring_applies);
    match (depth_use, limits.ring) {
        (Some(used), stated) if stated.is_some() || (!settings.rib.tension && !elastic_support(settings)) => {
            judge.ring(governing, used.ratio * 2.0, spans::xy(used.at), stated);
        }
        (None, Some(_)) => judge.not_judged("ring", no_depth(analysis)),
        _ => {}
    }
    if let Some(limit) = limits.kern {
        match depth_use {
            Some(used) => judge.kern(governing, used.ratio * 6.0, spans::xy(used.at), limit),
            None => judge.not_judged("kern", no_depth(analysis)),
        }
    }
    if let Some(used) = depth_use
        && governing.kind == LineKind::Elastic
        && !settings.rib.tension
        && used.ratio * 6.0 > 1.0 + tolerance::LIMIT_MET
    {
        judge.cracked(spans::xy(used.at));
    }
    if let Some(limit) = limits.stress {
        judge.stress(limit);
    }
    if let Some(limit) = limits.geometric_factor {
        let closest =
            analysis.lines.iter().find(|l| l.kind == LineKind::Closest && l.status == Status::Found);
        match closest.and_then(|l| l.depth_use).filter(|_| ring_applies) {
            Some(used) => judge.geometric_factor(closest, used.ratio, spans::xy(used.at), limit),
            None => judge.not_judged("geometric_factor", no_depth(analysis)),
        }
    }
    if let Some(limit) = limits.load_factor {
        judge.load_factor(limit, moving);
    }
}

/// Whether the job declares a support that makes the rib an elastic arch.
pub(super) fn elastic_support(settings: &Settings) -> bool {
    matches!(settings.rib.support, Some(Support::Hingeless | Support::TwoHinged | Support::ThreeHinged))
}

fn no_depth(analysis: &Analysis) -> &'static str {
    match analysis.kind {
        SpanKind::Cable => "a cable has no ring, kern or factor",
        SpanKind::Arch => "no depth of the rib is known; give [rib] depth in the job file",
    }
}

/// A stated limit that what was computed keeps to, and that cannot be judged by it all the same.
fn open_limit(key: &str, value: f64, limit: f64, unit: &str, at: Xy, message: &str, why: &str) -> Finding {
    let message = format!("{message}. The stated limit `{key}` was not judged: {why}");
    let mut finding = note(Check::NotJudged, message).value(value, unit).at(at).uncheck();
    finding.limit = Some(limit);
    finding.basis = Some(format!("[limits] {key}"));
    finding
}

struct Judge<'a> {
    span: &'a Span,
    case: usize,
    analysis: &'a Analysis,
    findings: &'a mut Vec<Finding>,
}

impl Judge<'_> {
    /// Adds a finding that belongs to this span.
    fn add(&mut self, finding: Finding) {
        self.findings.push(finding.of(&self.span.name));
    }

    /// True when the governing line is only the most favourable one, and so not the state of the rib.
    fn best_case(&self) -> bool {
        matches!(self.analysis.rule, Rule::RingWithoutTension | Rule::AxisOnly)
    }

    fn not_found(&mut self, line: &Line) {
        let reason = line.reason.clone().unwrap_or_else(|| "the loads leave none".into());
        let mut finding = note(Check::NoLine, format!("no governing line of thrust: {reason}"));
        finding.verdict = FindingVerdict::Outside;
        finding.basis = Some("equilibrium".into());
        self.add(finding);
    }

    fn not_judged(&mut self, limit: &str, why: &str) {
        self.add(
            note(Check::NotJudged, format!("the stated limit `{limit}` was not judged: {why}")).uncheck(),
        );
    }

    fn offset(&mut self, line: &Line, limit: f64) {
        let Some(offset) = line.offset else { return };
        let at = spans::xy(offset.at);
        let holds = offset.max_abs <= limit * (1.0 + tolerance::LIMIT_MET);
        let side = self.side(offset.signed);
        let message = if holds {
            format!(
                "the line of thrust strays at most {} from the axis, {side}; limit {}",
                length(offset.max_abs),
                length(limit)
            )
        } else {
            format!(
                "the line of thrust strays {} from the axis, {side}; that is {} beyond the limit of {}",
                length(offset.max_abs),
                length(offset.max_abs - limit),
                length(limit)
            )
        };
        let mut finding =
            self.limit(Check::Offset, "[limits] offset", offset.max_abs, limit, "m", at, holds, message);
        if !holds {
            finding = finding.remedy(format!(
                "move the axis {} by at least {} {}, or change the loads there",
                self.direction(offset.signed),
                length(offset.max_abs - limit),
                self.near(at)
            ));
        }
        self.add(finding);
    }

    fn ring(&mut self, line: &Line, used: f64, at: Xy, stated: Option<f64>) {
        let limit = stated.unwrap_or(1.0);
        let holds = used <= limit * (1.0 + tolerance::LIMIT_MET);
        let basis =
            if stated.is_some() { "[limits] ring" } else { "built in: no tension, so inside the ring" };
        let message = if holds {
            format!(
                "the line of thrust uses {:.0} % of the half depth at most; limit {:.0} %",
                used * 100.0,
                limit * 100.0
            )
        } else if used > 1.0 {
            format!(
                "the line of thrust leaves the ring: {:.0} % of the half depth; limit {:.0} %",
                used * 100.0,
                limit * 100.0
            )
        } else {
            format!(
                "the line of thrust uses {:.0} % of the half depth; limit {:.0} %",
                used * 100.0,
                limit * 100.0
            )
        };
        let mut finding = self.limit(Check::Ring, basis, used, limit, "of half depth", at, holds, message);
        if holds && stated.is_none() {
            // The built-in limit can make a run outside; to be within, the job has to state one.
            finding.verdict = FindingVerdict::Note;
        }
        if !holds {
            finding = finding.remedy(self.deeper_or_moved(line, used / limit, at));
        }
        self.add(finding);
    }

    fn kern(&mut self, line: &Line, used: f64, at: Xy, limit: f64) {
        let holds = used <= limit * (1.0 + tolerance::LIMIT_MET);
        let best = self.best_case();
        let message = format!(
            "{}the line of thrust reaches {used:.2} times a sixth of the depth; limit {limit:.2}",
            if best { "best case: " } else { "" }
        );
        if holds && best {
            let why = "the closest line is the most favourable one, not the state of the rib";
            let finding = open_limit("kern", used, limit, "of d/6", at, &message, why)
                .remedy("declare the support of the rib ([rib] support), so that its own line can be judged");
            self.add(finding);
            return;
        }
        let mut finding = self.limit(Check::Kern, "[limits] kern", used, limit, "of d/6", at, holds, message);
        if !holds {
            finding = finding.remedy(self.deeper_or_moved(line, used / limit, at));
        }
        self.add(finding);
    }

    /// An elastic line outside the kern of a ring without tension.
    fn cracked(&mut self, at: Xy) {
        let finding = note(
            Check::NotJudged,
            "the elastic line leaves the kern of a ring without tension: joints would open there, and the line of the \
             uncracked rib is not valid",
        )
        .at(at)
        .uncheck()
        .remedy("judge it as a ring ([rib] support = \"none\"), or declare a section that takes tension");
        self.add(finding);
    }

    /// The greatest edge stress over the stations of the governing line.
    fn stress(&mut self, limit: f64) {
        let stations = &self.span.cases[self.case].lines[0].stations;
        let worst = stations
            .iter()
            .filter_map(|s| Some((s.stress_max?.max(-s.stress_min?), s.at)))
            .max_by(|a, b| a.0.total_cmp(&b.0));
        let complete = stations.iter().all(|s| s.stress_max.is_some());
        let Some((value, at)) = worst else {
            self.not_judged(
                "stress",
                "it needs forces in kN, the depth, the width, and a line inside the section",
            );
            return;
        };
        let holds = value <= limit * (1.0 + tolerance::LIMIT_MET);
        let best = self.best_case();
        let message = format!(
            "{}the greatest edge stress is {value:.2} MPa; limit {limit:.2} MPa",
            if best { "best case: " } else { "" }
        );
        if holds && (best || !complete) {
            let why = if best {
                "the closest line is the most favourable one, not the state of the rib"
            } else {
                "the line leaves the section, or its kern, at some joints"
            };
            self.add(open_limit("stress", value, limit, "MPa", at, &message, why));
            return;
        }
        let mut finding =
            self.limit(Check::Stress, "[limits] stress", value, limit, "MPa", at, holds, message);
        if !holds {
            finding = finding.remedy(format!("a deeper or wider section {}", self.near(at)));
        }
        self.add(finding);
    }

    /// The geometric factor is one over twice the use of the depth by the closest line; the limit is a least value.
    fn geometric_factor(&mut self, line: Option<&Line>, ratio: f64, at: Xy, limit: f64) {
        if ratio <= tolerance::FUNICULAR_USE {
            let mut finding = note(
                Check::GeometricFactor,
                format!(
                    "the axis is a funicular of the loads: the geometric factor has no bound; limit {limit:.2}"
                ),
            );
            finding.verdict = FindingVerdict::Within;
            finding.limit = Some(limit);
            finding.unit = Some("1".into());
            finding.basis = Some("[limits] geometric_factor".into());
            self.add(finding);
            return;
        }
        let factor = 1.0 / (2.0 * ratio);
        let holds = factor >= limit * (1.0 - tolerance::LIMIT_MET);
        let message = format!("geometric factor of safety {factor:.2}; at least {limit:.2} is wanted");
        let basis = "[limits] geometric_factor";
        let mut finding = self.limit(Check::GeometricFactor, basis, factor, limit, "1", at, holds, message);
        if !holds {
            finding = finding.remedy(match line {
                Some(line) => self.deeper_or_moved(line, limit / factor, at),
                None => format!("a depth of {:.2} times the present one {}", limit / factor, self.near(at)),
            });
        }
        self.add(finding);
    }

    /// The limit holds when the loads as drawn stand (the interval begins at or below 1) and its upper end reaches the
    /// limit. Where nothing varies but a train, that of the train is judged in its place.
    fn load_factor(&mut self, limit: f64, moving: bool) {
        let Some(safety) = &self.analysis.safety else {
            let why = match self.analysis.kind {
                SpanKind::Cable => "a cable has no load factor",
                SpanKind::Arch => "it needs a ring without tension whose depth is known",
            };
            return self.not_judged("load_factor", why);
        };
        let (Some(upper), Some(least)) = (&safety.load, &safety.load_least) else {
            if moving {
                return;
            }
            return self.not_judged(
                "load_factor",
                "nothing varies; name what varies in the case: vary = [\"LAYER\"]",
            );
        };
        let stands = matches!(least.status, Status::Found)
            && least.value.is_some_and(|v| v <= 1.0 + tolerance::LIMIT_MET);
        let at = safety
            .mechanism
            .as_ref()
            .and_then(|m| m.hinges.first())
            .map_or(spans::xy(self.analysis.crown), |h| spans::xy(h.at));
        let basis = "[limits] load_factor";
        match (upper.status, upper.value) {
            (Status::Found, Some(value)) => {
                let holds = stands && value >= limit * (1.0 - tolerance::LIMIT_MET);
                let least = least.value.unwrap_or(0.0);
                let message = format!(
                    "the varying loads can be multiplied by {least:.2} to {value:.2} before the ring becomes a \
                     mechanism; up to at least {limit:.2} is wanted"
                );
                let mut finding = self.limit(Check::LoadFactor, basis, value, limit, "1", at, holds, message);
                if !holds {
                    finding = finding
                        .remedy("a deeper ring, an axis nearer to the line of thrust, or less varying load");
                }
                self.add(finding);
            }
            (Status::Unbounded, _) => {
                let mut finding = note(
                    Check::LoadFactor,
                    format!("the varying loads can grow without end inside the ring; limit {limit:.2}"),
                );
                finding.verdict = if stands { FindingVerdict::Within } else { FindingVerdict::Outside };
                finding.limit = Some(limit);
                finding.unit = Some("1".into());
                finding.basis = Some(basis.into());
                self.add(finding);
            }
            (Status::None, _) => {
                let reason = upper.reason.clone().unwrap_or_default();
                let mut finding =
                    note(Check::LoadFactor, format!("no load factor: {reason}; limit {limit:.2}"));
                finding.verdict = FindingVerdict::Outside;
                finding.limit = Some(limit);
                finding.unit = Some("1".into());
                finding.basis = Some(basis.into());
                self.add(finding);
            }
            (Status::Refused | Status::Found, _) => {
                let reason = upper.reason.clone().unwrap_or_else(|| "it was not found".into());
                self.not_judged("load_factor", &reason);
            }
        }
    }

    #[allow(clippy::too_many_arguments)]
    fn limit(
        &self,
        check: Check,
        basis: &str,
        value: f64,
        limit: f64,
        unit: &str,
        at: Xy,
        holds: bool,
        message: String,
    ) -> Finding {
        let mut finding = note(check, message).value(value, unit).at(at);
        finding.limit = Some(limit);
        finding.basis = Some(basis.into());
        finding.verdict = if holds { FindingVerdict::Within } else { FindingVerdict::Outside };
        finding
    }

    fn side(&self, signed: f64) -> &'static str {
        match (self.analysis.kind, signed >= 0.0) {
            (SpanKind::Arch, true) => "toward the extrados",
            (SpanKind::Arch, false) => "toward the intrados",
            (SpanKind::Cable, true) => "above it",
            (SpanKind::Cable, false) => "below it",
        }
    }

    fn direction(&self, signed: f64) -> &'static str {
        if signed >= 0.0 { "upward, toward the line," } else { "downward, toward the line," }
    }

    /// What mends a line that takes `excess` times the part of the depth that it may: more depth, or an axis moved toward it
    /// there. To first order: the line moves with the axis and the depth.
    fn deeper_or_moved(&self, line: &Line, excess: f64, at: Xy) -> String {
        let mut words = format!("a depth of {excess:.2} times the present one {}", self.near(at));
        let far = |s: &&crate::statics::Station| (s.at.x - at[0]).hypot(s.at.y - at[1]);
        let station = line.stations.iter().min_by(|a, b| far(a).total_cmp(&far(b)));
        match station.and_then(|s| s.eccentricity) {
            Some(e) if e != 0.0 => words.push_str(&format!(
                ", or the axis moved there {} by at least {}",
                self.direction(e),
                length(e.abs() * (1.0 - 1.0 / excess))
            )),
            _ => words.push_str(", or an axis nearer to the line of thrust"),
        }
        words
    }

    /// The nearest load to a place, in words.
    fn near(&self, at: Xy) -> String {
        let distance = |load: &crate::outcome::Load| (load.at[0] - at[0]).hypot(load.at[1] - at[1]);
        let nearest = self.span.loads.iter().min_by(|a, b| distance(a).total_cmp(&distance(b)));
        match nearest {
            Some(load) => format!("at x = {:.2} m (load {} is nearest)", at[0], load.label),
            None => format!("at x = {:.2} m", at[0]),
        }
    }
}
