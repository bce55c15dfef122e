//! The note block: what was shown, from what, held against what, with key, sign sketch and caution.

use crate::geometry::{Point, Vec2};
use crate::outcome::{Check, Finding, FindingVerdict, MagnitudeFrom, Run, Status, Verdict};
use crate::tags::marks::{Across, Along};
use crate::write::annotate::pen::{Canvas, Dash, LEADING, Layer, Words};
use crate::write::annotate::shown::{Shown, governing, kind_name};
use crate::write::annotate::{Sheet, elevation, ring, suggested};
use crate::write::text;

/// Columns of the names and of what stands beside them.
const NAMES: usize = 10;
const VALUES: usize = 56;

/// Words that stand at the foot of every sheet and summary.
pub const CAUTION: &str = "A check for a qualified engineer under the local code; it does not judge the structure. \
The line shown is one possible line of thrust of the loads named here.";

/// Draws the block with its upper left corner at the height of `corner`, at the right edge of the elevation or right of
/// the polygons.
pub fn draw(
    run: &Run,
    sheet: &Sheet,
    spans: &[Shown],
    canvas: &mut Canvas,
    corner: Point,
    polygons_right: f64,
    right: f64,
) {
    let h = canvas.h;
    let width = (NAMES + VALUES + 3) as f64 * h;
    let x = (right - width).max(polygons_right + h);
    let pad = 1.5 * h;
    let mut y = corner.y - pad;
    let layer = Layer::Notes;

    let head = heading(run);
    let flagged = run.verdict != Some(Verdict::Within);
    y -= 1.5 * h;
    canvas.text(
        if flagged { Layer::Flags } else { layer },
        "heading",
        &Words::new(head, Point::new(x + pad, y), 1.5 * h),
    );
    y -= 1.2 * h;
    canvas.line(layer, "rule", Point::new(x, y), Point::new(x + width, y));
    y -= 0.9 * h;

    let values_at = x + pad + (NAMES + 1) as f64 * h;
    for (name, value) in rows(run, sheet, spans) {
        for (i, line) in value.iter().enumerate() {
            y -= h;
            if i == 0 {
                canvas.text(layer, "note", &Words::new(name.clone(), Point::new(x + pad, y), h));
            }
            canvas.text(layer, "note", &Words::new(line.clone(), Point::new(values_at, y), h));
            y -= (LEADING - 1.0) * h;
        }
        y -= 0.3 * h;
    }
    y -= 0.4 * h;
    canvas.line(layer, "rule", Point::new(x, y), Point::new(x + width, y));
    let key_low = key(spans, canvas, Point::new(x + pad, y), &[]);
    let signs_low = signs(canvas, Point::new(x + width - 29.0 * h, y));
    y = key_low.min(signs_low) - 0.6 * h;
    canvas.line(layer, "rule", Point::new(x, y), Point::new(x + width, y));
    y -= 0.8 * h;
    for line in text::wrap(CAUTION, NAMES + VALUES) {
        y -= h;
        canvas.text(layer, "caution", &Words::new(line, Point::new(x + pad, y), h));
        y -= (LEADING - 1.0) * h;
    }
    y -= 0.6 * h;
    canvas.frame(layer, "frame", Point::new(x, corner.y), Point::new(x + width, y));
}

/// The verdict as a heading.
pub fn heading(run: &Run) -> &'static str {
    match run.verdict {
        Some(Verdict::Within) => "WITHIN THE STATED LIMITS",
        Some(Verdict::Outside) => "OUTSIDE A STATED LIMIT",
        Some(Verdict::Unchecked) | None => "SHAPE ONLY, NOT CHECKED",
    }
}

