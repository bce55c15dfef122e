//! The summary that a person reads in ten seconds: the verdict and the worst thing first, then what was computed, what was
//! assumed, and where the copy went.

use crate::outcome::{Check, Document, Finding, FindingVerdict, Line, Load, Run, Span, Verdict};
use crate::write::annotate::{CAUTION, check_name, governing, heading, kind_name, worst_case};
use crate::write::text::{self, against_limit, columns, force, four_digits, metres, plain, wrap};
use crate::write::us;

/// How the summary is set.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Style {
    /// Columns of the terminal; less than 40 counts as 40.
    pub width: usize,
    /// Whether to use colours. `NO_COLOR` and whether this is a terminal are the caller's to ask.
    pub colour: bool,
    /// Every load with its handle, every finding.
    pub verbose: bool,
}

impl Default for Style {
    fn default() -> Self {
        Self { width: 80, colour: false, verbose: false }
    }
}

/// Columns of the names that stand before each line.
const NAMES: usize = 11;

/// The summary of all drawings, with a newline at the end. One drawing is told at length, several on a line each, the worst
/// first (with `verbose` at length too).
pub fn summary(document: &Document, style: &Style) -> String {
    let document = &*us::told(document);
    let mut out = Page { text: String::new(), width: style.width.max(40), colour: style.colour };
    match document.runs.as_slice() {
        [] => out.line("No drawing was found."),
        [run] => one(run, style.verbose, &mut out),
        runs => {
            several(runs, &mut out);
            if style.verbose {
                for run in runs {
                    out.line("");
                    one(run, true, &mut out);
                }
            }
        }
    }
    if document.runs.iter().any(|r| r.error.is_none()) {
        out.paragraph("", CAUTION);
    }
    out.text
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Rank {
    Refused,
    Outside,
    Unchecked,
    Within,
}

fn rank(run: &Run) -> Rank {
    match (&run.error, run.verdict) {
        (Some(_), _) => Rank::Refused,
        (None, Some(Verdict::Outside)) => Rank::Outside,
        (None, Some(Verdict::Within)) => Rank::Within,
        (None, Some(Verdict::Unchecked) | None) => Rank::Unchecked,
    }
}

impl Rank {
    fn word(self) -> &'static str {
        match self {
            Self::Refused => "not read",
            Self::Outside => "outside",
            Self::Unchecked => "not checked",
            Self::Within => "within",
        }
    }

    /// Red, yellow and green only add to words that say the same.
    fn code(self) -> &'static str {
        match self {
            Self::Refused | Self::Outside => "31",
            Self::Unchecked => "33",
            Self::Within => "32",
        }
    }
}

fn several(runs: &[Run], out: &mut Page) {
    let mut order: Vec<&Run> = runs.iter().collect();
    order.sort_by_key(|run| rank(run));
    let counts = [Rank::Refused, Rank::Outside, Rank::Unchecked, Rank::Within]
        .into_iter()
        .filter_map(|r| {
            let n = runs.iter().filter(|run| rank(run) == r).count();
            (n > 0).then(|| format!("{n} {}", r.word()))
        })
        .collect::<Vec<_>>()
        .join(", ");
    out.line(&format!("{} drawings: {counts}", runs.len()));
    for run in order {
        let r = rank(run);
        let mut words = plain(&run.drawing.file);
        let detail = match &run.error {
            Some(error) => error.to_string(),
            None => worst(run).map(|f| worst_words(run, f)).unwrap_or_default(),
        };
        if !detail.is_empty() {
            words.push_str(": ");
            words.push_str(&plain(&detail));
        }
        out.entry(r.word(), Some(r.code()), &words);
    }
}

