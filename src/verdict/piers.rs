//! The difference of the pushes of neighbouring spans on the pier between them.

use super::{With, note};
use crate::job::Settings;
use crate::outcome::{Check, Finding, FindingVerdict, PierPush, Span, Units};
use crate::tolerance;

/// Least and greatest push at the left and at the right end of a span, or why they are not known.
pub type Pushes = Result<[(f64, f64); 2], String>;

/// Puts the pier at the right end of each span into the results, for one case, and judges it. `pushes` are those of the spans
/// in their order.
pub fn judge(
    case: &str,
    pushes: &[Option<&Pushes>],
    settings: &Settings,
    units: &Units,
    spans: &mut [Span],
    findings: &mut Vec<Finding>,
) {
    let limit = settings.limits.pier_push;
    if spans.len() < 2 {
        if limit.is_some() {
            findings.push(not_judged("there is one span, and so no pier"));
        }
        return;
    }
    for i in 1..spans.len() {
        let next = spans[i].name.clone();
        let at = spans[i - 1].axis.right;
        let place = format!("on the pier between {} and {next}", spans[i - 1].name);
        let both = (pushes.get(i - 1).copied().flatten(), pushes.get(i).copied().flatten());
        let range = match both {
            (Some(Ok(left)), Some(Ok(right))) => Ok((left[1].0 - right[0].1, left[1].1 - right[0].0)),
            (Some(Err(why)), _) | (_, Some(Err(why))) => Err(why.clone()),
            _ => Err("no pushes are known".to_owned()),
        };
        let (least, greatest) = (range.as_ref().ok().map(|r| r.0), range.as_ref().ok().map(|r| r.1));
        let reason = range.as_ref().err().cloned();
        spans[i - 1].piers.push(PierPush { case: case.into(), next, least, greatest, reason });
        let mut finding = match (range, limit) {
            (Ok(range), limit) => told(range, limit, &place, units),
            (Err(why), Some(_)) => not_judged(&format!("{why} ({place})")),
            (Err(_), None) => continue,
        };
        finding.at = Some(at);
        findings.push(finding.of(&spans[i - 1].name));
    }
}

fn told((low, high): (f64, f64), limit: Option<f64>, place: &str, units: &Units) -> Finding {
    let worst = low.abs().max(high.abs());
    let best = if low <= 0.0 && high >= 0.0 { 0.0 } else { low.abs().min(high.abs()) };
    let one = (high - low).abs() <= worst * tolerance::LIMIT_MET;
    let force = &units.force;
    let size =
        if one { format!("{high:+.2} {force}") } else { format!("between {low:+.2} and {high:+.2} {force}") };
    let text = format!("the pushes {place} differ by {size}, to the right positive");
    let Some(limit) = limit else {
        return note(Check::PierPush, text).value(worst, force);
    };
    if units.stress.is_none() {
        return not_judged("forces are multiples of an unknown load");
    }
    let text = format!("{text}; limit {limit:.2} {force}");
    let slack = 1.0 + tolerance::LIMIT_MET;
    let mut finding = if worst <= limit * slack {
        Finding { verdict: FindingVerdict::Within, ..note(Check::PierPush, text) }
    } else if best > limit * slack {
        Finding { verdict: FindingVerdict::Outside, ..note(Check::PierPush, text) }
            .remedy("even out span, rise or load of the neighbours, or prove the pier for the difference")
    } else {
        note(
            Check::NotJudged,
            format!("{text}. The stated limit `pier_push` was not judged: it lies within what is possible"),
        )
        .uncheck()
        .remedy(
            "prove the pier for the greatest difference, or declare how the ribs are held ([rib] support)",
        )
    };
    finding.limit = Some(limit);
    finding.basis = Some("[limits] pier_push".into());
    finding.value(worst, force)
}

/// What is to be said of the limit where a train moves over several spans.
pub fn moving(train: &str) -> Finding {
    not_judged(&format!(
        "under {train} the pushes of each span are told, and not their difference on a pier, which takes the train on both at once"
    ))
    .remedy("prove the pier for the pushes told under the train, or take `pier_push` out")
}

fn not_judged(why: &str) -> Finding {
    note(Check::NotJudged, format!("the stated limit `pier_push` was not judged: {why}")).uncheck()
}
