//! Justified exceptions: a limit that does not hold and was accepted, with a reason, by someone, until a day.

use jiff::civil::Date;

use crate::job::{Exception, LimitCheck};
use crate::outcome::{Accepted, Check, Finding, FindingVerdict};

/// Turns findings that an exception covers into accepted ones; says why when an exception no longer covers.
pub fn exceptions(exceptions: &[Exception], today: Date, findings: &mut [Finding]) {
    for finding in findings.iter_mut().filter(|f| f.verdict == FindingVerdict::Outside) {
        let concerning: Vec<&Exception> = exceptions.iter().filter(|e| concerns(e, finding)).collect();
        for exception in concerning {
            let until = exception.until.map(|d| d.to_string());
            let Some(value) = finding.value else { continue };
            // A factor is accepted down to its value, everything else up to it.
            let least = matches!(finding.check, Check::GeometricFactor | Check::LoadFactor);
            let covered = if least { value >= exception.up_to } else { value <= exception.up_to };
            if exception.until.is_some_and(|d| d < today) {
                finding.message.push_str(&format!(
                    "; the exception accepted by {} ran out on {}",
                    exception.by,
                    until.unwrap_or_default()
                ));
            } else if !covered {
                finding.message.push_str(&format!(
                    "; beyond the exception of {} accepted by {}",
                    exception.up_to, exception.by
                ));
            } else {
                finding.verdict = FindingVerdict::Accepted;
                finding.accepted =
                    Some(Accepted { reason: exception.reason.clone(), by: exception.by.clone(), until });
                break;
            }
        }
    }
}

fn concerns(exception: &Exception, finding: &Finding) -> bool {
    let check = match exception.check {
        LimitCheck::Offset => Check::Offset,
        LimitCheck::Ring => Check::Ring,
        LimitCheck::Kern => Check::Kern,
        LimitCheck::Stress => Check::Stress,
        LimitCheck::GeometricFactor => Check::GeometricFactor,
        LimitCheck::LoadFactor => Check::LoadFactor,
        LimitCheck::PierPush => Check::PierPush,
        LimitCheck::Dimension => Check::Dimension,
    };
    let same = |wanted: &Option<String>, has: &Option<String>| wanted.is_none() || wanted == has;
    check == finding.check && same(&exception.span, &finding.span) && same(&exception.case, &finding.case)
}
