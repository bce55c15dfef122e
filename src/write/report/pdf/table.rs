//! Tables on paper: columns as wide as they need, cells in lines, the head again on every sheet.

use super::flow::{BOTTOM, Face, Flow, INK, INSIDE, MARGIN, RULE, Role, TOP};
use super::lettering::Lettering;
use crate::write::report::page::Column;

/// Room between columns, in sizes of the font.
const GAP: f64 = 0.9;
/// Size of the font, and the least that it shrinks to before words are cut.
const SIZE: f64 = 7.6;
/// As `SIZE`.
const LEAST: f64 = 5.8;

/// A cell in lines.
type Lines = Vec<String>;

/// A table as it will stand.
struct Layout {
    size: f64,
    /// Left edge and width of each column, points.
    columns: Vec<(f64, f64)>,
    head: Vec<Lines>,
    rows: Vec<Vec<Lines>>,
}

/// Sets a table with its caption.
pub fn table(caption: &str, columns: &[Column], rows: &[Vec<String>], flow: &mut Flow) {
    let layout = layout(columns, rows, flow.lettering);
    let within = flow.open(Role::Table);
    let face = Face::plain(layout.size);
    let head_height = height(&layout.head, face) + 4.0;
    let first = layout.rows.first().map_or(0.0, |r| height(r, face) + 3.0);
    if !caption.is_empty() {
        let part = Some(flow.part(Role::Caption));
        let caption_face = Face::plain(8.0).quiet();
        flow.paragraph(part, MARGIN, MARGIN + INSIDE, caption_face, caption, head_height + first);
        flow.y += 1.5;
    }
    let table = flow.within;
    if columns.iter().any(|c| !c.name.is_empty()) {
        flow.room(head_height + first);
        flow.open(Role::Head);
        flow.open(Role::Row);
        head(&layout, columns, face, true, flow);
        flow.within = table;
    }
    flow.open(Role::Rows);
    let body = flow.within;
    for row in &layout.rows {
        let tall = height(row, face) + 3.0;
        if flow.y + tall > BOTTOM && flow.y > TOP {
            flow.turn();
            // The head again, which is not read out twice.
            head(&layout, columns, face, false, flow);
        }
        flow.within = body;
        flow.open(Role::Row);
        for (i, cell) in row.iter().enumerate() {
            let part = flow.part(if i == 0 { Role::RowHead } else { Role::Cell });
            lines(&layout, columns, i, cell, Some(part), flow.y + 1.5, face, flow);
        }
        flow.y += tall;
        flow.rule(flow.y - 0.7, 0.35, RULE);
    }
    flow.within = within;
    flow.y += 5.0;
}

fn height(cells: &[Lines], face: Face) -> f64 {
    cells.iter().map(Vec::len).max().unwrap_or(0) as f64 * face.leading
}

/// The heads of the columns, at the foot of their row.
fn head(layout: &Layout, columns: &[Column], face: Face, read: bool, flow: &mut Flow) {
    let tall = height(&layout.head, face);
    for (i, cell) in layout.head.iter().enumerate() {
        let part = read.then(|| flow.part(Role::ColumnHead));
        let top = flow.y + tall - cell.len() as f64 * face.leading;
        lines(layout, columns, i, cell, part, top, face.bold(), flow);
    }
    flow.y += tall + 3.0;
    flow.rule(flow.y - 1.2, 0.9, INK);
    flow.y += 1.0;
}

#[allow(clippy::too_many_arguments)]
fn lines(
    layout: &Layout,
    columns: &[Column],
    column: usize,
    cell: &Lines,
    part: Option<usize>,
    top: f64,
    face: Face,
    flow: &mut Flow,
) {
    let (left, width) = layout.columns[column];
    for (k, line) in cell.iter().enumerate() {
        let inset =
            if columns[column].figures { width - flow.lettering.width(line) * face.size } else { 0.0 };
        let baseline = top + k as f64 * face.leading + face.size;
        flow.line(part, (left + inset.max(0.0), baseline), face, line);
    }
}

fn layout(columns: &[Column], rows: &[Vec<String>], lettering: &Lettering) -> Layout {
    let legible = |cells: &[String]| cells.iter().map(|c| lettering.legible(c)).collect::<Vec<_>>();
    let names: Vec<String> = columns.iter().map(|c| lettering.legible(&c.name)).collect();
    let cells: Vec<Vec<String>> = rows.iter().map(|r| legible(r)).collect();
    // Bold letters are a little wider than they are measured.
    let bold = 1.04;
    let natural: Vec<f64> = (0..columns.len())
        .map(|i| {
            let in_cells = cells.iter().filter_map(|r| r.get(i)).map(|c| lettering.width(c));
            in_cells.fold(lettering.longest_word(&names[i]) * bold, f64::max)
        })
        .collect();
    let least: Vec<f64> = (0..columns.len())
        .map(|i| {
            let in_cells = cells.iter().filter_map(|r| r.get(i)).map(|c| lettering.longest_word(c));
            in_cells.fold(lettering.longest_word(&names[i]) * bold, f64::max)
        })
        .collect();
    let gaps = GAP * columns.len().saturating_sub(1) as f64;
    let needed: f64 = least.iter().sum::<f64>() + gaps;
    let size = SIZE.min((INSIDE / needed).max(LEAST));
    let room = INSIDE / size - gaps;
    let (wanted, needed) = (natural.iter().sum::<f64>(), needed - gaps);
    let widths: Vec<f64> = if wanted <= room {
        natural
    } else if needed <= room {
        let part = (room - needed) / (wanted - needed);
        least.iter().zip(&natural).map(|(l, n)| l + (n - l) * part).collect()
    } else {
        least.iter().map(|l| l * room / needed).collect()
    };
    let mut left = MARGIN;
    let places = widths
        .iter()
        .map(|w| {
            let place = (left, w * size);
            left += (w + GAP) * size;
            place
        })
        .collect();
    // A hair of room, so that a text as wide as its column does not break by rounding.
    let fit = |text: &str, width: f64| lettering.wrap(text, width * (1.0 + crate::tolerance::ROUND_FIGURE));
    Layout {
        size,
        columns: places,
        head: names.iter().zip(&widths).map(|(n, w)| fit(n, w / bold)).collect(),
        rows: cells.iter().map(|r| r.iter().zip(&widths).map(|(c, w)| fit(c, *w)).collect()).collect(),
    }
}