/// The rows of the block: name, and lines of its value.
pub fn rows(run: &Run, sheet: &Sheet, spans: &[Shown]) -> Vec<(String, Vec<String>)> {
    let mut rows: Vec<(String, Vec<String>)> = Vec::new();
    let mut row = |name: &str, value: String| {
        if !value.is_empty() {
            rows.push((name.to_owned(), text::wrap(&text::plain(&value), VALUES)));
        }
    };
    row("Sheet", sheet_words(run));
    row("Source", sheet.source_name.clone());
    row("SHA-256", halves(&sheet.sha256));
    row("Job", sheet.job_hash.as_deref().map_or_else(|| "no job file".to_owned(), halves));
    row("Made by", format!("thrustmark {}, {} UTC", sheet.tool_version, sheet.date));
    let several = spans.len() > 1;
    for shown in spans {
        let name = if several { &shown.span.name } else { "Span" };
        row(name, span_words(run, shown));
    }
    for shown in spans.iter().filter(|s| ring::is_too_deep(s)) {
        row("Ring", format!("{}: not drawn, its depth is more than half the span", shown.span.name));
    }
    // What is the same for all spans is told once.
    for words in told_once(spans.iter().map(|s| (s, line_words(s)))) {
        row("Line", words);
    }
    for words in
        told_once(spans.iter().flat_map(|s| case_rows(run, s).into_iter().map(move |words| (s, words))))
    {
        row("Case", words);
    }
    row("Loads", loads_words(run, spans));
    row("Left out", omitted(run));
    for words in limits(run) {
        row("Limit", words);
    }
    row("Verdict", verdict_words(run));
    for shown in spans {
        row("Worst", worst_words(shown, several));
    }
    for words in
        told_once(spans.iter().map(|s| {
            (s, suggested::words(s, &format!("{}SUGGESTED-AXIS", sheet.prefix.to_ascii_uppercase())))
        }))
    {
        row("Suggested", words);
    }
    let mut last = String::new();
    for (name, _) in &mut rows {
        // A name that repeats stands once.
        if *name == last {
            name.clear();
        } else {
            last.clone_from(name);
        }
    }
    rows
}

/// Words of the spans, each once; where spans differ, headed by the first span that they hold for.
fn told_once<'a, 'b: 'a>(all: impl Iterator<Item = (&'a Shown<'b>, String)>) -> Vec<String> {
    let all: Vec<(&Shown, String)> = all.collect();
    let mut out: Vec<(String, Vec<&str>)> = Vec::new();
    for (shown, words) in &all {
        let name = shown.span.name.as_str();
        match out.iter_mut().find(|(known, _)| known == words) {
            Some((_, spans)) => spans.push(name),
            None => out.push((words.clone(), vec![name])),
        }
    }
    let mut spans: Vec<&str> = all.iter().map(|(s, _)| s.span.name.as_str()).collect();
    spans.dedup();
    out.into_iter()
        .map(
            |(words, of)| {
                if of.len() == spans.len() { words } else { format!("{}: {words}", of.join(", ")) }
            },
        )
        .collect()
}

/// A hash in two halves, so that it fits.
fn halves(hash: &str) -> String {
    match (hash.get(..32), hash.get(32..)) {
        (Some(a), Some(b)) if !b.is_empty() => format!("{a} {b}"),
        _ => hash.to_owned(),
    }
}

fn sheet_words(run: &Run) -> String {
    match (&run.drawing.sheet, &run.drawing.revision) {
        (Some(s), Some(r)) => format!("{s}, revision {r}"),
        (Some(s), None) => s.clone(),
        (None, Some(r)) => format!("revision {r}"),
        (None, None) => String::new(),
    }
}

fn span_words(run: &Run, shown: &Shown) -> String {
    let a = &shown.span.axis;
    let mut words = format!(
        "{} of span {} m, {} {} m",
        shown.span.kind,
        text::metres(a.span),
        if shown.is_cable() { "sag" } else { "rise" },
        text::metres(a.rise.abs())
    );
    if let Some(line) = shown.line
        && let (Some(left), Some(right)) = (&line.left, &line.right)
    {
        let pull = if shown.is_cable() { " (a pull)" } else { "" };
        words.push_str(&format!(
            "; H {}{pull}, V {} left, {} right",
            text::force(left.horizontal, &run.units),
            text::four_digits(left.vertical),
            text::four_digits(right.vertical)
        ));
    }
    words
}