fn one(run: &Run, verbose: bool, out: &mut Page) {
    let r = rank(run);
    if let Some(error) = &run.error {
        out.heading("NOT READ", r.code(), &run.drawing.file);
        let mut place = String::new();
        if let Some(file) = &error.file {
            place.push_str(&format!("{file}: "));
        }
        if let Some(line) = error.line {
            place.push_str(&format!("line {line}: "));
        }
        out.entry("why", None, &format!("{place}{}", error.message));
        let at = [("layer", &error.layer), ("handle", &error.handle)]
            .into_iter()
            .filter_map(|(name, value)| value.as_ref().map(|v| format!("{name} {v}")))
            .collect::<Vec<_>>()
            .join(", ");
        out.optional("at", &at);
        out.optional("to mend", &error.remedy);
        return;
    }
    out.heading(heading(run), r.code(), &run.drawing.file);
    if let Some(finding) = worst(run) {
        out.entry(worst_name(finding), Some(r.code()), &worst_words(run, finding));
        out.optional("to mend", finding.remedy.as_deref().unwrap_or(""));
    }
    let more = run.findings.iter().filter(|f| f.verdict == FindingVerdict::Outside).count().saturating_sub(1);
    if more > 0 && !verbose {
        let words = if more == 1 {
            "1 more limit does not hold".to_owned()
        } else {
            format!("{more} more limits do not hold")
        };
        out.entry("", None, &format!("{words}; --verbose lists all"));
    }
    for span in &run.spans {
        span_lines(run, span, out);
    }
    let mut named = "";
    for finding in run.findings.iter().filter(|f| matters(f)) {
        if worst(run).is_some_and(|w| std::ptr::eq(w, finding)) {
            continue;
        }
        let name = match finding.verdict {
            FindingVerdict::Accepted => "accepted",
            _ if finding.unchecks => "unchecked",
            _ => "note",
        };
        out.entry(if name == named { "" } else { name }, None, &said(finding));
        named = name;
    }
    if verbose {
        for span in &run.spans {
            loads(run, span, out);
        }
        for finding in &run.findings {
            out.entry(verdict_word(finding), None, &in_full(run, finding));
        }
    }
    if let Some(output) = &run.output {
        out.entry("copy", None, output);
    }
}

/// The finding told first: the first limit that does not hold, else the first that keeps the run from being judged, else
/// the limit that is nearest to being reached.
fn worst(run: &Run) -> Option<&Finding> {
    let used = |f: &&Finding| match (f.value, f.limit) {
        (Some(v), Some(l)) if v != 0.0 && l != 0.0 => {
            let part = v / l;
            // Of factors the least is the worst, of sizes the largest.
            if least_counts(f.check) { 1.0 / part } else { part }
        }
        _ => 0.0,
    };
    let find = |wanted: fn(&&Finding) -> bool| run.findings.iter().find(wanted);
    find(|f| f.verdict == FindingVerdict::Outside).or_else(|| find(|f| f.unchecks)).or_else(|| {
        run.findings
            .iter()
            .filter(|f| f.verdict == FindingVerdict::Within)
            .max_by(|a, b| used(a).total_cmp(&used(b)))
    })
}

/// Whether a limit is the least allowed and not the largest.
fn least_counts(check: Check) -> bool {
    matches!(check, Check::GeometricFactor | Check::LoadFactor)
}

fn worst_name(finding: &Finding) -> &'static str {
    match finding.verdict {
        FindingVerdict::Outside => "worst",
        FindingVerdict::Within => "nearest",
        _ => "because",
    }
}

/// What, where, how far outside.
fn worst_words(run: &Run, finding: &Finding) -> String {
    let Some(figures) = against_limit(finding) else {
        return said(finding);
    };
    let mut words = format!("{} {figures}", check_name(finding.check));
    if finding.verdict == FindingVerdict::Outside
        && let (Some(value), Some(limit)) = (finding.value, finding.limit)
    {
        let by = text::quantity((value - limit).abs(), finding.unit.as_deref());
        let side = if value < limit { "short of" } else { "beyond" };
        words.push_str(&format!(": {by} {side} it"));
    }
    words.push_str(&place(run, finding));
    words
}

/// Where a finding lies; span and case only where there are several.
fn place(run: &Run, finding: &Finding) -> String {
    let mut words = String::new();
    if let Some(at) = finding.at {
        let (m, _) = text::length_units(&run.units);
        words.push_str(&format!(", at x {} {m}, y {} {m}", metres(at[0]), metres(at[1])));
    }
    if run.spans.len() > 1
        && let Some(span) = &finding.span
    {
        words.push_str(&format!(", {span}"));
    }
    if run.spans.iter().any(|s| s.cases.len() > 1)
        && let Some(case) = &finding.case
    {
        words.push_str(&format!(", case {case}"));
    }
    words
}

