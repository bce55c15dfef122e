//! Figures of the results that differ, and what became of the checks.

use std::collections::BTreeMap;

use super::{Change, What, same, same_length};
use crate::outcome::{Case, FindingVerdict, Line, Run, Span, Status, Units};
use crate::write::annotate::{check_name, kind_name};
use crate::write::text::{force, millimetres, three_digits};

/// All changes of the results of a span, case by case.
pub fn results(old: &Span, new: &Span, units: &Units, found: &mut Vec<Change>) {
    let several = new.cases.len() > 1 || old.cases.len() > 1;
    for case in &new.cases {
        let place = if several { format!("{}, case {}", new.name, case.name) } else { new.name.clone() };
        let Some(before) = old.cases.iter().find(|c| c.name == case.name) else {
            let words = format!("{place}: this case is new");
            found.push(Change::new(What::Result, words).of(&new.name).named(&case.name));
            continue;
        };
        one(&Place { words: &place, span: &new.name, units }, before, case, found);
    }
    for case in old.cases.iter().filter(|c| new.cases.iter().all(|n| n.name != c.name)) {
        let words = format!("{}: the case {} is gone", new.name, case.name);
        found.push(Change::new(What::Result, words).of(&new.name).named(&case.name));
    }
}

/// Where results stand, in words.
struct Place<'a> {
    words: &'a str,
    span: &'a str,
    units: &'a Units,
}

impl Place<'_> {
    fn change(&self, name: &str, words: &str) -> Change {
        Change::new(What::Result, format!("{}: {words}", self.words)).of(self.span).named(name)
    }
}

fn one(place: &Place, old: &Case, new: &Case, found: &mut Vec<Change>) {
    if old.governs != new.governs {
        let (was, is) = (kind_name(old.governs), kind_name(new.governs));
        let words = format!("the line {is} governs now, it was the line {was}");
        found.push(place.change("governs", &words).values(was, is, ""));
    }
    let scale = old.total_load[0].hypot(old.total_load[1]);
    for line in &new.lines {
        if let Some(before) = old.lines.iter().find(|l| l.kind == line.kind) {
            lines(place, before, line, scale, found);
        }
    }
    factors(place, old, new, found);
}

fn lines(place: &Place, old: &Line, new: &Line, scale: f64, found: &mut Vec<Change>) {
    let kind = kind_name(new.kind);
    if old.status != new.status {
        let word = |status: Status| match status {
            Status::Found => "found",
            Status::None => "none",
            Status::Unbounded => "unbounded",
            Status::Refused => "refused",
            Status::NotAsked => "not asked",
        };
        let words = format!("line {kind}: {} now, was {}", word(new.status), word(old.status));
        found.push(place.change("status", &words).values(word(old.status), word(new.status), ""));
    }
    if let (Some(was), Some(is)) = (&old.offset, &new.offset)
        && !same_length(was.max_abs, is.max_abs)
    {
        let words = format!(
            "line {kind}: largest offset {} mm, was {} mm",
            millimetres(is.max_abs),
            millimetres(was.max_abs)
        );
        found.push(place.change("offset", &words).at(is.at).values(was.max_abs, is.max_abs, "m"));
    }
    for (side, was, is) in [("left", &old.left, &new.left), ("right", &old.right, &new.right)] {
        let (Some(was), Some(is)) = (was, is) else { continue };
        for (name, words, was, is) in [
            ("horizontal", "push", was.horizontal, is.horizontal),
            ("vertical", "reaction", was.vertical, is.vertical),
        ] {
            if !same(was, is, scale) {
                let units = place.units;
                let words =
                    format!("line {kind}: {side} {words} {}, was {}", force(is, units), force(was, units));
                found.push(place.change(&format!("{side}.{name}"), &words).values(was, is, &units.force));
            }
        }
    }
}

fn factors(place: &Place, old: &Case, new: &Case, found: &mut Vec<Change>) {
    let figures = |case: &Case| {
        let safety = case.safety.as_ref();
        [
            ("geometric factor", "", safety.and_then(|s| s.geometric_factor)),
            ("load factor", "", safety.and_then(|s| s.load_factor)),
            ("least depth", "m", safety.and_then(|s| s.least_depth)),
        ]
    };
    for ((name, unit, was), (_, _, is)) in figures(old).into_iter().zip(figures(new)) {
        let unchanged = match (was, is) {
            (Some(was), Some(is)) => same(was, is, 0.0),
            (was, is) => was.is_none() && is.is_none(),
        };
        if !unchanged {
            let word = |v: Option<f64>| {
                v.map_or("none".to_owned(), |v| {
                    format!("{}{}", three_digits(v), if unit == "m" { " m" } else { "" })
                })
            };
            let words = format!("{name} {}, was {}", word(is), word(was));
            found.push(place.change(name, &words).values(was, is, unit));
        }
    }
}

/// What became of each check: of those that were held against a limit, and of those that keep a run from being judged.
pub fn findings(old: &Run, new: &Run, found: &mut Vec<Change>) {
    let became = |run: &Run| {
        let mut all: BTreeMap<_, Vec<&'static str>> = BTreeMap::new();
        for finding in &run.findings {
            let word = match finding.verdict {
                FindingVerdict::Outside => "outside",
                FindingVerdict::Within => "within",
                FindingVerdict::Accepted => "accepted",
                FindingVerdict::Note if finding.unchecks => "not judged",
                FindingVerdict::Note => continue,
            };
            let key = (finding.check, finding.span.clone(), finding.case.clone(), finding.basis.clone());
            all.entry(key).or_default().push(word);
        }
        all.values_mut().for_each(|words| {
            words.sort_unstable();
            words.dedup();
        });
        all
    };
    let (before, after) = (became(old), became(new));
    let mut keys: Vec<_> = before.keys().chain(after.keys()).collect();
    keys.sort();
    keys.dedup();
    for key in keys {
        let word =
            |words: Option<&Vec<&'static str>>| words.map_or("not there".to_owned(), |w| w.join(" and "));
        let (was, is) = (word(before.get(key)), word(after.get(key)));
        if was == is {
            continue;
        }
        let (check, span, case, _) = key;
        let place = [span.as_deref(), case.as_deref()].into_iter().flatten().collect::<Vec<_>>().join(", ");
        let place = if place.is_empty() { String::new() } else { format!("{place}: ") };
        let mut change =
            Change::new(What::Finding, format!("{place}{} is {is} now, was {was}", check_name(*check)))
                .named(&check_name(*check))
                .values(was, is, "");
        change.span.clone_from(span);
        found.push(change);
    }
}