fn line_words(shown: &Shown) -> String {
    let Some(case) = shown.case else {
        return "no case was computed".into();
    };
    if let Some(line) = shown.line {
        let support = line.support.as_deref().map(|s| format!(", support {s}")).unwrap_or_default();
        return format!(
            "{}{support}; one possible line of thrust. Governs: {}",
            kind_name(line.kind),
            case.governs_why
        );
    }
    let why = case.lines.iter().find(|l| l.kind == case.governs).map_or("not computed".to_owned(), |l| {
        l.reason.clone().unwrap_or_else(|| match l.status {
            Status::Unbounded => "unbounded".into(),
            Status::Refused => "refused".into(),
            _ => "none exists".into(),
        })
    });
    format!("no line {} was found: {why}", kind_name(case.governs))
}

/// One row for each case: the drawn one first with its factors, then the others with their results.
fn case_rows(run: &Run, shown: &Shown) -> Vec<String> {
    let mut out = Vec::new();
    for case in &shown.span.cases {
        let drawn = shown.case.is_some_and(|c| std::ptr::eq(c, case));
        let mut words = format!("{}: {}", case.name, factors(run, &case.name));
        if shown.span.cases.len() > 1 {
            if let Some(offset) = governing(case).and_then(|l| l.offset.as_ref()) {
                words.push_str(&format!("; largest offset {} mm", text::signed_millimetres(offset.signed)));
            }
            words.push_str(if drawn { " (drawn heavy)" } else { "" });
        }
        out.push(words);
    }
    out
}

/// The factors of a case as the job states them.
fn factors(run: &Run, name: &str) -> String {
    let cases = run.settings.get("case").and_then(|c| c.as_array());
    let stated = cases
        .and_then(|cases| cases.iter().find(|c| c.get("name").and_then(|n| n.as_str()) == Some(name)))
        .and_then(|c| c.get("factors"))
        .and_then(|f| f.as_object());
    let Some(stated) = stated else {
        return if cases.is_none_or(Vec::is_empty) {
            "everything drawn and given, all factors 1".into()
        } else {
            "factors not stated".into()
        };
    };
    stated
        .iter()
        .map(|(what, factor)| match factor.as_f64() {
            Some(f) => format!("{} x {what}", text::three_digits(f)),
            None => what.clone(),
        })
        .collect::<Vec<_>>()
        .join(" + ")
}

fn loads_words(run: &Run, spans: &[Shown]) -> String {
    let loads: Vec<_> = spans.iter().flat_map(|s| &s.span.loads).collect();
    let mut sets: Vec<&str> = loads.iter().map(|l| l.set.as_str()).collect();
    sets.sort_unstable();
    sets.dedup();
    let (x, y) = loads.iter().fold((0.0, 0.0), |(x, y), l| (x + l.force[0], y + l.force[1]));
    let pieces = |what: MagnitudeFrom| loads.iter().filter(|l| l.magnitude_from == what).count();
    let (own, strips) = (pieces(MagnitudeFrom::SelfWeight), pieces(MagnitudeFrom::Area));
    let lines = loads.iter().filter(|l| l.over.is_some()).count();
    let drawn = loads.len() - own - strips - lines;
    let mut counts = vec![format!("{drawn} load{} as drawn", if drawn == 1 { "" } else { "s" })];
    for (n, of) in [(own, "self weight"), (strips, "areas"), (lines, "line loads")] {
        if n > 0 {
            counts.push(format!("{n} pieces of {of}"));
        }
    }
    let mut words = format!(
        "{}, {} {}",
        counts.join(", "),
        text::force(y.abs(), &run.units),
        if y > 0.0 { "upward" } else { "downward" }
    );
    if x.abs() > y.abs() * crate::tolerance::NO_FORCE {
        words.push_str(&format!(
            ", {} to the {}",
            text::four_digits(x.abs()),
            if x > 0.0 { "right" } else { "left" }
        ));
    }
    if !sets.is_empty() {
        words.push_str(&format!(", on {}", sets.join(", ")));
    }
    if loads.iter().any(|l| l.magnitude_from == MagnitudeFrom::Equal) {
        words.push_str("; no figures drawn, all taken as equal");
    }
    words
}

