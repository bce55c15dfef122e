//! Factors over the ranges of inputs that are not known well: what limits are held against is their worst value.

use super::{Extra, With, length, note};
use crate::job::Settings;
use crate::outcome::{Check, Finding, FindingVerdict, RangedFactor, RangedValue, Ranges, Span, Status};
use crate::statics::{Analysis, Rule};
use crate::tolerance;

/// Holds one case of a span over its ranges; `findings` are those of this case at the values stated.
pub fn judge(
    extra: &Extra,
    analysis: &Analysis,
    span: &Span,
    settings: &Settings,
    first: bool,
    findings: &mut Vec<Finding>,
) {
    least_depth(extra, span, findings);
    let Some(ranges) = &extra.ranges else { return };
    let mut fresh = Vec::new();
    if first {
        inputs(ranges, &mut fresh);
    }
    let factor = |name: &str| ranges.factors.iter().find(|f| f.name == name);
    if let Some(geometric) = factor("geometric_factor") {
        fresh.push(told(geometric, Check::GeometricFactor, "geometric factor of safety", ranges));
        worsen(findings, Check::GeometricFactor, &geometric.worst, ranges, &|v, l| v >= l, "at least", "");
        // Ring use and kern use of the closest line are this factor seen in other ways.
        if analysis.rule == Rule::RingWithoutTension {
            let seen = |times: f64| RangedValue {
                value: geometric.worst.value.map(|g| times / g),
                ..geometric.worst.clone()
            };
            worsen(
                findings,
                Check::Ring,
                &seen(1.0),
                ranges,
                &|v, l| v <= l,
                "at most",
                " of the half depth",
            );
            worsen(
                findings,
                Check::Kern,
                &seen(3.0),
                ranges,
                &|v, l| v <= l,
                "at most",
                " of a sixth of the depth",
            );
        }
    }
    if let Some(load) = factor("load_factor") {
        fresh.push(told(load, Check::LoadFactor, "load factor", ranges));
        worsen(findings, Check::LoadFactor, &load.worst, ranges, &|v, l| v >= l, "at least", "");
    }
    if let Some(least) = factor("load_factor_least") {
        let stands = least.worst.value.is_some_and(|v| v <= 1.0 + tolerance::LIMIT_MET);
        let limit = findings.iter_mut().find(|f| f.check == Check::LoadFactor && f.limit.is_some());
        if let Some(finding) = limit.filter(|_| !stands && least.worst.status != Status::Refused) {
            finding.verdict = FindingVerdict::Outside;
            finding.message.push_str(&format!(
                ". Over the ranges the varying loads must at least be multiplied by {} for a line to lie inside the ring \
                 ({}): with the loads as drawn there is none",
                value(&least.worst),
                places(&least.worst, ranges)
            ));
        }
    }
    let limits = &settings.limits;
    let closest = analysis.rule == Rule::RingWithoutTension;
    let stated: Vec<&str> = [
        ("offset", limits.offset.is_some()),
        ("kern", limits.kern.is_some() && !closest),
        ("ring", limits.ring.is_some() && !closest),
        ("stress", limits.stress.is_some()),
    ]
    .into_iter()
    .filter_map(|(name, stated)| stated.then_some(name))
    .collect();
    if !stated.is_empty() {
        fresh.push(note(
            Check::LeftOut,
            format!(
                "the ranges give the worst factors; the stated limits on {} were judged at the values stated, not over the \
                 ranges",
                stated.join(", ")
            ),
        ));
    }
    findings.extend(fresh.into_iter().map(|f| f.of(&span.name)));
}

/// How thin the ring could be.
fn least_depth(extra: &Extra, span: &Span, findings: &mut Vec<Finding>) {
    let (Some(factor), Some(ring)) = (&extra.thickness, &span.ring) else { return };
    let finding = match factor.value {
        Some(k) => note(
            Check::GeometricFactor,
            format!(
                "the least ring that a line of thrust still fits into has {k:.3} times the depth known ({} where it is \
                 thinnest), its own weight shrinking with it; the geometric factor leaves the weight as it is",
                length(k * ring.depth_min)
            ),
        )
        .value(k * ring.depth_min, "m"),
        None => note(
            Check::GeometricFactor,
            format!("there is no least depth: {}", factor.reason.as_deref().unwrap_or("it was not found")),
        ),
    };
    findings.push(finding.of(&span.name));
}

