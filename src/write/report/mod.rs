//! The report: one HTML file that holds everything, needs no network and no script, and prints as a calculation sheet on
//! A4 paper for those who prepare and check it to sign.

mod areas;
mod extremes;
mod factors;
mod hand;
mod html;
mod sections;
mod stations;
mod traffic;

use crate::outcome::{Document, Run, Verdict};
use crate::write::annotate::note::{CAUTION, heading};
use crate::write::picture;
use crate::write::text::plain;
use html::{Page, escape};

/// What the head of every report says of its maker.
pub const GENERATOR: &str = concat!("<meta name=\"generator\" content=\"", env!("CARGO_PKG_NAME"));

const STYLE: &str = include_str!("style.css");

/// The report on all drawings of a run. `date` is the UTC day, `YYYY-MM-DD`.
pub fn html(document: &Document, date: &str) -> String {
    let title = match document.runs.as_slice() {
        [run] => format!("Line of thrust: {}", sheet_name(run)),
        runs => format!("Line of thrust: {} drawings", runs.len()),
    };
    let mut page = Page::default();
    page.raw("<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n");
    page.raw(&format!("{GENERATOR} {}\">\n", escape(&document.tool.version)));
    page.raw("<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n");
    page.raw("<meta name=\"color-scheme\" content=\"light dark\">\n");
    page.raw(&format!("<title>{}</title>\n<style>\n{STYLE}</style>\n</head>\n<body>\n", escape(&title)));
    page.raw("<a class=\"skip\" href=\"#main\">To the results</a>\n");
    page.raw("<header class=\"sheet-head\">\n<p class=\"kind\">Calculation sheet</p>\n");
    page.raw("<h1>Check of the line of thrust</h1>\n");
    page.raw(&format!(
        "<p class=\"made\">{} {}, {} UTC</p>\n</header>\n<main id=\"main\">\n",
        escape(&document.tool.name),
        escape(&document.tool.version),
        escape(date)
    ));
    if document.runs.len() > 1 {
        contents(&document.runs, &mut page);
    }
    for (i, run) in document.runs.iter().enumerate() {
        drawing(i + 1, run, &mut page);
    }
    page.raw("</main>\n<footer>\n<p>");
    page.text(CAUTION);
    page.raw("</p>\n</footer>\n</body>\n</html>\n");
    page.out
}

/// The name that people know the drawing by: its sheet number where it is known.
fn sheet_name(run: &Run) -> String {
    let file = plain(&picture::name(run));
    match &run.drawing.sheet {
        Some(sheet) => format!("{} ({file})", plain(sheet)),
        None => file,
    }
}

/// The class and words of a verdict. The words say it; the class only adds colour and a kind of border.
fn verdict(run: &Run) -> (&'static str, &'static str) {
    match (&run.error, run.verdict) {
        (Some(_), _) => ("refused", "NOT READ"),
        (None, Some(Verdict::Within)) => ("within", heading(run)),
        (None, Some(Verdict::Outside)) => ("outside", heading(run)),
        (None, Some(Verdict::Unchecked) | None) => ("unchecked", heading(run)),
    }
}

fn contents(runs: &[Run], page: &mut Page) {
    page.raw(
        "<nav aria-labelledby=\"drawings\">\n<h2 id=\"drawings\">Drawings</h2>\n<ol class=\"contents\">\n",
    );
    for (i, run) in runs.iter().enumerate() {
        let (class, words) = verdict(run);
        page.raw(&format!("<li><a href=\"#drawing-{}\">", i + 1));
        page.text(&sheet_name(run));
        page.raw(&format!("</a> <span class=\"tag {class}\">{words}</span></li>\n"));
    }
    page.raw("</ol>\n</nav>\n");
}

fn drawing(number: usize, run: &Run, page: &mut Page) {
    let (class, words) = verdict(run);
    page.number = number;
    page.raw(&format!(
        "<article id=\"drawing-{number}\" aria-labelledby=\"drawing-{number}-name\">\n\
         <h2 id=\"drawing-{number}-name\">"
    ));
    page.text(&sheet_name(run));
    page.raw(&format!("</h2>\n<p class=\"verdict {class}\">{words}</p>\n"));
    if let Some(error) = &run.error {
        sections::refusal(error, page);
        sections::checked(run, page);
        page.raw("</article>\n");
        return;
    }
    sections::summary(run, page);
    sections::checked(run, page);
    sections::elevation(run, page);
    sections::loads(run, page);
    sections::polygon(run, page);
    hand::block(run, page);
    factors::block(run, page);
    sections::findings(run, page);
    stations::tables(run, page);
    extremes::block(run, page);
    sections::offsets(run, page);
    traffic::section(run, page);
    sections::proofs(run, page);
    sections::assumptions(run, page);
    sections::settings(run, page);
    sections::signatures(page);
    page.raw("</article>\n");
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::sample;

    fn report(runs: Vec<Run>) -> String {
        html(&sample::document(runs), "2026-03-01")
    }

    #[test]
    fn holds_what_a_reviewer_signs() {
        let mut run = sample::arch(7, 36.0, 9.0).limited(9.0).run();
        run.settings = serde_json::json!({ "rib": { "depth": 0.4 }, "limits": { "offset": 9.0 } });
        let text = report(vec![run]);
        for needed in [
            "WITHIN THE STATED LIMITS",
            "abababababababab",
            "B-204",
            "Hand check",
            "Simple beam",
            "Prepared by",
            "Checked by",
            "Left out",
            "Settings in force",
            "Proof of optimality",
            "Signs",
            "qualified engineer",
            "2026-03-01 UTC",
        ] {
            assert!(text.contains(needed), "{needed}");
        }
        assert!(
            !text.contains("<script") && !text.contains("http://www.w3.org/1999"),
            "nothing from outside"
        );
        assert!(!text.contains("src=") && !text.contains("url("), "one file");
        assert!(!text.to_lowercase().contains(" safe"));
        assert!(!text.contains("NaN"));
    }

    #[test]
    fn ids_are_unique_and_links_lead_somewhere() {
        let text = report(vec![
            sample::arch(7, 36.0, 9.0).limited(0.01).run(),
            sample::refused(),
            sample::arch(40, 36.0, 9.0).unit_loads().run(),
        ]);
        let values = |name: &str| {
            let start = format!("{name}=\"");
            let parts: Vec<String> = text
                .match_indices(&start)
                .map(|(i, _)| text[i + start.len()..].split('"').next().unwrap().to_owned())
                .collect();
            parts
        };
        let ids = values(" id");
        let mut sorted = ids.clone();
        sorted.sort();
        sorted.dedup();
        assert_eq!(sorted.len(), ids.len(), "an id occurs twice");
        for link in values(" href") {
            assert!(ids.contains(&link.trim_start_matches('#').to_owned()), "{link}");
        }
        for label in values(" aria-labelledby").iter().flat_map(|v| v.split(' ')) {
            assert!(ids.contains(&label.to_owned()), "{label}");
        }
        assert!(text.contains("NOT READ"));
    }

    #[test]
    fn hostile_texts_stay_texts() {
        let mut run = sample::arch(3, 20.0, 5.0).run();
        run.drawing.file = "<script>alert(1)</script>\u{1b}.dxf".into();
        run.spans[0].loads[0].label = "\"><img src=x>".into();
        run.findings[0].message = "</td></table>&amp;".into();
        let text = report(vec![run]);
        assert!(!text.contains("<script") && !text.contains("<img"));
        assert!(text.chars().all(|c| c == '\n' || !c.is_control()));
    }
}