/// What the loads do not hold, as the findings say it, each thing once.
pub fn omitted(run: &Run) -> String {
    let mut out: Vec<&str> = Vec::new();
    for finding in run.findings.iter().filter(|f| matches!(f.check, Check::LeftOut | Check::OffSpan)) {
        let words = finding.message.trim_end_matches('.');
        let words = words.strip_prefix("left out: ").unwrap_or(words);
        if !out.contains(&words) {
            out.push(words);
        }
    }
    out.join("; ")
}

/// One line for each limit that was stated.
fn limits(run: &Run) -> Vec<String> {
    let mut out: Vec<String> = run
        .findings
        .iter()
        .filter(|f| f.limit.is_some() || f.check == Check::NotJudged)
        .map(|f| limit_words(run, f))
        .collect();
    if out.is_empty() {
        out.push("none stated".into());
    }
    out
}

fn limit_words(run: &Run, finding: &Finding) -> String {
    let Some(figures) = text::against_limit(finding) else {
        return finding.message.clone();
    };
    let name = elevation::check_name(finding.check);
    let became = match finding.verdict {
        FindingVerdict::Outside => "OUTSIDE",
        FindingVerdict::Accepted => "accepted",
        FindingVerdict::Within => "holds",
        FindingVerdict::Note => "note",
    };
    let of_several = |name: &Option<String>, several: bool| name.clone().filter(|_| several);
    let place = [
        of_several(&finding.span, run.spans.len() > 1),
        of_several(&finding.case, run.spans.iter().any(|s| s.cases.len() > 1)),
    ]
    .into_iter()
    .flatten()
    .collect::<Vec<_>>()
    .join(", ");
    let mut words = format!("{name} {figures}: {became}");
    if !place.is_empty() {
        words.push_str(&format!(" ({place})"));
    }
    if let Some(accepted) = &finding.accepted {
        words.push_str(&format!("; {} by {}", accepted.reason, accepted.by));
    }
    words
}

fn verdict_words(run: &Run) -> String {
    match run.verdict {
        Some(Verdict::Within) => "every stated limit holds".into(),
        Some(Verdict::Outside) => {
            let n = run.findings.iter().filter(|f| f.verdict == FindingVerdict::Outside).count();
            format!("{n} stated limit{} not hold", if n == 1 { " does" } else { "s do" })
        }
        Some(Verdict::Unchecked) | None => {
            let why: Vec<&str> =
                run.findings.iter().filter(|f| f.unchecks).map(|f| f.message.trim_end_matches('.')).collect();
            if why.is_empty() {
                "computed, not judged".into()
            } else {
                format!("computed, not judged: {}", why.join("; "))
            }
        }
    }
}

fn worst_words(shown: &Shown, several: bool) -> String {
    let Some(offset) = shown.line.and_then(|l| l.offset.as_ref()) else {
        return String::new();
    };
    let toward = if offset.signed < 0.0 { "intrados" } else { "extrados" };
    let span = if several { format!("{}: ", shown.span.name) } else { String::new() };
    format!(
        "{span}offset {} mm toward the {toward} at x {} m, y {} m",
        text::millimetres(offset.max_abs),
        text::metres(offset.at[0]),
        text::metres(offset.at[1])
    )
}

/// Most kinds of other lines told one by one in the key.
const MOST_KINDS: usize = 6;

/// Names and line types of the lines beside the governing ones.
fn other_kinds(spans: &[Shown]) -> Vec<(String, Option<Dash>)> {
    let mut out: Vec<(String, Option<Dash>)> = Vec::new();
    for (name, dash, _) in spans.iter().flat_map(elevation::beside) {
        let entry = (text::plain(&name), Some(dash));
        if !out.contains(&entry) {
            out.push(entry);
        }
    }
    if out.len() > MOST_KINDS {
        return vec![("other lines, named beside them".into(), Some(Dash::Long))];
    }
    out
}

