//! The figure of a load in the extended data of its entity, whatever application wrote it.
//!
//! What says that it is a force comes first: a text that reads as one with a name or a unit (`P = 120 kN`), or a number behind
//! a text that is a word for a load (`LOAD`, 120). Else the only number under an application counts. Numbers of the CAD
//! programs' own applications are settings, and count nowhere.

use super::drawn::Drawn;
use super::figures::{self, Figure, NoFigure};
use super::note::Note;
use crate::drawing::{Extended, Source};
use crate::job::Decimal;

/// A figure and where it stands.
#[derive(Debug, Clone, PartialEq)]
pub struct Found {
    /// The figure; an error of a kind that matters, where a text that says it is a force cannot be read.
    pub figure: Result<Figure, NoFigure>,
    /// The application.
    pub application: String,
    /// The text, or the number with the text before it.
    pub text: String,
}

/// The figure of an entity. Of several that differ none is taken, and that is told.
pub fn figure(
    source: &Source,
    extended: &[Extended],
    is_tag: &dyn Fn(&str) -> bool,
    decimal: Decimal,
    notes: &mut Vec<Note>,
) -> Option<Found> {
    let mut clear = Vec::new();
    let mut lone = Vec::new();
    for group in extended.chunk_by(|a, b| a.application == b.application) {
        let found = |figure, text: String| Found { figure, application: group[0].application.clone(), text };
        let mut numbers = Vec::new();
        for (i, item) in group.iter().enumerate() {
            if item.code == 1000 {
                match figures::read(&item.value, decimal) {
                    Ok(f) if f.unit.is_some() || f.name.is_some() => {
                        clear.push(found(Ok(f), item.value.clone()))
                    }
                    Ok(f) => numbers.push(found(Ok(f), item.value.clone())),
                    Err(why @ NoFigure::TwoReadings { .. }) if item.value.contains(char::is_alphabetic) => {
                        clear.push(found(Err(why), item.value.clone()));
                    }
                    Err(_) => {}
                }
            } else if let Some(value) = item.value.parse::<f64>().ok().filter(|v| v.is_finite()) {
                let figure = Figure { name: None, value, unit: None, per: None };
                let before = i.checked_sub(1).map(|i| &group[i]).filter(|b| b.code == 1000);
                match before {
                    Some(tag) if is_tag(&tag.value) => {
                        clear.push(found(Ok(figure), format!("{} {}", tag.value, item.value)));
                    }
                    _ => numbers.push(found(Ok(figure), item.value.clone())),
                }
            }
        }
        if let [one] = numbers.as_slice()
            && !of_cad(&group[0].application)
        {
            lone.push(one.clone());
        }
    }
    let choice = if clear.is_empty() { lone } else { clear };
    let first = choice.first()?.clone();
    if choice.iter().any(|c| c.figure != first.figure) {
        notes.push(Note::Drawn(Drawn::ExtendedUnclear {
            source: source.clone(),
            texts: choice.iter().map(|c| format!("{} ({})", c.text, c.application)).collect(),
        }));
        return None;
    }
    Some(first)
}

/// Whether an application is one under which CAD programs keep settings of their own.
fn of_cad(application: &str) -> bool {
    let name = application.to_ascii_uppercase();
    name.starts_with("ACAD") || name.starts_with("ACDB")
}