fn said(finding: &Finding) -> String {
    let mut words = finding.message.clone();
    if let Some(entity) = &finding.entity
        && let Some(handle) = &entity.handle
        && !words.contains(handle.as_str())
    {
        words.push_str(&format!(" ({} {handle} on {})", entity.kind, entity.layer));
    }
    words
}

/// Findings worth a line without `verbose`: what keeps the run from being judged, exceptions, and assumptions.
fn matters(finding: &Finding) -> bool {
    finding.unchecks
        || finding.verdict == FindingVerdict::Accepted
        || (finding.verdict == FindingVerdict::Note
            && !matches!(finding.check, Check::Equilibrium | Check::PassedOver))
}

fn verdict_word(finding: &Finding) -> &'static str {
    match finding.verdict {
        FindingVerdict::Outside => "outside",
        FindingVerdict::Accepted => "accepted",
        FindingVerdict::Within => "within",
        FindingVerdict::Note if finding.unchecks => "unchecked",
        FindingVerdict::Note => "note",
    }
}

fn in_full(run: &Run, finding: &Finding) -> String {
    let mut words = format!("{}: {}", check_name(finding.check), said(finding));
    if let Some(figures) = against_limit(finding) {
        words.push_str(&format!(" [{figures}]"));
    }
    words.push_str(&place(run, finding));
    if let Some(basis) = &finding.basis {
        words.push_str(&format!("; basis {basis}"));
    }
    if let Some(accepted) = &finding.accepted {
        words.push_str(&format!("; accepted by {}: {}", accepted.by, accepted.reason));
        if let Some(until) = &accepted.until {
            words.push_str(&format!(" (until {until})"));
        }
    }
    if let Some(remedy) = &finding.remedy {
        words.push_str(&format!(" {remedy}"));
    }
    words
}

fn span_lines(run: &Run, span: &Span, out: &mut Page) {
    let (m, mm) = text::length_units(&run.units);
    let case = worst_case(run, span);
    let line = case.and_then(governing);
    let total = span.loads.iter().fold((0.0_f64, 0.0_f64), |t, l| (t.0 + l.force[0], t.1 + l.force[1]));
    let mut words = format!(
        "{} of span {} {m}, {} {} {m}; {} load{}, {}",
        span.kind,
        metres(span.axis.span),
        if span.kind == "cable" { "sag" } else { "rise" },
        metres(span.axis.rise.abs()),
        span.loads.len(),
        if span.loads.len() == 1 { "" } else { "s" },
        force(total.0.hypot(total.1), &run.units),
    );
    if let Some(Line { left: Some(left), right: Some(right), .. }) = line {
        words.push_str(&format!(
            "; H {}, V {} left, {} right",
            force(left.horizontal, &run.units),
            four_digits(left.vertical),
            four_digits(right.vertical)
        ));
    }
    out.entry(&span.name, None, &words);
    let Some(case) = case else { return };
    match line {
        Some(line) => {
            let mut words = format!("{} ({})", kind_name(line.kind), case.governs_why);
            if span.cases.len() > 1 {
                words.push_str(&format!(", worst case {} of {}", case.name, span.cases.len()));
            }
            out.entry("line", None, &words);
            if let Some(offset) = &line.offset {
                let toward = if offset.signed < 0.0 { "intrados" } else { "extrados" };
                out.entry(
                    "offset",
                    None,
                    &format!(
                        "largest {} {mm} toward the {toward}, at x {} {m}, y {} {m}",
                        text::small(offset.max_abs, &run.units),
                        metres(offset.at[0]),
                        metres(offset.at[1])
                    ),
                );
            }
        }
        None => {
            let reason = case
                .lines
                .iter()
                .find(|l| l.kind == case.governs)
                .and_then(|l| l.reason.clone())
                .unwrap_or_else(|| "none was found".into());
            out.entry("line", None, &format!("{}: {reason}", kind_name(case.governs)));
        }
    }
}

