//! Results in the XML form that build servers read: a suite a drawing, a case a limit.
//!
//! A limit that does not hold is a failure of type `outside`; what keeps a drawing from being judged is a failure of type
//! `unchecked`; a drawing that could not be read is an error. An accepted exception passes and is listed in the suite's
//! `system-out`.

use std::collections::BTreeMap;
use std::fmt::Write as _;

use crate::outcome::{Document, Finding, FindingVerdict, Run, Verdict};
use crate::write::annotate::check_name;
use crate::write::picture::svg::escape;
use crate::write::text::{against_limit, metres, plain};

/// How a case ended.
enum End {
    Passed,
    Failed { kind: &'static str, message: String },
    Error { kind: String, message: String },
}

/// One test case.
struct Case {
    name: String,
    end: End,
    detail: String,
}

/// The document as XML. `date` is the UTC day of the run, `YYYY-MM-DD`.
pub fn xml(document: &Document, date: &str) -> String {
    let suites: Vec<(&Run, Vec<Case>)> = document.runs.iter().map(|run| (run, cases(run))).collect();
    let count = |wanted: fn(&End) -> bool, cases: &[Case]| cases.iter().filter(|c| wanted(&c.end)).count();
    let failed: fn(&End) -> bool = |end| matches!(end, End::Failed { .. });
    let error: fn(&End) -> bool = |end| matches!(end, End::Error { .. });
    let total =
        |wanted: fn(&End) -> bool| suites.iter().map(|(_, cases)| count(wanted, cases)).sum::<usize>();
    let mut out = String::from("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n");
    let _ = writeln!(
        out,
        "<testsuites name=\"{}\" tests=\"{}\" failures=\"{}\" errors=\"{}\" time=\"0\">",
        env!("CARGO_PKG_NAME"),
        total(|_| true),
        total(failed),
        total(error)
    );
    for (run, cases) in &suites {
        let file = attribute(&run.drawing.file);
        let _ = writeln!(
            out,
            "  <testsuite name=\"{file}\" timestamp=\"{date}T00:00:00\" tests=\"{}\" failures=\"{}\" errors=\"{}\" \
             skipped=\"0\" time=\"0\">",
            cases.len(),
            count(failed, cases),
            count(error, cases)
        );
        for case in cases {
            let _ = write!(
                out,
                "    <testcase classname=\"{file}\" name=\"{}\" time=\"0\"",
                attribute(&case.name)
            );
            let (tag, kind, message) = match &case.end {
                End::Passed => {
                    out.push_str("/>\n");
                    continue;
                }
                End::Failed { kind, message } => ("failure", (*kind).to_owned(), message),
                End::Error { kind, message } => ("error", kind.clone(), message),
            };
            let _ = writeln!(
                out,
                ">\n      <{tag} type=\"{}\" message=\"{}\">{}</{tag}>\n    </testcase>",
                attribute(&kind),
                attribute(message),
                escape(&lines(&case.detail))
            );
        }
        let accepted = accepted(run);
        if !accepted.is_empty() {
            let _ = writeln!(out, "    <system-out>{}</system-out>", escape(&accepted.join("\n")));
        }
        out.push_str("  </testsuite>\n");
    }
    out.push_str("</testsuites>\n");
    out
}

fn cases(run: &Run) -> Vec<Case> {
    if let Some(error) = &run.error {
        let end = End::Error { kind: error.check.clone(), message: error.message.clone() };
        return vec![Case { name: "reading".into(), end, detail: error.to_string() }];
    }
    let mut out: Vec<Case> = run.findings.iter().filter(|f| is_case(f)).map(case).collect();
    let failures = |wanted: &str| {
        out.iter().any(|case| matches!(&case.end, End::Failed { kind, .. } if *kind == wanted))
    };
    // The suite never passes where the run does not.
    let missing = match run.verdict {
        Some(Verdict::Within) => None,
        Some(Verdict::Outside) => (!failures("outside")).then_some("outside"),
        Some(Verdict::Unchecked) | None => (!failures("unchecked")).then_some("unchecked"),
    };
    if let Some(kind) = missing {
        let message = match kind {
            "outside" => "a stated limit does not hold",
            _ => "computed, not judged: no limit was stated",
        };
        let end = End::Failed { kind, message: message.into() };
        out.push(Case { name: "verdict".into(), end, detail: message.into() });
    }
    apart(&mut out);
    out
}

/// Numbers cases of one name, such as a limit held in a case and under each train on it: build servers keep one of a name, and
/// a failure could be lost behind a pass.
fn apart(cases: &mut [Case]) {
    let mut seen: BTreeMap<String, usize> = BTreeMap::new();
    for case in cases {
        let count = seen.entry(case.name.clone()).or_insert(0);
        *count += 1;
        if *count > 1 {
            case.name.push_str(&format!(" ({count})"));
        }
    }
}

/// Limits that were held against a value, and what keeps the run from being judged; plain notes are none.
fn is_case(finding: &Finding) -> bool {
    finding.unchecks || finding.verdict != FindingVerdict::Note
}

fn case(finding: &Finding) -> Case {
    let place = [&finding.span, &finding.case].into_iter().flatten();
    let name: Vec<&str> = place.map(String::as_str).collect();
    let mut name = name.join(", ");
    name.insert_str(0, if name.is_empty() { "" } else { ", " });
    name.insert_str(0, &check_name(finding.check));
    let message = match against_limit(finding) {
        Some(figures) if finding.limit.is_some() => format!("{}: {}", finding.message, figures),
        _ => finding.message.clone(),
    };
    let end = match finding.verdict {
        FindingVerdict::Outside => End::Failed { kind: "outside", message },
        _ if finding.unchecks => End::Failed { kind: "unchecked", message },
        _ => End::Passed,
    };
    Case { name, end, detail: detail(finding) }
}

/// Everything that helps to mend it, a line each.
fn detail(finding: &Finding) -> String {
    let mut lines = vec![finding.message.clone()];
    if let Some(at) = finding.at {
        lines.push(format!("at x {} m, y {} m", metres(at[0]), metres(at[1])));
    }
    if let Some(basis) = &finding.basis {
        lines.push(format!("basis: {basis}"));
    }
    if let Some(entity) = &finding.entity {
        let handle = entity.handle.as_deref().unwrap_or("without handle");
        lines.push(format!("entity: {} {handle} on {}", entity.kind, entity.layer));
    }
    if let Some(remedy) = &finding.remedy {
        lines.push(format!("to mend: {remedy}"));
    }
    lines.join("\n")
}

fn accepted(run: &Run) -> Vec<String> {
    run.findings
        .iter()
        .filter(|f| f.verdict == FindingVerdict::Accepted)
        .map(|f| {
            let mut words = format!("accepted: {}", plain(&f.message));
            if let Some(accepted) = &f.accepted {
                words.push_str(&format!("; {} by {}", plain(&accepted.reason), plain(&accepted.by)));
                if let Some(until) = &accepted.until {
                    words.push_str(&format!(" until {until}"));
                }
            }
            words
        })
        .collect()
}

/// Text of an attribute: one line.
fn attribute(text: &str) -> String {
    escape(&plain(text))
}

/// Control characters told, line by line.
fn lines(text: &str) -> String {
    text.lines().map(plain).collect::<Vec<_>>().join("\n")
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::outcome::{Accepted, Check};
    use crate::write::sample;

    #[test]
    fn outside_unchecked_error_accepted() {
        let mut accepted = sample::arch(5, 30.0, 6.0).limited(9.0).run();
        accepted.findings[0].verdict = FindingVerdict::Accepted;
        accepted.findings[0].accepted =
            Some(Accepted { reason: "old <ring>\u{1b}".into(), by: "the office".into(), until: None });
        let mut hostile = sample::refused();
        hostile.drawing.file = "a\"<&>\u{0}\u{7}\n.dxf".into();
        let text = xml(
            &sample::document(vec![
                sample::arch(5, 30.0, 6.0).limited(9.0).run(),
                sample::arch(5, 30.0, 6.0).limited(0.001).run(),
                sample::arch(5, 30.0, 6.0).run(),
                hostile,
                accepted,
            ]),
            "2026-03-01",
        );
        assert_eq!(text.matches("<failure type=\"outside\"").count(), 1, "{text}");
        assert_eq!(text.matches("<failure type=\"unchecked\"").count(), 1, "{text}");
        assert_eq!(text.matches("<error ").count(), 1, "{text}");
        assert!(text.contains("<system-out>accepted: "), "{text}");
        assert!(text.contains("old &lt;ring&gt;\\x1b by the office"), "{text}");
        assert!(text.contains("failures=\"2\" errors=\"1\""), "{text}");
        assert!(text.chars().all(|c| c == '\n' || !c.is_control()));
    }

    #[test]
    fn a_run_that_was_not_judged_never_passes() {
        let mut run = sample::arch(5, 30.0, 6.0).run();
        run.findings.retain(|f| f.check == Check::LeftOut);
        let text = xml(&sample::document(vec![run]), "2026-03-01");
        assert!(text.contains("name=\"verdict\"") && text.contains("type=\"unchecked\""), "{text}");
    }
}
