//! A drawing at a glance, for the terminal.

use std::collections::BTreeMap;
use std::fmt::Write;

use crate::drawing::Reason;
use crate::drawing::viewport::Shown;
use crate::flow::{Listing, LoadLine};
use crate::write::text::plain as escape;

/// The listing as text.
pub fn text(listing: &Listing) -> String {
    let mut out = String::new();
    let mut line = |text: String| {
        out.push_str(&text);
        out.push('\n');
    };
    line(format!(
        "{}: {} {}, text in {}{}",
        escape(&listing.file),
        listing.version.as_deref().map_or("no $ACADVER,".into(), escape),
        listing.form,
        escape(&listing.encoding),
        if listing.marked { ", carries marks of thrustmark (listed without them)" } else { "" }
    ));
    match &listing.units[..] {
        [] => line("units: none stated".into()),
        stated => {
            let stated: Vec<String> = stated.iter().map(|(n, v)| format!("{n} {}", escape(v))).collect();
            line(format!("units: {}", stated.join(", ")));
        }
    }
    if let Some([x0, y0, x1, y1]) = &listing.extents {
        line(format!(
            "extents: ({}, {}) to ({}, {}) by the header",
            escape(x0),
            escape(y0),
            escape(x1),
            escape(y1)
        ));
    }
    if !listing.viewports.is_empty() {
        let views: Vec<String> = listing
            .viewports
            .iter()
            .map(|(scale, shown)| {
                let words = match shown {
                    Some(Shown::Whole) => " shows the axis, and the marks about it",
                    Some(Shown::Part) => " shows a part of the axis",
                    Some(Shown::Nothing) => " shows nothing of the axis",
                    None => "",
                };
                format!("{scale:.6}{words}")
            })
            .collect();
        line(format!("viewports: {} (paper units per drawing unit)", views.join(", ")));
    }
    line(String::new());
    let width = listing.layers.iter().map(|l| escape(&l.name).chars().count()).max().unwrap_or(0).min(40);
    line("layers:".into());
    for layer in &listing.layers {
        let mut parts = Vec::new();
        for (counts, place) in
            [(&layer.model, ""), (&layer.blocks, " in blocks"), (&layer.paper, " in paper space")]
        {
            if !counts.is_empty() {
                parts.push(format!("{}{place}", kinds(counts)));
            }
        }
        if parts.is_empty() {
            parts.push("empty".into());
        }
        let state =
            if layer.state.is_empty() { String::new() } else { format!(" ({})", layer.state.join(", ")) };
        line(format!("  {:width$}  {}{state}", escape(&layer.name), parts.join("; ")));
    }
    line(String::new());
    if listing.suggestions.is_empty() {
        line("no layer looks like an axis or like loads".into());
    }
    for suggestion in &listing.suggestions {
        let why = match &suggestion.reason {
            None => "its name is the one that is looked for".into(),
            Some(Reason::Word(word)) => format!("its name holds the word {word}"),
            Some(Reason::OneLine { span, rise }) => {
                format!(
                    "one line from springing to springing, {span:.6} wide and {rise:.6} high in drawing units"
                )
            }
            Some(Reason::PointsOver { over, of }) => format!("{over} of its {of} points stand over an axis"),
        };
        line(format!("could be {}: {} ({why})", suggestion.role.key(), escape(&suggestion.layer)));
    }
    match &listing.taken {
        Ok((axis, loads)) => {
            let names = |list: &[String]| match list {
                [] => "none".to_string(),
                list => list.iter().map(|n| escape(n)).collect::<Vec<_>>().join(", "),
            };
            line(format!("check would take: axis from {}, loads from {}", names(axis), names(loads)));
        }
        Err(refusal) => line(format!("check would refuse: {}", escape(&refusal.to_string()))),
    }
    match &listing.loads {
        None => {}
        Some(Err(refusal)) => line(format!("check would refuse: {}", escape(&refusal.to_string()))),
        Some(Ok(loads)) if loads.is_empty() => {}
        Some(Ok(loads)) => {
            line(String::new());
            line("loads as they would be taken:".into());
            for load in loads {
                line(format!("  {}", load_words(load)));
            }
        }
    }
    out
}

/// What a load would be taken for, and why.
fn load_words(load: &LoadLine) -> String {
    let unit = match (load.in_kn, load.to.is_some()) {
        (true, true) => "kN/m",
        (true, false) => "kN",
        (false, _) => "unit loads",
    };
    let [x, y] = load.force;
    let force = match (x.abs() > 0.0, y <= 0.0) {
        (true, _) => format!("{x:.4} to the right and {y:.4} upward {unit}"),
        (false, true) => format!("{:.4} {unit} down", -y),
        (false, false) => format!("{y:.4} {unit} up"),
    };
    let place = match load.to {
        Some(to) => format!("from x {:.4} m to {:.4} m", load.at[0], to[0]),
        None => format!("at ({:.4}, {:.4}) m", load.at[0], load.at[1]),
    };
    let sense = load.sense.map_or_else(String::new, |s| format!("; {s}"));
    let span = load.span.as_deref().unwrap_or("over no span, left out");
    format!(
        "{} ({}, layer {}) {place}, {span}: {force}, by {}{sense}",
        escape(&load.label),
        escape(&load.entity),
        escape(&load.layer),
        escape(&load.from)
    )
}

fn kinds(counts: &BTreeMap<String, u64>) -> String {
    let mut out = String::new();
    for (kind, count) in counts {
        let _ = write!(out, "{}{count} {}", if out.is_empty() { "" } else { ", " }, escape(kind));
    }
    out
}
