//! Which layers could serve as what, for a listing: nothing is decided here.

use super::note::{Reason, Role};
use super::outlook::{self, Line};
use super::roles::{CURVES, LOADS, POINTS};
use super::{convert, gather, names, roles};
use crate::job::{Role as JobRole, Settings};
use crate::refusal::Refusal;
use crate::tags::{self, Outline};
use crate::tolerance;

/// A layer that could serve as something.
#[derive(Debug, Clone, PartialEq)]
pub struct Suggestion {
    /// As what.
    pub role: Role,
    /// The layer.
    pub layer: String,
    /// Why; `None`: the job's (or the usual) layer name says so.
    pub reason: Option<Reason>,
}

/// Looks at the layers of a drawing: those that the layer names of the job claim; and, where these leave the axis or the
/// loads open, those whose names hold a word of the trade, and those whose content looks like an axis or like loads over
/// one. Only for the latter the drawing is read once more.
///
/// # Errors
/// When the drawing cannot be read a second time, or the job gives one layer to two roles.
pub fn suggest(
    bytes: &tags::Source,
    outline: &Outline,
    settings: &Settings,
) -> Result<Vec<Suggestion>, Refusal> {
    let mut found = Vec::new();
    let kinds = [&CURVES[..], &POINTS[..], &["LEADER"]].concat();
    let mut layers = roles::holding(outline, &kinds, tolerance::GUESS_ENTITIES, &[]);
    let mut claimed = Vec::new();
    for layer in &layers {
        claimed.push(roles::role_of(settings, layer)?);
    }
    let is = |role| claimed.contains(&Some(role));
    let line = is(JobRole::Axis) || is(JobRole::Intrados) && is(JobRole::Extrados);
    let rescanned;
    let records = if line && is(JobRole::Loads) {
        let mut named = claimed.iter().map(Option::is_some);
        layers.retain(|_| named.next().unwrap_or(false));
        &outline.records
    } else {
        rescanned = gather::rescan(bytes, &layers, &kinds)?;
        &rescanned
    };
    let mut lines: Vec<(Vec<super::Curve>, Line)> = Vec::new();
    for layer in &layers {
        let one = std::slice::from_ref(layer);
        let curves: Result<Vec<_>, Refusal> = gather::in_model(records, one)
            .filter(|r| CURVES.contains(&r.kind.as_str()))
            .map(|r| convert::curve(r, &outline.decoder))
            .collect();
        // A layer with an entity that cannot be read is no candidate; were it named, the entity would be refused.
        let curves: Vec<_> = curves.unwrap_or_default().into_iter().flatten().collect();
        let reason = match roles::role_of(settings, layer)? {
            Some(JobRole::Axis) => Some(None),
            Some(ring @ (JobRole::Intrados | JobRole::Extrados)) if !curves.is_empty() => {
                let role = if ring == JobRole::Intrados { Role::Intrados } else { Role::Extrados };
                found.push(Suggestion { role, layer: layer.clone(), reason: None });
                lines.extend(outlook::one_line(&curves).map(|line| (curves, line)));
                continue;
            }
            Some(_) => None,
            None => outlook::one_line(&curves)
                .map(|line| Some(Reason::OneLine { span: line.span, rise: line.rise }))
                .or_else(|| {
                    let word = names::axis_word(layer).filter(|_| !curves.is_empty())?;
                    Some(Some(Reason::Word(word.1)))
                }),
        };
        if let Some(reason) = reason {
            found.push(Suggestion { role: Role::Axis, layer: layer.clone(), reason });
            lines.extend(outlook::one_line(&curves).map(|line| (curves, line)));
        }
    }
    for layer in &layers {
        let one = std::slice::from_ref(layer);
        let points: Vec<_> = gather::in_model(records, one)
            .filter(|r| POINTS.contains(&r.kind.as_str()))
            .filter_map(|r| convert::point(r, &outline.decoder).ok().flatten())
            .collect();
        if points.is_empty() {
            // Arrows alone.
            let arrows = gather::in_model(records, one).any(|r| LOADS.contains(&r.kind.as_str()));
            if arrows && roles::role_of(settings, layer)? == Some(JobRole::Loads) {
                found.push(Suggestion { role: Role::Loads, layer: layer.clone(), reason: None });
            }
            continue;
        }
        let over = |(curves, line): &(Vec<super::Curve>, Line)| {
            points.iter().filter(|p| gather::stands_over(p.at, curves, line)).count()
        };
        let most = lines.iter().map(over).max().unwrap_or(0);
        let reason = match roles::role_of(settings, layer)? {
            Some(JobRole::Loads) => Some(None),
            Some(_) => None,
            None => names::loads_word(layer).map(|word| Some(Reason::Word(word))).or_else(|| {
                let enough = most > 1 && most as f64 >= tolerance::POINTS_OVER * points.len() as f64;
                enough.then_some(Some(Reason::PointsOver { over: most, of: points.len() }))
            }),
        };
        if let Some(reason) = reason {
            found.push(Suggestion { role: Role::Loads, layer: layer.clone(), reason });
        }
    }
    Ok(found)
}