/// Every load on a line: name, spaces, place, force, and the entity it was read from.
fn loads(run: &Run, span: &Span, out: &mut Page) {
    let mut name = format!("loads, {}", span.name);
    if columns(&name) >= NAMES {
        name = "loads".into();
    }
    for load in &span.loads {
        out.entry(&name, None, &load_words(run, load));
        name.clear();
    }
    let (m, _) = text::length_units(&run.units);
    for area in &span.areas {
        let at = area.at.map_or_else(String::new, |at| format!(" at x {}", metres(at[0])));
        let words = format!(
            "{}: {} pieces, {} {m}², {} in all{at}",
            area.name,
            area.pieces,
            four_digits(area.area),
            force(area.weight, &run.units)
        );
        out.entry("stands on it", None, &words);
    }
}

fn load_words(run: &Run, load: &Load) -> String {
    let from = serde_json::to_value(load.magnitude_from)
        .ok()
        .and_then(|v| v.as_str().map(|s| s.replace('-', " ")))
        .unwrap_or_default();
    let mut words = format!(
        "{} ({} {}) at x {}, y {}: ",
        load.label,
        load.space[0],
        load.space[1],
        metres(load.at[0]),
        metres(load.at[1])
    );
    if load.force[0] == 0.0 {
        let down = load.force[1] <= 0.0;
        words.push_str(&format!(
            "{} {}",
            force(load.force[1].abs(), &run.units),
            if down { "down" } else { "up" }
        ));
    } else {
        words.push_str(&format!(
            "{} right, {} up",
            four_digits(load.force[0]),
            force(load.force[1], &run.units)
        ));
    }
    words.push_str(&format!(
        "; {} {} on {}, magnitude from {from}",
        load.source.kind,
        load.source.handle.as_deref().unwrap_or("without handle"),
        load.source.layer
    ));
    if let Some(text) = &load.text {
        words.push_str(&format!(" \"{text}\""));
    }
    if let Some(application) = &load.application {
        words.push_str(&format!(" of {application}"));
    }
    if let Some(post) = &load.post {
        words.push_str(&format!(", down the post {}", post.handle.as_deref().unwrap_or(&post.kind)));
    }
    if let Some(sideways) = load.sideways {
        words.push_str(&format!(", {} beside the rib", metres(sideways)));
    }
    if let Some(sense) = load.sense {
        words.push_str(&format!(", {}", sense.words()));
    }
    words
}

/// Lines set to a width. All that comes in is freed of control characters here, in one place.
struct Page {
    text: String,
    width: usize,
    colour: bool,
}

impl Page {
    fn line(&mut self, text: &str) {
        self.text.push_str(&plain(text));
        self.text.push('\n');
    }

    fn painted(&self, text: &str, code: &str) -> String {
        if self.colour { format!("\u{1b}[1;{code}m{text}\u{1b}[0m") } else { text.to_owned() }
    }

    fn heading(&mut self, head: &str, code: &str, file: &str) {
        let head = self.painted(head, code);
        self.text.push_str(&format!("{head}  {}\n", plain(file)));
    }

    fn optional(&mut self, name: &str, words: &str) {
        if !words.is_empty() {
            self.entry(name, None, words);
        }
    }

    /// A name and its words, indented alike on each line.
    fn entry(&mut self, name: &str, code: Option<&str>, words: &str) {
        let name = plain(name);
        let indent = NAMES + 2;
        let pad = " ".repeat(indent.saturating_sub(columns(&name) + 2).max(1));
        let painted = code.map_or_else(|| name.clone(), |c| self.painted(&name, c));
        let lines = wrap(&plain(words), self.width.saturating_sub(indent + 1));
        for (i, line) in lines.iter().enumerate() {
            if i == 0 {
                self.text.push_str(&format!("  {painted}{pad}{line}\n"));
            } else {
                self.text.push_str(&format!("{}{line}\n", " ".repeat(indent)));
            }
        }
    }

