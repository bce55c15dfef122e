//! The report: one file that holds everything, as a page for browsers (no network, no script) or as a PDF, set as a
//! calculation sheet on A4 paper for those who prepare and check it to sign.

mod areas;
mod envelope;
mod extremes;
mod factors;
mod hand;
mod html;
mod page;
mod pdf;
mod sections;
mod stations;
mod suggestion;
mod traffic;

use crate::outcome::{Document, Run, Verdict};
use crate::refusal::Refusal;
use crate::write::annotate::note::heading;
use crate::write::text::plain;
use crate::write::{picture, us};
use page::{Block, Headed, Page};

/// What the head of every page says of its maker.
pub const GENERATOR: &str = concat!("<meta name=\"generator\" content=\"", env!("CARGO_PKG_NAME"));

pub use pdf::CREATOR;

/// What kind of paper it is.
const KIND: &str = "Calculation sheet";
/// Its heading.
const HEADING: &str = "Check of the line of thrust";

/// What stands at the head of a report.
#[derive(Debug, Clone, PartialEq, Eq)]
struct Head {
    /// Its title, for the viewer's window.
    title: String,
    /// Program, version and date.
    made: String,
    /// The version alone.
    version: String,
    /// The UTC day, `YYYY-MM-DD`.
    date: String,
}

/// The report on all drawings of a run as a page for browsers. `date` is the UTC day, `YYYY-MM-DD`.
pub fn html(document: &Document, date: &str) -> String {
    let document = &*us::told(document);
    html::html(&head(document, date), &blocks(document))
}

/// The same as the bytes of a PDF file.
///
/// # Errors
/// When the font or the PDF library fails, faults of the program.
pub fn pdf(document: &Document, date: &str) -> Result<Vec<u8>, Refusal> {
    let document = &*us::told(document);
    pdf::pdf(&head(document, date), &blocks(document))
}

fn head(document: &Document, date: &str) -> Head {
    Head {
        title: match document.runs.as_slice() {
            [run] => format!("Line of thrust: {}", sheet_name(run)),
            runs => format!("Line of thrust: {} drawings", runs.len()),
        },
        made: format!("{} {}, {date} UTC", document.tool.name, document.tool.version),
        version: document.tool.version.clone(),
        date: date.to_owned(),
    }
}

fn blocks(document: &Document) -> Vec<Block> {
    let mut page = Page::default();
    let headed: Vec<Headed> = document.runs.iter().enumerate().map(|(i, run)| headed(i + 1, run)).collect();
    if headed.len() > 1 {
        page.blocks.push(Block::Contents(headed.clone()));
    }
    for (run, headed) in document.runs.iter().zip(headed) {
        page.blocks.push(Block::Drawing(headed));
        drawing(run, &mut page);
        page.blocks.push(Block::DrawingEnd);
    }
    page.blocks
}

fn headed(number: usize, run: &Run) -> Headed {
    let (class, words) = verdict(run);
    Headed { number, name: sheet_name(run), class, words }
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

fn drawing(run: &Run, page: &mut Page) {
    if let Some(error) = &run.error {
        sections::refusal(error, page);
        sections::checked(run, page);
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
    suggestion::section(run, page);
    stations::tables(run, page);
    envelope::section(run, page);
    extremes::block(run, page);
    sections::offsets(run, page);
    traffic::section(run, page);
    sections::proofs(run, page);
    sections::assumptions(run, page);
    sections::settings(run, page);
    sections::signatures(page);
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
