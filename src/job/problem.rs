//! What is wrong in a job file, and how many such things become one refusal.

use std::path::Path;

use crate::refusal::Refusal;

/// How many further problems a refusal names before it only counts them.
const NAMED: usize = 8;

/// One thing that is wrong.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Problem {
    /// Name of the refusal.
    pub check: &'static str,
    /// Line, counted from 1.
    pub line: u64,
    /// What is wrong, as a sentence without its full stop.
    pub message: String,
    /// How to mend it, as a sentence without its full stop.
    pub remedy: String,
}

impl Problem {
    /// As a refusal of its own.
    pub(super) fn refusal(self, file: Option<&Path>) -> Refusal {
        let refusal = Refusal::new(self.check, self.message, self.remedy + ".").at_line(self.line);
        match file {
            Some(file) => refusal.in_file(file),
            None => refusal,
        }
    }
}

/// One refusal for all problems of a file: the first in the order of lines, with the others named behind it. `None`
/// when there are none.
pub(super) fn combine(mut problems: Vec<Problem>, file: Option<&Path>) -> Option<Refusal> {
    problems.sort_by_key(|problem| problem.line);
    let mut problems = problems.into_iter();
    let mut first = problems.next()?;
    let rest: Vec<_> = problems.collect();
    if !rest.is_empty() {
        let mut named: Vec<String> = rest
            .iter()
            .take(NAMED)
            .map(|problem| format!("line {}: {}", problem.line, problem.message))
            .collect();
        if rest.len() > NAMED {
            named.push(format!("and {} more", rest.len() - NAMED));
        }
        first.message = format!("{} (also {})", first.message, named.join("; "));
    }
    Some(first.refusal(file))
}