/// What is to be said of the inputs themselves.
fn inputs(ranges: &Ranges, findings: &mut Vec<Finding>) {
    for input in &ranges.inputs {
        if let Some(why) = &input.idle {
            findings.push(
                note(Check::NotJudged, format!("the range over {} changes no factor: {why}", input.what))
                    .uncheck()
                    .remedy("remove the range, or give what it needs"),
            );
        } else if input.stated < input.low || input.stated > input.high {
            findings.push(note(
                Check::LeftOut,
                format!(
                    "{} is stated as {} {}, outside of its range from {} to {}: the lines are those of the stated value",
                    input.what, input.stated, input.unit, input.low, input.high
                ),
            ));
        }
    }
}

/// Worst and best of one factor in words.
fn told(factor: &RangedFactor, check: Check, name: &str, ranges: &Ranges) -> Finding {
    if factor.worst.status == Status::Refused {
        let why = factor.worst.reason.as_deref().unwrap_or("it was not found");
        return note(check, format!("over the ranges there is no {name}: {why}"));
    }
    let finding = note(
        check,
        format!(
            "over the ranges the {name} is {} at worst ({}; {}) and {} at best ({}; {})",
            value(&factor.worst),
            places(&factor.worst, ranges),
            found(&factor.worst),
            value(&factor.best),
            places(&factor.best, ranges),
            found(&factor.best),
        ),
    );
    match factor.worst.value {
        Some(worst) => finding.value(worst, "1"),
        None => finding,
    }
}

/// Holds the worst value against a limit that was held against the value stated.
fn worsen(
    findings: &mut [Finding],
    check: Check,
    worst: &RangedValue,
    ranges: &Ranges,
    holds: &dyn Fn(f64, f64) -> bool,
    wanted: &str,
    of: &str,
) {
    // Of several findings of one check only that which is held against something has a basis.
    let judged = |f: &&mut Finding| f.check == check && f.basis.is_some();
    let Some(finding) = findings.iter_mut().find(judged) else { return };
    let limit = finding.limit.unwrap_or(1.0);
    match (worst.status, worst.value) {
        (Status::Found, Some(value)) => {
            let slack = limit * tolerance::LIMIT_MET;
            let kept = holds(value, limit) || (value - limit).abs() <= slack;
            let as_stated = finding.value.map_or("without bound".to_owned(), |v| format!("{v:.2}"));
            if finding.value.is_some_and(|v| holds(v, value) && (v - value).abs() > slack)
                || finding.value.is_none()
            {
                finding.message = format!(
                    "over the ranges {value:.2}{of} at worst ({}); {wanted} {limit:.2} is wanted; at the values stated \
                     {as_stated}",
                    places(worst, ranges)
                );
                finding.value = Some(value);
                if finding.unit.is_none() {
                    finding.unit = Some("1".into());
                }
            }
            if !kept {
                finding.verdict = FindingVerdict::Outside;
                finding.unchecks = false;
                finding.remedy.get_or_insert_with(|| {
                    "find out more of the inputs that are not known well, or a deeper ring".into()
                });
            }
        }
        (Status::None, _) => {
            finding.verdict = FindingVerdict::Outside;
            finding.unchecks = false;
            finding.value = None;
            finding.message = format!(
                "over the ranges no line of thrust lies inside the ring at worst ({})",
                places(worst, ranges)
            );
        }
        (Status::Refused, _) => {
            let why = worst.reason.as_deref().unwrap_or("it was not found");
            finding.message.push_str(&format!(". It was not judged over the ranges: {why}"));
            finding.unchecks = true;
        }
        _ => {}
    }
}

fn value(value: &RangedValue) -> String {
    match (value.status, value.value) {
        (Status::Found, Some(v)) => format!("{v:.3}"),
        (Status::Unbounded, _) => "without bound".into(),
        _ => "none".into(),
    }
}

/// The inputs that give a value.
fn places(value: &RangedValue, ranges: &Ranges) -> String {
    if value.inputs.is_empty() {
        return "no range changes it".into();
    }
    let unit = |what: &str| ranges.inputs.iter().find(|i| i.what == what).map_or("", |i| i.unit.as_str());
    let each: Vec<String> = value
        .inputs
        .iter()
        .map(|(what, v)| format!("{what} = {} {}", figure(*v), unit(what)).trim_end().to_owned())
        .collect();
    each.join(", ")
}

/// A value of an input to six digits.
fn figure(v: f64) -> String {
    format!("{v:.5e}").parse::<f64>().unwrap_or(v).to_string()
}

fn found(value: &RangedValue) -> &'static str {
    if value.found == "corners" {
        "at a corner of the ranges, where it must lie"
    } else {
        "by sampling between their ends"
    }
}