/// Samples of the lines drawn, those of `more` first. Gives back the height below the last.
pub fn key(
    spans: &[Shown],
    canvas: &mut Canvas,
    corner: Point,
    more: &[(Layer, Option<Dash>, String)],
) -> f64 {
    let h = canvas.h;
    let mut samples = more.to_vec();
    samples.extend([
        (Layer::Line, None, "line of thrust".to_owned()),
        (
            Layer::Offsets,
            None,
            format!("offset, {}", spans.first().map_or("mm", |s| text::length_units(s.units).1)),
        ),
    ]);
    samples.extend(other_kinds(spans).into_iter().map(|(name, dash)| (Layer::OtherLines, dash, name)));
    if canvas.marks.iter().any(|m| m.role == "ring") {
        samples.push((Layer::Ring, None, "ring, joints".into()));
    }
    if canvas.marks.iter().any(|m| m.layer == Layer::Kern as usize) {
        samples.push((Layer::Kern, Some(Dash::Dots), "middle third".into()));
    }
    if canvas.marks.iter().any(|m| m.layer == Layer::Suggested as usize) {
        samples.push((Layer::Notes, Some(Dash::TwoDots), "suggested axis, off".into()));
    }
    samples.push((Layer::Reactions, None, "thrust on the rib".into()));
    samples.push((Layer::Letters, None, "spaces between loads".into()));
    let mut y = corner.y - 0.4 * h;
    for (layer, dash, name) in samples {
        y -= LEADING * h;
        let middle = y + h / 2.0;
        let (a, b) = (Point::new(corner.x, middle), Point::new(corner.x + 6.0 * h, middle));
        match layer {
            Layer::Reactions | Layer::Loads => canvas.arrow(layer, "key", a, b),
            Layer::Letters => canvas.text(layer, "key", &Words::new("a b c", a.midpoint(b), h).centred()),
            _ => canvas.dashed(layer, "key", a, b, dash),
        }
        canvas.text(Layer::Notes, "key", &Words::new(name, Point::new(corner.x + 7.5 * h, y), h));
    }
    y - 0.4 * h
}

/// A piece of rib with the senses in which figures count as positive. Gives back the height below it.
pub fn signs(canvas: &mut Canvas, corner: Point) -> f64 {
    let h = canvas.h;
    let layer = Layer::Notes;
    let y = corner.y - 5.6 * h;
    // A piece of arch, convex upward, pressed at both ends.
    let (a, b) = (Point::new(corner.x + 3.0 * h, y), Point::new(corner.x + 15.0 * h, y));
    canvas.arc(layer, "signs", b, a, 0.2);
    let crown = a.midpoint(b) + Vec2::new(0.0, 0.2 * 6.0 * h);
    let slope = Vec2::from_angle(4.0 * 0.2_f64.atan() / 2.0);
    canvas.arrow(layer, "signs", a - slope * (3.0 * h), a);
    let mirrored = Vec2::new(-slope.x, slope.y);
    canvas.arrow(layer, "signs", b - mirrored * (3.0 * h), b);
    canvas.arrow(layer, "signs", crown, crown + Vec2::new(0.0, 2.6 * h));
    let words = |text: &str, at: Point| Words::new(text, at, h).along(Along::Middle);
    canvas.text(layer, "signs", &words("+ offset", crown + Vec2::new(0.8 * h, 2.0 * h)));
    canvas.text(layer, "signs", &words("axis", crown - Vec2::new(0.0, 1.6 * h)).across(Across::Centre));
    let mut row = y - 2.6 * h;
    for line in [
        "+ offset toward the extrados",
        "+ thrust compression",
        "+ M with + offset",
        "+ H inward, + V upward",
    ] {
        row -= 0.2 * h;
        canvas.text(layer, "signs", &Words::new(line, Point::new(corner.x, row), h));
        row -= (LEADING - 0.2) * h;
    }
    row + 0.5 * h
}