    fn paragraph(&mut self, indent: &str, words: &str) {
        for line in wrap(words, self.width.saturating_sub(1)) {
            self.text.push_str(&format!("{indent}{line}\n"));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::sample;

    fn told(runs: Vec<Run>, style: &Style) -> String {
        summary(&sample::document(runs), style)
    }

    #[test]
    fn worst_thing_first() {
        let mut sample = sample::arch(5, 30.0, 6.0).limited(0.05);
        sample.shift = [0.0, 0.0, 0.3];
        let text = told(vec![sample.run()], &Style::default());
        let lines: Vec<&str> = text.lines().collect();
        assert_eq!(lines[0], "OUTSIDE A STATED LIMIT  bridge.dxf");
        assert!(lines[1].starts_with("  worst      offset ") && lines[1].contains("limit 50 mm"), "{text}");
        assert!(text.contains("beyond it, at x ") && text.contains("  to mend    Lower the axis"), "{text}");
        assert!(text.contains("  copy       bridge.thrust.dxf\n"), "{text}");
        assert!(text.contains("qualified engineer"));
        assert!(!text.contains('\u{1b}'));
    }

    #[test]
    fn unchecked_says_so_and_why() {
        let text = told(vec![sample::arch(5, 30.0, 6.0).unit_loads().run()], &Style::default());
        assert!(text.starts_with("SHAPE ONLY, NOT CHECKED  bridge.dxf\n"), "{text}");
        assert!(text.contains("  because    No limit is stated"), "{text}");
        assert!(text.contains("unit loads"), "{text}");
    }

    #[test]
    fn fits_every_width_and_never_says_safe() {
        for width in [40, 60, 80, 132] {
            for run in [
                sample::arch(5, 30.0, 6.0).limited(0.5).run(),
                sample::arch(5, 30.0, 6.0).limited(0.0001).run(),
                sample::arch(12, 30.0, -6.0).run(),
                sample::refused(),
            ] {
                let style = Style { width, verbose: true, ..Style::default() };
                let text = told(vec![run], &style);
                for line in text.lines().skip(1) {
                    assert!(columns(line) <= width, "{width}: {line}");
                }
                assert!(!text.to_lowercase().contains("safe"), "{text}");
            }
        }
    }

    #[test]
    fn several_drawings_worst_first() {
        let named = |mut run: Run, name: &str| {
            run.drawing.file = name.into();
            run
        };
        let runs = vec![
            named(sample::arch(5, 30.0, 6.0).limited(9.0).run(), "good.dxf"),
            named(sample::arch(5, 30.0, 6.0).run(), "shape.dxf"),
            named(sample::arch(5, 30.0, 6.0).limited(0.001).run(), "bad.dxf"),
            sample::refused(),
        ];
        let text = told(runs, &Style { width: 200, ..Style::default() });
        let lines: Vec<&str> = text.lines().collect();
        assert_eq!(lines[0], "4 drawings: 1 not read, 1 outside, 1 not checked, 1 within");
        for (line, file) in lines[1..].iter().zip(["broken.dxf", "bad.dxf", "shape.dxf", "good.dxf"]) {
            assert!(line.contains(file), "{text}");
        }
    }

    #[test]
    fn nothing_in_a_drawing_steers_the_terminal() {
        let mut run = sample::arch(2, 30.0, 6.0).run();
        run.drawing.file = "a\u{1b}]0;x\u{7}.dxf".into();
        run.spans[0].loads[0].label = "P\u{1b}[2J".into();
        run.spans[0].loads[1].source.layer = "L\u{202e}".into();
        run.findings[0].message = "m\r\nsecond".into();
        run.output = Some("out\u{9b}31m".into());
        for runs in [vec![run.clone()], vec![run.clone(), run]] {
            let text = told(runs, &Style { verbose: true, ..Style::default() });
            assert!(text.chars().all(|c| c == '\n' || !c.is_control()), "{text:?}");
            assert!(!text.contains('\u{202e}') && text.contains("\\x1b"));
        }
    }

    #[test]
    fn verbose_names_every_load_by_its_handle() {
        let text = told(vec![sample::arch(7, 30.0, 6.0).run()], &Style { verbose: true, ..Style::default() });
        for i in 0..7 {
            assert!(text.contains(&format!("POINT {:X}", 0x40 + i)), "{text}");
        }
    }

    #[test]
    fn colours_only_when_asked() {
        let runs = vec![sample::arch(7, 30.0, 6.0).run()];
        let style = Style { colour: true, ..Style::default() };
        let painted = told(runs.clone(), &style);
        assert!(painted.starts_with("\u{1b}[1;33mSHAPE ONLY, NOT CHECKED\u{1b}[0m  bridge.dxf\n"));
        let bare = painted.replace("\u{1b}[1;33m", "").replace("\u{1b}[0m", "");
        assert_eq!(bare, told(runs, &Style::default()));
    }
}
